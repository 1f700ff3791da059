"""The keys of a plan file outside its steps: the plan itself, sample, lot and enzyme."""

from digestplan.plan.field import INACTIVATIONS, LAWS, RATE_LAWS, SHAPES, Field, part
from digestplan.plan.step_fields import ENVIRONMENT

_PLAN = (
    Field("digestplan", "whole", "Version of this format", "1", required=True),
    Field("title", "text", "What the plan is about", '"Porpoise tail tendon"'),
    Field("notes", "text", "Anything worth keeping with the plan", '"second attempt"'),
    Field(
        "start",
        "moment",
        "Local wall-clock time at which the first step starts",
        "2026-03-12T17:30:00",
    ),
    Field(
        "visits",
        "texts",
        "When someone is at the bench, as ISO 8601 intervals of local time; needs `start`",
        '["2026-03-13T08:30 / 2026-03-13T17:00"]',
    ),
    Field(
        "confidence",
        "fraction",
        "How sure “ready” and “too far” must be",
        "0.9",
        default="0.9",
        above=0.5,
        below=1.0,
        exact=True,
    ),
    Field("sample", "table", "The piece of tissue", "", required=True),
    Field("lot", "table", "The bottle of enzyme", ""),
    Field("bench", "table", "What the lab has, for suggestions that are to come", ""),
    Field("enzyme", "table", "Kinetics that override the library's one by one", ""),
    Field("steps", "tables", "The treatment, in the order in which it is done", "", required=True),
)

_SAMPLE = (
    Field("material", "text", "The tissue, by its key in the library", '"tendon"'),
    Field(
        "wet_mass",
        "mass",
        "Mass of the piece, wet; needed unless every charge is a ratio",
        '"180 mg"',
        above=0.0,
    ),
    Field(
        "substrate_fraction",
        "fraction",
        "Mass of the matrix to be digested per wet mass; the library's for its materials, else"
        " needed unless every charge is a ratio",
        '"0.30"',
        above=0.0,
        most=1.0,
    ),
    Field(
        "shape",
        "choice",
        "The form nearest to the piece",
        '"slab"',
        default="slab",
        choices=SHAPES,
    ),
    Field(
        "thickness",
        "length",
        "Full thickness of a slab, diameter of a cylinder or a sphere; needed where depth counts",
        '"1.5 mm"',
        above=0.0,
    ),
    part(
        "target_extent",
        "Fraction of the matrix to be removed; left out, the library's for the material, else 0.9",
        "0.90",
    ),
    part(
        "keep_loss_limit",
        "How much of what must be kept may be lost; left out, the library's for the material, else"
        " nothing is too far",
        "0.05",
    ),
    Field(
        "keep_selectivity",
        "positive_number",
        "Susceptibility of the target over that of what must be kept; left out, the library's for"
        " the material, else the enzyme leaves it alone",
        '"60 x/ 1.5"',
        above=0.0,
    ),
    Field(
        "law",
        "choice",
        "How the extent answers to the dose; left out, the library's for the enzyme on the"
        " material, else `first_order`",
        '"first_order"',
        choices=LAWS,
    ),
    Field(
        "susceptibility",
        "susceptibility",
        "Rate per dose at the reference temperature, optimum pH and saturating cofactor; set aside"
        " where a known run sets it; left out, the library's known run for enzyme and material",
        '"0.002 g/(CDU h)"',
        above=0.0,
    ),
    Field(
        "exponent",
        "positive_number",
        "`stretched`: the exponent of the scaled dose",
        "0.8",
        above=0.0,
        most=10.0,
    ),
    part("fast_fraction", "`two_pool`: the share that gives way at `susceptibility`", "0.7"),
    Field(
        "slow_susceptibility",
        "susceptibility",
        "`two_pool`: the susceptibility of the rest",
        '"0.0002 g/(CDU h)"',
    ),
    Field(
        "half_saturation",
        "substrate_concentration",
        "`michaelis_menten`: substrate at which the rate is half its greatest",
        '"2 mM"',
        above=0.0,
    ),
    Field(
        "initial",
        "substrate_concentration",
        "`michaelis_menten`: substrate at the start",
        '"5 mM"',
        above=0.0,
    ),
    Field("mineral_fraction", "fraction", "Mass of mineral per wet mass", '"0.58"', below=1.0),
    Field("density", "density", "Density of the wet piece", '"1.92 g/mL"', above=0.0),
    Field("known_run", "table", "A digestion proven in this lab; sets the susceptibility", ""),
    Field("known_demineralisation", "table", "A demineralisation proven in this lab", ""),
    Field("damage", "table", "How heat destroys what must be kept", ""),
)

_KNOWN_RUN = (
    Field(
        "ratio", "ratio", "Active enzyme per substrate", '"100 CDU/mg"', required=True, above=0.0
    ),
    Field("temperature", "temperature", "Temperature", '"37 degC"', required=True),
    Field("duration", "time", "How long it took", '"4 h"', required=True, above=0.0),
    part("extent", "The extent that it reached", "0.90", required=True),
    Field("thickness", "length", "Thickness of the pieces", '"1 mm"', above=0.0),
    *ENVIRONMENT,
)

_KNOWN_DEMINERALISATION = (
    Field("reagent", "text", "The reagent, by its key in the library", '"edta"', required=True),
    Field(
        "concentration",
        "reagent_concentration",
        "Its concentration",
        '"0.5 M"',
        required=True,
        above=0.0,
    ),
    Field("temperature", "temperature", "Temperature", '"20 degC"', required=True),
    Field("duration", "time", "How long it took", '"72 h"', required=True, above=0.0),
    part("extent", "The fraction of the mineral that was removed", "0.95", required=True),
    Field("thickness", "length", "Thickness of the pieces", '"2 mm"', required=True, above=0.0),
    Field("ph", "ph", "pH of the bath", "7.4"),
)

_DAMAGE = (
    Field("melting_enthalpy", "energy", "Eyring: activation enthalpy of melting", '"590 kJ/mol"'),
    Field(
        "melting_entropy", "entropy", "Eyring: activation entropy of melting", '"1.46 kJ/(mol K)"'
    ),
    Field(
        "melting_rate", "rate", "Arrhenius: rate of melting at `melting_temperature`", '"0.1 1/h"'
    ),
    Field("melting_energy", "energy", "Arrhenius: its activation energy", '"520 kJ/mol"'),
    Field(
        "melting_temperature",
        "temperature",
        "Arrhenius: the temperature of `melting_rate`",
        '"56 degC"',
    ),
)

_LOT = (
    Field("enzyme", "text", "The enzyme, by its key in the library", '"clostridial-collagenase"'),
    Field("id", "text", "The lot's name in the register of lots", '"CH-2307"'),
    Field(
        "label_activity",
        "activity",
        "Activity on the label, per mass of enzyme; needed where a mass is charged and doses are"
        " in activity units",
        '"280 CDU/mg"',
        above=0.0,
    ),
    Field(
        "remaining",
        "active_fraction",
        "Active fraction of the label today; left out, the register's answer for `id`, else 1",
        '"0.82 ± 0.06"',
        default="1",
        above=0.0,
    ),
    Field(
        "conversions",
        "texts",
        "Factors between assay units, from the lot's own certificate",
        '["1 CDU = 0.011 FALGPA_U"]',
    ),
)

_ENZYME = (
    Field("name", "text", "What the enzyme is called, where the library has none", '"protease X"'),
    Field(
        "reference_temperature",
        "temperature",
        "Temperature at which the rates of this section hold",
        '"37 degC"',
        exact=True,
    ),
    Field(
        "rate_law",
        "choice",
        "How the rate follows temperature; left out, the library's, else `arrhenius`",
        '"arrhenius"',
        choices=RATE_LAWS,
    ),
    Field(
        "activation_energy",
        "energy",
        "Activation energy (`arrhenius`, `equilibrium`) or enthalpy (`eyring`, `mmrt`) of the rate",
        '"52 kJ/mol ± 6 kJ/mol"',
    ),
    Field("q10", "positive_number", "`q10`: factor of the rate a ten degrees", "2.0", above=0.0),
    Field(
        "heat_capacity_change",
        "heat_capacity",
        "`mmrt`: change of heat capacity on activation",
        '"-4 kJ/(mol K)"',
    ),
    Field(
        "equilibrium_temperature",
        "temperature",
        "`equilibrium`: where half of the enzyme is in the inactive form",
        '"51 degC"',
    ),
    Field(
        "equilibrium_enthalpy",
        "energy",
        "`equilibrium`: enthalpy of the change to the inactive form",
        '"140 kJ/mol"',
    ),
    Field(
        "inactivation",
        "choice",
        "How the enzyme dies; left out, the library's, else `first_order`",
        '"first_order"',
        choices=INACTIVATIONS,
    ),
    Field(
        "inactivation_rate",
        "rate",
        'Rate of loss at the reference temperature; "0 1/h" for none',
        '"0.03 1/h x/ 1.6"',
    ),
    Field(
        "inactivation_energy",
        "energy",
        "Activation energy of the loss",
        '"230 kJ/mol ± 25 kJ/mol"',
    ),
    Field(
        "intermediate_activity",
        "fraction",
        "`two_stage`: activity of the intermediate, relative to the fresh enzyme",
        "0.4",
    ),
    Field(
        "second_inactivation_rate",
        "rate",
        "`two_stage`: rate at which the intermediate dies, at the reference temperature",
        '"0.01 1/h"',
    ),
    Field(
        "second_inactivation_energy",
        "energy",
        "`two_stage`: its activation energy",
        '"200 kJ/mol"',
    ),
    Field(
        "autolysis_rate",
        "autolysis_rate",
        "`autolysis`: rate a mg/mL of active enzyme, at the reference temperature",
        '"0.05 mL/(mg h)"',
    ),
    Field("autolysis_energy", "energy", "`autolysis`: its activation energy", '"60 kJ/mol"'),
    Field(
        "saturation_ratio",
        "ratio",
        "Enzyme per substrate at which the surface is half saturated; left out, it never is",
        '"400 CDU/mg"',
        above=0.0,
    ),
    Field(
        "diffusivity",
        "diffusivity",
        "Of the enzyme in the tissue, at the reference temperature; left out, no delay of"
        " penetration unless the library knows one",
        '"3e-11 m**2/s x/ 2"',
        above=0.0,
    ),
    Field("ph_low_pka", "ph", "Acid limb of the pH profile", "6.2"),
    Field("ph_high_pka", "ph", "Alkaline limb of the pH profile", "9.0"),
    Field("cofactor", "text", "What the enzyme needs in its liquid", '"calcium"'),
    Field(
        "cofactor_half_saturation",
        "molar_concentration",
        "Free cofactor at which the rate is half",
        '"0.2 mM"',
        above=0.0,
    ),
    Field(
        "inhibition_constant",
        "molar_concentration",
        "Inhibitor at which the rate is half",
        '"0.1 mM"',
        above=0.0,
    ),
)

_BENCH = (
    Field(
        "incubators",
        "temperatures",
        "Temperatures that there are; left out, any from 4 to 65 °C",
        '["4 degC", "37 ± 0.5 degC", "56 degC"]',
    ),
    Field("most_charge", "mass", "The most enzyme for one digest", '"20 mg"', above=0.0),
    Field("stock", "mass", "What there is of the lot", '"50 mg"', above=0.0),
    Field(
        "programmable",
        "flag",
        "Whether a bath can be programmed to cool by itself",
        "false",
        default="true",
    ),
)

SAMPLE_SECTIONS = {
    "": _PLAN,
    "sample": _SAMPLE,
    "sample.known_run": _KNOWN_RUN,
    "sample.known_demineralisation": _KNOWN_DEMINERALISATION,
    "sample.damage": _DAMAGE,
    "lot": _LOT,
    "enzyme": _ENZYME,
    "bench": _BENCH,
}
