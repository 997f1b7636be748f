"""Write the result as one JSON document; schemas/result.json describes it.

Each outcome stands on one line, so that the document diffs like the text reports.
"""

from __future__ import annotations

import json
from collections import Counter
from collections.abc import Mapping
from dataclasses import asdict
from typing import Any

from checker.boat.aboard import facts_of
from checker.checks.check import HouseChange
from checker.finding import Card, Outcome, Verdict
from checker.network.ladder import Rung
from checker.result.aboard import Packed, packed
from checker.result.gather import fingerprint
from checker.result.model import FleetResult, SetUse, Study, SubjectResult

SCHEMA_VERSION = "1"


def json_report(result: FleetResult, cards: Mapping[str, Card]) -> str:
    """Return the result as JSON text: keys in a fixed order, numbers rounded to nine digits."""
    aboard = packed(result.studies, result.subjects)
    document: dict[str, Any] = {
        "schema_version": SCHEMA_VERSION,
        "tool": {"name": "fairloom", "version": result.tool_version},
        "yard": result.yard,
        "clean": result.is_clean,
        "open_errors": result.open_errors,
        "house_rules": [_Line(_house(change)) for change in result.house],
        "sizes": _Line(result.sizes),
        "tables": {owner: _Line(marks) for owner, marks in result.marks.items()},
        "checks": [_Line(_card(card)) for card in cards.values()],
        "subjects": [_subject(subject) for subject in result.subjects],
        "studies": [_study(study, aboard.get(study.name)) for study in result.studies],
        "file_findings": [_Line(_outcome(outcome)) for outcome in result.file_outcomes],
        "not_studied": list(result.unstudied),
    }
    return _written(document, 0) + "\n"


class _Line(dict[str, Any]):
    """Mark a mapping that is written on one line."""


def _card(card: Card) -> dict[str, Any]:
    return {"id": card.id, "title": card.title, "level": card.level.value, "basis": card.basis.value,
            "citation": card.citation, "why": card.why}  # fmt: skip


def _set_use(use: SetUse) -> _Line:
    facts: dict[str, Any] = {
        "id": use.id, "title": use.title, "why": use.why, "figures_from_memory": use.from_memory,
    }  # fmt: skip
    if use.entered:
        facts["entered"] = [asdict(table) for table in use.entered]
    if use.not_entered:
        facts["not_entered"] = list(use.not_entered)
    return _Line(facts)


def _house(change: HouseChange) -> dict[str, Any]:
    """Return one of the yard's own rules."""
    return {
        "kind": change.kind, "what": change.what, "limit_set": change.limit_set, "old": change.old, "new": change.new,
        "loosened": change.is_loosened, "clause": change.clause, "basis": change.basis.value, "reason": change.reason,
        "file": change.at.file, "line": change.at.line, "column": change.at.column,
    }  # fmt: skip


def _counts(subject: SubjectResult) -> _Line:
    return _Line({verdict.value.replace(" ", "_"): subject.count(verdict) for verdict in Verdict})


def _subject(subject: SubjectResult) -> dict[str, Any]:
    accepted = [
        _Line(
            fingerprint=mark, waiver=a.waiver, reason=a.reason, approved_by=a.approved_by, expires=a.expires,
            **({"evidence": a.evidence} if a.evidence else {}),
        )
        for mark, a in sorted(subject.accepted.items())
    ]  # fmt: skip
    return {
        "id": subject.id,
        "kind": "hull" if subject.is_hull else "option set",
        "class": subject.class_id,
        "revision": subject.revision,
        "class_revision": subject.class_revision,
        "options": list(subject.options),
        "status": subject.status,
        "changes": list(subject.changes),
        "study": subject.study,
        "open_errors": subject.open_errors,
        "counts": _counts(subject),
        "accepted": accepted,
        "own_findings": [_Line(_outcome(outcome)) for outcome in subject.own],
    }


def _study(study: Study, aboard: Packed | None) -> dict[str, Any]:
    return {
        "name": study.name,
        "limit_sets": [_set_use(use) for use in study.sets],
        "found": [_Line(_outcome(outcome)) for outcome in study.news],
        "protection": [_Line(_rung(rung, study.tightest.get(rung.device))) for rung in study.ladder],
        "passed": _passes(study),
        **({} if aboard is None else {"aboard": _aboard(aboard)}),
    }


def _aboard(packed: Packed) -> dict[str, Any]:
    """Return what is aboard: like another study, without some things, with these."""
    return {"like": packed.like, "without": list(packed.without),
            "things": {key: _Line(facts_of(line)) for key, line in packed.lines.items()}}  # fmt: skip


def _rung(rung: Rung, nearest: Outcome | None) -> dict[str, Any]:
    """Return one device of the ladder; what is not known is left out."""
    facts: dict[str, Any] = {
        "device": rung.device, "above": rung.above, "depth": rung.depth, "part": rung.part,
        "rating_a": _number(rung.rating_a), "serves": list(rung.serves),
        "prospective_a": _number(rung.prospective_a or None), "interrupting_a": _number(rung.interrupting_a),
        "far_end": rung.far_post or None, "far_end_a": _number(rung.far_a or None), "opens_s": _number(rung.opens_s),
        "selective_up_to_a": _number(rung.selective_up_to_a),
    }  # fmt: skip
    if nearest is not None and nearest.measure is not None:
        facts["protects"] = nearest.part
        facts["exposed_a"], facts["allowed_a"] = _number(nearest.measure.value), _number(nearest.measure.limit)
    return {key: value for key, value in facts.items() if value is not None}


def _passes(study: Study) -> list[dict[str, Any]]:
    """Return the passes by check, limit set and quantity; a place is [value, limit, headroom], or a note."""
    groups: dict[tuple[str, str, str, str, bool, bool], dict[str, Any]] = {}
    looks: Counter[tuple[object, ...]] = Counter()
    told: Any
    for outcome in study.passes:
        measure = outcome.measure
        if measure is None:
            key, told = (outcome.check, outcome.limit_set, "", "", False, False), outcome.note or ""
        else:
            unit = measure.unit or "fraction"
            key = (outcome.check, outcome.limit_set, measure.quantity, unit, measure.at_least, measure.is_stepped)
            told = [_number(x) for x in (measure.value, measure.limit, measure.headroom_fraction)]
        # A part that one check looks at more than once has each look under a name of its own.
        times = looks[key, outcome.part] = looks[key, outcome.part] + 1
        groups.setdefault(key, {})[outcome.part if times == 1 else f"{outcome.part} #{times}"] = told
    return [
        {
            "check": check,
            "limit_set": limit_set,
            **({"quantity": quantity, "unit": unit, "sense": "at least" if at_least else "at most"} if unit else {}),
            **({"stepped": True} if stepped else {}),
            "places": places,
        }
        for (check, limit_set, quantity, unit, at_least, stepped), places in sorted(groups.items())
    ]


def _outcome(outcome: Outcome) -> dict[str, Any]:
    """Return the facts of an outcome that is no pass; empty ones are left out."""
    facts: dict[str, Any] = {"verdict": outcome.verdict.value, "check": outcome.check, "part": outcome.part}
    if outcome.limit_set:
        facts["limit_set"] = outcome.limit_set
    if outcome.circuit:
        facts["circuit"] = outcome.circuit
    measure = outcome.measure
    if measure is not None:
        facts |= {"quantity": measure.quantity, "value": _number(measure.value), "limit": _number(measure.limit),
                  "unit": measure.unit or "fraction", "sense": "at least" if measure.at_least else "at most",
                  "headroom": _number(measure.headroom_fraction)}  # fmt: skip
    facts |= {"level": outcome.level.value, "fault": outcome.fault}
    if outcome.at.file:
        facts |= {"file": outcome.at.file, "line": outcome.at.line, "column": outcome.at.column}
    for name in ("remedy", "state", "missing"):
        value = getattr(outcome, name)
        if value:
            facts[name] = value
    if outcome.also_at:
        facts["also_at"] = [str(span) for span in outcome.also_at]
    if outcome.path:
        facts["path"] = list(outcome.path)
    if outcome.house:
        facts["house_rules"] = list(outcome.house)
    if outcome.rests_on:
        facts["rests_on"] = outcome.rests_on
    if outcome.verdict is not Verdict.NOT_ASSESSED:
        facts["fingerprint"] = fingerprint(outcome)
    return facts


SMALLEST = 1e-9
"""What is less, in any unit, is the rounding of a difference, and would change with a neighbour's cable."""


def _number(value: float | None) -> float | str | None:
    """Round a figure so that it prints alike on every machine; JSON has no infinity."""
    if value is None:
        return None
    if value in (float("inf"), float("-inf")):
        return "unlimited"
    if abs(value) < SMALLEST:
        return 0
    rounded = float(f"{value:.9g}")
    return int(rounded) if rounded.is_integer() and abs(rounded) < 1e15 else rounded


_compact = json.JSONEncoder(ensure_ascii=False, separators=(", ", ": ")).encode


def _written(value: Any, depth: int) -> str:
    """Write nested values indented, and marked mappings on one line."""
    if isinstance(value, _Line) or not isinstance(value, (dict, list)) or not value:
        return _compact(value)
    pad, end = "  " * (depth + 1), "  " * depth
    if isinstance(value, list):
        if not any(isinstance(item, (dict, list)) for item in value):
            return _compact(value)  # figures of one place, or a path
        return "[\n" + ",\n".join(pad + _written(item, depth + 1) for item in value) + f"\n{end}]"
    rows = (f"{pad}{_compact(key)}: {_written(item, depth + 1)}" for key, item in value.items())
    return "{\n" + ",\n".join(rows) + f"\n{end}}}"
