"""What is on the screen: at three sizes, in every theme, with and without colour."""

from pathlib import Path

import pytest
from textual.color import Color

from digestplan.app import themes
from digestplan.app.answer import answer_to
from digestplan.app.main import DigestplanApp
from digestplan.app.plain_glyphs import plain
from digestplan.app.session import Session
from digestplan.app.terminal import Look, glyph_level, no_color
from digestplan.app.widgets.band_plot import draw_plot
from digestplan.app.widgets.night_strip import draw_night
from digestplan.app.widgets.quantity_field import CellInput
from tests.app.conftest import DEMO, picture, settle

SNAPSHOTS = Path(__file__).parent / "snapshots"
SIZES = {"80x24": (80, 24), "120x36": (120, 36), "160x45": (160, 45)}
INKS = {  # each ink with the grounds that it is written on
    "line": ("surface", "band", "window", "both"),
    "activity": ("surface", "band", "window", "both"),
    "mineral": ("surface", "band", "window", "both"),
    "target": ("surface", "band", "window", "both"),
    "axis": ("surface", "night"),
    "bracket": ("night", "day", "surface"),
    "warmth": ("night", "day"),
    "bartext": ("bar", "baralt"),
    "daytext": ("day",),
    "nighttext": ("night",),
}


@pytest.fixture(scope="module")
def drawn():
    """The picture of the tendon demo, with few draws."""
    text = (DEMO / "porpoise-tendon-overnight.toml").read_text("utf-8")
    return answer_to(text, "tendon", 200).picture


async def shown(size, keys=()):
    """Return the screen of the tendon demo at a size, after some keys."""
    app = DigestplanApp(
        Session((DEMO / "porpoise-tendon-overnight.toml").read_text("utf-8")), draws=200
    )
    async with app.run_test(size=size) as pilot:
        await settle(app, pilot)
        await pilot.press(*keys)
        await settle(app, pilot)
        return picture(app)


@pytest.mark.parametrize("size", SIZES)
async def test_the_screen_says_the_same_at_every_size(size):
    """The chance, the night strip and the fields are in sight from 80 by 24 on."""
    seen = await shown(SIZES[size])

    column = next(line.index("window") for line in seen.splitlines() if "window" in line)
    told = " ".join(" ".join(line[column:] for line in seen.splitlines()).split())
    assert "in time with a chance of" in told
    assert all(word in seen for word in ("window", "bath", "step", "bench", "wet mass", "F1"))


@pytest.mark.parametrize("level", ["braille", "blocks", "ascii"])
@pytest.mark.parametrize("size", SIZES)
def test_the_drawings_are_as_they_were_reviewed(drawn, size, level):
    """Plot and night strip are drawn as in the snapshot; DIGESTPLAN_SNAPSHOTS=1 renews it."""
    import os

    width, height = SIZES[size]
    look = Look(level, pattern=level == "ascii")
    plot = draw_plot(drawn, None, width, height - 14, look).text()
    text = plot + "\n" + draw_night(drawn, None, width, look).text() + "\n"
    file = SNAPSHOTS / f"tendon-{size}-{level}.txt"
    if os.environ.get("DIGESTPLAN_SNAPSHOTS"):
        file.parent.mkdir(exist_ok=True)
        file.write_text(text, "utf-8")

    assert text == file.read_text("utf-8")


def test_ascii_drawings_hold_ascii_alone(drawn):
    """Without UTF-8 nothing else is drawn."""
    look = Look("ascii", pattern=True)
    drawing = (
        draw_plot(drawn, None, 100, 20, look).text() + draw_night(drawn, None, 100, look).text()
    )

    assert plain(drawing).isascii()
    assert (
        len(plain("10 ± 2 µm → 漢")) == len("10 ± 2 µm → ") + 2
    )  # a wide glyph keeps its two cells


def test_the_window_is_marked_where_there_is_no_colour(drawn):
    """A window inside the clock has its bracket, and edges in the plot, in plain glyphs."""
    from dataclasses import replace

    inside = replace(drawn, ready=8.0, too_far=20.0)
    strip = draw_night(inside, None, 100, Look("ascii", pattern=True)).text().splitlines()
    plot = draw_plot(inside, None, 100, 16, Look("ascii", pattern=True)).text()

    assert "ready" in strip[0]
    assert "too far" in strip[0]
    bracket = strip[1].removeprefix("window").strip()
    assert bracket == "<" + "=" * (len(bracket) - 2) + ">"
    rows = plot.splitlines()[1:-1]
    assert any(row.count("|") >= 3 for row in rows)


async def test_a_screen_that_is_too_small_says_so_and_comes_back():
    """Below 60 by 20 there is a sentence; after a resize the form is there again."""
    app = DigestplanApp(
        Session((DEMO / "porpoise-tendon-overnight.toml").read_text("utf-8")), draws=50
    )
    async with app.run_test(size=(120, 36)) as pilot:
        await settle(app, pilot)
        await pilot.resize_terminal(50, 18)
        await pilot.pause()
        assert "at least 60 by 20" in " ".join(picture(app).split())
        assert "wet mass" not in picture(app)
        await pilot.resize_terminal(90, 30)
        await pilot.pause()
        assert "wet mass" in picture(app)


async def test_narrow_screens_change_between_plan_and_forecast():
    """F9 shows the plot where there is no room beside the form."""
    assert "extent, 5–95 %" not in await shown((80, 24))
    assert "extent, 5–95 %" in await shown((80, 24), ["f9"])


async def test_every_field_is_reached_by_tab():
    """The focus walks through all fields, and can be seen on each."""
    app = DigestplanApp(
        Session((DEMO / "porpoise-tendon-overnight.toml").read_text("utf-8")), draws=50
    )
    async with app.run_test(size=(120, 36)) as pilot:
        await settle(app, pilot)
        fields = list(app.screen.query(CellInput))
        assert len(fields) > 30
        assert set(fields) <= set(app.screen.focus_chain)
        fields[3].focus()
        await pilot.pause()
        assert fields[3].rich_style.bgcolor != fields[4].rich_style.bgcolor


def contrast(one, other):
    """Return the ratio of luminances, 1 to 21."""

    def luminance(color):
        parts = [c / 255 for c in color.rgb]
        linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts]
        return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]

    high, low = sorted((luminance(Color.parse(one)), luminance(Color.parse(other))), reverse=True)
    return (high + 0.05) / (low + 0.05)


@pytest.mark.source("P", "W3C, Web Content Accessibility Guidelines 2.1, 1.4.3 and 1.4.11, 2018")
@pytest.mark.parametrize("theme", themes.OWN, ids=lambda t: t.name)
def test_everything_can_be_told_from_its_ground(theme):
    """Text has 4.5 to 1 on every ground, lines of the drawing 3 to 1; 21 to 1 is black on white."""
    assert contrast("#000000", "#ffffff") == pytest.approx(21)
    colors = theme.variables
    graphics = {"line", "activity", "mineral", "target"}
    weak = {
        (ink, ground): round(contrast(colors[f"ink-{ink}"], colors[f"ground-{ground}"]), 2)
        for ink, grounds in INKS.items()
        for ground in grounds
        if contrast(colors[f"ink-{ink}"], colors[f"ground-{ground}"])
        < (3 if ink in graphics else 4.5)
    }
    for name in ("foreground", "secondary", "error", "warning", "primary"):
        ratio = contrast(getattr(theme, name), theme.surface)
        if ratio < 4.5:
            weak[name, "surface"] = round(ratio, 2)

    assert weak == {}


@pytest.mark.parametrize("theme", themes.NAMES)
async def test_every_theme_draws(theme):
    """The screen stands in all themes, by patterns where the terminal's own colours are used."""
    app = DigestplanApp(
        Session((DEMO / "porpoise-tendon-overnight.toml").read_text("utf-8")), draws=50
    )
    async with app.run_test(size=(120, 36)) as pilot:
        await settle(app, pilot)
        app.theme = theme
        await pilot.pause()
        assert app.look.pattern == theme.startswith("ansi")
        assert all(word in picture(app) for word in ("window", "bench", "Limit", "wet mass"))


def test_the_terminal_is_asked_what_it_can_show():
    """ASCII where the locale or the console has nothing finer; settings overrule."""
    assert glyph_level({"LANG": "de_DE.UTF-8"}) == "braille"
    assert glyph_level({"LC_ALL": "C", "LANG": "de_DE.UTF-8"}) == "ascii"
    assert glyph_level({"LANG": "de_DE.ISO-8859-1"}) == "ascii"
    assert glyph_level({"TERM": "linux", "LANG": "C.UTF-8"}) == "ascii"
    assert glyph_level({"LC_ALL": "C", "DIGESTPLAN_GLYPHS": "blocks"}) == "blocks"
    assert no_color({"NO_COLOR": "1"})
    assert not no_color({"NO_COLOR": ""})
