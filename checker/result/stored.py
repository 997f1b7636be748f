"""Make a side of a comparison from a JSON result that `fairloom check --reports` wrote.

The file may come from anywhere: what is not as it should be ends the comparison, with what is wrong.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from typing import Any, NoReturn

from checker.boat.aboard import Aboard, line_of
from checker.errors import CheckerError
from checker.reading.words import shown
from checker.result.aboard import Packed, unpacked
from checker.result.side import Figures, Found, Marks, Place, PlaceKey, Rule, Side, SideStudy, SideSubject, Waived

SCHEMA_VERSION = "1"
DAMAGED = (AttributeError, IndexError, KeyError, OverflowError, RecursionError, TypeError, ValueError)
"""What Python raises where a value is missing, or is something else than it should be."""


class StoredResultError(CheckerError):
    """A JSON result cannot be used."""


def side_of_text(text: str, name: str) -> Side:
    """Return a JSON result as a side; `name` is what the reader called it.

    Raises:
        StoredResultError: If the text is no JSON result, is of another schema version, or is damaged.
    """
    try:
        document = json.loads(text, parse_constant=_no_such_number)
    except (ValueError, RecursionError) as error:
        raise StoredResultError(f"{shown(name)} is no JSON result: it cannot be read as JSON") from error
    if not isinstance(document, dict) or "schema_version" not in document:
        raise StoredResultError(f"{shown(name)} is no JSON result of fairloom: it names no schema version")
    if document["schema_version"] != SCHEMA_VERSION:
        raise StoredResultError(
            f"{shown(name)} is of schema version {shown(str(document['schema_version']))}, and this fairloom reads "
            f"{SCHEMA_VERSION}: make it anew with `fairloom check --reports`"
        )
    try:
        return _side(document, name)
    except DAMAGED as error:
        raise StoredResultError(
            f"{shown(name)} is damaged: make it anew with `fairloom check --reports`"
        ) from error  # fmt: skip


def _no_such_number(word: str) -> NoReturn:
    raise ValueError(f"{word} is no number of JSON")


def _side(document: Mapping[str, Any], name: str) -> Side:
    studies = _studies(_rows(document["studies"]))
    subjects = tuple(map(_subject, _rows(document["subjects"])))
    if missing := [subject.study for subject in subjects if subject.study not in studies]:
        raise ValueError(f"there is no study {missing[0]}")
    return Side(
        name=name,
        tool_version=_text(document["tool"]["version"]),
        subjects=subjects,
        studies=studies,
        file_found=tuple(map(_found, _rows(document["file_findings"]))),
        unstudied=tuple(map(_text, _rows(document["not_studied"]))),
        rules=tuple(map(_rule, _rows(document["house_rules"]))),
        sizes=tuple((_text(key), _text(value)) for key, value in document.get("sizes", {}).items()),
        marks=_marks(document.get("tables", {})),
    )


def _text(value: object) -> str:
    if not isinstance(value, str):
        raise TypeError("no text")
    return value


def _rows(value: object) -> list[Any]:
    if not isinstance(value, list):
        raise TypeError("no list")
    return value


def _whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise TypeError("no whole number")
    return value


def _number(value: object) -> float:
    if value == "unlimited":
        return float("inf")
    if not isinstance(value, int | float) or isinstance(value, bool):
        raise TypeError("no number")
    return float(value)


def _marks(tables: Mapping[str, Any]) -> Marks:
    return {_text(owner): {_text(k): _text(v) for k, v in marks.items()} for owner, marks in tables.items()}


def _rule(row: Mapping[str, Any]) -> Rule:
    kind, what, limit_set, old, new, reason = (
        _text(row[key]) for key in ("kind", "what", "limit_set", "old", "new", "reason")
    )
    return Rule(kind, what, limit_set, old, new, bool(row["loosened"]), reason, _at(row))


def _at(row: Mapping[str, Any]) -> str:
    return f"{_text(row['file'])}:{_whole(row['line'])}:{_whole(row['column'])}" if row.get("file") else ""


def _subject(row: Mapping[str, Any]) -> SideSubject:
    return SideSubject(
        id=_text(row["id"]),
        is_hull=row["kind"] == "hull",
        class_id=_text(row["class"]),
        study=_text(row["study"]),
        revision=_whole(row["revision"]),
        class_revision=_whole(row["class_revision"]),
        options=tuple(map(_text, row["options"])),
        status=_text(row["status"]),
        changes=tuple(map(_text, row["changes"])),
        accepted={
            _text(a["fingerprint"]): Waived(*(_text(a[key]) for key in ("waiver", "reason", "approved_by", "expires")))
            for a in _rows(row["accepted"])
        },
        own=tuple(map(_found, _rows(row["own_findings"]))),
    )


def _found(row: Mapping[str, Any]) -> Found:
    is_finding = row["verdict"] != "not assessed"
    texts = {
        key: _text(row.get(key, ""))
        for key in ("limit_set", "circuit", "state", "remedy", "missing", "file", "fingerprint")
    }
    return Found(
        is_finding=is_finding,
        check=_text(row["check"]),
        level=_text(row["level"]),
        part=_text(row["part"]),
        fault=_text(row["fault"]),
        path=tuple(map(_text, row.get("path", ()))),
        at=_at(row),
        figures=_figures(row, row["value"], row["limit"]) if "value" in row else None,
        **texts,
    )


def _figures(row: Mapping[str, Any], value: object, limit: object) -> Figures:
    unit = _text(row["unit"])
    return Figures(
        _text(row["quantity"]), _number(value), _number(limit), "" if unit == "fraction" else unit,
        row["sense"] == "at least", bool(row.get("stepped", False)),
    )  # fmt: skip


def _studies(rows: list[Mapping[str, Any]]) -> dict[str, SideStudy]:
    boxes = {_text(row["name"]): _packed(row["aboard"]) for row in rows if "aboard" in row}
    aboard: Mapping[str, Aboard] = unpacked(boxes)
    return {
        row["name"]: SideStudy(
            _text(row["name"]),
            tuple(map(_found, _rows(row["found"]))),
            _places(_rows(row["passed"])),
            tuple(_text(use["id"]) for use in row["limit_sets"]),
            aboard.get(row["name"]),
        )
        for row in rows
    }


def _packed(row: Mapping[str, Any]) -> Packed:
    return Packed(
        _text(row["like"]),
        tuple(map(_text, row["without"])),
        {_text(key): line_of({_text(k): _fact(v) for k, v in facts.items()}) for key, facts in row["things"].items()},
    )


def _fact(value: object) -> str | float | bool:
    if not isinstance(value, str | int | float):
        raise TypeError("no fact")
    return value


def _places(groups: list[Mapping[str, Any]]) -> dict[PlaceKey, Place]:
    places: dict[PlaceKey, Place] = {}
    for group in groups:
        check, limit_set = _text(group["check"]), _text(group["limit_set"])
        for part, told in group["places"].items():
            place = Place(None, told) if isinstance(told, str) else Place(_figures(group, told[0], told[1]))
            places[PlaceKey(check, limit_set, _text(part), place.looks_at)] = place
    return places
