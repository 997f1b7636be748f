"""Write tables as CSV (RFC 4180) that a spreadsheet opens without taking any text for a formula."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from checker.reading.words import flat

Cell = str | int | float | None
"""A text, a number, or nothing."""

# A spreadsheet may read the wide forms of the signs like the plain ones.
_FORMULA = re.compile("[=+\\-@\t\r\uff1d\uff0b\uff0d\uff20]")
_NUMBER = re.compile(r"-[0-9]+(\.[0-9]+)?\Z")
# A semicolon or tab parts the cells where a spreadsheet is set up so; in quotes it does not.
_NEEDS_QUOTES = re.compile('[",;\t\r\n]|^ | $')


@dataclass(frozen=True, slots=True)
class Table:
    """Hold a list: the headings, with units, and the rows under them."""

    headings: tuple[str, ...]
    rows: Sequence[tuple[Cell, ...]]


def csv_text(table: Table) -> str:
    """Return a table as CSV: lines end in CR LF, text is quoted where it must be."""
    return "".join(_line(row) for row in (table.headings, *table.rows))


def _line(cells: Iterable[Cell]) -> str:
    return ",".join(_written(cell) for cell in cells) + "\r\n"


def _written(cell: Cell) -> str:
    if cell is None:
        return ""
    if isinstance(cell, (int, float)):
        return number(cell)
    text = flat(cell)
    if _FORMULA.match(text) and not _NUMBER.match(text):
        text = f"'{text}"
    quoted = text.replace('"', '""')
    return f'"{quoted}"' if _NEEDS_QUOTES.search(text) else text


def number(value: float) -> str:
    """Print a number with at most three decimals and no tail of zeros."""
    text = f"{value:.3f}".rstrip("0").rstrip(".")
    return "0" if text in ("-0", "") else text
