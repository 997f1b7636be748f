"""Read quantities: a number with its unit, as a yard writes it.

A quantity is text. Values come back in SI; a conductor size comes back as a `Size`.
"""

from __future__ import annotations

import re
from enum import Enum
from functools import lru_cache

from checker.reading.words import shown
from checker.units import (
    AWG_SMALLEST,
    METRE_PER_FOOT,
    METRE_PER_INCH,
    NEWTON_METRE_PER_FOOT_POUND,
    Size,
    awg_size,
)


class Dimension(Enum):
    """Say what kind of quantity a field holds."""

    LENGTH = "length"
    CURRENT = "current"
    VOLTAGE = "voltage"
    POWER = "power"
    CAPACITY = "capacity"
    RESISTANCE = "resistance"
    TEMPERATURE = "temperature"
    TIME = "time"
    TORQUE = "torque"
    SIZE = "size"


class QuantityError(ValueError):
    """A text that is no quantity of the wanted kind; the message says what to write."""


UNITS: dict[Dimension, dict[str, float]] = {
    Dimension.LENGTH: {"m": 1.0, "cm": 0.01, "mm": 0.001, "ft": METRE_PER_FOOT, "in": METRE_PER_INCH},
    Dimension.CURRENT: {"A": 1.0, "mA": 0.001, "kA": 1000.0},
    Dimension.VOLTAGE: {"V": 1.0, "mV": 0.001},
    Dimension.POWER: {"W": 1.0, "kW": 1000.0},
    Dimension.CAPACITY: {"Ah": 1.0},
    Dimension.RESISTANCE: {"ohm": 1.0, "mohm": 0.001},
    Dimension.TEMPERATURE: {"C": 1.0},
    Dimension.TIME: {"s": 1.0},
    Dimension.TORQUE: {"Nm": 1.0, "ft-lb": NEWTON_METRE_PER_FOOT_POUND, "in-lb": NEWTON_METRE_PER_FOOT_POUND / 12},
    Dimension.SIZE: {"AWG": 1.0, "mm2": 1.0},
}

EXAMPLES = {
    Dimension.LENGTH: "4.2 m or 13 ft 6 in",
    Dimension.CURRENT: "7.5 A",
    Dimension.VOLTAGE: "12 V",
    Dimension.POWER: "2000 W",
    Dimension.CAPACITY: "220 Ah",
    Dimension.RESISTANCE: "0.1 mohm",
    Dimension.TEMPERATURE: "105 C",
    Dimension.TIME: "10 s",
    Dimension.TORQUE: "12 Nm",
    Dimension.SIZE: "6 AWG, 2/0 AWG or 16 mm2",
}

# Spellings that people write and that have one plain meaning; they are still refused, so that
# every file of a fleet is spelled alike, but the message can name the right unit.
_OTHER_SPELLINGS = {
    "mm²": "mm2", "mm^2": "mm2", "sqmm": "mm2", "°c": "C", "degc": "C", "ω": "ohm", "ohms": "ohm",
    "mω": "mohm", "milliohm": "mohm", "amp": "A", "amps": "A", "volt": "V", "volts": "V",
    "inch": "in", "inches": "in", '"': "in", "feet": "ft", "foot": "ft", "'": "ft",
    "meter": "m", "metre": "m", "meters": "m", "metres": "m", "sec": "s", "ga": "AWG", "gauge": "AWG",
}  # fmt: skip

_NUMBER = r"-?[0-9]{1,9}(?:\.[0-9]{1,9})?"
_ONE = re.compile(rf"({_NUMBER}) ?([^\s0-9.,;-]\S*)\Z")
_FEET_INCHES = re.compile(r"([0-9]{1,6}) ?ft ([0-9]{1,2}(?:\.[0-9]{1,6})?) ?in\Z")
_GAUGE = re.compile(r"(?:([1-4])/0|(0{1,4}|[1-9][0-9]?)) ?AWG\Z")
_GAUGE_LAST = re.compile(r"(?:[Aa][Ww][Gg]|#|[Nn]o\.?) ?(0{1,4}|[1-4]/0|[1-9][0-9]?)\Z")
_FEET_INCHES_SIGNS = re.compile(r"([0-9]{1,6}) ?['\u2032] ?([0-9]{1,2}(?:\.[0-9]{1,6})?) ?[\"\u2033]\Z")
_COMMA = re.compile(r"[0-9],[0-9]")
_DECIMAL_COMMA = re.compile(r"-?[0-9]+,(?![0-9]{3}\b)[0-9]+(?![0-9.,])")
_BARE = re.compile(r"[-+]?[0-9.,_/]+(?:[eE][-+]?[0-9]+)?\Z")


@lru_cache(maxsize=20_000)
def read_number(text: str, dimension: Dimension) -> float:
    """Read a quantity with a unit of its dimension into SI (m, A, V, W, Ah, ohm, C, s, N m).

    Raises:
        QuantityError: If the text is no such quantity; the message says what to write.
    """
    feet = _FEET_INCHES.match(text) if dimension is Dimension.LENGTH else None
    if feet:
        inches = float(feet[2])
        if inches >= 12:
            raise QuantityError(f"“{shown(text)}” has 12 in or more beside the feet; write whole feet first")
        return (float(feet[1]) * 12 + inches) * METRE_PER_INCH
    number, unit = _split(text, dimension)
    value = number * UNITS[dimension][unit]
    if value < 0 and dimension is not Dimension.TEMPERATURE:
        raise QuantityError(f"“{shown(text)}” is below zero, which no {dimension.value} here can be")
    return value


@lru_cache(maxsize=4_000)
def read_size(text: str) -> Size:
    """Read a conductor size: `6 AWG`, `2/0 AWG`, `00 AWG`, `16 mm2`.

    Raises:
        QuantityError: If the text is no size; the message says what to write.
    """
    gauge = _GAUGE.match(text)
    if gauge:
        name = "0" * int(gauge[1]) if gauge[1] else gauge[2]
        if set(name) == {"0"} or int(name) <= AWG_SMALLEST:
            return awg_size(name)
    number, unit = _split(text, Dimension.SIZE)
    if unit == "AWG":
        raise QuantityError(f"“{shown(text)}” is no wire gauge; write e.g. 6 AWG or 2/0 AWG")
    if number <= 0:
        raise QuantityError(f"“{shown(text)}” is no area of copper")
    return Size(f"{number:g} mm2", number)


def _split(text: str, dimension: Dimension) -> tuple[float, str]:
    """Part a number from its unit, or say in a sentence why that cannot be done."""
    match = _ONE.match(text)
    if match and match[2] in UNITS[dimension]:
        return float(match[1]), match[2]
    raise QuantityError(_complaint(text, match, dimension))


def _complaint(text: str, match: re.Match[str] | None, dimension: Dimension) -> str:
    """Say what is wrong with a text that should be a quantity."""
    example = EXAMPLES[dimension]
    quoted = f"“{shown(text)}”"
    if "," not in text and _BARE.match(text):
        return f"{quoted} has no unit; a {dimension.value} carries its unit, e.g. {example}"
    habit = _habit(text, dimension, quoted)
    if habit or match is None:
        return habit or f"{quoted} is not a {dimension.value}; write e.g. {example}"
    known = UNITS[dimension]
    unit = match[2]
    meant = _OTHER_SPELLINGS.get(unit.lower())
    if meant not in known:
        # A capital M may stand for a million; then it is not for us to say that a thousandth is meant.
        meant = next((u for u in known if u.lower() == unit.lower() and (unit[0] != "M" or len(u) == 1)), None)
    if meant:
        return f"unit “{shown(unit)}” is spelled {meant} here; write {match[1]} {meant}"
    for other, units in UNITS.items():
        if unit in units:
            return f"{quoted} is a {other.value}, but a {dimension.value} is due here, e.g. {example}"
    return f"unknown unit “{shown(unit)}”; a {dimension.value} is written in {', '.join(known)}, e.g. {example}"


def _habit(text: str, dimension: Dimension, quoted: str) -> str | None:
    """Tell a spelling that people are used to, with the one that is due here."""
    if "," in text and _COMMA.search(text):
        if _DECIMAL_COMMA.match(text):
            return f"{quoted} has a decimal comma; write {shown(text.replace(',', '.', 1))}"
        example = EXAMPLES[dimension]
        return f"{quoted} has a comma; decimals follow a point and nothing parts thousands, e.g. {example}"
    signs = _FEET_INCHES_SIGNS.match(text)
    if signs and dimension is Dimension.LENGTH:
        return f"{quoted} is spelled {signs[1]} ft {signs[2]} in here"
    gauge = _GAUGE_LAST.match(text)
    return f"{quoted} is spelled {gauge[1]} AWG here" if gauge and dimension is Dimension.SIZE else None
