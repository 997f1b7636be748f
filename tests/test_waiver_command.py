"""The waiver that the command prints: put into the file as it is, it accepts the finding."""

from __future__ import annotations

import datetime
from pathlib import Path

import pytest

from checker.errors import UsageError
from checker.finding import Verdict
from checker.output.waiver_text import waiver_text
from checker.pipeline import all_cards, check_fleet
from checker.result.gather import fingerprint
from tests.checks.test_fleet_rules import FAULTY, FINGERPRINT, THE_FINDING, TWICE, accepted, waived
from tests.small_yard import HULL_FILE, HULL_YAML, SOUND, Yard, check_yard, finding, found
from tests.test_command import run

CARDS = {card.id: card for card in all_cards()}
HOSTILE = 'spare "on order": {no} # not yet, ü 100 % of it & <b>'


def block(yard: Yard, mark: str, **fields: str) -> str:
    """Return what the command prints for a finding of a yard."""
    empty = {"reason": "", "approved_by": "", "evidence": "", "expires": ""}
    return waiver_text(check_yard(yard), CARDS, mark, **{**empty, **fields})


def filed(yard: Yard, text: str) -> Yard:
    return yard.with_file("waivers.yaml", f"waivers:\n{text}")


FULL = {"reason": HOSTILE, "approved_by": "electrical lead", "evidence": "note 4", "expires": "2027-03-31"}


def test_the_block_accepts_the_finding_as_it_is_printed() -> None:
    yard = filed(FAULTY, block(FAULTY, FINGERPRINT, **FULL))
    assert (found(yard), accepted(yard)) == ([], [THE_FINDING])
    (acceptance,) = next(s for s in check_yard(yard).subjects if s.is_hull).accepted.values()
    assert (acceptance.reason, acceptance.approved_by, acceptance.evidence) == (HOSTILE, "electrical lead", "note 4")


@pytest.mark.parametrize("left_out", ["reason", "approved_by", "expires"])
def test_what_is_left_empty_is_refused_at_its_line(left_out: str) -> None:
    text = block(FAULTY, FINGERPRINT, **{**FULL, left_out: ""})
    assert f"# Fill in {left_out}:" in text
    (fault,) = check_yard(filed(FAULTY, text)).file_outcomes
    assert filed(FAULTY, text).line("waivers.yaml", fault.at.line) == f'{left_out}: ""'


def test_a_finding_under_two_limit_sets_is_accepted_under_the_one_that_was_meant() -> None:
    mark = fingerprint(finding(TWICE, "protection-distance", "M1", "practice"))
    yard = filed(TWICE, block(TWICE, mark, **FULL))
    assert [row[2] for row in accepted(yard)] == ["practice"]
    assert [row[2] for row in found(yard)] == ["law"]


def test_each_hull_with_the_finding_gets_its_own_block() -> None:
    twin = FAULTY.with_file("hulls/skiff-2.yaml", HULL_YAML.replace("SKIFF-1", "SKIFF-2"))
    text = block(twin, FINGERPRINT, **FULL)
    assert [line.strip() for line in text.splitlines() if "hull:" in line] == ["hull: SKIFF-1", "hull: SKIFF-2"]
    result = check_yard(filed(twin, text))
    assert [s.count(Verdict.ACCEPTED) for s in result.subjects if s.is_hull] == [1, 1]
    assert result.file_outcomes == ()


def test_a_finding_of_option_sets_alone_is_accepted_for_the_class() -> None:
    design = Yard({name: text for name, text in FAULTY.files.items() if name != HULL_FILE})
    text = block(design, FINGERPRINT, **FULL)
    assert "    class: skiff\n" in text
    assert [s.open_errors for s in check_yard(filed(design, text)).subjects] == [0]


@pytest.mark.parametrize(
    ("yard", "mark", "fields", "message"),
    [
        (FAULTY, "0" * 12, {}, "no open finding has the fingerprint 000000000000; a report prints it under each finding"),
        (FAULTY, "\x1b[2J", {}, "no open finding has the fingerprint \\\\u001b"),
        (waived(FAULTY), FINGERPRINT, {}, f"{FINGERPRINT} is accepted on SKIFF-1 already, by W-1"),
        (FAULTY, FINGERPRINT, {"expires": "next year"}, "--expires: “next year” is no date"),
        (FAULTY, FINGERPRINT, {"reason": "two\nlines"}, "--reason: write some text on one line"),
        (FAULTY, FINGERPRINT, {"reason": " "}, "--reason: write some text on one line"),
    ],
)  # fmt: skip
def test_what_cannot_be_accepted_is_told(yard: Yard, mark: str, fields: dict[str, str], message: str) -> None:
    with pytest.raises(UsageError, match=message.replace("[", "\\[")):
        block(yard, mark, **fields)


def test_findings_about_waivers_and_files_are_not_to_be_accepted() -> None:
    stale = waived(SOUND)
    mark = fingerprint(finding(stale, "waiver-unmatched", "W-1"))
    with pytest.raises(UsageError, match="findings of waiver-unmatched cannot be accepted by a waiver: mend them"):
        block(stale, mark)
    torn = SOUND.with_file("waivers.yaml", "waivers: 3\n")
    (fault,) = check_yard(torn).file_outcomes
    with pytest.raises(UsageError, match="is a fault of a file: mend it"):
        block(torn, fingerprint(fault))


def test_every_part_that_a_check_names_can_stand_in_a_waiver() -> None:
    """Parts are named in words too, as in "PNL-01 under F-PNL": the schema takes them all."""
    import json
    import re

    root = Path(__file__).resolve().parents[1]
    schema = json.loads((root / "schemas" / "waivers.json").read_text("utf-8"))
    pattern = re.compile(schema["$defs"]["waiver"]["properties"]["part"]["pattern"])
    result = check_fleet(root / "fleet_example", today=datetime.date(2026, 12, 1))
    parts = {o.part for s in result.studies for o in (*s.news, *s.passes) if CARDS[o.check].can_be_waived}
    assert any(" " in part for part in parts)
    assert [part for part in sorted(parts) if not pattern.match(part)] == []


def test_the_command_prints_the_block_or_says_why_not() -> None:
    done = run("waiver", "ed9c2fdc4d41", "fleet_example", "--hull", "TND-037", "--today", "2026-12-01")
    assert (done.returncode, done.stderr) == (0, "")
    assert "    hull: TND-037\n    part: PNL-29\n    fingerprint: ed9c2fdc4d41\n" in done.stdout
    done = run("waiver", "ed9c2fdc4d41", "fleet_example", "--hull", "TND-031", "--today", "2026-12-01")
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith("fairloom: no open finding has the fingerprint ed9c2fdc4d41")
