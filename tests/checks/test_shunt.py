"""Seed faults of the monitoring shunt: what bypasses it, which way round it stands, what it bears."""

from __future__ import annotations

import pytest

from tests.small_yard import BOTH, NEITHER, SOUND, Yard, finding, found, not_assessed, passed

SHUNT = "SHUNT: {part: shunt-300, zone: LOCKER, measures: HOUSE}"
S3 = "S3: {from: STARTER.case, to: BUS-N, size: 2/0 AWG, length: 1.5 m, role: cranking, reason: cranking motor,"
S4 = "S4: {from: BUS-N, to: BAT-S.neg, size: 2/0 AWG, length: 0.4 m, role: cranking, reason: cranking motor,"
BOND = "B1: {from: ANODE, to: BUS-N, size: 8 AWG, length: 4 m, colour: green}"


@pytest.mark.parametrize("post", ["BAT-H.neg", "SHUNT.bat"])
def test_load_that_returns_to_the_bank_s_side_is_found_at_its_return(post: str) -> None:
    """SHU-01."""
    line = f"V3: {{from: REGULATOR.gnd, to: {post}, size: 16 AWG, length: 2 m, colour: yellow}}"
    yard = SOUND.edit("from: REGULATOR.gnd, to: BUS-N", f"from: REGULATOR.gnd, to: {post}")
    assert found(yard) == [("shunt-bypass", "V3", NEITHER, line)]
    assert "load REGULATOR" in finding(yard, "shunt-bypass", "V3").fault


@pytest.mark.parametrize("post", ["SHUNT.sys", "PANEL-N"])
def test_load_that_returns_to_the_boat_s_side_is_sound(post: str) -> None:
    """SHU-01."""
    assert found(SOUND.edit("from: REGULATOR.gnd, to: BUS-N", f"from: REGULATOR.gnd, to: {post}")) == []


def test_charger_that_returns_to_the_bank_s_side_is_found_at_its_return() -> None:
    """SHU-02."""
    yard = SOUND.edit("from: CHARGER.neg, to: BUS-N", "from: CHARGER.neg, to: BAT-H.neg")
    line = "C2: {from: CHARGER.neg, to: BAT-H.neg, size: 10 AWG, length: 2 m, colour: yellow}"
    assert found(yard) == [("shunt-bypass", "C2", NEITHER, line)]
    told = finding(yard, "shunt-bypass", "C2")
    assert "charge source CHARGER" in told.fault
    assert told.path == ("SHUNT.bat", "M4", "BAT-H.neg", "C2", "CHARGER.neg")


def test_charger_that_returns_to_the_negative_bus_is_sound() -> None:
    """SHU-02."""
    assert ("shunt-bypass", "SHUNT", NEITHER) in passed(SOUND)


def turned() -> Yard:
    """Return the yard with the shunt's studs swapped; the monitor stays on its head."""
    return SOUND.edit("to: SHUNT.bat", "to: SHUNT.sys").edit("from: SHUNT.sys", "from: SHUNT.bat")


def test_shunt_turned_round_is_found_at_the_shunt() -> None:
    """SHU-03."""
    assert found(turned()) == [("shunt-direction", "SHUNT", NEITHER, SHUNT)]
    assert finding(turned(), "shunt-direction", "SHUNT").remedy == "turn it round"


def test_shunt_whose_bat_stud_faces_its_bank_is_sound() -> None:
    """SHU-03."""
    assert ("shunt-direction", "SHUNT", NEITHER) in passed(SOUND)


def test_shunt_that_stands_at_another_bank_is_found() -> None:
    """SHU-03: it is named for the start bank, but stands in the house bank's negative."""
    yard = SOUND.edit("measures: HOUSE", "measures: START")
    assert [told[:2] for told in found(yard)] == [("monitor-map", "HOUSE"), ("shunt-direction", "SHUNT")]


def shunt_of(facts: str) -> Yard:
    """Return the yard with another shunt. Under way it is charged at 60 A less 12.7 A of loads: 47.3 A."""
    return SOUND.edit("rating: 300 A, short_time: {current: 400 A, time: 10 s}", facts)


@pytest.mark.parametrize("facts", ["rating: 47.2 A", "rating: 300 A, continuous: 47.2 A"])
def test_shunt_rated_below_the_charging_current_is_found(facts: str) -> None:
    """SHU-04: charging counts like drawing."""
    assert found(shunt_of(facts)) == [("shunt-rating", "SHUNT in under-way", NEITHER, SHUNT)]


@pytest.mark.parametrize("facts", ["rating: 47.3 A", "rating: 300 A, continuous: 47.3 A", "rating: 47.4 A"])
def test_shunt_rated_for_the_charging_current_is_sound(facts: str) -> None:
    """SHU-04."""
    assert found(shunt_of(facts)) == []


def emergency_start(duration: str, short_time: str) -> Yard:
    """Return the yard with a condition in which the house bank cranks with 200 A for a time."""
    yard = SOUND.also(
        "devices:\n  SW-X: {part: battery-switch, zone: LOCKER}\n"
        "  F-X1: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: BUS-P}}\n"
        "  F-X2: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: SW-S.out}}\n"
        "conductors:\n"
        "  X1: {from: F-X1.load, to: SW-X.in, size: 2 AWG, length: 0.5 m, current: 100 A}\n"
        "  X2: {from: SW-X.out, to: F-X2.load, size: 2 AWG, length: 0.5 m, current: 100 A}\n"
        "conditions:\n"
        "  emergency:\n"
        "    switches: {SW-H: closed, SW-S: open, SW-X: closed}\n"
        "    loads: {STARTER: 200 A}\n"
        f"    short_time: {duration}\n"
        "    judge_drop: false\n"  # it is the other bank that cranks
    )
    # In the other conditions the link is open: a switch that is not named counts as closed.
    for name in ("under-way", "moored", "start"):
        yard = yard.edit(f"  {name}:\n    loads", f"  {name}:\n    switches: {{SW-X: open}}\n    loads")
    return yard.edit("short_time: {current: 400 A, time: 10 s}", short_time)


NOT_SELECTIVE = [  # the link's fuse is as large as the main one; it can be fed from either bank
    ("selectivity", "F-MAIN under F-X1", NEITHER, "F-MAIN: {part: bolt-fuse, zone: LOCKER, rating: 150 A}"),
    (
        "selectivity", "F-X1 under F-MAIN", NEITHER,
        "F-X1: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: BUS-P}}",
    ),
]  # fmt: skip
NORMALLY_OPEN = ("start-bank-load", "SW-X", NEITHER, "SW-X: {part: battery-switch, zone: LOCKER}")
"""No table of states says that the link is open in use."""
SHORT = "continuous: 100 A, short_time: {current: 200 A, time: 5 s}"


def test_emergency_start_above_what_the_shunt_bears_for_a_short_time_is_found() -> None:
    """SHU-04."""
    yard = emergency_start("5 s", SHORT.replace("200 A", "199 A"))
    assert found(yard) == [
        *NOT_SELECTIVE,
        ("shunt-rating", "SHUNT in emergency", NEITHER, SHUNT),
        NORMALLY_OPEN,
    ]


def test_emergency_start_longer_than_the_short_time_is_held_to_the_continuous_figure() -> None:
    """SHU-04."""
    told = ("shunt-rating", "SHUNT in emergency", NEITHER, SHUNT)
    assert found(emergency_start("5.1 s", SHORT)) == [*NOT_SELECTIVE, told, NORMALLY_OPEN]


def test_emergency_start_within_what_the_shunt_bears_is_sound() -> None:
    """SHU-04."""
    assert found(emergency_start("5 s", SHORT)) == [*NOT_SELECTIVE, NORMALLY_OPEN]


def test_engine_ground_on_the_bank_s_post_is_found_with_all_that_stands_on_the_engine() -> None:
    """SHU-05: the starter, the alternator and the block all bypass the shunt by the one cable, which is told once.

    The start battery's negative now leads to the motor over the shunt and no longer over cranking
    conductors alone, so that the role of S4 does not hold.
    """
    line = S3.replace("BUS-N", "BAT-H.neg")
    assert found(SOUND.edit(S3, line)) == [
        ("role-claim", "S4", BOTH, S4),
        ("shunt-bypass", "S3", NEITHER, line),
    ]
    told = finding(SOUND.edit(S3, line), "shunt-bypass", "S3")
    for name in ("load STARTER", "charge source ALT", "metal part ENGINE"):
        assert name in told.fault
    assert told.remedy == "land S3 on the boat's side, e.g. on BUS-N"


def test_panel_negative_on_the_bank_s_post_is_told_once_at_the_panel_s_own_return() -> None:
    """SHU-01: five branches return to the panel, and one conductor is to be moved."""
    yard = SOUND.edit("D2: {from: PANEL-N, to: BUS-N,", "D2: {from: PANEL-N, to: BAT-H.neg,")
    (told,) = [one for one in found(yard) if one[0] == "shunt-bypass"]
    assert told[1] == "D2"
    assert told[3].startswith("D2: {from: PANEL-N, to: BAT-H.neg")
    assert "and 2 more are joined to the bank's side of SHUNT by D2" in finding(yard, "shunt-bypass", "D2").fault


def test_second_engine_ground_on_the_bank_s_post_is_found_at_that_ground() -> None:
    """SHU-05: the path leads round the shunt; the bank's own lead to the shunt is not to blame."""
    line = "GROUND: {from: ENGINE, to: BAT-H.neg, size: 2/0 AWG, length: 1 m, current: 1 A, colour: yellow}"
    told = [one for one in found(SOUND.also(f"conductors:\n  {line}\n")) if one[0] == "shunt-bypass"]
    assert told == [("shunt-bypass", "GROUND", NEITHER, line)]


def test_engine_ground_on_the_negative_bus_is_sound() -> None:
    """SHU-05."""
    assert found(SOUND) == []
    assert ("shunt-bypass", "SHUNT", NEITHER) in passed(SOUND)


def test_bond_that_joins_the_bank_s_side_is_found_at_the_bond() -> None:
    """SHU-06."""
    line = BOND.replace("BUS-N", "BAT-H.neg")
    yard = SOUND.edit(BOND, line)
    assert found(yard) == [("shunt-bypass", "B1", NEITHER, line)]
    assert "metal part ANODE" in finding(yard, "shunt-bypass", "B1").fault


def test_second_bond_that_leads_round_the_shunt_is_found() -> None:
    """SHU-06: the strap closes a path from the bank to the negative bus."""
    line = "B2: {from: ANODE, to: BAT-H.neg, size: 8 AWG, length: 4 m, colour: green}"
    yard = SOUND.edit(BOND, f"{BOND}\n  {line}")
    (told,) = [one for one in found(yard) if one[0] == "shunt-bypass"]  # it is a second joint as well
    assert told[:3] == ("shunt-bypass", "B1", NEITHER) or told[:3] == ("shunt-bypass", "B2", NEITHER)
    path = finding(yard, "shunt-bypass", told[1]).path
    assert (path[0], path[-1]) == ("SHUNT.bat", "SHUNT.sys")
    assert {"B1", "B2"} <= set(path)


def test_bond_to_the_negative_bus_is_sound() -> None:
    """SHU-06."""
    assert found(SOUND.edit(BOND, BOND.replace("BUS-N", "SHUNT.sys"))) == []


def test_shield_that_joins_both_sides_of_the_shunt_is_found_at_the_shield() -> None:
    """SHU-06: a screen is copper too."""
    line = "PLOTTER-SHIELD: {joins: [PLOTTER.load.neg, BAT-H.neg]}"
    yard = SOUND.edit("PLOTTER-SHIELD: {joins: [PLOTTER.load.neg]}", line)
    assert found(yard) == [(check, "PLOTTER-SHIELD", NEITHER, line) for check in ("shield-loop", "shunt-bypass")]


def test_start_battery_outside_the_house_shunt_is_sound() -> None:
    """T-15: it returns to the negative bus, and the shunt measures the house bank alone."""
    assert found(SOUND) == []
    on_the_stud = SOUND.edit(S4, S4.replace("BUS-N", "SHUNT.sys")).edit(S3, S3.replace("BUS-N", "SHUNT.sys"))
    assert found(on_the_stud) == []


def test_separate_bow_bank_outside_the_house_shunt_is_sound() -> None:
    """T-16."""
    yard = SOUND.also_parts("winch: {kind: load, voltage: 12 V, current: 45 A, motor: true}").also(
        "devices:\n  BAT-BOW: {part: start-battery, zone: BOW, bank: BOW}\n"
        "  F-WINCH: {part: bolt-fuse, zone: BOW, rating: 80 A, mount: {line: BAT-BOW.pos}}\n"
        "  WINCH: {part: winch, zone: BOW}\n"
        "circuits:\n  WINCH:\n    name: Winch\n    service: windlass\n    current: 50 A\n"
        "    always_on: the winch has its own bank\n    conductors:\n"
        "      X1: {from: F-WINCH.load, to: WINCH.pos, size: 4 AWG, length: 1 m}\n"
        "      X2: {from: WINCH.neg, to: BAT-BOW.neg, size: 4 AWG, length: 1 m}\n"
        "      X3: {from: BAT-BOW.neg, to: BUS-N, size: 4 AWG, length: 2 m}\n"
    )
    assert found(yard) == []


def test_monitor_of_the_shunt_on_the_bank_s_side_is_sound() -> None:
    """T-17: its supply and sense leads stand on the bank's side, and belong to the shunt."""
    assert ("shunt-bypass", "SHUNT", NEITHER) in passed(SOUND)


def test_instrument_that_does_not_belong_to_the_shunt_is_found_on_the_bank_s_side() -> None:
    """T-17."""
    line = "MONITOR: {part: monitor-head, zone: LOCKER, mount: {pos: SHUNT.vbat, neg: SHUNT.bat},"
    yard = SOUND.edit(", belongs_to: SHUNT", "")
    assert found(yard) == [
        ("ahead-of-switch", "MONITOR", NEITHER, line),  # what belongs to no shunt is a load like any other
        ("means-off", "MONITOR", NEITHER, line),
        ("shunt-bypass", "MONITOR", NEITHER, line),
    ]


@pytest.mark.parametrize(
    ("old", "new", "line"),
    [
        (f"bonds:\n  {BOND}", "bonds: not recorded", "bonds: not recorded"),
        (
            "shields:\n  PLOTTER-SHIELD: {joins: [PLOTTER.load.neg]}",
            "shields: not recorded",
            "shields: not recorded",
        ),
        ("{joins: [PLOTTER.load.neg]}", "{joins: not recorded}", "PLOTTER-SHIELD: {joins: not recorded}"),
        (
            "block: ENGINE}",
            "block: not recorded}",
            "MAIN: {fuel: diesel, mounting: inboard, block: not recorded}",
        ),
    ],
)
def test_what_was_not_recorded_leaves_the_shunt_not_assessed_and_never_passed(old: str, new: str, line: str) -> None:
    """SHU-05, SHU-06: what could bypass the shunt was not looked at."""
    yard = SOUND.edit(old, new)
    assert found(yard) == []
    assert [one for one in not_assessed(yard) if one[0] == "shunt-bypass"] == [("shunt-bypass", "SHUNT", NEITHER, line)]
    assert ("shunt-bypass", "SHUNT", NEITHER) not in passed(yard)


def test_block_of_an_outboard_need_not_be_recorded() -> None:
    """SHU-05."""
    yard = SOUND.edit("{fuel: diesel, mounting: inboard, block: ENGINE}",
                      "{fuel: diesel, mounting: outboard, block: not recorded}")  # fmt: skip
    assert not_assessed(yard) == []


def test_shunt_without_any_condition_is_not_assessed() -> None:
    """SHU-04."""
    (text,) = [t for name, t in SOUND.files.items() if name.startswith("classes")]
    yard = SOUND.edit(text[text.index("conditions:") :], "")
    assert not_assessed(yard) == [
        ("shunt-rating", "SHUNT", NEITHER, SHUNT),
        ("working-point", "conditions", NEITHER, "class:"),
    ]
