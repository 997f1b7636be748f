"""Write Markdown: data text that cannot become markup, within a budget of bytes."""

from __future__ import annotations

import re

from checker.reading.words import flat

BUDGET = 900_000
"""Bytes of UTF-8; a step summary of more than 1 MiB is not shown at all."""

_SIGNS = re.compile(r"[\\`*_\[\]<>&|~#@!$]|:(?! |$)|^[-+=]|^[0-9](?=[0-9]*[.)](?: |$))")
_LINKING = re.compile(r"(?i)@|#|:(?=//)|www(?=\.)")
JOINER = "\u2060"
"""Breaks a word without a gap to see."""


def plain(text: str) -> str:
    """Return text that Markdown shows as it is, also in a cell of a table.

    Each sign with a meaning is written as a character reference, which CommonMark never takes for
    structure. A forge looks for mentions, issues and addresses after that, in the text that is
    shown; an unseen joiner in them keeps them from being found.
    """
    apart = _LINKING.sub(rf"\g<0>{JOINER}", flat(text))
    return _SIGNS.sub(lambda sign: f"&#{ord(sign[0])};", apart)


class Budget:
    """Collect lines until the budget is used up; what was left out is counted."""

    def __init__(self, most_bytes: int = BUDGET) -> None:
        self.left = most_bytes
        self.lines: list[str] = []
        self.left_out = 0

    def add(self, *lines: str) -> bool:
        """Add lines that belong together, all or none; tell whether they fitted."""
        size = sum(len(line.encode("utf-8")) + 1 for line in lines)
        if self.left_out or size > self.left:
            self.left_out += 1
            return False
        self.left -= size
        self.lines += lines
        return True

    def text(self, *closing: str) -> str:
        """Return what fitted, with closing lines that are always there."""
        return "\n".join([*self.lines, *closing, ""])
