"""Load a limit set: the tables of one standard edition, typed and cited.

One folder a set, one file a table, named after the attribute it becomes. Sets are never
blended: nothing is looked up in a second set because the first is silent. Some tables of a set
may be left to the yard, which enters them from its licensed copy; until then what needs them is
not assessed.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, fields
from functools import cache
from pathlib import Path
from typing import Any

from checker.errors import LimitSetError
from checker.limits import rule_files
from checker.limits.citation import Basis, Citation
from checker.limits.fuel_rule import BatteryFuel, read_battery_fuel
from checker.limits.rules import (
    AmpacityRow,
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
    InterruptingRule,
    Judged,
    MaterialRule,
    MinimumSize,
    ProtectionDistance,
    Rule,
    SelfLimitingSource,
    SizeExemptions,
    SourceDevice,
    SupportRule,
)
from checker.limits.table_file import (
    AS_SHIPPED,
    HOUSE,
    TABLES,
    CommonChanges,
    Table,
    common_table,
    house_table,
    read_table,
)
from checker.limits.terminal_rule import TerminalRule, read_terminals
from checker.units import Size

__all__ = [
    "LIMIT_SET_IDS",
    "TABLES",
    "AmpacityRow",
    "AmpacityTable",
    "Applicability",
    "Basis",
    "BreakerRule",
    "BundleRow",
    "BundleRule",
    "Citation",
    "DeviceRating",
    "DeviceVoltage",
    "DropRule",
    "EngineFactor",
    "IgnitionRule",
    "InsulationRule",
    "InterruptingRule",
    "Judged",
    "LimitSet",
    "MaterialRule",
    "MinimumSize",
    "ProtectionDistance",
    "Rule",
    "SelfLimitingSource",
    "SizeExemptions",
    "SourceDevice",
    "SupportRule",
    "bank_figures",
    "least_selectivity_ratio",
    "limit_set_ids",
    "load_limit_set",
    "metric_sizes",
    "read_limit_set",
    "reader_of",
    "standard_ratings",
    "standard_ratings_citations",
    "start_s",
    "surge_s",
    "thin_margin_citation",
    "thin_margin_fraction",
]

LIMIT_SET_IDS = ("cfr33-183-i", "voluntary-dc", "iso-13297")
NO_TABLES: Mapping[str, Table] = {}
NO_CHANGES: Mapping[str, Mapping[str, object]] = {}


@dataclass(frozen=True, slots=True)
class NotEntered:
    """Stand for a table that the yard has not entered; a check that asks it for a figure has a bug.

    A check names the tables that it rests on in its `needs`, and then is not run without them.
    """

    table: str

    def __getattr__(self, name: str) -> Any:
        """Refuse to give a figure."""
        if name.startswith("__"):
            raise AttributeError(name)
        raise LookupError(f"table {self.table} was not entered: the check that asks for it does not name it in `needs`")


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitSet:
    """The limits of one standard edition.

    A rule that is None is one the set is silent on. `entered` are the tables that the yard has
    entered from its own copy, with their files; `not_entered` those that it has yet to enter.
    """

    id: str
    title: str
    basis: Basis
    edition: str
    caution: str
    applies: Applicability
    ampacity: AmpacityTable
    engine_factor: EngineFactor
    bundle: BundleRule
    minimum_size: MinimumSize
    exemptions: SizeExemptions
    distance: ProtectionDistance
    device_rating: DeviceRating
    device_voltage: DeviceVoltage
    breaker: BreakerRule
    self_limiting_source: SelfLimitingSource
    material: MaterialRule
    drop: DropRule | None = None
    insulation: InsulationRule | None = None
    ignition: IgnitionRule | None = None
    interrupting: InterruptingRule | None = None
    terminals: TerminalRule | None = None
    source_device: SourceDevice | None = None
    supports: SupportRule | None = None
    battery_fuel: BatteryFuel | None = None
    entered: tuple[tuple[str, str], ...] = ()
    not_entered: tuple[str, ...] = ()

    def cited(self, tables: Iterable[str]) -> str:
        """Return what some tables rest on, for a set whose tables a yard enters; the cards name the others' clauses."""
        if not self.entered and not self.not_entered:
            return ""
        rules = (getattr(self, table, None) for table in tables)
        texts = (f"{r.citation.basis.value}: {r.citation.text}" for r in rules if isinstance(r, Rule))
        return "; ".join(dict.fromkeys(texts)) or "a table that is not entered"

    def lacks(self, tables: Iterable[str]) -> tuple[str, ...]:
        """Return those of some tables that the yard has yet to enter."""
        return tuple(table for table in tables if table in self.not_entered)

    def citations(self) -> tuple[tuple[str, Citation], ...]:
        """Return every citation with the table, or the figure of a table, it belongs to."""
        found: list[tuple[str, Citation]] = []
        for field in fields(self):
            rule = getattr(self, field.name)
            if isinstance(rule, Rule):
                found.append((field.name, rule.citation))
                found.extend((f"{field.name}: {figure}", citation) for figure, citation in rule.figures)
        return tuple(found)

    @property
    def from_memory_count(self) -> int:
        """Return the number of tables and single figures that nobody read in their document."""
        return sum(citation.basis is Basis.FROM_MEMORY for _, citation in self.citations())

    @property
    def silent_on(self) -> tuple[str, ...]:
        """Return the names of the rules this set does not have, in alphabetical order."""
        unknown = {field.name for field in fields(self) if getattr(self, field.name) is None}
        return tuple(sorted(unknown - set(self.not_entered)))


def limit_set_ids() -> tuple[str, ...]:
    """Return the ids of the shipped limit sets."""
    return LIMIT_SET_IDS


@cache
def load_limit_set(set_id: str) -> LimitSet:
    """Load a shipped limit set, once.

    Raises:
        LimitSetError: If no set has this id, or one of its tables is malformed or cites nothing.
    """
    if set_id not in LIMIT_SET_IDS:
        raise LimitSetError(f"there is no limit set {set_id!r}; known: {', '.join(LIMIT_SET_IDS)}")
    return read_limit_set(TABLES / set_id)


_READERS: Mapping[str, Callable[[Table], Rule]] = {
    "applies": rule_files.read_applies,
    "ampacity": rule_files.read_ampacity,
    "engine_factor": rule_files.read_engine_factor,
    "bundle": rule_files.read_bundle,
    "minimum_size": rule_files.read_minimum_size,
    "exemptions": rule_files.read_exemptions,
    "distance": rule_files.read_distance,
    "device_rating": rule_files.read_device_rating,
    "device_voltage": rule_files.read_device_voltage,
    "breaker": rule_files.read_breaker,
    "self_limiting_source": rule_files.read_self_limiting_source,
    "material": rule_files.read_material,
    "drop": rule_files.read_drop,
    "insulation": rule_files.read_insulation,
    "ignition": rule_files.read_ignition,
    "interrupting": rule_files.read_interrupting,
    "terminals": read_terminals,
    "source_device": rule_files.read_source_device,
    "supports": rule_files.read_supports,
    "battery_fuel": read_battery_fuel,
}
"""What makes each rule from its table. Those that `LimitSet` gives a default are rules that a set may be silent on."""


def reader_of(table: str) -> Callable[[Table], Rule] | None:
    """Return what makes a rule from a table of this name, or None where there is no such table."""
    return _READERS.get(table)


def read_limit_set(
    folder: Path,
    entered: Mapping[str, Table] = NO_TABLES,
    changes: Mapping[str, Mapping[str, object]] = NO_CHANGES,
) -> LimitSet:
    """Read the limit set of a folder.

    A set says in `set.yaml` what it is silent on, and which tables are left to the yard
    (`entered_by_yard`). A missing file could otherwise pass for a rule that the document does
    not have.

    Args:
        folder: The set's folder.
        entered: The tables that the yard has entered, by name.
        changes: By table, the figures that the yard's own rules change.

    Raises:
        LimitSetError: If a table is missing, unknown, malformed or cites nothing.
    """
    head = read_table(folder / "set.yaml")
    head.expect(("id", "title", "basis", "edition", "caution", "silent_on"), ("entered_by_yard",))
    if head.text("id") != folder.name:
        head.refuse(f"the id must be the name of the folder, {folder.name!r}")
    silent_on, left = head.names("silent_on"), tables_left_to_yard(head)
    rules: dict[str, Any] = {}
    for name, read in _READERS.items():
        if name in silent_on:
            continue
        if name not in left:
            table = read_table(folder / f"{name}.yaml")
        elif name in entered:
            table = entered[name]
        else:
            rules[name] = None if name in _may_be_silent() else NotEntered(name)
            continue
        rules[name] = read(table.with_figures(changes[name], HOUSE) if name in changes else table)
    if strange := [name for name in silent_on if name not in _may_be_silent()]:
        head.refuse(f"silent_on may name {', '.join(_may_be_silent())} only, not {strange[0]}")
    limits = LimitSet(
        id=head.text("id"),
        title=head.text("title"),
        basis=head.basis(),
        edition=head.text("edition"),
        caution=head.text("caution"),
        entered=tuple((name, entered[name].where) for name in left if name in entered),
        not_entered=tuple(name for name in left if name not in entered),
        **rules,
    )
    _expect_whole(head, folder, limits)
    return limits


def tables_left_to_yard(head: Table) -> tuple[str, ...]:
    """Return the tables of a set that the yard enters from its own copy, by the set's head."""
    left = head.names("entered_by_yard") if head.has("entered_by_yard") else ()
    if strange := [name for name in left if name not in _READERS or name in head.names("silent_on")]:
        head.refuse(f"entered_by_yard names {strange[0]}, which is no table of the set")
    return left


@cache
def _may_be_silent() -> tuple[str, ...]:
    """Return the rules that a set need not have: those with a default."""
    return tuple(field.name for field in fields(LimitSet) if field.name in _READERS and field.default is None)


def _expect_whole(head: Table, folder: Path, limits: LimitSet) -> None:
    """Refuse a set whose files and tables do not belong together."""
    read = {field.name for field in fields(limits) if isinstance(getattr(limits, field.name), Rule)}
    tables = read - {name for name, _ in limits.entered}
    if strays := sorted({path.stem for path in folder.glob("*.yaml")} - tables - {"set"}):
        head.refuse(f"{strays[0]}.yaml is no table of this set")
    if read >= {"ampacity", "engine_factor"}:
        columns_c = tuple(column_c for column_c, _ in limits.engine_factor.rows)
        if limits.ampacity.columns_c != columns_c:
            head.refuse("ampacity.yaml and engine_factor.yaml differ in their columns")


@cache
def standard_ratings() -> tuple[float, ...]:
    """Return the standard ratings of all published series, A, rising, each once."""
    return rule_files.merged_ratings()


@cache
def standard_ratings_citations() -> tuple[Citation, ...]:
    """Return the citations of the published series of standard ratings."""
    return tuple(series.citation() for series in rule_files.rating_series())


@cache
def thin_margin_fraction(changes: CommonChanges = AS_SHIPPED) -> float:
    """Return the headroom, as a fraction of the limit, below which a pass is told to be thin."""
    table = house_table("thin_margin", changes)
    table.expect(("citation", "thin_margin_percent"))
    return table.number("thin_margin_percent") / 100


@cache
def thin_margin_citation() -> Citation:
    """Return where the thin margin was taken from."""
    return common_table("thin_margin").citation()


@cache
def metric_sizes() -> tuple[Size, ...]:
    """Return the metric sizes that cable is made in, small to large."""
    table = common_table("metric_sizes")
    table.expect(("citation", "sizes_mm2"))
    return tuple(Size(f"{area_mm2:g} mm2", area_mm2) for area_mm2 in table.numbers("sizes_mm2"))


@cache
def least_selectivity_ratio(changes: CommonChanges = AS_SHIPPED) -> float:
    """Return the least ratio of the ratings of two devices in series where a part has no band."""
    table = house_table("selectivity", changes)
    table.expect(("citation", "least_ratio"))
    table.citation()
    return table.number("least_ratio")


@cache
def start_s(changes: CommonChanges = AS_SHIPPED) -> float:
    """Return how long a load may draw its peak while it starts, s."""
    table = house_table("start", changes)
    table.expect(("citation", "start_s"))
    table.citation()
    return table.number("start_s")


@dataclass(frozen=True, slots=True, kw_only=True)
class BankFigures:
    """Figures of common practice for banks and for what draws on them while the boat is left."""

    most_uneven_fraction: float
    strings_without_device: int
    least_days: float
    usable_fraction: float


@cache
def bank_figures(changes: CommonChanges = AS_SHIPPED) -> BankFigures:
    """Return the figures for banks."""
    table = house_table("bank", changes)
    table.expect(("citation", "most_uneven_percent", "strings_without_device", "least_days", "usable_percent"))
    table.citation()
    return BankFigures(
        most_uneven_fraction=table.number("most_uneven_percent") / 100,
        strings_without_device=table.count("strings_without_device"),
        least_days=table.number("least_days"),
        usable_fraction=table.number("usable_percent") / 100,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class AlwaysOnRule:
    """What may stay live with all battery switches off, what must, and the figures of the loss studies."""

    services: tuple[str, ...]
    must_stay_live: tuple[str, ...]
    heavy_return_a: float
    shield_a: float


@cache
def always_on_rule(changes: CommonChanges = AS_SHIPPED) -> AlwaysOnRule:
    """Return the rule for what stays live."""
    table = house_table("always_on", changes)
    names = ("services", "must_stay_live", "heavy_return_a", "shield_a")
    table.expect(("citation", *names), ("figures",))
    table.citation()
    table.figure_citations(names)
    return AlwaysOnRule(
        services=table.names("services"),
        must_stay_live=table.names("must_stay_live"),
        heavy_return_a=table.number("heavy_return_a"),
        shield_a=table.number("shield_a"),
    )


@cache
def surge_s(changes: CommonChanges = AS_SHIPPED) -> float:
    """Return how long a current may last and still be a surge, which ampacities leave out."""
    table = house_table("surge", changes)
    table.expect(("citation", "surge_s"))
    return table.number("surge_s")
