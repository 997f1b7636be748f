"""Hold how one hull or option set changed, and say whether that is worse or better."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from checker.result.claims import Claim
from checker.result.compare_aboard import AboardChanges, Unit
from checker.result.compare_findings import Match
from checker.result.compare_places import PlaceChanges
from checker.result.comparison import FindingKind, Standing, SubjectChange
from checker.result.side import About, Found, SideSubject


@dataclass(frozen=True, slots=True, kw_only=True)
class Change:
    """Hold how one hull or option set changed; it is new without `before`, and gone without `after`.

    `notes` are the notes of what now passes without figures, `unassessed` what is newly not
    assessed, `dropped_sets` the limit sets it is judged by no more, `unasked` what a finding is gone
    of because nothing looks there any more.
    """

    before: SideSubject | None
    after: SideSubject | None
    matches: tuple[Match, ...]
    notes: Mapping[About, str] = field(default_factory=dict)
    unassessed: tuple[Found, ...] = ()
    dropped_sets: tuple[str, ...] = ()
    places: PlaceChanges = field(default_factory=PlaceChanges)
    aboard: AboardChanges | None = None
    units: tuple[Unit, ...] = ()
    claims: tuple[Claim, ...] = ()
    unasked: frozenset[About] = frozenset()

    @property
    def subject(self) -> SideSubject:
        """Return the subject as it is, or as it was."""
        subject = self.after or self.before
        assert subject is not None
        return subject

    def is_silenced(self, match: Match) -> bool:
        """Tell whether a finding is gone because nothing asks for it any more, not because it was mended."""
        if match.kind is not FindingKind.FIXED or match.before is None:
            return False
        found = match.before.found
        return found.about in self.notes or found.about in self.unasked or found.limit_set in self.dropped_sets


def subject_change(change: Change) -> SubjectChange:
    """Return how a hull or option set stands."""
    subject = change.subject
    return SubjectChange(
        subject.id, subject.is_hull, subject.status, subject.is_built, _standing(change), _is_alike(change)
    )  # fmt: skip


def _standing(change: Change) -> Standing:
    if change.before is None:
        return Standing.NEW
    if change.after is None:
        return Standing.WORSE if change.matches else Standing.GONE  # worse: it could not be studied
    places = change.places
    is_less = places.lost or places.exempt or change.unassessed or change.dropped_sets
    if is_less or any(match.is_worse or change.is_silenced(match) for match in change.matches):
        return Standing.WORSE
    if change.matches:
        return Standing.BETTER  # thinner margins beside a mended finding are told, and are no worse boat
    return Standing.WORSE if places.thinner else Standing.UNCHANGED


def _is_alike(change: Change) -> bool:
    no_places = not (change.places.figures or change.places.lost or change.places.gone)
    is_same_boat = change.aboard is None or change.aboard.is_nothing
    return bool(change.before and change.after and not change.matches and no_places and is_same_boat)
