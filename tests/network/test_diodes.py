"""Hold networks with diodes against other ways to solve them: every on/off set, ngspice, networkx, figures by hand.

Drawn networks have loops, several batteries, sources and one to four diodes anywhere. The other way
to solve them tries every set of conducting diodes with a dense elimination of its own, and keeps the
sets that agree with their answer; where several do, they must tell the same currents to count.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Any

import networkx as nx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.boat.hull import Device
from checker.boat.parts import Diode
from checker.limits.formulas import resistivity_ohm_mm2_per_m, study_figures
from checker.network.conditions import CONSTANT_CURRENT, CONSTANT_POWER, RESISTIVE, Draw
from checker.network.exposure import flow_study
from checker.network.faults import far_ends
from checker.network.flow import Copper, Flow, Grid, NoOperatingPoint
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.studies import Coppers, Studies
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_conductor,
    a_device,
    a_fuse,
    a_load,
    a_source,
    outcomes_of,
    potentials_of,
    studied,
)
from tests.networks import AMPS, OHMS, RHO_30C, Case, Sketch, tangles
from tests.spice import Netlist, Vectors, joined, needs_ngspice
from tests.spice import solved as solved_by_ngspice

INF = math.inf
AGREES = 1e-6
NEAR_ZERO = 0.01
"""Near zero a value is held against this share of the largest of its kind, or of 1 A or 1 V where that is more."""
BACKWARD_A = FORWARD_V = 1e-7
"""What a diode may seem to carry backward, or block forward, for the digits that a double has."""
DROPS = st.one_of(st.just(0.0), st.floats(0.05, 1.2))


def diode(index: int, a: int, b: int, drop_v: float, ohm: float) -> Edge:
    """Make the edge of a diode that passes from a to b."""
    return Edge(index, EdgeKind.DIODE, a, b, f"D{index:02d}", resistance_ohm=ohm, drop_v=drop_v)


class Wiring(Sketch):
    """Sketch networks with diodes."""

    def diode(self, a: int, b: int, drop_v: float = 0.4, ohm: float = 0.002) -> None:
        """Add a diode that passes from a to b."""
        self.edges.append(diode(len(self.edges), a, b, drop_v, ohm))


# --- drawn networks


@st.composite
def diode_tangles(draw: st.DrawFn) -> Case:
    """Draw anything, then lay one to four diodes between any posts."""
    case = draw(tangles())
    edges = list(case.network.edges)
    post = st.integers(0, len(case.network.posts) - 1)
    for _ in range(draw(st.integers(1, 4))):
        a, b = draw(post), draw(post)
        if a != b:
            edges.append(diode(len(edges), a, b, draw(DROPS), draw(OHMS)))
    return replace(case, network=replace(case.network, edges=tuple(edges)))


@st.composite
def diode_boats(draw: st.DrawFn) -> Case:
    """Draw banks side by side, an isolator, blocking diodes in trees and loops, loads of every kind, sources.

    One load at most is of constant power, and its return is the reference: it has one working point.
    """
    wiring = Wiring()
    ground = wiring.post()
    supplies: list[int] = []
    for bank in range(draw(st.integers(1, 3))):
        pos, top = wiring.post(), wiring.post()
        wiring.battery(pos, ground, draw(st.floats(11.8, 13.4)), draw(st.floats(0.002, 0.05)), f"BANK{bank}")
        wiring.join(pos, top, draw(OHMS))
        supplies.append(top)
    if draw(st.booleans()):  # an isolator, with an alternator on its anode
        anode = wiring.post()
        for top in supplies:
            wiring.diode(anode, top, draw(DROPS), draw(OHMS))
        wiring.feed(anode, ground, draw(AMPS))
        supplies.append(anode)
    for _ in range(draw(st.integers(1, 4 - len(wiring.edges) // 3))):
        old = draw(st.sampled_from(supplies))
        new = draw(st.sampled_from([wiring.post(), *(post for post in supplies if post != old)]))
        a, b = (old, new) if draw(st.booleans()) else (new, old)
        wiring.diode(a, b, draw(DROPS), draw(OHMS))
        supplies.append(new)
    supply = st.sampled_from(supplies)
    for _ in range(draw(st.integers(0, 2))):  # loops
        wiring.join(draw(supply), draw(supply), draw(st.one_of(OHMS, st.just(0.0))))
    for _ in range(draw(st.integers(1, 3))):
        wiring.draw(draw(supply), ground, draw(AMPS), 12.0, draw(st.sampled_from([CONSTANT_CURRENT, RESISTIVE])))
    if draw(st.booleans()):
        wiring.draw(draw(supply), ground, draw(AMPS), 12.0, CONSTANT_POWER)
    for _ in range(draw(st.integers(0, 1))):
        wiring.feed(draw(supply), ground, draw(AMPS))
    return wiring.made(ground)


# --- the other way to solve them


@dataclass(frozen=True)
class Answer:
    """Hold what one set of conducting diodes makes of a network.

    `volts` and `island` have shape (posts,); `served` names the loads and sources that carry a current.
    """

    conducting: frozenset[int]
    volts: list[float]
    island: list[int]
    served: frozenset[str]
    currents_a: dict[int, float]
    power_v: float | None

    def backward(self, diodes: Iterable[Edge]) -> list[str]:
        """Return the diodes that disagree: that conduct backward or block what would flow forward."""
        return [
            edge.part
            for edge in diodes
            if (edge.index in self.conducting and self.currents_a[edge.index] < -BACKWARD_A)
            or (edge.index not in self.conducting and self._above_v(edge) > FORWARD_V)
        ]

    def _above_v(self, edge: Edge) -> float:
        if self.island[edge.a] != self.island[edge.b]:
            return 0.0  # nothing fixes the voltage between them
        return self.volts[edge.a] - self.volts[edge.b] - edge.drop_v


def dense(matrix: list[list[float]], right: list[float]) -> list[float]:
    """Solve a dense system by elimination with pivots."""
    size = len(right)
    rows = [[*row, value] for row, value in zip(matrix, right, strict=True)]
    for column in range(size):
        best = max(range(column, size), key=lambda r: abs(rows[r][column]))
        rows[column], rows[best] = rows[best], rows[column]
        for other in range(size):
            share = rows[other][column] / rows[column][column]
            if other != column and share:
                rows[other] = [x - share * y for x, y in zip(rows[other], rows[column], strict=True)]
    return [rows[i][size] / rows[i][i] for i in range(size)]


class Dense:
    """Solve a network with one set of conducting diodes; a load of constant power by its quadratic equation."""

    def __init__(self, case: Case, conducting: frozenset[int], *, is_full: bool) -> None:
        net = case.network
        self._case, self._conducting = case, conducting
        self._edges = [edge for edge in net.edges if self._is_live(edge)]
        self._cells = [(b, cell) for b in net.batteries if (cell := b.full if is_full else b.low)]
        size = len(net.posts)
        self._ohm = {e.index: RHO_30C * e.length_m / e.area_mm2 if e.area_mm2 else e.resistance_ohm for e in self._edges}
        self._place = joined(size, ((e.a, e.b) for e in self._edges if not self._ohm[e.index]))
        self.island = joined(size, [*((e.a, e.b) for e in self._edges), *((b.pos, b.neg) for b, _ in self._cells)])
        self._powered = {self.island[b.pos] for b, _ in self._cells}

    def _is_live(self, edge: Edge) -> bool:
        if edge.kind is EdgeKind.DIODE:
            return edge.index in self._conducting
        ends = (self._case.network.posts[post].rsplit(".", 1)[-1] for post in (edge.a, edge.b))
        return edge.kind is not EdgeKind.CONTACT or (edge.part, *ends) in self._case.state.closed

    def _serves(self, out: int, back: int) -> bool:
        return self.island[out] == self.island[back] and self.island[out] in self._powered

    def _volts(self, injected: dict[int, float], loads: Sequence[Draw], *, with_batteries: bool = True) -> list[float]:
        """Return the voltages for given currents into posts, with resistive loads in the network."""
        size = len(self._place)
        matrix = [[0.0] * size for _ in range(size)]
        right = [0.0] * size

        def join(a: int, b: int, siemens: float, volts: float = 0.0) -> None:
            a, b = self._place[a], self._place[b]
            matrix[a][a] += siemens
            matrix[b][b] += siemens
            matrix[a][b] -= siemens
            matrix[b][a] -= siemens
            right[a] += siemens * volts
            right[b] -= siemens * volts

        on = 1.0 if with_batteries else 0.0
        for edge in self._edges:
            if self._ohm[edge.index]:
                join(edge.a, edge.b, 1 / self._ohm[edge.index], on * edge.drop_v)
        for battery, cell in self._cells:
            join(battery.pos, battery.neg, 1 / cell.resistance_ohm, on * cell.emf_v)
        for draw in loads:
            if draw.model == RESISTIVE and draw.current_a:
                join(draw.feed, draw.back, draw.current_a / draw.nominal_v)
        for post, amps in injected.items():
            right[self._place[post]] += amps
        for ground in {self._place[self.island[post]] for post in range(size)} | set(range(size)) - set(self._place):
            matrix[ground] = [float(column == ground) for column in range(size)]
            right[ground] = 0.0
        volts = dense(matrix, right)
        level = volts[self._place[self._case.network.reference]]
        home = self.island[self._case.network.reference]
        return [volts[p] - (level if self.island[i] == home else 0.0) for i, p in enumerate(self._place)]

    def answer(self) -> Answer | None:
        """Return the answer; None where a load of constant power has no working point."""
        loads = [draw for draw in self._case.draws if self._serves(draw.feed, draw.back)]
        feeds = [feed for feed in self._case.feeds if self._serves(feed.out, feed.back)]
        injected = dict.fromkeys(range(len(self._place)), 0.0)
        for out, back, amps in [(f.out, f.back, f.current_a) for f in feeds] + [
            (d.back, d.feed, d.current_a) for d in loads if d.model == CONSTANT_CURRENT
        ]:
            injected[out] += amps
            injected[back] -= amps
        volts = self._volts(injected, loads)
        power_v: float | None = None
        for draw in loads:
            if draw.model == CONSTANT_POWER and draw.current_a:
                assert power_v is None, "one load of constant power at most"
                unit = self._volts({draw.feed: 1.0, draw.back: -1.0}, loads, with_batteries=False)
                ohm, open_v = unit[draw.feed] - unit[draw.back], volts[draw.feed] - volts[draw.back]
                rest = open_v**2 - 4 * ohm * draw.current_a * draw.nominal_v
                if rest < 0 or open_v < 0:
                    return None
                power_v = (open_v + math.sqrt(rest)) / 2
                amps = draw.current_a * draw.nominal_v / power_v
                volts = [v - amps * u for v, u in zip(volts, unit, strict=True)]
        currents = {
            e.index: (volts[e.a] - volts[e.b] - e.drop_v) / self._ohm[e.index] for e in self._edges if self._ohm[e.index]
        }
        served = frozenset([*(draw.name for draw in loads), *(feed.name for feed in feeds)])
        return Answer(self._conducting, volts, self.island, served, currents, power_v)


def consistent(case: Case, *, is_full: bool) -> list[Answer]:
    """Return the answers with which all their diodes agree, of those that serve most loads and sources."""
    diodes = [edge.index for edge in case.network.diodes]
    sets = itertools.chain.from_iterable(itertools.combinations(diodes, n) for n in range(len(diodes) + 1))
    answers = [Dense(case, frozenset(chosen), is_full=is_full).answer() for chosen in sets]
    agreeing = [a for a in answers if a is not None and not a.backward(case.network.diodes)]
    agreeing = [a for a in agreeing if not any(a.served < other.served for other in agreeing)]
    if not any(a.power_v for a in agreeing):
        return agreeing
    best = max(a.power_v or 0.0 for a in agreeing)  # the working point is the one with most voltage
    return [a for a in agreeing if a.power_v and a.power_v > best - FORWARD_V]


def differing(ours: dict[int, float], theirs: dict[int, float]) -> float:
    """Return the largest relative difference of currents; what is not in one of them carries nothing."""
    floor = NEAR_ZERO * max([1.0, *map(abs, theirs.values())])
    pairs = ((ours.get(i, 0.0), theirs.get(i, 0.0)) for i in {*ours, *theirs})
    return max((abs(a - b) / max(abs(b), floor) for a, b in pairs), default=0.0)


def is_one(answers: Sequence[Answer]) -> bool:
    """Tell whether answers serve the same and have the same currents."""
    return all(
        a.served == answers[0].served and differing(a.currents_a, answers[0].currents_a) < AGREES for a in answers
    )


def resistive_currents(flow: Flow) -> dict[int, float]:
    """Return the currents of what has a resistance."""
    return {index: amps for index, amps in flow.currents_a.items() if flow.grid.ohm(flow.grid.network.edges[index])}


def check_laws(case: Case, flow: Flow) -> None:
    """Assert Kirchhoff's current law at every post, Ohm's law along every edge, and that every diode agrees."""
    grid, currents = flow.grid, flow.currents_a
    into = [0.0] * len(case.network.posts)
    for battery, cell in grid.cells:
        amps = (cell.emf_v - flow.across(battery.pos, battery.neg)) / cell.resistance_ohm
        into[battery.pos] += amps
        into[battery.neg] -= amps
    powered = {grid.island[grid.place[battery.pos]] for battery, _ in grid.cells}
    for feed in case.feeds:
        ends = {grid.island[grid.place[post]] for post in (feed.out, feed.back)}
        if len(ends) == 1 and ends <= powered:
            into[feed.out] += feed.current_a
            into[feed.back] -= feed.current_a
    for draw in case.draws:
        if draw.name in flow.load_a:
            volts = flow.across(draw.feed, draw.back)
            amps = {
                CONSTANT_CURRENT: lambda d=draw: d.current_a,
                RESISTIVE: lambda d=draw, v=volts: d.current_a * v / d.nominal_v,
                CONSTANT_POWER: lambda d=draw, v=volts: d.current_a * d.nominal_v / v,
            }[draw.model]()
            into[draw.feed] -= amps
            into[draw.back] += amps
    largest = max([1.0, *map(abs, into), *map(abs, currents.values())])
    for edge in grid.edges:
        amps = currents.get(edge.index, 0.0)
        into[edge.a] -= amps
        into[edge.b] += amps
        drop_v = edge.drop_v + amps * grid.ohm(edge)
        assert flow.across(edge.a, edge.b) == pytest.approx(drop_v, abs=1e-9)
    assert max(map(abs, into)) < 1e-8 * largest
    for edge in case.network.diodes:
        if edge in grid.edges:
            assert currents[edge.index] * grid.ohm(edge) >= -1e-9, edge
        elif grid.island[grid.place[edge.a]] == grid.island[grid.place[edge.b]]:
            assert flow.across(edge.a, edge.b) <= edge.drop_v + 1e-9, edge


def check_case(case: Case) -> None:
    """Assert the laws, and that every on/off set that agrees says the same as the solution."""
    for is_full in (True, False):
        flow = case.grid(is_full=is_full).solve(case.draws, case.feeds)
        answers = consistent(case, is_full=is_full)
        if isinstance(flow, Flow):
            check_laws(case, flow)
        if not answers or not is_one(answers):
            continue
        (first, *_) = answers
        if first.power_v is not None and first.power_v < 6.1:  # below half its nominal voltage there is no working point
            continue
        assert isinstance(flow, Flow), f"no answer, but {sorted(first.conducting)} agree"
        assert differing(resistive_currents(flow), first.currents_a) < AGREES, first


@settings(max_examples=200, deadline=None)
@given(diode_tangles())
def test_any_tangle_with_diodes_is_solved_as_the_on_off_set_that_agrees_says(case: Case) -> None:
    check_case(case)


@settings(max_examples=200, deadline=None)
@given(diode_boats())
def test_drawn_boats_with_diodes_are_solved_as_the_on_off_set_that_agrees_says(case: Case) -> None:
    check_case(case)
