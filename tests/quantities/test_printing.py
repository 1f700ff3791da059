"""What is printed is read back as what it was."""

import subprocess
import sys
from dataclasses import replace
from math import inf, nan

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.quantities import (
    ASSAY_UNITS,
    KINDS,
    Quantity,
    QuantityError,
    format_quantity,
    other_unit,
    parse_quantity,
)

COUNTED = {"activity", "ratio", "dose", "susceptibility"}
ALL_DIGITS = 25


@st.composite
def quantities(draw):
    """A kind and any quantity of it, with any spread that it may have."""
    kind = KINDS[draw(st.sampled_from(sorted(KINDS)))]
    low, high = max(kind.low, -1e9), min(kind.high, 1e9)
    numbers = st.floats(low, high).filter(kind.allows).filter(lambda x: x == 0 or abs(x) > 1e-12)
    value = draw(numbers) + 0.0
    activities = [form.activity for form in kind.forms] or [None]
    activity = draw(st.sampled_from(activities))
    if activity == "{}":
        activity = draw(st.sampled_from(sorted(ASSAY_UNITS)))
    if kind.scale == "whole":
        return kind.name, Quantity(float(round(value)))
    spreads = [("exact", st.just(0.0)), ("normal", st.floats(1e-9, 1e6))]
    if kind.scale == "ratio" and value > 0:
        spreads.append(("lognormal", st.floats(1.001, 1e3)))
    distribution, numbers = draw(st.sampled_from(spreads))
    return kind.name, Quantity(value, draw(numbers), distribution, activity)


@settings(deadline=None, derandomize=True, max_examples=500)
@given(quantities())
def test_printing_and_reading_is_the_identity(drawn):
    """With all its digits, a printed quantity is read back exactly: value, spread and unit."""
    kind, quantity = drawn
    printed = format_quantity(quantity, kind, digits=ALL_DIGITS)
    back = parse_quantity(printed, kind)

    assert replace(back, text="") == quantity


@settings(deadline=None, derandomize=True, max_examples=300)
@given(quantities())
def test_printing_twice_is_printing_once(drawn):
    """What is printed with few digits is printed again as the same text."""
    kind, quantity = drawn
    printed = format_quantity(quantity.value, kind, digits=2, activity=quantity.activity)
    try:
        back = parse_quantity(printed, kind)
    except QuantityError:  # rounded out of its bounds, such as 0.999 K to 0 K
        return

    assert format_quantity(back, kind, digits=2) == printed


@settings(deadline=None, derandomize=True, max_examples=300)
@given(quantities())
def test_the_other_unit_tells_the_same_value(drawn):
    """What is told beside a value is the same value, to five digits."""
    kind, quantity = drawn
    written = parse_quantity(format_quantity(quantity, kind, digits=ALL_DIGITS), kind)
    other = other_unit(written, kind)
    if other is None:
        return
    back = parse_quantity(other, kind)

    assert back.activity == written.activity
    assert back.value == pytest.approx(written.value, rel=1e-4, abs=0.006)  # abs: 0.01 °C


@pytest.mark.parametrize(
    ("value", "kind", "expected"),
    [
        (3.0, "volume", "3 mL"),
        (5e-3, "volume", "5 µL"),
        (2000.0, "volume", "2 L"),
        (0.18, "mass", "180 mg"),
        (1.5, "time", "1.5 h"),
        (0.5, "time", "30 min"),
        (310.15, "temperature", "37 °C"),
        (273.15, "temperature", "0 °C"),
        (253.15, "temperature", "-20 °C"),
        (52123.0, "energy", "52.1 kJ/mol"),
        (0.03, "rate", "0.03 1/h"),
        (1.08e-7, "diffusivity", "3e-11 m²/s"),
        (0.30, "fraction", "0.3"),
        (7.5, "ph", "7.5"),
        (0.05, "molar_concentration", "50 mM"),
        (0.5, "molar_concentration", "0.5 M"),
        (2e-4, "molar_concentration", "0.2 mM"),
        (3.0, "count", "3"),
        (123456.0, "number", "123000"),
        (1.5e-3, "length", "1.5 mm"),
        (50.0, "autolysis_rate", "0.05 mL/(mg h)"),
        (nan, "volume", "nan mL"),
        (inf, "time", "inf h"),
    ],
)
def test_values_are_printed_as_the_bench_writes_them(value, kind, expected):
    """µ is U+00B5, mL has its capital, and the unit gives a readable number."""
    assert format_quantity(value, kind) == expected


@pytest.mark.parametrize(
    ("written", "kind", "expected"),
    [
        ("52000 J/mol ± 6 kJ/mol", "energy", "52 ± 6 kJ/mol"),
        ("37 degC ± 0.5 K", "temperature", "37 ± 0.5 °C"),
        ("0.03 1/h x/ 1.6", "rate", "0.03 1/h ×/ 1.6"),
        ("0.82 ± 0.06", "active_fraction", "0.82 ± 0.06"),
        ("280000 CDU/g", "activity", "280 CDU/mg"),
        ("1:50", "ratio", "20 mg/g"),
        ("100 g/L", "reagent_concentration", "10 % w/v"),
        ("0.002 g/CDU/h", "susceptibility", "0.002 g/(CDU h)"),
    ],
)
def test_quantities_are_printed_with_their_spread(written, kind, expected):
    """A quantity is printed with its spread and in the unit that it counts enzyme in."""
    assert format_quantity(parse_quantity(written, kind), kind) == expected


def test_a_unit_may_be_asked_for():
    """A caller may ask for a unit and for digits."""
    assert format_quantity(1.5, "time", "min") == "90 min"
    assert format_quantity(310.15, "temperature", "K", digits=5) == "310.15 K"
    assert format_quantity(1e5, "ratio", "CDU/mg") == "100 CDU/mg"
    assert format_quantity(1e5, "ratio", activity="WU") == "100 WU/mg"


def test_a_value_is_never_printed_in_a_unit_that_is_not_its_own():
    """A wrong unit, another assay, or a missing one is refused, not printed."""
    label = parse_quantity("280 CDU/mg", "activity")
    with pytest.raises(QuantityError, match="does not count in CDU"):
        format_quantity(label, "activity", "U/mg")
    with pytest.raises(QuantityError, match="is a mass; a volume is wanted"):
        format_quantity(3.0, "volume", "mg")
    with pytest.raises(QuantityError, match="does not count in mass"):
        format_quantity(parse_quantity("6 mg", "charge"), "charge", "CDU")
    for kind in COUNTED:
        with pytest.raises(ValueError, match="say which unit of activity"):
            format_quantity(1.0, kind)


@pytest.mark.parametrize(
    ("written", "kind", "expected"),
    [
        ("90 min", "time", "1.5 h"),
        ("2 h 30 min", "time", "2.5 h"),
        ("48 h", "time", "2 d"),
        ("37 degC", "temperature", "310.15 K"),
        ("310.15 K", "temperature", "37 °C"),
        ("52 kJ/mol ± 6 kJ/mol", "energy", "12.428 kcal/mol"),
        ("52 ± 6 kJ/mol", "energy", "12.428 kcal/mol"),
        ("3e-11 m**2/s x/ 2", "diffusivity", "30 µm²/s"),
        ("15 %", "fraction", "0.15"),
        ("0.15", "fraction", "15 %"),
        ("1:50", "ratio", "20 mg/g"),
        ("20 mg/g", "ratio", "1:50"),
        ("3 U/mg", "activity", "50 nkat/mg"),
        ("9000 BAEE_U/mg", "activity", "3000 USP_U/mg"),
        ("0.5 M", "reagent_concentration", "500 mM"),
        ("10 %", "reagent_concentration", "100 mg/mL"),
        ("7.5", "ph", None),
        ("3", "count", None),
        ("0 1/h", "rate", None),
        ("500 CDU", "charge", None),
    ],
)
def test_the_other_common_unit(written, kind, expected):
    """A field's hint shows the value in another unit that is common for it."""
    assert other_unit(parse_quantity(written, kind), kind) == expected


def test_importing_the_room_is_light():
    """Nothing heavy is loaded before a unit is resolved; pint only then."""
    script = (
        "import sys; import digestplan.quantities as q;"
        "q.parse_quantity('0.5 ± 0.1', 'number'); q.parse_quantity(3, 'count');"
        "heavy = {'pint', 'numpy', 'scipy', 'pandas'}; print(sorted(heavy & set(sys.modules)));"
        "q.parse_quantity('3 mL', 'volume'); print('pint' in sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, check=True)

    assert done.stdout.decode().split() == ["[]", "True"]
