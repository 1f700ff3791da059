"""The steps of a plan, each kind by its own keys."""

from collections.abc import Callable
from typing import Any

from digestplan.plan.environment import checked_environment
from digestplan.plan.field import STEPS
from digestplan.plan.known import reagent_key, refuse_hydrofluoric
from digestplan.plan.model import (
    Addition,
    Demineralise,
    Digest,
    Hold,
    Rinse,
    Step,
    Stop,
    Value,
)
from digestplan.plan.programme import LONGEST, checked_programme, hours_of
from digestplan.plan.section import Section
from digestplan.plan.wording import listed, nearest, shown
from digestplan.problems import Problems

_MOST_STEPS = 50
_MOST_LINES = 100  # additions, or changes of a bath
_CHARGES = ("charge", "ratio", "concentration")
_AGENTS = {"chelate": "edta", "acidify": "hydrochloric acid", "alkalise": "sodium hydroxide"}


def checked_steps(written: Any, problems: Problems) -> tuple[Step | None, ...]:
    """Return the steps, None for one that is not understood; problems are noted."""
    if not isinstance(written, list) or not written:
        problems.add("steps", "at least one step is wanted, each under its own [[steps]]")
        return ()
    if len(written) > _MOST_STEPS:
        problems.add("steps", f"{len(written)} steps are more than any plan needs")
        return ()
    return tuple(_step(step, f"steps[{i}]", problems) for i, step in enumerate(written))


def _step(written: Any, place: str, problems: Problems) -> Step | None:
    if not isinstance(written, dict):
        problems.add(place, f"{shown(written)} is no step; a table under [[steps]] is wanted")
        return None
    do = written.get("do")
    if isinstance(do, str) and do in _CHECKERS:
        return _CHECKERS[do](Section(written, place, f"steps.{do}", problems))
    kinds = listed(STEPS)
    if do is None:
        problems.add(f"{place}.do", f"this is missing; write what is done: {kinds}")
    else:
        near = nearest(do, STEPS) if isinstance(do, str) else None
        hint = f"; is {near} meant?" if near else ""
        problems.add(f"{place}.do", f"{shown(do)} is no step; write {kinds}{hint}")
    return None


def _digest(step: Section) -> Digest:
    charge_as = _charge_as(step)
    volume = step.value("volume")
    if charge_as == "concentration" and volume is None:
        step.missing("volume", "beside concentration")
    programme = checked_programme(step)
    return Digest(
        do="digest",
        charge=step.needed(charge_as),
        charge_as=charge_as,  # type: ignore[arg-type]
        volume=volume,
        environment=checked_environment(step),
        programme=programme,
        start_temperature=step.value("start_temperature"),
        lag=step.value("lag"),
        additions=_additions(step, hours_of(programme)),
    )


def _charge_as(step: Section) -> str:
    written = [key for key in _CHARGES if key in step]
    if not written:
        step.missing("charge", "(or ratio, or concentration)")
    for key in written[1:]:
        step.add(key, f"{written[0]} says already how much enzyme is charged; keep one of them")
    return written[0] if written else _CHARGES[0]


def _additions(step: Section, hours: float) -> tuple[Addition, ...]:
    written = step.written.get("additions", [])
    wanted = f"additions are wanted as a list, such as {step.fields['additions'].example}"
    if not isinstance(written, list):
        step.add("additions", f"{shown(written)} is no list; {wanted}")
        return ()
    if len(written) > _MOST_LINES:
        step.add("additions", f"{len(written)} additions are more than any plan needs")
        return ()
    additions = []
    for index, line in enumerate(written):
        place = f"{step.at('additions')}[{index}]"
        if not isinstance(line, dict):
            step.problems.add(place, f"{shown(line)} is no addition; {wanted}")
            continue
        section = Section(line, place, "steps.additions", step.problems)
        after = section.needed("after").quantity.value
        if after >= hours:
            section.add("after", f"this is not before the end of the step, at {hours:.4g} h")
        additions.append(Addition(after, section.needed("charge")))
    return tuple(sorted(additions, key=lambda addition: addition.after))


def _hold(step: Section) -> Hold:
    return Hold("hold", checked_programme(step), step.value("start_temperature"), step.value("lag"))


def _demineralise(step: Section) -> Demineralise:
    programme = checked_programme(step)
    if "changes" in step and "when_spent" in step:
        step.add("when_spent", "changes says already when the bath is changed; keep one of them")
    return Demineralise(
        do="demineralise",
        reagent=reagent_key(step) or "",
        concentration=step.needed("concentration"),
        volume=step.needed("volume"),
        ph=step.value("ph"),
        changes=_changes(step, hours_of(programme)),
        when_spent=step.value("when_spent"),
        programme=programme,
        closed_vessel=step.flag("closed_vessel"),
        stirred=step.flag("stirred"),
    )


def _changes(step: Section, hours: float) -> tuple[float, ...]:
    field = step.fields["changes"]
    written = step.written.get("changes", [])
    if not isinstance(written, list):
        step.add("changes", f"{shown(written)} is no list; write for instance {field.example}")
        return ()
    if len(written) > _MOST_LINES:
        step.add("changes", f"{len(written)} changes are more than any plan needs")
        return ()
    times: list[float] = []
    for index, text in enumerate(written):
        place = f"{step.at('changes')}[{index}]"
        time = step.quantity_of(text, place, field).value
        if times and time <= times[-1]:
            step.problems.add(place, f"{shown(text)} is not after the change before it")
        if time >= hours:
            message = f"{shown(text)} is not before the end of the step, at {hours:.4g} h"
            step.problems.add(place, message)
        times.append(time)
    return tuple(times)


def _rinse(step: Section) -> Rinse:
    exchanges, each = step.needed("exchanges").quantity.value, step.needed("each").quantity.value
    if exchanges * each > LONGEST:
        step.add("each", "this rinse takes more than ten years")
    refuse_hydrofluoric(step, "fluid")
    return Rinse(
        do="rinse",
        fluid=step.text("fluid") or "",
        volume=step.needed("volume"),
        exchanges=int(exchanges) if exchanges >= 1 else 0,
        each=each,
        temperature=step.needed("temperature"),
    )


def _stop(step: Section) -> Stop:
    how = step.word("how") or ""
    by_temperature = how in ("heat", "chill")
    if by_temperature and "temperature" not in step:
        step.missing("temperature", f"with {how}")
    if how == "heat" and "for" not in step:
        step.missing("for", "with heat")
    if how and not by_temperature and "concentration" not in step:
        step.missing("concentration", f"with {how}")
    for key in ("agent", "concentration"):
        if by_temperature and key in step:
            step.add(key, f"nothing is added where {how} ends the digestion")
    if how == "inhibit" and "agent" not in step:
        step.missing("agent", "with inhibit")
    refuse_hydrofluoric(step, "agent")
    agent = step.text("agent") or _AGENTS.get(how)
    concentration: Value | None = step.value("concentration")
    hours = step.needed("for").quantity.value
    return Stop("stop", how, agent, concentration, step.value("temperature"), hours)


_CHECKERS: dict[str, Callable[[Section], Step]] = {
    "demineralise": _demineralise,
    "rinse": _rinse,
    "digest": _digest,
    "stop": _stop,
    "hold": _hold,
}
