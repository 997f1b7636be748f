"""A fault against a schema is told in the yard's words, at the line and column that a person would edit."""

from __future__ import annotations

import copy
import json
import random
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from checker.reading.document import compose
from checker.reading.schema import KINDS, schema_faults

EXAMPLE = Path(__file__).resolve().parents[2] / "fleet_example"
TABLES = Path(__file__).resolve().parents[1] / "limits" / "sample"
ID_WORDS = "Write an id of at most 40 letters, digits, hyphens or underscores, such as BUS-N"

HULL = """\
hull: TND-040
class: tindral-36
revision: 4
status: planned
options: [OPT-SOL2]
changes:
  DEV-1:
    what: cable in another size
    set:
      circuits:
        P01: {cable: 6 AWG}
"""
YARD = "name: Yard\nlimit_sets: [voluntary-dc]\n"
FUSE = """\
parts:
  f:
    kind: fuse
    voltage: 32 V
    rating: 5 A
"""
CIRCUIT = """\
circuits:
  P1:
    name: Lamp
    service: lighting
    feed: PNL-01
    protect: 5 A
    cable: 6 AWG
    load: lamp
    zone: Z
"""
WAIVER = """\
waivers:
  W1:
    check: drop
    hull: H
    part: P
    fingerprint: 1a2b3c4d5e6f
    reason: measured
    approved_by: lead
    expires: 2028-05-29
"""


def told(kind: str, text: str) -> list[str]:
    """Return the faults of a document as `line:column check: message (remedy)`."""
    document = compose(text.encode("utf-8"), "f.yaml")
    faults = document.faults or schema_faults(document, kind)
    assert all(fault.at.file == "f.yaml" for fault in faults)
    return [f"{f.at.line}:{f.at.column} {f.check}: {f.message} ({f.remedy})" for f in faults]


def changed(text: str, old: str, new: str) -> str:
    assert text.count(old) == 1
    return text.replace(old, new)


@pytest.mark.parametrize(
    ("kind", "text"),
    [("hull", HULL), ("yard", YARD), ("parts", FUSE), ("class", CIRCUIT), ("waivers", WAIVER)],
)
def test_a_sound_document_has_no_fault(kind: str, text: str) -> None:
    assert told(kind, text) == []


# --- fields


def test_an_unknown_field_is_told_at_its_name_with_the_nearest_known_one() -> None:
    assert told("hull", changed(HULL, "revision: 4", "revision: 4\nstatsu: planned")) == [
        "4:1 unknown-field: the file has no field “statsu” (did you mean “status”?)"
    ]
    assert told("hull", changed(HULL, "cable: 6 AWG", "lenght: 6 m")) == [
        "11:15 unknown-field: changes DEV-1 set circuits “P01” has no field “lenght” (did you mean “length”?)"
    ]
    assert told("class", changed(CIRCUIT, "protect:", "protct:")) == [
        "6:5 unknown-field: circuits “P1” has no field “protct” (did you mean “protect”?)"
    ]


def test_an_unknown_field_without_a_near_one_is_told_with_all_known_ones() -> None:
    assert told("yard", YARD + "colour: red\n") == [
        "3:1 unknown-field: the file has no field “colour” (known here: house, limit_sets, name, workmanship)"
    ]


def test_a_field_of_another_kind_of_part_is_unknown_here() -> None:
    (line,) = told("parts", changed(FUSE, "rating: 5 A", "rating: 5 A\n    capacity: 80 Ah"))
    assert line.startswith("6:5 unknown-field: parts “f” has no field “capacity” (known here: band, cover, ")


def test_a_missing_field_is_told_at_the_name_of_the_thing_with_an_example() -> None:
    assert told("hull", changed(HULL, "revision: 4\n", "")) == [
        "1:1 missing-field: the file has no “revision” (add “revision”, e.g. `revision: 4`)"
    ]
    assert told("class", changed(CIRCUIT, "    feed: PNL-01\n", "")) == [
        "2:3 missing-field: circuits “P1” has no “feed” (add “feed”, e.g. `feed: PNL-21`)"
    ]
    assert told("parts", changed(FUSE, "    kind: fuse\n", "")) == [
        "2:3 missing-field: parts “f” has no “kind” (add “kind”, e.g. `kind: fuse`)"
    ]


def test_every_missing_field_is_told() -> None:
    assert [line.split(" (")[0] for line in told("hull", "hull: A\n")] == [
        f"1:1 missing-field: the file has no “{name}”" for name in ("class", "options", "revision", "status")
    ]


def test_two_fields_that_exclude_each_other_are_told() -> None:
    assert told("parts", changed(FUSE, "rating: 5 A", "rating: 5 A\n    ratings: {5 A: {}}")) == [
        "5:13 bad-value: “rating” cannot be “5 A” (Write rating for one part or ratings for a series, not both)"
    ]
    assert told("waivers", changed(WAIVER, "hull: H", "hull: H\n    class: c")) == [
        "4:11 bad-value: “hull” cannot be “H” (Write hull or class, not both)"
    ]


# --- values


@pytest.mark.parametrize(
    ("kind", "text", "old", "new", "message"),
    [
        ("class", CIRCUIT, "cable: 6 AWG", "cable: 6",
         "7:12 bad-value: cable: “6” has no unit; a size carries its unit, e.g. 6 AWG, 2/0 AWG or 16 mm2 ()"),
        ("class", CIRCUIT, "protect: 5 A", "protect: 5",
         "6:14 bad-value: protect: “5” has no unit; a current carries its unit, e.g. 7.5 A ()"),
        ("class", CIRCUIT, "protect: 5 A", "protect: 5.0",
         "6:14 bad-value: protect: “5.0” has no unit; a current carries its unit, e.g. 7.5 A ()"),
        ("class", CIRCUIT, "protect: 5 A", "protect: 5 V",
         "6:14 bad-value: protect: “5 V” is a voltage, but a current is due here, e.g. 7.5 A ()"),
        ("class", CIRCUIT, "protect: 5 A", "protect: 7,5 A",
         "6:14 bad-value: protect: “7,5 A” has a decimal comma; write 7.5 A ()"),
        ("class", CIRCUIT, "cable: 6 AWG", "cable: 6 mm²",
         "7:12 bad-value: cable: unit “mm²” is spelled mm2 here; write 6 mm2 ()"),
        ("class", CIRCUIT, "cable: 6 AWG", "cable: 00000 AWG",
         "7:12 bad-value: cable: “00000 AWG” is no wire gauge; write e.g. 6 AWG or 2/0 AWG ()"),
        ("class", CIRCUIT, "cable: 6 AWG", "cable: true",
         "7:12 bad-value: cable: “true” is not a size; write e.g. 6 AWG, 2/0 AWG or 16 mm2 ()"),
        ("class", CIRCUIT, "cable: 6 AWG", "cable: [6 AWG]", "7:12 bad-value: “cable” must be text ()"),
        ("class", CIRCUIT, "cable: 6 AWG", 'cable: "6 AWG\\n"',
         "7:12 bad-value: cable: “6 AWG\\u000a” is not a size; write e.g. 6 AWG, 2/0 AWG or 16 mm2 ()"),
        ("parts", FUSE, "rating: 5 A", "ratings: {5: {}}",
         "5:15 bad-value: the field's name 5 reads as a number, true/false or null, not as text (write \"5\")"),
        ("parts", FUSE, "rating: 5 A", 'ratings: {"5": {}}',
         "5:15 bad-value: ratings: “5” has no unit; a current carries its unit, e.g. 7.5 A ()"),
    ],
)  # fmt: skip
def test_a_quantity_that_cannot_be_read_is_told_at_its_value(
    kind: str, text: str, old: str, new: str, message: str
) -> None:
    assert told(kind, changed(text, old, new)) == [message]


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("revision: 4", "revision: four", "3:11 bad-value: “revision” must be a whole number ()"),
        ("revision: 4", "revision: 4.5", "3:11 bad-value: “revision” must be a whole number ()"),
        ("revision: 4", "revision: true", "3:11 bad-value: “revision” must be a whole number ()"),
        ("revision: 4", "revision: [4]", "3:11 bad-value: “revision” must be a whole number ()"),
        ("revision: 4", "revision: 0", "3:11 bad-value: “revision” does not fit: at least 1 ()"),
        ("hull: TND-040", "hull: 40",
         '1:7 bad-value: “hull” is text, but 40 reads as a number or as true/false (write "40")'),
        ("hull: TND-040", "hull: true",
         '1:7 bad-value: “hull” is text, but true reads as a number or as true/false (write "true")'),
        ("hull: TND-040", "hull: {a: b}", "1:7 bad-value: “hull” must be text ()"),
        ("options: [OPT-SOL2]", "options: OPT-SOL2", "5:10 bad-value: “options” must be a list ()"),
        ("options: [OPT-SOL2]", "options: [OPT-SOL2, OPT-SOL2]",
         "5:10 bad-value: “options” does not fit: no entry twice ()"),
        ("options: [OPT-SOL2]", "options: [A, 7]",
         '5:14 bad-value: entry 2 of “options” is text, but 7 reads as a number or as true/false (write "7")'),
        ("options: [OPT-SOL2]", "options: [[A]]", "5:11 bad-value: entry 1 of “options” must be text ()"),
        ("P01: {cable: 6 AWG}", "P01: 6 AWG", "11:14 bad-value: “P01” must be fields (`name: value`) or null ()"),
        ("status: planned", "status: 3",
         "4:9 bad-value: “status” cannot be “3” (one of: planned, in-build, signed, delivered)"),
        ("status: planned", "status: {planned: true}", "4:9 bad-value: “status” must be text ()"),
    ],
)  # fmt: skip
def test_a_value_of_the_wrong_kind_is_told_at_its_value(old: str, new: str, message: str) -> None:
    assert told("hull", changed(HULL, old, new)) == [message]


def test_true_or_false_is_not_yes_or_no() -> None:
    assert told("parts", changed(FUSE, "rating: 5 A", "rating: 5 A\n    polarised: yes")) == [
        "6:16 bad-value: “polarised” is true or false, not “yes” (write true or false)"
    ]
    assert told("parts", changed(FUSE, "rating: 5 A", "rating: 5 A\n    polarised: {a: b}")) == [
        "6:16 bad-value: “polarised” must be true or false ()"
    ]


@pytest.mark.parametrize(
    ("kind", "text", "old", "new", "place", "words"),
    [
        ("hull", HULL, "class: tindral-36", "class: null", "2:8 bad-value: “class”", "text"),
        ("hull", HULL, "class: tindral-36", "class: ~", "2:8 bad-value: “class”", "text"),
        ("hull", HULL, "status: planned", "status: null", "4:9 bad-value: “status”", "text"),
        ("hull", HULL, "options: [OPT-SOL2]", "options: null", "5:10 bad-value: “options”", "a list"),
        ("hull", HULL, "revision: 4", "revision: null", "3:11 bad-value: “revision”", "a whole number"),
        ("class", CIRCUIT, "cable: 6 AWG", "cable: null", "7:12 bad-value: “cable”", "text"),
        ("parts", "parts:\n  f: {}\n", "{}", "null", "2:6 bad-value: “f”", "fields (`name: value`)"),
    ],
)
def test_null_where_nothing_is_to_remove_is_told(
    kind: str, text: str, old: str, new: str, place: str, words: str
) -> None:
    expected = f"{place} is removed by null here, where there is nothing to remove (write {words})"
    assert told(kind, changed(text, old, new)) == [expected]


def test_null_removes_where_a_patch_stands() -> None:
    assert told("hull", changed(HULL, "P01: {cable: 6 AWG}", "P01: null")) == []
    assert told("hull", changed(HULL, "cable: 6 AWG", "legend: null")) == []


@pytest.mark.parametrize("bad", ["A.B", "A B", "-A", "_A", "A" * 41, "Ä", "A/B", '"A\\n"', '""'])
def test_an_id_that_is_not_plain_is_told_at_the_value(bad: str) -> None:
    shown = bad.strip('"').replace("\\n", "\\u000a")
    assert told("hull", changed(HULL, "TND-040", bad)) == [f"1:7 bad-value: “hull” cannot be “{shown}” ({ID_WORDS})"]


@pytest.mark.parametrize("bad", ["D.1", "D 1", "-D", '"D\\n"', "D" * 41])
def test_a_name_that_is_no_plain_id_is_told_at_the_name(bad: str) -> None:
    shown = bad.strip('"').replace("\\n", "\\u000a")
    assert told("hull", changed(HULL, "DEV-1", bad)) == [f"7:3 bad-value: “{shown}” cannot be a name here ({ID_WORDS})"]


def test_the_longest_id_is_accepted() -> None:
    assert told("hull", changed(HULL, "TND-040", "A" * 40)) == []


@pytest.mark.parametrize(
    ("kind", "text", "old", "new", "message"),
    [
        ("hull", HULL, "status: planned", "status: plannd",
         "4:9 bad-value: “status” cannot be “plannd” (did you mean “planned”?)"),
        ("hull", HULL, "status: planned", "status: afloat",
         "4:9 bad-value: “status” cannot be “afloat” (one of: planned, in-build, signed, delivered)"),
        ("yard", YARD, "[voluntary-dc]", "[voluntary]",
         "2:14 bad-value: entry 1 of “limit_sets” cannot be “voluntary” (did you mean “voluntary-dc”?)"),
        ("parts", FUSE, "kind: fuse", "kind: fus", "3:11 bad-value: “kind” cannot be “fus” (did you mean “fuse”?)"),
        ("class", CIRCUIT, "service: lighting", "service: lightning",
         "4:14 bad-value: “service” cannot be “lightning” (did you mean “lighting”?)"),
    ],
)  # fmt: skip
def test_a_word_that_is_none_of_the_known_ones_is_told_with_the_nearest(
    kind: str, text: str, old: str, new: str, message: str
) -> None:
    assert told(kind, changed(text, old, new)) == [message]


def test_a_short_text_with_a_line_break_is_refused_even_at_its_end() -> None:
    for text in ('"Yard\\n"', '"Yard\\nNorth"', '"Yard\\r"'):
        (line,) = told("yard", changed(YARD, "name: Yard", f"name: {text}"))
        assert line.startswith("1:7 bad-value: “name” cannot be “Yard\\u000")


def test_a_yard_adopts_at_least_one_limit_set() -> None:
    assert told("yard", changed(YARD, "[voluntary-dc]", "[]")) == [
        "2:13 bad-value: “limit_sets” does not fit: at least 1 in the list ()"
    ]


@pytest.mark.parametrize("wrong", ["4", "text", "[a]", "null"])
def test_a_patch_that_is_no_map_of_sections_is_refused(wrong: str) -> None:
    (line,) = told("option", f"option: A\nname: x\nchanges: {wrong}\n")
    assert line.startswith("3:10 bad-value: “changes” ")
    (line,) = told("option", f"option: A\nname: x\nchanges: {{circuits: {'4' if wrong == 'null' else wrong}}}\n")
    assert line.startswith("3:21 bad-value: “circuits” must be fields (`name: value`) or null")


def test_a_patch_of_a_section_that_a_class_does_not_have_is_refused() -> None:
    (line,) = told("option", "option: A\nname: x\nchanges: {circuit: {P1: null}}\n")
    assert line == "3:11 unknown-field: “changes” has no field “circuit” (did you mean “circuits”?)"


def test_all_faults_of_a_file_are_told_in_the_order_of_their_places() -> None:
    text = HULL.replace("TND-040", "A.B").replace("planned", "afloat").replace("6 AWG", "6").replace("what", "waht")
    assert [line.split(":")[0] + ":" + line.split()[1].rstrip(":") for line in told("hull", text)] == [
        "1:bad-value", "4:bad-value", "7:missing-field", "8:unknown-field", "11:bad-value",
    ]  # fmt: skip


# --- whatever is wrong

REPR = re.compile(r"is not valid under|\{'|\['|None\b|True\b|False\b|<[a-z]+ object|u'|dict\(|deque\(")
WRONG: list[Any] = [
    None, True, 0, -1, 1.5, 10**17, "", "x", "6", "6 x", "a\nb", "\x1b[31m", [], {}, [[]], ["a"], {"a": {}}, [None],
    {"x": None}, "not recorded",
]  # fmt: skip


def every_node(data: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    yield path
    if isinstance(data, dict):
        for key in data:
            yield from every_node(data[key], (*path, key))
    elif isinstance(data, list):
        for index, item in enumerate(data):
            yield from every_node(item, (*path, index))


def kind_of(name: str) -> str:
    if "/options/" in name:
        return "option"
    return {
        "yard.yaml": "yard", "waivers.yaml": "waivers", "parts": "parts", "classes": "class", "hulls": "hull",
        "limits": "limits", "sheets": "sheet",
    }[name.split("/", maxsplit=1)[0]]  # fmt: skip


def mutants(kind: str, count: int) -> Iterator[str]:
    """Give documents of a kind with one to three values taken out, renamed or replaced by a wrong one."""
    rng = random.Random(kind)
    named = [(f, f.relative_to(folder).as_posix()) for folder in (EXAMPLE, TABLES) for f in folder.rglob("*.yaml")]
    files = sorted(file for file, name in named if kind_of(name) == kind)
    originals = [compose(file.read_bytes(), "f.yaml").data for file in files]
    for _ in range(count):
        data = copy.deepcopy(rng.choice(originals))
        for _ in range(rng.randint(1, 3)):
            paths = [path for path in every_node(data) if path]
            if not paths:
                continue
            *steps, last = rng.choice(paths)
            parent = data
            for step in steps:
                parent = parent[step]
            if isinstance(parent, dict) and rng.random() < 0.3:
                value = parent.pop(last)
                if rng.random() < 0.5:
                    parent[rng.choice(["colour", "x.y", "", "a\n", f"{last}s"])] = value
            else:
                parent[last] = copy.deepcopy(rng.choice(WRONG))
        yield json.dumps(data, indent=1)


@pytest.mark.parametrize("kind", KINDS)
def test_no_message_shows_a_validators_sentence_a_repr_or_a_whole_object(kind: str) -> None:
    number = 0
    for text in mutants(kind, 60):
        document = compose(text.encode("utf-8"), "f.yaml")
        for fault in document.faults or schema_faults(document, kind):
            sentence = f"{fault.message} | {fault.remedy}"
            assert not REPR.search(sentence), sentence
            assert sentence.isprintable(), sentence
            assert "see the schema" not in sentence, sentence
            assert (fault.at.line, fault.at.column) != (0, 0)
            number += 1
    assert number > 60
