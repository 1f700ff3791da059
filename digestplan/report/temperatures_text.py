"""A plan at several temperatures as plain text: 79 columns, no colour needed."""

from collections.abc import Callable, Iterable, Sequence

from digestplan.forecast.temperatures import Comparison, Option
from digestplan.report import words
from digestplan.report.limit_words import limit_of
from digestplan.report.lines import wrapped

_CELSIUS = 273.15
Column = tuple[str, int, Callable[[Option], str]]


def temperatures_text(comparison: Comparison) -> str:
    """
    Return the report on a comparison of temperatures.

    Parameters
    ----------
    comparison
        The finished comparison.

    Returns
    -------
    text
        Best temperatures, two tables, and what limits each; lines of at most 79 characters.
    """
    options, plan = comparison.options, comparison.plan
    blocks = [
        wrapped(_best(comparison)),
        wrapped(words.plain(plan.title)),
        _table("What the sample sees", _SAMPLE, options),
        _table("What you see", _PEOPLE, options),
        _limits(comparison),
        *(wrapped(note) for note in _notes(comparison)),
    ]
    return "\n\n".join(block for block in blocks if block) + "\n"


def celsius(temperature: float | None) -> str:
    """Return a temperature [K] in degrees Celsius, or a dash."""
    return "–" if temperature is None else f"{temperature - _CELSIUS:.4g} °C"


def _best(comparison: Comparison) -> str:
    by_chance, by_harm = comparison.best_by_chance, comparison.best_by_harm
    curve = comparison.curve
    if curve is None:
        return "The same plan at each temperature."
    if by_chance is None:
        if by_harm is None:
            return "No temperature brings it to its target in more than half of futures."
        return f"Gentlest at {celsius(by_harm)}. Without visits there is no chance to compare."
    chance = max(p for p in curve.chance_in_time if p == p)  # noqa: PLR0124 - not a number
    said = f"Best at {celsius(by_chance)}: in time in about {words.percent(chance)} of futures."
    if by_harm is None:
        return f"{said} No temperature gives an even chance."
    return f"{said} Gentlest, with at least an even chance, at {celsius(by_harm)}."


def _table(head: str, columns: Sequence[Column], options: Iterable[Option]) -> str:
    lines = [head, "".join(f"{name:>{width}}" for name, width, _ in columns)]
    lines += ["".join(f"{say(option):>{width}}" for _, width, say in columns) for option in options]
    return "\n".join(line.rstrip() for line in lines)


def _degrees(option: Option) -> str:
    mark = "*" if option.measured is False else " "
    return f"{option.temperature - _CELSIUS:.4g}{mark}"


def _mass(grams: float | None) -> str:
    if grams is None:
        return "–"
    return f"{1e3 * grams:.2g} mg" if grams < 0.1 else f"{1e3 * grams:.0f} mg"


def _width(option: Option) -> str:
    opens, closes = option.window.opens_h, option.window.closes_h
    if opens is None:
        return "none"
    if closes is None:
        return "no end"
    return words.hours(closes - opens) if closes > opens else "none"


_SAMPLE: tuple[Column, ...] = (
    ("°C", 7, _degrees),
    ("hours to 5 %", 14, lambda o: words.hours(o.hours_to_target.p05)),
    ("median", 10, lambda o: words.hours(o.hours_to_target.p50)),
    ("95 %", 13, lambda o: words.hours(o.hours_to_target.p95)),
    ("active", 8, lambda o: _share(o.residual_activity_at_target.p50)),
    ("ceiling", 9, lambda o: _share(o.ceiling.p50)),
    ("keep loss", 11, lambda o: _share(o.keep_loss_at_target.p50)),
    ("pH", 7, lambda o: "–" if o.ph is None else f"{o.ph:.2f}"),
)
_PEOPLE: tuple[Column, ...] = (
    ("°C", 7, _degrees),
    ("opens", 13, lambda o: words.hours(o.window.opens_h)),
    ("closes", 13, lambda o: words.hours(o.window.closes_h)),
    ("wide", 10, _width),
    ("enzyme for visit", 19, lambda o: _mass(o.charge_for_visit)),
    ("in time", 12, lambda o: "–" if o.chance_in_time is None else words.percent(o.chance_in_time)),
)


def _share(share: float | None) -> str:
    return "–" if share is None else words.percent(share)


def _limits(comparison: Comparison) -> str:
    visits = any(option.chance_in_time is not None for option in comparison.options)
    lines = ["What keeps it from being in time"]
    for option in comparison.options:
        said = limit_of(option.missed, visits=visits)
        lines.append(wrapped(said, " " * 9, f"{_degrees(option):>7}  "))
    return "\n".join(lines)


def _notes(comparison: Comparison) -> Iterable[str]:
    plan, main = comparison.plan, comparison.main
    if any(option.measured is False for option in comparison.options):
        known = plan.enzyme.measured_temperature
        assert known is not None
        low, high = celsius(known[0]), celsius(known[1])
        yield f"* outside the range over which {plan.enzyme.name} was measured ({low} to {high})."
    yield (
        f"Set to each temperature: what step {main.index + 1} does at {celsius(main.temperature)}, "
        "and the ramps to it; all else stays. Hours count from the start of that step. Active and "
        "keep loss: medians when the target is reached, where it is. Ceiling: at the step's last "
        "temperature for ever. Enzyme for visit: what to weigh in so that it is ready "
        f"({words.percent(plan.confidence)} sure) when the first visit begins. In time: somebody "
        "is there, at one visit or another, between ready and too far."
    )
    if comparison.n_draws > 1:
        yield (
            f"{comparison.n_draws} draws, seed {comparison.seed}; the same futures at every "
            "temperature. The plan's cautions stand in its forecast."
        )
