"""Seed faults of panels: positions, returns, lights, radios."""

from __future__ import annotations

import pytest

from checker.finding import Verdict
from tests.small_yard import NEITHER, SOUND, Yard, finding, found, outcomes, passed


def on(yard: Yard, circuit: str, feed: str, protect: str, more: str = "") -> Yard:
    """Return the yard with a branch circuit on another position, with more facts."""
    text = next(text for name, text in yard.files.items() if name.startswith("classes"))
    start = text.index(f"  {circuit}:\n")
    old = text[start : text.index("    protect:", start)]
    line = text[start + len(old) :].split("\n", 1)[0]
    head = old[: old.index("    feed:")]
    return yard.edit(f"{old}{line}\n", f"{head}    feed: {feed}\n    protect: {protect}\n{more}")


def shares(yard: Yard, circuit: str) -> Yard:
    """Return the yard with a reason why a circuit shares its position."""
    return yard.edit(f"  {circuit}:\n", f"  {circuit}:\n    shares: they are shown together\n")


def service(yard: Yard, circuit: str, name: str) -> Yard:
    """Return the yard with a branch circuit that serves something else."""
    text = next(text for file, text in yard.files.items() if file.startswith("classes"))
    start = text.index(f"  {circuit}:\n")
    old = text[start : text.index("    feed:", start)]
    return yard.edit(old, f"{old[: old.index('    service:')]}    service: {name}\n")


# --- position-use

SENSOR_ON_P1 = on(SOUND, "SENSOR", "P1", "5 A")


def test_two_circuits_on_one_position_are_found() -> None:
    """PAN-03."""
    assert found(SENSOR_ON_P1) == [("position-use", "P1", NEITHER, "SENSOR:")]
    told = finding(SENSOR_ON_P1, "position-use", "P1")
    assert told.fault == "it serves 2 circuits: PLOTTER Chart plotter, SENSOR Vapour sensor"
    assert told.remedy == "give SENSOR a position of its own, or write in each why they share it, as `shares`"


def test_one_reason_is_not_enough_and_two_are() -> None:
    """PAN-03: each circuit on a shared position says why, and the pass tells it."""
    one = shares(SENSOR_ON_P1, "SENSOR")
    assert found(one) == [("position-use", "P1", NEITHER, "PLOTTER:")]
    both = shares(one, "PLOTTER")
    assert found(both) == []
    (note,) = [o.note for o in outcomes(both, Verdict.PASSED) if (o.check, o.part) == ("position-use", "P1")]
    assert note == "PLOTTER, SENSOR share it: they are shown together"


def test_one_circuit_on_two_positions_is_found_at_the_circuit() -> None:
    """PAN-03."""
    yard = SOUND.also_parts(
        "lamp: {kind: load, voltage: 12 V, current: 0.1 A, max_device: 100 A, terminal: lead, own_switch: true}"
    ).also("""\
devices:
  LAMP: {part: lamp, zone: CABIN}
circuits:
  TWICE:
    name: Fed twice
    service: lighting
    current: 0.1 A
    conductors:
      X1: {from: P1.load, to: LAMP.pos, size: 16 AWG, length: 1 m, colour: red}
      X2: {from: P5.load, to: LAMP.pos, size: 16 AWG, length: 1 m, colour: red}
      X3: {from: LAMP.neg, to: PANEL-N, size: 16 AWG, length: 1 m, colour: yellow}
""")
    told = {row[:2] for row in found(yard)}
    assert {("position-use", "TWICE"), ("position-use", "P1"), ("position-use", "P5")} <= told
    assert finding(yard, "position-use", "TWICE").fault == "it hangs on P1 and P5: switching one off leaves it live"


def test_spare_position_is_silent() -> None:
    """T-09."""
    yard = SOUND.also("devices:\n  P8: {part: panel-breaker, zone: CABIN, rating: 5 A, mount: {line: PANEL}}\n")
    assert found(yard) == []


# --- panel-return


def test_return_on_another_bar_is_found() -> None:
    """PAN-04."""
    yard = on(SOUND, "LIGHTS", "P2", "10 A", "    returns: BUS-N\n")
    assert found(yard) == [("panel-return", "LIGHTS", NEITHER, "LIGHTS:")]
    told = finding(yard, "panel-return", "LIGHTS")
    assert told.fault == "fed from PANEL, it returns to BUS-N and not to PANEL-N"
    assert told.remedy == "land its return on PANEL-N, or write why not as `return_reason`"


def test_return_on_another_bar_with_a_reason_is_sound() -> None:
    """PAN-04; so is the panel's own bar."""
    yard = on(SOUND, "LIGHTS", "P2", "10 A", "    returns: BUS-N\n    return_reason: the fitting stands at the bus\n")
    assert found(yard) == []
    assert ("panel-return", "LIGHTS", NEITHER) in passed(SOUND)


def trunk_from_panel(bar: str) -> Yard:
    """Return the yard with a circuit of its own conductors that begins on the panel."""
    return SOUND.also(f"""\
devices:
  F-X: {{part: blade-fuse, zone: CABIN, rating: 5 A}}
  X-LOAD: {{part: plotter, zone: CABIN}}
circuits:
  X:
    name: Second plotter
    service: electronics
    current: 1 A
    conductors:
      X1: {{from: PANEL, to: F-X.line, size: 16 AWG, length: 0.1 m, colour: red}}
      X2: {{from: F-X.load, to: X-LOAD.pos, size: 16 AWG, length: 1 m, colour: red}}
      X3: {{from: X-LOAD.neg, to: {bar}, size: 16 AWG, length: 1 m, colour: yellow}}
""")


@pytest.mark.parametrize(("bar", "is_found"), [("PANEL-N", False), ("BUS-N", True)])
def test_circuit_that_begins_on_the_panel_returns_to_its_bar(bar: str, is_found: bool) -> None:
    """PAN-04."""
    rows = [row[:2] for row in found(trunk_from_panel(bar)) if row[0] == "panel-return"]
    assert rows == ([("panel-return", "X")] if is_found else [])


def test_panel_without_a_bar_is_not_assessed_once() -> None:
    yard = SOUND.edit(", takes: panel-breaker, returns: PANEL-N}", ", takes: panel-breaker}")
    for name, protect in (
        ("PLOTTER", "5 A"),
        ("LIGHTS", "10 A"),
        ("PUMP", "15 A"),
        ("BOW-LIGHT", "5 A"),
        ("SENSOR", "5 A"),
    ):
        place = {"PLOTTER": "P1", "LIGHTS": "P2", "PUMP": "P3", "BOW-LIGHT": "P4", "SENSOR": "P5"}[name]
        yard = on(yard, name, place, protect, "    returns: PANEL-N\n")
    rows = [(o.check, o.part, o.missing) for o in outcomes(yard, Verdict.NOT_ASSESSED)]
    assert rows == [("panel-return", "PANEL", "positions: returns")]


# --- return-screws


@pytest.mark.parametrize(("screws", "is_found"), [(4, True), (5, False), (6, False)])
def test_bar_needs_a_screw_for_each_of_five_returns(screws: int, is_found: bool) -> None:
    """PAN-09."""
    facts = "studs: 2, stud: M8, screw_thread: M4, torque: 10 Nm"
    yard = SOUND.also_parts(f"bar: {{kind: bus, rating: 100 A, {facts}, screws: {screws}}}")
    yard = yard.edit("PANEL-N: {part: bus-100", "PANEL-N: {part: bar")
    rows = [row[:2] for row in found(yard)]
    assert rows == ([("return-screws", "PANEL-N")] if is_found else [])
    if is_found:
        assert finding(yard, "return-screws", "PANEL-N").fault == "5 conductors lie under its 4 screws"


def test_bar_whose_screws_nobody_counted_is_not_assessed_at_its_part() -> None:
    yard = SOUND.also_parts("bar: {kind: bus, rating: 100 A, stud: M8, torque: 10 Nm}")
    yard = yard.edit("PANEL-N: {part: bus-100", "PANEL-N: {part: bar")
    rows = [(o.check, o.part, o.missing) for o in outcomes(yard, Verdict.NOT_ASSESSED)]
    assert ("return-screws", "bar", "screws, or studs") in rows


# --- light-circuits


def together(first: str, second: str, feed: str) -> Yard:
    """Return the yard with two circuits on one position, both saying why."""
    yard = on(SOUND, second, feed, "5 A")
    return shares(shares(yard, first), second)


def test_light_that_shares_its_device_with_another_service_is_found() -> None:
    """PAN-08."""
    yard = together("BOW-LIGHT", "SENSOR", "P4")
    assert found(yard) == [("light-circuits", "BOW-LIGHT", NEITHER, "BOW-LIGHT:")]
    told = finding(yard, "light-circuits", "BOW-LIGHT")
    assert told.fault == "the device ahead of it feeds SENSOR Vapour sensor (alarm) as well"


def test_lights_that_share_a_device_with_lights_are_sound() -> None:
    """PAN-08: side and stern lights are shown together."""
    assert found(service(together("BOW-LIGHT", "SENSOR", "P4"), "SENSOR", "navigation-light")) == []


def test_anchor_light_on_the_breaker_of_another_light_is_found() -> None:
    """PAN-08."""
    yard = service(together("BOW-LIGHT", "SENSOR", "P4"), "SENSOR", "anchor-light")
    assert found(yard) == [("light-circuits", "SENSOR", NEITHER, "SENSOR:")]
    told = finding(yard, "light-circuits", "SENSOR")
    assert told.fault == "it cannot be switched apart from BOW-LIGHT Bow light"


def test_anchor_light_on_its_own_breaker_is_sound() -> None:
    """PAN-08."""
    yard = service(SOUND, "SENSOR", "anchor-light")
    assert found(yard) == []
    assert {("light-circuits", "SENSOR", NEITHER), ("light-circuits", "BOW-LIGHT", NEITHER)} <= passed(yard)


def behind_one_breaker(states: str) -> Yard:
    """Return the yard with an anchor and a running light behind one breaker and a switch."""
    return SOUND.also_parts(
        f"three-way: {{kind: switch, posts: [com, run, anchor], states: {states}, continuous: 10 A, intermittent: 10 A, "
        "contact_resistance: 5 mohm, terminal: screw, stud: M4, smallest_size: 22 AWG, largest_size: 10 AWG}"
    ).also("""\
devices:
  CB-SHOW: {part: panel-breaker, zone: CABIN, rating: 5 A, mount: {line: PANEL}}
  SW-SHOW: {part: three-way, zone: CABIN}
  LAMP-R: {part: bow-light, zone: CABIN}
  LAMP-A: {part: bow-light, zone: CABIN}
circuits:
  SHOW:
    name: Feed of the lights
    service: navigation-light
    current: 0.5 A
    conductors:
      Y1: {from: CB-SHOW.load, to: SW-SHOW.com, size: 16 AWG, length: 0.5 m, colour: red}
  RUN:
    name: Running light
    service: navigation-light
    current: 0.5 A
    conductors:
      Y2: {from: SW-SHOW.run, to: LAMP-R.pos, size: 16 AWG, length: 0.5 m, colour: red}
      Y3: {from: LAMP-R.neg, to: PANEL-N, size: 16 AWG, length: 0.5 m, colour: yellow}
  ANCHOR:
    name: Anchor light
    service: anchor-light
    current: 0.5 A
    conductors:
      Y4: {from: SW-SHOW.anchor, to: LAMP-A.pos, size: 16 AWG, length: 0.5 m, colour: red}
      Y5: {from: LAMP-A.neg, to: PANEL-N, size: 16 AWG, length: 0.5 m, colour: yellow}
""")


def test_three_way_switch_shows_the_lights_apart() -> None:
    """T-26."""
    yard = behind_one_breaker("{off: [], run: [[com, run]], anchor: [[com, anchor]]}")
    assert found(yard) == []
    assert ("light-circuits", "ANCHOR", NEITHER) in passed(yard)


def test_switch_that_shows_both_at_once_does_not_part_them() -> None:
    """PAN-08."""
    yard = behind_one_breaker("{off: [], on: [[com, run], [com, anchor]]}")
    assert [row[:2] for row in found(yard)] == [("light-circuits", "ANCHOR")]


# --- radio-device


def test_radio_that_shares_its_device_is_found() -> None:
    """PAN-10."""
    yard = service(together("PLOTTER", "SENSOR", "P1"), "PLOTTER", "radio")
    assert found(yard) == [("radio-device", "PLOTTER", NEITHER, "PLOTTER:")]
    assert finding(yard, "radio-device", "PLOTTER").remedy == "move SENSOR to a device of its own"


def test_radio_with_a_device_of_its_own_is_sound() -> None:
    """PAN-10."""
    yard = service(SOUND, "PLOTTER", "radio")
    assert found(yard) == []
    assert ("radio-device", "PLOTTER", NEITHER) in passed(yard)
