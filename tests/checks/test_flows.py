"""Seed faults that only the solved network shows: currents, drops, voltages and ratings in each condition."""

from __future__ import annotations

import pytest

from checker.finding import Verdict
from tests.small_yard import (
    BOTH,
    LAW,
    LAW_ONLY,
    NEITHER,
    PRACTICE,
    SOUND,
    Told,
    Yard,
    check_yard,
    finding,
    found,
    not_assessed,
    outcomes,
    passed,
)

UNDER_WAY = "loads: {PLOTTER: 1 A, LIGHTS: 3 A, PUMP: 8 A, BOW-LIGHT: 0.5 A, SENSOR: 0.2 A}"
LIGHTS_ROUTE = "route: [cabin-way]\n    tail: 1 m"
LIGHTS_PART = "cabin-lights: {kind: load,"
BOW_LIGHT_PART = "bow-light: {kind: load, voltage: 12 V, current: 0.5 A,"
FEEDER = "F-PANEL: {part: bolt-fuse, zone: LOCKER, rating: 60 A, mount: {line: BUS-P}}"
BATTERY = "emf_full: 12.8 V,\n    emf_low: 11.9 V, resistance_full: 4 mohm, resistance_low: 6 mohm, short_circuit: 3200 A}\n  start"


def lights_draw(current: str, yard: Yard = SOUND) -> Yard:
    """Return a yard whose cabin lights draw a current under way."""
    return yard.edit(UNDER_WAY, UNDER_WAY.replace("LIGHTS: 3 A", f"LIGHTS: {current}"))


def condition(name: str, loads: str, more: str = "") -> str:
    """Return a condition more, as a section of the class."""
    return f"conditions:\n  {name}:\n    loads: {{{loads}}}\n{more}"


def winch(yard: Yard, amps: str, fuse: str, *conductors: str) -> Yard:
    """Return a yard with a winch on a fuse of its own at the house battery, and a condition that runs it."""
    lines = "".join(f"      {line}\n" for line in conductors)
    part = f"winch: {{kind: load, voltage: 12 V, current: {amps}}}"
    return yard.also_parts(part).also(
        "devices:\n  WINCH: {part: winch, zone: BOW}\n"
        f"  F-WINCH: {{part: bolt-fuse, zone: LOCKER, rating: {fuse}, mount: {{line: BAT-H.pos}}}}\n"
        f"circuits:\n  WINCH:\n    name: Winch\n    service: windlass\n    current: {amps}\n"
        f"    always_on: locked by its own key\n    conductors:\n{lines}"
        + condition("anchoring", f"WINCH: {amps}, PLOTTER: 1 A")
    )


def galley(amps: str, more: str = "") -> Yard:
    """Return the yard with three heaters of 20 A breakers on the panel, and a condition that runs them."""
    heaters = "".join(
        f"  HEAT{n}:\n    name: Heater {n}\n    service: heater\n    feed: P{5 + n}\n    protect: 20 A\n"
        "    cable: 10 AWG\n    length: 2 m\n    load: heater\n    zone: CABIN\n"
        for n in (1, 2, 3)
    )
    part = "heater: {kind: load, voltage: 12 V, current: 16 A, max_device: 20 A}"
    loads = ", ".join(f"HEAT{n}: {amps}" for n in (1, 2, 3))
    return SOUND.also_parts(part).also(f"circuits:\n{heaters}" + condition("cooking", f"{loads}{more}"))


# LOD-03: the working point


def constant_power(yard: Yard) -> Yard:
    """Return a yard whose cabin lights draw a constant power: the lower the voltage, the more current."""
    return yard.edit(LIGHTS_PART, f"{LIGHTS_PART} model: constant-power,")


def test_power_that_the_network_cannot_carry_is_a_finding_at_the_condition_and_no_crash() -> None:
    """LOD-03: 40 A at 12 V are 480 W; 18 AWG of 3 m out and back is 0.13 ohm: at most 12²/(4·0.15), 240 W."""
    yard = constant_power(lights_draw("40 A"))
    assert found(yard) == [("working-point", "under-way", NEITHER, "under-way:")]
    assert "full batteries the network cannot feed LIGHTS" in finding(yard, "working-point", "under-way").fault


def test_power_that_the_network_can_carry_has_its_working_point() -> None:
    """LOD-03: the sound twin draws 36 W."""
    yard = constant_power(SOUND)
    assert found(yard) == []
    assert {("working-point", name, NEITHER) for name in ("under-way", "moored", "start")} <= passed(yard)


def test_load_of_constant_power_is_judged_at_the_low_voltage_that_it_sees() -> None:
    """LOD-03: 3 A at 12 V become 3.3 A at 10.9 V, and lose 10.01 % instead of 9.2 %."""
    yard = SOUND.edit(LIGHTS_ROUTE, "length: 7.8 m").also(condition("evening", "LIGHTS: 3 A, BOW-LIGHT: 0.5 A"))
    assert found(yard) == []
    assert found(constant_power(yard)) == [("solved-drop", "LIGHTS", PRACTICE, "cable: 18 AWG")]
    assert finding(constant_power(yard), "solved-drop", "LIGHTS").state == "condition evening"


@pytest.mark.parametrize(
    "gone", ["emf_full: 12.8 V,\n    ", "emf_low: 11.9 V, ", "resistance_full: 4 mohm, ", "resistance_low: 6 mohm, "]
)
def test_battery_without_a_figure_leaves_the_conditions_not_assessed_with_the_fields_to_fill_in(gone: str) -> None:
    yard = SOUND.edit(BATTERY, BATTERY.replace(gone, ""))
    assert found(yard) == []
    assert ("working-point", "conditions", NEITHER, "class:") in not_assessed(yard)
    told = next(o for o in outcomes(yard, Verdict.NOT_ASSESSED) if o.check == "working-point")
    assert told.missing == "emf_full, emf_low, resistance_full and resistance_low of its batteries"
    assert "BAT-H" in told.fault
    solved = {"solved-ampacity", "solved-drop", "solved-rating", "minimum-voltage"}
    assert {check for check, _, _ in passed(yard)} & solved == set()


# CON-01, CON-11, CON-19, RET-06, T-10, T-27: solved currents


def test_conductor_that_carries_more_than_it_bears_in_a_condition_is_found_out_and_back() -> None:
    """CON-01: 14 A for 18 AWG in two cores. The breaker of 10 A and the drop follow."""
    yard = lights_draw("14.5 A")
    assert found(yard) == [
        ("solved-ampacity", "LIGHTS.back", PRACTICE, "cable: 18 AWG"),
        ("solved-ampacity", "LIGHTS.out", PRACTICE, "cable: 18 AWG"),
        ("solved-drop", "LIGHTS", PRACTICE, "cable: 18 AWG"),
        ("solved-rating", "P2", NEITHER, "protect: 10 A"),
    ]
    assert finding(yard, "solved-ampacity", "LIGHTS.out").state == "condition under-way"


def test_conductor_that_bears_what_it_carries_in_every_condition_is_sound() -> None:
    """CON-01."""
    yard = lights_draw("7 A")
    assert found(yard) == []
    assert {("solved-ampacity", "LIGHTS.out", one) for one in (LAW, PRACTICE)} <= passed(yard)


def parallel_pair(second: str) -> Yard:
    """Return a winch of 140 A on two conductors of 6 AWG, 120 A each; the first is 3 m long."""
    return winch(
        LAW_ONLY, "140 A", "150 A",
        "X1: {from: F-WINCH.load, to: WINCH.pos, size: 6 AWG, length: 3 m, current: 70 A}",
        f"X2: {{from: F-WINCH.load, to: WINCH.pos, {second}, current: 70 A}}",
        "X3: {from: WINCH.neg, to: BUS-N, size: 1/0 AWG, length: 1 m}",
    )  # fmt: skip


def test_shorter_one_of_two_parallel_conductors_is_found_with_the_one_beside_it() -> None:
    """CON-11: 3 m and 0.4 m share 140 A as 16.5 A to 123.5 A."""
    line = "X2: {from: F-WINCH.load, to: WINCH.pos, size: 6 AWG, length: 0.4 m, current: 70 A}"
    yard = parallel_pair("size: 6 AWG, length: 0.4 m")
    assert found(yard) == [("solved-ampacity", "X2", LAW, line)]
    told = finding(yard, "solved-ampacity", "X2")
    assert told.fault.endswith("it runs parallel to X1")
    assert told.remedy == "make parallel conductors equal in size and length"
    assert told.measure is not None
    assert told.measure.value == pytest.approx(140 * 3 / 3.4)


@pytest.mark.parametrize("length", ["3 m", "2 m", "9 ft 10.11 in"])
def test_two_parallel_conductors_of_equal_length_or_nearly_are_sound(length: str) -> None:
    """T-10."""
    assert found(parallel_pair(f"size: 6 AWG, length: {length}")) == []


PANEL_N = "PANEL-N: {part: bus-100, zone: CABIN}"


def winch_back(amps: str, to: str) -> Yard:
    """Return a winch that returns to a bus of 250 A."""
    yard = LAW_ONLY.edit(PANEL_N, PANEL_N.replace("bus-100", "bus-250"))
    out = "X1: {from: F-WINCH.load, to: WINCH.pos, size: 1 AWG, length: 1 m}"
    return winch(yard, amps, "125 A", out, f"X2: {{from: WINCH.neg, to: {to}, size: 1 AWG, length: 1 m}}")


def test_shared_negative_that_is_sized_for_one_of_two_feeders_is_found() -> None:
    """CON-19, RET-06: D2 is written for 30 A, and carries 120 A of the winch and 1 A of the panel."""
    yard = winch_back("120 A", "PANEL-N")
    line = "D2: {from: PANEL-N, to: BUS-N, size: 6 AWG, length: 1.5 m, colour: yellow}"
    assert found(yard) == [("solved-ampacity", "D2", LAW, line)]
    told = finding(yard, "solved-ampacity", "D2")
    assert told.measure is not None
    assert (told.measure.value, told.measure.limit) == (pytest.approx(121), pytest.approx(120))


@pytest.mark.parametrize(("amps", "to"), [("119 A", "PANEL-N"), ("120 A", "BUS-N")])
def test_shared_negative_that_bears_the_sum_and_a_return_of_its_own_are_sound(amps: str, to: str) -> None:
    """CON-19, RET-06."""
    assert found(winch_back(amps, to)) == []


def pump_start(seconds: str, yard: Yard = SOUND) -> Yard:
    """Return a yard with a condition in which the pump draws 60 A for a time."""
    more = f"    short_time: {seconds}\n    judge_drop: false\n"
    return yard.also(condition("pump-start", "PUMP: 60 A, PLOTTER: 1 A", more))


@pytest.mark.parametrize("seconds", ["2 s", "10 s"])
def test_current_above_the_table_for_seconds_is_sound(seconds: str) -> None:
    """T-27: 29.8 A by law for 14 AWG in the engine space; the law excepts surges."""
    assert found(pump_start(seconds)) == []


def test_current_above_the_table_for_longer_than_a_surge_is_found() -> None:
    """T-27: its faulty twin; breaker and feeder fuse follow."""
    assert found(pump_start("10.1 s")) == [
        ("solved-ampacity", "PUMP.back", BOTH, "cable: 14 AWG"),
        ("solved-ampacity", "PUMP.out", BOTH, "cable: 14 AWG"),
        ("solved-rating", "F-PANEL", NEITHER, FEEDER),
        ("solved-rating", "P3", NEITHER, "protect: 15 A"),
    ]


# CON-09: drop in operation


def bow_light(length: str) -> Yard:
    """Return the galley with a bow light of 2 A; 48 A of heaters share its feeder, which is written for 30 A."""
    return galley("16 A", ", BOW-LIGHT: 2 A").edit("length: 16 ft 5 in", f"current: 2 A\n    length: {length}")


def test_branch_that_keeps_its_drop_alone_and_loses_it_beside_the_others_is_found() -> None:
    """CON-09: the written current of the feeder hides what the galley draws."""
    yard = bow_light("2.4 m")
    assert found(yard) == [("solved-drop", "BOW-LIGHT", PRACTICE, "cable: 16 AWG")]
    told = finding(yard, "solved-drop", "BOW-LIGHT")
    assert told.state == "condition cooking"
    assert told.measure is not None
    assert told.measure.value == pytest.approx(drop_beside_the_galley(2.4), rel=2e-3)


def drop_beside_the_galley(metres: float) -> float:
    """Reckon the drop of the bow light by hand, as a share of 12 V.

    Copper at 30 C: 0.0172414 · 264.5/254.5 = 0.017919 ohm·mm²/m; 16 AWG 1.3086 mm², 6 AWG 13.295 mm²,
    2 AWG 33.624 mm². 2 A in its own two cores and its breaker of 10 mohm; 50 A in D1 and D2 (3 m), in
    F-PANEL (0.3 mohm), and from the battery: M1 to M5 (1.44986 m), F-MAIN 0.3, SW-H 0.05, SHUNT 0.17 mohm.
    """
    rho = 0.017919
    own = 2 * (2 * metres * rho / 1.3086 + 0.010)
    shared = 50 * (3.0 * rho / 13.295 + 0.0003 + 1.44986 * rho / 33.624 + 0.00052)
    return (own + shared) / 12


def test_branch_that_keeps_its_drop_beside_the_others_is_sound() -> None:
    """CON-09: 3 % leave 0.9 m of 16 AWG here."""
    assert drop_beside_the_galley(0.9) < 0.03 < drop_beside_the_galley(1.2)
    assert found(bow_light("0.9 m")) == []
    assert found(bow_light("1.2 m")) == [("solved-drop", "BOW-LIGHT", PRACTICE, "cable: 16 AWG")]


def test_condition_that_judges_no_drop_says_nothing_of_it() -> None:
    """CON-09."""
    yard = bow_light("2.4 m")
    loads = "HEAT1: 16 A, HEAT2: 16 A, HEAT3: 16 A, BOW-LIGHT: 2 A}\n"
    assert found(yard.edit(loads, f"{loads}    judge_drop: false\n")) == []


def test_drop_of_a_starter_that_the_other_bank_cranks_is_counted_from_that_bank() -> None:
    """CON-09: 2.45 m of 2 AWG, 3.4 m of 2/0 AWG and three fuses lose about 6 % of 12 V at 200 A."""
    yard = SOUND.also(
        "devices:\n  SW-X: {part: battery-switch, zone: LOCKER}\n"
        "  F-X1: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: BUS-P}}\n"
        "  F-X2: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: SW-S.out}}\n"
        "conductors:\n"
        "  X1: {from: F-X1.load, to: SW-X.in, size: 2 AWG, length: 0.5 m, current: 100 A}\n"
        "  X2: {from: SW-X.out, to: F-X2.load, size: 2 AWG, length: 0.5 m, current: 100 A}\n"
        "conditions:\n  emergency:\n    switches: {SW-H: closed, SW-S: open, SW-X: closed}\n"
        "    loads: {STARTER: 200 A}\n    short_time: 5 s\n"
    )
    assert [told for told in found(yard) if told[0] == "solved-drop"] == []


# CON-18, LOD-04: the smallest voltage


def test_plotter_that_a_starting_pump_pulls_below_its_smallest_voltage_is_found() -> None:
    """CON-18: 61 A through battery and feeder take it to 11.11 V."""
    yard = pump_start("2 s").edit("min_voltage: 10 V", "min_voltage: 11.2 V")
    assert found(yard) == [("minimum-voltage", "PLOTTER.load", NEITHER, "load: plotter")]
    told = finding(yard, "minimum-voltage", "PLOTTER.load")
    assert told.state == "condition pump-start"
    assert told.measure is not None
    assert round(told.measure.value, 2) == 11.11


def test_plotter_that_keeps_its_smallest_voltage_while_the_pump_starts_is_sound() -> None:
    """CON-18; its faulty twin without the start is sound too."""
    assert found(pump_start("2 s").edit("min_voltage: 10 V", "min_voltage: 11.1 V")) == []
    assert found(SOUND.edit("min_voltage: 10 V", "min_voltage: 11.2 V")) == []


@pytest.mark.parametrize(("least", "told"), [("11.8 V", True), ("11.78 V", False)])
def test_navigation_light_below_its_smallest_voltage_in_the_dark_is_found(least: str, told: bool) -> None:
    """LOD-04: with low batteries 11.79 V stand at its fitting; the 3 % group alone says nothing of that."""
    yard = SOUND.also(condition("evening", "LIGHTS: 3 A, BOW-LIGHT: 0.5 A"))
    yard = yard.edit(BOW_LIGHT_PART, f"{BOW_LIGHT_PART} min_voltage: {least},")
    expected: list[Told] = [("minimum-voltage", "BOW-LIGHT.load", NEITHER, "load: bow-light")]
    assert found(yard) == expected * told


# PAN-01, PAN-05, PAN-07, BNK-09, SRC-03: ratings


@pytest.mark.parametrize("amps", ["20 A", "19.9 A"])
def test_demand_on_a_panel_within_its_feeder_s_fuse_is_sound(amps: str) -> None:
    """PAN-01: 60 A of 60 A."""
    assert found(galley(amps)) == []


def test_demand_on_a_panel_above_its_feeder_s_fuse_is_found() -> None:
    """PAN-01: three times 20 A and the sensor's 0.2 A; each breaker bears its own 20 A."""
    yard = galley("20 A", ", SENSOR: 0.2 A")
    assert found(yard) == [("solved-rating", "F-PANEL", NEITHER, FEEDER)]
    told = finding(yard, "solved-rating", "F-PANEL")
    assert told.state == "condition cooking"
    assert told.measure is not None
    assert told.measure.value == pytest.approx(60.2)


def sub_panel(amps: str) -> Yard:
    """Return the yard with a sub-panel of two heaters, fed by a fuse of 30 A on the panel."""
    heaters = "".join(
        f"  HEAT{n}:\n    name: Heater {n}\n    service: heater\n    feed: G{n}\n    protect: 20 A\n"
        "    cable: 10 AWG\n    length: 2 m\n    load: heater\n    zone: CABIN\n"
        for n in (1, 2)
    )
    return SOUND.also_parts("heater: {kind: load, voltage: 12 V, current: 16 A, max_device: 20 A}").also(
        "devices:\n"
        "  F-SUB: {part: bolt-fuse, zone: CABIN, rating: 30 A, mount: {line: PANEL}}\n"
        "  SUB: {part: bus-100, zone: CABIN, positions: {first: G1, last: G2, takes: panel-breaker,"
        " returns: PANEL-N}}\n"
        "circuits:\n  SUB:\n    name: Galley feeder\n    service: feeder\n    current: 28 A\n    conductors:\n"
        f"      X1: {{from: F-SUB.load, to: SUB, size: 10 AWG, length: 1 m}}\n{heaters}"
        + condition("cooking", f"HEAT1: {amps}, HEAT2: {amps}")
    )


def test_sub_panel_that_draws_more_than_its_device_bears_is_found() -> None:
    """PAN-05: each heater's own breaker is large enough."""
    line = "F-SUB: {part: bolt-fuse, zone: CABIN, rating: 30 A, mount: {line: PANEL}}"
    assert found(sub_panel("15.1 A")) == [("solved-rating", "F-SUB", NEITHER, line)]


def test_sub_panel_that_draws_what_its_device_bears_is_sound() -> None:
    """PAN-05."""
    yard = sub_panel("15 A")
    assert found(yard) == []
    assert ("solved-rating", "F-SUB", NEITHER) in passed(yard)


def negative_bus(rating: str) -> Yard:
    """Return the yard with another rating of the negative bus alone."""
    return SOUND.edit("BUS-N: {part: bus-250", "BUS-N: {part: bus-n").also_parts(
        f"bus-n: {{kind: bus, rating: {rating}}}"
    )


def test_bus_rated_below_loads_and_charging_together_is_found() -> None:
    """PAN-07: 12.7 A of loads and 47.3 A into the battery come together as the alternator's 60 A."""
    yard = negative_bus("59.9 A")
    line = "BUS-N: {part: bus-n, zone: LOCKER, name: negative bus}"
    assert found(yard) == [("solved-rating", "BUS-N", NEITHER, line)]
    assert finding(yard, "solved-rating", "BUS-N").state == "condition under-way"


def test_bus_rated_for_loads_and_charging_together_is_sound() -> None:
    """PAN-07."""
    yard = negative_bus("60 A")
    assert found(yard) == []
    assert ("solved-rating", "BUS-N", NEITHER) in passed(yard)


def other_switch(name: str, continuous: str, intermittent: str) -> Yard:
    """Return the yard with another switch in the place of one."""
    return SOUND.edit(f"{name}: {{part: battery-switch", f"{name}: {{part: small-switch").also_parts(
        "small-switch: {kind: switch, posts: [in, out], states: {open: [], closed: [[in, out]]}, "
        f"continuous: {continuous}, intermittent: {intermittent}}}"
    )


def test_switch_rated_below_the_cranking_current_is_found() -> None:
    """BNK-09: 200 A for 5 s are held against the intermittent rating."""
    line = "SW-S: {part: small-switch, zone: LOCKER}"
    assert found(other_switch("SW-S", "100 A", "199 A")) == [("solved-rating", "SW-S for seconds", NEITHER, line)]


def test_switch_rated_for_the_cranking_current_is_sound() -> None:
    """BNK-09: its continuous rating need not be as much."""
    yard = other_switch("SW-S", "100 A", "200 A")
    assert found(yard) == []
    assert ("solved-rating", "SW-S for seconds", NEITHER) in passed(yard)


@pytest.mark.parametrize(("continuous", "told"), [("12.6 A", True), ("12.7 A", False)])
def test_switch_is_held_to_its_continuous_rating_in_a_condition_that_lasts(continuous: str, told: bool) -> None:
    """BNK-09: 1 + 3 + 8 + 0.5 + 0.2 A."""
    expected: list[Told] = [("solved-rating", "SW-H", NEITHER, "SW-H: {part: small-switch, zone: LOCKER}")]
    assert found(other_switch("SW-H", continuous, "400 A")) == expected * told


def shared_charge_fuse(charger: str) -> Yard:
    """Return the yard with alternator and charger on one fuse of 80 A at the battery."""
    yard = SOUND.without("F-CHARGER:", "C3:").edit("max: 20 A", "max: 30 A")
    yard = yard.edit("to: F-CHARGER.load, size: 10 AWG", "to: F-ALT.load, size: 2 AWG")
    yard = yard.edit("from: CHARGER.neg, to: BUS-N, size: 10 AWG", "from: CHARGER.neg, to: BUS-N, size: 2 AWG")
    return yard.also(f"conditions:\n  charging:\n    sources: {{ALT: 60 A, CHARGER: {charger}}}\n")


def test_fuse_that_charge_sources_together_exceed_is_found() -> None:
    """SRC-03: 60 A and 20.1 A through 80 A."""
    line = "F-ALT: {part: bolt-fuse, zone: LOCKER, rating: 80 A, mount: {line: BAT-H.pos}}"
    yard = shared_charge_fuse("20.1 A")
    assert found(yard) == [("solved-rating", "F-ALT", NEITHER, line)]
    assert finding(yard, "solved-rating", "F-ALT").state == "condition charging"


def test_fuse_that_bears_the_charge_sources_together_is_sound() -> None:
    """SRC-03."""
    assert found(shared_charge_fuse("20 A")) == []


# PRO-24: polarised devices


CHARGER_FUSE = "F-CHARGER: {part: bolt-fuse, zone: LOCKER, rating: 30 A}"


def test_polarised_breaker_that_a_charger_feeds_backward_is_found() -> None:
    """PRO-24: its line stands at the battery, and 20 A come from its load."""
    line = CHARGER_FUSE.replace("bolt-fuse", "panel-breaker")
    yard = SOUND.edit(CHARGER_FUSE, line)
    assert found(yard) == [("polarised-device", "F-CHARGER", NEITHER, line)]
    told = finding(yard, "polarised-device", "F-CHARGER")
    assert told.state == "condition moored"
    assert "carries 20 A from load to line" in told.fault


def test_breaker_without_polarity_may_be_fed_backward() -> None:
    """PRO-24."""
    yard = SOUND.edit(CHARGER_FUSE, CHARGER_FUSE.replace("bolt-fuse", "panel-breaker"))
    assert found(yard.edit("    polarised: true\n", "")) == []


def test_polarised_breakers_of_branches_are_sound() -> None:
    """PRO-24."""
    assert {("polarised-device", f"P{n}", NEITHER) for n in range(1, 6)} <= passed(SOUND)


# what a condition may name


def test_trunk_circuit_of_the_same_id_as_its_load_stands_for_the_load() -> None:
    """WINCH is a circuit and a device."""
    assert ("solved-ampacity", "X1", LAW) in passed(winch_back("100 A", "BUS-N"))


def test_load_named_as_a_source_of_a_condition_is_a_fault_of_the_file() -> None:
    yard = SOUND.edit("sources: {CHARGER: 20 A}", "sources: {STARTER: 20 A}")
    (fault,) = (o for o in check_yard(yard).file_outcomes if o.check == "unknown-reference")
    assert fault.fault == "there is no circuit, load or source “STARTER”"
    assert yard.line(fault.at.file, fault.at.line) == "sources: {STARTER: 20 A}"
