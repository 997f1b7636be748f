"""The recorded series of changes: what a reviewer sees first of each is as expected, word for word."""

from __future__ import annotations

import tempfile
from collections.abc import Mapping

import pytest

from checker import sides
from tests.compare.series import EXPECTED, ROOT, SCREEN, SERIES, OneBase, git, screens

NAMES = [*(step.name for step in SERIES), "older-tables"]


@pytest.fixture(scope="module")
def told(tmp_path_factory: pytest.TempPathFactory) -> Mapping[str, str]:
    """Return the first screens of all steps."""
    folder = tmp_path_factory.mktemp("series")
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(sides, "_side", OneBase())
        found = screens(folder)
    assert git(folder, "status", "--porcelain", "--ignored").split() == ["??", "older.json"]
    return found


@pytest.mark.parametrize("name", NAMES)
def test_the_first_screen_is_as_expected(name: str, told: Mapping[str, str]) -> None:
    """To make them anew run `python -m tests.compare.series`, and read their diff."""
    assert told[name] == (EXPECTED / f"{name}.txt").read_text(encoding="utf-8")


def test_every_expected_screen_belongs_to_a_step() -> None:
    assert sorted(path.stem for path in EXPECTED.glob("*")) == sorted(NAMES)


@pytest.mark.parametrize("name", NAMES)
def test_a_first_screen_fits_and_names_no_place_of_the_machine(name: str) -> None:
    text = (EXPECTED / f"{name}.txt").read_text(encoding="utf-8")
    assert len(text.splitlines()) <= SCREEN + 1
    assert tempfile.gettempdir() not in text
    assert text.isprintable() or {c for c in text if not c.isprintable()} == {"\n"}


def test_a_rename_changes_nothing(told: Mapping[str, str]) -> None:
    lines = told["renames"].splitlines()
    assert lines[0] == "verdict: 0 hulls worse, 0 better, 8 unchanged; 0 new errors"
    assert "what changed aboard: nothing" in lines


def test_what_readme_shows_of_a_comparison_was_printed() -> None:
    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    shown = [
        line
        for line in readme.splitlines()
        if (line.startswith("    ") and " -> " in line) or "verdict: 3 hulls worse" in line
    ]
    printed = (EXPECTED / "breaks-three.txt").read_text(encoding="utf-8").splitlines()
    assert len(shown) == 2
    assert [line for line in shown if line.removeprefix("    ") not in printed] == []
