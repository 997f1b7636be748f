"""Number the findings that a drawing shows, and find what each is marked at."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.finding import Outcome, Verdict
from checker.output.lines import same_fault

MOST = 60
"""Findings beyond this many are counted, not drawn: the report tells them all."""


@dataclass(frozen=True, slots=True)
class Mark:
    """Hold one numbered finding and the id that it is drawn at, "" where what it is about is not drawn."""

    number: int
    outcome: Outcome
    at: str


def numbered(outcomes: Sequence[Outcome], boat: Boat, drawn: Collection[str]) -> tuple[list[Mark], int]:
    """Return the marks of findings and accepted findings, the worst first, and how many were left out.

    The same fault under two limit sets is one mark.
    """
    told = [o for o in outcomes if o.verdict in (Verdict.FINDING, Verdict.ACCEPTED)]
    once: dict[tuple[object, ...], Outcome] = {}
    for outcome in sorted(told, key=lambda o: (o.verdict.rank, o.level.rank)):
        once.setdefault(same_fault(outcome), outcome)
    chosen = list(once.values())[:MOST]
    marks = [Mark(number, o, _drawn_at(o, boat, drawn)) for number, o in enumerate(chosen, start=1)]
    return marks, len(once) - len(chosen)


def by_place(marks: Sequence[Mark]) -> Mapping[str, list[Mark]]:
    """Return the marks at each id."""
    found: dict[str, list[Mark]] = {}
    for mark in marks:
        if mark.at:
            found.setdefault(mark.at, []).append(mark)
    return found


def _drawn_at(outcome: Outcome, boat: Boat, drawn: Collection[str]) -> str:
    """Return the drawn id that a finding is about: its part, the device of its post, its circuit or what that holds."""
    first = outcome.part.split(" ")[0]
    device = boat.device_of(first)
    names = [outcome.part, first, device.id if device is not None else ""]
    for name in (outcome.part, first, outcome.circuit):
        circuit = boat.circuits.get(name)
        if circuit is not None:
            names += [name, circuit.load, circuit.device, *circuit.conductors]
    return next((name for name in names if name and name in drawn), "")
