"""Mistaken treatments beyond those of `test_mistakes`: order, baths, reagents, known runs."""

import pytest

from digestplan.plan.read import parse_plan
from digestplan.problems import InputError
from tests.forecast.treatment import digest, plan, rinse, step

KNOWN = """[sample.known_demineralisation]
reagent = "{reagent}"
concentration = "0.5 M"
temperature = "20 degC"
{duration}
extent = {extent}
thickness = "2 mm"
"""
TWENTY = 'duration = "20 h"'


def bath(**changes):
    """A bath of acid with some of its lines changed, or left out where they are None."""
    lines = {
        "reagent": "hydrochloric acid",
        "concentration": "0.5 M",
        "volume": "20 mL",
        "temperature": "20 degC",
        "for_": "48 h",
        **changes,
    }
    return step("demineralise", **{k: v for k, v in lines.items() if v is not None})


def known(reagent="hydrochloric acid", extent=0.9, duration=TWENTY):
    """A plan with a known demineralisation."""
    return plan(bath(), sample=KNOWN.format(reagent=reagent, extent=extent, duration=duration))


ACID, DIGEST, WATER = bath(), digest(), rinse()
STOP = step("stop", how="chelate", concentration="20 mM")
HOLD = step("hold", temperature="4 degC", for_="9 h")
HEAT = {"how": "heat", "temperature": "95 degC", "for_": "10 min"}
NEVER = "is refused altogether"

MISTAKES = [
    # order
    (plan(ACID, STOP), "steps[1].do", "nothing to stop"),
    (plan(ACID, WATER, STOP, DIGEST), "steps[2].do", "nothing to stop"),
    (plan(HOLD, ACID, WATER, DIGEST), "steps[0].do", "nothing to hold"),
    (plan(DIGEST, ACID), "steps[0].do", "the mineral is still there"),
    (plan(DIGEST), "sample.susceptibility", "demineralise it first"),
    # hydrofluoric acid, whatever it is called and wherever it stands
    (plan(bath(reagent="hydrofluoric acid")), "steps[0].reagent", NEVER),
    (plan(bath(reagent="Hydrofluoric-Acid")), "steps[0].reagent", NEVER),
    (plan(bath(reagent="2 % HF")), "steps[0].reagent", NEVER),
    (plan(bath(reagent="ammonium bifluoride")), "steps[0].reagent", NEVER),
    (known(reagent="hydrofluoric acid"), "sample.known_demineralisation.reagent", NEVER),
    (plan(ACID, rinse(fluid="hydrofluoric acid, 1 %")), "steps[1].fluid", NEVER),
    (
        plan(
            ACID,
            WATER,
            DIGEST,
            step("stop", how="acidify", agent="HF", concentration="0.1 M"),
        ),
        "steps[3].agent",
        NEVER,
    ),
    # reagents and baths
    (plan(bath(reagent="aqua regia")), "steps[0].reagent", "known: hydrochloric-acid"),
    (plan(bath(reagent="etda")), "steps[0].reagent", "is edta meant"),
    (plan(bath(reagent=None)), "steps[0].reagent", "this is missing"),
    (plan(bath(volume="20 uL")), "steps[0].volume", "cannot cover it"),
    (plan(bath(volume="-1 mL")), "steps[0].volume", "negative"),
    (plan(bath(concentration="0 M")), "steps[0].concentration", "not above 0"),
    (plan(bath(concentration="5 mL")), "steps[0].concentration", "a concentration is wanted"),
    (plan(bath(concentration="100 M")), "steps[0].concentration", "more than a bath"),
    (plan(bath(reagent="edta", concentration="5 M")), "steps[0].concentration", "2 M"),
    (plan(bath(ph=7.4)), "steps[0].ph", "counts for a chelator"),
    (plan(bath(when_spent=1.5)), "steps[0].when_spent", "between 0 and 1"),
    (plan(bath(when_spent=0.0)), "steps[0].when_spent", "not above 0"),
    (plan(bath(changes=["-1 h"])), "steps[0].changes[0]", "negative"),
    (plan(bath(changes=["0 h"])), "steps[0].changes[0]", "not above 0"),
    (plan(bath(changes=["1 mg"])), "steps[0].changes[0]", "a time is wanted"),
    (plan(bath(closed_vessel="maybe")), "steps[0].closed_vessel", "neither true nor false"),
    (plan(bath(stirred=1)), "steps[0].stirred", "neither true nor false"),
    (plan(ACID, material="tendon"), "sample.mineral_fraction", "missing for demineralising"),
    (plan(ACID, sample='density = "0 g/mL"'), "sample.density", "zero"),
    # known demineralisation
    (known(reagent="edta"), "sample.known_demineralisation.reagent", "says nothing of hydro"),
    (known(reagent="royal water"), "sample.known_demineralisation.reagent", "knows no reagent"),
    (known(extent=1.2), "sample.known_demineralisation.extent", "between 0 and 1"),
    (known(extent=1), "sample.known_demineralisation.extent", "not below 1"),
    (known(duration=""), "sample.known_demineralisation.duration", "this is missing"),
    # rinse and stop
    (plan(ACID, rinse(0)), "steps[1].exchanges", "0 is not between"),
    (plan(ACID, rinse(-3)), "steps[1].exchanges", "-3 is not between"),
    (plan(ACID, rinse(3, "0 min")), "steps[1].each", "not above 0"),
    (plan(ACID, WATER.replace('volume = "10 mL"', "")), "steps[1].volume", "this is missing"),
    (plan(ACID, WATER + '\nfor = "2 h"'), "steps[1].for", "no such key"),
    (plan(ACID, WATER, DIGEST, step("stop", agent="x", **HEAT)), "steps[3].agent", "nothing is"),
    (plan(ACID, WATER, DIGEST, step("stop", how="chill")), "steps[3].temperature", "missing"),
    (
        plan(ACID, WATER, DIGEST, step("stop", how="chelate", concentration="-20 mM")),
        "steps[3].concentration",
        "negative",
    ),
]


@pytest.mark.parametrize(("text", "place", "phrase"), MISTAKES)
def test_a_mistaken_treatment_is_refused_where_the_mistake_is(text, place, phrase):
    """The message names the place, says what is wrong, and knows its line."""
    with pytest.raises(InputError) as caught:
        parse_plan(text, "plan.toml")
    problem = {p.place: p for p in caught.value.problems}[place]

    assert phrase in problem.message
    assert problem.line is not None


def test_hydrofluoric_acid_is_refused_in_plain_words_and_nothing_is_offered_instead():
    """The refusal says why and whom to ask; it does not guess that another acid was meant."""
    with pytest.raises(InputError) as caught:
        parse_plan(plan(bath(reagent="hydrofluoric acid")), "plan.toml")
    (problem,) = caught.value.problems

    assert "responsible for chemical safety" in problem.message
    assert "hydrochloric" not in problem.message


@pytest.mark.parametrize(
    "text",
    [
        plan(ACID, WATER, DIGEST, STOP, HOLD),
        plan(bath(reagent="edta", ph=7.4), WATER, DIGEST),
        plan(ACID, WATER, bath(reagent="EDTA"), WATER, DIGEST),
        known(),
    ],
)
def test_sound_treatments_are_read(text):
    """The plans from which the mistakes were made are themselves in order."""
    assert parse_plan(text, "plan.toml").steps
