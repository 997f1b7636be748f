"""The pages of hulls and of the fleet: what stands on them, that data stay text, and that any reader can use them."""

from __future__ import annotations

import itertools
import os
import re
import subprocess
import sys
from contextlib import redirect_stderr, redirect_stdout
from functools import cache
from io import StringIO
from pathlib import Path

import pytest

from checker.cli import main
from checker.output.pages.drawings import OVERLAP
from checker.output.pages.html import LONG_WORD, bullets, page, table, tag
from checker.output.pages.style import css
from tests.output.html_page import Element, read
from tests.output.test_hostile_names import HULL as HOSTILE
from tests.output.test_hostile_names import SHOWN, _hostile_yard

ROOT = Path(__file__).resolve().parents[2]
EXAMPLE = ROOT / "fleet_example"
DAY = ["--today", "2026-12-01"]
HULLS = ("TND-031", "TND-034", "TND-035", "TND-036", "TND-038")
FLEET, HOSTILE_HULL, HOSTILE_FLEET = "fleet", "hostile hull", "hostile fleet"
PAGES = (*HULLS, FLEET, HOSTILE_HULL, HOSTILE_FLEET)
HAND_OVER = (*HULLS, HOSTILE_HULL)


@cache
def written(name: str) -> tuple[int, str, str]:
    """Write a page; return the exit status, what was printed on standard output, and the page."""
    import tempfile

    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "page.html"
        yard = _hostile_yard(Path(folder)) if name.startswith("hostile") else EXAMPLE
        hull = HOSTILE if name == HOSTILE_HULL else name
        words = ["fleet"] if name.endswith("fleet") else ["handover", hull]
        printed = StringIO()
        with redirect_stdout(printed), redirect_stderr(StringIO()):
            status = main([*words, str(yard), "--to", str(file), *DAY])
        return status, printed.getvalue(), file.read_bytes().decode("utf-8")


@cache
def opened(name: str) -> Element:
    return read(written(name)[2])


def table_of(name: str, anchor: str) -> dict[str, list[str]]:
    """Return the rows of a table by their first cell."""
    return {row[0]: row[1:] for row in opened(name).with_id(anchor).rows()}


def answer(name: str) -> str:
    (box,) = [one for one in opened(name).walk() if one.attributes.get("class") == "answer"]
    return box.text


# --- what stands on a hull's page


def test_the_tested_hull_is_ready_and_its_page_says_so_first() -> None:
    assert written("TND-031")[0] == 0
    assert answer("TND-031").splitlines() == ["READY for hand-over", "nothing is open", "not signed yet"]
    verdicts = {row[-1] for kind in ("fitted", "polarity", "drop", "charging", "function")
                for row in opened("TND-031").with_id(f"test-{kind}").rows()[1:]}  # fmt: skip
    assert verdicts == {"as expected"}


def test_a_hull_that_is_not_ready_says_why_and_ends_with_1() -> None:
    assert written("TND-035")[0] == 1
    assert "NOT READY for hand-over" in answer("TND-035")
    assert "1 open error" in answer("TND-035")
    headings = [one.text for one in opened("TND-035").with_id("findings").all("h4")]
    assert len(headings) == 1
    assert headings[0].startswith("error: W043 of M07: charge source CHG is joined to the bank's side of SH-1")


def test_an_accepted_finding_tells_role_day_reason_and_measure() -> None:
    rows = table_of("TND-034", "waivers")
    (waiver,) = [name for name in rows if name != "waiver"]
    what, role, until, reason, evidence = rows[waiver]
    assert what.startswith("error at P11: loses 0.405 V of 12 V")
    assert "3.37 % of 3.00 %" in what
    assert (role, until) == ("electrical lead and QA", "2028-05-29")
    assert reason.startswith("ampacity and protection unaffected")
    assert evidence == "commissioning sheet 034 line P11"


def test_measured_drops_stand_in_the_sheet_with_their_verdicts() -> None:
    rows = table_of("TND-038", "test-drop")
    assert rows["P10"][-1].startswith("FINDING (error): drops 0.31 V at 2.9 A")
    assert rows["P10"][-1].endswith("[measured-drop-above]")
    assert rows["P22"][-1].startswith("FINDING (warning): drops only 0.14 V at 17 A")
    assert (rows["P08"][-1], rows["P11"][-1]) == ("as expected", "not done")
    assert "192 steps of the test not done" in answer("TND-038")


def test_as_built_changes_are_told_with_reason_and_state() -> None:
    rows = table_of("TND-038", "changes")
    assert rows["DEV-038-1"][1:3] == ["stud space taken by the thruster fuse", "recorded"]
    assert rows["DEV-038-2"][2] == "open"


def test_devices_are_told_as_scheduled_and_as_fitted() -> None:
    ready, untested = table_of("TND-031", "protective"), table_of("TND-035", "protective")
    assert ready["F-H"][3:6] == ["400 A", "400 A", "as expected"]
    assert untested["F-H"][3:6] == ["400 A", "not read", "not done"]


def test_spare_fuses_are_counted_by_type_and_rating_with_their_positions() -> None:
    rows = [row for row in opened("TND-031").with_id("spare-fuses").rows() if row[0] == "block-fuse"]
    assert [(row[2], row[3], row[4]) for row in rows] == [
        ("2 A", "3", "24H-3, 24H-4, 24H-5"), ("5 A", "1", "24H-2"), ("7.5 A", "1", "24H-1"),
    ]  # fmt: skip


def test_what_stays_live_is_told_with_the_device_to_take_out_and_why() -> None:
    rows = table_of("TND-031", "live")
    assert rows["A01.load Bilge pump, main, automatic"] == ["HOUSE", "24H-1", "may stay live: bilge-pump"]
    assert rows["A05.load Audio memory"][-1] == "stays live: keeps the memory of the audio set"
    switches = table_of("TND-031", "switches")
    assert switches["SW-P emergency parallel"][-1] == "nothing: it is open in use"
    assert "P10.load Radar" in switches["SW-H house battery switch"][-1]
    sources = table_of("TND-031", "sources")
    assert sources["ALT.B"][-1] == "still reaches HOUSE"
    assert sources["PV1.pos"][-1] == "reaches no bank"


def test_standby_days_are_told_for_each_bank() -> None:
    assert table_of("TND-031", "standby-days")["HOUSE"] == ["440 Ah", "0.54 A", "16.98 days", "10 days"]


def test_the_limit_sets_are_told_with_edition_and_why() -> None:
    assert table_of("TND-031", "sets")["voluntary-dc"][1:3] == ["2008 numbering, second hand", "adopted by the yard"]


def test_every_conductor_device_and_rung_is_on_the_page() -> None:
    from tests.output.example import example

    subject = next(s for s in example().subjects if s.id == "TND-031")
    ladder = [row[0] for row in opened("TND-031").with_id("rungs").rows()]
    assert [name for name in ladder if not name.startswith(("device", "from "))] == [r.device for r in subject.ladder]
    wires = set(table_of("TND-031", "wire-list"))
    assert len(wires) == 153
    assert {"P10.out", "W011", "W201"} < wires


def test_the_drawing_is_there_once_and_printed_in_windows_that_overlap() -> None:
    section = opened("TND-031").with_id("one-line")
    (whole,) = [one for one in section.all("svg") if one.attributes.get("id") == "one-line-picture"]
    windows = [one for one in section.all("svg") if one is not whole]
    assert [one.attributes["href"] for one in section.all("use")] == ["#one-line-picture"] * 2
    (left, _, across, high), (start, _, rest, _) = (
        [float(word) for word in one.attributes["viewbox"].split()] for one in windows
    )
    assert (left, across - start) == (0, OVERLAP)
    assert [start + rest, high] == [float(word) for word in whole.attributes["viewbox"].split()[2:]]


def test_plots_are_those_of_the_circuits_that_lose_most() -> None:
    names = [one.attributes["aria-label"] for one in opened("TND-031").with_id("plots").all("svg")]
    assert next(name for name in names if name.startswith("Voltage")) == "Voltage along P10 on TND-031"
    assert len(names) == 6


@pytest.mark.parametrize("name", HAND_OVER)
def test_every_page_of_a_hull_has_the_cautions(name: str) -> None:
    text = opened(name).text
    for words in ("Local codes, the licensed edition of each standard and licensed practice govern",
                  "thousands of amperes", "It certifies nothing"):  # fmt: skip
        assert words in text


# --- the fleet


def test_the_fleet_is_told_alike_as_text_and_as_a_page() -> None:
    status, text, _ = written(FLEET)
    assert status == 1
    assert "ready: 1 of 8 hulls (TND-031)" in text.splitlines()
    assert "Ready for hand-over: 1 of 8 hulls (TND-031)" in answer(FLEET)
    delivered = table_of(FLEET, "hulls-delivered")
    assert delivered["TND-031"][1] == "READY; not signed yet"
    assert delivered["TND-034"][-1].startswith("voltage-drop-from-bank at P11, voluntary-dc: 3.37 % of 3.00 %")
    lines = text.splitlines()
    place = lines.index("  TND-031 (tindral-36, no options): READY; not signed yet")
    assert lines[place + 1] == f"    smallest headroom: {delivered['TND-031'][-1]}"
    assert table_of(FLEET, "open-findings")["ignition-protection"][-1] == "6 places on 1 hull (TND-038)"
    assert "  error ignition-protection: 6 places on 1 hull (TND-038)" in lines


# --- any page, for any reader


@pytest.mark.parametrize("name", PAGES)
def test_nothing_is_loaded_or_run(name: str) -> None:
    html = opened(name)
    assert (
        html.all("script", "link", "img", "iframe", "object", "embed", "form", "base", "image", "foreignobject") == []
    )
    style = html.all("style")[0].text
    assert "url(" not in style
    assert "@import" not in style
    for one in html.walk():
        assert [key for key in one.attributes if key.startswith("on") or key in ("src", "style", "xlink:href")] == []
        assert one.attributes.get("href", "#").startswith("#")
        assert [key for key, value in one.attributes.items() if "://" in value and not key.startswith("aria-")] == []
    assert "default-src 'none'" in html.all("meta")[1].attributes["content"]


@pytest.mark.parametrize("name", PAGES)
def test_every_link_leads_to_a_place_on_the_page(name: str) -> None:
    ids = [one.attributes["id"] for one in opened(name).walk() if "id" in one.attributes]
    assert len(ids) == len(set(ids))
    named = [
        one.attributes[key] for one in opened(name).walk() for key in ("aria-labelledby",) if key in one.attributes
    ]
    assert {one.attributes["href"][1:] for one in opened(name).all("a", "use")} | set(named) <= set(ids)


@pytest.mark.parametrize("name", PAGES)
def test_headings_stand_in_order_under_one_first(name: str) -> None:
    levels = [int(one.tag[1]) for one in opened(name).all("h1", "h2", "h3", "h4", "h5", "h6")]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert [pair for pair in itertools.pairwise(levels) if pair[1] > pair[0] + 1] == []


@pytest.mark.parametrize("name", PAGES)
def test_every_table_has_a_caption_and_cells_that_head_columns_and_rows(name: str) -> None:
    tables = opened(name).all("table")
    assert tables
    for one in tables:
        assert one.children[0].tag == "caption"
        assert one.children[0].text.strip()
        (head,) = one.all("thead")
        columns = head.all("th")
        assert {cell.attributes["scope"] for cell in columns} == {"col"}
        assert all(cell.text.strip() for cell in columns)
        for row in (row for body in one.all("tbody") for row in body.all("tr")):
            first = row.children[0]
            assert first.tag == "th"
            if first.attributes["scope"] == "rowgroup":
                assert int(first.attributes["colspan"]) == len(columns)
                continue
            assert first.attributes["scope"] == "row"
            assert len(row.children) == len(columns)
            assert {cell.tag for cell in row.children[1:]} == {"td"}


@pytest.mark.parametrize("name", PAGES)
def test_what_scrolls_can_be_reached_and_is_named(name: str) -> None:
    for one in opened(name).walk():
        classes = one.attributes.get("class", "").split()
        if "frame" in classes or "drawing" in classes:
            assert one.attributes["tabindex"] == "0"
            assert one.attributes["role"] == "group"
            assert "aria-labelledby" in one.attributes or one.attributes["aria-label"].strip()
    assert opened(name).attributes["lang"] == "en"
    assert len(opened(name).all("main")) == 1
    body = opened(name).children[1]
    assert body.children[0].attributes["href"] == "#contents"
    pictures = [one for one in opened(name).all("svg") if "aria-hidden" not in one.attributes]
    assert [one for one in pictures if not one.attributes.get("aria-label") or not one.all("title")] == []


def test_all_colours_can_be_read_on_all_grounds() -> None:
    """WCAG 2.1, 1.4.3: at least 4.5 to 1."""
    style = css("")
    inks = set(re.findall(r"(?<![-\w])color: (#[0-9a-f]{6})", style))
    grounds = set(re.findall(r"background: (#[0-9a-f]{6})", style))
    assert inks >= {"#000000"}
    assert "#ffffff" in grounds
    assert len(inks) >= 3
    assert re.findall(r"(?<![-\w])color: (?!#|inherit)", style) == []
    assert min(_contrast(ink, ground) for ink in inks for ground in grounds) >= 4.5


def _contrast(first: str, second: str) -> float:
    lighter, darker = sorted((_luminance(first), _luminance(second)), reverse=True)
    return (lighter + 0.05) / (darker + 0.05)


def _luminance(colour: str) -> float:
    parts = (int(colour[place : place + 2], 16) / 255 for place in (1, 3, 5))
    linear = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def test_the_contrast_of_black_on_white_is_21_to_1() -> None:
    assert _contrast("#000000", "#ffffff") == pytest.approx(21)


# --- data are text


OURS = {
    "html", "head", "meta", "title", "style", "body", "a", "header", "h1", "h2", "h3", "h4", "p", "strong", "div", "ul",
    "ol", "li", "nav", "main", "section", "dl", "dt", "dd", "table", "caption", "thead", "tbody", "tr", "th", "td",
    "span", "article", "figure", "footer", "svg", "desc", "g", "rect", "circle", "polyline", "polygon", "text", "use",
}  # fmt: skip


@pytest.mark.parametrize("name", PAGES)
def test_no_element_attribute_or_sign_that_cannot_be_seen_comes_out_of_data(name: str) -> None:
    page_text = written(name)[2]
    assert {one.tag for one in opened(name).walk()} <= OURS
    plain = {key for one in opened("TND-031").walk() for key in one.attributes}
    assert {key for one in opened(name).walk() for key in one.attributes} <= plain | {"stroke", "fill"}
    assert [line for line in page_text.split("\n") if not line.isprintable()] == []


@pytest.mark.parametrize("name", [HOSTILE_HULL, HOSTILE_FLEET])
def test_hostile_text_is_shown_as_it_is_written(name: str) -> None:
    html = opened(name)
    assert SHOWN in html.text
    assert "<script>pwned</script>" in html.text
    assert html.all("title")[0].text.strip() in html.all("h1")[0].text
    style = html.all("style")[0].text
    assert "pwned</" not in style
    assert style.count("{") == style.count("}") == opened("TND-031").all("style")[0].text.count("{")
    assert re.findall(r'content: "([^"]*)"', style)[0].isascii()


def test_the_hostile_hull_has_the_structure_of_the_plain_one() -> None:
    import tempfile

    with tempfile.TemporaryDirectory() as folder, redirect_stdout(StringIO()), redirect_stderr(StringIO()):
        file = Path(folder) / "plain.html"
        main(["handover", HOSTILE, str(EXAMPLE), "--to", str(file), *DAY])
        plain = read(file.read_bytes().decode("utf-8"))
    for anchor in ("wire-list", "landing-list", "rungs", "protective", "test-polarity", "switches", "circuit-table"):
        shapes = [[[cell.tag for cell in row.children] for row in html.with_id(anchor).all("tr")]
                  for html in (plain, opened(HOSTILE_HULL))]  # fmt: skip
        assert shapes[0] == shapes[1]


def test_a_long_word_may_break_and_a_short_one_stays_whole() -> None:
    long = "x" * LONG_WORD
    one = read(page("t", "", table("a", "caption", ("first", "second"), [("P10", f"{long[1:]} {long}")])))
    head, cell = one.all("tr")[1].children
    assert head.attributes["class"] == "word"
    assert [span.text for span in cell.all("span")] == [long]
    assert cell.text == f"{long[1:]} {long}"


def test_a_string_is_never_markup() -> None:
    one = tag("p", "<b>&amp;\x07", tag("b", '"quoted"'), title='a"b<c>')
    assert one.text == ('<p title="a&quot;b&lt;c&gt;">&lt;b&gt;&amp;amp;\\u0007<b>&quot;quoted&quot;</b></p>\n')
    assert bullets(["<li>"]).text == "<ul><li>&lt;li&gt;</li>\n</ul>\n"


# --- the command


def test_same_bytes_under_any_seed_locale_and_folder(tmp_path: Path) -> None:
    pages: list[tuple[bytes, bytes, bytes]] = []
    for seed, locale in (("1", "C"), ("2", "C.UTF-8")):
        folder = tmp_path / seed
        folder.mkdir()
        environment = {**os.environ, "PYTHONHASHSEED": seed, "LC_ALL": locale, "PYTHONPATH": str(ROOT)}
        for words in (["handover", "TND-038", str(EXAMPLE)], ["fleet", str(EXAMPLE), "--workers", seed]):
            done = subprocess.run(
                [sys.executable, "-m", "checker", *words, "--to", f"{words[0]}.html", *DAY],
                cwd=folder, env=environment, capture_output=True, check=False,
            )  # fmt: skip
            assert done.returncode == 1
        pages.append(((folder / "handover.html").read_bytes(), (folder / "fleet.html").read_bytes(), done.stdout))
    assert pages[0] == pages[1]
    assert pages[0][0].decode() == written("TND-038")[2]
    assert str(ROOT) not in written("TND-038")[2]


@pytest.mark.parametrize("words", [["handover", "TND-031"], ["fleet"]])
def test_a_file_that_cannot_be_written_ends_with_2(words: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    assert main([*words, str(EXAMPLE), "--to", "no/such/folder/page.html", *DAY]) == 2
    assert (
        capsys.readouterr().err == "fairloom: no/such/folder/page.html cannot be written: No such file or directory\n"
    )


def test_a_hull_that_is_not_there_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["handover", "TND-013", str(EXAMPLE), "--to", str(tmp_path / "p.html"), *DAY]) == 2
    assert "there is no hull TND-013" in capsys.readouterr().err
    assert list(tmp_path.iterdir()) == []
