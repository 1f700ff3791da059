"""What is refused, and how the message helps."""

import pytest

from digestplan.quantities import QuantityError, parse_quantity


def message(written, kind):
    """What is said of a text that is refused."""
    with pytest.raises(QuantityError) as refused:
        parse_quantity(written, kind)
    assert str(refused.value) == refused.value.message
    return refused.value.message


def test_the_message_of_the_interface():
    """A wrong dimension is told as the interface promises, without the place."""
    expected = '"3 mg" is a mass; a volume is wanted here, such as "3 mL"'

    assert message("3 mg", "volume") == expected


@pytest.mark.parametrize(
    ("written", "kind", "expected"),
    [
        ("3 h", "volume", "is a time; a volume is wanted here"),
        ("3 mg/mL", "volume", "is a mass concentration; a volume"),
        ("37 C", "volume", "is a temperature; a volume"),
        ("5 degC/min", "temperature", "has an unknown unit"),
        ("3 K/h", "temperature", "is a change of temperature per time; a temperature"),
        ("5 mmol", "molar_concentration", "is an amount of substance; a molar concentration"),
        ("280 CDU/mL", "activity", "is a concentration of enzyme; an activity per mass"),
        ("280 CDU", "activity", "is an amount of enzyme; an activity per mass"),
        ("3 µmol/min/mg", "activity", "1 µmol/min is written 1 U"),
        ("0.5 1/h", "susceptibility", "is a rate; a susceptibility is wanted"),
        ("5 h", "dose", "is a time; a dose is wanted"),
        ("50 g/mol", "susceptibility", "is a molar mass; a susceptibility"),
        ("2 mL/mL", "ratio", "is a plain number; a ratio of enzyme to substrate"),
        ("3 m L", "volume", "is not a volume; a volume is wanted here"),
        ("7.5 M", "ph", "has a unit, which is not wanted here; a pH is wanted here, such as 7.5"),
        ("10 %", "number", "is a percentage; a number is wanted"),
        ("0.25 %", "enzyme_concentration", "write % w/v"),
        ("10 %", "mass", "is a percentage; a mass is wanted"),
        ("10 % w/v", "ratio", "is a percentage; a ratio"),
        ("10 % w/w", "reagent_concentration", "is a percentage; a concentration"),
        ("37 % v/v", "reagent_concentration", "is a share of volumes"),
        ("1 AU", "number", "an absorbance has none"),
        ("1 AU/g", "rate", "is an activity per mass of enzyme; a rate is wanted"),
    ],
)
def test_a_wrong_dimension_is_named(written, kind, expected):
    """The message names what was written and what is wanted."""
    assert expected in message(written, kind)


@pytest.mark.parametrize(
    ("written", "kind", "near"),
    [
        ("3 mLL", "volume", "mL"),
        ("3 ML", "volume", "mL"),
        ("3 mL.", "volume", None),
        ("50 mm", "molar_concentration", "mM"),
        ("5 m", "molar_concentration", "M"),
        ("1.5 mM", "length", "mm"),
        ("90 minuts", "time", "minutes"),
        ("90 MIN", "time", "min"),
        ("52 KJ/mol", "energy", "kJ/mol"),
        ("280 cdu/mg", "activity", "CDU/mg"),
        ("280 FALGPA/mg", "activity", "FALGPA_U/mg"),
        ("310 k", "temperature", "K"),
        ("3 mg", "volume", None),
        ("3 xyzzy", "volume", None),
    ],
)
def test_the_nearest_unit_is_offered(written, kind, near):
    """An unknown unit, or one that differs by a capital, brings the nearest of the right kind."""
    said = message(written, kind)

    assert (f'; is "{near}" meant?' in said) if near else ("meant" not in said)


@pytest.mark.parametrize(
    ("written", "kind", "hint"),
    [
        ("0,5 mL", "volume", 'write "0.5 mL"'),
        ("0,5 ± 0,1 mL", "volume", 'write "0.5 ± 0.1 mL"'),
        ("0,125 mL", "volume", 'write "0.125 mL"'),
        ("1,000 mg", "mass", 'write "1000 mg" or "1.000 mg"'),
        ("1,234,567 mg", "mass", 'write "1234567 mg"'),
        ("overnight", "time", 'write how long, such as "16 h"'),
        ("o/n", "time", "says no time"),
        ("2 months", "time", "write it in days or weeks"),
        ("2:30", "time", 'write it such as "2 h 30 min"'),
        ("2 h 30", "time", "has a number without its unit"),
        ("30 min 2 h", "time", "out of order"),
        ("RT", "temperature", 'says no temperature; write it, such as "22 degC"'),
        ("room temperature", "temperature", "says no temperature"),
        ("on ice", "temperature", '"0 degC"'),
        ("98.6 °F", "temperature", "Fahrenheit"),
        ("5-10 mL", "volume", "is a range; write one value with its spread"),
        ("5 – 10 mL", "volume", "is a range"),
        ("5 to 10 mL", "volume", "is a range"),
        ("1:20-1:100", "ratio", "is a range"),
        ("~3 mL", "volume", "is not definite"),
        ("< 3 mL", "volume", "is not definite"),
        ("ca. 3 mL", "volume", "is not definite"),
        ("3 × 10^-11 m²/s", "diffusivity", "write a power of ten with e"),
        ("3×10⁻¹¹ m²/s", "diffusivity", "write a power of ten with e"),
        ("10² mL", "volume", "has a power"),
        ("½ h", "time", "write it with a decimal point"),
        ("0.5 N", "reagent_concentration", "is a normality"),
        ("1/50", "ratio", 'write it such as "1:50"'),
        ("300 units/mg", "activity", "does not say which unit of activity"),
        ("300 IU/mg", "activity", "U is 1 µmol/min"),
        ("0.05 mL/mg h", "autolysis_rate", 'write "mL/(mg h)"'),
        ("8.3 J/mol K", "entropy", 'write "J/(mol K)"'),
    ],
)
def test_what_the_bench_says_is_refused_with_a_hint(written, kind, hint):
    """What can be read in two ways, or says no number, is refused with what to write instead."""
    assert hint in message(written, kind)


@pytest.mark.parametrize(
    ("written", "kind", "reason"),
    [
        ("3", "volume", "has no unit; a volume is wanted here"),
        (3, "volume", "has no unit; a volume is wanted here"),
        ("0.02", "ratio", "has no unit"),
        ("mL", "volume", "is no number with its unit"),
        ("", "volume", "is empty"),
        ("   ", "volume", "is empty"),
        ("-3 mL", "volume", "is negative"),
        ("-2 h 30 min", "time", "is negative"),
        ("-1 mM", "molar_concentration", "is negative"),
        ("-52 kJ/mol", "energy", "is negative"),
        ("0 mL", "volume", "is zero"),
        ("0", "positive_number", "is zero"),
        ("1.2", "fraction", "is not between 0 and 1"),
        ("120 %", "fraction", "is not between 0 and 1"),
        ("1.6", "active_fraction", "is not between 0 and 1.5"),
        ("15.1", "ph", "is not between -1 and 15"),
        (0, "count", "is not between 1 and"),
        ("2.5", "count", "is no whole number"),
        ("3 ± 1", "count", "a count is exact"),
        ("-300 degC", "temperature", "between absolute zero and 200 °C"),
        ("0 K", "temperature", "between absolute zero and 200 °C"),
        ("500 °C", "temperature", "between absolute zero and 200 °C"),
        ("nan mL", "volume", "is no finite number"),
        ("inf mL", "volume", "is no finite number"),
        ("1e400 mL", "volume", "is larger than any value can be"),
        ("1e308 kg", "mass", "is larger than any value can be"),
        ("1e-400 mL", "volume", "is too small to be told from zero"),
        ("1e1000 mL", "volume", "unit that cannot be read"),
        ("1_000 mL", "volume", "unit that cannot be read"),
        ("0x10 mL", "volume", "unit that cannot be read"),
        ("٣ mL", "volume", "is no number"),
        ("3\u200bmL", "volume", "cannot be seen"),
        ("3\nmL", "volume", "cannot be seen"),
        ("1:0", "ratio", "has no substrate"),
        ("1:-50", "ratio", "has no substrate"),
        ("1:2:3", "ratio", "is no ratio of two numbers"),
        ("-1:50", "ratio", "is negative"),
        ("3 mg 4", "mass", "cannot be read"),
        ("5(2) mg", "mass", "cannot be read"),
        ("5 pH", "ph", "has a unit, which is not wanted"),
    ],
)
def test_what_is_no_value_is_refused(written, kind, reason):
    """Missing units, amounts below zero, endless numbers and look-alikes are refused in words."""
    assert reason in message(written, kind)


@pytest.mark.parametrize(
    ("written", "kind", "reason"),
    [
        ("55 ± -5 kJ/mol", "energy", "has a spread below zero"),
        ("55 kJ/mol ±", "energy", "has no number after ±"),
        ("55 ± 5 ± 3 kJ/mol", "energy", "has more than one spread"),
        ("55 kJ/mol ± 5 x/ 2", "energy", "has more than one spread"),
        ("55 kJ/mol ± 5 K", "energy", "is a temperature"),
        ("280 CDU/mg ± 5 U/mg", "activity", "has a spread in another unit"),
        ("0.03 1/h x/ 0.5", "rate", "factor of spread below 1"),
        ("0.03 1/h x/ -2", "rate", "factor of spread below 1"),
        ("0.03 1/h x/ 2 1/h", "rate", "has no plain number after x/"),
        ("0.03 1/h x/", "rate", "has no plain number after x/"),
        ("0 1/h x/ 2", "rate", "must be above zero"),
        ("-4 kJ/(mol K) x/ 2", "heat_capacity", "must be above zero"),
        ("37 degC x/ 1.1", "temperature", "which a temperature cannot have"),
        ("7.5 x/ 1.1", "ph", "which a pH cannot have"),
        ("2 h 30 min ± 10", "time", "has a spread without its unit"),
        ("82 % ± 0.05", "fraction", "has a spread without its unit"),
        ("1:50 ± 5", "ratio", "has a spread without its unit"),
        ("1e300 kJ/mol ± 1e300 %", "energy", "spread larger than any value"),
        ("55 kJ/mol ± nan", "energy", "has no number after ±"),
    ],
)
def test_spreads_that_make_no_sense_are_refused(written, kind, reason):
    """A standard deviation is at least 0, a factor at least 1, and both are clear."""
    assert reason in message(written, kind)


@pytest.mark.parametrize(
    ("written", "kind", "hint"),
    [
        ("0.82 ± 5 %", "fraction", 'write "0.82 ± 0.041" or "0.82 ± 0.05"'),
        ("7.5 ± 2 %", "ph", "write it as a number"),
        ("60 ± 5 %", "positive_number", "write it as a number"),
        ("37 degC ± 2 %", "temperature", "write it in the unit of the value"),
        ("20 mg/g ± 5 %", "ratio", "write the spread in the unit of the value"),
        ("100 g/L ± 5 %", "reagent_concentration", "write the spread in the unit of the value"),
    ],
)
def test_a_spread_in_percent_is_refused_where_it_may_mean_two_things(written, kind, hint):
    """Percent of the value, or percentage points: where both are possible neither is assumed."""
    assert hint in message(written, kind)


def test_messages_show_nothing_that_a_terminal_acts_upon():
    """Control characters, overrides and lone surrogates are written out, long text is cut."""
    said = message("\x1b[31m3 mL\u202e\ud800", "volume")

    assert said.isprintable()
    assert "\\x1b" in said
    assert len(message("m" * 200_000, "volume")) < 200


def test_an_unknown_kind_is_the_callers_mistake():
    """A kind that does not exist is no matter of what was written."""
    with pytest.raises(KeyError):
        parse_quantity("3 mL", "colour")
