"""What the library knows, as text and as a document: each value with its spread and its source."""

import textwrap
from collections.abc import Iterator, Mapping
from typing import Any

from digestplan import library
from digestplan.library import LibraryValue, UnknownKey
from digestplan.library.cautions import cautions
from digestplan.problems import InputError, Problem

WIDTH = 79
_NOT_SHOWN = {"key", "values", "diffusivity", "storage", "acids", "laws"}


def keys_document() -> dict[str, Any]:
    """Return all keys, by section."""
    return {
        "digestplan": 1,
        **{section: list(library.keys(section)) for section in library.SECTIONS},
        "caution": list(cautions()),
    }


def keys_text() -> str:
    """Return all keys, by section, with what they stand for."""
    lines = []
    for section in library.SECTIONS:
        lines.append(f"{section}")
        lines += [f"  {key:<28}{_find(section, key).name}" for key in library.keys(section)]
    lines += [
        "caution",
        textwrap.fill(", ".join(cautions()), WIDTH, initial_indent="  ", subsequent_indent="  "),
    ]
    return "\n".join(lines) + "\n"


def entry_document(key: str) -> dict[str, Any]:
    """
    Return one entry.

    Parameters
    ----------
    key
        Of an enzyme, a material, a buffer, a reagent, a solute, an assay or a unit.

    Returns
    -------
    document
        Its facts and its values, each with spread, source and kind.

    Raises
    ------
    InputError
        Where there is none of that key; it names the nearest.
    """
    section, entry = _entry(key)
    return {
        "digestplan": 1,
        "section": section,
        "key": entry.key,
        **dict(_facts(entry)),
        "values": {name: _value_document(value) for name, value in _values(section, entry)},
    }


def entry_text(key: str) -> str:
    """Return one entry, each value with its spread, source and kind, at 79 characters."""
    section, entry = _entry(key)
    lines = [f"{entry.name} ({section} {entry.key})"]
    for name, fact in _facts(entry):
        shown = ", ".join(map(str, fact)) if isinstance(fact, list) else fact
        lines.append(_wrapped(f"{_spoken(name)}: {shown}"))
    for name, value in _values(section, entry):
        more = "; ".join(part for part in (value.range, value.note) if part)
        lines.append(f"  {_spoken(name):<34}{value.text}")
        lines.append(_wrapped(f"{value.kind}: {value.source}" + (f" ({more})" if more else ""), 6))
    return "\n".join(lines) + "\n"


def _wrapped(text: str, indent: int = 2) -> str:
    space = " " * indent
    return textwrap.fill(text, WIDTH, initial_indent=space, subsequent_indent=space + "  ")


def _spoken(name: str) -> str:
    return name.replace("_", " ")


def _find(section: str, key: str) -> Any:
    return getattr(library, section)(key)


def _entry(key: str) -> tuple[str, Any]:
    try:
        return library.entry(key)
    except UnknownKey as error:
        hint = f"; near: {', '.join(error.near)}" if error.near else ""
        problem = Problem(key[:60], f"the library has no entry of this key{hint}")
        raise InputError(problem) from None


def _facts(entry: Any) -> Iterator[tuple[str, Any]]:
    """What an entry says beside its values."""
    for name in entry.__slots__:
        fact = getattr(entry, name)
        if name in _NOT_SHOWN or fact is None or fact == () or fact is False:
            continue
        if name == "measured_temperature":
            yield name, " to ".join(f"{t - 273.15:.4g} °C" for t in fact)
        else:
            yield name, list(fact) if isinstance(fact, tuple) else fact
    if getattr(entry, "laws", None):
        yield "laws", [f"{law} on {material}" for material, law in entry.laws.items()]


def _values(section: str, entry: Any) -> Iterator[tuple[str, LibraryValue]]:
    if section == "buffer":
        for number, acid in enumerate(entry.acids, 1):
            for name, value in acid.values.items():
                yield f"{name}_{number}", value
        return
    yield from entry.values.items()
    if section != "enzyme":
        return
    for material, value in entry.diffusivity.items():
        yield f"diffusivity in {material}", value
    for form, storage in entry.storage.items():
        for name, value in storage.values.items():
            yield f"storage {form}, {name}", value
    yield from _runs(entry.key)


def _runs(enzyme: str) -> Iterator[tuple[str, LibraryValue]]:
    for material in library.keys("material"):
        run = library.known_run(enzyme, material)
        for name, value in (run.values if run is not None else {}).items():
            yield f"known run on {material}, {name}", value


def _value_document(value: LibraryValue) -> Mapping[str, str]:
    return {
        "value": value.text,
        "source": value.source,
        "kind": value.kind,
        "range": value.range,
        "note": value.note,
    }
