"""Find the conductors that feed a cranking motor, among those declared to.

A declared conductor is believed if it lies on a way between a battery and a motor that such
conductors and switches alone make; what merely hangs on that way does not feed the motor.
"""

from __future__ import annotations

from checker.boat.hull import Boat
from checker.boat.parts import Load
from checker.network.graph import EdgeKind, Network
from checker.network.walk import groups

ROLE = "cranking"


def cranking_conductors(boat: Boat, network: Network) -> frozenset[str]:
    """Return the declared cranking conductors that lie between a battery and a motor."""
    free = (EdgeKind.CONTACT, EdgeKind.JOINT, EdgeKind.SHUNT)
    place = groups(len(network.posts), ((e.a, e.b) for e in network.edges if e.kind in free))
    anchored = {place[post] for battery in network.batteries for post in (battery.pos, battery.neg)}
    for load in network.loads:
        part = boat.devices[load.device].part
        if isinstance(part, Load) and part.is_motor:
            anchored |= {place[load.feed], place[load.back]}
    kept = {
        c.id: (place[network.index[c.start]], place[network.index[c.end]])
        for c in boat.conductors.values()
        if c.role == ROLE
    }
    while True:
        meeting: dict[int, int] = {}
        for ends in kept.values():
            for end in ends:
                meeting[end] = meeting.get(end, 0) + 1
        loose = [name for name, ends in kept.items() if any(meeting[e] < 2 and e not in anchored for e in ends)]
        if not loose:
            return frozenset(kept)
        for name in loose:
            del kept[name]
