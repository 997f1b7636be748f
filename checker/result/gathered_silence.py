"""Bring together what makes the checks say less: rules, limit sets, waivers, facts, exemptions."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from checker.result.claims import Claim
from checker.result.compare_places import bare
from checker.result.comparison import FactChange, FindingKind, LimitMove, Silenced, SilencedKind
from checker.result.gather import natural
from checker.result.moved_by_limits import ByLimits
from checker.result.side import Side
from checker.result.subject_change import Change

_Key = tuple[SilencedKind, str, str, str, str, FactChange | None]
_Row = tuple[_Key, str, tuple[str, str] | None]
"""What is silenced, the subject, and what it hides."""


def silenced_changes(
    changes: Sequence[Change], base: Side, moves: Sequence[LimitMove], by_limits: ByLimits
) -> tuple[Silenced, ...]:
    """Return what makes the checks say less, each once with all subjects, in the order of its kind.

    A waiver that accepts what changed limits have made a finding is told with the limits.
    """
    lowered = {move.what for move in moves}
    known_waivers = {waived.waiver for subject in base.subjects for waived in subject.accepted.values()}
    groups: dict[_Key, tuple[dict[str, None], dict[tuple[str, str], None]]] = {}
    for move in moves:
        if move.is_loosened:
            groups[SilencedKind.RULE, move.what, move.old, move.new, move.reason, None] = ({}, {})
    for change in changes:
        for key, subject, hides in (
            *_waived(change, known_waivers, by_limits),
            *_of_boat(change),
            *_levels(change, lowered),
        ):
            on, hidden = groups.setdefault(key, ({}, {}))
            on[subject] = None
            if hides:
                hidden[hides] = None
    kinds = list(SilencedKind)
    found = [
        Silenced(
            kind,
            where,
            old,
            new,
            reason,
            tuple(on),
            fact,
            tuple(sorted(hidden, key=lambda pair: (pair[0], natural(pair[1])))),
        )
        for (kind, where, old, new, reason, fact), (on, hidden) in groups.items()
    ]
    return tuple(sorted(found, key=lambda one: (kinds.index(one.kind), natural(one.where), one.old, one.new)))


def _waived(change: Change, known: set[str], by_limits: ByLimits) -> Iterator[_Row]:
    for match in change.matches:
        if by_limits.has_finding(change.subject.id, match):
            continue
        if match.kind is not FindingKind.ACCEPTED or match.after is None or match.after.waived is None:
            continue
        waived, found = match.after.waived, match.after.found
        old = match.before.waived if match.before else None
        kind = SilencedKind.WAIVER_WIDENED if waived.waiver in known else SilencedKind.WAIVER_ADDED
        if old is not None:
            kind = SilencedKind.WAIVER_EXTENDED
        key = (kind, waived.waiver, old.expires if old else "", waived.expires, waived.reason, None)
        yield key, change.subject.id, (found.check, found.part)


def _levels(change: Change, told: set[str]) -> Iterator[_Row]:
    """Yield findings that are told at a lower level, where no rule of the yard says so already."""
    for match in change.matches:
        if match.kind is FindingKind.LOWERED and match.after is not None:
            found = match.after.found
            if f"level of {found.check}" not in told:
                key = (SilencedKind.LEVEL, found.check, match.was.removeprefix("was a "), found.level, "", None)
                yield key, change.subject.id, (found.check, found.part)


def _of_boat(change: Change) -> Iterator[_Row]:
    """Yield what the boat's own data says: limit sets, claims with what they hide, and other exemptions."""
    subject = change.subject.id
    for name in change.dropped_sets:
        yield (SilencedKind.LIMIT_SET, name, "", "", "", None), subject, None
    hidden = {(bare(key.part), key.check): note for key, note in change.places.exempt.items()}
    for match in change.matches:
        about = match.before.found.about if match.before is not None and change.is_silenced(match) else None
        if about is not None and (about in change.notes or about in change.unasked):
            hidden[about[2], about[0]] = change.notes.get(about, "nothing looks there any more")
    hidden |= {(bare(key.part), key.check): "" for key in change.places.lost if any(c.is_wide for c in change.claims)}
    for claim in sorted(change.claims, key=lambda claim: claim.is_wide):
        where = f"{claim.where.kind} {claim.where.id}".strip()
        key = (SilencedKind.FACT, where, "", "", claim.reason, claim.fact)
        mine = [pair for pair in hidden if _concerns(claim, pair[0], change)]
        yield key, subject, None
        for part, check in mine:
            del hidden[part, check]
            yield key, subject, (check, part)
    for (part, check), note in ((pair, note) for pair, note in hidden.items() if note):
        yield (SilencedKind.EXEMPTION, check, "", note, "", None), subject, (check, part)


def _concerns(claim: Claim, part: str, change: Change) -> bool:
    """Tell whether a claim is what frees a part."""
    name, head = claim.where.id, part.partition(" ")[0]
    if claim.where.kind == "zone":
        zones = change.aboard.zones.get(head, "") if change.aboard else ""
        return head == name or name in zones.split(", ")
    return head == name or claim.is_wide or (claim.where.kind == "circuit" and part.startswith(f"{name}."))
