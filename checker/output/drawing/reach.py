"""Find how each place on one side of a boat is reached: from which place, over which part, at which level."""

from __future__ import annotations

from collections import deque
from collections.abc import Sequence

from checker.boat.hull import Boat
from checker.boat.parts import Bus
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.states import live_edges
from checker.network.studies import Studies
from checker.network.walk import groups

CONDUCTING = (EdgeKind.CONDUCTOR, EdgeKind.BOND)


class Side:
    """Hold the places and edges of one side of the boat, and how each place is reached."""

    def __init__(self, studies: Studies, *, is_return: bool) -> None:
        self.studies = studies
        self.boat: Boat = studies.boat
        network: Network = studies.network
        self.network = network
        usual = studies.usual
        self.on_side = [usual.is_return(post) is is_return for post in range(len(network.posts))]
        joined = [
            (e.a, e.b) for e in network.edges if e.kind is EdgeKind.JOINT and self.on_side[e.a] is self.on_side[e.b]
        ]
        self.bank_posts: dict[str, list[int]] = {}
        for tie in network.batteries:
            for post in (tie.pos, tie.neg):
                if self.on_side[post]:
                    self.bank_posts.setdefault(tie.bank, []).append(post)
        for posts in self.bank_posts.values():
            joined += [(posts[0], post) for post in posts]
        self.place = groups(len(network.posts), joined)
        live = set(live_edges(network, usual.state)) | {e.index for e in network.diodes}
        self.edges = [
            e for e in network.edges
            if e.kind not in (EdgeKind.JOINT, EdgeKind.SHIELD)
            and self.on_side[e.a] and self.on_side[e.b] and self.place[e.a] != self.place[e.b]
        ]  # fmt: skip
        self.closed = {e.index for e in self.edges if e.index in live}
        self.at: dict[int, list[Edge]] = {}
        for edge in self.edges:
            for post in (edge.a, edge.b):
                self.at.setdefault(self.place[post], []).append(edge)
        self.posts_at: dict[int, list[int]] = {}
        for post in range(len(network.posts)):
            if self.on_side[post]:
                self.posts_at.setdefault(self.place[post], []).append(post)
        self.owner: dict[int, str] = {}
        """The tree that a place belongs to, by the name of its root."""
        self.order: dict[int, int] = {}
        self.level: dict[int, int] = {}
        """When a place was reached: of two, the one with the smaller number first."""
        self.down: dict[int, list[Edge]] = {}
        self.through: dict[int, list[tuple[str, int]]] = {}
        self.used: set[int] = set()
        self.came_through: dict[int, str] = {}

    def reach(self, starts: Sequence[tuple[int, str]], level: int = 0) -> None:
        """Reach what can be reached from some places, as current flows, then over open contacts and against diodes."""
        waiting: deque[int] = deque()
        for place, owner in starts:
            self._enter(place, owner, level)
            waiting.append(place)
        self._spread(waiting)
        while True:
            opened = [
                e for e in self.edges
                if (e.index not in self.closed or e.kind is EdgeKind.DIODE) and self._is_frontier(e)
            ]  # fmt: skip
            if not opened:
                return
            self._spread(deque(self._cross(opened[0])))

    def _is_frontier(self, edge: Edge) -> bool:
        return (self.place[edge.a] in self.owner) is not (self.place[edge.b] in self.owner)

    def _enter(self, place: int, owner: str, level: int) -> None:
        self.owner[place] = owner
        self.level[place] = level
        self.order[place] = len(self.order)

    def _cross(self, edge: Edge) -> list[int]:
        near, far = self.place[edge.a], self.place[edge.b]
        if near not in self.owner:
            near, far = far, near
        self._enter(far, self.owner[near], self.level[near] + 1)
        self._take(near, far, edge)
        return [far]

    def _take(self, near: int, far: int, edge: Edge) -> None:
        """Let a place be reached over an edge, and over the conductors that lie beside it."""
        self.down.setdefault(near, []).append(edge)
        self.used.add(edge.index)
        if edge.kind in CONDUCTING:
            self.used |= {e.index for e in self.beside(edge)}

    def beyond(self, place: int, edge: Edge) -> int:
        """Return the place that an edge leads to from a place."""
        return self.place[edge.b] if self.place[edge.a] == place else self.place[edge.a]

    def beside(self, edge: Edge) -> list[Edge]:
        """Return the conductors that join the same two places as one, itself among them."""
        ends = {self.place[edge.a], self.place[edge.b]}
        return [
            e for e in self.at[self.place[edge.a]]
            if e.kind is edge.kind and {self.place[e.a], self.place[e.b]} == ends
        ]  # fmt: skip

    def _spread(self, waiting: deque[int]) -> None:
        while waiting:
            near = waiting.popleft()
            for edge in self.at.get(near, ()):
                far = self.beyond(near, edge)
                is_against = edge.kind is EdgeKind.DIODE and self.place[edge.a] != near
                if edge.index in self.closed and far not in self.owner and not is_against:
                    self._enter(far, self.owner[near], self.level[near] + 1)
                    self._take(near, far, edge)
                    waiting.append(far)

    def loose(self, place: int) -> list[Edge]:
        """Return the edges of a place that close a loop."""
        loose = [e for e in self.at.get(place, ()) if e.index not in self.used]
        return [e for e in loose if self.place[e.a] in self.owner and self.place[e.b] in self.owner]

    def devices_at(self, place: int) -> list[str]:
        """Return the devices that have a post at a place."""
        names = (self.boat.device_of(self.network.posts[post]) for post in self.posts_at[place])
        return list(dict.fromkeys(device.id for device in names if device is not None))

    def bus_at(self, place: int) -> list[str]:
        """Return the buses that are a place."""
        return [name for name in self.devices_at(place) if isinstance(self.boat.devices[name].part, Bus)]

    def place_name(self, place: int) -> str:
        """Return the name of a place: its bank, its bus, or its first post."""
        for bank, posts in self.bank_posts.items():
            if self.place[posts[0]] == place:
                return f"bank {bank}"
        buses = self.bus_at(place)
        return buses[0] if buses else min(self.network.posts[post] for post in self.posts_at[place])
