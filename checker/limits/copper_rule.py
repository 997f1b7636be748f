"""Load the smallest copper area that a conductor of a size may have."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from checker.limits.citation import Citation
from checker.limits.formulas import copper
from checker.limits.rules import row_size
from checker.limits.table_file import Table, common_table
from checker.units import CIRCULAR_MIL_MM2, Size


@dataclass(frozen=True, slots=True, kw_only=True)
class CopperRule:
    """Hold sizes with the smallest area that each may have, mm2, small to large: gauges first, then metric sizes."""

    rows: tuple[tuple[Size, float], ...]
    citation: Citation
    figures: tuple[tuple[str, Citation], ...]

    def least_mm2(self, size: Size) -> float | None:
        """Return the smallest area of a size by its name, mm2; None where the table has no row for it."""
        named = [least for known, least in self.rows if known.text == size.text]
        return named[0] if named else None

    def largest_of(self, area_mm2: float, *, metric: bool) -> Size | None:
        """Return the largest gauge, or metric size, that a copper area is enough for; None below the smallest."""
        enough = [size for size, least in self.rows if (size.awg is None) is metric and least <= area_mm2]
        return enough[-1] if enough else None


@cache
def copper_rule() -> CopperRule:
    """Return the smallest copper areas."""
    return read_copper_rule(common_table("copper_areas"))


def read_copper_rule(table: Table) -> CopperRule:
    """Read the smallest copper areas.

    Raises:
        LimitSetError: If the table is malformed, cites nothing, or holds sizes out of order.
    """
    citation = table.citation()
    table.expect(("citation", "smallest_cmil", "largest_ohm_per_km"), ("figures",))
    gauges, metric = table.table("smallest_cmil"), table.table("largest_ohm_per_km")
    rows = [(_size(gauges, name), gauges.number(name) * CIRCULAR_MIL_MM2) for name in gauges.values]
    rows += [(_size(metric, name), _area_mm2(metric.number(name))) for name in metric.values]
    for kind in (True, False):
        areas = [least for size, least in rows if (size.awg is None) is kind]
        if not areas or areas != sorted(areas):
            table.refuse("sizes must rise from small to large")
    figures = table.figure_citations((*gauges.values, "largest_ohm_per_km"))
    return CopperRule(rows=tuple(rows), citation=citation, figures=figures)


def _size(table: Table, name: str) -> Size:
    try:
        return row_size(name)
    except ValueError:
        table.refuse(f"{name!r} is no size of a conductor", name)


def _area_mm2(ohm_per_km: float) -> float:
    """Return the area of annealed copper with a resistance at 20 C, mm2. Citation: resistivity times length over R."""
    return copper().resistivity_20c_ohm_mm2_per_m * 1000 / ohm_per_km
