"""Print findings as workflow commands, which a CI service shows beside the changed lines of a pull request.

The service shows ten errors, ten warnings and ten notices of a step and drops the rest without a
word, so no more are printed, worst first, and a last notice tells how many there are beyond.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Mapping

from checker.finding import Card, Level, Verdict
from checker.output.alerts import Alert, alerts, facts, path_from_root
from checker.output.text import count
from checker.reading.words import flat, shown
from checker.result.model import FleetResult

MOST_OF_A_KIND = 10
WORDS = {Level.ERROR: "error", Level.WARNING: "warning", Level.NOTE: "notice"}
TOLD = ("measured", "remedy", "path")


def annotation_commands(result: FleetResult, cards: Mapping[str, Card], prefix: str) -> str:
    """Return the commands, a line each; `prefix` is the yard's folder as seen from the root of its repository."""
    return "".join(f"{line}\n" for line in _commands(result, cards, prefix))


def _commands(result: FleetResult, cards: Mapping[str, Card], prefix: str) -> Iterator[str]:
    left: list[Alert] = []
    shown_of = dict.fromkeys(Level, 0)
    open_alerts = alerts(result, Verdict.FINDING)
    not_assessed = len(alerts(result, Verdict.NOT_ASSESSED))
    room = dict.fromkeys(Level, MOST_OF_A_KIND)
    room[Level.NOTE] -= 1  # the last notice
    for alert in open_alerts:
        if shown_of[alert.level] == room[alert.level]:
            left.append(alert)
        else:
            shown_of[alert.level] += 1
            yield _command(alert, cards[alert.first.check], prefix)
    words = _more(left, not_assessed)
    if words:
        yield f"::notice title=fairloom::{_message(words)}"


def _command(alert: Alert, card: Card, prefix: str) -> str:
    at = alert.at
    title = f"{card.id} on {alert.on}" if alert.on else card.id
    lines = [alert.sentence]
    lines += [f"{label}: {text}" for label, text in facts(alert, card) if label in TOLD or label.startswith("under ")]
    properties = {
        "file": flat(path_from_root(at.file, prefix)), "line": str(at.line), "endLine": str(at.line),
        "col": str(at.column), "title": shown(title),
    }  # fmt: skip
    told = ",".join(f"{name}={_property(value)}" for name, value in properties.items())
    return f"::{WORDS[alert.level]} {told}::{_message(chr(10).join(lines))}"


def _more(left: list[Alert], not_assessed: int) -> str:
    """Tell what the commands leave out, and where it stands; empty where they leave out nothing."""
    words = [
        count(number, f"more {level.value}")
        for level in Level
        if (number := sum(alert.level is level for alert in left))
    ]
    if not_assessed:
        words.append(count(not_assessed, "place not assessed"))
    return f"not shown here: {', '.join(words)}; the printed text and the reports tell them all" if words else ""


def _message(text: str) -> str:
    return text.replace("%", "%25").replace("\r", "%0D").replace("\n", "%0A")


def _property(text: str) -> str:
    return _message(text).replace(":", "%3A").replace(",", "%2C")


def without_commands(text: str) -> str:
    """Return text between two commands that keep the service from reading any command in it.

    The word that ends the pause is made of the text, so that no text can hold it.
    """
    word = hashlib.sha256(text.encode("utf-8", "backslashreplace")).hexdigest()
    return f"::stop-commands::{word}\n{text}::{word}::\n"
