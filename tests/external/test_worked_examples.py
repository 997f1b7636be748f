"""Hold formulas and tables against worked examples from outside; each names its source in the data file.

Which published examples are not applied, and why, stands at the head of the data file.
"""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
import yaml

from checker.limits.formulas import copper_resistance_ohm, drop_v, smallest_area_cmil
from checker.limits.limit_set import load_limit_set, standard_ratings
from checker.units import (
    CIRCULAR_MIL_MM2,
    METRE_PER_FOOT,
    awg_area_mm2,
    awg_size,
    foot_from_metre,
    metre_from_inch,
)

EXAMPLES: dict[str, Any] = yaml.safe_load(
    (Path(__file__).parent / "data" / "worked_examples.yaml").read_text(encoding="utf-8")
)
AREAS: dict[str, Any] = EXAMPLES["smallest_area"]
SAE_AREAS: dict[str, float] = EXAMPLES["sae_smallest_area_cmil"]
DROPS: dict[str, Any] = EXAMPLES["drop_of_printed_resistance"]
FEDERAL = load_limit_set("cfr33-183-i")
VOLUNTARY = load_limit_set("voluntary-dc")


def smallest_area_of(example: dict[str, Any]) -> float:
    given = example["given"]
    return smallest_area_cmil(
        given["current_a"],
        given["loop_length_ft"] * METRE_PER_FOOT,
        given["nominal_v"] * given["drop_percent"] / 100,
        given["k"],
    )


def federal_ampacity_a(awg: str, insulation_c: float) -> float:
    row = FEDERAL.ampacity.at(awg_size(awg), insulation_c, next_smaller=False)
    assert row is not None
    return row.ampacity_a


@pytest.mark.parametrize("example", AREAS.values(), ids=AREAS)
def test_the_smallest_area_is_the_printed_one(example: dict[str, Any]) -> None:
    expected_cmil = example["expected"]["area_cmil"]
    assert smallest_area_of(example) == pytest.approx(expected_cmil, abs=example["tolerance_cmil"])


@pytest.mark.parametrize("example", AREAS.values(), ids=AREAS)
def test_the_gauge_is_the_printed_one(example: dict[str, Any]) -> None:
    needed_cmil = smallest_area_of(example)
    gauges = FEDERAL.ampacity.sizes
    smallest = next(awg for awg in gauges if awg_size(awg).area_cmil >= needed_cmil)
    assert smallest == example["expected"]["gauge"]


@pytest.mark.parametrize("name", ["VD-01", "VD-02"])
def test_the_thinner_sae_series_needs_one_step_more(name: str) -> None:
    needed_cmil = smallest_area_of(AREAS[name])
    smallest = next(gauge for gauge, area_cmil in SAE_AREAS.items() if area_cmil >= needed_cmil)
    assert smallest == AREAS[name]["expected"]["gauge_sae"]


@pytest.mark.parametrize("example", DROPS.values(), ids=DROPS)
def test_the_drop_over_a_printed_resistance_is_the_printed_one(example: dict[str, Any]) -> None:
    given, expected = example["given"], example["expected"]
    # K is the resistance of one foot of one circular mil, so an area of 1 takes the printed ohm per foot.
    drop = drop_v(given["current_a"], given["length_ft"] * METRE_PER_FOOT, 1.0, given["ohm_per_ft"])
    assert drop == pytest.approx(expected["drop_v"], abs=example["tolerance_v"])
    assert drop <= expected["allowed_v"] + example["tolerance_v"]


def test_the_misprint_of_table_11_8_is_not_reproduced() -> None:
    expected = DROPS["VD-F8-ERRATUM"]["expected"]
    assert abs(expected["drop_v"] - expected["misprint_v"]) > 0.1


def test_the_metric_formula_and_copper_at_20_c_give_the_printed_drops() -> None:
    example = EXAMPLES["VD-05"]
    given, expected = example["given"], example["expected"]
    k = given["constant_ohm_mm2_per_m"] * METRE_PER_FOOT / CIRCULAR_MIL_MM2
    area_cmil = given["area_mm2"] / CIRCULAR_MIL_MM2
    drop = drop_v(given["current_a"], given["loop_length_m"], area_cmil, k)
    assert drop == pytest.approx(expected["drop_v"], abs=example["tolerance_v"])
    copper_drop_v = given["current_a"] * copper_resistance_ohm(given["loop_length_m"], given["area_mm2"], 20.0)
    assert copper_drop_v == pytest.approx(expected["copper_20c_drop_v"], abs=0.0005)


def test_the_longest_wire_for_half_a_volt_drops_half_a_volt() -> None:
    example = EXAMPLES["VD-06"]
    given = example["given"]
    per_foot_v = drop_v(given["current_a"], METRE_PER_FOOT, 1.0, given["ohm_per_ft"])
    longest_ft = given["drop_v"] / per_foot_v
    assert longest_ft == pytest.approx(example["expected"]["length_ft"], abs=example["tolerance_ft"])


def test_a_hot_conductor_may_be_as_long_as_printed() -> None:
    example = EXAMPLES["VD-07"]
    cold_ohm = copper_resistance_ohm(example["given"]["length_ft_20c"] * METRE_PER_FOOT, 1.0, 20.0)
    hot_ohm_per_m = copper_resistance_ohm(1.0, 1.0, example["given"]["temperature_c"])
    length_ft = foot_from_metre(cold_ohm / hot_ohm_per_m)
    assert length_ft == pytest.approx(example["expected"]["length_ft"], abs=example["tolerance_ft"])


@pytest.mark.parametrize("awg", EXAMPLES["AMP-01"]["expected_a"])
def test_the_engine_space_takes_15_per_cent_of_105_c_conductors(awg: str) -> None:
    example = EXAMPLES["AMP-01"]
    ampacity_a = federal_ampacity_a(awg, 105) * FEDERAL.engine_factor.at(105)
    assert ampacity_a == pytest.approx(example["expected_a"][awg], rel=1e-9)
    assert ampacity_a == pytest.approx(example["printed_a"][awg], abs=example["tolerance_a"])


def test_bundles_of_50_volts_and_more_bear_what_the_chart_prints() -> None:
    example = EXAMPLES["AMP-02"]
    bundled_a = [federal_ampacity_a("18", 105) * FEDERAL.bundle.factor_from_50_v(count) for count in example["counts"]]
    in_engine_space_a = [a * FEDERAL.engine_factor.at(105) for a in bundled_a]
    assert bundled_a == pytest.approx(example["expected_a"], abs=example["tolerance_a"])
    assert in_engine_space_a == pytest.approx(example["expected_engine_space_a"], abs=example["tolerance_a"])


def test_8_awg_bears_the_same_at_80_and_at_90_c() -> None:
    expected_a = EXAMPLES["AMP-03"]["expected_a"]
    assert {insulation_c: federal_ampacity_a("8", insulation_c) for insulation_c in expected_a} == expected_a


def test_the_highest_device_for_16_awg_is_35_a_by_law_and_25_a_by_the_voluntary_set() -> None:
    expected = EXAMPLES["OCP-01"]["expected"]
    limit_a = FEDERAL.device_rating.largest_allowed_a(federal_ampacity_a("16", 105))
    assert limit_a == expected["limit_a"]
    assert max(a for a in standard_ratings() if a <= limit_a) == expected["highest_standard_a"]
    row = VOLUNTARY.ampacity.at(awg_size("16"), 105, next_smaller=False)
    assert row is not None
    assert VOLUNTARY.device_rating.largest_allowed_a(row.ampacity_a) == expected["voluntary_a"]


def test_a_conductor_of_115_a_takes_the_next_standard_device() -> None:
    example = EXAMPLES["OCP-02"]
    allowed_a = VOLUNTARY.device_rating.largest_allowed_a(example["given"]["ampacity_a"])
    assert allowed_a == example["expected"]["next_standard_a"]


def test_a_next_standard_device_of_exactly_150_per_cent_is_allowed() -> None:
    example = EXAMPLES["OCP-03"]
    short_list = replace(VOLUNTARY.device_rating, standard_ratings_a=tuple(map(float, example["given"]["ratings_a"])))
    allowed_a = short_list.largest_allowed_a(example["given"]["ampacity_a"])
    assert allowed_a == example["expected"]["largest_a"]


def test_the_lengths_ahead_of_the_first_device_are_7_and_40_inches() -> None:
    example, distance = EXAMPLES["OCP-04"], FEDERAL.distance
    for limit_m, lengths in (
        (distance.open_m, example["open_in"]),
        (distance.enclosed_m, example["enclosed_in"]),
    ):
        assert metre_from_inch(lengths["within"]) <= limit_m < metre_from_inch(lengths["beyond"])


@pytest.mark.parametrize("awg", EXAMPLES["CON-01"]["expected"])
def test_the_gauge_formula_gives_the_printed_areas(awg: str) -> None:
    expected, rel = EXAMPLES["CON-01"]["expected"][awg], EXAMPLES["CON-01"]["tolerance_fraction"]
    assert awg_size(awg).area_cmil == pytest.approx(expected["area_cmil"], rel=rel)
    assert awg_area_mm2(awg) == pytest.approx(expected["area_mm2"], rel=rel)


def test_a_resistance_printed_for_75_c_is_taken_to_20_c() -> None:
    example = EXAMPLES["CON-02"]
    ratio = copper_resistance_ohm(1.0, 1.0, 20.0) / copper_resistance_ohm(1.0, 1.0, 75.0)
    cold_ohm = example["given"]["ohm_per_kft_75c"] * ratio
    assert cold_ohm == pytest.approx(example["expected"]["ohm_per_kft_20c"], abs=example["tolerance_ohm"])
