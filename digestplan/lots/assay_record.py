"""What of an assay goes into the register: the fraction of the label, its error, its readings."""

from pathlib import Path
from typing import Any

import numpy as np

from digestplan.lots.assay_file import AssayOutcome
from digestplan.problems import InputError, Problem
from digestplan.quantities import Quantity, format_quantity


def written_result(outcome: AssayOutcome, path: str | Path, note: str | None) -> dict[str, Any]:
    """
    Return the fields of the entry that an assay makes.

    Parameters
    ----------
    outcome
        Of the readings, with the lot's label.
    path
        Where they stand; the note names the file.
    note
        What else is to be said.

    Returns
    -------
    written
        For an ``assayed`` entry. An `InputError` where the assay gives no fraction of the label.
    """
    fraction, per_mass = outcome.fraction, outcome.per_mass
    if fraction is None or per_mass is None:
        missing = [
            what
            for what, there in (
                ("an assay or a unit", outcome.setup.unit is not None),
                ("the concentration of the stock", "concentration" in outcome.setup.values),
                ("a label activity of the lot", outcome.setup.label is not None),
            )
            if not there
        ]
        message = f"these readings give no fraction of the label: {', '.join(missing)} is missing"
        raise InputError(Problem("assay", message, str(path)))
    if not fraction.uncertainty > 0:
        message = "these readings have no uncertainty at all: nobody can weigh them against others"
        raise InputError(Problem("assay", message, str(path)))
    found = Quantity(
        per_mass.value, per_mass.uncertainty, "normal", outcome.setup.unit, text="found"
    )
    freedom = fraction.degrees_of_freedom
    notes = [note or "", f"readings: {Path(path).name}", *outcome.notes]
    written: dict[str, Any] = {
        "fraction": fraction.value,
        "standard_error": fraction.uncertainty,
        "activity": format_quantity(found, "activity"),
        "note": "; ".join(text for text in notes if text),
    }
    if np.isfinite(freedom):
        written["degrees_of_freedom"] = freedom
    return written
