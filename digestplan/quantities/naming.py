"""What a message calls a unit that is of another kind than the one that is wanted."""

from digestplan.quantities.kinds import KINDS, Form
from digestplan.quantities.units import Unit, resolve

# Kinds whose words say what a dimension is, the plainest first.
_TELLING = (
    *("mass", "volume", "length", "time", "temperature", "molar_concentration"),
    *("mass_concentration", "energy", "entropy", "rate", "diffusivity", "velocity", "molar_mass"),
    *("extinction", "charge", "activity", "enzyme_concentration", "dose", "susceptibility"),
    *("autolysis_rate", "ratio"),
)
_OTHERS = {
    "mol": "an amount of substance",
    "m**2": "an area",
    "J": "an energy",
    "mol/h": "a rate of turnover (1 µmol/min is written 1 U)",
    "mol/(g h)": "a rate of turnover per mass (1 µmol/min is written 1 U)",
    "mol/(mL h)": "a rate of turnover per volume (1 µmol/min is written 1 U)",
    "mol/g": "an amount of substance per mass",
    "g/h": "a mass per time",
    "mL/h": "a flow",
    "mL/g": "a volume per mass",
    "K/h": "a change of temperature per time",
}


def named(unit: Unit) -> str | None:
    """
    Return what a unit measures, in words with their article.

    Parameters
    ----------
    unit
        A resolved unit.

    Returns
    -------
    words
        Such as ``a mass``; None where no word is known.
    """
    for name in _TELLING:
        if any(_answers(unit, form) for form in KINDS[name].forms):
            return KINDS[name].words
    for text, words in _OTHERS.items():
        if resolve(text).dimensions == unit.dimensions:
            return words
    return "a plain number" if not unit.dimensions else None


def _answers(unit: Unit, form: Form) -> bool:
    assay = unit.assay
    if ("{}" in form.unit) != (assay is not None) or (form.by_mass and not unit.has_mass):
        return False
    return resolve(form.unit.format(assay)).dimensions == unit.dimensions
