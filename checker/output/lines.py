"""Print outcomes as lines that diff well: one fact a line, key first, fixed digits."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from checker.checks.check import is_thin
from checker.checks.words import measured
from checker.finding import Card, Outcome, Verdict
from checker.reading.words import flat
from checker.result.gather import fingerprint
from checker.result.model import Acceptance, SetUse


def headroom_words(outcome: Outcome) -> str:
    """Print the headroom of a measured outcome as a share of its limit, or nothing."""
    if outcome.measure is None or outcome.measure.headroom_fraction is None:
        return ""
    fraction = outcome.measure.headroom_fraction
    if fraction == float("-inf"):
        return ""
    words = f"headroom {fraction * 100:.1f} %"
    return words + (", thin" if is_thin(outcome.measure) else "")


def measure_words(outcome: Outcome) -> str:
    """Print value, limit and headroom of a measured outcome."""
    measure = outcome.measure
    assert measure is not None
    value, limit = measured(measure)
    sense = "at least" if measure.at_least else "of"
    limit = "no limit" if measure.limit == float("inf") else limit
    words = f"{value} {sense} {limit}"
    headroom = headroom_words(outcome)
    return f"{words}, {headroom}" if headroom else words


def finding_lines(outcome: Outcome, card: Card, who: str, acceptance: Acceptance | None = None) -> Iterator[str]:
    """Print one finding, accepted finding or place not assessed as a block of lines."""
    word = {
        Verdict.FINDING: outcome.level.value,
        Verdict.ACCEPTED: f"accepted {outcome.level.value}",
        Verdict.NOT_ASSESSED: "not assessed",
    }[outcome.verdict]
    subject = outcome.part if outcome.circuit in ("", outcome.part) else f"{outcome.part} of {outcome.circuit}"
    yield f"{word}: {flat(subject)}: {flat(outcome.fault)} [{outcome.check}]"
    if who:
        yield f"  on: {who}"
    if outcome.at.file:
        yield f"  at: {flat(str(outcome.at))}"
    if outcome.measure is not None:
        yield f"  measured: {measure_words(outcome)}"
    if outcome.missing:
        yield f"  fill in: {flat(outcome.missing)}"
    if outcome.remedy:
        yield f"  remedy: {flat(outcome.remedy)}"
    yield f"  why: {card.why}"
    yield f"  rests on: {outcome.limit_set + '; ' if outcome.limit_set else ''}{card.rests_on}"
    if outcome.state:
        yield f"  state: {flat(outcome.state)}"
    if outcome.path:
        yield f"  path: {shown_path(outcome.path)}"
    if card.can_be_waived and outcome.verdict is not Verdict.NOT_ASSESSED:
        yield f"  fingerprint: {fingerprint(outcome)}"
    if acceptance is not None:
        yield f"  accepted by: {flat(acceptance.approved_by)}, until {acceptance.expires} [{acceptance.waiver}]"
        yield f"  reason: {flat(acceptance.reason)}"
        if acceptance.evidence:
            yield f"  evidence: {flat(acceptance.evidence)}"


def shown_path(path: Iterable[str]) -> str:
    """Print a path as its posts and parts, all of them: it is what shows the fault."""
    return " > ".join(flat(step) for step in path)


def set_lines(sets: Iterable[SetUse]) -> Iterator[str]:
    """Print the limit sets that a boat is judged by, and why."""
    for use in sets:
        yield f"judged by {use.id}: {use.why}; {use.from_memory} tables or figures of it are from memory"
