"""The demo's register and readings are what their makers make, and so is the document on lots."""

import json

import pytest

from digestplan.lots.assay_file import assay_of
from digestplan.lots.assay_setup import Label
from digestplan.lots.register import open_register
from digestplan.lots.register.transfer import import_from
from digestplan.quantities import Quantity
from tests import make_lots_doc
from tests.reference import make_demo_lots


@pytest.mark.parametrize("name", ["lots.jsonl", *dict(make_demo_lots.readings())])
def test_the_demo_is_what_its_maker_makes(name):
    """Each file of the demo is that which its maker writes, letter by letter."""
    kept = (make_demo_lots.DEMO / name).read_text("utf-8")

    assert kept == make_demo_lots.files()[name]


def test_the_demo_says_that_it_is_invented():
    """Every entry and every file of readings says so."""
    for line in (make_demo_lots.DEMO / "lots.jsonl").read_text("utf-8").splitlines():
        assert "invented" in json.loads(line)["note"]
    for path in make_demo_lots.DEMO.glob("*.csv"):
        assert path.read_text("utf-8").startswith("# Invented for demonstration")


def test_the_demo_is_imported_with_one_command():
    """All entries come into an empty register."""
    with open_register(":memory:") as register:
        taken = import_from(register, make_demo_lots.DEMO / "lots.jsonl")
        lots = [lot.lot for lot in register.lots()]

    assert taken.n_known == 0
    assert lots == ["CH-2109", "CH-2307", "TR-1904"]


@pytest.mark.source("S", "readings made from known activities, with a seed")
@pytest.mark.parametrize("lot", make_demo_lots.TRUTH)
def test_the_readings_give_back_what_was_put_in(lot):
    """Each assay holds the invented truth within two standard uncertainties."""
    label = Label(Quantity(280e3, activity="CDU"), {("CDU", "FALGPA_U"): 0.011})
    if lot == "TR-1904":
        label = Label(Quantity(12e6, activity="BAEE_U"))
    found = assay_of(make_demo_lots.DEMO / f"readings-{lot}.csv", label=label).fraction

    assert found.value == pytest.approx(make_demo_lots.TRUTH[lot], abs=2 * found.uncertainty)


def test_one_trace_of_the_doubtful_lot_bends_and_is_told():
    """The bending trace is found, and no other."""
    found = assay_of(make_demo_lots.DEMO / "readings-CH-2109.csv")

    bent = [t.trace.replicate for t in found.traces if t.rate.bends]
    assert bent == ["2"]
    assert any(note.startswith("sample 2: the trace bends") for note in found.notes)


def test_the_document_shows_what_the_commands_print():
    """Each block of docs/lots.md shows what its commands print today."""
    text = make_lots_doc.DOCUMENT.read_text("utf-8")

    assert "$ digestplan lot check" in text
    assert make_lots_doc.fresh(text) == text
