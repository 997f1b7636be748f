"""Seed faults of places: petrol, gas, bilge water, heat, hydrogen, reach, bulkheads, AC beside DC."""

from __future__ import annotations

import pytest

from checker.finding import Outcome, Verdict
from tests.builders import a_boat, outcomes_of, sound_pieces
from tests.checks.test_devices import SENSOR
from tests.small_yard import LAW, NEITHER, PRACTICE_ONLY, SOUND, Yard, finding, found, not_assessed, outcomes, passed

CLAIM = "{by: bulkhead, height: 4 ft, tight_to: 12 in, gap: 6 mm}"
CLAIM_LINE = "isolated_from: {{FUEL: {}}}}}"
BOW = "BOW: {name: bow, ambient: 30 C, wet: true, bilge_water: true}"
BOW_LIGHT = "load: bow-light"
LOCKER = "LOCKER: {name: battery locker, ambient: 30 C, fuel_parts: false, hydrogen_vent: true, access: at-once}"
IN_THE_LOCKER = "fuel_parts: false, hydrogen_vent: true, access: at-once}"


# --- isolation-claim


def claimed(claim: str) -> Yard:
    """Return the yard with another claim that the cabin is isolated from the petrol locker."""
    return SOUND.edit(CLAIM, claim)


@pytest.mark.parametrize(
    ("claim", "told"),
    [
        (
            "{by: bulkhead, height: 4 ft, tight_to: 11.9 in, gap: 6 mm}",
            "holds water up to 0.302 m (11.9 in), at least 0.305 m",
        ),
        (
            "{by: bulkhead, height: 30 in, tight_to: 9.9 in, gap: 6 mm}",
            "holds water up to 0.251 m (9.9 in), at least 0.254 m",
        ),
        (
            "{by: bulkhead, height: 4 ft, tight_to: 12 in, gap: 6.4 mm}",
            "its gaps are 6.40 mm (0.25 in) wide, at most 6.35 mm",
        ),
        ("{by: below, sealed: false}", "fuel and vapour are not kept"),
        ("{by: above, deck_between: false}", "neither a deck nor an enclosure"),
        (
            "{by: open-space, distance: 1.9 ft, open_to_air: true}",
            "the distance is 0.579 m (22.8 in), at least 0.610 m",
        ),
        ("{by: open-space, distance: 2 ft, open_to_air: false}", "not open to the atmosphere"),
    ],
)
def test_claim_that_does_not_isolate_is_found_at_the_claim(claim: str, told: str) -> None:
    """ZON-02."""
    yard = claimed(claim)
    assert found(yard) == [("isolation-claim", "CABIN from FUEL", LAW, CLAIM_LINE.format(claim))]
    assert told in finding(yard, "isolation-claim", "CABIN from FUEL").fault


@pytest.mark.parametrize(
    "claim",
    [
        CLAIM,
        "{by: bulkhead, tight_to: 12 in, gap: 0.25 in}",
        "{by: bulkhead, height: 30 in, tight_to: 10 in, gap: 0 mm}",
        "{by: below, sealed: true}",
        "{by: above, deck_between: true}",
        "{by: open-space, distance: 2 ft, open_to_air: true}",
    ],
)
def test_claim_that_isolates_is_sound(claim: str) -> None:
    """ZON-02: at the limit too; a bulkhead tight to 12 in needs no height."""
    yard = SOUND if claim == CLAIM else claimed(claim)
    assert found(yard) == not_assessed(yard) == []
    assert ("isolation-claim", "CABIN from FUEL", LAW) in passed(yard)


@pytest.mark.parametrize(
    ("claim", "missing"),
    [
        ("{by: bulkhead}", "tight_to, gap"),
        ("{by: bulkhead, tight_to: 11 in, gap: 6 mm}", "height"),
        ("{by: below}", "sealed"),
        ("{by: above}", "deck_between"),
        ("{by: open-space}", "distance, open_to_air"),
    ],
)
def test_claim_without_its_figures_is_not_assessed(claim: str, missing: str) -> None:
    yard = claimed(claim)
    assert found(yard) == []
    assert not_assessed(yard) == [("isolation-claim", "CABIN from FUEL", LAW, CLAIM_LINE.format(claim))]
    assert missing_of(yard, "isolation-claim") == missing


def missing_of(yard: Yard, check: str) -> str:
    """Return the field that the one place a check could not judge asks for."""
    return not_judged(yard, check).missing


def not_judged(yard: Yard, check: str) -> Outcome:
    """Return the one place that a check could not judge."""
    (one,) = [o for o in outcomes(yard, Verdict.NOT_ASSESSED) if o.check == check]
    return one


def test_bulkhead_with_an_opening_does_not_isolate() -> None:
    """ZON-02: and what can spark on the other side of the opening is found."""
    opened = SOUND.edit("CABIN: {name: cabin and panel,", "CABIN: {name: cabin and panel, opens_to: [FUEL],")
    told = {row[:3] for row in found(opened)}
    assert ("isolation-claim", "CABIN from FUEL", LAW) in told
    assert {("ignition-protection", name, LAW) for name in ("CHARGER", "P1", "PLOTTER.load")} <= told


def test_voluntary_set_judges_no_claim() -> None:
    assert found(PRACTICE_ONLY.edit(CLAIM, "{by: below, sealed: false}")) == []


# --- air that is shared with petrol


@pytest.mark.parametrize(
    ("old", "new"),
    [
        (BOW, BOW.replace("wet: true", "opens_to: [FUEL], wet: true")),
        ("petrol_vapour: true}", "petrol_vapour: true, opens_to: [BOW]}"),
    ],
)
def test_part_that_can_spark_in_a_zone_that_shares_air_with_petrol_is_found(old: str, new: str) -> None:
    """ZON-01: whichever of the two zones tells of the opening."""
    yard = SOUND.edit(old, new)
    assert found(yard) == [("ignition-protection", "BOW-LIGHT.load", LAW, BOW_LIGHT)]
    assert "shares air with FUEL" in finding(yard, "ignition-protection", "BOW-LIGHT.load").fault


def test_vapour_goes_on_through_a_second_opening() -> None:
    """ZON-01."""
    yard = SOUND.edit(BOW, BOW.replace("wet: true", "opens_to: [STORE], wet: true"))
    yard = yard.also("zones:\n  STORE: {name: store, ambient: 30 C, opens_to: [FUEL]}\n")
    assert found(yard) == [("ignition-protection", "BOW-LIGHT.load", LAW, BOW_LIGHT)]


def test_open_space_isolates_zones_that_share_air() -> None:
    """ZON-01, ZON-02: 2 ft in the open."""
    space = "opens_to: [FUEL], isolated_from: {FUEL: {by: open-space, distance: 2 ft, open_to_air: true}}, wet: true"
    assert found(SOUND.edit(BOW, BOW.replace("wet: true", space))) == []
    in_doubt = SOUND.edit(BOW, BOW.replace("wet: true", space.replace("distance: 2 ft, ", "")))
    assert found(in_doubt) == []
    assert [row[:2] for row in not_assessed(in_doubt)] == [
        ("ignition-protection", "BOW"),
        ("isolation-claim", "BOW from FUEL"),
    ]


def test_part_that_can_spark_on_a_boat_without_petrol_is_sound() -> None:
    """T-21: a diesel boat."""
    yard = SOUND.edit(SENSOR, SENSOR.replace("true", "false")).edit("petrol_vapour: true", "petrol_vapour: false")
    assert found(yard) == []


def test_fuel_line_without_joints_is_no_source_of_vapour() -> None:
    """T-22: a zone with ordinary parts that a fuel line passes."""
    assert (
        found(SOUND.edit("CABIN: {name: cabin and panel,", "CABIN: {name: cabin and fuel line, fuel_parts: false,"))
        == []
    )


# --- gas-locker


def test_lamp_in_a_gas_locker_is_found() -> None:
    """ZON-03: metal that carries nothing, the anode, may stand there."""
    yard = SOUND.edit(BOW, BOW.replace("wet: true", "cooking_gas: true, wet: true"))
    assert found(yard) == [("gas-locker", "BOW-LIGHT.load", NEITHER, BOW_LIGHT)]
    assert "is neither valve nor alarm" in finding(yard, "gas-locker", "BOW-LIGHT.load").fault


def test_gas_alarm_in_a_gas_locker_is_sound_if_it_cannot_spark() -> None:
    """ZON-03."""
    yard = SOUND.edit("petrol_vapour: true", "cooking_gas: true")
    assert found(yard) == []
    assert ("gas-locker", "SENSOR.load", NEITHER) in passed(yard)
    unprotected = yard.edit(SENSOR, SENSOR.replace("true", "false"))
    assert found(unprotected) == [("gas-locker", "SENSOR.load", NEITHER, "load: vapour-sensor")]


def test_splice_in_a_gas_locker_is_found() -> None:
    """ZON-03."""
    yard = SOUND.edit("petrol_vapour: true", "cooking_gas: true")
    yard = yard.edit("F-SENSE: {part: blade-fuse, zone: LOCKER", "F-SENSE: {part: blade-fuse, zone: FUEL")
    assert [row[:2] for row in found(yard)] == [("gas-locker", "F-SENSE")]


# --- wet-place


@pytest.mark.parametrize("rating", ["IP66", "IPX5", "IP69K"])
def test_part_that_bears_no_immersion_is_found_where_bilge_water_stands(rating: str) -> None:
    """ZON-05: jets say nothing of immersion."""
    yard = SOUND.edit("ingress: IP67", f"ingress: {rating}")
    assert found(yard) == [("wet-place", "BOW-LIGHT.load", NEITHER, BOW_LIGHT)]


@pytest.mark.parametrize("rating", ["IPX7", "IP68"])
def test_part_that_bears_immersion_is_sound_in_bilge_water(rating: str) -> None:
    """ZON-05."""
    assert found(SOUND.edit("ingress: IP67", f"ingress: {rating}")) == []


def test_wet_zone_without_bilge_water_asks_nothing() -> None:
    """ZON-05."""
    dry = SOUND.edit("ingress: IP67", "ingress: IP44").edit("bilge_water: true", "bilge_water: false")
    assert found(dry) == not_assessed(dry) == []


FUSE_IN_THE_BOW = "F-CHARGER: {part: bolt-fuse, zone: BOW, rating: 30 A}"


def fuse_in_the_bow(more: str = "") -> Yard:
    """Return the yard with the charger's fuse in the bow, where bilge water stands."""
    line = FUSE_IN_THE_BOW.replace("}", f"{more}}}")
    return SOUND.edit("F-CHARGER: {part: bolt-fuse, zone: LOCKER, rating: 30 A}", line)


def test_ingress_that_is_not_recorded_is_told_once_at_the_part() -> None:
    yard = fuse_in_the_bow()
    assert [row[:2] for row in not_assessed(yard)] == [("wet-place", "bolt-fuse")]
    assert missing_of(yard, "wet-place") == "ingress"


def test_part_above_bilge_water_is_sound() -> None:
    """ZON-05."""
    yard = fuse_in_the_bow(", above_bilge_water: true")
    assert found(yard) == not_assessed(yard) == []


def test_wet_zone_that_does_not_tell_of_bilge_water_is_not_assessed() -> None:
    yard = SOUND.edit("wet: true, bilge_water: true", "wet: true").edit("ingress: IP67", "ingress: IP44")
    assert not_assessed(yard) == [("wet-place", "BOW", NEITHER, BOW.replace(", bilge_water: true", ""))]
    assert missing_of(yard, "wet-place") == "bilge_water"


# --- hot-device

FUSE_IN_THE_HEAT = "F-CHARGER: {part: bolt-fuse, zone: ENGINE-SPACE, rating: 30 A}"


def in_the_heat(current: str) -> Yard:
    """Return the yard with the charger's fuse in the engine space, where 30 A count 27 A."""
    yard = SOUND.edit("F-CHARGER: {part: bolt-fuse, zone: LOCKER, rating: 30 A}", FUSE_IN_THE_HEAT)
    return yard.edit("service: charging\n    current: 20 A", f"service: charging\n    current: {current}")


def test_fuse_whose_corrected_rating_is_below_its_current_is_found() -> None:
    """ZON-07."""
    yard = in_the_heat("27.1 A")
    assert found(yard) == [("hot-device", "F-CHARGER", NEITHER, FUSE_IN_THE_HEAT)]
    assert "30 A in the engine space ENGINE-SPACE counts 27 A" in finding(yard, "hot-device", "F-CHARGER").fault


@pytest.mark.parametrize("current", ["26.9 A", "27 A"])
def test_fuse_whose_corrected_rating_carries_its_current_is_sound(current: str) -> None:
    """ZON-07."""
    assert found(in_the_heat(current)) == []


def test_band_without_a_factor_is_told_once() -> None:
    first = "slow:\n    engine_space_factor: 0.9"
    yard = in_the_heat("20 A").edit(first, "slow:")
    assert not_assessed(yard) == [("hot-device", "bolt-fuse", NEITHER, "slow:")]
    assert missing_of(yard, "hot-device") == "engine_space_factor"


# --- switch-reach


def test_battery_switches_and_main_devices_behind_a_fixed_hatch_are_found() -> None:
    """ZON-08: the fuses of single loads and sources are no main devices."""
    yard = SOUND.edit(LOCKER, LOCKER.replace("at-once", "by-hatch"))
    assert [row[:3] for row in found(yard)] == [("switch-reach", name, NEITHER) for name in ("F-MAIN", "SW-H", "SW-S")]


def test_switch_of_one_load_behind_a_device_is_no_battery_switch() -> None:
    """ZON-08: a thruster's switch in the bow."""
    thruster = (
        "devices:\n  F-T: {part: bolt-fuse, zone: LOCKER, rating: 150 A}\n"
        "  SW-T: {part: battery-switch, zone: AFT}\n  THRUSTER: {part: thruster, zone: AFT}\n"
        "zones:\n  AFT: {name: aft, ambient: 30 C, access: by-hatch}\n"
        "circuits:\n  THRUSTER:\n    name: Thruster\n    service: thruster\n    current: 100 A\n    conductors:\n"
        "      T1: {from: BAT-H.pos, to: F-T.line, size: 2 AWG, length: 0.1 m}\n"
        "      T2: {from: F-T.load, to: SW-T.in, size: 2 AWG, length: 1 m}\n"
        "      T3: {from: SW-T.out, to: THRUSTER.pos, size: 2 AWG, length: 1 m}\n"
        "      T4: {from: THRUSTER.neg, to: BUS-N, size: 2 AWG, length: 1 m, colour: yellow}\n"
    )
    yard = SOUND.also(thruster).also_parts("thruster: {kind: load, voltage: 12 V, current: 100 A, max_device: 150 A}")
    assert "switch-reach" not in {row[0] for row in found(yard)}


def test_zone_that_does_not_tell_how_it_is_reached_is_not_assessed() -> None:
    yard = SOUND.edit(LOCKER, LOCKER.replace(", access: at-once", ""))
    assert not_assessed(yard) == [("switch-reach", "LOCKER", NEITHER, LOCKER.replace(", access: at-once", ""))]
    assert missing_of(yard, "switch-reach") == "access"


# --- battery-vent


def locker(facts: str) -> tuple[Yard, str]:
    """Return the yard with other facts of its battery locker, and the locker's line."""
    line = LOCKER.replace("hydrogen_vent: true, ", facts)
    return SOUND.edit(LOCKER, line), line


def test_battery_space_without_a_vent_is_found() -> None:
    """ZON-10."""
    yard, line = locker("hydrogen_vent: false, ")
    assert found(yard) == [("battery-vent", "LOCKER", NEITHER, line)]


def test_vent_that_is_not_recorded_is_not_assessed() -> None:
    yard, line = locker("")
    assert not_assessed(yard) == [("battery-vent", "LOCKER", NEITHER, line)]
    assert missing_of(yard, "battery-vent") == "hydrogen_vent"


def test_lithium_batteries_need_no_vent() -> None:
    """ZON-10."""
    yard, _ = locker("hydrogen_vent: false, ")
    texts = {name: text.replace("agm-lead", "lithium-iron-phosphate") for name, text in yard.files.items()}
    assert "battery-vent" not in {row[0] for row in found(Yard(texts))}


def test_more_charge_than_the_space_allows_is_found() -> None:
    """ZON-10: 60 A of the alternator and 20 A of the charger."""
    yard, line = locker("hydrogen_vent: true, charge_limit: 79.9 A, ")
    assert found(yard) == [("battery-vent", "LOCKER", NEITHER, line)]
    assert "ALT.B 60 A, CHARGER.out 20 A can give 80 A" in finding(yard, "battery-vent", "LOCKER").fault


@pytest.mark.parametrize("limit", ["80 A", "90 A"])
def test_charge_that_the_space_allows_is_sound(limit: str) -> None:
    """ZON-10."""
    assert found(locker(f"hydrogen_vent: true, charge_limit: {limit}, ")[0]) == []


# --- passage-guard


def test_way_over_a_bare_edge_is_found_at_the_way() -> None:
    """ZON-06."""
    line = "engine-way: {zone: ENGINE-SPACE, length: 1.5 m, lay: single, passage: bare}"
    yard = SOUND.edit(line.replace(", passage: bare", ""), line)
    assert found(yard) == [("passage-guard", "engine-way", NEITHER, line)]


def test_conductor_without_ways_is_judged_by_itself_and_a_branch_once() -> None:
    """ZON-06."""
    line = "S2: {from: SW-S.out, to: STARTER.B, size: 2/0 AWG, length: 1.5 m, passage: bare, role: cranking"
    yard = SOUND.edit(line.replace(", passage: bare", ""), line)
    yard = yard.edit("length: 16 ft 5 in\n", "length: 16 ft 5 in\n    passage: bare\n")
    assert [row[:2] for row in found(yard)] == [("passage-guard", "BOW-LIGHT"), ("passage-guard", "S2")]


@pytest.mark.parametrize("guard", ["grommet", "gland", "conduit", "no-passage"])
def test_guarded_passages_are_sound(guard: str) -> None:
    """ZON-06."""
    yard = SOUND if guard == "grommet" else SOUND.edit("passages: grommet", f"passages: {guard}")
    assert found(yard) == not_assessed(yard) == []


def test_bare_edges_everywhere_are_told_once() -> None:
    """ZON-06."""
    yard = SOUND.edit("passages: grommet", "passages: bare")
    assert [row[:2] for row in found(yard)] == [("passage-guard", "workmanship")]


def test_passages_that_are_not_recorded_are_told_once() -> None:
    yard = SOUND.without("passages:")
    assert not_assessed(yard) == [("passage-guard", "workmanship", NEITHER, "workmanship:")]
    assert missing_of(yard, "passage-guard") == "workmanship: passages"


# --- ac-apart


def single_plotter(ac: str) -> tuple[Yard, str]:
    """Return the yard with the plotter in single conductors, and what AC lies in its way; and the way's line."""
    line = f"cabin-way: {{zone: CABIN, length: 2 m, lay: single, ac: {ac}}}"
    yard = SOUND.edit(line.replace(f", ac: {ac}", ""), line)
    return yard.edit("feed: P1\n", "feed: P1\n    type: single-105\n    colours: [red, yellow]\n"), line


def test_bare_ac_beside_bare_dc_is_found_at_the_way() -> None:
    """ZON-09."""
    yard, line = single_plotter("bare")
    assert found(yard) == [("ac-apart", "cabin-way", NEITHER, line)]
    assert "PLOTTER.back, PLOTTER.out" in finding(yard, "ac-apart", "cabin-way").fault


def test_sheath_round_either_is_sound() -> None:
    """ZON-09."""
    assert found(single_plotter("sheathed")[0]) == []
    bare = "cabin-way: {zone: CABIN, length: 2 m, lay: single, ac: bare}"
    assert found(SOUND.edit(bare.replace(", ac: bare", ""), bare)) == []


def test_ac_that_is_not_recorded_is_told_once() -> None:
    yard = SOUND.without("ac:")
    assert not_assessed(yard) == [("ac-apart", "workmanship", NEITHER, "workmanship:")]
    assert missing_of(yard, "ac-apart") == "workmanship: ac"
    unknown = yard.without("ac_aboard:")
    assert missing_of(unknown, "ac-apart") == "ac_aboard"
    assert not_assessed(yard.edit("ac_aboard: true", "ac_aboard: false")) == []


def test_boat_of_which_nothing_is_recorded_has_no_findings_here() -> None:
    boat = a_boat(*sound_pieces())
    mine = ("wet-place", "gas-locker", "switch-reach", "battery-vent", "passage-guard", "ac-apart")
    told = [o for o in outcomes_of(boat) if o.check in mine]
    assert {(o.check, o.part, o.missing) for o in told} == {
        ("battery-vent", "DRY", "hydrogen_vent"),
        ("switch-reach", "DRY", "access"),
    }
