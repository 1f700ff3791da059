"""Plans whose sheets are tested, and all that a sheet says (no tests here)."""

import re
from dataclasses import replace
from html.parser import HTMLParser

from markdown_it import MarkdownIt

from digestplan.plan.read import parse_plan
from digestplan.report.sheet.build import bench_sheet
from digestplan.report.sheet.chart import window_words
from digestplan.report.sheet.model import Blanks, Cautions, Chart, Facts, Lines, Table

HEAD = """
digestplan = 1
{start}
{visits}

[sample]
{piece}
substrate_fraction = 0.30
target_extent = 0.9
keep_loss_limit = 0.05
keep_selectivity = "60"
susceptibility = "3e-5 g/(CDU h)"
mineral_fraction = 0.5
density = "1.9 g/mL"

[lot]
label_activity = "280 CDU/mg"
remaining = "0.82{spread}"

[enzyme]
name = "an invented protease"
reference_temperature = "37 degC"
activation_energy = "52 kJ/mol"
inactivation_rate = "0.03 1/h"
inactivation_energy = "230 kJ/mol"
"""
DIGEST = """
[[steps]]
do = "digest"
{charge}
volume = "{volume}"
buffer = "tris"
buffer_concentration = "50 mM"
ph = 7.5
ph_at = "{ph_at}"
calcium = "5 mM"
temperature = [
  {{ at = "22 degC", for = "20 min" }},
  {{ to = "37 degC", over = "15 min" }},
  {{ at = "37 degC", for = "5 h" }},
  {{ to = "4 degC", over = "30 min" }},
  {{ at = "4 degC", for = "9 h" }},
]
additions = [ {{ after = "3 h", charge = "2.04 mg" }} ]
"""
BEFORE = """
[[steps]]
do = "demineralise"
reagent = "hydrochloric acid"
concentration = "0.5 M"
volume = "20 mL"
changes = ["12 h", "24 h"]
temperature = "20 degC"
for = "36 h"
closed_vessel = true

[[steps]]
do = "rinse"
fluid = "water"
volume = "10 mL"
exchanges = 3
each = "40 min"
temperature = "20 degC"
"""
AFTER = """
[[steps]]
do = "stop"
how = "chelate"
concentration = "20 mM"
for = "10 min"

[[steps]]
do = "hold"
temperature = "4 degC"
for = "24 h"
"""
START = "start = 2026-03-12T17:30:00"
VISITS = 'visits = ["2026-03-13T08:30 / 2026-03-13T17:00", "2026-03-14T08:30 / PT8H30M"]'
PIECE = 'wet_mass = "180 mg"\nshape = "slab"\nthickness = "1.5 mm"'


def plan_of(
    title="Invented tendon",
    notes="",
    *,
    start=START,
    visits=VISITS,
    piece=PIECE,
    charge='charge = "6 mg"',
    volume="3 mL",
    ph_at="25 degC",
    spread=" ± 0.06",
    whole=False,
):
    """A plan of one digest, or with `whole` of all five kinds of step."""
    head = HEAD.format(
        start=start,
        visits=visits if start else "",
        piece=piece,
        spread=spread,
    )
    digest = DIGEST.format(charge=charge, volume=volume, ph_at=ph_at)
    steps = BEFORE + digest + AFTER if whole else digest
    return replace(parse_plan(head + steps, "plan.toml"), title=title, notes=notes)


def sheet_of(n_draws=64, **changes):
    """The sheet of such a plan."""
    return bench_sheet(plan_of(**changes), n_draws)


def sayings(sheet):
    """Everything that a sheet says, text by text."""
    yield sheet.title
    yield sheet.footer
    for section in sheet.sections:
        yield section.heading
        for block in section.blocks:
            yield from _said_in(block)


def _said_in(block):
    if isinstance(block, Lines):
        yield from block.lines
    elif isinstance(block, Facts):
        yield from (text for row in block.rows for text in row)
    elif isinstance(block, Table):
        yield from (column.title for column in block.columns)
        yield from (cell for row in block.rows for cell in row.cells)
    elif isinstance(block, Cautions):
        for item in block.items:
            yield from (item.level.upper(), item.where, item.text)
    elif isinstance(block, Chart):
        yield from (block.caption, block.target_name, window_words(block))
    elif isinstance(block, Blanks):
        yield from block.labels


class _Text(HTMLParser):
    def __init__(self):
        super().__init__(convert_charrefs=True)
        self.parts, self.tags, self.attributes, self._hidden = [], [], [], 0

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        self.attributes += [(tag, *attribute) for attribute in attrs]
        self._hidden += tag == "style"

    def handle_endtag(self, tag):
        self._hidden -= tag == "style"

    def handle_data(self, data):
        if not self._hidden:
            self.parts.append(data)


def parsed_html(document):
    """The text, tags and attributes of an HTML document, its styles left out."""
    parser = _Text()
    parser.feed(document)
    parser.close()
    return "".join(parser.parts), parser.tags, parser.attributes


def rendered(document):
    """A Markdown document as HTML, with tables and links that make themselves."""
    return MarkdownIt("commonmark", {"linkify": False}).enable("table").render(document)


def pdf_pages(document):
    """The text of each page of a PDF."""
    from io import BytesIO

    from pypdf import PdfReader

    return [page.extract_text() for page in PdfReader(BytesIO(document)).pages]


def pdf_text(document):
    """The text of a PDF without a break from page to page: what stands at their feet comes last."""
    pages = [page.rsplit("page ", 1) for page in pdf_pages(document)]
    return "".join(body for body, _ in pages) + "".join(foot for _, foot in pages)


def squeezed(text):
    """A text without blanks, so that the ends of lines do not matter."""
    return re.sub(r"[\s\u00a0\u2068\u2069]+", "", text)
