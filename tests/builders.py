"""Build the plainest sound boat and its parts, so that a test shows the one thing it changes.

Every builder takes an id and what matters; the rest is sound. `a_boat` sorts its pieces into
the maps of a boat, as the reader does. Nothing here reads a file.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

from checker.boat.hull import (
    Boat,
    Circuit,
    Condition,
    Conductor,
    Device,
    Engine,
    Joint,
    Shield,
    SwitchRow,
    Way,
    Zone,
)
from checker.boat.parts import (
    Band,
    BandPoint,
    Battery,
    Bus,
    Cable,
    Load,
    Metal,
    Overcurrent,
    Part,
    Shunt,
    Source,
    Switch,
    Terminals,
)
from checker.checks.catalogue import CHECKS
from checker.checks.check import Check, House
from checker.finding import Outcome, Verdict
from checker.limits.limit_set import load_limit_set
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.potentials import Potentials, study_potentials
from checker.network.states import SwitchState, study_states
from checker.network.studies import Studies
from checker.pipeline import run_checks, study_boat
from checker.reading.quantity import Dimension, read_number, read_size

INCH_M = 0.0254
DRY = Zone(id="DRY", name="dry and cool", ambient_c=30.0)
SINGLE = Cable(
    id="single-105", insulation_c=105.0, material="copper", is_stranded=True, is_insulated=True, is_sheathed=False
)

FAST = Band(
    id="fast",
    points=(
        BandPoint(1.35, 1.0, math.inf), BandPoint(2.0, 0.2, 4.0), BandPoint(10.0, 0.01, 0.02),
        BandPoint(100.0, 0.0001, 0.0002), BandPoint(1000.0, 0.000001, 0.000002),
    ),
)  # fmt: skip
"""Each stretch falls steeply enough that a larger fuse of the same band outlasts a smaller one."""

Piece = Device | Conductor | Joint | Shield | Circuit | SwitchRow | Condition | Engine | Zone | Way


# --- devices


def a_device(
    name: str, part: Part, *, zone: str = "DRY", mount: Mapping[str, str] | None = None, **more: Any
) -> Device:
    """Place a part; `mount` joins own posts to other posts without length."""
    return Device(id=name, part=part, zone=zone, mounts=tuple(sorted((mount or {}).items())), **more)


def a_battery(name: str, volts: float = 12.0, *, bank: str = "HOUSE", **more: Any) -> Device:
    """Place a lead-acid battery."""
    part = Battery(
        id="bat", voltage_v=volts, capacity_ah=100.0, chemistry="flooded-lead", emf_full_v=volts * 12.8 / 12,
        emf_low_v=volts * 11.9 / 12, resistance_full_ohm=0.004, resistance_low_ohm=0.006,
    )  # fmt: skip
    return a_device(name, part, bank=bank, **more)


def a_bus(name: str, rating_a: float = 600.0) -> Device:
    """Place a bus, or a stud: one node."""
    return a_device(name, Bus(id="bus", rating_a=rating_a))


def a_metal(name: str) -> Device:
    """Place a metal part: an engine block, a keel bolt."""
    return a_device(name, Metal(id="metal"))


def a_fuse(name: str, rating_a: float, *, volts: float = 32.0, mount: Mapping[str, str] | None = None) -> Device:
    """Place a fuse between its posts line and load; it is fast, and breaks whatever can flow."""
    part = Overcurrent(
        id="fuse", is_breaker=False, rating_a=rating_a, voltage_v=volts, interrupting_a=50_000.0, band=FAST
    )
    return a_device(name, part, mount=mount)


def a_switch(
    name: str,
    states: Mapping[str, Sequence[tuple[str, str]]] | None = None,
    *,
    by_hand: bool = True,
    mount: Mapping[str, str] | None = None,
) -> Device:
    """Place a switch by its states; without any, a plain one with posts in and out."""
    table = {"closed": [("in", "out")], "open": []} if states is None else dict(states)
    posts = dict.fromkeys(post for pairs in table.values() for pair in pairs for post in pair)
    rows = tuple((state, tuple(pairs)) for state, pairs in table.items())
    return a_device(name, Switch(id="switch", posts=tuple(posts), states=rows, by_hand=by_hand), mount=mount)


def a_shunt(name: str, measures: str = "HOUSE", rating_a: float = 500.0) -> Device:
    """Place a monitoring shunt: post bat faces the bank, sys the boat."""
    return a_device(name, Shunt(id="shunt", rating_a=rating_a), measures=measures)


def a_load(name: str, current_a: float = 5.0, *, volts: float = 12.0, motor: bool = False, **more: Any) -> Device:
    """Place a load between its posts pos and neg."""
    return a_device(
        name, Load(id="load", voltage_v=volts, current_a=current_a, is_motor=motor, max_device_a=1000.0), **more
    )


def a_source(name: str, max_a: float = 60.0, *, volts: float = 12.0, limited: bool = True) -> Device:
    """Place a charge source between its posts out and neg."""
    part = Source(
        id="source", outputs=(Terminals(post="out", return_post="neg", max_a=max_a, voltage_v=volts, limited=limited),)
    )
    return a_device(name, part)


def a_converter(
    name: str, *, volts_in: float = 12.0, volts_out: float = 24.0, max_a: float = 10.0, isolated: bool = False
) -> Device:
    """Place a converter: posts inpos, inneg, outpos, outneg; its two negatives are one unless isolated."""
    part = Source(
        id="converter",
        outputs=(Terminals(post="outpos", return_post="outneg", max_a=max_a, voltage_v=volts_out, limited=True),),
        inputs=(Terminals(post="inpos", return_post="inneg", max_a=max_a * 2, voltage_v=volts_in),),
        joined=() if isolated else (("inneg", "outneg", 0.0),),
    )
    return a_device(name, part)


# --- what joins them


def a_conductor(name: str, start: str, end: str, *, size: str = "6 AWG", length: str = "1 m", **more: Any) -> Conductor:
    """Run a conductor between two posts. `enclosed=True` sheathes all of it."""
    length_m = read_number(length, Dimension.LENGTH)
    if more.pop("enclosed", False):
        more["enclosed_m"] = length_m
    facts: dict[str, Any] = {
        "cable": SINGLE,
        "length_unit": "ft" if length.endswith(("ft", "in")) else "m",
        "zones": ("DRY",),
    }
    return Conductor(id=name, start=start, end=end, size=read_size(size), length_m=length_m, **{**facts, **more})


def a_link(name: str, start: str, end: str, **more: Any) -> Conductor:
    """Run a short, sheathed, full-size conductor inside a bank."""
    facts = {"size": "4/0 AWG", "length": "0.05 m", "enclosed": True, "role": "bank", "role_reason": "in the bank"}
    return a_conductor(name, start, end, **{**facts, **more})


def a_bond(name: str, start: str, end: str, **more: Any) -> Conductor:
    """Run a bonding conductor."""
    return a_conductor(name, start, end, is_bond=True, **more)


def a_circuit(
    name: str, *conductors: str, current_a: float | None = 5.0, service: str = "general", **more: Any
) -> Circuit:
    """Name a circuit by its conductors."""
    return Circuit(
        id=name, name=name, service=service, current_a=current_a, conductors=tuple(sorted(conductors)), **more
    )


def a_row(name: str, kind: str = "normal", **switches: str) -> SwitchRow:
    """Write one row of the table of switch states; `SW_H` stands for the id SW-H."""
    named = sorted((switch.replace("_", "-"), state) for switch, state in switches.items())
    return SwitchRow(id=name, kind=kind, switches=tuple(named))


# --- the boat


def a_boat(*pieces: Piece, reference: str = "BUS-N", volts: float = 12.0, **more: Any) -> Boat:
    """Put pieces together; a conductor of a circuit is marked with it. A later piece replaces one of the same id."""
    kinds: dict[type, dict[str, Any]] = {}
    for piece in (DRY, *pieces):
        kinds.setdefault(type(piece), {})[piece.id] = piece

    def of(kind: type) -> dict[str, Any]:
        return dict(sorted(kinds.get(kind, {}).items()))

    circuits, conductors = of(Circuit), of(Conductor)
    for circuit in circuits.values():
        for name in circuit.conductors:
            conductors[name] = replace(conductors[name], circuit=circuit.id)
    facts: dict[str, Any] = {
        "class_id": "test", "class_name": "a boat of the tests", "revision": 1, "bonds_recorded": True,
        "shields": tuple(of(Shield).values()), "joints": tuple(of(Joint).values()),
        "engines": tuple(of(Engine).values()), "switch_rows": tuple(of(SwitchRow).values()),
    }  # fmt: skip
    return Boat(
        system_voltage_v=volts, reference=reference, zones=of(Zone), ways=of(Way), devices=of(Device),
        conductors=conductors, circuits=circuits, conditions=of(Condition), **{**facts, **more},
    )  # fmt: skip


def sound_pieces() -> list[Piece]:
    """Return a small boat that breaks no rule: one battery, a main fuse, a switch, two branches, a shunt."""
    return [
        a_battery("BAT"), a_fuse("F-MAIN", 150.0), a_switch("SW"), a_bus("BUS-P"), a_bus("BUS-N"), a_shunt("SH"),
        a_conductor("W1", "BAT.pos", "F-MAIN.line", size="2 AWG", length="0.15 m"),
        a_conductor("W2", "F-MAIN.load", "SW.in", size="2 AWG"),
        a_conductor("W3", "SW.out", "BUS-P", size="2 AWG"),
        a_conductor("W4", "BAT.neg", "SH.bat", size="2 AWG"),
        a_conductor("W5", "SH.sys", "BUS-N", size="2 AWG"),
        a_circuit("MAIN", "W1", "W2", "W3", "W4", "W5", current_a=60.0, service="feeder"),
        a_fuse("F-LAMP", 5.0, mount={"line": "BUS-P"}), a_load("LAMP", 2.0),
        a_conductor("lamp-out", "F-LAMP.load", "LAMP.pos", size="14 AWG", length="3 m"),
        a_conductor("lamp-back", "LAMP.neg", "BUS-N", size="14 AWG", length="3 m"),
        a_circuit("LAMPS", "lamp-out", "lamp-back", current_a=2.0, service="lighting", load="LAMP", device="F-LAMP"),
        a_fuse("F-PUMP", 15.0, mount={"line": "BUS-P"}), a_load("PUMP", 8.0),
        a_conductor("pump-out", "F-PUMP.load", "PUMP.pos", size="12 AWG", length="4 m"),
        a_conductor("pump-back", "PUMP.neg", "BUS-N", size="12 AWG", length="4 m"),
        a_circuit("PUMPS", "pump-out", "pump-back", current_a=8.0, service="pump", load="PUMP", device="F-PUMP"),
        Condition(id="under-way", switches=(("SW", "closed"),), closed=(), loads_a=(("LAMPS", 2.0), ("PUMPS", 8.0)), sources_a=()),
    ]  # fmt: skip


# --- asking it


def studied(*pieces: Piece, **more: Any) -> Studies:
    """Build a boat and return its studies."""
    return Studies(a_boat(*pieces, **more))


def every_contact_closed(boat: Boat, **chosen: str) -> SwitchState:
    """Return a state: each switch as chosen, else in its state that closes most."""
    closed: set[tuple[str, str, str]] = set()
    for device in boat.devices.values():
        if isinstance(device.part, Switch):
            states = dict(device.part.states)
            state = chosen.get(device.id.replace("-", "_")) or max(states, key=lambda name: len(states[name]))
            closed |= {(device.id, a, b) for a, b in states[state]}
    return SwitchState("chosen", True, frozenset(closed), "chosen")


def potentials_of(studies: Studies) -> Potentials:
    """Return the potentials in the first state that is studied."""
    return study_potentials(studies.network, study_states(studies.boat).kept[0])


def outcomes_of(
    boat: Boat, *checks: Check, limit_set: str = "cfr33-183-i", house: House | None = None
) -> list[Outcome]:
    """Hold a boat against one limit set; all checks unless some are named."""
    house = house or House(next_smaller_awg=True)
    return run_checks(study_boat(boat), (load_limit_set(limit_set),), house, checks or CHECKS)


def found_in(boat: Boat, *checks: Check, **more: Any) -> list[tuple[str, str]]:
    """Return the findings of a boat as (check, part), in order."""
    return sorted((o.check, o.part) for o in outcomes_of(boat, *checks, **more) if o.verdict is Verdict.FINDING)


# --- networks without a boat


def a_network(posts: int, edges: Sequence[tuple[int, int, float]]) -> Network:
    """Build a bare graph of numbered posts; an edge with a finite rating is a device, else a conductor."""
    rows = tuple(
        Edge(i, EdgeKind.DEVICE if math.isfinite(rating_a) else EdgeKind.CONDUCTOR, a, b, f"E{i:02d}", rating_a, 1.0)
        for i, (a, b, rating_a) in enumerate(edges)
    )
    return Network(tuple(f"P{i:02d}" for i in range(posts)), rows, (), (), (), 0)
