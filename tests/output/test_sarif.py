"""SARIF that the published schema accepts, that says where a thing is, and that keeps accepted findings apart."""

from __future__ import annotations

import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from checker.finding import Verdict
from checker.output import sarif
from checker.output.alerts import alerts
from checker.output.explain import check_page
from checker.output.sarif import sarif_report, sarif_upload
from checker.pipeline import all_cards
from checker.result.model import FleetResult
from tests.dory_yard import CLASS, DORY, HULL, checked, edited
from tests.output.example import example

CARDS = {card.id: card for card in all_cards()}
SCHEMA = Path(__file__).resolve().parents[1] / "external/schemas/sarif-2.1.0.json"


@pytest.fixture(scope="module")
def validator() -> Draft202012Validator:
    schema = json.loads(SCHEMA.read_text(encoding="utf-8"))
    Draft202012Validator.check_schema(schema)
    return Draft202012Validator(schema)


def run_of(text: str) -> dict[str, Any]:
    (run,) = json.loads(text)["runs"]
    return dict(run)


def report_of(folder: Path, files: Mapping[str, str], prefix: str = "") -> dict[str, Any]:
    return run_of(sarif_report(checked(folder, files), CARDS, prefix))


@pytest.fixture(scope="module")
def result() -> FleetResult:
    return example()


def test_both_flavours_fit_the_published_schema(
    result: FleetResult, validator: Draft202012Validator, tmp_path: Path
) -> None:
    for one in (result, checked(tmp_path, {**DORY, "hulls/b.yaml": "hull: 7\n"})):
        for text in (sarif_report(one, CARDS, "boats/a b"), sarif_upload(one, CARDS, "")):
            assert [error.message for error in validator.iter_errors(json.loads(text))] == []


def test_the_schema_would_notice_a_wrong_level(result: FleetResult, validator: Draft202012Validator) -> None:
    document = json.loads(sarif_report(result, CARDS, ""))
    document["runs"][0]["results"][0]["level"] = "fatal"
    assert not validator.is_valid(document)


def test_every_check_is_a_rule_with_the_text_that_explain_prints(result: FleetResult) -> None:
    rules = run_of(sarif_upload(result, CARDS, ""))["tool"]["driver"]["rules"]
    assert [rule["id"] for rule in rules] == list(CARDS)
    for rule in rules:
        card = CARDS[rule["id"]]
        assert rule["help"]["text"] == check_page(card)
        assert card.title in rule["help"]["markdown"]
        assert rule["defaultConfiguration"]["level"] == card.level.value
        assert rule["properties"]["problem.severity"] in ("error", "warning", "recommendation")
        assert "security-severity" not in rule["properties"]
        assert rule["name"].isalnum() and rule["name"].lower() != rule["id"] and len(rule["name"]) <= 255
        for field in ("shortDescription", "fullDescription"):
            assert 0 < len(rule[field]["text"]) <= 1024
            assert rule[field]["text"][-1] in ".?!"


def test_every_result_has_one_place_counted_from_one_and_a_fingerprint_of_its_own(result: FleetResult) -> None:
    run = run_of(sarif_report(result, CARDS, ""))
    marks = set()
    for row in run["results"]:
        assert run["tool"]["driver"]["rules"][row["ruleIndex"]]["id"] == row["ruleId"]
        (location,) = row["locations"]
        region = location["physicalLocation"]["region"]
        assert region["startLine"] >= 1 and region["startColumn"] >= 1
        assert (region["endLine"], region["endColumn"]) == (region["startLine"], region["startColumn"] + 1)
        assert location["logicalLocations"][0]["fullyQualifiedName"].startswith(("tindral-36/", "WVR", "TND"))
        assert row["partialFingerprints"]["fairloom/v1"] == row["partialFingerprints"]["primaryLocationLineHash"]
        marks.add(row["partialFingerprints"]["fairloom/v1"])
    assert len(marks) == len(run["results"]) == 14


def test_what_was_accepted_is_suppressed_in_the_one_and_left_out_of_the_other(result: FleetResult) -> None:
    kept = run_of(sarif_report(result, CARDS, ""))["results"]
    (suppressed,) = [row for row in kept if "suppressions" in row]
    assert suppressed["ruleId"] == "voltage-drop-from-bank"
    (suppression,) = suppressed["suppressions"]
    assert (suppression["kind"], suppression["status"]) == ("external", "accepted")
    assert "measured working current 7.6 A" in suppression["justification"]
    assert "until 2028-05-29" in suppression["justification"]
    uploaded = run_of(sarif_upload(result, CARDS, ""))["results"]
    assert uploaded == [row for row in kept if row is not suppressed]


def test_what_was_not_assessed_is_kept_as_open_and_not_uploaded(tmp_path: Path) -> None:
    result = checked(tmp_path, DORY)
    rows = run_of(sarif_report(result, CARDS, ""))["results"]
    undecided = [row for row in rows if row["kind"] == "open"]
    assert len(undecided) == len(alerts(result, Verdict.NOT_ASSESSED)) > 30
    assert {row["level"] for row in undecided} == {"none"}
    assert all("fill in: " in row["message"]["text"] for row in undecided)
    assert {row["kind"] for row in run_of(sarif_upload(result, CARDS, ""))["results"]} == {"fail"}


def test_paths_start_at_the_root_of_the_repository_and_are_percent_encoded(tmp_path: Path) -> None:
    files = {name: text for name, text in DORY.items() if not name.startswith("hulls/")}
    files["hulls/süd & 50%#1.yaml"] = HULL + "wrong: 1\n"
    run = report_of(tmp_path, files, "our boats/yard")
    uris = {row["locations"][0]["physicalLocation"]["artifactLocation"]["uri"] for row in run["results"]}
    assert "our%20boats/yard/hulls/s%C3%BCd%20%26%2050%25%231.yaml" in uris
    assert "our%20boats/yard/classes/dory-14/class.yaml" in uris
    assert run["originalUriBaseIds"] == {"SRCROOT": {"description": {"text": "the root of the yard's repository"}}}


def test_other_places_of_a_fault_are_related_locations(result: FleetResult) -> None:
    rows = run_of(sarif_upload(result, CARDS, ""))["results"]
    related = next(row for row in rows if row["ruleId"] == "ignition-protection")["relatedLocations"]
    assert [r["physicalLocation"]["artifactLocation"]["uri"] for r in related] == ["hulls/tnd-038.yaml"]
    assert related[0]["physicalLocation"]["region"]["startLine"] == 32


def test_a_message_starts_with_a_whole_sentence_and_makes_no_link_or_placeholder(tmp_path: Path) -> None:
    files = edited(
        "classes/dory-14/class.yaml",
        "C1: {name: Bow lamp",
        "C1: {legend: 'fuse 9 A [x](https://e.test) {0} \\', name: Bow lamp",
    )
    rows = report_of(tmp_path, files)["results"]
    (row,) = [row for row in rows if row["ruleId"] == "legend-rating"]
    first = row["message"]["text"].splitlines()[0]
    assert first.startswith("PNL-01 of C1: legend “fuse 9 A \\[x\\](https://e.test) {{0}} \\\\”")
    assert first.endswith(".")


def test_past_the_most_that_can_be_uploaded_the_worst_are_kept_and_the_rest_is_told(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    result = checked(tmp_path, {**DORY, "classes/dory-15/class.yaml": CLASS})
    found = alerts(result, Verdict.FINDING)
    monkeypatch.setattr(sarif, "MOST_RESULTS", len(found) - 1)
    run = run_of(sarif_upload(result, CARDS, ""))
    assert [row["partialFingerprints"]["fairloom/v1"] for row in run["results"]] == [a.identity for a in found[:-1]]
    (note,) = run["invocations"][0]["toolExecutionNotifications"]
    assert note["message"]["text"].startswith("left out: 1 more finding;")
