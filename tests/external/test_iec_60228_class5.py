"""Hold the computed resistance of copper against the largest resistances of IEC 60228, class 5 (20 C).

The standard prints a maximum for a nominal area: it holds the lay, the tolerance of the wire
and a real area below the nominal one, together 10 to 16 per cent. So copper of the nominal
area must come out below the maximum, and not by more than that; a metric size computed from
its nominal area understates the drop of the poorest cable that may bear the name.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
import yaml

from checker.limits.formulas import copper_resistance_ohm

CLASS_5: dict[str, Any] = yaml.safe_load(
    (Path(__file__).parent / "data" / "iec_60228_class5.yaml").read_text(encoding="utf-8")
)
MAXIMA: dict[str, dict[str, float]] = CLASS_5["max_ohm_per_km_20c"]


@pytest.mark.parametrize("area", MAXIMA)
def test_copper_of_the_nominal_area_stays_10_to_16_per_cent_below_the_maximum(area: str) -> None:
    computed_ohm = copper_resistance_ohm(1000.0, float(area), 20.0)
    assert 1.10 <= MAXIMA[area]["plain"] / computed_ohm <= 1.16


@pytest.mark.parametrize("area", MAXIMA)
def test_tin_adds_two_to_three_per_cent(area: str) -> None:
    assert 1.018 <= MAXIMA[area]["tinned"] / MAXIMA[area]["plain"] <= 1.031


@pytest.mark.parametrize(("temperature_c", "factor"), CLASS_5["factor_to_20c"].items())
def test_the_temperature_correction_agrees_with_annex_b(temperature_c: float, factor: float) -> None:
    # Annex B uses 250/(230 + T), the copper standard 254.5/(234.5 + T): 0.2 per cent apart at 90 C,
    # and the annex prints three digits.
    ratio = copper_resistance_ohm(1.0, 1.0, 20.0) / copper_resistance_ohm(1.0, 1.0, temperature_c)
    assert ratio == pytest.approx(factor, abs=0.0035)
