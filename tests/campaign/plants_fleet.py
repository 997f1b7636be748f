"""Plant faults of a fleet: patches without effect, options that clash, waivers that do not hold, old revisions."""

from __future__ import annotations

from collections.abc import Iterator

import yaml

from tests.campaign.places import length_m, trunk
from tests.campaign.planting import Design, Plant, Row, at, fault, merged
from tests.campaign.plants_conductors import DROPS, LONGER


def hull(design: Design, change: Row | None = None, **fields: object) -> dict[str, str]:
    """Return the file of one hull, with one as-built change."""
    data: Row = {"hull": "FLEET-1", "class": design.class_id, "revision": design.revision, "status": "in-build",
                 "options": [], **fields}  # fmt: skip
    if change:
        data["changes"] = {"AB-1": {"what": "planted", "state": "recorded", "set": change}}
    return {"hulls/fleet-1.yaml": dump(data)}


def option(design: Design, name: str, change: Row) -> dict[str, str]:
    """Return the file of an option of the class."""
    text = dump({"option": name, "name": f"planted {name}", "changes": change})
    return {f"classes/{design.class_id}/options/{name.lower()}.yaml": text}


def dump(data: Row) -> str:
    """Return data as YAML, one fact a line."""
    return yaml.safe_dump(data, sort_keys=False, width=1000)


@fault("FLT-02")
def change_that_is_already_so(design: Design) -> Iterator[Plant]:
    """A hull's change sets what the class says already."""
    finds = [("patch-without-effect", "hulls/fleet-1.yaml")]
    for name, row, _ in design.branches():
        files = hull(design, at("circuits", name, {"cable": row["cable"]}))
        yield Plant({}, finds=finds, line=f"cable: {row['cable']}", files=files)


@fault("FLT-02")
def change_of_what_is_not_there(design: Design) -> Iterator[Plant]:
    """A hull's change takes out a circuit whose id is mistyped."""
    for name, _, _ in design.branches():
        files = {"hulls/fleet-1.yaml": hull(design)["hulls/fleet-1.yaml"]
                 + f"changes:\n  AB-1:\n    what: planted\n    state: recorded\n    set:\n      circuits:\n"
                 f"        {name}X: null\n"}  # fmt: skip
        yield Plant({}, finds=[("patch-without-effect", "hulls/fleet-1.yaml")], line=f"{name}X: null", files=files)


@fault("FLT-02")
def option_that_changes_nothing(design: Design) -> Iterator[Plant]:
    """An option sets what the class says already."""
    name, row, _ = next(iter(design.branches()))
    files = option(design, "OPT-NIL", at("circuits", name, {"cable": row["cable"]}))
    (path,) = files
    yield Plant({}, finds=[("patch-without-effect", path)], line="cable", files=files)


@fault("FLT-03")
def options_sound_alone_and_unsound_together(design: Design) -> Iterator[Plant]:
    """One option fits a larger fuse, one a thinner cable; each is sound, both are not."""
    if design.is_small:
        larger = at("devices", "F-CHARGER", {"rating": "60 A"})
        thinner = {"C1": {"size": "12 AWG"}, "C2": {"size": "12 AWG"}}
        change, name, line = at("circuits", "CHARGE", "conductors", thinner), "C1", "size: 12 AWG"
    else:
        larger = at("devices", "F-24H", {"part": "bolt-fuse-80"})
        thinner = {"W022": {"size": "10 AWG"}, "W023": {"size": "10 AWG"}}
        change, name, line = at("circuits", "M15", "conductors", thinner), "W022", "size: 10 AWG"
    files = {**option(design, "OPT-X1", larger), **option(design, "OPT-X2", change)}
    yield Plant({}, finds=[("device-rating", name)], line=line, files=files, on="OPT-X1 + OPT-X2")


@fault("FLT-10")
def option_beyond_a_shared_feeder(design: Design) -> Iterator[Plant]:
    """An option adds loads to a panel beyond what its main bears."""
    load: Row = {"kind": "load", "voltage": "12 V", "current": "25 A", "max_device": "30 A", "ignition_protected": True}
    positions = {"small": ("P6", "P7", "P8"), "example": ("PNL-35", "PNL-36", "PNL-37")}[design.name]
    main, zone, condition = {"small": ("F-PANEL", "CABIN", "moored"), "example": ("CB-PM", "Z-NAV", "hotel")}[
        design.name
    ]
    branch = {"service": "general", "protect": "30 A", "cable": "6 AWG", "length": "0.5 m", "load": "planted-load",
              "zone": zone}  # fmt: skip
    change: Row = {
        "circuits": {f"X{n}": {"name": f"planted {n}", "feed": feed, **branch} for n, feed in enumerate(positions, 1)},
        "conditions": {condition: {"loads": {f"X{n}": "25 A" for n in range(1, 4)}}},
    }
    files = option(design, "OPT-X", change)
    follows = (
        *DROPS,
        "minimum-voltage",
        "bus-rating",
        "solved-rating",
        "selectivity",
        "shunt-rating",
        "solved-ampacity",
    )
    yield Plant(
        {}, finds=[("solved-rating", main)], files=files, parts={"planted-load": load}, follows=follows,
        on="OPT-X",
    )  # fmt: skip


@fault("FLT-11")
def option_that_brings_the_law_aboard(design: Design) -> Iterator[Plant]:
    """A petrol engine comes with an option: the law now binds, and refuses what the yard's own set allows."""
    engine, circuit, name = {"small": ("MAIN", "SENSE", "V1"), "example": ("MAIN-ENGINE", "M08", "W212")}[design.name]
    text = design.files["yard.yaml"].replace("cfr33-183-i, ", "")
    long: Row = {"length": "50 in", "enclosed": "full", "place_reason": "no room nearer"}
    if not design.is_small:
        del long["enclosed"]
    petrol = at("facts", "engines", engine, {"fuel": "petrol"})
    change = merged(petrol, at("circuits", circuit, "conductors", name, long))
    only_long = option(design, "OPT-Y", at("circuits", circuit, "conductors", name, long))
    files = {"yard.yaml": text, **option(design, "OPT-X", change), **only_long}
    files[next(iter(only_long))] += "excludes: [OPT-X]\n"
    yield Plant(
        {}, finds=[("protection-distance", name)], files=files, line="size: ",
        on="OPT-X",
    )  # fmt: skip


@fault("FLT-12")
def length_far_from_the_sisters(design: Design) -> Iterator[Plant]:
    """A hull's conductor is written thrice as long as the class has it, and 3 m more."""
    for path, name, row in trunk(design):
        if "route" not in row:
            far_m = 3 * length_m(design, row) + 3
            change = at(*path, {"length": f"{far_m:.2f} m"})
            follows = (
                *LONGER, "protection-distance", "one-way-length", "device-rating", "size-step", "double-feed",
                "source-device",  # farther from the source
            )  # fmt: skip
            finds = [("length-far-from-sisters", name)]
            yield Plant({}, finds=finds, line="length: ", files=hull(design, change), follows=follows)


# --- waivers and revisions

WAIVER: Row = {
    "hull": "FLEET-1", "fingerprint": "0123456789ab", "reason": "planted", "approved_by": "electrical lead",
    "expires": "2027-12-01",
}  # fmt: skip


def waiver(**fields: object) -> dict[str, str]:
    """Return a file of one waiver."""
    return {"waivers.yaml": dump({"waivers": {"W-1": {**WAIVER, **fields}}})}


def oversized(design: Design) -> Iterator[tuple[str, Row]]:
    """Yield breakers with the change that makes each larger than its load's maker allows."""
    made = {"small": (5, 10, 15, 20, 30), "example": (5, 7.5, 10, 15, 20, 25, 30)}[design.name]
    for name, row, load in design.branches():
        larger = [amps for amps in made if amps > float(load["max_device"].split()[0])]
        if larger and row["cable"] in ("14 AWG", "12 AWG", "10 AWG", "8 AWG") and row["feed"][:3] != "24H":
            yield row["feed"], at("circuits", name, {"protect": f"{larger[0]:g} A"})


LARGER = ("device-rating", "far-end-clearing", "conductor-withstand", "selectivity", "rating-order", "legend-rating")
"""What else a larger breaker breaks."""


@fault("FLT-04")
def waiver_without_a_finding(design: Design) -> Iterator[Plant]:
    """A waiver accepts a finding that no longer exists."""
    for feed, _ in oversized(design):
        files = {**hull(design), **waiver(check="maker-device", part=feed)}
        yield Plant({}, finds=[("waiver-unmatched", "W-1")], line="W-1:", files=files)


@fault("FLT-05")
def waiver_that_ran_out(design: Design) -> Iterator[Plant]:
    """A waiver has expired."""
    for feed, change in oversized(design):
        files = {**hull(design, change), **waiver(check="maker-device", part=feed, expires="2026-11-30")}
        finds = [("waiver-expired", "W-1"), ("maker-device", feed)]
        yield Plant({}, finds=finds, files=files, follows=LARGER)


@fault("FLT-05")
def waiver_of_two_findings(design: Design) -> Iterator[Plant]:
    """A waiver matches the findings of two limit sets."""
    pieces = {"small": [("SENSE", "V1")], "example": [("M08", "W212"), ("M12", "W213")]}
    for circuit, name in pieces[design.name]:
        piece: Row = {"length": "9 in"}
        if not design.is_small:
            piece["enclosed"] = None
        change = at("circuits", circuit, "conductors", name, piece)
        files = {**hull(design, change), **waiver(check="protection-distance", part=name)}
        yield Plant({}, finds=[("waiver-too-wide", "W-1"), ("protection-distance", name)], files=files)


@fault("FLT-06")
def waiver_of_other_inputs(design: Design) -> Iterator[Plant]:
    """A waiver accepts a finding whose inputs have changed since."""
    for feed, change in oversized(design):
        files = {**hull(design, change), **waiver(check="maker-device", part=feed)}
        finds = [("waiver-inputs-changed", "W-1"), ("maker-device", feed)]
        yield Plant({}, finds=finds, files=files, follows=LARGER)


@fault("FLT-07")
def hull_behind_its_class(design: Design) -> Iterator[Plant]:
    """A hull is built to an older revision of its class."""
    for revision in range(1, design.revision):
        files = hull(design, revision=revision)
        yield Plant({}, finds=[("class-revision", "FLEET-1")], line=f"revision: {revision}", files=files)
