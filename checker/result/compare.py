"""Compare two results: what a change does, hull by hull, and all hulls together. Pure: data in, data out."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace

from checker.result.cards import NOT_STUDIED
from checker.result.claims import Claim, claims
from checker.result.compare_aboard import AboardChanges, aboard_changes, units
from checker.result.compare_findings import Match, Told, matches, notes_of, told_of, unassessed_of
from checker.result.compare_limits import limit_moves
from checker.result.compare_places import PlaceChanges, bare, place_changes
from checker.result.comparison import FILES, Comparison, FindingKind
from checker.result.gathered_changes import finding_changes, headroom_changes, lost_changes
from checker.result.gathered_differences import differences
from checker.result.gathered_silence import silenced_changes
from checker.result.moved_by_limits import ByLimits, moved_by_limits
from checker.result.retrofit import behind_class, reached_at_same_revision, retrofits
from checker.result.side import About, Found, Side, SideStudy, SideSubject
from checker.result.subject_change import Change, subject_change

_NO_STUDY = SideStudy("", (), {})


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
        silenced=silenced_changes(changes, base, moves, by_limits),
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
        change = _change(before, after, old, new, places, aboard)
        yield replace(change, matches=(_UNSTUDIED,)) if _is_unstudied(change, head) else change


_UNSTUDIED = Match(
    FindingKind.NEW, None, is_worse=True, after=Told(Found(
        is_finding=True, check=NOT_STUDIED.id, level=NOT_STUDIED.level.value, part="all", fault="could not be studied",
        remedy="mend the faults of the yard's files first",
    )),
)  # fmt: skip
"""What became of a hull that was looked at and now cannot be."""


def _is_unstudied(change: Change, head: Side) -> bool:
    """Tell whether a hull or option set is not gone, but could not be studied."""
    subject = change.subject
    names = {f"{'hull' if subject.is_hull else 'option set'} {subject.id}", f"class {subject.class_id}"}
    return change.after is None and not names.isdisjoint(head.unstudied)


def _of_studies(old: SideStudy, new: SideStudy, thin_fraction: float) -> tuple[PlaceChanges, AboardChanges | None]:
    if old is _NO_STUDY or new is _NO_STUDY:
        return PlaceChanges(), None
    both = old.aboard is not None and new.aboard is not None
    aboard = aboard_changes(old.aboard, new.aboard) if both and old.aboard and new.aboard else None
    gone = aboard.gone_names | aboard.relanded if aboard else frozenset()
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
    found = tuple(matches(told_before, told_after, unassessed_after, _replaced(aboard))) if after else ()
    claimed = tuple(claims(aboard)) if aboard else ()
    return Change(
        before=before,
        after=after,
        matches=found,
        notes=notes_of(new),
        unassessed=tuple(
            one for one in (*new.found, *(after.own if after else ()))
            if before and not one.is_finding and one.about not in unassessed_before
        ),
        dropped_sets=tuple(one for one in old.sets if before and after and one not in new.sets),
        places=places,
        aboard=aboard,
        units=tuple(units(aboard)) if aboard else (),
        claims=claimed,
        unasked=frozenset(_unasked(found, new, unassessed_after, aboard, claimed)),
    )  # fmt: skip


def _unasked(
    found: Sequence[Match], new: SideStudy, unassessed: frozenset[About], aboard: AboardChanges | None,
    claimed: Sequence[Claim],
) -> Iterator[About]:  # fmt: skip
    """Yield what a finding is gone of because nothing looks there any more: neither a pass nor a finding is left.

    That is so where its part was not touched, and either the check could not be made, or a fact
    that decides what is asked of other things says less.
    """
    looked_at = {(key.check, key.limit_set, bare(key.part)) for key in new.places}
    unmade = {about[:2] for about in unassessed}
    touched = aboard.touched | aboard.gone_names if aboard else frozenset()
    for match in found:
        if match.kind is FindingKind.FIXED and match.before is not None:
            about = match.before.found.about
            says_less = about[:2] in unmade or any(claim.is_wide for claim in claimed)
            if says_less and about not in looked_at and about[2].partition(" ")[0] not in touched:
                yield about


def _replaced(aboard: AboardChanges | None) -> Callable[[str, str], bool]:
    """Return what tells whether one part may have taken the place of another."""
    if aboard is None:
        return lambda _old, _new: False
    gone, new = aboard.gone_names, aboard.new_names
    return lambda old, now: old.partition(" ")[0] in gone or now.partition(" ")[0] in new


def _of_files(base: Side, head: Side) -> Change:
    """Return how the findings of the yard's files changed, which belong to no boat."""
    known = {f"{'hull' if subject.is_hull else 'option set'} {subject.id}" for subject in base.subjects}
    sides: list[SideSubject] = []
    for side in (base, head):
        # That a boat of the base could not be studied is told of the boat.
        own = tuple(one for one in side.file_found if one.check != NOT_STUDIED.id or not _speaks_of(one, known, base))
        sides.append(SideSubject(id=FILES, is_hull=False, class_id="", study="", own=own))
    return _change(sides[0], sides[1], _NO_STUDY, _NO_STUDY, PlaceChanges(), None)


def _speaks_of(found: Found, known: set[str], base: Side) -> bool:
    return found.part in known or found.part in {f"class {subject.class_id}" for subject in base.subjects}
