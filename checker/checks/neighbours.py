"""Judge what stands beside a bank: other banks joined to it, loads that draw on the wrong one, fuel."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.parts import Battery
from checker.checks.charging import (
    at_device,
    batteries,
    chemistries,
    cranking_banks,
    listed,
    motors,
    normal_states,
    tops_of_banks,
)
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import plain, short_length
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.source_rule import source_rule
from checker.network.bank import Bank
from checker.network.graph import EdgeKind
from checker.network.starting import Joined, StartDraw, joined_banks, start_draws
from checker.network.walk import path_words


@check(
    title="Banks of unlike chemistry or charge voltage are not joined",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="a lithium bank floods the start battery with the full current that the cable lets through",
    catalogue=("SRC-07",),
    exemptions="an emergency link that is open in all normal states; banks behind an isolator; banks of two voltages, "
    "which `battery-loop` judges",
)
def unlike_banks(case: Case) -> Iterator[Outcome]:
    """Where two banks are joined in a normal switch state, are they of one kind and charged at one voltage?

    Relays and combiners count as closed.
    """
    banks = {bank.id: bank for bank in case.studies.banks}
    for joined in joined_banks(case.studies.network, normal_states(case), tops_of_banks(case)):
        first, second = (banks[name] for name in joined.banks)
        if abs(first.voltage_v - second.voltage_v) < 1e-9:
            yield from _judge_joined(case, joined, first, second)


def _judge_joined(case: Case, joined: Joined, first: Bank, second: Bank) -> Iterator[Outcome]:
    place = _joining_place(case, joined)
    kinds = [_family(case, bank) for bank in (first, second)]
    charges = [_charge_voltage_v(case, bank) for bank in (first, second)]
    differs_v = source_rule().charge_difference_factor * first.voltage_v
    inputs = (("first", f"{first.id} {kinds[0]}"), ("second", f"{second.id} {kinds[1]}"))
    remedy = "part the banks and charge one from the other by a DC-DC charger, or fit batteries of one kind"
    path = path_words(case.studies.network, joined.start, joined.path)
    if kinds[0] != kinds[1]:
        fault = f"it joins bank {first.id} ({kinds[0]}) and bank {second.id} ({kinds[1]})"
        yield unlike_banks.found(case, place, Told(fault, remedy, path, inputs))
        return
    if chemistries(case, first) == chemistries(case, second) and None in charges:
        yield unlike_banks.passed(case, place, f"both are {kinds[0]} of one kind")
        return
    missing = {
        part.id: part
        for bank, charge in zip((first, second), charges, strict=True)
        for part in batteries(case, bank)
        if charge is None and part.charge_voltage_v is None
    }
    for name, part in sorted(missing.items()):
        fault = f"banks {first.id} and {second.id} are joined, and its charge voltage was not recorded"
        yield unlike_banks.not_assessed(case, Place(name, part.at), fault, "charge_voltage")
    if charges[0] is not None and charges[1] is not None:
        gap_v = abs(charges[0] - charges[1])
        told = Told(
            fault=f"it joins bank {first.id}, charged at {plain(charges[0])} V, and bank {second.id}, "
            f"charged at {plain(charges[1])} V",
            remedy=remedy,
            path=path,
            inputs=(*inputs, ("charged at", f"{charges[0]:g} V and {charges[1]:g} V")),
        )
        yield unlike_banks.judge(case, place, Measure("difference", gap_v, differs_v, "V"), lambda: told)


def _joining_place(case: Case, joined: Joined) -> Place:
    """Return the first contact on the way between two banks, else the first of its parts."""
    words = case.studies.state_words(joined.state)
    contacts = [edge.part for edge in joined.path if edge.kind is EdgeKind.CONTACT]
    relays = [name for name in contacts if not getattr(case.boat.devices[name].part, "by_hand", True)]
    name = (relays or contacts or [edge.part for edge in joined.path] or [case.studies.network.batteries[0].device])[0]
    if name in case.boat.conductors:
        conductor = case.boat.conductors[name]
        return Place(name, conductor.at, conductor.circuit, words)
    device = case.boat.devices.get(name)
    return Place(name, device.at if device else case.boat.at, device.circuit if device else "", words)


def _family(case: Case, bank: Bank) -> str:
    return " and ".join(sorted({source_rule().family(chemistry) for chemistry in chemistries(case, bank)}))


def _charge_voltage_v(case: Case, bank: Bank) -> float | None:
    """Return the voltage that a bank is charged at: the sum along its first string, None if one is not recorded."""
    parts = [case.boat.devices[name].part for name in bank.strings[0]]
    stated = [part.charge_voltage_v for part in parts if isinstance(part, Battery)]
    known = [volts for volts in stated if volts is not None]
    return sum(known) if len(known) == len(stated) else None


@check(
    title="No load of the house draws on the start bank unnoticed",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the engine does not start in the morning",
    level=Level.WARNING,
    catalogue=("BNK-13",),
    exemptions="an emergency link that is open in all normal states; a relay, which opens by itself",
)
def start_bank_load(case: Case) -> Iterator[Outcome]:
    """In every normal switch state, does the bank that cranks feed nothing that has another bank of its own?

    A load has another bank if it is fed by that one alone in a further normal state, or with
    the switch in another position. Where several banks can crank, the start bank is the one
    with a stated cranking current, else every one but the largest.
    """
    start = cranking_banks(case)
    drawn = start_draws(case.boat, case.studies.network, case.studies.states, motors(case), start, tops_of_banks(case))
    strings = {bank.id: bank.strings for bank in case.studies.banks}
    for bank in start:
        told = [one for one in drawn if one.bank == bank]
        if not told:
            yield start_bank_load.passed(case, at_device(case.boat.devices[strings[bank][0][0]]))
        for one in told:
            yield start_bank_load.found(case, _switch_place(case, one), _told_draw(case, one))


def _switch_place(case: Case, one: StartDraw) -> Place:
    return at_device(case.boat.devices[one.switch], case.studies.state_words(one.state))


def _told_draw(case: Case, one: StartDraw) -> Told:
    names = [case.boat.devices[load].circuit or load for load in one.loads]
    return Told(
        fault=f"with {one.state.words} it lets {listed(names)} draw on start bank {one.bank}",
        remedy=f"a switch of its own for bank {one.bank}, and a link that is open in all normal states: "
        "write the state in which it is closed as `kind: abnormal`",
        inputs=(("bank", one.bank), ("state", one.state.words), ("loads", " ".join(one.loads))),
    )


@check(
    title="No battery stands where fuel can reach it",
    basis=Basis.LAW,
    citation="33 CFR § 183.420(c), (d)",
    why="a spark at the worst place",
    catalogue=("BNK-15",),
    exemptions="a zone in which no fuel tank, filter, fitting or metal line is",
    per_set=True,
)
def battery_fuel(case: Case) -> Iterator[Outcome]:
    """Is no battery in line with a fuel tank, filter or fitting, and is metal fuel pipe near one shielded?

    A zone without fuel parts (`fuel_parts: false`) settles it for all its batteries.
    """
    rule = case.limits.battery_fuel
    if rule is None:
        return
    unknown: set[str] = set()
    for device in case.boat.devices.values():
        if not isinstance(device.part, Battery):
            continue
        zone = case.boat.zones[device.zone]
        states_own = device.is_in_line_with_fuel is not None or device.fuel_clearance_m is not None
        if zone.has_fuel_parts is False and not states_own:
            yield battery_fuel.passed(case, at_device(device), f"no fuel parts in {zone.id}")
        elif zone.has_fuel_parts is None and not states_own:
            if zone.id not in unknown:
                unknown.add(zone.id)
                fault = f"batteries stand in {zone.id}, and whether fuel parts are there was not recorded"
                yield battery_fuel.not_assessed(case, Place(zone.id, zone.at), fault, "fuel_parts")
        else:
            yield from _judge_fuel(case, device, rule.clearance_m)


def _judge_fuel(case: Case, device: Device, clearance_m: float) -> Iterator[Outcome]:
    place = at_device(device)
    if device.is_in_line_with_fuel:
        told = Told(
            fault="it stands right above or below a fuel tank, filter or fitting",
            remedy="move it to the side, or to a zone without fuel parts",
            inputs=(("in_line_with_fuel", "true"),),
        )
        yield battery_fuel.found(case, place, told)
        return
    if device.is_in_line_with_fuel is None:
        fault = f"whether it stands above or below fuel parts in {device.zone} was not recorded"
        yield battery_fuel.not_assessed(case, place, fault, "in_line_with_fuel")
    if device.is_fuel_shielded:
        yield battery_fuel.passed(case, place, "metal fuel parts are shielded")
        return
    if device.fuel_clearance_m is None:
        fault = f"how far it stands from metal fuel parts in {device.zone} was not recorded"
        yield battery_fuel.not_assessed(case, place, fault, "fuel_clearance")
        return
    measure = Measure("clearance", device.fuel_clearance_m, clearance_m, "m", at_least=True)
    told = Told(
        fault=f"metal fuel parts are {short_length(device.fuel_clearance_m)} from it, with no shield",
        remedy=f"shield them with dielectric material, or keep {short_length(clearance_m)}",
        inputs=(("clearance", f"{device.fuel_clearance_m:.3f} m"),),
    )
    yield battery_fuel.judge(case, place, measure, lambda: told)
