"""Read arguments, print, and exit: the only place that does any of these."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from checker import __version__

if TYPE_CHECKING:
    import datetime

CLEAN, OPEN_ERRORS, NOT_DONE = 0, 1, 2
FAIL_ON = ("new-errors", "less-checked", "worse")


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
    compare = commands.add_parser("compare", help="say what a change does to which hulls", description=_compare.__doc__)
    compare.add_argument("base", metavar="BASE", help="a git revision, the folder of a yard, or a result.json")
    compare.add_argument(
        "head", nargs="?", metavar="HEAD", help="the same (default: the yard as it lies in its folder)"
    )
    compare.add_argument(
        "--yard", default=".", metavar="FOLDER", help="the yard's folder in the repository (default: here)"
    )
    compare.add_argument("--fail-on", action="append", default=[], metavar="WHAT", choices=FAIL_ON,
                         help="end with 1 also for: less-checked (something is looked at no more), worse (anything is "
                         "worse); may be repeated (default: new errors only)")  # fmt: skip
    compare.add_argument("--markdown", metavar="FILE", help="also append the comparison to this file as Markdown")
    compare.add_argument("--today", metavar="DATE", help="judge waivers as on this day (default: the system's date)")
    compare.add_argument("--workers", type=_positive, default=None, metavar="N",
                         help="processes to study boats with (default: one for each core)")  # fmt: skip
    compare.set_defaults(run=_compare)
    explain = commands.add_parser("explain", help="say what a check does", description=_explain.__doc__)
    explain.add_argument("check", nargs="?", metavar="CHECK", help="the id of a check (default: list all)")
    explain.set_defaults(run=_explain)
    return parser


def _today(options: argparse.Namespace) -> datetime.date:
    """Return the day on which waivers are judged."""
    import datetime

    from checker.errors import UsageError

    try:
        # The only place that reads the clock.
        return datetime.date.fromisoformat(options.today) if options.today is not None else datetime.date.today()
    except ValueError as error:
        raise UsageError(f"--today: “{options.today}” is no date; write e.g. 2028-05-29") from error


def _positive(text: str) -> int:
    value = int(text) if text.isascii() and text.isdigit() else 0
    if value < 1:
        raise argparse.ArgumentTypeError("write a whole number of at least 1")
    return value


def _check(options: argparse.Namespace) -> int:
    """Check every hull, and every option set that may be sold, against the limit sets that apply."""
    from checker.errors import UsageError
    from checker.output.files import write_reports
    from checker.output.screen import screen_report
    from checker.pipeline import all_cards, check_fleet

    if options.reports and options.only:
        raise UsageError("--reports writes the reports of the whole fleet: leave out --only")
    today = _today(options)
    progress = _Progress()
    result = check_fleet(
        Path(options.folder),
        today=today,
        only=options.only,
        workers=options.workers or os.cpu_count() or 1,
        progress=progress if sys.stderr.isatty() else None,
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


def _compare(options: argparse.Namespace) -> int:
    """Say what a change does: new errors, what is silenced or looked at less, and what changed aboard which hulls."""
    from checker.errors import UsageError
    from checker.output.compare_markdown import compare_markdown
    from checker.output.compare_text import compare_text
    from checker.sides import compare

    workers = options.workers or os.cpu_count() or 1
    comparison = compare(options.base, options.head, Path(options.yard), today=_today(options), workers=workers)
    sys.stdout.write(compare_text(comparison, colour=sys.stdout.isatty() and "NO_COLOR" not in os.environ))
    if options.markdown:
        try:
            with Path(options.markdown).open("a", encoding="utf-8", newline="\n") as file:
                file.write(compare_markdown(comparison))
        except OSError as error:
            raise UsageError(f"{options.markdown} cannot be written: {error.strerror}") from error
    is_refused = (
        comparison.new_errors
        or ("less-checked" in options.fail_on and comparison.lost)
        or ("worse" in options.fail_on and comparison.is_worse)
    )
    return OPEN_ERRORS if is_refused else CLEAN


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
