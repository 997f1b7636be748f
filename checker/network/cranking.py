"""Find the conductors that feed a cranking motor, and those that belong to a bank, among those declared to.

A declared conductor is believed if it lies on a way that such conductors and switches alone
make: between a battery and a motor for cranking, between batteries of one bank for a bank.
What merely hangs on such a way is neither.
"""

from __future__ import annotations

from checker.boat.hull import Boat
from checker.boat.parts import Bus, Load
from checker.network.graph import EdgeKind, Network
from checker.network.walk import groups

CRANKING, BANK = "cranking", "bank"
_FREE = (EdgeKind.CONTACT, EdgeKind.JOINT, EdgeKind.SHUNT)


def cranking_conductors(boat: Boat, network: Network) -> frozenset[str]:
    """Return the declared cranking conductors that lie between a battery and a motor."""
    place = groups(len(network.posts), ((e.a, e.b) for e in network.edges if e.kind in _FREE))
    anchored = {place[post] for battery in network.batteries for post in (battery.pos, battery.neg)}
    for load in network.loads:
        part = boat.devices[load.device].part
        if isinstance(part, Load) and part.is_motor:
            anchored |= {place[load.feed], place[load.back]}
    return frozenset(_between(_claimed(boat, network, CRANKING, place), anchored))


def bank_conductors(boat: Boat, network: Network) -> frozenset[str]:
    """Return the declared bank conductors that lie between batteries of one and the same bank."""
    place = groups(len(network.posts), ((e.a, e.b) for e in network.edges if e.kind in _FREE))
    claimed = _claimed(boat, network, BANK, place)
    found: set[str] = set()
    for bank in sorted({battery.bank for battery in network.batteries}):
        posts = {place[p] for b in network.batteries if b.bank == bank for p in (b.pos, b.neg)}
        others = {place[p] for b in network.batteries if b.bank != bank for p in (b.pos, b.neg)}
        # A way that also reaches another bank is a tie between banks, which is no part of either.
        joined = groups(len(network.posts), claimed.values())
        tied = {joined[post] for post in others}
        own = {name: ends for name, ends in claimed.items() if joined[ends[0]] not in tied}
        found |= _between(own, posts).keys()
    return frozenset(found)


def take_off_conductors(boat: Boat, network: Network) -> frozenset[str]:
    """Return the bank conductors, and those declared so that join a battery's post to a bus or stud.

    The latter are where the bank is taken off, and no way round protection.
    """
    posts = {network.posts[p] for battery in network.batteries for p in (battery.pos, battery.neg)}
    found = set(bank_conductors(boat, network))
    for conductor in boat.conductors.values():
        ends = {conductor.start, conductor.end}
        if conductor.role == BANK and len(ends & posts) == 1:
            device = boat.device_of((ends - posts).pop())
            if device is not None and isinstance(device.part, Bus):
                found.add(conductor.id)
    return frozenset(found)


def _claimed(boat: Boat, network: Network, role: str, place: list[int]) -> dict[str, tuple[int, int]]:
    return {
        c.id: (place[network.index[c.start]], place[network.index[c.end]])
        for c in boat.conductors.values()
        if c.role == role
    }


def _between(claimed: dict[str, tuple[int, int]], anchored: set[int]) -> dict[str, tuple[int, int]]:
    """Take away, again and again, whatever has an end where nothing claimed goes on and no anchor is."""
    kept = dict(claimed)
    while True:
        meeting: dict[int, int] = {}
        for ends in kept.values():
            for end in ends:
                meeting[end] = meeting.get(end, 0) + 1
        loose = [name for name, ends in kept.items() if any(meeting[e] < 2 and e not in anchored for e in ends)]
        if not loose:
            return kept
        for name in loose:
            del kept[name]
