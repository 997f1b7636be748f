"""Workflow commands: the worst first, no more than are shown, and nothing of the yard's text becomes one."""

from __future__ import annotations

from collections import Counter
from pathlib import Path

import pytest

from checker.finding import Level, Verdict
from checker.output.alerts import alerts
from checker.output.annotations import MOST_OF_A_KIND, annotation_commands, without_commands
from checker.pipeline import all_cards
from checker.result.model import FleetResult
from tests.dory_yard import DORY, checked, edited
from tests.output.example import example
from tests.output.workflow_commands import Command, commands

CARDS = {card.id: card for card in all_cards()}
DESIGN = "classes/dory-14/class.yaml"


def read(result: FleetResult, prefix: str = "") -> list[Command]:
    return list(commands(annotation_commands(result, CARDS, prefix)))


def many(folder: Path, errors: int) -> FleetResult:
    """Return the result of a yard with many hulls' files at fault."""
    return checked(folder, {**DORY, **{f"hulls/x{n:02d}.yaml": "hull: 7\n" for n in range(errors)}})


def test_each_finding_of_the_example_is_a_command_at_its_line_with_value_limit_and_remedy() -> None:
    found = read(example(), "fleet_example")
    assert Counter(command.word for command in found) == {"error": 9, "warning": 3, "notice": 1}
    (one,) = [
        command for command in found if "hulls/tnd-037.yaml" in command.properties["file"] and command.word == "error"
    ]
    assert one.properties == {
        "file": "fleet_example/hulls/tnd-037.yaml", "line": "21", "endLine": "21", "col": "24",
        "title": "maker-device on TND-037",
    }  # fmt: skip
    assert one.message.splitlines() == [
        "PNL-29 of P30: 30 A stands ahead of wash, whose maker allows 15 A",
        "measured: 30 A of 15 A, headroom -100.0 %",
        "remedy: fit 15 A or less",
    ]


def test_the_commands_come_worst_first() -> None:
    ranks = [("error", "warning", "notice").index(command.word) for command in read(example())]
    assert ranks == sorted(ranks)


@pytest.mark.parametrize("errors", [4, 30])
def test_no_more_of_a_kind_than_are_shown_and_the_rest_is_counted(tmp_path: Path, errors: int) -> None:
    result = many(tmp_path, errors)
    by_level = Counter(alert.level for alert in alerts(result, Verdict.FINDING))
    found = read(result)
    words = Counter(command.word for command in found)
    assert words["error"] == min(MOST_OF_A_KIND, by_level[Level.ERROR])
    assert all(number <= MOST_OF_A_KIND for number in words.values())
    more = by_level[Level.ERROR] - words["error"]
    last = found[-1]
    assert last.word == "notice"
    assert (f"{more} more errors" in last.message) == (more > 0)
    assert f"{len(alerts(result, Verdict.NOT_ASSESSED))} places not assessed" in last.message
    assert last.message.endswith("the printed text and the reports tell them all")


def test_with_nothing_left_out_there_is_no_last_notice() -> None:
    assert not any("not shown here" in command.message for command in read(example()))


def test_the_last_notice_has_room_among_the_notices(tmp_path: Path) -> None:
    result = many(tmp_path, 30)
    assert sum(command.word == "notice" for command in read(result)) <= MOST_OF_A_KIND


NASTY = "9 A %0A::error::pwned ::stop-commands::x ##[error]pwned, file=a:b :: %25 @a"


def test_signs_with_a_meaning_in_a_command_stay_text(tmp_path: Path) -> None:
    files = edited(DESIGN, "C1: {name: Bow lamp", f'C1: {{legend: "{NASTY}", name: Bow lamp')
    found = read(checked(tmp_path, files), "our, boats: 100%")
    (one,) = [command for command in found if "legend-rating" in command.properties["title"]]
    assert one.properties["file"] == f"our, boats: 100%/{DESIGN}"
    assert f"legend “{NASTY}” says 9 A" in one.message
    assert {command.word for command in found} <= {"error", "warning", "notice"}
    assert all("pwned" not in command.message.partition("“")[0] for command in found)


def test_the_reader_of_these_tests_would_notice_a_command_in_a_text() -> None:
    assert [c.message for c in commands("x\n  ::error::a\nsay ##[warning]b\n")] == ["a", "b"]


def test_printed_text_between_the_two_commands_is_no_command() -> None:
    text = "error: x\n::error::pwned\n::stop-commands::pwned\n::pwned::\n##[error]pwned\n"
    assert list(commands(without_commands(text))) == []
    assert list(commands(without_commands(text) + "::notice::after\n")) == [Command("notice", {}, "after")]


def test_two_texts_never_share_the_word_that_ends_the_pause() -> None:
    assert without_commands("a\n").splitlines()[0] != without_commands("b\n").splitlines()[0]
