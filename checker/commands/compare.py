"""The command `compare`: say what a change does to which hulls."""

from __future__ import annotations

import argparse
import os
import sys
from pathlib import Path

from checker.commands.common import CLEAN, OPEN_ERRORS, add_today, add_workers, today_of, workers_of

FAIL_ON = ("new-errors", "less-checked", "worse")


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Tell the parser what the command takes."""
    compare = commands.add_parser("compare", help="say what a change does to which hulls", description=run.__doc__)
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
    compare.add_argument("--cache", metavar="FOLDER", help="keep studies there, and take those of unchanged boats")
    add_today(compare)
    add_workers(compare)
    compare.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Say what a change does: new errors, what is silenced or looked at less, and what changed aboard which hulls."""
    from checker.errors import UsageError
    from checker.output.compare_markdown import compare_markdown
    from checker.output.compare_text import compare_text
    from checker.result.store import Store
    from checker.sides import compare

    store = Store(Path(options.cache)) if options.cache else None
    comparison = compare(
        options.base, options.head, Path(options.yard), today=today_of(options), workers=workers_of(options),
        store=store,
    )  # fmt: skip
    if store is not None and store.trouble:
        print(f"fairloom: studies cannot be kept: {store.trouble}", file=sys.stderr)
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
