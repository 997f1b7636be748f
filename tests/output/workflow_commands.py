"""Read workflow commands as the CI service's runner does (its documented format; from memory where that is silent).

The runner trims a line's start and takes `::word properties::message`; it also takes the older
`##[word properties]message` wherever that stands in a line. After `::stop-commands::TOKEN` it takes
none until `::TOKEN::`.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import NamedTuple

_NEW = re.compile(r"::([a-z-]+)(?: ([^\n]*?))?::(.*)\Z")
_OLD = re.compile(r"##\[([a-z-]+)(?: ([^\]]*))?\](.*)\Z")


class Command(NamedTuple):
    """Hold one command that the runner would carry out."""

    word: str
    properties: dict[str, str]
    message: str


def commands(text: str) -> Iterator[Command]:
    """Yield every command in an output, and fail where a pause is never ended."""
    token = ""
    for line in re.split(r"\r\n|\r|\n", text):
        trimmed = line.lstrip()
        if token:
            if trimmed == f"::{token}::":
                token = ""
            continue
        match = _NEW.match(trimmed) or _OLD.search(line)
        if match is None:
            continue
        if match[1] == "stop-commands":
            token = match[3]
            continue
        pairs = (pair.partition("=") for pair in (match[2] or "").split(",") if pair)
        yield Command(match[1], {key.strip(): _decoded(value, ":,") for key, _, value in pairs}, _decoded(match[3]))
    assert not token, "commands were stopped and never started again"


def _decoded(text: str, more: str = "") -> str:
    for sign in f"\r\n{more}":
        text = text.replace(f"%{ord(sign):02X}", sign)
    return text.replace("%25", "%")
