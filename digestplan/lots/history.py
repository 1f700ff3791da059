"""What a lot has been through, and what its history alone leaves of the label activity.

ln(remaining) = ln(activity at receipt / label) − Σ k(T_i) Δt_i − thaws · loss per thaw
− openings · loss per opening, with an Arrhenius k for each form of the enzyme. The uncertain
values are the dimensions of a history: each is a standard normal deviate, so that a lot is one
point in as many dimensions.
"""

import math
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.lattice import even_deviates
from digestplan.lots.storage import Form, StorageKinetics, lever
from digestplan.problems import Problems

Array = NDArray[np.float64]
Dimension = tuple[str, str]  # what, and the form or the place that it belongs to
LogLoss = tuple[float, float]  # logarithm of what is taken off ln(remaining), and its deviation
LABEL: Dimension = ("label", "")

FREEZING = 273.15  # [K]


@dataclass(frozen=True, slots=True)
class Stretch:
    """A time in one place at one temperature: on a shelf, in a freezer, or on the way.

    Attributes
    ----------
    start, hours
        When it began, counted from receipt, and how long it lasted. [h]
    temperature, temperature_sd
        Temperature of the place, and how far it may really lie from that. [K]
    form
        ``dry``, ``solution`` or ``glycerol``.
    opened
        Whether the bottle had been opened.
    place
        Stretches that name the same place share the error of its temperature.
    """

    start: float
    hours: float
    temperature: float
    temperature_sd: float = 0.0
    form: Form = "dry"
    opened: bool = False
    place: str = ""


@dataclass(frozen=True, slots=True)
class Thaw:
    """One thaw or more, so many hours after receipt."""

    at: float
    form: Form = "solution"
    count: int = 1


@dataclass(frozen=True, slots=True)
class Opening:
    """One opening or more of the bottle, so many hours after receipt."""

    at: float
    form: Form = "dry"
    count: int = 1


@dataclass(frozen=True, slots=True)
class History:
    """A lot's history since it was received.

    Attributes
    ----------
    stretches, thaws, openings
        What happened; stretches may reach into the planned future.
    kinetics
        How each form dies.
    log_label, log_label_sd
        Logarithm of the activity at receipt over the label activity. [1]
    """

    stretches: tuple[Stretch, ...]
    thaws: tuple[Thaw, ...] = ()
    kinetics: Mapping[Form, StorageKinetics] = field(default_factory=dict)
    log_label: float = 0.0
    log_label_sd: float = 0.0
    openings: tuple[Opening, ...] = ()

    def __post_init__(self) -> None:
        problems = Problems()
        for i, s in enumerate(self.stretches):
            _check_stretch(f"stretches[{i}]", s, self.kinetics, problems)
        for i, thaw in enumerate(self.thaws):
            _check_blow(f"thaws[{i}]", thaw, self.kinetics, problems)
        for i, opening in enumerate(self.openings):
            _check_blow(f"openings[{i}]", opening, self.kinetics, problems)
        problems.raise_if_any()

    @property
    def end(self) -> float:
        """When the last stretch ends [h]."""
        return max((s.start + s.hours for s in self.stretches), default=0.0)

    def frozen(self, until: float = math.inf) -> bool:
        """Whether the lot was below 0 °C, where an Arrhenius line bends and says little."""
        return any(s.temperature < FREEZING and s.start < until for s in self.stretches)

    def and_then(self, *stretches: Stretch) -> "History":
        """The history with more stretches, such as a planned storage."""
        return replace(self, stretches=self.stretches + stretches)


# -- the history as a function of its deviates ----------------------------------------------


def dimensions(history: History) -> dict[Dimension, float]:
    """Every uncertain value of a history, with its standard deviation on its own scale."""
    spreads: dict[Dimension, float] = {LABEL: history.log_label_sd}
    for form in dict.fromkeys(s.form for s in history.stretches):
        of = history.kinetics[form]
        spreads["rate", form] = of.log_rate_sd * math.sqrt(1 - of.correlation**2)
        spreads["energy", form] = of.energy_sd
        if any(s.opened for s in history.stretches if s.form == form):
            spreads["opened", form] = of.log_opened_factor_sd
    for blown, _, (_, sd) in _blows(history):
        spreads[blown] = sd
    for i, s in enumerate(history.stretches):
        spreads["place", _place(i, s)] = s.temperature_sd
    return {dimension: sd for dimension, sd in spreads.items() if sd > 0}


def losses(
    history: History, deviates: Mapping[Dimension, Array], until: float, n: int = 1
) -> dict[Dimension, Array]:
    """
    Return what each cause has taken off ln(remaining) by a time.

    Parameters
    ----------
    history
        The history.
    deviates
        Standard normal deviates by dimension, shape (n,); one that is missing is 0.
    until
        The time, counted from receipt. [h]
    n
        Number of points.

    Returns
    -------
    losses
        By cause, shape (n,): ``("rate", form)`` for the storage of a form and
        ``("thaw", form)`` and ``("opening", form)`` for its thaws and openings; ``("label", "")``
        holds minus the logarithm of the activity at receipt.
    """
    zero = np.zeros(n)
    label = history.log_label + history.log_label_sd * deviates.get(LABEL, zero)
    taken: dict[Dimension, Array] = {LABEL: -label}
    for i, s in enumerate(history.stretches):
        hours = min(max(until - s.start, 0.0), s.hours)
        if hours > 0:
            log_rate = _log_rate(history, i, s, deviates, zero)
            cause = ("rate", s.form)
            taken[cause] = taken.get(cause, zero) + hours * np.exp(log_rate)
    for blown, blow, (log_loss, sd) in _blows(history):
        if blow.at <= until:
            loss = blow.count * np.exp(log_loss + sd * deviates.get(blown, zero))
            taken[blown] = taken.get(blown, zero) + loss
    return taken


def log_remaining(
    history: History, deviates: Mapping[Dimension, Array], until: float, n: int = 1
) -> Array:
    """ln(remaining) at a time for deviates as in `losses`, shape (n,)."""
    total: Array = -np.sum(list(losses(history, deviates, until, n).values()), axis=0)
    return total


def draw_remaining(history: History, until: float, n: int, seed: int = 0) -> Array:
    """
    Draw remaining fractions from what the history alone says.

    Parameters
    ----------
    history
        The history.
    until
        The time, counted from receipt. [h]
    n
        How many draws.
    seed
        The same seed gives the same draws.

    Returns
    -------
    remaining
        Fractions of the label, shape (n,). [1]
    """
    names = list(dimensions(history))
    deviates = dict(zip(names, even_deviates(n, len(names), seed), strict=True))
    return np.exp(log_remaining(history, deviates, until, n))


def log_remaining_moments(history: History, until: float) -> tuple[float, float] | None:
    """
    Exact mean and standard deviation of ln(remaining), where they have a closed form.

    Parameters
    ----------
    history
        The history.
    until
        The time, counted from receipt. [h]

    Returns
    -------
    mean, sd
        Of ln(remaining); None where a temperature is uncertain, which has no closed form. [1]

    Notes
    -----
    Every loss is log-normal, and those of one form are correlated through its rate and energy:
    E[e^Y] = exp(μ + v/2), Cov[e^Y, e^Y'] = E E' (exp(cov(Y, Y')) − 1).
    """
    stretches = [
        (min(max(until - s.start, 0.0), s.hours), s) for s in history.stretches if s.start < until
    ]
    if any(s.temperature_sd > 0 for _, s in stretches):
        return None
    mean, variance = history.log_label, history.log_label_sd**2
    for form in dict.fromkeys(s.form for _, s in stretches):
        of = history.kinetics[form]
        own = [(hours, s) for hours, s in stretches if s.form == form and hours > 0]
        levers = lever(np.array([s.temperature for _, s in own]), of)
        opened = np.array([float(s.opened) for _, s in own])
        covariance = _log_rate_covariance(of, levers, opened)
        log_loss = np.log([hours for hours, _ in own]) + of.log_rate
        log_loss += of.energy * levers + opened * of.log_opened_factor
        expected = np.exp(log_loss + np.diag(covariance) / 2)
        mean -= float(expected.sum())
        variance += float(expected @ np.expm1(covariance) @ expected)
    counts: dict[tuple[Dimension, LogLoss], int] = {}
    for cause, blow, loss in _blows(history):
        counts[cause, loss] = counts.get((cause, loss), 0) + (blow.count if blow.at <= until else 0)
    for (_, (log_loss_each, sd)), count in counts.items():
        expected_loss = count * math.exp(log_loss_each + sd**2 / 2)
        mean -= expected_loss
        variance += expected_loss**2 * math.expm1(sd**2)
    return mean, math.sqrt(variance)


# -- the parts ----------------------------------------------------------------------------


def _blows(history: History) -> Iterator[tuple[Dimension, Thaw | Opening, LogLoss]]:
    """What happened at a moment, each with its cause and the logarithm of what one takes."""
    for thaw in history.thaws:
        of = history.kinetics[thaw.form]
        yield ("thaw", thaw.form), thaw, (of.log_thaw_loss, of.log_thaw_loss_sd)
    for opening in history.openings:
        of = history.kinetics[opening.form]
        yield ("opening", opening.form), opening, (of.log_opening_loss, of.log_opening_loss_sd)


def _log_rate(
    history: History, i: int, s: Stretch, deviates: Mapping[Dimension, Array], zero: Array
) -> Array:
    of = history.kinetics[s.form]
    warmer = s.temperature_sd * deviates.get(("place", _place(i, s)), zero)
    energetic = deviates.get(("energy", s.form), zero)
    own = deviates.get(("rate", s.form), zero) * math.sqrt(1 - of.correlation**2)
    log_rate = of.log_rate + of.log_rate_sd * (of.correlation * energetic + own)
    energy = of.energy + of.energy_sd * energetic
    log_rate = log_rate + energy * lever(np.maximum(s.temperature + warmer, 1.0), of)
    if s.opened:
        opened = of.log_opened_factor_sd * deviates.get(("opened", s.form), zero)
        log_rate = log_rate + of.log_opened_factor + opened
    return log_rate


def _log_rate_covariance(of: StorageKinetics, levers: Array, opened: Array) -> Array:
    shared = of.correlation * of.log_rate_sd * of.energy_sd
    covariance: Array = (
        of.log_rate_sd**2
        + of.energy_sd**2 * np.outer(levers, levers)
        + shared * np.add.outer(levers, levers)
        + of.log_opened_factor_sd**2 * np.outer(opened, opened)
    )
    return covariance


def _place(i: int, s: Stretch) -> str:
    return s.place or f"stretch {i}"


def _check_stretch(place: str, s: Stretch, known: Iterable[Form], problems: Problems) -> None:
    if not (math.isfinite(s.start) and math.isfinite(s.hours) and s.hours >= 0):
        problems.add(f"{place}.hours", "a stretch of storage needs a time that is not negative")
    if not (math.isfinite(s.temperature) and s.temperature > 0 and s.temperature_sd >= 0):
        problems.add(f"{place}.temperature", "a temperature above absolute zero is wanted")
    if s.form not in known:
        problems.add(f"{place}.form", f"there are no storage kinetics for the form {s.form!r}")


def _check_blow(
    place: str, blow: Thaw | Opening, known: Iterable[Form], problems: Problems
) -> None:
    if not math.isfinite(blow.at) or blow.count < 0:
        problems.add(place, "a thaw or an opening needs a time and a count that is not negative")
    if blow.form not in known:
        problems.add(f"{place}.form", f"there are no storage kinetics for the form {blow.form!r}")
