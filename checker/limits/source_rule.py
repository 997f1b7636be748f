"""Load the figures for charge sources, banks that are joined, and monitors."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from checker.limits.citation import Citation
from checker.limits.table_file import Table, common_table


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceRule:
    """Hold what a source may give a bank, which banks belong together, and how near a monitor's settings must be.

    The output voltage is a factor of the bank's nominal voltage, the charge difference one of the
    nominal voltage too. `families` are kinds of chemistry by chemistry; batteries of a family in
    `told_to_stop` may disconnect themselves.
    """

    lowest_output_factor: float
    highest_output_factor: float
    largest_unsensed_drop_v: float
    families: tuple[tuple[str, str], ...]
    told_to_stop: tuple[str, ...]
    charge_difference_factor: float
    other_rules_from_v: float
    ratio_difference_fraction: float
    capacity_difference_fraction: float
    citation: Citation
    figures: tuple[tuple[str, Citation], ...]

    def family(self, chemistry: str) -> str:
        """Return the family of a chemistry, the chemistry itself where no family has it."""
        return dict(self.families).get(chemistry, chemistry)


_FIGURES = (
    "lowest_output_percent_of_nominal",
    "highest_output_percent_of_nominal",
    "largest_unsensed_drop_v",
    "families",
    "told_to_stop_families",
    "largest_charge_difference_v_at_12v",
    "other_rules_from_v",
    "largest_ratio_difference_percent",
    "largest_capacity_difference_percent",
)


@cache
def source_rule() -> SourceRule:
    """Return the figures for sources and monitors."""
    return read_source_rule(common_table("sources"))


def read_source_rule(table: Table) -> SourceRule:
    """Read the figures for sources and monitors.

    Raises:
        LimitSetError: If a figure is missing or malformed, or a family is not known.
    """
    table.expect(("citation", *_FIGURES), ("figures",))
    grouped = table.table("families")
    families = tuple((chemistry, family) for family in grouped.values for chemistry in grouped.names(family))
    stopping = table.names("told_to_stop_families")
    if strays := [family for family in stopping if family not in grouped.values]:
        table.refuse(f"told_to_stop_families names {strays[0]}, which is no family")
    return SourceRule(
        lowest_output_factor=table.number("lowest_output_percent_of_nominal") / 100,
        highest_output_factor=table.number("highest_output_percent_of_nominal") / 100,
        largest_unsensed_drop_v=table.number("largest_unsensed_drop_v"),
        families=families,
        told_to_stop=stopping,
        charge_difference_factor=table.number("largest_charge_difference_v_at_12v") / 12,
        other_rules_from_v=table.number("other_rules_from_v"),
        ratio_difference_fraction=table.number("largest_ratio_difference_percent") / 100,
        capacity_difference_fraction=table.number("largest_capacity_difference_percent") / 100,
        citation=table.citation(),
        figures=table.figure_citations(_FIGURES),
    )
