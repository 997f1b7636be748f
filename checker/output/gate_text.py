"""Print whether a hull may be handed over, on one page: what speaks against it first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

from checker.finding import Card, Level, Outcome
from checker.output.lines import finding_lines, same_fault
from checker.output.text import CAUTION, count
from checker.reading.words import flat
from checker.result.gate import Gate
from checker.result.gather import fingerprint
from checker.result.sheet import BONDING, LEAKAGE, Step

Cards = Mapping[str, Card]
MOST_PARTS = 12


def gate_page(gate: Gate, cards: Cards) -> str:
    """Return the page of one hull."""
    return "\n".join([*_lines(gate, cards), ""])


def gate_line(gate: Gate) -> str:
    """Tell in one line whether a hull is ready, and what speaks against it."""
    return f"{gate.subject.id}: {gate_words(gate)}"


def gate_words(gate: Gate) -> str:
    """Tell whether a hull is ready, and what speaks against it, without its name."""
    if gate.is_ready:
        extras = [count(len(gate.accepted), "accepted deviation")] if gate.accepted else []
        extras += [signed_words(gate)]
        return f"READY; {', '.join(extras)}"
    return f"NOT READY: {'; '.join(against(gate))}"


def against(gate: Gate) -> Iterator[str]:
    """Count what speaks against a hull."""
    for some, word in (
        (gate.errors, "open error"), (gate.not_assessed, "place not assessed"),
        (gate.failed, "test finding"),
    ):  # fmt: skip
        if some:
            yield count(len(blocks(some)), word)
    if gate.missing:
        is_all = len(gate.missing) == len(gate.handover.steps)
        yield "no step of the test is done" if is_all else f"{count(len(gate.missing), 'step')} of the test not done"
    if gate.changed:
        yield "changed since it was signed"
    if gate.behind:
        yield f"at revision {gate.subject.revision}, the class at {gate.subject.class_revision}"
    if gate.files:
        yield f"{count(len(gate.files), 'fault')} in the yard's files"


def signed_words(gate: Gate) -> str:
    """Tell who signed a hull and when, or that nobody did."""
    signed = gate.handover.signed
    return f"signed {flat(signed.date)} by {flat(signed.role)}" if signed else "not signed yet"


def blocks(outcomes: Sequence[Outcome]) -> list[list[Outcome]]:
    """Put the same fault under several limit sets together."""
    found: dict[tuple[object, ...], list[Outcome]] = {}
    for outcome in outcomes:
        found.setdefault(same_fault(outcome), []).append(outcome)
    return list(found.values())


def _lines(gate: Gate, cards: Cards) -> Iterator[str]:
    subject = gate.subject
    yield gate_line(gate)
    options = ", ".join(subject.options) or "no options"
    revision = f"revision {subject.revision} of {subject.class_revision}"
    yield f"{subject.class_id} ({flat(subject.class_name)}), {revision}, {options}; status {subject.status}"
    yield f"wiring {gate.handover.content}, limit tables {gate.handover.tables}; {signed_words(gate)}"
    for use in subject.sets:
        yield f"judged by {use.id}: {use.why}"
    for some, heading in (
        (gate.files, "faults of the yard's files, which must be mended first"), (gate.errors, "open errors"),
        (gate.not_assessed, "not assessed"), (gate.failed, "what the test brought up"),
    ):  # fmt: skip
        yield from _section(some, heading, cards, gate)
    yield from _missing(gate)
    yield from _section(gate.changed, "changed since it was signed", cards, gate)
    yield from _section(gate.behind, "behind its class", cards, gate)
    yield from _accepted(gate)
    yield from _section(gate.others, "warnings and notes, which do not keep it back", cards, gate)
    yield from ("", f"caution: {CAUTION}")


def _section(outcomes: Sequence[Outcome], heading: str, cards: Cards, gate: Gate) -> Iterator[str]:
    if not outcomes:
        yield from ("", f"{heading}: none")
        return
    yield from ("", heading)
    for block in blocks(outcomes):
        yield from finding_lines(block, cards[block[0].check], "", gate.subject.accepted)


def _missing(gate: Gate) -> Iterator[str]:
    if not gate.missing:
        yield from ("", "steps of the test not done: none")
        return
    yield from ("", f"steps of the test not done: {len(gate.missing)} of {len(gate.handover.steps)}")
    kinds: dict[str, list[Step]] = {}
    for step in gate.missing:
        kinds.setdefault(step.kind, []).append(step)
    for kind, steps in kinds.items():
        if kind in (BONDING, LEAKAGE):
            yield f"  {kind}"
        else:
            shown = ", ".join(step.part for step in steps[:MOST_PARTS])
            more = f" and {len(steps) - MOST_PARTS} more" if len(steps) > MOST_PARTS else ""
            yield f"  {kind}: {flat(shown)}{more}"


def _accepted(gate: Gate) -> Iterator[str]:
    if not gate.accepted:
        yield from ("", "accepted deviations: none")
        return
    yield from ("", "accepted deviations")
    for mark, acceptance in sorted(gate.subject.accepted.items()):
        outcome = next((o for o in gate.accepted if fingerprint(o) == mark), None)
        told = "" if outcome is None else f"{flat(outcome.part)}: {flat(outcome.fault)} "
        level = "" if outcome is None or outcome.level is Level.ERROR else f" ({outcome.level.value})"
        yield f"  {told}[{acceptance.waiver}]{level}"
        yield f"    by {flat(acceptance.approved_by)}, until {acceptance.expires}: {flat(acceptance.reason)}"
        if acceptance.evidence:
            yield f"    evidence: {flat(acceptance.evidence)}"
