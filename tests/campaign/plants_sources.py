"""Plant faults of charge sources and of the banks they charge: voltage, sense, devices, links between banks."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from tests.campaign.places import ampere, device_of, kind_of
from tests.campaign.planting import Design, Plant, Row, at, fault, merged, trap

ALONG = ("voltage-drop", "voltage-drop-from-bank", "solved-drop")
"""What a diode in a lead, or a longer lead, drops."""

OVER_ITS_FUSE = ("selectivity", "rating-order")
"""A source that gives more than its fuse bears stands above what is nearer the bank."""

LINKED = (
    "rating-order",
    "selectivity",  # two banks stand behind one device, and either may be the upper
    "far-end-clearing",  # the smallest fault is that of one bank, through the other's leads
    "bus-rating",  # both banks feed the bus
    "interrupting-capacity",  # both banks feed the fault
    "double-feed",
    "means-off",  # with one bank's switch open the other feeds its loads
)
"""What follows from a tie between two banks in a normal state."""


@dataclass(frozen=True)
class Lead:
    """Hold a lead from an output of a source to its fuse: the fuse's way on is `origin`."""

    path: tuple[str, ...]
    name: str
    row: Row
    source: str
    output: str
    fuse: str
    origin: str


def leads(design: Design) -> Iterator[Lead]:
    """Yield the leads of the sources that have a fuse at their far end."""
    sources = {name: part for name, _, part in design.devices("source")}
    for path, name, row in design.conductors():
        source, _, output = row["from"].rpartition(".")
        fuse = device_of(design, row["to"])
        if source in sources and output in sources[source]["outputs"] and kind_of(design, row["to"]) == "fuse":
            origin = fed_from(design, fuse)
            if origin:
                yield Lead(path, name, row, source, output, fuse, origin)


def fed_from(design: Design, fuse: str) -> str:
    """Return the post that feeds the line side of a fuse."""
    mounted = design.section("devices")[fuse].get("mount", {}).get("line", "")
    for _, _, row in design.conductors():
        for here, there in ((row["from"], row["to"]), (row["to"], row["from"])):
            if there == f"{fuse}.line" and device_of(design, here) != fuse:
                return str(here)
    return str(mounted)


def output_name(design: Design, source: str, output: str) -> str:
    """Return what a finding calls an output: its device's id, with the post where there are several."""
    outputs = design.parts[design.section("devices")[source]["part"]]["outputs"]
    return source if len(outputs) == 1 else f"{source}.{output}"


def other_output(design: Design, source: str, output: str, **facts: object) -> tuple[Row, dict[str, Row]]:
    """Return the change that gives a source a part whose output has other facts, and the parts to add."""
    outputs = design.parts[design.section("devices")[source]["part"]]["outputs"]
    changed = {key: value for key, value in {**outputs[output], **facts}.items() if value is not None}
    return design.refit(source, {"outputs": {**outputs, output: changed}})


def is_array(design: Design, source: str) -> bool:
    """Tell whether a source is a solar array."""
    outputs = design.parts[design.section("devices")[source]["part"]]["outputs"]
    return any("cold_open_voltage" in output for output in outputs.values())


@dataclass(frozen=True)
class Posts:
    """Name the places of a design that planters land on: the posts of both banks, the switched bus, the negative."""

    house: str
    house_bus: str
    start: str
    start_switched: str
    negative: str
    charge: str
    fuse: Row
    zone: str

    @property
    def banks(self) -> tuple[str, str]:
        """Return the positive posts of both banks."""
        return self.house, self.start


def posts(design: Design) -> Posts:
    """Return where planters land."""
    if design.is_small:
        return Posts("BAT-H.pos", "BUS-P", "BAT-S.pos", "SW-S.out", "BUS-N", "BAT-H.pos",
                     {"part": "bolt-fuse", "rating": "80 A", "zone": "LOCKER"}, "LOCKER")  # fmt: skip
    return Posts("STUD-HB-POS", "BUS-HP", "BAT-S.pos", "SW-S.out", "BUS-N", "BUS-CH",
                 {"part": "bolt-fuse-80", "zone": "Z-BATT"}, "Z-BATT")  # fmt: skip


def piece(start: str, end: str, length: str = "0.1 m", size: str = "2 AWG", **more: object) -> Row:
    """Return the row of a conductor; a short one lies in a sheath."""
    facts = {"enclosed": "full", "place_reason": "no room nearer"} if length == "0.1 m" else {}
    colour = {"colour": "yellow" if end.endswith(("neg", "BUS-N")) else "red"}
    return {"from": start, "to": end, "size": size, "length": length, **facts, **colour, **more}


def fused(design: Design, fuse: str, post: str, wire: str, size: str = "2 AWG") -> tuple[Row, Row]:
    """Return the device of a fuse whose line side is fed from a post, and the conductor to it, if it needs one.

    On the stud of the small boat's house battery is no room for one more terminal: it sits there itself.
    """
    part = posts(design).fuse
    if design.is_small and post == posts(design).house:
        return {fuse: {**part, "mount": {"line": post}}}, {}
    return {fuse: part}, {wire: piece(post, f"{fuse}.line", size=size)}


def link(design: Design, first: str, second: str, part: str, *, fuses: bool = True) -> Row:
    """Return the change that joins two posts over a switch or relay TIE, with a fuse at each end."""
    fuse, (first_fuse, first_wire) = posts(design).fuse, fused(design, "F-T1", first, "T1")
    devices = {"TIE": {"part": part, "zone": fuse["zone"]}, **first_fuse}
    wires = {
        **first_wire,
        "T2": piece("F-T1.load", "TIE.a", "0.3 m"),
        "T3": piece("TIE.b", second, "0.4 m"),
    }
    if fuses:
        devices["F-T2"] = fuse
        wires["T3"] = piece("TIE.b", "F-T2.load", "0.4 m")
        wires["T4"] = piece("F-T2.line", second)
    circuit = {"name": "Link between the banks", "service": "feeder", "current": "60 A", "conductors": wires}
    return {"devices": devices, "circuits": {"TIE": circuit}}


STUDS: Row = {"terminal": "stud", "stud": "M8", "torque": "12 Nm", "cover": True}

COMBINER: Row = {
    "kind": "switch", "posts": ["a", "b"], "states": {"open": [], "closed": [["a", "b"]]}, "operated": "control",
    "continuous": "140 A", "intermittent": "200 A", "contact_resistance": "0.2 mohm", "ignition_protected": True,
    **STUDS,
}  # fmt: skip


HAND_TIE: Row = {**COMBINER, "operated": "hand"}


def of_lithium(design: Design, bank: str, **facts: object) -> tuple[Row, dict[str, Row]]:
    """Return the change that makes a bank of lithium batteries, and the parts to add."""
    changes: list[Row] = []
    parts: dict[str, Row] = {}
    for name, row, _ in design.devices("battery"):
        if row["bank"] == bank:
            change, more = design.refit(name, {"chemistry": "lithium-iron-phosphate", **facts})
            changes.append(change)
            parts |= more
    return merged(*changes), parts


# --- a source and what it gives


@fault("SRC-01")
def unlimited_source(design: Design) -> Iterator[Plant]:
    """A source that does not limit itself has its fuse at the battery end only."""
    for lead in leads(design):
        change, parts = other_output(design, lead.source, lead.output, limited=None)
        follows = [
            *OVER_ITS_FUSE,
            "bus-rating",  # it feeds whatever it reaches without limit
            "size-step",
            "device-rating",
            "double-feed",
            "interrupting-capacity",  # nobody knows what it gives into a short
        ]
        finds = [("protection-distance", lead.name)]
        yield Plant(change, finds=finds, line=lead.row["size"], parts=parts, follows=follows)


@fault("SRC-02")
def other_voltage(design: Design) -> Iterator[Plant]:
    """A source is made for a bank of twice the voltage, or of half of it."""
    for lead in leads(design):
        part = design.parts[design.section("devices")[lead.source]["part"]]
        for factor in (2, 0.5):
            volts = float(part["outputs"][lead.output]["voltage"].split(maxsplit=1)[0]) * factor
            change, parts = other_output(design, lead.source, lead.output, voltage=f"{volts:g} V")
            finds = [("source-voltage", output_name(design, lead.source, lead.output))]
            yield Plant(change, finds=finds, line=f"{lead.source}:", parts=parts)


@fault("SRC-05")
def sense_elsewhere(design: Design) -> Iterator[Plant]:
    """The sense lead of a regulator starts at another place than the bank that its alternator charges."""
    here = posts(design)
    for path, _, row in design.conductors():
        regulated = design.section("circuits").get(path[1], {}).get("service") == "sense"
        fuse = device_of(design, row["to"])
        if not regulated or not any(to_regulator(design, other, fuse) for _, _, other in design.conductors()):
            continue
        regulator = next(n for n, r, _ in design.devices("load") if "regulates" in r)
        for post in (here.house_bus, here.start, here.start_switched):
            change = at(*path, {"from": post, "enclosed": "full", "place_reason": "no room nearer"})
            yield Plant(
                change,
                finds=[("sense-place", regulator)],
                line=f"{regulator}:",
                follows=[
                    "selectivity",  # its fuse now stands under another one
                    "solved-drop",  # where a switch is open in a condition, the lead is dead
                ],
            )


def to_regulator(design: Design, row: Row, fuse: str) -> bool:
    """Tell whether a conductor leads from a fuse to a regulator."""
    owner = design.section("devices").get(device_of(design, row["to"]), {})
    return bool(row["from"] == f"{fuse}.load" and "regulates" in owner)


SPLITTER: Row = {
    "kind": "diode", "posts": ["in", "out"], "passes": [["in", "out"]], "drop": "0.7 V", "resistance": "1 mohm",
    "continuous": "200 A", "ignition_protected": True, **STUDS,
}  # fmt: skip


def split(design: Design, lead: Lead) -> Row:
    """Return the change that puts an isolator into the lead of a source, at its fuse."""
    wire = {"from": "ISO.out", "to": f"{lead.fuse}.load", "size": lead.row["size"], "length": "0.2 m"}
    wire |= {"colour": "red", "current": design.section("circuits")[lead.path[1]]["current"]}
    return merged(
        at("devices", "ISO", {"part": "splitter", "zone": posts(design).zone}),
        at(*lead.path, {"to": "ISO.in"}),
        at("circuits", lead.path[1], "conductors", {"ISO-OUT": wire}),
    )


@fault("SRC-06")
def unsensed_diode(design: Design) -> Iterator[Plant]:
    """A source reaches its bank over a diode, and nothing senses beyond it."""
    regulated = {row["regulates"]: name for name, row, _ in design.devices("load") if "regulates" in row}
    for lead in leads(design):
        change = split(design, lead)
        finds = [("diode-sense", output_name(design, lead.source, lead.output))]
        line = f"{lead.source}:"
        if lead.source in regulated:
            sense = next(p for p, _, r in design.conductors() if "regulates" in owner_of(design, r["to"]))
            start = next(
                p
                for p, _, r in design.conductors()
                if r["to"] == f"{device_of(design, row_at(design, sense)['from'])}.line"
            )
            change = merged(change, at(*start, {"from": "ISO.in"}))
            finds, line = [("sense-place", regulated[lead.source])], f"{regulated[lead.source]}:"
        yield Plant(change, finds=finds, line=line, parts={"splitter": SPLITTER}, follows=ALONG)


def owner_of(design: Design, post: str) -> Row:
    """Return the row of the device that a post belongs to, empty where it is not written by itself."""
    found: Row = design.section("devices").get(device_of(design, post), {})
    return found


def row_at(design: Design, path: tuple[str, ...]) -> Row:
    """Return the row under a path of the class."""
    found = design.data
    for key in path:
        found = found[key]
    return found


@fault("SRC-07")
def unlike_combiner(design: Design) -> Iterator[Plant]:
    """A relay joins two banks while they are charged, and one of them is lithium."""
    here = posts(design)
    for bank in ("START", "HOUSE"):
        change, parts = of_lithium(design, bank)
        tie = link(design, here.charge, here.start, "combiner")
        follows = [*LINKED, "string-device"]  # strings of lithium want a device each
        found = [("unlike-banks", "TIE")]
        yield Plant(
            merged(change, tie), finds=found, line="TIE:", parts={**parts, "combiner": COMBINER}, follows=follows
        )


@fault("SRC-07")
def unlike_charge(design: Design) -> Iterator[Plant]:
    """A relay joins two banks of lead that are charged at voltages too far apart."""
    here = posts(design)
    for high, low in (("HOUSE", "START"), ("START", "HOUSE")):
        rows = {name: (row, part) for name, row, part in design.devices("battery")}
        changes, parts = [], {}
        for name, (row, part) in rows.items():
            if row["bank"] not in (high, low):
                continue
            volts = (14.8 if row["bank"] == high else 14.1) * float(part["voltage"].split(maxsplit=1)[0]) / 12
            change, more = design.refit(name, {"charge_voltage": f"{volts:g} V"})
            changes.append(change)
            parts |= more
        tie = link(design, here.charge, here.start, "combiner")
        finds = [("unlike-banks", "TIE")]
        whole = {**parts, "combiner": COMBINER}
        yield Plant(merged(*changes, tie), finds=finds, line="TIE:", parts=whole, follows=LINKED)


CONVERTER: Row = {
    "kind": "source", "outputs": {"outpos": {"return": "neg", "max": "30 A", "voltage": "14.2 V", "limited": True}},
    "inputs": {"inpos": {"return": "neg", "max": "40 A", "voltage": "12 V"}}, "ignition_protected": True,
    "internal_fuse": True, "blocks_reverse": True, "enable": "none",
}  # fmt: skip


def converter(design: Design, part: str, source: str, target: str) -> Row:
    """Return the change that adds a converter between two posts, with a fuse at each."""
    zone = posts(design).zone
    from_fuse, from_wire = fused(design, "F-K1", source, "K1", "6 AWG")
    to_fuse, to_wire = fused(design, "F-K2", target, "K4", "6 AWG")
    wires = {
        **from_wire,
        **to_wire,
        "K2": piece("F-K1.load", "CONV.inpos", "1 m", "6 AWG"),
        "K3": piece("CONV.outpos", "F-K2.load", "1 m", "6 AWG"),
        "K5": piece("CONV.neg", posts(design).negative, "1 m", "6 AWG"),
    }
    circuit = {"name": "Converter", "service": "charging", "current": "40 A", "conductors": wires}
    devices = {"CONV": {"part": part, "zone": zone}, **from_fuse, **to_fuse}
    return {"devices": devices, "circuits": {"CONV": circuit}}


@fault("SRC-08")
def converter_on_start(design: Design) -> Iterator[Plant]:
    """A converter draws on the start battery, and nothing switches it off with the engine."""
    here = posts(design)
    for post in (here.start, here.start_switched):
        change = converter(design, "always-on", post, here.charge)
        finds = [("converter-enable", "CONV")]
        yield Plant(change, finds=finds, line="CONV:", parts={"always-on": CONVERTER})


def controller(max_input: str = "60 V", volts: str = "36 V") -> Row:
    """Return the part of a solar controller."""
    return {
        "kind": "source", "outputs": {"batpos": {"return": "batneg", "max": "20 A", "voltage": "14.4 V", "limited": True}},
        "inputs": {"pvpos": {"return": "pvneg", "max": "10 A", "voltage": volts}},
        "joined": [{"between": ["batneg", "pvneg"], "resistance": "0.2 mohm"}], "max_input": max_input,
        "internal_fuse": True, "ignition_protected": True,
    }  # fmt: skip


def array(cold: str = "24 V") -> Row:
    """Return the part of a solar array."""
    volts = f"{float(cold.split(maxsplit=1)[0]) * 0.75:g} V"
    output = {"return": "neg", "max": "9 A", "voltage": volts, "limited": True, "cold_open_voltage": cold}
    return {"kind": "source", "outputs": {"pos": output}, "ignition_protected": True}


def solar(design: Design, arrays: int) -> Row:
    """Return the change that adds a solar controller CTL and arrays in series, the upper one PV-A."""
    zone, names = posts(design).zone, ["PV-A", "PV-B", "PV-C"][:arrays]
    fuse, feed = fused(design, "F-CTL", posts(design).charge, "V23", "4 AWG")
    ends = ["CTL.pvpos", *(f"{name}.pos" for name in names), "CTL.pvneg"]
    steps = zip(["CTL.pvpos", *(f"{name}.neg" for name in names)], [*ends[1:-1], "CTL.pvneg"], strict=True)
    wires = {f"V{i}": piece(a, b, "1 m", "8 AWG", current="9 A") for i, (a, b) in enumerate(steps, 11)}
    wires |= {
        "V21": piece("CTL.batpos", "F-CTL.load", "1 m", "4 AWG"),
        "V22": piece("CTL.batneg", posts(design).negative, "1 m", "4 AWG"),
        **feed,
    }
    circuit = {"name": "More solar", "service": "solar", "current": "20 A", "conductors": wires}
    devices = {name: {"part": "planted-array", "zone": zone} for name in names}
    devices |= {"CTL": {"part": "planted-controller", "zone": zone}, **fuse}
    return {"devices": devices, "circuits": {"CTL": circuit}}


@fault("SRC-09")
def cold_array(design: Design) -> Iterator[Plant]:
    """Arrays in series give more than the controller bears, or 50 V and more, when they are cold."""
    for count, cold, bears, finds in (
        (2, "24 V", "45 V", ["CTL"]),
        (2, "25 V", "60 V", ["PV-A"]),
        (1, "50 V", "60 V", ["PV-A"]),
        (3, "21 V", "60 V", ["CTL", "PV-A"]),
    ):
        volts = f"{count * float(cold.split(maxsplit=1)[0]) * 0.75:g} V"
        parts = {"planted-array": array(cold), "planted-controller": controller(bears, volts)}
        told = [("array-voltage", name) for name in finds]
        # The parts have names of their own: one yard holds the plants of all.
        names = {name: f"{name}-{count}-{cold.split(maxsplit=1)[0]}" for name in parts}
        change = solar(design, count)
        for row in change["devices"].values():
            row["part"] = names.get(row["part"], row["part"])
        yield Plant(change, finds=told, parts={names[name]: part for name, part in parts.items()})
    for name, _, part in design.devices("source"):
        if is_array(design, name):
            output = next(iter(part["outputs"]))
            change, parts = other_output(design, name, output, cold_open_voltage="50 V")
            yield Plant(change, finds=[("array-voltage", name)], line=f"{name}:", parts=parts)


@fault("SRC-13")
def device_for_the_name_plate(design: Design) -> Iterator[Plant]:
    """The fuse of a source is chosen by its name plate; cold it gives more."""
    for lead in leads(design):
        fuse = design.section("devices")[lead.fuse]
        rating_a = ampere(fuse.get("rating") or design.parts[fuse["part"]]["rating"])
        change, parts = other_output(design, lead.source, lead.output, max=f"{rating_a * 1.1:g} A")
        # The lead was chosen for less; the lead is fed by the source itself.
        follows = ["device-rating", "double-feed", "bus-rating", "return-protection", *OVER_ITS_FUSE]
        yield Plant(change, finds=[("source-maximum", lead.fuse)], line="rating:" if "rating" in fuse else "part:",
                    parts=parts, follows=follows)  # fmt: skip


# --- banks


@fault("BNK-10")
def link_protected_at_one_end(design: Design) -> Iterator[Plant]:
    """An emergency link has a fuse at the house end alone: the start battery feeds its other end."""
    here = posts(design)
    for end in (here.start, here.start_switched):
        change = link(design, here.house_bus, end, "hand-tie", fuses=False)
        yield Plant(
            merged(change, tied_states(design)),
            finds=[("unprotected-conductor", "T3")],
            line="2 AWG",
            parts={"hand-tie": HAND_TIE},
            follows=[
                "conductor-withstand",  # nothing opens before it is too hot
                "protection-distance",  # with the link closed T2 lies ahead of F-T1, seen from the start battery
            ],
        )


def tied_states(design: Design) -> Row:
    """Return the change that keeps a further switch TIE open in use, and says that it may be closed for minutes."""
    rows: Row = {
        name: {"switches": {"TIE": "open"}}
        for name, row in design.section("states").items()
        if row["kind"] != "forbidden"
    }
    if not rows:
        rows["use"] = {"kind": "normal", "switches": {"TIE": "open"}}
    rows["jump"] = {"kind": "abnormal", "switches": {"TIE": "closed"}}
    return {"states": rows, **open_in_conditions(design)}


def open_in_conditions(design: Design) -> Row:
    """Return the change that leaves TIE open in every condition: what is not named there counts as closed."""
    return {"conditions": {name: {"switches": {"TIE": "open"}} for name in design.section("conditions")}}


@fault("BNK-13")
def house_on_the_start_battery(design: Design) -> Iterator[Plant]:
    """A link between the banks may be closed in ordinary use."""
    here = posts(design)
    if not design.is_small:
        yield Plant(
            at("states", "both-banks", {"kind": "normal"}),
            finds=[("start-bank-load", "SW-P")],
            state="both-banks",
            follows=LINKED,
        )
    parts = {"hand-tie": HAND_TIE}
    for post in (here.start, here.start_switched):
        change = merged(link(design, here.house_bus, post, "hand-tie"), open_in_conditions(design))
        yield Plant(change, finds=[("start-bank-load", "TIE")], line="TIE:", parts=parts, follows=LINKED)


@fault("BNK-15")
def battery_near_fuel(design: Design) -> Iterator[Plant]:
    """A battery stands in line with a fuel part, or near one that is not shielded."""
    for name, row, _ in design.devices("battery"):
        zone = at("zones", row["zone"], {"fuel_parts": True})
        for facts in ({"in_line_with_fuel": True}, {"in_line_with_fuel": False, "fuel_clearance": "0.3 m"}):
            yield Plant(merged(zone, at("devices", name, facts)), finds=[("battery-fuel", name)], line=f"{name}:")


@fault("BNK-16")
def source_that_is_harmed(design: Design) -> Iterator[Plant]:
    """A source that charges a lithium bank cannot be told to stop before the bank disconnects."""
    banks = {row["bank"] for _, row, _ in design.devices("battery")}
    for lead in leads(design):
        start = lead.origin.startswith("BAT-S")
        bank = "START" if start else "HOUSE"
        assert bank in banks
        change, parts = of_lithium(design, bank)
        harmed, more = design.refit(lead.source, {"on_disconnect": "harmed"})
        finds = [("charge-stop", output_name(design, lead.source, lead.output))]
        follows = ["string-device"]  # strings of lithium want a device each
        yield Plant(
            merged(change, harmed), finds=finds, line=f"{lead.source}:", parts={**parts, **more}, follows=follows
        )


# --- sound arrangements


def charger(design: Design, post: str) -> Plant:
    """Return a plant of another charger, self-limiting, its fuse at a post of a bank."""
    part = {"kind": "source", "ignition_protected": True, "internal_fuse": False,
            "outputs": {"out": {"return": "neg", "max": "20 A", "voltage": "14.4 V", "limited": True}}}  # fmt: skip
    fuse, feed = fused(design, "F-X", post, "H2", "4 AWG")
    wires = {
        "H1": piece("CHG-X.out", "F-X.load", "2 m", "4 AWG"),
        **feed,
        "H3": piece("CHG-X.neg", posts(design).negative, "2 m", "4 AWG"),
    }
    circuit = {"name": "Another charger", "service": "charging", "current": "20 A", "conductors": wires}
    devices = {"CHG-X": {"part": "planted-charger", "zone": posts(design).zone}, **fuse}
    return Plant({"devices": devices, "circuits": {"CHG-X": circuit}}, parts={"planted-charger": part})


@trap("T-07")
def self_limiting_lead(design: Design) -> Iterator[Plant]:
    """Nothing stands at the source's end of a lead that the source itself cannot overload."""
    for post in (*posts(design).banks, posts(design).charge):
        yield charger(design, post)


@trap("T-08")
def bare_array_leads(design: Design) -> Iterator[Plant]:
    """The leads of an array have no fuse: it gives less than they bear."""
    for count in (1, 2):
        parts = {"planted-array": array(f"{24 * 2 / count:g} V"), "planted-controller": controller()}
        named = {f"{name}-{count}": part for name, part in parts.items()}
        change = solar(design, count)
        for row in change["devices"].values():
            row["part"] = f"{row['part']}-{count}" if row["part"] in parts else row["part"]
        yield Plant(change, parts=named)


@trap("T-35")
def sources_ahead_of_the_switch(design: Design) -> Iterator[Plant]:
    """Charge sources land on the battery side of the main switch."""
    for post in posts(design).banks:
        yield charger(design, post)


@trap("T-32")
def combiner_of_like_banks(design: Design) -> Iterator[Plant]:
    """An emergency link is open in all normal states, though the start bank is lithium."""
    here = posts(design)
    change, parts = of_lithium(design, "START")
    tie = link(design, here.house_bus, here.start, "hand-tie")
    yield Plant(merged(change, tie, tied_states(design)), parts={**parts, "hand-tie": HAND_TIE})
