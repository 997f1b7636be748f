"""A regulated source gives all it can, holds its voltage, or rests: by hand and against every choice of modes."""

from __future__ import annotations

import itertools

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker.network.conditions import CONSTANT_CURRENT, CONSTANT_POWER, Draw, Feed
from checker.network.flow import Flow, NoOperatingPoint
from tests.networks import Case, Sketch

SAG = 2e-5
"""A holding source sags by a hundred-thousandth at full current."""


def charging(most_a: float, holds_v: float, *draws: tuple[float, str]) -> Flow:
    """Solve a battery of 12.8 V behind 10 mohm, with a charger behind 5 mohm and loads at the battery."""
    sketch = Sketch()
    ground, bank, out = sketch.post(), sketch.post(), sketch.post()
    sketch.battery(bank, ground, 12.8, 0.010)
    sketch.join(out, bank, 0.005)
    for amps, model in draws:
        sketch.draw(bank, ground, amps, 12.0, model)
    case = sketch.made(ground)
    flow = case.grid(is_full=True).solve(case.draws, [Feed("CHG", out, ground, most_a, holds_v)])
    assert isinstance(flow, Flow)
    return flow


@pytest.mark.parametrize(
    ("most_a", "holds_v", "out_v", "into_a"),
    [
        (40.0, 14.2, 12.8 + 40 * 0.015, 40.0),  # the battery takes all it can give
        (120.0, 14.2, 14.2, 1.4 / 0.015),  # it holds its voltage
        (40.0, 12.5, 12.8, 0.0),  # the battery stands higher: it rests
    ],
)
def test_charger_gives_all_holds_or_rests(most_a: float, holds_v: float, out_v: float, into_a: float) -> None:
    flow = charging(most_a, holds_v)
    assert flow.voltage(2) == pytest.approx(out_v, rel=SAG)
    assert -flow.battery_currents()["B0"] == pytest.approx(into_a, rel=1e-3)


@pytest.mark.parametrize("model", [CONSTANT_CURRENT, CONSTANT_POWER])
def test_holding_charger_feeds_a_load_beside_the_battery(model: str) -> None:
    """14.2 V behind 5 mohm against 12.8 V behind 10 mohm with 20 A, or 240 W, between them."""
    flow = charging(150.0, 14.2, (20.0, model))
    load_a = flow.load_a["L0"]
    bank_v = flow.voltage(1)
    assert load_a == pytest.approx(20.0 if model == CONSTANT_CURRENT else 240 / bank_v)
    assert (14.2 - bank_v) / 0.005 == pytest.approx(load_a + (bank_v - 12.8) / 0.010, rel=1e-3)


@st.composite
def chargers(draw: st.DrawFn) -> tuple[Case, list[Feed]]:
    """Draw a chain of posts with two batteries and one to three regulated sources."""
    sketch = Sketch()
    ground = sketch.post()
    posts = [sketch.post() for _ in range(draw(st.integers(2, 5)))]
    for a, b in itertools.pairwise(posts):
        sketch.join(a, b, draw(st.floats(0.001, 0.05)))
    for post in (posts[0], posts[-1]):
        sketch.battery(post, ground, draw(st.floats(11.5, 13.5)), draw(st.floats(0.002, 0.05)))
    at = draw(st.lists(st.sampled_from(posts), min_size=1, max_size=3, unique=True))
    feeds = [
        Feed(f"G{i}", post, ground, draw(st.floats(1, 100)), draw(st.floats(11.0, 15.0))) for i, post in enumerate(at)
    ]
    return sketch.made(ground), feeds


@given(chargers())
def test_every_regulated_source_agrees_with_the_answer(drawn: tuple[Case, list[Feed]]) -> None:
    """Between nothing and its most; below its voltage it gives all, above it nothing."""
    case, feeds = drawn
    grid = case.grid(is_full=True)
    flow = grid.solve((), feeds)
    assert isinstance(flow, Flow)
    given_a = flow.given_a
    batteries = {tie.pos: flow.battery_currents()[tie.device] for tie, _ in grid.cells}
    for feed in feeds:
        own_a = given_a[feed.out] - sum(amps for post, amps in batteries.items() if post == feed.out)
        assert feed.holds_v is not None
        over = flow.across(feed.out, feed.back) / feed.holds_v - 1
        assert -1e-6 <= own_a <= feed.current_a * (1 + 1e-6)
        if over < -SAG:
            assert own_a == pytest.approx(feed.current_a)
        if over > SAG:
            assert own_a == pytest.approx(0, abs=1e-6)


def test_load_that_even_the_charger_cannot_feed_has_no_working_point() -> None:
    sketch = Sketch()
    ground, bank = sketch.post(), sketch.post()
    sketch.battery(bank, ground, 12.8, 0.5)
    case = sketch.made(ground)
    draws = [Draw("L", bank, ground, 500.0, 12.0, CONSTANT_POWER)]
    assert isinstance(case.grid(is_full=True).solve(draws, [Feed("G", bank, ground, 5.0, 14.0)]), NoOperatingPoint)
