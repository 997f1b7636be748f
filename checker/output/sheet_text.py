"""Write the test sheet of a hull, as Markdown to read and as CSV to fill in at the boat.

What was measured already is filled in, so that a sheet can be printed again after a change.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from checker.checks.words import ampere, plain
from checker.limits.measuring_rule import MeasuringRule
from checker.output import markdown
from checker.output.csv_table import Cell, Table, csv_text
from checker.output.text import CAUTION
from checker.reading.sheet_csv import COLUMNS
from checker.result.model import Handover, SubjectResult
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
from checker.result.sheet_file import Reading

GROUPS: Mapping[str, tuple[str, str]] = {
    FITTED: ("Devices as fitted", "Read the rating on each fuse and breaker. Everything is dead."),
    POLARITY: ("Polarity and continuity", "At each load: ok, reversed, or open where no connection is found."),
    BONDING: ("Bonding", "With everything dead: ok, none or several."),
    LEAKAGE: ("Leakage", "A milliammeter from DC positive to the bonding system; loads off."),
    ALL_OFF: ("Everything off", "All switches open. The current at each bank's post, and what stays live."),
    FUNCTION: ("Each load with its own device", "Switch the device off, or take the fuse out: dead or live."),
    DROP: ("Drop under load", "Load the circuit; measure the volts between both pairs of points and add them."),
    CHARGING: ("Charging", "One source alone, everything else off: what the monitor shows, and a clamp around all "
               "cables at the bank's post."),
}  # fmt: skip
SAFETY = (
    "Disconnect the batteries before the dead tests. A battery can drive thousands of amperes through a tool or a "
    "ring: cover what is live, take metal off your hands, and do not work alone."
)


def sheet_csv(subject: SubjectResult) -> str:
    """Return the sheet as CSV: a row a step, the columns `measured` and `with` to be filled in."""
    handover = _handover(subject)
    sheet = handover.sheet
    date = sheet.date.isoformat() if sheet and sheet.date else ""
    rows: list[tuple[Cell, ...]] = [
        _row("sheet", "the hull", measured=subject.id),
        _row("content", "the wiring that this sheet is printed for", measured=handover.content),
        _row("date", "the day of the measurements", expected="e.g. 2026-05-20", measured=date),
        _row("role", "who measures; a role, no name", measured=sheet.role if sheet else ""),
        _row("conditions", "e.g. ambient temperature, battery at rest", measured=sheet.conditions if sheet else ""),
    ]
    instruments = sheet.instruments if sheet else ()
    for instrument in instruments:
        until = instrument.calibrated_until.isoformat() if instrument.calibrated_until else ""
        rows.append(_row(f"instrument {instrument.id}", instrument.name, expected="calibrated until", measured=until))
    if not instruments:
        for name, what in (("DMM-1", "multimeter"), ("CL-1", "clamp meter")):
            rows.append(_row(f"instrument {name}", what, expected="calibrated until"))
    readings = sheet.readings if sheet else {}
    rows += [_step_row(step, readings.get(step.id), handover.rule) for step in handover.steps]
    return csv_text(Table(COLUMNS, rows))


def _handover(subject: SubjectResult) -> Handover:
    assert subject.handover is not None
    return subject.handover


def _row(
    step: str, what: str, where: str = "", expected: str = "", least: str = "", most: str = "", measured: str = "",
    beside: str = "", instrument: str = "",
) -> tuple[Cell, ...]:  # fmt: skip
    return (step, what, where, expected, least, most, measured, beside, instrument, "")


def _step_row(step: Step, reading: Reading | None, rule: MeasuringRule) -> tuple[Cell, ...]:
    expected, least, most = expectation(step, rule)
    return _row(
        step.id, step.what, step.where, expected, least, most, measured_words(step, reading),
        ampere(reading.current_a) if reading and reading.current_a is not None else "",
        reading.instrument if reading else "",
    )  # fmt: skip


def expectation(step: Step, rule: MeasuringRule) -> tuple[str, str, str]:
    """Return what is expected of a step, and how little and how much it may be at the current to load with."""
    if step.kind == DROP and step.predicted_v is not None and step.current_a is not None:
        least_v = rule.least_drop_v(step.predicted_v)
        most_v = rule.most_drop_v(step.predicted_v, step.current_a, step.joints)
        if step.limit_v is not None:
            most_v = min(most_v, step.limit_v)
        at = f"{_volts(step.predicted_v)} at {ampere(step.current_a)}"
        return at, _volts(least_v) if least_v else "", _volts(most_v)
    if step.kind == LEAKAGE:
        return "", "", f"{plain(rule.leakage_a * 1000)} mA"
    if step.kind == ALL_OFF and step.current_a is not None:
        return step.expected, "", standby_words(step.current_a + rule.all_off_added_a)
    if step.kind == CHARGING:
        return "both alike", "", f"{rule.clamp_factor * 100:g} % + {ampere(rule.clamp_added_a)} apart"
    return step.expected, "", ""


def _volts(volts: float) -> str:
    return f"{volts:.3f} V"


def measured_words(step: Step, reading: Reading | None) -> str:
    """Return what was found at a step, as it is written on a sheet; empty where nothing was."""
    if reading is None:
        return ""
    if reading.value is None:
        return reading.word
    if step.kind == DROP:
        return _volts(reading.value)
    return standby_words(reading.value) if step.kind in (LEAKAGE, ALL_OFF) else ampere(round(reading.value, 3))


def sheet_markdown(subject: SubjectResult) -> str:
    """Return the sheet as Markdown: a table for each kind of step, in the order of the work."""
    return "\n".join([*_head(subject), *_tables(_handover(subject)), ""])


def _head(subject: SubjectResult) -> Iterator[str]:
    handover = _handover(subject)
    yield f"# Test sheet of {markdown.plain(subject.id)}"
    yield ""
    options = ", ".join(subject.options) or "no options"
    yield f"- class: {markdown.plain(subject.class_id)}, revision {subject.revision} of {subject.class_revision}"
    changes = ", ".join(subject.changes) or "none"
    yield f"- options: {markdown.plain(options)}; as-built changes: {markdown.plain(changes)}"
    yield f"- wiring: {handover.content} (changes with the wiring; the sheet holds for this one)"
    for use in subject.sets:
        yield f"- limits: {use.id}, {markdown.plain(use.title)}"
    sheet = handover.sheet
    for name, told in (
        ("date", sheet.date.isoformat() if sheet and sheet.date else ""), ("role", sheet.role if sheet else ""),
        ("conditions", sheet.conditions if sheet else ""),
        ("instruments", ", ".join(f"{i.id} {i.name}" for i in sheet.instruments) if sheet else ""),
    ):  # fmt: skip
        yield f"- {name}: {markdown.plain(told) or '…'}"
    yield from ("", f"{SAFETY} {CAUTION}")


def _tables(handover: Handover) -> Iterator[str]:
    readings = handover.sheet.readings if handover.sheet else {}
    for kind, (title, how) in GROUPS.items():
        steps = [step for step in handover.steps if step.kind == kind]
        if not steps:
            continue
        least = f" With less than {handover.rule.least_current_factor * 100:g} % of the current it does not count."
        yield from ("", f"## {title}", "", how + (least if kind == DROP else ""), "")
        yield "| step | what | where | expected | at least | at most | measured | with |"
        yield "| --- | --- | --- | --- | --- | --- | --- | --- |"
        for step in steps:
            cells = [str(cell) for cell in _step_row(step, readings.get(step.id), handover.rule)[:8]]
            yield f"| {' | '.join(markdown.plain(cell) for cell in cells)} |"
