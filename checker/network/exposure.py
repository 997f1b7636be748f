"""Ask of each conductor what could feed a fault in it.

The largest sustained current that can reach an end of a conductor without opening an
overcurrent device is a maximum flow from the sources: devices are capacities equal to their
ratings, limited sources are capacities equal to their greatest output, batteries and
conductors are unlimited. The conductor itself is taken out while its ends are asked, since a
fault at one end is fed through it only by what reaches the other.

Nearly all of the network is a tree, where the flow is a minimum along each path: one sweep
up and one down give all ends. A true maximum flow runs only inside blocks that have loops.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

from checker.network.graph import Edge, EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import live_edges
from checker.network.walk import Neighbours, groups, neighbours


@dataclass(frozen=True, slots=True)
class Exposure:
    """Hold what arrives at both ends of one edge from outside it, in ampere."""

    at_a: float
    at_b: float

    @property
    def worst_a(self) -> float:
        """Return the larger of both ends."""
        return max(self.at_a, self.at_b)


@dataclass(slots=True)
class ExposureStudy:
    """Hold the exposure of every live edge of the ungrounded part of the network.

    `supply_a` has shape (posts,): what the sources at a post can give.
    """

    network: Network
    supply_a: list[float]
    exposures: dict[int, Exposure]
    _at: Neighbours = field(repr=False)
    _block: list[int] = field(repr=False)
    _bridges: frozenset[int] = field(repr=False)
    _names: dict[int, list[tuple[str, float]]] = field(repr=False)

    def leads_all(self, edge: Edge, post: int) -> bool:
        """Tell whether all that comes to one end of an edge comes over it: it is a bridge, and nothing feeds beyond."""
        exposure = self.exposures.get(edge.index)
        beyond_a = math.inf if exposure is None else exposure.at_b if post == edge.b else exposure.at_a
        return edge.index in self._bridges and not beyond_a

    def terms(self, edge: Edge, node: int) -> list[tuple[str, float]]:
        """Name what makes up the current arriving at one end of an edge: devices and sources, largest first."""
        found = self._terms(node, edge)
        return sorted(found.items(), key=lambda term: (-term[1], term[0]))

    def _terms(self, node: int, arrived_by: Edge) -> dict[str, float]:
        found: dict[str, float] = {}
        waiting = [(node, arrived_by.index)]
        seen = {node}
        while waiting:
            here, came = waiting.pop()
            found.update(self._names.get(here, ()))
            for edge in self._at[here]:
                far = edge.other(here)
                if edge.index == came or far in seen:
                    continue
                arriving = self._beyond(edge, far)
                if arriving == 0:
                    continue
                if edge.kind is EdgeKind.DEVICE and edge.rating_a <= arriving:
                    found[edge.part] = edge.rating_a
                else:
                    seen.add(far)
                    waiting.append((far, edge.index))
        return found

    def _beyond(self, edge: Edge, far: int) -> float:
        if edge.kind is EdgeKind.DIODE and far == edge.b:
            return 0.0
        exposure = self.exposures[edge.index]
        return exposure.at_a if far == edge.a else exposure.at_b


def study_exposure(network: Network, potentials: Potentials, edges: list[int] | None = None) -> ExposureStudy:
    """Find what can reach both ends of every live ungrounded edge in the state of the potentials."""
    live = live_edges(network, potentials.state) if edges is None else edges
    passing = [*live, *(edge.index for edge in network.diodes)]
    ungrounded = [i for i in passing if not potentials.is_return(network.edges[i].a)]
    names: dict[int, list[tuple[str, float]]] = {}
    supply = [0.0] * len(network.posts)
    for battery in network.batteries:
        for post in (battery.pos, battery.neg):
            if not potentials.is_return(post):
                supply[post] = math.inf
                names.setdefault(post, []).append((battery.device, math.inf))
    for source in network.sources:
        if not potentials.is_return(source.out):
            most = source.max_a if source.is_limited else math.inf
            supply[source.out] += most
            names.setdefault(source.out, []).append((f"{source.device}.{source.post}", most))
    return flow_study(network, ungrounded, supply, names)


def flow_study(
    network: Network, edges: list[int], supply: list[float], names: dict[int, list[tuple[str, float]]] | None = None
) -> ExposureStudy:
    """Find for each given edge what arrives at its ends when the posts give `supply`, shape (posts,)."""
    at = neighbours(network, edges)
    bridges = find_bridges(network, at)
    block = groups(
        len(network.posts),
        ((network.edges[i].a, network.edges[i].b) for i in edges if i not in bridges),
    )
    sweep = _Sweep(network, at, block, bridges, supply)
    sweep.run(edges)
    return ExposureStudy(network, supply, sweep.exposures, at, block, bridges, names or {})


def find_bridges(network: Network, at: Neighbours) -> frozenset[int]:
    """Return the edges whose removal parts the graph (Tarjan's low-link, without recursion)."""
    size = len(network.posts)
    order = [-1] * size
    low = [0] * size
    bridges: list[int] = []
    count = 0
    for start in range(size):
        if order[start] >= 0 or not at[start]:
            continue
        stack: list[tuple[int, int, int]] = [(start, -1, 0)]
        while stack:
            node, came, step = stack.pop()
            if step == 0:
                order[node] = low[node] = count
                count += 1
            while step < len(at[node]):
                edge = at[node][step]
                step += 1
                far = edge.other(node)
                if edge.index == came or far == node:
                    continue
                if order[far] < 0:
                    stack.append((node, came, step))
                    stack.append((far, edge.index, 0))
                    break
                low[node] = min(low[node], order[far])
            else:
                if came >= 0:
                    parent = network.edges[came].other(node)
                    low[parent] = min(low[parent], low[node])
                    if low[node] > order[parent]:
                        bridges.append(came)
    return frozenset(bridges)


_NOTHING: dict[int, float] = {}


class _Sweep:
    """Carry the flow over the bridges, first towards the roots, then away from them."""

    def __init__(
        self, network: Network, at: Neighbours, block: list[int], bridges: frozenset[int], supply: list[float]
    ) -> None:
        self._network = network
        self._at = at
        self._block = block
        self._bridges = bridges
        self._supply = supply
        self._members: dict[int, list[int]] = {}
        for node, root in enumerate(block):
            self._members.setdefault(root, []).append(node)
        # What comes over each bridge to its end at a node, where anything does: node -> edge -> ampere.
        self._coming: dict[int, dict[int, float]] = {}
        self.exposures: dict[int, Exposure] = {}

    def run(self, edges: list[int]) -> None:
        order, parents = self._tree_order()
        for root in reversed(order):
            bridge = parents[root]
            if bridge is not None:
                self._send(bridge, root)
        for root in order:
            for node, edge in self._bridges_of(root):
                if edge is not parents[root]:
                    self._send(edge, self._block[node])
        for index in edges:
            edge = self._network.edges[index]
            if index in self._bridges:
                self.exposures[index] = Exposure(self._arriving(edge, edge.a), self._arriving(edge, edge.b))
            else:
                ends = [self._flow_to(end, without=index) for end in (edge.a, edge.b)]
                self.exposures[index] = Exposure(ends[0], ends[1])

    def _tree_order(self) -> tuple[list[int], dict[int, Edge | None]]:
        """Return the blocks so that each stands after the block it hangs on, and the bridge it hangs by."""
        order: list[int] = []
        parents: dict[int, Edge | None] = {}
        for start in self._members:
            if start in parents:
                continue
            parents[start] = None
            waiting = [start]
            while waiting:
                root = waiting.pop()
                order.append(root)
                for node, edge in self._bridges_of(root):
                    far = self._block[edge.other(node)]
                    if far not in parents:
                        parents[far] = edge
                        waiting.append(far)
        return order, parents

    def _bridges_of(self, root: int) -> list[tuple[int, Edge]]:
        return [(node, edge) for node in self._members[root] for edge in self._at[node] if edge.index in self._bridges]

    def _send(self, edge: Edge, root: int) -> None:
        """Work out what leaves a block over a bridge."""
        near = edge.a if self._block[edge.a] == root else edge.b
        far = edge.other(near)
        blocks = edge.kind is EdgeKind.DIODE and near == edge.b
        coming_a = 0.0 if blocks else min(edge.rating_a, self._arriving(edge, near))
        if coming_a:  # a branch that feeds nothing back is not looked at again
            self._coming.setdefault(far, {})[edge.index] = coming_a

    def _arriving(self, edge: Edge, node: int) -> float:
        """Return what reaches the end of a bridge at a node, the bridge taken out."""
        root = self._block[node]
        if len(self._members[root]) == 1:
            return self._given(node, without=edge.index)
        return self._flow_to(node, without=edge.index)

    def _given(self, node: int, without: int) -> float:
        total = self._supply[node]
        for index, coming_a in self._coming.get(node, _NOTHING).items():
            if index != without:
                total += coming_a
        return total

    def _flow_to(self, sink: int, without: int) -> float:
        """Return the maximum flow to a post inside its block, fed by its sources and its bridges."""
        members = self._members[self._block[sink]]
        given = {node: self._given(node, without) for node in members}
        inside = [
            edge
            for node in members
            for edge in self._at[node]
            if edge.a == node and edge.index not in self._bridges and edge.index != without and edge.a != edge.b
        ]

        def is_free(edge: Edge) -> bool:
            return math.isinf(edge.rating_a) and edge.kind is not EdgeKind.DIODE

        # Unlimited edges make their posts one; only where devices stand inside a loop is there more to do.
        place = groups(len(self._network.posts), ((e.a, e.b) for e in inside if is_free(e)))
        feeds: dict[int, float] = {}
        for node, amount in given.items():
            feeds[place[node]] = feeds.get(place[node], 0.0) + amount
        limited = [(place[e.a], place[e.b], e.rating_a) for e in inside if math.isfinite(e.rating_a)]
        one_way = [(place[e.a], place[e.b]) for e in inside if e.kind is EdgeKind.DIODE]
        return max_flow(feeds, limited, place[sink], one_way)


def max_flow(
    feeds: dict[int, float],
    limits: list[tuple[int, int, float]],
    sink: int,
    one_way: Sequence[tuple[int, int]] = (),
) -> float:
    """Return the most that can reach a node from the feeds, through limits that pass either way and through diodes."""
    own = feeds.get(sink, 0.0)
    limits = [limit for limit in limits if limit[0] != limit[1]]
    one_way = [pair for pair in one_way if pair[0] != pair[1]]
    if math.isinf(own) or not (limits or one_way) or not any(amount for node, amount in feeds.items() if node != sink):
        return own
    import networkx as nx  # 0.1 s to load, and few boats have a loop with a device in it

    graph: Any = nx.DiGraph()
    for node, amount in feeds.items():
        if node != sink and amount > 0:
            graph.add_edge("sources", node, **({} if math.isinf(amount) else {"capacity": amount}))
    for a, b, limit in limits:
        for start, end in ((a, b), (b, a)):
            before = graph.edges[start, end]["capacity"] if graph.has_edge(start, end) else 0.0
            graph.add_edge(start, end, capacity=before + limit)
    for start, end in one_way:
        graph.add_edge(start, end)
        graph.edges[start, end].pop("capacity", None)  # an edge without one is unlimited
    if sink not in graph or "sources" not in graph:
        return own
    try:
        return own + float(nx.maximum_flow_value(graph, "sources", sink))
    except nx.NetworkXUnbounded:  # a battery reaches it through diodes alone
        return math.inf
