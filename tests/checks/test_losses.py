"""Seed faults of what is lost: a source without a battery, all switches off, a return that comes loose."""

from __future__ import annotations

import pytest

from checker.finding import Verdict
from tests.small_yard import BOTH, NEITHER, SOUND, Told, Yard, finding, found, not_assessed, outcomes, passed

ALT = "ALT: {part: alternator-60, zone: ENGINE-SPACE, engine_mounted: true}"
CHARGER = "CHARGER: {part: charger-20, zone: CABIN}"
BAT = "BAT-H: {part: house-battery, zone: LOCKER, bank: HOUSE}"
OFF = "its output {} reaches no battery with all switches off"
ON_BUS = "mount: {line: BUS-P}"

# --- alternator-cut-off and charger-cut-off


def test_alternator_behind_the_battery_switch_is_found_at_the_alternator() -> None:
    """SRC-04."""
    yard = SOUND.edit("rating: 80 A, mount: {line: BAT-H.pos}", f"rating: 80 A, {ON_BUS}")
    assert found(yard) == [("alternator-cut-off", "ALT", NEITHER, ALT)]
    told = finding(yard, "alternator-cut-off", "ALT")
    assert (told.fault, told.remedy) == (OFF.format("B"), "land it on the battery side of the switch")


def test_charger_behind_the_battery_switch_is_found_at_the_charger() -> None:
    """SRC-14."""
    yard = SOUND.edit("from: F-CHARGER.line, to: BAT-H.pos", "from: F-CHARGER.line, to: BUS-P")
    assert found(yard) == [("charger-cut-off", "CHARGER", NEITHER, CHARGER)]
    assert finding(yard, "charger-cut-off", "CHARGER").fault == OFF.format("out")


def test_sources_on_the_battery_side_of_the_switch_are_sound() -> None:
    """T-35; the fuse of each is no switch."""
    assert passed(SOUND) >= {("alternator-cut-off", "ALT", NEITHER), ("charger-cut-off", "CHARGER", NEITHER)}


def test_switch_that_the_table_never_opens_cuts_nothing_off() -> None:
    """SRC-04: only states that can exist are asked; that one is left out of the table is told by another check."""
    yard = SOUND.edit("rating: 80 A, mount: {line: BAT-H.pos}", f"rating: 80 A, {ON_BUS}")
    in_use = yard.also("states:\n  in-use: {kind: normal, switches: {SW-H: closed}}\n")
    assert ("alternator-cut-off", "ALT", NEITHER) in passed(in_use)
    moored = in_use.also("states:\n  moored: {kind: normal, switches: {SW-H: open}}\n")
    assert finding(moored, "alternator-cut-off", "ALT").fault == "its output B reaches no battery with SW-H open"


SELECTOR = (
    "selector: {kind: switch, posts: [com, one, two], states: {off: [], to-one: [[com, one]], to-two: [[com, two]]}, "
    "continuous: 300 A, intermittent: 600 A, contact_resistance: 0.05 mohm, ignition_protected: true}"
)


def charger_on(post: str) -> Yard:
    """Return the yard with the charger on a selector, of which one position leads to the bank and another nowhere."""
    yard = SOUND.also_parts(SELECTOR).edit("from: CHARGER.out, to: F-CHARGER.load", "from: CHARGER.out, to: SEL.com")
    return yard.also(f"""\
devices:
  SEL: {{part: selector, zone: LOCKER}}
circuits:
  SELECTED:
    name: From the selector to the charger's fuse
    service: charging
    current: 20 A
    conductors:
      X1: {{from: SEL.{post}, to: F-CHARGER.load, size: 10 AWG, length: 0.1 m}}
""")


@pytest.mark.parametrize(
    ("post", "words"),
    [
        ("one", "SEL to-two"),
        ("two", "SEL to-one"),
    ],
)
def test_charger_on_a_selector_pole_that_can_be_open_is_found(post: str, words: str) -> None:
    """SRC-14; whichever position is written first."""
    assert found(charger_on(post)) == [("charger-cut-off", "CHARGER", NEITHER, CHARGER)]
    fault = finding(charger_on(post), "charger-cut-off", "CHARGER").fault
    assert fault == f"its output out reaches no battery with {words}"


# --- ahead-of-switch and pump-stays-live

PUMP = "bilge-pump: {kind: load, voltage: 12 V, current: 5 A, standby: 0 A, max_device: 30 A, motor: true}"
PUMP_LINE = "BILGE: {part: bilge-pump, zone: LOCKER}"


def with_pump(at: str, service: str, more: str = "") -> Yard:
    """Return the yard with one load more, behind a fuse of its own at a post."""
    return SOUND.also_parts(PUMP).also(f"""\
devices:
  F-BILGE: {{part: bolt-fuse, zone: LOCKER, rating: 30 A, mount: {{line: {at}}}}}
  {PUMP_LINE}
circuits:
  EXTRA:
    name: Another pump
    service: {service}
    current: 5 A{more}
    conductors:
      X1: {{from: F-BILGE.load, to: BILGE.pos, size: 10 AWG, length: 1 m}}
      X2: {{from: BILGE.neg, to: BUS-N, size: 10 AWG, length: 1 m}}
""")


@pytest.mark.parametrize("service", ["pump", "lighting", "general", "electronics"])
def test_load_ahead_of_the_switch_that_is_not_on_the_list_is_found_at_the_load(service: str) -> None:
    """BNK-12."""
    yard = with_pump("BAT-H.pos", service)
    assert found(yard) == [(check, "BILGE", NEITHER, PUMP_LINE) for check in ("ahead-of-switch", "means-off")]
    assert finding(yard, "ahead-of-switch", "BILGE").fault == "it stays live with every battery switch off"


def test_load_behind_the_switch_is_sound() -> None:
    """BNK-12."""
    yard = with_pump("BUS-P", "pump")
    assert found(yard) == []
    assert ("ahead-of-switch", "BILGE", NEITHER) in passed(yard)


@pytest.mark.parametrize("service", ["bilge-pump", "alarm", "gauges"])
def test_load_on_the_list_may_stand_ahead_of_the_switch(service: str) -> None:
    """T-02, T-03."""
    assert found(with_pump("BAT-H.pos", service)) == []


def test_load_with_a_written_reason_may_stand_ahead_of_the_switch() -> None:
    """BNK-12: the reason is printed."""
    yard = with_pump("BAT-H.pos", "pump", "\n    always_on: keeps a memory")
    assert found(yard) == []
    assert notes(yard)["BILGE"] == "stays live: keeps a memory"


def notes(yard: Yard) -> dict[str, str]:
    """Return what is told of the loads that may stay live."""
    return {o.part: o.note for o in outcomes(yard, Verdict.PASSED) if o.check == "ahead-of-switch" and o.note}


def test_only_sense_leads_and_the_monitor_of_the_shunt_stay_live_aboard_the_sound_yard() -> None:
    """T-03."""
    assert notes(SOUND) == {"MONITOR": "may stay live: SHUNT", "REGULATOR": "may stay live: sense"}


def test_bank_that_no_switch_can_part_from_the_boat_is_found_at_every_load_but_the_alarm() -> None:
    """BNK-08."""
    yard = SOUND.edit("from: F-MAIN.load, to: SW-H.in", "from: F-MAIN.load, to: BUS-P").without("SW-H:", "M3:")
    parts = {"PLOTTER": "plotter", "LIGHTS": "cabin-lights", "PUMP": "cooling-pump", "BOW-LIGHT": "bow-light"}
    lines = {name: f"load: {part}" for name, part in parts.items()}
    due: list[Told] = [("ahead-of-switch", f"{name}.load", NEITHER, lines[name]) for name in sorted(lines)]
    assert found(yard) == due
    assert notes(yard)["SENSOR.load"] == "may stay live: alarm"


CONVERTER = """\
devices:
  F-CONV: {part: bolt-fuse, zone: LOCKER, rating: 30 A, mount: {line: BAT-H.pos}}
  CONV: {part: dc-24, zone: LOCKER}
  F-HORN: {part: blade-fuse, zone: LOCKER, rating: 10 A, mount: {line: CONV.out}}
  HORN: {part: horn, zone: LOCKER}
circuits:
  CONV:
    name: Converter
    service: general
    current: 12 A
    conductors:
      X1: {from: F-CONV.load, to: CONV.in, size: 10 AWG, length: 1 m}
      X2: {from: CONV.neg, to: BUS-N, size: 10 AWG, length: 1 m}
  HORN:
    name: Horn
    service: general
    current: 5 A
    conductors:
      X3: {from: F-HORN.load, to: HORN.pos, size: 14 AWG, length: 1 m}
      X4: {from: HORN.neg, to: BUS-N, size: 14 AWG, length: 1 m}
"""


def test_load_behind_a_converter_ahead_of_the_switch_is_found() -> None:
    """BNK-12: the converter, or the horn behind it, cannot be isolated."""
    outlet, inlet = "{return: neg, max: 5 A, voltage: 24 V, limited: true}", "{return: neg, max: 12 A, voltage: 12 V}"
    yard = SOUND.also_parts(
        f"dc-24: {{kind: source, inputs: {{in: {inlet}}}, outputs: {{out: {outlet}}}}}\n"
        "horn: {kind: load, voltage: 24 V, current: 5 A, max_device: 10 A}"
    ).also(CONVERTER)
    assert "ahead-of-switch" in {check for check, *_ in found(yard)}


def test_bilge_pump_behind_the_battery_switch_is_found_at_the_pump() -> None:
    """BNK-11."""
    yard = with_pump("BUS-P", "bilge-pump")
    assert found(yard) == [("pump-stays-live", "BILGE", NEITHER, PUMP_LINE)]
    assert finding(yard, "pump-stays-live", "BILGE").fault == "circuit EXTRA goes dead with the battery switches"


def test_bilge_pump_ahead_of_the_battery_switch_is_sound() -> None:
    """T-02."""
    assert ("pump-stays-live", "BILGE", NEITHER) in passed(with_pump("BAT-H.pos", "bilge-pump"))


# --- lost-return

BOND = "B2: {{from: ENGINE, to: BUS-N, size: {size}, length: 1.5 m, colour: green}}"


def second_return(size: str) -> tuple[Yard, str]:
    """Return the yard with a bond from the engine to the negative bus, beside the starter's return; and its line."""
    line = BOND.format(size=size)
    return SOUND.also(f"bonds:\n  {line}\n"), line


def lost(yard: Yard) -> list[tuple[str, str, str, str]]:
    """Return what is found once a return comes loose; that the bond is a second return is told by other checks."""
    return [told for told in found(yard) if told[0] not in ("bond-current", "bond-joints", "shield-loop")]


@pytest.mark.parametrize("size", ["2 AWG", "8 AWG"])
def test_bond_that_cannot_bear_the_cranking_current_is_found_with_the_return_that_comes_loose(size: str) -> None:
    """RET-11: 2 AWG bears 210 A x 0.85 in the engine space."""
    yard, line = second_return(size)
    assert lost(yard) == [("lost-return", "B2 without S3", BOTH, line)]


def test_bond_that_bears_the_cranking_current_is_sound() -> None:
    """RET-11: 1 AWG bears 245 A x 0.85."""
    yard, _ = second_return("1 AWG")
    assert lost(yard) == []
    assert ("lost-return", "B2 without S3", "law") in passed(yard)


def test_bond_that_cannot_bear_the_charging_current_is_found_too() -> None:
    """RET-11: 10 AWG bears 60 A x 0.85; the alternator's 60 A returns over the starter's case."""
    yard, line = second_return("10 AWG")
    assert lost(yard) == [("lost-return", f"B2 without {opened}", BOTH, line) for opened in ("J-STARTER", "S3")]
    told = finding(yard, "lost-return", "B2 without J-STARTER", "law")
    assert told.fault == "if J-STARTER comes loose, 10 AWG carries 60 A in condition under-way, but bears 51 A"


def test_shield_and_instrument_wire_that_take_the_engine_s_return_are_found() -> None:
    """RET-11: the shield joins the plotter's negative to the engine block."""
    yard = SOUND.edit("joins: [PLOTTER.load.neg]", "joins: [PLOTTER.load.neg, ENGINE]")
    panel = "D2: {from: PANEL-N, to: BUS-N, size: 6 AWG, length: 1.5 m, colour: yellow}"
    shield = "PLOTTER-SHIELD: {joins: [PLOTTER.load.neg, ENGINE]}"
    assert lost(yard) == [
        ("lost-return", "D2 without S3", BOTH, panel),
        ("lost-return", "PLOTTER-SHIELD without J-STARTER", BOTH, shield),
        ("lost-return", "PLOTTER-SHIELD without S3", BOTH, shield),
        ("lost-return", "PLOTTER.back without J-STARTER", BOTH, "cable: 16 AWG"),
        ("lost-return", "PLOTTER.back without S3", BOTH, "cable: 16 AWG"),
    ]
    told = finding(yard, "lost-return", "PLOTTER-SHIELD without J-STARTER", "law")
    assert told.fault == "if J-STARTER comes loose, the shield carries 60 A in condition under-way, but bears 1 A"


def test_shield_joined_at_one_end_takes_no_return() -> None:
    """RET-11: also where that end is the engine block."""
    assert found(SOUND.edit("joins: [PLOTTER.load.neg]", "joins: [ENGINE]")) == []


def test_shield_straight_beside_the_engine_s_return_is_found() -> None:
    """RET-11."""
    yard = SOUND.edit("joins: [PLOTTER.load.neg]", "joins: [ENGINE, BUS-N]")
    assert ("lost-return", "PLOTTER-SHIELD without S3") in {told[:2] for told in found(yard)}


def test_short_cranking_current_is_no_fault_of_the_feed_when_a_return_comes_loose() -> None:
    """RET-11: 4 AWG bears 160 A; 200 A for five seconds are allowed, and a loose return only lessens them."""
    yard, _ = second_return("1 AWG")
    yard = yard.edit("to: SW-S.in, size: 2/0 AWG", "to: SW-S.in, size: 4 AWG")
    assert "lost-return" not in {check for check, *_ in found(yard)}


def test_engine_with_a_single_return_has_nothing_beside_it() -> None:
    """RET-11: a return that takes its load with it diverts nothing."""
    assert not [part for check, part, _ in passed(SOUND) if check == "lost-return"]


# --- standby-days

STANDBY = ("standby-days", "HOUSE", NEITHER, BAT)
DAYS = {"0.05 A": 100 * 0.5 / (24 * (0.05 + 0.005)), "0.204 A": 100 * 0.5 / (24 * (0.204 + 0.005))}
"""By the monitor's standby: half of 100 Ah over what it and the regulator's 5 mA take in a day."""


def standing_by(standby: str) -> Yard:
    """Return the yard with a monitor that takes so much while all is off."""
    return SOUND.edit("standby: 0.05 A", f"standby: {standby}")


def days_of(yard: Yard) -> float:
    """Return the days that the house bank lasts."""
    some = [*outcomes(yard, Verdict.PASSED), *outcomes(yard, Verdict.FINDING)]
    (told,) = (o for o in some if (o.check, o.part) == ("standby-days", "HOUSE"))
    assert told.measure is not None
    return told.measure.value


@pytest.mark.parametrize(("standby", "days"), DAYS.items())
def test_days_are_half_the_ampere_hours_over_a_day_s_standby(standby: str, days: float) -> None:
    """LOD-09."""
    assert days_of(standing_by(standby)) == pytest.approx(days)


def test_standby_that_empties_half_the_bank_within_ten_days_is_found_at_the_bank() -> None:
    """LOD-09: 50 Ah / (24 h x 0.209 A) = 9.97 days."""
    assert found(standing_by("0.204 A")) == [STANDBY]
    fault = finding(standing_by("0.215 A"), "standby-days", "HOUSE").fault
    assert fault == "0.22 A with everything off takes half of 100 Ah in 9.47 days"


def test_standby_that_leaves_half_the_bank_for_ten_days_is_sound() -> None:
    """LOD-09: 50 Ah / (24 h x 0.208 A) = 10.02 days."""
    assert found(standing_by("0.203 A")) == []


@pytest.mark.parametrize(("capacity", "due"), [("26 Ah", [STANDBY]), ("27 Ah", [])])
def test_smaller_bank_lasts_shorter(capacity: str, due: list[Told]) -> None:
    """LOD-09: 13 Ah / (24 h x 0.055 A) = 9.8 days, 13.5 Ah last 10.2."""
    yard = SOUND.edit("voltage: 12 V, capacity: 100 Ah", f"voltage: 12 V, capacity: {capacity}")
    assert found(yard.edit("capacity: 100 Ah, ratio", f"capacity: {capacity}, ratio")) == due


LAID_UP = """\
conditions:
  laid-up:
    switches: {{SW-H: open, SW-S: open}}
    loads: {{MONITOR: {amps}}}
"""


@pytest.mark.parametrize(("amps", "due"), [("0.21 A", [STANDBY]), ("0.2 A", [])])
def test_condition_with_all_switches_off_goes_before_the_sum_of_standbys(amps: str, due: list[Told]) -> None:
    """LOD-09: 50 Ah / (24 h x 0.21 A) = 9.9 days, at 0.2 A 10.4."""
    assert found(SOUND.also(LAID_UP.format(amps=amps))) == due


def test_condition_on_shore_power_is_no_standby() -> None:
    """LOD-09: what the charger puts in empties nothing, and is not what the bank gives once it is unplugged."""
    yard = SOUND.also(LAID_UP.format(amps="0.05 A") + "    sources: {CHARGER: 20 A}\n")
    assert found(yard) == []
    assert days_of(yard) == pytest.approx(DAYS["0.05 A"])


def test_missing_standby_is_not_assessed_unless_a_condition_tells_it() -> None:
    """LOD-09."""
    yard = SOUND.edit("current: 0.05 A, standby: 0.05 A", "current: 0.05 A")
    assert not_assessed(yard) == [STANDBY]
    assert not_assessed(yard.also(LAID_UP.format(amps="0.05 A"))) == []
