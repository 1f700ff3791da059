"""Every caution of the table, triggered by one plan and absent from its harmless twin."""

import pytest

from digestplan.forecast.told import told
from digestplan.library.cautions import caution, cautions, deferral
from digestplan.plan.read import parse_plan
from tests.forecast.make_cautions import PAGE, page
from tests.forecast.plans import plan_text
from tests.forecast.treatment import bath, codes, digest, forecast_of, plan, rinse, step

ACID = bath("hydrochloric acid", "0.3 M", 8, 100)
NITRIC = bath("nitric acid", "0.5 M", 8, 100)
EDTA = bath("edta", "0.5 M", 20, 300, ph=7.4)
WATER = rinse(4, "4 h", "20 mL")
DIGEST = digest()
TRYPSIN = digest(ratio="1:50", ph=8.0, calcium=None)
CHELATE = step("stop", how="chelate", concentration="20 mM")
CLOCK = "start = 2026-03-12T17:30:00\nvisits = {}\n"


def soft(*steps, **sample):
    """A plan on tendon."""
    return plan(*steps, **{"material": "tendon", **sample})


def visited(text, visit):
    """The same plan on a clock, with one visit."""
    return text.replace("digestplan = 1\n", "digestplan = 1\n" + CLOCK.format([visit]), 1).replace(
        f"['{visit}']", f'["{visit}"]'
    )


def washed(fluid):
    """A short wash with something."""
    return rinse(1, "10 min", fluid=fluid)


PAPAIN = {"enzyme": "papain", "material": "cartilage"}
BUFFER = {"buffer": "phosphate", "ph": 6.3, "calcium": None, "ratio": "1:100", "celsius": 60}
RUN = """[sample.known_run]
ratio = "40 CDU/mg"
temperature = "37 degC"
duration = "6 h"
extent = 0.9
thickness = "1 mm"
"""
NARROW = {"selectivity": "20", "target": "0.95", "susceptibility": "2e-5 g/(CDU h) x/ 1.5"}

# Code: a plan that brings it, and its harmless twin.
PAIRS = {
    "azide-then-acid": (
        plan(washed("0.05 % sodium azide"), ACID, WATER, DIGEST),
        plan(washed("saline"), ACID, WATER, DIGEST),
    ),
    "hypochlorite-with-acid": (
        plan(washed("2 % sodium hypochlorite"), ACID),
        plan(washed("2 % sodium hypochlorite"), EDTA),
    ),
    "hypochlorite-with-ammonia": (
        plan(washed("sodium hypochlorite"), EDTA, WATER, DIGEST),
        plan(washed("sodium hypochlorite"), EDTA, WATER, digest(buffer="hepes")),
    ),
    "nitric-with-organics": (
        plan(NITRIC, washed("70 % ethanol")),
        plan(ACID, washed("70 % ethanol")),
    ),
    "nitric-with-reducing-acid": (
        plan(NITRIC, WATER, bath("formic acid", "1 M", 20, 24)),
        plan(ACID, WATER, bath("formic acid", "1 M", 20, 24)),
    ),
    "formaldehyde-with-hydrochloric-acid": (
        plan(washed("10 % formalin"), ACID),
        plan(washed("10 % formalin"), WATER, ACID),
    ),
    "acid-into-edta": (plan(ACID, EDTA), plan(ACID, WATER, EDTA)),
    "phosphate-with-calcium": (
        soft(digest(buffer="phosphate", calcium="5 mM")),
        soft(digest(buffer="tris", calcium="5 mM")),
    ),
    "thiol-with-enzyme": (
        soft(digest(cysteine="5 mM")),
        plan(digest(cysteine="5 mM", **BUFFER), **PAPAIN),
    ),
}
OTHERS = {
    "sulfonyl-or-organophosphate": (
        soft(
            TRYPSIN,
            step("stop", how="inhibit", agent="PMSF", concentration="1 mM"),
            enzyme="trypsin",
        ),
        soft(
            TRYPSIN,
            step("stop", how="inhibit", agent="aprotinin", concentration="1 mM"),
            enzyme="trypsin",
        ),
    ),
    "azide-handling": (
        soft(washed("0.05 % sodium azide"), DIGEST),
        soft(washed("saline"), DIGEST),
    ),
    "protease-powder": (soft(DIGEST), soft(washed("saline"))),
    "temperature-outside-measured": (soft(digest(52)), soft(digest(37))),
    "below-freezing": (soft(digest(-5)), soft(digest(4))),
    "ph-outside-range": (soft(digest(ph=5.5)), soft(digest(ph=7.5))),
    "ph-slows": (
        soft(digest(ratio="1:50", ph=7.02, ph_at="37 degC"), enzyme="trypsin"),
        soft(digest(ratio="1:50", ph=8.2, ph_at="37 degC"), enzyme="trypsin"),
    ),
    "calcium-missing": (soft(digest(calcium=None)), soft(digest(calcium="5 mM"))),
    "calcium-low": (soft(digest(calcium="0.1 mM")), soft(digest(calcium="5 mM"))),
    "thiol-missing": (
        plan(digest(**BUFFER), **PAPAIN),
        plan(digest(cysteine="5 mM", **BUFFER), **PAPAIN),
    ),
    "enzyme-saturates": (soft(digest(ratio="2000 CDU/mg")), soft(digest(ratio="40 CDU/mg"))),
    "raw-core": (
        soft(TRYPSIN, enzyme="trypsin", thickness="6 mm"),
        soft(TRYPSIN, enzyme="trypsin", thickness="0.1 mm"),
    ),
    "eaten-from-surface": (soft(DIGEST), soft(digest(ratio="20 CDU/mg"), material="muscle")),
    "ceiling-below-target": (plan_text(death="3 1/h"), plan_text()),
    "not-ready-in-time": (
        soft(digest(hours=2), step("hold", temperature="4 degC", for_="1 h")),
        soft(digest(hours=80, ratio="200 CDU/mg"), step("hold", temperature="4 degC", for_="1 h")),
    ),
    "no-safe-window": (plan_text(**NARROW), plan_text(**{**NARROW, "selectivity": "2000"})),
    "nobody-in-time": (
        visited(soft(DIGEST), "2026-03-12T17:45 / 2026-03-12T18:00"),
        visited(soft(DIGEST), "2026-03-14T08:00 / 2026-03-14T18:00"),
    ),
    "heat-harms": (soft(digest(59)), soft(digest(45))),
    "enzyme-spent": (soft(digest(52)), soft(digest(30))),
    "default-run": (soft(DIGEST), soft(DIGEST, sample=RUN)),
    "warm-tube": (
        soft(digest(56, ratio="1:20"), enzyme="proteinase-k"),
        soft(digest(37, ratio="1:20"), enzyme="proteinase-k"),
    ),
    "bath-cannot-hold": (
        plan(bath("hydrochloric acid", "0.1 M", 8, 100, volume="2 mL")),
        plan(bath("hydrochloric acid", "0.1 M", 8, 100, volume="20 mL")),
    ),
    "mineral-left": (
        plan(bath("edta", "0.5 M", 4, 2, ph=7.4)),
        plan(bath("edta", "0.5 M", 4, 500, ph=7.4)),
    ),
    "end-point": (plan(EDTA), soft(DIGEST)),
    "acid-harms": (
        plan(bath("hydrochloric acid", "1 M", 37, 168)),
        plan(bath("hydrochloric acid", "1 M", 4, 168)),
    ),
    "gas-given-off": (plan(ACID), plan(EDTA)),
    "closed-vessel-with-acid": (
        plan(bath("hydrochloric acid", "0.3 M", 8, 100, closed_vessel=True)),
        plan(bath("edta", "0.3 M", 8, 100, closed_vessel=True)),
    ),
    "acid-handling": (plan(ACID), plan(EDTA)),
    "old-collection-piece": (plan(ACID), plan(EDTA)),
    "hot-acid": (
        plan(bath("hydrochloric acid", "0.3 M", 50, 5)),
        plan(bath("hydrochloric acid", "0.3 M", 37, 5)),
    ),
    "rinse-too-short": (
        plan(EDTA, rinse(1, "10 min"), DIGEST),
        plan(EDTA, WATER, DIGEST),
    ),
    "no-rinse": (plan(EDTA, DIGEST), plan(EDTA, WATER, DIGEST)),
    "chelator-into-calcium-enzyme": (
        plan(EDTA, rinse(1, "1 min"), DIGEST),
        plan(EDTA, WATER, DIGEST),
    ),
    "acid-spoils-buffer": (
        plan(ACID, rinse(1, "1 min"), digest(buffer_concentration="10 mM", volume="0.5 mL")),
        plan(ACID, WATER, digest(buffer_concentration="10 mM", volume="0.5 mL")),
    ),
    "stop-does-not-stop": (
        soft(TRYPSIN, CHELATE, enzyme="trypsin"),
        soft(DIGEST, CHELATE),
    ),
    "stop-not-known": (
        plan_text() + '[[steps]]\ndo = "stop"\nhow = "chelate"\nconcentration = "20 mM"\n',
        soft(DIGEST, CHELATE),
    ),
    "stop-is-reversible": (
        soft(TRYPSIN, step("stop", how="acidify", concentration="0.1 M"), enzyme="trypsin"),
        soft(DIGEST, step("stop", how="acidify", concentration="0.1 M")),
    ),
    "chilling-only-slows": (
        soft(TRYPSIN, step("stop", how="chill", temperature="4 degC"), enzyme="trypsin"),
        soft(DIGEST, CHELATE),
    ),
}


@pytest.mark.parametrize("code", PAIRS | OTHERS)
def test_a_plan_brings_its_caution_and_its_twin_does_not(code):
    """The caution is told for the plan that it is about, and not for one that differs in that."""
    harmful, harmless = (PAIRS | OTHERS)[code]

    assert code in codes(harmful)
    assert code not in codes(harmless)


def test_every_row_of_the_table_is_tried():
    """No row of the table is without a plan, no plan without a row; all pairs are among them."""
    pairs = {code for code, row in cautions().items() if row.then}

    assert set(PAIRS) == pairs
    assert set(OTHERS) == set(cautions()) - pairs


@pytest.mark.parametrize("code", cautions())
def test_every_caution_about_safety_defers(code):
    """A safety text ends with the sentence that defers; a text about the forecast does not."""
    texts = [c.text for c in forecast_of((PAIRS | OTHERS)[code][0], 200).cautions if c.code == code]

    assert texts
    for text in texts:
        assert text.endswith(deferral()) == (caution(code).kind == "safety")
        assert "{" not in text


@pytest.mark.parametrize("code", PAIRS)
def test_what_must_not_meet_is_told_in_either_order_where_the_table_says_so(code):
    """A pair of any order is told at its second step, a later-only pair not in reverse."""
    (found,) = [c for c in forecast_of(PAIRS[code][0], 200).cautions if c.code == code]

    assert found.step is not None
    assert found.level == caution(code).level


def test_azide_after_acid_is_told_as_well():
    """What meets in the waste meets in either order."""
    assert "azide-then-acid" in codes(plan(ACID, WATER, washed("sodium azide")))


def test_formaldehyde_after_acid_is_another_matter():
    """Formaldehyde is told before hydrochloric acid only: afterwards there is none left of it."""
    code = "formaldehyde-with-hydrochloric-acid"
    assert code not in codes(plan(ACID, WATER, washed("10 % formalin")))


def test_glutaraldehyde_is_not_formaldehyde():
    """The carcinogen comes from formaldehyde; another aldehyde is not told as it."""
    code = "formaldehyde-with-hydrochloric-acid"
    assert code not in codes(plan(washed("2 % glutaraldehyde"), ACID))


def test_an_inhibitor_that_is_the_stop_is_no_mistake():
    """Dithiothreitol stops collagenase: as a stop it is what was meant."""
    stop = step("stop", how="inhibit", agent="dithiothreitol", concentration="5 mM")
    found = codes(soft(DIGEST, stop))

    assert "thiol-with-enzyme" not in found
    assert "stop-does-not-stop" not in found


def test_traces_of_edta_are_not_blamed_for_missing_calcium():
    """After a thorough rinse a plan without calcium is told that calcium is missing, as any is."""
    found = codes(plan(EDTA, WATER, digest(calcium=None)))

    assert "calcium-missing" in found
    assert "chelator-into-calcium-enzyme" not in found


def test_low_calcium_after_acid_is_not_blamed_on_a_chelator():
    """Acid is no chelator."""
    found = codes(plan(ACID, WATER, digest(calcium="0.1 mM")))

    assert "calcium-low" in found
    assert "chelator-into-calcium-enzyme" not in found


def test_the_most_serious_come_first():
    """Stop before care before note."""
    levels = [c.level for c in forecast_of(PAIRS["azide-then-acid"][0], 200).cautions]

    assert levels == sorted(levels, key=["stop", "care", "note"].index)
    assert levels[0] == "stop"


def test_an_unknown_code_fails():
    """A code that the table does not have is a mistake of ours, not a silent caution."""
    with pytest.raises(KeyError):
        told("no-such-caution", None)


def test_an_unfilled_text_fails():
    """A text whose words in braces are not given is a mistake of ours too."""
    with pytest.raises(KeyError):
        told("hot-acid", 0)


@pytest.mark.parametrize("code", cautions())
def test_rows_are_complete(code):
    """Level, kind, text and source are there and known; a source is more than an address."""
    row = caution(code)

    assert row.level in {"stop", "care", "note"}
    assert row.kind in {"safety", "validity"}
    assert len(row.text) > 20
    assert len(row.source.replace("http", "").split()) >= 1
    assert row.order in {"later", "any", "together"}


def test_a_plan_without_anything_dangerous_has_no_stop():
    """A plain digest of known tendon brings no caution of the level stop."""
    text = soft(DIGEST, sample=RUN)

    assert all(c.level != "stop" for c in forecast_of(text, 200).cautions)
    assert parse_plan(text, "plan.toml").sample.known_run is not None


def test_the_page_of_cautions_agrees_with_the_table():
    """docs/cautions.md is what the table says, word for word."""
    assert PAGE.read_text("utf-8") == page()
