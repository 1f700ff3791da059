"""From a plan file to a plan: every value right, each with its place, origin and source."""

from dataclasses import fields, is_dataclass
from datetime import datetime
from pathlib import Path

import pytest

from digestplan import library
from digestplan.plan.model import Value
from digestplan.plan.read import parse_plan, read_plan
from digestplan.problems import InputError
from digestplan.quantities import parse_quantity

HERE = Path(__file__).parent
EXPLICIT = (HERE / "explicit.toml").read_text(encoding="utf-8")
CELSIUS = 273.15


@pytest.fixture(scope="module")
def example():
    """The plan that uses nearly every key."""
    return read_plan(HERE / "example.toml")


def values_in(record):
    """Every value in a plan, wherever it is."""
    if isinstance(record, Value):
        yield record
    elif isinstance(record, dict):
        for item in record.values():
            yield from values_in(item)
    elif isinstance(record, tuple):
        for item in record:
            yield from values_in(item)
    elif is_dataclass(record):
        for field in fields(record):
            yield from values_in(getattr(record, field.name))


def written(value):
    """Value, spread, distribution and unit of enzyme."""
    q = value.quantity
    return q.value, q.spread, q.distribution, q.activity


# Worked out by hand from what is written, in K, h, J/mol, mol/L, g, mL, m.
HAND = [
    ("sample.wet_mass", 0.18, 0, "exact", None),
    ("sample.substrate_fraction", 0.30, 0, "exact", None),
    ("sample.thickness", 0.0015, 0, "exact", None),
    ("sample.target_extent", 0.90, 0, "exact", None),
    ("sample.keep_loss_limit", 0.05, 0, "exact", None),
    ("sample.keep_selectivity", 60, 1.5, "lognormal", None),
    ("sample.known_run.ratio", 100_000, 0, "exact", "CDU"),
    ("sample.known_run.temperature", 310.15, 0, "exact", None),
    ("sample.known_run.duration", 4, 0, "exact", None),
    ("sample.known_run.extent", 0.90, 0, "exact", None),
    ("sample.known_run.thickness", 0.001, 0, "exact", None),
    ("sample.known_run.ph", 7.5, 0, "exact", None),
    ("lot.label_activity", 280_000, 0, "exact", "CDU"),
    ("lot.remaining", 0.82, 0.06, "normal", None),
    ("enzyme.reference_temperature", 310.15, 0, "exact", None),
    ("enzyme.activation_energy", 52_000, 6_000, "normal", None),
    ("enzyme.inactivation_rate", 0.03, 1.6, "lognormal", None),
    ("enzyme.inactivation_energy", 230_000, 25_000, "normal", None),
    ("enzyme.saturation_ratio", 400_000, 0, "exact", "CDU"),
    ("enzyme.diffusivity", 3e-11 * 3600, 2, "lognormal", None),
    ("enzyme.ph_low_pka", 6.2, 0, "exact", None),
    ("enzyme.ph_high_pka", 9.0, 0, "exact", None),
    ("enzyme.cofactor_half_saturation", 2e-4, 0, "exact", None),
    ("steps[0].charge", 0.006, 0, "exact", None),
    ("steps[0].volume", 3, 0, "exact", None),
    ("steps[0].buffer_concentration", 0.05, 0, "exact", None),
    ("steps[0].ph", 7.5, 0, "exact", None),
    ("steps[0].ph_at", 298.15, 0, "exact", None),
    ("steps[0].calcium", 0.005, 0, "exact", None),
    ("steps[0].temperature[0].at", 295.15, 0, "exact", None),
    ("steps[0].temperature[1].to", 310.15, 0, "exact", None),
    ("steps[0].temperature[4].at", 277.15, 0, "exact", None),
    ("steps[0].additions[0].charge", 0.002, 0, "exact", None),
]


@pytest.mark.parametrize(("place", "value", "spread", "distribution", "activity"), HAND)
def test_value_of_the_example(example, place, value, spread, distribution, activity):
    """Each value of the example is what a person works out of what is written."""
    found = {item.place: item for item in values_in(example)}[place]
    q = found.quantity
    assert (q.value, q.spread) == pytest.approx((value, spread), rel=1e-12)
    assert (q.distribution, q.activity) == (distribution, activity)
    assert (found.origin, found.source) == ("plan", "written in the plan")


def test_words_of_the_example(example):
    """What is no quantity is as written."""
    assert example.title == "Porpoise tail tendon: collagen for fingerprinting"
    assert example.start == datetime(2026, 3, 12, 17, 30)
    (visit,) = example.visits
    assert visit.start == datetime(2026, 3, 13, 8, 30)
    assert visit.end == datetime(2026, 3, 13, 17)
    assert example.confidence == 0.9
    assert (example.sample.material, example.sample.shape) == ("tendon", "slab")
    assert (example.sample.law, example.sample.law_values) == ("first_order", {})
    assert (example.lot.id, example.activity_unit) == ("CH-2307", "CDU")
    assert example.enzyme.key == "clostridial-collagenase"
    assert (example.enzyme.rate_law, example.enzyme.inactivation) == ("arrhenius", "first_order")
    assert example.enzyme.cofactor == "calcium"


def test_step_of_the_example(example):
    """The programme and the addition are as written."""
    (step,) = example.steps
    assert (step.do, step.charge_as, step.environment.buffer) == ("digest", "charge", "tris")
    assert [stretch.hours for stretch in step.programme] == pytest.approx([1 / 3, 0.25, 5, 0.5, 9])
    assert [stretch.ramp for stretch in step.programme] == [False, True, False, True, False]
    assert [addition.after for addition in step.additions] == [3]
    assert (step.lag, step.start_temperature) == (None, None)


def test_known_run_sets_the_susceptibility(example):
    """Where both are written, the known run counts, and the plan says so."""
    assert example.sample.susceptibility is None
    assert example.sample.known_run is not None
    assert "known run sets the susceptibility" in example.remarks[0]


def test_library_fills_in_what_the_example_leaves_open(example):
    """The only values from the library are those that the example does not write."""
    others = {item.place: item for item in values_in(example) if item.origin == "library"}
    melting = {"melting_rate", "melting_energy", "melting_temperature"}
    assert set(others) == {"sample.density"} | {f"sample.damage.{name}" for name in melting}
    known = library.material("tendon").values["density"]
    assert others["sample.density"].source == known.source
    assert others["sample.density"].quantity == known.quantity


def test_explicit_plan_is_exact_and_takes_nothing_from_the_library():
    """Without library keys nothing comes from the library, and nothing has a spread."""
    plan = parse_plan(EXPLICIT, "explicit.toml")
    values = list(values_in(plan))
    assert {value.origin for value in values} == {"plan", "default"}
    assert {value.quantity.distribution for value in values} == {"exact"}
    assert plan.remarks == ()


def test_defaults_say_that_they_are():
    """What stands in for a value that nobody gave has the origin `default`."""
    plan = parse_plan(EXPLICIT, "explicit.toml")
    defaults = {v.place: v.quantity.value for v in values_in(plan) if v.origin == "default"}
    assert defaults == {"sample.target_extent": 0.9, "lot.remaining": 1, "steps[2].ph_at": 298.15}


def test_all_five_steps():
    """Each kind of step is read with its own keys."""
    demineralise, rinse, digest, stop, hold = parse_plan(EXPLICIT, "explicit.toml").steps
    assert (demineralise.reagent, demineralise.changes) == ("hydrochloric-acid", (12, 24))
    assert written(demineralise.concentration) == (0.5, 0, "exact", None)
    assert (demineralise.closed_vessel, demineralise.stirred) == (False, False)
    assert (rinse.fluid, rinse.exchanges, rinse.each) == ("water", 3, pytest.approx(1 / 3))
    assert digest.environment.buffer is None
    assert (stop.how, stop.agent, stop.hours) == ("chelate", "edta", pytest.approx(1 / 6))
    assert hold.programme[0].temperature.quantity.value == pytest.approx(277.15)
    assert hold.programme[0].hours == 9


MINIMAL = """
digestplan = 1
[sample]
material = "tendon"
wet_mass = "180 mg"
[lot]
enzyme = "clostridial-collagenase"
[[steps]]
do = "digest"
ratio = "100 CDU/mg"
temperature = "37 degC"
for = "4 h"
"""


def test_library_brings_law_known_run_and_kinetics():
    """An enzyme and a material of the library bring all that a plan needs."""
    plan = parse_plan(MINIMAL, "minimal.toml")
    entry = library.known_run("clostridial-collagenase", "tendon")
    assert plan.title == "minimal"
    assert plan.sample.law == library.enzyme("clostridial-collagenase").laws["tendon"]
    assert plan.sample.known_run.ratio.quantity == entry.values["ratio"].quantity
    assert plan.sample.known_run.ratio.place == "sample.known_run.ratio"
    assert plan.sample.known_run.ratio.origin == "library"
    assert plan.enzyme.values["activation_energy"].origin == "library"
    assert plan.activity_unit == "CDU"
    assert "as thick as in the known run" in plan.remarks[0]


def test_plan_overrides_the_library_one_by_one():
    """One value written in the plan replaces that of the library, and no other."""
    text = MINIMAL.replace("[[steps]]", '[enzyme]\nactivation_energy = "50 kJ/mol"\n[[steps]]')
    before, after = parse_plan(MINIMAL, "x").enzyme.values, parse_plan(text, "x").enzyme.values
    assert written(after["activation_energy"]) == (50_000, 0, "exact", None)
    assert after["activation_energy"].origin == "plan"
    assert {k: v for k, v in after.items() if k != "activation_energy"} == {
        k: v for k, v in before.items() if k != "activation_energy"
    }


@pytest.mark.parametrize("enzyme", library.keys("enzyme"))
@pytest.mark.parametrize("material", library.keys("material"))
def test_every_pair_of_the_library(enzyme, material):
    """Each enzyme on each material loads, or says that it has no known run."""
    run = library.known_run(enzyme, material)
    text = MINIMAL.replace("clostridial-collagenase", enzyme).replace('"tendon"', f'"{material}"')
    ratio = "100 CDU/mg" if run is None else run.values["ratio"].quantity.text.split(" x/")[0]
    text = text.replace("100 CDU/mg", ratio.split(" ±")[0])
    text = text.replace(
        "[lot]\n", f'thickness = "1 mm"\n[lot]\nlabel_activity = "9 {unit_of(run)}"\n'
    )
    text = text.replace("for =", 'volume = "9 mL"\nfor =')
    if run is not None:
        plan = parse_plan(text, "pair.toml")
        wanted = library.enzyme(enzyme).diffusivity.get(material)
        assert ("diffusivity" in plan.enzyme.values) == (wanted is not None)
        assert plan.sample.known_run.duration.source == run.source
    else:
        with pytest.raises(
            InputError, match=r"susceptibility: this is missing .*known_run"
        ) as caught:
            parse_plan(text, "pair.toml")
        assert len(caught.value.problems) == 1


def unit_of(run):
    """Unit of a label that fits a known run."""
    unit = None if run is None else run.values["ratio"].quantity.activity
    return "CDU/mg" if unit in (None, "mg") else f"{unit}/mg"


def test_bone_is_met_as_what_is_left_of_it():
    """After a demineralisation the library's known run is that of demineralised bone."""
    step = '[[steps]]\ndo = "demineralise"\nreagent = "edta"\nconcentration = "10 %"\n'
    step += 'volume = "20 mL"\nph = 7.4\ntemperature = "20 degC"\nfor = "3 d"\n[[steps]]\n'
    text = MINIMAL.replace('"tendon"', '"bone"\nthickness = "2 mm"').replace("[[steps]]\n", step)
    plan = parse_plan(text, "bone.toml")
    entry = library.known_run("clostridial-collagenase", "demineralised-bone")
    assert plan.sample.known_run.duration.quantity == entry.values["duration"].quantity
    with pytest.raises(InputError, match="demineralise it first"):
        parse_plan(MINIMAL.replace('"tendon"', '"bone"'), "bone.toml")


def test_no_thickness_no_depth():
    """The library's diffusivity counts only where the piece has a thickness; the plan says so."""
    text = MINIMAL.replace("clostridial-collagenase", "trypsin").replace('"180 mg"', '"1 g"')
    text = text.replace("100 CDU/mg", "1:50").replace("for =", 'volume = "9 mL"\nfor =')
    without = parse_plan(text, "x")
    assert "diffusivity" not in without.enzyme.values
    assert "reach all of it at once" in without.remarks[-1]
    within = parse_plan(text.replace("[lot]", 'thickness = "1 mm"\n[lot]'), "x")
    known = library.enzyme("trypsin").diffusivity["tendon"]
    assert within.enzyme.values["diffusivity"].quantity == known.quantity


LAWS = [
    ("law", "two_pool", 'fast_fraction = 0.7\nslow_susceptibility = "0.0002 g/(CDU h)"'),
    ("law", "stretched", 'exponent = "0.8 ± 0.05"'),
    ("law", "michaelis_menten", 'half_saturation = "2 mM"\ninitial = "5 mM"'),
    ("law", "michaelis_menten", 'half_saturation = "2 mg/mL"\ninitial = "5 mg/mL"'),
    ("law", "erosion", ""),
]


@pytest.mark.parametrize(("key", "law", "lines"), LAWS)
def test_extent_laws_take_their_own_values(key, law, lines):
    """Each extent law is read with the values that it takes."""
    plan = parse_plan(EXPLICIT.replace('law = "first_order"', f'{key} = "{law}"\n{lines}'), "x")
    assert plan.sample.law == law
    assert [f"{name} = " in lines for name in plan.sample.law_values] == [True] * lines.count("=")


SECOND = """\
intermediate_activity = 0.4
second_inactivation_rate = "0.01 1/h"
second_inactivation_energy = "200 kJ/mol"
"""
EQUILIBRIUM = """\
activation_energy = "0 kJ/mol"
equilibrium_temperature = "51 degC"
equilibrium_enthalpy = "140 kJ/mol"
"""
RATE_LAWS = [
    ("eyring", 'activation_energy = "52 kJ/mol"', 1),
    ("q10", "q10 = 2.1", 1),
    ("mmrt", 'activation_energy = "52 kJ/mol"\nheat_capacity_change = "-4 kJ/(mol K)"', 2),
    ("equilibrium", EQUILIBRIUM, 3),
]


@pytest.mark.parametrize(("law", "lines", "count"), RATE_LAWS)
def test_rate_laws_take_their_own_values(law, lines, count):
    """Each rate law is read with the values that it takes."""
    text = EXPLICIT.replace('activation_energy = "52 kJ/mol"', lines)
    plan = parse_plan(text.replace('rate_law = "arrhenius"', f'rate_law = "{law}"'), "x")
    assert plan.enzyme.rate_law == law
    assert sum(f"\n{name} =" in f"\n{lines}" for name in plan.enzyme.values) == count


INACTIVATIONS = [
    ("two_stage", SECOND, 3),
    ("two_stage", 'intermediate_activity = 0.4\nsecond_inactivation_rate = "0 1/h"', 2),
    ("autolysis", 'autolysis_rate = "0.05 mL/(mg h)"\nautolysis_energy = "60 kJ/mol"', 2),
]


@pytest.mark.parametrize(("law", "lines", "count"), INACTIVATIONS)
def test_inactivation_laws_take_their_own_values(law, lines, count):
    """Each inactivation law is read with the values that it takes; no energy beside a rate of 0."""
    text = EXPLICIT.replace('inactivation = "first_order"', f'inactivation = "{law}"\n{lines}')
    plan = parse_plan(text, "x")
    assert plan.enzyme.inactivation == law
    assert sum(f"\n{name} =" in f"\n{lines}" for name in plan.enzyme.values) == count


@pytest.mark.parametrize("text", ["1:50", "2 %", "20 mg/g"])
def test_count_by_mass_needs_no_label(text):
    """A known run by mass counts enzyme in mg, and a mass is charged without a label activity."""
    run = f'[sample.known_run]\nratio = "{text}"\ntemperature = "37 degC"\nduration = "4 h"\n'
    plan = EXPLICIT.replace('susceptibility = "0.002 g/(CDU h)"\n', f"{run}extent = 0.9\n")
    for lot in ("", 'label_activity = "280 CDU/mg"'):
        read = parse_plan(plan.replace('label_activity = "280 CDU/mg"', lot), "x")
        assert read.activity_unit == "mg"
        assert read.lot.label_activity is None
        assert written(read.sample.known_run.ratio) == (pytest.approx(20), 0, "exact", "mg")


def test_certificate_turns_one_unit_into_another():
    """With the factor of the certificate every value comes in the unit of the plan."""
    text = EXPLICIT.replace("280 CDU/mg", "3 FALGPA_U/mg ± 0.3 FALGPA_U/mg")
    text = text.replace("[enzyme]", 'conversions = ["1 CDU = 0.01 FALGPA_U"]\n[enzyme]')
    text = text.replace("ph_low_pka", 'saturation_ratio = "4 FALGPA_U/mg"\nph_low_pka')
    text = text.replace('charge = "6 mg"', 'charge = "10 FALGPA_U x/ 1.1"')
    text = text.replace('law = "first_order"', 'law = "two_pool"\nfast_fraction = 0.7')
    text = text.replace("fast_fr", 'slow_susceptibility = "0.02 g/(FALGPA_U h)"\nfast_fr')
    plan = parse_plan(text, "x")
    assert written(plan.lot.label_activity) == (*approx(300_000, 30_000), "normal", "CDU")
    assert written(plan.enzyme.values["saturation_ratio"]) == (*approx(400_000, 0), "exact", "CDU")
    assert written(plan.steps[2].charge) == (*approx(1000, 1.1), "lognormal", "CDU")
    slow = plan.sample.law_values["slow_susceptibility"]
    assert written(slow) == (*approx(0.0002, 0), "exact", "CDU")
    assert plan.lot.conversions["FALGPA_U", "CDU"] == pytest.approx(100)


def approx(*numbers):
    """Numbers as good as floats can be."""
    return tuple(pytest.approx(number, rel=1e-12) for number in numbers)


def test_saturation_ratio_of_the_library_in_another_unit_is_left_out():
    """What cannot be brought to the unit of the plan does not act, and the plan says so."""
    run = '[sample.known_run]\nratio = "1:50"\ntemperature = "37 degC"\nduration = "4 h"\n'
    text = MINIMAL.replace("[lot]", f"{run}extent = 0.9\n[lot]").replace("100 CDU/mg", "1:40")
    plan = parse_plan(text, "x")
    assert "saturation_ratio" in library.enzyme("clostridial-collagenase").values
    assert "saturation_ratio" not in plan.enzyme.values
    assert "is left out" in plan.remarks[0]


def test_moved_reference_temperature_is_refused():
    """Rates of the library hold at its own reference temperature and are not moved silently."""
    text = MINIMAL.replace("[[steps]]", '[enzyme]\nreference_temperature = "25 degC"\n[[steps]]')
    with pytest.raises(InputError, match="inactivation_rate hold at 37 °C"):
        parse_plan(text, "x")
    same = text.replace("25 degC", "310.15 K")
    assert parse_plan(same, "x").enzyme.values["reference_temperature"].origin == "plan"


@pytest.mark.parametrize(
    ("old", "new", "near"),
    [
        ("clostridial-collagenase", "clostridial-colagenase", "clostridial-collagenase"),
        ("clostridial-collagenase", "collagenase", "clostridial-collagenase"),
        ('"tendon"', '"tendons"', "tendon"),
        ("clostridial-collagenase", "xyz", "trypsin"),
    ],
)
def test_unknown_library_key_gets_near_ones_and_nothing_else(old, new, near):
    """An unknown key is told with near ones, and what it may have brought is not missed as well."""
    with pytest.raises(InputError) as caught:
        parse_plan(MINIMAL.replace(old, new), "x")
    (problem,) = caught.value.problems
    assert near in problem.message


def test_wet_mass_may_be_left_out_where_only_ratios_count():
    """With ratios alone the amounts are for 1 g, and say that they are assumed."""
    plan = parse_plan(MINIMAL.replace('wet_mass = "180 mg"\n', ""), "x")
    assert plan.sample.wet_mass.quantity == parse_quantity("1 g", "mass")
    assert plan.sample.wet_mass.origin == "default"


def test_ramp_without_a_beginning_is_refused():
    """A ramp that comes first needs a temperature to start from."""
    single = 'temperature = "37 degC"\nfor = "4 h"'
    ramp = 'temperature = [{ to = "37 degC", over = "4 h" }]'
    text = MINIMAL.replace(single, ramp)
    with pytest.raises(InputError, match=r"steps\[0\]\.temperature\[0\]: nothing says from which"):
        parse_plan(text, "x")
    plan = parse_plan(text + 'start_temperature = "22 degC"\n', "x")
    assert plan.steps[0].start_temperature.quantity.value == pytest.approx(22 + CELSIUS)


@pytest.mark.parametrize(
    ("first", "phrase"),
    [
        ('do = "hold"\ntemperature = "4 degC"\nfor = "1 h"', "nothing to hold"),
        ('do = "stop"\nhow = "chelate"\nconcentration = "20 mM"', "nothing to stop"),
    ],
)
def test_step_in_an_impossible_place(first, phrase):
    """Nothing can be held or stopped before anything is there."""
    with pytest.raises(InputError, match=phrase):
        parse_plan(MINIMAL.replace("[[steps]]", f"[[steps]]\n{first}\n[[steps]]"), "x")


def test_whole_plan_ends_within_ten_years():
    """Steps that each are short enough may be too long together."""
    hold = '[[steps]]\ndo = "hold"\ntemperature = "4 degC"\nfor = "6 yr"\n'
    assert len(parse_plan(MINIMAL + hold, "x").steps) == 2
    with pytest.raises(InputError, match="more than ten years"):
        parse_plan(MINIMAL + hold + hold, "x")


KNOWN = """
[sample.known_demineralisation]
reagent = "edta"
concentration = "10 %"
temperature = "20 degC"
duration = "3 d"
extent = 0.95
thickness = "2 mm"
"""


def test_known_demineralisation_is_of_the_same_reagent():
    """A demineralisation proven in the lab is read, and must be with what the plan works with."""
    text = EXPLICIT.replace("[lot]", f"{KNOWN}[lot]")
    with pytest.raises(
        InputError, match=r"known_demineralisation\.reagent: .*says nothing of hydro"
    ):
        parse_plan(text, "x")
    run = parse_plan(text.replace('"edta"', '"hydrochloric acid"'), "x").sample
    assert run.known_demineralisation["reagent"] == "hydrochloric-acid"
    assert written(run.known_demineralisation["duration"]) == (72, 0, "exact", None)
    assert written(run.known_demineralisation["concentration"]) == (*approx(0.1, 0), "exact", "w/v")
    assert "ph" not in run.known_demineralisation


@pytest.mark.parametrize(
    ("lines", "names"),
    [
        (
            'melting_enthalpy = "590 kJ/mol"\nmelting_entropy = "1.46 kJ/(mol K)"',
            ["melting_enthalpy", "melting_entropy"],
        ),
        (
            'melting_rate = "1 1/h"\nmelting_energy = "5e5 J/mol"\nmelting_temperature = "60 C"',
            ["melting_rate", "melting_energy", "melting_temperature"],
        ),
    ],
)
def test_damage_of_the_plan_replaces_that_of_the_library(lines, names):
    """What the plan writes of heat damage stands in place of all that the library knows."""
    damage = parse_plan(
        MINIMAL.replace("[lot]", f"[sample.damage]\n{lines}\n[lot]"), "x"
    ).sample.damage
    assert list(damage) == names
    assert {value.origin for value in damage.values()} == {"plan"}


def test_half_a_damage_is_refused():
    """Both ways of stating heat damage need all of their values, and do not mix."""
    for lines, phrase in (
        ('melting_rate = "1 1/h"', "melting_energy: this is missing beside the others"),
        (
            'melting_rate = "1 1/h"\nmelting_entropy = "1 J/(mol K)"',
            "write either melting_enthalpy",
        ),
        ("", "melting_enthalpy: this is missing"),
    ):
        with pytest.raises(InputError) as caught:
            parse_plan(MINIMAL.replace("[lot]", f"[sample.damage]\n{lines}\n[lot]"), "x")
        assert phrase in str(caught.value)


def test_rinse_without_thickness_is_told():
    """A rinse of a piece of unknown thickness loads, and the plan says what is assumed."""
    rinse = 'do = "rinse"\nvolume = "5 mL"\nexchanges = 3\neach = "20 min"\n'
    plan = parse_plan(MINIMAL.replace("[[steps]]\n", f"[[steps]]\n{rinse}[[steps]]\n"), "x")
    assert "a rinse is taken to reach all" in plan.remarks[-1]
    assert (plan.steps[0].fluid, plan.steps[0].temperature.origin) == ("water", "default")
