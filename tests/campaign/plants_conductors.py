"""Plant faults of conductors: current, gauge, insulation, bundles, drop, length."""

from __future__ import annotations

import json
from collections.abc import Iterator

from tests.campaign.figures import AMPACITY_A, ENGINE_FACTOR, drop_v, length_of_drop_m
from tests.campaign.places import (
    ampere,
    crosses_engine_space,
    current_a,
    engine_zone,
    is_return,
    length_m,
    metres,
    route_m,
    trunk,
)
from tests.campaign.planting import Design, Plant, Row, at, fault, merged, trap

DROPS = ("voltage-drop", "voltage-drop-from-bank", "solved-drop")
"""More current, a thinner conductor or a longer one loses more voltage, also for what lies behind it."""

THINNER = (
    *DROPS,
    "solved-ampacity",  # it bears less of what the conditions send through it
    "device-rating", "size-step", "double-feed", "return-protection",  # its device is now too large for it
    "protection-distance",  # and the next device that would suit it stands further along
    "return-size",  # thinner than its feed
    "conductor-withstand", "far-end-clearing",  # less copper: less withstood, more resistance
    "lost-return",  # bears less of a diverted current
    "rating-order", "selectivity",
    "stack-order",  # its ring is now thinner than those that lie above it
)  # fmt: skip
"""What else a thinner conductor breaks."""

PAST = 1.15
"""How far past its limit a planted figure is put."""


def bears_a(design: Design, row: Row, gauge: str) -> float:
    """Return what a conductor bears in a gauge: Table 5 and the engine-space factor."""
    return AMPACITY_A[gauge] * (ENGINE_FACTOR if crosses_engine_space(design, row) else 1.0)


@fault("CON-01")
def more_current_than_it_bears(design: Design) -> Iterator[Plant]:
    """A conductor is meant to carry more than Table 5 gives its gauge."""
    for path, name, row in trunk(design):
        too_much_a = AMPACITY_A[row["size"]] * PAST
        change = at(*path, {"current": f"{too_much_a:.1f} A"})
        yield Plant(change, finds=[("ampacity", name)], line=row["size"], follows=(*DROPS, "hot-device"))


@fault("CON-01")
def thinner_than_its_current_asks(design: Design) -> Iterator[Plant]:
    """A trunk conductor is drawn in the thickest gauge that does not bear its current."""
    for path, name, row in trunk(design):
        needed_a = current_a(design, path, row)
        thin = [gauge for gauge in AMPACITY_A if needed_a and bears_a(design, row, gauge) < needed_a]
        if thin and not thin[-1].startswith("18"):
            yield Plant(
                at(*path, {"size": thin[-1]}), finds=[("ampacity", name)], line=f"size: {thin[-1]}", follows=THINNER
            )


@fault("CON-01")
def branch_of_more_current(design: Design) -> Iterator[Plant]:
    """A branch is meant to carry more than its cable bears at all."""
    for name, row, _ in design.branches():
        change = at("circuits", name, {"current": f"{AMPACITY_A[row['cable']] * PAST:.1f} A"})
        finds = [("ampacity", f"{name}.out"), ("ampacity", f"{name}.back")]
        # Its breaker, meant for less, would open; a joint of so much current asks for a torque.
        yield Plant(change, finds=finds, line=row["cable"], follows=(*DROPS, "device-carries-load", "torque-value"))


@fault("CON-02")
def engine_space_forgotten(design: Design) -> Iterator[Plant]:
    """A conductor in the engine space carries what it would bear elsewhere."""
    for path, name, row in trunk(design):
        if crosses_engine_space(design, row):
            between_a = AMPACITY_A[row["size"]] * (1 + ENGINE_FACTOR) / 2
            change = at(*path, {"current": f"{between_a:.1f} A"})
            # Its fuse stands in the heat as well.
            yield Plant(change, finds=[("ampacity", name)], line=row["size"], follows=(*DROPS, "hot-device"))


@fault("CON-03")
def short_piece_through_the_engine_space(design: Design) -> Iterator[Plant]:
    """A run outside the engine space is led through it for a foot, and carries what it bears outside."""
    for path, name, row in trunk(design):
        if crosses_engine_space(design, row) or "route" in row or metres(row["length"]) < 0.4:
            continue
        between_a = AMPACITY_A[row["size"]] * (1 + ENGINE_FACTOR) / 2
        way = {"zone": engine_zone(design), "length": "0.3 m", "lay": "single"}
        through = {"route": ["planted-way"], "tail": f"{metres(row['length']) - 0.3:.3f} m", "length": None}
        change = merged(at("ways", "planted-way", way), at(*path, {**through, "current": f"{between_a:.1f} A"}))
        follows = (
            *DROPS,
            "device-rating", "size-step", "return-protection",  # its device was chosen for the run outside
        )  # fmt: skip
        yield Plant(change, finds=[("ampacity", name)], line=row["size"], follows=follows)


def light_branches(design: Design) -> Iterator[tuple[str, Row, Row]]:
    """Yield the branches that are no electronic circuits and lie in 14 AWG or less."""
    for name, row, load in design.branches():
        is_free = row["service"] in ("electronics", "radio", "sense", "gauges", "alarm")
        if not is_free and row["cable"] in ("18 AWG", "16 AWG", "14 AWG"):
            yield name, row, load


@fault("CON-04")
def thin_single(design: Design) -> Iterator[Plant]:
    """A branch lies in single conductors thinner than 16 AWG."""
    for name, row, _ in light_branches(design):
        single = {
            "cable": None if row["cable"] == "18 AWG" else "18 AWG", "type": "single-105", "length": "1 m",
            "route": None, "tail": None, "bare_tail": None,
        }  # fmt: skip
        change = {key: value for key, value in single.items() if value or key in row}
        if row["cable"] == "18 AWG":
            del change["cable"]
        finds = [("minimum-size", f"{name}.out"), ("minimum-size", f"{name}.back")]
        yield Plant(at("circuits", name, change), finds=finds, line="18 AWG", follows=THINNER)


@fault("CON-05")
def thin_in_a_sheath(design: Design) -> Iterator[Plant]:
    """A branch lies in a sheathed cable thinner than 18 AWG."""
    for name, _, _ in light_branches(design):
        change = {"cable": "20 AWG", "length": "0.5 m", "bare_tail": "3 in"}
        row = design.section("circuits")[name]
        change |= {key: None for key in ("route", "tail") if key in row}
        finds = [("minimum-size", f"{name}.out"), ("minimum-size", f"{name}.back")]
        yield Plant(at("circuits", name, change), finds=finds, line="20 AWG", follows=THINNER)


@fault("CON-06")
def thin_core_far_out_of_its_sheath(design: Design) -> Iterator[Plant]:
    """An 18 AWG core leaves its sheath for more than 30 in."""
    for name, row, _ in light_branches(design):
        change = {"cable": "18 AWG", "bare_tail": "31 in"}
        if row["cable"] == "18 AWG":
            del change["cable"]
        finds = [("sheath-exit", f"{name}.out"), ("sheath-exit", f"{name}.back")]
        yield Plant(at("circuits", name, change), finds=finds, line="18 AWG", follows=THINNER)


# --- voltage drop

CRITICAL = {
    "small": ("feeder", "navigation-light", "anchor-light", "blower", "electronics", "radio"),
    "example": (
        "feeder", "navigation-light", "anchor-light", "blower", "electronics", "radio", "charging", "solar", "inverter",
        "bilge-pump", "alarm", "refrigeration", "gauges", "sense", "engine",
    ),
}  # fmt: skip
"""The services of the 3 per cent group: those of the practice, and those that the yard adds."""

LONGER = (
    *DROPS,
    "minimum-voltage",  # what arrives is less
    "far-end-clearing", "conductor-withstand",  # a fault at its end draws less, for longer
    "working-point",
)  # fmt: skip
"""What else a longer conductor breaks."""


def limit_v(design: Design, service: str) -> float:
    """Return the volts that a 12 V circuit may lose."""
    return 12 * (0.03 if service in CRITICAL[design.name] else 0.10)


def longer_branches(design: Design, *, critical: bool, past: float) -> Iterator[tuple[str, Row]]:
    """Yield the branches of one group, and the change that makes each lose a multiple of its limit."""
    for name, row, load in design.branches():
        is_critical = row["service"] in CRITICAL[design.name]
        if is_critical is not critical:
            continue
        needed_m = length_of_drop_m(past * limit_v(design, row["service"]) / 2, ampere(load["current"]), row["cable"])
        ways_m = sum(metres(design.section("ways")[way]["length"]) for way in row.get("route") or ())
        if needed_m > ways_m:
            change = {"tail": f"{needed_m - ways_m:.3f} m"} if "route" in row else {"length": f"{needed_m:.3f} m"}
            yield name, at("circuits", name, change)


@fault("CON-07")
def critical_branch_too_long(design: Design) -> Iterator[Plant]:
    """A circuit of the critical group is so long that it loses a little more than 3 per cent."""
    for name, change in longer_branches(design, critical=True, past=1.05):
        yield Plant(change, finds=[("voltage-drop", name)], follows=LONGER)


@fault("CON-07")
def critical_branch_too_thin(design: Design) -> Iterator[Plant]:
    """A circuit of the critical group lies in the thickest gauge that loses more than 3 per cent."""
    if design.is_small:  # its own are too short to lose so much in any gauge that may be used
        change = at("circuits", "BOW-LIGHT", {"load": "planted-light"})
        light = {**design.parts["bow-light"], "current": "3 A"}
        yield Plant(
            change, finds=[("voltage-drop", "BOW-LIGHT")], parts={"planted-light": light},
            follows=("voltage-drop-from-bank",),
        )  # fmt: skip
    for name, row, load in design.branches():
        if row["service"] not in CRITICAL[design.name]:
            continue
        whole_m = 2 * length_m(design, row)
        thin = [
            gauge for gauge in AMPACITY_A
            if drop_v(ampere(load["current"]), whole_m, gauge) > limit_v(design, row["service"])
        ]  # fmt: skip
        if thin and not thin[-1].startswith("18"):
            change = at("circuits", name, {"cable": thin[-1]})
            yield Plant(change, finds=[("voltage-drop", name)], line=f"cable: {thin[-1]}", follows=(*THINNER, *LONGER))


@fault("CON-08")
def other_branch_too_long(design: Design) -> Iterator[Plant]:
    """A circuit outside the critical group is so long that it loses a little more than 10 per cent."""
    for name, change in longer_branches(design, critical=False, past=1.05):
        yield Plant(change, finds=[("voltage-drop", name)], follows=LONGER)


@fault("CON-09")
def feeder_uses_the_allowance(design: Design) -> Iterator[Plant]:
    """A branch keeps its limit alone by a hair, and not from the bank."""
    for critical in (True, False):
        for name, change in longer_branches(design, critical=critical, past=0.999):
            yield Plant(change, finds=[("voltage-drop-from-bank", name)], follows=LONGER[2:])


@fault("CON-10")
def measured_there_and_back(design: Design) -> Iterator[Plant]:
    """A branch is measured out and back, twice the sum of its ways."""
    for name, row, _ in design.branches():
        route = route_m(design, row)
        if route is not None:
            change = at("circuits", name, {"length": f"{2 * route:.3f} m"})
            finds = [("one-way-length", f"{name}.out"), ("one-way-length", f"{name}.back")]
            yield Plant(change, finds=finds, line="length: ", follows=LONGER)


@fault("CON-10")
def out_twice_as_long_as_back(design: Design) -> Iterator[Plant]:
    """Of a circuit with one conductor each way the loop is written as the length of the way out."""
    for circuit, row in sorted(design.section("circuits").items()):
        wires = sorted((row.get("conductors") or {}).items())
        if len(wires) == 2 and any(is_return(design, wire) for _, wire in wires):
            (name, out), (_, back) = sorted(wires, key=lambda wire: is_return(design, wire[1]))
            if not is_return(design, out) and length_m(design, out) == length_m(design, back):
                change = at("circuits", circuit, "conductors", name, {"length": f"{2 * length_m(design, out):g} m"})
                yield Plant(change, finds=[("one-way-length", name)], line="length: ", follows=LONGER)


@fault("CON-10")
def back_half_as_long_as_out(design: Design) -> Iterator[Plant]:
    """The way back of a branch is written at half the way out, so that the loop is taken for one way."""
    for name, row, _ in design.branches():
        change = at("circuits", name, {"back": {"length": f"{length_m(design, row) / 2:g} m"}})
        yield Plant(change, finds=[("one-way-length", f"{name}.out")])


# --- company, insulation, material


@fault("CON-11")
def unequal_pair(design: Design) -> Iterator[Plant]:
    """A conductor is doubled by a thinner and much shorter one, which takes most of the current."""
    pairs = {"small": [("A1", "12 AWG")], "example": [("W054", "6 AWG"), ("W055", "6 AWG"), ("W040", "6 AWG")]}
    rows = {name: (path, row) for path, name, row in design.conductors()}
    for name, gauge in pairs[design.name]:
        path, row = rows[name]
        beside = {"from": row["from"], "to": row["to"], "size": gauge, "length": "0.05 m", "current": "5 A"}
        follows = (
            "device-rating", "return-protection", "conductor-withstand",  # thinner than its device allows
            "return-size",
            "double-feed", "size-step",  # between the alternator and its fuse, both reach either of the pair
        )  # fmt: skip
        change = at(*path[:-1], f"{name}X", beside)
        yield Plant(change, finds=[("solved-ampacity", f"{name}X")], line=f"size: {gauge}", follows=follows)


@fault("CON-13")
def bundle_counted_as_single(design: Design) -> Iterator[Plant]:
    """Seven conductors and more lie in one loom, and one of them carries what it would bear alone."""
    loom = {"zone": design.section("devices")[design.section("class")["reference"]]["zone"], "length": "0.3 m"}
    names = [name for name, _, _ in design.branches()]
    for name, row, _ in design.branches():
        beside = [other for other in names if other != name][:4]
        change: Row = {"ways": {"planted-loom": loom}, "circuits": {}}
        for other in (name, *beside):
            own = design.section("circuits")[other]
            change["circuits"][other] = {"route": [*(own.get("route") or ()), "planted-loom"]}
        # Ten cores: half of what the gauge bears. Between the half and the three quarters.
        change["circuits"][name]["current"] = f"{0.6 * AMPACITY_A[row['cable']]:.1f} A"
        follows = (*DROPS, "device-carries-load", "device-rating", "return-protection", "one-way-length")
        finds = [("ampacity", f"{name}.out"), ("ampacity", f"{name}.back")]
        yield Plant(change, finds=finds, line=row["cable"], follows=follows)


def in_engine_space(design: Design) -> Iterator[tuple[tuple[str, ...], str, Row]]:
    """Yield the conductors that cross the engine space, the cranking ones too."""
    for path, name, row in design.conductors():
        if crosses_engine_space(design, row):
            yield path, name, row


@fault("CON-14")
def insulation_of_60_c(design: Design) -> Iterator[Plant]:
    """A conductor of the engine space is insulated for 60 C."""
    part, parts = design.part_like("single-105", {"insulation": "60 C"})
    for path, name, row in in_engine_space(design):
        follows = (
            "ampacity", "solved-ampacity", "lost-return",  # such insulation bears less current
            "device-rating", "size-step", "return-protection", "double-feed",  # and asks for a smaller device
            "protection-distance", "conductor-withstand",
        )  # fmt: skip
        yield Plant(
            at(*path, {"type": part}), finds=[("insulation-rating", name)], line=row["size"], parts=parts,
            follows=follows,
        )  # fmt: skip


@fault("CON-15")
def no_stranded_insulated_copper(design: Design) -> Iterator[Plant]:
    """A conductor is of aluminium, solid, bare, or welding cable."""
    wrongs: list[Row] = [{"material": "aluminium"}, {"strands": "solid"}, {"insulated": False}, {"welding": True}]
    for index, (path, name, row) in enumerate(trunk(design)):
        part, parts = design.part_like("single-105", wrongs[index % len(wrongs)])
        yield Plant(at(*path, {"type": part}), finds=[("conductor-material", name)], line=row["size"], parts=parts)


@fault("CON-16")
def return_thinner_than_its_feed(design: Design) -> Iterator[Plant]:
    """The way back of a branch, or a return conductor, is one gauge thinner than the way out."""
    gauges = list(AMPACITY_A)
    for name, row, _ in design.branches():
        if row["cable"] not in gauges[:2]:
            thinner = gauges[gauges.index(row["cable"]) - 1]
            change = at("circuits", name, {"back": {"size": thinner}})
            yield Plant(change, finds=[("return-size", f"{name}.back")], line=f"size: {thinner}", follows=THINNER)
    for path, name, row in trunk(design):
        if path[0] == "circuits" and is_return(design, row) and row["size"] not in gauges[:2]:
            circuit = design.section("circuits")[path[1]]
            if any(not is_return(design, wire) for wire in circuit["conductors"].values()):
                thinner = gauges[gauges.index(row["size"]) - 1]
                yield Plant(
                    at(*path, {"size": thinner}), finds=[("return-size", name)], line=f"size: {thinner}",
                    follows=(*THINNER, "ampacity"),
                )  # fmt: skip


# --- what many circuits share


@fault("CON-18")
def motor_start_pulls_electronics_down(design: Design) -> Iterator[Plant]:
    """Motors start on what electronics hang on too, and leave these less than they need."""
    needs = {"small": {"PLOTTER": 11.55}, "example": {"P07": 10.9, "P10": 11.0, "P11": 11.1}}
    motors = {"small": {"PUMP": "60 A"}, "example": {"WINDLASS": "180 A", "P22": "40 A"}}
    closed = {} if design.is_small else {"closed": ["WLCTL"]}
    for name, volts in needs[design.name].items():
        part, parts = design.part_like(design.section("circuits")[name]["load"], {"min_voltage": f"{volts} V"})
        start = {
            "loads": {**motors[design.name], name: "1 A"}, "short_time": "2 s", "judge_drop": False, **closed,
            **_switches(design),
        }  # fmt: skip
        change = merged(at("circuits", name, {"load": part}), at("conditions", "planted-start", start))
        yield Plant(
            change, finds=[("minimum-voltage", f"{name}.load")], line=f"load: {part}", parts=parts,
            state="planted-start",
        )  # fmt: skip


def _switches(design: Design) -> Row:
    return {} if design.is_small else {"switches": {"SW-H": "closed", "SW-S": "closed", "SW-P": "open"}}


@fault("CON-19", "RET-06")
def shared_return_sized_for_one(design: Design) -> Iterator[Plant]:
    """The negative of a panel is sized for its largest branch and carries the sum of all."""
    gauge, bears = "16 AWG", AMPACITY_A["16 AWG"]
    returns = {"small": ("FEED", "D2"), "example": ("M02", "W021")}
    circuit, name = returns[design.name]
    loads = {n: f"{ampere(load['current']) * 1.0:g} A" for n, row, load in design.branches() if n[0] != "A"}
    total = sum(ampere(a) for a in loads.values())
    if total <= bears:
        loads = {n: f"{ampere(a) * 1.1 * bears / total:.2f} A" for n, a in loads.items()}
    condition = {"loads": loads, "judge_drop": False, **_switches(design)}
    change = merged(
        at("circuits", circuit, "conductors", name, {"size": gauge, "current": "8 A"}),
        at("conditions", "planted-all", condition),
    )
    yield Plant(
        change, finds=[("solved-ampacity", name)], line=f"size: {gauge}",
        follows=(*THINNER, "solved-rating", "minimum-voltage"),  # such a return loses much
    )  # fmt: skip


# --- sound arrangements


@trap("T-06")
def thin_core_in_its_sheath(design: Design) -> Iterator[Plant]:
    """18 AWG inside a sheath, bare for 30 in.

    Behind a panel breaker of the example its withstand is exceeded, so that only fuses are looked at there.
    """
    for name, row, load in light_branches(design):
        if not design.is_small and row["feed"].startswith("PNL"):
            continue
        small_enough = drop_v(ampere(load["current"]), 2 * length_m(design, row), "18 AWG")
        if small_enough < 0.6 * limit_v(design, row["service"]) and ampere(row["protect"]) <= 10:
            change = {"cable": "18 AWG", "bare_tail": "30 in"}
            if row["cable"] == "18 AWG":
                del change["cable"]
            yield Plant(at("circuits", name, change))


@trap("T-05", "T-34")
def thin_electronic_circuit(design: Design) -> Iterator[Plant]:
    """A sense lead or electronics below 1 A in 18 AWG, behind a device that suits it."""
    for path, _, row in trunk(design):
        circuit = design.section("circuits")[path[1]] if path[0] == "circuits" else {}
        if circuit.get("service") == "sense" and row["size"] == "16 AWG":
            yield Plant(at(*path, {"size": "18 AWG"}), follows=("return-size",))


@trap("T-10")
def equal_pair(design: Design) -> Iterator[Plant]:
    """A heavy conductor is doubled by one of the same gauge and length."""
    for name in {"small": ("D1", "D2", "C2"), "example": ("W054", "W055", "W020", "W056", "W031")}[design.name]:
        path, row = next((path, row) for path, n, row in design.conductors() if n == name)
        yield Plant(at(*path[:-1], f"{name}X", dict(row)))


@trap("T-23")
def windlass_at_8_percent(design: Design) -> Iterator[Plant]:
    """A windlass, in the 10 per cent group, loses 8 per cent."""
    if design.is_small:
        yield _small_windlass()
        return
    for name in ("W056", "W058"):
        path, row = next((path, row) for path, n, row in design.conductors() if n == name)
        more_m = length_of_drop_m(0.0745 * 12 - _drop_of(design, "M14"), 90, row["size"])
        tail = metres(row["tail"]) + more_m
        yield Plant(at(*path, {"tail": f"{tail:.2f} m"}))


def _drop_of(design: Design, circuit: str) -> float:
    row = design.section("circuits")[circuit]
    return sum(
        drop_v(ampere(row["current"]), length_m(design, wire), wire["size"]) for wire in row["conductors"].values()
    )


def _small_windlass() -> Plant:
    """Return a windlass on the small boat's positive bus, 8 per cent away."""
    length = length_of_drop_m(0.08 * 12 / 2, 50, "4 AWG")
    parts = {
        "planted-windlass": {
            "kind": "load", "voltage": "12 V", "current": "50 A", "motor": True, "max_device": "80 A",
            "stall_protection": "thermal",
        }
    }  # fmt: skip
    change = {
        "devices": {
            "F-WL": {"part": "planted-breaker", "zone": "LOCKER", "mount": {"line": "BUS-P"}},
            "WL": {"part": "planted-windlass", "zone": "BOW"},
        },
        "circuits": {
            "WINDLASS": {
                "name": "Windlass", "service": "windlass", "current": "50 A",
                "conductors": {
                    "X1": {"from": "F-WL.load", "to": "WL.pos", "size": "4 AWG", "length": f"{length:.2f} m"},
                    "X2": {"from": "WL.neg", "to": "BUS-N", "size": "4 AWG", "length": f"{length:.2f} m"},
                },
            }
        },
    }  # fmt: skip
    breaker = {"kind": "breaker", "voltage": "32 V", "interrupting": "10 kA", "band": "slow", "resistance": "0.3 mohm",
               "rating": "80 A", "trip_free": True, "reset": "manual", "torque": "5 Nm", "cover": True}  # fmt: skip
    return Plant(change, parts={**parts, "planted-breaker": breaker})


@trap("T-20")
def bundle_under_the_law_alone(design: Design) -> Iterator[Plant]:
    """Ten cores lie in one loom, and under the law alone one of them carries more than half of what it bears."""
    law = design.files["yard.yaml"].replace(", voluntary-dc]", "]")
    loom = {"zone": design.section("devices")[design.section("class")["reference"]]["zone"], "length": "0.3 m"}
    for name, row, _ in light_branches(design):
        if row["feed"] == "PNL-01" or row["feed"].startswith("24H") or "length" in row or length_m(design, row) > 6:
            continue
        part, parts = design.part_like(row["load"], {"current": "19 A", "max_device": "20 A", "min_voltage": None})
        others = [other for other, own, _ in design.branches() if other != name and "route" in own][:4]
        own = {"cable": "14 AWG", "load": part, "protect": "20 A"}
        if row["cable"] == "14 AWG":
            del own["cable"]
        if row["protect"] == "20 A":
            del own["protect"]
        change: Row = {"ways": {"planted-loom": loom}, "circuits": {name: own}}
        for other in others:
            route = [*design.section("circuits")[other]["route"], "planted-loom"]
            change["circuits"][other] = {"route": route}
        own |= {"route": [*(row.get("route") or ()), "planted-loom"]}
        own |= {key: None for key in ("legend", "bare_tail") if key in row}
        data = {"hull": "BUNDLE-1", "class": design.class_id, "revision": design.revision, "status": "in-build",
                "options": [], "changes": {"AB-1": {"what": "planted", "state": "recorded", "set": change}}}  # fmt: skip
        files = {"yard.yaml": law, "hulls/bundle-1.yaml": json.dumps(data)}
        yield Plant({}, files=files, parts=parts)


@trap("T-19")
def bilge_pump_that_the_set_does_not_name(design: Design) -> Iterator[Plant]:
    """A bilge pump loses more than 3 per cent under a set whose critical group does not name it."""
    if design.is_small:
        yield _small_bilge_pump()
        return
    yard = design.files["yard.yaml"].replace("bilge-pump, ", "")
    for name, row, load in design.branches():
        if row["service"] == "bilge-pump":
            ways_m = sum(metres(design.section("ways")[way]["length"]) for way in row["route"])
            needed_m = length_of_drop_m(0.05 * 12 / 2, ampere(load["current"]), "16 AWG") - ways_m
            change = at("circuits", name, {"tail": f"{needed_m:.2f} m", "cable": "16 AWG"})
            data = {"hull": "PUMP-1", "class": design.class_id, "revision": design.revision, "status": "in-build",
                    "options": [], "changes": {"AB-1": {"what": "planted", "state": "recorded", "set": change}}}  # fmt: skip
            files = {"yard.yaml": yard, "hulls/pump-1.yaml": json.dumps(data)}
            # A note says that the class has a shorter run.
            yield Plant({}, files=files, follows=("length-far-from-sisters",))


def _small_bilge_pump() -> Plant:
    """Return a bilge pump ahead of the small boat's switch, 9 per cent away."""
    length = length_of_drop_m(0.09 * 12 / 2, 4, "14 AWG")
    pump = {"kind": "load", "voltage": "12 V", "current": "4 A", "motor": True, "max_device": "5 A",
            "stall_protection": "thermal", "ignition_protected": True, "standby": "0 A"}  # fmt: skip
    wires = {
        "X1": {"from": "F-BP.load", "to": "BP.pos", "size": "14 AWG", "length": f"{length:.2f} m", "colour": "red"},
        "X2": {"from": "BP.neg", "to": "BUS-N", "size": "14 AWG", "length": f"{length:.2f} m", "colour": "yellow"},
    }
    change = {
        "devices": {
            "F-BP": {"part": "blade-fuse", "zone": "LOCKER", "rating": "5 A", "mount": {"line": "BAT-H.pos"}},
            "BP": {"part": "planted-pump", "zone": "LOCKER"},
        },
        "circuits": {"BP": {"name": "Bilge pump", "service": "bilge-pump", "current": "4 A", "conductors": wires}},
    }  # fmt: skip
    return Plant(change, parts={"planted-pump": pump})
