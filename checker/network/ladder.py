"""Lay out the protection as a ladder: from each bank or source down, every device with what it faces."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace

from checker.boat.hull import Boat
from checker.boat.parts import Overcurrent
from checker.network.coordination import Pair, curve_of
from checker.network.exposure import ExposureStudy
from checker.network.faults import FarEnd, FaultLevels
from checker.network.graph import EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import places


@dataclass(frozen=True, slots=True)
class Rung:
    """Hold one device on the ladder.

    `above` is the bank or the device over it; `serves` are the loads and sources behind it with
    no other device between, `protects` the conductors there. `selective_up_to_a` is None where
    nothing is asked or known.
    """

    depth: int
    device: str
    above: str
    rating_a: float
    part: str
    serves: tuple[str, ...]
    prospective_a: float
    interrupting_a: float | None
    far_post: str
    far_a: float
    opens_s: float | None
    selective_up_to_a: float | None
    behind_a: float
    is_alone: bool
    protects: tuple[str, ...] = ()


def build_ladder(
    boat: Boat,
    network: Network,
    potentials: Potentials,
    study: ExposureStudy,
    levels: FaultLevels | None,
    far_ends: Mapping[str, FarEnd],
    selectivity: Sequence[tuple[Pair, float | None, float, str]],
) -> tuple[Rung, ...]:
    """Return the rungs in the order they are read: each device, then what hangs under it."""
    region = places(network, potentials.state, (EdgeKind.DEVICE,))
    at: dict[int, list[tuple[str, int, int]]] = {}
    for index, exposure in study.exposures.items():
        edge = network.edges[index]
        if edge.kind is EdgeKind.DEVICE:
            for near, far, arriving in ((edge.a, edge.b, exposure.at_a), (edge.b, edge.a, exposure.at_b)):
                if arriving:
                    at.setdefault(region[near], []).append((edge.part, near, far))
    protected: dict[int, list[str]] = {}
    for index in study.exposures:
        if network.edges[index].kind is EdgeKind.CONDUCTOR:
            protected.setdefault(region[network.edges[index].a], []).append(network.edges[index].part)
    served: dict[int, list[str]] = {}
    for load in network.loads:
        served.setdefault(region[load.feed], []).append(load.device)
    for source in network.sources:
        served.setdefault(region[source.out], []).append(source.device)
    pairs = {(pair.upper, pair.lower): (pair, up_to, behind) for pair, up_to, behind, _ in selectivity}
    rungs: list[Rung] = []
    seen: set[str] = set()

    def hang(top: str, starts: Iterable[int]) -> None:
        waiting = [(1, top, name, far) for start in starts for name, _, far in _largest_last(boat, at.get(start, []))]
        while waiting:
            depth, above, name, far = waiting.pop()
            if name in seen:
                continue
            seen.add(name)
            rung = _rung(boat, network, depth, name, above, served.get(region[far], []), levels, far_ends, pairs)
            rungs.append(replace(rung, protects=tuple(sorted(protected.get(region[far], ())))))
            below = [row for row in at.get(region[far], []) if row[0] not in seen]
            waiting.extend((depth + 1, name, other, onward) for other, _, onward in _largest_last(boat, below))

    for bank in sorted({battery.bank for battery in network.batteries}):
        tops = {region[b.pos] for b in network.batteries if b.bank == bank and not potentials.is_return(b.pos)}
        hang(bank, sorted(tops, reverse=True))
    for source in network.sources:  # what no bank feeds: a controller's array, the far side of a converter
        hang(f"{source.device}.{source.post}", [region[source.out]])
    return tuple(rungs)


def _largest_last(boat: Boat, rows: list[tuple[str, int, int]]) -> list[tuple[str, int, int]]:
    """Sort devices so that the largest is taken first from the end, then by id."""
    return sorted(rows, key=lambda row: (-_part(boat, row[0]).rating_a, row[0]), reverse=True)


def _part(boat: Boat, device: str) -> Overcurrent:
    part = boat.devices[device].part
    assert isinstance(part, Overcurrent)
    return part


def _rung(
    boat: Boat,
    network: Network,
    depth: int,
    name: str,
    above: str,
    serves: list[str],
    levels: FaultLevels | None,
    far_ends: Mapping[str, FarEnd],
    pairs: Mapping[tuple[str, str], tuple[Pair, float | None, float]],
) -> Rung:
    part = _part(boat, name)
    far = far_ends.get(name)
    curve = curve_of(boat, boat.devices[name])
    pair, up_to_a, behind_a = pairs.get((above, name), (None, None, 0.0))
    opens_s = curve.latest_s(far.current_a) if far is not None and curve.is_known else None
    return Rung(
        depth=depth,
        device=name,
        above=above,
        rating_a=part.rating_a,
        part=part.id,
        serves=tuple(sorted(set(serves))),
        prospective_a=max(levels.largest_a(network.index[f"{name}.{end}"]) for end in part.posts) if levels else 0.0,
        interrupting_a=part.interrupting_a,
        far_post=far.post if far else "",
        far_a=far.current_a if far else 0.0,
        opens_s=None if opens_s is None or math.isnan(opens_s) else opens_s,
        selective_up_to_a=up_to_a,
        behind_a=behind_a,
        is_alone=pair is not None and not pair.has_branch,
    )
