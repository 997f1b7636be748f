"""Hold the coverage table against the catalogue, the cards and the planters."""

from __future__ import annotations

import pytest

from checker.pipeline import all_cards
from tests.campaign.coverage import (
    COVERAGE,
    MECHANISMS,
    NOT_DECIDED,
    checks_of,
    coverage_text,
    plants_claimed_by_no_card,
)
from tests.campaign.planting import FAULTS, TRAPS, load_planters
from tests.campaign.tally import catalogue

load_planters()

FAULT_IDS = [row["id"] for row in catalogue()["faults"]]
TRAP_IDS = [row["id"] for row in catalogue()["traps"]]


def test_the_table_is_the_one_that_is_made_from_cards_and_planters() -> None:
    assert COVERAGE.read_text(encoding="utf-8") == coverage_text(), "run python -m tests.campaign.coverage"


@pytest.mark.parametrize("fault", FAULT_IDS)
def test_every_fault_is_found_by_a_check_and_planted_or_the_reason_is_given(fault: str) -> None:
    if fault in NOT_DECIDED:
        assert not checks_of(fault)
        assert fault not in FAULTS
    else:
        assert fault in MECHANISMS or checks_of(fault), f"no card claims {fault}"
        assert FAULTS.get(fault), f"nobody plants {fault}"


@pytest.mark.parametrize("trap", TRAP_IDS)
def test_every_sound_arrangement_is_planted(trap: str) -> None:
    assert TRAPS.get(trap), f"nobody plants {trap}"


def test_every_fault_that_a_card_claims_is_of_the_catalogue_and_planted() -> None:
    claimed = {name for card in all_cards() for name in card.catalogue}
    assert sorted(claimed - set(FAULT_IDS)) == []
    assert sorted(claimed - set(FAULTS)) == []


def test_every_planter_plants_what_the_catalogue_knows() -> None:
    assert sorted(set(FAULTS) - set(FAULT_IDS)) == []
    assert sorted(set(TRAPS) - set(TRAP_IDS) - set(FAULT_IDS)) == []  # a fault may have sound twins


def test_every_planter_expects_a_check_that_claims_its_fault() -> None:
    assert plants_claimed_by_no_card() == []
