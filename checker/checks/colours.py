"""Judge the colours of conductors: green for bonding, no black negative beside AC, no change along a run."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Iterator

from checker.boat.hull import Conductor
from checker.checks.cables import named
from checker.checks.check import Case, Check, Place, Told, check
from checker.finding import Basis, Level, Outcome
from checker.limits.colour_rule import colour_rule

ENGINE_HARNESS = "engine-harness"
MAKERS_OWN = "in the engine maker's harness"


def _class_of(conductor: Conductor) -> str:
    return colour_rule().class_of(conductor.colour)


def _at_colour(conductor: Conductor) -> Place:
    return Place(conductor.id, conductor.at_colour, conductor.circuit)


def _uncoloured(case: Case, rule: Check, conductors: Iterable[Conductor]) -> Iterator[Outcome]:
    """Tell once that colours are not recorded, at the first of the conductors."""
    without = [conductor for conductor in conductors if not conductor.colour]
    if without:
        names = [conductor.id for conductor in without]
        fault = f"the colour of {len(names)} conductors is not recorded: {named(names)}"
        place = Place("colours", without[0].at_colour)
        yield rule.not_assessed(case, place, fault, "colour (of a branch: core_colours of its cable, or colours)")


@check(
    title="Green is for bonding and grounding conductors alone",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, colour tables (from memory)",
    why="in an emergency the wrong conductor is cut",
    catalogue=("LBL-01",),
    exemptions="conductors in the engine maker's harness; conductors with sleeves in their own colour at both ends",
)
def conductor_colour(case: Case) -> Iterator[Outcome]:
    """Is every bonding conductor green or green-yellow, and is nothing else?"""
    green = colour_rule().bonding
    conductors = case.boat.conductors.values()
    for conductor in conductors:
        if not conductor.colour:
            continue
        if conductor.is_bond is (_class_of(conductor) in green):
            yield conductor_colour.passed(case, _at_colour(conductor))
        elif conductor.is_colour_marked or conductor.role == ENGINE_HARNESS:
            note = "marked with sleeves" if conductor.is_colour_marked else MAKERS_OWN
            yield conductor_colour.passed(case, _at_colour(conductor), note)
        else:
            yield conductor_colour.found(case, _at_colour(conductor), _told_green(conductor))
    yield from _uncoloured(case, conductor_colour, conductors)


def _told_green(conductor: Conductor) -> Told:
    if conductor.is_bond:
        fault = f"a bonding conductor is {conductor.colour}, not {' or '.join(colour_rule().bonding)}"
        remedy = "replace it by a green one, or mark both ends with green sleeves (`colour_marked: true`)"
    else:
        fault = f"a current-carrying conductor is {conductor.colour}, the colour of bonding and grounding"
        remedy = (
            "replace it by one of another colour, or mark both ends with sleeves in its own colour "
            "(`colour_marked: true`)"
        )
    return Told(fault, remedy, inputs=(("colour", conductor.colour), ("bond", "yes" if conductor.is_bond else "no")))


@check(
    title="A DC negative is not black where AC is aboard",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, colour tables: yellow where AC is aboard (from memory)",
    why="it is taken for an AC live conductor, or an AC live conductor for it",
    level=Level.WARNING,
    catalogue=("LBL-02",),
    exemptions="conductors in the engine maker's harness; conductors with sleeves in their own colour at both ends",
    caution="a black conductor may carry AC: test before touching it",
)
def negative_colour(case: Case) -> Iterator[Outcome]:
    """On a boat with AC, is every return conductor another colour than black?"""
    boat = case.boat
    barred = colour_rule().not_negative_with_ac
    returns = [c for c in boat.conductors.values() if not c.is_bond and _is_return(case, c)]
    black = [c for c in returns if c.colour and _class_of(c) in barred]
    if boat.has_ac is None and black:
        names = named([c.id for c in black])
        fault = f"{names} return DC in {black[0].colour}, and whether AC is aboard is not recorded"
        yield negative_colour.not_assessed(case, Place("facts", boat.at_facts), fault, "ac_aboard")
    for conductor in returns:
        place = _at_colour(conductor)
        if not conductor.colour or (boat.has_ac is None and conductor in black):
            continue
        if conductor not in black or not boat.has_ac:
            yield negative_colour.passed(case, place, "" if boat.has_ac else "no AC is aboard")
        elif conductor.is_colour_marked or conductor.role == ENGINE_HARNESS:
            note = "marked with sleeves" if conductor.is_colour_marked else MAKERS_OWN
            yield negative_colour.passed(case, place, note)
        else:
            told = Told(
                fault=f"a DC negative is {conductor.colour} on a boat with AC aboard",
                remedy="replace it by a yellow one, or mark both ends with yellow sleeves (`colour_marked: true`)",
                inputs=(("colour", conductor.colour), ("AC", "aboard")),
            )
            yield negative_colour.found(case, place, told)
    if boat.has_ac:
        yield from _uncoloured(case, negative_colour, returns)


def _is_return(case: Case, conductor: Conductor) -> bool:
    usual, index = case.studies.usual, case.studies.network.index
    return usual.is_return(index[conductor.start]) and usual.is_return(index[conductor.end])


@check(
    title="A conductor's colour does not change along its run",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the next hand crosses the polarity",
    level=Level.WARNING,
    catalogue=("LBL-03",),
    exemptions="conductors in the engine maker's harness; conductors with sleeves that mark the change",
)
def colour_change(case: Case) -> Iterator[Outcome]:
    """Do the conductors of a circuit keep one colour, unless the change is marked?

    Judged together are all returns of a circuit, and those of its other conductors that meet
    at a post with no device between. Beyond a device a feed may take a function colour.
    """
    judged: list[Conductor] = []
    usage = Counter(
        (_is_return(case, c), _class_of(c)) for c in case.boat.conductors.values() if c.colour and not c.is_bond
    )
    for circuit in case.boat.circuits.values():
        own = [case.boat.conductors[name] for name in circuit.conductors]
        for run in _runs(case, [c for c in own if c.role != ENGINE_HARNESS]):
            judged += run
            yield from _judge_run(case, run, usage)
        for conductor in own:
            if conductor.role == ENGINE_HARNESS:
                yield colour_change.passed(case, _at_colour(conductor), MAKERS_OWN)
    yield from _uncoloured(case, colour_change, judged)


def _runs(case: Case, own: list[Conductor]) -> list[list[Conductor]]:
    """Return the conductors of a circuit that must look alike, two and more together."""
    returns = [c for c in own if _is_return(case, c)]
    runs: list[list[Conductor]] = []
    for conductor in (c for c in own if c not in returns):
        ends = {conductor.start, conductor.end}
        meeting = [run for run in runs if any(ends & {c.start, c.end} for c in run)]
        runs = [run for run in runs if run not in meeting] + [[c for run in meeting for c in run] + [conductor]]
    return [run for run in (returns, *runs) if len(run) > 1]


def _judge_run(case: Case, run: list[Conductor], usage: Counter[tuple[bool, str]]) -> Iterator[Outcome]:
    coloured = [c for c in run if c.colour]
    counts = Counter(_class_of(c) for c in coloured)
    if len(coloured) < 2:
        return
    side = _is_return(case, run[0])
    main = max(counts, key=lambda name: (counts[name], usage[side, name], name))
    for conductor in coloured:
        place = _at_colour(conductor)
        others = [c for c in coloured if _class_of(c) == main]
        if _class_of(conductor) == main:
            yield colour_change.passed(case, place)
        elif conductor.is_colour_marked:
            yield colour_change.passed(case, place, "marked with sleeves")
        else:
            told = Told(
                fault=f"is {conductor.colour}, and {named([c.id for c in others])} on the same run "
                f"{'is' if len(others) == 1 else 'are'} {others[0].colour}",
                remedy=f"replace it by one in {others[0].colour}, or mark the change with sleeves at both ends "
                "(`colour_marked: true`)",
                also_at=tuple(c.at_colour for c in others[:1]),
                inputs=(("colour", conductor.colour), ("run", main)),
            )
            yield colour_change.found(case, place, told)
