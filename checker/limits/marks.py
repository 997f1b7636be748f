"""Mark what the limit tables say: a short hash of each, so that a later run can tell which have moved."""

from __future__ import annotations

import hashlib
import json
from functools import cache

from checker.limits.entered import Entered
from checker.limits.table_file import TABLES

Marks = dict[str, dict[str, str]]
"""By limit set ("common" for tables that belong to none) and table, eight hexadecimal digits."""


def table_marks(entered: Entered) -> Marks:
    """Return the marks of all tables: those that are shipped, and those that the yard has entered."""
    marks = {owner: dict(tables) for owner, tables in _shipped().items()}
    for owner, tables in entered.items():
        for name, table in tables.items():
            text = json.dumps(table.values, sort_keys=True, ensure_ascii=True, default=str)
            marks.setdefault(owner, {})[name] = _mark(text.encode())
    return {owner: dict(sorted(tables.items())) for owner, tables in sorted(marks.items())}


@cache
def _shipped() -> Marks:
    found: Marks = {}
    for path in sorted(TABLES.glob("*/*.yaml")):
        # Line ends depend on how the tool was checked out.
        found.setdefault(path.parent.name, {})[path.stem] = _mark(path.read_bytes().replace(b"\r\n", b"\n"))
    return found


def _mark(content: bytes) -> str:
    return hashlib.sha256(content).hexdigest()[:8]
