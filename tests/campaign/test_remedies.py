"""Apply the number that a remedy prints in the place of the planted one: the finding is gone, and none is new.

A planter sets a value with a unit: a size, a rating, a length. Where the remedy of its finding
prints a value of the same unit, that value is put in the planted one's place. A remedy that says
"or less" may name a rating that no part is made at; then the next that is made at counts.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from itertools import islice
from typing import Any

import pytest

from checker.finding import Level, Outcome
from tests.campaign.planting import DESIGNS, FAULTS, Design, Harvest, Plant, harvest, load_planters

load_planters()

_VALUE = re.compile(r"(?<![\w.])([0-9]+(?:/0)?(?:\.[0-9]+)?) ?(AWG|mm2|kA|A|V|mm|m|in|Nm|Ah)(?!\w)")
_SAME = {"AWG": "size", "mm2": "size", "A": "current", "kA": "current", "V": "voltage", "m": "length", "mm": "length",
         "in": "length", "Nm": "torque", "Ah": "capacity"}  # fmt: skip


def values(text: str) -> dict[str, str]:
    """Return the first value of each dimension that a text prints."""
    found: dict[str, str] = {}
    for number, unit in _VALUE.findall(text):
        found.setdefault(_SAME[unit], f"{number} {unit}")
    return found


def leaves(change: Any, path: tuple[str, ...] = ()) -> Iterator[tuple[tuple[str, ...], str]]:
    """Yield the texts of a patch with their paths."""
    if isinstance(change, dict):
        for key, value in change.items():
            yield from leaves(value, (*path, str(key)))
    elif isinstance(change, str):
        yield path, change


def put(change: Any, path: tuple[str, ...], value: str) -> Any:
    """Return a patch with another value at a path."""
    if not path:
        return value
    return {key: put(child, path[1:], value) if key == path[0] else child for key, child in change.items()}


def mended(design: Design, plant: Plant, outcome: Outcome) -> Plant | None:
    """Return the plant with the remedy's number in place of the planted one; None where it prints no such number."""
    printed = values(outcome.remedy)
    for path, text in leaves(plant.change):
        if not (match := _VALUE.fullmatch(text)):
            continue
        value = printed.get(_SAME[match[2]])
        if value is None or value == text:
            continue
        return Plant(put(plant.change, path, value), parts=plant.parts, options=plant.options)
    return None


def errors(crop: Harvest) -> list[Outcome]:
    """Return the planted findings at error level."""
    wanted = {tuple(one) for one in crop.plant.finds}
    return [o for o, _ in crop.findings if o.level is Level.ERROR and (o.check, o.part) in wanted]


def first_plants(design: Design) -> list[tuple[str, Plant]]:
    """Return the first place of every planter."""
    rows = [(name, planter) for name, planters in sorted(FAULTS.items()) for planter in planters]
    return [(name, plant) for name, planter in rows for plant in islice(planter(design), 1)]


@pytest.mark.parametrize("make", DESIGNS, ids=lambda make: make.__name__)
def test_every_finding_has_a_remedy(make: Callable[[], Design]) -> None:
    design = make()
    rows = first_plants(design)
    without = [
        f"{name}: {outcome.check}"
        for (name, _), crop in zip(rows, harvest(design, [plant for _, plant in rows]), strict=True)
        for outcome, _ in crop.findings
        # A quantity that cannot be read says itself what to write.
        if not outcome.remedy and not (outcome.check == "bad-value" and " e.g. " in outcome.fault)
    ]
    assert without == []
