"""Look at a fleet as a whole: who is ready, where it is tightest, what is open, and what built hulls have to get."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass

from checker.boat.assemble import STATUSES
from checker.finding import Card, Level, Outcome, Verdict
from checker.result.cards import CLASS_REVISION
from checker.result.gate import Gate, gate
from checker.result.gather import natural
from checker.result.model import FleetResult, SubjectResult
from checker.result.side import BUILT

_SHARED = ("classes/", "parts/")
"""Folders of what all hulls of a class, or of the yard, have in common."""


@dataclass(frozen=True, slots=True)
class HullView:
    """Hold one hull: its gate, None where its test was not planned, and where it has least to spare.

    `tightest` is the outcome with the smallest headroom, findings among them; None where nothing was measured.
    """

    subject: SubjectResult
    gate: Gate | None
    tightest: Outcome | None


@dataclass(frozen=True, slots=True)
class CheckView:
    """Hold the open findings of one check at one level: how many places on how many hulls and option sets."""

    check: str
    title: str
    level: Level
    hulls: tuple[str, ...]
    option_sets: tuple[str, ...]
    places: int


@dataclass(frozen=True, slots=True)
class RetrofitView:
    """Hold what one built hull has to get: the revisions it lacks, and open findings that its class brought."""

    hull: str
    status: str
    behind: tuple[Outcome, ...]
    from_class: tuple[Outcome, ...]


@dataclass(frozen=True, slots=True)
class FleetView:
    """Hold the fleet: hulls in groups by status, open findings by check, and the retrofit list."""

    result: FleetResult
    by_status: tuple[tuple[str, tuple[HullView, ...]], ...]
    checks: tuple[CheckView, ...]
    retrofit: tuple[RetrofitView, ...]

    @property
    def hulls(self) -> tuple[HullView, ...]:
        """Return all hulls that were studied."""
        return tuple(hull for _, hulls in self.by_status for hull in hulls)


def fleet_view(result: FleetResult, cards: Mapping[str, Card]) -> FleetView:
    """Return the view of a fleet whose passes are listed and whose tests are planned."""
    hulls = [subject for subject in result.subjects if subject.is_hull]
    tightest = {study.name: smallest_headroom((*study.news, *study.passes)) for study in result.studies}
    views = [HullView(hull, gate(result, hull.id), _tightest(hull, tightest[hull.study])) for hull in hulls]
    groups = ((status, tuple(view for view in views if view.subject.status == status)) for status in STATUSES)
    return FleetView(
        result=result,
        by_status=tuple((status, members) for status, members in groups if members),
        checks=tuple(_checks(result, cards)),
        retrofit=tuple(_retrofits(hulls)),
    )


def _tightest(hull: SubjectResult, of_study: Outcome | None) -> Outcome | None:
    """Return the outcome of a hull with the smallest headroom, with the verdict that its waivers give it."""
    return smallest_headroom([*hull.news, *([of_study] if of_study and of_study.verdict is Verdict.PASSED else [])])


def smallest_headroom(outcomes: Iterable[Outcome]) -> Outcome | None:
    """Return the outcome with the smallest headroom of those that have any to tell: no pick from a row of sizes."""
    known = ((headroom, o) for o in outcomes if (headroom := headroom_fraction(o)) is not None)
    found = min(known, key=lambda row: (row[0], natural(row[1].part), row[1].check, row[1].limit_set), default=None)
    return None if found is None else found[1]


def headroom_fraction(outcome: Outcome) -> float | None:
    """Return the headroom of an outcome, or None where it has none to tell."""
    measure = outcome.measure
    return None if measure is None or measure.is_stepped else measure.headroom_fraction


def _checks(result: FleetResult, cards: Mapping[str, Card]) -> list[CheckView]:
    """Count the open findings of each check, worst level first, then the most hulls."""
    places: dict[tuple[str, Level], dict[tuple[object, ...], None]] = {}
    on: dict[tuple[str, Level], dict[str, bool]] = {}
    for name, is_hull, outcome in _open(result):
        key = (outcome.check, outcome.level)
        places.setdefault(key, {})[outcome.part, outcome.at] = None
        if name:
            on.setdefault(key, {})[name] = is_hull
    found = [
        CheckView(
            check, cards[check].title, level,
            tuple(name for name, is_hull in on.get((check, level), {}).items() if is_hull),
            tuple(name for name, is_hull in on.get((check, level), {}).items() if not is_hull),
            len(places[check, level]),
        )
        for check, level in places
    ]  # fmt: skip
    return sorted(found, key=lambda one: (one.level.rank, -len(one.hulls), one.check))


def _open(result: FleetResult) -> Iterator[tuple[str, bool, Outcome]]:
    for outcome in result.file_outcomes:
        yield "", False, outcome
    for subject in result.subjects:
        for outcome in subject.news:
            if outcome.verdict is Verdict.FINDING:
                yield subject.id, subject.is_hull, outcome


def _retrofits(hulls: Iterable[SubjectResult]) -> Iterator[RetrofitView]:
    """Yield the built hulls that are behind their class, or whose open findings stand in files of all hulls."""
    for hull in hulls:
        open_ones = [o for o in hull.news if o.verdict is Verdict.FINDING]
        behind = tuple(o for o in open_ones if o.check == CLASS_REVISION.id)
        shared = tuple(o for o in open_ones if o.at.file.startswith(_SHARED) and o.check != CLASS_REVISION.id)
        if hull.status in BUILT and (behind or shared):
            yield RetrofitView(hull.id, hull.status, behind, shared)
