"""Hold the exact conversion factors and the American Wire Gauge definition.

Inside the program everything is SI; this is the only module that knows another unit.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

METRE_PER_FOOT = 0.3048  # exact, international yard and pound agreement of 1959
METRE_PER_INCH = 0.0254  # exact
NEWTON_METRE_PER_FOOT_POUND = 0.3048 * 0.45359237 * 9.80665  # exact: foot, pound and standard gravity
MIL_PER_INCH = 1000.0
CIRCULAR_MIL_MM2 = math.pi / 4 * (METRE_PER_INCH * 1000 / MIL_PER_INCH) ** 2

AWG_LARGEST = -3  # 4/0
AWG_SMALLEST = 36


@dataclass(frozen=True, slots=True)
class Size:
    """Name a conductor size and its copper area.

    `text` is how the yard wrote it. `awg` is the gauge name in the long spelling of the
    published tables ("6", "0", "0000"), or None for a metric size. `area_mm2` is the real
    area: the AWG definition (ASTM B258), or the stated metric area.
    """

    text: str
    area_mm2: float
    awg: str | None = None

    @property
    def area_cmil(self) -> float:
        """Return the area in circular mils."""
        return self.area_mm2 / CIRCULAR_MIL_MM2


def awg_number(name: str) -> int:
    """Return n of the AWG formula for a gauge name: 0 for "0", -1 for "00", 18 for "18".

    Raises:
        ValueError: If the name is no gauge between 4/0 and 36.
    """
    if not name.isascii() or not name.isdigit():
        raise ValueError(f"{name!r} is no wire gauge")
    number = 1 - len(name) if set(name) == {"0"} else int(name)
    if (name.startswith("0") and set(name) != {"0"}) or not AWG_LARGEST <= number <= AWG_SMALLEST:
        raise ValueError(f"{name!r} is no wire gauge")
    return number


def awg_area_mm2(name: str) -> float:
    """Return the copper area of a gauge, mm². Citation: ASTM B258, d = 0.005 in * 92^((36-n)/39)."""
    diameter_mm: float = 0.005 * 92.0 ** ((36 - awg_number(name)) / 39) * METRE_PER_INCH * 1000
    return math.pi / 4 * diameter_mm * diameter_mm


def awg_text(name: str) -> str:
    """Spell a gauge name as the trade writes it: "0000" is "4/0 AWG"."""
    return f"{len(name)}/0 AWG" if set(name) == {"0"} else f"{name} AWG"


def awg_size(name: str) -> Size:
    """Return the size of a gauge name ("6", "00")."""
    return Size(awg_text(name), awg_area_mm2(name), name)


def metre_from_inch(length_in: float) -> float:
    """Convert inches to metres."""
    return length_in * METRE_PER_INCH


def metre_from_millimetre(length_mm: float) -> float:
    """Convert millimetres to metres."""
    return length_mm / 1000


def inch_from_metre(length_m: float) -> float:
    """Convert metres to inches."""
    return length_m / METRE_PER_INCH


def foot_pound_from_newton_metre(torque_nm: float) -> float:
    """Convert newton metres to foot-pounds."""
    return torque_nm / NEWTON_METRE_PER_FOOT_POUND


def foot_from_metre(length_m: float) -> float:
    """Convert metres to feet."""
    return length_m / METRE_PER_FOOT
