"""Find the nets and their voltages, with loads and sources taken out.

Batteries fix how far apart the potentials of their posts are; everything else that conducts
makes its posts equal. A loop that says two things at once, or a battery whose two posts are
one net, cannot be wired as drawn. Sources that hold a voltage (a solar array, an isolated
converter) fix a net only where no battery does.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

from checker.network.graph import BatteryTie, Network, SourceTie
from checker.network.states import SwitchState, live_edges, places
from checker.network.walk import neighbours, path_between, path_words

SAME_V = 0.5
"""Two potentials closer than this are one nominal voltage: 6 V steps are the smallest aboard."""


@dataclass(frozen=True, slots=True)
class Conflict:
    """Tell a battery that cannot be where it is: shorted, or in a loop that disagrees."""

    battery: str
    is_short: bool
    drawn_v: float
    path: tuple[str, ...]


@dataclass(frozen=True)
class Potentials:
    """Hold the net of each post and its voltage above the reference.

    `net` has shape (posts,): the number of the net. `value_v` has shape (posts,): volts above
    the root of the post's island. `island` has shape (posts,): posts of one island have a
    known voltage between them. `battery_island` is the same with no source taken into account.
    """

    state: SwitchState
    net: tuple[int, ...]
    island: tuple[int, ...]
    battery_island: tuple[int, ...]
    value_v: tuple[float, ...]
    reference: int
    conflicts: tuple[Conflict, ...]

    def between(self, first: int, second: int) -> float | None:
        """Return the voltage of the first post above the second, or None if nothing fixes it."""
        if self.island[first] != self.island[second]:
            return None
        return self.value_v[first] - self.value_v[second]

    def above_reference(self, post: int) -> float | None:
        """Return the voltage of a post above the DC reference, or None if nothing fixes it."""
        return self.between(post, self.reference)

    def is_return(self, post: int) -> bool:
        """Tell whether a post is at the reference's potential."""
        return self.returns[post]

    @cached_property
    def returns(self) -> list[bool]:
        """Return for each post whether it is at the reference's potential, shape (posts,)."""
        island, level = self.island[self.reference], self.value_v[self.reference]
        return [i == island and abs(v - level) < SAME_V for i, v in zip(self.island, self.value_v, strict=True)]


def study_potentials(network: Network, state: SwitchState) -> Potentials:
    """Find nets, islands and voltages in one switch state; states that close the same contacts share them."""
    key = ("potentials", state.closed)
    if key not in network.memo:
        network.memo[key] = _potentials(network, state)
    found: Potentials = network.memo[key]
    return found if found.state == state else replace(found, state=state)


def _potentials(network: Network, state: SwitchState) -> Potentials:
    live = live_edges(network, state)
    net = places(network, state, ())
    islands = _Islands()
    conflicts: list[Conflict] = []
    placed: list[BatteryTie] = []
    for battery in network.batteries:
        pos, neg = net[battery.pos], net[battery.neg]
        known = islands.between(pos, neg)
        if pos == neg:
            conflicts.append(Conflict(battery.device, True, 0.0, _loop(network, live, placed, battery)))
        elif known is not None and abs(known - battery.voltage_v) >= SAME_V:
            conflicts.append(Conflict(battery.device, False, known, _loop(network, live, placed, battery)))
        else:
            islands.tie(pos, neg, battery.voltage_v)
            placed.append(battery)
    _tie_over_diodes(network, net, islands)
    by_batteries = {number: islands.root(number)[0] for number in set(net)}
    anchored = {by_batteries[net[battery.pos]] for battery in network.batteries}
    for source in _held_last(network):
        # One whose output a battery holds and whose return nothing holds has lost its return: it fixes nothing.
        has_lost = by_batteries[net[source.out]] in anchored and by_batteries[net[source.back]] not in anchored
        if not has_lost and islands.between(net[source.out], net[source.back]) is None:
            islands.tie(net[source.out], net[source.back], source.voltage_v)
    roots = {number: islands.root(number) for number in set(net)}
    return Potentials(
        state=state,
        net=tuple(net),
        island=tuple(roots[number][0] for number in net),
        battery_island=tuple(by_batteries[number] for number in net),
        value_v=tuple(roots[number][1] for number in net),
        reference=network.reference,
        conflicts=tuple(conflicts),
    )


def _tie_over_diodes(network: Network, net: list[int], islands: _Islands) -> None:
    """Give a net that nothing but a diode joins to others their voltage; its drop is no nominal one."""
    for edge in network.diodes:
        if islands.between(net[edge.a], net[edge.b]) is None:
            islands.tie(net[edge.b], net[edge.a], 0.0)


def _held_last(network: Network) -> list[SourceTie]:
    """Return the sources in the order of their ids."""
    return sorted(network.sources, key=lambda source: (source.device, source.post))


def _loop(network: Network, live: list[int], placed: list[BatteryTie], battery: BatteryTie) -> tuple[str, ...]:
    """Tell the loop that a battery closes: over conductors, and over other batteries where needed."""
    at = neighbours(network, live)
    path = path_between(at, battery.pos, [battery.neg])
    if path is not None:
        return path_words(network, battery.pos, path)
    # The loop passes through other batteries: go from one to the next.
    steps: dict[int, tuple[str, ...]] = {battery.pos: (network.posts[battery.pos],)}
    waiting = [battery.pos]
    used: set[str] = set()
    while waiting:
        here = waiting.pop(0)
        last = path_between(at, here, [battery.neg])
        if last is not None:
            return (*steps[here][:-1], *path_words(network, here, last))
        for other in placed:
            for enter, leave in ((other.pos, other.neg), (other.neg, other.pos)):
                way = None if other.device in used else path_between(at, here, [enter])
                if way is not None:
                    used.add(other.device)
                    told = (*steps[here][:-1], *path_words(network, here, way), other.device, network.posts[leave])
                    steps[leave] = told
                    waiting.append(leave)
    return (battery.device,)


class _Islands:
    """Union-find of nets whose links carry a voltage; few nets are ever linked, so that no path is shortened."""

    def __init__(self) -> None:
        self._parent: dict[int, int] = {}
        self._above: dict[int, float] = {}

    def root(self, net: int) -> tuple[int, float]:
        """Return the root of a net and the net's voltage above it."""
        total = 0.0
        while net in self._parent:
            total += self._above[net]
            net = self._parent[net]
        return net, total

    def between(self, first: int, second: int) -> float | None:
        """Return the voltage of the first above the second if they are tied."""
        (root_a, volts_a), (root_b, volts_b) = self.root(first), self.root(second)
        return volts_a - volts_b if root_a == root_b else None

    def tie(self, upper: int, lower: int, voltage_v: float) -> None:
        """Say that the upper net stands `voltage_v` above the lower one; they must not be tied yet."""
        (root_a, volts_a), (root_b, volts_b) = self.root(upper), self.root(lower)
        if root_a != root_b:
            self._parent[root_a] = root_b
            self._above[root_a] = voltage_v + volts_b - volts_a
