"""YAML text becomes data with places; whatever a yard could trip over is told with its line and column."""

from __future__ import annotations

from pathlib import Path

import pytest
import yaml
from hypothesis import assume, example, given
from hypothesis import strategies as st

from checker.reading.document import DEEPEST_NESTING, LARGEST_FILE_BYTES, Document, compose

EXAMPLE = Path(__file__).resolve().parents[2] / "fleet_example"
EXAMPLE_FILES = sorted(EXAMPLE.rglob("*.yaml"))
PARSERS = [yaml.SafeLoader, *([yaml.CSafeLoader] if hasattr(yaml, "CSafeLoader") else [])]
QUOTED = "look for a missing quote, colon or indentation just before this place"


def told(text: str | bytes) -> list[str]:
    """Return the faults of a text as `line:column message (remedy)`; every parser must tell the same."""
    content = text if isinstance(text, bytes) else text.encode("utf-8")
    faults = compose(content, "f.yaml").faults
    for parser in PARSERS:
        assert compose(content, "f.yaml", parser).faults == faults
    assert all(fault.at.file == "f.yaml" for fault in faults)
    return [f"{f.at.line}:{f.at.column} {f.message} ({f.remedy})" for f in faults]


def read(text: str | bytes) -> object:
    """Return the data of a text without faults; every parser must read the same, at the same places."""
    content = text if isinstance(text, bytes) else text.encode("utf-8")
    document = compose(content, "f.yaml")
    assert document.faults == []
    for parser in PARSERS:
        assert compose(content, "f.yaml", parser) == document
    return document.data


# --- what a plain scalar means


@pytest.mark.parametrize(
    ("written", "value"),
    [
        ("no", "no"),
        ("on", "on"),
        ("yes", "yes"),
        ("off", "off"),
        ("12:30", "12:30"),
        ("1_000", "1_000"),
        ("2026-12-01", "2026-12-01"),
        ("=", "="),
        ("0o10", 8),
        ("0x1F", 31),
        ("1e3", 1000.0),
        ("12", 12),
        ("-7", -7),
        ("+7", 7),
        ("0", 0),
        ("1.5", 1.5),
        (".5", 0.5),
        ("2.", 2.0),
        ("007.5", 7.5),
        ("true", True),
        ("False", False),
        ("tRUE", "tRUE"),
        ("null", None),
        ("~", None),
        ("Null", None),
        ("6 AWG", "6 AWG"),
        ("2/0 AWG", "2/0 AWG"),
        ("123456789012345678", 123456789012345678),
        ('"12"', "12"),
        ("'no'", "no"),
        ('"00"', "00"),
        ('""', ""),
        ('"null"', "null"),
    ],
)
def test_a_scalar_has_its_meaning_in_yaml_1_2(written: str, value: object) -> None:
    data = read(f"a: {written}\n")
    assert data == {"a": value}
    assert type(data["a"]) is type(value)  # type: ignore[index]


@pytest.mark.parametrize(
    ("written", "remedy"),
    [
        ("00", "write 2/0 AWG"),
        ("000", "write 3/0 AWG"),
        ("0000", "write 4/0 AWG"),
        ("00000", 'write "00000"'),
        ("010", 'write "010"'),
        ("08", 'write "08"'),
        ("-01", 'write "-01"'),
    ],
)
def test_a_number_that_starts_with_a_zero_is_refused(written: str, remedy: str) -> None:
    message = f"“{written}” starts with a zero, which programs read as different numbers"
    assert told(f"x: 1\na:  {written}\n") == [f"2:5 {message} ({remedy})"]


@pytest.mark.parametrize("written", [".inf", "-.inf", "+.INF", ".nan", ".NaN"])
def test_infinity_and_not_a_number_are_refused(written: str) -> None:
    assert told(f"a: {written}") == [f"1:4 “{written}” is no figure that can be checked (write a finite quantity)"]


@pytest.mark.parametrize("written", ["1e400", "-1e999", "874e74773669"])
def test_a_number_too_large_for_a_program_is_refused_and_never_becomes_infinity(written: str) -> None:
    message = f"“{written}” is larger than any figure that can be checked"
    assert told(f"a: {written}") == [f"1:4 {message} (write it in quotes if it is text)"]


@pytest.mark.parametrize(
    ("written", "digits"),
    [("1" * 19, 19), ("-" + "1" * 19, 19), ("1" * 5000, 5000), ("0x" + "1" * 4500, 4502), ("0o" + "7" * 20, 22)],
)
def test_an_integer_of_more_than_18_digits_is_refused(written: str, digits: int) -> None:
    assert told(f"a: {written}") == [f"1:4 a number of {digits} digits (write a shorter one)"]


def test_an_empty_value_is_refused_at_its_field() -> None:
    remedy = "write the value, or `null` to remove the field"
    assert told("a:\nb: 1\n") == [f"1:1 the value is empty ({remedy})"]
    assert told("a: {b: , c: 1}") == [f"1:5 the value is empty ({remedy})"]
    comma = "write decimals with a point: inside braces a comma parts two fields"
    assert told("a: {length: 2,5 m}") == [f"1:15 the value is empty ({comma})"]
    assert told("a:\n  -\n  - 1\n") == [f"2:4 the value is empty ({remedy})"]
    assert told("a: {b:1}") == [f"1:5 the value is empty ({remedy})"]


# --- what is refused


def test_a_repeated_key_is_refused_and_both_places_are_named() -> None:
    assert told("a: 1\nb:\n  c: 1\n  d: 2\n  c: 3\n") == [
        "5:3 “c” is written twice here, first in line 3 (keep one of them)"
    ]


def test_every_repeated_key_of_a_file_is_told() -> None:
    assert [line.split()[0] for line in told("a: 1\na: 2\nb: {c: 1, c: 2}\n'a': 3\n")] == ["2:1", "3:11", "4:1"]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("a: &x 1\nb: 2", "1:4 anchor &x: aliases are not read (write the value out where it is needed)"),
        ("&k a: 1", "1:1 anchor &k: aliases are not read (write the value out where it is needed)"),
        ("a: &m\n  b: 1", "1:4 anchor &m: aliases are not read (write the value out where it is needed)"),
        ("a: 1\nb: *x", "2:4 alias *x: a value is written where it belongs (write the value out)"),
        ("a: *a", "1:4 alias *a: a value is written where it belongs (write the value out)"),
        (
            "a:\n  <<: {b: 1}",
            "2:3 merge key <<: fields are written where they belong (write the fields out)",
        ),
        ("a: !!str 1", "1:4 tag !!str: tags are not read (remove the tag)"),
        ("a: !!python/name:os.system x", "1:4 tag !!python/name:os.system: tags are not read (remove the tag)"),
        ("a: !own {b: 1}", "1:4 tag !own: tags are not read (remove the tag)"),
        ("a: ! 1", "1:4 tag !: tags are not read (remove the tag)"),
        ("a: 1\n---\nb: 2", "2:1 a second document (`---`) in one file (one file holds one document)"),
        ("%YAML 1.2\n---\na: 1", "1:1 a line that starts with %: directives are not read (remove it)"),
        ("", "1:1 the file is empty ()"),
        ("# only a comment\n", "1:1 the file is empty ()"),
        ("- a\n- b", "1:1 the file must hold fields (`name: value`) at its top level ()"),
        ("just text", "1:1 the file must hold fields (`name: value`) at its top level ()"),
        ("12", "1:1 the file must hold fields (`name: value`) at its top level ()"),
        ("? [a]\n: b", "1:3 a field's name must be text ()"),
        ("x: {{a: b}: c}", "1:5 a field's name must be text ()"),
        ("x:\n  ?\n  : c", "2:4 a field without a name (name it, or remove it)"),
    ],
)
def test_what_two_readers_could_take_differently_is_refused(text: str, message: str) -> None:
    assert told(text) == [message]


@pytest.mark.parametrize("name", ["12", "null", "true", "1.5", "~", "0x1F"])
def test_a_field_whose_name_is_not_text_is_refused(name: str) -> None:
    message = f"the field's name {name} reads as a number, true/false or null, not as text"
    assert told(f"a:\n  {name}: x") == [f'2:3 {message} (write "{name}")']
    assert read(f'a:\n  "{name}": x') == {"a": {name: "x"}}


@pytest.mark.parametrize(
    ("text", "line", "column"),
    [
        ("a:\n\tb: 1", 2, 1),
        ("a:\n  \tb: 1", 2, 3),
        ("a:\tb", 1, 3),
        ("a: b\t# comment", 1, 5),
        ("a: b \t", 1, 6),
        ("a: b\tc", 1, 5),
        ("a: [b,\tc]", 1, 7),
        ("- \ta", 1, 3),
        ("a: |\n  b\tc", 2, 4),
    ],
)
def test_a_tab_is_refused_wherever_it_stands(text: str, line: int, column: int) -> None:
    message = "tab character; YAML is indented with spaces (replace it by spaces)"
    assert told(text) == [f"{line}:{column} {message}"]


@pytest.mark.parametrize("sign", ["\x00", "\x01", "\x08", "\x0b", "\x1b", "\x7f", "\x80", "\x9f", "\ufeff", "\uffff"])
def test_a_character_that_cannot_be_seen_is_refused_at_its_line(sign: str) -> None:
    expected = f"2:5 character U+{ord(sign):04X}, which cannot be seen (remove it)"
    assert told(f"a: 1\nb: x{sign}y\n") == [expected]


@pytest.mark.parametrize("sign", ["\r", "\x85", "\u2028", "\u2029"])
def test_a_line_break_that_editors_do_not_show_is_refused(sign: str) -> None:
    message = f"line break U+{ord(sign):04X}, which editors and git do not show as one"
    assert told(f"a: 1\nb: x{sign}c: 2\n") == [f"2:5 {message} (save the file with ordinary line ends)"]


@pytest.mark.parametrize("escape", ["\\ud800", "\\uDFFF", "\\U0000D800", "\\U00110000", "\\UFFFFFFFF"])
def test_the_escape_of_a_character_that_does_not_exist_is_refused(escape: str) -> None:
    (line,) = told(f'a: "{escape}"')
    assert line.startswith("1:5 \\")
    assert line.endswith("… is the escape of no character (write the character itself)")


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"a: 1\nb: \xff\n", "2:4 the file is not UTF-8 text (byte 0xff cannot be read) (save it as UTF-8)"),
        (b"a: caf\xe9\n", "1:7 the file is not UTF-8 text (byte 0xe9 cannot be read) (save it as UTF-8)"),
        (b"\xed\xa0\x80: 1", "1:1 the file is not UTF-8 text (byte 0xed cannot be read) (save it as UTF-8)"),
        ("a: 1".encode("utf-16"), "1:1 the file is not UTF-8 text (it looks like UTF-16) (save it as UTF-8)"),
        ("a: 1".encode("utf-32"), "1:1 the file is not UTF-8 text (it looks like UTF-16) (save it as UTF-8)"),
        ("a: 1".encode("utf-16-le"), "1:2 character U+0000, which cannot be seen (remove it)"),
    ],
)
def test_bytes_that_are_not_utf_8_are_refused_at_the_first_of_them(content: bytes, message: str) -> None:
    assert told(content) == [message]


def test_nesting_is_read_up_to_64_levels_and_refused_beyond() -> None:
    deepest = DEEPEST_NESTING - 1  # the top level counts
    assert read("a: " + "[" * deepest + "1" + "]" * deepest)
    assert told("a: " + "[" * 64 + "]" * 64) == ["1:67 nested deeper than 64 levels ()"]
    steps = "\n".join(" " * depth + "a:" for depth in range(65))
    assert told(f"{steps} 1") == ["65:65 nested deeper than 64 levels ()"]


@pytest.mark.parametrize("opening", ["[", "{a: ", "- ", "? ", "[{a: "])
def test_nesting_of_any_depth_is_a_fault_and_no_crash(opening: str) -> None:
    (line,) = told(("" if opening in "- ? " else "a: ") + opening * 20_000)
    assert "nested deeper than 64 levels" in line or "must be text" in line


def test_a_file_larger_than_the_cap_is_refused_before_it_is_read() -> None:
    content = b"a: " + b"x" * LARGEST_FILE_BYTES
    message = "the file is too large: 4,000,003 bytes; at most 4,000,000 are read (split the file)"
    assert told(content) == [f"1:1 {message}"]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("a: b: c", f"1:5 this is not YAML: mapping values are not allowed here ({QUOTED})"),
        ("a: b\n c: d", f"2:3 this is not YAML: mapping values are not allowed here ({QUOTED})"),
        ("a: 1\nb: @x", f"2:4 this is not YAML: found character '@' that cannot start any token ({QUOTED})"),
        ('a: "b', f"1:6 this is not YAML: found unexpected end of stream ({QUOTED})"),
        ("a: [b", f"1:6 this is not YAML: expected ',' or ']', but got '<stream end>' ({QUOTED})"),
        ('a: "\\q"', f"1:6 this is not YAML: found unknown escape character 'q' ({QUOTED})"),
        ("a: \U0001f600 b: c", f"1:7 this is not YAML: mapping values are not allowed here ({QUOTED})"),
    ],
)
def test_a_syntax_fault_is_told_alike_and_at_the_same_place_by_both_parsers(text: str, message: str) -> None:
    assert told(text) == [message]


def test_several_faults_of_one_file_are_all_told() -> None:
    assert [line.split()[0] for line in told("a: 00\nb:\nc: .inf\na: 1\n")] == ["1:4", "2:1", "3:4", "4:1"]


def test_what_a_fault_quotes_is_cut_and_stays_on_one_line() -> None:
    long = "k" * 900
    (line,) = told(f"{long}: 1\n{long}: 2")
    assert len(line) < 250
    (line,) = told('"a\\nb\\e[31m": 1\n"a\\nb\\e[31m": 2')
    assert line == "2:1 “a\\u000ab\\u001b[31m” is written twice here, first in line 1 (keep one of them)"


# --- what is accepted


def test_a_byte_order_mark_and_crlf_are_accepted_and_do_not_move_places() -> None:
    plain = compose(b"a: 1\nb:\n  c: [x, 2 m]\n", "f.yaml")
    marked = compose(b"\xef\xbb\xbfa: 1\r\nb:\r\n  c: [x, 2 m]\r\n", "f.yaml")
    assert plain.faults == []
    assert marked == plain


def test_a_block_of_text_keeps_its_lines_with_either_line_end() -> None:
    assert read("a: |\n  one\n  two\n") == {"a": "one\ntwo\n"}
    assert read("a: |\r\n  one\r\n  two\r\n") == {"a": "one\ntwo\n"}


def test_an_explicit_start_and_end_of_the_document_are_accepted() -> None:
    assert read("---\na: 1\n...\n") == {"a": 1}


def test_places_are_counted_from_one_in_code_points_for_keys_and_values() -> None:
    document = compose("ä: {😀 b: x}\nlist:\n  - 5 A\n  - {c: 1}\n".encode(), "f.yaml")
    shown = {path: tuple((at.line, at.column) for at in spans) for path, spans in document.places.items()}
    assert shown == {
        (): ((1, 1), (1, 1)),
        ("ä",): ((1, 1), (1, 4)),
        ("ä", "😀 b"): ((1, 5), (1, 10)),
        ("list",): ((2, 1), (3, 3)),
        ("list", 0): ((3, 5), (3, 5)),
        ("list", 1): ((4, 5), (4, 5)),
        ("list", 1, "c"): ((4, 6), (4, 9)),
    }


def test_the_text_of_a_plain_number_is_kept_for_messages() -> None:
    document = compose(b'a: 1e3\nb: true\nc: ~\nd: "7"\ne: text\n', "f.yaml")
    assert document.raw == {("a",): "1e3", ("b",): "true", ("c",): "~"}


@pytest.mark.parametrize("file", EXAMPLE_FILES, ids=lambda file: file.relative_to(EXAMPLE).as_posix())
def test_both_parsers_read_the_example_alike(file: Path) -> None:
    documents = [compose(file.read_bytes(), "f.yaml", parser) for parser in PARSERS]
    assert documents[0].faults == []
    assert all(document == documents[0] for document in documents)


# --- whatever the bytes are


def assert_told(document: Document) -> None:
    assert document.faults or isinstance(document.data, dict)
    for fault in document.faults:
        assert fault.at.line >= 1
        assert fault.at.column >= 1
        assert fault.message
        assert "\n" not in fault.message


@given(st.binary(max_size=200))
def test_any_bytes_give_fields_or_a_fault(content: bytes) -> None:
    assert_told(compose(content, "f.yaml"))


PIECES = [
    "a: ", "b", "\n", "  ", "- ", "? ", ": ", "{", "}", "[", "]", ", ", "#", " #", "&x ", "*x", "!!str ", "|\n", ">-\n",
    "'", '"', "\\", "\\ud8", "%", "---\n", "...\n", "<<: ", "\t", "\r", "\r\n", "\x00", "\x85", "\u2028", "\ufeff",
    "😀", "null", "00", ".inf", "1e999", "true", "=", "@", "`",
]  # fmt: skip


@given(st.lists(st.sampled_from(PIECES), max_size=25).map("".join))
@example("---\n  ")
@example("---\n  \n")
def test_any_mixture_of_yaml_signs_is_told_alike_by_both_parsers(text: str) -> None:
    # A question mark inside text in braces: only the C parser takes it as text, as YAML 1.2 does.
    assume("?" not in text)
    documents = [compose(text.encode(), "f.yaml", parser) for parser in PARSERS]
    assert_told(documents[0])
    assert all(document == documents[0] for document in documents)


PANEL = (EXAMPLE / "classes/tindral-36/zones.yaml").read_text(encoding="utf-8")


@given(
    st.integers(0, len(PANEL)),
    st.integers(0, 12),
    st.one_of(st.sampled_from(PIECES), st.text(max_size=6)),
    st.booleans(),
)
def test_any_edit_of_an_example_file_gives_fields_or_a_fault(start: int, cut: int, put: str, to_end: bool) -> None:
    text = PANEL[:start] + put + ("" if to_end else PANEL[start + cut :])
    assert_told(compose(text.encode("utf-8", "surrogatepass"), "f.yaml"))
