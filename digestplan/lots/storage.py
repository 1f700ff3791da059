"""How an enzyme dies in storage: from the library's values, or from a lot's own stability data."""

import math
from dataclasses import dataclass, replace
from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.constants import GAS_CONSTANT
from digestplan.kinetics.fitting import Model, fit_curve
from digestplan.kinetics.linear import Fit, fit_line, fit_linear, student_quantile
from digestplan.kinetics.profile import profile_limits
from digestplan.problems import InputError, Problem
from digestplan.quantities.model import Quantity

Array = NDArray[np.float64]
Form = Literal["dry", "solution", "glycerol"]

_BENDS = 0.01  # two-sided level at which a logarithm of activity counts as bending
_LEAST = 3  # measurements at one temperature for a rate there


@dataclass(frozen=True, slots=True)
class StorageKinetics:
    """How one form of an enzyme dies in storage.

    Attributes
    ----------
    log_rate, log_rate_sd
        Logarithm of the inactivation rate at the reference temperature. [ln(1/h)]
    energy, energy_sd
        Activation energy of the inactivation. [J/mol]
    reference_temperature
        Where the rate holds. [K]
    correlation
        Of logarithm and energy, where both come from one fit. [1]
    log_thaw_loss, log_thaw_loss_sd
        Logarithm of what one thaw takes off ln(remaining); minus infinity where it takes
        nothing. [1]
    log_opened_factor, log_opened_factor_sd
        Logarithm of how many times faster an opened bottle goes. [1]
    log_opening_loss, log_opening_loss_sd
        Logarithm of what one opening takes off ln(remaining); minus infinity where it takes
        nothing. [1]
    """

    log_rate: float
    log_rate_sd: float
    energy: float
    energy_sd: float
    reference_temperature: float
    correlation: float = 0.0
    log_thaw_loss: float = -math.inf
    log_thaw_loss_sd: float = 0.0
    log_opened_factor: float = 0.0
    log_opened_factor_sd: float = 0.0
    log_opening_loss: float = -math.inf
    log_opening_loss_sd: float = 0.0


@dataclass(frozen=True, slots=True)
class TimeToFraction:
    """When the activity has fallen to a fraction.

    Attributes
    ----------
    hours
        The estimate. [h]
    lower_hours
        Its one-sided lower confidence limit. [h]
    extrapolated
        Whether the temperature lies outside those that were measured.
    """

    hours: float
    lower_hours: float
    extrapolated: bool


@dataclass(frozen=True, slots=True, eq=False)
class StorageFit:
    """First-order inactivation with an Arrhenius rate, fitted to all temperatures at once.

    Attributes
    ----------
    fit
        ``log_rate`` [ln(1/h)], ``initial`` (activity at the start) and, where there are two
        temperatures or more, ``energy`` [J/mol].
    reference_temperature
        Where the rate holds. [K]
    temperature, hours, activity, weights
        The data, shape (n_points,).
    log_residuals
        ln(activity) less the straight line, shape (n_points,); NaN where nothing was left.
    curvature_t
        Student's t of a bend in ln(activity) against time.
    bends
        Whether that bend is more than chance, so that one first-order rate is not all.
    """

    fit: Fit
    reference_temperature: float
    temperature: Array
    hours: Array
    activity: Array
    weights: Array
    log_residuals: Array
    curvature_t: float
    bends: bool

    def log_rate_at(self, temperature: float) -> tuple[float, float]:
        """Logarithm of the inactivation rate at a temperature, with its standard error."""
        if "energy" not in self.fit.names:
            if not math.isclose(temperature, self.temperature[0], abs_tol=0.01):
                raise ValueError("Measured at one temperature: the rate at another is not known.")
            return self.fit["log_rate"], self.fit.standard_error("log_rate")
        gradient = np.zeros(3)
        gradient[self.fit.names.index("log_rate")] = 1.0
        gradient[self.fit.names.index("energy")] = _lever(temperature, self.reference_temperature)
        variance = gradient @ self.fit.covariance @ gradient
        return float(gradient[:2] @ self.fit.estimates[:2]), math.sqrt(variance)

    def time_to(
        self, fraction: float, temperature: float, confidence: float = 0.95
    ) -> TimeToFraction:
        """Time to a fraction of the initial activity, with its one-sided lower limit."""
        log_rate, error = self.log_rate_at(temperature)
        quantile = student_quantile(confidence, self.fit.degrees_of_freedom)
        lost = -math.log(fraction)
        inside = self.temperature.min() <= temperature <= self.temperature.max()
        return TimeToFraction(
            lost / math.exp(log_rate), lost / math.exp(log_rate + quantile * error), not inside
        )

    def limits(self, name: str, level: float = 0.95) -> tuple[float, float]:
        """Profile-likelihood limits of one parameter."""
        levers = _lever(self.temperature, self.reference_temperature)
        model = _model(self.hours, levers, energetic="energy" in self.fit.names)
        return profile_limits(
            model, self.activity, self.fit, name, level=level, weights=self.weights
        )

    def kinetics(self, like: StorageKinetics | None = None) -> StorageKinetics:
        """
        Storage kinetics of the lot's own; thaws and openings stay those of the library's.

        Parameters
        ----------
        like
            The library's kinetics of the form; its energy serves where one temperature alone
            was measured.
        """
        own = like or StorageKinetics(0.0, 0.0, 0.0, 0.0, self.reference_temperature)
        own = replace(
            own,
            log_rate=self.fit["log_rate"],
            log_rate_sd=self.fit.standard_error("log_rate"),
            reference_temperature=self.reference_temperature,
            correlation=0.0,
        )
        if "energy" in self.fit.names:
            return replace(
                own,
                energy=self.fit["energy"],
                energy_sd=self.fit.standard_error("energy"),
                correlation=float(self.fit.correlation[0, 1]),
            )
        if like is None:
            raise ValueError("One temperature tells no activation energy; the library's is needed.")
        return own


def storage_kinetics(
    rate: Quantity,
    energy: Quantity,
    reference_temperature: float,
    *,
    thaw_loss: Quantity | None = None,
    opened_factor: Quantity | None = None,
    opening_loss: Quantity | None = None,
) -> StorageKinetics:
    """
    Storage kinetics from quantities as they are written or stand in the library.

    Parameters
    ----------
    rate
        Inactivation rate at the reference temperature. [1/h]
    energy
        Its activation energy. [J/mol]
    reference_temperature
        Where the rate holds. [K]
    thaw_loss
        Fraction of the activity that one thaw takes. [1]
    opened_factor
        How many times faster an opened bottle goes. [1]
    opening_loss
        Fraction of the activity that one opening takes. [1]

    Returns
    -------
    kinetics
        The same as logarithms; a normal spread becomes the log-normal of the same mean and
        standard deviation.
    """
    log_rate, log_rate_sd = log_moments(rate)
    energy_sd = energy.spread
    if energy.distribution == "lognormal":
        energy_sd = energy.value * math.log(energy.spread)
    thaw, thaw_sd = _log_loss(thaw_loss)
    opening, opening_sd = _log_loss(opening_loss)
    opened, opened_sd = (0.0, 0.0) if opened_factor is None else log_moments(opened_factor)
    return StorageKinetics(
        log_rate,
        log_rate_sd,
        energy.value,
        energy_sd,
        reference_temperature,
        log_thaw_loss=thaw,
        log_thaw_loss_sd=thaw_sd,
        log_opened_factor=opened,
        log_opened_factor_sd=opened_sd,
        log_opening_loss=opening,
        log_opening_loss_sd=opening_sd,
    )


def _log_loss(lost: Quantity | None) -> tuple[float, float]:
    """Logarithm, with its deviation, of what a lost fraction takes off ln(remaining)."""
    if lost is None or not lost.value > 0:
        return -math.inf, 0.0
    off_log = -math.log1p(-min(lost.value, 1 - 1e-9))
    return math.log(off_log), log_moments(lost)[1]


def log_moments(quantity: Quantity) -> tuple[float, float]:
    """Mean and standard deviation of the logarithm of a positive quantity."""
    if quantity.distribution == "exact":
        return math.log(quantity.value), 0.0
    if quantity.distribution == "lognormal":
        return math.log(quantity.value), math.log(quantity.spread)
    variance = math.log1p((quantity.spread / quantity.value) ** 2)
    return math.log(quantity.value) - variance / 2, math.sqrt(variance)


def fit_inactivation(
    temperature: ArrayLike,
    hours: ArrayLike,
    activity: ArrayLike,
    *,
    reference_temperature: float | None = None,
    weights: ArrayLike | None = None,
) -> StorageFit:
    """
    Fit activity against time at one temperature or several.

    Parameters
    ----------
    temperature, hours, activity
        The data, shape (n_points,); the activity in any unit. [K], [h]
    reference_temperature
        Where the rate is to hold; the mean of the measured ones if None. [K]
    weights
        One over the variance of the activity up to a common factor, or None for all alike.

    Returns
    -------
    fit
        The fit, its residuals on the log scale, and whether they bend.

    Notes
    -----
    The least squares are on the activity itself, a = a0 exp(−k(T) t) with
    k = exp[ln k_ref − (Ed/R)(1/T − 1/T_ref)].
    """
    t, kelvin, a = (np.asarray(v, dtype=float) for v in (hours, temperature, activity))
    w = np.ones_like(a) if weights is None else np.broadcast_to(np.asarray(weights, float), a.shape)
    if reference_temperature is None:
        reference_temperature = float(1 / np.mean(1 / kelvin))
    levers = _lever(kelvin, reference_temperature)
    start = _start(kelvin, levers, t, a)
    names = ("log_rate", "energy", "initial") if len(start) == 3 else ("log_rate", "initial")
    model = _model(t, levers, energetic=len(start) == 3)
    fit = fit_curve(model, a, start, weights=w, names=names)
    if not fit.converged:
        raise InputError(Problem("activity", f"no inactivation rate can be had: {fit.message}"))
    log_residuals, curvature, bends = _log_scale(model(fit.estimates), fit["initial"], a, w)
    return StorageFit(fit, reference_temperature, kelvin, t, a, w, log_residuals, curvature, bends)


# -- the parts ----------------------------------------------------------------------------


def lever(temperature: ArrayLike, of: StorageKinetics) -> Array:
    """How much ln k rises at temperatures [K] per J/mol of activation energy."""
    return _lever(temperature, of.reference_temperature)


def _lever(temperature: ArrayLike, reference: float) -> Array:
    rise: Array = (1 / reference - 1 / np.asarray(temperature)) / GAS_CONSTANT
    return rise


def _model(hours: Array, levers: Array, *, energetic: bool) -> Model:
    """Activity as a function of (log_rate, energy, initial), or of (log_rate, initial)."""

    def activity(p: NDArray[Any]) -> NDArray[Any]:
        log_rate = p[0] + p[1] * levers if energetic else p[0] + 0 * levers
        left: NDArray[Any] = p[-1] * np.exp(-np.exp(log_rate) * hours)
        return left

    return activity


def _start(kelvin: Array, levers: Array, t: Array, a: Array) -> list[float]:
    """Straight lines in ln(activity), temperature by temperature, then Arrhenius through them."""
    found: list[tuple[float, float, float]] = []
    if np.unique(kelvin, return_counts=True)[1].max() < _LEAST:
        message = f"{_LEAST} measurements or more at one temperature are needed"
        raise InputError(Problem("activity", message))
    for one in np.unique(kelvin):
        used = (kelvin == one) & (a > 0)
        if len(np.unique(t[used])) < 2 or np.count_nonzero(used) < _LEAST:
            continue
        line = fit_line(t[used], np.log(a[used]), a[used] ** 2)
        if line["slope"] < 0:
            found.append((levers[used][0], math.log(-line["slope"]), math.exp(line["intercept"])))
    if not found:
        message = "it does not fall with time at any temperature: no inactivation rate can be had"
        raise InputError(Problem("activity", message))
    x, log_rates, initial = (np.array(v) for v in zip(*found, strict=True))
    if len(np.unique(kelvin)) == 1:
        return [float(log_rates[0]), float(initial[0])]
    if len(found) == 1:
        message = "it falls with time at one temperature only: no activation energy can be had"
        raise InputError(Problem("activity", message))
    energy, log_rate = np.polyfit(x, log_rates, 1)
    return [float(log_rate), float(energy), float(np.mean(initial))]


def _log_scale(fitted: Array, initial: float, a: Array, w: Array) -> tuple[Array, float, bool]:
    """Residuals against the straight line on the log scale, and the t of a bend in them."""
    residuals = np.full(len(a), np.nan)
    left = (a > 0) & (fitted > 0)
    residuals[left] = np.log(a[left] / fitted[left])
    passed = -np.log(fitted[left] / initial)
    spread = np.ptp(passed)
    if np.count_nonzero(left) < 5 or len(np.unique(passed)) < 3 or spread == 0:
        return residuals, 0.0, False
    scaled = passed / spread
    columns = np.column_stack([np.ones_like(scaled), scaled, scaled**2])
    bend = fit_linear(columns, residuals[left], w[left] * fitted[left] ** 2)
    if bend.residual_sd <= 1e-8 * abs(initial):  # exact data: rounding does not bend
        return residuals, 0.0, False
    t = float(bend.estimates[2] / bend.standard_errors[2])
    return residuals, t, abs(t) > student_quantile(1 - _BENDS / 2, bend.degrees_of_freedom)
