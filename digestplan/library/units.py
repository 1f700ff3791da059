"""The units of activity, as entries: what one unit is, and who says so."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cache

from digestplan.library.load import LibraryValue, UnknownKey
from digestplan.quantities import ASSAY_UNITS


@dataclass(frozen=True, slots=True)
class UnitEntry:
    """
    A unit of activity.

    Attributes
    ----------
    key, name
        How it is written.
    definition
        What one unit does under the conditions of its assay.
    source
        Who defines it.
    also
        Another unit of the same quantity, by definition; None without one.
    values
        None: a definition is exact.
    """

    key: str
    name: str
    definition: str
    source: str
    also: str | None
    values: Mapping[str, LibraryValue] = field(default_factory=dict)


@cache
def unit(key: str) -> UnitEntry:
    """Return a unit of activity; raise `UnknownKey` where there is none of that key."""
    if key not in ASSAY_UNITS:
        raise UnknownKey("unit", key)
    found = ASSAY_UNITS[key]
    return UnitEntry(key, f"unit of activity {key}", found.definition, found.source, found.also)
