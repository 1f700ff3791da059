"""The command that writes sheets: endings, refusals, and never half a file."""

import argparse
import json
import os
import sys
from pathlib import Path

import pytest

from digestplan.cli import sheet
from digestplan.cli.diagnostics import run
from digestplan.report.sheet.save import save

DEMO = Path(__file__).parents[2] / "presets_demo" / "porpoise-tendon-overnight.toml"
STARTS = {
    ".pdf": b"%PDF-",
    ".html": b"<!DOCTYPE html>",
    ".md": b"# Porpoise",
    ".ics": b"BEGIN:VCAL",
}


def asked(output, **more):
    """What the command line hands over."""
    told = {"plan": str(DEMO), "output": output, "json": False, "draws": 32, "seed": 1}
    told |= {"register": None, "paper": "a4"}
    return argparse.Namespace(**{**told, **more})


@pytest.mark.parametrize("ending", STARTS)
def test_the_ending_chooses_the_form(ending, tmp_path, capsys):
    """Each ending gives its form, in capitals as well, and the file is named."""
    for name in (f"sheet{ending}", f"SHEET2{ending.upper()}"):
        target = tmp_path / name
        assert run(lambda target=target: sheet.run(asked(str(target)))) == 0
        assert target.read_bytes().startswith(STARTS[ending])

        out, err = capsys.readouterr()
        assert out == f"{target} is written.\n"
        assert err == ""


@pytest.mark.parametrize("name", ["sheet.docx", "sheet", ".pdf", "plan.toml", "sheet.pdf.exe"])
def test_other_endings_are_refused_with_the_list(name, tmp_path, capsys):
    """An ending that is not known is refused before anything is read, and all are listed."""
    target = tmp_path / name

    assert run(lambda: sheet.run(asked(str(target), plan="no such plan"))) == 2
    err = capsys.readouterr().err
    assert all(ending in err for ending in STARTS)
    assert list(tmp_path.iterdir()) == []


def test_a_sheet_needs_a_file_or_json(capsys):
    """Without a file and without --json the command line is refused."""
    assert run(lambda: sheet.run(asked(None))) == 2
    assert "-o FILE" in capsys.readouterr().err


def test_json_tells_the_sheet(tmp_path, capsys):
    """With --json standard output is one document with the sheet's facts, file or no file."""
    target = tmp_path / "sheet.md"
    assert run(lambda: sheet.run(asked(str(target), json=True))) == 0
    document = json.loads(capsys.readouterr().out)
    assert run(lambda: sheet.run(asked(None, json=True))) == 0
    without = json.loads(capsys.readouterr().out)

    assert document["file"] == str(target)
    assert without == {**document, "file": None}
    start = next(a for a in document["actions"] if a["do"] == "add")
    assert start["at"] == "2026-03-12T17:30:00"
    assert {a["amount"] for a in document["amounts"]} == {"180 mg", "3 mL", "8.0 mg"}
    assert document["cautions"]
    assert document["assumptions"]


def test_without_reportlab_the_way_out_is_told(tmp_path, capsys, monkeypatch):
    """Where reportlab is missing, the message names the extra, and nothing is written."""
    for name in [name for name in sys.modules if name.split(".")[0] == "reportlab"]:
        monkeypatch.delitem(sys.modules, name)
    monkeypatch.setitem(sys.modules, "reportlab", None)
    monkeypatch.delitem(sys.modules, "digestplan.report.sheet.as_pdf", raising=False)

    assert run(lambda: sheet.run(asked(str(tmp_path / "sheet.pdf")))) == 1
    err = capsys.readouterr().err
    assert 'pip install "digestplan[pdf]"' in err
    assert list(tmp_path.iterdir()) == []
    assert run(lambda: sheet.run(asked(str(tmp_path / "sheet.html")))) == 0


def test_a_calendar_without_a_clock_names_the_plan(tmp_path, capsys):
    """A plan without a start has no calendar; the message names file and key."""
    text = DEMO.read_text(encoding="utf-8")
    lines = [line for line in text.splitlines() if not line.startswith(("start", "visits"))]
    plan = tmp_path / "plan.toml"
    plan.write_text("\n".join(lines), encoding="utf-8")

    assert run(lambda: sheet.run(asked(str(tmp_path / "x.ics"), plan=str(plan)))) == 1
    assert capsys.readouterr().err.startswith(f"{plan}: start: ")
    assert not (tmp_path / "x.ics").exists()


def test_the_calendar_is_dated_by_its_plan(tmp_path, monkeypatch):
    """The stamp is that of SOURCE_DATE_EPOCH, else the time at which the plan was changed."""
    plan = tmp_path / "plan.toml"
    plan.write_bytes(DEMO.read_bytes())
    os.utime(plan, (1_700_000_000, 1_700_000_000))
    target = tmp_path / "x.ics"

    monkeypatch.delenv("SOURCE_DATE_EPOCH", raising=False)
    sheet.run(asked(str(target), plan=str(plan)))
    by_file = target.read_text(encoding="utf-8")
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "86400")
    sheet.run(asked(str(target), plan=str(plan)))

    assert "DTSTAMP:20231114T221320Z" in by_file
    assert "DTSTAMP:19700102T000000Z" in target.read_text(encoding="utf-8")


def test_paper_is_chosen(tmp_path):
    """A PDF is A4 by default, and Letter where that is asked for."""
    from pypdf import PdfReader

    sizes = []
    for paper in (None, "a4", "letter"):
        target = tmp_path / f"{paper}.pdf"
        sheet.run(asked(str(target), paper=paper))
        box = PdfReader(target).pages[0].mediabox
        sizes.append((round(box.width), round(box.height)))

    assert sizes == [(595, 842), (595, 842), (612, 792)]


@pytest.mark.parametrize("where", ["os.fsync", "pathlib.Path.replace"])
@pytest.mark.parametrize("what", [KeyboardInterrupt, MemoryError])
def test_nothing_is_left_half_written(where, what, tmp_path, monkeypatch):
    """Stopped on the way, the old file stands as it was and nothing lies beside it."""
    target = tmp_path / "sheet.html"
    target.write_bytes(b"old")

    def stop(*_):
        raise what

    monkeypatch.setattr(where, stop)
    with pytest.raises(what):
        save(target, b"new")

    assert target.read_bytes() == b"old"
    assert list(tmp_path.iterdir()) == [target]


def test_a_file_that_cannot_be_written_is_told(tmp_path, capsys):
    """A folder that is not there, or a name that is none, is a message and not a traceback."""
    for name in (str(tmp_path / "no" / "sheet.md"), "a\0b.md"):
        assert run(lambda name=name: sheet.run(asked(name))) == 1
        err = capsys.readouterr().err
        assert err.count("\n") == 1
        assert "cannot be" in err


def test_a_link_stays_a_link_and_rights_are_kept(tmp_path):
    """Writing over a link replaces what it points to; the rights of the file are kept."""
    real, link = tmp_path / "real.md", tmp_path / "link.md"
    real.write_bytes(b"old")
    real.chmod(0o640)
    link.symlink_to(real)
    save(link, b"new")

    assert link.is_symlink()
    assert real.read_bytes() == b"new"
    assert real.stat().st_mode & 0o777 == 0o640


def test_html_and_markdown_do_not_load_reportlab():
    """A sheet without a PDF needs no PDF library, nor tables, databases or terminals."""
    import subprocess

    script = (
        "import argparse, sys; from digestplan.cli import sheet;"
        f"asked = argparse.Namespace(plan={str(DEMO)!r}, output=None, json=True, draws=8, seed=1);"
        "sheet.run(asked);"
        "import digestplan.report.sheet.as_html, digestplan.report.sheet.as_markdown;"
        "print(sorted({n.split('.')[0] for n in sys.modules}), file=sys.stderr)"
    )
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True
    )

    for heavy in ("reportlab", "pandas", "sqlalchemy", "textual", "tomlkit", "icalendar"):
        assert f"'{heavy}'" not in done.stderr
    assert "'numpy'" in done.stderr


@pytest.mark.parametrize(("words", "width"), [([], 595), (["--paper", "letter"], 612)])
def test_the_paper_of_a_pdf_is_the_one_asked_for(words, width, tmp_path):
    """A PDF is on A4 unless the command line asks for Letter."""
    from pypdf import PdfReader

    from digestplan.cli.main import main

    target = tmp_path / "sheet.pdf"
    assert main(["sheet", str(DEMO), "-o", str(target), "--draws", "32", *words]) == 0
    assert round(float(PdfReader(target).pages[0].mediabox.width)) == width
