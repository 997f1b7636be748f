"""Draw lines, shapes and text on a sheet in millimetres, and write it as SVG: the same bytes everywhere.

Nothing in the picture has an id, so that several can stand in one page. Black on white; what
is told apart is told apart by shape, dashes and text.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from html import escape

from checker.output.drawing.lettering import FACES, legible, shortened

Point = tuple[float, float]
THIN, LINE, THICK, BAR = 0.13, 0.25, 0.5, 1.2
"""Widths of strokes, mm."""


def number(value: float) -> str:
    """Print a coordinate with at most two decimals."""
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text in ("-0", "") else text


class Canvas:
    """Collect the shapes of one picture."""

    def __init__(self) -> None:
        self._shapes: list[str] = []

    def line(self, points: Sequence[Point], *, width: float = LINE, dash: str = "", grey: str = "") -> None:
        """Draw a line through points."""
        dashes = f' stroke-dasharray="{dash}"' if dash else ""
        stroke = f' stroke="{grey}"' if grey else ""
        at = " ".join(f"{number(x)},{number(y)}" for x, y in points)
        self._shapes.append(f'<polyline points="{at}" stroke-width="{number(width)}"{stroke}{dashes}/>')

    def area(self, points: Sequence[Point], fill: str) -> None:
        """Fill a polygon without an outline."""
        at = " ".join(f"{number(x)},{number(y)}" for x, y in points)
        self._shapes.append(f'<polygon points="{at}" fill="{fill}" stroke="none"/>')

    def polygon(self, points: Sequence[Point], *, fill: str = "white", width: float = LINE) -> None:
        """Draw a closed polygon."""
        at = " ".join(f"{number(x)},{number(y)}" for x, y in points)
        self._shapes.append(f'<polygon points="{at}" fill="{fill}" stroke-width="{number(width)}"/>')

    def rect(self, x: float, y: float, wide: float, high: float, *, fill: str = "none", width: float = LINE) -> None:
        """Draw a rectangle."""
        self._shapes.append(
            f'<rect x="{number(x)}" y="{number(y)}" width="{number(wide)}" height="{number(high)}" '
            f'fill="{fill}" stroke-width="{number(width)}"/>'
        )

    def circle(self, x: float, y: float, radius: float, *, fill: str = "white", width: float = LINE) -> None:
        """Draw a circle."""
        self._shapes.append(
            f'<circle cx="{number(x)}" cy="{number(y)}" r="{number(radius)}" fill="{fill}" '
            f'stroke-width="{number(width)}"/>'
        )

    def text(
        self, x: float, y: float, text: str, size: float, *, within: float = 0.0, is_bold: bool = False,
        anchor: str = "start", fill: str = "black",
    ) -> None:  # fmt: skip
        """Write a text on its line at y, cut to a width if one is given; nothing where it is empty."""
        shown = shortened(text, size, within, is_bold=is_bold) if within else legible(text)
        if not shown.strip():
            return
        bold = ' font-weight="bold"' if is_bold else ""
        place = f' text-anchor="{anchor}"' if anchor != "start" else ""
        colour = f' fill="{fill}"' if fill != "black" else ""
        self._shapes.append(
            f'<text x="{number(x)}" y="{number(y)}" font-size="{number(size)}"{bold}{place}{colour}>'
            f"{escape(shown)}</text>"
        )

    def svg(self, wide: float, high: float, title: str, description: Iterable[str], *, zoom: float = 1.0) -> str:
        """Return the picture, in mm at a zoom, with a title and a description for who cannot see it."""
        told = " ".join(legible(part) for part in description)
        box = f'viewBox="0 0 {number(wide)} {number(high)}"'
        size = f'width="{number(wide * zoom)}mm" height="{number(high * zoom)}mm" {box}'
        name = escape(legible(title))
        return "\n".join([
            f'<svg xmlns="http://www.w3.org/2000/svg" {size} role="img" aria-label="{name}">',
            f"<title>{name}</title>",
            f"<desc>{escape(told)}</desc>",
            f'<rect x="0" y="0" width="{number(wide)}" height="{number(high)}" fill="white" stroke="none"/>',
            '<g fill="none" stroke="black" stroke-linejoin="round">',
            *(shape for shape in self._shapes if not shape.startswith("<text")),
            "</g>",
            f'<g fill="black" stroke="none" font-family="{FACES}">',
            *(shape for shape in self._shapes if shape.startswith("<text")),
            "</g>",
            "</svg>",
            "",
        ])  # fmt: skip
