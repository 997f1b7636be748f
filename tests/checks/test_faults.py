"""Seed faults of short circuits: what a device can break, whether it opens at the far end, what the conductor withstands."""

from __future__ import annotations

import math

import pytest

from checker.finding import Verdict
from tests.small_yard import (
    LAW_ONLY,
    NEITHER,
    PARTS_FILE,
    SOUND,
    Yard,
    finding,
    found,
    not_assessed,
    outcomes,
    passed,
)

BOLT = "voltage: 32 V, interrupting: 10 kA"
MAIN_FUSE = "F-MAIN: {part: bolt-fuse, zone: LOCKER, rating: 150 A}"
ALT_FUSE = "F-ALT: {part: bolt-fuse, zone: LOCKER, rating: 80 A, mount: {line: BAT-H.pos}}"
CHARGER_FUSE = "F-CHARGER: {part: bolt-fuse, zone: LOCKER, rating: 30 A}"
FEEDER = "F-PANEL: {part: bolt-fuse, zone: LOCKER, rating: 60 A, mount: {line: BUS-P}}"
PUMP_ROUTE = "route: [cabin-way, engine-way]\n    tail: 0.5 m"

MAIN_A = 12.8 / (0.004 + 0.0172414 * 0.14986 / 33.624) + 60 + 20
"""At F-MAIN by hand: 12.8 V over 4 mohm and 5.9 in of 2 AWG at 20 C, with both charge sources: 3219.7 A."""


def breaks(capacity: str) -> Yard:
    """Return the yard with another interrupting capacity of its bolt fuses."""
    return SOUND.edit(BOLT, f"voltage: 32 V, interrupting: {capacity}")


# PRO-09: interrupting capacity


def test_device_that_cannot_break_what_can_flow_is_found_where_it_stands() -> None:
    """PRO-09: 3280 A at the post (12.8 V / 4 mohm, and 80 A of charge sources), 3220 A at the main fuse.

    Behind 10 cm of 10 AWG 3038 A can flow, so that the charger's fuse is sound.
    """
    yard = breaks("3.2 kA")
    assert found(yard) == [
        ("interrupting-capacity", "F-ALT", NEITHER, ALT_FUSE),
        ("interrupting-capacity", "F-MAIN", NEITHER, MAIN_FUSE),
    ]
    told = finding(yard, "interrupting-capacity", "F-MAIN")
    assert told.measure is not None
    assert told.measure.limit == pytest.approx(MAIN_A, rel=1e-5)
    assert told.remedy == "fit a device that can break 3300 A, or one ahead of it that can"
    told = finding(yard, "interrupting-capacity", "F-ALT")
    assert told.measure is not None
    assert told.measure.limit == pytest.approx(12.8 / 0.004 + 80)


@pytest.mark.parametrize("capacity", ["3280 A", "3.28 kA", "10 kA"])
def test_device_that_can_break_what_can_flow_is_sound(capacity: str) -> None:
    """PRO-09."""
    assert found(breaks(capacity)) == []


def test_batteries_in_parallel_add_to_what_a_device_must_break() -> None:
    """PRO-09: a second battery on the same posts; each of both adds 3.1 kA at the least."""
    yard = breaks("3280 A").without("M1:").edit(MAIN_FUSE, MAIN_FUSE.replace("}", ", mount: {line: BAT-H.pos}}"))
    role = "length: 2 in, size: 2/0 AWG, role: bank, reason: link of the bank, current: 40 A"
    twice = yard.edit("capacity: 100 Ah, ratio", "capacity: 200 Ah, ratio").also(
        "devices:\n  BAT-H2: {part: house-battery, zone: LOCKER, bank: HOUSE}\n"
        f"conductors:\n  L1: {{from: BAT-H2.pos, to: BAT-H.pos, {role}}}\n"
        f"  L2: {{from: BAT-H2.neg, to: BAT-H.neg, {role}}}\n"
    )
    assert found(yard) == []
    at_the_post = 12.8 / 0.004 + 12.8 / (0.004 + 2 * 0.0172414 * 0.0508 / 67.431) + 80
    told = finding(twice, "interrupting-capacity", "F-ALT")
    assert told.measure is not None
    assert told.measure.limit == pytest.approx(at_the_post, rel=1e-5)
    assert [(check, part) for check, part, _, _ in found(twice)] == [
        ("interrupting-capacity", name) for name in ("F-ALT", "F-CHARGER", "F-MAIN", "F-PANEL")
    ]


def test_device_whose_capacity_is_not_written_is_not_assessed_with_the_field() -> None:
    """PRO-09: what can flow is told all the same."""
    yard = SOUND.edit(f"{BOLT}, band", "voltage: 32 V, band")
    assert found(yard) == []
    assert not_assessed(yard) == [
        ("interrupting-capacity", "F-ALT", NEITHER, ALT_FUSE),
        ("interrupting-capacity", "F-CHARGER", NEITHER, CHARGER_FUSE),
        ("interrupting-capacity", "F-MAIN", NEITHER, MAIN_FUSE),
        ("interrupting-capacity", "F-PANEL", NEITHER, FEEDER),
    ]
    told = {o.part: o for o in outcomes(yard, Verdict.NOT_ASSESSED)}["F-MAIN"]
    assert told.missing == "interrupting"
    assert told.fault == "3220 A can flow here; what bolt-fuse can break is not written"


def test_battery_without_its_figures_leaves_every_device_not_assessed_with_the_fields() -> None:
    """PRO-09: one that is not known may feed any of them."""
    yard = SOUND.edit("emf_full: 12.8 V,\n    emf_low: 11.9 V, resistance_full: 4 mohm, resistance_low: 6 mohm, short_circuit: 3200 A}\n  start", "short_circuit: 3200 A}\n  start")  # fmt: skip
    told = [o for o in outcomes(yard, Verdict.NOT_ASSESSED) if o.check == "interrupting-capacity"]
    devices = {"F-MAIN", "F-PANEL", "F-ALT", "F-CHARGER", "F-SENSE", "F-MONITOR", "P1", "P2", "P3", "P4", "P5"}
    assert {o.part for o in told} == devices
    assert {o.missing for o in told} == {"emf_full, emf_low, resistance_full and resistance_low of its batteries"}
    studied = {"interrupting-capacity", "far-end-clearing", "conductor-withstand"}
    assert {check for check, _, _ in passed(yard)} & studied == set()


# PRO-15: the far end


def far_end_a(metres: float) -> float:
    """Reckon the current of a short circuit at the pump by hand, low battery and copper at 105 C.

    0.0172414 · 339.5/254.5 = 0.0230 ohm·mm²/m; 14 AWG 2.0809 mm², 6 AWG 13.295 mm², 2 AWG 33.624 mm².
    Battery 6 mohm; F-MAIN 0.3, SW-H 0.05, SHUNT 0.17, F-PANEL 0.3 and the breaker 10 mohm.
    """
    rho = 0.0172414 * 339.5 / 254.5
    cables = rho * (2 * metres / 2.0809 + 3.0 / 13.295 + 1.44986 / 33.624)
    return 11.9 / (0.006 + 0.01082 + cables)


def quick_latest_s(multiple: float) -> float:
    """Return the late edge of the band `quick` between 1.5 and 2 times the rating: 30 s to 4 s, log-log."""
    share = math.log(multiple / 1.5) / math.log(2 / 1.5)
    return float(30 * (4 / 30) ** share)


def pump_of(metres: float) -> Yard:
    """Return the yard under the law alone, which judges no drop, with another length of the pump's cable."""
    return LAW_ONLY.edit(PUMP_ROUTE, f"length: {metres} m")


@pytest.mark.parametrize("metres", [18, 20])
def test_short_circuit_at_the_far_end_of_a_long_run_that_opens_too_late_is_found(metres: float) -> None:
    """PRO-15: 28.3 A, 1.9 times the rating, at 18 m; the band may take 6 s."""
    assert found(pump_of(metres)) == [("far-end-clearing", "P3", NEITHER, "protect: 15 A")]
    told = finding(pump_of(metres), "far-end-clearing", "P3")
    assert told.measure is not None
    assert told.measure.value == pytest.approx(quick_latest_s(far_end_a(metres) / 15), rel=1e-3)
    assert told.path == ("P3", "PUMP.out", "PUMP.load.pos")


def test_short_circuit_at_the_far_end_that_opens_within_five_seconds_is_sound() -> None:
    """PRO-15: 29.8 A at 17 m open within 4.2 s."""
    assert quick_latest_s(far_end_a(17) / 15) < 5 < quick_latest_s(far_end_a(18) / 15)
    assert found(pump_of(17)) == []
    assert ("far-end-clearing", "P3", NEITHER) in passed(pump_of(17))


def test_device_without_a_band_is_not_assessed_at_the_far_end_with_the_field() -> None:
    """PRO-15."""
    yard = SOUND.edit("    band: quick\n", "")
    lines = {
        "P1": "protect: 5 A",
        "P2": "protect: 10 A",
        "P3": "protect: 15 A",
        "P4": "protect: 5 A",
        "P5": "protect: 5 A",
    }
    assert found(yard) == []
    assert not_assessed(yard) == [
        *(("far-end-clearing", name, NEITHER, line) for name, line in lines.items()),
        ("stalled-motor", "panel-breaker", NEITHER, "panel-breaker:"),
    ]
    told = outcomes(yard, Verdict.NOT_ASSESSED)
    assert {o.missing for o in told} == {"band"}
    assert [o.fault for o in told if o.part == "P2"] == [
        "62 A at LIGHTS.load.pos, but panel-breaker has no time-current band"
    ]


def test_device_in_the_engine_space_opens_sooner_by_its_band_s_factor() -> None:
    """PRO-15: the rating of 30 A is taken as 27 A there."""
    hot = SOUND.edit(CHARGER_FUSE, CHARGER_FUSE.replace("LOCKER", "ENGINE-SPACE"))
    by_zone = {
        name: next(
            o.measure.value for o in outcomes(yard, Verdict.PASSED)
            if (o.check, o.part) == ("far-end-clearing", "F-CHARGER") and o.measure is not None
        )
        for name, yard in (("cool", SOUND), ("hot", hot))
    }  # fmt: skip
    assert by_zone["hot"] < by_zone["cool"]


# PRO-04: what the conductor withstands


SLOW_TAIL = "      - {multiple: 100, earliest: 0.0002 s, latest: 0.0005 s}\n      - {multiple: 300, earliest: 0.00005 s, latest: 0.0001 s}\n"


def breaker_tail(latest: str) -> Yard:
    """Return the yard whose breakers take up to a given time for every current above 100 times their rating."""
    assert SLOW_TAIL in SOUND.files[PARTS_FILE]
    return SOUND.edit(SLOW_TAIL, f"      - {{multiple: 100, earliest: 0.0002 s, latest: {latest}}}\n")


def test_conductor_that_does_not_withstand_what_its_device_lets_through_is_found() -> None:
    """PRO-04, PRO-15: 18 AWG, 0.823 mm², from 105 C: k = 87, k²S² = 5180 A²s; 1901² · 1.5 ms = 5419 A²s."""
    yard = breaker_tail("0.0015 s")
    assert found(yard) == [("conductor-withstand", "LIGHTS.out", NEITHER, "cable: 18 AWG")]
    measure = finding(yard, "conductor-withstand", "LIGHTS.out").measure
    assert measure is not None
    assert measure.value == pytest.approx(1901**2 * 0.0015 / 1e6, rel=1e-3)
    assert measure.limit == pytest.approx((87.4 * 0.8235) ** 2 / 1e6, rel=5e-3)


def test_conductor_that_withstands_what_its_device_lets_through_is_sound() -> None:
    """PRO-04: 1901² · 1.4 ms = 5059 A²s."""
    yard = breaker_tail("0.0014 s")
    assert found(yard) == []
    assert ("conductor-withstand", "LIGHTS.out", NEITHER) in passed(yard)
