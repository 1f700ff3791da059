"""An assay worked out, as text and as a JSON document."""

from collections.abc import Iterator
from typing import Any

from digestplan.lots.assay_file import AssayOutcome, TraceRate
from digestplan.lots.uncertainty import Result
from digestplan.quantities import Quantity, format_quantity
from digestplan.report.as_json import FORMAT, number
from digestplan.report.lines import wrapped

_PER_MINUTE = 60.0
_UMOL = 1e6
_MG_PER_G = 1000.0
_WORTH_TELLING = 0.005  # share of the variance


def assay_document(outcome: AssayOutcome) -> dict[str, Any]:
    """
    Return an assay as a document.

    Parameters
    ----------
    outcome
        What the readings gave.

    Returns
    -------
    document
        Rates a minute, activities in the unit that ``unit`` names, each with its uncertainty.
    """
    return {
        "digestplan": FORMAT,
        "unit": outcome.setup.unit,
        "traces": [_trace_document(trace) for trace in outcome.traces],
        "amount_umol": _amount_document(outcome),
        "activity_per_mL": _result_document(outcome.per_volume),
        "activity_per_mg": _result_document(outcome.per_mass, 1 / _MG_PER_G),
        "fraction_of_label": _result_document(outcome.fraction),
        "notes": list(outcome.notes),
    }


def assay_text(outcome: AssayOutcome) -> str:
    """
    Return an assay in words.

    Parameters
    ----------
    outcome
        What the readings gave.

    Returns
    -------
    text
        Activity first, then what it rests on; lines of at most 79 characters.
    """
    blocks = [
        "\n".join(_results(outcome)),
        "\n".join(_traces(outcome)),
        "\n".join(_amount(outcome)),
        "\n".join(_budget(outcome)),
        "\n".join(wrapped(f"note  {note}", " " * 6) for note in outcome.notes),
    ]
    return "\n\n".join(block for block in blocks if block) + "\n"


# -- the document ---------------------------------------------------------------------------


def _trace_document(found: TraceRate) -> dict[str, Any]:
    rate = found.rate
    return {
        "series": found.trace.series,
        "replicate": found.trace.replicate,
        "rate_per_min": number(rate.rate / _PER_MINUTE),
        "standard_error_per_min": number(rate.standard_error / _PER_MINUTE),
        "degrees_of_freedom": rate.degrees_of_freedom,
        "shape": rate.shape,
        "bends": rate.bends,
        "from_min": number(rate.from_hours * _PER_MINUTE),
        "to_min": number(rate.to_hours * _PER_MINUTE),
        "readings": rate.n_readings,
    }


def _amount_document(outcome: AssayOutcome) -> dict[str, Any] | None:
    if outcome.amount is None:
        return None
    return {
        "value": number(outcome.amount.amount * _UMOL),
        "standard_uncertainty": number(outcome.amount.standard_error * _UMOL),
        "lower_95": number(outcome.amount.lower * _UMOL),
        "upper_95": number(outcome.amount.upper * _UMOL),
    }


def _result_document(result: Result | None, scale: float = 1.0) -> dict[str, Any] | None:
    if result is None:
        return None
    return {
        "value": number(result.value * scale),
        "standard_uncertainty": number(result.uncertainty * scale),
        "degrees_of_freedom": number(result.degrees_of_freedom),
        "budget": [{"input": line.name, "share": number(line.share)} for line in result.budget],
    }


# -- the text -------------------------------------------------------------------------------


def _plus_minus(result: Result, scale: float = 1.0) -> str:
    spread = result.uncertainty * scale
    quantity = Quantity(result.value * scale, spread, "normal" if spread else "exact")
    return format_quantity(quantity, "number")


def _results(outcome: AssayOutcome) -> Iterator[str]:
    unit = outcome.setup.unit
    told = []
    if outcome.fraction is not None:
        told.append(f"{_plus_minus(outcome.fraction, 100)} % of the label")
    if outcome.per_mass is not None:
        told.append(f"{_plus_minus(outcome.per_mass, 1 / _MG_PER_G)} {unit} per mg of enzyme")
    if outcome.per_volume is not None:
        told.append(f"{_plus_minus(outcome.per_volume)} {unit} per mL of stock")
    for place, text in enumerate(told):
        yield f"{'' if place else 'Activity: ':10}{text}"


def _traces(outcome: AssayOutcome) -> Iterator[str]:
    if not outcome.traces:
        return
    yield f"{'Trace':<16}{'per min':>12}{'± s.e.':>12}  {'straight':<16}shape"
    for found in outcome.traces:
        rate = found.rate
        name = f"{found.trace.series} {found.trace.replicate}"
        span = f"{rate.from_hours * _PER_MINUTE:.3g} to {rate.to_hours * _PER_MINUTE:.3g} min"
        yield (
            f"  {name[:13]:<14}{rate.rate / _PER_MINUTE:>12.5f}"
            f"{rate.standard_error / _PER_MINUTE:>12.5f}  {span:<16}{rate.shape}"
        )


def _amount(outcome: AssayOutcome) -> Iterator[str]:
    if outcome.amount is None or outcome.curve is None:
        return
    found = outcome.amount
    yield (
        f"Product in the sample: {found.amount * _UMOL:.4g} µmol "
        f"(95 %: {found.lower * _UMOL:.4g} to {found.upper * _UMOL:.4g}), read off"
    )
    yield (
        f"standards from {outcome.curve.lowest * _UMOL:.4g} to "
        f"{outcome.curve.highest * _UMOL:.4g} µmol"
    )


def _budget(outcome: AssayOutcome) -> Iterator[str]:
    result = outcome.fraction or outcome.per_mass or outcome.per_volume
    if result is None or not result.budget:
        return
    yield "Where the uncertainty comes from"
    for line in result.budget:
        if line.share >= _WORTH_TELLING:
            yield f"  {line.name:<28}{100 * line.share:>4.0f} %"
