"""Judge the monitoring shunt: what bypasses it, which way round it stands, what it bears."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.parts import Shunt
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import ampere
from checker.finding import Basis, Measure, Outcome, Span
from checker.network.metering import Metering, Unmetered


def _shunts(case: Case) -> Iterator[tuple[str, Shunt, Place]]:
    for device in case.boat.devices.values():
        if isinstance(device.part, Shunt):
            yield device.id, device.part, Place(device.id, device.at)


@check(
    title="Everything that draws on or charges the bank passes the shunt",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source: on one side of the shunt stands the bank alone",
    why="what bypasses the shunt is not counted: the monitor shows a charge that is not there",
    catalogue=("SHU-01", "SHU-02", "SHU-05", "SHU-06"),
    exemptions="the shunt's own instrument; other batteries of its bank; banks that it does not measure",
)
def shunt_bypass(case: Case) -> Iterator[Outcome]:
    """With the shunt taken out, is nothing but its bank still joined to the bank's posts on its side?

    Loads, charge sources, engine blocks, bonds and shields are looked for, in every switch
    state that can exist. Where engine blocks, bonds or shields were not recorded the answer is
    "not assessed", not "passed".
    """
    for name, _, place in _shunts(case):
        missing = _not_recorded(case)
        told_parts: set[str] = set()
        for state, studied in zip(case.studies.states.kept, case.studies.metering, strict=True):
            metering = next(m for m in studied if m.shunt == name)
            words = case.studies.state_words(state)
            for outcome in _bypasses(case, metering, words):
                if outcome.part not in told_parts:
                    told_parts.add(outcome.part)
                    yield outcome
        if told_parts:
            continue
        for fault, field, at in missing:
            yield shunt_bypass.not_assessed(case, Place(name, at), fault, field)
        if not missing:
            yield shunt_bypass.passed(case, place)


def _not_recorded(case: Case) -> list[tuple[str, str, Span]]:
    boat = case.boat
    missing = [] if boat.bonds_recorded else [("bonds were not recorded", "bonds", boat.at_bonds)]
    if boat.shields is None:
        missing.append(("shields were not recorded", "shields", boat.at_shields))
    for shield in boat.shields or ():
        if shield.joins is None:
            missing.append((f"where shield {shield.id} is joined was not recorded", "joins", shield.at))
    for engine in boat.engines:
        if engine.block is None and engine.mounting != "outboard":
            missing.append((f"the block of engine {engine.id} was not recorded", "block", engine.at))
    return missing


def _bypasses(case: Case, metering: Metering, words: str) -> Iterator[Outcome]:
    if metering.bypass:
        yield _round_it(case, metering, words)
    by_landing: dict[str, list[Unmetered]] = {}
    for item in metering.unmetered:
        by_landing.setdefault(item.landing, []).append(item)
    for landing, items in by_landing.items():
        yield _beside_it(case, metering.shunt, landing, items, words)


def _round_it(case: Case, metering: Metering, words: str) -> Outcome:
    """Tell a path from stud to stud; the part named is the one that does not belong there."""
    boat = case.boat
    shields = {s.id for s in boat.shields or ()}
    strange = [
        p for p in metering.bypass_parts if p in shields or (p in boat.conductors and boat.conductors[p].is_bond)
    ]
    wires = [p for p in metering.bypass_parts if p in boat.conductors]
    blamed = (strange or [p for p in wires if p not in metering.own_parts] or wires or [metering.shunt])[0]
    at = boat.conductors[blamed].at if blamed in boat.conductors else boat.devices[metering.shunt].at
    at = next((s.at for s in boat.shields or () if s.id == blamed), at)
    told = Told(
        fault=f"a second path leads round {metering.shunt} from the bank to the boat",
        remedy="take the path out: join it to the boat's side of the shunt only",
        path=metering.bypass,
        inputs=(("path", " ".join(metering.bypass_parts)),),
    )
    return shunt_bypass.found(case, Place(blamed, at, "", words), told)


MOST_NAMED = 3
"""What lands by one conductor is named up to this many; then the rest is counted."""


def _beside_it(case: Case, shunt: str, landing: str, items: list[Unmetered], words: str) -> Outcome:
    """Tell what lands on the bank's side by one conductor there; a load that lands alone at its own conductor."""
    boat, item = case.boat, items[0]
    many = len(items) > 1
    conductor = boat.conductors.get(landing if many else item.last)
    if conductor is not None:
        place = Place(conductor.id, conductor.at, conductor.circuit, words)
    else:
        device = boat.devices.get(item.device)
        at = device.at if device else next(s.at for s in boat.shields or () if s.id == item.device)
        place = Place(item.device, at, device.circuit if device else "", words)
    told = Told(
        fault=f"{_named(items)} {'are' if many else 'is'} joined to the bank's side of {shunt}"
        + (f" by {place.part}: their" if many else ": its")
        + " current is not measured",
        remedy=f"land {place.part if many else 'it'} on the boat's side, e.g. on {boat.reference}",
        path=item.path,
        inputs=(("path", " ".join(item.path)), *((("with", " ".join(i.device for i in items[1:])),) if many else ())),
    )
    return shunt_bypass.found(case, place, told)


def _named(items: list[Unmetered]) -> str:
    """Name what lands by one conductor: all of a few, the first of many."""
    names = [f"{item.what} {item.device}" for item in items]
    if len(names) <= MOST_NAMED + 1:
        return ", ".join(names[:-1]) + (" and " if names[1:] else "") + names[-1]
    return f"{', '.join(names[:MOST_NAMED])} and {len(names) - MOST_NAMED} more"


@check(
    title="The shunt stands beside its bank, the right way round",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="turned round, it counts charge as discharge; away from its bank, it counts something else",
    catalogue=("SHU-03",),
)
def shunt_direction(case: Case) -> Iterator[Outcome]:
    """Does the shunt's bank stud face the bank that it measures?"""
    for name, _, place in _shunts(case):
        metering = next(m for m in case.studies.metering[0] if m.shunt == name)
        bank = case.boat.devices[name].measures
        if metering.is_turned:
            told = Told(f"its stud sys faces bank {bank}, its stud bat the boat", "turn it round",
                        inputs=(("shunt", name),))  # fmt: skip
            yield shunt_direction.found(case, place, told)
        elif metering.other_bank:
            told = Told(
                f"its stud bat faces bank {metering.other_bank}, but it is to measure bank {bank}",
                f"write `measures: {metering.other_bank}`, or move it to the negative of bank {bank}",
                inputs=(("shunt", name), ("bank", bank)),
            )
            yield shunt_direction.found(case, place, told)
        elif not metering.is_beside_bank:
            told = Told(
                f"neither of its studs leads to bank {bank} without passing a load",
                "put it between the bank's negative and the negative bus, or name the bank that it measures",
                inputs=(("shunt", name), ("bank", bank)),
            )
            yield shunt_direction.found(case, place, told)
        else:
            yield shunt_direction.passed(case, place)


@check(
    title="The shunt bears the largest current of its bank",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; the maker's continuous and short-time figures",
    formula="|I| of the bank ≤ what the shunt bears for that long",
    why="an overloaded shunt drifts, then burns",
    catalogue=("SHU-04",),
)
def shunt_rating(case: Case) -> Iterator[Outcome]:
    """Is the current of the bank, in every operating condition, within what the shunt bears?

    A condition that lasts no longer than the shunt's short-time figure is held to that figure,
    any other to its continuous figure, or to its rating where none is given. Charging counts
    like drawing.
    """
    for name, part, place in _shunts(case):
        bank = case.boat.devices[name].measures
        currents = [c for c in case.studies.bank_currents if c.bank == bank]
        if not currents:
            yield shunt_rating.not_assessed(case, place, "no operating condition is written", "conditions")
        for current in currents:
            limit_a = _limit_a(part, current.short_time_s)
            at_most = " at most" if current.is_bound else ""
            told = Told(
                fault=f"bank {bank} carries{at_most} {ampere(current.current_a)} in condition {current.condition}, "
                f"but {part.id} bears {ampere(limit_a)}",
                remedy=f"a shunt that bears {ampere(current.current_a)}",
                inputs=(("current", ampere(current.current_a)), ("bears", ampere(limit_a))),
            )
            here = Place(f"{name} in {current.condition}", place.at)
            measure = Measure("current", current.current_a, limit_a, "A")
            yield shunt_rating.judge(case, here, measure, lambda told=told: told)  # type: ignore[misc]


def _limit_a(part: Shunt, short_time_s: float | None) -> float:
    if short_time_s is not None and part.short_time_a is not None and short_time_s <= (part.short_time_s or 0.0):
        return part.short_time_a
    return part.rating_a if part.continuous_a is None else part.continuous_a
