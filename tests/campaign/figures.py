"""State the published figures that planters pick their faults by, apart from the tables that the checks read.

33 CFR § 183.425, Table 5, for insulation of 105 C, and note 1 for engine spaces; areas by the
definition of the gauges (ASTM B258). Both are held against their documents under
tests/external/.
"""

from __future__ import annotations

import math

AMPACITY_A = {
    "18 AWG": 20, "16 AWG": 25, "14 AWG": 35, "12 AWG": 45, "10 AWG": 60, "8 AWG": 80, "6 AWG": 120, "4 AWG": 160,
    "2 AWG": 210, "1 AWG": 245, "1/0 AWG": 285, "2/0 AWG": 330, "3/0 AWG": 385, "4/0 AWG": 445,
}  # fmt: skip
"""Ampere that a gauge bears at 30 C, thinnest gauge first."""

ENGINE_FACTOR = 0.85
DEVICE_FACTOR = 1.5
"""33 CFR § 183.455(c)(1): the largest device, as a multiple of the ampacity, below 50 V."""

OPEN_IN, ENCLOSED_IN = 7, 40
"""33 CFR § 183.455(b): inch of conductor ahead of the first device, open and enclosed all the way."""

DROP_K = 10.75
"""Ohm circular mil per foot, in E = K·I·L/CM."""

_FEET_PER_M = 1 / 0.3048


def gauge_number(gauge: str) -> int:
    """Return the number of a gauge; 1/0 is 0, 4/0 is -3."""
    text = gauge.removesuffix(" AWG")
    return 1 - int(text.removesuffix("/0")) if text.endswith("/0") else int(text)


def circular_mils(gauge: str) -> float:
    """Return the area of a gauge: (5 mil · 92^((36 − n)/39))²."""
    return float((5 * 92 ** ((36 - gauge_number(gauge)) / 39)) ** 2)


def area_mm2(gauge: str) -> float:
    """Return the area of a gauge."""
    return circular_mils(gauge) * math.pi / 4 * 0.0254**2


def drop_v(current_a: float, length_m: float, gauge: str) -> float:
    """Return the drop along one conductor by the formula of the practice."""
    return DROP_K * current_a * length_m * _FEET_PER_M / circular_mils(gauge)


def length_of_drop_m(volts: float, current_a: float, gauge: str) -> float:
    """Return the length of one conductor that loses a voltage."""
    return volts * circular_mils(gauge) / (DROP_K * current_a * _FEET_PER_M)
