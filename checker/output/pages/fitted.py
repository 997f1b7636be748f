"""Tell on a hull's page what is fitted: devices, spare fuses, wires and terminals."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.parts import Overcurrent
from checker.checks.words import ampere
from checker.output.pages.dossier import Dossier
from checker.output.pages.html import Section, columns, paragraph, table
from checker.output.pages.tested import NOT_DONE, step_verdict
from checker.output.part_lists import device_schedule, kind_words
from checker.output.wire_lists import landing_list, wire_list
from checker.result.gather import natural
from checker.result.sheet import FITTED


def devices(dossier: Dossier) -> Section:
    """Tell each fuse and breaker as scheduled and as fitted, and every other device."""
    headings = ("device", "kind, part", "place", "serves", "scheduled", "fitted", "verdict", "breaks", "legend")
    schedule = device_schedule(dossier.aboard)
    others = [row for row in columns(schedule, _OTHERS) if row[2] not in ("fuse", "breaker")]
    return Section("devices", "Device schedule as fitted", (
        table("protective", "Fuses and breakers: scheduled against fitted", headings, _protective(dossier)),
        table("others", "Other devices", _OTHERS, others),
    ), is_wide=True)  # fmt: skip


_OTHERS = ("device", "name", "kind", "part", "zone", "rating (A)", "voltage (V)", "bank", "fixed by", "thread",
           "torque (Nm)", "cover", "ignition protected", "ingress")  # fmt: skip


def _in_order(dossier: Dossier) -> list[Device]:
    return sorted(dossier.boat.devices.values(), key=lambda device: natural(device.id))


def _protective(dossier: Dossier) -> Iterator[tuple[str, ...]]:
    steps = {step.part: step for step in dossier.handover.steps if step.kind == FITTED}
    sheet = dossier.handover.sheet
    for device in _in_order(dossier):
        part = device.part
        if not isinstance(part, Overcurrent):
            continue
        step = steps.get(device.id)
        reading = sheet.readings.get(step.id) if sheet and step else None
        fitted = "not read" if reading is None or reading.value is None else ampere(reading.value)
        yield (
            device.id, f"{kind_words(part)}, {part.id}", dossier.aboard.zone_words(device.zone), dossier.served(device),
            ampere(part.rating_a), fitted, step_verdict(step, dossier) if step else NOT_DONE,
            "not written" if part.interrupting_a is None else ampere(part.interrupting_a),
            " / ".join(legend for legend, _ in device.legends),
        )  # fmt: skip


def spares(dossier: Dossier) -> Section:
    """Tell which fuses to carry, by type and rating, with the positions that each serves."""
    found: dict[tuple[str, float], list[str]] = {}
    for device in _in_order(dossier):
        if isinstance(device.part, Overcurrent) and not device.part.is_breaker:
            found.setdefault((device.part.id, device.part.rating_a), []).append(device.id)
    rows = [
        (part, dossier.aboard.part_names.get(part, ""), ampere(rating_a), len(where), ", ".join(where))
        for (part, rating_a), where in sorted(found.items(), key=lambda row: (natural(row[0][0]), row[0][1]))
    ]
    headings = ("type", "name", "rating", "fitted", "positions")
    return Section("spares", "Spare fuses by type and position", (
        paragraph("Replace a fuse by the same type and rating only, and find first what blew it."),
        table("spare-fuses", "Spare fuses", headings, rows) if rows else paragraph("No fuse is aboard."),
    ))  # fmt: skip


def wires(dossier: Dossier) -> Section:
    """Tell every conductor as built."""
    listed = wire_list(dossier.aboard)
    length = next(heading for heading in listed.headings if heading.startswith("length ("))
    wanted = ("conductor", "circuit", "from post", "from terminal", "to post", "to terminal", "size", "colour", length,
              "length is", "cable", "label", "ways", "passage")  # fmt: skip
    return Section("wires", "Wire list as built", (
        table("wire-list", "Conductors", wanted, columns(listed, wanted)),
    ), is_wide=True)  # fmt: skip


_LANDING = ("post", "zone", "fixed by", "thread", "stud", "place on stud", "conductor", "size", "colour", "terminal",
            "torque (Nm)", "other end")  # fmt: skip


def landings(dossier: Dossier) -> Section:
    """Tell every terminal at every post, in the order in which they are put on."""
    return Section("landings", "Landing list as built", (
        table("landing-list", "Terminals by post, the lowest on a stud first", _LANDING,
              columns(landing_list(dossier.aboard), _LANDING)),
    ), is_wide=True)  # fmt: skip
