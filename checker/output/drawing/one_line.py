"""Draw the one-line drawing of a hull: from sources to loads, with the findings marked where they are."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass

from checker.boat.parts import Switch
from checker.finding import Outcome, Verdict
from checker.network.studies import Studies
from checker.output.drawing.blocks import (
    GAP,
    WIDE,
    Block,
    findings_block,
    legend_block,
    panel_block,
)
from checker.output.drawing.canvas import THIN, Canvas
from checker.output.drawing.feed_tree import feed_trees
from checker.output.drawing.layout import NAME, Layout, Spot
from checker.output.drawing.marks import by_place, numbered
from checker.output.drawing.return_tree import return_tree
from checker.output.drawing.tree import Node

SHEETS = ((297.0, 210.0), (420.0, 297.0), (594.0, 420.0), (841.0, 594.0), (1189.0, 841.0))
"""A4 to A0, on their side, mm. Citation: ISO 216."""
ZOOMS = (1.0, 0.93, 0.87)
"""How small a drawing may be printed before the next larger sheet is taken."""
MARGIN = 7.0
_TITLE, _FOOT = 11.0, 6.0
_CHANNEL = 2.0
_CAUTION = (
    "Drawn from the yard's data; it certifies nothing. Local codes, the licensed edition of a standard and the "
    "surveyor decide. Disconnect before working; batteries are for qualified people."
)


@dataclass(frozen=True, slots=True)
class _Sheet:
    """Hold a sheet in the drawing's own mm, and the corner of each block on it.

    `is_beside` where blocks stand right of the trees. `zoom` is how large the drawing's mm is printed.
    """

    wide: float
    high: float
    corners: tuple[tuple[float, float], ...]
    is_beside: bool
    zoom: float = 1.0


def one_line(studies: Studies, outcomes: Sequence[Outcome], hull: str) -> str:
    """Return the one-line drawing of a hull as SVG, on the smallest sheet that holds it.

    Args:
        studies: Of the boat; what is drawn is its first normal state.
        outcomes: What was found of it, waivers applied; passes are not looked at.
        hull: Its id.
    """
    feeds, back = feed_trees(studies), return_tree(studies)
    drawn = {name for tree in (*feeds, back) for node in tree.walk() for name in _ids(node)}
    marks, left_out = numbered(outcomes, studies.boat, drawn)
    places = by_place(marks)
    not_assessed = sum(outcome.verdict is Verdict.NOT_ASSESSED for outcome in outcomes)
    y = MARGIN + _TITLE
    feed = Layout(studies.boat, feeds, places, MARGIN + 2, y + 5)
    returns = Layout(studies.boat, [back], places, MARGIN + 2, feed.bottom + 11)
    blocks = [panel_block(studies.boat, spot.node, places) for spot in feed.panels]
    blocks += [findings_block(marks, left_out, not_assessed), legend_block()]
    sheet = _sheet(max(feed.right, returns.right), returns.bottom, blocks, len(feed.panels))
    canvas = Canvas()
    _frame(canvas, sheet, studies, hull)
    canvas.text(MARGIN + 2, y + 3.1, "feed side, from each bank or source", NAME)
    canvas.text(MARGIN + 2, feed.bottom + 8, "return side, from the reference: banks, shunt, buses", NAME)
    entries = _entries(feed.panels, blocks, sheet)
    feed.draw(canvas, lambda spot: entries[id(spot)][0] if id(spot) in entries else None)
    returns.draw(canvas, lambda _: None)
    for x, start_y, table_x, end_y in entries.values():
        canvas.line([(x, start_y), (x, end_y), (table_x, end_y)])
    for block, (x, top) in zip(blocks, sheet.corners, strict=True):
        block.draw(canvas, x, top)
    told = (
        f"Hull {hull}, class {studies.boat.class_name}: {len(feeds)} banks or sources, {len(feed.panels)} panels,",
        f"{len(studies.boat.circuits)} circuits, {len(marks) + left_out} findings.",
        *(f"{found.number}: {found.outcome.level.value} at {found.outcome.part}." for found in marks),
    )
    return canvas.svg(sheet.wide, sheet.high, f"One-line drawing of {hull}", told, zoom=sheet.zoom)


def _ids(node: Node) -> list[str]:
    return [*node.stands_for, *node.wires, *(name for row in node.rows for name in row.stands_for)]


def _frame(canvas: Canvas, sheet: _Sheet, studies: Studies, hull: str) -> None:
    boat, state = studies.boat, studies.usual.state
    width = sheet.wide - 2 * MARGIN
    canvas.rect(MARGIN, MARGIN, width, sheet.high - 2 * MARGIN)
    canvas.line([(MARGIN, MARGIN + _TITLE), (sheet.wide - MARGIN, MARGIN + _TITLE)], width=THIN)
    title = f"One-line drawing of {hull}: {boat.class_name}, class revision {boat.revision}"
    canvas.text(MARGIN + 2, MARGIN + 4.6, title, 3.4, within=width - 4, is_bold=True)
    relays = [d.id for d in boat.devices.values() if isinstance(d.part, Switch) and not d.part.by_hand]
    closed = "; relays and contactors closed" if relays else ""
    words = f"Drawn in state {state.id}: {state.words}{closed}. Lengths are one way. Reference: {boat.reference}."
    canvas.text(MARGIN + 2, MARGIN + 9, words, NAME, within=width - 4)
    canvas.text(MARGIN + 2, sheet.high - MARGIN - 1.6, _CAUTION, NAME, within=width - 4)


def _sheet(trees_right: float, trees_bottom: float, blocks: Sequence[Block], panels: int) -> _Sheet:
    """Return the smallest sheet on which the blocks find room beside the trees or under them."""
    top, channel = MARGIN + _TITLE + 3, GAP + _CHANNEL * panels
    for (paper_wide, paper_high), zoom in itertools.product(SHEETS, ZOOMS):
        wide, high = paper_wide / zoom, paper_high / zoom
        bottom = high - MARGIN - _FOOT
        if trees_bottom > bottom or trees_right > wide - MARGIN:
            continue
        for is_beside in (True, False):
            left, start = (trees_right + channel, top) if is_beside else (MARGIN + 4, trees_bottom + GAP)
            corners = _flow(blocks, left, start, wide - MARGIN - 2, bottom, from_right=is_beside)
            if corners is not None:
                return _Sheet(wide, high, corners, is_beside, zoom)
    # Larger than any sheet: as large as it must be.
    bottom = max(trees_bottom, top + max(block.high for block in blocks), SHEETS[-1][1] - MARGIN - _FOOT)
    corners = _flow(blocks, trees_right + channel, top, float("inf"), bottom, from_right=False)
    assert corners is not None
    return _Sheet(max(x for x, _ in corners) + WIDE + 2 + MARGIN, bottom + MARGIN + _FOOT, corners, True)


def _flow(
    blocks: Sequence[Block], left: float, top: float, right: float, bottom: float, *, from_right: bool
) -> tuple[tuple[float, float], ...] | None:
    """Return the corners of the blocks, down one column after another, or None where they find no room."""
    corners: list[tuple[float, float]] = []
    x, y = left, top
    for block in blocks:
        if y + block.high > bottom and y > top:
            x, y = x + WIDE + GAP, top
        if y + block.high > bottom or x + WIDE > right:
            return None
        corners.append((x, y))
        y += block.high + GAP
    # What is over in width goes between the trees and the blocks.
    shift = right - max(x for x, _ in corners) - WIDE if from_right else 0.0
    return tuple((x + shift, y) for x, y in corners)


def _entries(
    panels: Sequence[Spot], blocks: Sequence[Block], sheet: _Sheet
) -> dict[int, tuple[float, float, float, float]]:
    """Return for each panel that a line can reach: where it turns, and where it enters its table.

    Lines that go down turn the nearer to the trees the lower they start, lines that go up the
    other way round: so none crosses another.
    """
    first = min((x for x, _ in sheet.corners), default=0.0)
    rows: list[tuple[Spot, float, float]] = []
    for spot, block, (x, top) in zip(panels, blocks, sheet.corners, strict=False):
        if sheet.is_beside and x == first:
            rows.append((spot, min(max(spot.y, top + 1.5), top + block.high - 2.5), x))
    down = [row for row in rows if row[1] > row[0].y]
    found: dict[int, tuple[float, float, float, float]] = {}
    up = 0
    for spot, end_y, x in rows:
        if end_y > spot.y:
            turn = x - _CHANNEL * (1 + [row[0] for row in down].index(spot))
        else:
            up += 1
            turn = x - _CHANNEL * (len(rows) - up + 1)
        found[id(spot)] = (turn, spot.y, x, end_y)
    return found
