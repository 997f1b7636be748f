"""Ask what each hand switch makes dead, and what stays live with all of them off."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.boat.parts import Switch
from checker.network.graph import EdgeKind, Network, SourceTie
from checker.network.losses import live_loads, live_nets
from checker.network.potentials import Potentials, study_potentials
from checker.network.states import SwitchState, places_beyond


@dataclass(frozen=True, slots=True)
class Isolation:
    """Hold what one hand switch does when it alone is turned off in a normal state.

    `off` is the name of its state that closes least. A switch that is not `is_closed` in that
    normal state has nothing to turn off there. `dead` are the loads, and inputs of converters, that
    it makes dead.
    """

    switch: str
    off: str
    is_closed: bool
    dead: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class StaysLive:
    """Hold what a battery still holds at a voltage with every switch off.

    `loads` are those of the live loads with their bank, `devices` and `conductors` have at least
    one live post. `sources` are the outputs of sources with the banks that they still reach.
    """

    loads: tuple[tuple[str, tuple[str, ...]], ...]
    devices: tuple[str, ...]
    conductors: tuple[str, ...]
    sources: tuple[tuple[SourceTie, tuple[str, ...]], ...]


def hand_switches(boat: Boat, network: Network, usual: Potentials) -> tuple[Isolation, ...]:
    """Return what each hand switch isolates, starting from one normal state."""
    live = live_loads(network, usual)
    found: list[Isolation] = []
    for device in boat.devices.values():
        if not isinstance(device.part, Switch) or not device.part.by_hand:
            continue
        off, pairs = min(device.part.states, key=lambda row: (len(row[1]), row[0]))
        own = {contact for contact in usual.state.closed if contact[0] == device.id}
        left = {(device.id, a, b) for a, b in pairs}
        closed = (usual.state.closed - own) | left
        state = SwitchState(f"{device.id} off", True, frozenset(closed), f"{device.id} {off}")
        dead = live - live_loads(network, study_potentials(network, state))
        found.append(Isolation(device.id, off, bool(own - left), tuple(sorted(dead))))
    return tuple(found)


def stays_live(boat: Boat, network: Network, all_off: Potentials) -> StaysLive:
    """Return what stays live in the state with every switch off."""
    net, live = all_off.net, live_nets(network, all_off)
    banks: dict[str, set[int]] = {}
    for battery in network.batteries:
        if not all_off.is_return(battery.pos):
            banks.setdefault(battery.bank, set()).add(net[battery.pos])
    posts = {number for number, place in enumerate(net) if place in live}
    devices = (boat.device_of(network.posts[number]) for number in posts)
    wires = (e.part for e in network.edges if e.kind is EdgeKind.CONDUCTOR and {e.a, e.b} & posts)
    return StaysLive(
        loads=tuple(
            (load.device, _feeding(network, net, banks, net[load.feed]))
            for load in sorted(network.loads, key=lambda load: load.device)
            if net[load.feed] in live
        ),
        devices=tuple(sorted({device.id for device in devices if device is not None})),
        conductors=tuple(sorted(set(wires))),
        sources=tuple((source, _reached(network, net, banks, net[source.out])) for source in network.sources),
    )


def _feeding(network: Network, net: Sequence[int], banks: Mapping[str, set[int]], place: int) -> tuple[str, ...]:
    """Return the banks that feed a place straight, without a converter between."""
    return tuple(sorted(bank for bank, tops in banks.items() if place in places_beyond(network, net, tops)))


def _reached(network: Network, net: Sequence[int], banks: Mapping[str, set[int]], place: int) -> tuple[str, ...]:
    """Return the banks that current from a place can come to."""
    beyond = places_beyond(network, net, [place])
    return tuple(sorted(bank for bank, tops in banks.items() if tops & beyond))
