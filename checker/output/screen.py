"""Print a result on a terminal: worst news first, colour only where it is wanted."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from checker.finding import Card, Level, Verdict
from checker.output.lines import finding_lines, house_lines, loosened_words
from checker.output.text import CAUTION, fleet_totals, fleet_verdict, grouped, summary_lines
from checker.reading.words import no_command
from checker.result.model import FleetResult

MOST_NOT_ASSESSED = 10

_RED, _YELLOW, _GREEN, _BOLD, _PLAIN = "\x1b[31m", "\x1b[33m", "\x1b[32m", "\x1b[1m", "\x1b[0m"


def screen_report(result: FleetResult, cards: Mapping[str, Card], *, colour: bool) -> str:
    """Return what `fairloom check` prints: findings, what was accepted, totals, a line a hull, the verdict."""
    return no_command("\n".join(_painted(line, colour) for line in _lines(result, cards)) + "\n")


def _lines(result: FleetResult, cards: Mapping[str, Card]) -> Iterator[str]:
    for verdict in (Verdict.FINDING, Verdict.ACCEPTED):
        for block in grouped(result, verdict):
            yield from finding_lines(block.outcomes, cards[block.outcomes[0].check], block.who, block.accepted)
            yield ""
    yield from _not_assessed(result, cards)
    if loosened_words(result.house):
        yield from house_lines(result.house)
        yield ""
    yield from fleet_totals(result)
    yield ""
    yield from summary_lines(result)
    yield ""
    yield f"verdict: {fleet_verdict(result)}"
    yield CAUTION


def _not_assessed(result: FleetResult, cards: Mapping[str, Card]) -> Iterator[str]:
    """Print the first places not assessed, and how many more there are."""
    blocks = grouped(result, Verdict.NOT_ASSESSED)
    for block in blocks[:MOST_NOT_ASSESSED]:
        yield from finding_lines(block.outcomes, cards[block.outcomes[0].check], block.who, {})
        yield ""
    if len(blocks) > MOST_NOT_ASSESSED:
        yield f"and {len(blocks) - MOST_NOT_ASSESSED} more places not assessed: see the reports (--reports FOLDER)"
        yield ""


def _painted(line: str, colour: bool) -> str:
    if not colour:
        return line
    for start, paint in (
        (f"{Level.ERROR.value}:", _RED), (f"{Level.WARNING.value}:", _YELLOW), ("accepted ", _YELLOW),
        ("not assessed:", _YELLOW), ("verdict:", _BOLD), ("loosened by the yard", _BOLD), ("  LAW:", _RED),
    ):  # fmt: skip
        if line.startswith(start):
            return f"{paint}{line}{_PLAIN}"
    if ": FAILS" in line:
        return f"{_RED}{line}{_PLAIN}"
    return f"{_GREEN}{line}{_PLAIN}" if line.startswith(("hull ", "option set ")) and ": passes" in line else line
