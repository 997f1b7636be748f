"""Plant faults of panels: their feed, their positions, their returns, lights and radios."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import permutations

from tests.campaign.places import ampere
from tests.campaign.planting import Design, Plant, Row, at, fault, merged, trap

LIGHTS = ("navigation-light", "anchor-light")
APART = (*LIGHTS, "radio")
"""Services that must not share their device."""


def panel_of(design: Design, feed: str) -> tuple[str, Row]:
    """Return the panel bus of a position, and its row."""
    prefix = feed.rstrip("0123456789")
    return next(
        (name, row)
        for name, row, _ in design.devices("bus")
        if "positions" in row and row["positions"]["first"].rstrip("0123456789") == prefix
    )


def current_a(row: Row, load: Row) -> float:
    """Return the current of a branch."""
    return ampere(row.get("current") or load["current"])


def peak_a(row: Row, load: Row) -> float:
    """Return the most that the load of a branch draws while it starts."""
    return max(current_a(row, load), ampere(load.get("peak") or "0 A"))


def lone_branches(design: Design) -> list[tuple[str, Row, Row]]:
    """Return the branches that have a position to themselves and no legend."""
    feeds = [row["feed"] for _, row, _ in design.branches()]
    return [one for one in design.branches() if feeds.count(one[1]["feed"]) == 1 and "legend" not in one[1]]


def neighbours(design: Design) -> Iterator[tuple[str, Row, str, Row]]:
    """Yield pairs of branches of which the second may be moved to the position of the first."""
    for (first, row, load), (second, other, other_load) in permutations(lone_branches(design), 2):
        rating_a = ampere(row["protect"])
        total_a = current_a(row, load) + current_a(other, other_load)
        fits = total_a * 1.1 <= rating_a and peak_a(row, load) + peak_a(other, other_load) <= rating_a * 1.2
        same_panel = panel_of(design, row["feed"])[0] == panel_of(design, other["feed"])[0]
        if same_panel and fits and row["protect"] == other["protect"]:
            yield first, row, second, other


# --- the feed of a panel


@fault("PAN-02")
def panel_without_device(design: Design) -> Iterator[Plant]:
    """The feeder of a panel leaves the battery side of every device."""
    live = "F-ALT.line" if design.is_small else "STUD-HB-POS"
    panels = [name for name, row, _ in design.devices("bus") if "positions" in row]
    feeders = [(path, name, {"from": live}) for path, name, row in design.conductors() if row["to"] in panels]
    if not design.is_small:
        feeders.append((("circuits", "M02", "conductors", "W020"), "W020", {"from": live, "to": "BUS-PP"}))
    for path, name, ends in feeders:
        follows = [
            "ahead-of-switch",  # the panel is live with the switch open
            "bus-rating",  # nothing holds its current
            "conductor-withstand", "interrupting-capacity",  # more flows into a fault at its positions
        ]  # fmt: skip
        yield Plant(at(*path, ends), finds=[("protection-distance", name)], line=f"{name}:", follows=follows)


@fault("PAN-02")
def panel_behind_the_main_alone(design: Design) -> Iterator[Plant]:
    """The feeder of a panel has no device of its own; the main fuse lets more through than panel or feeder bear."""
    if design.is_small:
        change = at("circuits", "FEED", "conductors", "D1", {"from": "BUS-P"})
        yield Plant(change, finds=[("size-step", "D1")], line="D1:")
        return
    change = at("circuits", "M02", "conductors", "W020", {"from": "BUS-HP", "to": "BUS-PP"})
    follows = [
        "size-step", "double-feed",  # the main fuses let more through than the feeder bears
        "conductor-withstand",  # more flows into a fault behind its positions
        "selectivity",  # between the main fuse and the positions nothing is left
    ]  # fmt: skip
    finds = [("bus-rating", "BUS-PP"), ("bus-rating", "BUS-HP")]  # nothing holds the way out of BUS-HP either
    yield Plant(change, finds=finds, line="part:", follows=follows)


@fault("PAN-06")
def bus_fed_at_both_ends(design: Design) -> Iterator[Plant]:
    """A second feeder joins the first, and what leads on is too thin for both."""
    follows = [
        "bus-rating",  # the panel behind is rated for one of them
        "paralleled-devices", "two-feeds",  # both start on one bus
        "selectivity", "rating-order",  # the sum stands above the positions
        "return-protection",  # the return bears one of them
    ]  # fmt: skip
    if design.is_small:
        second, thin = "80 A", "8 AWG"
        change: Row = at("circuits", "FEED", "conductors", {
            "D1": {"to": "MEET"},
            "D1-B": {"from": "MEET", "to": "PANEL", "size": thin, "length": "0.2 m"},
            "D3": {"from": "F-SECOND.load", "to": "MEET", "size": "6 AWG", "length": "1.5 m"},
        })  # fmt: skip
        change["devices"] = {
            "MEET": {"part": "bus-250", "zone": "CABIN"},
            "F-SECOND": {"part": "bolt-fuse", "zone": "LOCKER", "rating": second, "mount": {"line": "BUS-P"}},
        }
        yield Plant(change, finds=[("double-feed", "D1-B")], line=thin, follows=follows)
        return
    change = at("circuits", "M02", "conductors", {
        "W020": {"to": "MEET"},
        "W020-B": {"from": "MEET", "to": "CB-PM.line", "size": "2/0 AWG", "length": "0.2 m", "colour": "red"},
        "W299": {"from": "F-SECOND.load", "to": "MEET", "size": "2/0 AWG", "length": "2.6 m", "colour": "red"},
    })  # fmt: skip
    change["devices"] = {
        "MEET": {"part": "bus-600-positive", "zone": "Z-NAV"},
        "F-PNL": {"part": "bolt-fuse-250-20k"},
        "F-SECOND": {"part": "bolt-fuse-350", "zone": "Z-BATT", "mount": {"line": "BUS-HP"}},
    }
    yield Plant(change, finds=[("double-feed", "W020-B")], line="2/0 AWG", follows=follows)


@trap("T-09")
def spare_position(design: Design) -> Iterator[Plant]:
    """A breaker stands on a panel with nothing on its load side."""
    for panel, row, _ in design.devices("bus"):
        if "positions" in row:
            takes = row["positions"]["takes"]
            rating = sorted(design.parts[takes]["ratings"], key=ampere)[0]
            spare = {"part": takes, "zone": row["zone"], "rating": rating, "mount": {"line": panel}}
            yield Plant(at("devices", "SPARE", spare))


# --- positions and returns


@fault("PAN-03")
def two_circuits_on_one_position(design: Design) -> Iterator[Plant]:
    """A circuit is moved to the position of another."""
    for first, row, second, other in neighbours(design):
        if first < second and row["service"] not in APART and other["service"] not in APART:
            change = at("circuits", second, {"feed": row["feed"]})
            yield Plant(change, finds=[("position-use", row["feed"])], line=f"{second}:")


@fault("PAN-03")
def one_circuit_on_two_positions(design: Design) -> Iterator[Plant]:
    """A circuit is fed from two positions at once."""
    for first, row, second, other in neighbours(design):
        if first > second or row["service"] in APART or other["service"] in APART:
            continue
        bar = panel_of(design, row["feed"])[1]
        wire = {"size": "16 AWG", "length": "0.5 m"}
        wires = {
            "X1": {**wire, "from": f"{row['feed']}.load", "to": "TWICE.pos"},
            "X2": {**wire, "from": f"{other['feed']}.load", "to": "TWICE.pos"},
            "X3": {**wire, "from": "TWICE.neg", "to": bar["positions"]["returns"]},
        }
        circuit = {"name": "Fed twice", "service": "general", "current": "0.1 A", "conductors": wires}
        change = at("circuits", "TWICE-FED", circuit)
        change["devices"] = {"TWICE": {"part": "small-load", "zone": bar["zone"]}}
        part: Row = {
            "kind": "load", "voltage": "12 V", "current": "0.1 A", "max_device": "100 A", "terminal": "lead",
            "own_switch": True,
        }  # fmt: skip
        finds = [("position-use", row["feed"]), ("position-use", other["feed"]), ("position-use", "TWICE-FED")]
        follows = [
            "two-feeds", "paralleled-devices", "conductor-withstand",  # they add up
            "selectivity", "rating-order",  # each of the two now stands above all others of the panel
            "far-end-clearing",  # and above the far end of the other
            "ahead-of-switch",  # where its panel is always live
        ]  # fmt: skip
        yield Plant(change, finds=finds, follows=follows, parts={"small-load": part})


@fault("PAN-04")
def return_to_another_bar(design: Design) -> Iterator[Plant]:
    """The return of a branch lands on the main negative bus."""
    reference = design.section("class")["reference"]
    for name, row, _ in design.branches():
        if panel_of(design, row["feed"])[1]["positions"]["returns"] != reference:
            yield Plant(at("circuits", name, {"returns": reference}), finds=[("panel-return", name)], line=f"{name}:")


@fault("PAN-09")
def too_few_screws(design: Design) -> Iterator[Plant]:
    """A negative bar has one screw less than returns."""
    for name, _, part in design.devices("bus"):
        returns = [
            circuit
            for circuit, row, _ in design.branches()
            if (row.get("returns") or panel_of(design, row["feed"])[1]["positions"]["returns"]) == name
        ]
        if "screws" in part and len(returns) > 1:
            change, parts = design.refit(name, {"screws": len(returns) - 1})
            yield Plant(change, finds=[("return-screws", name)], line=f"{name}:", parts=parts)


# --- lights and radios

WHY = "planted by the campaign"


def moved(design: Design, guest: str, host: str, more: Row) -> Row:
    """Return the change that puts a circuit on the position of another, both saying why, with more facts of the host."""
    row = design.section("circuits")[host]
    more = {key: value for key, value in more.items() if row[key] != value}
    return merged(
        at("circuits", guest, {"feed": row["feed"], "shares": WHY}), at("circuits", host, {"shares": WHY, **more})
    )


@fault("PAN-08")
def light_shares_its_device(design: Design) -> Iterator[Plant]:
    """Another load hangs on the breaker of a navigation or anchor light."""
    for host, row, guest, other in neighbours(design):
        if row["service"] in LIGHTS and other["service"] not in APART:
            yield Plant(moved(design, guest, host, {}), finds=[("light-circuits", host)], line=f"{host}:")


@fault("PAN-08")
def anchor_light_with_the_others(design: Design) -> Iterator[Plant]:
    """An anchor light hangs on the breaker of a navigation light."""
    circuits = design.section("circuits")
    has_anchor = any(row["service"] == "anchor-light" for row in circuits.values())
    for host, row, guest, other in neighbours(design):
        is_anchor = other["service"] == "anchor-light" if has_anchor else other["service"] not in APART
        if row["service"] == "navigation-light" and is_anchor:
            change = moved(design, guest, host, {})
            if not has_anchor:
                change["circuits"][guest]["service"] = "anchor-light"
            yield Plant(change, finds=[("light-circuits", guest)], line=f"{guest}:")


@trap("T-26")
def three_way_switch(design: Design) -> Iterator[Plant]:
    """An anchor light and a running light hang on one breaker behind a switch that shows one at a time."""
    name, panel = next(
        (name, row) for name, row, _ in design.devices("bus") if "positions" in row and name != "BUS-24H"
    )
    zone, bar, takes = panel["zone"], panel["positions"]["returns"], panel["positions"]["takes"]
    lamp = next(row["load"] for _, row, _ in design.branches() if row["service"] == "navigation-light")
    switch: Row = {
        "kind": "switch", "posts": ["com", "run", "anchor"], "continuous": "10 A", "intermittent": "10 A",
        "states": {"off": [], "run": [["com", "run"]], "anchor": [["com", "anchor"]]},
        "contact_resistance": "5 mohm", "terminal": "screw", "stud": "M4", "smallest_size": "22 AWG",
        "largest_size": "10 AWG", "ingress": "IP67",
    }  # fmt: skip
    wire = {"size": "16 AWG", "length": "0.5 m"}

    def light(name: str, service: str, own: Row) -> Row:
        wires = {key: {**wire, "from": start, "to": end} for key, (start, end) in own.items()}
        return {"name": name, "service": service, "current": "0.5 A", "conductors": wires}

    change: Row = {
        "devices": {
            "CB-SHOW": {"part": takes, "zone": zone, "rating": "5 A", "mount": {"line": name}},
            "SW-SHOW": {"part": "three-way", "zone": zone},
            "LAMP-RUN": {"part": lamp, "zone": zone},
            "LAMP-ANCHOR": {"part": lamp, "zone": zone},
        },
        "circuits": {
            "SHOW-FEED": light("Feed", "navigation-light", {"Y1": ("CB-SHOW.load", "SW-SHOW.com")}),
            "SHOW-RUN": light("Running light", "navigation-light",
                              {"Y2": ("SW-SHOW.run", "LAMP-RUN.pos"), "Y3": ("LAMP-RUN.neg", bar)}),
            "SHOW-ANCHOR": light("Anchor light", "anchor-light",
                                 {"Y4": ("SW-SHOW.anchor", "LAMP-ANCHOR.pos"), "Y5": ("LAMP-ANCHOR.neg", bar)}),
        },
    }  # fmt: skip
    yield Plant(change, parts={"three-way": switch})


@fault("PAN-10")
def radio_shares_its_device(design: Design) -> Iterator[Plant]:
    """Another load hangs on the breaker of a radio."""
    services = [row["service"] for _, row, _ in design.branches()]
    wanted = "radio" if "radio" in services else "electronics"
    for host, row, guest, other in neighbours(design):
        if row["service"] == wanted and other["service"] not in APART:
            change = moved(design, guest, host, {"service": "radio"})
            yield Plant(change, finds=[("radio-device", host)], line=f"{host}:")
