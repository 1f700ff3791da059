"""What stability data say of an enzyme: its ageing, its shelf life, and its own kinetics."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from digestplan.lots.readings import Stability
from digestplan.lots.shelf_life import BatchShelfLife, ShelfLife, shelf_life, shelf_life_of_batches
from digestplan.lots.storage import (
    Form,
    StorageFit,
    StorageKinetics,
    TimeToFraction,
    fit_inactivation,
)
from digestplan.problems import InputError, Problem

_LEAST = 3  # measurements of a batch for a line of its own
_SAME = 0.01  # [K]


@dataclass(frozen=True, slots=True, eq=False)
class StabilityResult:
    """What activity against time gives.

    Attributes
    ----------
    fit
        First-order inactivation, with Arrhenius where there are several temperatures.
    temperature
        At which the shelf life is asked for. [K]
    limit
        What must be left of the start. [1]
    time
        Until then, with its one-sided 95 % limit.
    profile
        95 % limits of the fit's rate and energy by profile likelihood, by name.
    shelf
        By the rule of ICH Q1E, from what was measured at that temperature; None where that is
        too little. [h]
    """

    fit: StorageFit
    temperature: float
    limit: float
    time: TimeToFraction
    profile: Mapping[str, tuple[float, float]]
    shelf: ShelfLife | BatchShelfLife | None


def stability_of(
    data: Stability, temperature: float | None = None, limit: float = 0.9
) -> StabilityResult:
    """
    Work out how an enzyme ages.

    Parameters
    ----------
    data
        Activity against time.
    temperature
        At which the shelf life is asked for; the lowest that was measured if None. [K]
    limit
        What must be left, of the activity at the start. [1]

    Returns
    -------
    result
        Fit and shelf life.
    """
    if not 0 < limit < 1:
        raise InputError(Problem("limit", "a share of the start between 0 and 1 is wanted"))
    fit = fit_inactivation(data.temperature, data.hours, data.activity)
    at = float(data.temperature.min()) if temperature is None else temperature
    try:
        time = fit.time_to(limit, at)
    except ValueError as error:
        raise InputError(Problem("temperature", str(error))) from None
    names: list[str] = [name for name in ("log_rate", "energy") if name in fit.fit.names]
    profile = {name: fit.limits(name) for name in names}
    return StabilityResult(fit, at, limit, time, profile, _shelf(data, fit, at, limit))


def own_kinetics(
    data: Stability,
    form: Form,
    library: Mapping[Form, StorageKinetics],
    path: str | Path,
) -> dict[Form, StorageKinetics]:
    """
    Return the library's kinetics with that of one form from the lot's own data.

    Parameters
    ----------
    data
        Activity against time.
    form
        The form that was measured.
    library
        By form; losses by thaws and openings stay the library's, and so does the energy where one
        temperature alone was measured.
    path
        Where the data stand, for messages.

    Returns
    -------
    kinetics
        By form. An `InputError` where nothing falls with time.
    """
    try:
        fit = fit_inactivation(data.temperature, data.hours, data.activity)
    except InputError as error:
        named = [Problem(p.place, p.message, str(path), p.line) for p in error.problems]
        raise InputError(*named) from None
    return {**library, form: fit.kinetics(library[form])}


# -- the parts ------------------------------------------------------------------------------


def _shelf(
    data: Stability, fit: StorageFit, temperature: float, limit: float
) -> ShelfLife | BatchShelfLife | None:
    """Shelf life at a measured temperature, in percent of the start, on the log scale."""
    used = (np.abs(data.temperature - temperature) < _SAME) & (data.activity > 0)
    hours, percent = data.hours[used], 100 * data.activity[used] / fit.fit["initial"]
    batches = [batch for batch, there in zip(data.batch, used, strict=True) if there]
    sizes = [batches.count(name) for name in set(batches)]
    if len(np.unique(hours)) < _LEAST or min(sizes) < _LEAST:
        return None
    if len(sizes) > 1:
        return shelf_life_of_batches(batches, hours, percent, limit=100 * limit, scale="log")
    return shelf_life(hours, percent, limit=100 * limit, scale="log")
