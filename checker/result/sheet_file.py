"""Read what was found and measured aboard a hull from its sheet, whatever file it was written in."""

from __future__ import annotations

import datetime
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, field

from checker.boat.entry import Entry
from checker.boat.patch import Patched
from checker.finding import Span
from checker.reading.document import Document, Fault
from checker.reading.quantity import Dimension
from checker.result.sheet import ALL_OFF, BONDING, CHARGING, DROP, FITTED, FUNCTION, LEAKAGE, POLARITY


@dataclass(frozen=True, slots=True)
class Reading:
    """Hold what one step of a test gave: a word, or a figure in SI, for some with the current beside it."""

    at: Span
    word: str = ""
    value: float | None = None
    current_a: float | None = None
    instrument: str = ""


@dataclass(frozen=True, slots=True)
class Instrument:
    """Hold one instrument; `calibrated_until` is None where that is not written."""

    id: str
    name: str
    calibrated_until: datetime.date | None
    at: Span


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """Hold the sheet of one hull. `content` is the mark of the wiring that it was printed for, or empty."""

    hull: str
    at: Span
    content: str = ""
    at_content: Span
    date: datetime.date | None = None
    role: str = ""
    conditions: str = ""
    instruments: tuple[Instrument, ...] = ()
    readings: Mapping[str, Reading] = field(default_factory=dict)


def read_sheets(documents: Sequence[Document], hulls: Collection[str]) -> tuple[dict[str, Sheet], list[Fault]]:
    """Return the sheet of each hull that has one, and what is wrong with the sheets."""
    faults: list[Fault] = []
    found: dict[str, Sheet] = {}
    for document in documents:
        top = Entry(Patched(document.data, (document.places,)), (), document.data, faults)
        sheet = _sheet(top)
        if sheet.hull not in hulls:
            top.unknown("hull", sheet.hull, top.at("sheet"), hulls)
        elif sheet.hull in found:
            top.fault("repeated-key", top.at("sheet"), f"hull “{sheet.hull}” has two sheets",
                      f"the other one stands in {found[sheet.hull].at}")  # fmt: skip
        else:
            found[sheet.hull] = sheet
    return found, faults


def _sheet(top: Entry) -> Sheet:
    readings: dict[str, Reading] = {}
    for kind, name in ((POLARITY, "polarity"), (FUNCTION, "function")):
        for part, word in top.fields(name).items():
            readings[f"{kind} {part}"] = Reading(top.at(name, part), word=str(word))
    if top.has("bonding"):
        readings[BONDING] = Reading(top.at("bonding"), word=top.text("bonding"))
    if top.has("leakage"):
        readings[LEAKAGE] = Reading(top.at("leakage"), value=top.number("leakage", Dimension.CURRENT))
    for kind, name in ((FITTED, "fitted"), (ALL_OFF, "all_off")):
        for part, value in top.fields(name).items():
            amps = top.quantity_at((name, part), value, Dimension.CURRENT)
            readings[f"{kind} {part}"] = Reading(top.at(name, part), value=amps)
    for kind, value_name, current, dimension in (
        (DROP, "drop", "current", Dimension.VOLTAGE), (CHARGING, "shunt", "clamp", Dimension.CURRENT),
    ):  # fmt: skip
        for row in top.entries(kind):
            readings[f"{kind} {row.id}"] = Reading(
                row.at(value_name), value=row.number(value_name, dimension),
                current_a=row.number(current, Dimension.CURRENT), instrument=row.text("instrument"),
            )  # fmt: skip
    instruments = tuple(
        Instrument(row.id, row.text("name"), _day(row, "calibrated_until"), row.at())
        for row in top.entries("instruments")
    )
    known = {instrument.id for instrument in instruments}
    for kind in (DROP, CHARGING):
        for row in top.entries(kind):
            if row.has("instrument") and row.text("instrument") not in known:
                row.unknown("instrument", row.text("instrument"), row.at("instrument"), known)
    return Sheet(
        hull=top.text("sheet"), at=top.at("sheet"), content=top.text("content"),
        at_content=top.at("content") if top.has("content") else top.at("sheet"), date=_day(top, "date"),
        role=top.text("role"), conditions=top.text("conditions"), instruments=instruments, readings=readings,
    )  # fmt: skip


def _day(row: Entry, name: str) -> datetime.date | None:
    if not row.has(name):
        return None
    try:
        return datetime.date.fromisoformat(row.text(name))
    except ValueError:
        row.fault("bad-value", row.at(name), f"{name}: “{row.text(name)}” is no date", "write e.g. 2028-05-29")
        return None
