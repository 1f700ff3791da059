"""Mistaken plans: each is told with its place, its line, what was written and what is wanted."""

from pathlib import Path

import pytest

from digestplan.plan.read import parse_plan
from digestplan.problems import InputError

PLAN = Path(__file__).with_name("explicit.toml").read_text(encoding="utf-8")


def problems_of(text):
    """All that is wrong with a text."""
    with pytest.raises(InputError) as caught:
        parse_plan(text, "plan.toml")
    return caught.value.problems


def line_with(text, words):
    """Line of the first place of some words, or of a step's header, as a person counts."""
    lines = text.splitlines()
    if words.startswith("step "):
        return [n for n, line in enumerate(lines, 1) if line == "[[steps]]"][int(words[5:])]
    return next(number for number, line in enumerate(lines, 1) if words in line)


# What stands in the plan, what is written instead, place, a word on the line told, a phrase.
VALUES = [
    ('"20 mL"', '"3 mg"', "steps[0].volume", "3 mg", '"3 mg" is a mass; a volume is wanted here'),
    ('"180 mg"', '"180 mL"', "sample.wet_mass", "180 mL", "a mass is wanted here, such as"),
    ('"180 mg"', '"180 furlong"', "sample.wet_mass", "furlong", "unknown unit"),
    ('"180 mg"', "180", "sample.wet_mass", "wet_mass", "180 has no unit; a mass is wanted"),
    ('"180 mg"', '"-180 mg"', "sample.wet_mass", "-180", "negative"),
    ('"180 mg"', '"0 mg"', "sample.wet_mass", '"0 mg"', "zero"),
    ('"180 mg"', '"nan mg"', "sample.wet_mass", "nan", "no finite number"),
    ('"180 mg"', '"inf mg"', "sample.wet_mass", "inf mg", "no finite number"),
    ('"180 mg"', '"1e300 mg"', "sample.wet_mass", "1e300", "far larger than it can be"),
    ('"180 mg"', '"1e-300 mg"', "sample.wet_mass", "1e-300", "far smaller than it can be"),
    ('"180 mg"', '"9**9**9 mg"', "sample.wet_mass", "9**9", "power"),
    ('"180 mg"', '"180,5 mg"', "sample.wet_mass", "180,5", "decimal comma"),
    ('"180 mg"', '""', "sample.wet_mass", "wet_mass", "a mass is wanted here"),
    ('"180 mg"', '["180 mg"]', "sample.wet_mass", "wet_mass", "a list is no value"),
    ('"180 mg"', "{ value = 180 }", "sample.wet_mass", "wet_mass", "a table is no value"),
    ('"180 mg"', "true", "sample.wet_mass", "wet_mass", "true is no value"),
    ('"180 mg"', "2026-03-12", "sample.wet_mass", "wet_mass", "2026-03-12 is no value"),
    ('"180 mg"', '"1 mg ± 1 kg"', "sample.wet_mass", "wet_mass", "so wide that it says nothing"),
    ('"180 mg"', '"1 mg x/ 1e9"', "sample.wet_mass", "wet_mass", "so wide that it says nothing"),
    ('"0.30"', '"1.3"', "sample.substrate_fraction", "1.3", "between 0 and 1"),
    ('"0.30"', "0", "sample.substrate_fraction", "substrate_fraction", "0 is not above 0"),
    ("0.58", "nan", "sample.mineral_fraction", "nan", "no finite number"),
    ("0.58", "1.0", "sample.mineral_fraction", "1.0", "is not below 1"),
    ("0.58", "0", "sample.mineral_fraction", "mineral_fraction", "no mineral to dissolve"),
    ("= 7.5", '= "basic"', "steps[2].ph", "basic", "a pH is wanted"),
    ("= 7.5", "= 75", "steps[2].ph", "= 75", "between -1 and 15"),
    ('"4 degC"', '"77 F"', "steps[0].temperature", "77 F", "Fahrenheit"),
    ('"4 degC"', '"180 degC"', "steps[0].temperature", "180 degC", "outside -200 °C to 150 °C"),
    ('"4 degC"', '"-300 degC"', "steps[0].temperature", "-300 degC", "absolute zero"),
    ("confidence = 0.9", "confidence = 0.5", "confidence", "confidence", "is not above 0.5"),
    ("confidence = 0.9", "confidence = 1", "confidence", "confidence", "is not below 1"),
    ("confidence = 0.9", 'confidence = "0.9 ± 0.1"', "confidence", "confidence", "must be exact"),
    ("exchanges = 3", "exchanges = 2.5", "steps[1].exchanges", "exchanges", "no whole number"),
    ("exchanges = 3", "exchanges = 101", "steps[1].exchanges", "exchanges", "above 100"),
    ('"20 min"', '"20 min ± 5 min"', "steps[1].each", "each", "must be exact"),
    ('each = "20 min"', 'each = "20 a"', "steps[1].each", "each", "a time is wanted"),
    ('for = "48 h"', 'for = "11 yr"', "steps[0].for", "11 yr", "far larger"),
    (
        '"280 CDU/mg"',
        '"280 CDU"',
        "lot.label_activity",
        "280 CDU",
        "an activity per mass of enzyme",
    ),
    ('"280 CDU/mg"', '"280 units/mg"', "lot.label_activity", "units", "which unit of activity"),
    ('"52 kJ/mol"', '"52 kJ"', "enzyme.activation_energy", "52 kJ", "a molar energy is wanted"),
]

SHAPES = [
    (
        "digestplan = 1\n",
        "",
        "digestplan",
        None,
        "this is missing; write for instance digestplan = 1",
    ),
    ("digestplan = 1", "digestplan = 2", "digestplan", "digestplan", "newer format"),
    ("digestplan = 1", 'digestplan = "1"', "digestplan", "digestplan", "no version of this format"),
    ("digestplan = 1", "digestplan = true", "digestplan", "digestplan", "no version"),
    ("[sample]", "[specimen]", "specimen", "[specimen]", "no such key"),
    (
        'wet_mass = "180 mg"\n',
        "",
        "sample.wet_mass",
        "[sample]",
        "this is missing for steps[2].charge",
    ),
    (
        'substrate_fraction = "0.30"\n',
        "",
        "sample.substrate_fraction",
        "[sample]",
        "is missing for",
    ),
    ('thickness = "1.5 mm"\n', "", "sample.thickness", "[sample]", "for steps[0] (demineralise)"),
    ("mineral_fraction = 0.58\n", "", "sample.mineral_fraction", "[sample]", "for demineralising"),
    ('density = "1.92 g/mL"\n', "", "sample.density", "[sample]", "for demineralising"),
    (
        'temperature = "37',
        'temperatur = "37',
        "enzyme.reference_temperatur",
        "temperatur ",
        "reference_temperature",
    ),
    (
        'law = "first_order"',
        'law = "first order"',
        "sample.law",
        'law = "first',
        "is first_order meant",
    ),
    ('law = "first_order"', 'law = "magic"', "sample.law", 'law = "magic', "two_pool"),
    ('law = "first_order"', "law = 1", "sample.law", "law = 1", "1 is not known here"),
    (
        'law = "first_order"',
        'law = "stretched"',
        "sample.exponent",
        "[sample]",
        "missing for stretched",
    ),
    (
        'law = "first_order"',
        "exponent = 0.8",
        "sample.exponent",
        "exponent",
        'only with law = "stretched"',
    ),
    ('shape = "slab"', 'shape = "cube"', "sample.shape", "cube", "write slab, cylinder or sphere"),
    ('"slab"', '"slab"\nvolume = "3 mL"', "sample.volume", "3 mL", "no such key"),
    ('"slab"', '"slab"\ncharge = "3 mg"', "sample.charge", "3 mg", "no such key"),
    (
        '"slab"',
        '"slab"\nactivation_energy = "3 kJ/mol"',
        "sample.activation_energy",
        "3 kJ",
        "[enzyme]",
    ),
    ("[lot]\n", "[lot]\nwet_mass = 1\n", "lot.wet_mass", "wet_mass = 1", "belongs in [sample]"),
    ("[lot]\n", "[lot]\nremaining = 2\n", "lot.remaining", "remaining", "between 0 and 1.5"),
    ("[lot]\n", "[lot]\nid = 7\n", "lot.id", "id = 7", "7 is no text"),
    ("[lot]\n", '[lot]\nid = "  "\n', "lot.id", "id = ", "this is empty"),
    (
        "[lot]\n",
        '[lot]\nconversions = ["1 CDU"]\n',
        "lot.conversions[0]",
        "conversions",
        "1 CDU = 0.011",
    ),
    (
        "[lot]\n",
        '[lot]\nconversions = "1 CDU = 2 U"\n',
        "lot.conversions",
        "conversions",
        "list is wanted",
    ),
    ("[lot]\n", "[lot]\nconversions = [1]\n", "lot.conversions[0]", "conversions", "1 is no text"),
    (
        'label_activity = "280 CDU/mg"',
        "",
        "lot.label_activity",
        "[lot]",
        "steps[2].charge is a mass",
    ),
    (
        "280 CDU/mg",
        "280 WU/mg",
        "lot.label_activity",
        "280 WU",
        "counts enzyme in WU, but this plan",
    ),
    ('"6 mg"', '"6 WU"', "steps[2].charge", '"6 WU"', "never turned into the other"),
    ('charge = "6 mg"', 'ratio = "3 BAEE_U/mg"', "steps[2].ratio", "BAEE", "in BAEE_U"),
    ("ph_low_pka = 6.2\n", "", "enzyme.ph_low_pka", "[enzyme]", "beside the other limb"),
    (
        "ph_low_pka = 6.2",
        "ph_low_pka = 9.2",
        "enzyme.ph_high_pka",
        "ph_high_pka",
        "not above ph_low",
    ),
    (
        "ph_low_pka = 6.2",
        'cofactor = "calcium"\nph_low_pka = 6.2',
        "enzyme.cofactor_half_saturation",
        "[enzyme]",
        "beside cofactor",
    ),
    ('rate_law = "arrhenius"', 'rate_law = "q10"', "enzyme.q10", "[enzyme]", "q10 needs it"),
    (
        'rate_law = "arrhenius"',
        'rate_law = "arrenius"',
        "enzyme.rate_law",
        "arrenius",
        "is arrhenius meant",
    ),
    ('rate_law = "arrhenius"', "q10 = 2", "enzyme.q10", "q10", 'only with rate_law = "q10"'),
    (
        'inactivation_rate = "0.03 1/h"\n',
        "",
        "enzyme.inactivation_rate",
        "[enzyme]",
        "does not die",
    ),
    (
        'inactivation_energy = "230 kJ/mol"\n',
        "",
        "enzyme.inactivation_energy",
        "[enzyme]",
        "needs it",
    ),
    (
        'reference_temperature = "37 degC"\n',
        "",
        "enzyme.reference_temperature",
        "[enzyme]",
        "this is missing",
    ),
    (
        'inactivation = "first_order"',
        'inactivation = "autolysis"',
        "enzyme.autolysis_rate",
        "[enzyme]",
        "autolysis needs it",
    ),
    ('susceptibility = "0.002 g/(CDU h)"', "", "sample.susceptibility", "[sample]", "known_run"),
]

STEPS = [
    ('do = "digest"', 'do = "digestt"', "steps[2].do", "digestt", "is digest meant?"),
    ('do = "digest"', "do = 3", "steps[2].do", "do = 3", "3 is no step"),
    ('do = "digest"\n', "", "steps[2].do", "step 2", "this is missing; write what is done"),
    ('"chelate"', '"shout"', "steps[3].how", "shout", "write chelate, acidify"),
    ('how = "chelate"', 'how = "heat"', "steps[3].temperature", "step 3", "missing with heat"),
    ('concentration = "20 mM"\n', "", "steps[3].concentration", "step 3", "missing with chelate"),
    ('"chelate"', '"inhibit"', "steps[3].agent", "step 3", "missing with inhibit"),
    (
        '"hydrochloric acid"',
        '"hydrochloric acdi"',
        "steps[0].reagent",
        "acdi",
        "is hydrochloric-acid",
    ),
    ('volume = "20 mL"\n', "", "steps[0].volume", "step 0", "this is missing"),
    (
        'volume = "20 mL"',
        'volume = "20 uL"',
        "steps[0].volume",
        "20 uL",
        "less than the piece itself",
    ),
    ('volume = "10 mL"', 'volume = "10 uL"', "steps[1].volume", "10 uL", "cannot cover it"),
    ('"24 h"]', '"6 h"]', "steps[0].changes[1]", '"6 h"]', "not after the change before"),
    ('"24 h"]', '"72 h"]', "steps[0].changes[1]", '"72 h"]', "not before the end of the step"),
    ('["12 h", "24 h"]', '"12 h"', "steps[0].changes", '"12 h"', "no list"),
    (
        "changes =",
        "when_spent = 0.5\nchanges =",
        "steps[0].when_spent",
        "when_spent",
        "keep one of them",
    ),
    ('charge = "6 mg"\n', "", "steps[2].charge", "step 2", "or ratio, or concentration"),
    (
        'charge = "6 mg"',
        'charge = "6 mg"\nratio = "1:50"',
        "steps[2].ratio",
        "1:50",
        "keep one of them",
    ),
    (
        'charge = "6 mg"\nvolume = "3 mL"',
        'concentration = "2 mg/mL"',
        "steps[2].volume",
        "step 2",
        "beside concentration",
    ),
    (
        'for = "5 h" }',
        'over = "5 h" }',
        "steps[2].temperature[2].over",
        '"5 h"',
        "does not go with at",
    ),
    ('for = "5 h" }', 'four = "5 h" }', "steps[2].temperature[2].four", "four", "is for meant"),
    (
        '{ at = "37 degC", for = "5 h" },',
        '"37 degC",',
        "steps[2].temperature[2]",
        '  "37',
        "no stretch of a programme",
    ),
    (
        '"37 degC", for = "5 h"',
        '"37 apples", for = "5 h"',
        "steps[2].temperature[2].at",
        "apples",
        "unknown unit",
    ),
    (
        'after = "3 h"',
        'after = "30 h"',
        "steps[2].additions[0].after",
        '"30 h"',
        "not before the end",
    ),
    (
        'charge = "2 mg" } ]',
        'charge = "2 mL" } ]',
        "steps[2].additions[0].charge",
        '"2 mL"',
        "a volume",
    ),
    (
        ', charge = "2 mg" } ]',
        " } ]",
        "steps[2].additions[0].charge",
        "additions",
        "this is missing",
    ),
    (
        '[ { after = "3 h", charge = "2 mg" } ]',
        '"2 mg"',
        "steps[2].additions",
        "additions",
        "no list",
    ),
    ("ph = 7.5", 'ph_at = "25 degC"', "steps[2].ph_at", "ph_at", "says nothing without ph"),
    ("ph = 7.5", 'buffer = "triss"\nph = 7.5', "steps[2].buffer", "triss", "tris"),
    ("ph = 7.5", 'inhibitor = "1 mM"', "steps[2].inhibitor", "inhibitor", "inhibition_constant"),
    ('for = "9 h"', "", "steps[4].for", "step 4", "with a single temperature"),
    (
        'temperature = "4 degC"\nfor = "9 h"',
        "",
        "steps[4].temperature",
        "step 4",
        "this is missing",
    ),
    (
        '"4 degC"\nfor = "9 h"',
        "[]",
        "steps[4].temperature",
        "temperature = []",
        "this list is empty",
    ),
    (
        '"4 degC"\nfor = "9 h"',
        "{}",
        "steps[4].temperature",
        "temperature = {}",
        "a table stands here",
    ),
]


@pytest.mark.parametrize(("old", "new", "place", "words", "phrase"), VALUES + SHAPES + STEPS)
def test_mistake_is_told_where_it_is(old, new, place, words, phrase):
    """One mistake gives a problem at its place and line that says what is wanted."""
    assert old in PLAN
    text = PLAN.replace(old, new, 1)
    problems = {problem.place: problem for problem in problems_of(text)}
    problem = problems[place]
    assert phrase in problem.message
    assert problem.line == (None if words is None else line_with(text, words))
    assert problem.file == "plan.toml"


def test_message_in_full():
    """A message names file, line, place, what was written, what is wanted and an example."""
    text = PLAN.replace('volume = "3 mL"', 'volume = "3 mg"')
    (problem,) = problems_of(text)
    line = line_with(text, "3 mg")
    said = '"3 mg" is a mass; a volume is wanted here, such as "3 mL"'
    assert str(problem) == f"plan.toml:{line}: steps[2].volume: {said}"
