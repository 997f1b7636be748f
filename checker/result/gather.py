"""Put outcomes in report order and give each finding its fingerprint."""

from __future__ import annotations

import hashlib
import json
import math
import re
from collections.abc import Iterable
from functools import lru_cache

from checker.finding import Outcome, Verdict
from checker.network.ladder import Rung

FINGERPRINT_RECIPE = "1"
"""Part of every fingerprint, so that a changed recipe shows as changed inputs, never as a match."""

_NUMBER = re.compile(r"([0-9]+)")


def fingerprint(outcome: Outcome) -> str:
    """Return twelve hexadecimal digits made of the check, the part and the inputs of a finding.

    Not of lines, wording, file names or order: a finding keeps its fingerprint when a file is
    renamed or a neighbour is edited.
    """
    made_of = [FINGERPRINT_RECIPE, outcome.check, outcome.limit_set, outcome.part, [list(i) for i in outcome.inputs]]
    text = json.dumps(made_of, ensure_ascii=True, separators=(",", ":"))
    return hashlib.sha256(text.encode()).hexdigest()[:12]


@lru_cache(maxsize=50_000)
def natural(text: str) -> tuple[tuple[int, int, str], ...]:
    """Return a sort key that puts P9 before P10."""
    pieces = (piece for piece in _NUMBER.split(text) if piece)
    return tuple((1, int(piece), "") if piece[0] in "0123456789" else (0, 0, piece) for piece in pieces)


def news_order(outcomes: Iterable[Outcome]) -> tuple[Outcome, ...]:
    """Return what did not pass: worst news first, then by place, check, part and limit set."""
    return tuple(sorted((o for o in outcomes if o.verdict is not Verdict.PASSED), key=_news_key))


PROTECTING = ("device-rating", "size-step", "double-feed")


def tightest(ladder: Iterable[Rung], outcomes: Iterable[Outcome]) -> dict[str, Outcome]:
    """Return for each device of a ladder the conductor it protects that is nearest its limit, or furthest past it."""
    nearest: dict[str, Outcome] = {}
    for outcome in outcomes:
        if outcome.check in PROTECTING and outcome.measure is not None:
            known = nearest.get(outcome.part)
            if known is None or _headroom(outcome) < _headroom(known):
                nearest[outcome.part] = outcome
    found: dict[str, Outcome] = {}
    for rung in ladder:
        protected = [nearest[name] for name in rung.protects if name in nearest]
        if protected:
            found[rung.device] = min(protected, key=lambda o: (_headroom(o), natural(o.part)))
    return found


def _headroom(outcome: Outcome) -> float:
    return -math.inf if outcome.measure is None else (outcome.measure.headroom_fraction or 0.0)


def pass_order(outcomes: Iterable[Outcome]) -> tuple[Outcome, ...]:
    """Return what passed, by circuit, part and check."""
    passed = [o for o in outcomes if o.verdict is Verdict.PASSED]
    # Each place is compared once with each other one, not each of the many looks at it.
    places = sorted({(o.circuit or o.part, o.part) for o in passed}, key=lambda row: (natural(row[0]), natural(row[1])))
    rank = {place: number for number, place in enumerate(places)}
    return tuple(sorted(passed, key=lambda o: (rank[o.circuit or o.part, o.part], o.check, o.limit_set)))


def _news_key(outcome: Outcome) -> tuple[object, ...]:
    return (
        outcome.verdict.rank, outcome.level.rank, outcome.at, outcome.check, natural(outcome.part),
        outcome.limit_set, outcome.fault,
    )  # fmt: skip
