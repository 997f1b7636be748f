"""Plan the test of a finished boat: what to look at and to measure, where, and what the data predict.

The plan belongs to a distinct boat, as its study does; what was measured belongs to a hull.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from typing import NamedTuple

from checker.boat.hull import Circuit, Conductor
from checker.boat.parts import Overcurrent
from checker.checks.charging import output_name
from checker.checks.check import Case
from checker.checks.drops import drop_limit, nominal_v, own_pieces
from checker.checks.heaviest import NEVER, heaviest
from checker.checks.losses import standby_a
from checker.checks.words import ampere
from checker.limits.measuring_rule import measuring_rule
from checker.network.flow import parallel_ohm
from checker.network.states import places_beyond

FITTED, POLARITY, BONDING, LEAKAGE = "fitted", "polarity", "bonding", "leakage"
ALL_OFF, FUNCTION, DROP, CHARGING = "all-off", "function", "drop", "charging"
KINDS = (FITTED, POLARITY, BONDING, LEAKAGE, ALL_OFF, FUNCTION, DROP, CHARGING)
"""The kinds of steps in the order of the work: dead first, then live with all off, then under load."""

SMALL_A = 0.1
"""Currents below are printed in milliamperes."""


class Step(NamedTuple):
    """Hold one step of the test.

    `part` is what the step is called after, `what` says what it is. `where` are the two points
    to measure between. `expected` is what the data say, in words. `current_a` is the current to
    load with. For a drop `ohm` is the resistance of the copper between the points, `joints` how
    many joints lie on the way, and `limit_v` the drop that a limit set allows at `current_a`.
    """

    kind: str
    part: str
    what: str = ""
    where: str = ""
    expected: str = ""
    circuit: str = ""
    current_a: float | None = None
    ohm: float | None = None
    joints: int = 0
    limit_v: float | None = None
    limit_set: str = ""

    @property
    def id(self) -> str:
        """Return the name of the step on a sheet: its kind, and its part where there are several."""
        return self.kind if self.kind in (BONDING, LEAKAGE) else f"{self.kind} {self.part}"

    @property
    def predicted_v(self) -> float | None:
        """Return the drop at the current to load with, V."""
        return None if self.ohm is None or self.current_a is None else self.ohm * self.current_a


def plan(case: Case) -> tuple[Step, ...]:
    """Return the steps of a boat's test, in the order of the work."""
    steps = [*_fitted(case), *_polarity(case), *_once(), *_all_off(case), *_functions(case), *_drops(case)]
    return (*steps, *_charging(case))


def _fitted(case: Case) -> Iterator[Step]:
    for device in case.boat.devices.values():
        if isinstance(device.part, Overcurrent):
            serves = ", ".join(_name(case.boat.circuits[c]) for c in device.served if c in case.boat.circuits)
            name = device.part.id
            yield Step(FITTED, device.id, serves or name, device.zone, ampere(device.part.rating_a), device.circuit)


def _polarity(case: Case) -> Iterator[Step]:
    for circuit in _loads(case):
        yield Step(POLARITY, circuit.id, _name(circuit), _load_posts(case, circuit), "ok", circuit.id)


def _once() -> Iterator[Step]:
    yield Step(BONDING, "bonding", "the bonding system meets the DC negative at one place", "", "ok")
    yield Step(LEAKAGE, "leakage", "DC positive to the bonding system, all switches closed, loads off", "", "")


def _all_off(case: Case) -> Iterator[Step]:
    boat, network, net = case.boat, case.studies.network, case.studies.all_off.net
    for bank in case.studies.banks:
        current_a = standby_a(case, bank.id)
        tops = {net[b.pos] for b in network.batteries if b.bank == bank.id}
        # All of them: who works aboard must know each one.
        live = {boat.device_of(post) for post in network.posts if net[network.index[post]] in tops}
        stays = ", ".join(sorted(device.id for device in live if device is not None))
        expected = "" if current_a is None else standby_words(current_a)
        where = f"the battery post of {bank.id}, all switches open"
        yield Step(ALL_OFF, bank.id, f"stays live: {stays}", where, expected, current_a=current_a)


def standby_words(current_a: float) -> str:
    """Print a current that may be small."""
    return f"{current_a * 1000:.3g} mA" if abs(current_a) < SMALL_A else ampere(round(current_a, 3))


def _functions(case: Case) -> Iterator[Step]:
    for circuit in _loads(case):
        if circuit.device:
            what = f"{_name(circuit)}: with {circuit.device} off"
            yield Step(FUNCTION, circuit.id, what, _load_posts(case, circuit), "dead", circuit.id)


def _drops(case: Case) -> Iterator[Step]:
    rule = measuring_rule(case.house.common)
    for circuit in case.boat.circuits.values():
        if circuit.current_a is None or circuit.current_a < rule.least_circuit_a or nominal_v(case, circuit) <= 0:
            continue
        pieces = own_pieces(case, circuit)
        if not circuit.load and not _is_loaded(case, pieces, rule.least_current_factor * circuit.current_a):
            continue
        ohm = sum(parallel_ohm([_ohm(case, case.boat.conductors[name]) for name in group]) for group in pieces)
        if ohm <= 0:
            continue
        limit = _limit(case, circuit)
        yield Step(
            DROP, circuit.id, _name(circuit), "; ".join(_points(case, pieces)), "", circuit.id, circuit.current_a,
            ohm, len(pieces), *(limit or (None, "")),
        )  # fmt: skip


def _is_loaded(case: Case, pieces: tuple[tuple[str, ...], ...], current_a: float) -> bool:
    """Tell whether some operating condition sends enough through a trunk to measure there; an emergency link is not."""
    edges = case.studies.network.edges_of
    indexes = [edge.index for group in pieces for name in group for edge in edges[name]]
    return any(
        kind.edges.get(index, NEVER)[0] * len(pieces[0]) >= current_a for kind in heaviest(case) for index in indexes
    )


def _ohm(case: Case, conductor: Conductor) -> float:
    return case.studies.coppers.working.ohm_mm2_per_m * conductor.length_m / conductor.copper.area_mm2


def _limit(case: Case, circuit: Circuit) -> tuple[float, str] | None:
    """Return the smallest drop that a limit set allows a circuit, V, and the set."""
    limits = (
        (limit.fraction * nominal_v(case, circuit), one.id)
        for one in case.every_set
        if (limit := drop_limit(case.under(one), circuit)) is not None
    )
    return min(limits, default=None)


def _points(case: Case, pieces: tuple[tuple[str, ...], ...]) -> Iterator[str]:
    """Return the two points of each way that pieces make: the way out, then the way back."""
    place, index = case.studies.places, case.studies.network.index
    ends: dict[int, str] = {}
    count: Counter[int] = Counter()
    chains: dict[int, int] = {}
    for group in pieces:
        first = case.boat.conductors[group[0]]
        here = [place[index[post]] for post in (first.start, first.end)]
        for post, spot in zip((first.start, first.end), here, strict=True):
            ends.setdefault(spot, post)
            count[spot] += 1
            chains.setdefault(spot, spot)
        joined = {chains[here[0]], chains[here[1]]}
        chains |= {spot: min(joined) for spot, chain in chains.items() if chain in joined}
    usual = case.studies.usual
    for chain in sorted(set(chains.values()), key=lambda chain: (usual.is_return(index[ends[chain]]), chain)):
        loose = [ends[spot] for spot in chains if chains[spot] == chain and count[spot] == 1]
        yield " to ".join(loose) if len(loose) == 2 else "along " + ", ".join("+".join(group) for group in pieces)


def _charging(case: Case) -> Iterator[Step]:
    """Return the sources that reach a bank with a shunt."""
    net, network = case.studies.usual.net, case.studies.network
    shunts = {row.shunt: case.boat.devices[row.shunt].measures for row in case.studies.metering[0]}
    for source in network.sources:
        reached = places_beyond(network, net, [net[source.out]])
        for shunt, bank in shunts.items():
            if any(b.bank == bank and net[b.pos] in reached for b in network.batteries):
                what = f"{output_name(case, source)} alone, up to {ampere(source.max_a)}: {shunt} against a clamp"
                yield Step(CHARGING, output_name(case, source), what, f"all cables at the {bank} bank's post")


def _loads(case: Case) -> Iterator[Circuit]:
    yield from (circuit for circuit in case.boat.circuits.values() if circuit.load)


def _load_posts(case: Case, circuit: Circuit) -> str:
    names = case.studies.network.posts
    load = next((tie for tie in case.studies.network.loads if tie.device == circuit.load), None)
    return "" if load is None else f"{names[load.feed]} to {names[load.back]}"


def _name(circuit: Circuit) -> str:
    return circuit.name or circuit.id
