"""The command `waiver`: print the waiver of a finding."""

from __future__ import annotations

import argparse
import os
import sys
from pathlib import Path

from checker.commands.common import CLEAN, add_folder, add_today, today_of


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Tell the parser what the command takes."""
    waiver = commands.add_parser("waiver", help="print the waiver of a finding, ready for waivers.yaml",
                                 description=run.__doc__)  # fmt: skip
    waiver.add_argument("fingerprint", metavar="FINGERPRINT", help="of the finding, as the report prints it")
    add_folder(waiver)
    waiver.add_argument("--hull", metavar="HULL", help="for this hull alone (default: for each hull that has it)")
    waiver.add_argument("--reason", default="", metavar="TEXT", help="why the finding may stay for now")
    waiver.add_argument("--approved-by", default="", metavar="ROLE", help="the role that accepts it, no person's name")
    waiver.add_argument("--evidence", default="", metavar="TEXT", help="where that can be looked up")
    waiver.add_argument("--expires", default="", metavar="DATE", help="the last day on which it counts")
    add_today(waiver)
    waiver.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Print the waiver of a finding as YAML, ready for waivers.yaml; what is left empty there has to be filled in."""
    from checker.output.waiver_text import waiver_text
    from checker.pipeline import all_cards, check_fleet

    result = check_fleet(
        Path(options.folder), today=today_of(options), workers=os.cpu_count() or 1, lists_passes=False,
        only=[options.hull] if options.hull else (),
    )  # fmt: skip
    cards = {card.id: card for card in all_cards()}
    given = {name: getattr(options, name) for name in ("reason", "approved_by", "evidence", "expires")}
    sys.stdout.write(waiver_text(result, cards, options.fingerprint, **given))
    return CLEAN
