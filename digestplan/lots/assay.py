"""Activity from absorbance readings: units, units per mass, and fraction of the label.

An absorbance assay gives U (µmol/min) from an extinction, or a unit that is itself defined by a
change of absorbance. It never gives a unit of another assay, such as CDU.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from digestplan.lots.initial_rate import InitialRate, initial_rate
from digestplan.lots.uncertainty import Measured, Result, mean_of, propagate
from digestplan.problems import InputError, Problem

Array = NDArray[np.float64]
Way = Literal["extinction", "definition"]

_UNIT_IN_MOLES_PER_HOUR = 60e-6  # 1 U = 1 µmol/min
_ML_PER_L = 1000.0
_CM_PER_M = 100.0
ONE_CM, NEAT = Measured(0.01), Measured(1.0)
_TOO_DARK = 2.0  # absorbance above which stray light bends many photometers (common practice)

# Which units an absorbance assay can give, and how. Those by extinction are all µmol/min, each of
# its own substrate; the others are defined by a change of absorbance.
WAYS: Mapping[str, Way] = {
    "U": "extinction",
    "FALGPA_U": "extinction",
    "TAME_U": "extinction",
    "ATEE_U": "extinction",
    "PNA_U": "extinction",
    "BAEE_U": "definition",
    "PEP_U": "definition",
}


@dataclass(frozen=True, slots=True, eq=False)
class Trace:
    """One cuvette's readings.

    Attributes
    ----------
    hours, absorbance
        Shape (n_readings,). [h], [1]
    series
        ``sample`` or ``blank``.
    replicate
        Which of them.
    """

    hours: Array
    absorbance: Array
    series: Literal["sample", "blank"]
    replicate: str = "1"


@dataclass(frozen=True, slots=True)
class Definition:
    """A unit defined by a change of absorbance.

    Attributes
    ----------
    change
        Change of absorbance that one unit makes. [1/h]
    volume
        In this volume of assay mixture. [mL]
    path
        Over this path. [m]
    """

    change: float
    volume: float
    path: float = 0.01


@dataclass(frozen=True, slots=True)
class Setup:
    """How the assay was made.

    Attributes
    ----------
    unit
        The unit wanted, such as ``U`` or ``BAEE_U``.
    total_volume, sample_volume
        Of the assay mixture, and of the diluted enzyme in it. [mL]
    path
        Light path. [m]
    dilution
        How many times the stock was diluted before.
    extinction
        Change of the extinction coefficient as substrate is converted. [L/(mol cm)]
    definition
        For a unit that is defined by a change of absorbance.
    enzyme_concentration
        Of the stock. [g/mL]
    label_activity
        What the label says, in the same unit. [unit/g]
    falling
        Whether absorbance falls as the substrate is converted.
    """

    unit: str
    total_volume: Measured
    sample_volume: Measured
    path: Measured = ONE_CM
    dilution: Measured = NEAT
    extinction: Measured | None = None
    definition: Definition | None = None
    enzyme_concentration: Measured | None = None
    label_activity: Measured | None = None
    falling: bool = False


@dataclass(frozen=True, slots=True)
class Activity:
    """What an assay gives.

    Attributes
    ----------
    unit
        The unit of activity.
    samples, blanks
        The rate of each trace.
    per_volume
        Of the stock. [unit/mL]
    per_mass
        [unit/g]; None without a concentration.
    fraction
        Of the label; None without a label activity.
    notes
        What to know of it, in words.
    """

    unit: str
    samples: tuple[InitialRate, ...]
    blanks: tuple[InitialRate, ...]
    per_volume: Result
    per_mass: Result | None
    fraction: Result | None
    notes: tuple[str, ...]


def activity(traces: Sequence[Trace], setup: Setup) -> Activity:
    """
    Activity from the traces of an assay.

    Parameters
    ----------
    traces
        Samples and blanks.
    setup
        How the assay was made.

    Returns
    -------
    activity
        Per volume and, as far as the setup allows, per mass and as a fraction of the label, each
        with the budget of its uncertainty.
    """
    check_setup(setup)
    if not any(t.series == "sample" for t in traces):
        raise InputError(Problem("series", "there are no readings of a sample"))
    rates = {
        series: tuple(
            initial_rate(t.hours, t.absorbance, name=f"{series} {t.replicate}")
            for t in traces
            if t.series == series
        )
        for series in ("sample", "blank")
    }
    samples, blanks = rates["sample"], rates["blank"]
    results = activity_of_rates(_mean(samples), _mean(blanks) if blanks else None, setup)
    notes = _notes(traces, samples, blanks, results[0])
    return Activity(setup.unit, samples, blanks, *results, notes)


def activity_of_rates(
    sample: Measured, blank: Measured | None, setup: Setup
) -> tuple[Result, Result | None, Result | None]:
    """
    Activity from rates of change, such as those of an end-point read in a photometer.

    Parameters
    ----------
    sample, blank
        Change of absorbance. [1/h]
    setup
        How the assay was made.

    Returns
    -------
    per_volume, per_mass, fraction
        As in `Activity`.
    """
    check_setup(setup)
    inputs = {
        "rate of the sample": sample,
        "rate of the blank": blank or Measured(0.0),
        "total volume": setup.total_volume,
        "sample volume": setup.sample_volume,
        "path": setup.path,
        "dilution": setup.dilution,
    }
    if WAYS[setup.unit] == "extinction" and setup.extinction is not None:
        inputs["extinction"] = setup.extinction
    per_volume = propagate(lambda v: _per_volume(v, setup), inputs)
    if setup.enzyme_concentration is None:
        return per_volume, None, None
    inputs["enzyme concentration"] = setup.enzyme_concentration
    per_mass = propagate(lambda v: _per_mass(v, setup), inputs)
    if setup.label_activity is None:
        return per_volume, per_mass, None
    inputs["label activity"] = setup.label_activity
    fraction = propagate(lambda v: _per_mass(v, setup) / v["label activity"], inputs)
    return per_volume, per_mass, fraction


def check_setup(setup: Setup) -> None:
    """Refuse a unit that the assay cannot give, and values that cannot be."""
    way = WAYS.get(setup.unit)
    if way is None:
        able = ", ".join(WAYS)
        message = (
            f"an absorbance assay cannot give {setup.unit}, which is defined by another assay; "
            f"it gives {able}. A factor from the lot's own certificate may lead on from there"
        )
        raise InputError(Problem("unit", message))
    if getattr(setup, way) is None:
        needs = {
            "extinction": 'an extinction, such as "6.22 L/(mmol cm)"',
            "definition": "the change of absorbance and the volume that define it",
        }
        raise InputError(Problem("unit", f"{setup.unit} needs {needs[way]}"))
    problems = [
        Problem(name, "must be above zero")
        for name in (
            *("total_volume", "sample_volume", "path", "dilution", "extinction"),
            *("enzyme_concentration", "label_activity"),
        )
        if (m := getattr(setup, name)) is not None and not (m.value > 0 and np.isfinite(m.value))
    ]
    if problems:
        raise InputError(*problems)


def label_in_unit(
    label_activity: Measured,
    label_unit: str,
    unit: str,
    conversions: Mapping[tuple[str, str], float],
) -> Measured:
    """
    Label activity in the unit that the assay gives.

    Parameters
    ----------
    label_activity
        As on the label. [label_unit/g]
    label_unit, unit
        The label's unit, and the assay's.
    conversions
        From the lot's certificate: (a, b) → how many b make one a.

    Returns
    -------
    label_activity
        [unit/g]
    """
    factor = 1.0
    if label_unit != unit:
        if (label_unit, unit) in conversions:
            factor = conversions[label_unit, unit]
        elif (unit, label_unit) in conversions:
            factor = 1 / conversions[unit, label_unit]
        else:
            message = (
                f"the label is in {label_unit}, the assay in {unit}: one is never converted into "
                "the other without a factor from the lot's own certificate "
                f'(conversions = ["1 {label_unit} = … {unit}"])'
            )
            raise InputError(Problem("label_activity", message))
    return replace(
        label_activity,
        value=label_activity.value * factor,
        uncertainty=label_activity.uncertainty * factor,
    )


# -- the parts ----------------------------------------------------------------------------


def _mean(rates: Sequence[InitialRate]) -> Measured:
    return mean_of(
        [r.rate for r in rates],
        [r.standard_error for r in rates],
        [r.degrees_of_freedom for r in rates],
    )


def _per_volume(v: Mapping[str, Any], setup: Setup) -> Any:
    """Activity of the stock [unit/mL]; complex where an input is."""
    change = v["rate of the sample"] - v["rate of the blank"]
    if setup.falling:
        change = -change
    scale = v["total volume"] / v["sample volume"] * v["dilution"]
    if "extinction" in v:
        moles_per_litre = change / (v["extinction"] * v["path"] * _CM_PER_M)
        return moles_per_litre / _ML_PER_L / _UNIT_IN_MOLES_PER_HOUR * scale
    defined = setup.definition
    assert defined is not None
    units_per_ml = change / defined.change / defined.volume * (defined.path / v["path"])
    return units_per_ml * scale


def _per_mass(v: Mapping[str, Any], setup: Setup) -> Any:
    return _per_volume(v, setup) / v["enzyme concentration"]


def _notes(
    traces: Sequence[Trace],
    samples: Sequence[InitialRate],
    blanks: Sequence[InitialRate],
    per_volume: Result,
) -> tuple[str, ...]:
    notes = [note for rate in (*samples, *blanks) for note in rate.notes]
    if not blanks:
        notes.append("no blank was read: what changes without the enzyme counts as its activity")
    if any(np.max(t.absorbance) > _TOO_DARK for t in traces):
        notes.append(f"readings above {_TOO_DARK:g} lie where stray light bends many photometers")
    if per_volume.value < -2 * per_volume.uncertainty:
        notes.append("the absorbance goes the other way: does the assay consume the colour?")
    elif per_volume.value < 2 * per_volume.uncertainty:
        notes.append("the activity cannot be told from nothing")
    return tuple(dict.fromkeys(notes))
