"""Parts of SVG drawings as text: lines, arrows, circles, words, and the frame with its description."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from html import escape

from millreason.units import show

INK, WORK, CUT, TOOL, SIGN, NEAR, PALE = (
    "#1d2429",
    "#eef0ea",
    "#d3dacb",
    "#2f5d8a",
    "#a03c12",
    "#c98a1b",
    "#f1f1ee",
)
GLASS = "#2f5d8a1f"
CENTRE_LINE = "12 4 2 4"
Point = tuple[float, float]


def number(value: float) -> str:
    """Return a coordinate as finely as a drawing needs it, without needless zeros."""
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def points_text(points: Iterable[Point]) -> str:
    """Return points as SVG writes them."""
    return " ".join(f"{number(x)},{number(y)}" for x, y in points)


def drawing(name: str, size: Point, title: str, told: str, body: Iterable[str]) -> str:
    """Wrap the parts of a drawing; `name` keeps the ids of several drawings on one page apart."""
    width, height = number(size[0]), number(size[1])
    head = (
        f'<svg xmlns="http://www.w3.org/2000/svg" role="img" viewBox="0 0 {width} {height}"'
        f' width="{width}" height="{height}" aria-labelledby="{name}-title {name}-told"'
        ' font-family="Helvetica, Arial, sans-serif" font-size="12">'
    )
    title_part = f'<title id="{name}-title">{escape(title)}</title>'
    told_part = f'<desc id="{name}-told">{escape(told)}</desc>'
    return "\n".join((head, title_part, told_part, *body, "</svg>"))


def text(at: Point, words: str, anchor: str = "start", colour: str = INK, size: float = 12) -> str:
    """Write words; a white rim keeps them readable where they cross a line."""
    rim = 'paint-order="stroke" stroke="#fff" stroke-width="3" stroke-linejoin="round"'
    place = f'x="{number(at[0])}" y="{number(at[1])}" text-anchor="{anchor}"'
    return f'<text {place} fill="{colour}" font-size="{number(size)}" {rim}>{escape(words)}</text>'


def length(value_mm: float, units: str) -> str:
    """Return a computed length as finely as it can be set: to 0.01 mm."""
    return show(round(value_mm, 2), "mm", units)


def stacked(at: Point, length_mm: float, units: str) -> list[str]:
    """Write a length, and the metric value on a second line where the first is in inches."""
    first, _, second = length(length_mm, units).partition(" (")
    lines = [text(at, first, size=11)]
    return lines + ([text((at[0], at[1] + 13), f"({second}", size=11)] if second else [])


def line(start: Point, end: Point, colour: str = INK, width: float = 1, dash: str = "") -> str:
    """Draw a straight line."""
    (x1, y1), (x2, y2) = start, end
    ends = f'x1="{number(x1)}" y1="{number(y1)}" x2="{number(x2)}" y2="{number(y2)}"'
    return f"<line {ends} {_stroke(colour, width, dash)}/>"


def arrow_head(start: Point, end: Point, colour: str = INK) -> str:
    """Draw the head of an arrow that ends at `end` and comes from `start`."""
    angle = math.atan2(end[1] - start[1], end[0] - start[0])
    barbs = ((end[0] - 9 * math.cos(angle + turn), end[1] - 9 * math.sin(angle + turn)) for turn in (0.35, -0.35))
    return f'<polygon points="{points_text((end, *barbs))}" fill="{colour}"/>'


def arrow(start: Point, end: Point, colour: str = INK, width: float = 1.5) -> str:
    """Draw an arrow."""
    return line(start, end, colour, width) + arrow_head(start, end, colour)


def circle(centre: Point, radius: float, stroke: str, fill: str = "none", width: float = 1.5, dash: str = "") -> str:
    """Draw a circle."""
    place = f'cx="{number(centre[0])}" cy="{number(centre[1])}" r="{number(radius)}"'
    return f'<circle {place} fill="{fill}" {_stroke(stroke, width, dash)}/>'


def rectangle(corner: Point, size: Point, fill: str, stroke: str = "none") -> str:
    """Draw an upright rectangle."""
    place = f'x="{number(corner[0])}" y="{number(corner[1])}"'
    extent = f'width="{number(size[0])}" height="{number(size[1])}"'
    return f'<rect {place} {extent} fill="{fill}" stroke="{stroke}"/>'


def path(commands: str, stroke: str, fill: str = "none", width: float = 1.5) -> str:
    """Draw a path from SVG path commands."""
    return f'<path d="{commands}" fill="{fill}" {_stroke(stroke, width, "")}/>'


def polygon(points: Sequence[Point], stroke: str, fill: str, width: float = 1) -> str:
    """Draw a closed shape."""
    return f'<polygon points="{points_text(points)}" fill="{fill}" {_stroke(stroke, width, "")}/>'


def polyline(points: Sequence[Point], colour: str, width: float = 2, dash: str = "") -> str:
    """Draw an open line through points."""
    return f'<polyline points="{points_text(points)}" fill="none" {_stroke(colour, width, dash)}/>'


def arc(start: Point, end: Point, radius: float, clockwise: bool, long_way: bool = False) -> str:
    """Return the path commands of a circular arc between two points."""
    flags = f"{int(long_way)} {int(clockwise)}"
    return f"M{points_text([start])} A{number(radius)},{number(radius)} 0 {flags} {points_text([end])}"


def _stroke(colour: str, width: float, dash: str) -> str:
    dashes = f' stroke-dasharray="{dash}"' if dash else ""
    return f'stroke="{colour}" stroke-width="{number(width)}"{dashes}'
