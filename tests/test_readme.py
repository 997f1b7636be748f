"""What README.md says is so: its yard is sound, its excerpts are real, its commands are those that CI runs."""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import yaml

from checker.cli import main

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
TODAY = ["--today", "2026-12-01"]
YARD = dict(re.findall(r"^`([\w/.-]+\.yaml)`\n\n```yaml\n(.*?)^```", README, flags=re.DOTALL | re.MULTILINE))
QUOTED = re.findall(r"`(fleet_example/[\w/.-]+)`:\n\n```yaml\n(.*?)^```", README, flags=re.DOTALL | re.MULTILINE)
SHELL = re.findall(r"^```sh\n(.*?)\n```", README, flags=re.DOTALL | re.MULTILINE)
TEXT = re.findall(
    r"(?:`(fleet_example/reports/\S+)`:\n\n)?^```text\n(.*?)\n```", README, flags=re.DOTALL | re.MULTILINE
)
SHOWN = [line for report, block in TEXT if not report for line in block.splitlines()]
REPORTED = [(report, line) for report, block in TEXT if report for line in block.splitlines()]


def plain(text: str) -> Any:
    """Read YAML with every scalar as text."""
    return yaml.load(text, Loader=yaml.BaseLoader)


def leaves(value: Any, path: tuple[str, ...] = ()) -> Iterator[tuple[tuple[str, ...], Any]]:
    """Yield every value that is no map, with its path; the value of an empty map is the map."""
    if not isinstance(value, dict) or not value:
        yield path, value
        return
    for key, part in value.items():
        yield from leaves(part, (*path, key))


def at(value: Any, path: tuple[str, ...]) -> Any:
    """Return what stands at a path, or a word where nothing does."""
    for key in path:
        value = value.get(key, "nothing") if isinstance(value, dict) else "nothing"
    return value


@pytest.fixture
def yard(tmp_path: Path) -> Path:
    """Return README's small yard, written out."""
    for name, text in YARD.items():
        (tmp_path / name).parent.mkdir(parents=True, exist_ok=True)
        (tmp_path / name).write_text(text, encoding="utf-8")
    return tmp_path


def test_the_small_yard_has_a_file_of_every_kind_that_is_needed() -> None:
    assert sorted(YARD) == [
        "classes/dory-7/class.yaml",
        "hulls/dory-01.yaml",
        "parts/parts.yaml",
        "yard.yaml",
    ]


def test_the_small_yard_passes_with_everything_assessed(yard: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(yard), *TODAY]) == 0
    printed = capsys.readouterr().out.splitlines()
    assert "hull DORY-01 (in-build, no options): passes" in printed
    assert "open warnings and notes: 0" in printed
    assert "places not assessed: 0" in printed


def test_the_small_yard_fails_as_told_once_its_fuse_is_moved_away(
    yard: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    design = yard / "classes/dory-7/class.yaml"
    design.write_text(YARD["classes/dory-7/class.yaml"].replace("length: 6 in", "length: 9 in"), encoding="utf-8")
    assert main(["check", str(yard), "--only", "DORY-01", *TODAY]) == 1
    printed = capsys.readouterr().out
    found = re.findall(r"^error: (\S+) of .*\[(.*)\]$", printed, flags=re.MULTILINE)
    assert set(found) == {("W1", "protection-distance")}


def test_every_excerpt_of_the_output_is_printed_for_the_example_fleet(
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert main(["check", str(ROOT / "fleet_example"), *TODAY]) == 1
    printed = set(capsys.readouterr().out.splitlines())
    assert len(SHOWN) == 17
    assert [line for line in SHOWN if line not in printed] == []


def test_every_line_that_readme_takes_from_a_report_stands_there() -> None:
    assert len(REPORTED) == 10
    assert [line for report, line in REPORTED if line not in (ROOT / report).read_text("utf-8").splitlines()] == []


def test_the_hull_that_readme_calls_sound_passes() -> None:
    (command,) = [command for command in SHELL if "--only" in command]
    words = command.split()[1:]
    assert words[:2] == ["check", "fleet_example"]
    assert main(["check", str(ROOT / words[1]), *words[2:], *TODAY]) == 0


@pytest.mark.parametrize(("name", "text"), QUOTED)
def test_every_block_of_the_format_stands_in_the_example(name: str, text: str) -> None:
    whole = plain((ROOT / name).read_text(encoding="utf-8"))
    wrong = {path: (value, at(whole, path)) for path, value in leaves(plain(text)) if at(whole, path) != value}
    assert wrong == {}


def test_the_format_shows_each_kind_of_block() -> None:
    assert len(QUOTED) == 9


def test_what_is_not_recorded_is_not_assessed(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert "```yaml\nshields: not recorded\n```" in README
    for file in (ROOT / "fleet_example").rglob("*.yaml"):
        copy = tmp_path / file.relative_to(ROOT / "fleet_example")
        copy.parent.mkdir(parents=True, exist_ok=True)
        text = file.read_text(encoding="utf-8")
        copy.write_text(re.sub(r"(?ms)^shields:\n.*\Z", "shields: not recorded\n", text), encoding="utf-8")
    assert main(["check", str(tmp_path), "--only", "TND-031", *TODAY]) == 0
    printed = capsys.readouterr().out
    found = re.findall(r"^not assessed: (\S+).*\[(.*)\]\n(?:  .*\n)*?  fill in: (.*)$", printed, flags=re.MULTILINE)
    assert sorted((check, field) for _, check, field in found) == [
        ("shield-loop", "shields"),
        ("shunt-bypass", "shields"),
    ]


def test_ci_runs_the_tests_by_the_command_of_the_readme() -> None:
    script = (ROOT / ".ci/run").read_text(encoding="utf-8")
    (command,) = [command for command in SHELL if command.endswith("pytest")]
    assert command in script


def test_each_of_the_two_first_commands_makes_its_own_environment() -> None:
    made = [command for command in SHELL if command.startswith("python3 -m venv .venv && .venv/bin/pip install")]
    assert made == SHELL[:2]


def test_every_option_of_the_command_is_told(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit):
        main(["check", "--help"])
    options = set(re.findall(r"--[a-z]+", capsys.readouterr().out)) - {"--help"}
    assert options == set(re.findall(r"`… (--[a-z]+)", README))
