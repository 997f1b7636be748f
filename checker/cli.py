"""Read arguments, print, and exit: the only place that does any of these."""

from __future__ import annotations

import argparse
import contextlib
import gc
import os
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import NoReturn

from checker import __version__

CLEAN, OPEN_ERRORS, NOT_DONE = 0, 1, 2


def run() -> NoReturn:
    """Run the command and end the process at once: to take a fleet apart object by object costs a tenth of a run."""
    gc.disable()
    status = main()
    for stream in (sys.stdout, sys.stderr):
        with contextlib.suppress(OSError):
            stream.flush()
    os._exit(status)


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; return its exit status: 0 nothing open, 1 open errors, 2 the run could not be done."""
    options = _parser().parse_args(arguments)
    # Reports are UTF-8 whatever the locale says; a terminal that cannot show a sign shows a question mark.
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace", **({} if stream.isatty() else {"encoding": "utf-8"}))
    from checker.errors import CheckerError

    try:
        status: int = options.run(options)
        sys.stdout.flush()
        return status
    except CheckerError as error:
        print(f"fairloom: {error}", file=sys.stderr)
        return NOT_DONE
    except BrokenPipeError:
        # Whoever read the output has gone; point the rest nowhere, so that closing is quiet too.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return NOT_DONE
    except KeyboardInterrupt:
        print("fairloom: stopped", file=sys.stderr)
        return NOT_DONE


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="fairloom",
        description="Check the low-voltage DC wiring of a fleet of sister hulls, kept as YAML.",
        epilog="Exit status: 0 nothing open at error level, 1 open errors, 2 the run could not be done.",
    )
    parser.add_argument("--version", action="version", version=f"fairloom {__version__}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", required=True)
    check = commands.add_parser("check", help="check every hull and option set of a yard", description=_check.__doc__)
    check.add_argument("folder", nargs="?", default=".", metavar="FOLDER", help="the yard's repository (default: here)")
    check.add_argument(
        "--only", action="append", default=[], metavar="HULL", help="check this hull only; may be repeated"
    )
    check.add_argument("--reports", metavar="FOLDER", help="also write the text reports and the JSON result there")
    check.add_argument("--today", metavar="DATE", help="judge waivers as on this day (default: the system's date)")
    check.add_argument("--workers", type=_positive, default=None, metavar="N",
                       help="processes to study boats with (default: one for each core)")  # fmt: skip
    check.set_defaults(run=_check)
    explain = commands.add_parser("explain", help="say what a check does", description=_explain.__doc__)
    explain.add_argument("check", nargs="?", metavar="CHECK", help="the id of a check (default: list all)")
    explain.set_defaults(run=_explain)
    return parser


def _positive(text: str) -> int:
    value = int(text) if text.isascii() and text.isdigit() else 0
    if value < 1:
        raise argparse.ArgumentTypeError("write a whole number of at least 1")
    return value


def _check(options: argparse.Namespace) -> int:
    """Check every hull, and every option set that may be sold, against the limit sets that apply."""
    import datetime

    from checker.errors import UsageError
    from checker.output.files import write_reports
    from checker.output.screen import screen_report
    from checker.pipeline import all_cards, check_fleet

    if options.reports and options.only:
        raise UsageError("--reports writes the reports of the whole fleet: leave out --only")
    try:
        # The only place that reads the clock.
        today = datetime.date.fromisoformat(options.today) if options.today is not None else datetime.date.today()
    except ValueError as error:
        raise UsageError(f"--today: “{options.today}” is no date; write e.g. 2028-05-29") from error
    progress = _Progress()
    result = check_fleet(
        Path(options.folder),
        today=today,
        only=options.only,
        workers=options.workers or os.cpu_count() or 1,
        progress=progress if sys.stderr.isatty() else None,
        lists_passes=bool(options.reports),
    )
    progress.clear()
    cards = {card.id: card for card in all_cards()}
    colour = sys.stdout.isatty() and "NO_COLOR" not in os.environ
    sys.stdout.write(screen_report(result, cards, colour=colour))
    if options.reports:
        written = write_reports(result, cards, Path(options.reports))
        print(f"{written} reports written to {options.reports}", file=sys.stderr)
    return CLEAN if result.is_clean else OPEN_ERRORS


class _Progress:
    """Show on standard error how far a long run has come."""

    FEWEST = 20

    def __init__(self) -> None:
        self._shown = False

    def __call__(self, done: int, total: int) -> None:
        if total >= self.FEWEST:
            self._shown = True
            print(f"\rstudied {done} of {total} boats", end="", file=sys.stderr, flush=True)

    def clear(self) -> None:
        if self._shown:
            print("\r\x1b[K", end="", file=sys.stderr, flush=True)


def _explain(options: argparse.Namespace) -> int:
    """Print what a check does, what it rests on, its exemptions and cautions; without a name list all checks."""
    from checker.errors import UsageError
    from checker.output.explain import check_list, check_page
    from checker.pipeline import all_cards
    from checker.reading.words import nearest

    cards = {card.id: card for card in all_cards()}
    if options.check is None:
        sys.stdout.write(check_list(cards.values()))
        return CLEAN
    if options.check not in cards:
        meant = nearest(options.check, cards)
        raise UsageError(f"there is no check {options.check}" + (f"; did you mean {meant}?" if meant else ""))
    sys.stdout.write(check_page(cards[options.check]))
    return CLEAN
