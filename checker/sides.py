"""Find the two sides of a comparison, run what has to be run, and compare."""

from __future__ import annotations

import contextlib
import datetime
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path

from checker.errors import UsageError
from checker.limits.limit_set import thin_margin_fraction
from checker.pipeline import check_files
from checker.reading.git_tree import Revision, find_revision, is_revision, write_yard
from checker.reading.words import shown
from checker.reading.yard_files import YARD_FILE, YardFiles, read_yard
from checker.result.compare import compared
from checker.result.comparison import Comparison
from checker.result.side import Side
from checker.result.side_of_result import side_of_result
from checker.result.store import Store
from checker.result.stored import StoredResultError, side_of_text

WORKING_TREE = "working tree"
LARGEST_RESULT = 2_000_000_000
"""Bytes of a JSON result beyond which it is taken for something else."""


@dataclass(frozen=True, slots=True)
class Given:
    """Hold what was given for a side: the files of a yard, or a JSON result."""

    name: str
    files: YardFiles | None = None
    stored: Side | None = None


def compare(
    base: str, head: str | None, yard: Path, *, today: datetime.date, workers: int, store: Store | None = None
) -> Comparison:
    """Compare two sides, each judged as on the same day.

    Args:
        base: A revision, a folder or a JSON result.
        head: The same; None for the yard as it lies in its folder.
        yard: The yard's folder, in the working tree of the repository.
        today: The day on which waivers are judged.
        workers: How many processes study boats side by side.
        store: Studies of earlier runs; the comparison does not depend on them.

    Raises:
        CheckerError: If a side cannot be used.
    """
    old, new = given(base, yard), given(head, yard) if head is not None else _folder(yard, WORKING_TREE)
    sides = [_side(side, today, workers, store) for side in (old, new)]
    held_as_head = None
    if old.files is not None and new.files is not None and _is_held_otherwise(sides[0], sides[1]):
        files = replace(old.files, yard=new.files.yard, limits=new.files.limits)
        held_as_head = side_of_result(check_files(files, today=today, workers=workers, store=store), old.name)
    return compared(sides[0], sides[1], _thin_fraction(sides[1]), held_as_head)


def given(name: str, yard: Path) -> Given:
    """Return what a name stands for: a JSON result, the folder of a yard, or a revision of the yard's repository.

    Raises:
        CheckerError: If it stands for nothing that can be compared, or for two things.
    """
    if not name:
        raise UsageError("a side has an empty name: give a revision, a folder or a JSON result")
    try:
        is_file, is_folder = Path(name).is_file(), Path(name).is_dir()
    except (OSError, ValueError):  # too long, or with a NUL: no path
        is_file = is_folder = False
    is_path = is_file or (is_folder and (Path(name) / YARD_FILE).is_file())
    if is_path and _could_be_both(name) and is_revision(yard, name):
        what = "file" if is_file else "folder"
        raise UsageError(f"“{shown(name)}” is a {what} and a revision: write ./{shown(name)} for the {what}, "
                         f"or e.g. refs/heads/{shown(name)} for the revision")  # fmt: skip
    if is_file:
        return Given(name, stored=_stored(Path(name), name))
    if is_path or (is_folder and not is_revision(yard, name)):
        return _folder(Path(name), name)
    if not yard.is_dir():
        raise UsageError(f"there is no folder {shown(str(yard))}: give the yard's folder with --yard")
    return _at_revision(find_revision(yard, name))


def _could_be_both(name: str) -> bool:
    return not name.startswith((".", "/", "~")) and not Path(name).is_absolute()


def _folder(folder: Path, name: str) -> Given:
    return Given(name, files=read_yard(folder))


def _at_revision(revision: Revision) -> Given:
    with _scratch() as folder:
        write_yard(revision, folder, YARD_FILE)
        return Given(revision.name, files=read_yard(folder))


@contextlib.contextmanager
def _scratch() -> Iterator[Path]:
    import tempfile

    with tempfile.TemporaryDirectory(prefix="fairloom-") as folder:
        yield Path(folder)


def _stored(path: Path, name: str) -> Side:
    try:
        if path.stat().st_size > LARGEST_RESULT:
            raise StoredResultError(f"{shown(name)} is too large for a JSON result")
        text = path.read_bytes().decode("utf-8")
    except OSError as error:
        raise StoredResultError(f"{shown(name)} cannot be read: {error.strerror}") from error
    except UnicodeDecodeError as error:
        raise StoredResultError(f"{shown(name)} is no JSON result: it is not UTF-8") from error
    return side_of_text(text, name)


def _side(side: Given, today: datetime.date, workers: int, store: Store | None) -> Side:
    if side.stored is not None:
        return side.stored
    assert side.files is not None
    return side_of_result(check_files(side.files, today=today, workers=workers, store=store), side.name)


def _is_held_otherwise(base: Side, head: Side) -> bool:
    """Tell whether the yard's own rules or tables differ: then its boats are held by both."""
    return (base.rules, base.sizes, base.marks) != (head.rules, head.sizes, head.marks)


def _thin_fraction(side: Side) -> float:
    """Return the share of a limit below which headroom is thin: the yard's own where it has changed it."""
    for rule in side.rules:
        if rule.what == "thin_margin.thin_margin_percent":
            with contextlib.suppress(ValueError):
                return float(rule.new) / 100
    return thin_margin_fraction()
