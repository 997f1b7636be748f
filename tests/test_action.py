"""The composite action: its shell steps are run as the CI service runs them, on a yard with hostile names."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import pytest
import yaml

from tests.dory_yard import DORY, HULL, write
from tests.output.workflow_commands import commands
from tests.test_workflows import tool

ROOT = Path(__file__).resolve().parents[1]
FILE = ROOT / ".github/actions/check/action.yml"
ACTION: dict[str, Any] = yaml.load(FILE.read_text(encoding="utf-8"), Loader=yaml.BaseLoader)
STEPS: list[dict[str, Any]] = ACTION["runs"]["steps"]
BASH = ["bash", "--noprofile", "--norc", "-e", "-o", "pipefail"]
NASTY = "9 A ::error::pwned ##[error]pwned $(touch pwned) `touch pwned`; touch pwned | <b> @me"
CLASS = "classes/dory-14/class.yaml"
HOSTILE = {
    **DORY,
    CLASS: DORY[CLASS].replace("C1: {name: Bow lamp", f"C1: {{legend: '{NASTY}', name: '{NASTY}'"),
    "hulls/$(touch pwned) ::error::pwned.yaml": HULL.replace("DORY-1", "DORY-2") + "no_such_field: 1\n",
}

pytestmark = pytest.mark.skipif(os.name == "nt", reason="the steps are written for bash")


class Job:
    """Run the shell steps of the action in a repository, as the CI service does for a composite action."""

    def __init__(self, place: Path, files: Mapping[str, str], **inputs: str) -> None:
        self.repository = write(place / "the repository", files)
        (self.repository / ".git").mkdir()
        self.temporary = place / "temp orary"
        (self.temporary / "fairloom/bin").mkdir(parents=True)
        command = self.temporary / "fairloom/bin/fairloom"
        command.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m checker "$@"\n', encoding="utf-8")
        command.chmod(0o755)
        defaults = {name: row.get("default", "") for name, row in ACTION["inputs"].items()}
        self.values = {f"inputs.{name}": value for name, value in {**defaults, **inputs}.items()}
        self.summary, self.output = place / "summary file.md", place / "output"
        self.summary.touch()

    def run(self, name: str) -> subprocess.CompletedProcess[str]:
        """Run one step by its name."""
        (step,) = [step for step in STEPS if step["name"] == name]
        self.output.write_text("", encoding="utf-8")
        environment = {key: self._filled(text) for key, text in step.get("env", {}).items()}
        script = self.temporary / "script.sh"
        script.write_text(step["run"], encoding="utf-8")
        done = subprocess.run(
            [*BASH, str(script)], cwd=self.repository, capture_output=True, text=True, encoding="utf-8", check=False,
            env={
                **os.environ, **environment, "RUNNER_TEMP": str(self.temporary), "GITHUB_OUTPUT": str(self.output),
                "GITHUB_STEP_SUMMARY": str(self.summary), "GITHUB_ACTION_PATH": str(FILE.parent),
                "PYTHONPATH": str(ROOT),
            },
        )  # fmt: skip
        for line in self.output.read_text(encoding="utf-8").splitlines():
            key, _, value = line.partition("=")
            self.values[f"steps.{step.get('id')}.outputs.{key}"] = value
        return done

    def _filled(self, text: str) -> str:
        return re.sub(r"\$\{\{ *(.*?) *\}\}", lambda match: self.values.get(match[1], ""), text)


def test_the_action_fits_the_published_schema_and_the_audit_finds_nothing() -> None:
    for command in (
        [tool("check-jsonschema"), "--builtin-schema", "vendor.github-actions", str(FILE)],
        [tool("zizmor"), "--offline", "--quiet", str(FILE)],
    ):
        run = subprocess.run(command, capture_output=True, text=True, check=False)
        assert run.returncode == 0, run.stdout + run.stderr


def test_no_value_is_pasted_into_a_script_and_every_input_is_used_and_told() -> None:
    scripts = [step for step in STEPS if "run" in step]
    assert [step["name"] for step in scripts] == ["Install", "Check", "Verdict"]
    for step in scripts:
        assert step["shell"] == "bash"
        assert "${{" not in step["run"]
        parsed = subprocess.run([*BASH, "-n"], input=step["run"], capture_output=True, text=True, check=False)
        assert (parsed.returncode, parsed.stderr) == (0, "")
    text = FILE.read_text(encoding="utf-8")
    for name, row in ACTION["inputs"].items():
        assert row["description"]
        assert f"inputs.{name}" in text
    for name, row in ACTION["outputs"].items():
        assert row["value"] == f"${{{{ steps.check.outputs.{name} }}}}"


def test_every_other_action_is_pinned_to_a_commit_and_names_its_version() -> None:
    used = re.findall(r"uses: *(.*)", FILE.read_text(encoding="utf-8"))
    assert len(used) == 1
    assert [line for line in used if not re.fullmatch(r"[\w/-]+@[0-9a-f]{40} # v[0-9.]+", line)] == []


def test_the_verdict_comes_last_after_the_reports_were_kept() -> None:
    assert [step["name"] for step in STEPS[-2:]] == ["Keep the reports", "Verdict"]


@pytest.fixture
def job(tmp_path: Path) -> Iterator[Job]:
    made = Job(tmp_path, HOSTILE, today="2026-12-01", reports="our reports")
    yield made
    assert [path for path in tmp_path.rglob("*") if path.name == "pwned"] == []


def test_the_check_writes_every_report_and_leaves_the_verdict_to_the_last_step(job: Job) -> None:
    done = job.run("Check")
    assert done.returncode == 0, done.stderr
    outputs = {name: job.values[f"steps.check.outputs.{name}"] for name in ACTION["outputs"]}
    assert outputs == {"status": "1", "reports": "our reports", "sarif": "our reports/open.sarif",
                       "junit": "our reports/junit.xml"}  # fmt: skip
    written = job.repository / "our reports"
    assert sorted(path.name for path in written.iterdir()) == ["all.sarif", "junit.xml", "open.sarif", "text"]
    assert (written / "text/result.json").is_file()
    json.loads((job.repository / outputs["sarif"]).read_bytes())
    ElementTree.parse(job.repository / outputs["junit"])
    assert job.summary.read_text(encoding="utf-8").startswith("## Wiring check: ")
    assert job.run("Verdict").returncode == 1


def test_no_text_of_the_yard_becomes_a_command_of_the_job(job: Job) -> None:
    done = job.run("Check")
    found = list(commands(done.stdout))
    assert {command.word for command in found} == {"error", "warning", "notice"}
    assert {command.properties.get("title", "").partition(" on ")[0] for command in found} >= {
        "legend-rating",
        "unknown-field",
    }
    assert [command for command in found if command.message.startswith("pwned")] == []
    assert list(commands(done.stderr)) == []
    assert job.values["steps.check.outputs.status"] == "1"


def test_a_sound_yard_passes(tmp_path: Path) -> None:
    from tests.test_readme import YARD

    job = Job(tmp_path, YARD)
    assert job.run("Check").returncode == 0
    assert job.values["steps.check.outputs.status"] == "0"
    assert job.run("Verdict").returncode == 0


def test_committed_reports_that_the_data_do_not_give_fail_the_job_and_are_told(tmp_path: Path) -> None:
    from tests.test_command import run
    from tests.test_readme import YARD

    job = Job(tmp_path, YARD, committed="their reports", today="2026-12-01")
    run("check", job.repository, "--reports", job.repository / "their reports", "--today", "2026-12-01")
    assert job.run("Check").returncode == 0
    assert job.values["steps.check.outputs.status"] == "0"
    report = next((job.repository / "their reports/hulls").iterdir())
    report.write_text(report.read_text("utf-8").replace("status: ", "status: ::error::pwned "), "utf-8")
    done = job.run("Check")
    assert done.returncode == 0, done.stderr
    assert job.values["steps.check.outputs.status"] == "1"
    assert "| hulls/" in done.stdout
    messages = [command.message for command in commands(done.stdout) if command.word == "error"]
    assert messages == ["the committed reports are not what the data give: write them anew and commit them"]


def test_a_yard_in_a_folder_has_its_paths_from_the_root_of_the_repository(tmp_path: Path) -> None:
    job = Job(tmp_path, {f"our boats/{name}": text for name, text in DORY.items()}, folder="our boats")
    done = job.run("Check")
    files = {command.properties["file"] for command in commands(done.stdout) if "file" in command.properties}
    assert files == {f"our boats/{CLASS}"}


@pytest.mark.parametrize("folder", ["nothing here", "-x", "--only=DORY-1", "$(touch pwned)"])
def test_a_folder_without_a_yard_fails_the_job_in_the_last_step(tmp_path: Path, folder: str) -> None:
    job = Job(tmp_path, DORY, folder=folder)
    done = job.run("Check")
    assert done.returncode == 0
    assert "no yard.yaml in" in done.stderr
    assert job.run("Verdict").returncode == 2
    assert not (job.repository / "pwned").exists()


@pytest.mark.parametrize("reports", ["a\nstatus=0", ""])
def test_an_input_cannot_write_outputs_of_its_own(tmp_path: Path, reports: str) -> None:
    job = Job(tmp_path, DORY, reports=reports)
    assert job.run("Check").returncode == 2
    assert "steps.check.outputs.status" not in job.values


def test_an_old_python_is_told(tmp_path: Path) -> None:
    old = tmp_path / "old python"
    old.write_text("#!/bin/sh\nexit 1\n", encoding="utf-8")
    old.chmod(0o755)
    done = Job(tmp_path / "job", DORY, python=str(old)).run("Install")
    assert done.returncode == 2
    assert [command.message[:13] for command in commands(done.stdout)] == ["Python 3.11 o"]


def test_the_install_takes_the_tool_from_the_actions_own_checkout(tmp_path: Path) -> None:
    """Runs where the packages that it needs can be fetched or are at hand."""
    job = Job(tmp_path, DORY, python=sys.executable)
    (job.temporary / "fairloom/bin/fairloom").unlink()
    done = job.run("Install")
    if done.returncode and re.search("No matching distribution|Connection|connect|resolve", done.stdout + done.stderr):
        pytest.skip("packages cannot be fetched here")
    assert done.returncode == 0, done.stderr
    command = [str(job.temporary / "fairloom/bin/fairloom"), "--version"]
    environment = {name: value for name, value in os.environ.items() if name != "PYTHONPATH"}
    shown = subprocess.run(command, cwd=tmp_path, env=environment, capture_output=True, text=True, check=False)
    from checker import __version__

    assert shown.stdout == f"fairloom {__version__}\n"
