"""Hold the sweep over trees and blocks against a maximum flow computed in another way.

The other way: every conductor end is asked by itself, on a directed graph with one node more
that stands for all sources, the conductor asked taken out, by networkx. Unlimited is told by
a path of unlimited edges from an unlimited source, never by a large number.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import networkx as nx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.network.exposure import ExposureStudy, find_bridges, flow_study, max_flow
from checker.network.graph import EdgeKind, Network
from checker.network.studies import Studies
from checker.network.walk import neighbours
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_circuit,
    a_conductor,
    a_fuse,
    a_load,
    a_network,
    a_source,
    a_switch,
    studied,
)

INF = math.inf
# Whole amperes: sums of floats in another order would differ in the last digit.
RATINGS = st.one_of(st.just(INF), st.integers(1, 12).map(float), st.sampled_from([40.0, 100.0, 150.0, 400.0]))
SUPPLIES = st.one_of(st.just(0.0), st.just(0.0), st.just(INF), st.integers(1, 30).map(float))


def reference_flow(network: Network, edges: Sequence[int], supply: Sequence[float], sink: int, without: int) -> float:
    """Return what can reach a post with one edge taken out: networkx's maximum flow from one common source."""
    graph: nx.MultiDiGraph[Any] = nx.MultiDiGraph()
    graph.add_nodes_from(range(len(network.posts)))
    for index in edges:
        edge = network.edges[index]
        if index != without:
            for a, b in ((edge.a, edge.b), (edge.b, edge.a)):
                graph.add_edge(a, b, capacity=edge.rating_a)
    for post, amount in enumerate(supply):
        if amount > 0:
            graph.add_edge("all sources", post, capacity=amount)
    if "all sources" not in graph:
        return 0.0
    flat: nx.DiGraph[Any] = nx.DiGraph()
    flat.add_nodes_from(graph)
    for a, b, data in graph.edges(data=True):
        if a == b:
            continue
        before = flat.edges[a, b]["capacity"] if flat.has_edge(a, b) else 0.0
        flat.add_edge(a, b, capacity=before + data["capacity"])
    unlimited = nx.DiGraph((a, b) for a, b, data in flat.edges(data=True) if math.isinf(data["capacity"]))
    if "all sources" in unlimited and sink in unlimited and nx.has_path(unlimited, "all sources", sink):
        return INF
    # networkx takes an edge without capacity for unlimited.
    for _, _, data in flat.edges(data=True):
        if math.isinf(data["capacity"]):
            del data["capacity"]
    return float(nx.maximum_flow_value(flat, "all sources", sink))


@st.composite
def trees(draw: st.DrawFn) -> tuple[Network, list[float]]:
    """Draw a forest of posts joined by conductors and devices, with sources anywhere."""
    posts = draw(st.integers(2, 14))
    edges = []
    for post in range(1, posts):
        if draw(st.integers(0, 9)) > 0:  # now and then a part that hangs by nothing
            ends = (draw(st.integers(0, post - 1)), post)
            edges.append((*(ends if draw(st.booleans()) else ends[::-1]), draw(RATINGS)))
    return a_network(posts, edges), [draw(SUPPLIES) for _ in range(posts)]


@st.composite
def tangles(draw: st.DrawFn) -> tuple[Network, list[float]]:
    """Draw a multigraph: loops, parallel edges, edges from a post to itself, devices inside loops."""
    posts = draw(st.integers(1, 9))
    post = st.integers(0, posts - 1)
    edges = draw(st.lists(st.tuples(post, post, RATINGS), max_size=16))
    return a_network(posts, edges), [draw(SUPPLIES) for _ in range(posts)]


@st.composite
def clusters(draw: st.DrawFn) -> tuple[Network, list[float]]:
    """Draw small loops hung on each other by single edges: what boats look like."""
    edges: list[tuple[int, int, float]] = []
    posts = 0
    for _ in range(draw(st.integers(1, 4))):
        size = draw(st.integers(1, 4))
        if posts:
            edges.append((draw(st.integers(0, posts - 1)), posts, draw(RATINGS)))
        ring = [posts + i for i in range(size)]
        if size > 1:
            edges += [(ring[i], ring[(i + 1) % size], draw(RATINGS)) for i in range(size)]
        posts += size
    order = draw(st.permutations(range(posts)))
    return (
        a_network(posts, [(order[a], order[b], rating) for a, b, rating in draw(st.permutations(edges))]),
        [draw(SUPPLIES) for _ in range(posts)],
    )


def _agrees(network: Network, supply: list[float], edges: list[int]) -> None:
    study = flow_study(network, edges, supply)
    assert sorted(study.exposures) == sorted(edges)
    for index in edges:
        edge, found = network.edges[index], study.exposures[index]
        assert (found.at_a, found.at_b) == (
            reference_flow(network, edges, supply, edge.a, index),
            reference_flow(network, edges, supply, edge.b, index),
        ), edge


@settings(max_examples=150, deadline=None)
@given(trees())
def test_on_a_tree_every_conductor_end_agrees_with_networkx(case: tuple[Network, list[float]]) -> None:
    network, supply = case
    _agrees(network, supply, list(range(len(network.edges))))


@settings(max_examples=250, deadline=None)
@given(tangles())
def test_in_a_tangle_of_loops_every_conductor_end_agrees_with_networkx(case: tuple[Network, list[float]]) -> None:
    network, supply = case
    _agrees(network, supply, list(range(len(network.edges))))


@settings(max_examples=150, deadline=None)
@given(clusters())
def test_in_loops_hung_on_each_other_every_conductor_end_agrees_with_networkx(
    case: tuple[Network, list[float]],
) -> None:
    network, supply = case
    _agrees(network, supply, list(range(len(network.edges))))


@settings(max_examples=80, deadline=None)
@given(tangles(), st.data())
def test_only_the_live_edges_carry_anything(case: tuple[Network, list[float]], data: st.DataObject) -> None:
    network, supply = case
    live = [i for i in range(len(network.edges)) if data.draw(st.booleans())]
    _agrees(network, supply, live)


@settings(max_examples=200, deadline=None)
@given(tangles())
def test_the_bridges_are_those_that_networkx_finds(case: tuple[Network, list[float]]) -> None:
    network, _ = case
    simple: nx.Graph[Any] = nx.Graph()
    pairs: dict[frozenset[int], list[int]] = {}
    for edge in network.edges:
        if edge.a != edge.b:
            pairs.setdefault(frozenset((edge.a, edge.b)), []).append(edge.index)
            simple.add_edge(edge.a, edge.b)
    # networkx knows no parallel edges here: an edge with another beside it is no bridge.
    expected = {pairs[frozenset(pair)][0] for pair in nx.bridges(simple) if len(pairs[frozenset(pair)]) == 1}
    assert find_bridges(network, neighbours(network, range(len(network.edges)))) == expected


def _with_names(network: Network, supply: list[float]) -> ExposureStudy:
    names = {post: [(f"source at {post}", amount)] for post, amount in enumerate(supply) if amount > 0}
    return flow_study(network, list(range(len(network.edges))), supply, names)


@settings(max_examples=150, deadline=None)
@given(trees())
def test_on_a_tree_the_terms_add_up_to_the_flow(case: tuple[Network, list[float]]) -> None:
    network, supply = case
    study = _with_names(network, supply)
    for edge in network.edges:
        exposure = study.exposures[edge.index]
        for node, arriving in ((edge.a, exposure.at_a), (edge.b, exposure.at_b)):
            assert sum(amount for _, amount in study.terms(edge, node)) == arriving


@settings(max_examples=100, deadline=None)
@given(tangles())
def test_in_a_tangle_the_terms_never_add_up_to_less_than_the_flow(case: tuple[Network, list[float]]) -> None:
    network, supply = case
    study = _with_names(network, supply)
    for edge in network.edges:
        exposure = study.exposures[edge.index]
        for node, arriving in ((edge.a, exposure.at_a), (edge.b, exposure.at_b)):
            assert sum(amount for _, amount in study.terms(edge, node)) >= arriving


@settings(max_examples=80, deadline=None)
@given(tangles(), st.data())
def test_a_larger_device_never_lowers_what_reaches_a_conductor(
    case: tuple[Network, list[float]], data: st.DataObject
) -> None:
    network, supply = case
    if not network.edges:
        return
    grown = data.draw(st.integers(0, len(network.edges) - 1))
    rows = [(e.a, e.b, e.rating_a * 2 if e.index == grown else e.rating_a) for e in network.edges]
    larger = a_network(len(network.posts), rows)
    every = list(range(len(rows)))
    before, after = flow_study(network, every, supply), flow_study(larger, every, supply)
    for index in every:
        assert after.exposures[index].at_a >= before.exposures[index].at_a
        assert after.exposures[index].at_b >= before.exposures[index].at_b


# --- the same on boats, each by a hand calculation


def _reaches(studies: Studies, name: str) -> tuple[float, float]:
    edge = studies.network.edges_of[name][0]
    exposure = studies.exposures[0].exposures[edge.index]
    return exposure.at_a, exposure.at_b


def _ground(*batteries: str) -> list[Piece]:
    return [a_bus("BUS-N"), *(a_conductor(f"N-{b}", f"{b}.neg", "BUS-N") for b in batteries)]


def test_a_cable_behind_a_fuse_is_reached_by_its_rating_and_ahead_of_it_without_limit() -> None:
    boat = studied(
        a_battery("BAT"), *_ground("BAT"), a_fuse("F", 40.0), a_bus("STUD"),
        a_conductor("ahead", "BAT.pos", "F.line"), a_conductor("behind", "F.load", "STUD"),
    )  # fmt: skip
    assert _reaches(boat, "ahead") == (INF, 0.0)
    assert _reaches(boat, "behind") == (40.0, 0.0)


def test_a_device_mounted_on_a_bus_limits_what_leaves_the_bus() -> None:
    boat = studied(
        a_battery("BAT"), *_ground("BAT"), a_bus("STUD"), a_fuse("F", 15.0, mount={"line": "STUD"}), a_load("L"),
        a_conductor("feed", "BAT.pos", "STUD"), a_conductor("out", "F.load", "L.pos"), a_conductor("back", "L.neg", "BUS-N"),
    )  # fmt: skip
    assert _reaches(boat, "out") == (15.0, 0.0)


def test_an_emergency_link_fused_at_both_ends_is_reached_by_one_fuse_at_each_end() -> None:
    # A is unlimited behind 250 A, B unlimited behind 200 A: each end of the link sees its own fuse, plus
    # what comes over the link only when the link is whole, which a fault in it rules out.
    boat = studied(
        a_battery("A", bank="A"), a_battery("B", bank="B"), *_ground("A", "B"), a_fuse("FA", 250.0), a_fuse("FB", 200.0),
        a_conductor("a", "A.pos", "FA.line"), a_conductor("b", "B.pos", "FB.line"),
        a_conductor("link", "FA.load", "FB.load"),
    )  # fmt: skip
    assert _reaches(boat, "link") == (250.0, 200.0)


def test_a_ring_main_is_reached_from_both_sides_by_both_devices() -> None:
    boat = studied(
        a_battery("BAT"), *_ground("BAT"), a_bus("HOT"), a_bus("FAR"), a_load("L"),
        a_conductor("feed", "BAT.pos", "HOT"),
        a_fuse("F1", 30.0, mount={"line": "HOT"}), a_fuse("F2", 20.0, mount={"line": "HOT"}),
        a_conductor("left", "F1.load", "FAR"), a_conductor("right", "F2.load", "FAR"),
        a_conductor("out", "FAR", "L.pos"), a_conductor("back", "L.neg", "BUS-N"),
    )  # fmt: skip
    assert _reaches(boat, "out") == (50.0, 0.0)
    assert _reaches(boat, "left") == (30.0, 20.0)
    assert _reaches(boat, "right") == (20.0, 30.0)


def test_a_device_with_a_conductor_beside_it_limits_nothing() -> None:
    boat = studied(
        a_battery("BAT"), *_ground("BAT"), a_bus("HOT"), a_fuse("F", 10.0, mount={"line": "HOT"}), a_load("L"),
        a_conductor("feed", "BAT.pos", "HOT"), a_conductor("jumper", "HOT", "F.load"),
        a_conductor("out", "F.load", "L.pos"), a_conductor("back", "L.neg", "BUS-N"),
    )  # fmt: skip
    assert _reaches(boat, "out") == (INF, 0.0)
    assert _reaches(boat, "jumper") == (INF, 10.0)


def test_a_limited_source_adds_its_greatest_output_and_one_that_is_not_limited_adds_all() -> None:
    def boat(*, limited: bool) -> Studies:
        return studied(
            a_battery("BAT"), *_ground("BAT"), a_bus("CH"), a_fuse("F", 100.0), a_source("S", 30.0, limited=limited),
            a_conductor("ahead", "BAT.pos", "F.line"), a_conductor("c", "F.load", "CH"),
            a_conductor("s", "S.out", "CH"), a_conductor("sn", "S.neg", "BUS-N"),
            a_load("L"), a_conductor("out", "CH", "L.pos"), a_conductor("back", "L.neg", "BUS-N"),
        )  # fmt: skip

    assert _reaches(boat(limited=True), "out") == (130.0, 0.0)
    assert _reaches(boat(limited=True), "s") == (30.0, 100.0)
    assert _reaches(boat(limited=False), "out") == (INF, 0.0)


def test_the_terms_of_a_doubly_fed_bus_are_told_largest_first() -> None:
    boat = studied(
        a_battery("BAT"), *_ground("BAT"), a_bus("CH"), a_fuse("F", 100.0), a_source("S", 30.0),
        a_conductor("ahead", "BAT.pos", "F.line"), a_conductor("c", "F.load", "CH"),
        a_conductor("s", "S.out", "CH"), a_conductor("sn", "S.neg", "BUS-N"),
        a_load("L"), a_conductor("out", "CH", "L.pos"), a_conductor("back", "L.neg", "BUS-N"),
    )  # fmt: skip
    edge = boat.network.edges_of["out"][0]
    assert boat.exposures[0].terms(edge, edge.a) == [("F", 100.0), ("S.out", 30.0)]


def test_return_conductors_are_not_asked() -> None:
    boat = studied(
        a_battery("BAT"), *_ground("BAT"), a_fuse("F", 5.0), a_load("L"), a_switch("SW"),
        a_conductor("ahead", "BAT.pos", "F.line"), a_conductor("out", "F.load", "SW.in"),
        a_conductor("on", "SW.out", "L.pos"), a_conductor("back", "L.neg", "BUS-N"),
        a_circuit("C", "ahead", "out", "on", "back"),
    )  # fmt: skip
    asked = {boat.network.edges[i].part for i in boat.exposures[0].exposures}
    assert asked == {"ahead", "F", "out", "SW", "on"}


def test_on_a_whole_boat_every_conductor_end_agrees_with_networkx() -> None:
    boat = studied(
        a_battery("A"), a_battery("B"), a_battery("C", bank="START"), *_ground("A", "B", "C"),
        a_bus("STUD"), a_bus("HOT"), a_bus("CH"), a_bus("PNL"), a_switch("SW"), a_switch("LINK"),
        a_conductor("wa", "A.pos", "STUD"), a_conductor("wb", "B.pos", "STUD"),
        a_fuse("F1", 300.0), a_conductor("f1", "STUD", "F1.line"), a_conductor("f1o", "F1.load", "SW.in"),
        a_conductor("sw", "SW.out", "HOT"), a_fuse("F2", 200.0), a_conductor("f2", "STUD", "F2.line"),
        a_conductor("f2o", "F2.load", "CH"), a_source("ALT", 120.0), a_conductor("alt", "ALT.out", "CH"),
        a_conductor("altn", "ALT.neg", "BUS-N"), a_conductor("ring1", "HOT", "PNL"), a_conductor("ring2", "HOT", "PNL"),
        a_fuse("FL", 150.0), a_fuse("FC", 150.0), a_conductor("l1", "HOT", "FL.line"), a_conductor("l2", "FL.load", "LINK.in"),
        a_conductor("l3", "LINK.out", "FC.load"), a_conductor("l4", "FC.line", "C.pos"),
        *(a_fuse(f"P{n}", 5.0 * n, mount={"line": "PNL"}) for n in (1, 2, 3)),
        *(a_load(f"L{n}") for n in (1, 2, 3)),
        *(a_conductor(f"o{n}", f"P{n}.load", f"L{n}.pos") for n in (1, 2, 3)),
        *(a_conductor(f"r{n}", f"L{n}.neg", "BUS-N") for n in (1, 2, 3)),
    )  # fmt: skip
    for study in boat.exposures:
        edges = list(study.exposures)
        for index in edges:
            edge = boat.network.edges[index]
            assert study.exposures[index].at_a == reference_flow(boat.network, edges, study.supply_a, edge.a, index)
            assert study.exposures[index].at_b == reference_flow(boat.network, edges, study.supply_a, edge.b, index)
    assert EdgeKind.CONTACT in {boat.network.edges[i].kind for i in boat.exposures[0].exposures}


@pytest.mark.parametrize(
    ("feeds", "limits", "sink", "expected"),
    [
        ({0: INF}, [(0, 1, 10.0), (0, 1, 5.0)], 1, 15.0),  # two devices side by side
        ({0: INF}, [(0, 1, 10.0), (1, 2, 4.0)], 2, 4.0),  # two devices in a row
        ({0: 3.0}, [(0, 1, 10.0)], 1, 3.0),  # the source gives less than the device lets through
        ({0: INF, 1: 2.0}, [(0, 1, 10.0)], 1, 12.0),  # a source at the place asked
        ({1: INF}, [(0, 1, 10.0)], 1, INF),  # a battery at the place asked
        ({0: INF}, [(0, 0, 10.0)], 1, 0.0),  # a device from a place to itself leads nowhere
        ({0: INF}, [(2, 1, 10.0)], 1, 0.0),  # no way at all
    ],
)
def test_the_flow_through_a_few_devices_is_that_of_a_hand_calculation(
    feeds: dict[int, float], limits: list[tuple[int, int, float]], sink: int, expected: float
) -> None:
    assert max_flow(feeds, limits, sink) == expected


def test_the_study_takes_a_boat_without_any_source() -> None:
    boat = studied(a_bus("BUS-N"), a_bus("HOT"), a_load("L"), a_conductor("out", "HOT", "L.pos"))
    assert _reaches(boat, "out") == (0.0, 0.0)
    assert a_boat(a_bus("BUS-N")).conductors == {}
