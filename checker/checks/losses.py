"""Judge what happens when a switch opens, when all is off, and when a return comes loose."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Circuit, Device
from checker.boat.parts import Load
from checker.checks.bearing import SIZING
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import BATTERY_FIGURES, ampere, no_figures, plain
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.limit_set import always_on_rule, bank_figures
from checker.network.losses import Diverted, idle_diodes


def _at(device: Device, state: str = "") -> Place:
    return Place(device.id, device.at, device.circuit, state)


@check(
    title="No switch takes the battery from a running alternator",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-13 (from memory); makers' warnings",
    why="load dump: the voltage spike destroys electronics, and the ship goes dark",
    catalogue=("SRC-04",),
    exemptions="a fuse in the way is no switch",
)
def alternator_cut_off(case: Case) -> Iterator[Outcome]:
    """In every switch state that can exist, is every engine-driven source tied to a battery?"""
    yield from _cut_off(case, is_engine_driven=True)


@check(
    title="No switch leaves a charger without a battery",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the charger runs into nothing: the bank stays empty, or its output strays",
    level=Level.WARNING,
    catalogue=("SRC-14",),
)
def charger_cut_off(case: Case) -> Iterator[Outcome]:
    """In every switch state that can exist, does every other charge source reach a battery?"""
    yield from _cut_off(case, is_engine_driven=False)


def _cut_off(case: Case, *, is_engine_driven: bool) -> Iterator[Outcome]:
    rule = alternator_cut_off if is_engine_driven else charger_cut_off
    lost = {(source.device, source.post): state for source, state in case.studies.cut_off_sources}
    for source in case.studies.network.sources:
        device = case.boat.devices[source.device]
        if device.is_engine_mounted is not is_engine_driven:
            continue
        name = source.device if source.post == _first_post(case, source.device) else f"{source.device}.{source.post}"
        state = lost.get((source.device, source.post))
        place = Place(name, device.at, device.circuit, case.studies.state_words(state) if state else "")
        if state is None:
            yield rule.passed(case, place)
            continue
        told = Told(
            fault=f"its output {source.post} reaches no battery with {state.words}",
            remedy="land it on the battery side of the switch",
            inputs=(("output", source.post), ("state", state.words)),
        )
        yield rule.found(case, place, told)


@check(
    title="Current can pass every diode",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="turned round, it blocks what it should pass: a bank stays empty, or the alternator runs into nothing",
    catalogue=("SRC-04",),
)
def diode_way(case: Case) -> Iterator[Outcome]:
    """Does a battery or source feed the way in of every diode, and does its way out lead to what takes current?"""
    network = case.studies.network
    idle = idle_diodes(network, case.studies.potentials)
    for edge in network.diodes:
        device = case.boat.devices[edge.part]
        way = f"{network.posts[edge.a]} to {network.posts[edge.b]}"
        place = Place(f"{edge.part} {way}", device.at, device.circuit)
        if edge.index not in idle:
            yield diode_way.passed(case, place)
            continue
        told = Told(
            fault=f"nothing can flow from {way} in any switch state",
            remedy="turn the diode round, or join what it should feed",
            inputs=(("passes", way),),
        )
        yield diode_way.found(case, place, told)


def _first_post(case: Case, device: str) -> str:
    return next(s.post for s in case.studies.network.sources if s.device == device)


@check(
    title="Only what may stay live stands ahead of the battery switches",
    basis=Basis.FROM_MEMORY,
    citation="BSS 2002 Part 3, 3.5 (second hand)",
    why="it cannot be isolated in a fire",
    catalogue=("BNK-08", "BNK-12"),
    exemptions="bilge pumps, alarms, sense and charging leads, the monitor of a shunt; a circuit that gives its "
    "reason as `always_on`; what the yard's own rules let stay live",
    needs=("always_on",),
)
def ahead_of_switch(case: Case) -> Iterator[Outcome]:
    """With every battery switch off, is no load still live but those that may be?"""
    rule, potentials = always_on_rule(case.house.common), case.studies.all_off
    for load in _loads(case):
        device = case.boat.devices[load]
        circuit = _circuit(case, device)
        service = circuit.service if circuit else ""
        if load not in case.studies.live_when_off:
            yield ahead_of_switch.passed(case, _at(device))
        elif device.belongs_to or service in rule.services:
            yield ahead_of_switch.passed(case, _at(device), f"may stay live: {service or device.belongs_to}")
        elif circuit is not None and circuit.always_on:
            yield ahead_of_switch.passed(case, _at(device), f"stays live: {circuit.always_on}")
        elif reason := case.house.stays_live(service, circuit.id if circuit else ""):
            yield ahead_of_switch.passed(case, _at(device), f"stays live by the yard's own rule: {reason}")
        else:
            told = Told(
                fault="it stays live with every battery switch off",
                remedy="feed it from behind the switch, or write the reason as `always_on` in its circuit",
                inputs=(("load", load), ("service", service)),
            )
            yield ahead_of_switch.found(case, _at(device, potentials.state.words), told)


@check(
    title="Bilge pumps stay live with the battery switches off",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; BSS 2002 Part 3, 3.5 allows it",
    why="the boat sinks while it is locked up",
    catalogue=("BNK-11",),
    needs=("always_on",),
)
def pump_stays_live(case: Case) -> Iterator[Outcome]:
    """With every battery switch off, is every bilge pump still fed?"""
    rule = always_on_rule(case.house.common)
    for load in _loads(case):
        device = case.boat.devices[load]
        circuit = _circuit(case, device)
        if circuit is None or circuit.service not in rule.must_stay_live:
            continue
        if load in case.studies.live_when_off:
            yield pump_stays_live.passed(case, _at(device))
            continue
        told = Told(
            fault=f"circuit {circuit.id} goes dead with the battery switches",
            remedy="feed it from ahead of the switch, by a device of its own close to the bank",
            inputs=(("load", load),),
        )
        yield pump_stays_live.found(case, _at(device, case.studies.all_off.state.words), told)


def _loads(case: Case) -> list[str]:
    """Return the loads, without the inputs of converters."""
    return sorted({load.device for load in case.studies.network.loads if not load.is_input})


def _circuit(case: Case, device: Device) -> Circuit | None:
    if device.circuit:
        return case.boat.circuits.get(device.circuit)
    owned = (
        case.boat.circuits.get(c.circuit)
        for c in case.boat.conductors.values()
        if device.id in (c.start.rpartition(".")[0], c.end.rpartition(".")[0])
    )
    return next((circuit for circuit in owned if circuit is not None), None)


@check(
    title="What stays on leaves the bank charged until the owner is back",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="days = usable share · Ah / (24 h · I)",
    why="an empty bank pumps no bilge",
    level=Level.NOTE,
    catalogue=("LOD-09",),
    needs=("bank",),
)
def standby_days(case: Case) -> Iterator[Outcome]:
    """With everything off, does what stays live leave half of each bank for at least ten days?

    The current is that of the condition with every battery switch off; without one, the sum of
    the standby currents of the loads that stay live.
    """
    figures = bank_figures(case.house.common)
    for bank in case.studies.banks:
        if not bank.strings:
            continue
        first = case.boat.devices[bank.strings[0][0]]
        place = Place(bank.id, first.at)
        current_a = standby_a(case, bank.id)
        if current_a is None:
            yield standby_days.not_assessed(case, place, "no condition with all switches off, and a standby missing",
                                            "a condition with all switches open, or standby")  # fmt: skip
            continue
        days = float("inf") if current_a <= 0 else figures.usable_fraction * bank.capacity_ah / (24 * current_a)
        told = Told(
            fault=f"{ampere(current_a)} with everything off takes half of {plain(bank.capacity_ah)} Ah "
            f"in {plain(days)} days",
            remedy="less standby, or a larger bank",
            inputs=(("current", ampere(current_a)), ("capacity", f"{bank.capacity_ah:g} Ah")),
        )
        measure = Measure("standby", days, figures.least_days, "days", at_least=True, is_stepped=True)
        yield standby_days.judge(case, place, measure, lambda told=told: told)  # type: ignore[misc]


def standby_a(case: Case, bank: str) -> float | None:
    """Return what a bank gives with everything off, or None where it is not known."""
    off = case.studies.all_off.state.closed
    for current in case.studies.bank_currents:
        operation = next(o for o in case.studies.operations if o.condition.id == current.condition)
        if current.bank == bank and operation.state.closed == off and not operation.feeds:
            return current.current_a
    total = 0.0
    net = {case.studies.all_off.net[b.pos] for b in case.studies.network.batteries if b.bank == bank}
    for load in case.studies.network.loads:
        part = case.boat.devices[load.device].part
        if case.studies.all_off.net[load.feed] in net and isinstance(part, Load):
            if part.standby_a is None:
                return None
            total += part.standby_a
    return total


@check(
    title="One loose return sends no heavy current through a thin path",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; 33 CFR § 183.415 gives the reason for twin engines",
    formula="ΣI = 0 at every post, V = I·R, each load as R = V/I; then |I| ≤ the ampacity of each path",
    why="the classic burnt charger lead or instrument wire after a loose engine ground",
    level=Level.WARNING,
    catalogue=("RET-11",),
    per_set=True,
    needs=(*SIZING, "always_on"),
)
def lost_return(case: Case) -> Iterator[Outcome]:
    """With each heavy return opened in turn, does every path beside it bear what it then carries?

    Returns that have others beside them, bonds, engine blocks and shields included, are opened
    one at a time in the condition in which they carry most: cranking, charging. Loads are taken
    as resistances, since a motor behind a bad return draws less. Cranking too is held against
    the lasting ampacity: nobody mends a return after one start.
    """
    rule = always_on_rule(case.house.common)
    if missing := case.studies.conditions.missing:
        place = _at(case.boat.devices[missing[0]])
        yield lost_return.not_assessed(case, place, no_figures(missing), BATTERY_FIGURES)
        return
    by_opened: dict[str, list[tuple[float, Diverted, float]]] = {}
    for diverted in case.studies.diverted(rule.heavy_return_a):
        limit_a = _limit_a(case, diverted.part, rule.shield_a)
        if limit_a is not None:
            by_opened.setdefault(diverted.opened, []).append((diverted.current_a / limit_a, diverted, limit_a))
    for paths in by_opened.values():
        # Where all paths bear it, the one nearest its limit stands for them.
        over = [row for row in paths if row[0] > 1] or [max(paths, key=lambda row: round(row[0], 9))]
        for _, diverted, limit_a in over:
            yield _judge_diverted(case, diverted, limit_a)


def _judge_diverted(case: Case, diverted: Diverted, limit_a: float) -> Outcome:
    place, words = _path(case, diverted)
    told = Told(
        fault=f"if {diverted.opened} comes loose, {words} carries {ampere(round(diverted.current_a, 1))} "
        f"in condition {diverted.condition}, but bears {ampere(limit_a)}",
        remedy=f"a second heavy return beside {diverted.opened}, or take the thin path out",
        inputs=(("opened", diverted.opened), ("current", ampere(round(diverted.current_a, 1)))),
    )
    measure = Measure("diverted current", diverted.current_a, limit_a, "A")
    return lost_return.judge(case, place, measure, lambda: told)


def _limit_a(case: Case, part: str, shield_a: float) -> float | None:
    """Return what a conductor or shield bears, None where that is not known."""
    conductor = case.boat.conductors.get(part)
    if conductor is None:
        return shield_a if any(s.id == part for s in case.boat.shields or ()) else None
    bearing = case.bearings.of(conductor)
    return None if bearing is None else bearing.ampacity_a


def _path(case: Case, diverted: Diverted) -> tuple[Place, str]:
    """Return where a conductor or shield stands, and what to call it."""
    name = f"{diverted.part} without {diverted.opened}"
    conductor = case.boat.conductors.get(diverted.part)
    if conductor is not None:
        return Place(name, conductor.at_size, conductor.circuit), conductor.size.text
    shield = next(s for s in case.boat.shields or () if s.id == diverted.part)
    return Place(name, shield.at), "the shield"
