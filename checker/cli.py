"""Read arguments, hand over to a command, and exit: the only place that does the last."""

from __future__ import annotations

import argparse
import contextlib
import gc
import os
import sys
from collections.abc import Sequence
from typing import NoReturn

from checker import __version__
from checker.commands import check, compare, draw, explain, handover, lists, pages, waiver
from checker.commands.common import NOT_DONE

COMMANDS = (check, compare, waiver, handover, pages, draw, lists, explain)


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
    for command in COMMANDS:
        command.add(commands)
    return parser
