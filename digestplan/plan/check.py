"""From the tables of a plan file to a plan: every section checked, then what joins them."""

from collections.abc import Iterator, Mapping
from pathlib import PurePath
from typing import Any

from digestplan.plan.bench import checked_bench
from digestplan.plan.clock import checked_start, checked_visits
from digestplan.plan.enzyme import checked_enzyme
from digestplan.plan.known import enzyme_entry, material_entry
from digestplan.plan.lot import checked_lot
from digestplan.plan.model import Demineralise, Digest, Plan, Rinse, Sample
from digestplan.plan.needs import Parts, check_needs
from digestplan.plan.order import check_amounts, check_order
from digestplan.plan.pair import Pair
from digestplan.plan.sample import checked_sample
from digestplan.plan.section import Section
from digestplan.plan.steps import checked_steps
from digestplan.plan.units import Units, activity_unit_of
from digestplan.plan.wording import plain, shown
from digestplan.problems import Problems

FORMAT = 1


def checked_plan(tables: Mapping[str, Any], name: str, problems: Problems) -> Plan | None:
    """
    Return the plan that the tables of a file describe; problems are noted.

    Parameters
    ----------
    tables
        What the TOML reader gives.
    name
        Name of the file.
    problems
        Where problems are noted.

    Returns
    -------
    plan
        Only to be used where no problem was noted; None where nothing can be made of the file.
    """
    if not _is_of_this_format(tables, problems):
        return None
    top = Section(tables, "", "", problems)
    start = checked_start(tables["start"], problems) if "start" in top else None
    visits = checked_visits(tables["visits"], start, problems) if "visits" in top else ()
    if "visits" in top and "start" not in top:
        top.missing("start", "beside visits")
    parts = _checked_parts(top)
    return Plan(
        title=top.text("title") or plain(PurePath(name).stem),
        start=start,
        visits=visits,
        confidence=top.needed("confidence").quantity.value,
        sample=parts.sample,
        lot=parts.lot,
        enzyme=parts.enzyme,
        steps=tuple(step for step in parts.steps if step is not None),
        activity_unit=parts.activity_unit,
        notes=top.long_text("notes") or "",
        path=name,
        remarks=parts.remarks,
        bench=checked_bench(top.table("bench")),
    )


def _is_of_this_format(tables: Mapping[str, Any], problems: Problems) -> bool:
    written = tables.get("digestplan", FORMAT)
    if isinstance(written, bool) or not isinstance(written, int) or written < FORMAT:
        message = f"{shown(written)} is no version of this format; write digestplan = {FORMAT}"
        problems.add("digestplan", message)
    elif written > FORMAT:
        message = f"{shown(written)} is a newer format than this program reads ({FORMAT})"
        problems.add("digestplan", message)
        return False
    return True


def _checked_parts(top: Section) -> Parts:
    lot_section, enzyme_section = top.table("lot"), top.table("enzyme")
    sample_section = top.table("sample")
    steps = checked_steps(top.written["steps"], top.problems) if "steps" in top else ()
    lot = checked_lot(lot_section)
    entry = enzyme_entry(lot_section)
    if "enzyme" not in lot_section and "enzyme" not in top:
        lot_section.missing("enzyme", "(or describe the enzyme in a section [enzyme])")
    demineralised = any(isinstance(step, Demineralise) for step in steps)
    pair = Pair(entry, material_entry(sample_section), demineralised)
    enzyme = checked_enzyme(
        enzyme_section,
        entry,
        pair.diffusivity if "thickness" in sample_section else None,
        known=entry is not None or ("enzyme" not in lot_section and "enzyme" in top),
    )
    digested = any(step is None or isinstance(step, Digest) for step in steps)
    sample = checked_sample(sample_section, pair, digested=digested)
    rinsed = any(isinstance(step, Rinse) for step in steps)
    units = Units(activity_unit_of(sample, lot, steps), lot, top.problems)
    parts = Parts(
        written=sample_section,
        lot=units.label(),
        sample=units.sample(sample),
        enzyme=units.enzyme(enzyme),
        steps=tuple(None if step is None else units.step(step) for step in steps),
        activity_unit=units.unit,
        remarks=tuple(_remarks(sample_section, sample, units, pair, rinsed=rinsed)),
    )
    check_order(steps, top.problems)
    check_amounts(sample, steps, top.problems)
    check_needs(parts, lot_section)
    return parts


def _remarks(
    written: Section, sample: Sample, units: Units, pair: Pair, *, rinsed: bool
) -> Iterator[str]:
    """Say what was settled by the reader and somebody should know."""
    if "susceptibility" in written and "known_run" in written:
        yield "The known run sets the susceptibility; the one that is written is set aside."
    if units.left_out is not None:
        ratio = plain(units.left_out.quantity.text)
        yield (
            f"The library's saturation ratio ({ratio}) is left out: nobody says what it is in"
            f" {units.unit}."
        )
    if "thickness" in written:
        return
    if sample.known_run is not None and sample.known_run.thickness is not None:
        thickness = plain(sample.known_run.thickness.quantity.text)
        yield f"The piece is taken to be as thick as in the known run ({thickness})."
    if pair.diffusivity is not None:
        yield "Without a thickness of the piece the enzyme is taken to reach all of it at once."
    if rinsed:
        yield "Without a thickness of the piece a rinse is taken to reach all of it at once."
