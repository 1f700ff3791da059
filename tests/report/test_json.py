"""The JSON document of a forecast is the one that the interface promises."""

import json
from pathlib import Path

import jsonschema
import pytest

from digestplan.forecast.run import forecast
from digestplan.plan.read import parse_plan, read_plan
from digestplan.report.as_json import dumps, forecast_document, number
from tests.forecast.plans import SPREAD, plan_text
from tests.report.schema import FORECAST

DEMOS = sorted((Path(__file__).parents[2] / "presets_demo").glob("*.toml"))


def document(text, n_draws=100):
    return json.loads(dumps(forecast_document(forecast(parse_plan(text, "plan.toml"), n_draws))))


@pytest.mark.parametrize("path", DEMOS, ids=lambda path: path.stem)
def test_every_demo_plan_gives_a_valid_document(path):
    """The documents of the demo plans validate, and their steps follow one another."""
    result = json.loads(dumps(forecast_document(forecast(read_plan(path), 60))))
    jsonschema.validate(result, FORECAST)

    ends = [step["end"] for step in result["steps"][:-1]]
    starts = [step["start"] for step in result["steps"][1:]]
    assert ends == starts


def test_an_exact_plan_and_one_without_a_clock():
    """Without spread all percentiles agree; without a clock all clock times are null."""
    text = plan_text().replace("start = 2026-03-12T17:30:00\n", "")
    text = "\n".join(line for line in text.splitlines() if not line.startswith("visits"))
    result = document(text)
    jsonschema.validate(result, FORECAST)

    step = result["steps"][0]
    assert result["visits"] == []
    assert step["start"] is None
    assert step["window"]["opens"] is None
    assert step["extent_at_end"]["p05"] == step["extent_at_end"]["p95"]


def test_what_is_never_reached_is_null():
    """A target beyond the ceiling gives nulls, a share of 1, and no number that is not one."""
    result = document(
        plan_text(**{**SPREAD, "death": "0.9 1/h", "susceptibility": "1e-6 g/(CDU h)"})
    )
    jsonschema.validate(result, FORECAST)

    step = result["steps"][0]
    assert step["hours_to_target"]["p50"] is None
    assert step["never_reaches_target"] == 1
    assert step["window"]["opens_h"] is None
    assert result["visits"][0]["chance_not_ready"] == 1


def test_visits_sum_to_one():
    """In time, not ready and too far are all there is."""
    for visit in document(plan_text(**SPREAD))["visits"]:
        parts = (visit[f"chance_{name}"] for name in ("in_time", "not_ready", "too_far"))
        assert sum(parts) == pytest.approx(1, abs=1e-9)


def test_numbers_are_plain():
    """Infinite and not-a-number become null; the noise of the last digits is cut."""
    assert number(float("inf")) is None
    assert number(float("nan")) is None
    assert number(0.1 + 0.2) == 0.3
