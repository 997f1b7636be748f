"""Hold the ladder of protection: what stands under what, in which order, and what each rung faces."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace

import pytest

from checker.boat.parts import Battery, Overcurrent
from checker.checks.faults import interrupting_capacity
from checker.network.ladder import Rung
from checker.network.studies import Studies
from checker.pipeline import study_boat
from tests.builders import (
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_conductor,
    a_converter,
    a_fuse,
    a_load,
    a_source,
    a_switch,
    outcomes_of,
)


def fused(name: str, rating_a: float, at: str, *, load: bool = True) -> list[Piece]:
    """Return a fuse on a post, with a conductor to a load of its own behind it."""
    pieces: list[Piece] = [a_fuse(name, rating_a, mount={"line": at})]
    if load:
        ends = (f"{name}.load", f"L-{name}.pos"), (f"L-{name}.neg", "BUS-N")
        pieces += [a_load(f"L-{name}"), *(a_conductor(f"{name}-{i}", *pair) for i, pair in enumerate(ends))]
    return pieces


def stem(*more: Piece, bank: str = "HOUSE") -> list[Piece]:
    """Return a battery, a main fuse on its post, and a bus behind it, where more may hang."""
    battery, main = a_battery("BAT", bank=bank), a_fuse("F-MAIN", 200.0, mount={"line": "BAT.pos"})
    feeder = a_conductor("W", "F-MAIN.load", "BUS-P", size="2/0 AWG")
    back = a_conductor("G", "BUS-N", "BAT.neg", size="2/0 AWG")
    return [battery, main, a_bus("BUS-P"), a_bus("BUS-N"), feeder, back, *more]


def studies_of(*pieces: Piece) -> Studies:
    """Return the studies of a boat, resistivities included."""
    return study_boat(a_boat(*pieces))


def rungs(*pieces: Piece) -> dict[str, Rung]:
    """Return the ladder by device, in its order; no device stands on it twice."""
    ladder = studies_of(*pieces).ladder
    by_device = {rung.device: rung for rung in ladder}
    assert len(by_device) == len(ladder)
    return by_device


TWO_PANELS: list[Piece] = [
    *stem(*fused("F-B", 60.0, "BUS-P", load=False), *fused("F-A", 100.0, "BUS-P", load=False)),
    a_bus("PANEL-A"), a_conductor("A", "F-A.load", "PANEL-A"), *fused("A2", 5.0, "PANEL-A"), *fused("A1", 5.0, "PANEL-A"),
    *fused("A3", 10.0, "PANEL-A"),
    a_bus("PANEL-B"), a_conductor("B", "F-B.load", "PANEL-B"), *fused("B1", 15.0, "PANEL-B"), *fused("B2", 5.0, "PANEL-B"),
    *fused("F-SENSE", 2.0, "BAT.pos"),
]  # fmt: skip


def test_devices_are_read_each_with_what_hangs_under_it_largest_first_then_by_id() -> None:
    """A panel's branches stand under the panel's device, before the next panel begins."""
    ladder = rungs(*TWO_PANELS)
    assert [(rung.depth, rung.device, rung.above) for rung in ladder.values()] == [
        (1, "F-MAIN", "HOUSE"),
        (2, "F-A", "F-MAIN"),
        (3, "A3", "F-A"),
        (3, "A1", "F-A"),
        (3, "A2", "F-A"),
        (2, "F-B", "F-MAIN"),
        (3, "B1", "F-B"),
        (3, "B2", "F-B"),
        (1, "F-SENSE", "HOUSE"),
    ]


def test_id_that_begins_another_goes_before_it() -> None:
    """Among equals the id decides, a longer one after a shorter one."""
    names = ["P10", "P1", "P2", "P"]
    ladder = rungs(*stem(*(piece for name in names for piece in fused(name, 10.0, "BUS-P"))))
    assert list(ladder) == ["F-MAIN", "P", "P1", "P10", "P2"]


def test_order_of_the_pieces_does_not_show() -> None:
    """The same boat, entered backwards."""
    assert list(rungs(*TWO_PANELS).values()) == list(rungs(*reversed(TWO_PANELS)).values())


def test_device_serves_the_loads_and_sources_with_no_other_device_between() -> None:
    """Those behind a further device are that one's."""
    spare = a_load("SPARE"), a_conductor("X1", "BUS-P", "SPARE.pos"), a_conductor("X2", "SPARE.neg", "BUS-N")
    charger = a_source("CHARGER"), a_conductor("Y1", "CHARGER.out", "BUS-P"), a_conductor("Y2", "CHARGER.neg", "BUS-N")
    ladder = rungs(*stem(*spare, *charger, *fused("F-A", 10.0, "BUS-P")))
    assert {name: rung.serves for name, rung in ladder.items()} == {
        "F-MAIN": ("CHARGER", "SPARE"),
        "F-A": ("L-F-A",),
    }


@pytest.mark.parametrize(
    ("more", "is_alone"),
    [([], True), (fused("F-B", 10.0, "BUS-P"), False), (fused("F-S", 2.0, "F-MAIN.load"), False)],
    ids=["nothing else", "another branch on the bus", "another branch on the stud"],
)
def test_device_with_nothing_else_between_it_and_the_one_above_stands_in_series(
    more: list[Piece], is_alone: bool
) -> None:
    """There it guards nothing of its own that the upper one does not."""
    ladder = rungs(*stem(*fused("F-A", 100.0, "BUS-P"), *more))
    assert ladder["F-A"].is_alone is is_alone
    assert not ladder["F-MAIN"].is_alone


def test_load_between_two_devices_ends_the_series() -> None:
    """It hangs on the upper one alone."""
    load = a_load("LAMP"), a_conductor("X1", "BUS-P", "LAMP.pos"), a_conductor("X2", "LAMP.neg", "BUS-N")
    assert not rungs(*stem(*fused("F-A", 100.0, "BUS-P"), *load))["F-A"].is_alone


def two_banks(*tie: Piece) -> list[Piece]:
    """Return two banks with one negative bus, and what ties their positives."""
    backs = [a_conductor(f"G-{b}", f"{b}.neg", "BUS-N") for b in ("B1", "B2")]
    return [a_bus("BUS-N"), a_battery("B1", bank="HOUSE"), a_battery("B2", bank="START"), *backs, *tie]


def test_device_between_two_banks_stands_on_the_ladder_once() -> None:
    """Under the bank that comes first."""
    tie = a_fuse("TIE", 100.0), a_conductor("T1", "B2.pos", "TIE.line"), a_conductor("T2", "TIE.load", "B1.pos")
    ladder = rungs(*two_banks(*tie, *fused("F-S", 5.0, "B2.pos")))
    assert [(rung.depth, rung.device, rung.above) for rung in ladder.values()] == [
        (1, "TIE", "HOUSE"),
        (2, "F-S", "TIE"),
    ]


def test_each_bank_begins_a_ladder_of_its_own() -> None:
    """In the order of their ids."""
    ladder = rungs(*two_banks(*fused("F-H", 5.0, "B1.pos"), *fused("F-S", 50.0, "B2.pos")))
    assert [(rung.depth, rung.device, rung.above) for rung in ladder.values()] == [
        (1, "F-H", "HOUSE"),
        (1, "F-S", "START"),
    ]


def test_what_a_switch_joins_in_use_hangs_under_it() -> None:
    """A switch is no rung; what stands behind it has the device ahead of it above."""
    switch = a_switch("SW"), a_bus("BUS-2"), a_conductor("X", "BUS-P", "SW.in"), a_conductor("Y", "SW.out", "BUS-2")
    ladder = rungs(*stem(*switch, *fused("F-A", 10.0, "BUS-2")))
    assert (ladder["F-A"].depth, ladder["F-A"].above) == (2, "F-MAIN")


def test_device_behind_a_converter_stands_on_the_ladder() -> None:
    """Its source is the converter's output."""
    outlet = a_fuse("F-24", 5.0, mount={"line": "CONV.outpos"})
    ends = a_conductor("X1", "F-24.load", "LAMP.pos"), a_conductor("X2", "LAMP.neg", "BUS-N")
    entry = a_conductor("C1", "F-A.load", "CONV.inpos"), a_conductor("C2", "CONV.inneg", "BUS-N")
    feed = fused("F-A", 30.0, "BUS-P", load=False)
    assert "F-24" in rungs(*stem(*feed, *entry, a_converter("CONV"), outlet, a_load("LAMP", volts=24.0), *ends))


def a_drop(studies: Studies, name: str, *, hot: bool) -> float:
    """Return the resistance of a conductor, rho · l / A, as it is taken for the smallest or the largest current."""
    conductor = studies.boat.conductors[name]
    copper = studies.coppers.hot if hot else studies.coppers.cold
    return copper.ohm_mm2_per_m * conductor.length_m / conductor.size.area_mm2


def test_rung_faces_the_largest_current_at_its_line_and_the_smallest_at_its_far_end() -> None:
    """By Ohm's law: 12.8 V behind 4 mohm full and cold, 11.9 V behind 6 mohm low and hot."""
    studies = studies_of(*stem(*fused("F-A", 10.0, "BUS-P")))
    main, branch = studies.ladder
    cold = {name: a_drop(studies, name, hot=False) for name in ("W", "G")}
    hot = {name: a_drop(studies, name, hot=True) for name in ("W", "G", "F-A-0", "F-A-1")}
    assert main.prospective_a == pytest.approx(12.8 / 0.004)
    assert branch.prospective_a == pytest.approx(12.8 / (0.004 + cold["W"]))
    assert (main.far_post, branch.far_post) == ("F-A.line", "L-F-A.pos")
    assert main.far_a == pytest.approx(11.9 / (0.006 + hot["W"] + hot["G"]))
    assert branch.far_a == pytest.approx(11.9 / (0.006 + sum(hot.values())))
    part = studies.boat.devices["F-A"].part
    assert isinstance(part, Overcurrent)
    assert (branch.rating_a, branch.part, branch.interrupting_a) == (10.0, "fuse", part.interrupting_a)


def test_device_turned_round_faces_what_can_flow_at_its_fed_post() -> None:
    """A device may be entered with its load post towards the bank; its own resistance lies behind the fault then."""
    fuse = a_fuse("F-A", 10.0, mount={"load": "BUS-P"})
    assert isinstance(fuse.part, Overcurrent)
    turned = replace(fuse, part=replace(fuse.part, resistance_ohm=0.01))
    load = a_load("L"), a_conductor("X1", "F-A.line", "L.pos"), a_conductor("X2", "L.neg", "BUS-N")
    studies = studies_of(*stem(turned, *load))
    due_a = pytest.approx(12.8 / (0.004 + a_drop(studies, "W", hot=False)))
    assert studies.ladder[-1].prospective_a == due_a
    limits = {o.part: o.measure.limit for o in outcomes_of(studies.boat, interrupting_capacity) if o.measure}
    assert limits["F-A"] == due_a


def test_rung_opens_at_its_far_end_by_its_band() -> None:
    """The band is straight on log-log axes: between ten and a hundred times the rating from 20 ms to 0.2 ms."""
    branch = rungs(*stem(*fused("F-A", 20.0, "BUS-P")))["F-A"]
    multiple = branch.far_a / 20.0
    assert 10 < multiple < 100
    slope = math.log(0.0002 / 0.02) / math.log(100 / 10)
    assert branch.opens_s == pytest.approx(0.02 * (multiple / 10) ** slope)


@pytest.mark.parametrize("rating_a", [10.0, 180.0])
def test_rung_tells_up_to_which_current_it_is_selective_under_the_one_above(rating_a: float) -> None:
    """As the study of pairs has it, against what can flow behind it: 10 A under 200 A in full, 180 A in part."""
    studies = studies_of(*stem(*fused("F-A", rating_a, "BUS-P"), *fused("F-B", 10.0, "BUS-P")))
    rung = next(rung for rung in studies.ladder if rung.device == "F-A")
    ((pair, up_to_a, behind_a, _),) = (row for row in studies.selectivity if row[0].lower == "F-A")
    assert pair.upper == rung.above
    assert (rung.selective_up_to_a, rung.behind_a) == (up_to_a, behind_a)
    assert up_to_a is not None
    assert (up_to_a < behind_a) is (rating_a > 100)


def test_first_device_is_selective_under_nothing() -> None:
    """A bank does not open."""
    main = rungs(*stem(*fused("F-A", 10.0, "BUS-P")))["F-MAIN"]
    assert (main.selective_up_to_a, main.behind_a) == (None, 0.0)


def test_device_without_a_band_tells_neither_time_nor_selectivity() -> None:
    """Its rung stands all the same."""
    fuse = a_fuse("F-A", 10.0, mount={"line": "BUS-P"})
    assert isinstance(fuse.part, Overcurrent)
    bare = replace(fuse, part=replace(fuse.part, band=None))
    rung = rungs(*stem(*fused("F-A", 10.0, "BUS-P"), *fused("F-B", 10.0, "BUS-P"), bare))["F-A"]
    assert (rung.opens_s, rung.selective_up_to_a) == (None, None)
    assert rung.far_a > 0


@pytest.mark.parametrize("missing", ["emf_full_v", "emf_low_v", "resistance_full_ohm", "resistance_low_ohm"])
def test_ladder_stands_without_currents_where_a_battery_s_figures_are_missing(missing: str) -> None:
    """Structure needs no figures."""
    facts: Mapping[str, None] = {missing: None}
    bare = a_battery("BAT")
    assert isinstance(bare.part, Battery)
    pieces = [*stem(*fused("F-A", 10.0, "BUS-P")), replace(bare, part=replace(bare.part, **facts))]  # type: ignore[arg-type]
    main, branch = rungs(*pieces).values()
    assert (main.device, branch.device, branch.above) == ("F-MAIN", "F-A", "F-MAIN")
    for rung in (main, branch):
        assert (rung.prospective_a, rung.far_post, rung.opens_s, rung.selective_up_to_a) == (0.0, "", None, None)
