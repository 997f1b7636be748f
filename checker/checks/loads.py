"""Judge how loads are fed and switched: one feed, one way back, a means to part them, a motor that is held fast."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.parts import Load, Overcurrent, Switch
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import ampere, seconds
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.grounding_rule import grounding_rule
from checker.limits.limit_set import always_on_rule
from checker.network.coordination import curve_of
from checker.network.feeds import Entry, Fed, Step, devices_beside, fed_twice, never_off, opened_returns, study_ways
from checker.network.sneak import sneak_paths
from checker.network.starting import cranking_motors

FEW = 3
"""How many parts a finding names before it says how many more there are."""


def _at(device: Device, state: str = "") -> Place:
    return Place(device.id, device.at, device.circuit, state)


def _loads(case: Case) -> Iterator[tuple[Device, Load]]:
    for device in case.boat.devices.values():
        if isinstance(device.part, Load):
            yield device, device.part


def _ways(case: Case) -> dict[str, tuple[Step, ...]]:
    """Return what stands between each load and its bank in the first normal state."""
    memo = case.studies.network.memo
    if "ways" not in memo:
        memo["ways"] = study_ways(case.studies.network, case.studies.usual, case.studies.exposures[0])
    found: dict[str, tuple[Step, ...]] = memo["ways"]
    return found


def _cranking(case: Case) -> frozenset[str]:
    """Return the cranking motors."""
    ties = cranking_motors(case.boat, case.studies.network, case.studies.cranking)
    return frozenset(tie.device for tie in ties)


def few(names: tuple[str, ...]) -> str:
    """Name some parts, and count the rest."""
    shown = ", ".join(names[:FEW])
    return f"{shown} and {len(names) - FEW} more" if len(names) > FEW else shown


@check(
    title="Nothing opens a return alone",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; the principle of 46 CFR § 183.380(b), which binds inspected vessels",
    why="what looks dead is live: the feed still stands at every post of it",
    level=Level.WARNING,
    catalogue=("PRO-08",),
    exemptions="a switch that opens the feed as well; midpoints of series banks, which are no return",
    caution="disconnect the battery before working on what a switch in the return was to make dead",
)
def switched_return(case: Case) -> Iterator[Outcome]:
    """Does every overcurrent device and hand switch in a return take the feed away as well?

    A return is what stands at the potential of the reference with everything closed. A pole that
    opens it is sound where another pole of the same switch or breaker (`trips_with`) opens the
    feed of what it serves, or where another return lies beside it.
    """
    told: dict[str, Outcome] = {}
    returns: set[str] = set()
    for potentials in case.studies.potentials:
        words = case.studies.state_words(potentials.state)
        for opened in opened_returns(case.boat, case.studies.network, potentials):
            returns.add(opened.part)
            place = _at(case.boat.devices[opened.part], words)
            if opened.stays_live:
                told.setdefault(opened.part, _opens_return(case, place, opened.part, opened.stays_live))
    note = "opens the feed as well, or has another return beside it"
    for name in sorted(returns):
        yield told.get(name) or switched_return.passed(case, _at(case.boat.devices[name]), note)
    if not returns:
        yield switched_return.passed(case, Place("returns", case.boat.at), "no device or hand switch in a return")


def _opens_return(case: Case, place: Place, name: str, stays_live: tuple[str, ...]) -> Outcome:
    is_switch = isinstance(case.boat.devices[name].part, Switch)
    told = Told(
        fault=f"it opens the return of {few(stays_live)}, whose feed stays live",
        remedy="move it into the feed" + (", or fit a switch with a pole in each" if is_switch else ""),
        inputs=(("serves", " ".join(stays_live)),),
    )
    return switched_return.found(case, place, told)


@check(
    title="No two overcurrent devices lie side by side",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="they share the current unevenly: one trips early, and what is behind them is dead only with both open",
    level=Level.WARNING,
    catalogue=("PRO-27",),
    exemptions="the devices of the strings of a bank; devices at both ends of one feed; one part with several poles",
)
def paralleled_devices(case: Case) -> Iterator[Outcome]:
    """Are there no two fuses or breakers whose line sides are joined and whose load sides are joined too?

    Joined is what no other device parts, in a normal switch state. Where two circuits feed one
    load, that is told as such and not here.
    """
    network, boat = case.studies.network, case.boat
    found: dict[str, Outcome] = {}
    for potentials in case.studies.potentials:
        if not potentials.state.is_normal:
            continue
        circuits = [fed for fed in _fed(case, potentials.state.id) if _is_of_two_circuits(case, fed)]
        by_circuits = [{entry.device for entry in fed.entries} for fed in circuits]
        for group in devices_beside(network, potentials):
            names = [entry.device for entry in group]
            if any(set(names) <= told for told in by_circuits):
                continue
            words = case.studies.state_words(potentials.state)
            for name in names[1:]:
                found.setdefault(name, _beside(case, names[0], name, words))
    for device in boat.devices.values():
        if isinstance(device.part, Overcurrent):
            yield found.get(device.id) or paralleled_devices.passed(case, _at(device))


def _beside(case: Case, first: str, second: str, words: str) -> Outcome:
    device, other = case.boat.devices[second], case.boat.devices[first]
    assert isinstance(device.part, Overcurrent)
    assert isinstance(other.part, Overcurrent)
    ratings = f"{ampere(other.part.rating_a)} and {ampere(device.part.rating_a)}"
    told = Told(
        fault=f"it lies beside {first} ({ratings}): their line sides are joined, and their load sides too",
        remedy=f"take {second} out and let one device of the rating that the conductors allow carry all, "
        "or part what they feed",
        also_at=(other.at_rating,),
        inputs=(("beside", first), ("ratings", ratings)),
    )
    return paralleled_devices.found(case, Place(second, device.at_rating, device.circuit, words), told)


def _fed(case: Case, state: str) -> tuple[Fed, ...]:
    """Return what several devices feed in one state."""
    memo = case.studies.network.memo
    if "fed twice" not in memo:
        memo["fed twice"] = {p.state.id: fed_twice(case.boat, case.studies.network, p) for p in case.studies.potentials}
    found: dict[str, tuple[Fed, ...]] = memo["fed twice"]
    return found[state]


def _is_of_two_circuits(case: Case, fed: Fed) -> bool:
    """Tell whether the devices that feed a load belong to several circuits, and not to one that doubles its device."""
    if not fed.is_beside:
        return True
    circuits = [circuits for entry in fed.entries if (circuits := _circuits_behind(case, entry))]
    return len(circuits) > 1 and not set.intersection(*circuits)


def _circuits_behind(case: Case, entry: Entry) -> set[str]:
    """Return the circuits of the conductors behind a device; none where it is bolted to another device."""
    posts = case.studies.network.posts
    return {c.circuit for c in case.boat.conductors.values() if posts[entry.load] in (c.start, c.end)}


@check(
    title="One feed leads to each load",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="it does not go dead with its own breaker, and one feed drives the other circuit backwards",
    catalogue=("LOD-05", "LOD-06"),
    exemptions="a changeover that closes one feed at a time; buses, whose double feed has a check of its own",
    caution="open every feed, and try that it is dead, before working on such a load",
)
def two_feeds(case: Case) -> Iterator[Outcome]:
    """Is every load fed over one overcurrent device only, in every switch state that can exist?

    Two feeds are two devices that each have a bank or source behind them and no bus between them and
    the load.
    """
    found: dict[str, Outcome] = {}
    for potentials in case.studies.potentials:
        words = case.studies.state_words(potentials.state)
        for fed in _fed(case, potentials.state.id):
            if not _is_of_two_circuits(case, fed):
                continue  # two devices side by side in one circuit, which is told there
            for load in fed.loads:
                found.setdefault(load, _fed_by_two(case, fed, load, words))
    for device, _ in _loads(case):
        yield found.get(device.id) or two_feeds.passed(case, _at(device))


def _fed_by_two(case: Case, fed: Fed, load: str, words: str) -> Outcome:
    posts = case.studies.network.posts
    names = [entry.device for entry in fed.entries]
    ways = " and ".join(f"{entry.device} from {posts[entry.line]}" for entry in fed.entries)
    told = Told(
        fault=f"it is fed by {ways}: with one of them open it stays live by the other",
        remedy=f"leave one feed and take the other off, or fit a switch that closes {' or '.join(names)}, never both",
        inputs=(("fed by", " ".join(names)),),
    )
    return two_feeds.found(case, _at(case.boat.devices[load], words), told)


@check(
    title="What is switched off is not driven through other loads",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; V = I·R over loads in series",
    why="lamps glow, relays chatter and current runs backwards through what should be dead",
    level=Level.WARNING,
    catalogue=("LOD-07",),
)
def sneak_path(case: Case) -> Iterator[Outcome]:
    """With each device and switch opened in turn, is nothing driven through loads in series?

    The others stay as in the first normal state. A stretch that the open one leaves without a bank
    or source is driven where it hangs, through loads, between two places of different voltage.
    Diodes are taken to block.
    """
    told: dict[str, Outcome] = {}
    for sneak in sneak_paths(case.studies.network, case.studies.usual):
        chain = " and ".join(sneak.loads)
        fault = (
            f"with {sneak.opened} open, {chain} stand in series and current flows through them "
            f"from {sneak.path[0]} to {sneak.path[-1]}"
        )
        remedy = f"give {sneak.blamed} a feed and a return of its own circuit, or a diode in its lead"
        inputs = (("opened", sneak.opened), ("loads", " ".join(sneak.loads)))
        place = _at(case.boat.devices[sneak.blamed], case.studies.state_words(case.studies.usual.state))
        told.setdefault(sneak.blamed, sneak_path.found(case, place, Told(fault, remedy, sneak.path, inputs)))
    for device in sorted({tie.device for tie in case.studies.network.loads}):
        yield told.get(device) or sneak_path.passed(case, _at(case.boat.devices[device]))


@check(
    title="A motor that is held fast is stopped in time",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, locked rotor (second hand: seven hours without a fire hazard)",
    formula="latest opening of the device at the stalled current ≤ 7 h",
    why="a stalled pump draws less than its fuse and burns for hours",
    catalogue=("PRO-28",),
    needs=("grounding",),
    exemptions="motors with a thermal cut-out, impedance protection or an electronic limit; cranking motors",
)
def stalled_motor(case: Case) -> Iterator[Outcome]:
    """Does something stop every motor that is held fast: itself, or an overcurrent device ahead of it?

    Where only the device protects it (`stall_protection: device`), the device ahead of it that
    opens first at the stalled current must open for certain. Told once for each part where the
    facts of the motor are not written.
    """
    cranking, ways = _cranking(case), _ways(case)
    unknown: set[str] = set()
    for device, part in _loads(case):
        if not part.is_motor or device.id in cranking:
            continue
        missing = _missing_of_motor(part)
        if part.stall_protection not in ("", "device"):
            yield stalled_motor.passed(case, _at(device), f"protects itself: {part.stall_protection}")
        elif not missing:
            outcome = _judge_stalled(case, device, part, ways.get(device.id, ()))
            if outcome.part not in unknown:
                yield outcome
            if outcome.missing:  # a device without a band is told once, whatever hangs on it
                unknown.add(outcome.part)
        elif part.id not in unknown:
            unknown.add(part.id)
            fault = f"what happens to {part.id} when it is held fast is not written"
            yield stalled_motor.not_assessed(case, Place(part.id, part.at), fault, missing)


def _missing_of_motor(part: Load) -> str:
    if not part.stall_protection:
        return "stall_protection"
    return "stall_current" if part.stall_protection == "device" and part.stall_a is None else ""


def _judge_stalled(case: Case, device: Device, part: Load, way: tuple[Step, ...]) -> Outcome:
    names = [step.part for step in way if step.is_device]
    stall_a = part.stall_a or 0.0
    curves = {name: curve_of(case.boat, case.boat.devices[name]) for name in names}
    known = [name for name in names if curves[name].is_known]
    first = min(known, key=lambda name: curves[name].latest_s(stall_a), default="")
    latest_s = curves[first].latest_s(stall_a) if first else float("inf")
    measure = Measure("opens at the stalled current", latest_s, grounding_rule(case.house.common).stalled_s, "s")
    if not measure.holds and (blind := [name for name in names if name not in known]):
        ahead = case.boat.devices[blind[0]].part
        fault = f"{blind[0]} ahead of {device.id} has no time-current band"
        return stalled_motor.not_assessed(case, Place(ahead.id, ahead.at), fault, "band")
    holds = f"{first} may carry that {seconds(latest_s)}" if first else "no overcurrent device stands ahead of it"
    told = Told(
        fault=f"held fast it draws {ampere(stall_a)}, and {holds}",
        remedy=_stall_remedy(case, part, known[0] if known else ""),
        inputs=(("stalled", ampere(stall_a)), ("device", first), ("rating", _rating_words(case, first))),
    )
    return stalled_motor.judge(case, _at(device), measure, lambda: told)


def _rating_words(case: Case, name: str) -> str:
    part = case.boat.devices[name].part if name else None
    return ampere(part.rating_a) if isinstance(part, Overcurrent) else "none"


def _stall_remedy(case: Case, part: Load, name: str) -> str:
    """Tell the largest device of the series that opens in time and still carries the motor, if there is one."""
    otherwise = "a motor that protects itself, written as `stall_protection`"
    device = case.boat.devices[name] if name else None
    if device is None or not isinstance(device.part, Overcurrent):
        return f"fit a device ahead that opens at {ampere(part.stall_a or 0.0)}, or {otherwise}"
    curve, most_s = curve_of(case.boat, device), grounding_rule(case.house.common).stalled_s
    factor = curve.rating_a / device.part.rating_a
    late = curve.late
    fitting = [
        made.rating_a
        for made in device.part.series
        if part.current_a <= made.rating_a * factor
        and type(curve)(made.rating_a * factor, curve.early, late).latest_s(part.stall_a or 0.0) <= most_s
    ]
    return f"fit {name} at {ampere(max(fitting))}, or {otherwise}" if fitting else f"fit {otherwise}"


@check(
    title="A heavy motor has a device and an isolator of its own",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; makers' data",
    why="a stalled windlass burns its cable, and nothing parts it alone",
    catalogue=("LOD-08",),
    needs=("grounding",),
    exemptions="cranking motors",
)
def heavy_motor(case: Case) -> Iterator[Outcome]:
    """Has every motor of 50 A and more an overcurrent device of its own, and what parts it alone by hand?

    A hand switch, or a breaker, which is both.
    """
    cranking, ways = _cranking(case), _ways(case)
    for device, part in _loads(case):
        if (
            not part.is_motor
            or part.current_a < grounding_rule(case.house.common).heavy_motor_a
            or device.id in cranking
        ):
            continue
        way = ways.get(device.id, ())
        own = [step for step in way if step.is_alone]
        missing = [] if any(step.is_device for step in own) else ["an overcurrent device"]
        missing += [] if any(_parts_by_hand(case, step) for step in own) else ["a breaker or hand switch"]
        if not missing:
            yield heavy_motor.passed(case, _at(device))
            continue
        told = Told(
            fault=f"a motor of {ampere(part.current_a)} without {' and '.join(missing)} of its own",
            remedy="fit a breaker of its own close to where it is fed"
            if len(missing) == 2 or "a breaker or hand switch" not in missing
            else "fit a breaker in place of its fuse, or a hand switch beside it",
            path=tuple(step.part for step in way),
            inputs=(("missing", ", ".join(missing)), ("own", " ".join(step.part for step in own))),
        )
        yield heavy_motor.found(case, _at(device), told)


def _parts_by_hand(case: Case, step: Step) -> bool:
    part = case.boat.devices[step.part].part
    return part.is_breaker if isinstance(part, Overcurrent) else isinstance(part, Switch) and part.by_hand


@check(
    title="Every load can be switched off",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="it runs on until somebody pulls a fuse",
    level=Level.NOTE,
    catalogue=("LOD-10",),
    needs=("always_on",),
    exemptions="what may stay live; a circuit that gives its reason as `always_on`; the instrument of a shunt",
)
def means_off(case: Case) -> Iterator[Outcome]:
    """With every switch and every breaker open, is no load still fed but those that have a switch of their own?

    A battery switch that takes everything with it is a means too; the pass says so.
    """
    ways = _ways(case)
    stuck = never_off(case.boat, case.studies.network, case.studies.all_off.state)
    for device, part in _loads(case):
        way = ways.get(device.id, ())
        if part.has_own_switch:
            yield means_off.passed(case, _at(device), "its own switch")
        elif device.id not in stuck:
            nearest = next((step for step in way if step.parts_it and _switches(case, step)), None)
            only = "" if nearest is None or nearest.is_alone else f"by {nearest.part}, with all that is behind it"
            yield means_off.passed(case, _at(device), only)
        elif allowed := _may_stay_live(case, device):
            yield means_off.passed(case, _at(device), f"may stay live: {allowed}")
        else:
            yield _never_off(case, device, way)


def _never_off(case: Case, device: Device, way: tuple[Step, ...]) -> Outcome:
    names = tuple(step.part for step in way)
    told = Told(
        fault="it is fed with every switch and breaker open",
        remedy="put a switch or breaker in its feed, or write `own_switch: true` at its part if it has one",
        path=names,
        inputs=(("load", device.id), ("way", " ".join(names))),
    )
    return means_off.found(case, _at(device), told)


def _switches(case: Case, step: Step) -> bool:
    part = case.boat.devices[step.part].part
    return isinstance(part, Switch) or (isinstance(part, Overcurrent) and part.is_breaker)


def _may_stay_live(case: Case, device: Device) -> str:
    """Return why a load may stay live for good, or an empty text."""
    if device.belongs_to:
        return device.belongs_to
    names = [device.circuit] if device.circuit else _landing_circuits(case).get(device.id, [])
    for circuit in (case.boat.circuits[name] for name in names if name in case.boat.circuits):
        if circuit.service in always_on_rule(case.house.common).services or circuit.always_on:
            return circuit.always_on or circuit.service
        if reason := case.house.stays_live(circuit.service, circuit.id):
            return f"by the yard's own rule, {reason}"
    return ""


def _landing_circuits(case: Case) -> dict[str, list[str]]:
    """Return for each device the circuits whose conductors land on it."""
    memo = case.studies.network.memo
    if "landing circuits" not in memo:
        found: dict[str, list[str]] = {}
        for conductor in case.boat.conductors.values():
            for post in (conductor.start, conductor.end):
                found.setdefault(post.rpartition(".")[0], []).append(conductor.circuit)
        memo["landing circuits"] = found
    landed: dict[str, list[str]] = memo["landing circuits"]
    return landed
