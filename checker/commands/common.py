"""Hold what several commands have in common: exit statuses, options, the day of the run, progress."""

from __future__ import annotations

import argparse
import os
import sys
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import datetime

    from checker.pipeline import Progress

CLEAN, OPEN_ERRORS, NOT_DONE = 0, 1, 2


def add_folder(command: argparse.ArgumentParser) -> None:
    """Let a command take the yard's folder."""
    command.add_argument(
        "folder", nargs="?", default=".", metavar="FOLDER", help="the yard's repository (default: here)"
    )


def add_today(command: argparse.ArgumentParser) -> None:
    """Let a command take the day of the run."""
    command.add_argument("--today", metavar="DATE", help="judge waivers as on this day (default: the system's date)")


def add_workers(command: argparse.ArgumentParser) -> None:
    """Let a command take the number of worker processes."""
    command.add_argument("--workers", type=positive, default=None, metavar="N",
                         help="processes to study boats with (default: one for each core)")  # fmt: skip


def positive(text: str) -> int:
    """Read a whole number of at least 1."""
    value = int(text) if text.isascii() and text.isdigit() else 0
    if value < 1:
        raise argparse.ArgumentTypeError("write a whole number of at least 1")
    return value


def today_of(options: argparse.Namespace) -> datetime.date:
    """Return the day of the run: the only place that reads the clock."""
    import datetime

    from checker.errors import UsageError

    try:
        return datetime.date.fromisoformat(options.today) if options.today is not None else datetime.date.today()
    except ValueError as error:
        raise UsageError(f"--today: “{options.today}” is no date; write e.g. 2028-05-29") from error


def workers_of(options: argparse.Namespace) -> int:
    """Return how many worker processes to use."""
    return options.workers or os.cpu_count() or 1


class ProgressLine:
    """Show on standard error how far a long run has come; nothing where that is no terminal."""

    FEWEST = 20

    def __init__(self) -> None:
        self._shown = False

    @property
    def call(self) -> Progress | None:
        """Return what is to be told of progress, or nothing to tell."""
        return self._tell if sys.stderr.isatty() else None

    def _tell(self, done: int, total: int) -> None:
        if total >= self.FEWEST:
            self._shown = True
            print(f"\rstudied {done} of {total} boats", end="", file=sys.stderr, flush=True)

    def clear(self) -> None:
        """Take the line away."""
        if self._shown:
            print("\r\x1b[K", end="", file=sys.stderr, flush=True)
