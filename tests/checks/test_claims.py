"""Seed claims that do not hold: switch states that nobody listed, roles written to silence a finding."""

from __future__ import annotations

import pytest

from tests.small_yard import BOTH, LAW, NEITHER, SOUND, Yard, finding, found, passed

MAIN = "M1: {from: BAT-H.pos, to: F-MAIN.line, size: 2 AWG, length: 5.9 in}"
IN_USE = "  in-use: {kind: normal, switches: {SW-H: closed, SW-S: closed}}"
ROWS = {
    "left": "  left: {kind: normal, switches: {SW-H: open, SW-S: open}}",
    "house": "  house: {kind: normal, switches: {SW-H: closed, SW-S: open}}",
    "start": "  start: {kind: forbidden, switches: {SW-H: open, SW-S: closed}}",
}


def with_states(*names: str) -> Yard:
    """Return the yard with a table of switch states: in use, and the named ones."""
    return SOUND.also("\n".join(["states:", IN_USE, *(ROWS[name] for name in names)]) + "\n")


def test_switch_combination_that_no_row_covers_is_found_at_the_table() -> None:
    """STATE."""
    yard = with_states("left", "house")
    assert found(yard) == [("unlisted-state", "states", NEITHER, ROWS["house"].strip())]
    assert finding(yard, "unlisted-state", "states").fault == "no row covers: SW-H open, SW-S closed"


def test_every_combination_may_be_told_as_normal_or_forbidden() -> None:
    """STATE."""
    assert found(with_states("left", "house", "start")) == []


def test_row_that_leaves_a_switch_open_covers_both_of_its_states() -> None:
    """STATE."""
    yard = with_states("left").also("states:\n  any-start: {kind: normal, switches: {SW-H: closed}}\n")
    yard = yard.also("states:\n  no-house: {kind: normal, switches: {SW-H: open}}\n")
    assert found(yard) == []


def test_boat_without_a_table_of_states_is_studied_in_all_of_them() -> None:
    """STATE."""
    assert ("unlisted-state", "states", NEITHER) in passed(SOUND)


def test_cranking_role_does_not_silence_a_device_that_is_too_far_off() -> None:
    """ROLE, PRO-02: the conductor leads to a fuse, not to a motor."""
    line = MAIN.replace("5.9 in", "12 in, role: cranking, reason: heavy cable")
    assert found(SOUND.edit(MAIN, line)) == [
        ("protection-distance", "M1", BOTH, line),
        ("role-claim", "M1", BOTH, line),
    ]


def test_cranking_role_does_not_silence_a_missing_device() -> None:
    """ROLE, PRO-22: the lead hangs on the cranking circuit and feeds no motor."""
    yard = SOUND.without("V1:", "F-SENSE:").edit(
        "from: F-SENSE.load, to: REGULATOR.sense, size: 16 AWG",
        "from: BAT-S.pos, to: REGULATOR.sense, role: cranking, reason: start battery, size: 16 AWG",
    )
    assert [told[:3] for told in found(yard)] == [
        ("role-claim", "V2", BOTH),
        ("sense-place", "REGULATOR", NEITHER),  # the alternator charges the other bank
        ("unprotected-conductor", "V2", BOTH),
    ]


def test_pigtail_role_does_not_silence_a_missing_device_on_a_long_lead() -> None:
    """ROLE, PRO-22."""
    yard = SOUND.without("V1:", "F-SENSE:").edit(
        "from: F-SENSE.load, to: REGULATOR.sense, size: 16 AWG",
        "from: BAT-H.pos, to: REGULATOR.sense, role: pigtail, reason: part of the regulator, size: 16 AWG",
    )
    assert [told[:3] for told in found(yard)] == [
        ("role-claim", "V2", BOTH),
        ("unprotected-conductor", "V2", BOTH),
    ]


@pytest.mark.parametrize("role", ["cranking", "pigtail"])
def test_role_does_not_silence_a_conductor_that_is_too_thin(role: str) -> None:
    """ROLE, CON-01: 10 AWG bears 60 A."""
    lead = "C1: {from: CHARGER.out, to: F-CHARGER.load, size: 10 AWG, length: 2 m}"
    line = lead.replace("}", f", current: 61 A, role: {role}, reason: x}}")
    yard = SOUND.edit(lead, line)
    assert found(yard) == [("ampacity", "C1", BOTH, line), ("role-claim", "C1", BOTH, line)]


def test_pigtails_in_a_row_do_not_move_a_fuse_away_from_the_battery() -> None:
    """ROLE, PRO-02: three pieces of 6.9 in are 20.7 in of unprotected conductor."""
    pieces = (
        "C3: {from: STUD-2, to: F-CHARGER.line, size: 10 AWG, length: 6.9 in}\n"
        "      C4: {from: STUD-1, to: STUD-2, size: 10 AWG, length: 6.9 in, role: pigtail}\n"
        "      C5: {from: BAT-H.pos, to: STUD-1, size: 10 AWG, length: 6.9 in, role: pigtail}"
    )
    yard = SOUND.edit("C3: {from: F-CHARGER.line, to: BAT-H.pos, size: 10 AWG, length: 0.1 m}", pieces)
    studs = "devices:\n  STUD-1: {part: bus-100, zone: LOCKER}\n  STUD-2: {part: bus-100, zone: LOCKER}\n"
    assert "protection-distance" in [told[0] for told in found(yard.also(studs))]


def test_role_of_the_bank_does_not_free_a_conductor_that_leaves_the_bank() -> None:
    """ROLE, PRO-22: a lead from a bank's post to a load is no link of the bank."""
    yard = SOUND.without("V1:", "F-SENSE:").edit(
        "from: F-SENSE.load, to: REGULATOR.sense, size: 16 AWG",
        "from: BAT-H.pos, to: REGULATOR.sense, role: bank, reason: on the bank, size: 16 AWG",
    )
    assert ("unprotected-conductor", "V2", BOTH) in [told[:3] for told in found(yard)]


def test_cranking_conductors_that_feed_the_motor_hold_their_role() -> None:
    """ROLE, T-01."""
    assert {("role-claim", part, LAW) for part in ("S1", "S2", "S3", "S4")} <= passed(SOUND)
