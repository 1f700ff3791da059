"""The keys of a plan file's steps, one section a kind of step."""

from digestplan.plan.field import STEPS, STOPS, Field, part

ENVIRONMENT = (
    Field("ph", "ph", "pH as made up", "7.5"),
    Field(
        "ph_at",
        "temperature",
        "Temperature at which the pH was set",
        '"25 degC"',
        default="25 degC",
    ),
    Field("buffer", "text", "The buffer, by its key in the library", '"tris"'),
    Field("buffer_concentration", "molar_concentration", "Total buffer", '"50 mM"'),
    Field("calcium", "molar_concentration", "Total calcium", '"5 mM"'),
    Field("edta", "molar_concentration", "Total EDTA, a chelator", '"1 mM"'),
    Field("citrate", "molar_concentration", "Total citrate, which binds calcium", '"10 mM"'),
    Field("phosphate", "molar_concentration", "Total phosphate, which binds calcium", '"10 mM"'),
    Field("cysteine", "molar_concentration", "A thiol that activates papain", '"5 mM"'),
    Field("inhibitor", "molar_concentration", "An inhibitor of the enzyme", '"0.1 mM"'),
)


def _do(kind: str) -> Field:
    note = "What is done in this step"
    return Field("do", "choice", note, f'"{kind}"', required=True, choices=STEPS)


_TEMPERATURE = Field(
    "temperature",
    "programme",
    "One temperature, with `for`; or a list of stretches",
    '[{ at = "37 degC", for = "5 h" }, { to = "4 degC", over = "30 min" }]',
    required=True,
)
_FOR = Field(
    "for", "time", "How long, where `temperature` is a single one", '"16 h"', above=0.0, exact=True
)
_START = Field(
    "start_temperature",
    "temperature",
    "Temperature of the piece and its liquid when the step starts; left out, that at which the"
    " step before ended, else the first of the programme",
    '"22 degC"',
)
_LAG = Field(
    "lag",
    "time",
    'Time constant with which the vessel follows its bath, "0 min" for none; left out, it grows'
    " with the volume",
    '"6 min"',
    exact=True,
)

_DIGEST = (
    _do("digest"),
    Field("charge", "charge", "Enzyme weighed in, as mass or as activity", '"6 mg"', above=0.0),
    Field("ratio", "ratio", "Or: active enzyme per substrate", '"100 CDU/mg"', above=0.0),
    Field(
        "concentration",
        "enzyme_concentration",
        "Or: enzyme in the volume, by mass or by activity",
        '"2 mg/mL"',
        above=0.0,
    ),
    Field(
        "volume", "volume", "Liquid on the piece; needed with `concentration`", '"3 mL"', above=0.0
    ),
    *ENVIRONMENT,
    _TEMPERATURE,
    _FOR,
    _START,
    _LAG,
    Field(
        "additions",
        "tables",
        "Fresh enzyme from the same lot",
        '[{ after = "3 h", charge = "2 mg" }]',
    ),
)

_STRETCH = (
    Field("at", "temperature", "Stay at this temperature", '"37 degC"'),
    Field("for", "time", "With `at`: how long", '"5 h"', above=0.0, exact=True),
    Field("to", "temperature", "Or: go to this temperature in a straight line", '"4 degC"'),
    Field("over", "time", "With `to`: how long that takes", '"30 min"', above=0.0, exact=True),
)

_ADDITION = (
    Field(
        "after", "time", "How long after the start of the step", '"3 h"', required=True, exact=True
    ),
    Field("charge", "charge", "Enzyme added", '"2 mg"', required=True, above=0.0),
)

_DEMINERALISE = (
    _do("demineralise"),
    Field(
        "reagent",
        "text",
        "The acid or chelator, by its key in the library",
        '"hydrochloric acid"',
        required=True,
    ),
    Field(
        "concentration",
        "reagent_concentration",
        "Its concentration when fresh",
        '"0.5 M"',
        required=True,
        above=0.0,
    ),
    Field("volume", "volume", "Volume of each bath", '"20 mL"', required=True, above=0.0),
    Field("ph", "ph", "pH of the bath, for a chelator", "7.4"),
    Field(
        "changes",
        "times",
        "Times at which the bath is changed",
        '["12 h", "24 h"]',
        above=0.0,
        exact=True,
    ),
    part(
        "when_spent", "Or: change whenever this fraction of the bath is used up", "0.5", exact=True
    ),
    _TEMPERATURE,
    _FOR,
    Field("closed_vessel", "flag", "Whether the vessel is closed", "false", default="false"),
    Field("stirred", "flag", "Whether the bath is stirred or shaken", "false", default="false"),
)

_RINSE = (
    _do("rinse"),
    Field("fluid", "text", "What it is rinsed with", '"water"', default="water"),
    Field("volume", "volume", "Volume of each exchange", '"10 mL"', required=True, above=0.0),
    Field(
        "exchanges",
        "count",
        "How many exchanges",
        "3",
        required=True,
        above=0.0,
        most=100.0,
        exact=True,
    ),
    Field(
        "each",
        "time",
        "How long each exchange lasts",
        '"20 min"',
        required=True,
        above=0.0,
        exact=True,
    ),
    Field("temperature", "temperature", "Temperature", '"22 degC"', default="20 degC"),
)

_STOP = (
    _do("stop"),
    Field("how", "choice", "What ends the digestion", '"chelate"', required=True, choices=STOPS),
    Field("agent", "text", "What is added", '"edta"'),
    Field(
        "concentration",
        "reagent_concentration",
        "Its concentration in the liquid; needed unless it is heat or cold that ends it",
        '"20 mM"',
        above=0.0,
    ),
    Field(
        "temperature",
        "temperature",
        "Temperature; needed with `heat` and `chill`; else that at which the step before ended",
        '"95 degC"',
    ),
    Field("for", "time", "How long; needed with `heat`", '"10 min"', default="0 min", exact=True),
)

_HOLD = (_do("hold"), _TEMPERATURE, _FOR, _START, _LAG)

STEP_SECTIONS = {
    "digest": _DIGEST,
    "demineralise": _DEMINERALISE,
    "rinse": _RINSE,
    "stop": _STOP,
    "hold": _HOLD,
    "temperature": _STRETCH,
    "additions": _ADDITION,
}
