"""Hold the prospective fault current against published examples, on boats with exactly their batteries.

Batteries are mounted post to post, so that nothing but their own resistances and the written links limits a fault.
"""

from __future__ import annotations

import pytest

from checker.boat.hull import Device, Joint
from checker.boat.parts import Battery
from checker.limits.formulas import resistivity_ohm_mm2_per_m
from checker.network.flow import Copper
from checker.network.studies import Coppers, Studies
from tests.builders import Piece, a_boat, a_bus, a_device, a_fuse, a_load

COLD, WORKING, HOT = (Copper(resistivity_ohm_mm2_per_m(celsius)) for celsius in (20, 30, 105))


def cell(name: str, volts: float, ohm: float, pos: str, neg: str) -> Device:
    """Place a battery of an EMF and a resistance, its posts mounted on two others."""
    part = Battery(
        id="cell", voltage_v=volts, capacity_ah=100.0, chemistry="flooded-lead", emf_full_v=volts, emf_low_v=volts,
        resistance_full_ohm=ohm, resistance_low_ohm=ohm,
    )  # fmt: skip
    return a_device(name, part, bank="HOUSE", mount={"pos": pos, "neg": neg})


def prospective_a(*batteries: Piece) -> float:
    """Return the largest current at a fuse between the stud TOP and a lamp, with batteries between TOP and BUS-N."""
    pieces = [
        *batteries, a_bus("TOP"), a_bus("BUS-N"), a_fuse("F", 10.0, mount={"line": "TOP"}), a_load("LAMP"),
        Joint(id="J1", start="F.load", end="LAMP.pos", resistance_ohm=0.0),
        Joint(id="J2", start="LAMP.neg", end="BUS-N", resistance_ohm=0.0),
    ]  # fmt: skip
    studies = Studies(a_boat(*pieces), Coppers(WORKING, COLD, HOT))
    (levels,) = studies.fault_levels
    return levels.largest_a(studies.network.index["F.line"])


def in_series(string: str, count: int, volts: float, ohm: float) -> list[Piece]:
    """Return cells from BUS-N up to TOP, each on the stud above the one before."""
    studs = ["BUS-N", *(f"{string}-{n}" for n in range(1, count)), "TOP"]
    cells = [cell(f"{string}C{n:03d}", volts, ohm, studs[n + 1], studs[n]) for n in range(count)]
    return [*cells, *(a_bus(stud) for stud in studs[1:-1])]


def test_one_string_of_110_cells_gives_the_printed_current() -> None:
    # SC-01, a handbook of DC breakers: 110 cells of 0.5 mohm, 240 V: 0.055 ohm, 4.37 kA (printed).
    assert prospective_a(*in_series("A", 110, 240 / 110, 0.0005)) == pytest.approx(4364, rel=0.005)


def test_four_strings_of_110_cells_in_parallel_give_the_printed_current() -> None:
    # SC-01: 17.5 kA (printed).
    strings = [piece for name in "ABCD" for piece in in_series(name, 110, 240 / 110, 0.0005)]
    assert prospective_a(*strings) == pytest.approx(17455, rel=0.005)


def test_strings_in_parallel_add_and_blocks_in_series_do_not() -> None:
    # SC-02, an installation text after ABYC E-11: six 6 V batteries of 2400 A as a 12 V bank: 3 · 2400 = 7200 A.
    strings = [piece for name in "ABC" for piece in in_series(name, 2, 6.0, 6.0 / 2400)]
    assert prospective_a(*strings) == pytest.approx(7200)
    assert prospective_a(*in_series("A", 2, 6.0, 6.0 / 2400)) == pytest.approx(2400)


def test_one_lithium_cell_gives_the_printed_current() -> None:
    # SC-03, a calculation in a forum: 3.5 V over 0.75 mohm: 4667 A.
    assert prospective_a(cell("C", 3.5, 0.00075, "TOP", "BUS-N")) == pytest.approx(4667, abs=1)


def test_four_lithium_cells_with_their_links_give_the_printed_current() -> None:
    # SC-03: 4 · 0.75 + 3 · 0.25 = 3.75 mohm (printed), 14 V: 3733 A.
    ends = ["BUS-N", "B1", "B2", "B3"]
    tops = ["A1", "A2", "A3", "TOP"]
    cells = [cell(f"C{n}", 3.5, 0.00075, tops[n], ends[n]) for n in range(4)]
    studs = [a_bus(stud) for stud in (*ends[1:], *tops[:-1])]
    links = [Joint(id=f"L{n}", start=tops[n], end=ends[n + 1], resistance_ohm=0.00025) for n in range(3)]
    assert prospective_a(*cells, *studs, *links) == pytest.approx(3733, abs=1)


def test_five_milliohm_in_all_give_the_printed_current() -> None:
    # SC-04, a published explanation of short circuits: 12 V over 5 mohm: 2400 A. Here 4 mohm inside, 1 mohm outside.
    outside = [a_bus("STUD"), Joint(id="L", start="STUD", end="TOP", resistance_ohm=0.001)]
    assert prospective_a(cell("C", 12.0, 0.004, "STUD", "BUS-N"), *outside) == pytest.approx(2400)
    assert prospective_a(cell("C", 12.0, 0.005, "TOP", "BUS-N")) == pytest.approx(2400)
