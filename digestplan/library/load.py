"""From the library's TOML files to records; each file is read when it is first asked for."""

import difflib
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache, cached_property
from importlib.resources import files
from typing import Any

from digestplan.quantities import ASSAY_UNITS, Quantity, parse_quantity

SECTIONS = {
    "enzyme": "enzymes.toml",
    "material": "materials.toml",
    "buffer": "buffers.toml",
    "reagent": "reagents.toml",
    "solute": "solutes.toml",
    "assay": "assays.toml",
    "unit": "",  # defined with the units themselves
}
SOURCE_KINDS = ("published", "common practice", "from memory")
QUANTITY_KINDS = {
    "reference_temperature": "temperature",
    "activation_energy": "energy",
    "inactivation_rate": "rate",
    "inactivation_energy": "energy",
    "autolysis_rate": "autolysis_rate",
    "autolysis_energy": "energy",
    "ph_low_pka": "ph",
    "ph_high_pka": "ph",
    "cofactor_half_saturation": "molar_concentration",
    "saturation_ratio": "ratio",
    "size": "molar_mass",
    "substrate_fraction": "fraction",
    "mineral_fraction": "fraction",
    "carbonate_fraction": "fraction",
    "density": "density",
    "calcium": "molar_concentration",
    "melting_rate": "rate",
    "melting_energy": "energy",
    "melting_temperature": "temperature",
    "pk": "ph",
    "enthalpy": "enthalpy",
    "heat_capacity": "heat_capacity",
    "per_calcium": "positive_number",
    "usable": "positive_number",
    "layer_diffusivity": "diffusivity",
    "free_diffusivity": "diffusivity",
    "film_velocity": "velocity",
    "surface_velocity": "velocity",
    "energy": "energy",
    "tissue_share": "positive_number",
    "acid_loss": "rate",
    "acid_energy": "energy",
    "rate": "rate",
    "temperature": "temperature",
    "thaw": "fraction",
    "opening": "fraction",
    "ratio": "ratio",
    "duration": "time",
    "extent": "fraction",
    "thickness": "length",
    "ph": "ph",
    "wavelength": "length",
    "extinction": "extinction",
    "change": "rate",
    "volume": "volume",
    "path": "length",
    "micromoles": "positive_number",
    "within": "time",
    "at_receipt": "positive_number",
    "label_activity": "activity",
}


class UnknownKey(KeyError):  # noqa: N818 - it says what it is
    """A key that the library does not know; ``near`` holds the nearest ones it does."""

    def __init__(self, section: str, key: str) -> None:
        self.section, self.key, self.near = section, key, near(key, section)
        hint = f"; near: {', '.join(self.near)}" if self.near else ""
        super().__init__(f"the library knows no {section} {key!r}{hint}")

    def __str__(self) -> str:
        return str(self.args[0])


@dataclass(frozen=True)
class LibraryValue:
    """One constant: how it is written, who says so, and how well it is known.

    ``quantity_kind`` is the kind of quantity as which ``text`` is read.
    """

    text: str
    quantity_kind: str
    source: str
    kind: str
    range: str = ""
    note: str = ""

    @cached_property
    def quantity(self) -> Quantity:
        """The value with its spread, in the core unit of its kind."""
        return parse_quantity(self.text, self.quantity_kind)


@dataclass(frozen=True, slots=True)
class Storage:
    """How a lot ages in one form: rate at a temperature, energy, loss a thaw and an opening."""

    form: str
    values: Mapping[str, LibraryValue]


@dataclass(frozen=True, slots=True)
class EnzymeEntry:
    """An enzyme.

    ``laws`` names the extent law by material where it is not the first-order one;
    ``diffusivity`` holds the diffusivity in the tissue by material where it must penetrate;
    ``reversible`` are the stops that only hold it while they last; ``hazards`` are codes of the
    cautions that come with it.
    """

    key: str
    name: str
    organism: str
    ec: str
    rate_law: str
    inactivation: str
    values: Mapping[str, LibraryValue]
    cofactor: str | None
    cofactor_needed: bool
    metal: str | None
    disulfide: bool
    thiol: bool
    ph_range: tuple[float, float]
    measured_temperature: tuple[float, float]
    stopped_by: tuple[str, ...]
    slowed_by: tuple[str, ...]
    reversible: tuple[str, ...]
    inhibitors: tuple[str, ...]
    working: str
    label: str
    hazards: tuple[str, ...]
    laws: Mapping[str, str]
    diffusivity: Mapping[str, LibraryValue]
    storage: Mapping[str, Storage]


@dataclass(frozen=True, slots=True)
class MaterialEntry:
    """A material: what it is, and its values."""

    key: str
    name: str
    what: str
    values: Mapping[str, LibraryValue]


@dataclass(frozen=True, slots=True)
class Acid:
    """One acid of a buffer: the charge of its acid form, its pK at 25 °C and how that moves."""

    charge: int
    values: Mapping[str, LibraryValue]

    @property
    def pk(self) -> float:
        """The pK at 25 °C and no ionic strength."""
        return self.values["pk"].quantity.value

    @property
    def enthalpy(self) -> float:
        """Enthalpy of ionisation. [J/mol]"""
        return self.values["enthalpy"].quantity.value

    @property
    def heat_capacity(self) -> float:
        """Heat capacity of ionisation. [J/(mol K)]"""
        return self.values["heat_capacity"].quantity.value


@dataclass(frozen=True, slots=True)
class BufferEntry:
    """A buffer: its acids, from the most protonated on."""

    key: str
    name: str
    formula: str
    binds_calcium: bool
    acids: tuple[Acid, ...]

    def pk_near(self, ph: float) -> Acid:
        """Return the acid that buffers at a pH."""
        return min(self.acids, key=lambda acid: abs(acid.pk - ph))


@dataclass(frozen=True, slots=True)
class ReagentEntry:
    """What dissolves mineral."""

    key: str
    name: str
    formula: str
    strong: bool
    oxidiser: bool
    chelator: bool
    binds_calcium: bool
    values: Mapping[str, LibraryValue]


@dataclass(frozen=True, slots=True)
class SoluteEntry:
    """What a liquid leaves in a piece."""

    key: str
    name: str
    values: Mapping[str, LibraryValue]


@dataclass(frozen=True, slots=True)
class KnownRunEntry:
    """A protocol of common practice: it sets the susceptibility where the lab has none."""

    enzyme: str
    material: str
    source: str
    kind: str
    values: Mapping[str, LibraryValue]


@cache
def _table(name: str) -> dict[str, Any]:
    return tomllib.loads(files(__package__).joinpath(name).read_text("utf-8"))


def _values(raw: Mapping[str, Any]) -> dict[str, LibraryValue]:
    return {
        name: _value(item, QUANTITY_KINDS[name])
        for name, item in raw.items()
        if isinstance(item, Mapping) and "value" in item
    }


def _value(item: Mapping[str, str], quantity_kind: str) -> LibraryValue:
    return LibraryValue(
        item["value"],
        quantity_kind,
        item["source"],
        item["kind"],
        item.get("range", ""),
        item.get("note", ""),
    )


def _found(section: str, key: str) -> dict[str, Any]:
    entries = _table(SECTIONS[section])
    if key not in entries:
        raise UnknownKey(section, key)
    entry: dict[str, Any] = entries[key]
    return entry


@cache
def enzyme(key: str) -> EnzymeEntry:
    """Return an enzyme; raise `UnknownKey` where there is none of that key."""
    raw = _found("enzyme", key)
    low, high = (parse_quantity(t, "temperature").value for t in raw["measured_temperature"])
    forms = {**_table("storage.toml"), **raw.get("storage", {})}
    return EnzymeEntry(
        key=key,
        name=raw["name"],
        organism=raw["organism"],
        ec=raw["ec"],
        rate_law=raw["rate_law"],
        inactivation=raw["inactivation"],
        values=_values(raw),
        cofactor=raw.get("cofactor"),
        cofactor_needed=raw["cofactor_needed"],
        metal=raw.get("metal") or None,
        disulfide=raw.get("disulfide", False),
        thiol=raw.get("thiol", False),
        ph_range=(raw["ph_range"][0], raw["ph_range"][1]),
        measured_temperature=(low, high),
        stopped_by=tuple(raw["stopped_by"]),
        slowed_by=tuple(raw.get("slowed_by", ())),
        reversible=tuple(raw.get("reversible", ())),
        inhibitors=tuple(raw["inhibitors"]),
        working=raw["working"],
        label=raw["label"],
        hazards=tuple(raw["hazards"]),
        laws=raw.get("laws", {}),
        diffusivity={m: _value(d, "diffusivity") for m, d in raw.get("diffusivity", {}).items()},
        storage={form: Storage(form, _values(item)) for form, item in forms.items()},
    )


@cache
def material(key: str) -> MaterialEntry:
    """Return a material; raise `UnknownKey` where there is none of that key."""
    raw = _found("material", key)
    return MaterialEntry(key, raw["name"], raw["what"], _values(raw))


@cache
def buffer(key: str) -> BufferEntry:
    """Return a buffer; raise `UnknownKey` where there is none of that key."""
    raw = _found("buffer", key)
    acids = tuple(Acid(acid["charge"], _values(acid)) for acid in raw["acids"])
    return BufferEntry(key, raw["name"], raw["formula"], raw.get("binds_calcium", False), acids)


@cache
def reagent(key: str) -> ReagentEntry:
    """Return a reagent by its key, or by its name as people write it (``hydrochloric acid``)."""
    key = key.strip().lower().replace(" ", "-")
    raw = _found("reagent", key)
    flags = {flag: raw.get(flag, False) for flag in ("strong", "oxidiser", "chelator")}
    binds = raw.get("binds_calcium", False)
    return ReagentEntry(
        key, raw["name"], raw["formula"], **flags, binds_calcium=binds, values=_values(raw)
    )


@cache
def solute(key: str) -> SoluteEntry:
    """Return a solute; raise `UnknownKey` where there is none of that key."""
    raw = _found("solute", key)
    return SoluteEntry(key, raw["name"], _values(raw))


@cache
def known_run(enzyme_key: str, material_key: str) -> KnownRunEntry | None:
    """Return the run of common practice for an enzyme on a material, or None."""
    raw = _table("known_runs.toml").get(enzyme_key, {}).get(material_key)
    if raw is None:
        return None
    source, kind = raw["source"], raw["kind"]
    values = {
        name: LibraryValue(str(item), QUANTITY_KINDS[name], source, kind)
        for name, item in raw.items()
        if name in QUANTITY_KINDS
    }
    return KnownRunEntry(enzyme_key, material_key, source, kind, values)


def keys(section: str) -> tuple[str, ...]:
    """Return all keys of a section of `SECTIONS`; of ``entry``, those of all sections."""
    if section == "entry":
        return tuple(key for part in SECTIONS for key in keys(part))
    return tuple(ASSAY_UNITS if section == "unit" else _table(SECTIONS[section]))


def near(key: str, section: str) -> tuple[str, ...]:
    """Return the keys of a section that are spelt nearly like one that it does not know."""
    known = {k.lower(): k for k in keys(section)}
    folded = key.lower().replace(" ", "-")
    found = difflib.get_close_matches(folded, known, n=3, cutoff=0.5)
    inside = [k for k in known if len(key) > 3 and key.lower() in k]
    return tuple(known[k] for k in dict.fromkeys([*found, *inside]))[:3]
