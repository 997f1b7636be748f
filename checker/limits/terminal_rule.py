"""Load the rules for terminals: those of a limit set, and what belongs to no set."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cache

from checker.limits.rules import Rule
from checker.limits.table_file import AS_SHIPPED, CommonChanges, Table, house_table
from checker.units import Size, awg_number, awg_size, metre_from_inch

MM_PER_M = 1000.0


@dataclass(frozen=True, slots=True, kw_only=True)
class TerminalRule(Rule):
    """Which terminals a set allows; None or empty is what the set is silent on.

    `battery_refuses` are kinds of post that no battery may have, `ends_refused` what no end may
    carry. A wing nut clamps conductors thinner than `wing_nut_below` only, a push-on connector
    carries `friction_most_a`, and a screw turns on strands of `set_screw_least` and thicker.
    """

    most_per_stud: int | None = None
    battery_refuses: tuple[str, ...] = ()
    ends_refused: tuple[str, ...] = ()
    wing_nut_below: Size | None = None
    friction_most_a: float | None = None
    set_screw_least: Size | None = None

    @property
    def judges_conductors(self) -> bool:
        """Tell whether the set says anything of the terminals of conductors."""
        return bool(self.ends_refused or self.wing_nut_below or self.friction_most_a or self.set_screw_least)


_FIGURES = (
    "most_per_stud", "battery_refuses", "ends_refused", "wing_nut_below_awg", "friction_most_a",
    "set_screw_least_awg",
)  # fmt: skip


def read_terminals(table: Table) -> TerminalRule:
    """Read the rule of a limit set; each figure may be missing."""
    citation = table.citation()
    table.expect(("citation",), ("figures", *_FIGURES))
    return TerminalRule(
        citation=citation,
        figures=table.figure_citations(_FIGURES),
        most_per_stud=table.count("most_per_stud") if table.has("most_per_stud") else None,
        battery_refuses=table.names("battery_refuses") if table.has("battery_refuses") else (),
        ends_refused=table.names("ends_refused") if table.has("ends_refused") else (),
        wing_nut_below=_gauge(table, "wing_nut_below_awg") if table.has("wing_nut_below_awg") else None,
        friction_most_a=table.number("friction_most_a") if table.has("friction_most_a") else None,
        set_screw_least=_gauge(table, "set_screw_least_awg") if table.has("set_screw_least_awg") else None,
    )


def _gauge(table: Table, key: str) -> Size:
    name = table.text(key)
    try:
        return awg_size(name)
    except ValueError as fault:
        table.refuse(f"{key}: {fault}")


@dataclass(frozen=True, slots=True, kw_only=True)
class BarrelColour:
    """Hold the sizes that barrels of a colour are made for, in gauges and in square millimetres."""

    colour: str
    thinnest: Size
    thickest: Size
    least_mm2: float
    most_mm2: float

    def takes(self, size: Size) -> bool:
        """Tell whether a conductor of this size belongs into such a barrel."""
        if size.awg is not None:
            return awg_number(self.thickest.awg or "") <= awg_number(size.awg) <= awg_number(self.thinnest.awg or "")
        return self.least_mm2 * (1 - 1e-9) <= size.area_mm2 <= self.most_mm2 * (1 + 1e-9)

    @property
    def text(self) -> str:
        """Return the range as it is printed on the bag: 22 to 18 AWG, 0.5 to 1.5 mm2."""
        return f"{self.thinnest.awg} to {self.thickest.awg} AWG, {self.least_mm2:g} to {self.most_mm2:g} mm2"


@dataclass(frozen=True, slots=True, kw_only=True)
class JointRule:
    """Hold what belongs to no limit set: barrel colours, threads, and from what current on a torque is asked for."""

    barrel_colours: tuple[BarrelColour, ...]
    number_thread_base_in: float
    number_thread_step_in: float
    same_ring_within_mm: float
    torque_above_a: float

    def colour_of(self, name: str) -> BarrelColour | None:
        """Return what a colour stands for; None where it says nothing."""
        return next((colour for colour in self.barrel_colours if colour.colour == name), None)

    def colour_for(self, size: Size) -> str:
        """Return the colour of the barrels for a size, or an empty text."""
        return next((colour.colour for colour in self.barrel_colours if colour.takes(size)), "")

    def diameter_mm(self, thread: str) -> float | None:
        """Return the nominal diameter of a thread, mm: M8, #10 or 5/16 in; None for what is no thread."""
        if metric := re.fullmatch(r"M([0-9]+)", thread):
            return float(metric[1])
        if number := re.fullmatch(r"#([0-9]+)", thread):
            diameter_in = self.number_thread_base_in + self.number_thread_step_in * int(number[1])
        else:
            inch = re.fullmatch(r"([0-9]+)/([1-9][0-9]*) in", thread)
            if inch is None:
                return None
            diameter_in = int(inch[1]) / int(inch[2])
        return metre_from_inch(diameter_in) * MM_PER_M

    def is_same_ring(self, hole_mm: float, stud_mm: float) -> bool:
        """Tell whether a ring made for one thread is the ring for another, by their nominal diameters."""
        return abs(hole_mm - stud_mm) <= self.same_ring_within_mm * (1 + 1e-9)


@cache
def joint_rule(changes: CommonChanges = AS_SHIPPED) -> JointRule:
    """Return what belongs to no limit set."""
    table = house_table("joints", changes)
    names = ("number_thread_base_in", "number_thread_step_in", "same_ring_within_mm", "torque_above_a")
    table.expect(("citation", "barrel_colours", *names), ("figures",))
    table.citation()
    table.figure_citations(names)
    colours = table.table("barrel_colours")
    return JointRule(
        barrel_colours=tuple(_barrel_colour(name, colours.table(name)) for name in colours.values),
        number_thread_base_in=table.number("number_thread_base_in"),
        number_thread_step_in=table.number("number_thread_step_in"),
        same_ring_within_mm=table.number("same_ring_within_mm"),
        torque_above_a=table.number("torque_above_a"),
    )


def _barrel_colour(name: str, row: Table) -> BarrelColour:
    row.expect(("thickest_awg", "thinnest_awg", "least_mm2", "most_mm2"))
    return BarrelColour(
        colour=name,
        thinnest=_gauge(row, "thinnest_awg"),
        thickest=_gauge(row, "thickest_awg"),
        least_mm2=row.number("least_mm2"),
        most_mm2=row.number("most_mm2"),
    )
