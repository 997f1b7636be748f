"""Apply the number that a remedy prints in the place of the planted one: the finding is gone, and none is new.

A planter sets a size, a rating, a length. Where the remedy of its finding prints one for the same
part, that value is put in the planted one's place.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from dataclasses import replace
from typing import Any

import pytest

from checker.finding import Level, Outcome
from tests.campaign.planting import DESIGNS, Design, Harvest, Plant, harvest
from tests.campaign.tally import first_crops

_LEAF = {
    re.compile(r"^use (\S+ (?:AWG|mm2))(?: or larger| back)?"): ("size", "cable"),
    re.compile(r"^fit (?:\S+ at )?(\S+ A) or less"): ("rating", "protect"),
    re.compile(r"no longer than (\S+ (?:m|ft))"): ("length",),
    re.compile(r"^set it to (\S+ Ah)"): ("capacity",),
}
"""What a remedy prints, and the fields in which a planter may have put the wrong value."""


_RETURN = re.compile(r"and for its return (\S+?),? ")


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


def mended(plant: Plant, outcome: Outcome) -> Plant | None:
    """Return the plant with the remedy's number in the place of the planted one; None if it is not planted there.

    The planted value stands at the part that is blamed, at its circuit, or at the return named beside it.
    """
    owners = {outcome.part, outcome.part.partition(".")[0], outcome.circuit, *_RETURN.findall(outcome.remedy)}
    for pattern, fields in _LEAF.items():
        printed = pattern.search(outcome.remedy)
        places = [path for path, _ in leaves(plant.change) if path[-1] in fields and owners & set(path)]
        if printed and places:
            change = plant.change
            for path in places:
                change = put(change, path, printed[1])
            return replace(plant, change=change)
    return None


def errors(crop: Harvest) -> list[Outcome]:
    """Return the planted findings at error level."""
    wanted = {tuple(one) for one in crop.plant.finds}
    return [o for o, _ in crop.findings if o.level is Level.ERROR and (o.check, o.part) in wanted]


@pytest.mark.parametrize("make", DESIGNS, ids=lambda make: make.__name__)
def test_every_finding_has_a_remedy(make: Callable[[], Design]) -> None:
    without = [
        f"{', '.join(crop.sown.ids)}: {outcome.check}"
        for crop in first_crops(make)
        for outcome, _ in crop.harvest.findings
        # A quantity that cannot be read says itself what to write.
        if not outcome.remedy and not (outcome.check == "bad-value" and " e.g. " in outcome.fault)
    ]
    assert without == []


@pytest.mark.parametrize("make", DESIGNS, ids=lambda make: make.__name__)
def test_the_printed_number_mends_the_finding_and_makes_no_other(make: Callable[[], Design]) -> None:
    design = make()
    tried = [
        (crop, outcome, plant)
        for crop in first_crops(make)
        if not crop.harvest.plant.files
        for outcome in errors(crop.harvest)
        if (plant := mended(crop.harvest.plant, outcome)) is not None
    ]
    assert len(tried) >= 15
    wrong = []
    for (crop, outcome, plant), after in zip(tried, harvest(design, [row[2] for row in tried]), strict=True):
        was = {(o.check, o.part) for o, _ in crop.harvest.findings}
        # Mended to what the sound boat has, a change sets nothing: that is told, and is right.
        now = {(o.check, o.part) for o, _ in after.findings if o.check != "patch-without-effect"}
        if (outcome.check, outcome.part) in now or not now <= was:
            told = f"{outcome.check} {outcome.part}: {outcome.remedy}"
            wrong.append(f"{', '.join(crop.sown.ids)}: {told}; with {plant.change}: {sorted(now)}")
    assert wrong == []
