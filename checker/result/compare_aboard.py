"""Compare what is aboard two boats, and fold it into what a person would say: P11 is 8 AWG instead of 6 AWG."""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import NamedTuple

from checker.boat.aboard import BOAT, Aboard, Fact, Facts, facts_of, part_names
from checker.result.comparison import DifferenceKind, FactChange

DERIVED = ("company", "zones", "enclosed_m", "ways", "circuit")
"""Facts of a conductor that follow from its ways and its neighbours."""
WORKMANSHIP = "workmanship_"


class Thing(NamedTuple):
    """Name a thing aboard: its kind and its id."""

    kind: str
    id: str


@dataclass(frozen=True, slots=True)
class Unit:
    """Tell what changed in one circuit or thing of one boat; see `Difference`."""

    kind: DifferenceKind
    about: str
    things: tuple[str, ...]
    facts: tuple[FactChange, ...]


@dataclass(frozen=True, slots=True)
class AboardChanges:
    """Tell how what is aboard one boat changed.

    `changed` are the facts of each thing that is on both sides, `added` and `removed` the facts of
    those that are on one. Parts that come or go with a device are not told: the device tells it.
    `circuits` are the conductors of each circuit on both sides, `gone_names` and `new_names` what is
    called by names on one side only, `users` what uses a part or a way that changed, `zones` where
    devices and conductors stood, `devices` the circuits of devices that changed.
    """

    changed: Mapping[Thing, tuple[FactChange, ...]]
    added: Mapping[Thing, Facts]
    removed: Mapping[Thing, Facts]
    circuits: Mapping[str, tuple[frozenset[str], frozenset[str]]]
    gone_names: frozenset[str] = frozenset()
    new_names: frozenset[str] = frozenset()
    users: Mapping[str, frozenset[str]] = field(default_factory=dict)
    zones: Mapping[str, str] = field(default_factory=dict)
    devices: Mapping[str, str] = field(default_factory=dict)

    @property
    def is_nothing(self) -> bool:
        """Tell whether the boats are alike."""
        return not (self.changed or self.added or self.removed)

    @property
    def touched(self) -> frozenset[str]:
        """Return the names of all things that changed, came or went."""
        return frozenset(thing.id for rows in (self.changed, self.added, self.removed) for thing in rows)

    @property
    def relanded(self) -> frozenset[str]:
        """Return what lands elsewhere, by the names that checks call it: places there come and go with it."""
        stacks = [f"{t.id.replace(' ', ' stud ', 1)}" for t in self.changed if t.kind == "stack"]
        moved = [t.id for t, facts in self.changed.items() if {"start", "end"} & {fact.key for fact in facts}]
        return frozenset((*stacks, *moved))

    def members(self, unit: Unit) -> frozenset[str]:
        """Return the names of what a unit is about: a circuit with its conductors, a part with its devices."""
        kind, _, name = unit.about.partition(" ")
        if not name:
            conductors = self.circuits.get(kind, (_NONE, _NONE))[1]
            return frozenset((kind, *(unit.things or conductors), f"{kind}.load"))
        return frozenset((name, *self.users.get(unit.about, ())))


def aboard_changes(before: Aboard, after: Aboard) -> AboardChanges:
    """Return how what is aboard changed."""
    changed: dict[Thing, tuple[FactChange, ...]] = {}
    added: dict[Thing, Facts] = {}
    removed: dict[Thing, Facts] = {}
    if before.lines == after.lines:
        return AboardChanges({}, {}, {}, {})
    for key in dict.fromkeys((*before.lines, *after.lines)):
        old, new = before.lines.get(key), after.lines.get(key)
        thing = _thing(key)
        if old is None or new is None:
            if thing.kind != "part":
                (added if old is None else removed)[thing] = facts_of(new or old or "")
        elif old != new:
            in_feet = thing.id in after.in_feet
            facts = tuple(_fact_changes(facts_of(old), facts_of(new), in_feet=in_feet))
            if facts:
                changed[thing] = facts
    circuits = _conductors_of(before), _conductors_of(after)
    both = {name: (circuits[0].get(name, _NONE), circuits[1].get(name, _NONE)) for one in circuits for name in one}
    olds, news = _names(before), _names(after)
    left = _explained(changed, after)
    return AboardChanges(
        changed=left,
        added=added,
        removed=removed,
        circuits=both,
        gone_names=olds - news,
        new_names=news - olds,
        users=dict(_users(left, after)),
        zones=dict(_zones(before)) if any(thing.kind == "zone" for thing in left) else {},
        devices={
            thing.id: str(facts_of(after.lines[f"device {thing.id}"]).get("circuit", ""))
            for thing in left
            if thing.kind == "device"
        },
    )


def _users(changed: Iterable[Thing], aboard: Aboard) -> Iterator[tuple[str, frozenset[str]]]:
    """Yield what uses a part or a way that changed: devices, conductors, and their circuits."""
    parts = [thing.id for thing in changed if thing.kind == "part"]
    ways = [thing.id for thing in changed if thing.kind == "way"]
    if not parts and not ways:
        return
    rows = [(_thing(key), facts_of(line)) for key, line in aboard.lines.items() if key.startswith(("dev", "cond"))]
    for part in parts:
        yield f"part {part}", _named([row for row in rows if part in part_names(row[1])])
    for way in ways:
        yield f"way {way}", _named([row for row in rows if way in str(row[1].get("ways", "")).split(", ")])


def _zones(aboard: Aboard) -> Iterator[tuple[str, str]]:
    for key, line in aboard.lines.items():
        if key.startswith(("device ", "conductor ")):
            facts = facts_of(line)
            yield key.partition(" ")[2], str(facts.get("zone") or facts.get("zones", ""))


def _named(rows: Iterable[tuple[Thing, Facts]]) -> frozenset[str]:
    return frozenset(name for thing, facts in rows for name in (thing.id, str(facts.get("circuit", ""))) if name)


def _names(aboard: Aboard) -> frozenset[str]:
    """Return all names that checks call things by: a part without its rating, a stack as `POST stud S`."""
    things = [_thing(key) for key in aboard.lines]
    stacks = (" stud ".join(thing.id.split(" ")) for thing in things if thing.kind == "stack")
    return frozenset((*(thing.id.partition(" ")[0] for thing in things), *stacks))


_NONE: frozenset[str] = frozenset()


def _thing(key: str) -> Thing:
    kind, _, name = key.partition(" ")
    return Thing(kind, name)


def _fact_changes(old: Facts, new: Facts, *, in_feet: bool) -> Iterator[FactChange]:
    for key in dict.fromkeys((*old, *new)):
        before, after = old.get(key), new.get(key)
        if not _is_same(before, after):
            yield FactChange(key, before, after, in_feet)


def _is_same(one: Fact | None, other: Fact | None) -> bool:
    if _is_number(one) and _is_number(other):
        assert isinstance(one, int | float)
        assert isinstance(other, int | float)
        return math.isclose(one, other, rel_tol=2e-9)  # both are rounded to nine digits
    return one == other and type(one) is type(other)


def _is_number(fact: Fact | None) -> bool:
    return isinstance(fact, int | float) and not isinstance(fact, bool)


def _conductors_of(aboard: Aboard) -> dict[str, frozenset[str]]:
    found: dict[str, set[str]] = {}
    for key, line in aboard.lines.items():
        if key.startswith("conductor "):
            circuit = facts_of(line).get("circuit")
            if isinstance(circuit, str):
                found.setdefault(circuit, set()).add(key.partition(" ")[2])
    return {name: frozenset(conductors) for name, conductors in found.items()}


def _explained(changed: dict[Thing, tuple[FactChange, ...]], after: Aboard) -> dict[Thing, tuple[FactChange, ...]]:
    """Leave out what follows from a way that became longer or from more company in it."""
    longer: dict[str, float] = {}
    for thing, facts in changed.items():
        for fact in facts:
            if thing.kind == "way" and fact.key == "length_m":
                longer[thing.id] = _value(fact.new) - _value(fact.old)
    left: dict[Thing, tuple[FactChange, ...]] = {}
    for thing, facts in changed.items():
        if thing.kind != "conductor":
            left[thing] = facts
            continue
        moved = any(fact.key in ("ways", "start", "end") for fact in facts)
        now = facts_of(after.lines[f"conductor {thing.id}"])
        by_ways_m = sum(longer.get(way, 0.0) for way in str(now.get("ways", "")).split(", "))
        told = tuple(
            fact for fact in facts
            if moved or not (fact.key in DERIVED or (fact.key == "length_m" and _follows(fact, by_ways_m)))
        )  # fmt: skip
        if told:
            left[thing] = told
    return left


def _follows(fact: FactChange, by_ways_m: float) -> bool:
    return by_ways_m != 0 and abs(_value(fact.new) - _value(fact.old) - by_ways_m) < 1e-6


def _value(fact: Fact | None) -> float:
    return float(fact) if isinstance(fact, int | float) else 0.0


def units(changes: AboardChanges) -> Iterator[Unit]:
    """Yield what changed, a circuit or a thing at a time, in the order of the boat's lines."""
    yield from _whole_things(DifferenceKind.REMOVED, changes.removed)
    yield from _whole_things(DifferenceKind.ADDED, changes.added)
    alike: dict[tuple[str, tuple[FactChange, ...]], list[str]] = {}
    for thing, facts in changes.changed.items():
        circuit = _circuit_of(thing, changes)
        about = circuit or (thing.id and f"{thing.kind} {thing.id}") or BOAT
        alike.setdefault((about, facts), []).append(thing.id if circuit else "")
    for (about, facts), names in alike.items():
        before, after = changes.circuits.get(about, (_NONE, _NONE))
        is_whole = bool(after) and set(names) >= after and set(names) >= before
        things = () if is_whole or names in ([""], [about]) else tuple(sorted(names))
        yield Unit(DifferenceKind.CHANGED, about, things, facts)


def _circuit_of(thing: Thing, changes: AboardChanges) -> str:
    if thing.kind == "circuit":
        return thing.id
    if thing.kind == "device":
        return changes.devices.get(thing.id, "")
    if thing.kind == "conductor":
        return next((name for name, (_, after) in changes.circuits.items() if thing.id in after), "")
    return ""


def _whole_things(kind: DifferenceKind, things: Mapping[Thing, Facts]) -> Iterator[Unit]:
    """Yield what was added or removed; what belongs to a circuit of which this is true goes with it."""
    circuits = {thing.id for thing in things if thing.kind == "circuit"}
    for thing, facts in things.items():
        if thing.kind != "circuit" and facts.get("circuit") in circuits:
            continue
        is_new = kind is DifferenceKind.ADDED
        all_facts = {**facts, **(_of_circuit(thing.id, things) if thing.kind == "circuit" else {})}
        told = tuple(FactChange(k, None, v) if is_new else FactChange(k, v, None) for k, v in all_facts.items())
        yield Unit(kind, thing.id if thing.kind == "circuit" else f"{thing.kind} {thing.id}", (), told)


def _of_circuit(circuit: str, things: Mapping[Thing, Facts]) -> Facts:
    """Return the sizes of a circuit's conductors and the ratings of its devices, each once."""
    own = [facts for facts in things.values() if facts.get("circuit") == circuit]
    sizes = dict.fromkeys(str(facts["size"]) for facts in own if "size" in facts)
    ratings = dict.fromkeys(f"{facts['rating_a']} A" for facts in own if "rating_a" in facts)
    told: Facts = {"size": ", ".join(sizes), "device": ", ".join(ratings)}
    return {key: fact for key, fact in told.items() if fact}
