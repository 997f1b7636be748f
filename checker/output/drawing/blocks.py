"""Draw what stands beside the trees: a table for each panel, the list of findings, and the legend."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.boat.parts import Load, Overcurrent
from checker.finding import Level, Verdict
from checker.output.drawing.canvas import BAR, THIN, Canvas
from checker.output.drawing.lettering import legible, text_width, wrapped
from checker.output.drawing.marks import Mark
from checker.output.drawing.symbols import HALF, MARK, mark, symbol
from checker.output.drawing.tree import Kind, Node, Row

WIDE = 122.0
GAP = 6.0
_SIZE, _LINE = 2.1, 3.55
_HEAD = 2.2
_HEADS = ("position", "circuit", "load", "size", "length", "current")
_LOAD = 2
_WIDEST = (34.0, 24.0, 0.0, 20.0, 14.0, 14.0)
"""How wide each column may become, mm; that of the load takes what is left."""
_MOST_MARKS = 2
_MARKS_WIDE = _MOST_MARKS * MARK


@dataclass(frozen=True, slots=True)
class Block:
    """Hold something of a known height, and how it is drawn at a corner."""

    high: float
    draw: Callable[[Canvas, float, float], None]


def panel_block(boat: Boat, panel: Node, marks: Mapping[str, list[Mark]]) -> Block:
    """Return a panel as a table: its bar down the left side, and a row for each branch."""

    def draw(canvas: Canvas, x: float, y: float) -> None:
        _draw_panel(canvas, boat, panel, marks, x, y)

    return Block((len(panel.rows) + 2) * _LINE + 1.5, draw)


def _draw_panel(canvas: Canvas, boat: Boat, panel: Node, marks: Mapping[str, list[Mark]], x: float, y: float) -> None:
    own = [mark for name in panel.stands_for for mark in marks.get(name, ())][:_MOST_MARKS]
    canvas.text(x + 1.5, y + 2.6, f"panel {panel.name}  {panel.told}", _HEAD, within=WIDE - 20, is_bold=True)
    _draw_marks(canvas, own, x + WIDE - _MARKS_WIDE + MARK / 2, y + 1.8)
    befores = [(), *(row.devices for row in panel.rows)]
    cells = [_cells(boat, row, before) for row, before in zip(panel.rows, befores, strict=False)]
    widths = _widths(cells)
    y += _LINE
    _draw_cells(canvas, _HEADS, widths, x + 1.5, y + 2.6)
    y += _LINE
    top = y
    for row, words in zip(panel.rows, cells, strict=True):
        canvas.line([(x, y), (x + WIDE, y)], width=THIN)
        _draw_cells(canvas, words, widths, x + 1.5, y + 2.6)
        found = list(dict.fromkeys(m for name in row.stands_for if name for m in marks.get(name, ())))
        _draw_marks(canvas, found[:_MOST_MARKS], x + WIDE - _MARKS_WIDE + MARK / 2, y + _LINE / 2)
        y += _LINE
    canvas.line([(x, y), (x + WIDE, y)], width=THIN)
    canvas.line([(x, top - _LINE * 2), (x, y)], width=BAR)


def _widths(cells: Sequence[Sequence[str]]) -> list[float]:
    """Return how wide each column is: what its texts need up to its bound, and the rest for the load."""
    widths = [
        min(widest, max(text_width(legible(row[column]), _SIZE) for row in (_HEADS, *cells)) + 2.0)
        for column, widest in enumerate(_WIDEST)
    ]
    widths[_LOAD] = WIDE - 1.5 - _MARKS_WIDE - sum(widths[:_LOAD] + widths[_LOAD + 1 :])
    return widths


def _draw_cells(canvas: Canvas, cells: Sequence[str], widths: Sequence[float], x: float, y: float) -> None:
    for words, width in zip(cells, widths, strict=True):
        canvas.text(x, y, words, _SIZE, within=width - 1.5)
        x += width


def _draw_marks(canvas: Canvas, marks: Sequence[Mark], x: float, y: float) -> None:
    for found in marks:
        mark(canvas, x, y, found.number, found.outcome.verdict, found.outcome.level)
        x += MARK


def _cells(boat: Boat, row: Row, before: tuple[str, ...]) -> tuple[str, ...]:
    """Return what is written in the row of a branch, in the order of the columns."""
    circuit = boat.circuits.get(row.circuit)
    parts = [boat.devices[name].part for name in row.devices]
    ratings = " ".join(f"{part.rating_a:g} A" for part in parts if isinstance(part, Overcurrent))
    position = f"{'+'.join(row.devices)} {ratings}"
    if row.devices == before:
        position = f"{row.devices[0]} shared"
    conductors = [boat.conductors[name] for name in row.wires]
    sizes = dict.fromkeys(conductor.size.text for conductor in conductors)
    part = boat.devices[row.load].part
    current_a = circuit.current_a if circuit is not None else None
    if current_a is None and isinstance(part, Load):
        current_a = part.current_a
    name = circuit.name if circuit is not None else row.load
    if circuit is not None and row.load != circuit.load:
        name = f"{row.load} {name}"
    switches = "".join(f", {switch} {'closed' if is_closed else 'open'}" for switch, is_closed in row.switches)
    return (
        position,
        row.circuit,
        f"{name}{switches}",
        "/".join(sizes),
        f"{sum(conductor.length_m for conductor in conductors):.2f} m" if conductors else "",
        "" if current_a is None else f"{current_a:g} A",
    )


def findings_block(marks: Sequence[Mark], left_out: int, not_assessed: int) -> Block:
    """Return the list of numbered findings."""
    notes: list[str] = []
    if left_out:
        notes.append(f"and {left_out} more, not marked here: the report tells them all")
    if not_assessed:
        notes.append(f"{not_assessed} places were not assessed: the report names them")
    lines = sum(len(_lines(found)) for found in marks) + len(notes) + (0 if marks else 1)

    def draw(canvas: Canvas, x: float, y: float) -> None:
        _draw_findings(canvas, marks, notes, x, y)

    return Block(_LINE * (lines + 1) + 2.0, draw)


def _lines(found: Mark) -> list[str]:
    outcome = found.outcome
    word = f"accepted {outcome.level.value}" if outcome.verdict is Verdict.ACCEPTED else outcome.level.value
    subject = outcome.part if outcome.circuit in ("", outcome.part) else f"{outcome.part} of {outcome.circuit}"
    where = "" if found.at else " (not on the drawing)"
    return wrapped(f"{word}{where}: {subject}: {outcome.fault} [{outcome.check}]", _SIZE, WIDE - 8, 3)


def _draw_findings(canvas: Canvas, marks: Sequence[Mark], notes: Sequence[str], x: float, y: float) -> None:
    canvas.text(x, y + 2.6, "findings", _HEAD, is_bold=True)
    y += _LINE + 1.0
    if not marks:
        canvas.text(x, y + 2.6, "none", _SIZE)
        y += _LINE
    for found in marks:
        mark(canvas, x + 2.2, y + 1.9, found.number, found.outcome.verdict, found.outcome.level)
        for line in _lines(found):
            canvas.text(x + 6, y + 2.6, line, _SIZE)
            y += _LINE
    for note in notes:
        canvas.text(x, y + 2.6, note, _SIZE, within=WIDE)
        y += _LINE


_LEGEND = (
    (Kind.FUSE, "fuse"), (Kind.BREAKER, "circuit breaker"),
    (Kind.CLOSED, "switch, closed"), (Kind.OPEN, "switch, open"),
    (Kind.SHUNT, "shunt of the monitor"), (Kind.BANK, "battery bank"), (Kind.SOURCE, "source"),
    (Kind.CONVERTER, "charger, converter"), (Kind.LOAD, "load"), (Kind.DIODE, "diode, one way"),
    (Kind.TIE, "goes on elsewhere"), (Kind.END, "end"),
)  # fmt: skip
_MARKS = (
    (Verdict.FINDING, Level.ERROR, "error"), (Verdict.FINDING, Level.WARNING, "warning"),
    (Verdict.FINDING, Level.NOTE, "note"), (Verdict.ACCEPTED, Level.ERROR, "accepted"),
)  # fmt: skip
_PER_LINE = 4
_LEGEND_LINE = 5.4


def legend_block() -> Block:
    """Return the legend: symbols, and the marks of findings."""
    lines = -(-len(_LEGEND) // _PER_LINE) + 1
    return Block(_LINE + lines * _LEGEND_LINE + 1.0, _draw_legend)


def _draw_legend(canvas: Canvas, x: float, y: float) -> None:
    canvas.text(x, y + 2.6, "symbols", _HEAD, is_bold=True)
    y += _LINE
    step = WIDE / _PER_LINE
    for number, (kind, words) in enumerate(_LEGEND):
        left, line = x + number % _PER_LINE * step, y + number // _PER_LINE * _LEGEND_LINE + _LEGEND_LINE / 2
        symbol(canvas, kind, left + HALF, line)
        canvas.text(left + 2 * HALF + 1, line + 0.8, words, 1.9, within=step - 2 * HALF - 1.5)
    y += -(-len(_LEGEND) // _PER_LINE) * _LEGEND_LINE + _LEGEND_LINE / 2
    for number, (verdict, level, words) in enumerate(_MARKS):
        left = x + number * step
        mark(canvas, left + HALF, y, number + 1, verdict, level)
        canvas.text(left + 2 * HALF + 1, y + 0.8, words, 1.9, within=step - 2 * HALF - 1.5)
