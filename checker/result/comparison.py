"""Hold what a change does: the difference between two results, grouped over hulls, worst first."""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import Enum

from checker.boat.aboard import Fact
from checker.result.side import Figures, Found

FILES = "the yard's files"
"""Stands for a subject where a finding is of no hull and no option set."""


class Standing(Enum):
    """Say how a hull or option set stands after a change."""

    WORSE = "worse"
    BETTER = "better"
    UNCHANGED = "unchanged"
    NEW = "new"
    GONE = "gone"


@dataclass(frozen=True, slots=True)
class SubjectChange:
    """Tell how one hull or option set stands; `is_alike` where not one figure, fact or word differs."""

    id: str
    is_hull: bool
    status: str
    is_built: bool
    standing: Standing
    is_alike: bool = False


class FindingKind(Enum):
    """Say what became of a finding."""

    NEW = "new"
    ACCEPTED = "accepted"
    FIXED = "fixed"
    MOVED = "moved"
    LOWERED = "lowered"
    UNASSESSED = "not assessed any more"


@dataclass(frozen=True, slots=True, kw_only=True)
class FindingChange:
    """Tell what became of one finding, on the subjects that share it.

    `found` is the finding as it is now, or as it was where it is gone; of several that differ in
    figures only, the worst. `was` tells what it was before, where it was something: accepted, or
    at another level. `before` and `after` are its figures. `by_limits`: the boat did not change,
    what it is held against did.
    """

    kind: FindingKind
    found: Found
    on: tuple[str, ...]
    limit_sets: tuple[str, ...] = ()
    was: str = ""
    moved_from: str = ""
    before: Figures | None = None
    after: Figures | None = None
    is_worse: bool = False
    by_limits: bool = False


class SilencedKind(Enum):
    """Say what makes the checks say less."""

    RULE = "rule of the yard"
    LIMIT_SET = "limit set"
    WAIVER_ADDED = "new waiver"
    WAIVER_WIDENED = "wider waiver"
    WAIVER_EXTENDED = "longer waiver"
    LEVEL = "level"
    FACT = "fact"
    EXEMPTION = "exemption"


@dataclass(frozen=True, slots=True)
class FactChange:
    """Tell one fact that changed; None where it was not written. `in_feet`: the yard measures in feet here."""

    key: str
    old: Fact | None
    new: Fact | None
    in_feet: bool = False


@dataclass(frozen=True, slots=True)
class Silenced:
    """Tell what makes the checks say less: what it is, where, what it said and says, and why.

    `fact` is set where it is a fact of the boat. `hides` are checks that say less, each with the part.
    """

    kind: SilencedKind
    where: str
    old: str
    new: str
    reason: str
    on: tuple[str, ...]
    fact: FactChange | None = None
    hides: tuple[tuple[str, str], ...] = ()


class LostKind(Enum):
    """Say what is looked at no more."""

    SUBJECT = "hull or option set"
    STUDY = "not studied"
    CIRCUIT = "circuit"
    PLACES = "places"
    UNASSESSED = "not assessed"


@dataclass(frozen=True, slots=True)
class Lost:
    """Tell what is looked at no more: of a kind, these; `check` is set for places."""

    kind: LostKind
    check: str
    names: tuple[str, ...]
    on: tuple[str, ...]
    why: str = ""


@dataclass(frozen=True, slots=True)
class Headroom:
    """Tell a place that still passes and has lost headroom near its limit; `checks` are those with one figure."""

    checks: tuple[str, ...]
    limit_set: str
    part: str
    before: Figures
    after: Figures
    on: tuple[str, ...]
    by_limits: bool = False


@dataclass(frozen=True, slots=True)
class LimitMove:
    """Tell a change of what boats are held against: a table, the tool, a rule of the yard."""

    kind: str
    what: str
    old: str
    new: str
    is_loosened: bool = False
    reason: str = ""


@dataclass(frozen=True, slots=True)
class FigureChange:
    """Tell a figure that changed with the boat: of all subjects the one nearest its limit."""

    check: str
    part: str
    before: Figures
    after: Figures


class DifferenceKind(Enum):
    """Say what became of a thing aboard."""

    CHANGED = "changed"
    ADDED = "added"
    REMOVED = "removed"


@dataclass(frozen=True, slots=True)
class Difference:
    """Tell what changed aboard, in one circuit or thing, on the subjects where it changed alike.

    `about` is a circuit, or a thing with its kind; `things` are the parts of it that changed,
    empty where all of a circuit's conductors did.
    """

    kind: DifferenceKind
    about: str
    things: tuple[str, ...]
    facts: tuple[FactChange, ...]
    on: tuple[str, ...]
    figures: tuple[FigureChange, ...] = ()


@dataclass(frozen=True, slots=True)
class Retrofit:
    """Tell what a change of the class means for hulls that are already built."""

    hulls: tuple[str, ...]
    status: str
    work: tuple[Difference, ...]
    mends: tuple[str, ...]
    makes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Behind:
    """Tell a built hull that is behind its class, and whether it was so before."""

    hull: str
    revision: int
    class_revision: int
    is_new: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """Hold all that differs between two results."""

    base: str
    head: str
    subjects: tuple[SubjectChange, ...]
    findings: tuple[FindingChange, ...] = ()
    silenced: tuple[Silenced, ...] = ()
    lost: tuple[Lost, ...] = ()
    headroom: tuple[Headroom, ...] = ()
    limits: tuple[LimitMove, ...] = ()
    differences: tuple[Difference, ...] | None = None
    retrofits: tuple[Retrofit, ...] = ()
    behind: tuple[Behind, ...] = ()
    same_revision: tuple[str, ...] = field(default=())

    def of_kind(self, *kinds: FindingKind) -> tuple[FindingChange, ...]:
        """Return the findings of which this became."""
        return tuple(change for change in self.findings if change.kind in kinds)

    @property
    def new_errors(self) -> tuple[FindingChange, ...]:
        """Return the new findings at error level."""
        return tuple(change for change in self.of_kind(FindingKind.NEW) if change.found.level == "error")

    @property
    def is_worse(self) -> bool:
        """Tell whether anything is worse: a hull or option set, what is looked at, or what is silenced."""
        is_any = any(subject.standing is Standing.WORSE for subject in self.subjects)
        return bool(is_any or self.new_errors or self.lost or self.silenced or self.headroom)
