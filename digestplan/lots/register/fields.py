"""What each field of an event may hold, and under which key, with its unit, it is written."""

import math
import re
import unicodedata
from collections.abc import Callable
from dataclasses import dataclass
from datetime import UTC, date, datetime
from typing import Any, Literal, get_args

Form = Literal["dry", "solution", "glycerol"]
FORMS: tuple[Form, ...] = get_args(Form)

_COLDEST, _HOTTEST = 50.0, 500.0  # [K] beyond these, degrees Celsius were meant
_LONGEST_NAME, _LONGEST_NOTE = 120, 4000
_YEARS = range(1900, 2200)
_ID = re.compile(r"[A-Za-z0-9][A-Za-z0-9._:-]{0,63}")


def lot_name(text: object) -> str:
    """Return a lot's name as the register keeps it; raise a `ValueError` for what is none."""
    name = _line(text)
    if not name:
        raise ValueError("the name of a lot is wanted, as it is written on the bottle")
    if any(unicodedata.category(c) == "Cf" for c in name):
        raise ValueError("it holds a character that cannot be seen; type it anew")
    return name


def _line(text: object) -> str:
    if not isinstance(text, str):
        raise ValueError("text is wanted")  # noqa: TRY004 - gathered as a problem
    kept = unicodedata.normalize("NFC", text).strip()
    if len(kept) > _LONGEST_NAME:
        raise ValueError(f"at most {_LONGEST_NAME} characters are kept")
    if any(unicodedata.category(c) in {"Cc", "Cs", "Zl", "Zp"} for c in kept):
        raise ValueError("one line of plain text is wanted")
    return kept


def _words(text: object) -> str:
    if not _line(text):
        raise ValueError("it must not be empty")
    return _line(text)


def _note(text: object) -> str:
    if not isinstance(text, str):
        raise ValueError("text is wanted")  # noqa: TRY004
    if len(text) > _LONGEST_NOTE:
        raise ValueError(f"at most {_LONGEST_NOTE} characters are kept")
    if any(unicodedata.category(c) in {"Cc", "Cs"} and c not in "\n\t" for c in text):
        raise ValueError("plain text is wanted")
    return text


def _lines(texts: object) -> tuple[str, ...]:
    if not isinstance(texts, (list, tuple)):
        raise ValueError("a list of texts is wanted")  # noqa: TRY004
    return tuple(_words(text) for text in texts)


def _id(text: object) -> str:
    if not isinstance(text, str) or not _ID.fullmatch(text):
        raise ValueError("an id is 1 to 64 letters, digits, dots, colons, hyphens")
    return text


def _number(low: float, high: float, wanted: str, *, above: bool = False) -> Callable[..., float]:
    def check(value: object) -> float:
        if isinstance(value, bool) or not isinstance(value, (int, float)):
            raise ValueError(f"a number is wanted, {wanted}")  # noqa: TRY004
        try:
            number = float(value)
        except OverflowError:
            number = math.inf
        if not (math.isfinite(number) and low <= number <= high) or (above and number == low):
            raise ValueError(f"{value!r:.40}: {wanted} is wanted")
        return number + 0.0  # no minus zero

    return check


def _count(value: object) -> int:
    if isinstance(value, bool) or not isinstance(value, int) or not 1 <= value <= 10_000:
        raise ValueError("a whole number from 1 on is wanted")
    return value


def _flag(value: object) -> bool:
    if not isinstance(value, bool):
        raise ValueError("yes or no (true or false) is wanted")  # noqa: TRY004
    return value


def _one_of(*words: str) -> Callable[[object], str]:
    def check(value: object) -> str:
        if value not in words:
            raise ValueError(f"{value!r:.40}: one of {', '.join(words)} is wanted")
        return str(value)

    return check


def _wall_clock(value: object) -> datetime:
    if not isinstance(value, datetime) or value.tzinfo is not None:
        raise ValueError("a local date and time without a zone is wanted")
    if value.year not in _YEARS:
        raise ValueError(f"{value.isoformat()} is not in this or the last century")
    return value.replace(fold=0)


def _instant(value: object) -> datetime:
    if not isinstance(value, datetime) or value.tzinfo is None or value.year not in _YEARS:
        raise ValueError("a time with its zone is wanted")
    return value.astimezone(UTC)


def _day(value: object) -> date:
    if not isinstance(value, date) or isinstance(value, datetime):
        raise ValueError("a date is wanted")  # noqa: TRY004
    return value


def _any(value: Any) -> Any:
    return value  # the event itself looks at it


@dataclass(frozen=True, slots=True)
class Field:
    """How one field is checked, and how it is written down.

    ``write`` gives what JSON can hold, ``read`` takes it back; None where they are the same.
    """

    check: Callable[[Any], Any]
    key: str = ""
    write: Callable[[Any], Any] | None = None
    read: Callable[[Any], Any] | None = None


_TABLE: dict[str, Field] = {
    "lot": Field(lot_name),
    "at": Field(_wall_clock, write=datetime.isoformat, read=datetime.fromisoformat),
    "who": Field(_line),
    "note": Field(_note),
    "id": Field(_id),
    "recorded_at": Field(_instant, write=datetime.isoformat, read=datetime.fromisoformat),
    "enzyme": Field(_words),
    "form": Field(_one_of(*FORMS)),
    "temperature": Field(
        _number(_COLDEST, _HOTTEST, "a temperature in kelvin"), key="temperature_k"
    ),
    "temperature_sd": Field(_number(0, 100, "a spread in kelvin"), key="temperature_sd_k"),
    "place": Field(_line),
    "label_activity": Field(_words),
    "mass": Field(_number(0, 1e6, "a mass above zero [g]", above=True), key="mass_g"),
    "weighed.mass": Field(_number(0, 1e6, "a mass [g]"), key="mass_g"),
    "conversions": Field(_lines, write=list),
    "expiry": Field(_day, write=date.isoformat, read=date.fromisoformat),
    "opened": Field(_flag),
    "hours": Field(_number(0, 1e6, "a time in hours", above=True)),
    "count": Field(_count),
    "fraction": Field(_number(-100, 100, "a fraction of the label")),
    "standard_error": Field(_number(0, 100, "a standard error above zero", above=True)),
    "degrees_of_freedom": Field(_number(0, 1e9, "a number above zero", above=True)),
    "scale": Field(_one_of("linear", "log")),
    "activity": Field(_words),
    "plan": Field(_line),
    "corrects": Field(_id),
    "replacement": Field(_any),
}


def field_of(kind: str, name: str) -> Field:
    """Return the entry of a kind's field; a field without an entry is a mistake of ours."""
    return _TABLE.get(f"{kind}.{name}") or _TABLE[name]


def checked(kind: str, name: str, value: Any) -> Any:
    """Return a value as it is kept; raise a `ValueError` that says what is wanted."""
    return field_of(kind, name).check(value)
