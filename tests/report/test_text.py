"""The report that a person reads."""

from pathlib import Path

import pytest

from digestplan.forecast.run import forecast
from digestplan.plan.read import parse_plan, read_plan
from digestplan.report import words
from digestplan.report.text import forecast_text
from digestplan.report.verdict import verdict
from tests.forecast.plans import SPREAD, plan_text

DEMOS = sorted((Path(__file__).parents[2] / "presets_demo").glob("*.toml"))


def forecast_of(**changes):
    return forecast(parse_plan(plan_text(**changes), "plan.toml"), 400)


@pytest.mark.parametrize("path", DEMOS, ids=lambda path: path.stem)
def test_a_report_fits_eighty_columns(path):
    """Lines have at most 79 characters, the verdict comes first, cautions are all there."""
    result = forecast(read_plan(path), 60)
    text = forecast_text(result)
    flat = " ".join(text.split())

    assert max(map(len, text.splitlines())) <= 79
    assert flat.startswith(verdict(result))
    assert all(" ".join(caution.text.split()) in flat for caution in result.cautions)
    assert all(line == line.rstrip() for line in text.splitlines())


@pytest.mark.parametrize(
    ("changes", "phrase"),
    [
        ({}, "Ready (90 %) by Thu 12 Mar 2"),
        ({"death": "2 1/h"}, "Not ready: the target of 90 % is never reached."),
        ({**SPREAD, "selectivity": "20"}, "No safe moment"),
        (SPREAD, "in time with a chance of"),
        ({**SPREAD, "death": "0.5 1/h x/ 1.6"}, "Not sure to be ready"),
    ],
)
def test_the_verdict_says_what_is_so(changes, phrase):
    """Ready, never, no safe moment: each is said in words, with clock times."""
    assert phrase in " ".join(verdict(forecast_of(**changes)).split())


def test_a_visit_that_comes_too_late_is_told():
    """Where every visit is too late the verdict says so."""
    text = plan_text(susceptibility="2e-3 g/(CDU h)")
    told = verdict(forecast(parse_plan(text, "plan.toml")))

    assert "No visit meets it" in told
    assert told.endswith("it is too far.")


def test_a_title_is_shown_as_typed():
    """Markup and braces of a title are shown letter for letter."""
    text = plan_text().replace('"a test"', '"[red]not red[/x] {0} %s <b>"')
    shown = forecast_text(forecast(parse_plan(text, "plan.toml")))

    assert "[red]not red[/x] {0} %s <b>" in shown


def test_text_is_made_plain():
    """Control characters and line breaks never reach the terminal."""
    assert words.plain("one\x1b[31m\n two\u202e") == "one [31m two"
    assert words.plain("x" * 300).endswith("…")


def test_what_would_help_is_told():
    """Where the enzyme dies first, the report says how much more would do."""
    result = forecast_of(death="0.4 1/h")
    (caution,) = (c for c in result.cautions if c.code == "ceiling-below-target")

    assert "Waiting will not help" in caution.text
    assert "times the enzyme" in caution.text
    factor = float(caution.text.split("About ")[1].split(" times")[0])
    enough = forecast_of(death="0.4 1/h", charge=f"{6 * factor * 1.05:.6g} mg")
    assert enough.never_ready == 0


@pytest.mark.parametrize(
    ("value", "shown"),
    [(None, "never"), (0.5, "30 min"), (3.25, "3.2 h"), (100.0, "4.2 d"), (1e6, "over a year")],
)
def test_time_spans(value, shown):
    """Time spans are said in the unit that people use."""
    assert words.hours(value) == shown


@pytest.mark.parametrize(
    ("share", "shown"),
    [(0.0, "0 %"), (1e-4, "<1 %"), (0.9999, ">99 %"), (1.0, "100 %"), (0.5, "50 %")],
)
def test_shares_are_never_falsely_certain(share, shown):
    """A share near 0 or 1 is not rounded to certainty."""
    assert words.percent(share) == shown
