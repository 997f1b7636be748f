"""Take the shunt out and see what is still connected to its bank.

What is still joined to the bank's posts on the shunt's side is not metered: it is named, with
the path that shows it. Loads and sources do not conduct here; shields, bonds and engine
blocks do.
"""

from __future__ import annotations

from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.boat.parts import Load, Metal, Shunt, Source
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.states import SwitchState, live_edges
from checker.network.walk import neighbours, path_between, path_words


@dataclass(frozen=True, slots=True)
class Unmetered:
    """Name a post that stays joined to the bank with the shunt out, what it is, and by which path.

    `last` is the conductor by which the post's device lands there; `landing` is the first part of
    the path that does not belong between bank and shunt: the one to move.
    """

    device: str
    what: str
    last: str
    path: tuple[str, ...]
    landing: str


@dataclass(frozen=True, slots=True)
class Metering:
    """Hold what one shunt meters in one switch state.

    `is_beside_bank`, `is_turned`: which stud the bank's own links reach; `other_bank` is another
    bank that the bank stud faces, if it does not face its own. `bypass` is a path
    from stud to stud beside the shunt, if there is one; then nothing else is named. `own_parts`
    are what leads from the bank stud to the bank.
    """

    shunt: str
    state: SwitchState
    is_beside_bank: bool
    is_turned: bool
    other_bank: str
    bypass: tuple[str, ...]
    bypass_parts: tuple[str, ...]
    unmetered: tuple[Unmetered, ...]
    own_parts: frozenset[str] = frozenset()


def study_metering(boat: Boat, network: Network, state: SwitchState) -> tuple[Metering, ...]:
    """Study every shunt aboard in one switch state."""
    return tuple(
        _metering(boat, network, state, device.id, device.measures)
        for device in boat.devices.values()
        if isinstance(device.part, Shunt)
    )


def _metering(boat: Boat, network: Network, state: SwitchState, shunt: str, bank: str) -> Metering:
    live = [i for i in live_edges(network, state) if network.edges[i].part != shunt or _is_mount(network.edges[i])]
    at = neighbours(network, live)
    bat, sys = (network.index[f"{shunt}.{post}"] for post in ("bat", "sys"))
    bank_posts = {post for b in network.batteries if b.bank == bank for post in (b.pos, b.neg)}
    bypass = path_between(at, bat, [sys])
    reaches_bat = path_between(at, bat, bank_posts) is not None
    reaches_sys = path_between(at, sys, bank_posts) is not None
    own = _own_parts(at, bat, sys, bank_posts)
    if bypass is not None:
        words, parts = path_words(network, bat, bypass), tuple(edge.part for edge in bypass)
        return Metering(shunt, state, reaches_bat or reaches_sys, False, "", words, parts, (), own)
    others = {post: b.bank for b in network.batteries if b.bank != bank for post in (b.pos, b.neg)}
    found = _unmetered(boat, network, at, bat, shunt, bank, own)
    # What draws and charges tells the boat's side: turned round, the bank stud has it; beside the
    # wrong bank, it does not.
    faced = "" if reaches_bat or found else _faced(at, bat, others)
    turned = reaches_sys and not reaches_bat and not faced
    found = () if turned or faced else found
    return Metering(shunt, state, reaches_bat or reaches_sys, turned, faced, (), (), found, own)


def _own_parts(at: list[list[Edge]], bat: int, sys: int, bank_posts: set[int]) -> frozenset[str]:
    """Return what leads from the bank stud to each post of the bank by a shortest way that does not meet the boat."""
    apart = [[edge for edge in edges if sys not in (edge.a, edge.b)] for edges in at]
    ways = (path_between(apart, bat, [post]) for post in sorted(bank_posts))
    return frozenset(edge.part for way in ways for edge in way or ())


def _faced(at: list[list[Edge]], bat: int, others: dict[int, str]) -> str:
    """Return the other bank whose posts the bank stud reaches, or an empty text."""
    path = path_between(at, bat, others)
    end = bat
    for edge in path or ():
        end = edge.other(end)
    return "" if path is None else others[end]


def _is_mount(edge: Edge) -> bool:
    return edge.kind is not EdgeKind.SHUNT


def _unmetered(
    boat: Boat, network: Network, at: list[list[Edge]], bat: int, shunt: str, bank: str, own: frozenset[str]
) -> tuple[Unmetered, ...]:
    """Name the loads, sources, metal parts and shields on the bank's side of the shunt."""
    found: list[Unmetered] = []
    joined = _reach(at, bat)
    for device in boat.devices.values():
        if shunt in (device.id, device.belongs_to) or not isinstance(device.part, (Load, Source, Metal)):
            continue
        what = {Load: "load", Source: "charge source", Metal: "metal part"}[type(device.part)]
        posts = [network.index[f"{device.id}.{p}" if p else device.id] for p in device.part.posts]
        landed = [post for post in posts if post in joined]
        if landed:
            path = path_between(at, bat, landed) or []
            last = path[-1].part if path else device.id
            landing = _landing(path, own, last)
            found.append(Unmetered(device.id, what, last, path_words(network, bat, path), landing))
    for shield in boat.shields or ():
        landed = [network.index[post] for post in shield.joins or () if network.index[post] in joined]
        if landed and not _is_of_known_device(boat, network, landed, found):
            path = path_between(at, bat, landed) or []
            words = path_words(network, bat, path)
            found.append(Unmetered(shield.id, "shield", shield.id, words, _landing(path, own, shield.id)))
    return tuple(found)


def _landing(path: list[Edge], own: frozenset[str], last: str) -> str:
    """Return the first part of a path that does not belong between bank and shunt."""
    return next((edge.part for edge in path if edge.part not in own), last)


def _is_of_known_device(boat: Boat, network: Network, posts: list[int], found: list[Unmetered]) -> bool:
    """Tell whether a shield hangs on a device that is named already; it then adds nothing."""
    named = {item.device for item in found}
    owners = [boat.device_of(network.posts[post]) for post in posts]
    return all(owner is not None and owner.id in named for owner in owners)


def _reach(at: list[list[Edge]], start: int) -> set[int]:
    seen = {start}
    waiting = [start]
    while waiting:
        for edge in at[node := waiting.pop()]:
            far = edge.other(node)
            if far not in seen:
                seen.add(far)
                waiting.append(far)
    return seen
