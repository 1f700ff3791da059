"""What one part of a plan asks of another: amounts, depth, order of the steps, its whole length."""

from collections.abc import Sequence
from math import fsum

from digestplan.plan.model import (
    Demineralise,
    Digest,
    Hold,
    Rinse,
    Sample,
    Step,
    Stop,
)
from digestplan.plan.programme import LONGEST, hours_of
from digestplan.plan.wording import shown
from digestplan.problems import Problems

_WATER = 1.0  # [g/mL] where nobody says how dense the piece is

Steps = Sequence[Step | None]


def check_order(steps: Steps, problems: Problems) -> None:
    """Note steps that stand where they can do nothing, and a plan that never ends."""
    digested = False
    for index, step in enumerate(steps):
        place = f"steps[{index}]"
        if isinstance(step, Stop) and not digested:
            problems.add(
                f"{place}.do", "there is nothing to stop: no digest comes before this step"
            )
        if isinstance(step, Hold) and index == 0:
            problems.add(f"{place}.do", "there is nothing to hold: no step comes before this one")
        digested = digested or isinstance(step, Digest) or step is None
    _check_first_ramp(steps, problems)
    if fsum(hours_of_step(step) for step in steps if step is not None) > LONGEST:
        problems.add("steps", "all steps together take more than ten years")


def hours_of_step(step: Step) -> float:
    """Return how long a step lasts. [h]."""
    if isinstance(step, Rinse):
        return step.exchanges * step.each
    return step.hours if isinstance(step, Stop) else hours_of(step.programme)


def _check_first_ramp(steps: Steps, problems: Problems) -> None:
    first = steps[0] if steps else None
    if not isinstance(first, Digest | Demineralise) or not first.programme:
        return
    start = first.start_temperature if isinstance(first, Digest) else None
    if first.programme[0].ramp and start is None:
        message = "nothing says from which temperature this goes; write first where it stays"
        hint = ', or start_temperature = "22 degC"' if isinstance(first, Digest) else ""
        problems.add("steps[0].temperature[0]", message + hint)


def check_amounts(sample: Sample, steps: Steps, problems: Problems) -> None:
    """Note liquids that cannot cover the piece."""
    density = sample.density.quantity.value if sample.density else _WATER
    piece = sample.wet_mass.quantity.value / density
    for index, step in enumerate(steps):
        if not isinstance(step, Digest | Rinse | Demineralise) or step.volume is None:
            continue
        volume = step.volume.quantity
        if sample.wet_mass.origin == "plan" and volume.value < piece:
            message = f"{shown(volume.text)} is less than the piece itself ({piece:.3g} mL)"
            problems.add(f"steps[{index}].volume", f"{message} and cannot cover it")
