"""Compare the opening times of devices that stand in series, and find what a band makes of a current.

A device is directly above another if it limits what arrives at the other's feeding side. It is
selective up to the current below which it cannot begin to open before the lower device has
certainly opened.
"""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass
from functools import lru_cache

from checker.boat.hull import Boat, Device
from checker.boat.parts import Overcurrent
from checker.network.exposure import ExposureStudy
from checker.network.faults import opening_s
from checker.network.graph import EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import places


@dataclass(frozen=True, slots=True)
class Curve:
    """Hold the band of one device in ampere and seconds; empty points where it has none."""

    rating_a: float
    early: tuple[tuple[float, float], ...]
    late: tuple[tuple[float, float], ...]

    @property
    def is_known(self) -> bool:
        """Tell whether the device has a band."""
        return bool(self.early)

    def earliest_s(self, current_a: float) -> float:
        """Return the earliest time at which the device may begin to open, s."""
        return opening_s(self.early, current_a / self.rating_a)

    def latest_s(self, current_a: float) -> float:
        """Return the time by which the device has opened for certain, s; infinite where it may hold."""
        return opening_s(self.late, current_a / self.rating_a)

    def corners_a(self) -> list[float]:
        """Return the currents at which the band bends."""
        return [multiple * self.rating_a for multiple, _ in self.early]


def curve_of(boat: Boat, device: Device) -> Curve:
    """Return the band of a device where it stands: in an engine space its rating is taken with the band's factor."""
    part = device.part
    assert isinstance(part, Overcurrent)
    band = part.band
    if band is None:
        return Curve(part.rating_a, (), ())
    factor = (band.engine_space_factor or 1.0) if boat.zones[device.zone].is_engine_space else 1.0
    return Curve(
        part.rating_a * factor,
        tuple((p.multiple, p.earliest_s) for p in band.points),
        tuple((p.multiple, p.latest_s) for p in band.points),
    )


@dataclass(frozen=True, slots=True)
class Pair:
    """Hold two devices in series: `upper` stands directly above `lower`, for a fault at `post`.

    `has_branch` is false where nothing else hangs between them: then the lower one guards
    nothing of its own that the upper does not, and selectivity is not asked for.
    """

    upper: str
    lower: str
    post: int
    has_branch: bool


def device_pairs(boat: Boat, network: Network, potentials: Potentials, study: ExposureStudy) -> tuple[Pair, ...]:
    """Return every pair of devices in series in the state of the potentials."""
    region = places(network, potentials.state, (EdgeKind.DEVICE,))
    busy = _busy(network, study, region)
    found: dict[tuple[str, str], Pair] = {}
    for index, exposure in study.exposures.items():
        edge = network.edges[index]
        if edge.kind is not EdgeKind.DEVICE:
            continue
        for near, far, arriving in ((edge.a, edge.b, exposure.at_a), (edge.b, edge.a, exposure.at_b)):
            if not arriving or math.isinf(arriving):  # what a battery feeds directly stands under no device
                continue
            for name, _ in study.terms(edge, near):
                is_device = name in boat.devices and isinstance(boat.devices[name].part, Overcurrent)
                if is_device and not _are_beside(network, region, name, edge.part):
                    has_branch = busy.get(region[near], 0) > 2
                    found.setdefault((name, edge.part), Pair(name, edge.part, far, has_branch))
    return tuple(found[key] for key in sorted(found))


def _are_beside(network: Network, region: list[int], first: str, second: str) -> bool:
    """Tell whether two devices lie side by side between the same two places: neither stands above the other."""
    ends = [
        {region[edge.a], region[edge.b]}
        for name in (first, second) for edge in network.edges_of[name] if edge.kind is EdgeKind.DEVICE
    ]  # fmt: skip
    return ends[0] == ends[1]


def _busy(network: Network, study: ExposureStudy, region: list[int]) -> dict[int, int]:
    """Count what hangs on each region: ends of devices, loads, batteries and sources."""
    count: dict[int, int] = {}
    for index in study.exposures:
        edge = network.edges[index]
        if edge.kind is EdgeKind.DEVICE:
            for node in (edge.a, edge.b):
                count[region[node]] = count.get(region[node], 0) + 1
    hanging = [load.feed for load in network.loads] + [source.out for source in network.sources]
    hanging += [post for battery in network.batteries for post in (battery.pos, battery.neg)]
    for node in hanging:
        count[region[node]] = count.get(region[node], 0) + 1
    return count


def selective_up_to_a(upper: Curve, lower: Curve, prospective_a: float) -> float:
    """Return the current up to which the lower device opens before the upper one begins to, A."""
    return min(prospective_a, _first_crossing(upper, lower))


@lru_cache(maxsize=4096)
def _first_crossing(upper: Curve, lower: Curve) -> float:
    """Return the smallest current at which the upper device may begin to open first, A; infinite where there is none.

    Both curves are straight on log-log axes between their corners, so that the first crossing
    lies on one stretch between two corners and is found there exactly.
    """
    start = min(lower.corners_a()[0], upper.corners_a()[0])
    before_a = 0.0
    for current_a in sorted({*lower.corners_a(), *upper.corners_a()}):
        if current_a < start:
            continue
        if _gap(upper, lower, current_a) < 0:
            return _crossing(upper, lower, before_a, current_a) if before_a else current_a
        before_a = current_a
    return math.inf


def _gap(upper: Curve, lower: Curve, current_a: float) -> float:
    """Return by how much, in the logarithm of time, the upper device waits longer; negative where it may be first."""
    late, early = lower.latest_s(current_a), upper.earliest_s(current_a)
    if math.isinf(early):
        return math.inf
    if math.isinf(late):
        return -math.inf
    return math.log(early) - math.log(late)


def _crossing(upper: Curve, lower: Curve, good_a: float, bad_a: float) -> float:
    """Return where the gap changes sign between two currents, by halving their ratio."""
    for _ in range(60):
        middle = math.sqrt(good_a * bad_a)
        if _gap(upper, lower, middle) >= 0:
            good_a = middle
        else:
            bad_a = middle
    return good_a


def _quick_from(curve: Curve, slow_a: float, quick_a: float, seconds: float) -> float:
    """Return the current from which on a device opens within a time: between a slow and a quick one."""
    for _ in range(60):
        middle = math.sqrt(slow_a * quick_a)
        if curve.latest_s(middle) > seconds:
            slow_a = middle
        else:
            quick_a = middle
    return quick_a


def withstand_ratio(
    curve: Curve, k2s2: float, low_a: float, high_a: float, valid_up_to_s: float
) -> tuple[float, float]:
    """Return the largest I²t/(k²S²) over a range of fault currents, and the current it occurs at.

    Only where the device has certainly opened within the time for which the adiabatic
    equation holds; slower openings are overloads, which the rating rule judges.
    """
    worst = (0.0, high_a)
    currents = [low_a, *(c for c in curve.corners_a() if low_a < c < high_a), high_a]
    # Within a stretch I²t rises or falls throughout; one that begins too slow counts from where it no longer is.
    currents += [
        _quick_from(curve, slow_a, quick_a, valid_up_to_s)
        for slow_a, quick_a in itertools.pairwise(currents)
        if curve.latest_s(slow_a) > valid_up_to_s >= curve.latest_s(quick_a)
    ]
    for current_a in currents:
        seconds = curve.latest_s(current_a)
        if seconds <= valid_up_to_s:
            worst = max(worst, (current_a**2 * seconds / k2s2, current_a))
    return worst
