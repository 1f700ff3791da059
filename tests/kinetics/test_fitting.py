"""Fits against the certified sets, and what a fit says when it has not arrived."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from digestplan.kinetics.fitting import complex_step, fit_curve
from digestplan.kinetics.linear import fit_line, fit_linear, student_quantile
from digestplan.kinetics.profile import profile_limits

NIST = Path(__file__).parents[1] / "reference" / "nist"
CERTIFIED = json.loads((NIST / "certified.json").read_text(encoding="utf-8"))
NIST_SETS = "NIST Statistical Reference Datasets, nonlinear regression"


def rational(b, x):
    return (b[0] + b[1] * x + b[2] * x**2 + b[3] * x**3) / (
        1 + b[4] * x + b[5] * x**2 + b[6] * x**3
    )


def plateau(b, x):
    return b[0] * (1 - np.exp(-b[1] * x))


MODELS = {
    "BoxBOD": plateau,
    "Misra1a": plateau,
    "MGH09": lambda b, x: b[0] * (x**2 + x * b[1]) / (x**2 + x * b[2] + b[3]),
    "MGH10": lambda b, x: b[0] * np.exp(b[1] / (x + b[2])),
    "Thurber": rational,
    "Chwirut2": lambda b, x: np.exp(-b[0] * x) / (b[1] + b[2] * x),
    "Rat43": lambda b, x: b[0] / (1 + np.exp(b[1] - b[2] * x)) ** (1 / b[3]),
    "Eckerle4": lambda b, x: b[0] / b[1] * np.exp(-0.5 * ((x - b[2]) / b[1]) ** 2),
    "Bennett5": lambda b, x: b[0] * (b[1] + x) ** (-1 / b[2]),
    "Hahn1": rational,
    "Nelson": lambda b, x: b[0] - b[1] * x[0] * np.exp(-b[2] * x[1]),
    "MGH17": lambda b, x: b[0] + b[1] * np.exp(-x * b[3]) + b[2] * np.exp(-x * b[4]),
    "Lanczos3": lambda b, x: sum(b[k] * np.exp(-b[k + 1] * x) for k in (0, 2, 4)),
}


def data(name):
    with (NIST / CERTIFIED[name]["csv"]).open(encoding="utf-8") as lines:
        rows = [[float(v) for v in row] for row in list(csv.reader(lines))[1:]]
    y, *x = np.array(rows).T
    if name == "Nelson":  # the model is for the logarithm
        y = np.log(y)
    return y, x[0] if len(x) == 1 else np.array(x)


def values(name, key):
    return np.array(list(CERTIFIED[name][key].values()))


def fitted(name, start, n_starts):
    y, x = data(name)
    return fit_curve(lambda b: MODELS[name](b, x), y, values(name, start), n_starts=n_starts)


@pytest.mark.source("P", NIST_SETS)
@pytest.mark.parametrize(("start", "n_starts"), [("start2", 1), ("start1", 3)])
@pytest.mark.parametrize("name", MODELS)
def test_certified_parameters_and_their_standard_deviations(name, start, n_starts):
    """Each certified set is fitted to six digits, from the near start and from the far one."""
    fit = fitted(name, start, n_starts)

    assert fit.converged, fit.message
    np.testing.assert_allclose(fit.estimates, values(name, "certified"), rtol=1e-6)
    np.testing.assert_allclose(fit.standard_errors, values(name, "sd"), rtol=1e-5)
    np.testing.assert_allclose(fit.residual_sd, CERTIFIED[name]["residual_sd"], rtol=1e-6)
    assert fit.degrees_of_freedom == CERTIFIED[name]["dof"]


def test_limits_of_an_accelerated_ageing_rate():
    """A rate known worse than itself keeps positive limits, though estimate - 2 SD is negative."""
    y, x = data("Nelson")

    def model(b):
        return MODELS["Nelson"](b, x)

    fit = fit_curve(model, y, values("Nelson", "start2"))
    lower, upper = profile_limits(model, y, fit, "b2")

    assert fit["b2"] - 2 * fit.standard_error("b2") < 0 < lower < fit["b2"]
    assert upper - fit["b2"] > 2 * (fit["b2"] - lower)


@pytest.mark.source("P", "NIST Statistical Reference Datasets, linear regression, Norris")
def test_certified_straight_line():
    """The straight line of the certified set comes out to 12 digits, its deviations to 10."""
    y, x = data("Norris")
    line = fit_line(x, y)

    np.testing.assert_allclose(line.estimates, values("Norris", "certified"), rtol=1e-12)
    np.testing.assert_allclose(line.standard_errors, values("Norris", "sd"), rtol=1e-10)
    np.testing.assert_allclose(line.residual_sd, CERTIFIED["Norris"]["residual_sd"], rtol=1e-10)


@pytest.mark.source("P", "NIST Statistical Reference Datasets, linear regression, Norris")
def test_columns_give_the_same_line():
    """A line written as two columns gives the certified line and a correlation of its own."""
    y, x = data("Norris")
    fit = fit_linear(np.column_stack([np.ones_like(x), x]), y, names=("b0", "b1"))

    np.testing.assert_allclose(fit.estimates, values("Norris", "certified"), rtol=1e-10)
    np.testing.assert_allclose(fit.standard_errors, values("Norris", "sd"), rtol=1e-10)
    np.testing.assert_allclose(fit.correlation, fit_line(x, y).correlation, rtol=1e-8)


def test_weights_stand_for_repeats():
    """A weight of 3 acts on the estimates as the same reading taken three times."""
    x, y = np.array([1.0, 2.0, 3.0, 5.0]), np.array([1.1, 1.8, 3.3, 4.9])
    weights = np.array([1, 3, 2, 1])
    repeated = fit_line(np.repeat(x, weights), np.repeat(y, weights))
    weighted = fit_line(x, y, weights)
    curve = fit_curve(lambda b: b[0] + b[1] * x, y, [0.0, 0.5], weights=weights)

    np.testing.assert_allclose(weighted.estimates, repeated.estimates, rtol=1e-12)
    np.testing.assert_allclose(curve.estimates, repeated.estimates, rtol=1e-9)
    np.testing.assert_allclose(curve.standard_errors, weighted.standard_errors, rtol=1e-9)


def test_a_weight_of_nothing_leaves_a_point_out():
    """A point of weight 0 changes neither the line nor its degrees of freedom."""
    x, y = np.array([0.0, 1.0, 2.0, 3.0]), np.array([0.1, 0.9, 2.2, 50.0])
    line = fit_line(x, y, [1, 1, 1, 0])

    np.testing.assert_allclose(line.estimates, fit_line(x[:3], y[:3]).estimates, rtol=1e-12)
    assert line.degrees_of_freedom == 1


def test_weights_must_make_sense():
    """A negative or infinite weight is refused."""
    for bad in ([1, 1, -1], [1, np.inf, 1]):
        with pytest.raises(ValueError, match="finite and not negative"):
            fit_line([0, 1, 2], [0, 1, 2], bad)


def test_derivatives_by_complex_step_are_exact():
    """The derivative by complex step equals the written one to rounding."""
    x = np.linspace(0.1, 3, 7)
    exact = np.column_stack([1 - np.exp(-0.7 * x), 2.0 * x * np.exp(-0.7 * x)])

    stepped = complex_step(lambda b: plateau(b, x))(np.array([2.0, 0.7]))

    np.testing.assert_allclose(stepped, exact, rtol=1e-14)


def test_a_model_that_drops_complex_numbers_is_refused():
    """A model that would silently give zero derivatives is told, not fitted."""
    with pytest.raises(TypeError, match="drops complex numbers"):
        fit_curve(lambda b: np.real(b[0]) * np.ones(5), np.ones(5), [1.0])


def test_a_written_jacobian_is_used():
    """With its jacobian given, a model need not take complex numbers."""
    x = np.arange(1.0, 9.0)
    y = 3 * np.abs(x) ** 0.5
    fit = fit_curve(
        lambda b: np.abs(b[0]) * np.sqrt(x),
        y,
        [1.0],
        jacobian=lambda b: np.sqrt(x)[:, None] * np.sign(b[0]),
    )

    np.testing.assert_allclose(fit.estimates, [3.0], rtol=1e-12)


def test_what_the_data_do_not_determine_is_named():
    """Two factors of one product cannot be told apart, and the fit says which they are."""
    x = np.arange(1.0, 9.0)
    fit = fit_curve(
        lambda b: b[0] * b[1] * x + b[2], 2 * x + 1, [1.0, 1.0, 0.0], names=("a", "b", "level")
    )

    assert not fit.converged
    assert fit.message == "the data do not determine a and b"


def test_a_flat_region_is_not_an_optimum():
    """The certified set whose far start tempts into a flat region: being there is no arrival."""
    y, x = data("BoxBOD")
    fit = fit_curve(lambda b: plateau(b, x), y, [150.0, 800.0])

    assert not fit.converged
    assert "b2" in fit.message


def test_too_few_points_are_refused():
    """As many parameters as points leave nothing to judge the errors by."""
    with pytest.raises(ValueError, match="2 points cannot determine 2 parameters"):
        fit_line([0.0, 1.0], [0.0, 1.0])


def test_no_finite_prediction_is_said():
    """Where the model has no finite value at any start, the fit says that."""
    with pytest.raises(ValueError, match="no finite prediction"):
        fit_curve(lambda b: b[0] * np.full(4, np.nan), np.ones(4), [1.0])


def test_exact_data_are_fitted_to_rounding():
    """Readings without noise give back the truth and count as arrived."""
    x = np.linspace(0, 5, 12)
    fit = fit_curve(lambda b: plateau(b, x), plateau([3.0, 0.4], x), [1.0, 1.0])

    assert fit.converged
    np.testing.assert_allclose(fit.estimates, [3.0, 0.4], rtol=1e-12)


@pytest.mark.source("P", "Student's t, tables of any handbook: 12.706 (1 df), 2.571 (5 df), 1.960")
def test_student_quantile():
    """The two-sided 95 % points are those of the handbooks, to their three decimals."""
    for freedom, printed in ((1, 12.706), (5, 2.571), (np.inf, 1.960)):
        assert student_quantile(0.975, freedom) == pytest.approx(printed, abs=5e-4)
