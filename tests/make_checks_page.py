"""Make checker/checks/examples.yaml and checker/checks/CHECKS.md anew.

Run it after a change of a check, a card or a planter; a test compares what it makes with what is
kept. The example of a check is the first finding that a planter of the campaign makes with it, in
the minimal boat if it can be planted there.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path

import yaml

from checker.finding import Card, Outcome, Verdict
from checker.output.explain import examples, markdown_page
from checker.output.lines import finding_lines
from checker.pipeline import all_cards
from checker.result.gather import fingerprint
from checker.result.measured_cards import OLD_SHEET
from tests.campaign.planting import DESIGNS
from tests.campaign.tally import first_crops
from tests.metric_yard import METRIC
from tests.small_yard import SOUND, Yard, check_yard

CHECKS = Path(__file__).resolve().parents[1] / "checker" / "checks"
HEAD = "# An example finding of each check, made by tests/make_checks_page.py. The boats are invented.\n"


def example_lines(card: Card, outcome: Outcome) -> list[str]:
    """Return the lines of a finding, without its fingerprint, which says nothing to a reader of the page."""
    lines = finding_lines([outcome], card, "", {})
    return [_shown(line) for line in lines if not line.startswith("  fingerprint:")]


def _shown(line: str) -> str:
    """Name the planted files as a yard would: their numbers say nothing, and move with every new planter."""
    line = re.sub(r"hulls/seed-[0-9]+\.yaml", "hulls/a-boat.yaml", line)
    return re.sub(r"parts/planted\.yaml:[0-9]+:[0-9]+", "parts/a-part.yaml:2:3", line)


def found_examples() -> dict[str, list[str]]:
    """Return an example finding of every check that one can be planted for."""
    cards = {card.id: card for card in all_cards()}
    found: dict[str, list[str]] = {}
    for outcome in _outcomes():
        if outcome.check in cards and outcome.check not in found:
            found[outcome.check] = example_lines(cards[outcome.check], outcome)
    return {name: found[name] for name in cards if name in found}


def _outcomes() -> Iterator[Outcome]:
    """Yield findings: planted ones first, those that only follow from one last."""
    following: list[Outcome] = []
    for make in DESIGNS:
        for crop in (one.harvest for one in first_crops(make)):
            wanted = {tuple(one) for one in crop.plant.finds}
            for outcome, _ in crop.findings:
                if (outcome.check, outcome.part) in wanted:
                    yield outcome
                else:
                    following.append(outcome)
    yield from _of_files()
    yield from following


OPEN = SOUND.edit("feed: P1\n    protect: 5 A", "feed: P1\n    protect: 10 A")
"""A boat with one finding, for waivers to accept."""


def waived(expires: str, fingerprint: str, limit_set: str = "") -> Yard:
    """Return a yard that accepts that finding in some way."""
    row = f"""\
waivers:
  WVR-1:
    check: maker-device
    hull: SKIFF-1
    part: P1
    fingerprint: {fingerprint}
    reason: the maker agrees in writing
    approved_by: electrical lead
    expires: "{expires}"
{limit_set}"""
    return OPEN.with_file("waivers.yaml", row)


def signed(content: str) -> Yard:
    """Return the sound yard with a hull that was signed for some wiring, under other tables."""
    block = (
        f'signed: {{role: quality assurance, date: "2026-05-21", content: {content}, tool: 0.1.0, tables: "01234567"}}'
    )
    return SOUND.edit("options: []", f"options: []\n{block}")


def the_content() -> str:
    """Return the mark of the sound yard's wiring."""
    (hull,) = (s for s in check_yard(signed("0123456789ab")).subjects if s.is_hull)
    assert hull.handover is not None
    return hull.handover.content


def _of_files() -> Iterator[Outcome]:
    """Yield findings of a yard's files: YAML, schema, references, revisions, waivers."""
    (accepted,) = [o for o in _findings(OPEN) if o.check == "maker-device"]
    good = fingerprint(accepted)
    yards = [
        SOUND.with_file("hulls/other.yaml", "hull: [\n"),
        SOUND.with_file("hulls/other.yaml", "hull: SKIFF-2\nhull: SKIFF-3\nclass: skiff\n"),
        SOUND.edit("status: in-build", "status: in-build\nsail: red"),
        SOUND.edit("status: in-build\n", ""),
        SOUND.edit("feed: P1\n    protect: 5 A", "feed: P1\n    protect: 5"),
        SOUND.edit("load: plotter", "load: ploter"),
        SOUND.edit("revision: 2\nstatus", "revision: 1\nstatus"),
        waived("2026-11-30", good),
        waived("2027-11-30", "000000000000"),
        signed("0123456789ab"),
        signed(the_content()),
    ]
    for yard in (*yards, *_others()):
        yield from _findings(yard)
    sheet = SOUND.with_file("sheets/skiff-1.yaml", "sheet: SKIFF-1\ncontent: 0123456789ab\n")
    (hull,) = (s for s in check_yard(sheet).subjects if s.is_hull)
    assert hull.handover is not None
    assert hull.handover.judged is not None
    yield from (o for o in hull.handover.judged.outcomes if o.check == OLD_SHEET.id)


OPTION = """\
option: {name}
name: an option
excludes: [{other}]
changes: {{devices: {{SPARE-{number}: {{part: bus-100, zone: CABIN}}}}}}
"""
STATES = "states:\n  house: {kind: normal, switches: {SW-H: closed, SW-S: closed}}\n"
STATES += "  left: {kind: normal, switches: {SW-H: open, SW-S: open}}\n"
ISOLATOR = "isolator: {kind: diode, posts: [in, out], passes: [[in, out]], drop: 0.7 V, resistance: 2 mohm}"
LEAD = "C1: {from: CHARGER.out, to: F-CHARGER.load"
BEHIND = "C1: {from: CHARGER.out, to: ISO.in, size: 10 AWG, length: 0.3 m, colour: red}\n      C1B: {from: ISO.out"


def _others() -> list[Yard]:
    """Return yards for checks that no planter of the campaign speaks to: other limit sets, options, states."""
    excluded = SOUND.edit("options: []", "options: [OPT-A, OPT-B]")
    for number, (name, other) in enumerate((("OPT-A", "OPT-B"), ("OPT-B", "OPT-A"))):
        text = OPTION.format(name=name, other=other, number=number)
        excluded = excluded.with_file(f"classes/skiff/options/{number}.yaml", text)
    end = "circuits:\n  SPARE:\n    name: Spare\n    service: general\n    current: 1 A\n    conductors:\n"
    end += "      X1: {from: PANEL, to: STUD, size: 6 AWG, length: 6 in, colour: red}\n"
    return [
        excluded,
        SOUND.also(STATES),
        SOUND.also(f"devices:\n  STUD: {{part: bus-100, zone: CABIN}}\n{end}"),
        SOUND.also_parts(ISOLATOR).also("devices:\n  ISO: {part: isolator, zone: LOCKER}\n").edit(
            LEAD, f"{BEHIND}, to: F-CHARGER.load"
        ),
        METRIC.edit("to: PANEL, size: 6 AWG, length: 1.5 m", "to: PANEL, size: 6 AWG, length: 1.5 m, supports: 0.6 m"),
        METRIC.edit("{B: {return: case, max: 60 A, voltage: 14.4 V, limited: true}}",
                    "{B: {return: case, max: 60 A, voltage: 14.4 V}}\n    internal_fuse: false").edit(
            "from: ALT.B, to: F-ALT.load, size: 6 AWG, length: ", "from: ALT.B, to: F-ALT.load, size: 6 AWG, length: 1"
        ),
    ]  # fmt: skip


def _findings(yard: Yard) -> list[Outcome]:
    result = check_yard(yard)
    rows = [*result.file_outcomes, *(o for subject in result.subjects if subject.is_hull for o in subject.news)]
    return [o for o in rows if o.verdict is Verdict.FINDING]


def examples_text() -> str:
    """Return the text of examples.yaml."""
    return HEAD + yaml.safe_dump(found_examples(), sort_keys=False, allow_unicode=True, width=1000)


if __name__ == "__main__":
    (CHECKS / "examples.yaml").write_text(examples_text(), encoding="utf-8")
    examples.cache_clear()
    (CHECKS / "CHECKS.md").write_text(markdown_page(all_cards()), encoding="utf-8")
