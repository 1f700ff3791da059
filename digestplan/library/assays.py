"""Assays of activity, and how well a label is known at receipt."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache

from digestplan.library.load import LibraryValue, _found, _table, _values


@dataclass(frozen=True, slots=True)
class AssayEntry:
    """An assay by which a lot's activity is measured.

    Attributes
    ----------
    key, name
        As the library calls it, and as people do.
    unit
        The activity unit that it gives.
    way
        ``extinction``, ``definition`` or ``amount``.
    falling
        Whether the absorbance falls as the substrate is converted.
    conditions
        Under which the unit holds.
    values
        ``extinction``; or ``change``, ``volume`` and ``path`` of a unit that is itself a change
        of absorbance; or ``micromoles`` and ``within`` of one that is an amount in a time.
    """

    key: str
    name: str
    unit: str
    way: str
    falling: bool
    conditions: str
    values: Mapping[str, LibraryValue]


@cache
def assay(key: str) -> AssayEntry:
    """Return an assay; raise `UnknownKey` where there is none of that key."""
    raw = _found("assay", key)
    return AssayEntry(
        key,
        raw["name"],
        raw["unit"],
        raw["way"],
        raw["falling"],
        raw["conditions"],
        _values(raw),
    )


def label_at_receipt() -> LibraryValue:
    """Return what a lot holds at receipt, as a multiple of its label."""
    return _values(_table("labels.toml")["label"])["at_receipt"]
