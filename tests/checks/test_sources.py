"""Seed faults of charge sources and of the banks they charge: voltage, sense, devices, what joins banks."""

from __future__ import annotations

from dataclasses import replace

import pytest

from checker.boat.hull import Device, SwitchRow
from checker.boat.parts import Battery, Diode, Source, Terminals
from checker.checks.catalogue import CHECKS as ALL
from checker.checks.neighbours import battery_fuel, start_bank_load, unlike_banks
from checker.checks.sensing import charge_stop, converter_enable, diode_sense
from checker.checks.sources import array_voltage, source_device, source_maximum, source_voltage
from checker.errors import LimitSetError
from checker.finding import Outcome, Verdict
from checker.limits.source_rule import read_source_rule, source_rule
from checker.limits.table_file import Table, common_table
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_conductor,
    a_converter,
    a_device,
    a_fuse,
    a_load,
    a_row,
    a_source,
    a_switch,
    found_in,
    outcomes_of,
)
from tests.small_yard import LAW, NEITHER, SOUND, Yard, finding, found, not_assessed, passed

ALT = "ALT: {part: alternator-60, zone: ENGINE-SPACE, engine_mounted: true}"
REGULATOR = "REGULATOR: {part: regulator, zone: ENGINE-SPACE, regulates: ALT}"
CHARGER = "CHARGER: {part: charger-20, zone: CABIN}"
CHARGER_OUT = "outputs: {out: {return: neg, max: 20 A, voltage: 14.4 V, limited: true}}"


def missing_of(outcomes: list[Outcome]) -> list[tuple[str, str]]:
    """Return the part and the field of what was not assessed."""
    return [(o.part, o.missing) for o in outcomes if o.verdict is Verdict.NOT_ASSESSED]


# --- source-voltage


@pytest.mark.parametrize(("volts", "told"), [("11.9 V", True), ("12 V", False), ("16.8 V", False), ("16.9 V", True)])
def test_source_outside_one_to_one_point_four_of_its_bank_is_found(volts: str, told: bool) -> None:
    """SRC-02."""
    yard = SOUND.edit(CHARGER_OUT, CHARGER_OUT.replace("14.4 V", volts))
    assert found(yard) == [("source-voltage", "CHARGER", NEITHER, CHARGER)] * told


def test_source_for_another_bank_is_told_with_both_voltages() -> None:
    """SRC-02."""
    yard = SOUND.edit(CHARGER_OUT, CHARGER_OUT.replace("14.4 V", "28.8 V"))
    told = finding(yard, "source-voltage", "CHARGER")
    assert told.fault == "its output out gives 28.8 V where the batteries stand at 12 V"
    assert told.remedy == "fit a source for 12 V, or land it on the bank that it is made for"


def charged_boat(source: Device, *more: Piece, out: str = "SRC.out", back: str = "SRC.neg") -> list[Piece]:
    """Return a battery with a source on its two buses."""
    return [
        a_battery("BAT"), a_bus("BUS-P"), a_bus("BUS-N"), source,
        a_conductor("W1", "BAT.pos", "BUS-P"), a_conductor("W2", "BAT.neg", "BUS-N"),
        a_conductor("W3", out, "BUS-P"), a_conductor("W4", back, "BUS-N"), *more,
    ]  # fmt: skip


def test_source_with_its_leads_swapped_is_found() -> None:
    """SRC-02."""
    boat = a_boat(*charged_boat(a_source("SRC", volts=14.4), out="SRC.neg", back="SRC.out"))
    (told,) = [o for o in outcomes_of(boat, source_voltage) if o.verdict is Verdict.FINDING]
    assert (told.part, told.fault) == ("SRC", "its output out lands on the negative")


def test_array_on_its_controller_is_no_source_of_a_bank() -> None:
    """SRC-02: what lands on no bank is not asked."""
    assert [o.part for o in outcomes_of(solar_boat(("PV",)), source_voltage)] == ["CTL"]


# --- sense-place


@pytest.mark.parametrize("post", ["BUS-P", "BAT-S.pos", "SW-S.out"])
def test_sense_lead_from_another_place_is_found_at_the_regulator(post: str) -> None:
    """SRC-05: behind a switch, or at another bank."""
    yard = SOUND.edit("V1: {from: BAT-H.pos", f"V1: {{from: {post}")
    assert ("sense-place", "REGULATOR", NEITHER, REGULATOR) in found(yard)


def test_sense_lead_behind_a_fuse_on_the_bank_is_sound() -> None:
    """SRC-05."""
    assert ("sense-place", "REGULATOR", NEITHER) in passed(SOUND)
    on_the_main_fuse = SOUND.edit("V1: {from: BAT-H.pos", "V1: {from: F-MAIN.load")
    assert ("sense-place", "REGULATOR", NEITHER) in passed(on_the_main_fuse)


def test_what_parts_the_sense_lead_is_told() -> None:
    """SRC-05."""
    fault = finding(SOUND.edit("V1: {from: BAT-H.pos", "V1: {from: BUS-P"), "sense-place", "REGULATOR").fault
    assert fault == (
        "its sense post sense is not joined to the positive of HOUSE, which ALT charges, but over a switch that can open"
    )


def test_regulator_without_its_alternator_is_not_assessed() -> None:
    """SRC-05."""
    yard = SOUND.edit(", regulates: ALT", "")
    line = "REGULATOR: {part: regulator, zone: ENGINE-SPACE}"
    assert ("sense-place", "REGULATOR", NEITHER, line) in not_assessed(yard)


def test_regulator_of_what_is_no_source_is_not_assessed() -> None:
    """SRC-05."""
    yard = SOUND.edit("regulates: ALT", "regulates: BAT-H")
    assert "sense-place" in {check for check, *_ in not_assessed(yard)}


def test_regulator_without_a_sense_lead_is_not_assessed() -> None:
    """SRC-05: that its lead is missing is told by another check."""
    yard = SOUND.without("V2:")
    assert "sense-place" in {check for check, *_ in not_assessed(yard)}
    assert "sense-place" not in {check for check, *_ in found(yard)}


# --- diode-sense

ISOLATOR = (
    "isolator: {kind: diode, posts: [in, out], passes: [[in, out]], drop: 0.4 V, resistance: 2 mohm, continuous: 120 A}"
)


def through_diode(lead: str, drop: str) -> Yard:
    """Return the yard with a diode in the lead of a source, at its fuse."""
    yard = SOUND.also_parts(ISOLATOR.replace("0.4 V", drop)).also("devices:\n  ISO: {part: isolator, zone: LOCKER}\n")
    line = next(x.strip() for x in yard.files["classes/skiff/class.yaml"].splitlines() if x.strip().startswith(lead))
    name, fuse = line.split(": ")[0], line.split("to: ")[1].split(",")[0]
    behind = f"{name}-B: {{from: ISO.out, to: {fuse}, size: {'6' if lead == 'A1' else '10'} AWG, length: 0.2 m}}"
    return yard.edit(line, f"{line.replace(fuse, 'ISO.in')}\n      {behind}")


@pytest.mark.parametrize(("drop", "told"), [("0.3 V", False), ("0.31 V", True)])
def test_charger_behind_a_diode_is_found_where_it_drops_too_much(drop: str, told: bool) -> None:
    """SRC-06."""
    yard = through_diode("C1", drop)
    assert [one for one in found(yard) if one[0] == "diode-sense"] == [
        ("diode-sense", "CHARGER", NEITHER, CHARGER)
    ] * told


def test_alternator_behind_a_diode_whose_regulator_senses_the_bank_is_sound() -> None:
    """SRC-06."""
    assert ("diode-sense", "ALT", NEITHER) in passed(through_diode("A1", "0.7 V"))


def test_regulator_that_senses_ahead_of_the_diode_is_found() -> None:
    """SRC-06."""
    yard = through_diode("A1", "0.7 V").edit("V1: {from: BAT-H.pos", "V1: {from: ISO.in")
    assert [told[:2] for told in found(yard) if told[0] in ("sense-place", "diode-sense")] == [
        ("sense-place", "REGULATOR")
    ]


def splitter(*paths: tuple[str, str]) -> Device:
    """Return a diode device with some ways."""
    posts = tuple(dict.fromkeys(post for pair in paths for post in pair))
    return a_device("ISO", Diode(id="iso", posts=posts, paths=paths, drop_v=0.7, resistance_ohm=0.001))


def test_array_behind_a_blocking_diode_holds_no_voltage_and_is_sound() -> None:
    """SRC-06."""
    boat = a_boat(*charged_boat(an_array("SRC"), splitter(("in", "out")))[:-2],
                  a_conductor("W3", "SRC.out", "ISO.in"), a_conductor("W5", "ISO.out", "BUS-P"),
                  a_conductor("W4", "SRC.neg", "BUS-N"), splitter(("in", "out")))  # fmt: skip
    (told,) = outcomes_of(boat, diode_sense)
    assert (told.verdict, told.note) == (Verdict.PASSED, "an array holds no voltage")


def test_source_that_reaches_one_bank_directly_is_not_asked_for_the_other() -> None:
    """SRC-06: its own voltage is that of the bank it stands on."""
    boat = a_boat(*charged_boat(a_source("SRC", volts=14.4), splitter(("in", "out"))), a_battery("B2", bank="START"),
                  a_conductor("W5", "BUS-P", "ISO.in"), a_conductor("W6", "ISO.out", "B2.pos"),
                  a_conductor("W7", "B2.neg", "BUS-N"))  # fmt: skip
    assert outcomes_of(boat, diode_sense) == []


# --- unlike-banks


def two_banks(*more: Piece, first: str = "agm-lead", second: str = "agm-lead", volts: tuple[float | None, ...] = (None, None),
              by_hand: bool = False, rows: tuple[SwitchRow, ...] = ()) -> list[Piece]:  # fmt: skip
    """Return two banks with a contact TIE between their positives."""
    pieces: list[Piece] = [a_bus("BUS-N"), a_switch("TIE", by_hand=by_hand), *rows, *more]
    for name, bank, kind, volt in (("B1", "HOUSE", first, volts[0]), ("B2", "START", second, volts[1])):
        battery = a_battery(name, bank=bank)
        assert isinstance(battery.part, Battery)
        part = replace(battery.part, id=f"part-{name}", chemistry=kind, charge_voltage_v=volt)
        pieces += [replace(battery, part=part), a_conductor(f"N-{name}", f"{name}.neg", "BUS-N")]
    return [*pieces, a_conductor("T1", "B1.pos", "TIE.in"), a_conductor("T2", "TIE.out", "B2.pos")]


def test_combiner_of_lead_and_lithium_is_found_at_the_combiner() -> None:
    """SRC-07."""
    boat = a_boat(*two_banks(second="lithium-iron-phosphate"))
    (told,) = outcomes_of(boat, unlike_banks)
    assert (told.verdict, told.part) == (Verdict.FINDING, "TIE")
    assert told.fault == "it joins bank HOUSE (lead) and bank START (lithium)"
    assert told.path == ("B1.pos", "T1", "TIE.in", "TIE", "TIE.out", "T2", "B2.pos")


def test_emergency_link_between_unlike_banks_is_sound() -> None:
    """SRC-07, T-32: it is open in every normal state."""
    rows = a_row("use", TIE="open"), a_row("jump", "abnormal", TIE="closed")
    assert outcomes_of(a_boat(*two_banks(second="other-lithium", by_hand=True, rows=rows)), unlike_banks) == []


@pytest.mark.parametrize(("high", "told"), [(14.5, False), (14.51, True)])
def test_lead_banks_are_held_to_their_charge_voltages(high: float, told: bool) -> None:
    """SRC-07: 14.1 V and at most 0.4 V more."""
    boat = a_boat(*two_banks(first="gel-lead", volts=(14.1, high)))
    assert found_in(boat, unlike_banks) == [("unlike-banks", "TIE")] * told


def test_lead_banks_of_two_kinds_without_charge_voltages_are_not_assessed() -> None:
    """SRC-07: told once for each part."""
    boat = a_boat(*two_banks(first="flooded-lead"))
    told = outcomes_of(boat, unlike_banks)
    assert missing_of(told) == [("part-B1", "charge_voltage"), ("part-B2", "charge_voltage")]


def test_banks_of_one_kind_are_sound() -> None:
    """SRC-07."""
    (told,) = outcomes_of(a_boat(*two_banks()), unlike_banks)
    assert (told.verdict, told.part) == (Verdict.PASSED, "TIE")


def test_banks_behind_an_isolator_are_not_joined() -> None:
    """SRC-07: a diode lets neither feed the other."""
    boat = a_boat(*charged_boat(a_source("SRC"), splitter(("in", "out"), ("in", "aft"))), a_battery("B2", bank="START"),
                  a_conductor("W5", "ISO.out", "BUS-P"), a_conductor("W6", "ISO.aft", "B2.pos"),
                  a_conductor("W7", "B2.neg", "BUS-N"), a_conductor("W3", "SRC.out", "ISO.in"))  # fmt: skip
    assert outcomes_of(boat, unlike_banks) == []


# --- start-bank-load

CRANK: list[Piece] = [
    a_load("MOTOR", 200.0, motor=True),
    a_conductor("C1", "B2.pos", "MOTOR.pos", size="2/0 AWG", role="cranking", role_reason="motor"),
    a_conductor("C2", "MOTOR.neg", "BUS-N", size="2/0 AWG", role="cranking", role_reason="motor"),
    a_load("LAMP", 2.0), a_conductor("L1", "B1.pos", "LAMP.pos"), a_conductor("L2", "LAMP.neg", "BUS-N"),
]  # fmt: skip


def test_link_that_may_be_closed_in_use_is_found_with_its_loads() -> None:
    """BNK-13."""
    boat = a_boat(*two_banks(*CRANK, by_hand=True))
    (told,) = [o for o in outcomes_of(boat, start_bank_load) if o.verdict is Verdict.FINDING]
    assert (told.part, told.state) == ("TIE", "any: all switches closed")
    assert told.fault == "with all switches closed it lets LAMP draw on start bank START"


def test_link_that_is_open_in_use_is_sound() -> None:
    """BNK-13, T-32."""
    rows = a_row("use", TIE="open"), a_row("jump", "abnormal", TIE="closed")
    boat = a_boat(*two_banks(*CRANK, by_hand=True, rows=rows))
    (told,) = outcomes_of(boat, start_bank_load)
    assert (told.verdict, told.part) == (Verdict.PASSED, "B2")


def test_relay_between_the_banks_opens_by_itself_and_is_sound() -> None:
    """BNK-13."""
    assert found_in(a_boat(*two_banks(*CRANK)), start_bank_load) == []


def test_what_hangs_on_the_start_bank_alone_is_sound() -> None:
    """BNK-13: the panel of the engine has no other bank."""
    engine = [a_load("PANEL", 2.0), a_conductor("E1", "B2.pos", "PANEL.pos"), a_conductor("E2", "PANEL.neg", "BUS-N")]
    rows = a_row("use", TIE="open"), a_row("jump", TIE="closed")
    told = outcomes_of(a_boat(*two_banks(*CRANK, *engine, by_hand=True, rows=rows)), start_bank_load)
    assert [o.inputs[2] for o in told if o.verdict is Verdict.FINDING] == [("loads", "LAMP")]


def selector_boat(*rows: SwitchRow) -> list[Piece]:
    """Return two banks on a selector that feeds a motor and a lamp from one, the other or both."""
    states = {"off": [], "one": [("one", "com")], "two": [("two", "com")], "both": [("one", "com"), ("two", "com")]}
    small = a_battery("B2", bank="START")
    assert isinstance(small.part, Battery)
    return [
        a_bus("BUS-N"), a_switch("SEL", states), *rows, a_battery("B1"),
        replace(small, part=replace(small.part, capacity_ah=60.0)),
        a_conductor("P1", "B1.pos", "SEL.one", role="cranking"), a_conductor("N1", "B1.neg", "BUS-N", role="cranking"),
        a_conductor("P2", "B2.pos", "SEL.two", role="cranking"), a_conductor("N2", "B2.neg", "BUS-N", role="cranking"),
        a_load("MOTOR", 200.0, motor=True), a_conductor("C1", "SEL.com", "MOTOR.pos", role="cranking"),
        a_conductor("C2", "MOTOR.neg", "BUS-N", role="cranking"),
        a_load("LAMP", 2.0), a_conductor("L1", "SEL.com", "LAMP.pos"), a_conductor("L2", "LAMP.neg", "BUS-N"),
    ]  # fmt: skip


@pytest.mark.parametrize("states", [(), ("one", "two", "both", "off"), ("one", "two", "off")])
def test_selector_that_puts_the_house_on_the_start_bank_is_found(states: tuple[str, ...]) -> None:
    """BNK-13: with a table of states and without; of two banks that crank the smaller is the start bank."""
    rows = [a_row(name, SEL=name) for name in states]
    assert found_in(a_boat(*selector_boat(*rows)), start_bank_load) == [("start-bank-load", "SEL")]


def test_selector_that_is_kept_off_the_start_bank_in_use_is_sound() -> None:
    """BNK-13."""
    rows = [a_row("one", SEL="one"), a_row("off", SEL="off"), a_row("two", "abnormal", SEL="two"),
            a_row("both", "abnormal", SEL="both")]  # fmt: skip
    assert found_in(a_boat(*selector_boat(*rows)), start_bank_load) == []


# --- converter-enable


def converter_boat(enable: str, *, at: str = "B2.pos") -> list[Piece]:
    """Return two banks with a converter between them, and a motor on the second."""
    made = a_converter("CONV", volts_out=14.2)
    assert isinstance(made.part, Source)
    part = replace(made.part, enable=enable)
    rows = a_row("use", TIE="open"), a_row("jump", "abnormal", TIE="closed")
    return two_banks(
        *CRANK, replace(made, part=part), a_conductor("K1", at, "CONV.inpos"), a_conductor("K2", "CONV.inneg", "BUS-N"),
        a_conductor("K3", "CONV.outpos", "B1.pos"), by_hand=True, rows=rows,
    )  # fmt: skip


def test_converter_on_the_start_bank_that_nothing_switches_is_found() -> None:
    """SRC-08."""
    assert found_in(a_boat(*converter_boat("none")), converter_enable) == [("converter-enable", "CONV")]


def test_converter_that_runs_with_the_engine_is_sound() -> None:
    """SRC-08."""
    (told,) = outcomes_of(a_boat(*converter_boat("engine-run signal")), converter_enable)
    assert (told.verdict, told.note) == (Verdict.PASSED, "switched by: engine-run signal")


def test_converter_on_the_house_bank_is_not_asked() -> None:
    """SRC-08."""
    assert outcomes_of(a_boat(*converter_boat("", at="B1.pos")), converter_enable) == []


def test_converter_whose_enable_was_not_recorded_is_not_assessed_at_its_part() -> None:
    """SRC-08."""
    told = outcomes_of(a_boat(*converter_boat("")), converter_enable)
    assert missing_of(told) == [("converter", "enable")]


# --- array-voltage


def an_array(name: str, cold_v: float | None = 24.0, volts: float = 18.0) -> Device:
    """Return a solar array."""
    out = Terminals(post="out", return_post="neg", max_a=9.0, voltage_v=volts, limited=True, cold_open_v=cold_v)
    return a_device(name, Source(id=f"part-{name}", outputs=(out,)))


def solar_boat(arrays: tuple[str, ...], *, cold_v: float | None = 24.0, bears_v: float | None = 60.0) -> object:
    """Return a controller on a battery, fed by arrays in series."""
    made = a_converter("CTL", volts_in=18.0 * len(arrays), volts_out=14.4)
    assert isinstance(made.part, Source)
    ends = ["CTL.inpos", *(post for name in arrays for post in (f"{name}.out", f"{name}.neg")), "CTL.inneg"]
    wires = [a_conductor(f"S{i}", a, b) for i, (a, b) in enumerate(zip(ends[::2], ends[1::2], strict=True))]
    pieces = charged_boat(
        replace(made, part=replace(made.part, max_input_v=bears_v)), out="CTL.outpos", back="CTL.outneg"
    )
    return a_boat(*pieces, *(an_array(name, cold_v) for name in arrays), *wires)


@pytest.mark.parametrize(
    ("count", "cold_v", "bears_v", "parts"),
    [
        (1, 49.9, 49.9, []),
        (1, 49.9, 49.8, ["CTL"]),
        (1, 50.0, 60.0, ["PV0"]),
        (2, 24.0, 60.0, []),
        (2, 25.0, 60.0, ["PV0"]),
        (3, 20.1, 60.0, ["CTL", "PV0"]),
    ],
)
def test_arrays_in_series_are_held_to_the_controller_and_to_50_v(
    count: int, cold_v: float, bears_v: float, parts: list[str]
) -> None:
    """SRC-09."""
    boat = solar_boat(tuple(f"PV{i}" for i in range(count)), cold_v=cold_v, bears_v=bears_v)
    assert found_in(boat, array_voltage) == [("array-voltage", part) for part in parts]  # type: ignore[arg-type]


def test_arrays_in_series_float_nowhere() -> None:
    """SRC-09: none of them stands between two nets that batteries hold, and none needs to."""
    assert found_in(solar_boat(("PV0", "PV1")), *[c for c in ALL if c.id == "load-return"]) == []  # type: ignore[arg-type]


def test_array_without_its_cold_voltage_is_not_assessed_at_its_part() -> None:
    """SRC-09."""
    told = outcomes_of(solar_boat(("PV0",), cold_v=None), array_voltage)  # type: ignore[arg-type]
    assert missing_of(told) == [("part-PV0", "cold_open_voltage")]


def test_controller_without_its_largest_input_is_not_assessed_at_its_part() -> None:
    """SRC-09; the 50 V are judged all the same."""
    told = outcomes_of(solar_boat(("PV0",), bears_v=None), array_voltage)  # type: ignore[arg-type]
    assert missing_of(told) == [("converter", "max_input")]
    assert [o.part for o in told if o.verdict is Verdict.PASSED] == ["PV0"]


# --- source-maximum


@pytest.mark.parametrize(("rating_a", "told"), [(59.0, True), (60.0, False)])
def test_device_below_the_largest_output_is_found_at_the_device(rating_a: float, told: bool) -> None:
    """SRC-13."""
    boat = a_boat(*charged_boat(a_source("SRC", 60.0), a_fuse("F", rating_a))[:-2], a_conductor("W3", "SRC.out", "F.load"),
                  a_conductor("W5", "F.line", "BUS-P"), a_conductor("W4", "SRC.neg", "BUS-N"), a_fuse("F", rating_a))  # fmt: skip
    assert found_in(boat, source_maximum) == [("source-maximum", "F")] * told


def test_device_behind_an_isolator_must_pass_all_as_well() -> None:
    """SRC-13: one bank may take everything."""
    boat = a_boat(*charged_boat(a_source("SRC", 60.0))[:-2], splitter(("in", "out"), ("in", "aft")), a_fuse("F1", 80.0),
                  a_fuse("F2", 50.0), a_conductor("W3", "SRC.out", "ISO.in"), a_conductor("W4", "SRC.neg", "BUS-N"),
                  a_conductor("W5", "ISO.out", "F1.load"), a_conductor("W6", "ISO.aft", "F2.load"),
                  a_conductor("W7", "F1.line", "BUS-P"), a_conductor("W8", "F2.line", "B2.pos"),
                  a_battery("B2", bank="START"), a_conductor("W9", "B2.neg", "BUS-N"))  # fmt: skip
    assert found_in(boat, source_maximum) == [("source-maximum", "F2")]


def test_source_on_a_bus_with_several_devices_is_not_asked() -> None:
    """SRC-13: what each of them passes is judged by the conditions."""
    boat = a_boat(
        a_battery("BAT"), a_bus("BUS-P"), a_bus("BUS-N"), a_source("SRC"), a_fuse("F1", 5.0), a_fuse("F2", 5.0),
        a_conductor("W1", "BAT.pos", "F1.line"), a_conductor("W2", "BAT.neg", "BUS-N"),
        a_conductor("W3", "SRC.out", "BUS-P"), a_conductor("W4", "SRC.neg", "BUS-N"),
        a_conductor("W5", "F1.load", "BUS-P"), a_conductor("W6", "F2.line", "BUS-P"),
    )  # fmt: skip
    assert outcomes_of(boat, source_maximum) == []


def test_remedy_names_the_name_plate_and_the_next_rating() -> None:
    """SRC-13."""
    yard = SOUND.edit("outputs: {B: {return: case, max: 60 A", "rated: 70 A\n    outputs: {B: {return: case, max: 90 A")
    told = finding(yard, "source-maximum", "F-ALT")
    fault = "rated 80 A, but ALT gives up to 90 A (its name plate says 70 A), and all of it must pass here"
    assert told.fault == fault
    assert told.remedy.startswith("fit 125 A")


# --- charge-stop


def lithium(on_disconnect: str) -> list[Outcome]:
    """Return what is told of a source on a lithium bank."""
    battery, source = a_battery("BAT"), a_source("SRC")
    assert isinstance(battery.part, Battery)
    assert isinstance(source.part, Source)
    pieces = charged_boat(replace(source, part=replace(source.part, on_disconnect=on_disconnect)))
    bank = replace(battery, part=replace(battery.part, chemistry="lithium-iron-phosphate"))
    return outcomes_of(a_boat(*pieces, bank), charge_stop)


def test_source_that_is_harmed_by_a_disconnect_is_found() -> None:
    """BNK-16."""
    (told,) = lithium("harmed")
    assert (told.verdict, told.part) == (Verdict.FINDING, "SRC")


@pytest.mark.parametrize("fact", ["stops-first", "survives"])
def test_source_that_stops_first_or_survives_is_sound(fact: str) -> None:
    """BNK-16."""
    (told,) = lithium(fact)
    assert (told.verdict, told.note) == (Verdict.PASSED, fact)


def test_source_of_a_lithium_bank_whose_answer_was_not_recorded_is_not_assessed() -> None:
    """BNK-16."""
    assert missing_of(lithium("")) == [("source", "on_disconnect")]


def test_source_of_a_lead_bank_is_not_asked() -> None:
    """BNK-16."""
    assert outcomes_of(a_boat(*charged_boat(a_source("SRC"))), charge_stop) == []


# --- source-device

METRIC = "iso-13297"


def protected(distance: str, *, limited: bool = False, inside: bool | None = False) -> list[Outcome]:
    """Return what the metric set tells of a source whose fuse stands at some distance."""
    made = a_source("SRC", limited=limited)
    assert isinstance(made.part, Source)
    source = replace(made, part=replace(made.part, has_internal_fuse=inside))
    boat = a_boat(*charged_boat(source)[:-2], a_fuse("F", 80.0), a_conductor("W3", "SRC.out", "F.load", length=distance),
                  a_conductor("W5", "F.line", "BUS-P"), a_conductor("W4", "SRC.neg", "BUS-N"))  # fmt: skip
    return outcomes_of(boat, source_device, limit_set=METRIC)


@pytest.mark.parametrize(("distance", "verdict"), [("1.8 m", Verdict.PASSED), ("1.81 m", Verdict.FINDING)])
def test_device_farther_than_1_8_m_from_its_source_is_found(distance: str, verdict: Verdict) -> None:
    """SRC-01."""
    (told,) = protected(distance)
    assert (told.verdict, told.part, told.limit_set) == (verdict, "SRC", METRIC)


@pytest.mark.parametrize("facts", [{"limited": True}, {"inside": True}])
def test_self_limiting_source_and_one_with_a_fuse_inside_are_sound(facts: dict[str, bool]) -> None:
    """SRC-01, T-07."""
    (told,) = protected("3 m", **facts)
    assert told.verdict is Verdict.PASSED


def test_source_of_which_no_inner_fuse_was_recorded_is_not_assessed() -> None:
    """SRC-01."""
    assert missing_of(protected("3 m", inside=None)) == [("source", "internal_fuse")]


def test_source_with_no_device_at_all_is_found() -> None:
    """SRC-01."""
    made = a_source("SRC", limited=False)
    assert isinstance(made.part, Source)
    bare = replace(made, part=replace(made.part, has_internal_fuse=False))
    (told,) = outcomes_of(a_boat(*charged_boat(bare)), source_device, limit_set=METRIC)
    assert (told.verdict, "no device ends it" in told.fault) == (Verdict.FINDING, True)


def test_sets_without_the_rule_judge_no_distance_from_the_source() -> None:
    """SRC-01: there the lead is judged like any other conductor."""
    assert outcomes_of(a_boat(*charged_boat(a_source("SRC", limited=False))), source_device) == []


# --- battery-fuel

LOCKER = "LOCKER: {name: battery locker, ambient: 30 C, fuel_parts: "
BAT_H = "BAT-H: {part: house-battery, zone: LOCKER, bank: HOUSE}"


def near_fuel(facts: str) -> Yard:
    """Return the yard with fuel parts in the battery locker, and facts of the house battery."""
    yard = SOUND.edit(f"{LOCKER}false", f"{LOCKER}true")
    start = "BAT-S: {part: start-battery, zone: LOCKER, bank: START"
    yard = yard.edit(start, f"{start}, in_line_with_fuel: false, fuel_shielded: true")
    return yard.edit(BAT_H, BAT_H.replace("}", f", {facts}}}"))


@pytest.mark.parametrize(
    ("facts", "told"),
    [
        ("in_line_with_fuel: true", True),
        ("in_line_with_fuel: false, fuel_clearance: 11.9 in", True),
        ("in_line_with_fuel: false, fuel_clearance: 12 in", False),
        ("in_line_with_fuel: false, fuel_clearance: 2 in, fuel_shielded: true", False),
    ],
)
def test_battery_near_fuel_is_found_at_the_battery(facts: str, told: bool) -> None:
    """BNK-15."""
    yard = near_fuel(facts)
    assert [one for one in found(yard) if one[0] == "battery-fuel"] == [
        ("battery-fuel", "BAT-H", LAW, BAT_H.replace("}", f", {facts}}}"))
    ] * told
    assert "battery-fuel" not in {check for check, *_ in not_assessed(yard)}


def test_zone_without_fuel_parts_settles_it() -> None:
    """BNK-15."""
    assert ("battery-fuel", "BAT-H", LAW) in passed(SOUND)


def test_zone_whose_fuel_parts_were_not_recorded_is_told_once() -> None:
    """BNK-15."""
    yard = SOUND.edit(", fuel_parts: false", "")
    told = [one for one in not_assessed(yard) if one[0] == "battery-fuel"]
    assert [(part, sets) for _, part, sets, _ in told] == [("LOCKER", LAW)]


def test_battery_whose_place_was_not_recorded_is_not_assessed() -> None:
    """BNK-15."""
    assert missing_of(outcomes_of(a_boat(a_battery("BAT"), a_bus("BUS-N")), battery_fuel)) == [("DRY", "fuel_parts")]
    own = a_battery("BAT", fuel_clearance_m=1.0)
    assert missing_of(outcomes_of(a_boat(own, a_bus("BUS-N")), battery_fuel)) == [("BAT", "in_line_with_fuel")]


# --- the table


def test_families_and_figures_are_those_of_the_file() -> None:
    rule = source_rule()
    assert [rule.family(kind) for kind in ("gel-lead", "other-lithium", "unheard-of")] == [
        "lead",
        "lithium",
        "unheard-of",
    ]
    assert (rule.lowest_output_factor, rule.highest_output_factor) == (1.0, 1.4)
    assert rule.told_to_stop == ("lithium",)


def test_family_that_is_not_known_is_refused() -> None:
    table = common_table("sources")
    with pytest.raises(LimitSetError, match="names sodium, which is no family"):
        read_source_rule(Table(table.where, {**table.values, "told_to_stop_families": ["sodium"]}))
