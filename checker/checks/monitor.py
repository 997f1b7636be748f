"""Judge the battery monitor: whose current its shunt counts, where it is fed, and what it is set to."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.parts import Load, Shunt
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import ampere, plain
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.source_rule import source_rule
from checker.network.graph import EdgeKind
from checker.network.sensing import bank_tops, foreign_batteries
from checker.network.states import places, places_beyond
from checker.reading.quantity import Dimension, QuantityError, read_number


def _shunts(case: Case) -> Iterator[tuple[Device, Shunt]]:
    for device in case.boat.devices.values():
        if isinstance(device.part, Shunt):
            yield device, device.part


def _stands_at_bank(case: Case, shunt: Device) -> bool:
    """Tell whether a shunt stands at the bank it is to measure; where not, `shunt-direction` tells it."""
    metering = next(m for m in case.studies.metering[0] if m.shunt == shunt.id)
    return metering.is_beside_bank and not metering.other_bank


def _at(device: Device, state: str = "") -> Place:
    return Place(device.id, device.at, device.circuit, state)


def _instruments(case: Case, shunt: Device) -> list[Device]:
    """Return the devices that belong to a shunt."""
    return [device for device in case.boat.devices.values() if device.belongs_to == shunt.id]


@check(
    title="Only its own bank stands on the bank's side of a shunt",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="what the other bank gives and takes is counted too: start currents appear as house current",
    catalogue=("SHU-07",),
)
def shunt_banks(case: Case) -> Iterator[Outcome]:
    """With the shunt taken out, does no battery of another bank stay joined to its stud bat?

    Asked in every normal switch state. A start battery that lands on the boat's side of the
    shunt is not counted, and is sound. A shunt that does not face its own bank, or has a second
    path round it, is told by `shunt-direction` and `shunt-bypass`.
    """
    for device, _ in _shunts(case):
        words, foreign = "", None
        for state in case.studies.states.kept:
            here = (
                foreign_batteries(case.studies.network, state, device.id, device.measures) if state.is_normal else None
            )
            if here is not None and not foreign:
                words, foreign = case.studies.state_words(state), here
        for one in foreign or ():
            told = Told(
                fault=f"{one.battery} of bank {one.bank} lands on the bank's side of {device.id}, "
                f"which measures {device.measures}: its current is counted as that of {device.measures}",
                remedy=f"land it on the boat's side, e.g. on {case.boat.reference}",
                path=one.path,
                inputs=(("battery", one.battery), ("path", " ".join(one.path))),
            )
            yield shunt_banks.found(case, _last_place(case, one.last, device, words), told)
        if foreign == ():
            yield shunt_banks.passed(case, _at(device))


def _last_place(case: Case, name: str, shunt: Device, words: str) -> Place:
    conductor = case.boat.conductors.get(name)
    if conductor is not None:
        return Place(name, conductor.at, conductor.circuit, words)
    return _at(case.boat.devices.get(name, shunt), words)


@check(
    title="A monitor stays fed with the battery switches off",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="it forgets its count each time the switch is opened",
    level=Level.WARNING,
    catalogue=("SHU-08",),
)
def monitor_supply(case: Case) -> Iterator[Outcome]:
    """With every hand switch open, is the monitor's supply still joined to the positive of its bank?

    The supply is the shunt's post vbat, or the feed of its instrument where nothing lands on
    vbat. A fuse in the lead is wanted; a missing one is found by `unprotected-conductor`. A
    shunt that does not stand at its bank is told by `shunt-direction`, a bank that is shorted by
    `dead-short`.
    """
    off, network = case.studies.all_off, case.studies.network
    tops = bank_tops(network, case.studies.banks)
    for device, _ in _shunts(case):
        if not _stands_at_bank(case, device) or device.measures not in tops or off.conflicts:
            continue
        posts = _supply_posts(case, device)
        if not posts:
            fault = "where its monitor takes its supply was not recorded"
            yield monitor_supply.not_assessed(case, _at(device), fault, f"a conductor to {device.id}.vbat")
            continue
        live = places_beyond(network, off.net, [off.net[post] for post in tops[device.measures]])
        if any(off.net[post] in live for post in posts):
            yield monitor_supply.passed(case, _at(device))
            continue
        name = network.posts[posts[0]]
        conductor = next((c for c in case.boat.conductors.values() if name in (c.start, c.end)), None)
        place = _at(device, off.state.words)
        if conductor is not None:
            place = Place(conductor.id, conductor.at, conductor.circuit, off.state.words)
        told = Told(
            fault=f"{name} is parted from the positive of bank {device.measures} when every switch is off",
            remedy=f"feed it by a fuse of its own from the positive of bank {device.measures}, ahead of the switch",
            inputs=(("supply", name), ("bank", device.measures)),
        )
        yield monitor_supply.found(case, place, told)


def _supply_posts(case: Case, shunt: Device) -> list[int]:
    """Return the posts that the monitor is fed by: vbat if anything leads there, else its instrument's feed."""
    network = case.studies.network
    vbat, aux = (network.index[f"{shunt.id}.{post}"] for post in ("vbat", "aux"))
    ends = {post for edge in network.edges if edge.part in case.boat.conductors for post in (edge.a, edge.b)}
    if vbat in ends:
        return [vbat]
    fed: list[int] = []
    for instrument in _instruments(case, shunt):
        mounted = {other for _, other in instrument.mounts}
        if isinstance(instrument.part, Load) and not mounted & {network.posts[vbat], network.posts[aux]}:
            fed.append(network.index[f"{instrument.id}.{instrument.part.feed_post}"])
    return fed


@check(
    title="Every bank that is monitored has one shunt",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the monitor shows nothing, or the same current twice",
    level=Level.WARNING,
    catalogue=("SHU-11",),
)
def monitor_map(case: Case) -> Iterator[Outcome]:
    """Does exactly one shunt measure each bank whose charge is counted?

    Which banks are counted is written in `facts: monitored`.
    """
    boat = case.boat
    if boat.monitored is None:
        fault = "which banks are monitored was not recorded"
        yield monitor_map.not_assessed(case, Place("facts", boat.at_facts), fault, "monitored")
        return
    for bank in boat.monitored:
        shunts = _nearest_first(case, [device for device, _ in _shunts(case) if device.measures == bank])
        if not shunts:
            told = Told(
                fault=f"bank {bank} is to be monitored, but no shunt measures it",
                remedy=f"put a shunt into its negative (`measures: {bank}`), or take {bank} out of `monitored`",
                inputs=(("bank", bank),),
            )
            yield monitor_map.found(case, Place(bank, boat.at_facts), told)
        elif len(shunts) == 1:
            yield monitor_map.passed(case, _at(shunts[0]))
        for device in shunts[1:]:
            told = Told(
                fault=f"{shunts[0].id} measures bank {bank} too: two monitors show the current of one bank",
                remedy=f"take {device.id} out, or name the bank that it stands at",
                inputs=(("bank", bank), ("shunts", " ".join(shunt.id for shunt in shunts))),
            )
            yield monitor_map.found(case, _at(device), told)


def _nearest_first(case: Case, shunts: list[Device]) -> list[Device]:
    """Return shunts with those first that stand at their bank with no other shunt between."""
    network = case.studies.network
    place = places(network, case.studies.usual.state, (EdgeKind.SHUNT,))
    at_bank = {(b.bank, place[post]) for b in network.batteries for post in (b.pos, b.neg)}
    return sorted(shunts, key=lambda s: ((s.measures, place[network.index[f"{s.id}.bat"]]) not in at_bank, s.id))


@check(
    title="A monitor is set to its shunt and its bank",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; the ratio may differ by the rounding of a name plate",
    formula="|set ratio − R of the shunt| ≤ 3 %; |set capacity − capacity of the bank| ≤ 5 %",
    why="every figure that it shows is wrong by one factor",
    level=Level.WARNING,
    catalogue=("SHU-12",),
)
def monitor_settings(case: Case) -> Iterator[Outcome]:
    """Are the ratio and the capacity that a monitor is set to those of its shunt and its bank?

    They are written as `set` at the shunt, or at the instrument that belongs to it. Strings in
    parallel add up to the capacity of a bank, batteries in series do not.
    """
    for shunt, part in _shunts(case):
        holders = [shunt, *_instruments(case, shunt)]
        by_ratio = next((device for device in holders if device.set_ratio), None)
        by_capacity = next((device for device in holders if device.set_capacity_ah is not None), None)
        holder = by_ratio or by_capacity or next((d for d in holders[1:] if isinstance(d.part, Load)), shunt)
        if by_ratio is None:
            fault = f"the ratio that the monitor of {shunt.id} is set to was not recorded"
            yield monitor_settings.not_assessed(case, Place(holder.id, holder.at_set), fault, "set: ratio")
        else:
            yield _judge_ratio(case, by_ratio, part)
        if by_capacity is None:
            fault = f"the capacity that the monitor of {shunt.id} is set to was not recorded"
            yield monitor_settings.not_assessed(case, Place(holder.id, holder.at_set), fault, "set: capacity")
        else:
            yield from _judge_capacity(case, by_capacity, shunt)


def _judge_ratio(case: Case, device: Device, part: Shunt) -> Outcome:
    place = Place(device.id, device.at_set)
    set_ohm = _ratio_ohm(device.set_ratio)
    if set_ohm is None:
        return monitor_settings.not_assessed(
            case, place, f"“{device.set_ratio}” is no ratio such as 500 A = 50 mV", "set: ratio"
        )
    if part.resistance_ohm is None:
        fault = "its resistance, which is its ratio, was not recorded"
        return monitor_settings.not_assessed(case, Place(part.id, part.at), fault, "resistance")
    gap = abs(set_ohm - part.resistance_ohm) / part.resistance_ohm if part.resistance_ohm else 1.0
    right = f"{ampere(part.rating_a)} = {plain(part.rating_a * part.resistance_ohm * 1000)} mV"
    told = Told(
        fault=f"it is set to {device.set_ratio}, but {part.id} gives {right}",
        remedy=f"set it to {right}, or fit the shunt that it is set to",
        inputs=(("set", device.set_ratio), ("shunt", right)),
    )
    measure = Measure("difference of ratio", gap, source_rule().ratio_difference_fraction, "", is_stepped=True)
    return monitor_settings.judge(case, place, measure, lambda: told)


def _ratio_ohm(text: str) -> float | None:
    """Return the resistance that a ratio such as "500 A = 50 mV" stands for, None where it is no ratio."""
    current, equals, voltage = text.partition("=")
    try:
        current_a = read_number(current.strip(), Dimension.CURRENT)
        voltage_v = read_number(voltage.strip(), Dimension.VOLTAGE)
    except QuantityError:
        return None
    return voltage_v / current_a if equals and current_a else None


def _judge_capacity(case: Case, device: Device, shunt: Device) -> Iterator[Outcome]:
    bank = shunt.measures
    found = next((one for one in case.studies.banks if one.id == bank and one.strings), None)
    set_ah = device.set_capacity_ah
    if found is None or set_ah is None or not _stands_at_bank(case, shunt):
        return
    gap = abs(set_ah - found.capacity_ah) / found.capacity_ah if found.capacity_ah else 1.0
    told = Told(
        fault=f"it is set to {plain(set_ah)} Ah, but bank {bank} has {plain(found.capacity_ah)} Ah",
        remedy=f"set it to {plain(found.capacity_ah)} Ah",
        inputs=(("set", f"{set_ah:g} Ah"), ("bank", f"{found.capacity_ah:g} Ah")),
    )
    measure = Measure("difference of capacity", gap, source_rule().capacity_difference_fraction, "", is_stepped=True)
    yield monitor_settings.judge(case, Place(device.id, device.at_set), measure, lambda: told)
