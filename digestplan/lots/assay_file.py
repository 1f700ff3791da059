"""From a file of readings and its setup to an activity: traces, or end-points."""

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from digestplan.lots.assay import Trace, activity, activity_of_rates
from digestplan.lots.assay_setup import Label, WrittenSetup, checked_setup, setup_beside
from digestplan.lots.csv_table import text_of
from digestplan.lots.initial_rate import InitialRate, initial_rate
from digestplan.lots.readings import EndPoints, read_end_points, read_readings
from digestplan.lots.standard_curve import (
    InversePrediction,
    StandardCurve,
    end_point_activity,
    fit_standard_curve,
    inverse_prediction,
)
from digestplan.lots.uncertainty import Measured, Result, mean_of, propagate
from digestplan.problems import InputError, Problem

Array = NDArray[np.float64]

READING_SD = 0.003  # of one absorbance, where nothing was read twice (common practice)


@dataclass(frozen=True, slots=True, eq=False)
class TraceRate:
    """One trace, and its rate.

    Attributes
    ----------
    trace, rate
        What was read, and what it gives.
    """

    trace: Trace
    rate: InitialRate


@dataclass(frozen=True, slots=True, eq=False)
class AssayOutcome:
    """What a file of readings gives.

    Attributes
    ----------
    setup
        How the assay was made.
    traces
        Every trace with its rate; none for end-points.
    curve, amount
        Of end-points: the line through the standards, and what it says of the sample. [mol]
    per_volume, per_mass, fraction
        Activity of the stock [unit/mL], of the enzyme [unit/g] and as a fraction of the label, as
        far as the setup allows.
    notes
        What to know of it, in words.
    """

    setup: WrittenSetup
    traces: tuple[TraceRate, ...] = ()
    curve: StandardCurve | None = None
    amount: InversePrediction | None = None
    per_volume: Result | None = None
    per_mass: Result | None = None
    fraction: Result | None = None
    notes: tuple[str, ...] = ()


def assay_of(
    path: str | Path, written: Mapping[str, str] | None = None, label: Label | None = None
) -> AssayOutcome:
    """
    Read an assay and work it out.

    Parameters
    ----------
    path
        CSV with ``time`` and ``reading`` (a trace), or ``series`` and ``signal`` (end-points).
    written
        What is said of the setup elsewhere; it goes before what stands in the file.
    label
        Of the lot in the register.

    Returns
    -------
    outcome
        Rates, and an activity as far as the setup allows. An `InputError` names the file.
    """
    beside = setup_beside(path)
    try:
        setup = checked_setup({**beside, **(written or {})}, label)
        outcome = _of_end_points(path, setup) if _has_signals(path) else _of_traces(path, setup)
    except InputError as error:
        named = [Problem(p.place, p.message, p.file or str(path), p.line) for p in error.problems]
        raise InputError(*named) from None
    return outcome


# -- traces -----------------------------------------------------------------------------------


def _of_traces(path: str | Path, setup: WrittenSetup) -> AssayOutcome:
    traces = read_readings(path)
    if setup.unit is None or setup.way == "amount":
        if setup.way == "amount":
            message = f"{setup.unit} is counted by end-points against standards, not by a trace"
            raise InputError(Problem("assay", message))
        rates = tuple(TraceRate(t, _rate(t)) for t in traces)
        note = "no assay or unit is named: these are rates of absorbance, not activities"
        return AssayOutcome(setup, rates, notes=(*_of_each(rates), note))
    found = activity(traces, setup.absorbance())
    kept = {"sample": iter(found.samples), "blank": iter(found.blanks)}
    rates = tuple(TraceRate(t, next(kept[t.series])) for t in traces)
    said = {note for r in rates for note in r.rate.notes}
    others = [note for note in found.notes if note not in said]
    return AssayOutcome(
        setup,
        rates,
        per_volume=found.per_volume,
        per_mass=found.per_mass,
        fraction=found.fraction,
        notes=(*_of_each(rates), *others, *_notes(setup)),
    )


def _of_each(rates: Sequence[TraceRate]) -> list[str]:
    """What is to be known of each trace, with its name."""
    return [f"{r.trace.series} {r.trace.replicate}: {note}" for r in rates for note in r.rate.notes]


def _rate(trace: Trace) -> InitialRate:
    name = f"{trace.series} {trace.replicate}"
    return initial_rate(trace.hours, trace.absorbance, name=name)


# -- end-points -------------------------------------------------------------------------------


def _has_signals(path: str | Path) -> bool:
    """Whether a table holds signals of end-points rather than readings against time."""
    lines = (x for x in text_of(path).splitlines() if x.strip() and not x.startswith("#"))
    names = re.split("[,;\t]", next(lines, ""))
    return any(name.split("[")[0].strip(' "').lower() == "signal" for name in names)


def _of_end_points(path: str | Path, setup: WrittenSetup) -> AssayOutcome:
    points = read_end_points(path)
    if not len(points.sample):
        raise InputError(Problem("series", "there are no signals of a sample"))
    if setup.way in {"extinction", "definition"} and not len(points.standard_signal):
        return _of_absorbances(points, setup)
    definition = setup.amount()
    curve = fit_standard_curve(points.standard_amount, points.standard_signal)
    sample = inverse_prediction(curve, points.sample)
    blank = Measured(0.0)
    if len(points.blank):
        blank = inverse_prediction(curve, points.blank).measured()
    per_volume = end_point_activity(
        sample.measured(),
        blank,
        setup.values["time"],
        setup.values["sample volume"],
        definition,
        setup.values.get("dilution"),
    )
    per_mass, fraction = _of_mass_and_label(per_volume, setup)
    notes = [*_curve_notes(curve, sample, points), *_notes(setup)]
    return AssayOutcome(setup, (), curve, sample, per_volume, per_mass, fraction, tuple(notes))


def _of_absorbances(points: EndPoints, setup: WrittenSetup) -> AssayOutcome:
    """End-points read in a photometer: what they changed by, over the time that they ran."""
    if "time" not in setup.values:
        message = 'how long it ran is missing; write for instance "10 min"'
        raise InputError(Problem("time", message))
    time = setup.values["time"]

    def rate(signals: Array) -> Measured:
        n = len(signals)
        read = mean_of(signals, np.full(n, READING_SD), np.full(n, np.inf))
        inputs = {"signal": read, "time": time}
        found = propagate(lambda v: v["signal"] / v["time"], inputs)
        return Measured(found.value, found.uncertainty, found.degrees_of_freedom)

    blank = rate(points.blank) if len(points.blank) else None
    results = activity_of_rates(rate(points.sample), blank, setup.absorbance())
    notes = [] if blank else ["no blank was read: what is there without the enzyme counts as its"]
    return AssayOutcome(
        setup,
        per_volume=results[0],
        per_mass=results[1],
        fraction=results[2],
        notes=(*notes, *_notes(setup)),
    )


def _of_mass_and_label(
    per_volume: Result, setup: WrittenSetup
) -> tuple[Result | None, Result | None]:
    if "concentration" not in setup.values:
        return None, None
    inputs = {
        "end-point assay": Measured(
            per_volume.value, per_volume.uncertainty, per_volume.degrees_of_freedom
        ),
        "enzyme concentration": setup.values["concentration"],
    }
    per_mass = propagate(lambda v: v["end-point assay"] / v["enzyme concentration"], inputs)
    label = setup.label_activity()
    if label is None:
        return per_mass, None
    inputs["label activity"] = label
    return per_mass, propagate(
        lambda v: v["end-point assay"] / v["enzyme concentration"] / v["label activity"], inputs
    )


def _curve_notes(
    curve: StandardCurve, sample: InversePrediction, points: EndPoints
) -> tuple[str, ...]:
    notes = []
    if curve.bends:
        notes.append("the standard curve bends: a line through it is not to be used to its end")
    if sample.outside:
        notes.append("the sample lies outside the standards: dilute it, or read more standards")
    if not len(points.blank):
        notes.append("no blank was read: what is there without the enzyme counts as its")
    return tuple(notes)


def _notes(setup: WrittenSetup) -> tuple[str, ...]:
    """What the setup itself leaves open."""
    notes = []
    measured = ("total volume", "sample volume", "dilution", "concentration")
    exact = [k for k in measured if k in setup.values and setup.values[k].uncertainty == 0]
    if exact:
        notes.append(
            f"taken as exact: {', '.join(exact)}; write a spread (20 ± 0.3 uL) if they are not"
        )
    if setup.label is not None and "concentration" not in setup.values:
        notes.append("without the concentration of the stock there is no fraction of the label")
    return tuple(notes)
