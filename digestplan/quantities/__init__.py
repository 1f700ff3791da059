"""Values with units: text in, value and spread in core units out, and back."""

from digestplan.quantities.assays import ASSAY_UNITS, AssayUnit
from digestplan.quantities.certificate import parse_conversion
from digestplan.quantities.kinds import KINDS, Form, Kind
from digestplan.quantities.model import Distribution, Quantity
from digestplan.quantities.parsing import parse_quantity
from digestplan.quantities.printing import format_quantity, other_unit
from digestplan.quantities.wording import QuantityError

__all__ = [
    "ASSAY_UNITS",
    "KINDS",
    "AssayUnit",
    "Distribution",
    "Form",
    "Kind",
    "Quantity",
    "QuantityError",
    "format_quantity",
    "other_unit",
    "parse_conversion",
    "parse_quantity",
]
