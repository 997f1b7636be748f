"""Open each device and switch in turn, and ask whether loads drive what it was to make dead.

Current sneaks where a stretch that is cut off hangs, through loads, between two places of
different voltage. With everything closed a sound load stands between a live net and the
reference; only what does not, and what opens a return, can make such a path, so that only these
are opened. Diodes are not crossed.
"""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass

from checker.network.graph import EdgeKind, LoadTie, Network
from checker.network.potentials import SAME_V, Potentials
from checker.network.states import live_edges
from checker.network.walk import Neighbours, groups, neighbours, path_between

_OPENS = (EdgeKind.DEVICE, EdgeKind.CONTACT)

Step = tuple[LoadTie, int]
"""A load, and the post at which current enters it."""


@dataclass(frozen=True, slots=True)
class Sneak:
    """Hold a path through loads in series that current takes once a part is open.

    `blamed` is the load that does not belong there: one that does not stand between a live net and the
    reference, else the first that is driven from its return to its feed.
    """

    opened: str
    blamed: str
    loads: tuple[str, ...]
    path: tuple[str, ...]


def sneak_paths(network: Network, potentials: Potentials) -> tuple[Sneak, ...]:
    """Return the sneak paths of a state, one for each chain of loads, with the first part that opens it."""
    live = live_edges(network, potentials.state)
    strange = [tie for tie in network.loads if potentials.is_return(tie.feed) is potentials.is_return(tie.back)]
    found: dict[tuple[str, ...], Sneak] = {}
    for part in _worth_opening(network, potentials, strange):
        sneak = _opened(network, potentials, live, part, strange)
        if sneak is not None:
            found.setdefault(sneak.loads, sneak)
    return tuple(found[key] for key in sorted(found))


def _worth_opening(network: Network, potentials: Potentials, strange: list[LoadTie]) -> list[str]:
    """Return the parts that open a return, or that lie between a strange load and its battery."""
    live = live_edges(network, potentials.state)
    parts = {
        network.edges[i].part
        for i in live
        if network.edges[i].kind in _OPENS and potentials.is_return(network.edges[i].a)
    }
    if strange:
        at: Neighbours = neighbours(network, live)
        goals = [p for battery in network.batteries for p in (battery.pos, battery.neg)]
        for tie in strange:
            for end in (tie.feed, tie.back):
                path = path_between(at, end, goals) or ()
                parts |= {edge.part for edge in path if edge.kind in _OPENS}
    return sorted(parts)


def _opened(
    network: Network, potentials: Potentials, live: list[int], part: str, strange: list[LoadTie]
) -> Sneak | None:
    """Return the sneak path that one open part leaves, if there is one."""
    edges = (network.edges[i] for i in live)
    net = groups(len(network.posts), ((e.a, e.b) for e in edges if e.part != part or e.kind not in _OPENS))
    fixed = {net[post]: post for battery in network.batteries for post in (battery.pos, battery.neg)}
    given = {net[source.out] for source in network.sources} - fixed.keys()
    anchored = {potentials.net[post] for post in fixed.values()}
    at: dict[int, list[LoadTie]] = {}
    for tie in network.loads:
        for end in {net[tie.feed], net[tie.back]}:
            at.setdefault(end, []).append(tie)
    cut = {
        net[post] for tie in network.loads for post in (tie.feed, tie.back)
        if potentials.net[post] in anchored and net[post] not in fixed and net[post] not in given
    }  # fmt: skip
    tops = sorted(fixed.items(), key=lambda row: (-potentials.value_v[row[1]], row[1]))
    for start, post in tops:
        steps = _chain(net, at, start, fixed, given, cut, potentials, post)
        if steps:
            return _told(network, potentials, part, steps, strange)
    return None


def _chain(
    net: list[int],
    at: dict[int, list[LoadTie]],
    start: int,
    fixed: dict[int, int],
    given: set[int],
    cut: set[int],
    potentials: Potentials,
    post: int,
) -> list[Step]:
    """Follow loads from a live net over dead ones to a net of lower voltage; at least one of the dead was cut off."""
    came: dict[int, tuple[int, Step]] = {}
    waiting = deque([start])
    while waiting:
        here = waiting.popleft()
        for tie in at.get(here, ()):
            enters, leaves = (tie.feed, tie.back) if net[tie.feed] == here else (tie.back, tie.feed)
            far = net[leaves]
            if far == start or far in came or far in given:
                continue
            if far not in fixed:
                came[far] = (here, (tie, enters))
                waiting.append(far)
                continue
            lower_v = potentials.between(post, fixed[far])
            passed = _passed(came, start, here)
            if lower_v is not None and lower_v >= SAME_V and cut.intersection(passed):
                return [*(came[place][1] for place in reversed(passed)), (tie, enters)]
    return []


def _passed(came: dict[int, tuple[int, Step]], start: int, here: int) -> list[int]:
    """Return the dead nets from one back to the live net that the search began at."""
    found: list[int] = []
    while here != start:
        found.append(here)
        here = came[here][0]
    return found


def _told(network: Network, potentials: Potentials, part: str, steps: list[Step], strange: list[LoadTie]) -> Sneak:
    words: list[str] = []
    for tie, enters in steps:
        leaves = tie.back if enters == tie.feed else tie.feed
        words += [network.posts[enters], tie.device, network.posts[leaves]]
    backwards = [tie.device for tie, enters in steps if enters != tie.feed]
    out_of_place = [tie.device for tie, _ in steps if tie in strange]
    loads = tuple(tie.device for tie, _ in steps)
    return Sneak(part, (out_of_place or backwards or list(loads))[0], loads, tuple(dict.fromkeys(words)))
