"""A sheet as PDF, on A4 or Letter, by reportlab and with fonts of its own."""

from bisect import bisect_left
from collections.abc import Iterator
from functools import cache
from importlib.resources import files
from io import BytesIO
from typing import Any, Literal
from xml.sax.saxutils import escape

from reportlab.lib import pagesizes
from reportlab.lib.colors import HexColor, black, white
from reportlab.lib.styles import ParagraphStyle
from reportlab.pdfbase.pdfmetrics import (
    getFont,
    getRegisteredFontNames,
    registerFont,
    registerFontFamily,
    stringWidth,
)
from reportlab.pdfbase.ttfonts import TTFont
from reportlab.pdfgen.canvas import Canvas
from reportlab.platypus import (
    CondPageBreak,
    Flowable,
    KeepTogether,
    Paragraph,
    SimpleDocTemplate,
    Spacer,
)
from reportlab.platypus import Table as PaperTable

from digestplan.report.sheet.as_html import chart_caption
from digestplan.report.sheet.chart import drawing
from digestplan.report.sheet.drawing import shapes
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
from digestplan.report.sheet.typed import typeset, without_isolates

Paper = Literal["a4", "letter"]

_PAPERS = {"a4": pagesizes.A4, "letter": pagesizes.LETTER}
_MARGIN, _FOOT, _FRAME = 32.0, 36.0, 6.0  # [1/72 inch]; reportlab's frame pads by the last
_ROOM_UNDER_A_HEADING = 50.0  # below which a section starts on the next page
_WANTED_PAGES = 2
_SCALES = (
    0.74,
    0.8,
    0.86,
    0.93,
    1.0,
    1.08,
    1.16,
    1.25,
)  # of the type: the largest that fits is taken
_FONT, _BOLD = "DejaVuSans", "DejaVuSans-Bold"
_MISSING = "□"
_ON_MISSING = (
    f"{_MISSING} stands for a character that this PDF has no letter for; the HTML sheet shows it."
)
_GREY, _LIGHT, _RULE = HexColor("#e4e4e4"), HexColor("#f4f4f4"), HexColor("#909090")


def pdf(sheet: Sheet, paper: Paper = "a4") -> bytes:
    """
    Return a sheet as a PDF document.

    Parameters
    ----------
    sheet
        The sheet.
    paper
        ``a4`` or ``letter``.

    Returns
    -------
    document
        The same bytes for the same sheet; its date is that of ``SOURCE_DATE_EPOCH``, where that
        is set.
    """
    _register()
    tried = cache(lambda scale: _laid_out(sheet, paper, scale))
    fitting = bisect_left(_SCALES, 1, key=lambda scale: tried(scale)[1] > _WANTED_PAGES)
    return tried(_SCALES[fitting - 1] if fitting else 1.0)[0]


def _laid_out(sheet: Sheet, paper: Paper, scale: float) -> tuple[bytes, int]:
    """A document and how many pages it has."""
    writer = _Writer(_PAPERS[paper][0] - 2 * _MARGIN, scale)
    target = BytesIO()
    template = SimpleDocTemplate(
        target,
        pagesize=_PAPERS[paper],
        leftMargin=_MARGIN - _FRAME,
        rightMargin=_MARGIN - _FRAME,
        topMargin=_MARGIN - _FRAME,
        bottomMargin=_FOOT - _FRAME,
        invariant=1,
        title=writer.plain(sheet.title),
        author="",
        subject="Bench sheet",
        creator="digestplan",
        lang="en",
    )
    foot = f"{writer.plain(sheet.footer)} · {writer.plain(sheet.title)}"
    template.build(list(writer.story(sheet)), canvasmaker=_numbered(foot))
    return target.getvalue(), template.page


def _register() -> None:
    if {_FONT, _BOLD} <= set(getRegisteredFontNames()):
        return
    for name in (_FONT, _BOLD):
        content = files("digestplan.report").joinpath("fonts", f"{name}.ttf").read_bytes()
        registerFont(TTFont(name, BytesIO(content)))
    registerFontFamily(_FONT, normal=_FONT, bold=_BOLD, italic=_FONT, boldItalic=_BOLD)


def _numbered(foot: str) -> type[Canvas]:
    """A canvas that knows at the end how many pages there are."""

    class Numbered(Canvas):  # type: ignore[misc]
        """Keeps its pages until all are there."""

        def __init__(self, *args: Any, **kwargs: Any) -> None:
            super().__init__(*args, **kwargs)
            self._kept: list[dict[str, Any]] = []

        def showPage(self) -> None:  # noqa: N802 - reportlab's name
            """Keep the page for later."""
            self._kept.append(dict(self.__dict__))
            self._startPage()

        def save(self) -> None:
            """Write all pages, each with its number and how many there are."""
            for number, state in enumerate(self._kept, 1):
                self.__dict__.update(state)
                self.setFont(_FONT, 7.5)
                page = f"page {number} of {len(self._kept)}"
                width = self._pagesize[0]
                self.drawRightString(width - _MARGIN, 20, page)
                self.drawString(_MARGIN, 20, _cut(foot, width - 2 * _MARGIN - 80))
                super().showPage()
            super().save()

    return Numbered


def _cut(text: str, width: float) -> str:
    while text and stringWidth(text, _FONT, 7.5) > width:
        text = text[:-2] + "…" if text.endswith("…") else text[:-1] + "…"
    return text


def _styles(scale: float) -> dict[str, ParagraphStyle]:
    """The type of every kind of text, at a scale."""

    def style(size: float, *, bold: bool = False, **more: Any) -> ParagraphStyle:
        name = _BOLD if bold else _FONT
        sized = size * scale
        return ParagraphStyle(
            name, fontName=name, fontSize=sized, leading=1.18 * sized, splitLongWords=1, **more
        )

    framed = {"borderColor": black, "borderWidth": 1.2, "borderPadding": (3, 4, 5, 4)}
    return {
        "title": style(14.5, bold=True, spaceAfter=3),
        "heading": style(11, bold=True, spaceBefore=5 * scale, spaceAfter=2),
        "large": style(
            12, bold=True, spaceBefore=8, spaceAfter=7, leftIndent=5, rightIndent=5, **framed
        ),
        "normal": style(9.5, spaceAfter=2),
        "small": style(7, spaceAfter=1.5),
        "label": style(9.5, bold=True),
        "small label": style(6.6, bold=True),
        "small value": style(6.6),
        "column": style(7, bold=True),
        "across": style(9, bold=True),
        "cell text": style(9.5),
        "cell strong": style(12, bold=True),
        "cell small": style(7.5),
        "cell tick": style(14),
        "cell blank": style(7, alignment=2),
        "badge": style(9, bold=True),
        "badge stop": style(11, bold=True, textColor=white),
        "stop": style(10.5, bold=True),
        "care": style(8.2),
        "note": style(8.2),
    }


class _Writer:
    """Turns the blocks of a sheet into what reportlab lays out."""

    def __init__(self, width: float, scale: float) -> None:
        self.width, self.scale = width, scale
        self.styles = _styles(scale)
        self.missing = False

    def story(self, sheet: Sheet) -> Iterator[Flowable]:
        """Everything from top to bottom."""
        yield self.text(sheet.title, "title")
        for section in sheet.sections:
            blocks = [flowable for block in section.blocks for flowable in self.block(block)]
            if not blocks:
                continue
            if section.heading:
                first = section.blocks[0]
                chart = drawing(first, self.scale).height + 20 if isinstance(first, Chart) else 0.0
                yield CondPageBreak(_ROOM_UNDER_A_HEADING + chart)
                yield self.text(section.heading, "heading")
            yield from blocks
        if self.missing:
            yield self.text(_ON_MISSING, "small")

    def plain(self, text: str) -> str:
        """A text with what the font does not hold replaced by a box."""
        known = _known_characters()
        shown = without_isolates(typeset(text))
        if all(c in known or c in "\n\u200c\u200d" for c in shown):
            return shown.replace("\u200c", "").replace("\u200d", "")
        self.missing = True
        return "".join(c if c in known or c == "\n" else _MISSING for c in shown)

    def text(self, text: str, style: str, before: str = "") -> Paragraph:
        """A paragraph of plain text; ``before`` is markup of ours."""
        body = escape(self.plain(text)).replace("\n", "<br/>")
        lead = len(body) - len(body.lstrip(" "))
        return Paragraph(before + "\u00a0" * lead + body[lead:], self.styles[style])

    def block(self, block: Block) -> Iterator[Flowable]:
        """One block."""
        if isinstance(block, Lines):
            yield from (self.text(line, block.size) for line in block.lines)
        elif isinstance(block, Facts):
            yield self._facts(block)
        elif isinstance(block, Table):
            yield self._table(block)
        elif isinstance(block, Cautions):
            yield from (self._caution(item) for item in block.items)
        elif isinstance(block, Chart):
            drawn = shapes(drawing(block, self.scale), _FONT, _BOLD, self.width)
            yield KeepTogether([self.text(chart_caption(block), "small"), drawn])
        elif isinstance(block, Blanks):
            yield self._blanks(block)

    def _facts(self, facts: Facts) -> Flowable:
        kind = "small value" if facts.small else "normal"
        label = "small label" if facts.small else "label"
        rows = [[self.text(k, label), self.text(v, kind)] for k, v in facts.rows]
        first = (82.0 if facts.small else 46.0) * self.scale
        look = [*_padding(0, 3, 0.5, 1), ("VALIGN", (0, 0), (-1, -1), "TOP")]
        return PaperTable(rows, [first, self.width - first], style=look, splitInRow=1)

    def _table(self, table: Table) -> Flowable:
        total = sum(column.weight for column in table.columns)
        widths = [self.width * column.weight / total for column in table.columns]
        rows: list[list[Any]] = [[self.text(c.title, "column") for c in table.columns]]
        look: list[Any] = [
            *_padding(3, 3, self.scale, 2.4 * self.scale),
            ("VALIGN", (0, 0), (-1, -1), "MIDDLE"),
            ("LINEBELOW", (0, 0), (-1, -1), 0.4, _RULE),
            ("LINEBELOW", (0, 0), (-1, 0), 1, black),
        ]
        for place, row in enumerate(table.rows, 1):
            rows.append(self._row(table.columns, row))
            if len(row.cells) == 1:
                look.append(("SPAN", (0, place), (-1, place)))
                look.append(("BACKGROUND", (0, place), (-1, place), _GREY))
                look.append(("NOSPLIT", (0, place), (0, place + 1)))
            elif row.quiet:
                look.append(("BACKGROUND", (0, place), (-1, place), _LIGHT))
        look += [
            ("LINEBEFORE", (place, 0), (place, -1), 0.4, _RULE)
            for place, column in enumerate(table.columns)
            if column.kind == "blank"
        ]
        return PaperTable(rows, widths, style=look, repeatRows=1)

    def _row(self, columns: tuple[Column, ...], row: Row) -> list[Any]:
        if len(row.cells) == 1:
            return [self.text(row.cells[0], "across"), *[""] * (len(columns) - 1)]
        cells: list[Any] = []
        for column, cell in zip(columns, row.cells, strict=True):
            if column.kind == "time":
                cells.append(self._time(cell))
                continue
            text = "☐" if column.kind == "tick" and not row.quiet else cell
            cells.append(self.text(text, f"cell {column.kind}"))
        return cells

    def _time(self, cell: str) -> Paragraph:
        day, _, time = cell.partition(" ")
        if not time:
            return self.text(cell, "cell strong")
        size = 7.5 * self.scale
        before = f'<font name="{_FONT}" size="{size:.2f}">{escape(self.plain(day))}</font> '
        return self.text(time, "cell strong", before)

    def _caution(self, caution: SheetCaution) -> Flowable:
        level = caution.level.upper()
        where = escape(self.plain(caution.where))
        stop = caution.level == "stop"
        words = self.text(caution.text, caution.level, f"<b>{where}:</b> ")
        badge = Paragraph(level, self.styles["badge stop" if stop else "badge"])
        thick = {"stop": 2.5, "care": 1.2, "note": 0.5}[caution.level]
        look = [
            ("BOX", (0, 0), (-1, -1), thick, black),
            ("BACKGROUND", (0, 0), (0, -1), black if stop else white),
            ("VALIGN", (0, 0), (-1, -1), "TOP"),
            *_padding(6, 5, 0.5, 2.2),
        ]
        first = 52 * self.scale
        return PaperTable(
            [[badge, words]], [first, self.width - first], style=look, spaceAfter=2, splitInRow=1
        )

    def _blanks(self, blanks: Blanks) -> Flowable:
        count = len(blanks.labels)
        gap = 14.0
        width = (self.width - gap * (count - 1)) / count
        row: list[Any] = []
        look = _padding(0, 3, 1, 1)
        widths = []
        for place, label in enumerate(blanks.labels):
            if place:
                row.append("")
                widths.append(gap)
            row.append(self.text(label, "small"))
            widths.append(width)
            look.append(("LINEABOVE", (2 * place, 0), (2 * place, 0), 0.8, black))
        return KeepTogether([Spacer(1, 22), PaperTable([row], widths, style=look)])


def _padding(left: float, right: float, top: float, bottom: float) -> list[Any]:
    sides = (("LEFT", left), ("RIGHT", right), ("TOP", top), ("BOTTOM", bottom))
    return [(f"{side}PADDING", (0, 0), (-1, -1), size) for side, size in sides]


@cache
def _known_characters() -> frozenset[str]:
    return frozenset(map(chr, getFont(_FONT).face.charToGlyph))
