"""A fleet with hostile names in every place that takes text: each output is read by its real reader, and they stay data."""

from __future__ import annotations

import csv
import io
import json
import os
import re
import shutil
import unicodedata
from collections.abc import Mapping
from contextlib import redirect_stderr, redirect_stdout
from functools import cache
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import pytest
import yaml
from jsonschema import Draft202012Validator
from junitparser import JUnitXml

from checker.cli import main
from checker.output.markdown import JOINER
from checker.reading.words import flat
from tests.output.test_sarif import SCHEMA
from tests.output.test_summary import HTML, OURS, kinds, rows, tokens
from tests.output.workflow_commands import commands

EXAMPLE = Path(__file__).resolve().parents[2] / "fleet_example"
HULL = "TND-037"
NASTY = (
    "=1+1 ::error::pwned ##[error]pwned %0A::error::pwned | `t` ``` <script>pwned</script> <b> &lt; &amp; [x](https://e.test) "
    "![i](https://e.test) @someone #12 https://e.test www.e.test a@e.test *em* _em_ ~~s~~ ]]> <![CDATA[ $(touch pwned) "
    "`touch pwned`; {0} {{1}} \\ \\| \", ' \x1b[31m \x9b31m \x00 \x08 \x7f \u202e \u2028 \ufeff \r\n::error::pwned\n# pwned"
)
ON_ONE_LINE = NASTY.replace("\r", "").replace("\n", " ")
"""Where the schema takes a single line only."""
SHOWN = flat(ON_ONE_LINE)

pytestmark = pytest.mark.skipif(os.name == "nt", reason="such a name cannot be given to a file here")


ONE_LINE = ("name", "what", "reason", "approved_by", "evidence", "shares", "place_reason", "return_reason", "always_on")
"""Fields of one line that change nothing electrical."""


def _hostile_yard(folder: Path) -> Path:
    """Write a copy of the example with hostile text in it; its wiring stays as it was."""
    yard = folder / "yard $(touch pwned) ::error::pwned"
    shutil.copytree(EXAMPLE, yard, ignore=shutil.ignore_patterns("reports"))
    for file in sorted(yard.rglob("*.yaml")):
        document = yaml.compose(file.read_text(encoding="utf-8"), yaml.SafeLoader)
        _spoil(document)
        file.write_text(yaml.serialize(document, width=10_000), encoding="utf-8")
    house = yard / "yard.yaml"
    rule = {"common": {"bank.least_days": {"value": 21, "reason": ON_ONE_LINE}}}
    text = house.read_text(encoding="utf-8").replace("house:\n", f"house:\n  limits: {json.dumps(rule)}\n")
    house.write_text(text, encoding="utf-8")
    nasty_name = "=1+1|`t` <b> ::error::pwned @me [x](y) $(touch pwned)\x1b[31m\n::error::pwned.yaml"
    (yard / "hulls/tnd-035.yaml").rename(yard / "hulls" / nasty_name)
    broken = {"hull": ON_ONE_LINE, ON_ONE_LINE: 1}
    (yard / "hulls/broken.yaml").write_text(json.dumps(broken), encoding="utf-8")
    return yard


def _spoil(node: yaml.Node) -> None:
    """Put hostile text into every field of a document that takes any."""
    if isinstance(node, yaml.SequenceNode):
        for item in node.value:
            _spoil(item)
    if not isinstance(node, yaml.MappingNode):
        return
    for key, value in node.value:
        _spoil(value)
        if isinstance(value, yaml.ScalarNode) and key.value in (*ONE_LINE, "note", "legend"):
            other = f"{ON_ONE_LINE} {value.value}"  # a change must change what it names
            value.value = {"note": NASTY, "legend": f"{ON_ONE_LINE} 15 A", "place_reason": other}.get(
                key.value, ON_ONE_LINE
            )
            value.style, value.tag = '"', "tag:yaml.org,2002:str"


@cache
def _written() -> tuple[str, str, Mapping[str, bytes]]:
    """Check and list the hostile yard; return what was printed, and every file by name."""
    import tempfile

    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        yard, out = _hostile_yard(folder), folder / "out"
        printed, told = io.StringIO(), io.StringIO()
        words = [
            f"--{option}={out}/{option}" for option in ("sarif", "sarif-upload", "junit", "code-quality", "summary")
        ]
        with redirect_stdout(printed), redirect_stderr(told):
            status = main(["check", str(yard), *words, "--annotations", "--yard-path", "our, boats",
                           "--reports", str(out / "text"), "--today", "2026-12-01"])  # fmt: skip
            assert status == 1
            assert main(["lists", str(yard), "--hull", HULL, "--to", str(out / "lists")]) == 0
        assert [path for path in folder.rglob("*") if path.name == "pwned"] == []
        files = {path.relative_to(out).as_posix(): path.read_bytes() for path in out.rglob("*") if path.is_file()}
    return printed.getvalue(), told.getvalue(), files


def text_of(name: str) -> str:
    return _written()[2][name].decode("utf-8")


def test_the_hostile_fleet_is_studied_as_the_example_is_but_for_its_broken_hull() -> None:
    document = json.loads(text_of("text/result.json"))
    hulls = {s["id"]: s["open_errors"] for s in document["subjects"] if s["kind"] == "hull"}
    assert {name: number for name, number in hulls.items() if number} == {"TND-035": 1, "TND-037": 1, "TND-038": 6}
    assert len(hulls) == 8
    assert document["yard"] == ON_ONE_LINE
    assert len(document["not_studied"]) == 1


def test_the_hostile_text_is_in_every_output() -> None:
    printed, _, files = _written()
    assert SHOWN.replace("##[", "##\\u005b") in printed
    for name in ("text/fleet.txt", f"text/hulls/{HULL}.txt"):
        assert SHOWN in text_of(name)
    assert sorted(files)[:3] == ["code-quality", "junit", f"lists/{HULL}-devices.csv"]


@pytest.mark.parametrize("name", ["screen", "text/fleet.txt", f"text/hulls/{HULL}.txt", "text/hulls/TND-035.txt"])
def test_in_text_each_line_is_ours_and_printable(name: str) -> None:
    text = _written()[0] if name == "screen" else text_of(name)
    lines = text.removesuffix("\n").split("\n")
    assert [line for line in lines if not line.isprintable()] == []
    stopped = [
        line for line in lines if not line.startswith(("::error ", "::warning ", "::notice ", "::stop-commands::"))
    ]
    assert [line for line in stopped if re.match(r"\s*(::(?![0-9a-f]{64}::$)|##\[|pwned|#)", line)] == []
    assert name != "screen" or "##[" not in text.partition("::stop-commands::")[2]


def test_no_text_is_a_command_but_the_annotations() -> None:
    printed, told, _ = _written()
    found = list(commands(printed))
    assert {command.word for command in found} == {"error", "warning", "notice"}
    assert len(found) <= 30
    assert all(command.message.isprintable() for command in found for _ in [0] if "\n" not in command.message)
    assert all(
        command.properties["file"].startswith("our, boats/") for command in found if "file" in command.properties
    )
    assert [command for command in found if command.message.startswith(("pwned", "#"))] == []
    assert any(f"legend “{SHOWN} 15 A”" in command.message for command in found)
    assert list(commands(told)) == []


def test_in_json_it_is_a_text() -> None:
    document = json.loads(text_of("text/result.json"))
    accepted = [row for subject in document["subjects"] for row in subject["accepted"]]
    assert [row["reason"] for row in accepted] == [ON_ONE_LINE]


def test_in_sarif_it_is_a_text_and_no_link_and_the_schema_holds() -> None:
    schema = Draft202012Validator(json.loads(SCHEMA.read_text(encoding="utf-8")))
    for name in ("sarif", "sarif-upload"):
        document: dict[str, Any] = json.loads(text_of(name))
        assert [error.message for error in schema.iter_errors(document)] == []
        (run,) = document["runs"]
        for row in run["results"]:
            text = row["message"]["text"]
            assert re.search(r"(?<!\\)(?:\\\\)*[\[\]]", text) is None
            assert re.search(r"(?<!\{)\{(\{\{)*\d", text) is None
            assert all(line.isprintable() for line in text.split("\n"))
            uri = row["locations"][0]["physicalLocation"]["artifactLocation"]["uri"]
            assert re.fullmatch(r"our%2C%20boats/[A-Za-z0-9._~%/-]+", uri)
        (legend,) = [row for row in run["results"] if row["ruleId"] == "legend-rating"]
        unescaped = re.sub(r"\\([\\\[\]])", r"\1", legend["message"]["text"]).replace("{{", "{").replace("}}", "}")
        assert f"legend “{SHOWN} 15 A”" in unescaped
    (suppressed,) = [row for row in json.loads(text_of("sarif"))["runs"][0]["results"] if "suppressions" in row]
    assert SHOWN in suppressed["suppressions"][0]["justification"]


def test_in_junit_it_is_a_text() -> None:
    report = JUnitXml.fromstring(_written()[2]["junit"])
    (case,) = [case for suite in report for case in suite if (suite.name, case.name) == (f"hull {HULL}", "P30")]
    assert f"legend “{SHOWN} 15 A”" in case.system_out
    skipped = [
        case.result[0].message
        for suite in report
        for case in suite
        if case.result and "accepted" in (case.result[0].message or "")
    ]
    assert len(skipped) == 1
    assert SHOWN in skipped[0]
    tags = {element.tag for element in ElementTree.fromstring(text_of("junit")).iter()}
    assert tags == {"testsuites", "testsuite", "testcase", "failure", "skipped", "system-out"}


def test_in_the_summary_it_is_no_link_mention_html_or_emphasis() -> None:
    text = text_of("summary")
    assert kinds(text) <= OURS | {"html_block"}
    assert [token.content for token in tokens(text) if "html" in token.type] == HTML
    found = rows(text)
    assert {len(row) for row in found} == {5}
    (legend,) = [row for row in found if "(legend-rating)" in row[1]]
    assert f"legend “{SHOWN[:300]}" in legend[1]
    shown = "".join(child.content for token in tokens(text) for child in (token.children or ()))
    assert not any(word in shown for word in ("@someone", "#12", "https://", "www.e.test", "a@e.test"))
    assert "@someone" in shown.replace(JOINER, "")


def test_in_code_quality_it_is_a_text() -> None:
    found = json.loads(text_of("code-quality"))
    (legend,) = [row for row in found if row["check_name"] == "legend-rating"]
    assert f"legend “{SHOWN} 15 A”" in legend["description"]
    assert all(row["location"]["path"].startswith("our, boats/") for row in found)
    assert len({row["fingerprint"] for row in found}) == len(found)


@pytest.mark.parametrize("name", ["wires", "devices", "landings", "labels", "parts"])
def test_in_a_list_it_stays_in_its_cell_and_is_no_formula(name: str) -> None:
    text = text_of(f"lists/{HULL}-{name}.csv")
    table = list(csv.reader(io.StringIO(text, newline=""), strict=True))
    assert len(table) == text.count("\r\n")
    assert {len(row) for row in table} == {len(table[0])}
    cells = [cell for row in table for cell in row]
    assert [cell for cell in cells if unicodedata.normalize("NFKC", cell[:1]) in ("=", "+", "@", "\t", "\r")] == []
    assert [cell for cell in cells if cell.startswith("-") and not re.fullmatch(r"-\d+(\.\d+)?", cell)] == []
    assert [cell for cell in cells if not cell.isprintable()] == []
    assert any(cell.startswith(f"'{SHOWN}") or SHOWN in cell for cell in cells)
