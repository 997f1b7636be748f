"""List what a change of a class means for hulls that are built: they do not change by themselves."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from checker.result.compare_aboard import Unit
from checker.result.compare_findings import Match
from checker.result.comparison import Behind, Difference, FindingKind, Retrofit
from checker.result.gather import natural
from checker.result.subject_change import Change


def retrofits(changes: Sequence[Change]) -> tuple[Retrofit, ...]:
    """Return the built hulls whose wiring a class now tells otherwise: what to change aboard, and why.

    A change is the class's where the option set that the hull is built to changed alike; what only
    the hull's own file tells was done aboard already.
    """
    designs = {change.subject.id: change for change in changes if not change.subject.is_hull}
    groups: dict[tuple[object, ...], list[str]] = {}
    for change in changes:
        design = designs.get(change.subject.design)
        if change.before is None or change.after is None or not change.subject.is_built or design is None:
            continue
        work = tuple(unit for unit in change.units if unit in set(design.units))
        if work:
            key = (change.subject.status, work, _named(change, FindingKind.FIXED), _named(change, FindingKind.NEW))
            groups.setdefault(key, []).append(change.subject.id)
    return tuple(
        Retrofit(tuple(hulls), status, tuple(map(_difference, work)), mends, makes)  # type: ignore[arg-type, call-overload]
        for (status, work, mends, makes), hulls in groups.items()
    )


def _named(change: Change, kind: FindingKind) -> tuple[str, ...]:
    rows = (match for match in change.matches if match.kind is kind)
    return tuple(dict.fromkeys(_name(match) for match in rows if not _is_of_hull(match, change)))


def _is_of_hull(match: Match, change: Change) -> bool:
    """Tell whether a finding is of the hull itself: that it is behind its class is told for all hulls together."""
    told = match.after or match.before
    return told is not None and told.found.part == change.subject.id


def _name(match: Match) -> str:
    told = match.after or match.before
    assert told is not None
    return f"{told.found.check} at {told.found.part}"


def _difference(unit: Unit) -> Difference:
    return Difference(unit.kind, unit.about, unit.things, unit.facts, ())


def behind_class(changes: Iterable[Change]) -> tuple[Behind, ...]:
    """Return the built hulls that are behind their class."""
    found = [
        Behind(
            change.after.id, change.after.revision, change.after.class_revision,
            change.before is None or change.before.revision >= change.before.class_revision,
        )
        for change in changes
        if change.after is not None and change.after.is_built and change.after.revision < change.after.class_revision
    ]  # fmt: skip
    return tuple(sorted(found, key=lambda one: natural(one.hull)))


def reached_at_same_revision(changes: Sequence[Change]) -> tuple[str, ...]:
    """Return the classes that changed for hulls already built, and whose revision did not rise."""
    reached = {hull for retrofit in retrofits(changes) for hull in retrofit.hulls}
    classes = {
        change.after.class_id
        for change in changes
        if change.after is not None and change.before is not None and change.after.id in reached
        and change.after.class_revision == change.before.class_revision
    }  # fmt: skip
    return tuple(sorted(classes))
