"""The clock along the foot of plot and night strip: which hours are written, and where."""

from dataclasses import dataclass
from datetime import datetime, timedelta
from math import ceil

import numpy as np
from numpy.typing import NDArray

from digestplan.app.picture import Picture

Array = NDArray[np.float64]
MARGIN = 7  # cells left of the drawing, for its scale
_STEPS = (0.25, 0.5, 1, 2, 3, 4, 6, 12, 24, 48, 96, 168, 336, 672, 2016, 8760)  # [h]
_ROOM = 8  # cells from one written hour to the next
_MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
_DAYS = ("Mon", "Tue", "Wed", "Thu", "Fri", "Sat", "Sun")


@dataclass(frozen=True, slots=True)
class View:
    """Which hours are shown, and over how many cells. [h]."""

    start: float
    end: float
    cells: int

    def times(self, across: int = 1) -> Array:
        """Return the hours at the middles of all cells, each cut in so many parts. [h]."""
        n = across * self.cells
        return self.start + (np.arange(n) + 0.5) / n * (self.end - self.start)

    def cell(self, hours: float) -> int:
        """Return the cell of an hour; below 0 or from `cells` on where it is not shown."""
        share = (hours - self.start) / (self.end - self.start)
        return int(min(max(share, -1.0), 2.0) * self.cells // 1)


def ticks(picture: Picture, view: View) -> list[tuple[int, str]]:
    """Return the cells at which the clock is written, and what is written there."""
    span = view.end - view.start
    room = max(1, view.cells // _ROOM)
    step = next((s for s in _STEPS if span / s <= room), _STEPS[-1])
    zero = _offset(picture.start)
    first = ceil((view.start + zero) / step - 1e-9)
    found = []
    for i in range(first, first + room + 2):
        hours = i * step - zero
        if hours > view.end:
            break
        found.append((view.cell(hours), _label(picture, hours, step)))
    return found


def _offset(start: datetime | None) -> float:
    """Hours from midnight to the start, so that round hours are written."""
    if start is None:
        return 0.0
    return (start - start.replace(hour=0, minute=0, second=0, microsecond=0)) / timedelta(hours=1)


def _label(picture: Picture, hours: float, step: float) -> str:
    moment = picture.clock(hours)
    if moment is None:
        return f"{hours:g} h"
    moment = (moment + timedelta(seconds=30)).replace(second=0)
    if step >= 24 or (moment.hour == 0 and moment.minute == 0):
        return f"{_DAYS[moment.weekday()]} {moment.day}"
    return f"{moment:%H:%M}"


def spoken(picture: Picture, hours: float) -> str:
    """Return a moment as the brackets say it."""
    moment = picture.clock(hours)
    if moment is None:
        return f"{hours:.3g} h"
    moment = (moment + timedelta(seconds=30)).replace(second=0)
    if hours < 6 * 24:
        return f"{_DAYS[moment.weekday()]} {moment:%H:%M}"
    return f"{_DAYS[moment.weekday()]} {moment.day} {_MONTHS[moment.month - 1]} {moment:%H:%M}"
