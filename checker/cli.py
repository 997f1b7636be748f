"""Read arguments, print, and exit: the only place that does any of these."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from pathlib import Path

from checker import __version__

CLEAN, OPEN_ERRORS, NOT_DONE = 0, 1, 2


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
        from checker.reading.words import no_command

        print(no_command(f"fairloom: {error}"), file=sys.stderr)
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
    for option, told in _FURTHER.items():
        check.add_argument(f"--{option}", metavar="FILE", help=told)
    check.add_argument("--annotations", action="store_true",
                       help="also print the findings as the commands with which a CI job marks lines")  # fmt: skip
    check.add_argument("--yard-path", metavar="PATH",
                       help="the yard's folder from the root of its repository, for the paths in the "
                            "reports above (default: found by .git)")  # fmt: skip
    check.set_defaults(run=_check)
    lists = commands.add_parser("lists", help="write a hull's wire, device, landing, label and parts lists",
                                description=_lists.__doc__)  # fmt: skip
    lists.add_argument("folder", nargs="?", default=".", metavar="FOLDER", help="the yard's repository (default: here)")
    lists.add_argument("--hull", required=True, metavar="HULL", help="the hull to list")
    lists.add_argument("--to", required=True, metavar="FOLDER", help="the folder to write the lists to")
    lists.set_defaults(run=_lists)
    explain = commands.add_parser("explain", help="say what a check does", description=_explain.__doc__)
    explain.add_argument("check", nargs="?", metavar="CHECK", help="the id of a check (default: list all)")
    explain.set_defaults(run=_explain)
    return parser


_FURTHER = {
    "sarif": "also write SARIF 2.1.0, with what was accepted as suppressed; - is standard output, here and below",
    "sarif-upload": "also write SARIF 2.1.0 for code scanning: the open findings alone",
    "junit": "also write JUnit XML",
    "code-quality": "also write GitLab's code-quality JSON",
    "summary": "also append a page of Markdown, e.g. to the file of the CI job's summary",
}


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
    from checker.output.further import write_further
    from checker.output.screen import screen_report
    from checker.pipeline import all_cards, check_fleet

    if options.reports and options.only:
        raise UsageError("--reports writes the reports of the whole fleet: leave out --only")
    asked, prefix = _asked(options)
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
    )
    progress.clear()
    cards = {card.id: card for card in all_cards()}
    # Before anything is printed, so that a reader of the screen who leaves early loses no report.
    printed, failed = write_further(asked, result, cards, prefix)
    if not printed:
        colour = sys.stdout.isatty() and "NO_COLOR" not in os.environ
        printed = screen_report(result, cards, colour=colour)
    if options.annotations:
        from checker.output.annotations import annotation_commands, without_commands

        printed = annotation_commands(result, cards, prefix) + without_commands(printed)
    sys.stdout.write(printed)
    if options.reports:
        written = write_reports(result, cards, Path(options.reports))
        print(f"{written} reports written to {options.reports}", file=sys.stderr)
    if failed:
        raise UsageError("; ".join(failed))
    return CLEAN if result.is_clean else OPEN_ERRORS


def _asked(options: argparse.Namespace) -> tuple[dict[str, str], str]:
    """Return the file of each further report that is asked for, and where in its repository the yard lies."""
    from checker.errors import UsageError
    from checker.output.further import FORMATS, STANDARD_OUTPUT, folder_in_repository, given_prefix

    asked = {name: file for name in FORMATS if (file := getattr(options, name)) is not None}
    if [*asked.values()].count(STANDARD_OUTPUT) + options.annotations > 1:
        raise UsageError("standard output has room for one report: give the others files")
    if options.yard_path is not None:
        return asked, given_prefix(options.yard_path)
    return asked, folder_in_repository(Path(options.folder)) if asked or options.annotations else ""


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


def _lists(options: argparse.Namespace) -> int:
    """Write the lists of one hull as CSV: wires, devices, landings, labels, parts. Nothing is checked."""
    from checker.one_hull import hull_aboard
    from checker.output.lists import write_lists

    names = write_lists(hull_aboard(Path(options.folder), options.hull), Path(options.to))
    print(f"{len(names)} lists written to {options.to}, unchecked: {', '.join(names)}", file=sys.stderr)
    return CLEAN


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
