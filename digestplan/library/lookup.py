"""An entry by its key alone, whatever it is."""

from collections.abc import Callable, Mapping
from types import MappingProxyType

from digestplan.library.assays import AssayEntry, assay
from digestplan.library.load import (
    SECTIONS,
    BufferEntry,
    EnzymeEntry,
    MaterialEntry,
    ReagentEntry,
    SoluteEntry,
    UnknownKey,
    buffer,
    enzyme,
    material,
    reagent,
    solute,
)
from digestplan.library.units import UnitEntry, unit

Entry = (
    EnzymeEntry | MaterialEntry | BufferEntry | ReagentEntry | SoluteEntry | AssayEntry | UnitEntry
)

_FIND: Mapping[str, Callable[[str], Entry]] = MappingProxyType(
    {
        "enzyme": enzyme,
        "material": material,
        "buffer": buffer,
        "reagent": reagent,
        "solute": solute,
        "assay": assay,
        "unit": unit,
    }
)


def entry(key: str) -> tuple[str, Entry]:
    """
    Return the entry of a key, whatever it is.

    Parameters
    ----------
    key
        Of any section.

    Returns
    -------
    section, entry
        The first in which it is found, in the order of `SECTIONS`.

    Raises
    ------
    UnknownKey
        Where no section has it; it carries the nearest keys of all.
    """
    for section in SECTIONS:
        try:
            return section, _FIND[section](key)
        except UnknownKey:
            continue
    raise UnknownKey("entry", key)
