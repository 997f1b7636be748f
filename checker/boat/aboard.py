"""List what is aboard a boat, one short line a thing, so that two boats can be held against each other.

The lines hold facts in SI under the names of the field, without positions and without the unit
that the yard wrote: the same length in feet and in metres is the same line.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import MISSING, dataclass, field, fields, is_dataclass
from functools import cache
from typing import Any

from checker.boat.hull import Boat, Conductor, Device, Shield
from checker.boat.landing import Workmanship
from checker.boat.parts import Overcurrent, Part
from checker.units import Size

Fact = str | float | bool
Facts = dict[str, Fact]
Lines = Mapping[str, str]
"""By kind and id ("conductor P11.out"), the facts as JSON text on one line; the same facts are the same text."""

BOAT = "boat"
"""The kind and name of the line that holds what belongs to no single thing."""


@dataclass(frozen=True, slots=True)
class Aboard:
    """Hold the lines of one boat, and which conductors the yard measures in feet."""

    lines: Lines = field(default_factory=dict)
    in_feet: frozenset[str] = frozenset()


NOT_TOLD: Mapping[str, tuple[str, ...]] = {
    # What follows from other lines, or is how the yard spells it.
    "Device": ("circuit", "served", "part", "legends", "mounts"),
    "Conductor": ("circuit", "length_unit", "route_m", "cable", "ends"),
    "Circuit": ("conductors", "device"),
    "Overcurrent": ("series", "band", "posts"),
    **dict.fromkeys(("Battery", "Bus", "Metal", "Switch", "Diode", "Shunt", "Cable"), ("posts",)),
}
"""Attributes that are no facts of their own, by record; those that are told otherwise are added in this module."""


UNKNOWN_UNLESS_WRITTEN = (
    "bilge_water", "hydrogen_vent", "fuel_parts", "covered", "marked", "in_line_with_fuel", "case_isolated",
    "internal_fuse", "ac", "workmanship_fuse_marks", "workmanship_switch_marks",
)  # fmt: skip
"""Yes-or-no facts that nobody recorded where they are not written."""
TRUE_UNLESS_WRITTEN = ("bundled", "trip_free", "by_hand", "judges_drop")
"""Yes-or-no facts that hold where they are not written; all others do not."""


def aboard_of(boat: Boat) -> Aboard:
    """Return the lines of a boat, in a fixed order."""
    lines = {f"{kind} {name}" if name else kind: line_of(facts) for kind, name, facts in _things(boat)}
    return Aboard(lines, frozenset(c.id for c in boat.conductors.values() if c.length_unit == "ft"))


def facts_of(line: str) -> Facts:
    """Return the facts of a line."""
    facts: Facts = json.loads(line)
    return facts


_ENCODER = json.JSONEncoder(ensure_ascii=False, separators=(", ", ": "))


def line_of(facts: Facts) -> str:
    """Return the line of some facts."""
    return _ENCODER.encode(facts)


def _things(boat: Boat) -> Iterator[tuple[str, str, Facts]]:
    yield BOAT, "", _boat(boat)
    for kind, records in (
        ("zone", boat.zones), ("way", boat.ways), ("circuit", boat.circuits), ("condition", boat.conditions),
    ):  # fmt: skip
        for name, record in records.items():
            yield kind, name, _facts(record)
    for name, device in boat.devices.items():
        yield "device", name, _device(device)
    usual = _usual(boat.workmanship)
    for name, conductor in boat.conductors.items():
        facts = _conductor(conductor)
        yield "conductor", name, {key: fact for key, fact in facts.items() if (key, fact) not in usual}
    for joint in boat.joints:
        yield "joint", joint.id, _facts(joint)
    for shield in boat.shields or ():
        yield "shield", shield.id, _shield(shield)
    for row in boat.switch_rows:
        yield "state", row.id, _facts(row)
    for engine in boat.engines:
        yield "engine", engine.id, _facts(engine)
    for post, stacks in boat.landings.items():
        for stack in stacks:
            yield "stack", f"{post} {stack.stud}", {"conductors": ", ".join(stack.conductors)}
    yield from _parts(boat)


def _boat(boat: Boat) -> Facts:
    facts: Facts = {"system_voltage_v": _number(boat.system_voltage_v), "reference": boat.reference}
    facts["generator_fuel"] = boat.generator_fuel
    facts["shields_recorded"] = boat.shields is not None
    facts["bonds_recorded"] = boat.bonds_recorded
    if boat.has_ac is not None:
        facts["ac"] = boat.has_ac
    if boat.monitored is not None:
        facts["monitored"] = ", ".join(boat.monitored) or "none"
    facts |= {f"workmanship_{key}": value for key, value in _facts(boat.workmanship).items()}
    return facts


def _device(device: Device) -> Facts:
    facts: Facts = {"part": device.part.id}
    if isinstance(device.part, Overcurrent):
        facts["rating_a"] = _number(device.part.rating_a)
    facts |= _facts(device)
    if device.circuit:
        facts["circuit"] = device.circuit
    if device.mounts:
        facts["mounted_on"] = _text(device.mounts)
    if device.legends:
        facts["legend"] = "; ".join(text for text, _ in device.legends)
    return facts


def _usual(workmanship: Workmanship) -> frozenset[tuple[str, Fact]]:
    """Return what the class says once of all its conductors: their own lines do not repeat it."""
    told = _facts(workmanship)
    ends = {"terminal": "terminal", "ring_as_stud": "hole_as_stud", "barrel_as_conductor": "barrel_as_conductor"}
    usual = {(f"{end}_{key}", told[one]) for one, key in ends.items() for end in ("start", "end") if one in told}
    own = {"labels": "labelled", "passages": "passage", "supports_m": "supports_m"}
    return frozenset(usual | {(key, told[one]) for one, key in own.items() if one in told})


def _conductor(conductor: Conductor) -> Facts:
    facts: Facts = {"cable": conductor.cable.id, **_facts(conductor)}
    if conductor.label == conductor.id:
        facts.pop("label", None)
    if conductor.circuit:
        facts["circuit"] = conductor.circuit
    for which, end in zip(("start", "end"), conductor.ends, strict=True):
        facts |= {f"{which}_{key}": value for key, value in _facts(end).items()}
    if conductor.route_m is not None and not math.isclose(conductor.route_m, conductor.length_m, rel_tol=1e-9):
        facts["measured"] = True  # its own length counts, not that of its ways
    return facts


def _shield(shield: Shield) -> Facts:
    return {"joins": "not recorded" if shield.joins is None else ", ".join(shield.joins) or "nothing"}


def _parts(boat: Boat) -> Iterator[tuple[str, str, Facts]]:
    """Yield the parts that the boat uses; a fuse series once for each rating that is aboard."""
    parts: dict[str, Part] = {}
    for device in boat.devices.values():
        parts.setdefault(part_name(device.part), device.part)
    for conductor in boat.conductors.values():
        parts.setdefault(part_name(conductor.cable), conductor.cable)
    for name, part in sorted(parts.items()):
        facts: Facts = {"kind": type(part).__name__.lower(), **_facts(part)}
        if isinstance(part, Overcurrent) and part.band is not None:
            facts["band"] = part.band.id
            facts["band_points"] = _text(part.band.points)
            if part.band.engine_space_factor is not None:
                facts["band_engine_space_factor"] = part.band.engine_space_factor
        yield "part", name, facts


def part_name(part: Part) -> str:
    """Return the id of a part, with the rating where it is a fuse or breaker."""
    return f"{part.id} {part.rating_a:g} A" if isinstance(part, Overcurrent) else part.id


def part_names(device: Facts) -> tuple[str, ...]:
    """Return the name of a device's part, as `part_name` gives it, from the device's facts."""
    rating = device.get("rating_a")
    part = str(device.get("part", ""))
    return (f"{part} {rating:g} A",) if isinstance(rating, int | float) else (part,)


@cache
def told_attributes(record: Any) -> tuple[tuple[str, str, Any], ...]:
    """Return the attributes of a record that are facts: name, key in the lines, value that says nothing."""
    left_out = NOT_TOLD.get(record.__name__, ())
    return tuple(
        (one.name, _key(one.name), _default(one))
        for one in fields(record)
        if one.name not in ("id", *left_out) and one.name != "at" and not one.name.startswith("at_")
    )


def _key(attribute: str) -> str:
    return attribute.removeprefix("is_").removeprefix("has_")


def _default(one: Any) -> Any:
    if one.default is not MISSING:
        return one.default
    return one.default_factory() if one.default_factory is not MISSING else MISSING


def _facts(record: Any) -> Facts:
    facts: Facts = {}
    for attribute, key, default in told_attributes(record.__class__):
        value = getattr(record, attribute)
        if value is None or value in ("", ()) or (default is not MISSING and value == default):
            continue
        if is_dataclass(value) and not isinstance(value, Size | type):
            facts |= _facts(value)
        else:
            facts[key] = value if isinstance(value, bool) else _fact(value)
    return facts


def _fact(value: Any) -> Fact:
    return _number(value) if isinstance(value, int | float) else _text(value)


def _number(value: float) -> Fact:
    """Round as the JSON result does, so that the same length in feet and in metres is the same text."""
    if math.isinf(value):
        return "unlimited"
    rounded = float(f"{value:.9g}")
    return int(rounded) if rounded.is_integer() and abs(rounded) < 1e15 else rounded


def _text(value: Any, *, is_row: bool = False) -> str:
    """Return a value as short text; a list with commas, each row in it without."""
    if isinstance(value, str | Size):
        return value if isinstance(value, str) else value.text
    if isinstance(value, int | float):
        return ("yes" if value else "no") if isinstance(value, bool) else str(_number(value))
    if is_dataclass(value) and not isinstance(value, type):
        pairs = {one.name: getattr(value, one.name) for one in fields(value) if not one.name.startswith("at")}
        return " ".join(f"{name} {_text(told)}" for name, told in pairs.items() if told not in (None, "", False))
    if isinstance(value, Iterable):
        items = list(value)
        return (" " if is_row else ", ").join(_text(item, is_row=True) for item in items)
    return str(value)
