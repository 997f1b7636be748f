"""Write Markdown for a job summary: data text that cannot become markup, within a budget of bytes."""

from __future__ import annotations

import re

from checker.reading.words import flat

BUDGET = 900_000
"""Bytes of UTF-8; a step summary of more than 1 MiB is not shown at all."""

_SIGNS = re.compile(r"[\\`*_\[\]<>|~@&#$]|:(?! |$)|(?<=www)\.|^[-+=0-9]", flags=re.IGNORECASE)


def escaped(text: str) -> str:
    """Return data text that stays text: no markup, no HTML, no mention, no link, on one line.

    A sign that means something where it stands is written as a numeric character reference, which no
    renderer takes for markup.
    """
    return _SIGNS.sub(lambda sign: f"&#{ord(sign[0])};", flat(text))


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
