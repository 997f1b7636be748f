"""Seed faults of voltage drop, of the lengths it is reckoned with, and of return sizes."""

from __future__ import annotations

import pytest

from tests.small_yard import BOTH, LAW_ONLY, NEITHER, PRACTICE, SOUND, Yard, found

FEED_OUT = "D1: {from: F-PANEL.load, to: PANEL, size: 6 AWG, length: 1.5 m}"
FEED_BACK = "D2: {from: PANEL-N, to: BUS-N, size: 6 AWG, length: 1.5 m, colour: yellow}"


def bow_light_of(length: str) -> Yard:
    """Return the yard with a bow light of 2 A at the end of 16 AWG.

    Alone: E = 10.75 x 2 A x 2 L / 2582.7 cmil; 3 % of 12 V is reached at L = 21.62 ft = 6.590 m.
    From the bank the feeders lose more: 10.75 x 30 A x 9.843 ft / 26251 cmil = 0.1209 V in 6 AWG,
    and 10.75 x 80 A x 4.757 ft / 66371 cmil = 0.0616 V in 2 AWG, of which the piece ahead of the
    fuse is 5.9 in. That leaves 0.1775 V, which is L = 10.66 ft = 3.249 m.
    """
    return SOUND.edit("length: 16 ft 5 in", f"current: 2 A\n    length: {length}")


def lights_of(length: str) -> Yard:
    """Return the yard with cabin lights of 3 A at the end of 18 AWG, in the 10 % group.

    Alone: 10.75 x 3 A x 2 L / 1624.3 cmil; 1.2 V is reached at L = 30.22 ft = 9.211 m. Less the
    0.1825 V of the feeders, from the bank at L = 25.62 ft = 7.810 m.
    """
    return SOUND.edit("route: [cabin-way]\n    tail: 1 m", f"length: {length}")


@pytest.mark.parametrize("length", ["21 ft 8 in", "6.6 m", "260 in"])
def test_drop_above_3_percent_on_a_navigation_light_is_found(length: str) -> None:
    """CON-07: from the bank it is more, so that check finds it too."""
    assert found(bow_light_of(length)) == [
        ("voltage-drop", "BOW-LIGHT", PRACTICE, "cable: 16 AWG"),
        ("voltage-drop-from-bank", "BOW-LIGHT", PRACTICE, "cable: 16 AWG"),
    ]


@pytest.mark.parametrize("length", ["21 ft 7 in", "6.58 m", "259 in", "3.26 m", "10 ft 9 in"])
def test_drop_up_to_3_percent_alone_is_found_only_from_the_bank(length: str) -> None:
    """CON-07: the circuit alone keeps its limit; the feeders use up the allowance."""
    assert found(bow_light_of(length)) == [("voltage-drop-from-bank", "BOW-LIGHT", PRACTICE, "cable: 16 AWG")]


@pytest.mark.parametrize("length", ["10 ft 7 in", "3.24 m"])
def test_drop_up_to_3_percent_from_the_bank_is_sound(length: str) -> None:
    """CON-07."""
    assert found(bow_light_of(length)) == []


@pytest.mark.parametrize("length", ["30 ft 3 in", "9.22 m"])
def test_drop_above_10_percent_elsewhere_is_found(length: str) -> None:
    """CON-08: from the bank it is more, and in operation the devices on the way drop too."""
    assert found(lights_of(length)) == [
        ("solved-drop", "LIGHTS", PRACTICE, "cable: 18 AWG"),
        ("voltage-drop", "LIGHTS", PRACTICE, "cable: 18 AWG"),
        ("voltage-drop-from-bank", "LIGHTS", PRACTICE, "cable: 18 AWG"),
    ]


@pytest.mark.parametrize("length", ["25 ft 8 in", "7.82 m"])
def test_drop_up_to_10_percent_alone_is_found_only_from_the_bank(length: str) -> None:
    """CON-08."""
    assert found(lights_of(length)) == [("voltage-drop-from-bank", "LIGHTS", PRACTICE, "cable: 18 AWG")]


@pytest.mark.parametrize("length", ["30 ft 2 in", "9.2 m"])
def test_drop_just_below_10_percent_alone_is_found_from_the_bank_and_in_operation(length: str) -> None:
    """CON-08, CON-09."""
    assert found(lights_of(length)) == [
        ("solved-drop", "LIGHTS", PRACTICE, "cable: 18 AWG"),
        ("voltage-drop-from-bank", "LIGHTS", PRACTICE, "cable: 18 AWG"),
    ]


@pytest.mark.parametrize("length", ["25 ft 7 in", "7.8 m"])
def test_drop_up_to_10_percent_from_the_bank_is_sound(length: str) -> None:
    """CON-08."""
    assert found(lights_of(length)) == []


def test_law_alone_judges_no_drop() -> None:
    """CON-07: the federal rule has no limit on the drop."""
    yard = LAW_ONLY.edit("length: 16 ft 5 in", "current: 2 A\n    length: 60 ft")
    assert found(yard) == []


def test_yard_may_hold_a_service_to_the_critical_group() -> None:
    """CON-07: 5 % is sound for lighting, until the yard's own rule calls lighting critical."""
    yard = lights_of("4.6 m")
    strict = yard.edit("name: Small Yard\n", "name: Small Yard\nhouse: {drop_critical: [lighting]}\n")
    assert found(yard) == []
    assert [(check, part) for check, part, _, _ in found(strict)] == [
        ("solved-drop", "LIGHTS"),
        ("voltage-drop", "LIGHTS"),
        ("voltage-drop-from-bank", "LIGHTS"),
    ]


def plotter_measured(length: str) -> Yard:
    """Return the yard with a measured length of the plotter's cable, whose route adds up to 2.5 m."""
    route = "route: [cabin-way]\n    tail: 0.5 m"
    return SOUND.edit(route, f"{route}\n    length: {length}")


@pytest.mark.parametrize("length", ["5 m", "4.2 m", "1.4 m", "4 ft 10 in"])
def test_length_far_from_its_route_is_found_for_both_cores(length: str) -> None:
    """CON-10: 5 m is the way out and back in one figure."""
    assert found(plotter_measured(length)) == [
        ("one-way-length", "PLOTTER.back", NEITHER, f"length: {length}"),
        ("one-way-length", "PLOTTER.out", NEITHER, f"length: {length}"),
    ]


@pytest.mark.parametrize("length", ["2.5 m", "4.17 m", "1.5 m", "4 ft 11.06 in", "8 ft 3 in"])
def test_length_near_its_route_is_sound(length: str) -> None:
    """CON-10."""
    assert found(plotter_measured(length)) == []


@pytest.mark.parametrize("length", ["3 m", "9 ft 10 in"])
def test_length_of_exactly_twice_the_return_is_found_at_the_feed(length: str) -> None:
    """CON-10."""
    line = FEED_OUT.replace("1.5 m", length)
    assert found(SOUND.edit(FEED_OUT, line)) == [("one-way-length", "D1", NEITHER, line)]


@pytest.mark.parametrize("length", ["2.98 m", "3.02 m", "1.5 m"])
def test_length_near_twice_the_return_is_sound(length: str) -> None:
    """CON-10: a cable may be longer than its return by another way."""
    assert found(SOUND.edit(FEED_OUT, FEED_OUT.replace("1.5 m", length))) == []


def test_conductor_of_no_length_is_found() -> None:
    """CON-10: its twin, a fuse mounted on its post, is no conductor at all."""
    line = "C3: {from: F-CHARGER.line, to: BAT-H.pos, size: 10 AWG, length: 0 m}"
    assert found(SOUND.edit(line.replace("0 m", "0.1 m"), line)) == [("one-way-length", "C3", NEITHER, line)]


def test_return_thinner_than_its_feed_is_found_at_the_return() -> None:
    """CON-16: 8 AWG bears what the feeder's device lets through; it is thinner all the same."""
    line = FEED_BACK.replace("6 AWG", "8 AWG")
    assert found(SOUND.edit(FEED_BACK, line)) == [("return-size", "D2", NEITHER, line)]


def pump_back(size: str, breaker: str) -> Yard:
    """Return the yard with another return of the pump, and a larger breaker that its maker allows."""
    back = f"    bare_tail: 1 in\n    back: {{size: {size}, length: 4 m}}\n"
    yard = SOUND.edit("    cable: 14 AWG\n", f"    cable: 14 AWG\n{back}")
    yard = yard.edit("current: 8 A, max_device: 15 A", "current: 8 A, max_device: 30 A")
    return yard.edit("    protect: 15 A\n", f"    protect: {breaker}\n")


def test_return_of_a_branch_that_cannot_bear_the_breaker_of_its_feed_is_found() -> None:
    """CON-16: back, 18 AWG bears 20 A x 0.85 (engine space) x 0.7 (two cores) = 11.9 A.

    The next standard rating is 15 A, so that the voluntary set refuses 20 A; the law allows
    1.5 x 17 A = 25.5 A. The return is thinner than the feed as well.
    """
    line = "back: {size: 18 AWG, length: 4 m}"
    assert found(pump_back("18 AWG", "20 A")) == [
        ("return-protection", "PUMP.back", PRACTICE, line),
        ("return-size", "PUMP.back", NEITHER, line),
    ]


def test_return_of_a_branch_that_bears_the_breaker_of_its_feed_is_found_only_for_its_size() -> None:
    """CON-16."""
    line = "back: {size: 18 AWG, length: 4 m}"
    assert found(pump_back("18 AWG", "15 A")) == [("return-size", "PUMP.back", NEITHER, line)]
    assert found(pump_back("14 AWG", "20 A")) == []


def test_return_of_a_branch_is_like_its_feed_in_all_that_is_left_out() -> None:
    """CON-16: only the size differs, so that the length is that of the route."""
    yard = SOUND.edit("    cable: 14 AWG\n", "    cable: 14 AWG\n    back: {size: 12 AWG}\n")
    assert found(yard) == []


@pytest.mark.parametrize("role", ["inside-housing", "resistance"])
def test_thin_return_that_its_role_frees_from_the_rules_of_size_is_sound(role: str) -> None:
    """CON-16, T-28, T-29."""
    back = "V3: {from: REGULATOR.gnd, to: BUS-N, size: 16 AWG"
    free = SOUND.edit(back, back.replace("16 AWG", f"18 AWG, role: {role}, reason: inside the regulator's housing"))
    assert found(free) == []
    assert ("return-size", "V3", NEITHER) in {told[:3] for told in found(SOUND.edit(back, back.replace("16", "18")))}


@pytest.mark.parametrize("size", ["6 AWG", "4 AWG"])
def test_return_as_thick_as_its_feed_or_thicker_is_sound(size: str) -> None:
    """CON-16."""
    assert found(SOUND.edit(FEED_BACK, FEED_BACK.replace("6 AWG", size))) == []


def test_lengths_in_feet_and_in_metres_point_at_the_same_fault() -> None:
    """CON-07: 21 ft 8 in is 6.604 m."""
    assert found(bow_light_of("21 ft 8 in")) == found(bow_light_of("6.604 m"))
    assert BOTH not in {sets for _, _, sets, _ in found(bow_light_of("6.604 m"))}
