"""The git hook, run by the real pre-commit program in a yard's repository."""

from __future__ import annotations

import os
import re
import subprocess
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pytest
import yaml

from tests.dory_yard import write
from tests.test_readme import YARD
from tests.test_workflows import tool

ROOT = Path(__file__).resolve().parents[1]
MANIFEST = ROOT / ".pre-commit-hooks.yaml"
NO_NETWORK = re.compile("No matching distribution|Could not resolve|Connection|CalledProcessError.*pip install", re.S)
AUTHOR = ["-c", "user.name=a yard", "-c", "user.email=yard@example.invalid"]


def hook() -> dict[str, Any]:
    (found,) = yaml.safe_load(MANIFEST.read_text(encoding="utf-8"))
    return dict(found)


def test_the_manifest_is_one_that_the_program_takes() -> None:
    run = subprocess.run([tool("pre-commit"), "validate-manifest", str(MANIFEST)], capture_output=True, check=False)
    assert run.returncode == 0, run.stdout


def test_the_hook_checks_the_whole_yard_once_whatever_file_is_committed() -> None:
    assert hook()["pass_filenames"] is False
    assert hook()["require_serial"] is True


@pytest.mark.parametrize(
    ("name", "is_ours"),
    [
        ("yard.yaml", True), ("waivers.yaml", True), ("hulls/a b.yaml", True), ("classes/x/options/y.yaml", True),
        ("boats/parts/p.yaml", True), ("limits/iso-13297/t.yaml", True), ("hulls/a.yml", True), ("README.md", False),
        ("reports/hulls/A.txt", False), ("my-yard.yaml", False), ("docs/notes.yaml", False),
    ],
)  # fmt: skip
def test_the_hook_runs_for_the_files_of_a_yard(name: str, is_ours: bool) -> None:
    assert (re.search(hook()["files"], name) is not None) is is_ours


class Repository:
    """Hold a yard's git repository, and run the hook there from a clone of this one."""

    def __init__(self, folder: Path, home: Path, files: Mapping[str, str]) -> None:
        self.folder = write(folder, files)
        self.environment = {name: value for name, value in os.environ.items() if not name.startswith("GIT_")}
        self.environment["PRE_COMMIT_HOME"] = str(home)
        self.environment.pop("PYTHONPATH", None)
        self.git("init", "--quiet")
        self.git("add", "--all")

    def git(self, *words: str) -> None:
        """Run git in the repository."""
        command = ["git", "-c", "safe.directory=*", *AUTHOR, *words]
        subprocess.run(command, cwd=self.folder, env=self.environment, check=True, capture_output=True)

    def hook(self, *words: str) -> subprocess.CompletedProcess[str]:
        """Run the hook on what is staged, or skip the test where its environment cannot be made."""
        command = [tool("pre-commit"), "try-repo", str(ROOT), "fairloom", "--color=never", "--verbose", *words]
        done = subprocess.run(
            command,
            cwd=self.folder,
            env=self.environment,
            capture_output=True,
            text=True,
            encoding="utf-8",
            check=False,
        )
        if done.returncode not in (0, 1) and NO_NETWORK.search(done.stdout + done.stderr):
            pytest.skip("the hook's environment cannot be made here: no network")
        return done


def test_the_real_program_runs_the_hook_in_a_yards_repository(tmp_path: Path) -> None:
    if not (ROOT / ".git").exists():
        pytest.skip("no repository to try the hook from")
    repository = Repository(tmp_path / "a yard", tmp_path / "home", {**YARD, "README.md": "a yard\n"})
    sound = repository.hook()
    assert sound.returncode == 0, sound.stdout + sound.stderr
    assert re.search(r"^fairloom check\.+Passed$", sound.stdout, re.M)
    assert sound.stdout.count("verdict: 0 hulls of 1 have open errors") == 1
    repository.git("commit", "--quiet", "--message", "sound")

    (repository.folder / "README.md").write_text("more\n", encoding="utf-8")
    repository.git("add", "--all")
    assert re.search(r"^fairloom check\.+.*Skipped$", repository.hook().stdout, re.M)

    design = "classes/dory-7/class.yaml"
    longer = YARD[design].replace("length: 6 in", "length: 9 in")
    (repository.folder / design).write_text(longer, encoding="utf-8")
    repository.git("add", "--all")
    faulty = repository.hook()
    assert faulty.returncode == 1
    assert re.search(r"^fairloom check\.+Failed$", faulty.stdout, re.M)
    assert "[protection-distance]" in faulty.stdout
