"""Compute voltage drop, copper area, resistance and the ambient factor by the published formulas."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cache

from checker.limits.citation import Citation
from checker.limits.table_file import common_table
from checker.units import CIRCULAR_MIL_MM2, METRE_PER_FOOT, foot_from_metre

_FIGURES = ("resistivity_20c_ohm_mm2_per_m", "reference_c", "zero_resistance_c", "reference_ambient_c")


@dataclass(frozen=True, slots=True, kw_only=True)
class Copper:
    """The constants of annealed copper.

    `zero_resistance_c` is the 234.5 of R(T) = R20 (234.5 + T) / 254.5, as printed, without
    its minus sign. `reference_ambient_c` is the ambient that the ampacity tables assume.
    """

    resistivity_20c_ohm_mm2_per_m: float
    reference_c: float
    zero_resistance_c: float
    reference_ambient_c: float
    citation: Citation
    figures: tuple[tuple[str, Citation], ...]


@cache
def copper() -> Copper:
    """Return the constants of copper from their table.

    Raises:
        LimitSetError: If the table is malformed or cites nothing.
    """
    table = common_table("copper")
    citation = table.citation()
    table.expect(("citation", *_FIGURES), ("figures",))
    return Copper(
        resistivity_20c_ohm_mm2_per_m=table.number("resistivity_20c_ohm_mm2_per_m"),
        reference_c=table.number("reference_c"),
        zero_resistance_c=table.number("zero_resistance_c"),
        reference_ambient_c=table.number("reference_ambient_c"),
        citation=citation,
        figures=table.figure_citations(_FIGURES),
    )


def drop_v(current_a: float, loop_length_m: float, area_cmil: float, k_ohm_cmil_per_ft: float) -> float:
    """Return the voltage lost along a conductor by the circular-mil formula, V.

    Args:
        current_a: Steady current, A, at least 0.
        loop_length_m: Out and back, m, at least 0.
        area_cmil: Copper area, circular mils, above 0.
        k_ohm_cmil_per_ft: Resistivity at the temperature the formula assumes.

    Raises:
        ValueError: If the area is not above 0.

    Citation: E = K·I·L/CM, L in feet from the source to the load and back.
    """
    if not area_cmil > 0:
        raise ValueError(f"an area of {area_cmil} circular mils")
    return k_ohm_cmil_per_ft * current_a * foot_from_metre(loop_length_m) / area_cmil


def smallest_area_cmil(
    current_a: float, loop_length_m: float, allowed_drop_v: float, k_ohm_cmil_per_ft: float
) -> float:
    """Return the smallest copper area that keeps a voltage drop, circular mils.

    Args:
        current_a: Steady current, A, at least 0.
        loop_length_m: Out and back, m, at least 0.
        allowed_drop_v: Allowed drop, V, above 0.
        k_ohm_cmil_per_ft: Resistivity at the temperature the formula assumes.

    Raises:
        ValueError: If the allowed drop is not above 0.

    Citation: CM = K·I·L/E, the same formula turned round.
    """
    if not allowed_drop_v > 0:
        raise ValueError(f"an allowed drop of {allowed_drop_v} V")
    return k_ohm_cmil_per_ft * current_a * foot_from_metre(loop_length_m) / allowed_drop_v


def copper_resistance_ohm(length_m: float, area_mm2: float, temperature_c: float) -> float:
    """Return the DC resistance of a solid copper conductor, Ω.

    The lay of stranded cable makes it about two per cent longer than its run; that is not in
    here, since it belongs to the cable.

    Args:
        length_m: Length, m, at least 0.
        area_mm2: Copper area, mm², above 0.
        temperature_c: Temperature of the copper, °C.

    Raises:
        ValueError: If the area is not above 0.

    Citation: R20 = rho·l/A (IACS); R(T) = R20·(234.5 + T)/254.5.
    """
    if not area_mm2 > 0:
        raise ValueError(f"an area of {area_mm2} mm²")
    return _resistivity_ohm_mm2_per_m(temperature_c) * length_m / area_mm2


def copper_temperature_c(k_ohm_cmil_per_ft: float) -> float:
    """Return the temperature at which copper has the resistivity K, °C.

    A drop computed with K silently assumes this temperature; the report prints it.
    """
    constants = copper()
    resistivity_ohm_mm2_per_m = k_ohm_cmil_per_ft * CIRCULAR_MIL_MM2 / METRE_PER_FOOT
    ratio = resistivity_ohm_mm2_per_m / constants.resistivity_20c_ohm_mm2_per_m
    return ratio * (constants.zero_resistance_c + constants.reference_c) - constants.zero_resistance_c


def ambient_factor(insulation_c: float, ambient_c: float) -> float:
    """Return the factor on an ampacity for an ambient above that of the tables.

    The figures hold at 30 °C. A cooler place earns nothing, since no limit set grants it; a
    place as hot as the insulation bears leaves nothing.

    Args:
        insulation_c: Temperature rating of the insulation, °C, above 30.
        ambient_c: Ambient, °C.

    Returns:
        Between 0 and 1.

    Raises:
        ValueError: If the insulation bears no more than the ambient of the tables.

    Citation: heat balance, √((Tc - Ta)/(Tc - 30)).
    """
    reference_c = copper().reference_ambient_c
    if not insulation_c > reference_c:
        raise ValueError(f"insulation of {insulation_c} C at an ambient of {reference_c} C")
    if ambient_c <= reference_c:
        return 1.0
    return math.sqrt(max(0.0, insulation_c - ambient_c) / (insulation_c - reference_c))


@dataclass(frozen=True, slots=True, kw_only=True)
class StudyFigures:
    """The temperatures and the time that the studies of currents and faults are made with."""

    flow_copper_c: float
    cold_copper_c: float
    hot_copper_c: float
    clearing_s: float
    citation: Citation


@cache
def study_figures() -> StudyFigures:
    """Return the figures of the studies from their table."""
    table = common_table("study")
    names = ("flow_copper_c", "cold_copper_c", "hot_copper_c", "clearing_s")
    table.expect(("citation", *names), ("figures",))
    table.figure_citations(names)
    return StudyFigures(**{name: table.number(name) for name in names}, citation=table.citation())


def resistivity_ohm_mm2_per_m(temperature_c: float) -> float:
    """Return the resistivity of copper at a temperature. Citation: IACS; R(T) = R20·(234.5 + T)/254.5."""
    return _resistivity_ohm_mm2_per_m(temperature_c)


def _resistivity_ohm_mm2_per_m(temperature_c: float) -> float:
    constants = copper()
    zero_c = constants.zero_resistance_c
    ratio = (zero_c + temperature_c) / (zero_c + constants.reference_c)
    return constants.resistivity_20c_ohm_mm2_per_m * ratio


@dataclass(frozen=True, slots=True, kw_only=True)
class Adiabatic:
    """The constants of the adiabatic equation for copper."""

    heat_capacity_j_per_k_mm3: float
    zero_resistance_c: float
    resistivity_20c_ohm_mm: float
    final_c: float
    valid_up_to_s: float
    citation: Citation


@cache
def adiabatic() -> Adiabatic:
    """Return the constants of the adiabatic equation from their table."""
    table = common_table("adiabatic")
    names = (
        "heat_capacity_j_per_k_mm3", "zero_resistance_c", "resistivity_20c_ohm_mm", "final_c", "valid_up_to_s",
    )  # fmt: skip
    table.expect(("citation", *names), ("figures",))
    table.figure_citations(names)
    return Adiabatic(**{name: table.number(name) for name in names}, citation=table.citation())


def adiabatic_k(initial_c: float, final_c: float) -> float:
    """Return k of copper, A·√s/mm²: I²·t ≤ k²·S² keeps the conductor below its final temperature.

    Raises:
        ValueError: If the final temperature is not above the initial one.

    Citation: IEC 60364-5-54, Annex A.
    """
    if not final_c > initial_c:
        raise ValueError(f"a final temperature of {final_c} C after {initial_c} C")
    c = adiabatic()
    heat = c.heat_capacity_j_per_k_mm3 * (c.zero_resistance_c + 20) / c.resistivity_20c_ohm_mm
    return math.sqrt(heat * math.log1p((final_c - initial_c) / (c.zero_resistance_c + initial_c)))
