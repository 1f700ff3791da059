"""``digestplan sheet PLAN -o FILE``."""

import argparse
import os
from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

from digestplan.cli import diagnostics, output
from digestplan.cli.plans import plan_of
from digestplan.problems import InputError, Problem

if TYPE_CHECKING:
    from digestplan.plan.model import Plan
    from digestplan.report.sheet.model import Sheet

_MOST_DIGITS = 11  # of seconds since 1970 that are still a year of four digits
Writer = Callable[["Plan", "Sheet"], bytes]

_NO_PDF = (
    'a PDF needs reportlab: pip install "digestplan[pdf]"; a sheet in .html or .md needs nothing'
)


def run(chosen: argparse.Namespace) -> int | None:
    """Write the bench sheet of a plan; its form is told by the ending of the file's name."""
    target = None if chosen.output is None else Path(chosen.output)
    if target is None and not chosen.json:
        return diagnostics.refuse("say where the sheet goes: -o FILE, ending in .pdf, .html or .md")
    if target is not None and target.suffix.lower() not in _FORMS:
        kinds = ", ".join(_FORMS)
        return diagnostics.refuse(f"{target}: a sheet is written as {kinds}; end its name so")
    writer = None if target is None else _FORMS[target.suffix.lower()](chosen)
    _write(chosen, target, writer)
    return None


def _write(chosen: argparse.Namespace, target: Path | None, writer: Writer | None) -> None:
    from digestplan.report.sheet.build import bench_sheet
    from digestplan.report.sheet.save import save

    plan = plan_of(chosen)
    sheet = bench_sheet(plan, chosen.draws, chosen.seed)
    if target is not None and writer is not None:
        save(target, writer(plan, sheet))
    if chosen.json:
        from digestplan.report.as_json import dumps
        from digestplan.report.sheet.as_document import sheet_document

        output.write(dumps(sheet_document(sheet, None if target is None else str(target))))
    else:
        output.write(f"{target} is written.")


def _html(_: argparse.Namespace) -> Writer:
    from digestplan.report.sheet.as_html import html

    return lambda _, sheet: html(sheet).encode("utf-8")


def _markdown(_: argparse.Namespace) -> Writer:
    from digestplan.report.sheet.as_markdown import markdown

    return lambda _, sheet: markdown(sheet).encode("utf-8")


def _pdf(chosen: argparse.Namespace) -> Writer:
    try:
        from digestplan.report.sheet.as_pdf import pdf
    except ModuleNotFoundError as error:
        if (error.name or "").split(".")[0] != "reportlab":
            raise
        raise InputError(Problem("", _NO_PDF)) from None
    return lambda _, sheet: pdf(sheet, chosen.paper or "a4")


def _calendar(chosen: argparse.Namespace) -> Writer:
    from digestplan.report.sheet.calendar import calendar

    def write(plan: "Plan", sheet: "Sheet") -> bytes:
        try:
            return calendar(sheet, _last_changed(plan))
        except InputError as error:
            raise InputError(
                *(Problem(p.place, p.message, chosen.plan) for p in error.problems)
            ) from None

    return write


def _last_changed(plan: "Plan") -> datetime:
    """When the plan was last changed: ``SOURCE_DATE_EPOCH``, or the time of its file."""
    told = os.environ.get("SOURCE_DATE_EPOCH", "")
    if told.isascii() and told.isdigit() and len(told) <= _MOST_DIGITS:
        return datetime.fromtimestamp(int(told), UTC)
    return datetime.fromtimestamp(int(Path(plan.path or "").stat().st_mtime), UTC)


_FORMS: dict[str, Callable[[argparse.Namespace], Writer]] = {
    ".pdf": _pdf,
    ".html": _html,
    ".md": _markdown,
    ".ics": _calendar,
}
