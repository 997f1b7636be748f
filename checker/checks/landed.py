"""List the terminals aboard: which end of which conductor lands on which post, and on what there."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.boat.hull import Boat, Conductor, Device
from checker.boat.landing import End
from checker.boat.parts import Bus, Fitted, Fittings, Metal, Part
from checker.checks.check import Case, Check, Place
from checker.finding import Outcome

BOLTED = ("stud", "screw", "wing-nut")
"""Kinds of post that take a ring."""


@dataclass(frozen=True, slots=True)
class Landed:
    """Describe one end of a conductor at its post.

    `kind` is what fixes it there (stud, screw, clamp ...), "" where nobody recorded it. On a
    bar with screws the conductors of branch circuits lie under a screw each, unless a stack
    of `landings` names them.
    """

    conductor: Conductor
    end: End
    post: str
    device: Device
    kind: str
    on_screw: bool

    @property
    def thread(self) -> str:
        """Return the thread of the stud or screw, "" where it is not recorded."""
        part = self.device.part
        return part.screw_thread if self.on_screw and isinstance(part, Bus) else self.fittings.stud

    @property
    def fittings(self) -> Fittings:
        """Return how conductors are fixed to the posts of the device."""
        return fittings_of(self.device)


def landed(case: Case) -> list[Landed]:
    """Return every terminal, in the order of the conductors; what plugs on without a conductor is none."""
    if "landed" not in case.memo:
        case.memo["landed"] = landed_aboard(case.boat)
    found: list[Landed] = case.memo["landed"]
    return found


def landed_aboard(boat: Boat) -> list[Landed]:
    """Return every terminal of a boat."""
    return [
        _landed(boat, conductor, post, end)
        for conductor in boat.conductors.values()
        for post, end in zip((conductor.start, conductor.end), conductor.ends, strict=True)
    ]


def _landed(boat: Boat, conductor: Conductor, post: str, end: End) -> Landed:
    device = boat.device_of(post)
    assert device is not None, post
    on_screw = _is_under_screw(boat, conductor, post, device)
    return Landed(conductor, end, post, device, "screw" if on_screw else kind_of(device), on_screw)


def _is_under_screw(boat: Boat, conductor: Conductor, post: str, device: Device) -> bool:
    part = device.part
    if not isinstance(part, Bus) or not part.screws:
        return False
    if any(conductor.id in stack.conductors for stack in boat.landings.get(post, ())):
        return False
    circuit = boat.circuits.get(conductor.circuit)
    return part.studs is None or (circuit is not None and bool(circuit.load))


def fittings_of(device: Device) -> Fittings:
    """Return how conductors are fixed to the posts of a device."""
    return device.part.fittings if isinstance(device.part, Fitted) else Fittings()


def kind_of(device: Device) -> str:
    """Return what fixes conductors to the posts of a device; a thread alone tells a stud."""
    part, fittings = device.part, fittings_of(device)
    if fittings.terminal:
        return fittings.terminal
    is_stud = bool(fittings.stud) or isinstance(part, Metal) or (isinstance(part, Bus) and bool(part.studs))
    return "stud" if is_stud else ""


def by_post(case: Case) -> dict[str, list[Landed]]:
    """Return the terminals of each post that do not lie under a screw of a bar, by post."""
    found: dict[str, list[Landed]] = {}
    for one in landed(case):
        if not one.on_screw:
            found.setdefault(one.post, []).append(one)
    return dict(sorted(found.items()))


def by_conductor(case: Case) -> dict[str, list[Landed]]:
    """Return both terminals of each conductor, by conductor."""
    found: dict[str, list[Landed]] = {}
    for one in landed(case):
        found.setdefault(one.conductor.id, []).append(one)
    return found


def at_part(part: Part) -> Place:
    """Return the place of a part: its line in the catalogue."""
    return Place(part.id, part.at)


def at_workmanship(case: Case) -> Place:
    """Return the place of the class's section `workmanship`."""
    return Place("workmanship", case.boat.workmanship.at)


def count_of(number: int, noun: str) -> str:
    """Print a number of things: 1 terminal, 5 terminals."""
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def unsaid_of(case: Case, rule: Check, some: list[Landed], what: str, field: str) -> Iterator[Outcome]:
    """Tell once for the class what nobody wrote of some ends."""
    if some:
        fault = f"{count_of(len(some), 'end')}: {what} is not recorded, first {some[0].conductor.id} at {some[0].post}"
        yield rule.not_assessed(case, at_workmanship(case), fault, f"workmanship: {field}")


def by_workmanship(case: Case, rule: Check, ends: int) -> Iterator[Outcome]:
    """Tell once for the class how many ends pass because its workmanship says how they are made."""
    if ends:
        yield rule.passed(case, at_workmanship(case), f"{count_of(ends, 'end')} as the class's workmanship says")
