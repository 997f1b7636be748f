"""The commands before hand-over: print a hull's test sheet, say whether it is ready, sign it off."""

from __future__ import annotations

import argparse
import os
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from checker.commands.common import CLEAN, OPEN_ERRORS, add_folder, add_today, today_of

if TYPE_CHECKING:
    from checker.result.gate import Gate
    from checker.result.model import FleetResult


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Tell the parser what the commands take."""
    sheet = commands.add_parser("sheet", help="print a hull's test sheet, with what is predicted",
                                description=print_sheet.__doc__)  # fmt: skip
    _add_hull(sheet)
    sheet.add_argument("--csv", metavar="FILE", help="also write it as CSV, to be filled in at the boat")
    sheet.set_defaults(run=print_sheet)
    ready = commands.add_parser("ready", help="say whether a hull may be handed over", description=say_ready.__doc__)
    _add_hull(ready)
    ready.set_defaults(run=say_ready)
    sign = commands.add_parser("sign", help="sign off a hull that is ready", description=sign_off.__doc__)
    _add_hull(sign)
    sign.add_argument("--role", required=True, metavar="ROLE", help="the role that signs, no person's name")
    sign.set_defaults(run=sign_off)


def _add_hull(command: argparse.ArgumentParser) -> None:
    command.add_argument("hull", metavar="HULL", help="the hull")
    add_folder(command)
    add_today(command)


def print_sheet(options: argparse.Namespace) -> int:
    """Print the test sheet of a hull as Markdown: what to look at and measure, where, and what the data predict."""
    from checker.errors import UsageError
    from checker.output.sheet_text import sheet_csv, sheet_markdown

    result, _ = _result(options)
    subject = next(s for s in result.subjects if s.id == options.hull)
    if options.csv:
        try:
            Path(options.csv).write_bytes(sheet_csv(subject).encode())
        except OSError as error:
            raise UsageError(f"{options.csv} cannot be written: {error.strerror}") from error
        print(f"sheet written to {options.csv}; filled in, it belongs into sheets/", file=sys.stderr)
    sys.stdout.write(sheet_markdown(subject))
    return CLEAN


def say_ready(options: argparse.Namespace) -> int:
    """Say on one page whether a hull may be handed over, and what still speaks against it."""
    from checker.output.gate_text import gate_page
    from checker.pipeline import all_cards

    _, gate = _result(options)
    sys.stdout.write(gate_page(gate, {card.id: card for card in all_cards()}))
    return CLEAN if gate.is_ready else OPEN_ERRORS


def sign_off(options: argparse.Namespace) -> int:
    """Write into the hull's file who signed it off and when, and the mark of the wiring; refuse a hull not ready."""
    from checker.errors import UsageError
    from checker.output.gate_text import gate_line
    from checker.result.signing import sign

    role = options.role.strip()
    if not role or not role.isprintable():
        raise UsageError("--role: write the role that signs, on one line")
    _, gate = _result(options)
    if not gate.is_ready_but_for_signature:
        print(gate_line(gate))
        print(f"not signed; `fairloom ready {options.hull}` tells what is open")
        return OPEN_ERRORS
    file = sign(Path(options.folder), gate.subject, gate.handover, role, today_of(options))
    print(f"{options.hull}: signed by {role} on {today_of(options)} for the wiring {gate.handover.content}; see {file}")
    return CLEAN


def _result(options: argparse.Namespace) -> tuple[FleetResult, Gate]:
    """Check one hull with its test planned; return the result, and the gate of the hull.

    Raises:
        UsageError: If there is no such hull, or its files must be mended first.
    """
    from checker.errors import UsageError
    from checker.pipeline import check_fleet
    from checker.result.gate import gate

    result = check_fleet(
        Path(options.folder), today=today_of(options), only=[options.hull], workers=os.cpu_count() or 1,
        lists_passes=False, plans_tests=True,
    )  # fmt: skip
    found = gate(result, options.hull)
    if found is None:
        first = next((outcome for outcome in result.file_outcomes if outcome.at.file), None)
        told = f" ({first.at}: {first.fault})" if first is not None else ""
        raise UsageError(f"{options.hull} cannot be studied: mend the faults of its files first{told}")
    return result, found
