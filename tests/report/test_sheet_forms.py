"""The three forms of a sheet hold the same facts, and nothing in them acts."""

import os
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import pytest

from digestplan.library.cautions import deferral
from digestplan.plan.read import read_plan
from digestplan.report.sheet.as_html import html
from digestplan.report.sheet.as_markdown import markdown
from digestplan.report.sheet.as_pdf import pdf
from digestplan.report.sheet.build import bench_sheet
from tests.report.sheet_plans import (
    parsed_html,
    pdf_pages,
    pdf_text,
    plan_of,
    rendered,
    sayings,
    sheet_of,
    squeezed,
)

DEMOS = sorted((Path(__file__).parents[2] / "presets_demo").glob("*.toml"))
SHEETS = {
    "demo": lambda: bench_sheet(read_plan(DEMOS[0]), 64),
    "whole": lambda: sheet_of(whole=True),
    "no clock": lambda: sheet_of(start="", whole=True),
    "exact": lambda: sheet_of(spread=""),
    "stock": lambda: sheet_of(charge='charge = "0.3 mg"'),
    "unweighed": lambda: sheet_of(
        charge='ratio = "100 CDU/mg"', piece='wet_mass = "180 mg"', volume="2.3456 mL"
    ),
}
FORMS = {
    "html": lambda sheet: parsed_html(html(sheet))[0],
    "markdown": lambda sheet: parsed_html(rendered(markdown(sheet)))[0],
    "pdf": lambda sheet: pdf_text(pdf(sheet)),
}
HOSTILE = [
    "<script>alert(1)</script><img src=x onerror=alert(2)> & \"quoted\" 'so' &lt;b&gt; &#x41;",
    '<font color="red">red</font> <para><b>unclosed <br/> <a href="http://x.test">go</a>',
    "# head **bold** _low_ `code` ~~gone~~ [link](http://x.test) ![i](http://x.test/i.png) <b>",
    "| a | b | c\\| d \\ e \\\\ f *",
    "=1+1 +2 -3 @SUM(A1) $x^2$ $$y$$ :tada: www.x.test http://x.test me@x.test",
    "1. one 2) two - three > four --- ***",
    "{{ 7*7 }} ${7*7} %(x)s {0} %s \\u0041",
    "x" * 3000,
]


@pytest.mark.parametrize("form", FORMS)
@pytest.mark.parametrize("plan", SHEETS)
def test_each_form_holds_every_fact(plan, form):
    """Every text of the model, and so every amount, time and caution, is in each form."""
    sheet = SHEETS[plan]()
    text = squeezed(FORMS[form](sheet))
    said = list(sayings(sheet))

    assert [fact for fact in said if squeezed(fact) not in text] == []
    assert len(said) > 60


@pytest.mark.parametrize("form", FORMS)
def test_a_fact_that_is_not_on_the_sheet_is_not_found(form):
    """The check above can fail: another amount is in no form."""
    text = squeezed(FORMS[form](sheet_of()))

    assert squeezed("6.0 mg") in text
    assert squeezed("6.1 mg") not in text


@pytest.mark.parametrize("form", FORMS)
@pytest.mark.parametrize("path", DEMOS, ids=lambda path: path.stem)
def test_every_caution_stands_with_its_deferral(path, form):
    """All cautions of the forecast stand in each form, those about safety with the deferral."""
    sheet = bench_sheet(read_plan(path), 64)
    text = squeezed(FORMS[form](sheet))

    assert sheet.cautions
    assert all(squeezed(caution.text) in text for caution in sheet.cautions)
    deferring = sum(caution.text.endswith(deferral()) for caution in sheet.cautions)
    assert text.count(squeezed(deferral())) == deferring + 1


def test_what_says_stop_stands_first():
    """A caution of the highest level stands before the amounts, in each form."""
    sheet = sheet_of(whole=True)
    stop = next(caution for caution in sheet.cautions if caution.level == "stop")

    for form in FORMS.values():
        text = squeezed(form(sheet))
        assert text.index(squeezed(stop.text)) < text.index(squeezed("Weigh and pipette"))


@pytest.mark.parametrize("paper", ["a4", "letter"])
@pytest.mark.parametrize("path", DEMOS, ids=lambda path: path.stem)
def test_a_demo_plan_prints_on_two_pages(path, paper):
    """Every demo plan prints on one or two pages of A4 and of Letter."""
    pages = pdf_pages(pdf(bench_sheet(read_plan(path), 200), paper))

    assert len(pages) in {1, 2}
    assert f"page 1 of {len(pages)}" in pages[0]


def test_the_same_sheet_gives_the_same_bytes(monkeypatch):
    """A sheet is the same, byte for byte, whenever it is made."""
    first = [pdf(sheet_of()), html(sheet_of()), markdown(sheet_of())]
    monkeypatch.setattr("time.time", lambda: 4e9)
    monkeypatch.setattr("time.localtime", lambda *_: (2096, 10, 2, 7, 6, 40, 1, 276, 0))

    assert [pdf(sheet_of()), html(sheet_of()), markdown(sheet_of())] == first


def test_the_date_is_the_one_that_is_set(monkeypatch):
    """The only date in a PDF is that of SOURCE_DATE_EPOCH, where it is set."""
    from io import BytesIO

    from pypdf import PdfReader

    sheet = sheet_of()
    monkeypatch.delenv("SOURCE_DATE_EPOCH", raising=False)
    assert PdfReader(BytesIO(pdf(sheet))).metadata.creation_date.year == 2000
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1700000000")
    assert PdfReader(BytesIO(pdf(sheet))).metadata.creation_date.isoformat()[:10] == "2023-11-14"


def test_another_process_gives_the_same_bytes():
    """Neither the order of hashes nor what was printed before changes a sheet."""
    command = (
        "import hashlib, sys; from tests.report.sheet_plans import sheet_of;"
        "from digestplan.report.sheet.as_pdf import pdf; from digestplan.report.sheet.as_html"
        " import html; s = sheet_of(whole=True);"
        "print(hashlib.sha256(pdf(s) + html(s).encode()).hexdigest())"
    )
    printed = {
        subprocess.run(
            [sys.executable, "-c", command],
            cwd=DEMOS[0].parents[1],
            env={**os.environ, "PYTHONHASHSEED": seed},
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for seed in ("1", "2")
    }

    assert len(printed) == 1
    assert len(printed.pop().strip()) == 64


# -- the user's text -----------------------------------------------------------------------------


@pytest.mark.parametrize("form", FORMS)
@pytest.mark.parametrize("text", [*HOSTILE, "<i>\u202e" * 2000], ids=lambda text: text[:12])
def test_other_texts_of_the_plan_do_no_harm(text, form):
    """Names of enzyme, lot, fluid and agent are shortened, harmless, and cost no caution."""
    plan = plan_of(whole=True)
    demineralise, rinse, digest, stop, hold = plan.steps
    steps = (demineralise, replace(rinse, fluid=text), digest, replace(stop, agent=text), hold)
    sheet = bench_sheet(
        replace(
            plan,
            enzyme=replace(plan.enzyme, name=text),
            lot=replace(plan.lot, id=text),
            steps=steps,
            remarks=(text,),
        ),
        16,
    )
    shown = FORMS[form](sheet)

    assert all(squeezed(caution.text) in squeezed(shown) for caution in sheet.cautions)
    assert squeezed(shown).count(squeezed(deferral())) > 1
    assert "\u202e" not in shown
    assert {"script", "a", "img"}.isdisjoint(parsed_html(html(sheet))[1])


@pytest.mark.parametrize("form", FORMS)
@pytest.mark.parametrize("text", HOSTILE, ids=lambda text: text[:12])
def test_the_users_text_is_shown_as_typed(text, form):
    """A title and notes full of markup come out letter for letter."""
    shown = squeezed(FORMS[form](sheet_of(title=text, notes=f"see:\n{text}")))

    assert shown.count(squeezed(text)) >= 2


@pytest.mark.parametrize("text", HOSTILE, ids=lambda text: text[:12])
def test_nothing_of_the_users_text_becomes_html(text):
    """The tags and attributes of a sheet are those of a sheet with a plain title."""
    plain, hostile = sheet_of(title="Plain", notes="plain"), sheet_of(title=text, notes=text)
    ours = set(parsed_html(html(plain))[1])
    _, tags, attributes = parsed_html(html(hostile))

    assert set(tags) <= ours
    assert not {"script", "link", "img", "iframe", "a", "object"} & set(tags)
    assert [a for a in attributes if a[1] in {"href", "src"} or a[1].startswith("on")] == []


@pytest.mark.parametrize("text", HOSTILE, ids=lambda text: text[:12])
def test_nothing_of_the_users_text_becomes_markdown(text):
    """Rendered, a sheet has the tags of a sheet with a plain title, and as many of them."""
    plain = parsed_html(rendered(markdown(sheet_of(title="Plain " * 40, notes="plain"))))[1]
    hostile = parsed_html(rendered(markdown(sheet_of(title=f"{text} {'y ' * 99}", notes=text))))[1]

    assert sorted(hostile) == sorted(plain)


def test_a_page_loads_nothing():
    """The HTML names no other address than that of the SVG language, and forbids scripts."""
    page = html(sheet_of(whole=True))

    assert page.replace("http://www.w3.org/2000/svg", "").count("://") == 0
    assert "default-src &#x27;none&#x27;" in page or "default-src 'none'" in page


@pytest.mark.parametrize("write", [html, markdown, lambda s: "".join(pdf_pages(pdf(s)))])
def test_marks_that_turn_the_writing_are_written_out(write):
    """A mark that turns the direction of writing shows as its code and does not act."""
    sheet = sheet_of(title="safe\u202egnp.exe\u2066 \u200f\u0007 end", notes="a\u061cb\u0000c")
    text = write(sheet)

    for mark in "\u202e\u2066\u200f\u061c\u0007\u0000":
        assert mark not in text
        assert f"U+{ord(mark):04X}" in text.replace("\\", "")


def test_right_to_left_words_do_not_reach_their_neighbours():
    """A word of another direction in a line of ours is kept apart by isolates."""
    text = sheet_of(title="שלום 12 mg").title

    assert text == "\u2068שלום 12 mg\u2069"


def test_letters_that_the_pdf_has_not_are_owned_up_to():
    """A letter outside the PDF's font is a box there, which the sheet says, and whole in HTML."""
    sheet = sheet_of(title="骨 and tendon")
    text = "".join(pdf_pages(pdf(sheet)))

    assert "□ and tendon" in text
    assert "no letter for" in text
    assert "骨 and tendon" in html(sheet)
    assert "no letter for" not in "".join(pdf_pages(pdf(sheet_of(title="кость и ύψος"))))


def test_ten_thousand_characters_leave_the_layout_whole():
    """Very long words and notes are repeated in full, break, and do not crowd the head."""
    words = "".join(f"{n:05d}" for n in range(2000))
    sheet = sheet_of(title=words, notes=words)
    document = pdf(sheet)

    assert len(sheet.title) <= 160
    assert squeezed(pdf_text(document)).count(words) == 2
    assert len(pdf_pages(document)) <= 8
    assert "overflow-wrap: break-word" in html(sheet)


def test_more_than_a_sheet_holds_is_said():
    """Notes beyond ten thousand characters are cut, and how much is cut is said."""
    sheet = sheet_of(notes="z" * 12_345)

    assert "(2345 characters more in the plan)" in html(sheet)
