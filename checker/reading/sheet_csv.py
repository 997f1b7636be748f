"""Read a filled-in test sheet that a spreadsheet saved as CSV, with the position of every cell.

RFC 4180, and what spreadsheets make of it: a semicolon between the cells where a comma divides
decimals, a byte order mark, blank lines. The sheet becomes a document of the same form as one
that is written in YAML, so that both are held against one schema.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Any, NamedTuple

from checker.finding import Span
from checker.reading.document import Document, Fault
from checker.reading.words import nearest, shown

COLUMNS = ("step", "what", "where", "expected", "at least", "at most", "measured", "with", "instrument", "note")
"""The columns of a sheet. `with` is the current that flowed, or what the clamp showed."""
UNITS = {"fitted": "A", "all-off": "A", "leakage": "mA", "drop": "V", "charging": "A"}
"""The unit of a bare number in the column `measured`; in `with` it is always A."""
_FIELD = {"all-off": "all_off"}
_SINGLE = ("sheet", "content", "date", "role", "conditions", "bonding", "leakage")
_OF_PARTS = ("instrument", "fitted", "polarity", "all-off", "function", "drop", "charging")
_NUMBER = re.compile(r"[0-9]+([.,][0-9]+)?\Z")
_NEEDED = ("step", "measured", "with")
_LONGEST = 2_000_000


class Cell(NamedTuple):
    """Hold a cell's text without blanks around it, and where it begins."""

    text: str
    at: Span


def read_sheet_csv(content: bytes, file: str) -> Document:
    """Read a sheet. Never raises: whatever is wrong is in the document's faults."""
    document = Document(file, data={})
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError:
        document.faults.append(
            Fault("unreadable-file", Span(file, 1, 1), "the file is not UTF-8", "save it as “CSV UTF-8”")
        )
        return document
    if len(text) > _LONGEST:
        document.faults.append(Fault("unreadable-file", Span(file, 1, 1), "the file is too long for a test sheet"))
        return document
    rows = [row for row in _rows(text, file, document) if any(cell.text for cell in row)]
    if not document.faults:
        _fill(document, rows)
    return document


def _rows(text: str, file: str, document: Document) -> Iterator[list[Cell]]:
    """Yield the rows with the place of each cell; lines and columns are counted from 1."""
    head = text.partition("\n")[0]
    divider = ";" if head.count(";") > head.count(",") else ","
    line, column, index = 1, 1, 0
    row: list[Cell] = []
    while index < len(text):
        at, written = Span(file, line, column), []
        if text[index] == '"':
            index, column = index + 1, column + 1
            while index < len(text) and not (text[index] == '"' and text[index + 1 : index + 2] != '"'):
                step = 2 if text[index] == '"' else 1
                written.append(text[index])
                line, column = (line + 1, 1) if text[index] == "\n" else (line, column + step)
                index += step
            if index == len(text):
                message = "a cell begins with a quotation mark and does not end with one"
                document.faults.append(Fault("unreadable-file", at, message, "close it, or write it twice"))
                return
            index, column = index + 1, column + 1
        while index < len(text) and text[index] not in (divider, "\n"):
            written.append(text[index])
            index, column = index + 1, column + 1
        row.append(Cell("".join(written).strip(), at))
        if index == len(text) or text[index] == "\n":
            yield row
            row, line, column = [], line + 1, 1
        else:
            column += 1
            if index + 1 == len(text):
                row.append(Cell("", Span(file, line, column)))
                yield row
        index += 1


def _fill(document: Document, rows: list[list[Cell]]) -> None:
    names = [cell.text.lower() for cell in rows[0]] if rows else []
    for needed in _NEEDED:
        if needed not in names:
            message = f"there is no column “{needed}” in the first line"
            columns = ", ".join(COLUMNS)
            document.faults.append(Fault("missing-field", Span(document.file, 1, 1), message, f"columns: {columns}"))
    if document.faults:
        return
    for row in rows[1:]:
        cells = dict(zip(names, row, strict=False))
        if (step := cells.get("step")) is None or not step.text:
            continue
        _take(document, step, cells)


def _take(document: Document, step: Cell, cells: dict[str, Cell]) -> None:
    """Put one row into the document; a row whose cell `measured` is empty says nothing."""
    nothing = Cell("", step.at)
    kind, _, part = step.text.partition(" ")
    measured, beside = cells.get("measured", nothing), cells.get("with", nothing)
    if kind not in (*_SINGLE, *_OF_PARTS) or (kind in _OF_PARTS) is not bool(part.strip()):
        meant = nearest(kind, (*_SINGLE, *_OF_PARTS))
        remedy = f"did you mean “{meant}”?" if meant and meant != kind else "take the steps from a printed sheet"
        document.faults.append(Fault("unknown-field", step.at, f"there is no step “{shown(step.text)}”", remedy))
        return
    if not measured.text and not beside.text:
        return
    value: Any
    if kind == "instrument":
        what = cells.get("what", nothing)
        pairs = {"name": what if what.text else step, "calibrated_until": measured}
    elif kind in ("drop", "charging"):
        first, second = ("drop", "current") if kind == "drop" else ("shunt", "clamp")
        pairs = {first: _with_unit(measured, UNITS[kind]), second: _with_unit(beside, "A")}
        pairs |= {name: cells[name] for name in ("instrument", "note") if cells.get(name, nothing).text}
    else:
        pairs = {}
    path = (_FIELD.get(kind, kind) if kind != "instrument" else "instruments", *((part.strip(),) if part else ()))
    if path in document.places:
        first_at = document.places[path][0]
        message = f"the step “{shown(step.text)}” is written twice"
        document.faults.append(Fault("repeated-key", step.at, message, f"the other one stands in {first_at}"))
        return
    if pairs:
        value = {name: cell.text for name, cell in pairs.items() if cell.text}
        for name, cell in pairs.items():
            document.places[(*path, name)] = (cell.at, cell.at)
    else:
        value = _with_unit(measured, UNITS.get(kind, "")).text
    document.places[path] = (step.at, measured.at if not pairs else step.at)
    document.places.setdefault(path[:1], (step.at, step.at))
    target = document.data
    for key in path[:-1]:
        target = target.setdefault(key, {})
    target[path[-1]] = value


def _with_unit(cell: Cell, unit: str) -> Cell:
    """Give a bare number the unit of its column, and a decimal point for a decimal comma."""
    if not unit or not _NUMBER.match(cell.text):
        return cell
    return Cell(f"{cell.text.replace(',', '.')} {unit}", cell.at)
