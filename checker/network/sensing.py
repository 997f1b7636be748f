"""Ask what a charge source reaches: banks, over how much of a diode's drop, arrays; and what a shunt's stud does."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from checker.network.bank import Bank
from checker.network.graph import Edge, EdgeKind, LoadTie, Network, SourceTie
from checker.network.potentials import Potentials
from checker.network.states import SwitchState, live_edges, places
from checker.network.walk import neighbours, path_between, path_words, shortest_tree

Tops = Mapping[str, tuple[int, ...]]
"""The positive posts of each bank: the upper posts of the top batteries of its strings."""


def bank_tops(network: Network, banks: Sequence[Bank]) -> Tops:
    """Return the positive posts of each bank."""
    pos = {battery.device: battery.pos for battery in network.batteries}
    return {bank.id: tuple(pos[string[-1]] for string in bank.strings) for bank in banks if bank.strings}


@dataclass(frozen=True, slots=True)
class Charging:
    """Hold one output of a source and a bank that it charges: the least that diodes drop on the way, and the state."""

    source: SourceTie
    bank: str
    drop_v: float
    state: SwitchState


def charged_banks(network: Network, potentials: Sequence[Potentials], tops: Tops) -> tuple[Charging, ...]:
    """Return which banks each output charges in some of the states; of several states that of the least drop."""
    best: dict[tuple[SourceTie, str], Charging] = {}
    for one in potentials:
        reached: dict[int, dict[int, float]] = {}
        for source in network.sources:
            start = one.net[source.out]
            drops = reached.setdefault(start, least_drops_v(network, one.net, start))
            for bank, posts in tops.items():
                drop_v = min((drops.get(one.net[post], math.inf) for post in posts), default=math.inf)
                key = (source, bank)
                if math.isfinite(drop_v) and (key not in best or drop_v < best[key].drop_v - 1e-9):
                    best[key] = Charging(source, bank, drop_v, one.state)
    return tuple(best[source, bank] for source in network.sources for bank in tops if (source, bank) in best)


def least_drops_v(network: Network, net: Sequence[int], start: int) -> dict[int, float]:
    """Return the nets that current from one net can come to, each with the least that diodes drop on the way.

    Args:
        network: The graph.
        net: The net of each post, shape (posts,).
        start: The net to start from.
    """
    found = {start: 0.0}
    grown = True
    while grown:
        grown = False
        for edge in network.diodes:
            if net[edge.a] in found:
                drop_v = found[net[edge.a]] + edge.drop_v
                if drop_v < found.get(net[edge.b], math.inf) - 1e-9:
                    found[net[edge.b]] = drop_v
                    grown = True
    return found


def firmly_joined(network: Network, potentials: Potentials, post: int, others: Sequence[int]) -> bool:
    """Tell whether a post is joined to one of some others with no contact and no diode between, whatever is open."""
    firm = places(network, potentials.state, (EdgeKind.CONTACT,))
    return firm[post] in {firm[other] for other in others}


def is_bank_voltage(potentials: Potentials, source: SourceTie) -> bool:
    """Tell whether batteries, not sources, fix the voltage between the two posts of an output."""
    return potentials.battery_island[source.out] == potentials.battery_island[source.back]


def array_strings(network: Network, potentials: Potentials, load: LoadTie) -> tuple[tuple[SourceTie, ...], ...]:
    """Return the rows of arrays in series that feed a converter's input, the upper one first.

    An array is an output of a source without inputs, whose voltage no battery fixes.
    """
    net = potentials.net
    makers = {tie.device for tie in network.loads if tie.is_input}
    arrays: dict[int, list[SourceTie]] = {}
    for source in network.sources:
        if source.device not in makers and not is_bank_voltage(potentials, source):
            arrays.setdefault(net[source.out], []).append(source)
    if not arrays:
        return ()
    above: dict[int, list[int]] = {}
    for edge in network.diodes:
        above.setdefault(net[edge.b], []).append(net[edge.a])

    def rows(here: int, taken: tuple[SourceTie, ...], seen: frozenset[int]) -> Iterator[tuple[SourceTie, ...]]:
        if here == net[load.back]:
            yield taken
            return
        for source in arrays.get(here, ()):
            if net[source.back] not in seen:
                yield from rows(net[source.back], (*taken, source), seen | {net[source.back]})
        for further in above.get(here, ()):
            if further not in seen:
                yield from rows(further, taken, seen | {further})

    return tuple(row for row in rows(net[load.feed], (), frozenset((net[load.feed],))) if row)


@dataclass(frozen=True, slots=True)
class SoleDevice:
    """Hold a device that all current of an output may have to pass: it is the only one, or one beyond a diode."""

    device: str
    source: SourceTie


def sole_source_devices(network: Network, potentials: Potentials) -> tuple[SoleDevice, ...]:
    """Return, for each output that one device alone parts from everything else, that device.

    Behind an isolator each of its ways counts, since one bank may take all. An output beside a
    battery with no device between, or with several devices to leave by, is left out.
    """
    place = places(network, potentials.state, (EdgeKind.DEVICE,))
    batteries = {place[post] for battery in network.batteries for post in (battery.pos, battery.neg)}
    leaving: dict[int, list[str]] = {}
    for index in live_edges(network, potentials.state):
        edge = network.edges[index]
        if edge.kind is EdgeKind.DEVICE and place[edge.a] != place[edge.b]:
            for post in (edge.a, edge.b):
                leaving.setdefault(place[post], []).append(edge.part)
    beyond: dict[int, list[int]] = {}
    for edge in network.diodes:
        beyond.setdefault(place[edge.a], []).append(place[edge.b])

    def devices(where: int, seen: frozenset[int]) -> Iterator[str]:
        if where in batteries or where in seen:
            return
        ways = leaving.get(where, ())
        if len(ways) == 1 and where not in beyond:
            yield ways[0]
        elif not ways:
            for further in beyond.get(where, ()):
                yield from devices(further, seen | {where})

    return tuple(
        SoleDevice(device, source)
        for source in network.sources
        if not potentials.is_return(source.out)
        for device in devices(place[source.out], frozenset())
    )


@dataclass(frozen=True, slots=True)
class OpenReach:
    """Hold how far a source feeds with no device: the farthest length, m, where that is, the devices that end it."""

    farthest_m: float
    end: str
    devices: tuple[str, ...]


def open_reach(network: Network, potentials: Potentials, source: SourceTie) -> OpenReach:
    """Measure along the conductors from an output's post, as far as no device stands in the way."""
    free = [i for i in live_edges(network, potentials.state) if network.edges[i].kind is not EdgeKind.DEVICE]
    passing = [*free, *(edge.index for edge in network.diodes)]
    weights = {edge.index: edge.length_m for edge in network.edges}
    tree = shortest_tree(neighbours(network, passing), [source.out], weights)
    cost = {post: length_m for post, (length_m, _) in tree.cost.items()}
    far = max(sorted(cost), key=lambda post: cost[post])
    devices = {e.part for e in network.edges if e.kind is EdgeKind.DEVICE and (e.a in cost) is not (e.b in cost)}
    return OpenReach(cost[far], network.posts[far], tuple(sorted(devices)))


@dataclass(frozen=True, slots=True)
class Foreign:
    """Name a battery of another bank on the bank's side of a shunt, and the part by which it lands there."""

    battery: str
    bank: str
    last: str
    path: tuple[str, ...]


def foreign_batteries(network: Network, state: SwitchState, shunt: str, bank: str) -> tuple[Foreign, ...] | None:
    """Return the batteries of other banks that stay joined to a shunt's stud bat with the shunt taken out.

    None where that stud does not face its own bank, or a second path leads round the shunt: the
    question then has no answer.
    """
    live = [i for i in live_edges(network, state) if network.edges[i].kind is not EdgeKind.SHUNT]
    live += [e.index for e in network.edges if e.kind is EdgeKind.SHUNT and e.part != shunt]
    at = neighbours(network, live)
    bat, sys = (network.index[f"{shunt}.{post}"] for post in ("bat", "sys"))
    own = {post for tie in network.batteries if tie.bank == bank for post in (tie.pos, tie.neg)}
    if path_between(at, bat, own) is None or path_between(at, bat, [sys]) is not None:
        return None
    found: list[Foreign] = []
    for tie in network.batteries:
        path = None if tie.bank == bank else path_between(at, bat, [tie.pos, tie.neg])
        if path is not None:
            found.append(Foreign(tie.device, tie.bank, _lands_by(path, tie.device), path_words(network, bat, path)))
    return tuple(found)


def _lands_by(path: Sequence[Edge], battery: str) -> str:
    """Return the part nearest a battery on the way to it: the one to move."""
    return path[-1].part if path else battery
