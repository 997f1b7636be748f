"""Plant faults of the battery monitor: another bank at its shunt, its supply, its leads, its map, its settings."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.places import device_of, kind_of
from tests.campaign.planting import Design, Plant, Row, at, fault, merged, trap
from tests.campaign.plants_sources import ALONG, piece, posts

CRANKING: Row = {"role": "cranking", "reason": "cranking motor circuit"}


def shunts(design: Design) -> Iterator[tuple[str, Row, Row]]:
    """Yield the shunts."""
    yield from design.devices("shunt")


@fault("SHU-07")
def start_bank_on_the_shunt(design: Design) -> Iterator[Plant]:
    """The negative of the start battery lands on the bank's side of the house shunt."""
    negative = posts(design).negative
    for shunt, row, _ in shunts(design):
        others = {f"{name}.neg" for name, r, _ in design.devices("battery") if r["bank"] != row["measures"]}
        facing = [r for _, _, r in design.conductors() if f"{shunt}.bat" in (r["from"], r["to"])]
        sides = [f"{shunt}.bat", *(end for r in facing for end in (r["from"], r["to"]) if end != f"{shunt}.bat")]
        for path, name, wire in design.conductors():
            if {wire["from"], wire["to"]} & others and negative in (wire["from"], wire["to"]):
                end = "from" if wire["from"] == negative else "to"
                for post in sides:
                    follows = [
                        "solved-rating",  # the shunt carries the current of the start
                        "shunt-rating",
                        "solved-ampacity",  # and so do its conductors
                        "role-claim",  # the way back of the start now leads over conductors that are not cranking ones
                        "return-size", "return-protection", "lost-return", "minimum-voltage", "bus-rating", *ALONG,
                    ]  # fmt: skip
                    finds = [("shunt-banks", name)]
                    yield Plant(at(*path, {end: post}), finds=finds, line=f"{name}:", follows=follows)


@fault("SHU-08")
def monitor_behind_the_switch(design: Design) -> Iterator[Plant]:
    """The supply of the monitor is taken behind the main switch."""
    for shunt, _, _ in shunts(design):
        supply = next((n, r) for _, n, r in design.conductors() if f"{shunt}.vbat" in (r["from"], r["to"]))
        fuse = device_of(design, supply[1]["from"])
        for path, _, row in design.conductors():
            if row["to"] == f"{fuse}.line":
                follows = [
                    "selectivity",  # its fuse now stands under another one
                    "solved-drop",  # where the switch is open in a condition, the lead is dead
                ]
                change = at(*path, {"from": posts(design).house_bus})
                finds = [("monitor-supply", supply[0])]
                yield Plant(change, finds=finds, line=f"{supply[0]}:", follows=follows)


@fault("SHU-08")
def monitor_without_its_fuse(design: Design) -> Iterator[Plant]:
    """The supply of the monitor runs from the bank with no fuse."""
    for shunt, _, _ in shunts(design):
        supply = next((p, n, r) for p, n, r in design.conductors() if f"{shunt}.vbat" in (r["from"], r["to"]))
        fuse = device_of(design, supply[2]["from"])
        for path, name, row in design.conductors():
            if row["to"] == f"{fuse}.line":
                change = merged(at("devices", {fuse: None}), at(*path, {"to": supply[2]["to"], "length": "0.7 m"}))
                change = merged(change, at(*supply[0][:-1], {supply[1]: None}))
                finds = [("unprotected-conductor", name)]
                follows = [
                    "conductor-withstand",  # nothing opens before it is too hot
                    "return-protection",  # nor does anything protect the return
                ]
                yield Plant(change, finds=finds, line=row["size"], follows=follows)


@fault("SHU-09")
def unfused_sense_leads(design: Design) -> Iterator[Plant]:
    """A shunt stands in the positive of the start bank, and its sense lead has no fuse."""
    start = posts(design).start
    shunt = next(row["part"] for _, row, _ in shunts(design))
    zone = posts(design).zone
    for path, name, row in design.conductors():
        if row["from"] != start or kind_of(design, row["to"]) != "switch":
            continue
        new = piece("SH-P.sys", row["to"], "0.3 m", row["size"], **CRANKING)
        moved = [
            at(*other, {"from": "SH-P.sys"})  # what charges the bank passes the shunt
            for other, key, wire in design.conductors()
            if wire["from"] == start and key != name
        ]
        leads = {
            "SENSE-HI": piece("SH-P.bat", "METER.pos", "1.5 m", "16 AWG"),
            "SENSE-LO": piece("METER.neg", posts(design).negative, "1 m", "16 AWG"),
        }
        circuit = {"name": "Start monitor", "service": "sense", "current": "0.05 A", "conductors": leads}
        meter = next(r["part"] for _, r, _ in design.devices("load") if "belongs_to" in r)
        change = merged(
            at("devices", "SH-P", {"part": shunt, "zone": zone, "measures": "START"}),
            at("devices", "METER", {"part": meter, "zone": zone, "belongs_to": "SH-P"}),
            at(*path, {"to": "SH-P.bat", "length": "0.05 m"}),
            at("circuits", path[1], "conductors", {"SH-P-OUT": new}),
            at("circuits", "METER", circuit),
            *moved,
        )
        follows = [
            "conductor-withstand",  # nothing opens before it is too hot
            "return-protection",  # nor does anything protect its return
            "protection-distance",  # the leads of the bank's other fuses now begin a little way off
            "solved-rating", "shunt-rating",  # the shunt carries the current of the start
        ]  # fmt: skip
        yield Plant(change, finds=[("unprotected-conductor", "SENSE-HI")], line="16 AWG", follows=follows)


@fault("SHU-11")
def bank_without_a_shunt(design: Design) -> Iterator[Plant]:
    """A bank is said to be monitored, but no shunt measures it."""
    banks = sorted({row["bank"] for _, row, _ in design.devices("battery")})
    for bank in banks:
        if all(row["measures"] != bank for _, row, _ in shunts(design)):
            change = at("facts", {"monitored": [*design.section("facts")["monitored"], bank]})
            yield Plant(change, finds=[("monitor-map", bank)])


@fault("SHU-11")
def two_shunts_in_a_row(design: Design) -> Iterator[Plant]:
    """A second shunt stands behind the first, so that two monitors count the same current."""
    for shunt, row, _ in shunts(design):
        for path, _, wire in design.conductors():
            if wire["from"] == f"{shunt}.sys":
                second = {"part": row["part"], "zone": row["zone"], "measures": row["measures"]}
                link = piece("SH-X.sys", wire["to"], "0.2 m", wire["size"])
                change = merged(
                    at("devices", "SH-X", second),
                    at(*path, {"to": "SH-X.bat"}),
                    at("circuits", path[1], "conductors", {"SH-X-OUT": link}),
                )
                follows = [
                    "shunt-bypass",  # what belongs to the first stands on the bank's side of the second
                    *ALONG,
                ]
                yield Plant(change, finds=[("monitor-map", "SH-X")], line="SH-X:", follows=follows)


@fault("SHU-12")
def other_settings(design: Design) -> Iterator[Plant]:
    """The monitor is set to another shunt, or to another capacity."""
    for name, row, _ in design.devices("load"):
        if "set" in row:
            capacity_ah = float(row["set"]["capacity"].split()[0])
            for facts in (
                {"capacity": f"{capacity_ah * 1.06:g} Ah"},
                {"capacity": f"{capacity_ah / 2:g} Ah"},
                {"ratio": "200 A = 50 mV"},
                {"ratio": "500 A = 75 mV"},
            ):
                yield Plant(at("devices", name, "set", facts), finds=[("monitor-settings", name)])


# --- sound arrangements


@trap("T-15")
def start_bank_outside(design: Design) -> Iterator[Plant]:
    """The start battery lands on the boat's side of the house shunt."""
    assert any(row["bank"] == "START" for _, row, _ in design.devices("battery"))
    yield Plant({})


@trap("T-16")
def bow_bank_outside(design: Design) -> Iterator[Plant]:
    """A bank in the bow has no shunt, and lands on the boat's side of the house shunt."""
    if not design.is_small:
        yield Plant({}, options=["OPT-24V"])
        return
    fuse = posts(design).fuse
    devices = {
        "BAT-BOW": {"part": "start-battery", "zone": "LOCKER", "bank": "BOW"},
        "F-BOW": {**fuse, "mount": {"line": "BAT-BOW.pos"}},
        "SW-BOW": {"part": "battery-switch", "zone": "LOCKER"},
        "WINCH": {"part": "planted-winch", "zone": "LOCKER"},
    }
    wires = {
        "X1": piece("F-BOW.load", "SW-BOW.in", "0.2 m", "4 AWG"),
        "X2": piece("SW-BOW.out", "WINCH.pos", "1 m", "4 AWG"),
        "X3": piece("WINCH.neg", "BAT-BOW.neg", "1 m", "4 AWG"),
        "X4": piece("BAT-BOW.neg", posts(design).negative, "2 m", "4 AWG"),
    }
    circuit = {"name": "Winch", "service": "windlass", "current": "40 A", "conductors": wires}
    winch: Row = {"kind": "load", "voltage": "12 V", "current": "40 A", "standby": "0 A", "max_device": "80 A"}
    yield Plant({"devices": devices, "circuits": {"WINCH": circuit}}, parts={"planted-winch": winch})


@trap("T-17")
def monitor_on_the_bank_side(design: Design) -> Iterator[Plant]:
    """The monitor's own supply and sense leads stand on the bank's side of its shunt."""
    yield Plant({})
    for shunt, row, _ in shunts(design):
        meter = next(r["part"] for _, r, _ in design.devices("load") if "belongs_to" in r)
        second = {"part": meter, "zone": row["zone"], "belongs_to": shunt}
        yield Plant(at("devices", "MON-X", {**second, "mount": {"pos": f"{shunt}.vbat", "neg": f"{shunt}.bat"}}))
