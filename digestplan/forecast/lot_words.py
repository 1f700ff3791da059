"""What a lot's posterior says, in sentences that report and forecast share."""

from typing import TYPE_CHECKING

from digestplan.lots.posterior import CONTRADICTS, LotPosterior

if TYPE_CHECKING:
    from digestplan.lots.register.stock import LotRecord


def sources(posterior: LotPosterior) -> str:
    """Return what the posterior rests on, such as ``its history and 2 assays``."""
    count = len(posterior.surprise)
    if not count:
        return "its history alone"
    return f"its history and {count} assay{'s' if count > 1 else ''}"


def contradiction(record: "LotRecord", posterior: LotPosterior) -> str:
    """Return which assays do not fit the history, and what to do."""
    assays = record.assays
    days = [
        f"{assay.at.date().isoformat()} ({_rarely(chance)})"
        for assay, chance in zip(assays, posterior.surprise, strict=False)
        if chance < CONTRADICTS
    ]
    many = len(days) > 1
    return (
        f"The assay{'s' if many else ''} of {' and '.join(days)} "
        f"{'do' if many else 'does'} not fit what was known before: do not rely on the joint "
        "figure. Look for a wrong temperature, label, unit or dilution, and assay again."
    )


def below_freezing(posterior: LotPosterior) -> str:
    """Return the caution on storage below 0 °C."""
    more = "An assay would say more." if posterior.from_assays is None else "Trust the assay more."
    return (
        "It was kept below 0 °C, where an Arrhenius line bends: what its history says of that "
        f"time is uncertain beyond the spread that is told. {more}"
    )


def _rarely(chance: float) -> str:
    if chance < 0.0001:
        return "so far off less than once in 10,000"
    return f"so far off {100 * chance:.2g} times in 100"
