"""Turn a boat into a graph: posts are nodes, whatever joins two posts is an edge.

The posts of one bus are one node. Batteries, loads and sources are not edges: they hang
between two nodes and each study says what it makes of them. Nodes and edges are numbered in
the order of their ids; all studies work on the numbers and tell ids only where they report.
Two conductors in parallel are two edges.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator
from dataclasses import dataclass
from enum import Enum
from functools import cached_property
from typing import Any

from checker.boat.hull import Boat
from checker.boat.parts import Battery, Diode, Load, Overcurrent, Part, Shunt, Source, Switch


class EdgeKind(Enum):
    """Say what joins two posts."""

    CONDUCTOR = "conductor"
    BOND = "bond"
    DEVICE = "device"
    CONTACT = "contact"
    SHUNT = "shunt"
    JOINT = "joint"
    SHIELD = "shield"
    DIODE = "diode"


@dataclass(frozen=True, slots=True)
class Edge:
    """Join two nodes. `rating_a` limits what passes: an overcurrent device's rating, else infinite.

    A conductor has a length and a copper area; whatever else joins has a resistance of its own,
    0 where none is given. A diode passes current from its a to its b alone, and drops `drop_v` on top.
    """

    index: int
    kind: EdgeKind
    a: int
    b: int
    part: str
    rating_a: float = math.inf
    length_m: float = 0.0
    area_mm2: float = 0.0
    resistance_ohm: float = 0.0
    drop_v: float = 0.0

    def other(self, node: int) -> int:
        """Return the far node."""
        return self.b if node == self.a else self.a


@dataclass(frozen=True, slots=True)
class Cell:
    """Hold EMF and internal resistance of a battery at one state of charge."""

    emf_v: float
    resistance_ohm: float


@dataclass(frozen=True, slots=True)
class BatteryTie:
    """Place a battery between its nodes."""

    device: str
    pos: int
    neg: int
    voltage_v: float
    bank: str
    full: Cell | None = None
    low: Cell | None = None


@dataclass(frozen=True, slots=True)
class LoadTie:
    """Place a load, or the input of a converter, between its nodes."""

    device: str
    feed: int
    back: int
    voltage_v: float
    current_a: float
    model: str = "constant-current"
    is_input: bool = False


@dataclass(frozen=True, slots=True)
class SourceTie:
    """Place an output of a source between its nodes."""

    device: str
    post: str
    out: int
    back: int
    max_a: float
    voltage_v: float
    is_limited: bool


@dataclass(frozen=True)
class Network:
    """Hold the graph of one boat; built once, never changed."""

    posts: tuple[str, ...]
    edges: tuple[Edge, ...]
    batteries: tuple[BatteryTie, ...]
    loads: tuple[LoadTie, ...]
    sources: tuple[SourceTie, ...]
    reference: int

    @cached_property
    def index(self) -> dict[str, int]:
        """Return the number of each post."""
        return {post: number for number, post in enumerate(self.posts)}

    @cached_property
    def diodes(self) -> tuple[Edge, ...]:
        """Return the edges that conduct one way only; no switch state holds them."""
        return tuple(edge for edge in self.edges if edge.kind is EdgeKind.DIODE)

    @cached_property
    def memo(self) -> dict[Any, Any]:
        """Return what several studies of this graph reckon once, keyed by the reckoning and its state."""
        return {}

    @cached_property
    def edges_of(self) -> dict[str, tuple[Edge, ...]]:
        """Return the edges that each part makes."""
        found: dict[str, list[Edge]] = {}
        for edge in self.edges:
            found.setdefault(edge.part, []).append(edge)
        return {part: tuple(edges) for part, edges in found.items()}


def build_network(boat: Boat) -> Network:
    """Build the graph of a boat. Contacts of all switch states are in it; a state says which are closed."""
    posts = sorted(
        f"{device.id}.{post}" if post else device.id for device in boat.devices.values() for post in device.part.posts
    )
    index = {post: number for number, post in enumerate(posts)}
    edges: list[Edge] = []

    def join(kind: EdgeKind, a: str, b: str, part: str, resistance_ohm: float | None = 0.0, **facts: float) -> None:
        ohm = resistance_ohm or 0.0
        edges.append(Edge(len(edges), kind, index[a], index[b], part, resistance_ohm=ohm, **facts))

    for conductor in boat.conductors.values():
        kind = EdgeKind.BOND if conductor.is_bond else EdgeKind.CONDUCTOR
        facts = {"length_m": conductor.length_m, "area_mm2": conductor.copper.area_mm2}
        join(kind, conductor.start, conductor.end, conductor.id, **facts)
    for device in boat.devices.values():
        name = device.id
        for kind, a, b, ohm, more in _inside(device.part):
            join(kind, f"{name}.{a}", f"{name}.{b}", name, ohm, **more)
        for own, other in device.mounts:
            join(EdgeKind.JOINT, f"{name}.{own}" if own else name, other, name)
    for joint in boat.joints:
        join(EdgeKind.JOINT, joint.start, joint.end, joint.id, joint.resistance_ohm)
    for shield in boat.shields or ():
        joins = shield.joins or ()
        for a, b in itertools.pairwise(joins):
            join(EdgeKind.SHIELD, a, b, shield.id)
    return Network(tuple(posts), tuple(edges), *_ties(boat, index), index[boat.reference])


def _inside(part: Part) -> Iterator[tuple[EdgeKind, str, str, float | None, dict[str, float]]]:
    """Yield what joins the posts of a part: kind, two posts, resistance, and what else its edge has."""
    if isinstance(part, Overcurrent):
        yield EdgeKind.DEVICE, "line", "load", part.resistance_ohm, {"rating_a": part.rating_a}
    elif isinstance(part, Switch):
        for a, b in sorted({pair for _, pairs in part.states for pair in pairs}):
            yield EdgeKind.CONTACT, a, b, part.contact_ohm, {}
    elif isinstance(part, Diode):
        for a, b in part.paths:
            yield EdgeKind.DIODE, a, b, part.resistance_ohm, {"drop_v": part.drop_v}
    elif isinstance(part, Shunt):
        yield EdgeKind.SHUNT, "bat", "sys", part.resistance_ohm, {}
    elif isinstance(part, Source):
        for a, b, ohm in part.joined:
            yield EdgeKind.JOINT, a, b, ohm, {}


def _ties(
    boat: Boat, index: dict[str, int]
) -> tuple[tuple[BatteryTie, ...], tuple[LoadTie, ...], tuple[SourceTie, ...]]:
    batteries: list[BatteryTie] = []
    loads: list[LoadTie] = []
    sources: list[SourceTie] = []
    for device in boat.devices.values():
        name, part = device.id, device.part
        if isinstance(part, Battery):
            ends = index[f"{name}.pos"], index[f"{name}.neg"]
            cells = (
                _cell(part.emf_full_v, part.resistance_full_ohm),
                _cell(part.emf_low_v, part.resistance_low_ohm),
            )
            batteries.append(BatteryTie(name, *ends, part.voltage_v, device.bank, *cells))
        elif isinstance(part, Load):
            ends = index[f"{name}.{part.feed_post}"], index[f"{name}.{part.return_post}"]
            loads.append(LoadTie(name, *ends, part.voltage_v, part.current_a, part.model))
        elif isinstance(part, Source):
            for end in part.outputs:
                ends = index[f"{name}.{end.post}"], index[f"{name}.{end.return_post}"]
                sources.append(SourceTie(name, end.post, *ends, end.max_a, end.voltage_v, end.limited))
            for end in part.inputs:
                ends = index[f"{name}.{end.post}"], index[f"{name}.{end.return_post}"]
                loads.append(LoadTie(name, *ends, end.voltage_v, end.max_a, is_input=True))
    return tuple(batteries), tuple(loads), tuple(sources)


def _cell(emf_v: float | None, resistance_ohm: float | None) -> Cell | None:
    return None if emf_v is None or not resistance_ohm else Cell(emf_v, resistance_ohm)
