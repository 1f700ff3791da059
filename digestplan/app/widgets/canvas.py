"""A grid of cells, each with a glyph, an ink and a ground, that becomes strips of text."""

from typing import ClassVar

from rich.segment import Segment
from rich.style import Style
from textual.color import Color
from textual.strip import Strip
from textual.widget import Widget

from digestplan.app.terminal import Look


class Grid:
    """
    Cells of a drawing; inks and grounds are names of colours of the theme.

    Parameters
    ----------
    width, height
        In cells.
    """

    def __init__(self, width: int, height: int) -> None:
        self.width, self.height = width, height
        self.glyphs = [[" "] * width for _ in range(height)]
        self.inks = [[""] * width for _ in range(height)]
        self.grounds = [[""] * width for _ in range(height)]

    def put(self, x: int, y: int, glyph: str, ink: str = "label") -> None:
        """Set a glyph; outside the grid nothing happens."""
        if 0 <= x < self.width and 0 <= y < self.height:
            self.glyphs[y][x], self.inks[y][x] = glyph, ink

    def write(self, x: int, y: int, text: str, ink: str = "label") -> None:
        """Write a text from a cell on."""
        for i, glyph in enumerate(text):
            self.put(x + i, y, glyph, ink)

    def paint(self, x: int, y: int, ground: str) -> None:
        """Set the ground of a cell."""
        if 0 <= x < self.width and 0 <= y < self.height:
            self.grounds[y][x] = ground

    def text(self) -> str:
        """Return the glyphs alone."""
        return "\n".join("".join(row).rstrip() for row in self.glyphs)


class Drawn(Widget):
    """A widget that draws a grid in the colours of the theme, and again only when it must."""

    BOLD: ClassVar[set[str]] = {"line", "bracket", "target"}

    _drawn: list[Strip] | None = None
    _drawn_size: tuple[int, int] = (0, 0)

    def draw(self, width: int, height: int, look: Look) -> Grid:  # noqa: ARG002 - for those who draw
        """Return the drawing for a size."""
        return Grid(width, height)

    def redraw(self) -> None:
        """Draw anew."""
        self._drawn = None
        self.refresh()

    def notify_style_update(self) -> None:
        """Draw anew in another theme."""
        self._drawn = None
        super().notify_style_update()

    def render_line(self, y: int) -> Strip:
        """Return one line of the drawing."""
        size = (self.content_size.width, self.content_size.height)
        if self._drawn is None or self._drawn_size != size:
            self._drawn, self._drawn_size = self._strips(*size), size
        return self._drawn[y] if y < len(self._drawn) else Strip.blank(size[0], self.rich_style)

    def _strips(self, width: int, height: int) -> list[Strip]:
        if width < 1 or height < 1:
            return []
        look: Look = getattr(self.app, "look", Look())
        grid = self.draw(width, height, look)
        styles = _Styles(self, pattern=look.pattern)
        return [
            Strip(_segments(g, i, b, styles), width)
            for g, i, b in zip(grid.glyphs, grid.inks, grid.grounds, strict=True)
        ]


class _Styles(dict[tuple[str, str], Style]):
    """Style of each pair of ink and ground, made when it is first asked for."""

    def __init__(self, widget: Drawn, *, pattern: bool) -> None:
        super().__init__()
        self._base, self._bold = widget.rich_style, widget.BOLD
        self._colors = widget.app.theme_variables
        self._pattern = pattern

    def __missing__(self, pair: tuple[str, str]) -> Style:
        ink, ground = pair
        style = self._base
        if self._pattern:
            style += Style(bold=ink in self._bold or None, reverse=ground == "bar" or None)
        else:
            style += Style(
                color=self._color(f"ink-{ink}") or self._color(f"ground-{ink}"),
                bgcolor=self._color(f"ground-{ground}"),
                bold=ink in self._bold or None,
            )
        self[pair] = style
        return style

    def _color(self, name: str) -> str | None:
        found = self._colors.get(name)
        return None if found is None else Color.parse(found).hex


def _segments(
    glyphs: list[str], inks: list[str], grounds: list[str], styles: _Styles
) -> list[Segment]:
    segments: list[Segment] = []
    begin = 0
    for x in range(1, len(glyphs) + 1):
        if x < len(glyphs) and inks[x] == inks[begin] and grounds[x] == grounds[begin]:
            continue
        segments.append(Segment("".join(glyphs[begin:x]), styles[inks[begin], grounds[begin]]))
        begin = x
    return segments
