"""Ask of each return conductor what a fault at a load could push through it.

A load that fails shorts its feed to its return. What comes back is then limited by the
largest single way from a bank to that load: the widest path, whose width is the smallest
device rating on it. One fault is assumed at a time.
"""

from __future__ import annotations

import heapq
import math
from dataclasses import dataclass

from checker.network.exposure import find_bridges
from checker.network.graph import EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import live_edges
from checker.network.walk import Neighbours, groups, neighbours

Sent = tuple[float, str, str]  # ampere, load, device
NOTHING: Sent = (0.0, "", "")


@dataclass(frozen=True, slots=True)
class ReturnExposure:
    """Hold the most that one failed load sends through a return conductor.

    `device` limits it on the way to `load`. `is_in_loop`: other returns run beside, and only a
    solved network could tell the share.
    """

    current_a: float
    load: str
    device: str
    is_in_loop: bool


def study_returns(network: Network, potentials: Potentials) -> dict[str, ReturnExposure]:
    """Return for each conductor at the reference's potential what a failed load could send through it."""
    live = live_edges(network, potentials.state)
    feed = neighbours(network, [i for i in live if not potentials.is_return(network.edges[i].a)])
    back_edges = [i for i in live if potentials.is_return(network.edges[i].a)]
    back = neighbours(network, back_edges)
    bridges = find_bridges(network, back)
    worst: dict[str, ReturnExposure] = {}
    for bank in sorted({battery.bank for battery in network.batteries}):
        batteries = [battery for battery in network.batteries if battery.bank == bank]
        tops = [post for b in batteries for post in (b.pos, b.neg) if not potentials.is_return(post)]
        sinks = [post for b in batteries for post in (b.pos, b.neg) if potentials.is_return(post)]
        widths = _widths(network, feed, tops)
        sent: dict[int, Sent] = {}
        for name, start, end in _shortable(network):
            width = widths.get(start)
            if width and potentials.is_return(end):
                sent[end] = max(sent.get(end, NOTHING), (width[0], name, width[1]))
        _gather(network, back, bridges, sinks, sent, worst)
    return worst


def _shortable(network: Network) -> list[tuple[str, int, int]]:
    """Return what may short feed to return: loads, and sources seen from the bank's side."""
    loads = [(load.device, load.feed, load.back) for load in network.loads]
    return loads + [(source.device, source.out, source.back) for source in network.sources]


def _widths(network: Network, at: Neighbours, tops: list[int]) -> dict[int, tuple[float, str]]:
    """Return the width of the widest way from a bank to each post, and the device that limits it."""
    found: dict[int, tuple[float, str]] = {}
    waiting = [(-math.inf, "", top) for top in sorted(tops)]
    heapq.heapify(waiting)
    while waiting:
        negative, device, node = heapq.heappop(waiting)
        if node in found:
            continue
        found[node] = (-negative, device)
        for edge in at[node]:
            far = edge.other(node)
            if far not in found:
                if edge.rating_a < -negative:
                    heapq.heappush(waiting, (-edge.rating_a, edge.part, far))
                else:
                    heapq.heappush(waiting, (negative, device, far))
    return found


def _gather(
    network: Network,
    at: Neighbours,
    bridges: frozenset[int],
    sinks: list[int],
    sent: dict[int, Sent],
    worst: dict[str, ReturnExposure],
) -> None:
    """Carry what loads send towards the bank, and note the most over each conductor."""
    came: dict[int, int] = {}
    order: list[int] = []
    for sink in sinks:
        if sink in came:
            continue
        came[sink] = -1
        waiting = [sink]
        while waiting:
            node = waiting.pop()
            order.append(node)
            for edge in at[node]:
                far = edge.other(node)
                if far not in came:
                    came[far] = edge.index
                    waiting.append(far)
    carried = dict(sent)
    beyond: dict[int, Sent] = {}
    for node in reversed(order):
        amount = carried.get(node, NOTHING)
        index = came[node]
        if index >= 0:
            parent = network.edges[index].other(node)
            carried[parent] = max(carried.get(parent, NOTHING), amount)
            beyond[index] = amount
    block = groups(len(network.posts), ((e.a, e.b) for n in order for e in at[n] if e.index not in bridges))
    round_it = _round_rings(order, block, carried)
    for node in order:
        for edge in (e for e in at[node] if e.kind is EdgeKind.CONDUCTOR):
            in_loop = edge.index not in bridges
            amount = round_it.get(block[node], NOTHING) if in_loop else beyond.get(edge.index, NOTHING)
            if edge.part not in worst or amount[0] > worst[edge.part].current_a:
                worst[edge.part] = ReturnExposure(*amount, in_loop)


def _round_rings(order: list[int], block: list[int], carried: dict[int, Sent]) -> dict[int, Sent]:
    """Return for each ring what may go round either side of it: what comes in anywhere but nearest the bank."""
    nearest: set[int] = set()
    found: dict[int, Sent] = {}
    for node in order:
        ring = block[node]
        if ring in nearest:
            found[ring] = max(found.get(ring, NOTHING), carried.get(node, NOTHING))
        nearest.add(ring)
    return found
