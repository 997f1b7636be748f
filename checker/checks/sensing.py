"""Judge what charging is steered by: where regulators sense, what switches converters, what stops sources."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.parts import Load, Source
from checker.checks.charging import (
    at_device,
    chemistries,
    cranking_banks,
    normal_states,
    output_name,
    source_part,
    tops_of_banks,
)
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import plain
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.source_rule import source_rule
from checker.network.graph import SourceTie
from checker.network.potentials import Potentials
from checker.network.sensing import Charging, charged_banks, firmly_joined


def _charged(case: Case) -> tuple[Charging, ...]:
    if "charged banks" not in case.memo:
        case.memo["charged banks"] = charged_banks(case.studies.network, normal_states(case), tops_of_banks(case))
    found: tuple[Charging, ...] = case.memo["charged banks"]
    return found


@check(
    title="A regulator senses the bank that its alternator charges",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="it holds the voltage of another place: the bank is overcharged or never full",
    level=Level.WARNING,
    catalogue=("SRC-05", "SRC-06"),
    exemptions="a fuse in the sense lead",
)
def sense_place(case: Case) -> Iterator[Outcome]:
    """Is the sense post of every regulator joined to the positive of a bank that its alternator charges?

    With no diode and no contact that can open between the two. A regulator whose leads are
    swapped is told by `load-voltage`.
    """
    for device in case.boat.devices.values():
        part = device.part
        if not isinstance(part, Load) or not part.is_regulator:
            continue
        driven = case.boat.devices.get(device.regulates)
        if driven is None or not isinstance(driven.part, Source):
            fault = "the alternator that it regulates was not recorded"
            if driven is not None:
                fault = f"{driven.id}, which it regulates, is no source"
            yield sense_place.not_assessed(case, at_device(device), fault, "regulates")
            continue
        banks = sorted({c.bank for c in _charged(case) if c.source.device == driven.id})
        if not banks:
            fault = f"{driven.id}, which it regulates, charges no bank in any normal state"
            yield sense_place.not_assessed(case, at_device(device), fault, "a conductor to its bank")
            continue
        if not case.studies.usual.is_return(case.studies.network.index[f"{device.id}.{part.feed_post}"]):
            yield _judge_sense(case, device, part, driven.id, banks)


def _judge_sense(case: Case, device: Device, part: Load, source: str, banks: list[str]) -> Outcome:
    post = case.studies.network.index[f"{device.id}.{part.feed_post}"]
    tops = [top for bank in banks for top in tops_of_banks(case)[bank]]
    if not any(post in (edge.a, edge.b) for edge in case.studies.network.edges):
        fault = f"nothing lands on its sense post {part.feed_post}"
        return sense_place.not_assessed(case, at_device(device), fault, f"a conductor to {device.id}.{part.feed_post}")
    if firmly_joined(case.studies.network, case.studies.usual, post, tops):
        return sense_place.passed(case, at_device(device))
    told = Told(
        fault=f"its sense post {part.feed_post} is not joined to the positive of {' or '.join(banks)}, "
        f"which {source} charges, {_what_parts(case, post, tops)}",
        remedy=f"lead the sense wire, by its fuse, to the positive post of bank {banks[0]} or to what is "
        "bolted to it without switch or diode",
        inputs=(("sense", f"{device.id}.{part.feed_post}"), ("banks", " ".join(banks))),
    )
    return sense_place.found(case, at_device(device), told)


def _what_parts(case: Case, post: int, tops: list[int]) -> str:
    """Tell what stands between a sense post and the bank."""
    usual = case.studies.usual
    if usual.net[post] in {usual.net[top] for top in tops}:
        return "but over a switch that can open"
    return "but to another net"


@check(
    title="Behind a diode the voltage is sensed at the bank",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="drop of the diodes between source and bank ≤ 0.3 V without a sense lead",
    why="the source holds its own voltage and the bank gets less by the diode's drop: it is never full",
    level=Level.WARNING,
    catalogue=("SRC-06",),
    exemptions="an array, which holds no voltage; an output that reaches another of its banks directly",
)
def diode_sense(case: Case) -> Iterator[Outcome]:
    """Has every source that reaches its bank over a diode a regulator that senses beyond it?

    Where it has one, what it senses is judged by `sense-place`.
    """
    limit_v = source_rule().largest_unsensed_drop_v
    regulated = {d.regulates: d.id for d in case.boat.devices.values() if _is_regulator(d)}
    by_source: dict[SourceTie, list[Charging]] = {}
    for charging in _charged(case):
        by_source.setdefault(charging.source, []).append(charging)
    for source, ways in by_source.items():
        nearest = min(ways, key=lambda way: way.drop_v)
        if not nearest.drop_v:
            continue
        device = case.boat.devices[source.device]
        place = Place(output_name(case, source), device.at, device.circuit, case.studies.state_words(nearest.state))
        ends = [end for end in source_part(case, source.device).outputs if end.post == source.post]
        if source.device in regulated:
            yield diode_sense.passed(case, place, f"{regulated[source.device]} senses the voltage for it")
        elif any(end.cold_open_v is not None for end in ends):
            yield diode_sense.passed(case, place, "an array holds no voltage")
        else:
            told = Told(
                fault=f"bank {nearest.bank} gets {plain(nearest.drop_v)} V less than its output {source.post} holds: "
                "a diode stands between, and nothing senses beyond it",
                remedy=f"a regulator that senses bank {nearest.bank} (`regulates: {source.device}`), "
                f"or an isolator that drops {plain(limit_v)} V or less",
                inputs=(("drop", f"{nearest.drop_v:g} V"), ("output", source.post)),
            )
            measure = Measure("unsensed drop", nearest.drop_v, limit_v, "V")
            yield diode_sense.judge(case, place, measure, lambda told=told: told)  # type: ignore[misc]


def _is_regulator(device: Device) -> bool:
    return isinstance(device.part, Load) and device.part.is_regulator


@check(
    title="A converter fed from a start bank is switched off with the engine",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="it goes on drawing with the engine stopped, and the start battery is flat in the morning",
    level=Level.WARNING,
    catalogue=("SRC-08",),
    exemptions="a converter that no start bank feeds in a normal state",
)
def converter_enable(case: Case) -> Iterator[Outcome]:
    """Has every converter that hangs on a bank which cranks an engine something that switches it on and off?

    Asked in all normal switch states, and with every hand switch open.
    """
    tops = tops_of_banks(case)
    start = [post for bank in cranking_banks(case) for post in tops[bank]]
    told: set[str] = set()
    for tie in case.studies.network.loads:
        if not tie.is_input or tie.device in told:
            continue
        hanging = next(
            (one for one in [case.studies.all_off, *normal_states(case)] if _hangs(one, tie.feed, start)), None
        )
        if hanging is None:
            continue
        told.add(tie.device)
        device, part = case.boat.devices[tie.device], source_part(case, tie.device)
        if not part.enable:
            fault = f"{device.id} hangs on a start bank, and what switches it on was not recorded"
            yield converter_enable.not_assessed(case, Place(part.id, part.at), fault, "enable")
        elif part.enable != "none":
            yield converter_enable.passed(case, at_device(device), f"switched by: {part.enable}")
        else:
            fault = f"its input hangs on the start bank with {hanging.state.words}, and nothing switches it off"
            remedy = "lead the ignition or an engine-run signal to its enable post, or feed it from the house bank"
            inputs = (("input", case.studies.network.posts[tie.feed]), ("enable", part.enable))
            place = at_device(device, case.studies.state_words(hanging.state))
            yield converter_enable.found(case, place, Told(fault, remedy, inputs=inputs))


def _hangs(one: Potentials, post: int, others: list[int]) -> bool:
    return one.net[post] in {one.net[other] for other in others}


@check(
    title="A source of a lithium bank stops before the bank disconnects itself",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-13 (2022), clauses from memory",
    why="the battery manager opens under full charge: load dump, and a dark ship",
    catalogue=("BNK-16",),
)
def charge_stop(case: Case) -> Iterator[Outcome]:
    """Is every source that charges a lithium bank told to stop first, or able to lose its battery?"""
    rule = source_rule()
    lithium = {
        bank.id
        for bank in case.studies.banks
        if any(rule.family(chemistry) in rule.told_to_stop for chemistry in chemistries(case, bank))
    }
    not_recorded: set[str] = set()
    charged: dict[SourceTie, list[str]] = {}
    for charging in _charged(case):
        if charging.bank in lithium:
            charged.setdefault(charging.source, []).append(charging.bank)
    for source, banks in charged.items():
        device, part = case.boat.devices[source.device], source_part(case, source.device)
        place = Place(output_name(case, source), device.at, device.circuit)
        if part.on_disconnect == "harmed":
            told = Told(
                fault=f"it charges {' and '.join(banks)}, which can disconnect itself, and is harmed when that happens",
                remedy="lead the battery manager's charge-disable signal to it and write `on_disconnect: stops-first`, "
                "or charge a lead battery and that bank by a DC-DC charger",
                inputs=(("banks", " ".join(banks)), ("on_disconnect", part.on_disconnect)),
            )
            yield charge_stop.found(case, place, told)
        elif part.on_disconnect:
            yield charge_stop.passed(case, place, part.on_disconnect)
        elif part.id not in not_recorded:
            not_recorded.add(part.id)
            fault = f"what happens to it when {' or '.join(banks)} disconnects was not recorded"
            yield charge_stop.not_assessed(case, Place(part.id, part.at), fault, "on_disconnect")
