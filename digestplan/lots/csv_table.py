"""Tables from CSV files, with everything that is wrong with them found at once.

Units stand in the header, such as ``time [min]``; lines that begin with # are comments.
"""

import csv
import io
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from digestplan.problems import InputError, Problem, Problems
from digestplan.quantities import QuantityError

if TYPE_CHECKING:
    import pandas as pd

Array = NDArray[np.float64]

_MOST_BYTES = 5_000_000
_MOST_TOLD = 20  # problems of one file told in full
_HEADER = re.compile(r"\s*([^\[\]]+?)\s*(?:\[\s*([^\[\]]*?)\s*\])?\s*")
_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+")


@dataclass(frozen=True, slots=True)
class Column:
    """A column that a file may have.

    Attributes
    ----------
    unit
        From the unit in its header to a function into the core unit; None where it has no unit.
    choices
        What a text column may say; empty for any text. None for numbers.
    otherwise
        The text where the column is missing; None where it must be there.
    low, high
        Bounds of a number in the core unit.
    """

    name: str
    unit: Callable[[str], Callable[[Array], Array]] | None = None
    choices: tuple[str, ...] | None = None
    otherwise: str | None = None
    low: float = -np.inf
    high: float = np.inf
    may_be_empty: bool = False
    example: str = ""


def read_table(path: str | Path, columns: Sequence[Column]) -> "pd.DataFrame":
    """
    Read a whole file.

    Parameters
    ----------
    path
        The file.
    columns
        The columns that it may have, and must have.

    Returns
    -------
    table
        Numbers in core units and texts, by column, and the line of each row in ``line``.
    """
    file = str(path)
    problems = Problems()
    header, rows, lines = _rows(text_of(path), problems)
    places = _places(header, columns, problems)
    _raise(problems, file)
    import pandas as pd

    table = pd.DataFrame(rows, columns=range(len(header)), dtype=object)
    read: dict[str, Any] = {"line": pd.Series(lines, dtype=int)}
    for column in columns:
        if column.name not in places:
            read[column.name] = pd.Series([column.otherwise] * len(lines), dtype=object)
            continue
        place, convert = places[column.name]
        cells = [cell.strip() for cell in table[place]]
        if column.choices is None:
            read[column.name] = _numbers(cells, column, convert, lines, problems)
        else:
            read[column.name] = pd.Series(_words(cells, column, lines, problems), dtype=object)
    _raise(problems, file)
    return pd.DataFrame(read)


def text_of(path: str | Path) -> str:
    """Turn a file's bytes into text, or say what it is instead."""
    file = str(path)
    try:
        with Path(path).open("rb") as stream:
            raw = stream.read(_MOST_BYTES + 1)
    except OSError as error:
        raise InputError(Problem("", f"cannot be read: {error.strerror}", file)) from error
    message = None
    if len(raw) > _MOST_BYTES:
        message = f"is larger than {_MOST_BYTES // 1_000_000} MB: no table of readings"
    elif raw.startswith(b"PK\x03\x04"):
        message = "is a spreadsheet: save the sheet as CSV"
    elif raw.startswith((b"\xff\xfe", b"\xfe\xff")):
        message = "is saved as UTF-16: save it as CSV in UTF-8"
    elif b"\0" in raw:
        message = "is no text file"
    if message is None:
        try:
            return raw.decode("utf-8-sig")
        except UnicodeDecodeError as error:
            line = raw[: error.start].count(b"\n") + 1
            message = "has letters that are not UTF-8: save it as CSV in UTF-8"
            raise InputError(Problem("", message, file, line)) from error
    raise InputError(Problem("", message, file))


def _rows(text: str, problems: Problems) -> tuple[list[str], list[list[str]], list[int]]:
    """Header, rows and their lines, without comments and empty lines."""
    header: list[str] = []
    rows: list[list[str]] = []
    lines: list[int] = []
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=_separator(text))
    try:
        for row in reader:
            if not any(cell.strip() for cell in row) or row[0].lstrip().startswith("#"):
                continue
            if not header:
                header = row
            elif len(row) != len(header):
                message = f"{len(row)} values, where the header has {len(header)} columns"
                problems.add("", message, line=reader.line_num)
            else:
                rows.append(row)
                lines.append(reader.line_num)
    except csv.Error:
        problems.add("", "cannot be read as CSV from here on", line=reader.line_num)
    if not header:
        problems.add("", "is empty: a header and readings are wanted")
    elif not rows and not problems.found:
        problems.add("", "has a header but no readings")
    return header, rows, lines


def _separator(text: str) -> str:
    """Tell the separator by the header."""
    for line in text.splitlines():
        if line.strip() and not line.lstrip().startswith("#"):
            return max(",;\t", key=line.count)
    return ","


def _places(
    header: Sequence[str], columns: Sequence[Column], problems: Problems
) -> dict[str, tuple[int, Callable[[Array], Array]]]:
    """Where each column stands, and what turns it into core units."""
    known = {column.name: column for column in columns}
    places: dict[str, tuple[int, Callable[[Array], Array]]] = {}
    for place, cell in enumerate(header):
        match = _HEADER.fullmatch(cell)
        name, unit = (match[1].lower(), match[2]) if match else (cell.strip().lower(), None)
        if name == "note":
            continue
        if name not in known:
            problems.add("", _unknown(cell, known), line=None)
        elif name in places:
            problems.add(name, "the column is there twice")
        else:
            places[name] = place, _converter(known[name], unit, problems)
    for column in columns:
        if column.name not in places and column.otherwise is None and header:
            problems.add(column.name, f'the column is missing: "{column.example}"')
    return places


def _unknown(cell: str, known: Sequence[str] | dict[str, Any]) -> str:
    near = get_close_matches(cell.strip().lower().split("[")[0].strip(), list(known), 1, 0.5)
    hint = f'; was "{near[0]}" meant?' if near else ""
    return f'"{cell.strip()[:40]}" is no column of this table ({", ".join(known)}, note){hint}'


def _converter(column: Column, unit: str | None, problems: Problems) -> Callable[[Array], Array]:
    if column.unit is not None:
        if not unit:
            problems.add(column.name, f'its unit is wanted in the header: "{column.example}"')
        else:
            try:
                return column.unit(unit)
            except QuantityError as error:
                problems.add(column.name, str(error))
    return lambda values: values


def _numbers(
    cells: list[str],
    column: Column,
    convert: Callable[[Array], Array],
    lines: Sequence[int],
    problems: Problems,
) -> "pd.Series[float]":
    import pandas as pd

    parsed = pd.to_numeric(pd.Series(cells, dtype=object), errors="coerce").to_numpy(dtype=float)
    values = convert(parsed)
    wrong = ~np.isfinite(values) | (values < column.low) | (values > column.high)
    if column.may_be_empty:
        wrong &= np.array([cell != "" for cell in cells], dtype=bool)
    for i in np.flatnonzero(wrong):
        problems.add(column.name, _what_is_wrong(cells[i], parsed[i]), line=lines[int(i)])
    return pd.Series(values, dtype=float)


def _what_is_wrong(cell: str, value: float) -> str:
    shown = cell if len(cell) <= 30 else f"{cell[:30]}…"
    if not cell:
        return "a number is missing"
    if _DECIMAL_COMMA.fullmatch(cell):
        return f'"{shown}" has a decimal comma: write {cell.replace(",", ".")}'
    if not np.isfinite(value):
        return f'"{shown}" is no number'
    return f'"{shown}" cannot be: too small or too large for this column'


def _words(cells: list[str], column: Column, lines: Sequence[int], problems: Problems) -> list[str]:
    if not column.choices:
        return cells
    words = [cell.lower() for cell in cells]
    for word, cell, line in zip(words, cells, lines, strict=True):
        if word not in column.choices:
            wanted = " or ".join(column.choices)
            problems.add(column.name, f'"{cell[:30]}": {wanted} is wanted', line=line)
    return words


def _raise(problems: Problems, file: str) -> None:
    """Refuse with everything found, line by line, but not with a thousand lines of it."""
    problems.found.sort(key=lambda problem: problem.line or 0)
    more = len(problems.found) - _MOST_TOLD
    if more > 0:
        del problems.found[_MOST_TOLD:]
        problems.add("", f"and {more:,} more of the kind")
    problems.raise_if_any(file)
