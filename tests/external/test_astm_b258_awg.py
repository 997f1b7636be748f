"""Hold the gauge definition of units.py against ASTM B258 and a printed wire table."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest
import yaml

from checker.units import awg_area_mm2, awg_size

GAUGES: dict[str, dict[str, Any]] = yaml.safe_load(
    (Path(__file__).parent / "data" / "astm_b258_awg.yaml").read_text(encoding="utf-8")
)["gauges"]


@pytest.mark.parametrize("awg", GAUGES)
def test_the_diameter_of_a_gauge_agrees_to_its_four_decimals(awg: str) -> None:
    diameter_mm = math.sqrt(4 / math.pi * awg_area_mm2(awg))
    assert diameter_mm == pytest.approx(GAUGES[awg]["diameter_mm"], abs=0.00005001)


@pytest.mark.parametrize("awg", GAUGES)
def test_the_area_of_a_gauge_agrees_to_its_three_decimals(awg: str) -> None:
    assert awg_area_mm2(awg) == pytest.approx(GAUGES[awg]["area_mm2"], abs=0.0005001)


@pytest.mark.parametrize("awg", GAUGES)
def test_the_circular_mils_of_a_gauge_agree_with_the_four_digits_of_the_wire_table(awg: str) -> None:
    # A whole unit of the fourth digit: 22 AWG is printed 642.5 and the definition gives 642.45.
    printed_cmil = GAUGES[awg]["wire_table_cmil"]
    fourth_digit = 10 ** (math.floor(math.log10(printed_cmil)) - 3)
    assert awg_size(awg).area_cmil == pytest.approx(printed_cmil, abs=fourth_digit)


def test_six_gauges_further_nearly_double_the_diameter() -> None:
    # ASTM B258: the ratio of six steps is 92^(6/39) = 2.0050.
    assert math.sqrt(awg_area_mm2("6") / awg_area_mm2("12")) == pytest.approx(2.0050, abs=0.00005)
