"""Plant faults of bonding, grounding and returns."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.planting import Design, Plant, Row, at, fault, merged, trap

LONGER_WAY_BACK = ("voltage-drop", "voltage-drop-from-bank", "solved-drop")
"""A return by another way has another drop."""


def ends_of(design: Design, device: str) -> tuple[str, ...]:
    """Return the return posts of a load or source."""
    part = design.parts[design.section("devices")[device]["part"]]
    if part["kind"] == "load":
        return (f"{device}.{part.get('return_post', 'neg')}",)
    sides = [*(part.get("outputs") or {}).values(), *(part.get("inputs") or {}).values()]
    return tuple(dict.fromkeys(f"{device}.{side['return']}" for side in sides))


def own_returns(design: Design) -> Iterator[tuple[tuple[str, ...], str, Row]]:
    """Yield the return conductors of loads and sources that are not mounted on an engine: path, id, row."""
    for path, name, row in design.conductors():
        for device, placed, part in design.devices():
            is_away = part["kind"] in ("load", "source") and not placed.get("engine_mounted")
            if is_away and row["from"] in ends_of(design, device):
                yield path, name, row


def bonded_bar(design: Design) -> tuple[Row, str, str]:
    """Return a change that gives the boat a bonding bar if it has none, the bar, and its bond to DC negative."""
    if not design.is_small:
        return {}, "BUS-BOND", "W070"
    bar = at("devices", "BAR", {"part": "bus-100", "zone": "LOCKER"})
    bonds = {
        "B1": {"to": "BAR"},
        "B2": {"from": "BAR", "to": "BUS-N", "size": "8 AWG", "length": "0.5 m", "colour": "green"},
    }
    return merged(bar, {"bonds": bonds}), "BAR", "B2"


@fault("RET-02")
def load_returns_to_the_bonding_bar(design: Design) -> Iterator[Plant]:
    """A branch returns to the bonding bar, and the bond carries its current."""
    change, bar, bond = bonded_bar(design)
    in_use = {name for row in design.section("conditions").values() for name in row.get("loads") or {}}
    for name, _, _ in design.branches():
        if name in in_use:
            follows = (*LONGER_WAY_BACK, "panel-return")  # it leaves the bus of its panel
            plant = merged(change, at("circuits", name, {"returns": bar}))
            yield Plant(plant, finds=[("bond-current", bond)], line=bond, follows=follows)


@fault("RET-03")
def second_joint(design: Design) -> Iterator[Plant]:
    """A second bond leads from the bonding system to the DC negative."""
    metals = ("ANODE",) if design.is_small else ("KEEL-BOLT", "TANK-FUEL", "THRU-HULLS", "ANODE", "BUS-BOND")
    others = ("PANEL-N", "ENGINE") if design.is_small else ("ENG", "BUS-PN", "BUS-24N")
    follows = (
        "bond-current",  # the bond is now a return beside the wiring
        "lost-return",  # and takes over when the return comes loose
    )
    for metal in metals:
        for other in others:
            bond = {"from": metal, "to": other, "size": "8 AWG", "length": "2 m", "colour": "green"}
            yield Plant(at("bonds", "Z1", bond), finds=[("bond-joints", "Z1")], line="Z1", follows=follows)


@fault("RET-03")
def bond_beside_a_return(design: Design) -> Iterator[Plant]:
    """A bond joins two buses that wiring joins already."""
    for other in ("PANEL-N",) if design.is_small else ("BUS-PN", "BUS-24N"):
        bond = {"from": other, "to": "BUS-N", "size": "8 AWG", "length": "2 m", "colour": "green"}
        follows = ("bond-current", "lost-return")  # it is a return beside the wiring
        yield Plant(at("bonds", "Z1", bond), finds=[("bond-joints", "Z1")], line="Z1", follows=follows)


@fault("RET-04")
def return_on_the_engine_block(design: Design) -> Iterator[Plant]:
    """The return of a device that stands elsewhere is landed on the engine block."""
    block = "ENGINE" if design.is_small else "ENG"
    for path, name, row in own_returns(design):
        if row.get("role") == "engine-harness":
            continue  # the engine maker's own harness may land there
        follows = (
            *LONGER_WAY_BACK,
            "solved-ampacity",  # the engine's return now carries it as well
            "return-protection",  # and what a failed load sends through it
            "lost-return",
            "minimum-voltage",
        )
        yield Plant(at(*path, {"to": block}), finds=[("metal-return", name)], line=name, follows=follows)


@fault("RET-04")
def branch_returns_through_metal(design: Design) -> Iterator[Plant]:
    """A branch returns to a metal part."""
    metal = "ENGINE" if design.is_small else "ENG"
    for name, _, _ in design.branches():
        follows = (*LONGER_WAY_BACK, "return-protection", "solved-ampacity", "lost-return", "panel-return")
        change = at("circuits", name, {"returns": metal})
        yield Plant(change, finds=[("metal-return", f"{name}.back")], line=name, follows=follows)


@fault("RET-05")
def shield_at_both_ends(design: Design) -> Iterator[Plant]:
    """A shield that is joined at one end is joined at the other too."""
    others = (
        ("BUS-N", "ENGINE", "ANODE") if design.is_small else ("BUS-N", "ENG", "STARTER.case", "KEEL-BOLT", "ALT.case")
    )
    for name, row in sorted(design.section("shields").items()):
        if len(row["joins"]) != 1:
            continue
        for other in others:
            change = at("shields", name, {"joins": [*row["joins"], other]})
            follows = ("lost-return",)  # what the shield carries when the return comes loose
            yield Plant(change, finds=[("shield-loop", name)], line=name, follows=follows)


def second_engine(design: Design, size: str, *, own_battery: bool) -> tuple[Row, str]:
    """Return a change that makes the engine a petrol one and adds a second, and the second cranking motor.

    Its motor returns to the negative bus by a conductor of its own, or to its battery alone.
    """
    devices, section = design.section("devices"), "ZCRANK"
    start, switch = devices["BAT-S"], devices["SW-S"]
    engine = "ENGINE" if design.is_small else "ENG"
    facts = {
        "engines": {
            ("MAIN" if design.is_small else "MAIN-ENGINE"): {"fuel": "petrol"},
            "SECOND": {"fuel": "petrol", "mounting": "inboard", "block": "ZENGINE"},
        }
    }
    placed = {
        "ZENGINE": dict(devices[engine]), "ZSTARTER": dict(devices["STARTER"]),
        "ZBAT": {**start, "bank": "ZSTART"}, "ZSW": dict(switch),
    }  # fmt: skip
    placed["ZENGINE"].pop("note", None)
    big = {"size": "4/0 AWG", "length": "0.5 m", "role": "cranking", "reason": "cranking motor"}
    back = {**big, "size": size, "colour": "yellow"}
    conductors = {
        "Z1": {"from": "ZBAT.pos", "to": "ZSW.in", **big},
        "Z2": {"from": "ZSW.out", "to": "ZSTARTER.B", **big},
        "Z3": {"from": "ZSTARTER.case", "to": "ZBAT.neg" if own_battery else "BUS-N", **back},
        "Z4": {"from": "BUS-N", "to": "ZBAT.neg", **big, "colour": "yellow"},
    }
    circuit = {"name": "Second starter", "service": "cranking", "current": "200 A", "conductors": conductors}
    joints = {"ZJOINT": {"from": "ZSTARTER.case", "to": "ZENGINE"}}
    change: Row = {"facts": facts, "devices": placed, "circuits": {section: circuit}, "joints": joints}
    # Every state of the example's table names its switches: the second one is closed in all of them.
    for name, row in sorted(design.section("conditions").items()):
        if row.get("switches"):
            _merge_switch(change, name)
    return change, "ZSTARTER"


def _merge_switch(change: Row, condition: str) -> None:
    change.setdefault("conditions", {})[condition] = {"switches": {"ZSW": "closed"}}


@fault("RET-08")
def thin_crossover(design: Design) -> Iterator[Plant]:
    """Two petrol engines share the negative bus, and the second cranks through a thin conductor."""
    for size in ("4 AWG", "6 AWG", "2 AWG", "8 AWG"):
        change, motor = second_engine(design, size, own_battery=False)
        follows = (
            "return-size",  # its feed is thicker
            "minimum-voltage",
            "solved-drop",
            "lost-return",
            "vapour-zone",  # an engine that burns petrol
        )
        yield Plant(change, finds=[("common-ground", f"STARTER and {motor}")], line=motor, follows=follows)


@fault("RET-08")
def crossover_over_batteries(design: Design) -> Iterator[Plant]:
    """The cranking returns of two petrol engines meet over the negative cables of their batteries alone."""
    change, motor = second_engine(design, "4/0 AWG", own_battery=True)
    yield Plant(change, finds=[("common-ground", f"STARTER and {motor}")], line=motor, follows=("vapour-zone",))


def cased(design: Design) -> Iterator[tuple[Row, dict[str, Row], str, str, str]]:
    """Yield devices with a grounded case: change, parts, the device, its bond and the size of its thickest feed."""
    if design.is_small:
        change, parts = design.refit("CHARGER", {"case_post": "case", "case_isolated": True})
        bond = {"from": "CHARGER.case", "to": "BUS-N", "size": "10 AWG", "length": "2 m", "colour": "green"}
        yield merged(change, at("bonds", "Z1", bond)), parts, "CHARGER", "Z1", "10 AWG"
        return
    for name, device, feed in (("W071", "CHG", "4 AWG"), ("W072", "INV", "2/0 AWG")):
        yield {}, {}, device, name, feed


@fault("RET-09")
def thin_grounding_conductor(design: Design) -> Iterator[Plant]:
    """The case of a device is grounded two sizes below its feed."""
    thinner = {"10 AWG": ("14 AWG", "16 AWG"), "4 AWG": ("8 AWG", "10 AWG"), "2/0 AWG": ("1 AWG", "2 AWG", "4 AWG")}
    for change, parts, _, bond, feed in cased(design):
        for size in thinner[feed]:
            plant = merged(change, at("bonds", bond, {"size": size}))
            yield Plant(plant, finds=[("grounding-size", bond)], line=f"size: {size}", parts=parts)


@fault("RET-10")
def bank_without_reference(design: Design) -> Iterator[Plant]:
    """A bank is tied to the DC reference by nothing."""
    follows = ("unprotected-conductor",)  # neither of its poles is grounded: both want a device
    if not design.is_small:
        for options in (["OPT-24V"], ["OPT-24V", "OPT-SOL2"]):
            yield Plant(
                at("bonds", "W109", None),
                finds=[("floating-part", "BOW")],
                line="BAT-B1",
                options=options,
                follows=follows,
            )  # type: ignore[arg-type]
        return
    for load in ("plotter", "bow-light", "cabin-lights"):
        change = aux_bank(load)
        yield Plant(change, finds=[("floating-part", "AUX")], line="ZBAT", follows=follows)


def aux_bank(load: str, negative: str = "") -> Row:
    """Return a change that adds a bank with one load, its negative joined to a post or to nothing else."""
    conductors = {
        "Z1": {"from": "ZBAT.pos", "to": "ZFUSE.line", "size": "14 AWG", "length": "0.1 m"},
        "Z2": {"from": "ZFUSE.load", "to": "ZLOAD.pos", "size": "14 AWG", "length": "1 m"},
        "Z3": {"from": "ZLOAD.neg", "to": "ZBAT.neg", "size": "14 AWG", "length": "1 m", "colour": "yellow"},
    }
    if negative:
        conductors["Z4"] = {"from": "ZBAT.neg", "to": negative, "size": "14 AWG", "length": "1 m"}
    devices = {
        "ZBAT": {"part": "house-battery", "zone": "BOW", "bank": "AUX"},
        "ZFUSE": {"part": "blade-fuse", "zone": "BOW", "rating": "5 A"},
        "ZLOAD": {"part": load, "zone": "BOW"},
    }
    always = "it has no switch: a bank of its own for one load"
    circuit = {
        "name": "Load on a bank of its own", "service": "sense", "current": "0.5 A", "always_on": always,
        "conductors": conductors,
    }  # fmt: skip
    return {"devices": devices, "circuits": {"ZAUX": circuit}}


@fault("RET-12")
def grounded_case_that_is_not_isolated(design: Design) -> Iterator[Plant]:
    """A device whose case is on its negative inside is grounded at the case as well."""
    for change, parts, device, _, _ in cased(design):
        part = parts[change["devices"][device]["part"]] if parts else {}
        refit, made = design.refit(device, {**part, "case_isolated": False})
        yield Plant(merged(change, refit), finds=[("case-ground", device)], line=device, parts=made)


@trap("T-11")
def engine_mounted_devices_return_through_the_block(design: Design) -> Iterator[Plant]:
    """A sender that is screwed into the engine has no return wire of its own."""
    panel, block, zone, home = (
        ("PANEL", "ENGINE", "ENGINE-SPACE", "CABIN") if design.is_small else ("BUS-PP", "ENG", "Z-ENG", "Z-NAV")
    )
    for part in ("bow-light", "cabin-lights") if design.is_small else ("gauges", "lt-helm", "nl-stern"):
        devices = {
            "ZPLUG": {"part": part, "zone": zone, "engine_mounted": True},
            "ZFUSE": {"part": "panel-breaker", "zone": home, "rating": "5 A", "mount": {"line": panel}},
        }
        wire = {"from": "ZFUSE.load", "to": "ZPLUG.pos", "size": "10 AWG", "length": "2 m", "colour": "red"}
        circuit = {"name": "Sender", "service": "gauges", "current": "0.5 A", "conductors": {"Z1": wire}}
        joints = {"ZJOINT": {"from": "ZPLUG.neg", "to": block}}
        yield Plant({"devices": devices, "circuits": {"ZPLUG": circuit}, "joints": joints})


@trap("T-18")
def more_metal_on_the_one_bonding_system(design: Design) -> Iterator[Plant]:
    """More metal parts are bonded, and one conductor still joins them to DC negative."""
    part, zone = ("sacrificial-anode", "BOW") if design.is_small else ("through-hulls", "Z-BILGE")
    metals = ("ANODE",) if design.is_small else ("BUS-BOND", "KEEL-BOLT", "ANODE", "TANK-FUEL")
    for metal in metals:
        devices = {"ZMETAL": {"part": part, "zone": zone}}
        bond = {"from": "ZMETAL", "to": metal, "size": "8 AWG", "length": "2 m", "colour": "green"}
        yield Plant({"devices": devices, "bonds": {"Z1": bond}})
