"""The lists of a hull: what an electrician cuts, lands, labels and takes from the store, readable by any CSV reader."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import pytest

from checker.cli import main
from checker.one_hull import hull_aboard
from checker.output.csv_table import Table, csv_text, number
from checker.output.lists import LISTS, list_files
from tests.dory_yard import DORY, edited, write
from tests.output.workflow_commands import commands
from tests.small_yard import HULL, SOUND, Yard

Row = dict[str, str]
EXAMPLE = Path(__file__).resolve().parents[2] / "fleet_example"


def read(text: str) -> list[Row]:
    """Read a list as a strict reader does; every row must have all columns."""
    rows = list(csv.reader(io.StringIO(text, newline=""), strict=True))
    assert {len(row) for row in rows} == {len(rows[0])}
    assert len(set(rows[0])) == len(rows[0])
    return [dict(zip(rows[0], row, strict=True)) for row in rows[1:]]


def listed(folder: Path, name: str, yard: Yard = SOUND) -> list[Row]:
    """Return one list of the small yard's hull."""
    return read(list_files(hull_aboard(write(folder, yard.files), HULL))[f"{HULL}-{name}.csv"])


def the(rows: list[Row], **wanted: str) -> Row:
    """Return the one row with these cells; a blank in a heading is written as an underscore."""
    (row,) = [r for r in rows if all(r[key.replace("_", " ")] == value for key, value in wanted.items())]
    return row


def cells(row: Row, *headings: str) -> list[str]:
    return [row[heading] for heading in headings]


# --- wires


def test_a_wire_has_its_ends_terminals_size_colour_length_way_and_label(tmp_path: Path) -> None:
    row = the(listed(tmp_path, "wires"), conductor="M1")
    assert cells(row, "circuit", "circuit name", "from post", "from zone", "from terminal") == [
        "MAIN", "House bank main", "BAT-H.pos", "LOCKER battery locker", "ring",
    ]  # fmt: skip
    assert cells(row, "to post", "to terminal", "size", "colour", "length (m)", "length is") == [
        "F-MAIN.line", "ring M8", "2 AWG", "red", "0.15", "as written",
    ]  # fmt: skip
    assert cells(row, "cable", "label", "labelled", "passage", "largest spacing of supports (mm)") == [
        "single-105", "M1", "both", "grommet", "300",
    ]  # fmt: skip


def test_a_branch_is_as_long_as_its_ways_and_tail_and_ends_as_its_load_is_made(tmp_path: Path) -> None:
    row = the(listed(tmp_path, "wires"), conductor="PUMP.out")
    assert cells(row, "length (m)", "length is", "ways", "cores", "covered (m)") == [
        "4", "by its ways", "cabin-way > engine-way", "2", "4",
    ]  # fmt: skip
    assert cells(row, "from terminal", "to terminal") == ["ring M4", "lead of the device"]
    assert the(listed(tmp_path, "wires"), conductor="PUMP.back")["colour"] == "yellow"


def test_what_a_hull_changes_is_what_is_listed(tmp_path: Path) -> None:
    changed = SOUND.edit(
        "options: []\n",
        "options: []\nchanges: {C-1: {what: x, set: {circuits: {MAIN: {conductors: {M1: {length: 6.5 in}}}}}}}\n",
    )
    assert the(listed(tmp_path, "wires", changed), conductor="M1")["length (m)"] == "0.165"


def test_a_yard_that_writes_feet_gets_feet(tmp_path: Path) -> None:
    files = {
        name: text.replace(" m,", " ft,").replace(" m}", " ft}").replace(": 4 m\n", ": 4 ft\n")
        for name, text in SOUND.files.items()
    }
    row = the(listed(tmp_path, "wires", Yard(files)), conductor="M2")
    assert row["length (ft)"] == "0.4"
    assert the(listed(tmp_path, "wires", Yard(files)), conductor="M1")["length (ft)"] == "0.49"


def test_a_length_written_in_metres_is_not_rounded_away(tmp_path: Path) -> None:
    for row in read(list_files(hull_aboard(EXAMPLE, "TND-031"))["TND-031-wires.csv"]):
        assert float(row["length (m)"]) > 0


# --- landings


def test_the_terminals_of_a_stud_stand_in_the_order_in_which_they_are_put_on() -> None:
    rows = read(list_files(hull_aboard(EXAMPLE, "TND-035"))["TND-035-landings.csv"])
    stack = [cells(row, "stud", "place on stud", "conductor") for row in rows if row["post"] == "STUD-HB-NEG"]
    assert stack == [["s1", "1", "W005"], ["s1", "2", "W013"], ["s2", "1", "W006"], ["s2", "2", "W043"]]
    (row,) = [row for row in rows if row["conductor"] == "W043" and row["post"] == "STUD-HB-NEG"]
    assert cells(row, "fixed by", "thread", "terminal", "barrel for", "torque (Nm)", "torque (ft-lb)", "other end") == [
        "stud", "M10", "ring M10", "4 AWG", "20", "14.75", "CHG.neg",
    ]  # fmt: skip


def test_the_torque_of_a_bars_studs_is_not_given_for_its_screws(tmp_path: Path) -> None:
    rows = listed(tmp_path, "landings")
    screw = the(rows, post="PANEL-N", conductor="PUMP.back")
    assert cells(screw, "fixed by", "thread", "torque (Nm)") == ["screw", "M4", ""]
    stud = the(rows, post="PANEL-N", conductor="D2")
    assert cells(stud, "fixed by", "thread", "torque (Nm)") == ["stud", "M8", "10"]


def test_a_device_that_stands_on_a_post_is_told_there(tmp_path: Path) -> None:
    row = the(listed(tmp_path, "landings"), post="BUS-P", fixed_by="mounted", other_end="F-PANEL.line")
    assert row["terminal"] == "F-PANEL.line stands on it"


def test_posts_stand_in_natural_order() -> None:
    rows = read(list_files(hull_aboard(EXAMPLE, "TND-031"))["TND-031-landings.csv"])
    posts = [row["post"] for row in rows]
    assert posts.index("PNL-09.load") < posts.index("PNL-10.load") < posts.index("PNL-34.load")


# --- labels


def test_a_label_is_printed_for_each_end_that_carries_one(tmp_path: Path) -> None:
    yard = SOUND.edit("size: 2 AWG, length: 0.4 m}", "size: 2 AWG, length: 0.4 m, labelled: to, label: HOUSE +}")
    yard = yard.edit("size: 2 AWG, length: 5.9 in}", "size: 2 AWG, length: 5.9 in, labelled: none}")
    rows = listed(tmp_path, "labels", yard)
    assert [cells(r, "text", "near post") for r in rows if r["goes on"].startswith("M2,")] == [["HOUSE +", "SW-H.in"]]
    assert [r for r in rows if r["goes on"].startswith("M1,")] == []
    assert [cells(r, "near post", "recorded as fitted") for r in rows if r["goes on"].startswith("M3,")] == [
        ["SW-H.out", "yes"], ["BUS-P", "yes"],
    ]  # fmt: skip


def test_where_labels_were_not_recorded_they_are_listed_as_that(tmp_path: Path) -> None:
    rows = listed(tmp_path, "labels", SOUND.without("labels: both"))
    assert {r["recorded as fitted"] for r in rows if r["kind"] == "conductor"} == {"not recorded"}


def test_legends_and_marks_are_labels_too(tmp_path: Path) -> None:
    rows = listed(tmp_path, "labels")
    assert the(rows, kind="legend")["text"] == "LIGHTS 10 A"
    marks = {row["goes on"]: row["text"] for row in rows if row["kind"] == "mark"}
    assert marks["F-MAIN"] == "F-MAIN 150 A"
    assert marks["P2"] == "P2 10 A"
    assert "SW-H" in marks
    assert "BUS-N" not in marks


# --- devices


def test_a_device_has_its_place_rating_spare_and_what_it_serves(tmp_path: Path) -> None:
    rows = listed(tmp_path, "devices")
    fuse = the(rows, device="F-MAIN")
    assert cells(fuse, "kind", "part", "rating (A)", "voltage (V)", "breaks (A)", "spare fuse", "torque (Nm)") == [
        "fuse", "bolt-fuse", "150", "32", "10000", "bolt-fuse 150 A", "10",
    ]  # fmt: skip
    breaker = the(rows, device="P2")
    assert cells(breaker, "kind", "serves", "serves names", "rating (A)", "spare fuse", "legend") == [
        "breaker", "LIGHTS", "Cabin lights", "10", "", "LIGHTS 10 A",
    ]  # fmt: skip
    assert the(rows, device="BUS-P")["name"] == "positive bus"
    assert cells(the(rows, device="BAT-H"), "bank", "rating (A)", "voltage (V)") == ["HOUSE", "", "12"]


# --- parts


def test_devices_are_counted_by_part_and_rating(tmp_path: Path) -> None:
    rows = listed(tmp_path, "parts")
    assert cells(the(rows, part="panel-breaker", rating_or_size="5 A"), "quantity", "unit") == ["3", "pcs"]
    devices = listed(tmp_path, "devices")
    assert sum(int(row["quantity"]) for row in rows if row["kind"] not in ("cable", "terminal")) == len(devices)


def test_a_two_core_cable_is_counted_once_for_its_two_conductors(tmp_path: Path) -> None:
    rows = listed(tmp_path, "parts")
    # PLOTTER 2 + 0.5 m, BOW-LIGHT 16 ft 5 in = 5.0038 m, SENSOR 4 m
    assert cells(the(rows, part="duplex-105", rating_or_size="16 AWG"), "colour", "quantity", "unit") == [
        "red + yellow", "11.504", "m",
    ]  # fmt: skip


def test_a_way_back_of_its_own_length_is_a_cable_of_its_own(tmp_path: Path) -> None:
    yard = SOUND.edit(
        "    length: 4 m\n    load: vapour-sensor", "    length: 4 m\n    back: {length: 5 m}\n    load: vapour-sensor"
    )
    row = the(listed(tmp_path, "parts", yard), part="duplex-105", rating_or_size="16 AWG")
    assert row["quantity"] == "16.504"


def test_single_conductors_are_summed_by_size_and_colour(tmp_path: Path) -> None:
    rows = listed(tmp_path, "parts")
    wires = listed(tmp_path, "wires")
    for row in (row for row in rows if row["part"] == "single-105"):
        same = [
            w
            for w in wires
            if (w["cable"], w["size"], w["colour"]) == ("single-105", row["rating or size"], row["colour"])
        ]
        assert float(row["quantity"]) == pytest.approx(sum(float(w["length (m)"]) for w in same), abs=0.002)
    # M1 5.9 in = 0.14986 m, M2 0.4 m, M3 0.3 m
    assert the(rows, part="single-105", rating_or_size="2 AWG", colour="red")["quantity"] == "0.85"


def test_terminals_are_counted_by_hole_and_size(tmp_path: Path) -> None:
    rows = listed(tmp_path, "parts")
    landings = listed(tmp_path, "landings")
    crimped = [r for r in landings if r["terminal"].startswith("ring")]
    assert sum(int(row["quantity"]) for row in rows if row["kind"] == "terminal") == len(crimped)
    assert the(rows, part="ring M4", rating_or_size="14 AWG")["quantity"] == "2"  # PUMP at its breaker and its bar


# --- the command


def test_the_command_writes_five_lists_and_says_so(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    yard, out = write(tmp_path / "yard", SOUND.files), tmp_path / "made/for it"
    assert main(["lists", str(yard), "--hull", HULL, "--to", str(out)]) == 0
    assert sorted(path.name for path in out.iterdir()) == sorted(f"{HULL}-{name}.csv" for name in LISTS)
    assert len(LISTS) == 5
    printed = capsys.readouterr()
    assert printed.out == ""
    assert printed.err.startswith(f"5 lists written to {out}, unchecked: {HULL}-wires.csv, ")


def test_a_hull_that_is_not_there_is_told_with_the_nearest(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["lists", str(write(tmp_path, DORY)), "--hull", "DORY-7", "--to", str(tmp_path / "o")]) == 2
    assert capsys.readouterr().err == "fairloom: there is no hull DORY-7; did you mean DORY-1?\n"
    assert not (tmp_path / "o").exists()


@pytest.mark.parametrize(
    ("files", "told"),
    [
        (edited("hulls/dory-1.yaml", "class: dory-14", "class: nothing"), "hulls/dory-1.yaml:2:8: "),
        (edited("hulls/dory-1.yaml", "status: planned", "status: built"), "hulls/dory-1.yaml:4:9: "),
        (edited("classes/dory-14/class.yaml", "to: NEG, size", "to: NOG, size"), "classes/dory-14/class.yaml:18:3: "),
        (edited("parts/all.yaml", "rating: 100 A", "rating: 100"), "parts/all.yaml:4:"),
    ],
)  # fmt: skip
def test_a_hull_that_cannot_be_assembled_is_told_with_the_lines_at_fault(
    tmp_path: Path, files: dict[str, str], told: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["lists", str(write(tmp_path, files)), "--hull", "DORY-1", "--to", str(tmp_path / "o")]) == 2
    first, second, *_ = capsys.readouterr().err.splitlines()
    assert first == "fairloom: hull DORY-1 cannot be assembled; mend first:"
    assert second.startswith(f"  - {told}")


def test_a_fault_told_on_standard_error_is_no_command_of_a_ci_job(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    files = {
        **DORY,
        "hulls/dory-1.yaml": DORY["hulls/dory-1.yaml"] + "'##[error]pwned': 1\n",
        "::error::pwned.yaml": "",
    }
    assert main(["lists", str(write(tmp_path, files)), "--hull", "DORY-1", "--to", str(tmp_path / "o")]) == 2
    told = capsys.readouterr().err
    assert "pwned" in told
    assert list(commands(told)) == []


def test_faults_of_another_class_do_not_keep_a_hull_from_its_lists(tmp_path: Path) -> None:
    files = {**DORY, "classes/other/class.yaml": "wrong: 1\n"}
    assert hull_aboard(write(tmp_path, files), "DORY-1").boat.class_id == "dory-14"


def test_lists_that_cannot_be_written_are_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    assert main(["lists", str(write(tmp_path / "y", DORY)), "--hull", "DORY-1", "--to", str(tmp_path / "file")]) == 2
    assert "cannot be written" in capsys.readouterr().err


# --- the format


def one_cell(text: str) -> str:
    """Return what a reader gets of a cell, between two others."""
    rows = list(csv.reader(io.StringIO(csv_text(Table(("a", "b", "c"), [("x", text, "y")])), newline=""), strict=True))
    assert rows[0] == ["a", "b", "c"]
    assert (len(rows), rows[1][0], rows[1][2]) == (2, "x", "y")
    return rows[1][1]


@pytest.mark.parametrize(
    "text", ["plain", 'with "quotes"', "a, b", "a;b", " lead", "trail ", "", "Süd ⚓", "a'b", "|", "`x`", "%0A"]
)
def test_a_text_comes_back_as_it_was(text: str) -> None:
    assert one_cell(text) == text


@pytest.mark.parametrize(
    "text",
    ["=1+1", "+1+1", "-1+cmd|' /C calc'!A0", "@SUM(A1)", "-", "--", "-1-1", "=", "\uff1d1+1", "+49 40", "-x", "-1e9"],
)  # fmt: skip
def test_what_a_spreadsheet_would_take_for_a_formula_is_defused(text: str) -> None:
    assert one_cell(text) == f"'{text}"


@pytest.mark.parametrize(("text", "told"), [("\t=1", "\\u0009=1"), ("\r=1", "\\u000d=1"), ("a\nb", "a\\u000ab"), ("\x1b[31m", "\\u001b[31m"), ("\0", "\\u0000")])  # fmt: skip
def test_control_characters_are_spelled_on_their_line(text: str, told: str) -> None:
    assert one_cell(text) == told


@pytest.mark.parametrize(("value", "text"), [(-5, "-5"), (-0.5, "-0.5"), (1.0, "1"), (0.1 + 0.2, "0.3"), (-0.0001, "0"), (12345.678, "12345.678"), (1000, "1000")])  # fmt: skip
def test_numbers_stay_numbers(value: float, text: str) -> None:
    assert number(value) == text
    table = Table(("a",), [(value,)])
    assert csv_text(table) == f"a\r\n{text}\r\n"
    assert one_cell("-5.25") == "-5.25"


def test_every_line_ends_in_cr_lf_and_no_byte_order_mark_is_written() -> None:
    for text in list_files(hull_aboard(EXAMPLE, "TND-036")).values():
        assert text.count("\r\n") == text.count("\n") == text.count("\r")
        assert text.endswith("\r\n")
        assert not text.startswith("\ufeff")


def test_every_conductor_and_device_of_the_example_is_listed_once() -> None:
    aboard = hull_aboard(EXAMPLE, "TND-036")
    files = {name.removeprefix("TND-036-"): read(text) for name, text in list_files(aboard).items()}
    assert sorted(row["conductor"] for row in files["wires.csv"]) == sorted(aboard.boat.conductors)
    assert sorted(row["device"] for row in files["devices.csv"]) == sorted(aboard.boat.devices)
    landed = [row["conductor"] for row in files["landings.csv"] if row["conductor"]]
    assert len(landed) == 2 * len(aboard.boat.conductors)
