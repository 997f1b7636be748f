"""Apply the remedy that a finding prints: the finding is gone under all limit sets, and none is new."""

from __future__ import annotations

import re
import shutil
from pathlib import Path

import pytest

from checker.pipeline import check_fleet
from checker.units import awg_text
from tests.small_yard import BOTH, LAW, NEITHER, PRACTICE, SOUND, TODAY, Yard, finding, found, the_hull

ROOT = Path(__file__).resolve().parents[2]

SIZES = [
    awg_text(name)
    for name in ["20", "18", "16", "14", "12", "10", "8", "6", "4", "3", "2", "1", "0", "00", "000", "0000"]
]


def printed(yard: Yard, check: str, part: str, pattern: str, limit_set: str = PRACTICE) -> str:
    """Return what a remedy names; the pattern has one group."""
    remedy = finding(yard, check, part, limit_set).remedy
    match = re.search(pattern, remedy)
    assert match, remedy
    return match[1]


def gauge(yard: Yard, check: str, part: str, limit_set: str = PRACTICE) -> str:
    """Return the gauge that a remedy names."""
    return printed(yard, check, part, r"use (\S+ AWG)", limit_set)


def thinner(size: str) -> str:
    """Return the next thinner gauge."""
    return SIZES[SIZES.index(size) - 1]


def is_mended(before: Yard, after: Yard, check: str, part: str) -> bool:
    """Tell whether a finding is gone; nothing may be found that was not found before."""
    was, now = ({told[:2] for told in found(yard)} for yard in (before, after))
    assert (check, part) in was
    assert now <= was, sorted(now - was)
    return (check, part) not in now


HORN = (
    "devices:\n  HORN: {part: horn, zone: BOW}\n"
    "circuits:\n  HORN:\n    name: Horn\n    service: horn\n    always_on: heard aboard\n"
    "    current: 5 A\n    conductors:\n"
    "      X1: {from: PANEL, to: HORN.pos, size: 16 AWG, length: 1 m}\n"
    "      X2: {from: HORN.neg, to: PANEL-N, size: 6 AWG, length: 1 m}\n"
)
WITH_HORN = SOUND.also_parts("horn: {kind: load, voltage: 12 V, current: 5 A}").also(HORN)
ALT_LEAD = "from: ALT.B, to: F-ALT.load, size: 6 AWG"
LARGE_ALT_FUSE = SOUND.edit("rating: 80 A", "rating: 200 A")
HOT_ALTERNATOR = SOUND.edit("60 A\n    conductors:\n      A1", "103 A\n    conductors:\n      A1")
LARGE_BREAKER = SOUND.edit("protect: 10 A\n    legend: LIGHTS 10 A", "protect: 30 A").edit(
    "current: 3 A, max_device: 10 A", "current: 3 A, max_device: 30 A"
)
THIN_LIGHTS = SOUND.edit("cable: 18 AWG", "cable: 20 AWG")
LONG_LIGHTS = SOUND.edit("route: [cabin-way]\n    tail: 1 m", "length: 32 ft")
LONG_BOW_LIGHT = SOUND.edit("length: 16 ft 5 in", "current: 2 A\n    length: 7 m")
THIN_SENSE = SOUND.edit(
    "service: sense\n    current: 0.1 A",
    "service: engine\n    always_on: the engine maker leaves it live\n    current: 0.1 A",
).edit("to: REGULATOR.sense, size: 16 AWG", "to: REGULATOR.sense, size: 18 AWG")
BACK = "back: {size: 18 AWG, length: 4 m}"
THIN_BACK = (
    SOUND.edit("cable: 14 AWG", f"cable: 14 AWG\n    bare_tail: 1 in\n    {BACK}")
    .edit("protect: 15 A", "protect: 20 A")
    .edit("current: 8 A, max_device: 15 A", "current: 8 A, max_device: 20 A")
)

GAUGE_CASES = [
    pytest.param(HOT_ALTERNATOR, "ampacity", "A1", ALT_LEAD, id="ampacity"),
    pytest.param(THIN_SENSE, "minimum-size", "V2", "to: REGULATOR.sense, size: 18 AWG", id="smallest size, single"),
    pytest.param(THIN_LIGHTS, "minimum-size", "LIGHTS.out", "cable: 20 AWG", id="smallest size, in a sheath"),
    pytest.param(LARGE_ALT_FUSE, "device-rating", "A1", ALT_LEAD, id="device, single"),
    pytest.param(LARGE_BREAKER, "device-rating", "LIGHTS.out", "cable: 18 AWG", id="device, both cores"),
    pytest.param(WITH_HORN, "size-step", "X1", "to: HORN.pos, size: 16 AWG", id="step"),
    pytest.param(LONG_LIGHTS, "voltage-drop", "LIGHTS", "cable: 18 AWG", id="drop, general"),
    pytest.param(LONG_BOW_LIGHT, "voltage-drop", "BOW-LIGHT", "cable: 16 AWG\n    current: 2 A", id="drop, critical"),
    pytest.param(THIN_BACK, "return-protection", "PUMP.back", BACK, id="return of a branch"),
]


@pytest.mark.parametrize(("yard", "check", "part", "old"), GAUGE_CASES)
def test_printed_gauge_mends_the_finding_and_makes_no_other(yard: Yard, check: str, part: str, old: str) -> None:
    """REMEDY: one gauge for all limit sets; the one below it does not do."""
    size = gauge(yard, check, part)
    present = re.search(r"\S+ AWG", old)
    assert present
    after = yard.edit(old, old.replace(present[0], size))
    assert is_mended(yard, after, check, part)
    assert found(after) == []
    if thinner(size) != present[0]:
        assert found(yard.edit(old, old.replace(present[0], thinner(size)))) != []


def test_printed_gauge_is_the_same_under_both_sets() -> None:
    """REMEDY: a gauge that one set asks for and the other refuses helps nobody."""
    for yard, check, part in ((HOT_ALTERNATOR, "ampacity", "A1"), (LARGE_ALT_FUSE, "device-rating", "A1")):
        assert gauge(yard, check, part, LAW) == gauge(yard, check, part, PRACTICE)


def test_printed_gauges_of_all_conductors_of_a_circuit_mend_the_circuit() -> None:
    """REMEDY: the charger's three conductors are each told."""
    yard = SOUND.edit("    current: 20 A\n", "    current: 61 A\n")
    assert [told[:3] for told in found(yard)] == [("ampacity", part, BOTH) for part in ("C1", "C2", "C3")]
    after = yard
    for part, end in (
        ("C1", "to: F-CHARGER.load"),
        ("C2", "CHARGER.neg, to: BUS-N"),
        ("C3", "line, to: BAT-H.pos"),
    ):
        after = after.edit(f"{end}, size: 10 AWG", f"{end}, size: {gauge(yard, 'ampacity', part)}")
    assert found(after) == []


def test_printed_size_of_a_return_mends_it() -> None:
    """REMEDY."""
    old = "from: PANEL-N, to: BUS-N, size: 8 AWG"
    yard = SOUND.edit(old.replace("8", "6"), old)
    size = printed(yard, "return-size", "D2", r"use (\S+ AWG) back", NEITHER)
    assert found(yard.edit(old, old.replace("8 AWG", size))) == []


def made(rating: str, made_at: tuple[int, ...]) -> str:
    """Return the largest rating that a series is made at, up to one."""
    return f"{max(one for one in made_at if one <= float(rating.split(maxsplit=1)[0]))} A"


def test_printed_rating_mends_the_finding_and_makes_no_other() -> None:
    """REMEDY: the remedy says so much or less; the next larger that the series is made at does not do."""
    pattern = r"fit F-ALT at (\S+ A) or less"
    ratings = {printed(LARGE_ALT_FUSE, "device-rating", "A1", pattern, one) for one in (LAW, PRACTICE)}
    (rating,) = ratings
    fitted = made(rating, (30, 60, 80, 125, 150, 200))
    assert found(LARGE_ALT_FUSE.edit("rating: 200 A", f"rating: {fitted}")) == []
    assert found(LARGE_ALT_FUSE.edit("rating: 200 A", "rating: 125 A")) != []


def test_printed_rating_is_one_that_the_device_is_made_at() -> None:
    """REMEDY: F-ALT's series is made at 80 A and at 125 A, and at nothing between."""
    rating = printed(LARGE_ALT_FUSE, "device-rating", "A1", r"fit F-ALT at (\S+ A) or less")
    assert found(LARGE_ALT_FUSE.edit("rating: 200 A", f"rating: {rating}")) == []


def test_printed_rating_of_a_breaker_mends_a_branch() -> None:
    """REMEDY."""
    rating = printed(LARGE_BREAKER, "device-rating", "LIGHTS.out", r"fit P2 at (\S+ A) or less")
    assert rating == "15 A"
    assert found(LARGE_BREAKER.edit("feed: P2\n    protect: 30 A", f"feed: P2\n    protect: {rating}")) == []
    assert found(LARGE_BREAKER.edit("feed: P2\n    protect: 30 A", "feed: P2\n    protect: 20 A")) != []


def test_rating_that_the_maker_allows_mends_a_load_s_device() -> None:
    """REMEDY."""
    yard = SOUND.edit("feed: P1\n    protect: 5 A", "feed: P1\n    protect: 10 A")
    rating = printed(yard, "maker-device", "P1", r"fit (\S+ A) or less", NEITHER)
    assert found(yard.edit("feed: P1\n    protect: 10 A", f"feed: P1\n    protect: {rating}")) == []


@pytest.mark.parametrize(("pattern", "new"), [(r"a bus rated (\S+ A)", "rating: {}"), (r"at most (\S+ A)", "")])
def test_printed_rating_of_a_bus_or_of_the_device_ahead_mends_it(pattern: str, new: str) -> None:
    """REMEDY: the panel's breakers let out 40 A; a feeder fuse of 30 A holds it to that."""
    yard = SOUND.edit("bus-100: {kind: bus, rating: 100 A", "bus-100: {kind: bus, rating: 39 A")
    value = printed(yard, "bus-rating", "PANEL", pattern, NEITHER)
    if new:
        after = yard.edit("rating: 39 A", new.format(value))
    else:
        after = yard.edit("rating: 60 A, mount", f"rating: {made(value, (30, 60, 80))}, mount")
    assert found(after) == []


@pytest.mark.parametrize("limit_set", [LAW, PRACTICE])
def test_printed_device_at_a_step_mends_it_under_all_sets(limit_set: str) -> None:
    """REMEDY: 7 in of the thin tail ahead of a device of the rating that is printed."""
    rating = printed(WITH_HORN, "size-step", "X1", r"at most (\S+ A) at the step", limit_set)
    fused = WITH_HORN.edit(
        "X1: {from: PANEL, to: HORN.pos,", "X3: {from: PANEL, to: F-HORN.line, size: 16 AWG, length: 7 in}\n"
        "      X1: {from: F-HORN.load, to: HORN.pos,",
    ).also("devices:\n  F-HORN: {part: horn-fuse, zone: CABIN}\n")  # fmt: skip
    after = fused.also_parts(f"horn-fuse: {{kind: fuse, voltage: 32 V, rating: {rating}}}")
    assert found(after) == []


@pytest.mark.parametrize("limit_set", [LAW, PRACTICE])
def test_printed_fuse_near_the_source_mends_an_unprotected_conductor_under_all_sets(limit_set: str) -> None:
    """REMEDY."""
    yard = WITH_HORN.edit("X1: {from: PANEL,", "X1: {from: BAT-H.pos,")
    rating = printed(yard, "unprotected-conductor", "X1", r"at most (\S+ A) within", limit_set)
    after = yard.edit("X1: {from: BAT-H.pos,", "X1: {from: F-HORN.load,").also(
        "devices:\n  F-HORN: {part: horn-fuse, zone: LOCKER, mount: {line: BAT-H.pos}}\n"
    ).also_parts(f"horn-fuse: {{kind: fuse, voltage: 32 V, rating: {rating}}}")  # fmt: skip
    assert found(after) == []


@pytest.mark.parametrize("check", ["voltage-drop", "voltage-drop-from-bank"])
@pytest.mark.parametrize("length", ["7 m", "23 ft"])
@pytest.mark.parametrize("current", ["2 A", "1.9 A"])
def test_printed_length_mends_the_drop(check: str, length: str, current: str) -> None:
    """REMEDY: from the bank it mends the circuit alone as well."""
    yard = SOUND.edit("length: 16 ft 5 in", f"current: {current}\n    length: {length}")
    longest = printed(yard, check, "BOW-LIGHT", r"no longer than (\S+ (?:m|ft))")
    after = yard.edit(f"length: {length}", f"length: {longest}")
    assert is_mended(yard, after, check, "BOW-LIGHT")
    if check == "voltage-drop-from-bank":
        assert found(after) == []


def test_printed_length_in_feet_is_not_rounded_up_over_the_limit() -> None:
    """REMEDY: at 1.1 A the limit from the bank is 19.384 ft."""
    yard = SOUND.edit("length: 16 ft 5 in", "current: 1.1 A\n    length: 30 ft")
    longest = printed(yard, "voltage-drop-from-bank", "BOW-LIGHT", r"no longer than (\S+ ft)")
    assert found(yard.edit("length: 30 ft", f"length: {longest}")) == []


FAR_FUSE = SOUND.edit("to: F-MAIN.line, size: 2 AWG, length: 5.9 in", "to: F-MAIN.line, size: 2 AWG, length: 0.3 m")


@pytest.mark.parametrize("pattern", [r"within (\S+ m) \(", r"within \S+ m \((\S+ in)\)"])
def test_printed_distance_mends_a_device_that_is_too_far_off(pattern: str) -> None:
    """REMEDY: in metres and in inches alike."""
    near = printed(FAR_FUSE, "protection-distance", "M1", pattern)
    assert found(FAR_FUSE.edit("length: 0.3 m}\n      M2", f"length: {near}}}\n      M2")) == []


def test_printed_sheath_mends_a_device_that_is_too_far_off() -> None:
    """REMEDY: the law asks for the reason besides, and does not pass without it."""
    assert "lay all of it in a sheath or conduit" in finding(FAR_FUSE, "protection-distance", "M1", LAW).remedy
    assert found(FAR_FUSE.edit("length: 0.3 m}\n      M2", "length: 0.3 m, enclosed: full}\n      M2")) == []


@pytest.mark.parametrize("pattern", [r"within (\S+ m) \(", r"within \S+ m \((\S+ in)\)"])
def test_printed_length_out_of_the_sheath_mends_it(pattern: str) -> None:
    """REMEDY."""
    yard = SOUND.edit("bare_tail: 6 in", "bare_tail: 32 in")
    bare = printed(yard, "sheath-exit", "LIGHTS.out", pattern)
    assert found(yard.edit("bare_tail: 32 in", f"bare_tail: {bare}")) == []


def test_printed_gauge_instead_of_a_shorter_tail_mends_it() -> None:
    """REMEDY."""
    yard = SOUND.edit("bare_tail: 6 in", "bare_tail: 32 in")
    assert found(yard.edit("cable: 18 AWG", f"cable: {gauge(yard, 'sheath-exit', 'LIGHTS.out')}")) == []


def test_printed_gauge_of_a_feed_names_the_return_that_would_be_left_too_thin() -> None:
    """REMEDY: the charger's fuse is too large; the lead C1 is told to grow, and its return C2 with it."""
    yard = SOUND.edit("F-CHARGER: {part: bolt-fuse, zone: LOCKER, rating: 30 A}",
                      "F-CHARGER: {part: bolt-fuse, zone: LOCKER, rating: 125 A}")  # fmt: skip
    lead = "to: F-CHARGER.load, size: 10 AWG"
    size = gauge(yard, "device-rating", "C1")
    assert "and for its return C2" in finding(yard, "device-rating", "C1", LAW).remedy
    return_lead = next(line for line in yard.files["classes/skiff/class.yaml"].splitlines() if "C2: {" in line)
    after = yard.edit(lead, lead.replace("10 AWG", size)).edit(return_lead, return_lead.replace("10 AWG", size))
    assert is_mended(yard, after, "device-rating", "C1")


def test_gauge_that_the_solved_drop_asks_for_takes_the_finding_away(tmp_path: Path) -> None:
    """REMEDY: the inverter's feed in 4 AWG loses too much; 1 AWG is asked for, does, and 2 AWG does not."""
    folder = tmp_path / "yard"
    shutil.copytree(ROOT / "fleet_example", folder)
    trunk = folder / "classes/tindral-36/trunk.yaml"
    text = trunk.read_text(encoding="utf-8")

    def drops(gauge: str) -> list[str]:
        feed = "W054: {from: F-INV.load, to: INV.pos, size: "
        trunk.write_text(text.replace(f"{feed}2/0 AWG", f"{feed}{gauge} AWG"), encoding="utf-8")
        result = check_fleet(folder, today=TODAY, only=("TND-031",))
        return [o.remedy for o in the_hull(result, "TND-031").news if o.check == "solved-drop"]

    (remedy,) = drops("4")
    assert remedy == "use 1 AWG or larger for its own conductors, which lose 0.294 V of it, or shorten them"
    assert len(drops("2")) == 1
    assert drops("1") == []
