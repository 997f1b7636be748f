"""Enter the tables of the metric set as a yard would: what is judged, what is not, and what is told of a slip."""

from __future__ import annotations

import json

import pytest

from checker.finding import Outcome, Verdict
from checker.output.json_report import json_report
from checker.output.text import fleet_report, hull_report
from checker.pipeline import all_cards
from tests.metric_yard import BARE, METRIC, SAMPLE, without_table
from tests.small_yard import Yard, check_yard, the_hull

CARDS = {card.id: card for card in all_cards()}
TABLES = sorted(name.rpartition("/")[2].removesuffix(".yaml") for name in SAMPLE)


def found(yard: Yard) -> list[tuple[str, str]]:
    return [(o.check, o.part) for o in the_hull(check_yard(yard)).news if o.verdict is Verdict.FINDING]


def not_assessed(yard: Yard) -> list[Outcome]:
    return [o for o in the_hull(check_yard(yard)).news if o.verdict is Verdict.NOT_ASSESSED]


def told(yard: Yard) -> list[str]:
    """Return the faults of the yard's files."""
    return [f"{o.at} {o.check}: {o.fault} ({o.remedy})" for o in check_yard(yard).file_outcomes]


def with_table(name: str, text: str) -> Yard:
    return Yard({**METRIC.files, f"limits/iso-13297/{name}.yaml": text})


def changed(name: str, old: str, new: str) -> Yard:
    """Return the yard with one text of one table changed."""
    text = SAMPLE[f"limits/iso-13297/{name}.yaml"]
    assert text.count(old) == 1
    return with_table(name, text.replace(old, new))


# --- judged by entered tables


def test_the_sound_yard_is_judged_whole_in_square_millimetres() -> None:
    hull = the_hull(check_yard(METRIC))
    assert hull.news == ()
    judged = {o.check for o in hull.passes if o.limit_set == "iso-13297"}
    assert judged >= {
        "ampacity", "unprotected-conductor", "protection-distance", "device-rating", "minimum-size", "voltage-drop",
        "insulation-rating", "conductor-material", "support-spacing", "source-device",
    }  # fmt: skip
    (words,) = {o.note for o in hull.passes if (o.check, o.part) == ("ampacity", "C1")}
    assert words == "49 A for 10 AWG judged as 4 mm2 at 105 C"


@pytest.mark.parametrize(("size", "row"), [("4 mm2", "49 A for 4 mm2 at 105 C"), ("6 mm2", "61 A for 6 mm2 at 105 C")])
def test_a_metric_size_has_its_own_row(size: str, row: str) -> None:
    c1 = "C1: {from: CHARGER.out, to: F-CHARGER.load, size: 10 AWG, length: 2 m"
    yard = METRIC.edit(c1, c1.replace("10 AWG", size))
    (words,) = {o.note for o in the_hull(check_yard(yard)).passes if (o.check, o.part) == ("ampacity", "C1")}
    assert words == row


def test_current_above_a_row_that_the_yard_entered_is_found_with_a_metric_remedy() -> None:
    yard = METRIC.edit("    current: 20 A\n", "    current: 49.1 A\n")
    outcomes = [o for o in the_hull(check_yard(yard)).news if o.check == "ampacity"]
    assert [o.part for o in outcomes] == ["C1", "C2", "C3"]
    assert outcomes[0].remedy.startswith("use 6 mm2 or larger")
    assert found(METRIC.edit("    current: 20 A\n", "    current: 49 A\n")) == []


def test_a_finding_under_an_entered_table_rests_on_that_table_and_not_on_the_law() -> None:
    lines = hull_report(
        the_hull(check_yard(METRIC.edit("    current: 20 A\n", "    current: 60 A\n"))), CARDS
    ).splitlines()
    (rests_on, *_) = [line for line in lines if line.startswith("  rests on: iso-13297")]
    assert "where the table of allowable currents stands, no page" in rests_on
    assert "CFR" not in rests_on
    bare = hull_report(the_hull(check_yard(BARE)), CARDS)
    assert "  rests on: iso-13297; a table that is not entered" in bare
    assert "rests on: iso-13297; law" not in bare


def test_a_gauge_without_row_is_not_assessed_unless_the_yard_lets_the_next_smaller_area_speak() -> None:
    yard = METRIC.edit("\nhouse: {gauge_sizes: next-smaller-mm2}", "")
    missing = {o.missing for o in not_assessed(yard) if o.check in ("ampacity", "device-rating")}
    assert missing == {"house.gauge_sizes in yard.yaml (next-smaller-mm2), or a size in mm2"}


def test_a_set_is_not_blended_with_another_that_judges_beside_it() -> None:
    both = METRIC.edit("limit_sets: [iso-13297]", "limit_sets: [voluntary-dc, iso-13297]")
    notes = {
        o.limit_set: o.note for o in the_hull(check_yard(both)).passes if (o.check, o.part) == ("ampacity", "C1")
    }  # fmt: skip
    assert notes == {
        "voluntary-dc": "60 A for 10 AWG at 105 C", "iso-13297": "49 A for 10 AWG judged as 4 mm2 at 105 C",
    }  # fmt: skip


# --- what is missing


def test_without_any_table_nothing_that_needs_one_passes_and_each_check_says_so_once() -> None:
    hull = the_hull(check_yard(BARE))
    lacking = [o for o in hull.news if o.verdict is Verdict.NOT_ASSESSED]
    checks = [o.check for o in lacking]
    assert len(checks) == len(set(checks))
    assert set(checks) >= {
        "ampacity", "solved-ampacity", "unprotected-conductor", "protection-distance", "device-rating", "size-step",
        "double-feed", "return-protection", "conductor-withstand", "device-voltage", "breaker-type",
        "insulation-rating", "conductor-material", "lost-return", "bank-links",
    }  # fmt: skip
    assert not {o.check for o in hull.passes} & set(checks)
    assert all(o.part == "iso-13297" and str(o.at) == "yard.yaml:2:14" for o in lacking)
    (ampacity,) = (o for o in lacking if o.check == "ampacity")
    assert ampacity.missing == (
        "ampacity.yaml, engine_factor.yaml, bundle.yaml and exemptions.yaml in limits/iso-13297/, "
        "from your licensed copy"
    )


def test_what_is_shipped_of_the_metric_set_is_judged_without_any_table() -> None:
    passes = {o.check for o in the_hull(check_yard(BARE)).passes if o.limit_set == "iso-13297"}
    assert passes >= {"minimum-size", "sheath-exit", "voltage-drop", "support-spacing"}


@pytest.mark.parametrize("table", TABLES)
def test_a_table_that_is_missing_makes_only_what_needs_it_not_assessed(table: str) -> None:
    outcomes = not_assessed(without_table(table))
    assert all(f"{table}.yaml" in o.missing for o in outcomes)
    assert found(without_table(table)) == []
    # Nothing here asks for the cap of sources that do not limit themselves.
    assert bool(outcomes) is (table != "self_limiting_source")


@pytest.mark.parametrize(("role", "is_told"), [("", True), ("communication", False)])
def test_a_thin_conductor_whose_exemption_is_not_known_is_not_assessed(role: str, *, is_told: bool) -> None:
    v3 = "V3: {from: REGULATOR.gnd, to: BUS-N, size: 16 AWG, length: 2 m"
    service = "    service: sense\n    current: 0.1 A\n"
    reason = service.replace("sense", "engine") + "    always_on: the engine maker leaves it live\n"
    thin = v3.replace("16 AWG", "0.5 mm2") + (f", role: {role}, reason: data" if role else "")
    yard = BARE.edit(v3, thin).edit(service, reason)
    sizes = [o for o in the_hull(check_yard(yard)).news if o.check == "minimum-size"]
    assert [(o.part, o.verdict) for o in sizes] == [("V3", Verdict.FINDING if is_told else Verdict.NOT_ASSESSED)]


# --- minimum areas


@pytest.mark.parametrize(
    ("size", "length", "is_found"), [("1 mm2", "2 m", False), ("0.75 mm2", "2 m", True), ("0.75 mm2", "200 mm", False)]
)
def test_a_single_conductor_longer_than_200_mm_has_at_least_1_mm2(size: str, length: str, *, is_found: bool) -> None:
    v2 = "V2: {from: F-SENSE.load, to: REGULATOR.sense, size: 16 AWG, length: 2 m"
    service = "    service: sense\n    current: 0.1 A\n"
    reason = service.replace("sense", "engine") + "    always_on: the engine maker leaves it live\n"
    yard = METRIC.edit(v2, f"V2: {{from: F-SENSE.load, to: REGULATOR.sense, size: {size}, length: {length}")
    outcomes = [o for o in the_hull(check_yard(yard.edit(service, reason))).news if o.check == "minimum-size"]
    assert [o.part for o in outcomes] == (["V2"] if is_found else [])
    if is_found:
        assert outcomes[0].fault == "0.75 mm2 is thinner than 1 mm2, the smallest allowed as a single conductor"


# --- what is wrong with a table


@pytest.mark.parametrize(
    ("name", "old", "new", "fault"),
    [
        ("ampacity", "  1 mm2: [11, 17, 23]", "  1 mm2: [11, 17]",
         "limits/iso-13297/ampacity.yaml:12:10 bad-value: 1 mm2 has 2 figures for 3 columns ()"),
        ("ampacity", "  1 mm2: [11, 17, 23]", "  1 mm2: [11, 27, 23]",
         "limits/iso-13297/ampacity.yaml:12:10 bad-value: 1 mm2 falls with the temperature ()"),
        ("ampacity", "  1 mm2: [11, 17, 23]", "  1 mm2: [1, 7, 23]",
         "limits/iso-13297/ampacity.yaml:12:10 bad-value: 1 mm2 bears less than 0.75 mm2 ()"),
        ("ampacity", "  1 mm2: [11, 17, 23]", "  0.5 mm2: [11, 17, 23]",
         "limits/iso-13297/ampacity.yaml:12:12 bad-value: 0.5 mm2 must not follow 0.75 mm2: rows go from small to "
         "large ()"),
        ("ampacity", "  1 mm2: [11, 17, 23]", "  '16': [11, 17, 23]",
         "limits/iso-13297/ampacity.yaml:12:9 bad-value: rows are all gauges or all metric sizes ()"),
        ("ampacity", "  1 mm2: [11, 17, 23]", "  1 sqmm: [11, 17, 23]",
         "limits/iso-13297/ampacity.yaml:12:3 bad-value: “1 sqmm” cannot be a name here (write an area as 2.5 mm2, "
         "or a gauge in quotes as '14')"),
        ("ampacity", "  1 mm2: [11, 17, 23]", "  1 mm2: [11, 17, -1]",
         "limits/iso-13297/ampacity.yaml:12:19 bad-value: rows: 1 mm2"),
        ("ampacity", "  page: no page\n", "",
         "limits/iso-13297/ampacity.yaml:2:1 missing-field: “citation” has no “page” (add “page”, e.g. "
         "`page: page 31`)"),
        ("ampacity", "columns_c: [60, 85, 105]", "columns_c: [60, 105, 85]",
         "limits/iso-13297/ampacity.yaml:9:12 bad-value: columns_c must rise ()"),
        ("engine_factor", "column_c: 85", "column_c: 90",
         "limits/iso-13297/engine_factor.yaml:10:3 bad-value: its columns are not those of ampacity.yaml: 60, 85, "
         "105 ()"),
        ("engine_factor", "factor: 0.55", "factor: 1.55",
         "limits/iso-13297/engine_factor.yaml:10:28 bad-value: a factor of 1.55 would raise the ampacity ()"),
        ("bundle", "min: 7, max: 24", "min: 8, max: 24",
         "limits/iso-13297/bundle.yaml:9:3 bad-value: rows must follow each other: a gap or overlap stands before 8 ()"),
        ("distance", "open_mm: 190", "open_mm: 1900",
         "limits/iso-13297/distance.yaml:9:14 bad-value: enclosed_mm is shorter than open_mm ()"),
        ("distance", "open_mm: 190", "open_mm: 190\nopen_in: 7",
         "limits/iso-13297/distance.yaml:8:10 bad-value: open_in and open_mm are one figure in two units: keep the "
         "document's own ()"),
        ("distance", "needs_reason: false", "needs_reason: perhaps",
         "limits/iso-13297/distance.yaml:10:15 bad-value: “needs_reason” is true or false, not “perhaps” (write true "
         "or false)"),
        ("distance", "needs_reason: false\n", "",
         "limits/iso-13297/distance.yaml:2:1 missing-field: needs_reason is missing ()"),
        ("exemptions", "[cranking, pigtail]\nmaterial", "[craning, pigtail]\nmaterial",
         "limits/iso-13297/exemptions.yaml:9:25 bad-value: entry 1 of “ampacity_exempt_roles” cannot be “craning” "
         "(did you mean “cranking”?)"),
        ("breaker", "must_be_trip_free: true", "ampacity_percent: 110",
         "limits/iso-13297/breaker.yaml:2:1 missing-field: must_be_trip_free is missing ()"),
    ],
)  # fmt: skip
def test_a_slip_in_a_table_is_told_at_its_line_and_the_table_counts_as_not_entered(
    name: str, old: str, new: str, fault: str
) -> None:
    yard = changed(name, old, new)
    (first, *_) = told(yard)
    if not fault.endswith(")"):
        assert "12:19" in first
    else:
        assert first == fault
    assert any(f"{name}.yaml" in o.missing for o in not_assessed(yard))


@pytest.mark.parametrize(
    ("file", "fault"),
    [
        ("limits/iso-13297/ampacty.yaml",
         "limits/iso-13297/ampacty.yaml:1:1 unknown-reference: limit set iso-13297 has no table “ampacty” (did you "
         "mean ampacity.yaml?)"),
        ("limits/iso-13297/supports.yaml",
         "limits/iso-13297/supports.yaml:1:1 bad-value: the table supports of iso-13297 is not one that a yard enters "
         "(change a figure of it under `house: limits:` in yard.yaml instead)"),
        ("limits/voluntary-dc/ampacity.yaml",
         "limits/voluntary-dc/ampacity.yaml:1:1 bad-value: the table ampacity of voluntary-dc is not one that a yard "
         "enters (change a figure of it under `house: limits:` in yard.yaml instead)"),
        ("limits/iso-13279/ampacity.yaml",
         "limits/iso-13279/ampacity.yaml:1:1 unknown-reference: there is no limit set “iso-13279” (did you mean "
         "limits/iso-13297/?)"),
        ("limits/ampacity.yaml",
         "limits/ampacity.yaml:1:1 unreadable-file: no kind of document is kept at this place (a yard keeps yard.yaml, "
         "waivers.yaml, parts/*.yaml, classes/ID/*.yaml, classes/ID/options/*.yaml, hulls/*.yaml, limits/SET/*.yaml, "
         "sheets/*.yaml, sheets/*.csv)"),
    ],
)  # fmt: skip
def test_a_table_at_a_place_where_nobody_would_read_it_is_told(file: str, fault: str) -> None:
    assert fault in told(METRIC.with_file(file, SAMPLE["limits/iso-13297/ampacity.yaml"]))


@pytest.mark.parametrize(
    "text", ["", "- 1\n", "rows: &a [1]\n", "\t", "citation: 7\n", "citation:\n  document: !!int 3\n"]
)
def test_no_content_of_a_table_makes_the_run_fail(text: str) -> None:
    yard = with_table("ampacity", text)
    assert told(yard)
    assert {o.check for o in not_assessed(yard)} >= {"ampacity"}


# --- what the reports say


def test_the_reports_say_which_tables_were_entered_and_from_which_page() -> None:
    result = check_yard(without_table("breaker"))
    line = (
        "table ampacity of iso-13297: entered by the yard from Invented sample, not from the standard, invented, "
        "where the table of allowable currents stands, no page (limits/iso-13297/ampacity.yaml)"
    )
    lacking = "tables of iso-13297 not entered: breaker; what needs them is not assessed"
    for text in (fleet_report(result, CARDS), hull_report(the_hull(result), CARDS)):
        assert line in text.splitlines()
        assert lacking in text.splitlines()
    (use,) = json.loads(json_report(result, CARDS))["studies"][0]["limit_sets"]
    assert use["not_entered"] == ["breaker"]
    assert use["entered"][0]["table"] == "ampacity"
    assert use["entered"][0]["file"] == "limits/iso-13297/ampacity.yaml"
