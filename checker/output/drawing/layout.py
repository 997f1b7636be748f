"""Give each node of the trees its place: a column for its level, a row for each end.

Every row is a band of its own, and a vertical line spans rows of its own branch only, so that
no line crosses another and no two texts meet.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from functools import partial

from checker.boat.hull import Boat
from checker.output.drawing.canvas import Canvas
from checker.output.drawing.lettering import text_width
from checker.output.drawing.marks import Mark
from checker.output.drawing.symbols import BOX, HALF, MARK, bank_negative, bar, mark, symbol
from checker.output.drawing.tree import Kind, Node

NAME, TOLD = 2.2, 2.0
"""Sizes of the letters, mm."""
ROW, TREE_GAP = 8.4, 4.0
ABOVE, BELOW = 2.0, 3.2
"""Where the lines of text stand above and below the line of a row."""
LEAF_TEXT = 42.0
MOST_MARKS = 3
_LEAVES = (Kind.LOAD, Kind.SOURCE, Kind.CONVERTER, Kind.TIE, Kind.END, Kind.BANK)
_BARS = (Kind.BUS, Kind.JUNCTION)
_WIDEST_LABEL = 34.0


@dataclass(slots=True)
class Column:
    """Hold one level: where the conductors that lead to it and its symbols begin."""

    wires: float = 3.0
    symbols: float = 2 * HALF
    wires_x: float = 0.0
    symbols_x: float = 0.0

    @property
    def centre(self) -> float:
        """Return the middle of its symbols."""
        return self.symbols_x + self.symbols / 2


@dataclass(slots=True)
class Spot:
    """Hold where a node stands."""

    node: Node
    level: int
    y: float = 0.0
    bottom: float = 0.0
    children: list[Spot] = field(default_factory=list)


def wire_words(boat: Boat, wires: Sequence[str]) -> tuple[str, str]:
    """Return what is written above and below some conductors side by side: names with the length, and size."""
    first = boat.conductors[wires[0]]
    sizes = dict.fromkeys(boat.conductors[name].size.text for name in wires)
    count = f"{len(wires)} × " if len(wires) > 1 else ""
    names = wires[0] if len(wires) == 1 else f"{wires[0]} +{len(wires) - 1}"
    return f"{names}  {first.length_m:.2f} m", f"{count}{' / '.join(sizes)}"


class Layout:
    """Hold trees that share their columns, laid out from a corner, and draw them."""

    def __init__(self, boat: Boat, trees: Sequence[Node], marks: Mapping[str, list[Mark]], x: float, y: float) -> None:
        self._boat = boat
        self._marks = marks
        self.columns: list[Column] = []
        self.panels: list[Spot] = []
        self.spots = [self._spot(tree, 0) for tree in trees]
        left = x
        for column in self.columns:
            column.wires_x = left
            column.symbols_x = left + column.wires
            left = column.symbols_x + column.symbols
        row_y = y + ABOVE + NAME
        for spot in self.spots:
            used = self._rows(spot, row_y)
            # What is written under the root takes two lines more than a row has.
            row_y = max(used, row_y + ROW + 2 * TOLD) + TREE_GAP
        self.bottom = row_y - TREE_GAP - ABOVE - NAME
        self.right = max((self._right(spot) for spot in self._all()), default=left)

    def _all(self) -> list[Spot]:
        found: list[Spot] = []
        waiting = list(reversed(self.spots))
        while waiting:
            spot = waiting.pop()
            found.append(spot)
            waiting.extend(reversed(spot.children))
        return found

    def _spot(self, node: Node, level: int) -> Spot:
        if level == len(self.columns):
            self.columns.append(Column())
        column = self.columns[level]
        if node.wires:
            over, under = (text_width(words, TOLD) for words in wire_words(self._boat, node.wires))
            over += MARK * len(self._marks_at(node.wires))
            column.wires = max(column.wires, min(_WIDEST_LABEL, max(over, under) + 2.5))
        if not self._is_leaf(node) and node.kind is not Kind.PANEL:
            width = text_width(node.name, NAME, is_bold=True) + MARK * len(self._marks_at(node.stands_for))
            below = max(text_width(words, TOLD) for words in (node.told, node.note))
            column.symbols = max(column.symbols, min(_WIDEST_LABEL, max(width, below) + 1.5))
        spot = Spot(node, level)
        spot.children = [self._spot(child, level + 1) for child in node.children]
        if node.kind is Kind.PANEL:
            self.panels.append(spot)
        return spot

    @staticmethod
    def _is_leaf(node: Node) -> bool:
        return node.kind in _LEAVES and not node.children

    def _rows(self, spot: Spot, y: float) -> float:
        """Place a spot and what hangs on it; return where the next row stands."""
        spot.y = spot.bottom = y
        for child in spot.children:
            spot.bottom = y
            y = self._rows(child, y)
        return y if spot.children else y + ROW

    def _right(self, spot: Spot) -> float:
        column = self.columns[spot.level]
        if not self._is_leaf(spot.node):
            return column.symbols_x + column.symbols
        first, second = self._leaf_words(spot.node)
        width = text_width(first, NAME, is_bold=True) + 1 + MARK * len(self._marks_at(spot.node.stands_for))
        return self._leaf_x(spot) + min(LEAF_TEXT, max(width, text_width(second, TOLD)))

    def _leaf_x(self, spot: Spot) -> float:
        return self.columns[spot.level].symbols_x + HALF + 3.0

    def _leaf_words(self, node: Node) -> tuple[str, str]:
        """Return the two lines beside an end: what it is, and the circuit that it belongs to."""
        if node.kind is Kind.TIE:
            return node.name, node.note
        if node.kind is Kind.END:
            return node.name, node.told
        if node.kind is Kind.BANK:
            return f"{node.name} {node.note}", node.told
        circuit = self._boat.circuits.get(node.circuit)
        told = f"{node.name}  {node.told}" if node.told else node.name
        return told, f"{circuit.id} {circuit.name}" if circuit is not None else ""

    def _marks_at(self, ids: Sequence[str]) -> list[Mark]:
        found = [mark for name in dict.fromkeys(ids) for mark in self._marks.get(name, ())]
        return found[:MOST_MARKS]

    # Drawing

    def draw(self, canvas: Canvas, end_of: Callable[[Spot], float | None]) -> None:
        """Draw the trees; `end_of` tells how far to the right the line to a panel goes, None for a named end."""
        for spot in self._all():
            self._draw_spot(canvas, spot, end_of)

    def _draw_spot(self, canvas: Canvas, spot: Spot, end_of: Callable[[Spot], float | None]) -> None:
        node, column = spot.node, self.columns[spot.level]
        for child in spot.children:
            self._draw_wire(canvas, spot, child)
        if node.kind is Kind.PANEL:
            self._draw_panel_end(canvas, spot, end_of(spot))
        elif self._is_leaf(node):
            draw = bank_negative if node.kind is Kind.BANK else partial(symbol, kind=node.kind)
            draw(canvas, x=column.symbols_x + HALF, y=spot.y)
            self._draw_leaf_text(canvas, spot)
        else:
            self._draw_inner(canvas, spot)

    def _draw_inner(self, canvas: Canvas, spot: Spot) -> None:
        node, column = spot.node, self.columns[spot.level]
        x = column.centre
        if node.kind in _BARS:
            bar(canvas, x, spot.y, spot.bottom, is_bus=node.kind is Kind.BUS)
        else:
            symbol(canvas, node.kind, x, spot.y)
            down_x = self._down_x(spot)
            from_x = x + (BOX if node.kind in _LEAVES else HALF)
            canvas.line([(from_x, spot.y), (down_x, spot.y), (down_x, max(child.y for child in spot.children))])
        self._labelled(canvas, node, column, spot)

    def _down_x(self, spot: Spot) -> float:
        """Return where the line goes on behind a symbol: at the right edge of its column, clear of its texts."""
        column = self.columns[spot.level]
        return column.symbols_x + column.symbols

    def _labelled(self, canvas: Canvas, node: Node, column: Column, spot: Spot) -> None:
        marks = self._marks_at(node.stands_for)
        room = column.symbols - 1.0 - MARK * len(marks)
        width = min(room, text_width(node.name, NAME, is_bold=True))
        left = column.centre - (width + MARK * len(marks)) / 2
        if marks:
            canvas.text(left, spot.y - ABOVE, node.name, NAME, within=room, is_bold=True)
        else:
            canvas.text(column.centre, spot.y - ABOVE, node.name, NAME, within=room, is_bold=True, anchor="middle")
        self._draw_marks(canvas, marks, left + width + MARK / 2, spot.y - ABOVE - 1.0)
        y = spot.bottom + BELOW if node.kind in _BARS else spot.y + BELOW
        for words in (node.told, node.note):
            if words:
                canvas.text(column.centre, y, words, TOLD, within=column.symbols - 1.0, anchor="middle")
                y += TOLD + 0.7

    def _draw_leaf_text(self, canvas: Canvas, spot: Spot) -> None:
        first, second = self._leaf_words(spot.node)
        marks = self._marks_at(spot.node.stands_for)
        x, room = self._leaf_x(spot), LEAF_TEXT - MARK * len(marks)
        y = spot.y - 0.5 if second else spot.y + 0.8
        canvas.text(x, y, first, NAME, within=room, is_bold=True)
        width = min(room, text_width(first, NAME, is_bold=True))
        self._draw_marks(canvas, marks, x + width + MARK / 2, y - 0.8)
        canvas.text(x, spot.y + 2.4, second, TOLD, within=LEAF_TEXT)

    def _draw_wire(self, canvas: Canvas, parent: Spot, child: Spot) -> None:
        start, end = self.columns[parent.level], self.columns[child.level]
        is_bar = parent.node.kind in _BARS
        x = start.centre if is_bar else self._down_x(parent)
        if child.node.kind is Kind.PANEL:
            to = end.symbols_x
        elif child.node.kind in _BARS:
            to = end.centre
        else:
            to = end.symbols_x if self._is_leaf(child.node) else end.centre - HALF
        canvas.line([(x, child.y), (to, child.y)])
        if child.node.wires:
            above, below = wire_words(self._boat, child.node.wires)
            marks = self._marks_at(child.node.wires)
            room = end.wires - 1.3
            canvas.text(end.wires_x + 1.0, child.y - 0.9, above, TOLD, within=room - MARK * len(marks))
            width = min(room - MARK * len(marks), text_width(above, TOLD))
            self._draw_marks(canvas, marks, end.wires_x + 1.0 + width + MARK / 2, child.y - 2.2)
            canvas.text(end.wires_x + 1.0, child.y + 2.5, below, TOLD, within=room)

    def _draw_panel_end(self, canvas: Canvas, spot: Spot, end_x: float | None) -> None:
        column = self.columns[spot.level]
        if end_x is None:
            symbol(canvas, Kind.TIE, column.symbols_x + HALF, spot.y)
            x = self._leaf_x(spot)
            canvas.text(x, spot.y - 0.5, f"panel {spot.node.name}", NAME, within=LEAF_TEXT, is_bold=True)
            canvas.text(x, spot.y + 2.4, "see its table", TOLD, within=LEAF_TEXT)
        else:
            canvas.line([(column.symbols_x, spot.y), (end_x, spot.y)])

    @staticmethod
    def _draw_marks(canvas: Canvas, marks: Sequence[Mark], x: float, y: float) -> None:
        for found in marks:
            mark(canvas, x, y, found.number, found.outcome.verdict, found.outcome.level)
            x += MARK
