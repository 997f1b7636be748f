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


def shown(text: str) -> str:
    """Return text from a yard's file so that it stays on its line and prints as itself."""
    flat = "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in text)
    return flat if len(flat) <= LONGEST_SHOWN else flat[: LONGEST_SHOWN - 1] + "…"
