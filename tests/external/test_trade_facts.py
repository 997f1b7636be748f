"""Hold the tables against what the trade knows by heart (common practice, no source)."""

from __future__ import annotations

import pytest

from checker.limits.formulas import drop_v, smallest_area_cmil
from checker.limits.limit_set import DropRule, load_limit_set
from checker.units import METRE_PER_FOOT, awg_size

VOLUNTARY = load_limit_set("voluntary-dc")
NOMINAL_V = 12.0
CURRENT_A = 15.0


def drop_rule() -> DropRule:
    assert VOLUNTARY.drop is not None
    return VOLUNTARY.drop


def smallest_gauge_for_3_percent(loop_length_ft: float) -> str:
    rule = drop_rule()
    needed_cmil = smallest_area_cmil(
        CURRENT_A,
        loop_length_ft * METRE_PER_FOOT,
        NOMINAL_V * rule.critical_fraction,
        rule.k_ohm_cmil_per_ft,
    )
    return next(awg for awg in VOLUNTARY.ampacity.sizes if awg_size(awg).area_cmil >= needed_cmil)


def drop_fraction(awg: str, loop_length_ft: float) -> float:
    k = drop_rule().k_ohm_cmil_per_ft
    drop = drop_v(CURRENT_A, loop_length_ft * METRE_PER_FOOT, awg_size(awg).area_cmil, k)
    return drop / NOMINAL_V


def test_a_pair_of_16_awg_with_105_c_insulation_bears_17_5_a_outside_the_engine_space() -> None:
    row = VOLUNTARY.ampacity.at(awg_size("16"), 105, next_smaller=False)
    assert row is not None
    assert row.ampacity_a * VOLUNTARY.bundle.factor(2) == pytest.approx(17.5, rel=1e-12)


def test_15_a_over_40_ft_out_and_back_ask_for_6_awg_at_3_per_cent_of_12_v() -> None:
    # 10.75 x 15 A x 40 ft / 0.36 V = 17917 circular mils; 8 AWG has 16510, 6 AWG 26251.
    assert smallest_gauge_for_3_percent(loop_length_ft=40) == "6"


def test_the_drop_the_other_way_round_agrees() -> None:
    # 8 AWG: 10.75 x 15 x 40 / 16510 = 0.3907 V, 3.26 per cent; 6 AWG: 0.2457 V, 2.05 per cent.
    assert drop_fraction("8", loop_length_ft=40) == pytest.approx(0.0326, abs=0.00005)
    assert drop_fraction("6", loop_length_ft=40) == pytest.approx(0.0205, abs=0.00005)


def test_taking_the_one_way_length_for_the_loop_would_ask_for_10_awg_only() -> None:
    # Half the length needs 8958 circular mils, and 10 AWG has 10383: the usual slip, two gauges too thin.
    assert smallest_gauge_for_3_percent(loop_length_ft=20) == "10"
    assert drop_fraction("10", loop_length_ft=40) > drop_rule().critical_fraction
