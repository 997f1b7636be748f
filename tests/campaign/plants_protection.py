"""Plant faults of overcurrent protection: missing, far off, too large, of the wrong kind, or gone round."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.figures import AMPACITY_A, DEVICE_FACTOR, ENCLOSED_IN, ENGINE_FACTOR, OPEN_IN, length_of_drop_m
from tests.campaign.places import (
    Place,
    ampere,
    crosses_engine_space,
    current_a,
    device_of,
    is_return,
    kind_of,
    metres,
    trunk,
)
from tests.campaign.planting import Design, Plant, Row, at, fault, merged, trap
from tests.campaign.plants_conductors import DROPS, LONGER, THINNER

OTHER_RATING = (
    "selectivity", "rating-order", "maker-device", "device-carries-load", "far-end-clearing", "conductor-withstand",
    "bus-rating", "return-protection", "size-step", "double-feed", "solved-rating", "legend-rating", "source-maximum",
)  # fmt: skip
"""What else a device of another rating breaks: its rank among others, its load, its bus, its conductors."""


def devices(design: Design) -> Iterator[tuple[str, Row, Row]]:
    """Yield the fuses and breakers that are written by themselves."""
    for name, row, part in design.devices():
        if part["kind"] in ("fuse", "breaker"):
            yield name, row, part


def rating_a(row: Row, part: Row) -> float:
    """Return the rating of a device."""
    return ampere(row["rating"] if "rating" in row else part["rating"])


def rated(design: Design, device: str, amps: float, **facts: object) -> tuple[Row, dict[str, Row]]:
    """Return the change that gives a device another rating, and the part to add."""
    row = design.section("devices")[device]
    ohm = design.parts[row["part"]].get("resistance", "3 mohm")
    part, parts = design.part_like(row["part"], {"rating": f"{amps:g} A", "ratings": None, "resistance": ohm, **facts})
    change: Row = {"part": part}
    if "rating" in row:
        change["rating"] = None
    return at("devices", device, change), parts


def on_battery(design: Design, post: str) -> bool:
    """Tell whether a post is a battery's, or the collector of a bank."""
    return kind_of(design, post) == "battery" or post == "STUD-HB-POS"


def first_pieces(design: Design) -> Iterator[tuple[Place, str, str]]:
    """Yield the conductors between a battery and the line side of a device, with the source post and the device."""
    for path, name, row in design.conductors():
        for here, there in ((row["from"], row["to"]), (row["to"], row["from"])):
            if on_battery(design, here) and kind_of(design, there) in ("fuse", "breaker"):
                yield (path, name, row), here, device_of(design, there)


def behind(design: Design) -> Iterator[tuple[Place, str, float]]:
    """Yield the conductors at the load side of a device, with the device and its rating."""
    known = {name: rating_a(row, part) for name, row, part in devices(design)}
    for path, name, row in trunk(design):
        for end in (row["from"], row["to"]):
            device = device_of(design, end)
            if device in known and end == f"{device}.load":
                yield (path, name, row), device, known[device]


def at_once_from_battery(design: Design) -> Iterator[tuple[Place, str, str]]:
    """Yield the conductors behind a device that stands at a battery, with the battery's post and the device."""
    sources = {device: source for _, source, device in first_pieces(design)}
    mounts = {
        name: row["mount"]["line"] for name, row, _ in devices(design)
        if "line" in row.get("mount", {}) and on_battery(design, row["mount"]["line"])
    }  # fmt: skip
    for place, device, _ in behind(design):
        if device in {**sources, **mounts}:
            yield place, {**sources, **mounts}[device], device


NO_DEVICE = (
    "ahead-of-switch",  # what it feeds may now be ahead of every switch
    "unprotected-conductor", "protection-distance",  # and all that lies behind it
    "solved-drop", "alternator-cut-off", "bus-rating", "device-rating", "size-step", "double-feed",
    "return-protection", "solved-rating", "conductor-withstand", "interrupting-capacity", "far-end-clearing",
)  # fmt: skip
"""What else a conductor without its device breaks."""


def without_its_device(design: Design, circuits: dict[str, tuple[str, ...]]) -> Iterator[Plant]:
    """Yield the plants that land conductors of some circuits on the battery itself, past their fuse."""
    for (path, name, row), source, device in at_once_from_battery(design):
        if path[1] in circuits[design.name] or not circuits[design.name]:
            end = "from" if device_of(design, row["from"]) == device else "to"
            yield Plant(
                at(*path, {end: source}), finds=[("unprotected-conductor", name)], line=row["size"],
                follows=[check for check in NO_DEVICE if check != "unprotected-conductor"],
            )  # fmt: skip


@fault("PRO-01")
def no_device_at_all(design: Design) -> Iterator[Plant]:
    """A conductor is landed on the battery past its fuse.

    One that leads on to other devices is told at these, as too far from the battery.
    """
    for (path, name, row), source, device in at_once_from_battery(design):
        end, far = ("from", row["to"]) if device_of(design, row["from"]) == device else ("to", row["from"])
        leads_on = kind_of(design, far) in ("bus", "switch")
        finds = [] if leads_on else [("unprotected-conductor", name)]
        follows = (*NO_DEVICE, *(["protection-distance"] if leads_on else []))
        if not leads_on:
            yield Plant(at(*path, {end: source}), finds=finds, line=row["size"], follows=follows)


@fault("PRO-02")
def main_device_left_out(design: Design) -> Iterator[Plant]:
    """A main is landed on the battery past its fuse: what it leads to is too far from the battery."""
    lasts = {
        "small": {"M2": ["M3"]},
        "example": {"W011": ["W203", "W204", "W208", "W209", "W210"], "W016": ["W205", "W206", "W207", "W211"]},
    }
    for (path, name, _), source, _ in at_once_from_battery(design):
        if name in lasts[design.name]:
            finds = [("protection-distance", last) for last in lasts[design.name][name]]
            yield Plant(at(*path, {"from": source}), finds=finds, follows=NO_DEVICE)


@fault("PRO-17")
def charger_lead_without_its_fuse(design: Design) -> Iterator[Plant]:
    """The charger's lead meets the battery without a fuse."""
    yield from _leads(design, {"small": {"C1": "BAT-H.pos"}, "example": {"W042": "STUD-HB-POS", "W044": "BAT-S.pos"}})


@fault("PRO-21")
def alternator_lead_without_its_fuse(design: Design) -> Iterator[Plant]:
    """The alternator's cable meets the battery without a fuse."""
    yield from _leads(design, {"small": {"A1": "BAT-H.pos"}, "example": {"W040": "STUD-HB-POS"}})


@fault("PRO-22")
def sense_lead_without_its_fuse(design: Design) -> Iterator[Plant]:
    """A sense or monitor lead is taken from the battery without a fuse."""
    yield from _leads(
        design,
        {
            "small": {"V2": "BAT-H.pos", "Q2": "BAT-H.pos"},
            "example": {"W064": "STUD-HB-POS", "W066": "STUD-HB-POS", "W067": "BAT-S.pos"},
        },
    )


@fault("PRO-18")
def solar_lead_without_its_fuse(design: Design) -> Iterator[Plant]:
    """The solar controller's output meets the battery without a fuse."""
    if design.is_small:
        yield _extra_source("solar", fused=False)
    yield from _leads(design, {"small": {}, "example": {"W046": "STUD-HB-POS"}})


@fault("PRO-20")
def converter_lead_without_its_fuse(design: Design) -> Iterator[Plant]:
    """The output of a DC-DC charger meets the battery that it charges without a fuse."""
    if design.is_small:
        yield _extra_source("charging", fused=False)
    yield from _leads(design, {"small": {}, "example": {"W052": "BAT-S.pos"}})


def _leads(design: Design, leads: dict[str, dict[str, str]]) -> Iterator[Plant]:
    rows = {name: (path, row) for path, name, row in design.conductors()}
    for name, source in leads[design.name].items():
        path, row = rows[name]
        end = "from" if kind_of(design, row["from"]) == "fuse" else "to"
        yield Plant(
            at(*path, {end: source}), finds=[("unprotected-conductor", name)], line=row["size"],
            follows=("solved-drop",),
        )  # fmt: skip


def _extra_source(service: str, *, fused: bool) -> Plant:
    """Return a second charge source of the small boat, whose lead meets the start battery."""
    is_solar = service == "solar"
    out = {"return": "neg", "max": "10 A", "voltage": "14.4 V", "limited": True}
    part: Row = {"kind": "source", "outputs": {"out": out}, "ignition_protected": True, "internal_fuse": True}
    if not is_solar:
        part |= {"inputs": {"inpos": {"return": "neg", "max": "12 A", "voltage": "12 V"}}, "blocks_reverse": True,
                 "enable": "key switch"}  # fmt: skip
    wires: Row = {
        "X1": {"from": "SRC.out", "to": "BAT-S.pos", "size": "10 AWG", "length": "1 m"},
        "X2": {"from": "SRC.neg", "to": "BUS-N", "size": "10 AWG", "length": "1 m"},
    }
    devices: Row = {"SRC": {"part": f"planted-{service}", "zone": "LOCKER"}}
    if fused:
        wires["X1"]["to"] = "F-SRC.load"
        devices["F-SRC"] = {"part": "bolt-fuse", "zone": "LOCKER", "rating": "30 A", "mount": {"line": "BAT-S.pos"}}
    if not is_solar:
        devices["F-IN"] = {"part": "bolt-fuse", "zone": "LOCKER", "rating": "30 A", "mount": {"line": "BUS-P"}}
        wires["X3"] = {"from": "F-IN.load", "to": "SRC.inpos", "size": "10 AWG", "length": "1 m"}
    change = {
        "devices": devices,
        "circuits": {"PLANTED": {"name": "planted source", "service": "charging", "current": "12 A",
                                 "conductors": wires}},
    }  # fmt: skip
    return Plant(
        change, finds=() if fused else [("unprotected-conductor", "X1")], line="" if fused else "size: 10 AWG",
        parts={f"planted-{service}": part},
    )  # fmt: skip


# --- how far off, and under what cover


@fault("PRO-02")
def device_far_from_the_battery(design: Design) -> Iterator[Plant]:
    """The open piece between the battery and its device is longer than 7 in."""
    for (path, name, row), _, _ in first_pieces(design):
        change: Row = {"length": f"{OPEN_IN + 1} in"}
        if "enclosed" in row:
            change["enclosed"] = None
        yield Plant(
            at(*path, change), finds=[("protection-distance", name)], line=row["size"], follows=("solved-drop",)
        )


@fault("PRO-02")
def device_far_from_the_battery_in_a_sheath(design: Design) -> Iterator[Plant]:
    """The sheathed piece between the battery and its device is longer than 40 in."""
    for (path, name, row), _, _ in first_pieces(design):
        change = {"length": f"{ENCLOSED_IN + 1} in", "enclosed": "full", "place_reason": "no room nearer"}
        if row.get("enclosed") == "full":
            del change["enclosed"]
        yield Plant(at(*path, change), finds=[("protection-distance", name)], line=row["size"], follows=DROPS)


@fault("PRO-03")
def sheath_over_a_part(design: Design) -> Iterator[Plant]:
    """The piece between the battery and its device is sheathed, but not all of it."""
    for (path, name, row), _, _ in first_pieces(design):
        change = {"length": "0.5 m", "enclosed": "0.4 m", "place_reason": "no room nearer"}
        yield Plant(at(*path, change), finds=[("protection-distance", name)], line=row["size"], follows=DROPS)


# --- too large


@fault("PRO-04")
def device_beyond_its_conductor(design: Design) -> Iterator[Plant]:
    """A device is rated beyond 150 per cent of what its conductor bears."""
    at_battery = {device for _, _, device in first_pieces(design)}
    for (_, name, row), device, _ in behind(design):
        if is_return(design, row):
            continue
        bears = AMPACITY_A[row["size"]] * (ENGINE_FACTOR if crosses_engine_space(design, row) else 1)
        amps = bears * DEVICE_FACTOR * 1.1
        # Behind the house fuse of 400 A, or the small boat's of 150 A, no more than that can come.
        main_a = {"small": 150, "example": 300}[design.name]
        if device in at_battery or amps < main_a:
            change, parts = rated(design, device, amps)
            yield Plant(
                change, finds=[("device-rating", name)], line=row["size"], parts=parts,
                follows=(*OTHER_RATING, "device-rating"),  # also of what lies further along
            )  # fmt: skip


@fault("PRO-04")
def breaker_beyond_its_branch(design: Design) -> Iterator[Plant]:
    """A branch breaker is rated beyond what its cable allows."""
    largest = {"small": 30, "example": 30}[design.name]
    for name, row, _ in design.branches():
        if row["cable"] in ("16 AWG", "18 AWG") and row["feed"] != "PNL-01" and row["feed"][:3] != "24H":
            change = at("circuits", name, {"cable": "18 AWG", "bare_tail": "6 in", "protect": f"{largest} A"})
            if row["cable"] == "18 AWG":
                del change["circuits"][name]["cable"]
                del change["circuits"][name]["bare_tail"]
            finds = [("device-rating", f"{name}.out")]
            yield Plant(change, finds=finds, line="18 AWG", follows=(*OTHER_RATING, *THINNER, "minimum-size"))


TAIL = (
    *DROPS,
    "solved-ampacity",  # what it carries in the conditions
    "conductor-withstand", "far-end-clearing", "minimum-voltage",
    "device-rating",  # fed from its other end too
    "double-feed",
    "size-step",  # the pieces beyond it, which now stand too far from the device
)  # fmt: skip
"""What else a thin tail breaks."""


def tails(design: Design, *, steps: int) -> Iterator[Plant]:
    """Yield the plants in which a feed goes on from a splice in a gauge too thin for its device.

    With two steps the first splice leads to a piece that suits the device.
    """
    gauges = list(AMPACITY_A)
    bus = next(part for part, row in sorted(design.parts.items()) if row["kind"] == "bus")
    part, parts = design.part_like(bus, {"rating": "600 A"})
    for (path, _, row), device, rating in behind(design):
        thin = [g for g in gauges[1:] if AMPACITY_A[g] * DEVICE_FACTOR < rating * 0.9]
        far = row["to"] if device_of(design, row["from"]) == device else row["from"]
        is_source = design.parts[design.section("devices")[device_of(design, far)]["part"]]["kind"] in (
            "source",
            "fuse",
        )
        if is_return(design, row) or not thin or is_source or kind_of(design, far) == "breaker":
            continue
        zone = design.section("devices")[device_of(design, far)]["zone"]
        suited = [
            g
            for g in gauges
            if AMPACITY_A[g] * ENGINE_FACTOR >= rating and g in gauges[: gauges.index(row["size"]) + 1]
        ]
        tail = {"from": "SPLICE-2" if steps > 1 else "SPLICE-1", "to": far, "size": thin[-1], "length": "0.3 m",
                "current": "1 A"}  # fmt: skip
        change = merged(
            at("devices", {"SPLICE-1": {"part": part, "zone": zone}}),
            at(*path, {"to" if far == row["to"] else "from": "SPLICE-1"}),
            at(*path[:-1], "TAIL", tail),
        )
        if steps > 1:
            middle = {"from": "SPLICE-1", "to": "SPLICE-2", "size": (suited or [row["size"]])[0], "length": "0.3 m"}
            change = merged(
                change, at("devices", {"SPLICE-2": {"part": part, "zone": zone}}), at(*path[:-1], "MIDDLE", middle)
            )
        yield Plant(change, finds=[("size-step", "TAIL")], line=f"size: {thin[-1]}", parts=parts, follows=TAIL)


@fault("PRO-05")
def step_without_a_device(design: Design) -> Iterator[Plant]:
    """A feed goes on in a thinner gauge with no device at the step."""
    yield from tails(design, steps=1)


@fault("PRO-06")
def second_step_without_a_device(design: Design) -> Iterator[Plant]:
    """A feed becomes thinner twice, and its device suits the first step alone."""
    yield from tails(design, steps=2)


# --- of the wrong kind, or in the wrong place


@fault("PRO-07")
def fuse_in_the_negative(design: Design) -> Iterator[Plant]:
    """The fuse of a load stands in its return."""
    circuits = {"small": [("SENSE", "V1", "V2", "V3")], "example": [("M16", "W215", "W060", "W061")]}
    for circuit, first, feed, back in circuits[design.name]:
        rows = design.section("circuits")[circuit]["conductors"]
        source, line, load = rows[first]["from"], rows[first]["to"], rows[feed]["from"]
        change = at(
            "circuits", circuit, "conductors",
            {feed: {"from": source}, back: {"to": line}, first: {"from": load, "to": rows[back]["to"]}},
        )  # fmt: skip
        # The fuse stands in the return, and a red conductor with it.
        follows = ("switched-return", "colour-change")
        yield Plant(change, finds=[("unprotected-conductor", feed)], line=rows[feed]["size"], follows=follows)


@fault("PRO-09")
def device_that_cannot_break_the_fault(design: Design) -> Iterator[Plant]:
    """A device can break less than can flow where it stands."""
    for name, _, _ in devices(design):
        change, parts = design.refit(name, {"interrupting": "300 A"})
        yield Plant(change, finds=[("interrupting-capacity", name)], parts=parts)


@fault("PRO-09", "FLT-08")
def substituted_fuse_of_less_capacity(design: Design) -> Iterator[Plant]:
    """A hull has fuses or breakers of the same ratings on a panel, of a series that breaks less."""
    for bus, served in panels(design):
        row = design.section("devices")[bus]["positions"]
        part, parts = design.part_like(row["takes"], {"interrupting": "200 A"})
        finds = [("interrupting-capacity", feed) for feed in served]
        yield Plant(at("devices", bus, {"positions": {"takes": part}}), finds=finds, parts=parts)


def panels(design: Design) -> Iterator[tuple[str, list[str]]]:
    """Yield the panels and fuse blocks with the positions that are used."""
    for bus, row, _ in design.devices("bus"):
        if "positions" in row:
            stem = row["positions"]["first"].rstrip("0123456789")
            used = {circuit["feed"] for _, circuit, _ in design.branches()}
            yield bus, sorted(feed for feed in used if feed.rstrip("0123456789") == stem)


@fault("PRO-10")
def device_of_too_low_a_voltage(design: Design) -> Iterator[Plant]:
    """A device is made for less than the voltage of its net."""
    for name, _, _ in devices(design):
        change, parts = design.refit(name, {"voltage": "6 V"})
        yield Plant(change, finds=[("device-voltage", name)], parts=parts)
    for bus, served in panels(design):
        part, parts = design.part_like(design.section("devices")[bus]["positions"]["takes"], {"voltage": "6 V"})
        finds = [("device-voltage", feed) for feed in served]
        yield Plant(at("devices", bus, {"positions": {"takes": part}}), finds=finds, parts=parts, line="protect:")


@fault("PRO-11")
def breaker_that_resets_itself(design: Design) -> Iterator[Plant]:
    """A breaker resets itself, or can be held closed."""
    wrongs: list[Row] = [{"reset": "automatic"}, {"trip_free": False}]
    for index, (name, _, part) in enumerate(devices(design)):
        if part["kind"] == "breaker":
            change, parts = design.refit(name, wrongs[index % 2])
            yield Plant(change, finds=[("breaker-type", name)], parts=parts)
    for bus, served in panels(design):
        takes = design.section("devices")[bus]["positions"]["takes"]
        for wrong in wrongs:
            if design.parts[takes]["kind"] == "breaker":
                series, parts = design.part_like(takes, wrong)
                finds = [("breaker-type", feed) for feed in served]
                yield Plant(at("devices", bus, {"positions": {"takes": series}}), finds=finds, parts=parts)


MAINS = {"small": ("F-PANEL", "PANEL"), "example": ("CB-PM", "BUS-PP")}
"""The device ahead of the panel, and the panel."""


@fault("PRO-12")
def main_as_quick_as_its_branches(design: Design) -> Iterator[Plant]:
    """The device ahead of a panel is as quick as the breakers below it, and hardly larger than the largest."""
    main, panel = MAINS[design.name]
    takes = design.parts[design.section("devices")[panel]["positions"]["takes"]]
    largest_a = max(ampere(row["protect"]) for _, row, _ in design.branches())
    change, parts = rated(design, main, largest_a * 1.2, band=takes["band"])
    largest = {row["feed"] for _, row, _ in design.branches() if ampere(row["protect"]) == largest_a}
    finds = [("selectivity", f"{feed} under {main}") for feed in sorted(largest)]
    yield Plant(change, finds=finds, parts=parts, follows=("selectivity", "solved-rating"))


@fault("PRO-12")
def ratio_too_small_without_bands(design: Design) -> Iterator[Plant]:
    """A device without a band is less than 1.6 times as large as one below it."""
    main, _ = MAINS[design.name]
    largest_a = max(ampere(row["protect"]) for _, row, _ in design.branches())
    change, parts = rated(design, main, largest_a * 1.5, band=None)
    largest = {row["feed"] for _, row, _ in design.branches() if ampere(row["protect"]) == largest_a}
    finds = [("selectivity", f"{feed} under {main}") for feed in sorted(largest)]
    yield Plant(change, finds=finds, parts=parts, follows=("selectivity", "solved-rating"))


@fault("PRO-13")
def main_smaller_than_its_branches(design: Design) -> Iterator[Plant]:
    """The device ahead of a panel is smaller than some of its branches."""
    main, _ = MAINS[design.name]
    for amps in (6, 9, 12, 14):
        larger = {row["feed"] for _, row, _ in design.branches() if ampere(row["protect"]) > amps}
        finds = [("rating-order", f"{feed} under {main}") for feed in sorted(larger) if feed[:3] != "24H"]
        change, parts = rated(design, main, amps)
        yield Plant(change, finds=finds, parts=parts, follows=OTHER_RATING)


@fault("PRO-14")
def breaker_below_its_load(design: Design) -> Iterator[Plant]:
    """A branch breaker is smaller than its load's current."""
    made = {"small": (5, 10, 15, 20, 30), "example": (5, 7.5, 10, 15, 20, 25, 30)}[design.name]
    for name, row, load in design.branches():
        small = [amps for amps in made if amps < ampere(load["current"])]
        if small and row["feed"][:3] != "24H":
            change = at("circuits", name, {"protect": f"{small[-1]:g} A"})
            finds = [("device-carries-load", row["feed"])]
            # A smaller breaker has the larger resistance.
            follows = ("solved-rating", "solved-drop")
            yield Plant(change, finds=finds, line=f"protect: {small[-1]:g} A", follows=follows)


@fault("PRO-14", "PRO-19")
def device_that_opens_at_the_start(design: Design) -> Iterator[Plant]:
    """A motor or inverter starts with more than its device lets pass that long."""
    service = {"service": "inverter"} if design.is_small else {}
    starts = {"small": [("PUMP", "P3", 45)], "example": [("P22", "PNL-21", 90), ("P31", "PNL-30", 70)]}
    for circuit, device, amps in starts[design.name]:
        load = design.section("circuits")[circuit]["load"]
        part, parts = design.part_like(load, {"peak": f"{amps} A"})
        yield Plant(
            at("circuits", circuit, {"load": part, **service}), parts=parts, line="protect",
            finds=[("device-carries-load", f"{device} while {part} starts")],
        )  # fmt: skip
    if not design.is_small:
        part, parts = design.part_like("inverter-2000", {"peak": "800 A"})
        change, fuse = design.refit("F-INV", {"band": "blade"})
        yield Plant(
            merged(change, at("devices", "INV", {"part": part})), parts={**parts, **fuse},
            finds=[("device-carries-load", f"F-INV while {part} starts")], follows=("selectivity",),
        )  # fmt: skip


@fault("PRO-15")
def long_thin_run_keeps_its_device_closed(design: Design) -> Iterator[Plant]:
    """A run is so long that a short circuit at its end draws little more than its device's rating."""
    for name, row, _ in design.branches():
        # 10 V over the loop at 1.2 times the rating.
        needed_m = length_of_drop_m(5, 1.2 * ampere(row["protect"]), row["cable"])
        change: Row = {"length": f"{needed_m:.2f} m"} | {key: None for key in ("route", "tail") if key in row}
        finds = [("far-end-clearing", row["feed"])]
        yield Plant(at("circuits", name, change), finds=finds, line="protect", follows=LONGER)


@fault("PRO-16")
def link_fused_at_one_end(design: Design) -> Iterator[Plant]:
    """The cable between two banks is fused at one end only."""
    if design.is_small:
        yield small_link(fused_at_both_ends=False)
        return
    change = at("circuits", "M05", "conductors", "W035", {"to": "SW-S.out"})
    finds = [("unprotected-conductor", "W035"), ("protection-distance", "W034")]
    yield Plant(change, finds=finds, line="size: 2/0 AWG")


def small_link(*, fused_at_both_ends: bool) -> Plant:
    """Return an emergency link between the banks of the small boat, open in normal operation."""
    devices: Row = {
        "SW-X": {"part": "battery-switch", "zone": "LOCKER"},
        "F-X1": {"part": "bolt-fuse", "zone": "LOCKER", "rating": "125 A", "mount": {"line": "BUS-P"}},
    }
    wires: Row = {
        "X1": {"from": "F-X1.load", "to": "SW-X.in", "size": "2 AWG", "length": "0.5 m"},
        "X2": {"from": "SW-X.out", "to": "SW-S.out", "size": "2 AWG", "length": "0.5 m"},
    }
    if fused_at_both_ends:
        devices["F-X2"] = {"part": "bolt-fuse", "zone": "LOCKER", "rating": "125 A", "mount": {"line": "SW-S.out"}}
        wires["X2"]["to"] = "F-X2.load"
    switches = {"SW-H": "closed", "SW-S": "closed", "SW-X": "open"}
    left = {"SW-H": "open", "SW-S": "open", "SW-X": "open"}
    states: Row = {
        "in-use": {"kind": "normal", "switches": switches},
        "left": {"kind": "normal", "switches": left},
        "house": {"kind": "normal", "switches": {**switches, "SW-S": "open"}},
        "engine": {"kind": "normal", "switches": {**switches, "SW-H": "open"}},
        "emergency": {"kind": "abnormal", "switches": {"SW-X": "closed"}},
    }
    conditions = {name: {"switches": switches} for name in ("under-way", "moored", "start")}
    link = {"name": "emergency link", "service": "cranking", "current": "100 A", "conductors": wires}
    change = {"devices": devices, "circuits": {"LINK": link}, "states": states, "conditions": conditions}
    finds = [] if fused_at_both_ends else [("unprotected-conductor", "X2"), ("protection-distance", "X1")]
    # Behind the link's fuse and the main fuse, which differ little, either may open first.
    return Plant(change, finds=finds, line="" if fused_at_both_ends else "size: 2 AWG", follows=("selectivity",))


@fault("PRO-23")
def bus_below_its_devices(design: Design) -> Iterator[Plant]:
    """A bus is rated for less than its devices let through."""
    for name, row, _ in design.devices("bus"):
        if "negative" in row.get("name", "") or name in (design.section("class")["reference"], "PANEL-N", "BUS-BOND"):
            continue
        change, parts = design.refit(name, {"rating": "15 A"})
        yield Plant(change, finds=[("bus-rating", name)], parts=parts, follows=("solved-rating",))


@fault("PRO-24")
def polarised_device_fed_backward(design: Design) -> Iterator[Plant]:
    """A polarised device stands where charge flows from its load post to its line post."""
    backward = {
        "small": ("F-ALT", "F-CHARGER"),
        "example": ("F-ALT", "F-CHG", "F-CHS", "F-SOL", "F-DDO", "F-CH", "F-P"),
    }
    for name in backward[design.name]:
        change, parts = design.refit(name, {"polarised": True})
        yield Plant(change, finds=[("polarised-device", name)], parts=parts)


@fault("PRO-25")
def bus_fed_by_two_devices(design: Design) -> Iterator[Plant]:
    """A conductor on a bus that two devices feed suits either of them, not their sum."""
    winch = {"kind": "load", "voltage": "12 V", "current": "40 A", "max_device": "400 A", "motor": True,
             "ignition_protected": True}  # fmt: skip
    bus, gauge, back = {"small": ("BUS-P", "4 AWG", "BUS-N"), "example": ("BUS-HP", "3/0 AWG", "BUS-N")}[design.name]
    zone = design.section("devices")[bus]["zone"]
    own = {
        "devices": {"WINCH": {"part": "planted-winch", "zone": zone}},
        "circuits": {
            "WINCH": {
                "name": "planted winch", "service": "motor", "current": "40 A",
                "conductors": {
                    "X3": {"from": bus, "to": "WINCH.pos", "size": gauge, "length": "0.5 m"},
                    "X4": {"from": "WINCH.neg", "to": back, "size": gauge, "length": "0.5 m"},
                },
            }
        },
    }  # fmt: skip
    change = merged(small_link(fused_at_both_ends=True).change, own) if design.is_small else own
    yield Plant(
        change, finds=[("double-feed", "X3")], line=f"size: {gauge}", parts={"planted-winch": winch},
        follows=("bus-rating", "selectivity", "return-protection"),  # the sum flows through bus and return too
    )  # fmt: skip


@fault("PRO-26")
def path_round_a_device(design: Design) -> Iterator[Plant]:
    """A conductor leads from the line side of a device to its load side."""
    for name, row, _ in devices(design):
        wire = {"from": f"{name}.line", "to": f"{name}.load", "size": "6 AWG", "length": "0.2 m"}
        if "load" in row.get("mount", {}):
            wire["to"] = row["mount"]["load"]
        follows = (
            *NO_DEVICE,  # what the device protected is now open to the battery
            "even-shares", "return-size", "selectivity", "rating-order", "maker-device", "solved-ampacity",
            "heavy-motor", "stalled-motor",
        )  # fmt: skip
        yield Plant(at("conductors", "ROUND", wire), finds=[("device-bypass", name)], follows=follows)


# --- sound arrangements


@trap("T-12")
def device_at_40_in_in_a_conduit(design: Design) -> Iterator[Plant]:
    """The piece ahead of a device is 40 in, all of it in a sheath."""
    for (path, _, row), _, _ in first_pieces(design):
        # In the example the string cable to the collector counts in: 6.7 in of it.
        inches = ENCLOSED_IN if design.is_small or kind_of(design, row["from"]) == "battery" else ENCLOSED_IN - 7
        if metres(row["length"]) < 0.3 and ampere_of(design, path, row) < 20:
            change = {"length": f"{inches} in", "enclosed": "full", "place_reason": "no room nearer"}
            if row.get("enclosed") == "full":
                del change["enclosed"]
            if row.get("place_reason"):
                del change["place_reason"]
            yield Plant(at(*path, change))


def ampere_of(design: Design, path: tuple[str, ...], row: Row) -> float:
    """Return what a conductor is meant to carry, 0 where nobody says."""
    return current_a(design, path, row) or 0.0


@trap("T-13", "T-14")
def device_within_150_per_cent(design: Design) -> Iterator[Plant]:
    """A device is rated above what its conductor bears, by no more than the next standard rating."""
    made = {"16 AWG": 30, "14 AWG": 40, "6 AWG": 125, "4 AWG": 175, "2/0 AWG": 350, "1/0 AWG": 300}
    if design.is_small:
        # 102 A in the engine space, and 110 A is the next standard rating.
        change, parts = rated(design, "F-ALT", 110)
        yield Plant(change, parts=parts)
    chosen = {"small": (), "example": ("F-24H", "F-CHG")}
    for (_, _, row), device, rating in behind(design):
        if device in chosen[design.name] and made.get(row["size"], 0) > rating:
            change, parts = rated(design, device, made[row["size"]])
            yield Plant(change, parts=parts)


@trap("T-30")
def fuse_on_the_battery_stud(design: Design) -> Iterator[Plant]:
    """A fuse stands on the battery's stud, with no conductor before it."""
    for (path, _, _), source, device in first_pieces(design):
        if len(list(design.section(path[0]).get(path[1], {}).get("conductors", {}))) > 1:
            change = merged(at("devices", device, {"mount": {"line": source}}), _dropped(path))
            yield Plant(change)


def _dropped(path: tuple[str, ...]) -> Row:
    change: Row = {path[-1]: None}
    for key in reversed(path[:-1]):
        change = {key: change}
    return change


@trap("T-32")
def emergency_link(design: Design) -> Iterator[Plant]:
    """A link between unlike banks, fused at both ends, open in all normal operation."""
    if design.is_small:
        yield small_link(fused_at_both_ends=True)
        return
    change, parts = design.refit("BAT-S", {"capacity": "60 Ah", "chemistry": "flooded-lead"})
    yield Plant(change, parts=parts)


@trap("T-24", "T-27")
def thermal_device_below_the_start(design: Design) -> Iterator[Plant]:
    """A motor starts with more than its device's rating and its conductor's ampacity, for a moment."""
    starts = {"small": ("PUMP", 20), "example": ("P22", 40)}
    circuit, amps = starts[design.name]
    part, parts = design.part_like(design.section("circuits")[circuit]["load"], {"peak": f"{amps} A"})
    start: Row = {"loads": {circuit: f"{amps} A"}, "short_time": "1 s", "judge_drop": False}
    if not design.is_small:
        start["switches"] = {"SW-H": "closed", "SW-S": "closed", "SW-P": "open"}
    yield Plant(merged(at("circuits", circuit, {"load": part}), at("conditions", "planted-start", start)), parts=parts)


@trap("T-28", "T-29")
def conductor_in_a_housing(design: Design) -> Iterator[Plant]:
    """A conductor lies wholly inside a housing, or is the resistance that controls a current: solid and bare of rules."""
    part, parts = design.part_like("single-105", {"strands": "solid"})
    for role in ("inside-housing", "resistance"):
        for path, _, row in trunk(design):
            if row["size"] == "16 AWG" and path[0] == "circuits" and row.get("role", "sense") == "sense":
                change = {"type": part, "role": role, "reason": "part of its own device"}
                yield Plant(at(*path, change), parts=parts)
    if design.is_small:
        for role in ("inside-housing", "resistance"):
            thin = {"size": "20 AWG", "role": role, "reason": "part of its own device"}
            yield Plant(at("circuits", "SENSE", "conductors", "V3", thin), follows=("terminal-range",))


@trap("T-04")
def short_pigtail(design: Design) -> Iterator[Plant]:
    """A pigtail of less than 7 in is thinner than 16 AWG."""
    pigtail = {"role": "pigtail", "reason": "tail of the part itself"}
    thin = {"small": (("SENSE", "V1"), ("WATCH", "Q1")), "example": (("M19", "W202"), ("M20", "W214"), ("M18", "W211"))}
    for circuit, name in thin[design.name]:
        yield Plant(at("circuits", circuit, "conductors", name, {"size": "18 AWG", **pigtail}))


@trap("T-01", "T-36")
def bare_cranking_and_bank_conductors(design: Design) -> Iterator[Plant]:
    """The cranking conductors of a longer way, and longer links of a bank, carry no device of their own."""
    lengths = {"small": {"S2": "2.4 m"}, "example": {"W031": "2.4 m", "W030": "0.5 m"}}
    for circuit, row in design.section("circuits").items():
        for name in row.get("conductors") or {}:
            if name in lengths[design.name]:
                yield Plant(at("circuits", circuit, "conductors", name, {"length": lengths[design.name][name]}))
