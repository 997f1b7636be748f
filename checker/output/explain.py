"""Print what a check does: its card as a page, or all checks as a list."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable

from checker.finding import Card

WIDTH = 96


def check_page(card: Card) -> str:
    """Return the page of one check."""
    parts = [f"{card.id}: {card.title}", "", *_filled(card.text), ""]
    for label, text in (
        ("level", card.level.value), ("rests on", card.rests_on), ("why it matters", card.why),
        ("exemptions", card.exemptions or "none"), ("caution", card.caution),
        ("kinds of fault", ", ".join(card.catalogue)),
    ):  # fmt: skip
        if text:
            parts += textwrap.wrap(f"{label}: {text}", WIDTH, subsequent_indent="  ")
    return "\n".join(parts) + "\n"


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
