"""Seed faults of support spacing: judged only where a limit set has the rule."""

from __future__ import annotations

import pytest

from checker.finding import Outcome, Verdict
from tests.metric_yard import METRIC
from tests.small_yard import SOUND, Yard, check_yard, the_hull

D1 = "D1: {from: F-PANEL.load, to: PANEL, size: 6 AWG, length: 1.5 m"


def spacings(yard: Yard, verdict: Verdict = Verdict.FINDING) -> list[Outcome]:
    hull = the_hull(check_yard(yard))
    return [o for o in hull.outcomes if o.check == "support-spacing" and o.verdict is verdict]


def supported(spacing: str, line: str = D1) -> Yard:
    return METRIC.edit(line, f"{line}, supports: {spacing}")


@pytest.mark.parametrize(("spacing", "parts"), [("440 mm", []), ("450 mm", []), ("0.45 m", []), ("451 mm", ["D1"])])
def test_supports_of_a_single_conductor_stand_450_mm_apart_at_most(spacing: str, parts: list[str]) -> None:
    assert [o.part for o in spacings(supported(spacing))] == parts


def test_a_finding_names_the_spacing_the_kind_and_the_remedy_at_the_line() -> None:
    yard = supported("0.6 m")
    (outcome,) = spacings(yard)
    assert outcome.fault == "its supports stand 0.600 m (23.6 in) apart; it is a single conductor"
    assert outcome.remedy == "support it at least every 0.450 m (17.7 in), or lay it in a conduit"
    assert yard.line(outcome.at.file, outcome.at.line).startswith("D1:")


@pytest.mark.parametrize(("spacing", "parts"), [("300 mm", []), ("301 mm", ["PLOTTER.back", "PLOTTER.out"])])
def test_supports_of_a_sheathed_cable_stand_300_mm_apart_at_most(spacing: str, parts: list[str]) -> None:
    plotter = "    load: plotter\n"
    yard = METRIC.edit(plotter, f"{plotter}    supports: {spacing}\n")
    assert sorted(o.part for o in spacings(yard)) == parts


@pytest.mark.parametrize(
    "line",
    ["M4: {from: BAT-H.neg, to: SHUNT.bat, size: 2 AWG, length: 0.3 m", "S1: {from: BAT-S.pos, to: SW-S.in, size: 2/0 AWG, length: 0.4 m"],
)  # fmt: skip
def test_a_conductor_on_a_battery_is_held_to_300_mm(line: str) -> None:
    length = line.rpartition("length: ")[2]
    yard = METRIC.edit(line, f"{line.replace(length, '0.4 m')}, supports: 310 mm")
    assert [(o.part, "a battery conductor" in o.fault) for o in spacings(yard)] == [(line[:2], True)]
    assert spacings(METRIC.edit(line, f"{line.replace(length, '0.3 m')}, supports: 310 mm")) == []


def test_the_widest_way_of_a_conductor_counts_and_a_conduit_supports_all_along() -> None:
    wide = METRIC.edit(
        "cabin-way: {zone: CABIN, length: 2 m, lay: single",
        "cabin-way: {zone: CABIN, length: 2 m, lay: single, supports: 0.4 m",
    )
    assert {o.part.partition(".")[0] for o in spacings(wide)} == {"PLOTTER", "LIGHTS", "PUMP"}
    assert {wide.line(o.at.file, o.at.line).partition(":")[0] for o in spacings(wide)} == {"cabin-way"}
    pipe = METRIC.edit(
        "cabin-way: {zone: CABIN, length: 2 m, lay: single",
        "cabin-way: {zone: CABIN, length: 2 m, lay: single, kind: conduit, supports: 0.4 m",
    )
    assert spacings(pipe) == []


def test_spacing_that_nobody_recorded_is_asked_for_once() -> None:
    yard = METRIC.edit("  supports: 300 mm\n", "")
    assert spacings(yard) == []
    (outcome,) = spacings(yard, Verdict.NOT_ASSESSED)
    assert outcome.missing == "supports in workmanship, e.g. 300 mm"
    assert yard.line(outcome.at.file, outcome.at.line) == "workmanship:"
    assert "and" in outcome.fault and "more" in outcome.fault


def test_a_set_without_the_rule_looks_at_no_supports() -> None:
    yard = SOUND.edit("  supports: 300 mm\n", "  supports: 2 m\n")
    assert [o for verdict in Verdict for o in spacings(yard, verdict)] == []
