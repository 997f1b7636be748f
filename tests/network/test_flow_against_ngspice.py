"""Hold the solved network against ngspice: every voltage, every current, every fault current.

Differences are relative. Near zero, below a tenth of the largest value of its kind in the
circuit, a value is held against that tenth: a current over 0.1 milliohm is the difference of
two voltages whose sixteenth digit is a nanoampere or so.

Measured on the example (12 boats, every condition, full and low batteries): voltages differ by
4e-12 at most and currents by 8e-9; fault currents by 2e-13, those through devices for a fault at their far
end by 4e-13. What remains is rounding: of ngspice's matrix, whose pivots are differences, and of the
voltages in its file; and of ours in the last digit or two.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.network.conditions import CONSTANT_POWER
from checker.network.faults import FaultLevels
from checker.network.flow import Flow, Grid, NoOperatingPoint
from checker.network.graph import EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.studies import Studies
from tests.networks import RHO_30C, Case, Sketch, example_studies, tangles, wired_boats
from tests.spice import Netlist, Vectors, needs_ngspice, ngspice
from tests.spice import solved as solved_by_ngspice

pytestmark = needs_ngspice
AGREES = 1e-6
NEAR_ZERO = 0.1

Solution = Flow | NoOperatingPoint


@dataclass(frozen=True)
class Difference:
    """Hold the largest relative difference of a circuit: of voltages and of currents, with the worst places."""

    volts: float
    amps: float
    worst: str

    @property
    def largest(self) -> float:
        """Return the larger of the two."""
        return max(self.volts, self.amps)


def relative(pairs: Iterable[tuple[str, float, float]]) -> tuple[float, str]:
    """Return the largest relative difference of pairs (name, ours, ngspice's), and where it is."""
    rows = list(pairs)
    # Where nothing flows the largest is taken for 1 A, or 1 V.
    floor = NEAR_ZERO * max([1.0, *(abs(theirs) for _, _, theirs in rows)])
    return max(
        ((abs(ours - theirs) / max(abs(theirs), floor), f"{name}: {ours!r}, ngspice {theirs!r}") for name, ours, theirs in rows),
        default=(0.0, ""),
    )  # fmt: skip


def difference(netlist: Netlist, flow: Flow, found: Vectors) -> Difference:
    """Compare every voltage and every current of a solution with ngspice's."""
    posts, volts = netlist.network.posts, netlist.volts(found)
    ties = {post: tie.feed for post, tie in netlist.held.items()}
    home = netlist.island[netlist.network.reference]

    def voltage_pairs() -> Iterable[tuple[str, float, float]]:
        for post, name in enumerate(posts):
            root = netlist.island[post]
            if root == home or root in ties:
                yield name, flow.voltage(post), volts[post]
            else:  # it floats: only what is between its posts means anything
                yield name, flow.across(post, root), volts[post] - volts[root]

    def current_pairs() -> Iterable[tuple[str, float, float]]:
        for index, amps in netlist.currents_a(found).items():
            yield netlist.network.edges[index].part, flow.currents_a[index], amps
        ours = flow.battery_currents()
        for name, amps in netlist.battery_currents(found).items():
            yield name, ours[name], amps

    (worst_v, at_v), (worst_a, at_a) = relative(voltage_pairs()), relative(current_pairs())
    return Difference(worst_v, worst_a, f"{at_v}; {at_a}")


def conducting(network: Network, flow: Solution) -> frozenset[int]:
    """Return the diodes that a solution takes to conduct; ngspice's answer must bear them out."""
    diodes = {edge.index for edge in network.diodes}
    return frozenset(diodes & flow.currents_a.keys() if isinstance(flow, Flow) else ())


def netlist_of(case: Case, *, is_full: bool, diodes: frozenset[int] = frozenset()) -> Netlist:
    """Write a drawn network as a netlist."""
    netlist = Netlist(case.network, case.state.closed, RHO_30C, is_full, diodes)
    netlist.add(case.draws, case.feeds)
    return netlist


# --- the example


def example_conditions() -> list[tuple[str, Netlist, Solution]]:
    """Return every condition of every distinct boat of the example, with full and with low batteries."""
    rows: list[tuple[str, Netlist, Solution]] = []
    for name, studies in example_studies().items():
        for solved in studies.conditions.solved:
            for is_full, flow in ((True, solved.full), (False, solved.low)):
                operation, copper = solved.operation, studies.coppers.working
                diodes = conducting(studies.network, flow)
                netlist = Netlist(studies.network, operation.state.closed, copper.ohm_mm2_per_m, is_full, diodes)
                netlist.add(operation.draws, operation.feeds)
                rows.append((f"{name} {operation.condition.id} {'full' if is_full else 'low'}", netlist, flow))
    return rows


def test_every_condition_of_the_example_is_solved_as_ngspice_solves_it() -> None:
    rows = example_conditions()
    assert len(rows) == 2 * sum(len(studies.boat.conditions) for studies in example_studies().values())
    found = solved_by_ngspice([netlist for _, netlist, _ in rows])
    assert sum(len(netlist.held) > 0 for _, netlist, _ in rows) > 0  # arrays on their controllers
    differing = []
    for (name, netlist, flow), vectors in zip(rows, found, strict=True):
        assert isinstance(flow, Flow), name
        compared = difference(netlist, flow, vectors)
        if not compared.largest < AGREES or netlist.diode_faults(vectors):
            differing.append((name, compared, netlist.diode_faults(vectors)))
    assert differing == []


def test_a_resistance_that_is_a_thousandth_off_is_noticed() -> None:
    name, netlist, flow = example_conditions()[2]
    assert isinstance(flow, Flow), name
    loaded = max(netlist.live, key=lambda e: abs(flow.currents_a.get(e.index, 0.0)) * netlist.ohm[e.index])
    studies = next(iter(example_studies().values()))
    operation = studies.conditions.solved[1].operation
    ohm_mm2_per_m = studies.coppers.working.ohm_mm2_per_m
    off = Netlist(netlist.network, netlist.closed, ohm_mm2_per_m, is_full=True, scale_ohm={loaded.index: 1.001})
    off.add(operation.draws, operation.feeds)
    true, wrong = solved_by_ngspice([netlist, off])
    assert difference(netlist, flow, true).largest < AGREES
    assert difference(off, flow, wrong).largest > 10 * AGREES


def test_no_conductor_of_a_drawn_network_may_be_a_thousandth_off() -> None:
    """Every resistance that carries its share of the current is noticed, one by one."""
    case = _ladder()
    flow = case.grid(is_full=True).solve(case.draws, case.feeds)
    assert isinstance(flow, Flow)
    netlists = [netlist_of(case, is_full=True)]
    for edge in case.network.edges:
        netlist = Netlist(case.network, case.state.closed, RHO_30C, is_full=True, scale_ohm={edge.index: 1.001})
        netlist.add(case.draws, case.feeds)
        netlists.append(netlist)
    true, *wrong = [difference(n, flow, v).largest for n, v in zip(netlists, solved_by_ngspice(netlists), strict=True)]
    assert true < AGREES
    assert [edge.part for edge, found in zip(case.network.edges, wrong, strict=True) if found < 10 * AGREES] == []


def _ladder() -> Case:
    """Return two batteries that feed a load of constant power over a ring."""
    sketch = Sketch()
    ground, left, right, top, load = (sketch.post() for _ in range(5))
    for pos in (left, right):
        sketch.battery(pos, ground, 12.8, 0.004)
    for a, b, ohm in ((left, top, 0.002), (right, top, 0.003), (top, load, 0.01), (right, load, 0.02)):
        sketch.join(a, b, ohm)
    sketch.draw(load, ground, 40.0, 12.0, CONSTANT_POWER)
    return sketch.made(ground)


# --- drawn networks


def _agrees(cases: list[Case]) -> None:
    rows = [
        (case, full, case.grid(is_full=full).solve(case.draws, case.feeds)) for case in cases for full in (True, False)
    ]
    netlists = [netlist_of(case, is_full=full, diodes=conducting(case.network, flow)) for case, full, flow in rows]
    for (_, _, flow), netlist, vectors in zip(rows, netlists, ngspice(netlists), strict=True):
        if isinstance(flow, NoOperatingPoint):
            assert vectors is None or netlist.is_past_knee(vectors), flow
        else:
            assert vectors is not None, f"ngspice found no operating point: {netlist.text()}"
            compared = difference(netlist, flow, vectors)
            assert compared.largest < AGREES, compared
            assert netlist.diode_faults(vectors) == []


# What is drawn does not change from run to run: near the most that a network can feed ngspice may fail to converge.
@settings(max_examples=60, deadline=None, derandomize=True)
@given(st.lists(tangles(), min_size=1, max_size=5))
def test_any_tangle_of_batteries_and_resistances_is_solved_as_ngspice_solves_it(cases: list[Case]) -> None:
    _agrees(cases)


@settings(max_examples=60, deadline=None, derandomize=True)
@given(st.lists(wired_boats(), min_size=1, max_size=4))
def test_drawn_boats_with_loads_of_every_kind_are_solved_as_ngspice_solves_them(cases: list[Case]) -> None:
    _agrees(cases)


@pytest.mark.parametrize(("amps", "is_fed"), [(50.0, True), (133.0, True), (135.0, False), (400.0, False)])
def test_beyond_the_most_that_a_network_can_feed_neither_finds_a_working_point(amps: float, is_fed: bool) -> None:
    # 12.8 V behind 0.0255 ohm gives at most 12.8²/(4 × 0.0255) = 1606 W: 133.9 A × 12 V.
    sketch = Sketch()
    ground, pos, load = (sketch.post() for _ in range(3))
    sketch.battery(pos, ground, 12.8, 0.0055)
    sketch.join(pos, load, 0.02)
    sketch.draw(load, ground, amps, 12.0, CONSTANT_POWER)
    case = sketch.made(ground)
    flow = case.grid(is_full=True).solve(case.draws, case.feeds)
    netlist = netlist_of(case, is_full=True)
    (found,) = ngspice([netlist])
    assert isinstance(flow, Flow) is is_fed
    assert (found is not None and not netlist.is_past_knee(found)) is is_fed
    if isinstance(flow, Flow) and found is not None:
        assert difference(netlist, flow, found).largest < AGREES


# --- faults


def unfed(studies: Studies) -> Network:
    """Return the network without charge sources, which ngspice's short circuits leave out."""
    return replace(studies.network, sources=())


def fault_currents(studies: Studies, potentials: Potentials) -> dict[str, float]:
    """Return the largest current of a short from each post to the lowest post of a bank, by ngspice.

    One circuit for each pair of posts.
    """
    network, copper = unfed(studies), studies.coppers.cold
    bottoms = sorted({battery.neg for battery in network.batteries if potentials.is_return(battery.neg)})
    plain = Netlist(network, potentials.state.closed, copper.ohm_mm2_per_m, is_full=True)
    pairs = [
        (post, bottom)
        for post in range(len(network.posts))
        for bottom in bottoms
        if not potentials.is_return(post) and plain.island[post] == plain.island[bottom] in plain.powered
    ]
    largest: dict[str, float] = {}
    for (post, _), found in zip(pairs, solved_by_ngspice([plain.shorted(*pair) for pair in pairs]), strict=True):
        name = network.posts[post]
        largest[name] = max(largest.get(name, 0.0), abs(found["i(vf)"]))
    return largest


@pytest.mark.parametrize(
    ("hull", "states"), [("TND-031", ["in-use", "both-banks"]), ("TND-036", ["in-use", "both-banks"])]
)
def test_the_largest_fault_current_at_every_post_is_that_of_a_short_in_ngspice(hull: str, states: list[str]) -> None:
    studies = example_studies()[hull]
    assert [potentials.state.id for potentials in studies.potentials] == states
    for potentials in studies.potentials:
        grid = Grid(unfed(studies), potentials.state, studies.coppers.cold, is_full=True)
        levels = FaultLevels(grid, potentials)
        ours = {
            name: levels.largest_a(post) for post, name in enumerate(studies.network.posts) if levels.largest_a(post)
        }
        theirs = fault_currents(studies, potentials)
        assert ours == {name: pytest.approx(amps, rel=AGREES) for name, amps in theirs.items()}
        assert len(ours) > 150 and min(ours.values()) < 100 and max(ours.values()) > 5000


def far_end_currents(studies: Studies) -> tuple[dict[str, float], dict[str, float]]:
    """Return for each device the current of a fault at its far end, ours and by ngspice: hot copper, low batteries."""
    network = studies.network
    backs = {load.feed: load.back for load in network.loads} | {source.out: source.back for source in network.sources}
    ours: dict[str, float] = {}
    netlists: list[Netlist] = []
    for name, far in studies.far_ends.items():
        ours[name] = far.current_a
        netlist = Netlist(network, far.state.closed, studies.coppers.hot.ohm_mm2_per_m, is_full=False)
        end = network.index[far.post]
        netlists.append(netlist.shorted(end, backs.get(end, network.reference)))
    found = solved_by_ngspice(netlists)
    theirs: dict[str, float] = {}
    for name, netlist, vectors in zip(ours, netlists, found, strict=True):
        (edge,) = (edge for edge in network.edges_of[name] if edge.kind is EdgeKind.DEVICE)
        theirs[name] = netlist.currents_a(vectors)[edge.index]
    return ours, theirs


@pytest.mark.parametrize("hull", ["TND-031", "TND-036", "TND-038"])
def test_the_current_through_each_device_for_a_fault_at_its_far_end_is_that_of_ngspice(hull: str) -> None:
    ours, theirs = far_end_currents(example_studies()[hull])
    assert ours == {name: pytest.approx(amps, rel=AGREES) for name, amps in theirs.items()}
    assert len(ours) > 50
