"""Bring the changes of all hulls together: findings, headroom, what is looked at no more."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace

from checker.result.compare_findings import LEVELS, Match
from checker.result.compare_places import bare
from checker.result.comparison import FindingChange, FindingKind, Headroom, Lost, LostKind
from checker.result.gather import natural
from checker.result.moved_by_limits import ByLimits
from checker.result.side import Figures, Found, PlaceKey, Side
from checker.result.subject_change import Change


def finding_changes(changes: Iterable[Change], by_limits: ByLimits) -> tuple[FindingChange, ...]:
    """Return each finding that changed once, with all subjects that share it: the worst first."""
    groups: dict[tuple[object, ...], list[tuple[str, Match]]] = {}
    for change in changes:
        for match in change.matches:
            if change.is_silenced(match):
                continue  # told among what is silenced
            name, found = change.subject.id, _found(match)
            is_moved = by_limits.has_finding(name, match)
            part = "" if found.part == name else found.about[2]  # of the hull itself, e.g. that it is behind
            key = (match.kind, found.check, part, found.level, match.was, match.is_worse, is_moved)
            groups.setdefault(key, []).append((name, match))
    return tuple(sorted((_finding_change(key[-1] is True, rows) for key, rows in groups.items()), key=_order))


def _found(match: Match) -> Found:
    told = match.after or match.before
    assert told is not None
    return told.found


def _finding_change(by_limits: bool, rows: Sequence[tuple[str, Match]]) -> FindingChange:
    worst = min(rows, key=lambda row: _headroom(_found(row[1]).figures))[1]
    found = _found(worst)
    before = worst.before.found if worst.before else None
    return FindingChange(
        kind=worst.kind,
        found=found,
        on=tuple(dict.fromkeys(name for name, _ in rows)),
        limit_sets=tuple(dict.fromkeys(one.limit_set for one in (_found(match) for _, match in rows) if one.limit_set)),
        was=worst.was,
        moved_from=before.part if before and before.part != found.part else "",
        before=before.figures if before else None,
        after=worst.after.found.figures if worst.after else None,
        is_worse=worst.is_worse,
        by_limits=by_limits,
    )


def _headroom(figures: Figures | None) -> float:
    headroom = None if figures is None else figures.headroom
    return float("inf") if headroom is None else headroom


def _order(change: FindingChange) -> tuple[object, ...]:
    found = change.found
    kinds = list(FindingKind)
    return kinds.index(change.kind), LEVELS.index(found.level), found.check, natural(found.part), change.on


def headroom_changes(changes: Iterable[Change], by_limits: ByLimits) -> tuple[Headroom, ...]:
    """Return the places that lost headroom near their limit, the thinnest first; of several sets the thinnest."""
    groups: dict[tuple[str, str, str, bool], list[tuple[str, PlaceKey, Figures, Figures]]] = {}
    for change in changes:
        for key, (before, after) in change.places.thinner.items():
            group = key.check, bare(key.part), after.quantity, by_limits.has_place(change.subject.id, key)
            groups.setdefault(group, []).append((change.subject.id, key, before, after))
    alike: dict[tuple[object, ...], Headroom] = {}
    for (check, part, _, is_moved), rows in groups.items():
        _, place, before, after = min(rows, key=lambda row: _headroom(row[3]))
        names = tuple(dict.fromkeys(name for name, *_ in rows))
        figures = f"{after.value:.6g} {after.limit:.6g} {after.unit}"
        one = Headroom((check,), place.limit_set, part, before, after, names, is_moved)
        known = alike.get((part, figures, names, is_moved))
        alike[part, figures, names, is_moved] = replace(known, checks=(*known.checks, check)) if known else one
    return tuple(sorted(alike.values(), key=lambda one: (_headroom(one.after), natural(one.part), one.checks)))


def lost_changes(changes: Sequence[Change], base: Side, head: Side) -> tuple[Lost, ...]:
    """Return what is looked at no more: hulls, circuits, places, and what is newly not assessed."""
    gone = tuple(change.subject.id for change in changes if change.after is None and not change.matches)
    unstudied = tuple(name for name in head.unstudied if name not in base.unstudied)
    found = [Lost(LostKind.STUDY, "", unstudied, ())] if unstudied else []
    found += [Lost(LostKind.SUBJECT, "", gone, ())] if gone else []
    groups: dict[tuple[LostKind, str, str], dict[str, list[str]]] = {}

    def add(kind: LostKind, check: str, why: str, name: str, subject: str) -> None:
        names = groups.setdefault((kind, check, why), {}).setdefault(name, [])
        if subject not in names:
            names.append(subject)

    for change in changes:
        subject = change.subject.id
        for thing in change.aboard.removed if change.aboard else ():
            if thing.kind == "circuit":
                add(LostKind.CIRCUIT, "", "", thing.id, subject)
        for key in change.places.lost:
            add(LostKind.PLACES, key.check, "", bare(key.part), subject)
        for one in change.unassessed:
            add(LostKind.UNASSESSED, one.check, one.missing, one.part, subject)
    for (kind, check, why), names in groups.items():
        by_subjects: dict[tuple[str, ...], list[str]] = {}
        for name, subjects in names.items():
            by_subjects.setdefault(tuple(subjects), []).append(name)
        found += [Lost(kind, check, tuple(sorted(n, key=natural)), on, why) for on, n in by_subjects.items()]
    kinds = list(LostKind)
    return tuple(sorted(found, key=lambda one: (kinds.index(one.kind), one.check, one.why, one.names, one.on)))
