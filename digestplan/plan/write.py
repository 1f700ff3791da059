"""Saving a plan file: only what was edited changes; comments and layout stay."""

import re
import tomllib
from collections.abc import Mapping
from datetime import datetime
from os import PathLike, fspath
from pathlib import Path
from typing import Any

import tomlkit
from tomlkit.exceptions import TOMLKitError
from tomlkit.items import AoT

from digestplan.plan.fields import SECTIONS
from digestplan.plan.read import read_plan_text
from digestplan.plan.replace import replace_file
from digestplan.plan.wording import plain
from digestplan.problems import InputError, Problem

_PART = re.compile(r"\.?(?:(?P<key>[A-Za-z0-9_-]+)|\[(?P<index>\d+)\])")

_NO_SECONDS = re.compile(r"\d{4}-\d\d-\d\d[T ]\d\d:\d\d", re.ASCII)
_STRUCTURED = {"programme", "tables", "texts", "times", "temperatures", "table"}

Written = str | int | float | bool | datetime | list[Any] | dict[str, Any] | None
Route = list[str | int]
Edits = Mapping[str, Written]


def save_plan(path: str | PathLike[str], original_text: str, edits: Edits) -> str:
    """
    Write edited values into a plan file.

    Parameters
    ----------
    path
        The file.
    original_text
        What `read_plan_text` gave when the plan was opened; if the file holds something else by
        now, nothing is written.
    edits
        Place of each edited value, such as ``steps[0].volume``, and what is to stand there; None
        takes the key out. A text is written as TOML where the key holds a list, a table, a date,
        true or false, or where a number stood before; else between quotation marks.

    Returns
    -------
    text
        The new text of the file.

    Raises
    ------
    InputError
        If the file has changed, cannot be written, or an edit fits nowhere.
    """
    name = plain(fspath(path), 400)
    if Path(path).exists() and read_plan_text(path) != original_text:
        message = (
            "this file has changed since it was opened; open it again, or save under a new name"
        )
        raise InputError(Problem("", message, name))
    text = edited_text(original_text, edits, name)
    try:
        replace_file(Path(path), text.encode("utf-8"))
    except OSError as error:
        message = f"this file cannot be written: {error.strerror or 'no reason is given'}"
        raise InputError(Problem("", message, name)) from None
    return text


def edited_text(original_text: str, edits: Edits, name: str) -> str:
    """
    Return the text of a plan with edited values, all else as it was.

    Parameters
    ----------
    original_text
        The text of a plan file.
    edits
        As for `save_plan`.
    name
        Name of the file, for messages.

    Returns
    -------
    text
        The new text; read back, it differs from the original by the edits alone.

    Raises
    ------
    InputError
        If an edit fits nowhere, or the text would not read back as it is meant.
    """
    mark = "\ufeff" if original_text.startswith("\ufeff") else ""
    body = original_text.removeprefix("\ufeff")
    try:
        document, meant = tomlkit.parse(body), tomllib.loads(body)
        for place, written in edits.items():
            path = _path(place)
            for tables, value in zip((document, meant), _both(path, written, meant), strict=True):
                _put(tables, path, value)
        text = _like(body, tomlkit.dumps(document))
        read_back = tomllib.loads(text)
        text.encode("utf-8")  # half a character cannot be saved
    except (TOMLKitError, RecursionError, LookupError, TypeError, ValueError) as error:
        message = f"these edits cannot be written into the plan: {plain(str(error), 200)}"
        raise InputError(Problem("", message, name)) from None
    if read_back != meant:
        message = "the edited plan would not read back as it is meant, so the file is left alone"
        raise InputError(Problem("", message, name))
    return mark + text


def _both(path: Route, written: Written, meant: Any) -> tuple[Any, Any]:
    """Return an edit as a value for tomlkit, which keeps its spelling, and as a plain value."""
    if not isinstance(written, str):
        return written, written
    written = re.sub(r"\r*\n", "\n", written)
    spelled = _spelled(path, written.strip(), meant)
    if spelled is not None:
        value = tomllib.loads(f"value = {spelled}")["value"]
        return value if isinstance(value, dict) else tomlkit.value(spelled), value
    return tomlkit.string(written, multiline="\n" in written), written


def _spelled(path: Route, text: str, meant: Any) -> str | None:
    """Return a text as TOML where it stands for something else than text, else None."""
    try:
        value = tomllib.loads(f"value = {text}")
    except (tomllib.TOMLDecodeError, RecursionError):
        return f"{text}:00" if path == ["start"] and _NO_SECONDS.fullmatch(text) else None
    if len(value) != 1:
        return None
    kinds = {f.kind for fields in SECTIONS.values() for f in fields if f.name == path[-1]}
    found = value["value"]
    if isinstance(found, list | dict) and (kinds & _STRUCTURED or isinstance(path[-1], int)):
        return text
    if isinstance(found, datetime) and "moment" in kinds:
        return text
    if isinstance(found, bool):
        return text if "flag" in kinds else None
    is_number = isinstance(found, int | float)
    return text if is_number and isinstance(_at(meant, path), int | float) else None


def _at(tables: Any, path: Route) -> Any:
    """Return what stands at a path, or None."""
    for part in path:
        try:
            tables = tables[part]
        except (LookupError, TypeError):
            return None
    return tables


def _path(place: str) -> Route:
    parts: Route = []
    end = 0
    while end < len(place):
        match = _PART.match(place, end)
        if match is None:
            raise KeyError(place)
        parts.append(match["key"] if match["key"] is not None else int(match["index"]))
        end = match.end()
    if not parts:
        raise KeyError(place)
    return parts


def _put(tables: Any, path: Route, value: Any) -> None:
    """Set, add or take out one value; tables on the way to it are made where they are missing."""
    *way, last = path
    here = tables
    for depth, part in enumerate(way):
        if _lacks(here, part):
            if value is None:
                return
            many = isinstance(path[depth + 1], int)
            _add(here, part, tomlkit.aot() if many and here is tables else [] if many else {})
        here = here[part]
    if not _lacks(here, last):
        if value is None:
            del here[last]
        else:
            here[last] = value
    elif value is not None:
        _add(here, last, value)


def _lacks(here: Any, part: str | int) -> bool:
    return part == len(here) if isinstance(part, int) else part not in here


def _add(here: Any, part: str | int, value: Any) -> None:
    if isinstance(part, str):
        here[part] = value
        return
    if isinstance(here, AoT) and len(here) > 0:
        here[-1].add(tomlkit.nl())  # a blank line before the next [[steps]]
    here.append(value)


def _like(original: str, text: str) -> str:
    """Return a text with the line ends of the original."""
    return re.sub(r"\r?\n", "\r\n", text) if "\r\n" in original else text
