"""Find the way of each circuit to the bank that supplies it, out and back.

The way is the shortest over closed switches of the first normal state; it ends at the bank:
at a battery post or where a bank conductor lands. Conductors of the bank itself belong to it.
"""

from __future__ import annotations

from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import live_edges
from checker.network.walk import ShortestTree, neighbours, shortest_tree

CONDUCTING = (EdgeKind.CONDUCTOR, EdgeKind.BOND)


@dataclass(frozen=True, slots=True)
class SupplyWay:
    """Hold the conductors between a circuit's own and its bank; empty where no bank supplies it.

    `start_out` and `start_back` are the circuit's posts nearest the bank, -1 where there is none.
    """

    bank: str
    out: tuple[str, ...]
    back: tuple[str, ...]
    start_out: int
    start_back: int


def study_supply(boat: Boat, network: Network, potentials: Potentials, of_bank: frozenset[str]) -> dict[str, SupplyWay]:
    """Return the way of every circuit to its bank, by circuit; `of_bank` are the bank's own conductors."""
    live = live_edges(network, potentials.state)
    passing = [*live, *(edge.index for edge in network.diodes)]
    feed = neighbours(network, [i for i in passing if not potentials.is_return(network.edges[i].a)])
    # Bonds and shields are no way for load current, though they conduct.
    back = neighbours(
        network,
        [
            i for i in live
            if potentials.is_return(network.edges[i].a)
            and network.edges[i].kind not in (EdgeKind.BOND, EdgeKind.SHIELD)
        ],
    )  # fmt: skip
    weights = {e.index: e.length_m for e in network.edges if e.kind in CONDUCTING}
    goals = _bank_posts(boat, network, of_bank)
    outward = shortest_tree(feed, goals, weights)
    homeward = {
        bank: shortest_tree(back, (post for post, owner in goals.items() if owner == bank), weights)
        for bank in sorted(set(goals.values()))
    }
    returns = _return_posts(network)
    ways: dict[str, SupplyWay] = {}
    for circuit in boat.circuits.values():
        own = {post for c in circuit.conductors if c in boat.conductors for post in _ends(boat, network, c)}
        own |= {returns[post] for post in own if post in returns}
        start, out, end = _nearest(outward, {p for p in own if not potentials.is_return(p)})
        bank = goals.get(end, "")
        home, way, _ = _nearest(homeward[bank], {p for p in own if potentials.is_return(p)}) if bank else _NOWHERE
        own_parts = circuit.conductors
        ways[circuit.id] = SupplyWay(bank, _parts(out, own_parts), _parts(way, own_parts), start, home)
    return ways


def _return_posts(network: Network) -> dict[int, int]:
    """Return for each feed post of a load or source the post its current returns to."""
    posts = {load.feed: load.back for load in network.loads}
    return posts | {source.out: source.back for source in network.sources}


def _bank_posts(boat: Boat, network: Network, of_bank: frozenset[str]) -> dict[int, str]:
    """Return the posts at which each bank is taken off: battery posts and ends of bank conductors."""
    posts: dict[int, str] = {}
    for battery in network.batteries:
        posts[battery.pos] = posts[battery.neg] = battery.bank
    for _ in range(3):  # a chain battery - link - collector - link - collector is the longest met
        for conductor in boat.conductors.values():
            if conductor.id in of_bank:
                a, b = _ends(boat, network, conductor.id)
                if a in posts or b in posts:
                    bank = posts.get(a) or posts[b]
                    posts.setdefault(a, bank)
                    posts.setdefault(b, bank)
    return posts


def _ends(boat: Boat, network: Network, conductor: str) -> tuple[int, int]:
    found = boat.conductors[conductor]
    return network.index[found.start], network.index[found.end]


_NOWHERE: tuple[int, list[Edge], int] = (-1, [], -1)


def _nearest(tree: ShortestTree, starts: set[int]) -> tuple[int, list[Edge], int]:
    """Return which of some posts is nearest to the tree's goals, its way there, and the goal."""
    reached = [(tree.cost[start], start) for start in starts if start in tree.cost]
    if not reached:
        return _NOWHERE
    start = min(reached)[1]
    return (start, *tree.way(start))


def _parts(way: list[Edge], own: tuple[str, ...]) -> tuple[str, ...]:
    return tuple(edge.part for edge in way if edge.kind in CONDUCTING and edge.part not in own)
