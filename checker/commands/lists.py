"""The command `lists`: write what is aboard a hull as CSV."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from checker.commands.common import CLEAN, add_folder


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Tell the parser what the command takes."""
    lists = commands.add_parser("lists", help="write a hull's wire, device, landing, label and parts lists",
                                description=run.__doc__)  # fmt: skip
    add_folder(lists)
    lists.add_argument("--hull", required=True, metavar="HULL", help="the hull to list")
    lists.add_argument("--to", required=True, metavar="FOLDER", help="the folder to write the lists to")
    lists.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Write the lists of one hull as CSV: wires, devices, landings, labels, parts. Nothing is checked."""
    from checker.one_hull import hull_aboard
    from checker.output.lists import write_lists

    names = write_lists(hull_aboard(Path(options.folder), options.hull), Path(options.to))
    print(f"{len(names)} lists written to {options.to}, unchecked: {', '.join(names)}", file=sys.stderr)
    return CLEAN
