"""Ask which bank cranks the engine, what else draws on it, and how banks are joined."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from checker.boat.hull import Boat
from checker.boat.parts import Battery, Load, Switch
from checker.network.bank import Bank
from checker.network.graph import Edge, EdgeKind, LoadTie, Network
from checker.network.potentials import Potentials
from checker.network.sensing import Tops
from checker.network.states import States, SwitchState, live_edges, places
from checker.network.walk import groups, neighbours, path_between, shortest_tree

_FREE = (EdgeKind.CONTACT, EdgeKind.JOINT, EdgeKind.SHUNT)


def cranking_motors(boat: Boat, network: Network, conductors: frozenset[str]) -> tuple[LoadTie, ...]:
    """Return the motors that the cranking conductors feed, directly or over a contact.

    Args:
        boat: The boat.
        network: Its graph.
        conductors: The conductors that feed a cranking motor.
    """
    place = groups(len(network.posts), ((e.a, e.b) for e in network.edges if e.kind in _FREE))
    ends = {place[post] for name in conductors for edge in network.edges_of[name] for post in (edge.a, edge.b)}

    def is_motor(tie: LoadTie) -> bool:
        part = boat.devices[tie.device].part
        return isinstance(part, Load) and part.is_motor

    return tuple(tie for tie in network.loads if place[tie.feed] in ends and is_motor(tie))


def start_banks(
    boat: Boat, motors: Sequence[LoadTie], potentials: Sequence[Potentials], banks: Sequence[Bank], tops: Tops
) -> tuple[str, ...]:
    """Return the banks that crank an engine in some of the states.

    Where a selector lets several crank, they are those with a stated cranking current; where that
    does not tell them apart, all but the largest.
    """
    found = [bank for bank in banks if any(_cranks(one, tops.get(bank.id, ()), motors) for one in potentials)]
    if len(found) < 2:
        return tuple(bank.id for bank in found)
    stated = [bank for bank in found if any(_states_cranking(boat, name) for row in bank.strings for name in row)]
    if 0 < len(stated) < len(found):
        return tuple(bank.id for bank in stated)
    largest = min(found, key=lambda bank: (-bank.capacity_ah, bank.id))
    return tuple(bank.id for bank in found if bank is not largest)


def _cranks(potentials: Potentials, posts: Sequence[int], motors: Sequence[LoadTie]) -> bool:
    return bool({potentials.net[post] for post in posts} & {potentials.net[tie.feed] for tie in motors})


def _states_cranking(boat: Boat, battery: str) -> bool:
    part = boat.devices[battery].part
    return isinstance(part, Battery) and part.cranking_a is not None


@dataclass(frozen=True, slots=True)
class StartDraw:
    """Hold what draws on a bank that cranks though it has another bank: over which switch, in which state."""

    bank: str
    switch: str
    state: SwitchState
    loads: tuple[str, ...]


def start_draws(
    boat: Boat, network: Network, states: States, motors: Sequence[LoadTie], start: Sequence[str], tops: Tops
) -> tuple[StartDraw, ...]:
    """Find loads that draw on a start bank in one normal state and on another bank alone in a further one.

    Only contacts worked by hand count: a relay that joins two banks while they are charged opens
    by itself. Of several states the first is told for each bank and switch.
    """
    by_hand = {d.id: d.part for d in boat.devices.values() if isinstance(d.part, Switch) and d.part.by_hand}
    if len(tops) < 2 or not start:
        return ()
    normal = [_with_relays_open(state, by_hand) for state in states.every if state.is_normal]
    found: dict[tuple[str, str], StartDraw] = {}
    cranking = {tie.device for tie in motors}
    for state in normal:
        net = places(network, state, ())
        for bank in start:
            own = {net[post] for post in tops[bank]}
            drawing = [tie for tie in network.loads if net[tie.feed] in own and tie.device not in cranking]
            if boat.switch_rows:
                drawing = [tie for tie in drawing if _has_another(network, tie, normal, tops, bank)]
            by_switch = _by_switch(network, state, by_hand, tops[bank][0], drawing, motors)
            for switch, ties in by_switch.items():
                others = normal if boat.switch_rows else _other_states(state, switch, by_hand[switch])
                loads = [t.device for t in ties if _has_another(network, t, others, tops, bank)]
                if loads and (bank, switch) not in found:
                    found[bank, switch] = StartDraw(bank, switch, state, tuple(sorted(set(loads))))
    return tuple(found[key] for key in sorted(found))


def _with_relays_open(state: SwitchState, by_hand: Mapping[str, Switch]) -> SwitchState:
    return replace(state, closed=frozenset(contact for contact in state.closed if contact[0] in by_hand))


def _other_states(state: SwitchState, switch: str, part: Switch) -> list[SwitchState]:
    """Return a state with one switch put into each of its states in turn."""
    rest = frozenset(contact for contact in state.closed if contact[0] != switch)
    return [replace(state, closed=rest | {(switch, a, b) for a, b in pairs}) for _, pairs in part.states]


def _has_another(network: Network, tie: LoadTie, states: Sequence[SwitchState], tops: Tops, bank: str) -> bool:
    """Tell whether a load is fed by another bank alone in one of some states."""
    for state in states:
        net = places(network, state, ())
        feeding = {name for name, posts in tops.items() if net[tie.feed] in {net[post] for post in posts}}
        if feeding and bank not in feeding:
            return True
    return False


def _by_switch(
    network: Network,
    state: SwitchState,
    by_hand: Mapping[str, Switch],
    top: int,
    drawing: Sequence[LoadTie],
    motors: Sequence[LoadTie],
) -> dict[str, list[LoadTie]]:
    """Return what draws on a bank by the switch nearest the bank over which it does.

    Switches on the bank's own way to its motor are named only where no other lies on the way.
    """
    if not drawing:
        return {}
    tree = shortest_tree(neighbours(network, live_edges(network, state)), [top], {})
    reached = [tie for tie in motors if tie.feed in tree.cost]
    own = {edge.part for tie in reached for edge in tree.way(tie.feed)[0] if edge.kind is EdgeKind.CONTACT}
    found: dict[str, list[LoadTie]] = {}
    last_resort: dict[str, list[LoadTie]] = {}
    for tie in drawing:
        if tie.feed not in tree.cost:
            continue
        switches = [e.part for e in reversed(tree.way(tie.feed)[0]) if e.kind is EdgeKind.CONTACT and e.part in by_hand]
        others = [name for name in switches if name not in own]
        if others:
            found.setdefault(others[0], []).append(tie)
        elif switches:
            last_resort.setdefault(switches[0], []).append(tie)
    return found or last_resort


@dataclass(frozen=True, slots=True)
class Joined:
    """Hold two banks that are one net in a switch state, and the way between their positive posts."""

    banks: tuple[str, str]
    state: SwitchState
    start: int
    path: tuple[Edge, ...]


def joined_banks(network: Network, potentials: Sequence[Potentials], tops: Tops) -> tuple[Joined, ...]:
    """Return each pair of banks whose positive posts are one net in some of the states, with the first such state."""
    names = sorted(tops)
    found: dict[tuple[str, str], Joined] = {}
    for one in potentials:
        for number, first in enumerate(names):
            for second in names[number + 1 :]:
                nets = {one.net[post] for post in tops[second]}
                start = next((post for post in tops[first] if one.net[post] in nets), None)
                if start is None or (first, second) in found:
                    continue
                at = neighbours(network, live_edges(network, one.state))
                path = path_between(at, start, tops[second]) or []
                found[first, second] = Joined((first, second), one.state, start, tuple(path))
    return tuple(found[pair] for pair in sorted(found))
