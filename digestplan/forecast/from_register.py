"""A plan's lot from the register: its label, and what is left of it at the plan's start."""

from dataclasses import replace
from datetime import datetime
from typing import TYPE_CHECKING

import numpy as np

from digestplan.forecast.lot_words import below_freezing, contradiction, sources
from digestplan.lots.check import check_lot
from digestplan.lots.entry import now
from digestplan.lots.from_library import kinetics_of, label_log_sd
from digestplan.lots.grid import Remaining
from digestplan.lots.posterior import LotPosterior
from digestplan.plan.model import Lot, Plan, Value
from digestplan.plan.units import MASS
from digestplan.problems import InputError, Problem
from digestplan.quantities import Quantity, QuantityError, parse_conversion, parse_quantity

if TYPE_CHECKING:
    from digestplan.lots.register import Register
    from digestplan.lots.register.stock import LotRecord


def with_register(plan: Plan, register: "Register") -> Plan:
    """
    Return a plan with what the register knows of its lot.

    Parameters
    ----------
    plan
        A plan that names a lot; what it writes of the lot itself is kept.
    register
        Open.

    Returns
    -------
    plan
        With the label activity, the certificate's factors and the remaining fraction at the
        plan's start (now where it has none), each of origin ``lot``. An `InputError` where the
        register does not know the lot, or it is of another enzyme or unit.
    """
    assert plan.lot.id is not None
    at = plan.start or now()
    try:
        record = register.lot(plan.lot.id, at)
    except InputError as error:
        problems = [Problem("lot.id", str(p), plan.path) for p in error.problems]
        raise InputError(*problems) from None
    plan = of_lot(plan, record, keep_written=True)
    if plan.lot.remaining.origin != "default":
        return plan
    posterior = _posterior(plan, record, at)
    quantity = as_quantity(posterior.remaining)
    source = f"lot {record.received.lot} in the register: {sources(posterior)}"
    remaining = Value(quantity, "lot.remaining", "lot", source)
    remarks = (*plan.remarks, *_remarks(record, posterior))
    return replace(plan, lot=replace(plan.lot, remaining=remaining), remarks=remarks)


def of_lot(plan: Plan, record: "LotRecord", *, keep_written: bool = False) -> Plan:
    """
    Return a plan with the label activity of a lot.

    Parameters
    ----------
    plan
        The plan.
    record
        The lot, from the register.
    keep_written
        Whether a label that the plan writes stays as it is.

    Returns
    -------
    plan
        With the label as an exact number: its spread is part of what is left. An `InputError`
        where the lot is of another enzyme, or its label is in a unit that does not lead to the
        plan's.
    """
    received, key = record.received, plan.enzyme.key
    if key is not None and received.enzyme != key:
        message = f'lot "{received.lot}" is {received.enzyme} in the register, not {key}'
        raise InputError(Problem("lot.enzyme", message, plan.path))
    factors: dict[tuple[str, str], float] = {}
    for one, other, factor in map(parse_conversion, received.conversions):
        factors[one, other], factors[other, one] = factor, 1 / factor
    lot = replace(plan.lot, id=received.lot, conversions={**factors, **plan.lot.conversions})
    if plan.activity_unit == MASS or (keep_written and lot.label_activity is not None):
        return replace(plan, lot=lot)
    text = record.summary.label_activity
    if text is not None:
        label = Value(
            _nominal(text, plan), "lot.label_activity", "lot", _label_source(received.lot)
        )
        return replace(plan, lot=_in_unit(plan, replace(lot, label_activity=label)))
    if lot.label_activity is None:
        message = f'neither the plan nor the register says what is on the label of "{received.lot}"'
        raise InputError(Problem("lot.label_activity", message, plan.path))
    return replace(plan, lot=lot)


def as_quantity(remaining: Remaining) -> Quantity:
    """
    Return a distribution of the remaining fraction as a value with a spread.

    Parameters
    ----------
    remaining
        The distribution.

    Returns
    -------
    quantity
        Its median with a normal or a log-normal spread, whichever comes nearer to its 5th and
        95th percentile.
    """
    low, middle, high = (remaining.percentile(p) for p in (5, 50, 95))
    if not low < high:
        return Quantity(middle)
    sd = (high - low) / (2 * _AT_95)
    normal = max(abs(middle - _AT_95 * sd - low), abs(middle + _AT_95 * sd - high))
    factor = float(np.exp(remaining.log_width))
    log_normal = max(abs(middle / factor**_AT_95 - low), abs(middle * factor**_AT_95 - high))
    if log_normal < normal:
        text = f"{middle:.3g} ×/ {factor:.3g}"
        return Quantity(middle, factor, "lognormal", text=text)
    return Quantity(middle, sd, "normal", text=f"{middle:.3g} ± {sd:.2g}")


# -- the parts ------------------------------------------------------------------------------

_AT_95 = 1.6448536269514722


def _posterior(plan: Plan, record: "LotRecord", at: datetime) -> LotPosterior:
    """What is left; a spread that the plan writes of its label is not counted twice."""
    label = plan.lot.label_activity
    own = label is not None and label.quantity.distribution != "exact"
    sd = 0.0 if own else label_log_sd(record.summary.label_activity)
    return check_lot(record, kinetics_of(record.received.enzyme), at, log_label_sd=sd)


def _nominal(text: str, plan: Plan) -> Quantity:
    try:
        label = parse_quantity(text, "activity")
    except QuantityError as error:
        raise InputError(Problem("lot.label_activity", f"register: {error}", plan.path)) from None
    return Quantity(label.value, activity=label.activity, text=text)


def _label_source(lot: str) -> str:
    return f"label of lot {lot} in the register"


def _in_unit(plan: Plan, lot: Lot) -> Lot:
    assert lot.label_activity is not None
    unit, ours = lot.label_activity.quantity.activity or "", plan.activity_unit
    if unit == ours or (unit, ours) in lot.conversions:
        return lot
    message = (
        f'the label of "{lot.id}" counts in {unit}, but this plan counts in {ours}, and one is '
        f'never turned into the other; lot.conversions = ["1 {ours} = … {unit}"] from its '
        "certificate"
    )
    raise InputError(Problem("lot.label_activity", message, plan.path))


def _remarks(record: "LotRecord", posterior: LotPosterior) -> list[str]:
    left = posterior.remaining
    low, middle, high = (f"{100 * left.percentile(p):.0f}" for p in (5, 50, 95))
    told = (
        f"Lot {record.received.lot}: {middle} % of its label is left at the start (5 to 95 %: "
        f"{low} to {high} %), from {sources(posterior)}."
    )
    remarks = [told]
    if posterior.contradicted:
        remarks.append(contradiction(record, posterior))
    if posterior.below_freezing and posterior.from_assays is None:
        remarks.append(below_freezing(posterior))
    if record.summary.discarded_at is not None:
        day = record.summary.discarded_at.date().isoformat()
        remarks.append(f"By the register lot {record.received.lot} was discarded on {day}.")
    return remarks
