"""A short question gets a quick answer: what is slow to import is imported only where it is needed."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
SLOW = ["dataclasses", "inspect", "jsonschema", "multiprocessing", "networkx", "numpy", "referencing", "yaml"]
RUN = """
import sys
from checker.cli import main
try:
    status = main(sys.argv[1:])
except SystemExit as end:
    status = end.code
print(*sorted(sys.modules), file=sys.stderr)
sys.exit(status)
"""


def loaded(*words: str) -> tuple[int, set[str]]:
    """Run the command in a fresh interpreter; return its exit status and the modules it loaded."""
    run = subprocess.run(
        [sys.executable, "-c", RUN, *words],
        cwd=ROOT,
        capture_output=True,
        text=True,
        encoding="utf-8",
        check=False,
    )
    return run.returncode, set(run.stderr.splitlines()[-1].split())


@pytest.mark.parametrize(
    "words",
    [
        ["--version"],
        ["--help"],
        *([name, "--help"] for name in ("check", "compare", "explain", "fleet", "handover", "lists", "waiver")),
    ],
)
def test_a_question_about_the_command_loads_nothing_slow(words: list[str]) -> None:
    status, modules = loaded(*words)
    assert status == 0
    assert [name for name in SLOW if name in modules] == []
    ours = {name for name in modules if name.startswith("checker.")}
    assert {name for name in ours if not name.startswith("checker.commands")} == {"checker.cli"}


def test_explaining_a_check_loads_no_validator_and_no_graph_library() -> None:
    status, modules = loaded("explain", "shunt-bypass")
    assert status == 0
    assert [name for name in ("jsonschema", "referencing", "networkx", "multiprocessing") if name in modules] == []


def test_checking_one_hull_loads_no_graph_library_and_starts_no_processes() -> None:
    status, modules = loaded("check", "fleet_example", "--only", "TND-031", "--today", "2026-12-01")
    assert status == 0
    assert [name for name in ("numpy", "networkx", "multiprocessing") if name in modules] == []


def test_listing_one_hull_loads_no_graph_library_and_no_other_format(tmp_path: Path) -> None:
    status, modules = loaded("lists", "fleet_example", "--hull", "TND-031", "--to", str(tmp_path))
    assert status == 0
    assert [name for name in ("numpy", "networkx", "multiprocessing", "xml.etree") if name in modules] == []


def test_a_check_without_further_reports_loads_no_format_of_theirs() -> None:
    _, modules = loaded("check", "fleet_example", "--only", "TND-031", "--today", "2026-12-01")
    formats = ("sarif", "junit", "code_quality", "summary", "annotations", "alerts")
    assert [name for name in formats if f"checker.output.{name}" in modules] == []
    assert "xml.etree" not in modules
