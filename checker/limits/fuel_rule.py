"""Hold and load the rule on batteries near fuel."""

from __future__ import annotations

from dataclasses import dataclass

from checker.limits.rules import Rule
from checker.limits.table_file import Table
from checker.units import metre_from_inch


@dataclass(frozen=True, slots=True, kw_only=True)
class BatteryFuel(Rule):
    """How near a battery metal fuel parts may come without a shield; none may stand in line with it."""

    clearance_m: float


def read_battery_fuel(table: Table) -> BatteryFuel:
    """Read the rule on batteries near fuel."""
    table.expect(("citation", "clearance_in"), ("figures",))
    return BatteryFuel(
        citation=table.citation(),
        figures=table.figure_citations(("clearance_in",)),
        clearance_m=metre_from_inch(table.number("clearance_in")),
    )
