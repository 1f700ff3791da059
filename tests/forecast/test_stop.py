"""Stops through a whole plan: what each leaves of each kind of enzyme, and what it does after."""

import pytest

from digestplan.report.text import forecast_text
from tests.forecast.treatment import codes, digest, forecast_of, plan, step

DIGESTS = {
    "clostridial-collagenase": digest(hours=2),
    "trypsin": digest(hours=2, ratio="1:50", ph=8.0, calcium=None),
    "pepsin": digest(hours=2, ratio="1:50", buffer="formate", ph=2.2, calcium=None),
    "papain": digest(hours=2, ratio="1:50", buffer="mes", ph=6.3, calcium=None, cysteine="5 mM"),
    "thermolysin": digest(hours=2, ratio="1:50"),
}
MATERIALS = {"papain": "cartilage", "thermolysin": "skin"}
WARM = step("hold", temperature="37 degC", for_="12 h")
COLD = step("hold", temperature="4 degC", for_="24 h")


def stopped(enzyme, *steps):
    """A digest of two hours, a stop and what follows."""
    material = MATERIALS.get(enzyme, "tendon")
    return plan(DIGESTS[enzyme], *steps, material=material, enzyme=enzyme)


def by(how, agent=None, concentration="20 mM"):
    """A stop by something that is added."""
    agents = {} if agent is None else {"agent": agent}
    return step("stop", how=how, concentration=concentration, **agents)


STOPS = [
    # common practice: a metal enzyme loses its metal, a serine or aspartic enzyme has none
    ("clostridial-collagenase", by("chelate"), True),
    ("thermolysin", by("chelate"), True),
    ("trypsin", by("chelate"), False),
    ("pepsin", by("chelate"), False),
    # common practice: acid holds trypsin and suits pepsin; alkali kills pepsin and suits trypsin
    ("clostridial-collagenase", by("acidify"), True),
    ("pepsin", by("acidify"), False),
    ("pepsin", by("alkalise"), True),
    ("trypsin", by("alkalise"), False),
    # common practice: inhibitors of their own class
    ("trypsin", by("inhibit", "phenylmethylsulfonyl fluoride", "1 mM"), True),
    ("trypsin", by("inhibit", "PMSF", "1 mM"), True),
    ("trypsin", by("inhibit", "soybean trypsin inhibitor", "1 mM"), True),
    ("clostridial-collagenase", by("inhibit", "PMSF", "1 mM"), False),
    ("clostridial-collagenase", by("inhibit", "1,10-phenanthroline", "2 mM"), True),
    ("pepsin", by("inhibit", "pepstatin A", "1 uM"), True),
    ("trypsin", by("inhibit", "pepstatin A", "1 uM"), False),
    ("papain", by("inhibit", "iodoacetate", "5 mM"), True),
    ("papain", by("inhibit", "x", "5 mM"), False),
    # common practice: ten minutes at 95 °C end every one of these; a short warming does not
    ("trypsin", step("stop", how="heat", temperature="95 degC", for_="10 min"), True),
    ("pepsin", step("stop", how="heat", temperature="95 degC", for_="10 min"), True),
    (
        "clostridial-collagenase",
        step("stop", how="heat", temperature="95 degC", for_="5 min"),
        True,
    ),
    ("trypsin", step("stop", how="heat", temperature="45 degC", for_="1 min"), False),
]


@pytest.mark.parametrize(("enzyme", "how", "works"), STOPS)
def test_a_stop_stops_what_it_stops_and_nothing_else(enzyme, how, works):
    """What stops an enzyme leaves under 1 % of it; what does not leaves it, and is told."""
    text = stopped(enzyme, how, WARM)
    before, after, waited = forecast_of(text).steps
    alive = after.residual_activity_at_end.p50 / before.residual_activity_at_end.p50

    assert ("stop-does-not-stop" in codes(text)) != works
    assert (alive < 0.01) == works
    unstopped = forecast_of(stopped(enzyme, WARM)).steps[1].extent_at_end.p50
    reached = before.extent_at_end.p50
    grown = (waited.extent_at_end.p50 - after.extent_at_end.p50) / (unstopped - reached)
    assert grown < 0.05 if works else grown > 0.3


def test_acid_holds_trypsin_without_killing_it():
    """Acidified trypsin does nothing in the tube, but is alive: told with how much of it."""
    text = stopped("trypsin", by("acidify", "formic acid", "0.2 M"), WARM)
    before, after, waited = forecast_of(text).steps
    (caution,) = [c for c in forecast_of(text).cautions if c.code == "stop-is-reversible"]

    assert after.residual_activity_at_end.p50 > 0.5
    assert waited.extent_at_end.p50 - before.extent_at_end.p50 < 0.005
    assert f"{100 * after.residual_activity_at_end.p50:.0f} %" in caution.text


def test_the_report_does_not_call_a_held_enzyme_active():
    """After a reversible stop the report says that the enzyme is alive but held."""
    held = forecast_text(forecast_of(stopped("trypsin", by("acidify"), COLD)))
    free = forecast_text(forecast_of(stopped("trypsin", by("chelate"), COLD)))

    assert held.count("enzyme alive, but held") == 2
    assert held.count("enzyme still active") == 1
    assert "enzyme alive, but held" not in free


def test_chilling_only_slows():
    """In the cold trypsin goes on, at under a sixth of its rate at 37 °C, and the plan says so."""
    cold = stopped("trypsin", step("stop", how="chill", temperature="4 degC"), COLD)
    warm = stopped("trypsin", step("hold", temperature="37 degC", for_="24 h"))
    doses = [s.dose_at_end.p50 for s in forecast_of(cold).steps]
    warm_doses = [s.dose_at_end.p50 for s in forecast_of(warm).steps]

    assert "chilling-only-slows" in codes(cold)
    assert 0 < doses[2] - doses[0] < (warm_doses[1] - warm_doses[0]) / 3
    assert (
        forecast_of(cold).steps[2].extent_at_end.p50 > forecast_of(cold).steps[0].extent_at_end.p50
    )


def test_chilling_keeps_collagenase_alive():
    """Cold spares the enzyme itself: after a day it is as alive as before."""
    text = stopped("clostridial-collagenase", step("stop", how="chill", temperature="4 degC"), COLD)
    before, _, waited = forecast_of(text).steps

    assert waited.residual_activity_at_end.p50 > 0.95 * before.residual_activity_at_end.p50


def test_a_new_digest_is_not_stopped_by_the_old_stop():
    """Fresh enzyme in fresh liquid works, whatever stopped the one before."""
    text = stopped("trypsin", by("acidify"), DIGESTS["trypsin"])
    first, _, second = forecast_of(text).steps

    assert second.dose_at_end.p50 - first.dose_at_end.p50 == pytest.approx(
        first.dose_at_end.p50, rel=1e-3
    )


def test_nothing_is_assumed_of_an_enzyme_that_is_not_known():
    """An enzyme that the plan describes itself goes on after a chelator, and that is told."""
    text = stopped("trypsin", by("chelate"), WARM).replace(
        'enzyme = "trypsin"\n',
        "[enzyme]\n"
        'reference_temperature = "37 degC"\nactivation_energy = "50 kJ/mol"\n'
        'inactivation_rate = "0.01 1/h"\ninactivation_energy = "200 kJ/mol"\n[lot]\n',
    )
    text = text.replace("[lot]\n[enzyme]", "[enzyme]").replace(
        'material = "tendon"', 'material = "tendon"\nsusceptibility = "0.001 g/(mg h)"'
    )
    before, _, waited = forecast_of(text).steps

    assert "stop-not-known" in codes(text)
    assert waited.extent_at_end.p50 > before.extent_at_end.p50 + 0.05


def test_heat_that_kills_is_not_called_a_failure():
    """The library does not count heat among the stops of thermolysin; 90 min at 95 °C do."""
    text = stopped("thermolysin", step("stop", how="heat", temperature="95 degC", for_="90 min"))

    assert forecast_of(text).steps[1].residual_activity_at_end.p50 < 0.05
    assert "stop-does-not-stop" not in codes(text)
