"""Judge what could feed a fault in each conductor, and what would open it."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Conductor
from checker.boat.parts import Overcurrent
from checker.checks.check import Case, Place, Told, at_conductor, check
from checker.checks.feeding import PROTECTION, UNKNOWN_ALLOWED_A, Feeding, Kind, feedings
from checker.checks.gauge import size_field
from checker.checks.remedy import highest_rating, smallest_gauge, smallest_gauge_words, together
from checker.checks.roles import BANK, protection_exemption, role_holds
from checker.checks.words import ampere, kept_length, short_length
from checker.finding import Basis, Level, Measure, Outcome

_CAUTION = "a passed check is no permission: the licensed edition, local codes and the surveyor decide"


def _place(case: Case, feeding: Feeding) -> Place:
    return at_conductor(feeding.conductor, state=case.studies.state_words(feeding.state))


def _inputs(feeding: Feeding) -> tuple[tuple[str, str], ...]:
    conductor = feeding.conductor
    terms = " + ".join(f"{name} {ampere(a)}" for name, a in feeding.terms)
    length_m = feeding.run.length_m if feeding.run else conductor.length_m
    return (("size", conductor.size.text), ("feeds", terms), ("run", f"{length_m:.3f} m"),
            ("allowed", ampere(feeding.allowed_a)))  # fmt: skip


def _sum(feeding: Feeding) -> str:
    """Print what reaches a conductor term by term."""
    if len(feeding.terms) == 1:
        return f"{feeding.terms[0][0]} {ampere(feeding.terms[0][1])}"
    return " + ".join(f"{n} {ampere(a)}" for n, a in feeding.terms) + f" = {ampere(feeding.reaching_a)}"


@check(
    title="A fault in any live conductor is opened by an overcurrent device",
    basis=Basis.LAW,
    citation="33 CFR § 183.455(a)",
    formula="the maximum flow into each end, with the conductor taken out, is finite",
    why="nothing would open a short circuit here: a chafe becomes a fire",
    catalogue=(
        "PRO-01",
        "PRO-07",
        "PRO-16",
        "PRO-17",
        "PRO-18",
        "PRO-20",
        "PRO-21",
        "PRO-22",
        "PAN-02",
        "BNK-10",
        "SHU-08",
        "SHU-09",
    ),
    exemptions="cranking motor conductors, resistance conductors, pigtails below 7 in (§ 183.455(e), from memory); "
    "bank conductors belong to the bank; what only a self-limiting source can feed is held to its greatest output",
    caution=_CAUTION,
    per_set=True,
    needs=PROTECTION,
)
def unprotected_conductor(case: Case) -> Iterator[Outcome]:
    """Does some overcurrent device stand between every live conductor and every battery?

    For both ends of each conductor the largest sustained current that can reach it is found,
    in every switch state that can exist and from every source. A conductor that a battery
    reaches with no device on the way, and that leads to none, is a finding here. A cable
    between two sources is asked at both ends.
    """
    for feeding in feedings(case):
        if feeding.kind is Kind.EXEMPT:
            yield unprotected_conductor.passed(case, _place(case, feeding), feeding.note)
        elif feeding.kind is Kind.OPEN:
            yield unprotected_conductor.found(case, _place(case, feeding), _told_open(case, feeding))
        else:
            yield unprotected_conductor.passed(case, _place(case, feeding))


def _told_open(case: Case, feeding: Feeding) -> Told:
    run = feeding.run
    source = run.origin if run else "a battery"
    fault = f"{source} feeds it with no overcurrent device on the way"
    stray = _device_in_return(case, feeding.conductor)
    if stray:
        fault += f"; {stray} stands in the return, where a short to the engine or a bond never passes it"
    most_a = _allowed_by_all(case, feeding.conductor)
    rating = f" of at most {ampere(most_a)}" if most_a < 1e9 else ""
    near = kept_length(case.limits.distance.open_m)
    return Told(
        fault=fault,
        remedy=f"fit a fuse or breaker{rating} within {near} of {source}",
        path=run.path if run else (),
        inputs=_inputs(feeding),
    )


def _allowed_by_all(case: Case, conductor: Conductor) -> float:
    """Return the largest protection that every limit set of the boat allows a conductor."""
    allowed = (case.under(limits).bearings.allowed_a(conductor) for limits in case.every_set)
    return min((a for a in allowed if a is not None), default=UNKNOWN_ALLOWED_A)


def _device_in_return(case: Case, conductor: Conductor) -> str:
    """Return an overcurrent device that stands in the return of the conductor's circuit."""
    circuit = case.boat.circuits.get(conductor.circuit)
    index, usual = case.studies.network.index, case.studies.usual
    ends = {case.boat.conductors[c].end for c in circuit.conductors} if circuit else set()
    ends |= {case.boat.conductors[c].start for c in circuit.conductors} if circuit else set()
    for device in case.boat.devices.values():
        posts = {f"{device.id}.line", f"{device.id}.load"}
        if isinstance(device.part, Overcurrent) and ends & posts and usual.is_return(index[f"{device.id}.line"]):
            return device.id
    return ""


@check(
    title="The first overcurrent device stands close to the source",
    basis=Basis.LAW,
    citation="33 CFR § 183.455(b)(1), (b)(2)",
    formula="l1 + l2 + … of the conductors ahead of the first device ≤ the limit",
    why="the piece ahead of the device burns before anything opens",
    catalogue=("PRO-02", "PRO-03", "PRO-16", "PRO-17", "PAN-02", "SRC-01"),
    exemptions="cranking motor conductors: what leaves them is measured from where it leaves",
    caution=_CAUTION,
    per_set=True,
    needs=PROTECTION,
)
def protection_distance(case: Case) -> Iterator[Outcome]:
    """Is the conductor ahead of the first overcurrent device short enough?

    Measured along the conductors from the battery post, or from where a conductor steps down
    in size, to the line side of the device; short pieces in a row add up. 7 in; 40 in where
    the whole of it lies in a sheath or enclosure; what the limit set says for an enclosed
    conductor on a battery post. A length equal to the limit passes. Beyond 7 in the federal
    rule asks for a reason, which is written as `place_reason`.
    """
    for feeding in feedings(case):
        place = _place(case, feeding)
        run = feeding.run
        if feeding.kind is Kind.NO_REASON and run is not None:
            fault = f"{short_length(run.length_m)} ahead of {run.device} is allowed only where nearer is impractical"
            yield protection_distance.not_assessed(case, place, fault, "place_reason")
        elif feeding.kind in (Kind.SHORT, Kind.FAR) and run is not None and run.device:
            measure = Measure(
                "length ahead of the device", run.length_m, feeding.limit_m, "m",
                shown_in=feeding.conductor.length_unit,
            )  # fmt: skip
            yield protection_distance.judge(
                case, place, measure, lambda f=feeding: _told_far(case, f), note=f"{run.origin} to {run.device}"  # type: ignore[misc]
            )  # fmt: skip


def _told_far(case: Case, feeding: Feeding) -> Told:
    run = feeding.run
    assert run is not None
    pieces = " + ".join(f"{name} {short_length(case.boat.conductors[name].length_m)}" for name in run.conductors)
    rule = case.limits.distance
    open_to_sheath = feeding.limit_m < rule.enclosed_m and run.length_m <= rule.enclosed_m
    sheath = f", or lay all of it in a sheath or conduit (at most {kept_length(rule.enclosed_m)})"
    partly = any(0 < c.enclosed_m < c.length_m for c in (case.boat.conductors[n] for n in run.conductors))
    covered = "; its sheath covers only part of it" if partly else ""
    return Told(
        fault=f"{short_length(run.length_m)} of conductor between {run.origin} and {run.device} ({pieces}){covered}",
        remedy=f"bring {run.device} to within {kept_length(feeding.limit_m)} of {run.origin}"
        + (sheath if open_to_sheath else ""),
        path=run.path,
        inputs=_inputs(feeding),
    )


@check(
    title="A device is no larger than the conductor behind it allows",
    basis=Basis.LAW,
    citation="33 CFR § 183.455(c)(1): 150 % of Table 5 below 50 V; voluntary set: ABYC E-11 11.10.2.3 (from memory)",
    formula="largest flow into the conductor ≤ largest rating allowed for its corrected ampacity",
    why="the cable is the fuse",
    catalogue=("PRO-04",),
    caution="the federal text does not say whether the engine-space factor comes before the 150 %; it is taken first, "
    "the stricter reading",
    per_set=True,
    needs=PROTECTION,
)
def device_rating(case: Case) -> Iterator[Outcome]:
    """Does the device that protects a conductor open before the conductor is overloaded?

    The largest current that can reach either end of the conductor without opening a device,
    against the largest protection that the limit set allows for its corrected ampacity.
    """
    for feeding in feedings(case):
        yield from _judge_rating(case, feeding, Kind.RATING)


@check(
    title="A device stands where the conductor becomes thinner",
    basis=Basis.LAW,
    citation="33 CFR § 183.455(a), (c)(1)",
    formula="largest flow into the conductor ≤ largest rating allowed for its corrected ampacity",
    why="a thin tail behind a device meant for a thick cable burns first",
    catalogue=("PRO-05", "PRO-06", "PAN-02"),
    caution=_CAUTION,
    per_set=True,
    needs=PROTECTION,
)
def size_step(case: Case) -> Iterator[Outcome]:
    """Is every conductor down to the load protected at its own size, also after a step or two?

    As for the device's rating, for conductors that do not lie next to the device.
    """
    for feeding in feedings(case):
        if feeding.kind is Kind.STEP:
            yield from _judge_rating(case, feeding, Kind.STEP)


@check(
    title="Devices that feed one conductor together do not add up beyond it",
    basis=Basis.LAW,
    citation="33 CFR § 183.455(c)(1); that the sum is judged is common practice, no source",
    formula="In,1 + In,2 + … ≤ largest rating allowed for the conductor's corrected ampacity",
    why="each device is small enough alone, but a fault is fed by their sum",
    catalogue=("PRO-25", "PAN-06"),
    caution=_CAUTION,
    per_set=True,
    needs=PROTECTION,
)
def double_feed(case: Case) -> Iterator[Outcome]:
    """Is what several devices and sources can send into a conductor together within what it allows?

    Each term of the sum is printed.
    """
    for feeding in feedings(case):
        if feeding.kind is Kind.DOUBLE:
            yield from _judge_rating(case, feeding, Kind.DOUBLE)


def _judge_rating(case: Case, feeding: Feeding, kind: Kind) -> Iterator[Outcome]:
    rule = {Kind.RATING: device_rating, Kind.STEP: size_step, Kind.DOUBLE: double_feed}[kind]
    place = _place(case, feeding)
    if feeding.kind is Kind.NO_FIGURE:
        fault = f"the table has no row for {feeding.conductor.size.text}"
        yield rule.not_assessed(case, place, fault, size_field(case))
    elif feeding.kind is Kind.PROTECTED or feeding.kind is kind:
        measure = Measure("protection", feeding.reaching_a, feeding.allowed_a, "A")
        yield rule.judge(case, place, measure, lambda: _told_rating(case, feeding))


def _told_rating(case: Case, feeding: Feeding) -> Told:
    conductor = feeding.conductor
    bearing = case.bearings.of(conductor)
    bears = f"allows {ampere(feeding.allowed_a)}" + (
        f" (bears {ampere(bearing.ampacity_a)}: {bearing.words})" if bearing else ""
    )
    verb = "protects" if feeding.terms and feeding.terms[0][0] in case.boat.devices else "can feed"
    where = {
        Kind.STEP: f"{conductor.size.text} steps down behind {_sum(feeding)} with no device at the step, but {bears}",
        Kind.DOUBLE: f"{_sum(feeding)} reach {conductor.size.text} together, which {bears}",
    }.get(feeding.kind, f"{_sum(feeding)} {verb} {conductor.size.text}, which {bears}")
    offers: list[str] = []
    run = feeding.run
    if run is not None and run.device:
        where += f"; the next device {run.device} stands {short_length(run.length_m)} along"
        offers.append(f"bring {run.device} to within {kept_length(feeding.limit_m)} of {run.origin}")
    device = feeding.terms[0][0] if len(feeding.terms) == 1 else ""
    if device in case.boat.devices and feeding.kind is Kind.RATING:
        rating = highest_rating(case, device)
        if rating is not None:
            offers.append(f"fit {device} at {ampere(rating)} or less")
    if feeding.kind is Kind.STEP and not (run is not None and run.device):
        offers.append(f"fit a device of at most {ampere(_allowed_by_all(case, conductor))} at the step")
    if feeding.kind is Kind.DOUBLE:
        offers.append("let one device feed it at a time, or put one device ahead of both")
    size = smallest_gauge(case, together(case, conductor))
    if size is not None or not offers:
        offers.insert(0, smallest_gauge_words(case, conductor))
    return Told(where, ", or ".join(offers), feeding.run.path if feeding.run else (), _inputs(feeding))


@check(
    title="A return bears what a failed load can send through it",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; the rules on protection name ungrounded conductors only",
    formula="the largest, over paths from a bank, of the least In on the path ≤ largest rating allowed",
    why="a shorted load drives the full current of its feed's device through the return",
    catalogue=("CON-16", "RET-06"),
    level=Level.ERROR,
    per_set=True,
    needs=PROTECTION,
)
def return_protection(case: Case) -> Iterator[Outcome]:
    """Does the device in a load's feed open before the load's return is overloaded?

    The widest single way from a bank to a load that fails as a short, against what the limit
    set allows behind a device for the return's corrected ampacity. Where returns run in
    parallel, only a solved network could tell the share: then it is not assessed, unless the
    conductor bears all of it.
    """
    done: set[str] = set()
    feeds = {f.conductor.id: f.kind for f in feedings(case)}
    for potentials, returns in zip(case.studies.potentials, case.studies.returns, strict=True):
        for name, failed in sorted(returns.items()):
            conductor = case.boat.conductors[name]
            if name in done or failed.current_a == 0 or conductor.is_bond:
                continue
            if protection_exemption(case, conductor) or (conductor.role == BANK and role_holds(case, conductor)):
                continue
            if failed.current_a == float("inf") and _is_told_or_cranks(case, failed.load, feeds):
                continue
            done.add(name)
            place = at_conductor(conductor, state=case.studies.state_words(potentials.state))
            allowed_a = case.bearings.allowed_a(conductor)
            if allowed_a is None:
                fault = f"the table has no row for {conductor.size.text}"
                yield return_protection.not_assessed(case, place, fault, size_field(case))
                continue
            measure = Measure("protection", failed.current_a, allowed_a, "A")
            if not measure.holds and failed.is_in_loop:
                fault = f"{failed.load} can send {ampere(failed.current_a)} through it and a return beside it"
                yield return_protection.not_assessed(case, place, fault, "the solved network (shared returns)")
            elif measure.holds or not _told_at_feed(case, conductor, feeds):
                yield _judge_return(case, place, conductor, measure, failed.load, failed.device)


def _is_told_or_cranks(case: Case, load: str, feeds: dict[str, Kind]) -> bool:
    """Tell whether the missing device ahead of a load is told at its feed, or the load is a cranking motor."""
    place, index = case.studies.places, case.studies.network.index
    # An instrument that is mounted on a shunt's post has the conductor there for its own.
    own = {place[tie.feed] for tie in case.studies.network.loads if tie.device == load}
    for name, kind in feeds.items():
        conductor = case.boat.conductors[name]
        ends = (conductor.start, conductor.end)
        owners = [case.boat.device_of(post) for post in ends]
        is_its_own = any(owner is not None and owner.id == load for owner in owners)
        is_its_own = is_its_own or any(place[index[post]] in own for post in ends)
        if is_its_own and (kind in (Kind.OPEN, Kind.FAR) or name in case.studies.cranking):
            return True
    return False


def _judge_return(case: Case, place: Place, conductor: Conductor, measure: Measure, load: str, device: str) -> Outcome:
    by = f"by {device}" if device else "no device in its feed"

    def told() -> Told:
        return Told(
            fault=f"a failed {load} sends {ampere(measure.value)} ({by}) through {conductor.size.text}, "
            f"which allows {ampere(measure.limit)}",
            remedy=smallest_gauge_words(case, conductor),
            inputs=(("size", conductor.size.text), ("device", f"{device} {ampere(measure.value)}")),
        )

    return return_protection.judge(case, place, measure, told)


def _told_at_feed(case: Case, conductor: Conductor, feeds: dict[str, Kind]) -> bool:
    """Tell whether the same cable is already reported by its feed conductor: one cause, one finding."""
    circuit = case.boat.circuits.get(conductor.circuit)
    own = [case.boat.conductors[name] for name in circuit.conductors] if circuit else []
    told = (Kind.RATING, Kind.STEP, Kind.DOUBLE)
    return any(feeds.get(c.id) in told and c.size.area_mm2 <= conductor.size.area_mm2 for c in own)
