"""Every key of a plan file: its kind, whether it must be there, what stands in for it.

The checker reads plans by this table; forms, explanations and the manual are made from it, so
that they cannot say different things.
"""

from digestplan.plan.field import Field
from digestplan.plan.sample_fields import SAMPLE_SECTIONS
from digestplan.plan.step_fields import STEP_SECTIONS

SECTIONS: dict[str, tuple[Field, ...]] = SAMPLE_SECTIONS | {
    f"steps.{name}": fields for name, fields in STEP_SECTIONS.items()
}


def fields_of(section: str) -> tuple[Field, ...]:
    """Return the keys of a section, such as ``sample`` or ``steps.digest``."""
    return SECTIONS[section]


def home_of(key: str) -> str | None:
    """Return the section that has a key, if just one has."""
    homes = [name for name, fields in SECTIONS.items() if any(f.name == key for f in fields)]
    return homes[0] if len(homes) == 1 else None
