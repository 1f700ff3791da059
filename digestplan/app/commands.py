"""The command palette: every action by its name, and the themes."""

from collections.abc import Callable, Iterator
from typing import TYPE_CHECKING, cast

from textual.command import DiscoveryHit, Hit, Hits, Provider

from digestplan.app import themes
from digestplan.app.keys import PLAN_KEYS
from digestplan.app.terminal import LEVELS

if TYPE_CHECKING:
    from digestplan.app.main import DigestplanApp


class Commands(Provider):
    """All that can be done, by name."""

    def _all(self) -> Iterator[tuple[str, str, Callable[[], object]]]:
        app = cast("DigestplanApp", self.app)
        screen = app.plan_screen
        for key in PLAN_KEYS:
            run = _runner(app, screen, key.action)
            yield f"{key.label} ({key.spoken})", key.does, run
        yield "Save as", "Save the plan under another name", lambda: app._ask_name(None)  # noqa: SLF001
        for name in themes.NAMES:
            yield f"Theme: {name}", "Change the colours", _setter(app, "theme", name)
        for level in LEVELS:
            yield f"Glyphs: {level}", "Change how finely it draws", _setter(app, "level", level)

    async def discover(self) -> Hits:
        """Offer everything."""
        for name, does, run in self._all():
            yield DiscoveryHit(name, run, help=does)

    async def search(self, query: str) -> Hits:
        """Offer what the query is found in."""
        matcher = self.matcher(query)
        for name, does, run in self._all():
            score = matcher.match(f"{name} {does}")
            if score > 0:
                yield Hit(score, name, run, help=does)


def _runner(app: "DigestplanApp", screen: object, action: str) -> Callable[[], object]:
    return lambda: app.run_action(action, default_namespace=screen)  # type: ignore[arg-type]


def _setter(app: "DigestplanApp", name: str, value: str) -> Callable[[], object]:
    def set_it() -> None:
        setattr(app, name, value)
        app.redraw_all()

    return set_it
