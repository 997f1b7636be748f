"""Hold what was found on one distinct boat, and write it down so that it need not be found again.

Written is JSON under zlib: text that says nothing but data, since whoever can write into a cache
must not be able to run anything in here.
"""

from __future__ import annotations

import json
import zlib
from collections.abc import Mapping
from dataclasses import astuple, dataclass, field
from typing import Any

from checker.boat.aboard import Aboard
from checker.finding import Level, Measure, Outcome, Span, Verdict
from checker.network.ladder import Rung
from checker.reading.document import Fault
from checker.result.model import EnteredTable, SetUse
from checker.result.sheet import Step
from checker.result.sisters import Length, Lengths


@dataclass(frozen=True, slots=True)
class Studied:
    """Hold what was found on one distinct boat, or why it could not be built.

    `passes` is empty where nobody asked for the list; `passed` counts them all the same. `steps`
    and `content` are empty where nobody asked for the plan of its test.
    """

    news: tuple[Outcome, ...] = ()
    passes: tuple[Outcome, ...] = ()
    passed: int = 0
    thin: int = 0
    sets: tuple[SetUse, ...] = ()
    ladder: tuple[Rung, ...] = ()
    tightest: Mapping[str, Outcome] = field(default_factory=dict)
    lengths: Lengths = field(default_factory=Lengths)
    aboard: Aboard = field(default_factory=Aboard)
    steps: tuple[Step, ...] = ()
    content: str = ""
    faults: tuple[Fault, ...] = ()


@dataclass(frozen=True, slots=True)
class Written:
    """Hold a study as bytes: all but its passes, and its passes, which only reports need."""

    most: bytes
    passes: bytes


def written(studied: Studied) -> Written:
    """Return a study as bytes. One with faults is not to be kept, since its files must be mended first."""
    if studied.faults:
        raise ValueError("a boat that could not be built has no study")
    most = {
        "news": [_row(outcome) for outcome in studied.news],
        "passed": studied.passed,
        "thin": studied.thin,
        "sets": [astuple(use) for use in studied.sets],
        "ladder": [astuple(rung) for rung in studied.ladder],
        "tightest": {device: _row(outcome) for device, outcome in studied.tightest.items()},
        "lengths_m": dict(studied.lengths.all_m),
        "own_lengths": [astuple(length) for length in studied.lengths.own],
        "aboard": dict(studied.aboard.lines),
        "in_feet": sorted(studied.aboard.in_feet),
        "steps": studied.steps,
        "content": studied.content,
    }
    return Written(_packed(most), _packed([_row(outcome) for outcome in studied.passes]))


def read_study(one: Written, *, lists_passes: bool) -> Studied:
    """Return the study that was written.

    Raises:
        ValueError: If the bytes are no such study.
    """
    try:
        most = json.loads(zlib.decompress(one.most))
        passes = json.loads(zlib.decompress(one.passes)) if lists_passes else []
        return Studied(
            news=tuple(_outcome(row) for row in most["news"]),
            passes=tuple(_outcome(row) for row in passes),
            passed=most["passed"],
            thin=most["thin"],
            sets=tuple(_set_use(row) for row in most["sets"]),
            ladder=tuple(_rung(row) for row in most["ladder"]),
            tightest={device: _outcome(row) for device, row in most["tightest"].items()},
            lengths=Lengths(
                most["lengths_m"],
                tuple(
                    Length(conductor, circuit, length_m, Span(*at))
                    for conductor, circuit, length_m, at in most["own_lengths"]
                ),
            ),
            aboard=Aboard(most["aboard"], frozenset(most["in_feet"])),
            steps=tuple(Step(*row) for row in most["steps"]),
            content=most["content"],
        )
    except (zlib.error, KeyError, TypeError, IndexError) as error:
        raise ValueError("no study") from error


def _packed(data: Any) -> bytes:
    # JSON writes each figure with all the digits that tell it from its neighbours: it comes back the same.
    return zlib.compress(json.dumps(data, separators=(",", ":")).encode(), 1)


def _row(outcome: Outcome) -> list[Any]:
    return [outcome.verdict.value, outcome.check, outcome.level.value, *outcome[3:]]


def _outcome(row: list[Any]) -> Outcome:
    (
        verdict, check, level, part, at, limit_set, circuit, measure, fault, remedy, state, path, missing, note,
        inputs, also_at, is_thin, house, rests_on,
    ) = row  # fmt: skip
    return Outcome(
        Verdict(verdict), check, Level(level), part, Span(*at), limit_set, circuit,
        None if measure is None else Measure(*measure), fault, remedy, state, tuple(path), missing, note,
        tuple((name, value) for name, value in inputs), tuple(Span(*place) for place in also_at), is_thin,
        tuple(house), rests_on,
    )  # fmt: skip


def _set_use(row: list[Any]) -> SetUse:
    name, title, why, from_memory, caution, entered, not_entered = row
    return SetUse(
        name, title, why, from_memory, caution, tuple(EnteredTable(*table) for table in entered), tuple(not_entered)
    )


def _rung(row: list[Any]) -> Rung:
    values: list[Any] = [tuple(value) if isinstance(value, list) else value for value in row]
    return Rung(*values)
