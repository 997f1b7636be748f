"""Committed reports: an edit of one circuit shows as that circuit, and what changes nothing shows as nothing."""

from __future__ import annotations

import datetime
import difflib
import json
import re
import shutil
from collections import Counter
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from checker.checks.words import measured
from checker.finding import Level, Measure, Outcome, Span, Verdict
from checker.output.files import report_files
from checker.output.lines import measure_words
from checker.output.screen import screen_report
from checker.pipeline import all_cards, check_fleet
from checker.result.model import FleetResult
from tests.dory_yard import checked, edited

EXAMPLE = Path(__file__).resolve().parents[2] / "fleet_example"
CLASS = "classes/tindral-36"
CARDS = {card.id: card for card in all_cards()}
PLACE = re.compile(r'[\w./+-]+\.yaml:\d+:\d+|"file": "[^"]*", "line": \d+, "column": \d+')

Reports = dict[str, str]


def copied(folder: Path) -> Path:
    """Return a copy of the example that may be edited."""
    shutil.copytree(EXAMPLE, folder, ignore=shutil.ignore_patterns("reports"))
    return folder


def edit(yard: Path, file: str, old: str, new: str) -> None:
    text = (yard / file).read_text(encoding="utf-8")
    assert text.count(old) == 1, f"“{old}” stands {text.count(old)} times in {file}"
    (yard / file).write_text(text.replace(old, new), encoding="utf-8")


def result_of(yard: Path) -> FleetResult:
    return check_fleet(yard, today=datetime.date(2026, 12, 1))


def reports_of(yard: Path) -> Reports:
    return report_files(result_of(yard), CARDS)


def without_places(reports: Reports) -> Reports:
    """Return the reports with every file:line:column made the same."""
    return {name: PLACE.sub("PLACE", text) for name, text in reports.items()}


def changed_lines(before: str, after: str) -> tuple[list[str], list[str]]:
    """Return the lines that went and the lines that came."""
    matcher = difflib.SequenceMatcher(None, before.splitlines(), after.splitlines(), autojunk=False)
    gone: list[str] = []
    come: list[str] = []
    for tag, i1, i2, j1, j2 in matcher.get_opcodes():
        if tag != "equal":
            gone += matcher.a[i1:i2]
            come += matcher.b[j1:j2]
    return gone, come


@pytest.fixture(scope="module")
def example() -> FleetResult:
    return result_of(EXAMPLE)


@pytest.fixture(scope="module")
def reports(example: FleetResult) -> Reports:
    return report_files(example, CARDS)


# --- one edit, one circuit


def test_a_longer_cable_of_one_branch_changes_the_lines_of_that_circuit_only(tmp_path: Path, reports: Reports) -> None:
    yard = copied(tmp_path / "yard")
    edit(yard, f"{CLASS}/panel.yaml", "tail: 1.8 m\n    load: lt-sal", "tail: 2.3 m\n    load: lt-sal")
    after = reports_of(yard)
    assert sorted(after) == sorted(reports)
    hulls = [name for name in reports if name.startswith("hulls/")]
    assert len(hulls) == 8
    for name in hulls:
        gone, come = changed_lines(reports[name], after[name])
        assert len(gone) == len(come)
        assert 0 < len(gone) <= 12
        # The breaker's fault current at the far end changes with the cable.
        assert {line.split()[0].split(".")[0].rstrip(":") for line in gone + come} == {"P14", "PNL-13"}, name
        assert [re.split("[:;]", line)[0] for line in gone] == [re.split("[:;]", line)[0] for line in come]
        assert "  P14 voltage-drop voluntary-dc" in [line.split(":")[0] for line in gone]
    assert changed_lines(reports["fleet.txt"], after["fleet.txt"]) == ([], [])
    facts, facts_after = (Counter(facts_of(json.loads(r["result.json"]))) for r in (reports, after))
    changed = {fact[-2] for fact in (facts - facts_after) + (facts_after - facts)}
    assert changed <= {"P14", "P14.out", "P14.back", "P14.load", "PNL-13"}
    assert "P14" in changed


def test_a_cable_that_becomes_too_long_changes_its_lines_and_the_totals(tmp_path: Path, reports: Reports) -> None:
    yard = copied(tmp_path / "yard")
    edit(yard, f"{CLASS}/panel.yaml", "tail: 1.8 m\n    load: lt-sal", "tail: 30 m\n    load: lt-sal")
    after = reports_of(yard)
    gone, come = changed_lines(reports["hulls/TND-031.txt"], after["hulls/TND-031.txt"])
    heads = ("verdict:", "finding", "passed", "findings", "open")
    others = [
        line for line in gone
        if not line.strip().startswith(heads) and "P14" not in line and "PNL-13" not in line and not re.match(r"  [a-z-]+( [a-z0-9-]+)?: \d+$", line)
    ]  # fmt: skip
    assert others == []
    starts = [line for line in come if re.match("(error|warning|note): ", line)]
    assert starts
    assert all(line.startswith(("error: P14", "warning: P14", "note: P14", "warning: PNL-13")) for line in starts)
    assert any(line.startswith("verdict: FAILS with ") for line in come)
    assert any(line.startswith("  finding: ") for line in come)


# --- what changes nothing


def test_comments_blank_lines_and_quotes_change_nothing_but_places(tmp_path: Path, reports: Reports) -> None:
    yard = copied(tmp_path / "yard")
    for file in sorted(yard.rglob("*.yaml")):
        text = file.read_text(encoding="utf-8")
        file.write_text(f"# A comment.\n\n{text}\n# Another one.\n", encoding="utf-8")
    edit(yard, f"{CLASS}/panel.yaml", "    service: feeder", "    service: 'feeder'  # said otherwise")
    after = reports_of(yard)
    assert after != reports
    assert without_places(after) == without_places(reports)


def test_windows_line_ends_change_nothing(tmp_path: Path, reports: Reports) -> None:
    yard = copied(tmp_path / "yard")
    for file in sorted(yard.rglob("*.yaml")):
        file.write_bytes(b"\xef\xbb\xbf" + file.read_bytes().replace(b"\n", b"\r\n"))
    assert reports_of(yard) == reports


def test_the_order_of_fields_changes_nothing_but_places(tmp_path: Path, reports: Reports) -> None:
    yard = copied(tmp_path / "yard")
    edit(yard, f"{CLASS}/panel.yaml", "    protect: 10 A\n    cable: 14 AWG\n    route: [nav-port, saloon-port]\n    tail: 1.8 m\n",
         "    tail: 1.8 m\n    route: [nav-port, saloon-port]\n    cable: 14 AWG\n    protect: 10 A\n")  # fmt: skip
    panel = yard / CLASS / "panel.yaml"
    head, devices, circuits = re.split(r"^(?=devices:|circuits:)", panel.read_text(encoding="utf-8"), flags=re.M)
    panel.write_text(head + circuits + devices, encoding="utf-8")
    hull = yard / "hulls/tnd-038.yaml"
    first, second, third = re.split(r"^  (?=DEV-)", hull.read_text(encoding="utf-8"), flags=re.M)
    hull.write_text(f"{first}  {third}\n  {second}", encoding="utf-8")
    after = without_places(reports_of(yard))
    before = without_places(reports)
    assert {name: Counter(text.splitlines()) for name, text in after.items()} == {
        name: Counter(text.splitlines()) for name, text in before.items()
    }


def test_a_section_moved_to_another_file_changes_nothing_but_places(tmp_path: Path, reports: Reports) -> None:
    yard = copied(tmp_path / "yard")
    (yard / CLASS / "zones.yaml").rename(yard / CLASS / "aaa-zones.yaml")
    (yard / "parts/metal.yaml").rename(yard / "parts/zzz.yaml")
    assert without_places(reports_of(yard)) == without_places(reports)


@pytest.mark.parametrize("same", ["10 ft", "10 ft 0 in", "120 in", "304.8 cm", "3048 mm"])
def test_the_same_length_in_another_unit_changes_nothing(tmp_path: Path, same: str) -> None:
    file = "classes/dory-14/class.yaml"
    metres = edited(file, "cable: 14 AWG, length: 3 m", "cable: 14 AWG, length: 3.048 m")
    first = report_files(checked(tmp_path / "m", metres), CARDS)
    assert report_files(checked(tmp_path / "other", edited(file, "3.048 m", same, metres)), CARDS) == first


@pytest.mark.parametrize("name", ["aaa.yaml", "zzz.yaml"])
def test_a_renamed_hull_file_changes_nothing_but_places(tmp_path: Path, reports: Reports, name: str) -> None:
    yard = copied(tmp_path / "yard")
    (yard / "hulls/tnd-037.yaml").rename(yard / "hulls" / name)
    after, before = without_places(reports_of(yard)), without_places(reports)
    assert sorted(after) == sorted(before)
    for file in before:
        if file.startswith("hulls/"):
            assert after[file] == before[file]
        else:  # findings stand in the order of their places, so that blocks of lines may move
            assert Counter(after[file].splitlines()) == Counter(before[file].splitlines())
    summary = re.compile("^(?:hull|option set) .*$", re.M)
    assert summary.findall(after["fleet.txt"]) == summary.findall(before["fleet.txt"])


# --- figures


@pytest.mark.parametrize(
    ("value", "limit", "unit", "shown"),
    [
        (0.0336, 0.03, "", ("3.36 %", "3.00 %")),
        (0.030001, 0.03, "", ("3.0001 %", "3.0000 %")),
        (0.0300000001, 0.03, "", ("3.000000010 %", "3.000000000 %")),
        (0.03, 0.03, "", ("3.00 %", "3.00 %")),
        (0.1779, 0.1778, "m", ("0.1779 m", "0.1778 m")),
        (0.3, 0.1778, "m", ("0.300 m", "0.178 m")),
        (15.001, 15.0, "A", ("15.001 A", "15.000 A")),
        (60.0, 52.5, "A", ("60 A", "52.5 A")),
        (60.0, float("inf"), "A", ("60 A", "unlimited")),
    ],
)
def test_a_limit_missed_by_less_than_the_printed_digits_is_printed_with_more(
    value: float, limit: float, unit: str, shown: tuple[str, str]
) -> None:
    assert measured(Measure("x", value, limit, unit)) == shown


def test_a_missed_limit_is_never_printed_as_if_it_were_met() -> None:
    for step in range(1, 9):
        measure = Measure("drop_fraction", 0.03 * (1 + 3 * 10**-step), 0.03, "")
        outcome = Outcome(verdict=Verdict.FINDING, check="voltage-drop", level=Level.ERROR, part="P1",
                          at=Span("a.yaml", 1, 1), measure=measure)  # fmt: skip
        assert not measure.holds
        value, _, limit = measure_words(outcome).partition(", ")[0].partition(" of ")
        assert value != limit


def test_no_report_prints_a_figure_equal_to_a_limit_that_it_misses(reports: Reports) -> None:
    for text in reports.values():
        for value, limit in re.findall(r"measured: (\S+ \S+) of (\S+ \S+), headroom -", text):
            assert value != limit


# --- the JSON holds what the text holds


def study_of(document: dict[str, Any], subject: dict[str, Any]) -> dict[str, Any]:
    (study,) = [study for study in document["studies"] if study["name"] == subject["study"]]
    return dict(study)


def news_of(document: dict[str, Any], subject: dict[str, Any]) -> list[dict[str, Any]]:
    """Return the findings, accepted findings and places not assessed of a subject."""
    accepted = {row["fingerprint"] for row in subject["accepted"]}
    rows = [
        {**row, "verdict": "accepted"} if row.get("fingerprint") in accepted and row["verdict"] == "finding" else row
        for row in study_of(document, subject)["found"]
    ]
    return rows + subject["own_findings"]


def facts_of(document: dict[str, Any]) -> Iterator[tuple[str, ...]]:
    """Yield every passed place of every study with its figures: study, check, limit set, part, figures."""
    for study in document["studies"]:
        for group in study["passed"]:
            for part, figures in group["places"].items():
                yield (study["name"], group["check"], group["limit_set"], part, str(figures))


def test_the_json_parses_and_tells_every_hull_that_the_text_tells(reports: Reports) -> None:
    document = json.loads(reports["result.json"])
    hulls = [subject for subject in document["subjects"] if subject["kind"] == "hull"]
    assert [f"hulls/{subject['id']}.txt" for subject in hulls] == [
        name for name in reports if name.startswith("hulls/")
    ]
    for subject in hulls:
        text = reports[f"hulls/{subject['id']}.txt"]
        totals = dict(re.findall(r"^  (finding|accepted|not assessed|passed): (\d+)$", text, re.M))
        counts = {verdict.replace("_", " "): str(number) for verdict, number in subject["counts"].items()}
        assert counts == totals
        rows = Counter(row["verdict"] for row in news_of(document, subject))
        assert {verdict: str(rows[verdict]) for verdict in totals if verdict != "passed"} == {
            verdict: number for verdict, number in totals.items() if verdict != "passed"
        }
        assert f"status: {subject['status']}\n" in text
        assert f"options: {', '.join(subject['options']) or 'none'}\n" in text


def test_every_finding_stands_in_the_text_and_in_the_json_with_the_same_fingerprint(reports: Reports) -> None:
    document = json.loads(reports["result.json"])
    for subject in document["subjects"]:
        if subject["kind"] == "hull":
            text = reports[f"hulls/{subject['id']}.txt"]
            in_text = set(re.findall(r"^  fingerprint: ([0-9a-f]{12})", text, re.M))
            rows = [row for row in news_of(document, subject) if row["verdict"] in ("finding", "accepted")]
            waivable = {row["fingerprint"] for row in rows if row["fingerprint"] in in_text}
            assert waivable == in_text
            for row in rows:
                assert row["fault"] in text
                assert f"[{row['check']}]" in text
                assert row.get("remedy", "") in text


def test_every_measured_pass_stands_in_the_text_and_in_the_json(reports: Reports) -> None:
    document = json.loads(reports["result.json"])
    (subject,) = [subject for subject in document["subjects"] if subject["id"] == "TND-038"]
    text = reports["hulls/TND-038.txt"]
    in_json = {
        f"{part} {group['check']} {group['limit_set']}".strip()
        for group in study_of(document, subject)["passed"]
        for part, figures in group["places"].items()
        if "quantity" in group and figures[2] is not None
    }
    in_text = set(re.findall(r"^  (\S+ \S+(?: \S+)?): .* headroom ", text.split("passed with headroom")[1], re.M))
    assert len(in_text) > 300
    assert in_text <= in_json


def test_the_screen_tells_the_same_findings_as_the_fleet_report(example: FleetResult, reports: Reports) -> None:
    heads = re.compile("^(?:error|warning|note|accepted (?:error|warning|note)): .*$", re.M)
    assert heads.findall(screen_report(example, CARDS, colour=False)) == heads.findall(reports["fleet.txt"])


def test_each_fact_of_a_report_stands_on_one_printable_line(reports: Reports) -> None:
    for name, text in reports.items():
        assert text.endswith("\n")
        assert all(line.isprintable() for line in text.split("\n")), name
        assert [line for line in text.split("\n") if line != line.rstrip()] == [], name
