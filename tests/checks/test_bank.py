"""Seed faults of a bank: unlike batteries, uneven shares, inner landings, thin links, bare strings."""

from __future__ import annotations

import itertools
from collections.abc import Mapping
from dataclasses import replace

import pytest

from checker.boat.hull import Boat, Condition, Device
from checker.checks.bank import alike_batteries, even_shares, inner_landing, string_device
from checker.finding import Outcome, Verdict
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_circuit,
    a_conductor,
    a_fuse,
    a_link,
    a_load,
    found_in,
    outcomes_of,
    studied,
)
from tests.networks import Sketch
from tests.small_yard import BOTH, NEITHER, SOUND, Told, Yard, finding, found, not_assessed, passed

BAT = "BAT-H: {part: house-battery, zone: LOCKER, bank: HOUSE}"
BARE = ("string-device", "HOUSE", NEITHER, BAT)
LEADS = (
    "length: 5.9 in",
    "from: F-CHARGER.line, to: BAT-H.pos, size: 10 AWG, length: 0.1 m",
    "from: BAT-H.pos, to: F-SENSE.line, size: 16 AWG, length: 0.1 m",
    "from: BAT-H.pos, to: F-MONITOR.line, size: 16 AWG, length: 0.1 m",
)


def roomy() -> Yard:
    """Return the sound yard fit for a larger bank: its leads lie in a sheath, its fuses break more."""
    yard = SOUND
    for lead in LEADS:
        yard = yard.edit(lead, f"{lead}, enclosed: full, place_reason: the row lies between")
    for fuse, breaks in (("bolt-fuse", "10 kA"), ("blade-fuse", "5 kA")):
        facts = f"{fuse}: {{kind: fuse, voltage: 32 V, interrupting:"
        yard = yard.edit(f"{facts} {breaks}", f"{facts} 20 kA")
    return yard


def link(number: int, pole: str, size: str, length: str) -> str:
    """Return the line of a link from the row's battery of this number to the next."""
    ends = f"from: BAT-H{number}.{pole}, to: BAT-H{number + 1}.{pole}".replace("BAT-H1.", "BAT-H.")
    return (
        f"L{number}-{pole}: {{{ends}, size: {size}, length: {length}, current: 40 A, "
        "enclosed: full, role: bank, reason: the row}"
    )


def row_of(
    count: int, *, size: str = "2 AWG", length: str = "0.1 m", corners: bool = True, part: str = "house-battery"
) -> Yard:
    """Return the yard with a house bank of batteries in a row, taken off at opposite corners or at one end."""
    batteries = [f"  BAT-H{i}: {{part: {part}, zone: LOCKER, bank: HOUSE}}" for i in range(2, count + 1)]
    links = [f"  {link(i, pole, size, length)}" for i in range(1, count) for pole in ("pos", "neg")]
    yard = roomy().also("\n".join(["devices:", *batteries, "conductors:", *links]) + "\n")
    capacity_ah = 100 + (count - 1) * (75 if part == "start-battery" else 100)
    yard = yard.edit("capacity: 100 Ah, ratio", f"capacity: {capacity_ah} Ah, ratio")  # of the monitor
    return yard.edit("from: BAT-H.neg, to: SHUNT.bat", f"from: BAT-H{count}.neg, to: SHUNT.bat") if corners else yard


def test_two_alike_batteries_taken_off_at_opposite_corners_are_sound() -> None:
    """All of the checks."""
    yard = row_of(2)
    assert found(yard) == []
    checks = "alike-batteries", "even-shares", "inner-landing", "string-device"
    assert passed(yard) >= {(check, "HOUSE", NEITHER) for check in checks}
    assert passed(yard) >= {("bank-links", f"L1-{pole}", s) for pole in ("pos", "neg") for s in ("law", "practice")}


# --- alike-batteries


def test_batteries_of_unlike_capacity_in_one_bank_are_found_at_the_bank() -> None:
    """BNK-01: 75 Ah beside 100 Ah."""
    yard = row_of(2, part="start-battery")
    assert found(yard) == [("alike-batteries", "HOUSE", NEITHER, BAT)]
    fault = finding(yard, "alike-batteries", "HOUSE").fault
    assert fault == "unlike batteries: BAT-H2 12 V 75 Ah agm-lead; BAT-H 12 V 100 Ah agm-lead"


EMERGENCY_LINK = """\
devices:
  SW-E: {part: battery-switch, zone: LOCKER}
  F-E: {part: bolt-fuse, zone: LOCKER, rating: 150 A}
  F-E2: {part: bolt-fuse, zone: LOCKER, rating: 150 A}
circuits:
  EMERGENCY:
    name: Emergency link
    service: feeder
    current: 100 A
    conductors:
      E1: {from: BUS-P, to: F-E2.line, size: 2 AWG, length: 0.1 m}
      E2: {from: F-E2.load, to: SW-E.in, size: 2 AWG, length: 0.3 m}
      E3: {from: SW-E.out, to: F-E.load, size: 2 AWG, length: 0.3 m}
      E4: {from: F-E.line, to: BAT-S.pos, size: 2 AWG, length: 0.1 m}
states:
  in-use: {kind: normal, switches: {SW-E: open}}
  jump: {kind: abnormal, switches: {SW-E: closed}}
"""


def test_emergency_link_may_join_unlike_banks() -> None:
    """T-32: 100 Ah and 75 Ah, in banks of their own."""
    yard = SOUND.also(EMERGENCY_LINK)
    assert "alike-batteries" not in {check for check, *_ in found(yard)}
    assert passed(yard) >= {("alike-batteries", bank, NEITHER) for bank in ("HOUSE", "START")}


def cell(name: str, **facts: object) -> Device:
    """Place a battery of the house bank with other facts."""
    device = a_battery(name)
    return replace(device, part=replace(device.part, **facts))  # type: ignore[arg-type]


def parallel(*cells: Device) -> Boat:
    """Return a boat of batteries side by side on two buses."""
    leads = [
        a_link(f"{c.id}-{pole}", f"{c.id}.{pole}", bus)
        for c in cells
        for pole, bus in (("pos", "BUS-P"), ("neg", "BUS-N"))
    ]
    return a_boat(a_bus("BUS-P"), a_bus("BUS-N"), *cells, *leads)


@pytest.mark.parametrize("facts", [{"capacity_ah": 99.0}, {"chemistry": "gel-lead"}, {"voltage_v": 6.0}])
def test_one_unlike_fact_is_enough(facts: Mapping[str, object]) -> None:
    """BNK-01."""
    assert found_in(parallel(cell("A"), cell("B", **facts)), alike_batteries) == [("alike-batteries", "HOUSE")]


def test_batteries_alike_in_voltage_capacity_and_chemistry_are_alike() -> None:
    """BNK-01: the name of the part is no matter."""
    assert found_in(parallel(cell("A"), cell("B", id="another-maker")), alike_batteries) == []


def series_bank(*strings: int) -> Boat:
    """Return a bank of strings with so many batteries of 6 V in series each."""
    pieces: list[Piece] = [a_bus("BUS-P"), a_bus("BUS-N")]
    for letter, count in zip("ABC", strings, strict=False):
        names = [f"{letter}{i}" for i in range(count)]
        posts = ["BUS-N", *(f"{n}.{pole}" for n in names for pole in ("neg", "pos")), "BUS-P"]
        pieces += [cell(name, voltage_v=6.0) for name in names]
        pieces += [a_link(f"{a}-{b}", a, b) for a, b in zip(posts[::2], posts[1::2], strict=True)]
    return a_boat(*pieces)


@pytest.mark.parametrize("strings", [(2, 1), (2, 3), (1, 2, 2)])
def test_strings_of_unequal_length_in_one_bank_are_found(strings: tuple[int, ...]) -> None:
    """BNK-01: every battery is alike, the strings are not."""
    boat = series_bank(*strings)
    assert found_in(boat, alike_batteries) == [("alike-batteries", "HOUSE")]
    (told,) = (o for o in outcomes_of(boat, alike_batteries) if o.verdict is Verdict.FINDING)
    assert told.fault.endswith(f"strings of {', '.join(str(n) for n in sorted(set(strings)))} batteries")


@pytest.mark.parametrize("strings", [(1,), (2,), (2, 2), (3, 3)])
def test_strings_of_one_length_add_volts_in_series_and_ampere_hours_in_parallel(strings: tuple[int, ...]) -> None:
    """BNK-01; and the arithmetic of the bank: 6 V and 100 Ah each."""
    boat = series_bank(*strings)
    assert found_in(boat, alike_batteries) == []
    (bank,) = studied(*_pieces(boat)).banks
    assert [len(string) for string in bank.strings] == list(strings)
    assert (bank.voltage_v, bank.capacity_ah) == (6.0 * strings[0], 100.0 * len(strings))


def _pieces(boat: Boat) -> list[Piece]:
    return [*boat.devices.values(), *boat.conductors.values()]


# --- even-shares


@pytest.mark.parametrize(
    ("corners", "shares_a"),
    [(False, (35.75, 26.12, 20.40, 17.74)), (True, (26.74, 23.26, 23.26, 26.74))],
    ids=["one end", "opposite ends"],
)
def test_four_equal_batteries_share_by_their_links(corners: bool, shares_a: tuple[float, ...]) -> None:
    """BNK-04: 20 mohm each, links of 1.5 mohm, 100 A; shares known from published figures."""
    sketch = Sketch()
    top = [sketch.post() for _ in shares_a]
    bottom = [sketch.post() for _ in shares_a]
    for pos, neg in zip(top, bottom, strict=True):
        sketch.battery(pos, neg, 12.8, 0.020)
    for posts in (top, bottom):
        for a, b in itertools.pairwise(posts):
            sketch.join(a, b, 0.0015)
    sketch.draw(top[0], bottom[-1 if corners else 0], 100.0, 12.0, "constant-current")
    case = sketch.made(bottom[0])
    flow = case.grid(is_full=True).solve(case.draws, case.feeds)
    assert list(flow.battery_currents().values()) == pytest.approx(shares_a, abs=0.005)  # type: ignore[union-attr]


def test_both_leads_from_one_end_of_a_row_are_found_at_the_bank() -> None:
    """BNK-04: links of 0.25 m of 8 AWG, 0.54 mohm, beside batteries of 4 mohm: 1 + 0.54/4.54 of the equal share."""
    yard = row_of(2, size="8 AWG", length="0.25 m", corners=False)
    assert found(yard) == [("even-shares", "HOUSE", NEITHER, BAT)]
    told = finding(yard, "even-shares", "HOUSE")
    assert told.measure is not None
    assert told.measure.value == pytest.approx(1 + 0.54 / 4.54, abs=0.002)
    assert told.fault == "of 47 A in condition under-way the strings take BAT-H 26.4 A, BAT-H2 20.9 A"


@pytest.mark.parametrize("facts", [("0.2 m", False), ("0.25 m", True)], ids=["shorter links", "opposite corners"])
def test_shares_within_a_tenth_of_equal_are_sound(facts: tuple[str, bool]) -> None:
    """BNK-04: the nearest sound rows: 1.097 of the equal share, and the same links taken off at the corners."""
    assert found(row_of(2, size="8 AWG", length=facts[0], corners=facts[1])) == []


def test_shares_are_not_assessed_without_the_figures_of_a_battery() -> None:
    """BNK-04: nothing is skipped in silence."""
    yard = row_of(2).also_parts("spare: {kind: battery, voltage: 12 V, capacity: 100 Ah, chemistry: agm-lead}")
    yard = yard.edit("BAT-H2: {part: house-battery", "BAT-H2: {part: spare")
    assert ("even-shares", "HOUSE", NEITHER, BAT) in not_assessed(yard)


def shares_of(*strings_ohm: float) -> Outcome:
    """Return what is told of strings of such resistance on two buses, while they give 100 A."""
    cells = [cell(f"B{i}", resistance_full_ohm=ohm) for i, ohm in enumerate(strings_ohm)]
    boat = parallel(*cells)
    more: list[Piece] = [
        a_load("LOAD", 100.0),
        a_conductor("X1", "BUS-P", "LOAD.pos"),
        a_conductor("X2", "LOAD.neg", "BUS-N"),
        a_circuit("USE", "X1", "X2", load="LOAD"),
        Condition(id="use", switches=(), closed=(), loads_a=(("LOAD", 100.0),), sources_a=()),
    ]
    (told,) = outcomes_of(a_boat(*_pieces(boat), *more), even_shares)
    return told


@pytest.mark.parametrize(("ohm", "verdict"), [(0.020, Verdict.PASSED), (0.026, Verdict.FINDING)])
def test_strings_led_alike_to_a_bus_share_by_their_own_resistance(ohm: float, verdict: Verdict) -> None:
    """BNK-04: a string of 20 mohm beside one of 20 or 26 mohm gives 1.0 or 2·26/46 of its equal share."""
    told = shares_of(0.020, ohm)
    assert told.verdict is verdict
    assert told.measure is not None
    assert told.measure.value == pytest.approx(2 * ohm / (0.020 + ohm), abs=0.001)


# --- inner-landing


def landed_on(battery: str) -> tuple[Yard, Told]:
    """Return a row of three with the charger landed on one of them, and the finding that is due for an inner one."""
    old = "C3: {from: F-CHARGER.line, to: BAT-H.pos,"
    yard = row_of(3).edit(old, old.replace("BAT-H.pos", f"{battery}.pos"))
    line = next(t for t in yard.files["classes/skiff/class.yaml"].splitlines() if t.strip().startswith("C3:"))
    return yard, ("inner-landing", "C3", NEITHER, line.strip())


def test_charger_landed_between_others_of_the_row_is_found_at_its_lead() -> None:
    """BNK-05."""
    yard, told = landed_on("BAT-H2")
    assert found(yard) == [told, BARE]
    assert finding(yard, "inner-landing", "C3").fault == "lands on BAT-H2, which stands between others of its row"


@pytest.mark.parametrize("battery", ["BAT-H", "BAT-H3"])
def test_charger_landed_at_an_end_of_the_row_is_sound(battery: str) -> None:
    """BNK-05."""
    yard, _ = landed_on(battery)
    assert found(yard) == [BARE]
    assert ("inner-landing", "HOUSE", NEITHER) in passed(yard)


def test_fuse_that_stands_on_a_post_between_others_of_the_row_is_found() -> None:
    """BNK-05: the alternator lands by its fuse."""
    old = "rating: 80 A, mount: {line: BAT-H.pos}"
    yard = row_of(3).edit(old, old.replace("BAT-H", "BAT-H2"))
    assert "inner-landing" in {check for check, *_ in found(yard)}


@pytest.mark.parametrize("pole", ["pos", "neg"])
def test_landing_between_batteries_counts_on_either_pole(pole: str) -> None:
    """BNK-05; a link to a series neighbour is no row."""
    cells = [a_battery(name) for name in "ABC"]
    links = [a_link(f"{a}{b}-{p}", f"{a}.{p}", f"{b}.{p}") for a, b in ("AB", "BC") for p in ("pos", "neg")]
    boat = a_boat(a_bus("BUS-N"), *cells, *links, a_conductor("W", f"B.{pole}", "BUS-N"))
    assert found_in(boat, inner_landing) == [("inner-landing", "W")]


def test_landing_between_batteries_in_series_is_no_inner_landing() -> None:
    """BNK-05: what is wrong with a tap between batteries in series is told by another check."""
    chain = [a_link("L1", "A.pos", "B.neg"), a_link("L2", "B.pos", "C.neg")]
    ends = [a_conductor("W", "B.pos", "BUS-P"), a_conductor("G", "A.neg", "BUS-N")]
    boat = a_boat(a_bus("BUS-P"), a_bus("BUS-N"), *(a_battery(n) for n in "ABC"), *chain, *ends)
    assert found_in(boat, inner_landing) == []


# --- bank-links


def test_link_that_cannot_bear_the_bank_s_current_alone_is_found_at_its_size() -> None:
    """BNK-06: 12 AWG bears 45 A; with one string out the other takes all of 47.3 A through it."""
    yard = row_of(2, size="12 AWG", length="0.05 m")
    lines = {pole: link(1, pole, "12 AWG", "0.05 m") for pole in ("neg", "pos")}
    assert found(yard) == [("bank-links", f"L1-{pole}", BOTH, line) for pole, line in lines.items()]
    told = finding(yard, "bank-links", "L1-pos", "law")
    assert told.fault == "12 AWG carries 47.3 A in condition under-way with string BAT-H out, but bears 45 A"
    assert "with string BAT-H2 out" in finding(yard, "bank-links", "L1-neg", "law").fault


def test_link_that_bears_the_bank_s_current_alone_is_sound() -> None:
    """BNK-06: 10 AWG bears 60 A."""
    assert found(row_of(2, size="10 AWG", length="0.05 m")) == []


# --- string-device


def test_row_of_three_without_a_device_for_each_string_is_found_at_the_bank() -> None:
    """BNK-07."""
    assert found(row_of(3)) == [BARE]
    fault = finding(row_of(3), "string-device", "HOUSE").fault
    assert fault == "3 parallel strings, and no device at the top of BAT-H, BAT-H2, BAT-H3"


def strings(count: int, *, fused: int, chemistry: str = "flooded-lead") -> Boat:
    """Return a bank of parallel strings on buses, of which the first have a fuse of their own."""
    pieces: list[Piece] = [a_bus("BUS-P"), a_bus("BUS-N")]
    for i in range(count):
        pieces += [cell(f"B{i}", chemistry=chemistry), a_link(f"N{i}", f"B{i}.neg", "BUS-N")]
        if i < fused:
            pieces += [a_fuse(f"F{i}", 100.0), a_link(f"P{i}", f"B{i}.pos", f"F{i}.line")]
            pieces.append(a_link(f"T{i}", f"F{i}.load", "BUS-P"))
        else:
            pieces.append(a_link(f"P{i}", f"B{i}.pos", "BUS-P"))
    return a_boat(*pieces)


@pytest.mark.parametrize(
    ("count", "fused", "chemistry"),
    [
        (3, 0, "flooded-lead"), (3, 1, "agm-lead"), (4, 2, "flooded-lead"),
        (2, 0, "lithium-iron-phosphate"), (2, 0, "other-lithium"),
    ],
)  # fmt: skip
def test_strings_that_feed_each_other_without_a_device_are_found(count: int, fused: int, chemistry: str) -> None:
    """BNK-07: three strings or more of lead, two or more of lithium."""
    boat = strings(count, fused=fused, chemistry=chemistry)
    assert found_in(boat, string_device) == [("string-device", "HOUSE")]
    (told,) = (o for o in outcomes_of(boat, string_device) if o.verdict is Verdict.FINDING)
    assert told.fault.endswith(f"top of {', '.join(f'B{i}' for i in range(fused, count))}")


@pytest.mark.parametrize(
    ("count", "fused", "chemistry"),
    [
        (1, 0, "flooded-lead"), (2, 0, "flooded-lead"), (3, 3, "flooded-lead"), (4, 4, "agm-lead"),
        (1, 0, "lithium-iron-phosphate"), (2, 2, "lithium-iron-phosphate"),
    ],
)  # fmt: skip
def test_two_strings_of_lead_or_a_device_for_each_string_are_sound(count: int, fused: int, chemistry: str) -> None:
    """BNK-07."""
    assert found_in(strings(count, fused=fused, chemistry=chemistry), string_device) == []


def test_one_device_for_the_whole_row_does_not_part_its_strings() -> None:
    """BNK-07: three strings meet ahead of the one fuse."""
    boat = strings(3, fused=0)
    main: list[Piece] = [
        a_fuse("F", 200.0),
        a_bus("OUT"),
        a_link("X", "BUS-P", "F.line"),
        a_conductor("Y", "F.load", "OUT"),
    ]
    assert found_in(a_boat(*_pieces(boat), *main), string_device) == [("string-device", "HOUSE")]
