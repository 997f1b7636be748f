"""Write a comparison as Markdown for the summary of a job; what few readers open is folded."""

from __future__ import annotations

from checker.output.compare_sections import Item, Section, preface, sections, verdict
from checker.output.markdown import BUDGET, Budget, plain
from checker.result.comparison import Comparison

RESERVE = 2_000
"""Bytes kept for the lines that close the text."""


def compare_markdown(comparison: Comparison, most_bytes: int = BUDGET) -> str:
    """Return the comparison as Markdown of at most so many bytes."""
    budget = Budget(most_bytes - RESERVE)
    budget.add("## Review of the change", "", f"**{plain(verdict(comparison))}**", "")
    budget.add(*(f"{plain(line)}  " for line in preface(comparison)), "")
    for section in sections(comparison):
        _add(budget, section)
    closing = [f"{budget.left_out} further entries did not fit; run the comparison at hand."] if budget.left_out else []
    return budget.text(*closing)


def _add(budget: Budget, section: Section) -> None:
    if not section.items:
        budget.add(plain(section.none), "")
        return
    title = section.heading
    end = ["", "</details>", ""] if section.is_folded else [""]
    head = ["<details>", f"<summary>{title}</summary>", ""] if section.is_folded else [f"### {title}", ""]
    # The end is added with the head, so that it is there however much fits between them.
    room = Budget(budget.left - sum(len(line) + 1 for line in (*head, *end)))
    for item in section.items:
        room.add(*_item(item))
    budget.add(*head, *room.lines, *end)
    budget.left_out += room.left_out


def _item(item: Item) -> list[str]:
    return [f"- {plain(item.text)}", *(f"  - {plain(detail)}" for detail in item.details)]
