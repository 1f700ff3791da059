"""The kinds of value that a plan, a form or a command line may ask for.

One table: what a kind is called, which units it takes, between which bounds it makes sense, and
how it is printed. In the units of a form ``{}`` stands for the unit in which enzyme is counted.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import inf
from types import MappingProxyType
from typing import Literal

_ZERO_CELSIUS = 273.15
_ASSAY = "{}"


@dataclass(frozen=True, slots=True)
class Form:
    """
    One way to give a kind, by its dimension.

    Attributes
    ----------
    unit
        The core unit, into which values are turned.
    activity
        What `Quantity.activity` becomes: None, ``mg``, ``w/v``, or ``{}`` for the assay unit.
    shown
        Units in which a value is printed, the first that gives a readable number.
    also
        Further units in which a value may be told beside what was written.
    by_mass
        Whether only a unit in which masses stand will do, such as ``mg/g`` but not ``mL/mL``.
    """

    unit: str
    shown: tuple[str, ...]
    also: tuple[str, ...] = ()
    activity: str | None = None
    by_mass: bool = False


@dataclass(frozen=True, slots=True)
class Kind:
    """
    A kind of value.

    Attributes
    ----------
    name
        How the code calls it.
    words
        How a message calls it, with its article.
    example
        A value as it may be written.
    forms
        The dimensions it may have; none for a bare number.
    low, high
        Bounds in the core unit. [core unit]
    low_inclusive, high_inclusive
        Whether the bounds themselves are allowed.
    bounds
        The bounds as a message tells them.
    bare
        Whether a number without a unit is a value.
    percent
        What "%" alone means: ``w/w`` (or any plain share), ``w/v``, or None where it is refused.
    scale
        ``ratio`` where zero means nothing at all, so that a factor of spread makes sense;
        ``interval`` where it does not; ``whole`` for a count, which has no spread.
    """

    name: str
    words: str
    example: str
    forms: tuple[Form, ...] = ()
    low: float = 0.0
    high: float = inf
    low_inclusive: bool = True
    high_inclusive: bool = True
    bounds: str = ""
    bare: bool = False
    percent: Literal["w/w", "w/v"] | None = None
    scale: Literal["ratio", "interval", "whole"] = "ratio"
    display: tuple[str, ...] = field(init=False)

    def __post_init__(self) -> None:
        units = (unit for form in self.forms for unit in (*form.shown, *form.also))
        object.__setattr__(self, "display", tuple(dict.fromkeys(units)))

    @property
    def core_unit(self) -> str:
        """The core unit of its first form; empty for a bare number."""
        return self.forms[0].unit if self.forms else ""

    @property
    def wanted(self) -> str:
        """The end of a message: what is wanted, with an example."""
        example = self.example if self.bare else f'"{self.example}"'
        return f"{self.words} is wanted here, such as {example}"

    def allows(self, value: float) -> bool:
        """Whether a value in the core unit is within the bounds."""
        above = value >= self.low if self.low_inclusive else value > self.low
        below = value <= self.high if self.high_inclusive else value < self.high
        return above and below


def _positive(name: str, words: str, example: str, *forms: Form) -> Kind:
    return Kind(name, words, example, forms, low_inclusive=False)


def _signed(name: str, words: str, example: str, *forms: Form) -> Kind:
    return Kind(name, words, example, forms, low=-inf)


_CONCENTRATION = Form("mol/L", ("M", "mM", "µM", "nM"), ("mol/L", "mmol/L"))
_WEIGHT_PER_VOLUME = Form("g/mL", ("% w/v",), ("mg/mL", "g/L"), activity="w/v")
_ENTROPY = Form("J/(mol K)", ("J/(mol K)", "kJ/(mol K)"), ("cal/(mol K)",))
_ENERGY = Form("J/mol", ("kJ/mol", "J/mol"), ("kcal/mol",))

_PHYSICAL = (
    Kind(
        "temperature",
        "a temperature",
        "37 degC",
        (Form("K", ("°C",), ("K",)),),
        low=0.0,
        high=_ZERO_CELSIUS + 200.0,
        low_inclusive=False,
        bounds="between absolute zero and 200 °C",
        scale="interval",
    ),
    Kind(
        "temperature_difference",
        "a difference of temperature",
        "0.5 K",
        (Form("K", ("K",), ("°C",)),),
        low=-500.0,
        high=500.0,
        bounds="between -500 K and 500 K",
        scale="interval",
    ),
    Kind("time", "a time", "90 min", (Form("h", ("h", "min", "s"), ("d",)),)),
    _positive("mass", "a mass", "180 mg", Form("g", ("g", "mg", "µg", "ng"), ("kg",))),
    _positive("volume", "a volume", "3 mL", Form("mL", ("mL", "µL", "L", "nL"))),
    _positive("length", "a length", "1.5 mm", Form("m", ("mm", "µm", "m", "nm"), ("cm",))),
    Kind("molar_concentration", "a molar concentration", "5 mM", (_CONCENTRATION,)),
    Kind(
        "mass_concentration",
        "a mass concentration",
        "0.5 mg/mL",
        (Form("g/mL", ("g/mL", "mg/mL", "µg/mL", "ng/mL"), ("g/L",)),),
    ),
    _positive("density", "a density", "1.92 g/mL", Form("g/mL", ("g/mL",), ("kg/m**3",))),
    Kind("energy", "a molar energy", "52 kJ/mol", (_ENERGY,)),
    _signed("enthalpy", "a molar enthalpy", "47 kJ/mol", _ENERGY),
    _signed("entropy", "a molar entropy", "1.46 kJ/(mol K)", _ENTROPY),
    _signed("heat_capacity", "a molar heat capacity", "-4 kJ/(mol K)", _ENTROPY),
    Kind("rate", "a rate", "0.03 1/h", (Form("1/h", ("1/h",), ("1/min", "1/s", "1/d")),)),
    _positive(
        "diffusivity",
        "a diffusivity",
        "3e-11 m**2/s",
        Form("m**2/h", ("m²/s",), ("µm²/s", "cm²/s", "mm²/h")),
    ),
    Kind(
        "velocity",
        "a velocity",
        "2 µm/s",
        (Form("m/h", ("m/h", "mm/h", "µm/h"), ("µm/s", "cm/s", "m/s")),),
    ),
    _positive("molar_mass", "a molar mass", "23.3 kDa", Form("g/mol", ("g/mol",), ("kDa",))),
    _positive(
        "extinction",
        "a molar extinction coefficient",
        "9600 L/(mol cm)",
        Form("L/(mol cm)", ("1/(M cm)",), ("1/(mM cm)", "L/(mol cm)")),
    ),
)

_BARE = (
    Kind(
        "fraction",
        "a fraction",
        "0.30",
        (Form("g/g", ("",), ("%",)),),
        high=1.0,
        bounds="between 0 and 1",
        bare=True,
        percent="w/w",
    ),
    Kind(
        "active_fraction",
        "an active fraction of the label",
        "0.82",
        (Form("g/g", ("",), ("%",)),),
        high=1.5,
        bounds="between 0 and 1.5",
        bare=True,
        percent="w/w",
    ),
    Kind(
        "ph",
        "a pH",
        "7.5",
        low=-1.0,
        high=15.0,
        bounds="between -1 and 15",
        bare=True,
        scale="interval",
    ),
    Kind("number", "a number", "0.8", low=-inf, bare=True),
    Kind("positive_number", "a number above 0", "60", low_inclusive=False, bare=True),
    Kind(
        "count",
        "a whole number",
        "3",
        low=1.0,
        high=1e9,
        bounds="between 1 and 1000000000",
        bare=True,
        scale="whole",
    ),
)

_ENZYME = (
    Kind(
        "activity",
        "an activity per mass of enzyme",
        "280 CDU/mg",
        (Form("{}/g", ("{}/mg", "{}/g"), activity=_ASSAY),),
        low_inclusive=False,
    ),
    Kind(
        "ratio",
        "a ratio of enzyme to substrate",
        "100 CDU/mg",
        (
            Form("{}/g", ("{}/mg", "{}/g"), activity=_ASSAY),
            Form("mg/g", ("mg/g",), ("g/g",), activity="mg", by_mass=True),
        ),
        percent="w/w",
    ),
    Kind(
        "charge",
        "an amount of enzyme",
        "6 mg",
        (
            Form("g", ("g", "mg", "µg")),
            Form("{}", ("{}",), activity=_ASSAY),
        ),
    ),
    Kind(
        "enzyme_concentration",
        "a concentration of enzyme",
        "0.5 mg/mL",
        (
            Form("g/mL", ("mg/mL", "µg/mL", "g/mL"), ("g/L",)),
            Form("{}/mL", ("{}/mL", "{}/L"), activity=_ASSAY),
        ),
    ),
    Kind(
        "reagent_concentration",
        "a concentration",
        "0.5 M",
        (_CONCENTRATION, _WEIGHT_PER_VOLUME),
        percent="w/v",
    ),
    Kind(
        "substrate_concentration",
        "a concentration of substrate",
        "2 mM",
        (_CONCENTRATION, _WEIGHT_PER_VOLUME),
        percent="w/v",
    ),
    Kind(
        "dose",
        "a dose",
        "500 CDU h/g",
        (
            Form("{} h/g", ("{} h/g", "{} h/mg"), activity=_ASSAY),
            Form("mg h/g", ("mg h/g",), activity="mg", by_mass=True),
        ),
    ),
    Kind(
        "susceptibility",
        "a susceptibility",
        "0.002 g/(CDU h)",
        (
            Form("g/({} h)", ("g/({} h)",), ("mg/({} h)",), activity=_ASSAY),
            Form("g/(mg h)", ("g/(mg h)",), activity="mg", by_mass=True),
        ),
    ),
    Kind(
        "autolysis_rate",
        "a rate of autolysis",
        "0.05 mL/(mg h)",
        (Form("mL/(g h)", ("mL/(mg h)",), ("mL/(g h)",)),),
    ),
)

KINDS: Mapping[str, Kind] = MappingProxyType(
    {kind.name: kind for kind in (*_PHYSICAL, *_ENZYME, *_BARE)}
)
