"""Hold the printed ladder: a device a line under the one above it, and every fact in words of the trade."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from typing import Any

import pytest

from checker.checks.catalogue import CHECKS
from checker.network.ladder import Rung
from checker.output.text import hull_report, ladder_lines
from tests.small_yard import SOUND, Yard, check_yard, the_hull

FACTS = re.compile(r" +\S+: ")
BRANCHES = {
    "P3 15 A": "PUMP",
    "P2 10 A": "LIGHTS",
    "P1 5 A": "PLOTTER",
    "P4 5 A": "BOW-LIGHT",
    "P5 5 A": "SENSOR",
}


def printed(yard: Yard) -> list[str]:
    """Return the lines of the ladder in the report of the hull."""
    lines = hull_report(the_hull(check_yard(yard)), {c.card.id: c.card for c in CHECKS}).splitlines()
    start = lines.index("protection, from each bank or source down")
    return lines[start + 1 : lines.index("", start)]


def test_ladder_of_the_small_yard_stands_device_under_device() -> None:
    """Two spaces a step, largest first; the start bank has no device."""
    heads = [line.split(" (")[0] for line in printed(SOUND) if not FACTS.match(line)]
    assert heads == [
        "  HOUSE",
        "    F-MAIN 150 A",
        "      F-PANEL 60 A",
        *(f"        {branch}" for branch in BRANCHES),
        "    F-ALT 80 A",
        "    F-CHARGER 30 A",
        "    F-SENSE 2 A",
        "    F-MONITOR 1 A",
    ]


def test_line_of_a_main_fuse_tells_part_currents_and_opening_time() -> None:
    """12.8 V behind 4 mohm and 150 mm of 2 AWG give 3.14 kA; the sources aboard add 80 A."""
    lines = printed(SOUND)
    at = next(number for number, line in enumerate(lines) if line.startswith("    F-MAIN"))
    assert lines[at : at + 2] == [
        "    F-MAIN 150 A (bolt-fuse); protects M2: 150 A of 225 A allowed",
        "      F-MAIN: 3220 A can flow, breaks 10000 A; short at F-PANEL.line draws 1584 A, opens within 0.046 s",
    ]


def test_branches_tell_what_they_serve_and_under_what_they_are_selective() -> None:
    """A panel's breakers, in order."""
    lines = printed(SOUND)
    heads = [number for number, line in enumerate(lines) if line.startswith("        P")]
    for at, load in zip(heads, BRANCHES.values(), strict=True):
        name, serves, protects = lines[at].split("; ")
        facts = lines[at + 1].split("; ")
        assert name.endswith(" (panel-breaker)")
        assert serves == f"serves {load}.load"
        assert protects.startswith(f"protects {load}.out: ")
        assert facts[0].endswith(": 1901 A can flow, breaks 5000 A")
        assert facts[-1] == "selective under F-PANEL in full"


def test_panel_fuse_with_nothing_beside_it_is_told_in_series_with_the_main_one() -> None:
    """One more branch on the positive bus ends that."""
    assert facts_under("F-PANEL 60 A", SOUND).endswith("; in series with F-MAIN")
    spare = "devices:\n  F-SPARE: {part: blade-fuse, zone: LOCKER, rating: 5 A, mount: {line: BUS-P}}\n"
    facts = facts_under("F-PANEL 60 A", SOUND.also(spare))
    assert "in series" not in facts
    assert "; selective under F-MAIN " in facts


def facts_under(head: str, yard: Yard) -> str:
    """Return the line of facts under a device."""
    lines = printed(yard)
    return next(lines[number + 1] for number, line in enumerate(lines) if head in line)


def test_change_of_one_branch_changes_its_line_alone() -> None:
    """A diff shows the line of the device that was touched."""
    before, after = printed(SOUND), printed(SOUND.edit("length: 16 ft 5 in", "length: 18 ft"))
    changed = [(old, new) for old, new in zip(before, after, strict=True) if old != new]
    assert [old.split(" draws ")[0] for old, _ in changed] == [new.split(" draws ")[0] for _, new in changed]
    assert [" short at BOW-LIGHT.load.pos draws " in old for old, _ in changed] == [True]


RUNG = Rung(
    depth=1, device="F1", above="HOUSE", rating_a=10.0, part="fuse", serves=(), prospective_a=1234.4,
    interrupting_a=5000.0, far_post="", far_a=0.0, opens_s=None, selective_up_to_a=None, behind_a=0.0, is_alone=False,
)  # fmt: skip


def facts_of(**facts: Any) -> list[str]:
    """Return the parts of a rung's line, its name and rating first."""
    lines = list(ladder_lines([replace(RUNG, **facts)]))[3:]
    return [part for line in lines for part in line.strip().removeprefix("F1: ").split("; ")]


@pytest.mark.parametrize(
    ("facts", "told"),
    [
        ({}, ["1234 A can flow, breaks 5000 A"]),
        ({"interrupting_a": None}, ["1234 A can flow, capacity not written"]),
        ({"prospective_a": 0.0}, []),
        ({"serves": ("A", "B")}, ["serves A, B", "1234 A can flow, breaks 5000 A"]),
    ],
)
def test_rung_tells_what_it_serves_and_can_break(facts: dict[str, Any], told: list[str]) -> None:
    """Without figures of the batteries no current is told."""
    assert facts_of(**facts) == ["F1 10 A (fuse)", *told]


@pytest.mark.parametrize(
    ("opens_s", "told"),
    [(None, "no band"), (math.inf, "may never open"), (0.25, "opens within 0.25 s")],
)
def test_rung_tells_when_it_opens_at_its_far_end(opens_s: float | None, told: str) -> None:
    """With the current that flows there."""
    assert facts_of(far_post="LAMP.pos", far_a=99.6, opens_s=opens_s)[-1] == f"short at LAMP.pos draws 100 A, {told}"


@pytest.mark.parametrize(
    ("facts", "told"),
    [
        ({"selective_up_to_a": 900.0, "behind_a": 900.0}, "selective under F0 in full"),
        ({"selective_up_to_a": 899.9, "behind_a": 900.0}, "selective under F0 up to 900 A of 900 A"),
        ({"selective_up_to_a": 0.0, "behind_a": 900.0}, "not selective under F0"),
        ({"selective_up_to_a": 900.0, "behind_a": 900.0, "is_alone": True}, "in series with F0"),
        ({"selective_up_to_a": None, "behind_a": 900.0}, "1234 A can flow, breaks 5000 A"),
    ],
)
def test_rung_tells_selectivity_in_full_in_part_or_not_asked(facts: dict[str, Any], told: str) -> None:
    """Nothing is told where it is not known."""
    assert facts_of(above="F0", depth=2, **facts)[-1] == told


def test_each_bank_is_headed_once() -> None:
    """Devices of one bank follow one another."""
    rungs = [
        replace(RUNG, device=name, above=above, depth=depth)
        for name, above, depth in [("A", "HOUSE", 1), ("B", "A", 2), ("C", "HOUSE", 1), ("D", "START", 1)]
    ]
    lines = [line.split(" (")[0] for line in ladder_lines(rungs) if not FACTS.match(line)]
    assert lines[2:] == ["  HOUSE", "    A 10 A", "      B 10 A", "    C 10 A", "  START", "    D 10 A"]


def test_short_opening_time_is_not_printed_as_none_at_all() -> None:
    """A breaker that opens within 5 ms does not open within 0 s."""
    assert "opens within 0 s" not in facts_under("        P1 ", SOUND)
