"""Judge voltage drop, and the lengths it is reckoned with."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Circuit, Conductor
from checker.checks.check import Case, Place, Told, at_conductor, check
from checker.checks.drops import Drop, DropLimit, circuit_drop, drop_limit
from checker.checks.remedy import smallest_gauge
from checker.checks.words import ampere, cut_length, length, measured, percent
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.formulas import copper_temperature_c

LEAST_ROUTE_RATIO, MOST_ROUTE_RATIO = 0.6, 1.67
"""A measured length this far from its route is another way of counting, not another way of pulling."""
DOUBLE_TOLERANCE = 0.005
FREE_OF_SIZE = ("inside-housing", "resistance", "pigtail")
"""Roles whose conductors are no measure for the other way: their size says nothing of the circuit's."""

_DROP_CAUTION = (
    "reckoned with K = 10.75, which is copper at about 29 C; a conductor at 50 to 75 C drops 8 to 17 per cent more. "
    "Contacts and terminals are not in it"
)


@check(
    title="A circuit's own conductors keep the voltage drop",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11 (2008) 11.14.2.6, 3 % and 10 % groups; the federal rule has no limit",
    formula="E = Σ K·I·L/CM over the conductors out and back; E / nominal voltage ≤ 3 % or 10 %",
    why="lights go dim, electronics reset and motors stall, heat and trip late",
    catalogue=("CON-07", "CON-08"),
    caution=_DROP_CAUTION,
    per_set=True,
    needs=("drop",),
)
def voltage_drop(case: Case) -> Iterator[Outcome]:
    """Does a circuit alone lose no more than its group allows?

    The drop of the circuit's own conductors at the circuit's current, out and back along their
    real lengths and sizes, as a share of the nominal voltage: 3 % for the services that the
    limit set or the yard calls critical, 10 % for all others. Conductors in parallel share the
    current; a circuit that forks is reckoned along its longest way.
    """
    for circuit in case.boat.circuits.values():
        yield from _judge_drop(case, circuit, from_bank=False)


@check(
    title="A circuit keeps the voltage drop from the bank",
    basis=Basis.COMMON_PRACTICE,
    citation="limits of ABYC E-11 (2008) 11.14.2.6; that they hold from the bank is common practice, no source",
    formula="E = Σ K·I·L/CM over the circuit's own and the shared conductors; E / nominal voltage ≤ 3 % or 10 %",
    why="a branch that passes alone fails on the water, where the feeder has used up the allowance",
    catalogue=("CON-09",),
    caution=_DROP_CAUTION,
    per_set=True,
    needs=("drop",),
)
def voltage_drop_from_bank(case: Case) -> Iterator[Outcome]:
    """Does a circuit lose no more than its group allows, counted from the bank?

    As for the circuit alone, plus the shared conductors on the shortest way to its bank, each
    at the current that it is meant to carry. Cranking conductors on that way carry only the
    circuit's own current. The standard leaves open where the drop is counted from; the bank
    is the stricter reading.
    """
    for circuit in case.boat.circuits.values():
        way = case.studies.supply[circuit.id]
        if way.out or way.back:
            yield from _judge_drop(case, circuit, from_bank=True)


def _judge_drop(case: Case, circuit: Circuit, *, from_bank: bool) -> Iterator[Outcome]:
    rule = voltage_drop_from_bank if from_bank else voltage_drop
    limit = drop_limit(case, circuit)
    if limit is None:
        return
    conductors = [case.boat.conductors[name] for name in circuit.conductors if name in case.boat.conductors]
    at = conductors[0].at_size if len({c.at_size for c in conductors}) == 1 else circuit.at
    place = Place(circuit.id, at, circuit.id)
    drop = circuit_drop(case, circuit, from_bank=from_bank)
    if drop is None:
        yield rule.not_assessed(case, place, "its current is not written", "current")
        return
    assert case.limits.drop is not None
    copper_c = copper_temperature_c(case.limits.drop.k_ohm_cmil_per_ft)
    note = f"{limit.words}; copper at {copper_c:.0f} C"
    measure = Measure("drop", drop.fraction, limit.fraction, "")
    yield rule.judge(case, place, measure, lambda: _told_drop(case, circuit, drop, limit, from_bank), note)


def _told_drop(case: Case, circuit: Circuit, drop: Drop, limit: DropLimit, from_bank: bool) -> Told:
    where = "from the bank" if from_bank else "along its own conductors"
    conductors = [case.boat.conductors[name] for name in circuit.conductors]
    lost = f"loses {drop.volts:.3f} V of {drop.nominal_v:g} V at {ampere(circuit.current_a or 0)} {where}"
    told_fraction, _ = measured(Measure("drop", drop.fraction, limit.fraction, ""))
    facts = [("current", ampere(circuit.current_a or 0)), ("limit", percent(limit.fraction))]
    for conductor in conductors:
        facts += [
            (f"{conductor.id} size", conductor.size.text),
            (f"{conductor.id} length", f"{conductor.length_m:.3f} m"),
        ]
    if from_bank:
        # The shared way counts by what it loses, so that a thinner feeder makes a waiver lapse.
        own = {c.id for c in conductors}
        facts.append(("shared way", f"{sum(v for name, v in drop.terms if not own & set(name.split('+'))):.4f} V"))
    return Told(
        fault=f"{lost}: {told_fraction} ({limit.words})",
        remedy=_drop_remedy(case, circuit, conductors, drop, limit),
        path=(" + ".join(f"{name} {volts:.3f} V" for name, volts in drop.terms),),
        inputs=tuple(facts),
    )


def _drop_remedy(case: Case, circuit: Circuit, conductors: list[Conductor], drop: Drop, limit: DropLimit) -> str:
    """Offer the smallest gauge, and the longest run, that keep the drop and every other check."""
    own = {c.id for c in conductors}
    own_v = sum(volts for name, volts in drop.terms if own & set(name.split("+")))
    left_v = limit.fraction * drop.nominal_v - (drop.volts - own_v)
    offers: list[str] = []
    size = smallest_gauge(case, circuit.conductors, also_drop_of=circuit.id)
    if size is not None:
        offers.append(f"use {size.text} or larger for its conductors")
    if own_v > 0 and left_v > 0:
        longest = max(conductors, key=lambda c: (c.length_m, c.id))
        kept_m = longest.length_m * left_v / own_v
        offers.append(f"make each conductor no longer than {cut_length(kept_m, longest.length_unit)} in proportion")
    return ", or ".join(offers) or "the shared way to the bank alone uses up the allowance: enlarge the feeder"


@check(
    title="Lengths are one way for each conductor",
    basis=Basis.STANDARD,
    citation="ABYC E-11 length rule (from memory): the length is out and back, over two conductors",
    why="a length counted in another manner makes the real drop double or half the reckoned one",
    level=Level.ERROR,
    catalogue=("CON-10",),
)
def one_way_length(case: Case) -> Iterator[Outcome]:
    """Is every length the length of one conductor?

    A conductor of no length; a measured length that is far from the ways and tails of its own
    route; an out conductor written exactly twice as long as its circuit's back conductor: in
    each the loop was taken for one way, or one way for the loop.
    """
    for conductor in case.boat.conductors.values():
        place = at_conductor(conductor, conductor.at_length)
        fault = _length_fault(case, conductor)
        if fault is None:
            yield one_way_length.passed(case, place)
        else:
            facts = (("length", f"{conductor.length_m:.3f} m"),)
            yield one_way_length.found(case, place, Told(fault[0], fault[1], inputs=facts))


def _length_fault(case: Case, conductor: Conductor) -> tuple[str, str] | None:
    unit = conductor.length_unit
    if conductor.length_m <= 0:
        return "has no length", "write its one-way length; a post that touches another is a mount, not a conductor"
    if conductor.route_m:
        ratio = conductor.length_m / conductor.route_m
        if not LEAST_ROUTE_RATIO <= ratio <= MOST_ROUTE_RATIO:
            given, added = length(conductor.length_m, unit), length(conductor.route_m, unit)
            return (
                f"measures {given}, but its route adds up to {added}",
                "write the length of this one conductor, one way, or correct the route",
            )
    back = _only_back(case, conductor)
    if back is not None and abs(conductor.length_m / back.length_m - 2) < DOUBLE_TOLERANCE * 2:
        told = (
            f"is {length(conductor.length_m, unit)}, exactly twice its return {back.id} ({length(back.length_m, unit)})"
        )
        return told, f"write its one-way length, e.g. {length(back.length_m, unit)}"
    return None


def _only_back(case: Case, conductor: Conductor) -> Conductor | None:
    """Return the one back conductor of a circuit that has one conductor each way, asked for its out one."""
    circuit = case.boat.circuits.get(conductor.circuit)
    if circuit is None or len(circuit.conductors) != 2:
        return None
    first, second = (case.boat.conductors[name] for name in circuit.conductors)
    other = second if conductor.id == first.id else first
    index, usual = case.studies.network.index, case.studies.usual
    is_out = not usual.is_return(index[conductor.start])
    return other if is_out and usual.is_return(index[other.start]) and other.length_m > 0 else None


@check(
    title="A return conductor is no thinner than its feed",
    basis=Basis.LAW,
    citation="33 CFR § 183.425(b) binds both alike; one device stands for both",
    formula="thinnest area back ≥ thinnest area out",
    why="the thinner return overheats first, and nobody looks there",
    catalogue=("CON-16",),
)
def return_size(case: Case) -> Iterator[Outcome]:
    """Is the thinnest return conductor of a circuit as large as its thinnest feed conductor?

    Conductors whose role frees them from the rules of size are left out on both sides.
    """
    index, usual = case.studies.network.index, case.studies.usual
    for circuit in case.boat.circuits.values():
        conductors = [case.boat.conductors[n] for n in circuit.conductors if n in case.boat.conductors]
        conductors = [c for c in conductors if c.role not in FREE_OF_SIZE]
        backs = [c for c in conductors if usual.is_return(index[c.start])]
        feeds = [c for c in conductors if c not in backs]
        if not backs or not feeds:
            continue
        least = min(feeds, key=lambda c: (c.size.area_mm2, c.id))
        for back in backs:
            measure = Measure("area", back.size.area_mm2, least.size.area_mm2, "mm2", at_least=True, is_stepped=True)
            told = Told(
                fault=f"return of {back.size.text} is thinner than its feed {least.id} of {least.size.text}",
                remedy=f"use {least.size.text} back",
                inputs=(("return", back.size.text), ("feed", least.size.text)),
            )
            yield return_size.judge(case, at_conductor(back), measure, lambda told=told: told)  # type: ignore[misc]
