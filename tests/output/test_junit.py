"""JUnit XML that real readers take, with counts that add up."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from xml.etree import ElementTree

import pytest
from junitparser import Failure, JUnitXml, Skipped, TestCase

from checker.output.junit import junit_report
from checker.pipeline import all_cards
from checker.result.gather import natural
from checker.result.model import FleetResult
from tests.dory_yard import DORY, checked, edited
from tests.output.example import example

CARDS = {card.id: card for card in all_cards()}
DESIGN = "classes/dory-14/class.yaml"


def read(text: str) -> JUnitXml:
    return JUnitXml.fromstring(text.encode("utf-8"))


def cases(text: str) -> Mapping[tuple[str, str], TestCase]:
    """Return the cases by suite and name; no name may stand twice."""
    found: dict[tuple[str, str], TestCase] = {}
    for suite in read(text):
        for case in suite:
            assert (suite.name, case.name) not in found
            assert case.classname == suite.name
            found[suite.name, case.name] = case
    return found


@pytest.fixture(scope="module")
def report() -> str:
    return junit_report(example(), CARDS, "fleet_example")


@pytest.fixture(scope="module")
def result() -> FleetResult:
    return example()


def test_a_reader_counts_what_the_report_says(report: str) -> None:
    stated = read(report)
    counted = read(report)
    for suite in counted:
        suite.update_statistics()
    counted.update_statistics()
    for name in ("tests", "failures", "skipped", "errors"):
        assert getattr(stated, name) == getattr(counted, name)
        assert [getattr(suite, name) for suite in stated] == [getattr(suite, name) for suite in counted]


def test_each_hull_and_option_set_is_a_suite_and_each_circuit_a_case(report: str, result: FleetResult) -> None:
    assert [suite.name for suite in read(report)] == [
        f"{'hull' if subject.is_hull else 'option set'} {subject.id}" for subject in result.subjects
    ]
    found = cases(report)
    assert found["hull TND-031", "P14"].result == []
    names = [name for suite, name in found if suite == "hull TND-031"]
    assert names == sorted(names, key=natural)
    assert {"P14", "BUS-N", "SH-1"} < set(names)


def test_an_open_error_fails_its_case_at_its_line(report: str) -> None:
    failed = {key: case for key, case in cases(report).items() if any(isinstance(r, Failure) for r in case.result)}
    assert sorted(suite for suite, _ in failed) == ["hull TND-035", "hull TND-037"] + 7 * ["hull TND-038"]
    (failure,) = failed["hull TND-035", "M07"].result
    assert failure.type == "shunt-bypass"
    assert failure.message.startswith("W043: charge source CHG is joined")
    assert failure.text.startswith("fleet_example/hulls/tnd-035.yaml:22:13: error: W043: charge source CHG")


def test_an_accepted_finding_skips_its_case_with_the_reason(report: str) -> None:
    (skipped,) = [case for case in cases(report).values() if any(isinstance(r, Skipped) for r in case.result)]
    assert (skipped.classname, skipped.name) == ("hull TND-034", "P11")
    message = skipped.result[0].message
    assert message.startswith("accepted error: P11: loses 0.405 V")
    assert "until 2028-05-29 [WVR-034-1]: ampacity and protection unaffected" in message


def test_a_warning_passes_and_stands_in_the_output_of_its_case(report: str) -> None:
    case = cases(report)["hull TND-036", "WVR-036-1"]
    assert case.result == []
    assert case.system_out.startswith("fleet_example/waivers.yaml:20:3: warning: WVR-036-1: no finding")


def test_what_was_not_assessed_skips_its_case_with_the_field_to_fill_in(tmp_path: Path) -> None:
    found = cases(junit_report(checked(tmp_path, DORY), CARDS, ""))
    (skipped,) = found["hull DORY-1", "W1"].result
    assert isinstance(skipped, Skipped)
    assert skipped.message.startswith("not assessed: W1: ")
    assert "fill in: " in skipped.message


def test_faults_of_the_yards_files_fail_a_suite_of_their_own(tmp_path: Path) -> None:
    files = edited("hulls/dory-1.yaml", "class: dory-14", "class: nothing")
    found = cases(junit_report(checked(tmp_path, files), CARDS, ""))
    mine = {name: case.result for (suite, name), case in found.items() if suite == "files of the yard"}
    assert {name for name, results in mine.items() if isinstance(results[0], Failure)} == {
        "hull DORY-1", "hulls/dory-1.yaml",
    }  # fmt: skip


def test_strict_readers_find_no_element_or_attribute_that_they_refuse(report: str) -> None:
    known = {
        "testsuites": {"tests", "failures", "skipped", "errors"},
        "testsuite": {"name", "tests", "failures", "skipped", "errors"},
        "testcase": {"name", "classname"},
        "failure": {"type", "message"},
        "skipped": {"message"},
        "system-out": set[str](),
    }
    for element in ElementTree.fromstring(report).iter():
        assert set(element.attrib) == known[element.tag]
        if element.tag == "testcase":
            assert [child.tag for child in element] in ([], ["failure"], ["skipped"], ["system-out"],
                                                        ["failure", "system-out"], ["skipped", "system-out"])  # fmt: skip


def test_no_line_of_a_text_is_a_command_of_a_ci_job(tmp_path: Path) -> None:
    text = junit_report(checked(tmp_path, {**DORY, "::error::pwned.yml": "", "##[error]pwned.yaml": ""}), CARDS, "")
    found = [r.text for case in cases(text).values() for r in case.result if isinstance(r, Failure)]
    assert any(line.startswith("./::error::pwned.yml:1:1: error: ") for told in found for line in told.splitlines())
    assert [told for told in found for line in told.splitlines() if line.lstrip().startswith(("::", "##["))] == []


def test_signs_with_a_meaning_in_xml_stay_text(tmp_path: Path) -> None:
    nasty = "9 A ]]> <x a='b'> & &amp; <![CDATA[ <!-- end"
    files = edited(DESIGN, "C1: {name: Bow lamp", f'C1: {{legend: "{nasty}", name: Bow lamp')
    case = cases(junit_report(checked(tmp_path, files), CARDS, ""))["hull DORY-1", "C1"]
    assert f"legend “{nasty}” says 9 A" in case.system_out


@pytest.mark.parametrize("code", ["0000", "0001", "001b", "0085", "2028", "fffe", "ffff"])
def test_a_character_that_xml_forbids_is_spelled(tmp_path: Path, code: str) -> None:
    files = edited(DESIGN, "C1: {name: Bow lamp", f'C1: {{legend: "9 A \\u{code} end", name: Bow lamp')
    text = junit_report(checked(tmp_path, files), CARDS, "")
    ElementTree.fromstring(text)
    assert f"\\u{code}" in text
