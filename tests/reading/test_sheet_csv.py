"""The filled-in sheet as a spreadsheet saves it: every cell at its place, and nothing that breaks the reader."""

from __future__ import annotations

import csv
import io

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker.reading.document import Fault
from checker.reading.schema import schema_faults
from checker.reading.sheet_csv import COLUMNS, read_sheet_csv

HEAD = "step,what,where,expected,at least,at most,measured,with,instrument,note\r\n"
SHEET = HEAD + (
    "sheet,the hull,,,,,TND-038,,,\r\n"
    "date,,,,,,2026-05-20,,,\r\n"
    'instrument DMM-1,"multimeter, bench",,,,,2027-01-31,,,\r\n'
    "fitted F-H,,,400 A,,,400,,,\r\n"
    "polarity P01,,,ok,,,ok,,,\r\n"
    "polarity P02,,,ok,,,,,,\r\n"
    "leakage,,,,,,0.2,,,\r\n"
    "all-off HOUSE,,,,,,0.5 A,,,\r\n"
    'drop P08,plotter,"a to b; c to d",,,,0.125,3.6,DMM-1,"remade, ""twice"""\r\n'
    "charging CHG.out1,,,,,,59.2,60,,\r\n"
)


def told(text: str | bytes) -> list[str]:
    """Return the faults of a sheet, those of its schema included."""
    document = read_sheet_csv(text if isinstance(text, bytes) else text.encode(), "sheets/a.csv")
    return [f"{f.at.line}:{f.at.column} {f.message}" for f in document.faults or schema_faults(document, "sheet")]


def test_a_filled_in_sheet_is_read_with_units_and_what_is_empty_left_out() -> None:
    document = read_sheet_csv(SHEET.encode(), "sheets/a.csv")
    assert told(SHEET) == []
    assert document.data == {
        "sheet": "TND-038", "date": "2026-05-20",
        "instruments": {"DMM-1": {"name": "multimeter, bench", "calibrated_until": "2027-01-31"}},
        "fitted": {"F-H": "400 A"}, "polarity": {"P01": "ok"}, "leakage": "0.2 mA", "all_off": {"HOUSE": "0.5 A"},
        "drop": {"P08": {"drop": "0.125 V", "current": "3.6 A", "instrument": "DMM-1", "note": 'remade, "twice"'}},
        "charging": {"CHG.out1": {"shunt": "59.2 A", "clamp": "60 A"}},
    }  # fmt: skip


def test_every_cell_is_found_at_its_line_and_column() -> None:
    document = read_sheet_csv(SHEET.encode(), "sheets/a.csv")
    lines = SHEET.split("\r\n")
    for path, text in (
        (("drop", "P08", "drop"), "0.125"),
        (("drop", "P08", "current"), "3.6"),
        (("fitted", "F-H"), "400"),
    ):
        at = document.places[path][1]
        assert lines[at.line - 1][at.column - 1 :].startswith(text)


def test_a_sheet_with_semicolons_and_decimal_commas_says_the_same() -> None:
    """As a spreadsheet of a country with decimal commas saves it, byte order mark and all."""
    buffer = io.StringIO()
    rows = [[cell.replace("0.125", "0,125").replace("3.6", "3,6").replace("59.2", "59,2").replace("0.2", "0,2")
             for cell in row] for row in csv.reader(io.StringIO(SHEET))]  # fmt: skip
    csv.writer(buffer, delimiter=";").writerows(rows)
    other = read_sheet_csv(b"\xef\xbb\xbf" + buffer.getvalue().encode(), "sheets/a.csv")
    assert other.data == read_sheet_csv(SHEET.encode(), "sheets/a.csv").data


def test_a_cell_over_two_lines_moves_what_stands_below_it() -> None:
    text = HEAD + 'sheet,"two\nlines",,,,,T,,,\r\nfitted F-H,,,,,,400 V,,,\r\n'
    (fault,) = told(text)
    assert fault.startswith("4:17 ")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (b"", "1:1 there is no column “step” in the first line"),
        (b"\xff\xfe", "1:1 the file is not UTF-8"),
        ("step,measured\r\n", "1:1 there is no column “with” in the first line"),
        (HEAD + 'sheet,"open,,,,,T,,,\r\n', "2:7 a cell begins with a quotation mark and does not end with one"),
        (HEAD + "drpo P01,,,,,,0.1,2,,\r\n", "2:1 there is no step “drpo P01”"),
        (HEAD + "drop,,,,,,0.1,2,,\r\n", "2:1 there is no step “drop”"),
        (HEAD + "sheet T,,,,,,T,,,\r\n", "2:1 there is no step “sheet T”"),
        (HEAD + "sheet,,,,,,T,,,\r\nsheet,,,,,,U,,,\r\n", "3:1 the step “sheet” is written twice"),
        (HEAD + "polarity P01,,,,,,ok,,,\r\n", "the file has no “sheet”"),
        (HEAD + "sheet,,,,,,T,,,\r\nfitted F-H,,,,,,much,,,\r\n", "3:17"),
        (HEAD + "sheet,,,,,,T,,,\r\nfitted F-H,,,,,,-4,,,\r\n", "3:17"),
        (HEAD + "sheet,,,,,,T,,,\r\ndrop P01,,,,,,0.1,,,\r\n", "drop “P01” has no “current”"),
        (HEAD + "sheet,,,,,,T,,,\r\npolarity P01,,,,,,wrong,,,\r\n", "3:19"),
        (HEAD + "sheet,,,,,,T,,,\r\npolarity ::error,,,,,,ok,,,\r\n", "3:1"),
        ("step,measured,with" + "," * 2_000_000, "1:1 the file is too long for a test sheet"),
    ],
)  # fmt: skip
def test_what_cannot_be_read_is_told_at_its_place(text: str | bytes, message: str) -> None:
    (fault, *_) = told(text)
    assert message in fault


@given(
    st.lists(st.lists(st.text(alphabet=st.characters(codec="utf-8"), max_size=6), min_size=1, max_size=4), max_size=6)
)
def test_whatever_a_spreadsheet_writes_is_read_as_the_same_cells(rows: list[list[str]]) -> None:
    """The cells are compared with those that another reader finds."""
    buffer = io.StringIO()
    csv.writer(buffer).writerows(rows)
    text = "step,measured,with\r\n" + buffer.getvalue()
    document = read_sheet_csv(text.encode("utf-8", "surrogatepass"), "a.csv")
    assert all(fault.message for fault in document.faults)
    from checker.reading import sheet_csv

    found = [[cell.text for cell in row] for row in sheet_csv._rows(text, "a.csv", document)][1:]
    others = list(csv.reader(io.StringIO(text, newline=""), strict=False))[1:]
    assert [r for r in found if any(r)] == [
        [cell.strip() for cell in row] for row in others if any(cell.strip() for cell in row)
    ]


def told_well(faults: list[Fault]) -> None:
    """Hold each fault to a sentence and a place in the file."""
    assert [f for f in faults if not f.message or f.at.file != "a.csv" or f.at.line < 1 or f.at.column < 1] == []


@given(st.binary(max_size=300))
def test_no_bytes_break_the_reader(content: bytes) -> None:
    document = read_sheet_csv(content, "a.csv")
    told_well(document.faults)
    assert document.data == {} or not document.faults


@given(st.text(max_size=200))
def test_no_text_under_a_head_breaks_the_reader(text: str) -> None:
    document = read_sheet_csv((HEAD + text).encode("utf-8", "surrogatepass"), "a.csv")
    told_well(document.faults or schema_faults(document, "sheet"))


def test_the_columns_are_those_that_a_printed_sheet_has() -> None:
    assert HEAD.strip().split(",") == list(COLUMNS)
