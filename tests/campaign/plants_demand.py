"""Plant faults of panels, loads and zones that what exists already finds: demand, ratings, voltages, sparks."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.figures import length_of_drop_m
from tests.campaign.places import ampere
from tests.campaign.planting import Design, Plant, Row, at, fault, merged
from tests.campaign.plants_conductors import DROPS, LONGER
from tests.campaign.plants_protection import MAINS, OTHER_RATING, rated

SWITCHES: Row = {"SW-H": "closed", "SW-S": "closed", "SW-P": "open"}


@fault("PAN-01")
def panel_demand_beyond_its_main(design: Design) -> Iterator[Plant]:
    """In one condition the loads of a panel ask more than its main, its bus or its feeder's device bears."""
    main, panel = MAINS[design.name]
    amps = {"small": 8, "example": 40}[design.name]
    change, parts = rated(design, main, amps)
    follows = [check for check in OTHER_RATING if check != "solved-rating"]
    yield Plant(change, finds=[("solved-rating", main)], parts=parts, follows=follows)
    change, parts = design.refit(panel, {"rating": f"{amps} A"})
    yield Plant(change, finds=[("solved-rating", panel)], parts=parts, follows=("bus-rating",))
    loads = {name: load["current"] for name, row, load in design.branches() if row["feed"][:3] != "24H"}
    condition: Row = {"loads": loads, "judge_drop": False}
    if design.is_small:
        loads["LIGHTS"] = "9 A"
        loads["PUMP"] = "14 A"
        change, parts = rated(design, main, 20)
        change = merged(change, at("conditions", "planted-all-on", condition))
        yield Plant(change, finds=[("solved-rating", main)], parts=parts, state="planted-all-on", follows=follows)
    else:
        condition["switches"] = SWITCHES
        change = at("conditions", "planted-all-on", condition)
        finds = [("solved-rating", main), ("solved-rating", panel)]
        # So do the feeder's own fuse and the negative bus; what arrives is less.
        yield Plant(change, finds=finds, state="planted-all-on", follows=("minimum-voltage", "solved-rating"))


@fault("PAN-05")
def sub_panel_on_a_small_breaker(design: Design) -> Iterator[Plant]:
    """A sub-panel hangs on a breaker that is smaller than the sum of its branches."""
    moved = {"small": ("PUMP", "LIGHTS"), "example": ("P20", "P23", "P24")}[design.name]
    panel = MAINS[design.name][1]
    row = design.section("devices")[panel]
    positions = {**row["positions"], "first": "SUB-1", "last": "SUB-8"}
    change: Row = {
        "devices": {
            "SUB": {"part": row["part"], "zone": row["zone"], "positions": positions},
            "CB-SUB": {"part": row["positions"]["takes"], "zone": row["zone"], "rating": "10 A",
                       "mount": {"line": panel, "load": "SUB"}},
        },
        "circuits": {name: {"feed": f"SUB-{number}"} for number, name in enumerate(moved, start=1)},
    }  # fmt: skip
    follows = ("rating-order", "selectivity", *DROPS)
    yield Plant(change, finds=[("solved-rating", "CB-SUB")], line="rating: 10 A", follows=follows)


@fault("LOD-01")
def breaker_beyond_the_maker_s_value(design: Design) -> Iterator[Plant]:
    """A branch breaker is larger than the load's maker allows."""
    made = {"small": (5, 10, 15, 20, 30), "example": (5, 7.5, 10, 15, 20, 25, 30)}[design.name]
    for name, row, load in design.branches():
        larger = [amps for amps in made if amps > ampere(load["max_device"])]
        if larger and row["feed"][:3] != "24H" and row["feed"] != "PNL-01":
            change = at("circuits", name, {"protect": f"{larger[0]:g} A"})
            follows = [check for check in OTHER_RATING if check != "maker-device"]
            yield Plant(
                change, finds=[("maker-device", row["feed"])], line=f"protect: {larger[0]:g} A",
                follows=(*follows, "device-rating"),
            )  # fmt: skip


@fault("LBL-06")
def legend_of_another_rating(design: Design) -> Iterator[Plant]:
    """A legend names another rating than the breaker's."""
    for name, row, _ in design.branches():
        if row["feed"] != "PNL-01":
            change = at("circuits", name, {"legend": f"{row['name']} 3 A"})
            yield Plant(change, finds=[("legend-rating", row["feed"])], line="legend: ")


@fault("LOD-02")
def load_of_another_voltage(design: Design) -> Iterator[Plant]:
    """A 24 V load stands in a 12 V circuit."""
    for name, row, _ in design.branches():
        part, parts = design.part_like(row["load"], {"voltage": "24 V", "min_voltage": None})
        change = at("circuits", name, {"load": part})
        yield Plant(change, finds=[("load-voltage", f"{name}.load")], line=f"load: {part}", parts=parts)


@fault("LOD-02")
def feed_and_return_swapped(design: Design) -> Iterator[Plant]:
    """The two conductors of a load are swapped."""
    pairs = {
        "small": [("SENSE", "V2", "V3", "REGULATOR")],
        "example": [("M13", "W054", "W055", "INV"), ("M16", "W060", "W061", "EPANEL")],
    }
    for circuit, feed, back, load in pairs[design.name]:
        rows = design.section("circuits")[circuit]["conductors"]
        change = at(
            "circuits", circuit, "conductors", {feed: {"to": rows[back]["from"]}, back: {"from": rows[feed]["to"]}}
        )
        # Across the swapped load the losses come out as the whole voltage.
        follows = ("working-point", "minimum-voltage", "solved-drop")
        yield Plant(change, finds=[("load-voltage", load)], follows=follows)


@fault("LOD-03")
def constant_power_beyond_the_knee(design: Design) -> Iterator[Plant]:
    """A load of constant power hangs on so long a run that the network cannot feed it."""
    if design.is_small:
        part, parts = design.part_like("cooling-pump", {"model": "constant-power"})
        length = 1.2 * length_of_drop_m(6, 16, "14 AWG") / 2
        change: Row = {"load": part, "length": f"{length:.1f} m", "route": None, "tail": None}
        yield Plant(at("circuits", "PUMP", change), finds=[("working-point", "under-way")], parts=parts, follows=LONGER)
        return
    for name in ("W054", "W055"):
        change = at("circuits", "M13", "conductors", name, {"length": "90 m"})
        yield Plant(change, finds=[("working-point", "hotel")], follows=(*LONGER, "lost-return"))


@fault("LOD-03")
def constant_power_at_the_low_battery(design: Design) -> Iterator[Plant]:
    """A load of constant power keeps its drop by its nominal current, and not at what it draws from low batteries."""
    if design.is_small:
        part, parts = design.part_like("cooling-pump", {"model": "constant-power"})
        length = length_of_drop_m(0.985 * 1.2, 8, "14 AWG") / 2
        change: Row = {"load": part, "length": f"{length:.2f} m", "route": None, "tail": None}
        yield Plant(
            at("circuits", "PUMP", change), finds=[("solved-drop", "PUMP")], parts=parts,
            follows=("voltage-drop-from-bank",),
        )  # fmt: skip
        return
    for name in ("W054", "W055"):
        change = at("circuits", "M13", "conductors", name, {"length": "2.2 m"})
        yield Plant(change, finds=[("solved-drop", "M13")], follows=("voltage-drop-from-bank",))


@fault("LOD-04")
def navigation_light_below_its_voltage(design: Design) -> Iterator[Plant]:
    """A navigation light gets less than it needs in the condition of the night."""
    lit = {row for rows in (c.get("loads") or {} for c in design.section("conditions").values()) for row in rows}
    for name, row, _ in design.branches():
        if row["service"] == "navigation-light" and name in lit:
            part, parts = design.part_like(row["load"], {"min_voltage": "12.5 V" if design.is_small else "11.88 V"})
            change = at("circuits", name, {"load": part})
            yield Plant(change, finds=[("minimum-voltage", f"{name}.load")], line=f"load: {part}", parts=parts)


# --- sparks and petrol vapour

SPARKING = ("load", "source", "switch", "diode", "fuse", "breaker")


def sparking_in(design: Design, zone: str) -> list[str]:
    """Return what stands in a zone, can spark, and is not ignition protected."""
    found = [
        name for name, row, part in design.devices()
        if row["zone"] == zone and part["kind"] in SPARKING and not part.get("ignition_protected")
    ]  # fmt: skip
    for name, row, part in design.branches():
        if row["zone"] == zone and not part.get("ignition_protected"):
            found.append(f"{name}.load")
        for _, panel, _ in design.devices("bus"):
            stem = panel.get("positions", {}).get("first", " ").rstrip("0123456789")
            takes = panel.get("positions", {}).get("takes")
            is_here = panel["zone"] == zone and row["feed"].rstrip("0123456789") == stem and row["feed"] not in found
            if is_here and not design.parts[takes].get("ignition_protected"):
                found.append(row["feed"])
    return found


@fault("ZON-04")
def petrol_stowed_beside_sparks(design: Design) -> Iterator[Plant]:
    """Petrol is stowed in a zone with parts that can spark."""
    for zone, row in sorted(design.section("zones").items()):
        sparking = sparking_in(design, zone)
        if sparking and not row.get("petrol_vapour"):
            finds = [("ignition-protection", name) for name in sparking]
            yield Plant(at("zones", zone, {"petrol_vapour": True}), finds=finds)


@fault("ZON-01")
def spark_in_petrol_vapour(design: Design) -> Iterator[Plant]:
    """A part that is not ignition protected stands in a zone with petrol vapour."""
    vapour = next(name for name, row in sorted(design.section("zones").items()) if row.get("petrol_vapour"))
    for name, row, part in design.branches():
        if not part.get("ignition_protected"):
            change = at("circuits", name, {"zone": vapour})
            yield Plant(change, finds=[("ignition-protection", f"{name}.load")], line=f"load: {row['load']}")
    for name, _, part in design.devices():
        if part["kind"] in ("switch", "breaker", "fuse", "source") and not part.get("ignition_protected"):
            follows = ("far-end-clearing", "conductor-withstand", "device-carries-load", "selectivity", "switch-reach")
            finds = [("ignition-protection", name)]
            yield Plant(at("devices", name, {"zone": vapour}), finds=finds, line=name, follows=follows)
