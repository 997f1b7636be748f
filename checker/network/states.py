"""Find the switch states that can exist, and keep those that must be studied.

"Every switch closed" is not a safe bound: selector contacts exclude each other. Yet closing
one more contact can only join more, so a state whose closed contacts are all closed in another
state shows nothing that the other does not: only the largest states of each kind are kept.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from checker.boat.hull import Boat, SwitchRow
from checker.boat.parts import Switch
from checker.network.graph import EdgeKind, Network
from checker.network.walk import groups

MOST_STATES = 256
MOST_COMBINATIONS = 16_384

Contact = tuple[str, str, str]  # switch, post, post


@dataclass(frozen=True, slots=True)
class SwitchState:
    """Hold one switch state by the contacts it closes. `words` tells it to an electrician."""

    id: str
    is_normal: bool
    closed: frozenset[Contact]
    words: str


@dataclass(frozen=True, slots=True)
class States:
    """Hold the states to study, normal ones first, every state that was found, and what the table leaves open."""

    kept: tuple[SwitchState, ...]
    every: tuple[SwitchState, ...]
    unlisted: tuple[str, ...]
    are_too_many: bool


def study_states(boat: Boat) -> States:
    """Return the states that must be studied so that no other can show more."""
    switches = {d.id: d.part for d in boat.devices.values() if isinstance(d.part, Switch)}
    rows = [row for row in boat.switch_rows if row.kind != "forbidden"]
    if not boat.switch_rows:
        rows = [SwitchRow(id="any", kind="normal", switches=())]
    found: list[SwitchState] = []
    too_many = False
    forbidden = [row for row in boat.switch_rows if row.kind == "forbidden"]
    for row in sorted(rows, key=lambda row: (row.kind != "normal", row.id)):
        for state in itertools.islice(_expanded(row, switches, forbidden), MOST_STATES + 1):
            found.append(state)
        too_many = too_many or len(found) > MOST_STATES
    unlisted, are_all = _unlisted(boat, switches)
    every = tuple(found[:MOST_STATES])
    return States(tuple(_largest(list(every))), every, tuple(unlisted), too_many or not are_all)


def _expanded(row: SwitchRow, switches: dict[str, Switch], forbidden: list[SwitchRow]) -> list[SwitchState]:
    """Give a switch that the row does not name every state that closes most, or every one if some are forbidden."""
    named = dict(row.switches)
    guarded = {name for other in forbidden for name, _ in other.switches}
    choices = [
        [(name, named[name])] if name in named else
        [(name, state) for state, _ in part.states] if name in guarded else
        [(name, state) for state in _widest(part)]
        for name, part in sorted(switches.items())
    ]  # fmt: skip
    states = []
    for combination in itertools.islice(itertools.product(*choices), MOST_STATES * 16):
        if any(set(other.switches) <= set(combination) for other in forbidden):
            continue
        closed = frozenset((name, a, b) for name, state in combination for a, b in dict(switches[name].states)[state])
        open_choices = [
            f"{n} {s}" for n, s in combination if n not in named and (n in guarded or len(_widest(switches[n])) > 1)
        ]
        shown = [f"{n} {s}" for n, s in combination if n in named] + open_choices
        name = "/".join([row.id, *(choice.replace(" ", "-") for choice in open_choices)])
        states.append(SwitchState(name, row.kind == "normal", closed, ", ".join(shown) or "all switches closed"))
    return states


def _widest(part: Switch) -> list[str]:
    """Return the states of a switch whose contacts are not all closed in another of its states."""
    sets = {name: frozenset(pairs) for name, pairs in part.states}
    kept: list[str] = []
    for name in sorted(sets):
        covered = any(sets[name] < other for other in sets.values())
        repeated = any(sets[name] == sets[earlier] for earlier in kept)
        if not covered and not repeated:
            kept.append(name)
    return kept


def _largest(states: list[SwitchState]) -> list[SwitchState]:
    """Drop a state that closes nothing beyond a normal one, or beyond another of its own kind."""
    kept: list[SwitchState] = []
    for normal in (True, False):
        pool = [state for state in states if state.is_normal is normal]
        for state in pool:
            covered = any(state.closed <= other.closed for other in kept)
            covered = covered or any(state.closed < other.closed for other in pool)
            if not covered:
                kept.append(state)
    return kept


def _unlisted(boat: Boat, switches: dict[str, Switch]) -> tuple[list[str], bool]:
    """Return combinations of the switches that the table names which no row covers, and whether all were looked at."""
    named = sorted({name for row in boat.switch_rows for name, _ in row.switches})
    choices = [[(name, state) for state, _ in switches[name].states] for name in named]
    missing: list[str] = []
    for combination in itertools.islice(itertools.product(*choices), MOST_COMBINATIONS):
        taken = set(combination)
        if boat.switch_rows and not any(set(row.switches) <= taken for row in boat.switch_rows):
            missing.append(", ".join(f"{name} {state}" for name, state in combination))
    return missing, math.prod(len(choice) for choice in choices) <= MOST_COMBINATIONS


def live_edges(network: Network, state: SwitchState) -> list[int]:
    """Return the indexes of the edges that conduct both ways in a state; not to be changed."""
    key = ("live", state.closed)
    if key not in network.memo:
        closed = {(part, network.index[f"{part}.{a}"], network.index[f"{part}.{b}"]) for part, a, b in state.closed}
        network.memo[key] = [
            edge.index
            for edge in network.edges
            if edge.kind is not EdgeKind.DIODE
            and (edge.kind is not EdgeKind.CONTACT or (edge.part, edge.a, edge.b) in closed)
        ]
    found: list[int] = network.memo[key]
    return found


def leading_to(network: Network, place: Sequence[int], goals: Iterable[int]) -> frozenset[int]:
    """Return the diodes through which current can come to some places; `place` has shape (posts,)."""
    reached = set(goals)
    found: set[int] = set()
    grown = True
    while grown:
        more = {e.index for e in network.diodes if place[e.b] in reached} - found
        found |= more
        reached |= {place[network.edges[index].a] for index in more}
        grown = bool(more)
    return frozenset(found)


def places_beyond(network: Network, place: Sequence[int], starts: Iterable[int]) -> frozenset[int]:
    """Return the places that current from some places can come to, through diodes too."""
    reached = set(starts)
    while more := {place[e.b] for e in network.diodes if place[e.a] in reached} - reached:
        reached |= more
    return frozenset(reached)


def places(
    network: Network, state: SwitchState, apart: tuple[EdgeKind, ...], *, over_diodes: bool = False
) -> list[int]:
    """Return for each post the place it is at, shape (posts,): what no edge of the given kinds parts is one place.

    A diode parts its posts unless it is asked to join them. Not to be changed.
    """
    key = ("places", state.closed, apart, over_diodes)
    if key not in network.memo:
        live = [network.edges[i] for i in live_edges(network, state)] + list(network.diodes if over_diodes else ())
        network.memo[key] = groups(len(network.posts), ((e.a, e.b) for e in live if e.kind not in apart))
    found: list[int] = network.memo[key]
    return found
