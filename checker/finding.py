"""Hold what a look at one place can end as, and where that place is written.

These types stand on the ground floor, since reading, boat and checks all make them.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum
from typing import NamedTuple

Path = tuple[str | int, ...]
"""Keys and indexes from the top of a document down to a value."""

EQUAL_FRACTION = 1e-9
"""Two figures this close are the same figure typed in two units: 7 in computes to a hair
below the 0.1778 m an author writes, and a bare comparison would call a sound boat faulty."""


class Span(NamedTuple):
    """Point at a place in a yard's file: path relative to the yard's folder, counted from 1."""

    file: str
    line: int
    column: int

    def __str__(self) -> str:
        return f"{self.file}:{self.line}:{self.column}"


NOWHERE = Span("", 0, 0)


class Level(Enum):
    """Say how bad a finding is, in SARIF's words."""

    ERROR = "error"
    WARNING = "warning"
    NOTE = "note"

    @property
    def rank(self) -> int:
        """Return 0 for the worst."""
        return ("error", "warning", "note").index(self.value)


class Verdict(Enum):
    """Say how a look at one place ended."""

    FINDING = "finding"
    ACCEPTED = "accepted"
    NOT_ASSESSED = "not assessed"
    PASSED = "passed"

    @property
    def rank(self) -> int:
        """Return 0 for the worst news."""
        return ("finding", "accepted", "not assessed", "passed").index(self.value)


class Basis(Enum):
    """Say what a figure or a rule rests on."""

    LAW = "law"
    STANDARD = "standard"
    HANDBOOK = "handbook"
    YARD_RULE = "yard's own rule"
    PHYSICS = "physics"
    FROM_MEMORY = "from memory"
    COMMON_PRACTICE = "common practice, no source"


class Measure(NamedTuple):
    """Hold a value against its limit. Both are in `unit`; a fraction has unit "".

    `is_stepped` marks what is chosen from a row of sizes, where standing at the limit is
    the ordinary case and no thin margin: a gauge, a rating, a class of insulation.
    `shown_in` is the unit that the yard wrote, where it is another: "ft" for a length in m.
    """

    quantity: str
    value: float
    limit: float
    unit: str
    at_least: bool = False
    is_stepped: bool = False
    shown_in: str = ""

    @property
    def holds(self) -> bool:
        """Tell whether the value keeps the limit; a value equal to the limit does."""
        if self.at_least:
            return self.value >= self.limit * (1 - EQUAL_FRACTION)
        return self.value <= self.limit * (1 + EQUAL_FRACTION)

    @property
    def headroom_fraction(self) -> float | None:
        """Return how far the value is inside its limit, as a share of the limit; None without a limit."""
        if self.limit == 0 or self.limit == float("inf"):
            return None
        gap = self.value - self.limit if self.at_least else self.limit - self.value
        fraction = gap / abs(self.limit)
        return 0.0 if abs(fraction) < EQUAL_FRACTION else fraction


class Outcome(NamedTuple):
    """Tell how one check ended at one place of one part.

    `part` is the id the yard wrote or the derived one (`P11.out`). `limit_set` is empty where
    the verdict rests on physics or the yard's own data. `missing` names the field to fill in
    where the verdict is "not assessed". `also_at` are other lines that have to do with it.
    `inputs` are the facts that made a finding; a waiver is bound to their fingerprint. `is_thin`:
    it passed with little to spare. `house` are the yard's own rules that changed a limit which
    the check rests on, or its level. `rests_on` is empty where the card's citation tells it: the
    tables of a set that the yard enters have citations of their own. A named tuple, since a fleet
    makes hundreds of thousands and sends them between processes; always made by field names.
    """

    verdict: Verdict
    check: str
    level: Level
    part: str
    at: Span
    limit_set: str = ""
    circuit: str = ""
    measure: Measure | None = None
    fault: str = ""
    remedy: str = ""
    state: str = ""
    path: tuple[str, ...] = ()
    missing: str = ""
    note: str = ""
    inputs: tuple[tuple[str, str], ...] = ()
    also_at: tuple[Span, ...] = ()
    is_thin: bool = False
    house: tuple[str, ...] = ()
    rests_on: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Card:
    """Describe a check to the people who read its findings.

    `why` says in one sentence what happens if the fault stays. `formula` is what is reckoned,
    empty where nothing is. `catalogue` are the kinds of
    fault that it finds, by the ids of the fault catalogue under tests/.
    """

    id: str
    title: str
    level: Level
    basis: Basis
    citation: str
    why: str
    text: str
    formula: str = ""
    exemptions: str = ""
    caution: str = ""
    catalogue: tuple[str, ...] = ()
    can_be_waived: bool = False

    @property
    def rests_on(self) -> str:
        """Return basis and citation, without saying the same twice."""
        return self.citation if self.basis.value in self.citation else f"{self.basis.value}: {self.citation}"
