"""The commands that write pages: the hand-over file of a hull, and the view of a fleet."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from checker.commands.common import (
    CLEAN,
    OPEN_ERRORS,
    ProgressLine,
    add_folder,
    add_today,
    add_workers,
    today_of,
    workers_of,
)


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Tell the parser what the commands take."""
    handover = commands.add_parser("handover", help="write the file that goes with a hull, as one HTML page",
                                   description=write_handover.__doc__)  # fmt: skip
    handover.add_argument("hull", metavar="HULL", help="the hull")
    add_folder(handover)
    handover.add_argument("--to", required=True, metavar="FILE", help="the HTML file to write")
    add_today(handover)
    handover.set_defaults(run=write_handover)
    fleet = commands.add_parser("fleet", help="show the fleet: who is ready, where it is tight, what is open",
                                description=show_fleet.__doc__)  # fmt: skip
    add_folder(fleet)
    fleet.add_argument("--to", metavar="FILE", help="also write it as one HTML page")
    add_today(fleet)
    add_workers(fleet)
    fleet.set_defaults(run=show_fleet)


def write_handover(options: argparse.Namespace) -> int:
    """Write the hand-over file of a hull: one HTML page with all that is known of it, to read and to print.

    It ends with 0 where the hull is ready, and with 1 where it is not; the page is written either way.
    """
    from checker.errors import UsageError
    from checker.output.gate_text import gate_line
    from checker.output.pages.dossier import Dossier
    from checker.output.pages.handover import handover_page
    from checker.pipeline import all_cards, open_hull
    from checker.result.gate import gate

    opened = open_hull(Path(options.folder), options.hull, today=today_of(options), plans_tests=True)
    found = gate(opened.fleet, options.hull)
    if found is None:
        raise UsageError(f"{options.hull}: its test could not be planned")
    page = handover_page(
        Dossier(
            gate=found, studies=opened.studies, limits=opened.limits, aboard=opened.aboard, written=opened.written,
            yard=opened.fleet.yard, tool_version=opened.fleet.tool_version, cards={c.id: c for c in all_cards()},
        )
    )  # fmt: skip
    _write(page, options.to)
    print(f"{gate_line(found)}\nwritten to {options.to}", file=sys.stderr)
    return CLEAN if found.is_ready else OPEN_ERRORS


def show_fleet(options: argparse.Namespace) -> int:
    """Print a fleet on a page: hulls by status, ready or not, smallest headroom, open findings, retrofit list."""
    from checker.output.fleet_text import fleet_text
    from checker.output.pages.fleet import fleet_page
    from checker.pipeline import all_cards, check_fleet
    from checker.result.fleet_view import fleet_view

    progress = ProgressLine()
    result = check_fleet(
        Path(options.folder), today=today_of(options), workers=workers_of(options), progress=progress.call,
        plans_tests=True,
    )  # fmt: skip
    progress.clear()
    view = fleet_view(result, {card.id: card for card in all_cards()})
    if options.to:
        _write(fleet_page(view), options.to)
        print(f"written to {options.to}", file=sys.stderr)
    sys.stdout.write(fleet_text(view))
    return CLEAN if result.is_clean else OPEN_ERRORS


def _write(page: str, file: str) -> None:
    from checker.errors import UsageError

    try:
        Path(file).write_bytes(page.encode())
    except OSError as error:
        raise UsageError(f"{file} cannot be written: {error.strerror}") from error
