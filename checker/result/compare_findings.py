"""Match the findings of two sides: which are new, fixed, accepted, or moved.

A finding is the same one where check, limit set and part are, whatever its file, line, wording
and figures. Where one part has several of a check, they are matched by what made them (their
fingerprint), then by the switch state, then in the order of their figures.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass

from checker.result.comparison import FindingKind
from checker.result.side import About, Figures, Found, SideStudy, SideSubject, Waived

LEVELS = ("error", "warning", "note")
SAME = 1e-6
"""Figures within this share of each other are the same to a reader."""


@dataclass(frozen=True, slots=True)
class Told:
    """Hold a finding of one subject, and the waiver that accepts it, if one does."""

    found: Found
    waived: Waived | None = None


@dataclass(frozen=True, slots=True)
class Match:
    """Tell what became of one finding of one subject; either side may be missing."""

    kind: FindingKind
    before: Told | None
    after: Told | None
    was: str = ""
    is_worse: bool = False


def told_of(subject: SideSubject, study: SideStudy) -> list[Told]:
    """Return the findings of one subject: those of its study, with its waivers, and its own."""
    found = [one for one in (*study.found, *subject.own) if one.is_finding]
    return [Told(one, subject.accepted.get(one.fingerprint)) for one in found]


def matches(
    before: Sequence[Told], after: Sequence[Told], unassessed: frozenset[About], replaced: Callable[[str, str], bool]
) -> Iterator[Match]:
    """Yield what became of each finding of one subject; those that are as they were are left out.

    Args:
        before: Its findings on the base side.
        after: Its findings on the head side.
        unassessed: What is not assessed on the head side: a finding there is not fixed.
        replaced: Tells whether a part may have taken another's place: of parts that are both aboard
            before and after, one was mended and the other is newly at fault.
    """
    pairs, gone, new = paired(before, after)
    for old, now in pairs:
        yield from _same(old, now)
    circuits: dict[tuple[str, str, str], list[Told]] = {}
    for told in gone:
        circuits.setdefault(_in_circuit(told.found), []).append(told)
    for told in new:
        others = circuits.get(_in_circuit(told.found), []) if told.found.circuit else []
        twin = next((one for one in others if _is_twin(one, told) and replaced(one.found.part, told.found.part)), None)
        if twin is not None:
            others.remove(twin)
            yield Match(FindingKind.MOVED, twin, told, is_worse=_is_worse(twin.found.figures, told.found.figures))
        else:
            yield Match(FindingKind.ACCEPTED if told.waived else FindingKind.NEW, None, told, is_worse=True)
    for told in (told for rows in circuits.values() for told in rows):
        is_unassessed = told.found.about in unassessed
        yield Match(FindingKind.UNASSESSED if is_unassessed else FindingKind.FIXED, told, None, is_worse=is_unassessed)


def _is_twin(old: Told, now: Told) -> bool:
    return old.found.level == now.found.level and bool(old.waived) == bool(now.waived)


def _in_circuit(found: Found) -> tuple[str, str, str]:
    return found.check, found.limit_set, found.circuit or f"part {found.part}"


def _same(old: Told, now: Told) -> Iterator[Match]:
    """Yield what became of a finding that is on both sides."""
    before, after = old.found, now.found
    worse_level = LEVELS.index(after.level) < LEVELS.index(before.level)
    if old.waived and not now.waived:
        yield Match(FindingKind.NEW, old, now, f"was accepted [{old.waived.waiver}]", is_worse=True)
    elif now.waived and (not old.waived or now.waived.expires > old.waived.expires):
        yield Match(FindingKind.ACCEPTED, old, now, is_worse=True)
    elif worse_level and not now.waived:
        yield Match(FindingKind.NEW, old, now, f"was a {before.level}", is_worse=True)
    elif after.level != before.level and not worse_level:
        yield Match(FindingKind.LOWERED, old, now, f"was a {before.level}", is_worse=True)
    elif _differs(before.figures, after.figures) or (before.figures is None and before.fault != after.fault):
        yield Match(FindingKind.MOVED, old, now, is_worse=_is_worse(before.figures, after.figures))


def paired(before: Iterable[Told], after: Iterable[Told]) -> tuple[list[tuple[Told, Told]], list[Told], list[Told]]:
    """Return the findings that are on both sides, those that are gone, and those that are new."""
    olds, news = _by_about(before), _by_about(after)
    pairs: list[tuple[Told, Told]] = []
    gone: list[Told] = []
    new: list[Told] = []
    for about in dict.fromkeys((*olds, *news)):
        left, right = list(olds.get(about, ())), list(news.get(about, ()))
        for alike in (_by_fingerprint, _by_state, _by_nothing):
            for one in tuple(left):
                twin = next((other for other in right if alike(one) == alike(other)), None)
                if twin is not None:
                    pairs.append((one, twin))
                    left.remove(one)
                    right.remove(twin)
        gone += left
        new += right
    return pairs, gone, new


def _by_about(rows: Iterable[Told]) -> dict[About, list[Told]]:
    found: dict[About, list[Told]] = {}
    for told in sorted(rows, key=_order):
        found.setdefault(told.found.about, []).append(told)
    return found


def _order(told: Told) -> tuple[object, ...]:
    figures = told.found.figures
    return told.found.state, 0.0 if figures is None else figures.value, told.found.fault


def _by_fingerprint(told: Told) -> object:
    return told.found.fingerprint


def _by_state(told: Told) -> object:
    return told.found.state


def _by_nothing(_told: Told) -> object:
    return None


def _differs(before: Figures | None, after: Figures | None) -> bool:
    if before is None or after is None:
        return (before is None) != (after is None)
    return not (is_near(before.value, after.value) and is_near(before.limit, after.limit))


def is_near(one: float, other: float) -> bool:
    """Tell whether two figures are the same to a reader."""
    return one == other or abs(one - other) <= SAME * max(abs(one), abs(other))


def _is_worse(before: Figures | None, after: Figures | None) -> bool:
    """Tell whether a finding is further past its limit than it was."""
    old, new = (None if figures is None else figures.headroom for figures in (before, after))
    return old is not None and new is not None and new < old - SAME


def unassessed_of(study: SideStudy, subject: SideSubject) -> frozenset[About]:
    """Return what was not assessed on a subject."""
    return frozenset(one.about for one in (*study.found, *subject.own) if not one.is_finding)


def notes_of(study: SideStudy) -> dict[About, str]:
    """Return the notes of the places that passed without figures, by what they are about."""
    return {
        (key.check, key.limit_set, key.part): place.note
        for key, place in study.places.items()
        if place.figures is None and place.note
    }
