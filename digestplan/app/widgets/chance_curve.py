"""The chance in time over temperature."""

import numpy as np

from digestplan.app.picture import Line
from digestplan.app.terminal import Look
from digestplan.app.widgets.canvas import Drawn, Grid

_MARGIN = 7
_FOOT = (10, 20, 30, 40, 50, 60)


class ChanceCurve(Drawn):
    """The curve; it holds a line of chance against temperature."""

    curve: Line | None = None

    def show(self, curve: Line | None) -> None:
        """Show another curve."""
        self.curve = curve
        self.redraw()

    def draw(self, width: int, height: int, look: Look) -> Grid:
        """Return the drawing for a size."""
        grid = Grid(width, height)
        if self.curve is None or height < 4 or width < _MARGIN + 12:
            return grid
        return draw_curve(self.curve, grid, look)


def draw_curve(curve: Line, grid: Grid, look: Look) -> Grid:
    """Draw columns of chance over a grid of temperatures, to an eighth of a cell."""
    cells, rows = grid.width - _MARGIN - 1, grid.height - 2
    low, high = float(curve.hours[0]), float(curve.hours[-1])
    at = low + (np.arange(cells) + 0.5) / cells * (high - low)
    shares = np.nan_to_num(np.interp(at, curve.hours, curve.values))
    fine = look.level != "ascii"
    for x, share in enumerate(shares.tolist()):
        eighths = round(share * rows * 8)
        for row in range(rows):
            part = min(max(eighths - 8 * row, 0), 8)
            glyph = " ▁▂▃▄▅▆▇█"[part] if fine else "#" if part >= 4 else " "
            if part:
                grid.put(_MARGIN + x, rows - 1 - row, glyph, "activity")
    for share, row in ((1.0, 0), (0.5, rows // 2), (0.0, rows - 1)):
        grid.write(0, row, f"{100 * share:4.0f} %", "axis")
    for x in range(cells):
        grid.put(_MARGIN + x, rows, "─" if fine else "-", "axis")
    for celsius in _FOOT:
        x = int((celsius - low) / (high - low) * cells)
        if 0 <= x < cells - 5:
            grid.write(_MARGIN + x, rows + 1, f"{celsius} °C", "axis")
    grid.write(0, rows + 1, "chance", "axis")
    return grid
