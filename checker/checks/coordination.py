"""Judge how devices in series act together, and whether a device lets its own load start."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.parts import Load, Overcurrent
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import ampere, plain, seconds
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.limit_set import least_selectivity_ratio, start_s
from checker.network.coordination import Pair, curve_of


def _part(device: Device) -> Overcurrent:
    assert isinstance(device.part, Overcurrent)
    return device.part


@check(
    title="A fault in a branch leaves the device above it closed",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; requirement text: 46 CFR 111.51-3; ratio: IEC 60269-2, gG",
    formula="t_min,upper(I) > t_max,lower(I) up to the prospective current; without bands In,upper ≥ 1.6·In,lower",
    why="one shorted reading lamp blacks out the helm",
    level=Level.WARNING,
    catalogue=("PRO-12",),
    exemptions="two devices in series with nothing between them but conductors",
    needs=("selectivity",),
)
def selectivity(case: Case) -> Iterator[Outcome]:
    """Does the lower of two devices open before the one directly above it begins to?

    Compared by their time-current bands for every current up to the prospective one behind
    the lower device, in every normal switch state. Where a part has no band, the ratio of the ratings
    is taken instead, and the report says so.
    """
    for pair, up_to_a, prospective_a, words in case.studies.selectivity:
        device = case.boat.devices[pair.lower]
        place = Place(f"{pair.lower} under {pair.upper}", device.at_rating, device.circuit, words)
        if not pair.has_branch:
            yield selectivity.passed(case, place, "in series with nothing between: needs none")
        elif up_to_a is None:
            yield _by_ratio(case, pair, place)
        else:
            yield _by_bands(case, pair, place, up_to_a, prospective_a)


def _by_ratio(case: Case, pair: Pair, place: Place) -> Outcome:
    upper, lower = (_part(case.boat.devices[name]) for name in (pair.upper, pair.lower))
    least = least_selectivity_ratio(case.house.common)
    told = Told(
        fault=f"{pair.upper} {ampere(upper.rating_a)} is {plain(upper.rating_a / lower.rating_a)} times "
        f"{pair.lower} {ampere(lower.rating_a)}; a part without a band needs {plain(least)} times",
        remedy="a larger ratio of the ratings, or parts with bands",
        inputs=(("upper", ampere(upper.rating_a)), ("lower", ampere(lower.rating_a))),
    )
    has_bands = upper.band is not None and lower.band is not None
    note = "by ratio: the batteries have no figures" if has_bands else "by ratio: a part has no band"
    measure = Measure("ratio of ratings", upper.rating_a / lower.rating_a, least, "times", at_least=True)
    return selectivity.judge(case, place, measure, lambda: told, note=note)


def _by_bands(case: Case, pair: Pair, place: Place, up_to_a: float, prospective_a: float) -> Outcome:
    upper, lower = (_part(case.boat.devices[name]) for name in (pair.upper, pair.lower))
    how = "not selective" if up_to_a <= lower.rating_a else f"selective up to {ampere(round(up_to_a))} only"
    told = Told(
        fault=f"{pair.lower} {ampere(lower.rating_a)} under {pair.upper} {ampere(upper.rating_a)} is {how}; "
        f"{ampere(round(prospective_a))} can flow behind it",
        remedy="a faster device below, or a slower or larger one above as far as the conductors allow",
        inputs=(("upper", upper.id), ("lower", lower.id), ("up to", ampere(round(up_to_a)))),
    )
    measure = Measure("selective up to", up_to_a, prospective_a, "A", at_least=True, is_stepped=True)
    return selectivity.judge(case, place, measure, lambda: told)


@check(
    title="A branch device is no larger than the one above it",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="In,lower ≤ In,upper",
    why="the main opens first, and the branch is not protected at its value",
    level=Level.WARNING,
    catalogue=("PRO-13",),
    exemptions="two devices in series with nothing between them but conductors",
)
def rating_order(case: Case) -> Iterator[Outcome]:
    """Do the ratings fall from the source down to the load?"""
    for pair, _, _, words in case.studies.selectivity:
        if not pair.has_branch:
            continue
        upper, lower = (_part(case.boat.devices[name]) for name in (pair.upper, pair.lower))
        device = case.boat.devices[pair.lower]
        told = Told(
            fault=f"{ampere(lower.rating_a)} stands under {pair.upper} of {ampere(upper.rating_a)}",
            remedy=f"fit {ampere(upper.rating_a)} or less, or correct the one above",
            inputs=(("upper", ampere(upper.rating_a)), ("lower", ampere(lower.rating_a))),
        )
        place = Place(f"{pair.lower} under {pair.upper}", device.at_rating, device.circuit, words)
        measure = Measure("rating", lower.rating_a, upper.rating_a, "A", is_stepped=True)
        yield rating_order.judge(case, place, measure, lambda told=told: told)  # type: ignore[misc]


@check(
    title="A device carries its load, and lets it start",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="I_load ≤ In; starting: t_min(I_peak/In) ≥ the starting time, by the device's band",
    why="nuisance trips: the crew fits a bigger fuse",
    level=Level.WARNING,
    catalogue=("PRO-14", "PRO-19"),
    caution="the time a load takes to start is a common figure; the maker's decides",
    needs=("start",),
)
def device_carries_load(case: Case) -> Iterator[Outcome]:
    """Is every device at least as large as its circuit's continuous current, and does its band carry the start?

    The starting current is the load's peak. The device may not begin to open before the
    starting time, by the early edge of its band. Inverter surges are peaks like any other.
    """
    for device, load, current_a in _served(case):
        part = _part(device)
        place = Place(device.id, device.at_rating, device.circuit)
        told = Told(
            fault=f"{ampere(part.rating_a)} stands ahead of {load.id}, which draws {ampere(current_a)} continuously",
            remedy=f"the next rating above {ampere(current_a)} that the conductor allows",
            inputs=(("device", ampere(part.rating_a)), ("current", ampere(current_a))),
        )
        measure = Measure("continuous current", current_a, part.rating_a, "A", is_stepped=True)
        yield device_carries_load.judge(case, place, measure, lambda told=told: told)  # type: ignore[misc]
        if load.peak_a is not None and part.band is not None:
            yield _judge_start(case, device, load, load.peak_a)


def _judge_start(case: Case, device: Device, load: Load, peak_a: float) -> Outcome:
    curve = curve_of(case.boat, device)
    opens_s = curve.earliest_s(peak_a)
    told = Told(
        fault=f"{load.id} starts with {ampere(peak_a)}, {plain(peak_a / curve.rating_a)} times the rating: "
        f"{device.id} may open after {seconds(opens_s)}",
        remedy="a slower device, or the next rating that the conductor allows",
        inputs=(("peak", ampere(peak_a)), ("device", _part(device).id)),
    )
    place = Place(f"{device.id} while {load.id} starts", device.at_rating, device.circuit)
    measure = Measure("holding time", opens_s, start_s(case.house.common), "s", at_least=True, is_stepped=True)
    return device_carries_load.judge(case, place, measure, lambda: told)


def _served(case: Case) -> Iterator[tuple[Device, Load, float]]:
    """Yield each device that serves one load alone, the load, and its continuous current."""
    for name, load_name in sorted(case.studies.sole_devices.items()):
        device, load = case.boat.devices[name], case.boat.devices[load_name].part
        if not isinstance(load, Load):
            continue
        circuit = case.boat.circuits.get(case.boat.devices[load_name].circuit)
        current_a = load.current_a if circuit is None or circuit.current_a is None else circuit.current_a
        yield device, load, current_a
