"""Hold the ratio rule of selectivity against the published pairs of gG fuse links (IEC 60269-2, second hand)."""

from __future__ import annotations

import pytest

from checker.checks.coordination import selectivity
from checker.limits.limit_set import least_selectivity_ratio

SEL_01 = [
    (160.0, 100.0, 1.6, True),
    # Counts as selective by the series convention of the fuse makers, since both are neighbours but one in the row of
    # ratings. The tool takes 1.6 as it is written: 1.587 is found. That is the stricter reading.
    (100.0, 63.0, 1.587, True),
    (80.0, 63.0, 1.27, False),
]


@pytest.mark.parametrize(("upper_a", "lower_a", "ratio", "selective"), SEL_01)
def test_the_ratio_of_each_pair_is_the_printed_one(
    upper_a: float, lower_a: float, ratio: float, selective: bool
) -> None:
    assert upper_a / lower_a == pytest.approx(ratio, abs=0.001)
    by_rule = upper_a / lower_a >= least_selectivity_ratio() * (1 - 1e-9)
    assert by_rule is (selective and ratio >= 1.6)


def test_the_least_ratio_is_the_printed_one_and_the_report_says_what_it_rests_on() -> None:
    assert least_selectivity_ratio() == 1.6
    assert "In,upper ≥ 1.6·In,lower" in selectivity.card.formula
    assert "IEC 60269-2, gG" in selectivity.card.citation
