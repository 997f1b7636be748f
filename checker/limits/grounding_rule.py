"""Load the figures for bonding and grounding, and for motors that are heavy or held fast."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from checker.limits.citation import Citation
from checker.limits.table_file import AS_SHIPPED, CommonChanges, Table, house_table
from checker.units import Size, awg_size

SECONDS_PER_HOUR = 3600.0


@dataclass(frozen=True, slots=True, kw_only=True)
class GroundingRule:
    """Hold what a bond may carry, how thin it may be, and how motors are held against their devices.

    `gauges_thinner` counts sizes below the thickest feed, in the row of `gauges`, small to large.
    `common_ground_sets` are the limit sets
    that ask for a common conductor between cranking motors. `metal_return_roles` are roles of
    conductors that may land on an engine as their return.
    """

    bond_current_a: float
    gauges_thinner: int
    gauges: tuple[Size, ...]
    common_ground_sets: tuple[str, ...]
    metal_return_roles: tuple[str, ...]
    stalled_s: float
    heavy_motor_a: float
    citation: Citation
    figures: tuple[tuple[str, Citation], ...]


_FIGURES = (
    "bond_current_a",
    "gauges_thinner",
    "gauges",
    "common_ground_sets",
    "metal_return_roles",
    "stalled_hours",
    "heavy_motor_a",
)


@cache
def grounding_rule(changes: CommonChanges = AS_SHIPPED) -> GroundingRule:
    """Return the figures for bonding, grounding and motors."""
    return read_grounding_rule(house_table("grounding", changes))


def read_grounding_rule(table: Table) -> GroundingRule:
    """Read the figures for bonding, grounding and motors.

    Raises:
        LimitSetError: If a figure is missing or malformed.
    """
    table.expect(("citation", *_FIGURES), ("figures",))
    return GroundingRule(
        bond_current_a=table.number("bond_current_a"),
        gauges_thinner=table.count("gauges_thinner"),
        gauges=tuple(awg_size(name) for name in table.names("gauges")),
        common_ground_sets=table.names("common_ground_sets"),
        metal_return_roles=table.names("metal_return_roles"),
        stalled_s=table.number("stalled_hours") * SECONDS_PER_HOUR,
        heavy_motor_a=table.number("heavy_motor_a"),
        citation=table.citation(),
        figures=table.figure_citations(_FIGURES),
    )
