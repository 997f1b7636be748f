"""Seed faults of identification: colours, labels, legends, marks; and copper that is less than its size."""

from __future__ import annotations

import pytest

from checker.finding import Verdict
from tests.builders import a_boat, a_bond, a_conductor, outcomes_of, sound_pieces
from tests.checks.test_zones import missing_of, not_judged
from tests.small_yard import NEITHER, SOUND, Yard, check_yard, finding, found, not_assessed, outcomes, passed

M4 = "M4: {from: BAT-H.neg, to: SHUNT.bat, size: 2 AWG, length: 0.3 m, colour: yellow}"
M5 = "M5: {from: SHUNT.sys, to: BUS-N, size: 2 AWG, length: 0.3 m, colour: yellow}"
D2 = "D2: {from: PANEL-N, to: BUS-N, size: 6 AWG, length: 1.5 m, colour: yellow}"
A1 = "A1: {from: ALT.B, to: F-ALT.load, size: 6 AWG, length: 2 m}"
B1 = "B1: {from: ANODE, to: BUS-N, size: 8 AWG, length: 4 m, colour: green}"
V2 = "V2: {from: F-SENSE.load, to: REGULATOR.sense, size: 16 AWG, length: 2 m}"
V3 = "V3: {from: REGULATOR.gnd, to: BUS-N, size: 16 AWG, length: 2 m, colour: yellow}"
HARNESS = "role: engine-harness, reason: harness of the engine maker"


def changed(line: str, old: str, new: str) -> tuple[Yard, str]:
    """Return the yard with one conductor's line changed, and the new line."""
    assert old in line
    return SOUND.edit(line, line.replace(old, new)), line.replace(old, new)


# --- conductor-colour


@pytest.mark.parametrize("colour", ["green", "GREEN", "green-yellow", "green / yellow", "green with yellow stripe"])
def test_live_conductor_in_a_bonding_colour_is_found(colour: str) -> None:
    """LBL-01."""
    yard, line = changed(A1, "}", f", colour: {colour}}}")
    assert found(yard) == [("conductor-colour", "A1", NEITHER, line)]


@pytest.mark.parametrize("colour", ["red", "black", "bare"])
def test_bond_in_another_colour_is_found(colour: str) -> None:
    """LBL-01."""
    yard, line = changed(B1, "green", colour)
    assert found(yard) == [("conductor-colour", "B1", NEITHER, line)]


def test_function_colours_sleeves_and_green_yellow_bonds_are_sound() -> None:
    """LBL-01: a green conductor with sleeves in its own colour too."""
    assert found(changed(A1, "}", ", colour: brown}")[0]) == []
    assert found(changed(A1, "}", ", colour: green, colour_marked: true}")[0]) == []
    assert found(changed(B1, "green", "green-yellow")[0]) == []


def test_branch_in_a_green_core_is_found_at_its_colours() -> None:
    """LBL-01."""
    yard = SOUND.edit("feed: P1\n", "feed: P1\n    colours: [red, green]\n")
    assert found(yard) == [("conductor-colour", "PLOTTER.back", NEITHER, "colours: [red, green]")]


def test_colours_that_are_not_recorded_are_told_once() -> None:
    yard = SOUND.edit("insulation: 105 C, core_colours: [red]}", "insulation: 105 C}")
    told = [row for row in not_assessed(yard) if row[0] == "conductor-colour"]
    assert told == [("conductor-colour", "colours", NEITHER, A1)]
    assert (
        "the colour of 13 conductors is not recorded: A1, C1, C3, D1 and 9 more"
        in not_judged(yard, "conductor-colour").fault
    )


# --- negative-colour


def test_black_negative_with_ac_aboard_is_found() -> None:
    """LBL-02."""
    yard, line = changed(D2, "yellow", "Black")
    assert found(yard) == [("negative-colour", "D2", NEITHER, line)]


def test_black_negative_without_ac_or_with_sleeves_is_sound() -> None:
    """LBL-02: and black is a colour as any other on the positive side."""
    assert found(changed(D2, "yellow", "black")[0].edit("ac_aboard: true", "ac_aboard: false")) == []
    assert found(changed(D2, "yellow", "black, colour_marked: true")[0]) == []
    assert found(changed(A1, "}", ", colour: black}")[0]) == []


def test_black_negative_where_ac_is_not_recorded_is_not_assessed() -> None:
    """With yellow ones alone nothing is asked."""
    unknown = SOUND.without("ac_aboard:")
    assert not_assessed(unknown) == []
    yard = unknown.edit(D2, D2.replace("yellow", "black"))
    assert not_assessed(yard) == [("negative-colour", "facts", NEITHER, "engines:")]
    assert missing_of(yard, "negative-colour") == "ac_aboard"


# --- colour-change


@pytest.mark.parametrize(("line", "part"), [(M4, "M4"), (M5, "M5")])
def test_return_that_changes_its_colour_is_found_where_it_differs_from_the_boat(line: str, part: str) -> None:
    """LBL-03: the shunt between the two does not end the run."""
    yard, changed_line = changed(line, "yellow", "brown")
    assert found(yard) == [("colour-change", part, NEITHER, changed_line)]


def test_colour_change_that_is_marked_is_sound() -> None:
    """LBL-03."""
    assert found(changed(M4, "yellow", "brown, colour_marked: true")[0]) == []


def test_positive_may_change_its_colour_behind_a_device_but_not_at_a_stud() -> None:
    """LBL-03: M1 is red ahead of the main fuse."""
    m2 = "M2: {from: F-MAIN.load, to: SW-H.in, size: 2 AWG, length: 0.4 m}"
    assert found(changed(m2, "}", ", colour: brown}")[0]) == []
    stud = SOUND.also("devices:\n  STUD: {part: bus-250, zone: LOCKER}\n")
    halves = "M2: {from: F-MAIN.load, to: STUD, size: 2 AWG, length: 0.2 m}\n" \
        "      M6: {from: STUD, to: SW-H.in, size: 2 AWG, length: 0.2 m, colour: brown}"  # fmt: skip
    told = [row[:2] for row in found(stud.edit(m2, halves))]
    assert ("colour-change", "M6") in told


def test_engine_maker_s_harness_has_colours_of_its_own() -> None:
    """T-25: a green feed and a black return."""
    yard = SOUND.edit(V2, V2.replace("}", f", {HARNESS}, colour: green}}"))
    yard = yard.edit(V3, V3.replace("colour: yellow", f"{HARNESS}, colour: black"))
    assert found(yard) == []
    assert {("conductor-colour", "V2", NEITHER), ("negative-colour", "V3", NEITHER)} <= passed(yard)


# --- labels


def test_label_of_another_conductor_is_found_once() -> None:
    """LBL-04: the other one carries its own."""
    yard, line = changed(M4, "}", ", label: M5}")
    assert found(yard) == [("label-text", "M4", NEITHER, line)]
    assert finding(yard, "label-text", "M4").fault == "is labelled “M5”, and so is M5"


def test_labels_that_are_swapped_are_both_found() -> None:
    """LBL-04."""
    yard = changed(M4, "}", ", label: M5}")[0].edit(M5, M5.replace("}", ", label: M4}"))
    assert [row[:2] for row in found(yard)] == [("label-text", "M4"), ("label-text", "M5")]


def test_label_that_is_no_id_of_the_data_is_found() -> None:
    """LBL-04."""
    yard = SOUND.edit("feed: P1\n", "feed: P1\n    label: PLOT\n")
    assert found(yard) == [("label-text", "PLOTTER", NEITHER, "label: PLOT")]


def test_label_with_the_far_post_and_a_branch_with_its_circuit_are_sound() -> None:
    """LBL-04."""
    assert found(changed(M4, "}", ", label: M4 SHUNT.bat}")[0]) == []
    assert found(SOUND.edit("feed: P1\n", "feed: P1\n    label: PLOTTER\n")) == []


@pytest.mark.parametrize(
    ("ends", "told"),
    [
        ("from", "has no label at SHUNT.bat"),
        ("to", "has no label at BAT-H.neg"),
        ("none", "has no label at BAT-H.neg nor at SHUNT.bat"),
    ],
)
def test_missing_label_is_a_note(ends: str, told: str) -> None:
    """LBL-05."""
    yard, line = changed(M4, "}", f", labelled: {ends}}}")
    assert found(yard) == [("label-ends", "M4", NEITHER, line)]
    outcome = finding(yard, "label-ends", "M4")
    assert (outcome.fault, outcome.level.value) == (told, "note")


def test_branch_cable_is_told_once() -> None:
    """LBL-05."""
    yard = SOUND.edit("feed: P1\n", "feed: P1\n    labelled: from\n")
    assert found(yard) == [("label-ends", "PLOTTER", NEITHER, "labelled: from")]


def test_labels_at_both_ends_are_sound() -> None:
    """LBL-05: 20 single conductors, five branch cables, a bond."""
    assert len([row for row in passed(SOUND) if row[0] == "label-ends"]) == 26


def test_labels_that_are_not_recorded_are_told_once() -> None:
    yard = SOUND.without("labels:")
    assert not_assessed(yard) == [("label-ends", "workmanship", NEITHER, "workmanship:")]
    assert missing_of(yard, "label-ends") == "workmanship: labels"


def test_the_yard_may_say_once_how_every_class_is_made_and_a_class_differs() -> None:
    """What the yard's own file says counts where the class says nothing, and is pointed at."""
    usual = SOUND.without("labels:").also_in_yard("workmanship: {labels: both}\n")
    assert found(usual) == not_assessed(usual) == []
    other = SOUND.also_in_yard("workmanship: {passages: bare}\n")
    assert found(other) == []
    (row,) = found(other.without("passages:"))
    assert (row[0], row[3]) == ("passage-guard", "workmanship:")


# --- legend-name


@pytest.mark.parametrize("legend", ["NAV INSTRUMENTS 10 A", "10 A", "Bilge pump"])
def test_legend_that_shares_no_word_with_its_circuit_is_found(legend: str) -> None:
    """LBL-06: cabin lights; a rating names nothing."""
    yard = SOUND.edit("legend: LIGHTS 10 A", f"legend: {legend}")
    assert found(yard) == [("legend-name", "P2", NEITHER, f"legend: {legend}")]


@pytest.mark.parametrize("legend", ["Cabin 10 A", "LIGHT", "CAB. LIGHTS 10 A", "Lights, all", "P2 lights"])
def test_legend_in_other_words_is_sound(legend: str) -> None:
    """LBL-06."""
    assert found(SOUND.edit("legend: LIGHTS 10 A", f"legend: {legend}")) == []


# --- place-mark


@pytest.mark.parametrize(
    "line", ["SW-H: {part: battery-switch, zone: LOCKER}", "SW-S: {part: battery-switch, zone: LOCKER}"]
)
def test_battery_switch_without_a_mark_is_found(line: str) -> None:
    """LBL-07."""
    unmarked = line.replace("}", ", marked: false}")
    yard = SOUND.edit(line, unmarked)
    assert found(yard) == [("place-mark", line[:4], NEITHER, unmarked)]
    assert finding(yard, "place-mark", line[:4]).fault == "its place is not marked"


@pytest.mark.parametrize(
    ("name", "rating", "told"),
    [
        ("F-MAIN", "150 A", "its rating of 150 A and its place are not marked"),
        ("F-ALT", "80 A, mount: {line: BAT-H.pos}", "its rating of 80 A is not marked"),
    ],
)
def test_fuse_without_its_rating_is_found(name: str, rating: str, told: str) -> None:
    """LBL-07, LBL-08: the main fuse is told once for both."""
    line = f"{name}: {{part: bolt-fuse, zone: LOCKER, rating: {rating}}}"
    yard = SOUND.edit(line, f"{line[:-1]}, marked: false}}")
    assert [row[:2] for row in found(yard)] == [("place-mark", name)]
    assert finding(yard, "place-mark", name).fault == told


def test_breakers_carry_their_rating() -> None:
    """LBL-08: the marks of fuses are not asked of the panel's breakers."""
    yard = SOUND.without("fuse_marks:", "switch_marks:")
    assert {row[0] for row in not_assessed(yard)} == {"place-mark"}
    assert not [row for row in passed(SOUND) if row[0] == "place-mark" and row[1].startswith("P")]


def test_marked_fuses_and_switches_are_sound() -> None:
    """LBL-07, LBL-08: six fuses and two switches."""
    assert len([row for row in passed(SOUND) if row[0] == "place-mark"]) == 8


# --- conductor-area


def vehicle(area: str, size: str = "2 AWG") -> Yard:
    """Return the yard with one conductor in a cable that states its copper."""
    m2 = "M2: {from: F-MAIN.load, to: SW-H.in, size: 2 AWG, length: 0.4 m}"
    yard = SOUND.edit(m2, m2.replace("2 AWG", f"{size}, type: vehicle"))
    return yard.also_parts(
        f"vehicle: {{kind: cable, insulation: 105 C, core_colours: [red], real_areas: {{{size}: {area}}}}}"
    )


def test_copper_below_the_smallest_of_its_gauge_is_found_at_the_cable() -> None:
    """CON-17: 2 AWG stands for 62450 circular mils and more, 31.64 mm2; 25 mm2 metric cable is less."""
    yard = vehicle("31.6 mm2")
    assert [row[:2] for row in found(yard)] == [("conductor-area", "vehicle as 2 AWG")]
    told = finding(yard, "conductor-area", "vehicle as 2 AWG")
    assert (
        told.fault == "vehicle has 31.6 mm2 of copper as 2 AWG, which stands for at least 31.64 mm2; it is used for M2"
    )
    assert (
        told.remedy == "use a cable with at least 31.65 mm2 of copper, or write 4 AWG, which its copper is enough for"
    )


@pytest.mark.parametrize("area", ["31.65 mm2", "33.6 mm2", "35 mm2"])
def test_vehicle_cable_and_full_copper_are_sound(area: str) -> None:
    """CON-17."""
    assert found(vehicle(area)) == []
    assert ("conductor-area", "vehicle as 2 AWG", NEITHER) in passed(vehicle(area))


@pytest.mark.parametrize(("area", "is_sound"), [("31.1 mm2", False), ("31.2 mm2", True)])
def test_metric_size_is_held_to_the_resistance_of_its_class(area: str, is_sound: bool) -> None:
    """CON-17: 35 mm2 has at most 0.554 ohm/km: 17.2414 / 0.554 = 31.12 mm2."""
    told = [row[:2] for row in found(vehicle(area, "35 mm2"))]
    assert told == ([] if is_sound else [("conductor-area", "vehicle as 35 mm2")])


def test_size_that_no_chart_has_is_not_assessed() -> None:
    yard = vehicle("26 mm2", "3 AWG")
    assert ("conductor-area", "vehicle as 3 AWG") in [row[:2] for row in not_assessed(yard)]


def test_real_copper_counts_in_the_drop_and_not_in_the_gauge() -> None:
    """CON-17: a return in vehicle cable is no thinner than its feed of the same gauge."""
    d2 = D2.replace("6 AWG", "6 AWG, type: vehicle")
    yard = SOUND.edit(D2, d2).also_parts("vehicle: {kind: cable, insulation: 105 C, real_areas: {6 AWG: 12.5 mm2}}")
    assert found(yard) == []

    def drop(one: Yard) -> float:
        (told,) = [
            o for o in outcomes(one, Verdict.PASSED) if (o.check, o.part) == ("voltage-drop-from-bank", "PLOTTER")
        ]
        assert told.measure is not None
        return told.measure.value

    assert drop(yard) > drop(SOUND)


def test_size_without_a_unit_is_refused() -> None:
    """CON-17: 2.5 alone is neither square millimetres nor a gauge."""
    result = check_yard(SOUND.edit(D2, D2.replace("6 AWG", "6")))
    assert [(o.check, o.fault[:21]) for o in result.file_outcomes if o.check != "not-studied"] == [
        ("bad-value", "size: “6” has no unit")
    ]


def test_boat_of_which_nothing_is_recorded_has_no_findings_here() -> None:
    boat = a_boat(*sound_pieces(), a_conductor("W9", "BUS-P", "BUS-P", length="0.1 m"), a_bond("B", "BUS-N", "BUS-N"))
    mine = ("conductor-colour", "negative-colour", "colour-change", "label-ends", "place-mark")
    told = {(o.check, o.part, o.missing.partition(" (")[0]) for o in outcomes_of(boat) if o.check in mine}
    assert told == {
        ("conductor-colour", "colours", "colour"),
        ("colour-change", "colours", "colour"),
        ("label-ends", "workmanship", "workmanship: labels"),
        ("place-mark", "workmanship", "workmanship: fuse_marks"),
        ("place-mark", "workmanship", "workmanship: switch_marks"),
    }
