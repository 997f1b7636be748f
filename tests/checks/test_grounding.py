"""Seed faults of bonding, grounding and metal, each beside its nearest sound twin."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from checker.boat.hull import Condition, Device, Engine, Joint, Shield
from checker.checks.grounding import (
    bond_current,
    bond_joints,
    case_ground,
    common_ground,
    floating_part,
    grounding_size,
    metal_return,
    shield_loop,
)
from checker.finding import Outcome, Verdict
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bond,
    a_bus,
    a_conductor,
    a_fuse,
    a_link,
    a_load,
    a_metal,
    a_row,
    a_source,
    a_switch,
    found_in,
    outcomes_of,
    sound_pieces,
)
from tests.small_yard import NEITHER, SOUND, finding, found, not_assessed


def with_part(device: Device, **facts: Any) -> Device:
    """Return a device whose part has other facts."""
    return replace(device, part=replace(device.part, **facts))


def not_assessed_in(boat: Any, check: Any, **more: Any) -> list[tuple[str, str, str]]:
    """Return what was not assessed: check, part, field."""
    rows = outcomes_of(boat, check, **more)
    return [(o.check, o.part, o.missing) for o in rows if o.verdict is Verdict.NOT_ASSESSED]


def passes_in(boat: Any, check: Any, **more: Any) -> list[Outcome]:
    """Return what passed."""
    return [o for o in outcomes_of(boat, check, **more) if o.verdict is Verdict.PASSED]


# --- what a bond carries


def leaking(current_a: float) -> list[Piece]:
    """Return a boat whose lamp returns to a bonding bar, and the bar over a bond to DC negative."""
    condition = Condition(
        id="under-way", switches=(("SW", "closed"),), closed=(), loads_a=(("LAMPS", current_a),), sources_a=()
    )
    return [
        *sound_pieces(), a_bus("BAR"), a_bond("B1", "BAR", "BUS-N"),
        a_conductor("lamp-back", "LAMP.neg", "BAR", size="14 AWG", length="3 m"), condition,
    ]  # fmt: skip


@pytest.mark.parametrize(("current_a", "expected"), [(0.009, []), (0.01, []), (0.011, [("bond-current", "B1")])])
def test_a_bond_that_carries_more_than_a_hundredth_of_an_ampere_is_found(
    current_a: float, expected: list[tuple[str, str]]
) -> None:
    """RET-02."""
    assert found_in(a_boat(*leaking(current_a)), bond_current) == expected


def test_current_in_a_bond_is_told_with_its_condition() -> None:
    """RET-02."""
    (one,) = [o for o in outcomes_of(a_boat(*leaking(2.0)), bond_current) if o.verdict is Verdict.FINDING]
    assert one.fault == "carries 2 A in condition under-way; a bond is to carry none"


def test_a_bond_that_only_joins_metal_carries_nothing() -> None:
    """RET-02."""
    pieces = [*sound_pieces(), a_metal("KEEL"), a_bond("B1", "KEEL", "BUS-N")]
    (one,) = passes_in(a_boat(*pieces), bond_current)
    assert (one.part, one.measure and one.measure.value) == ("B1", 0.0)


# --- how often bonding meets DC negative


def bonded(*more: Piece) -> list[Piece]:
    """Return a sound boat with two metal parts on a bonding bar, and what else is given."""
    return [
        *sound_pieces(), a_bus("BAR"), a_metal("KEEL"), a_metal("ANODE"), a_bond("B1", "BAR", "BUS-N"),
        a_bond("B2", "KEEL", "BAR"), a_bond("B3", "ANODE", "BAR"), a_bus("PANEL-N"),
        a_conductor("N1", "PANEL-N", "BUS-N"), *more,
    ]  # fmt: skip


def test_bonding_joined_at_one_place_is_sound() -> None:
    """T-18, RET-03."""
    assert found_in(a_boat(*bonded()), bond_joints) == []
    assert [o.part for o in passes_in(a_boat(*bonded()), bond_joints)] == ["B1"]


def test_a_second_joint_is_found_at_the_bond_that_is_not_at_the_reference() -> None:
    """RET-03."""
    boat = a_boat(*bonded(a_bond("A9", "KEEL", "PANEL-N")))
    assert found_in(boat, bond_joints) == [("bond-joints", "A9")]
    (one,) = [o for o in outcomes_of(boat, bond_joints) if o.verdict is Verdict.FINDING]
    assert one.remedy == "take A9 off PANEL-N: leave B1 as the one joint"


def test_the_remedy_of_a_second_joint_makes_it_go_away() -> None:
    """RET-03."""
    assert found_in(a_boat(*bonded(a_metal("TANK"), a_bond("A9", "KEEL", "TANK"))), bond_joints) == []


def test_a_bond_between_two_buses_that_wiring_joins_is_a_second_return() -> None:
    """RET-03."""
    assert found_in(a_boat(*bonded(a_bond("B9", "PANEL-N", "BUS-N"))), bond_joints) == [("bond-joints", "B9")]


def engine(*more: Piece) -> list[Piece]:
    """Return the boat with an engine whose starter and alternator are screwed into its block."""
    starter = replace(a_load("STARTER", 100.0, motor=True), is_engine_mounted=True)
    alternator = replace(a_source("ALT"), is_engine_mounted=True)
    return bonded(
        a_metal("BLOCK"), starter, alternator, Joint(id="J1", start="STARTER.neg", end="BLOCK"),
        Joint(id="J2", start="ALT.neg", end="BLOCK"), a_conductor("S1", "BUS-P", "STARTER.pos", size="2/0 AWG"),
        a_conductor("S2", "STARTER.neg", "BUS-N", size="2/0 AWG"),
        a_conductor("S3", "ALT.neg", "STARTER.neg", size="2/0 AWG"),
        a_conductor("S4", "ALT.out", "BUS-P", size="2/0 AWG"), *more,
    )  # fmt: skip


def test_what_is_mounted_on_an_engine_makes_its_block_part_of_dc_negative() -> None:
    """T-11, RET-03: two mountings and a strap are no two joints of the bonding system."""
    assert found_in(a_boat(*engine()), bond_joints) == []


def test_an_engine_block_on_the_bonding_bar_is_a_second_joint() -> None:
    """RET-03."""
    assert found_in(a_boat(*engine(a_bond("B9", "BLOCK", "BAR"))), bond_joints) == [("bond-joints", "B9")]


def test_metal_screwed_to_a_device_that_is_no_engine_is_a_joint_too() -> None:
    """RET-03."""
    joint = Joint(id="J9", start="PUMP.neg", end="KEEL")
    assert found_in(a_boat(*bonded(joint)), bond_joints) == [("bond-joints", "J9")]


def test_a_grounded_case_that_is_isolated_inside_is_a_piece_of_its_own() -> None:
    """RET-03, RET-12."""
    charger = with_part(a_source("CHG"), case_post="case", case_isolated=True)
    pieces = bonded(
        charger, a_conductor("C1", "CHG.out", "BUS-P"), a_conductor("C2", "CHG.neg", "BUS-N"),
        a_bond("B9", "CHG.case", "BUS-N"),
    )  # fmt: skip
    assert found_in(a_boat(*pieces), bond_joints, case_ground) == []


def test_bonds_that_were_not_recorded_are_not_assessed_once() -> None:
    """RET-03."""
    boat = a_boat(*sound_pieces(), bonds_recorded=False)
    assert not_assessed_in(boat, bond_joints) == [("bond-joints", "bonds", "bonds")]


def test_bonding_that_meets_dc_negative_nowhere_passes_and_says_so() -> None:
    pieces = [*sound_pieces(), a_metal("KEEL"), a_metal("ANODE"), a_bond("B1", "KEEL", "ANODE")]
    (one,) = passes_in(a_boat(*pieces), bond_joints)
    assert (one.part, one.note) == ("B1", "joined to DC negative nowhere")


# --- returns through metal


def test_the_return_of_a_device_that_stands_elsewhere_on_the_block_is_found_at_its_conductor() -> None:
    """RET-04."""
    yard = SOUND.edit("from: REGULATOR.gnd, to: BUS-N", "from: REGULATOR.gnd, to: ENGINE")
    line = "V3: {from: REGULATOR.gnd, to: ENGINE, size: 16 AWG, length: 2 m, colour: yellow}"
    assert ("metal-return", "V3", NEITHER, line) in found(yard)
    told = finding(yard, "metal-return", "V3")
    assert told.fault == "the return of REGULATOR leads through ENGINE, and not by a conductor of its own"
    assert told.path[:3] == ("REGULATOR.gnd", "V3", "ENGINE")


def test_engine_mounted_devices_may_return_through_the_block() -> None:
    """T-11, RET-04: the alternator has no return but its mounting, and the pass says so."""
    pieces = [piece for piece in engine() if getattr(piece, "id", "") != "S3"]
    boat = a_boat(*pieces)
    assert found_in(boat, metal_return) == []
    notes = {o.part: o.note for o in passes_in(boat, metal_return) if o.note}
    assert notes == {"ALT": "returns through the engine that it is mounted on"}


def on_block(**more: Any) -> list[Piece]:
    """Return the boat with a lamp whose return is landed on the engine block."""
    back = a_conductor("back", "GAUGE.neg", "BLOCK", size="14 AWG", **more)
    return engine(a_load("GAUGE", 1.0), a_conductor("out", "F-LAMP.load", "GAUGE.pos", size="14 AWG"), back)


def test_the_harness_of_the_engine_s_maker_may_return_on_the_block() -> None:
    """RET-04."""
    assert found_in(a_boat(*on_block()), metal_return) == [("metal-return", "back")]
    assert found_in(a_boat(*on_block(role="engine-harness", role_reason="maker")), metal_return) == []


def test_a_wire_past_the_metal_makes_it_sound() -> None:
    """RET-04: the return has a conductor, and the metal lies beside it."""
    beside = a_conductor("wire", "GAUGE.neg", "BUS-N", size="14 AWG")
    assert found_in(a_boat(*on_block(), beside), metal_return) == []


def test_several_devices_on_one_metal_return_are_told_once() -> None:
    """RET-04."""
    pieces = [*sound_pieces(), a_metal("HULL"), a_conductor("hull", "HULL", "BUS-N"), a_bus("BAR")]
    pieces += [a_conductor(f"{n}-back", f"{n.upper()}.neg", "BAR", size="12 AWG") for n in ("lamp", "pump")]
    boat = a_boat(*pieces, a_conductor("to-hull", "BAR", "HULL"))
    assert found_in(boat, metal_return) == [("metal-return", "to-hull")]


# --- shields


@pytest.mark.parametrize(
    ("joins", "expected"),
    [
        ([], []),
        (["LAMP.neg"], []),
        (["LAMP.neg", "MAST"], []),  # the mast is joined to nothing else
        (["LAMP.neg", "BUS-N"], [("shield-loop", "SCREEN")]),
        (["LAMP.neg", "KEEL"], [("shield-loop", "SCREEN")]),
        (["MAST", "LAMP.neg", "PUMP.neg"], [("shield-loop", "SCREEN")]),
    ],
)
def test_a_shield_joined_at_both_ends_is_a_second_return(joins: list[str], expected: list[tuple[str, str]]) -> None:
    """RET-05."""
    assert found_in(a_boat(*bonded(a_metal("MAST"), Shield(id="SCREEN", joins=tuple(joins)))), shield_loop) == expected


def test_two_shields_that_meet_on_metal_are_a_loop_together() -> None:
    """RET-05."""
    shields = [Shield(id=f"S-{name}", joins=(f"{name}.neg", "MAST")) for name in ("LAMP", "PUMP")]
    assert found_in(a_boat(*bonded(a_metal("MAST"), *shields)), shield_loop) == [
        ("shield-loop", "S-LAMP"),
        ("shield-loop", "S-PUMP"),
    ]


def test_shields_that_were_not_recorded_are_not_assessed_once() -> None:
    """RET-05."""
    yard = SOUND.edit("shields:\n  PLOTTER-SHIELD: {joins: [PLOTTER.load.neg]}", "shields: not recorded")
    assert ("shield-loop", "shields", NEITHER, "shields: not recorded") in not_assessed(yard)


# --- two petrol engines


def twins(
    size: str = "6 AWG",
    *,
    starting_a: float = 120.0,
    fuel: str = "petrol",
    mounting: str = "inboard",
    end: str = "BUS-N",
) -> list[Piece]:
    """Return a boat with two engines whose cranking motors return to the bus; the second by a size to an end."""
    pieces: list[Piece] = [*sound_pieces()]
    for number, back, to in (("1", "2/0 AWG", "BUS-N"), ("2", size, end)):
        role = {"role": "cranking", "role_reason": "cranking motor"}
        pieces += [
            a_metal(f"BLOCK{number}"), a_battery(f"BAT{number}", bank=f"START{number}"), a_switch(f"SW{number}"),
            replace(a_load(f"CRANK{number}", starting_a, motor=True), is_engine_mounted=True),
            Joint(id=f"J{number}", start=f"CRANK{number}.neg", end=f"BLOCK{number}"),
            Engine(id=f"E{number}", fuel=fuel, mounting=mounting, block=f"BLOCK{number}"),
            a_conductor(f"P{number}", f"BAT{number}.pos", f"SW{number}.in", size="2/0 AWG", **role),
            a_conductor(f"Q{number}", f"SW{number}.out", f"CRANK{number}.pos", size="2/0 AWG", **role),
            a_conductor(f"R{number}", f"CRANK{number}.neg", to, size=back, **role),
            a_conductor(f"S{number}", "BUS-N", f"BAT{number}.neg", size="2/0 AWG", **role),
        ]  # fmt: skip
    return pieces


PAIR = [("common-ground", "CRANK1 and CRANK2")]


@pytest.mark.parametrize(("starting_a", "expected"), [(119.0, []), (120.0, []), (121.0, PAIR)])
def test_the_common_conductor_bears_the_starting_current(starting_a: float, expected: list[tuple[str, str]]) -> None:
    """RET-08: 6 AWG at 105 C bears 120 A."""
    assert found_in(a_boat(*twins(starting_a=starting_a)), common_ground) == expected


def test_returns_that_meet_over_battery_cables_alone_have_no_common_conductor() -> None:
    """RET-08."""
    pieces = twins("2/0 AWG", end="BAT2.neg")
    assert found_in(a_boat(*pieces), common_ground) == PAIR
    crossover = a_conductor("X", "CRANK1.neg", "CRANK2.neg", size="2/0 AWG")
    assert found_in(a_boat(*pieces, crossover), common_ground) == []


@pytest.mark.parametrize("facts", [{"fuel": "diesel"}, {"mounting": "outboard"}])
def test_only_petrol_engines_that_are_no_outboards_count(facts: dict[str, str]) -> None:
    """RET-08."""
    assert outcomes_of(a_boat(*twins("14 AWG", **facts)), common_ground) == []  # type: ignore[arg-type]


def test_a_petrol_generator_counts_beside_one_petrol_engine() -> None:
    """RET-08."""
    pieces = [piece for piece in twins("14 AWG") if getattr(piece, "id", "") != "E2"]
    assert outcomes_of(a_boat(*pieces), common_ground) == []
    assert found_in(a_boat(*pieces, generator_fuel="petrol"), common_ground) == PAIR


def test_only_the_law_asks_for_a_common_conductor() -> None:
    """RET-08."""
    assert outcomes_of(a_boat(*twins("14 AWG")), common_ground, limit_set="voluntary-dc") == []


def test_petrol_engines_without_cranking_motors_in_the_data_are_not_assessed() -> None:
    """RET-08."""
    pieces = [p for p in twins() if not getattr(p, "id", "").startswith(("CRANK2", "Q2", "R2", "J2"))]
    ((check, part, missing),) = not_assessed_in(a_boat(*pieces), common_ground)
    assert (check, part) == ("common-ground", "E1")
    assert "role cranking" in missing


# --- cases


def cased(bond: str, feed: str = "6 AWG", *, case_isolated: bool | None = True) -> list[Piece]:
    """Return the boat with a charger whose case a bond of some size grounds."""
    charger = with_part(a_source("CHG"), case_post="case", case_isolated=case_isolated)
    return [
        *sound_pieces(), charger, a_fuse("F-CHG", 60.0, mount={"line": "BUS-P"}),
        a_conductor("C1", "CHG.out", "F-CHG.load", size=feed), a_conductor("C2", "CHG.neg", "BUS-N", size=feed),
        a_bond("B1", "CHG.case", "BUS-N", size=bond),
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("bond", "feed", "is_sound"),
    [
        ("4 AWG", "6 AWG", True),
        ("6 AWG", "6 AWG", True),
        ("8 AWG", "6 AWG", True),
        ("10 AWG", "6 AWG", False),
        ("1/0 AWG", "2/0 AWG", True),
        ("1 AWG", "2/0 AWG", False),
        ("10 mm2", "16 mm2", True),
        ("6 mm2", "16 mm2", False),
        ("16 mm2", "6 AWG", True),  # 8 AWG is 8.4 mm2
        ("6 mm2", "6 AWG", False),
    ],
)
def test_a_grounding_conductor_may_be_one_size_thinner_than_the_feed(bond: str, feed: str, is_sound: bool) -> None:
    """RET-09."""
    assert found_in(a_boat(*cased(bond, feed)), grounding_size) == ([] if is_sound else [("grounding-size", "B1")])


def test_the_remedy_names_the_size_that_is_enough() -> None:
    """RET-09."""
    (one,) = outcomes_of(a_boat(*cased("10 AWG")), grounding_size)
    assert one.remedy == "use 8 AWG or larger"


@pytest.mark.parametrize(("isolated", "expected"), [(True, []), (False, [("case-ground", "CHG")]), (None, [])])
def test_a_grounded_case_on_a_pole_inside_is_found(isolated: bool | None, expected: list[tuple[str, str]]) -> None:
    """RET-12."""
    assert found_in(a_boat(*cased("6 AWG", case_isolated=isolated)), case_ground) == expected


def test_a_case_of_which_nothing_is_known_is_not_assessed_once_for_its_part() -> None:
    """RET-12."""
    pieces = [*cased("6 AWG", case_isolated=None)]
    second = with_part(a_source("CHG2"), case_post="case")
    pieces += [second, a_bond("B2", "CHG2.case", "BUS-N")]
    assert not_assessed_in(a_boat(*pieces), case_ground) == [("case-ground", "source", "case_isolated")]


# --- the reference


def bow_bank(*more: Piece) -> list[Piece]:
    """Return the boat with a bank of 24 V that a fuse and a lamp hang on."""
    return [
        *sound_pieces(), a_battery("BOW1", bank="BOW"), a_battery("BOW2", bank="BOW"),
        a_link("L1", "BOW1.neg", "BOW2.pos"), a_fuse("F-BOW", 10.0), a_load("LIGHT", 1.0, volts=24.0),
        a_conductor("Z1", "BOW1.pos", "F-BOW.line"), a_conductor("Z2", "F-BOW.load", "LIGHT.pos"),
        a_conductor("Z3", "LIGHT.neg", "BOW2.neg"), *more,
    ]  # fmt: skip


def test_a_bank_that_nothing_ties_to_the_reference_is_found() -> None:
    """RET-10."""
    assert found_in(a_boat(*bow_bank()), floating_part) == [("floating-part", "BOW")]


@pytest.mark.parametrize("tie", [a_bond("B1", "BOW2.neg", "BUS-N"), a_conductor("N1", "BOW2.neg", "BUS-N")])
def test_a_bank_tied_at_one_place_is_sound(tie: Piece) -> None:
    """RET-10."""
    assert found_in(a_boat(*bow_bank(tie)), floating_part, bond_joints) == []


def test_a_bank_whose_negative_a_switch_opens_is_tied_where_some_normal_state_closes_it() -> None:
    """RET-10."""
    pieces = bow_bank(
        a_switch("SW-N"), a_conductor("N1", "BOW2.neg", "SW-N.in"), a_conductor("N2", "SW-N.out", "BUS-N"),
        a_row("on", SW="closed", SW_N="closed"), a_row("off", SW="closed", SW_N="open"),
    )  # fmt: skip
    assert found_in(a_boat(*pieces), floating_part) == []
