"""Ask by which devices and contacts each load is fed, and what runs beside what.

The way of a load is told from the load to its bank. What a device or contact on it parts, when
it opens, follows from the exposure study: nothing else may feed what lies beyond.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.boat.parts import Bus, Overcurrent, Switch
from checker.network.exposure import ExposureStudy
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import SwitchState, live_edges, places, places_beyond
from checker.network.walk import groups

_OPENS = (EdgeKind.DEVICE, EdgeKind.CONTACT)


@dataclass(frozen=True, slots=True)
class Step:
    """Hold one device or switch on the way of a load.

    `parts_it`: opened, it takes the feed from the load. `is_alone`: and from nothing else.
    """

    part: str
    is_device: bool
    parts_it: bool
    is_alone: bool


def study_ways(network: Network, potentials: Potentials, study: ExposureStudy) -> dict[str, tuple[Step, ...]]:
    """Return for each load that is fed in a state what stands between it and its bank, nearest first.

    Inputs of converters count as loads, but have no entry of their own.
    """
    came = _tree(network, potentials)
    served: dict[int, int] = {}
    ways: dict[str, list[tuple[Edge, int]]] = {}
    for tie in network.loads:
        end = tie.back if potentials.is_return(tie.feed) else tie.feed
        if end not in came:
            continue
        way = list(_upward(came, end))
        for edge, _ in way:
            served[edge.index] = served.get(edge.index, 0) + 1
        if not tie.is_input:
            ways[tie.device] = way
    return {load: tuple(_step(study, served, edge, near) for edge, near in way) for load, way in ways.items()}


def _step(study: ExposureStudy, served: dict[int, int], edge: Edge, near: int) -> Step:
    parts_it = study.leads_all(edge, near)
    return Step(edge.part, edge.kind is EdgeKind.DEVICE, parts_it, parts_it and served[edge.index] == 1)


def _tree(network: Network, potentials: Potentials) -> dict[int, Edge | None]:
    """Return for each fed post the edge toward its bank, or toward a source where no bank feeds it."""
    at: list[list[Edge]] = [[] for _ in network.posts]
    for index in live_edges(network, potentials.state):
        edge = network.edges[index]
        if not potentials.is_return(edge.a):
            at[edge.a].append(edge)
            at[edge.b].append(edge)
    for edge in network.diodes:
        at[edge.a].append(edge)
    banks = [p for battery in network.batteries for p in (battery.pos, battery.neg) if not potentials.is_return(p)]
    came: dict[int, Edge | None] = {}
    for roots in (banks, [s.out for s in network.sources if not potentials.is_return(s.out)]):
        waiting = deque(root for root in roots if root not in came)
        came.update(dict.fromkeys(waiting))
        while waiting:
            node = waiting.popleft()
            for edge in at[node]:
                far = edge.other(node)
                if far not in came:
                    came[far] = edge
                    waiting.append(far)
    return came


def _upward(came: dict[int, Edge | None], post: int) -> Iterator[tuple[Edge, int]]:
    """Yield the devices and contacts from a post to its bank, each with its end nearer the post."""
    while (edge := came[post]) is not None:
        if edge.kind in _OPENS:
            yield edge, post
        post = edge.other(post)


def never_off(boat: Boat, network: Network, all_off: SwitchState) -> frozenset[str]:
    """Return the loads that a battery feeds with every switch and every breaker open."""
    breakers = {d.id for d in boat.devices.values() if isinstance(d.part, Overcurrent) and d.part.is_breaker}
    live = [edge for edge in (network.edges[i] for i in live_edges(network, all_off)) if edge.part not in breakers]
    net = groups(len(network.posts), ((edge.a, edge.b) for edge in live))
    home = net[network.reference]
    tops = {net[battery.pos] for battery in network.batteries} | {net[battery.neg] for battery in network.batteries}
    reached = places_beyond(network, net, tops - {home})
    return frozenset(tie.device for tie in network.loads if net[tie.feed] in reached and not tie.is_input)


@dataclass(frozen=True, slots=True)
class Entry:
    """Hold an overcurrent device that feeds a stretch of wiring: its line and load posts as it is fed here."""

    device: str
    line: int
    load: int


@dataclass(frozen=True, slots=True)
class Fed:
    """Hold a stretch without a bus that loads hang on and that several devices feed.

    `is_beside`: all of them are fed from one and the same stretch.
    """

    loads: tuple[str, ...]
    entries: tuple[Entry, ...]
    is_beside: bool


def fed_twice(boat: Boat, network: Network, potentials: Potentials) -> tuple[Fed, ...]:
    """Return the stretches with loads that power reaches over more than one device in a state."""
    region = places(network, potentials.state, (EdgeKind.DEVICE,))
    ways = _entries(network, region)
    banks = {region[p] for b in network.batteries for p in (b.pos, b.neg) if not potentials.is_return(p)}
    giving = banks | {region[source.out] for source in network.sources if not potentials.is_return(source.out)}
    buses = {region[network.index[d.id]] for d in boat.devices.values() if _is_bus(boat, d.id)}
    loads: dict[int, list[str]] = {}
    for tie in network.loads:
        loads.setdefault(region[tie.feed], []).append(tie.device)
    found: list[Fed] = []
    for here, names in loads.items():
        around = ways.get(here, [])
        if len(around) < 2 or here in buses or here in banks or potentials.is_return(around[0].load):
            continue
        fed = [entry for entry in around if _reaches(region, ways, region[entry.line], here, giving)]
        if len(fed) > 1:
            is_beside = len({region[entry.line] for entry in fed}) == 1
            found.append(Fed(tuple(sorted(set(names))), tuple(fed), is_beside))
    return tuple(sorted(found, key=lambda one: one.loads))


def _entries(network: Network, region: Sequence[int]) -> dict[int, list[Entry]]:
    """Return for each stretch the devices at its edge, each with the post inside as its load post."""
    found: dict[int, list[Entry]] = {}
    for edge in network.edges:
        if edge.kind is EdgeKind.DEVICE and region[edge.a] != region[edge.b]:
            found.setdefault(region[edge.a], []).append(Entry(edge.part, edge.b, edge.a))
            found.setdefault(region[edge.b], []).append(Entry(edge.part, edge.a, edge.b))
    return found


def _is_bus(boat: Boat, name: str) -> bool:
    part = boat.devices[name].part
    return isinstance(part, Bus) and not part.is_splice


def _reaches(region: Sequence[int], ways: dict[int, list[Entry]], start: int, without: int, giving: set[int]) -> bool:
    """Tell whether a stretch reaches a bank or source without passing another one."""
    seen, waiting = {start, without}, [start]
    while waiting:
        here = waiting.pop()
        if here in giving:
            return True
        for entry in ways.get(here, ()):
            far = region[entry.line]
            if far not in seen:
                seen.add(far)
                waiting.append(far)
    return False


def devices_beside(network: Network, potentials: Potentials) -> tuple[tuple[Entry, ...], ...]:
    """Return the groups of overcurrent devices whose line sides are one stretch and whose load sides are another."""
    region = places(network, potentials.state, (EdgeKind.DEVICE,))
    groups_of: dict[tuple[int, int], list[Entry]] = {}
    for edge in network.edges:
        a, b = region[edge.a], region[edge.b]
        if edge.kind is EdgeKind.DEVICE and a != b:
            entry = Entry(edge.part, edge.a, edge.b) if a < b else Entry(edge.part, edge.b, edge.a)
            groups_of.setdefault((min(a, b), max(a, b)), []).append(entry)
    return tuple(tuple(group) for group in groups_of.values() if len(group) > 1)


@dataclass(frozen=True, slots=True)
class OpenedReturn:
    """Hold a device or hand switch in a return, and what stays live when it opens; empty where nothing does."""

    part: str
    stays_live: tuple[str, ...]


def opened_returns(boat: Boat, network: Network, potentials: Potentials) -> tuple[OpenedReturn, ...]:
    """Return the overcurrent devices and hand switches that open a conductor at the reference's potential."""
    live = [network.edges[i] for i in live_edges(network, potentials.state)]
    names: list[str] = []
    for edge in live:
        is_return = potentials.is_return(edge.a) and edge.kind in _OPENS
        if is_return and edge.part not in names and _is_opened_by_hand(boat, edge.part):
            names.append(edge.part)
    return tuple(
        OpenedReturn(name, _stays_live(network, potentials, live, opened_with(boat, name))) for name in sorted(names)
    )


def opened_with(boat: Boat, name: str) -> frozenset[str]:
    """Return the devices that open when one does: the poles of one breaker, whichever of them names the other."""
    poles = {frozenset((d.id, d.trips_with)) for d in boat.devices.values() if d.trips_with}
    return frozenset((name,)).union(*(pair for pair in poles if name in pair))


def _is_opened_by_hand(boat: Boat, name: str) -> bool:
    part = boat.devices[name].part
    return isinstance(part, Overcurrent) or (isinstance(part, Switch) and part.by_hand)


def _stays_live(
    network: Network, potentials: Potentials, live: Sequence[Edge], opened: frozenset[str]
) -> tuple[str, ...]:
    """Return the loads, sources and batteries whose return some parts take away, and not their feed with it."""
    own = {edge.index for edge in live if edge.part in opened and edge.kind in _OPENS}
    net = groups(len(network.posts), ((e.a, e.b) for e in live if e.index not in own))
    tops = {net[p] for b in network.batteries for p in (b.pos, b.neg) if not potentials.is_return(p)}
    grounds = {net[p] for b in network.batteries for p in (b.pos, b.neg) if potentials.is_return(p)}
    ties = [(tie.device, tie.feed, tie.back) for tie in network.loads]
    ties += [(tie.device, tie.out, tie.back) for tie in network.sources]
    found = [
        device for device, feed, back in ties
        if potentials.is_return(back) and net[back] not in grounds and net[feed] in tops
    ]  # fmt: skip
    if not found and all(potentials.is_return(network.edges[index].a) for index in own):
        home = net[network.reference]
        found = [b.device for b in network.batteries if potentials.is_return(b.neg) and net[b.neg] != home]
    return tuple(dict.fromkeys(found))
