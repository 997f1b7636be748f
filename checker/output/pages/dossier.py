"""Hold what the hand-over file of one hull is made from."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from checker.boat.hull import Boat, Device
from checker.boat.parts import Load, Source
from checker.finding import Card, Outcome
from checker.limits.limit_set import LimitSet
from checker.network.studies import Studies
from checker.output.aboard import Aboard
from checker.output.lines import finding_lines
from checker.output.pages.html import Markup, facts, tag
from checker.result.gate import Gate
from checker.result.model import Handover, SubjectResult


@dataclass(frozen=True)
class Dossier:
    """Hold one hull: its gate, its studies, its limit sets, its names, and the data of its own file."""

    gate: Gate
    studies: Studies
    limits: tuple[LimitSet, ...]
    aboard: Aboard
    written: Mapping[str, Any]
    yard: str
    tool_version: str
    cards: Mapping[str, Card]

    @property
    def subject(self) -> SubjectResult:
        """Return the result of the hull."""
        return self.gate.subject

    @property
    def handover(self) -> Handover:
        """Return the plan of its test, what was measured, and who signed."""
        return self.gate.handover

    @property
    def boat(self) -> Boat:
        """Return what is aboard."""
        return self.studies.boat

    @cached_property
    def by_part(self) -> Mapping[str, tuple[Outcome, ...]]:
        """Return all outcomes, waivers applied, by the part they are of."""
        found: dict[str, list[Outcome]] = {}
        for outcome in self.subject.outcomes:
            found.setdefault(outcome.part, []).append(outcome)
        return {part: tuple(rows) for part, rows in found.items()}

    def named(self, name: str) -> str:
        """Name a device: by its own name, by the circuits that it is for, or by its part."""
        device = self.boat.devices[name]
        ends = self._ends.get(name, ())
        told = self.aboard.device_names.get(name, "") or " + ".join(self._circuits(device))
        told = told or (ends[0] if len(ends) == 1 else self.aboard.part_names.get(device.part.id, ""))
        return f"{name} {told}".strip()

    def served(self, device: Device) -> str:
        """Tell what a device serves."""
        return ", ".join(self._circuits(device))

    def _circuits(self, device: Device) -> list[str]:
        known = self.boat.circuits
        return [known[name].name or name for name in device.served or (device.circuit,) if name in known]

    @cached_property
    def _ends(self) -> Mapping[str, tuple[str, ...]]:
        """Return the names of the circuits that end at each load or source."""
        found: dict[str, dict[str, None]] = {}
        for wire in self.boat.conductors.values():
            for post in (wire.start, wire.end):
                device = self.boat.device_of(post)
                if wire.circuit in self.boat.circuits and device and isinstance(device.part, (Load, Source)):
                    found.setdefault(device.id, {})[self.boat.circuits[wire.circuit].name or wire.circuit] = None
        return {name: tuple(circuits) for name, circuits in found.items()}


def article(lines: Iterable[str], class_: str = "") -> Markup:
    """Return a finding as a block: its first line is the heading, each other one a name with what is told of it."""
    first, *others = lines
    rows = (line.strip().partition(": ") for line in others)
    return tag("article", tag("h4", first), facts((name, told) for name, _, told in rows), class_=class_)


def articles(blocks: Iterable[list[Outcome]], dossier: Dossier) -> Iterator[Markup]:
    """Return each fault as a block of its own, told as the reports tell it."""
    for block in blocks:
        lines = finding_lines(block, dossier.cards[block[0].check], "", dossier.subject.accepted)
        yield article(lines)
