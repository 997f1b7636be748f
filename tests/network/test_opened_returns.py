"""Hold what is diverted by an opened return against a dense reckoning of the network without that conductor."""

from __future__ import annotations

from collections.abc import Sequence

import networkx as nx
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from checker.boat.hull import Condition
from checker.network.conditions import CONSTANT_CURRENT, CONSTANT_POWER, Draw, Operation
from checker.network.flow import Copper, Flow
from checker.network.losses import Diverted, diverted_currents
from tests.networks import OHMS, RHO_30C, Case, Sketch

AGREES = 1e-6
HEAVY_A = 20.0


@st.composite
def ringed_returns(draw: st.DrawFn) -> Case:
    """Draw a battery or two, a tree of supplies, and returns with rings in them; every edge has a resistance."""
    sketch = Sketch()
    returns, supplies = [sketch.post()], [sketch.post()]
    for _ in range(draw(st.integers(1, 2))):
        sketch.battery(supplies[0], returns[0], draw(st.floats(12.2, 13.2)), draw(st.floats(0.002, 0.02)))
    for tree, most in ((supplies, 3), (returns, 5)):
        for _ in range(draw(st.integers(1, most))):
            new = sketch.post()
            sketch.join(draw(st.sampled_from(tree)), new, draw(OHMS))
            tree.append(new)
    for _ in range(draw(st.integers(1, 3))):
        sketch.join(draw(st.sampled_from(returns)), draw(st.sampled_from(returns)), draw(OHMS))
    for _ in range(draw(st.integers(1, 3))):
        amps = draw(st.floats(5.0, 200.0))
        sketch.draw(draw(st.sampled_from(supplies)), draw(st.sampled_from(returns)), amps, 12.0, CONSTANT_CURRENT)
    if draw(st.booleans()):
        sketch.feed(draw(st.sampled_from(supplies)), draw(st.sampled_from(returns)), draw(st.floats(5.0, 60.0)))
    return sketch.made()


def reckoned(case: Case, *, without: int | None = None, as_resistances: bool) -> dict[int, float]:
    """Return the current of every edge: nodal analysis by Gaussian elimination, with nothing of the checker's."""
    network = case.network
    size = len(network.posts)
    rows = [[0.0] * (size + 1) for _ in range(size)]

    def conduct(a: int, b: int, siemens: float) -> None:
        for near, far in ((a, b), (b, a)):
            rows[near][near] += siemens
            rows[near][far] -= siemens

    def push(into: int, out_of: int, amps: float) -> None:
        rows[into][size] += amps
        rows[out_of][size] -= amps

    edges = {e.index: 1 / (RHO_30C * e.length_m / e.area_mm2) for e in network.edges if e.index != without}
    for index, siemens in edges.items():
        conduct(network.edges[index].a, network.edges[index].b, siemens)
    for tie in network.batteries:
        assert tie.full is not None
        conduct(tie.pos, tie.neg, 1 / tie.full.resistance_ohm)
        push(tie.pos, tie.neg, tie.full.emf_v / tie.full.resistance_ohm)
    for feed in case.feeds:
        push(feed.out, feed.back, feed.current_a)
    for draw in case.draws:
        if as_resistances:
            conduct(draw.feed, draw.back, draw.current_a / draw.nominal_v)
        else:
            push(draw.back, draw.feed, draw.current_a)
    volts = _solved(rows, ground=network.reference)
    return {i: (volts[network.edges[i].a] - volts[network.edges[i].b]) * siemens for i, siemens in edges.items()}


def _solved(rows: list[list[float]], ground: int) -> list[float]:
    size = len(rows)
    rows[ground] = [1.0 if column == ground else 0.0 for column in range(size)] + [0.0]
    for column in range(size):
        best = max(range(column, size), key=lambda r: abs(rows[r][column]))
        rows[column], rows[best] = rows[best], rows[column]
        for row in range(size):
            if row != column:
                share = rows[row][column] / rows[column][column]
                rows[row] = [x - share * y for x, y in zip(rows[row], rows[column], strict=True)]
    return [rows[i][size] / rows[i][i] for i in range(size)]


def in_ring(case: Case, index: int) -> bool:
    """Tell whether a return conductor has another way beside it, by networkx."""
    rest: nx.MultiGraph[int] = nx.MultiGraph((e.a, e.b) for e in case.network.edges if e.index != index)
    edge = case.network.edges[index]
    returns: nx.MultiGraph[int] = nx.MultiGraph((e.a, e.b) for e in case.network.edges)
    is_return = case.network.reference in returns and nx.has_path(returns, edge.a, case.network.reference)
    return is_return and edge.a in rest and edge.b in rest and bool(nx.has_path(rest, edge.a, edge.b))


def told(*cases: Case, heavy_a: float = HEAVY_A) -> list[Diverted]:
    """Return what is found over conditions A, B and so on of one network."""
    asked: list[Operation] = []
    flows: list[Flow] = []
    for name, case in zip("ABC", cases, strict=False):
        condition = Condition(id=name, switches=(), closed=(), loads_a=(), sources_a=())
        asked.append(Operation(condition, case.state, case.draws, case.feeds))
        flow = case.grid(is_full=True).solve(case.draws, case.feeds)
        assert isinstance(flow, Flow)
        flows.append(flow)
    return diverted_currents(cases[0].network, asked, flows, Copper(RHO_30C), heavy_a)


@settings(max_examples=150, deadline=None)
@given(ringed_returns())
def test_what_is_diverted_is_what_flows_with_that_conductor_left_out(case: Case) -> None:
    """Every heavy return in a ring, every conductor that then carries more, and each current."""
    usual = reckoned(case, as_resistances=False)
    assume(all(abs(abs(amps) - HEAVY_A) > 1e-3 for amps in usual.values()))
    names = {edge.index: edge.part for edge in case.network.edges}
    sure: dict[tuple[str, str], float] = {}
    unsure: set[tuple[str, str]] = set()
    for opened, name in names.items():
        if abs(usual[opened]) < HEAVY_A or not in_ring(case, opened):
            continue
        for other, amps in reckoned(case, without=opened, as_resistances=True).items():
            key = name, names[other]
            more_a = abs(amps) - abs(usual[other])
            if abs(more_a) <= 1e-5 * abs(usual[other]) + AGREES:
                unsure.add(key)
            elif more_a > 0:
                sure[key] = abs(amps)
    found = {(d.opened, d.part): d.current_a for d in told(case)}
    assert sure.keys() <= found.keys() <= sure.keys() | unsure
    for key, amps in sure.items():
        assert found[key] == pytest.approx(amps, rel=AGREES, abs=AGREES)


# --- by hand: an engine's starter with a heavy return and a bond beside it

FEED_OHM, HEAVY_OHM, BOND_OHM, CELL_OHM = 0.0005, 0.0005, 0.002, 0.004
HEAVY, BOND = "E01", "E02"


def engine(*loads: tuple[float, str]) -> Case:
    """Return a battery, a feed E00 and two returns E01 and E02; each load is a current at 12 V and a model."""
    sketch = Sketch()
    low, high, starter, block = (sketch.post() for _ in range(4))
    sketch.battery(high, low, 12.8, CELL_OHM)
    sketch.join(high, starter, FEED_OHM)
    sketch.join(block, low, HEAVY_OHM)
    sketch.join(block, low, BOND_OHM)
    for amps, model in loads:
        sketch.draw(starter, block, amps, 12.0, model)
    return sketch.made(low)


def test_bond_takes_all_that_the_starter_draws_over_the_bond_alone() -> None:
    """I = E/(R_cell + R_feed + R_bond + 12 V/200 A); the feed carries less than before and is not told."""
    due_a = 12.8 / (CELL_OHM + FEED_OHM + BOND_OHM + 12.0 / 200.0)
    assert due_a < 200.0
    (only,) = told(engine((200.0, CONSTANT_CURRENT)), heavy_a=41.0)
    assert (only.opened, only.part, only.condition) == (HEAVY, BOND, "A")
    assert only.current_a == pytest.approx(due_a)


@pytest.mark.parametrize(("heavy_a", "opened"), [(30.0, [BOND, HEAVY]), (41.0, [HEAVY]), (161.0, [])])
def test_return_is_opened_from_the_heavy_current_on(heavy_a: float, opened: list[str]) -> None:
    """Of 200 A the heavy return carries 160 A and the bond 40 A."""
    assert sorted({d.opened for d in told(engine((200.0, CONSTANT_CURRENT)), heavy_a=heavy_a)}) == sorted(opened)


@pytest.mark.parametrize("order", [(200.0, 60.0), (60.0, 200.0)])
def test_return_is_opened_in_the_condition_in_which_it_carries_most(order: Sequence[float]) -> None:
    """Whichever is written first."""
    (only,) = told(*(engine((amps, CONSTANT_CURRENT)) for amps in order), heavy_a=41.0)
    assert only.condition == "AB"[list(order).index(200.0)]


def test_load_of_constant_power_keeps_its_power() -> None:
    """100 A at 12 V: I = (E - sqrt(E² - 4·R·P))/(2·R) over the bond alone."""
    ohm, watt = CELL_OHM + FEED_OHM + BOND_OHM, 1200.0
    (only,) = (d for d in told(engine((100.0, CONSTANT_POWER))) if d.part == BOND)
    assert only.current_a == pytest.approx((12.8 - (12.8**2 - 4 * ohm * watt) ** 0.5) / (2 * ohm))


def test_single_return_diverts_nothing() -> None:
    """It takes its load with it; a ring elsewhere does not help it."""
    sketch = Sketch()
    low, high, block, bus = (sketch.post() for _ in range(4))
    sketch.battery(high, low, 12.8, CELL_OHM)
    sketch.join(block, bus, HEAVY_OHM)
    for _ in range(2):
        sketch.join(bus, low, BOND_OHM)
    sketch.draws.append(Draw("STARTER", high, block, 200.0, 12.0, CONSTANT_CURRENT))
    assert {(d.opened, d.part) for d in told(sketch.made(low))} == {("E01", "E02"), ("E02", "E01")}
