"""Make the drawings that tests compare anew: run it after a change of what a drawing looks like, and look at them."""

from __future__ import annotations

import datetime
import tempfile
from functools import cache
from pathlib import Path

from checker.output.drawing.files import drawing_files, write_drawings
from checker.pipeline import open_hull
from tests.small_yard import HULL, SOUND, Yard

FOLDER = Path(__file__).parent / "output" / "skiff_drawings"


def flawed_yard() -> Yard:
    """Return the small yard with its main fuse too far from the battery."""
    return SOUND.edit("length: 5.9 in", "length: 9 in")


@cache
def drawings() -> dict[str, str]:
    """Return the drawings of the small yard's hull, with the plots of two circuits."""
    with tempfile.TemporaryDirectory() as folder:
        for name, text in flawed_yard().files.items():
            path = Path(folder, name)
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_text(text, encoding="utf-8")
        hull = open_hull(Path(folder), HULL, today=datetime.date(2026, 12, 1))
    return drawing_files(hull.studies, hull.result.outcomes, HULL, ("LIGHTS", "ALT-OUT"))


if __name__ == "__main__":
    write_drawings(drawings(), FOLDER)
