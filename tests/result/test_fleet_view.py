"""A fleet as a whole: hulls by status, where each is tightest, what is open how often, and what built hulls must get."""

from __future__ import annotations

import datetime
from pathlib import Path

from checker.finding import NOWHERE, Level, Measure, Outcome, Verdict
from checker.output.fleet_text import fleet_text
from checker.output.pages.fleet import fleet_page
from checker.pipeline import all_cards, check_fleet
from checker.result.fleet_view import FleetView, fleet_view, smallest_headroom
from tests.dory_yard import DORY, HULL, edited, write
from tests.output.html_page import read

CARDS = {card.id: card for card in all_cards()}
DELIVERED = HULL.replace("planned", "delivered")
BEHIND = DELIVERED.replace("DORY-1", "DORY-2").replace("revision: 2", "revision: 1")


def view(folder: Path, files: dict[str, str]) -> FleetView:
    return fleet_view(check_fleet(write(folder, files), today=datetime.date(2026, 12, 1), plans_tests=True), CARDS)


def outcome(part: str, value: float, limit: float = 10.0, **more: bool) -> Outcome:
    return Outcome(verdict=Verdict.PASSED, check="c", level=Level.ERROR, part=part, at=NOWHERE,
                   measure=Measure("q", value, limit, "A", **more))  # fmt: skip


def test_the_smallest_headroom_is_that_of_a_figure_and_of_no_size_of_a_row() -> None:
    near, far, stepped = outcome("P9", 9.0), outcome("P1", 5.0), outcome("P2", 10.0, is_stepped=True)
    assert smallest_headroom([far, stepped, near]) == near
    assert smallest_headroom([far, stepped, near, outcome("P3", 12.0)]) == outcome("P3", 12.0)
    assert smallest_headroom([stepped, outcome("P4", 1.0, limit=0.0)]) is None


def test_of_equal_headrooms_the_first_part_is_told() -> None:
    assert smallest_headroom([outcome("P10", 9.0), outcome("P9", 9.0)]) == outcome("P9", 9.0)


def test_hulls_stand_by_status_in_the_order_of_a_boats_life(tmp_path: Path) -> None:
    found = view(tmp_path, {**DORY, "hulls/dory-2.yaml": BEHIND})
    assert [(status, [hull.subject.id for hull in hulls]) for status, hulls in found.by_status] == [
        ("planned", ["DORY-1"]), ("delivered", ["DORY-2"]),
    ]  # fmt: skip
    assert all(hull.gate is not None for hull in found.hulls)


def test_a_built_hull_behind_its_class_is_on_the_retrofit_list_and_a_planned_one_is_not(tmp_path: Path) -> None:
    planned = BEHIND.replace("DORY-2", "DORY-3").replace("delivered", "planned")
    found = view(tmp_path, {**DORY, "hulls/dory-2.yaml": BEHIND, "hulls/dory-3.yaml": planned})
    assert [(one.hull, [o.check for o in one.behind]) for one in found.retrofit] == [("DORY-2", ["class-revision"])]


def test_an_open_finding_that_stands_in_a_file_of_the_class_is_on_the_retrofit_list(tmp_path: Path) -> None:
    wrong = edited("classes/dory-14/class.yaml", "size: 6 AWG, length: 0.3 m}\n  W3", "size: 18 AWG, length: 0.3 m}\n  W3",
                   {**DORY, "hulls/dory-1.yaml": DELIVERED})  # fmt: skip
    (one,) = view(tmp_path, wrong).retrofit
    assert one.hull == "DORY-1"
    assert "W2" in {o.part for o in one.from_class}
    assert {o.at.file for o in one.from_class} <= {"classes/dory-14/class.yaml", "parts/all.yaml"}


def test_an_open_finding_of_the_hulls_own_file_is_not_on_the_retrofit_list(tmp_path: Path) -> None:
    own = DELIVERED + "changes: {D: {what: thin, set: {conductors: {W2: {size: 18 AWG}}}}}\n"
    (before,) = view(tmp_path / "a", {**DORY, "hulls/dory-1.yaml": DELIVERED}).retrofit or (None,)
    found = view(tmp_path / "b", {**DORY, "hulls/dory-1.yaml": own})
    (hull,) = found.hulls
    assert ("W2", "hulls/dory-1.yaml") in {(o.part, o.at.file) for o in hull.subject.news}
    parts = {o.part for one in found.retrofit for o in one.from_class}
    assert "W2" not in parts - {o.part for o in (before.from_class if before else ())}


def test_a_check_is_counted_by_places_hulls_and_option_sets(tmp_path: Path) -> None:
    wrong = edited("classes/dory-14/class.yaml", "size: 6 AWG, length: 0.3 m}\n  W3", "size: 18 AWG, length: 0.3 m}\n  W3",
                   {**DORY, "hulls/dory-2.yaml": HULL.replace("DORY-1", "DORY-2")})  # fmt: skip
    (one,) = [check for check in view(tmp_path, wrong).checks if check.check == "minimum-size"]
    assert (one.hulls, one.level) == (("DORY-1", "DORY-2"), Level.ERROR)
    assert one.places == 1
    assert one.option_sets == ("dory-14", "dory-14 + OPT-LAMP")


def test_what_could_not_be_studied_is_told_in_the_text_and_on_the_page(tmp_path: Path) -> None:
    found = view(tmp_path, {**DORY, "hulls/dory-2.yaml": HULL.replace("DORY-1", "DORY-2") + "colour: red\n"})
    text, page = fleet_text(found), read(fleet_page(found))
    assert "NOT STUDIED: hull DORY-2" in text
    assert "hull DORY-2" in page.with_id("not-studied").text
    assert "hulls/dory-2.yaml" in page.with_id("files").text
    assert "ready: 0 of 1 hull" in text


def test_a_fleet_without_hulls_is_a_page_too(tmp_path: Path) -> None:
    found = view(tmp_path, {name: text for name, text in DORY.items() if not name.startswith("hulls/")})
    assert "ready: 0 of 0 hulls" in fleet_text(found)
    assert "No hull was studied." in read(fleet_page(found)).with_id("hulls").text
