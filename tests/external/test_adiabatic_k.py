"""Hold the adiabatic equation against the k values that IEC 60364-4-43, IEC 60364-5-54 and BS 7671 print.

The standards print k of copper by the initial and the final temperature of the insulation, as whole numbers; the
tolerance is 1. They were seen in copies (second hand). The formula is that of IEC 60364-5-54, Annex A.
"""

from __future__ import annotations

import math

import pytest

from checker.limits.formulas import adiabatic, adiabatic_k
from checker.network.coordination import Curve, withstand_ratio

# Initial and final temperature, C, and k, A·√s/mm², copper.
PRINTED = [
    (70, 160, 115),  # PVC up to 300 mm²: IEC 60364-4-43, table 43A; BS 7671, table 43.1
    (90, 160, 100),  # PVC for 90 C
    (90, 250, 143),  # XLPE, EPR
    (60, 200, 141),  # rubber for 60 C
    (85, 220, 134),  # rubber for 85 C
    (180, 350, 132),  # silicone rubber
]


@pytest.mark.parametrize(("initial_c", "final_c", "printed"), PRINTED)
def test_k_of_copper_is_the_printed_one(initial_c: float, final_c: float, printed: float) -> None:
    """AD-01. By hand for 70 to 160 C: √(0.00345·254.5/17.241e-6 · ln(394.5/304.5)) = √(50926 · 0.2589) = 114.8."""
    assert adiabatic_k(initial_c, final_c) == pytest.approx(printed, abs=1)


def test_the_longest_time_of_a_conductor_is_the_printed_one() -> None:
    """AD-02: 2.5 mm² of PVC copper, k = 115, at 1000 A: t = k²S²/I² = 0.0827 s."""
    k2s2 = (115 * 2.5) ** 2
    longest_s = 0.0827
    for seconds, holds in ((longest_s - 0.0001, True), (longest_s + 0.0001, False)):
        flat = ((10.0, seconds), (1000.0, seconds))
        ratio, at_a = withstand_ratio(Curve(1.0, flat, flat), k2s2, 1000.0, 1000.0, 5.0)
        assert at_a == 1000.0
        assert (ratio <= 1) is holds


def test_the_final_temperature_and_the_range_are_those_of_the_standard() -> None:
    # Table 43A: PVC 160 C; 434.5.2: the equation holds up to 5 s.
    assert (adiabatic().final_c, adiabatic().valid_up_to_s) == (160, 5)


def test_the_warmer_a_conductor_starts_the_less_it_withstands() -> None:
    values = [adiabatic_k(initial_c, 160) for initial_c in (30, 60, 75, 90, 105, 125)]
    assert values == sorted(values, reverse=True)
    # A boat cable for 105 C that works at its limit: √(50926 · ln(394.5/339.5)) = 87.4.
    assert adiabatic_k(105, 160) == pytest.approx(math.sqrt(50926 * math.log(394.5 / 339.5)), abs=0.1)
