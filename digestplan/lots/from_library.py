"""What the library says of how a lot ages, in the form that its history takes."""

from collections.abc import Mapping
from functools import cache
from typing import cast

from digestplan import library
from digestplan.lots.storage import Form, StorageKinetics, log_moments, storage_kinetics
from digestplan.problems import InputError, Problem
from digestplan.quantities import QuantityError, parse_quantity


@cache
def kinetics_of(enzyme: str) -> Mapping[Form, StorageKinetics]:
    """
    Return how each form of an enzyme dies in storage.

    Parameters
    ----------
    enzyme
        The library's key.

    Returns
    -------
    kinetics
        By form. An `InputError` where the library does not know the enzyme.
    """
    try:
        entry = library.enzyme(enzyme)
    except library.UnknownKey as error:
        raise InputError(Problem("enzyme", str(error))) from None
    kinetics: dict[Form, StorageKinetics] = {}
    for form, storage in entry.storage.items():
        quantities = {name: value.quantity for name, value in storage.values.items()}
        kinetics[cast("Form", form)] = storage_kinetics(
            quantities["rate"],
            quantities["energy"],
            quantities["temperature"].value,
            thaw_loss=quantities.get("thaw"),
            opening_loss=quantities.get("opening"),
        )
    return kinetics


def label_log_sd(label_activity: str | None) -> float:
    """
    Return how far the activity at receipt may lie from the label, as a logarithm.

    Parameters
    ----------
    label_activity
        As the label says it; its own spread counts where it has one, else the library's.

    Returns
    -------
    log_sd
        One standard deviation. [1]
    """
    if label_activity is not None:
        try:
            written = parse_quantity(label_activity, "activity")
        except QuantityError as error:
            raise InputError(Problem("label_activity", str(error))) from None
        if written.distribution != "exact":
            return log_moments(written)[1]
    return log_moments(library.label_at_receipt().quantity)[1]
