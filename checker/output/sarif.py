"""Write a result as SARIF 2.1.0 (OASIS Standard), the format that code scanning and many editors read.

There are two flavours, since they do not mix. The one to keep tells everything: open findings, what
was accepted (as suppressed), what was not assessed (kind "open"). The one to upload tells the open
findings alone: code scanning does not know suppressions and would show what was accepted as open.
"""

from __future__ import annotations

import json
import re
from collections.abc import Iterable, Mapping
from typing import Any

from checker.finding import Card, Level, Span, Verdict
from checker.output.alerts import IDENTITY, Alert, alerts, facts, path_from_root
from checker.output.explain import check_page, markdown_check
from checker.output.text import count
from checker.reading.words import flat
from checker.result.model import Acceptance, FleetResult

SCHEMA = "https://json.schemastore.org/sarif-2.1.0.json"
HOME = "https://fairloom.invalid/"
"""Where the pages of the checks are read; the name stands for no server, as that of the schemas does."""
MOST_RESULTS = 5000
MOST_TEXT = 1024
MOST_LOCATIONS = 99
PROBLEM = {Level.ERROR: "error", Level.WARNING: "warning", Level.NOTE: "recommendation"}


def sarif_report(result: FleetResult, cards: Mapping[str, Card], prefix: str) -> str:
    """Return the flavour to keep: open, accepted and not assessed."""
    found = [alert for verdict in Verdict if verdict is not Verdict.PASSED for alert in alerts(result, verdict)]
    return _written(result, cards, found, prefix, ())


def sarif_upload(result: FleetResult, cards: Mapping[str, Card], prefix: str) -> str:
    """Return the flavour for code scanning: the open findings, the worst of them where there are too many."""
    found = alerts(result, Verdict.FINDING)
    left = len(found) - MOST_RESULTS
    notes = (f"left out: {count(left, 'more finding')}; a report for upload holds {MOST_RESULTS}",) if left > 0 else ()
    return _written(result, cards, found[:MOST_RESULTS], prefix, notes)


def _written(
    result: FleetResult, cards: Mapping[str, Card], found: Iterable[Alert], prefix: str, notes: Iterable[str]
) -> str:
    index = {name: number for number, name in enumerate(cards)}
    notices = [{"level": "warning", "message": {"text": note}} for note in notes]
    run = {
        "tool": {
            "driver": {
                "name": "fairloom",
                "semanticVersion": result.tool_version,
                "informationUri": HOME,
                "rules": [_rule(card) for card in cards.values()],
            }
        },
        "automationDetails": {"id": "wiring/"},
        "originalUriBaseIds": {"SRCROOT": {"description": {"text": "the root of the yard's repository"}}},
        "columnKind": "unicodeCodePoints",
        "invocations": [{"executionSuccessful": True, "toolExecutionNotifications": notices}],
        "results": [_result(alert, cards[alert.first.check], index, prefix) for alert in found],
    }
    document = {"$schema": SCHEMA, "version": "2.1.0", "runs": [run]}
    return json.dumps(document, ensure_ascii=False, indent=1) + "\n"


def _rule(card: Card) -> dict[str, Any]:
    return {
        "id": card.id,
        "name": _pascal(card.id),
        "shortDescription": {"text": _sentence(card.title)},
        "fullDescription": {"text": _cut(card.text)},
        "help": {"text": check_page(card), "markdown": markdown_check(card)},
        "helpUri": f"{HOME}checks/CHECKS.md#{card.id}",
        "defaultConfiguration": {"level": card.level.value},
        "properties": {
            "precision": "high",
            "problem.severity": PROBLEM[card.level],
            "tags": ["wiring", card.basis.value],
        },
    }


def _pascal(name: str) -> str:
    """Return a name such as VoltageDrop; it may not be the id with a capital."""
    words = name.split("-")
    return "".join(word.capitalize() for word in (words if len(words) > 1 else [*words, "check"]))


def _sentence(text: str) -> str:
    return text if text.endswith((".", "?", "!")) else f"{text}."


def _cut(text: str) -> str:
    """Return text on one line, cut after the last sentence that fits."""
    line = " ".join(text.split())
    return line if len(line) <= MOST_TEXT else line[:MOST_TEXT].rpartition(". ")[0] + "."


def _result(alert: Alert, card: Card, index: Mapping[str, int], prefix: str) -> dict[str, Any]:
    is_open = alert.first.verdict is Verdict.NOT_ASSESSED
    told: dict[str, Any] = {
        "ruleId": card.id,
        "ruleIndex": index[card.id],
        "kind": "open" if is_open else "fail",
        "level": "none" if is_open else alert.level.value,
        "message": {"text": _message(alert, card)},
        "locations": [{**_location(alert.at, prefix), "logicalLocations": _logical(alert)}],
    }
    others = [span for span in alert.also_at if span.file][:MOST_LOCATIONS]
    if others:
        told["relatedLocations"] = [{"id": n, **_location(span, prefix)} for n, span in enumerate(others, 1)]
    told["partialFingerprints"] = {IDENTITY: alert.identity, "primaryLocationLineHash": alert.identity}
    if alert.first.verdict is Verdict.ACCEPTED:
        unique = dict.fromkeys(acceptance for _, acceptance in sorted(alert.accepted.items()))
        told["suppressions"] = [
            {"kind": "external", "status": "accepted", "justification": _justification(acceptance)}
            for acceptance in unique
        ]
    return told


def _justification(acceptance: Acceptance) -> str:
    words = f"{acceptance.reason} (waiver {acceptance.waiver}, {acceptance.approved_by}, until {acceptance.expires})"
    return flat(f"{words}; evidence: {acceptance.evidence}" if acceptance.evidence else words)


def _message(alert: Alert, card: Card) -> str:
    """Return the fault as a sentence, then its facts; a bracket in a yard's text must not make a link."""
    lines = [_sentence(alert.sentence)]
    lines += [f"{label}: {text}" for label, text in facts(alert, card, leave_out=("why", "fingerprint"))]
    text = re.sub(r"[\\\[\]]", r"\\\g<0>", "\n".join(lines))
    return text.replace("{", "{{").replace("}", "}}")


def _location(span: Span, prefix: str) -> dict[str, Any]:
    """Return a place. A result knows where a thing starts, so the region is its first character."""
    from urllib.parse import quote

    uri = quote(path_from_root(span.file, prefix), safe="/")
    return {
        "physicalLocation": {
            "artifactLocation": {"uri": uri, "uriBaseId": "SRCROOT"},
            "region": {
                "startLine": span.line, "startColumn": span.column,
                "endLine": span.line, "endColumn": span.column + 1,
            },
        }
    }  # fmt: skip


def _logical(alert: Alert) -> list[dict[str, str]]:
    """Name the part by its path in the class, then the hulls and option sets."""
    first = alert.first
    steps = [alert.class_id, *([first.circuit] if first.circuit not in ("", first.part) else []), first.part]
    found = [{"name": flat(first.part), "fullyQualifiedName": flat("/".join(filter(None, steps))), "kind": "part"}]
    for names, kind in ((alert.hulls, "hull"), (alert.option_sets, "option set")):
        found += [{"name": flat(name), "fullyQualifiedName": flat(name), "kind": kind} for name in names]
    return found[: MOST_LOCATIONS + 1]
