"""Read arguments, print, and exit: the only place that does any of these."""

from __future__ import annotations

import argparse
import contextlib
import gc
import os
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, NoReturn

from checker import __version__

if TYPE_CHECKING:
    import datetime

    from checker.result.store import Store

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
    check.add_argument(
        "--match-reports", metavar="FOLDER", help="only ask whether the reports there are what the data give: 0 or 1"
    )
    check.add_argument("--cache", metavar="FOLDER", help="keep studies there, and take those of unchanged boats")
    check.add_argument(
        "--part", type=_part, metavar="I/N", help="only study the I-th of N shares of the boats, into --cache"
    )
    _add_today(check)
    check.add_argument("--workers", type=_positive, default=None, metavar="N",
                       help="processes to study boats with (default: one for each core)")  # fmt: skip
    check.set_defaults(run=_check)
    waiver = commands.add_parser("waiver", help="print the waiver of a finding, ready for waivers.yaml",
                                 description=_waiver.__doc__)  # fmt: skip
    waiver.add_argument("fingerprint", metavar="FINGERPRINT", help="of the finding, as the report prints it")
    waiver.add_argument(
        "folder", nargs="?", default=".", metavar="FOLDER", help="the yard's repository (default: here)"
    )
    waiver.add_argument("--hull", metavar="HULL", help="for this hull alone (default: for each hull that has it)")
    waiver.add_argument("--reason", default="", metavar="TEXT", help="why the finding may stay for now")
    waiver.add_argument("--approved-by", default="", metavar="ROLE", help="the role that accepts it, no person's name")
    waiver.add_argument("--evidence", default="", metavar="TEXT", help="where that can be looked up")
    waiver.add_argument("--expires", default="", metavar="DATE", help="the last day on which it counts")
    _add_today(waiver)
    waiver.set_defaults(run=_waiver)
    draw = commands.add_parser("draw", help="draw a hull: one line, coordination, voltages", description=_draw.__doc__)
    draw.add_argument("hull", metavar="HULL", help="the hull to draw")
    draw.add_argument("folder", nargs="?", default=".", metavar="FOLDER", help="the yard's repository (default: here)")
    draw.add_argument("--to", required=True, metavar="FOLDER", help="the folder to write the drawings into")
    draw.add_argument("--circuit", action="append", default=[], metavar="CIRCUIT",
                      help="plot this circuit only; may be repeated (default: all)")  # fmt: skip
    _add_today(draw)
    draw.set_defaults(run=_draw)
    explain = commands.add_parser("explain", help="say what a check does", description=_explain.__doc__)
    explain.add_argument("check", nargs="?", metavar="CHECK", help="the id of a check (default: list all)")
    explain.set_defaults(run=_explain)
    return parser


def _add_today(command: argparse.ArgumentParser) -> None:
    command.add_argument("--today", metavar="DATE", help="judge waivers as on this day (default: the system's date)")


def _part(text: str) -> tuple[int, int]:
    part, slash, of = text.partition("/")
    if slash and _positive(part) <= _positive(of):
        return int(part), int(of)
    raise argparse.ArgumentTypeError("write e.g. 2/4: the second of four shares")


def _today(options: argparse.Namespace) -> datetime.date:
    """Return the day of the run: the only place that reads the clock."""
    import datetime

    from checker.errors import UsageError

    try:
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
    from checker.output.files import stale_lines, write_reports
    from checker.output.screen import screen_report
    from checker.pipeline import all_cards, check_fleet
    from checker.result.store import Store

    if options.only and (options.reports or options.match_reports):
        raise UsageError("reports are those of the whole fleet: leave out --only")
    if options.reports and options.match_reports:
        raise UsageError("--reports writes and --match-reports compares: take one of them")
    if options.part:
        return _check_part(options)
    store = Store(Path(options.cache)) if options.cache else None
    progress = _Progress()
    result = check_fleet(
        Path(options.folder),
        today=_today(options),
        only=options.only,
        workers=options.workers or os.cpu_count() or 1,
        progress=progress if sys.stderr.isatty() else None,
        lists_passes=bool(options.reports or options.match_reports),
        store=store,
    )
    progress.clear()
    _tell_trouble(store)
    cards = {card.id: card for card in all_cards()}
    if options.match_reports:
        stale = stale_lines(result, cards, Path(options.match_reports))
        sys.stdout.write("".join(f"{line}\n" for line in stale))
        print(f"the reports in {options.match_reports} are "
              + ("not what the data give: write them again with --reports, look at the change, and commit it"
                 if stale else "what the data give"))  # fmt: skip
        return OPEN_ERRORS if stale else CLEAN
    colour = sys.stdout.isatty() and "NO_COLOR" not in os.environ
    sys.stdout.write(screen_report(result, cards, colour=colour))
    if options.reports:
        written = write_reports(result, cards, Path(options.reports))
        print(f"{written} reports written to {options.reports}", file=sys.stderr)
    return CLEAN if result.is_clean else OPEN_ERRORS


def _check_part(options: argparse.Namespace) -> int:
    """Study one share of the boats; the verdict is left to the run that has them all."""
    from checker.errors import UsageError
    from checker.pipeline import study_part
    from checker.result.store import Store

    if not options.cache or options.only or options.reports or options.match_reports:
        raise UsageError("--part studies into --cache FOLDER and tells no verdict: give that, and no --only or reports")
    store, (part, of) = Store(Path(options.cache)), options.part
    progress = _Progress()
    count = study_part(
        Path(options.folder), store, part=part, of=of, workers=options.workers or os.cpu_count() or 1,
        progress=progress if sys.stderr.isatty() else None,
    )  # fmt: skip
    progress.clear()
    if store.trouble:
        raise UsageError(f"studies cannot be kept in {options.cache}: {store.trouble}")
    print(f"part {part} of {of}: {count} boats, {store.taken} of them known; studies are in {options.cache}")
    print("the verdict comes with the run over the whole fleet that is given the studies of all parts")
    return CLEAN


def _tell_trouble(store: Store | None) -> None:
    if store is not None and store.trouble:
        print(f"fairloom: studies cannot be kept: {store.trouble}", file=sys.stderr)


def _waiver(options: argparse.Namespace) -> int:
    """Print the waiver of a finding as YAML, ready for waivers.yaml; what is left empty there has to be filled in."""
    from checker.output.waiver_text import waiver_text
    from checker.pipeline import all_cards, check_fleet

    result = check_fleet(
        Path(options.folder), today=_today(options), workers=os.cpu_count() or 1, lists_passes=False,
        only=[options.hull] if options.hull else (),
    )  # fmt: skip
    sys.stdout.write(
        waiver_text(
            result,
            {card.id: card for card in all_cards()},
            options.fingerprint,
            reason=options.reason,
            approved_by=options.approved_by,
            evidence=options.evidence,
            expires=options.expires,
        )
    )
    return CLEAN


def _draw(options: argparse.Namespace) -> int:
    """Draw a hull as SVG: its one-line drawing, and for each circuit coordination and voltage; its trunk as Mermaid."""
    from checker.output.drawing.files import drawing_files, write_drawings
    from checker.pipeline import open_hull

    opened = open_hull(Path(options.folder), options.hull, today=_today(options))
    files = drawing_files(opened.studies, opened.result.outcomes, options.hull, options.circuit)
    write_drawings(files, Path(options.to))
    print(f"{len(files)} drawings of {options.hull} written to {options.to}")
    return CLEAN


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
