"""Loss of what must be kept."""

import numpy as np
import pytest

from digestplan.kinetics import damage


def test_losses_add_in_the_exponent():
    """Two independent losses leave the product of what each leaves."""
    one, other = damage.keep_loss(np.array([0.2, 0.5]))
    both = damage.keep_loss(0.7)

    assert both == pytest.approx(1 - (1 - one) * (1 - other), rel=1e-12)


def test_no_harm_no_loss():
    """Nothing is lost to nothing, and never more than everything."""
    assert damage.keep_loss(0.0) == 0
    assert damage.keep_loss(1e6) == 1


def test_both_forms_of_melting_agree_at_their_temperature():
    """Eyring's and Arrhenius' form give one rate where they are made to."""
    at = 333.15
    rate = damage.melting_rate_eyring(at, 590e3, 1460.0)
    same = damage.melting_rate_arrhenius(at + 2, rate, 590e3 + 8.314 * at, at)

    assert same == pytest.approx(damage.melting_rate_eyring(at + 2, 590e3, 1460.0), rel=1e-3)


@pytest.mark.source(
    "P", "hydrolysis of a peptide bond, J. Am. Chem. Soc. 1998, 120, 8910: half-life at pH 7, 37 °C"
)
@pytest.mark.parametrize(("rate", "years"), [(9.05e-11, 243), (8.23e-11, 267)])
def test_an_uncatalysed_peptide_bond_lasts_centuries(rate, years):
    """The exponent of a first-order loss at the published rate reaches ln 2 in centuries."""
    seconds = years * 365.25 * 86400

    assert damage.keep_loss(rate * seconds) == pytest.approx(0.5, rel=5e-3)


def test_acid_loss_is_first_order_in_hydrogen_ions():
    """Twice the acid, twice the loss; warmer by 88 kJ/mol from 20 to 37 °C about sevenfold."""
    one = damage.acid_loss_rate(293.15, 0.5, 0.01, 88e3)
    two = damage.acid_loss_rate(293.15, 1.0, 0.01, 88e3)
    warm = damage.acid_loss_rate(310.15, 0.5, 0.01, 88e3)

    assert two == pytest.approx(2 * one)
    assert 6 < warm / one < 8.5
