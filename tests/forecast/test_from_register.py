"""A plan that names a lot: what the register gives it, and what the plan keeps for itself."""

import math
from datetime import datetime

import numpy as np
import pytest

from digestplan.forecast.from_register import as_quantity, of_lot, with_register
from digestplan.forecast.run import forecast
from digestplan.lots.grid import Remaining
from digestplan.lots.register import open_register
from digestplan.lots.register.events import Assayed, Discarded, Received
from digestplan.plan.lot import asks_register
from digestplan.plan.read import parse_plan
from digestplan.problems import InputError
from tests.forecast.plans import plan_text

LABEL, REMAINING = 'label_activity = "280 CDU/mg"\n', 'remaining = "0.82"\n'
RECEIVED = datetime(2026, 1, 10, 12)


def text_of(*, label=False, remaining=False, lot='id = "CH-1"\n', **changes):
    """A plan text that names a lot and writes of it what is asked for."""
    text = plan_text(**changes)
    for line, keep in ((LABEL, label), (REMAINING, remaining)):
        if not keep:
            text = text.replace(line, "")
    return text.replace("[lot]\n", f"[lot]\n{lot}")


def plan_of(**given):
    return parse_plan(text_of(**given), "plan.toml")


@pytest.fixture
def register():
    """A register with one lot of a few months."""
    with open_register(":memory:") as opened:
        opened.append(
            Received(
                lot="CH-1",
                at=RECEIVED,
                enzyme="clostridial-collagenase",
                form="dry",
                temperature=277.15,
                label_activity="280 CDU/mg",
                mass=0.1,
                conversions=("1 CDU = 0.011 FALGPA_U",),
            )
        )
        yield opened


def test_label_and_remaining_come_from_the_register(register):
    """Both are filled in with their origin, the remaining fraction with its spread."""
    plan = with_register(plan_of(), register)

    assert plan.lot.label_activity.quantity.value == 280e3
    assert plan.lot.label_activity.quantity.activity == "CDU"
    assert plan.lot.label_activity.origin == plan.lot.remaining.origin == "lot"
    assert 0.9 < plan.lot.remaining.quantity.value < 1.0
    assert plan.lot.remaining.quantity.spread > 0
    assert plan.lot.remaining.place == "lot.remaining"
    assert "history alone" in plan.lot.remaining.source
    assert "CH-1" in plan.remarks[-1]


def test_the_forecast_is_that_of_the_same_values_written_down(register):
    """A plan with the lot's values written gives the same numbers as one that asks for them."""
    asked = with_register(plan_of(), register)
    quantity = asked.lot.remaining.quantity
    sign = {"normal": "±", "lognormal": "x/"}[quantity.distribution]
    written = f"{quantity.value!r} {sign} {quantity.spread!r}"
    told = parse_plan(plan_text(remaining=written), "plan.toml")

    np.testing.assert_allclose(forecast(asked, 200).ready_h, forecast(told, 200).ready_h, rtol=1e-9)


@pytest.mark.parametrize(
    ("written", "label", "remaining"),
    [({"label": True}, "plan", "lot"), ({"remaining": True}, "lot", "plan")],
)
def test_what_is_written_in_the_plan_wins(register, written, label, remaining):
    """Only what the plan leaves out is asked for."""
    plan = with_register(plan_of(**written), register)

    assert plan.lot.label_activity.origin == label
    assert plan.lot.remaining.origin == remaining


def test_a_plan_that_says_it_all_does_not_ask():
    """With label and remaining written, or without a lot, the register is left alone."""
    assert not asks_register(plan_of(label=True, remaining=True))
    assert not asks_register(plan_of(lot="", label=True))
    assert asks_register(plan_of(label=True))
    assert asks_register(plan_of(remaining=True))


def test_the_time_is_the_plan_s_start(register):
    """An assay after the plan's start is not known to it; one before is."""
    before, after = datetime(2026, 3, 1), datetime(2026, 3, 20)
    register.append(Assayed(lot="CH-1", at=after, fraction=0.2, standard_error=0.02))
    assert with_register(plan_of(), register).lot.remaining.quantity.value > 0.9

    register.append(Assayed(lot="CH-1", at=before, fraction=0.7, standard_error=0.02))
    plan = with_register(plan_of(), register)
    assert plan.lot.remaining.quantity.value == pytest.approx(0.7, abs=0.03)
    assert "1 assay" in plan.lot.remaining.source


@pytest.mark.parametrize(
    ("given", "message"),
    [
        ({"lot": 'id = "CH-7"\n'}, r'lot\.id: .*no lot "CH-7".*CH-1'),
        ({"lot": 'id = "CH-1"\nenzyme = "trypsin"\n'}, r"lot\.enzyme: .*collagenase.*not trypsin"),
        (
            {"susceptibility": "0.002 g/(WU h)"},
            r"lot\.label_activity: .*counts in CDU.*never.*conversions",
        ),
    ],
)
def test_what_does_not_fit_is_an_input_problem(register, given, message):
    """An unknown lot, another enzyme and a unit without a factor are told by their place."""
    with pytest.raises(InputError, match=message) as refused:
        with_register(plan_of(**given), register)
    assert all(p.file == "plan.toml" for p in refused.value.problems)


def test_a_lot_from_after_the_start_is_told(register):
    """A plan that starts before its lot was received cannot have used it."""
    text = text_of().replace("2026-03-1", "2025-03-1")

    with pytest.raises(InputError, match="received at 2026-01-10"):
        with_register(parse_plan(text, "plan.toml"), register)


def test_the_certificate_leads_to_the_plan_s_unit(register):
    """The label is used through the factor of the register's certificate."""
    in_falgpa = plan_of(susceptibility="1.81818e-3 g/(FALGPA_U h)")
    plan, same = with_register(in_falgpa, register), with_register(plan_of(), register)

    assert plan.activity_unit == "FALGPA_U"
    np.testing.assert_allclose(forecast(plan, 50).ready_h, forecast(same, 50).ready_h, rtol=1e-4)


def test_a_label_s_spread_is_counted_once(register):
    """A spread that the plan writes of its label is not in the remaining fraction as well."""
    text = text_of(label=True).replace("280 CDU/mg", "280 ± 22 CDU/mg")
    plan = with_register(parse_plan(text, "plan.toml"), register)
    alone = with_register(plan_of(), register)

    assert plan.lot.label_activity.quantity.spread == pytest.approx(22e3)
    assert plan.lot.remaining.quantity.spread < 0.6 * alone.lot.remaining.quantity.spread


def test_a_lot_without_a_label_is_told():
    """Where neither plan nor register says what is on the label, that is asked for."""
    with open_register(":memory:") as register:
        register.append(
            Received(
                lot="CH-1",
                at=RECEIVED,
                enzyme="clostridial-collagenase",
                form="dry",
                temperature=277.15,
            )
        )
        with pytest.raises(InputError, match="neither the plan nor the register"):
            with_register(plan_of(), register)
        record = register.lot("CH-1")
        assert of_lot(plan_of(label=True), record).lot.label_activity.origin == "plan"


def test_contradiction_and_discard_are_remarks(register):
    """A plan that rests on a lot in doubt says so."""
    register.append(Assayed(lot="CH-1", at=datetime(2026, 2, 1), fraction=0.2, standard_error=0.01))
    register.append(Discarded(lot="CH-1", at=datetime(2026, 2, 2)))
    remarks = " ".join(with_register(plan_of(), register).remarks)

    assert "not fit" in remarks
    assert "discarded on 2026-02-02" in remarks


def test_a_forecast_that_nobody_asked_the_register_for_is_refused():
    """Without the register there is no label, and no forecast of nothing."""
    with pytest.raises(InputError, match=r"lot\.label_activity"):
        forecast(plan_of(), 10)


@pytest.mark.parametrize("shape", ["normal", "lognormal"])
def test_a_distribution_becomes_the_nearer_of_two(shape):
    """A normal posterior becomes a normal value, a log-normal one a log-normal, to 1e-3."""
    edges = np.linspace(math.log(0.2), math.log(1.6), 2001)
    from scipy.special import ndtr

    if shape == "normal":
        below = ndtr((np.exp(edges) - 0.8) / 0.07)
    else:
        below = ndtr((edges - math.log(0.6)) / 0.15)
    quantity = as_quantity(Remaining(edges, below))

    assert quantity.distribution == shape
    expected = (0.8, 0.07) if shape == "normal" else (0.6, math.exp(0.15))
    assert (quantity.value, quantity.spread) == pytest.approx(expected, rel=1e-3)


def test_a_certain_lot_is_exact():
    """Where everything is known, the value has no spread."""
    edges = np.array([math.log(0.8)] * 2)
    assert as_quantity(Remaining(edges, np.array([0.0, 1.0]))).distribution == "exact"
