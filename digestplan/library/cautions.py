"""The table of cautions, read from the one file in which a safety officer finds them all."""

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any, Literal


@dataclass(frozen=True, slots=True)
class CautionEntry:
    """One row of the table: what is shown, how serious it is, and where it comes from.

    ``first`` and ``then`` are tags of steps that must not meet (or, without ``then``, that bring
    the caution alone); ``order`` is ``later`` (the second after the first), ``any`` or
    ``together`` (in one step); a plain rinse between them may clear it.
    """

    code: str
    level: Literal["stop", "care", "note"]
    kind: Literal["safety", "validity"]
    text: str
    source: str
    first: tuple[str, ...] = ()
    then: tuple[str, ...] = ()
    order: Literal["later", "any", "together"] = "later"
    cleared_by_rinse: bool = False

    def words(self, **filling: object) -> str:
        """Fill the text in; a caution about safety ends with the deferral."""
        text = self.text.format(**filling)
        return f"{text} {deferral()}" if self.kind == "safety" else text


@cache
def _table() -> tuple[str, dict[str, CautionEntry]]:
    raw = tomllib.loads(files(__package__).joinpath("cautions.toml").read_text("utf-8"))
    sentence = raw.pop("deferral")
    return sentence, {code: CautionEntry(code, **_frozen(row)) for code, row in raw.items()}


def _frozen(row: dict[str, Any]) -> dict[str, Any]:
    return {key: tuple(item) if isinstance(item, list) else item for key, item in row.items()}


def deferral() -> str:
    """Return the sentence that defers to protocol, data sheet and the people responsible."""
    return _table()[0]


def cautions() -> dict[str, CautionEntry]:
    """Return the whole table by code."""
    return dict(_table()[1])


def caution(code: str) -> CautionEntry:
    """Return one row; an unknown code is a mistake of ours, and a `KeyError`."""
    return _table()[1][code]
