"""Hold Kirchhoff's laws over every solved condition: what flows to a post leaves it, and what is given is taken.

The currents of batteries, loads and sources are reckoned here from the voltages and from what was
asked, not taken from the solution.
"""

from __future__ import annotations

from collections.abc import Sequence

import pytest
from hypothesis import given, settings

from checker.network.conditions import CONSTANT_CURRENT, CONSTANT_POWER, Draw, Feed
from checker.network.flow import Flow, Grid, NoOperatingPoint
from tests.networks import Case, Sketch, example_studies, tangles, wired_boats

OF_THE_LARGEST = 1e-9


def given_at(grid: Grid, flow: Flow, draws: Sequence[Draw], feeds: Sequence[Feed]) -> list[float]:
    """Return what batteries, loads and sources put into each post, A.

    A load without voltage on its posts' island, and a source that nothing takes from, are left out.
    """
    posts = len(grid.network.posts)
    into = [0.0] * posts

    def give(out: int, back: int, amps: float) -> None:
        into[out] += amps
        into[back] -= amps

    for battery, cell in grid.cells:
        give(battery.pos, battery.neg, (cell.emf_v - flow.across(battery.pos, battery.neg)) / cell.resistance_ohm)
    known = {draw.name: draw for draw in draws}
    taken = 0.0
    for name, amps in flow.load_a.items():
        if name in known:
            give(known[name].feed, known[name].back, -_asked_a(known[name], flow))
        else:  # the input of a converter, which takes what its array gives
            (tie,) = (tie for tie in grid.network.loads if f"{tie.device} input" == name)
            give(tie.feed, tie.back, -amps)
            taken += amps
    arrays = 0.0
    powered = {grid.island[grid.place[battery.pos]] for battery, _ in grid.cells}
    held = {tie.feed: tie for tie in grid.network.loads if f"{tie.device} input" in flow.load_a}
    for feed in feeds:
        island = grid.island[grid.place[feed.out]]
        if island in powered and grid.island[grid.place[feed.back]] == island:
            give(feed.out, feed.back, feed.current_a)
        elif island not in powered and any(grid.island[grid.place[post]] == island for post in held):
            give(feed.out, feed.back, feed.current_a)
            arrays += feed.current_a
    assert taken == pytest.approx(arrays)
    return into


def _asked_a(draw: Draw, flow: Flow) -> float:
    volts = flow.across(draw.feed, draw.back)
    if draw.model == CONSTANT_CURRENT:
        return draw.current_a
    if draw.model == CONSTANT_POWER and draw.current_a:
        return draw.current_a * draw.nominal_v / volts
    return draw.current_a / draw.nominal_v * volts


def residual(flow: Flow, draws: Sequence[Draw], feeds: Sequence[Feed]) -> tuple[float, str]:
    """Return the largest sum of the currents at a post, relative to the largest current, and where."""
    grid = flow.grid
    sums = given_at(grid, flow, draws, feeds)
    largest = max([1.0, *map(abs, sums), *map(abs, flow.currents_a.values())])  # where nothing flows: of 1 A
    for edge in grid.edges:
        amps = flow.currents_a.get(edge.index, 0.0)  # none: it closes a loop without resistance
        sums[edge.a] -= amps
        sums[edge.b] += amps
    worst = max(range(len(sums)), key=lambda post: abs(sums[post]))
    return abs(sums[worst]) / largest, f"{sums[worst]!r} A at {grid.network.posts[worst]}, of {largest!r} A"


def test_at_every_post_of_the_example_the_currents_add_up_to_nothing_in_every_condition() -> None:
    looked_at = 0
    for name, studies in example_studies().items():
        for solved in studies.conditions.solved:
            for flow in (solved.full, solved.low):
                assert isinstance(flow, Flow), (name, solved.operation.condition.id)
                looked_at += 1
                worst, told = residual(flow, solved.operation.draws, solved.operation.feeds)
                assert worst < OF_THE_LARGEST, (name, solved.operation.condition.id, told)
    assert looked_at > 300


def _holds(case: Case) -> None:
    for is_full in (True, False):
        flow = case.grid(is_full=is_full).solve(case.draws, case.feeds)
        if not isinstance(flow, NoOperatingPoint):
            worst, told = residual(flow, case.draws, case.feeds)
            assert worst < OF_THE_LARGEST, told


@settings(max_examples=150, deadline=None)
@given(tangles())
def test_at_every_post_of_a_tangle_the_currents_add_up_to_nothing(case: Case) -> None:
    _holds(case)


@settings(max_examples=150, deadline=None)
@given(wired_boats())
def test_at_every_post_of_a_drawn_boat_the_currents_add_up_to_nothing(case: Case) -> None:
    _holds(case)


@settings(max_examples=100, deadline=None)
@given(wired_boats())
def test_what_the_batteries_and_sources_give_is_what_loads_and_resistances_take(case: Case) -> None:
    """Tellegen's theorem: the powers of all branches add up to nothing."""
    for is_full in (True, False):
        flow = case.grid(is_full=is_full).solve(case.draws, case.feeds)
        if isinstance(flow, NoOperatingPoint):
            continue
        into = given_at(flow.grid, flow, case.draws, case.feeds)
        given_w = [flow.voltage(post) * amps for post, amps in enumerate(into)]
        lost_w = [amps**2 * flow.grid.ohm(flow.grid.network.edges[i]) for i, amps in flow.currents_a.items()]
        largest = max(1.0, *map(abs, given_w))
        assert abs(sum(given_w) - sum(lost_w)) < 1e-8 * largest


# --- what draws nothing


def open_ended(*, has_return: bool) -> Sketch:
    """Return a battery and a lead from its positive post, and one from its negative post or none."""
    sketch = Sketch()
    ground, pos, feed, back, beyond = (sketch.post() for _ in range(5))
    sketch.battery(pos, ground, 12.8, 0.005)
    sketch.join(pos, feed, 0.01)
    sketch.join(back, ground if has_return else beyond, 0.01)
    return sketch


@pytest.mark.parametrize("model", [CONSTANT_CURRENT, CONSTANT_POWER, "resistive"])
@pytest.mark.parametrize("has_return", [True, False])
def test_a_load_whose_return_is_open_draws_nothing(model: str, has_return: bool) -> None:
    sketch = open_ended(has_return=has_return)
    sketch.draw(2, 3, 5.0, 12.0, model)
    case = sketch.made()
    flow = case.grid(is_full=True).solve(case.draws, case.feeds)
    assert isinstance(flow, Flow)
    assert (flow.battery_currents()["B0"] > 4) is has_return
    assert ("L0" in flow.load_a) is has_return


@pytest.mark.parametrize("has_return", [True, False])
def test_a_source_whose_return_is_open_gives_nothing(has_return: bool) -> None:
    sketch = open_ended(has_return=has_return)
    sketch.feed(2, 3, 5.0)
    case = sketch.made()
    flow = case.grid(is_full=True).solve(case.draws, case.feeds)
    assert isinstance(flow, Flow)
    assert flow.battery_currents()["B0"] == pytest.approx(-5.0 if has_return else 0.0, abs=1e-9)


@pytest.mark.parametrize(("feed", "back"), [(0, 0), (2, 2), (0, 3), (3, 0), (3, 2)])
def test_a_load_of_constant_power_without_voltage_or_turned_round_has_no_working_point(feed: int, back: int) -> None:
    sketch = open_ended(has_return=True)
    sketch.draw(feed, back, 5.0, 12.0, CONSTANT_POWER)
    case = sketch.made()
    assert case.grid(is_full=True).solve(case.draws, case.feeds) == NoOperatingPoint("drawn", ("L0",))
