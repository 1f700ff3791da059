"""The night strip: the clock, what is done, who is there, and the window over it all."""

from itertools import pairwise

from digestplan.app.picture import Bar, Picture
from digestplan.app.terminal import Look
from digestplan.app.widgets.band_plot import window_cells
from digestplan.app.widgets.canvas import Drawn, Grid
from digestplan.app.widgets.clock_axis import MARGIN, View, spoken, ticks

HEIGHT = 6
_SAID, _BRACKET, _WARM, _STEPS, _BENCH, _CLOCK = range(HEIGHT)


class NightStrip(Drawn):
    """The strip; it holds a picture and the hours that are shown."""

    picture: Picture | None = None
    span: tuple[float, float] | None = None

    def show(self, picture: Picture | None, span: tuple[float, float] | None) -> None:
        """Show another picture."""
        self.picture, self.span = picture, span
        self.redraw()

    def draw(self, width: int, height: int, look: Look) -> Grid:
        """Return the drawing for a size."""
        if self.picture is None:
            return Grid(width, height)
        return draw_night(self.picture, self.span, width, look)


def draw_night(picture: Picture, span: tuple[float, float] | None, width: int, look: Look) -> Grid:
    """
    Draw a plan on the clock.

    Parameters
    ----------
    picture
        What is drawn.
    span
        Which hours are shown; None for all. [h]
    width
        In cells.
    look
        Glyphs, and whether there is colour.

    Returns
    -------
    grid
        Six lines: what the bracket says, the bracket, the bath, the steps, the bench, the clock.
    """
    grid = Grid(width, HEIGHT)
    cells = width - MARGIN - 1
    if cells < 8:
        return grid
    start, end = span or (0.0, picture.end)
    view = View(start, end, cells)
    _draw_bench(grid, view, picture, look)
    _draw_steps(grid, view, picture, look)
    _draw_warmth(grid, view, picture, look)
    _draw_window(grid, view, picture, look)
    for row, name in ((_BRACKET, "window"), (_WARM, "bath"), (_STEPS, "step"), (_BENCH, "bench")):
        grid.write(0, row, f"{name:<{MARGIN - 1}}", "axis")
    for x, label in ticks(picture, view):
        if 0 <= x <= cells - len(label):
            grid.write(MARGIN + x, _CLOCK, label, "axis")
    return grid


def _cells(view: View, bar: Bar) -> range:
    first, last = max(0, view.cell(bar.start)), min(view.cell(bar.end), view.cells)
    if bar.end <= view.start or bar.start >= view.end:
        return range(0)
    return range(first, max(last, min(first + 1, view.cells)))


def _inside(grid: Grid, row: int, cells: range, texts: tuple[str, ...], ink: str) -> None:
    """Write the longest of some texts that fits into a bar."""
    for text in texts:
        if len(text) + 2 <= len(cells):
            grid.write(MARGIN + cells.start + 1, row, text, ink)
            return


def _draw_bench(grid: Grid, view: View, picture: Picture, look: Look) -> None:
    """Dark where nobody is there, light where somebody is."""
    plain = look.pattern or look.level == "ascii"
    night = ":" if look.level == "ascii" else "░"
    for x in range(view.cells):
        for row in range(_BRACKET, _BENCH + 1):
            grid.paint(MARGIN + x, row, "night")
        if plain:
            grid.put(MARGIN + x, _BENCH, night, "fill")
    for visit in picture.visits:
        cells = _cells(view, visit)
        for x in cells:
            for row in range(_BRACKET, _BENCH + 1):
                grid.paint(MARGIN + x, row, "day")
            grid.put(MARGIN + x, _BENCH, " ", "daytext")
        said = f"somebody here: {visit.name} in time"
        _inside(grid, _BENCH, cells, (said, f"here: {visit.name}", visit.name, "*"), "daytext")
    if not picture.visits:
        grid.write(MARGIN + 1, _BENCH, "no visit is planned", "nighttext")


def _draw_steps(grid: Grid, view: View, picture: Picture, look: Look) -> None:
    plain = look.pattern or look.level == "ascii"
    for number, step in enumerate(picture.steps):
        cells = _cells(view, step)
        for x in cells:
            grid.paint(MARGIN + x, _STEPS, "bar" if number % 2 == 0 else "baralt")
            if plain:
                grid.put(MARGIN + x, _STEPS, "=" if look.level == "ascii" else "━", "bartext")
        if plain and len(cells):
            grid.put(MARGIN + cells.start, _STEPS, "[", "bartext")
        names = (f"{number + 1} {step.name}", step.name[:4], str(number + 1))
        _inside(grid, _STEPS, cells, names, "bartext")


def _draw_warmth(grid: Grid, view: View, picture: Picture, look: Look) -> None:
    """Write the bath's temperature where it stays, with strokes where it changes."""
    stay, up, down = "-/\\" if look.level == "ascii" else "─╱╲"
    hours, celsius = picture.temperature.hours.tolist(), picture.temperature.values.tolist()
    pairs = list(zip(hours, celsius, strict=True))
    stretches: list[tuple[float, float, float]] = []
    for (h0, c0), (h1, c1) in pairwise(pairs):
        slope = 0.0 if h1 <= h0 or abs(c1 - c0) < 0.25 else c1 - c0
        glyph = stay if slope == 0 else up if slope > 0 else down
        for x in _cells(view, Bar(h0, h1, "")):
            grid.put(MARGIN + x, _WARM, glyph, "warmth")
        if (
            slope == 0
            and stretches
            and abs(stretches[-1][2] - c1) < 0.75
            and stretches[-1][1] == h0
        ):
            stretches[-1] = (stretches[-1][0], h1, stretches[-1][2])
        elif slope == 0:
            stretches.append((h0, h1, c1))
    for h0, h1, c in stretches:
        cells = _cells(view, Bar(h0, h1, ""))
        _inside(grid, _WARM, cells, (f" {c:.0f} °C ", f"{c:.0f}"), "warmth")


def _draw_window(grid: Grid, view: View, picture: Picture, look: Look) -> None:
    """Draw the bracket from ready to too far, and write both above it."""
    left, flat, right = "<=>" if look.level == "ascii" else "╭━╮"
    arrow = ">" if look.level == "ascii" else "→"
    first, last = window_cells(picture, view)
    if picture.ready is None:
        grid.write(MARGIN, _SAID, "the target is not reached with that confidence", "bracket")
        return
    ready = f"ready {spoken(picture, picture.ready)}"
    far = "" if picture.too_far is None else f"too far {spoken(picture, picture.too_far)}"
    if picture.too_far is not None and picture.too_far < picture.ready:
        grid.write(MARGIN, _SAID, f"no safe moment: {far} before {ready}"[: view.cells], "bracket")
        return
    if first >= view.cells:
        said = f"{ready} {arrow}"
        grid.write(MARGIN + view.cells - len(said), _SAID, said, "bracket")
        return
    if last < 0:
        grid.write(MARGIN, _SAID, f"{'<' if arrow == '>' else '←'} {far}", "bracket")
        return
    for x in range(first, last + 1):
        grid.put(MARGIN + x, _BRACKET, flat, "bracket")
    if view.cell(picture.ready) >= 0:
        grid.put(MARGIN + first, _BRACKET, left, "bracket")
    closes_here = picture.too_far is not None and view.cell(picture.too_far) < view.cells
    if closes_here:
        grid.put(MARGIN + last, _BRACKET, right, "bracket")
    tail = far if closes_here or not far else f"{far} {arrow}"
    _say(grid, view, first, ready, last + 1 if closes_here else view.cells, tail)


def _say(grid: Grid, view: View, first: int, ready: str, end: int, far: str) -> None:
    """Write both ends of the window over it, side by side where they would meet."""
    if len(ready) + len(far) + 2 > view.cells:
        far = ""
    at = max(0, min(first, view.cells - len(ready) - (len(far) + 2 if far else 0)))
    grid.write(MARGIN + at, _SAID, ready, "bracket")
    if far:
        place = max(at + len(ready) + 2, min(end, view.cells) - len(far))
        grid.write(MARGIN + min(place, view.cells - len(far)), _SAID, far, "bracket")
