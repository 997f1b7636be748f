"""Compare two results: what a change does, hull by hull, and all hulls together. Pure: data in, data out."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from checker.result.claims import claims
from checker.result.compare_aboard import AboardChanges, aboard_changes, units
from checker.result.compare_findings import matches, notes_of, told_of, unassessed_of
from checker.result.compare_limits import limit_moves
from checker.result.compare_places import PlaceChanges, place_changes
from checker.result.comparison import Comparison
from checker.result.gathered_changes import finding_changes, headroom_changes, lost_changes
from checker.result.gathered_differences import differences
from checker.result.gathered_silence import silenced_changes
from checker.result.moved_by_limits import ByLimits, moved_by_limits
from checker.result.retrofit import behind_class, reached_at_same_revision, retrofits
from checker.result.side import Side, SideStudy, SideSubject
from checker.result.subject_change import Change, subject_change

_NO_STUDY = SideStudy("", (), {})
FILES = "the yard's files"


def compared(base: Side, head: Side, thin_fraction: float, held_as_head: Side | None = None) -> Comparison:
    """Return what differs between two sides.

    Args:
        base: What was.
        head: What is.
        thin_fraction: Share of a limit below which headroom is thin.
        held_as_head: The boats of the base side, held against what the head side is held against, where
            that is known: where they differ from the base, no boat has changed.
    """
    changes = list(_changes(base, head, thin_fraction))
    moves = limit_moves(base, head)
    by_limits = ByLimits()
    if moves:
        aside = None if held_as_head is None else list(_changes(base, held_as_head, thin_fraction))
        by_limits = moved_by_limits(changes, aside)
    has_aboard = base.has_aboard and head.has_aboard
    return Comparison(
        base=base.name,
        head=head.name,
        subjects=tuple(subject_change(change) for change in changes),
        findings=finding_changes([*changes, _of_files(base, head)], by_limits),
        silenced=silenced_changes(changes, base, moves),
        lost=lost_changes(changes, base, head),
        headroom=headroom_changes(changes, by_limits),
        limits=moves,
        differences=differences(changes) if has_aboard else None,
        retrofits=retrofits(changes) if has_aboard else (),
        behind=behind_class(changes),
        same_revision=reached_at_same_revision(changes) if has_aboard else (),
    )


def _changes(base: Side, head: Side, thin_fraction: float) -> Iterator[Change]:
    """Yield how each hull and option set changed; alike ones are compared once."""
    olds = {(subject.is_hull, subject.id): subject for subject in base.subjects}
    news = {(subject.is_hull, subject.id): subject for subject in head.subjects}
    known: dict[tuple[str, str], tuple[PlaceChanges, AboardChanges | None]] = {}
    for key in dict.fromkeys((*olds, *news)):
        before, after = olds.get(key), news.get(key)
        old = base.studies[before.study] if before else _NO_STUDY
        new = head.studies[after.study] if after else _NO_STUDY
        if (old.name, new.name) not in known:
            known[old.name, new.name] = _of_studies(old, new, thin_fraction)
        places, aboard = known[old.name, new.name]
        yield _change(before, after, old, new, places, aboard)


def _of_studies(old: SideStudy, new: SideStudy, thin_fraction: float) -> tuple[PlaceChanges, AboardChanges | None]:
    if old is _NO_STUDY or new is _NO_STUDY:
        return PlaceChanges(), None
    both = old.aboard is not None and new.aboard is not None
    aboard = aboard_changes(old.aboard, new.aboard) if both and old.aboard and new.aboard else None
    gone = aboard.gone_names if aboard else frozenset()
    dropped = frozenset(old.sets) - frozenset(new.sets)
    return place_changes(old, new, gone, dropped, thin_fraction), aboard


def _change(
    before: SideSubject | None, after: SideSubject | None, old: SideStudy, new: SideStudy, places: PlaceChanges,
    aboard: AboardChanges | None,
) -> Change:  # fmt: skip
    told_before = told_of(before, old) if before else []
    told_after = told_of(after, new) if after else []
    unassessed_before = unassessed_of(old, before) if before else frozenset()
    unassessed_after = unassessed_of(new, after) if after else frozenset()
    found = matches(told_before, told_after, unassessed_after, _replaced(aboard)) if after else ()
    return Change(
        before=before,
        after=after,
        matches=tuple(found),
        notes=notes_of(new),
        unassessed=tuple(
            one for one in (*new.found, *(after.own if after else ()))
            if not one.is_finding and one.about not in unassessed_before
        ),
        dropped_sets=tuple(one for one in old.sets if before and after and one not in new.sets),
        places=places,
        aboard=aboard,
        units=tuple(units(aboard)) if aboard else (),
        claims=tuple(claims(aboard)) if aboard else (),
    )  # fmt: skip


def _replaced(aboard: AboardChanges | None) -> Callable[[str, str], bool]:
    """Return what tells whether one part may have taken the place of another."""
    if aboard is None:
        return lambda _old, _new: False
    gone, new = aboard.gone_names, aboard.new_names
    return lambda old, now: old.partition(" ")[0] in gone or now.partition(" ")[0] in new


def _of_files(base: Side, head: Side) -> Change:
    """Return how the findings of the yard's files changed, which belong to no boat."""
    sides = [SideSubject(id=FILES, is_hull=False, class_id="", study="", own=side.file_found) for side in (base, head)]
    return _change(sides[0], sides[1], _NO_STUDY, _NO_STUDY, PlaceChanges(), None)
