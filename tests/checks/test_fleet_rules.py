"""Seed faults of a fleet: waivers that do not hold, patches without effect, hulls behind their class."""

from __future__ import annotations

import datetime

import pytest

from checker.finding import Level, Outcome, Span, Verdict
from checker.result.gather import fingerprint
from checker.result.waivers import Waiver, apply_waivers
from tests.small_yard import (
    BOTH,
    HULL_FILE,
    HULL_YAML,
    LAW,
    NEITHER,
    SOUND,
    TODAY,
    Yard,
    check_yard,
    finding,
    found,
    outcomes,
    tell,
    the_hull,
)

FAULTY = SOUND.edit("feed: P1\n    protect: 5 A", "feed: P1\n    protect: 10 A")
THE_FINDING = ("maker-device", "P1", NEITHER, "protect: 10 A")
FINGERPRINT = fingerprint(finding(FAULTY, "maker-device", "P1"))
TWICE = SOUND.edit("to: F-MAIN.line, size: 2 AWG, length: 5.9 in", "to: F-MAIN.line, size: 2 AWG, length: 8 in")
TWICE_LINE = "M1: {from: BAT-H.pos, to: F-MAIN.line, size: 2 AWG, length: 8 in}"


def waived(yard: Yard, **changed: str) -> Yard:
    """Return a yard with a waiver for the oversized plotter breaker of one hull; fields can be changed."""
    fields = {
        "check": "maker-device", "hull": "SKIFF-1", "part": "P1", "fingerprint": FINGERPRINT,
        "reason": "accepted for the first season", "approved_by": "electrical lead", "expires": '"2026-12-01"',
    } | changed  # fmt: skip
    rows = "".join(f"    {name}: {value}\n" for name, value in fields.items() if value)
    return yard.with_file("waivers.yaml", f"waivers:\n  W-1:\n{rows}")


def accepted(yard: Yard, today: datetime.date = datetime.date(2026, 12, 1)) -> list[tuple[str, str, str, str]]:
    """Return what a waiver accepts."""
    return tell(yard, outcomes(yard, Verdict.ACCEPTED, today))


def test_waiver_accepts_the_one_finding_that_it_names() -> None:
    """FLT-04, FLT-05, FLT-06: the sound twin of all that follows."""
    yard = waived(FAULTY)
    assert found(yard) == []
    assert accepted(yard) == [THE_FINDING]


def test_waiver_without_a_finding_is_found_at_the_waiver() -> None:
    """FLT-04: the breaker was changed back to what the maker allows."""
    yard = waived(SOUND)
    assert found(yard) == [("waiver-unmatched", "W-1", NEITHER, "W-1:")]
    assert finding(yard, "waiver-unmatched", "W-1").level is Level.WARNING


@pytest.mark.parametrize("field", [{"part": "P2"}, {"check": "legend-rating"}, {"limit_set": "voluntary-dc"}])
def test_waiver_of_another_part_check_or_set_accepts_nothing(field: dict[str, str]) -> None:
    """FLT-04."""
    assert found(waived(FAULTY, **field)) == [THE_FINDING, ("waiver-unmatched", "W-1", NEITHER, "W-1:")]


def test_waiver_that_matches_the_findings_of_two_limit_sets_accepts_neither() -> None:
    """FLT-05."""
    yard = waived(TWICE, check="protection-distance", part="M1")
    assert found(yard) == [
        ("protection-distance", "M1", BOTH, TWICE_LINE),
        ("waiver-too-wide", "W-1", NEITHER, "W-1:"),
    ]
    assert accepted(yard) == []


def test_waiver_that_names_the_limit_set_accepts_one_of_two_findings() -> None:
    """FLT-05."""
    mark = fingerprint(finding(TWICE, "protection-distance", "M1", "practice"))
    yard = waived(TWICE, check="protection-distance", part="M1", limit_set="voluntary-dc", fingerprint=mark)
    assert found(yard) == [("protection-distance", "M1", LAW, TWICE_LINE)]
    assert accepted(yard) == [("protection-distance", "M1", "practice", TWICE_LINE)]


def test_waiver_still_counts_on_its_day_of_expiry() -> None:
    """FLT-05."""
    yard = waived(FAULTY)
    assert accepted(yard, datetime.date(2026, 12, 1)) == [THE_FINDING]
    assert found(yard, datetime.date(2026, 12, 1)) == []


def test_waiver_has_run_out_on_the_day_after_its_expiry() -> None:
    """FLT-05."""
    yard = waived(FAULTY)
    assert found(yard, datetime.date(2026, 12, 2)) == [
        THE_FINDING,
        ("waiver-expired", "W-1", NEITHER, 'expires: "2026-12-01"'),
    ]


def test_waiver_lapses_when_the_inputs_of_its_finding_change() -> None:
    """FLT-06: 15 A was fitted where 10 A was accepted."""
    yard = waived(SOUND.edit("feed: P1\n    protect: 5 A", "feed: P1\n    protect: 15 A"))
    assert found(yard) == [
        ("maker-device", "P1", NEITHER, "protect: 15 A"),
        ("waiver-inputs-changed", "W-1", NEITHER, f"fingerprint: {FINGERPRINT}"),
    ]


def test_waiver_holds_when_something_else_changes() -> None:
    """FLT-06: a line more above it, another name, another length."""
    yard = FAULTY.edit("name: Chart plotter", "# a note\n    name: Plotter")
    yard = waived(yard.edit("tail: 0.5 m\n    load: plotter", "tail: 0.6 m\n    load: plotter"))
    assert accepted(yard) == [THE_FINDING]
    assert found(yard) == []


def hull(text: str) -> Yard:
    """Return the yard with other changes on its hull."""
    return SOUND.edit("options: []\n", f"options: []\nchanges:\n{text}")


def test_change_that_sets_what_is_already_so_is_found_at_its_line() -> None:
    """FLT-02: the meant change never happened."""
    yard = hull("  AB-1:\n    what: longer cable\n    state: recorded\n    set: {circuits: {PLOTTER: {tail: 0.5 m}}}\n")
    assert found(yard) == [
        ("patch-without-effect", "hulls/skiff-1.yaml", NEITHER, "set: {circuits: {PLOTTER: {tail: 0.5 m}}}")
    ]


def test_change_that_removes_what_is_not_there_is_found_at_its_line() -> None:
    """FLT-02: a mistyped id."""
    yard = hull("  AB-1:\n    what: no plotter\n    state: recorded\n    set:\n      circuits:\n        PLOTER: null\n")
    assert found(yard) == [("patch-without-effect", "hulls/skiff-1.yaml", NEITHER, "PLOTER: null")]


def test_change_that_changes_something_is_sound() -> None:
    """FLT-02."""
    yard = hull("  AB-1:\n    what: longer cable\n    state: recorded\n    set: {circuits: {PLOTTER: {tail: 0.6 m}}}\n")
    assert found(yard) == []


def test_option_that_changes_nothing_is_found_at_its_line() -> None:
    """FLT-02."""
    option = "option: OPT-1\nname: Nothing\nchanges:\n  circuits:\n    PLOTTER: {tail: 0.5 m}\n"
    yard = SOUND.with_file("classes/skiff/options/opt-1.yaml", option)
    assert found(yard) == [
        ("patch-without-effect", "classes/skiff/options/opt-1.yaml", NEITHER, "PLOTTER: {tail: 0.5 m}")
    ]


def test_fault_that_a_hull_s_change_makes_is_found_in_the_hull_s_file() -> None:
    """FLT-02: the line a person would edit is that of the change; the class stays sound."""
    line = "set: {circuits: {PLOTTER: {protect: 10 A}}}"
    yard = hull(f"  AB-1:\n    what: other breaker\n    state: recorded\n    {line}\n")
    assert found(yard) == [("maker-device", "P1", NEITHER, line)]
    (design,) = [s for s in check_yard(yard).subjects if not s.is_hull]
    assert {o.verdict for o in design.outcomes} == {Verdict.PASSED}


def behind(electrical: str) -> Yard:
    """Return the yard with the hull at revision 1, and revision 2 electrical or not."""
    yard = SOUND.edit("class: skiff\nrevision: 2", "class: skiff\nrevision: 1")
    return yard.edit("reworded, electrical: false}", f"reworded, electrical: {electrical}}}")


def test_hull_behind_an_electrical_revision_is_an_error_at_its_revision() -> None:
    """FLT-07."""
    yard = behind("true")
    assert found(yard) == [("class-revision", "SKIFF-1", NEITHER, "revision: 1")]
    assert finding(yard, "class-revision", "SKIFF-1").level is Level.ERROR


def test_hull_behind_a_revision_that_is_not_electrical_is_a_note() -> None:
    """FLT-07."""
    yard = behind("false")
    assert found(yard) == [("class-revision", "SKIFF-1", NEITHER, "revision: 1")]
    assert finding(yard, "class-revision", "SKIFF-1").level is Level.NOTE
    assert check_yard(yard).is_clean


def test_hull_at_the_revision_of_its_class_is_sound() -> None:
    """FLT-07."""
    assert found(SOUND) == []


def test_alike_hulls_are_studied_once_and_named_with_each_other() -> None:
    """FLEET: the class without options is the first that has this content."""
    second = HULL_YAML.replace("SKIFF-1", "SKIFF-2").replace("in-build", "planned")
    other = HULL_YAML.replace("SKIFF-1", "SKIFF-3") + (
        "changes:\n  AB-1:\n    what: longer cable\n    state: recorded\n"
        "    set: {circuits: {PLOTTER: {tail: 0.6 m}}}\n"
    )
    yard = SOUND.with_file("hulls/skiff-2.yaml", second).with_file("hulls/skiff-3.yaml", other)
    result = check_yard(yard)
    assert [study.name for study in result.studies] == ["skiff", "SKIFF-3"]
    assert the_hull(result, "SKIFF-1").alike == ("skiff", "SKIFF-2")
    assert the_hull(result, "SKIFF-2").outcomes == the_hull(result, "SKIFF-1").outcomes
    assert the_hull(result, "SKIFF-3").alike == ()


def test_waiver_of_one_hull_does_not_accept_the_finding_of_an_alike_hull() -> None:
    """FLT-05, FLEET."""
    yard = waived(FAULTY).with_file("hulls/skiff-2.yaml", HULL_YAML.replace("SKIFF-1", "SKIFF-2"))
    result = check_yard(yard)
    assert the_hull(result, "SKIFF-1").open_errors == 0
    still_open = [o for o in the_hull(result, "SKIFF-2").outcomes if o.verdict is Verdict.FINDING]
    assert tell(yard, still_open) == [THE_FINDING]


def in_states(**inputs: str) -> list[Outcome]:
    """Return findings of one check at one part in several switch states, each with other inputs."""
    base = Outcome(Verdict.FINDING, "maker-device", Level.ERROR, "P1", Span("a.yaml", 1, 1))
    return [base._replace(state=state, inputs=(("amps", amps),)) for state, amps in inputs.items()]


def the_waiver(mark: str) -> Waiver:
    at = Span("waivers.yaml", 2, 3)
    return Waiver(
        id="W-1", check="maker-device", hull="SKIFF-1", class_id="", part="P1", limit_set="", fingerprint=mark,
        reason="r", approved_by="a", evidence="", expires=TODAY, at=at, at_fingerprint=at, at_expires=at,
    )  # fmt: skip


def test_the_fingerprint_tells_which_of_two_findings_of_one_part_is_accepted() -> None:
    """FLT-05: they are two faults; one look accepts one of them."""
    first, second = in_states(moored="5 A", under_way="9 A")
    waived = apply_waivers([first, second], [the_waiver(fingerprint(second))], TODAY)
    assert [o.verdict for o in waived.outcomes] == [Verdict.FINDING, Verdict.ACCEPTED]
    assert (waived.extra, waived.matched) == ((), {"W-1"})


def test_a_fingerprint_of_neither_accepts_neither() -> None:
    """FLT-06."""
    first, second = in_states(moored="5 A", under_way="9 A")
    waived = apply_waivers([first, second], [the_waiver("0" * 12)], TODAY)
    assert [o.verdict for o in waived.outcomes] == [Verdict.FINDING, Verdict.FINDING]
    (told,) = waived.extra
    assert told.check == "waiver-inputs-changed"
    assert f"{fingerprint(first)} or {fingerprint(second)}" in told.remedy


def test_a_hull_of_the_same_content_is_told_at_its_own_file() -> None:
    """Both are studied once; whoever mends the second must not be sent to the first one's file."""
    change = """\
changes:
  {name}:
    what: longer
    set: {{circuits: {{PLOTTER: {{protect: 10 A}}}}}}
"""
    first = HULL_YAML + change.format(name="D-1")
    second = "# a line more\n" + HULL_YAML.replace("SKIFF-1", "SKIFF-2") + change.format(name="OTHER")
    yard = Yard({**SOUND.files, HULL_FILE: first}).with_file("hulls/skiff-2.yaml", second)
    found = {s.id: [o.at for o in s.news] for s in check_yard(yard).subjects if s.is_hull}
    (one,), (other,) = found["SKIFF-1"], found["SKIFF-2"]
    assert (one.file, other.file) == (HULL_FILE, "hulls/skiff-2.yaml")
    assert (other.line, other.column) == (one.line + 1, one.column)
    assert yard.line(other.file, other.line).startswith("set: {circuits: {PLOTTER: {protect: 10 A")
