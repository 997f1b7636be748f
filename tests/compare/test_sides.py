"""What may be given as a side, and what is said where it cannot be used."""

from __future__ import annotations

import json
import os
from collections.abc import Callable, Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from checker.cli import main
from checker.errors import CheckerError
from checker.output.compare_text import compare_text
from checker.output.json_report import json_report
from checker.pipeline import all_cards
from checker.result.comparison import Comparison, FindingKind, Standing
from checker.sides import compare
from tests.compare.series import git
from tests.dory_yard import DORY, TODAY, checked, edited, write
from tests.metric_yard import METRIC, without_table

DAY = ["--today", TODAY.isoformat()]
THINNER = edited(
    "classes/dory-14/class.yaml", "protect: 5 A, cable: 14 AWG, route", "protect: 5 A, cable: 18 AWG, route"
)


def of(base: str | Path, head: str | Path | None, yard: Path) -> Comparison:
    return compare(str(base), None if head is None else str(head), yard, today=TODAY, workers=1)


def abouts(comparison: Comparison) -> list[str]:
    return [one.about for one in comparison.differences or ()]


def commit(folder: Path, files: Mapping[str, str], tag: str) -> None:
    for old in [path for path in folder.rglob("*.yaml") if ".git" not in path.parts]:
        old.unlink()
    write(folder, files)
    top = git(folder, "rev-parse", "--show-toplevel").strip()
    git(Path(top), "add", "--all")
    git(Path(top), "commit", "--quiet", "--message", tag)
    git(Path(top), "tag", tag)


@pytest.fixture
def yard(tmp_path: Path) -> Path:
    """Return a repository with a yard in a subfolder: tags `one` and `two`, and a third state in the working tree."""
    top = tmp_path / "repository"
    folder = top / "boats" / "fleet"
    folder.mkdir(parents=True)
    git(top, "init", "--quiet", "--initial-branch=main")
    commit(folder, DORY, "one")
    commit(folder, THINNER, "two")
    write(folder, edited("classes/dory-14/class.yaml", "length: 3 m", "length: 2.5 m", THINNER))
    return folder


def state(folder: Path) -> dict[str, bytes]:
    top = Path(git(folder, "rev-parse", "--show-toplevel").strip())
    return {p.relative_to(top).as_posix(): p.read_bytes() for p in sorted(top.rglob("*")) if p.is_file()}


def stored(folder: Path, files: Mapping[str, str], name: str = "result.json") -> Path:
    result = checked(folder / "stored", files)
    path = folder / name
    path.write_text(json_report(result, {card.id: card for card in all_cards()}), encoding="utf-8")
    return path


# --- revisions


def test_two_revisions_are_compared_without_touching_the_repository(yard: Path) -> None:
    before = state(yard)
    assert abouts(of("one", "two", yard)) == ["C1"]
    assert state(yard) == before


def test_the_head_is_the_working_tree_where_none_is_given(yard: Path) -> None:
    assert abouts(of("two", None, yard)) == ["C2"]
    assert abouts(of("one", None, yard)) == ["C1", "C2"]


def test_a_revision_is_found_from_the_yards_folder_and_by_any_name_of_git(yard: Path) -> None:
    for name in ("two~1", "HEAD^", "main~1", git(yard, "rev-parse", "one").strip(), "refs/tags/one"):
        assert abouts(of(name, "HEAD", yard)) == ["C1"]


def test_a_moved_line_a_renamed_file_and_another_order_of_keys_show_nothing(yard: Path) -> None:
    moved = {**DORY, "classes/dory-14/all.yaml": "# a comment\n\n" + DORY["classes/dory-14/class.yaml"]}
    moved["hulls/first.yaml"] = "\n".join(reversed(DORY["hulls/dory-1.yaml"].strip().splitlines())) + "\n"
    del moved["classes/dory-14/class.yaml"]
    del moved["hulls/dory-1.yaml"]
    commit(yard, moved, "moved")
    comparison = of("one", "moved", yard)
    assert comparison.findings == ()
    assert comparison.differences == ()
    assert {subject.standing for subject in comparison.subjects} == {Standing.UNCHANGED}
    assert all(subject.is_alike for subject in comparison.subjects)


def test_a_shallow_clone_compares_what_it_has(yard: Path, tmp_path: Path) -> None:
    clone = tmp_path / "clone"
    git(tmp_path, "clone", "--quiet", "--depth=2", f"file://{yard.parents[1]}", str(clone))
    assert abouts(of("HEAD~1", "HEAD", clone / "boats/fleet")) == ["C1"]


def test_a_shallow_clone_without_the_commit_says_what_to_fetch(yard: Path, tmp_path: Path) -> None:
    clone, commit_id = tmp_path / "clone", git(yard, "rev-parse", "one").strip()
    git(tmp_path, "clone", "--quiet", "--depth=1", "--no-tags", f"file://{yard.parents[1]}", str(clone))
    with pytest.raises(CheckerError) as told:
        of(commit_id, None, clone / "boats/fleet")
    assert "shallow clone" in str(told.value)
    assert f"git fetch --depth=1 origin {commit_id}" in str(told.value)


def test_a_branch_that_only_the_origin_has_is_proposed(yard: Path, tmp_path: Path) -> None:
    git(yard, "branch", "review", "one")
    clone = tmp_path / "clone"
    git(tmp_path, "clone", "--quiet", f"file://{yard.parents[1]}", str(clone))
    with pytest.raises(CheckerError, match="did you mean origin/review"):
        of("review", None, clone / "boats/fleet")


def test_a_link_in_a_revision_that_leaves_the_yard_is_a_fault_and_is_not_followed(yard: Path, tmp_path: Path) -> None:
    secret = write(tmp_path, {"secret.yaml": DORY["hulls/dory-1.yaml"].replace("DORY-1", "SECRET")}) / "secret.yaml"
    (yard / "hulls" / "linked.yaml").symlink_to(secret)
    git(yard, "add", "--all")
    git(yard, "commit", "--quiet", "--message", "link")
    comparison = of("two", "HEAD", yard)
    assert "SECRET" not in [subject.id for subject in comparison.subjects]
    assert any("a link that leaves" in error.found.fault for error in comparison.new_errors)


# --- folders and JSON results


def test_folders_need_no_git(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PATH", "")
    base, head = write(tmp_path / "a", DORY), write(tmp_path / "b", THINNER)
    assert abouts(of(base, head, tmp_path)) == ["C1"]


def test_a_result_of_the_same_data_differs_in_nothing(tmp_path: Path) -> None:
    result, folder = stored(tmp_path, DORY), write(tmp_path / "a", DORY)
    for sides in ((result, folder), (folder, result), (result, result)):
        comparison = of(*sides, tmp_path)
        assert comparison.differences == ()
        assert comparison.findings == ()
        assert all(subject.is_alike for subject in comparison.subjects)


def test_a_result_against_data_tells_what_changed_aboard(tmp_path: Path) -> None:
    result, folder = stored(tmp_path, DORY), write(tmp_path / "a", THINNER)
    from_result, from_data = of(result, folder, tmp_path), of(tmp_path / "stored", folder, tmp_path)
    assert compare_text(replace(from_result, base="x")) == compare_text(replace(from_data, base="x"))
    assert abouts(from_data) == ["C1"]


def test_a_result_that_does_not_record_what_is_aboard_is_compared_all_the_same(tmp_path: Path) -> None:
    result, folder = stored(tmp_path, DORY), write(tmp_path / "a", THINNER)
    document = json.loads(result.read_text(encoding="utf-8"))
    for study in document["studies"]:
        del study["aboard"]
    del document["tables"], document["sizes"]
    result.write_text(json.dumps(document), encoding="utf-8")
    comparison = of(result, folder, tmp_path)
    assert comparison.differences is None
    assert [move.kind for move in comparison.limits] == ["tables"]


def _dropped(*path: str | int) -> Callable[[Any], None]:
    def spoil(document: Any) -> None:
        for step in path[:-1]:
            document = document[step]
        del document[path[-1]]

    return spoil


def _put(value: Any, *path: str | int) -> Callable[[Any], None]:
    def spoil(document: Any) -> None:
        for step in path[:-1]:
            document = document[step]
        document[path[-1]] = value

    return spoil


@pytest.mark.parametrize(
    "spoil",
    [
        _dropped("studies"), _dropped("subjects", 0, "study"), _put("gone", "subjects", 0, "study"),
        _put([1], "studies", 0, "found"), _put(None, "studies", 0, "passed"), _put({}, "subjects"),
        _put(5, "subjects", 0, "id"), _put("x", "studies", 0, "aboard", "like"),
        _put({"boat": []}, "studies", 0, "aboard", "things"), _put("x", "tables"), _put([["x"]], "studies"),
        _put({"C1": ["x", 1, 1]}, "studies", 0, "passed", 0, "places"),
    ],
)  # fmt: skip
def test_a_damaged_result_is_told_in_one_line(
    spoil: Callable[[Any], None], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    result = stored(tmp_path, DORY)
    document = json.loads(result.read_text(encoding="utf-8"))
    spoil(document)
    result.write_text(json.dumps(document), encoding="utf-8")
    assert main(["compare", str(result), str(tmp_path / "stored"), *DAY]) == 2
    told = capsys.readouterr()
    assert (told.out, told.err.count("\n")) == ("", 1)
    assert "is damaged" in told.err


@pytest.mark.parametrize(
    ("text", "words"),
    [
        (b"", "cannot be read as JSON"), (b"[" * 100_000, "cannot be read as JSON"), (b"\xff\xfe", "not UTF-8"),
        (b"[]", "names no schema version"), (b"{}", "names no schema version"),
        (b'{"schema_version": "2"}', "schema version 2"), (b'{"schema_version": NaN}', "cannot be read as JSON"),
        (b'{"schema_version": ["\\u001b[31m"]}', "schema version"),
    ],
)  # fmt: skip
def test_a_file_that_is_no_result_is_told_in_one_line(
    text: bytes, words: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "x.json").write_bytes(text)
    folder = write(tmp_path / "a", DORY)
    assert main(["compare", str(tmp_path / "x.json"), str(folder), *DAY]) == 2
    told = capsys.readouterr()
    assert (told.out, told.err.count("\n")) == ("", 1)
    assert words in told.err
    assert "\x1b" not in told.err


# --- the yard's own limits


def with_rule(files: Mapping[str, str]) -> dict[str, str]:
    figure = "drop.critical_percent: {value: 0.5, reason: ours}"
    rule = f"house: {{drop_critical: [lighting], limits: {{voluntary-dc: {{{figure}}}}}}}\n"
    return {**files, "yard.yaml": files["yard.yaml"] + rule}


def test_what_a_house_limit_does_is_told_apart_from_what_the_boats_do(tmp_path: Path) -> None:
    base = write(tmp_path / "a", DORY)
    ruled = of(base, write(tmp_path / "b", with_rule(DORY)), tmp_path)
    assert [move.what for move in ruled.limits] == ["drop_critical", "drop.critical_percent of voluntary-dc"]
    assert {(one.found.check, one.by_limits) for one in ruled.new_errors} == {
        ("voltage-drop", True), ("voltage-drop-from-bank", True),
    }  # fmt: skip
    assert ruled.differences == ()
    both = of(base, write(tmp_path / "c", with_rule(THINNER)), tmp_path)
    told = {(one.found.part, one.by_limits) for one in both.new_errors if one.found.check == "voltage-drop"}
    assert told == {(one.found.part, True) for one in ruled.new_errors}
    boats = of(base, write(tmp_path / "d", THINNER), tmp_path)
    assert not any(one.by_limits for one in boats.findings)


def test_a_table_that_the_yard_enters_is_marked_by_what_it_says(tmp_path: Path) -> None:
    name = "limits/iso-13297/ampacity.yaml"
    again = {**METRIC.files, name: f"# read again\n{METRIC.files[name]}"}
    same = of(write(tmp_path / "a", METRIC.files), write(tmp_path / "b", again), tmp_path)
    assert same.limits == ()
    fewer = of(tmp_path / "a", write(tmp_path / "c", without_table("ampacity").files), tmp_path)
    assert [move.what for move in fewer.limits] == ["ampacity (iso-13297)"]
    assert "ampacity" in {one.check for one in fewer.lost}
    assert fewer.of_kind(FindingKind.FIXED) == ()


# --- what cannot be a side


@pytest.mark.parametrize(
    "name",
    [
        "no-such", "--output=x", "-x", "a b", "main..two", "HEAD:boats", "", "x\ny", "$(touch stolen)", "`id`",
        "\x1b[31mred", "@{-1}", "main^{tree}", "a" * 5000, "x\u202ey", "one; true", ":/", "\x00",
    ],
)  # fmt: skip
def test_a_name_that_is_no_revision_is_told_and_never_an_option(
    name: str, yard: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(yard)
    before = state(yard)
    assert main(["compare", *DAY, "--", name]) == 2
    told = capsys.readouterr()
    assert (told.out, told.err.count("\n")) == ("", 1)
    assert told.err.startswith("fairloom: ")
    assert all(c.isprintable() or c == "\n" for c in told.err)
    assert len(told.err) < 600
    assert state(yard) == before


def test_a_revision_without_a_yard_is_told(yard: Path, tmp_path: Path) -> None:
    top = yard.parents[1]
    git(top, "rm", "--quiet", "-r", "--force", "boats")
    git(top, "commit", "--quiet", "--message", "gone")
    git(top, "tag", "empty")
    write(yard, DORY)
    with pytest.raises(CheckerError, match=r"no yard\.yaml in boats/fleet/ at revision “empty”"):
        of("empty", None, yard)


def test_a_folder_without_a_yard_is_told(yard: Path, tmp_path: Path) -> None:
    (tmp_path / "bare").mkdir()
    with pytest.raises(CheckerError, match=r"no yard\.yaml in"):
        of(tmp_path / "bare", None, yard)
    with pytest.raises(CheckerError, match=r"no yard\.yaml in"):
        of("one", None, yard.parent)


def test_a_folder_in_no_repository_is_told(tmp_path: Path) -> None:
    folder = write(tmp_path / "a", DORY)
    with pytest.raises(CheckerError, match="git: not a git repository"):
        of("main", None, folder)


def test_a_missing_git_is_told(yard: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PATH", str(yard))
    with pytest.raises(CheckerError, match="git is not installed"):
        of("one", None, yard)


def test_a_missing_folder_is_told(tmp_path: Path) -> None:
    with pytest.raises(CheckerError, match="there is no folder"):
        of("main", None, tmp_path / "none")


def test_a_name_that_is_a_folder_and_a_revision_is_refused_until_it_is_said_which(
    yard: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(yard)
    write(yard / "one", DORY)
    with pytest.raises(CheckerError, match=r"is a folder and a revision: write \./one"):
        of("one", "two", yard)
    assert abouts(of("./one", "two", yard)) == ["C1"]
    assert abouts(of("refs/tags/one", "two", yard)) == ["C1"]


def test_variables_that_a_git_hook_sets_do_not_lead_elsewhere(yard: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("GIT_DIR", os.devnull)
    monkeypatch.setenv("GIT_INDEX_FILE", str(yard / "index"))
    assert abouts(of("one", "two", yard)) == ["C1"]


# --- the command


def test_new_errors_end_with_1_and_a_sound_change_with_0(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    base = write(tmp_path / "a", DORY)
    faulty = write(tmp_path / "b", edited("hulls/dory-1.yaml", "options: []", "options: [OPT-NONE]"))
    assert main(["compare", str(base), str(faulty), *DAY]) == 1
    assert capsys.readouterr().out.startswith("verdict: 1 hull worse, 0 better, 0 unchanged; 2 new errors")
    sound = write(tmp_path / "c", edited("classes/dory-14/class.yaml", "length: 3 m", "length: 2.5 m"))
    assert main(["compare", str(base), str(sound), *DAY]) == 0


def test_lost_coverage_and_anything_worse_fail_only_where_it_is_asked_for(tmp_path: Path) -> None:
    base = write(tmp_path / "a", DORY)
    text = DORY["classes/dory-14/class.yaml"].replace("shields: {}", "shields: not recorded")
    head = write(tmp_path / "b", {**DORY, "classes/dory-14/class.yaml": text})
    words = ["compare", str(base), str(head), *DAY]
    assert main(words) == 0
    assert main([*words, "--fail-on", "new-errors"]) == 0
    assert main([*words, "--fail-on", "less-checked"]) == 1
    assert main([*words, "--fail-on", "worse"]) == 1
    assert main(["compare", str(head), str(base), *DAY, "--fail-on", "less-checked", "--fail-on", "worse"]) == 0


def test_the_markdown_is_appended_and_a_file_that_cannot_be_written_is_told(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    base, head, summary = write(tmp_path / "a", DORY), write(tmp_path / "b", THINNER), tmp_path / "summary.md"
    summary.write_text("before\n", encoding="utf-8")
    words = ["compare", str(base), str(head), *DAY, "--markdown"]
    main([*words, str(summary)])
    assert summary.read_text(encoding="utf-8").startswith("before\n## Review of the change\n")
    capsys.readouterr()
    assert main([*words, str(tmp_path / "none" / "x.md")]) == 2
    assert "cannot be written" in capsys.readouterr().err
