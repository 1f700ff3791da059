"""The comparison of temperatures as text and as JSON."""

import json
from dataclasses import replace
from functools import cache

import pytest
from jsonschema import validate

from digestplan.cli.comparison_grammar import celsius
from digestplan.cli.main import main
from digestplan.forecast.temperatures import Missed, compare
from digestplan.plan.read import parse_plan
from digestplan.report.limit_words import limit_of
from digestplan.report.temperatures_json import temperatures_document
from digestplan.report.temperatures_text import temperatures_text
from tests.forecast.plans import SPREAD, plan_text
from tests.report.schema import TEMPERATURES

LONG = "Porpoise \N{RIGHT-TO-LEFT OVERRIDE}[bold]<b>" + "x" * 10_000
KNOWN = '[lot]\nenzyme = "clostridial-collagenase"'


@cache
def comparison(visits=True, spread=True):
    """A comparison, made once."""
    text = plan_text(**(SPREAD if spread else {})).replace("[lot]", KNOWN)
    if not visits:
        text = "\n".join(x for x in text.splitlines() if not x.startswith(("start =", "visits")))
    return compare(parse_plan(text, "plan.toml"), [4, 37, 56], n_draws=64)


@pytest.mark.parametrize("visits", [True, False])
@pytest.mark.parametrize("spread", [True, False])
def test_the_document_is_what_the_interface_promises(visits, spread):
    """The JSON document validates, with and without visits and spreads, and holds no NaN."""
    document = temperatures_document(comparison(visits, spread))

    validate(document, TEMPERATURES)
    assert "NaN" not in json.dumps(document, allow_nan=True)


@pytest.mark.parametrize("visits", [True, False])
def test_the_text_holds_every_option_in_80_columns(visits):
    """Each temperature has its row in both tables and its reason; no line is over 79 columns."""
    text = temperatures_text(comparison(visits))
    first = [line.split()[0] for line in text.splitlines() if line.strip()]

    assert max(map(len, text.splitlines())) <= 79
    assert first.count("37") == 3
    assert first.count("56*") == 3
    assert "* outside the range" in text
    assert "\x1b" not in text


def test_numbers_of_the_text_are_those_of_the_document():
    """Chance and charge of the rows are the document's, rounded."""
    (row,) = [
        line.split()
        for line in temperatures_text(comparison()).splitlines()
        if line.split()[:1] == ["37"] and "mg" in line
    ]
    option = temperatures_document(comparison())["options"][1]

    assert row[-2] == f"{100 * option['chance_in_time']:.0f}"
    assert float(row[row.index("mg") - 1]) == pytest.approx(option["charge_for_visit_mg"], rel=0.05)


def test_the_largest_share_comes_first():
    """What keeps most draws from being in time is named first, with its share."""
    said = limit_of(Missed(dies=0.2, slow=0.5, melts=0.0, too_soon=0.01), visits=True)

    assert said == "too slow for the visit (50 %), dies before it is done (20 %)"
    assert limit_of(Missed(0.01, 0.02, 0, 0), visits=True) == "nothing much"
    assert "(9 %)" in limit_of(Missed(0.09, 0.06, 0, 0), visits=True)


def test_the_command_takes_temperatures_as_people_write_them(tmp_path, capsys):
    """`--at 4,20 C` gives those two, in that order, as text and as JSON."""
    path = tmp_path / "plan.toml"
    path.write_text(plan_text(**SPREAD).replace("a test", "hostile"), encoding="utf-8")

    assert main(["temperatures", str(path), "--at", "20 C,4", "--draws", "50", "--json"]) == 0
    out, err = capsys.readouterr()
    assert [o["temperature_c"] for o in json.loads(out)["options"]] == [20, 4]
    assert err == ""
    assert main(["temperatures", str(path), "--draws", "50"]) == 0
    assert "In time" in capsys.readouterr().out


@pytest.mark.parametrize("at", ["", ",", "warm", "4;20", "nan", "1e9", "0,5,x"])
def test_what_is_no_temperature_is_a_wrong_command(at, tmp_path, capsys):
    """A word that is no temperature ends with 2 and an example."""
    with pytest.raises(SystemExit) as ended:
        main(["temperatures", "plan.toml", "--at", at])

    assert ended.value.code == 2
    assert "--at" in capsys.readouterr().err


def test_units_of_a_temperature():
    """A unit may follow a number."""
    assert celsius("4, 37 °C,56degC") == (4.0, 37.0, 56.0)


def test_a_title_as_typed_breaks_nothing():
    """Markup, direction marks and ten thousand characters of a title leave the layout whole."""
    plan = parse_plan(plan_text(), "plan.toml")
    text = temperatures_text(compare(replace(plan, title=LONG), [37], n_draws=4, curve=False))

    assert max(map(len, text.splitlines())) <= 79
    assert "[bold]<b>" in text
    assert "\N{RIGHT-TO-LEFT OVERRIDE}" not in text
