"""Coverage with the library's own spreads: labels, moves, openings, thaws and an assay."""

import numpy as np
import pytest

from digestplan.lots.from_library import kinetics_of, label_log_sd
from digestplan.lots.grid import AssayedFraction
from digestplan.lots.history import History, Opening, Stretch, Thaw, dimensions, log_remaining
from digestplan.lots.posterior import posterior

N_LOTS, N_DRAWS = 400, 128
DAY = 24.0


def invented(rng):
    """A lot with a life of its own, its truth drawn from the library's spreads, and an assay."""
    dry, wet = (DAY * rng.uniform(*days) for days in ((30, 900), (2, 20)))
    fridge, freezer = 277.15, 253.15
    history = History(
        (
            Stretch(0, 40, 295.15, 3.0, place="way"),
            Stretch(40, dry, fridge, 1.5, place="fridge"),
            Stretch(40 + dry, wet, rng.choice([fridge, freezer]), 1.5, "solution", place="then"),
        ),
        (Thaw(40 + dry + 1, count=int(rng.integers(1, 4))),),
        kinetics_of("clostridial-collagenase"),
        log_label_sd=label_log_sd("280 CDU/mg"),
        openings=tuple(Opening(40 + dry * x) for x in rng.random(rng.integers(1, 12))),
    )
    truth = {d: rng.standard_normal(1) for d in dimensions(history)}
    left = float(np.exp(log_remaining(history, truth, history.end)[0]))
    error = 0.05
    assay = AssayedFraction(history.end, left + error * rng.standard_normal(), error)
    return history, left, assay


def inside(n_lots, *, assayed, factor=1.0):
    """Share of lots whose truth lies in the 90 % interval that is told."""
    rng, hits = np.random.default_rng(2027), 0
    for _ in range(n_lots):
        history, left, assay = invented(rng)
        assay = AssayedFraction(assay.at, assay.fraction, assay.uncertainty * factor)
        told = posterior(history, (assay,) * assayed, history.end, n_draws=N_DRAWS).remaining
        hits += told.percentile(5) <= left <= told.percentile(95)
    return hits / n_lots


@pytest.mark.source("S", "invented lots drawn from the library's stated spreads")
def test_coverage_with_the_library_s_spreads():
    """Over 400 lots the 90 % interval after an assay holds the truth as often as it says."""
    assert 0.86 <= inside(N_LOTS, assayed=1) <= 0.94


@pytest.mark.source("S", "invented lots whose assays are worse than they say")
def test_coverage_with_assays_surer_than_they_are_fails():
    """With assays told three times as sure as they are, the same check fails clearly."""
    assert inside(100, assayed=1, factor=1 / 3) < 0.8
