"""Say where a figure was taken from, and on what it rests."""

from __future__ import annotations

from dataclasses import dataclass

from checker.finding import Basis

__all__ = ["CITABLE", "Basis", "Citation"]

CITABLE = (Basis.LAW, Basis.STANDARD, Basis.HANDBOOK, Basis.FROM_MEMORY, Basis.COMMON_PRACTICE)
"""What a figure of a table can rest on."""


@dataclass(frozen=True, slots=True)
class Citation:
    """Name the place of a figure: document, clause, edition, and what it rests on; a yard's table also the page."""

    document: str
    clause: str
    edition: str
    basis: Basis
    note: str = ""
    page: str = ""

    @property
    def text(self) -> str:
        """Return document, clause and page in one line: "33 CFR Part 183, Subpart I, § 183.455(b)"."""
        return ", ".join(filter(None, (self.document, self.clause, self.page)))
