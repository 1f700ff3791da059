"""What the library knows under the keys that a plan names; unknown ones are noted."""

from collections.abc import Callable
from typing import TypeVar

from digestplan import library
from digestplan.library import EnzymeEntry, MaterialEntry, UnknownKey
from digestplan.plan.section import Section
from digestplan.plan.wording import listed, shown

Entry = TypeVar("Entry")
_NEVER = ("hydrofluoric", "hydrogen fluoride", "bifluoride", "hydrogen difluoride")
_REFUSED = (
    "{} is refused altogether: hydrofluoric acid burns to the bone, kills through the skin and has"
    " no place in these treatments; ask the people licensed or responsible for chemical safety"
)


def enzyme_entry(lot: Section) -> EnzymeEntry | None:
    """Return what the library knows of the lot's enzyme."""
    return _looked_up(lot, "enzyme", "enzyme", library.enzyme)


def material_entry(sample: Section) -> MaterialEntry | None:
    """Return what the library knows of the sample's material."""
    return _looked_up(sample, "material", "material", library.material)


def buffer_key(section: Section) -> str | None:
    """Return the key of a liquid's buffer, where the library knows it."""
    found = _looked_up(section, "buffer", "buffer", library.buffer)
    return None if found is None else found.key


def reagent_key(section: Section) -> str | None:
    """Return the key of a bath's reagent, where the library knows it."""
    if _is_never(section.written.get("reagent")):
        refuse_hydrofluoric(section, "reagent")
        return None
    found = _looked_up(section, "reagent", "reagent", library.reagent)
    return None if found is None else found.key


def refuse_hydrofluoric(section: Section, name: str) -> None:
    """Note that hydrofluoric acid, or a salt that sets it free, is written under a key."""
    written = section.written.get(name)
    if _is_never(written):
        section.add(name, _REFUSED.format(shown(written)))


def _is_never(written: object) -> bool:
    if not isinstance(written, str):
        return False
    lower = " ".join(written.lower().replace("-", " ").split())
    return any(word in lower for word in _NEVER) or lower.split()[-1:] == ["hf"]


def _looked_up(
    section: Section, name: str, kind: str, find: Callable[[str], Entry]
) -> Entry | None:
    written = section.text(name)
    if written is None:
        return None
    try:
        return find(written)
    except UnknownKey as unknown:
        near = unknown.near
        hint = f"is {listed(near)} meant?" if near else f"known: {', '.join(library.keys(kind))}"
        section.add(name, f"the library knows no {kind} {shown(written)}; {hint}")
        return None
