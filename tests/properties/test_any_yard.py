"""Whatever stands in a yard's files, a run ends with a result that can be printed, and never with a crash.

A fast sample of a longer search: fields taken out, doubled, renamed and replaced at random, in
files and in as-built changes. What it found became a test of its own beside what it broke.
"""

from __future__ import annotations

import copy
import datetime
import json
import random
import re
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

import pytest

from checker.output.files import report_files
from checker.output.screen import screen_report
from checker.pipeline import all_cards, check_fleet
from checker.reading.document import compose
from tests.dory_yard import DORY, write

EXAMPLE = Path(__file__).resolve().parents[2] / "fleet_example"
CARDS = {card.id: card for card in all_cards()}
FIGURES = ["0", "1", "0.000000001", "999999999", "4", "24", "-5", "36", "0000", "2/0"]
WRONG: list[Any] = [
    None, True, False, 0, -1, 4.0, 1.5, 1e308, 10**17, "", "x", "A\n", "not recorded", "never", "full", [], {}, [[]],
    ["a"], {"a": {}}, [None], {"x": None}, "\x1b[31m\n::error", "é" * 60,
]  # fmt: skip

Data = dict[str, Any]


def paths_in(data: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    """Yield the path of every value below the top."""
    inside = data.items() if isinstance(data, dict) else enumerate(data) if isinstance(data, list) else ()
    for step, value in inside:
        yield (*path, step)
        yield from paths_in(value, (*path, step))


def value_at(data: Any, path: tuple[Any, ...]) -> Any:
    for step in path:
        data = data[step]
    return data


class Mutation:
    """Change a yard's data at random, by a seed."""

    def __init__(self, files: Mapping[str, Data], seed: int) -> None:
        self._random = random.Random(seed)
        self._files = files
        self._texts = sorted(
            {v for data in files.values() for p in paths_in(data) if isinstance(v := value_at(data, p), str)}
        )
        self._names = sorted(
            {step for data in files.values() for p in paths_in(data) for step in p if isinstance(step, str)}
        )

    def mutant(self) -> dict[str, str]:
        """Return the files with one to four values changed."""
        files = {name: copy.deepcopy(data) for name, data in self._files.items()}
        for _ in range(self._random.choice([1, 1, 1, 2, 4])):
            name = self._random.choice(sorted(files))
            if name.startswith("hulls/") and self._random.random() < 0.8:
                self._patch(files[name])
            else:
                self._edit(files[name])
        return {name: json.dumps(data, indent=1) for name, data in files.items()}

    def _edit(self, data: Any) -> None:
        paths = list(paths_in(data))
        if not paths:
            return
        *steps, last = self._random.choice(paths)
        parent = value_at(data, tuple(steps))
        chance = self._random.random()
        if chance < 0.3:
            del parent[last]
        elif chance < 0.8 or isinstance(parent, list):
            parent[last] = self._another(parent[last])
        elif chance < 0.9:
            parent[self._random.choice(self._names)] = copy.deepcopy(parent[last])
        else:
            parent[self._random.choice(self._names)] = parent.pop(last)

    def _patch(self, hull: Any) -> None:
        """Put a piece of a class, or its removal, into an as-built change."""
        if not isinstance(hull, dict):
            return
        classes = [d for n, d in self._files.items() if n.startswith("classes/") and "/options/" not in n]
        source = self._random.choice(classes)
        path = self._random.choice([p for p in paths_in(source) if all(isinstance(step, str) for step in p)])
        change = {"what": "as built", "set": {}}
        hull["changes"] = {"DEV-1": change}
        here: Any = change["set"]
        for step in path[:-1]:
            here = here.setdefault(step, {})
        here[path[-1]] = self._random.choice([None, {}, self._another(value_at(source, path))])

    def _another(self, old: Any) -> Any:
        unit = re.search(r" (A|V|m|mm|AWG|mm2|C|Ah|mohm|ohm|s|ft)$", old) if isinstance(old, str) else None
        if unit and self._random.random() < 0.7:
            return self._random.choice(FIGURES) + unit[0]
        chance = self._random.random()
        if chance < 0.4:
            return self._random.choice(self._texts)
        return self._random.choice(self._names) if chance < 0.5 else copy.deepcopy(self._random.choice(WRONG))


def data_of(files: Mapping[str, bytes]) -> dict[str, Data]:
    return {name: compose(content, name).data for name, content in files.items()}


def example() -> dict[str, Data]:
    """Return the example with two hulls and one option."""
    kept = ("tnd-038", "tnd-031", "sol2")
    files = {p.relative_to(EXAMPLE).as_posix(): p for p in sorted(EXAMPLE.rglob("*.yaml")) if "reports" not in p.parts}
    return data_of(
        {n: p.read_bytes() for n, p in files.items() if p.parent.name not in ("hulls", "options") or p.stem in kept}
    )


def assert_told(yard: Path) -> None:
    """Check a yard and hold that whatever came out can be printed, written and read again."""
    result = check_fleet(yard, today=datetime.date(2026, 12, 1))
    shown = screen_report(result, CARDS, colour=False)
    assert all(line.isprintable() for line in shown.split("\n"))
    assert not re.search(r"^(::|Traceback)|is not valid under|\{'|\['", shown, re.M), shown
    for name, text in report_files(result, CARDS).items():
        text.encode("utf-8")
        if name.endswith(".json"):
            json.loads(text, parse_constant=lambda figure: pytest.fail(f"{figure} is no JSON"))
    assert result.file_outcomes or result.subjects


def test_a_small_yard_with_anything_in_its_files_is_told(tmp_path: Path) -> None:
    mutation = Mutation(data_of({name: text.encode("utf-8") for name, text in DORY.items()}), seed=1)
    for number in range(150):
        assert_told(write(tmp_path / str(number), mutation.mutant()))


@pytest.mark.parametrize("seed", [1, 2])
def test_the_example_with_anything_in_its_files_is_told(tmp_path: Path, seed: int) -> None:
    mutation = Mutation(example(), seed)
    for number in range(15):
        assert_told(write(tmp_path / str(number), mutation.mutant()))
