"""What the lab has: a table that limits suggestions and changes no forecast."""

import pytest

from digestplan.forecast.run import forecast
from digestplan.plan.read import parse_plan
from digestplan.problems import InputError
from tests.forecast.plans import SPREAD, plan_text

BENCH = """
[bench]
incubators = ["4 degC", "37 ± 0.5 degC"]
most_charge = "20 mg"
stock = "0.05 g"
programmable = false
"""


def test_what_the_lab_has_is_read():
    """Incubators with their spread, masses and the bath are in the plan, in core units."""
    bench = parse_plan(plan_text() + BENCH, "plan.toml").bench

    assert [q.value for q in bench.incubators] == pytest.approx([277.15, 310.15])
    assert bench.incubators[1].spread == pytest.approx(0.5)
    assert bench.most_charge.value == pytest.approx(0.02)
    assert bench.stock.value == pytest.approx(0.05)
    assert not bench.programmable


def test_left_out_it_limits_nothing():
    """Without the table any temperature and amount may be suggested."""
    bench = parse_plan(plan_text(), "plan.toml").bench

    assert bench.incubators == ()
    assert bench.stock is None
    assert bench.programmable


def test_it_changes_no_forecast():
    """A plan forecasts the same numbers with and without it, spreads of incubators included."""
    text = plan_text(**SPREAD)
    one, other = (forecast(parse_plan(t, "plan.toml"), 64) for t in (text, text + BENCH))

    assert (one.ready_h == other.ready_h).all()


@pytest.mark.parametrize(
    ("written", "place"),
    [
        ('incubators = "37 degC"', "bench.incubators"),
        ('incubators = ["37 mL"]', "bench.incubators[0]"),
        ('incubators = ["4 degC", "900 degC"]', "bench.incubators[1]"),
        ('most_charge = "3 mL"', "bench.most_charge"),
        ('stock = "-3 mg"', "bench.stock"),
        ('programmable = "no"', "bench.programmable"),
        ('incubator = ["37 degC"]', "bench.incubator"),
        ("incubators = [" + '"4 degC",' * 99 + "]", "bench.incubators"),
    ],
)
def test_mistakes_name_their_place(written, place):
    """Each mistake is told with its place in the file."""
    with pytest.raises(InputError) as refused:
        parse_plan(plan_text() + "[bench]\n" + written, "plan.toml")

    assert [p.place for p in refused.value.problems] == [place]
