"""Judge devices: overcurrent devices by what they are, buses by what can flow through them."""

from __future__ import annotations

import re
from collections.abc import Iterator

from checker.boat.hull import Device, Zone
from checker.boat.parts import Bus, Diode, Load, Overcurrent, Source, Switch
from checker.checks.air import vapour_zones
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import ampere, plain
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.limit_set import surge_s
from checker.network.graph import EdgeKind
from checker.network.states import live_edges, places
from checker.network.walk import neighbours, path_between, path_words


def _overcurrent(case: Case) -> Iterator[tuple[Device, Overcurrent]]:
    for device in case.boat.devices.values():
        if isinstance(device.part, Overcurrent):
            yield device, device.part


def _at(device: Device, state: str = "") -> Place:
    return Place(device.id, device.at_rating, device.circuit, state)


@check(
    title="A device's voltage rating is not below its circuit's",
    basis=Basis.LAW,
    citation="33 CFR § 183.455(d)",
    formula="rated voltage ≥ nominal voltage of the net",
    why="the arc is not put out and the device burns",
    catalogue=("PRO-10",),
    caution="the rating must be a DC rating",
    per_set=True,
    needs=("device_voltage",),
)
def device_voltage(case: Case) -> Iterator[Outcome]:
    """Is every fuse and breaker rated for the voltage of the net it stands in?

    The nominal voltage is what the batteries give the net above the DC reference.
    """
    factor = case.limits.device_voltage.least_nominal_factor
    for device, part in _overcurrent(case):
        volts = max(
            (abs(v) for p in case.studies.potentials
             if (v := p.above_reference(case.studies.network.index[f"{device.id}.line"])) is not None),
            default=None,
        )  # fmt: skip
        if volts is None:
            yield device_voltage.not_assessed(case, _at(device), "no battery fixes the voltage of its net", "a feed")
            continue
        measure = Measure("voltage rating", part.voltage_v, volts * factor, "V", at_least=True, is_stepped=True)
        told = Told(
            fault=f"{part.id} is rated {plain(part.voltage_v)} V in a net of {plain(volts)} V",
            remedy=f"fit a device rated for at least {plain(volts * factor)} V DC",
            inputs=(("rating", f"{part.voltage_v:g} V"), ("net", f"{volts:g} V")),
        )
        yield device_voltage.judge(case, _at(device), measure, lambda told=told: told)  # type: ignore[misc]


@check(
    title="A breaker is trip-free and reset by hand",
    basis=Basis.LAW,
    citation="33 CFR § 183.455(a)",
    why="a breaker that closes by itself, or can be held closed, cycles into the fault until there is a fire",
    catalogue=("PRO-11",),
    per_set=True,
    needs=("breaker",),
)
def breaker_type(case: Case) -> Iterator[Outcome]:
    """Is every breaker that protects a conductor trip-free, and reset by hand only?"""
    rule = case.limits.breaker
    for device, part in _overcurrent(case):
        if not part.is_breaker:
            continue
        faults = ["resets itself"] if rule.must_reset_by_hand and part.resets_itself else []
        faults += ["can be held closed (not trip-free)"] if rule.must_be_trip_free and not part.trip_free else []
        if not faults:
            yield breaker_type.passed(case, _at(device))
            continue
        told = Told(
            fault=f"{part.id} {' and '.join(faults)}",
            remedy="fit a trip-free breaker with manual reset, or a fuse",
            inputs=(("part", part.id), ("is", " ".join(faults))),
        )
        yield breaker_type.found(case, _at(device), told)


@check(
    title="A bus bears what its devices let through it",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, bus and panel protection (from memory)",
    formula="the largest, over divisions of its ways, of min(Σ In in, Σ In out) ≤ rating",
    why="the bus bar overheats before anything opens",
    catalogue=("PRO-23", "PAN-02", "PAN-06"),
    needs=("surge",),
)
def bus_rating(case: Case) -> Iterator[Outcome]:
    """Is every live bus and panel rated for the most that can flow through it?

    In by some of its ways and out by the others: what devices and sources let in, against what
    the devices toward loads and batteries let out, the worst division over all states. A
    collector that stands on its bank with no device ahead is held to the largest current of
    its bank over the conditions that last longer than a surge.
    """
    worst: dict[str, tuple[float, str, str]] = {}
    for state, flows in zip(case.studies.states.kept, case.studies.buses, strict=True):
        for flow in flows:
            through_a, why = flow.through_a, " + ".join(f"{n} {ampere(a)}" for n, a in flow.comes_in)
            if through_a == float("inf"):
                through_a, why = _bank_demand(case, flow.bus)
            if flow.bus not in worst or through_a > worst[flow.bus][0]:
                worst[flow.bus] = (through_a, why, case.studies.state_words(state))
    for name, (through_a, why, words) in sorted(worst.items()):
        device = case.boat.devices[name]
        assert isinstance(device.part, Bus)
        if through_a < 0:
            place = Place(name, device.at, device.circuit, words)
            yield bus_rating.not_assessed(case, place, "it stands on its bank with no device ahead", "conditions")
            continue
        yield _judge_bus(case, device, device.part.rating_a, through_a, why, words)


def _judge_bus(case: Case, device: Device, rating_a: float, through_a: float, why: str, words: str) -> Outcome:
    told = Told(
        fault=f"rated {ampere(rating_a)}, but {ampere(through_a)} can flow through it (in: {why})",
        remedy=f"a bus rated {ampere(through_a)} or more, or a device ahead of at most {ampere(rating_a)}",
        inputs=(("rating", ampere(rating_a)), ("in", why)),
    )
    place = Place(device.id, device.at_rating, device.circuit, words)
    return bus_rating.judge(case, place, Measure("current", through_a, rating_a, "A"), lambda: told, note=why)


def _bank_demand(case: Case, bus: str) -> tuple[float, str]:
    """Return the largest current of the bank that a bus stands on; -1 where no condition is written."""
    net = case.studies.usual.net[case.studies.network.index[bus]]
    banks = {b.bank for b in case.studies.network.batteries if net in (case.studies.usual.net[b.pos],)}
    currents = [
        c for c in case.studies.bank_currents
        if c.bank in banks and not (c.short_time_s is not None and c.short_time_s <= surge_s(case.house.common))
    ]  # fmt: skip
    if not currents:
        return -1.0, ""
    most = max(currents, key=lambda c: (c.current_a, c.condition))
    return most.current_a, f"{most.bank} in condition {most.condition}"


@check(
    title="No path leads round an overcurrent device",
    basis=Basis.LAW,
    citation="33 CFR § 183.455(a)",
    why="the device opens and the current goes on",
    catalogue=("PRO-26",),
)
def device_bypass(case: Case) -> Iterator[Outcome]:
    """With a device taken out, are its two ends still joined with no other device on the way?"""
    network = case.studies.network
    reported: dict[str, Outcome] = {}
    for state in case.studies.states.kept:
        free = [i for i in live_edges(network, state) if network.edges[i].kind is not EdgeKind.DEVICE]
        place = places(network, state, (EdgeKind.DEVICE,))
        for device, _ in _overcurrent(case):
            ends = [network.index[f"{device.id}.{post}"] for post in ("line", "load")]
            if place[ends[0]] != place[ends[1]]:
                reported.setdefault(device.id, device_bypass.passed(case, _at(device)))
                continue
            path = path_between(neighbours(network, free), ends[0], [ends[1]]) or []
            parts = ", ".join(dict.fromkeys(edge.part for edge in path if edge.part != device.id))
            told = Told(
                fault=f"a path with no device leads round it: {parts}",
                remedy="take the path out, or protect it by a device of its own",
                path=path_words(network, ends[0], path),
                inputs=(("path", " ".join(edge.part for edge in path)),),
            )
            if device.id not in reported or not reported[device.id].fault:
                place_here = _at(device, case.studies.state_words(state))
                reported[device.id] = device_bypass.found(case, place_here, told)
    yield from (reported[name] for name in sorted(reported))


@check(
    title="A load's device is no larger than its maker allows",
    basis=Basis.COMMON_PRACTICE,
    citation="the maker's figure for the load; common practice, no source",
    why="a stalled or failed load burns inside its own housing",
    catalogue=("LOD-01",),
)
def maker_device(case: Case) -> Iterator[Outcome]:
    """Is the device of every branch circuit within the largest that the load's maker names?"""
    for circuit in case.boat.circuits.values():
        if not circuit.load or not circuit.device:
            continue
        load, device = case.boat.devices[circuit.load].part, case.boat.devices[circuit.device]
        if not isinstance(load, Load) or not isinstance(device.part, Overcurrent):
            continue
        place = Place(circuit.device, device.at_rating, circuit.id)
        if load.max_device_a is None:
            fault = f"load {load.id} names no largest device"
            yield maker_device.not_assessed(case, Place(circuit.device, load.at, circuit.id), fault, "max_device")
            continue
        told = Told(
            fault=f"{ampere(device.part.rating_a)} stands ahead of {load.id}, "
            f"whose maker allows {ampere(load.max_device_a)}",
            remedy=f"fit {ampere(load.max_device_a)} or less",
            inputs=(("device", ampere(device.part.rating_a)), ("maker", ampere(load.max_device_a))),
        )
        measure = Measure("device rating", device.part.rating_a, load.max_device_a, "A", is_stepped=True)
        yield maker_device.judge(case, place, measure, lambda told=told: told)  # type: ignore[misc]


_LEGEND_RATING = re.compile(r"([0-9]+(?:\.[0-9]+)?) ?A\b")


@check(
    title="A legend names the rating of the device it stands at",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the wrong spare is fitted, or the wrong circuit trusted",
    level=Level.WARNING,
    catalogue=("LBL-06",),
)
def legend_rating(case: Case) -> Iterator[Outcome]:
    """Where a legend is recorded with a rating, is it the rating of the device?"""
    for device, part in _overcurrent(case):
        for legend, at in device.legends:
            match = _LEGEND_RATING.search(legend)
            place = Place(device.id, at, device.circuit)
            if match is None or float(match[1]) == part.rating_a:
                yield legend_rating.passed(case, place)
                continue
            told = Told(
                fault=f"legend “{legend}” says {match[1]} A, but the device is {ampere(part.rating_a)}",
                remedy=f"correct the legend, or fit {match[1]} A",
                inputs=(("legend", legend), ("device", ampere(part.rating_a))),
            )
            yield legend_rating.found(case, place, told)


@check(
    title="Nothing can spark where there is petrol vapour",
    basis=Basis.LAW,
    citation="33 CFR § 183.410(a); stowed tender petrol: common practice, no source",
    why="a spark in petrol vapour is an explosion",
    catalogue=("ZON-01", "ZON-04"),
    exemptions="zones that a claim isolates which holds (§ 183.410(b)); the claims are judged by isolation-claim",
    per_set=True,
    needs=("ignition",),
)
def ignition_protection(case: Case) -> Iterator[Outcome]:
    """Is every load, source, switch and overcurrent device in a petrol-vapour zone ignition protected?

    A zone counts by its own fact `petrol_vapour`, whatever fuel the engine burns; so does one
    that shares air with it over openings (`opens_to`), unless it is isolated from it.
    """
    if case.limits.ignition is None:
        return
    vapour = vapour_zones(case.boat, case.limits.ignition)
    for device in case.boat.devices.values():
        if not isinstance(device.part, (Load, Source, Switch, Diode, Overcurrent)):
            continue
        source = vapour.comes_from.get(device.zone)
        place = Place(device.id, device.at, device.circuit)
        if source is None:
            continue
        if device.part.ignition_protected:
            yield ignition_protection.passed(case, place)
        else:
            told = _told_spark(device, device.part.id, case.boat.zones[source])
            yield ignition_protection.found(case, place, told)
    for name, (claim, verdict) in sorted(vapour.in_doubt.items()):
        fault = f"{name} shares air with {claim.zone}, which has petrol vapour, and its isolation lacks figures"
        yield ignition_protection.not_assessed(case, Place(name, claim.at), fault, ", ".join(verdict.missing))


def _told_spark(device: Device, part: str, source: Zone) -> Told:
    """Tell a part that can spark in a zone's own vapour, or in what comes from another zone."""
    is_own = source.id == device.zone
    where = "which has petrol vapour" if is_own else f"which shares air with {source.id}, a zone with petrol vapour"
    inputs = [("part", part), ("zone", device.zone)] + ([] if is_own else [("vapour", source.id)])
    return Told(
        fault=f"{part} is not ignition protected and stands in {device.zone}, {where}",
        remedy="use an ignition-protected part, move it, or keep the petrol out of this zone"
        + ("" if is_own else f", or close the opening to {source.id}"),
        also_at=(source.at_petrol,),
        inputs=tuple(inputs),
    )
