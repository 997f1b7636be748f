"""The comparison of two small results made by hand: each seeded difference, and its nearest sound twin."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import pytest

from checker.boat.aboard import Aboard, Facts, line_of
from checker.result.compare import compared
from checker.result.comparison import Comparison, DifferenceKind, FindingKind, LostKind, SilencedKind, Standing
from checker.result.side import Figures, Found, Place, PlaceKey, Rule, Side, SideStudy, SideSubject, Waived

THIN = 0.1
P11: Mapping[str, Facts] = {
    "boat": {"system_voltage_v": 12},
    "zone Z-NAV": {"name": "navigation station"},
    "circuit P11": {"name": "Pilot", "service": "electronics"},
    "conductor P11.out": {"size": "6 AWG", "length_m": 6.2, "circuit": "P11"},
    "conductor P11.back": {"size": "6 AWG", "length_m": 6.2, "circuit": "P11"},
    "device CHG": {"part": "charger", "zone": "Z-NAV"},
}


def drop(value: float, limit: float = 0.03) -> Figures:
    return Figures("drop", value, limit, "")


def finding(part: str = "P11", check: str = "voltage-drop", **facts: Any) -> Found:
    told: dict[str, Any] = {
        "is_finding": True, "check": check, "level": "error", "part": part, "fault": "too much is lost",
        "fingerprint": f"{check} {part}", "limit_set": "voluntary-dc", "circuit": "P11", "remedy": "use 6 AWG",
        "file": "a.yaml", "at": "a.yaml:1:1",
    }  # fmt: skip
    return Found(**{**told, **facts})


def unassessed(part: str = "P11", check: str = "voltage-drop") -> Found:
    return finding(part, check, is_finding=False, fingerprint="", missing="length")


def key(part: str = "P11", check: str = "voltage-drop", looks_at: str = "drop at most") -> PlaceKey:
    return PlaceKey(check, "voluntary-dc", part, looks_at)


def study(
    *found: Found,
    places: Mapping[PlaceKey, Place] | None = None,
    aboard: Mapping[str, Facts] = P11,
    sets: tuple[str, ...] = ("voluntary-dc",),
    feet: tuple[str, ...] = (),
) -> SideStudy:
    lines = Aboard({name: line_of(facts) for name, facts in aboard.items()}, frozenset(feet))
    return SideStudy("one", found, {key(): Place(drop(0.02))} if places is None else places, sets, lines)


def side(of: SideStudy, *hulls: SideSubject, **facts: Any) -> Side:
    subjects = hulls or (hull("H-1"),)
    return Side(name="x", tool_version="1", subjects=subjects, studies={"one": of}, **facts)


def hull(name: str, **facts: Any) -> SideSubject:
    told: dict[str, Any] = {"is_hull": True, "class_id": "c", "study": "one", "status": "in-build"}
    return SideSubject(id=name, **{**told, **facts})


def design(**facts: Any) -> SideSubject:
    return hull("c", is_hull=False, status="design", **facts)


def difference(before: Side, after: Side, **more: Any) -> Comparison:
    return compared(before, after, THIN, **more)


def kinds(comparison: Comparison) -> list[tuple[FindingKind, str, str]]:
    return [(one.kind, one.found.check, one.found.part) for one in comparison.findings]


def with_facts(name: str, **facts: Any) -> dict[str, Facts]:
    merged: Facts = {**P11.get(name, {}), **facts}
    return {**P11, name: merged}


# --- findings


def test_alike_results_differ_in_nothing() -> None:
    one = side(study(finding()))
    comparison = difference(one, replace(one, name="y"))
    assert comparison.findings == ()
    assert comparison.differences == ()
    assert comparison.is_worse is False
    assert [(s.standing, s.is_alike) for s in comparison.subjects] == [(Standing.UNCHANGED, True)]


def test_a_finding_that_was_not_there_is_new_on_all_hulls_that_share_it() -> None:
    hulls = (hull("H-1"), hull("H-2", status="delivered"))
    comparison = difference(side(study(), *hulls), side(study(finding()), *hulls))
    assert [(e.found.part, e.on) for e in comparison.new_errors] == [("P11", ("H-1", "H-2"))]
    assert [s.standing for s in comparison.subjects] == [Standing.WORSE, Standing.WORSE]


def test_a_finding_that_is_gone_and_whose_place_passes_is_fixed() -> None:
    comparison = difference(side(study(finding(), places={})), side(study()))
    assert kinds(comparison) == [(FindingKind.FIXED, "voltage-drop", "P11")]
    assert comparison.subjects[0].standing is Standing.BETTER


def test_a_finding_that_is_gone_since_it_is_not_assessed_is_not_fixed() -> None:
    comparison = difference(side(study(finding(), places={})), side(study(unassessed(), places={})))
    assert kinds(comparison) == [(FindingKind.UNASSESSED, "voltage-drop", "P11")]
    assert [one.kind for one in comparison.lost] == [LostKind.UNASSESSED]
    assert comparison.subjects[0].standing is Standing.WORSE


@pytest.mark.parametrize(
    "other",
    [
        {"at": "b.yaml:9:9", "file": "b.yaml"}, {"path": ("A", "B")}, {"remedy": "use 4 AWG"},
        {"fingerprint": "f2", "figures": drop(0.035)},
    ],
)  # fmt: skip
def test_a_finding_keeps_its_identity_in_another_file_or_wording(other: dict[str, Any]) -> None:
    base, head = finding(figures=drop(0.035)), finding(**{"figures": drop(0.035), **other})
    comparison = difference(side(study(base)), side(study(head)))
    assert comparison.findings == ()


def test_a_finding_with_other_figures_has_moved() -> None:
    worse = difference(side(study(finding(figures=drop(0.034)))), side(study(finding(figures=drop(0.036)))))
    better = difference(side(study(finding(figures=drop(0.036)))), side(study(finding(figures=drop(0.034)))))
    assert [(one.kind, one.is_worse) for one in worse.findings] == [(FindingKind.MOVED, True)]
    assert [(one.kind, one.is_worse) for one in better.findings] == [(FindingKind.MOVED, False)]
    assert (worse.new_errors, better.new_errors) == ((), ())


def test_two_findings_of_one_part_are_told_apart_by_the_switch_state() -> None:
    first, second = finding(state="A", fingerprint="1"), finding(state="B", fingerprint="2")
    comparison = difference(side(study(first, second)), side(study(replace(second, fingerprint="3"))))
    assert [(one.kind, one.found.state) for one in comparison.findings] == [(FindingKind.FIXED, "A")]


def test_a_finding_moves_with_a_renamed_part_of_its_circuit() -> None:
    renamed = {name.replace("P11.out", "P11.feed"): facts for name, facts in P11.items()}
    comparison = difference(side(study(finding("P11.out"))), side(study(finding("P11.feed"), aboard=renamed)))
    assert [(one.kind, one.moved_from) for one in comparison.findings] == [(FindingKind.MOVED, "P11.out")]


def test_of_two_parts_that_are_both_aboard_one_is_mended_and_one_is_newly_at_fault() -> None:
    comparison = difference(side(study(finding("P11.out"))), side(study(finding("P11.back"))))
    assert kinds(comparison) == [
        (FindingKind.NEW, "voltage-drop", "P11.back"), (FindingKind.FIXED, "voltage-drop", "P11.out"),
    ]  # fmt: skip


def test_the_fault_of_a_file_is_known_by_its_words_not_by_its_name() -> None:
    def of_file(name: str, fault: str) -> Found:
        return finding(name, "unknown-field", fault=fault, file=name, at=f"{name}:1:1", limit_set="", circuit="")

    before = side(study(), file_found=(of_file("hulls/a.yaml", "no field “colour”"),))
    renamed = side(study(), file_found=(of_file("hulls/b.yaml", "no field “colour”"),))
    other = side(study(), file_found=(of_file("hulls/a.yaml", "no field “size”"),))
    assert difference(before, renamed).findings == ()
    assert [one.kind for one in difference(before, other).findings] == [FindingKind.NEW, FindingKind.FIXED]


def test_a_warning_that_is_an_error_now_is_a_new_error() -> None:
    comparison = difference(side(study(finding(level="warning"))), side(study(finding())))
    assert [one.was for one in comparison.new_errors] == ["was a warning"]


# --- waivers, rules, facts


def accepted(expires: str = "2028-01-01") -> Mapping[str, Waived]:
    return {finding().fingerprint: Waived("WVR-1", "it is fine", "the lead", expires)}


def test_an_accepted_finding_that_was_open_is_silenced_and_not_fixed() -> None:
    comparison = difference(side(study(finding())), side(study(finding()), hull("H-1", accepted=accepted())))
    assert [(one.kind, one.where, one.hides) for one in comparison.silenced] == [
        (SilencedKind.WAIVER_ADDED, "WVR-1", (("voltage-drop", "P11"),))
    ]
    assert comparison.of_kind(FindingKind.FIXED) == ()
    assert comparison.subjects[0].standing is Standing.WORSE


def test_a_waiver_that_lasts_longer_is_told_and_one_that_lasts_as_long_is_not() -> None:
    base = side(study(finding()), hull("H-1", accepted=accepted()))
    longer = side(study(finding()), hull("H-1", accepted=accepted("2029-01-01")))
    assert [one.kind for one in difference(base, longer).silenced] == [SilencedKind.WAIVER_EXTENDED]
    assert difference(base, base).silenced == ()


def test_a_waiver_that_accepts_on_another_hull_is_wider() -> None:
    base = side(study(finding()), hull("H-1", accepted=accepted()), hull("H-2"))
    head = side(study(finding()), hull("H-1", accepted=accepted()), hull("H-2", accepted=accepted()))
    assert [(one.kind, one.on) for one in difference(base, head).silenced] == [(SilencedKind.WAIVER_WIDENED, ("H-2",))]


def test_a_waiver_that_lapsed_makes_a_new_error() -> None:
    base = side(study(finding()), hull("H-1", accepted=accepted()))
    comparison = difference(base, side(study(finding())))
    assert [one.was for one in comparison.new_errors] == ["was accepted [WVR-1]"]


@pytest.mark.parametrize(
    ("name", "old", "new"),
    [
        ("conductor P11.out", {}, {"role": "cranking", "role_reason": "a motor"}),
        ("circuit P11", {}, {"always_on": "the owner wants it"}),
        ("zone Z-NAV", {"petrol_vapour": True}, {}),
        ("zone Z-NAV", {"ambient_c": 50}, {"ambient_c": 30}),
        ("zone Z-NAV", {"opens_to": "Z-A, Z-B"}, {"opens_to": "Z-A"}),
        ("zone Z-NAV", {}, {"isolated_from": "zone Z-A by bulkhead"}),
        ("part pump", {"kind": "load"}, {"kind": "load", "ignition_protected": True}),
        ("part pump", {"kind": "load", "max_device_a": 10}, {"kind": "load", "max_device_a": 15}),
        ("condition night", {"loads_a": "P11 2"}, {"loads_a": "P11 2", "judges_drop": False}),
        ("state moored", {"kind": "normal"}, {"kind": "abnormal"}),
        ("engine MAIN", {"fuel": "petrol"}, {"fuel": "diesel"}),
        ("engine MAIN", {"mounting": "inboard", "fuel": "petrol"}, {"mounting": "outboard", "fuel": "petrol"}),
        ("boat", {"ac": True}, {"ac": False}),
        ("boat", {"monitored": "HOUSE, BOW"}, {"monitored": "HOUSE"}),
    ],
)
def test_a_fact_that_says_less_is_told_and_the_way_back_is_not(name: str, old: Facts, new: Facts) -> None:
    base, head = (side(study(aboard=with_facts(name, **facts))) for facts in (old, new))
    assert [(one.kind, one.where) for one in difference(base, head).silenced] == [(SilencedKind.FACT, name)]
    assert difference(head, base).silenced == ()


def test_a_condition_that_is_studied_no_more_is_told() -> None:
    base = side(study(aboard={**P11, "condition night": {"loads_a": "P11 2"}}))
    assert [one.where for one in difference(base, side(study())).silenced] == ["condition night"]


def test_a_finding_that_a_role_frees_is_hidden_by_it_and_not_fixed() -> None:
    free = {key("P11.out", looks_at=""): Place(None, "exempt as cranking")}
    head = study(places=free, aboard=with_facts("conductor P11.out", role="cranking"))
    comparison = difference(side(study(finding("P11.out"), places={})), side(head))
    assert comparison.findings == ()
    assert [(one.where, one.hides) for one in comparison.silenced] == [
        ("conductor P11.out", (("voltage-drop", "P11.out"),))
    ]


def test_a_finding_that_nobody_asks_for_any_more_is_hidden_by_the_fact_of_its_zone() -> None:
    spark = finding("CHG", "ignition-protection", circuit="")
    base = study(spark, aboard=with_facts("zone Z-NAV", petrol_vapour=True))
    comparison = difference(side(base), side(study()))
    assert comparison.findings == ()
    assert [one.hides for one in comparison.silenced] == [(("ignition-protection", "CHG"),)]


def test_a_finding_on_a_part_that_was_exchanged_is_fixed() -> None:
    spark = finding("CHG", "ignition-protection", circuit="")
    base = study(spark, aboard=with_facts("zone Z-NAV", petrol_vapour=True))
    head = study(aboard=with_facts("device CHG", part="charger-sealed"))
    assert [one.kind for one in difference(side(base), side(head)).findings] == [FindingKind.FIXED]


def rule(new: str, *, loosened: bool, kind: str = "limit") -> Rule:
    return Rule(kind, "drop.critical_percent", "voluntary-dc", "3", new, loosened, "ours")


@pytest.mark.parametrize(
    ("before", "after", "is_looser"),
    [
        ((), (rule("3.5", loosened=True),), True),
        ((rule("3.5", loosened=True),), (rule("4", loosened=True),), True),
        ((rule("4", loosened=True),), (rule("3.5", loosened=True),), False),
        ((rule("2.5", loosened=False),), (), True),
        ((rule("2.5", loosened=False),), (rule("2.8", loosened=False),), True),
        ((rule("2.8", loosened=False),), (rule("2.5", loosened=False),), False),
        ((), (rule("2.5", loosened=False),), False),
    ],
)
def test_a_rule_of_the_yard_is_told_and_said_to_silence_only_where_it_lets_more_pass(
    before: tuple[Rule, ...], after: tuple[Rule, ...], is_looser: bool
) -> None:
    comparison = difference(side(study(), rules=before), side(study(), rules=after))
    assert len(comparison.limits) == 1
    assert bool(comparison.silenced) is is_looser


def test_a_limit_set_that_no_longer_judges_is_silence_and_its_findings_are_not_fixed() -> None:
    comparison = difference(side(study(finding(), places={})), side(study(places={}, sets=())))
    assert [(one.kind, one.where) for one in comparison.silenced] == [(SilencedKind.LIMIT_SET, "voluntary-dc")]
    assert comparison.findings == ()


# --- coverage and headroom


def test_a_place_that_is_looked_at_no_more_is_lost_where_its_part_is_aboard() -> None:
    both = {key(): Place(drop(0.02)), key("P11.out"): Place()}
    comparison = difference(side(study(places=both)), side(study()))
    assert [(one.kind, one.check, one.names) for one in comparison.lost] == [
        (LostKind.PLACES, "voltage-drop", ("P11.out",))
    ]


def test_a_place_that_went_with_its_circuit_is_told_as_the_circuit() -> None:
    fewer = {name: facts for name, facts in P11.items() if "P11" not in name}
    comparison = difference(side(study()), side(study(places={}, aboard=fewer)))
    assert [(one.kind, one.names) for one in comparison.lost] == [(LostKind.CIRCUIT, ("P11",))]


def test_a_hull_that_is_gone_is_lost_and_one_that_could_not_be_studied_is_an_error() -> None:
    base, head = side(study(), hull("H-1"), hull("H-2")), side(study(), hull("H-1"))
    gone = difference(base, head)
    assert [(one.kind, one.names) for one in gone.lost] == [(LostKind.SUBJECT, ("H-2",))]
    assert gone.new_errors == ()
    unstudied = difference(base, replace(head, unstudied=("hull H-2",)))
    assert [(one.found.check, one.on) for one in unstudied.new_errors] == [("not-studied", ("H-2",))]
    assert [one.kind for one in unstudied.lost] == [LostKind.STUDY]


def test_what_is_not_assessed_on_a_new_hull_is_no_loss() -> None:
    comparison = difference(side(study(unassessed())), side(study(unassessed()), hull("H-1"), hull("H-2")))
    assert comparison.lost == ()
    assert comparison.subjects[1].standing is Standing.NEW


@pytest.mark.parametrize(
    ("before", "after", "told"),
    [
        (0.02, 0.028, True),
        (0.0275, 0.0285, True),
        (0.02, 0.026, False),
        (0.028, 0.0275, False),
        (0.028, 0.02801, False),
    ],
)
def test_headroom_is_told_where_little_is_left_and_some_was_lost(before: float, after: float, told: bool) -> None:
    base, head = (side(study(places={key(): Place(drop(value))})) for value in (before, after))
    assert bool(difference(base, head).headroom) is told


def test_what_is_chosen_from_a_row_of_sizes_has_no_thin_margin() -> None:
    base, head = (side(study(places={key(): Place(drop(value)._replace(is_stepped=True))})) for value in (0.02, 0.0299))
    assert difference(base, head).headroom == ()


# --- tables and tool


def test_findings_that_come_with_a_table_on_unchanged_boats_are_told_apart() -> None:
    base = side(study(), marks={"voluntary-dc": {"drop": "1"}})
    head = side(study(finding(figures=drop(0.02, 0.015))), marks={"voluntary-dc": {"drop": "2"}})
    comparison = difference(base, head)
    assert [(one.kind, one.what) for one in comparison.limits] == [("table", "drop (voluntary-dc)")]
    assert [one.by_limits for one in comparison.new_errors] == [True]


def test_where_the_boat_changed_too_its_finding_is_the_boats() -> None:
    base = side(study(), marks={"voluntary-dc": {"drop": "1"}})
    head = study(finding(), aboard=with_facts("conductor P11.out", size="10 AWG"))
    comparison = difference(base, side(head, marks={"voluntary-dc": {"drop": "2"}}))
    assert [one.by_limits for one in comparison.new_errors] == [False]


def test_the_bases_boats_held_as_the_heads_tell_which_findings_come_from_the_rules() -> None:
    rules = (rule("2.5", loosened=False),)
    thin, both = finding(check="voltage-drop"), finding("P11.out", check="ampacity")
    base = side(study())
    head = side(study(thin, both, aboard=with_facts("conductor P11.out", size="10 AWG")), rules=rules)
    comparison = difference(base, head, held_as_head=side(study(thin), rules=rules))
    assert {one.found.check: one.by_limits for one in comparison.new_errors} == {
        "voltage-drop": True, "ampacity": False,
    }  # fmt: skip


def test_another_version_of_the_tool_is_told() -> None:
    comparison = difference(side(study()), replace(side(study()), tool_version="2"))
    assert [(one.kind, one.old, one.new) for one in comparison.limits] == [("tool", "1", "2")]


# --- what changed aboard, and whom it reaches


def thinner(**facts: Any) -> dict[str, Facts]:
    changed = {"size": "8 AWG", **facts}
    return {
        **P11,
        "conductor P11.out": {**P11["conductor P11.out"], **changed},
        "conductor P11.back": {**P11["conductor P11.back"], **changed},
    }


def test_a_circuit_whose_conductors_all_change_alike_is_one_difference_with_its_figure() -> None:
    head = study(places={key(): Place(drop(0.028))}, aboard=thinner())
    comparison = difference(side(study()), side(head))
    assert comparison.differences is not None
    (one,) = comparison.differences
    assert (one.kind, one.about, one.things) == (DifferenceKind.CHANGED, "P11", ())
    assert [(fact.key, fact.old, fact.new) for fact in one.facts] == [("size", "6 AWG", "8 AWG")]
    assert [(figure.before.value, figure.after.value) for figure in one.figures] == [(0.02, 0.028)]


def test_one_conductor_of_a_circuit_is_named() -> None:
    head = study(aboard=with_facts("conductor P11.out", size="8 AWG"))
    comparison = difference(side(study()), side(head))
    assert comparison.differences is not None
    assert [(one.about, one.things) for one in comparison.differences] == [("P11", ("P11.out",))]


def test_a_longer_way_is_told_once_and_not_at_every_conductor_in_it() -> None:
    def boat(way_m: float, out_m: float) -> dict[str, Facts]:
        way: Facts = {"zone": "Z-NAV", "length_m": way_m}
        return {**with_facts("conductor P11.out", length_m=out_m, ways="aft"), "way aft": way}

    follows = difference(side(study(aboard=boat(2.0, 6.2))), side(study(aboard=boat(2.5, 6.7))))
    more = difference(side(study(aboard=boat(2.0, 6.2))), side(study(aboard=boat(2.5, 7.0))))
    assert [one.about for one in follows.differences or ()] == ["way aft"]
    assert sorted(one.about for one in more.differences or ()) == ["P11", "way aft"]


def test_the_same_length_in_feet_and_in_metres_is_no_difference() -> None:
    base = side(study(aboard=with_facts("conductor P11.out", length_m=1.524), feet=("P11.out",)))
    head = side(study(aboard=with_facts("conductor P11.out", length_m=1.524)))
    assert difference(base, head).differences == ()


def test_what_is_aboard_is_not_told_where_a_side_does_not_record_it() -> None:
    blind = side(replace(study(), aboard=None))
    assert difference(blind, side(study())).differences is None


def test_a_change_of_the_class_is_a_retrofit_of_the_hulls_that_are_built() -> None:
    hulls = (design(), hull("H-1"), hull("H-2", status="delivered"), hull("H-3", status="signed"))
    comparison = difference(side(study(), *hulls), side(study(finding(), aboard=thinner()), *hulls))
    assert [(one.hulls, one.status, one.makes) for one in comparison.retrofits] == [
        (("H-2",), "delivered", ("voltage-drop at P11",)), (("H-3",), "signed", ("voltage-drop at P11",)),
    ]  # fmt: skip
    assert comparison.same_revision == ("c",)


def test_what_a_built_hulls_own_file_records_is_no_retrofit() -> None:
    own = hull("H-2", status="delivered", study="two")
    two, built = (replace(study(aboard=aboard), name="two") for aboard in (P11, thinner()))
    base = Side(name="x", tool_version="1", subjects=(design(), own), studies={"one": study(), "two": two})
    as_built = replace(base, studies={"one": study(), "two": built})
    comparison = difference(base, as_built)
    assert [one.about for one in comparison.differences or ()] == ["P11"]
    assert comparison.retrofits == ()


def test_a_built_hull_behind_its_class_is_told_and_whether_it_was_so_before() -> None:
    def at(revision: int, class_revision: int) -> SideSubject:
        return hull("H-2", status="delivered", revision=revision, class_revision=class_revision)

    newly = difference(side(study(), at(4, 4)), side(study(), at(4, 5)))
    before = difference(side(study(), at(4, 5)), side(study(), at(4, 5)))
    level = difference(side(study(), at(4, 5)), side(study(), at(5, 5)))
    assert [one.is_new for one in newly.behind] == [True]
    assert [one.is_new for one in before.behind] == [False]
    assert level.behind == ()
