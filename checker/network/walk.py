"""Walk the graph: neighbours over some of the edges, shortest paths, joined groups."""

from __future__ import annotations

import heapq
from collections import deque
from collections.abc import Iterable
from dataclasses import dataclass

from checker.network.graph import Edge, Network

Neighbours = list[list[Edge]]


def neighbours(network: Network, edges: Iterable[int]) -> Neighbours:
    """Return the edges at each node, of the given ones only; shape (posts,)."""
    at: Neighbours = [[] for _ in network.posts]
    for index in edges:
        edge = network.edges[index]
        at[edge.a].append(edge)
        if edge.b != edge.a:
            at[edge.b].append(edge)
    return at


def groups(size: int, pairs: Iterable[tuple[int, int]]) -> list[int]:
    """Return for each of `size` nodes the smallest node that it is joined to by the pairs."""
    parent = list(range(size))

    for pair in pairs:
        a, b = pair
        while parent[a] != a:
            parent[a] = a = parent[parent[a]]
        while parent[b] != b:
            parent[b] = b = parent[parent[b]]
        if a < b:
            parent[b] = a
        elif b < a:
            parent[a] = b
    for node in range(size):  # a parent is never larger than its child, so it is final by now
        parent[node] = parent[parent[node]]
    return parent


def path_between(
    at: Neighbours, start: int, goals: Iterable[int], without: frozenset[str] = frozenset()
) -> list[Edge] | None:
    """Return the edges of a path with the fewest edges, leaving out some parts; None if there is none."""
    wanted = set(goals)
    came: dict[int, Edge | None] = {start: None}
    waiting = deque([start])
    while waiting:
        node = waiting.popleft()
        if node in wanted:
            return _trace(came, node)
        for edge in at[node]:
            far = edge.other(node)
            if far not in came and edge.part not in without:
                came[far] = edge
                waiting.append(far)
    return None


@dataclass(frozen=True, slots=True)
class ShortestTree:
    """Hold the shortest ways from every post to the nearest of some goals.

    `cost` and `came` are by post; a post that no goal can be reached from is in neither.
    """

    cost: dict[int, tuple[float, int]]
    came: dict[int, Edge | None]

    def way(self, post: int) -> tuple[list[Edge], int]:
        """Return the edges from a post to its nearest goal, and that goal."""
        path: list[Edge] = []
        while (edge := self.came[post]) is not None:
            path.append(edge)
            post = edge.other(post)
        return path, post


def shortest_tree(at: Neighbours, goals: Iterable[int], weights: dict[int, float]) -> ShortestTree:
    """Find the shortest ways to the goals; an edge not in `weights` costs nothing.

    Equal ways are told apart by fewer edges, then by the order of the edges.
    """
    cost: dict[int, tuple[float, int]] = dict.fromkeys(goals, (0.0, 0))
    came: dict[int, Edge | None] = dict.fromkeys(cost)
    waiting = [(0.0, 0, -1, goal) for goal in sorted(cost)]
    done: set[int] = set()
    while waiting:
        length, steps, _, node = heapq.heappop(waiting)
        if node in done:
            continue
        done.add(node)
        for edge in at[node]:
            far = edge.other(node)
            offer = (length + weights.get(edge.index, 0.0), steps + 1)
            if far not in done and (far not in cost or offer < cost[far]):
                cost[far] = offer
                came[far] = edge
                heapq.heappush(waiting, (*offer, edge.index, far))
    return ShortestTree(cost, came)


def _trace(came: dict[int, Edge | None], node: int) -> list[Edge]:
    path: list[Edge] = []
    edge = came[node]
    while edge is not None:
        path.append(edge)
        node = edge.other(node)
        edge = came[node]
    return path[::-1]


def path_words(network: Network, start: int, path: Iterable[Edge]) -> tuple[str, ...]:
    """Tell a path as posts and parts in turn: BAT-S.pos, W030, SW-S.in, SW-S, SW-S.out."""
    words = [network.posts[start]]
    node = start
    for edge in path:
        node = edge.other(node)
        words += [edge.part, network.posts[node]]
    return tuple(words)
