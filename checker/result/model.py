"""Hold the result of a run: one study for each distinct boat, and every hull and option set with it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from checker.boat.aboard import Aboard
from checker.boat.assemble import Signature
from checker.checks.check import HouseChange
from checker.finding import Level, Outcome, Span, Verdict
from checker.limits.measuring_rule import MeasuringRule
from checker.network.ladder import Rung
from checker.result.measured import Judged
from checker.result.sheet import Step
from checker.result.sheet_file import Sheet


@dataclass(frozen=True, slots=True)
class EnteredTable:
    """Tell a table of a limit set that the yard has entered, where it was read, and the yard's file."""

    table: str
    document: str
    clause: str
    edition: str
    page: str
    basis: str
    file: str


@dataclass(frozen=True, slots=True)
class SetUse:
    """Tell a limit set that a boat is judged by, why, and how many of its figures are from memory.

    `entered` are the tables that the yard has entered, `not_entered` those it has yet to enter.
    """

    id: str
    title: str
    why: str
    from_memory: int
    caution: str
    entered: tuple[EnteredTable, ...] = ()
    not_entered: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Study:
    """Hold what was found on one distinct boat, in report order, before any waiver.

    `name` is the first subject that has this content. `news` are the outcomes that did not
    pass, `passes` those that did; `thin` counts the passes with little headroom.
    """

    name: str
    news: tuple[Outcome, ...]
    passes: tuple[Outcome, ...]
    thin: int
    sets: tuple[SetUse, ...]
    ladder: tuple[Rung, ...] = ()
    tightest: Mapping[str, Outcome] = field(default_factory=dict)
    aboard: Aboard = field(default_factory=Aboard)


@dataclass(frozen=True, slots=True)
class Acceptance:
    """Tell the waiver that accepts a finding."""

    waiver: str
    reason: str
    approved_by: str
    expires: str
    evidence: str
    at: Span


@dataclass(frozen=True, slots=True)
class Handover:
    """Hold what belongs to the hand-over of one hull: the plan of its test, what was measured, who signed.

    `content` is the mark of its wiring, `tables` that of what judges it, `rule` says how far measured
    figures may be off; `judged` is None without a sheet.
    """

    steps: tuple[Step, ...]
    content: str
    tables: str
    sheet: Sheet | None
    judged: Judged | None
    signed: Signature | None
    rule: MeasuringRule


@dataclass(frozen=True, slots=True, kw_only=True)
class SubjectResult:
    """Hold the result of one hull or option set.

    `news` are the study's with waivers applied and what is found of this subject alone, `own`,
    in report order; `passes`, `passed` and `thin` are the study's, shared by all alike subjects.
    `passes` is empty where nobody asked for the list, `passed` counts them all the same.
    `alike` are the other subjects with the same content, `house` the yard's own rules that bear
    on it; `handover` is None where the hull's test was not planned.
    """

    id: str
    is_hull: bool
    class_id: str
    class_name: str
    revision: int
    class_revision: int
    options: tuple[str, ...]
    status: str
    changes: tuple[str, ...]
    study: str
    alike: tuple[str, ...]
    sets: tuple[SetUse, ...]
    news: tuple[Outcome, ...]
    own: tuple[Outcome, ...]
    passes: tuple[Outcome, ...]
    passed: int
    thin: int
    ladder: tuple[Rung, ...]
    tightest: Mapping[str, Outcome]
    accepted: dict[str, Acceptance]
    house: tuple[HouseChange, ...] = ()
    handover: Handover | None = None

    @property
    def outcomes(self) -> tuple[Outcome, ...]:
        """Return all outcomes in report order."""
        return (*self.news, *self.passes)

    @property
    def open_errors(self) -> int:
        """Count the findings at error level that no waiver accepts."""
        return count_open_errors(self.news)

    def count(self, verdict: Verdict) -> int:
        """Count the outcomes with a verdict."""
        return self.passed if verdict is Verdict.PASSED else sum(o.verdict is verdict for o in self.news)


@dataclass(frozen=True, slots=True, kw_only=True)
class FleetResult:
    """Hold everything a run found; every output renders this and judges nothing.

    `marks` tell by limit set and table what the limit tables say, `sizes` how the yard lets one kind
    of conductor size speak for the other.
    """

    yard: str
    tool_version: str
    subjects: tuple[SubjectResult, ...]
    studies: tuple[Study, ...]
    file_outcomes: tuple[Outcome, ...]
    unstudied: tuple[str, ...]
    house: tuple[HouseChange, ...] = ()
    marks: Mapping[str, Mapping[str, str]] = field(default_factory=dict)
    sizes: tuple[tuple[str, str], ...] = ()

    @property
    def open_errors(self) -> int:
        """Count all open errors: each hull's and option set's, and those of files."""
        return count_open_errors(self.file_outcomes) + sum(subject.open_errors for subject in self.subjects)

    @property
    def is_clean(self) -> bool:
        """Tell whether nothing is open at error level and everything was studied."""
        return self.open_errors == 0 and not self.unstudied


def count_open_errors(outcomes: Iterable[Outcome]) -> int:
    """Count findings at error level."""
    return sum(o.verdict is Verdict.FINDING and o.level is Level.ERROR for o in outcomes)
