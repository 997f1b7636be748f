"""Measure how much conductor lies ahead of the first overcurrent device.

A run starts where a current arrives that its conductors could not bear for long: at a battery
post, or where a conductor that is protected at its size meets a thinner one. It goes on over
all conductors that share the trouble, through buses, switches and mounts, which have no
length; several short pieces in a row add up. It ends at the line side of a device.
"""

from __future__ import annotations

import heapq
from collections.abc import Collection, Mapping
from dataclasses import dataclass

from checker.network.exposure import ExposureStudy
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import live_edges, places
from checker.network.walk import path_words

HAS_LENGTH_OR_OPENS = (EdgeKind.CONDUCTOR, EdgeKind.BOND, EdgeKind.DEVICE)


@dataclass(frozen=True, slots=True)
class Run:
    """Hold one unprotected length: where it starts, its conductors in order, the device it ends at.

    `device` is empty where no device stands at the end. `is_from_battery` tells that it starts
    at a post of a battery.
    """

    origin: str
    conductors: tuple[str, ...]
    length_m: float
    device: str
    is_from_battery: bool
    path: tuple[str, ...]


def unprotected_runs(
    network: Network,
    potentials: Potentials,
    study: ExposureStudy,
    allowed_a: Mapping[str, float],
    exempt: Collection[str],
) -> dict[str, Run]:
    """Return for each overexposed conductor the run that its far end closes.

    Args:
        network: The graph.
        potentials: Which tell the state.
        study: The exposure in that state.
        allowed_a: For each conductor the largest current it may be exposed to.
        exempt: Conductors that need no protection (a cranking motor's); lengths are counted
            from where others leave them.
    """
    walk = _Walk(network, potentials, study, allowed_a, exempt)
    return {edge.part: run for edge, run in walk.runs()}


class _Walk:
    def __init__(
        self,
        network: Network,
        potentials: Potentials,
        study: ExposureStudy,
        allowed_a: Mapping[str, float],
        exempt: Collection[str],
    ) -> None:
        self._network = network
        edges = [network.edges[i] for i in live_edges(network, potentials.state)]
        self._place = places(network, potentials.state, HAS_LENGTH_OR_OPENS, over_diodes=True)
        self._device_at: dict[int, str] = {}
        self._leaving: dict[int, list[tuple[Edge, int]]] = {}
        entered: set[int] = set()
        self._over: list[Edge] = []
        for edge in edges:
            if edge.kind is EdgeKind.DEVICE:
                for node in (edge.a, edge.b):
                    self._device_at.setdefault(self._place[node], edge.part)
            exposure = study.exposures.get(edge.index)
            if exposure is None or edge.part in exempt or edge.part not in allowed_a:
                continue
            for near, arriving in ((edge.a, exposure.at_a), (edge.b, exposure.at_b)):
                if arriving > allowed_a[edge.part] * (1 + 1e-9):
                    self._leaving.setdefault(self._place[near], []).append((edge, near))
                    entered.add(self._place[edge.other(near)])
                    self._over.append(edge)
        batteries = {post for b in network.batteries for post in (b.pos, b.neg) if not potentials.is_return(post)}
        self._battery_places = {self._place[post]: network.posts[post] for post in sorted(batteries, reverse=True)}
        freed = {self._place[node] for e in edges if e.part in exempt for node in (e.a, e.b)}
        self._origins = sorted(
            place for place in self._leaving
            if place in self._battery_places or place in freed or place not in entered
        )  # fmt: skip

    def runs(self) -> list[tuple[Edge, Run]]:
        """Return each overexposed conductor with its worst run."""
        worst: dict[str, tuple[Edge, Run]] = {}
        for origin in self._origins:
            for edge, run in self._from(origin):
                known = worst.get(edge.part)
                if known is None or _weight(run) > _weight(known[1]):
                    worst[edge.part] = (edge, run)
        for edge in self._over:
            if edge.part not in worst:  # only reached in a ring: no start can be told, so nothing is ahead of it
                run = Run(self._network.posts[edge.a], (edge.part,), edge.length_m, "", False, (edge.part,))
                worst[edge.part] = (edge, run)
        return [worst[part] for part in sorted(worst)]

    def _from(self, origin: int) -> list[tuple[Edge, Run]]:
        """Walk from one start over all it leads to, nearest first."""
        start = self._network.index.get(self._battery_places.get(origin, ""), origin)
        is_battery = origin in self._battery_places
        found: list[tuple[Edge, Run]] = []
        done: set[int] = set()
        # The count parts two conductors side by side of one length, which cannot be ordered themselves.
        waiting: list[tuple[float, int, int, tuple[Edge, ...]]] = [(0.0, origin, 0, ())]
        while waiting:
            length_m, place, _, path = heapq.heappop(waiting)
            if place in done:
                continue
            done.add(place)
            for edge, near in self._leaving.get(place, ()):
                far = self._place[edge.other(near)]
                trail = (*path, edge)
                total_m = length_m + edge.length_m
                # A fuse that sits on another battery's post is no end: what lies before it is not behind it.
                device = "" if far in self._battery_places else self._device_at.get(far, "")
                found.append((edge, self._run(start, is_battery, trail, total_m, device)))
                if far not in done:
                    heapq.heappush(waiting, (total_m, far, len(found), trail))
        return found

    def _run(self, start: int, is_battery: bool, trail: tuple[Edge, ...], length_m: float, device: str) -> Run:
        names = tuple(edge.part for edge in trail)
        return Run(
            origin=self._network.posts[start],
            conductors=names,
            length_m=length_m,
            device=device,
            is_from_battery=is_battery,
            path=_words(self._network, start, trail, self._place),
        )


def _weight(run: Run) -> tuple[bool, float]:
    """Order the runs that one conductor closes: in a ring it is walked both ways, and only one way ends at a device."""
    return (bool(run.device), run.length_m)


def _words(network: Network, start: int, trail: tuple[Edge, ...], place: list[int]) -> tuple[str, ...]:
    """Tell a run as the posts and conductors it passes; posts that are mounted on each other once."""
    words: list[str] = [network.posts[start]]
    here = place[start]
    for edge in trail:
        near = edge.a if place[edge.a] == here else edge.b
        if network.posts[near] != words[-1]:
            words.append(network.posts[near])
        words += list(path_words(network, near, [edge])[1:])
        here = place[edge.other(near)]
    return tuple(words)
