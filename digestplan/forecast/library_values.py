"""Constants that a treatment takes straight from the library, as values that can be drawn."""

from collections.abc import Iterable, Mapping

from digestplan import library
from digestplan.library import LibraryValue
from digestplan.plan.model import Demineralise, Plan, Rinse, Value

GENERAL = "general"


def library_value(section: str, key: str, name: str) -> Value | None:
    """Return one constant of the library as a value, or None where the entry has none."""
    if section == "reagent":
        key = library.reagent(key).key
        known = library.reagent(key).values.get(name)
    elif section == "solute":
        known = library.solute(key).values.get(name)
    else:
        known = library.material(key).values.get(name)
    return None if known is None else _value(key, name, known)


def _value(key: str, name: str, known: LibraryValue) -> Value:
    return Value(known.quantity, f"library.{key}.{name}", "library", known.source)


def treatment_values(plan: Plan) -> tuple[Value, ...]:
    """
    Return every constant of the library that the steps of a plan draw on.

    Parameters
    ----------
    plan
        The plan.

    Returns
    -------
    values
        Constants of its reagents, of what they leave behind, and of the damage that acid does;
        none for a plan that only digests and holds.
    """
    baths = [step for step in plan.steps if isinstance(step, Demineralise)]
    if not baths and not any(isinstance(step, Rinse) for step in plan.steps):
        return ()
    values: list[Value] = []
    for key in dict.fromkeys(step.reagent for step in baths):
        values += _all(library.reagent(key).key, library.reagent(key).values)
    for key in library.keys("solute"):
        values += _all(key, library.solute(key).values)
    if plan.sample.material is not None and baths:
        values += [
            value
            for name in ("calcium", "carbonate_fraction")
            if (value := library_value("material", plan.sample.material, name)) is not None
        ]
    return tuple(values)


def _all(key: str, values: Mapping[str, LibraryValue]) -> Iterable[Value]:
    return [_value(key, name, known) for name, known in values.items()]
