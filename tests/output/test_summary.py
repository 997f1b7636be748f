"""The Markdown summary: read by a CommonMark parser, within its budget, with nothing of a yard's text as markup."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterator, Mapping
from pathlib import Path

import pytest
from markdown_it import MarkdownIt
from markdown_it.token import Token

from checker.finding import Verdict
from checker.output.alerts import alerts
from checker.output.markdown import BUDGET, JOINER, plain
from checker.output.summary import summary_report
from checker.pipeline import all_cards
from checker.result.model import FleetResult
from tests.dory_yard import DORY, HULL, checked, edited
from tests.output.example import example

CARDS = {card.id: card for card in all_cards()}
PARSER = MarkdownIt("commonmark").enable(["table", "strikethrough"])
DESIGN = "classes/dory-14/class.yaml"
OURS = {"heading", "paragraph", "table", "thead", "tbody", "tr", "th", "td", "bullet_list", "list_item", "strong"}
HTML = ["<details>\n<summary>Every hull and option set</summary>\n", "</details>\n"]


def tokens(text: str) -> Iterator[Token]:
    """Yield every token of a page, also those inside lines."""
    for token in PARSER.parse(text):
        yield token
        yield from token.children or ()


def kinds(text: str) -> set[str]:
    """Return the kinds of markup in a page."""
    return {token.type.removesuffix("_open").removesuffix("_close") for token in tokens(text)} - {"inline", "text"}


def rows(text: str) -> list[list[str]]:
    """Return the rows of all tables, as the text that is shown in their cells."""
    found: list[list[str]] = []
    parsed = PARSER.parse(text)
    for token, inside in zip(parsed, [*parsed[1:], None], strict=True):
        if token.type == "tr_open":
            found.append([])
        elif token.type in ("td_open", "th_open"):
            assert inside is not None
            found[-1].append("".join(child.content for child in inside.children or ()).replace(JOINER, ""))
    return found


def page(result: FleetResult, prefix: str = "", budget: int = BUDGET) -> str:
    return summary_report(result, CARDS, prefix, budget)


def test_the_example_reads_as_tables_of_open_and_accepted_findings() -> None:
    text = page(example(), "fleet_example")
    assert text.startswith("## Wiring check: 3 hulls of 8 have open errors (TND-035, TND-037, TND-038)\n")
    found = rows(text)
    assert found[0] == ["level", "fault", "on", "at", "remedy"]
    assert [
        "error", "PNL-29 of P30: 30 A stands ahead of wash, whose maker allows 15 A; 30 A of 15 A, headroom -100.0 % (maker-device)",
        "TND-037", "fleet_example/hulls/tnd-037.yaml:21:24", "fit 15 A or less",
    ] in found  # fmt: skip
    assert len(found) == 1 + 13 + 1 + 1
    assert found[-1][1:4] == ["TND-034", "electrical lead and QA", "2028-05-29"]
    assert "- hull TND-031 (delivered, no options)" in text


def test_what_was_not_assessed_has_a_table_with_the_field_to_fill_in(tmp_path: Path) -> None:
    result = checked(tmp_path, DORY)
    found = rows(page(result))
    assert found.index(["place", "on", "at", "fill in"]) > 0
    assert len([row for row in found if row[0].endswith("(ampacity)") and row[3]]) == 3
    assert f"### Not assessed: {len(alerts(result, Verdict.NOT_ASSESSED))}" in page(result)


def test_the_only_markup_is_ours(tmp_path: Path) -> None:
    assert kinds(page(example())) <= OURS | {"html_block"}
    assert [token.content for token in tokens(page(example())) if "html" in token.type] == HTML


NASTY = [
    "::error::pwned", "a|b", "`tick`", "```", "<script>alert(1)</script>", "<b>", "&lt;b&gt;", "&amp;", "[x](https://e.test)",
    "![x](https://e.test)", "<https://e.test>", "https://e.test", "www.e.test", "a@e.test", "@someone", "#12", "*em*",
    "**strong**", "_em_", "~~gone~~", "# head", "- item", "1. item", "> quote", "---", "\\", "\\|", "a \\| b", "[^1]", ":rocket:",
    "$x$", "{% x %}", "<!-- c -->", "</details>", "| --- |", "x  ", "\x1b[31m", "a\nb", "\u202eabc", "<a\tb>", "!", "[ ]",
]  # fmt: skip


@pytest.mark.parametrize("nasty", NASTY)
def test_any_text_stays_text_in_a_cell_a_list_and_a_heading(nasty: str) -> None:
    from checker.reading.words import flat

    shown = flat(nasty).strip()
    text = f"# at {plain(nasty)}\n\n| a | b |\n| --- | --- |\n| {plain(nasty)} | end |\n\n- hull {plain(nasty)}\n"
    assert kinds(text) == {
        "heading",
        "table",
        "thead",
        "tbody",
        "tr",
        "th",
        "td",
        "bullet_list",
        "list_item",
        "paragraph",
    }
    assert rows(text) == [["a", "b"], [shown, "end"]]
    lines = ["".join(c.content for c in token.children or ()) for token in PARSER.parse(text) if token.type == "inline"]
    assert [line.replace(JOINER, "") for line in lines] == [f"at {shown}", "a", "b", shown, "end", f"hull {shown}"]


@pytest.mark.parametrize("linking", ["@someone", "a@e.test", "#12", "https://e.test", "http://e.test", "WWW.e.test"])
def test_nothing_that_a_forge_would_link_stands_in_the_shown_text(linking: str) -> None:
    """A forge looks for mentions, issues and addresses in the text, when the Markdown has been read."""
    (line,) = [token for token in PARSER.parse(f"on {plain(linking)}") if token.type == "inline"]
    shown = "".join(child.content for child in line.children or ())
    assert linking not in shown
    assert shown.replace(JOINER, "") == f"on {linking}"


def test_hostile_text_from_the_yard_stays_in_its_cell(tmp_path: Path) -> None:
    nasty = "9 A | <script>x</script> `y` [z](https://e.test) @me #1 \\\\| *a*"
    files = edited(DESIGN, "C1: {name: Bow lamp", f'C1: {{legend: "{nasty}", name: Bow lamp')
    text = page(checked(tmp_path, files))
    (row,) = [row for row in rows(text) if "legend-rating" in row[1]]
    assert len(row) == 5
    assert nasty.replace("\\\\", "\\") in row[1]
    assert kinds(text) <= OURS | {"html_block"}


# --- the budget


def hulls(number: int) -> Mapping[str, str]:
    return {
        **DORY,
        **{f"hulls/h{n:03d}.yaml": HULL.replace("DORY-1", f"DORY-{n}") + f"x{n}: 1\n" for n in range(2, number)},
    }


@pytest.mark.parametrize("budget", [6_000, 8_000, 11_000, 15_000, 20_000, 40_000])
def test_a_page_keeps_its_budget_is_cut_between_rows_and_says_what_is_left_out(tmp_path: Path, budget: int) -> None:
    result = checked(tmp_path, hulls(40))
    whole, text = page(result), page(result, budget=budget)
    assert len(whole.encode()) > 20_000
    assert len(text.encode()) <= budget
    assert [row for row in rows(text) if row not in rows(whole)] == []
    assert Counter(t.content for t in tokens(text) if "html" in t.type) == Counter(HTML)
    assert kinds(text) <= OURS | {"html_block"}
    if len(whole.encode()) > budget:
        assert "**Left out here: " in text
    assert text.rstrip().endswith("batteries are for qualified people.")


def test_the_number_of_rows_left_out_is_right(tmp_path: Path) -> None:
    result = checked(tmp_path, hulls(60))
    text = page(result, budget=7_000)
    left = [int(number) for number in re.findall(r"\*\*Left out here: (\d+)", text)]
    kept = len([row for row in rows(text) if row[0] in ("error", "warning", "note")])
    assert left[0] + kept == len(alerts(result, Verdict.FINDING))


def test_a_very_long_text_is_cut_in_its_cell(tmp_path: Path) -> None:
    files = edited(DESIGN, "C1: {name: Bow lamp", f'C1: {{legend: "9 A {"x" * 5000}", name: Bow lamp')
    found = [row for row in rows(page(checked(tmp_path, files))) if "PNL-01 of C1: legend" in row[1]]
    assert found
    assert all(len(row[1]) == 400 and re.search(r"x… \(legend-[a-z]+\)$", row[1]) for row in found)
