"""The exported result against its published schema, in every kind of run."""

import datetime
import json
import shutil
from pathlib import Path
from typing import Any

from jsonschema import Draft202012Validator

from checker.output.json_report import json_report
from checker.pipeline import all_cards, check_fleet

ROOT = Path(__file__).resolve().parents[2]
TODAY = datetime.date(2026, 12, 1)


def exported(folder: Path) -> Any:
    result = check_fleet(folder, today=TODAY)
    return json.loads(json_report(result, {card.id: card for card in all_cards()}))


def faults_of(document: Any) -> list[str]:
    schema = json.loads((ROOT / "schemas" / "result.json").read_text(encoding="utf-8"))
    Draft202012Validator.check_schema(schema)
    return [f"{list(e.absolute_path)}: {e.message[:200]}" for e in Draft202012Validator(schema).iter_errors(document)]


def test_the_result_of_the_example_fleet_keeps_its_schema() -> None:
    document = exported(ROOT / "fleet_example")
    assert faults_of(document) == []
    assert {subject["kind"] for subject in document["subjects"]} == {"hull", "option set"}


def test_a_result_with_faults_in_files_and_an_unstudied_hull_keeps_its_schema(tmp_path: Path) -> None:
    shutil.copytree(ROOT / "fleet_example", tmp_path / "yard")
    hull = tmp_path / "yard" / "hulls" / "tnd-031.yaml"
    hull.write_text(hull.read_text(encoding="utf-8") + "colour: blue\n", encoding="utf-8")
    document = exported(tmp_path / "yard")
    assert faults_of(document) == []
    assert document["not_studied"] == ["hull TND-031"]
    assert document["file_findings"]


def test_every_counted_pass_stands_in_the_result() -> None:
    document = exported(ROOT / "fleet_example")
    places = {study["name"]: sum(len(group["places"]) for group in study["passed"]) for study in document["studies"]}
    assert {s["id"]: places[s["study"]] for s in document["subjects"]} == {
        s["id"]: s["counts"]["passed"] for s in document["subjects"]
    }


def test_a_result_that_breaks_the_schema_is_told() -> None:
    document = exported(ROOT / "fleet_example")
    document["open_errors"] = "many"
    assert faults_of(document) != []
