"""Say what a check is, what it may look at, and how it tells what it found.

A check is a card above a function; its docstring is the text that the tool prints for it. It
sees only its case: no file, no clock, no other check. `judge` alone compares a value with its
limit, so that every measure ends as passed or as a finding and none is forgotten.
"""

from __future__ import annotations

import inspect
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

from checker.boat.hull import Boat, Conductor
from checker.checks.bearing import Bearings
from checker.finding import NOWHERE, Basis, Card, Level, Measure, Outcome, Span, Verdict
from checker.limits.limit_set import LimitSet, thin_margin_fraction
from checker.limits.table_file import AS_SHIPPED, CommonChanges
from checker.network.studies import Studies


@dataclass(frozen=True, slots=True, kw_only=True)
class HouseChange:
    """Describe one limit, level or list that the yard's own rules change.

    `what` names it as the yard wrote it, `limit_set` and `table` are empty where it belongs to
    none. `old` and `new` are in the table's own unit. A change that lets pass what the set
    refuses is loosened; the reports tell it first, and that of a law before all others.
    """

    kind: str
    what: str
    old: str
    new: str
    reason: str
    clause: str
    basis: Basis
    is_loosened: bool
    limit_set: str = ""
    table: str = ""
    check: str = ""
    part: str = ""
    at: Span = field(default=NOWHERE, compare=False, repr=False)

    @property
    def is_of_law(self) -> bool:
        """Tell whether a law stands behind what was changed."""
        return self.basis is Basis.LAW

    @property
    def words(self) -> str:
        """Tell the change in one line: "drop.critical_percent of voluntary-dc is 2.5 instead of 3"."""
        if self.kind in ("always on", "drop group"):
            return f"{self.what}: {self.new}"
        return f"{self.what}{f' of {self.limit_set}' if self.limit_set else ''} is {self.new} instead of {self.old}"


@dataclass(frozen=True, slots=True)
class House:
    """Hold a yard's own rules, and the places where it writes them.

    `next_smaller_awg` lets a gauge speak for a metric size, `next_smaller_mm2` a metric size for
    a gauge. What `always_on_services` and `always_on_circuits` name may stay live with all
    switches off, each for a reason.
    `common` are its figures in the tables that belong to no set; those of a set's tables are in
    the set already. `changes` tells all of them.
    """

    drop_critical: tuple[str, ...] = ()
    next_smaller_awg: bool = False
    next_smaller_mm2: bool = False
    levels: Mapping[str, Level] = field(default_factory=dict)
    always_on_services: Mapping[str, str] = field(default_factory=dict)
    always_on_circuits: Mapping[str, str] = field(default_factory=dict)
    common: CommonChanges = AS_SHIPPED
    changes: tuple[HouseChange, ...] = ()
    at_sets: Mapping[str, Span] = field(default_factory=dict)

    def stays_live(self, service: str, circuit: str) -> str:
        """Return why a circuit may stay live with all switches off by the yard's own rule, or an empty text."""
        return self.always_on_circuits.get(circuit, "") or self.always_on_services.get(service, "")

    def told(self, check: str, limit_set: str, tables: tuple[str, ...]) -> tuple[str, ...]:
        """Return the changes that bear on a finding: of the tables the check rests on, and of its level."""
        return tuple(
            change.words
            for change in self.changes
            if change.check == check or (change.table in tables and change.limit_set in ("", limit_set))
        )


@dataclass(frozen=True)
class Case:
    """Hold what a check may look at: one boat, its studies, one limit set, the yard's rules.

    `every_set` are all sets that the boat is judged by: a remedy must satisfy all of them.
    """

    studies: Studies
    limits: LimitSet
    every_set: tuple[LimitSet, ...]
    house: House
    memo: dict[str, Any] = field(default_factory=dict, compare=False, repr=False)
    """What several checks of one case reckon once: keyed by the name of the reckoning."""

    @cached_property
    def boat(self) -> Boat:
        """Return the boat."""
        return self.studies.boat

    @cached_property
    def thin_fraction(self) -> float:
        """Return the share of a limit below which headroom is thin."""
        return thin_margin_fraction(self.house.common)

    @cached_property
    def bearings(self) -> Bearings:
        """Return what each conductor bears under the limit set."""
        return Bearings(self.boat, self.limits, next_smaller=self.next_smaller)

    @property
    def next_smaller(self) -> bool:
        """Tell whether the next smaller row of the set's table speaks for a size of the other kind."""
        if self.limits.lacks(["ampacity"]):
            return False
        is_metric = self.limits.ampacity.is_metric
        return self.house.next_smaller_mm2 if is_metric else self.house.next_smaller_awg

    def under(self, limits: LimitSet) -> Case:
        """Return the same case judged by another limit set."""
        if limits is self.limits:
            return self
        key = f"under {limits.id}"
        if key not in self.memo:
            self.memo[key] = Case(self.studies, limits, self.every_set, self.house)
        other: Case = self.memo[key]
        return other


@dataclass(frozen=True, slots=True)
class Told:
    """Tell a finding: what is wrong, what would mend it, the path that shows it, the inputs it rests on."""

    fault: str
    remedy: str
    path: tuple[str, ...] = ()
    inputs: tuple[tuple[str, str], ...] = ()
    note: str = ""
    also_at: tuple[Span, ...] = ()


@dataclass(frozen=True, slots=True)
class Check:
    """Join a card with the function that looks. `is_per_set` checks run once for each limit set.

    `needs` are the tables of the limit set, and of those that belong to no set, that it rests on.
    """

    card: Card
    run: Callable[[Case], Iterator[Outcome]] = field(repr=False)
    is_per_set: bool
    needs: tuple[str, ...] = ()

    @property
    def id(self) -> str:
        """Return the check's id."""
        return self.card.id

    def look(self, case: Case) -> Iterator[Outcome]:
        """Run the check; without a table that it rests on, tell once which the yard has to enter."""
        lacking = case.limits.lacks(self.needs)
        if not lacking:
            yield from self.run(case)
            return
        limit_set = case.limits.id
        files = [f"{table}.yaml" for table in lacking]
        yield self.not_assessed(
            case,
            Place(limit_set, case.house.at_sets.get(limit_set, NOWHERE)),
            f"nothing is judged here: {_listed(lacking)} of {limit_set} {'is' if len(lacking) == 1 else 'are'} "
            "not entered",
            f"{_listed(files)} in limits/{limit_set}/, from your licensed copy",
        )

    def judge(
        self, case: Case, place: Place, measure: Measure, otherwise: Callable[[], Told], note: str = ""
    ) -> Outcome:
        """Compare a value with its limit; `otherwise` tells the finding if the limit is not kept."""
        if measure.holds:
            return self._passed(case, place, measure, note, is_thin=is_thin(measure, case.thin_fraction))
        told = otherwise()
        return self.found(case, place, told, measure)

    def found(self, case: Case, place: Place, told: Told, measure: Measure | None = None) -> Outcome:
        """Return a finding."""
        return self._news(
            case, place, Verdict.FINDING, measure=measure, fault=told.fault, remedy=told.remedy,
            path=told.path, inputs=told.inputs, note=told.note, also_at=told.also_at,
            house=case.house.told(self.card.id, self._set_of(case), self.needs) if case.house.changes else (),
        )  # fmt: skip

    def passed(self, case: Case, place: Place, note: str = "") -> Outcome:
        """Return a pass that has no figure, or that an exemption gives; the note says which."""
        return self._passed(case, place, None, note, is_thin=False)

    def not_assessed(self, case: Case, place: Place, fault: str, missing: str) -> Outcome:
        """Return that a place could not be judged, and the field to fill in."""
        return self._news(case, place, Verdict.NOT_ASSESSED, fault=fault, missing=missing)

    def _set_of(self, case: Case) -> str:
        return case.limits.id if self.is_per_set else ""

    def _passed(self, case: Case, place: Place, measure: Measure | None, note: str, *, is_thin: bool) -> Outcome:
        # By position, since nearly all outcomes of a fleet are made here and names cost a third more.
        return Outcome(
            Verdict.PASSED, self.card.id, self.card.level, place.part, place.at,
            case.limits.id if self.is_per_set else "", place.circuit, measure, "", "", place.state, (), "", note,
            (), (), is_thin,
        )  # fmt: skip

    def _news(self, case: Case, place: Place, verdict: Verdict, **facts: Any) -> Outcome:
        limit_set = self._set_of(case)
        return Outcome(
            verdict=verdict, check=self.card.id, level=case.house.levels.get(self.card.id, self.card.level),
            part=place.part, at=place.at, limit_set=limit_set, circuit=place.circuit, state=place.state,
            rests_on=case.limits.cited(self.needs) if limit_set and self.needs else "", **facts,
        )  # fmt: skip


def _listed(names: tuple[str, ...] | list[str]) -> str:
    """List names in a sentence: a, b and c."""
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


@dataclass(frozen=True, slots=True)
class Place:
    """Say where a check looks: the part, its circuit, the line a person would edit, the switch state."""

    part: str
    at: Span = NOWHERE
    circuit: str = ""
    state: str = ""


def check(
    *,
    title: str,
    basis: Basis,
    citation: str,
    why: str,
    level: Level = Level.ERROR,
    catalogue: tuple[str, ...] = (),
    formula: str = "",
    exemptions: str = "",
    caution: str = "",
    per_set: bool = False,
    needs: tuple[str, ...] = (),
) -> Callable[[Callable[[Case], Iterator[Outcome]]], Check]:
    """Make a check of the function below; its id is the function's name with hyphens."""

    def decorate(function: Callable[[Case], Iterator[Outcome]]) -> Check:
        card = Card(
            id=function.__name__.replace("_", "-"),
            title=title,
            level=level,
            basis=basis,
            citation=citation,
            why=why,
            text=inspect.cleandoc(function.__doc__ or ""),
            formula=formula,
            exemptions=exemptions,
            caution=caution,
            catalogue=catalogue,
            can_be_waived=True,
        )
        return Check(card, function, per_set, needs)

    return decorate


def at_conductor(conductor: Conductor, at: Span | None = None, state: str = "") -> Place:
    """Return the place of a conductor: by default the line of its size."""
    return Place(conductor.id, conductor.at_size if at is None else at, conductor.circuit, state)


def is_thin(measure: Measure, thin_fraction: float) -> bool:
    """Tell whether a limit is kept with little to spare."""
    if measure.is_stepped:
        return False
    headroom = measure.headroom_fraction
    return headroom is not None and 0 <= headroom < thin_fraction
