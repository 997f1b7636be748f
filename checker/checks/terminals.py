"""Judge how conductors end: rings, barrels, what a terminal takes, its kind, splices."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.boat.hull import Conductor, Device
from checker.boat.landing import End
from checker.boat.parts import Battery, Bus, Metal
from checker.checks.check import Case, Place, Told, at_conductor, check
from checker.checks.landed import BOLTED, Landed, at_part, by_conductor, by_workmanship, kind_of, unsaid_of
from checker.checks.roles import continuous_a
from checker.checks.words import ampere
from checker.finding import Basis, Level, Outcome, Span
from checker.limits.terminal_rule import JointRule, TerminalRule, joint_rule

RINGS = ("ring", "lug")
NO_BARREL = ("bare", "twist-on")
TAKES_ENDS_AS_MADE = ("lead", "plug")
"""Kinds of post that come with an end of their own: the maker's wire or plug, of whatever size it is."""


def _at_end(one: Landed) -> Place:
    return at_conductor(one.conductor, one.end.at)


@check(
    title="The ring fits its stud",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, ring terminals (from memory)",
    formula="|diameter of the thread the ring is made for − diameter of the stud| ≤ 0.1 mm",
    why="a ring that is too large carries on a few threads and heats; one that is too small is drilled out",
    catalogue=("TRM-02",),
    exemptions="5/16 in and M8 take the same ring",
    needs=("joints",),
)
def ring_hole(case: Case) -> Iterator[Outcome]:
    """Is every ring made for the thread that it lies on?

    An end that gives no hole of its own passes where the class's workmanship takes the ring
    for the stud.
    """
    rule = joint_rule(case.house.common)
    unknown_hole: list[Landed] = []
    unknown_end: list[Landed] = []
    threads: dict[str, Landed] = {}
    by_rule = 0
    for ends in by_conductor(case).values():
        rings = [one for one in ends if one.kind in (*BOLTED, "") and one.end.terminal in (*RINGS, "")]
        if not rings:
            continue
        bad = [one for one in rings if one.end.hole and _fit(rule, one) is False]
        unknown_thread = [one for one in rings if one.end.hole and _fit(rule, one) is None]
        unsaid = [one for one in rings if not one.end.hole and not one.end.hole_as_stud]
        for one in bad:
            yield ring_hole.found(case, _at_end(one), _unfit(rule, one))
        for one in unknown_thread:
            if rule.diameter_mm(one.end.hole) is None:
                yield ring_hole.not_assessed(case, _at_end(one), f"{one.end.hole} is no thread", "ends: hole")
            else:
                threads.setdefault(one.device.part.id, one)
        unknown_end += [one for one in unsaid if not one.end.terminal]
        unknown_hole += [one for one in unsaid if one.end.terminal]
        if not (bad or unknown_thread or unsaid):
            by_rule += sum(not one.end.hole for one in rings)
            yield ring_hole.passed(case, at_conductor(rings[0].conductor, rings[0].conductor.at))
    yield from by_workmanship(case, ring_hole, by_rule)
    for one in threads.values():
        fault = f"{one.conductor.id} ends in a ring for {one.end.hole}, the thread of the posts is not recorded"
        field = "screw_thread" if one.on_screw else "stud"
        yield ring_hole.not_assessed(case, at_part(one.device.part), fault, field)
    yield from unsaid_of(case, ring_hole, unknown_hole, "which ring was taken", "ring_hole")
    yield from unsaid_of(case, ring_hole, unknown_end, "what is crimped on", "terminal")


def _fit(rule: JointRule, one: Landed) -> bool | None:
    """Tell whether a ring fits, None where a thread is not known."""
    hole_mm, stud_mm = rule.diameter_mm(one.end.hole), rule.diameter_mm(one.thread)
    if hole_mm is None or stud_mm is None:
        return None
    return rule.is_same_ring(hole_mm, stud_mm)


def _unfit(rule: JointRule, one: Landed) -> Told:
    hole_mm, stud_mm = rule.diameter_mm(one.end.hole) or 0.0, rule.diameter_mm(one.thread) or 0.0
    size = "larger" if hole_mm > stud_mm else "smaller"
    return Told(
        fault=f"at {one.post} its ring is made for {one.end.hole} ({hole_mm:.1f} mm), {size} than the "
        f"{'screw' if one.on_screw else 'stud'} {one.thread} ({stud_mm:.1f} mm)",
        remedy=f"crimp on a ring made for {one.thread}",
        inputs=(("post", one.post), ("hole", one.end.hole), ("stud", one.thread)),
    )


@check(
    title="The barrel is made for its conductor, and holds it alone",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, pull test of crimped terminals (from memory); the colours are a convention of the trade",
    formula="size the barrel is made for = size of the conductor",
    why="a crimp that is too loose, or shared, pulls out; one that is too tight cuts strands",
    catalogue=("TRM-04",),
    caution="a barrel is known by its maker's marking; the colour is a convention only",
)
def barrel_size(case: Case) -> Iterator[Outcome]:
    """Is every barrel made for the size of its conductor, with no other conductor in it?

    Where an end gives the size of its barrel, that is compared; else the range that its colour
    stands for; else the class's workmanship answers.
    """
    unsaid: list[Landed] = []
    other_unit: list[Landed] = []
    by_rule = 0
    for ends in by_conductor(case).values():
        own = [one for one in ends if one.end.terminal not in NO_BARREL]
        told = [(one, _barrel_fault(one.conductor, one.end)) for one in own]
        for one, fault in told:
            if fault is not None:
                yield barrel_size.found(case, _at_end(one), _wrong_barrel(one, fault))
        metric = [one for one in own if _other_unit(one.conductor, one.end)]
        silent = [one for one, _ in told if _says_nothing(one.end)]
        other_unit += metric
        unsaid += silent
        if own and not metric and not silent and all(fault is None for _, fault in told):
            by_rule += sum(one.end.barrel_as_conductor for one in own)
            yield barrel_size.passed(case, at_conductor(own[0].conductor, own[0].conductor.at))
    yield from by_workmanship(case, barrel_size, by_rule)
    for one in other_unit:
        text = one.end.barrel.text if one.end.barrel else ""
        fault = f"the barrel at {one.post} is made for {text}, the conductor is {one.conductor.size.text}"
        yield barrel_size.not_assessed(case, _at_end(one), fault, "ends: barrel, in the unit of the conductor")
    yield from unsaid_of(case, barrel_size, unsaid, "the size of the barrel", "barrel")


def _says_nothing(end: End) -> bool:
    """Tell whether nothing is known of a barrel."""
    is_known = end.barrel is not None or end.barrel_as_conductor or end.shares_barrel
    return not is_known and joint_rule().colour_of(end.barrel_colour) is None


def _other_unit(conductor: Conductor, end: End) -> bool:
    """Tell whether barrel and conductor are given in units that do not compare."""
    both = end.barrel is not None and not end.shares_barrel
    return both and (end.barrel.awg is None) != (conductor.size.awg is None)  # type: ignore[union-attr]


def _barrel_fault(conductor: Conductor, end: End) -> str | None:
    """Return what is wrong with a barrel, None where nothing is."""
    if end.shares_barrel:
        return "shares its barrel with another conductor"
    size, barrel = conductor.size, end.barrel
    if barrel is not None:
        is_alike = barrel.awg == size.awg if barrel.awg else abs(barrel.area_mm2 - size.area_mm2) < 1e-9
        return None if is_alike or _other_unit(conductor, end) else f"has a barrel for {barrel.text} on {size.text}"
    colour = joint_rule().colour_of(end.barrel_colour)
    if colour is None or colour.takes(size):
        return None
    return f"has a {colour.colour} barrel ({colour.text}) on {size.text}"


def _wrong_barrel(one: Landed, fault: str) -> Told:
    end, size = one.end, one.conductor.size
    colour = joint_rule().colour_for(size)
    which = f", {colour} where its insulation is coloured" if colour and end.barrel_colour else ""
    return Told(
        fault=f"at {one.post} it {fault}",
        remedy=f"crimp it alone into a terminal for {size.text}{which}",
        inputs=(
            ("post", one.post), ("size", size.text), ("barrel", end.barrel.text if end.barrel else ""),
            ("colour", end.barrel_colour), ("shared", "yes" if end.shares_barrel else "no"),
        ),
    )  # fmt: skip


@check(
    title="The terminals of a device take the size of the conductor",
    basis=Basis.COMMON_PRACTICE,
    citation="the maker's figure for the part; common practice, no source",
    formula="smallest size ≤ size of the conductor ≤ largest size",
    why="a heavy cable strains the post until it breaks; a thin one is not clamped",
    level=Level.WARNING,
    catalogue=("TRM-05",),
    exemptions="buses and metal parts where their maker names no size; leads and plugs of a part, which are joined "
    "as they come; the screws of a bar",
)
def terminal_range(case: Case) -> Iterator[Outcome]:
    """Is every conductor within the sizes that the maker of its device names?"""
    unknown: dict[str, Landed] = {}
    for ends in by_conductor(case).values():
        own = [one for one in ends if _has_range(one)]
        wrong = [(one, told) for one in own if (told := _out_of_range(one)) is not None]
        for one, told in wrong:
            yield terminal_range.found(case, at_conductor(one.conductor), told)
        lacking = [one for one in own if not _range_is_whole(one)]
        for one in lacking:
            unknown.setdefault(one.device.part.id, one)
        if own and not wrong and not lacking:
            yield terminal_range.passed(case, at_conductor(own[0].conductor))
    for one in unknown.values():
        known = (("smallest_size", one.fittings.smallest), ("largest_size", one.fittings.largest))
        fault = f"{one.conductor.size.text} lands on it, which sizes its terminals take is not recorded"
        missing = ", ".join(name for name, size in known if size is None)
        yield terminal_range.not_assessed(case, at_part(one.device.part), fault, missing)


def _has_range(one: Landed) -> bool:
    """Tell whether the rule concerns a terminal."""
    if one.on_screw or one.kind in TAKES_ENDS_AS_MADE:
        return False
    fittings = one.fittings
    is_bare_metal = isinstance(one.device.part, (Bus, Metal))
    return not is_bare_metal or fittings.smallest is not None or fittings.largest is not None


def _range_is_whole(one: Landed) -> bool:
    fittings = one.fittings
    return fittings.smallest is not None and fittings.largest is not None


def _out_of_range(one: Landed) -> Told | None:
    size, fittings = one.conductor.size, one.fittings
    smallest, largest = fittings.smallest, fittings.largest
    too_large = largest is not None and size.area_mm2 > largest.area_mm2 * (1 + 1e-9)
    too_small = smallest is not None and size.area_mm2 < smallest.area_mm2 * (1 - 1e-9)
    if not (too_large or too_small):
        return None
    limit = largest if too_large else smallest
    assert limit is not None
    word, side = ("thicker", "largest") if too_large else ("thinner", "smallest")
    other = f"a short piece of {limit.text} from a stud beside it, with a device for that piece" if too_large \
        else f"use {limit.text}"  # fmt: skip
    return Told(
        fault=f"{size.text} is {word} than {limit.text}, the {side} that {one.device.part.id} takes at {one.post}",
        remedy=f"a part whose terminals take {size.text}, or {other}",
        inputs=(("post", one.post), ("size", size.text), (side, limit.text)),
    )


# --- kinds of terminal


@dataclass(frozen=True, slots=True)
class _Wrong:
    """Hold why a terminal is refused, what to do, and the limit that it breaks."""

    fault: str
    remedy: str
    kind: str


@check(
    title="Terminals are of a kind that holds",
    basis=Basis.FROM_MEMORY,
    citation="33 CFR § 183.420(g) for springs on batteries (law); ABYC E-10, E-11 (from memory); 46 CFR § 129.340(h)",
    why="a spring, an open spade or a wing nut loosens by vibration, arcs and drops off",
    catalogue=("TRM-07",),
    exemptions="strands in a ferrule may lie under a set screw",
    needs=("terminals",),
    per_set=True,
)
def terminal_kind(case: Case) -> Iterator[Outcome]:
    """Is every terminal of a kind that the limit set allows?

    No spring on a battery. No open spade and no twist-on cap on a conductor, no wing nut on a
    thick one, no screw that turns on thin strands, no push-on connector for more current than
    it bears. What a set says nothing of is not judged under it.
    """
    rule = case.limits.terminals
    if rule is None:
        return
    yield from _battery_kinds(case, rule)
    if not rule.judges_conductors:
        return
    unknown_part: dict[str, Device] = {}
    unknown_end: list[Landed] = []
    for ends in by_conductor(case).values():
        wrong = [(one, why) for one in ends if (why := _refused(case, rule, one)) is not None]
        for one, why in wrong:
            told = Told(
                fault=f"at {one.post} {why.fault}",
                remedy=why.remedy,
                inputs=(("post", one.post), ("kind", why.kind), ("size", one.conductor.size.text)),
            )
            yield terminal_kind.found(case, _at_end(one), told)
        unclear = [one for one in ends if not one.kind or not one.end.terminal]
        for one in unclear:
            if not one.kind:
                unknown_part.setdefault(one.device.part.id, one.device)
        unknown_end += [one for one in unclear if not one.end.terminal]
        unmeasured = [one for one in ends if not _is_measured(case, rule, one)]
        for one in unmeasured:
            fault = f"push-on connector at {one.post}; the current of the conductor is not written"
            yield terminal_kind.not_assessed(case, _at_end(one), fault, "current")
        if not (wrong or unclear or unmeasured):
            yield terminal_kind.passed(case, at_conductor(ends[0].conductor, ends[0].conductor.at))
    for device in unknown_part.values():
        fault = f"how conductors are fixed to {device.id} is not recorded"
        yield terminal_kind.not_assessed(case, at_part(device.part), fault, "terminal")
    yield from unsaid_of(case, terminal_kind, unknown_end, "what is crimped on", "terminal")


def _battery_kinds(case: Case, rule: TerminalRule) -> Iterator[Outcome]:
    """Judge the posts of batteries."""
    unknown: dict[str, Device] = {}
    for device in case.boat.devices.values():
        if not isinstance(device.part, Battery):
            continue
        kind = kind_of(device)
        if kind in rule.battery_refuses:
            told = Told(
                fault=f"{device.part.id} is connected by {kind}",
                remedy="fit bolted terminals: a stud, or a clamp on the post that is screwed tight",
                inputs=(("kind", kind),),
            )
            yield terminal_kind.found(case, Place(device.id, device.at), told)
        elif kind:
            yield terminal_kind.passed(case, Place(device.id, device.at))
        elif not rule.judges_conductors:  # else it is told with all other parts
            unknown.setdefault(device.part.id, device)
    for device in unknown.values():
        fault = f"how conductors are fixed to {device.id} is not recorded"
        yield terminal_kind.not_assessed(case, at_part(device.part), fault, "terminal")


_KIND_WORDS = {"plain-spade": "an open spade", "twist-on": "a twist-on cap"}


def _refused(case: Case, rule: TerminalRule, one: Landed) -> _Wrong | None:
    """Return why a set refuses a terminal, None where it does not."""
    conductor, terminal = one.conductor, one.end.terminal
    area_mm2 = conductor.size.area_mm2
    if terminal in rule.ends_refused:
        return _Wrong(f"it ends in {_KIND_WORDS.get(terminal, terminal)}",
                      "crimp on a ring, or a spade that cannot slip off", terminal)  # fmt: skip
    if rule.wing_nut_below and one.kind == "wing-nut" and area_mm2 >= rule.wing_nut_below.area_mm2 * (1 - 1e-9):
        return _Wrong(f"{conductor.size.text} is held by a wing nut, allowed below {rule.wing_nut_below.text} only",
                      "take a hexagon nut with a lock washer, tightened to the maker's torque", one.kind)  # fmt: skip
    least = rule.set_screw_least
    if least and one.kind == "set-screw" and terminal != "ferrule" and conductor.cable.is_stranded \
            and area_mm2 < least.area_mm2 * (1 - 1e-9):  # fmt: skip
        return _Wrong(f"a screw turns on the strands of {conductor.size.text}, allowed from {least.text} on",
                      "crimp on a ferrule, or take a clamp with a pressure plate", one.kind)  # fmt: skip
    current_a = continuous_a(case, conductor)
    most_a = rule.friction_most_a
    if most_a is not None and _is_push_on(one) and current_a is not None and current_a > most_a * (1 + 1e-9):
        return _Wrong(f"a push-on connector carries {ampere(current_a)}, allowed up to {ampere(most_a)}",
                      "crimp on a ring, and take a part with studs or screws", "push-on")  # fmt: skip
    return None


def _is_push_on(one: Landed) -> bool:
    return "blade" in (one.kind, one.end.terminal)


def _is_measured(case: Case, rule: TerminalRule, one: Landed) -> bool:
    return rule.friction_most_a is None or not _is_push_on(one) or continuous_a(case, one.conductor) is not None


# --- splices and torque


@check(
    title="No splice lies in bilge water, in engine heat or out of reach",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source: survey findings",
    why="a splice is the first place to corrode, and nobody sees it",
    level=Level.WARNING,
    catalogue=("TRM-08",),
)
def splice_place(case: Case) -> Iterator[Outcome]:
    """Does every splice stand in a dry zone that is no engine space and can be reached?

    A splice is a bus part with `splice: true`.
    """
    unknown: dict[str, tuple[str, Span]] = {}
    for device in case.boat.devices.values():
        if not isinstance(device.part, Bus) or not device.part.is_splice:
            continue
        zone = case.boat.zones[device.zone]
        faults = [word for word, is_so in (("a wet zone", zone.is_wet), ("an engine space", zone.is_engine_space))
                  if is_so]  # fmt: skip
        if faults:
            told = Told(
                fault=f"it stands in {zone.id} ({zone.name}), {' and '.join(faults)}",
                remedy="run the conductor in one piece, or move the splice to a dry zone with access",
                inputs=(("zone", zone.id), ("is", " ".join(faults))),
            )
            yield splice_place.found(case, Place(device.id, device.at), told)
        elif not zone.access:
            unknown.setdefault(zone.id, (device.id, zone.at))
        else:
            yield splice_place.passed(case, Place(device.id, device.at), f"in {zone.id}, {zone.access}")
    for zone_id, (name, at) in unknown.items():
        fault = f"splice {name} stands in it, how it can be reached is not recorded"
        yield splice_place.not_assessed(case, Place(zone_id, at), fault, "access")
