"""The chart of a sheet, as plain numbers and as SVG."""

from dataclasses import replace
from datetime import datetime
from xml.etree import ElementTree as ET

import numpy as np
import pytest

from digestplan.report.sheet.chart import WIDTH, drawing, window_words
from digestplan.report.sheet.drawing import svg
from digestplan.report.sheet.model import Chart

CHART = Chart(
    caption="Extent",
    start=datetime(2026, 3, 12, 17, 30),
    hours=tuple(np.linspace(0, 15, 61)),
    low=tuple(0.7 * (1 - np.exp(-np.linspace(0, 15, 61) / 5))),
    middle=tuple(1 - np.exp(-np.linspace(0, 15, 61) / 5)),
    high=tuple(1 - np.exp(-np.linspace(0, 15, 61) / 2)),
    target=0.8,
    target_name="target 80 %",
    temperature_hours=(0.0, 3.0, 3.5, 15.0),
    celsius=(22.0, 22.0, 37.0, 37.0),
    opens=10.0,
    closes=14.0,
    visits=((12.0, 20.0),),
    sure="90 % sure",
)


def strokes(drawn, style):
    """The strokes of one style."""
    return [stroke for stroke in drawn.strokes if stroke.style == style]


def place_of(hours):
    """Where an hour lies on the paper, by the two ends of the curve and the chart's right edge."""
    (middle,) = strokes(drawing(CHART), "middle")
    (left, _), (right, _) = middle.points[0], middle.points[-1]
    return left + (right - left) * hours / 15.0


def test_everything_lies_on_the_paper():
    """No point and no label lies outside the drawing."""
    drawn = drawing(CHART)
    points = [point for stroke in drawn.strokes for point in stroke.points]
    points += [label.at for label in drawn.labels]

    assert all(0 <= x <= WIDTH and 0 <= y <= drawn.height for x, y in points)


def test_the_curve_lies_where_its_numbers_say():
    """Heights on the paper are in proportion to the extents, between 0 and 100 %."""
    drawn = drawing(CHART)
    heights = {label.text: label.at[1] + 3 for label in drawn.labels if label.text.endswith("0 %")}
    (middle,) = strokes(drawn, "middle")
    foot, head = heights["0 %"], heights["100 %"]
    extents = [(y - foot) / (head - foot) for _, y in middle.points]

    assert extents == pytest.approx(list(CHART.middle))


def test_the_bracket_stands_at_the_window():
    """The bracket reaches from ready to too far, with both times in words beside it."""
    bracket = strokes(drawing(CHART), "bracket")[0]
    words = [label.text for label in drawing(CHART).labels]

    assert [x for x, _ in bracket.points] == pytest.approx([place_of(10.0), place_of(14.0)])
    assert "ready Fri 13 Mar 03:30 – too far Fri 13 Mar 07:30 (90 % sure)" in words


def test_no_bracket_where_there_is_no_safe_moment():
    """A window that closes before it opens has no bracket; its times stand in their order."""
    upside_down = replace(CHART, opens=14.0, closes=10.0)

    assert strokes(drawing(upside_down), "bracket") == []
    assert window_words(upside_down).startswith("too far Fri 13 Mar 03:30 – ready")


def test_the_target_is_a_line_of_its_own():
    """The target is drawn at its extent, dashed, and named."""
    drawn = drawing(CHART)
    (line,) = strokes(drawn, "target")
    at_zero, at_one = (
        next(label.at[1] + 3 for label in drawn.labels if label.text == text)
        for text in ("0 %", "100 %")
    )

    assert [y for _, y in line.points] == pytest.approx([at_zero + 0.8 * (at_one - at_zero)] * 2)
    assert "target 80 %" in [label.text for label in drawn.labels]
    assert 'stroke-dasharray="6 3"' in svg(drawn, "")


def test_the_band_is_hatched_within_its_edges():
    """Every hatching line lies within the band, so that it shows without colour."""
    drawn = drawing(CHART)
    upper, lower = strokes(drawn, "edge")
    hatch = strokes(drawn, "hatch")
    ends = np.array([point for stroke in hatch for point in stroke.points])
    high = np.interp(ends[:, 0], *np.array(upper.points).T)
    low = np.interp(ends[:, 0], *np.array(lower.points).T)

    assert len(hatch) > 40
    assert (ends[:, 1] <= high + 1e-9).all()
    assert (ends[:, 1] >= low - 1e-9).all()


def test_an_exact_forecast_has_no_band():
    """Where nothing has a spread there is a line and no band."""
    drawn = drawing(replace(CHART, low=CHART.middle, high=CHART.middle))

    assert {"band", "hatch", "edge"}.isdisjoint(stroke.style for stroke in drawn.strokes)
    assert len(strokes(drawn, "middle")) == 1


def test_the_axis_has_round_hours_and_each_day_once():
    """Times on the axis are whole hours of the clock; each day is named where it begins."""
    labels = [label.text for label in drawing(CHART).labels]
    clock = [text for text in labels if ":" in text and len(text) == 5]

    assert clock[0] == "18:00"
    assert all(text.endswith(":00") for text in clock)
    assert labels.count("Thu 12 Mar") == labels.count("Fri 13 Mar") == 1


def test_without_a_clock_the_axis_counts_hours():
    """A plan without a start has hours on its axis."""
    labels = [label.text for label in drawing(replace(CHART, start=None, visits=())).labels]

    assert "0 h" in labels
    assert "2 h" in labels
    assert "ready after 10.0 h – too far after 14.0 h (90 % sure)" in labels


def test_temperatures_stand_on_their_plateaus():
    """A strip below the chart names each temperature that is kept; one alone needs no strip."""
    labels = [label.text for label in drawing(CHART).labels]
    constant = drawing(replace(CHART, celsius=(37.0,) * 4))

    assert "22 °C" in labels
    assert "37 °C" in labels
    assert strokes(constant, "temperature") == []


@pytest.mark.parametrize("days", [1 / 24, 1, 13, 120, 400])
def test_ticks_stay_few_whatever_the_span(days):
    """From an hour to a year the axis has from two to a dozen ticks."""
    hours = tuple(np.linspace(0, 24 * days, 61))
    stretched = replace(
        CHART, hours=hours, temperature_hours=(0.0, hours[-1]), celsius=(4.0, 4.0), visits=()
    )
    ticks = [s for s in strokes(drawing(stretched), "axis") if s.points[0][0] == s.points[1][0]]

    assert 2 <= len(ticks) - 1 <= 12  # without the axis itself


def test_the_svg_is_well_formed_and_names_itself():
    """The SVG parses as XML, escapes what it is given, and says what it shows."""
    root = ET.fromstring(svg(drawing(CHART), "<title> & more"))
    texts = [element.text for element in root.iter("{http://www.w3.org/2000/svg}text")]

    assert root[0].text == "<title> & more"
    assert sorted(texts) == sorted(label.text for label in drawing(CHART).labels)
