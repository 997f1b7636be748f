"""Run the campaign: every fault of the catalogue is found where it was planted, every sound arrangement is silent.

The short form takes the first place of every planter in both boats. FAIRLOOM_CAMPAIGN=long takes
every place, and boats with several faults each; see tests/campaign/tally.py.
"""

from __future__ import annotations

import os
from collections.abc import Callable

import pytest

from tests.campaign.planting import DESIGNS, FAULTS, TRAPS, Design, Plant, Planter, at, load_planters, merged
from tests.campaign.tally import EVERY_PLACE, Count, Sown, campaign, first_crops, reap, sow, table, together, touched

load_planters()

IS_LONG = os.environ.get("FAIRLOOM_CAMPAIGN") == "long"
BOATS = 200
SEED = 1
MOST_MINGLED = 0.03


@pytest.mark.parametrize("make", DESIGNS, ids=lambda make: make.__name__)
@pytest.mark.parametrize("kind", [FAULTS, TRAPS], ids=["faults", "traps"])
def test_what_is_planted_is_found_and_nothing_else(kind: dict[str, list[Planter]], make: Callable[[], Design]) -> None:
    design = make()
    crops = (
        reap(design, sow(kind, design, EVERY_PLACE, None, ()), workers=2)
        if IS_LONG
        else first_crops(make, sound=kind is TRAPS)
    )
    wrong = [str(crop) for crop in crops if not crop.harvest.is_as_planted]
    assert not wrong, "\n".join([f"{len(wrong)} of {len(crops)} plants", *wrong])


@pytest.mark.skipif(not IS_LONG, reason="FAIRLOOM_CAMPAIGN=long")
def test_several_faults_on_one_boat_are_found_and_nothing_else() -> None:
    """One fault may hide another, or two make a third; more than a few in a hundred would be a check that gives up."""
    _, several = campaign(places=3, seed=SEED, workers=2, boats=BOATS, designs=DESIGNS[1:])
    wrong = [str(crop) for crop in several if not crop.harvest.is_as_planted]
    assert len(wrong) <= MOST_MINGLED * len(several), "\n".join([f"{len(wrong)} of {len(several)} boats", *wrong])


@pytest.mark.parametrize("kind", [FAULTS, TRAPS], ids=["faults", "traps"])
def test_every_fault_and_arrangement_is_planted_in_both_boats(kind: dict[str, list[Planter]]) -> None:
    for make in DESIGNS:
        design = make()
        bare = [name for name, planters in sorted(kind.items()) if not any(p for one in planters for p in one(design))]
        assert not bare, f"no place in {design.name}"


# --- the campaign's own judgement


def crop_of(plant: Plant) -> Count:
    """Plant one fault in the minimal boat and count what came of it."""
    (crop,) = reap(DESIGNS[0](), [_sown(plant)], workers=1)
    count = Count()
    count.add(crop.harvest)
    return count


def _sown(plant: Plant) -> Sown:
    return Sown(("LOD-01",), "by_hand", "small", plant)


LARGER = at("circuits", "PLOTTER", {"protect": "10 A"})


def test_a_fault_that_is_found_in_its_place_counts_as_planted() -> None:
    assert crop_of(Plant(LARGER, finds=[("maker-device", "P1")], line="protect: 10 A")).cells() == (1, 1, 0, 0, 0)


def test_a_fault_that_is_not_found_counts_as_missed() -> None:
    plant = Plant(LARGER, finds=[("maker-device", "P1"), ("maker-device", "P2")], line="protect: 10 A")
    assert crop_of(plant).cells() == (1, 0, 1, 0, 0)


def test_a_fault_that_is_found_at_another_line_counts_as_misplaced() -> None:
    assert crop_of(Plant(LARGER, finds=[("maker-device", "P1")], line="load:")).cells() == (1, 0, 0, 1, 0)


def test_a_fault_that_was_not_planted_counts_as_extra() -> None:
    assert crop_of(Plant(LARGER)).cells() == (1, 0, 0, 0, 1)


def test_what_follows_physically_is_not_counted() -> None:
    assert crop_of(Plant(LARGER, follows=["maker-device"])).cells() == (1, 1, 0, 0, 0)


def test_the_report_of_a_failed_plant_names_plant_and_finding() -> None:
    (crop,) = reap(DESIGNS[0](), [_sown(Plant(LARGER, finds=[("maker-device", "P2")]))], workers=1)
    told = str(crop)
    assert "LOD-01 in small, by_hand: planted:" in told
    assert "protect: 10 A" in told
    assert "missing: maker-device at P2" in told
    assert "found: maker-device at P1:" in told


def test_boats_with_several_faults_carry_them_in_different_entries() -> None:
    design = DESIGNS[0]()
    crops = reap(design, sow(FAULTS, design, 1, None, ("LOD-01", "BNK-12", "CON-16", "SHU-04")), workers=1)
    boats = together(crops, boats=3, seed=SEED)
    assert boats
    for sown in boats:
        assert len(sown.plant.finds) >= 3
        assert sown.planter.count(" + ") == 2


def test_two_changes_touch_the_same_entry_if_one_holds_the_other() -> None:
    one = merged(at("circuits", "FEED", "conductors", "D1", {"size": "8 AWG"}), at("devices", "PANEL", {"part": "x"}))
    assert touched(one) == {("circuits", "FEED", "conductors", "D1"), ("devices", "PANEL")}


def test_the_table_counts_each_boat_once_in_all() -> None:
    design = DESIGNS[0]()
    crops = reap(design, sow(FAULTS, design, 1, None, ("LOD-01",)), workers=1)
    lines = table(crops)
    assert lines[0].split()[:3] == ["group", "kinds", "planted"]
    assert lines[-1].split()[:3] == ["boats", "in", "all"]
