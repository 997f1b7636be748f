"""Print what a check does: its card as a page, all checks as a list, or all cards as one Markdown page."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Mapping, Sequence
from functools import cache
from pathlib import Path
from typing import Any

import yaml

from checker.finding import Card

WIDTH = 96
_BESIDE_CHECKS = Path(__file__).resolve().parents[1] / "checks"

Examples = Mapping[str, Sequence[str]]
"""For each check the lines of one finding that it made, as the reports print it."""


@cache
def fault_kinds() -> dict[str, str]:
    """Return each kind of fault in one sentence, by its id."""
    return _read("fault_kinds.yaml")


@cache
def examples() -> Examples:
    """Return an example finding of each check; each was made by planting the fault in an invented boat."""
    return _read("examples.yaml")


def _read(name: str) -> dict[str, Any]:
    text = (_BESIDE_CHECKS / name).read_text(encoding="utf-8")
    found: dict[str, Any] = yaml.load(text, getattr(yaml, "CSafeLoader", yaml.SafeLoader))
    return found


def check_page(card: Card) -> str:
    """Return the page of one check."""
    parts = [f"{card.id}: {card.title}", ""]
    for label, text in _facts(card):
        if label == "how it is found":
            parts += [*([""] if parts[-1] else []), *_filled(text), ""]
        else:
            parts += textwrap.wrap(f"{label}: {text}", WIDTH, subsequent_indent="  ")
    shown = examples().get(card.id, ())
    if shown:
        parts += ["", "example finding, in an invented boat"]
        for line in shown:
            indent = "  " + " " * (len(line) - len(line.lstrip()))
            parts += textwrap.wrap(line.strip(), WIDTH, initial_indent=indent, subsequent_indent=f"{indent}  ")
    return "\n".join(parts) + "\n"


def _facts(card: Card) -> list[tuple[str, str]]:
    """Return what a card says, in the order in which a reader asks."""
    rows = [("the fault", f"{fault_kinds()[kind]} ({kind})") for kind in card.catalogue]
    rows += [
        ("how it is found", card.text), ("formula", card.formula), ("level", card.level.value),
        ("rests on", card.rests_on), ("why it matters", card.why), ("exemptions", card.exemptions or "none"),
        ("caution", card.caution),
    ]  # fmt: skip
    return [(label, text) for label, text in rows if text]


def _filled(text: str) -> list[str]:
    lines: list[str] = []
    for paragraph in text.split("\n\n"):
        lines += [*textwrap.wrap(" ".join(paragraph.split()), WIDTH), ""]
    return lines[:-1]


def check_list(cards: Iterable[Card]) -> str:
    """Return all checks, a line each."""
    rows = list(cards)
    width = max(len(card.id) for card in rows)
    return "\n".join(f"{card.id:{width}}  {card.level.value:7}  {card.title}" for card in rows) + "\n"


def markdown_page(cards: Iterable[Card]) -> str:
    """Return all checks as one Markdown page."""
    rows = list(cards)
    parts = [
        "# All checks", "",
        "Made from the checks themselves by `tests/make_checks_page.py`; do not edit. The example findings come from "
        "faults planted in invented boats. A check reports against the limits it names and certifies nothing: local "
        "codes, the licensed edition of a standard and licensed practice govern.", "",
    ]  # fmt: skip
    parts += [f"- [{card.id}](#{card.id}): {card.title} ({card.level.value})" for card in rows]
    for card in rows:
        parts += ["", f"## {card.id}", "", *_markdown_lines(card)]
    return _joined(parts)


def markdown_check(card: Card) -> str:
    """Return what `check_page` tells of one check, as Markdown."""
    return _joined(_markdown_lines(card))


def _markdown_lines(card: Card) -> list[str]:
    parts = [f"**{card.title}**", ""]
    for label, text in _facts(card):
        paragraphs = [" ".join(p.split()) for p in text.split("\n\n")]
        parts += [f"- {label}: {paragraphs[0]}", *(f"  {p}" for p in _spaced(paragraphs[1:]))]
    example = examples().get(card.id, ())
    if example:
        parts += ["", "```text", *example, "```"]
    return parts


def _joined(lines: Iterable[str]) -> str:
    return "\n".join([*(line.rstrip() for line in lines), ""])


def _spaced(paragraphs: Sequence[str]) -> list[str]:
    """Return paragraphs with an empty line before each."""
    return [line for paragraph in paragraphs for line in ("", paragraph)]
