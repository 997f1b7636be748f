"""Read a drawing back and prove from its own geometry that it can be read: nothing meets, nothing is cut."""

from __future__ import annotations

import itertools
import math
import xml.etree.ElementTree as ET
from dataclasses import dataclass

from checker.output.drawing.lettering import text_width

SVG = "{http://www.w3.org/2000/svg}"
SLACK_MM = 0.02
ASCENT, DESCENT = 0.76, 0.22
Box = tuple[float, float, float, float]
Segment = tuple[float, float, float, float]


@dataclass(frozen=True)
class Picture:
    """Hold what a drawing is made of: its size, its texts with the room they take, its lines and all its strokes."""

    wide: float
    high: float
    texts: list[tuple[str, Box]]
    lines: list[Segment]
    segments: list[Segment]
    points: list[tuple[float, float]]


def read(svg: str) -> Picture:
    """Read a drawing; it must be well-formed XML, with a title and a description."""
    root = ET.fromstring(svg)
    assert root.tag == f"{SVG}svg" and root.get("role") == "img"
    assert root.findtext(f"{SVG}title") and root.findtext(f"{SVG}desc")
    wide, high = (float(v) for v in root.get("viewBox", "").split()[2:])
    texts: list[tuple[str, Box]] = []
    lines: list[Segment] = []
    segments: list[Segment] = []
    points: list[tuple[float, float]] = []
    for shape in root.iter():
        name = shape.tag.removeprefix(SVG)
        if name == "text":
            texts.append((shape.text or "", _text_box(shape)))
        elif name in ("polyline", "polygon"):
            corners = [tuple(map(float, pair.split(","))) for pair in shape.get("points", "").split()]
            points += [(x, y) for x, y in corners]
            if shape.get("stroke") != "none":
                closed = [*corners, corners[0]] if name == "polygon" else corners
                pieces = [(*a, *b) for a, b in itertools.pairwise(closed)]
                segments += pieces
                lines += pieces if name == "polyline" else []
        elif name == "rect":
            x, y, w, h = (float(shape.get(key, "0")) for key in ("x", "y", "width", "height"))
            points += [(x, y), (x + w, y + h)]
            if shape.get("stroke") != "none":
                segments += [(x, y, x + w, y), (x, y + h, x + w, y + h), (x, y, x, y + h), (x + w, y, x + w, y + h)]
        elif name == "circle":
            x, y, r = (float(shape.get(key, "0")) for key in ("cx", "cy", "r"))
            points += [(x - r, y - r), (x + r, y + r)]
            ring = [(x + r * math.cos(a * math.pi / 12), y + r * math.sin(a * math.pi / 12)) for a in range(25)]
            segments += [(*a, *b) for a, b in itertools.pairwise(ring)]
    return Picture(wide, high, texts, lines, segments, points)


def _text_box(shape: ET.Element) -> Box:
    size, x, y = (float(shape.get(key, "0")) for key in ("font-size", "x", "y"))
    width = text_width(shape.text or "", size, is_bold=shape.get("font-weight") == "bold")
    left = {"middle": x - width / 2, "end": x - width}.get(shape.get("text-anchor", ""), x)
    return left, y - ASCENT * size, left + width, y + DESCENT * size


def faults(svg: str) -> list[str]:
    """Return what is wrong with a drawing: texts that meet, what lies outside, lines through texts."""
    picture = read(svg)
    found = [f"outside: {text}" for text, box in picture.texts if not _is_inside(box, picture)]
    found += [f"outside: {x}, {y}" for x, y in picture.points if not _is_inside((x, y, x, y), picture)]
    ordered = sorted(picture.texts, key=lambda row: row[1][1])
    for number, (text, box) in enumerate(ordered):
        for other, second in ordered[number + 1 :]:
            if second[1] > box[3]:
                break
            if _overlap(box, second):
                found.append(f"texts meet: {text} | {other}")
    for text, box in picture.texts:
        found += [f"line through {text}: {segment}" for segment in picture.segments if _crosses(segment, box)]
    return found


def crossings(svg: str) -> list[tuple[Segment, Segment]]:
    """Return the level and upright lines that cross each other, beyond where they only touch."""
    lines = [tuple(s) for s in read(svg).lines]
    level = [s for s in lines if s[1] == s[3]]
    upright = [s for s in lines if s[0] == s[2]]
    return [
        (a, b) for a in level for b in upright
        if min(a[0], a[2]) + SLACK_MM < b[0] < max(a[0], a[2]) - SLACK_MM
        and min(b[1], b[3]) + SLACK_MM < a[1] < max(b[1], b[3]) - SLACK_MM
    ]  # fmt: skip


def _is_inside(box: Box, picture: Picture) -> bool:
    return box[0] >= 0 and box[1] >= 0 and box[2] <= picture.wide and box[3] <= picture.high


def _overlap(a: Box, b: Box) -> bool:
    return min(a[2], b[2]) - max(a[0], b[0]) > SLACK_MM and min(a[3], b[3]) - max(a[1], b[1]) > SLACK_MM


def _crosses(segment: Segment, box: Box) -> bool:
    """Tell whether a line has a piece inside a box."""
    x0, y0, x1, y1 = segment
    left, top, right, bottom = box[0] + SLACK_MM, box[1] + SLACK_MM, box[2] - SLACK_MM, box[3] - SLACK_MM
    if max(x0, x1) <= left or min(x0, x1) >= right or max(y0, y1) <= top or min(y0, y1) >= bottom:
        return False
    first, last = 0.0, 1.0
    for step, near in ((x0 - x1, x0 - left), (x1 - x0, right - x0), (y0 - y1, y0 - top), (y1 - y0, bottom - y0)):
        if step == 0:
            if near <= 0:
                return False
        elif step < 0:
            first = max(first, near / step)
        else:
            last = min(last, near / step)
    return first < last
