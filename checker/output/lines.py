"""Print outcomes as lines that diff well: one fact a line, key first, fixed digits."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence

from checker.checks.check import HouseChange
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
    return words + (", thin" if outcome.is_thin else "")


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


def same_fault(outcome: Outcome) -> tuple[object, ...]:
    """Return what makes outcomes under several limit sets one fault to a reader."""
    return (outcome.verdict, outcome.check, outcome.part, outcome.at, outcome.missing, outcome.state)


def finding_lines(
    outcomes: Sequence[Outcome], card: Card, who: str, acceptances: Mapping[str, Acceptance]
) -> Iterator[str]:
    """Print one fault as a block of lines: a finding, an accepted finding or a place not assessed.

    Args:
        outcomes: The same fault under each limit set that finds it; the first is told in full.
        card: Of the check.
        who: The hulls and option sets it is on, or nothing.
        acceptances: The waivers by fingerprint.
    """
    first = outcomes[0]
    word = {
        Verdict.FINDING: first.level.value,
        Verdict.ACCEPTED: f"accepted {first.level.value}",
        Verdict.NOT_ASSESSED: "not assessed",
    }[first.verdict]
    subject = first.part if first.circuit in ("", first.part) else f"{first.part} of {first.circuit}"
    yield f"{word}: {flat(subject)}: {flat(first.fault)} [{first.check}]"
    if who:
        yield f"  on: {who}"
    if first.at.file:
        yield f"  at: {flat(str(first.at))}"
    if first.also_at:
        yield f"  see also: {', '.join(flat(str(span)) for span in first.also_at)}"
    for outcome in outcomes:
        yield from _limit_lines(outcome, len(outcomes) > 1)
    for missing in dict.fromkeys(o.missing for o in outcomes if o.missing):
        yield f"  fill in: {flat(missing)}"
    for remedy in dict.fromkeys(o.remedy for o in outcomes if o.remedy):
        yield f"  remedy: {flat(remedy)}"
    yield f"  why: {card.why}"
    yield from _rests_on(outcomes, card)
    for rule in dict.fromkeys(rule for outcome in outcomes for rule in outcome.house):
        yield f"  yard's own rule: {flat(rule)}"
    if first.state:
        yield f"  state: {flat(first.state)}"
    if first.path:
        yield f"  path: {shown_path(first.path)}"
    if card.can_be_waived and first.verdict is not Verdict.NOT_ASSESSED:
        for outcome in outcomes:
            under = f" ({outcome.limit_set})" if len(outcomes) > 1 else ""
            yield f"  fingerprint: {fingerprint(outcome)}{under}"
    for outcome in outcomes:
        yield from _acceptance_lines(acceptances.get(fingerprint(outcome)))


def _rests_on(outcomes: Sequence[Outcome], card: Card) -> Iterator[str]:
    """Print the limit sets of a fault, and the clause: the card's, or that of the table which the yard entered."""
    by_card = [outcome.limit_set for outcome in outcomes if not outcome.rests_on]
    if by_card:
        sets = " and ".join(filter(None, by_card))
        yield f"  rests on: {sets}{'; ' if sets else ''}{card.rests_on}"
    for outcome in outcomes:
        if outcome.rests_on:
            yield f"  rests on: {outcome.limit_set}; {flat(outcome.rests_on)}"


def _limit_lines(outcome: Outcome, is_one_of_several: bool) -> Iterator[str]:
    if outcome.measure is not None:
        yield f"  {f'under {outcome.limit_set}' if is_one_of_several else 'measured'}: {measure_words(outcome)}"


def _acceptance_lines(acceptance: Acceptance | None) -> Iterator[str]:
    if acceptance is None:
        return
    yield f"  accepted by: {flat(acceptance.approved_by)}, until {acceptance.expires} [{acceptance.waiver}]"
    yield f"  reason: {flat(acceptance.reason)}"
    if acceptance.evidence:
        yield f"  evidence: {flat(acceptance.evidence)}"


def shown_path(path: Iterable[str]) -> str:
    """Print a path as its posts and parts, all of them: it is what shows the fault."""
    return " > ".join(flat(step) for step in path)


def set_lines(sets: Iterable[SetUse]) -> Iterator[str]:
    """Print the limit sets that a boat is judged by, and why, with the tables that the yard enters."""
    for use in sets:
        yield f"judged by {use.id}: {use.why}; {use.from_memory} tables or figures of it are from memory"
        for table in use.entered:
            cited = ", ".join(filter(None, (table.document, table.edition, table.clause, table.page)))
            yield f"table {table.table} of {use.id}: entered by the yard from {flat(cited)} ({flat(table.file)})"
        if use.not_entered:
            yield f"tables of {use.id} not entered: {', '.join(use.not_entered)}; what needs them is not assessed"


def house_lines(changes: Sequence[HouseChange]) -> Iterator[str]:
    """Print the yard's own rules, a change a line: what it loosens first, and what departs from a law before that."""
    loosened = [change for change in changes if change.is_loosened]
    yield "loosened by the yard" if loosened else "loosened by the yard: none"
    yield from map(_house_line, loosened)
    tightened = [change for change in changes if not change.is_loosened]
    if tightened:
        yield "tightened by the yard"
        yield from map(_house_line, tightened)


def _house_line(change: HouseChange) -> str:
    law = "LAW: " if change.is_loosened and change.is_of_law else ""
    reason = f"; reason: {flat(change.reason)}" if change.reason else ""
    return f"  {law}{flat(change.words)} ({flat(change.clause)}){reason}"


def loosened_words(changes: Sequence[HouseChange]) -> str:
    """Tell in a verdict how much the yard has loosened, or return an empty text."""
    loosened = [change for change in changes if change.is_loosened]
    if not loosened:
        return ""
    of_law = sum(change.is_of_law for change in loosened)
    law = f", {of_law} of LAW" if of_law else ""
    return f"{len(loosened)} {'rule' if len(loosened) == 1 else 'rules'} loosened by the yard{law}"
