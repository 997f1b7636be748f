"""Seed faults of potentials: batteries reversed or tapped, loads on the wrong net or on none."""

from __future__ import annotations

import pytest

from tests.small_yard import BOTH, LAW, NEITHER, SOUND, Yard, finding, found, passed

BANK = "size: 2/0 AWG, role: bank, reason: link of the bank, current: 40 A"


def second_battery(positive_to: str, negative_to: str, part: str = "house-battery") -> Yard:
    """Return the yard with a second house battery, linked as told. Leads ahead of fuses stay within 7 in."""
    yard = SOUND.without("M1:").edit(
        "F-MAIN: {part: bolt-fuse, zone: LOCKER, rating: 150 A}",
        "F-MAIN: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: BAT-H.pos}}",
    )
    yard = yard.edit("capacity: 100 Ah, ratio", "capacity: 200 Ah, ratio")  # of the monitor
    return yard.also(
        f"devices:\n  BAT-H2: {{part: {part}, zone: LOCKER, bank: HOUSE}}\n"
        "conductors:\n"
        f"  L1: {{from: BAT-H2.pos, to: {positive_to}, length: 2 in, {BANK}}}\n"
        f"  L2: {{from: BAT-H2.neg, to: {negative_to}, length: 2 in, {BANK}}}\n"
    )


BAT_H2 = "BAT-H2: {part: house-battery, zone: LOCKER, bank: HOUSE}"


def test_battery_linked_in_reverse_is_found_with_the_loop_that_shows_it() -> None:
    """BNK-02."""
    yard = second_battery("BAT-H.neg", "BAT-H.pos")
    assert ("battery-loop", "BAT-H2", NEITHER, BAT_H2) in found(yard)
    assert finding(yard, "battery-loop", "BAT-H2").path == (
        "BAT-H2.pos", "L1", "BAT-H.neg", "BAT-H", "BAT-H.pos", "L2", "BAT-H2.neg",
    )  # fmt: skip
    # 3.2 kA run round the loop and leave next to no voltage: no fuse would open, and the plotter is dark.
    held = ("F-ALT", "F-CHARGER", "F-MAIN", "F-MONITOR", "F-PANEL", "F-SENSE", "P1", "P2", "P3", "P4", "P5")
    assert [told[:2] for told in found(yard)] == [
        ("battery-loop", "BAT-H2"),
        *(("far-end-clearing", device) for device in held),
        ("minimum-voltage", "PLOTTER.load"),
        ("solved-ampacity", "L1"),
        ("solved-ampacity", "L2"),
    ]


def test_battery_linked_like_to_like_is_sound() -> None:
    """BNK-02."""
    assert found(second_battery("BAT-H.pos", "BAT-H.neg")) == []


def test_battery_of_another_voltage_in_parallel_is_found() -> None:
    """BNK-02: 24 V beside 12 V."""
    yard = second_battery("BAT-H.pos", "BAT-H.neg", part="battery-24").also_parts(
        "battery-24: {kind: battery, voltage: 24 V, capacity: 100 Ah, chemistry: agm-lead}"
    )
    line = BAT_H2.replace("house-battery", "battery-24")
    bank = BAT_H2.replace("BAT-H2", "BAT-H")
    assert found(yard) == [("alike-batteries", "HOUSE", NEITHER, bank), ("battery-loop", "BAT-H2", NEITHER, line)]


def test_link_between_both_posts_of_a_battery_is_found_as_a_dead_short() -> None:
    """BNK-02: a series link that went to the battery's own other post."""
    yard = SOUND.also(
        "devices:\n  BAT-X: {part: start-battery, zone: LOCKER, bank: SPARE}\n"
        f"conductors:\n  L1: {{from: BAT-X.pos, to: BAT-X.neg, length: 2 in, {BANK}}}\n"
        f"  L2: {{from: BAT-X.neg, to: BUS-N, length: 2 in, {BANK}}}\n"
    )
    line = "BAT-X: {part: start-battery, zone: LOCKER, bank: SPARE}"
    link = f"L1: {{from: BAT-X.pos, to: BAT-X.neg, length: 2 in, {BANK}}}"
    assert found(yard) == [
        ("dead-short", "BAT-X", NEITHER, line),
        ("solved-ampacity", "L1", BOTH, link),  # what a short circuit carries, no gauge bears
    ]
    assert finding(yard, "dead-short", "BAT-X").path == ("BAT-X.pos", "L1", "BAT-X.neg")


def series_bank(winch_on: str, voltage: str) -> Yard:
    """Return the yard with a 24 V bank of two batteries, and a winch fused on one of its posts."""
    return SOUND.also_parts(f"winch: {{kind: load, voltage: {voltage}, current: 50 A}}").also(
        "devices:\n"
        "  BAT-1: {part: start-battery, zone: LOCKER, bank: BOW}\n"
        "  BAT-2: {part: start-battery, zone: LOCKER, bank: BOW}\n"
        f"  F-WINCH: {{part: bolt-fuse, zone: LOCKER, rating: 80 A, mount: {{line: {winch_on}}}}}\n"
        "  WINCH: {part: winch, zone: BOW}\n"
        "conductors:\n"
        f"  L1: {{from: BAT-1.pos, to: BAT-2.neg, length: 2 in, {BANK}}}\n"
        f"  L2: {{from: BAT-1.neg, to: BUS-N, length: 2 in, {BANK}}}\n"
        f"circuits:\n  WINCH:\n    name: Winch\n    service: windlass\n    voltage: {voltage}\n    current: 50 A\n"
        "    always_on: the winch has its own bank\n"
        "    conductors:\n"
        "      X1: {from: F-WINCH.load, to: WINCH.pos, size: 4 AWG, length: 2 m}\n"
        "      X2: {from: WINCH.neg, to: BUS-N, size: 4 AWG, length: 2 m}\n"
    )


def test_load_on_the_middle_of_a_series_bank_is_found_at_the_load() -> None:
    """BNK-03: 12 V is its own voltage; it is the bank that suffers."""
    yard = series_bank("BAT-1.pos", "12 V")
    assert found(yard) == [("bank-tap", "WINCH", NEITHER, "WINCH: {part: winch, zone: BOW}")]


def test_load_across_the_whole_series_bank_is_sound() -> None:
    """BNK-03."""
    assert found(series_bank("BAT-2.pos", "24 V")) == []


def test_load_of_another_voltage_is_found_at_the_load() -> None:
    """LOD-02: 12 V across 24 V."""
    assert found(series_bank("BAT-2.pos", "12 V")) == [
        ("load-voltage", "WINCH", NEITHER, "WINCH: {part: winch, zone: BOW}")
    ]


def test_load_with_feed_and_return_swapped_is_found() -> None:
    """LOD-02: its neg post is on the fuse."""
    yard = series_bank("BAT-2.pos", "24 V")
    yard = yard.edit("to: WINCH.pos", "to: WINCH.neg").edit("from: WINCH.neg", "from: WINCH.pos")
    assert found(yard) == [("load-voltage", "WINCH", NEITHER, "WINCH: {part: winch, zone: BOW}")]
    assert "swapped" in finding(yard, "load-voltage", "WINCH").fault


@pytest.mark.parametrize("voltage", ["24 V", "24000 mV"])
def test_load_of_the_voltage_of_its_net_is_sound(voltage: str) -> None:
    """LOD-02."""
    yard = series_bank("BAT-2.pos", voltage)
    assert found(yard) == []
    assert ("load-voltage", "WINCH", NEITHER) in passed(yard)


def test_load_without_a_return_conductor_is_found() -> None:
    """RET-01."""
    yard = SOUND.without("V3:")
    assert found(yard) == [
        ("load-return", "REGULATOR", NEITHER, "REGULATOR: {part: regulator, zone: ENGINE-SPACE, regulates: ALT}")
    ]
    assert "return REGULATOR.gnd" in finding(yard, "load-return", "REGULATOR").fault


def test_load_without_a_feed_conductor_is_found() -> None:
    """RET-01."""
    yard = SOUND.without("V2:")
    assert found(yard) == [
        ("load-return", "REGULATOR", NEITHER, "REGULATOR: {part: regulator, zone: ENGINE-SPACE, regulates: ALT}")
    ]
    assert "feed REGULATOR.sense" in finding(yard, "load-return", "REGULATOR").fault


def test_charge_source_without_a_return_conductor_is_found() -> None:
    """RET-01: a charger that floats charges nothing."""
    yard = SOUND.without("C2:")
    assert found(yard) == [("load-return", "CHARGER", NEITHER, "CHARGER: {part: charger-20, zone: CABIN}")]


def test_load_that_returns_through_the_engine_block_it_is_mounted_on_is_sound() -> None:
    """RET-01: the alternator has no return conductor, and needs none."""
    assert ("load-return", "ALT", NEITHER) in passed(SOUND)


def test_return_bus_that_nothing_joins_is_found_at_the_bus() -> None:
    """RET-07: told once, at the bus, and not at each load on it."""
    yard = SOUND.without("D2:")
    assert found(yard) == [("split-return", "PANEL-N", NEITHER, "PANEL-N: {part: bus-100, zone: CABIN}")]


def test_return_bus_joined_over_another_bus_is_sound() -> None:
    """RET-07."""
    yard = SOUND.without("D2:").edit(
        "      D1: {from", "      D2: {from: PANEL-N, to: STUD, size: 6 AWG, length: 1 m}\n"
        "      D3: {from: STUD, to: BUS-N, size: 6 AWG, length: 0.5 m}\n      D1: {from",
    ).also("devices:\n  STUD: {part: bus-100, zone: CABIN}\n")  # fmt: skip
    assert found(yard) == []
    assert ("ampacity", "D3", LAW) in passed(yard)
