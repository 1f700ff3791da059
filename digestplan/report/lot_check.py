"""A lot, checked: what is left, whether it is enough, how much more to weigh in, and until when."""

import math
from collections.abc import Iterator
from typing import Any

from digestplan import library
from digestplan.forecast.amounts import weighed_mass
from digestplan.forecast.draws import Draws
from digestplan.forecast.lot_for_plan import LotCheck, counts_on_label
from digestplan.forecast.lot_words import below_freezing, contradiction
from digestplan.library.cautions import caution
from digestplan.lots.grid import Remaining
from digestplan.plan.model import Digest, Plan
from digestplan.report import words
from digestplan.report.as_json import number
from digestplan.report.lines import wrapped
from digestplan.report.lot_text import cautions_of, head, kept, mass

_NO_WAY_OUT = 10.0  # times the planned mass, from where on another lot is the answer
_ASSAY_ERROR = 0.05  # of one more assay, relative: what `LotPosterior.another_assay` takes


def check_document(check: LotCheck) -> dict[str, Any]:
    """Return a checked lot as the interface's document."""
    left, needed = check.posterior, check.needed_fraction
    return {
        "lot": check.record.received.lot,
        "remaining": _percentiles(left.remaining),
        "from_history": _percentiles(left.from_history),
        "from_assays": None if left.from_assays is None else _percentiles(left.from_assays),
        "needed_fraction": number(needed),
        "chance_enough": number(check.chance_enough),
        "use_by": None if check.use_by is None else check.use_by.isoformat(),
        "charge_factor": number(check.charge_factor),
    }


def check_text(check: LotCheck) -> str:
    """
    Return a checked lot in words.

    Parameters
    ----------
    check
        The checked lot.

    Returns
    -------
    text
        Verdict first, what each source says, what to do, cautions; lines of at most 79 characters.
    """
    blocks = [
        wrapped(_verdict(check)),
        head(check.record.summary),
        _table(check),
        "\n".join(wrapped(line, "  ", "") for line in _advice(check)),
        "\n".join(wrapped(f"care  {text}", " " * 6, "") for text in cautions(check)),
        "\n".join(cautions_of(check.record.summary)),
        wrapped(_how(check)),
    ]
    return "\n\n".join(block for block in blocks if block) + "\n"


def cautions(check: LotCheck) -> list[str]:
    """Return what speaks against relying on the figures, and what weighing it in asks for."""
    found, at = [], check.at
    if check.posterior.contradicted:
        found.append(contradiction(check.record, check.posterior))
    if check.posterior.below_freezing:
        found.append(below_freezing(check.posterior))
    expiry = check.record.summary.expiry
    if expiry is not None and expiry < at.date():
        found.append(f"The supplier's date, {expiry.isoformat()}, is past.")
    found += _stock(check)
    summary = check.record.summary
    if summary.form == "dry" and check.charge_factor <= _NO_WAY_OUT:  # it says what to weigh in
        name = library.enzyme(summary.enzyme).name
        found.append(caution("protease-powder").words(enzyme=name))
    return found


# -- the parts ------------------------------------------------------------------------------


def _percentiles(remaining: Remaining) -> dict[str, float | None]:
    return {f"p{p:02d}": number(remaining.percentile(p)) for p in (5, 50, 95)}


def share(fraction: float) -> str:
    """Return a fraction of the label as a percentage."""
    if fraction < 0.005:
        return "<1 %"
    return f"{100 * fraction:.0f} %"


def _verdict(check: LotCheck) -> str:
    lot, needed = words.plain(check.record.received.lot), check.needed_fraction
    if needed is not None and math.isinf(needed):
        return f"{lot}: no amount of it reaches the target in time."
    if check.charge_factor > _NO_WAY_OUT:
        return f"{lot} is as good as dead, as far as can be told: take another lot."
    if needed is None:
        left = share(check.posterior.remaining.percentile(50))
        day = check.at.date().isoformat()
        return f"{lot}: about {left} of the label is left on {day}."
    chance = check.chance_enough or 0.0
    told = words.percent(chance)
    if chance >= check.confidence:
        return f"{lot} is good enough as planned (chance {told})."
    how = f"weigh in {check.charge_factor:.3g} times the planned mass"
    word = "may not be" if chance > 1 - check.confidence else "is not"
    return f"{lot} {word} enough as planned (chance {told}): {how}."


def _table(check: LotCheck) -> str:
    left = check.posterior
    rows = [("its history alone", left.from_history, left.history_share)]
    if left.from_assays is not None:
        count = len(left.surprise)
        name = "its assay alone" if count == 1 else f"its {count} assays alone"
        rows += [(name, left.from_assays, left.assay_share), ("together", left.remaining, 1.0)]
    lines = [f"{'Left of the label':<28}{'5 %':>10}{'median':>10}{'95 %':>10}{'weight':>10}"]
    for name, remaining, weight in rows:
        cells = [share(remaining.percentile(p)) for p in (5, 50, 95)]
        lines.append(f"  {name:<26}" + "".join(f"{c:>10}" for c in (*cells, share(weight))))
    return "\n".join(lines)


def _advice(check: LotCheck) -> Iterator[str]:
    plan, needed = check.plan, check.needed_fraction
    name = f'"{words.plain(plan.title)}"' if plan is not None else "What is asked for"
    if needed is not None and math.isfinite(needed):
        yield (
            f"{name} needs {share(needed)} of the label; so much is left with a chance of "
            f"{words.percent(check.chance_enough)}."
        )
    elif needed is not None:
        yield f"{name} is not reached in time with any amount of this lot."
    elif plan is not None and not counts_on_label(plan):
        yield f"{name} counts in active enzyme: weigh in so much that it is met."
    yield from _weigh_in(check)
    yield from _until(check)
    if check.charge_factor <= _NO_WAY_OUT:
        yield _another(check)


def _weigh_in(check: LotCheck) -> Iterator[str]:
    plan, factor = check.plan, check.charge_factor
    if factor > _NO_WAY_OUT:
        if check.needed_fraction is None or math.isfinite(check.needed_fraction):
            yield "So little is left that weighing in more of it is no way out."
        return
    sure = f" ({words.percent(check.confidence)} sure)" if check.needed_fraction else ""
    if plan is None:
        what = "what is asked for" if check.needed_fraction else "the label"
        yield f"Weigh in {factor:.3g} times as much as by {what}{sure}."
        return
    for place, planned in _planned(check, plan):
        if factor > 1.005 and check.needed_fraction is not None:
            yield f"Weigh in {mass(planned * factor, 3)} instead of {mass(planned)}{place}{sure}."
        elif check.needed_fraction is None:
            yield f"Weigh in {mass(planned, 3)}{place}, by the median of what is left."
        else:
            yield f"Weigh in {mass(planned)}{place}, as planned."


def _planned(check: LotCheck, plan: Plan) -> Iterator[tuple[str, float]]:
    """Masses of this lot that the plan asks for, step by step. [g]"""
    draws = Draws(plan, 1, 1)
    steps = [(i, s) for i, s in enumerate(plan.steps) if isinstance(s, Digest)]
    for index, step in steps:
        planned = weighed_mass(plan, draws, step)
        if planned is None:
            continue
        if step.charge_as == "ratio":
            planned *= plan.lot.remaining.quantity.value * check.posterior.charge_factor()
        yield (f" at step {index + 1}" if len(steps) > 1 else ""), planned


def _until(check: LotCheck) -> Iterator[str]:
    so = f"kept as it is now ({kept(check.record.summary).removeprefix('kept ')})"
    if check.use_by is not None:
        sure = words.percent(check.confidence)
        yield f"Use by {check.use_by.isoformat()} ({sure} sure), {so}."
    elif check.lasts:
        yield f"Good enough for ten years, {so}, as far as its history can tell."


def _another(check: LotCheck) -> str:
    worth, one = check.worth, f"One more assay (good to {words.percent(_ASSAY_ERROR)})"
    if worth.decided_now:
        return "It is decided: one more assay is not needed for this."
    if worth.chance_decides is None:
        narrower = words.percent(max(worth.narrowing, 0.0))
        told = "worth it" if worth.worth_it else "hardly worth it"
        return f"{one} would narrow what is known by {narrower}: {told}."
    told = "worth it" if worth.worth_it else "weighing in more is surer"
    return f"{one} would decide it with a chance of {words.percent(worth.chance_decides)}: {told}."


def _stock(check: LotCheck) -> Iterator[str]:
    left, plan = check.record.summary.remaining_mass, check.plan
    if left is None or plan is None or check.charge_factor > _NO_WAY_OUT:
        return
    factor = 1.0 if check.needed_fraction is None else check.charge_factor
    wanted = factor * sum(planned for _, planned in _planned(check, plan))
    if wanted > left:
        yield f"The bottle holds {mass(left)} by the register; {mass(wanted, 3)} is wanted."


def _how(check: LotCheck) -> str:
    at = check.at.strftime("%Y-%m-%d %H:%M")
    return (
        f"As of {at}; from the register's entries and the library's ageing of "
        f"{check.record.received.enzyme}, each with its spread."
    )
