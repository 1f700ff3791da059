"""A sheet as one HTML file: nothing to load, nothing that runs, made to be printed."""

from collections.abc import Iterator
from html import escape
from math import sqrt

from digestplan.report.sheet.chart import drawing, one_temperature, window_words
from digestplan.report.sheet.drawing import svg
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
    SheetCaution,
    Table,
)
from digestplan.report.sheet.typed import typeset

_BOX = "☐"
_POLICY = "default-src 'none'; style-src 'unsafe-inline'"

_CSS = """
@page { margin: 11mm 12mm; }
* { box-sizing: border-box; }
html { font-size: 12pt; }
body { font: 1rem/1.25 "DejaVu Sans", Verdana, Arial, sans-serif; color: #000; background: #fff;
  max-width: 210mm; margin: 0 auto; padding: 4mm; overflow-wrap: break-word; }
h1 { font-size: 1.55rem; line-height: 1.15; margin: 0 0 .4rem; }
h2 { font-size: 1.15rem; margin: .7rem 0 .15rem; break-after: avoid; }
p { margin: .15rem 0; white-space: pre-wrap; }
.large { font-size: 1.25rem; font-weight: bold; border: 1.5pt solid #000; padding: .25rem .5rem; }
.small { font-size: .74rem; }
table { width: 100%; border-collapse: collapse; table-layout: fixed; }
thead { display: table-header-group; }
tr { break-inside: avoid; }
tr.across { break-after: avoid; }
th { font-size: .74rem; text-align: left; border-bottom: 1pt solid #000; padding: .05rem .3rem; }
td { border-bottom: .5pt solid #999; padding: .12rem .3rem; vertical-align: middle; }
td.small { font-size: .78rem; line-height: 1.15; }
td.strong, td.time { font-size: 1.25rem; font-weight: bold; line-height: 1.1; }
td.time { white-space: nowrap; } td small { font-size: .78rem; font-weight: normal; }
td.tick { font-size: 1.4rem; line-height: 1; }
td.blank { border-left: .5pt solid #999; font-size: .74rem; text-align: right; }
tr.across td { font-weight: bold; background: #e4e4e4; }
tr.quiet td { background: #f4f4f4; }
tr td, .level { -webkit-print-color-adjust: exact; print-color-adjust: exact; }
dl { margin: 0; display: grid; grid-template-columns: 9em 1fr; gap: .05rem .5rem; }
dt { font-weight: bold; } dd { margin: 0; }
svg { display: block; width: min(100%, 54rem); height: auto; margin: 0 auto; }
figure { margin: .15rem 0; break-inside: avoid; } figcaption { font-size: .74rem; }
.caution { border: 1.2pt solid #000; padding: .1rem .4rem; margin: .2rem 0; font-size: .86rem;
  white-space: normal; break-inside: avoid; }
.caution.stop { border-width: 3pt; font-size: 1.1rem; font-weight: bold; }
.caution.note { border-width: .5pt; }
.level { display: inline-block; min-width: 3.6em; font-weight: bold; }
.stop .level { background: #000; color: #fff; text-align: center; margin-right: .4em; }
.blanks { display: flex; gap: 6mm; margin-top: 2.2rem; break-inside: avoid; }
.blanks span { flex: 1; border-top: 1pt solid #000; font-size: .74rem; }
footer { font-size: .74rem; margin-top: .5rem; }
@media print { html { font-size: var(--print); } body { padding: 0; max-width: none; } }
"""
_PRINTED = (7.2, 10.5)  # [pt] between which the type is printed: the largest for two pages
_FILLS_TWO_PAGES = 3900.0  # characters at 10 pt
_ROW = 60  # characters that the height of a row stands for


def html(sheet: Sheet) -> str:
    """
    Return a sheet as an HTML document.

    Parameters
    ----------
    sheet
        The sheet.

    Returns
    -------
    document
        All text is escaped; no script runs and nothing is loaded from anywhere.
    """
    parts = [
        "<!DOCTYPE html>",
        f'<html lang="en" style="--print: {_printed(sheet):.1f}pt"><head><meta charset="utf-8">',
        f'<meta http-equiv="Content-Security-Policy" content="{_POLICY}">',
        '<meta name="viewport" content="width=device-width">',
        f"<title>{_safe(sheet.title)}</title>",
        f"<style>{_CSS}</style></head><body>",
        f'<h1 dir="auto">{_safe(sheet.title)}</h1>',
    ]
    for section in sheet.sections:
        if section.heading:
            parts.append(f"<h2>{_safe(section.heading)}</h2>")
        for block in section.blocks:
            parts += _block(block)
    parts.append(f"<footer>{_safe(sheet.footer)}</footer>")
    parts.append("</body></html>\n")
    return "\n".join(parts)


def _printed(sheet: Sheet) -> float:
    """Size of type with which the sheet should print on two pages. [pt]"""
    rows = len(sheet.amounts) + len(sheet.actions) + len(sheet.cautions)
    cautions = sum(len(caution.text) for caution in sheet.cautions)
    actions = sum(len(action.text) for action in sheet.actions)
    small = sum(
        len(value)
        for section in sheet.sections
        for block in section.blocks
        if isinstance(block, Facts)
        for _, value in block.rows
    )
    fill = rows * _ROW + cautions + actions + 0.6 * small
    low, high = _PRINTED
    return min(max(10.0 * sqrt(_FILLS_TWO_PAGES / fill), low), high)


def _safe(text: str) -> str:
    return escape(typeset(text), quote=True)


def _block(block: Block) -> Iterator[str]:
    if isinstance(block, Lines):
        for line in block.lines:
            yield f'<p class="{block.size}" dir="auto">{_safe(line)}</p>'
    elif isinstance(block, Facts):
        yield f'<dl class="{"small" if block.small else "normal"}">'
        yield from (f"<dt>{_safe(k)}</dt><dd>{_safe(v)}</dd>" for k, v in block.rows)
        yield "</dl>"
    elif isinstance(block, Table):
        yield from _table(block)
    elif isinstance(block, Cautions):
        yield from map(_caution, block.items)
    elif isinstance(block, Chart):
        yield from _chart(block)
    elif isinstance(block, Blanks):
        labels = "".join(f"<span>{_safe(label)}</span>" for label in block.labels)
        yield f'<div class="blanks">{labels}</div>'


def _table(table: Table) -> Iterator[str]:
    total = sum(column.weight for column in table.columns)
    yield "<table><colgroup>"
    yield "".join(f'<col style="width:{100 * c.weight / total:.2f}%">' for c in table.columns)
    headings = "".join(f"<th>{_safe(column.title)}</th>" for column in table.columns)
    yield f"</colgroup><thead><tr>{headings}</tr></thead><tbody>"
    for row in table.rows:
        yield _row(table.columns, row)
    yield "</tbody></table>"


def _row(columns: tuple[Column, ...], row: Row) -> str:
    if len(row.cells) == 1:
        return f'<tr class="across"><td colspan="{len(columns)}">{_safe(row.cells[0])}</td></tr>'
    cells = []
    for column, cell in zip(columns, row.cells, strict=True):
        cells.append(f'<td class="{column.kind}">{_cell(column, cell, row)}</td>')
    quiet = ' class="quiet"' if row.quiet else ""
    return f"<tr{quiet}>{''.join(cells)}</tr>"


def _cell(column: Column, cell: str, row: Row) -> str:
    if column.kind == "tick" and not row.quiet:
        return _BOX
    day, blank, time = cell.partition(" ")
    if column.kind == "time" and time:
        return f"<small>{_safe(day)}</small>{blank}{_safe(time)}"
    return _safe(cell)


def _caution(caution: SheetCaution) -> str:
    level = f'<span class="level">{caution.level.upper()}</span>'
    where = f"<b>{_safe(caution.where)}:</b>"
    return f'<p class="caution {caution.level}">{level} {where} {_safe(caution.text)}</p>'


def _chart(chart: Chart) -> Iterator[str]:
    caption = chart_caption(chart)
    yield f"<figure><figcaption>{_safe(caption)}</figcaption>"
    yield svg(drawing(chart), f"{caption} {window_words(chart)}")
    yield "</figure>"


def chart_caption(chart: Chart) -> str:
    """Return the line above a chart."""
    band = "; hatched: 5 % to 95 %" if chart.low != chart.high else ""
    heat = f"; at {chart.celsius[0]:.3g} °C" if one_temperature(chart) else "; below: temperature"
    return f"{chart.caption} (line: median{band}{heat})."
