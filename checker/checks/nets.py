"""Judge the potentials of the nets: shorts, disagreeing loops, loads on the wrong voltage or on none."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.parts import Bus
from checker.checks.check import Case, Place, Told, at_conductor, check
from checker.checks.words import plain
from checker.finding import Basis, Level, Outcome
from checker.network.graph import EdgeKind, LoadTie
from checker.network.potentials import SAME_V, Potentials
from checker.network.sensing import array_strings


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
    formula="Σ V round a loop = 0",
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


def _sound_states(case: Case) -> list[Potentials]:
    """Return the states whose batteries agree: only they have voltages to speak of."""
    return [potentials for potentials in case.studies.potentials if not potentials.conflicts]


NO_VOLTAGE = ("batteries disagree in every switch state, so that no net has a voltage", "the battery links")


def _loads(case: Case) -> Iterator[tuple[LoadTie, Device]]:
    for load in case.studies.network.loads:
        yield load, case.boat.devices[load.device]


def _known(case: Case, load: LoadTie) -> tuple[float, Potentials] | None:
    """Return the voltage across a load in the first sound state that fixes it."""
    for potentials in _sound_states(case):
        volts = potentials.between(load.feed, load.back)
        if volts is not None:
            return volts, potentials
    return None


@check(
    title="A load stands across its own nominal voltage",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="U = potential of the feed net − potential of the return net",
    why="the load dies at once, or never works",
    catalogue=("LOD-02",),
)
def load_voltage(case: Case) -> Iterator[Outcome]:
    """Do the batteries, or the source that holds the net, give every load its nominal voltage, right way round?"""
    for load, device in _loads(case):
        known = _known(case, load)
        if not _sound_states(case):
            yield load_voltage.not_assessed(case, _at(device), *NO_VOLTAGE)
            continue
        if known is None:
            continue  # it floats, which is told by the check of feeds and returns
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
    for potentials in _sound_states(case)[:1]:
        ups = {potentials.net[b.pos] for b in network.batteries}
        downs = {potentials.net[b.neg] for b in network.batteries}
        middles = ups & downs
        for load, device in _loads(case):
            nets = (potentials.net[load.feed], potentials.net[load.back])
            tapped = [net for net in nets if net in middles]
            place = _at(device, case.studies.state_words(potentials.state))
            if not tapped:
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
    ties = [(d, load.feed, load.back, False) for load, d in _loads(case)]
    ties += [(case.boat.devices[s.device], s.out, s.back, True) for s in case.studies.network.sources]
    split = _split_buses(case)
    seen: set[str] = set()
    for device, feed, back, is_source in ties:
        if device.id in seen:
            continue
        floating = _floating_end(case, device, feed, back, is_source=is_source)
        if floating is None:
            yield load_return.passed(case, _at(device))
            continue
        seen.add(device.id)
        post, word = floating
        if any(
            case.studies.usual.net[case.studies.network.index[bus]] == case.studies.usual.net[post] for bus in split
        ):
            continue  # told once, at the bus that is not joined
        told = Told(
            fault=f"its {word} {case.studies.network.posts[post]} leads to no battery in any switch state",
            remedy=f"enter or pull its {word} conductor",
            inputs=(("floating", case.studies.network.posts[post]),),
        )
        yield load_return.found(case, _at(device), told)


def _floating_end(case: Case, device: Device, feed: int, back: int, *, is_source: bool) -> tuple[int, str] | None:
    """Return the end of a load or source that floats, and its name; None where it is held.

    It is held in a state in which batteries tie its two ends together, or in which something
    else hangs between the same two nets: an array and its controller, a load on an isolated
    converter. Arrays in series are held by the controller that they feed as one. What a
    converter's own input and output share holds neither.
    """
    network = case.studies.network
    others = (
        [(tie.feed, tie.back) for tie in network.loads if tie.device != device.id]
        if is_source
        else [(tie.out, tie.back) for tie in network.sources if tie.device != device.id]
    )
    for potentials in case.studies.potentials:
        if potentials.battery_island[feed] == potentials.battery_island[back]:
            return None
        nets = (potentials.net[feed], potentials.net[back])
        if any((potentials.net[a], potentials.net[b]) == nets for a, b in others):
            return None
    if _is_in_row(case, feed, back):
        return None
    for word, post in (("return", back), ("feed", feed)):
        if not _is_anchored(case, post):
            return post, word
    return back, "return"


def _is_in_row(case: Case, feed: int, back: int) -> bool:
    """Tell whether two posts are those of an array in a row that feeds a controller, or of that input."""
    network = case.studies.network
    for potentials in case.studies.potentials:
        for tie in network.loads:
            rows = array_strings(network, potentials, tie) if tie.is_input else ()
            held = {(source.out, source.back) for row in rows for source in row}
            if (feed, back) in held or (rows and (feed, back) == (tie.feed, tie.back)):
                return True
    return False


def _is_anchored(case: Case, post: int) -> bool:
    """Tell whether a battery or the DC reference is on the island of a post, in some state."""
    network = case.studies.network
    for potentials in case.studies.potentials:
        anchors = {potentials.battery_island[b.pos] for b in network.batteries}
        if potentials.battery_island[post] in anchors | {potentials.battery_island[network.reference]}:
            return True
    return False


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
    index, usual = case.studies.network.index, case.studies.usual
    backs = {usual.net[load.back] for load in case.studies.network.loads}
    # A net that a source returns to as well is the return of that source, and not split off.
    own = {usual.net[source.back] for source in case.studies.network.sources}
    split: list[str] = []
    for device in case.boat.devices.values():
        is_return_bus = isinstance(device.part, Bus) and usual.net[index[device.id]] in backs - own
        if is_return_bus and not _is_anchored(case, index[device.id]):
            split.append(device.id)
    return split


@check(
    title="No live conductor hangs in the air",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="a live end that leads to nothing is forgotten, and shorts one day",
    level=Level.WARNING,
)
def loose_end(case: Case) -> Iterator[Outcome]:
    """Does every live conductor lead to something at both ends?

    What an option leaves behind when it takes a load away is found here: a conductor that a
    battery or source reaches, with an end on a bus or stud at which nothing else is.
    """
    network, usual = case.studies.network, case.studies.usual
    exposures = case.studies.exposures[0].exposures
    busy: dict[int, int] = {}
    for edge in network.edges:
        for post in (edge.a, edge.b):
            busy[post] = busy.get(post, 0) + 1
    for edge in network.edges:
        if edge.kind is not EdgeKind.CONDUCTOR or usual.is_return(edge.a) or edge.index not in exposures:
            continue
        conductor = case.boat.conductors[edge.part]
        where = at_conductor(conductor, conductor.at)
        ends = [post for post in (edge.a, edge.b) if busy[post] == 1 and _is_bus(case, post)]
        if not ends or not exposures[edge.index].worst_a:
            yield loose_end.passed(case, where)
            continue
        told = Told(
            fault=f"it is live, and on {network.posts[ends[0]]} there is nothing else",
            remedy="take it out, or enter what it feeds",
            inputs=(("end", network.posts[ends[0]]),),
        )
        yield loose_end.found(case, where, told)


def _is_bus(case: Case, post: int) -> bool:
    device = case.boat.device_of(case.studies.network.posts[post])
    return device is not None and isinstance(device.part, Bus)
