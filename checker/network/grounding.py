"""Ask how bonding, metal, shields and cases are joined to the wiring, and what returns through them.

The DC negative is all that wiring joins to the reference: conductors, devices, closed contacts,
shunts, and an engine block with what is mounted on it. Bonds and joints to other metal lie
beside it.
"""

from __future__ import annotations

import heapq
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.boat.parts import Metal
from checker.network.exposure import find_bridges
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import SwitchState, live_edges, places
from checker.network.walk import groups, neighbours, path_between


@dataclass(frozen=True, slots=True)
class Landing:
    """Hold one place where a bond or joint meets the DC negative."""

    part: str
    post: int


@dataclass(frozen=True, slots=True)
class BondPiece:
    """Hold one connected piece of the bonding system: its bonds and joints, and where they meet the DC negative.

    `landings` begins with the one to keep: at the reference, if one is there.
    """

    parts: tuple[str, ...]
    landings: tuple[Landing, ...]


def metal_posts(boat: Boat, network: Network) -> frozenset[int]:
    """Return the posts of metal parts."""
    return frozenset(network.index[d.id] for d in boat.devices.values() if isinstance(d.part, Metal))


def bond_pieces(boat: Boat, network: Network, state: SwitchState) -> tuple[BondPiece, ...]:
    """Return the pieces of the bonding system in a state, in the order of their first part."""
    beside = _beside_wiring(boat, network)
    live = [network.edges[i] for i in live_edges(network, state)]
    place = groups(
        len(network.posts),
        ((e.a, e.b) for e in live if e.index not in beside and e.kind is not EdgeKind.SHIELD),
    )
    home = place[network.reference]
    joined = groups(
        len(network.posts),
        ((place[network.edges[i].a], place[network.edges[i].b]) for i in beside if not _lands(network, place, home, i)),
    )
    pieces: dict[int, tuple[list[str], list[Landing]]] = {}
    for index in beside:
        edge = network.edges[index]
        own = [joined[place[post]] for post in (edge.a, edge.b) if place[post] != home]
        key = own[0] if own else -1 - index  # a bond from the DC negative to itself is a piece of its own
        parts, landings = pieces.setdefault(key, ([], []))
        parts.append(edge.part)
        landings += [Landing(edge.part, post) for post in (edge.a, edge.b) if place[post] == home]
    found = [BondPiece(tuple(sorted(p)), _kept_first(network, on)) for p, on in pieces.values()]
    return tuple(sorted(found, key=lambda piece: piece.parts))


def _lands(network: Network, place: Sequence[int], home: int, index: int) -> bool:
    edge = network.edges[index]
    return home in (place[edge.a], place[edge.b])


def _kept_first(network: Network, landings: list[Landing]) -> tuple[Landing, ...]:
    return tuple(sorted(landings, key=lambda one: (one.post != network.reference, one.part, network.posts[one.post])))


def _beside_wiring(boat: Boat, network: Network) -> list[int]:
    """Return the bonds, and the joints that are no mounting on an engine."""
    metal = metal_posts(boat, network)
    joints = {joint.id for joint in boat.joints}

    def is_mounting(edge: Edge) -> bool:
        owners = [boat.device_of(network.posts[post]) for post in (edge.a, edge.b)]
        is_mounted = any(owner is not None and owner.is_engine_mounted for owner in owners)
        return is_mounted and (edge.a in metal or edge.b in metal)

    return [
        edge.index
        for edge in network.edges
        if edge.kind is EdgeKind.BOND
        or (edge.kind is EdgeKind.JOINT and edge.part in joints and not is_mounting(edge))
    ]  # fmt: skip


@dataclass(frozen=True, slots=True)
class MetalReturn:
    """Hold loads and sources whose return leads through metal alone, by one and the same edge that meets it.

    `path` begins at the post `start`, the return of the device nearest the metal.
    """

    landing: Edge
    devices: tuple[str, ...]
    start: int
    path: tuple[Edge, ...]


def metal_returns(boat: Boat, network: Network, state: SwitchState) -> tuple[MetalReturn, ...]:
    """Return what reaches a battery or the reference through metal, and by no wire; grouped by where it meets it."""
    metal = metal_posts(boat, network)
    live = live_edges(network, state)
    edges = [network.edges[i] for i in live]
    wired = groups(len(network.posts), ((e.a, e.b) for e in edges if e.a not in metal and e.b not in metal))
    joined = places(network, state, ())
    anchors = [post for battery in network.batteries for post in (battery.pos, battery.neg)] + [network.reference]
    by_wire, at_all = {wired[post] for post in anchors}, {joined[post] for post in anchors}
    ends = [(tie.device, tie.back) for tie in network.loads] + [(tie.device, tie.back) for tie in network.sources]
    lost = sorted({(device, back) for device, back in ends if wired[back] not in by_wire and joined[back] in at_all})
    at = neighbours(network, live) if lost else []
    found: dict[int, list[tuple[int, str, int, tuple[Edge, ...]]]] = {}
    for device, back in lost:
        path = path_between(at, back, anchors) or []
        landing = next((edge for edge in path if edge.a in metal or edge.b in metal), None)
        if landing is not None:
            found.setdefault(landing.index, []).append((len(path), device, back, tuple(path)))
    return tuple(_nearest(network.edges[index], found[index]) for index in sorted(found))


def _nearest(landing: Edge, rows: list[tuple[int, str, int, tuple[Edge, ...]]]) -> MetalReturn:
    rows = sorted(rows, key=lambda row: row[:3])
    devices = tuple(dict.fromkeys(device for _, device, _, _ in rows))
    return MetalReturn(landing, devices, *rows[0][2:])


def looped_shields(network: Network, state: SwitchState) -> frozenset[str]:
    """Return the shields that join two posts which something else joins as well."""
    if not any(edge.kind is EdgeKind.SHIELD for edge in network.edges):
        return frozenset()
    live = live_edges(network, state)
    bridges = find_bridges(network, neighbours(network, live))
    return frozenset(
        edge.part
        for edge in (network.edges[i] for i in live)
        if edge.kind is EdgeKind.SHIELD and edge.index not in bridges
    )


def floating_banks(network: Network, potentials: Sequence[Potentials]) -> tuple[str, ...]:
    """Return the banks that nothing ties to the reference in any of the states."""
    floating = {battery.bank for battery in network.batteries}
    for one in potentials:
        home = one.battery_island[one.reference]
        floating -= {battery.bank for battery in network.batteries if one.battery_island[battery.neg] == home}
    return tuple(sorted(floating))


@dataclass(frozen=True, slots=True)
class Crossover:
    """Hold the way of conductors between the returns of two motors that bears most; empty where there is none."""

    motors: tuple[str, str]
    conductors: tuple[str, ...]


def crossover(
    network: Network, state: SwitchState, ends: Mapping[str, int], bears: Callable[[str], float]
) -> Crossover:
    """Return the way between the returns of two motors whose weakest conductor bears most.

    Battery posts are not passed: a way over the negative cables of batteries alone is none.

    Args:
        network: The graph.
        state: The switch state.
        ends: The return posts of two motors.
        bears: What a conductor bears, A.
    """
    (first, start), (second, goal) = sorted(ends.items())
    posts = {post for battery in network.batteries for post in (battery.pos, battery.neg)}
    allowed = (EdgeKind.CONDUCTOR, EdgeKind.JOINT, EdgeKind.SHUNT)
    edges = [i for i in live_edges(network, state) if network.edges[i].kind in allowed]
    at = neighbours(network, edges)
    waiting: list[tuple[float, int, int, tuple[str, ...]]] = [(-float("inf"), 0, start, ())]
    done: set[int] = set()
    while waiting:
        width, steps, node, way = heapq.heappop(waiting)
        if node == goal:
            return Crossover((first, second), way)
        if node in done:
            continue
        done.add(node)
        for edge in at[node]:
            far = edge.other(node)
            if far in done or far in posts:
                continue
            is_wire = edge.kind is EdgeKind.CONDUCTOR
            narrower = max(width, -bears(edge.part)) if is_wire else width
            heapq.heappush(waiting, (narrower, steps + 1, far, (*way, edge.part) if is_wire else way))
    return Crossover((first, second), ())
