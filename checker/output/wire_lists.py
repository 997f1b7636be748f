"""List the conductors of one boat: what to cut and pull, what lands where, what to print on labels."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Boat, Conductor, Device
from checker.boat.parts import Bus, Overcurrent, Switch
from checker.checks.landed import BOLTED, Landed, landed_aboard
from checker.checks.words import ampere
from checker.output.aboard import Aboard
from checker.output.csv_table import Cell, Table
from checker.result.gather import natural
from checker.units import foot_pound_from_newton_metre

AS_MADE = ("plug", "lead")
"""Kinds of post that come with an end of their own."""

Ends = dict[tuple[str, int], Landed]


def _ends(boat: Boat) -> Ends:
    """Return each terminal by its conductor and end: 0 the start, 1 the end."""
    listed = landed_aboard(boat)
    return {(one.conductor.id, number % 2): one for number, one in enumerate(listed)}


def _in_order(boat: Boat) -> list[Conductor]:
    return sorted(boat.conductors.values(), key=lambda c: (natural(c.circuit), natural(c.id)))


def wire_list(aboard: Aboard) -> Table:
    """Return a row for each conductor: ends, size, colour, length as fitted, way, label."""
    unit = aboard.length_unit
    headings = (
        "conductor", "circuit", "circuit name", "from post", "from zone", "from terminal", "to post", "to zone",
        "to terminal", "size", "colour", f"length ({unit})", "length is", "cable", "cores", "label", "labelled",
        "ways", "zones", "passage", f"covered ({unit})", "largest spacing of supports (mm)", "role", "bonding",
    )  # fmt: skip
    ends = _ends(aboard.boat)
    return Table(headings, [_wire_row(aboard, wire, ends) for wire in _in_order(aboard.boat)])


def _wire_row(aboard: Aboard, wire: Conductor, ends: Ends) -> tuple[Cell, ...]:
    start, end = ends[wire.id, 0], ends[wire.id, 1]
    is_routed = wire.route_m is not None and wire.route_m == wire.length_m
    return (
        wire.id, wire.circuit, aboard.circuit_name(wire),
        wire.start, aboard.zone_words(start.device.zone), _terminal(start),
        wire.end, aboard.zone_words(end.device.zone), _terminal(end),
        wire.size.text, _colour(wire), aboard.length(wire.length_m), "by its ways" if is_routed else "as written",
        wire.cable.id, wire.cable.cores, wire.label, wire.labelled or "not recorded",
        " > ".join(wire.ways), " > ".join(map(aboard.zone_words, wire.zones)), wire.passage or "not recorded",
        aboard.length(wire.enclosed_m), None if wire.supports_m is None else round(wire.supports_m * 1000),
        wire.role, "yes" if wire.is_bond else "",
    )  # fmt: skip


def _colour(wire: Conductor) -> str:
    return f"{wire.colour}, marked at its ends" if wire.colour and wire.is_colour_marked else wire.colour


def _terminal(one: Landed) -> str:
    """Tell what is crimped on at an end: ring M10; an end that the post brings along is named after it."""
    if one.kind in AS_MADE:
        return f"{one.kind} of the device"
    terminal = one.end.terminal or "not recorded"
    return " ".join(filter(None, (terminal, hole_of(one))))


def hole_of(one: Landed) -> str:
    """Return the thread that a ring is made for, "" where it is not known or no ring is meant."""
    if one.end.terminal not in ("ring", "lug") or one.kind not in (*BOLTED, ""):
        return ""
    return one.end.hole or (one.thread if one.end.hole_as_stud else "")


def barrel_of(one: Landed) -> str:
    """Return the size that the barrel at an end is made for, "" where it is not known."""
    if one.end.barrel is not None:
        return one.end.barrel.text
    return one.conductor.size.text if one.end.barrel_as_conductor else ""


def landing_list(aboard: Aboard) -> Table:
    """Return a row for each terminal at each post, in the order in which they are put on, with the torque."""
    headings = (
        "post", "device", "device name", "zone", "fixed by", "thread", "stud", "place on stud", "conductor", "label",
        "circuit", "size", "colour", "terminal", "barrel for", "torque (Nm)", "torque (ft-lb)", "other end",
    )  # fmt: skip
    boat = aboard.boat
    places = {
        (stack.post, name): (stack.stud, place)
        for stacks in boat.landings.values()
        for stack in stacks
        for place, name in enumerate(stack.conductors, 1)
    }
    rows = [
        *(_landing_row(aboard, one, places.get((one.post, one.conductor.id))) for one in landed_aboard(boat)),
        *_mounted_rows(aboard),
    ]
    # By post, stud and place on it; what no stack names follows by conductor.
    rows.sort(key=lambda row: (natural(str(row[0])), natural(str(row[6] or "~")), row[7] or 0, natural(str(row[8]))))
    return Table(headings, rows)


def _landing_row(aboard: Aboard, one: Landed, place: tuple[str, int] | None) -> tuple[Cell, ...]:
    wire, device = one.conductor, one.device
    torque_nm = _torque_nm(one)
    stud, number = place or (None, None)
    return (
        one.post, device.id, aboard.device_names.get(device.id, ""), aboard.zone_words(device.zone),
        one.kind or "not recorded", one.thread if one.kind in BOLTED else "", stud, number, wire.id, wire.label,
        wire.circuit, wire.size.text, _colour(wire), _terminal(one), barrel_of(one) if one.kind not in AS_MADE else "",
        torque_nm, None if torque_nm is None else round(foot_pound_from_newton_metre(torque_nm), 2),
        wire.end if one.post == wire.start else wire.start,
    )  # fmt: skip


def _torque_nm(one: Landed) -> float | None:
    """Return the torque of a terminal; a bar's is that of its studs and would strip its small screws."""
    is_small_screw = one.on_screw and isinstance(one.device.part, Bus) and bool(one.device.part.studs)
    return None if one.kind in AS_MADE or is_small_screw else one.fittings.torque_nm


def _mounted_rows(aboard: Aboard) -> Iterator[tuple[Cell, ...]]:
    """Tell the devices that stand on a post without a conductor."""
    for device in aboard.boat.devices.values():
        for own, post in device.mounts:
            holder = aboard.boat.device_of(post)
            assert holder is not None, post
            what = f"{device.id}.{own}" if own else device.id
            yield (
                post, holder.id, aboard.device_names.get(holder.id, ""), aboard.zone_words(holder.zone),
                "mounted", "", None, None, "", "", device.circuit, "", "", f"{what} stands on it", "", None, None, what,
            )  # fmt: skip


def label_list(aboard: Aboard) -> Table:
    """Return a row for each label to print: at the ends of conductors, beside devices, on panels."""
    headings = ("text", "kind", "goes on", "near post", "zone", "circuit", "circuit name", "size", "recorded as fitted")
    rows = [row for wire in _in_order(aboard.boat) for row in _wire_labels(aboard, wire)]
    devices = sorted(aboard.boat.devices.values(), key=lambda device: natural(device.id))
    rows += [row for device in devices for row in _device_labels(aboard, device)]
    return Table(headings, rows)


def _wire_labels(aboard: Aboard, wire: Conductor) -> Iterator[tuple[Cell, ...]]:
    ends = {"both": (0, 1), "from": (0,), "to": (1,), "none": ()}.get(wire.labelled, (0, 1))
    for number in ends:
        post = (wire.start, wire.end)[number]
        device = aboard.boat.device_of(post)
        zone = aboard.zone_words(device.zone) if device else ""
        yield (
            wire.label, "conductor", f"{wire.id}, {('start', 'end')[number]}", post, zone, wire.circuit,
            aboard.circuit_name(wire), wire.size.text, "yes" if wire.labelled else "not recorded",
        )  # fmt: skip


def _device_labels(aboard: Aboard, device: Device) -> Iterator[tuple[Cell, ...]]:
    """Yield the legends of a device, and the mark that a fuse, breaker or hand switch needs."""
    zone, name = aboard.zone_words(device.zone), aboard.device_names.get(device.id, "")
    circuits = device.served or ((device.circuit,) if device.circuit else ())
    served = " + ".join(circuits)
    names = " + ".join(aboard.boat.circuits[c].name for c in circuits if c in aboard.boat.circuits)
    for legend, _ in device.legends:
        yield (legend, "legend", device.id, "", zone, served, names, "", "yes")
    if isinstance(device.part, Overcurrent):
        text = f"{device.id} {ampere(device.part.rating_a)}"
    elif isinstance(device.part, Switch) and device.part.by_hand:
        text = " ".join(filter(None, (device.id, name)))
    else:
        return
    fitted = {True: "yes", False: "no", None: "not recorded"}[device.is_marked]
    yield (text, "mark", device.id, "", zone, served, names, "", fitted)
