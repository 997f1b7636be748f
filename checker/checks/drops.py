"""Compute the voltage drop of a circuit, alone and from its bank, by a limit set's formula.

Along its own conductors a circuit drops with its own current. On the shared way to the bank
each conductor is taken at the current that it is meant to carry, since the circuit does not
run alone; a cranking motor's conductors carry only the circuit's own, since nobody cranks
for long.
"""

from __future__ import annotations

import heapq
from collections.abc import Mapping
from dataclasses import dataclass

from checker.boat.hull import Circuit, Conductor
from checker.checks.check import Case
from checker.checks.roles import CRANKING
from checker.limits.formulas import drop_v
from checker.units import Size


@dataclass(frozen=True, slots=True)
class Drop:
    """Hold a computed drop: volts, the nominal voltage it is a share of, and each conductor's part in it."""

    volts: float
    nominal_v: float
    terms: tuple[tuple[str, float], ...]

    @property
    def fraction(self) -> float:
        """Return the drop as a share of the nominal voltage."""
        return self.volts / self.nominal_v


@dataclass(frozen=True, slots=True)
class DropLimit:
    """Hold the drop a circuit is allowed, and whether the yard's own rule asks for it."""

    fraction: float
    is_yard_rule: bool
    words: str


def drop_limit(case: Case, circuit: Circuit) -> DropLimit | None:
    """Return the drop allowed to a circuit, or None where the limit set gives none."""
    rule = case.limits.drop
    if rule is None:
        return None
    if circuit.service in rule.critical_services:
        return DropLimit(rule.critical_fraction, False, f"critical group: {circuit.service}")
    if circuit.service in case.house.drop_critical:
        return DropLimit(rule.critical_fraction, True, f"critical by the yard's rule: {circuit.service}")
    return DropLimit(rule.general_fraction, False, f"general group: {circuit.service}")


def circuits_through(case: Case, conductor: str) -> set[str]:
    """Return the circuits that run over a conductor, as their own or on their way to the bank."""
    found = {c.id for c in case.boat.circuits.values() if conductor in c.conductors}
    return found | {name for name, way in case.studies.supply.items() if conductor in (*way.out, *way.back)}


def nominal_v(case: Case, circuit: Circuit) -> float:
    """Return a circuit's nominal voltage: as written, else across its load, else the boat's."""
    if circuit.voltage_v is not None:
        return circuit.voltage_v
    for load in case.studies.network.loads:
        if circuit.load and load.device == circuit.load:
            return load.voltage_v
    return case.boat.system_voltage_v


def circuit_drop(
    case: Case, circuit: Circuit, *, from_bank: bool, sizes: Mapping[str, Size] | None = None
) -> Drop | None:
    """Return the drop of a circuit, or None where it has no current or the set no formula.

    Args:
        case: The boat and its limit set.
        circuit: The circuit.
        from_bank: Also over the shared way to the bank.
        sizes: Other sizes to reckon some conductors with.
    """
    rule = case.limits.drop
    if rule is None or circuit.current_a is None or nominal_v(case, circuit) <= 0:
        return None
    terms = _own_terms(case, circuit, rule.k_ohm_cmil_per_ft, sizes or {})
    way = case.studies.supply[circuit.id]
    if from_bank:
        for name in (*way.out, *way.back):
            conductor = case.boat.conductors[name]
            amps = _shared_a(case, conductor, circuit.current_a)
            terms.append((name, _volts(conductor, amps, rule.k_ohm_cmil_per_ft, sizes or {})))
    return Drop(sum(volts for _, volts in terms), nominal_v(case, circuit), tuple(terms))


def _volts(conductor: Conductor, current_a: float, k: float, sizes: Mapping[str, Size]) -> float:
    size = sizes.get(conductor.id, conductor.copper)
    return drop_v(current_a, conductor.length_m, size.area_cmil, k)


def _shared_a(case: Case, conductor: Conductor, own_a: float) -> float:
    """Return the current at which a shared conductor is taken."""
    if conductor.role == CRANKING:
        return own_a
    owner = case.boat.circuits.get(conductor.circuit)
    meant = conductor.current_a if conductor.current_a is not None else (owner.current_a if owner else None)
    return max(own_a, meant or 0.0)


def own_pieces(case: Case, circuit: Circuit) -> tuple[tuple[str, ...], ...]:
    """Return the conductors along a circuit's own worst way out and worst way back; those in parallel together."""
    if circuit.current_a is None:
        return ()
    return tuple(tuple(name.split("+")) for name, _ in _own_terms(case, circuit, 1.0, {}))


def _own_terms(case: Case, circuit: Circuit, k: float, sizes: Mapping[str, Size]) -> list[tuple[str, float]]:
    """Return the parts in the drop along a circuit's own worst way out and worst way back.

    Conductors in parallel share the current by their conductance; a circuit that forks drops
    as much as its longest way.
    """
    current_a = circuit.current_a or 0.0
    conductors = [case.boat.conductors[name] for name in circuit.conductors if name in case.boat.conductors]
    network, place = case.studies.network, case.studies.places
    pairs: dict[tuple[int, int], list[Conductor]] = {}
    for conductor in conductors:
        ends = sorted((place[network.index[conductor.start]], place[network.index[conductor.end]]))
        pairs.setdefault((ends[0], ends[1]), []).append(conductor)
    links: dict[int, list[tuple[int, float, str]]] = {}
    for (a, b), group in sorted(pairs.items()):
        volts = [_volts(c, max(current_a, c.current_a or 0.0), k, sizes) for c in group]
        joint = 0.0 if min(volts) == 0 else 1 / sum(1 / v for v in volts)
        name = "+".join(sorted(c.id for c in group))
        links.setdefault(a, []).append((b, joint, name))
        links.setdefault(b, []).append((a, joint, name))
    way = case.studies.supply[circuit.id]
    starts = {place[post] for post in (way.start_out, way.start_back) if post >= 0}
    return _worst_ways(links, starts)


def _worst_ways(links: dict[int, list[tuple[int, float, str]]], starts: set[int]) -> list[tuple[str, float]]:
    """Return the terms of the costliest of the cheapest ways, in each separate part of the circuit."""
    terms: list[tuple[str, float]] = []
    seen: set[int] = set()
    # Without a bank the reckoning starts at a loose end, so that a chain counts whole.
    ends = sorted(links, key=lambda node: (len(links[node]), node))
    for start in [*sorted(s for s in starts if s in links), *ends]:
        if start in seen:
            continue
        cost: dict[int, float] = {start: 0.0}
        ways: dict[int, list[tuple[str, float]]] = {start: []}
        waiting = [(0.0, start)]
        while waiting:
            volts, node = heapq.heappop(waiting)
            if volts > cost[node]:
                continue
            for far, more, name in links[node]:
                if volts + more < cost.get(far, float("inf")):
                    cost[far] = volts + more
                    ways[far] = [*ways[node], (name, more)]
                    heapq.heappush(waiting, (cost[far], far))
        seen |= set(cost)
        worst = max(cost, key=lambda node: (cost[node], -node))
        terms += ways[worst]
    return terms
