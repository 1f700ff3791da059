"""The lot of a plan: label activity, what is left of it, and its certificate's factors."""

from digestplan.plan.model import Lot, Plan
from digestplan.plan.section import Section
from digestplan.plan.units import MASS
from digestplan.plan.wording import plain, shown
from digestplan.quantities import QuantityError, parse_conversion

_MOST_CONVERSIONS = 20


def checked_lot(section: Section) -> Lot:
    """Return the lot that a section describes; problems are noted."""
    return Lot(
        id=section.text("id"),
        label_activity=section.value("label_activity"),
        remaining=section.needed("remaining"),
        conversions=_conversions(section),
    )


def asks_register(plan: Plan) -> bool:
    """Whether a plan names a lot and leaves to the register what is on its label or left of it."""
    if plan.lot.id is None:
        return False
    return plan.lot.remaining.origin == "default" or asks_label(plan)


def asks_label(plan: Plan) -> bool:
    """Whether a plan counts in activity units and does not say what is on the label."""
    return plan.lot.label_activity is None and plan.activity_unit != MASS


def _conversions(section: Section) -> dict[tuple[str, str], float]:
    written = section.written.get("conversions", [])
    example = section.fields["conversions"].example
    if not isinstance(written, list) or len(written) > _MOST_CONVERSIONS:
        section.add("conversions", f"a short list is wanted here, such as {example}")
        return {}
    factors: dict[tuple[str, str], float] = {}
    for index, text in enumerate(written):
        place = f"{section.at('conversions')}[{index}]"
        if not isinstance(text, str):
            section.problems.add(place, f"{shown(text)} is no text; write for instance {example}")
            continue
        try:
            one, other, factor = parse_conversion(text)
        except QuantityError as error:
            section.problems.add(place, plain(str(error), 600))
            continue
        if (one, other) in factors:
            section.problems.add(place, f"the factor between {one} and {other} is given twice")
        factors[one, other], factors[other, one] = factor, 1 / factor
    return factors
