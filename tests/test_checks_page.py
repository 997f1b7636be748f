"""The page of all checks and its example findings are what the checks say today."""

from __future__ import annotations

import pytest

from checker.output.explain import examples, fault_kinds, markdown_page
from checker.pipeline import all_cards
from tests.make_checks_page import CHECKS, examples_text

ANEW = "run: python tests/make_checks_page.py"


def test_the_example_findings_are_what_the_checks_find_today() -> None:
    assert (CHECKS / "examples.yaml").read_text(encoding="utf-8") == examples_text(), ANEW


def test_the_page_says_what_the_cards_say() -> None:
    assert (CHECKS / "CHECKS.md").read_text(encoding="utf-8") == markdown_page(all_cards()), ANEW


def test_every_check_has_an_example_finding() -> None:
    assert [card.id for card in all_cards() if card.id not in examples()] == []


@pytest.mark.parametrize("card", all_cards(), ids=lambda card: card.id)
def test_every_kind_of_fault_that_a_card_names_has_its_sentence(card: object) -> None:
    assert [kind for kind in card.catalogue if kind not in fault_kinds()] == []  # type: ignore[attr-defined]
