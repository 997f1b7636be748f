"""Seed faults of devices: what they are, what they stand in, and what can flow through a bus."""

from __future__ import annotations

import pytest

from tests.small_yard import BOTH, LAW, NEITHER, PRACTICE_ONLY, SOUND, Yard, finding, found, passed

BLADE = "blade-fuse: {kind: fuse, voltage: 32 V"
CHARGER_FUSE = "F-CHARGER: {part: bolt-fuse, zone: LOCKER, rating: 30 A}"
BREAKER = "F-CHARGER: {part: thermal-breaker, zone: LOCKER}"


def test_fuse_rated_below_the_voltage_of_its_net_is_found_at_its_rating() -> None:
    """PRO-10: the part is fitted twice."""
    assert found(SOUND.edit(BLADE, BLADE.replace("32 V", "11.9 V"))) == [
        ("device-voltage", "F-MONITOR", BOTH, "F-MONITOR: {part: blade-fuse, zone: LOCKER, rating: 1 A}"),
        ("device-voltage", "F-SENSE", BOTH, "F-SENSE: {part: blade-fuse, zone: LOCKER, rating: 2 A}"),
    ]


@pytest.mark.parametrize("voltage", ["12 V", "12000 mV", "32 V"])
def test_fuse_rated_for_the_voltage_of_its_net_is_sound(voltage: str) -> None:
    """PRO-10."""
    assert found(SOUND.edit(BLADE, BLADE.replace("32 V", voltage))) == []


def charger_breaker(facts: str) -> Yard:
    """Return the yard with a breaker in the place of the charger's fuse."""
    part = f"thermal-breaker: {{kind: breaker, rating: 30 A, voltage: 32 V, {facts}}}"
    return SOUND.edit(CHARGER_FUSE, BREAKER).also_parts(part)


@pytest.mark.parametrize(
    ("facts", "told"),
    [
        ("trip_free: true, reset: automatic", "thermal-breaker resets itself"),
        ("trip_free: false, reset: manual", "thermal-breaker can be held closed (not trip-free)"),
        (
            "trip_free: false, reset: automatic",
            "thermal-breaker resets itself and can be held closed (not trip-free)",
        ),
    ],
)
def test_breaker_that_resets_itself_or_can_be_held_is_found(facts: str, told: str) -> None:
    """PRO-11."""
    yard = charger_breaker(facts)
    assert found(yard) == [("breaker-type", "F-CHARGER", BOTH, BREAKER)]
    assert finding(yard, "breaker-type", "F-CHARGER", LAW).fault == told


def test_trip_free_breaker_with_manual_reset_is_sound() -> None:
    """PRO-11."""
    assert found(charger_breaker("trip_free: true, reset: manual")) == []


PANEL_BUS = "bus-100: {kind: bus, rating: 100 A"


def test_bus_rated_below_what_can_flow_through_it_is_found() -> None:
    """PRO-23: 60 A may come in; the breakers let out 5 + 10 + 15 + 5 + 5 = 40 A.

    The negative bus of the same part has no device of its own and is not judged.
    """
    positions = "positions: {first: P1, last: P8, takes: panel-breaker, returns: PANEL-N}"
    line = f"PANEL: {{part: bus-100, zone: CABIN, {positions}}}"
    assert found(SOUND.edit(PANEL_BUS, PANEL_BUS.replace("100 A", "39.9 A"))) == [
        ("bus-rating", "PANEL", NEITHER, line)
    ]


@pytest.mark.parametrize("rating", ["40 A", "40.1 A"])
def test_bus_rated_for_what_can_flow_through_it_is_sound(rating: str) -> None:
    """PRO-23."""
    assert found(SOUND.edit(PANEL_BUS, PANEL_BUS.replace("100 A", rating))) == []


def test_main_fuse_larger_than_its_bus_is_found_once_a_load_can_draw_it() -> None:
    """PRO-23: the bow thruster is fed from the bus over a cable that the main fuse protects."""
    thruster = (
        "devices:\n  THRUSTER: {part: thruster, zone: BOW}\n"
        "circuits:\n  THRUSTER:\n    name: Thruster\n    service: thruster\n    current: 100 A\n    conductors:\n"
        "      T1: {from: BUS-P, to: THRUSTER.pos, size: 2 AWG, length: 1 m}\n"
        "      T2: {from: THRUSTER.neg, to: BUS-N, size: 2 AWG, length: 1 m}\n"
    )
    yard = SOUND.also(thruster).also_parts("thruster: {kind: load, voltage: 12 V, current: 100 A}")
    line = "BUS-P: {part: bus-250, zone: LOCKER, name: positive bus}"
    rating = "bus-250: {kind: bus, rating: 250 A"
    assert found(yard.edit(rating, rating.replace("250 A", "149 A"))) == [("bus-rating", "BUS-P", NEITHER, line)]
    assert found(yard.edit(rating, rating.replace("250 A", "150 A"))) == []


def test_path_round_a_device_is_found_at_the_device() -> None:
    """PRO-26: the cables are thick enough for the main fuse, so that nothing else follows."""
    line = "F-PANEL: {part: bolt-fuse, zone: LOCKER, rating: 60 A, mount: {line: BUS-P}}"
    yard = SOUND.edit("F-PANEL.load, to: PANEL, size: 6 AWG", "F-PANEL.load, to: PANEL, size: 2 AWG")
    yard = yard.edit("from: PANEL-N, to: BUS-N, size: 6 AWG", "from: PANEL-N, to: BUS-N, size: 2 AWG")
    by_pass = "circuits:\n  SPARE:\n    name: Spare feed\n    service: feeder\n    current: 30 A\n    conductors:\n" \
        "      X1: {from: BUS-P, to: PANEL, size: 2 AWG, length: 1.5 m}\n"  # fmt: skip
    assert found(yard.also(by_pass)) == [("device-bypass", "F-PANEL", NEITHER, line)]
    told = finding(yard.also(by_pass), "device-bypass", "F-PANEL")
    assert told.fault.endswith("X1, D1")


def test_second_feed_with_a_device_of_its_own_is_no_path_round_the_first() -> None:
    """PRO-26: 60 A and 60 A may come to the panel, which bears 100 A, and its breakers let out 40 A."""
    second = (
        "devices:\n  F-SPARE: {part: bolt-fuse, zone: LOCKER, rating: 60 A, mount: {line: BUS-P}}\n"
        "circuits:\n  SPARE:\n    name: Spare feed\n    service: feeder\n    current: 30 A\n    conductors:\n"
        "      X1: {from: F-SPARE.load, to: PANEL, size: 6 AWG, length: 1.5 m}\n"
    )
    bypassed = [told for told in found(SOUND.also(second)) if told[0] == "device-bypass"]
    assert bypassed == []


def test_device_larger_than_the_load_s_maker_allows_is_found_at_its_rating() -> None:
    """LOD-01: the cable would bear it."""
    yard = SOUND.edit("feed: P1\n    protect: 5 A", "feed: P1\n    protect: 10 A")
    assert found(yard) == [("maker-device", "P1", NEITHER, "protect: 10 A")]


def test_device_as_large_as_the_load_s_maker_allows_is_sound() -> None:
    """LOD-01: 5 A of 5 A in the yard as it is; 10 A of 10 A here."""
    yard = SOUND.edit("feed: P1\n    protect: 5 A", "feed: P1\n    protect: 10 A")
    assert found(yard.edit("min_voltage: 10 V, max_device: 5 A", "min_voltage: 10 V, max_device: 10 A")) == []
    assert ("maker-device", "P1", NEITHER) in passed(SOUND)


SENSOR = "current: 0.2 A, max_device: 5 A, ignition_protected: true"


def test_part_that_can_spark_in_petrol_vapour_is_found_at_the_load() -> None:
    """ZON-01: the law alone asks it, also of a diesel boat where petrol is stowed."""
    yard = SOUND.edit(SENSOR, SENSOR.replace("true", "false"))
    assert found(yard) == [("ignition-protection", "SENSOR.load", LAW, "load: vapour-sensor")]


def test_fuse_that_can_spark_in_petrol_vapour_is_found_at_the_fuse() -> None:
    """ZON-01."""
    line = "F-SENSE: {part: blade-fuse, zone: FUEL, rating: 2 A}"
    yard = SOUND.edit("F-SENSE: {part: blade-fuse, zone: LOCKER, rating: 2 A}", line)
    assert found(yard) == [("ignition-protection", "F-SENSE", LAW, line)]
    assert found(yard.edit(BLADE, f"{BLADE}, ignition_protected: true")) == []


def test_part_that_can_spark_where_there_is_no_petrol_is_sound() -> None:
    """ZON-01."""
    yard = SOUND.edit(SENSOR, SENSOR.replace("true", "false")).edit(", petrol_vapour: true", "")
    assert found(yard) == []


def test_voluntary_set_says_nothing_on_ignition() -> None:
    """ZON-01."""
    assert found(PRACTICE_ONLY.edit(SENSOR, SENSOR.replace("true", "false"))) == []


def test_legend_of_another_rating_is_found_at_the_legend() -> None:
    """LBL-06."""
    yard = SOUND.edit("legend: LIGHTS 10 A", "legend: LIGHTS 15 A")
    assert found(yard) == [("legend-rating", "P2", NEITHER, "legend: LIGHTS 15 A")]


def test_legend_without_a_rating_is_sound() -> None:
    """LBL-06."""
    assert found(SOUND.edit("legend: LIGHTS 10 A", "legend: CABIN LIGHTS")) == []


@pytest.mark.parametrize(
    ("engine", "binds"),
    [
        ("{fuel: petrol, mounting: inboard, block: ENGINE}", True),
        ("{fuel: petrol, mounting: outboard, block: ENGINE}", False),
        ("{fuel: diesel, mounting: inboard, block: ENGINE}", False),
    ],
)
def test_law_binds_a_petrol_inboard_whether_or_not_the_yard_adopts_it(engine: str, binds: bool) -> None:
    """ZON-01: the unprotected part is then a finding of a law that the yard did not adopt."""
    yard = PRACTICE_ONLY.edit(SENSOR, SENSOR.replace("true", "false"))
    yard = yard.edit("{fuel: diesel, mounting: inboard, block: ENGINE}", engine)
    expected = [("ignition-protection", "SENSOR.load", LAW, "load: vapour-sensor")]
    assert found(yard) == (expected if binds else [])


def test_law_binds_a_boat_with_a_petrol_generator() -> None:
    """ZON-01."""
    yard = PRACTICE_ONLY.edit(SENSOR, SENSOR.replace("true", "false"))
    yard = yard.edit("facts:\n", "facts:\n  generator_fuel: petrol\n")
    assert found(yard) == [("ignition-protection", "SENSOR.load", LAW, "load: vapour-sensor")]
