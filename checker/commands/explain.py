"""The command `explain`: say what a check does."""

from __future__ import annotations

import argparse
import sys

from checker.commands.common import CLEAN


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Tell the parser what the command takes."""
    explain = commands.add_parser("explain", help="say what a check does", description=run.__doc__)
    explain.add_argument("check", nargs="?", metavar="CHECK", help="the id of a check (default: list all)")
    explain.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
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
