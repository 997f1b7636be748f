"""Print a comparison on a terminal: the verdict first, then section by section, worst news first."""

from __future__ import annotations

from collections.abc import Iterator

from checker.output.compare_sections import Section, preface, sections, verdict
from checker.reading.words import flat
from checker.result.comparison import Comparison

MOST_ITEMS = 40
"""Items of a section that are printed; how many more there are is told. New errors are all printed."""
CAUTION = "A comparison tells what a change does. It certifies nothing; local codes and the surveyor decide."

_RED, _YELLOW, _BOLD, _PLAIN = "\x1b[31m", "\x1b[33m", "\x1b[1m", "\x1b[0m"


def compare_text(comparison: Comparison, *, colour: bool = False) -> str:
    """Return what `fairloom compare` prints."""
    return "\n".join(_painted(line, colour) for line in _lines(comparison)) + "\n"


def _lines(comparison: Comparison) -> Iterator[str]:
    yield f"verdict: {flat(verdict(comparison))}"
    yield from map(flat, preface(comparison))
    was_empty = False
    for section in sections(comparison):
        if section.items or not was_empty:
            yield ""
        was_empty = not section.items
        yield from _section(section)
    yield ""
    yield CAUTION


def _section(section: Section) -> Iterator[str]:
    if not section.items:
        yield section.none
        return
    yield section.heading
    most = len(section.items) if section.title == "new errors" else MOST_ITEMS
    for item in section.items[:most]:
        yield f"  {flat(item.text)}"
        yield from (f"    {flat(detail)}" for detail in item.details)
    if len(section.items) > most:
        yield f"  and {len(section.items) - most} more"


def _painted(line: str, colour: bool) -> str:
    if not colour:
        return line
    for start, paint in (
        ("verdict:", _BOLD), ("  error:", _RED), ("  warning:", _YELLOW), ("what says less now:", _YELLOW),
        ("looked at no more:", _YELLOW),
    ):  # fmt: skip
        if line.startswith(start) and not line.endswith("nothing"):
            return f"{paint}{line}{_PLAIN}"
    return line
