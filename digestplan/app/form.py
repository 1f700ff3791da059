"""Which fields the form shows for a plan: made from the table of a plan file's keys."""

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from digestplan.plan.field import Field
from digestplan.plan.fields import SECTIONS, fields_of

START = "sample.wet_mass"  # where the focus goes first
_INDEX = re.compile(r"\[\d+\]")
_NOT_EDITED = {"table", "tables"}
_CHARGES = ("charge", "ratio", "concentration")

# What is shown of each section before anybody asks for all of it.
USUAL = {
    "": ("title", "start", "confidence"),
    "sample": (
        *("material", "wet_mass", "thickness", "shape", "substrate_fraction"),
        *("target_extent", "keep_loss_limit", "keep_selectivity"),
    ),
    "sample.known_run": ("ratio", "temperature", "duration", "extent", "thickness", "ph"),
    "lot": ("enzyme", "id", "label_activity", "remaining"),
    "enzyme": ("activation_energy", "inactivation_rate", "inactivation_energy"),
    "steps.digest": ("volume", "buffer", "buffer_concentration", "ph", "ph_at", "calcium"),
    "steps.demineralise": ("reagent", "concentration", "volume", "ph", "changes", "when_spent"),
    "steps.rinse": ("fluid", "volume", "exchanges", "each", "temperature"),
    "steps.stop": ("how", "agent", "concentration", "temperature", "for"),
    "steps.hold": (),
}
HEADS = {
    "": "Plan",
    "sample": "Sample",
    "sample.known_run": "Known run: proven in this lab",
    "sample.known_demineralisation": "Known demineralisation",
    "sample.damage": "Damage by heat",
    "lot": "Lot",
    "enzyme": "Enzyme",
}


@dataclass(frozen=True, slots=True)
class Cell:
    """One value that can be edited: its place, what stands before it, its key, and its text."""

    place: str
    label: str
    field: Field
    value: str
    written: bool

    @property
    def many(self) -> bool:
        """Whether it is a list, written with commas."""
        return self.field.kind in {"texts", "times"} and not self.place.endswith("]")


@dataclass(frozen=True, slots=True)
class Row:
    """A line of the form: a heading (without cells), or one or two values."""

    key: str
    head: str = ""
    cells: tuple[Cell, ...] = ()


def section_at(place: str) -> str:
    """Return the section of the table of keys that a place belongs to; ``steps.?`` for steps."""
    parts = _INDEX.sub("", place).split(".")[:-1]
    if parts[:1] == ["steps"]:
        return "steps." + (parts[1] if len(parts) > 1 else "?")
    return ".".join(parts)


def kind_at(place: str) -> str | None:
    """Return the kind of quantity of a place such as ``steps[0].volume``, or None."""
    name = _INDEX.sub("", place).split(".")[-1]
    section = section_at(place)
    if section == "steps.?":
        found = {
            f.kind
            for s, fields in SECTIONS.items()
            if s[:6] == "steps."
            for f in fields
            if f.name == name
        }
        found = {"temperature" if kind == "programme" else kind for kind in found}
        return found.pop() if len(found) == 1 else None
    return next((f.kind for f in SECTIONS.get(section, ()) if f.name == name), None)


def text_of(written: Any) -> str:
    """Return a written value as a field shows it."""
    if written is None:
        return ""
    if isinstance(written, bool):
        return str(written).lower()
    if isinstance(written, datetime):
        return written.isoformat()
    if isinstance(written, list):
        return ", ".join(text_of(item) for item in written)
    if isinstance(written, Mapping):
        return "{…}"
    return " ".join(str(written).splitlines())


def rows_of(tables: Mapping[str, Any], *, full: bool = False) -> list[Row]:
    """
    Return the rows of a plan's form.

    Parameters
    ----------
    tables
        The plan as the TOML reader gives it.
    full
        Whether every key is shown, or those that are usual or written.

    Returns
    -------
    rows
        In the order of the screen.
    """
    rows = [*_section(tables, "", "", full=full), *_visits(tables.get("visits", []))]
    for section in ("sample", "sample.known_run", "lot", "enzyme"):
        rows += _section(_table(tables, section), section, section, full=full)
    for section in ("sample.known_demineralisation", "sample.damage"):
        if full or _table(tables, section):
            rows += _section(_table(tables, section), section, section, full=full)
    steps = tables.get("steps", [])
    for index, step in enumerate(steps if isinstance(steps, list) else []):
        if isinstance(step, Mapping):
            rows += _step(step, index, full=full)
    return rows


def _table(tables: Mapping[str, Any], section: str) -> Mapping[str, Any]:
    for part in section.split("."):
        found = tables.get(part, {})
        tables = found if isinstance(found, Mapping) else {}
    return tables


def _section(table: Mapping[str, Any], section: str, place: str, *, full: bool) -> Iterator[Row]:
    yield Row(f"#{place}", HEADS[section])
    yield from _fields(table, section, place, USUAL.get(section, ()), full=full)


def _fields(
    table: Mapping[str, Any], section: str, place: str, usual: Sequence[str], *, full: bool
) -> Iterator[Row]:
    """Yield the usual fields in their order, then what else is written, or all."""
    known = {field.name: field for field in fields_of(section)}
    others = [n for n in known if n not in usual and (full or n in table)]
    for name in (*usual, *others):
        field = known[name]
        hidden = field.kind in _NOT_EDITED or name in {"do", "digestplan", "visits"}
        if hidden or (field.kind == "programme" and section != "steps.temperature"):
            continue
        if name == "for" and "temperature" in known and known["temperature"].kind == "programme":
            continue
        yield _row(_cell(table, f"{place}.{name}" if place else name, name, field))


def _cell(table: Mapping[str, Any], place: str, label: str, field: Field) -> Cell:
    name = field.name
    return Cell(place, label.replace("_", " "), field, text_of(table.get(name)), name in table)


def _row(*cells: Cell) -> Row:
    return Row(cells[0].place, "", cells)


def _visits(written: Any) -> Iterator[Row]:
    field = next(f for f in fields_of("") if f.name == "visits")
    visits = written if isinstance(written, list) else []
    for index, text in enumerate(visits or [None]):
        label = f"visit {index + 1}"
        yield _row(Cell(f"visits[{index}]", label, field, text_of(text), text is not None))


def _step(step: Mapping[str, Any], index: int, *, full: bool) -> Iterator[Row]:
    do, place = text_of(step.get("do")), f"steps[{index}]"
    section = f"steps.{do}"
    yield Row(f"#{place}", f"{index + 1}  {do or 'step'}")
    if section not in USUAL:
        do_field = next(f for f in fields_of("steps.hold") if f.name == "do")
        yield _row(_cell(step, f"{place}.do", "do", do_field))
        return
    usual = USUAL[section]
    if do == "digest":
        chosen = next((n for n in _CHARGES if n in step), "charge")
        usual = (chosen, *usual)
    yield from _fields(step, section, place, usual, full=full)
    if do in {"digest", "demineralise", "hold"}:
        yield from _programme(step, section, place)
    for number, addition in enumerate(_tables(step.get("additions"))):
        after, charge = fields_of("steps.additions")
        at = f"{place}.additions[{number}]"
        yield _row(
            _cell(addition, f"{at}.charge", "add", charge),
            _cell(addition, f"{at}.after", "after", after),
        )


def _tables(written: Any) -> list[Mapping[str, Any]]:
    found = written if isinstance(written, list) else []
    return [item for item in found if isinstance(item, Mapping)]


def _programme(step: Mapping[str, Any], section: str, place: str) -> Iterator[Row]:
    written = step.get("temperature")
    stretch = {f.name: f for f in fields_of("steps.temperature")}
    if not isinstance(written, list):
        temperature = next(f for f in fields_of(section) if f.name == "temperature")
        duration = next(f for f in fields_of(section) if f.name == "for")
        yield _row(
            _cell(step, f"{place}.temperature", "at", temperature),
            _cell(step, f"{place}.for", "for", duration),
        )
        return
    for number, line in enumerate(written):
        line = line if isinstance(line, Mapping) else {}  # noqa: PLW2901
        ramp = "to" in line or ("over" in line and "at" not in line)
        first, second = ("to", "over") if ramp else ("at", "for")
        at = f"{place}.temperature[{number}]"
        yield _row(
            _cell(line, f"{at}.{first}", first, stretch[first]),
            _cell(line, f"{at}.{second}", second, stretch[second]),
        )


def written_for(cell: Cell, typed: str) -> str | list[str] | None:
    """Return what a typed text stands for in the plan: None takes the key out."""
    typed = typed.strip()
    if not typed:
        return "" if cell.place.endswith("]") else None
    if cell.many:
        return [part.strip() for part in typed.split(",") if part.strip()]
    return typed
