"""A sheet as Markdown: CommonMark with tables, read as it is or rendered."""

import re
from collections.abc import Iterator

import numpy as np

from digestplan.report import words
from digestplan.report.sheet.chart import moment, window_words
from digestplan.report.sheet.model import (
    Blanks,
    Block,
    Cautions,
    Chart,
    Column,
    Facts,
    Lines,
    Row,
    Sheet,
    Table,
)

_ACTS = re.compile(r"[\\`*_{}\[\]<>#|~&$!@^]|:(?=[A-Za-z/])|(?<=www)\.")
_AT_THE_START = re.compile(r"^(\d*)([+=-]|(?<=\d)[.)])")
_ROWS_OF_CHART = 9
_BLANK = r"\_"


def markdown(sheet: Sheet) -> str:
    """
    Return a sheet as Markdown.

    Parameters
    ----------
    sheet
        The sheet.

    Returns
    -------
    document
        The user's text is escaped, so that it is shown as typed; a chart becomes a table.
    """
    parts = [f"# {safe(sheet.title)}"]
    for section in sheet.sections:
        if section.heading:
            parts.append(f"## {safe(section.heading)}")
        for block in section.blocks:
            parts += _block(block)
    parts += ["---", safe(sheet.footer)]
    return "\n\n".join(parts) + "\n"


def safe(text: str) -> str:
    """Return a text of one line in which nothing is markup."""
    blanks = len(text) - len(text.lstrip(" "))
    flat = "\u00a0" * blanks + " ".join(text[blanks:].split("\n"))
    flat = _ACTS.sub(lambda match: "\\" + match[0], flat)
    return _AT_THE_START.sub(r"\1\\\2", flat)


def _block(block: Block) -> Iterator[str]:
    if isinstance(block, Lines):
        bold = "**" if block.size == "large" else ""
        yield from (f"{bold}{safe(line)}{bold}" for line in block.lines if line.strip())
    elif isinstance(block, Facts):
        yield "\n".join(f"- **{safe(label)}** {safe(value)}" for label, value in block.rows)
    elif isinstance(block, Table):
        yield _table(block)
    elif isinstance(block, Cautions):
        for item in block.items:
            yield f"> **{item.level.upper()}** {safe(item.where)}: {safe(item.text)}"
    elif isinstance(block, Chart):
        yield from _chart(block)
    elif isinstance(block, Blanks):
        yield "\n\n".join(f"{safe(label)}: {_BLANK * 30}" for label in block.labels)


def _table(table: Table) -> str:
    lines = [
        _line([safe(column.title) for column in table.columns]),
        _line(["---"] * len(table.columns)),
        *(_line(_cells(table.columns, row)) for row in table.rows),
    ]
    return "\n".join(lines)


def _line(cells: list[str]) -> str:
    return "| " + " | ".join(cells) + " |"


def _cells(columns: tuple[Column, ...], row: Row) -> list[str]:
    if len(row.cells) == 1:
        return ["", f"**{safe(row.cells[0])}**", *[""] * (len(columns) - 2)]
    return [_cell(column, cell, row) for column, cell in zip(columns, row.cells, strict=True)]


def _cell(column: Column, cell: str, row: Row) -> str:
    if column.kind == "tick":
        return "" if row.quiet else "☐"
    if column.kind in {"strong", "time"}:
        return f"**{safe(cell)}**" if cell else ""
    if column.kind == "blank" and not row.quiet:
        return f"{_BLANK * 6} {safe(cell)}".rstrip()
    return safe(cell)


def _chart(chart: Chart) -> Iterator[str]:
    told = window_words(chart)
    yield safe(f"{chart.caption}; {chart.target_name}" + (f"; {told}." if told else "."))
    hours = np.linspace(chart.hours[0], chart.hours[-1], _ROWS_OF_CHART)
    bands = [np.interp(hours, chart.hours, band) for band in (chart.low, chart.middle, chart.high)]
    celsius = np.interp(hours, chart.temperature_hours, chart.celsius)
    lines = [_line(["When", "°C", "5 %", "median", "95 %"]), _line(["---"] * 5)]
    for place, hour in enumerate(hours):
        shares = [words.percent(float(band[place])) for band in bands]
        cells = [moment(chart, float(hour)), f"{celsius[place]:.3g}", *shares]
        lines.append(_line([safe(cell) for cell in cells]))
    yield "\n".join(lines)
