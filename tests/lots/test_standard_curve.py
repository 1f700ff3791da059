"""Standard curves read backwards, and end-point activities."""

import numpy as np
import pytest
from scipy.optimize import brentq

from digestplan.kinetics.linear import student_quantile
from digestplan.lots.standard_curve import (
    AmountDefinition,
    end_point_activity,
    fit_standard_curve,
    inverse_prediction,
)
from digestplan.lots.uncertainty import Measured
from digestplan.problems import InputError

AMOUNTS = np.repeat([0.0, 0.1, 0.2, 0.4, 0.6, 0.8], 2)
SIGNALS = 0.05 + 1.5 * AMOUNTS + 0.01 * np.resize([1, -1, 0.4, -0.7, 0.2], 12)


def test_the_amount_is_the_line_read_backwards():
    """The amount behind a signal is where the line meets it."""
    curve = fit_standard_curve(AMOUNTS, SIGNALS)
    read = inverse_prediction(curve, [0.65])

    assert curve.line["intercept"] + curve.line["slope"] * read.amount == pytest.approx(0.65)
    assert read.lower < read.amount < read.upper
    assert not read.outside
    assert not curve.bends


@pytest.mark.source("C", "root-finding on the condition that defines Fieller's limits")
@pytest.mark.parametrize("weights", [None, 1 / (0.02 + AMOUNTS) ** 2])
def test_fiellers_limits(weights):
    """At the limits the signal lies exactly t standard errors from the line."""
    curve = fit_standard_curve(AMOUNTS, SIGNALS, weights)
    line, y = curve.line, 0.65
    t = student_quantile(0.975, line.degrees_of_freedom)

    def beyond(x):
        at = np.array([1.0, x])
        spread = np.sqrt(line.residual_sd**2 / 2.0 + at @ line.covariance @ at)
        return abs(y - at @ line.estimates) - t * spread

    read = inverse_prediction(curve, [y], weight=2.0)

    assert read.lower == pytest.approx(brentq(beyond, -1, read.amount), rel=1e-9)
    assert read.upper == pytest.approx(brentq(beyond, read.amount, 2), rel=1e-9)


@pytest.mark.source("S", "2,000 invented standard curves and unknowns")
def test_limits_hold_the_truth():
    """Over many invented curves the 95 % limits hold the true amount in 94 to 96 %."""
    rng = np.random.default_rng(12)
    inside = 0
    for _ in range(2000):
        truth = rng.uniform(0.05, 0.75)
        curve = fit_standard_curve(AMOUNTS, 0.05 + 1.5 * AMOUNTS + 0.03 * rng.standard_normal(12))
        read = inverse_prediction(curve, 0.05 + 1.5 * truth + 0.03 * rng.standard_normal(2))
        inside += read.lower <= truth <= read.upper
    assert 0.94 <= inside / 2000 <= 0.96


def test_repeats_narrow_the_limits():
    """A signal measured four times is surer than once, and its scatter is pooled."""
    curve = fit_standard_curve(AMOUNTS, SIGNALS)
    once = inverse_prediction(curve, [0.65])
    often = inverse_prediction(curve, [0.64, 0.66, 0.645, 0.655])
    wild = inverse_prediction(curve, [0.35, 0.95, 0.5, 0.8])

    assert often.upper - often.lower < 0.8 * (once.upper - once.lower)
    assert often.degrees_of_freedom == 13
    assert wild.standard_error > 5 * often.standard_error


def test_weights_favour_the_sure_standards():
    """A doubtful standard of little weight moves the line less than one of full weight."""
    spoiled = SIGNALS.copy()
    spoiled[-1] += 0.3
    weights = np.ones(12)
    weights[-1] = 1e-3

    clean = inverse_prediction(fit_standard_curve(AMOUNTS, SIGNALS), [0.65]).amount
    plain = inverse_prediction(fit_standard_curve(AMOUNTS, spoiled), [0.65]).amount
    weighted = inverse_prediction(fit_standard_curve(AMOUNTS, spoiled, weights), [0.65]).amount

    assert abs(weighted - clean) < 0.2 * abs(plain - clean)


def test_outside_the_standards_is_told():
    """An amount beyond the highest standard is flagged."""
    curve = fit_standard_curve(AMOUNTS, SIGNALS)

    assert inverse_prediction(curve, [2.0]).outside


def test_a_bending_curve_is_told():
    """Standards that level off are flagged; the straight ones are not."""
    bent = fit_standard_curve(AMOUNTS, SIGNALS - 0.8 * AMOUNTS**2)

    assert bent.bends
    assert not fit_standard_curve(AMOUNTS, 0.05 + 1.5 * AMOUNTS).bends


def test_a_flat_curve_cannot_be_read():
    """Where the slope cannot be told from nothing there is no amount, not an endless interval."""
    curve = fit_standard_curve([0, 1, 2, 3], [0.11, 0.09, 0.12, 0.10])

    with pytest.raises(InputError, match="no amount can be read"):
        inverse_prediction(curve, [0.1])


def test_too_few_standards_are_refused():
    """Two standards, or many at one amount, make no curve."""
    for amounts in ([0.0, 1.0], [1.0, 1.0, 1.0]):
        with pytest.raises(InputError, match="three standards or more"):
            fit_standard_curve(amounts, [0.1] * len(amounts))


@pytest.mark.source("P", "collagen digestion unit, trade definition: 1.0 µmol in 5 h (memory)")
def test_units_from_an_end_point():
    """One unit makes what its definition says in its time; less in less time."""
    cdu = AmountDefinition(amount=1.0e-6, hours=5.0)
    given = dict(blank=Measured(0.2e-6), sample_volume=Measured(0.1), definition=cdu)

    whole = end_point_activity(Measured(1.2e-6), hours=Measured(5.0), **given)
    shorter = end_point_activity(Measured(0.4e-6), hours=Measured(1.0), **given)
    diluted = end_point_activity(
        Measured(1.2e-6), hours=Measured(5.0), dilution=Measured(20.0), **given
    )

    assert whole.value == pytest.approx(10.0, rel=1e-12)  # 1 CDU in 0.1 mL
    assert shorter.value == pytest.approx(10.0, rel=1e-12)
    assert diluted.value == pytest.approx(200.0, rel=1e-12)


def test_end_points_carry_the_curves_uncertainty():
    """The standard error of the amount read from the curve reaches the activity's budget."""
    curve = fit_standard_curve(AMOUNTS * 1e-6, SIGNALS)
    sample, blank = (inverse_prediction(curve, [y]).measured() for y in (0.95, 0.08))
    found = end_point_activity(
        sample, blank, Measured(5.0, 0.05), Measured(0.1, 0.001), AmountDefinition(1e-6, 5.0)
    )
    names = [line.name for line in found.budget]

    assert set(names) == {"amount", "blank", "hours", "sample volume"}
    relative = sample.uncertainty / (sample.value - blank.value)
    share = (relative * found.value / found.uncertainty) ** 2
    assert found.budget[names.index("amount")].share == pytest.approx(share, rel=1e-9)
    with pytest.raises(InputError, match="above zero"):
        end_point_activity(sample, blank, Measured(0.0), Measured(0.1), AmountDefinition(1e-6, 5.0))
