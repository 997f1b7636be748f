"""Write a result as JUnit XML: a suite for each hull and option set, a case for each circuit or part.

A circuit that passes is a case too. An open error fails its case; what was accepted or not
assessed skips it; warnings and notes do not fail a run, so they stand in the case's output.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import TYPE_CHECKING

from checker.finding import Card, Level, Outcome, Verdict
from checker.output.alerts import at_from_root
from checker.output.lines import measure_words
from checker.reading.words import flat
from checker.result.gather import fingerprint, natural
from checker.result.model import Acceptance, FleetResult

if TYPE_CHECKING:
    from xml.etree.ElementTree import Element

Cases = dict[str, list[Outcome]]


def junit_report(result: FleetResult, cards: Mapping[str, Card], prefix: str) -> str:
    """Return the report. It holds no time: the same input gives the same bytes."""
    from xml.etree import ElementTree

    top = ElementTree.Element("testsuites")
    passed: dict[str, frozenset[str]] = {}  # by study, since alike hulls share what passed
    if result.file_outcomes:
        cases: Cases = {}
        for outcome in result.file_outcomes:
            cases.setdefault(outcome.at.file or outcome.part, []).append(outcome)
        _add_suite(top, "files of the yard", cases, cards, prefix, {})
    for subject in result.subjects:
        if subject.study not in passed:
            passed[subject.study] = frozenset(_case_of(outcome) for outcome in subject.passes)
        cases = {name: [] for name in passed[subject.study]}
        for outcome in subject.news:
            cases.setdefault(_case_of(outcome), []).append(outcome)
        name = f"{'hull' if subject.is_hull else 'option set'} {subject.id}"
        _add_suite(top, name, cases, cards, prefix, subject.accepted)
    _count(top)
    ElementTree.indent(top)
    return f'<?xml version="1.0" encoding="UTF-8"?>\n{ElementTree.tostring(top, encoding="unicode")}\n'


def _case_of(outcome: Outcome) -> str:
    # Some parts have words behind their id: CB-PM under F-PNL.
    return outcome.circuit or outcome.part.partition(" ")[0] or outcome.part


def _add_suite(
    top: Element, name: str, cases: Cases, cards: Mapping[str, Card], prefix: str, accepted: Mapping[str, Acceptance]
) -> None:
    from xml.etree.ElementTree import SubElement

    suite = SubElement(top, "testsuite", name=flat(name))
    for case_name in sorted(cases, key=lambda text: (natural(text), text)):
        case = SubElement(suite, "testcase", name=flat(case_name), classname=flat(name))
        _fill(case, cases[case_name], cards, prefix, accepted)


def _fill(
    case: Element, news: Sequence[Outcome], cards: Mapping[str, Card], prefix: str, accepted: Mapping[str, Acceptance]
) -> None:
    """Put into a case what came of it; one element each, since strict readers allow no more."""
    from xml.etree.ElementTree import SubElement

    errors = [o for o in news if o.verdict is Verdict.FINDING and o.level is Level.ERROR]
    others = [o for o in news if o.verdict is Verdict.FINDING and o.level is not Level.ERROR]
    skipped = [o for o in news if o.verdict in (Verdict.ACCEPTED, Verdict.NOT_ASSESSED)]
    if errors:
        failure = SubElement(case, "failure", type=errors[0].check, message=_summary(errors))
        failure.text = _text(errors, cards, prefix)
    elif skipped:
        SubElement(case, "skipped", message=_skipped_words(skipped, accepted))
    if others or (errors and skipped):
        output = SubElement(case, "system-out")
        output.text = _text([*others, *(skipped if errors else [])], cards, prefix)


def _summary(outcomes: Sequence[Outcome]) -> str:
    first = f"{flat(outcomes[0].part)}: {flat(outcomes[0].fault)}"
    return first if len(outcomes) == 1 else f"{first} (and {len(outcomes) - 1} more)"


def _skipped_words(outcomes: Iterable[Outcome], accepted: Mapping[str, Acceptance]) -> str:
    return "; ".join(_skipped(outcome, accepted.get(fingerprint(outcome))) for outcome in outcomes)


def _skipped(outcome: Outcome, acceptance: Acceptance | None) -> str:
    told = f"{flat(outcome.part)}: {flat(outcome.fault)} [{outcome.check}]"
    if outcome.verdict is Verdict.NOT_ASSESSED:
        return f"not assessed: {told}; fill in: {flat(outcome.missing)}"
    until = f"; until {acceptance.expires} [{flat(acceptance.waiver)}]: {flat(acceptance.reason)}" if acceptance else ""
    return f"accepted {outcome.level.value}: {told}{until}"


def _text(outcomes: Iterable[Outcome], cards: Mapping[str, Card], prefix: str) -> str:
    return "\n".join(line for outcome in outcomes for line in _lines(outcome, cards[outcome.check], prefix))


def _lines(outcome: Outcome, card: Card, prefix: str) -> Iterator[str]:
    place = f"{at_from_root(outcome.at, prefix)}: " if outcome.at.file else ""
    word = outcome.level.value if outcome.verdict is Verdict.FINDING else outcome.verdict.value
    yield f"{place}{word}: {flat(outcome.part)}: {flat(outcome.fault)} [{card.id}]"
    if outcome.measure is not None:
        under = f" under {outcome.limit_set}" if outcome.limit_set else ""
        yield f"  measured{under}: {measure_words(outcome)}"
    if outcome.missing:
        yield f"  fill in: {flat(outcome.missing)}"
    if outcome.remedy:
        yield f"  remedy: {flat(outcome.remedy)}"


def _count(top: Element) -> None:
    """Write into the suites, and above them, how many cases they hold and how these came out."""
    totals: Counter[str] = Counter()
    for suite in top:
        tags = Counter(case[0].tag for case in suite if len(case))
        counts = {"tests": len(suite), "failures": tags["failure"], "skipped": tags["skipped"], "errors": 0}
        totals.update(counts)
        _set(suite, counts)
    _set(top, {name: totals[name] for name in ("tests", "failures", "skipped", "errors")})


def _set(element: Element, counts: Mapping[str, int]) -> None:
    for name, number in counts.items():
        element.set(name, str(number))
