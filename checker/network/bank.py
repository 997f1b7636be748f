"""Recognise the structure of each bank from the graph: strings in series, strings in parallel, take-offs."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.boat.parts import Battery, Bus
from checker.network.graph import BatteryTie, EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import live_edges, places


@dataclass(frozen=True, slots=True)
class Bank:
    """Hold one bank: its strings from the lowest battery to the highest, its voltage and capacity.

    Series adds volts, parallel adds ampere-hours: V = n_s·V_b, Ah = n_p·Ah_b.
    """

    id: str
    strings: tuple[tuple[str, ...], ...]
    voltage_v: float
    capacity_ah: float


def study_banks(boat: Boat, network: Network, potentials: Potentials) -> tuple[Bank, ...]:
    """Return every bank with its structure, in the order of ids."""
    banks: list[Bank] = []
    for name in sorted({battery.bank for battery in network.batteries}):
        ties = [battery for battery in network.batteries if battery.bank == name]
        strings = _strings(ties, potentials)
        volts = max((sum(_part(boat, b).voltage_v for b in string) for string in strings), default=0.0)
        capacity = sum(min(_part(boat, b).capacity_ah for b in string) for string in strings)
        banks.append(Bank(name, strings, volts, capacity))
    return tuple(banks)


def _part(boat: Boat, device: str) -> Battery:
    part = boat.devices[device].part
    assert isinstance(part, Battery)
    return part


def _strings(ties: list[BatteryTie], potentials: Potentials) -> tuple[tuple[str, ...], ...]:
    """Follow the links upward from each battery whose negative post is no other battery's positive net.

    Blocks whose middle points are joined across strings are taken in the order of their ids.
    """
    net = potentials.net
    by_bottom: dict[int, list[BatteryTie]] = {}
    for tie in sorted(ties, key=lambda tie: tie.device):
        by_bottom.setdefault(net[tie.neg], []).append(tie)
    tops = {net[tie.pos] for tie in ties}
    used: set[str] = set()
    strings: list[tuple[str, ...]] = []
    for start in sorted(ties, key=lambda tie: tie.device):
        if net[start.neg] in tops or start.device in used:
            continue
        string = [start]
        used.add(start.device)
        while True:
            onward = [t for t in by_bottom.get(net[string[-1].pos], ()) if t.device not in used]
            if not onward:
                break
            string.append(onward[0])
            used.add(onward[0].device)
        strings.append(tuple(tie.device for tie in string))
    return tuple(strings)


def inner_landings(boat: Boat, network: Network) -> list[tuple[str, str]]:
    """Return conductors, and devices mounted there, that land on a battery between others of its row, with it.

    A post is between others if bank conductors lead from it to batteries both ways; where the
    row is joined at a bus instead, no post is.
    """
    posts = {network.posts[p]: b for b in network.batteries for p in (b.pos, b.neg)}
    links: dict[str, set[str]] = {}
    for conductor in boat.conductors.values():
        ends = (conductor.start, conductor.end)
        if all(end in posts for end in ends) and posts[ends[0]].bank == posts[ends[1]].bank:
            links.setdefault(ends[0], set()).add(ends[1])
            links.setdefault(ends[1], set()).add(ends[0])
    between = {
        post for post, others in links.items()
        if len({other for other in others if other.rpartition(".")[2] == post.rpartition(".")[2]}) > 1
    }  # fmt: skip
    found: list[tuple[str, str]] = []
    for conductor in boat.conductors.values():
        for here, there in ((conductor.start, conductor.end), (conductor.end, conductor.start)):
            if here in between and there not in posts:
                found.append((conductor.id, posts[here].device))
    for device in boat.devices.values():
        found += [(device.id, posts[post].device) for _, post in device.mounts if post in between]
    return found


def row_links(boat: Boat, network: Network, bank: str) -> list[str]:
    """Return the conductors of a bank: those that join its batteries to each other or to a bus beside them."""
    posts = {network.posts[p] for b in network.batteries if b.bank == bank for p in (b.pos, b.neg)}
    found: list[str] = []
    for conductor in boat.conductors.values():
        ends = [conductor.start, conductor.end]
        inside = sum(end in posts for end in ends)
        others = [boat.device_of(end) for end in ends if end not in posts]
        if inside == 2 or (inside == 1 and others[0] is not None and isinstance(others[0].part, Bus)):
            found.append(conductor.id)
    return found


def bare_strings(network: Network, potentials: Potentials, strings: Sequence[tuple[str, ...]]) -> tuple[str, ...]:
    """Return the top batteries of strings that no overcurrent device of their own parts from the other strings.

    Posts with no device between them are one place. A string has a device of its own where its
    place has no other string's top and one device alone leads from it to the others; with two
    strings and one device between them, the string on the side of the loads is bare.
    """
    place = places(network, potentials.state, (EdgeKind.DEVICE,))
    at: dict[int, list[tuple[int, int]]] = {}
    for index in live_edges(network, potentials.state):
        edge = network.edges[index]
        if edge.kind is EdgeKind.DEVICE and place[edge.a] != place[edge.b]:
            at.setdefault(place[edge.a], []).append((index, place[edge.b]))
            at.setdefault(place[edge.b], []).append((index, place[edge.a]))

    def passing(where: int) -> tuple[float, int]:
        """Return what the devices of a place pass together; of two alike the place of the later post counts."""
        return sum(network.edges[index].rating_a for index, _ in at[where]), where

    tops = {b.device: place[b.pos] for b in network.batteries}
    names = [string[-1] for string in strings]
    bare: list[str] = []
    for name in names:
        own = tops[name]
        others = {tops[other] for other in names if other != name}
        leading = [far for _, far in at.get(own, ()) if _reaches(at, far, others, own)]
        is_beside_loads = len(leading) == 1 and leading[0] in others and passing(own) > passing(leading[0])
        if own in others or len(leading) > 1 or is_beside_loads:
            bare.append(name)
    return tuple(bare)


def _reaches(at: Mapping[int, list[tuple[int, int]]], start: int, goals: set[int], without: int) -> bool:
    """Tell whether one of some places is reached over devices, not through one place."""
    seen, waiting = {start, without}, [start]
    while waiting:
        here = waiting.pop()
        if here in goals:
            return True
        for _, far in at.get(here, ()):
            if far not in seen:
                seen.add(far)
                waiting.append(far)
    return False
