"""Judge the real copper of cables against the sizes that they pass for."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Conductor
from checker.checks.cables import named
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import plain
from checker.finding import Basis, Measure, Outcome
from checker.limits.copper_rule import copper_rule
from checker.units import Size


@check(
    title="A cable has the copper that its size stands for",
    basis=Basis.STANDARD,
    citation="SAE J1127 and J1128, smallest areas; IEC 60228, Table 3 (both second hand)",
    formula="A ≥ smallest area of the gauge; of a metric size A ≥ l/(58·R), R its largest resistance",
    why="the conductor runs hotter and drops more than its size says",
    catalogue=("CON-17",),
    caution="the ampacity is read by the size; drops and faults are reckoned with the copper that is stated",
)
def conductor_area(case: Case) -> Iterator[Outcome]:
    """Is the copper area that a cable part states (`real_areas`) not below what the size stands for?

    Vehicle cable is up to a tenth thinner than the gauge of its number, which is allowed; a
    metric size that passes for a gauge, or less copper still, is not. Told once for each cable
    part and size aboard. A cable that states no area is taken at its size.
    """
    rule = copper_rule()
    aboard: dict[tuple[str, str], list[Conductor]] = {}
    for conductor in case.boat.conductors.values():
        if conductor.cable.states_area(conductor.size):
            aboard.setdefault((conductor.cable.id, conductor.size.text), []).append(conductor)
    for (cable, text), wires in sorted(aboard.items()):
        size = wires[0].copper
        place = Place(f"{cable} as {text}", wires[0].cable.at)
        least_mm2 = rule.least_mm2(size)
        if least_mm2 is None:
            fault = f"no smallest area of {text} is known for {named([wire.id for wire in wires])}"
            yield conductor_area.not_assessed(case, place, fault, "a size that the table of smallest areas has")
            continue
        told = _told_area(cable, size, least_mm2, wires)
        measure = Measure("copper area", size.area_mm2, least_mm2, "mm2", at_least=True, is_stepped=True)
        yield conductor_area.judge(case, place, measure, lambda told=told: told)  # type: ignore[misc]


def _told_area(cable: str, size: Size, least_mm2: float, wires: list[Conductor]) -> Told:
    enough = copper_rule().largest_of(size.area_mm2, metric=size.awg is None)
    instead = f", or write {enough.text}, which its copper is enough for" if enough else ""
    return Told(
        fault=f"{cable} has {plain(size.area_mm2)} mm2 of copper as {size.text}, which stands for at least "
        f"{plain(least_mm2)} mm2; it is used for {named([wire.id for wire in wires])}",
        remedy=f"use a cable with at least {_up(least_mm2)} mm2 of copper{instead}",
        also_at=(wires[0].at_size,),
        inputs=(("size", size.text), ("area", f"{size.area_mm2:.6g} mm2")),
    )


def _up(area_mm2: float) -> str:
    """Print an area with two decimals, rounded up, so that what is printed is enough."""
    return plain(-(-area_mm2 * 100 // 1) / 100)
