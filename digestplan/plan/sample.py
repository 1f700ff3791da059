"""The sample of a plan: what is written, then what the library knows of its material."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import cast

from digestplan.library import MaterialEntry
from digestplan.plan.environment import checked_environment
from digestplan.plan.known import reagent_key
from digestplan.plan.model import KnownRun, Sample, Shape, Value
from digestplan.plan.pair import Pair
from digestplan.plan.section import ASSUMED, Section
from digestplan.plan.wording import listed
from digestplan.quantities import parse_quantity

_BY_LAW = {
    "first_order": (),
    "two_pool": ("fast_fraction", "slow_susceptibility"),
    "stretched": ("exponent",),
    "michaelis_menten": ("half_saturation", "initial"),
    "erosion": (),
}
_DAMAGE = (
    ("melting_enthalpy", "melting_entropy"),
    ("melting_rate", "melting_energy", "melting_temperature"),
)
_UNWEIGHED = {"wet_mass": "1 g", "substrate_fraction": "1", "target_extent": "0.9"}


@dataclass(frozen=True, slots=True)
class Sources:
    """Where the values of a sample come from: the plan, then the material, then a default."""

    section: Section
    material: MaterialEntry | None

    def value(self, name: str) -> Value | None:
        """Return a value as written, or as the library knows it for the material."""
        written = self.section.value(name)
        if written is not None or self.material is None:
            return written
        known = self.material.values.get(name)
        if known is None:
            return None
        return self.section.made(name, known.quantity, "library", known.source)

    def needed(self, name: str) -> Value:
        """Return a value for which something must stand in."""
        quantity = parse_quantity(_UNWEIGHED[name], self.section.fields[name].kind)
        return self.value(name) or self.section.made(name, quantity, "default", ASSUMED)


def checked_sample(section: Section, pair: Pair, *, digested: bool) -> Sample:
    """
    Return the sample that a section describes; problems are noted.

    Parameters
    ----------
    section
        The plan's ``[sample]``.
    pair
        What the library knows of the enzyme on the material.
    digested
        Whether the plan digests the sample, so that its susceptibility counts.

    Returns
    -------
    sample
        With a known run or a susceptibility, not both.
    """
    sources = Sources(section, pair.material)
    law = section.word("law") or pair.law
    susceptibility = section.value("susceptibility")  # checked even where a run sets it aside
    run = _known_run(section)
    if run is None and "susceptibility" not in section:
        run = pair.known_run
        if run is None and digested and not _unknown_key(section):
            section.missing("susceptibility", pair.lack)
    return Sample(
        material=section.text("material"),
        wet_mass=sources.needed("wet_mass"),
        substrate_fraction=sources.needed("substrate_fraction"),
        shape=cast(Shape, section.word("shape") or "slab"),
        thickness=section.value("thickness"),
        target_extent=sources.needed("target_extent"),
        keep_loss_limit=sources.value("keep_loss_limit"),
        keep_selectivity=sources.value("keep_selectivity"),
        law=law,
        law_values=_law_values(section, law),
        susceptibility=susceptibility if run is None else None,
        known_run=run,
        damage=_damage(sources),
        mineral_fraction=sources.value("mineral_fraction"),
        density=sources.value("density"),
        known_demineralisation=_known_demineralisation(section),
    )


def _unknown_key(section: Section) -> bool:
    """Whether a key was told to be unknown that may have brought a known run."""
    places = {"lot.enzyme", section.at("material")}
    return any(problem.place in places for problem in section.problems.found)


def _law_values(section: Section, law: str) -> dict[str, Value]:
    for name in dict.fromkeys(key for keys in _BY_LAW.values() for key in keys):
        if name in section and name not in _BY_LAW[law]:
            laws = [f'law = "{other}"' for other, keys in _BY_LAW.items() if name in keys]
            section.add(name, f"this counts only with {listed(laws)}; here it is {law}")
    for name in _BY_LAW[law]:
        if name not in section:
            section.missing(name, f"for {law}")
    values = {name: section.needed(name) for name in _BY_LAW[law]}
    _refuse_two_kinds(section, values)
    return values


def _known_demineralisation(section: Section) -> dict[str, Value | str] | None:
    if "known_demineralisation" not in section:
        return None
    run = section.table("known_demineralisation")
    values: dict[str, Value | str] = {"reagent": reagent_key(run) or ""}
    for name in run.fields:
        value = None if name == "reagent" else run.value(name)
        if value is not None:
            values[name] = value
    return values


def _refuse_two_kinds(section: Section, values: Mapping[str, Value]) -> None:
    """`half_saturation` and `initial` must both be molar, or both masses a volume."""
    kinds = {value.quantity.activity for value in values.values()}
    if "half_saturation" in values and len(kinds) > 1:
        section.add("initial", "this must be in mol/L or in g/mL as half_saturation is")


def _known_run(section: Section) -> KnownRun | None:
    """Return the known run that the plan writes."""
    if "known_run" not in section:
        return None
    run = section.table("known_run")
    return KnownRun(
        ratio=run.needed("ratio"),
        temperature=run.needed("temperature"),
        duration=run.needed("duration"),
        extent=run.needed("extent"),
        thickness=run.value("thickness"),
        environment=checked_environment(run),
    )


def _damage(sources: Sources) -> dict[str, Value]:
    """Return how heat destroys what must be kept: one full set of values, or none."""
    if "damage" not in sources.section:
        return _damage_of_library(sources)
    damage = sources.section.table("damage")
    written = [names for names in _DAMAGE if any(name in damage for name in names)]
    if len(written) > 1:
        message = f"write either {listed(_DAMAGE[0], 'and')}, or {listed(_DAMAGE[1], 'and')}"
        sources.section.add("damage", message)
    for name in written[0] if written else _DAMAGE[0]:
        if name not in damage:
            damage.missing(name, "beside the others" if written else "")
    return {name: damage.needed(name) for names in written for name in names}


def _damage_of_library(sources: Sources) -> dict[str, Value]:
    if sources.material is None:
        return {}
    known = sources.material.values
    return {
        name: Value(known[name].quantity, f"sample.damage.{name}", "library", known[name].source)
        for names in _DAMAGE
        if all(name in known for name in names)
        for name in names
    }
