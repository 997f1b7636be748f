"""Seed faults of the battery monitor: another bank at its shunt, its supply, its map, its settings."""

from __future__ import annotations

import pytest

from tests.small_yard import BOTH, NEITHER, SOUND, Yard, finding, found, not_assessed, passed

SHUNT = "SHUNT: {part: shunt-300, zone: LOCKER, measures: HOUSE}"
SETTINGS = "set: {capacity: 100 Ah, ratio: 300 A = 50 mV}}"
S4 = "S4: {from: BUS-N, to: BAT-S.neg"
Q1 = "Q1: {from: BAT-H.pos, to: F-MONITOR.line"

# --- shunt-banks


@pytest.mark.parametrize("post", ["BAT-H.neg", "SHUNT.bat"])
def test_start_battery_on_the_bank_s_side_of_the_house_shunt_is_found_at_its_lead(post: str) -> None:
    """SHU-07."""
    yard = SOUND.edit(S4, S4.replace("BUS-N", post))
    (told,) = [one for one in found(yard) if one[0] == "shunt-banks"]
    assert told[1:3] == ("S4", NEITHER)
    assert told[3].startswith("S4: {from: ")
    fault = finding(yard, "shunt-banks", "S4").fault
    assert fault == (
        "BAT-S of bank START lands on the bank's side of SHUNT, which measures HOUSE: its current is counted as that "
        "of HOUSE"
    )
    assert finding(yard, "shunt-banks", "S4").path[-2:] == ("S4", "BAT-S.neg")


def test_start_battery_on_the_boat_s_side_is_sound() -> None:
    """SHU-07, T-15: the monitor watches one bank."""
    assert ("shunt-banks", "SHUNT", NEITHER) in passed(SOUND)


def test_shunt_with_a_second_path_round_it_is_told_by_another_check() -> None:
    """SHU-07: with the shunt bridged all is on both sides of it."""
    yard = SOUND.also("conductors:\n  X1: {from: BAT-H.neg, to: BUS-N, size: 2 AWG, length: 0.5 m}\n")
    checks = {check for check, *_ in found(yard)}
    assert ("shunt-bypass" in checks, "shunt-banks" in checks) == (True, False)


# --- monitor-supply


def test_monitor_fed_from_behind_the_main_switch_is_found_at_its_supply() -> None:
    """SHU-08."""
    yard = SOUND.edit(Q1, Q1.replace("BAT-H.pos", "BUS-P"))
    assert [told[:3] for told in found(yard)] == [("monitor-supply", "Q2", NEITHER)]
    told = finding(yard, "monitor-supply", "Q2")
    assert told.fault == "SHUNT.vbat is parted from the positive of bank HOUSE when every switch is off"
    assert told.state == "all switches off"


def test_monitor_fed_by_a_fuse_on_the_bank_is_sound() -> None:
    """SHU-08, T-17."""
    assert ("monitor-supply", "SHUNT", NEITHER) in passed(SOUND)


def test_monitor_fed_from_the_other_bank_is_found() -> None:
    """SHU-08."""
    yard = SOUND.edit(Q1, Q1.replace("BAT-H.pos", "BAT-S.pos"))
    assert [told[:2] for told in found(yard)] == [("monitor-supply", "Q2")]


def test_monitor_without_its_fuse_is_found_as_an_unprotected_lead() -> None:
    """SHU-08."""
    yard = SOUND.without("F-MONITOR:", "Q1:").edit(
        "from: F-MONITOR.load, to: SHUNT.vbat", "from: BAT-H.pos, to: SHUNT.vbat"
    )
    assert ("unprotected-conductor", "Q2", BOTH) in [told[:3] for told in found(yard)]


def test_instrument_with_a_lead_of_its_own_is_asked_instead_of_vbat() -> None:
    """SHU-08: nothing lands on vbat, the instrument is fed by itself."""
    own = "belongs_to: SHUNT, mount: {pos: SHUNT.vbat, neg: SHUNT.bat}"
    yard = SOUND.edit(own, "belongs_to: SHUNT, mount: {neg: SHUNT.bat}")
    yard = yard.edit("from: F-MONITOR.load, to: SHUNT.vbat", "from: F-MONITOR.load, to: MONITOR.pos")
    assert found(yard) == []
    assert ("monitor-supply", "SHUNT", NEITHER) in passed(yard)
    behind = yard.edit(Q1, Q1.replace("BAT-H.pos", "BUS-P"))
    assert [told[:2] for told in found(behind)] == [("monitor-supply", "Q2")]


def test_shunt_whose_monitor_has_no_supply_is_not_assessed() -> None:
    """SHU-08."""
    yard = SOUND.without("Q2:")
    assert ("monitor-supply", "SHUNT", NEITHER, SHUNT) in not_assessed(yard)


# --- monitor-map


def test_monitored_bank_without_a_shunt_is_found_at_the_facts() -> None:
    """SHU-11."""
    yard = SOUND.edit("monitored: [HOUSE]", "monitored: [HOUSE, START]")
    assert found(yard) == [("monitor-map", "START", NEITHER, "engines:")]
    assert finding(yard, "monitor-map", "START").fault == "bank START is to be monitored, but no shunt measures it"


def test_second_shunt_of_one_bank_is_found_at_the_one_farther_from_it() -> None:
    """SHU-11: two in a row count the same current."""
    yard = SOUND.edit("from: SHUNT.sys, to: BUS-N", "from: SHUNT.sys, to: A-SHUNT.bat")
    yard = yard.also(
        "devices:\n  A-SHUNT: {part: shunt-300, zone: LOCKER, measures: HOUSE}\n"
        "conductors:\n  X1: {from: A-SHUNT.sys, to: BUS-N, size: 2 AWG, length: 0.3 m, current: 80 A}\n"
    )
    assert [told[:2] for told in found(yard) if told[0] == "monitor-map"] == [("monitor-map", "A-SHUNT")]


def test_monitored_bank_with_one_shunt_is_sound() -> None:
    """SHU-11; a bank that nobody counts needs none."""
    assert ("monitor-map", "SHUNT", NEITHER) in passed(SOUND)
    assert found(SOUND.edit("monitored: [HOUSE]", "monitored: []")) == []


def test_map_that_was_not_recorded_is_not_assessed_once() -> None:
    """SHU-11."""
    assert [told[:2] for told in not_assessed(SOUND.without("monitored:"))] == [("monitor-map", "facts")]


# --- monitor-settings


def set_to(facts: str) -> Yard:
    """Return the yard with its monitor set otherwise."""
    return SOUND.edit("capacity: 100 Ah, ratio: 300 A = 50 mV", facts)


@pytest.mark.parametrize(("capacity", "told"), [("94 Ah", True), ("95 Ah", False), ("105 Ah", False), ("106 Ah", True)])
def test_monitor_set_to_another_capacity_is_found_at_its_settings(capacity: str, told: bool) -> None:
    """SHU-12: the bank has 100 Ah."""
    yard = set_to(f"capacity: {capacity}, ratio: 300 A = 50 mV")
    line = SETTINGS.replace("100 Ah", capacity)
    assert found(yard) == [("monitor-settings", "MONITOR", NEITHER, line)] * told


@pytest.mark.parametrize(
    ("ratio", "told"),
    [("300 A = 51 mV", False), ("600 A = 102 mV", False), ("300 A = 49 mV", True), ("500 A = 50 mV", True)],
)
def test_monitor_set_to_another_shunt_is_found(ratio: str, told: bool) -> None:
    """SHU-12: 0.17 mohm; what counts is the ratio, within the rounding of a name plate."""
    yard = set_to(f"capacity: 100 Ah, ratio: {ratio}")
    assert [one[:2] for one in found(yard)] == [("monitor-settings", "MONITOR")] * told


def test_settings_are_told_beside_those_that_are_due() -> None:
    """SHU-12."""
    told = finding(set_to("capacity: 100 Ah, ratio: 500 A = 50 mV"), "monitor-settings", "MONITOR")
    assert told.fault == "it is set to 500 A = 50 mV, but shunt-300 gives 300 A = 51 mV"


@pytest.mark.parametrize("facts", ["capacity: 100 Ah", "ratio: 300 A = 50 mV", "capacity: 100 Ah, ratio: about 50"])
def test_setting_that_was_not_recorded_or_is_no_ratio_is_not_assessed(facts: str) -> None:
    """SHU-12."""
    yard = set_to(facts)
    assert [told[:2] for told in not_assessed(yard)] == [("monitor-settings", "MONITOR")]
    assert found(yard) == []


def test_settings_written_at_the_shunt_count_as_well() -> None:
    """SHU-12."""
    yard = SOUND.edit(f",\n    {SETTINGS}", "}").edit(SHUNT, SHUNT.replace("}", f", {SETTINGS}"))
    assert found(yard) == []
    assert ("monitor-settings", "SHUNT", NEITHER) in passed(yard)


def test_shunt_without_its_resistance_is_not_assessed_at_its_part() -> None:
    """SHU-12."""
    told = not_assessed(SOUND.edit("shunt-300: {kind: shunt, resistance: 0.17 mohm, ", "shunt-300: {kind: shunt, "))
    assert ("monitor-settings", "shunt-300") in [one[:2] for one in told]
