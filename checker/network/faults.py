"""Find the fault currents: the largest at every post, the smallest at the far end of each device's stretch.

With the network factorised, the resistance that a fault sees between two posts is that of
Thévenin's theorem: R = Zff + Zgg − 2·Zfg, and I = E/R. Charge sources are added at their
greatest output where a fault is largest, and left out where it is smallest.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass

from checker.network.exposure import ExposureStudy
from checker.network.flow import Grid
from checker.network.graph import BatteryTie, Edge, EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import SwitchState, leading_to, places, places_beyond
from checker.network.walk import Neighbours, neighbours

OPENING = (EdgeKind.DEVICE,)


class FaultLevels:
    """Hold the largest prospective current at every post in one state: cold copper, full batteries."""

    def __init__(self, grid: Grid, potentials: Potentials) -> None:
        self._grid = grid
        self._potentials = potentials
        network = grid.network
        self._level = [0.0] * len(network.posts)
        self._bottom = [""] * len(network.posts)
        asked: dict[int, tuple[Grid, list[int]]] = {}
        for post in range(len(network.posts)):
            if not potentials.returns[post]:
                feeding = grid.feeding(post)
                asked.setdefault(id(feeding), (feeding, []))[1].append(post)
        for feeding, posts in asked.values():
            self._find(feeding, posts)
            if feeding is not grid:  # a weak fault may leave a diode blocking that would draw the voltage down
                self._find(grid, posts)
        self._charging = self._charging_by_net()

    def _find(self, grid: Grid, posts: list[int]) -> None:
        network, potentials = grid.network, self._potentials
        own = grid.factor.own_resistance()
        rest = grid.at_rest_v
        for tie in _bottoms(grid, potentials):
            ground = grid.place[tie.neg]
            unit = [0.0] * len(network.posts)
            unit[ground] = 1.0
            column = grid.factor.solve(unit)
            for post in posts:
                place = grid.place[post]
                if grid.island[place] != grid.island[ground]:
                    continue
                ohm = own[place] + own[ground] - 2 * column[place]
                volts = abs(rest[place] - rest[ground])
                if ohm > 0 and volts / ohm > self._level[post]:
                    self._level[post] = volts / ohm
                    self._bottom[post] = network.posts[tie.neg]

    def _charging_by_net(self) -> dict[int, float]:
        total: dict[int, float] = {}
        for source in self._grid.network.sources:
            for net in places_beyond(self._grid.network, self._potentials.net, [self._potentials.net[source.out]]):
                total[net] = total.get(net, 0.0) + source.max_a
        return total

    def largest_a(self, post: int) -> float:
        """Return the largest current that a fault from a post to a bank's lowest post can draw, A."""
        level = self._level[post]
        return level + self._charging.get(self._potentials.net[post], 0.0) if level else 0.0

    def batteries(self, post: int) -> tuple[str, ...]:
        """Return the batteries whose net feeds a post, through diodes too."""
        network, net = self._grid.network, self._potentials.net
        feeding = {net[post]} | {net[network.edges[i].a] for i in leading_to(network, net, [net[post]])}
        # A battery that stands lower in a string feeds what the top of its bank does.
        banks = {tie.bank for tie, _ in self._grid.cells if net[tie.pos] in feeding}
        return tuple(
            tie.device for tie, _ in self._grid.cells
            if tie.bank in banks or {net[tie.pos], net[tie.neg]} & feeding
        )  # fmt: skip


def _bottoms(grid: Grid, potentials: Potentials) -> list[BatteryTie]:
    """Return one battery of each distinct lowest post of a bank."""
    found: dict[int, BatteryTie] = {}
    for tie, _ in grid.cells:
        if potentials.returns[tie.neg]:
            found.setdefault(grid.place[tie.neg], tie)
    return [found[place] for place in sorted(found)]


@dataclass(frozen=True, slots=True)
class FarEnd:
    """Hold the smallest current through a device for a fault at the end of the stretch that it protects.

    `conductors` are those of the stretch on the way to the end.
    """

    device: str
    post: str
    current_a: float
    state: SwitchState
    conductors: tuple[str, ...]


def far_ends(grid: Grid, potentials: Potentials, study: ExposureStudy | None = None) -> dict[str, FarEnd]:
    """Return for each device the far end at which a fault draws least through it: hot copper, low batteries.

    The exposure in the same state, where it is given, tells where the whole fault current
    passes the device, so that it need not be solved for.
    """
    network = grid.network
    live = [e for e in (*grid.edges, *network.diodes) if not potentials.returns[e.a]]
    at = neighbours(network, [e.index for e in live])
    backs = {load.feed: load.back for load in network.loads} | {s.out: s.back for s in network.sources}
    region = places(network, potentials.state, OPENING)
    worst: dict[str, FarEnd] = {}
    for edge in live:
        if edge.kind is not EdgeKind.DEVICE:
            continue
        for end, conductors in _stretch(network, at, edge, region):
            back = backs.get(end, network.reference)
            is_all = study is not None and study.leads_all(edge, edge.b)
            current_a = _through(grid.feeding(end), edge, end, back, is_all=is_all)
            known = worst.get(edge.part)
            if current_a > 0 and (known is None or current_a < known.current_a):
                worst[edge.part] = FarEnd(edge.part, network.posts[end], current_a, potentials.state, conductors)
    return worst


def _stretch(
    network: Network, at: Neighbours, device: Edge, region: Sequence[int]
) -> list[tuple[int, tuple[str, ...]]]:
    """Return the ends of what a device protects on its load side, and the conductors on the way to each.

    An end is a post of a load or source, or one where conductors come to the line of another
    device or to a post with nothing beyond. A device side by side with this one ends nothing:
    what the two feed together is asked where it leaves them.
    """
    both_sides = {region[device.a], region[device.b]}
    ends: list[tuple[int, tuple[str, ...]]] = []
    seen = {device.a, device.b}
    waiting: list[tuple[int, tuple[str, ...]]] = [(device.b, ())]
    terminals = {load.feed for load in network.loads} | {source.out for source in network.sources}
    while waiting:
        node, conductors = waiting.pop()
        onward = [e for e in at[node] if e.kind not in OPENING and _leads_on(e, node) and e.other(node) not in seen]
        others = [e for e in at[node] if e.kind in OPENING and e.index != device.index]
        beside = [e for e in others if {region[e.a], region[e.b]} == both_sides]
        leaves = len(others) > len(beside)
        if conductors and not (beside and not leaves) and (node in terminals or leaves or not onward):
            ends.append((node, conductors))
        for edge in onward:
            far = edge.other(node)
            seen.add(far)
            step = (edge.part,) if edge.kind in (EdgeKind.CONDUCTOR, EdgeKind.BOND) else ()
            waiting.append((far, (*conductors, *step)))
    return ends


def _leads_on(edge: Edge, node: int) -> bool:
    """Tell whether current passes an edge from one of its posts."""
    return edge.kind is not EdgeKind.DIODE or node == edge.a


def _through(grid: Grid, device: Edge, end: int, back: int, *, is_all: bool) -> float:
    """Return the current through a device for a fault between two posts, 0 where no battery feeds it."""
    place = grid.place
    if grid.island[place[end]] != grid.island[place[back]] or place[end] == place[back]:
        return 0.0
    rest = grid.at_rest_v
    volts = rest[place[end]] - rest[place[back]]
    ohm = grid.factor.resistance_ohm(place[end], place[back])
    if ohm <= 0 or volts <= 0:
        return 0.0
    fault_a = volts / ohm
    own_ohm = grid.ohm(device)
    if own_ohm == 0 or is_all:
        return fault_a
    needed = [place[device.a], place[device.b]]
    answer = grid.factor.solve_at({place[end]: 1.0, place[back]: -1.0}, needed)
    drop = [rest[place[p]] - fault_a * answer[place[p]] for p in (device.a, device.b)]
    return (drop[0] - drop[1]) / own_ohm


def opening_s(points: Sequence[tuple[float, float]], multiple: float) -> float:
    """Return the time of a curve at a multiple of the rating: straight lines on log-log axes.

    Below the first point the device holds; above the last point the last time stays. A point
    at infinity holds up to the next one.
    """
    if not points or multiple < points[0][0] * (1 - 1e-12):
        return math.inf
    for (x0, t0), (x1, t1) in itertools.pairwise(points):
        if multiple <= x1 * (1 + 1e-12):
            if math.isinf(t0):
                return t1 if multiple >= x1 * (1 - 1e-12) else math.inf
            share = math.log(multiple / x0) / math.log(x1 / x0)
            return float(t0 * (t1 / t0) ** min(1.0, max(0.0, share)))
    return points[-1][1]
