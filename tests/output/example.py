"""Check the example fleet once for all tests that only look at its result."""

from __future__ import annotations

import datetime
from functools import cache
from pathlib import Path

from checker.pipeline import check_fleet
from checker.result.model import FleetResult

EXAMPLE = Path(__file__).resolve().parents[2] / "fleet_example"


@cache
def example() -> FleetResult:
    """Return the result of the example fleet on the day of its committed reports."""
    return check_fleet(EXAMPLE, today=datetime.date(2026, 12, 1))
