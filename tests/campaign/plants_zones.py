"""Plant faults of places: petrol, cooking gas, bilge water, heat, hydrogen, reach, bulkheads, AC beside DC."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.places import ampere, engine_zone
from tests.campaign.planting import Design, Finds, Plant, Row, at, fault, merged, trap

SPARKS = ("load", "source", "switch", "diode", "fuse", "breaker")
LEAD = ("flooded-lead", "agm-lead", "gel-lead")


def zone_with(design: Design, fact: str) -> str:
    """Return the first zone with a fact, empty where there is none."""
    return next((name for name, row in sorted(design.section("zones").items()) if row.get(fact)), "")


def positions(design: Design) -> dict[str, str]:
    """Return the part that each position of a panel or fuse block takes, with the zone it is in, by position."""
    found: dict[str, str] = {}
    for name, row, _ in design.devices("bus"):
        if "positions" in row:
            found |= {
                circuit["feed"]: name for _, circuit, _ in design.branches() if _on(circuit["feed"], row["positions"])
            }
    return found


def _on(feed: str, given: Row) -> bool:
    return len(feed) == len(given["first"]) and given["first"] <= feed <= given["last"]


def standing(design: Design, zone: str) -> dict[str, Row]:
    """Return the parts of what stands in a zone, bare metal left out, by device."""
    found = {name: part for name, row, part in design.devices() if row["zone"] == zone and part["kind"] != "metal"}
    found |= {f"{name}.load": part for name, row, part in design.branches() if row["zone"] == zone}
    for feed, bus in positions(design).items():
        if design.section("devices")[bus]["zone"] == zone:
            found[feed] = design.parts[design.section("devices")[bus]["positions"]["takes"]]
    return found


def sparking(design: Design, zone: str) -> list[Finds]:
    """Return what must be found in a zone once petrol vapour comes to it."""
    return [
        ("ignition-protection", name)
        for name, part in sorted(standing(design, zone).items())
        if part["kind"] in SPARKS and not part.get("ignition_protected")
    ]


# --- petrol


@fault("ZON-02")
def claim_below_the_text(design: Design) -> Iterator[Plant]:
    """A zone is claimed to be isolated by what does not isolate it."""
    nothing = {"height": None, "tight_to": None, "gap": None}
    for zone, row in sorted(design.section("zones").items()):
        for source in sorted(row.get("isolated_from") or {}):
            finds = [("isolation-claim", f"{zone} from {source}")]
            for claim in (
                {"height": "0.9 m", "tight_to": "0.2 m"},  # a third of the height is 0.3 m
                {"gap": "7 mm"},  # 1/4 in is 6.35 mm
                {**nothing, "by": "below", "sealed": False},
                {**nothing, "by": "above", "deck_between": False},
                {**nothing, "by": "open-space", "distance": "0.6 m", "open_to_air": True},  # 2 ft is 0.61 m
                {**nothing, "by": "open-space", "distance": "1 m", "open_to_air": False},
            ):
                yield Plant(at("zones", zone, "isolated_from", source, claim), finds=finds, line=f"{source}:")


@fault("ZON-02")
def opening_in_the_bulkhead(design: Design) -> Iterator[Plant]:
    """An opening in the bulkhead lets the vapour through that it is claimed to stop."""
    for zone, row in sorted(design.section("zones").items()):
        for source in sorted(row.get("isolated_from") or {}):
            has_petrol = design.section("zones")[source].get("petrol_vapour")
            finds = [("isolation-claim", f"{zone} from {source}"), *(sparking(design, zone) if has_petrol else ())]
            yield Plant(at("zones", zone, {"opens_to": [source]}), finds=finds)


@fault("ZON-01")
def air_shared_with_petrol(design: Design) -> Iterator[Plant]:
    """A zone shares the air of one with petrol vapour, and what stands in it can spark."""
    source = zone_with(design, "petrol_vapour")
    for zone, row in sorted(design.section("zones").items()):
        finds = sparking(design, zone)
        if zone != source and finds and "isolated_from" not in row:
            yield Plant(at("zones", zone, {"opens_to": [source]}), finds=finds)
            yield Plant(at("zones", source, {"opens_to": [zone]}), finds=finds)


@trap("T-21")
def parts_that_spark_where_there_is_no_petrol(design: Design) -> Iterator[Plant]:
    """On a diesel boat a part that is not ignition protected stands where no petrol is."""
    zones = design.section("zones")
    for name, row, part in design.devices():
        if part.get("ignition_protected") and not zones[row["zone"]].get("petrol_vapour"):
            change, parts = design.refit(name, {"ignition_protected": False})
            yield Plant(change, parts=parts)
    for name, row, part in design.branches():
        zone = zones[row["zone"]]
        if part.get("ignition_protected") and not (zone.get("petrol_vapour") or zone.get("cooking_gas")):
            load, parts = design.part_like(row["load"], {"ignition_protected": False})
            yield Plant(at("circuits", name, {"load": load}), parts=parts)
    if design.is_small:  # its only protected load stands in the petrol locker, which loses the petrol
        load, parts = design.part_like("vapour-sensor", {"ignition_protected": False})
        change = merged(at("zones", "FUEL", {"petrol_vapour": False}), at("circuits", "SENSOR", {"load": load}))
        yield Plant(change, parts=parts)


@trap("T-22")
def fuel_line_without_joints(design: Design) -> Iterator[Plant]:
    """A fuel line without joints passes through a zone with ordinary parts: no fitting, so no source of vapour."""
    for zone, row in sorted(design.section("zones").items()):
        if sparking(design, zone):
            name = f"{row['name']}, a fuel line passes through it without joints"
            yield Plant(at("zones", zone, {"name": name} | ({} if "fuel_parts" in row else {"fuel_parts": False})))


# --- cooking gas, bilge water


def belongs_there(design: Design, name: str, part: Row) -> bool:
    """Tell whether a device may stand beside gas bottles: a valve or an alarm that is ignition protected."""
    circuit = design.section("circuits").get(name.removesuffix(".load")) or {}
    is_load = name.endswith(".load") and circuit.get("service") in ("valve", "alarm")
    return is_load and bool(part.get("ignition_protected"))


@fault("ZON-03")
def gas_bottles_beside_parts(design: Design) -> Iterator[Plant]:
    """Gas bottles are stowed where other things stand."""
    for zone, row in sorted(design.section("zones").items()):
        there = standing(design, zone)
        finds = [("gas-locker", name) for name, part in sorted(there.items()) if not belongs_there(design, name, part)]
        if finds and not row.get("cooking_gas"):
            yield Plant(at("zones", zone, {"cooking_gas": True}), finds=finds)


@fault("ZON-03")
def part_in_the_gas_locker(design: Design) -> Iterator[Plant]:
    """A device is moved into the gas locker."""
    locker = zone_with(design, "cooking_gas")
    is_new = not locker
    locker = locker or "LPG"
    zone = at("zones", locker, {"name": "gas locker", "ambient": "30 C", "cooking_gas": True}) if is_new else {}
    for name, row, part in design.branches():
        if row["zone"] != locker and not belongs_there(design, f"{name}.load", part):
            finds = [("gas-locker", f"{name}.load")]
            yield Plant(merged(zone, at("circuits", name, {"zone": locker})), finds=finds)
    for name, row, part in design.devices():
        if part["kind"] in ("fuse", "breaker", "bus", "shunt") and "positions" not in row:
            # A main device that stood where it is reached at once now does not.
            follows = ("switch-reach",)
            change = merged(zone, at("devices", name, {"zone": locker}))
            yield Plant(change, finds=[("gas-locker", name)], follows=follows)


@trap("ZON-03")
def gas_alarm_in_the_gas_locker(design: Design) -> Iterator[Plant]:
    """An alarm that is ignition protected stands beside the gas bottles."""
    locker = zone_with(design, "cooking_gas")
    for name, row, part in design.branches():
        if row["service"] == "alarm":
            load, parts = design.part_like(row["load"], {"ignition_protected": True})
            zone = {"zone": locker} if locker else {}
            gas = {} if locker else at("zones", row["zone"], {"cooking_gas": True})
            if part.get("ignition_protected"):
                yield Plant(merged(gas, at("circuits", name, zone) if zone else {}))
            else:
                yield Plant(merged(gas, at("circuits", name, {**zone, "load": load})), parts=parts)


@fault("ZON-05")
def load_that_bears_no_bilge_water(design: Design) -> Iterator[Plant]:
    """A load that is made for spray at most stands where bilge water can."""
    bilge = zone_with(design, "bilge_water")
    for name, row, part in design.branches():
        for rating in ("IP65", "IPX4", "IP69K"):
            load, parts = design.part_like(row["load"], {"ingress": rating})
            finds = [("wet-place", f"{name}.load")]
            if row["zone"] == bilge:
                yield Plant(at("circuits", name, {"load": load}), finds=finds, parts=parts)
            elif row["zone"] != engine_zone(design) and not part.get("ignition_protected"):
                change = at("circuits", name, {"load": load, "zone": bilge})
                yield Plant(change, finds=finds, parts=parts)


@fault("ZON-05")
def connection_in_bilge_water(design: Design) -> Iterator[Plant]:
    """A bus, a fuse or a splice that is not made for water lies in the bilge."""
    bilge = zone_with(design, "bilge_water")
    for name, row, part in design.devices():
        if part["kind"] in ("fuse", "breaker", "bus", "shunt") and "positions" not in row:
            change, parts = design.refit(name, {"ingress": "IP44"})
            change = merged(change, at("devices", name, {"zone": bilge}))
            follows = ("switch-reach",)  # a main device under the sole is reached by a hatch
            yield Plant(change, finds=[("wet-place", name)], parts=parts, follows=follows)


@trap("ZON-05")
def part_above_bilge_water(design: Design) -> Iterator[Plant]:
    """The same parts stand above the highest bilge water, or bear it."""
    bilge = zone_with(design, "bilge_water")
    for name, _, _ in design.devices("shunt"):
        change, parts = design.refit(name, {"ingress": "IP44"})
        above = {"zone": bilge, "above_bilge_water": True}
        yield Plant(merged(change, at("devices", name, above)), parts=parts)
        change, parts = design.refit(name, {"ingress": "IPX8"})
        yield Plant(merged(change, at("devices", name, {"zone": bilge})), parts=parts)


# --- heat, reach, hydrogen


@fault("ZON-07")
def fuse_that_opens_early_in_the_heat(design: Design) -> Iterator[Plant]:
    """A device in the engine space carries nearly its rating: in the heat it bears less."""
    engine = engine_zone(design)
    for circuit, row in sorted(design.section("circuits").items()):
        for wire in (row.get("conductors") or {}).values():
            device = next((wire[end][:-5] for end in ("from", "to") if wire[end].endswith(".load")), "")
            given = design.section("devices").get(device)
            if not given or design.parts[given["part"]]["kind"] not in ("fuse", "breaker"):
                continue
            rating_a = ampere(given.get("rating") or design.parts[given["part"]]["rating"])
            moved = {} if given["zone"] == engine else at("devices", device, {"zone": engine})
            if "current" in wire or rating_a > 60:
                continue
            change = merged(moved, at("circuits", circuit, {"current": f"{rating_a * 0.95:g} A"}))
            yield Plant(change, finds=[("hot-device", device)], follows=MORE_CURRENT_IN_THE_HEAT)


MORE_CURRENT_IN_THE_HEAT = (
    "voltage-drop", "voltage-drop-from-bank",  # more current loses more voltage
    "switch-reach",  # a main device behind the engine hatch is not reached at once
    "torque-value",  # a joint with more than 50 A through it needs a torque
)  # fmt: skip


@trap("ZON-07")
def fuse_that_carries_its_load_in_the_heat(design: Design) -> Iterator[Plant]:
    """A device in the engine space whose corrected rating is as large as the current is enough."""
    if design.is_small:
        # 30 A in the engine space count 27 A.
        move = at("devices", "F-CHARGER", {"zone": engine_zone(design)})
        yield Plant(merged(move, at("circuits", "CHARGE", {"current": "27 A"})))
    else:
        yield Plant(at("circuits", "M17", {"current": "48 A"}))  # F-GLOW: 60 A count 54 A
        yield Plant(at("circuits", "M16", {"current": "9 A"}))  # F-ENG: 20 A count 18 A


MAINS = {"small": ("F-MAIN", "SW-H", "SW-S"), "example": ("F-24H", "F-CH", "F-H", "SW-H", "SW-S")}
"""Battery switches and main devices, as a person finds them in the drawing of each design."""


@fault("ZON-08")
def main_switch_under_a_fixed_hatch(design: Design) -> Iterator[Plant]:
    """A battery switch or main device stands where a hatch must be unfastened first."""
    zones = design.section("zones")
    hidden = next((n for n, z in sorted(zones.items()) if z.get("access") == "by-hatch" and len(z) <= 3), "")
    for name in MAINS[design.name]:
        if hidden:
            yield Plant(at("devices", name, {"zone": hidden}), finds=[("switch-reach", name)], line=name)
        else:
            shut = at("zones", "CABIN", {"access": "by-hatch"})
            change = merged(shut, at("devices", name, {"zone": "CABIN"}))
            yield Plant(change, finds=[("switch-reach", name)], line=name)
    home = design.section("devices")["SW-H"]["zone"]
    finds = [("switch-reach", name) for name in MAINS[design.name]]
    yield Plant(at("zones", home, {"access": "by-hatch"}), finds=finds)


@fault("ZON-10")
def battery_space_without_a_vent(design: Design) -> Iterator[Plant]:
    """A space with lead batteries lets no hydrogen out."""
    for zone, row in sorted(design.section("zones").items()):
        lead = [
            n for n, device, part in design.devices("battery") if device["zone"] == zone and part["chemistry"] in LEAD
        ]
        if lead and row.get("hydrogen_vent"):
            yield Plant(at("zones", zone, {"hydrogen_vent": False}), finds=[("battery-vent", zone)], line=f"{zone}:")


@fault("ZON-10")
def more_charge_than_the_space_allows(design: Design) -> Iterator[Plant]:
    """The sources can charge the batteries of a space with more than its vent is made for."""
    zone, most_a = {"small": ("LOCKER", 80), "example": ("Z-BATT", 121 + 60 + 30 + 10 + 30)}[design.name]
    yield Plant(at("zones", zone, {"charge_limit": f"{most_a - 1} A"}), finds=[("battery-vent", zone)], line=f"{zone}:")
    yield Plant(at("zones", zone, {"charge_limit": "20 A"}), finds=[("battery-vent", zone)], line=f"{zone}:")


@trap("ZON-10")
def charge_that_the_space_allows(design: Design) -> Iterator[Plant]:
    """The limit of the space is what the sources can give, or its batteries give off nothing."""
    zone, most_a = {"small": ("LOCKER", 80), "example": ("Z-BATT", 251)}[design.name]
    yield Plant(at("zones", zone, {"charge_limit": f"{most_a} A"}))


# --- bulkheads, AC


def crossing(design: Design) -> set[str]:
    """Return the ways that lie on a run through more than one zone."""
    ways, devices = design.section("ways"), design.section("devices")
    home = positions(design)
    found: set[str] = set()
    for _, row, _ in design.branches():
        bus = home.get(row["feed"], "")
        start = devices[bus]["zone"] if bus else row["zone"]
        zones = {start, row["zone"], *(ways[name]["zone"] for name in row.get("route") or ())}
        found |= set(row.get("route") or ()) if len(zones) > 1 else set()
    return found


@fault("ZON-06")
def way_over_a_bare_edge(design: Design) -> Iterator[Plant]:
    """The conductors of a way pass the bulkhead over a bare edge."""
    for name in sorted(crossing(design)):
        finds = [("passage-guard", name)]
        yield Plant(at("ways", name, {"passage": "bare"}), finds=finds, line="passage: bare")


@fault("ZON-06")
def conductor_over_a_bare_edge(design: Design) -> Iterator[Plant]:
    """A single conductor passes a bulkhead over a bare edge, and then all of them do."""
    devices = design.section("devices")
    for path, name, row in design.conductors():
        ends = [devices.get(post, devices.get(post.rpartition(".")[0])) for post in (row["from"], row["to"])]
        if "route" not in row and all(ends) and len({end["zone"] for end in ends if end}) > 1:
            finds = [("passage-guard", name)]
            yield Plant(at(*path, {"passage": "bare"}), finds=finds, line="passage: bare")
    everywhere = [("passage-guard", "workmanship")]
    yield Plant(at("workmanship", {"passages": "bare"}), finds=everywhere, line="workmanship:")


@fault("ZON-09")
def bare_ac_beside_bare_dc(design: Design) -> Iterator[Plant]:
    """AC cores without a sheath lie in a way with single DC conductors."""
    for _, _, row in design.conductors():
        for way in row.get("route") or ():
            yield Plant(at("ways", way, {"ac": "bare"}), finds=[("ac-apart", way)], line="ac: bare")
    for name, row, _ in design.branches():
        if row.get("route") and row["cable"] != "18 AWG":
            way = row["route"][0]
            change = merged(at("ways", way, {"ac": "bare"}), at("circuits", name, {"type": "single-105"}))
            yield Plant(change, finds=[("ac-apart", way)], line="ac: bare")


@trap("ZON-09")
def bare_ac_beside_sheathed_dc(design: Design) -> Iterator[Plant]:
    """AC cores without a sheath lie in a way in which all DC conductors are sheathed."""
    single = {way for _, _, row in design.conductors() for way in row.get("route") or ()}
    for name in sorted(set(design.section("ways")) - single):
        yield Plant(at("ways", name, {"ac": "bare"}))
