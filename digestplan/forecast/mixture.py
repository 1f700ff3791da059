"""Acids of a mixture, from the library's entries to what the charge balance takes."""

import numpy as np
from numpy.typing import NDArray

from digestplan import library
from digestplan.kinetics.solution import Buffer, pk_at

Array = NDArray[np.float64]

OF_ACID = {"formic-acid": "formate", "acetic-acid": "acetate", "citric-acid": "citrate"}


def buffer_pk(key: str, ph: float, temperature: Array | float) -> Array:
    """The pK with which a buffer holds near a pH, at temperatures [K]."""
    acid = library.buffer(key).pk_near(ph)
    return pk_at(temperature, acid.pk, acid.enthalpy, acid.heat_capacity)


def acid(key: str, total: Array | float, temperature: Array | float) -> Buffer:
    """A buffer of the library in a mixture, all its protons counted."""
    entry = library.buffer(key)
    pks = [pk_at(temperature, a.pk, a.enthalpy, a.heat_capacity) for a in entry.acids]
    return Buffer(total, pks, entry.acids[0].charge)


def acids_of(buffer: str | None, total: Array | float, temperature: float) -> list[Buffer]:
    """What a liquid as made up holds against acid: its buffer, or nothing."""
    return [] if buffer is None else [acid(buffer, total, temperature)]
