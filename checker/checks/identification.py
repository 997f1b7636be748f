"""Judge what tells one conductor, breaker or switch from another: labels, legends, marks."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterator

from checker.boat.hull import Conductor, Device
from checker.boat.parts import Overcurrent, Switch
from checker.checks.cables import each_cable, named
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import plain
from checker.finding import Basis, Level, Outcome
from checker.network.mains import battery_switches, main_devices

WORKMANSHIP = "workmanship"


@check(
    title="A label carries the id of its conductor, and no other conductor has it",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the wrong conductor is taken out",
    catalogue=("LBL-04",),
)
def label_text(case: Case) -> Iterator[Outcome]:
    """Is the text on every label the id in the data, and aboard once?

    The cable of a branch carries the id of its circuit, or those of its two conductors. After
    the id a label may go on, e.g. with the post it lands on: only its first word counts.
    """
    cables = dict(each_cable(case.boat))
    first_words = {name: _label(wire) for name, wire in cables.items()}
    bearers = Counter(first_words.values())
    for name, wire in cables.items():
        label = first_words[name]
        place = Place(name, wire.at_label, wire.circuit)
        if label in (name, wire.id) and bearers[label] == 1:
            yield label_text.passed(case, place)
            continue
        if label in (name, wire.id):
            continue  # its namesake is told: one cause, one finding
        other = next((n for n, text in first_words.items() if n != name and label in (n, text)), "")
        told = Told(
            fault=f"is labelled “{wire.label or label}”" + (f", and so is {other}" if other else ""),
            remedy=f"label it “{name}”, or correct the id in the data",
            also_at=(cables[other].at_label,) if other else (),
            inputs=(("label", label), ("id", name)),
        )
        yield label_text.found(case, place, told)


def _label(wire: Conductor) -> str:
    words = wire.label.split()
    return words[0] if words else wire.id


@check(
    title="A conductor is labelled at both ends",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="nobody can trace it from the end without a label",
    level=Level.NOTE,
    catalogue=("LBL-05",),
)
def label_ends(case: Case) -> Iterator[Outcome]:
    """Does every conductor carry its label where it starts and where it ends? A branch's cable is told once."""
    unknown: list[str] = []
    for name, wire in each_cable(case.boat):
        place = Place(name, wire.at_labelled, wire.circuit)
        if wire.labelled == "both":
            yield label_ends.passed(case, place)
        elif wire.labelled == "":
            unknown.append(name)
        else:
            bare = {"from": [wire.end], "to": [wire.start]}.get(wire.labelled, [wire.start, wire.end])
            told = Told(
                fault=f"has no label at {' nor at '.join(bare)}",
                remedy=f"label it “{name}” there as well",
                inputs=(("labelled", wire.labelled),),
            )
            yield label_ends.found(case, place, told)
    if unknown:
        fault = f"which ends of {len(unknown)} conductors and cables are labelled is not recorded: {named(unknown)}"
        yield label_ends.not_assessed(case, Place(WORKMANSHIP, case.boat.workmanship.at), fault, "workmanship: labels")


_RATING = re.compile(r"\b[0-9]+(?:\.[0-9]+)? ?A\b")
_WORD = re.compile(r"[^\W_]+")
SHORTEST_WORD = 2
SHORTEST_START = 3


@check(
    title="A legend names the circuit it stands at",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; a common finding of surveys",
    why="the wrong breaker is opened, and a live circuit is worked on",
    level=Level.WARNING,
    catalogue=("LBL-06",),
)
def legend_name(case: Case) -> Iterator[Outcome]:
    """Where a legend is recorded, does it share a word with the name of a circuit on its position?

    Ratings are left out here; a word may be cut short (REFRIG for refrigerator), and the id of
    the circuit is as good as its name.
    """
    for device in case.boat.devices.values():
        served = device.served or (device.circuit,)
        circuits = [case.boat.circuits[name] for name in served if name in case.boat.circuits]
        for legend, at in device.legends:
            place = Place(device.id, at, device.circuit)
            words = _words(_RATING.sub(" ", legend))
            if any(_is_one_of(word, _words(f"{c.name} {c.id}")) for word in words for c in circuits):
                yield legend_name.passed(case, place)
                continue
            names = " and ".join(f"“{c.name}”" for c in circuits)
            told = Told(
                fault=f"legend “{legend}” stands at the circuit {names}",
                remedy=f"correct the legend: {' / '.join(c.name for c in circuits)}",
                inputs=(("legend", legend), ("circuits", names)),
            )
            yield legend_name.found(case, place, told)


def _words(text: str) -> list[str]:
    """Return the words of a text in small letters, plural or not."""
    found = [word.lower() for word in _WORD.findall(text)]
    return [word[:-1] if len(word) > SHORTEST_START and word.endswith("s") else word for word in found]


_NO_NAME = frozenset(("the", "and", "of", "for", "at", "in", "on", "to"))


def _is_one_of(word: str, names: list[str]) -> bool:
    if word in _NO_NAME or len(word) < SHORTEST_WORD:
        return False
    if word in names:
        return True
    long = [name for name in names if min(len(name), len(word)) >= SHORTEST_START]
    return any(name.startswith(word) or word.startswith(name) for name in long)


@check(
    title="Battery switches, main devices and fuses are marked",
    basis=Basis.FROM_MEMORY,
    citation="BSS 2002 Part 3, 3.3 and 3.5 (from memory)",
    why="nobody finds the switch in an emergency, and the wrong spare fuse is fitted",
    level=Level.WARNING,
    catalogue=("LBL-07", "LBL-08"),
)
def place_mark(case: Case) -> Iterator[Outcome]:
    """Is the place of every battery switch and main device marked, and the rating of every fuse at its holder?

    Which switches and devices these are is told at `switch-reach`; a breaker carries its rating itself.
    """
    unknown: dict[str, list[str]] = {}
    mains = {*battery_switches(case.studies), *main_devices(case.studies)}
    for device in case.boat.devices.values():
        is_fuse = isinstance(device.part, Overcurrent) and not device.part.is_breaker
        if not is_fuse and device.id not in mains:
            continue
        place = Place(device.id, device.at, device.circuit)
        if device.is_marked is None:
            field = "switch_marks" if isinstance(device.part, Switch) else "fuse_marks"
            unknown.setdefault(field, []).append(device.id)
        elif device.is_marked:
            yield place_mark.passed(case, place)
        else:
            yield place_mark.found(case, place, _told_mark(device, is_fuse, device.id in mains))
    for field, names in sorted(unknown.items()):
        what = "place is marked beside each switch" if field == "switch_marks" else "rating is marked at each holder"
        fault = f"whether the {what} is not recorded: {named(names)}"
        here = Place(WORKMANSHIP, case.boat.workmanship.at)
        yield place_mark.not_assessed(case, here, fault, f"workmanship: {field}")


def _told_mark(device: Device, is_fuse: bool, is_main: bool) -> Told:
    what = ["its place"] if is_main else []
    if is_fuse and isinstance(device.part, Overcurrent):
        what.insert(0, f"its rating of {plain(device.part.rating_a)} A")
    return Told(
        fault=f"{' and '.join(what)} {'are' if len(what) > 1 else 'is'} not marked",
        remedy=f"mark {' and '.join(what)} beside it, so that it lasts, and record it",
        inputs=(("part", device.part.id), ("marked", "no")),
    )
