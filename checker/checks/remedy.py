"""Compute what would mend a finding: a gauge, a rating or a length that passes every check of the conductor."""

from __future__ import annotations

import math

from checker.boat.hull import Conductor
from checker.boat.parts import Overcurrent
from checker.checks.check import Case
from checker.checks.drops import circuit_drop, circuits_through, drop_limit
from checker.checks.roles import EXEMPTIONS, continuous_a, exempt_as, size_exemption
from checker.limits.limit_set import metric_sizes, standard_ratings
from checker.units import Size


def together(case: Case, conductor: Conductor) -> tuple[str, ...]:
    """Return the conductors that change size with this one: the cores of its cable."""
    own = case.boat.circuits.get(conductor.circuit)
    if own is not None and conductor.id.startswith(f"{own.id}.") and conductor.cable.cores > 1:
        return own.conductors
    return (conductor.id,)


def smallest_gauge(case: Case, names: tuple[str, ...], *, also_drop_of: str = "") -> Size | None:
    """Return the smallest size at which these conductors pass every check of size, or None.

    It is taken from the gauges of the table, or from the metric sizes where the yard wrote those.

    Args:
        case: The boat; all its limit sets must be satisfied.
        names: The conductors that change together.
        also_drop_of: A circuit whose voltage drop must be kept too.
    """
    is_metric = all(case.boat.conductors[name].size.awg is None for name in names)
    sizes = metric_sizes() if is_metric else gauges(case)
    return next((size for size in sizes if _passes(case, names, size, also_drop_of)), None)


def gauges(case: Case) -> tuple[Size, ...]:
    """Return the gauges of a table that the boat is judged by; the metric sizes where none has gauges."""
    for limits in (case.limits, *case.every_set):
        if not limits.lacks(["ampacity"]) and not limits.ampacity.is_metric:
            return limits.ampacity.conductor_sizes
    return metric_sizes()


def smallest_gauge_words(case: Case, conductor: Conductor) -> str:
    """Tell the smallest gauge that passes, or that there is none."""
    names = together(case, conductor)
    size = smallest_gauge(case, names)
    if size is None:
        return "no gauge of the table passes every check here: change the circuit, its route or its device"
    which = "" if len(names) == 1 else " (out and back)"
    thinner = [back for back in _returns_of(case, conductor) if back.size.area_mm2 < size.area_mm2 * (1 - 1e-9)]
    beside = f", and for its return {', '.join(back.id for back in thinner)}" if thinner and len(names) == 1 else ""
    return f"use {size.text} or larger{which}{beside}"


def _returns_of(case: Case, conductor: Conductor) -> list[Conductor]:
    """Return the return conductors of a feed conductor's circuit."""
    circuit = case.boat.circuits.get(conductor.circuit)
    index, usual = case.studies.network.index, case.studies.usual
    if circuit is None or usual.is_return(index[conductor.start]):
        return []
    own = (case.boat.conductors[name] for name in circuit.conductors)
    return [other for other in own if usual.is_return(index[other.start])]


def _passes(case: Case, names: tuple[str, ...], size: Size, also_drop_of: str) -> bool:
    conductors = [case.boat.conductors[name] for name in names]
    views = [case.under(limits) for limits in case.every_set]
    if not all(any(view.bearings.of(conductor, size) for view in views) for conductor in conductors):
        return False  # no set says what it would bear
    return all(_passes_under(view, conductors, size, also_drop_of) for view in views)


def _passes_under(case: Case, conductors: list[Conductor], size: Size, also_drop_of: str) -> bool:
    if not all(_is_thick(case, conductor, size) for conductor in conductors):
        return False
    judged = [c for c in conductors if case.bearings.of(c) is not None or case.bearings.of(c, size) is not None]
    return all(_bears(case, conductor, size) for conductor in judged) and _drops(case, conductors, size, also_drop_of)


def _is_thick(case: Case, conductor: Conductor, size: Size) -> bool:
    """Tell whether a conductor of another size passes the smallest size."""
    sheathed = conductor.cable.is_sheathed and conductor.cable.cores > 1
    least = case.limits.minimum_size.least(is_in_sheath=sheathed, length_m=conductor.length_m)
    if least is None or size.area_mm2 >= least.area_mm2 * (1 - 1e-9):
        return True
    return bool(size_exemption(case, conductor))


def _bears(case: Case, conductor: Conductor, size: Size) -> bool:
    """Tell whether a conductor of another size passes ampacity and protection, as far as the set judges these."""
    bearing = case.bearings.of(conductor, size)
    if bearing is None:
        return False
    if case.limits.lacks([EXEMPTIONS, "device_rating"]):
        return True
    allowed_a = case.bearings.allowed_a(conductor, size)
    assert allowed_a is not None
    roles = case.limits.exemptions.ampacity_exempt_roles
    current_a = continuous_a(case, conductor)
    is_exempt = bool(exempt_as(case, conductor, roles, "ampacity_exempt_roles"))
    if current_a is not None and not is_exempt and current_a > bearing.ampacity_a * (1 + 1e-9):
        return False
    return case_exposure_a(case, conductor.id) <= allowed_a * (1 + 1e-9)


def case_exposure_a(case: Case, name: str) -> float:
    """Return the largest finite current that can reach a conductor in any state; 0 where none can."""
    most = 0.0
    for study in case.studies.exposures:
        for edge in case.studies.network.edges_of[name]:
            exposure = study.exposures.get(edge.index)
            if exposure is not None:
                finite = [a for a in (exposure.at_a, exposure.at_b) if math.isfinite(a)]
                most = max(most, *finite, 0.0)
    for returns in case.studies.returns:
        failed = returns.get(name)
        if failed is not None and math.isfinite(failed.current_a):
            most = max(most, failed.current_a)
    return most


def _drops(case: Case, conductors: list[Conductor], size: Size, also_drop_of: str) -> bool:
    """Tell whether every circuit that runs over these conductors keeps its voltage drop."""
    sizes = {conductor.id: size for conductor in conductors}
    asked = set().union(*(circuits_through(case, c.id) for c in conductors)) | ({also_drop_of} - {""})
    for name in sorted(asked):
        circuit = case.boat.circuits[name]
        limit = drop_limit(case, circuit)
        if limit is None:
            continue
        for from_bank in (False, True):
            drop = circuit_drop(case, circuit, from_bank=from_bank, sizes=sizes)
            if drop is not None and drop.fraction > limit.fraction * (1 + 1e-9):
                return False
    return True


def highest_rating(case: Case, device: str) -> float | None:
    """Return the highest rating of a device at which every conductor it alone protects is protected.

    It is taken from the ratings its series is made at, else from the published standard
    ratings; None if there is none.
    """
    protected = [name for name in case.boat.conductors if _is_behind(case, device, name)]
    most_a = math.inf
    for limits in case.every_set:
        bearings = case.under(limits).bearings
        for name in protected:
            allowed_a = bearings.allowed_a(case.boat.conductors[name])
            most_a = min(most_a, math.inf if allowed_a is None else allowed_a)
    part = case.boat.devices[device].part
    ratings = [m.rating_a for m in part.series] if isinstance(part, Overcurrent) and part.series else standard_ratings()
    fitting = [rating for rating in ratings if rating <= most_a * (1 + 1e-9)]
    return max(fitting) if fitting and math.isfinite(most_a) else None


def _is_behind(case: Case, device: str, name: str) -> bool:
    """Tell whether a device alone limits what reaches a conductor, in some state."""
    for study in case.studies.exposures:
        for edge in case.studies.network.edges_of[name]:
            exposure = study.exposures.get(edge.index)
            if exposure is None:
                continue
            for node, arriving in ((edge.a, exposure.at_a), (edge.b, exposure.at_b)):
                if arriving and [term for term, _ in study.terms(edge, node)] == [device]:
                    return True
    return False
