"""Tell on a hull's page every step of its test: what is expected, what was measured, and how it came out."""

from __future__ import annotations

from collections.abc import Iterator

from checker.checks.words import ampere
from checker.finding import Outcome, Verdict
from checker.output.gate_text import signed_words
from checker.output.pages.dossier import Dossier
from checker.output.pages.html import Content, Markup, Section, facts, table, tag
from checker.output.sheet_text import GROUPS, expectation, measured_words
from checker.result.gather import fingerprint
from checker.result.sheet import Step
from checker.result.sheet_file import Sheet

NOT_DONE = "not done"


def tested(dossier: Dossier) -> Section:
    """Tell the sheet as it was filled in, and the signature."""
    handover = dossier.handover
    done = len(handover.steps) - len(dossier.gate.missing)
    told: list[Content] = [
        facts((
            *_head(handover.sheet), ("steps done", f"{done} of {len(handover.steps)}"),
            ("wiring as it is", handover.content), ("signature", signed_words(dossier.gate)),
        )),
    ]  # fmt: skip
    for kind, (title, how) in GROUPS.items():
        steps = [step for step in handover.steps if step.kind == kind]
        if steps:
            told += [tag("h3", title), _table(kind, how, steps, dossier)]
    return Section("test", "Test sheet: expected and measured", tuple(told), is_wide=True)


def _head(sheet: Sheet | None) -> Iterator[tuple[str, str]]:
    if sheet is None:
        yield "sheet", "none was filled in: no step is done"
        return
    instruments = "; ".join(
        f"{one.id} {one.name}, calibrated until {one.calibrated_until or 'not told'}" for one in sheet.instruments
    )
    yield "measured on", str(sheet.date) if sheet.date else "not told"
    yield "by (role)", sheet.role or "not told"
    yield "conditions", sheet.conditions or "not told"
    yield "instruments", instruments or "not told"
    yield "printed for the wiring", sheet.content or "not told"


def _table(kind: str, how: str, steps: list[Step], dossier: Dossier) -> Markup:
    headings = ("step", "what", "where", "expected", "at least", "at most", "measured", "with", "meter", "verdict")
    rows = [_row(step, dossier) for step in steps]
    empty = [place for place in range(len(headings)) if place and not any(row[place] for row in rows)]
    shown = [place for place in range(len(headings)) if place not in empty]
    return table(
        f"test-{kind}", how, [headings[place] for place in shown], [[row[place] for place in shown] for row in rows]
    )


def _row(step: Step, dossier: Dossier) -> tuple[str, ...]:
    handover = dossier.handover
    reading = handover.sheet.readings.get(step.id) if handover.sheet else None
    beside = ampere(reading.current_a) if reading and reading.current_a is not None else ""
    return (
        step.part, step.what, step.where, *expectation(step, handover.rule), measured_words(step, reading), beside,
        reading.instrument if reading else "", step_verdict(step, dossier),
    )  # fmt: skip


def step_verdict(step: Step, dossier: Dossier) -> str:
    """Return how a step came out: as it should, a finding, accepted, or not done."""
    handover = dossier.handover
    reading = handover.sheet.readings.get(step.id) if handover.sheet else None
    if reading is None or handover.judged is None:
        return NOT_DONE
    found = [o for o in handover.judged.outcomes if o.at == reading.at and o.part == step.part]
    told = [_told(o, dossier) for o in found if o.verdict is Verdict.FINDING]
    if not told and step in handover.judged.missing:
        return NOT_DONE
    return "; ".join(told) or "as expected"


def _told(outcome: Outcome, dossier: Dossier) -> str:
    acceptance = dossier.subject.accepted.get(fingerprint(outcome))
    word = f"ACCEPTED [{acceptance.waiver}]" if acceptance else f"FINDING ({outcome.level.value})"
    return f"{word}: {outcome.fault} [{outcome.check}]"
