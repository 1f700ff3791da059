"""The documents that the interface promises, as JSON schemas."""

_NUMBER = {"type": ["number", "null"]}
_SHARE = {"type": "number", "minimum": 0, "maximum": 1}
_CLOCK = {"type": ["string", "null"], "pattern": r"^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d$"}


def record(required, **more):
    """An object with exactly these keys."""
    return {
        "type": "object",
        "properties": {**required, **more},
        "required": list(required),
        "additionalProperties": False,
    }


SPREAD = record({"p05": _NUMBER, "p50": _NUMBER, "p95": _NUMBER})
WINDOW = record({"opens_h": _NUMBER, "closes_h": _NUMBER, "opens": _CLOCK, "closes": _CLOCK})
_NUMBERS = {"type": "array", "items": {"type": "number"}, "minItems": 2}
CURVE = record(
    {
        "hours": _NUMBERS,
        "extent_p05": _NUMBERS,
        "extent_p50": _NUMBERS,
        "extent_p95": _NUMBERS,
        "activity_p50": _NUMBERS,
        "temperature_c": _NUMBERS,
    }
)
_STEP = {
    "do": {"enum": ["digest", "hold", "stop"]},
    "start": _CLOCK,
    "end": _CLOCK,
    "hours": {"type": "number", "minimum": 0},
}
DIGEST = record(
    {
        **_STEP,
        "extent_at_end": SPREAD,
        "extent_at_centre": SPREAD,
        "residual_activity_at_end": SPREAD,
        "keep_loss_at_end": SPREAD,
        "ceiling": SPREAD,
        "dose_at_end": record(
            {"p05": _NUMBER, "p50": _NUMBER, "p95": _NUMBER, "unit": {"type": "string"}}
        ),
        "hours_to_target": SPREAD,
        "never_reaches_target": _SHARE,
        "hours_to_keep_limit": SPREAD,
        "window": WINDOW,
        "curve": CURVE,
    },
    ph_at_temperature=_NUMBER,
    free_calcium_mM=_NUMBER,
)
_BEFORE = {key: item for key, item in _STEP.items() if key != "do"}
DEMINERALISE = record(
    {
        "do": {"const": "demineralise"},
        **_BEFORE,
        "extent_at_end": SPREAD,
        "hours_to_target": SPREAD,
        "bath_spent": {"type": "array", "items": {"type": "number"}, "minItems": 1},
        "acid_needed_mmol": {"type": "number"},
        "keep_loss_at_end": SPREAD,
    },
    never_reaches_target=_SHARE,
    bath_changes_h={"type": "array", "items": {"type": "number"}},
    acid_held_mmol={"type": "number"},
    carbon_dioxide_mL={"type": "number"},
    curve=record(dict.fromkeys(("hours", "extent_p05", "extent_p50", "extent_p95"), _NUMBERS)),
)
RINSE = record(
    {
        "do": {"const": "rinse"},
        **_BEFORE,
        "carry_over": {"type": "object", "additionalProperties": {"type": "number"}},
    },
    left_share={"type": "object", "additionalProperties": _SHARE},
    more_exchanges={"type": "object", "additionalProperties": {"type": ["integer", "null"]}},
)
STEP = {"oneOf": [DIGEST, DEMINERALISE, RINSE]}
CAUTION = record(
    {
        "level": {"enum": ["stop", "care", "note"]},
        "step": {"type": ["integer", "null"]},
        "code": {"type": "string", "pattern": "^[a-z0-9-]+$"},
        "text": {"type": "string", "minLength": 20},
    }
)
VISIT = record(
    {
        "from": _CLOCK,
        "to": _CLOCK,
        "chance_in_time": _SHARE,
        "chance_not_ready": _SHARE,
        "chance_too_far": _SHARE,
    }
)
FORECAST = record(
    {
        "digestplan": {"const": 1},
        "title": {"type": "string"},
        "draws": {"type": "integer", "minimum": 1},
        "seed": {"type": "integer"},
        "confidence": _SHARE,
        "steps": {"type": "array", "items": STEP, "minItems": 1},
        "visits": {"type": "array", "items": VISIT},
        "cautions": {"type": "array", "items": CAUTION},
    },
    window=WINDOW,
    limits={"type": "array", "items": {"type": "string"}},
)
OPTION = record(
    {
        "temperature_c": {"type": "number"},
        "hours_to_target": SPREAD,
        "never_reaches_target": _SHARE,
        "residual_activity_at_target": SPREAD,
        "ceiling": SPREAD,
        "window": WINDOW,
        "charge_for_visit_mg": _NUMBER,
        "chance_in_time": {"oneOf": [_SHARE, {"type": "null"}]},
    },
    window_width_h=_NUMBER,
    keep_loss_at_target=SPREAD,
    keep_loss_at_visit={"oneOf": [SPREAD, {"type": "null"}]},
    ph_at_temperature=_NUMBER,
    in_measured_range={"type": ["boolean", "null"]},
    not_in_time=record(dict.fromkeys(("dies", "slow", "melts", "too_soon"), _SHARE)),
    limit={"type": "string"},
)
_GAPS = {"type": "array", "items": _NUMBER, "minItems": 2}
TEMPERATURES = record(
    {"options": {"type": "array", "items": OPTION, "minItems": 1}},
    digestplan={"const": 1},
    title={"type": "string"},
    draws={"type": "integer", "minimum": 1},
    seed={"type": "integer"},
    confidence=_SHARE,
    set=record({"step": {"type": "integer"}, "temperature_c": {"type": "number"}}),
    best_by_chance_c=_NUMBER,
    best_by_harm_c=_NUMBER,
    curve=record(
        {
            "temperature_c": _NUMBERS,
            "hours_to_target_p50": _GAPS,
            "chance_in_time": _GAPS,
            "keep_loss_p50": _NUMBERS,
        }
    ),
)
