"""Find the nearest known word to a mistyped one, and show untrusted text safely."""

from __future__ import annotations

from collections.abc import Iterable

LONGEST_SHOWN = 120


def nearest(word: str, known: Iterable[str]) -> str | None:
    """Return the known word that was most likely meant, or None."""
    import difflib  # only where something is wrong: costs more than reading a small file

    lowered = {name.lower(): name for name in sorted(known, reverse=True)}
    close = difflib.get_close_matches(word.lower(), lowered, n=1, cutoff=0.6)
    return lowered[close[0]] if close else None


def flat(text: str) -> str:
    """Return text so that it stays on its line and steers no terminal: what cannot be printed is spelled."""
    return text if text.isprintable() else "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in text)


def no_command(text: str) -> str:
    """Return text for a stream that a CI service reads, which takes this sign for a command anywhere in a line."""
    return text.replace("##[", "##\\u005b")


def shown(text: str) -> str:
    """Return text from a yard's file for a message: on one line, cut where it is long."""
    printed = flat(text)
    return printed if len(printed) <= LONGEST_SHOWN else printed[: LONGEST_SHOWN - 1] + "…"
