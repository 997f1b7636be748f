"""Judge charge sources: their voltage, their devices, the arrays on their controllers."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

from checker.boat.hull import Device
from checker.boat.parts import Overcurrent
from checker.checks.charging import at_device, listed, normal_states, output_name, source_part
from checker.checks.check import Case, Place, Told, check
from checker.checks.remedy import highest_rating
from checker.checks.words import ampere, kept_length, plain, short_length
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.limit_set import standard_ratings
from checker.limits.source_rule import source_rule
from checker.network.graph import SourceTie
from checker.network.potentials import Potentials
from checker.network.sensing import array_strings, is_bank_voltage, open_reach, sole_source_devices


@check(
    title="A charge source has the voltage of the bank that it charges",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="1.0 ≤ output voltage / nominal voltage of the bank ≤ 1.4",
    why="a source of another voltage boils the bank, or never charges it",
    catalogue=("SRC-02",),
    exemptions="an output that lands on no bank, such as an array on its controller",
)
def source_voltage(case: Case) -> Iterator[Outcome]:
    """Does the voltage of every source output suit the nominal voltage between the posts where it lands?

    The nominal voltage is what the batteries give between the output's two posts. It is asked
    in every normal switch state in which the output reaches a bank; the worst is told. Where
    batteries are shorted or disagree no voltage is sure: `dead-short` and `battery-loop` tell it.
    """
    rule = source_rule()
    for source in case.studies.network.sources:
        worst: tuple[float, Potentials, Measure] | None = None
        for one in normal_states(case):
            nominal_v = one.between(source.out, source.back)
            if nominal_v is None or not is_bank_voltage(one, source) or one.conflicts:
                continue
            measure = _voltage_measure(source, nominal_v, rule.lowest_output_factor, rule.highest_output_factor)
            headroom = measure.headroom_fraction
            spare = -1.0 if headroom is None else headroom
            if worst is None or spare < worst[0]:
                worst = spare, one, measure
        if worst is None:
            continue
        device = case.boat.devices[source.device]
        nominal_v = worst[1].between(source.out, source.back) or 0.0
        told = _told_voltage(source, nominal_v)
        place = Place(output_name(case, source), device.at, device.circuit, case.studies.state_words(worst[1].state))
        yield source_voltage.judge(case, place, worst[2], lambda told=told: told)  # type: ignore[misc]


def _voltage_measure(source: SourceTie, nominal_v: float, lowest: float, highest: float) -> Measure:
    """Return the side of the allowed range that the output is nearer to, or beyond."""
    lower, upper = nominal_v * lowest, nominal_v * highest
    if nominal_v <= 0:
        return Measure("voltage where it lands", nominal_v, source.voltage_v, "V", at_least=True)
    if source.voltage_v - lower < upper - source.voltage_v:
        return Measure("output voltage", source.voltage_v, lower, "V", at_least=True, is_stepped=True)
    return Measure("output voltage", source.voltage_v, upper, "V", is_stepped=True)


def _told_voltage(source: SourceTie, nominal_v: float) -> Told:
    inputs = (("output", f"{source.voltage_v:g} V"), ("bank", f"{nominal_v:g} V"))
    if nominal_v <= 0:
        words = "the negative" if nominal_v < 0 else "the same net as its return"
        return Told(f"its output {source.post} lands on {words}", "swap its two leads", inputs=inputs)
    return Told(
        fault=f"its output {source.post} gives {plain(source.voltage_v)} V where the batteries stand at "
        f"{plain(nominal_v)} V",
        remedy=f"fit a source for {plain(nominal_v)} V, or land it on the bank that it is made for",
        inputs=inputs,
    )


@check(
    title="A cold array stays below what its controller bears, and below 50 V",
    basis=Basis.LAW,
    citation="33 CFR § 183.435 for 50 V and more; the maker's largest input voltage",
    formula="sum of the cold open voltages of the arrays in series ≤ largest input voltage, and < 50 V",
    why="the controller dies on a cold bright morning; from 50 V on other rules hold for the wiring",
    catalogue=("SRC-09",),
    caution="the cold open voltage is that at the lowest temperature the boat is used at",
)
def array_voltage(case: Case) -> Iterator[Outcome]:
    """Is the open voltage of every array, when it is coldest, within its controller's input and below 50 V?

    Arrays in series add up; each row of arrays that feeds an input is asked.
    """
    told: set[tuple[str, ...]] = set()
    for tie in case.studies.network.loads:
        if not tie.is_input:
            continue
        for one in normal_states(case):
            for row in array_strings(case.studies.network, one, tie):
                key = (tie.device, *(f"{source.device}.{source.post}" for source in row))
                if key not in told:
                    told.add(key)
                    yield from _judge_array(case, case.boat.devices[tie.device], row)


def _judge_array(case: Case, controller: Device, row: tuple[SourceTie, ...]) -> Iterator[Outcome]:
    part = source_part(case, controller.id)
    colds = [_cold_v(case, source) for source in row]
    arrays = {
        source_part(case, s.device).id: source_part(case, s.device)
        for s, v in zip(row, colds, strict=True)
        if v is None
    }
    for name, array in sorted(arrays.items()):
        fault = "its open voltage at the lowest temperature was not recorded"
        yield array_voltage.not_assessed(case, Place(name, array.at), fault, "cold_open_voltage")
    if part.max_input_v is None:
        fault = "the highest voltage that its input bears was not recorded"
        yield array_voltage.not_assessed(case, Place(part.id, part.at), fault, "max_input")
    if arrays:
        return
    cold_v = sum(volts for volts in colds if volts is not None)
    names = " + ".join(source.device for source in row)
    if part.max_input_v is not None:
        told = Told(
            fault=f"{names} {_gives(row)} {plain(cold_v)} V when cold and open, but {part.id} bears "
            f"{plain(part.max_input_v)} V",
            remedy=f"fewer modules in series, or a controller for at least {plain(cold_v)} V",
            inputs=(("arrays", names), ("cold", f"{cold_v:g} V"), ("bears", f"{part.max_input_v:g} V")),
        )
        measure = Measure("cold open voltage", cold_v, part.max_input_v, "V")
        yield array_voltage.judge(case, at_device(controller), measure, lambda: told)
    yield _judge_boundary(case, case.boat.devices[row[0].device], f"{names} {_gives(row)}", cold_v)


def _gives(row: tuple[SourceTie, ...]) -> str:
    return "gives" if len(row) == 1 else "give"


def _judge_boundary(case: Case, array: Device, arrays: str, cold_v: float) -> Outcome:
    boundary_v = source_rule().other_rules_from_v
    measure = Measure("cold open voltage", cold_v, boundary_v, "V")
    if cold_v < boundary_v - 1e-9:
        return array_voltage.judge(case, at_device(array), measure, lambda: Told("", ""))
    told = Told(
        fault=f"{arrays} {plain(cold_v)} V when cold and open: from {plain(boundary_v)} V on other rules "
        "hold for its conductors",
        remedy=f"fewer modules in series, so that it stays below {plain(boundary_v)} V",
        inputs=(("arrays", arrays), ("cold", f"{cold_v:g} V")),
    )
    return array_voltage.found(case, at_device(array), told, measure)


def _cold_v(case: Case, source: SourceTie) -> float | None:
    ends = source_part(case, source.device).outputs
    return next(end.cold_open_v for end in ends if end.post == source.post)


@check(
    title="The device of a source bears the most that the source gives",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; 46 CFR 28.860(a) asks 115 % for generators",
    formula="rating of the device ≥ largest output, cold",
    why="the fuse opens at full output: load dump, and a dark ship",
    level=Level.WARNING,
    catalogue=("SRC-13",),
    exemptions="an output that leaves by several devices, or by none",
)
def source_maximum(case: Case) -> Iterator[Outcome]:
    """Is the one device that all current of a source must pass rated for its largest output?

    The largest output is that of a cold machine, not the figure on the name plate. Behind an
    isolator every way may have to pass all. Sources that share a device are asked one by one;
    what they give together is judged in the operating conditions.
    """
    largest: dict[str, SourceTie] = {}
    for sole in sole_source_devices(case.studies.network, case.studies.usual):
        known = largest.get(sole.device)
        if known is None or sole.source.max_a > known.max_a:
            largest[sole.device] = sole.source
    for name, source in sorted(largest.items()):
        device = case.boat.devices[name]
        assert isinstance(device.part, Overcurrent)
        measure = Measure("rating", device.part.rating_a, source.max_a, "A", at_least=True, is_stepped=True)
        place = Place(name, device.at_rating, device.circuit)
        told = partial(_told_maximum, case, device, device.part, source)
        yield source_maximum.judge(case, place, measure, told)


def _told_maximum(case: Case, device: Device, part: Overcurrent, source: SourceTie) -> Told:
    made = [member.rating_a for member in part.series] or list(standard_ratings())
    wanted = next((rating for rating in made if rating >= source.max_a * (1 - 1e-9)), source.max_a)
    allowed = highest_rating(case, device.id)
    thicker = "" if allowed is not None and allowed >= wanted else ", and conductors that allow it"
    rated_a = source_part(case, source.device).rated_a
    plate = f" (its name plate says {ampere(rated_a)})" if rated_a is not None else ""
    gives = f"{output_name(case, source)} gives up to {ampere(source.max_a)}"
    return Told(
        fault=f"rated {ampere(part.rating_a)}, but {gives}{plate}, and all of it must pass here",
        remedy=f"fit {ampere(wanted)}{thicker}",
        inputs=(("rating", ampere(part.rating_a)), ("gives", gives)),
    )


@check(
    title="A charge source has a device inside it or close to it",
    basis=Basis.STANDARD,
    citation="the limit set's rule on charge sources (ISO 13297:2020 + A1:2022, 12.3)",
    why="the source feeds its own shorted lead, and nothing opens",
    catalogue=("SRC-01",),
    exemptions="a self-limiting source, where the limit set says so; a fuse inside the source",
    per_set=True,
)
def source_device(case: Case) -> Iterator[Outcome]:
    """Is every source output protected inside the source, or by a device within the set's distance of it?

    Measured along the conductors from the output's post, by the farthest way that no device
    ends. Sets without such a rule judge the lead by the rules for every other conductor.
    """
    rule = case.limits.source_device
    if rule is None:
        return
    for source in case.studies.network.sources:
        device, part = case.boat.devices[source.device], source_part(case, source.device)
        place = Place(output_name(case, source), device.at, device.circuit)
        if case.studies.usual.is_return(source.out):
            continue
        if part.has_internal_fuse:
            yield source_device.passed(case, place, "fused inside")
        elif source.is_limited and rule.is_self_limiting_exempt:
            yield source_device.passed(case, place, "self-limiting")
        else:
            yield _judge_reach(case, source, place, rule.max_distance_m)


def _judge_reach(case: Case, source: SourceTie, place: Place, limit_m: float) -> Outcome:
    reach = max(
        (open_reach(case.studies.network, one, source) for one in normal_states(case)),
        key=lambda one: (not one.devices, one.farthest_m),
    )
    measure = Measure("length ahead of the device", reach.farthest_m, limit_m, "m")
    part = source_part(case, source.device)
    if part.has_internal_fuse is None and not (reach.devices and measure.holds):
        fault = f"no device stands within {short_length(limit_m)}, and whether it is fused inside was not recorded"
        return source_device.not_assessed(case, Place(part.id, part.at), fault, "internal_fuse")
    ends = f"to {listed(reach.devices)}" if reach.devices else "and no device ends it"
    told = Told(
        fault=f"{short_length(reach.farthest_m)} of conductor leads from its output {source.post} to {reach.end} "
        f"{ends}",
        remedy=f"fit a device within {kept_length(limit_m)} of {source.device}",
        inputs=(("length", f"{reach.farthest_m:.3f} m"), ("devices", " ".join(reach.devices))),
    )
    if not reach.devices:
        return source_device.found(case, place, told)
    return source_device.judge(case, place, measure, lambda: told)
