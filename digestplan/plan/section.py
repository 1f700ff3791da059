"""One table of a plan file, read through the table of its keys; problems are noted, not raised."""

from collections.abc import Iterator, Mapping
from math import nan
from typing import Any

from digestplan.plan.bounds import out_of_bounds
from digestplan.plan.field import Field
from digestplan.plan.fields import fields_of, home_of
from digestplan.plan.model import Origin, Value
from digestplan.plan.wording import listed, nearest, place_of, plain, shown
from digestplan.problems import Problems
from digestplan.quantities import QuantityError, parse_quantity
from digestplan.quantities.model import Quantity

WRITTEN = "written in the plan"
ASSUMED = "assumed where a plan says nothing"

_MOST_UNKNOWN = 10  # unknown keys of one table that are told one by one
_LONGEST_LINE = 200  # characters of a title, a name or a key
_LONGEST_TEXT = 20_000  # characters of the notes
_OVERRIDES = frozenset(range(0x202A, 0x202F)) | frozenset(range(0x2066, 0x206A))

_OF_LISTS = {"times": "time", "temperatures": "temperature"}  # what stands in a list

# Stands for a value that is written wrongly: compares as false, and never leaves the checker.
UNKNOWN = Quantity(nan)


class Section:
    """
    One table of a plan file.

    Parameters
    ----------
    written
        What the TOML reader gives for it.
    place
        Its dotted name; empty for the plan itself.
    section
        Its name in the table of keys, such as ``steps.digest``.
    problems
        Where problems are noted; unknown and missing keys are noted at once.
    """

    def __init__(self, written: Any, place: str, section: str, problems: Problems) -> None:
        self.place, self.section, self.problems = place, section, problems
        self.fields: dict[str, Field] = {field.name: field for field in fields_of(section)}
        self.written: Mapping[str, Any] = {}
        if not isinstance(written, Mapping):
            name = f"[{place}]" if section.count(".") < 1 else "a table in curly brackets"
            problems.add(place, f"{shown(written)} stands here; a table ({name}) is wanted")
            return
        self.written = written
        self._refuse_unknown(section)
        for field in self.fields.values():
            if field.required and field.name not in written:
                self.missing(field.name)

    def _refuse_unknown(self, section: str) -> None:
        unknown = [key for key in self.written if key not in self.fields]
        for key in unknown[:_MOST_UNKNOWN]:
            self.problems.add(self.at(key), self._said_of_unknown(key, section))
        if len(unknown) > _MOST_UNKNOWN:
            more = f"{len(unknown) - _MOST_UNKNOWN} more keys here mean nothing to a plan"
            self.problems.add(self.place, more)

    def _said_of_unknown(self, key: str, section: str) -> str:
        home = home_of(key)
        if home is not None and home != section:
            where = f"[{home}]" if home else "the top of the plan, above all tables"
            if home.startswith("steps."):
                where = f"a {home.removeprefix('steps.')} step"
            return f"this key belongs in {where}"
        near = nearest(key, self.fields)
        if near is not None:
            return f"there is no such key; is {near} meant?"
        return f"there is no such key; known here: {', '.join(self.fields)}"

    def __contains__(self, name: str) -> bool:
        return name in self.written

    def at(self, name: str) -> str:
        """Dotted name of one of its keys."""
        inner = place_of([name])
        return f"{self.place}.{inner}" if self.place else inner

    def add(self, name: str, message: str) -> None:
        """Note a problem with one of its keys."""
        self.problems.add(self.at(name), message)

    def missing(self, name: str, because: str = "") -> None:
        """Note that a key is missing, with an example of how to write it."""
        example = self.fields[name].example
        reason = f" {because}" if because else ""
        hint = f"; write for instance {name} = {example}" if example else ""
        self.add(name, f"this is missing{reason}{hint}")

    def value(self, name: str) -> Value | None:
        """Return the value of a key, or its default, or None where it has none."""
        field = self.fields[name]
        if name in self.written:
            quantity = self.quantity_of(self.written[name], self.at(name), field)
            return self.made(name, quantity)
        if field.default is None:
            return None
        return self.made(name, parse_quantity(field.default, field.kind), "default", ASSUMED)

    def needed(self, name: str) -> Value:
        """Return the value of a key that the section cannot do without (`UNKNOWN` if wrong)."""
        return self.value(name) or self.made(name, UNKNOWN)

    def made(
        self, name: str, quantity: Quantity, origin: Origin = "plan", source: str = WRITTEN
    ) -> Value:
        """Return a quantity as the value of one of its keys."""
        return Value(quantity, self.at(name), origin, source)

    def quantity_of(self, written: Any, place: str, field: Field) -> Quantity:
        """Return a quantity, or note the problem with it and return `UNKNOWN`."""
        if isinstance(written, bool) or not isinstance(written, str | int | float):
            message = f"{shown(written)} is no value; one is wanted here, such as {field.example}"
            self.problems.add(place, message)
            return UNKNOWN
        try:
            quantity = parse_quantity(written, _OF_LISTS.get(field.kind, field.kind))
        except QuantityError as error:
            self.problems.add(place, plain(str(error), 600))
            return UNKNOWN
        problem = out_of_bounds(quantity, field)
        if problem is not None:
            message = f"{shown(written)} {problem}; write for instance {field.example}"
            self.problems.add(place, message)
            return UNKNOWN
        return quantity

    def table(self, name: str) -> "Section":
        """Return the table of a key, empty where it is not written."""
        section = f"{self.section}.{name}" if self.section else name
        return Section(self.written.get(name, {}), self.at(name), section, self.problems)

    def text(self, name: str, longest: int = _LONGEST_LINE) -> str | None:
        """Return the text of a key, on one line; None where it is not written or is wrong."""
        written = self.written.get(name)
        if written is None:
            return self.fields[name].default
        if not isinstance(written, str):
            message = f"{shown(written)} is no text; write for instance {self.fields[name].example}"
            self.add(name, message)
            return None
        lines = longest > _LONGEST_LINE
        if len(written) > longest:
            self.add(name, f"{shown(written)} has more than {longest} characters")
        elif any(_is_control(c) and not (lines and c in "\n\t\r") for c in written):
            self.add(name, f"{shown(written)} holds control characters")
        elif not lines and not written.strip():
            self.add(name, "this is empty; leave the key out or write something")
        else:
            return written.strip()
        return None

    def long_text(self, name: str) -> str | None:
        """Return a text that may have several lines."""
        return self.text(name, _LONGEST_TEXT)

    def word(self, name: str) -> str | None:
        """Return one of the words that a key allows; None where it is not written or is wrong."""
        field = self.fields[name]
        written = self.written.get(name)
        if written is None:
            return field.default
        if isinstance(written, str) and written in field.choices:
            return written
        near = nearest(written, field.choices) if isinstance(written, str) else None
        hint = f"; is {near} meant?" if near else ""
        message = f"{shown(written)} is not known here; write {listed(field.choices)}{hint}"
        self.add(name, message)
        return None

    def flag(self, name: str) -> bool:
        """Return whether a key says true."""
        written = self.written.get(name, False)
        if not isinstance(written, bool):
            self.add(name, f"{shown(written)} is neither true nor false (without quotation marks)")
        return written is True

    def quantities(self, names: tuple[str, ...]) -> Iterator[tuple[str, Value]]:
        """Yield each of the keys that is written, with its value."""
        for name in names:
            if name in self.written:
                yield name, self.needed(name)


def _is_control(character: str) -> bool:
    code = ord(character)
    return code < 0x20 or 0x7F <= code < 0xA0 or code in _OVERRIDES
