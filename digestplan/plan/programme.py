"""Temperature programmes: one temperature for so long, or a list of stretches."""

from math import fsum
from typing import Any

from digestplan.plan.field import Field
from digestplan.plan.fields import fields_of
from digestplan.plan.model import Stretch
from digestplan.plan.section import UNKNOWN, Section
from digestplan.plan.wording import shown

LONGEST = 87_660.0  # [h] ten years
_MOST_STRETCHES = 200
_TEMPERATURE: Field = next(f for f in fields_of("steps.temperature") if f.name == "at")
_GRAMMAR = (
    'write temperature = "37 degC" with for = "16 h", or a list of'
    ' { at = "37 degC", for = "5 h" } and { to = "4 degC", over = "30 min" }'
)


def checked_programme(step: Section) -> tuple[Stretch, ...]:
    """Return the temperature programme of a step; problems are noted."""
    written = step.written.get("temperature")
    if written is None:  # noted as missing already
        return ()
    if not isinstance(written, list):
        return _single(step, written)
    if "for" in step:
        step.add("for", "this goes with a single temperature; in a list each stretch has its own")
    if not written:
        step.add("temperature", f"this list is empty; {_GRAMMAR}")
    if len(written) > _MOST_STRETCHES:
        step.add("temperature", f"{len(written)} stretches are more than any plan needs")
        return ()
    stretches = tuple(_stretch(step, index, line) for index, line in enumerate(written))
    if hours_of(stretches) > LONGEST:
        step.add("temperature", "this programme takes more than ten years")
    return stretches


def hours_of(stretches: tuple[Stretch, ...]) -> float:
    """Return how long a programme lasts (nan where a part of it is unknown). [h]."""
    return fsum(stretch.hours for stretch in stretches)


def _single(step: Section, written: Any) -> tuple[Stretch, ...]:
    if isinstance(written, dict):
        step.add("temperature", f"a table stands here; {_GRAMMAR}")
        return ()
    quantity = step.quantity_of(written, step.at("temperature"), _TEMPERATURE)
    if "for" not in step:
        step.missing("for", "with a single temperature")
        return ()
    temperature = step.made("temperature", quantity)
    return (Stretch(temperature, step.needed("for").quantity.value, ramp=False),)


def _stretch(step: Section, index: int, written: Any) -> Stretch:
    place = f"{step.at('temperature')}[{index}]"
    if not isinstance(written, dict):
        step.problems.add(place, f"{shown(written)} is no stretch of a programme; {_GRAMMAR}")
        return Stretch(step.made("temperature", UNKNOWN), UNKNOWN.value, ramp=False)
    line = Section(written, place, "steps.temperature", step.problems)
    ramp = "to" in line or ("over" in line and "at" not in line)
    temperature, duration = ("to", "over") if ramp else ("at", "for")
    for key in ("at", "for") if ramp else ("over",):
        if key in line:
            line.add(key, f"this does not go with {temperature}; {_GRAMMAR}")
    for key in (temperature, duration):
        if key not in line:
            other = duration if key == temperature else temperature
            line.missing(key, f"beside {other}" if other in line else "")
    return Stretch(line.needed(temperature), line.needed(duration).quantity.value, ramp)


def end_temperature(stretches: tuple[Stretch, ...]) -> float | None:
    """Return the temperature at which a programme ends, or None without one. [K]."""
    return stretches[-1].temperature.quantity.value if stretches else None
