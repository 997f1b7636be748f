"""The command `check`: hold a fleet against its limit sets, and write what was found."""

from __future__ import annotations

import argparse
import os
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from checker.commands.common import (
    CLEAN,
    OPEN_ERRORS,
    ProgressLine,
    add_folder,
    add_today,
    add_workers,
    positive,
    today_of,
    workers_of,
)

if TYPE_CHECKING:
    from collections.abc import Mapping

    from checker.finding import Card
    from checker.result.model import FleetResult

_FURTHER = {
    "sarif": "also write SARIF 2.1.0, with what was accepted as suppressed; - is standard output, here and below",
    "sarif-upload": "also write SARIF 2.1.0 for code scanning: the open findings alone",
    "junit": "also write JUnit XML",
    "code-quality": "also write GitLab's code-quality JSON",
    "summary": "also append a page of Markdown, e.g. to the file of the CI job's summary",
}


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Tell the parser what the command takes."""
    check = commands.add_parser("check", help="check every hull and option set of a yard", description=run.__doc__)
    add_folder(check)
    check.add_argument(
        "--only", action="append", default=[], metavar="HULL", help="check this hull only; may be repeated"
    )
    check.add_argument("--reports", metavar="FOLDER", help="also write the text reports and the JSON result there")
    check.add_argument(
        "--match-reports", metavar="FOLDER", help="only ask whether the reports there are what the data give: 0 or 1"
    )
    check.add_argument("--cache", metavar="FOLDER", help="keep studies there, and take those of unchanged boats")
    check.add_argument(
        "--part", type=_part, metavar="I/N", help="only study the I-th of N shares of the boats, into --cache"
    )
    add_today(check)
    add_workers(check)
    for option, told in _FURTHER.items():
        check.add_argument(f"--{option}", metavar="FILE", help=told)
    check.add_argument("--annotations", action="store_true",
                       help="also print the findings as the commands with which a CI job marks lines")  # fmt: skip
    check.add_argument("--yard-path", metavar="PATH",
                       help="the yard's folder from the root of its repository, for the paths in the "
                            "reports above (default: found by .git)")  # fmt: skip
    check.set_defaults(run=run)


def _part(text: str) -> tuple[int, int]:
    part, slash, of = text.partition("/")
    if slash and positive(part) <= positive(of):
        return int(part), int(of)
    raise argparse.ArgumentTypeError("write e.g. 2/4: the second of four shares")


def run(options: argparse.Namespace) -> int:
    """Check every hull, and every option set that may be sold, against the limit sets that apply."""
    from checker.errors import UsageError
    from checker.pipeline import all_cards, check_fleet
    from checker.result.store import Store

    if options.only and (options.reports or options.match_reports):
        raise UsageError("reports are those of the whole fleet: leave out --only")
    if options.reports and options.match_reports:
        raise UsageError("--reports writes and --match-reports compares: take one of them")
    asked, prefix = _asked(options)
    if options.part:
        return _study_part(options, asked)
    store = Store(Path(options.cache)) if options.cache else None
    progress = ProgressLine()
    result = check_fleet(
        Path(options.folder),
        today=today_of(options),
        only=options.only,
        workers=workers_of(options),
        progress=progress.call,
        lists_passes=bool(options.reports or options.match_reports or options.junit),
        store=store,
    )
    progress.clear()
    if store is not None and store.trouble:
        print(f"fairloom: studies cannot be kept: {store.trouble}", file=sys.stderr)
    cards = {card.id: card for card in all_cards()}
    if options.match_reports:
        return _match(result, cards, options.match_reports)
    return _tell(options, result, cards, asked, prefix)


def _tell(
    options: argparse.Namespace, result: FleetResult, cards: Mapping[str, Card], asked: dict[str, str], prefix: str
) -> int:
    """Write all that was asked for, and print."""
    from checker.errors import UsageError
    from checker.output.files import write_reports
    from checker.output.further import write_further
    from checker.output.screen import screen_report

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


def _match(result: FleetResult, cards: Mapping[str, Card], folder: str) -> int:
    """Tell whether reports are what the data give."""
    from checker.output.files import stale_lines

    stale = stale_lines(result, cards, Path(folder))
    sys.stdout.write("".join(f"{line}\n" for line in stale))
    due = "not what the data give: write them again with --reports, look at the change, and commit it"
    print(f"the reports in {folder} are {due if stale else 'what the data give'}")
    return OPEN_ERRORS if stale else CLEAN


def _study_part(options: argparse.Namespace, asked: dict[str, str]) -> int:
    """Study one share of the boats; the verdict is left to the run that has them all."""
    from checker.errors import UsageError
    from checker.pipeline import study_part
    from checker.result.store import Store

    others = options.only or options.reports or options.match_reports or asked or options.annotations
    if not options.cache or others:
        raise UsageError("--part studies into --cache FOLDER and tells no verdict: give that, and no --only or reports")
    store, (part, of) = Store(Path(options.cache)), options.part
    progress = ProgressLine()
    count = study_part(
        Path(options.folder), store, part=part, of=of, workers=workers_of(options), progress=progress.call
    )
    progress.clear()
    if store.trouble:
        raise UsageError(f"studies cannot be kept in {options.cache}: {store.trouble}")
    print(f"part {part} of {of}: {count} boats, {store.taken} of them known; studies are in {options.cache}")
    print("the verdict comes with the run over the whole fleet that is given the studies of all parts")
    return CLEAN


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
