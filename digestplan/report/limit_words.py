"""What keeps a plan from being in time, in words."""

from digestplan.forecast.temperatures import Missed
from digestplan.report import words

_WORTH_TELLING = 0.1
_WITH_VISITS = {
    "dies": "dies before it is done",
    "slow": "too slow for the visit",
    "melts": "the matrix melts",
    "too_soon": "window shorter than the wait",
}
_WITHOUT = {**_WITH_VISITS, "slow": "stopped before it is done", "too_soon": "too far before ready"}


def limit_of(missed: Missed, *, visits: bool) -> str:
    """
    Say what keeps draws from being in time, the largest share first.

    Parameters
    ----------
    missed
        Shares of the draws by what keeps them from it.
    visits
        Whether the plan has visits.

    Returns
    -------
    words
        Such as ``dies before it is done (45 %)``; ``nothing much`` where less than a tenth is
        kept from it.
    """
    said = _WITH_VISITS if visits else _WITHOUT
    shares = sorted(((getattr(missed, name), said[name]) for name in said), reverse=True)
    telling = [(share, name) for share, name in shares if share >= _WORTH_TELLING]
    if not telling and sum(share for share, _ in shares) >= _WORTH_TELLING:
        telling = shares[:2]
    if not telling:
        return "nothing much"
    return ", ".join(f"{name} ({words.percent(share)})" for share, name in telling if share > 0)
