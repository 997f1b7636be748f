"""Hold the most that can flow through a bus against every division of its ways."""

from __future__ import annotations

import itertools
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.checks.devices import bus_rating
from checker.network.buses import MOST_BOTH_WAYS, _through
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_conductor,
    a_fuse,
    a_load,
    a_source,
    a_switch,
    found_in,
    studied,
)

INF = math.inf
AMPS = st.one_of(st.just(0.0), st.just(INF), st.integers(1, 400).map(float))


def every_division(ways: list[tuple[float, float]]) -> float:
    """Return the best of all divisions into ways in and ways out, by trying each."""
    best = 0.0
    for choice in itertools.product((True, False), repeat=len(ways)):
        inward = sum(c for (c, _), is_in in zip(ways, choice, strict=True) if is_in)
        outward = sum(g for (_, g), is_in in zip(ways, choice, strict=True) if not is_in)
        best = max(best, min(inward, outward))
    return best


@settings(max_examples=300, deadline=None)
@given(st.lists(st.tuples(AMPS, AMPS), max_size=9))
def test_the_most_through_a_bus_is_the_best_of_all_divisions(ways: list[tuple[float, float]]) -> None:
    assert _through(ways) == every_division(ways)


@settings(max_examples=20, deadline=None)
@given(st.lists(st.tuples(st.integers(1, 400).map(float), st.integers(1, 400).map(float)), min_size=13, max_size=14))
def test_with_very_many_ways_the_answer_is_no_less_than_the_best_division(ways: list[tuple[float, float]]) -> None:
    assert len(ways) > MOST_BOTH_WAYS
    assert _through(ways) >= every_division(ways)


@settings(max_examples=100, deadline=None)
@given(st.lists(st.tuples(AMPS, AMPS), max_size=9), st.randoms(use_true_random=False))
def test_the_order_of_the_ways_changes_nothing(ways: list[tuple[float, float]], random: object) -> None:
    shuffled = list(ways)
    random.shuffle(shuffled)  # type: ignore[attr-defined]
    assert _through(shuffled) == _through(ways)


# --- on boats


def house(*more: Piece) -> list[Piece]:
    """Return a battery behind a fuse of 200 A, a bus, and loads behind fuses of 30 and 40 A on it."""
    return [
        a_battery("BAT"), a_bus("BUS-N"), a_conductor("n", "BAT.neg", "BUS-N"), a_fuse("F", 200.0), a_bus("HOT", 100.0),
        a_conductor("w", "BAT.pos", "F.line"), a_conductor("v", "F.load", "HOT"),
        *branch("A", "HOT", 30.0), *branch("B", "HOT", 40.0), *more,
    ]  # fmt: skip


def branch(name: str, bus: str, rating_a: float) -> list[Piece]:
    """Return a load behind a fuse on a bus."""
    return [
        a_fuse(f"F{name}", rating_a, mount={"line": bus}), a_load(name), a_conductor(f"o{name}", f"F{name}.load", f"{name}.pos"),
        a_conductor(f"b{name}", f"{name}.neg", "BUS-N"),
    ]  # fmt: skip


def through(bus: str, *pieces: Piece) -> list[float]:
    """Return the flow through a bus in each state."""
    return [flow.through_a for flows in studied(*pieces).buses for flow in flows if flow.bus == bus]


def test_what_comes_in_is_limited_by_what_can_leave() -> None:
    assert through("HOT", *house()) == [70.0]


def test_what_leaves_is_limited_by_what_can_come_in() -> None:
    assert through("HOT", *house(*branch("C", "HOT", 300.0))) == [200.0]


def test_what_comes_in_is_told_by_name() -> None:
    (flows,) = studied(*house()).buses
    assert [(flow.bus, flow.comes_in) for flow in flows] == [("HOT", (("F", 200.0),))]


def test_a_device_further_down_limits_what_leaves() -> None:
    panel: list[Piece] = [
        a_bus("PANEL"), a_fuse("FP", 150.0, mount={"line": "HOT"}), a_fuse("MAIN", 60.0, mount={"load": "PANEL"}),
        a_conductor("p", "FP.load", "MAIN.line"), *branch("Q", "PANEL", 500.0),
    ]  # fmt: skip
    assert through("HOT", *house(*panel)) == [130.0]
    assert through("PANEL", *house(*panel)) == [60.0]


def test_a_charge_source_comes_in_and_a_battery_takes_it() -> None:
    charge: list[Piece] = [
        a_bus("CH"), a_fuse("FC", 100.0), a_source("S1", 60.0), a_source("S2", 25.0), a_conductor("c1", "BAT.pos", "FC.line"),
        a_conductor("c2", "FC.load", "CH"), a_conductor("s1", "S1.out", "CH"), a_conductor("s2", "S2.out", "CH"),
        a_conductor("n1", "S1.neg", "BUS-N"), a_conductor("n2", "S2.neg", "BUS-N"),
    ]  # fmt: skip
    # 60 + 25 A go in to the battery; what comes from the battery has nowhere to go.
    assert through("CH", *house(*charge)) == [85.0]


def test_a_bus_between_two_banks_is_counted_both_ways() -> None:
    link: list[Piece] = [
        a_battery("S", bank="START"), a_conductor("sn", "S.neg", "BUS-N"), a_fuse("FS", 150.0),
        a_conductor("s", "S.pos", "FS.line"), a_conductor("t", "FS.load", "HOT"),
    ]  # fmt: skip
    # In: F 200 + FS 150. Out: the loads 70, and the other bank. Best: F in, FS and both loads out: 200.
    assert through("HOT", *house(*link)) == [200.0]


def test_a_collector_on_the_bank_has_no_limit_by_devices() -> None:
    assert through("STUD", *house(a_bus("STUD"), a_conductor("x", "BAT.pos", "STUD"), *branch("C", "STUD", 90.0))) == [
        90.0
    ]
    collector: list[Piece] = [a_battery("B2"), a_conductor("n2", "B2.neg", "BUS-N"), a_bus("STUD")]
    joined = [a_conductor("x", "BAT.pos", "STUD"), a_conductor("y", "B2.pos", "STUD")]
    assert through("STUD", *house(*collector, *joined)) == [INF]


def test_the_return_bus_is_not_asked() -> None:
    assert through("BUS-N", *house()) == []


def test_the_states_of_a_switch_are_asked_one_by_one() -> None:
    table = {"1": [("a", "out")], "2": [("b", "out")]}
    pieces = [
        a_battery("BAT"), a_bus("BUS-N"), a_conductor("n", "BAT.neg", "BUS-N"), a_fuse("F1", 50.0), a_fuse("F2", 80.0),
        a_switch("SEL", table), a_bus("HOT"), a_conductor("w1", "BAT.pos", "F1.line"), a_conductor("w2", "BAT.pos", "F2.line"),
        a_conductor("v1", "F1.load", "SEL.a"), a_conductor("v2", "F2.load", "SEL.b"), a_conductor("u", "SEL.out", "HOT"),
        *branch("A", "HOT", 300.0),
    ]  # fmt: skip
    assert through("HOT", *pieces) == [50.0, 80.0]


@pytest.mark.parametrize(("rating_a", "found"), [(71.0, []), (70.0, []), (69.0, [("bus-rating", "HOT")])])
def test_a_bus_is_held_to_its_rating(rating_a: float, found: list[tuple[str, str]]) -> None:
    assert found_in(a_boat(*house(), a_bus("HOT", rating_a)), bus_rating) == found
