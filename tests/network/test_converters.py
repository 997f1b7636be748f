"""A converter ties two networks: what it gives on one side it takes on the other."""

from __future__ import annotations

import pytest

from checker.boat.hull import Condition
from checker.network.conditions import operations
from checker.network.flow import Flow
from checker.pipeline import study_boat
from tests.builders import Piece, a_battery, a_boat, a_bus, a_conductor, a_converter, a_load


def boat(loads: dict[str, float], sources: dict[str, float]) -> list[Piece]:
    """Return a 12 V bank, a converter of 10 A at 24 V that takes up to 20 A, and a 24 V bank with a lamp behind it."""
    return [
        a_bus("BUS-N"), a_battery("A"), a_battery("B", 24.0, bank="BOW"),
        a_converter("CONV"), a_load("LAMP", volts=24.0),
        a_conductor("G1", "A.neg", "BUS-N"), a_conductor("G2", "B.neg", "BUS-N"),
        a_conductor("I1", "A.pos", "CONV.inpos"), a_conductor("I2", "CONV.inneg", "BUS-N"),
        a_conductor("O1", "CONV.outpos", "B.pos"), a_conductor("O2", "CONV.outneg", "BUS-N"),
        a_conductor("L1", "B.pos", "LAMP.pos"), a_conductor("L2", "LAMP.neg", "BUS-N"),
        Condition(id="use", switches=(), closed=(), loads_a=tuple(loads.items()), sources_a=tuple(sources.items())),
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("loads", "sources", "taken_w"),
    [
        ({"LAMP": 5.0}, {"CONV.outpos": 5.0}, 12.0 * 10.0),  # half of the output: half of the 20 A
        ({"LAMP": 5.0}, {"CONV": 10.0}, 12.0 * 20.0),
        ({"LAMP": 5.0}, {}, 0.0),
    ],
)
def test_converter_takes_as_large_a_share_of_its_input_as_it_gives_of_its_output(
    loads: dict[str, float], sources: dict[str, float], taken_w: float
) -> None:
    studies = study_boat(a_boat(*boat(loads, sources)))
    for flow in studies.conditions.solved[0].flows():
        given_a = flow.battery_currents()["A"]
        index = studies.network.index
        across_v = flow.across(index["CONV.inpos"], index["CONV.inneg"])
        assert given_a * across_v == pytest.approx(taken_w, rel=1e-6, abs=1e-6)


def test_what_the_condition_says_of_the_input_counts() -> None:
    studies = study_boat(a_boat(*boat({"LAMP": 5.0, "CONV.inpos": 13.0}, {"CONV.outpos": 5.0})))
    full = studies.conditions.solved[0].full
    assert isinstance(full, Flow)
    assert full.battery_currents()["A"] == pytest.approx(13.0)
    assert [draw.name for draw in operations(studies.boat, studies.network)[0].draws] == ["LAMP", "CONV.inpos"]
