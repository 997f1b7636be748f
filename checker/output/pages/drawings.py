"""Take the drawings of a hull into a page: the one place that knows what draws them."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from checker.finding import Outcome
from checker.network.studies import Studies
from checker.output.drawing.coordination_plot import coordination_plot
from checker.output.drawing.files import drop_limits
from checker.output.drawing.one_line import one_line
from checker.output.drawing.paths import Ways
from checker.output.drawing.voltage_plot import voltage_plot
from checker.output.pages.html import Markup

_NAMESPACE = ' xmlns="http://www.w3.org/2000/svg"'
"""Needed in a file, not in a page: the page then names no address at all."""


PICTURE = "one-line-picture"
_PIECES = {297: (1, 1), 420: (2, 1), 594: (2, 2), 841: (4, 2), 1189: (4, 4)}
"""Into how many sheets of A4, across and down, a sheet is cut, by its width, mm. Citation: ISO 216."""
OVERLAP = 30.0
"""What two pieces side by side both show, in the drawing's mm."""
_SIZE = re.compile(r'<svg width="([0-9.]+)mm" height="[0-9.]+mm" viewBox="0 0 ([0-9.]+) ([0-9.]+)"')


@dataclass(frozen=True, slots=True)
class Picture:
    """Hold a drawing for the screen, and the same in pieces of A4 for the printer; `is_wide` where these lie."""

    whole: Markup
    pieces: tuple[Markup, ...]
    is_wide: bool


@dataclass(frozen=True, slots=True)
class Drawn:
    """Hold the drawings for a page: the one-line drawing, and plots with their titles."""

    one_line: Picture
    plots: tuple[tuple[str, Markup], ...]


def drawn(studies: Studies, outcomes: Sequence[Outcome], hull: str, circuits: Sequence[str]) -> Drawn:
    """Return the one-line drawing of a hull, and the coordination and voltage plots of some circuits."""
    ways, limits = Ways(studies), drop_limits(outcomes)
    plots: list[tuple[str, Markup]] = []
    for circuit in (studies.boat.circuits[name] for name in circuits):
        way = ways.way(circuit)
        if way is None:
            continue
        for kind, svg in (
            ("coordination", coordination_plot(studies, circuit, way, hull)),
            ("voltage", voltage_plot(studies, circuit, way, hull, limits.get(circuit.id))),
        ):
            if svg is not None:
                plots.append((f"{circuit.id} {circuit.name}: {kind}", _inline(svg)))
    return Drawn(_picture(one_line(studies, outcomes, hull)), tuple(plots))


def _picture(svg: str) -> Picture:
    """Cut a drawing for A4: the printer's pieces are windows on the one on the page, which is there once."""
    whole = _inline(svg)
    size = _SIZE.match(whole.text)
    paper, wide, high = (float(size[1]), float(size[2]), float(size[3])) if size else (0.0, 0.0, 0.0)
    across, down = _PIECES.get(round(paper), (1, 1))
    whole = Markup(whole.text.replace("<svg ", f'<svg id="{PICTURE}" ', 1))
    pieces = tuple(
        _window(wide, high, (*_span(wide, column, across), *_span(high, row, down)))
        for row in range(down)
        for column in range(across)
        if across * down > 1
    )
    return Picture(whole, pieces, is_wide=across == down)


def _span(length: float, number: int, of: int) -> tuple[float, float]:
    """Return start and length of one of some equal pieces, longer towards its neighbours so that no word is lost."""
    start = max(0.0, length / of * number - OVERLAP / 2)
    return start, min(length, length / of * (number + 1) + OVERLAP / 2) - start


def _window(wide: float, high: float, span: tuple[float, float, float, float]) -> Markup:
    left, across, top, down = span
    box = f"{left:g} {top:g} {across:g} {down:g}"
    return Markup(
        f'<svg viewBox="{box}" aria-hidden="true"><use href="#{PICTURE}" width="{wide:g}" height="{high:g}"/></svg>\n'
    )


def _inline(svg: str) -> Markup:
    return Markup(svg.replace(_NAMESPACE, "", 1))
