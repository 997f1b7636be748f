"""Make each rule of a limit set from its table file.

The files keep the document's own units and digits, so that each can be held beside its
page; they become SI and fractions here.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
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
    SourceDevice,
    SupportRule,
    figure_at,
    is_metric,
    row_size,
)
from checker.limits.table_file import Table, common_table
from checker.reading.words import shown
from checker.units import CIRCULAR_MIL_MM2, METRE_PER_FOOT, Size, awg_number, metre_from_inch, metre_from_millimetre


def read_applies(table: Table) -> Applicability:
    """Read which boats the set binds."""
    citation, figures = _cited(table, ("binds_petrol_inboard",))
    return Applicability(citation=citation, figures=figures, binds_petrol_inboard=table.flag("binds_petrol_inboard"))


def read_ampacity(table: Table) -> AmpacityTable:
    """Read the ampacity grid, and refuse one that falls with temperature or with size.

    Its rows are gauges ('16') or areas (2.5 mm2).
    """
    citation, figures = _cited(table, ("ambient_c", "columns_c", "rows"))
    columns_c = table.numbers("columns_c")
    if not columns_c or any(lower >= higher for lower, higher in pairwise(columns_c)):
        table.refuse("columns_c must rise", "columns_c")
    grid = table.table("rows")
    rows = tuple((awg, grid.numbers(awg)) for awg in grid.values)
    areas_mm2 = [_row_area_mm2(grid, name) for name, _ in rows]
    for name, amperes in rows:
        if is_metric(name) is not is_metric(rows[0][0]):
            grid.refuse("rows are all gauges or all metric sizes", name)
        if len(amperes) != len(columns_c):
            grid.refuse(f"{_row(name)} has {len(amperes)} figures for {len(columns_c)} columns", name)
        if any(cooler > hotter for cooler, hotter in pairwise(amperes)):
            grid.refuse(f"{_row(name)} falls with the temperature", name)
    for (smaller_mm2, larger_mm2), ((small, below), (large, above)) in zip(
        pairwise(areas_mm2), pairwise(rows), strict=True
    ):
        if smaller_mm2 >= larger_mm2:
            grid.refuse(f"{_row(large)} must not follow {_row(small)}: rows go from small to large", large)
        if any(a > b for a, b in zip(below, above, strict=True)):
            grid.refuse(f"{_row(large)} bears less than {_row(small)}", large)
    if not rows:
        grid.refuse("the table has no rows")
    return AmpacityTable(
        citation=citation,
        figures=figures,
        ambient_c=table.number("ambient_c"),
        columns_c=columns_c,
        rows=tuple((name if not is_metric(name) else row_size(name).text, amperes) for name, amperes in rows),
    )


def _row(name: str) -> str:
    """Name a row for a reader: "6 AWG", "16 mm2"."""
    return name if is_metric(name) else f"{name} AWG"


def _row_area_mm2(grid: Table, name: str) -> float:
    """Return the area of a row, and refuse a name that is no size."""
    if not is_metric(name):
        _expect_gauge(grid, name)
    try:
        return row_size(name).area_mm2
    except ValueError:
        grid.refuse(f"{shown(name)!r} is no area of copper; write e.g. 2.5 mm2", name)


def read_engine_factor(table: Table) -> EngineFactor:
    """Read the engine-space factors; a factor may have a citation of its own, named "105 C"."""
    rows = tuple(_engine_row(row) for row in table.tables("rows"))
    if any(lower[0] >= higher[0] for lower, higher in pairwise(rows)):
        table.refuse("rows must rise with column_c", "rows")
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
            table.refuse(f"{key} must follow each other: a gap or overlap stands before {more.least}", key)
        if more.factor > less.factor:
            table.refuse(f"{key}: the factor rises at {more.least} conductors", key)
    if rows and rows[-1].most is not None:
        table.refuse(f"{key}: the last row must be open, without max", key)
    return rows


def _bundle_row(row: Table) -> BundleRow:
    row.expect(("min", "factor"), ("max",))
    least, most = row.count("min"), row.count("max") if row.has("max") else None
    if most is not None and most < least:
        row.refuse(f"max {most} is below min {least}", "max")
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


_LENGTHS: dict[str, Callable[[float], float]] = {"in": metre_from_inch, "mm": metre_from_millimetre}
"""The units in which documents print short lengths, as the keys of tables end in them."""


def _key(table: Table, name: str, units: Iterable[str]) -> str:
    """Return the key of a figure in the unit that the table gives it in: open_in, open_mm; else the first."""
    keys = [f"{name}_{unit}" for unit in units]
    given = [key for key in keys if table.has(key)]
    if len(given) > 1:
        table.refuse(f"{' and '.join(given)} are one figure in two units: keep the document's own", given[1])
    return given[0] if given else keys[0]


def _length_key(table: Table, name: str) -> str:
    return _key(table, name, _LENGTHS)


def _length_m(table: Table, name: str) -> float:
    key = _length_key(table, name)
    return _LENGTHS[key.rpartition("_")[2]](table.number(key))


def read_minimum_size(table: Table) -> MinimumSize:
    """Read the smallest sizes: gauges, or areas."""
    sizes = [_key(table, name, ("awg", "mm2")) for name in ("single", "sheathed")]
    longer = _length_key(table, "single_longer_than")
    citation, figures = _cited(table, (*sizes, _length_key(table, "max_out_of_sheath")), (longer,))
    single, sheathed = (_size(table, key) for key in sizes)
    if (single.awg is None) is not (sheathed.awg is None):
        table.refuse("both sizes are gauges, or both are areas", sizes[1])
    if sheathed.area_mm2 > single.area_mm2:
        table.refuse(f"{sizes[1]} is larger than {sizes[0]}", sizes[1])
    return MinimumSize(
        citation=citation,
        figures=figures,
        single=single,
        sheathed=sheathed,
        max_out_of_sheath_m=_length_m(table, "max_out_of_sheath"),
        single_longer_than_m=_length_m(table, "single_longer_than") if table.has(longer) else 0.0,
    )


def _size(table: Table, key: str) -> Size:
    if key.endswith("_awg"):
        return row_size(_gauge(table, key))
    area_mm2 = table.number(key)
    return Size(f"{area_mm2:g} mm2", area_mm2)


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
            _length_key(table, "pigtail_below"),
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
        pigtail_below_m=_length_m(table, "pigtail_below"),
    )


def read_distance(table: Table) -> ProtectionDistance:
    """Read the longest conductors ahead of the first device."""
    open_key, enclosed_key, battery_key = (
        _length_key(table, name) for name in ("open", "enclosed", "battery_enclosed")
    )
    citation, figures = _cited(table, (open_key, enclosed_key, "needs_reason"), (battery_key,))
    open_m, enclosed_m = _length_m(table, "open"), _length_m(table, "enclosed")
    if enclosed_m < open_m:
        table.refuse(f"{enclosed_key} is shorter than {open_key}", enclosed_key)
    return ProtectionDistance(
        citation=citation,
        figures=figures,
        open_m=open_m,
        enclosed_m=enclosed_m,
        battery_enclosed_m=_length_m(table, "battery_enclosed") if table.has(battery_key) else None,
        needs_reason=table.flag("needs_reason"),
    )


def read_device_rating(table: Table) -> DeviceRating:
    """Read the largest device rating; the standard ratings come from the common table."""
    citation, figures = _cited(table, ("ampacity_percent", "judges"), ("next_standard_up_to_percent",))
    factor, cap = table.number("ampacity_percent") / 100, None
    if table.has("next_standard_up_to_percent"):
        cap = table.number("next_standard_up_to_percent") / 100
        if cap < factor:
            table.refuse("next_standard_up_to_percent is below ampacity_percent", "next_standard_up_to_percent")
    judges = table.text("judges")
    if judges not in {judged.value for judged in Judged}:
        table.refuse(f"judges must be sum or largest, not {shown(judges)!r}", "judges")
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


_K_PER_RESISTIVITY = METRE_PER_FOOT / CIRCULAR_MIL_MM2


def read_drop(table: Table) -> DropRule:
    """Read the voltage-drop groups and the constant: K, or the resistivity of copper."""
    constant = "resistivity_ohm_mm2_per_m" if table.has("resistivity_ohm_mm2_per_m") else "k_ohm_cmil_per_ft"
    citation, figures = _cited(table, ("critical_percent", "general_percent", "critical_services", constant))
    if table.number("critical_percent") > table.number("general_percent"):
        table.refuse("critical_percent is above general_percent", "critical_percent")
    return DropRule(
        citation=citation,
        figures=figures,
        critical_fraction=table.number("critical_percent") / 100,
        general_fraction=table.number("general_percent") / 100,
        critical_services=table.names("critical_services"),
        k_ohm_cmil_per_ft=table.number(constant) * (_K_PER_RESISTIVITY if constant.startswith("res") else 1.0),
    )


def read_source_device(table: Table) -> SourceDevice:
    """Read how far from a charge source its device may stand."""
    key = _length_key(table, "max_distance")
    citation, figures = _cited(table, (key, "is_self_limiting_exempt"))
    return SourceDevice(
        citation=citation,
        figures=figures,
        max_distance_m=_length_m(table, "max_distance"),
        is_self_limiting_exempt=table.flag("is_self_limiting_exempt"),
    )


def read_supports(table: Table) -> SupportRule:
    """Read the largest spacing of supports."""
    names = ("single", "sheathed", "battery")
    citation, figures = _cited(table, tuple(_length_key(table, name) for name in names))
    single_m, sheathed_m, battery_m = (_length_m(table, name) for name in names)
    return SupportRule(
        citation=citation, figures=figures, single_m=single_m, sheathed_m=sheathed_m, battery_m=battery_m
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
    bulkhead = ("bulkhead_tight_in", "bulkhead_tight_parts_of_height", "bulkhead_gap_in")
    citation, figures = _cited(table, ("hazards", "open_space_ft", *bulkhead))
    return IgnitionRule(
        citation=citation,
        figures=figures,
        hazards=table.names("hazards"),
        open_space_m=table.number("open_space_ft") * METRE_PER_FOOT,
        bulkhead_tight_m=metre_from_inch(table.number("bulkhead_tight_in")),
        bulkhead_tight_parts=table.number("bulkhead_tight_parts_of_height"),
        bulkhead_gap_m=metre_from_inch(table.number("bulkhead_gap_in")),
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
        row.refuse(f"a factor of {factor:g} would raise the ampacity", "factor")
    return factor


def _gauge(table: Table, key: str) -> str:
    awg = table.text(key)
    _expect_gauge(table, awg)
    return awg


def _expect_gauge(table: Table, awg: str) -> None:
    try:
        awg_number(awg)
    except ValueError:
        table.refuse(f"{shown(awg)!r} is no wire gauge", awg if table.has(awg) else "")
