"""Find the most that can flow through a bus: in by some of its ways and out by the others.

What can come in by a way is what the exposure study says arrives beyond it. What can go out
is found in the same manner with loads and batteries as the places where current ends.
"""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.boat.parts import Bus
from checker.network.exposure import ExposureStudy, flow_study
from checker.network.graph import Network
from checker.network.potentials import Potentials

MOST_BOTH_WAYS = 12


@dataclass(frozen=True, slots=True)
class BusFlow:
    """Hold the most that devices and sources let through a bus, in ampere, and what comes in by name."""

    bus: str
    through_a: float
    comes_in: tuple[tuple[str, float], ...]


def study_buses(boat: Boat, network: Network, potentials: Potentials, study: ExposureStudy) -> tuple[BusFlow, ...]:
    """Return the flow through every ungrounded bus in the state of the potentials."""
    buses = [
        network.index[d.id]
        for d in boat.devices.values()
        if isinstance(d.part, Bus) and not potentials.is_return(network.index[d.id])
    ]
    if not buses:
        return ()
    ends = [0.0] * len(network.posts)
    for load in network.loads:
        ends[load.feed] = math.inf
    for battery in network.batteries:
        for post in (battery.pos, battery.neg):
            if not potentials.is_return(post):
                ends[post] = math.inf
    taken = flow_study(network, list(study.exposures), ends)
    return tuple(_flow(network, study, taken, bus) for bus in buses)


def _flow(network: Network, study: ExposureStudy, taken: ExposureStudy, bus: int) -> BusFlow:
    ways: list[tuple[float, float]] = [(study.supply_a[bus], taken.supply_a[bus])]
    names: list[tuple[str, float]] = []
    for index in study.exposures:
        edge = network.edges[index]
        if bus not in (edge.a, edge.b) or edge.a == edge.b:
            continue
        far = edge.other(bus)
        coming = min(edge.rating_a, _at(study, index, far))
        going = min(edge.rating_a, _at(taken, index, far))
        ways.append((coming, going))
        if coming:
            names += [(edge.part, edge.rating_a)] if edge.rating_a <= coming else study.terms(edge, far)
    return BusFlow(network.posts[bus], _through(ways), tuple(sorted(set(names), key=lambda n: (-n[1], n[0]))))


def _at(study: ExposureStudy, index: int, node: int) -> float:
    exposure = study.exposures[index]
    return exposure.at_a if study.network.edges[index].a == node else exposure.at_b


def _through(ways: list[tuple[float, float]]) -> float:
    """Return the most over all divisions of the ways into those in and those out."""
    coming = sum(c for c, g in ways if c and not g)
    going = sum(g for c, g in ways if g and not c)
    both = [(c, g) for c, g in ways if c and g]
    if len(both) > MOST_BOTH_WAYS:
        return min(coming + sum(c for c, _ in both), going + sum(g for _, g in both))
    best = 0.0
    for choice in itertools.product((True, False), repeat=len(both)):
        inward = coming + sum(c for (c, _), is_in in zip(both, choice, strict=True) if is_in)
        outward = going + sum(g for (_, g), is_in in zip(both, choice, strict=True) if not is_in)
        best = max(best, min(inward, outward))
    return best
