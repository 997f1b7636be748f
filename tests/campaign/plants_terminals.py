"""Plant faults of terminals: studs, rings, barrels, covers, kinds, splices, torque."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

from checker.reading.quantity import read_size
from tests.campaign.figures import AMPACITY_A
from tests.campaign.places import ampere, metres
from tests.campaign.planting import Design, Plant, Row, at, fault, trap

GAUGES = list(AMPACITY_A)
"""Thinnest first."""
MOST = 4
"""Terminals on one stud."""
BOLTED = ("stud", "screw", "wing-nut")


@dataclass(frozen=True)
class Terminal:
    """Describe one end of a conductor: the path of its row, its id, the key of its end, its post and its size."""

    path: tuple[str, ...]
    row: Row
    name: str
    side: str
    post: str
    size: str

    def end(self, facts: Row) -> Row:
        """Return the change that gives the end some facts."""
        return at(*self.path, "ends", self.side, facts)


def area_mm2(size: str) -> float:
    """Return the copper area of a size as it is written."""
    return read_size(size).area_mm2


def terminals(design: Design) -> Iterator[Terminal]:
    """Yield both ends of the conductors and bonds that are written one by one."""
    bonds = ((("bonds", name), name, row) for name, row in sorted(design.section("bonds").items()))
    for path, name, row in [*design.conductors(), *bonds]:
        for side in ("from", "to"):
            yield Terminal(path, row, name, side, row[side], row["size"])


def branch_terminals(design: Design) -> Iterator[Terminal]:
    """Yield the ends of branch circuits at their position and at the bar they return to."""
    panels = [row["positions"] for _, row, _ in design.devices("bus") if "positions" in row]
    for name, row, _ in design.branches():
        prefix = row["feed"].rstrip("0123456789")
        positions = next(one for one in panels if one["first"].rstrip("0123456789") == prefix)
        path = ("circuits", name)
        yield Terminal(path, row, f"{name}.out", "feed", f"{row['feed']}.load", row["cable"])
        yield Terminal(path, row, f"{name}.back", "back", row.get("returns", positions["returns"]), row["cable"])


def device_at(design: Design, post: str) -> str:
    """Return the device that is written for a post, "" for a position of a panel."""
    devices = design.section("devices")
    return next((name for name in (post, post.rpartition(".")[0]) if name in devices), "")


def part_at(design: Design, post: str) -> Row:
    """Return the part that a post belongs to."""
    name = device_at(design, post)
    if name:
        found: Row = design.parts[design.section("devices")[name]["part"]]
        return found
    prefix = post.rpartition(".")[0].rstrip("0123456789")
    positions = [row["positions"] for _, row, _ in design.devices("bus") if "positions" in row]
    takes = next(one["takes"] for one in positions if one["first"].rstrip("0123456789") == prefix)
    series: Row = design.parts[takes]
    return series


def kind_at(part: Row) -> str:
    """Return what fixes conductors to a part."""
    is_stud = "stud" in part or part["kind"] == "metal"
    return str(part.get("terminal") or ("stud" if is_stud else ""))


def on_studs(design: Design) -> dict[str, list[Terminal]]:
    """Return the terminals on studs by post; the returns of branches lie under the screws of their bars."""
    found: dict[str, list[Terminal]] = {}
    for one in terminals(design):
        if kind_at(part_at(design, one.post)) in BOLTED:
            found.setdefault(one.post, []).append(one)
    return dict(sorted(found.items()))


def at_devices(design: Design) -> Iterator[tuple[str, Row, list[Terminal]]]:
    """Yield the devices that stand alone in their kind, their part, and the terminals on all their posts.

    The batteries of a bank of several stay as they are: they must be alike.
    """
    banks = [row["bank"] for _, row, _ in design.devices("battery")]
    ends: dict[str, list[Terminal]] = {}
    for one in terminals(design):
        ends.setdefault(device_at(design, one.post), []).append(one)
    for name, row, part in design.devices():
        if name in ends and (part["kind"] != "battery" or banks.count(row["bank"]) == 1):
            yield name, part, ends[name]


# --- studs


@fault("TRM-01")
def crowded_bar(design: Design) -> Iterator[Plant]:
    """A bar has one stud for all its terminals."""
    for post, ends in on_studs(design).items():
        part = part_at(design, post)
        if part["kind"] != "bus" or post in design.section("landings") or len(ends) < 2:
            continue
        change, parts = design.refit(post, {"studs": 1, "terminals_per_stud": min(MOST, len(ends) - 1)})
        yield Plant(change, finds=[("stud-terminals", post)], line=f"{post}:", parts=parts)


@fault("TRM-01")
def all_on_one_stud(design: Design) -> Iterator[Plant]:
    """All terminals of a post are stacked on one of its studs."""
    for post, ends in on_studs(design).items():
        if len(ends) > MOST:
            names = [one.name for one in sorted(ends, key=lambda one: (-area_mm2(one.size), one.name))]
            change = at("landings", post, {**dict.fromkeys(design.section("landings").get(post, ())), "s1": names})
            yield Plant(change, finds=[("stud-terminals", f"{post} stud s1")], line="s1:")


@trap("T-31")
def full_bar(design: Design) -> Iterator[Plant]:
    """A bar has exactly the studs that its cables need at four a stud."""
    for post, ends in on_studs(design).items():
        if part_at(design, post)["kind"] == "bus" and post not in design.section("landings"):
            change, parts = design.refit(post, {"studs": -(-len(ends) // MOST), "terminals_per_stud": None})
            if len(ends) > MOST:
                yield Plant(change, parts=parts)


@fault("TRM-03")
def stacked_upside_down(design: Design) -> Iterator[Plant]:
    """The smallest terminals lie next to the post."""
    for post, ends in on_studs(design).items():
        rising = sorted(ends, key=lambda one: (area_mm2(one.size), one.name))
        stacks = {f"s{i // MOST + 1}": rising[i : i + MOST] for i in range(0, len(rising), MOST)}
        finds = [
            ("stack-order", f"{post} stud {stud}")
            for stud, stack in stacks.items()
            if any(area_mm2(a.size) < area_mm2(b.size) for a, b in pairwise(stack))
        ]
        if finds:
            before = dict.fromkeys(design.section("landings").get(post, ()))
            names = {stud: [one.name for one in stack] for stud, stack in stacks.items()}
            yield Plant(at("landings", post, {**before, **names}), finds=finds, line="s")


# --- ends


@fault("TRM-02")
def ring_for_another_stud(design: Design) -> Iterator[Plant]:
    """A ring is made for another thread than it lies on."""
    for one in [*terminals(design), *branch_terminals(design)]:
        part = part_at(design, one.post)
        is_under_screw = one.side == "back" and "screws" in part
        thread = part.get("screw_thread") if is_under_screw else part.get("stud")
        if thread and (is_under_screw or kind_at(part) in BOLTED):
            for hole in (hole for hole in ("M4", "M6", "M8", "M10", "3/8 in", "#10") if hole != thread):
                yield Plant(one.end({"hole": hole}), finds=[("ring-hole", one.name)], line=f"{one.side}:")


@fault("TRM-04")
def barrel_for_another_size(design: Design) -> Iterator[Plant]:
    """A barrel is made for the next thicker, or the next thinner, gauge."""
    for one in [*terminals(design), *branch_terminals(design)]:
        place = GAUGES.index(one.size)
        for gauge in [*GAUGES[max(0, place - 1) : place], *GAUGES[place + 1 : place + 2]]:
            yield Plant(one.end({"barrel": gauge}), finds=[("barrel-size", one.name)], line=f"{one.side}:")


@fault("TRM-04")
def barrel_of_another_colour(design: Design) -> Iterator[Plant]:
    """The colour of a barrel stands for other sizes."""
    colours = {"red": ("18 AWG",), "blue": ("16 AWG", "14 AWG"), "yellow": ("12 AWG", "10 AWG")}
    for one in [*terminals(design), *branch_terminals(design)]:
        for colour, sizes in colours.items():
            if one.size not in sizes:
                finds = [("barrel-size", one.name)]
                yield Plant(one.end({"barrel_colour": colour}), finds=finds, line=f"{one.side}:")


@fault("TRM-04")
def shared_barrel(design: Design) -> Iterator[Plant]:
    """Two conductors are crimped into one barrel."""
    for one in [*terminals(design), *branch_terminals(design)]:
        yield Plant(one.end({"shares_barrel": True}), finds=[("barrel-size", one.name)], line=f"{one.side}:")


@fault("TRM-05")
def terminals_too_small(design: Design) -> Iterator[Plant]:
    """The maker of a device allows one gauge less than lands on it."""
    for name, part, ends in at_devices(design):
        thickest = max((one.size for one in ends), key=area_mm2)
        if "largest_size" in part and thickest != "16 AWG":
            finds = [("terminal-range", one.name) for one in ends if one.size == thickest]
            change, parts = design.refit(name, {"largest_size": GAUGES[GAUGES.index(thickest) - 1]})
            yield Plant(change, finds=finds, line=thickest, parts=parts)


@fault("TRM-05")
def terminals_too_large(design: Design) -> Iterator[Plant]:
    """The maker of a device asks for one gauge more than lands on it."""
    for name, part, ends in at_devices(design):
        thinnest = min((one.size for one in ends), key=area_mm2)
        if "smallest_size" in part and thinnest != GAUGES[-1]:
            finds = [("terminal-range", one.name) for one in ends if one.size == thinnest]
            change, parts = design.refit(name, {"smallest_size": GAUGES[GAUGES.index(thinnest) + 1]})
            yield Plant(change, finds=finds, line=thinnest, parts=parts)


# --- covers


def always_live(design: Design) -> set[str]:
    """Return the devices that conductors and mounts join to the positive post of a battery."""
    reached = {f"{name}.pos" for name, _, _ in design.devices("battery")}
    pairs = [(row["from"], row["to"]) for _, _, row in design.conductors()]
    pairs += [
        (f"{name}.{own}", other) for name, row, _ in design.devices() for own, other in row.get("mount", {}).items()
    ]
    grown = True
    while grown:
        more = {end for pair in pairs if reached & set(pair) for end in pair} - reached
        reached |= more
        grown = bool(more)
    return {device_at(design, post) for post in reached}


@fault("TRM-06")
def live_post_without_cover(design: Design) -> Iterator[Plant]:
    """A boot is missing from what a battery keeps live."""
    for name in sorted(always_live(design)):
        yield Plant(at("devices", name, {"cover": False}), finds=[("live-cover", name)], line=f"{name}:")


# --- kinds


@fault("TRM-07")
def spring_on_battery(design: Design) -> Iterator[Plant]:
    """The clamps of a battery are sprung."""
    for name, part, ends in at_devices(design):
        if part["kind"] == "battery":
            change, parts = design.refit(name, {"terminal": "spring"})
            yield Plant(change, finds=[("terminal-kind", name)], line=f"{name}:", parts=parts)
            assert ends


@fault("TRM-07")
def wing_nut_on_heavy_cable(design: Design) -> Iterator[Plant]:
    """A wing nut holds 6 AWG or more."""
    for name, part, ends in at_devices(design):
        heavy = [one.name for one in ends if area_mm2(one.size) >= area_mm2("6 AWG")]
        if kind_at(part) == "stud" and part["kind"] != "metal" and heavy:
            change, parts = design.refit(name, {"terminal": "wing-nut"})
            finds = [("terminal-kind", wire) for wire in heavy]
            yield Plant(change, finds=finds, line=heavy[0] if len(set(heavy)) == 1 else "", parts=parts)


@fault("TRM-07")
def screw_on_thin_strands(design: Design) -> Iterator[Plant]:
    """A set screw turns on strands below 14 AWG."""
    for name, part, ends in at_devices(design):
        thin = [one.name for one in ends if area_mm2(one.size) < area_mm2("14 AWG")]
        if kind_at(part) == "screw" and thin:
            change, parts = design.refit(name, {"terminal": "set-screw"})
            finds = [("terminal-kind", wire) for wire in thin]
            yield Plant(change, finds=finds, line=thin[0] if len(set(thin)) == 1 else "", parts=parts)


@fault("TRM-07")
def terminal_that_slips_off(design: Design) -> Iterator[Plant]:
    """An open spade or a twist-on cap is on an end."""
    for one in [*terminals(design), *branch_terminals(design)]:
        for terminal in ("plain-spade", "twist-on"):
            change = one.end({"terminal": terminal})
            yield Plant(change, finds=[("terminal-kind", one.name)], line=f"{one.side}:")


def written_a(design: Design, path: tuple[str, ...], row: Row) -> float:
    """Return the current that is written for a conductor, 0 where none is."""
    circuit = design.section("circuits").get(path[1], {}) if path[0] == "circuits" else {}
    return ampere(row.get("current") or circuit.get("current") or "0 A")


@fault("TRM-07")
def push_on_for_heavy_current(design: Design) -> Iterator[Plant]:
    """A push-on connector carries more than 20 A."""
    for one in terminals(design):
        if written_a(design, one.path, one.row) > 20:
            yield Plant(one.end({"terminal": "blade"}), finds=[("terminal-kind", one.name)], line=f"{one.side}:")


# --- splices and torque

SPLICE: Row = {
    "kind": "bus", "rating": "600 A", "splice": True, "studs": 2, "stud": "M10", "cover": True, "torque": "15 Nm",
    "ingress": "IP67",
}  # fmt: skip


@fault("TRM-08")
def splice_in_a_bad_place(design: Design) -> Iterator[Plant]:
    """A conductor is spliced in the engine space or in a wet zone."""
    zones, devices = design.section("zones"), design.section("devices")
    for path, name, row in design.conductors():
        device = device_at(design, row["to"])
        zone = zones[devices[device]["zone"]] if device else {}
        is_bad = zone.get("engine_space") or zone.get("wet")
        if not is_bad or row.get("role") == "bank" or "length" not in row:
            continue
        half = f"{metres(row['length']) / 2:.4f} m"
        rest = {**row, "from": "SPLICE", "length": half}
        change = at(*path[:-1], {name: {"to": "SPLICE", "length": half}, f"{name}-B": rest})
        change["devices"] = {"SPLICE": {"part": "splice-600", "zone": devices[device]["zone"]}}
        yield Plant(change, finds=[("splice-place", "SPLICE")], line="SPLICE:", parts={"splice-600": SPLICE})


@fault("TRM-09")
def no_torque(design: Design) -> Iterator[Plant]:
    """A part tells no torque, and more than 50 A pass one of its posts."""
    for name, part, ends in at_devices(design):
        heavy = any(written_a(design, one.path, one.row) > 50 for one in ends)
        if heavy and "torque" in part:
            change, parts = design.refit(name, {"torque": None})
            (made,) = parts
            yield Plant(change, finds=[("torque-value", made)], line=f"{made}:", parts=parts)
