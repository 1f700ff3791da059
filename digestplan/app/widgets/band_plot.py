"""The forecast: extent on the clock with its band, the target, the window, the enzyme."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from digestplan.app.picture import Band, Line, Picture
from digestplan.app.terminal import Level, Look
from digestplan.app.widgets.canvas import Drawn, Grid
from digestplan.app.widgets.clock_axis import MARGIN, View, ticks

Array = NDArray[np.float64]
EIGHTHS = " ▁▂▃▄▅▆▇█"
_BRAILLE = ((0x01, 0x02, 0x04, 0x40), (0x08, 0x10, 0x20, 0x80))
_FILL = {"band": "░:", "both": "▒%", "window": "·."}  # where there is no colour; the second: ASCII


@dataclass(frozen=True, slots=True)
class _Area:
    """The part of the grid in which curves are drawn: its cells, and how."""

    grid: Grid
    view: View
    top: int
    rows: int
    look: Look


class BandPlot(Drawn):
    """The plot; it holds a picture and the hours that are shown."""

    picture: Picture | None = None
    span: tuple[float, float] | None = None
    stale = False

    def show(self, picture: Picture | None, span: tuple[float, float] | None) -> None:
        """Show another picture."""
        self.picture, self.span = picture, span
        self.redraw()

    def draw(self, width: int, height: int, look: Look) -> Grid:
        """Return the drawing for a size."""
        if self.picture is None:
            return Grid(width, height)
        return draw_plot(self.picture, self.span, width, height, look)


def draw_plot(
    picture: Picture, span: tuple[float, float] | None, width: int, height: int, look: Look
) -> Grid:
    """
    Draw a forecast.

    Parameters
    ----------
    picture
        What is drawn.
    span
        Which hours are shown; None for all. [h]
    width, height
        In cells.
    look
        Glyphs, and whether there is colour.

    Returns
    -------
    grid
        Legend, plot and the line of its clock.
    """
    grid = Grid(width, height)
    cells = width - MARGIN - 1
    if cells < 8 or height < 4:
        return grid
    start, end = span or (0.0, picture.end)
    area = _Area(grid, View(start, end, cells), 1, height - 2, look)
    _draw_ground(area, picture)
    _draw_target(area, picture.target)
    for line in picture.activity:
        _draw_line(area, line, "activity", every=3)
    for band in picture.minerals:
        _draw_line(area, Line(band.hours, band.middle), "mineral", every=2)
    for band in picture.extents:
        _draw_line(area, Line(band.hours, band.middle), "line")
    _draw_axes(area, picture)
    _draw_legend(area, picture)
    return grid


def _columns(area: _Area, band: Band) -> tuple[Array, Array]:
    """Lower and upper edge of a band at each column; not a number outside. [eighths of a cell]."""
    times = area.view.times()
    full = 8 * area.rows
    low = np.interp(times, band.hours, band.low, left=np.nan, right=np.nan)
    high = np.interp(times, band.hours, band.high, left=np.nan, right=np.nan)
    return np.asarray(low) * full, np.asarray(high) * full


def _draw_ground(area: _Area, picture: Picture) -> None:
    """Paint window and band, and the edges of the band to an eighth of a cell."""
    low = np.full(area.view.cells, np.nan)
    high = low.copy()
    for band in (*picture.minerals, *picture.extents):
        lower, upper = _columns(area, band)
        inside = np.isfinite(lower)
        low[inside], high[inside] = lower[inside], upper[inside]
    first, last = window_cells(picture, area.view)
    for x in range(area.view.cells):
        under = "window" if first <= x <= last else ""
        for row in range(area.rows):
            _ground_cell(area, x, row, under, low[x] - 8 * row, high[x] - 8 * row)
    _draw_window_edges(area, first, last)


def window_cells(picture: Picture, view: View) -> tuple[int, int]:
    """Return the first and the last cell of the window; the last before the first for none."""
    if picture.ready is None or (picture.too_far is not None and picture.too_far < picture.ready):
        return 0, -1
    last = view.cells - 1 if picture.too_far is None else view.cell(picture.too_far)
    return max(0, view.cell(picture.ready)), min(last, view.cells - 1)


def _ground_cell(area: _Area, x: int, row: int, under: str, low: float, high: float) -> None:
    inside = high > 0 and low < 8  # comparisons with nan are false
    ground = ("both" if under else "band") if inside else under
    column, line = MARGIN + x, area.top + area.rows - 1 - row
    if area.look.pattern or area.look.level == "ascii":
        covered = inside and min(high, 8) - max(low, 0) >= 4
        ground = ("both" if under else "band") if covered else under
        if ground and (ground != "window" or (row % 2 == 0 and x % 2 == 0)):
            area.grid.put(column, line, _FILL[ground][area.look.level == "ascii"], "fill")
        return
    if not inside or (low <= 0 and high >= 8):
        area.grid.paint(column, line, ground)
    elif low <= 0:
        area.grid.paint(column, line, under)
        area.grid.put(column, line, EIGHTHS[max(1, round(high))], ground)
    elif high >= 8 and under != "":
        area.grid.paint(column, line, ground)
        area.grid.put(column, line, EIGHTHS[round(low)], under)
    elif high >= 8:
        area.grid.paint(column, line, ground)
        area.grid.put(column, line, EIGHTHS[round(low)], "surface")
    elif high - low >= 4:
        area.grid.paint(column, line, ground)
    else:
        area.grid.paint(column, line, under)


def _draw_window_edges(area: _Area, first: int, last: int) -> None:
    """Mark where the window opens and closes, so that it is not told by its shade alone."""
    if last < first:
        return
    glyphs = ("|", "|") if area.look.level == "ascii" else ("▏", "▕")
    for x, glyph in ((first, glyphs[0]), (last, glyphs[1])):
        if 0 < x < area.view.cells - 1:
            for row in range(area.rows):
                if area.grid.glyphs[area.top + row][MARGIN + x] in " ·.":
                    area.grid.put(MARGIN + x, area.top + row, glyph, "edge")


def _draw_target(area: _Area, target: float) -> None:
    row = _row_of(area, target)
    dash = "-" if area.look.level == "ascii" else "╌"
    for x in range(area.view.cells):
        area.grid.put(MARGIN + x, row, dash, "target")


def _row_of(area: _Area, share: float) -> int:
    return area.top + area.rows - 1 - min(int(share * area.rows), area.rows - 1)


def _draw_line(area: _Area, line: Line, ink: str, every: int = 1) -> None:
    """Draw a line; with `every` above 1 as dots, and never over what is there already in dots."""
    across, down = _FINE[area.look.level]
    times = area.view.times(across)
    shares = np.interp(times, line.hours, line.values, left=np.nan, right=np.nan)
    dots: dict[tuple[int, int], int] = {}
    before = None
    for i, share in enumerate(shares.tolist()):
        if share != share:  # outside  # noqa: PLR0124
            before = None
            continue
        y = min(int(share * down * area.rows), down * area.rows - 1)
        reach = (
            range(min(before, y), max(before, y) + 1) if before is not None and every == 1 else (y,)
        )
        before = y
        if i % every == 0:
            for each in reach:
                cell = (i // across, each // down)
                dots[cell] = dots.get(cell, 0) | _bit(i % across, each % down, down)
    for (x, row), bits in dots.items():
        glyph = _glyph(bits, area.look.level, ink)
        area.grid.put(MARGIN + x, area.top + area.rows - 1 - row, glyph, ink)


_FINE: dict[Level, tuple[int, int]] = {"braille": (2, 4), "blocks": (1, 2), "ascii": (1, 1)}
_ASCII = {"line": "#", "activity": "o", "mineral": "m"}


def _bit(across: int, up: int, down: int) -> int:
    return _BRAILLE[across][3 - up] if down == 4 else 1 << up


def _glyph(bits: int, level: Level, ink: str) -> str:
    if level == "braille":
        return chr(0x2800 + bits)
    return _ASCII[ink] if level == "ascii" else " ▄▀█"[bits]


def _draw_axes(area: _Area, picture: Picture) -> None:
    plain = area.look.level == "ascii"
    upright, corner, flat, tick = "|+-+" if plain else "│└─┴"
    grid, foot = area.grid, area.top + area.rows
    for row in range(area.rows):
        grid.put(MARGIN - 1, area.top + row, upright, "axis")
    shares = (0.0, 0.25, 0.5, 0.75, 1.0) if area.rows >= 8 else (0.0, 0.5, 1.0)
    taken = _row_of(area, picture.target)
    for share in shares:
        row = _row_of(area, share)
        if row != taken and abs(share - picture.target) > 0.02:
            grid.write(0, row, f"{100 * share:4.0f} %"[-6:], "axis")
    grid.write(0, taken, f"{100 * picture.target:4.0f} %"[-6:], "target")
    grid.put(MARGIN - 1, foot, corner, "axis")
    for x in range(area.view.cells):
        grid.put(MARGIN + x, foot, flat, "axis")
    for x, _ in ticks(picture, area.view):
        if 0 <= x < area.view.cells:
            grid.put(MARGIN + x, foot, tick, "axis")


def _draw_legend(area: _Area, picture: Picture) -> None:
    signs = {"braille": "⠒⠂⠆", "blocks": "▀▄█", "ascii": "#om"}[area.look.level]
    parts = []
    if picture.extents:
        parts += [
            (signs[0] * 2, "line", "extent, 5–95 %"),
            (signs[1] * 2, "activity", "enzyme active"),
        ]
    if picture.minerals:
        parts.append((signs[2] * 2, "mineral", "mineral gone"))
    parts.append(("--" if area.look.level == "ascii" else "╌╌", "target", "target"))
    x = MARGIN
    for sign, ink, words in parts:
        if x + len(words) + 4 > area.grid.width:
            break
        area.grid.write(x, 0, sign, ink)
        area.grid.write(x + 3, 0, words, "axis")
        x += len(words) + 5
