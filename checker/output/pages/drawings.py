"""Take the drawings of a hull into a page: the one place that knows what draws them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from importlib import import_module
from importlib.util import find_spec

from checker.finding import Outcome
from checker.network.studies import Studies
from checker.output.pages.html import Markup

_NAMESPACE = ' xmlns="http://www.w3.org/2000/svg"'
"""Needed in a file, not in a page: the page then names no address at all."""


@dataclass(frozen=True, slots=True)
class Drawn:
    """Hold the drawings for a page: the one-line drawing, and plots with their titles; nothing where none were made."""

    one_line: Markup | None = None
    plots: tuple[tuple[str, Markup], ...] = ()


def drawn(studies: Studies, outcomes: Sequence[Outcome], hull: str, circuits: Sequence[str]) -> Drawn:
    """Return the one-line drawing of a hull, and the coordination and voltage plots of some circuits."""
    if find_spec("checker.output.drawing") is None:
        return Drawn()
    files: dict[str, str] = import_module("checker.output.drawing.files").drawing_files(
        studies, outcomes, hull, circuits
    )
    plots: list[tuple[str, Markup]] = []
    for circuit in circuits:
        for kind in ("coordination", "voltage"):
            svg = files.get(f"{kind}-{circuit}.svg")
            if svg is not None:
                name = studies.boat.circuits[circuit].name
                plots.append((f"{circuit} {name}: {kind}", _inline(svg)))
    return Drawn(_inline(files["one-line.svg"]), tuple(plots))


def _inline(svg: str) -> Markup:
    return Markup(svg.replace(_NAMESPACE, "", 1))
