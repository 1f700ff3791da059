"""From a file with its setup beside it to an activity."""

import math

import numpy as np
import pytest

from digestplan.lots.assay_file import READING_SD, assay_of
from digestplan.lots.assay_record import written_result
from digestplan.lots.assay_setup import Label, checked_setup, setup_beside
from digestplan.problems import InputError
from digestplan.quantities import Quantity

TRACE = """# Invented readings.
# assay: nadh
# total volume: 1 mL
# sample volume: 20 uL
# dilution: 50
# concentration: 2 mg/mL
time [min],reading,series
0,0.100,sample
1,0.200,sample
2,0.300,sample
3,0.400,sample
4,0.500,sample
"""
COLLAGEN = """# assay: ninhydrin
# time: 5 h
# sample volume: 0.1 mL
# dilution: 10
# concentration: 1 mg/mL
series,amount [µmol],signal
standard,0,0.00
standard,0.5,0.25
standard,1.0,0.50
standard,2.0,1.00
sample,,0.75
sample,,0.75
blank,,0.05
"""
PEPSIN = """# assay: haemoglobin-280
# time: 10 min
# total volume: 8 mL
# sample volume: 0.5 mL
# concentration: 0.01 mg/mL
series,signal
sample,0.30
sample,0.32
blank,0.06
"""


def written(tmp_path, text, name="readings.csv"):
    path = tmp_path / name
    path.write_text(text, encoding="utf-8")
    return path


def test_the_setup_stands_above_the_table(tmp_path):
    """A file with its setup needs nothing else: ΔA / (ε l) · V/v · dilution, in U."""
    found = assay_of(written(tmp_path, TRACE))

    expected = 0.1 / 6.22 * (1 / 0.02) * 50  # µmol per minute and mL of stock
    assert found.setup.unit == "U"
    assert found.per_volume.value == pytest.approx(expected, rel=1e-9)
    assert found.per_mass.value == pytest.approx(expected / 2e-3, rel=1e-9)
    assert found.fraction is None


def test_what_is_said_elsewhere_goes_first(tmp_path):
    """A direction, an extinction or a volume given by hand replaces that of the file."""
    path = written(tmp_path, TRACE)
    found = assay_of(path, {"extinction": "3.11 1/(mM cm)", "direction": "falling"})

    assert found.per_volume.value == pytest.approx(-2 * assay_of(path).per_volume.value, rel=1e-9)
    assert any("other way" in note for note in found.notes)


def test_without_an_assay_there_are_rates(tmp_path):
    """A bare table gives rates of absorbance and says what they are not."""
    bare = "\n".join(line for line in TRACE.splitlines() if not line.startswith("#")) + "\n"
    found = assay_of(written(tmp_path, bare))

    assert found.per_volume is None
    assert found.traces[0].rate.rate == pytest.approx(6.0)
    assert "not activities" in found.notes[-1]


@pytest.mark.source("P", "Worthington Enzyme Manual, collagenase assay: 1 µmol leucine in 5 h")
def test_collagen_digestion_units_from_end_points(tmp_path):
    """1.5 µmol less 0.1 in 5 h by 0.1 mL of a tenfold dilution: 140 units a mL."""
    found = assay_of(written(tmp_path, COLLAGEN))

    assert found.amount.amount == pytest.approx(1.5e-6)
    assert found.per_volume.value == pytest.approx((1.5 - 0.1) / 0.1 * 10, rel=1e-9)
    assert found.per_mass.value == pytest.approx(140e3, rel=1e-9)


def test_units_are_in_proportion_to_the_time(tmp_path):
    """The same colour after half the time is twice the activity."""
    path = written(tmp_path, COLLAGEN)
    ratio = assay_of(path, {"time": "2.5 h"}).per_volume.value / assay_of(path).per_volume.value

    assert ratio == pytest.approx(2)


@pytest.mark.source("P", "Worthington Enzyme Manual, pepsin assay: units from A280, 10 min")
def test_pepsin_units_from_absorbances(tmp_path):
    """Units per mg are ΔA · 1000 / (10 min · mg of enzyme in the mixture), as the manual has it."""
    found = assay_of(written(tmp_path, PEPSIN))

    milligrams = 0.5 * 0.01
    assert found.per_mass.value / 1e3 == pytest.approx((0.31 - 0.06) * 1000 / (10 * milligrams))
    scatter = 0.01 / 0.25  # of two samples, half a range of 0.02
    blank = READING_SD / 0.25
    relative = found.per_mass.uncertainty / found.per_mass.value
    assert relative == pytest.approx(math.hypot(scatter, blank), rel=1e-6)


@pytest.mark.parametrize("line", ["# sample volumne: 20 uL", "# dilutions: 50", "# extintion: 1"])
def test_a_slip_in_a_comment_is_told(tmp_path, line):
    """A comment that is nearly a key is not passed over in silence."""
    path = written(tmp_path, f"{line}\n{TRACE}")

    with pytest.raises(InputError, match="meant") as refused:
        assay_of(path)
    assert refused.value.problems[0].line == 1
    assert refused.value.problems[0].file == str(path)


def test_other_comments_are_comments(tmp_path):
    """Whatever else stands there says nothing of the setup."""
    path = written(tmp_path, "# read by: ada\n# lamp: old\n#\n# a line\n" + TRACE)

    assert set(setup_beside(path)) == {
        *("assay", "total volume", "sample volume", "dilution", "concentration")
    }


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (("# assay: nadh", "# assay: naad"), 'no assay "naad"'),
        (("# assay: nadh", "# assay: ninhydrin"), "end-points"),
        (("# assay: nadh", "# unit: CDU"), "cannot give CDU"),
        (("# assay: nadh", "# unit: U"), "needs an extinction"),
        (("# assay: nadh", "# unit: furlong"), "no unit of activity"),
        (("# assay: nadh", "# assay: nadh\n# unit: CDU"), "gives U, not CDU"),
        (("# total volume: 1 mL\n", ""), "total volume: this is missing"),
        (("# total volume: 1 mL", "# total volume: 1 mg"), "is a mass"),
        (("# dilution: 50", "# dilution: 50\n# dilution: 10"), "said twice"),
        (("# assay: nadh", "# assay: nadh\n# direction: down"), "rising or falling"),
        (("# assay: nadh", "# assay: nadh\n# conversion: 1 CDU = 2 mg"), "activity"),
        (("# assay: nadh", "# assay: nadh\n# label: 5 CDU/mg"), "never converted"),
    ],
)
def test_a_setup_that_cannot_be_is_refused(tmp_path, change, message):
    """Every mistake names the file, and what is wanted."""
    path = written(tmp_path, TRACE.replace(*change))

    with pytest.raises(InputError, match=message) as refused:
        assay_of(path)
    assert all(p.file == str(path) for p in refused.value.problems)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (COLLAGEN.replace("# assay: ninhydrin\n", ""), "assay that counts amounts: ninhydrin"),
        (COLLAGEN.replace("# time: 5 h\n", ""), "time: this is missing"),
        (COLLAGEN.replace("sample,,0.75\n", ""), "no signals of a sample"),
        (PEPSIN.replace("# time: 10 min\n", ""), "how long it ran is missing"),
        (PEPSIN.replace("haemoglobin-280", "ninhydrin"), "standard curve needs three"),
    ],
)
def test_end_points_that_say_too_little(tmp_path, text, message):
    """What an end-point assay needs is asked for."""
    with pytest.raises(InputError, match=message):
        assay_of(written(tmp_path, text))


def test_doubts_about_end_points_are_told(tmp_path):
    """A sample outside the standards, a missing blank and a bent curve are notes."""
    far = COLLAGEN.replace("sample,,0.75", "sample,,1.4").replace("blank,,0.05\n", "")
    bent = COLLAGEN.replace("standard,2.0,1.00", "standard,2.0,0.80\nstandard,3.0,0.95")

    notes = " ".join(assay_of(written(tmp_path, far)).notes)
    assert "outside the standards" in notes
    assert "no blank was read" in notes
    assert "bends" in " ".join(assay_of(written(tmp_path, bent, "b.csv")).notes)


def test_exact_volumes_are_noted(tmp_path):
    """Volumes written without a spread are taken as exact, and that is said."""
    notes = " ".join(assay_of(written(tmp_path, TRACE)).notes)

    assert "taken as exact: total volume, sample volume, dilution, concentration" in notes


def test_a_fraction_of_a_lot_s_label(tmp_path):
    """With a lot's label and its certificate the fraction follows, ready for the register."""
    text = TRACE.replace("0.300", "0.301")  # some scatter, so that there is an uncertainty
    label = Label(Quantity(280e3, activity="CDU"), {("CDU", "U"): 0.15})
    path = written(tmp_path, text)
    found = assay_of(path, label=label)
    entry = written_result(found, path, "by hand")

    assert found.fraction.value == pytest.approx(found.per_mass.value / (280e3 * 0.15), rel=1e-12)
    assert entry["fraction"] == found.fraction.value
    assert entry["standard_error"] == found.fraction.uncertainty
    assert np.isfinite(entry["degrees_of_freedom"])
    assert entry["note"].startswith("by hand; readings: readings.csv")
    assert entry["activity"].endswith("U/mg")


@pytest.mark.parametrize(
    ("change", "missing"),
    [
        (("# concentration: 2 mg/mL\n", ""), "the concentration of the stock is missing"),
        (("# assay: nadh\n", ""), "an assay or a unit"),
    ],
)
def test_what_gives_no_fraction_is_not_entered(tmp_path, change, missing):
    """Readings that lead to no fraction of the label say what is missing."""
    path = written(tmp_path, TRACE.replace(*change))
    label = Label(Quantity(280e3, activity="U"))

    with pytest.raises(InputError, match=missing):
        written_result(assay_of(path, label=label), path, None)


def test_a_setup_s_label_is_taken_with_its_own_spread():
    """A label written beside the readings keeps its spread; conversions join it."""
    setup = checked_setup(
        {"assay": "nadh", "label": "280 ± 14 CDU/mg", "conversion": "1 CDU = 2 U"}
    )
    label = setup.label_activity()

    assert (label.value, label.uncertainty) == (pytest.approx(560e3), pytest.approx(28e3))
