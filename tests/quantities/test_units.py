"""Our small table of units against pint's full one, which carries the SI and CODATA."""

from fractions import Fraction

import pint
import pytest
import scipy.constants
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from digestplan.quantities import ASSAY_UNITS, QuantityError, parse_quantity
from digestplan.quantities.units import resolve, spellings

DEFAULTS = "pint's default unit definitions (SI, CODATA)"
NAMES = {"wk": "week", "yr": "year", "mL": "milliliter", "L": "liter", "d": "day"}
OURS_ALONE = {"Da", "kDa", "dalton", "percent_wv"}
CATALYSIS = {"kat", "mkat", "ukat", "nkat", "pkat", "U", "mU", "kU"}
PLAIN = sorted(
    word
    for word in spellings() - OURS_ALONE - CATALYSIS
    if not any(name in ASSAY_UNITS for name, _ in resolve(word).dimensions or ())
    and word != "percent"
)
BASES = {"mass": "gram", "length": "meter", "time": "second"}
BASES |= {"substance": "mole", "temperature": "kelvin"}


@pytest.fixture(scope="module")
def full():
    """The full registry of pint."""
    return pint.UnitRegistry()


def theirs(full, unit):
    """Factor to the base units, and the exponents of those."""
    factor, base = full.get_root_units(full.parse_units(unit))
    return float(factor), {name: float(power) for name, power in base._units.items()}


def ours(unit):
    """The same by our table."""
    resolved = resolve(unit)
    bases = {BASES[name]: float(power) for name, power in resolved.dimensions}
    return float(resolved.scale), bases


def test_the_table_is_a_table_of_plain_units():
    """There are enough units to compare, and each word stands once."""
    assert len(PLAIN) > 50
    assert "percent_wv" not in PLAIN


@pytest.mark.source("L", DEFAULTS)
@pytest.mark.parametrize("word", PLAIN)
def test_every_plain_unit_has_the_size_that_pint_gives_it(full, word):
    """Each word of the table means what it means in pint's full table, to the last digit or two."""
    factor, bases = theirs(full, NAMES.get(word, word))

    assert ours(word) == (pytest.approx(factor, rel=4e-15), bases)


@pytest.mark.source("L", DEFAULTS)
@pytest.mark.parametrize("word", sorted(CATALYSIS))
def test_units_of_catalysis_have_the_size_that_pint_gives_them(full, word):
    """U and katal stand in the ratio of µmol/min to mol/s."""
    per_second, bases = theirs(full, word)

    assert bases == {"mole": 1.0, "second": -1.0}
    assert float(resolve(word).scale) == pytest.approx(per_second * 60e6, rel=4e-15)


@pytest.mark.source("L", "scipy.constants, CODATA: atomic mass constant and Avogadro constant")
def test_the_dalton_is_one_gram_per_mole():
    """What the bench calls a dalton is one g/mol to two parts in a thousand million."""
    grams = scipy.constants.physical_constants["atomic mass constant"][0] * 1e3

    assert parse_quantity("1 Da", "molar_mass").value == pytest.approx(
        grams * scipy.constants.Avogadro, rel=2e-9
    )


FACTORS = st.lists(
    st.tuples(st.sampled_from(PLAIN), st.sampled_from([-2, -1, 1, 2])),
    min_size=1,
    max_size=4,
    unique_by=lambda factor: factor[0],
)


@pytest.mark.source("L", DEFAULTS)
@settings(deadline=None, derandomize=True, max_examples=150)
@given(factors=FACTORS)
def test_compound_units_have_the_size_that_pint_gives_them(full, factors):
    """Any product of units, written with ^, is resolved as pint's full table resolves it."""
    written = " ".join(f"{word}^{power}" for word, power in factors)
    named = "*".join(f"{NAMES.get(word, word)}**{power}" for word, power in factors)
    factor, bases = theirs(full, named)

    assert ours(written) == (pytest.approx(factor, rel=4e-15), bases)


@pytest.mark.source("L", DEFAULTS)
@pytest.mark.parametrize(
    ("unit", "kind", "core"),
    [
        ("mg/mL", "mass_concentration", "g/mL"),
        ("mL/(mg h)", "autolysis_rate", "mL/(g*h)"),
        ("m**2/s", "diffusivity", "m**2/h"),
        ("cm^2/s", "diffusivity", "m**2/h"),
        ("kJ/(mol K)", "entropy", "J/(mol*K)"),
        ("cal/(mol K)", "heat_capacity", "J/(mol*K)"),
        ("1/min", "rate", "1/h"),
        ("µm/s", "velocity", "m/h"),
        ("1/(mM cm)", "extinction", "L/(mol*cm)"),
        ("mmol/L", "molar_concentration", "mol/L"),
        ("kg/m**3", "density", "g/mL"),
        ("kcal/mol", "energy", "J/mol"),
    ],
)
def test_core_units_of_compound_kinds(full, unit, kind, core):
    """The way from a written compound unit to the core unit is pint's."""
    pints = unit.replace("mg h", "mg*h").replace("mol K", "mol*K").replace("mM cm", "mM*cm")
    expected = full.Quantity(1.0, pints).to(core).magnitude

    assert parse_quantity(f"1 {unit}", kind).value == pytest.approx(expected, rel=4e-15)


def test_scales_are_exact():
    """Scales are exact fractions, so that values are rounded once."""
    assert resolve("mL").scale == Fraction(1, 10**6)
    assert resolve("µg/µL").scale == 1000
    assert resolve("mg/mL").scale == 1000


@settings(deadline=None, derandomize=True, max_examples=200)
@given(
    number=st.decimals(min_value="1e-9", max_value="1e9", places=9),
    pair=st.sampled_from([("mL", "volume", 1), ("µL", "volume", 1000), ("mg", "mass", 1000)]),
)
def test_values_are_rounded_once(number, pair):
    """A written decimal in a unit gives the float nearest to the exact value."""
    unit, kind, over = pair
    assume(number > 0)

    assert parse_quantity(f"{number} {unit}", kind).value == float(Fraction(number) / over)


def test_prefixes_are_not_made_up():
    """A prefix that is not in the table makes no unit, however much pint would like it."""
    for unit in ("cFALGPA_U", "MCDU", "nCDU", "kg_", "Mmin", "ks", "dag", "mK"):
        with pytest.raises(QuantityError):
            parse_quantity(f"1 {unit}", "charge")
