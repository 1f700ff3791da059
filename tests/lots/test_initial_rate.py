"""Initial rates: straight traces, bending ones, lags, and what is refused."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from digestplan.kinetics.linear import fit_line
from digestplan.lots.initial_rate import initial_rate
from digestplan.problems import InputError

STATS = Path(__file__).parents[1] / "reference" / "stats"
EXPECTED = json.loads((STATS / "assay_readings.json").read_text(encoding="utf-8"))
INVENTED = "invented absorbance readings, fitted by a statistics package"
MINUTES = np.linspace(0, 6, 13)
NOISE = 0.0017


def readings(column):
    with (STATS / "assay_readings.csv").open(encoding="utf-8") as lines:
        rows = list(csv.DictReader(lines))
    return [np.array([float(r[k]) for r in rows]) for k in ("time_min", column)]


@pytest.mark.source("S", INVENTED)
@pytest.mark.parametrize("column", ["blank", "linear_sample"])
def test_straight_traces(column):
    """A straight trace has the slope and the standard error of the line through all readings."""
    minutes, absorbance = readings(column)
    expected = EXPECTED[f"{column}_ols"]

    found = initial_rate(minutes / 60, absorbance)

    assert found.rate / 60 == pytest.approx(expected["slope_per_min"], rel=1e-9)
    assert found.standard_error / 60 == pytest.approx(expected["se_slope"], rel=1e-9)
    assert (found.shape, found.bends, found.n_readings) == ("straight", False, 13)
    assert found.notes == ()


@pytest.mark.source("S", INVENTED)
def test_a_bending_trace_is_told_and_not_averaged():
    """The bending trace is flagged, and its rate is the true initial one, not half of it."""
    minutes, absorbance = readings("bending_sample")
    expected = EXPECTED["bending_sample"]

    found = initial_rate(minutes / 60, absorbance)

    assert found.bends
    assert found.bend_t == pytest.approx(expected["t_of_quadratic_term"], rel=1e-9)
    truth, all_points = expected["true_initial_slope"], expected["all_points_ols"]["slope_per_min"]
    assert abs(found.rate / 60 - truth) < 2 * found.standard_error / 60
    assert abs(found.rate / 60 - truth) < 0.02 * truth
    assert abs(found.rate / 60 - all_points) > 20 * found.standard_error / 60
    assert "bends from its first reading" in found.notes[0]


def first_order(rng, k, n=13):
    """A trace that starts at 0.08 per minute and approaches a plateau."""
    t = np.linspace(0, 6, n)
    return t, 0.1 + 0.08 * -np.expm1(-k * t) / k + NOISE * rng.standard_normal(n)


@pytest.mark.source("S", "240 invented traces that bend by substrate used up")
def test_the_stated_error_of_bending_traces_holds():
    """Over many bending traces the truth lies within two standard errors as often as it should."""
    rng = np.random.default_rng(8)
    inside, naive = [], []
    for k in np.resize([0.05, 0.1, 0.25], 240):
        t, y = first_order(rng, k)
        found = initial_rate(t, y)
        inside.append(abs(found.rate - 0.08) < 2 * found.standard_error)
        line = fit_line(t, y)
        naive.append(abs(line["slope"] - 0.08) < 2 * line.standard_error("slope"))

    assert np.mean(inside) > 0.85
    assert np.mean(naive) < 0.1  # what a line over all readings would have claimed


def test_a_straight_beginning_is_found():
    """Where the trace breaks off at four minutes, the straight stretch ends there."""
    rng = np.random.default_rng(1)
    y = 0.1 + 0.08 * np.minimum(MINUTES, 4.0) + NOISE * rng.standard_normal(13)

    found = initial_rate(MINUTES, y)

    assert found.shape == "straight, then bent"
    assert found.to_hours == pytest.approx(4.0, abs=0.5)
    assert found.rate == pytest.approx(0.08, abs=2 * found.standard_error)
    assert found.n_readings in (8, 9, 10)


def test_how_far_a_curve_is_straight():
    """A first-order approach stays within 5 % of its tangent until kt is about 0.1."""
    t = np.linspace(0, 6, 61)

    found = initial_rate(t, 0.1 + 0.08 * -np.expm1(-0.25 * t) / 0.25)

    assert found.shape == "bent"
    assert found.to_hours == pytest.approx(0.1035 / 0.25, abs=0.04)
    assert found.rate == pytest.approx(0.08, rel=1e-5)


def test_a_lag_is_left_out():
    """A trace that starts slowly gives the rate of the straight stretch after the lag."""
    rng = np.random.default_rng(2)
    t = np.linspace(0, 10, 41)
    y = 0.1 + 0.08 * (t + np.expm1(-t / 0.8) * 0.8) + NOISE * rng.standard_normal(41)

    found = initial_rate(t, y)

    assert found.shape == "straight after a lag"
    assert found.bends
    assert 0.5 < found.from_hours < 5
    assert found.rate == pytest.approx(0.08, abs=0.0015)
    assert "starts slowly" in found.notes[0]


def test_falling_traces_are_the_mirror_image():
    """An absorbance that falls has the same rates with the sign turned."""
    rng = np.random.default_rng(3)
    for k in (1e-6, 0.25):
        t, y = first_order(rng, k)
        up, down = initial_rate(t, y), initial_rate(t, -y)

        assert down.rate == pytest.approx(-up.rate, rel=1e-9)
        assert down.standard_error == pytest.approx(up.standard_error, rel=1e-6)
        assert down.shape == up.shape


def test_the_order_of_the_readings_does_not_matter():
    """Readings that were written down out of order give the same rate."""
    rng = np.random.default_rng(4)
    t, y = first_order(rng, 0.2)
    shuffled = rng.permutation(13)

    assert initial_rate(t[shuffled], y[shuffled]).rate == initial_rate(t, y).rate


def test_exact_readings():
    """Without noise a line is a line, and rounding is no bend."""
    found = initial_rate(MINUTES, 0.1 + 0.08 * MINUTES)

    assert (found.shape, found.bends) == ("straight", False)
    assert found.rate == pytest.approx(0.08, rel=1e-12)


def test_few_readings_are_told():
    """With three or four readings a bend cannot be seen, and the result says so."""
    found = initial_rate([0, 1, 2, 3], [0.1, 0.19, 0.27, 0.33])

    assert np.isnan(found.bend_t)
    assert "too few to see whether" in found.notes[0]


@pytest.mark.parametrize(
    ("hours", "absorbance", "message"),
    [
        ([0.0, 1.0], [0.1, 0.2], "at least three readings"),
        ([0.0, 1.0, 1.0, 1.0], [0.1, 0.2, 0.2, 0.2], "at least three readings"),
        ([0, 1, 2, 3, 4], [0.0, 1.0, 1.5, 1.75, 1.875], "no initial rate can be read"),
    ],
)
def test_traces_without_a_rate_are_refused(hours, absorbance, message):
    """Too few readings, or five that bend throughout, give no rate but a reason."""
    with pytest.raises(InputError, match=message) as refused:
        initial_rate(hours, absorbance, name="sample 2")

    assert refused.value.problems[0].place == "sample 2"
