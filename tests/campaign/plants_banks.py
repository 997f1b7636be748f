"""Plant faults of banks and battery switches."""

from __future__ import annotations

import itertools
from collections.abc import Iterator

from tests.campaign.planting import ANYTHING, Design, Plant, Row, at, fault, merged, trap
from tests.campaign.plants_conductors import DROPS, THINNER

LINK: Row = {"size": "2 AWG", "length": "0.2 m", "enclosed": "full", "role": "bank",
             "reason": "link inside the bank", "colour": "red"}  # fmt: skip


def row_of(count: int, part: str = "house-battery", **link: object) -> Row:
    """Return the change that makes the small boat's bank a row of batteries, taken off at opposite corners."""
    names = ["BAT-H", *(f"BAT-H{number}" for number in range(2, count + 1))]
    devices: Row = {name: {"part": part, "zone": "LOCKER", "bank": "HOUSE"} for name in names[1:]}
    if part != "house-battery":
        devices["BAT-H"] = {"part": part}
    wires: Row = {}
    for number, (one, other) in enumerate(itertools.pairwise(names), start=1):
        wires[f"LP{number}"] = {"from": f"{one}.pos", "to": f"{other}.pos", **LINK, **link}
        wires[f"LN{number}"] = {"from": f"{one}.neg", "to": f"{other}.neg", **LINK, **link, "colour": "yellow"}
    # With the links the first devices stand beyond 7 in from the far battery: sheathed, they may.
    sheathed = {"enclosed": "full", "place_reason": "the link of the bank counts in"}
    pieces = {"MAIN": "M1", "CHARGE": "C3", "SENSE": "V1", "WATCH": "Q1"}
    return merged(
        {"devices": devices, "conductors": wires},
        {"circuits": {circuit: {"conductors": {name: dict(sheathed)}} for circuit, name in pieces.items()}},
        at("circuits", "MAIN", "conductors", "M4", {"from": f"{names[-1]}.neg"}),
        at("devices", "MONITOR", "set", {"capacity": f"{100 * count} Ah"}),
    )


def house_batteries(design: Design) -> list[str]:
    """Return the batteries of the house bank."""
    return [name for name, row, _ in design.devices("battery") if row["bank"] == "HOUSE"]


@fault("BNK-01")
def unlike_battery(design: Design) -> Iterator[Plant]:
    """One battery of a bank has another capacity or chemistry."""
    wrongs: list[Row] = [{"capacity": "60 Ah"}, {"chemistry": "gel-lead"}]
    follows = ("standby-days", "monitor-settings")  # less capacity
    if design.is_small:
        for wrong in wrongs:
            part, parts = design.part_like("house-battery", wrong)
            change = merged(row_of(2), at("devices", "BAT-H2", {"part": part}))
            yield Plant(change, finds=[("alike-batteries", "HOUSE")], parts=parts, follows=follows)
        return
    for index, name in enumerate(house_batteries(design)):
        change, parts = design.refit(name, wrongs[index % 2])
        yield Plant(change, finds=[("alike-batteries", "HOUSE")], parts=parts, follows=follows)


SHORTED = (ANYTHING,)
"""With batteries that disagree no net has a voltage, and every later answer is about another boat."""


@fault("BNK-02")
def reversed_battery(design: Design) -> Iterator[Plant]:
    """A battery stands the wrong way round in its bank."""
    if design.is_small:
        change = merged(
            row_of(2),
            at("conductors", {"LP1": {"to": "BAT-H2.neg"}, "LN1": {"to": "BAT-H2.pos"}}),
            at("circuits", "MAIN", "conductors", "M4", {"from": "BAT-H.neg"}),
        )
        yield Plant(_plain(change), finds=[("battery-loop", "BAT-H2")], follows=SHORTED)
        return
    for top, name, link in (("W003", "BAT-H1A", "W001"), ("W004", "BAT-H2A", "W002")):
        change = at("conductors", {top: {"from": f"{name}.neg"}, link: {"from": f"{name}.pos"}})
        yield Plant(change, finds=[("battery-loop", "BAT-H2B")], follows=SHORTED)


def _plain(change: Row) -> Row:
    """Return a change without what it sets to what is already so."""
    main = change["circuits"]["MAIN"]["conductors"]
    if main.get("M4") == {"from": "BAT-H.neg"}:
        del main["M4"]
    return change


@fault("BNK-02")
def series_link_on_one_battery(design: Design) -> Iterator[Plant]:
    """A link joins both posts of one battery."""
    if design.is_small:
        wire = {"from": "BAT-S.pos", "to": "BAT-S.neg", **LINK}
        yield Plant(at("conductors", "SHORT", wire), finds=[("dead-short", "BAT-S")], follows=SHORTED)
        wire = {"from": "BAT-H.pos", "to": "BAT-H.neg", **LINK}
        yield Plant(at("conductors", "SHORT", wire), finds=[("dead-short", "BAT-H")], follows=SHORTED)
        return
    for link, name in (("W001", "BAT-H1A"), ("W002", "BAT-H2A")):
        change = at("conductors", link, {"to": f"{name}.pos"})
        yield Plant(change, finds=[("dead-short", name)], follows=SHORTED)


@fault("BNK-03")
def load_on_the_middle_of_a_bank(design: Design) -> Iterator[Plant]:
    """A load of half the voltage hangs on the lower half of a series bank."""
    load = {"kind": "load", "voltage": "12 V", "current": "1 A", "max_device": "5 A", "ignition_protected": True}
    wires = {
        "X1": {"from": "F-TAP.load", "to": "TAP.pos", "size": "16 AWG", "length": "0.5 m"},
        "X2": {"from": "TAP.neg", "to": "BUS-N", "size": "16 AWG", "length": "0.5 m"},
    }
    tap: Row = {
        "devices": {"TAP": {"part": "planted-tap", "zone": "LOCKER"},
                    "F-TAP": {"part": "blade-fuse", "zone": "LOCKER", "rating": "2 A"}},
        "circuits": {"TAP": {"name": "planted load", "service": "alarm", "current": "1 A", "conductors": wires}},
    }  # fmt: skip
    if design.is_small:
        half: Row = {"voltage": "6 V", "capacity": "100 Ah", "chemistry": "agm-lead", "emf_full": "6.4 V",
                "emf_low": "5.95 V", "resistance_full": "2 mohm", "resistance_low": "3 mohm",
                "short_circuit": "3200 A", "kind": "battery"}  # fmt: skip
        tap["devices"]["F-TAP"]["mount"] = {"line": "BAT-H2.pos"}
        change = merged(
            at("devices", {"BAT-H": {"part": "planted-6v"},
                           "BAT-H2": {"part": "planted-6v", "zone": "LOCKER", "bank": "HOUSE"}}),
            at("conductors", "LS", {"from": "BAT-H.neg", "to": "BAT-H2.pos", **LINK}),
            at("circuits", "MAIN", "conductors", "M4", {"from": "BAT-H2.neg"}),
            tap,
        )  # fmt: skip
        parts = {"planted-6v": half, "planted-tap": {**load, "voltage": "6 V"}}
        yield Plant(change, finds=[("bank-tap", "TAP")], parts=parts)
        return
    for block, place in (("BAT-B2.pos", "Z-BOW"), ("BAT-B1.neg", "Z-BOW")):
        for name in ("TAP", "F-TAP"):
            tap["devices"][name]["zone"] = place
        tap["devices"]["F-TAP"]["mount"] = {"line": block}
        wires["X2"]["to"] = "BUS-N24"
        yield Plant(
            {key: dict(value) for key, value in tap.items()}, finds=[("bank-tap", "TAP")],
            parts={"planted-tap": load}, options=["OPT-24V"],
        )  # fmt: skip


@fault("BNK-04")
def both_leads_from_one_end(design: Design) -> Iterator[Plant]:
    """Positive and negative of a bank are taken from the same battery or string, the others hang on long links."""
    finds = [("even-shares", "HOUSE")]
    if design.is_small:
        change = row_of(2, size="6 AWG", length="0.8 m")
        del change["circuits"]["MAIN"]["conductors"]["M4"]
        yield Plant(change, finds=finds)
        return
    for top, bottom, first, last in (("W004", "W006", "BAT-H1A", "BAT-H1B"), ("W003", "W005", "BAT-H2A", "BAT-H2B")):
        change = at("conductors", {
            top: {"to": f"{first}.pos", "size": "1 AWG", "length": "2 m"},
            bottom: {"to": f"{last}.neg", "size": "1 AWG", "length": "2 m"},
        })  # fmt: skip
        follows = (
            *DROPS,  # longer ways inside the bank
            "ampacity", "solved-ampacity", "bank-links",  # the near string gives what the far one does not
            "protection-distance",  # what leaves the bank is measured from the far string's post
            "stack-order",  # a thinner ring lies where the string's own lay
        )  # fmt: skip
        yield Plant(change, finds=finds, follows=follows)


def three_strings() -> tuple[Row, dict[str, str]]:
    """Return the change that makes the example's bank a row of three strings, linked post to post."""
    blocks = {
        name: {"part": "bat-house-6v", "zone": "Z-BATT", "bank": "HOUSE", "string": 3}
        for name in ("BAT-H3A", "BAT-H3B")
    }
    big = {**LINK, "size": "4/0 AWG", "length": "0.17 m", "current": "200 A"}
    wires = {
        "W003": {"to": "BAT-H2A.pos"},
        "W004": {"to": "BAT-H3A.pos"},
        "W005": {"to": "BAT-H2B.neg"},
        "W006": {"to": "BAT-H3B.neg"},
        "LX1": {**big, "from": "BAT-H3A.neg", "to": "BAT-H3B.pos", "length": "0.25 m"},
        "LX2": {**big, "from": "BAT-H1A.pos", "to": "STUD-HB-POS"},
        "LX3": {**big, "from": "BAT-H3B.neg", "to": "STUD-HB-NEG", "colour": "yellow"},
    }
    return {"devices": blocks, "conductors": wires}, {"BAT-H2A": "positive"}


@fault("BNK-05")
def landing_between_batteries(design: Design) -> Iterator[Plant]:
    """A charger or a feed lands on a battery between others of its row."""
    follows = (
        "string-device",  # three strings, and none has a device of its own
        "even-shares", "bank-links", "ampacity", "solved-ampacity",
        "unlisted-state", "interrupting-capacity",  # one string more feeds a fault
        "protection-distance", "far-end-clearing",
        "solved-drop",  # longer ways inside the bank
        "monitor-settings",  # the bank is larger than its monitor knows
    )  # fmt: skip
    if design.is_small:
        for circuit, name, end in (("CHARGE", "C3", "to"), ("SENSE", "V1", "from"), ("WATCH", "Q1", "from")):
            change = merged(row_of(3), at("circuits", circuit, "conductors", name, {end: "BAT-H2.pos"}))
            yield Plant(change, finds=[("inner-landing", name)], follows=follows)
        return
    for circuit, name in (("M15", "W201"), ("M04", "W015"), ("M19", "W202")):
        change = merged(three_strings()[0], at("circuits", circuit, "conductors", name, {"from": "BAT-H2A.pos"}))
        yield Plant(change, finds=[("inner-landing", name)], follows=follows)


@fault("BNK-06")
def thin_link(design: Design) -> Iterator[Plant]:
    """A link or string cable is too thin for what the rest of the bank gives with one string out."""
    follows = (*THINNER, "even-shares", "ampacity", "stack-order")  # its thin ring lies below thick ones
    if design.is_small:
        change = row_of(2, size="16 AWG", current="5 A")
        yield Plant(change, finds=[("bank-links", "LP1"), ("bank-links", "LN1")], line="16 AWG", follows=follows)
        return
    for name in ("W001", "W002", "W003", "W004", "W005", "W006"):
        change = at("conductors", name, {"size": "4 AWG", "current": "150 A"})
        yield Plant(change, finds=[("bank-links", name)], line="size: 4 AWG", follows=follows)


@fault("BNK-07")
def lithium_strings_without_devices(design: Design) -> Iterator[Plant]:
    """The strings of a lithium bank, or three strings of any, have no device of their own."""
    finds = [("string-device", "HOUSE")]
    if design.is_small:
        part, parts = design.part_like("house-battery", {"chemistry": "lithium-iron-phosphate"})
        yield Plant(row_of(2, part), finds=finds, parts=parts)
        yield Plant(row_of(3), finds=finds)
        return
    part, parts = design.part_like("bat-house-6v", {"chemistry": "lithium-iron-phosphate"})
    yield Plant(at("devices", {name: {"part": part} for name in house_batteries(design)}), finds=finds, parts=parts)
    yield Plant(
        three_strings()[0],
        finds=finds,
        follows=("even-shares", "solved-drop", "interrupting-capacity", "monitor-settings"),
    )


# --- switches

MAY_STAY = ("alarm", "bilge-pump", "sense", "charging", "gauges")


@fault("BNK-08")
def no_switch_parts_the_bank(design: Design) -> Iterator[Plant]:
    """The main of a bank leads past its switch."""
    past = {"small": ("M3", "SW-H.in"), "example": ("W012", "SW-H.in")}
    name, post = past[design.name]
    lights = [n for n, row, _ in design.branches() if row["service"] in ("lighting", "navigation-light")]
    finds = [("ahead-of-switch", f"{name}.load") for name in lights]
    circuit = {"small": "MAIN", "example": "M01"}[design.name]
    change = at("circuits", circuit, "conductors", name, {"from": post})
    # All of the same; what has no switch of its own can no more be switched off at all.
    yield Plant(change, finds=finds, follows=("ahead-of-switch", "means-off"))


@fault("BNK-08", "BNK-12")
def engine_circuit_past_its_switch(design: Design) -> Iterator[Plant]:
    """The starter's cable leads past its switch."""
    name, circuit = {"small": ("S2", "CRANK"), "example": ("W031", "M03")}[design.name]
    change = at("circuits", circuit, "conductors", name, {"from": "SW-S.in"})
    yield Plant(change, finds=[("ahead-of-switch", "STARTER")], follows=("ahead-of-switch", "means-off"))


@fault("BNK-09")
def switch_below_its_current(design: Design) -> Iterator[Plant]:
    """A battery switch is rated below what flows through it, for long or while cranking."""
    wrongs = {
        "small": [("SW-H", "SW-H", {"continuous": "10 A"}), ("SW-S", "SW-S for seconds", {"intermittent": "150 A"})],
        "example": [
            ("SW-H", "SW-H", {"continuous": "200 A"}),
            ("SW-S", "SW-S for seconds", {"intermittent": "200 A"}),
            ("SW-P", "SW-P for seconds", {"intermittent": "200 A"}),
        ],
    }
    for device, place, wrong in wrongs[design.name]:
        change, parts = design.refit(device, wrong)
        yield Plant(change, finds=[("solved-rating", place)], parts=parts, follows=("solved-rating",))


@fault("BNK-11")
def bilge_pump_behind_the_switch(design: Design) -> Iterator[Plant]:
    """A bilge pump goes dead with the battery switches."""
    if design.is_small:
        change = at("circuits", "PUMP", {"service": "bilge-pump"})
        yield Plant(change, finds=[("pump-stays-live", "PUMP.load")])
        return
    for name, row, _ in design.branches():
        if row["service"] == "bilge-pump":
            change = at("circuits", name, {"feed": "PNL-35"})
            yield Plant(change, finds=[("pump-stays-live", f"{name}.load")], follows=DROPS)


@fault("BNK-12")
def load_ahead_of_the_switch(design: Design) -> Iterator[Plant]:
    """A load that may not stay live is fed from ahead of the battery switch."""
    if design.is_small:
        change = at("circuits", "SENSE", {"service": "engine"})
        yield Plant(change, finds=[("ahead-of-switch", "REGULATOR")], follows=("means-off",))
        return
    for name, row, _ in design.branches():
        if row["protect"] == "5 A" and row["service"] not in MAY_STAY and row["feed"] not in ("PNL-01",):
            change = at("circuits", name, {"feed": "24H-6"})
            follows = (
                *DROPS,
                "selectivity", "far-end-clearing", "conductor-withstand",  # a fuse of another band
                "bus-rating",
                "means-off", "light-circuits",  # a fuse is no switch, neither for it nor between two lights
            )  # fmt: skip
            yield Plant(change, finds=[("ahead-of-switch", f"{name}.load")], follows=follows)


@fault("LOD-09")
def too_much_standby(design: Design) -> Iterator[Plant]:
    """What stays on with the switches off takes half the bank in less than ten days."""
    if design.is_small:
        for part, device in (("monitor-head", "MONITOR"), ("regulator", "REGULATOR")):
            other, parts = design.part_like(part, {"standby": "0.4 A", "current": "0.4 A"})
            yield Plant(at("devices", device, {"part": other}), finds=[("standby-days", "HOUSE")], parts=parts)
        return
    known = design.section("conditions")["all_off"]["loads"]
    for name in known:
        bank = "START" if name in ("MON-AUX", "CHG") else "HOUSE"
        change = at("conditions", "all_off", {"loads": {name: "1.2 A"}})
        follows = ("device-carries-load", "solved-drop", "solved-rating", "solved-ampacity")
        if bank == "HOUSE":
            yield Plant(change, finds=[("standby-days", bank)], follows=follows)


# --- sound arrangements


@trap("T-36")
def links_without_a_device(design: Design) -> Iterator[Plant]:
    """Two batteries or strings are joined by short links without a device."""
    if design.is_small:
        yield Plant(row_of(2))
        return
    for name in ("W003", "W005"):
        other = {"W003": "W004", "W005": "W006"}[name]
        yield Plant(at("conductors", {name: {"length": "0.18 m"}, other: {"length": "0.18 m"}}))


@trap("T-02", "T-03")
def pump_and_memory_ahead_of_the_switch(design: Design) -> Iterator[Plant]:
    """A bilge pump and an electronic memory hang ahead of the switch, each behind a fuse close to the source."""
    if not design.is_small:
        yield Plant(at("circuits", "A05", {"tail": "3.2 m"}))
        return
    load = {"kind": "load", "voltage": "12 V", "current": "3 A", "max_device": "5 A", "ignition_protected": True,
            "standby": "0.01 A", "motor": True, "stall_protection": "thermal"}  # fmt: skip
    for service, reason in (("bilge-pump", {}), ("general", {"always_on": "keeps its memory"})):
        wires = {
            "X1": {"from": "F-ON.load", "to": "ON.pos", "size": "14 AWG", "length": "1 m"},
            "X2": {"from": "ON.neg", "to": "BUS-N", "size": "14 AWG", "length": "1 m"},
        }
        change = {
            "devices": {
                "ON": {"part": "planted-on", "zone": "LOCKER"},
                "F-ON": {"part": "blade-fuse", "zone": "LOCKER", "rating": "5 A", "mount": {"line": "BAT-H.pos"}},
            },
            "circuits": {"ON": {"name": "planted", "service": service, "current": "3 A", "conductors": wires, **reason}},
        }  # fmt: skip
        yield Plant(change, parts={"planted-on": load})
