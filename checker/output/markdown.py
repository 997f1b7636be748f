"""Write text from a yard's files into Markdown so that it stays text."""

from __future__ import annotations

import re

from checker.reading.words import flat

_SIGNS = re.compile(r"[\\`*_\[\]<>&|~#@:!$]")
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
