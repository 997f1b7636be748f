"""Judge what the solved network says: currents, voltages and ratings in every operating condition."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Circuit, Conductor
from checker.boat.parts import Bus, Diode, Load, Overcurrent, Switch
from checker.checks.bearing import SIZING
from checker.checks.check import Case, Place, Told, at_conductor, check
from checker.checks.drops import drop_limit, nominal_v
from checker.checks.heaviest import NEVER, Largest, heaviest
from checker.checks.remedy import gauges, smallest_gauge, together
from checker.checks.roles import EXEMPTIONS, exempt_as
from checker.checks.words import BATTERY_FIGURES, ampere, percent, plain
from checker.finding import Basis, Level, Measure, Outcome
from checker.network.conditions import Draw, Feed
from checker.network.flow import Flow, NoOperatingPoint
from checker.network.graph import EdgeKind
from checker.network.potentials import study_potentials
from checker.network.solved import Solved

CIRCUIT_LAWS = "Kirchhoff's laws: ΣI = 0 at every post, V = I·R along every conductor, R = rho·l/A at 30 C"
SERIES_FRACTION = 0.99
"""Conductors of a circuit that carry this share of its largest current lie in series; for a remedy only."""


def _solved(case: Case) -> tuple[Solved, ...]:
    return case.studies.conditions.solved


def _unknown(case: Case) -> str:
    """Return why nothing can be solved, or an empty text."""
    if case.studies.conditions.missing:
        return f"EMF or resistance of {', '.join(case.studies.conditions.missing)} is not written"
    return "" if case.boat.conditions else "no operating condition is written"


def _missing_field(case: Case) -> str:
    return BATTERY_FIGURES if case.studies.conditions.missing else "conditions"


@check(
    title="Every operating condition has a working point",
    basis=Basis.PHYSICS,
    citation="Ohm's law and P = U·I",
    formula="P = U·I against U = E − I·R: beyond P = E²/4R there is no solution",
    why="a load of constant power draws more the lower its voltage is, until the network collapses",
    catalogue=("LOD-03",),
)
def working_point(case: Case) -> Iterator[Outcome]:
    """Can the network feed what each condition asks of it, with full and with low batteries?

    Loads of constant power are solved by Newton's method. Below half its nominal voltage such
    a load is past the knee of its curve.
    """
    unknown = _unknown(case)
    if unknown:
        yield working_point.not_assessed(case, Place("conditions", case.boat.at), unknown, _missing_field(case))
        return
    for solved in _solved(case):
        condition = solved.operation.condition
        place = Place(condition.id, condition.at)
        failed = [found for found in (solved.full, solved.low) if isinstance(found, NoOperatingPoint)]
        if not failed:
            yield working_point.passed(case, place)
            continue
        charge = "full" if isinstance(solved.full, NoOperatingPoint) else "low"
        told = Told(
            fault=f"with {charge} batteries the network cannot feed {', '.join(failed[0].loads)}",
            remedy="larger conductors, fewer devices in the way, or less load in this condition",
            inputs=(("condition", condition.id), ("loads", " ".join(failed[0].loads))),
        )
        yield working_point.found(case, place, told)


@check(
    title="A conductor bears its solved current",
    basis=Basis.LAW,
    citation="33 CFR § 183.425(b), (c) and Table 5",
    formula=f"{CIRCUIT_LAWS}; |I| ≤ the ampacity",
    why="shared returns and parallel paths carry more than any one circuit says",
    catalogue=("CON-01", "CON-11", "CON-19", "RET-06"),
    exemptions="the roles of § 183.425(g); currents that last no longer than a surge",
    per_set=True,
    needs=(*SIZING, EXEMPTIONS, "surge"),
)
def solved_ampacity(case: Case) -> Iterator[Outcome]:
    """Does every conductor bear the largest current that any operating condition sends through it?

    The network is solved for each condition, with full batteries and with low ones.
    Conditions that last no longer than a surge are left out, as the law leaves out
    intermittent surges.
    """
    if _unknown(case):
        return  # told once, by the working point
    lasting, _ = heaviest(case)
    edges = case.studies.network.edges_of
    roles = case.limits.exemptions.ampacity_exempt_roles
    for conductor in case.boat.conductors.values():
        bearing = case.bearings.of(conductor)
        if bearing is None or exempt_as(case, conductor, roles, "ampacity_exempt_roles"):
            continue
        found = (lasting.edges.get(edge.index, NEVER) for edge in edges[conductor.id])
        current_a, condition = max(found, key=lambda largest: largest[0], default=NEVER)
        if current_a <= 0:
            current_a, condition = 0.0, ""
        yield _judge_solved(case, conductor, current_a, condition, bearing.ampacity_a, bearing.words)


def _judge_solved(
    case: Case, conductor: Conductor, current_a: float, condition: str, ampacity_a: float, words: str
) -> Outcome:
    def told() -> Told:
        beside = _beside(case, conductor)
        shared = f"; it runs parallel to {', '.join(beside)}" if beside else ""
        return Told(
            fault=f"{conductor.size.text} carries {ampere(current_a)} in condition {condition}, "
            f"but bears {ampere(ampacity_a)} ({words}){shared}",
            remedy="make parallel conductors equal in size and length"
            if beside
            else _solved_gauge(case, conductor, current_a),
            inputs=(("size", conductor.size.text), ("current", ampere(current_a)), ("bears", ampere(ampacity_a))),
        )

    place = at_conductor(conductor, state=f"condition {condition}" if condition else "")
    return solved_ampacity.judge(case, place, Measure("solved current", current_a, ampacity_a, "A"), told)


def _beside(case: Case, conductor: Conductor) -> list[str]:
    """Return the conductors that join the same two places."""
    place, index = case.studies.places, case.studies.network.index
    ends = {place[index[conductor.start]], place[index[conductor.end]]}
    return [
        other.id for other in case.boat.conductors.values()
        if other.id != conductor.id and {place[index[other.start]], place[index[other.end]]} == ends
    ]  # fmt: skip


def _solved_gauge(case: Case, conductor: Conductor, current_a: float) -> str:
    """Return the smallest gauge that bears the solved current and passes every other check."""
    names = together(case, conductor)
    size = smallest_gauge(case, names)
    for limits in case.every_set:
        bearings = case.under(limits).bearings
        if bearings.of(conductor) is None:
            continue
        for enough in limits.ampacity.conductor_sizes:
            bearing = bearings.of(conductor, enough)
            if bearing is not None and bearing.ampacity_a >= current_a:
                size = enough if size is None or enough.area_mm2 > size.area_mm2 else size
                break
        else:
            return "split the circuits over several conductors: no gauge of the table bears it"
    return f"use {size.text} or larger, or give the circuits conductors of their own" if size else "split the circuits"


@check(
    title="A circuit keeps the voltage drop in the solved network",
    basis=Basis.COMMON_PRACTICE,
    citation="limits of ABYC E-11 (2008) 11.14.2.6; that they hold in operation, from the battery posts, is common "
    "practice, no source",
    formula=f"{CIRCUIT_LAWS}; (E − U at the load) / nominal ≤ 3 % or 10 %",
    why="what is alone in the drawing is not alone on the water: feeders, fuses, switches and the shunt drop too",
    level=Level.ERROR,
    catalogue=("CON-09", "LOD-03", "LOD-04"),
    caution="terminals are taken as zero; the real drop is larger",
    per_set=True,
    needs=("drop",),
)
def solved_drop(case: Case) -> Iterator[Outcome]:
    """In every condition that judges drop, does each load or source lose no more than its group allows?

    Counted from the posts of the bank that supplies the circuit, over every conductor, device,
    contact and shunt on the way, with everything else that runs in the condition running too.
    """
    if case.limits.drop is None or _unknown(case):
        return
    worst: dict[str, tuple[float, float, str, Flow]] = {}
    tops = _bank_ends(case)
    owners = _circuits_of_posts(case)
    for solved in _solved(case):
        if not solved.operation.condition.judges_drop:
            continue
        for flow in solved.flows():
            for circuit, lost_v, volts in _losses(case, solved, flow, tops, owners):
                known = worst.get(circuit.id)
                if known is None or lost_v / volts > known[0] / known[1]:
                    worst[circuit.id] = (lost_v, volts, solved.operation.condition.id, flow)
    for name, (lost_v, volts, condition, flow) in sorted(worst.items()):
        yield from _judge_solved_drop(case, case.boat.circuits[name], lost_v, volts, condition, flow)


def _bank_ends(case: Case) -> dict[str, tuple[int, int]]:
    """Return the highest and the lowest post of each bank."""
    usual = case.studies.usual
    ends: dict[str, tuple[int, int]] = {}
    for battery in case.studies.network.batteries:
        top, bottom = ends.get(battery.bank, (battery.pos, battery.neg))
        if (usual.between(battery.pos, top) or 0.0) > 0:
            top = battery.pos
        if (usual.between(battery.neg, bottom) or 0.0) < 0:
            bottom = battery.neg
        ends[battery.bank] = (top, bottom)
    return ends


def _circuits_of_posts(case: Case) -> dict[int, Circuit]:
    """Return the circuit that a load or source belongs to, by its feed post."""
    index = case.studies.network.index
    return {
        index[post]: circuit
        for circuit in case.boat.circuits.values()
        for name in circuit.conductors
        for post in (case.boat.conductors[name].start, case.boat.conductors[name].end)
    }


def _losses(
    case: Case, solved: Solved, flow: Flow, tops: dict[str, tuple[int, int]], owners: dict[int, Circuit]
) -> Iterator[tuple[Circuit, float, float]]:
    """Yield for each load and source that runs its circuit, its loss from or to the bank, and its nominal voltage."""
    net = study_potentials(case.studies.network, solved.operation.state).net
    items: list[tuple[int, int, float]] = [(d.feed, d.back, 1.0) for d in solved.operation.draws if _runs(d)]
    items += [(f.out, f.back, -1.0) for f in solved.operation.feeds if _runs(f)]
    for out, back, sign in items:
        circuit = owners.get(out)
        bank = case.studies.supply[circuit.id].bank if circuit else ""
        if circuit is None or bank not in tops:
            continue
        # Where its own bank is switched off, what feeds it now counts: an emergency link, another bank.
        feeding = (
            [tops[bank]] if net[tops[bank][0]] == net[out] else [t for t in tops.values() if net[t[0]] == net[out]]
        )
        lost_v = min(
            sign * (flow.across(top, out) + flow.across(back, bottom)) for top, bottom in feeding or [tops[bank]]
        )
        yield circuit, lost_v, nominal_v(case, circuit)


def _runs(item: Draw | Feed) -> bool:
    return item.current_a > 0


def _less_drop(case: Case, circuit: Circuit, flow: Flow, too_much_v: float) -> str:
    """Tell which gauge of the circuit's own conductors takes the excess away, its currents left as they are."""
    beside: dict[frozenset[int], list[tuple[float, float, float]]] = {}
    for name in circuit.conductors:
        (edge,) = case.studies.network.edges_of[name]
        current_a = abs(flow.currents_a.get(edge.index, 0.0))
        if current_a:
            ends = frozenset((flow.grid.place[edge.a], flow.grid.place[edge.b]))
            area_mm2 = case.boat.conductors[name].copper.area_mm2
            beside.setdefault(ends, []).append((current_a, area_mm2, current_a * flow.grid.ohm(edge)))
    # What carries the whole current lies in series, out and back; side branches cannot be counted on.
    most_a = max((sum(amps for amps, _, _ in rows) for rows in beside.values()), default=0.0)
    series = [rows for rows in beside.values() if sum(amps for amps, _, _ in rows) >= SERIES_FRACTION * most_a]
    own = [max((lost_v, area_mm2) for _, area_mm2, lost_v in rows)[::-1] for rows in series]
    own_v = sum(lost_v for _, lost_v in own)
    for size in gauges(case):
        left_v = sum(lost_v * min(1.0, area_mm2 / size.area_mm2) for area_mm2, lost_v in own)
        if own_v - left_v >= too_much_v:
            return f"use {size.text} or larger for its own conductors, which lose {own_v:.3f} V of it, or shorten them"
    return f"enlarge the shared feeder: its own conductors lose only {own_v:.3f} V of it"


def _judge_solved_drop(
    case: Case, circuit: Circuit, lost_v: float, volts: float, condition: str, flow: Flow
) -> Iterator[Outcome]:
    limit = drop_limit(case, circuit)
    if limit is None:
        return
    fraction = lost_v / volts

    def told() -> Told:
        return Told(
            fault=f"loses {lost_v:.3f} V of {volts:g} V in condition {condition}: {percent(fraction)} ({limit.words})",
            remedy=_less_drop(case, circuit, flow, lost_v - limit.fraction * volts),
            inputs=(("condition", condition), ("limit", percent(limit.fraction)), ("lost", f"{lost_v:.3f} V")),
        )

    conductors = [case.boat.conductors[name] for name in circuit.conductors]
    at = conductors[0].at_size if len({c.at_size for c in conductors}) == 1 else circuit.at
    place = Place(circuit.id, at, circuit.id, f"condition {condition}")
    yield solved_drop.judge(case, place, Measure("drop", fraction, limit.fraction, ""), told, note=limit.words)


@check(
    title="A load keeps its smallest voltage in every condition",
    basis=Basis.COMMON_PRACTICE,
    citation="the maker's smallest voltage; common practice, no source",
    formula=f"{CIRCUIT_LAWS}; U at the load ≥ the maker's smallest",
    why="plotter and pilot restart while a motor starts, and lights are not seen",
    level=Level.WARNING,
    catalogue=("CON-18", "LOD-04"),
)
def minimum_voltage(case: Case) -> Iterator[Outcome]:
    """With low batteries, does every load that runs keep the smallest voltage its maker names?

    Conditions of seconds count too: cranking, a windlass starting.
    """
    if _unknown(case):
        return
    worst: dict[str, tuple[float, float, str]] = {}
    for solved in _solved(case):
        if not isinstance(solved.low, Flow):
            continue
        for draw in solved.operation.draws:
            circuit = case.boat.circuits.get(draw.name)
            owner = circuit.load if circuit is not None and circuit.load else draw.name
            device = case.boat.devices.get(owner)
            if device is None or not isinstance(device.part, Load) or not draw.current_a:
                continue
            if device.part.min_voltage_v is not None and draw.name in solved.low.load_a:
                volts = solved.low.across(draw.feed, draw.back)
                if owner not in worst or volts < worst[owner][0]:
                    worst[owner] = (volts, device.part.min_voltage_v, solved.operation.condition.id)
    for name, (volts, least_v, condition) in sorted(worst.items()):
        device = case.boat.devices[name]
        told = Told(
            fault=f"gets {plain(volts)} V in condition {condition} with low batteries, but needs {plain(least_v)} V",
            remedy="feed it apart from the motor that starts, or enlarge what they share",
            inputs=(("condition", condition), ("needs", f"{least_v:g} V"), ("gets", f"{volts:.2f} V")),
        )
        place = Place(name, device.at, device.circuit, f"condition {condition}")
        measure = Measure("voltage", volts, least_v, "V", at_least=True)
        yield minimum_voltage.judge(case, place, measure, lambda told=told: told)  # type: ignore[misc]


@check(
    title="Buses, switches and devices bear the solved sum of each condition",
    basis=Basis.COMMON_PRACTICE,
    citation="the makers' ratings; common practice, no source",
    formula=f"{CIRCUIT_LAWS}; |I| ≤ rating",
    why="a main trips, a contact welds or a bar overheats at the worst moment",
    catalogue=("PAN-01", "PAN-05", "PAN-07", "BNK-09", "SRC-03"),
)
def solved_rating(case: Case) -> Iterator[Outcome]:
    """Is the solved current of each bus, switch and overcurrent device within its rating, charging included?

    A condition that lasts no longer than a surge is held to a switch's intermittent rating,
    and left out for buses and devices.
    """
    if _unknown(case):
        return
    worst: dict[tuple[str, bool], Largest] = {}
    for found, brief in zip(heaviest(case), (False, True), strict=True):
        for edge in case.studies.network.edges:
            if edge.kind in (EdgeKind.CONTACT, EdgeKind.DEVICE, EdgeKind.DIODE) and edge.index in found.edges:
                key = (edge.part, brief)
                worst[key] = max(worst.get(key, NEVER), found.edges[edge.index], key=lambda largest: largest[0])
        worst |= {(name, brief): largest for name, largest in found.buses.items()}
    for (name, brief), (current_a, condition) in sorted(worst.items()):
        device = case.boat.devices[name]
        limit_a = _rating_a(device.part, brief)
        if limit_a is None:
            continue
        told = Told(
            fault=f"carries {ampere(current_a)} in condition {condition}, rated {ampere(limit_a)}",
            remedy="a larger part, a second feeder, or less in this condition",
            inputs=(("condition", condition), ("current", ampere(current_a)), ("rating", ampere(limit_a))),
        )
        part = f"{name} for seconds" if brief else name
        place = Place(part, device.at_rating, device.circuit, f"condition {condition}")
        measure = Measure("solved current", current_a, limit_a, "A")
        yield solved_rating.judge(case, place, measure, lambda told=told: told)  # type: ignore[misc]


def _rating_a(part: object, brief: bool) -> float | None:
    if isinstance(part, Switch):
        return part.intermittent_a if brief else part.continuous_a
    if isinstance(part, Diode):
        return None if brief else part.continuous_a
    if brief or not isinstance(part, (Bus, Overcurrent)):
        return None
    return part.rating_a


@check(
    title="Current flows through a polarised device the right way only",
    basis=Basis.COMMON_PRACTICE,
    citation="IEC 60947-2 marking of line and load, as reported",
    why="fed backward, it fails to break the arc",
    catalogue=("PRO-24",),
)
def polarised_device(case: Case) -> Iterator[Outcome]:
    """Does every polarised device carry current from its line post to its load post in every condition?"""
    polarised = {d.id for d in case.boat.devices.values() if isinstance(d.part, Overcurrent) and d.part.polarised}
    backward: dict[str, tuple[float, str]] = {}
    if polarised and not _unknown(case):
        edges = [e for e in case.studies.network.edges if e.kind is EdgeKind.DEVICE and e.part in polarised]
        for solved in _solved(case):
            for flow in solved.flows():
                for edge in edges:
                    current_a = flow.currents_a.get(edge.index, 0.0)
                    if current_a < -1e-6:
                        backward.setdefault(edge.part, (current_a, solved.operation.condition.id))
    for device in case.boat.devices.values():
        if device.id not in polarised or not isinstance(device.part, Overcurrent):
            continue
        place = Place(device.id, device.at_rating, device.circuit)
        if device.id not in backward:
            yield polarised_device.passed(case, place)
            continue
        current_a, condition = backward[device.id]
        told = Told(
            fault=f"{device.part.id} is polarised and carries {ampere(-current_a)} from load to line "
            f"in condition {condition}",
            remedy="fit a device that is not polarised, or turn it if the current never flows the other way",
            inputs=(("condition", condition), ("part", device.part.id)),
        )
        place = Place(device.id, device.at_rating, device.circuit, f"condition {condition}")
        yield polarised_device.found(case, place, told)
