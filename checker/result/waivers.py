"""Bind waivers to findings: which finding each accepts, and which waivers do not hold."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from checker.finding import Card, Outcome, Span, Verdict
from checker.result.cards import WAIVER_EXPIRED, WAIVER_INPUTS_CHANGED, WAIVER_TOO_WIDE, WAIVER_UNMATCHED
from checker.result.gather import fingerprint
from checker.result.model import Acceptance


@dataclass(frozen=True, slots=True, kw_only=True)
class Waiver:
    """Hold one waiver as the yard wrote it; `hull` or `class_id` is empty."""

    id: str
    check: str
    hull: str
    class_id: str
    part: str
    limit_set: str
    fingerprint: str
    reason: str
    approved_by: str
    evidence: str
    expires: datetime.date
    at: Span
    at_fingerprint: Span
    at_expires: Span

    def concerns(self, subject_id: str, class_id: str) -> bool:
        """Tell whether the waiver speaks of a hull or option set."""
        return self.hull == subject_id if self.hull else self.class_id == class_id

    def names(self, outcome: Outcome) -> bool:
        """Tell whether the waiver names a finding, whatever its inputs."""
        return (
            outcome.verdict is Verdict.FINDING
            and outcome.check == self.check
            and outcome.part == self.part
            and self.limit_set in ("", outcome.limit_set)
        )


@dataclass(frozen=True, slots=True)
class Waived:
    """Hold a subject's news after its waivers, what is wrong with these, what accepts what, and which matched."""

    outcomes: tuple[Outcome, ...]
    extra: tuple[Outcome, ...]
    accepted: dict[str, Acceptance]
    matched: frozenset[str]


def apply_waivers(outcomes: Sequence[Outcome], waivers: Iterable[Waiver], today: datetime.date) -> Waived:
    """Accept what the waivers of one subject accept, and tell what is wrong with the waivers.

    Args:
        outcomes: The subject's outcomes.
        waivers: The waivers that concern the subject.
        today: The day of the run; the day of expiry still counts.
    """
    left = list(outcomes)
    extra: list[Outcome] = []
    accepted: dict[str, Acceptance] = {}
    matched: set[str] = set()
    for waiver in waivers:
        found = [index for index, outcome in enumerate(left) if waiver.names(outcome)]
        if not found:
            continue
        matched.add(waiver.id)
        objection = _objection(waiver, [left[index] for index in found], today)
        if objection is not None:
            extra.append(objection)
            continue
        for index in found:
            if fingerprint(left[index]) == waiver.fingerprint:
                left[index] = left[index]._replace(verdict=Verdict.ACCEPTED)
        accepted[waiver.fingerprint] = Acceptance(
            waiver.id, waiver.reason, waiver.approved_by, waiver.expires.isoformat(), waiver.evidence, waiver.at
        )
    return Waived(tuple(left), tuple(extra), accepted, frozenset(matched))


def _objection(waiver: Waiver, found: list[Outcome], today: datetime.date) -> Outcome | None:
    """Return why a waiver that names findings accepts none of them, or None.

    Of several findings of one check at one part, in several switch states, the fingerprint tells which is meant;
    under several limit sets they are several judgements, and one look does not accept them all.
    """
    sets = sorted({outcome.limit_set for outcome in found})
    if len(sets) > 1:
        fault = f"it matches {len(found)} findings ({', '.join(sets)})"
        return _about(WAIVER_TOO_WIDE, waiver, waiver.at, fault, "name the limit set it is meant for")
    if today > waiver.expires:
        fault = f"it ran out on {waiver.expires.isoformat()}"
        return _about(WAIVER_EXPIRED, waiver, waiver.at_expires, fault, "mend the finding, or judge it anew")
    present = list(dict.fromkeys(fingerprint(outcome) for outcome in found))
    if waiver.fingerprint not in present:
        now = " or ".join(present)
        fault = f"it accepts fingerprint {waiver.fingerprint}, but the finding now has {now}: its inputs changed"
        remedy = f"judge the finding again; if it is acceptable write `fingerprint: {now}`"
        return _about(WAIVER_INPUTS_CHANGED, waiver, waiver.at_fingerprint, fault, remedy)
    return None


def unmatched(waiver: Waiver) -> Outcome:
    """Return the finding that a waiver matches nothing."""
    where = waiver.hull or f"class {waiver.class_id}"
    fault = f"no finding {waiver.check} at {waiver.part} on {where}"
    return _about(WAIVER_UNMATCHED, waiver, waiver.at, fault, "take it out")


def _about(card: Card, waiver: Waiver, at: Span, fault: str, remedy: str) -> Outcome:
    return Outcome(
        verdict=Verdict.FINDING, check=card.id, level=card.level, part=waiver.id, at=at, fault=fault, remedy=remedy,
        inputs=(("waiver", waiver.id),),
    )  # fmt: skip
