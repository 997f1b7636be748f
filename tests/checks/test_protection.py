"""Seed faults of protection: what can feed a fault, and what would open it."""

from __future__ import annotations

import pytest

from tests.small_yard import (
    BOTH,
    LAW,
    LAW_ONLY,
    NEITHER,
    PRACTICE,
    PRACTICE_ONLY,
    SOUND,
    Yard,
    finding,
    found,
    not_assessed,
    passed,
)

MAIN = "M1: {from: BAT-H.pos, to: F-MAIN.line, size: 2 AWG, length: 5.9 in}"
FUSE_LEADS = ("C3", "V1", "Q1")
HORN_PART = "horn: {kind: load, voltage: 12 V, current: 5 A, max_device: 15 A}"


def horn(*conductors: str, devices: str = "") -> Yard:
    """Return the yard with a horn on conductors and devices of its own."""
    lines = "".join(f"      {conductor}\n" for conductor in conductors)
    return SOUND.also_parts(HORN_PART).also(
        "devices:\n  HORN: {part: horn, zone: BOW}\n"
        + "".join(f"  {device}\n" for device in devices.splitlines())
        + f"circuits:\n  HORN:\n    name: Horn\n    service: horn\n    current: 5 A\n"
        f"    always_on: blown by whoever is aboard\n    conductors:\n{lines}"
    )


HORN_BACK = "H2: {from: HORN.neg, to: BUS-N, size: 14 AWG, length: 4 m}"


# PRO-01, T-02, PRO-07: no device on the way


def test_conductor_from_a_battery_post_without_a_device_is_found() -> None:
    """PRO-01: its return would carry as much, but a return is not ungrounded."""
    line = "H1: {from: BAT-H.pos, to: HORN.pos, size: 14 AWG, length: 4 m}"
    yard = horn(line, HORN_BACK)
    assert found(yard) == [("unprotected-conductor", "H1", BOTH, line)]
    assert "BAT-H.pos feeds it with no overcurrent device" in finding(yard, "unprotected-conductor", "H1", LAW).fault


@pytest.mark.parametrize("ahead", ["6.9 in", "7 in", "0.1778 m"])
def test_load_ahead_of_the_main_switch_with_its_own_fuse_near_the_battery_is_sound(ahead: str) -> None:
    """PRO-01, T-02."""
    yard = horn(
        f"H0: {{from: BAT-H.pos, to: F-HORN.line, size: 14 AWG, length: {ahead}}}",
        "H1: {from: F-HORN.load, to: HORN.pos, size: 14 AWG, length: 4 m}",
        HORN_BACK,
        devices="F-HORN: {part: blade-fuse, zone: LOCKER, rating: 10 A}",
    )
    assert found(yard) == []


def test_fuse_in_the_negative_alone_leaves_the_positive_unprotected() -> None:
    """PRO-07: its sound twin has the fuse in the positive, as above."""
    line = "H1: {from: BAT-H.pos, to: HORN.pos, size: 14 AWG, length: 4 m}"
    yard = horn(
        line,
        "H2: {from: HORN.neg, to: F-HORN.line, size: 14 AWG, length: 4 m}",
        "H3: {from: F-HORN.load, to: BUS-N, size: 14 AWG, length: 0.1 m}",
        devices="F-HORN: {part: blade-fuse, zone: LOCKER, rating: 10 A}",
    )
    assert found(yard) == [
        ("switched-return", "F-HORN", NEITHER, "F-HORN: {part: blade-fuse, zone: LOCKER, rating: 10 A}"),
        ("unprotected-conductor", "H1", BOTH, line),
    ]
    assert "F-HORN stands in the return" in finding(yard, "unprotected-conductor", "H1", LAW).fault


def test_fuse_in_the_positive_and_in_the_negative_protects_both() -> None:
    """PRO-07: the one in the negative opens the return alone, which is a fault of its own."""
    yard = horn(
        "H0: {from: F-HORN.load, to: HORN.pos, size: 14 AWG, length: 4 m}",
        "H2: {from: HORN.neg, to: F-BACK.line, size: 14 AWG, length: 4 m}",
        "H3: {from: F-BACK.load, to: BUS-N, size: 14 AWG, length: 0.1 m}",
        devices="F-HORN: {part: blade-fuse, zone: LOCKER, rating: 10 A, mount: {line: BAT-H.pos}}\n"
        "F-BACK: {part: blade-fuse, zone: LOCKER, rating: 10 A}",
    )
    assert [told[:2] for told in found(yard)] == [("switched-return", "F-BACK")]


# PRO-02, PRO-03, T-12, T-30, T-36: the distance from the source


@pytest.mark.parametrize("length", ["7.1 in", "0.178 m", "178 mm", "0.6 ft"])
def test_device_more_than_7_in_from_the_battery_is_found_at_the_piece_ahead(length: str) -> None:
    """PRO-02: 178 mm is more than the 7 in that the sets print."""
    line = MAIN.replace("5.9 in", length)
    yard = SOUND.edit(MAIN, line)
    assert found(yard) == [("protection-distance", "M1", BOTH, line)]
    assert finding(yard, "protection-distance", "M1", LAW).state.startswith("any")


@pytest.mark.parametrize("length", ["6.9 in", "7 in", "0.1778 m", "177.8 mm", "0 ft 7 in"])
def test_device_within_7_in_of_the_battery_is_sound(length: str) -> None:
    """PRO-02."""
    assert found(SOUND.edit(MAIN, MAIN.replace("5.9 in", length))) == []


def charger_fuse_behind_studs(last: str) -> Yard:
    """Lead from the battery to the charger's fuse in three pieces over two studs."""
    pieces = (
        f"C3: {{from: STUD-2, to: F-CHARGER.line, size: 10 AWG, length: {last}}}\n"
        "      C4: {from: STUD-1, to: STUD-2, size: 10 AWG, length: 2 in}\n"
        "      C5: {from: BAT-H.pos, to: STUD-1, size: 10 AWG, length: 2 in}"
    )
    yard = SOUND.edit("C3: {from: F-CHARGER.line, to: BAT-H.pos, size: 10 AWG, length: 0.1 m}", pieces)
    return yard.also("devices:\n  STUD-1: {part: bus-100, zone: LOCKER}\n  STUD-2: {part: bus-100, zone: LOCKER}\n")


def test_short_pieces_in_a_row_add_up_and_are_found_at_the_last() -> None:
    """PRO-02: 2 in + 2 in + 3.1 in is 7.1 in."""
    line = "C3: {from: STUD-2, to: F-CHARGER.line, size: 10 AWG, length: 3.1 in}"
    assert found(charger_fuse_behind_studs("3.1 in")) == [("protection-distance", "C3", BOTH, line)]


def test_short_pieces_that_make_7_in_are_sound() -> None:
    """PRO-02."""
    assert found(charger_fuse_behind_studs("3 in")) == []


def test_one_bare_piece_in_a_row_makes_the_whole_row_open() -> None:
    """PRO-03: the last piece, 8 in, lies in a sleeve; the two before it do not."""
    line = "C3: {from: STUD-2, to: F-CHARGER.line, size: 10 AWG, length: 8 in, enclosed: full, place_reason: studs}"
    yard = charger_fuse_behind_studs("8 in, enclosed: full, place_reason: studs")
    assert found(yard) == [("protection-distance", "C3", BOTH, line)]
    sleeved = yard.edit(
        "to: STUD-2, size: 10 AWG, length: 2 in", "to: STUD-2, size: 10 AWG, length: 2 in, enclosed: full"
    )
    sleeved = sleeved.edit(
        "to: STUD-1, size: 10 AWG, length: 2 in", "to: STUD-1, size: 10 AWG, length: 2 in, enclosed: full"
    )
    assert found(sleeved) == []


def enclosed_main(length: str, enclosed: str, reason: str = ", place_reason: no room at the post") -> Yard:
    """Return the yard with a longer piece ahead of the main fuse, some of it in a sleeve."""
    line = f"M1: {{from: BAT-H.pos, to: F-MAIN.line, size: 2 AWG, length: {length}, enclosed: {enclosed}{reason}}}"
    return SOUND.edit(MAIN, line)


def test_sleeve_over_part_of_the_piece_does_not_count() -> None:
    """PRO-03."""
    yard = enclosed_main("30 in", "29 in")
    line = (
        "M1: {from: BAT-H.pos, to: F-MAIN.line, size: 2 AWG, length: 30 in, enclosed: 29 in, "
        "place_reason: no room at the post}"
    )
    assert found(yard) == [("protection-distance", "M1", BOTH, line)]
    assert "covers only part" in finding(yard, "protection-distance", "M1", LAW).fault


@pytest.mark.parametrize(("length", "enclosed"), [("30 in", "30 in"), ("30 in", "full"), ("0.762 m", "30 in")])
def test_sleeve_over_the_whole_piece_counts(length: str, enclosed: str) -> None:
    """PRO-03, T-12."""
    assert found(enclosed_main(length, enclosed)) == []


@pytest.mark.parametrize("length", ["39.9 in", "40 in", "1.016 m", "3 ft 4 in"])
def test_device_at_40_in_in_a_sleeve_with_its_reason_is_sound(length: str) -> None:
    """T-12."""
    yard = enclosed_main(length, "full")
    assert found(yard) == []
    assert not_assessed(yard) == []


@pytest.mark.parametrize("length", ["40.1 in", "1.017 m", "3 ft 4.1 in"])
def test_device_beyond_40_in_in_a_sleeve_is_found_under_the_law(length: str) -> None:
    """T-12: the voluntary set grants 72 in to a conductor on a battery post."""
    yard = enclosed_main(length, "full")
    assert [told[:3] for told in found(yard)] == [("protection-distance", "M1", LAW)]


@pytest.mark.parametrize(("length", "expected"), [("72 in", 0), ("6 ft", 0), ("1.8288 m", 0), ("72.1 in", 1)])
def test_voluntary_set_grants_72_in_to_an_enclosed_conductor_on_a_battery(length: str, expected: int) -> None:
    """T-12."""
    yard = enclosed_main(length, "full", reason="").edit("[cfr33-183-i, voluntary-dc]", "[voluntary-dc]")
    assert [told[:3] for told in found(yard)] == [("protection-distance", "M1", PRACTICE)] * expected


def test_device_beyond_7_in_without_a_reason_is_not_assessed_under_the_law() -> None:
    """T-12: the law grants more than 7 in only where nearer is impractical."""
    yard = enclosed_main("30 in", "full", reason="")
    assert found(yard) == []
    assert [told[:3] for told in not_assessed(yard)] == [("protection-distance", "M1", LAW)]


def test_piece_in_a_conduit_over_its_whole_length_counts_as_enclosed() -> None:
    """T-12: the pipe is 0.5 m; a tail of 1 in outside it is too much."""
    yard = SOUND.edit("size: 2 AWG, length: 5.9 in", "size: 2 AWG, route: [locker-pipe], place_reason: no room")
    assert found(yard) == []
    bare = yard.edit("route: [locker-pipe], place", "route: [locker-pipe], tail: 1 in, place")
    assert [told[:3] for told in found(bare)] == [("protection-distance", "M1", BOTH)]


def main_fuse_on_the_post() -> Yard:
    """Return the yard with the main fuse mounted on the battery post."""
    yard = SOUND.without("M1:")
    return yard.edit("F-MAIN: {part: bolt-fuse, zone: LOCKER, rating: 150 A}",
                     "F-MAIN: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: BAT-H.pos}}")  # fmt: skip


def test_fuse_mounted_on_the_battery_post_is_sound() -> None:
    """T-30."""
    assert found(main_fuse_on_the_post()) == []


def two_batteries(link: str) -> Yard:
    """Return the yard with a second battery in parallel, the fuse leads of 0.1 m still on the first."""
    bank = "size: 2/0 AWG, role: bank, reason: link of the bank, current: 40 A"
    monitor = main_fuse_on_the_post().edit("capacity: 100 Ah, ratio", "capacity: 200 Ah, ratio")
    return monitor.also(
        "devices:\n  BAT-H2: {part: house-battery, zone: LOCKER, bank: HOUSE}\n"
        "conductors:\n"
        f"  L1: {{from: BAT-H2.pos, to: BAT-H.pos, length: {link}, {bank}}}\n"
        f"  L2: {{from: BAT-H2.neg, to: BAT-H.neg, length: 3 in, {bank}}}\n"
    )


@pytest.mark.parametrize("link", ["3 in", "0.0778 m"])
def test_short_link_between_batteries_of_a_bank_needs_no_device(link: str) -> None:
    """T-36: 0.1 m of fuse lead and the link make 7 in from the far battery."""
    assert found(two_batteries(link)) == []


def test_link_of_a_bank_counts_into_the_length_ahead_of_the_fuses() -> None:
    """T-36: 4 in of link and 0.1 m of lead are more than 7 in, for each of the leads."""
    assert [told[:3] for told in found(two_batteries("4 in"))] == [
        ("protection-distance", lead, BOTH) for lead in sorted(FUSE_LEADS)
    ]


# PRO-04, T-13: the rating

ALT_FUSE = "F-ALT: {part: bolt-fuse, zone: LOCKER, rating: 80 A, mount: {line: BAT-H.pos}}"
A1 = "A1: {from: ALT.B, to: F-ALT.load, size: 6 AWG, length: 2 m}"


def lights_behind(breaker: str) -> Yard:
    """Return the yard with another breaker ahead of the lights, 18 AWG of 20 A; its maker allows 40 A."""
    yard = SOUND.edit("30 A: {}}\n  single", "30 A: {}, 31 A: {}}\n  single")
    yard = yard.edit("current: 3 A, max_device: 10 A", "current: 3 A, max_device: 40 A")
    return yard.edit("protect: 10 A\n    legend: LIGHTS 10 A", f"protect: {breaker}")


def test_device_above_what_either_set_allows_is_found_at_the_conductor() -> None:
    """PRO-04: 102 A for 6 AWG in the engine space; 153 A by law, 110 A by the voluntary set."""
    yard = SOUND.edit(ALT_FUSE, ALT_FUSE.replace("80 A", "200 A"))
    assert found(yard) == [("device-rating", "A1", BOTH, A1)]
    limits = [finding(yard, "device-rating", "A1", one).measure for one in (LAW, PRACTICE)]
    assert [round(measure.limit) for measure in limits if measure] == [153, 110]


def test_main_device_beyond_its_own_conductors_is_found_at_these_and_is_no_step_in_size() -> None:
    """PRO-04: 2 AWG allows 315 A by law and 225 A by the voluntary set; M2 and M3 lead on to the panel's fuse."""
    parts = "main-fuse: {kind: fuse, voltage: 32 V, interrupting: 10 kA, band: slow, rating: 350 A}"
    yard = SOUND.also_parts(parts).edit("F-MAIN: {part: bolt-fuse, zone: LOCKER, rating: 150 A",
                                        "F-MAIN: {part: main-fuse, zone: LOCKER")  # fmt: skip
    told = {(check, part): sets for check, part, sets, _ in found(yard) if check in ("device-rating", "size-step")}
    assert told == {("device-rating", "M2"): BOTH, ("device-rating", "M3"): BOTH}
    assert "F-MAIN 350 A protects 2 AWG" in finding(yard, "device-rating", "M2", LAW).fault


def test_device_between_both_limits_is_found_under_the_voluntary_set_alone() -> None:
    """PRO-04, T-13."""
    assert found(SOUND.edit(ALT_FUSE, ALT_FUSE.replace("80 A", "150 A"))) == [("device-rating", "A1", PRACTICE, A1)]


def test_device_above_the_ampacity_but_within_150_percent_is_sound_by_law() -> None:
    """T-13."""
    assert found(LAW_ONLY.edit(ALT_FUSE, ALT_FUSE.replace("80 A", "150 A"))) == []


WITHSTAND = ("conductor-withstand", "LIGHTS.out", NEITHER, "cable: 18 AWG")


def test_device_of_exactly_150_percent_is_sound_by_law() -> None:
    """PRO-04, T-13: 30 A on 18 AWG of 20 A. The voluntary set has 14 A for two cores, and so 15 A.

    What the law allows is no promise: 18 AWG withstands 0.005 kA²s, less than the breaker lets through.
    """
    yard = lights_behind("30 A")
    assert found(yard) == [
        WITHSTAND,
        ("device-rating", "LIGHTS.out", PRACTICE, "cable: 18 AWG"),
    ]  # its return is thinner nowhere: one cause, one finding


def test_device_just_above_150_percent_is_found_by_law() -> None:
    """PRO-04."""
    assert found(lights_behind("31 A")) == [WITHSTAND, ("device-rating", "LIGHTS.out", BOTH, "cable: 18 AWG")]


@pytest.mark.parametrize(("breaker", "expected"), [("15 A", 0), ("20 A", 1)])
def test_voluntary_set_allows_the_next_standard_rating(breaker: str, expected: int) -> None:
    """PRO-04: 14 A, and 15 A is the next standard rating."""
    told = [("device-rating", "LIGHTS.out", PRACTICE, "cable: 18 AWG")]
    assert found(lights_behind(breaker)) == told * expected


# PRO-05, PRO-06: steps

STEP_BACK = "X9: {from: HORN.neg, to: PANEL-N, size: 6 AWG, length: 1 m}"


def test_thinner_tail_on_the_panel_bus_without_a_device_is_found() -> None:
    """PRO-05: 16 AWG allows 37.5 A by law, and the feeder's fuse is 60 A."""
    line = "X1: {from: PANEL, to: HORN.pos, size: 16 AWG, length: 1 m}"
    yard = horn(line, STEP_BACK)
    assert found(yard) == [("conductor-withstand", "X1", NEITHER, line), ("size-step", "X1", BOTH, line)]
    assert "F-PANEL 60 A" in finding(yard, "size-step", "X1", LAW).fault


def test_thinner_tail_that_the_feeder_s_fuse_still_protects_is_sound() -> None:
    """PRO-05: 10 AWG bears 60 A, the rating of the fuse."""
    assert found(horn("X1: {from: PANEL, to: HORN.pos, size: 10 AWG, length: 1 m}", STEP_BACK)) == []


@pytest.mark.parametrize("length", ["6.9 in", "7 in", "0.1778 m"])
def test_thinner_tail_with_a_device_within_7_in_of_the_step_is_sound(length: str) -> None:
    """PRO-05."""
    yard = horn(
        f"X1: {{from: PANEL, to: F-HORN.line, size: 16 AWG, length: {length}}}",
        "X2: {from: F-HORN.load, to: HORN.pos, size: 16 AWG, length: 1 m}",
        STEP_BACK,
        devices="F-HORN: {part: blade-fuse, zone: CABIN, rating: 10 A}",
    )
    assert found(yard) == []


def test_thinner_tail_with_its_device_more_than_7_in_from_the_step_is_found() -> None:
    """PRO-05: its feed is finite, so it is told as a step."""
    line = "X1: {from: PANEL, to: F-HORN.line, size: 16 AWG, length: 7.1 in}"
    yard = horn(
        line,
        "X2: {from: F-HORN.load, to: HORN.pos, size: 16 AWG, length: 1 m}",
        STEP_BACK,
        devices="F-HORN: {part: blade-fuse, zone: CABIN, rating: 10 A}",
    )
    assert found(yard) == [("conductor-withstand", "X1", NEITHER, line), ("size-step", "X1", BOTH, line)]


def twice_stepped(last: str) -> Yard:
    """Return the yard with 6 AWG, then 10 AWG, then a last size to the horn, all behind 60 A."""
    return horn(
        "X1: {from: PANEL, to: STUD, size: 10 AWG, length: 1 m}",
        f"X2: {{from: STUD, to: HORN.pos, size: {last}, length: 1 m}}",
        STEP_BACK,
        devices="STUD: {part: bus-100, zone: CABIN}",
    )


def test_second_step_is_found_though_the_first_is_protected() -> None:
    """PRO-06."""
    line = "X2: {from: STUD, to: HORN.pos, size: 16 AWG, length: 1 m}"
    assert found(twice_stepped("16 AWG")) == [
        ("conductor-withstand", "X2", NEITHER, line), ("size-step", "X2", BOTH, line),
    ]  # fmt: skip


def test_second_step_to_a_size_that_the_device_protects_is_sound() -> None:
    """PRO-06."""
    assert found(twice_stepped("10 AWG")) == []


# PRO-16, PRO-25: two sources

PARALLEL_BACK_END = "F-X2: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: SW-S.out}}"


LINK_LINE = "F-X1: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: BUS-P}}"
AS_LARGE_AS_THE_MAIN = ("selectivity", "F-X1 under F-MAIN", NEITHER, LINK_LINE)
"""The fuse of the link is as large as the main one: behind it, either may open first."""


def parallel_switch(last: str, *, fused_at_both_ends: bool, extra: str = "", states: str = "") -> Yard:
    """Return the yard with a switch that joins both banks, fused at the house end or at both."""
    back_end = f"  {PARALLEL_BACK_END}\n" if fused_at_both_ends else ""
    return SOUND.also(
        "devices:\n  SW-X: {part: battery-switch, zone: LOCKER}\n"
        "  F-X1: {part: bolt-fuse, zone: LOCKER, rating: 150 A, mount: {line: BUS-P}}\n" + back_end
        + "circuits:\n  LINK:\n    name: Emergency link\n    service: cranking\n    current: 100 A\n    conductors:\n"
        "      X1: {from: F-X1.load, to: SW-X.in, size: 2 AWG, length: 0.5 m}\n"
        f"      {last}\n" + extra + states
    )  # fmt: skip


STATES = """\
states:
  in-use: {kind: normal, switches: {SW-X: open}}
  emergency: {kind: abnormal, switches: {SW-X: closed}}
"""


def test_link_between_two_banks_fused_at_one_end_is_found_in_the_state_that_closes_it() -> None:
    """PRO-16: 1 m from the start switch to the only fuse, and with the link open no fuse at all."""
    line = "X2: {from: SW-X.out, to: SW-S.out, size: 2 AWG, length: 0.5 m}"
    yard = parallel_switch(line, fused_at_both_ends=False, states=STATES)
    first = "X1: {from: F-X1.load, to: SW-X.in, size: 2 AWG, length: 0.5 m}"
    assert found(yard) == [
        ("protection-distance", "X1", BOTH, first),
        AS_LARGE_AS_THE_MAIN,
        ("unprotected-conductor", "X2", BOTH, line),
    ]
    assert finding(yard, "protection-distance", "X1", LAW).state.startswith("emergency (abnormal)")
    assert finding(yard, "unprotected-conductor", "X2", LAW).state.startswith("in-use")


def test_link_between_two_banks_fused_at_both_ends_is_sound() -> None:
    """PRO-16."""
    line = "X2: {from: SW-X.out, to: F-X2.load, size: 2 AWG, length: 0.5 m}"
    assert found(parallel_switch(line, fused_at_both_ends=True, states=STATES)) == [AS_LARGE_AS_THE_MAIN]


def doubly_fed(states: str) -> Yard:
    """Return the yard with a load of 4 AWG on the positive bus, which two fuses of 150 A can feed."""
    return parallel_switch(
        "X2: {from: SW-X.out, to: F-X2.load, size: 2 AWG, length: 0.5 m}", fused_at_both_ends=True,
        extra="      X3: {from: BUS-P, to: WINCH.pos, size: 4 AWG, length: 1 m}\n"
        "      X4: {from: WINCH.neg, to: BUS-N, size: 4 AWG, length: 1 m}\n",
        states=states,
    ).also("devices:\n  WINCH: {part: winch, zone: BOW}\n").also_parts(
        "winch: {kind: load, voltage: 12 V, current: 90 A}"
    )  # fmt: skip


def test_bus_fed_by_two_devices_whose_sum_a_conductor_does_not_allow_is_found() -> None:
    """PRO-25: 160 A for 4 AWG; 240 A by law, 175 A by the voluntary set, and 300 A can come.

    They come through the bus, which is rated 250 A: PRO-23 follows.
    """
    line = "X3: {from: BUS-P, to: WINCH.pos, size: 4 AWG, length: 1 m}"
    yard = doubly_fed(STATES)
    assert found(yard) == [
        ("bus-rating", "BUS-P", NEITHER, "BUS-P: {part: bus-250, zone: LOCKER, name: positive bus}"),
        ("double-feed", "X3", BOTH, line),
        AS_LARGE_AS_THE_MAIN,
    ]
    told = finding(yard, "double-feed", "X3", LAW)
    assert "F-MAIN 150 A + F-X1 150 A = 300 A" in told.fault
    assert told.state.startswith("emergency (abnormal)")


def test_bus_fed_by_one_device_at_a_time_is_sound() -> None:
    """PRO-25: the link may only be closed with the house switch open."""
    states = (
        "states:\n"
        "  in-use: {kind: normal, switches: {SW-H: closed, SW-X: open}}\n"
        "  left: {kind: normal, switches: {SW-H: open, SW-X: open}}\n"
        "  emergency: {kind: abnormal, switches: {SW-H: open, SW-X: closed}}\n"
        "  both: {kind: forbidden, switches: {SW-H: closed, SW-X: closed}}\n"
    )
    assert found(doubly_fed(states)) == [AS_LARGE_AS_THE_MAIN]


# PRO-17, PRO-18, PRO-20, PRO-21, PRO-22, T-07, T-08: charge sources and sense leads


def test_charger_lead_fused_only_at_the_charger_is_found_at_its_battery_end() -> None:
    """PRO-17: 2 m of lead between the battery and the fuse."""
    yard = SOUND.without("C3:").edit(
        "C1: {from: CHARGER.out, to: F-CHARGER.load,", "C1: {from: BAT-H.pos, to: F-CHARGER.load,"
    )
    yard = yard.edit("rating: 30 A}\n  REG", "rating: 30 A, mount: {line: CHARGER.out}}\n  REG")
    line = "C1: {from: BAT-H.pos, to: F-CHARGER.load, size: 10 AWG, length: 2 m}"
    assert found(yard) == [("protection-distance", "C1", BOTH, line)]


def test_charger_lead_without_a_fuse_is_found() -> None:
    """PRO-17: its sound twin is the yard as it is, with the fuse 0.1 m from the battery."""
    yard = SOUND.without("C3:", "F-CHARGER:").edit("to: F-CHARGER.load", "to: BAT-H.pos")
    line = "C1: {from: CHARGER.out, to: BAT-H.pos, size: 10 AWG, length: 2 m}"
    assert found(yard) == [("unprotected-conductor", "C1", BOTH, line)]
    assert ("unprotected-conductor", "C1", LAW) in passed(SOUND)


SOLAR_PARTS = """\
array: {kind: source, outputs: {pos: {return: neg, max: 9 A, voltage: 20 V, limited: true}}}
controller: {kind: source, outputs: {bat: {return: neg, max: 15 A, voltage: 14 V, limited: true}}, inputs: {pv: {return: pvneg, max: 9 A, voltage: 20 V}}, joined: [{between: [neg, pvneg]}]}
"""


def solar(out: str, array_lead: str = "14 AWG", max_a: str = "9 A") -> Yard:
    """Return the yard with a solar array and its controller, whose output is wired as told."""
    parts = SOLAR_PARTS.replace("max: 9 A, voltage: 20 V, limited", f"max: {max_a}, voltage: 20 V, limited")
    return SOUND.also_parts(parts).also(
        "devices:\n  ARRAY: {part: array, zone: BOW}\n  MPPT: {part: controller, zone: CABIN}\n"
        "  F-SOLAR: {part: blade-fuse, zone: LOCKER, rating: 15 A, mount: {line: BAT-H.pos}}\n"
        "circuits:\n  SOLAR:\n    name: Solar\n    service: solar\n    current: 9 A\n    conductors:\n"
        f"      Y1: {{from: ARRAY.pos, to: MPPT.pv, size: {array_lead}, length: 3 m}}\n"
        f"      Y2: {{from: ARRAY.neg, to: MPPT.pvneg, size: {array_lead}, length: 3 m}}\n"
        f"      {out}\n      Y4: {{from: MPPT.neg, to: BUS-N, size: 12 AWG, length: 1 m}}\n"
    )  # fmt: skip


def test_solar_output_without_a_fuse_at_the_battery_is_found() -> None:
    """PRO-18."""
    line = "Y3: {from: MPPT.bat, to: BAT-H.pos, size: 12 AWG, length: 1 m}"
    yard = solar(line).without("F-SOLAR:")
    assert found(yard) == [("unprotected-conductor", "Y3", BOTH, line)]


def test_solar_output_fused_at_the_battery_is_sound_with_bare_array_leads() -> None:
    """PRO-18, T-08: nothing but the array's 9 A can reach its leads."""
    yard = solar("Y3: {from: MPPT.bat, to: F-SOLAR.load, size: 12 AWG, length: 1 m}")
    assert found(yard) == []
    assert ("unprotected-conductor", "Y1", LAW) in passed(yard)


def test_array_that_gives_more_than_its_leads_allow_is_found() -> None:
    """T-08: 16 AWG allows 37.5 A by law and 25 A by the voluntary set.

    The source itself is all that limits what comes, and no device stands there.
    """
    out = "Y3: {from: MPPT.bat, to: F-SOLAR.load, size: 12 AWG, length: 1 m}"
    line = "Y1: {from: ARRAY.pos, to: MPPT.pv, size: 16 AWG, length: 3 m}"
    assert found(solar(out, "16 AWG", "38 A")) == [("device-rating", "Y1", BOTH, line)]
    assert found(solar(out, "16 AWG", "26 A")) == [("device-rating", "Y1", PRACTICE, line)]
    assert found(solar(out, "16 AWG", "25 A")) == []


CONVERTER = "converter: {kind: source, outputs: {out: {return: neg, max: 10 A, voltage: 14 V, limited: true}}, inputs: {in: {return: neg, max: 12 A, voltage: 12 V}}}"


def converter(out: str) -> Yard:
    """Return the yard with a charger from the house bank to the start battery."""
    return SOUND.also_parts(CONVERTER).also(
        "devices:\n  DCDC: {part: converter, zone: LOCKER}\n"
        "  F-IN: {part: blade-fuse, zone: LOCKER, rating: 15 A, mount: {line: BUS-P}}\n"
        "  F-OUT: {part: blade-fuse, zone: LOCKER, rating: 15 A, mount: {line: BAT-S.pos}}\n"
        "circuits:\n  DCDC:\n    name: Start battery charger\n    service: charging\n    current: 12 A\n"
        "    conductors:\n"
        "      Z1: {from: F-IN.load, to: DCDC.in, size: 12 AWG, length: 1 m}\n"
        f"      {out}\n      Z3: {{from: DCDC.neg, to: BUS-N, size: 12 AWG, length: 1 m}}\n"
    )


def test_converter_output_without_a_fuse_at_its_battery_is_found() -> None:
    """PRO-20."""
    line = "Z2: {from: DCDC.out, to: BAT-S.pos, size: 12 AWG, length: 1 m}"
    assert found(converter(line).without("F-OUT:")) == [("unprotected-conductor", "Z2", BOTH, line)]


def test_converter_fused_at_both_batteries_is_sound() -> None:
    """PRO-20."""
    assert found(converter("Z2: {from: DCDC.out, to: F-OUT.load, size: 12 AWG, length: 1 m}")) == []


def test_converter_without_its_return_is_told_to_have_none() -> None:
    """SRC-12, RET-01: its input and its output share the missing return; neither holds it."""
    yard = converter("Z2: {from: DCDC.out, to: F-OUT.load, size: 12 AWG, length: 1 m}").without("Z3:")
    assert ("load-return", "DCDC") in {told[:2] for told in found(yard)}
    assert "load-voltage" not in {check for check, *_ in found(yard)}


def test_alternator_cable_without_a_fuse_at_the_battery_is_found() -> None:
    """PRO-21."""
    yard = SOUND.without("F-ALT:").edit("to: F-ALT.load", "to: BAT-H.pos")
    line = A1.replace("F-ALT.load", "BAT-H.pos")
    assert found(yard) == [("unprotected-conductor", "A1", BOTH, line)]


def test_alternator_cable_fused_at_the_battery_alone_is_sound() -> None:
    """PRO-21, T-07: a self-limiting source needs no device at its own end."""
    assert found(SOUND) == []
    assert ("unprotected-conductor", "A1", LAW) in passed(SOUND)


def test_source_that_is_not_self_limiting_needs_a_device_at_its_own_end() -> None:
    """T-07: the cable leads 2 m from the machine to its first device."""
    yard = SOUND.edit("outputs: {B: {return: case, max: 60 A, voltage: 14.4 V, limited: true}}",
                      "outputs: {B: {return: case, max: 60 A, voltage: 14.4 V}}")  # fmt: skip
    assert found(yard) == [("protection-distance", "A1", BOTH, A1)]


def test_sense_lead_from_a_battery_post_without_a_fuse_is_found() -> None:
    """PRO-22."""
    yard = SOUND.without("V1:", "F-SENSE:").edit("from: F-SENSE.load", "from: BAT-H.pos")
    line = "V2: {from: BAT-H.pos, to: REGULATOR.sense, size: 16 AWG, length: 2 m}"
    assert found(yard) == [("unprotected-conductor", "V2", BOTH, line)]


def test_monitor_lead_without_a_fuse_is_told_at_the_lead_alone() -> None:
    """PRO-22: the instrument is mounted on the shunt's post; its return says nothing more."""
    yard = SOUND.edit("Q2: {from: F-MONITOR.load,", "Q2: {from: BAT-H.pos,")
    assert {check for check, *_ in found(yard)} & {"unprotected-conductor", "return-protection"} == {
        "unprotected-conductor"
    }
    assert finding(yard, "unprotected-conductor", "Q2", LAW).part == "Q2"


def test_sense_lead_with_its_fuse_near_the_battery_is_sound() -> None:
    """PRO-22."""
    assert {("unprotected-conductor", "V2", LAW), ("unprotected-conductor", "V2", PRACTICE)} <= passed(SOUND)


# T-01: cranking


def test_cranking_conductors_carry_no_fuse() -> None:
    """T-01."""
    assert {("unprotected-conductor", part, one) for part in ("S1", "S2") for one in (LAW, PRACTICE)} <= passed(SOUND)


def test_conductor_that_branches_off_the_cranking_circuit_needs_its_fuse() -> None:
    """T-01: only what feeds the motor is exempt; the length counts from where it leaves."""
    line = "H1: {from: STARTER.B, to: HORN.pos, size: 14 AWG, length: 1 m}"
    assert found(horn(line, HORN_BACK)) == [("unprotected-conductor", "H1", BOTH, line)]
    fused = horn(
        "H0: {from: STARTER.B, to: F-HORN.line, size: 14 AWG, length: 7 in}",
        "H1: {from: F-HORN.load, to: HORN.pos, size: 14 AWG, length: 1 m}",
        HORN_BACK,
        devices="F-HORN: {part: blade-fuse, zone: ENGINE-SPACE, rating: 10 A}",
    )
    assert found(fused) == []


def test_voluntary_set_alone_finds_the_same_missing_device() -> None:
    """PRO-01."""
    line = "H1: {from: BAT-H.pos, to: HORN.pos, size: 14 AWG, length: 4 m}"
    yard = horn(line, HORN_BACK).edit("[cfr33-183-i, voluntary-dc]", "[voluntary-dc]")
    assert found(yard) == [("unprotected-conductor", "H1", PRACTICE, line)]
    assert found(PRACTICE_ONLY) == []


def test_return_of_a_load_that_sits_on_a_live_stud_without_a_device_is_found() -> None:
    """PRO-01: the horn's feed post sits on the stud of the main fuse's line: no conductor, and no device either.

    Only its return can tell: a horn that fails as a short sends all that the battery gives through it.
    """
    horn = (
        "devices:\n  HORN: {part: horn, zone: LOCKER, mount: {pos: F-MAIN.line}}\n"
        "circuits:\n  HORNS:\n    {name: Horn, service: horn, current: 5 A,\n"
        "     conductors: {X9: {from: HORN.neg, to: BUS-N, size: 12 AWG, length: 1 m}}}\n"
    )
    yard = SOUND.also_parts("horn: {kind: load, voltage: 12 V, current: 5 A, max_device: 10 A}").also(horn)
    assert ("return-protection", "X9") in [row[:2] for row in found(yard)]
