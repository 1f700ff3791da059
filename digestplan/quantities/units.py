"""What the units mean: their scale and dimension, from our own small table through pint.

pint is imported, and its registry made, when the first unit is resolved; afterwards each spelling
is answered from a cache. pint never sees anything but words of our own table and small exponents.
"""

from dataclasses import dataclass
from fractions import Fraction
from functools import cache, lru_cache
from typing import Any

from digestplan.quantities.assays import ASSAY_UNITS
from digestplan.quantities.unit_text import Factors, read_unit
from digestplan.quantities.wording import Refusal

_PRIVATE = frozenset({"percent_wv"})  # stands for "% w/v", is not written so


class UnknownUnitRefusal(Refusal):
    """A unit contains a word that is not in the table."""


@dataclass(frozen=True, slots=True)
class Unit:
    """
    A unit, resolved.

    Attributes
    ----------
    scale
        How many base units (g, m, s, mol, K, and the assay units) one is, exactly.
    dimensions
        Dimensions with their exponents, in the order of the alphabet.
    has_mass
        Whether a unit of mass is among its words, be it that it cancels as in ``mg/g``.
    """

    scale: Fraction
    dimensions: tuple[tuple[str, int], ...]
    has_mass: bool

    @property
    def assay(self) -> str | None:
        """The assay unit in it, if there is just one."""
        names = [name for name, _ in self.dimensions if name in ASSAY_UNITS]
        return names[0] if len(names) == 1 else None


@lru_cache(maxsize=2048)
def resolve(text: str) -> Unit:
    """
    Return what a unit means.

    Parameters
    ----------
    text
        The unit in normal form, such as ``mg/mL``.

    Returns
    -------
    unit
        Its scale and its dimensions.

    Raises
    ------
    Refusal
        Where it cannot be read, or is not known.
    """
    factors = tuple((word.replace("µ", "u"), power) for word, power in read_unit(text))
    for word, _ in factors:
        if word not in spellings() or word in _PRIVATE:
            raise UnknownUnitRefusal(word)
    return _resolved(factors)


@cache
def weight_per_volume() -> Unit:
    """Return what ``% w/v`` means: g in 100 mL."""
    return _resolved((("percent_wv", 1),))


def _resolved(factors: Factors) -> Unit:
    registry = _registry()
    unit = registry.parse_units("*".join(f"{word}**{power}" for word, power in factors if power))
    scale, _ = registry.get_root_units(unit)
    dimensions = registry.get_dimensionality(unit)
    exponents = sorted((str(name).strip("[]"), int(power)) for name, power in dimensions.items())
    has_mass = any(_is_mass(word) for word, _ in factors)
    return Unit(Fraction(scale), tuple(exponents), has_mass)


def _is_mass(word: str) -> bool:
    dimensions = _registry().get_dimensionality(_registry().parse_units(word))
    return dict(dimensions) == {"[mass]": 1}


@cache
def _lines() -> tuple[str, ...]:
    from importlib.resources import files

    text = files("digestplan.quantities").joinpath("units.txt").read_text(encoding="utf-8")
    lines = (line.partition("#")[0].strip() for line in text.splitlines())
    return tuple(line for line in lines if line)


@cache
def spellings() -> frozenset[str]:
    """Return every word that is a unit."""
    words: set[str] = set()
    for line in _lines():
        name, _, *others = (part.strip() for part in line.split("="))
        words.update((name, *others))
    return frozenset(words)


@cache
def _registry() -> Any:
    import pint

    # Exact fractions, so that 1 mL is 1e-6 m³ and not a float near it.
    registry: Any = pint.UnitRegistry(None, non_int_type=Fraction, on_redefinition="raise")
    registry.load_definitions(list(_lines()))
    return registry
