"""How an assay was made, as it is written: beside its readings, or on the command line.

In a file of readings the setup stands in comments above the table, ``# total volume: 1 mL``.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from difflib import get_close_matches
from pathlib import Path

from digestplan import library
from digestplan.library import AssayEntry
from digestplan.lots.assay import ONE_CM, WAYS, Definition, Setup, label_in_unit
from digestplan.lots.csv_table import text_of
from digestplan.lots.standard_curve import AmountDefinition
from digestplan.lots.uncertainty import Measured
from digestplan.problems import InputError, Problem, Problems
from digestplan.quantities import (
    ASSAY_UNITS,
    Quantity,
    QuantityError,
    parse_conversion,
    parse_quantity,
)

# What a setup may say, and the kind of quantity that it is; None for words.
KEYS: Mapping[str, str | None] = {
    "assay": None,
    "unit": None,
    "direction": None,
    "conversion": None,
    "extinction": "extinction",
    "total volume": "volume",
    "sample volume": "volume",
    "path": "length",
    "dilution": "positive_number",
    "concentration": "mass_concentration",
    "label": "activity",
    "time": "time",
}
_COMMENT = re.compile(r"#\s*([A-Za-z][A-Za-z ]*?)\s*:\s*(.*\S)\s*")
_MICRO = 1e-6
_NEAR = 0.8  # how alike a comment and a key must be for a slip of the pen


@dataclass(frozen=True, slots=True)
class Label:
    """What the label says, and the certificate's factors between units.

    Attributes
    ----------
    activity
        As written, such as ``280 CDU/mg``.
    conversions
        (a, b) → how many b make one a.
    """

    activity: Quantity
    conversions: Mapping[tuple[str, str], float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class WrittenSetup:
    """A setup that was read and checked.

    Attributes
    ----------
    entry
        The library's assay; None where none was named.
    unit
        The unit wanted; None where only rates are.
    values
        What was written, by key, in core units.
    falling
        Whether the absorbance falls as the substrate is converted.
    label
        What the fraction is to be of; None where nothing was said of it.
    """

    entry: AssayEntry | None
    unit: str | None
    values: Mapping[str, Measured]
    falling: bool
    label: Label | None

    @property
    def way(self) -> str | None:
        """``extinction``, ``definition`` or ``amount``; None where only rates are wanted."""
        if self.entry is not None and self.entry.unit == self.unit:
            return self.entry.way
        return None if self.unit is None else WAYS.get(self.unit, "extinction")

    def absorbance(self) -> Setup:
        """Return the setup of an assay by absorbance."""
        assert self.unit is not None
        self._need("total volume", "sample volume")
        extinction = self.values.get("extinction")
        if extinction is None and self.entry is not None and "extinction" in self.entry.values:
            extinction = Measured.of(self.entry.values["extinction"].quantity)
        return Setup(
            self.unit,
            self.values["total volume"],
            self.values["sample volume"],
            path=self.values.get("path", ONE_CM),
            dilution=self.values.get("dilution", Measured(1.0)),
            extinction=extinction,
            definition=self._definition(),
            enzyme_concentration=self.values.get("concentration"),
            label_activity=self.label_activity(),
            falling=self.falling,
        )

    def amount(self) -> AmountDefinition:
        """Return the definition of the unit of an end-point assay."""
        if self.entry is None or self.entry.way != "amount":
            able = ", ".join(key for key in library.keys("assay") if _by_amount(key))
            message = f"end-points against standards need an assay that counts amounts: {able}"
            raise InputError(Problem("assay", message))
        self._need("time", "sample volume")
        made, within = self.entry.values["micromoles"], self.entry.values["within"]
        return AmountDefinition(made.quantity.value * _MICRO, within.quantity.value)

    def label_activity(self) -> Measured | None:
        """Return the label's activity in the unit of the assay. [unit/g]"""
        if self.label is None or self.unit is None:
            return None
        written = self.label.activity
        return label_in_unit(
            Measured.of(written), written.activity or "", self.unit, self.label.conversions
        )

    def _definition(self) -> Definition | None:
        for key in library.keys("assay"):
            entry = library.assay(key)
            if entry.way == "definition" and entry.unit == self.unit:
                change, volume, path = (
                    entry.values[name].quantity.value for name in ("change", "volume", "path")
                )
                return Definition(change, volume, path)
        return None

    def _need(self, *keys: str) -> None:
        examples = {"total volume": "1 mL", "sample volume": "20 uL", "time": "5 h"}
        problems = [
            Problem(key, f'this is missing; write for instance "{examples[key]}"')
            for key in keys
            if key not in self.values
        ]
        if problems:
            raise InputError(*problems)


def setup_beside(path: str | Path) -> dict[str, str]:
    """
    Read what the comments above a table of readings say of its assay.

    Parameters
    ----------
    path
        The CSV file.

    Returns
    -------
    written
        Texts by key, the keys being those of `KEYS`; other comments are passed over.
    """
    written: dict[str, str] = {}
    problems = Problems()
    for number, line in enumerate(text_of(path).splitlines(), start=1):
        if line.strip() and not line.startswith("#"):
            break
        match = _COMMENT.fullmatch(line.strip())
        if match is None:
            continue
        key = match[1].lower()
        if key in written:
            problems.add(key, "this is said twice", line=number)
        elif key in KEYS:
            written[key] = match[2]
        elif near := get_close_matches(key, list(KEYS), 1, _NEAR):
            problems.add(key, f"a setup has no such key; is {near[0]} meant?", line=number)
    problems.raise_if_any(str(path))
    return written


def checked_setup(written: Mapping[str, str], label: Label | None = None) -> WrittenSetup:
    """
    Check a setup.

    Parameters
    ----------
    written
        Texts by key.
    label
        That of the lot in the register, which the setup need not repeat.

    Returns
    -------
    setup
        With everything in core units. An `InputError` tells all that is wrong.
    """
    problems = Problems()
    values: dict[str, Measured] = {}
    quantities: dict[str, Quantity] = {}
    for key, kind in KEYS.items():
        if kind is None or key not in written:
            continue
        try:
            quantities[key] = parse_quantity(written[key], kind)
        except QuantityError as error:
            problems.add(key, str(error))
            continue
        values[key] = Measured.of(quantities[key])
    entry = _entry(written.get("assay"), problems)
    unit = _unit(written.get("unit"), entry, problems)
    falling = _falling(written.get("direction"), entry, problems)
    conversions = _conversions(written.get("conversion"), problems)
    if "label" in quantities:
        label = Label(quantities["label"])
    if label is not None:
        label = Label(label.activity, {**label.conversions, **conversions})
    problems.raise_if_any()
    return WrittenSetup(entry, unit, values, falling, label)


# -- the parts ------------------------------------------------------------------------------


def _by_amount(key: str) -> bool:
    return library.assay(key).way == "amount"


def _entry(key: str | None, problems: Problems) -> AssayEntry | None:
    if key is None:
        return None
    try:
        return library.assay(key)
    except library.UnknownKey:
        known = ", ".join(library.keys("assay"))
        problems.add("assay", f'the library has no assay "{key:.40}"; it has {known}')
        return None


def _unit(written: str | None, entry: AssayEntry | None, problems: Problems) -> str | None:
    if written is None:
        return None if entry is None else entry.unit
    if written not in ASSAY_UNITS:
        known = ", ".join(ASSAY_UNITS)
        problems.add("unit", f'"{written:.40}" is no unit of activity; known are {known}')
        return None
    if entry is not None and written != entry.unit:
        problems.add("unit", f"the assay {entry.key} gives {entry.unit}, not {written}")
    return written


def _falling(written: str | None, entry: AssayEntry | None, problems: Problems) -> bool:
    if written is None:
        return entry is not None and entry.falling
    if written not in {"rising", "falling"}:
        problems.add("direction", f'"{written:.40}": rising or falling is wanted')
    return written == "falling"


def _conversions(written: str | None, problems: Problems) -> dict[tuple[str, str], float]:
    factors: dict[tuple[str, str], float] = {}
    for text in (written or "").split(";"):
        if not text.strip():
            continue
        try:
            one, other, factor = parse_conversion(text)
        except QuantityError as error:
            problems.add("conversion", str(error))
        else:
            factors[one, other] = factor
    return factors
