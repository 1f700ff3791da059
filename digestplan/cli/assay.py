"""``digestplan assay READINGS.csv``."""

import argparse
from typing import TYPE_CHECKING

from digestplan.cli import output

if TYPE_CHECKING:
    from digestplan.lots.assay_setup import Label
    from digestplan.lots.register.stock import LotRecord


def run(chosen: argparse.Namespace) -> None:
    """Work out the activity from a file of readings."""
    from digestplan.lots.assay_file import assay_of

    label = None
    if chosen.lot is not None:
        from digestplan.lots.register import open_register

        with open_register(chosen.register, create=False) as register:
            label = label_of(register.lot(chosen.lot))
    outcome = assay_of(chosen.readings, written_setup(chosen), label)
    if chosen.json:
        from digestplan.report.as_json import dumps
        from digestplan.report.assay_text import assay_document

        output.write(dumps(assay_document(outcome)))
        return
    from digestplan.report.assay_text import assay_text

    output.write(assay_text(outcome))


def written_setup(chosen: argparse.Namespace) -> dict[str, str]:
    """Return what the command line says of how the assay was made, by its key."""
    from digestplan.lots.assay_setup import KEYS

    written = {key: getattr(chosen, key.replace(" ", "_"), None) for key in KEYS}
    if written["conversion"] is not None:
        written["conversion"] = "; ".join(written["conversion"])
    return {key: text for key, text in written.items() if text is not None}


def label_of(record: "LotRecord") -> "Label | None":
    """Return the label of a lot, and its certificate's factors."""
    from digestplan.lots.assay_setup import Label
    from digestplan.quantities import Quantity, parse_conversion, parse_quantity

    text = record.summary.label_activity
    if text is None:
        return None
    written = parse_quantity(text, "activity")
    nominal = Quantity(written.value, activity=written.activity, text=text)
    factors = {
        (one, other): factor
        for one, other, factor in map(parse_conversion, record.received.conversions)
    }
    return Label(nominal, factors)
