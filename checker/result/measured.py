"""Judge what was found and measured aboard against what the wiring data predict.

A drop is held against its prediction both ways, and against the limit of the limit set apart
from that: a bad joint may keep the limit, and a sound one may break it.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from statistics import median

from checker.checks.words import ampere, plain
from checker.finding import Card, Measure, Outcome, Span, Verdict
from checker.limits.measuring_rule import MeasuringRule
from checker.reading.document import Fault
from checker.reading.words import nearest
from checker.result.measured_cards import (
    ALL_OFF_CURRENT,
    DROP_ABOVE,
    DROP_BELOW,
    DROP_LIMIT,
    FAR_FROM_SISTERS,
    FITTED_DEVICE,
    INSTRUMENT,
    LEAKAGE_CARD,
    LOAD_CURRENT,
    MISSING,
    OLD_SHEET,
    POLARITY_CARD,
    SHUNT_CLAMP,
    STAYS_LIVE,
    TOO_LITTLE,
)
from checker.result.sheet import (
    ALL_OFF,
    BONDING,
    CHARGING,
    DROP,
    FITTED,
    FUNCTION,
    LEAKAGE,
    POLARITY,
    Step,
    standby_words,
)
from checker.result.sheet_file import Reading, Sheet

MOST_TOLD = 4
"""Findings named beside a device as fitted; the rest are counted."""


@dataclass(frozen=True, slots=True)
class Judged:
    """Hold what the sheet of one hull came to.

    `outcomes` are findings and passes; `missing` the steps that are not done, those with too
    little current among them; `differing` the ratings as fitted where they differ, A, by device.
    """

    outcomes: tuple[Outcome, ...] = ()
    missing: tuple[Step, ...] = ()
    differing: Mapping[str, float] | None = None
    faults: tuple[Fault, ...] = ()


def judge_sheet(steps: Sequence[Step], sheet: Sheet, rule: MeasuringRule, content: str) -> Judged:
    """Judge a sheet against the plan of its boat; `content` is the mark of the wiring as it is."""
    outcomes = [*_instruments(sheet), *_printed_for(sheet, content)]
    missing: list[Step] = []
    differing: dict[str, float] = {}
    known = {step.id: step for step in steps}
    for step in steps:
        reading = sheet.readings.get(step.id)
        if reading is None:
            missing.append(step)
            continue
        found = list(_JUDGES[step.kind](step, reading, rule))
        if any(outcome.check == TOO_LITTLE.id for outcome in found):
            missing.append(step)
        if step.kind == FITTED and found[0].verdict is Verdict.FINDING and reading.value is not None:
            differing[step.part] = reading.value
        outcomes += found
    faults = [_unknown(name, reading, known) for name, reading in sheet.readings.items() if name not in known]
    return Judged(tuple(outcomes), tuple(missing), differing, tuple(faults))


def missing_outcome(steps: Sequence[Step], at: Span) -> Outcome:
    """Tell which steps were not done, in one finding."""
    kinds: dict[str, list[str]] = {}
    for step in steps:
        kinds.setdefault(step.kind, []).append(step.part)
    words = "; ".join(
        kind if kind in (BONDING, LEAKAGE) else f"{kind}: {', '.join(parts)}" for kind, parts in kinds.items()
    )
    number = f"{len(steps)} step{'' if len(steps) == 1 else 's'} of the test"
    return _found(
        MISSING, "test sheet", at, f"{number} {'is' if len(steps) == 1 else 'are'} not done ({words})",
        "do them and fill in the sheet", inputs=(("steps", " ".join(step.id for step in steps)),),
    )  # fmt: skip


def far_from_sisters(
    drops: Mapping[str, tuple[Sequence[Step], Sheet]], rule: MeasuringRule
) -> dict[str, list[Outcome]]:
    """Return for each hull of a class the drops that are far from those of its sisters.

    Args:
        drops: The plan and the sheet of each hull of one class that has a sheet.
        rule: The figures.
    """
    shares: dict[str, dict[str, float]] = {}
    for hull, (steps, sheet) in drops.items():
        for step in steps:
            reading = sheet.readings.get(step.id)
            if step.kind == DROP and step.ohm and reading and reading.value is not None and reading.current_a:
                shares.setdefault(step.id, {})[hull] = reading.value / (step.ohm * reading.current_a)
    found: dict[str, list[Outcome]] = {}
    for hull, (steps, sheet) in drops.items():
        for step in steps:
            others = [share for other, share in shares.get(step.id, {}).items() if other != hull]
            if step.id in sheet.readings and len(others) >= rule.sisters_fewest and hull in shares[step.id]:
                outcome = _far(step, sheet.readings[step.id], median(others), rule)
                if outcome is not None:
                    found.setdefault(hull, []).append(outcome)
    return found


def _far(step: Step, reading: Reading, share: float, rule: MeasuringRule) -> Outcome | None:
    assert step.ohm is not None
    assert reading.value is not None
    assert reading.current_a is not None
    usual_v = share * step.ohm * reading.current_a
    apart_v = abs(reading.value - usual_v)
    if apart_v <= max(rule.sisters_least_v, rule.sisters_factor * usual_v):
        return None
    return _found(
        FAR_FROM_SISTERS, step.part, reading.at,
        f"drops {plain(reading.value)} V at {ampere(reading.current_a)}, where its sisters would drop "
        f"{plain(usual_v)} V",
        "look at its joints, and measure again", inputs=_inputs(reading), circuit=step.circuit,
    )  # fmt: skip


def _instruments(sheet: Sheet) -> Iterator[Outcome]:
    lacking = [name for name, there in (("date", sheet.date), ("role", sheet.role), ("instruments", sheet.instruments))
               if not there]  # fmt: skip
    if lacking:
        fault = f"the sheet does not tell {' and '.join(lacking)}"
        yield _found(INSTRUMENT, "test sheet", sheet.at, fault, "write them at its head", inputs=(("lacks", fault),))
    for instrument in sheet.instruments:
        until = instrument.calibrated_until
        if until is not None and (sheet.date is None or sheet.date <= until):
            yield _passed(INSTRUMENT, instrument.id, instrument.at)
        else:
            past = "does not tell until when it is calibrated" if until is None else f"was calibrated until {until}"
            yield _found(
                INSTRUMENT, instrument.id, instrument.at, f"{instrument.name} {past}",
                "measure again with a calibrated one", inputs=(("until", str(until)),),
            )  # fmt: skip


def _printed_for(sheet: Sheet, content: str) -> Iterator[Outcome]:
    if not sheet.content:
        return
    if sheet.content == content:
        yield _passed(OLD_SHEET, "test sheet", sheet.at_content)
    else:
        yield _found(
            OLD_SHEET, "test sheet", sheet.at_content,
            f"it was printed for the wiring {sheet.content}, which is now {content}",
            "print it anew, repeat what the change touches, and write the new mark",
            inputs=(("sheet", sheet.content), ("now", content)),
        )  # fmt: skip


def _fitted(step: Step, reading: Reading, rule: MeasuringRule) -> Iterator[Outcome]:
    fitted = ampere(reading.value or 0.0)
    if fitted == step.expected:
        yield _passed(FITTED_DEVICE, step.part, reading.at, step.circuit)
    else:
        yield _found(
            FITTED_DEVICE, step.part, reading.at, f"{fitted} is fitted where the data say {step.expected}",
            f"find out which is right: then fit {step.expected}, or record {fitted} as an as-built change",
            inputs=(("fitted", fitted),),
            circuit=step.circuit,
        )  # fmt: skip


def _by_word(card: Card, good: str, told: Mapping[str, tuple[str, str]]) -> Callable[..., Iterator[Outcome]]:
    def judge(step: Step, reading: Reading, rule: MeasuringRule) -> Iterator[Outcome]:
        if reading.word == good:
            yield _passed(card, step.part, reading.at, step.circuit)
        else:
            fault, remedy = told[reading.word]
            yield _found(card, step.part, reading.at, fault, remedy, inputs=(("found", reading.word),),
                         circuit=step.circuit)  # fmt: skip

    return judge


def _leakage(step: Step, reading: Reading, rule: MeasuringRule) -> Iterator[Outcome]:
    value_a = reading.value or 0.0
    yield _judged(
        LEAKAGE_CARD, step, reading, Measure("leakage", value_a, rule.leakage_a, "A"),
        f"{plain(value_a * 1000)} mA leak from DC positive into the bonding system",
        "take circuits off one by one until it stops, and mend the one that stops it",
    )  # fmt: skip


def _all_off(step: Step, reading: Reading, rule: MeasuringRule) -> Iterator[Outcome]:
    if step.current_a is None:
        return
    value_a = reading.value or 0.0
    yield _judged(
        ALL_OFF_CURRENT, step, reading, Measure("current", value_a, step.current_a + rule.all_off_added_a, "A"),
        f"{standby_words(value_a)} flow with everything off, where {standby_words(step.current_a)} are declared",
        "pull the devices ahead of the switches one by one until it falls",
    )  # fmt: skip


def _drop(step: Step, reading: Reading, rule: MeasuringRule) -> Iterator[Outcome]:
    drop_v, current_a = reading.value or 0.0, reading.current_a or 0.0
    assert step.ohm is not None
    assert step.current_a is not None
    least_a = rule.least_current_factor * step.current_a
    if current_a < least_a * (1 - 1e-9):
        yield _found(
            TOO_LITTLE, step.part, reading.at,
            f"measured at {ampere(current_a)} of its {ampere(step.current_a)}: too little to count as measured",
            f"measure again with at least {ampere(least_a)}", inputs=_inputs(reading), circuit=step.circuit,
        )  # fmt: skip
        return
    most_a = rule.most_current_factor * step.current_a + rule.added_current_a
    yield _judged(
        LOAD_CURRENT, step, reading, Measure("current", current_a, most_a, "A"),
        f"draws {ampere(current_a)}, where the data say {ampere(step.current_a)}",
        "find out why; correct the load's current for the class, and let the checks judge it",
    )  # fmt: skip
    predicted_v = step.ohm * current_a
    most_v = rule.most_drop_v(predicted_v, current_a, step.joints)
    yield _judged(
        DROP_ABOVE, step, reading, Measure("drop", drop_v, most_v, "V"),
        f"drops {plain(drop_v)} V at {ampere(current_a)}, where its copper drops {plain(predicted_v)} V",
        f"remake its joints between {step.where}, and measure again",
    )  # fmt: skip
    yield _judged(
        DROP_BELOW, step, reading, Measure("drop", drop_v, rule.least_drop_v(predicted_v), "V", at_least=True),
        f"drops only {plain(drop_v)} V at {ampere(current_a)}, where its copper drops {plain(predicted_v)} V: too good",
        "find the second return path, or the cable that differs from the schedule",
    )  # fmt: skip
    if step.limit_v is not None:
        scaled_v = drop_v * step.current_a / current_a
        yield _judged(
            DROP_LIMIT, step, reading, Measure("drop", scaled_v, step.limit_v, "V"),
            f"drops {plain(scaled_v)} V at its {ampere(step.current_a)} by what was measured",
            "remake its joints, or use a larger gauge", limit_set=step.limit_set,
        )  # fmt: skip


def _charging(step: Step, reading: Reading, rule: MeasuringRule) -> Iterator[Outcome]:
    shunt_a, clamp_a = reading.value or 0.0, reading.current_a or 0.0
    most_a = rule.clamp_factor * clamp_a + rule.clamp_added_a
    yield _judged(
        SHUNT_CLAMP, step, reading, Measure("difference", abs(shunt_a - clamp_a), most_a, "A"),
        f"the monitor shows {ampere(shunt_a)}, a clamp {ampere(clamp_a)}",
        f"find what lands on the bank's side of the shunt while {step.part} runs",
    )  # fmt: skip


_JUDGES: Mapping[str, Callable[[Step, Reading, MeasuringRule], Iterator[Outcome]]] = {
    FITTED: _fitted,
    POLARITY: _by_word(POLARITY_CARD, "ok", {
        "reversed": ("positive and negative are swapped", "swap them, and test again before it is switched on"),
        "open": ("no connection was found", "find the break, and test again"),
    }),
    BONDING: _by_word(LEAKAGE_CARD, "ok", {
        "none": ("the bonding system does not meet the DC negative", "join them at the one place that the data show"),
        "several": ("the bonding system meets the DC negative at more than one place",
                    "find the second place, and part it"),
    }),
    LEAKAGE: _leakage,
    ALL_OFF: _all_off,
    FUNCTION: _by_word(STAYS_LIVE, "dead", {
        "live": ("it stays live with its own device off", "trace what else feeds it"),
    }),
    DROP: _drop,
    CHARGING: _charging,
}  # fmt: skip


def _unknown(name: str, reading: Reading, known: Mapping[str, Step]) -> Fault:
    meant = nearest(name, known)
    remedy = f"did you mean “{meant}”?" if meant else "print the sheet anew"
    return Fault("unknown-reference", reading.at, f"the boat's test has no step “{name}”", remedy)


def _inputs(reading: Reading) -> tuple[tuple[str, str], ...]:
    figures = (("measured", reading.value), ("with", reading.current_a))
    return tuple((name, f"{value:g}") for name, value in figures if value is not None)


def _judged(
    card: Card, step: Step, reading: Reading, measure: Measure, fault: str, remedy: str, limit_set: str = ""
) -> Outcome:
    if measure.holds:
        return _passed(card, step.part, reading.at, step.circuit, measure)._replace(limit_set=limit_set)
    return _found(card, step.part, reading.at, fault, remedy, inputs=_inputs(reading), circuit=step.circuit)._replace(
        measure=measure, limit_set=limit_set
    )


def _passed(card: Card, part: str, at: Span, circuit: str = "", measure: Measure | None = None) -> Outcome:
    return Outcome(verdict=Verdict.PASSED, check=card.id, level=card.level, part=part, at=at, circuit=circuit,
                   measure=measure)  # fmt: skip


def _found(
    card: Card, part: str, at: Span, fault: str, remedy: str, inputs: tuple[tuple[str, str], ...], circuit: str = ""
) -> Outcome:
    return Outcome(
        verdict=Verdict.FINDING, check=card.id, level=card.level, part=part, at=at, circuit=circuit, fault=fault,
        remedy=remedy, inputs=inputs,
    )  # fmt: skip


def with_as_fitted(judged: Judged, found_with: Callable[[str, float], Sequence[Outcome]]) -> Judged:
    """Return a judged sheet whose findings of other devices tell what the boat would be found with as fitted."""
    if not judged.differing:
        return judged
    outcomes = list(judged.outcomes)
    for index, outcome in enumerate(outcomes):
        if outcome.check == FITTED_DEVICE.id and outcome.part in judged.differing:
            more = found_with(outcome.part, judged.differing[outcome.part])
            names = list(dict.fromkeys(f"{o.check} at {o.part}" for o in more))
            told = ", ".join(names[:MOST_TOLD]) + (f" and {len(names) - MOST_TOLD} more" if names[MOST_TOLD:] else "")
            words = f"; as fitted the boat has also {told}" if names else "; as fitted the boat has no other finding"
            outcomes[index] = outcome._replace(fault=outcome.fault + words)
    return replace(judged, outcomes=tuple(outcomes))
