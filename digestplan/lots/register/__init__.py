"""The lot register: an append-only ledger of what happened to every bottle.

`events` names what can happen; `open_register` gives a `Register`, which takes events in and
tells what they add up to; `transfer` exports, imports and backs up. SQLAlchemy is imported by
opening a register, not by naming events.
"""

from typing import TYPE_CHECKING, Any

from digestplan.lots.register.locate import RegisterError

if TYPE_CHECKING:
    from digestplan.lots.register.ledger import Register, open_register

__all__ = ["Register", "RegisterError", "open_register"]


def __getattr__(name: str) -> Any:
    """Import what needs SQLAlchemy when it is first asked for."""
    if name in __all__:
        from digestplan.lots.register import ledger

        return getattr(ledger, name)
    raise AttributeError(name)
