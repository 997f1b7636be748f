"""Tell each fault once, for the reports that other programs read: its place, its hulls, its identity.

A fault that many hulls share stands in one line of one file and is mended there; it is one alert
that names them all, not one for each hull. An alert's identity is made of the fingerprints of its
findings, so that it holds when a file is renamed, a line moves or a sister hull is added, and of
the class, or of the hull where the fault stands in a hull's own file. Two alerts of a report never
share an identity: what would share one is one alert.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

from checker.finding import NOWHERE, Card, Level, Outcome, Span, Verdict
from checker.output.lines import finding_lines
from checker.output.text import Block, grouped
from checker.reading.words import flat
from checker.reading.yard_files import YARD_FILE
from checker.result.gather import fingerprint, natural
from checker.result.model import Acceptance, FleetResult

IDENTITY = "fairloom/v1"
"""The name under which other programs keep an alert's identity; a new recipe takes a new name."""
MOST_NAMED = 8
HULLS, CLASSES = "hulls/", "classes/"


@dataclass(frozen=True, slots=True, kw_only=True)
class Alert:
    """Hold one fault: its outcomes, one for each limit set, and the hulls and option sets that it is on."""

    identity: str
    outcomes: tuple[Outcome, ...]
    class_id: str
    hulls: tuple[str, ...]
    option_sets: tuple[str, ...]
    accepted: Mapping[str, Acceptance]
    also_at: tuple[Span, ...]

    @property
    def first(self) -> Outcome:
        """Return the outcome that tells the fault."""
        return self.outcomes[0]

    @property
    def level(self) -> Level:
        """Return the level of the fault."""
        return self.first.level

    @property
    def at(self) -> Span:
        """Return the line that a person would edit; the yard's own file where there is none."""
        return Span(YARD_FILE, 1, 1) if self.first.at == NOWHERE else self.first.at

    @property
    def subject(self) -> str:
        """Name the part: W043 of M07."""
        part, circuit = self.first.part, self.first.circuit
        return flat(part if circuit in ("", part) else f"{part} of {circuit}")

    @property
    def sentence(self) -> str:
        """Return the fault as one sentence that stands alone."""
        return f"{self.subject}: {flat(self.first.fault)}"

    @property
    def on(self) -> str:
        """Name the hulls and option sets, the first few of many; empty for a fault of the yard's files."""
        return "; ".join(filter(None, (_named(self.hulls, "hull"), _named(self.option_sets, "option set"))))


def alerts(result: FleetResult, verdict: Verdict) -> list[Alert]:
    """Return the faults of a result that have a verdict, each once, worst first."""
    class_of = {subject.id: subject.class_id for subject in result.subjects}
    hulls = frozenset(subject.id for subject in result.subjects if subject.is_hull)
    found: dict[str, Alert] = {}
    for block in grouped(result, verdict):
        alert = _alert(block, class_of.get(block.names[0], "") if block.names else "", hulls)
        known = found.get(alert.identity)
        found[alert.identity] = alert if known is None else _both(known, alert)
    return sorted(found.values(), key=_order)


def _order(alert: Alert) -> tuple[object, ...]:
    first = alert.first
    return (first.level.rank, alert.at, first.check, natural(first.part), alert.identity)


def _alert(block: Block, class_id: str, hulls: frozenset[str]) -> Alert:
    at = block.outcomes[0].at
    mine = tuple(sorted((name for name in block.names if name in hulls), key=natural))
    scope = ["hull", *mine[:1]] if at.file.startswith(HULLS) else ["class", class_id] * at.file.startswith(CLASSES)
    waivers = sorted({acceptance.waiver for acceptance in block.accepted.values()})
    missing = sorted({outcome.missing for outcome in block.outcomes if outcome.missing})
    return Alert(
        identity=_identity(scope, sorted(fingerprint(outcome) for outcome in block.outcomes), waivers, missing),
        outcomes=block.outcomes,
        class_id=class_id,
        hulls=mine,
        option_sets=_by_options(name for name in block.names if name not in hulls),
        accepted=block.accepted,
        also_at=tuple(dict.fromkeys(span for outcome in block.outcomes for span in outcome.also_at)),
    )


def _identity(*made_of: Sequence[str]) -> str:
    """Return sixteen hexadecimal digits."""
    text = "\n".join("\t".join(map(repr, part)) for part in made_of)
    return hashlib.sha256(text.encode("utf-8", "backslashreplace")).hexdigest()[:16]


def _both(one: Alert, other: Alert) -> Alert:
    """Return two alerts of one identity as one: the first tells the fault, both name their places and hulls."""
    places = dict.fromkeys((*one.also_at, other.at, *other.also_at))
    return replace(
        one,
        hulls=tuple(sorted({*one.hulls, *other.hulls}, key=natural)),
        option_sets=_by_options({*one.option_sets, *other.option_sets}),
        also_at=tuple(place for place in places if place != one.at),
    )


def _by_options(names: Iterable[str]) -> tuple[str, ...]:
    """Return option sets in order: those of fewer options first."""
    return tuple(sorted(names, key=lambda name: (name.count(" + "), natural(name))))


def _named(names: Sequence[str], word: str) -> str:
    if not names:
        return ""
    told = ", ".join(map(flat, names[:MOST_NAMED]))
    more = len(names) - MOST_NAMED
    return told if more <= 0 else f"{told} and {more} more {word}{'' if more == 1 else 's'}"


def facts(alert: Alert, card: Card, leave_out: Iterable[str] = ()) -> Iterator[tuple[str, str]]:
    """Yield what the text reports tell of a fault: a label and its text."""
    told_otherwise = {"at", "see also", *leave_out}
    for line in list(finding_lines(alert.outcomes, card, alert.on, alert.accepted))[1:]:
        label, _, text = line.strip().partition(": ")
        if label not in told_otherwise:
            yield label, text


def path_from_root(file: str, prefix: str) -> str:
    """Return the path of a yard's file from the root of its repository; `prefix` is the yard's own."""
    return f"{prefix}/{file}" if prefix else file


def at_from_root(span: Span, prefix: str) -> str:
    """Print a place with its path from the root of the repository, so that it can start a line of any output."""
    place = flat(f"{path_from_root(span.file, prefix)}:{span.line}:{span.column}")
    return f"./{place}" if place.startswith((":", "#")) else place
