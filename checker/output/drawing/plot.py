"""Draw a plot: a frame with axes, straight or logarithmic, lines cut at its edges, and labels that never meet.

A label begins at the place that it names and runs to the right, each on a line of its own:
above the frame the one farthest to the left stands highest, below it lowest. So no leader
passes through another label.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass

from checker.output.drawing.canvas import LINE, THIN, Canvas, Point

LETTERS = 2.3
LANE = 3.6
TICKS = 4.8
"""Height of the strip with the figures under a frame, mm."""
DASHES = ("", "3 1", "0.8 0.8", "5 1 0.8 1", "2 0.8", "5 1.5", "0.3 1", "7 1 2 1")
GRID = "#b0b0b0"


@dataclass(frozen=True, slots=True)
class Axis:
    """Hold the range of an axis and whether it is logarithmic."""

    low: float
    high: float
    is_log: bool

    def share(self, value: float) -> float:
        """Return where a value lies, 0 at the low end and 1 at the high end."""
        if self.is_log:
            return (math.log10(value) - math.log10(self.low)) / (math.log10(self.high) - math.log10(self.low))
        return (value - self.low) / (self.high - self.low)

    def ticks(self) -> list[float]:
        """Return the values that are written at the axis: each decade, or round steps."""
        if self.is_log:
            first, last = round(math.log10(self.low)), round(math.log10(self.high))
            return [10.0**power for power in range(first, last + 1)]
        step = round_step((self.high - self.low) / 6)
        first = math.ceil(self.low / step - 1e-9)
        return [number * step for number in range(first, math.floor(self.high / step + 1e-9) + 1)]


def round_step(least: float) -> float:
    """Return the smallest of 1, 2 and 5 times a power of ten that is no smaller than a value."""
    power = 10.0 ** math.floor(math.log10(least))
    return next(power * digit for digit in (1, 2, 5, 10) if power * digit >= least * (1 - 1e-9))


@dataclass(frozen=True, slots=True)
class Frame:
    """Hold the place of a plot on its sheet, and its axes."""

    x: float
    y: float
    wide: float
    high: float
    across: Axis
    up: Axis

    def at(self, x: float, y: float) -> Point:
        """Return the place of two values on the sheet."""
        return self.x + self.across.share(x) * self.wide, self.y + (1 - self.up.share(y)) * self.high

    @property
    def bottom(self) -> float:
        """Return the lower edge."""
        return self.y + self.high

    @property
    def right(self) -> float:
        """Return the right edge."""
        return self.x + self.wide

    def line(self, canvas: Canvas, points: Sequence[Point], *, width: float = LINE, dash: str = "") -> None:
        """Draw a line through values, cut at the frame."""
        places = [self.at(*point) for point in points]
        run: list[Point] = []
        for start, end in itertools.pairwise(places):
            piece = _cut(start, end, (self.x, self.y, self.right, self.bottom))
            if piece is None:
                continue
            if not run or run[-1] != piece[0]:
                self._end(canvas, run, width, dash)
                run = [piece[0]]
            run.append(piece[1])
        self._end(canvas, run, width, dash)

    @staticmethod
    def _end(canvas: Canvas, run: Sequence[Point], width: float, dash: str) -> None:
        if len(run) > 1:
            canvas.line(run, width=width, dash=dash)

    def area(self, canvas: Canvas, points: Sequence[Point], fill: str) -> None:
        """Fill the part of a polygon of values that lies in the frame."""
        places = [self.at(*point) for point in points]
        for axis, sign, edge in ((0, 1, self.x), (0, -1, self.right), (1, 1, self.y), (1, -1, self.bottom)):
            places = _half(places, axis, sign, edge)
        if len(places) > 2:
            canvas.area(places, fill)

    def inside(self, point: Point) -> Point:
        """Return a place on the sheet, moved to the nearest edge of the frame where it lies outside."""
        x, y = self.at(*point)
        return min(max(x, self.x), self.right), min(max(y, self.y), self.bottom)

    def draw_across(self, canvas: Canvas, title: str) -> None:
        """Draw the grid of the axis across, with its figures in the strip below."""
        for value in self.across.ticks():
            x, _ = self.at(value, self.up.low)
            canvas.line([(x, self.y), (x, self.bottom)], width=THIN, grey=GRID)
            canvas.text(x, self.bottom + 3.6, figure(value), LETTERS, anchor="middle")
        canvas.text(self.right + 8, self.bottom + 3.6, title, LETTERS)

    def draw_up(self, canvas: Canvas, title: str) -> None:
        """Draw the grid of the axis up, with its figures on the left."""
        for value in self.up.ticks():
            _, y = self.at(self.across.low, value)
            canvas.line([(self.x, y), (self.right, y)], width=THIN, grey=GRID)
            canvas.text(self.x - 1, y + 0.8, figure(value), LETTERS, anchor="end")
        canvas.text(self.x - 1, self.y - 2.2, title, LETTERS, anchor="end")

    def border(self, canvas: Canvas) -> None:
        """Draw the edge of the frame."""
        canvas.rect(self.x, self.y, self.wide, self.high)


def figure(value: float) -> str:
    """Print a figure at an axis: 0.001, 0.25, 100, 10 000."""
    text = f"{value:.6f}".rstrip("0").rstrip(".")
    whole, dot, rest = text.partition(".")
    spaced = f"{int(whole):,}".replace(",", " ") if abs(value) >= 10_000 else whole
    return "0" if text in ("-0", "") else f"{spaced}{dot}{rest}".replace("-", "−")


def labels_above(canvas: Canvas, labels: Sequence[tuple[float, str]], frame_top: float, right: float) -> None:
    """Write labels above a frame, each with a leader down to it at its x."""
    _labels(canvas, labels, right, [frame_top - LANE * number - 1.2 for number in range(1, len(labels) + 1)], frame_top)


def labels_below(canvas: Canvas, labels: Sequence[tuple[float, str]], strip_bottom: float, right: float) -> None:
    """Write labels under the strip of figures below a frame, each with a leader up to it at its x."""
    lines = [strip_bottom + LANE * number for number in range(1, len(labels) + 1)]
    _labels(canvas, labels, right, lines, strip_bottom)


def _labels(
    canvas: Canvas, labels: Sequence[tuple[float, str]], right: float, lines: Sequence[float], edge: float
) -> None:
    """Write each label on its line, the nearest line for the one farthest to the right."""
    for (x, words), y in zip(sorted(labels, key=lambda label: (-label[0], label[1])), lines, strict=True):
        canvas.line([(x, edge), (x, y - 0.8)], width=THIN)
        canvas.text(x + 1, y, words, LETTERS, within=right - x - 1)


def _half(places: Sequence[Point], axis: int, sign: int, edge: float) -> list[Point]:
    """Return the part of a polygon on one side of an edge. Citation: Sutherland and Hodgman, CACM 17, 1974."""
    found: list[Point] = []
    for number, point in enumerate(places):
        before = places[number - 1]
        depth, depth_before = sign * (point[axis] - edge), sign * (before[axis] - edge)
        if (depth < 0) is not (depth_before < 0):
            share = depth_before / (depth_before - depth)
            found.append((before[0] + share * (point[0] - before[0]), before[1] + share * (point[1] - before[1])))
        if depth >= 0:
            found.append(point)
    return found


def _cut(start: Point, end: Point, box: tuple[float, float, float, float]) -> tuple[Point, Point] | None:
    """Return the piece of a line inside a box, or None. Citation: Liang and Barsky, ACM Trans. Graphics 3, 1984."""
    (x0, y0), (x1, y1) = start, end
    dx, dy = x1 - x0, y1 - y0
    first, last = 0.0, 1.0
    for step, gap in ((-dx, x0 - box[0]), (dx, box[2] - x0), (-dy, y0 - box[1]), (dy, box[3] - y0)):
        if step == 0:
            if gap < -1e-9:
                return None
        elif step < 0:
            first = max(first, gap / step)
        else:
            last = min(last, gap / step)
    if first > last:
        return None
    return (x0 + first * dx, y0 + first * dy), (x0 + last * dx, y0 + last * dy)
