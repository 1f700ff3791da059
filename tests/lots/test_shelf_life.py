"""Shelf life by the rule of ICH Q1E, and when batches may be pooled."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from digestplan.lots.shelf_life import poolability, shelf_life, shelf_life_of_batches

STATS = Path(__file__).parents[1] / "reference" / "stats"
EXPECTED = json.loads((STATS / "shelf_life.json").read_text(encoding="utf-8"))["results"]
INVENTED = "invented stability data; rule of ICH Q1E, fitted by two statistics packages"


def data(*batches):
    with (STATS / "shelf_life.csv").open(encoding="utf-8") as lines:
        rows = [r for r in csv.DictReader(lines) if r["batch"] in batches]
    names = [r["batch"] for r in rows]
    months, percent = (
        np.array([float(r[k]) for r in rows]) for k in ("months", "percent_of_label")
    )
    return names, months, percent


@pytest.mark.source("S", INVENTED)
@pytest.mark.parametrize("batch", ["A", "B", "C"])
def test_one_batch(batch):
    """The lower limit of the mean, and the mean itself, meet 90 % when they should."""
    _, months, percent = data(batch)
    expected = EXPECTED[batch]

    life = shelf_life(months, percent)

    assert life.time == pytest.approx(expected["shelf_life_months"], rel=1e-9)
    assert life.mean_time == pytest.approx(expected["mean_crosses_90_months"], rel=1e-9)
    assert life.slope == pytest.approx(expected["slope_per_month"], rel=1e-9)
    assert np.sqrt(life.covariance[1, 1]) == pytest.approx(expected["se_slope"], rel=1e-9)
    assert life.extrapolated


@pytest.mark.source("S", INVENTED)
def test_batches_pooled():
    """All three batches on one line give the pooled shelf life."""
    _, months, percent = data("A", "B", "C")

    life = shelf_life(months, percent)

    assert life.time == pytest.approx(EXPECTED["pooled"]["shelf_life_months"], rel=1e-8)


@pytest.mark.source("S", INVENTED)
def test_log_scale():
    """First order: the line in the logarithm of the percentage meets ln 0.9."""
    _, months, percent = data("A")

    life = shelf_life(months, percent, scale="log")

    assert life.time == pytest.approx(EXPECTED["A_first_order"]["shelf_life_months"], rel=1e-8)


@pytest.mark.source("S", INVENTED)
def test_poolability():
    """The slopes differ at the level of 0.25, so the batches are not pooled."""
    tests = poolability(*data("A", "B", "C"))
    expected = EXPECTED["poolability"]

    assert tests.slopes_f == pytest.approx(expected["F_slopes"], rel=1e-6)
    assert tests.slopes_p == pytest.approx(expected["p_slopes"], rel=1e-6)
    common = "intercepts_common_slope_error"
    assert tests.intercepts_f == pytest.approx(expected[f"F_{common}"], rel=1e-6)
    assert tests.intercepts_p == pytest.approx(expected[f"p_{common}"], rel=1e-6)
    assert tests.decision == "separate lines"


@pytest.mark.source("S", INVENTED)
def test_the_shortest_batch_decides():
    """Not pooled, the three batches keep as long as the shortest of them, A."""
    life = shelf_life_of_batches(*data("A", "B", "C"))

    assert life.deciding == "A"
    assert life.time == pytest.approx(33.81031302, rel=1e-9)
    assert life.batches["B"].time == pytest.approx(34.4309419, rel=1e-8)


def test_like_batches_are_pooled():
    """Two batches that differ by noise alone share one line, and none of them decides."""
    _, months, percent = data("A")
    noise = 0.05 * np.array([1, -1, 1, -1, 1, -1, 1])
    twice = np.tile(months, 2)
    y = np.concatenate([percent + noise, percent - noise])

    life = shelf_life_of_batches(["1"] * 7 + ["2"] * 7, twice, y)

    assert life.poolability.decision == "one line"
    assert life.deciding is None
    assert life.time == pytest.approx(shelf_life(twice, y).time, rel=1e-12)


def test_parallel_batches_keep_their_intercepts():
    """Batches of one slope and different starts get parallel lines with a common error."""
    _, months, percent = data("A")
    twice = np.tile(months, 2)
    y = np.concatenate([percent, percent - 3 + 0.1 * np.array([1, -1, 0, 0, 0, 1, -1])])

    life = shelf_life_of_batches(["high"] * 7 + ["low"] * 7, twice, y)

    assert life.poolability.decision == "common slope"
    assert life.deciding == "low"
    assert life.batches["high"].slope == life.batches["low"].slope
    assert life.batches["high"].degrees_of_freedom == 11


def test_limits_at_the_shelf_life_are_the_limit():
    """At the shelf life the one-sided limit of the mean is 90 % exactly."""
    _, months, percent = data("B")
    life = shelf_life(months, percent)
    at = np.array([1.0, life.time])

    lower = at @ [life.intercept, life.slope] - 2.0150483733330233 * np.sqrt(
        at @ life.covariance @ at  # t(0.95, 5 df)
    )

    assert lower == pytest.approx(90.0, abs=1e-10)


def test_a_lot_that_never_falls():
    """Where neither mean nor limit ever comes down to 90 %, the shelf life is infinite."""
    life = shelf_life([0, 6, 12, 24, 36], [100.0, 100.6, 100.9, 102.1, 103.0])

    assert life.time == np.inf
    assert life.mean_time == np.inf


def test_a_slope_that_is_not_significant_still_has_a_limit():
    """A flat but noisy line has no meeting mean, yet its lower limit comes down in the end."""
    life = shelf_life([0, 3, 6, 9, 12], [99.0, 101.0, 98.5, 101.5, 99.5])

    assert life.mean_time == np.inf
    assert 12 < life.time < 100
    assert life.extrapolated


def test_below_the_limit_from_the_start():
    """A lot that cannot be told from below the limit at the start has no shelf life."""
    life = shelf_life([0, 3, 6, 9], [90.2, 89.1, 88.2, 87.0])

    assert life.time == 0.0


def test_nothing_left_has_no_logarithm():
    """A percentage of zero is refused on the log scale."""
    with pytest.raises(ValueError, match="above zero"):
        shelf_life([0, 1, 2], [100.0, 50.0, 0.0], scale="log")
