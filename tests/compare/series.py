"""A recorded series of changes of the example fleet, each a commit of a git repository of its own.

The expected first screens of their comparisons stand in tests/compare/expected. To make them anew
after a change of what is printed, run `python -m tests.compare.series` and read their diff.
"""

from __future__ import annotations

import datetime
import json
import os
import shutil
import subprocess
import tempfile
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path

from checker import sides
from checker.output.compare_text import compare_text
from checker.output.json_report import json_report
from checker.pipeline import all_cards, check_fleet
from checker.result.comparison import Comparison
from checker.result.side import Side
from checker.result.store import Store

ROOT = Path(__file__).resolve().parents[2]
EXAMPLE = ROOT / "fleet_example"
EXPECTED = Path(__file__).parent / "expected"
TODAY = datetime.date(2026, 12, 1)
SCREEN = 40
BASE = "base"
CLASS = "classes/tindral-36"


def edit(folder: Path, name: str, old: str, new: str) -> None:
    """Replace a text that stands once in a file of the yard."""
    file = folder / name
    text = file.read_text(encoding="utf-8")
    assert text.count(old) == 1, f"{old!r} stands {text.count(old)} times in {name}"
    file.write_text(text.replace(old, new), encoding="utf-8")


def append(folder: Path, name: str, text: str) -> None:
    """Add a text at the end of a file of the yard."""
    with (folder / name).open("a", encoding="utf-8") as file:
        file.write(text)


@dataclass(frozen=True)
class Step:
    """Hold one change: its name, what its author would say, and what it does to the files."""

    name: str
    message: str
    make: Callable[[Path], None]


def _good(folder: Path) -> None:
    text = (folder / "hulls/tnd-035.yaml").read_text(encoding="utf-8")
    (folder / "hulls/tnd-035.yaml").write_text(text[: text.index("\nchanges:")], encoding="utf-8")
    edit(folder, "hulls/tnd-037.yaml", "P30: {protect: 30 A, legend: Deck wash pump 15 A}",
         "P30: {legend: Deck wash pump with a 15 A breaker}")  # fmt: skip


def _breaks_three(folder: Path) -> None:
    for conductor, end in (("W081", "from: SW-THR.out, to: THRUSTER.pos"), ("W082", "from: THRUSTER.neg, to: BUS-N")):
        old = f"{conductor}: {{{end}, size: 4/0 AWG"
        edit(folder, f"{CLASS}/options/thr12.yaml", old, old.replace("4/0", "2/0"))


def _silences(folder: Path) -> None:
    append(folder, "waivers.yaml", """
  WVR-037-1:
    check: maker-device
    hull: TND-037
    part: PNL-29
    fingerprint: ed9c2fdc4d41
    reason: the pump is to be exchanged in spring
    approved_by: electrical lead
    expires: "2027-06-30"
""")  # fmt: skip
    edit(folder, "waivers.yaml", 'P11\n    expires: "2028-05-29"', 'P11\n    expires: "2029-05-29"')
    edit(folder, "hulls/tnd-038.yaml", "Z-LAZ: {petrol_vapour: true}", "Z-LAZ: {petrol_vapour: false}")


def _tightens(folder: Path) -> None:
    append(folder, "yard.yaml", """
  limits:
    voluntary-dc:
      drop.critical_percent: {value: 2.8, reason: two pilots dropped out in the winter trials}
""")  # fmt: skip


def _renames(folder: Path) -> None:
    (folder / "hulls/tnd-034.yaml").rename(folder / "hulls/boat-four.yaml")
    (folder / f"{CLASS}/panel.yaml").rename(folder / f"{CLASS}/branches.yaml")
    trunk = folder / f"{CLASS}/trunk.yaml"
    trunk.write_text("# A comment that moves every line.\n\n" + trunk.read_text(encoding="utf-8"), encoding="utf-8")


SERIES = (
    Step("good", "TND-035: charger on BUS-N; TND-037: deck wash back to 15 A", _good),
    Step("breaks-three", "OPT-THR12: thruster in 2/0 AWG, 4/0 AWG is sold out", _breaks_three),
    Step("silences", "waivers for spring; no tender petrol on TND-038", _silences),
    Step("tightens", "house limit: 2.8 per cent for the critical group", _tightens),
    Step("renames", "clearer file names", _renames),
)


def git(folder: Path, *words: str) -> str:
    """Run git in a folder, as nobody in particular and on no particular day."""
    who = {"NAME": "Nobody", "EMAIL": "nobody@example.invalid", "DATE": "2026-12-01T00:00:00Z"}
    told = {f"GIT_{role}_{key}": value for role in ("AUTHOR", "COMMITTER") for key, value in who.items()}
    alone = {"GIT_CONFIG_GLOBAL": os.devnull, "GIT_CONFIG_SYSTEM": os.devnull}
    done = subprocess.run(["git", "-C", str(folder), *words], capture_output=True, text=True, check=True,
                          env={**os.environ, **told, **alone})  # fmt: skip
    return done.stdout


def recorded(folder: Path) -> Path:
    """Make a repository with the example fleet in a subfolder and a tag for each step; return the yard's folder."""
    git(folder, "init", "--quiet", "--initial-branch=main")
    yard = folder / "fleet"
    shutil.copytree(EXAMPLE, yard, ignore=shutil.ignore_patterns("reports"))
    _commit(folder, BASE, BASE)
    for step in SERIES:
        git(folder, "checkout", "--quiet", "--detach", BASE)
        step.make(yard)
        _commit(folder, step.message, step.name)
    git(folder, "checkout", "--quiet", "main")
    return yard


def _commit(folder: Path, message: str, tag: str) -> None:
    git(folder, "add", "--all")
    git(folder, "commit", "--quiet", "--message", message)
    git(folder, "tag", tag)


def older_result(folder: Path) -> Path:
    """Write the result of the example as an edition with another drop limit would have had it: 4 for 3 per cent."""
    result = check_fleet(EXAMPLE, today=TODAY)
    document = json.loads(json_report(result, {card.id: card for card in all_cards()}))
    document["tables"]["voluntary-dc"]["drop"] = "00000000"
    accepted = [row for subject in document["subjects"] for row in subject["accepted"]]
    for study in document["studies"]:
        waived = [row for row in study["found"] if row["fingerprint"] in {one["fingerprint"] for one in accepted}]
        study["found"] = [row for row in study["found"] if row not in waived]
        for group in study["passed"]:
            if group["check"] in ("voltage-drop", "voltage-drop-from-bank", "solved-drop"):
                for row in waived:
                    if row["check"] == group["check"]:
                        group["places"][row["part"]] = [row["value"], 0.03, 0]
                for name, (value, limit, _) in group["places"].items():
                    if limit == 0.03:
                        group["places"][name] = [value, 0.04, round((0.04 - value) / 0.04, 9)]
    for subject in document["subjects"]:
        subject["accepted"] = []
    path = folder / "older.json"
    path.write_text(json.dumps(document), encoding="utf-8")
    return path


def screen(comparison: Comparison, folder: Path) -> str:
    """Return the first screen of a comparison, without the folder that the test runs in."""
    lines = compare_text(comparison).replace(f"{folder}/", "").splitlines()
    more = [f"... and {len(lines) - SCREEN} more lines"] if len(lines) > SCREEN else []
    return "\n".join([*lines[:SCREEN], *more, ""])


class OneBase:
    """Stand in for what judges a side: the base of the series is judged once."""

    def __init__(self) -> None:
        self._judge = sides._side
        self._base: Side | None = None

    def __call__(self, side: sides.Given, today: datetime.date, workers: int, store: Store | None) -> Side:
        """Judge a side, or return the base as it was judged before."""
        if side.name != BASE:
            return self._judge(side, today, workers, store)
        self._base = self._base or self._judge(side, today, workers, store)
        return self._base


def screens(folder: Path) -> Mapping[str, str]:
    """Return the first screens of all steps, and of the comparison with a stored result of older tables."""
    yard = recorded(folder)
    found = {step.name: screen(sides.compare(BASE, step.name, yard, today=TODAY, workers=1), folder) for step in SERIES}
    stored = str(older_result(folder))
    found["older-tables"] = screen(sides.compare(stored, BASE, yard, today=TODAY, workers=1), folder)
    return found


if __name__ == "__main__":
    sides._side = OneBase()
    with tempfile.TemporaryDirectory() as scratch:
        for name, text in screens(Path(scratch)).items():
            (EXPECTED / f"{name}.txt").write_text(text, encoding="utf-8")
