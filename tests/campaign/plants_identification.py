"""Plant faults of identification: colours, labels, legends, marks; and copper that is less than its size."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.places import is_return
from tests.campaign.planting import OWN_FILE, Design, Plant, Row, at, fault, merged, trap
from tests.campaign.plants_conductors import DROPS
from tests.campaign.plants_zones import MAINS

HARNESS = "engine-harness"


def own_conductors(design: Design) -> Iterator[tuple[tuple[str, ...], str, Row]]:
    """Yield the conductors written one by one that are not the engine maker's."""
    for path, name, row in design.conductors():
        if row.get("role") != HARNESS:
            yield path, name, row


@fault("LBL-01")
def green_live_conductor(design: Design) -> Iterator[Plant]:
    """A conductor that carries current has the colour of bonding."""
    for path, name, _ in own_conductors(design):
        for colour in ("green", "Green-yellow"):
            finds = [("conductor-colour", name)]
            follows = ("colour-change",)  # the rest of its run is not green
            yield Plant(at(*path, {"colour": colour}), finds=finds, line=f"colour: {colour}", follows=follows)
    for name, _, _ in design.branches():
        yield Plant(at("circuits", name, {"colours": ["green", "yellow"]}), finds=[("conductor-colour", f"{name}.out")])
        yield Plant(at("circuits", name, {"colours": ["red", "green"]}), finds=[("conductor-colour", f"{name}.back")])


@fault("LBL-01")
def bond_that_is_not_green(design: Design) -> Iterator[Plant]:
    """A bonding conductor has the colour of a live one."""
    for name in sorted(design.section("bonds")):
        for colour in ("red", "yellow"):
            finds = [("conductor-colour", name)]
            yield Plant(at("bonds", name, {"colour": colour}), finds=finds, line=f"colour: {colour}")


@trap("LBL-01")
def green_and_yellow_bond(design: Design) -> Iterator[Plant]:
    """Green with a yellow stripe is a bonding colour as well."""
    for name in sorted(design.section("bonds")):
        yield Plant(at("bonds", name, {"colour": "green / yellow"}))


def negatives(design: Design) -> Iterator[tuple[tuple[str, ...], str, Row]]:
    """Yield the returns that are not the engine maker's; a link inside a string of batteries is none."""
    for path, name, row in own_conductors(design):
        if is_return(design, row) and not any(row[end].endswith(".pos") for end in ("from", "to")):
            yield path, name, row


@fault("LBL-02")
def black_negative_beside_ac(design: Design) -> Iterator[Plant]:
    """A DC negative is black on a boat with AC aboard."""
    for path, name, _ in negatives(design):
        follows = ("colour-change",)  # the rest of its run is yellow
        finds = [("negative-colour", name)]
        yield Plant(at(*path, {"colour": "black"}), finds=finds, line="colour: black", follows=follows)
    for name, _, _ in design.branches():
        finds = [("negative-colour", f"{name}.back")]
        yield Plant(at("circuits", name, {"colours": ["red", "black"]}), finds=finds)


@trap("LBL-02")
def black_negative_without_ac(design: Design) -> Iterator[Plant]:
    """Without AC aboard a DC negative may be black; and one that is marked may be black in any boat."""
    for path, _, _ in negatives(design):
        yield Plant(at(*path, {"colour": "black", "colour_marked": True}))
    for name, _, _ in design.branches():
        black = at("circuits", name, {"colours": ["red", "black"]})
        yield Plant(merged(at("facts", {"ac_aboard": False}), black))


@fault("LBL-03")
def colour_that_changes_along_a_run(design: Design) -> Iterator[Plant]:
    """One conductor of a return is of another colour than the rest of it."""
    for circuit, row in sorted(design.section("circuits").items()):
        wires = sorted((row.get("conductors") or {}).items())
        run = [name for name, wire in wires if is_return(design, wire) and wire.get("role") != HARNESS]
        for name in run if len(run) > 1 else ():
            change = at("circuits", circuit, "conductors", name, {"colour": "brown"})
            yield Plant(change, finds=[("colour-change", name)], line="colour: brown")


@trap("LBL-03")
def colour_change_that_is_marked(design: Design) -> Iterator[Plant]:
    """The change of colour is marked with sleeves."""
    for plant in colour_that_changes_along_a_run(design):
        ((circuit, row),) = plant.change["circuits"].items()
        ((name, _),) = row["conductors"].items()
        marked = {"colour": "brown", "colour_marked": True}
        yield Plant(at("circuits", circuit, "conductors", name, marked))


@trap("T-25")
def harness_with_colours_of_its_own(design: Design) -> Iterator[Plant]:
    """The engine maker's harness has a code of its own: feed and return are of other colours than the boat's."""
    code = {"role": HARNESS, "reason": "harness of the engine maker"}
    circuits = ("SENSE",) if design.is_small else ("M16", "M17")
    for circuit in circuits:
        wires = design.section("circuits")[circuit]["conductors"]
        harness = [n for n, wire in sorted(wires.items()) if design.is_small or wire.get("role") == HARNESS]
        colours = ("purple", "black", "green")
        rows = {name: {"colour": colours[i % 3]} | (code if design.is_small else {}) for i, name in enumerate(harness)}
        yield Plant(at("circuits", circuit, "conductors", rows))
        for name in harness:
            yield Plant(at("circuits", circuit, "conductors", name, rows[name]))


# --- labels, legends, marks


@fault("LBL-04")
def label_of_another(design: Design) -> Iterator[Plant]:
    """A conductor carries the label of another, or one that the data do not know."""
    names = [name for _, name, _ in design.conductors()]
    for (path, name, _), other in zip(design.conductors(), [*names[1:], names[0]], strict=True):
        for label in (other, "X999"):
            finds = [("label-text", name)]
            yield Plant(at(*path, {"label": label}), finds=finds, line=f"label: {label}")
    for name, _, _ in design.branches():
        yield Plant(at("circuits", name, {"label": names[0]}), finds=[("label-text", name)], line=f"label: {names[0]}")


@trap("LBL-04")
def label_that_says_more(design: Design) -> Iterator[Plant]:
    """A label carries the id and the far post; that of a branch the circuit's id."""
    for path, name, row in design.conductors():
        yield Plant(at(*path, {"label": f"{name} {row['to']}"}))
    for name, _, _ in design.branches():
        yield Plant(at("circuits", name, {"label": name}))


@fault("LBL-05")
def label_at_one_end(design: Design) -> Iterator[Plant]:
    """A conductor has a label at one end only, or at none."""
    for path, name, _ in design.conductors():
        for ends in ("from", "to", "none"):
            finds = [("label-ends", name)]
            yield Plant(at(*path, {"labelled": ends}), finds=finds, line=f"labelled: {ends}")
    for name, _, _ in design.branches():
        yield Plant(at("circuits", name, {"labelled": "from"}), finds=[("label-ends", name)], line="labelled: from")


@fault("LBL-06")
def legend_of_another_circuit(design: Design) -> Iterator[Plant]:
    """The legend beside a breaker names another circuit."""
    for name, row, _ in design.branches():
        text = f"Coffee maker {row['protect']}"
        yield Plant(
            at("circuits", name, {"legend": text}), finds=[("legend-name", row["feed"])], line=f"legend: {text}"
        )
        # A rating alone names nothing, and this one is wrong as well.
        finds = [("legend-name", row["feed"]), ("legend-rating", row["feed"])]
        yield Plant(at("circuits", name, {"legend": "99 A"}), finds=finds, line="legend: 99 A")


@trap("LBL-06")
def legend_in_other_words(design: Design) -> Iterator[Plant]:
    """A legend in capitals, with the rating, or cut short names its circuit."""
    for name, row, _ in design.branches():
        if row.get("legend") != row["name"].upper():
            yield Plant(at("circuits", name, {"legend": row["name"].upper()}))
        yield Plant(at("circuits", name, {"legend": f"{row['name'].split()[0][:6]} {row['protect']}"}))


@fault("LBL-07")
def main_switch_without_a_mark(design: Design) -> Iterator[Plant]:
    """The place of a battery switch or main device is not marked."""
    for name in MAINS[design.name]:
        yield Plant(at("devices", name, {"marked": False}), finds=[("place-mark", name)], line=f"{name}:")


@fault("LBL-08")
def fuse_without_its_rating(design: Design) -> Iterator[Plant]:
    """The rating of a fuse is not marked at its holder."""
    for name, _, _ in design.devices("fuse"):
        yield Plant(at("devices", name, {"marked": False}), finds=[("place-mark", name)], line=f"{name}:")


# --- real copper

SMALLEST_CMIL = {"16": 2336, "14": 3702, "12": 5833, "10": 9343, "8": 14810, "6": 24538, "4": 37360, "2": 62450,
                 "1": 77790, "1/0": 98980, "2/0": 125100, "4/0": 205500}  # fmt: skip
"""Smallest copper of vehicle cable in circular mils: SAE J1127 and J1128, from four charts."""
CIRCULAR_MIL_MM2 = 0.000506707


def _cable(design: Design, size: str, area_mm2: float) -> tuple[str, dict[str, Row]]:
    return design.part_like("single-105", {"real_areas": {size: f"{area_mm2:.4g} mm2"}})


@fault("CON-17")
def less_copper_than_the_gauge(design: Design) -> Iterator[Plant]:
    """A metric cable passes for a gauge: its copper is less than the smallest of that number."""
    for path, _, row in design.conductors():
        gauge = row["size"].removesuffix(" AWG")
        cable, parts = _cable(design, row["size"], SMALLEST_CMIL[gauge] * CIRCULAR_MIL_MM2 * 0.985)
        finds = [("conductor-area", f"{cable} as {row['size']}")]
        # Less copper has more resistance.
        yield Plant(at(*path, {"type": cable}), finds=finds, line=f"{cable}:", parts=parts, follows=DROPS)


@fault("CON-17")
def size_without_a_unit(design: Design) -> Iterator[Plant]:
    """A bare number stands where a size is due: nobody can tell square millimetres from gauges."""
    for path, _, row in design.conductors():
        number = row["size"].split()[0].split("/")[0]
        line = f"size: '{number}'"
        yield Plant(at(*path, {"size": number}), finds=[("bad-value", OWN_FILE)], line=line)


@trap("CON-17")
def vehicle_cable(design: Design) -> Iterator[Plant]:
    """Vehicle cable is a little thinner than the gauge of its number, which is allowed."""
    for path, name, row in design.conductors():
        # Where drop and heat leave room: the sense leads, the bank, and the heavy conductors of the small boat.
        if row.get("role") in ("bank", "sense") or name in ("M2", "M3", "V2", "Q2"):
            gauge = row["size"].removesuffix(" AWG")
            cable, parts = _cable(design, row["size"], SMALLEST_CMIL[gauge] * CIRCULAR_MIL_MM2 * 1.001)
            yield Plant(at(*path, {"type": cable}), parts=parts)
