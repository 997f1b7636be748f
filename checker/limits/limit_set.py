"""Load a limit set: the tables of one standard edition, typed and cited.

One folder a set, one file a table, named after the attribute it becomes. Sets are never
blended: nothing is looked up in a second set because the first is silent.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields
from functools import cache
from pathlib import Path
from typing import TypeVar

from checker.errors import LimitSetError
from checker.limits import rule_files
from checker.limits.citation import Basis, Citation
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
)
from checker.limits.table_file import TABLES, Table, common_table, read_table
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
    "bank_figures",
    "least_selectivity_ratio",
    "limit_set_ids",
    "load_limit_set",
    "metric_sizes",
    "read_limit_set",
    "standard_ratings",
    "standard_ratings_citations",
    "start_s",
    "surge_s",
    "thin_margin_citation",
    "thin_margin_fraction",
]

LIMIT_SET_IDS = ("cfr33-183-i", "voluntary-dc")

R = TypeVar("R", bound=Rule)


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitSet:
    """The limits of one standard edition. A rule that is None is one the set is silent on."""

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
    drop: DropRule | None
    insulation: InsulationRule | None
    ignition: IgnitionRule | None
    interrupting: InterruptingRule | None

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
        return tuple(sorted(field.name for field in fields(self) if getattr(self, field.name) is None))


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


def read_limit_set(folder: Path) -> LimitSet:
    """Read the limit set of a folder.

    A set says in `set.yaml` what it is silent on. A missing file could otherwise pass for a
    rule that the document does not have.

    Raises:
        LimitSetError: If a table is missing, unknown, malformed or cites nothing.
    """
    head = read_table(folder / "set.yaml")
    head.expect(("id", "title", "basis", "edition", "caution", "silent_on"))
    if head.text("id") != folder.name:
        head.refuse(f"the id must be the name of the folder, {folder.name!r}")
    silent_on = head.names("silent_on")

    def rule(name: str, read: Callable[[Table], R]) -> R:
        return read(read_table(folder / f"{name}.yaml"))

    def rule_or_none(name: str, read: Callable[[Table], R]) -> R | None:
        return None if name in silent_on else rule(name, read)

    limits = LimitSet(
        id=head.text("id"),
        title=head.text("title"),
        basis=head.basis(),
        edition=head.text("edition"),
        caution=head.text("caution"),
        applies=rule("applies", rule_files.read_applies),
        ampacity=rule("ampacity", rule_files.read_ampacity),
        engine_factor=rule("engine_factor", rule_files.read_engine_factor),
        bundle=rule("bundle", rule_files.read_bundle),
        minimum_size=rule("minimum_size", rule_files.read_minimum_size),
        exemptions=rule("exemptions", rule_files.read_exemptions),
        distance=rule("distance", rule_files.read_distance),
        device_rating=rule("device_rating", rule_files.read_device_rating),
        device_voltage=rule("device_voltage", rule_files.read_device_voltage),
        breaker=rule("breaker", rule_files.read_breaker),
        self_limiting_source=rule("self_limiting_source", rule_files.read_self_limiting_source),
        material=rule("material", rule_files.read_material),
        drop=rule_or_none("drop", rule_files.read_drop),
        insulation=rule_or_none("insulation", rule_files.read_insulation),
        ignition=rule_or_none("ignition", rule_files.read_ignition),
        interrupting=rule_or_none("interrupting", rule_files.read_interrupting),
    )
    _expect_whole(head, folder, limits)
    return limits


def _expect_whole(head: Table, folder: Path, limits: LimitSet) -> None:
    """Refuse a set whose files and tables do not belong together."""
    if tuple(sorted(head.names("silent_on"))) != limits.silent_on:
        head.refuse("silent_on may name drop, insulation, ignition and interrupting only")
    tables = {field.name for field in fields(limits) if isinstance(getattr(limits, field.name), Rule)}
    if strays := sorted({path.stem for path in folder.glob("*.yaml")} - tables - {"set"}):
        head.refuse(f"{strays[0]}.yaml is no table of this set")
    if limits.ampacity.columns_c != tuple(column_c for column_c, _ in limits.engine_factor.rows):
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
def thin_margin_fraction() -> float:
    """Return the headroom, as a fraction of the limit, below which a pass is told to be thin."""
    table = common_table("thin_margin")
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
def least_selectivity_ratio() -> float:
    """Return the least ratio of the ratings of two devices in series where a part has no band."""
    table = common_table("selectivity")
    table.expect(("citation", "least_ratio"))
    table.citation()
    return table.number("least_ratio")


@cache
def start_s() -> float:
    """Return how long a load may draw its peak while it starts, s."""
    table = common_table("start")
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
def bank_figures() -> BankFigures:
    """Return the figures for banks."""
    table = common_table("bank")
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
def always_on_rule() -> AlwaysOnRule:
    """Return the rule for what stays live."""
    table = common_table("always_on")
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
def surge_s() -> float:
    """Return how long a current may last and still be a surge, which ampacities leave out."""
    table = common_table("surge")
    table.expect(("citation", "surge_s"))
    return table.number("surge_s")
