"""Judge where things stand: petrol, cooking gas, bilge water, heat, hydrogen, and reach in an emergency."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Device, Zone
from checker.boat.parts import Battery, Fitted, Load, Metal, Overcurrent
from checker.checks.air import claim_remedy, judge_claim
from checker.checks.cables import named
from checker.checks.check import Case, Place, Told, check
from checker.checks.roles import continuous_a
from checker.checks.words import ampere, plain
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.zone_rule import zone_rule
from checker.network.mains import battery_switches, main_devices
from checker.network.states import places

AT_ONCE = "at-once"


def _standing_in(case: Case, zone: Zone) -> list[Device]:
    """Return what stands in a zone, bare metal left out, in the order of the ids."""
    return [d for d in case.boat.devices.values() if d.zone == zone.id and not isinstance(d.part, Metal)]


@check(
    title="What is said to isolate a zone from petrol does isolate it",
    basis=Basis.LAW,
    citation="33 CFR § 183.410(b), (c)",
    why="vapour comes through, and what was taken to be outside sparks in it",
    catalogue=("ZON-02",),
    caution="that a bulkhead is tight over its whole width and height, and leaks no more than the text allows, "
    "is for a test aboard",
    per_set=True,
    needs=("ignition",),
)
def isolation_claim(case: Case) -> Iterator[Outcome]:
    """Does every claim of `isolated_from` meet one of the four ways of the text?

    A bulkhead that holds water up to 12 in or a third of its height, whichever is less, with
    gaps of at most 1/4 in above; electrical parts below, with fuel and vapour kept from them;
    above, with a deck or enclosure between; or 2 ft of space open to the atmosphere. Two zones
    that share air (`opens_to`) are isolated by such a space only.
    """
    rule = case.limits.ignition
    if rule is None:
        return
    for zone in case.boat.zones.values():
        for claim in zone.isolated_from:
            place = Place(f"{zone.id} from {claim.zone}", claim.at)
            verdict = judge_claim(case.boat, zone, claim, rule)
            if verdict.faults:
                told = Told(
                    fault=f"claimed by {claim.by}, but {'; '.join(verdict.faults)}",
                    remedy=claim_remedy(claim, rule),
                    inputs=(("by", claim.by), ("fault", "; ".join(verdict.faults))),
                )
                yield isolation_claim.found(case, place, told)
            elif verdict.missing:
                fault = f"{zone.id} is claimed to be isolated from {claim.zone} by {claim.by}, without its figures"
                yield isolation_claim.not_assessed(case, place, fault, ", ".join(verdict.missing))
            else:
                yield isolation_claim.passed(case, place, f"by {claim.by}")


@check(
    title="In a locker of gas bottles stands nothing but the valve",
    basis=Basis.FROM_MEMORY,
    citation="ABYC A-1 (from memory); common practice, no source",
    why="a spark beside a leaking bottle is an explosion",
    catalogue=("ZON-03",),
    caution="the locker itself, its seal and its drain overboard are not judged here",
)
def gas_locker(case: Case) -> Iterator[Outcome]:
    """In a zone with cooking gas, is every device the gas valve or a gas alarm, and made not to ignite gas?

    A valve or an alarm is a load by the service of its circuit. Switches, fuses, buses, splices,
    batteries and other loads belong outside.
    """
    services = zone_rule().gas_locker_services
    for zone in case.boat.zones.values():
        if not zone.has_cooking_gas:
            continue
        for device in _standing_in(case, zone):
            circuit = case.boat.circuits.get(device.circuit)
            service = circuit.service if circuit and circuit.load == device.id else ""
            is_allowed = isinstance(device.part, Load) and service in services
            place = Place(device.id, device.at, device.circuit)
            if is_allowed and isinstance(device.part, Load) and device.part.ignition_protected:
                yield gas_locker.passed(case, place, f"{service} that is ignition protected")
                continue
            wrong = "is not ignition protected" if is_allowed else f"is neither {' nor '.join(services)}"
            told = Told(
                fault=f"{device.part.id} stands in {zone.id}, a zone with cooking gas, and {wrong}",
                remedy="use an ignition-protected part" if is_allowed else f"move it out of {zone.id}",
                also_at=(zone.at,),
                inputs=(("part", device.part.id), ("zone", zone.id), ("service", service)),
            )
            yield gas_locker.found(case, place, told)


@check(
    title="What bilge water can reach is made for it",
    basis=Basis.FROM_MEMORY,
    citation="BSS 2002 Part 3, 3.3: main circuits above bilge water (from memory); IEC 60529 for the rating",
    why="water in a live part corrodes it, and leaks current into the boat's metal",
    level=Level.WARNING,
    catalogue=("ZON-05",),
)
def wet_place(case: Case) -> Iterator[Outcome]:
    """Does every device and connection where bilge water can stand bear being under water?

    By the second numeral of its part's ingress rating: 7 or 8. What stands above the highest
    bilge water says so (`above_bilge_water`). A wet zone says whether bilge water stands in it.
    """
    unknown: dict[str, Device] = {}
    for zone in case.boat.zones.values():
        if zone.has_bilge_water is False or not (zone.is_wet or zone.has_bilge_water):
            continue
        doubtful: list[str] = []
        for device in _standing_in(case, zone):
            place = Place(device.id, device.at, device.circuit)
            if device.is_above_bilge_water:
                yield wet_place.passed(case, place, "it stands above bilge water")
            elif _bears_immersion(device):
                yield wet_place.passed(case, place, _ingress(device))
            elif zone.has_bilge_water is None:
                doubtful.append(device.id)
            elif _second_numeral(device) is None:
                unknown.setdefault(device.part.id, device)
            else:
                yield wet_place.found(case, place, _told_wet(device, zone))
        if doubtful:
            fault = f"whether bilge water can stand in {zone.id}, with {named(doubtful)}, is not recorded"
            yield wet_place.not_assessed(case, Place(zone.id, zone.at), fault, "bilge_water")
    for name, device in sorted(unknown.items()):
        fault = f"bilge water can reach {device.id}, and its ingress rating is not recorded"
        yield wet_place.not_assessed(case, Place(name, device.part.at), fault, "ingress")


def _told_wet(device: Device, zone: Zone) -> Told:
    rating = _ingress(device)
    return Told(
        fault=f"{device.part.id} is made to {rating}, and stands in {zone.id}, where bilge water can stand",
        remedy="raise it above the highest bilge water (`above_bilge_water: true`), or fit one made to IP67 or IP68",
        also_at=(zone.at,),
        inputs=(("part", device.part.id), ("ingress", rating), ("zone", zone.id)),
    )


def _ingress(device: Device) -> str:
    return device.part.fittings.ingress if isinstance(device.part, Fitted) else ""


def _second_numeral(device: Device) -> int | None:
    """Return the numeral for water of an ingress rating such as IP67; None where it is X or not recorded."""
    digit = _ingress(device)[3:4]
    return int(digit) if digit.isdecimal() else None


def _bears_immersion(device: Device) -> bool:
    return _second_numeral(device) in zone_rule().immersion_digits


@check(
    title="A device in the engine space carries its circuit in the heat",
    basis=Basis.COMMON_PRACTICE,
    citation="the maker's correction of the rating for temperature; common practice, no source",
    formula="I ≤ In · engine-space factor of its band",
    why="it opens early in the heat, and the crew bypasses it",
    level=Level.WARNING,
    catalogue=("ZON-07",),
)
def hot_device(case: Case) -> Iterator[Outcome]:
    """Is the rating of every fuse and breaker in an engine space, times its band's factor, enough for its circuit?

    The current is that of the circuits whose conductors land on its load side.
    """
    unknown: dict[str, Device] = {}
    for device in case.boat.devices.values():
        part = device.part
        if not isinstance(part, Overcurrent) or not case.boat.zones[device.zone].is_engine_space:
            continue
        place = Place(device.id, device.at_rating, device.circuit)
        factor = part.band.engine_space_factor if part.band else None
        current_a = _through_a(case, device)
        if factor is None:
            unknown.setdefault(part.id, device)
        elif current_a is None:
            yield hot_device.not_assessed(case, place, "no current is written for what it feeds", "current")
        else:
            yield _judge_hot(case, device, part, factor, current_a)
    for name, device in sorted(unknown.items()):
        band = device.part.band if isinstance(device.part, Overcurrent) else None
        fault = f"{device.id} stands in an engine space, and what the heat does to its rating is not recorded"
        at = band.at if band else device.part.at
        missing = "engine_space_factor" if band else "band (with an engine_space_factor)"
        yield hot_device.not_assessed(case, Place(name, at), fault, missing)


def _judge_hot(case: Case, device: Device, part: Overcurrent, factor: float, current_a: float) -> Outcome:
    counts_a = part.rating_a * factor
    told = Told(
        fault=f"{ampere(part.rating_a)} in the engine space {device.zone} counts {ampere(counts_a)} "
        f"(factor {plain(factor)}), and its circuit draws {ampere(current_a)}",
        remedy=f"move it out of the engine space, draw at most {ampere(counts_a)} through it, or fit a larger rating "
        "as far as its conductor allows",
        inputs=(("rating", ampere(part.rating_a)), ("factor", plain(factor)), ("current", ampere(current_a))),
    )
    place = Place(device.id, device.at_rating, device.circuit)
    measure = Measure("current", current_a, counts_a, "A", is_stepped=True)
    return hot_device.judge(case, place, measure, lambda: told, note=f"factor {plain(factor)}")


def _through_a(case: Case, device: Device) -> float | None:
    """Return the continuous current of the circuits that land on a device's load side, else on its line side."""
    for post in ("load", "line"):
        carried: dict[str, float] = {}
        for conductor in case.boat.conductors.values():
            current_a = continuous_a(case, conductor)
            if f"{device.id}.{post}" in (conductor.start, conductor.end) and current_a is not None:
                circuit = conductor.circuit or conductor.id
                carried[circuit] = max(current_a, carried.get(circuit, 0.0))
        if carried:
            return sum(carried[name] for name in sorted(carried))
    return None


@check(
    title="Battery switches and main devices are reached at once",
    basis=Basis.FROM_MEMORY,
    citation="BSS 2002 Part 3, 3.5 (from memory)",
    why="in a fire nobody can part the bank from the boat",
    level=Level.WARNING,
    catalogue=("ZON-08",),
)
def switch_reach(case: Case) -> Iterator[Outcome]:
    """Do battery switches and main devices stand where a person reaches them at once?

    A battery switch is worked by hand and parts a bank from the boat; a main device is the
    first behind a bank, with other devices under it. A fuse that serves one load alone is none,
    nor is the switch of one load. A lid that lifts by hand is no hindrance.
    """
    unknown: dict[str, list[str]] = {}
    for name in dict.fromkeys((*battery_switches(case.studies), *main_devices(case.studies))):
        device = case.boat.devices[name]
        zone = case.boat.zones[device.zone]
        place = Place(name, device.at)
        if not zone.access:
            unknown.setdefault(zone.id, []).append(name)
        elif zone.access == AT_ONCE:
            yield switch_reach.passed(case, place)
        else:
            told = Told(
                fault=f"stands in {zone.id} ({zone.name}), which is reached {zone.access.replace('-', ' a ')}",
                remedy="move it to a place that is reached at once: in the open, or under a lid that lifts by hand",
                also_at=(zone.at,),
                inputs=(("zone", zone.id), ("access", zone.access)),
            )
            yield switch_reach.found(case, place, told)
    for name, devices in sorted(unknown.items()):
        fault = f"how a person reaches {name}, with {named(devices)}, is not recorded"
        yield switch_reach.not_assessed(case, Place(name, case.boat.zones[name].at), fault, "access")


@check(
    title="A battery space lets hydrogen out",
    basis=Basis.LAW,
    citation="33 CFR § 183.420(e); the charge limit of a space: its builder's figure, common practice, no source",
    formula="Σ I of the sources that reach its batteries ≤ charge limit of the space",
    why="hydrogen gathers, and the first spark is an explosion",
    catalogue=("ZON-10",),
    caution="ventilate before working on batteries; no flame, no spark",
)
def battery_vent(case: Case) -> Iterator[Outcome]:
    """Can hydrogen leave every zone with lead batteries, and is no more charged there than its vent allows?

    Sealed lead batteries count too: their valves open when they are overcharged. The charging
    current is the whole output of all sources that reach a battery of the zone in a normal
    switch state; it is judged where the zone names a limit.
    """
    for zone in case.boat.zones.values():
        batteries = [d for d in case.boat.devices.values() if d.zone == zone.id and isinstance(d.part, Battery)]
        chemistries = zone_rule().gassing_chemistries
        lead = [d for d in batteries if isinstance(d.part, Battery) and d.part.chemistry in chemistries]
        place = Place(zone.id, zone.at)
        names = [device.id for device in lead]
        if not batteries:
            continue
        if not lead:
            yield battery_vent.passed(case, place, "its batteries give off no hydrogen")
        elif zone.has_hydrogen_vent is None:
            fault = f"whether hydrogen of {named(names)} can leave {zone.id} is not recorded"
            yield battery_vent.not_assessed(case, place, fault, "hydrogen_vent")
        elif not zone.has_hydrogen_vent:
            told = Told(
                fault=f"{named(names)} give off hydrogen in {zone.id}, which has no vent for it",
                remedy="lead a vent from its highest point to the open air, or move the batteries to a vented space",
                inputs=(("zone", zone.id), ("batteries", " ".join(names))),
            )
            yield battery_vent.found(case, place, told)
        elif zone.charge_limit_a is not None:
            yield _judge_charge(case, zone, lead, zone.charge_limit_a)
        else:
            yield battery_vent.passed(case, place)


def _judge_charge(case: Case, zone: Zone, lead: list[Device], limit_a: float) -> Outcome:
    charge_a, sources, state = _charge(case, lead)
    told = Told(
        fault=f"its ventilation allows a charging current of {ampere(limit_a)}, and {named(sources)} can give "
        f"{ampere(charge_a)}",
        remedy=f"ventilate the space for {ampere(charge_a)}, or limit the charging current to {ampere(limit_a)}",
        inputs=(("limit", ampere(limit_a)), ("charge", ampere(charge_a)), ("sources", " ".join(sources))),
    )
    measure = Measure("charging current", charge_a, limit_a, "A")
    return battery_vent.judge(case, Place(zone.id, zone.at, "", state), measure, lambda: told)


def _charge(case: Case, lead: list[Device]) -> tuple[float, list[str], str]:
    """Return the largest current that sources can send to some batteries in a normal state, the sources, the state."""
    network = case.studies.network
    worst: tuple[float, list[str], str] = (0.0, [], "")
    for state in case.studies.states.kept:
        if not state.is_normal:
            continue
        net = places(network, state, (), over_diodes=True)
        mine = {net[network.index[f"{device.id}.pos"]] for device in lead}
        reaching = sorted((s for s in network.sources if net[s.out] in mine), key=lambda s: (s.device, s.post))
        charge_a = sum(source.max_a for source in reaching)
        if charge_a > worst[0]:
            sources = [f"{s.device}.{s.post} {ampere(s.max_a)}" for s in reaching]
            worst = (charge_a, sources, case.studies.state_words(state))
    return worst
