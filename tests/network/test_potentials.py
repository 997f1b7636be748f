"""Hold nets and potentials against hand calculations and against a direct linear check."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from checker.checks.nets import bank_tap, battery_loop, dead_short, load_return, load_voltage, split_return
from checker.network.graph import BatteryTie, Edge, EdgeKind, Network
from checker.network.potentials import Potentials, study_potentials
from checker.network.states import SwitchState
from checker.network.studies import Studies
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_conductor,
    a_converter,
    a_device,
    a_fuse,
    a_link,
    a_load,
    a_source,
    a_switch,
    found_in,
    potentials_of,
    studied,
)

EVERYTHING = SwitchState("any", True, frozenset(), "no switches")


def volts(studies: Studies, post: str) -> float | None:
    """Return the voltage of a post above the reference in the first state."""
    return potentials_of(studies).above_reference(studies.network.index[post])


def conflicts(*pieces: Piece) -> list[tuple[str, bool, float]]:
    """Return the conflicts of a boat: battery, whether it is shorted, and the voltage that the rest says."""
    return [(c.battery, c.is_short, c.drawn_v) for c in potentials_of(studied(*pieces)).conflicts]


BUS = a_bus("BUS-N")


# --- banks


def test_one_battery_is_12_v_above_the_reference() -> None:
    boat = studied(BUS, a_battery("A"), a_conductor("n", "A.neg", "BUS-N"))
    assert volts(boat, "A.pos") == 12.0
    assert volts(boat, "A.neg") == 0.0


def test_two_12_v_batteries_of_100_ah_in_series_are_24_v() -> None:
    boat = studied(BUS, a_battery("A"), a_battery("B"), a_link("s", "A.neg", "B.pos"), a_link("n", "B.neg", "BUS-N"))
    assert volts(boat, "A.pos") == 24.0
    assert volts(boat, "B.pos") == volts(boat, "A.neg") == 12.0
    assert potentials_of(boat).conflicts == ()


def test_two_12_v_batteries_in_parallel_are_12_v() -> None:
    boat = studied(
        BUS, a_battery("A"), a_battery("B"), a_link("p", "A.pos", "B.pos"), a_link("n", "A.neg", "B.neg"),
        a_link("nn", "B.neg", "BUS-N"),
    )  # fmt: skip
    assert volts(boat, "A.pos") == volts(boat, "B.pos") == 12.0
    assert potentials_of(boat).conflicts == ()


def two_strings_of_6_v() -> list[Piece]:
    """Return two strings of two 6 V blocks, as in many house banks."""
    return [
        BUS, *(a_battery(name, 6.0) for name in ("A1", "A2", "B1", "B2")), a_bus("STUD"),
        a_link("a", "A1.neg", "A2.pos"), a_link("b", "B1.neg", "B2.pos"), a_link("ap", "A1.pos", "STUD"),
        a_link("bp", "B1.pos", "STUD"), a_link("an", "A2.neg", "BUS-N"), a_link("bn", "B2.neg", "BUS-N"),
    ]  # fmt: skip


def test_two_strings_of_two_6_v_blocks_are_12_v() -> None:
    boat = studied(*two_strings_of_6_v())
    assert volts(boat, "STUD") == 12.0
    assert volts(boat, "A1.neg") == volts(boat, "B1.neg") == 6.0
    assert potentials_of(boat).conflicts == ()


def test_the_middles_of_two_strings_joined_agree() -> None:
    assert conflicts(*two_strings_of_6_v(), a_link("mid", "A1.neg", "B1.neg")) == []


def test_the_middles_of_strings_of_unequal_blocks_do_not_agree() -> None:
    pieces = [p for p in two_strings_of_6_v() if p.id not in ("B1", "B2")]
    pieces += [a_battery("B1", 4.0), a_battery("B2", 8.0), a_link("mid", "A1.neg", "B1.neg")]
    assert conflicts(*pieces) == [("B1", False, 6.0), ("B2", False, 6.0)]


def test_a_positive_at_the_reference_makes_the_negative_stand_below_it() -> None:
    boat = studied(BUS, a_battery("A"), a_conductor("p", "A.pos", "BUS-N"))
    assert volts(boat, "A.neg") == -12.0


def test_a_bank_with_the_reference_in_its_middle_stands_on_both_sides() -> None:
    boat = studied(BUS, a_battery("A"), a_battery("B"), a_link("u", "A.neg", "BUS-N"), a_link("l", "B.pos", "BUS-N"))
    potentials = potentials_of(boat)
    assert (volts(boat, "A.pos"), volts(boat, "B.neg")) == (12.0, -12.0)
    assert potentials.is_return(boat.network.index["A.neg"])
    assert not potentials.is_return(boat.network.index["B.neg"])


# --- what cannot be wired as drawn


def test_a_battery_with_both_posts_on_one_net_is_a_dead_short() -> None:
    pieces = (BUS, a_battery("A"), a_conductor("n", "A.neg", "BUS-N"), a_conductor("w", "A.pos", "BUS-N"))
    assert conflicts(*pieces) == [("A", True, 0.0)]
    assert potentials_of(studied(*pieces)).conflicts[0].path == ("A.pos", "w", "BUS-N", "n", "A.neg")
    assert found_in(a_boat(*pieces), dead_short, battery_loop) == [("dead-short", "A")]


def test_a_short_over_a_closed_switch_is_found_though_the_switch_can_be_open() -> None:
    pieces = (
        BUS, a_battery("A"), a_switch("SW"), a_conductor("n", "A.neg", "BUS-N"), a_conductor("w", "A.pos", "SW.in"),
        a_conductor("v", "SW.out", "BUS-N"),
    )  # fmt: skip
    assert found_in(a_boat(*pieces), dead_short) == [("dead-short", "A")]


def test_a_short_over_a_fuse_is_a_dead_short_all_the_same() -> None:
    pieces = (
        BUS, a_battery("A"), a_fuse("F", 10.0), a_conductor("n", "A.neg", "BUS-N"), a_conductor("w", "A.pos", "F.line"),
        a_conductor("v", "F.load", "BUS-N"),
    )  # fmt: skip
    assert found_in(a_boat(*pieces), dead_short) == [("dead-short", "A")]


def test_a_12_v_battery_beside_a_24_v_bank_does_not_agree() -> None:
    pieces = (
        BUS, a_battery("A"), a_battery("B"), a_battery("C"), a_link("s", "A.neg", "B.pos"), a_link("n", "B.neg", "BUS-N"),
        a_link("cp", "A.pos", "C.pos"), a_link("cn", "C.neg", "BUS-N"),
    )  # fmt: skip
    assert conflicts(*pieces) == [("C", False, 24.0)]
    assert found_in(a_boat(*pieces), dead_short, battery_loop) == [("battery-loop", "C")]


def test_the_path_of_a_disagreeing_loop_leads_through_the_other_batteries() -> None:
    pieces = (
        BUS, a_battery("A"), a_battery("B"), a_battery("C"), a_link("s", "A.neg", "B.pos"), a_link("n", "B.neg", "BUS-N"),
        a_link("cp", "A.pos", "C.pos"), a_link("cn", "C.neg", "BUS-N"),
    )  # fmt: skip
    assert potentials_of(studied(*pieces)).conflicts[0].path == (
        "C.pos", "cp", "A.pos", "A", "A.neg", "s", "B.pos", "B", "B.neg", "n", "BUS-N", "cn", "C.neg",
    )  # fmt: skip


def test_a_reversed_battery_in_a_parallel_row_does_not_agree() -> None:
    pieces = (
        BUS, a_battery("A"), a_battery("B"), a_link("p", "A.pos", "B.neg"), a_link("q", "A.neg", "B.pos"),
        a_link("n", "A.neg", "BUS-N"),
    )  # fmt: skip
    assert conflicts(*pieces) == [("B", False, -12.0)]


def test_a_reversed_battery_in_a_string_takes_its_voltage_away() -> None:
    boat = studied(BUS, a_battery("A"), a_battery("B"), a_link("s", "A.neg", "B.neg"), a_link("n", "B.pos", "BUS-N"))
    assert volts(boat, "A.pos") == 0.0
    assert potentials_of(boat).conflicts == ()


def test_a_load_behind_a_reversed_string_stands_across_nothing() -> None:
    pieces = (
        BUS, a_battery("A"), a_battery("B"), a_link("s", "A.neg", "B.neg"), a_link("n", "B.pos", "BUS-N"), a_load("L"),
        a_conductor("o", "A.pos", "L.pos"), a_conductor("b", "L.neg", "BUS-N"),
    )  # fmt: skip
    assert found_in(a_boat(*pieces), load_voltage) == [("load-voltage", "L")]


# --- loads


def feeding(load: Piece, feed: str, back: str) -> list[Piece]:
    """Return a load and its two conductors."""
    return [
        load,
        a_conductor(f"{load.id}-out", feed, f"{load.id}.pos"),
        a_conductor(f"{load.id}-back", f"{load.id}.neg", back),
    ]


def test_a_12_v_load_on_24_v_is_found() -> None:
    pieces: list[Piece] = [
        BUS, a_battery("A"), a_battery("B"), a_link("s", "A.neg", "B.pos"), a_link("n", "B.neg", "BUS-N"),
        *feeding(a_load("L"), "A.pos", "BUS-N"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), load_voltage) == [("load-voltage", "L")]


def test_a_12_v_load_on_the_middle_of_a_24_v_bank_has_its_voltage_but_taps_the_bank() -> None:
    pieces: list[Piece] = [
        BUS, a_battery("A"), a_battery("B"), a_link("s", "A.neg", "B.pos"), a_link("n", "B.neg", "BUS-N"),
        *feeding(a_load("L"), "B.pos", "BUS-N"), *feeding(a_load("M", volts=24.0), "A.pos", "BUS-N"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), load_voltage, bank_tap) == [("bank-tap", "L")]


def test_a_load_whose_return_is_missing_is_found() -> None:
    pieces: list[Piece] = [
        BUS,
        a_battery("A"),
        a_conductor("n", "A.neg", "BUS-N"),
        a_load("L"),
        a_conductor("o", "A.pos", "L.pos"),
    ]
    assert found_in(a_boat(*pieces), load_return) == [("load-return", "L")]
    assert volts(studied(*pieces), "L.neg") is None


def charger(*conductors: Piece) -> list[Piece]:
    """Return a battery and a charger, with some conductors."""
    return [BUS, a_battery("A"), a_conductor("n", "A.neg", "BUS-N"), a_source("CHG"), *conductors]


def test_a_charger_with_feed_and_return_is_silent() -> None:
    pieces = charger(a_conductor("c", "CHG.out", "A.pos"), a_conductor("r", "CHG.neg", "BUS-N"))
    assert found_in(a_boat(*pieces), load_return) == []


def test_a_charger_whose_return_is_missing_is_found() -> None:
    pieces = charger(a_conductor("c", "CHG.out", "A.pos"))
    assert found_in(a_boat(*pieces), load_return) == [("load-return", "CHG")]


def test_a_charger_whose_feed_ends_at_a_fuse_that_leads_nowhere_is_found() -> None:
    pieces = charger(a_conductor("r", "CHG.neg", "BUS-N"), a_fuse("F", 80.0), a_conductor("c", "CHG.out", "F.load"))
    assert found_in(a_boat(*pieces), load_return) == [("load-return", "CHG")]


def test_a_charger_whose_return_lands_on_a_bus_that_leads_nowhere_is_found() -> None:
    pieces = charger(a_conductor("c", "CHG.out", "A.pos"), a_bus("STRAY"), a_conductor("r", "CHG.neg", "STRAY"))
    assert found_in(a_boat(*pieces), load_return, split_return) != []


# --- sources that hold a voltage


def solar() -> list[Piece]:
    """Return a battery, a solar controller whose negatives are one, and an array of 36 V on it."""
    return [
        BUS, a_battery("A"), a_conductor("n", "A.neg", "BUS-N"),
        a_converter("MPPT", volts_in=36.0, volts_out=12.0, max_a=30.0), a_source("PV", 9.7, volts=36.0),
        a_conductor("pv+", "PV.out", "MPPT.inpos"), a_conductor("pv-", "PV.neg", "MPPT.inneg"),
        a_conductor("b+", "MPPT.outpos", "A.pos"), a_conductor("b-", "MPPT.outneg", "BUS-N"),
    ]  # fmt: skip


def test_a_solar_array_holds_its_own_net_and_gives_way_to_the_battery_on_the_other() -> None:
    boat = studied(*solar())
    assert volts(boat, "PV.out") == 36.0
    assert volts(boat, "MPPT.outpos") == 12.0
    assert potentials_of(boat).conflicts == ()
    assert found_in(a_boat(*solar()), load_voltage, load_return) == []


def test_a_solar_array_wired_straight_to_the_battery_stands_at_the_batterys_voltage() -> None:
    pieces = [p for p in solar() if p.id not in ("MPPT", "pv+", "pv-", "b+", "b-")]
    boat = studied(*pieces, a_conductor("pv+", "PV.out", "A.pos"), a_conductor("pv-", "PV.neg", "BUS-N"))
    assert volts(boat, "PV.out") == 12.0


def test_an_isolated_converter_floats_and_what_hangs_on_it_is_measured_across_it() -> None:
    pieces: list[Piece] = [
        BUS, a_battery("A"), a_conductor("n", "A.neg", "BUS-N"), a_converter("C", isolated=True),
        a_conductor("i+", "A.pos", "C.inpos"), a_conductor("i-", "C.inneg", "BUS-N"),
        *feeding(a_load("L", volts=24.0), "C.outpos", "C.outneg"),
    ]  # fmt: skip
    boat = studied(*pieces)
    potentials, index = potentials_of(boat), boat.network.index
    assert volts(boat, "L.pos") is None
    assert volts(boat, "L.neg") is None
    assert potentials.between(index["L.pos"], index["L.neg"]) == 24.0
    assert found_in(a_boat(*pieces), load_voltage, load_return) == []


def test_a_converter_with_one_negative_holds_its_output_above_the_reference() -> None:
    pieces: list[Piece] = [
        BUS, a_battery("A"), a_conductor("n", "A.neg", "BUS-N"), a_converter("C"), a_conductor("i+", "A.pos", "C.inpos"),
        a_conductor("i-", "C.inneg", "BUS-N"), *feeding(a_load("L", volts=24.0), "C.outpos", "C.outneg"),
    ]  # fmt: skip
    assert volts(studied(*pieces), "L.pos") == 24.0


def test_a_load_returned_to_the_wrong_side_of_an_isolated_converter_floats() -> None:
    pieces: list[Piece] = [
        BUS, a_battery("A"), a_conductor("n", "A.neg", "BUS-N"), a_converter("C", isolated=True),
        a_conductor("i+", "A.pos", "C.inpos"), a_conductor("i-", "C.inneg", "BUS-N"),
        *feeding(a_load("L", volts=24.0), "C.outpos", "BUS-N"),
    ]  # fmt: skip
    # No current can flow: the converter's output has no way back either.
    assert ("load-return", "L") in found_in(a_boat(*pieces), load_return)


def test_a_battery_behind_a_converter_decides_and_not_the_converter() -> None:
    pieces: list[Piece] = [
        BUS, a_battery("A"), a_battery("B", 24.0, bank="BOW"), a_conductor("n", "A.neg", "BUS-N"),
        a_conductor("bn", "B.neg", "BUS-N"), a_converter("C", volts_out=28.0), a_conductor("i+", "A.pos", "C.inpos"),
        a_conductor("i-", "C.inneg", "BUS-N"), a_conductor("o", "C.outpos", "B.pos"),
    ]  # fmt: skip
    assert volts(studied(*pieces), "C.outpos") == 24.0


def test_posts_mounted_on_each_other_are_one_net() -> None:
    part = a_fuse("F", 10.0).part
    boat = studied(
        BUS, a_battery("A"), a_conductor("n", "A.neg", "BUS-N"), a_device("F", part, mount={"line": "A.pos"})
    )
    assert volts(boat, "F.load") == 12.0


# --- against a direct linear check


@st.composite
def battery_networks(draw: st.DrawFn) -> Network:
    """Draw posts, conductors and batteries joined in any way, also in ways that cannot be."""
    posts = draw(st.integers(2, 8))
    post = st.integers(0, posts - 1)
    wires = draw(st.lists(st.tuples(post, post), max_size=7))
    batteries = draw(st.lists(st.tuples(post, post, st.sampled_from([6.0, 12.0, 24.0])), max_size=6))
    return Network(
        tuple(f"P{i}" for i in range(posts)),
        tuple(Edge(i, EdgeKind.CONDUCTOR, a, b, f"W{i}") for i, (a, b) in enumerate(wires)),
        tuple(BatteryTie(f"B{i}", a, b, v, "BANK") for i, (a, b, v) in enumerate(batteries)),
        (), (), 0,
    )  # fmt: skip


def can_be_solved(network: Network) -> bool:
    """Tell whether some set of post voltages satisfies every conductor and battery: exact elimination."""
    rows: list[list[Fraction]] = []
    size = len(network.posts)

    def equation(upper: int, lower: int, volts_between: float) -> list[Fraction]:
        row = [Fraction(0)] * (size + 1)
        row[upper] += 1
        row[lower] -= 1
        row[size] = Fraction(volts_between)
        return row

    rows += [equation(e.a, e.b, 0.0) for e in network.edges]
    rows += [equation(b.pos, b.neg, b.voltage_v) for b in network.batteries]
    for column in range(size):
        pivot = next((row for row in rows if row[column] != 0 and not any(row[:column])), None)
        if pivot is None:
            continue
        for row in rows:
            if row is not pivot and row[column] != 0:
                factor = row[column] / pivot[column]
                row[:] = [x - factor * y for x, y in zip(row, pivot, strict=True)]
    return not any(row[size] != 0 and not any(row[:size]) for row in rows)


def _satisfies(network: Network, potentials: Potentials) -> None:
    in_conflict = {c.battery for c in potentials.conflicts}
    for edge in network.edges:
        assert potentials.between(edge.a, edge.b) == 0.0
        assert potentials.net[edge.a] == potentials.net[edge.b]
    for battery in network.batteries:
        if battery.device not in in_conflict:
            assert potentials.between(battery.pos, battery.neg) == pytest.approx(battery.voltage_v)


@settings(max_examples=300, deadline=None)
@given(battery_networks())
def test_the_potentials_satisfy_every_conductor_and_every_battery_without_conflict(network: Network) -> None:
    _satisfies(network, study_potentials(network, EVERYTHING))


@settings(max_examples=300, deadline=None)
@given(battery_networks())
def test_there_is_a_conflict_exactly_where_no_voltages_could_satisfy_the_drawing(network: Network) -> None:
    assert bool(study_potentials(network, EVERYTHING).conflicts) is not can_be_solved(network)


@settings(max_examples=200, deadline=None)
@given(battery_networks())
def test_two_posts_have_a_voltage_between_them_exactly_where_conductors_and_batteries_join_them(
    network: Network,
) -> None:
    potentials = study_potentials(network, EVERYTHING)
    joined = {post: {post} for post in range(len(network.posts))}
    for a, b in [(e.a, e.b) for e in network.edges] + [(b.pos, b.neg) for b in network.batteries]:
        both = joined[a] | joined[b]
        for post in both:
            joined[post] = both
    for first in range(len(network.posts)):
        for second in range(len(network.posts)):
            assert (potentials.between(first, second) is not None) is (second in joined[first])


@settings(max_examples=200, deadline=None)
@given(battery_networks(), st.randoms(use_true_random=False))
def test_the_order_of_conductors_and_batteries_changes_no_voltage(network: Network, random: object) -> None:
    assume(not study_potentials(network, EVERYTHING).conflicts)
    wires, batteries = list(network.edges), list(network.batteries)
    random.shuffle(wires)  # type: ignore[attr-defined]
    random.shuffle(batteries)  # type: ignore[attr-defined]
    wires = [Edge(i, e.kind, e.a, e.b, e.part) for i, e in enumerate(wires)]
    other = Network(network.posts, tuple(wires), tuple(batteries), (), (), 0)
    first, second = (study_potentials(n, EVERYTHING) for n in (network, other))
    for post in range(len(network.posts)):
        assert second.above_reference(post) == first.above_reference(post)
