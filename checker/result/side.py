"""Hold one side of a comparison: what a run found, whether it was run now or read from a JSON result.

A side knows no file positions but as text to show: two findings are the same one by what they
are about, not by where they are written.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import NamedTuple

from checker.boat.aboard import Aboard

BUILT = ("signed", "delivered")
"""The statuses of hulls that exist: a change of the class does not change them by itself."""


class Figures(NamedTuple):
    """Hold a value against its limit, both in `unit`; a fraction has unit ""."""

    quantity: str
    value: float
    limit: float
    unit: str
    at_least: bool = False
    is_stepped: bool = False

    @property
    def headroom(self) -> float | None:
        """Return how far the value is inside its limit, as a share of the limit; None without a limit."""
        if self.limit == 0 or self.limit == float("inf"):
            return None
        return (self.value - self.limit if self.at_least else self.limit - self.value) / abs(self.limit)


class Place(NamedTuple):
    """Tell a place that passed: its figures, or the note that says why it has none."""

    figures: Figures | None = None
    note: str = ""

    @property
    def looks_at(self) -> str:
        """Return what was measured, and which way its limit lies; nothing where there are no figures."""
        figures = self.figures
        return "" if figures is None else f"{figures.quantity} {'at least' if figures.at_least else 'at most'}"


class PlaceKey(NamedTuple):
    """Name a place that passed. A part that is looked at more than once is numbered: `P11.out #2`."""

    check: str
    limit_set: str
    part: str
    looks_at: str = ""


About = tuple[str, str, str]
"""Check, limit set and part: what a finding is about."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Found:
    """Tell a finding, or a place that was not assessed, as a side knows it."""

    is_finding: bool
    check: str
    level: str
    part: str
    fault: str
    fingerprint: str = ""
    limit_set: str = ""
    circuit: str = ""
    state: str = ""
    remedy: str = ""
    missing: str = ""
    path: tuple[str, ...] = ()
    file: str = ""
    at: str = ""
    figures: Figures | None = None

    @property
    def about(self) -> About:
        """Return what it is about; the fault of a file is known by its words, not by the file's name."""
        return self.check, self.limit_set, self.fault if self.file and self.part == self.file else self.part


@dataclass(frozen=True, slots=True)
class Waived:
    """Tell the waiver that accepts a finding."""

    waiver: str
    reason: str
    approved_by: str
    expires: str


@dataclass(frozen=True, slots=True)
class Rule:
    """Tell one of the yard's own rules: `old` is what the limit set says, `new` what the yard says."""

    kind: str
    what: str
    limit_set: str
    old: str
    new: str
    is_loosened: bool
    reason: str = ""
    at: str = ""


@dataclass(frozen=True, slots=True)
class SideStudy:
    """Hold what was found on one distinct boat before any waiver; `aboard` is None where it was not recorded."""

    name: str
    found: tuple[Found, ...]
    places: Mapping[PlaceKey, Place]
    sets: tuple[str, ...] = ()
    aboard: Aboard | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class SideSubject:
    """Hold one hull or option set; `accepted` is by fingerprint, `own` what is found of this subject alone."""

    id: str
    is_hull: bool
    class_id: str
    study: str
    revision: int = 0
    class_revision: int = 0
    options: tuple[str, ...] = ()
    status: str = ""
    changes: tuple[str, ...] = ()
    accepted: Mapping[str, Waived] = field(default_factory=dict)
    own: tuple[Found, ...] = ()

    @property
    def is_built(self) -> bool:
        """Tell whether the hull exists."""
        return self.is_hull and self.status in BUILT

    @property
    def design(self) -> str:
        """Return the id of the option set that a hull is built to."""
        return " + ".join((self.class_id, *self.options))


Marks = Mapping[str, Mapping[str, str]]
"""By limit set and table, a short hash of what the table says."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Side:
    """Hold one side: every hull and option set with its study, and what they were held against.

    `marks` is empty where the result does not tell them; `sizes` is how the yard lets one kind
    of conductor size speak for the other.
    """

    name: str
    tool_version: str
    subjects: tuple[SideSubject, ...]
    studies: Mapping[str, SideStudy]
    file_found: tuple[Found, ...] = ()
    unstudied: tuple[str, ...] = ()
    rules: tuple[Rule, ...] = ()
    sizes: tuple[tuple[str, str], ...] = ()
    marks: Marks = field(default_factory=dict)

    @property
    def has_aboard(self) -> bool:
        """Tell whether it is known what is aboard each boat."""
        return all(study.aboard is not None for study in self.studies.values())
