"""The workflow is well formed, asks for no more than it needs, and runs what a person would run."""

from __future__ import annotations

import re
import shutil
import subprocess
import sysconfig
from pathlib import Path
from typing import Any

import pytest
import yaml

ROOT = Path(__file__).resolve().parents[1]
FOLDER = ROOT / ".github" / "workflows"
WORKFLOWS = sorted(FOLDER.glob("*.yml"))
CI = FOLDER / "ci.yml"


def tool(name: str) -> str:
    """Return the path of a command of the test environment; skip the test where it is missing."""
    found = shutil.which(name, path=sysconfig.get_path("scripts")) or shutil.which(name)
    if found is None:
        pytest.skip(f"{name} is not installed; pip install -e '.[test]' brings it")
    return found


def read(workflow: Path) -> dict[str, Any]:
    """Read a workflow; every scalar stays text, so that the key `on` stays a word."""
    data: dict[str, Any] = yaml.load(workflow.read_text(encoding="utf-8"), Loader=yaml.BaseLoader)
    return data


def test_every_workflow_fits_the_published_schema() -> None:
    command = [tool("check-jsonschema"), "--builtin-schema", "vendor.github-workflows", *map(str, WORKFLOWS)]
    run = subprocess.run(command, capture_output=True, text=True, check=False)
    assert run.returncode == 0, run.stdout + run.stderr


def test_the_security_audit_finds_nothing_in_any_workflow() -> None:
    command = [tool("zizmor"), "--offline", "--quiet", *map(str, WORKFLOWS)]
    run = subprocess.run(command, capture_output=True, text=True, check=False)
    assert run.returncode == 0, run.stdout + run.stderr


def test_every_action_is_pinned_to_a_commit_and_names_its_version() -> None:
    used = re.findall(r"uses: *(.*)", CI.read_text(encoding="utf-8"))
    assert len(used) == 2
    assert [line for line in used if not re.fullmatch(r"[\w/-]+@[0-9a-f]{40} # v[0-9.]+", line)] == []


def test_the_workflow_runs_on_pull_requests_and_on_main_with_read_rights_only() -> None:
    workflow = read(CI)
    assert workflow["on"] == {"pull_request": "", "push": {"branches": ["main"]}}
    assert workflow["permissions"] == {"contents": "read"}
    assert [job for job in workflow["jobs"].values() if "permissions" in job] == []


def test_the_workflow_runs_the_oldest_python_that_is_promised() -> None:
    promised = re.search(r'requires-python = ">=([0-9.]+)"', (ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    assert promised is not None
    (job,) = read(CI)["jobs"].values()
    assert job["strategy"]["matrix"]["python"] == [promised[1], "3.13"]


def test_the_only_command_of_the_workflow_is_the_one_a_person_runs() -> None:
    (job,) = read(CI)["jobs"].values()
    assert [step["run"] for step in job["steps"] if "run" in step] == ["bash .ci/run"]


def test_the_script_of_the_workflow_parses() -> None:
    run = subprocess.run(["bash", "-n", str(ROOT / ".ci/run")], capture_output=True, text=True, check=False)
    assert (run.returncode, run.stderr) == (0, "")
