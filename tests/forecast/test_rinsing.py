"""Rinsing through a whole plan: what is left, what the digest bears, whether advice is right."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.rinse import left_at_equilibrium
from tests.forecast.treatment import bath, codes, digest, forecast_of, plan, rinse

few = settings(deadline=None, derandomize=True, max_examples=25)
LONG = bath("edta", "0.5 M", 20, 1000, ph=7.4)
ACID = bath("hydrochloric acid", "0.5 M", 20, 1000)
COLLAGENASE = digest(ratio="300 CDU/mg")
TRYPSIN = digest(ratio="1:5", ph=8.0, buffer_concentration="50 mM")
CASES = [
    # first step, substance, enzyme, digest, thickness, exchanges, each
    (LONG, "edta", "clostridial-collagenase", COLLAGENASE, "2 mm", 3, "10 min"),
    (LONG, "edta", "clostridial-collagenase", COLLAGENASE, "4 mm", 3, "1 h"),
    (LONG, "edta", "clostridial-collagenase", COLLAGENASE, "1 mm", 1, "10 min"),
    (ACID, "hydrochloric-acid", "trypsin", TRYPSIN, "4 mm", 1, "10 min"),
    (ACID, "hydrochloric-acid", "trypsin", TRYPSIN, "2 mm", 1, "2 min"),
]


def treated(case, exchanges):
    """The forecast, and the cautions, of a case with so many exchanges."""
    demineralise, _, enzyme, then, thickness, _, each = case
    text = plan(demineralise, rinse(exchanges, each), then, thickness=thickness, enzyme=enzyme)
    return forecast_of(text, 500), codes(text)


def clean(case):
    """The same digest after a rinse that leaves nothing."""
    demineralise, _, enzyme, then, thickness, *_ = case
    endless = rinse(20, "24 h", "1 L")
    return forecast_of(plan(demineralise, endless, then, thickness=thickness, enzyme=enzyme)).steps[
        2
    ]


@pytest.mark.parametrize("case", CASES)
def test_advised_exchanges_are_just_enough(case):
    """With the advised number the caution is gone; with one fewer it asks for one."""
    _, substance, _, _, _, exchanges, _ = case
    short, cautions = treated(case, exchanges)
    more = short.steps[1].more_exchanges[substance]
    enough, afterwards = treated(case, exchanges + more)
    nearly, _ = treated(case, exchanges + more - 1)

    assert "rinse-too-short" in cautions
    assert "rinse-too-short" not in {c.code for c in enough.cautions}
    assert nearly.steps[1].more_exchanges == {substance: 1}
    assert "acid-spoils-buffer" not in afterwards
    assert "chelator-into-calcium-enzyme" not in afterwards


@pytest.mark.parametrize("case", CASES)
def test_the_caution_names_the_number(case):
    """The number of exchanges stands in the words of the caution."""
    short, _ = treated(case, case[5])
    (caution,) = [c for c in short.cautions if c.code == "rinse-too-short"]
    more = short.steps[1].more_exchanges[case[1]]

    assert f" {more} more exchange" in caution.text
    assert caution.step == 1


@pytest.mark.parametrize("case", CASES)
def test_after_the_advised_exchanges_the_digest_is_as_good_as_clean(case):
    """Its median extent is within two per cent of that of a piece rinsed for weeks."""
    short, _ = treated(case, case[5])
    more = short.steps[1].more_exchanges[case[1]]
    enough, _ = treated(case, case[5] + more)

    assert enough.steps[2].extent_at_end.p50 == pytest.approx(
        clean(case).extent_at_end.p50, rel=0.02
    )


@pytest.mark.parametrize("case", CASES[:2])
def test_a_short_rinse_makes_the_digest_visibly_worse(case):
    """What EDTA is left takes the enzyme's calcium: the digest does less, or far less surely."""
    short, _ = treated(case, case[5])
    spoilt, good = short.steps[2], clean(case)

    assert spoilt.extent_at_end.p05 < 0.95 * good.extent_at_end.p05
    assert spoilt.free_calcium < good.free_calcium / 1.5


def test_no_rinse_at_all_is_told_and_kills_the_digest():
    """EDTA straight into collagenase leaves it without calcium, and the plan says so."""
    text = plan(LONG, COLLAGENASE, thickness="2 mm")
    result = forecast_of(text).steps[1]

    assert {"no-rinse", "chelator-into-calcium-enzyme"} <= codes(text)
    assert result.free_calcium < 1e-6
    assert result.extent_at_end.p95 < 0.05


def test_where_no_number_would_do_it_says_so():
    """Ten-second dips never empty a thick piece: longer exchanges are asked for."""
    text = plan(LONG, rinse(3, "10 s"), COLLAGENASE, thickness="8 mm")
    (caution,) = [c for c in forecast_of(text).cautions if c.code == "rinse-too-short"]

    assert forecast_of(text).steps[1].more_exchanges == {"edta": None}
    assert "No number of exchanges" in caution.text


def test_what_the_digest_does_not_mind_need_not_be_rinsed_out():
    """Pepsin in acid bears acid, and needs no calcium: no caution after a short rinse of either."""
    acid = digest(ratio="1:10", buffer="formate", ph=2.2, calcium=None)
    for first in (LONG, ACID):
        text = plan(first, rinse(1, "10 min"), acid, enzyme="pepsin", thickness="2 mm")
        assert "rinse-too-short" not in codes(text)


def test_citric_acid_counts_as_an_acid_too():
    """Citric acid is no worry of trypsin's as a chelator, but it spoils the buffer."""
    first = bath("citric acid", "1 M", 20, 100)
    text = plan(first, rinse(1, "1 min"), TRYPSIN, enzyme="trypsin", thickness="4 mm")

    assert "citric-acid" in forecast_of(text).steps[1].more_exchanges


@few
@given(
    exchanges=st.integers(1, 8),
    each=st.floats(0.05, 48),
    volume=st.floats(0.1, 200),
    shape=st.sampled_from(["slab", "cylinder", "sphere"]),
)
def test_no_rinse_leaves_less_than_equilibrium(exchanges, each, volume, shape):
    """However long, each exchange leaves at least what is shared between piece and bath."""
    text = plan(LONG, rinse(exchanges, f"{each} h", f"{volume} mL"), shape=shape, thickness="2 mm")
    result = forecast_of(text, 1).steps[1]
    tissue = _tissue(shape)

    least = left_at_equilibrium(volume / tissue, exchanges)
    assert all(left >= least * (1 - 1e-9) for left in result.left_share.values())
    assert all(left <= 1 for left in result.left_share.values())


def _tissue(shape):
    """Volume of the piece in the one draw [mL], from an endless single exchange: 1/(1 + r)."""
    text = plan(LONG, rinse(1, "1000 h", "0.2 mL"), shape=shape, thickness="2 mm")
    left = forecast_of(text, 1).steps[1].left_share["edta"]
    return 0.2 * left / (1 - left)


@pytest.mark.source("C", "Mass balance: what leaves the piece is shared with the bath")
@pytest.mark.parametrize("exchanges", [1, 2, 3, 5])
def test_long_exchanges_dilute_as_amounts_say(exchanges):
    """100 mg of bone of 1.92 g/mL in 1 mL for weeks: (1/(1 + r))^n is left, whatever leaves."""
    sample = 'density = "1.92 g/mL"'
    text = plan(LONG, rinse(exchanges, "500 h", "1 mL"), thickness="1 mm", sample=sample)
    ratio = 1.0 / (0.1 / 1.92)
    result = forecast_of(text).steps[1]

    for left in result.left_share.values():
        assert left == pytest.approx((1 + ratio) ** -exchanges, rel=1e-6)
    assert result.carry_over["edta"] == pytest.approx(0.5 * (1 + ratio) ** -exchanges, rel=1e-6)


@pytest.mark.source("C", "Crank 1975: slab, 1 % left at Dt/L² = 1.78")
def test_time_not_number_empties_a_slab_of_edta():
    """A slab of 2 mm keeps 1 % of its EDTA after 3.3 h at 25 °C (within 2), however exchanged."""
    left = {
        hours: forecast_of(
            plan(LONG, rinse(1, f"{hours} h", "1 L", temperature="25 degC"), thickness="2 mm")
        )
        .steps[1]
        .left_share["edta"]
        for hours in (3.3 / 2, 2 * 3.3)
    }
    quick = forecast_of(plan(LONG, rinse(3, "10 min", "1 L"), thickness="2 mm")).steps[1]

    assert left[6.6] < 0.01 < left[1.65]
    assert quick.left_share["edta"] > 0.1


def test_cold_rinses_are_slower():
    """At 4 °C less leaves than at 25 °C in the same time."""
    cold, warm = (
        forecast_of(plan(LONG, rinse(3, "30 min", temperature=f"{t} degC"), thickness="2 mm"))
        for t in (4, 25)
    )

    assert cold.steps[1].left_share["edta"] > 1.5 * warm.steps[1].left_share["edta"]


def test_two_rinses_go_on_where_the_first_ended():
    """What a second rinse finds is what the first one left."""
    text = plan(LONG, rinse(2, "500 h"), rinse(1, "500 h"))
    first, second = forecast_of(text, 1).steps[1:3]

    assert second.carry_over["edta"] == pytest.approx(
        first.carry_over["edta"] * second.left_share["edta"], rel=1e-12
    )
