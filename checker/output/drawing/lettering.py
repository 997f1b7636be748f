"""Measure text without a font: how wide it may become in the reader's sans-serif, and cut it to a width.

A picture names no font that the reader must have. The widths are those of common sans-serif
faces, the wider of two and rounded up, so that no text grows out of its place.
"""

from __future__ import annotations

import unicodedata
from functools import lru_cache

from checker.reading.words import flat

FACES = "Arial, Helvetica, Liberation Sans, DejaVu Sans, sans-serif"
ASCENT, DESCENT = 0.80, 0.24
"""How far letters reach above and below their line, in sizes of the letters."""
BOLD = 1.13
_WIDE, _WIDEST = 1.05, 12.0
_LIGATURES = range(0xFDF0, 0xFE00)  # one sign that is drawn as a sentence
_MOST_MARKS = 2
_WIDTHS = {
    character: width
    for width, characters in {
        0.30: "Iijl ",
        0.35: ",./:;\\f|·\u2018\u2019'",
        0.40: "!()-[]rt²",
        0.45: '"',
        0.50: "*`°",
        0.55: "Jcszç“”",
        0.60: "?L_aekovxy\u2013äöéèà",
        0.65: "$0123456789FTbdghnpqu{}µüßñ",
        0.70: "ABEKPSVXYZÄÉ",
        0.75: "CDHNRUÜ",
        0.80: "&GOQwΩÖ",
        0.85: "#+<=>M^~×−±≤≥",
        0.95: "%m",
        1.00: "W",
    }.items()
    for character in characters
}


@lru_cache(maxsize=16384)
def text_width(text: str, size: float, *, is_bold: bool = False) -> float:
    """Return the greatest width that a text may take, in the unit of the letters' size."""
    return sum(_character(c) for c in text) * size * (BOLD if is_bold else 1.0)


def _character(character: str) -> float:
    width = _WIDTHS.get(character)
    if width is not None:
        return width
    return _WIDEST if ord(character) in _LIGATURES else _WIDE


def legible(text: str) -> str:
    """Return text on one line and with no more marks stacked on a letter than a language does."""
    if text.isascii() and text.isprintable():
        return text
    kept: list[str] = []
    marks = 0
    for character in flat(unicodedata.normalize("NFC", text)):
        marks = marks + 1 if unicodedata.category(character) in ("Mn", "Me") else 0
        if marks <= _MOST_MARKS:
            kept.append(character)
    return "".join(kept)


def shortened(text: str, size: float, width: float, *, is_bold: bool = False) -> str:
    """Return a text that takes no more than a width, its end replaced by an ellipsis if need be."""
    text = legible(text)
    if text_width(text, size, is_bold=is_bold) <= width:
        return text
    left = width - text_width("…", size, is_bold=is_bold)
    kept = ""
    for character in text:
        left -= text_width(character, size, is_bold=is_bold)
        if left < 0:
            break
        kept += character
    return kept.rstrip() + "…"


def wrapped(text: str, size: float, width: float, most_lines: int) -> list[str]:
    """Return a text in lines that take no more than a width; what is over is cut with an ellipsis."""
    lines: list[str] = []
    words = legible(text).split(" ")
    while words:
        line = words.pop(0)
        if len(lines) == most_lines - 1:
            return [*lines, shortened(" ".join([line, *words]), size, width)]
        while words and text_width(f"{line} {words[0]}", size) <= width:
            line = f"{line} {words.pop(0)}"
        lines.append(shortened(line, size, width))
    return lines
