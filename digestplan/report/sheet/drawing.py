"""A drawing as plain numbers, and its two small writers: SVG, and the shapes of the PDF."""

from dataclasses import dataclass
from html import escape
from typing import Any, Literal

Point = tuple[float, float]
Anchor = Literal["start", "middle", "end"]
Style = Literal[
    "band",
    "edge",
    "hatch",
    "middle",
    "target",
    "axis",
    "grid",
    "bracket",
    "visit",
    "temperature",
    "paper",
]


@dataclass(frozen=True, slots=True)
class Stroke:
    """A line through points, or, closed, an area."""

    style: Style
    points: tuple[Point, ...]
    closed: bool = False


@dataclass(frozen=True, slots=True)
class Label:
    """A text at a point: ``start``, ``middle`` or ``end`` of it is there."""

    text: str
    at: Point
    anchor: Anchor = "middle"
    size: float = 8.0
    bold: bool = False


@dataclass(frozen=True, slots=True)
class Drawing:
    """Everything of a chart, from back to front."""

    width: float
    height: float
    strokes: tuple[Stroke, ...]
    labels: tuple[Label, ...]


# fill, colour and width of the line, dashes
_STYLES: dict[Style, tuple[str | None, str | None, float, str]] = {
    "grid": (None, "#cccccc", 0.5, ""),
    "axis": (None, "#000000", 1.0, ""),
    "band": ("#e4edf7", None, 0.0, ""),
    "hatch": (None, "#7a92ad", 0.4, ""),
    "edge": (None, "#33506e", 0.6, ""),
    "middle": (None, "#000000", 2.0, ""),
    "target": (None, "#000000", 1.0, "6 3"),
    "bracket": (None, "#000000", 1.8, ""),
    "visit": ("#555555", None, 0.0, ""),
    "temperature": (None, "#000000", 1.2, ""),
    "paper": ("#ffffff", None, 0.0, ""),
}


def svg(drawn: Drawing, title: str) -> str:
    """
    Return a drawing as an SVG element.

    Parameters
    ----------
    drawn
        The drawing.
    title
        What it shows, for those who do not see it.

    Returns
    -------
    element
        With all its styles inside.
    """
    height = drawn.height
    box = f"0 0 {drawn.width:g} {height:g}"
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="{box}" role="img">',
        f"<title>{escape(title)}</title>",
    ]
    for stroke in drawn.strokes:
        fill, colour, width, dashes = _STYLES[stroke.style]
        points = " ".join(f"{x:.1f},{height - y:.1f}" for x, y in stroke.points)
        tag = "polygon" if stroke.closed else "polyline"
        dash = f' stroke-dasharray="{dashes}"' if dashes else ""
        line = f' stroke="{colour}" stroke-width="{width:g}"{dash}' if colour else ""
        parts.append(f'<{tag} points="{points}" fill="{fill or "none"}"{line}/>')
    for label in drawn.labels:
        x, y = label.at
        weight = ' font-weight="bold"' if label.bold else ""
        parts.append(
            f'<text x="{x:.1f}" y="{height - y:.1f}" text-anchor="{label.anchor}" '
            f'font-size="{label.size:g}"{weight}>{escape(label.text)}</text>'
        )
    parts.append("</svg>")
    return "\n".join(parts)


def shapes(drawn: Drawing, font: str, bold: str, width: float) -> Any:
    """
    Return a drawing as reportlab's shapes.

    Parameters
    ----------
    drawn
        The drawing.
    font, bold
        Names of registered fonts.
    width
        How wide it is to be. [1/72 inch]

    Returns
    -------
    shapes
        A ``reportlab.graphics.shapes.Drawing``.
    """
    from reportlab.graphics import shapes as paper
    from reportlab.lib.colors import HexColor

    scale = width / drawn.width
    result = paper.Drawing(width, drawn.height * scale, transform=(scale, 0, 0, scale, 0, 0))
    for stroke in drawn.strokes:
        fill, colour, thick, dashes = _STYLES[stroke.style]
        flat = [value for point in stroke.points for value in point]
        look = {
            "strokeColor": None if colour is None else HexColor(colour),
            "strokeWidth": thick,
            "strokeDashArray": [float(d) for d in dashes.split()] or None,
        }
        if stroke.closed:
            filling = None if fill is None else HexColor(fill)
            result.add(paper.Polygon(flat, fillColor=filling, **look))
        else:
            result.add(paper.PolyLine(flat, **look))
    for label in drawn.labels:
        name = bold if label.bold else font
        result.add(
            paper.String(
                *label.at, label.text, fontName=name, fontSize=label.size, textAnchor=label.anchor
            )
        )
    return result
