"""A yard's own rules: what they tighten, what they loosen, and how loudly the reports say so."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from jsonschema import Draft202012Validator

from checker.finding import Level, Outcome, Verdict
from checker.output.json_report import json_report
from checker.output.screen import screen_report
from checker.output.text import fleet_report, hull_report
from checker.pipeline import all_cards
from checker.result.gather import fingerprint
from checker.result.model import FleetResult
from tests.metric_yard import BARE, METRIC
from tests.small_yard import LAW_ONLY, SOUND, Yard, check_yard, the_hull

ROOT = Path(__file__).resolve().parents[1]
CARDS = {card.id: card for card in all_cards()}


def house(text: str, yard: Yard = SOUND) -> Yard:
    """Return the yard with its own rules."""
    return yard.edit("name: Small Yard\n", f"name: Small Yard\nhouse:\n  {text}\n")


def limit(owner: str, figure: str, value: str, yard: Yard = SOUND) -> Yard:
    return house(f"limits: {{{owner}: {{{figure}: {{value: {value}, reason: so we build}}}}}}", yard)


def found(result: FleetResult) -> list[tuple[str, str]]:
    return sorted({(o.check, o.part) for o in the_hull(result).news if o.verdict is Verdict.FINDING})


def faults(yard: Yard) -> list[str]:
    return [f"{o.at} {o.check}: {o.fault} ({o.remedy})" for o in check_yard(yard).file_outcomes]


def the_finding(result: FleetResult, check: str) -> Outcome:
    return next(o for o in the_hull(result).news if o.check == check)


# --- limits

FAR = LAW_ONLY.edit(
    "M1: {from: BAT-H.pos, to: F-MAIN.line, size: 2 AWG, length: 5.9 in",
    "M1: {from: BAT-H.pos, to: F-MAIN.line, size: 2 AWG, length: 7.05 in",
)
"""The main fuse stands a hair beyond the 7 in of the law."""


def test_a_tightened_limit_finds_more_and_is_listed_but_not_as_loosened() -> None:
    result = check_yard(limit("voluntary-dc", "drop.critical_percent", "1.5"))
    assert found(check_yard(SOUND)) == []
    assert ("voltage-drop-from-bank", "BOW-LIGHT") in found(result)
    text = fleet_report(result, CARDS).splitlines()
    assert "loosened by the yard: none" in text
    index = text.index("tightened by the yard")
    assert text[index + 1] == (
        "  drop.critical_percent of voluntary-dc is 1.5 instead of 3 (ABYC E-11, 11.14.2.6, from memory); "
        "reason: so we build"
    )


def test_a_finding_under_a_limit_of_the_yard_says_so() -> None:
    result = check_yard(limit("voluntary-dc", "drop.critical_percent", "1.5"))
    outcome = the_finding(result, "voltage-drop-from-bank")
    assert outcome.house == ("drop.critical_percent of voluntary-dc is 1.5 instead of 3",)
    line = "  yard's own rule: drop.critical_percent of voluntary-dc is 1.5 instead of 3"
    assert line in hull_report(the_hull(result), CARDS).splitlines()


@pytest.mark.parametrize(("inches", "is_found"), [("6.9", True), ("7.1", False)])
def test_a_distance_is_judged_by_the_yards_own_figure(inches: str, *, is_found: bool) -> None:
    assert found(check_yard(FAR)) == [("protection-distance", "M1")]
    result = check_yard(limit("cfr33-183-i", "distance.open_in", inches, FAR))
    assert found(result) == ([("protection-distance", "M1")] if is_found else [])


def test_a_loosened_law_stands_on_the_first_page_of_every_report_and_in_the_result() -> None:
    result = check_yard(limit("cfr33-183-i", "distance.open_in", "9"))
    line = (
        "  LAW: distance.open_in of cfr33-183-i is 9 instead of 7 (33 CFR Part 183, Subpart I, § 183.455(b)(1)); "
        "reason: so we build"
    )
    fleet = fleet_report(result, CARDS).splitlines()
    hull = hull_report(the_hull(result), CARDS).splitlines()
    for text in (fleet, hull):
        index = text.index("loosened by the yard")
        assert index < next(n for n, words in enumerate(text) if words.startswith("caution"))
        assert text[index + 1] == line
    assert line in screen_report(result, CARDS, colour=False).splitlines()
    assert any(words.startswith("verdict:") and "1 rule loosened by the yard, 1 of LAW" in words for words in fleet)
    assert any(words.startswith("verdict:") and "1 rule loosened by the yard, 1 of LAW" in words for words in hull)
    (rule,) = json.loads(json_report(result, CARDS))["house_rules"]
    assert rule == {
        "kind": "limit", "what": "distance.open_in", "limit_set": "cfr33-183-i", "old": "7", "new": "9",
        "loosened": True, "clause": "33 CFR Part 183, Subpart I, § 183.455(b)(1)", "basis": "law",
        "reason": "so we build", "file": "yard.yaml", "line": 3, "column": 52,
    }  # fmt: skip


def schema_faults(result: FleetResult) -> list[str]:
    schema = json.loads((ROOT / "schemas" / "result.json").read_text(encoding="utf-8"))
    return [error.message for error in Draft202012Validator(schema).iter_errors(json.loads(json_report(result, CARDS)))]


def test_results_with_rules_of_the_yard_and_entered_tables_keep_their_schema() -> None:
    loosened = limit("cfr33-183-i", "distance.open_in", "6", FAR.edit("length: 7.05 in", "length: 9 in"))
    for yard in (loosened, METRIC.edit("    current: 20 A\n", "    current: 60 A\n"), BARE):
        result = check_yard(yard)
        assert the_hull(result).news
        assert schema_faults(result) == []


def test_what_departs_from_a_law_is_told_before_all_else_that_is_loosened() -> None:
    yard = house(
        "always_on: {services: {lighting: the stair is dark}}\n"
        "  levels: {legend-rating: {level: note, reason: legends come last}}\n"
        "  limits:\n"
        "    common: {bank.least_days: {value: 5, reason: boats come back weekly}}\n"
        "    voluntary-dc: {drop.general_percent: {value: 12, reason: long masts}}\n"
        "    cfr33-183-i: {device_rating.ampacity_percent: {value: 160, reason: stock}}"
    )
    result = check_yard(yard)
    lines = fleet_report(result, CARDS).splitlines()
    index = lines.index("loosened by the yard")
    assert [line.partition(" is ")[0].partition(" may ")[0] for line in lines[index + 1 : index + 6]] == [
        "  LAW: device_rating.ampacity_percent of cfr33-183-i",
        "  service lighting:",
        "  level of legend-rating",
        "  bank.least_days",
        "  drop.general_percent of voluntary-dc",
    ]


def test_a_rule_of_a_set_that_a_hull_is_not_judged_by_is_not_told_of_the_hull() -> None:
    result = check_yard(limit("voluntary-dc", "drop.general_percent", "12", LAW_ONLY))
    assert "loosened by the yard" in fleet_report(result, CARDS).splitlines()
    assert "loosened by the yard: none" in hull_report(the_hull(result), CARDS).splitlines()


def test_a_yard_without_rules_of_its_own_says_that_nothing_is_loosened() -> None:
    result = check_yard(SOUND)
    assert "loosened by the yard: none" in fleet_report(result, CARDS).splitlines()
    assert "tightened by the yard" not in fleet_report(result, CARDS).splitlines()
    assert "loosened" not in screen_report(result, CARDS, colour=False)
    assert json.loads(json_report(result, CARDS))["house_rules"] == []


@pytest.mark.parametrize(
    ("figure", "value", "check", "part"),
    [
        ("bank.least_days", "80", "standby-days", "HOUSE"),
        ("selectivity.least_ratio", "8", "", ""),
        ("thin_margin.thin_margin_percent", "99", "", ""),
    ],
)
def test_figures_that_belong_to_no_set_can_be_changed(figure: str, value: str, check: str, part: str) -> None:
    result = check_yard(limit("common", figure, value))
    assert the_hull(check_yard(SOUND)).open_errors == 0
    assert found(result) == ([(check, part)] if check else [])
    if figure.startswith("thin_margin"):
        assert the_hull(result).thin > the_hull(check_yard(SOUND)).thin


def test_a_thin_margin_of_the_yard_marks_the_lines_of_the_report() -> None:
    wide = hull_report(the_hull(check_yard(limit("common", "thin_margin.thin_margin_percent", "50"))), CARDS)
    assert wide.count(", thin") > hull_report(the_hull(check_yard(SOUND)), CARDS).count(", thin")


def test_a_gauge_and_a_table_that_the_yard_entered_can_be_changed_too() -> None:
    thin = [("minimum-size", "LIGHTS.back"), ("minimum-size", "LIGHTS.out")]
    assert found(check_yard(limit("cfr33-183-i", "minimum_size.sheathed_awg", "'16'", LAW_ONLY))) == thin
    result = check_yard(METRIC.edit("mm2}", "mm2, limits: {iso-13297: {distance.open_mm: {value: 100, reason: x}}}}"))
    assert found(result) == [("protection-distance", "M1")]


@pytest.mark.parametrize(
    ("owner", "figure", "value", "fault"),
    [
        ("voluntary-dc", "drop.critcal_percent", "2",
         "yard.yaml:3:27 unknown-reference: there is no figure “drop.critcal_percent” of voluntary-dc that a yard may "
         "change (did you mean “drop.critical_percent”?)"),
        ("cfr33-183-i", "drop.critical_percent", "2",
         "yard.yaml:3:26 unknown-reference: there is no figure “drop.critical_percent” of cfr33-183-i that a yard may "
         "change"),
        ("voluntary-dc", "drop.critical_percent", "3",
         "yard.yaml:3:58 bad-value: drop.critical_percent is 3 already (take it out)"),
        ("voluntary-dc", "drop.critical_percent", "11",
         "yard.yaml:3:58 bad-value: drop.critical_percent: critical_percent is above general_percent ()"),
        ("voluntary-dc", "drop.critical_percent", "0.03",
         "yard.yaml:3:58 bad-value: drop.critical_percent: 0.03 is out of all proportion to 3, which the table has "
         "(write it in the table's own unit, in which it is 3)"),
        ("voluntary-dc", "distance.enclosed_in", "1000",
         "yard.yaml:3:57 bad-value: distance.enclosed_in: 1000 is out of all proportion to 40, which the table has "
         "(write it in the table's own unit, in which it is 40)"),
        ("voluntary-dc", "distance.open_in", "-7",
         "yard.yaml:3:53 bad-value: distance.open_in: open_in must be a number above 0, not -7 ()"),
        ("voluntary-dc", "distance.open_in", "7 in",
         "yard.yaml:3:53 bad-value: distance.open_in: open_in must be a number above 0, not '7 in' ()"),
        ("voluntary-dc", "minimum_size.single_awg", "'15.5'",
         "yard.yaml:3:60 bad-value: minimum_size.single_awg: '15.5' is no wire gauge ()"),
        ("common", "bank.strings_without_device", "1.5",
         "yard.yaml:3:58 bad-value: bank.strings_without_device: strings_without_device must be a whole number, not "
         "1.5 ()"),
        ("common", "copper.reference_c", "30",
         "yard.yaml:3:21 unknown-reference: there is no figure “copper.reference_c” of the common tables"),
        ("iso-13297", "distance.open_mm", "100",
         "yard.yaml:3:24 unknown-reference: there is no figure “distance.open_mm” of iso-13297 that a yard may change"),
    ],
)  # fmt: skip
def test_a_limit_that_makes_no_sense_is_told_at_its_line_and_changes_nothing(
    owner: str, figure: str, value: str, fault: str
) -> None:
    yard = limit(owner, figure, value)
    told = faults(yard)
    assert len(told) == 1
    assert told[0].startswith(fault)
    assert check_yard(yard).house == ()


def test_two_figures_of_a_table_must_make_sense_together() -> None:
    yard = house(
        "limits: {voluntary-dc: {drop.critical_percent: {value: 6, reason: a}, "
        "drop.general_percent: {value: 5, reason: b}}}"
    )
    assert faults(yard) == [
        "yard.yaml:3:103 bad-value: drop.general_percent: critical_percent is above general_percent ()"
    ]


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("limits: {voluntary-dc: {drop.critical_percent: {value: 2}}}", "has no “reason”"),
        ("limits: {voluntary-dc: {drop.critical_percent: 2}}", "must be fields"),
        ("limits: {voluntary: {drop.critical_percent: {value: 2, reason: a}}}", "“voluntary” cannot be a name here"),
        ("levels: {legend-rating: {level: fatal, reason: a}}", "“level” cannot be “fatal”"),
        ("always_on: {services: {disco: it is fun}}", "“disco” cannot be a name here"),
    ],
)
def test_a_rule_that_is_not_written_as_one_is_told_and_none_is_applied(text: str, fault: str) -> None:
    yard = house(text)
    assert any(fault in told for told in faults(yard))
    assert check_yard(yard).house == ()


# --- levels


WRONG_LEGEND = SOUND.edit("legend: LIGHTS 10 A", "legend: LIGHTS 15 A")


def test_a_raised_level_makes_the_run_fail_and_a_lowered_one_lets_it_pass() -> None:
    assert check_yard(WRONG_LEGEND).is_clean
    raised = check_yard(house("levels: {legend-rating: {level: error, reason: we sign for legends}}", WRONG_LEGEND))
    assert not raised.is_clean
    assert the_finding(raised, "legend-rating").level is Level.ERROR
    assert "level of legend-rating is error instead of warning" in fleet_report(raised, CARDS)
    assert "loosened by the yard: none" in fleet_report(raised, CARDS).splitlines()


def test_a_lowered_level_of_a_law_is_loosened_and_says_law() -> None:
    assert not check_yard(FAR).is_clean
    result = check_yard(house("levels: {protection-distance: {level: warning, reason: a narrow locker}}", FAR))
    assert result.is_clean
    assert the_finding(result, "protection-distance").level is Level.WARNING
    assert (
        "  LAW: level of protection-distance is warning instead of error (33 CFR § 183.455(b)(1), (b)(2)); "
        "reason: a narrow locker"
    ) in fleet_report(result, CARDS).splitlines()
    assert the_finding(result, "protection-distance").house == (
        "level of protection-distance is warning instead of error",
    )


def test_a_level_changes_no_fingerprint() -> None:
    raised = house("levels: {legend-rating: {level: error, reason: we sign for legends}}", WRONG_LEGEND)
    marks = {fingerprint(the_finding(check_yard(yard), "legend-rating")) for yard in (WRONG_LEGEND, raised)}
    assert len(marks) == 1


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("levels: {legend-ratings: {level: error, reason: a}}",
         "yard.yaml:3:12 unknown-reference: there is no check “legend-ratings” (did you mean “legend-rating”?)"),
        ("levels: {legend-rating: {level: warning, reason: a}}",
         "yard.yaml:3:35 bad-value: findings of legend-rating are at level warning already (take it out)"),
    ],
)  # fmt: skip
def test_a_level_that_changes_nothing_is_told(text: str, fault: str) -> None:
    assert faults(house(text)) == [fault]


# --- what may stay live


AHEAD = SOUND.edit("    feed: P2\n    protect: 10 A\n    legend: LIGHTS 10 A\n", "    feed: BLK-1\n    protect: 10 A\n").also(
    "devices:\n"
    "  F-BLK: {part: bolt-fuse, zone: LOCKER, rating: 30 A, mount: {line: BAT-H.pos}}\n"
    "  BLK: {part: bus-100, zone: LOCKER, positions: {first: BLK-1, last: BLK-2, takes: blade-fuse, returns: PANEL-N}}\n"
    "circuits:\n"
    "  LIVE: {name: live block, service: feeder, current: 10 A, return_reason: shared with the panel, conductors: "
    "{L1: {from: F-BLK.load, to: BLK, size: 8 AWG, length: 0.3 m}}}\n"
)  # fmt: skip


def test_a_service_or_a_circuit_may_stay_live_by_the_yards_own_rule() -> None:
    assert ("ahead-of-switch", "LIGHTS.load") in found(check_yard(AHEAD))
    for text in ("services: {lighting: the stair is dark}", "circuits: {LIGHTS: the stair is dark}"):
        result = check_yard(house(f"always_on: {{{text}}}", AHEAD))
        assert [check for check, _ in found(result) if check == "ahead-of-switch"] == []
        (note,) = {o.note for o in the_hull(result).passes if (o.check, o.part) == ("ahead-of-switch", "LIGHTS.load")}
        assert note == "stays live by the yard's own rule: the stair is dark"
        assert "loosened by the yard" in fleet_report(result, CARDS).splitlines()


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("always_on: {services: {bilge-pump: they must}}",
         "yard.yaml:3:26 bad-value: service bilge-pump may stay live already (take it out)"),
        ("always_on: {circuits: {LIGHT: the stair is dark}}",
         "yard.yaml:3:26 unknown-reference: there is no circuit “LIGHT” (did you mean “LIGHTS”?)"),
    ],
)  # fmt: skip
def test_a_rule_of_what_may_stay_live_that_names_nothing_is_told(text: str, fault: str) -> None:
    assert faults(house(text)) == [fault]


# --- the critical group


def test_services_in_the_critical_group_are_listed_as_tightened() -> None:
    lines = fleet_report(check_yard(house("drop_critical: [lighting, pump]")), CARDS).splitlines()
    assert "  drop_critical: lighting, pump in the critical group (voltage-drop groups of the limit sets)" in lines
