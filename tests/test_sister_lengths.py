"""FLT-12: a hull's own length that is far from its sisters' is told; small differences are not."""

from __future__ import annotations

from pathlib import Path

import pytest

from checker.pipeline import check_fleet
from tests.dory_yard import DORY, HULL, TODAY, checked, place, write

C2 = "length: 3 m"


def fleet(*lengths: str) -> dict[str, str]:
    """Return a fleet of one hull for each length of C2's cable; the class's own length where it is "3 m"."""
    files = {name: text for name, text in DORY.items() if not name.startswith("hulls/")}
    for number, length in enumerate(lengths, 1):
        text = HULL.replace("DORY-1", f"DORY-{number}")
        if length != "3 m":
            change = f"{{DEV: {{what: as measured, state: recorded, set: {{circuits: {{C2: {{length: {length}}}}}}}}}}}"
            text += f"changes: {change}\n"
        files[f"hulls/dory-{number}.yaml"] = text
    return files


def far(folder: Path, files: dict[str, str]) -> list[tuple[str, str, str, str]]:
    """Return what is found of lengths: hull, conductor, place, fault."""
    result = checked(folder, files)
    return [
        (subject.id, o.part, str(o.at), o.fault)
        for subject in result.subjects
        for o in subject.news
        if o.check == "length-far-from-sisters"
    ]


def test_a_length_far_from_the_middle_one_of_its_sisters_is_found_at_its_line(tmp_path: Path) -> None:
    """FLT-12: 5.2 m on one hull, 3 m on the others; both conductors of the branch."""
    files = fleet("3 m", "5.2 m", "3 m")
    at = place("hulls/dory-2.yaml", "5.2 m", files)
    told = "5.20 m here, 3.00 m is the middle one of 3 hulls"
    assert far(tmp_path, files) == [("DORY-2", "C2.back", at, told), ("DORY-2", "C2.out", at, told)]


@pytest.mark.parametrize(
    ("length", "is_far"), [("3.75 m", False), ("3.76 m", True), ("2.25 m", False), ("2.24 m", True)]
)
def test_a_quarter_of_the_length_is_the_limit(tmp_path: Path, length: str, is_far: bool) -> None:
    """FLT-12: at 25 % it is silent, beyond it is found; both are more than half a metre."""
    assert bool(far(tmp_path, fleet("3 m", length, "3 m"))) is is_far


def test_half_a_metre_is_nothing_on_a_short_conductor(tmp_path: Path) -> None:
    """FLT-12: 1.5 m where the sisters have 1 m is half as long again, but half a metre only."""
    assert far(tmp_path, fleet("1 m", "1.5 m", "1 m")) == []
    assert far(tmp_path, fleet("1 m", "1.51 m", "1 m")) != []


def test_with_two_hulls_the_class_stands_for_the_sisters(tmp_path: Path) -> None:
    """FLT-12."""
    (told, *_) = far(tmp_path, fleet("3 m", "5 m"))
    assert told[3] == "5.00 m here, 3.00 m is in the class"


def test_hulls_that_all_differ_from_the_drawing_alike_are_silent(tmp_path: Path) -> None:
    """FLT-12: the middle one counts, not the drawing."""
    assert far(tmp_path, fleet("5 m", "5 m", "5.1 m")) == []


def test_a_single_hull_has_no_sisters_at_hand(tmp_path: Path) -> None:
    result = check_fleet(write(tmp_path, fleet("3 m", "5.2 m", "3 m")), today=TODAY, only=["DORY-2"])
    assert [o.check for s in result.subjects for o in s.news if o.check == "length-far-from-sisters"] == []
