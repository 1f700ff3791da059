"""What a plan needs beyond what each section asks for alone, and why."""

from collections.abc import Sequence
from dataclasses import dataclass

from digestplan import library
from digestplan.plan.model import (
    Demineralise,
    Digest,
    Enzyme,
    Lot,
    Rinse,
    Sample,
    Step,
)
from digestplan.plan.section import Section
from digestplan.plan.units import MASS
from digestplan.plan.wording import listed, shown

Steps = Sequence[Step | None]
_MOST_ACID = 26.0  # [mol/L] pure formic acid
_MOST_CHELATOR = 2.0  # [mol/L] more than any salt of EDTA dissolves


@dataclass(frozen=True, slots=True)
class Parts:
    """The checked parts of a plan, and the section that problems of the sample go to."""

    written: Section
    sample: Sample
    lot: Lot
    enzyme: Enzyme
    steps: Steps
    activity_unit: str
    remarks: tuple[str, ...]


def check_needs(parts: Parts, lot: Section) -> None:
    """Note what is missing for what the plan asks for."""
    _check_amounts(parts)
    _check_thickness(parts)
    _check_mineral(parts)
    _check_autolysis(parts, lot)
    _check_inhibitor(parts)


def _check_amounts(parts: Parts) -> None:
    """Note that the mass of the piece or of its substrate is missing where it counts."""
    by_substrate = _charge_by_mass(parts.steps)
    by_piece = _first(parts.steps, Demineralise, Rinse)
    if parts.enzyme.inactivation == "autolysis":
        by_substrate = by_substrate or "for autolysis"
    reason = by_substrate or by_piece
    if parts.sample.wet_mass.origin == "default" and reason:
        parts.written.missing("wet_mass", reason)
    if parts.sample.substrate_fraction.origin == "default" and by_substrate:
        _missing_of_material(parts.written, "substrate_fraction", by_substrate)


def _charge_by_mass(steps: Steps) -> str | None:
    for step in steps:
        if isinstance(step, Digest):
            charges = [addition.charge for addition in step.additions]
            if step.charge_as != "ratio":
                charges.insert(0, step.charge)
            if charges:
                return f"for {charges[0].place}"
    return None


def _first(steps: Steps, *kinds: type[Step]) -> str | None:
    for index, step in enumerate(steps):
        if isinstance(step, kinds):
            return f"for steps[{index}] ({step.do})"
    return None


def _missing_of_material(sample: Section, key: str, because: str) -> None:
    """Note a missing key, unless the library might have brought it for the right material."""
    place = sample.at("material")
    if not any(problem.place == place for problem in sample.problems.found):
        sample.missing(key, because)


def _check_thickness(parts: Parts) -> None:
    if "thickness" in parts.written:
        return
    reason = _first(parts.steps, Demineralise)
    if "diffusivity" in parts.enzyme.values:
        reason = reason or "for enzyme.diffusivity"
    if reason:
        parts.written.missing("thickness", reason)


def _check_mineral(parts: Parts) -> None:
    if not any(isinstance(step, Demineralise) for step in parts.steps):
        return
    for key in ("mineral_fraction", "density"):
        if getattr(parts.sample, key) is None:
            _missing_of_material(parts.written, key, "for demineralising")
    _check_known_reagent(parts)
    _check_baths(parts)
    _check_mineral_first(parts)
    mineral = parts.sample.mineral_fraction
    if mineral is not None and mineral.quantity.value == 0:
        parts.written.add("mineral_fraction", "there is no mineral to dissolve")


def _check_baths(parts: Parts) -> None:
    """Note what no bath can be: stronger than its reagent dissolves, or an acid of another pH."""
    problems = parts.written.problems
    for index, step in enumerate(parts.steps):
        if not isinstance(step, Demineralise) or not step.reagent:
            continue
        reagent, strength = library.reagent(step.reagent), step.concentration.quantity
        most = _MOST_CHELATOR if reagent.chelator else _MOST_ACID
        if strength.activity is None and strength.value > most:
            message = f"{shown(strength.text)} is more than a bath of {reagent.name} can hold"
            problems.add(f"steps[{index}].concentration", f"{message} ({most:g} M)")
        if step.ph is not None and not reagent.chelator:
            message = f"this counts for a chelator; {reagent.name} has the pH of its concentration"
            problems.add(f"steps[{index}].ph", message)


def _check_mineral_first(parts: Parts) -> None:
    """Note a digest before the mineral is gone that rests on a run of demineralised matrix."""
    run = parts.sample.known_run
    kinds = [type(step) for step in parts.steps]
    if run is None or run.ratio.origin != "library" or Digest not in kinds:
        return
    if kinds.index(Digest) < kinds.index(Demineralise):
        message = (
            "the mineral is still there in this step; demineralise first, or say in"
            " [sample.known_run] how it went in your lab"
        )
        parts.written.problems.add(f"steps[{kinds.index(Digest)}].do", message)


def _check_known_reagent(parts: Parts) -> None:
    known = parts.sample.known_demineralisation
    reagents = [step.reagent for step in parts.steps if isinstance(step, Demineralise)]
    if known and known["reagent"] and known["reagent"] not in reagents:
        message = f"it says nothing of {listed(reagents, 'and')}, with which this plan works"
        place = f"{parts.written.at('known_demineralisation')}.reagent"
        parts.written.problems.add(place, f"{shown(known['reagent'])}: {message}")


def _check_autolysis(parts: Parts, lot: Section) -> None:
    if parts.enzyme.inactivation != "autolysis":
        return
    for index, step in enumerate(parts.steps):
        if isinstance(step, Digest) and step.volume is None:
            message = 'this is missing for autolysis; write for instance volume = "3 mL"'
            lot.problems.add(f"steps[{index}].volume", message)
    place = lot.at("label_activity")
    told = (
        "label_activity" in lot or "id" in lot or any(p.place == place for p in lot.problems.found)
    )
    if parts.activity_unit != MASS and not told:
        lot.missing("label_activity", "for autolysis")


def _check_inhibitor(parts: Parts) -> None:
    if "inhibition_constant" in parts.enzyme.values:
        return
    for index, step in enumerate(parts.steps):
        if isinstance(step, Digest) and "inhibitor" in step.environment.solutes:
            message = "this says nothing without enzyme.inhibition_constant"
            parts.written.problems.add(f"steps[{index}].inhibitor", message)
