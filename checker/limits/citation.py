"""Say where a figure was taken from, and on what it rests."""

from __future__ import annotations

from dataclasses import dataclass

from checker.finding import Basis

__all__ = ["CITABLE", "Basis", "Citation"]

CITABLE = (Basis.LAW, Basis.STANDARD, Basis.HANDBOOK, Basis.FROM_MEMORY, Basis.COMMON_PRACTICE)
"""What a figure of a table can rest on."""


@dataclass(frozen=True, slots=True)
class Citation:
    """Name the place of a figure: document, clause, edition, and what it rests on."""

    document: str
    clause: str
    edition: str
    basis: Basis
    note: str = ""

    @property
    def text(self) -> str:
        """Return document and clause in one line: "33 CFR Part 183, Subpart I, § 183.455(b)"."""
        return f"{self.document}, {self.clause}" if self.clause else self.document
