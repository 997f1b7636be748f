"""Say what a check is, what it may look at, and how it tells what it found.

A check is a card above a function; its docstring is the text that the tool prints for it. It
sees only its case: no file, no clock, no other check. `judge` alone compares a value with its
limit, so that every measure ends as passed or as a finding and none is forgotten.
"""

from __future__ import annotations

import inspect
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

from checker.boat.hull import Boat, Conductor
from checker.checks.bearing import Bearings
from checker.finding import NOWHERE, Basis, Card, Level, Measure, Outcome, Span, Verdict
from checker.limits.limit_set import LimitSet, thin_margin_fraction
from checker.network.studies import Studies


@dataclass(frozen=True, slots=True)
class House:
    """Hold a yard's own rules. They may only tighten what a limit set asks."""

    drop_critical: tuple[str, ...] = ()
    next_smaller_awg: bool = False


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

    @property
    def boat(self) -> Boat:
        """Return the boat."""
        return self.studies.boat

    @cached_property
    def bearings(self) -> Bearings:
        """Return what each conductor bears under the limit set."""
        return Bearings(self.boat, self.limits, next_smaller_awg=self.house.next_smaller_awg)

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
    """Join a card with the function that looks. `is_per_set` checks run once for each limit set."""

    card: Card
    run: Callable[[Case], Iterator[Outcome]] = field(repr=False)
    is_per_set: bool

    @property
    def id(self) -> str:
        """Return the check's id."""
        return self.card.id

    def judge(
        self, case: Case, place: Place, measure: Measure, otherwise: Callable[[], Told], note: str = ""
    ) -> Outcome:
        """Compare a value with its limit; `otherwise` tells the finding if the limit is not kept."""
        if measure.holds:
            return self._outcome(case, place, Verdict.PASSED, measure=measure, note=note)
        told = otherwise()
        return self.found(case, place, told, measure)

    def found(self, case: Case, place: Place, told: Told, measure: Measure | None = None) -> Outcome:
        """Return a finding."""
        return self._outcome(
            case, place, Verdict.FINDING, measure=measure, fault=told.fault, remedy=told.remedy,
            path=told.path, inputs=told.inputs, note=told.note, also_at=told.also_at,
        )  # fmt: skip

    def passed(self, case: Case, place: Place, note: str = "") -> Outcome:
        """Return a pass that has no figure, or that an exemption gives; the note says which."""
        return self._outcome(case, place, Verdict.PASSED, note=note)

    def not_assessed(self, case: Case, place: Place, fault: str, missing: str) -> Outcome:
        """Return that a place could not be judged, and the field to fill in."""
        return self._outcome(case, place, Verdict.NOT_ASSESSED, fault=fault, missing=missing)

    def _outcome(
        self, case: Case, place: Place, verdict: Verdict, *, measure: Measure | None = None, fault: str = "",
        remedy: str = "", path: tuple[str, ...] = (), inputs: tuple[tuple[str, str], ...] = (),
        missing: str = "", note: str = "", also_at: tuple[Span, ...] = (),
    ) -> Outcome:  # fmt: skip
        return Outcome(
            verdict=verdict, check=self.card.id, level=self.card.level, part=place.part, at=place.at,
            limit_set=case.limits.id if self.is_per_set else "", circuit=place.circuit, measure=measure,
            fault=fault, remedy=remedy, state=place.state, path=path, missing=missing, note=note, inputs=inputs,
            also_at=also_at,
        )  # fmt: skip


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
        return Check(card, function, per_set)

    return decorate


def at_conductor(conductor: Conductor, at: Span | None = None, state: str = "") -> Place:
    """Return the place of a conductor: by default the line of its size."""
    return Place(conductor.id, conductor.at_size if at is None else at, conductor.circuit, state)


def is_thin(measure: Measure | None) -> bool:
    """Tell whether a limit is kept with little to spare."""
    if measure is None or measure.is_stepped or not measure.holds:
        return False
    headroom = measure.headroom_fraction
    return headroom is not None and headroom < thin_margin_fraction()
