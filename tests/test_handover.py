"""Before hand-over, as QA does it: print the sheet, fill it in, ask whether the hull is ready, sign, and change things."""

from __future__ import annotations

import csv
import datetime
import io
import shutil
from collections.abc import Callable
from pathlib import Path

import pytest

from checker.finding import Verdict
from checker.output.sheet_text import sheet_csv
from checker.pipeline import check_fleet
from checker.reading.sheet_csv import COLUMNS
from checker.result.gate import Gate, gate
from checker.result.model import SubjectResult
from tests.small_yard import CLASS_FILE, HULL, HULL_FILE, SOUND, Yard
from tests.test_command import DAY, EXAMPLE, run

TODAY = datetime.date(2026, 12, 1)
Change = Callable[[dict[str, str]], None]


def write(folder: Path, yard: Yard = SOUND) -> Path:
    for name, text in yard.files.items():
        (folder / name).parent.mkdir(parents=True, exist_ok=True)
        (folder / name).write_text(text, encoding="utf-8", newline="")
    return folder


def hull_of(folder: Path, hull: str = HULL) -> SubjectResult:
    return next(s for s in check_fleet(folder, today=TODAY, only=[hull], plans_tests=True).subjects if s.is_hull)


def gate_of(folder: Path, hull: str = HULL) -> Gate:
    found = gate(check_fleet(folder, today=TODAY, only=[hull], plans_tests=True), hull)
    assert found is not None
    return found


def filled(folder: Path, change: Change | None = None) -> str:
    """Return the printed sheet with every step done as it ought to be."""
    subject = hull_of(folder)
    assert subject.handover is not None
    steps = {step.id: step for step in subject.handover.steps}
    rows = list(csv.DictReader(io.StringIO(sheet_csv(subject))))
    good = {"polarity": "ok", "bonding": "ok", "function": "dead", "leakage": "0.1"}
    for row in rows:
        kind = row["step"].partition(" ")[0]
        step = steps.get(row["step"])
        if row["step"] in ("date", "role"):
            row["measured"] = {"date": "2026-11-20", "role": "quality assurance"}[row["step"]]
        elif kind == "instrument":
            row["measured"] = "2027-01-31"
        elif kind == "drop" and step is not None and step.predicted_v is not None:
            row["measured"], row["with"] = f"{step.predicted_v:.4f}", f"{step.current_a:g}"
        elif kind == "charging":
            row["measured"], row["with"] = "20", "20"
        elif kind in good or kind in ("fitted", "all-off"):
            row["measured"] = good.get(kind, row["expected"])
        if change is not None:
            change(row)
    buffer = io.StringIO()
    writer = csv.DictWriter(buffer, COLUMNS)
    writer.writeheader()
    writer.writerows(rows)
    return buffer.getvalue()


@pytest.fixture
def tested(tmp_path: Path) -> Path:
    """Return the folder of a sound yard whose hull was tested in full."""
    return with_sheet(write(tmp_path))


def with_sheet(folder: Path, change: Change | None = None) -> Path:
    text = filled(folder, change)
    (folder / "sheets").mkdir(exist_ok=True)
    (folder / "sheets" / "skiff-1.csv").write_text(text, encoding="utf-8", newline="")
    return folder


def in_row(step: str, **cells: str) -> Change:
    def change(row: dict[str, str]) -> None:
        if row["step"] == step:
            row.update(cells)

    return change


# --- the sheet


def test_a_printed_sheet_that_nobody_filled_in_says_nothing_and_breaks_nothing(tmp_path: Path) -> None:
    folder = write(tmp_path)
    (folder / "sheets").mkdir()
    (folder / "sheets" / "skiff-1.csv").write_text(sheet_csv(hull_of(folder)), encoding="utf-8", newline="")
    found = gate_of(folder)
    assert (found.files, found.missing) == ((), found.handover.steps)
    assert [o.check for o in found.failed] == ["measuring-instrument"]


def test_a_sheet_that_was_filled_in_well_makes_the_hull_ready(tested: Path) -> None:
    found = gate_of(tested)
    assert (found.is_ready, found.missing, found.failed, found.files) == (True, (), (), ())
    assert found.handover.sheet is not None
    assert found.handover.sheet.content == found.handover.content


def test_a_filled_in_sheet_that_is_printed_again_says_the_same(tested: Path) -> None:
    before = gate_of(tested).handover.sheet
    (tested / "sheets" / "skiff-1.csv").write_text(sheet_csv(hull_of(tested)), encoding="utf-8", newline="")
    after = gate_of(tested).handover.sheet
    assert before is not None
    assert after is not None
    figures = [{name: (r.word, r.current_a) for name, r in sheet.readings.items()} for sheet in (before, after)]
    assert figures[0] == figures[1]


def test_the_sheet_asks_in_the_order_of_the_work(tmp_path: Path) -> None:
    handover = hull_of(write(tmp_path)).handover
    assert handover is not None
    kinds = list(dict.fromkeys(step.kind for step in handover.steps))
    assert kinds == ["fitted", "polarity", "bonding", "leakage", "all-off", "function", "drop", "charging"]
    assert len({step.id for step in handover.steps}) == len(handover.steps)


def test_the_points_to_measure_between_are_the_ends_of_each_way(tmp_path: Path) -> None:
    handover = hull_of(write(tmp_path)).handover
    assert handover is not None
    (step,) = (step for step in handover.steps if step.id == "drop PLOTTER")
    assert step.where == "P1.load to PLOTTER.load.pos; PLOTTER.load.neg to PANEL-N"
    assert step.predicted_v == pytest.approx(step.current_a * step.ohm)  # type: ignore[operator]


def test_a_hull_without_a_sheet_or_signature_is_judged_as_ever(tmp_path: Path) -> None:
    result = check_fleet(write(tmp_path), today=TODAY)
    assert [s.handover for s in result.subjects] == [None] * len(result.subjects)


# --- what a sheet brings up


@pytest.mark.parametrize(
    ("step", "cells", "check"),
    [
        ("drop PLOTTER", {"measured": "0.9"}, "measured-drop-above"),
        ("polarity PLOTTER", {"measured": "reversed"}, "measured-polarity"),
        ("function PLOTTER", {"measured": "live"}, "live-when-off"),
        ("all-off HOUSE", {"measured": "5 A"}, "all-off-current"),
        ("leakage", {"measured": "20"}, "measured-leakage"),
        ("content", {"measured": "0123456789ab"}, "sheet-content"),
    ],
)
def test_a_bad_figure_keeps_the_hull_back_at_its_cell(
    tmp_path: Path, step: str, cells: dict[str, str], check: str
) -> None:
    folder = with_sheet(write(tmp_path), in_row(step, **cells))
    found = gate_of(folder)
    assert not found.is_ready
    assert [o.check for o in found.failed if o.check != "measured-drop-limit"] == [check]
    line = (folder / "sheets" / "skiff-1.csv").read_text("utf-8").splitlines()[found.failed[0].at.line - 1]
    assert line.startswith(step)
    assert line[found.failed[0].at.column - 1 :].startswith(next(iter(cells.values())))


def test_a_step_that_is_left_out_keeps_the_hull_back(tmp_path: Path) -> None:
    found = gate_of(with_sheet(write(tmp_path), in_row("drop PLOTTER", measured="", **{"with": ""})))
    assert [step.id for step in found.missing] == ["drop PLOTTER"]
    assert not found.is_ready


def test_a_device_other_than_the_schedules_is_judged_as_fitted(tmp_path: Path) -> None:
    """COM-08: 10 A where 5 A stand in the schedule, ahead of a plotter whose maker allows 5 A."""
    found = gate_of(with_sheet(write(tmp_path), in_row("fitted P1", measured="10 A")))
    (outcome,) = found.failed
    assert outcome.fault.startswith("10 A is fitted where the data say 5 A; as fitted the boat has also ")
    assert "maker-device at P1" in outcome.fault


def test_a_device_that_differs_and_does_no_harm_is_told_as_such(tmp_path: Path) -> None:
    found = gate_of(with_sheet(write(tmp_path), in_row("fitted F-MAIN", measured="149 A")))
    (outcome,) = found.failed
    assert outcome.fault == "149 A is fitted where the data say 150 A; as fitted the boat has no other finding"


def test_a_step_of_no_part_aboard_is_a_fault_of_the_sheet(tmp_path: Path) -> None:
    folder = with_sheet(write(tmp_path))
    file = folder / "sheets" / "skiff-1.csv"
    file.write_text(file.read_text("utf-8").replace("polarity PLOTTER", "polarity PLOTTR"), encoding="utf-8")
    found = gate_of(folder)
    (fault,) = found.files
    assert fault.fault == "the boat's test has no step “polarity PLOTTR”"
    assert not found.is_ready


def test_a_bad_sheet_of_another_hull_does_not_keep_this_one_back(tested: Path) -> None:
    twin = SOUND.files[HULL_FILE].replace("SKIFF-1", "SKIFF-2")
    (tested / "hulls" / "skiff-2.yaml").write_text(twin, encoding="utf-8")
    bad = tested / "sheets" / "skiff-2.yaml"
    bad.write_text("sheet: SKIFF-2\npolarity: {PLOTTER: fine}\n", encoding="utf-8")
    assert gate_of(tested).is_ready
    assert [o.at.file for o in gate_of(tested, "SKIFF-2").files] == ["sheets/skiff-2.yaml"]


# --- the example


def test_031_is_ready_when_its_sheet_is_read() -> None:
    done = run("ready", "TND-031", EXAMPLE, *DAY)
    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout.startswith("TND-031: READY; not signed yet\n")


def test_031_is_not_ready_without_its_sheet(tmp_path: Path) -> None:
    shutil.copytree(EXAMPLE, tmp_path / "yard")
    (tmp_path / "yard" / "sheets" / "tnd-031.csv").unlink()
    done = run("ready", "TND-031", tmp_path / "yard", *DAY)
    assert done.returncode == 1
    assert done.stdout.startswith("TND-031: NOT READY: no step of the test is done\n")


def test_035_is_not_ready_since_a_charger_bypasses_the_shunt() -> None:
    done = run("ready", "TND-035", EXAMPLE, *DAY)
    assert done.returncode == 1
    assert done.stdout.startswith("TND-035: NOT READY: 1 open error; no step of the test is done\n")
    assert "[shunt-bypass]" in done.stdout


def test_034_tells_what_was_accepted_by_whom_and_until_when() -> None:
    done = run("ready", "TND-034", EXAMPLE, *DAY)
    assert "[WVR-034-1]\n    by electrical lead and QA, until 2028-05-29: ampacity and protection" in done.stdout


def test_038_is_judged_as_the_scenario_says() -> None:
    """The rows of `measured_example`: pass, pass, fail, investigate, pass, pass, pass."""
    judged = gate_of(EXAMPLE, "TND-038").handover.judged
    assert judged is not None
    steps = {"M01": "drop", "P08": "drop", "P10": "drop", "P22": "drop", "CHG.out1": "", "ALT": "", "HOUSE": ""}
    verdicts = dict.fromkeys(steps, "pass")
    for outcome in judged.outcomes:
        if outcome.verdict is Verdict.FINDING:
            verdicts[outcome.part] = {"error": "fail", "warning": "investigate"}[outcome.level.value]
    assert verdicts == {"M01": "pass", "P08": "pass", "P10": "fail", "P22": "investigate", "CHG.out1": "pass",
                        "ALT": "pass", "HOUSE": "pass"}  # fmt: skip


@pytest.mark.parametrize(
    ("circuit", "current_a", "predicted_v"),
    [("M01", 187.0, 0.042), ("P08", 3.6, 0.111), ("P10", 2.9, 0.167), ("P22", 17.0, 0.421)],
)
def test_the_predictions_are_those_of_the_scenario(circuit: str, current_a: float, predicted_v: float) -> None:
    """`predicted` in `measured_example`, to half a per cent."""
    (step,) = (step for step in gate_of(EXAMPLE, "TND-038").handover.steps if step.id == f"drop {circuit}")
    assert step.ohm is not None
    assert step.ohm * current_a == pytest.approx(predicted_v, rel=0.006)


def test_the_standby_current_is_that_of_the_scenario() -> None:
    """`always_on_budget.with_OPT_SOL2_a` is 0.56 A."""
    (step,) = (step for step in gate_of(EXAMPLE, "TND-038").handover.steps if step.id == "all-off HOUSE")
    assert step.current_a == pytest.approx(0.56)


# --- signing


def sign(folder: Path, *more: str) -> tuple[int, str]:
    done = run("sign", HULL, folder, "--role", "quality assurance", *DAY, *more)
    assert done.stderr == ""
    return done.returncode, done.stdout


def test_signing_adds_the_signature_and_the_status_and_nothing_else(tested: Path) -> None:
    before = (tested / HULL_FILE).read_text("utf-8")
    status, told = sign(tested)
    assert status == 0
    after = (tested / HULL_FILE).read_text("utf-8")
    content = gate_of(tested).handover.content
    assert f"signed by quality assurance on 2026-12-01 for the wiring {content}; see {HULL_FILE}" in told
    lines = [line for line in after.splitlines() if line not in before.splitlines()]
    assert lines[:4] == ["status: signed", "signed:", '  role: "quality assurance"', '  date: "2026-12-01"']
    assert len(lines) == 7
    found = gate_of(tested)
    assert (found.is_ready, found.changed) == (True, ())
    assert run("ready", HULL, tested, *DAY).stdout.startswith(
        f"{HULL}: READY; signed 2026-12-01 by quality assurance\n"
    )


def test_signing_again_replaces_the_signature(tested: Path) -> None:
    sign(tested)
    first = (tested / HULL_FILE).read_text("utf-8")
    assert sign(tested)[0] == 0
    assert (tested / HULL_FILE).read_text("utf-8") == first


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_the_lines_of_the_file_end_as_they_did(tmp_path: Path, newline: str) -> None:
    text = SOUND.files[HULL_FILE].replace("\n", newline)
    folder = with_sheet(write(tmp_path, Yard({**SOUND.files, HULL_FILE: text})))
    assert sign(folder)[0] == 0
    content = (folder / HULL_FILE).read_bytes().decode()
    assert content.count("\n") == content.count(newline)


def test_a_hull_that_is_not_ready_is_not_signed(tmp_path: Path) -> None:
    folder = write(tmp_path)
    status, told = sign(folder)
    assert status == 1
    assert told.splitlines()[0] == f"{HULL}: NOT READY: no step of the test is done"
    assert (folder / HULL_FILE).read_text("utf-8") == SOUND.files[HULL_FILE]


def test_a_file_that_is_written_in_one_pair_of_braces_is_left_alone(tmp_path: Path) -> None:
    text = "{hull: SKIFF-1, class: skiff, revision: 2, status: in-build, options: []}\n"
    folder = with_sheet(write(tmp_path, Yard({**SOUND.files, HULL_FILE: text})))
    done = run("sign", HULL, folder, "--role", "QA", *DAY)
    assert (done.returncode, done.stdout) == (2, "")
    assert "no signature can be added to: write one field a line" in done.stderr
    assert (folder / HULL_FILE).read_text("utf-8") == text


def edited(folder: Path, file: str, old: str, new: str) -> Path:
    text = (folder / file).read_text("utf-8")
    assert text.count(old) == 1
    (folder / file).write_text(text.replace(old, new), encoding="utf-8", newline="")
    return folder


def test_a_change_of_the_class_turns_a_signed_hull_to_changed_since_signed(tested: Path) -> None:
    sign(tested)
    edited(tested, CLASS_FILE, "bow-way: {zone: BOW, length: 3 m", "bow-way: {zone: BOW, length: 3.1 m")
    found = gate_of(tested)
    assert [o.check for o in found.changed] == ["signed-content"]
    assert not found.is_ready
    assert found.is_ready_but_for_signature is False  # the sheet was printed for the old wiring
    assert [o.check for o in found.failed] == ["sheet-content"]


@pytest.mark.parametrize(
    ("file", "old", "new"),
    [
        (CLASS_FILE, "bow-way: {zone: BOW, length: 3 m", "bow-way: {zone: BOW, length: 300 cm"),
        (CLASS_FILE, "ways:\n", "# a comment\nways:\n"),
        (HULL_FILE, "options: []\n", "options: []\nnote: polished\n"),
    ],
)
def test_a_change_without_meaning_leaves_the_signature_alone(tested: Path, file: str, old: str, new: str) -> None:
    sign(tested)
    found = gate_of(edited(tested, file, old, new))
    assert (found.is_ready, found.changed, found.others) == (True, (), ())


def test_changed_limits_are_told_apart_from_a_changed_boat(tested: Path) -> None:
    sign(tested)
    rule = "house:\n  limits: {voluntary-dc: {drop.critical_percent: {value: 2.9, reason: stricter}}}\n"
    yard = tested / "yard.yaml"
    yard.write_text(yard.read_text("utf-8") + rule, encoding="utf-8")
    found = gate_of(tested)
    assert (found.is_ready, found.changed, found.files) == (True, (), ())
    assert [(o.check, o.level.value) for o in found.others] == [("signed-tables", "note")]
    assert "the limit tables are others" in found.others[0].fault


# --- what cannot be asked


@pytest.mark.parametrize("command", [("sheet",), ("ready",), ("sign", "--role", "QA")])
def test_a_hull_that_is_not_there_or_cannot_be_studied_ends_with_2(tmp_path: Path, command: tuple[str, ...]) -> None:
    name, *more = command
    folder = write(tmp_path)
    done = run(name, "SKIFF-9", folder, *more, *DAY)
    assert (done.returncode, done.stdout) == (2, "")
    assert "there is no hull SKIFF-9; did you mean SKIFF-1?" in done.stderr
    edited(folder, CLASS_FILE, "load: plotter", "load: ploter")
    done = run(name, HULL, folder, *more, *DAY)
    assert (done.returncode, done.stdout) == (2, "")
    assert "cannot be studied: mend the faults of its files first (classes/" in done.stderr


def test_the_sheet_is_printed_and_written(tmp_path: Path) -> None:
    folder = write(tmp_path)
    done = run("sheet", HULL, folder, "--csv", tmp_path / "sheet.csv", *DAY)
    assert done.returncode == 0
    assert done.stdout.startswith(f"# Test sheet of {HULL}\n")
    assert (tmp_path / "sheet.csv").read_text("utf-8").startswith("step,what,where,expected,")
    done = run("sheet", HULL, folder, "--csv", tmp_path, *DAY)
    assert (done.returncode, done.stdout) == (2, "")
    assert "cannot be written: Is a directory" in done.stderr
