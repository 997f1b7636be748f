"""What each hand switch makes dead, and what stays live with all of them off: small boats, reckoned by eye."""

from __future__ import annotations

from checker.network.isolation import StaysLive, hand_switches, stays_live
from checker.network.studies import Studies
from tests.builders import (
    Piece,
    a_battery,
    a_bus,
    a_conductor,
    a_converter,
    a_fuse,
    a_load,
    a_row,
    a_source,
    a_switch,
    studied,
)

CHANGEOVER = {"1": [("a", "out")], "2": [("b", "out")], "off": []}
BEHIND_A_SWITCH: tuple[Piece, ...] = (
    a_battery("BAT"), a_bus("BUS-N"), a_switch("SW"), a_fuse("F", 10), a_load("LAMP"), a_fuse("F-P", 5), a_load("PUMP"),
    a_conductor("W1", "BAT.pos", "SW.in"), a_conductor("W2", "SW.out", "F.line"), a_conductor("W3", "F.load", "LAMP.pos"),
    a_conductor("W4", "BAT.pos", "F-P.line"), a_conductor("W5", "F-P.load", "PUMP.pos"),
    a_conductor("R1", "LAMP.neg", "BUS-N"), a_conductor("R2", "PUMP.neg", "BUS-N"),
    a_conductor("R3", "BAT.neg", "BUS-N"),
)  # fmt: skip


def switches(studies: Studies) -> list[tuple[str, str, bool, tuple[str, ...]]]:
    rows = hand_switches(studies.boat, studies.network, studies.usual)
    return [(row.switch, row.off, row.is_closed, row.dead) for row in rows]


def live(studies: Studies) -> StaysLive:
    return stays_live(studies.boat, studies.network, studies.all_off)


def test_a_switch_makes_dead_what_is_behind_it_and_nothing_ahead_of_it() -> None:
    assert switches(studied(*BEHIND_A_SWITCH)) == [("SW", "open", True, ("LAMP",))]


def test_what_is_ahead_of_the_switch_stays_live_with_its_metal() -> None:
    found = live(studied(*BEHIND_A_SWITCH))
    assert found.loads == (("PUMP", ("HOUSE",)),)
    assert found.devices == ("BAT", "F-P", "PUMP", "SW")
    assert found.conductors == ("W1", "W4", "W5")


def test_a_load_that_a_second_switch_feeds_too_is_made_dead_by_neither() -> None:
    second = (a_switch("SW2"), a_conductor("W6", "BAT.pos", "SW2.in"), a_conductor("W7", "SW2.out", "F.line"))
    assert [row[3] for row in switches(studied(*BEHIND_A_SWITCH, *second))] == [(), ()]


def test_a_relay_is_no_hand_switch() -> None:
    pieces = [piece if getattr(piece, "id", "") != "SW" else a_switch("SW", by_hand=False) for piece in BEHIND_A_SWITCH]
    studies = studied(*pieces)
    assert switches(studies) == []
    assert live(studies).loads == (("PUMP", ("HOUSE",)),)


def test_a_link_that_is_open_in_use_has_nothing_to_turn_off() -> None:
    link = (a_switch("LINK"), a_conductor("W8", "LINK.in", "SW.out"), a_conductor("W9", "LINK.out", "SW.in"))
    rows = (a_row("in-use", SW="closed", LINK="open"),)
    assert switches(studied(*BEHIND_A_SWITCH, *link, *rows))[0] == ("LINK", "open", False, ())


def test_a_changeover_is_off_where_it_closes_least() -> None:
    pieces = [piece if getattr(piece, "id", "") != "SW" else a_switch("SW", CHANGEOVER) for piece in BEHIND_A_SWITCH]
    pieces = [a_conductor("W1", "BAT.pos", "SW.a") if getattr(piece, "id", "") == "W1" else piece for piece in pieces]
    assert switches(studied(*pieces)) == [("SW", "off", True, ("LAMP",))]


def test_a_source_is_told_with_the_bank_that_it_still_reaches() -> None:
    charger = (
        a_source("CHG"), a_conductor("W6", "CHG.out", "BAT.pos"), a_conductor("R4", "CHG.neg", "BUS-N"),
        a_source("PV"), a_conductor("W7", "PV.out", "SW.out"), a_conductor("R5", "PV.neg", "BUS-N"),
    )  # fmt: skip
    found = live(studied(*BEHIND_A_SWITCH, *charger))
    assert [(source.device, banks) for source, banks in found.sources] == [("CHG", ("HOUSE",)), ("PV", ())]


def test_a_load_behind_a_live_converter_stays_live_and_no_bank_feeds_it_straight() -> None:
    behind = (
        a_converter("DDC"), a_conductor("W6", "BAT.pos", "DDC.inpos"), a_conductor("R4", "DDC.inneg", "BUS-N"),
        a_load("RADIO"), a_conductor("W7", "DDC.outpos", "RADIO.pos"), a_conductor("R5", "RADIO.neg", "DDC.outneg"),
        a_conductor("R6", "DDC.outneg", "BUS-N"),
    )  # fmt: skip
    assert live(studied(*BEHIND_A_SWITCH, *behind)).loads == (
        ("DDC", ("HOUSE",)), ("PUMP", ("HOUSE",)), ("RADIO", ()),
    )  # fmt: skip


def test_the_joint_between_two_batteries_in_series_is_live() -> None:
    pieces = [
        a_battery("B1", 6.0), a_battery("B2", 6.0), a_bus("BUS-N"), a_switch("SW"), a_load("LAMP"),
        a_conductor("W0", "B1.pos", "B2.neg"), a_conductor("W1", "B2.pos", "SW.in"),
        a_conductor("W2", "SW.out", "LAMP.pos"), a_conductor("R1", "LAMP.neg", "BUS-N"),
        a_conductor("R2", "B1.neg", "BUS-N"),
    ]  # fmt: skip
    found = live(studied(*pieces))
    assert found.conductors == ("W0", "W1")
    assert found.loads == ()
