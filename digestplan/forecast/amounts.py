"""From what is weighed and pipetted to active enzyme per substrate, and back."""

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.draws import Draws
from digestplan.plan.lot import asks_label
from digestplan.plan.model import Digest, Plan, Value
from digestplan.problems import InputError, Problem

Array = NDArray[np.float64]

_MG_PER_G = 1000.0


def substrate_mass(plan: Plan, draws: Draws) -> Array:
    """Mass of the matrix to be digested, shape (n_draws,). [g]."""
    return draws.of(plan.sample.wet_mass) * draws.of(plan.sample.substrate_fraction)


def label_activity(plan: Plan, draws: Draws) -> Array:
    """Label activity of the lot in the plan's activity unit, shape (n_draws,). [unit/g]."""
    if plan.activity_unit == "mg":
        return np.full(draws.n_draws, _MG_PER_G)
    label = plan.lot.label_activity
    if label is None:
        return np.full(draws.n_draws, np.nan)
    unit = label.quantity.activity or plan.activity_unit
    return draws.of(label) * conversion(plan, unit)


def conversion(plan: Plan, unit: str) -> float:
    """How many of the plan's activity units one of another is, by the lot's own certificate."""
    if unit == plan.activity_unit:
        return 1.0
    return plan.lot.conversions[unit, plan.activity_unit]


def active_ratio(plan: Plan, draws: Draws, step: Digest) -> Array:
    """
    Return the active enzyme per substrate that a digest step is charged with.

    Parameters
    ----------
    plan
        The plan; its lot says how much of the label is left.
    draws
        Its draws.
    step
        The digest step.

    Returns
    -------
    ratio
        Shape (n_draws,). A ``ratio`` in the plan is already active enzyme: it is met at the best
        estimate of what is left, so that only the error of that estimate acts. [unit/g]
    """
    if step.charge_as == "ratio":
        remaining = plan.lot.remaining.quantity.value
        error = draws.of(plan.lot.remaining) / remaining if remaining > 0 else 0.0
        return ratio_in_plan_units(plan, draws, step.charge) * error
    volume = None if step.volume is None else draws.of(step.volume)
    return weighed_ratio(plan, draws, step.charge, volume if _is_concentration(step) else None)


def _is_concentration(step: Digest) -> bool:
    return step.charge_as == "concentration"


def weighed_ratio(plan: Plan, draws: Draws, charge: Value, volume: Array | None) -> Array:
    """
    Return active enzyme per substrate of an amount of the lot, or of a concentration of it.

    Parameters
    ----------
    plan
        The plan.
    draws
        Its draws.
    charge
        Enzyme mass, or activity by the label; per millilitre where ``volume`` is given.
    volume
        Volume that holds the concentration, shape (n_draws,), or None. [mL]

    Returns
    -------
    ratio
        Shape (n_draws,). [unit/g]
    """
    amount = draws.of(charge)
    if charge.quantity.activity is None:
        if asks_label(plan):
            message = "this is missing, and nobody asked the register what is on the lot's label"
            raise InputError(Problem("lot.label_activity", message, plan.path))
        amount = amount * label_activity(plan, draws)
    else:
        amount = amount * conversion(plan, charge.quantity.activity)
    if volume is not None:
        amount = amount * volume
    return amount * draws.of(plan.lot.remaining) / substrate_mass(plan, draws)


def ratio_in_plan_units(plan: Plan, draws: Draws, ratio: Value) -> Array:
    """Draws of a ratio in the plan's activity unit, shape (n_draws,). [unit/g]."""
    amount = draws.of(ratio)
    unit = ratio.quantity.activity
    if unit == plan.activity_unit or unit is None:
        return amount
    if unit == "mg":
        return amount / _MG_PER_G * label_activity(plan, draws)
    return amount * conversion(plan, unit)


def weighed_mass(plan: Plan, draws: Draws, step: Digest) -> float | None:
    """Mass of the lot to weigh in for a step, at best estimates. [g]."""
    charge = step.charge
    if step.charge_as == "charge" and charge.quantity.activity is None:
        return charge.quantity.value
    label = float(np.median(label_activity(plan, draws)))
    if not np.isfinite(label) or label == 0:
        return None
    if step.charge_as == "ratio":
        remaining = plan.lot.remaining.quantity.value
        if remaining <= 0:
            return None
        ratio = float(np.median(ratio_in_plan_units(plan, draws, charge)))
        substrate = float(np.median(substrate_mass(plan, draws)))
        return ratio * substrate / (label * remaining)
    amount = charge.quantity.value
    if step.charge_as == "concentration" and step.volume is not None:
        amount *= step.volume.quantity.value
    if charge.quantity.activity is None:
        return amount
    return amount * conversion(plan, charge.quantity.activity) / label
