"""What the lab has: its incubators, the enzyme it will spend, a bath that cools by itself."""

from dataclasses import replace

from digestplan.plan.model import Bench
from digestplan.plan.section import Section
from digestplan.plan.wording import shown
from digestplan.quantities.model import Quantity

_MOST_INCUBATORS = 40


def checked_bench(section: Section) -> Bench:
    """Return what the lab has; problems are noted."""
    return Bench(
        incubators=_incubators(section),
        most_charge=_mass(section, "most_charge"),
        stock=_mass(section, "stock"),
        programmable="programmable" not in section or section.flag("programmable"),
    )


def _incubators(section: Section) -> tuple[Quantity, ...]:
    field = section.fields["incubators"]
    written = section.written.get("incubators", [])
    if not isinstance(written, list):
        section.add(
            "incubators", f"{shown(written)} is no list; write for instance {field.example}"
        )
        return ()
    if len(written) > _MOST_INCUBATORS:
        section.add("incubators", f"{len(written)} incubators are more than any lab needs")
        return ()
    place, one = section.at("incubators"), replace(field, kind="temperature", example='"37 degC"')
    return tuple(
        section.quantity_of(text, f"{place}[{index}]", one) for index, text in enumerate(written)
    )


def _mass(section: Section, name: str) -> Quantity | None:
    value = section.value(name)
    return None if value is None else value.quantity
