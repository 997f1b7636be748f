"""GitLab's code-quality report: one array, each finding once, its path from the root of the repository."""

from __future__ import annotations

import json
from pathlib import Path

from checker.finding import Level, Verdict
from checker.output.alerts import alerts
from checker.output.code_quality import SEVERITIES, code_quality_report
from checker.pipeline import all_cards
from tests.dory_yard import DORY, checked
from tests.output.example import example

CARDS = {card.id: card for card in all_cards()}


def test_each_open_finding_is_a_row_with_a_fingerprint_of_its_own() -> None:
    text = code_quality_report(example(), CARDS, "fleet_example")
    rows = json.loads(text)
    assert not text.startswith("\ufeff")
    assert len({row["fingerprint"] for row in rows}) == len(rows) == len(alerts(example(), Verdict.FINDING)) == 13
    assert set(SEVERITIES) == set(Level)
    for row in rows:
        assert list(row) == ["description", "check_name", "fingerprint", "severity", "location"]
        assert row["severity"] in ("info", "minor", "major", "critical", "blocker")
        assert row["location"]["path"].startswith("fleet_example/")
        assert row["location"]["lines"]["begin"] >= 1
    (one,) = [row for row in rows if row["check_name"] == "shunt-bypass"]
    assert one["description"].endswith("its current is not measured (on TND-035)")
    assert one["severity"] == "critical"
    assert one["location"] == {"path": "fleet_example/hulls/tnd-035.yaml", "lines": {"begin": 22}}


def test_what_was_accepted_is_not_in_it() -> None:
    assert "voltage-drop-from-bank" not in code_quality_report(example(), CARDS, "")


def test_a_run_without_findings_is_an_empty_array() -> None:
    from dataclasses import replace

    clean = [subject for subject in example().subjects if subject.id == "TND-031"]
    assert code_quality_report(replace(example(), subjects=tuple(clean)), CARDS, "") == "[]\n"


def test_a_fault_of_a_file_has_a_path_too(tmp_path: Path) -> None:
    rows = json.loads(code_quality_report(checked(tmp_path, {**DORY, "hulls/b.yaml": "hull: 7\n"}), CARDS, ""))
    assert {row["location"]["path"] for row in rows if row["severity"] == "critical"} >= {"hulls/b.yaml", "yard.yaml"}
