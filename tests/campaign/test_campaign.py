"""Run the campaign: every fault of the catalogue is found where it was planted, every sound arrangement is silent."""

from __future__ import annotations

import importlib
import pkgutil
from collections.abc import Callable
from itertools import islice
from pathlib import Path

import pytest

from tests.campaign.planting import DESIGNS, FAULTS, TRAPS, Design, Plant, Planter, harvest

for _module in sorted(m.name for m in pkgutil.iter_modules([str(Path(__file__).parent)])):
    if _module.startswith("plants_"):
        importlib.import_module(f"tests.campaign.{_module}")

FEW = 1
"""How many places of each planter the short campaign tries."""


def planted(kind: dict[str, list[Planter]], design: Design) -> list[tuple[str, Plant]]:
    """Return the first places of every planter."""
    return [
        (name, plant)
        for name, planters in sorted(kind.items())
        for planter in planters
        for plant in islice(planter(design), FEW)
    ]


@pytest.mark.parametrize("make", DESIGNS, ids=lambda make: make.__name__)
@pytest.mark.parametrize("kind", [FAULTS, TRAPS], ids=["faults", "traps"])
def test_what_is_planted_is_found_and_nothing_else(kind: dict[str, list[Planter]], make: Callable[[], Design]) -> None:
    design = make()
    rows = planted(kind, design)
    wrong = [
        f"{name}: {crop}"
        for (name, _), crop in zip(rows, harvest(design, [plant for _, plant in rows]), strict=True)
        if not crop.is_as_planted
    ]
    assert not wrong, "\n".join(wrong)
