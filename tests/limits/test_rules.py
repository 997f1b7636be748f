"""Hold the look-ups of the rules at their edges, and each set to its own figures."""

from __future__ import annotations

import pytest

from checker.limits.citation import Basis
from checker.limits.limit_set import (
    AmpacityRow,
    LimitSet,
    load_limit_set,
    standard_ratings,
    standard_ratings_citations,
    thin_margin_citation,
    thin_margin_fraction,
)
from checker.units import Size, awg_size, metre_from_inch

FEDERAL = load_limit_set("cfr33-183-i")
VOLUNTARY = load_limit_set("voluntary-dc")
SETS = [FEDERAL, VOLUNTARY]
ROLES = {
    "cranking",
    "bank",
    "sense",
    "pigtail",
    "inside-housing",
    "communication",
    "navigation-electronics",
    "resistance",
    "engine-harness",
}


def metric(area_mm2: float) -> Size:
    return Size(f"{area_mm2:g} mm2", area_mm2)


def row_at(limits: LimitSet, size: Size, insulation_c: float, *, next_smaller: bool = False) -> AmpacityRow | None:
    return limits.ampacity.at(size, insulation_c, next_smaller=next_smaller)


@pytest.mark.parametrize(
    ("insulation_c", "column_c", "ampacity_a"),
    [
        (60, 60, 80),
        (74.9, 60, 80),
        (75, 75, 95),
        (104.9, 90, 100),
        (105, 105, 120),
        (110, 105, 120),
        (250, 200, 135),
    ],
)
def test_insulation_between_two_columns_takes_the_lower_one(
    insulation_c: float, column_c: float, ampacity_a: float
) -> None:
    assert row_at(FEDERAL, awg_size("6"), insulation_c) == AmpacityRow(ampacity_a, column_c, "6 AWG")


def test_insulation_below_the_first_column_has_no_figure() -> None:
    assert row_at(FEDERAL, awg_size("6"), 59.9) is None


@pytest.mark.parametrize("awg", ["20", "5", "7"])
@pytest.mark.parametrize("next_smaller", [False, True])
def test_a_gauge_that_is_not_in_the_table_has_no_figure(awg: str, *, next_smaller: bool) -> None:
    assert row_at(FEDERAL, awg_size(awg), 105, next_smaller=next_smaller) is None


@pytest.mark.parametrize("limits", SETS, ids=lambda limits: limits.id)
def test_a_metric_size_is_not_assessed_unless_the_yard_says_so(limits: LimitSet) -> None:
    assert row_at(limits, metric(16), 105) is None


@pytest.mark.parametrize(
    ("area_mm2", "awg"),
    [(0.83, "18"), (2.5, "14"), (13.30, "8"), (13.31, "6"), (16, "6"), (95, "000"), (300, "0000")],
)
def test_a_metric_size_takes_the_next_smaller_gauge_where_the_yard_says_so(area_mm2: float, awg: str) -> None:
    row = row_at(FEDERAL, metric(area_mm2), 105, next_smaller=True)
    assert row == row_at(FEDERAL, awg_size(awg), 105)


def test_a_metric_size_below_the_smallest_gauge_has_no_figure() -> None:
    assert row_at(FEDERAL, metric(0.75), 105, next_smaller=True) is None


def test_the_sets_hold_the_same_grid_each_in_a_file_of_its_own() -> None:
    assert VOLUNTARY.ampacity.rows == FEDERAL.ampacity.rows
    assert VOLUNTARY.ampacity.citation.basis is Basis.FROM_MEMORY


@pytest.mark.parametrize("limits", SETS, ids=lambda limits: limits.id)
def test_the_tables_hold_at_30_c_and_the_engine_space_is_taken_at_50_c(limits: LimitSet) -> None:
    assert (limits.ampacity.ambient_c, limits.engine_factor.ambient_c) == (30, 50)


def test_the_engine_factors_of_the_sets_are_the_same_figures() -> None:
    assert VOLUNTARY.engine_factor.rows == FEDERAL.engine_factor.rows


def test_an_engine_factor_is_asked_by_column_and_not_interpolated() -> None:
    with pytest.raises(ValueError, match="110 C"):
        FEDERAL.engine_factor.at(110)


@pytest.mark.parametrize(
    ("count", "factor"),
    [(1, 1.0), (2, 0.7), (3, 0.7), (4, 0.6), (6, 0.6), (7, 0.5), (24, 0.5), (25, 0.4), (200, 0.4)],
)
def test_the_voluntary_bundle_factor_changes_at_its_counts(count: int, factor: float) -> None:
    assert VOLUNTARY.bundle.factor(count) == factor


@pytest.mark.parametrize(("count", "extra"), [(4, 0.857), (7, 0.714), (25, 0.571)])
def test_the_bundle_totals_are_the_printed_footnotes_times_the_bundled_table(count: int, extra: float) -> None:
    # Table VI-B is 0.7 of VI-A; the footnotes print three digits, so the product is within 0.0005.
    assert VOLUNTARY.bundle.factor(count) == pytest.approx(0.7 * extra, abs=0.0005)


def test_a_bundle_of_nothing_is_refused() -> None:
    with pytest.raises(ValueError, match="bundle of 0"):
        VOLUNTARY.bundle.factor(0)


@pytest.mark.parametrize(
    ("ampacity_a", "largest_a"),
    [
        (60, 60),  # itself a standard rating: no step
        (61, 70),
        (51, 60),
        (17.5, 20),
        (0.85 * 0.7 * 25, 15),  # 14.875
        (0.7 * 50, 35),
        (0.1 + 0.2, 0.1 + 0.2),  # the next standard rating, 1 A, is above 150 per cent
        (2 / 3, 1),  # exactly 150 per cent
        (0.66, 0.66),  # 1 A would be 151.5 per cent
        (601, 601),  # nothing standard above
    ],
)
def test_the_voluntary_set_steps_to_the_next_standard_rating_up_to_150_per_cent(
    ampacity_a: float, largest_a: float
) -> None:
    assert VOLUNTARY.device_rating.largest_allowed_a(ampacity_a) == pytest.approx(largest_a, rel=1e-12)


@pytest.mark.parametrize("hair", [-1e-12, 0.0, 1e-12])
def test_rounding_in_an_ampacity_moves_no_limit(hair: float) -> None:
    assert VOLUNTARY.device_rating.largest_allowed_a(35 + hair) == pytest.approx(35, abs=1e-11)
    assert VOLUNTARY.device_rating.largest_allowed_a(2 / 3 + hair) == 1


def test_the_law_allows_150_per_cent_whether_standard_or_not() -> None:
    assert [FEDERAL.device_rating.largest_allowed_a(a) for a in (25, 60, 51)] == [37.5, 90, 76.5]


def test_one_conductor_has_another_limit_in_each_set() -> None:
    # 10 AWG, 105 C, outside the engine space: 60 A.
    assert [limits.device_rating.largest_allowed_a(60) for limits in SETS] == [90, 60]


@pytest.mark.parametrize("limits", SETS, ids=lambda limits: limits.id)
def test_both_sets_judge_the_sum_and_say_that_this_is_a_reading(limits: LimitSet) -> None:
    assert limits.device_rating.judges == "sum"
    assert limits.device_rating.citation_of("judges").basis is Basis.COMMON_PRACTICE


def test_the_standard_ratings_rise_and_merge_all_series() -> None:
    ratings = standard_ratings()
    assert list(ratings) == sorted(set(ratings))
    assert {1, 3, 6, 7.5, 10, 15, 110, 600} <= set(ratings)
    assert ratings == VOLUNTARY.device_rating.standard_ratings_a
    assert len(standard_ratings_citations()) == 6


def test_the_distances_are_those_of_each_set_in_inches() -> None:
    federal, voluntary = FEDERAL.distance, VOLUNTARY.distance
    assert (federal.open_m, federal.enclosed_m, federal.battery_enclosed_m) == (
        metre_from_inch(7),
        metre_from_inch(40),
        None,
    )
    assert voluntary.battery_enclosed_m == metre_from_inch(72)
    assert (federal.needs_reason, voluntary.needs_reason) == (True, False)


@pytest.mark.parametrize("limits", SETS, ids=lambda limits: limits.id)
def test_sizes_materials_and_devices_are_those_of_the_clauses(limits: LimitSet) -> None:
    size, material = limits.minimum_size, limits.material
    assert (size.single.awg, size.sheathed.awg, size.max_out_of_sheath_m) == ("16", "18", metre_from_inch(30))
    assert (material.materials, material.strands) == (("copper",), ("stranded",))
    assert (material.must_be_insulated, material.refuses_welding) == (True, True)
    assert (limits.breaker.must_reset_by_hand, limits.breaker.must_be_trip_free) == (True, True)
    assert limits.device_voltage.least_nominal_factor == 1.0


@pytest.mark.parametrize("limits", SETS, ids=lambda limits: limits.id)
def test_exempt_roles_are_roles_of_the_format(limits: LimitSet) -> None:
    exempt = limits.exemptions
    lists = (
        exempt.roles,
        exempt.ampacity_exempt_roles,
        exempt.material_exempt_roles,
        exempt.protection_exempt_roles,
    )
    assert set().union(*lists) <= ROLES


def test_freedom_from_the_size_rule_does_not_free_from_protection() -> None:
    assert set(FEDERAL.exemptions.protection_exempt_roles) == {"cranking", "resistance", "pigtail"}
    assert set(VOLUNTARY.exemptions.protection_exempt_roles) == {"cranking", "pigtail"}
    assert {"communication", "navigation-electronics"} <= set(FEDERAL.exemptions.roles)


@pytest.mark.parametrize("limits", SETS, ids=lambda limits: limits.id)
def test_electronics_below_1_a_and_pigtails_below_7_inches_are_exempt(limits: LimitSet) -> None:
    assert limits.exemptions.electronic_below_a == 1
    assert limits.exemptions.pigtail_below_m == metre_from_inch(7)


def test_the_drop_groups_leave_the_bilge_pump_to_the_yard() -> None:
    drop = VOLUNTARY.drop
    assert drop is not None
    assert (drop.critical_fraction, drop.general_fraction, drop.k_ohm_cmil_per_ft) == (0.03, 0.1, 10.75)
    assert drop.critical_services == ("feeder", "navigation-light", "anchor-light", "blower", "electronics", "radio")


def test_the_insulation_the_ignition_and_the_alternator_rules_are_those_of_their_sets() -> None:
    insulation, ignition = VOLUNTARY.insulation, FEDERAL.ignition
    assert insulation is not None
    assert ignition is not None
    assert (insulation.engine_space_min_c, insulation.elsewhere_min_c) == (75, 60)
    assert ignition.hazards == ("petrol_vapour",)
    assert ignition.open_space_m == pytest.approx(0.6096)
    assert [limits.self_limiting_source.is_exempt for limits in SETS] == [True, True]
    assert [limits.self_limiting_source.largest_output_factor for limits in SETS] == [1.2, None]


def test_a_pass_is_thin_within_ten_per_cent_by_common_practice() -> None:
    assert thin_margin_fraction() == 0.1
    assert thin_margin_citation().basis is Basis.COMMON_PRACTICE
