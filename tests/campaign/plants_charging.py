"""Plant faults of charging: too much of it for its path, cut off from its battery, without a return."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.planting import Design, Plant, Row, at, fault, merged, trap
from tests.campaign.plants_protection import OTHER_RATING, devices, rated

CHARGED_THROUGH = {
    "small": {"F-CHARGER": 15, "F-ALT": 50},
    "example": {"F-CH": 180, "F-CHG": 50, "F-CHS": 8, "F-SOL": 25, "F-ALT": 100, "F-DDO": 25, "F-DDI": 30},
}
"""Devices that charge flows through, and a rating below the most that comes."""


@fault("SRC-03")
def device_below_the_charge(design: Design) -> Iterator[Plant]:
    """The sum of what charges through a fuse is above its rating."""
    known = {name for name, _, _ in devices(design)}
    for name, amps in CHARGED_THROUGH[design.name].items():
        assert name in known
        change, parts = rated(design, name, amps)
        yield Plant(
            change, finds=[("solved-rating", name)], parts=parts,
            follows=[check for check in OTHER_RATING if check != "solved-rating"],
        )  # fmt: skip


@fault("SRC-03", "PAN-07")
def bus_below_the_charge(design: Design) -> Iterator[Plant]:
    """A bus is rated below the sum that charging sends through it."""
    for name, amps in {"small": {"BUS-N": 20}, "example": {"BUS-CH": 200, "BUS-N": 200}}[design.name].items():
        change, parts = design.refit(name, {"rating": f"{amps} A"})
        # What its devices let through is more still.
        yield Plant(change, finds=[("solved-rating", name)], parts=parts, follows=("bus-rating",))


CUT_OFF = (
    "charger-cut-off", "alternator-cut-off",  # whatever else charges by the same lead
    "bus-rating",  # one more way into the bus
    "selectivity", "rating-order",
    "solved-drop", "solved-rating", "solved-ampacity", "shunt-rating",
    "protection-distance", "size-step", "double-feed", "device-rating", "device-bypass", "unprotected-conductor",
    "conductor-withstand",
    "sense-place",  # the regulator still senses where the alternator was
)  # fmt: skip
"""What else a charge source behind the battery switch breaks."""


@fault("SRC-04")
def alternator_behind_the_switch(design: Design) -> Iterator[Plant]:
    """The alternator's cable lands where the battery switch can take the battery from it."""
    finds = [("alternator-cut-off", "ALT")]
    if design.is_small:
        change = at("devices", "F-ALT", {"mount": {"line": "BUS-P"}})
        yield Plant(change, finds=finds, line="ALT: {part", follows=CUT_OFF)
        change = at("devices", "F-ALT", {"mount": {"line": "SW-H.out"}})
        yield Plant(change, finds=finds, line="ALT: {part", follows=CUT_OFF)
        return
    for circuit, name, post in (
        ("M06", "W205", "BUS-HP"), ("M04", "W015", "BUS-HP"), ("M06", "W205", "SW-H.out"), ("M06", "W205", "SW-S.out"),
    ):  # fmt: skip
        change = at("circuits", circuit, "conductors", name, {"from": post})
        yield Plant(change, finds=finds, line="ALT: {part", follows=CUT_OFF)


@fault("SRC-04")
def diode_turned_round(design: Design) -> Iterator[Plant]:
    """The blocking diode of an alternator lets nothing pass to the bank."""
    part: Row = {"kind": "diode", "posts": ["a", "b"], "drop": "0.4 V", "resistance": "0.5 mohm",
                 "continuous": "200 A", "ignition_protected": True}  # fmt: skip
    circuit, lead = {"small": ("ALT-OUT", "A1"), "example": ("M06", "W040")}[design.name]
    row = design.section("circuits")[circuit]["conductors"][lead]
    zone = design.section("devices")["F-ALT"]["zone"]
    wires = {
        lead: {"to": "DIODE.a"},
        "DX": {"from": "DIODE.b", "to": row["to"], "size": row["size"], "length": "0.3 m"},
    }
    change = merged(
        at("devices", "DIODE", {"part": "planted-diode", "zone": zone}), at("circuits", circuit, "conductors", wires)
    )
    # An alternator that feeds nothing, and its regulator that waits for it.
    follows = ("alternator-cut-off", "load-return", "solved-drop")
    yield Plant(
        change, finds=[("diode-way", "DIODE DIODE.b to DIODE.a")], parts={"planted-diode": {**part, "passes": [["b", "a"]]}},
        follows=follows,
    )  # fmt: skip


@fault("SRC-12")
def source_without_a_return(design: Design) -> Iterator[Plant]:
    """The return conductor of a charge source is missing."""
    returns = {
        "small": [("CHARGE", "C2", "CHARGER")],
        "example": [("M07", "W043", "CHG"), ("M09", "W047", "MPPT1"), ("M11", "W051", "DDC"), ("M10", "W049", "PV1")],
    }
    for circuit, name, source in returns[design.name]:
        change = at("circuits", circuit, "conductors", {name: None})
        # What hangs on the same return floats too.
        yield Plant(change, finds=[("load-return", source)], follows=("load-return", "charger-cut-off"))


@fault("SRC-14")
def charger_behind_the_switch(design: Design) -> Iterator[Plant]:
    """A charger lands where the battery switch can leave it without a battery."""
    leads = {
        "small": [("CHARGE", "C3", "to", "BUS-P", "CHARGER"), ("CHARGE", "C3", "to", "SW-S.out", "CHARGER")],
        "example": [
            ("M07", "W206", "from", "BUS-HP", "CHG"), ("M07", "W206", "from", "SW-H.out", "CHG"),
            ("M08", "W212", "from", "SW-S.out", "CHG.out2"), ("M09", "W207", "from", "BUS-HP", "MPPT1"),
            ("M12", "W213", "from", "SW-S.out", "DDC"),
        ],
    }  # fmt: skip
    for circuit, name, end, post, source in leads[design.name]:
        change = at("circuits", circuit, "conductors", name, {end: post})
        yield Plant(change, finds=[("charger-cut-off", source)], follows=CUT_OFF)


@trap("T-35")
def source_on_the_battery_side(design: Design) -> Iterator[Plant]:
    """One charge source more lands on the battery side of the switch, fused there."""
    bus = {"small": "BAT-H.pos", "example": "BUS-CH"}[design.name]
    fuse: Row = {"small": {"part": "bolt-fuse", "rating": "30 A"}, "example": {"part": "bolt-fuse-50"}}[design.name]
    zone = design.section("devices")["F-ALT"]["zone"]
    source: Row = {
        "kind": "source", "ignition_protected": True, "internal_fuse": True, "case_isolated": True,
        "outputs": {"out": {"return": "neg", "max": "8 A", "voltage": "14.4 V", "limited": True}},
    }  # fmt: skip
    change = {
        "devices": {
            "SRC": {"part": "planted-charger", "zone": zone},
            "F-SRC": {**fuse, "zone": zone, "mount": {"line": bus}},
        },
        "circuits": {
            "SRC": {
                "name": "planted charger", "service": "charging", "current": "8 A",
                "conductors": {
                    "X1": {"from": "SRC.out", "to": "F-SRC.load", "size": "8 AWG", "length": "1 m"},
                    "X2": {"from": "SRC.neg", "to": "BUS-N", "size": "8 AWG", "length": "1 m"},
                },
            }
        },
    }  # fmt: skip
    yield Plant(change, parts={"planted-charger": source})
