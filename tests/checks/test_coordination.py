"""Seed faults of devices in series, and of devices that do not let their own load run or start."""

from __future__ import annotations

import pytest

from checker.finding import Verdict
from tests.small_yard import NEITHER, SOUND, Yard, finding, found, not_assessed, outcomes, passed

FEEDER = "F-PANEL: {part: bolt-fuse, zone: LOCKER, rating: 60 A,"
PUMP_PART = "cooling-pump: {kind: load, voltage: 12 V, current: 8 A,"


def feeder(facts: str) -> Yard:
    """Return the yard with another fuse ahead of the panel."""
    return SOUND.edit(FEEDER, "F-PANEL: {part: feeder, zone: LOCKER,").also_parts(
        "feeder: {kind: fuse, voltage: 32 V, interrupting: 10 kA, resistance: 0.3 mohm, terminal: stud, stud: M8, "
        f"smallest_size: 16 AWG, largest_size: 4/0 AWG, {facts}}}"
    )


# PRO-12: selectivity


def test_branch_breakers_under_a_feeder_fuse_as_quick_as_they_are_not_selective() -> None:
    """PRO-12, by the bands: P3 has opened by 0.2 s at 60 A (4 times 15 A), where the fuse (2 times 30 A) may begin."""
    yard = feeder("rating: 30 A, band: quick")
    assert found(yard) == [
        ("selectivity", "P2 under F-PANEL", NEITHER, "protect: 10 A"),
        ("selectivity", "P3 under F-PANEL", NEITHER, "protect: 15 A"),
    ]
    told = finding(yard, "selectivity", "P3 under F-PANEL")
    assert told.measure is not None
    assert told.measure.value == pytest.approx(60)
    assert told.measure.limit == pytest.approx(832, abs=0.5)


def test_branch_breakers_under_a_slower_or_larger_fuse_are_selective() -> None:
    """PRO-12: 30 A of the slow band, or 60 A of the quick one."""
    assert found(feeder("rating: 30 A, band: slow")) == []
    assert found(feeder("rating: 60 A, band: quick")) == []
    assert {("selectivity", f"P{n} under F-PANEL", NEITHER) for n in range(1, 6)} <= passed(SOUND)


def test_device_without_a_band_is_held_to_the_ratio_of_the_ratings() -> None:
    """PRO-12: 23 A over 15 A is 1.53, less than 1.6. The feeder's own far end cannot be assessed."""
    yard = feeder("rating: 23 A")
    assert found(yard) == [("selectivity", "P3 under F-PANEL", NEITHER, "protect: 15 A")]
    assert "F-PANEL 23 A is 1.53 times P3 15 A" in finding(yard, "selectivity", "P3 under F-PANEL").fault
    line = "F-PANEL: {part: feeder, zone: LOCKER, mount: {line: BUS-P}}"
    assert not_assessed(yard) == [("far-end-clearing", "F-PANEL", NEITHER, line)]


def test_device_without_a_band_that_keeps_the_ratio_passes_and_says_by_what() -> None:
    """PRO-12: 24 A over 15 A is 1.6."""
    yard = feeder("rating: 24 A")
    assert found(yard) == []
    notes = {o.part: o.note for o in outcomes(yard, Verdict.PASSED) if o.check == "selectivity"}
    assert notes["P3 under F-PANEL"] == "by ratio: a part has no band"


def local_fuse(more_conductors: str = "", more_devices: str = "") -> Yard:
    """Return the yard with a horn behind a fuse at the panel, and one of the same rating beside the horn."""
    return SOUND.also_parts("horn: {kind: load, voltage: 12 V, current: 5 A, max_device: 30 A}").also(
        "devices:\n  HORN: {part: horn, zone: BOW}\n"
        "  F-HORN: {part: bolt-fuse, zone: CABIN, rating: 30 A, mount: {line: PANEL}}\n"
        f"  F-LOCAL: {{part: bolt-fuse, zone: BOW, rating: 30 A}}\n{more_devices}"
        "circuits:\n  HORN:\n    name: Horn\n    service: horn\n    current: 5 A\n    conductors:\n"
        "      X1: {from: F-HORN.load, to: F-LOCAL.line, size: 10 AWG, length: 3 m}\n"
        "      X2: {from: F-LOCAL.load, to: HORN.pos, size: 10 AWG, length: 0.3 m}\n"
        f"      X3: {{from: HORN.neg, to: PANEL-N, size: 10 AWG, length: 3 m}}\n{more_conductors}"
    )


def test_second_device_that_guards_nothing_of_its_own_needs_no_selectivity() -> None:
    """T-33: the pass says so."""
    yard = local_fuse()
    assert found(yard) == []
    notes = {o.part: o.note for o in outcomes(yard, Verdict.PASSED) if o.check == "selectivity"}
    assert notes["F-LOCAL under F-HORN"] == "in series with nothing between: needs none"


def test_second_device_with_a_load_between_both_needs_selectivity() -> None:
    """T-33, PRO-12: the bell goes silent with the horn."""
    yard = local_fuse(
        "      X4: {from: F-LOCAL.line, to: BELL.pos, size: 10 AWG, length: 1 m}\n"
        "      X5: {from: BELL.neg, to: PANEL-N, size: 10 AWG, length: 3 m}\n",
        "  BELL: {part: horn, zone: BOW}\n",
    )
    line = "F-LOCAL: {part: bolt-fuse, zone: BOW, rating: 30 A}"
    assert found(yard) == [("selectivity", "F-LOCAL under F-HORN", NEITHER, line)]


def test_fuses_of_chargers_at_the_battery_stand_under_no_other() -> None:
    """PRO-12, PRO-13: what the battery feeds directly is limited by no charger's fuse."""
    above = {o.part for o in outcomes(SOUND, Verdict.PASSED) if o.check in ("selectivity", "rating-order")}
    assert above == {"F-PANEL under F-MAIN", *(f"P{n} under F-PANEL" for n in range(1, 6))}


def test_two_fuses_side_by_side_from_one_bus_to_another_stand_above_neither() -> None:
    """PRO-12, PRO-15: that they lie side by side is told, and not that they are not selective; the fault behind the one is fed through the other until both have opened."""
    second = (
        "devices:\n  F-SPARE: {part: bolt-fuse, zone: LOCKER, rating: 60 A, mount: {line: BUS-P}}\n"
        "circuits:\n  SPARE:\n    name: Spare feed\n    service: feeder\n    current: 30 A\n    conductors:\n"
        "      X1: {from: F-SPARE.load, to: PANEL, size: 6 AWG, length: 1.5 m}\n"
    )
    assert [told[:2] for told in found(SOUND.also(second))] == [("paralleled-devices", "F-SPARE")]


# PRO-13: the order of the ratings


def test_branch_device_larger_than_the_one_above_it_is_found() -> None:
    """PRO-13: that it is not selective follows."""
    yard = feeder("rating: 14 A, band: slow")
    assert found(yard) == [
        ("rating-order", "P3 under F-PANEL", NEITHER, "protect: 15 A"),
        ("selectivity", "P3 under F-PANEL", NEITHER, "protect: 15 A"),
    ]
    assert finding(yard, "rating-order", "P3 under F-PANEL").fault == "15 A stands under F-PANEL of 14 A"


def test_branch_device_as_large_as_the_one_above_it_is_in_order() -> None:
    """PRO-13: selectivity is another matter."""
    yard = feeder("rating: 15 A, band: slow")
    assert [told[0] for told in found(yard)] == ["selectivity"]
    assert ("rating-order", "P3 under F-PANEL", NEITHER) in passed(yard)


# PRO-14, PRO-19, T-14, T-24: the load


def test_device_smaller_than_the_continuous_current_of_its_load_is_found() -> None:
    """PRO-14: 8 A behind 5 A; the condition under way shows it too."""
    yard = SOUND.edit("feed: P3\n    protect: 15 A", "feed: P3\n    protect: 5 A")
    assert found(yard) == [
        ("device-carries-load", "P3", NEITHER, "protect: 5 A"),
        ("solved-rating", "P3", NEITHER, "protect: 5 A"),
    ]


@pytest.mark.parametrize("rating", ["10 A", "15 A"])
def test_device_above_the_continuous_current_of_its_load_is_sound(rating: str) -> None:
    """PRO-14."""
    yard = SOUND if rating == "15 A" else SOUND.edit("feed: P3\n    protect: 15 A", f"feed: P3\n    protect: {rating}")
    assert found(yard) == []
    assert ("device-carries-load", "P3", NEITHER) in passed(yard)


def starting(peak: str, yard: Yard = SOUND) -> Yard:
    """Return a yard whose pump starts with a current."""
    return yard.edit(PUMP_PART, f"{PUMP_PART} peak: {peak},")


def test_device_that_may_open_while_its_motor_starts_is_found() -> None:
    """PRO-14: 30 A are twice the rating, where the quick band may open after 0.2 s."""
    yard = starting("30 A")
    name = "P3 while cooling-pump starts"
    assert found(yard) == [("device-carries-load", name, NEITHER, "protect: 15 A")]
    measure = finding(yard, "device-carries-load", name).measure
    assert measure is not None
    assert (measure.value, measure.limit) == (pytest.approx(0.2), 2)


def test_device_that_holds_below_the_first_point_of_its_band_lets_its_motor_start() -> None:
    """PRO-14: 17.9 A are 1.19 times the rating."""
    assert found(starting("17.9 A")) == []


def test_slow_breaker_below_the_starting_current_of_its_motor_is_sound() -> None:
    """T-24: 30 A behind 15 A, and the slow band carries twice the rating for 5 s."""
    yard = starting("30 A", SOUND.edit("band: quick", "band: slow"))
    assert found(yard) == []
    assert ("device-carries-load", "P3 while cooling-pump starts", NEITHER) in passed(yard)


def test_device_far_above_the_current_of_its_load_is_sound() -> None:
    """T-14: 5 A ahead of 0.2 A; it protects the cable."""
    assert ("device-carries-load", "P5", NEITHER) in passed(SOUND)


INVERTER_FUSE = "F-INV: {part: inverter-fuse, zone: LOCKER, mount: {line: BAT-H.pos}}"


def inverter(band: str) -> Yard:
    """Return the yard with an inverter of 100 A, and 250 A for a surge, behind a fuse of 125 A at the battery."""
    return SOUND.also_parts(
        "inverter: {kind: load, model: constant-power, voltage: 12 V, current: 100 A, peak: 250 A}\n"
        "inverter-fuse: {kind: fuse, voltage: 32 V, interrupting: 10 kA, resistance: 0.3 mohm, rating: 125 A, "
        f"band: {band}}}"
    ).also(
        f"devices:\n  INV: {{part: inverter, zone: CABIN}}\n  {INVERTER_FUSE}\n"
        "circuits:\n  INV:\n    name: Inverter\n    service: inverter\n    current: 100 A\n"
        "    always_on: has a switch of its own\n    conductors:\n"
        "      X1: {from: F-INV.load, to: INV.pos, size: 1 AWG, length: 1 m}\n"
        "      X2: {from: INV.neg, to: BUS-N, size: 1 AWG, length: 1 m}\n"
        "conditions:\n  kettle:\n    loads: {INV: 100 A}\n"
    )


def test_quick_fuse_below_the_surge_of_its_inverter_is_found() -> None:
    """PRO-19."""
    yard = inverter("quick")
    assert found(yard) == [("device-carries-load", "F-INV while inverter starts", NEITHER, INVERTER_FUSE)]


def test_slow_fuse_that_carries_the_surge_of_its_inverter_is_sound() -> None:
    """PRO-19."""
    assert found(inverter("slow")) == []


def test_inverter_cable_without_a_device_at_the_source_is_found() -> None:
    """PRO-19: the first half of it, by what can reach the cable."""
    yard = inverter("slow").edit(f"  {INVERTER_FUSE}\n", "").edit("from: F-INV.load", "from: BAT-H.pos")
    line = "X1: {from: BAT-H.pos, to: INV.pos, size: 1 AWG, length: 1 m}"
    assert [(*told[:2], told[3]) for told in found(yard)] == [("unprotected-conductor", "X1", line)]


def test_battery_beside_a_load_makes_it_no_load_of_the_device_alone() -> None:
    """PRO-14: the fuse of the alternator's cable does not carry the starter."""
    assert {o.part for o in outcomes(SOUND, Verdict.PASSED) if o.check == "device-carries-load"} == {
        "F-SENSE", "F-MONITOR", "P1", "P2", "P3", "P4", "P5",
    }  # fmt: skip
