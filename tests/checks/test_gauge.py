"""Seed faults of conductors by themselves: ampacity, smallest sizes, insulation, material."""

from __future__ import annotations

import pytest

from tests.small_yard import (
    BOTH,
    LAW,
    LAW_ONLY,
    PRACTICE,
    SOUND,
    Yard,
    finding,
    found,
    not_assessed,
    passed,
)

C1 = "C1: {from: CHARGER.out, to: F-CHARGER.load, size: 10 AWG, length: 2 m}"
C2 = "C2: {from: CHARGER.neg, to: BUS-N, size: 10 AWG, length: 2 m, colour: yellow}"
C3 = "C3: {from: F-CHARGER.line, to: BAT-H.pos, size: 10 AWG, length: 0.1 m}"
V2 = "V2: {from: F-SENSE.load, to: REGULATOR.sense, size: 16 AWG, length: 2 m}"


def charging_at(current: str) -> Yard:
    """Return the yard with another current in the charger's cables: 10 AWG, 60 A by the table."""
    return SOUND.edit("    current: 20 A\n", f"    current: {current}\n")


def alternator_at(current: str) -> Yard:
    """Return the yard with another current in the alternator's cable: 6 AWG through the engine space."""
    old = "    current: 60 A\n    conductors:\n      A1"
    return SOUND.edit(old, old.replace("60 A", current))


def charger_by_the_engine(current: str) -> Yard:
    """Lead 4 in of the charger's positive through a corner of the engine space."""
    yard = charging_at(current).edit(
        "CHARGER.out, to: F-CHARGER.load, size: 10 AWG, length: 2 m", "CHARGER.out, to: F-CHARGER.load, "
        "size: 10 AWG, route: [locker-pipe, corner], tail: 1.4 m",
    )  # fmt: skip
    return yard.also("ways:\n  corner: {zone: ENGINE-SPACE, length: 4 in, lay: single}\n")


def other_sense_lead(new: str, service: str = "sense", current: str = "0.1 A") -> Yard:
    """Return the yard with another lead V2 to the regulator, which is an engine circuit if so told."""
    circuit = "    service: sense\n    current: 0.1 A\n"
    reason = "    always_on: the engine maker leaves it live\n" if service == "engine" else ""
    return SOUND.edit(circuit, f"    service: {service}\n    current: {current}\n{reason}").edit(V2, new)


def with_pigtail(length: str) -> Yard:
    """End the regulator's lead on a terminal, and go on with a thin pigtail."""
    lead = "V2: {from: F-SENSE.load, to: TERMINAL, size: 16 AWG, length: 2 m}"
    tail = f"V4: {{from: TERMINAL, to: REGULATOR.sense, size: 18 AWG, length: {length}, role: pigtail}}"
    yard = other_sense_lead(f"{lead}\n      {tail}", service="engine")
    return yard.also("devices:\n  TERMINAL: {part: bus-100, zone: ENGINE-SPACE}\n")


def test_current_above_the_table_value_is_found_at_each_conductor_that_carries_it() -> None:
    """CON-01."""
    assert found(charging_at("60.1 A")) == [
        ("ampacity", "C1", BOTH, C1),
        ("ampacity", "C2", BOTH, C2),
        ("ampacity", "C3", BOTH, C3),
    ]


@pytest.mark.parametrize("current", ["59.9 A", "60 A", "60000 mA"])
def test_current_up_to_the_table_value_is_borne(current: str) -> None:
    """CON-01."""
    assert found(charging_at(current)) == []


def test_current_above_the_engine_space_value_is_found() -> None:
    """CON-02: 120 A for 6 AWG at 105 C, times 0.85, is 102 A."""
    yard = alternator_at("102.1 A")
    line = "A1: {from: ALT.B, to: F-ALT.load, size: 6 AWG, length: 2 m}"
    assert found(yard) == [("ampacity", "A1", BOTH, line)]
    measure = finding(yard, "ampacity", "A1", LAW).measure
    assert measure is not None
    assert measure.limit == pytest.approx(102)


@pytest.mark.parametrize("current", ["101.9 A", "102 A"])
def test_current_up_to_the_engine_space_value_is_borne(current: str) -> None:
    """CON-02."""
    assert found(alternator_at(current)) == []


def test_four_inches_in_the_engine_space_are_judged_as_the_whole_run() -> None:
    """CON-03: 60 A for 10 AWG, times 0.85, is 51 A; C2 and C3 do not cross the engine space."""
    line = C1.replace("length: 2 m", "route: [locker-pipe, corner], tail: 1.4 m")
    assert found(charger_by_the_engine("51.1 A")) == [("ampacity", "C1", BOTH, line)]


def test_four_inches_in_the_engine_space_bear_the_reduced_current() -> None:
    """CON-03."""
    assert found(charger_by_the_engine("51 A")) == []
    assert found(charging_at("51.1 A")) == []


def test_single_conductor_thinner_than_16_awg_is_found() -> None:
    """CON-04."""
    thin = V2.replace("16 AWG", "18 AWG")
    assert found(other_sense_lead(thin, service="engine")) == [("minimum-size", "V2", BOTH, thin)]


def test_single_conductor_of_16_awg_is_thick_enough() -> None:
    """CON-04."""
    assert found(other_sense_lead(V2, service="engine")) == []


def test_core_thinner_than_18_awg_in_a_sheath_is_found_out_and_back() -> None:
    """CON-05: the table has no row for 20 AWG, so that its ampacity and protection are not assessed."""
    yard = SOUND.edit("cable: 18 AWG", "cable: 20 AWG")
    assert found(yard) == [
        ("minimum-size", "LIGHTS.back", BOTH, "cable: 20 AWG"),
        ("minimum-size", "LIGHTS.out", BOTH, "cable: 20 AWG"),
    ]
    assert [told for told in not_assessed(yard) if told[1] == "LIGHTS.out"] == [
        ("ampacity", "LIGHTS.out", BOTH, "cable: 20 AWG"),
        ("device-rating", "LIGHTS.out", BOTH, "cable: 20 AWG"),
    ]


def test_return_of_a_size_without_a_row_is_not_assessed_like_its_feed() -> None:
    """CON-05: what was not looked at must not vanish."""
    yard = SOUND.edit("cable: 18 AWG", "cable: 20 AWG")
    assert [told for told in not_assessed(yard) if told[1] == "LIGHTS.back"] == [
        ("ampacity", "LIGHTS.back", BOTH, "cable: 20 AWG"),
        ("return-protection", "LIGHTS.back", BOTH, "cable: 20 AWG"),
    ]


def test_18_awg_core_in_a_sheath_is_thick_enough() -> None:
    """CON-05, T-06."""
    for limit_set in (LAW, PRACTICE):
        assert ("minimum-size", "LIGHTS.out", limit_set) in passed(SOUND)


def test_18_awg_in_a_sheath_of_one_core_is_a_single_conductor() -> None:
    """T-06: its sound twin has two cores."""
    yard = SOUND.edit("    bare_tail: 6 in\n", "    bare_tail: 6 in\n    type: sheathed-single\n")
    yard = yard.also_parts("sheathed-single: {kind: cable, insulation: 105 C, sheathed: true}")
    assert found(yard) == [
        ("minimum-size", "LIGHTS.back", BOTH, "cable: 18 AWG"),
        ("minimum-size", "LIGHTS.out", BOTH, "cable: 18 AWG"),
    ]


@pytest.mark.parametrize("bare_tail", ["30.1 in", "0.763 m", "2 ft 6.1 in"])
def test_18_awg_core_more_than_30_in_out_of_its_sheath_is_found(bare_tail: str) -> None:
    """CON-06."""
    assert found(SOUND.edit("bare_tail: 6 in", f"bare_tail: {bare_tail}")) == [
        ("sheath-exit", "LIGHTS.back", BOTH, "cable: 18 AWG"),
        ("sheath-exit", "LIGHTS.out", BOTH, "cable: 18 AWG"),
    ]


@pytest.mark.parametrize("bare_tail", ["29.9 in", "30 in", "0.762 m", "762 mm", "2 ft 6 in", "2.5 ft"])
def test_18_awg_core_may_be_30_in_out_of_its_sheath(bare_tail: str) -> None:
    """CON-06, T-06."""
    assert found(SOUND.edit("bare_tail: 6 in", f"bare_tail: {bare_tail}")) == []


def test_16_awg_core_may_leave_its_sheath_for_any_length() -> None:
    """CON-06."""
    assert found(SOUND.edit("cable: 18 AWG\n    bare_tail: 6 in", "cable: 16 AWG\n    bare_tail: 40 in")) == []


def bundled(bow_light_too: bool) -> Yard:
    """Lay the cables of the cabin together: six cores, eight with the bow light's.

    The pump draws 15 A over 14 AWG through the engine space: 35 A x 0.85 x 0.6 = 17.85 A, and
    14.875 A where 0.5 is the factor.
    """
    yard = SOUND.edit("cabin-way: {zone: CABIN, length: 2 m, lay: single}", "cabin-way: {zone: CABIN, length: 2 m}")
    yard = yard.edit("engine-way]\n    tail: 0.5 m", "engine-way]\n    tail: 0.1 m\n    current: 15 A")
    route = "route: [cabin-way, bow-way]\n    tail: 1 ft"
    return yard.edit("length: 16 ft 5 in", route) if bow_light_too else yard


def test_eight_cores_lying_together_bear_less_under_the_voluntary_set_alone() -> None:
    """CON-13, T-20: the law asks for no bundle factor below 50 V."""
    yard = bundled(bow_light_too=True)
    assert found(yard) == [
        ("ampacity", "PUMP.back", PRACTICE, "cable: 14 AWG"),
        ("ampacity", "PUMP.out", PRACTICE, "cable: 14 AWG"),
    ]
    assert ("ampacity", "PUMP.out", LAW) in passed(yard)


def test_six_cores_lying_together_bear_the_same_current() -> None:
    """CON-13."""
    assert found(bundled(bow_light_too=False)) == []


def test_eight_cores_lying_together_are_no_fault_under_the_law() -> None:
    """T-20."""
    yard = bundled(bow_light_too=True).edit("[cfr33-183-i, voluntary-dc]", "[cfr33-183-i]")
    assert found(yard) == []


def sense_lead_of(insulation: str) -> Yard:
    """Return the yard with a sense lead of other insulation, in the engine space."""
    yard = other_sense_lead(V2.replace("length", "type: other, length"))
    return yard.also_parts(f"other: {{kind: cable, insulation: {insulation}}}")


def test_insulation_below_75_c_in_the_engine_space_is_found_under_the_set_that_has_a_figure() -> None:
    """CON-14: the law gives no figure."""
    assert found(sense_lead_of("74 C")) == [
        ("insulation-rating", "V2", PRACTICE, V2.replace("length", "type: other, length"))
    ]


def test_insulation_of_75_c_stands_the_engine_space() -> None:
    """CON-14."""
    assert found(sense_lead_of("75 C")) == []


def test_insulation_is_held_against_a_zone_hotter_than_the_table() -> None:
    """CON-14: a zone of 80 C asks for 80 C, whatever the table says; its twin has just that."""
    hot = "name: engine space, ambient: 80 C"
    yard = sense_lead_of("79 C").edit("name: engine space, ambient: 50 C", hot)
    assert [(check, part) for check, part, _, _ in found(yard)] == [("insulation-rating", "V2")]
    assert found(sense_lead_of("80 C").edit("name: engine space, ambient: 50 C", hot)) == []


@pytest.mark.parametrize("facts", ["material: aluminium", "strands: solid", "insulated: false", "welding: true"])
def test_conductor_that_is_not_insulated_stranded_copper_is_found(facts: str) -> None:
    """CON-15."""
    line = C2.replace("length", "type: other, length")
    yard = SOUND.edit(C2, line).also_parts(f"other: {{kind: cable, insulation: 105 C, {facts}}}")
    assert found(yard) == [("conductor-material", "C2", BOTH, line)]


def test_insulated_stranded_copper_is_sound() -> None:
    """CON-15."""
    facts = "material: copper, strands: stranded, insulated: true, welding: false"
    yard = SOUND.edit(C2, C2.replace("length", "type: other, length"))
    assert found(yard.also_parts(f"other: {{kind: cable, insulation: 105 C, {facts}}}")) == []


@pytest.mark.parametrize("length", ["6.9 in", "0.177 m", "17 cm"])
def test_thin_pigtail_shorter_than_7_in_is_exempt(length: str) -> None:
    """T-04."""
    assert found(with_pigtail(length)) == []


@pytest.mark.parametrize("length", ["7 in", "0.1778 m", "0.178 m"])
def test_pigtail_of_7_in_is_not_exempt(length: str) -> None:
    """T-04: the clause says less than 7 in. The size is found, and the role that does not hold."""
    line = f"V4: {{from: TERMINAL, to: REGULATOR.sense, size: 18 AWG, length: {length}, role: pigtail}}"
    assert found(with_pigtail(length)) == [
        ("minimum-size", "V4", BOTH, line),
        ("role-claim", "V4", BOTH, line),
    ]


def test_thin_sense_lead_below_1_a_is_free_of_the_smallest_size() -> None:
    """T-05."""
    assert found(other_sense_lead(V2.replace("16 AWG", "18 AWG"), current="0.99 A")) == []


def test_thin_sense_lead_of_1_a_is_not_exempt() -> None:
    """T-05: the clause says below 1 A."""
    thin = V2.replace("16 AWG", "18 AWG")
    assert found(other_sense_lead(thin, current="1 A")) == [("minimum-size", "V2", BOTH, thin)]


def test_thin_sense_lead_below_1_a_still_needs_its_device() -> None:
    """T-05."""
    thin = "V2: {from: BAT-H.pos, to: REGULATOR.sense, size: 18 AWG, length: 2 m}"
    yard = other_sense_lead(thin)
    assert [told for told in found(yard) if told[1] == "V2"] == [("unprotected-conductor", "V2", BOTH, thin)]


@pytest.mark.parametrize("role", ["inside-housing", "communication", "navigation-electronics"])
def test_thin_conductor_of_an_exempt_kind_with_its_reason_is_silent(role: str) -> None:
    """T-28, T-34."""
    thin = V2.replace("16 AWG", "18 AWG").replace("length", f"role: {role}, reason: kind of circuit, length")
    assert found(other_sense_lead(thin, service="engine")) == []


@pytest.mark.parametrize("role", ["inside-housing", "communication", "navigation-electronics"])
def test_thin_conductor_of_an_exempt_kind_still_needs_its_device(role: str) -> None:
    """T-28, T-34: free of the size rule, not of protection."""
    thin = f"V2: {{from: BAT-H.pos, to: REGULATOR.sense, size: 18 AWG, role: {role}, reason: x, length: 2 m}}"
    yard = other_sense_lead(thin, service="engine")
    assert [told for told in found(yard) if told[1] == "V2"] == [("unprotected-conductor", "V2", BOTH, thin)]


def test_exempt_kind_without_a_reason_is_found() -> None:
    """T-28."""
    line = V2.replace("length", "role: inside-housing, length")
    assert found(other_sense_lead(line)) == [("role-claim", "V2", BOTH, line)]


METRIC_FEED = SOUND.edit("to: PANEL, size: 6 AWG", "to: PANEL, size: 16 mm2")


def test_metric_size_is_not_assessed_by_rules_printed_in_awg() -> None:
    """The return is 6 AWG, 13.3 mm2, and so thinner than the feed; that needs no table."""
    line = "D1: {from: F-PANEL.load, to: PANEL, size: 16 mm2, length: 1.5 m}"
    assert not_assessed(METRIC_FEED) == [
        ("ampacity", "D1", BOTH, line),
        ("device-rating", "D1", BOTH, line),
        ("minimum-size", "D1", BOTH, line),
    ]
    assert [(check, part) for check, part, _, _ in found(METRIC_FEED)] == [("return-size", "D2")]


def test_metric_size_is_assessed_where_the_yard_lets_the_next_smaller_gauge_speak() -> None:
    """6 AWG is the next gauge below 16 mm2: 120 A by the table."""
    yard = METRIC_FEED.edit("name: Small Yard\n", "name: Small Yard\nhouse: {metric_sizes: next-smaller-awg}\n")
    assert not_assessed(yard) == []
    assert {("ampacity", "D1", LAW), ("device-rating", "D1", LAW), ("minimum-size", "D1", LAW)} <= passed(yard)


def test_metric_size_judged_by_the_next_smaller_gauge_can_be_too_thin() -> None:
    """10 mm2 is judged as 8 AWG, 80 A: 60 A is within it, 81 A is not."""
    yard = LAW_ONLY.edit("name: Small Yard\n", "name: Small Yard\nhouse: {metric_sizes: next-smaller-awg}\n")
    line = "size: 10 mm2, length: 2 m, current: 81 A}"
    yard = yard.edit("size: 6 AWG, length: 2 m}", line)
    assert found(yard) == [("ampacity", "A1", LAW, f"A1: {{from: ALT.B, to: F-ALT.load, {line}")]
