"""The command writes every further report in the same run, with paths from the root of the repository."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path
from xml.etree import ElementTree

import pytest

import checker.pipeline
from checker.cli import main
from checker.errors import UsageError
from checker.output.further import folder_in_repository, given_prefix
from tests.dory_yard import DORY, write
from tests.output.workflow_commands import commands

ROOT = Path(__file__).resolve().parents[2]
DAY = ["--today", "2026-12-01"]
OPTIONS = {"--sarif": "all.sarif", "--sarif-upload": "open.sarif", "--junit": "junit.xml",
           "--code-quality": "quality.json", "--summary": "summary.md"}  # fmt: skip


@pytest.fixture
def yard(tmp_path: Path) -> Path:
    """Return a yard in a folder of a repository."""
    (tmp_path / "repository/.git").mkdir(parents=True)
    return write(tmp_path / "repository/our boats/yard", DORY)


def options_in(folder: Path) -> list[str]:
    return [word for option, name in OPTIONS.items() for word in (option, str(folder / name))]


def uris(sarif: Path) -> set[str]:
    results = json.loads(sarif.read_text(encoding="utf-8"))["runs"][0]["results"]
    return {row["locations"][0]["physicalLocation"]["artifactLocation"]["uri"].rpartition("/")[0] for row in results}


def test_one_run_studies_once_and_writes_them_all(
    yard: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    studied: list[Path] = []
    real = checker.pipeline.check_fleet

    def counting(folder: Path, **words: object) -> object:
        studied.append(folder)
        return real(folder, **words)  # type: ignore[arg-type]

    monkeypatch.setattr(checker.pipeline, "check_fleet", counting)
    out = tmp_path / "made for it/out"
    assert main(["check", str(yard), *options_in(out), "--annotations", "--reports", str(tmp_path / "r"), *DAY]) == 1
    assert studied == [yard]
    assert sorted(path.name for path in out.iterdir()) == sorted(OPTIONS.values())
    assert (tmp_path / "r/fleet.txt").is_file()
    ElementTree.parse(out / "junit.xml")
    found = list(commands(capsys.readouterr().out))
    assert {command.properties["file"].rpartition("/")[0] for command in found[:-1]} == {
        "our boats/yard/classes/dory-14"
    }
    assert uris(out / "open.sarif") == {"our%20boats/yard/classes/dory-14"}
    assert (
        json.loads((out / "quality.json").read_bytes())[0]["location"]["path"]
        == "our boats/yard/classes/dory-14/class.yaml"
    )
    assert "our boats/yard/classes/dory-14/class.yaml&#58;17&#58;37" in (out / "summary.md").read_text(encoding="utf-8")


def test_the_screen_text_stays_as_it_is_and_the_verdict_stands_below_the_commands(
    yard: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    main(["check", str(yard), *DAY])
    plain = capsys.readouterr().out
    main(["check", str(yard), "--annotations", *DAY])
    lines = capsys.readouterr().out.splitlines()
    stop = next(number for number, line in enumerate(lines) if line.startswith("::stop-commands::"))
    assert "\n".join(lines[stop + 1 : -1]) + "\n" == plain
    assert all(line.startswith(("::error ", "::warning ", "::notice ")) for line in lines[:stop])
    assert lines[-1] == f"::{lines[stop].removeprefix('::stop-commands::')}::"


@pytest.mark.parametrize("option", OPTIONS)
def test_a_report_on_standard_output_stands_there_alone(
    yard: Path, tmp_path: Path, option: str, capsysbinary: pytest.CaptureFixture[bytes]
) -> None:
    file = tmp_path / "file"
    assert main(["check", str(yard), option, str(file), *DAY]) == 1
    capsysbinary.readouterr()
    assert main(["check", str(yard), option, "-", *DAY]) == 1
    printed = capsysbinary.readouterr()
    assert printed.out == file.read_bytes()
    assert printed.err == b""


@pytest.mark.parametrize("words", [["--sarif", "-", "--junit", "-"], ["--sarif", "-", "--annotations"]])
def test_standard_output_takes_one_report(yard: Path, words: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(yard), *words, *DAY]) == 2
    printed = capsys.readouterr()
    assert (printed.out, printed.err.count("\n")) == ("", 1)


def test_the_summary_is_appended_and_every_other_report_written_anew(yard: Path, tmp_path: Path) -> None:
    for name in OPTIONS.values():
        (tmp_path / name).write_text("before\n", encoding="utf-8")
    main(["check", str(yard), *options_in(tmp_path), *DAY])
    kept = [name for name in OPTIONS.values() if (tmp_path / name).read_text(encoding="utf-8").startswith("before\n")]
    assert kept == ["summary.md"]


def test_a_report_that_cannot_be_written_is_told_and_loses_no_other(
    yard: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "folder").mkdir()
    words = ["--sarif", str(tmp_path / "folder"), "--junit", str(tmp_path / "junit.xml"), "--summary", "a\0b"]
    assert main(["check", str(yard), *words, *DAY]) == 2
    printed = capsys.readouterr()
    assert "verdict: " in printed.out
    assert printed.err.count("cannot be written") == 2
    assert printed.err.count("\n") == 1
    assert (tmp_path / "junit.xml").is_file()


def test_a_reader_of_the_screen_who_leaves_early_loses_no_report(yard: Path, tmp_path: Path) -> None:
    reader, writer = os.pipe()
    os.close(reader)
    command = [sys.executable, "-m", "checker", "check", str(yard), *options_in(tmp_path), "--annotations", *DAY]
    try:
        subprocess.run(command, cwd=ROOT, stdout=writer, stderr=subprocess.PIPE, check=False)
    finally:
        os.close(writer)
    assert [name for name in OPTIONS.values() if not (tmp_path / name).is_file()] == []


def test_the_bytes_depend_on_no_hash_seed_locale_workers_or_place(yard: Path, tmp_path: Path) -> None:
    made: list[dict[str, bytes]] = []
    for number, (seed, locale, folder, cwd) in enumerate(
        [
            ("1", "C", str(yard), ROOT),
            ("77", "C.UTF-8", ".", yard),
            ("5", "POSIX", "../our boats/yard", yard.parent.parent / "our boats"),
        ]
    ):
        out = tmp_path / str(number)
        environment = {**os.environ, "PYTHONHASHSEED": seed, "LC_ALL": locale, "PYTHONPATH": str(ROOT)}
        command = [
            sys.executable,
            "-m",
            "checker",
            "check",
            folder,
            *options_in(out),
            *DAY,
            "--workers",
            str(number + 1),
        ]
        subprocess.run(command, cwd=cwd, env=environment, capture_output=True, check=False)
        made.append({path.name: path.read_bytes() for path in out.iterdir()})
    assert made[0] == made[1] == made[2]
    assert sorted(made[0]) == sorted(OPTIONS.values())
    for content in made[0].values():
        assert b"\r" not in content
        assert str(tmp_path).encode() not in content
        assert content.endswith(b"\n")


def test_where_in_its_repository_a_folder_lies(tmp_path: Path) -> None:
    (tmp_path / "r/a/b").mkdir(parents=True)
    assert folder_in_repository(tmp_path / "r/a/b") == ""
    (tmp_path / "r/.git").write_text("gitdir: elsewhere\n", encoding="utf-8")  # as in a linked working tree
    assert folder_in_repository(tmp_path / "r/a/b") == "a/b"
    assert folder_in_repository(tmp_path / "r/a/../a") == "a"
    assert folder_in_repository(tmp_path / "r") == ""
    (tmp_path / "r/a/.git").mkdir()
    assert folder_in_repository(tmp_path / "r/a/b") == "b"


@pytest.mark.parametrize(
    ("given", "prefix"), [("boats/yard", "boats/yard"), ("./boats/", "boats"), (".", ""), ("", ""), ("a\\b", "a/b")]
)
def test_the_yards_path_may_be_given(given: str, prefix: str) -> None:
    assert given_prefix(given) == prefix


@pytest.mark.parametrize("given", ["/boats", "../boats", "a/../b", "C:/boats", "https://e.test", "\\boats"])
def test_a_path_that_does_not_lead_down_from_the_root_is_refused(given: str) -> None:
    with pytest.raises(UsageError, match="--yard-path"):
        given_prefix(given)


def test_a_given_path_goes_before_the_one_that_is_found(yard: Path, tmp_path: Path) -> None:
    main(["check", str(yard), "--sarif", str(tmp_path / "s"), "--yard-path", "elsewhere", *DAY])
    assert uris(tmp_path / "s") >= {"elsewhere/classes/dory-14"}
