"""Cautions that steps bring by what they hold, alone or one after the other."""

from collections.abc import Iterator, Sequence
from itertools import product

from digestplan.forecast.result import Caution
from digestplan.forecast.tags import is_plain_rinse, tags_of
from digestplan.forecast.told import told
from digestplan.library.cautions import CautionEntry, cautions
from digestplan.plan.model import Plan, Step


def of_meetings(plan: Plan) -> Iterator[Caution]:
    """
    Yield every caution of the table whose tags meet in a plan.

    Parameters
    ----------
    plan
        The plan.

    Yields
    ------
    caution
        Once, at the step at which the two meet.
    """
    tags = [tags_of(step, plan) for step in plan.steps]
    for code, row in cautions().items():
        if not row.first:
            continue
        where = _meeting(row, plan.steps, tags)
        if where is not None:
            yield told(code, where, enzyme=plan.enzyme.name)


def _meeting(
    row: CautionEntry, steps: Sequence[Step], tags: Sequence[frozenset[str]]
) -> int | None:
    """Index of the step at which a row's tags meet, or None."""
    firsts = [i for i, found in enumerate(tags) if found & set(row.first)]
    if not row.then:
        return firsts[0] if firsts else None
    seconds = [i for i, found in enumerate(tags) if found & set(row.then)]
    for one, other in product(firsts, seconds):
        if row.order == "together" and one != other:
            continue
        if row.order == "later" and other < one:
            continue
        between = steps[min(one, other) + 1 : max(one, other)]
        if row.cleared_by_rinse and any(is_plain_rinse(step) for step in between):
            continue
        return max(one, other)
    return None
