"""Compose one YAML file into data and a map from every path to its place in the file.

The text is read with YAML 1.2's meanings: the loader of PyYAML follows 1.1, in which `no` is
false, `010` is eight and `12:30` is 750; so only the parser's events are used and plain
scalars are resolved here. What a yard could trip over is a fault with file, line and column.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import Any

import yaml

from checker.finding import Path, Span

LARGEST_FILE_BYTES = 4_000_000
DEEPEST_NESTING = 64
LONGEST_INTEGER = 18

_Loader: Any = getattr(yaml, "CSafeLoader", yaml.SafeLoader)

_NULL = frozenset(("null", "Null", "NULL", "~"))
_TRUE = frozenset(("true", "True", "TRUE"))
_FALSE = frozenset(("false", "False", "FALSE"))
_INTEGER = re.compile(r"[-+]?[0-9]+\Z")
_OCTAL_OR_HEX = re.compile(r"0o[0-7]+\Z|0x[0-9a-fA-F]+\Z")
_FLOAT = re.compile(r"[-+]?(\.[0-9]+|[0-9]+(\.[0-9]*)?)([eE][-+]?[0-9]+)?\Z")
_NOT_FINITE = re.compile(r"[-+]?\.(inf|Inf|INF)\Z|\.(nan|NaN|NAN)\Z")
_LEADING_ZERO = re.compile(r"[-+]?0[0-9]+\Z")
_STRANGE_CHARACTER = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f\x80-\x84\x86-\x9f\ufffe\uffff]")
_STRANGE_LINE_BREAK = re.compile("\r(?!\n)|[\x85\u2028\u2029]")
_TAB = re.compile(r"^[ ]*\t|^[^#\"'\t]*[:,?-][ ]*\t", re.MULTILINE)


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
        fault(text[: strange.start()], f"control character U+{ord(strange[0]):04X}", "remove it")
    broken = _STRANGE_LINE_BREAK.search(text)
    if broken:
        name = f"U+{ord(broken[0]):04X}"
        fault(text[: broken.start()], f"line break {name}, which editors and git do not show as one",
              "save the file with ordinary line ends")  # fmt: skip
    directive = re.search(r"^%", text, re.MULTILINE) if "%" in text else None
    if directive:
        fault(text[: directive.start()], "a line that starts with %: directives are not read", "remove it")
    tab = _TAB.search(text) if "\t" in text else None
    if tab:
        fault(text[: tab.end() - 1], "tab character; YAML is indented with spaces", "replace it by spaces")
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
        except yaml.MarkedYAMLError as error:
            mark = error.problem_mark or error.context_mark
            line, column = (mark.line + 1, mark.column + 1) if mark else (1, 1)
            problem = f"this is not YAML: {error.problem or error}"
            self._add("unreadable-file", Span(self._file, line, column), problem,
                      "look for a missing quote, colon or indentation just before this place")  # fmt: skip
        except yaml.YAMLError as error:
            self._add("unreadable-file", Span(self._file, 1, 1), f"this is not YAML: {error}")

    def _take(self, event: Any) -> bool:
        """Take one event; False where reading on would make no sense."""
        if isinstance(event, yaml.ScalarEvent):
            if self._refused(event):
                return False
            self._scalar(event)
        elif isinstance(event, (yaml.MappingStartEvent, yaml.SequenceStartEvent)):
            return not self._refused(event) and self._enter(event)
        elif isinstance(event, (yaml.MappingEndEvent, yaml.SequenceEndEvent)):
            self._open.pop()
            self._key.pop()
        elif isinstance(event, yaml.AliasEvent):
            self._fault(event, "unreadable-file", f"alias *{event.anchor}: a value is written where it belongs",
                        "write the value out")  # fmt: skip
            return False
        return True

    def _refused(self, event: Any) -> bool:
        if event.anchor is not None:
            self._fault(event, "unreadable-file", f"anchor &{event.anchor}: aliases are not read",
                        "write the value out where it is needed")  # fmt: skip
            return True
        if event.tag is not None:
            tag = str(event.tag).replace("tag:yaml.org,2002:", "!!")
            self._fault(event, "unreadable-file", f"tag {tag}: tags are not read", "remove the tag")
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
            value: Any = self._resolved(text, span) if plain else text
            path = self._put(value, span)
            if plain and value is not text:
                self._document.raw[path] = text
            return
        path, container = self._open[-1]
        if text == "<<":
            self._add("unreadable-file", span, "merge key <<: fields are written where they belong",
                      "write the fields out")  # fmt: skip
        if text in container:
            first = self._document.places[(*path, text)][0]
            self._add("repeated-key", span, f"“{text}” is written twice here, first in line {first.line}",
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

    def _resolved(self, text: str, span: Span) -> Any:
        """Give a plain scalar its YAML 1.2 core meaning."""
        if text == "":
            self._add("bad-value", span, "the value is empty", "write the value, or `null` to remove the field")
            return None
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
            hint = f"{len(text)}/0 AWG" if set(text) == {"0"} else f'"{text}"'
            self._add("bad-value", span, f"“{text}” starts with a zero, which programs read as different numbers",
                      f"write {hint}")  # fmt: skip
            return text
        if _INTEGER.match(text):
            if len(text.lstrip("+-")) > LONGEST_INTEGER:
                self._add("bad-value", span, f"a number of {len(text)} digits", "write a shorter one")
                return text
            return int(text)
        if _OCTAL_OR_HEX.match(text):
            return int(text, 0) if len(text) <= LONGEST_INTEGER else text
        return float(text) if _FLOAT.match(text) else text

    def _fault(self, event: Any, check: str, message: str, remedy: str = "") -> None:
        mark = event.start_mark
        self._add(check, Span(self._file, mark.line + 1, mark.column + 1), message, remedy)

    def _add(self, check: str, span: Span, message: str, remedy: str = "") -> None:
        self._document.faults.append(Fault(check, span, message, remedy))
