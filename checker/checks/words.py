"""Print figures as an electrician reads them: few digits, and more where a limit is nearly met."""

from __future__ import annotations

import math
from collections.abc import Iterable

from checker.finding import Measure
from checker.units import foot_from_metre, inch_from_metre

BATTERY_FIGURES = "emf_full, emf_low, resistance_full and resistance_low of its batteries"
"""What a solved network needs of every battery: the fields to fill in."""


def no_figures(batteries: Iterable[str]) -> str:
    """Tell that a network cannot be solved for want of what `BATTERY_FIGURES` names."""
    return f"EMF or resistance of {', '.join(batteries)} is not written"


def ampere(value_a: float) -> str:
    """Print a current: 7.5 A, 250 A, unlimited."""
    return "unlimited" if value_a == float("inf") else f"{plain(value_a)} A"


def plain(value: float) -> str:
    """Print a number with at most two decimals, without a tail of zeros."""
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def seconds(value_s: float) -> str:
    """Print a time with two digits that count: 0.0042 s, 0.17 s, 12 s."""
    if value_s == float("inf"):
        return "for ever"
    digits = 0 if value_s <= 0 else max(0, 1 - math.floor(math.log10(value_s)))
    text = f"{value_s:.{digits}f}"
    return f"{text.rstrip('0').rstrip('.') if '.' in text else text} s"


def length(value_m: float, unit: str = "m") -> str:
    """Print a length in the yard's unit, with inches beside short ones."""
    if unit == "ft":
        return f"{foot_from_metre(value_m):.1f} ft" if value_m >= 1 else f"{inch_from_metre(value_m):.1f} in"
    return f"{value_m:.2f} m"


def short_length(value_m: float) -> str:
    """Print a short length in both units, since limits on it are printed in inches."""
    return f"{value_m:.3f} m ({inch_from_metre(value_m):.1f} in)"


def kept_length(limit_m: float) -> str:
    """Print a length to keep to in both units, cut so that what is printed keeps it."""
    return f"{math.floor(limit_m * 1000 + 1e-6) / 1000:.3f} m ({inch_from_metre(limit_m):.1f} in)"


def cut_length(limit_m: float, unit: str) -> str:
    """Print a longest length in the yard's unit, cut so that what is printed keeps it."""
    value, name = (foot_from_metre(limit_m), "ft") if unit == "ft" else (limit_m, "m")
    places = 10 if unit == "ft" else 100
    return f"{math.floor(value * places + 1e-6) / places:.{1 if unit == 'ft' else 2}f} {name}"


def percent(fraction: float) -> str:
    """Print a fraction as per cent with two decimals."""
    return f"{fraction * 100:.2f} %"


def measured(measure: Measure) -> tuple[str, str]:
    """Print value and limit with the same digits, and with more where they would look equal but are not.

    In the yard's unit where that is another; a length in feet and inches is printed in inches.
    """
    unit, factor = ("in", inch_from_metre(1.0)) if measure.shown_in == "ft" else (measure.unit, 1.0)
    for decimals in (_DECIMALS.get(unit, 2), 3, 4, 6, 9):
        value, limit = (_with_unit(x * factor, unit, decimals) for x in (measure.value, measure.limit))
        if value != limit or measure.value == measure.limit:
            break
    return value, limit


_DECIMALS = {"m": 3, "in": 1}


def _with_unit(value: float, unit: str, decimals: int) -> str:
    if value == float("inf"):
        return "unlimited"
    if unit == "":
        return f"{value * 100:.{decimals}f} %"
    if unit == "s" and value < 0.01:
        return seconds(value)
    text = f"{value:.{decimals}f}"
    return f"{text.rstrip('0').rstrip('.') if decimals == 2 else text} {unit}"
