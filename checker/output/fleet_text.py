"""Print the view of a fleet as text; the page of HTML tells the same."""

from __future__ import annotations

from collections.abc import Iterator

from checker.finding import Verdict
from checker.output.gate_text import gate_words
from checker.output.lines import measure_words
from checker.output.text import CAUTION, count, fleet_verdict
from checker.reading.words import flat
from checker.result.fleet_view import CheckView, FleetView, HullView, RetrofitView

NOT_PLANNED = "NOT READY: its test could not be planned"


def fleet_text(view: FleetView) -> str:
    """Return the view as text, a fact a line."""
    return "\n".join([*_lines(view), ""])


def _lines(view: FleetView) -> Iterator[str]:
    yield f"yard: {flat(view.result.yard)}"
    yield f"fairloom: {view.result.tool_version}"
    yield f"verdict: {fleet_verdict(view.result)}"
    yield f"ready: {ready_words(view)}"
    for status, hulls in view.by_status:
        yield from ("", f"{status}: {count(len(hulls), 'hull')}")
        for hull in hulls:
            options = " + ".join(hull.subject.options) or "no options"
            yield f"  {hull.subject.id} ({flat(hull.subject.class_id)}, {options}): {standing(hull)}"
            yield f"    smallest headroom: {tightest_words(hull)}"
    yield from ("", "open findings by check" if view.checks else "open findings by check: none")
    for check in view.checks:
        yield f"  {check.level.value} {check.check}: {check_words(check)}"
    yield from ("", "retrofit list" if view.retrofit else "retrofit list: none")
    for one in view.retrofit:
        yield f"  {one.hull} ({one.status})"
        yield from (f"    {flat(words)}" for words in retrofit_words(one))
    if view.result.unstudied:
        yield from ("", f"NOT STUDIED: {', '.join(map(flat, view.result.unstudied))}")
    yield from ("", f"caution: {CAUTION}")


def ready_words(view: FleetView) -> str:
    """Count the hulls that are ready, and name them."""
    ready = [hull.subject.id for hull in view.hulls if hull.gate is not None and hull.gate.is_ready]
    return f"{len(ready)} of {count(len(view.hulls), 'hull')}" + (f" ({', '.join(ready)})" if ready else "")


def standing(hull: HullView) -> str:
    """Tell whether a hull is ready, and what speaks against it."""
    return NOT_PLANNED if hull.gate is None else gate_words(hull.gate)


def tightest_words(hull: HullView) -> str:
    """Tell where a hull has least to spare."""
    outcome = hull.tightest
    if outcome is None:
        return "nothing was measured"
    under = f", {outcome.limit_set}" if outcome.limit_set else ""
    passed = "" if outcome.verdict is Verdict.PASSED else f" ({outcome.verdict.value})"
    return f"{outcome.check} at {flat(outcome.part)}{under}: {measure_words(outcome)}{passed}"


def check_words(check: CheckView) -> str:
    """Tell how often a check has something open, and on which hulls and option sets."""
    on = [
        f"{count(len(names), word)} ({', '.join(names)})"
        for names, word in ((check.hulls, "hull"), (check.option_sets, "option set"))
        if names
    ]
    return f"{count(check.places, 'place')} on {' and '.join(on)}" if on else f"{count(check.places, 'place')} in files"


def retrofit_words(one: RetrofitView) -> Iterator[str]:
    """Tell what a built hull has to get, a piece of work a line."""
    for outcome in one.behind:
        yield f"{outcome.level.value}: {outcome.fault}; {outcome.remedy}"
    for outcome in one.from_class:
        told = f"{outcome.level.value}: {outcome.part}: {outcome.fault} [{outcome.check}]"
        yield f"{told}; {outcome.remedy} ({outcome.at})"
