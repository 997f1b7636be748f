"""Studies kept from run to run: they save time, and never change a byte of what is told."""

from __future__ import annotations

import datetime
import json
import math
import shutil
from pathlib import Path

import pytest

from checker.finding import Level, Measure, Outcome, Span, Verdict
from checker.output.files import report_files
from checker.output.screen import screen_report
from checker.pipeline import all_cards, check_fleet, study_part
from checker.result import store as store_module
from checker.result.store import Store
from checker.result.studied import Studied, Written, read_study, written
from tests.dory_yard import HULL, edited, write
from tests.test_command import many_boats

EXAMPLE = Path(__file__).resolve().parents[1] / "fleet_example"
TODAY = datetime.date(2026, 12, 1)
BOATS = 5
CARDS = {card.id: card for card in all_cards()}


def told(folder: Path, store: Store | None = None) -> dict[str, str]:
    """Return all that a run tells, by the name of the report."""
    result = check_fleet(folder, today=TODAY, store=store)
    return {**report_files(result, CARDS), "screen": screen_report(result, CARDS, colour=False)}


def a_yard(folder: Path) -> Path:
    """Write a yard of hulls that all differ."""
    folder.mkdir()
    write(folder, many_boats(BOATS))
    return folder


def counted(folder: Path) -> int:
    """Return how many distinct boats a yard has."""
    return len(check_fleet(folder, today=TODAY).studies)


def entries(folder: Path) -> list[Path]:
    return sorted(folder.glob("*.study"))


def test_the_example_is_told_alike_without_a_store_with_an_empty_one_and_with_a_full_one(tmp_path: Path) -> None:
    plain = told(EXAMPLE)
    cold, warm = Store(tmp_path), Store(tmp_path)
    assert told(EXAMPLE, cold) == plain
    assert told(EXAMPLE, warm) == plain
    assert (cold.taken, warm.taken) == (0, len(entries(tmp_path))) == (0, 12)


def test_a_study_comes_back_as_it_was_to_the_last_digit() -> None:
    outcome = Outcome(
        Verdict.FINDING, "ampacity", Level.ERROR, "P1", Span("a.yaml", 1, 2), measure=Measure("x", 0.1 + 0.2, 1 / 3, "A"),
        inputs=(("a", "b"),), also_at=(Span("ü.yaml", 3, 4),), path=("a", "b"), house=("c",),
    )  # fmt: skip
    passed = outcome._replace(verdict=Verdict.PASSED, measure=Measure("x", 1.0, math.inf, "", at_least=True))
    studied = Studied(news=(outcome,), passes=(passed,), passed=1, thin=1, tightest={"F": passed})
    assert read_study(written(studied), lists_passes=True) == studied
    without = read_study(written(studied), lists_passes=False)
    assert (without.passes, without.passed) == ((), 1)


@pytest.mark.parametrize("bad", [b"", b"no zlib", written(Studied()).passes])
def test_bytes_that_are_no_study_are_refused(bad: bytes) -> None:
    with pytest.raises(ValueError, match="no study"):
        read_study(Written(bad, written(Studied()).passes), lists_passes=True)


def test_only_the_hull_that_was_changed_is_studied_again(tmp_path: Path) -> None:
    yard = a_yard(tmp_path / "yard")
    told(yard, Store(tmp_path / "kept"))
    hull = yard / "hulls" / "dory-02.yaml"
    hull.write_text(hull.read_text("utf-8").replace("length: 6 m", "length: 6.5 m"), "utf-8")
    again = Store(tmp_path / "kept")
    assert told(yard, again) == told(yard)
    assert again.taken == counted(yard) - 1


def test_a_comment_in_the_class_moves_lines_and_is_studied_again(tmp_path: Path) -> None:
    """The reports name lines: a study of the old lines would point at the wrong ones."""
    yard = a_yard(tmp_path / "yard")
    told(yard, Store(tmp_path / "kept"))
    design = next((yard / "classes").rglob("*.yaml"))
    design.write_text("# one line more\n" + design.read_text("utf-8"), "utf-8")
    again = Store(tmp_path / "kept")
    assert told(yard, again) == told(yard)
    assert again.taken == 0


@pytest.mark.parametrize("file", ["yard.yaml", "parts"])
def test_what_all_boats_rest_on_makes_all_of_them_new(tmp_path: Path, file: str) -> None:
    yard = a_yard(tmp_path / "yard")
    told(yard, Store(tmp_path / "kept"))
    path = yard / file if file.endswith(".yaml") else next((yard / file).glob("*.yaml"))
    path.write_text(path.read_text("utf-8") + "# a comment\n", "utf-8")
    again = Store(tmp_path / "kept")
    told(yard, again)
    assert again.taken == 0


def test_waivers_and_other_hulls_make_no_boat_new(tmp_path: Path) -> None:
    yard = a_yard(tmp_path / "yard")
    told(yard, Store(tmp_path / "kept"))
    number = counted(yard)
    (yard / "waivers.yaml").write_text("waivers: {}\n", "utf-8")
    (yard / "hulls" / "more.yaml").write_text(HULL.replace("DORY-1", "DORY-99"), "utf-8")
    again = Store(tmp_path / "kept")
    assert told(yard, again) == told(yard)
    assert again.taken == number


def test_a_run_without_reports_keeps_what_a_run_with_reports_needs(tmp_path: Path) -> None:
    yard = a_yard(tmp_path / "yard")
    check_fleet(yard, today=TODAY, lists_passes=False, store=Store(tmp_path / "kept"))
    again = Store(tmp_path / "kept")
    assert told(yard, again) == told(yard)
    assert again.taken == counted(yard)


def _flipped(data: bytes, at: int) -> bytes:
    return data[:at] + bytes([data[at] ^ 1]) + data[at + 1 :]


@pytest.mark.parametrize(
    "damage",
    [
        lambda data: b"",
        lambda data: b"\n",
        lambda data: b"[" * 5_000,
        lambda data: data[:-1],
        lambda data: data + b"\0",
        lambda data: data[: len(data) // 2],
        lambda data: _flipped(data, 3),
        lambda data: _flipped(data, data.index(b"\n") + 5),
        lambda data: _flipped(data, len(data) - 5),
        lambda data: b"[1]\n" + data,
        lambda data: data.replace(b'"most": [', b'"most": [-', 1),
        lambda data: data.replace(b"fairloom study 1", b"fairloom study 0", 1),
    ],
)
def test_a_damaged_entry_is_not_believed_and_is_made_anew(tmp_path: Path, damage: object) -> None:
    yard = a_yard(tmp_path / "yard")
    plain = told(yard, Store(tmp_path / "kept"))
    for entry in entries(tmp_path / "kept"):
        entry.write_bytes(damage(entry.read_bytes()))  # type: ignore[operator]
    mending, mended = Store(tmp_path / "kept"), Store(tmp_path / "kept")
    assert told(yard, mending) == plain
    assert mending.taken == 0
    told(yard, mended)
    assert mended.taken == counted(yard)


def test_an_entry_under_a_name_of_another_is_not_believed(tmp_path: Path) -> None:
    """It is whole, but of another boat."""
    yard = a_yard(tmp_path / "yard")
    plain = told(yard, Store(tmp_path / "kept"))
    files = entries(tmp_path / "kept")
    contents = [file.read_bytes() for file in files]
    for file, content in zip(files, [*contents[1:], contents[0]], strict=True):
        file.write_bytes(content)
    swapped = Store(tmp_path / "kept")
    assert told(yard, swapped) == plain
    assert swapped.taken == 0


def test_an_entry_that_agrees_with_its_sums_but_holds_something_else_is_not_believed(tmp_path: Path) -> None:
    yard = a_yard(tmp_path / "yard")
    plain = told(yard, Store(tmp_path / "kept"))
    for file in entries(tmp_path / "kept"):
        head = json.loads(file.read_bytes().split(b"\n")[0])
        empty = written(Studied()).passes  # a list, where a mapping is due
        head["most"] = [len(empty), store_module._sum(empty)]
        head["passes"] = [len(empty), store_module._sum(empty)]
        file.write_bytes(json.dumps(head).encode() + b"\n" + empty + empty)
    forged = Store(tmp_path / "kept")
    assert told(yard, forged) == plain
    assert forged.taken == 0


def test_another_version_of_the_tool_takes_nothing_and_clears_it_away(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    yard = a_yard(tmp_path / "yard")
    told(yard, Store(tmp_path / "kept"))
    old = entries(tmp_path / "kept")
    (tmp_path / "kept" / "notes.study").write_text("not ours")
    monkeypatch.setattr(store_module, "tool_sum", lambda: "0" * 64)
    newer = Store(tmp_path / "kept")
    told(yard, newer)
    assert newer.taken == 0
    assert not any(entry.exists() for entry in old)
    assert (tmp_path / "kept" / "notes.study").exists()


def test_the_oldest_unused_entries_go_first(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    yard = a_yard(tmp_path / "yard")
    told(yard, Store(tmp_path / "kept"))
    number = counted(yard)
    monkeypatch.setattr(store_module, "KEPT_AT_LEAST", 0)
    monkeypatch.setattr(store_module, "KEPT_FOR_EACH_USED", 1)
    for file in (yard / "hulls").glob("*.yaml"):
        file.write_text(file.read_text("utf-8").replace("length: ", "length: 1"), "utf-8")
    told(yard, Store(tmp_path / "kept"))
    assert len(entries(tmp_path / "kept")) == counted(yard) == number


def test_a_folder_that_cannot_be_written_changes_nothing(tmp_path: Path) -> None:
    yard = a_yard(tmp_path / "yard")
    (tmp_path / "file").write_text("no folder")
    store = Store(tmp_path / "file")
    assert told(yard, store) == told(yard)
    assert store.trouble


@pytest.mark.parametrize("of", [1, 2, 3, 50])
def test_parts_together_tell_what_one_run_tells(tmp_path: Path, of: int) -> None:
    yard = a_yard(tmp_path / "yard")
    counts = [study_part(yard, Store(tmp_path / f"part-{n}"), part=n, of=of) for n in range(1, of + 1)]
    assert sum(counts) == counted(yard)
    assert max(counts) - min(counts) <= 1
    (tmp_path / "all").mkdir()
    for number in range(1, of + 1):
        for entry in entries(tmp_path / f"part-{number}"):
            shutil.copy(entry, tmp_path / "all")
    merged = Store(tmp_path / "all")
    assert told(yard, merged) == told(yard)
    assert merged.taken == counted(yard)


def test_a_missing_part_is_studied_by_the_run_that_needs_it(tmp_path: Path) -> None:
    yard = a_yard(tmp_path / "yard")
    study_part(yard, Store(tmp_path / "all"), part=1, of=2)
    merged = Store(tmp_path / "all")
    assert told(yard, merged) == told(yard)
    assert 0 < merged.taken < counted(yard)


def test_a_boat_that_cannot_be_built_is_not_kept(tmp_path: Path) -> None:
    tmp_path.joinpath("yard").mkdir()
    yard = write(tmp_path / "yard", edited("classes/dory-14/class.yaml", "to: SW.in", "to: SW.nowhere"))
    told(yard, Store(tmp_path / "kept"))
    assert entries(tmp_path / "kept") == []
