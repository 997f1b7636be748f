"""Seed faults of how loads are fed, switched and stopped, each beside its nearest sound twin."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from checker.boat.hull import Boat, Device
from checker.boat.parts import Diode
from checker.checks.check import Check
from checker.checks.loads import (
    heavy_motor,
    means_off,
    paralleled_devices,
    sneak_path,
    stalled_motor,
    switched_return,
    two_feeds,
)
from checker.finding import Outcome, Verdict
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_circuit,
    a_conductor,
    a_converter,
    a_device,
    a_fuse,
    a_link,
    a_load,
    a_switch,
    found_in,
    outcomes_of,
    sound_pieces,
)
from tests.small_yard import NEITHER, SOUND, finding, found, not_assessed


def with_part(device: Device, **facts: Any) -> Device:
    """Return a device whose part has other facts."""
    return replace(device, part=replace(device.part, **facts))


def a_breaker(name: str, rating_a: float, **more: Any) -> Device:
    """Place a breaker."""
    return with_part(a_fuse(name, rating_a, **more), is_breaker=True)


def told_in(boat: Boat, check: Check, verdict: Verdict) -> list[Outcome]:
    """Return the outcomes of a check that ended with a verdict."""
    return [o for o in outcomes_of(boat, check) if o.verdict is verdict]


def without(pieces: list[Piece], *names: str) -> list[Piece]:
    """Return pieces without some."""
    return [piece for piece in pieces if getattr(piece, "id", "") not in names]


# --- what opens a return


def returned_over(device: Device, start: str, end: str, *more: Piece) -> list[Piece]:
    """Return the boat with a device in the return of the lamp."""
    return [
        *sound_pieces(), device, a_conductor("lamp-back", "LAMP.neg", f"{device.id}.{start}", size="14 AWG"),
        a_conductor("lamp-rest", f"{device.id}.{end}", "BUS-N", size="14 AWG"), *more,
    ]  # fmt: skip


FOUND = [("switched-return", "X")]


@pytest.mark.parametrize(("device", "posts"), [(a_switch("X"), ("in", "out")), (a_fuse("X", 5.0), ("line", "load"))])
def test_a_switch_or_fuse_in_a_return_is_found(device: Device, posts: tuple[str, str]) -> None:
    """PRO-08."""
    boat = a_boat(*returned_over(device, *posts))
    assert found_in(boat, switched_return) == FOUND
    (one,) = told_in(boat, switched_return, Verdict.FINDING)
    assert one.fault == "it opens the return of LAMP, whose feed stays live"


def test_a_switch_in_the_feed_is_sound_and_one_pass_says_that_returns_are_free() -> None:
    """PRO-08."""
    (one,) = outcomes_of(a_boat(*sound_pieces()), switched_return)
    assert (one.verdict, one.part, one.note) == (Verdict.PASSED, "returns", "no device or hand switch in a return")


def test_a_switch_with_a_pole_in_feed_and_return_is_sound() -> None:
    """PRO-08."""
    poles = a_switch("X", {"closed": [("in", "out"), ("back", "home")], "open": []})
    pieces = returned_over(poles, "back", "home", a_conductor("lamp-out", "X.out", "LAMP.pos", size="14 AWG"))
    assert (
        found_in(a_boat(*pieces, a_conductor("lamp-in", "F-LAMP.load", "X.in", size="14 AWG")), switched_return) == []
    )


def breaker_of_two_poles(**feed: Any) -> list[Piece]:
    """Return the boat with the lamp fed over the breaker F and returned over the breaker X."""
    pieces = returned_over(a_breaker("X", 5.0), "line", "load")
    wire = a_conductor("lamp-in", "F-LAMP.load", "F.line", size="14 AWG")
    out = a_conductor("lamp-out", "F.load", "LAMP.pos", size="14 AWG")
    pieces = [piece for piece in pieces if getattr(piece, "end", "") != "LAMP.pos"]
    return [*pieces, replace(a_breaker("F", 5.0), **feed), wire, out]


def test_a_breaker_of_two_poles_opens_feed_and_return_together() -> None:
    """PRO-08: whichever of the poles names the other; without the word they are two breakers."""
    assert found_in(a_boat(*breaker_of_two_poles()), switched_return) == FOUND
    assert found_in(a_boat(*breaker_of_two_poles(trips_with="X")), switched_return) == []
    pieces = [replace(p, trips_with="F") if getattr(p, "id", "") == "X" else p for p in breaker_of_two_poles()]
    assert found_in(a_boat(*pieces), switched_return) == []


def test_a_second_pole_in_the_feed_of_something_else_makes_it_no_better() -> None:
    """PRO-08."""
    poles = a_switch("X", {"closed": [("in", "out"), ("back", "home")], "open": []})
    pieces = returned_over(poles, "back", "home", a_conductor("pump-out", "X.out", "PUMP.pos", size="12 AWG"))
    boat = a_boat(*pieces, a_conductor("pump-in", "F-PUMP.load", "X.in", size="12 AWG"))
    assert found_in(boat, switched_return) == FOUND


def test_a_relay_in_a_return_is_no_hand_switch() -> None:
    """PRO-08: relays that ground a coil or motor are common, and are not worked by somebody who then trusts them."""
    assert found_in(a_boat(*returned_over(a_switch("X", by_hand=False), "in", "out")), switched_return) == []


def test_a_battery_switch_in_the_negative_alone_is_found() -> None:
    """PRO-08."""
    pieces = [*sound_pieces(), a_switch("X"), a_conductor("W4", "BAT.neg", "X.in", size="2 AWG")]
    assert found_in(a_boat(*pieces, a_conductor("W4b", "X.out", "SH.bat", size="2 AWG")), switched_return) == FOUND


def test_a_link_in_the_middle_of_a_series_bank_is_no_return() -> None:
    """PRO-08: a fuse there is at 12 V."""
    pieces = [
        a_battery("LOW"), a_battery("HIGH"), a_fuse("MID", 100.0), a_bus("BUS-N"), a_fuse("F", 10.0),
        a_link("L1", "LOW.pos", "MID.line"), a_link("L2", "MID.load", "HIGH.neg"), a_load("LAMP", 1.0, volts=24.0),
        a_conductor("P", "HIGH.pos", "F.line"), a_conductor("Q", "F.load", "LAMP.pos"),
        a_conductor("R", "LAMP.neg", "BUS-N"), a_conductor("N", "LOW.neg", "BUS-N"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces, volts=24.0), switched_return) == []


# --- devices side by side


def test_two_devices_between_the_same_two_places_are_found() -> None:
    """PRO-27."""
    twin = a_fuse("F-TWIN", 150.0, mount={"line": "F-MAIN.line", "load": "F-MAIN.load"})
    boat = a_boat(*sound_pieces(), twin)
    assert found_in(boat, paralleled_devices) == [("paralleled-devices", "F-TWIN")]
    (one,) = told_in(boat, paralleled_devices, Verdict.FINDING)
    assert one.fault == "it lies beside F-MAIN (150 A and 150 A): their line sides are joined, and their load sides too"


def test_two_devices_with_a_conductor_each_to_one_bus_are_found() -> None:
    """PRO-27."""
    pieces = [
        *sound_pieces(), a_fuse("F-TWIN", 150.0), a_conductor("W1b", "BAT.pos", "F-TWIN.line", size="2 AWG"),
        a_conductor("W2b", "F-TWIN.load", "SW.in", size="2 AWG"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), paralleled_devices) == [("paralleled-devices", "F-TWIN")]


def test_fuses_at_both_ends_of_one_feed_are_no_pair() -> None:
    """PRO-27."""
    pieces = [
        *sound_pieces(), a_battery("BAT2", bank="START"), a_fuse("A", 60.0, mount={"line": "BUS-P"}), a_fuse("B", 60.0),
        a_conductor("T1", "A.load", "B.load"), a_conductor("T2", "B.line", "BAT2.pos"),
        a_conductor("T3", "BAT2.neg", "BUS-N"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), paralleled_devices, two_feeds) == []


def test_the_fuses_of_two_strings_are_no_pair() -> None:
    """PRO-27."""
    pieces = [
        *sound_pieces(), a_battery("BAT2"), a_fuse("F2", 150.0), a_link("L1", "BAT2.pos", "F2.line"),
        a_link("L2", "F2.load", "SW.in"), a_link("L3", "BAT2.neg", "BAT.neg"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), paralleled_devices) == []


# --- one load, two feeds


def a_second_feed(end: str, bus: str = "BUS-P", rating_a: float = 5.0, circuit: str = "EXTRA") -> list[Piece]:
    """Return a fuse on a bus, and a conductor of a circuit of its own from it to an end."""
    return [
        a_fuse("F-EXTRA", rating_a, mount={"line": bus}), a_conductor("extra", "F-EXTRA.load", end, size="14 AWG"),
        a_circuit(circuit, "extra", current_a=1.0),
    ]  # fmt: skip


def test_a_load_on_two_circuits_is_found_at_the_load() -> None:
    """LOD-06."""
    boat = a_boat(*sound_pieces(), *a_second_feed("LAMP.pos"))
    assert found_in(boat, two_feeds, paralleled_devices) == [("two-feeds", "LAMP")]
    (one,) = told_in(boat, two_feeds, Verdict.FINDING)
    assert one.fault == (
        "it is fed by F-EXTRA from F-EXTRA.line and F-LAMP from F-LAMP.line: with one of them open it stays live by "
        "the other"
    )


def test_two_devices_of_one_circuit_at_a_load_are_a_doubled_device() -> None:
    """PRO-27: the same network, but one circuit doubles its device to gain rating."""
    pieces = [*sound_pieces(), *a_second_feed("LAMP.pos")[:2]]
    boat = a_boat(
        *pieces, a_circuit("LAMPS", "lamp-out", "lamp-back", "extra", current_a=2.0, load="LAMP", device="F-LAMP")
    )
    assert found_in(boat, two_feeds, paralleled_devices) == [("paralleled-devices", "F-LAMP")]


def two_panels() -> list[Piece]:
    """Return the boat with a second panel, fed ahead of the battery switch."""
    return [
        *sound_pieces(), a_bus("ALWAYS"), a_fuse("F-ALWAYS", 30.0),
        a_conductor("A1", "BAT.pos", "F-ALWAYS.line", size="8 AWG"), a_conductor("A2", "F-ALWAYS.load", "ALWAYS", size="8 AWG"),
    ]  # fmt: skip


def test_an_automatic_and_a_manual_feed_that_meet_at_the_motor_are_found() -> None:
    """LOD-05."""
    boat = a_boat(*two_panels(), *a_second_feed("PUMP.pos", "ALWAYS"))
    assert found_in(boat, two_feeds, paralleled_devices) == [("two-feeds", "PUMP")]


def test_a_changeover_closes_one_of_two_feeds_at_a_time() -> None:
    """LOD-05."""
    changeover = a_switch("CO", {"auto": [("a", "out")], "hand": [("b", "out")], "off": []})
    pieces = [
        *two_panels(), *a_second_feed("CO.a", "ALWAYS"), changeover,
        a_conductor("pump-out", "F-PUMP.load", "CO.b", size="12 AWG"), a_conductor("co", "CO.out", "PUMP.pos", size="12 AWG"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), two_feeds, paralleled_devices, sneak_path) == []


def test_a_load_behind_one_breaker_with_another_load_beside_it_has_one_feed() -> None:
    """LOD-06."""
    pieces = [*sound_pieces(), a_load("SECOND", 1.0), a_conductor("s", "F-LAMP.load", "SECOND.pos", size="14 AWG")]
    assert found_in(a_boat(*pieces, a_conductor("t", "SECOND.neg", "BUS-N", size="14 AWG")), two_feeds) == []


# --- sneak paths


def indicator(*middle: Piece, start: str = "LAMP.pos", end: str = "PUMP.pos") -> list[Piece]:
    """Return the boat with a small lamp between two posts."""
    wires = [a_conductor("i1", start, "IND.pos", size="16 AWG"), a_conductor("i2", "IND.neg", end, size="16 AWG")]
    return [*sound_pieces(), a_load("IND", 0.1), *wires, *middle]


def test_a_lamp_between_two_feeds_glows_when_one_is_off() -> None:
    """LOD-07."""
    boat = a_boat(*indicator())
    assert found_in(boat, sneak_path) == [("sneak-path", "IND")]
    (one,) = told_in(boat, sneak_path, Verdict.FINDING)
    assert one.path == ("IND.neg", "IND", "IND.pos", "LAMP.pos", "LAMP", "LAMP.neg")
    assert one.fault == (
        "with F-LAMP open, IND and LAMP stand in series and current flows through them from IND.neg to LAMP.neg"
    )


def test_a_lamp_with_a_return_of_its_own_is_sound() -> None:
    """LOD-07."""
    assert found_in(a_boat(*indicator(end="BUS-N")), sneak_path) == []


def test_a_diode_blocks_the_sneak_path() -> None:
    """LOD-07: the lamp stands between two feeds, but no current leaves it."""
    part = Diode(id="d", posts=("a", "k"), paths=(("a", "k"),), drop_v=0.7, resistance_ohm=0.01)
    diode = a_device("D", part)
    wires = [a_conductor("i2", "IND.neg", "D.k", size="16 AWG"), a_conductor("i3", "D.a", "PUMP.pos", size="16 AWG")]
    assert found_in(a_boat(*indicator(diode, *wires)), sneak_path) == []


def test_a_two_pole_switch_whose_return_pole_serves_a_strange_load_drives_it_backwards() -> None:
    """LOD-07: open, the lamp of another circuit feeds the pump's return, and so the third load."""
    poles = a_switch("X", {"closed": [("in", "out"), ("back", "home")], "open": []})
    pieces = [
        *sound_pieces(), poles, a_load("THIRD", 1.0), a_conductor("pump-in", "F-PUMP.load", "X.in", size="12 AWG"),
        a_conductor("pump-out", "X.out", "PUMP.pos", size="12 AWG"),
        a_conductor("pump-back", "PUMP.neg", "X.back", size="12 AWG"),
        a_conductor("rest", "X.home", "BUS-N", size="12 AWG"),
        a_conductor("third-out", "X.out", "THIRD.pos", size="12 AWG"),
        a_conductor("third-back", "THIRD.neg", "BUS-N", size="12 AWG"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), sneak_path) == []
    strange = a_conductor("lamp-back", "LAMP.neg", "X.back", size="14 AWG")
    boat = a_boat(*pieces, strange)
    assert found_in(boat, sneak_path) == [("sneak-path", "PUMP")]
    (one,) = told_in(boat, sneak_path, Verdict.FINDING)
    assert one.path == (
        "LAMP.pos", "LAMP", "LAMP.neg", "PUMP.neg", "PUMP", "PUMP.pos", "THIRD.pos", "THIRD", "THIRD.neg",
    )  # fmt: skip


def test_loads_on_an_isolated_converter_are_no_sneak_path() -> None:
    """LOD-07."""
    pieces = [
        *sound_pieces(), a_converter("C", isolated=True), a_fuse("FC", 20.0, mount={"line": "BUS-P"}),
        a_conductor("c1", "FC.load", "C.inpos"), a_conductor("c2", "C.inneg", "BUS-N"),
        a_load("R24", 2.0, volts=24.0), a_conductor("c3", "C.outpos", "R24.pos"), a_conductor("c4", "R24.neg", "C.outneg"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), sneak_path, two_feeds) == []


# --- motors that are held fast


def motor(stall_a: float | None = 30.0, protection: str = "device", **fuse: Any) -> list[Piece]:
    """Return the boat whose pump is a motor with a 15 A fuse ahead; the fuse holds below 1.35 times its rating."""
    pump = with_part(a_load("PUMP", 8.0, motor=True), id="pump", stall_protection=protection, stall_a=stall_a)
    device = with_part(a_fuse("F-PUMP", 15.0, mount={"line": "BUS-P"}), **fuse)
    return [*sound_pieces(), pump, device]


@pytest.mark.parametrize(
    ("stall_a", "is_stopped"),
    [
        (20.0, False),  # 1.33 times: below the band
        (29.99, False),  # it may hold up to twice its rating
        (30.0, True),  # twice: 4 s at the latest
        (300.0, True),
    ],
)
def test_the_device_opens_for_certain_at_the_stalled_current(stall_a: float, is_stopped: bool) -> None:
    """PRO-28."""
    expected = [] if is_stopped else [("stalled-motor", "PUMP")]
    assert found_in(a_boat(*motor(stall_a)), stalled_motor) == expected


def test_a_stalled_motor_is_told_with_its_device_and_a_rating_that_would_do() -> None:
    """PRO-28: a fuse of 10 A opens at 20 A within 4 s."""
    fuse = a_fuse("F-PUMP", 15.0).part
    made = tuple(replace(fuse, rating_a=a) for a in (5.0, 10.0, 15.0))  # type: ignore[arg-type]
    (one,) = told_in(a_boat(*motor(20.0, series=made)), stalled_motor, Verdict.FINDING)
    assert one.fault == "held fast it draws 20 A, and F-PUMP may carry that for ever"
    assert one.remedy == "fit F-PUMP at 10 A, or a motor that protects itself, written as `stall_protection`"


@pytest.mark.parametrize("protection", ["thermal", "impedance", "electronic"])
def test_a_motor_that_protects_itself_passes_and_the_pass_says_how(protection: str) -> None:
    """PRO-28."""
    (one,) = outcomes_of(a_boat(*motor(None, protection)), stalled_motor)
    assert (one.verdict, one.note) == (Verdict.PASSED, f"protects itself: {protection}")


@pytest.mark.parametrize(
    ("pieces", "part", "field"),
    [
        (motor(30.0, ""), "pump", "stall_protection"),
        (motor(None), "pump", "stall_current"),
        (motor(30.0, band=None), "fuse", "band"),
    ],
)
def test_what_is_not_known_of_a_motor_is_not_assessed_at_its_part(pieces: list[Piece], part: str, field: str) -> None:
    """PRO-28."""
    (one,) = outcomes_of(a_boat(*pieces), stalled_motor)
    assert (one.verdict, one.part, one.missing) == (Verdict.NOT_ASSESSED, part, field)


def test_two_motors_of_one_part_are_not_assessed_once() -> None:
    """PRO-28."""
    yard = SOUND.edit(" stall_protection: device, stall_current: 40 A,", "")
    (told,) = [row for row in not_assessed(yard) if row[0] == "stalled-motor"]
    assert told[:3] == ("stalled-motor", "cooling-pump", NEITHER)


def test_a_pump_whose_breaker_never_opens_is_found_in_a_yard() -> None:
    """PRO-28: 17 A is 1.13 times 15 A."""
    yard = SOUND.edit("stall_current: 40 A", "stall_current: 17 A")
    assert [row[:3] for row in found(yard)] == [("stalled-motor", "PUMP.load", NEITHER)]
    assert "P3 may carry that for ever" in finding(yard, "stalled-motor", "PUMP.load").fault


# --- heavy motors


def windlass(*devices: Device, current_a: float = 90.0, sharing: bool = False) -> list[Piece]:
    """Return the boat with a motor behind some devices in series, and another load behind the last if asked."""
    pieces: list[Piece] = [*sound_pieces(), a_load("WINDLASS", current_a, motor=True), *devices]
    start = "BUS-P"
    for number, device in enumerate(devices):
        first, last = device.part.posts[:2]
        pieces.append(a_conductor(f"wl{number}", start, f"{device.id}.{first}", size="1/0 AWG"))
        start = f"{device.id}.{last}"
    pieces += [
        a_conductor("wl-out", start, "WINDLASS.pos", size="1/0 AWG"),
        a_conductor("wl-back", "WINDLASS.neg", "BUS-N", size="1/0 AWG"),
    ]
    if sharing:
        pieces += [
            a_load("WASH", 5.0), a_conductor("wash", start, "WASH.pos", size="1/0 AWG"),
            a_conductor("wash-back", "WASH.neg", "BUS-N"),
        ]  # fmt: skip
    return pieces


HEAVY = [("heavy-motor", "WINDLASS")]


@pytest.mark.parametrize(
    ("devices", "expected"),
    [
        ([a_breaker("CB", 120.0)], []),
        ([a_fuse("F", 120.0), a_switch("ISO")], []),
        ([a_switch("ISO"), a_fuse("F", 120.0)], []),
        ([a_fuse("F", 120.0)], HEAVY),
        ([a_switch("ISO")], HEAVY),
        ([a_fuse("F", 120.0), a_switch("RELAY", by_hand=False)], HEAVY),
        ([a_breaker("CB", 120.0), a_switch("RELAY", by_hand=False)], []),
        ([a_breaker("CB", 120.0), a_breaker("LOCAL", 120.0)], []),
        ([], HEAVY),
    ],
)
def test_a_heavy_motor_has_a_device_and_an_isolator_of_its_own(
    devices: list[Device], expected: list[tuple[str, str]]
) -> None:
    """LOD-08, T-33."""
    assert found_in(a_boat(*windlass(*devices)), heavy_motor) == expected


def test_a_breaker_that_feeds_something_else_as_well_is_not_the_motor_s_own() -> None:
    """LOD-08."""
    assert found_in(a_boat(*windlass(a_breaker("CB", 120.0), sharing=True)), heavy_motor) == HEAVY


@pytest.mark.parametrize(("current_a", "expected"), [(49.9, []), (50.0, HEAVY), (50.1, HEAVY)])
def test_a_motor_is_heavy_from_50_a_on(current_a: float, expected: list[tuple[str, str]]) -> None:
    """LOD-08."""
    assert found_in(a_boat(*windlass(current_a=current_a)), heavy_motor) == expected


def test_a_cranking_motor_needs_neither() -> None:
    """LOD-08: the small yard's starter has nothing but a switch."""
    assert not [row for row in found(SOUND) if row[0] == "heavy-motor"]


# --- means to switch off


def always_live(load: Device, **circuit: Any) -> list[Piece]:
    """Return the boat with a load that is fused straight from the battery."""
    return [
        *sound_pieces(), load, a_fuse("F-ON", 5.0), a_conductor("o1", "BAT.pos", "F-ON.line", size="14 AWG"),
        a_conductor("o2", "F-ON.load", f"{load.id}.pos", size="14 AWG"),
        a_conductor("o3", f"{load.id}.neg", "BUS-N", size="14 AWG"),
        a_circuit("ON", "o1", "o2", "o3", current_a=1.0, **circuit),
    ]  # fmt: skip


def test_a_load_that_only_a_fuse_parts_is_found() -> None:
    """LOD-10."""
    boat = a_boat(*always_live(a_load("RADIO", 1.0)))
    assert found_in(boat, means_off) == [("means-off", "RADIO")]


@pytest.mark.parametrize(
    ("pieces", "note"),
    [
        (always_live(with_part(a_load("RADIO", 1.0), has_own_switch=True)), "its own switch"),
        (always_live(a_load("RADIO", 1.0), service="alarm"), "may stay live: alarm"),
        (always_live(a_load("RADIO", 1.0), always_on="keeps its memory"), "may stay live: keeps its memory"),
        ([*always_live(a_load("RADIO", 1.0)), a_breaker("F-ON", 5.0)], ""),
    ],
)
def test_what_can_be_switched_off_or_may_stay_live_passes(pieces: list[Piece], note: str) -> None:
    """LOD-10."""
    told = {o.part: (o.verdict, o.note) for o in outcomes_of(a_boat(*pieces), means_off)}
    assert told["RADIO"] == (Verdict.PASSED, note)


def test_a_battery_switch_is_a_means_and_the_pass_says_that_it_takes_everything() -> None:
    """LOD-10."""
    told = {o.part: o.note for o in outcomes_of(a_boat(*sound_pieces()), means_off)}
    assert told == {"LAMP": "by SW, with all that is behind it", "PUMP": "by SW, with all that is behind it"}


def test_a_switch_that_another_feed_goes_round_is_no_means() -> None:
    """LOD-10."""
    round_it = [a_fuse("F-R", 5.0), a_conductor("r1", "BAT.pos", "F-R.line"), a_conductor("r2", "F-R.load", "LAMP.pos")]
    boat = a_boat(*sound_pieces(), *round_it)
    assert found_in(boat, means_off) == [("means-off", "LAMP"), ("means-off", "PUMP")]


def test_two_switches_that_must_both_be_opened_are_a_means() -> None:
    """LOD-10."""
    round_it = [a_switch("SW2"), a_conductor("r1", "F-MAIN.load", "SW2.in"), a_conductor("r2", "SW2.out", "BUS-P")]
    assert found_in(a_boat(*sound_pieces(), *round_it), means_off) == []
