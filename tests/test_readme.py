"""What README.md says is so: its yard is sound, its excerpts are real, its commands are those that CI runs."""

from __future__ import annotations

import re
import subprocess
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import yaml

from checker.cli import main
from tests.test_workflows import tool

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
    assert len(SHOWN) == 22
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
    options = set(re.findall(r"--[a-z-]+", capsys.readouterr().out)) - {"--help"}
    assert options == set(re.findall(r"`… (--[a-z-]+)", README))


SAMPLES = dict(re.findall(r"`([\w./-]+\.ya?ml)`[^`\n]*:\n\n```yaml\n(.*?)^```", README, flags=re.DOTALL | re.MULTILINE))


@pytest.mark.parametrize(
    ("name", "kind"),
    [(".github/workflows/wiring.yml", "vendor.github-workflows"), (".gitlab-ci.yml", "vendor.gitlab-ci")],
)
def test_the_samples_for_ci_fit_the_published_schemas(tmp_path: Path, name: str, kind: str) -> None:
    (tmp_path / "sample.yml").write_text(SAMPLES[name], encoding="utf-8")
    command = [tool("check-jsonschema"), "--builtin-schema", kind, str(tmp_path / "sample.yml")]
    run = subprocess.run(command, capture_output=True, text=True, check=False)
    assert run.returncode == 0, run.stdout + run.stderr


def test_the_sample_workflow_is_safe_and_asks_for_nothing_that_a_fork_has_not(tmp_path: Path) -> None:
    sample = tmp_path / "wiring.yml"
    sample.write_text(SAMPLES[".github/workflows/wiring.yml"], encoding="utf-8")
    run = subprocess.run(
        [tool("zizmor"), "--offline", "--quiet", str(sample)], capture_output=True, text=True, check=False
    )
    assert run.returncode == 0, run.stdout + run.stderr
    workflow = plain(sample.read_text(encoding="utf-8"))
    assert (workflow["on"], workflow["permissions"]) == ("pull_request", {"contents": "read"})
    used = re.findall(r"uses: *(.*)", sample.read_text(encoding="utf-8"))
    assert [line for line in used if not re.fullmatch(r"[\w./-]+@[0-9a-f]{40} # v[0-9.]+", line)] == []
    given = workflow["jobs"]["check"]["steps"][-1]["with"]
    action = plain((ROOT / ".github/actions/check/action.yml").read_text(encoding="utf-8"))
    assert set(given) <= set(action["inputs"])


def test_the_sample_for_the_git_hook_names_the_hook_that_there_is() -> None:
    (repository,) = plain(SAMPLES[".pre-commit-config.yaml"])["repos"]
    (hook,) = plain((ROOT / ".pre-commit-hooks.yaml").read_text(encoding="utf-8"))
    assert [row["id"] for row in repository["hooks"]] == [hook["id"]]


def test_the_commands_of_the_sample_for_gitlab_run_as_they_are(tmp_path: Path, yard: Path) -> None:
    (job,) = plain(SAMPLES[".gitlab-ci.yml"]).values()
    words = job["script"][-1].split()
    assert words[:3] == ["fairloom", "check", "."]
    files = [*job["artifacts"]["paths"], *job["artifacts"]["reports"].values()]
    here = [str(tmp_path / word) if word in files else word for word in words[3:]]
    assert main(["check", str(yard), *here, *TODAY]) == 0
    assert [name for name in files if not (tmp_path / name).is_file()] == []


def test_the_lists_of_the_readme_are_those_that_are_written(tmp_path: Path) -> None:
    (command,) = [command for command in SHELL if " lists " in command]
    words = command.split()[1:]
    assert main([words[0], str(ROOT / words[1]), *words[2:-1], str(tmp_path)]) == 0
    assert {path.name for path in tmp_path.iterdir()} == set(re.findall(r"`(TND-035-\w+\.csv)`", README))
