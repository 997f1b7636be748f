"""Hold how conductors land: their ends, the stacks on studs, and what the yard does everywhere.

None or "" is what nobody recorded. Positions are kept beside the facts but do not count when
two boats are compared.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from checker.finding import NOWHERE, Span
from checker.units import Size


@dataclass(frozen=True, slots=True, kw_only=True)
class End:
    """Describe one end of a conductor: what the yard wrote there, else what its workmanship says.

    `hole` is the thread that a ring is made for, `barrel` the conductor size that its barrel is
    made for. `hole_as_stud` and `barrel_as_conductor`: not written here, but the class's
    workmanship says so.
    """

    terminal: str = ""
    hole: str = ""
    hole_as_stud: bool = False
    barrel: Size | None = None
    barrel_as_conductor: bool = False
    barrel_colour: str = ""
    shares_barrel: bool = False
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Stack:
    """Describe the conductors on one stud of a post, the one next to the post first."""

    post: str
    stud: str
    conductors: tuple[str, ...]
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Workmanship:
    """Hold what the yard does on every boat of the class, unless something else is written at the place."""

    terminal: str = ""
    ring_as_stud: bool = False
    barrel_as_conductor: bool = False
    largest_first: bool = False
    labels: str = ""
    passages: str = ""
    fuse_marks: bool | None = None
    switch_marks: bool | None = None
    ac: str = ""
    supports_m: float | None = None
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Isolation:
    """Describe a claim that a zone is isolated from one with petrol or gas."""

    zone: str
    by: str
    height_m: float | None = None
    tight_to_m: float | None = None
    gap_m: float | None = None
    is_sealed: bool | None = None
    has_deck_between: bool | None = None
    distance_m: float | None = None
    is_open_to_air: bool | None = None
    at: Span = field(default=NOWHERE, compare=False, repr=False)
