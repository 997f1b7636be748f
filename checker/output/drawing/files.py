"""Make all drawings of a hull, and write them into a folder."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from pathlib import Path

from checker.errors import UsageError
from checker.finding import Outcome
from checker.network.studies import Studies
from checker.output.drawing.coordination_plot import coordination_plot
from checker.output.drawing.mermaid import trunk_markdown
from checker.output.drawing.one_line import one_line
from checker.output.drawing.paths import Ways
from checker.output.drawing.voltage_plot import voltage_plot
from checker.reading.words import nearest, shown

ONE_LINE, TRUNK = "one-line.svg", "trunk.md"
_DROP_CHECKS = ("voltage-drop", "voltage-drop-from-bank")


def drop_limits(outcomes: Sequence[Outcome]) -> dict[str, dict[str, float]]:
    """Return the share of the voltage that each circuit may lose, by limit set, as the checks of the drop judged it."""
    found: dict[str, dict[str, float]] = {}
    for outcome in outcomes:
        if outcome.check in _DROP_CHECKS and outcome.measure is not None:
            found.setdefault(outcome.part, {})[outcome.limit_set] = outcome.measure.limit
    return found


def drawing_files(
    studies: Studies, outcomes: Sequence[Outcome], hull: str, circuits: Collection[str] = ()
) -> dict[str, str]:
    """Return the drawings of a hull by file name; with circuits named, the plots of these alone.

    A circuit that no bank reaches in the first normal state, or that has nothing to plot, has no plot.

    Raises:
        UsageError: If the boat has no such circuit.
    """
    known = studies.boat.circuits
    for name in circuits:
        if name not in known:
            meant = nearest(name, known)
            raise UsageError(
                f"there is no circuit {shown(name)} on {hull}" + (f"; did you mean {meant}?" if meant else "")
            )
    files = {ONE_LINE: one_line(studies, outcomes, hull), TRUNK: trunk_markdown(studies, hull)}
    ways, limits = Ways(studies), drop_limits(outcomes)
    for circuit in known.values():
        if circuits and circuit.id not in circuits:
            continue
        way = ways.way(circuit)
        if way is None:
            continue
        plots = {
            "coordination": coordination_plot(studies, circuit, way, hull),
            "voltage": voltage_plot(studies, circuit, way, hull, limits.get(circuit.id)),
        }
        files |= {f"{kind}-{circuit.id}.svg": svg for kind, svg in plots.items() if svg is not None}
    return files


def write_drawings(files: dict[str, str], folder: Path) -> None:
    """Write the drawings.

    Raises:
        UsageError: If the folder cannot be written.
    """
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name, text in sorted(files.items()):
            (folder / name).write_bytes(text.encode("utf-8"))
    except OSError as error:
        raise UsageError(f"drawings cannot be written to {folder}: {error.strerror}") from error
