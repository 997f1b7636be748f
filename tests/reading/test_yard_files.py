"""All files of a yard are found and read; what cannot be read is told and never looks as if it had been."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from checker.errors import FleetNotFoundError
from checker.reading.document import LARGEST_FILE_BYTES
from checker.reading.yard_files import YardFiles, read_yard
from tests.dory_yard import DORY, HULL, checked, edited, place, told, write

PLACES = (
    "a yard keeps yard.yaml, waivers.yaml, parts/*.yaml, classes/ID/*.yaml, classes/ID/options/*.yaml, hulls/*.yaml, "
    "limits/SET/*.yaml, sheets/*.yaml, sheets/*.csv"
)
ROOT = Path(__file__).resolve().parents[2]


def faults(files: YardFiles) -> list[str]:
    """Return each fault as `place check: message (remedy)`."""
    return [f"{f.at} {f.check}: {f.message} ({f.remedy})" for f in files.faults]


def test_a_sound_yard_is_read_whole_by_kind(tmp_path: Path) -> None:
    files = read_yard(write(tmp_path, {**DORY, "waivers.yaml": "waivers: {}\n"}))
    assert files.faults == []
    assert files.yard is not None
    assert files.waivers is not None
    assert [document.file for document in files.parts] == ["parts/all.yaml"]
    assert {name: [d.file for d in group] for name, group in files.classes.items()} == {
        "dory-14": ["classes/dory-14/class.yaml"]
    }
    assert {name: [d.file for d in group] for name, group in files.options.items()} == {
        "dory-14": ["classes/dory-14/options/lamp.yaml"]
    }
    assert [document.file for document in files.hulls] == ["hulls/dory-1.yaml"]
    assert files.bytes_read == sum(len(text.encode()) for text in DORY.values()) + len("waivers: {}\n")


def test_a_folder_without_a_yard_file_holds_no_fleet(tmp_path: Path) -> None:
    for folder in (tmp_path, tmp_path / "nowhere", write(tmp_path, {"a.txt": ""}) / "a.txt"):
        with pytest.raises(FleetNotFoundError, match=r"no yard\.yaml in .*: give the folder of a yard's repository"):
            read_yard(folder)


def test_files_are_read_in_the_order_of_their_paths_and_not_of_the_directory(tmp_path: Path) -> None:
    names = ["b", "a", "Z", "10", "2", "é"]
    hulls = {f"hulls/{name}.yaml": HULL.replace("DORY-1", f"H-{number}") for number, name in enumerate(names)}
    files = read_yard(write(tmp_path, {**DORY, **dict(reversed(hulls.items()))}))
    assert [document.file for document in files.hulls] == [
        "hulls/10.yaml", "hulls/2.yaml", "hulls/Z.yaml", "hulls/a.yaml", "hulls/b.yaml", "hulls/dory-1.yaml",
        "hulls/é.yaml",
    ]  # fmt: skip


# --- files at the wrong place


@pytest.mark.parametrize(
    "name",
    ["dory-1.yaml", "hulls/old/dory-1.yaml", "parts/fuses/all.yaml", "classes/class.yaml", "classes/a/b/c.yaml",
     "classes/dory-14/options/old/lamp.yaml"],
)  # fmt: skip
def test_a_file_at_a_place_for_no_kind_of_document_is_told(tmp_path: Path, name: str) -> None:
    files = read_yard(write(tmp_path, {**DORY, name: HULL}))
    assert faults(files) == [f"{name}:1:1 unreadable-file: no kind of document is kept at this place ({PLACES})"]


@pytest.mark.parametrize(("name", "meant"), [("waiver.yaml", "waivers.yaml"), ("Yard.yaml", "yard.yaml")])
def test_a_mistyped_file_name_is_told_with_the_right_one(tmp_path: Path, name: str, meant: str) -> None:
    files = read_yard(write(tmp_path, {**DORY, name: "waivers: {}\n"}))
    message = f"{name}:1:1 unreadable-file: no kind of document is kept at this place (did you mean {meant}?)"
    assert faults(files) == [message]


@pytest.mark.parametrize("name", ["hulls/dory-2.yml", "hulls/dory-2.YAML", "hulls/dory-2.Yml", "waivers.yml"])
def test_a_file_with_another_ending_is_told_and_not_passed_over(tmp_path: Path, name: str) -> None:
    files = read_yard(write(tmp_path, {**DORY, name: HULL.replace("DORY-1", "DORY-2")}))
    remedy = f"rename it to {name.rpartition('.')[0]}.yaml"
    assert faults(files) == [f"{name}:1:1 unreadable-file: files of a yard end in .yaml ({remedy})"]


def test_files_that_are_no_yaml_and_hidden_ones_at_the_top_are_left_alone(tmp_path: Path) -> None:
    others = {"README.md": "# Yard\n", "hulls/notes.txt": "x", ".pre-commit-config.yaml": "repos: []\n"}
    assert read_yard(write(tmp_path, {**DORY, **others})).faults == []


@pytest.mark.parametrize("folder", ["dory 14", "dory.14", "-dory", "d" * 41])
def test_a_class_folder_whose_name_is_no_plain_id_is_told(tmp_path: Path, folder: str) -> None:
    text = DORY["classes/dory-14/class.yaml"]
    files = read_yard(write(tmp_path, {**DORY, f"classes/{folder}/class.yaml": text}))
    assert faults(files) == [f"classes/{folder}/class.yaml:1:1 bad-value: folder “{folder}” is not a plain id ()"]


def test_options_of_a_class_without_a_file_are_told(tmp_path: Path) -> None:
    text = DORY["classes/dory-14/options/lamp.yaml"]
    result = checked(tmp_path, {**DORY, "classes/dory-15/options/lamp.yaml": text})
    assert told(result) == [
        ("unknown-reference", "classes/dory-15/options/lamp.yaml:1:1",
         "options of a class “dory-15” that has no file of its own", "add classes/dory-15/class.yaml")
    ]  # fmt: skip


# --- links

LEAVES = "unreadable-file: the file is a link that leaves the repository (copy the file in)"
needs_links = pytest.mark.skipif(not hasattr(os, "symlink"), reason="links cannot be made here")


@needs_links
def test_a_link_that_leaves_the_repository_is_told_and_not_read(tmp_path: Path) -> None:
    outside = tmp_path / "outside.yaml"
    outside.write_text(HULL.replace("DORY-1", "DORY-2"), encoding="utf-8")
    yard = write(tmp_path / "yard", DORY)
    (yard / "hulls/dory-2.yaml").symlink_to(outside)
    (yard / "hulls/dory-3.yaml").symlink_to("../../outside.yaml")
    files = read_yard(yard)
    assert faults(files) == [f"hulls/dory-2.yaml:1:1 {LEAVES}", f"hulls/dory-3.yaml:1:1 {LEAVES}"]
    assert [document.data for document in files.hulls if document.file != "hulls/dory-1.yaml"] == [None, None]


@needs_links
def test_a_link_inside_the_repository_is_read(tmp_path: Path) -> None:
    yard = write(tmp_path, {**DORY, "shared/hull.yaml": HULL.replace("DORY-1", "DORY-2")})
    (yard / "hulls/dory-2.yaml").symlink_to("../shared/hull.yaml")
    files = read_yard(yard)
    assert files.faults == []
    assert [document.data["hull"] for document in files.hulls] == ["DORY-1", "DORY-2"]


@needs_links
def test_a_repository_that_is_itself_reached_by_a_link_is_read(tmp_path: Path) -> None:
    write(tmp_path / "real", DORY)
    (tmp_path / "linked").symlink_to("real")
    assert read_yard(tmp_path / "linked").faults == []


@needs_links
@pytest.mark.parametrize("target", ["loop.yaml", "nowhere.yaml"])
def test_a_link_that_leads_to_itself_or_nowhere_is_told(tmp_path: Path, target: str) -> None:
    yard = write(tmp_path, DORY)
    (yard / "hulls/loop.yaml").symlink_to(target)
    (fault,) = read_yard(yard).faults
    assert (fault.check, str(fault.at)) == ("unreadable-file", "hulls/loop.yaml:1:1")
    assert fault.message.startswith(("the file cannot be read: ", "the file is a link that leads to itself"))


@needs_links
def test_a_linked_folder_is_told_and_not_passed_over(tmp_path: Path) -> None:
    write(tmp_path / "elsewhere", {"lamp.yaml": DORY["classes/dory-14/options/lamp.yaml"]})
    yard = write(tmp_path / "yard", {k: v for k, v in DORY.items() if "options" not in k})
    (yard / "classes/dory-14/options").symlink_to(tmp_path / "elsewhere")
    assert ("classes/dory-14/options:1:1 unreadable-file: a linked folder is not read (copy the files in)") in faults(
        read_yard(yard)
    )


@needs_links
@pytest.mark.parametrize(
    ("name", "unstudied"),
    [
        ("yard.yaml", ("class dory-14", "hull DORY-1")),
        ("parts/all.yaml", ("class dory-14", "hull DORY-1")),
        ("classes/dory-14/class.yaml", ("class dory-14", "hull DORY-1")),
        ("classes/dory-14/options/lamp.yaml", ("class dory-14", "hull DORY-1")),
        ("hulls/dory-1.yaml", ("hull hulls/dory-1.yaml",)),
    ],
)
def test_what_rests_on_a_file_that_was_not_read_is_not_studied(
    tmp_path: Path, name: str, unstudied: tuple[str, ...]
) -> None:
    yard = write(tmp_path / "yard", DORY)
    shutil.move(yard / name, tmp_path / "moved.yaml")
    (yard / name).symlink_to(tmp_path / "moved.yaml")
    result = checked(yard, {})
    assert told(result) == [
        ("unreadable-file", f"{name}:1:1", "the file is a link that leaves the repository", "copy the file in")
    ]
    assert result.unstudied == unstudied
    assert not result.is_clean


# --- files that cannot be read


def test_a_file_that_is_too_large_is_told_and_the_others_are_read(tmp_path: Path) -> None:
    yard = write(tmp_path, {**DORY, "hulls/dory-2.yaml": "# " + "x" * LARGEST_FILE_BYTES})
    result = checked(yard, {})
    size = f"{LARGEST_FILE_BYTES + 2:,} bytes; at most {LARGEST_FILE_BYTES:,} are read"
    assert told(result) == [
        ("unreadable-file", "hulls/dory-2.yaml:1:1", f"the file is too large: {size}", "split the file")
    ]
    assert [subject.id for subject in result.subjects if subject.is_hull] == ["DORY-1"]
    assert result.unstudied == ("hull hulls/dory-2.yaml",)


def test_bytes_that_cannot_be_read_in_one_file_do_not_stop_the_others(tmp_path: Path) -> None:
    yard = write(tmp_path, DORY)
    (yard / "hulls/dory-0.yaml").write_bytes(b"hull: DORY-0\nclass: \xff\xfe\n")
    result = checked(yard, {})
    assert told(result) == [
        ("unreadable-file", "hulls/dory-0.yaml:2:8", "the file is not UTF-8 text (byte 0xff cannot be read)",
         "save it as UTF-8")
    ]  # fmt: skip
    assert [subject.id for subject in result.subjects if subject.is_hull] == ["DORY-1"]


def test_a_folder_named_like_a_file_is_told(tmp_path: Path) -> None:
    yard = write(tmp_path, DORY)
    (yard / "hulls/dory-2.yaml").mkdir()
    (fault,) = read_yard(yard).faults
    assert (fault.check, str(fault.at)) == ("unreadable-file", "hulls/dory-2.yaml:1:1")
    assert fault.message.startswith("the file cannot be read: ")


def test_all_faults_of_all_files_are_collected_in_one_run(tmp_path: Path) -> None:
    files = edited("parts/all.yaml", "rating: 100 A", "rating: 100")
    files = edited("classes/dory-14/class.yaml", "length: 2 m", "length: 2,5 m", files)
    files = edited("classes/dory-14/options/lamp.yaml", "name: Third lamp", "name:", files)
    files = edited("hulls/dory-1.yaml", "status: planned", "status: afloat\nstatus: planned", files)
    files |= {"hulls/dory-2.yaml": "", "hulls/dory-3.yaml": "hull: A.B\n", "waivers.yml": ""}
    result = checked(tmp_path, files)
    assert [(check, at) for check, at, _, _ in told(result)] == [
        ("bad-value", place("classes/dory-14/class.yaml", "5 m}", files)),
        ("bad-value", "classes/dory-14/options/lamp.yaml:2:1"),
        ("repeated-key", "hulls/dory-1.yaml:5:1"),
        ("unreadable-file", "hulls/dory-2.yaml:1:1"),
        ("missing-field", "hulls/dory-3.yaml:1:1"),
        ("missing-field", "hulls/dory-3.yaml:1:1"),
        ("missing-field", "hulls/dory-3.yaml:1:1"),
        ("missing-field", "hulls/dory-3.yaml:1:1"),
        ("bad-value", "hulls/dory-3.yaml:1:7"),
        ("bad-value", place("parts/all.yaml", "100}", files)),
        ("unreadable-file", "waivers.yml:1:1"),
    ]
    assert result.unstudied == ("class dory-14", "hull A.B", "hull DORY-1", "hull hulls/dory-2.yaml")


# --- names of files


def test_a_file_name_that_is_no_text_is_spelled_out_and_can_be_written(tmp_path: Path) -> None:
    yard = write(tmp_path, DORY)
    try:
        with open(os.fsencode(yard / "hulls") + b"/\xff\n.yaml", "wb") as file:
            file.write(b"hull: 7\n")
    except OSError:
        pytest.skip("this file system refuses such a name")
    run = subprocess.run(
        [sys.executable, "-m", "checker", "check", str(yard), "--today", "2026-12-01", "--reports", str(tmp_path / "r")],
        cwd=ROOT, capture_output=True, text=True, encoding="utf-8", check=False,
    )  # fmt: skip
    assert run.returncode == 1
    assert "Traceback" not in run.stderr
    assert "  at: hulls/\\xff\\u000a.yaml:1:7\n" in run.stdout


def test_a_file_name_with_digits_of_another_script_is_sorted_and_told(tmp_path: Path) -> None:
    result = checked(tmp_path, {**DORY, "hulls/1²2.yaml": "hull: 7\n", "hulls/٣.yaml": "hull: 7\n"})
    assert result.unstudied == ("hull hulls/1²2.yaml", "hull hulls/٣.yaml")
