"""Make each rule of a limit set from its table file.

The files keep the document's own units and digits, so that each can be held beside its
page; they become SI and fractions here.
"""

from __future__ import annotations

from collections.abc import Iterable
from itertools import pairwise

from checker.limits.citation import Citation
from checker.limits.rules import (
    AmpacityTable,
    Applicability,
    BreakerRule,
    BundleRow,
    BundleRule,
    DeviceRating,
    DeviceVoltage,
    DropRule,
    EngineFactor,
    IgnitionRule,
    InsulationRule,
    InterruptingRow,
    InterruptingRule,
    Judged,
    MaterialRule,
    MinimumSize,
    ProtectionDistance,
    SelfLimitingSource,
    SizeExemptions,
    figure_at,
)
from checker.limits.table_file import Table, common_table
from checker.units import METRE_PER_FOOT, awg_number, metre_from_inch


def read_applies(table: Table) -> Applicability:
    """Read which boats the set binds."""
    citation, figures = _cited(table, ("binds_petrol_inboard",))
    return Applicability(citation=citation, figures=figures, binds_petrol_inboard=table.flag("binds_petrol_inboard"))


def read_ampacity(table: Table) -> AmpacityTable:
    """Read the ampacity grid, and refuse one that falls with temperature or with size."""
    citation, figures = _cited(table, ("ambient_c", "columns_c", "rows"))
    columns_c = table.numbers("columns_c")
    if not columns_c or any(lower >= higher for lower, higher in pairwise(columns_c)):
        table.refuse("columns_c must rise")
    grid = table.table("rows")
    rows = tuple((awg, grid.numbers(awg)) for awg in grid.values)
    for awg, amperes in rows:
        _expect_gauge(grid, awg)
        if len(amperes) != len(columns_c):
            grid.refuse(f"{awg} AWG has {len(amperes)} figures for {len(columns_c)} columns")
        if any(cooler > hotter for cooler, hotter in pairwise(amperes)):
            grid.refuse(f"{awg} AWG falls with the temperature")
    for (small, below), (large, above) in pairwise(rows):
        if awg_number(small) <= awg_number(large):
            grid.refuse(f"{large} AWG must not follow {small} AWG: rows go from small to large")
        if any(a > b for a, b in zip(below, above, strict=True)):
            grid.refuse(f"{large} AWG bears less than {small} AWG")
    if not rows:
        grid.refuse("the table has no rows")
    return AmpacityTable(
        citation=citation,
        figures=figures,
        ambient_c=table.number("ambient_c"),
        columns_c=columns_c,
        rows=rows,
    )


def read_engine_factor(table: Table) -> EngineFactor:
    """Read the engine-space factors; a factor may have a citation of its own, named "105 C"."""
    rows = tuple(_engine_row(row) for row in table.tables("rows"))
    if any(lower[0] >= higher[0] for lower, higher in pairwise(rows)):
        table.refuse("rows must rise with column_c")
    citation, figures = _cited(
        table, ("ambient_c", "rows"), figure_names=tuple(figure_at(column_c) for column_c, _ in rows)
    )
    return EngineFactor(citation=citation, figures=figures, ambient_c=table.number("ambient_c"), rows=rows)


def _engine_row(row: Table) -> tuple[float, float]:
    row.expect(("column_c", "factor"))
    return row.number("column_c"), _factor(row)


def read_bundle(table: Table) -> BundleRule:
    """Read the bundle factors below 50 V, and those from 50 V up where the set prints any."""
    citation, figures = _cited(table, ("rows",), ("rows_from_50_v",))
    return BundleRule(
        citation=citation,
        figures=figures,
        rows=_bundle_rows(table, "rows"),
        rows_from_50_v=_bundle_rows(table, "rows_from_50_v") if table.has("rows_from_50_v") else (),
    )


def _bundle_rows(table: Table, key: str) -> tuple[BundleRow, ...]:
    """Read rows without gap or overlap, the last one open."""
    rows = tuple(_bundle_row(row) for row in table.tables(key))
    for less, more in pairwise(rows):
        if less.most is None or more.least != less.most + 1:
            table.refuse(f"{key} must follow each other: a gap or overlap stands before {more.least}")
        if more.factor > less.factor:
            table.refuse(f"{key}: the factor rises at {more.least} conductors")
    if rows and rows[-1].most is not None:
        table.refuse(f"{key}: the last row must be open, without max")
    return rows


def _bundle_row(row: Table) -> BundleRow:
    row.expect(("min", "factor"), ("max",))
    least, most = row.count("min"), row.count("max") if row.has("max") else None
    if most is not None and most < least:
        row.refuse(f"max {most} is below min {least}")
    return BundleRow(least, most, _factor(row))


def read_interrupting(table: Table) -> InterruptingRule:
    """Read the interrupting capacities; the last row is open."""
    citation, figures = _cited(table, ("rows",))
    rows = tuple(_interrupting_row(row) for row in table.tables("rows"))
    bounds = [row.cranking_up_to_a for row in rows]
    if not rows or bounds[-1] is not None or None in bounds[:-1]:
        table.refuse("rows: the last row, and it alone, must be open, without cranking_up_to_a")
    closed = [bound for bound in bounds if bound is not None]
    if closed != sorted(set(closed)):
        table.refuse("rows must rise in cranking_up_to_a")
    return InterruptingRule(citation=citation, figures=figures, rows=rows)


def _interrupting_row(row: Table) -> InterruptingRow:
    row.expect(("main_a", "branch_a"), ("cranking_up_to_a",))
    bound = row.number("cranking_up_to_a") if row.has("cranking_up_to_a") else None
    return InterruptingRow(bound, row.number("main_a"), row.number("branch_a"))


def read_minimum_size(table: Table) -> MinimumSize:
    """Read the smallest gauges."""
    citation, figures = _cited(table, ("single_awg", "sheathed_awg", "max_out_of_sheath_in"))
    return MinimumSize(
        citation=citation,
        figures=figures,
        single_awg=_gauge(table, "single_awg"),
        sheathed_awg=_gauge(table, "sheathed_awg"),
        max_out_of_sheath_m=metre_from_inch(table.number("max_out_of_sheath_in")),
    )


def read_exemptions(table: Table) -> SizeExemptions:
    """Read the exempt roles, rule by rule; each list may be empty."""
    citation, figures = _cited(
        table,
        (
            "roles",
            "ampacity_exempt_roles",
            "material_exempt_roles",
            "protection_exempt_roles",
            "electronic_below_a",
            "pigtail_below_in",
        ),
    )
    return SizeExemptions(
        citation=citation,
        figures=figures,
        roles=table.names("roles"),
        ampacity_exempt_roles=table.names("ampacity_exempt_roles"),
        material_exempt_roles=table.names("material_exempt_roles"),
        protection_exempt_roles=table.names("protection_exempt_roles"),
        electronic_below_a=table.number("electronic_below_a"),
        pigtail_below_m=metre_from_inch(table.number("pigtail_below_in")),
    )


def read_distance(table: Table) -> ProtectionDistance:
    """Read the longest conductors ahead of the first device."""
    citation, figures = _cited(table, ("open_in", "enclosed_in", "needs_reason"), ("battery_enclosed_in",))
    open_in, enclosed_in = table.number("open_in"), table.number("enclosed_in")
    battery_in = table.number("battery_enclosed_in") if table.has("battery_enclosed_in") else None
    if enclosed_in < open_in:
        table.refuse("enclosed_in is shorter than open_in")
    return ProtectionDistance(
        citation=citation,
        figures=figures,
        open_m=metre_from_inch(open_in),
        enclosed_m=metre_from_inch(enclosed_in),
        battery_enclosed_m=None if battery_in is None else metre_from_inch(battery_in),
        needs_reason=table.flag("needs_reason"),
    )


def read_device_rating(table: Table) -> DeviceRating:
    """Read the largest device rating; the standard ratings come from the common table."""
    citation, figures = _cited(table, ("ampacity_percent", "judges"), ("next_standard_up_to_percent",))
    factor, cap = table.number("ampacity_percent") / 100, None
    if table.has("next_standard_up_to_percent"):
        cap = table.number("next_standard_up_to_percent") / 100
        if cap < factor:
            table.refuse("next_standard_up_to_percent is below ampacity_percent")
    judges = table.text("judges")
    if judges not in {judged.value for judged in Judged}:
        table.refuse(f"judges must be sum or largest, not {judges!r}")
    return DeviceRating(
        citation=citation,
        figures=figures,
        ampacity_factor=factor,
        standard_up_to_factor=cap,
        standard_ratings_a=merged_ratings(),
        judged=Judged(judges),
    )


def merged_ratings() -> tuple[float, ...]:
    """Return the standard ratings of all published series, A, rising, each once."""
    return tuple(sorted({a for series in rating_series() for a in series.numbers("amps")}))


def rating_series() -> tuple[Table, ...]:
    """Return the published series of standard ratings, each with its citation."""
    table = common_table("standard_ratings")
    table.expect(("series",))
    for series in table.tables("series"):
        series.expect(("amps", "citation"))
    return table.tables("series")


def read_device_voltage(table: Table) -> DeviceVoltage:
    """Read the lowest voltage rating of a device."""
    citation, figures = _cited(table, ("least_percent_of_nominal",))
    return DeviceVoltage(
        citation=citation,
        figures=figures,
        least_nominal_factor=table.number("least_percent_of_nominal") / 100,
    )


def read_breaker(table: Table) -> BreakerRule:
    """Read what a breaker must be."""
    citation, figures = _cited(table, ("must_reset_by_hand", "must_be_trip_free"))
    return BreakerRule(
        citation=citation,
        figures=figures,
        must_reset_by_hand=table.flag("must_reset_by_hand"),
        must_be_trip_free=table.flag("must_be_trip_free"),
    )


def read_self_limiting_source(table: Table) -> SelfLimitingSource:
    """Read the exemption of self-limiting sources and the cap on others."""
    citation, figures = _cited(table, ("is_exempt",), ("largest_percent_of_output",))
    cap = table.number("largest_percent_of_output") / 100 if table.has("largest_percent_of_output") else None
    return SelfLimitingSource(
        citation=citation, figures=figures, is_exempt=table.flag("is_exempt"), largest_output_factor=cap
    )


def read_material(table: Table) -> MaterialRule:
    """Read what a conductor must be made of."""
    citation, figures = _cited(table, ("materials", "strands", "must_be_insulated", "refuses_welding"))
    return MaterialRule(
        citation=citation,
        figures=figures,
        materials=table.names("materials"),
        strands=table.names("strands"),
        must_be_insulated=table.flag("must_be_insulated"),
        refuses_welding=table.flag("refuses_welding"),
    )


def read_drop(table: Table) -> DropRule:
    """Read the voltage-drop groups and the constant."""
    citation, figures = _cited(table, ("critical_percent", "general_percent", "critical_services", "k_ohm_cmil_per_ft"))
    return DropRule(
        citation=citation,
        figures=figures,
        critical_fraction=table.number("critical_percent") / 100,
        general_fraction=table.number("general_percent") / 100,
        critical_services=table.names("critical_services"),
        k_ohm_cmil_per_ft=table.number("k_ohm_cmil_per_ft"),
    )


def read_insulation(table: Table) -> InsulationRule:
    """Read the lowest insulation ratings."""
    citation, figures = _cited(table, ("engine_space_min_c", "elsewhere_min_c"))
    return InsulationRule(
        citation=citation,
        figures=figures,
        engine_space_min_c=table.number("engine_space_min_c"),
        elsewhere_min_c=table.number("elsewhere_min_c"),
    )


def read_ignition(table: Table) -> IgnitionRule:
    """Read where parts must be ignition protected."""
    citation, figures = _cited(table, ("hazards", "open_space_ft"))
    return IgnitionRule(
        citation=citation,
        figures=figures,
        hazards=table.names("hazards"),
        open_space_m=table.number("open_space_ft") * METRE_PER_FOOT,
    )


def _cited(
    table: Table,
    required: tuple[str, ...],
    optional: tuple[str, ...] = (),
    *,
    figure_names: Iterable[str] | None = None,
) -> tuple[Citation, tuple[tuple[str, Citation], ...]]:
    """Check a table's keys; return its citation and those of single figures.

    A figure is named by its key unless `figure_names` says otherwise.
    """
    citation = table.citation()  # first: a table that cites nothing is told so, whatever else it lacks
    table.expect(("citation", *required), ("figures", *optional))
    return citation, table.figure_citations(figure_names or (*required, *optional))


def _factor(row: Table) -> float:
    factor = row.number("factor")
    if factor > 1:
        row.refuse(f"a factor of {factor:g} would raise the ampacity")
    return factor


def _gauge(table: Table, key: str) -> str:
    awg = table.text(key)
    _expect_gauge(table, awg)
    return awg


def _expect_gauge(table: Table, awg: str) -> None:
    try:
        awg_number(awg)
    except ValueError as fault:
        table.refuse(str(fault))
