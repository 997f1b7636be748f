"""Plant faults of how loads are fed and switched, and of what opens or doubles a device."""

from __future__ import annotations

import itertools
from collections.abc import Iterator

from tests.campaign.planting import Design, Plant, Row, at, fault, merged, trap

DIGITS = "0123456789"


def ampere(text: str) -> float:
    """Return a current: "30 A"."""
    return float(text.removesuffix(" A"))


@fault("PRO-08")
def switch_in_a_return(design: Design) -> Iterator[Plant]:
    """A hand switch or a fuse stands in the return of a circuit."""
    switch, zone = ("battery-switch", "LOCKER") if design.is_small else ("battery-switch-400", "Z-BATT")
    for path, _, row in design.conductors():
        if row["to"] != "BUS-N" or row.get("role"):
            continue
        rest = {key: value for key, value in row.items() if key not in ("from", "route", "tail", "note")}
        rest["length"] = "0.1 m"
        devices = {"ZSW": {"part": switch, "zone": zone}}
        new = at(*path[:-1], {"Z1": {**rest, "from": "ZSW.out", "to": "BUS-N"}})
        follows = (
            "voltage-drop", "voltage-drop-from-bank", "solved-drop",  # the switch and its lead drop something
            "charger-cut-off", "alternator-cut-off",  # a source whose return is off feeds nothing
        )  # fmt: skip
        change = merged({"devices": devices}, at(*path, {"to": "ZSW.in"}), new)
        change = merged(change, _closed_everywhere(design, "ZSW"))
        yield Plant(change, finds=[("switched-return", "ZSW")], line="ZSW", follows=follows)


def _closed_everywhere(design: Design, switch: str) -> Row:
    """Return the change that closes a switch in every condition that names switches."""
    rows = {name for name, row in design.section("conditions").items() if row.get("switches")}
    return {"conditions": {name: {"switches": {switch: "closed"}} for name in sorted(rows)}} if rows else {}


def single_devices(design: Design) -> Iterator[tuple[str, Row, Row]]:
    """Yield the overcurrent devices that are written one by one and stand in a feed."""
    for kind in ("fuse", "breaker"):
        yield from design.devices(kind)


@fault("PRO-27")
def doubled_device(design: Design) -> Iterator[Plant]:
    """A second device is bolted beside a first to gain rating."""
    for name, row, _ in single_devices(design):
        twin = {key: value for key, value in row.items() if key in ("part", "zone", "rating")}
        twin["mount"] = {"line": f"{name}.line", "load": f"{name}.load"}
        follows = (
            "double-feed", "device-rating", "size-step", "bus-rating", "maker-device",  # together they let twice through
            "return-protection", "far-end-clearing", "selectivity", "rating-order", "conductor-withstand",
            "source-device",
            "heavy-motor",  # neither of the two parts a motor
        )  # fmt: skip
        line = "rating" if "rating" in twin else "part"
        yield Plant(at("devices", "ZTWIN", twin), finds=[("paralleled-devices", "ZTWIN")], line=line, follows=follows)


def branch_pairs(design: Design) -> Iterator[tuple[str, str]]:
    """Yield neighbouring branches on different positions of one panel."""
    rows = [(name, row) for name, row, _ in design.branches()]
    for (first, a), (second, b) in itertools.pairwise(rows):
        if a["feed"] != b["feed"] and a["feed"].rstrip(DIGITS) == b["feed"].rstrip(DIGITS):
            yield first, second


SECOND_FEED_FOLLOWS = (
    "double-feed",  # both devices add up on the branch's conductor
    "return-protection",
    "bus-rating",
    "maker-device",
    "selectivity",
    "rating-order",
    "ahead-of-switch",  # the second feed may stay live
    "standby-days",
    "device-rating",
    "far-end-clearing",  # a fault at the load is shared by the two devices
    "polarised-device",  # current passes the other device backwards
    "means-off",  # and with it the load has no switch at all
    "solved-rating",  # it feeds the other bus as well
    "light-circuits",  # two lights are on at once
)  # fmt: skip


def second_feed(design: Design, bus: str, branch: str, rating: str, part: str) -> Row:
    """Return the change that feeds the load of a branch from another bus as well."""
    zone = design.section("devices")[bus]["zone"]
    post = design.parts[design.section("circuits")[branch]["load"]].get("feed_post", "pos")
    devices = {"ZFEED": {"part": part, "zone": zone, "rating": rating, "mount": {"line": bus}}}
    wire = {
        "from": "ZFEED.load", "to": f"{branch}.load.{post}", "size": "10 AWG", "length": "2 m",
    }  # fmt: skip
    service = design.section("circuits")[branch]["service"]
    circuit = {"name": "Second feed", "service": service, "current": "0.1 A", "conductors": {"Z1": wire}}
    return {"devices": devices, "circuits": {"ZSECOND": circuit}}


@fault("LOD-06")
def load_on_two_circuits(design: Design) -> Iterator[Plant]:
    """A load is fed by a second breaker of the same panel."""
    bus, part = ("PANEL", "panel-breaker") if design.is_small else ("BUS-PP", "panel-breaker")
    for name, row, _ in design.branches():
        panel = "P" if design.is_small else "PNL"
        if not row["feed"].startswith(panel) or (row["feed"] == "PNL-01"):
            continue  # two lights share PNL-01
        change = second_feed(design, bus, name, row["protect"], part)
        yield Plant(change, finds=[("two-feeds", f"{name}.load")], line=row["load"], follows=SECOND_FEED_FOLLOWS)


@fault("LOD-05")
def pump_on_two_panels(design: Design) -> Iterator[Plant]:
    """A pump has a feed from each of two buses, and they meet at the motor."""
    for name, row, load in design.branches():
        if not load.get("motor"):
            continue
        if design.is_small:
            bus, part, rating = "BUS-P", "blade-fuse", "15 A"
        elif row["feed"].startswith("24H"):
            bus, part, rating = "BUS-PP", "panel-breaker", row["protect"]
        else:
            bus, part, rating = "BUS-24H", "block-fuse", "5 A"
        change = second_feed(design, bus, name, rating, part)
        yield Plant(change, finds=[("two-feeds", f"{name}.load")], line=row["load"], follows=SECOND_FEED_FOLLOWS)


@fault("LOD-07")
def lamp_between_two_feeds(design: Design) -> Iterator[Plant]:
    """An indicator lamp hangs between the feeds of two branches."""
    part, zone = ("bow-light", "CABIN") if design.is_small else ("gauges", "Z-NAV")
    for first, second in branch_pairs(design):
        posts = [
            f"{name}.load.{design.parts[design.section('circuits')[name]['load']].get('feed_post', 'pos')}"
            for name in (first, second)
        ]
        conductors = {
            "Z1": {"from": posts[0], "to": "ZLAMP.pos", "size": "16 AWG", "length": "0.3 m"},
            "Z2": {"from": "ZLAMP.neg", "to": posts[1], "size": "16 AWG", "length": "0.3 m"},
        }
        circuit = {"name": "Indicator", "service": "gauges", "current": "0.1 A", "conductors": conductors}
        change = {"devices": {"ZLAMP": {"part": part, "zone": zone}}, "circuits": {"ZLAMP": circuit}}
        follows = (
            "load-voltage",  # with both circuits on it stands across nothing
            "size-step", "device-rating",  # thin leads behind the larger of the two devices
            "return-protection",
            "voltage-drop", "voltage-drop-from-bank", "solved-drop",  # its current comes by way of another branch
            "light-circuits", "radio-device",  # whose breaker was to feed nothing else
        )  # fmt: skip
        yield Plant(change, finds=[("sneak-path", "ZLAMP")], line="ZLAMP", follows=follows)


@fault("LOD-08")
def heavy_motor_that_shares_its_device(design: Design) -> Iterator[Plant]:
    """A second load hangs behind the device of a heavy motor."""
    if design.is_small:
        parts = {"winch-60": {**_winch(design), "max_device": "80 A"}}
        devices = {
            "ZWINCH": {"part": "winch-60", "zone": "BOW"},
            "ZFUSE": {"part": "bolt-fuse", "zone": "LOCKER", "rating": "80 A", "mount": {"line": "BUS-P"}},
        }
        conductors = {
            "Z1": {"from": "ZFUSE.load", "to": "ZWINCH.pos", "size": "2 AWG", "length": "2 m"},
            "Z2": {"from": "ZWINCH.neg", "to": "BUS-N", "size": "2 AWG", "length": "2 m", "colour": "yellow"},
        }
        circuit = {"name": "Winch", "service": "windlass", "current": "60 A", "conductors": conductors}
        change = {"devices": devices, "circuits": {"ZWINCH": circuit}}
        yield Plant(change, finds=[("heavy-motor", "ZWINCH")], line="ZWINCH", parts=parts)
        return
    for options, device, motor in (([], "CB-WL", "WINDLASS"), (["OPT-THR12"], "SW-THR", "THRUSTER")):
        post = f"{device}.load" if device == "CB-WL" else f"{device}.out"
        thick = "1/0 AWG" if device == "CB-WL" else "4/0 AWG"
        conductors = {
            "Z1": {"from": post, "to": "ZLAMP.pos", "size": thick, "length": "0.3 m"},
            "Z2": {"from": "ZLAMP.neg", "to": "BUS-N", "size": thick, "length": "0.3 m", "colour": "yellow"},
        }
        circuit = {"name": "Foot switch lamp", "service": "gauges", "current": "0.3 A", "conductors": conductors}
        change = {"devices": {"ZLAMP": {"part": "gauges", "zone": "Z-BATT"}}, "circuits": {"ZLAMP": circuit}}
        follows = ("terminal-range", "barrel-size")  # the lamp is too small for the wire that this device asks for
        yield Plant(change, finds=[("heavy-motor", motor)], line=motor, options=options, follows=follows)


def _winch(design: Design) -> Row:
    return {
        **design.parts["cooling-pump"], "current": "60 A", "stall_protection": "thermal", "terminal": "stud",
        "stud": "M8", "cover": True, "torque": "10 Nm", "smallest_size": "16 AWG", "largest_size": "4/0 AWG",
    }  # fmt: skip


@fault("LOD-10")
def load_without_a_switch(design: Design) -> Iterator[Plant]:
    """A load is fused straight from what stays live, and has no switch."""
    change: Row = {}
    if design.is_small:
        devices = {
            "ZFUSE": {"part": "bolt-fuse", "zone": "LOCKER", "rating": "30 A", "mount": {"line": "BAT-H.pos"}},
            "ZBLOCK": {
                "part": "bus-100", "zone": "LOCKER",
                "positions": {"first": "Z1", "last": "Z4", "takes": "blade-fuse", "returns": "BUS-N"},
            },
        }  # fmt: skip
        wire = {"from": "ZFUSE.load", "to": "ZBLOCK", "size": "8 AWG", "length": "0.5 m"}
        circuit = {"name": "Always on", "service": "feeder", "current": "5 A", "conductors": {"ZW": wire}}
        change = {"devices": devices, "circuits": {"ZBLOCK": circuit}}
    position, ratings = ("Z1", ("5 A", "10 A", "15 A")) if design.is_small else ("24H-6", ("5 A", "7.5 A"))
    for name, row, _ in design.branches():
        if row["protect"] not in ratings or row["service"] in ("alarm", "gauges", "bilge-pump"):
            continue
        follows = (
            "ahead-of-switch", "standby-days",  # it stays live with the battery switch off
            "light-circuits",  # and so does a light
        )  # fmt: skip
        move = at("circuits", name, {"feed": position})
        yield Plant(merged(change, move), finds=[("means-off", f"{name}.load")], line=row["load"], follows=follows)


@fault("PRO-28")
def motor_that_its_device_never_stops(design: Design) -> Iterator[Plant]:
    """A motor that only its device protects draws less than that opens at when it is held fast."""
    for name, row, load in design.branches():
        if not load.get("motor"):
            continue
        for factor in (0.9, 1.1):
            stalled = f"{ampere(row['protect']) * factor:g} A"
            part, parts = design.part_like(row["load"], {"stall_protection": "device", "stall_current": stalled})
            change = at("circuits", name, {"load": part})
            yield Plant(change, finds=[("stalled-motor", f"{name}.load")], line=part, parts=parts)


@trap("T-33")
def isolator_beside_the_load(design: Design) -> Iterator[Plant]:
    """A device of the same rating stands in series with another: a local isolator that guards nothing."""
    feeds = {row["from"]: (path, name) for path, name, row in design.conductors()}
    for name, row, _ in single_devices(design):
        if f"{name}.load" not in feeds or design.section("zones")[row["zone"]].get("engine_space"):
            continue  # with a device under it, it is a main device, and those want to be in reach
        path, _ = feeds[f"{name}.load"]
        # Without a resistance, so that no drop that is thin already tips over.
        changes: Row = {"resistance": None}
        if "rating" in row:
            changes["ratings"] = {row["rating"]: {}}
        part, parts = design.part_like(row["part"], changes)
        twin = {**{key: row[key] for key in ("zone", "rating") if key in row}, "part": part}
        twin["mount"] = {"line": f"{name}.load"}
        change = merged(at("devices", "ZISO", twin), at(*path, {"from": "ZISO.load"}))
        yield Plant(change, parts=parts)
