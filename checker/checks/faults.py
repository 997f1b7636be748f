"""Judge fault currents: what a device can break, whether it opens at the far end, what the conductor withstands."""

from __future__ import annotations

import math
from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.parts import Battery, Overcurrent
from checker.checks.check import Case, Place, Told, check
from checker.checks.feeding import PROTECTION, Kind, feedings
from checker.checks.words import BATTERY_FIGURES, ampere, no_figures, plain, seconds
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.formulas import adiabatic, adiabatic_k, study_figures
from checker.network.coordination import curve_of, withstand_ratio
from checker.network.faults import FarEnd

THEVENIN = "I = E/R with R = Zff + Zgg − 2·Zfg of the factorised network"


def _devices(case: Case) -> Iterator[tuple[Device, Overcurrent]]:
    for device in case.boat.devices.values():
        if isinstance(device.part, Overcurrent):
            yield device, device.part


@check(
    title="A device can break the largest current that can flow where it stands",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, interrupting capacity (second hand)",
    formula=f"{THEVENIN}, copper at 20 C, full batteries; I ≤ interrupting capacity",
    why="the device welds or bursts, and the current goes on",
    catalogue=("PRO-09",),
    caution="use the maker's short-circuit figure of the bank; low resistance is the safe side here",
)
def interrupting_capacity(case: Case) -> Iterator[Outcome]:
    """Is the interrupting capacity of every device at least the prospective current at its line post?

    The largest over all switch states that can exist, for a fault without resistance to the
    lowest post of a bank, all charge sources that reach it added at their greatest output.
    Strings in parallel add, blocks in series do not. Where the limit set has a table by
    cranking amperes and every battery that feeds the place gives them, its figure is told too.
    """
    missing = case.studies.without_figures
    for device, part in _devices(case):
        place = Place(device.id, device.at_rating, device.circuit)
        if missing:
            yield interrupting_capacity.not_assessed(case, place, no_figures(missing), BATTERY_FIGURES)
            continue
        largest_a, words, feeding = _largest(case, device)
        if part.interrupting_a is None:
            fault = f"{ampere(round(largest_a))} can flow here; what {part.id} can break is not written"
            yield interrupting_capacity.not_assessed(case, place, fault, "interrupting")
            continue
        yield _judge_capacity(case, device, part, largest_a, words, feeding)


def _largest(case: Case, device: Device) -> tuple[float, str, tuple[str, ...]]:
    """Return the largest prospective current at a device, the state it occurs in, and the batteries that feed it."""
    posts = [case.studies.network.index[f"{device.id}.{end}"] for end in device.part.posts]  # either may be the fed one
    best: tuple[float, str, tuple[str, ...]] = (0.0, "", ())
    for potentials, levels in zip(case.studies.potentials, case.studies.fault_levels, strict=True):
        post = max(posts, key=levels.largest_a)
        largest_a = levels.largest_a(post)
        if largest_a > best[0] * (1 + 1e-9):
            best = (largest_a, case.studies.state_words(potentials.state), levels.batteries(post))
    return best


def _judge_capacity(
    case: Case, device: Device, part: Overcurrent, largest_a: float, words: str, feeding: tuple[str, ...]
) -> Outcome:
    table = _table_words(case, device, feeding)
    told = Told(
        fault=f"{part.id} can break {ampere(part.interrupting_a or 0)}, "
        f"but {ampere(round(largest_a))} can flow here{table}",
        remedy=f"fit a device that can break {ampere(math.ceil(largest_a / 100) * 100)}, or one ahead of it that can",
        inputs=(("capacity", ampere(part.interrupting_a or 0)), ("prospective", ampere(round(largest_a)))),
    )
    place = Place(device.id, device.at_rating, device.circuit, words)
    measure = Measure("interrupting capacity", part.interrupting_a or 0.0, largest_a, "A", at_least=True)
    return interrupting_capacity.judge(case, place, measure, lambda: told, note=table.lstrip("; "))


def _table_words(case: Case, device: Device, feeding: tuple[str, ...]) -> str:
    """Tell what the limit set's table by cranking amperes asks of a device."""
    rule = next((limits.interrupting for limits in case.every_set if limits.interrupting is not None), None)
    if rule is None or not feeding:
        return ""
    total_a = 0.0
    for name in feeding:
        part = case.boat.devices[name].part
        if not isinstance(part, Battery) or part.cranking_a is None:
            return ""
        total_a += part.cranking_a
    is_main = not case.studies.is_behind_device(device.id)
    return f"; the table asks {ampere(rule.least_a(total_a, is_main=is_main))} at {ampere(total_a)} cranking"


@check(
    title="The device opens in time for a short circuit at the far end",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; principle and 5 s: IEC 60364-4-43, 434.5.2",
    formula=f"{THEVENIN}, copper at 105 C, low batteries; t_max(I/In) ≤ 5 s by the late edge of the device's band",
    why="the cable glows while the device holds",
    level=Level.WARNING,
    catalogue=("PRO-15",),
)
def far_end_clearing(case: Case) -> Iterator[Outcome]:
    """On the smallest fault current, at the far end of what it protects, does every device open within 5 s?

    The fault is taken between feed and return at each load and at the end of each stretch up
    to the next device, in every switch state and condition; the smallest current through the
    device counts, held against the late edge of its time-current band. In an engine space the
    rating is taken with the band's factor.
    """
    limit_s = study_figures().clearing_s
    for device, part in _devices(case):
        if missing := case.studies.without_figures:
            place = Place(device.id, device.at_rating, device.circuit)
            yield far_end_clearing.not_assessed(case, place, no_figures(missing), BATTERY_FIGURES)
            continue
        far = case.studies.far_ends.get(device.id)
        if far is None:
            continue
        place = Place(device.id, device.at_rating, device.circuit, case.studies.state_words(far.state))
        if part.band is None:
            fault = f"{ampere(round(far.current_a))} at {far.post}, but {part.id} has no time-current band"
            yield far_end_clearing.not_assessed(case, place, fault, "band")
            continue
        yield _judge_far(case, device, part, far, place, limit_s)


def _judge_far(case: Case, device: Device, part: Overcurrent, far: FarEnd, place: Place, limit_s: float) -> Outcome:
    curve = curve_of(case.boat, device)
    opens_s = curve.latest_s(far.current_a)
    within = "may never open" if math.isinf(opens_s) else f"may take {seconds(opens_s)} to open"
    told = Told(
        fault=f"a short circuit at {far.post} draws {ampere(round(far.current_a, 1))}, "
        f"{plain(far.current_a / curve.rating_a)} times its rating: it {within}",
        remedy=f"a smaller or faster device, or larger conductors to {far.post}",
        path=(device.id, *far.conductors, far.post),
        inputs=(("far end", far.post), ("current", ampere(round(far.current_a, 1))), ("device", part.id)),
    )
    measure = Measure("opening time", opens_s, limit_s, "s")
    note = f"{ampere(round(far.current_a))} at {far.post}"
    return far_end_clearing.judge(case, place, measure, lambda: told, note=note)


@check(
    title="A conductor withstands what its device lets through until it opens",
    basis=Basis.STANDARD,
    citation="IEC 60364-4-43, 434.5.2; k by IEC 60364-5-54, Annex A, to 160 C",
    formula="I²·t ≤ k²·S², valid up to 5 s",
    why="the insulation is spoiled before the device has opened",
    catalogue=("PRO-04", "PRO-15"),
    needs=PROTECTION,
)
def conductor_withstand(case: Case) -> Iterator[Outcome]:
    """Over the whole range of fault currents, does the conductor withstand the device's total clearing time?

    From the smallest current at the far end to the largest at the device, at each bend of the
    band's late edge. The conductor starts at the temperature its insulation is rated for.
    Where the device may take longer than 5 s it is an overload, which its rating answers for.
    """
    short = {f.conductor.id for f in feedings(case) if f.kind.gravity < Kind.PROTECTED.gravity or f.kind is Kind.SHORT}
    for device, part in _devices(case):
        far = case.studies.far_ends.get(device.id)
        if far is None or part.band is None or case.studies.without_figures:
            continue
        largest_a, words, _ = _largest(case, device)
        for name in far.conductors:
            if name not in short:  # a short piece ahead of the next device is allowed by its length
                yield _judge_withstand(case, device, name, far, largest_a, words)


def _judge_withstand(case: Case, device: Device, name: str, far: FarEnd, largest_a: float, words: str) -> Outcome:
    conductor = case.boat.conductors[name]
    constants = adiabatic()
    k = adiabatic_k(min(conductor.cable.insulation_c, constants.final_c - 1), constants.final_c)
    curve = curve_of(case.boat, device)
    k2s2 = (k * conductor.copper.area_mm2) ** 2
    ratio, at_a = withstand_ratio(curve, k2s2, far.current_a, max(largest_a, far.current_a), constants.valid_up_to_s)
    let_through, withstood = ratio * k2s2 / 1e6, k2s2 / 1e6
    told = Told(
        fault=f"{device.id} lets {let_through:.3g} kA²s through at {ampere(round(at_a))}, "
        f"{conductor.size.text} withstands {withstood:.3g} kA²s (k = {k:.0f})",
        remedy="a faster device or a larger conductor",
        inputs=(("device", device.id), ("size", conductor.size.text), ("let through", f"{let_through:.3g}")),
    )
    place = Place(name, conductor.at_size, conductor.circuit, words)
    return conductor_withstand.judge(case, place, Measure("let-through", let_through, withstood, "kA²s"), lambda: told)
