"""What the liquid of a step, or of a known run, holds."""

from digestplan.plan.field import SOLUTES
from digestplan.plan.known import buffer_key
from digestplan.plan.model import Environment
from digestplan.plan.section import Section


def checked_environment(section: Section) -> Environment:
    """Return the liquid that a section describes; problems are noted."""
    if "buffer" in section and "ph" not in section:
        section.missing("ph", "beside buffer")
    for key in ("ph_at", "buffer_concentration"):
        other = "ph" if key == "ph_at" else "buffer"
        if key in section and other not in section:
            section.add(key, f"this says nothing without {other}")
    return Environment(
        ph=section.value("ph"),
        ph_at=section.value("ph_at") if "ph" in section else None,
        buffer=buffer_key(section),
        buffer_concentration=section.value("buffer_concentration"),
        calcium=section.value("calcium"),
        solutes=dict(section.quantities(SOLUTES)),
    )
