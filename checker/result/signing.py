"""Mark what a hull is judged by: its wiring, and the tables, so that a signature can name both."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable, Mapping

from checker.boat.aboard import Aboard
from checker.checks.check import HouseChange
from checker.limits.house_figures import COMMON
from checker.limits.marks import Marks
from checker.result.model import SetUse


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
