"""Hold the formulas against each other, against the physics and at their edges."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker.limits.formulas import (
    ambient_factor,
    copper,
    copper_resistance_ohm,
    copper_temperature_c,
    drop_v,
    smallest_area_cmil,
)
from checker.units import METRE_PER_FOOT

K = 10.75
POSITIVE = st.floats(min_value=1e-3, max_value=1e6)


@given(POSITIVE, POSITIVE, POSITIVE)
def test_the_smallest_area_drops_exactly_what_is_allowed(
    current_a: float, loop_length_m: float, allowed_v: float
) -> None:
    area_cmil = smallest_area_cmil(current_a, loop_length_m, allowed_v, K)
    assert drop_v(current_a, loop_length_m, area_cmil, K) == pytest.approx(allowed_v, rel=1e-12)


@given(POSITIVE, POSITIVE, POSITIVE, st.floats(min_value=1.0, max_value=10.0))
def test_thicker_copper_never_drops_more(
    current_a: float, loop_length_m: float, area_cmil: float, times: float
) -> None:
    thin_v = drop_v(current_a, loop_length_m, area_cmil, K)
    assert drop_v(current_a, loop_length_m, area_cmil * times, K) <= thin_v


def test_a_current_of_nothing_drops_nothing() -> None:
    assert drop_v(0.0, 10.0, 1000.0, K) == 0.0


@pytest.mark.parametrize("bad", [0.0, -1.0, float("nan")])
def test_an_area_or_drop_that_is_not_above_zero_is_refused(bad: float) -> None:
    with pytest.raises(ValueError, match="circular mils"):
        drop_v(1.0, 1.0, bad, K)
    with pytest.raises(ValueError, match="allowed drop"):
        smallest_area_cmil(1.0, 1.0, bad, K)
    with pytest.raises(ValueError, match="mm²"):
        copper_resistance_ohm(1.0, bad, 20.0)


def test_one_foot_of_one_circular_mil_has_the_resistance_k() -> None:
    assert drop_v(1.0, METRE_PER_FOOT, 1.0, K) == pytest.approx(K, rel=1e-15)


def test_58_metres_of_one_square_millimetre_are_one_ohm_at_20_c() -> None:
    # The copper standard is 1/58 ohm mm2/m; its five printed digits leave 2 in 100 000.
    assert copper_resistance_ohm(58.0, 1.0, 20.0) == pytest.approx(1.0, abs=2e-5)


def test_copper_gains_0_393_per_cent_a_kelvin_from_20_c() -> None:
    # IEC 60287-1-1, table 1: 0.00393 per kelvin; 1/254.5 = 0.003929.
    gain = copper_resistance_ohm(1.0, 1.0, 21.0) / copper_resistance_ohm(1.0, 1.0, 20.0) - 1
    assert gain == pytest.approx(0.00393, abs=0.000005)


@pytest.mark.parametrize(("k", "temperature_c"), [(10.37, 20), (10.75, 29), (11.59, 50), (12.61, 75)])
def test_k_tells_the_temperature_it_assumes(k: float, temperature_c: float) -> None:
    # K is printed to 0.01, which is 0.13 K; 10.75 is said to be copper at about 29 C.
    assert copper_temperature_c(k) == pytest.approx(temperature_c, abs=0.31)


@pytest.mark.parametrize(
    ("insulation_c", "factor"),
    [(60, 0.577), (75, 0.745), (80, 0.775), (90, 0.816), (105, 0.856), (125, 0.889), (200, 0.939)],
)
def test_the_heat_balance_at_50_c_gives_the_engine_space_factors(insulation_c: float, factor: float) -> None:
    assert ambient_factor(insulation_c, 50.0) == pytest.approx(factor, abs=0.0006)


def test_a_cooler_place_earns_nothing_and_one_as_hot_as_the_insulation_leaves_nothing() -> None:
    assert [ambient_factor(105.0, ambient_c) for ambient_c in (10.0, 30.0, 105.0, 120.0)] == [1, 1, 0, 0]


def test_insulation_for_no_more_than_the_reference_ambient_is_refused() -> None:
    with pytest.raises(ValueError, match="30"):
        ambient_factor(30.0, 20.0)


def test_the_constants_of_copper_are_cited_one_by_one() -> None:
    constants = copper()
    assert constants.citation.document == "International Annealed Copper Standard"
    assert [name for name, _ in constants.figures] == ["zero_resistance_c", "reference_ambient_c"]
