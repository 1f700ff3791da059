"""What the app's tests share: a terminal that is the same everywhere, and a way to drive it."""

import contextlib
from pathlib import Path

import pytest
from textual.worker import WorkerCancelled

DEMO = Path(__file__).parents[2] / "presets_demo"


@pytest.fixture(autouse=True)
def _alone(monkeypatch, tmp_path):
    """Keep what the app remembers, and the terminal's own settings, out of the tests."""
    monkeypatch.setenv("DIGESTPLAN_STATE", str(tmp_path / "state"))
    monkeypatch.setenv("DIGESTPLAN_GLYPHS", "braille")
    monkeypatch.setattr("textual.constants.COLOR_SYSTEM", "truecolor")  # else TERM decides
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.chdir(tmp_path)


@pytest.fixture
def tendon(tmp_path):
    """A copy of the tendon demo that may be written to."""
    copy = tmp_path / "tendon.toml"
    copy.write_bytes((DEMO / "porpoise-tendon-overnight.toml").read_bytes())
    return copy


async def settle(app, pilot):
    """Wait until the app has answered the newest text."""
    await pilot.pause()
    for _ in range(200):
        with contextlib.suppress(WorkerCancelled):
            await app.workers.wait_for_complete()
        await pilot.pause()
        answered = app.answer is not None and app.answer.text == app.session.text
        if answered and not app._asker.busy and not app._asker.overtaken:
            return
    raise AssertionError("the app gave no answer")


async def press(app, pilot, *keys):
    """Press keys and wait for the answer."""
    await pilot.press(*keys)
    await settle(app, pilot)


def picture(app):
    """Return the screen as plain characters."""
    strips = app.screen._compositor.render_strips()
    return "\n".join("".join(segment.text for segment in strip).rstrip() for strip in strips)
