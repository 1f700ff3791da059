"""Amounts as a balance and a pipette can give them, and a stock where a balance cannot."""

from dataclasses import dataclass
from itertools import product
from math import floor, log10

SMALLEST_WEIGHED = 1e-3  # [g] common practice: less than 1 mg is taken from a stock

_STOCKS = (10.0, 5.0, 2.0, 1.0, 0.5, 0.2, 0.1)  # [mg/mL]
_DILUTIONS = (1, 10, 100, 1000, 10_000, 100_000)  # the less the better
_WORTH_PIPETTING = (0.05, 0.02, 0.01)  # [mL] the more the better
_SHARE_OF_BATH = 0.1  # that a stock may take up
_NO_BATH = 0.3  # [mL] that may be pipetted where the bath is not known


@dataclass(frozen=True, slots=True)
class Stock:
    """A solution from which an amount too small to weigh is pipetted.

    Attributes
    ----------
    mass, volume
        What is weighed in, and made up to. [g], [mL]
    concentration
        Of the stock. [g/mL]
    dilution
        How many times it is diluted once more before it is pipetted; 1 for not.
    pipetted
        Volume that holds the amount. [mL]
    """

    mass: float
    volume: float
    concentration: float
    dilution: int
    pipetted: float

    @property
    def amount(self) -> float:
        """Mass of enzyme in the volume pipetted. [g]"""
        return self.pipetted * self.concentration / self.dilution


def practical_mass(mass: float) -> float:
    """
    Return the mass that a balance at the bench is asked for.

    Parameters
    ----------
    mass
        What is wanted. [g]

    Returns
    -------
    mass
        To 0.1 mg up to 100 mg, else to three significant digits. Less than 1 mg is not for the
        balance, and is given to two digits. [g]
    """
    if mass < SMALLEST_WEIGHED:
        return significant(mass, 2)
    if mass < 0.1:
        return round(mass, 4)
    return significant(mass, 3)


def practical_volume(volume: float) -> float:
    """Return the volume that a pipette or a cylinder gives: three significant digits. [mL]"""
    return significant(volume, 3)


def significant(value: float, digits: int) -> float:
    """Return a number with so many significant digits."""
    return float(f"{value:.{digits - 1}e}")


def stock_for(mass: float, bath: float | None) -> Stock:
    """
    Return a stock from which a small mass is pipetted.

    Parameters
    ----------
    mass
        Enzyme that is wanted, under 1 mg. [g]
    bath
        Volume into which it goes, or None. [mL]

    Returns
    -------
    stock
        The strongest that leaves a volume worth pipetting and at most a tenth of the bath.
    """
    most = _NO_BATH if bath is None else _SHARE_OF_BATH * bath
    for dilution, least, milligrams in product(_DILUTIONS, _WORTH_PIPETTING, _STOCKS):
        pipetted = mass * dilution / (milligrams / 1000)
        if least <= pipetted <= most:
            return _stock(milligrams, dilution, pipetted)
    milligrams = next((c for c in _STOCKS if mass / c * 1000 >= _WORTH_PIPETTING[-1]), _STOCKS[-1])
    return _stock(milligrams, 1, mass / milligrams * 1000)


def _stock(milligrams: float, dilution: int, pipetted: float) -> Stock:
    mass = 5.0 if milligrams >= 5 else 2.0
    return Stock(
        mass / 1000, mass / milligrams, milligrams / 1000, dilution, practical_volume(pipetted)
    )


def mass_text(mass: float) -> str:
    """Return a mass [g] as it is read off a balance."""
    if mass < 1e-6:
        return f"{_plain(significant(mass * 1e9, 3))} ng"
    if mass < SMALLEST_WEIGHED:
        return f"{_plain(significant(mass * 1e6, 3))} µg"
    if mass < 0.1:
        return f"{mass * 1e3:.1f} mg"
    if mass < 1:
        return f"{_plain(significant(mass * 1e3, 3))} mg"
    return f"{_plain(significant(mass, 3))} g"


def volume_text(volume: float) -> str:
    """Return a volume [mL] as it is set on a pipette."""
    if volume < 1:
        return f"{_plain(significant(volume * 1e3, 3))} µL"
    if volume < 1000:
        return f"{_plain(significant(volume, 3))} mL"
    return f"{_plain(significant(volume / 1000, 3))} L"


def activity_text(activity: float, unit: str) -> str:
    """Return an activity, its thousands apart."""
    return f"{_plain(significant(activity, 3))} {unit}"


def _plain(value: float) -> str:
    if value == 0:
        return "0"
    decimals = max(0, 2 - floor(log10(abs(value))))
    text = f"{value:,.{decimals}f}"
    return text.rstrip("0").rstrip(".") if "." in text else text
