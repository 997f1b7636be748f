"""Tell changes of what boats are held against from changes of the boats."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from checker.result.compare_findings import Match
from checker.result.comparison import FindingKind
from checker.result.side import About, PlaceKey
from checker.result.subject_change import Change

ANY = ""
"""Stands for every subject."""


@dataclass(frozen=True, slots=True)
class ByLimits:
    """Hold what changed though no boat did: findings and places, by subject, or of any."""

    findings: frozenset[tuple[str, FindingKind, About]] = frozenset()
    places: frozenset[tuple[str, PlaceKey]] = frozenset()

    def has_finding(self, subject: str, match: Match) -> bool:
        """Tell whether a finding changed though the boat did not."""
        key = match.kind, _about(match)
        return (subject, *key) in self.findings or (ANY, *key) in self.findings

    def has_place(self, subject: str, place: PlaceKey) -> bool:
        """Tell whether a place changed though the boat did not."""
        return (subject, place) in self.places or (ANY, place) in self.places


def _about(match: Match) -> About:
    told = match.after or match.before
    assert told is not None
    return told.found.about


def moved_by_limits(changes: Sequence[Change], aside: Sequence[Change] | None) -> ByLimits:
    """Return what changed though no boat did.

    Args:
        changes: How each subject changed.
        aside: How the base's boats change when they are held as the head's are. Without it, what
            changes on a boat that is as it was is taken to change for the same reason on all others.
    """
    if aside is not None:
        return _all_of(aside, of_any=False)
    unchanged = [change for change in changes if change.aboard is not None and change.aboard.is_nothing]
    return _all_of(unchanged, of_any=True)


def _all_of(changes: Iterable[Change], *, of_any: bool) -> ByLimits:
    rows = [(ANY if of_any else change.subject.id, change) for change in changes]
    return ByLimits(
        frozenset((name, match.kind, _about(match)) for name, change in rows for match in change.matches),
        frozenset((name, key) for name, change in rows for key in (*change.places.thinner, *change.places.exempt)),
    )
