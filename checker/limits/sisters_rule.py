"""Load the figures for lengths of sister hulls."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from checker.limits.table_file import common_table


@dataclass(frozen=True, slots=True, kw_only=True)
class SistersRule:
    """Say how far a length may be from its sisters', and from how many hulls on they tell."""

    most_fraction: float
    least_difference_m: float
    fewest_hulls: int


@cache
def sisters_rule() -> SistersRule:
    """Return the rule."""
    table = common_table("sisters")
    table.expect(("citation", "most_percent", "least_difference_m", "fewest_hulls"))
    table.citation()
    return SistersRule(
        most_fraction=table.number("most_percent") / 100,
        least_difference_m=table.number("least_difference_m"),
        fewest_hulls=table.count("fewest_hulls"),
    )
