"""Compose one YAML file into data and a map from every path to its place in the file.

The text is read with YAML 1.2's meanings: the loader of PyYAML follows 1.1, in which `no` is
false, `010` is eight and `12:30` is 750; so only the parser's events are used and plain
scalars are resolved here. What a yard could trip over is a fault with file, line and column.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, field
from typing import Any

import yaml

from checker.finding import Path, Span
from checker.reading.words import shown

LARGEST_FILE_BYTES = 4_000_000
DEEPEST_NESTING = 64
LONGEST_INTEGER = 18
LONGEST_TOLD_AGAIN = 500_000  # the pure parser takes seconds for more

_Loader: Any = getattr(yaml, "CSafeLoader", yaml.SafeLoader)

_NULL = frozenset(("null", "Null", "NULL", "~"))
_TRUE = frozenset(("true", "True", "TRUE"))
_FALSE = frozenset(("false", "False", "FALSE"))
_INTEGER = re.compile(r"[-+]?[0-9]+\Z|0o[0-7]+\Z|0x[0-9a-fA-F]+\Z")
_FLOAT = re.compile(r"[-+]?(\.[0-9]+|[0-9]+(\.[0-9]*)?)([eE][-+]?[0-9]+)?\Z")
_NOT_FINITE = re.compile(r"[-+]?\.(inf|Inf|INF)\Z|\.(nan|NaN|NAN)\Z")
_LEADING_ZERO = re.compile(r"[-+]?0[0-9]+\Z")
_STRANGE_CHARACTER = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f\x80-\x84\x86-\x9f\ufeff\ufffe\uffff]")
_STRANGE_LINE_BREAK = re.compile("\r(?!\n)|[\x85\u2028\u2029]")
_NO_CHARACTER = re.compile(r"\\(?:u|U0000)[dD][89a-fA-F]|\\U(?!000|0010)")


@dataclass(frozen=True, slots=True)
class Fault:
    """Tell what is wrong at one place of a file, before any boat is built."""

    check: str
    at: Span
    message: str
    remedy: str = ""


@dataclass(slots=True)
class Document:
    """Hold one file's data and where everything in it stands.

    `places` has the key's and the value's span of every path; `raw` keeps the text of plain
    scalars that were resolved to a number, a boolean or null.
    """

    file: str
    data: Any = None
    places: dict[Path, tuple[Span, Span]] = field(default_factory=dict)
    raw: dict[Path, str] = field(default_factory=dict)
    faults: list[Fault] = field(default_factory=list)


def compose(content: bytes, file: str, loader: Any = None) -> Document:
    """Read one file's bytes. Never raises: whatever is wrong is in the document's faults."""
    document = Document(file)
    text = _decode(content, document)
    if text is not None:
        _Composer(document, loader or _Loader).run(text)
        if document.data is None and not document.faults:
            document.faults.append(Fault("unreadable-file", Span(file, 1, 1), "the file is empty"))
        elif not document.faults and not isinstance(document.data, dict):
            message = "the file must hold fields (`name: value`) at its top level"
            document.faults.append(Fault("unreadable-file", Span(file, 1, 1), message))
    return document


def _decode(content: bytes, document: Document) -> str | None:
    """Return the text, or None where it cannot be read at all."""

    def fault(offset_text: str, message: str, remedy: str = "") -> None:
        line = offset_text.count("\n") + 1
        column = len(offset_text) - (offset_text.rfind("\n") + 1) + 1
        place = Span(document.file, line, column)
        document.faults.append(Fault("unreadable-file", place, message, remedy))

    if len(content) > LARGEST_FILE_BYTES:
        size = f"{len(content):,} bytes; at most {LARGEST_FILE_BYTES:,} are read"
        fault("", f"the file is too large: {size}", "split the file")
        return None
    if content[:2] in (b"\xff\xfe", b"\xfe\xff"):
        fault("", "the file is not UTF-8 text (it looks like UTF-16)", "save it as UTF-8")
        return None
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        before = content[: error.start].decode("utf-8", "replace")
        byte = f"byte 0x{content[error.start]:02x}"
        fault(before, f"the file is not UTF-8 text ({byte} cannot be read)", "save it as UTF-8")
        return None
    strange = _STRANGE_CHARACTER.search(text)
    if strange:
        fault(text[: strange.start()], f"character U+{ord(strange[0]):04X}, which cannot be seen", "remove it")
    broken = _STRANGE_LINE_BREAK.search(text)
    if broken:
        name = f"U+{ord(broken[0]):04X}"
        fault(text[: broken.start()], f"line break {name}, which editors and git do not show as one",
              "save the file with ordinary line ends")  # fmt: skip
    directive = re.search(r"^%", text, re.MULTILINE) if "%" in text else None
    if directive:
        fault(text[: directive.start()], "a line that starts with %: directives are not read", "remove it")
    before, tab, _ = text.partition("\t")
    if tab:  # everywhere, since no two parsers agree on where a tab may stand
        fault(before, "tab character; YAML is indented with spaces", "replace it by spaces")
    escape = _NO_CHARACTER.search(text) if "\\" in text else None
    if escape:
        fault(text[: escape.start()], f"{escape[0]}… is the escape of no character", "write the character itself")
    return None if document.faults else text


class _Composer:
    """Walk the parser's events once, iteratively, and fill the document."""

    def __init__(self, document: Document, loader: Any) -> None:
        self._document = document
        self._file = document.file
        self._loader = loader
        # One entry per open collection: its path, its container, the key in wait (None for a list).
        self._open: list[tuple[Path, Any]] = []
        self._key: list[tuple[str, Span] | None] = []

    def run(self, text: str) -> None:
        documents = 0
        try:
            for event in yaml.parse(text, Loader=self._loader):
                if isinstance(event, yaml.DocumentStartEvent):
                    documents += 1
                    if documents > 1:
                        self._fault(event, "unreadable-file", "a second document (`---`) in one file",
                                    "one file holds one document")  # fmt: skip
                        return
                elif not self._take(event):
                    return
        except yaml.YAMLError as error:
            is_told = len(text) <= LONGEST_TOLD_AGAIN and self._loader is not yaml.SafeLoader and self._told_again(text)
            if not is_told:
                self._syntax_fault(error)

    def _told_again(self, text: str) -> bool:
        """Let the pure parser tell a syntax error: then it stands at one place, whichever parser there is."""
        other = Document(self._file)
        _Composer(other, yaml.SafeLoader).run(text)
        if other.faults:
            self._document.data, self._document.places, self._document.raw = other.data, other.places, other.raw
            self._document.faults = other.faults
        return bool(other.faults)

    def _syntax_fault(self, error: Any) -> None:
        mark = getattr(error, "problem_mark", None) or getattr(error, "context_mark", None)
        line, column = (mark.line + 1, mark.column + 1) if mark else (1, 1)
        problem = f"this is not YAML: {getattr(error, 'problem', None) or error}"
        self._add("unreadable-file", Span(self._file, line, column), problem,
                  "look for a missing quote, colon or indentation just before this place")  # fmt: skip

    def _take(self, event: Any) -> bool:
        """Take one event; False where reading on would make no sense."""
        if isinstance(event, yaml.ScalarEvent):
            if self._refused(event):
                return False
            is_nothing = not self._open and not event.value and event.implicit[0]
            if not is_nothing:  # a file of `---` alone is empty; the parsers differ in where its nothing stands
                self._scalar(event)
        elif isinstance(event, (yaml.MappingStartEvent, yaml.SequenceStartEvent)):
            return not self._refused(event) and self._enter(event)
        elif isinstance(event, (yaml.MappingEndEvent, yaml.SequenceEndEvent)):
            self._open.pop()
            self._key.pop()
        elif isinstance(event, yaml.AliasEvent):
            message = f"alias *{shown(str(event.anchor))}: a value is written where it belongs"
            self._fault(event, "unreadable-file", message, "write the value out")
            return False
        return True

    def _refused(self, event: Any) -> bool:
        if event.anchor is not None:
            self._fault(event, "unreadable-file", f"anchor &{shown(event.anchor)}: aliases are not read",
                        "write the value out where it is needed")  # fmt: skip
            return True
        if event.tag is not None:
            tag = str(event.tag).replace("tag:yaml.org,2002:", "!!")
            self._fault(event, "unreadable-file", f"tag {shown(tag)}: tags are not read", "remove the tag")
            return True
        return False

    def _enter(self, event: Any) -> bool:
        if len(self._open) >= DEEPEST_NESTING:
            self._fault(event, "unreadable-file", f"nested deeper than {DEEPEST_NESTING} levels")
            return False
        container: Any = {} if isinstance(event, yaml.MappingStartEvent) else []
        if self._wants_key():
            self._fault(event, "unreadable-file", "a field's name must be text")
            return False
        path = self._put(container, Span(self._file, event.start_mark.line + 1, event.start_mark.column + 1))
        self._open.append((path, container))
        self._key.append(None)
        return True

    def _wants_key(self) -> bool:
        return bool(self._open) and isinstance(self._open[-1][1], dict) and self._key[-1] is None

    def _scalar(self, event: Any) -> None:
        mark = event.start_mark
        span = Span(self._file, mark.line + 1, mark.column + 1)
        text: str = event.value
        if not self._wants_key():
            plain = event.implicit[0]
            value: Any = self._plain(text, span) if plain else text
            path = self._put(value, span)
            if plain and value is not text:
                self._document.raw[path] = text
            return
        path, container = self._open[-1]
        if event.implicit[0] and text == "":
            self._add("bad-value", span, "a field without a name", "name it, or remove it")
        elif event.implicit[0] and self._resolved(text, span) is not text:
            message = f"the field's name {shown(text)} reads as a number, true/false or null, not as text"
            self._add("bad-value", span, message, f'write "{shown(text)}"')
        if text == "<<":
            self._add("unreadable-file", span, "merge key <<: fields are written where they belong",
                      "write the fields out")  # fmt: skip
        if text in container:
            first = self._document.places[(*path, text)][0]
            self._add("repeated-key", span, f"“{shown(text)}” is written twice here, first in line {first.line}",
                      "keep one of them")  # fmt: skip
        self._key[-1] = (text, span)

    def _put(self, value: Any, span: Span) -> Path:
        """Place a value into the open collection; return its path."""
        if not self._open:
            self._document.data = value
            self._document.places[()] = (span, span)
            return ()
        path, container = self._open[-1]
        if isinstance(container, dict):
            waiting = self._key[-1]
            assert waiting is not None
            key, key_span = waiting
            self._key[-1] = None
            here: Path = (*path, key)
            container[key] = value
            self._document.places[here] = (key_span, span)
        else:
            here = (*path, len(container))
            container.append(value)
            self._document.places[here] = (span, span)
        return here

    def _plain(self, text: str, span: Span) -> Any:
        """Give a plain value its meaning; where there is none, tell so at the field, on which all parsers agree."""
        if text:
            return self._resolved(text, span)
        key, at = (self._key[-1] if self._key else None) or ("", span)
        remedy = "write the value, or `null` to remove the field"
        if key[:1].isdigit():
            remedy = "write decimals with a point: inside braces a comma parts two fields"
        self._add("bad-value", at, "the value is empty", remedy)
        return None

    def _resolved(self, text: str, span: Span) -> Any:
        """Give a plain scalar its YAML 1.2 core meaning."""
        if text[0] not in "-+.0123456789~ntfNTF":
            return text
        if text in _NULL:
            return None
        if text in _TRUE:
            return True
        if text in _FALSE:
            return False
        return self._number(text, span)

    def _number(self, text: str, span: Span) -> Any:
        if _NOT_FINITE.match(text):
            self._add("bad-value", span, f"“{text}” is no figure that can be checked", "write a finite quantity")
            return text
        if _LEADING_ZERO.match(text):
            hint = f"{len(text)}/0 AWG" if text in ("00", "000", "0000") else f'"{shown(text)}"'
            message = f"“{shown(text)}” starts with a zero, which programs read as different numbers"
            self._add("bad-value", span, message, f"write {hint}")
            return text
        if _INTEGER.match(text):
            digits = len(text.lstrip("+-"))
            if digits > LONGEST_INTEGER:
                self._add("bad-value", span, f"a number of {digits} digits", "write a shorter one")
                return text
            return int(text, 0)
        value = float(text) if _FLOAT.match(text) else text
        if value in (math.inf, -math.inf):
            self._add("bad-value", span, f"“{shown(text)}” is larger than any figure that can be checked",
                      "write it in quotes if it is text")  # fmt: skip
        return value

    def _fault(self, event: Any, check: str, message: str, remedy: str = "") -> None:
        mark = event.start_mark
        self._add(check, Span(self._file, mark.line + 1, mark.column + 1), message, remedy)

    def _add(self, check: str, span: Span, message: str, remedy: str = "") -> None:
        self._document.faults.append(Fault(check, span, message, remedy))
