"""Draw networks of batteries, resistances, loads and sources for the tests that solve them, and build the example's boats.

Every post is named as a post of one switch, so that an edge may be a contact of a switch state.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path

from hypothesis import strategies as st

from checker.boat.assemble import assemble
from checker.boat.build import build_boat
from checker.boat.catalogue import read_catalogue
from checker.network.conditions import CONSTANT_CURRENT, CONSTANT_POWER, RESISTIVE, Draw, Feed
from checker.network.flow import Copper, Grid
from checker.network.graph import BatteryTie, Cell, Edge, EdgeKind, LoadTie, Network
from checker.network.states import SwitchState
from checker.network.studies import Studies
from checker.pipeline import study_boat
from checker.reading.yard_files import read_yard

EXAMPLE = Path(__file__).resolve().parents[1] / "fleet_example"
RHO_30C = 0.01792  # ohm mm2/m, near enough to copper at 30 C: both solvers get the same
OHMS = st.floats(-4.0, -0.5).map(lambda exponent: 10.0**exponent)
AMPS = st.one_of(st.just(0.0), st.floats(0.001, 30.0))
SWITCH = "S"


@dataclass
class Sketch:
    """Gather the pieces of a network; posts are numbered as they are asked for."""

    posts: int = 0
    edges: list[Edge] = field(default_factory=list)
    batteries: list[BatteryTie] = field(default_factory=list)
    inputs: list[LoadTie] = field(default_factory=list)
    closed: set[tuple[str, str, str]] = field(default_factory=set)
    draws: list[Draw] = field(default_factory=list)
    feeds: list[Feed] = field(default_factory=list)

    def post(self) -> int:
        """Add a post."""
        self.posts += 1
        return self.posts - 1

    def join(self, a: int, b: int, ohm: float, *, is_contact: bool = False, is_closed: bool = True) -> None:
        """Add an edge; a contact is live where it is closed."""
        index = len(self.edges)
        kind = EdgeKind.CONTACT if is_contact else EdgeKind.CONDUCTOR if ohm else EdgeKind.JOINT
        part = SWITCH if is_contact else f"E{index:02d}"
        if kind is EdgeKind.CONDUCTOR:  # as long as its resistance asks of 10 mm2
            edge = Edge(index, kind, a, b, part, length_m=ohm * 10.0 / RHO_30C, area_mm2=10.0)
        else:
            edge = Edge(index, kind, a, b, part, resistance_ohm=ohm)
        self.edges.append(edge)
        if is_contact and is_closed:
            self.closed.add((SWITCH, f"{a:02d}", f"{b:02d}"))

    def diode(self, anode: int, cathode: int, drop_v: float, ohm: float) -> None:
        """Add a diode."""
        index = len(self.edges)
        edge = Edge(index, EdgeKind.DIODE, anode, cathode, f"D{index:02d}", resistance_ohm=ohm, drop_v=drop_v)
        self.edges.append(edge)

    def battery(self, pos: int, neg: int, emf_v: float, ohm: float, bank: str = "HOUSE") -> None:
        """Add a battery; a low one has less EMF behind more resistance."""
        name = f"B{len(self.batteries)}"
        cells = Cell(emf_v, ohm), Cell(emf_v * 0.92, ohm * 1.6)
        self.batteries.append(BatteryTie(name, pos, neg, emf_v, bank, *cells))

    def draw(self, feed: int, back: int, amps: float, nominal_v: float, model: str) -> None:
        """Add a load."""
        self.draws.append(Draw(f"L{len(self.draws)}", feed, back, amps, nominal_v, model))

    def feed(self, out: int, back: int, amps: float) -> None:
        """Add a source."""
        self.feeds.append(Feed(f"G{len(self.feeds)}", out, back, amps))

    def made(self, reference: int = 0) -> Case:
        """Return the network with what it is asked."""
        posts = tuple(f"{SWITCH}.{number:02d}" for number in range(self.posts))
        network = Network(posts, tuple(self.edges), tuple(self.batteries), tuple(self.inputs), (), reference)
        state = SwitchState("drawn", True, frozenset(self.closed), "drawn")
        return Case(network, state, tuple(self.draws), tuple(self.feeds))


@dataclass(frozen=True)
class Case:
    """Hold a network, a switch state, and the loads and sources of one condition."""

    network: Network
    state: SwitchState
    draws: tuple[Draw, ...]
    feeds: tuple[Feed, ...]

    def grid(self, *, is_full: bool) -> Grid:
        """Return the factorised network."""
        return Grid(self.network, self.state, Copper(RHO_30C), is_full=is_full)


@st.composite
def tangles(draw: st.DrawFn) -> Case:
    """Draw anything: loops, edges from a post to itself, batteries against each other, islands, open contacts.

    No load of constant power: in such a network it may have several working points.
    """
    sketch = Sketch()
    posts = [sketch.post() for _ in range(draw(st.integers(2, 9)))]
    post = st.sampled_from(posts)
    for _ in range(draw(st.integers(1, 14))):
        a, b, is_contact = draw(post), draw(post), draw(st.integers(0, 4)) == 0
        ohm = 0.0 if draw(st.integers(0, 4)) == 0 else draw(OHMS)
        sketch.join(a, b, ohm, is_contact=is_contact, is_closed=draw(st.booleans()))
    for _ in range(draw(st.integers(1, 4))):
        sketch.battery(draw(post), draw(post), draw(st.floats(2.0, 26.0)), draw(st.floats(0.001, 0.05)))
    for _ in range(draw(st.integers(0, 4))):
        model = draw(st.sampled_from([CONSTANT_CURRENT, RESISTIVE]))
        sketch.draw(draw(post), draw(post), draw(AMPS), 12.0, model)
    for _ in range(draw(st.integers(0, 2))):
        sketch.feed(draw(post), draw(post), draw(AMPS))
    return sketch.made(draw(post))


@st.composite
def wired_boats(draw: st.DrawFn) -> Case:
    """Draw what boats look like: banks of strings, trees of conductors with some loops, loads of every kind, an array."""
    sketch = Sketch()
    reference = sketch.post()
    returns, supplies = [reference], [sketch.post()]
    cells = draw(st.integers(1, 2))
    for bank in range(draw(st.integers(1, 2))):
        top = supplies[0] if bank == 0 else sketch.post()
        if bank:
            supplies.append(top)
        for _ in range(draw(st.integers(1, 3))):
            _string(draw, sketch, top, reference, cells, f"BANK{bank}")
    for tree in (supplies, returns):
        for _ in range(draw(st.integers(1, 4))):
            tree.append(_grown(draw, sketch, tree))
        for _ in range(draw(st.integers(0, 2))):  # loops
            sketch.join(draw(st.sampled_from(tree)), draw(st.sampled_from(tree)), draw(OHMS))
    supply, back, amps = st.sampled_from(supplies), st.sampled_from(returns), AMPS
    for _ in range(draw(st.integers(1, 4))):
        model = draw(st.sampled_from([CONSTANT_CURRENT, CONSTANT_POWER, RESISTIVE]))
        sketch.draw(draw(supply), draw(back), draw(amps), 12.0 * cells, model)
    for _ in range(draw(st.integers(0, 2))):
        sketch.feed(draw(supply), draw(back), draw(amps))
    if draw(st.booleans()):
        _array(sketch, draw(OHMS), draw(back), draw(amps))
    if draw(st.booleans()):
        _apart(sketch, draw(OHMS), draw(amps))
    return sketch.made(reference)


def _string(draw: st.DrawFn, sketch: Sketch, top: int, bottom: int, cells: int, bank: str) -> None:
    """Add batteries in series between two posts, over links."""
    low = bottom
    for _ in range(cells):
        neg, pos = sketch.post(), sketch.post()
        sketch.join(low, neg, draw(OHMS))
        sketch.battery(pos, neg, draw(st.floats(12.2, 13.2)), draw(st.floats(0.002, 0.02)), bank)
        low = pos
    sketch.join(low, top, draw(OHMS))


def _grown(draw: st.DrawFn, sketch: Sketch, tree: list[int]) -> int:
    """Add a post to a tree: over a conductor, over a contact that may be open, or over a joint without resistance."""
    new, old, kind = sketch.post(), draw(st.sampled_from(tree)), draw(st.integers(0, 7))
    ohm = 0.0 if kind == 0 else draw(OHMS)
    a, b = (old, new) if draw(st.booleans()) else (new, old)
    sketch.join(a, b, ohm, is_contact=kind in (0, 1), is_closed=draw(st.integers(0, 3)) > 0)
    return new


def _array(sketch: Sketch, ohm: float, back: int, amps: float) -> None:
    """Add a solar array on the input of its controller: an island without a battery."""
    out, entry = sketch.post(), sketch.post()
    sketch.join(out, entry, ohm)
    sketch.inputs.append(LoadTie("MPPT", entry, back, 40.0, 10.0, is_input=True))
    sketch.feed(out, back, amps)


def _apart(sketch: Sketch, ohm: float, amps: float) -> None:
    """Add a battery with a load that nothing joins to the rest."""
    pos, neg, feed = sketch.post(), sketch.post(), sketch.post()
    sketch.battery(pos, neg, 12.6, 0.01, "APART")
    sketch.join(pos, feed, ohm)
    sketch.draw(feed, neg, amps, 12.0, CONSTANT_CURRENT)


@cache
def example_studies() -> dict[str, Studies]:
    """Return the studies of every distinct content of the example, by the first name it has."""
    return dict(studies_of(EXAMPLE, are_all=True))


def studies_of(folder: Path, *, are_all: bool = False) -> Iterator[tuple[str, Studies]]:
    """Make ready the studies of a yard's distinct hulls, and of its option sets if all are wanted."""
    files = read_yard(folder)
    assembly = assemble(files)
    catalogue, _ = read_catalogue(files.parts)
    seen: set[str] = set()
    for subject in sorted(assembly.subjects, key=lambda subject: not subject.is_hull):
        if subject.key not in seen and (are_all or subject.is_hull):
            seen.add(subject.key)
            boat, faults = build_boat(assembly.content[subject.key], subject.class_id, catalogue)
            assert boat is not None, faults
            yield subject.id, study_boat(boat)
