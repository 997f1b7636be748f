"""Hold networks with diodes against other ways to solve them: every on/off set, ngspice, networkx, figures by hand.

Drawn networks have loops, several batteries, sources and one to four diodes anywhere. The other way
to solve them tries every set of conducting diodes with a dense elimination of its own, and keeps the
sets that agree with their answer; where several do, they must tell the same currents to count.
"""

from __future__ import annotations

import itertools
import math
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Any

import networkx as nx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.boat.hull import Device
from checker.boat.parts import Diode
from checker.network.conditions import CONSTANT_CURRENT, CONSTANT_POWER, RESISTIVE, Draw
from checker.network.exposure import flow_study
from checker.network.faults import FaultLevels, far_ends
from checker.network.flow import Copper, Flow, Grid
from checker.network.graph import Edge, EdgeKind, Network, SourceTie
from checker.network.potentials import study_potentials
from tests.builders import a_battery, a_bus, a_conductor, a_device, a_fuse, a_load, a_source, studied
from tests.networks import AMPS, OHMS, RHO_30C, Case, Sketch, tangles
from tests.spice import Netlist, Vectors, joined, needs_ngspice
from tests.spice import solved as solved_by_ngspice

INF = math.inf
AGREES = 1e-6
NEAR_ZERO = 0.01
"""Near zero a value is held against this share of the largest of its kind, or of 1 A or 1 V where that is more."""
BACKWARD_A = FORWARD_V = 1e-7
"""What a diode may seem to carry backward, or block forward, for the digits that a double has."""
UNSETTLED_A = 5e-6
"""The voltage of a load is settled to 0.1 nV: over 0.1 milliohm that is a microampere."""
CARRIES_A = 1e-6
"""A diode that carries less leads to nothing that takes any."""
DROPS = st.one_of(st.just(0.0), st.floats(0.05, 1.2))


def diode(index: int, a: int, b: int, drop_v: float, ohm: float) -> Edge:
    """Make the edge of a diode that passes from a to b."""
    return Edge(index, EdgeKind.DIODE, a, b, f"D{index:02d}", resistance_ohm=ohm, drop_v=drop_v)


class Wiring(Sketch):
    """Sketch networks with diodes."""

    def diode(self, anode: int, cathode: int, drop_v: float = 0.4, ohm: float = 0.002) -> None:
        """Add a diode, of 0.4 V and 2 milliohm unless told."""
        self.edges.append(diode(len(self.edges), anode, cathode, drop_v, ohm))


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

    def has_all_agreeing(self, diodes: Iterable[Edge]) -> bool:
        """Tell whether none conducts backward, and none blocks what would flow forward.

        Between islands nothing fixes the voltage: they must have some voltages at which all diodes
        between them block. Each is an upper bound of a difference; a negative cycle contradicts itself.
        """
        bounds: nx.DiGraph[Any] = nx.DiGraph()
        for edge in diodes:
            if edge.index in self.conducting:
                if self.currents_a[edge.index] < -BACKWARD_A:
                    return False
                continue
            ends = self.island[edge.b], self.island[edge.a]
            below_v = edge.drop_v - (self.volts[edge.a] - self.volts[edge.b]) + FORWARD_V
            if ends[0] == ends[1] and below_v < 0:
                return False
            if not bounds.has_edge(*ends) or below_v < bounds.edges[ends]["weight"]:
                bounds.add_edge(*ends, weight=below_v)
        return not nx.negative_edge_cycle(bounds)


def dense(matrix: list[list[Fraction]], right: list[Fraction]) -> list[Fraction]:
    """Solve a dense system by elimination; fractions lose no digit."""
    size = len(right)
    rows = [[*row, value] for row, value in zip(matrix, right, strict=True)]
    for column in range(size):
        pivot = next(r for r in range(column, size) if rows[r][column])
        rows[column], rows[pivot] = rows[pivot], rows[column]
        for other in range(column + 1, size):
            if rows[other][column]:
                share = rows[other][column] / rows[column][column]
                rows[other] = [x - share * y if y else x for x, y in zip(rows[other], rows[column], strict=True)]
    found = [Fraction(0)] * size
    for row in range(size - 1, -1, -1):
        known = sum((rows[row][k] * found[k] for k in range(row + 1, size)), Fraction(0))
        found[row] = (rows[row][size] - known) / rows[row][row]
    return found


class Dense:
    """Solve a network with one set of conducting diodes; a load of constant power by its quadratic equation."""

    def __init__(self, case: Case, conducting: frozenset[int], *, is_full: bool) -> None:
        net = case.network
        self._case, self._conducting = case, conducting
        self.edges = [edge for edge in net.edges if self._is_live(edge)]
        self._cells = [(b, cell) for b in net.batteries if (cell := b.full if is_full else b.low)]
        self._ohm = {e.index: Fraction(_ohm(e)) for e in self.edges}
        size = len(net.posts)
        self._place = joined(size, ((e.a, e.b) for e in self.edges if not self._ohm[e.index]))
        self.island = joined(size, [*((e.a, e.b) for e in self.edges), *((b.pos, b.neg) for b, _ in self._cells)])
        self._powered = {self.island[b.pos] for b, _ in self._cells}
        self._reached = within_reach(case)

    def _is_live(self, edge: Edge) -> bool:
        if edge.kind is EdgeKind.DIODE:
            return edge.index in self._conducting
        ends = (self._case.network.posts[post].rsplit(".", 1)[-1] for post in (edge.a, edge.b))
        return edge.kind is not EdgeKind.CONTACT or (edge.part, *ends) in self._case.state.closed

    def _serves(self, out: int, back: int) -> bool:
        return self.island[out] == self.island[back] and self.island[out] in self._powered

    def _volts(self, given: list[tuple[int, int, float]], loads: Sequence[Draw], *, at_rest: bool) -> list[Fraction]:
        """Return the voltages for given currents (into, out of, A), with resistive loads in the network.

        Without batteries where it is at rest.
        """
        size = len(self._place)
        matrix = [[Fraction(0)] * size for _ in range(size)]
        right = [Fraction(0)] * size

        def join(a: int, b: int, siemens: Fraction, volts: float = 0.0) -> None:
            a, b = self._place[a], self._place[b]
            for here, far, sign in ((a, b, 1), (b, a, -1)):
                matrix[here][here] += siemens
                matrix[here][far] -= siemens
                right[here] += sign * siemens * (0 if at_rest else Fraction(volts))

        for edge in self.edges:
            if self._ohm[edge.index]:
                join(edge.a, edge.b, 1 / self._ohm[edge.index], edge.drop_v)
        for battery, cell in self._cells:
            join(battery.pos, battery.neg, 1 / Fraction(cell.resistance_ohm), cell.emf_v)
        for draw in loads:
            if draw.model == RESISTIVE and draw.current_a:
                join(draw.feed, draw.back, Fraction(draw.current_a) / Fraction(draw.nominal_v))
        for into, out, amps in given:
            right[self._place[into]] += Fraction(amps)
            right[self._place[out]] -= Fraction(amps)
        for ground in {self._place[root] for root in self.island} | (set(range(size)) - set(self._place)):
            matrix[ground] = [Fraction(column == ground) for column in range(size)]
            right[ground] = Fraction(0)
        return dense(matrix, right)

    def answers(self) -> list[Answer]:
        """Return the answer: two, or none, where a load of constant power has as many working points."""
        loads = [d for d in self._case.draws if self._serves(d.feed, d.back) and d.name in self._reached]
        feeds = [feed for feed in self._case.feeds if self._serves(feed.out, feed.back)]
        given = [(f.out, f.back, f.current_a) for f in feeds]
        given += [(d.back, d.feed, d.current_a) for d in loads if d.model == CONSTANT_CURRENT]
        served = frozenset([*(draw.name for draw in loads), *(feed.name for feed in feeds)])
        volts = self._volts(given, loads, at_rest=False)
        powers = [draw for draw in loads if draw.model == CONSTANT_POWER and draw.current_a]
        assert len(powers) <= 1, "the quadratic equation is that of one load"
        if not powers:
            return [self._answer(volts, served, None)]
        (draw,) = powers
        unit = self._volts([(draw.feed, draw.back, 1.0)], loads, at_rest=True)
        feed, back = self._place[draw.feed], self._place[draw.back]
        ohm, open_v = unit[feed] - unit[back], volts[feed] - volts[back]
        power_w = Fraction(draw.current_a) * Fraction(draw.nominal_v)
        rest = open_v**2 - 4 * ohm * power_w
        if rest < 0 or open_v <= 0:
            return []
        found = []
        for root in (1, -1):
            power_v = (float(open_v) + root * math.sqrt(rest)) / 2
            if power_v > 0:
                amps = power_w / Fraction(power_v)
                fed = [v - amps * u for v, u in zip(volts, unit, strict=True)]
                found.append(self._answer(fed, served, power_v))
        return found

    def _answer(self, volts: list[Fraction], served: frozenset[str], power_v: float | None) -> Answer:
        at = [volts[place] for place in self._place]
        currents = {
            e.index: float((at[e.a] - at[e.b] - Fraction(e.drop_v)) / self._ohm[e.index])
            for e in self.edges
            if self._ohm[e.index]
        }
        return Answer(self._conducting, [float(v) for v in at], self.island, served, currents, power_v)


def _ohm(edge: Edge) -> float:
    return RHO_30C * edge.length_m / edge.area_mm2 if edge.area_mm2 else edge.resistance_ohm


def within_reach(case: Case) -> set[str]:
    """Return the loads that a battery or a source reaches through diodes the right way round, and that lead back."""
    graph: nx.DiGraph[Any] = nx.DiGraph()
    graph.add_nodes_from(range(len(case.network.posts)))
    for edge in case.network.edges:
        ends = (case.network.posts[post].rsplit(".", 1)[-1] for post in (edge.a, edge.b))
        if edge.kind is not EdgeKind.CONTACT or (edge.part, *ends) in case.state.closed:
            graph.add_edge(edge.a, edge.b)
            if edge.kind is not EdgeKind.DIODE:
                graph.add_edge(edge.b, edge.a)
    for battery in case.network.batteries:
        graph.add_edges_from([(battery.neg, battery.pos), (battery.pos, battery.neg)])
    starts = {b.pos for b in case.network.batteries} | {feed.out for feed in case.feeds}
    goals = {b.pos for b in case.network.batteries} | {feed.back for feed in case.feeds}
    fed = starts.union(*(nx.descendants(graph, post) for post in starts))
    giving = goals.union(*(nx.ancestors(graph, post) for post in goals))
    return {
        draw.name
        for draw in case.draws
        if (draw.feed in fed and draw.back in giving)
        or (draw.model == RESISTIVE and draw.back in fed and draw.feed in giving)
    }


def agreeing(case: Case, *, is_full: bool) -> list[Answer]:
    """Return the answers with which all their diodes agree, of those that serve most loads and sources."""
    diodes = [edge.index for edge in case.network.diodes]
    sets = itertools.chain.from_iterable(itertools.combinations(diodes, n) for n in range(len(diodes) + 1))
    answers = [answer for some in sets for answer in Dense(case, frozenset(some), is_full=is_full).answers()]
    answers = [answer for answer in answers if answer.has_all_agreeing(case.network.diodes)]
    answers = [answer for answer in answers if not any(answer.served < other.served for other in answers)]
    asking = {draw.name for draw in case.draws if draw.current_a} & within_reach(case)
    # Else a source gives less than its load asks, or a load asks for more power than there is.
    return answers if all(asking <= answer.served for answer in answers) else []


def consistent(case: Case, *, is_full: bool) -> list[Answer]:
    """Return the answers that agree; of several working points that with most voltage."""
    answers = agreeing(case, is_full=is_full)
    best = max((answer.power_v for answer in answers if answer.power_v), default=0.0)
    return [answer for answer in answers if not best or (answer.power_v and answer.power_v > best - FORWARD_V)]


def has_one_working_point(case: Case, *, is_full: bool) -> bool:
    """Tell whether a load of constant power has a single working point above half its nominal voltage."""
    answers = [answer for answer in agreeing(case, is_full=is_full) if answer.power_v is None or answer.power_v >= 6]
    return bool(answers) and is_one(answers)


def relative(pairs: Iterable[tuple[float, float]], settled: float = UNSETTLED_A) -> float:
    """Return the largest relative difference of pairs, beyond what the solver leaves unsettled."""
    rows = list(pairs)
    floor = NEAR_ZERO * max([1.0, *(abs(theirs) for _, theirs in rows)])
    return max(((abs(ours - theirs) - settled) / max(abs(theirs), floor) for ours, theirs in rows), default=0.0)


def differing(ours: dict[int, float], theirs: dict[int, float]) -> float:
    """Return the largest relative difference of currents; what is not in one of them carries nothing."""
    return relative((ours.get(index, 0.0), theirs.get(index, 0.0)) for index in {*ours, *theirs})


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
    for feed in flow._feeds:  # which are served is asked below
        into[feed.out] += feed.current_a
        into[feed.back] -= feed.current_a
    for draw in case.draws:
        if draw.name in flow.load_a:
            volts = flow.across(draw.feed, draw.back)
            amps = draw.current_a
            if draw.model == RESISTIVE:
                amps *= volts / draw.nominal_v
            elif draw.model == CONSTANT_POWER and amps:
                amps *= draw.nominal_v / volts
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
        if (
            first.power_v is not None and first.power_v < 6.1
        ):  # below half its nominal voltage there is no working point
            continue
        assert isinstance(flow, Flow), f"no answer, but {sorted(first.conducting)} agree"
        # Of two sources that drive each other through one diode it is open which of them runs: no boat has such a pair.
        if len(case.feeds) > 1 and {feed.name for feed in flow._feeds} != first.served & {f.name for f in case.feeds}:
            continue
        assert differing(resistive_currents(flow), first.currents_a) < AGREES, first


@settings(max_examples=100, deadline=None, derandomize=True)
@given(diode_tangles())
def test_any_tangle_with_diodes_is_solved_as_the_on_off_set_that_agrees_says(case: Case) -> None:
    check_case(case)


@settings(max_examples=100, deadline=None, derandomize=True)
@given(diode_boats())
def test_drawn_boats_with_diodes_are_solved_as_the_on_off_set_that_agrees_says(case: Case) -> None:
    check_case(case)


def solution(wiring: Wiring) -> Flow:
    """Solve a sketch with full batteries; it must have an answer, and keep the laws."""
    case = wiring.made()
    flow = case.grid(is_full=True).solve(case.draws, case.feeds)
    assert isinstance(flow, Flow)
    check_laws(case, flow)
    return flow


def two_banks(start_v: float = 12.8) -> tuple[Wiring, int, int, int]:
    """Return two banks of 4 milliohm behind an isolator: the sketch, its anode, and both tops; 0 is the reference."""
    wiring = Wiring()
    ground, anode, house, start = (wiring.post() for _ in range(4))
    wiring.battery(house, ground, 12.8, 0.004)
    wiring.battery(start, ground, start_v, 0.004, "START")
    wiring.diode(anode, house)
    wiring.diode(anode, start)
    return wiring, anode, house, start


def test_an_isolator_parts_the_current_of_its_source_between_like_banks() -> None:
    wiring, anode, house, _ = two_banks()
    wiring.feed(anode, 0, 60.0)
    flow = solution(wiring)
    assert list(flow.currents_a.values()) == pytest.approx([30.0, 30.0])
    assert flow.voltage(house) == pytest.approx(12.8 + 30 * 0.004)
    assert flow.across(anode, house) == pytest.approx(0.4 + 30 * 0.002)


def test_the_lower_bank_takes_more_and_none_gives_to_the_other() -> None:
    # 12.8 + 0.006·a = 12.3 + 0.006·b and a + b = 60: b - a = 83.3, more than there is, so that a blocks.
    wiring, anode, _, _ = two_banks(start_v=12.3)
    wiring.feed(anode, 0, 60.0)
    assert solution(wiring).currents_a == pytest.approx({1: 60.0})
    wiring.feed(anode, 0, 40.0)  # of 100 A the higher bank takes its share
    assert solution(wiring).currents_a == pytest.approx({0: 50 - 83.3333333 / 2, 1: 50 + 83.3333333 / 2})


def test_a_small_load_beside_the_source_of_an_isolator_is_fed_by_the_source() -> None:
    wiring, anode, _, _ = two_banks()
    wiring.feed(anode, 0, 60.0)
    wiring.draw(anode, 0, 2.0, 12.0, CONSTANT_CURRENT)
    flow = solution(wiring)
    assert flow.load_a == {"L0": 2.0}
    assert list(flow.currents_a.values()) == pytest.approx([29.0, 29.0])


def test_a_load_beside_a_source_that_stands_still_gets_nothing_and_the_rest_is_solved() -> None:
    wiring, anode, house, _ = two_banks()
    wiring.feed(anode, 0, 0.0)
    wiring.draw(anode, 0, 2.0, 12.0, CONSTANT_CURRENT)
    wiring.draw(house, 0, 10.0, 12.0, CONSTANT_CURRENT)
    flow = solution(wiring)
    assert flow.load_a == {"L1": 10.0}
    assert flow.battery_currents() == pytest.approx({"B0": 10.0, "B1": 0.0})


def test_a_load_behind_a_diode_that_is_turned_round_takes_nothing_from_a_source_beside_it() -> None:
    wiring, _, house, _ = two_banks()
    behind = wiring.post()
    wiring.diode(behind, house, 0.6)
    wiring.draw(behind, 0, 5.0, 12.0, RESISTIVE)
    wiring.feed(house, 0, 5.0)
    flow = solution(wiring)
    assert flow.load_a == {}
    assert flow.battery_currents() == pytest.approx({"B0": -5.0, "B1": 0.0})


def test_a_source_behind_a_blocking_diode_helps_the_load_beside_it() -> None:
    # The bank feeds the panel through a diode; a source at the panel takes over a part, and can give nothing back.
    wiring, _, house, _ = two_banks()
    panel = wiring.post()
    wiring.diode(house, panel)
    wiring.draw(panel, 0, 10.0, 12.0, CONSTANT_CURRENT)
    wiring.feed(panel, 0, 4.0)
    assert solution(wiring).battery_currents() == pytest.approx({"B0": 6.0, "B1": 0.0})


def test_a_load_whose_current_could_only_come_back_against_a_diode_does_not_stop_the_rest() -> None:
    wiring, _, house, _ = two_banks()
    far = wiring.post()
    wiring.diode(house, far)
    wiring.draw(house, far, 20.0, 12.0, CONSTANT_CURRENT)
    wiring.draw(house, 0, 7.0, 12.0, CONSTANT_CURRENT)
    assert solution(wiring).battery_currents() == pytest.approx({"B0": 7.0, "B1": 0.0})


def test_a_load_of_constant_power_near_the_most_there_is_is_not_lost_to_a_diode_that_feeds_nothing() -> None:
    # 11.875 V behind 0.324 ohm gives 108.8 W at most. A heater on the wrong side of a diode would take the rest.
    wiring = Wiring()
    ground, pos, top, behind = (wiring.post() for _ in range(4))
    wiring.battery(pos, ground, 11.875, 0.0078)
    wiring.join(pos, top, 0.3162)
    wiring.diode(behind, top, 0.0, 0.1)
    wiring.draw(behind, ground, 1.0, 12.0, RESISTIVE)
    wiring.draw(top, ground, 9.0, 12.0, CONSTANT_POWER)
    flow = solution(wiring)
    assert flow.load_a.keys() == {"L1"}
    assert flow.voltage(top) == pytest.approx(11.875 / 2 + math.sqrt(11.875**2 / 4 - 0.324 * 108))


# --- ngspice


class DiodeNetlist(Netlist):
    """Write every diode as a current source that is 0 up to its drop, then a straight line.

    ngspice finds which conduct. What our solution says of it decides one thing alone: which posts no
    current comes to, and are tied to the ground by 0.1 gigaohm, so that they have some voltage.
    """

    def text(self, *args: Any) -> str:
        """Return the whole netlist."""
        return re.sub(r"^(rt\d+ \w+ 0) 1$", r"\1 1e8", super().text(*args), flags=re.MULTILINE)

    def _write_edges(self) -> None:
        whole, self.live = self.live, [edge for edge in self.live if edge.kind is not EdgeKind.DIODE]
        super()._write_edges()
        self.live = whole
        for edge in self.network.diodes:
            a, b = self.node(edge.a), self.node(edge.b)
            above = f"(V({a})-V({b})-({edge.drop_v!r}))"
            self.lines.append(f"bd{edge.index} {a} {b} I = {above} > 0 ? {above}*{1 / edge.resistance_ohm!r} : 0")

    def currents_a(self, found: Vectors) -> dict[int, float]:
        """Return the current of every live edge, and of every diode by its voltage."""
        volts = self.volts(found)
        above = {edge: volts[edge.a] - volts[edge.b] - edge.drop_v for edge in self.network.diodes}
        return super().currents_a(found) | {e.index: max(0.0, v) / e.resistance_ohm for e, v in above.items()}


def netlist_of(case: Case, flow: Flow, *, is_full: bool) -> DiodeNetlist:
    """Write a drawn network as a netlist."""
    conducting = frozenset(e.index for e in case.network.diodes if flow.currents_a.get(e.index, 0.0) > CARRIES_A)
    netlist = DiodeNetlist(case.network, case.state.closed, RHO_30C, is_full, conducting)
    netlist.add([draw for draw in case.draws if draw.name in flow.load_a], flow._feeds)
    # Where ngspice does not find its way from 0 V, it may start at our answer; if it is none, it does not stay there.
    posts = (post for post in range(len(case.network.posts)) if netlist.node(post) != "0")
    netlist.guesses = [f".nodeset v({netlist.node(post)})={flow.voltage(post)!r}" for post in posts]
    return netlist


def compared(netlist: DiodeNetlist, flow: Flow, found: Vectors) -> tuple[float, float]:
    """Return the largest relative difference of voltages, where any current comes to, and of currents."""
    volts, home = netlist.volts(found), netlist.island[netlist.network.reference]
    live = [(flow.voltage(p), v) for p, v in enumerate(volts) if netlist.island[p] == home]
    theirs = netlist.currents_a(found)
    batteries = netlist.battery_currents(found)
    pairs = [(flow.currents_a.get(index, 0.0), amps) for index, amps in theirs.items()]
    pairs += [(flow.battery_currents()[name], amps) for name, amps in batteries.items()]
    return relative(live, 0.0), relative(pairs)


def check_with_ngspice(cases: Sequence[Case]) -> None:
    """Assert that ngspice finds the same voltages and currents, all circuits in one run."""
    rows = []
    for case, is_full in itertools.product(cases, (True, False)):
        flow = case.grid(is_full=is_full).solve(case.draws, case.feeds)
        if isinstance(flow, Flow) and has_one_working_point(case, is_full=is_full):
            rows.append((flow, netlist_of(case, flow, is_full=is_full)))
    if rows:
        for (flow, netlist), found in zip(rows, solved_by_ngspice([n for _, n in rows]), strict=True):
            volts, amps = compared(netlist, flow, found)
            assert max(volts, amps) < AGREES, f"{volts} {amps} {flow.volts} {netlist.text()} {found}"


@needs_ngspice
@settings(max_examples=30, deadline=None, derandomize=True)
@given(st.lists(diode_boats(), min_size=4, max_size=8))
def test_in_drawn_boats_ngspice_finds_the_same_diodes_to_conduct_and_the_same_currents(cases: list[Case]) -> None:
    check_with_ngspice(cases)


@st.composite
def diode_meshes(draw: st.DrawFn) -> Case:
    """Draw posts joined to a reference by batteries or resistances, then loops and diodes: nothing floats."""
    wiring = Wiring()
    posts = [wiring.post()]
    for _ in range(draw(st.integers(2, 7))):
        old, new = draw(st.sampled_from(posts)), wiring.post()
        if len(posts) < 3 or draw(st.booleans()):
            wiring.battery(new, old, draw(st.floats(2.0, 26.0)), draw(st.floats(0.001, 0.05)))
        else:
            wiring.join(new, old, draw(OHMS))
        posts.append(new)
    pair = st.permutations(posts).map(lambda some: (some[0], some[1]))
    for _ in range(draw(st.integers(0, 3))):
        a, b = draw(pair)
        wiring.join(a, b, draw(OHMS))
    for _ in range(draw(st.integers(1, 4))):
        a, b = draw(pair)
        wiring.diode(a, b, draw(DROPS), draw(OHMS))
    for _ in range(draw(st.integers(0, 3))):
        a, b = draw(pair)
        wiring.draw(a, b, draw(AMPS), 12.0, draw(st.sampled_from([CONSTANT_CURRENT, RESISTIVE])))
    for _ in range(draw(st.integers(0, 2))):
        a, b = draw(pair)
        wiring.feed(a, b, draw(AMPS))
    return wiring.made()


@needs_ngspice
@settings(max_examples=30, deadline=None, derandomize=True)
@given(st.lists(diode_meshes(), min_size=4, max_size=8))
def test_in_drawn_meshes_ngspice_finds_the_same_diodes_to_conduct_and_the_same_currents(cases: list[Case]) -> None:
    check_with_ngspice(cases)


@needs_ngspice
def test_a_diode_that_is_a_thousandth_off_is_noticed() -> None:
    wiring, anode, _, _ = two_banks(start_v=12.7)
    wiring.feed(anode, 0, 60.0)
    case = wiring.made()
    flow = case.grid(is_full=True).solve(case.draws, case.feeds)
    assert isinstance(flow, Flow)
    first = case.network.edges[0]
    changed = [replace(first, drop_v=first.drop_v * 1.001), replace(first, resistance_ohm=first.resistance_ohm * 1.001)]
    cases = [case, *(replace(case, network=replace(case.network, edges=(e, *case.network.edges[1:]))) for e in changed)]
    netlists = [netlist_of(one, flow, is_full=True) for one in cases]
    true, *off = [max(compared(n, flow, v)) for n, v in zip(netlists, solved_by_ngspice(netlists), strict=True)]
    assert true < AGREES
    assert min(off) > 10 * AGREES


# --- exposure

SUPPLIES = st.one_of(st.just(0.0), st.just(0.0), st.just(INF), st.integers(1, 30).map(float))
RATINGS = st.one_of(st.just(INF), st.integers(1, 12).map(float), st.sampled_from([40.0, 100.0]))


@st.composite
def one_way_graphs(draw: st.DrawFn) -> tuple[Network, list[float]]:
    """Draw a multigraph of conductors, devices and one to four diodes, in trees or with loops."""
    size = draw(st.integers(2, 9))
    if draw(st.booleans()):
        pairs = [(draw(st.integers(0, new - 1)), new) for new in range(1, size)]
    else:
        post = st.integers(0, size - 1)
        pairs = draw(st.lists(st.tuples(post, post), min_size=1, max_size=14))
    pairs = [pair if draw(st.booleans()) else pair[::-1] for pair in pairs]
    ways = draw(st.sets(st.integers(0, len(pairs) - 1), min_size=1, max_size=4))
    edges = []
    for index, (a, b) in enumerate(pairs):
        rating_a = INF if index in ways else draw(RATINGS)
        kind = EdgeKind.DIODE if index in ways else EdgeKind.DEVICE if rating_a < INF else EdgeKind.CONDUCTOR
        edges.append(Edge(index, kind, a, b, f"E{index:02d}", rating_a, 1.0))
    network = Network(tuple(f"P{n:02d}" for n in range(size)), tuple(edges), (), (), (), 0)
    return network, [draw(SUPPLIES) for _ in range(size)]


def most(network: Network, supply: Sequence[float], sink: int, without: int) -> float:
    """Return the maximum flow to a post with one edge taken out, by networkx; INF where nothing limits it."""
    arcs: list[tuple[int | str, int, float]] = [
        ("sources", post, amount) for post, amount in enumerate(supply) if amount
    ]
    for edge in network.edges:
        if edge.index != without and edge.a != edge.b:
            arcs.append((edge.a, edge.b, edge.rating_a))
            if edge.kind is not EdgeKind.DIODE:
                arcs.append((edge.b, edge.a, edge.rating_a))
    graph: nx.DiGraph[Any] = nx.DiGraph()
    graph.add_nodes_from(["sources", *range(len(supply))])
    for a, b, amount in arcs:
        known = graph.edges[a, b]["amount"] if graph.has_edge(a, b) else 0.0
        graph.add_edge(a, b, amount=known + amount)
    free: nx.DiGraph[Any] = nx.DiGraph((a, b) for a, b, data in graph.edges(data=True) if data["amount"] == INF)
    if "sources" in free and sink in free and nx.has_path(free, "sources", sink):
        return INF
    for _, _, data in graph.edges(data=True):
        if data["amount"] < INF:
            data["capacity"] = data["amount"]
    return float(nx.maximum_flow(graph, "sources", sink)[0])


@settings(max_examples=200, deadline=None, derandomize=True)
@given(one_way_graphs())
def test_through_diodes_every_end_is_reached_by_the_maximum_flow_of_networkx(case: tuple[Network, list[float]]) -> None:
    network, supply = case
    names = {post: [(f"source at {post}", amount)] for post, amount in enumerate(supply) if amount}
    study = flow_study(network, list(range(len(network.edges))), supply, names)
    for edge in network.edges:
        found = study.exposures[edge.index]
        expected = tuple(most(network, supply, end, edge.index) for end in (edge.a, edge.b))
        assert (found.at_a, found.at_b) == expected, edge
        for node, arriving in zip((edge.a, edge.b), expected, strict=True):
            assert sum(amount for _, amount in study.terms(edge, node)) >= arriving


def test_each_bank_behind_an_isolator_is_reached_by_the_source_and_not_by_the_other_bank() -> None:
    boat = studied(
        a_battery("HOUSE"), a_battery("START", bank="START"), a_source("ALT", 60.0), isolator(), a_bus("BUS-N"),
        a_fuse("FH", 100.0, mount={"line": "HOUSE.pos"}), a_fuse("FS", 80.0, mount={"line": "START.pos"}),
        a_conductor("in", "ALT.out", "ISO.in"), a_conductor("h", "ISO.house", "FH.load"),
        a_conductor("s", "ISO.start", "FS.load"), a_conductor("alt-n", "ALT.neg", "BUS-N"),
        *(a_conductor(f"{name}-n", f"{name}.neg", "BUS-N") for name in ("HOUSE", "START")),
    )  # fmt: skip
    reached = {}
    for name in ("in", "h", "s"):
        exposure = boat.exposures[0].exposures[boat.network.edges_of[name][0].index]
        reached[name] = (exposure.at_a, exposure.at_b)
    assert reached == {"in": (60.0, 0.0), "h": (60.0, 100.0), "s": (60.0, 80.0)}


def isolator() -> Device:
    """Place an isolator with one way in and two out."""
    part = Diode(
        id="isolator", posts=("in", "house", "start"), paths=(("in", "house"), ("in", "start")),
        drop_v=0.4, resistance_ohm=0.002,
    )  # fmt: skip
    return a_device("ISO", part)


# --- faults


def fault_levels(wiring: Wiring, *sources: SourceTie) -> list[float]:
    """Return the largest fault current of every post."""
    case = wiring.made()
    network = replace(case.network, sources=sources)
    grid = Grid(network, case.state, Copper(RHO_30C), is_full=True)
    levels = FaultLevels(grid, study_potentials(network, case.state))
    return [levels.largest_a(post) for post in range(len(network.posts))]


def test_a_fault_at_a_bank_gets_nothing_from_the_bank_beside_it_and_one_at_the_anode_from_neither() -> None:
    wiring, anode, house, start = two_banks(start_v=12.4)
    found = fault_levels(wiring)
    assert (found[house], found[start]) == pytest.approx((12.8 / 0.004, 12.4 / 0.004))
    assert found[anode] == 0


def test_a_fault_at_a_bank_gets_what_the_source_of_an_isolator_gives() -> None:
    wiring, anode, house, start = two_banks()
    found = fault_levels(wiring, SourceTie("ALT", "B", anode, 0, 60.0, 14.4, True))
    assert (found[house], found[start]) == pytest.approx((3260.0, 3260.0))


def test_a_fault_behind_a_diode_gets_what_the_bank_ahead_of_it_gives_less_its_drop() -> None:
    wiring, _, house, start = two_banks()
    bow, panel = wiring.post(), wiring.post()
    wiring.battery(bow, 0, 12.8, 0.004, "BOW")
    wiring.diode(bow, house)  # the bow bank helps the house bank
    wiring.diode(house, panel)
    found = fault_levels(wiring)
    assert found[bow] == pytest.approx(3200.0)
    assert found[start] == pytest.approx(3200.0)
    assert found[house] == pytest.approx(12.8 / 0.004 + 12.4 / 0.006)
    # At the panel: both as one EMF behind 4 and 6 milliohm side by side, less a drop, behind one more 2 milliohm.
    emf_v = (12.8 / 0.004 + 12.4 / 0.006) / (1 / 0.004 + 1 / 0.006)
    assert found[panel] == pytest.approx((emf_v - 0.4) / (1 / (1 / 0.004 + 1 / 0.006) + 0.002))


def test_a_fault_at_the_far_end_behind_a_diode_flows_through_the_device_ahead_of_it() -> None:
    boat = studied(
        a_battery("BAT"), a_fuse("F", 40.0, mount={"line": "BAT.pos"}), a_load("L"), a_bus("BUS-N"),
        a_device("ONE", Diode(id="one", posts=("a", "c"), paths=(("a", "c"),), drop_v=0.4, resistance_ohm=0.002)),
        a_conductor("out", "F.load", "ONE.a"), a_conductor("on", "ONE.c", "L.pos", length="2 m"),
        a_conductor("back", "L.neg", "BUS-N", length="2 m"), a_conductor("n", "BAT.neg", "BUS-N"),
    )  # fmt: skip
    potentials = boat.potentials[0]
    grid = Grid(boat.network, potentials.state, Copper(RHO_30C), is_full=False)
    far = far_ends(grid, potentials)["F"]
    metres = sum(edge.length_m / edge.area_mm2 for edge in boat.network.edges if edge.area_mm2)
    assert far.post == "L.pos"
    assert far.conductors == ("out", "on")
    assert far.current_a == pytest.approx((11.9 - 0.4) / (0.006 + 0.002 + RHO_30C * metres))
