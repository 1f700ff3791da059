"""A chart as plain numbers: lines, areas and labels.

Points count from the lower left corner, in points of 1/72 inch. Nothing is told by colour alone:
the band is hatched, the window is a bracket with its times in words.
"""

from collections.abc import Sequence
from datetime import datetime, timedelta

import numpy as np
from numpy.typing import NDArray

from digestplan.report import words
from digestplan.report.sheet.drawing import Anchor, Drawing, Label, Point, Stroke, Style
from digestplan.report.sheet.model import Chart

Array = NDArray[np.float64]
Parts = tuple[list[Stroke], list[Label]]

WIDTH = 520.0
_HIGH, _LOW = 92.0, 52.0  # of the chart itself
_LEFT, _RIGHT = 42.0, 12.0
_CLOCK, _STRIPPED = 28.0, 34.0  # below the chart: its times, and a strip of temperatures
_WINDOWED, _BARE = 24.0, 8.0  # above it: the bracket of a window, or nothing
_STRIP = 16.0  # height of the strip of temperatures, below the axis of time
_HATCH, _STEP = 5.0, 1.0  # distance of the hatching, and how finely it is cut
_TICKS_H = (0.05, 0.1, 0.25, 0.5, 1, 2, 3, 4, 6, 8, 12, 24, 48, 96, 168, 336, 672, 1344, 2688, 5376)
_MOST_TICKS = 9
_DAY = 60.0  # points that a day takes up
_NARROW = 34.0  # points under which a plateau carries no temperature
_CHARACTER = 0.55  # width of a character over its size


class _Frame:
    """Where hours and extents lie on the paper."""

    def __init__(self, chart: Chart, tall: float) -> None:
        ends = [end for _, end in chart.visits if end > chart.hours[0]]
        self.first, last = chart.hours[0], chart.hours[-1]
        near = [end for end in ends if end <= last + (last - self.first)]
        self.last = max([last, *near]) if last > self.first or near else self.first + 1
        self.left, self.right = _LEFT, WIDTH - _RIGHT
        self.bottom = _CLOCK + (0.0 if one_temperature(chart) else _STRIPPED)
        self.top = self.bottom + tall * (_LOW if chart.low_drawn else _HIGH)
        self.height = self.top + (_WINDOWED if window_words(chart) else _BARE)

    def x(self, hours: float) -> float:
        share = (hours - self.first) / (self.last - self.first)
        return self.left + (self.right - self.left) * min(max(share, 0.0), 1.0)

    def y(self, extent: float) -> float:
        return self.bottom + (self.top - self.bottom) * min(max(extent, 0.0), 1.0)

    def holds(self, hours: float) -> bool:
        return self.first <= hours <= self.last


def drawing(chart: Chart, tall: float = 1.0) -> Drawing:
    """
    Return a chart as lines, areas and labels.

    Parameters
    ----------
    chart
        What is to be drawn.
    tall
        How tall, against the usual. [1]

    Returns
    -------
    drawing
        `WIDTH` points wide.
    """
    frame = _Frame(chart, tall)
    strokes, labels = _axes(chart, frame)
    for more_strokes, more_labels in (
        _visits(chart, frame),
        _band(chart, frame),
        _target(chart, frame),
        _window(chart, frame),
        _temperature(chart, frame),
    ):
        strokes += more_strokes
        labels += more_labels
    return Drawing(WIDTH, frame.height, tuple(strokes), tuple(labels))


def _line(style: Style, *points: Point) -> Stroke:
    return Stroke(style, points)


def _axes(chart: Chart, frame: _Frame) -> Parts:
    strokes, labels = [], []
    for extent in (0.0, 0.25, 0.5, 0.75, 1.0):
        y = frame.y(extent)
        strokes.append(_line("grid", (frame.left, y), (frame.right, y)))
        labels.append(Label(f"{100 * extent:.0f} %", (frame.left - 4, y - 3), "end"))
    ticks = _ticks(chart, frame)
    days = [frame.x(hours) for hours, _, day in ticks if day]
    for hours, text, day in ticks:
        x = frame.x(hours)
        strokes.append(_line("axis", (x, frame.bottom), (x, frame.bottom - 4)))
        labels.append(Label(text, (x, frame.bottom - 13)))
        if day and not any(x < later < x + _DAY for later in days):
            labels.append(Label(day, (x, frame.bottom - 23), bold=True))
    corners = ((frame.left, frame.bottom), (frame.right, frame.bottom))
    strokes.append(_line("axis", *corners))
    strokes.append(_line("axis", (frame.left, frame.bottom), (frame.left, frame.top)))
    return strokes, labels


def _ticks(chart: Chart, frame: _Frame) -> list[tuple[float, str, str]]:
    """Round hours of the clock, each with its day where that is new; without a clock, hours."""
    span = frame.last - frame.first
    step = next((h for h in _TICKS_H if span / h <= _MOST_TICKS), _TICKS_H[-1])
    if chart.start is None:
        first = int(np.ceil(frame.first / step - 1e-9))
        count = int(frame.last / step + 1e-9)
        return [(n * step, f"{n * step:g} h", "") for n in range(first, count + 1)]
    begin = chart.start + timedelta(hours=frame.first)
    midnight = begin.replace(hour=0, minute=0, second=0, microsecond=0)
    found, day = [], ""
    for n in range(int((span + 24) / step) + 2):
        clock = midnight + timedelta(hours=n * step)
        hours = (clock - chart.start) / timedelta(hours=1)
        if frame.first - 1e-9 <= hours <= frame.last + 1e-9:
            today = _day(clock)
            found.append((hours, f"{clock:%H:%M}", today if today != day else ""))
            day = today
    return _days_alone(found) if step >= 24 else found


def _days_alone(ticks: list[tuple[float, str, str]]) -> list[tuple[float, str, str]]:
    return [(hours, day, "") for hours, _, day in ticks]


def _day(clock: datetime) -> str:
    return words.day_and_time(clock).rsplit(" ", 1)[0]


def _visits(chart: Chart, frame: _Frame) -> Parts:
    """When somebody is at the bench: a bar at the foot of the chart."""
    strokes, labels = [], []
    for begin, end in chart.visits:
        if end <= frame.first or begin >= frame.last:
            continue
        left, right, y = frame.x(begin), frame.x(end), frame.bottom
        box = ((left, y), (right, y), (right, y + 7), (left, y + 7))
        strokes.append(Stroke("visit", box, closed=True))
        anchor: Anchor = "start" if right < frame.right - 40 else "end"
        at = (right + 3, y + 1) if anchor == "start" else (left - 3, y + 1)
        labels.append(Label("visit", at, anchor, 7.5))
    return strokes, labels


def _band(chart: Chart, frame: _Frame) -> Parts:
    xs = [frame.x(hours) for hours in chart.hours]
    low = [frame.y(extent) for extent in chart.low]
    high = [frame.y(extent) for extent in chart.high]
    middle = [frame.y(extent) for extent in chart.middle]
    strokes = []
    if chart.low != chart.high:
        there, back = list(zip(xs, high, strict=True)), list(zip(xs, low, strict=True))
        strokes.append(Stroke("band", tuple(there + back[::-1]), closed=True))
        strokes += _hatching(np.array(xs), np.array(low), np.array(high), frame)
        strokes += [Stroke("edge", tuple(there)), Stroke("edge", tuple(back))]
    strokes.append(Stroke("middle", tuple(zip(xs, middle, strict=True))))
    return strokes, []


def _hatching(xs: Array, low: Array, high: Array, frame: _Frame) -> list[Stroke]:
    """Slanting lines where they are within the band."""
    strokes = []
    height = frame.top - frame.bottom
    for start in np.arange(xs[0] - height, xs[-1], _HATCH):
        along = np.arange(max(start, xs[0]), min(start + height, xs[-1]) + 1e-9, _STEP)
        y = frame.bottom + along - start
        within = (y > np.interp(along, xs, low)) & (y < np.interp(along, xs, high))
        edges = np.flatnonzero(np.diff(np.concatenate([[False], within, [False]]).astype(int)))
        for begin, end in zip(edges[::2], edges[1::2] - 1, strict=True):
            if end > begin:
                ends = ((along[begin], y[begin]), (along[end], y[end]))
                strokes.append(_line("hatch", *((float(x), float(v)) for x, v in ends)))
    return strokes


def _target(chart: Chart, frame: _Frame) -> Parts:
    y = frame.y(chart.target)
    line = _line("target", (frame.left, y), (frame.right, y))
    early = frame.first + 0.25 * (frame.last - frame.first)
    crowded = np.interp(early, chart.hours, chart.high) >= chart.target
    width = 8 * _CHARACTER * len(chart.target_name) + 8
    left = frame.right - width - 2 if crowded else frame.left + 3
    low = y - 10.5 if crowded or frame.top - y < 11 else y + 1.5
    box = ((left, low), (left + width, low), (left + width, low + 9), (left, low + 9))
    name = Label(chart.target_name, (left + width / 2, low + 1.5), bold=True)
    return [line, Stroke("paper", box, closed=True)], [name]


def _window(chart: Chart, frame: _Frame) -> Parts:
    """The window as a bracket above the chart, with its times in words."""
    text = window_words(chart)
    if not text:
        return [], []
    opens, closes, y = chart.opens, chart.closes, frame.top + 6
    strokes = []
    if opens is not None and (closes is None or closes >= opens) and opens <= frame.last:
        left = frame.x(opens)
        right = frame.right if closes is None else frame.x(closes)
        strokes.append(_line("bracket", (left, y), (right, y)))
        strokes.append(_line("bracket", (left, y - 5), (left, y + 3)))
        if closes is not None and frame.holds(closes):
            strokes.append(_line("bracket", (right, y - 5), (right, y + 3)))
        middle = (left + right) / 2
    else:
        middle = (frame.left + frame.right) / 2
    half = len(text) * 9 * _CHARACTER / 2
    middle = min(max(middle, frame.left + half), frame.right - half)
    return strokes, [Label(text, (middle, y + 6), size=9, bold=True)]


def window_words(chart: Chart) -> str:
    """Return the window of a chart in words; empty for a chart that has none."""
    sure = f" ({chart.sure})" if chart.sure else ""
    if chart.opens is None and chart.closes is None:
        return ""
    ready = "" if chart.opens is None else f"ready {moment(chart, chart.opens)}"
    far = "" if chart.closes is None else f"too far {moment(chart, chart.closes)}"
    order = (ready, far)
    if chart.opens is not None and chart.closes is not None and chart.closes < chart.opens:
        order = (far, ready)
    return " – ".join(part for part in order if part) + sure


def moment(chart: Chart, hours: float) -> str:
    """Return a moment of a chart on the clock, or hours from the start."""
    if hours > 24 * 366:
        return "in over a year"
    if chart.start is None:
        return f"after {words.hours(hours)}"
    return words.day_and_time(chart.start + timedelta(hours=hours))


def _temperature(chart: Chart, frame: _Frame) -> Parts:
    """The programme of temperatures, as a line in a strip of its own with figures on it."""
    if one_temperature(chart):
        return [], []
    strokes, labels = [], []
    low, high = min(chart.celsius), max(chart.celsius)
    floor = 4.0

    def y(celsius: float) -> float:
        return floor + _STRIP * (celsius - low) / (high - low)

    points = [
        (frame.x(hours), y(celsius))
        for hours, celsius in zip(chart.temperature_hours, chart.celsius, strict=True)
    ]
    end = (frame.x(frame.last), points[-1][1])
    strokes.append(Stroke("temperature", (*points, end)))
    labels.append(Label("°C", (frame.left - 4, floor + _STRIP / 2 - 3), "end"))
    for left, right, celsius in _plateaus([*points, end], [*chart.celsius, chart.celsius[-1]]):
        if right - left >= _NARROW:
            at = ((left + right) / 2, y(celsius) + 2.5)
            labels.append(Label(f"{round(celsius, 1):g} °C", at, bold=True))
    return strokes, labels


def one_temperature(chart: Chart) -> bool:
    """Whether the temperature stays as it is, within what a bath does anyway."""
    return max(chart.celsius) - min(chart.celsius) < 0.1


def _plateaus(
    points: Sequence[Point], celsius: Sequence[float]
) -> list[tuple[float, float, float]]:
    found: list[tuple[float, float, float]] = []
    begin = 0
    for place in range(1, len(points) + 1):
        if place == len(points) or abs(celsius[place] - celsius[begin]) > 0.05:
            found.append((points[begin][0], points[place - 1][0], celsius[place - 1]))
            begin = place
    return found
