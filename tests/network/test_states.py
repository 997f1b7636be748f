"""Hold the switch states: which can exist, which must be studied, and that none hides a finding."""

from __future__ import annotations

import itertools

from hypothesis import given, settings
from hypothesis import strategies as st

from checker.boat.hull import Boat
from checker.boat.parts import Switch
from checker.checks.claims import unlisted_state
from checker.network.exposure import study_exposure
from checker.network.graph import build_network
from checker.network.potentials import study_potentials
from checker.network.states import MOST_STATES, SwitchState, live_edges, study_states
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_conductor,
    a_fuse,
    a_load,
    a_row,
    a_switch,
    found_in,
)

SELECTOR = {"1": [("a", "out")], "2": [("b", "out")], "both": [("a", "out"), ("b", "out")], "off": []}
CHANGEOVER = {"1": [("a", "out")], "2": [("b", "out")], "off": []}


def closed_in(boat: Boat) -> list[tuple[str, set[tuple[str, str, str]]]]:
    """Return the states kept for study by name, with the contacts they close."""
    return [(state.id, set(state.closed)) for state in study_states(boat).kept]


def test_a_plain_switch_is_studied_closed_only() -> None:
    assert closed_in(a_boat(a_bus("BUS-N"), a_switch("SW"))) == [("any", {("SW", "in", "out")})]


def test_a_boat_without_switches_has_one_state() -> None:
    states = study_states(a_boat(a_bus("BUS-N")))
    assert [(s.id, s.is_normal, s.closed, s.words) for s in states.kept] == [
        ("any", True, frozenset(), "all switches closed")
    ]


def test_the_states_of_a_changeover_exclude_each_other() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("SEL", CHANGEOVER))
    assert closed_in(boat) == [("any/SEL-1", {("SEL", "a", "out")}), ("any/SEL-2", {("SEL", "b", "out")})]


def test_a_selector_that_can_join_both_is_studied_in_that_state_alone() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("SEL", SELECTOR))
    assert closed_in(boat) == [("any", {("SEL", "a", "out"), ("SEL", "b", "out")})]


def test_two_changeovers_are_studied_in_every_combination() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("S1", CHANGEOVER), a_switch("S2", CHANGEOVER))
    assert [closed for _, closed in closed_in(boat)] == [
        {("S1", one, "out"), ("S2", two, "out")} for one, two in itertools.product("ab", "ab")
    ]


def test_a_state_is_told_by_its_switches() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("SW"), a_switch("SEL", CHANGEOVER), a_row("in-use", SW="closed"))
    assert [state.words for state in study_states(boat).kept] == ["SW closed, SEL 1", "SW closed, SEL 2"]


def test_a_row_that_closes_no_more_than_another_is_not_studied() -> None:
    boat = a_boat(
        a_bus("BUS-N"), a_switch("SW"), a_switch("LINK"), a_row("in-use", SW="closed", LINK="open"),
        a_row("left", SW="open", LINK="open"), a_row("emergency", "abnormal", SW="closed", LINK="closed"),
    )  # fmt: skip
    assert [(state.id, state.is_normal) for state in study_states(boat).kept] == [
        ("in-use", True),
        ("emergency", False),
    ]


def test_a_normal_state_is_kept_though_an_abnormal_one_closes_more() -> None:
    boat = a_boat(
        a_bus("BUS-N"), a_switch("LINK"), a_row("emergency", "abnormal", LINK="closed"), a_row("in-use", LINK="open")
    )
    assert [(state.id, state.is_normal) for state in study_states(boat).kept] == [
        ("in-use", True),
        ("emergency", False),
    ]


def test_an_abnormal_state_that_closes_no_more_than_a_normal_one_is_not_studied() -> None:
    boat = a_boat(
        a_bus("BUS-N"), a_switch("SW"), a_row("in-use", SW="closed"), a_row("odd", "abnormal", SW="open"),
        a_row("same", "abnormal", SW="closed"),
    )  # fmt: skip
    assert [state.id for state in study_states(boat).kept] == ["in-use"]


def test_a_switch_that_no_row_names_may_be_in_any_state() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("SW"), a_switch("SEL", CHANGEOVER), a_row("in-use", SW="closed"))
    assert closed_in(boat) == [
        ("in-use/SEL-1", {("SW", "in", "out"), ("SEL", "a", "out")}),
        ("in-use/SEL-2", {("SW", "in", "out"), ("SEL", "b", "out")}),
    ]


def test_a_contactor_is_a_switch_like_any_other() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("K", by_hand=False))
    assert closed_in(boat) == [("any", {("K", "in", "out")})]


# --- forbidden rows


def test_a_forbidden_row_is_not_studied() -> None:
    boat = a_boat(
        a_bus("BUS-N"), a_switch("SW"), a_switch("LINK"), a_row("in-use", SW="closed", LINK="open"),
        a_row("left", SW="open", LINK="open"), a_row("parallel", SW="closed", LINK="closed"),
        a_row("never", "forbidden", SW="open", LINK="closed"),
    )  # fmt: skip
    assert [state.id for state in study_states(boat).kept] == ["parallel"]
    assert study_states(boat).unlisted == ()


def test_a_forbidden_combination_is_not_reached_through_a_switch_that_a_row_leaves_free() -> None:
    # The row in-use says nothing of LINK, so that LINK may be in any state, but not in the one that the
    # row never forbids together with SW closed.
    boat = a_boat(
        a_bus("BUS-N"), a_switch("SW"), a_switch("LINK"), a_row("in-use", SW="closed"), a_row("left", SW="open"),
        a_row("never", "forbidden", SW="closed", LINK="closed"),
    )  # fmt: skip
    assert [set(state.closed) for state in study_states(boat).kept] == [{("SW", "in", "out")}, {("LINK", "in", "out")}]


# --- what the table leaves open


def test_a_combination_that_no_row_covers_is_told() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("SW"), a_switch("LINK"), a_row("in-use", SW="closed", LINK="open"))
    assert study_states(boat).unlisted == (
        "LINK closed, SW closed",
        "LINK closed, SW open",
        "LINK open, SW open",
    )
    assert found_in(boat, unlisted_state) == [("unlisted-state", "states")]


def test_a_row_covers_every_state_of_a_switch_it_does_not_name() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("SW"), a_switch("FREE"), a_row("on", SW="closed"), a_row("off", SW="open"))
    assert study_states(boat).unlisted == ()
    assert found_in(boat, unlisted_state) == []


def test_a_boat_without_a_table_of_states_leaves_nothing_open() -> None:
    assert study_states(a_boat(a_bus("BUS-N"), a_switch("SW"))).unlisted == ()


def test_a_table_of_forbidden_rows_alone_leaves_the_rest_open() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("SW"), a_row("never", "forbidden", SW="closed"))
    assert study_states(boat).unlisted == ("SW open",)


def test_as_many_states_as_can_be_studied_are_not_too_many() -> None:
    boat = a_boat(a_bus("BUS-N"), *(a_switch(f"S{n}", CHANGEOVER) for n in range(8)))
    states = study_states(boat)
    assert len(states.kept) == MOST_STATES == 2**8
    assert not states.are_too_many


def test_one_changeover_more_is_too_many_and_is_told() -> None:
    boat = a_boat(a_bus("BUS-N"), *(a_switch(f"S{n}", CHANGEOVER) for n in range(9)))
    states = study_states(boat)
    assert states.are_too_many
    assert len(states.kept) == MOST_STATES
    assert found_in(boat, unlisted_state) == [("unlisted-state", "states")]


def test_an_uncovered_combination_is_told_however_large_the_table() -> None:
    # Seven changeovers and one selector: 3**7 * 4 = 8748 combinations of which a row covers all but those of
    # the last state of the first switch.
    names = [f"S{n}" for n in range(8)]
    boat = a_boat(
        a_bus("BUS-N"), *(a_switch(name, CHANGEOVER) for name in names[:-1]), a_switch(names[-1], SELECTOR),
        a_row("r1", **dict.fromkeys(names, "off")), a_row("r2", S0="1"), a_row("r3", S0="2"),
        a_row("r4", S0="off", S1="1"), a_row("r5", S0="off", S1="2"),
    )  # fmt: skip
    assert study_states(boat).unlisted != ()


def test_the_edges_of_a_state_are_its_contacts_and_everything_else() -> None:
    boat = a_boat(a_bus("BUS-N"), a_switch("SEL", CHANGEOVER), a_fuse("F", 5.0), a_conductor("W", "SEL.out", "F.line"))
    network = build_network(boat)
    for state in study_states(boat).kept:
        live = [network.edges[i] for i in live_edges(network, state)]
        chosen = next(iter(state.closed))[1]
        assert sorted((edge.part, network.posts[edge.a]) for edge in live) == [
            ("F", "F.line"), ("SEL", f"SEL.{chosen}"), ("W", "SEL.out"),
        ]  # fmt: skip


# --- what is left out hides nothing


@st.composite
def boats_with_switches(draw: st.DrawFn) -> Boat:
    """Draw two banks, a few studs, and switches and fuses between them on the feed side."""
    studs = [f"S{n}" for n in range(draw(st.integers(2, 4)))]
    posts = ["A.pos", "B.pos", *studs]
    pieces: list[Piece] = [
        a_battery("A", bank="A"), a_battery("B", bank="B"), a_bus("BUS-N"), *(a_bus(stud) for stud in studs),
        a_conductor("na", "A.neg", "BUS-N"), a_conductor("nb", "B.neg", "BUS-N"),
    ]  # fmt: skip
    pick = st.sampled_from(posts)
    for n in range(draw(st.integers(1, 3))):
        table = draw(st.sampled_from([{"closed": [("a", "out")], "open": []}, SELECTOR, CHANGEOVER]))
        pieces.append(a_switch(f"SW{n}", table))
        used = sorted({post for pairs in table.values() for pair in pairs for post in pair})
        pieces += [a_conductor(f"w{n}{post}", draw(pick), f"SW{n}.{post}") for post in used]
    for n in range(draw(st.integers(1, 4))):
        rating_a = float(draw(st.integers(1, 9)) * 10)
        pieces += [
            a_fuse(f"F{n}", rating_a), a_conductor(f"f{n}", draw(pick), f"F{n}.line"),
            a_conductor(f"g{n}", f"F{n}.load", draw(pick)),
        ]  # fmt: skip
    pieces += [a_load("L"), a_conductor("out", draw(pick), "L.pos"), a_conductor("back", "L.neg", "BUS-N")]
    return a_boat(*pieces)


def all_states(boat: Boat) -> list[SwitchState]:
    """Return every combination of the states of every switch."""
    switches = [(d.id, d.part) for d in boat.devices.values() if isinstance(d.part, Switch)]
    found = []
    for chosen in itertools.product(*(part.states for _, part in switches)):
        closed = {(name, a, b) for (name, _), (_, pairs) in zip(switches, chosen, strict=True) for a, b in pairs}
        found.append(SwitchState("x", True, frozenset(closed), "x"))
    return found


def worst_exposure(boat: Boat, states: list[SwitchState]) -> dict[str, float]:
    """Return for each conductor the most that reaches either end in any of some states."""
    network = build_network(boat)
    worst: dict[str, float] = {}
    for state in states:
        study = study_exposure(network, study_potentials(network, state))
        for index, exposure in study.exposures.items():
            part = network.edges[index].part
            worst[part] = max(worst.get(part, 0.0), exposure.worst_a)
    return worst


@settings(max_examples=60, deadline=None)
@given(boats_with_switches())
def test_the_worst_over_the_kept_states_is_the_worst_over_all_states(boat: Boat) -> None:
    kept = list(study_states(boat).kept)
    every = all_states(boat)
    assert worst_exposure(boat, kept) == worst_exposure(boat, every)
    assert len(kept) <= len(every)


@settings(max_examples=60, deadline=None)
@given(boats_with_switches())
def test_every_state_that_can_exist_is_within_a_kept_one(boat: Boat) -> None:
    kept = [state.closed for state in study_states(boat).kept]
    assert all(any(state.closed <= larger for larger in kept) for state in all_states(boat))


@settings(max_examples=60, deadline=None)
@given(boats_with_switches())
def test_no_kept_state_lies_within_another(boat: Boat) -> None:
    kept = [state.closed for state in study_states(boat).kept]
    assert not any(one <= other for one, other in itertools.permutations(kept, 2))
