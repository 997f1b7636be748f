"""List the devices of one boat, and what to take from the store for it."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

from checker.boat.hull import Boat, Conductor, Device
from checker.boat.parts import Battery, Bus, Diode, Load, Metal, Overcurrent, Part, Shunt, Source, Switch
from checker.checks.landed import fittings_of, kind_of, landed_aboard
from checker.checks.words import ampere
from checker.output.aboard import Aboard
from checker.output.csv_table import Cell, Table
from checker.output.wire_lists import AS_MADE, hole_of
from checker.result.gather import natural
from checker.units import foot_pound_from_newton_metre

_KINDS: tuple[tuple[type[Part], str], ...] = (
    (Battery, "battery"), (Bus, "bus"), (Metal, "metal part"), (Switch, "switch"), (Diode, "diode"),
    (Shunt, "shunt"), (Load, "load"), (Source, "source"),
)  # fmt: skip


def kind_words(part: Part) -> str:
    """Name the kind of a part."""
    if isinstance(part, Overcurrent):
        return "breaker" if part.is_breaker else "fuse"
    return next((word for kind, word in _KINDS if isinstance(part, kind)), "cable")


def device_schedule(aboard: Aboard) -> Table:
    """Return a row for each device: what it is, where, its rating and legend, how it is fixed, its spare fuse."""
    headings = (
        "device", "name", "kind", "part", "part name", "zone", "serves", "serves names", "rating (A)", "voltage (V)",
        "breaks (A)", "spare fuse", "legend", "mark", "bank", "fixed by", "thread", "torque (Nm)", "torque (ft-lb)",
        "smallest conductor", "largest conductor", "cover", "ignition protected", "ingress",
    )  # fmt: skip
    devices = sorted(aboard.boat.devices.values(), key=lambda device: natural(device.id))
    return Table(headings, [_device_row(aboard, device) for device in devices])


def _device_row(aboard: Aboard, device: Device) -> tuple[Cell, ...]:
    part, fittings = device.part, fittings_of(device)
    circuits = device.served or ((device.circuit,) if device.circuit else ())
    rating_a, voltage_v, breaks_a = _ratings(part)
    torque_nm = fittings.torque_nm
    return (
        device.id, aboard.device_names.get(device.id, ""), kind_words(part), part.id,
        aboard.part_names.get(part.id, ""), aboard.zone_words(device.zone), " + ".join(circuits),
        " + ".join(aboard.boat.circuits[c].name for c in circuits if c in aboard.boat.circuits),
        rating_a, voltage_v, breaks_a, _spare(part), " / ".join(legend for legend, _ in device.legends),
        _said(device.is_marked), device.bank, kind_of(device), fittings.stud,
        torque_nm, None if torque_nm is None else round(foot_pound_from_newton_metre(torque_nm), 2),
        fittings.smallest.text if fittings.smallest else "", fittings.largest.text if fittings.largest else "",
        _said(device.is_covered), _said(getattr(part, "ignition_protected", None)), fittings.ingress,
    )  # fmt: skip


def _said(fact: bool | None) -> str:
    return "" if fact is None else "yes" if fact else "no"


def _ratings(part: Part) -> tuple[float | None, float | None, float | None]:
    """Return the rating of a part, A, its voltage, V, and what it can break, A, as far as it has them."""
    match part:
        case Overcurrent():
            return part.rating_a, part.voltage_v, part.interrupting_a
        case Load():
            return part.current_a, part.voltage_v, None
        case Battery():
            return None, part.voltage_v, None
        case Switch() | Diode():
            return part.continuous_a, None, None
        case _:  # a bus or shunt, a source; a metal part has none
            return getattr(part, "rating_a", getattr(part, "rated_a", None)), None, None


def _spare(part: Part) -> str:
    """Name the fuse to carry as a spare; a breaker needs none."""
    return f"{part.id} {ampere(part.rating_a)}" if isinstance(part, Overcurrent) and not part.is_breaker else ""


def parts_list(aboard: Aboard) -> Table:
    """Return sums: devices by part and rating, cable by type, size and colour, terminals by hole and size."""
    headings = ("kind", "part", "name", "rating or size", "colour", "quantity", "unit")
    return Table(headings, [*_device_sums(aboard), *_cable_sums(aboard), *_terminal_sums(aboard.boat)])


def _device_sums(aboard: Aboard) -> Iterator[tuple[Cell, ...]]:
    counts = Counter(
        (kind_words(device.part), device.part.id, device.part.rating_a if isinstance(device.part, Overcurrent) else 0.0)
        for device in aboard.boat.devices.values()
    )
    for (kind, part, rating_a), number in sorted(counts.items(), key=lambda row: (row[0][0], natural(row[0][1]), row)):
        rating = ampere(rating_a) if rating_a else ""
        yield (kind, part, aboard.part_names.get(part, ""), rating, "", number, "pcs")


def _cable_sums(aboard: Aboard) -> Iterator[tuple[Cell, ...]]:
    lengths_m: dict[tuple[str, float, str, str], float] = {}
    second_cores = set(_second_cores(aboard.boat))
    for wire in aboard.boat.conductors.values():
        if wire.id not in second_cores:
            colour = wire.colour if wire.cable.cores == 1 else " + ".join(wire.cable.core_colours)
            key = (wire.cable.id, -wire.size.area_mm2, wire.size.text, colour)
            lengths_m[key] = lengths_m.get(key, 0.0) + wire.length_m
    for (cable, _, size, colour), length_m in sorted(lengths_m.items()):
        name = aboard.part_names.get(cable, "")
        yield ("cable", cable, name, size, colour, aboard.length(length_m), aboard.length_unit)


def _second_cores(boat: Boat) -> Iterator[str]:
    """Yield the way back of each branch circuit that lies in one cable with its way out.

    Which other conductors share a cable is not written anywhere; each counts in full there, so
    that what is cut is never too short.
    """
    for circuit in boat.circuits.values():
        if circuit.load and len(circuit.conductors) == 2:
            out, back = (boat.conductors[name] for name in circuit.conductors)
            if out.cable.cores > 1 and _is_one_run(out, back):
                yield back.id


def _is_one_run(out: Conductor, back: Conductor) -> bool:
    return (out.cable, out.size, out.length_m, out.ways) == (back.cable, back.size, back.length_m, back.ways)


def _terminal_sums(boat: Boat) -> Iterator[tuple[Cell, ...]]:
    counts: Counter[tuple[str, str, float, str]] = Counter()
    for one in landed_aboard(boat):
        if one.kind not in AS_MADE and one.end.terminal not in ("", "bare"):
            size = one.end.barrel or one.conductor.size
            counts[one.end.terminal, hole_of(one), -size.area_mm2, size.text] += 1
    for (terminal, hole, _, text), number in sorted(counts.items()):
        yield ("terminal", " ".join(filter(None, (terminal, hole))), "", text, "", number, "pcs")
