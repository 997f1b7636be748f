"""Judge how conductors pass bulkheads, and what lies beside them in their ways."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Conductor, Way
from checker.checks.cables import each_cable, named
from checker.checks.check import Case, Place, Told, check
from checker.finding import Basis, Level, Outcome, Span

BARE = "bare"
NO_PASSAGE = "no-passage"
WORKMANSHIP = "workmanship"


@check(
    title="Conductors are guarded where they pass a bulkhead",
    basis=Basis.LAW,
    citation="33 CFR § 183.445(a)",
    why="a bare edge wears through the insulation: chafe starts more wiring fires than anything else",
    level=Level.WARNING,
    catalogue=("ZON-06",),
)
def passage_guard(case: Case) -> Iterator[Outcome]:
    """Is a grommet, gland or conduit recorded wherever conductors leave a zone?

    A conductor that comes through more than one zone passes a bulkhead: on each of its ways, or
    where it lies in none, by itself. The two cores of a branch cable are told once.
    """
    usual = case.boat.workmanship
    unknown: list[str] = []
    usually_bare: list[str] = []
    for place, passage, is_usual in _passages(case):
        if passage == "":
            unknown.append(place.part)
        elif passage == BARE and is_usual:
            usually_bare.append(place.part)
        elif passage == BARE:
            yield passage_guard.found(case, place, _told_bare("conductors pass a bulkhead here", place.part))
        else:
            note = "nothing is passed through" if passage == NO_PASSAGE else ""
            yield passage_guard.passed(case, place, note)
    if usually_bare:
        where = f"at {len(usually_bare)} places ({named(usually_bare)}) conductors pass a bulkhead"
        told = _told_bare(where, " ".join(usually_bare))
        yield passage_guard.found(case, Place(WORKMANSHIP, usual.at), told)
    if unknown:
        fault = f"what guards conductors at bulkheads is not recorded at {len(unknown)} places: {named(unknown)}"
        yield passage_guard.not_assessed(case, Place(WORKMANSHIP, usual.at), fault, "workmanship: passages")


def _passages(case: Case) -> Iterator[tuple[Place, str, bool]]:
    """Yield each place where conductors pass, what guards them, and whether the class's workmanship alone says so."""
    usual = case.boat.workmanship.passages

    def row(part: str, circuit: str, passage: str, at: Span, at_passage: Span) -> tuple[Place, str, bool]:
        return Place(part, at_passage, circuit), passage, passage == usual and at_passage == at

    crossing = [(name, wire) for name, wire in each_cable(case.boat) if len(wire.zones) > 1]
    used = {way for wire in case.boat.conductors.values() if len(wire.zones) > 1 for way in wire.ways}
    for way in case.boat.ways.values():
        if way.id in used:
            yield row(way.id, "", way.passage, way.at, way.at_passage)
    for name, wire in crossing:
        if not wire.ways or wire.at_passage != wire.at:
            yield row(name, wire.circuit, wire.passage, wire.at, wire.at_passage)


def _told_bare(where: str, part: str) -> Told:
    return Told(
        fault=f"{where} over a bare edge",
        remedy="fit a grommet, a gland or a conduit, and record it",
        inputs=(("passage", BARE), ("at", part)),
    )


@check(
    title="AC cores without a sheath lie apart from DC conductors",
    basis=Basis.FROM_MEMORY,
    citation="ISO 10133:2012 7.8 (from memory)",
    why="one chafe puts mains voltage on everything that the DC wiring reaches",
    catalogue=("ZON-09",),
    caution="AC kills: disconnect shore power, inverter and generator before opening a way",
)
def ac_apart(case: Case) -> Iterator[Outcome]:
    """Is there no way in which unsheathed AC cores lie beside unsheathed DC conductors?

    What AC lies in a way is its field `ac`, or the class's workmanship. Where no AC is aboard
    nothing is asked.
    """
    boat = case.boat
    unknown: list[str] = []
    for way in boat.ways.values():
        wires = [wire for wire in boat.conductors.values() if way.id in wire.ways]
        if not wires or (way.ac != BARE and boat.has_ac is False):
            continue
        if way.ac == "":
            unknown.append(way.id)
        elif way.ac == BARE:
            yield _beside_ac(case, way, [wire for wire in wires if not wire.cable.is_sheathed])
        else:
            yield ac_apart.passed(case, Place(way.id, way.at_ac))
    if unknown and boat.has_ac is None:
        fault = "whether AC is aboard is not recorded"
        yield ac_apart.not_assessed(case, Place("facts", boat.at_facts), fault, "ac_aboard")
    elif unknown:
        fault = f"what AC lies in {len(unknown)} ways is not recorded: {named(unknown)}"
        yield ac_apart.not_assessed(case, Place(WORKMANSHIP, boat.workmanship.at), fault, "workmanship: ac")


def _beside_ac(case: Case, way: Way, bare: list[Conductor]) -> Outcome:
    place = Place(way.id, way.at_ac)
    if not bare:
        return ac_apart.passed(case, place, "all DC conductors in it are sheathed")
    names = [wire.id for wire in bare]
    told = Told(
        fault=f"AC cores without a sheath lie in it beside unsheathed DC conductors: {named(names)}",
        remedy="lay the AC in sheathed cable (`ac: sheathed`), or in a way of its own",
        inputs=(("ac", way.ac), ("conductors", " ".join(names))),
    )
    return ac_apart.found(case, place, told)
