"""How much of the committed reports a small edit of the example changes: as few lines and hulls as the edit concerns.

The numbers are those of lines that are only in the new reports, over fleet.txt, result.json and the
reports of the hulls, and of hulls whose report changed. A number that rises needs a reason.
"""

from __future__ import annotations

import re
import shutil
from collections import Counter
from collections.abc import Callable, Mapping
from pathlib import Path

import pytest

from checker.output.files import report_files
from checker.pipeline import all_cards, check_fleet
from tests.compare.series import CLASS, EXAMPLE, TODAY, append, edit

CARDS = {card.id: card for card in all_cards()}
PANEL, ZONES, TRUNK = (f"{CLASS}/{name}.yaml" for name in ("panel", "zones", "trunk"))


def _length(folder: Path) -> None:
    edit(folder, PANEL, "tail: 2.1 m\n    load: nl-stern", "tail: 2.3 m\n    load: nl-stern")


def _fuse(folder: Path) -> None:
    edit(folder, PANEL, "protect: 10 A\n    cable: 14 AWG\n    route: [nav-port, saloon-port]",
         "protect: 7.5 A\n    cable: 14 AWG\n    route: [nav-port, saloon-port]")  # fmt: skip


def _circuit(folder: Path) -> None:
    append(folder, PANEL, """
  P36:
    name: Reading light
    service: lighting
    feed: PNL-35
    protect: 5 A
    cable: 14 AWG
    length: 3 m
    load: lt-cock
    zone: Z-SAL
""")  # fmt: skip


def _rename(folder: Path) -> None:
    (folder / "hulls/tnd-031.yaml").rename(folder / "hulls/a-hull.yaml")


def _rename_class_file(folder: Path) -> None:
    (folder / PANEL).rename(folder / CLASS / "branches.yaml")


def _reorder(folder: Path) -> None:
    edit(folder, PANEL, "    service: radio\n    feed: PNL-05\n", "    feed: PNL-05\n    service: radio\n")


def _comment(folder: Path) -> None:
    for file in (PANEL, ZONES, TRUNK):
        text = (folder / file).read_text(encoding="utf-8")
        (folder / file).write_text(f"# Read before changing.\n{text}", encoding="utf-8")


def _unit(folder: Path) -> None:
    edit(folder, PANEL, "to: CB-PM.line, size: 2/0 AWG, length: 2.6 m", "to: CB-PM.line, size: 2/0 AWG, length: 260 cm")


def _in_feet(folder: Path) -> None:
    edit(folder, ZONES, "zone: Z-AFT, length: 3 m", "zone: Z-AFT, length: 10 ft")
    edit(folder, PANEL, "to: CB-PM.line, size: 2/0 AWG, length: 2.6 m", "to: CB-PM.line, size: 2/0 AWG, length: 9 ft")


def _from_feet_to_metres(folder: Path) -> None:
    edit(folder, ZONES, "length: 10 ft", "length: 3.048 m")
    edit(folder, PANEL, "length: 9 ft", "length: 2.7432 m")


def _hull(folder: Path) -> None:
    text = (folder / "hulls/tnd-031.yaml").read_text(encoding="utf-8")
    (folder / "hulls/tnd-039.yaml").write_text(text.replace("TND-031", "TND-039"), encoding="utf-8")


def _note(folder: Path) -> None:
    append(folder, "hulls/tnd-032.yaml", "note: seen by the owner\n")


EDITS: Mapping[str, tuple[Callable[[Path], None], int, int]] = {
    "one length": (_length, 74, 8),
    "one fuse": (_fuse, 282, 8),  # the hull that was tested has the old one fitted
    "one new circuit": (_circuit, 1580, 8),  # the hull that was tested was not tested for it
    "one new hull, alike to another": (_hull, 1688, 2),  # its own report, and its name in that of its sister
    # Findings print the line of the file that an author would edit: those in the edited files move.
    "a file of a class renamed": (_rename_class_file, 6, 1),
    "a comment at the top of three files": (_comment, 9, 1),
}
"""By name: the edit, and the lines and hulls that it changes."""
NOTHING = {
    "a file of a hull renamed": _rename,
    "keys in another order": _reorder,
    "a unit of the same system": _unit,
    "a note": _note,
}
"""Edits that change no line and no hull. They are made together, since each change would add its own lines."""
AT = re.compile(r"^  at: .*|\"file\": \"[^\"]*\", \"line\": [0-9]+, \"column\": [0-9]+", flags=re.MULTILINE)
"""Where a finding points at: all that an edit without electrical meaning may change."""


def reports(folder: Path) -> dict[str, str]:
    """Return all reports of a yard."""
    return report_files(check_fleet(folder, today=TODAY), CARDS)


def changed(before: Mapping[str, str], after: Mapping[str, str]) -> tuple[int, int]:
    """Count the lines that are only in the new reports, and the hulls whose report changed or is new."""
    lines = hulls = 0
    for name in sorted({*before, *after}):
        old, new = before.get(name, ""), after.get(name, "")
        if old != new:
            lines += sum((Counter(new.splitlines()) - Counter(old.splitlines())).values())
            hulls += name.startswith("hulls/")
    return lines, hulls


@pytest.fixture(scope="module")
def base() -> dict[str, str]:
    """Return the reports of the example as it is."""
    return reports(EXAMPLE)


def edited(folder: Path, *edits: Callable[[Path], None]) -> dict[str, str]:
    """Return the reports of the example after some edits."""
    shutil.copytree(EXAMPLE, folder / "yard", ignore=shutil.ignore_patterns("reports"), dirs_exist_ok=True)
    for one in edits:
        one(folder / "yard")
    return reports(folder / "yard")


@pytest.mark.parametrize("name", EDITS)
def test_a_small_edit_changes_as_many_lines_and_hulls_as_it_did(
    name: str, base: Mapping[str, str], tmp_path: Path
) -> None:
    make, lines, hulls = EDITS[name]
    after = edited(tmp_path, make)
    assert changed(base, after) == (lines, hulls)
    if name in ("a file of a class renamed", "a comment at the top of three files"):
        bare = [{file: AT.sub("at", text) for file, text in one.items()} for one in (base, after)]
        assert changed(*bare)[0] == 0


def test_edits_without_electrical_meaning_change_nothing(base: Mapping[str, str], tmp_path: Path) -> None:
    # The hull that is renamed is not the one with the note, so that neither edit undoes the other.
    assert changed(base, edited(tmp_path, *NOTHING.values())) == (0, 0)


def test_the_same_lengths_in_metres_instead_of_feet_change_nothing(tmp_path: Path) -> None:
    feet = edited(tmp_path / "a", _in_feet)
    metres = edited(tmp_path / "b", _in_feet, _from_feet_to_metres)
    assert changed(feet, metres) == (0, 0)
