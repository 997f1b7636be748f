"""Plant faults of the monitoring shunt: what goes past it, which way round it stands, what it bears."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.planting import Design, Plant, Row, at, fault, merged

BANK_SIDE = {"small": ("BAT-H.neg", "SHUNT.bat"), "example": ("STUD-HB-NEG", "SH-1.bat", "BAT-H2B.neg")}
SHUNT = {"small": "SHUNT", "example": "SH-1"}

PAST = (
    "inner-landing", "even-shares",  # it lands on a battery instead of the bank's bus
    "split-return", "lost-return",
    "solved-drop",
)  # fmt: skip


def landed(design: Design, wires: dict[str, list[tuple[str, str, str]]]) -> Iterator[tuple[str, Row]]:
    """Yield some conductors with the change that lands each on the bank's side of the shunt."""
    for circuit, name, end in wires[design.name]:
        for post in BANK_SIDE[design.name]:
            section = ("bonds", name) if circuit == "bonds" else ("circuits", circuit, "conductors", name)
            yield name, at(*section, {end: post})


@fault("SHU-01")
def load_past_the_shunt(design: Design) -> Iterator[Plant]:
    """A load's negative lands on the bank's side of the shunt."""
    wires = {
        "small": [("SENSE", "V3", "to")],
        "example": [("M13", "W055", "to"), ("M14", "W058", "to"), ("M11", "W051", "to")],
    }
    for name, change in landed(design, wires):
        yield Plant(change, finds=[("shunt-bypass", name)], line=name, follows=PAST)


@fault("SHU-01")
def panel_past_the_shunt(design: Design) -> Iterator[Plant]:
    """The negative of a panel lands on the bank's side of the shunt."""
    wires = {"small": [("FEED", "D2", "to")], "example": [("M02", "W021", "to"), ("M15", "W023", "to")]}
    for name, change in landed(design, wires):
        yield Plant(change, finds=[("shunt-bypass", name)], line=name, follows=PAST)


@fault("SHU-02")
def charge_source_past_the_shunt(design: Design) -> Iterator[Plant]:
    """A charge source's negative lands on the bank's side of the shunt."""
    wires = {"small": [("CHARGE", "C2", "to")], "example": [("M07", "W043", "to"), ("M09", "W047", "to")]}
    for name, change in landed(design, wires):
        yield Plant(change, finds=[("shunt-bypass", name)], line=name, follows=PAST)


@fault("SHU-03")
def shunt_turned_round(design: Design) -> Iterator[Plant]:
    """The shunt's studs are swapped."""
    shunt = SHUNT[design.name]
    circuit, bank, boat = {"small": ("MAIN", "M4", "M5"), "example": ("M01", "W013", "W014")}[design.name]
    change = at("circuits", circuit, "conductors", {bank: {"to": f"{shunt}.sys"}, boat: {"from": f"{shunt}.bat"}})
    yield Plant(change, finds=[("shunt-direction", shunt)], line=f"{shunt}: ")


@fault("SHU-04")
def shunt_too_small(design: Design) -> Iterator[Plant]:
    """The shunt bears less than its bank gives or takes."""
    shunt = SHUNT[design.name]
    wrongs: dict[str, tuple[Row, list[str]]] = {
        "small": ({"rating": "20 A", "short_time": None}, ["under-way"]),
        "example": ({"continuous": "200 A"}, ["hotel"]),
    }
    facts, conditions = wrongs[design.name]
    change, parts = design.refit(shunt, facts)
    finds = [("shunt-rating", f"{shunt} in {name}") for name in conditions]
    yield Plant(change, finds=finds, parts=parts, follows=("shunt-rating",))
    if not design.is_small:
        change, parts = design.refit(shunt, {"short_time": {"current": "500 A", "time": "10 s"}})
        finds = [("shunt-rating", f"{shunt} in emergency_crank_peak")]
        yield Plant(change, finds=finds, parts=parts)


@fault("SHU-05")
def engine_past_the_shunt(design: Design) -> Iterator[Plant]:
    """The engine's return goes to the bank's side of the shunt."""
    wires = {"small": [("CRANK", "S3", "to")], "example": [("M03", "W032", "to")]}
    for name, change in landed(design, wires):
        # The start battery's negative leads to the motor over the shunt: no cranking conductor any more.
        yield Plant(change, finds=[("shunt-bypass", name)], line=name, follows=(*PAST, "role-claim"))


@fault("SHU-05")
def engine_joined_past_the_shunt(design: Design) -> Iterator[Plant]:
    """A second engine ground lands on the bank's side, so that there is a path round the shunt."""
    engine = {"small": "ENGINE", "example": "ENG"}[design.name]
    for post in BANK_SIDE[design.name]:
        wire = {"from": engine, "to": post, "size": "2 AWG", "length": "1 m", "colour": "yellow"}
        # The alternator and the starter now have two returns.
        follows = (*PAST, "solved-ampacity", "shunt-rating")
        yield Plant(at("conductors", "GROUND", wire), finds=[("shunt-bypass", "GROUND")], follows=follows)


@fault("SHU-06")
def bond_past_the_shunt(design: Design) -> Iterator[Plant]:
    """The bonding lands on the bank's side of the shunt, or joins it as well."""
    wires = {"small": [("bonds", "B1", "to")], "example": [("bonds", "W070", "to")]}
    for name, change in landed(design, wires):
        yield Plant(change, finds=[("shunt-bypass", name)], line=name, follows=PAST)
    start = {"small": "ANODE", "example": "TANK-FUEL"}[design.name]
    for post in BANK_SIDE[design.name]:
        strap = {"from": start, "to": post, "size": "8 AWG", "length": "1 m", "colour": "green"}
        finds = [("shunt-bypass", "STRAP")]
        # The bonding meets DC negative twice and carries a share of what the shunt carries.
        follows = (*PAST, "solved-ampacity", "shunt-rating", "bond-joints", "bond-current")
        yield Plant(at("bonds", "STRAP", strap), finds=finds, follows=follows)


@fault("SHU-06")
def shield_past_the_shunt(design: Design) -> Iterator[Plant]:
    """A shield joined to a load's negative is joined to the bank's side too."""
    shield, post = {"small": ("PLOTTER-SHIELD", "PLOTTER.load.neg"), "example": ("SHD-VHF", "P06.load.neg")}[
        design.name
    ]
    change = merged(at("shields", shield, {"joins": [post, BANK_SIDE[design.name][0]]}))
    yield Plant(change, finds=[("shunt-bypass", shield)], follows=("lost-return", "shield-loop"))
