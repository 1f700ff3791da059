"""History and assays together: against brute force, closed forms, and lots with a known truth."""

import math
from dataclasses import replace
from datetime import UTC, date, datetime

import numpy as np
import pytest
from scipy.special import ndtr

from digestplan.lots.grid import AssayedFraction
from digestplan.lots.history import (
    LABEL,
    History,
    Stretch,
    Thaw,
    dimensions,
    log_remaining,
)
from digestplan.lots.posterior import posterior
from digestplan.lots.storage import StorageKinetics

YEAR = 8766.0
NOW = YEAR + 48

SOLUTION = StorageKinetics(
    log_rate=math.log(3e-4),
    log_rate_sd=math.log(2),
    energy=100e3,
    energy_sd=20e3,
    reference_temperature=298.15,
    log_thaw_loss=math.log(0.05),
    log_thaw_loss_sd=math.log(1.6),
)
TWO_PLACES = History(
    (
        Stretch(0, 48, 295.15, form="solution", place="transport"),
        Stretch(48, YEAR, 277.15, form="solution", place="fridge"),
    ),
    kinetics={"solution": SOLUTION},
)
LABELLED = replace(
    TWO_PLACES, kinetics={"solution": replace(SOLUTION, energy_sd=0.0)}, log_label_sd=0.06
)
THAWED = replace(
    TWO_PLACES,
    kinetics={"solution": replace(SOLUTION, energy_sd=0.0)},
    thaws=(Thaw(100, count=2), Thaw(6000)),
)
NO_ASSAY = ()
NOW_ASSAYED = (AssayedFraction(NOW, 0.7, 0.04),)
ONCE_ASSAYED = (AssayedFraction(0.4 * NOW, 0.9, 0.03),)
TWICE_ASSAYED = (AssayedFraction(0.3 * NOW, 0.95, 0.05, 4.0), AssayedFraction(0.9 * NOW, 0.8, 0.05))


class BruteForce:
    """The same posterior on a dense grid over two uncertain values, without any cleverness."""

    def __init__(self, history, assays, n=(4001, 901)):
        first, second = dimensions(history)
        z = np.meshgrid(*(np.linspace(-7, 7, k) for k in n), indexing="ij")
        self.history, self.z = history, {first: z[0].ravel(), second: z[1].ravel()}
        self.n = z[0].size
        self.weights = np.exp(-(z[0] ** 2 + z[1] ** 2) / 2).ravel()
        for assay in assays:
            self.weights = self.weights * np.exp(assay.log_likelihood(self.log_left(assay.at)))
        self.weights /= self.weights.sum()

    def log_left(self, time):
        return log_remaining(self.history, self.z, time, self.n)

    def chance_below(self, fractions, time):
        log_left = self.log_left(time)
        soft = 5e-4  # a step as wide as the grid is fine
        return [float(self.weights @ ndtr((np.log(f) - log_left) / soft)) for f in fractions]


@pytest.mark.source("C", "dense two-dimensional integration of the same history")
@pytest.mark.parametrize("history", [TWO_PLACES, LABELLED, THAWED], ids=["two", "label", "thaw"])
@pytest.mark.parametrize(
    "assays", [NO_ASSAY, NOW_ASSAYED, ONCE_ASSAYED, TWICE_ASSAYED], ids=["none", "now", "once", "2"]
)
def test_posterior_by_brute_force(history, assays):
    """Percentiles of history and assays together are those of a dense integration, to 1e-4."""
    result = posterior(history, assays, NOW)
    brute = BruteForce(history, assays)
    percents = [5, 50, 95]

    found = brute.chance_below([result.remaining.percentile(p) for p in percents], NOW)

    assert result.exact
    np.testing.assert_allclose(found, np.array(percents) / 100, atol=1e-4)


@pytest.mark.source("C", "dense two-dimensional integration of the same history")
def test_later_by_brute_force():
    """The chance that enough is left after another year in the fridge is that of brute force."""
    kept = TWO_PLACES.and_then(Stretch(NOW, YEAR, 277.15, form="solution", place="fridge"))
    result = posterior(TWO_PLACES, NOW_ASSAYED, NOW)
    brute = BruteForce(kept, NOW_ASSAYED)

    for needed in (0.3, 0.5, 0.6):
        (below,) = brute.chance_below([needed], NOW + YEAR)
        assert result.chance_enough(needed, NOW + YEAR) == pytest.approx(1 - below, abs=2e-4)


def test_an_assay_alone_is_its_own_distribution():
    """Without a history, an assay made now gives its normal distribution."""
    alone = posterior(TWO_PLACES, NOW_ASSAYED, NOW).from_assays

    half = 1.6448536269514722 * 0.04
    found = [alone.percentile(p) for p in (5, 50, 95)]
    np.testing.assert_allclose(found, [0.7 - half, 0.7, 0.7 + half], atol=1e-4)


@pytest.mark.source("C", "dense integration of the assay and of what was lost since")
def test_an_assay_alone_is_carried_on_to_now():
    """An assay made earlier is lowered, and widened, by what the storage since may have taken."""
    history = replace(
        TWO_PLACES, kinetics={"solution": replace(SOLUTION, energy_sd=0.0)}, log_label_sd=0.05
    )
    assay = AssayedFraction(0.4 * NOW, 0.9, 0.03)
    alone = posterior(history, (assay,), NOW).from_assays
    z, then = np.meshgrid(np.linspace(-7, 7, 2001), np.linspace(0.6, 1.2, 3001), indexing="ij")
    rate = {("rate", "solution"): z.ravel()}
    since = log_remaining(history, rate, NOW, z.size) - log_remaining(
        history, rate, assay.at, z.size
    )
    weights = np.exp(-(z**2) / 2 - ((then - 0.9) / 0.03) ** 2 / 2).ravel()
    left = then.ravel() * np.exp(since)

    for p in (5, 50, 95):
        below = weights[left <= alone.percentile(p)].sum() / weights.sum()
        assert below == pytest.approx(p / 100, abs=1e-4)


@pytest.mark.source("C", "closed form: product of normal densities")
def test_all_normal_case():
    """With normal logarithms throughout, the posterior is the precision-weighted one."""
    history = History((), log_label=math.log(0.9), log_label_sd=0.1)
    assays = (
        AssayedFraction(0.0, 0.8, 0.8 * 0.05, scale="log"),
        AssayedFraction(0.0, 0.75, 0.75 * 0.08, scale="log"),
    )
    precision = np.array([0.1, 0.05, 0.08]) ** -2.0
    mean = precision @ np.log([0.9, 0.8, 0.75]) / precision.sum()
    z = np.array([-1.6448536269514722, 0.0, 1.6448536269514722])

    result = posterior(history, assays, 0.0)

    found = [result.remaining.percentile(p) for p in (5, 50, 95)]
    np.testing.assert_allclose(found, np.exp(mean + z / np.sqrt(precision.sum())), rtol=1e-4)
    np.testing.assert_allclose(result.history_share, precision[0] / precision.sum(), rtol=2e-3)
    assert result.history_share + result.assay_share == pytest.approx(1.0)


@pytest.mark.source("C", "two million random draws of the same history")
def test_many_uncertain_values_by_draws():
    """With too many uncertain values for a product rule, even draws come as near as 1e-3."""
    history = replace(
        TWO_PLACES,
        stretches=tuple(replace(s, temperature_sd=1.5) for s in TWO_PLACES.stretches),
        thaws=(Thaw(100, count=2),),
        log_label_sd=0.05,
    )
    assays = (AssayedFraction(0.4 * NOW, 0.85, 0.05),)
    result = posterior(history, assays, NOW)
    rng, n = np.random.default_rng(11), 500_000
    z = {d: rng.standard_normal(n) for d in dimensions(history)}
    left = np.exp(log_remaining(history, z, NOW, n))
    weights = np.exp(assays[0].log_likelihood(log_remaining(history, z, assays[0].at, n)))

    assert not result.exact
    for p in (5, 50, 95):
        below = weights[left <= result.remaining.percentile(p)].sum() / weights.sum()
        assert below == pytest.approx(p / 100, abs=3e-3)  # the random draws are good to 1e-3


def invented_lot(rng, history):
    """A lot with a truth drawn from the stated spreads, and an assay of it."""
    months = rng.uniform(3, 36)
    stretches = (
        replace(history.stretches[0], hours=rng.uniform(5, 100)),
        replace(history.stretches[1], start=100.0, hours=months * 730),
    )
    own = replace(history, stretches=stretches)
    truth = {d: rng.standard_normal(1) for d in dimensions(own)}
    left = float(np.exp(log_remaining(own, truth, own.end)[0]))
    return own, left, AssayedFraction(own.end, left + 0.05 * rng.standard_normal(), 0.05)


def narrowed(history, factor):
    of = history.kinetics["solution"]
    of = replace(of, log_rate_sd=of.log_rate_sd * factor, energy_sd=of.energy_sd * factor)
    return replace(history, kinetics={"solution": of})


def coverage(n_lots, factor):
    rng = np.random.default_rng(2026)
    inside = 0
    for _ in range(n_lots):
        history, left, assay = invented_lot(rng, TWO_PLACES)
        assay = replace(assay, uncertainty=assay.uncertainty * factor)
        told = posterior(narrowed(history, factor), (assay,), history.end).remaining
        inside += told.percentile(5) <= left <= told.percentile(95)
    return inside / n_lots


@pytest.mark.source("S", "400 invented lots drawn from the stated spreads")
def test_coverage():
    """Over 400 invented lots the 90 % interval holds the truth as often as it says."""
    assert 0.86 <= coverage(400, factor=1.0) <= 0.94


@pytest.mark.source("S", "invented lots drawn from twice the stated spreads")
def test_coverage_with_halved_spreads_fails():
    """With spreads stated half as wide as they are, the same check fails clearly."""
    assert coverage(100, factor=0.5) < 0.8


def test_a_contradiction_is_told():
    """An assay far below what the history allows is flagged; one that fits is not."""
    fits = posterior(TWO_PLACES, NOW_ASSAYED, NOW)
    clashes = posterior(TWO_PLACES, (AssayedFraction(NOW, 1.3, 0.02),), NOW)

    assert fits.surprise[0] > 0.05
    assert not fits.contradicted
    assert clashes.surprise[0] < 1e-3
    assert clashes.contradicted


@pytest.mark.source("C", "closed form: the predictive distribution of two normals")
def test_surprise_is_the_predictive_tail():
    """The surprise of an assay is its two-sided tail under history and earlier assays."""
    history = History((), log_label_sd=0.1)
    first = AssayedFraction(0.0, 0.95, 0.095, scale="log")
    second = AssayedFraction(0.0, 0.75, 0.075, scale="log")

    result = posterior(history, (first, second), 0.0)

    z_first = abs(math.log(0.95)) / math.hypot(0.1, 0.1)
    middle, spread = math.log(0.95) / 2, math.hypot(0.1 / math.sqrt(2), 0.1)
    z_second = abs(math.log(0.75) - middle) / spread
    expected = [math.erfc(z / math.sqrt(2)) for z in (z_first, z_second)]
    np.testing.assert_allclose(result.surprise, expected, rtol=2e-3)


def test_surprise_is_rarely_small_when_the_history_is_right():
    """When histories are right, one lot in a hundred contradicts, not one in ten."""
    rng = np.random.default_rng(5)
    surprises = []
    for _ in range(60):
        history, _, assay = invented_lot(rng, TWO_PLACES)
        surprises += posterior(history, (assay,), history.end).surprise

    assert np.mean(np.array(surprises) < 0.01) <= 0.05
    assert 0.3 < np.mean(surprises) < 0.7


def test_students_assay_gives_way():
    """An assay with few degrees of freedom pulls less than one that knows its error."""
    sure = posterior(TWO_PLACES, (AssayedFraction(NOW, 0.3, 0.05),), NOW)
    unsure = posterior(TWO_PLACES, (AssayedFraction(NOW, 0.3, 0.05, 2.0),), NOW)

    assert unsure.remaining.percentile(50) > sure.remaining.percentile(50) + 0.01


def test_use_by():
    """At the use-by time the chance is the asked confidence; its date counts from receipt."""
    result = posterior(TWO_PLACES, NOW_ASSAYED, NOW)
    hours = result.use_by(0.6, confidence=0.9)

    assert NOW < hours < np.inf
    assert result.chance_enough(0.6, hours) == pytest.approx(0.9, abs=2e-3)
    received = datetime(2025, 1, 10, 12, tzinfo=UTC)
    assert result.use_by_date(0.6, received) == date.fromordinal(
        received.toordinal() + int((12 + hours) // 24)
    )


def test_use_by_depends_on_the_planned_storage():
    """Planned at room temperature the same lot is good for a shorter time than in the fridge."""
    cold = posterior(TWO_PLACES, NOW_ASSAYED, NOW)
    warm = posterior(
        TWO_PLACES, NOW_ASSAYED, NOW, planned=Stretch(0, 0, 295.15, form="solution", place="bench")
    )

    assert warm.use_by(0.6) - NOW < 0.3 * (cold.use_by(0.6) - NOW)
    assert warm.remaining.percentile(50) == pytest.approx(cold.remaining.percentile(50), abs=1e-4)


def test_use_by_at_the_ends():
    """Not enough already: now, and no date; enough for ten years: infinite, and no date."""
    dry = History(
        (Stretch(0, 100, 253.15),), kinetics={"dry": replace(SOLUTION, log_rate=math.log(1e-9))}
    )
    received = datetime(2025, 1, 10, tzinfo=UTC)
    spent, lasting = posterior(TWO_PLACES, NOW_ASSAYED, NOW), posterior(dry, (), 100)

    assert spent.use_by(0.95) == NOW
    assert spent.use_by_date(0.95, received) is None
    assert lasting.use_by(0.5) == np.inf
    assert lasting.use_by_date(0.5, received) is None


def test_charge_factor():
    """Weighing in more makes up for what is lost; more so where one wants to be sure."""
    result = posterior(TWO_PLACES, NOW_ASSAYED, NOW)
    median = result.charge_factor()

    assert median == pytest.approx(1 / result.remaining.percentile(50))
    assert result.charge_factor(confidence=0.95) == pytest.approx(
        1 / result.remaining.percentile(5)
    )
    assert result.charge_factor(needed_fraction=0.3) == 1.0


def test_chance_enough_counts_what_remains():
    """Half of the probability lies above the median, all of it above nothing."""
    result = posterior(TWO_PLACES, NOW_ASSAYED, NOW)

    assert result.chance_enough(result.remaining.percentile(50)) == pytest.approx(0.5, abs=1e-9)
    assert result.chance_enough(0.0) == 1.0
    assert result.chance_enough(2.0) == 0.0


@pytest.mark.source("C", "closed form: normal prior and normal assay")
def test_narrowing_by_another_assay():
    """In the normal case one more assay narrows the interval by the known ratio."""
    history = History((), log_label_sd=0.1)
    worth = posterior(history, (), 0.0).another_assay(relative_uncertainty=0.05)

    expected = 1 - math.sqrt(1 / (1 + (0.1 / 0.05) ** 2))
    assert worth.narrowing == pytest.approx(expected, abs=0.01)
    assert worth.worth_it
    assert worth.chance_decides is None


def test_another_assay_pays_only_where_it_can_decide():
    """Undecided, an assay is worth it; where the answer is clear already, it is not."""
    result = posterior(TWO_PLACES, (), NOW)
    undecided = result.another_assay(0.03, needed_fraction=result.remaining.percentile(40))
    clear = result.another_assay(0.03, needed_fraction=0.05)
    useless = result.another_assay(5.0, needed_fraction=result.remaining.percentile(40))

    assert undecided.decided_now is False
    assert undecided.chance_decides > 0.7
    assert undecided.worth_it
    assert clear.decided_now
    assert not clear.worth_it
    assert not useless.worth_it


def test_a_dead_lot():
    """A lot left in the warm for years has nothing left, and no charge makes up for it."""
    history = History(
        (Stretch(0, 3 * YEAR, 310.15, form="solution"),),
        kinetics={"solution": replace(SOLUTION, log_rate=math.log(0.05))},
    )
    result = posterior(history, (), history.end)

    assert result.remaining.percentile(95) < 1e-4
    assert result.charge_factor() == np.inf
    assert result.chance_enough(0.01) < 1e-3


def test_a_fresh_lot_is_its_label():
    """Received just now, a lot is what the label says, within the label's own spread."""
    history = replace(TWO_PLACES, stretches=(), log_label_sd=0.05)
    result = posterior(history, (), 0.0)

    half = 1.6448536269514722 * 0.05
    found = [result.remaining.percentile(p) for p in (5, 50, 95)]
    np.testing.assert_allclose(found, np.exp([-half, 0, half]), rtol=1e-4)
    assert (result.from_assays, result.assay_share) == (None, 0.0)


def test_everything_known_leaves_no_spread():
    """A history without any spread gives the computed fraction, within a thousandth."""
    of = replace(SOLUTION, log_rate_sd=0.0, energy_sd=0.0)
    history = replace(TWO_PLACES, kinetics={"solution": of})
    known = float(np.exp(log_remaining(history, {}, NOW)[0]))

    remaining = posterior(history, (), NOW).remaining

    for p in (5, 50, 95):
        assert remaining.percentile(p) == pytest.approx(known, rel=2e-3)


def test_a_lot_stays_where_it_was():
    """After its last recorded stretch a lot is taken to be kept as in that stretch."""
    longer = replace(
        TWO_PLACES,
        stretches=(TWO_PLACES.stretches[0], replace(TWO_PLACES.stretches[1], hours=2 * YEAR)),
    )
    later = NOW + YEAR / 2

    told = posterior(TWO_PLACES, (), later).remaining
    meant = posterior(longer, (), later).remaining

    assert told.percentile(50) == pytest.approx(meant.percentile(50), rel=1e-9)
    assert told.percentile(50) < posterior(TWO_PLACES, (), NOW).remaining.percentile(50)


def test_flags():
    """Storage below 0 °C is flagged, and an assay in the future refused."""
    frozen = replace(
        TWO_PLACES, stretches=(*TWO_PLACES.stretches, Stretch(NOW, 100, 253.15, form="solution"))
    )

    assert posterior(frozen, (), NOW + 100).below_freezing
    assert not posterior(TWO_PLACES, (), NOW).below_freezing
    with pytest.raises(ValueError, match="in the future"):
        posterior(TWO_PLACES, NOW_ASSAYED, NOW - 1)


def test_the_density_integrates_to_one():
    """The density over the fraction is positive and holds all the probability."""
    remaining = posterior(LABELLED, NOW_ASSAYED, NOW).remaining
    widths = np.diff(np.exp(remaining.log_edges))

    assert np.all(remaining.density >= 0)
    assert float(remaining.density @ widths) == pytest.approx(1.0, abs=1e-12)
    assert LABEL in dimensions(LABELLED)


@pytest.mark.parametrize(
    ("bad", "message"),
    [
        (dict(fraction=math.nan, uncertainty=0.1), "finite fraction"),
        (dict(fraction=0.5, uncertainty=0.0), "uncertainty above zero"),
        (dict(fraction=0.0, uncertainty=0.1, scale="log"), "above zero"),
    ],
)
def test_impossible_assays_are_refused(bad, message):
    """An assay without a number, without an error, or at zero on the log scale is refused."""
    with pytest.raises(ValueError, match=message):
        AssayedFraction(0.0, **bad)
