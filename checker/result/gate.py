"""Decide whether a hull may be handed over: ready only if all that could speak against it is empty or accepted."""

from __future__ import annotations

from dataclasses import dataclass

from checker.finding import Level, Outcome, Verdict
from checker.result.cards import CLASS_REVISION, SIGNED_CONTENT
from checker.result.measured_cards import MEASURED_CARDS, MISSING, OLD_SHEET
from checker.result.model import FleetResult, Handover, SubjectResult
from checker.result.sheet import Step

_OF_THE_TEST = frozenset(card.id for card in MEASURED_CARDS)


@dataclass(frozen=True, slots=True)
class Gate:
    """Hold what speaks against the hand-over of one hull, each kind by itself, and what was accepted."""

    subject: SubjectResult
    handover: Handover
    errors: tuple[Outcome, ...]
    not_assessed: tuple[Outcome, ...]
    failed: tuple[Outcome, ...]
    missing: tuple[Step, ...]
    changed: tuple[Outcome, ...]
    behind: tuple[Outcome, ...]
    files: tuple[Outcome, ...]
    accepted: tuple[Outcome, ...]
    others: tuple[Outcome, ...]

    @property
    def is_ready(self) -> bool:
        """Tell whether nothing speaks against the hand-over."""
        return self.is_ready_but_for_signature and not self.changed

    @property
    def is_ready_but_for_signature(self) -> bool:
        """Tell whether it may be signed, for the first time or again."""
        return not any((self.errors, self.not_assessed, self.failed, self.missing, self.behind, self.files))


def gate(result: FleetResult, hull: str) -> Gate | None:
    """Return the gate of a hull, or None where it was not studied or its test was not planned."""
    subject = next((s for s in result.subjects if s.is_hull and s.id == hull), None)
    if subject is None or subject.handover is None:
        return None
    open_ones = [o for o in subject.news if o.verdict is Verdict.FINDING]
    accepted = tuple(o for o in subject.news if o.verdict is Verdict.ACCEPTED)
    apart = {SIGNED_CONTENT.id, CLASS_REVISION.id} | _OF_THE_TEST
    is_waived = any(o.check == MISSING.id for o in accepted)
    missing = () if is_waived else _missing(subject.handover)
    return Gate(
        subject=subject,
        handover=subject.handover,
        errors=tuple(o for o in open_ones if o.level is Level.ERROR and o.check not in apart),
        not_assessed=tuple(o for o in subject.news if o.verdict is Verdict.NOT_ASSESSED),
        failed=(*_old_sheet(subject.handover),
                *(o for o in open_ones if o.check in _OF_THE_TEST and o.check != MISSING.id)),
        missing=missing,
        changed=tuple(o for o in open_ones if o.check == SIGNED_CONTENT.id),
        behind=tuple(o for o in open_ones if o.check == CLASS_REVISION.id and o.level is Level.ERROR),
        files=result.file_outcomes,
        accepted=accepted,
        others=tuple(
            o for o in open_ones
            if (o.level is not Level.ERROR and o.check not in apart)
            or (o.check == CLASS_REVISION.id and o.level is not Level.ERROR)
        ),
    )  # fmt: skip


def _old_sheet(handover: Handover) -> tuple[Outcome, ...]:
    """Return that the sheet was printed for other wiring, if it was."""
    outcomes = () if handover.judged is None else handover.judged.outcomes
    return tuple(o for o in outcomes if o.check == OLD_SHEET.id and o.verdict is Verdict.FINDING)


def _missing(handover: Handover) -> tuple[Step, ...]:
    return handover.steps if handover.judged is None else handover.judged.missing
