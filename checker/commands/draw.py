"""The command `draw`: draw a hull."""

from __future__ import annotations

import argparse
from pathlib import Path

from checker.commands.common import CLEAN, add_folder, add_today, today_of


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Tell the parser what the command takes."""
    draw = commands.add_parser("draw", help="draw a hull: one line, coordination, voltages", description=run.__doc__)
    draw.add_argument("hull", metavar="HULL", help="the hull to draw")
    add_folder(draw)
    draw.add_argument("--to", required=True, metavar="FOLDER", help="the folder to write the drawings into")
    draw.add_argument("--circuit", action="append", default=[], metavar="CIRCUIT",
                      help="plot this circuit only; may be repeated (default: all)")  # fmt: skip
    add_today(draw)
    draw.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Draw a hull as SVG: its one-line drawing, and for each circuit coordination and voltage; its trunk as Mermaid."""
    from checker.output.drawing.files import drawing_files, write_drawings
    from checker.pipeline import open_hull

    opened = open_hull(Path(options.folder), options.hull, today=today_of(options))
    files = drawing_files(opened.studies, opened.result.outcomes, options.hull, options.circuit)
    write_drawings(files, Path(options.to))
    print(f"{len(files)} drawings of {options.hull} written to {options.to}")
    return CLEAN
