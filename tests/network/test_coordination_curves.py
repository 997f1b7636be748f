"""Read time-current bands at their edges, and hold the crossing of two bands against a dense scan."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.boat.parts import Overcurrent
from checker.network.coordination import Curve, curve_of, selective_up_to_a, withstand_ratio
from checker.network.faults import opening_s
from tests.builders import DRY, a_boat, a_fuse

POINTS = ((1.5, math.inf), (2.0, 100.0), (20.0, 1.0), (200.0, 0.01))


# --- one edge of a band


@pytest.mark.parametrize("multiple", [0.0, 1.0, 1.499])
def test_below_its_first_point_a_device_holds(multiple: float) -> None:
    assert opening_s(POINTS, multiple) == math.inf


@pytest.mark.parametrize("multiple", [1.5, 1.75, 1.999])
def test_a_point_that_never_opens_holds_up_to_the_next_one(multiple: float) -> None:
    assert opening_s(POINTS, multiple) == math.inf


@pytest.mark.parametrize(("multiple", "seconds"), [(2.0, 100.0), (20.0, 1.0), (200.0, 0.01)])
def test_at_a_point_its_time_is_the_written_one(multiple: float, seconds: float) -> None:
    assert opening_s(POINTS, multiple) == pytest.approx(seconds)


def test_between_two_points_the_curve_is_straight_on_logarithmic_axes() -> None:
    # Half way between 2 and 20, and between 100 s and 1 s, on log axes: 2·√10 and 10 s.
    assert opening_s(POINTS, 2 * math.sqrt(10)) == pytest.approx(10.0)
    assert opening_s(POINTS, 20 * math.sqrt(10)) == pytest.approx(0.1)


@pytest.mark.parametrize("multiple", [200.1, 1e4, 1e9])
def test_above_its_last_point_the_last_time_stays(multiple: float) -> None:
    assert opening_s(POINTS, multiple) == 0.01


def test_a_device_without_a_band_never_opens() -> None:
    assert opening_s((), 1e9) == math.inf


def test_a_multiple_that_misses_a_point_by_rounding_alone_is_at_it() -> None:
    # 0.1 + 0.2 style: 3 · 0.66666… of a rating is twice it.
    assert opening_s(POINTS, 2.0 * (1 - 1e-15)) == pytest.approx(100.0)
    assert opening_s(((2.0, 5.0), (4.0, 1.0)), 2.0 * (1 - 1e-15)) == pytest.approx(5.0)


@given(st.floats(1.6, 1000.0), st.floats(1.0, 2.0))
def test_more_current_never_opens_later(multiple: float, more: float) -> None:
    assert opening_s(POINTS, multiple * more) <= opening_s(POINTS, multiple) * (1 + 1e-9)


def test_in_an_engine_space_the_rating_is_taken_with_the_band_s_factor() -> None:
    fuse = a_fuse("F", 100.0)
    assert isinstance(fuse.part, Overcurrent) and fuse.part.band is not None
    derated = replace(fuse, part=replace(fuse.part, band=replace(fuse.part.band, engine_space_factor=0.9)))
    cool, hot = a_boat(derated), a_boat(derated, replace(DRY, is_engine_space=True))
    assert curve_of(cool, derated).rating_a == 100.0
    assert curve_of(hot, derated).rating_a == pytest.approx(90.0)


# --- two bands


@st.composite
def bands(draw: st.DrawFn) -> Curve:
    """Draw a band of four to six points, each half slower early than late, at some rating."""
    rating_a = draw(st.sampled_from([5.0, 10.0, 16.0, 30.0, 63.0, 100.0]))
    early: list[tuple[float, float]] = []
    late: list[tuple[float, float]] = []
    multiple, seconds = draw(st.floats(1.1, 1.5)), draw(st.floats(10.0, 1000.0))
    for number in range(draw(st.integers(4, 6))):
        wide = draw(st.floats(1.0, 5.0))
        early.append((multiple, seconds))
        late.append((multiple, math.inf if number == 0 else seconds * wide))
        multiple *= draw(st.floats(1.2, 4.0))
        seconds /= draw(st.floats(1.5, 30.0))
    return Curve(rating_a, tuple(early), tuple(late))


STEPS = 4000


def scanned_up_to_a(upper: Curve, lower: Curve, start_a: float, prospective_a: float) -> tuple[float, float]:
    """Return the last good and the first bad current of a dense scan; both the prospective one where none is bad."""
    ratio = (prospective_a / start_a) ** (1 / STEPS)
    good_a = start_a
    for step in range(STEPS + 1):
        current_a = start_a * ratio**step
        if upper.earliest_s(current_a) < lower.latest_s(current_a) * (1 - 1e-9):
            return good_a, current_a
        good_a = current_a
    return prospective_a, prospective_a


@settings(max_examples=150, deadline=None)
@given(bands(), bands(), st.floats(1.5, 300.0))
def test_the_current_up_to_which_two_bands_are_selective_is_that_of_a_dense_scan(
    upper: Curve, lower: Curve, multiple: float
) -> None:
    prospective_a = multiple * lower.rating_a
    start_a = min(upper.corners_a()[0], lower.corners_a()[0])
    found_a = selective_up_to_a(upper, lower, prospective_a)
    if prospective_a <= start_a:
        assert found_a == prospective_a
        return
    good_a, bad_a = scanned_up_to_a(upper, lower, start_a, prospective_a)
    step = (prospective_a / start_a) ** (1 / STEPS)
    assert good_a / step * (1 - 1e-9) <= found_a <= bad_a * step * (1 + 1e-9)


def test_two_bands_that_cross_once_are_selective_up_to_the_crossing() -> None:
    # Lower: 10 A, late edge 1 s at 100 A, falling with I². Upper: 20 A, early edge 10 s at 100 A, falling with I⁴.
    # 1·(100/I)² = 10·(100/I)⁴ at I = 100·√10 = 316.2 A.
    lower = Curve(10.0, ((2.0, 1.0), (1000.0, 1e-6)), ((2.0, 25.0), (1000.0, 1e-4)))
    upper = Curve(20.0, ((1.5, 10.0 * (100 / 30) ** 4), (500.0, 1e-7)), ((1.5, math.inf), (500.0, 1.0)))
    expected = 100 * math.sqrt(10)
    assert upper.earliest_s(500.0 * 20) == pytest.approx(10.0 * (100 / 1e4) ** 4)
    assert lower.latest_s(expected) == pytest.approx(0.1)
    assert upper.earliest_s(expected) == pytest.approx(0.1)
    assert selective_up_to_a(upper, lower, 5000.0) == pytest.approx(expected)
    assert selective_up_to_a(upper, lower, 300.0) == 300.0


def test_a_device_is_not_selective_with_itself() -> None:
    curve = Curve(10.0, ((1.5, 10.0), (10.0, 0.1)), ((1.5, math.inf), (10.0, 0.2)))
    assert selective_up_to_a(curve, curve, 1000.0) <= 15.0


# --- let-through


def test_the_largest_let_through_is_looked_for_at_the_bends_between_both_ends() -> None:
    # I²t of the late edge: 10 A: 500, 100 A: 2000 (the bend), 1000 A: 1000 A²s.
    curve = Curve(1.0, (), ((10.0, 5.0), (100.0, 0.2), (1000.0, 0.001)))
    bent = Curve(1.0, curve.late, curve.late)
    assert withstand_ratio(bent, 1000.0, 10.0, 1000.0, 5.0) == (pytest.approx(2.0), 100.0)
    assert withstand_ratio(bent, 1000.0, 200.0, 1000.0, 5.0)[1] == 200.0
    assert withstand_ratio(bent, 1000.0, 10.0, 50.0, 5.0)[1] == 50.0


def test_openings_slower_than_the_adiabatic_time_are_overloads_and_not_looked_at() -> None:
    late = ((10.0, 500.0), (100.0, 50.0), (200.0, 6.0))
    assert withstand_ratio(Curve(1.0, late, late), 1000.0, 10.0, 200.0, 5.0) == (0.0, 200.0)


def test_let_through_counts_from_the_current_at_which_the_device_opens_within_the_adiabatic_time() -> None:
    # From 100 A and 50 s to 1000 A and 0.5 s the time falls with I²; 5 s are reached at 100·√10 A, I²t = 500 kA²s
    # all along. Steeper, with 100 A and 500 s, it falls with I³: 5 s at 100·∛100 = 464.2 A.
    flat = ((100.0, 50.0), (1000.0, 0.5))
    ratio, _ = withstand_ratio(Curve(1.0, flat, flat), 1e6, 100.0, 1000.0, 5.0)
    assert ratio == pytest.approx(0.5)
    steep = ((100.0, 500.0), (1000.0, 0.5))
    ratio, at_a = withstand_ratio(Curve(1.0, steep, steep), 1e6, 100.0, 1000.0, 5.0)
    assert at_a == pytest.approx(100 * 100 ** (1 / 3))
    assert ratio == pytest.approx(at_a**2 * 5 / 1e6)


def test_stretch_that_never_opens_before_its_end_counts_from_its_end() -> None:
    late = ((10.0, math.inf), (100.0, 2.0), (1000.0, 0.001))
    ratio, at_a = withstand_ratio(Curve(1.0, late, late), 1000.0, 20.0, 1000.0, 5.0)
    assert (ratio, at_a) == (pytest.approx(20.0), pytest.approx(100.0))
