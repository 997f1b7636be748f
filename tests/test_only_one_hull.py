"""Asked for one hull, the command tells what is wrong with that hull's file, and not with its neighbours'."""

from __future__ import annotations

import datetime
import shutil
from pathlib import Path

import pytest

from checker.pipeline import check_fleet
from checker.result.model import FleetResult

EXAMPLE = Path(__file__).resolve().parents[1] / "fleet_example"
TODAY = datetime.date(2026, 12, 1)


@pytest.fixture
def yard(tmp_path: Path) -> Path:
    """Return a copy of the example in which the field `status` of TND-032 is misspelt."""
    shutil.copytree(EXAMPLE, tmp_path / "yard", ignore=shutil.ignore_patterns("reports"))
    hull = tmp_path / "yard/hulls/tnd-032.yaml"
    hull.write_text(hull.read_text(encoding="utf-8").replace("status:", "stattus:"), encoding="utf-8")
    return tmp_path / "yard"


def found(result: FleetResult) -> list[tuple[str, str]]:
    """Return the check and the part of every fault of files."""
    return sorted((outcome.check, outcome.part) for outcome in result.file_outcomes)


def test_the_faults_of_the_hull_that_is_asked_for_are_told(yard: Path) -> None:
    result = check_fleet(yard, today=TODAY, only=["TND-032"])
    assert found(result) == [
        ("missing-field", "hulls/tnd-032.yaml"),
        ("not-studied", "hull TND-032"),
        ("unknown-field", "hulls/tnd-032.yaml"),
    ]
    assert not result.is_clean


def test_the_faults_of_other_hulls_are_not_told(yard: Path) -> None:
    result = check_fleet(yard, today=TODAY, only=["TND-031"])
    assert found(result) == []
    assert result.is_clean
