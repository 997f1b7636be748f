"""Judge the potentials of the nets: shorts, disagreeing loops, loads on the wrong voltage or on none."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.parts import Bus, Source
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import plain
from checker.finding import Basis, Outcome
from checker.network.graph import LoadTie
from checker.network.potentials import SAME_V, Potentials


def _at(device: Device, state: str = "") -> Place:
    return Place(device.id, device.at, device.circuit, state)


@check(
    title="No battery is shorted",
    basis=Basis.PHYSICS,
    citation="Kirchhoff's voltage law",
    why="both posts of a battery on one net is a dead short: the commonest battery fire",
    catalogue=("BNK-02",),
)
def dead_short(case: Case) -> Iterator[Outcome]:
    """Are the two posts of every battery on different nets, in every switch state?"""
    yield from _conflicts(case, is_short=True)


@check(
    title="Batteries in a loop agree",
    basis=Basis.PHYSICS,
    citation="Kirchhoff's voltage law",
    why="a reversed battery, or 12 V beside 24 V, drives an unlimited current round the loop",
    catalogue=("BNK-02",),
)
def battery_loop(case: Case) -> Iterator[Outcome]:
    """Do the batteries of every loop give the same voltage each way round, in every switch state?"""
    yield from _conflicts(case, is_short=False)


def _conflicts(case: Case, *, is_short: bool) -> Iterator[Outcome]:
    rule = dead_short if is_short else battery_loop
    found: dict[str, Outcome] = {}
    for potentials in case.studies.potentials:
        for conflict in potentials.conflicts:
            device = case.boat.devices[conflict.battery]
            if conflict.is_short != is_short or conflict.battery in found:
                continue
            battery_v = next(b.voltage_v for b in case.studies.network.batteries if b.device == conflict.battery)
            told = Told(
                fault="its two posts are on one net" if is_short else
                f"gives {plain(battery_v)} V, but the rest of its loop says {plain(conflict.drawn_v)} V",
                remedy="correct the link: series links join a positive to a negative post, parallel links like to like",
                path=conflict.path,
                inputs=(("path", " ".join(conflict.path)),),
            )  # fmt: skip
            found[conflict.battery] = rule.found(case, _at(device, case.studies.state_words(potentials.state)), told)
    for battery in case.studies.network.batteries:
        yield found.get(battery.device) or rule.passed(case, _at(case.boat.devices[battery.device]))


def _has_conflict(case: Case) -> bool:
    return any(potentials.conflicts for potentials in case.studies.potentials)


def _loads(case: Case) -> Iterator[tuple[LoadTie, Device]]:
    for load in case.studies.network.loads:
        yield load, case.boat.devices[load.device]


def _known(case: Case, load: LoadTie) -> tuple[float, Potentials] | None:
    """Return the voltage across a load in the first state that fixes it."""
    for potentials in case.studies.potentials:
        volts = potentials.between(load.feed, load.back)
        if volts is not None:
            return volts, potentials
    return None


@check(
    title="A load stands across its own nominal voltage",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the load dies at once, or never works",
    catalogue=("LOD-02",),
)
def load_voltage(case: Case) -> Iterator[Outcome]:
    """Do the batteries, or the source that holds the net, give every load its nominal voltage, right way round?"""
    if _has_conflict(case):
        return
    for load, device in _loads(case):
        known = _known(case, load)
        if known is None:
            continue
        volts, potentials = known
        place = _at(device, case.studies.state_words(potentials.state))
        if abs(volts - load.voltage_v) < SAME_V:
            yield load_voltage.passed(case, place)
            continue
        swapped = " (feed and return are swapped)" if abs(volts + load.voltage_v) < SAME_V else ""
        told = Told(
            fault=f"made for {plain(load.voltage_v)} V, stands across {plain(volts)} V{swapped}",
            remedy="swap its two conductors" if swapped else f"feed it from a net of {plain(load.voltage_v)} V",
            inputs=(("made for", f"{load.voltage_v:g} V"), ("across", f"{volts:g} V")),
        )
        yield load_voltage.found(case, place, told)


@check(
    title="No load hangs on a part of a series bank",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the tapped battery is undercharged and the other overcharged",
    catalogue=("BNK-03",),
)
def bank_tap(case: Case) -> Iterator[Outcome]:
    """Does any load take its feed or return at the middle of a string of batteries?"""
    network = case.studies.network
    for potentials in case.studies.potentials[:1]:
        ups = {potentials.net[b.pos] for b in network.batteries}
        downs = {potentials.net[b.neg] for b in network.batteries}
        middles = ups & downs
        for load, device in _loads(case):
            nets = (potentials.net[load.feed], potentials.net[load.back])
            tapped = [net for net in nets if net in middles]
            place = _at(device, case.studies.state_words(potentials.state))
            if not tapped or _has_conflict(case):
                yield bank_tap.passed(case, place)
                continue
            told = Told(
                fault=f"it hangs on the middle of a series bank ({network.posts[tapped[0]]}'s net)",
                remedy="feed it by a converter across the whole bank, or fit an equaliser of its current",
                inputs=(("middle", network.posts[tapped[0]]),),
            )
            yield bank_tap.found(case, place, told)


@check(
    title="Every load has a feed and a return",
    basis=Basis.PHYSICS,
    citation="Kirchhoff's current law; 33 CFR § 183.425 speaks of the conductors of a circuit",
    why="either a cable is missing or its data are: every later answer about it is empty",
    catalogue=("RET-01", "SRC-12"),
)
def load_return(case: Case) -> Iterator[Outcome]:
    """Is every load and every source between two nets that batteries hold apart, in some switch state?

    A load whose two posts nothing ties to a battery floats: its return, or its feed, is not
    in the data.
    """
    ties = [(d, load.feed, load.back) for load, d in _loads(case)]
    ties += [(case.boat.devices[s.device], s.out, s.back) for s in case.studies.network.sources]
    split = _split_buses(case)
    seen: set[str] = set()
    for device, feed, back in ties:
        if device.id in seen:
            continue
        floating = _floating_end(case, device, feed, back)
        if floating is None:
            yield load_return.passed(case, _at(device))
            continue
        seen.add(device.id)
        post, word = floating
        if any(case.studies.usual.net[case.studies.network.index[bus]] == case.studies.usual.net[post] for bus in split):
            continue  # told once, at the bus that is not joined
        told = Told(
            fault=f"its {word} {case.studies.network.posts[post]} leads to no battery in any switch state",
            remedy=f"enter or pull its {word} conductor",
            inputs=(("floating", case.studies.network.posts[post]),),
        )
        yield load_return.found(case, _at(device), told)


def _floating_end(case: Case, device: Device, feed: int, back: int) -> tuple[int, str] | None:
    """Return the end that no battery's net reaches, and its name; None where the load is held."""
    ends = _battery_islands(case)
    for word, post in (("return", back), ("feed", feed)):
        if not any(p.island[post] in islands for p, islands in ends):
            if isinstance(device.part, Source) and word == "feed":
                continue  # an array feeds its controller, not a battery
            if any(p.island[post] == p.island[p.reference] for p, _ in ends):
                continue
            return post, word
    return None


def _battery_islands(case: Case) -> list[tuple[Potentials, set[int]]]:
    return [
        (potentials, {potentials.island[b.pos] for b in case.studies.network.batteries})
        for potentials in case.studies.potentials
    ]


@check(
    title="All return buses are one",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="equipment floats, and current sneaks back through shields",
    catalogue=("RET-07",),
)
def split_return(case: Case) -> Iterator[Outcome]:
    """Is every bus that loads return to joined to the DC reference, in some switch state?"""
    split = _split_buses(case)
    backs = {p for load in case.studies.network.loads for p in (load.back,)}
    usual, index = case.studies.usual, case.studies.network.index
    back_nets = {usual.net[post] for post in backs}
    for device in case.boat.devices.values():
        if not isinstance(device.part, Bus) or usual.net[index[device.id]] not in back_nets:
            continue
        if device.id not in split:
            yield split_return.passed(case, _at(device))
            continue
        told = Told(
            fault=f"loads return to it, but no conductor joins it to {case.boat.reference} or to any battery",
            remedy=f"join it to {case.boat.reference} by a return conductor for the sum of its loads",
            inputs=(("bus", device.id),),
        )
        yield split_return.found(case, _at(device), told)


def _split_buses(case: Case) -> list[str]:
    """Return buses that loads return to and that no battery's net reaches in any state."""
    index = case.studies.network.index
    backs = {load.back for load in case.studies.network.loads}
    split: list[str] = []
    for device in case.boat.devices.values():
        if not isinstance(device.part, Bus):
            continue
        post = index[device.id]
        held = any(p.island[post] in islands for p, islands in _battery_islands(case))
        reference = any(p.island[post] == p.island[p.reference] for p in case.studies.potentials)
        usual = case.studies.usual
        if not held and not reference and any(usual.net[back] == usual.net[post] for back in backs):
            split.append(device.id)
    return split
