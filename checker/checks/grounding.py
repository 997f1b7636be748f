"""Judge bonding, grounding and metal: what they carry, where they are joined, and what returns through them."""

from __future__ import annotations

import itertools
from collections.abc import Iterator

from checker.boat.hull import Conductor, Device
from checker.boat.parts import Load, Metal, Source
from checker.checks.check import Case, Place, Told, at_conductor, check
from checker.checks.gauge import METRIC_FIELD
from checker.checks.loads import few
from checker.checks.words import ampere, plain
from checker.finding import Basis, Level, Measure, Outcome, Span
from checker.limits.grounding_rule import grounding_rule
from checker.limits.limit_set import metric_sizes
from checker.network.graph import EdgeKind
from checker.network.grounding import (
    BondPiece,
    Landing,
    MetalReturn,
    bond_pieces,
    crossover,
    floating_banks,
    looped_shields,
    metal_returns,
)
from checker.network.starting import cranking_motors
from checker.network.walk import path_words
from checker.units import Size


def _at(device: Device, state: str = "") -> Place:
    return Place(device.id, device.at, device.circuit, state)


def _bonds(case: Case) -> list[Conductor]:
    return [conductor for conductor in case.boat.conductors.values() if conductor.is_bond]


@check(
    title="A bond carries no current in normal service",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, DC grounding (from memory); V = I·R, ΣI = 0 at every post",
    formula="|I| in every bond, in every operating condition ≤ 0.01 A",
    why="current that strays through bonds eats fittings and propeller, and the bond is no return",
    catalogue=("RET-02",),
    needs=("grounding",),
)
def bond_current(case: Case) -> Iterator[Outcome]:
    """Does no operating condition send current through a bonding or grounding conductor?

    The network is solved for each condition with the bonds in it, with full batteries and with
    low ones. Where nothing can be solved the check of working points says why.
    """
    bonds, limit_a = _bonds(case), grounding_rule(case.house.common).bond_current_a
    if not bonds or case.studies.conditions.missing or not case.boat.conditions:
        return
    worst: dict[str, tuple[float, str]] = {}
    ids = [(edge.index, edge.part) for edge in case.studies.network.edges if edge.kind is EdgeKind.BOND]
    for solved in case.studies.conditions.solved:
        for flow in solved.flows():
            for index, part in ids:
                current_a = abs(flow.currents_a.get(index, 0.0))
                if current_a > worst.get(part, (0.0, ""))[0]:
                    worst[part] = (current_a, solved.operation.condition.id)
    for bond in bonds:
        current_a, condition = worst.get(bond.id, (0.0, ""))
        told = Told(
            fault=f"carries {ampere(current_a)} in condition {condition}; a bond is to carry none",
            remedy="give what drives this current a return conductor of its own to DC negative, "
            "and join the bond at one place only",
            path=(bond.start, bond.id, bond.end),
            inputs=(("current", ampere(current_a)), ("condition", condition)),
        )
        measure = Measure("current", round(current_a, 6), limit_a, "A")
        yield bond_current.judge(case, at_conductor(bond, bond.at), measure, lambda told=told: told)  # type: ignore[misc]


@check(
    title="The bonding system meets DC negative at one place",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="a second joint is a return beside the wiring: it carries load current, corrodes, and bypasses the shunt",
    catalogue=("RET-03",),
    exemptions="an engine block is part of DC negative by what is mounted on it, at however many places",
)
def bond_joints(case: Case) -> Iterator[Outcome]:
    """Does each connected piece of the bonding system meet the DC negative at one place at most?

    Whatever wiring joins to the reference is DC negative. Bonds, and metal that is screwed
    together, hang on it in pieces; each may touch it once. The case of a device is a piece of
    its own where it is isolated inside.
    """
    if not case.boat.bonds_recorded:
        yield bond_joints.not_assessed(case, Place("bonds", case.boat.at_bonds), "bonds were not recorded", "bonds")
    told: dict[str, Outcome] = {}
    passed: dict[str, Outcome] = {}
    for state in case.studies.states.kept:
        words = case.studies.state_words(state)
        for piece in bond_pieces(case.boat, case.studies.network, state):
            for outcome in _second_joints(case, piece, words):
                told.setdefault(outcome.part, outcome)
            note = "" if piece.landings else "joined to DC negative nowhere"
            name = piece.landings[0].part if piece.landings else piece.parts[0]
            place = Place(name, _where(case, name)[0])
            passed.setdefault(name, bond_joints.passed(case, place, note))
    yield from told.values()
    yield from (outcome for name, outcome in passed.items() if name not in told)


def _second_joints(case: Case, piece: BondPiece, words: str) -> Iterator[Outcome]:
    """Tell each joint of a piece beyond the one to keep; a bond from DC negative to itself is one by itself."""
    if not piece.landings:
        return
    kept, *others = piece.landings
    for landing in others:
        yield _second_joint(case, piece, kept, landing, words)


def _second_joint(case: Case, piece: BondPiece, kept: Landing, second: Landing, words: str) -> Outcome:
    posts = case.studies.network.posts
    if kept.part == second.part:
        fault = f"both its ends are on DC negative, at {posts[kept.post]} and {posts[second.post]}: a second return"
        remedy = "take it out, or give it to a metal part or case that is on DC negative nowhere else"
    else:
        fault = (
            f"the bonding system meets DC negative a second time here, at {posts[second.post]}; "
            f"{kept.part} joins it at {posts[kept.post]} already"
        )
        remedy = f"take {second.part} off {posts[second.post]}: leave {kept.part} as the one joint"
    told = Told(fault, remedy, also_at=(_where(case, kept.part)[0],),
                inputs=(("joint", posts[second.post]), ("beside", f"{kept.part} at {posts[kept.post]}")))  # fmt: skip
    return bond_joints.found(case, Place(second.part, _where(case, second.part)[0], "", words), told)


@check(
    title="Nothing but what is mounted on an engine returns through metal",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; survey literature",
    why="bearings, shafts and fittings carry the current, and the return moves with every loose bolt",
    catalogue=("RET-04",),
    needs=("grounding",),
    exemptions="devices mounted on the engine; the harness of the engine's maker",
)
def metal_return(case: Case) -> Iterator[Outcome]:
    """Does every load and source that is not mounted on an engine return by conductors alone?

    A return that leads through an engine block, a hull or another metal part, and by no wire
    past it, is found.
    """
    free: dict[str, str] = {}
    told: set[str] = set()
    for one in metal_returns(case.boat, case.studies.network, case.studies.usual.state):
        away = tuple(name for name in one.devices if not case.boat.devices[name].is_engine_mounted)
        reason = _harness(case, one)
        free |= dict.fromkeys(one.devices, reason or "returns through the engine that it is mounted on")
        if away and not reason:
            told.update(away)
            yield _through_metal(case, one, away)
    for device in case.boat.devices.values():
        if isinstance(device.part, (Load, Source)) and device.id not in told:
            yield metal_return.passed(case, _at(device), free.get(device.id, ""))


def _harness(case: Case, one: MetalReturn) -> str:
    """Return why the role of the conductor that lands on metal lets it, or an empty text."""
    landing = case.boat.conductors.get(one.landing.part)
    is_free = landing is not None and landing.role in grounding_rule(case.house.common).metal_return_roles
    return f"returns through metal as {landing.role}" if landing is not None and is_free else ""


def _through_metal(case: Case, one: MetalReturn, away: tuple[str, ...]) -> Outcome:
    network, boat = case.studies.network, case.boat
    metal = next(name for post in (one.landing.a, one.landing.b) if (name := network.posts[post]) in _metal(case))
    told = Told(
        fault=f"the return of {few(away)} leads through {metal}, and not by a conductor of its own",
        remedy=f"land the return on {boat.reference}, or on a bus that conductors join to it",
        path=path_words(network, one.start, one.path),
        inputs=(("through", metal), ("of", " ".join(away))),
    )
    return metal_return.found(case, Place(one.landing.part, *_where(case, one.landing.part)), told)


def _where(case: Case, name: str) -> tuple[Span, str]:
    """Return the line of a conductor, joint or mounted device, and its circuit."""
    conductor = case.boat.conductors.get(name)
    if conductor is not None:
        return conductor.at, conductor.circuit
    joint = next((joint for joint in case.boat.joints if joint.id == name), None)
    return (joint.at, "") if joint is not None else (case.boat.devices[name].at, "")


def _metal(case: Case) -> frozenset[str]:
    return frozenset(d.id for d in case.boat.devices.values() if isinstance(d.part, Metal))


@check(
    title="A shield is joined at one end only",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="a screen that is joined at both ends is a thin return beside the real one; a loose ground sends motor "
    "current through it",
    level=Level.WARNING,
    catalogue=("RET-05",),
)
def shield_loop(case: Case) -> Iterator[Outcome]:
    """Does no cable shield join two posts that wiring, metal or another shield joins as well?

    A shield to metal that is joined to nothing else is no loop. Where shields were not recorded
    the answer is "not assessed", once.
    """
    if case.boat.shields is None:
        place = Place("shields", case.boat.at_shields)
        yield shield_loop.not_assessed(case, place, "shields were not recorded", "shields")
        return
    looped = looped_shields(case.studies.network, case.studies.usual.state)
    for shield in case.boat.shields:
        place = Place(shield.id, shield.at)
        if shield.joins is None:
            fault = f"where shield {shield.id} is joined was not recorded"
            yield shield_loop.not_assessed(case, place, fault, "joins")
        elif shield.id not in looped:
            yield shield_loop.passed(case, place)
        else:
            told = Told(
                fault=f"joined at {' and '.join(shield.joins)}, which are joined otherwise too: a second return",
                remedy=f"join it at {shield.joins[0]} only and isolate the other end",
                inputs=(("joins", " ".join(shield.joins)),),
            )
            yield shield_loop.found(case, place, told)


@check(
    title="Cranking motors of several petrol engines share a heavy conductor",
    basis=Basis.LAW,
    citation="33 CFR § 183.415",
    formula="ampacity of each conductor of the common path ≥ the starting current of each cranking motor on it",
    why="if one engine's ground comes loose, its starting current goes through fuel lines and instrument wires",
    catalogue=("RET-08",),
    needs=("grounding",),
    caution="the way over the negative cables of batteries alone is not taken for a common conductor",
    per_set=True,
)
def common_ground(case: Case) -> Iterator[Outcome]:
    """With two or more petrol engines, do conductors that bear each starting current join their cranking returns?

    Outboards do not count. Asked of each pair of cranking motors whose returns are grounded: the
    way of conductors between them whose weakest bears most is held against the larger starting
    current, which is the current of the motor's part.
    """
    if case.limits.id not in grounding_rule(case.house.common).common_ground_sets:
        return
    petrol = [engine for engine in case.boat.engines if engine.fuel == "petrol" and engine.mounting != "outboard"]
    if len(petrol) + (case.boat.generator_fuel == "petrol") < 2:
        return
    motors = _grounded_motors(case)
    if len(motors) < 2:
        place = Place(petrol[0].id, petrol[0].at)
        fault = f"{len(motors)} of the petrol engines has a cranking motor that cranking conductors reach"
        missing = "a cranking motor with conductors of role cranking for each engine"
        yield common_ground.not_assessed(case, place, fault, missing)
    for first, second in itertools.pairwise(sorted(motors)):
        yield from _judge_pair(case, motors, first, second)


def _grounded_motors(case: Case) -> dict[str, int]:
    """Return the cranking motors that return to DC negative, with their return posts."""
    usual = case.studies.usual
    ties = cranking_motors(case.boat, case.studies.network, case.studies.cranking)
    return {tie.device: tie.back for tie in ties if usual.is_return(tie.back)}


def _judge_pair(case: Case, motors: dict[str, int], first: str, second: str) -> Iterator[Outcome]:
    unknown: list[str] = []

    def bears(name: str) -> float:
        bearing = case.bearings.of(case.boat.conductors[name])
        if bearing is None:
            unknown.append(name)
        return float("inf") if bearing is None else bearing.ampacity_a

    pair = {name: motors[name] for name in (first, second)}
    way = crossover(case.studies.network, case.studies.usual.state, pair, bears)
    if way.conductors and (blind := [name for name in way.conductors if name in unknown]):
        conductor = case.boat.conductors[blind[0]]
        fault = f"the table has no row for {conductor.size.text}"
        yield common_ground.not_assessed(case, at_conductor(conductor), fault, METRIC_FIELD)
        return
    starting_a = max(_starting_a(case, name) for name in pair)
    device = case.boat.devices[second]
    place = Place(f"{first} and {second}", device.at)
    joined = pair[first] == pair[second]
    weakest = min(way.conductors, key=bears, default="")
    bears_a = float("inf") if joined else bears(weakest) if weakest else 0.0
    gap = f"{weakest} bears {ampere(bears_a)}" if weakest else "nothing but battery cables joins them"
    told = Told(
        fault=f"the returns of {first} and {second} have no common conductor for {ampere(starting_a)}: {gap}",
        remedy=f"join {first} and {second} at their return posts by a conductor that bears {ampere(starting_a)}",
        path=way.conductors,
        inputs=(("starting", ampere(starting_a)), ("way", " ".join(way.conductors)), ("bears", ampere(bears_a))),
    )
    measure = Measure("common conductor", bears_a, starting_a, "A", at_least=True)
    yield common_ground.judge(case, place, measure, lambda: told)


def _starting_a(case: Case, name: str) -> float:
    part = case.boat.devices[name].part
    assert isinstance(part, Load)
    return part.current_a


@check(
    title="A case is grounded by a conductor as large as its feed, or one size less",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, DC grounding conductor (from memory)",
    formula="area of the bond ≥ area of the size below the thickest feed of the device",
    why="a fault to the case melts a thin grounding conductor before the fuse opens",
    level=Level.WARNING,
    catalogue=("RET-09",),
    needs=("grounding",),
)
def grounding_size(case: Case) -> Iterator[Outcome]:
    """Is a bond on the case of a device at most one size thinner than the thickest conductor of its feed?

    Sizes are counted in the row that the feed is written in: the gauges of 33 CFR § 183.425,
    table 5, or the standard areas for metric sizes.
    """
    for bond, device in _case_bonds(case):
        part = device.part
        assert isinstance(part, (Load, Source))
        names = [part.feed_post] if isinstance(part, Load) else [t.post for t in (*part.outputs, *part.inputs)]
        posts = {f"{device.id}.{name}" for name in names}
        feeds = [c for c in case.boat.conductors.values() if not c.is_bond and posts & {c.start, c.end}]
        if not feeds:
            continue  # what feeds it is missing, which the check of feeds and returns tells
        thickest = max(feeds, key=lambda feed: (feed.size.area_mm2, feed.id))
        least = _thinner(case, thickest.size, grounding_rule(case.house.common).gauges_thinner)
        measure = Measure("grounding conductor", bond.size.area_mm2, least.area_mm2, "mm2", at_least=True,
                          is_stepped=True)  # fmt: skip
        told = Told(
            fault=f"{bond.size.text} grounds its case, and {thickest.id} feeds {device.id} in {thickest.size.text}",
            remedy=f"use {least.text} or larger",
            inputs=(("size", bond.size.text), ("feed", f"{thickest.id} {thickest.size.text}")),
        )
        yield grounding_size.judge(case, at_conductor(bond), measure, lambda told=told: told)  # type: ignore[misc]


def _case_bonds(case: Case) -> Iterator[tuple[Conductor, Device]]:
    """Yield each bond that lands on the case of a load or source, with that device."""
    cases = {
        f"{device.id}.{device.part.case_post}": device
        for device in case.boat.devices.values()
        if isinstance(device.part, (Load, Source)) and device.part.case_post
    }
    for bond in _bonds(case):
        for post in (bond.start, bond.end):
            if post in cases:
                yield bond, cases[post]


def _thinner(case: Case, size: Size, steps: int) -> Size:
    """Return the size some steps below another in its own row, or itself where the row ends."""
    row = metric_sizes() if size.awg is None else grounding_rule(case.house.common).gauges
    smaller = [one for one in row if one.area_mm2 < size.area_mm2 * (1 - 1e-9)]
    return smaller[-steps] if len(smaller) >= steps else size


@check(
    title="Every bank is tied to the DC reference",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the potentials of a part without a reference drift, and the second insulation is then the only",
    level=Level.WARNING,
    catalogue=("RET-10",),
)
def floating_part(case: Case) -> Iterator[Outcome]:
    """Is every bank tied to the DC reference by wiring, a bond or another bank, in some normal switch state?"""
    known = [potentials for potentials in case.studies.potentials if potentials.state.is_normal]
    floating = floating_banks(case.studies.network, known or case.studies.potentials)
    for bank in sorted({battery.bank for battery in case.studies.network.batteries}):
        battery = next(b for b in case.studies.network.batteries if b.bank == bank)
        device = case.boat.devices[battery.device]
        place = Place(bank, device.at)
        if bank not in floating:
            yield floating_part.passed(case, place)
            continue
        told = Told(
            fault=f"nothing ties bank {bank} to {case.boat.reference}: its {plain(battery.voltage_v)} V float",
            remedy=f"join its negative to {case.boat.reference} by one conductor, at one place",
            inputs=(("bank", bank), ("reference", case.boat.reference)),
        )
        yield floating_part.found(case, place, told)


@check(
    title="A grounded case is isolated from the poles inside",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="a case on the negative inside and on the bond outside is a second return through the mounting",
    level=Level.NOTE,
    catalogue=("RET-12",),
)
def case_ground(case: Case) -> Iterator[Outcome]:
    """Is the case of every device that a bond grounds isolated from both its poles?

    Told once for each part where `case_isolated` is not written.
    """
    unknown: set[str] = set()
    for bond, device in _case_bonds(case):
        part = device.part
        assert isinstance(part, (Load, Source))
        if part.case_isolated:
            yield case_ground.passed(case, _at(device))
        elif part.case_isolated is False:
            told = Told(
                fault=f"{bond.id} grounds its case, and {part.id} joins its case to a pole inside",
                remedy=f"take {bond.id} off and mount it isolated, or fit a part with an isolated case",
                inputs=(("part", part.id), ("bond", bond.id)),
            )
            yield case_ground.found(case, _at(device), told)
        elif part.id not in unknown:
            unknown.add(part.id)
            fault = f"{bond.id} grounds the case of {device.id}; whether it is isolated inside is not written"
            yield case_ground.not_assessed(case, Place(part.id, part.at), fault, "case_isolated")
