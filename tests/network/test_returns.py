"""Hold what failed loads can send through return conductors against the widest path to each load."""

from __future__ import annotations

import itertools
import math
from typing import Any

import networkx as nx
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.checks.protection import return_protection
from checker.network.returns import ReturnExposure, study_returns
from checker.network.studies import Studies
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
    a_source,
    a_switch,
    found_in,
    outcomes_of,
    studied,
)

INF = math.inf


def house(*more: Piece) -> list[Piece]:
    """Return a battery, a main fuse of 100 A, a bus and a negative bus with its cable home."""
    return [
        a_battery("BAT"), a_bus("BUS-N"), a_fuse("F", 100.0), a_bus("HOT"), a_conductor("home", "BUS-N", "BAT.neg"),
        a_conductor("w", "BAT.pos", "F.line"), a_conductor("v", "F.load", "HOT"), *more,
    ]  # fmt: skip


def branch(name: str, rating_a: float, *, back_to: str = "BUS-N") -> list[Piece]:
    """Return a load behind a fuse, with a return conductor of its own."""
    return [
        a_fuse(f"F{name}", rating_a, mount={"line": "HOT"}), a_load(name),
        a_conductor(f"{name}-out", f"F{name}.load", f"{name}.pos"), a_conductor(f"{name}-back", f"{name}.neg", back_to),
    ]  # fmt: skip


def sent(*pieces: Piece) -> dict[str, tuple[float, str, str]]:
    """Return for each return conductor the current, the load that fails and the device that limits it."""
    (found,) = studied(*pieces).returns
    return {name: (r.current_a, r.load, r.device) for name, r in found.items()}


def test_a_return_carries_what_the_device_of_its_load_lets_through() -> None:
    assert sent(*house(*branch("A", 10.0))) == {"A-back": (10.0, "A", "FA"), "home": (10.0, "A", "FA")}


def test_a_shared_return_carries_the_largest_of_one_failed_load_and_not_the_sum() -> None:
    found = sent(*house(*branch("A", 10.0), *branch("B", 25.0)))
    assert found == {"A-back": (10.0, "A", "FA"), "B-back": (25.0, "B", "FB"), "home": (25.0, "B", "FB")}


def test_the_smallest_device_on_the_way_limits() -> None:
    assert sent(*house(*branch("A", 300.0)))["A-back"] == (100.0, "A", "F")


def test_a_load_without_any_device_sends_without_limit() -> None:
    pieces = house(a_load("A"), a_conductor("A-out", "BAT.pos", "A.pos"), a_conductor("A-back", "A.neg", "BUS-N"))
    assert sent(*pieces)["A-back"] == (INF, "A", "")


def test_of_two_ways_to_a_load_the_wider_one_counts() -> None:
    pieces = house(*branch("A", 10.0), a_fuse("FX", 40.0, mount={"line": "HOT"}), a_conductor("x", "FX.load", "A.pos"))
    assert sent(*pieces)["A-back"] == (40.0, "A", "FX")


def test_a_failed_charger_sends_the_banks_current_through_its_return() -> None:
    pieces = house(
        a_fuse("FC", 80.0, mount={"line": "HOT"}), a_source("CHG", 60.0), a_conductor("c", "FC.load", "CHG.out"),
        a_conductor("cn", "CHG.neg", "BUS-N"),
    )  # fmt: skip
    assert sent(*pieces)["cn"] == (80.0, "CHG", "FC")


def test_nothing_flows_through_a_return_that_leads_to_no_bank() -> None:
    pieces = house(a_bus("STRAY"), *branch("A", 10.0), a_conductor("s", "STRAY", "BUS-N"))
    assert sent(*pieces)["s"] == (0.0, "", "")


def test_each_bank_is_asked_for_its_own_loads() -> None:
    pieces = house(
        *branch("A", 10.0), a_battery("S", bank="START"), a_conductor("sn", "S.neg", "BUS-N"), a_load("M", motor=True),
        a_conductor("sp", "S.pos", "M.pos"), a_conductor("mn", "M.neg", "BUS-N"),
    )  # fmt: skip
    found = sent(*pieces)
    assert found["home"] == (10.0, "A", "FA")
    assert found["mn"] == found["sn"] == (INF, "M", "")


def test_a_single_return_is_in_no_loop() -> None:
    (found,) = studied(*house(*branch("A", 10.0))).returns
    assert not any(r.is_in_loop for r in found.values())


def test_two_returns_side_by_side_are_both_held_to_all_of_it_and_told_to_be_in_a_loop() -> None:
    (found,) = studied(*house(*branch("A", 10.0), a_conductor("home2", "BUS-N", "BAT.neg"))).returns
    assert found["home"] == found["home2"] == ReturnExposure(10.0, "A", "FA", True)


def test_every_side_of_a_ring_of_returns_is_held_to_what_could_come_round_it() -> None:
    # A ring of three: the load's return lands on X. Both ways round lead home, so that no side of the ring
    # carries nothing.
    pieces = [
        *house(*branch("A", 10.0, back_to="X")), a_bus("X"), a_bus("Y"), a_conductor("xn", "X", "BUS-N"),
        a_conductor("xy", "X", "Y"), a_conductor("yn", "Y", "BUS-N"),
    ]  # fmt: skip
    (found,) = studied(*pieces).returns
    ring = {name: found[name] for name in ("xn", "xy", "yn")}
    assert ring == dict.fromkeys(ring, ReturnExposure(10.0, "A", "FA", True))


def test_a_bond_beside_a_return_makes_a_loop_but_is_no_return_itself() -> None:
    pieces = house(*branch("A", 10.0), a_bond("b", "A.neg", "BUS-N"))
    (found,) = studied(*pieces).returns
    assert "b" not in found
    assert found["A-back"].is_in_loop


# --- judged


def test_a_return_too_thin_for_the_device_is_found_only_where_its_feed_is_not() -> None:
    thin_return = house(
        a_fuse("FA", 60.0, mount={"line": "HOT"}), a_load("A"), a_conductor("A-out", "FA.load", "A.pos", size="6 AWG"),
        a_conductor("A-back", "A.neg", "BUS-N", size="16 AWG"),
    )  # fmt: skip
    assert found_in(a_boat(*thin_return), return_protection) == [("return-protection", "A-back")]


def test_a_return_in_a_loop_that_could_not_bear_all_of_it_is_not_assessed() -> None:
    pieces = house(
        a_fuse("FA", 60.0, mount={"line": "HOT"}), a_load("A"), a_conductor("A-out", "FA.load", "A.pos", size="6 AWG"),
        a_conductor("b1", "A.neg", "BUS-N", size="16 AWG"), a_conductor("b2", "A.neg", "BUS-N", size="6 AWG"),
    )  # fmt: skip
    told = {o.part: o.verdict.value for o in outcomes_of(a_boat(*pieces), return_protection)}
    assert told["b1"] == "not assessed"
    assert told["b2"] == "passed"


# --- against the widest path, on trees of returns


@st.composite
def trees_of_returns(draw: st.DrawFn) -> Studies:
    """Draw loads behind fuses, in a random tree of feeds and a random tree of returns, with switches."""
    hots = ["HOT"] + [f"H{n}" for n in range(draw(st.integers(0, 3)))]
    backs = ["BUS-N"] + [f"N{n}" for n in range(draw(st.integers(0, 3)))]
    pieces: list[Piece] = house()
    for n, hot in enumerate(hots[1:]):
        start = draw(st.sampled_from(hots[: n + 1]))
        rating_a = float(draw(st.integers(1, 12)) * 10)
        pieces += [
            a_bus(hot),
            a_fuse(f"X{hot}", rating_a, mount={"line": start}),
            a_conductor(f"x{hot}", f"X{hot}.load", hot),
        ]
    for n, back in enumerate(backs[1:]):
        pieces += [a_bus(back), a_conductor(f"y{back}", back, draw(st.sampled_from(backs[: n + 1])))]
    for n in range(draw(st.integers(1, 4))):
        name, rating_a = f"L{n}", float(draw(st.integers(1, 12)) * 10)
        feed = draw(st.sampled_from(hots))
        pieces += [
            a_fuse(f"F{name}", rating_a, mount={"line": feed}), a_switch(f"S{name}"), a_load(name),
            a_conductor(f"o{name}", f"F{name}.load", f"S{name}.in"), a_conductor(f"p{name}", f"S{name}.out", f"{name}.pos"),
            a_conductor(f"r{name}", f"{name}.neg", draw(st.sampled_from(backs))),
        ]  # fmt: skip
    return studied(*pieces)


@settings(max_examples=80, deadline=None)
@given(trees_of_returns())
def test_on_a_tree_a_return_carries_the_widest_path_of_the_loads_beyond_it(studies: Studies) -> None:
    network, potentials = studies.network, studies.potentials[0]
    feed: nx.Graph[Any] = nx.Graph()
    back: nx.Graph[Any] = nx.Graph()
    for edge in network.edges:
        graph = back if potentials.is_return(edge.a) else feed
        graph.add_edge(edge.a, edge.b, width=edge.rating_a, part=edge.part)
    top, bottom = network.index["BAT.pos"], network.index["BAT.neg"]
    widths: dict[str, float] = {}
    for load in network.loads:
        way = nx.shortest_path(feed, top, load.feed)
        width = min(feed.edges[pair]["width"] for pair in itertools.pairwise(way))
        home = nx.shortest_path(back, load.back, bottom)
        for pair in itertools.pairwise(home):
            part = back.edges[pair]["part"]
            widths[part] = max(widths.get(part, 0.0), width)
    found = study_returns(network, potentials)
    assert {name: r.current_a for name, r in found.items() if r.current_a} == widths
    assert not any(r.is_in_loop for r in found.values())


def test_the_links_of_a_bank_belong_to_its_return() -> None:
    pieces = [
        a_battery("A", 6.0), a_battery("B", 6.0), a_link("s", "A.neg", "B.pos"), a_link("n", "B.neg", "BUS-N"), a_bus("BUS-N"),
        a_bus("HOT"), a_conductor("w", "A.pos", "HOT"), *branch("L", 20.0),
    ]  # fmt: skip
    # The series link lies between the batteries at 6 V: it is no return.
    assert sent(*pieces) == {"L-back": (20.0, "L", "FL"), "n": (20.0, "L", "FL")}
