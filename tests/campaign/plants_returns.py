"""Plant faults of returns: missing, split, shared, or lost with a thin path beside them."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.planting import Design, Plant, at, fault, merged
from tests.campaign.plants_conductors import DROPS, THINNER


@fault("RET-01")
def load_without_a_return(design: Design) -> Iterator[Plant]:
    """The return conductor of a load is missing."""
    returns = {
        "small": [("SENSE", "V3", "REGULATOR")],
        "example": [("M13", "W055", "INV"), ("M14", "W058", "WINDLASS"), ("M16", "W061", "EPANEL"),
                    ("M18", "W065", "REG")],
    }  # fmt: skip
    for circuit, name, load in returns[design.name]:
        change = at("circuits", circuit, "conductors", {name: None})
        yield Plant(change, finds=[("load-return", load)], line=f"{load}: ")


@fault("RET-01")
def load_without_a_feed(design: Design) -> Iterator[Plant]:
    """The feed conductor of a load is missing."""
    feeds = {
        "small": [("SENSE", "V2", "REGULATOR")],
        "example": [("M13", "W054", "INV"), ("M16", "W060", "EPANEL"), ("M18", "W064", "REG")],
    }
    for circuit, name, load in feeds[design.name]:
        change = at("circuits", circuit, "conductors", {name: None})
        yield Plant(change, finds=[("load-return", load)], line=f"{load}: ")


@fault("RET-06")
def two_mains_on_one_thin_return(design: Design) -> Iterator[Plant]:
    """A heavy circuit returns by way of another circuit's thin negative."""
    moves = {
        "small": [("CHARGE", "C2", "REGULATOR.gnd", "V3")],
        "example": [("M13", "W055", "BUS-24N", "W023"), ("M13", "W055", "MPPT1.batneg", "W047"),
                    ("M13", "W055", "DDC.neg", "W051"), ("M13", "W055", "CHG.neg", "W043")],
    }  # fmt: skip
    for circuit, name, post, carrier in moves[design.name]:
        change = at("circuits", circuit, "conductors", name, {"to": post})
        if design.is_small:
            change = merged(change, at("circuits", "SENSE", "conductors", "V3", {"type": "planted-75"}))
            part = {"kind": "cable", "insulation": "75 C"}
            yield Plant(
                change, finds=[("solved-ampacity", carrier)], parts={"planted-75": part}, follows=(*THINNER, *DROPS)
            )
            continue
        finds = [("return-protection", carrier), ("solved-ampacity", carrier)]
        follows = (
            *THINNER,
            *DROPS,
            "minimum-voltage",
            "solved-rating",
            "terminal-range",
        )  # bus and post have the sum too
        yield Plant(change, finds=finds, follows=follows)


@fault("RET-07")
def negative_bus_not_joined(design: Design) -> Iterator[Plant]:
    """The negative bus of a panel is not joined to the main one."""
    buses = {"small": [("FEED", "D2", "PANEL-N")], "example": [("M02", "W021", "BUS-PN"), ("M15", "W023", "BUS-24N")]}
    for circuit, name, bus in buses[design.name]:
        change = at("circuits", circuit, "conductors", {name: None})
        yield Plant(change, finds=[("split-return", bus)], line=f"{bus}: ")


@fault("RET-11")
def thin_path_beside_a_heavy_return(design: Design) -> Iterator[Plant]:
    """A thin conductor stands beside the return of starter and alternator, and would carry it alone."""
    if design.is_small:
        change = at("joints", "J-REG", {"from": "REGULATOR.gnd", "to": "ENGINE"})
        # And where the joint of the starter comes loose.
        finds = [("lost-return", "V3 without S3")]
        yield Plant(change, finds=finds, line="size: 16 AWG", follows=("lost-return", "bond-joints"))
    wire = {"from": {"small": "ENGINE", "example": "ENG"}[design.name], "to": "BUS-N", "size": "14 AWG",
            "length": "2 m", "colour": "yellow", "current": "1 A"}  # fmt: skip
    heavy = {"small": "S3", "example": "W032"}[design.name]
    finds = [("lost-return", f"THIN without {heavy}")]
    # Already with the heavy return in place it takes its share; and joints can come loose too.
    follows = ("solved-ampacity", "lost-return")
    yield Plant(at("conductors", "THIN", wire), finds=finds, line="size: 14 AWG", follows=follows)
    if not design.is_small:
        change = at("shields", "SHD-ENG", {"joins": ["STARTER.case", "BUS-N"]})
        yield Plant(change, finds=[("lost-return", "SHD-ENG without W032")], follows=("lost-return", "shield-loop"))
        change = at("circuits", "M18", "conductors", "BACK", {**wire, "from": "REG.gnd", "size": "16 AWG"})
        finds = [("lost-return", "BACK without W032"), ("lost-return", "W065 without W032")]
        yield Plant(change, finds=finds, line="size: 16 AWG", follows=("solved-ampacity", "return-size"))
