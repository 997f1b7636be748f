"""Read quantities: a number with its unit, as a yard writes it.

A quantity is text. Values come back in SI; a conductor size comes back as a `Size`.
"""

from __future__ import annotations

import re
from enum import Enum
from functools import lru_cache

from checker.units import METRE_PER_FOOT, METRE_PER_INCH, Size, awg_number, awg_size, awg_text


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
_AUGHTS = re.compile(r"(?:([1-4])/0|(0{1,4})) ?AWG\Z")
_COMMA = re.compile(r"-?[0-9]+,[0-9]+")
_BARE = re.compile(r"[-+]?[0-9.,_]+(?:[eE][-+]?[0-9]+)?\Z")


@lru_cache(maxsize=20_000)
def read_number(text: str, dimension: Dimension) -> float:
    """Read a quantity with a unit of its dimension into SI (m, A, V, W, Ah, ohm, C, s).

    Raises:
        QuantityError: If the text is no such quantity; the message says what to write.
    """
    feet = _FEET_INCHES.match(text) if dimension is Dimension.LENGTH else None
    if feet:
        inches = float(feet[2])
        if inches >= 12:
            raise QuantityError(f"“{text}” has 12 in or more beside the feet; write whole feet first")
        return (float(feet[1]) * 12 + inches) * METRE_PER_INCH
    number, unit = _split(text, dimension)
    value = number * UNITS[dimension][unit]
    if value < 0 and dimension is not Dimension.TEMPERATURE:
        raise QuantityError(f"“{text}” is below zero, which no {dimension.value} here can be")
    return value


@lru_cache(maxsize=4_000)
def read_size(text: str) -> Size:
    """Read a conductor size: `6 AWG`, `2/0 AWG`, `00 AWG`, `16 mm2`.

    Raises:
        QuantityError: If the text is no size; the message says what to write.
    """
    aughts = _AUGHTS.match(text)
    if aughts:
        name = "0" * int(aughts[1]) if aughts[1] else aughts[2]
        return awg_size(name)
    number, unit = _split(text, Dimension.SIZE)
    if unit == "mm2":
        if number <= 0:
            raise QuantityError(f"“{text}” is no area of copper")
        return Size(f"{number:g} mm2", number)
    try:
        name = f"{number:g}"
        awg_number(name)
    except ValueError as error:
        raise QuantityError(f"“{text}” is no wire gauge; write e.g. 6 AWG or 2/0 AWG") from error
    return Size(awg_text(name), awg_size(name).area_mm2, name)


def _split(text: str, dimension: Dimension) -> tuple[float, str]:
    """Part a number from its unit, or say in a sentence why that cannot be done."""
    match = _ONE.match(text)
    if match and match[2] in UNITS[dimension]:
        return float(match[1]), match[2]
    raise QuantityError(_complaint(text, match, dimension))


def _complaint(text: str, match: re.Match[str] | None, dimension: Dimension) -> str:
    """Say what is wrong with a text that should be a quantity."""
    example = EXAMPLES[dimension]
    comma = _COMMA.search(text)
    if comma:
        return f"“{text}” has a decimal comma; write {text.replace(comma[0], comma[0].replace(',', '.'))}"
    if _BARE.match(text):
        return f"“{text}” has no unit; a {dimension.value} carries its unit, e.g. {example}"
    if match is None:
        return f"“{text}” is not a {dimension.value}; write e.g. {example}"
    known = UNITS[dimension]
    unit = match[2]
    meant = _OTHER_SPELLINGS.get(unit.lower())
    if meant not in known:
        meant = next((u for u in known if u.lower() == unit.lower()), None)
    if meant:
        return f"unit “{unit}” is spelled {meant} here; write {match[1]} {meant}"
    for other, units in UNITS.items():
        if unit in units:
            return f"“{text}” is a {other.value}, but a {dimension.value} is due here, e.g. {example}"
    return f"unknown unit “{unit}”; a {dimension.value} is written in {', '.join(known)}, e.g. {example}"
