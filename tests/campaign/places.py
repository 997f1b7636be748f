"""Answer what planters ask of a design: where a conductor lies, what it carries, how long it is."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.planting import Design, Row

METRES = {"m": 1.0, "ft": 0.3048, "in": 0.0254, "cm": 0.01, "mm": 0.001}

Place = tuple[tuple[str, ...], str, Row]
"""Path, id and row of a conductor."""


def metres(text: str) -> float:
    """Return a length: "0.3 m", "16 ft 5 in"."""
    words = text.split()
    return sum(float(value) * METRES[unit] for value, unit in zip(words[::2], words[1::2], strict=True))


def ampere(text: str) -> float:
    """Return a current: "30 A"."""
    return float(text.split(maxsplit=1)[0])


def route_m(design: Design, row: Row) -> float | None:
    """Return the ways of a conductor or branch added up, with its tail; None where it has no route."""
    if "route" not in row:
        return None
    ways = design.section("ways")
    return sum(metres(ways[name]["length"]) for name in row["route"]) + metres(row.get("tail") or "0 m")


def length_m(design: Design, row: Row) -> float:
    """Return the length of a conductor or branch: as measured, else by its route."""
    if "length" in row:
        return metres(row["length"])
    route = route_m(design, row)
    assert route is not None
    return route


def device_of(design: Design, post: str) -> str:
    """Return the device that a post belongs to."""
    return post if post in design.section("devices") else post.rpartition(".")[0]


def kind_of(design: Design, post: str) -> str:
    """Return the kind of part that a post belongs to, empty where it is no device written by itself."""
    device = design.section("devices").get(device_of(design, post))
    return str(design.parts[device["part"]]["kind"]) if device else ""


def crosses_engine_space(design: Design, row: Row) -> bool:
    """Tell whether a conductor has an end or a way in an engine space."""
    devices, zones, ways = (design.section(name) for name in ("devices", "zones", "ways"))
    ends = [devices[device_of(design, post)]["zone"] for post in (row["from"], row["to"])]
    own = [*ends, *(ways[name]["zone"] for name in row.get("route") or ())]
    return any(zones[name].get("engine_space") for name in own)


def engine_zone(design: Design) -> str:
    """Return the engine space."""
    return next(name for name, zone in sorted(design.section("zones").items()) if zone.get("engine_space"))


def current_a(design: Design, path: tuple[str, ...], row: Row) -> float | None:
    """Return what a conductor is meant to carry: its own current, else its circuit's; None where neither says."""
    if "current" in row:
        return ampere(row["current"])
    circuit = design.section("circuits").get(path[1]) if path[0] == "circuits" else None
    return ampere(circuit["current"]) if circuit else None


def trunk(design: Design) -> Iterator[Place]:
    """Yield the conductors written one by one that no role frees from a rule and that are no part of a bank."""
    for path, name, row in design.conductors():
        if row.get("role", "") in ("", "engine-harness", "sense"):
            yield path, name, row


def is_return(design: Design, row: Row) -> bool:
    """Tell whether a conductor leads from a load, source or return bus back to a battery: its posts say so."""
    backs = {"neg", "case", "gnd", "bat", "sys", "batneg", "pvneg", "inneg", "outneg"}
    buses = {design.section("class")["reference"]}
    for name, device, _ in design.devices("bus"):
        if "negative" in device.get("name", "") or any(
            name == other.get("positions", {}).get("returns") for _, other, _ in design.devices("bus")
        ):
            buses.add(name)
    return any(post in buses or post.rpartition(".")[2] in backs for post in (row["from"], row["to"]))
