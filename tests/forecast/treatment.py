"""Treatments as a user writes them, for the tests of the steps around a digest."""

from functools import cache

from digestplan.forecast.run import forecast
from digestplan.plan.read import parse_plan

HEAD = """
digestplan = 1
[sample]
material = "{material}"
wet_mass = "{wet}"
shape = "{shape}"
thickness = "{thickness}"
{sample}
[lot]
enzyme = "{enzyme}"
label_activity = "280 {unit}/mg"
"""
UNITS = {"clostridial-collagenase": "CDU", "trypsin": "BAEE_U", "pepsin": "PEP_U"}


def plan(
    *steps,
    material="bone",
    wet="100 mg",
    shape="slab",
    thickness="1 mm",
    sample="",
    enzyme="clostridial-collagenase",
):
    """A plan of these steps; a step is written as `do` and its other lines."""
    head = HEAD.format(
        material=material,
        wet=wet,
        shape=shape,
        thickness=thickness,
        sample=sample,
        enzyme=enzyme,
        unit=UNITS.get(enzyme, "U"),
    )
    return "\n".join([head, *steps])


def step(do, **lines):
    """One step; `for_` stands for `for`, text is quoted, what is no text is written as it is."""
    written = [f'[[steps]]\ndo = "{do}"']
    for key, value in lines.items():
        said = f'"{value}"' if isinstance(value, str) else str(value).replace("'", '"')
        written.append(f"{key.rstrip('_')} = {said.lower() if isinstance(value, bool) else said}")
    return "\n".join(written)


def bath(reagent, concentration, celsius, hours, **lines):
    """A demineralisation; by default in so much bath that it is never spent."""
    given = {"volume": "1 L", **lines}
    return step(
        "demineralise",
        reagent=reagent,
        concentration=concentration,
        temperature=f"{celsius} degC",
        for_=f"{hours} h",
        **given,
    )


def rinse(exchanges=3, each="1 h", volume="10 mL", fluid="water", temperature="20 degC"):
    """A rinse."""
    given = {"each": each, "volume": volume, "fluid": fluid, "temperature": temperature}
    return step("rinse", exchanges=exchanges, **given)


def digest(celsius=37, hours=16, ratio="40 CDU/mg", **lines):
    """A digest; of collagenase in Tris with calcium unless told otherwise."""
    given = {"buffer": "tris", "ph": 7.5, "calcium": "5 mM", "volume": "3 mL", **lines}
    given = {key: value for key, value in given.items() if value is not None}
    return step("digest", ratio=ratio, temperature=f"{celsius} degC", for_=f"{hours} h", **given)


@cache
def forecast_of(text, n_draws=2000):
    """The forecast of a plan, made once."""
    return forecast(parse_plan(text, "plan.toml"), n_draws=n_draws)


def codes(text):
    """Codes of the cautions of a plan."""
    return {caution.code for caution in forecast_of(text, 200).cautions}


def within(spread, value):
    """Whether a value lies within the 5 to 95 % that a forecast states."""
    return spread.p05 <= value <= spread.p95
