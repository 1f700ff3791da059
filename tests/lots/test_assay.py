"""Activity from absorbance, with the uncertainty of every input, and units that are refused."""

import csv
import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from digestplan.lots.assay import (
    Definition,
    Setup,
    Trace,
    activity,
    activity_of_rates,
    label_in_unit,
)
from digestplan.lots.grid import AssayedFraction
from digestplan.lots.uncertainty import Measured, mean_of, propagate
from digestplan.problems import InputError
from digestplan.quantities.model import Quantity

STATS = Path(__file__).parents[1] / "reference" / "stats"
EXPECTED = json.loads((STATS / "assay_readings.json").read_text(encoding="utf-8"))
INVENTED = "invented readings; extinction of NADH at 340 nm, Horecker & Kornberg 1948"

NADH = Setup(
    "U",
    total_volume=Measured(1.0, 0.008),
    sample_volume=Measured(0.02, 0.0003),
    path=Measured(0.01, 0.00005),
    dilution=Measured(50.0),
    extinction=Measured(6_220.0, 60.0),
)
BAEE = Setup(
    "BAEE_U",
    total_volume=Measured(3.2),
    sample_volume=Measured(0.2),
    definition=Definition(change=0.06, volume=3.2),  # 0.001 per minute, 1 cm
)


def traces(*columns):
    with (STATS / "assay_readings.csv").open(encoding="utf-8") as lines:
        rows = list(csv.DictReader(lines))
    hours = np.array([float(r["time_min"]) for r in rows]) / 60
    return [
        Trace(
            hours, np.array([float(r[c]) for r in rows]), "blank" if c == "blank" else "sample", c
        )
        for c in columns
    ]


@pytest.mark.source("S", INVENTED)
def test_activity_and_its_uncertainty():
    """Readings, extinction, volumes and dilution give the activity and its uncertainty."""
    found = activity(traces("linear_sample", "blank"), NADH).per_volume

    assert found.value == pytest.approx(EXPECTED["activity_U_per_mL"], rel=1e-9)
    assert found.uncertainty == pytest.approx(EXPECTED["standard_uncertainty_U_per_mL"], rel=1e-6)
    assert found.value * 50 / 3 == pytest.approx(EXPECTED["nkat_per_mL"], rel=1e-9)


@pytest.mark.source("S", INVENTED)
def test_the_budget_lists_every_input():
    """The shares of the inputs sum to one; a product's relative uncertainties add in squares."""
    found = activity(traces("linear_sample", "blank"), NADH).per_volume
    lines = {line.name: line for line in found.budget}

    assert sum(line.share for line in found.budget) == pytest.approx(1.0, rel=1e-12)
    assert found.budget[0].name == "sample volume"
    relative = (0.0003 / 0.02) ** 2 / (found.uncertainty / found.value) ** 2
    assert lines["sample volume"].share == pytest.approx(relative, rel=1e-9)
    assert lines["extinction"].sensitivity == pytest.approx(-found.value / 6_220, rel=1e-9)
    assert "dilution" not in lines  # exact


@pytest.mark.source("S", INVENTED)
def test_a_bending_trace_is_not_averaged():
    """The activity of a bending trace is that of its start, with a note that it bends."""
    found = activity(traces("bending_sample", "blank"), NADH)
    straight = activity(traces("linear_sample", "blank"), NADH)

    assert found.samples[0].bends
    assert any("bends" in note for note in found.notes)
    assert found.per_volume.value == pytest.approx(straight.per_volume.value, rel=0.05)


def test_mass_and_label():
    """With concentration and label the activity per mass and the fraction follow."""
    setup = replace(
        NADH,
        enzyme_concentration=Measured(2e-3, 2e-5),  # 2 mg/mL
        label_activity=Measured(20_000.0, 400.0),  # 20 U/mg
    )
    found = activity(traces("linear_sample", "blank"), setup)
    u = math.hypot(found.per_volume.uncertainty / found.per_volume.value, 0.01, 0.02)

    assert found.per_mass.value == pytest.approx(found.per_volume.value / 2e-3, rel=1e-12)
    assert found.fraction.value == pytest.approx(found.per_mass.value / 20_000, rel=1e-12)
    assert found.fraction.uncertainty / found.fraction.value == pytest.approx(u, rel=1e-9)
    assayed = AssayedFraction.of(found.fraction, at=100.0)
    assert (assayed.fraction, assayed.uncertainty) == (
        found.fraction.value,
        found.fraction.uncertainty,
    )
    assert assayed.degrees_of_freedom == found.fraction.degrees_of_freedom


@pytest.mark.source(
    "P", "BAEE unit, trade definition: 0.001 per min at 253 nm, 3.2 mL, 1 cm (memory)"
)
def test_a_unit_defined_by_absorbance():
    """One unit in the cuvette changes the absorbance by what its definition says."""
    one_unit = Measured(0.001 * 60)

    in_definition, *_ = activity_of_rates(one_unit, None, BAEE)
    half_volume, *_ = activity_of_rates(one_unit, None, replace(BAEE, total_volume=Measured(1.6)))
    half_path, *_ = activity_of_rates(one_unit, None, replace(BAEE, path=Measured(0.005)))

    assert in_definition.value * 0.2 == pytest.approx(1.0, rel=1e-12)
    assert half_volume.value == pytest.approx(in_definition.value / 2, rel=1e-12)
    assert half_path.value == pytest.approx(in_definition.value * 2, rel=1e-12)


def test_the_blank_is_subtracted():
    """What changes without the enzyme is taken off, and a missing blank is told."""
    with_blank, *_ = activity_of_rates(Measured(5.0), Measured(1.0), NADH)
    without, *_ = activity_of_rates(Measured(5.0), None, NADH)

    assert with_blank.value == pytest.approx(0.8 * without.value, rel=1e-12)
    notes = activity(traces("linear_sample"), NADH).notes
    assert any("no blank was read" in note for note in notes)


def test_falling_absorbance():
    """Where the substrate's colour is consumed a falling trace is a positive activity."""
    up, *_ = activity_of_rates(Measured(5.0), Measured(1.0), NADH)
    down, *_ = activity_of_rates(Measured(-5.0), Measured(-1.0), replace(NADH, falling=True))

    assert down.value == pytest.approx(up.value, rel=1e-12)
    sample, blank = traces("linear_sample", "blank")
    mirrored = activity(
        [replace(sample, absorbance=1 - sample.absorbance), replace(blank, absorbance=np.ones(13))],
        NADH,
    )
    assert any("the other way" in note for note in mirrored.notes)


def test_replicates_are_no_surer_than_they_agree():
    """Replicates that scatter more than their own errors give the greater uncertainty."""
    close = mean_of([1.0, 1.001, 0.999], [0.01] * 3, [11] * 3)
    apart = mean_of([0.8, 1.0, 1.2], [0.01] * 3, [11] * 3)

    assert close.uncertainty == pytest.approx(0.01 / math.sqrt(3), rel=1e-12)
    assert close.degrees_of_freedom == pytest.approx(33, rel=1e-12)
    assert apart.uncertainty == pytest.approx(0.2 / math.sqrt(3), rel=1e-12)
    assert apart.degrees_of_freedom == 2


def test_nothing_active_is_told():
    """A sample that goes no faster than its blank is told from nothing only in words."""
    blank = traces("blank")[0]
    found = activity([blank, replace(blank, series="sample")], NADH)

    assert found.per_volume.value == pytest.approx(0.0, abs=1e-12)
    assert any("cannot be told from nothing" in note for note in found.notes)


def test_dark_readings_are_told():
    """Readings above an absorbance of 2 bring a note on stray light."""
    sample, blank = traces("linear_sample", "blank")
    found = activity([replace(sample, absorbance=sample.absorbance + 2), blank], NADH)

    assert any("stray light" in note for note in found.notes)


@pytest.mark.parametrize("unit", ["CDU", "WU", "mAnson", "furlong"])
def test_units_of_other_assays_are_refused(unit):
    """An absorbance assay never gives a unit that another assay defines."""
    with pytest.raises(InputError, match=f"cannot give {unit}") as refused:
        activity(traces("linear_sample"), replace(NADH, unit=unit))

    assert "BAEE_U" in str(refused.value)
    assert "certificate" in str(refused.value)


def test_what_a_unit_needs_is_asked_for():
    """Without extinction or definition the refusal says which is wanted; so for zero volumes."""
    with pytest.raises(InputError, match="U needs an extinction"):
        activity(traces("linear_sample"), replace(NADH, extinction=None))
    with pytest.raises(InputError, match="BAEE_U needs the change of absorbance"):
        activity(traces("linear_sample"), replace(BAEE, definition=None))
    with pytest.raises(InputError) as refused:
        activity(traces("linear_sample"), replace(NADH, path=Measured(0), dilution=Measured(-1)))
    assert [p.place for p in refused.value.problems] == ["path", "dilution"]
    with pytest.raises(InputError, match="no readings of a sample"):
        activity(traces("blank"), NADH)


def test_the_label_is_converted_by_its_certificate_alone():
    """A label in another unit needs the certificate's own factor, either way round."""
    label = Measured(280_000.0, 5_600.0)
    factor = {("CDU", "FALGPA_U"): 0.011}

    assert label_in_unit(label, "CDU", "CDU", {}) == label
    converted = label_in_unit(label, "CDU", "FALGPA_U", factor)
    assert converted.value == pytest.approx(3080.0, rel=1e-12)
    assert converted.uncertainty == pytest.approx(61.6, rel=1e-12)
    back = label_in_unit(converted, "FALGPA_U", "CDU", factor)
    assert back.value == pytest.approx(label.value, rel=1e-12)
    with pytest.raises(InputError, match="never converted"):
        label_in_unit(label, "CDU", "FALGPA_U", {})


def test_written_spreads_become_standard_uncertainties():
    """A normal spread is taken as it is, a log-normal one relative to its median."""
    assert Measured.of(Quantity(2.0, 0.1, "normal")) == Measured(2.0, 0.1)
    assert Measured.of(Quantity(2.0)) == Measured(2.0, 0.0)
    written = Measured.of(Quantity(2.0, 1.05, "lognormal"))
    assert written.uncertainty == pytest.approx(2 * math.log(1.05))


@pytest.mark.source("P", "JCGM 100:2008, H.1: end-gauge, Welch-Satterthwaite, 16 (from memory)")
def test_effective_degrees_of_freedom():
    """The guide's worked example: components of 25, 9.7, 2.9 and 16.6 nm give 16 of 32 nm."""
    parts = {
        "standard": Measured(0.0, 25.0, 18),
        "difference": Measured(0.0, 9.7, 25.6),
        "expansion": Measured(0.0, 2.9, 50),
        "temperature": Measured(0.0, 16.6, 2),
    }
    found = propagate(lambda v: sum(v.values()), parts)

    assert found.uncertainty == pytest.approx(32, abs=0.5)
    assert int(found.degrees_of_freedom) == 16


def test_an_exact_result_has_no_budget():
    """Exact inputs give an exact result, with infinite degrees of freedom and no lines."""
    found = propagate(lambda v: v["a"] * 2, {"a": Measured(3.0)})

    assert (found.value, found.uncertainty, found.budget) == (6.0, 0.0, ())
    assert found.degrees_of_freedom == math.inf
