"""Readings from CSV files: absorbance traces, stability data, end-points."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Literal, cast

import numpy as np
from numpy.typing import NDArray

from digestplan.lots.assay import Trace
from digestplan.lots.csv_table import Column, read_table
from digestplan.problems import InputError, Problem
from digestplan.quantities import QuantityError, parse_quantity

Array = NDArray[np.float64]

_MOST_ABSORBANCE = 10.0
_MOLES = {"mol": 1.0, "mmol": 1e-3, "umol": 1e-6, "µmol": 1e-6, "μmol": 1e-6, "nmol": 1e-9}


@dataclass(frozen=True, slots=True, eq=False)
class Stability:
    """Activity against time, as for `fit_inactivation` and `shelf_life`.

    Attributes
    ----------
    temperature, hours, activity
        Shape (n_points,). [K], [h], as in the file
    batch
        The batch of each point, shape (n_points,).
    """

    temperature: Array
    hours: Array
    activity: Array
    batch: tuple[str, ...]


@dataclass(frozen=True, slots=True, eq=False)
class EndPoints:
    """Signals of an end-point assay.

    Attributes
    ----------
    standard_amount, standard_signal
        Of the standards, shape (n_standards,). [mol]
    sample, blank
        Signals, shape (n_samples,) and (n_blanks,).
    """

    standard_amount: Array
    standard_signal: Array
    sample: Array
    blank: Array


def read_readings(path: str | Path) -> tuple[Trace, ...]:
    """
    Read the absorbance traces of an assay.

    Parameters
    ----------
    path
        A CSV file with the columns ``time [min]``, ``reading`` and, if need be, ``series``
        (sample or blank) and ``replicate``.

    Returns
    -------
    traces
        One for each series and replicate, in the order of the file.
    """
    table = read_table(
        path,
        (
            Column("time", _times, low=0.0, example="time [min]"),
            Column("reading", low=-_MOST_ABSORBANCE, high=_MOST_ABSORBANCE, example="reading"),
            Column("series", choices=("sample", "blank"), otherwise="sample"),
            Column("replicate", choices=(), otherwise="1"),
        ),
    )
    return tuple(
        Trace(
            rows["time"].to_numpy(dtype=float),
            rows["reading"].to_numpy(dtype=float),
            cast('Literal["sample", "blank"]', rows["series"].iloc[0]),
            str(rows["replicate"].iloc[0]),
        )
        for _, rows in table.groupby(["series", "replicate"], sort=False)
    )


def read_stability(path: str | Path) -> Stability:
    """
    Read activity against time.

    Parameters
    ----------
    path
        A CSV file with the columns ``time [d]``, ``temperature [degC]``, ``activity`` and, if
        need be, ``batch``.

    Returns
    -------
    stability
        The points, in the order of the file.
    """
    table = read_table(
        path,
        (
            Column("time", _times, low=0.0, example="time [d]"),
            Column("temperature", _temperatures, low=0.0, example="temperature [degC]"),
            Column("activity", low=0.0, example="activity"),
            Column("batch", choices=(), otherwise="1"),
        ),
    )
    return Stability(
        table["temperature"].to_numpy(dtype=float),
        table["time"].to_numpy(dtype=float),
        table["activity"].to_numpy(dtype=float),
        tuple(map(str, table["batch"])),
    )


def read_end_points(path: str | Path) -> EndPoints:
    """
    Read standards, samples and blanks of an end-point assay.

    Parameters
    ----------
    path
        A CSV file with the columns ``series`` (standard, sample or blank), ``signal`` and, where
        there are standards, their ``amount [µmol]``.

    Returns
    -------
    end_points
        The signals by series.
    """
    table = read_table(
        path,
        (
            Column("series", choices=("standard", "sample", "blank"), example="series"),
            Column(
                "amount",
                _moles,
                otherwise="",
                low=0.0,
                may_be_empty=True,
                example="amount [µmol]",
            ),
            Column("signal", example="signal"),
        ),
    )
    import pandas as pd

    table["amount"] = pd.to_numeric(table["amount"], errors="coerce")  # where there is no column
    standard = table["series"] == "standard"
    missing = table[standard & table["amount"].isna()]
    if len(missing):
        raise InputError(
            *(
                Problem("amount", "a standard needs its amount", str(path), int(line))
                for line in missing["line"]
            )
        )

    def signal(which: str) -> Array:
        return table.loc[table["series"] == which, "signal"].to_numpy(dtype=float)

    amounts = table.loc[standard, "amount"].to_numpy(dtype=float)
    return EndPoints(amounts, signal("standard"), signal("sample"), signal("blank"))


# -- units in headers -----------------------------------------------------------------------


def _times(unit: str) -> Callable[[Array], Array]:
    factor = parse_quantity(f"1 {unit}", "time").value
    return lambda values: values * factor


def _temperatures(unit: str) -> Callable[[Array], Array]:
    at_0, at_1 = (parse_quantity(f"{n} {unit}", "temperature").value for n in (20, 21))
    return lambda values: at_0 + (values - 20) * (at_1 - at_0)


def _moles(unit: str) -> Callable[[Array], Array]:
    if unit not in _MOLES:
        raise QuantityError(f'"{unit}" is no unit of amount; one is wanted, such as "µmol"')
    return lambda values: values * _MOLES[unit]
