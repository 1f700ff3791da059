"""Random keys: whatever is pressed, nothing breaks and no work is lost."""

import os
import random
import tomllib

from digestplan.app.main import DigestplanApp
from digestplan.app.session import Session
from tests.app.conftest import settle

KEYS = (
    *("tab", "shift+tab", "up", "down", "left", "right", "home", "end", "pageup", "pagedown"),
    *("enter", "escape", "backspace", "delete", "ctrl+u", "ctrl+k", "space", "ctrl+p"),
    *("f1", "f2", "f3", "f4", "f5", "f6", "f7", "f8", "f9", "f10"),
    *("ctrl+o", "ctrl+z", "ctrl+y", "ctrl+n", "ctrl+t", "ctrl+r", "shift+up", "shift+down"),
    *"0123456789.,:/±°µ[]{}\"'#= mghLCx",
)
SIZES = ((80, 24), (120, 36), (160, 45), (60, 20), (40, 10), (100, 30))


async def test_random_keys_break_nothing(tendon):
    """Hundreds of seeded keys with resizes: the app stays up and the plan stays TOML or text."""
    n_keys = int(os.environ.get("DIGESTPLAN_MONKEY", "150"))
    draw = random.Random(7)
    app = DigestplanApp(Session.opened(tendon), draws=20)
    async with app.run_test(size=(120, 36), notifications=True) as pilot:
        app.exit = lambda *_, **__: None  # it would leave when asked to; here it goes on
        await settle(app, pilot)
        for number in range(n_keys):
            await pilot.press(draw.choice(KEYS))
            if number % 40 == 39:
                await pilot.resize_terminal(*draw.choice(SIZES))
            assert app.is_running
            assert isinstance(app.session.text, str)
        while len(app.screen_stack) > 2:
            app.pop_screen()
            await pilot.pause()
        await settle(app, pilot)
        assert app._exception is None
        if app.session.tables:
            assert tomllib.loads(app.session.text) == app.session.tables
        history = 0
        while app.session.undo():
            history += 1
        assert history <= 500
