"""Seed faults of isolators and blocking diodes in a whole yard: an alternator that charges two banks through diodes."""

from __future__ import annotations

import pytest

from checker.finding import Verdict
from tests.small_yard import BOTH, NEITHER, SOUND, Yard, check_yard, finding, found, not_assessed, passed

ISOLATOR = (
    "isolator: {kind: diode, terminal: stud, stud: M8, cover: true, torque: 10 Nm, smallest_size: 16 AWG, "
    "largest_size: 4/0 AWG, posts: [in, house, start], passes: [[in, house], [in, start]], "
    "drop: 0.4 V, resistance: 2 mohm, continuous: 120 A}"
)
ISO_LINE = "ISO: {part: isolator, zone: LOCKER}"
F_ALT = "  F-ALT: {part: bolt-fuse, zone: LOCKER, rating: 80 A, mount: {line: BAT-H.pos}}\n"
F_ALT_S = "  F-ALT-S: {part: bolt-fuse, zone: LOCKER, rating: 80 A, mount: {line: BAT-S.pos}}\n"
A1 = "A1: {from: ALT.B, to: F-ALT.load, size: 6 AWG, length: 2 m}"

BOTH_BANKS = (
    SOUND.also_parts(ISOLATOR)
    .edit(F_ALT, f"{F_ALT}{F_ALT_S}  {ISO_LINE}\n")
    .edit(
        A1,
        "A1: {from: ALT.B, to: ISO.in, size: 6 AWG, length: 2 m}\n"
        "      A2: {from: ISO.house, to: F-ALT.load, size: 6 AWG, length: 0.3 m}\n"
        "      A3: {from: ISO.start, to: F-ALT-S.load, size: 6 AWG, length: 0.3 m}",
    )
)
"""The sound yard, its alternator led through an isolator to both banks, each behind a fuse at the bank."""


def test_an_alternator_on_two_banks_through_an_isolator_is_sound() -> None:
    assert found(BOTH_BANKS) == []
    assert not_assessed(BOTH_BANKS) == []
    assert {check for check, _, _ in passed(SOUND)} <= {check for check, _, _ in passed(BOTH_BANKS)}
    # What passed before passes still; A1 alone is no longer reached by a bank, so that no short heats it.
    gone = passed(SOUND) - passed(BOTH_BANKS)
    assert gone == {("conductor-withstand", "A1", NEITHER)}


def test_every_new_lead_and_device_is_looked_at() -> None:
    parts: dict[str, set[str]] = {}
    for check, part, _ in passed(BOTH_BANKS):
        parts.setdefault(check, set()).add(part)
    assert {"A1", "A2", "A3"} <= parts["ampacity"] & parts["unprotected-conductor"] & parts["minimum-size"]
    assert {"F-ALT", "F-ALT-S"} <= parts["interrupting-capacity"]
    assert "ISO" in parts["solved-rating"]
    assert "ALT" in parts["alternator-cut-off"]
    assert {"ISO ISO.in to ISO.house", "ISO ISO.in to ISO.start"} <= parts["diode-way"]


def test_an_isolator_without_a_fuse_at_a_bank_leaves_its_lead_unprotected() -> None:
    bare = BOTH_BANKS.edit(F_ALT_S, "").edit("to: F-ALT-S.load", "to: BAT-S.pos")
    lead = "A3: {from: ISO.start, to: BAT-S.pos, size: 6 AWG, length: 0.3 m}"
    told = found(bare)
    assert {(part, line) for _, part, _, line in told} == {("A3", lead)}
    assert "unprotected-conductor" in {check for check, *_ in told}


# --- turned round


def test_an_isolator_with_its_leads_swapped_lets_nothing_pass_to_the_house_bank() -> None:
    # in leads to the house bank, house comes from the alternator.
    swapped = BOTH_BANKS.edit("to: ISO.in,", "to: ISO.house,").edit("from: ISO.house,", "from: ISO.in,")
    assert found(swapped) == [("diode-way", "ISO ISO.in to ISO.house", NEITHER, ISO_LINE)]


def test_an_isolator_turned_round_in_its_part_is_found_on_both_ways() -> None:
    """Both banks now feed the alternator's lead, each through its fuse of 80 A: that is told too."""
    turned = BOTH_BANKS.edit("passes: [[in, house], [in, start]]", "passes: [[house, in], [start, in]]")
    assert found(turned) == [
        ("diode-way", "ISO ISO.house to ISO.in", NEITHER, ISO_LINE),
        ("diode-way", "ISO ISO.start to ISO.in", NEITHER, ISO_LINE),
        ("double-feed", "A1", BOTH, "A1: {from: ALT.B, to: ISO.in, size: 6 AWG, length: 2 m}"),
    ]


def test_a_switch_between_the_isolator_and_its_only_bank_cuts_the_alternator_off() -> None:
    """The isolator leads to the house bank alone, over a switch: with it open the alternator runs into nothing."""
    one_way = BOTH_BANKS.edit("[[in, house], [in, start]]", "[[in, house]]").edit("[in, house, start]", "[in, house]")
    sound = one_way.edit(F_ALT_S, "").without("A3: {")
    assert found(sound) == []
    switched = sound.edit(
        "A2: {from: ISO.house, to: F-ALT.load, size: 6 AWG, length: 0.3 m}",
        "A2: {from: ISO.house, to: SW-A.in, size: 6 AWG, length: 0.3 m}\n"
        "      A4: {from: SW-A.out, to: F-ALT.load, size: 6 AWG, length: 0.3 m}",
    ).edit(f"  {ISO_LINE}\n", f"  {ISO_LINE}\n  SW-A: {{part: battery-switch, zone: LOCKER}}\n")
    line = "ALT: {part: alternator-60, zone: ENGINE-SPACE, engine_mounted: true}"
    assert found(switched) == [("alternator-cut-off", "ALT", NEITHER, line)]


def test_a_switch_on_one_of_two_ways_out_cuts_nothing_off() -> None:
    switched = BOTH_BANKS.edit(
        "A2: {from: ISO.house, to: F-ALT.load, size: 6 AWG, length: 0.3 m}",
        "A2: {from: ISO.house, to: SW-A.in, size: 6 AWG, length: 0.3 m}\n"
        "      A4: {from: SW-A.out, to: F-ALT.load, size: 6 AWG, length: 0.3 m}",
    ).edit(f"  {ISO_LINE}\n", f"  {ISO_LINE}\n  SW-A: {{part: battery-switch, zone: LOCKER}}\n")
    assert found(switched) == []


# --- rating


def test_a_diode_below_the_solved_current_is_found_with_what_it_carries() -> None:
    """Of the 60 A each way takes about half; the house bank also feeds 12.7 A of loads, so that it takes more."""
    small = BOTH_BANKS.edit("continuous: 120 A", "continuous: 30 A")
    assert found(small) == [("solved-rating", "ISO", NEITHER, ISO_LINE)]
    measure = finding(small, "solved-rating", "ISO").measure
    assert measure is not None
    assert measure.limit == 30
    assert 30 < measure.value < 40
    assert found(BOTH_BANKS.edit("continuous: 120 A", "continuous: 40 A")) == []


def test_a_diode_without_a_rating_is_not_judged_by_it() -> None:
    unrated = BOTH_BANKS.edit(", continuous: 120 A", "")
    assert found(unrated) == []
    assert "ISO" not in {part for check, part, _ in passed(unrated) if check == "solved-rating"}


# --- banks are not joined


def test_banks_of_unlike_batteries_behind_an_isolator_are_not_one_bank() -> None:
    unlike = BOTH_BANKS.edit(
        "start-battery: {kind: battery, voltage: 12 V, capacity: 75 Ah, chemistry: agm-lead, emf_full: 12.8 V,\n"
        "    emf_low: 11.9 V",
        "start-battery: {kind: battery, voltage: 12 V, capacity: 40 Ah, chemistry: flooded-lead, emf_full: 12.5 V,\n"
        "    emf_low: 11.5 V",
    )
    assert found(unlike) == []
    alike = {part for check, part, _ in passed(unlike) if check == "alike-batteries"}
    assert alike == {"HOUSE", "START"}


def test_banks_of_two_voltages_may_stand_behind_one_isolator_but_not_behind_a_wire() -> None:
    """A diode between 12 V and 24 V shorts nothing; a lead in its place puts both banks on one net."""
    higher = BOTH_BANKS.edit(
        "start-battery: {kind: battery, voltage: 12 V, capacity: 75 Ah, chemistry: agm-lead, emf_full: 12.8 V,\n"
        "    emf_low: 11.9 V",
        "start-battery: {kind: battery, voltage: 24 V, capacity: 75 Ah, chemistry: agm-lead, emf_full: 25.6 V,\n"
        "    emf_low: 23.8 V",
    )
    assert "battery-loop" not in {check for check, *_ in found(higher)}
    wired = higher.edit("from: ISO.start,", "from: ISO.house,")
    assert "battery-loop" in {check for check, *_ in found(wired)}


# --- the part


def fault_at(yard: Yard) -> tuple[str, str, int, int]:
    """Return the one fault of the files of a yard: what it says, and file, line and column."""
    (fault,) = [o for o in check_yard(yard).file_outcomes if o.verdict is Verdict.FINDING and o.check != "not-studied"]
    return fault.fault, fault.at.file, fault.at.line, fault.at.column


@pytest.mark.parametrize(
    ("old", "new", "pointed_at", "says"),
    [
        ("[in, start]]", "[in, aft]]", "[in, aft]", "there is no post on isolator “aft”"),
        ("[in, start]]", "[bow, start]]", "[bow, start]", "there is no post on isolator “bow”"),
        ("[in, start]]", "[in, in]]", "[in, in]", "entry 2 of “passes” does not fit: no entry twice"),
        ("[[in, house], [in, start]]", "[]", "[], drop", "“passes” does not fit: at least 1 in the list"),
        ("2 mohm", "0 mohm", "0 mohm", "a diode has some resistance"),
        ("0.4 V", "-0.4 V", "-0.4 V", "drop: “-0.4 V” is below zero, which no voltage here can be"),
    ],
)
def test_a_diode_that_is_written_wrongly_is_told_with_its_place(old: str, new: str, pointed_at: str, says: str) -> None:
    yard = BOTH_BANKS.edit(old, new)
    (file,) = (name for name in yard.files if name.startswith("parts/more"))
    line = yard.files[file].splitlines()[1]
    assert fault_at(yard) == (says, file, 2, line.index(pointed_at) + 1)


@pytest.mark.parametrize("missing", ["drop: 0.4 V, ", "resistance: 2 mohm, "])
def test_a_diode_needs_its_drop_and_its_resistance(missing: str) -> None:
    name = missing.split(":", maxsplit=1)[0]
    says, *place = fault_at(BOTH_BANKS.edit(missing, ""))
    assert name in says
    assert place[1] == 2


def test_a_lead_to_a_post_that_the_diode_has_not_is_told() -> None:
    yard = BOTH_BANKS.edit("from: ISO.start,", "from: ISO.aft,")
    told = [o for o in outcomes_of_files(yard) if "ISO.aft" in o]
    assert len(told) == 1


def outcomes_of_files(yard: Yard) -> list[str]:
    """Return what is wrong with the files of a yard."""
    return [o.fault for o in check_yard(yard).file_outcomes if o.verdict is Verdict.FINDING]


# --- what a bank may have to give


def test_what_an_isolator_shares_out_is_not_taken_from_the_load_of_one_bank_in_full() -> None:
    """All of the alternator's 60 A may go to the start bank: the house shunt may see all of its bank's 315 A."""
    loads = "loads: {PLOTTER: 1 A, LIGHTS: 3 A, PUMP: 8 A, BOW-LIGHT: 0.5 A, SENSOR: 0.2 A}\n    sources: {ALT: 60 A}"
    heavy = loads.replace("PUMP: 8 A", "PUMP: 310 A")
    assert "shunt-rating" not in {check for check, *_ in found(SOUND.edit(loads, heavy))}
    assert "shunt-rating" in {check for check, *_ in found(BOTH_BANKS.edit(loads, heavy))}


# --- sources that hold their voltage


MOORED = "sources: {CHARGER: 20 A}"


def test_charger_that_holds_its_voltage_is_sound() -> None:
    yard = SOUND.edit(MOORED, f"{MOORED}\n    holds: {{CHARGER: 14.2 V}}")
    assert found(yard) == []
    assert not_assessed(yard) == []


@pytest.mark.parametrize(
    ("holds", "says"),
    [
        ("holds: {CHARGR: 14.2 V}", "there is no source with a current under `sources` “CHARGR”"),
        ("holds: {CHARGER: 0 V}", "CHARGER holds 0 V"),
        ("holds: {ALT: 14.2 V}", "there is no source with a current under `sources` “ALT”"),
        ("holds: {CHARGER: 14.2}", "CHARGER: “14.2” has no unit; a voltage carries its unit, e.g. 12 V"),
    ],
)
def test_voltage_of_a_source_that_does_not_run_is_told_with_its_place(holds: str, says: str) -> None:
    yard = SOUND.edit(MOORED, f"{MOORED}\n    {holds}")
    told, file, line, column = fault_at(yard)
    assert told == says
    assert yard.files[file].splitlines()[line - 1].strip() == holds
    assert column in (13, 22)
