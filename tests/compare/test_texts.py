"""What is printed of a comparison: hostile names stay text on their line, long lists end, words are plain."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import fields, is_dataclass, replace
from typing import Any

import pytest
from markdown_it import MarkdownIt

from checker.boat import hull, landing, parts
from checker.boat.aboard import TRUE_UNLESS_WRITTEN, UNKNOWN_UNLESS_WRITTEN, line_of, told_attributes
from checker.output.compare_markdown import compare_markdown
from checker.output.compare_sections import sections, verdict
from checker.output.compare_text import MOST_ITEMS, compare_text
from checker.output.compare_words import fact_words, figure_words, figures_words
from checker.output.markdown import Budget, plain
from checker.result.claims import SAYS_LESS, Says
from checker.result.compare import compared
from checker.result.comparison import Comparison, FactChange, FigureChange
from checker.result.side import Figures, Side
from tests.compare.test_pure import P11, Place, drop, finding, key, side, study
from tests.compare.test_pure import hull as a_hull

HOSTILE = [
    "::error::x", "a|b|c", "`rm`", "<script>alert(1)</script>", "=1+1", "\x1b[31mred", "x\n::stop-commands::y",
    "@someone", "#1", "]]>", "$(rm)", "\x00\x07", "[a](https://evil.invalid)", "https://evil.invalid", "www.evil.invalid",
    "![x](y)", "*b* _i_ ~s~", "a\\|b", "&lt;", "\u202eflipped", "- item", "1. item", "\r\n## head", ":smile:",
]  # fmt: skip


def hostile(text: str) -> Comparison:
    """Return a comparison with a text in every place that the data fills."""
    found = finding(text, fault=text, remedy=text, path=(text, text), at=text, circuit=text, figures=drop(0.04))
    base = study(places={key(): Place(drop(0.01)), key("P11.out"): Place()})
    boat = {**P11, "zone Z-NAV": {"name": text}, f"device {text}": {"part": text}}
    head = replace(
        study(found, places={key(): Place(drop(0.029))}),
        aboard=replace(base.aboard or hull, lines={name: line_of(facts) for name, facts in boat.items()}),  # type: ignore[arg-type]
    )
    sides = side(base, a_hull("H-1"), a_hull("H-3")), side(head, a_hull("H-1"), a_hull(text))
    return compared(replace(sides[0], name=text), replace(sides[1], name=text), 0.1)


@pytest.mark.parametrize("text", HOSTILE)
def test_text_from_data_stays_on_its_line_and_steers_no_terminal(text: str) -> None:
    printed = compare_text(hostile(text))
    assert all(c.isprintable() or c == "\n" for c in printed)
    assert not any(line.startswith(("::", "##", "=")) for line in printed.splitlines())
    assert len(printed.splitlines()) == len(compare_text(hostile("plain")).splitlines())


@pytest.mark.parametrize("text", HOSTILE)
def test_text_from_data_is_no_markup_in_markdown(text: str) -> None:
    written = compare_markdown(hostile(text))
    tokens = MarkdownIt("gfm-like", {"linkify": False}).parse(written)
    kinds = {t.type for token in tokens for t in (token, *(token.children or ()))}
    assert kinds <= {
        "heading_open", "heading_close", "inline", "text", "text_special", "paragraph_open", "paragraph_close",
        "bullet_list_open", "bullet_list_close", "list_item_open", "list_item_close", "strong_open", "strong_close",
        "hardbreak", "softbreak", "html_block",
    }  # fmt: skip
    html = {line for t in tokens if t.type == "html_block" for line in t.content.splitlines()}
    assert all(re.fullmatch(r"</?details>|<summary>[a-z ,]+: [0-9]+</summary>|", line) for line in html)
    assert "@someone" not in written
    assert "https://" not in written


def test_markdown_says_what_plain_text_says() -> None:
    assert plain("P11: 6 AWG -> 8 AWG, 2.55 % (of 3 %)") == "P11: 6 AWG -&#62; 8 AWG, 2.55 % (of 3 %)"


@pytest.mark.parametrize("most", [3_000, 5_000, 20_000])
def test_markdown_keeps_its_budget_and_closes_what_it_opens(most: int) -> None:
    findings = [finding(f"P{n}", fault="ü" * 50) for n in range(300)]
    comparison = compared(side(study(*findings)), side(study(*(finding(f"Q{n}") for n in range(300)))), 0.1)
    written = compare_markdown(comparison, most)
    assert len(written.encode("utf-8")) <= most
    assert written.count("<details>") == written.count("</details>")
    assert "did not fit" in written


def test_a_budget_takes_lines_that_belong_together_all_or_none() -> None:
    budget = Budget(10)
    assert budget.add("12345", "678")
    assert not budget.add("1")
    assert (budget.left_out, budget.text("end")) == (1, "12345\n678\nend\n")


def test_all_new_errors_are_named_and_other_long_lists_end() -> None:
    new = [finding(f"P{n}") for n in range(60)]
    printed = compare_text(compared(side(study()), side(study(*new)), 0.1))
    assert all(re.search(rf"\bP{n}\b", printed) for n in range(60))
    fixed = compare_text(compared(side(study(*new)), side(study()), 0.1)).splitlines()
    assert f"  and {60 - MOST_ITEMS} more" in fixed


@pytest.mark.parametrize(
    ("fact", "words"),
    [
        (FactChange("size", "6 AWG", "8 AWG"), "6 AWG -> 8 AWG"),
        (FactChange("length_m", 5.2, 6), "length 5.20 m -> 6.00 m"),
        (FactChange("length_m", 5.2, 5.2001), "length 5.2 m -> 5.2001 m"),
        (FactChange("length_m", 1.524, 3.048, in_feet=True), "length 5 ft -> 10 ft"),
        (FactChange("rating_a", 7.5, 10), "rating 7.5 A -> 10 A"),
        (FactChange("resistance_ohm", 0.0003, 0.0004), "resistance 0.0003 ohm -> 0.0004 ohm"),
        (FactChange("petrol_vapour", True, None), "petrol vapour yes -> no"),
        (FactChange("bilge_water", True, None), "bilge water yes -> not recorded"),
        (FactChange("bundled", None, False), "bundled yes -> no"),
        (FactChange("role", None, "cranking"), "role none -> cranking"),
        (FactChange("end", "BUS-N", "STUD"), "lands on BUS-N -> STUD"),
        (FactChange("interrupting_a", 6000, None), "interrupting 6000 A -> not recorded"),
        (
            FactChange("loads_a", ", ".join(f"P{n:02} 1" for n in range(20)),
                       ", ".join(f"P{n:02} 1" for n in range(1, 21))),
            "loads: without P00 1; with P20 1",
        ),
    ],
)  # fmt: skip
def test_a_fact_is_told_in_plain_words(fact: FactChange, words: str) -> None:
    assert fact_words(fact) == words


def test_a_figure_is_told_with_its_limit_and_of_which_part_where_that_is_another() -> None:
    change = FigureChange("voltage-drop-from-bank", "P11", drop(0.0255), drop(0.0337))
    assert figure_words(change, "P11") == "total drop 2.55 % -> 3.37 % of 3.00 %"
    assert figure_words(change, "way aft-cabin") == "total drop of P11 2.55 % -> 3.37 % of 3.00 %"
    moved = FigureChange("ampacity", "P11.out", Figures("current", 10, 40, "A"), Figures("current", 10, 30, "A"))
    assert figure_words(moved, "P11") == "current 10 A of 40 A -> 10 A of 30 A"
    assert figures_words(Figures("voltage", 10.5, 9, "V", at_least=True)) == "10.5 V at least 9 V"


def test_the_verdict_counts_hulls_and_new_errors_on_hulls_already_built() -> None:
    hulls = [a_hull("H-1", status="delivered"), a_hull("H-2"), a_hull("c", is_hull=False, status="design")]
    one = compared(side(study(), *hulls), side(study(finding()), *hulls), 0.1)
    assert verdict(one) == "2 hulls worse, 0 better, 0 unchanged; 1 new error, on 1 hull already built (H-1)"
    none = compared(side(study(), *hulls), side(study(), *hulls), 0.1)
    assert verdict(none) == "0 hulls worse, 0 better, 2 unchanged; 0 new errors"


def test_the_sections_stand_in_the_order_of_a_review() -> None:
    titles = [section.title for section in sections(hostile("plain"))]
    wanted = [
        "new errors", "new warnings and notes", "what says less now", "looked at no more",
        "headroom lost near the limit", "changed limits, apart from the boats", "what changed aboard",
        "hulls already built that the change reaches", "fixed", "moved, still there",
    ]  # fmt: skip
    assert titles == [title for title in wanted if title in titles]


# --- the lists of facts


def records() -> Iterator[Any]:
    for module in (hull, parts, landing):
        for record in vars(module).values():
            if isinstance(record, type) and is_dataclass(record):
                yield record


def test_yes_or_no_facts_are_listed_by_what_holds_where_they_are_not_written() -> None:
    unknown, true = set(), set()
    for record in records():
        told = {name: key for name, key, _ in told_attributes(record)}
        for one in fields(record):
            if one.name in told and str(one.type).startswith("bool"):
                prefix = "workmanship_" if record.__name__ == "Workmanship" else ""
                if "None" in str(one.type):
                    unknown.add(f"{prefix}{told[one.name]}")
                elif one.default is True:
                    true.add(told[one.name])
    assert true == set(TRUE_UNLESS_WRITTEN)
    of_other_records = {"sealed", "deck_between", "open_to_air"}  # of an isolation, which is told as one text
    assert (unknown | {"ac"}) - of_other_records == set(UNKNOWN_UNLESS_WRITTEN)


def test_every_fact_that_may_silence_exists() -> None:
    kinds = {
        "conductor": ["Conductor"], "circuit": ["Circuit"], "zone": ["Zone"], "way": ["Way"], "device": ["Device"],
        "condition": ["Condition"], "state": ["SwitchRow"], "engine": ["Engine"],
        "part": ["Battery", "Overcurrent", "Bus", "Metal", "Switch", "Diode", "Shunt", "Load", "Source", "Cable",
                 "Fittings"],
    }  # fmt: skip
    known = {record.__name__: {key for _, key, _ in told_attributes(record)} for record in records()}
    for kind, names in kinds.items():
        assert set(SAYS_LESS[kind]) <= {key for name in names for key in known[name]}, kind
    assert {says for rows in SAYS_LESS.values() for says in rows.values()} == set(Says)


def test_a_side_without_boats_has_nothing_to_tell() -> None:
    empty = Side(name="x", tool_version="1", subjects=(), studies={})
    assert compare_text(compared(empty, empty, 0.1)).startswith(
        "verdict: 0 hulls worse, 0 better, 0 unchanged; 0 new errors\n"
    )
