"""Seed faults of terminals and studs: stacks, rings, barrels, covers, kinds, splices, torque."""

from __future__ import annotations

import pytest

from checker.finding import Verdict
from checker.limits.terminal_rule import joint_rule
from tests.small_yard import BOTH, NEITHER, PRACTICE, SOUND, Yard, finding, found, not_assessed, outcomes, passed


def line_of(yard: Yard, name: str) -> str:
    """Return the line that an entry is written on."""
    (line,) = [x.strip() for t in yard.files.values() for x in t.splitlines() if x.strip().startswith(f"{name}: {{")]
    return line


def with_facts(yard: Yard, name: str, facts: str) -> Yard:
    """Return the yard with more facts of an entry that is written on one line."""
    line = line_of(yard, name)
    return yard.edit(line, f"{line[:-1]}, {facts}}}")


def with_ends(ends: str, name: str = "M1", yard: Yard = SOUND) -> Yard:
    """Return the yard with facts of the ends of a conductor."""
    return with_facts(yard, name, f"ends: {{{ends}}}")


def with_landings(text: str) -> Yard:
    """Return the yard with some posts listed."""
    return SOUND.also(f"landings:\n{text}")


# --- stud-terminals

BUS_N = line_of(SOUND, "BUS-N")


def bar(studs: str) -> Yard:
    """Return the yard with another bar as negative bus: seven conductors land on it."""
    yard = SOUND.also_parts(f"bar: {{kind: bus, rating: 250 A, stud: M10, torque: 15 Nm{studs}}}")
    return yard.edit(BUS_N, BUS_N.replace("bus-250", "bar"))


@pytest.mark.parametrize(("studs", "fault"), [
    (", studs: 1", "7 terminals on one stud: B1, C2, D2, M5, S3, S4, V3"),
    (", studs: 2, terminals_per_stud: 3", "7 terminals on 2 studs: B1, C2, D2, M5, S3, S4, V3"),
])  # fmt: skip
def test_bar_with_too_few_studs_is_found_at_the_bar(studs: str, fault: str) -> None:
    """TRM-01."""
    line = BUS_N.replace("bus-250", "bar")
    assert found(bar(studs)) == [("stud-terminals", "BUS-N", PRACTICE, line)]
    assert finding(bar(studs), "stud-terminals", "BUS-N").fault == fault


@pytest.mark.parametrize("studs", [", studs: 2", ", studs: 7, terminals_per_stud: 1", ", studs: 8"])
def test_bar_with_more_than_four_cables_and_studs_for_them_is_sound(studs: str) -> None:
    """T-31: four to a stud, not to a bar."""
    assert found(bar(studs)) == []
    assert ("stud-terminals", "BUS-N", PRACTICE) in passed(bar(studs))


def test_bar_whose_studs_nobody_counted_is_not_assessed_at_its_part() -> None:
    rows = [o for o in outcomes(bar(""), Verdict.NOT_ASSESSED) if o.check == "stud-terminals"]
    assert [(o.part, o.missing) for o in rows] == [("bar", "studs")]


STACK = "  BAT-H.pos: {s1: [M1, C3, V1, Q1]}\n"


def test_four_terminals_on_one_stud_are_sound() -> None:
    """TRM-01; listed, or counted on a bar of four studs."""
    assert ("stud-terminals", "BUS-N", PRACTICE) in passed(SOUND)
    assert found(with_landings(STACK)) == []
    assert ("stud-terminals", "BAT-H.pos stud s1", PRACTICE) in passed(with_landings(STACK))


def test_five_terminals_on_one_listed_stud_are_found_at_the_stud() -> None:
    """TRM-01."""
    yard = with_landings("  BUS-N: {s1: [S3, S4, M5, D2, B1], s2: [C2, V3]}\n")
    line = "BUS-N: {s1: [S3, S4, M5, D2, B1], s2: [C2, V3]}"
    assert found(yard) == [("stud-terminals", "BUS-N stud s1", PRACTICE, line)]
    assert finding(yard, "stud-terminals", "BUS-N stud s1").remedy == (
        "move 1 terminal to another stud, or to a bus bar, and list it there"
    )


@pytest.mark.parametrize(("stack", "told"), [
    ("  BAT-H.pos: {s1: [M1, C3, V1]}\n", ("BAT-H.pos", "no stud of BAT-H.pos lists Q1")),
    ("  BAT-H.pos: {s1: [M1, C3, V1, Q1, D1]}\n",
     ("BAT-H.pos stud s1", "the list of its terminals names D1, which ends elsewhere or is named twice")),
])  # fmt: skip
def test_list_that_does_not_fit_the_conductors_is_not_assessed(stack: str, told: tuple[str, str]) -> None:
    rows = [o for o in outcomes(with_landings(stack), Verdict.NOT_ASSESSED) if o.check == "stud-terminals"]
    assert [(o.part, o.fault, o.missing) for o in rows] == [(*told, "landings")]


# --- ring-hole


@pytest.mark.parametrize(("hole", "words"), [
    ("M8", "ring is made for M8 (8.0 mm), smaller than the stud M10 (10.0 mm)"),
    ("3/8 in", "ring is made for 3/8 in (9.5 mm), smaller than the stud M10 (10.0 mm)"),
    ("M12", "ring is made for M12 (12.0 mm), larger than the stud M10 (10.0 mm)"),
])  # fmt: skip
def test_ring_for_another_stud_is_found_at_its_end(hole: str, words: str) -> None:
    """TRM-02."""
    yard = with_ends(f"from: {{hole: {hole}}}", "S1")
    told = finding(yard, "ring-hole", "S1")
    assert [row[:3] for row in found(yard)] == [("ring-hole", "S1", NEITHER)]
    assert told.fault == f"at BAT-S.pos its {words}"
    assert told.remedy == "crimp on a ring made for M10"


def test_ring_of_the_stud_is_sound() -> None:
    """TRM-02; a ring for 5/16 in is one for M8."""
    assert found(with_ends("from: {hole: M10}", "S1")) == []
    assert found(with_ends("to: {hole: M8}")) == []
    assert found(with_ends("to: {hole: 5/16 in}")) == []


def test_ring_without_a_word_in_the_class_is_not_assessed_once() -> None:
    rows = [row for row in not_assessed(SOUND.without("ring_hole: as-stud")) if row[0] == "ring-hole"]
    assert rows == [("ring-hole", "workmanship", NEITHER, "workmanship:")]


def test_ring_on_a_stud_without_thread_is_not_assessed_at_the_part() -> None:
    yard = SOUND.also_parts("bare: {kind: bus, rating: 250 A, studs: 8, torque: 15 Nm}").edit(
        "BUS-P: {part: bus-250", "BUS-P: {part: bare"
    )
    rows = not_assessed(with_ends("to: {hole: M8}", "M3", yard))
    assert [row[:2] for row in rows] == [("ring-hole", "bare")]


def test_ring_for_a_thread_that_cannot_be_is_not_assessed_at_its_end() -> None:
    rows = outcomes(with_ends("from: {hole: 1/0 in}", "S1"), Verdict.NOT_ASSESSED)
    assert [(o.check, o.part, o.fault, o.missing) for o in rows] == [
        ("ring-hole", "S1", "1/0 in is no thread", "ends: hole")
    ]


@pytest.mark.parametrize(("thread", "diameter_mm"), [
    ("#4", 2.84), ("#6", 3.51), ("#8", 4.17), ("#10", 4.83), ("1/4 in", 6.35), ("5/16 in", 7.94), ("3/8 in", 9.53),
    ("1/2 in", 12.7), ("M4", 4.0), ("M10", 10.0),
])  # fmt: skip
def test_threads_have_their_nominal_diameters(thread: str, diameter_mm: float) -> None:
    assert joint_rule().diameter_mm(thread) == pytest.approx(diameter_mm, abs=0.006)


# --- stack-order


def test_large_terminal_on_top_is_found_at_the_stud() -> None:
    """TRM-03."""
    yard = with_landings("  BAT-H.pos: {s1: [M1, V1, C3, Q1]}\n")
    line = "BAT-H.pos: {s1: [M1, V1, C3, Q1]}"
    assert found(yard) == [("stack-order", "BAT-H.pos stud s1", NEITHER, line)]
    told = finding(yard, "stack-order", "BAT-H.pos stud s1")
    assert told.fault == "C3 (10 AWG) lies on V1 (16 AWG)"
    assert told.remedy == "restack from the post outwards: M1 2 AWG, C3 10 AWG, V1 16 AWG, Q1 16 AWG"


def test_largest_terminal_next_to_the_post_is_sound() -> None:
    """TRM-03; equal sizes may change places."""
    for stack in ("M1, C3, V1, Q1", "M1, C3, Q1, V1"):
        yard = with_landings(f"  BAT-H.pos: {{s1: [{stack}]}}\n")
        assert ("stack-order", "BAT-H.pos stud s1", NEITHER) in passed(yard)


def test_order_that_nobody_wrote_is_not_assessed_once() -> None:
    rows = not_assessed(SOUND.without("stacking: largest-first"))
    assert rows == [("stack-order", "workmanship", NEITHER, "workmanship:")]


# --- barrel-size


@pytest.mark.parametrize(("end", "fault"), [
    ("barrel: 4 AWG", "at BAT-H.pos it has a barrel for 4 AWG on 2 AWG"),
    ("barrel_colour: yellow", "at BAT-H.pos it has a yellow barrel (12 to 10 AWG, 2.5 to 6 mm2) on 2 AWG"),
    ("shares_barrel: true", "at BAT-H.pos it shares its barrel with another conductor"),
    ("barrel: 2 AWG, shares_barrel: true", "at BAT-H.pos it shares its barrel with another conductor"),
])  # fmt: skip
def test_barrel_of_another_size_or_shared_is_found(end: str, fault: str) -> None:
    """TRM-04."""
    yard = with_ends(f"from: {{{end}}}")
    assert [row[:3] for row in found(yard)] == [("barrel-size", "M1", NEITHER)]
    assert finding(yard, "barrel-size", "M1").fault == fault


@pytest.mark.parametrize(("colour", "is_sound"), [("red", False), ("blue", True), ("yellow", False), ("none", True)])
def test_colour_of_a_barrel_stands_for_a_range(colour: str, is_sound: bool) -> None:
    """TRM-04: 16 AWG belongs into blue; a colour that says nothing leaves it to the class."""
    rows = found(with_ends(f"from: {{barrel_colour: {colour}}}", "V1"))
    assert [row[:2] for row in rows] == ([] if is_sound else [("barrel-size", "V1")])


def test_stated_barrel_of_the_conductor_s_size_is_sound_in_any_colour() -> None:
    """TRM-04: the maker's size counts, the colour is a convention."""
    assert found(with_ends("from: {barrel: 16 AWG, barrel_colour: red}", "V1")) == []


def test_barrel_in_another_unit_and_barrels_that_nobody_wrote_are_not_assessed() -> None:
    rows = not_assessed(with_ends("from: {barrel: 35 mm2}"))
    assert [row[:2] for row in rows] == [("barrel-size", "M1")]
    rows = not_assessed(SOUND.without("barrel: as-conductor"))
    assert rows == [("barrel-size", "workmanship", NEITHER, "workmanship:")]


# --- terminal-range


def main_fuse(sizes: str) -> Yard:
    """Return the yard with a main fuse whose terminals take some sizes; 2 AWG lands on both its posts."""
    yard = SOUND.also_parts(
        "main-fuse: {kind: fuse, voltage: 32 V, interrupting: 10 kA, band: slow, resistance: 0.3 mohm, rating: 150 A, "
        f"terminal: stud, stud: M8, cover: true, torque: 10 Nm{sizes}}}"
    )
    return yard.edit(
        "F-MAIN: {part: bolt-fuse, zone: LOCKER, rating: 150 A}", "F-MAIN: {part: main-fuse, zone: LOCKER}"
    )


@pytest.mark.parametrize(("sizes", "word"), [
    (", smallest_size: 16 AWG, largest_size: 4 AWG", "thicker than 4 AWG, the largest"),
    (", smallest_size: 1 AWG, largest_size: 4/0 AWG", "thinner than 1 AWG, the smallest"),
])  # fmt: skip
def test_conductor_that_the_terminals_do_not_take_is_found(sizes: str, word: str) -> None:
    """TRM-05."""
    yard = main_fuse(sizes)
    assert [row[:3] for row in found(yard)] == [("terminal-range", name, NEITHER) for name in ("M1", "M2")]
    assert word in finding(yard, "terminal-range", "M1").fault


def test_conductor_at_the_limits_of_the_terminals_is_sound() -> None:
    """TRM-05."""
    assert found(main_fuse(", smallest_size: 2 AWG, largest_size: 2 AWG")) == []


@pytest.mark.parametrize(("sizes", "missing"), [
    ("", "smallest_size, largest_size"), (", smallest_size: 16 AWG", "largest_size"),
])  # fmt: skip
def test_terminals_without_sizes_are_not_assessed_once_at_the_part(sizes: str, missing: str) -> None:
    rows = outcomes(main_fuse(sizes), Verdict.NOT_ASSESSED)
    assert [(o.check, o.part, o.missing) for o in rows] == [("terminal-range", "main-fuse", missing)]


# --- live-cover


def uncovered(name: str) -> Yard:
    """Return the yard with the cover of a device gone."""
    return with_facts(SOUND, name, "cover: false")


@pytest.mark.parametrize(
    ("name", "post"), [("BAT-S", "BAT-S.pos"), ("SW-S", "SW-S.in"), ("F-MONITOR", "F-MONITOR.line")]
)
def test_live_post_without_cover_is_found(name: str, post: str) -> None:
    """TRM-06."""
    assert found(uncovered(name)) == [("live-cover", name, NEITHER, line_of(uncovered(name), name))]
    assert finding(uncovered(name), "live-cover", name).fault == (
        f"{post} stays live with every switch open, ahead of any overcurrent device, and is not covered"
    )


@pytest.mark.parametrize("name", ["SW-H", "BUS-P", "PANEL", "STARTER", "BUS-N"])
def test_bare_post_behind_a_device_or_a_switch_or_at_the_reference_is_sound(name: str) -> None:
    """TRM-06: § 183.445(b) accepts a device instead; what is dead with the switches open is not always live."""
    assert found(uncovered(name)) == []


def test_what_is_behind_a_device_or_dead_with_the_switches_needs_no_cover() -> None:
    """TRM-06: § 183.445(b) accepts a device instead."""
    covered = {part for check, part, _ in passed(SOUND) if check == "live-cover"}
    assert covered == {"BAT-H", "BAT-S", "F-MAIN", "SW-S", "F-ALT", "F-CHARGER", "F-SENSE", "F-MONITOR"}


def test_cover_that_nobody_recorded_is_not_assessed_once_at_the_part() -> None:
    rows = not_assessed(SOUND.edit(
        "terminal: screw, stud: M4, cover: true, torque", "terminal: screw, stud: M4, torque"
    ))  # fmt: skip
    assert [row[:2] for row in rows] == [("live-cover", "blade-fuse")]


# --- terminal-kind


def battery(terminal: str) -> Yard:
    """Return the yard with another kind of post on the start battery."""
    facts = (
        "kind: battery, voltage: 12 V, capacity: 75 Ah, chemistry: agm-lead, emf_full: 12.8 V, emf_low: 11.9 V, "
        "resistance_full: 4 mohm, resistance_low: 6 mohm, short_circuit: 3200 A, cover: true, torque: 12 Nm, "
        "smallest_size: 16 AWG, largest_size: 4/0 AWG"
    )
    yard = SOUND.also_parts(f"other-battery: {{{facts}{terminal}}}")
    return yard.edit("BAT-S: {part: start-battery", "BAT-S: {part: other-battery")


def test_spring_clamp_on_a_battery_is_found_under_law_and_practice() -> None:
    """TRM-07."""
    yard = battery(", terminal: spring")
    assert found(yard) == [("terminal-kind", "BAT-S", BOTH, line_of(yard, "BAT-S"))]


@pytest.mark.parametrize("terminal", [", terminal: stud, stud: M10", ", terminal: clamp", ", stud: M8"])
def test_bolted_battery_post_is_sound(terminal: str) -> None:
    """TRM-07: the thread alone tells a stud."""
    assert found(battery(terminal)) == []


def test_battery_post_of_unknown_kind_is_not_assessed_once_under_each_set() -> None:
    rows = outcomes(battery(""), Verdict.NOT_ASSESSED)
    assert [(o.check, o.part, o.limit_set) for o in rows] == [
        ("terminal-kind", "other-battery", "cfr33-183-i"), ("terminal-kind", "other-battery", "voluntary-dc"),
    ]  # fmt: skip


def test_wing_nut_on_heavy_cable_is_found() -> None:
    """TRM-07: 6 AWG and larger; the cranking cables are 2/0."""
    yard = battery(", terminal: wing-nut")
    assert [row[:3] for row in found(yard)] == [("terminal-kind", name, PRACTICE) for name in ("S1", "S4")]


def converter_on(kind: str, size: str, current: str) -> Yard:
    """Return the yard with a charger whose posts are of another kind, its cables of a size and current."""
    yard = SOUND.also_parts(
        "small-charger: {kind: source, outputs: {out: {return: neg, max: 20 A, voltage: 14.4 V, limited: true}}, "
        f"terminal: {kind}, stud: M6, smallest_size: 16 AWG, largest_size: 6 AWG}}"
    )
    yard = yard.edit("CHARGER: {part: charger-20", "CHARGER: {part: small-charger")
    for name in ("C1", "C2"):
        line = line_of(yard, name)
        yard = yard.edit(line, f"{line[:-1]}, current: {current}}}".replace("10 AWG", size))
    return yard


@pytest.mark.parametrize(("kind", "size", "current", "is_found"), [
    ("wing-nut", "6 AWG", "20 A", True), ("wing-nut", "8 AWG", "20 A", False),
    ("blade", "10 AWG", "20.1 A", True), ("blade", "10 AWG", "20 A", False),
])  # fmt: skip
def test_kinds_have_limits_of_size_and_current(kind: str, size: str, current: str, is_found: bool) -> None:
    """TRM-07: wing nuts below 6 AWG, push-on connectors up to 20 A."""
    rows = [row[:3] for row in found(converter_on(kind, size, current))]
    assert rows == ([("terminal-kind", name, PRACTICE) for name in ("C1", "C2")] if is_found else [])


@pytest.mark.parametrize("terminal", ["plain-spade", "twist-on"])
def test_terminal_that_slips_off_is_found_at_its_end(terminal: str) -> None:
    """TRM-07."""
    assert [row[:3] for row in found(with_ends(f"to: {{terminal: {terminal}}}"))] == [("terminal-kind", "M1", PRACTICE)]


def test_spade_that_cannot_slip_off_is_sound() -> None:
    """TRM-07."""
    assert found(with_ends("to: {terminal: captive-spade}")) == []


def regulator(ends: str) -> Yard:
    """Return the yard with set screws at the regulator, and V2 with facts of its end there."""
    facts = "voltage: 12 V, current: 0.1 A, standby: 5 mA, feed_post: sense, return_post: gnd, regulator: true"
    yard = SOUND.also_parts(
        f"screwed: {{kind: load, {facts}, terminal: set-screw, smallest_size: 22 AWG, largest_size: 6 AWG}}"
    ).edit("REGULATOR: {part: regulator", "REGULATOR: {part: screwed")
    return with_ends(f"from: {ends}", "V3", with_ends(f"to: {ends}", "V2", yard))


def test_set_screw_on_thin_strands_is_found_and_a_ferrule_is_sound() -> None:
    """TRM-07: below 14 AWG."""
    yard = regulator("{terminal: bare}")
    assert [row[:3] for row in found(yard)] == [("terminal-kind", name, PRACTICE) for name in ("V2", "V3")]
    assert found(regulator("{terminal: ferrule}")) == []


def test_ends_that_nobody_described_are_not_assessed_once() -> None:
    rows = not_assessed(SOUND.edit("workmanship:\n  terminal: ring\n", "workmanship:\n"))
    assert rows == [("terminal-kind", "workmanship", PRACTICE, "workmanship:")]


# --- splice-place


def spliced(zone: str, more: str = "") -> Yard:
    """Return the yard with a splice in the lead of the regulator."""
    yard = SOUND.also_parts(
        "butt: {kind: bus, rating: 30 A, splice: true, studs: 2, stud: M4, cover: true, ingress: IP67}"
    )
    row = line_of(SOUND, "V2").replace("2 m", "1 m")
    first, second = row.replace("REGULATOR.sense", "JOIN"), row.replace("F-SENSE.load", "JOIN").replace("V2", "V2-B")
    yard = yard.edit(line_of(yard, "V2"), f"{first}\n      {second}")
    return yard.also(f"devices:\n  JOIN: {{part: butt, zone: {zone}}}\n{more}")


@pytest.mark.parametrize(("zone", "more", "word"), [
    ("ENGINE-SPACE", "", "an engine space"),
    ("WET", "zones:\n  WET: {name: bilge, ambient: 30 C, wet: true, access: by-hatch}\n", "a wet zone"),
])  # fmt: skip
def test_splice_in_a_bad_place_is_found(zone: str, more: str, word: str) -> None:
    """TRM-08."""
    yard = spliced(zone, more)
    assert [row[:2] for row in found(yard)] == [("splice-place", "JOIN")]
    assert word in finding(yard, "splice-place", "JOIN").fault


def test_splice_in_a_dry_zone_with_access_is_sound() -> None:
    """TRM-08."""
    yard = spliced("DRY", "zones:\n  DRY: {name: locker, ambient: 30 C, access: by-hatch}\n")
    assert found(yard) == []
    assert ("splice-place", "JOIN", NEITHER) in passed(yard)


def test_splice_whose_access_nobody_recorded_is_not_assessed_at_the_zone() -> None:
    rows = outcomes(spliced("DRY", "zones:\n  DRY: {name: locker, ambient: 30 C}\n"), Verdict.NOT_ASSESSED)
    assert ("splice-place", "DRY", "access") in [(o.check, o.part, o.missing) for o in rows]


# --- torque-value


def test_part_without_torque_on_a_heavy_joint_is_found_once_at_the_part() -> None:
    """TRM-09: 2/0 at 200 A lands on the start battery."""
    yard = battery(", terminal: stud, stud: M10").edit("cover: true, torque: 12 Nm, smallest_size: 16 AWG, largest_size: 4/0 AWG, terminal: stud, stud: M10}",
                                                        "cover: true, smallest_size: 16 AWG, largest_size: 4/0 AWG, terminal: stud, stud: M10}")  # fmt: skip
    assert [row[:3] for row in found(yard)] == [("torque-value", "other-battery", NEITHER)]
    told = finding(yard, "torque-value", "other-battery")
    assert told.fault == "BAT-S.pos of BAT-S carries 200 A over S1, and other-battery tells no torque"


@pytest.mark.parametrize(("current", "is_found"), [("50 A", False), ("50.1 A", True)])
def test_torque_is_asked_for_above_50_a(current: str, is_found: bool) -> None:
    """TRM-09."""
    rows = [row[:2] for row in found(converter_on("stud", "6 AWG", current))]
    assert rows == ([("torque-value", "small-charger")] if is_found else [])
