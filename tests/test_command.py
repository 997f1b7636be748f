"""The command as a yard runs it: exit status, streams, reports, and bytes that depend on nothing but the files."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
from collections.abc import Mapping
from pathlib import Path

import pytest

from checker import __version__
from checker.pipeline import FEWEST_FOR_WORKERS, all_cards
from tests.dory_yard import CLASS, DORY, HULL, OPTION, YARD, edited, write

ROOT = Path(__file__).resolve().parents[1]
EXAMPLE = ROOT / "fleet_example"
DAY = ("--today", "2026-12-01")


def run(*words: str | Path, cwd: Path = ROOT, **environment: str) -> subprocess.CompletedProcess[str]:
    """Run the command in a fresh interpreter."""
    plain = {k: v for k, v in os.environ.items() if k not in ("NO_COLOR", "PYTHONHASHSEED", "PYTHONUTF8")}
    return subprocess.run(
        [sys.executable, "-m", "checker", *map(str, words)],
        cwd=cwd, env={**plain, "PYTHONPATH": str(ROOT), **environment}, capture_output=True, check=False,
        text=True, encoding="utf-8", errors="surrogateescape",
    )  # fmt: skip


def files_in(folder: Path) -> dict[str, bytes]:
    return {p.relative_to(folder).as_posix(): p.read_bytes() for p in sorted(folder.rglob("*")) if p.is_file()}


def many_boats(count: int) -> dict[str, str]:
    """Return a yard of hulls that all differ, so that each is studied by itself."""
    files: dict[str, str] = dict(DORY)
    for number in range(count):
        change = f"changes: {{D: {{what: longer, set: {{circuits: {{C2: {{length: {number + 4} m}}}}}}}}}}\n"
        files[f"hulls/dory-{number:02d}.yaml"] = HULL.replace("DORY-1", f"DORY-{number + 10}") + change
    return files


# --- exit status


def test_a_fleet_without_open_errors_ends_with_0() -> None:
    done = run("check", EXAMPLE, "--only", "TND-031", *DAY)
    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout.splitlines()[-2] == "verdict: 0 hulls of 1 have open errors"


def test_open_errors_end_with_1() -> None:
    done = run("check", EXAMPLE, "--only", "TND-035", *DAY)
    assert (done.returncode, done.stderr) == (1, "")
    assert done.stdout.splitlines()[-2] == "verdict: 1 hull of 1 has open errors (TND-035)"


def test_faults_of_files_end_with_1_and_never_with_0(tmp_path: Path) -> None:
    done = run("check", write(tmp_path, {**DORY, "hulls/dory-2.yaml": ""}), *DAY)
    assert (done.returncode, done.stderr) == (1, "")
    assert "NOT STUDIED: hull hulls/dory-2.yaml" in done.stdout


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (["check", "nowhere", *DAY], "fairloom: no yard.yaml in nowhere: give the folder of a yard's repository\n"),
        (["check", "fleet_example", "--only", "TND-013", *DAY],
         "fairloom: there is no hull TND-013; did you mean TND-038?\n"),
        (["check", "fleet_example", "--only", "BOAT", *DAY], "fairloom: there is no hull BOAT\n"),
        (["check", "fleet_example", "--today", "tomorrow"],
         "fairloom: --today: “tomorrow” is no date; write e.g. 2028-05-29\n"),
        (["check", "fleet_example", "--today", "2026-02-30"],
         "fairloom: --today: “2026-02-30” is no date; write e.g. 2028-05-29\n"),
        (["check", "fleet_example", "--today", ""], "fairloom: --today: “” is no date; write e.g. 2028-05-29\n"),
        (["check", "fleet_example", "--only", "TND-031", "--reports", "reports", *DAY],
         "fairloom: reports are those of the whole fleet: leave out --only\n"),
        (["explain", "shunt-bypas"], "fairloom: there is no check shunt-bypas; did you mean shunt-bypass?\n"),
        (["explain", "xyz"], "fairloom: there is no check xyz\n"),
    ],
)  # fmt: skip
def test_a_run_that_could_not_be_done_ends_with_2_and_says_why(words: list[str], message: str) -> None:
    done = run(*words)
    assert (done.returncode, done.stdout, done.stderr) == (2, "", message)


@pytest.mark.parametrize(
    "words",
    [
        [],
        ["chek"],
        ["check", "--workers", "0"],
        ["check", "--workers", "x"],
        ["check", "--workers", "²"],
        ["check", "a", "b"],
    ],
)
def test_a_command_line_that_cannot_be_understood_ends_with_2(words: list[str]) -> None:
    done = run(*words)
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith("usage: fairloom")
    assert "Traceback" not in done.stderr


def test_reports_that_cannot_be_written_end_with_2(tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("x", encoding="utf-8")
    done = run("check", write(tmp_path / "yard", DORY), "--reports", tmp_path / "taken", *DAY)
    assert done.returncode == 2
    assert done.stderr.startswith(f"fairloom: reports cannot be written to {tmp_path / 'taken'}: ")


# --- questions about the command


def test_the_version_is_told() -> None:
    done = run("--version")
    assert (done.returncode, done.stdout, done.stderr) == (0, f"fairloom {__version__}\n", "")


def test_the_version_is_told_without_loading_what_is_slow() -> None:
    script = (
        "import sys\nfrom checker.cli import main\ntry:\n    main(['--version'])\nfinally:\n    print(*sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", script], cwd=ROOT, capture_output=True, text=True, check=False)
    loaded = set(done.stdout.split())
    assert "checker.cli" in loaded
    assert loaded & {"yaml", "jsonschema", "networkx", "referencing", "multiprocessing", "checker.pipeline"} == set()


def test_explain_lists_every_check_once_in_one_line() -> None:
    done = run("explain")
    assert (done.returncode, done.stderr) == (0, "")
    assert [line.split()[0] for line in done.stdout.splitlines()] == [card.id for card in all_cards()]
    assert all(card.title in done.stdout for card in all_cards())


def test_explain_prints_the_page_of_every_check(capsys: pytest.CaptureFixture[str]) -> None:
    from checker.cli import main

    for card in all_cards():
        assert main(["explain", card.id]) == 0
        page = capsys.readouterr().out
        assert page.startswith(f"{card.id}: {card.title}\n\n")
        assert f"\nlevel: {card.level.value}\n" in page
        assert "\nrests on: " in page
        assert max(map(len, page.splitlines()[1:])) <= 100


# --- one hull


def test_only_the_named_hulls_are_checked(tmp_path: Path) -> None:
    files = {**DORY, "hulls/b.yaml": HULL.replace("DORY-1", "DORY-2"), "hulls/c.yaml": HULL.replace("DORY-1", "DORY-3")}
    done = run("check", write(tmp_path, files), "--only", "DORY-3", "--only", "DORY-1", *DAY)
    summary = [line.split(" (")[0] for line in done.stdout.splitlines() if re.match("(hull|option set) ", line)]
    assert summary == ["hull DORY-1", "hull DORY-3"]


# --- reports


def test_reports_written_twice_are_the_same_bytes_and_stale_ones_are_removed(tmp_path: Path) -> None:
    yard, reports = (
        write(tmp_path / "yard", {**DORY, "hulls/b.yaml": HULL.replace("DORY-1", "DORY-2")}),
        tmp_path / "out",
    )
    done = run("check", yard, "--reports", reports, *DAY)
    assert done.stderr == f"4 reports written to {reports}\n"
    first = files_in(reports)
    assert sorted(first) == [
        "fleet.txt", "hulls/DORY-1.txt", "hulls/DORY-2.txt", "result.json",
    ]  # fmt: skip
    run("check", yard, "--reports", reports, *DAY)
    assert files_in(reports) == first
    (yard / "hulls/b.yaml").unlink()
    run("check", yard, "--reports", reports, *DAY)
    assert sorted(files_in(reports)) == ["fleet.txt", "hulls/DORY-1.txt", "result.json"]


def test_reports_have_plain_line_ends_no_byte_order_mark_and_end_in_one_line_break(tmp_path: Path) -> None:
    run("check", write(tmp_path / "yard", DORY), "--reports", tmp_path / "out", *DAY)
    for content in files_in(tmp_path / "out").values():
        assert not content.startswith(b"\xef\xbb\xbf")
        assert b"\r" not in content
        assert content.endswith(b"\n")
        assert not content.endswith(b"\n\n")
        content.decode("utf-8")


def test_reports_name_no_place_of_the_machine(tmp_path: Path) -> None:
    yard = write(tmp_path / "yard", {**DORY, "hulls/dory-2.yaml": "hull: 7\n"})
    done = run("check", yard, "--reports", tmp_path / "out", *DAY)
    for content in [done.stdout.encode(), *files_in(tmp_path / "out").values()]:
        assert str(tmp_path).encode() not in content
        assert b"2026-12-01" not in content


# --- the same bytes everywhere


def outputs(
    yard: Path, reports: Path, *words: str, cwd: Path = ROOT, **environment: str
) -> tuple[str, dict[str, bytes]]:
    done = run("check", yard, "--reports", reports, *DAY, *words, cwd=cwd, **environment)
    assert done.returncode == 1, done.stderr
    assert "Traceback" not in done.stderr
    return done.stdout, files_in(reports)


ENVIRONMENTS: list[Mapping[str, str]] = [
    {"PYTHONHASHSEED": "1"},
    {"PYTHONHASHSEED": "4242", "TZ": "Pacific/Kiritimati", "LANG": "de_DE.UTF-8"},
    {"TZ": "America/St_Johns", "LC_ALL": "C"},
    {"LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"},
    {"LC_ALL": "POSIX", "PYTHONUTF8": "1", "PYTHONIOENCODING": "latin-1"},
    {"COLUMNS": "40", "NO_COLOR": "1", "TERM": "dumb"},
]


def test_the_bytes_depend_on_no_hash_seed_time_zone_locale_or_working_directory(tmp_path: Path) -> None:
    files = {**DORY, "hulls/bücher-é.yaml": HULL.replace("DORY-1", "DORY-2") + "note: prüfen\nfoo: bar\n"}
    files["yard.yaml"] = YARD.replace("Dory Works", "Werft Süd ⚓")
    yard = write(tmp_path / "yard", files)
    first = outputs(yard, tmp_path / "first")
    assert "hulls/bücher-é.yaml:7:1" in first[0]
    for number, environment in enumerate(ENVIRONMENTS):
        assert outputs(yard, tmp_path / str(number), **environment) == first, environment
    assert outputs(Path(), tmp_path / "inside", cwd=yard) == first
    assert outputs(Path("yard"), tmp_path / "beside", cwd=tmp_path) == first


def test_the_bytes_do_not_depend_on_the_number_of_workers(tmp_path: Path) -> None:
    yard = write(tmp_path / "yard", many_boats(FEWEST_FOR_WORKERS + 3))
    first = outputs(yard, tmp_path / "1", "--workers", "1")
    assert f"distinct boats studied: {FEWEST_FOR_WORKERS + 5}\n" in first[0]
    for workers in ("2", "4"):
        assert outputs(yard, tmp_path / workers, "--workers", workers) == first


# --- streams


def closed_pipe(*words: str) -> subprocess.CompletedProcess[bytes]:
    """Run the command with its output going to a reader that has left."""
    reader, writer = os.pipe()
    os.close(reader)
    try:
        return subprocess.run(
            [sys.executable, "-m", "checker", *words], cwd=ROOT, stdout=writer, stderr=subprocess.PIPE, check=False
        )
    finally:
        os.close(writer)


@pytest.mark.parametrize(
    "words", [("check", "fleet_example", *DAY), ("check", "fleet_example", "--only", "TND-031", *DAY), ("explain",),
              ("explain", "shunt-bypass"), ("--version",), ("--help",), ("check", "--help")],
)  # fmt: skip
def test_a_closed_pipe_ends_quietly(words: tuple[str, ...]) -> None:
    done = closed_pipe(*words)
    assert done.stderr == b""
    assert done.returncode in (0, 2)


@pytest.mark.skipif(os.name == "nt", reason="needs a shell with pipes")
def test_output_that_is_cut_off_after_its_first_line_ends_quietly() -> None:
    command = f"'{sys.executable}' -m checker check fleet_example --today 2026-12-01 | head -n 1"
    done = subprocess.run(
        ["sh", "-c", command], cwd=ROOT, capture_output=True, text=True, encoding="utf-8", check=False
    )
    assert done.stderr == ""
    assert done.stdout.startswith("error: ")
    assert done.stdout.count("\n") == 1


@pytest.mark.parametrize("environment", [{}, {"NO_COLOR": "1"}, {"FORCE_COLOR": "1", "TERM": "xterm-256color"}])
def test_there_is_no_colour_where_the_output_is_no_terminal(environment: dict[str, str]) -> None:
    done = run("check", EXAMPLE, *DAY, **environment)
    assert "\x1b" not in done.stdout + done.stderr


def on_a_terminal(**environment: str) -> bytes:
    """Run the command with a terminal for its output and return what the terminal got."""
    pty = pytest.importorskip("pty")
    master, slave = pty.openpty()
    command = [sys.executable, "-m", "checker", "check", "fleet_example", "--only", "TND-035", *DAY]
    plain = {key: value for key, value in os.environ.items() if key != "NO_COLOR"}
    child = subprocess.Popen(command, cwd=ROOT, stdout=slave, stderr=slave, env={**plain, **environment})
    os.close(slave)
    got = b""
    while True:
        try:
            piece = os.read(master, 65536)
        except OSError:  # the terminal's other end is closed
            break
        if not piece:
            break
        got += piece
    os.close(master)
    assert child.wait() == 1
    return got


def test_there_is_colour_on_a_terminal_unless_no_color_is_set() -> None:
    assert b"\x1b[31merror:" in on_a_terminal()
    assert b"\x1b" not in on_a_terminal(NO_COLOR="1")


# --- text from a yard's files

NASTY = "\x1b[31mred\n::error file=x::pwned\r\n::set-output name=a::b\u2028\u202etxt.exe\x07\x9b1m"
YAML_NASTY = json.dumps(NASTY)


def nasty_yards() -> dict[str, dict[str, str]]:
    """Return yards with a text that steers terminals and CI where a yard may write text."""
    hull, klass, option = "hulls/dory-1.yaml", "classes/dory-14/class.yaml", "classes/dory-14/options/lamp.yaml"
    return {
        "hull id": edited(hull, "hull: DORY-1", f"hull: {YAML_NASTY}"),
        "hull id with a line break at its end": edited(hull, "hull: DORY-1", 'hull: "DORY-1\\n"'),
        "class of a hull": edited(hull, "class: dory-14", f"class: {YAML_NASTY}"),
        "status": edited(hull, "planned", YAML_NASTY),
        "option of a hull": edited(hull, "[]", f"[{YAML_NASTY}]"),
        "field": {**DORY, hull: HULL + f"{YAML_NASTY}: 1\n"},
        "field twice": {**DORY, hull: HULL + f"{YAML_NASTY}: 1\n{YAML_NASTY}: 1\n"},
        "note": {**DORY, hull: HULL + f"note: {YAML_NASTY}\n"},
        "name of a change": {**DORY, hull: HULL + f"changes: {{{YAML_NASTY}: {{what: x, set: {{}}}}}}\n"},
        "yard": edited("yard.yaml", "Dory Works", YAML_NASTY),
        "limit set": edited("yard.yaml", "[voluntary-dc]", f"[{YAML_NASTY}]"),
        "class name": edited(klass, "name: Dory 14", f"name: {YAML_NASTY}"),
        "device": edited(klass, "NEG: {part: stud", f"{YAML_NASTY}: {{part: stud"),
        "part": edited(klass, "BAT: {part: cell", f"BAT: {{part: {YAML_NASTY}"),
        "post": edited(klass, "from: BAT.neg", f"from: {YAML_NASTY}"),
        "size": edited(klass, "to: NEG, size: 6 AWG", f"to: NEG, size: {YAML_NASTY}"),
        "length": edited(klass, "length: 2 m", f"length: {json.dumps('2 ' + NASTY)}"),
        "state": edited(klass, "kind: normal, switches: {SW: closed", f"kind: normal, switches: {{SW: {YAML_NASTY}"),
        "option id": edited(option, "OPT-LAMP", YAML_NASTY),
        "part kind": edited("parts/all.yaml", "kind: bus", f"kind: {YAML_NASTY}"),
        "rating": edited("parts/all.yaml", "5 A: {}", f"{YAML_NASTY}: {{}}"),
        "tag": edited(hull, "planned", "!%0A%3A%3Aerror%1B planned"),
        "waiver": {**DORY, "waivers.yaml": "waivers: {W: {check: " + YAML_NASTY + ", hull: X, part: x, "
                   "fingerprint: 1a2b3c4d5e6f, reason: " + YAML_NASTY + ", approved_by: x, expires: 2028-01-01}}\n"},
        "raw bytes": {**DORY, hull: HULL + f"note: {NASTY}\n"},
    }  # fmt: skip


@pytest.mark.parametrize("where", list(nasty_yards()))
def test_text_from_a_file_never_steers_a_terminal_or_starts_a_line(
    tmp_path: Path, where: str, capsys: pytest.CaptureFixture[str]
) -> None:
    from checker.cli import main

    yard = write(tmp_path / "yard", nasty_yards()[where])
    assert main(["check", str(yard), "--reports", str(tmp_path / "out"), *DAY]) == 1
    printed = capsys.readouterr()
    texts = {"screen": printed.out}
    texts |= {name: content.decode("utf-8") for name, content in files_in(tmp_path / "out").items()}
    for name, text in texts.items():
        lines = text.split("\n")
        assert all(line.isprintable() for line in lines) or name == "result.json", name
        assert not [line for line in lines if line.lstrip().startswith(("::", "pwned", "##["))], name
        assert "\x1b" not in text, name
    json.loads(texts["result.json"])
    assert printed.err.count("\n") == 1


@pytest.mark.skipif(os.name == "nt", reason="such a name cannot be given to a file here")
def test_the_name_of_a_file_or_folder_never_steers_a_terminal_or_starts_a_line(tmp_path: Path) -> None:
    name = "\x1b[31m\n::error::x"
    files = {**DORY, f"hulls/{name}.yaml": "hull: 7\n", f"classes/{name}/class.yaml": CLASS, f"hulls/{name}.yml": ""}
    files[f"classes/{name}2/options/a.yaml"] = OPTION
    done = run("check", write(tmp_path / "yard", files), "--reports", tmp_path / "out", *DAY)
    assert done.returncode == 1
    assert "Traceback" not in done.stderr
    for text in [done.stdout, *(content.decode() for content in files_in(tmp_path / "out").values())]:
        assert "\x1b" not in text
        assert not [line for line in text.split("\n") if line.startswith("::")]


def test_a_very_long_text_does_not_make_a_very_long_report(tmp_path: Path) -> None:
    files = edited("hulls/dory-1.yaml", "hull: DORY-1", "hull: " + "x" * 100_000)
    files = edited(
        "classes/dory-14/class.yaml", "size: 6 AWG, length: 0.1 m", f"size: {'9' * 100_000} AWG, length: 0.1 m", files
    )
    files["hulls/dory-2.yaml"] = HULL.replace("DORY-1", "DORY-2").replace("[]", f"[{'o' * 40}]") + "k" * 900 + ": 1\n"
    done = run("check", write(tmp_path, files), *DAY)
    assert done.returncode == 1
    assert max(map(len, done.stdout.splitlines())) < 1000


# --- reports that are committed, and studies that are kept


def test_committed_reports_that_are_what_the_data_give_end_with_0(tmp_path: Path) -> None:
    yard = write(tmp_path, DORY)
    run("check", yard, "--reports", tmp_path / "reports", *DAY)
    done = run("check", yard, "--match-reports", tmp_path / "reports", *DAY)
    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout == f"the reports in {tmp_path / 'reports'} are what the data give\n"


def test_committed_reports_that_differ_end_with_1_and_tell_each_file_by_its_first_difference(tmp_path: Path) -> None:
    yard = write(tmp_path, DORY)
    reports = tmp_path / "reports"
    run("check", yard, "--reports", reports, *DAY)
    hull = reports / "hulls" / "DORY-1.txt"
    right = hull.read_text("utf-8")
    status = next(line for line in right.splitlines() if line.startswith("status: "))
    hull.write_text(right.replace(status, "status: \x1b[2Jsold"), "utf-8")
    (reports / "fleet.txt").unlink()
    (reports / "hulls" / "DORY-0.txt").write_text("hull: DORY-0\n")
    (reports / "hulls" / "notes.txt").write_text("of somebody else\n")
    number = right.splitlines().index(status) + 1
    done = run("check", yard, "--match-reports", reports, *DAY)
    assert (done.returncode, done.stderr) == (1, "")
    assert done.stdout.splitlines()[:-1] == [
        "fleet.txt: is not there",
        "hulls/DORY-0.txt: its hull is no more",
        f"hulls/DORY-1.txt:{number}",
        "  is:  status: \\u001b[2Jsold",
        f"  due: {status}",
    ]
    assert "write them again with --reports" in done.stdout.splitlines()[-1]


def test_parts_fill_the_cache_and_the_whole_run_takes_from_it(tmp_path: Path) -> None:
    yard, kept = write(tmp_path, many_boats(3)), tmp_path / "kept"
    first = run("check", yard, "--part", "1/2", "--cache", kept, *DAY)
    run("check", yard, "--part", "2/2", "--cache", kept, *DAY)
    assert (first.returncode, first.stderr) == (0, "")
    assert first.stdout.startswith("part 1 of 2: ")
    plain, warm = run("check", yard, *DAY), run("check", yard, "--cache", kept, *DAY)
    assert (warm.returncode, warm.stdout, warm.stderr) == (plain.returncode, plain.stdout, plain.stderr)
    again = run("check", yard, "--part", "1/2", "--cache", kept, *DAY)
    assert re.match(r"part 1 of 2: ([0-9]+) boats, \1 of them known;", again.stdout)


@pytest.mark.parametrize("part", ["0/2", "3/2", "1", "a/b", "1/0", "-1/2", "1/2/3"])
def test_a_part_that_is_none_is_refused(part: str) -> None:
    done = run("check", "fleet_example", f"--part={part}", "--cache", "x")
    assert (done.returncode, done.stdout) == (2, "")
    assert "write e.g. 2/4" in done.stderr or "write a whole number" in done.stderr


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (["--part", "1/2"], "fairloom: --part studies into --cache FOLDER and tells no verdict"),
        (["--reports", "a", "--match-reports", "b"], "fairloom: --reports writes and --match-reports compares"),
        (["--only", "TND-031", "--match-reports", "b"], "fairloom: reports are those of the whole fleet"),
    ],
)
def test_options_that_exclude_each_other_are_told(words: list[str], message: str) -> None:
    done = run("check", "fleet_example", *words, *DAY)
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith(message)


def test_a_cache_that_cannot_be_written_is_told_and_changes_nothing(tmp_path: Path) -> None:
    yard = write(tmp_path, DORY)
    (tmp_path / "file").write_text("no folder")
    done = run("check", yard, "--cache", tmp_path / "file", *DAY)
    assert done.stdout == run("check", yard, *DAY).stdout
    assert done.stderr == "fairloom: studies cannot be kept: File exists\n"
