"""Find the way of a circuit's current: from its bank's post to its load's, and back, edge by edge."""

from __future__ import annotations

from dataclasses import dataclass

from checker.boat.hull import Circuit
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.states import live_edges
from checker.network.studies import Studies
from checker.network.walk import ShortestTree, neighbours, shortest_tree

_NO_WAY = (EdgeKind.BOND, EdgeKind.SHIELD)


@dataclass(frozen=True, slots=True)
class Way:
    """Hold the way of a circuit in the first normal state.

    `out` and `back` are edges with the post that each leads to, in the order that current takes
    them; `out` starts at `bank_post`, `back` at `turn_post`. `back` is empty where none is known.
    """

    bank: str
    bank_post: int
    out: tuple[tuple[Edge, int], ...]
    turn_post: int
    back: tuple[tuple[Edge, int], ...]

    @property
    def far_post(self) -> int:
        """Return the post at the end of the way out."""
        return self.out[-1][1]

    @property
    def devices(self) -> tuple[str, ...]:
        """Return the overcurrent devices in series on the way out, from the bank on."""
        return tuple(edge.part for edge, _ in self.out if edge.kind is EdgeKind.DEVICE)


class Ways:
    """Find the ways of a boat's circuits; the walk over its network is made once."""

    def __init__(self, studies: Studies) -> None:
        self._studies = studies
        network, usual = studies.network, studies.usual
        live = [*live_edges(network, usual.state), *(edge.index for edge in network.diodes)]
        weights = {e.index: e.length_m for e in network.edges if e.kind is EdgeKind.CONDUCTOR}
        self._bank_of = {post: tie.bank for tie in network.batteries for post in (tie.pos, tie.neg)}
        sides = self._sides(live)
        self._feed, self._back = (neighbours(network, side) for side in sides)
        tops = [post for post in sorted(self._bank_of) if not usual.is_return(post)]
        self._outward = shortest_tree(self._feed, tops, weights)
        self._homeward: dict[str, ShortestTree] = {
            bank: shortest_tree(
                self._back,
                [p for p in sorted(self._bank_of) if self._bank_of[p] == bank and usual.is_return(p)],
                weights,
            )
            for bank in sorted(set(self._bank_of.values()))
        }

    def _sides(self, live: list[int]) -> tuple[list[int], list[int]]:
        network, usual = self._studies.network, self._studies.usual
        feed = [i for i in live if not usual.is_return(network.edges[i].a)]
        back = [i for i in live if usual.is_return(network.edges[i].a) and network.edges[i].kind not in _NO_WAY]
        return feed, back

    def way(self, circuit: Circuit) -> Way | None:
        """Return the way of a circuit, or None where no bank reaches it in the first normal state."""
        own = self._own_posts(circuit)
        tie = next(
            (tie for tie in _ties(self._studies.network) if tie[0] in own and tie[0] in self._outward.cost), None
        )
        far = tie[0] if tie is not None else _farthest(self._outward, own)
        if far is None:
            return None
        path, bank_post = self._outward.way(far)
        if not path:
            return None
        bank = self._bank_of[bank_post]
        home = self._homeward[bank]
        turn = tie[1] if tie is not None else _farthest(home, own)
        back: tuple[tuple[Edge, int], ...] = ()
        if turn is not None and turn in home.cost:
            back = _walked(turn, home.way(turn)[0])
        return Way(bank, bank_post, _walked(bank_post, path[::-1]), -1 if turn is None else turn, back)

    def _own_posts(self, circuit: Circuit) -> set[int]:
        """Return the posts of a circuit's conductors, and those that its switch or its device joins to them."""
        network = self._studies.network
        own = {
            network.index[post]
            for name in circuit.conductors
            if name in self._studies.boat.conductors
            for post in (self._studies.boat.conductors[name].start, self._studies.boat.conductors[name].end)
        }
        return own | self._joined(own)

    def _joined(self, own: set[int]) -> set[int]:
        """Return the posts of the feed side that metal or a switch joins to a circuit's own."""
        found: set[int] = set()
        for post in own:
            for edge in self._feed[post]:
                if edge.kind in (EdgeKind.JOINT, EdgeKind.CONTACT):
                    found.add(edge.other(post))
        for post in sorted(found):
            found |= {edge.other(post) for edge in self._feed[post] if edge.kind is EdgeKind.JOINT}
        return found


def _farthest(tree: ShortestTree, posts: set[int]) -> int | None:
    """Return the post that is farthest from the goals of a tree, or None where it reaches none."""
    reached = [post for post in posts if post in tree.cost]
    return max(reached, key=lambda post: (tree.cost[post], -post), default=None)


def _ties(network: Network) -> list[tuple[int, int]]:
    """Return the feed post and the return post of every load and source."""
    ties = [(load.feed, load.back) for load in network.loads if not load.is_input]
    ties += [(source.out, source.back) for source in network.sources]
    return ties + [(load.feed, load.back) for load in network.loads if load.is_input]


def _walked(start: int, path: list[Edge]) -> tuple[tuple[Edge, int], ...]:
    """Return a path with the post that each edge leads to."""
    found: list[tuple[Edge, int]] = []
    for edge in path:
        start = edge.other(start)
        found.append((edge, start))
    return tuple(found)
