"""Draw the symbols of the trade: IEC 60617 (from memory) for what it has, labelled boxes and marks for the rest."""

from __future__ import annotations

from checker.finding import Level, Verdict
from checker.output.drawing.canvas import BAR, LINE, THICK, THIN, Canvas
from checker.output.drawing.tree import Kind

HALF = 4.0
"""Half the width of a symbol in a line, mm."""
BOX = 1.5
"""Half the side of a box."""
MARK = 4.2
"""Width of a finding's mark with the gap after it, mm."""
_MARK_LETTERS = 1.75


def symbol(canvas: Canvas, kind: Kind, x: float, y: float) -> None:
    """Draw the symbol of a node between its two ends, which are HALF to the left and right of x."""
    _SYMBOLS.get(kind, _plain)(canvas, x, y)


def _plain(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x + HALF, y)])


def _bank(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x + 1.2, y), (x + HALF, y)])
    _cells(canvas, x, y)


def bank_negative(canvas: Canvas, x: float, y: float) -> None:
    """Draw a bank at the end of a line that comes to its negative post."""
    canvas.line([(x - HALF, y), (x - 1.8, y)])
    _cells(canvas, x, y)


def _cells(canvas: Canvas, x: float, y: float) -> None:
    for left, high, width in ((1.2, 1.4, LINE), (0.2, 0.7, THICK), (-0.8, 1.4, LINE), (-1.8, 0.7, THICK)):
        canvas.line([(x + left, y - high), (x + left, y + high)], width=width)


def _fuse(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x + HALF, y)])
    canvas.rect(x - 2.6, y - 1.1, 5.2, 2.2)


def _breaker(canvas: Canvas, x: float, y: float) -> None:
    _contact(canvas, x, y, rise=0.0)
    for sign in (-1, 1):
        canvas.line([(x + 1.5, y - sign), (x + 3.5, y + sign)])


def _closed(canvas: Canvas, x: float, y: float) -> None:
    _contact(canvas, x, y, rise=0.0)
    canvas.circle(x + 2.5, y, 0.55)


def _open(canvas: Canvas, x: float, y: float) -> None:
    _contact(canvas, x, y, rise=1.4)
    canvas.circle(x + 2.5, y, 0.55)


def _contact(canvas: Canvas, x: float, y: float, rise: float) -> None:
    canvas.line([(x - HALF, y), (x - 2.5, y)])
    canvas.line([(x + 2.5, y), (x + HALF, y)])
    canvas.line([(x - 2.5, y), (x + 2.5 - rise / 4, y - rise)], width=THICK)
    canvas.circle(x - 2.5, y, 0.55)


def _shunt(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x - 2.6, y)])
    canvas.line([(x + 2.6, y), (x + HALF, y)])
    canvas.rect(x - 2.6, y - 1.1, 5.2, 2.2)
    for left in (-1.6, 1.6):
        canvas.line([(x + left, y + 1.1), (x + left, y + 1.5)])


def _diode(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x + 1.4, y)])
    canvas.line([(x + 1.4, y), (x + HALF, y)])
    canvas.polygon([(x - 1.4, y - 1.3), (x - 1.4, y + 1.3), (x + 1.4, y)])
    canvas.line([(x + 1.4, y - 1.3), (x + 1.4, y + 1.3)])


def _diode_back(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x - 1.4, y)])
    canvas.line([(x - 1.4, y), (x + HALF, y)])
    canvas.polygon([(x + 1.4, y - 1.3), (x + 1.4, y + 1.3), (x - 1.4, y)])
    canvas.line([(x - 1.4, y - 1.3), (x - 1.4, y + 1.3)])


def _load(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x - BOX, y)])
    canvas.rect(x - BOX, y - BOX, 2 * BOX, 2 * BOX, width=THICK)


def _source(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x - 1.7, y)])
    canvas.circle(x, y, 1.7)
    canvas.text(x, y + 0.75, "G", 2.0, anchor="middle")


def _converter(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x - BOX, y)])
    canvas.rect(x - BOX, y - BOX, 2 * BOX, 2 * BOX)
    canvas.line([(x - BOX, y + BOX), (x + BOX, y - BOX)])


def _tie(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x - 2, y)])
    canvas.polygon([(x - 2, y - 1.5), (x + 0.6, y - 1.5), (x + 2, y), (x + 0.6, y + 1.5), (x - 2, y + 1.5)])


def _end(canvas: Canvas, x: float, y: float) -> None:
    canvas.line([(x - HALF, y), (x, y)])
    canvas.circle(x, y, 0.6)


_SYMBOLS = {
    Kind.BANK: _bank, Kind.FUSE: _fuse, Kind.BREAKER: _breaker, Kind.CLOSED: _closed, Kind.OPEN: _open,
    Kind.SHUNT: _shunt, Kind.DIODE: _diode, Kind.DIODE_BACK: _diode_back,
    Kind.LOAD: _load, Kind.SOURCE: _source, Kind.CONVERTER: _converter,
    Kind.TIE: _tie, Kind.END: _end,
}  # fmt: skip


def bar(canvas: Canvas, x: float, top: float, bottom: float, *, is_bus: bool) -> None:
    """Draw a bus bar, or the line down from a junction."""
    if is_bus:
        canvas.line([(x, top - 1.3), (x, bottom + 1.3)], width=BAR)
    else:
        canvas.line([(x, top), (x, bottom)])
        canvas.circle(x, top, 0.5, fill="black", width=THIN)


def mark(canvas: Canvas, x: float, y: float, number: int, verdict: Verdict, level: Level) -> None:
    """Draw the numbered mark of a finding, its centre at x and y: disc, hexagon, circle, or square if accepted."""
    is_error = level is Level.ERROR and verdict is Verdict.FINDING
    if verdict is Verdict.ACCEPTED:
        canvas.rect(x - 1.6, y - 1.45, 3.2, 2.9, fill="white")
    elif is_error:
        canvas.circle(x, y, 1.6, fill="black")
    elif level is Level.WARNING:
        canvas.polygon(
            [(x - 1.9, y), (x - 0.9, y - 1.6), (x + 0.9, y - 1.6), (x + 1.9, y), (x + 0.9, y + 1.6), (x - 0.9, y + 1.6)]
        )
    else:
        canvas.circle(x, y, 1.6)
    colour = "white" if is_error else "black"
    canvas.text(x, y + 0.62, str(number), _MARK_LETTERS, anchor="middle", fill=colour)
