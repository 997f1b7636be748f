"""Hold the tables and rules of a limit set, and look figures up in them.

Nothing here interpolates, rounds or extrapolates: what a table does not print has no limit
in it, and the caller is told so by None.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum
from functools import cache

from checker.limits.citation import Citation
from checker.reading.quantity import read_size
from checker.units import Size, awg_size

# Ampacities are products of decimal factors: 0.7 * 50 may miss 35 by one part in 1e16, and
# the next standard size above "34.999..." must not be judged against that hair.
_HAIR = 1e-9


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """A table or rule with its citation; `figures` are those that rest on something else."""

    citation: Citation
    figures: tuple[tuple[str, Citation], ...] = ()

    def citation_of(self, figure: str) -> Citation:
        """Return the citation of one figure: its own, or else that of the table."""
        return dict(self.figures).get(figure, self.citation)


@dataclass(frozen=True, slots=True, kw_only=True)
class Applicability(Rule):
    """Which boats a set binds by itself; a set that binds none is adopted by a yard."""

    binds_petrol_inboard: bool


@dataclass(frozen=True, slots=True)
class AmpacityRow:
    """One cell of an ampacity table: the figure, and the column and size it was read at ("6 AWG", "16 mm2")."""

    ampacity_a: float
    column_c: float
    size: str


@dataclass(frozen=True, slots=True, kw_only=True)
class AmpacityTable(Rule):
    """Allowable current by conductor size and insulation temperature.

    `rows` run from the smallest size to the largest, all of them gauges or all of them metric;
    each holds amperes in the order of `columns_c`, which rise.
    """

    ambient_c: float
    columns_c: tuple[float, ...]
    rows: tuple[tuple[str, tuple[float, ...]], ...]

    @property
    def sizes(self) -> tuple[str, ...]:
        """Return the names of the table's rows, small to large: gauges as "6", metric sizes as "16 mm2"."""
        return tuple(name for name, _ in self.rows)

    @property
    def is_metric(self) -> bool:
        """Tell whether the rows are metric sizes."""
        return bool(self.rows) and is_metric(self.rows[0][0])

    @property
    def conductor_sizes(self) -> tuple[Size, ...]:
        """Return the sizes of the table, small to large."""
        return tuple(row_size(name) for name in self.sizes)

    def at(self, size: Size, insulation_c: float, *, next_smaller: bool) -> AmpacityRow | None:
        """Return the cell for a conductor, or None where the table has none.

        Args:
            size: Gauge or metric size. One that is not in the table has no figure.
            insulation_c: Between two columns the lower one governs; below all of them, none.
            next_smaller: The yard lets the next smaller row speak for a size of the other kind:
                a gauge for a metric size, a metric size for a gauge.
        """
        columns = [index for index, column_c in enumerate(self.columns_c) if column_c <= insulation_c]
        if not columns:
            return None
        row = self._row(size, next_smaller=next_smaller)
        if row is None:
            return None
        name, amperes = row
        return AmpacityRow(amperes[columns[-1]], self.columns_c[columns[-1]], row_size(name).text)

    def _row(self, size: Size, *, next_smaller: bool) -> tuple[str, tuple[float, ...]] | None:
        if (size.awg is None) is self.is_metric:
            # By its name, not by its copper: a cable's real area is judged apart.
            return next((row for row in self.rows if row[0] == (size.awg or size.text)), None)
        if not next_smaller:
            return None
        return next((row for row in reversed(self.rows) if row_size(row[0]).area_mm2 <= size.area_mm2), None)


def is_metric(row: str) -> bool:
    """Tell whether a row of a table is named by an area: "2.5 mm2"; else it is a gauge: "14"."""
    return row.endswith("mm2")


@cache
def row_size(row: str) -> Size:
    """Return the size of a table's row.

    Raises:
        ValueError: If the name is neither a gauge nor an area above 0.
    """
    return read_size(row) if is_metric(row) else awg_size(row)


@dataclass(frozen=True, slots=True, kw_only=True)
class EngineFactor(Rule):
    """Factor on the ampacity of a conductor that runs through an engine space, by table column."""

    ambient_c: float
    rows: tuple[tuple[float, float], ...]

    def at(self, column_c: float) -> float:
        """Return the factor for a column of the ampacity table.

        Raises:
            ValueError: If the table has no such column.
        """
        for row_c, factor in self.rows:
            if row_c == column_c:
                return factor
        raise ValueError(f"no engine-space factor for a column of {column_c:g} C")

    def citation_at(self, column_c: float) -> Citation:
        """Return the citation of the factor for a column."""
        return self.citation_of(figure_at(column_c))


def figure_at(column_c: float) -> str:
    """Name the figure of a temperature column: "105 C"."""
    return f"{column_c:g} C"


@dataclass(frozen=True, slots=True)
class BundleRow:
    """Factor for a number of bundled conductors; `most` is None in the open last row."""

    least: int
    most: int | None
    factor: float


@dataclass(frozen=True, slots=True, kw_only=True)
class BundleRule(Rule):
    """Factor on ampacity by the number of current-carrying conductors that lie together.

    `rows_from_50_v` are kept beside the others because the law prints them; a boat below
    50 V is never judged by them.
    """

    rows: tuple[BundleRow, ...]
    rows_from_50_v: tuple[BundleRow, ...] = ()

    def factor(self, count: int) -> float:
        """Return the factor for conductors below 50 V, 1.0 where the set asks for none."""
        return _bundle_factor(self.rows, count)

    def factor_from_50_v(self, count: int) -> float:
        """Return the factor for conductors of 50 V and more, 1.0 where the set prints none."""
        return _bundle_factor(self.rows_from_50_v, count)


def _bundle_factor(rows: tuple[BundleRow, ...], count: int) -> float:
    if count < 1:
        raise ValueError(f"a bundle of {count} conductors")
    return next((row.factor for row in reversed(rows) if count >= row.least), 1.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class MinimumSize(Rule):
    """Smallest size of a conductor, alone and in a sheath, and how far it may leave the sheath.

    A single conductor no longer than `single_longer_than_m` may have any size.
    """

    single: Size
    sheathed: Size
    max_out_of_sheath_m: float
    single_longer_than_m: float = 0.0

    @property
    def is_metric(self) -> bool:
        """Tell whether the rule is printed in areas, with which any size can be compared."""
        return self.single.awg is None

    def least(self, *, is_in_sheath: bool, length_m: float) -> Size | None:
        """Return the smallest size allowed to a conductor, None where the set asks for none."""
        if is_in_sheath:
            return self.sheathed
        return None if length_m <= self.single_longer_than_m * (1 + _HAIR) else self.single


@dataclass(frozen=True, slots=True, kw_only=True)
class SizeExemptions(Rule):
    """Conductor roles that the clauses exempt, rule by rule.

    `roles` are free of the minimum size. An exemption from one rule frees from no other. The
    clauses say "below" and "less than": at 1 A, or with 7 in exposed, nothing is exempt.
    """

    roles: tuple[str, ...]
    ampacity_exempt_roles: tuple[str, ...]
    material_exempt_roles: tuple[str, ...]
    protection_exempt_roles: tuple[str, ...]
    electronic_below_a: float
    pigtail_below_m: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ProtectionDistance(Rule):
    """Longest conductor between the source of power and the first overcurrent device.

    `battery_enclosed_m` is for an enclosed conductor that starts on a battery post, or None
    where the set has no such figure. `needs_reason`: the length is granted only where a
    nearer place is impractical, so the data must say why.
    """

    open_m: float
    enclosed_m: float
    battery_enclosed_m: float | None
    needs_reason: bool


class Judged(Enum):
    """What is held against the largest rating allowed for a conductor."""

    SUM = "sum"  # all that can reach the conductor without opening a device, added up
    LARGEST = "largest"  # the largest single device


@dataclass(frozen=True, slots=True, kw_only=True)
class DeviceRating(Rule):
    """Largest rating of the devices that protect a conductor.

    `standard_up_to_factor` is None where the set grants no step to the next standard rating.
    """

    ampacity_factor: float
    standard_up_to_factor: float | None
    standard_ratings_a: tuple[float, ...]
    judged: Judged

    @property
    def judges(self) -> str:
        """Return what is judged, as the table file spells it."""
        return self.judged.value

    def largest_allowed_a(self, ampacity_a: float) -> float:
        """Return the largest rating that may protect a conductor of this ampacity, A."""
        allowed_a = self.ampacity_factor * ampacity_a
        if self.standard_up_to_factor is None:
            return allowed_a
        next_a = next((a for a in self.standard_ratings_a if a >= allowed_a * (1 - _HAIR)), None)
        # Exactly the cap is allowed: the clauses say "does not exceed".
        if next_a is None or next_a > self.standard_up_to_factor * ampacity_a * (1 + _HAIR):
            return allowed_a
        return next_a


@dataclass(frozen=True, slots=True, kw_only=True)
class DropRule(Rule):
    """Voltage drop allowed as a fraction of the nominal voltage, and the constant it is computed with."""

    critical_fraction: float
    general_fraction: float
    critical_services: tuple[str, ...]
    k_ohm_cmil_per_ft: float


@dataclass(frozen=True, slots=True, kw_only=True)
class InsulationRule(Rule):
    """Lowest temperature rating of the insulation, by place."""

    engine_space_min_c: float
    elsewhere_min_c: float


@dataclass(frozen=True, slots=True, kw_only=True)
class MaterialRule(Rule):
    """What a conductor must be made of."""

    materials: tuple[str, ...]
    strands: tuple[str, ...]
    must_be_insulated: bool
    refuses_welding: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class IgnitionRule(Rule):
    """Where a part must be ignition protected, and what isolates it from petrol.

    `hazards` are the zone facts that call for it; `open_space_m` is how wide an open space
    isolates. A bulkhead holds water up to `bulkhead_tight_m` or its height over
    `bulkhead_tight_parts`, whichever is less; above that its gaps are no wider than `bulkhead_gap_m`.
    """

    hazards: tuple[str, ...]
    open_space_m: float
    bulkhead_tight_m: float
    bulkhead_tight_parts: float
    bulkhead_gap_m: float


@dataclass(frozen=True, slots=True, kw_only=True)
class SelfLimitingSource(Rule):
    """Protection of a source's own output: the exemption of a self-limiting one, the cap of others.

    `largest_output_factor` is the largest device rating over the source's maximum output,
    or None where the set names none.
    """

    is_exempt: bool
    largest_output_factor: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceDevice(Rule):
    """Where a charge source is protected: inside it, or by a device within this distance of it."""

    max_distance_m: float
    is_self_limiting_exempt: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class SupportRule(Rule):
    """Largest spacing of supports: of unsheathed conductors, of sheathed ones, and of those from a battery."""

    single_m: float
    sheathed_m: float
    battery_m: float


@dataclass(frozen=True, slots=True, kw_only=True)
class BreakerRule(Rule):
    """What a breaker must be to count as an overcurrent device."""

    must_reset_by_hand: bool
    must_be_trip_free: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class DeviceVoltage(Rule):
    """Lowest voltage rating of a device over the nominal voltage of its circuit."""

    least_nominal_factor: float


@dataclass(frozen=True, slots=True)
class InterruptingRow:
    """Least interrupting capacity up to a number of cranking amperes; None in the open last row."""

    cranking_up_to_a: float | None
    main_a: float
    branch_a: float


@dataclass(frozen=True, slots=True, kw_only=True)
class InterruptingRule(Rule):
    """Least interrupting capacity by the cranking amperes of all batteries that feed the place."""

    rows: tuple[InterruptingRow, ...]

    def least_a(self, cranking_a: float, *, is_main: bool) -> float:
        """Return the least capacity of the first device behind a battery, or of one behind it, A."""
        fitting = (r for r in self.rows if r.cranking_up_to_a is None or cranking_a <= r.cranking_up_to_a)
        row = next(fitting)
        return row.main_a if is_main else row.branch_a
