"""Write a result as a page of Markdown for the summary of a CI job.

The page has a budget of bytes, since a summary that is too large is not shown at all. What does
not fit is left out row by row, the least urgent first, and the page says so.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from checker.finding import Card, Verdict
from checker.output.alerts import Alert, alerts, at_from_root
from checker.output.lines import loosened_words, measure_words
from checker.output.markdown import BUDGET, plain
from checker.output.text import CAUTION, count, fleet_verdict, summary_lines
from checker.result.model import FleetResult

RESERVE_BYTES = 4_000
LONGEST_CELL = 400


class _Page:
    """Hold a page that grows by rows up to a budget."""

    def __init__(self, budget: int) -> None:
        self._parts: list[str] = []
        self._left = budget - RESERVE_BYTES

    def add(self, *lines: str) -> None:
        """Add lines that must be there; they are few."""
        self._parts += lines
        self._left -= sum(len(line.encode("utf-8")) + 1 for line in lines)

    def add_rows(self, rows: Sequence[str], what: str) -> None:
        """Add rows as far as they fit, and tell how many were left out."""
        for number, row in enumerate(rows):
            size = len(row.encode("utf-8")) + 1
            if size > self._left:
                self.add("", f"**Left out here: {count(len(rows) - number, what)} more. See the reports.**")
                return
            self._parts.append(row)
            self._left -= size

    def text(self) -> str:
        return "\n".join([*self._parts, ""])


def summary_report(result: FleetResult, cards: Mapping[str, Card], prefix: str, budget: int = BUDGET) -> str:
    """Return the page: the verdict, open findings, accepted ones, places not assessed, each hull in a line.

    Args:
        result: What the run found.
        cards: The checks.
        prefix: The yard's folder as seen from the root of its repository.
        budget: The most bytes that the page may have.
    """
    page = _Page(budget)
    page.add(f"## Wiring check: {plain(_cut(fleet_verdict(result)))}", "")
    if loosened_words(result.house):
        page.add(f"**{plain(loosened_words(result.house))}**: see the reports.", "")
    _add_findings(page, alerts(result, Verdict.FINDING), prefix)
    _add_accepted(page, alerts(result, Verdict.ACCEPTED))
    _add_not_assessed(page, alerts(result, Verdict.NOT_ASSESSED), prefix)
    page.add("<details>", "<summary>Every hull and option set</summary>", "")
    page.add_rows([f"- {plain(line)}" for line in summary_lines(result)], "line")
    page.add("", "</details>", "", f"fairloom {result.tool_version}. {CAUTION}", "")
    return page.text()


def _add_findings(page: _Page, found: Sequence[Alert], prefix: str) -> None:
    page.add(f"### Open findings: {len(found) or 'none'}", "")
    if found:
        page.add("| level | fault | on | at | remedy |", "| --- | --- | --- | --- | --- |")
        page.add_rows([_finding_row(alert, prefix) for alert in found], "finding")
        page.add("")


def _finding_row(alert: Alert, prefix: str) -> str:
    measured = [measure_words(outcome) for outcome in alert.outcomes if outcome.measure]
    fault = "; ".join([alert.sentence, *measured])
    remedies = dict.fromkeys(outcome.remedy for outcome in alert.outcomes if outcome.remedy)
    at = at_from_root(alert.at, prefix)
    return _row(alert.level.value, _fault(alert, fault), alert.on, at, "; ".join(remedies))


def _add_accepted(page: _Page, found: Sequence[Alert]) -> None:
    if found:
        page.add(f"### Accepted: {len(found)}", "", "| fault | on | by | until | reason |",
                 "| --- | --- | --- | --- | --- |")  # fmt: skip
        page.add_rows([_accepted_row(alert) for alert in found], "accepted finding")
        page.add("")


def _accepted_row(alert: Alert) -> str:
    told = [acceptance for _, acceptance in sorted(alert.accepted.items())]
    columns = [
        "; ".join(dict.fromkeys(column))
        for column in (
            (a.approved_by for a in told), (a.expires for a in told), (f"{a.reason} ({a.waiver})" for a in told),
        )
    ]  # fmt: skip
    return _row(_fault(alert, alert.sentence), alert.on, *columns)


def _add_not_assessed(page: _Page, found: Sequence[Alert], prefix: str) -> None:
    if found:
        page.add(f"### Not assessed: {len(found)}", "", "| place | on | at | fill in |", "| --- | --- | --- | --- |")
        page.add_rows([_not_assessed_row(alert, prefix) for alert in found], "place not assessed")
        page.add("")


def _not_assessed_row(alert: Alert, prefix: str) -> str:
    missing = dict.fromkeys(outcome.missing for outcome in alert.outcomes if outcome.missing)
    at = at_from_root(alert.at, prefix)
    return _row(_fault(alert, alert.sentence), alert.on, at, "; ".join(missing))


def _row(*cells: str) -> str:
    return f"| {' | '.join(plain(_cut(cell)) for cell in cells)} |"


def _fault(alert: Alert, words: str) -> str:
    """Return the fault with its check, which stays where a long fault is cut."""
    check = f" ({alert.first.check})"
    return _cut(words, LONGEST_CELL - len(check)) + check


def _cut(text: str, most: int = LONGEST_CELL) -> str:
    return text if len(text) <= most else f"{text[: most - 1]}…"
