"""Load which services stand alone on a panel."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from checker.limits.table_file import AS_SHIPPED, CommonChanges, house_table


@dataclass(frozen=True, slots=True, kw_only=True)
class PanelRule:
    """Hold the services of lights that must be told apart, and those that want a device of their own."""

    light_services: tuple[str, ...]
    anchor_services: tuple[str, ...]
    lone_services: tuple[str, ...]


@cache
def panel_rule(changes: CommonChanges = AS_SHIPPED) -> PanelRule:
    """Return the rule."""
    table = house_table("panels", changes)
    table.expect(("citation", "light_services", "anchor_services", "lone_services"))
    table.citation()
    return PanelRule(
        light_services=table.names("light_services"),
        anchor_services=table.names("anchor_services"),
        lone_services=table.names("lone_services"),
    )
