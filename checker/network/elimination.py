"""Solve a symmetric network of conductances: factorised once, solved for many right-hand sides.

A boat's network is nearly a tree, so that eliminating the post with the fewest neighbours
first makes almost no new entries: a factorisation costs a few operations a post, less than
loading a general library for linear algebra. The tests hold it against one.
"""

from __future__ import annotations

import heapq
from collections.abc import Iterable, Sequence
from functools import cached_property


class NotGroundedError(ValueError):
    """Some place has no conductance to the ground, so that its voltage is not defined."""


class Factor:
    """Hold G = L·D·Lᵀ of a conductance matrix whose grounded places are left out.

    Args:
        size: Number of places.
        links: (a, b, conductance in siemens) for each link; parallel ones add up.
        grounded: Places held at 0 V.

    Raises:
        NotGroundedError: If a place that has a link is not joined to a grounded one.
    """

    def __init__(self, size: int, links: Iterable[tuple[int, int, float]], grounded: Iterable[int]) -> None:
        self._size = size
        self._grounded = frozenset(grounded)
        leak = [0.0] * size  # conductance of each place to the ground
        beside: list[dict[int, float]] = [{} for _ in range(size)]
        for a, b, conductance in links:
            if a == b:
                continue
            if a not in self._grounded and b not in self._grounded:
                beside[a][b] = beside[a].get(b, 0.0) - conductance
                beside[b][a] = beside[b].get(a, 0.0) - conductance
            else:
                leak[a] += conductance
                leak[b] += conductance
        self._steps = _eliminate(leak, beside, self._grounded)

    def solve(self, injected_a: Sequence[float]) -> list[float]:
        """Return the voltages that injected currents make, V; both of shape (places,)."""
        x = list(injected_a)
        for node in self._grounded:
            x[node] = 0.0
        for node, _, links in self._steps:
            value = x[node]
            if value:
                for far, share in links:
                    x[far] -= share * value
        for node, pivot, links in reversed(self._steps):
            value = x[node] / pivot
            for far, share in links:
                value -= share * x[far]
            x[node] = value
        return x

    def solve_at(self, injected_a: dict[int, float], wanted: Iterable[int]) -> dict[int, float]:
        """Return the voltages at some places only, for currents injected at a few, V.

        A place's voltage needs those of the places it was still joined to when it was
        eliminated, and theirs in turn: a short chain in a network that is nearly a tree.
        """
        rank = self._rank
        values = self._forward(injected_a)
        found: dict[int, float] = {}
        for goal in wanted:
            chain = [goal]
            while chain:
                node = chain[-1]
                if node in found or node not in rank:
                    found.setdefault(node, 0.0)
                    chain.pop()
                    continue
                _, pivot, links = self._steps[rank[node]]
                missing = [far for far, _ in links if far not in found]
                if missing:
                    chain += missing
                    continue
                found[node] = values.get(node, 0.0) / pivot - sum(share * found[far] for far, share in links)
                chain.pop()
        return found

    def resistance_ohm(self, a: int, b: int) -> float:
        """Return the resistance between two places, ohm: e'·G⁻¹·e = Σ y²/D with L·y = e, e being 1 at a and -1 at b.

        A right-hand side touches only the places that its own is joined to in turn as they
        are eliminated.
        """
        if a == b:
            return 0.0
        values = self._forward({a: 1.0, b: -1.0})
        return sum(value * value / self._steps[self._rank[node]][1] for node, value in values.items())

    def _forward(self, injected_a: dict[int, float]) -> dict[int, float]:
        """Return y of L·y = e by place, of the places alone that a few injected currents touch."""
        rank, steps = self._rank, self._steps
        values = {node: amps for node, amps in injected_a.items() if node in rank}
        waiting = [rank[node] for node in values]
        heapq.heapify(waiting)
        while waiting:
            node, _, links = steps[heapq.heappop(waiting)]
            value = values[node]
            for far, share in links:
                if far in values:
                    values[far] -= share * value
                else:
                    values[far] = -share * value
                    heapq.heappush(waiting, rank[far])
        return values

    @cached_property
    def _rank(self) -> dict[int, int]:
        """Return the step at which each place was eliminated."""
        return {node: step for step, (node, _, _) in enumerate(self._steps)}

    def own_resistance(self) -> list[float]:
        """Return the resistance from each place to the ground, ohm, shape (places,).

        The diagonal of the inverse, found backwards over the steps of the elimination: each
        needs only entries between places that were still joined (Takahashi's equations).
        """
        inverse: dict[tuple[int, int], float] = {}
        own = [0.0] * self._size
        for node, pivot, links in reversed(self._steps):
            for far, _ in links:
                entry = 0.0
                for other, share in links:
                    entry -= share * (own[far] if other == far else inverse[_pair(other, far)])
                inverse[_pair(node, far)] = entry
            own[node] = 1.0 / pivot - sum(share * inverse[_pair(node, far)] for far, share in links)
        return own


def _pair(a: int, b: int) -> tuple[int, int]:
    return (a, b) if a < b else (b, a)


def _eliminate(
    leak: list[float], beside: list[dict[int, float]], grounded: frozenset[int]
) -> list[tuple[int, float, tuple[tuple[int, float], ...]]]:
    """Eliminate the places, fewest neighbours first; return each with its pivot and its shares.

    A pivot is reckoned as the sum of what leads away from its place, never as a difference: no
    digit is lost, and a place without a ground ends with a pivot of exactly 0.
    """
    steps: list[tuple[int, float, tuple[tuple[int, float], ...]]] = []
    joined = [node for node in range(len(beside)) if node not in grounded and (leak[node] or beside[node])]
    waiting = [(len(beside[node]), node) for node in joined]
    heapq.heapify(waiting)
    done = [False] * len(beside)
    while waiting:
        degree, node = heapq.heappop(waiting)
        if done[node] or degree != len(beside[node]):
            continue
        done[node] = True
        if degree == 1:  # nearly every place of a boat
            ((far, value),) = beside[node].items()
            pivot = leak[node] - value
            share = value / pivot
            steps.append((node, pivot, ((far, share),)))
            row = beside[far]
            del row[node]
            leak[far] -= share * leak[node]
            heapq.heappush(waiting, (len(row), far))
            continue
        links = sorted(beside[node].items())
        pivot = leak[node] - sum(value for _, value in links)
        if not pivot:
            raise NotGroundedError(f"place {node} is joined to no ground")
        shares = tuple((far, value / pivot) for far, value in links)
        steps.append((node, pivot, shares))
        for position, (far, share) in enumerate(shares):
            row = beside[far]
            del row[node]
            value = links[position][1]
            leak[far] -= share * leak[node]
            for other, other_share in shares[position + 1 :]:
                fill = row.get(other, 0.0) - other_share * value
                row[other] = fill
                beside[other][far] = fill
        for far, _ in links:
            heapq.heappush(waiting, (len(beside[far]), far))
    return steps
