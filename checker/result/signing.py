"""Mark what a hull is judged by: its wiring, and the tables, so that a signature can name both."""

from __future__ import annotations

import datetime
import hashlib
import json
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

from checker import __version__
from checker.boat.aboard import Aboard
from checker.checks.check import HouseChange
from checker.errors import UsageError
from checker.limits.house_figures import COMMON
from checker.limits.marks import Marks
from checker.reading.document import compose
from checker.reading.yard_files import hull_file
from checker.result.model import Handover, SetUse, SubjectResult


def content_mark(aboard: Aboard) -> str:
    """Return twelve hexadecimal digits of what is aboard: in SI, without positions, notes or the yard's units."""
    text = json.dumps(dict(aboard.lines), sort_keys=True, ensure_ascii=True)
    return hashlib.sha256(text.encode()).hexdigest()[:12]


def tables_mark(marks: Marks, sets: Iterable[SetUse], changes: Iterable[HouseChange]) -> str:
    """Return eight hexadecimal digits of the limit tables that judge a boat, the yard's own rules included."""
    judged_by: Mapping[str, Mapping[str, str]] = {
        owner: marks[owner] for owner in sorted({COMMON, *(use.id for use in sets)}) if owner in marks
    }
    text = json.dumps([judged_by, [change.words for change in changes]], sort_keys=True, ensure_ascii=True)
    return hashlib.sha256(text.encode()).hexdigest()[:8]


FIRST_STATES = ("planned", "in-build")
"""The states of a hull that signing ends."""


def sign(folder: Path, subject: SubjectResult, handover: Handover, role: str, day: datetime.date) -> str:
    """Write a signature into the file of a hull, in place of an earlier one; return the file's name.

    The text of the file stays as it is, but for the signature and a status that was not yet
    "signed": the diff shows these alone.

    Raises:
        UsageError: If the file cannot be written, or is written in a way that text cannot be added to.
    """
    name = hull_file(folder, subject.id)
    path = folder / name
    try:
        content = path.read_bytes()
        text = content.decode("utf-8")
        newline = "\r\n" if "\r\n" in text else "\n"
        facts = {"role": role, "date": day.isoformat(), "content": handover.content, "tool": __version__,
                 "tables": handover.tables}  # fmt: skip
        signed = newline.join([*_without_signature(text), *_block(facts), ""])
        before, after = compose(content, name).data, compose(signed.encode(), name)
        if after.faults or after.data != {**_unsigned(before), "status": _status(before), "signed": facts}:
            raise UsageError(f"{name} is written in a way that no signature can be added to: write one field a line")
        path.write_bytes(signed.encode())
    except OSError as error:
        raise UsageError(f"{name} cannot be written: {error.strerror}") from error
    return name


def _without_signature(text: str) -> list[str]:
    """Return the lines of a hull's file without its signature, with the status that signing gives it."""
    lines: list[str] = []
    is_inside = False
    for line in text.splitlines():
        is_inside = line.startswith("signed:") or (is_inside and line.startswith((" ", "\t")))
        if not is_inside:
            lines.append(line)
    while lines and not lines[-1].strip():
        lines.pop()
    return [_signed_status(line) for line in lines]


def _signed_status(line: str) -> str:
    for state in FIRST_STATES:
        if line.startswith(f"status: {state}"):
            return line.replace(state, "signed", 1)
    return line


def _block(facts: Mapping[str, str]) -> list[str]:
    # JSON strings are YAML strings too, for all that can be printed.
    return ["signed:", *(f"  {name}: {json.dumps(value, ensure_ascii=False)}" for name, value in facts.items())]


def _unsigned(data: dict[str, Any]) -> dict[str, Any]:
    return {name: value for name, value in data.items() if name != "signed"}


def _status(data: dict[str, Any]) -> str:
    return "signed" if data.get("status") in FIRST_STATES else str(data.get("status"))
