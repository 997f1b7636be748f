"""Hold the shipped federal table against 33 CFR 183.425, table 5 and its notes 1 and 2."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
import yaml

from checker.limits.limit_set import load_limit_set
from checker.units import awg_size

TABLE_5: dict[str, Any] = yaml.safe_load(
    (Path(__file__).parent / "data" / "cfr33_183_425_table5.yaml").read_text(encoding="utf-8")
)
CELLS = [
    (awg, insulation_c, ampacity_a)
    for insulation_c, column in TABLE_5["amperes"].items()
    for awg, ampacity_a in zip(TABLE_5["sizes_awg"], column, strict=True)
]
LIMITS = load_limit_set("cfr33-183-i")


@pytest.mark.parametrize(("awg", "insulation_c", "ampacity_a"), CELLS)
def test_every_cell_is_the_printed_one(awg: str, insulation_c: float, ampacity_a: float) -> None:
    row = LIMITS.ampacity.at(awg_size(awg), insulation_c, next_smaller=False)
    assert row is not None
    assert (row.ampacity_a, row.column_c, row.size) == (ampacity_a, insulation_c, awg_size(awg).text)


def test_the_table_has_15_sizes_7_temperatures_and_nothing_else() -> None:
    assert len(CELLS) == 105
    assert LIMITS.ampacity.sizes == tuple(TABLE_5["sizes_awg"])
    assert LIMITS.ampacity.columns_c == tuple(TABLE_5["amperes"])


@pytest.mark.parametrize(("column_c", "factor"), TABLE_5["note_1_engine_space_factor"].items())
def test_note_1_gives_the_engine_space_factor_of_each_column(column_c: float, factor: float) -> None:
    assert LIMITS.engine_factor.at(column_c) == factor


@pytest.mark.parametrize(("count", "factor"), TABLE_5["note_2_bundle_factor_50_v_and_more"].items())
def test_note_2_gives_the_bundle_factor_from_50_volts_up(count: int, factor: float) -> None:
    assert LIMITS.bundle.factor_from_50_v(count) == factor


def test_note_2_starts_at_three_conductors() -> None:
    assert [LIMITS.bundle.factor_from_50_v(count) for count in (1, 2)] == [1.0, 1.0]


@pytest.mark.parametrize("count", [1, 3, 7, 25, 100])
def test_no_bundle_factor_is_asked_for_below_50_volts(count: int) -> None:
    assert LIMITS.bundle.factor(count) == TABLE_5["below_50_v_bundle_factor"]
