"""What a plan needs of a lot, and what that asks for, against closed forms and brute force."""

import math
from dataclasses import replace
from datetime import date, datetime, timedelta
from pathlib import Path

import numpy as np
import pytest

from digestplan.forecast.lot_for_plan import (
    check_for_plan,
    counts_on_label,
    deadline,
    fraction_needed,
)
from digestplan.forecast.run import forecast
from digestplan.lots.register import open_register
from digestplan.lots.register.events import Assayed, Moved, Opened, Received, Used
from digestplan.lots.storage import StorageKinetics
from digestplan.plan.read import parse_plan, read_plan
from digestplan.quantities import Quantity
from tests.forecast.plans import DEFAULTS, SPREAD, plan_text

DEMO = Path(__file__).parents[2] / "presets_demo" / "porpoise-tendon-overnight.toml"
NO_VISITS = 'visits = ["2026-03-13T08:30 / 2026-03-13T17:00"]\n'
EVERLASTING = {"death": "0 1/h"}
START = datetime(2026, 3, 12, 17, 30)


def plan_of(text=None, **changes):
    return parse_plan(text or plan_text(**changes), "plan.toml")


def at_remaining(plan, fraction):
    remaining = replace(plan.lot.remaining, quantity=Quantity(fraction))
    return replace(plan, lot=replace(plan.lot, remaining=remaining))


def recorded(*events, label="280 CDU/mg", form="dry", mass=0.1, **received):
    first = Received(
        lot="X",
        at=datetime(2025, 3, 1, 12),
        enzyme="clostridial-collagenase",
        form=form,
        temperature=277.15,
        place="fridge",
        label_activity=label,
        mass=mass,
        **received,
    )
    with open_register(":memory:") as register:
        register.append_many([first, *events])
        return register.lot("X")


@pytest.mark.parametrize("target", ["0.5", "0.9", "0.99"])
def test_the_needed_fraction_in_closed_form(target):
    """Where the enzyme lives for ever, it is −ln(1 − X) / (s · ratio of the label · hours)."""
    plan = plan_of(**EVERLASTING, target=target)
    hours = 23.5  # until the visit ends: the tube stays warm after its last step
    label_ratio = 6e-3 * 280e3 / (0.180 * 0.30)
    expected = -math.log(1 - float(target)) / (2e-5 * label_ratio * hours)

    assert deadline(plan) == hours
    assert fraction_needed(plan) == pytest.approx(expected, rel=2e-4)


def test_without_visits_the_last_step_is_the_deadline():
    """A plan without visits must be there at the end of its last step."""
    text = plan_text(**EVERLASTING).replace(NO_VISITS, "")
    plan = plan_of(text)
    label_ratio = 6e-3 * 280e3 / (0.180 * 0.30)

    assert deadline(plan) == 16.0
    expected = math.log(10) / (2e-5 * label_ratio * 16)
    assert fraction_needed(plan) == pytest.approx(expected, rel=2e-4)


@pytest.mark.parametrize("charge", ["6 mg", "2 mg", "30 mg"])
def test_the_needed_fraction_by_brute_force(charge):
    """On a fine grid of fractions, the first with which enough futures are ready in time."""
    plan, by = plan_of(**SPREAD, charge=charge), deadline(plan_of(**SPREAD))
    needed = fraction_needed(plan, 400, 5)
    grid = needed * np.arange(0.98, 1.0201, 0.001)
    ready = [
        np.mean(forecast(at_remaining(plan, f), 400, 5).ready_h <= by) >= plan.confidence
        for f in grid
    ]

    assert not ready[0]
    assert ready[-1]
    assert ready == sorted(ready)  # more is never worse
    assert grid[ready.index(True)] == pytest.approx(needed, rel=4e-3)  # a draw is 1 in 400


def test_the_demo_needs_what_brute_force_says():
    """The overnight demo with its library values: a bit more than needed is enough, less is not."""
    plan = read_plan(DEMO)
    needed = fraction_needed(plan, 250)

    def share(factor):
        found = forecast(at_remaining(plan, needed * factor), 250)
        return np.mean(found.ready_h <= deadline(plan))

    assert share(1.01) >= plan.confidence > share(0.99)


def test_twice_the_charge_needs_half_as_much():
    """Charge and remaining fraction count by their product alone."""
    one, two = (fraction_needed(plan_of(**SPREAD, charge=c), 300) for c in ("6 mg", "12 mg"))

    assert one == pytest.approx(2 * two, rel=3e-4)


def test_a_target_out_of_reach_needs_the_impossible():
    """Where the enzyme dies at once and no amount helps, the needed fraction is infinite."""
    plan = plan_of(death="1e9 1/h")

    assert fraction_needed(plan) == math.inf


def test_a_plan_in_active_enzyme_needs_no_fraction():
    """A ratio is active enzyme: what is left decides on the powder, not on the plan."""
    text = plan_text().replace('charge = "6 mg"', 'ratio = "40 CDU/mg"')

    assert not counts_on_label(plan_of(text))
    assert fraction_needed(plan_of(text)) is None


def test_a_good_lot_needs_no_more():
    """A lot that holds its label serves a plan that needs half of it, for a known time."""
    kinetics = {"dry": StorageKinetics(math.log(2e-5), 0.0, 0.0, 0.0, 277.15)}
    record = recorded(Assayed(lot="X", at=START, fraction=0.9, standard_error=0.02))
    check = check_for_plan(record, START, needed_fraction=0.5, kinetics=kinetics)

    assert check.chance_enough > 0.999
    assert check.charge_factor == 1.0
    left = float(check.posterior.remaining.at(0.1))
    until = START + timedelta(hours=math.log(left / 0.5) / 2e-5)
    assert abs(check.use_by - until.date()) <= timedelta(days=40)  # the spread moves it a little
    assert check.worth.decided_now
    assert not check.lasts


def test_a_lot_that_is_not_enough_says_how_much_more():
    """The factor is the needed fraction over what is left with the plan's confidence."""
    record = recorded(Assayed(lot="X", at=START, fraction=0.5, standard_error=0.03))
    plan = plan_of(**SPREAD, charge="3 mg")
    check = check_for_plan(record, START, plan, n_draws=300)

    assert check.needed_fraction == fraction_needed(plan, 300)
    assert check.charge_factor > 1
    left = float(check.posterior.remaining.at(1 - plan.confidence))
    assert check.charge_factor == pytest.approx(max(check.needed_fraction / left, 1), rel=1e-12)
    assert check.use_by is None
    assert check.chance_enough == pytest.approx(
        check.posterior.remaining.chance_above(check.needed_fraction), abs=1e-12
    )


@pytest.mark.parametrize("fraction", [0.55, 0.9])
def test_weighing_in_so_much_more_is_enough(fraction):
    """With the factor's mass and the lot's own spread, the plan is ready as surely as it asks."""
    record = recorded(Assayed(lot="X", at=START, fraction=fraction, standard_error=0.03))
    plan = plan_of(**SPREAD)
    check = check_for_plan(record, START, plan, n_draws=500)
    z = (np.arange(40) + 0.5) / 40
    left = check.posterior.remaining.at(z)
    ready = [
        np.mean(
            forecast(at_remaining(plan, f * check.charge_factor), 500).ready_h <= deadline(plan)
        )
        for f in left
    ]

    assert np.mean(ready) >= plan.confidence - 0.01
    if check.charge_factor > 1:  # and not by far too much: that much less is not enough
        factor = check.charge_factor * 0.7
        less = [
            np.mean(forecast(at_remaining(plan, f * factor), 500).ready_h <= deadline(plan))
            for f in left
        ]
        assert np.mean(less) < plan.confidence


def test_an_impossible_plan_is_told():
    """Where no fraction would do, the chance is nought and no factor helps."""
    check = check_for_plan(recorded(), START, plan_of(death="1e9 1/h"))

    assert check.needed_fraction == math.inf
    assert check.chance_enough == 0.0
    assert check.charge_factor == math.inf
    assert check.use_by is None


def test_every_day_of_use_opens_the_bottle():
    """Using it takes off what the library says an opening takes; the same day counts once."""
    days = [datetime(2025, 4, d, h) for d, h in ((1, 9), (1, 15), (2, 9), (5, 9))]
    used = [Used(lot="X", at=day, mass=0.001) for day in days]
    kept = check_for_plan(recorded(), datetime(2025, 4, 6)).posterior
    opened = check_for_plan(recorded(*used), datetime(2025, 4, 6)).posterior

    lost = math.log(kept.remaining.percentile(50) / opened.remaining.percentile(50))
    # 1 % ×/ 2 beside the wider spread of the label: the median moves by the mean of the loss
    mean = -3 * math.log(1 - 0.01) * math.exp(math.log(2) ** 2 / 2)
    assert lost == pytest.approx(mean, rel=0.05)


def test_an_open_bottle_and_a_dissolved_one_open_in_their_form():
    """An opening counts in the form that the lot had when it was opened."""
    at = datetime(2025, 6, 1, 12)
    record = recorded(
        Opened(lot="X", at=at),
        Moved(lot="X", at=at, temperature=253.15, form="solution"),
        Used(lot="X", at=at + timedelta(days=1), mass=0.01),
        opened=True,
    )
    from digestplan.lots.check import history_of
    from digestplan.lots.from_library import kinetics_of

    history = history_of(record, kinetics_of("clostridial-collagenase"), datetime(2025, 7, 1))

    assert [(o.at, o.form) for o in history.openings] == [
        (0.0, "dry"),
        (92 * 24.0, "dry"),
        (93 * 24.0, "solution"),
    ]


def test_the_label_s_own_spread_counts():
    """A label written with a spread is believed as far as it says, not as far as the library."""
    sure = check_for_plan(recorded(label="280 ± 1 CDU/mg"), datetime(2025, 3, 2)).posterior
    unsure = check_for_plan(recorded(label="280 ± 60 CDU/mg"), datetime(2025, 3, 2)).posterior
    library = check_for_plan(recorded(), datetime(2025, 3, 2)).posterior

    assert sure.remaining.log_width < 0.01
    assert library.remaining.log_width == pytest.approx(math.log(1.08), rel=0.02)
    assert unsure.remaining.log_width == pytest.approx(0.21, rel=0.05)


def test_defaults_are_what_the_closed_form_takes():
    """The closed form above holds for the values that the plans are made with."""
    assert (DEFAULTS["mass"], DEFAULTS["fraction"], DEFAULTS["charge"]) == (
        "180 mg",
        "0.30",
        "6 mg",
    )
    assert date(2026, 3, 12) == START.date()
