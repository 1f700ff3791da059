"""The verdict: one or two sentences that say when to come in."""

from digestplan.forecast.result import Forecast
from digestplan.report import words

_A_YEAR = 24 * 366.0  # [h]


def verdict(forecast: Forecast) -> str:
    """
    Return the verdict on a plan, with clock times where the plan has a clock.

    Parameters
    ----------
    forecast
        The finished forecast.

    Returns
    -------
    sentences
        When it is ready and when too far, and which visit meets that.
    """
    return " ".join(
        part for part in (_window_sentence(forecast), _visit_sentence(forecast)) if part
    )


def _window_sentence(forecast: Forecast) -> str:
    plan, window = forecast.plan, forecast.window
    target = words.percent(plan.sample.target_extent.quantity.value)
    sure = _sure(forecast)
    if window.opens_h is None:
        return _not_ready(forecast, target)
    opens = _moment(forecast, window.opens_h)
    if window.closes_h is None:
        if plan.sample.keep_loss_limit is None:
            return f"Ready ({target}) by {opens}{sure}; no keep-loss limit says when it is too far."
        return f"Ready ({target}) by {opens}{sure}, and it does not go too far after that."
    if window.closes_h > _A_YEAR:
        return f"Ready ({target}) by {opens}{sure}; too far only after more than a year."
    closes = _moment(forecast, window.closes_h)
    if not window.exists:
        return (
            f"No safe moment{sure}: surely ready ({target}) only by {opens}, "
            f"but perhaps too far from {closes} on."
        )
    each = sure.replace("sure", "sure of each")
    return f"Ready ({target}) by {opens}, too far from {closes} on{each}."


def _not_ready(forecast: Forecast, target: str) -> str:
    share = forecast.never_ready
    if share >= 1:
        return f"Not ready: the target of {target} is never reached."
    return (
        f"Not sure to be ready: the target of {target} is never reached in "
        f"{words.percent(share)} of futures."
    )


def _sure(forecast: Forecast) -> str:
    if forecast.n_draws == 1:
        return ""
    return f" ({words.percent(forecast.plan.confidence)} sure)"


def _moment(forecast: Forecast, hours: float) -> str:
    from digestplan.forecast.window import on_clock

    moment = on_clock(forecast.plan.start, hours)
    if moment is None:
        return f"{words.hours(hours)} after the start"
    if hours > _A_YEAR:
        return "more than a year from the start"
    return words.day_and_time(moment)


def _visit_sentence(forecast: Forecast) -> str:
    if not forecast.visits:
        return ""
    best = max(forecast.visits, key=lambda chance: chance.in_time)
    when = words.visit(best.visit.start, best.visit.end)
    if best.in_time == 0:
        if best.not_ready >= best.too_far:
            return f"No visit meets it: it is not ready by the end of {when}."
        return f"No visit meets it: by {when} it is too far."
    return f"Come {when}: in time with a chance of {words.percent(best.in_time)}."
