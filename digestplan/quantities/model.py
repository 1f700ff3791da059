"""A value with its spread, as the rest of the house carries it."""

from dataclasses import dataclass
from typing import Literal

Distribution = Literal["exact", "normal", "lognormal"]


@dataclass(frozen=True, slots=True)
class Quantity:
    """A parsed value in the core unit of its kind, with its spread.

    Attributes
    ----------
    value
        Mean, or median of a log-normal, in the core unit of the kind. [core unit]
    spread
        Standard deviation in the core unit (normal); factor of one geometric standard
        deviation, at least 1 (log-normal); 0 (exact).
    distribution
        ``exact``, ``normal`` or ``lognormal``.
    activity
        The assay-defined unit in which enzyme is counted, such as ``CDU`` or ``mg``, where the
        kind contains one; else None.
    text
        The value as it was written.
    """

    value: float
    spread: float = 0.0
    distribution: Distribution = "exact"
    activity: str | None = None
    text: str = ""
