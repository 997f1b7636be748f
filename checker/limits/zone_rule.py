"""Load what may stand in which zone, beyond what a limit set says."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from checker.limits.citation import Citation
from checker.limits.table_file import Table, common_table


@dataclass(frozen=True, slots=True, kw_only=True)
class ZoneRule:
    """Hold the services that may stand beside gas bottles, what gives off hydrogen, and what bears bilge water.

    `immersion_digits` are the second numerals of an ingress rating for immersion in water.
    """

    gas_locker_services: tuple[str, ...]
    gassing_chemistries: tuple[str, ...]
    immersion_digits: tuple[int, ...]
    citation: Citation
    figures: tuple[tuple[str, Citation], ...]


_FIGURES = ("gas_locker_services", "gassing_chemistries", "immersion_digits")


@cache
def zone_rule() -> ZoneRule:
    """Return what may stand in which zone."""
    return read_zone_rule(common_table("zones"))


def read_zone_rule(table: Table) -> ZoneRule:
    """Read what may stand in which zone.

    Raises:
        LimitSetError: If the table is malformed or cites nothing.
    """
    citation = table.citation()
    table.expect(("citation", *_FIGURES), ("figures",))
    return ZoneRule(
        gas_locker_services=table.names("gas_locker_services"),
        gassing_chemistries=table.names("gassing_chemistries"),
        immersion_digits=tuple(int(digit) for digit in table.numbers("immersion_digits")),
        citation=citation,
        figures=table.figure_citations(_FIGURES),
    )
