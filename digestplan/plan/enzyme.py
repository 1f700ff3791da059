"""The enzyme of a plan: the library's kinetics, overridden one by one by what is written."""

from collections.abc import Mapping

from digestplan.library import EnzymeEntry, LibraryValue
from digestplan.plan.field import SOLUTES
from digestplan.plan.model import Enzyme, Value
from digestplan.plan.section import Section
from digestplan.plan.wording import listed, nearest, shown

_BY_RATE_LAW = {
    "arrhenius": ("activation_energy",),
    "eyring": ("activation_energy",),
    "mmrt": ("activation_energy", "heat_capacity_change"),
    "q10": ("q10",),
    "equilibrium": ("activation_energy", "equilibrium_temperature", "equilibrium_enthalpy"),
}
_LOSS = ("inactivation_rate", "inactivation_energy")
_BY_INACTIVATION = {
    "first_order": _LOSS,
    "two_stage": (
        *_LOSS,
        "intermediate_activity",
        "second_inactivation_rate",
        "second_inactivation_energy",
    ),
    "autolysis": (*_LOSS, "autolysis_rate", "autolysis_energy"),
}
_ENERGY_OF = {
    "inactivation_energy": "inactivation_rate",
    "second_inactivation_energy": "second_inactivation_rate",
    "autolysis_energy": "autolysis_rate",
}
_AT_REFERENCE = ("inactivation_rate", "second_inactivation_rate", "autolysis_rate", "diffusivity")
_ALWAYS = ("reference_temperature", "saturation_ratio", "diffusivity")
_LIQUID = ("ph_low_pka", "ph_high_pka", "cofactor_half_saturation", "inhibition_constant")


def checked_enzyme(
    section: Section, entry: EnzymeEntry | None, diffusivity: LibraryValue | None, *, known: bool
) -> Enzyme:
    """
    Return the enzyme of a plan; problems are noted.

    Parameters
    ----------
    section
        The plan's ``[enzyme]``, empty where it has none.
    entry
        The library's entry; None for an enzyme that the plan describes itself.
    diffusivity
        The library's for the material; None where the enzyme need not penetrate.
    known
        Whether the plan says what enzyme it is; if not, nothing more is asked for.

    Returns
    -------
    enzyme
        Its values are those that its laws use, and no others.
    """
    rate_law = section.word("rate_law") or (entry.rate_law if entry else "arrhenius")
    inactivation = section.word("inactivation") or (entry.inactivation if entry else "first_order")
    used = (*_BY_RATE_LAW[rate_law], *_BY_INACTIVATION[inactivation])
    values = _merged(section, entry, diffusivity, (*_ALWAYS, *used, *_LIQUID))
    _refuse_unused(section, "rate_law", rate_law, _BY_RATE_LAW)
    _refuse_unused(section, "inactivation", inactivation, _BY_INACTIVATION)
    if known:
        _require(section, values, used, rate_law, inactivation)
    _refuse_moved_reference(section, values, entry)
    cofactor = _checked_liquid(section, values, entry)
    return Enzyme(
        key=entry.key if entry else None,
        name=section.text("name") or (entry.name if entry else "enzyme of this plan"),
        rate_law=rate_law,
        inactivation=inactivation,
        values=values,
        cofactor=cofactor,
        cofactor_needed=entry.cofactor_needed if entry and "cofactor" not in section else True,
        measured_temperature=entry.measured_temperature if entry else None,
        ph_range=entry.ph_range if entry else None,
        stopped_by=tuple(entry.stopped_by) if entry else (),
        inhibitors=tuple(entry.inhibitors) if entry else (),
    )


def _merged(
    section: Section,
    entry: EnzymeEntry | None,
    diffusivity: LibraryValue | None,
    names: tuple[str, ...],
) -> dict[str, Value]:
    library = dict(entry.values) if entry else {}
    if diffusivity is not None:
        library["diffusivity"] = diffusivity
    values: dict[str, Value] = {}
    for name in names:
        if name in section:
            values[name] = section.needed(name)
        elif name in library:
            known = library[name]
            values[name] = section.made(name, known.quantity, "library", known.source)
    return values


def _refuse_unused(
    section: Section, law: str, chosen: str, by_law: Mapping[str, tuple[str, ...]]
) -> None:
    for name in dict.fromkeys(key for keys in by_law.values() for key in keys):
        if name in section and name not in by_law[chosen]:
            laws = [f'{law} = "{other}"' for other, keys in by_law.items() if name in keys]
            section.add(name, f"this counts only with {listed(laws)}; here it is {chosen}")


def _require(
    section: Section,
    values: Mapping[str, Value],
    used: tuple[str, ...],
    rate_law: str,
    inactivation: str,
) -> None:
    for name in ("reference_temperature", *used):
        rate = values.get(_ENERGY_OF.get(name, ""))
        if name in values or (rate is not None and rate.quantity.value == 0):
            continue
        law = rate_law if name in _BY_RATE_LAW[rate_law] else inactivation
        because = "" if name == "reference_temperature" else f"; {law} needs it"
        if name == "inactivation_rate":
            because += ' ("0 1/h" for an enzyme that does not die)'
        section.missing(name, because.removeprefix("; "))


def _refuse_moved_reference(
    section: Section, values: Mapping[str, Value], entry: EnzymeEntry | None
) -> None:
    if entry is None or "reference_temperature" not in section:
        return
    theirs = entry.values.get("reference_temperature")
    ours = values["reference_temperature"].quantity.value
    if theirs is None or abs(ours - theirs.quantity.value) < 1e-9:
        return
    moved = [n for n in _AT_REFERENCE if n in values and values[n].origin == "library"]
    if moved:
        at = f"{theirs.quantity.value - 273.15:.4g} °C"
        message = f"the library's {listed(moved, 'and')} hold at {at}; write them as well, or {at}"
        section.add("reference_temperature", message)


def _checked_liquid(
    section: Section, values: Mapping[str, Value], entry: EnzymeEntry | None
) -> str | None:
    low, high = values.get("ph_low_pka"), values.get("ph_high_pka")
    if (low is None) != (high is None):
        lacking = "ph_low_pka" if low is None else "ph_high_pka"
        section.missing(lacking, "beside the other limb of the pH profile")
    elif low and high and low.quantity.value >= high.quantity.value:
        section.add("ph_high_pka", "this is not above ph_low_pka")
    cofactor = section.text("cofactor")
    known = ("calcium", *SOLUTES)
    if cofactor is not None and cofactor not in known:
        near = nearest(cofactor, known)
        hint = f"is {near} meant?" if near else f"known here: {', '.join(known)}"
        section.add("cofactor", f"a step has no key for {shown(cofactor)}; {hint}")
    if cofactor is not None and "cofactor_half_saturation" not in values:
        section.missing("cofactor_half_saturation", "beside cofactor")
    if cofactor is None and entry is not None:
        cofactor = entry.cofactor
    if cofactor is None and "cofactor_half_saturation" in section:
        section.missing("cofactor", "beside cofactor_half_saturation")
    return cofactor
