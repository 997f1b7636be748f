"""Hold the way of a circuit to its bank, and the drop reckoned along it, by hand."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.boat.hull import Boat
from checker.checks.check import Case, House
from checker.checks.drops import Drop, circuit_drop, circuits_through, drop_limit, nominal_v
from checker.limits.limit_set import load_limit_set
from checker.network.studies import Studies
from checker.network.supply import SupplyWay
from checker.reading.quantity import read_size
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
    a_switch,
    studied,
)

K = 10.75  # ohm circular mil per foot, the constant of the voluntary set
CMIL = {"4/0": 211600.0, "2/0": 133076.5, "2": 66360.7, "6": 26251.4, "10": 10384.0, "12": 6529.9, "14": 4106.8}


def volts(amps: float, metres: float, gauge: str) -> float:
    """Return K·I·L/CM in V, with the areas of the published gauge table (0.01 % rounding; 6 AWG, printed as 26,240, by its definition)."""
    return K * amps * metres / 0.3048 / CMIL[gauge]


def case_of(boat: Boat, house: House | None = None) -> Case:
    """Return a boat under the voluntary set."""
    limits = load_limit_set("voluntary-dc")
    return Case(Studies(boat), limits, (limits,), house or House())


def drop(boat: Boat, name: str, *, from_bank: bool = False) -> Drop:
    """Return the drop of a circuit."""
    case = case_of(boat)
    found = circuit_drop(case, case.boat.circuits[name], from_bank=from_bank)
    assert found is not None
    return found


def house(*more: Piece, feeder_a: float | None = 60.0) -> list[Piece]:
    """Return a bank of two batteries, its collector, a feeder circuit over a fuse and a switch, and a panel."""
    return [
        a_battery("A"), a_battery("B"), a_bus("STUD"), a_bus("NSTUD"), a_bus("BUS-N"), a_bus("PNL"), a_fuse("F", 150.0),
        a_switch("SW"), a_link("ap", "A.pos", "STUD"), a_link("bp", "B.pos", "STUD"), a_link("an", "A.neg", "NSTUD"),
        a_link("bn", "B.neg", "NSTUD"), a_conductor("W1", "STUD", "F.line", size="2 AWG", length="0.1 m"),
        a_conductor("W2", "F.load", "SW.in", size="2 AWG", length="2 m"),
        a_conductor("W3", "SW.out", "PNL", size="2 AWG", length="1 m"),
        a_conductor("W4", "BUS-N", "NSTUD", size="2 AWG", length="2.5 m"),
        a_circuit("FEEDER", "W1", "W2", "W3", "W4", current_a=feeder_a, service="feeder"), *more,
    ]  # fmt: skip


def branch(*, amps: float = 10.0) -> list[Piece]:
    """Return a branch of 10 AWG, 4 m out and 5 m back, behind a fuse on the panel."""
    return [
        a_fuse("FB", 15.0, mount={"line": "PNL"}), a_load("L", amps),
        a_conductor("out", "FB.load", "L.pos", size="10 AWG", length="4 m"),
        a_conductor("back", "L.neg", "BUS-N", size="10 AWG", length="5 m"),
        a_circuit("LIGHT", "out", "back", current_a=amps, service="lighting", load="L", device="FB"),
    ]  # fmt: skip


# --- the way


def way(studies: Studies, name: str) -> SupplyWay:
    """Return the way of a circuit to its bank."""
    return studies.supply[name]


def test_the_way_of_a_branch_leads_over_the_feeder_to_where_the_bank_is_taken_off() -> None:
    found = way(studied(*house(*branch())), "LIGHT")
    assert (found.bank, found.out, found.back) == ("HOUSE", ("W3", "W2", "W1"), ("W4",))


def test_a_circuit_on_the_bank_itself_has_no_shared_way() -> None:
    found = way(studied(*house(*branch())), "FEEDER")
    assert (found.bank, found.out, found.back) == ("HOUSE", (), ())


def test_the_links_of_the_bank_belong_to_it() -> None:
    assert not {"ap", "bp", "an", "bn"} & {*way(studied(*house(*branch())), "LIGHT").out}


def test_the_way_leads_to_the_nearest_bank_on_a_shared_net_and_home_to_the_same_one() -> None:
    pieces = house(
        *branch(), a_battery("S", bank="START"), a_conductor("s", "S.pos", "PNL", length="0.5 m", size="2 AWG"),
        a_conductor("sn", "S.neg", "BUS-N", length="9 m", size="2 AWG"),
    )  # fmt: skip
    found = way(studied(*pieces), "LIGHT")
    assert (found.bank, found.out, found.back) == ("START", ("s",), ("sn",))


def test_the_shortest_of_two_ways_is_taken() -> None:
    pieces = house(*branch(), a_conductor("short", "SW.in", "PNL", size="2 AWG", length="0.3 m"))
    assert way(studied(*pieces), "LIGHT").out == ("short", "W2", "W1")


def test_a_circuit_that_no_bank_feeds_has_no_way() -> None:
    pieces = house(
        a_bus("ISLAND"), a_load("L"), a_conductor("out", "ISLAND", "L.pos"), a_conductor("back", "L.neg", "BUS-N"),
        a_circuit("LOST", "out", "back", load="L"),
    )  # fmt: skip
    found = way(studied(*pieces), "LOST")
    assert (found.bank, found.out, found.back) == ("", (), ())


def test_the_circuits_over_a_conductor_are_those_that_own_it_and_those_that_share_it() -> None:
    case = case_of(a_boat(*house(*branch())))
    assert circuits_through(case, "W4") == {"FEEDER", "LIGHT"}
    assert circuits_through(case, "out") == {"LIGHT"}


# --- a plain circuit


def test_a_circuit_alone_drops_along_its_real_lengths_out_and_back() -> None:
    found = drop(a_boat(*house(*branch())), "LIGHT")
    assert dict(found.terms) == {
        "out": pytest.approx(volts(10, 4, "10"), rel=2e-4), "back": pytest.approx(volts(10, 5, "10"), rel=2e-4)
    }  # fmt: skip
    assert found.volts == pytest.approx(volts(10, 9, "10"), rel=2e-4)
    assert found.fraction == pytest.approx(found.volts / 12)


def test_from_the_bank_the_feeder_is_taken_at_the_current_it_is_meant_to_carry() -> None:
    found = drop(a_boat(*house(*branch())), "LIGHT", from_bank=True)
    assert found.volts == pytest.approx(volts(10, 9, "10") + volts(60, 0.1 + 2 + 1 + 2.5, "2"), rel=2e-4)


def test_a_circuit_heavier_than_its_feeder_is_written_for_counts_with_its_own_current() -> None:
    found = drop(a_boat(*house(*branch(amps=80.0))), "LIGHT", from_bank=True)
    assert found.volts == pytest.approx(volts(80, 9, "10") + volts(80, 5.6, "2"), rel=2e-4)


def test_cranking_conductors_on_the_way_count_with_the_circuits_own_current() -> None:
    pieces: list[Piece] = [
        a_battery("S"), a_bus("BUS-N"), a_load("M", 250.0, motor=True), a_switch("SW"), a_fuse("F", 20.0), a_load("L", 8.0),
        a_conductor("c1", "S.pos", "SW.in", size="2/0 AWG", length="2 m", role="cranking"),
        a_conductor("c2", "SW.out", "M.pos", size="2/0 AWG", length="3 m", role="cranking"),
        a_conductor("c3", "M.neg", "S.neg", size="2/0 AWG", length="3 m", role="cranking"),
        a_conductor("n", "S.neg", "BUS-N", size="2/0 AWG", length="1 m"),
        a_circuit("CRANK", "c1", "c2", "c3", current_a=250.0, service="cranking", load="M"),
        a_conductor("t", "M.pos", "F.line", size="10 AWG", length="0.1 m"),
        a_conductor("out", "F.load", "L.pos", size="10 AWG", length="4 m"),
        a_conductor("back", "L.neg", "M.neg", size="10 AWG", length="4 m"),
        a_circuit("HARNESS", "t", "out", "back", current_a=8.0, load="L"),
    ]  # fmt: skip
    found = drop(a_boat(*pieces), "HARNESS", from_bank=True)
    assert found.volts == pytest.approx(volts(8, 8.1, "10") + volts(8, 2 + 3 + 3, "2/0"), rel=2e-4)


def test_the_nominal_voltage_is_that_written_else_that_of_the_load_else_that_of_the_boat() -> None:
    pieces = house(
        *branch(), a_load("BIG", volts=24.0), a_conductor("bo", "PNL", "BIG.pos"), a_conductor("bb", "BIG.neg", "BUS-N"),
        a_circuit("B24", "bo", "bb", load="BIG"), a_circuit("B36", "bo", "bb", load="BIG", voltage_v=36.0),
    )  # fmt: skip
    case = case_of(a_boat(*pieces, volts=12.0))
    found = {name: nominal_v(case, case.boat.circuits[name]) for name in ("FEEDER", "LIGHT", "B24", "B36")}
    assert found == {"FEEDER": 12.0, "LIGHT": 12.0, "B24": 24.0, "B36": 36.0}


def test_a_circuit_without_a_current_has_no_drop() -> None:
    case = case_of(a_boat(*house(feeder_a=None)))
    assert circuit_drop(case, case.boat.circuits["FEEDER"], from_bank=False) is None


def test_a_yards_rule_may_make_a_service_critical() -> None:
    boat = a_boat(*house(*branch()))
    plain, strict = case_of(boat), case_of(boat, House(drop_critical=("lighting",)))
    limits = [drop_limit(case, boat.circuits["LIGHT"]) for case in (plain, strict)]
    assert [(limit.fraction, limit.is_yard_rule) for limit in limits if limit is not None] == [
        (0.10, False),
        (0.03, True),
    ]


# --- parallel conductors


def with_outs(*outs: Piece) -> list[Piece]:
    """Return the house with a branch of other out conductors."""
    names = [piece.id for piece in outs]
    pieces = [p for p in branch() if p.id not in ("out", "LIGHT")]
    return house(*pieces, *outs, a_circuit("LIGHT", *names, "back", current_a=10.0, service="lighting", load="L"))


def test_two_equal_conductors_side_by_side_drop_half() -> None:
    outs = [a_conductor(n, "FB.load", "L.pos", size="10 AWG", length="4 m") for n in ("o1", "o2")]
    found = drop(a_boat(*with_outs(*outs)), "LIGHT")
    assert dict(found.terms)["o1+o2"] == pytest.approx(volts(10, 4, "10") / 2, rel=2e-4)
    assert found.volts == pytest.approx(volts(10, 2 + 5, "10"), rel=2e-4)


def test_unequal_conductors_side_by_side_share_by_their_conductance() -> None:
    # 10 AWG of 4 m beside 14 AWG of 3 m: resistances as 4/10384 and 3/4106.8.
    outs = [
        a_conductor("o1", "FB.load", "L.pos", size="10 AWG", length="4 m"),
        a_conductor("o2", "FB.load", "L.pos", size="14 AWG", length="3 m"),
    ]
    both = 1 / (1 / volts(10, 4, "10") + 1 / volts(10, 3, "14"))
    assert dict(drop(a_boat(*with_outs(*outs)), "LIGHT").terms)["o1+o2"] == pytest.approx(both, rel=2e-4)


def test_a_conductor_put_beside_another_never_raises_the_drop() -> None:
    one = a_conductor("o1", "FB.load", "L.pos", size="10 AWG", length="4 m")
    for size in ("16 AWG", "10 AWG", "2 AWG"):
        two = a_conductor("o2", "FB.load", "L.pos", size=size, length="9 m")
        assert drop(a_boat(*with_outs(one, two)), "LIGHT").volts < drop(a_boat(*with_outs(one)), "LIGHT").volts


def test_conductors_side_by_side_through_zero_length_mounts_still_share() -> None:
    # Both land on the fuse's load post at one end; at the other one lands on a stud that the load sits on.
    pieces = [p for p in branch() if p.id not in ("out", "LIGHT", "L")]
    load = a_load("L", 10.0, mount={"pos": "LSTUD"})
    outs = [
        a_conductor("o1", "FB.load", "L.pos", size="10 AWG", length="4 m"),
        a_conductor("o2", "FB.load", "LSTUD", size="10 AWG", length="4 m"),
    ]
    circuit = a_circuit("LIGHT", "o1", "o2", "back", current_a=10.0, service="lighting", load="L")
    found = drop(a_boat(*house(*pieces, load, a_bus("LSTUD"), *outs, circuit)), "LIGHT")
    assert dict(found.terms)["o1+o2"] == pytest.approx(volts(10, 2, "10"), rel=2e-4)


# --- forks


def test_a_circuit_that_forks_drops_as_much_as_its_longest_way() -> None:
    outs = [
        a_conductor("trunk", "FB.load", "FORK", size="10 AWG", length="2 m"),
        a_conductor("near", "FORK", "L.pos", size="10 AWG", length="1 m"),
        a_conductor("far", "FORK", "L2.pos", size="10 AWG", length="6 m"),
    ]
    names = ["trunk", "near", "far", "back", "back2"]
    pieces = [p for p in branch() if p.id not in ("out", "LIGHT")]
    circuit = a_circuit("LIGHT", *names, current_a=10.0, service="lighting", load="L")
    back = a_conductor("back2", "L2.neg", "BUS-N", size="10 AWG", length="3 m")
    found = drop(a_boat(*house(*pieces, a_bus("FORK"), a_load("L2"), *outs, back, circuit)), "LIGHT")
    # The longest way out, 2 + 6 m, and the longest way back, 5 m, though they belong to two loads.
    assert found.volts == pytest.approx(volts(10, 8 + 5, "10"), rel=2e-4)
    assert sorted(name for name, _ in found.terms) == ["back", "far", "trunk"]


def test_the_thicker_of_two_ways_round_is_the_cheaper_one() -> None:
    outs = [
        a_conductor("thin", "FB.load", "L.pos", size="14 AWG", length="3 m"),
        a_conductor("thick1", "FB.load", "MID", size="2 AWG", length="3 m"),
        a_conductor("thick2", "MID", "L.pos", size="2 AWG", length="3 m"),
    ]
    names = ["thin", "thick1", "thick2", "back"]
    pieces = [p for p in branch() if p.id not in ("out", "LIGHT")]
    circuit = a_circuit("LIGHT", *names, current_a=10.0, service="lighting", load="L")
    found = drop(a_boat(*house(*pieces, a_bus("MID"), *outs, circuit)), "LIGHT")
    # A ring is reckoned along its better side: never less than both sides together would drop.
    better, worse = volts(10, 6, "2"), volts(10, 3, "14")
    assert found.volts - volts(10, 5, "10") == pytest.approx(better, rel=2e-3)
    assert better > 1 / (1 / better + 1 / worse)


def test_the_parts_of_a_circuit_before_and_behind_an_open_contact_both_count() -> None:
    table = {"open": [], "closed": [("in", "out")]}
    pieces = house(
        a_fuse("FB", 15.0, mount={"line": "PNL"}), a_switch("K", table), a_load("L", 10.0),
        a_conductor("o1", "FB.load", "K.in", size="10 AWG", length="2 m"),
        a_conductor("o2", "K.out", "L.pos", size="10 AWG", length="3 m"),
        a_conductor("back", "L.neg", "BUS-N", size="10 AWG", length="5 m"),
        a_circuit("LIGHT", "o1", "o2", "back", current_a=10.0, service="lighting", load="L"),
    )  # fmt: skip
    assert drop(a_boat(*pieces), "LIGHT").volts == pytest.approx(volts(10, 10, "10"), rel=2e-4)


@settings(max_examples=40, deadline=None)
@given(
    st.lists(
        st.tuples(st.sampled_from(["2 AWG", "6 AWG", "10 AWG", "14 AWG"]), st.integers(1, 90)), min_size=1, max_size=6
    )
)
def test_a_chain_of_any_pieces_drops_their_sum(chain: list[tuple[str, int]]) -> None:
    posts = ["FB.load", *(f"S{n}" for n in range(len(chain) - 1)), "L.pos"]
    outs: list[Piece] = [
        a_conductor(f"o{n}", posts[n], posts[n + 1], size=size, length=f"{tenths / 10} m")
        for n, (size, tenths) in enumerate(chain)
    ]
    studs = [a_bus(post) for post in posts[1:-1]]
    found = drop(a_boat(*with_outs(*outs), *studs), "LIGHT")
    expected = sum(volts(10, tenths / 10, size.split()[0]) for size, tenths in chain)
    assert found.volts == pytest.approx(expected + volts(10, 5, "10"), rel=3e-4)


def test_other_sizes_can_be_reckoned_with_before_they_are_pulled() -> None:
    case = case_of(a_boat(*house(*branch())))
    larger = circuit_drop(case, case.boat.circuits["LIGHT"], from_bank=False, sizes={"out": read_size("6 AWG")})
    assert larger is not None
    assert larger.volts == pytest.approx(volts(10, 4, "6") + volts(10, 5, "10"), rel=2e-4)
