"""One row of the table of cautions, filled in; and numbers as cautions say them."""

from collections.abc import Sequence

from digestplan.forecast.result import Caution
from digestplan.library.cautions import caution


def told(code: str, step: int | None, **filling: object) -> Caution:
    """Return one row of the table, filled in for a step."""
    entry = caution(code)
    return Caution(entry.level, step, code, entry.words(**filling))


def percent(share: float) -> str:
    """Return a share as people say it."""
    if 0 < share < 0.01:
        return "under 1 %"
    if 0.99 < share < 1:
        return "over 99 %"
    return f"{100 * share:.0f} %"


def celsius(temperature: float) -> str:
    """Return a temperature as it is written at the bench."""
    return f"{temperature - 273.15:.4g} °C"


def millimolar(concentration: float) -> str:
    """Return a concentration as it is written at the bench."""
    amount = 1e3 * concentration
    return f"{amount:.0f} mM" if amount >= 10 else f"{amount:.2g} mM"


def listed(temperatures: Sequence[float]) -> str:
    """Return temperatures in a row."""
    return ", ".join(celsius(t) for t in sorted(set(temperatures)))
