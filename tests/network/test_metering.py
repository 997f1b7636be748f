"""Hold what a shunt does not measure: everything still joined to its bank once it is taken out."""

from __future__ import annotations

from typing import Any

from checker.boat.hull import Engine, Joint, Shield
from checker.checks.shunt import shunt_bypass, shunt_direction
from checker.finding import Verdict
from checker.network.metering import Metering
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bond,
    a_bus,
    a_conductor,
    a_device,
    a_link,
    a_load,
    a_metal,
    a_shunt,
    a_source,
    a_switch,
    found_in,
    outcomes_of,
    studied,
)


def metered() -> list[Piece]:
    """Return a bank of two batteries, a stud, the shunt, and one load on the boat's side."""
    return [
        a_battery("A"), a_battery("B"), a_bus("STUD"), a_bus("BUS-N"), a_shunt("SH"), a_bus("HOT"), a_load("L"),
        a_link("an", "A.neg", "STUD"), a_link("bn", "B.neg", "STUD"), a_link("ap", "A.pos", "HOT"),
        a_link("bp", "B.pos", "HOT"), a_conductor("sb", "STUD", "SH.bat"), a_conductor("ss", "SH.sys", "BUS-N"),
        a_conductor("out", "HOT", "L.pos"), a_conductor("back", "L.neg", "BUS-N"),
    ]  # fmt: skip


def without(pieces: list[Piece], *names: str) -> list[Piece]:
    """Return the pieces without some of them."""
    return [piece for piece in pieces if piece.id not in names]


def metering(*pieces: Piece) -> Metering:
    """Return what the one shunt aboard meters in the first state."""
    (found,) = studied(*pieces).metering[0]
    return found


def unmetered(*pieces: Piece) -> list[tuple[str, str, str]]:
    """Return what is not metered: device, what it is, and the conductor by which it lands."""
    return [(item.device, item.what, item.last) for item in metering(*pieces).unmetered]


def test_a_sound_shunt_meters_everything() -> None:
    found = metering(*metered())
    assert (found.is_beside_bank, found.is_turned, found.bypass, found.unmetered) == (True, False, (), ())
    assert found_in(a_boat(*metered()), shunt_bypass, shunt_direction) == []


def test_a_load_returned_to_the_bank_stud_is_named_with_its_path() -> None:
    pieces = [*without(metered(), "back"), a_conductor("back", "L.neg", "STUD")]
    (item,) = metering(*pieces).unmetered
    assert (item.device, item.what, item.last) == ("L", "load", "back")
    assert item.path == ("SH.bat", "sb", "STUD", "back", "L.neg")
    assert found_in(a_boat(*pieces), shunt_bypass) == [("shunt-bypass", "back")]


def test_a_charger_returned_to_a_battery_post_is_named() -> None:
    pieces = [
        *metered(), a_source("CHG"), a_conductor("c", "CHG.out", "HOT"), a_conductor("cn", "CHG.neg", "A.neg"),
    ]  # fmt: skip
    assert unmetered(*pieces) == [("CHG", "charge source", "cn")]


def test_two_loads_at_fault_are_two_findings() -> None:
    pieces = [
        *without(metered(), "back"), a_conductor("back", "L.neg", "STUD"), a_load("M"), a_conductor("mo", "HOT", "M.pos"),
        a_conductor("mb", "M.neg", "B.neg"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), shunt_bypass) == [("shunt-bypass", "back"), ("shunt-bypass", "mb")]


def test_an_engine_block_on_the_bank_side_is_named() -> None:
    pieces = [*metered(), a_metal("ENG"), a_conductor("e", "ENG", "STUD")]
    assert unmetered(*pieces) == [("ENG", "metal part", "e")]


def test_a_load_that_reaches_the_bank_side_over_the_block_is_named_as_well() -> None:
    pieces = [
        *without(metered(), "back"), a_metal("ENG"), a_conductor("e", "ENG", "STUD"),
        Joint(id="j", start="L.neg", end="ENG"),
    ]  # fmt: skip
    assert unmetered(*pieces) == [("ENG", "metal part", "e"), ("L", "load", "j")]


def test_a_bond_round_the_shunt_is_a_path_from_stud_to_stud() -> None:
    pieces = [*metered(), a_bus("BOND"), a_bond("b1", "BOND", "BUS-N"), a_bond("b2", "BOND", "STUD")]
    found = metering(*pieces)
    assert found.bypass == ("SH.bat", "sb", "STUD", "b2", "BOND", "b1", "BUS-N", "ss", "SH.sys")
    assert found.unmetered == ()
    assert [part for _, part in found_in(a_boat(*pieces), shunt_bypass)] == ["b2"]


def test_a_shield_joined_at_both_ends_is_a_path_from_stud_to_stud() -> None:
    pieces = [
        *metered(), a_load("M"), a_conductor("mo", "HOT", "M.pos"), a_conductor("mb", "M.neg", "BUS-N"),
        Shield(id="screen", joins=("M.neg", "A.neg")),
    ]  # fmt: skip
    assert metering(*pieces).bypass_parts == ("sb", "an", "screen", "mb", "ss")
    assert found_in(a_boat(*pieces), shunt_bypass) == [("shunt-bypass", "screen")]


def test_a_shield_joined_to_the_bank_side_alone_is_named() -> None:
    pieces = [*metered(), Shield(id="screen", joins=("STUD",))]
    assert unmetered(*pieces) == [("screen", "shield", "screen")]


def test_a_shield_that_hangs_on_a_load_named_already_adds_nothing() -> None:
    pieces = [
        *without(metered(), "back"), a_conductor("back", "L.neg", "STUD"), Shield(id="screen", joins=("L.neg",)),
    ]  # fmt: skip
    assert unmetered(*pieces) == [("L", "load", "back")]


def test_a_shield_joined_nowhere_is_silent() -> None:
    assert unmetered(*metered(), Shield(id="screen", joins=())) == []


def test_the_shunts_own_instrument_may_stay_on_the_bank_side() -> None:
    part = a_load("MON").part
    pieces = [*metered(), a_device("MON", part, belongs_to="SH", mount={"pos": "SH.vbat", "neg": "SH.bat"})]
    assert unmetered(*pieces) == []


def test_another_instrument_on_the_bank_side_is_named() -> None:
    part = a_load("MON").part
    pieces = [*metered(), a_device("MON", part, mount={"pos": "SH.vbat", "neg": "SH.bat"})]
    assert unmetered(*pieces) == [("MON", "load", "MON")]


def test_a_second_bank_outside_the_shunt_is_silent() -> None:
    pieces = [
        *metered(), a_battery("S", bank="START"), a_load("MOTOR", 200.0, motor=True), a_conductor("sn", "S.neg", "BUS-N"),
        a_conductor("sp", "S.pos", "MOTOR.pos"), a_conductor("mn", "MOTOR.neg", "BUS-N"),
    ]  # fmt: skip
    assert unmetered(*pieces) == []
    assert found_in(a_boat(*pieces), shunt_bypass, shunt_direction) == []


def test_a_second_bank_with_its_negative_on_the_bank_side_is_a_path_for_what_hangs_on_it() -> None:
    pieces = [
        *metered(), a_battery("S", bank="START"), a_load("MOTOR", 200.0), a_conductor("sn", "S.neg", "STUD"),
        a_conductor("sp", "S.pos", "MOTOR.pos"), a_conductor("mn", "MOTOR.neg", "S.neg"),
    ]  # fmt: skip
    assert unmetered(*pieces) == [("MOTOR", "load", "mn")]


def test_a_load_reaches_the_bank_side_only_in_the_state_that_joins_it() -> None:
    pieces = [
        *without(metered(), "back"), a_switch("SW", {"1": [("a", "out")], "2": [("b", "out")]}),
        a_conductor("back", "L.neg", "SW.out"), a_conductor("x", "SW.a", "BUS-N"), a_conductor("y", "SW.b", "STUD"),
    ]  # fmt: skip
    states = {m.state.words: [i.device for i in m.unmetered] for (m,) in studied(*pieces).metering}
    assert states == {"SW 1": [], "SW 2": ["L"]}
    findings = [o for o in outcomes_of(a_boat(*pieces), shunt_bypass) if o.verdict is Verdict.FINDING]
    assert [(o.part, o.state) for o in findings] == [("back", "any/SW-2: SW 2")]


def test_a_switch_that_joins_both_sides_of_the_shunt_is_a_path_round_it() -> None:
    pieces = [*metered(), a_switch("SW"), a_conductor("x", "SW.in", "STUD"), a_conductor("y", "SW.out", "BUS-N")]
    assert metering(*pieces).bypass_parts == ("sb", "x", "SW", "y", "ss")


# --- which way round


def test_a_shunt_turned_round_is_told_and_nothing_else_is() -> None:
    pieces = [
        *without(metered(), "sb", "ss"),
        a_conductor("sb", "STUD", "SH.sys"),
        a_conductor("ss", "SH.bat", "BUS-N"),
    ]
    assert metering(*pieces).is_turned
    assert found_in(a_boat(*pieces), shunt_bypass, shunt_direction) == [("shunt-direction", "SH")]


def test_a_shunt_away_from_its_bank_is_told() -> None:
    pieces = [
        *without(metered(), "sb", "ss"), a_conductor("n", "STUD", "BUS-N"), a_bus("FAR"),
        a_conductor("sb", "FAR", "SH.bat"), a_conductor("ss", "SH.sys", "BUS-N"),
    ]  # fmt: skip
    # Its stud sys leads to the bank's negative, so it stands turned round in a dead end.
    assert found_in(a_boat(*pieces), shunt_direction) == [("shunt-direction", "SH")]


def test_a_shunt_that_no_conductor_joins_to_its_bank_is_told() -> None:
    pieces = [*without(metered(), "sb", "ss"), a_conductor("n", "STUD", "BUS-N")]
    assert not metering(*pieces).is_beside_bank
    assert found_in(a_boat(*pieces), shunt_direction) == [("shunt-direction", "SH")]


def test_a_shunt_in_the_positive_is_studied_in_the_same_way() -> None:
    pieces: list[Piece] = [
        a_battery("A"), a_bus("BUS-N"), a_bus("HOT"), a_shunt("SH"), a_load("L"), a_link("n", "A.neg", "BUS-N"),
        a_conductor("sb", "A.pos", "SH.bat"), a_conductor("ss", "SH.sys", "HOT"), a_conductor("out", "HOT", "L.pos"),
        a_conductor("back", "L.neg", "BUS-N"),
    ]  # fmt: skip
    assert unmetered(*pieces) == []
    moved = [*without(pieces, "out"), a_conductor("out", "A.pos", "L.pos")]
    assert unmetered(*moved) == [("L", "load", "out")]


# --- what was not recorded


def assessed(**facts: Any) -> list[tuple[str, str]]:
    """Return how the bypass check ends on a sound boat with some facts missing."""
    boat = a_boat(*metered(), **facts)
    return [(o.verdict.value, o.missing) for o in outcomes_of(boat, shunt_bypass)]


def test_without_records_the_answer_is_not_assessed() -> None:
    assert assessed() == [("passed", "")]
    assert assessed(bonds_recorded=False) == [("not assessed", "bonds")]
    assert assessed(shields=None) == [("not assessed", "shields")]
    assert assessed(shields=(Shield(id="s", joins=None),)) == [("not assessed", "joins")]
    inboard = Engine(id="E", fuel="diesel", mounting="inboard", block=None)
    assert assessed(engines=(inboard,)) == [("not assessed", "block")]


def test_an_outboard_needs_no_block_recorded() -> None:
    outboard = Engine(id="E", fuel="petrol", mounting="outboard", block=None)
    assert assessed(engines=(outboard,)) == [("passed", "")]


def test_a_bypass_is_found_though_other_records_are_missing() -> None:
    pieces = [*without(metered(), "back"), a_conductor("back", "L.neg", "STUD")]
    assert found_in(a_boat(*pieces, bonds_recorded=False), shunt_bypass) == [("shunt-bypass", "back")]
