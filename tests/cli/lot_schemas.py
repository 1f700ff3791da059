"""The documents of ``lot …`` and ``assay``, as JSON schemas."""

from tests.report.schema import record

_SHARE = {"type": "number", "minimum": 0}
_TEXT = {"type": ["string", "null"]}
_NUMBER = {"type": ["number", "null"]}
_PERCENTILES = record({"p05": _SHARE, "p50": _SHARE, "p95": _SHARE})

# Exactly what the interface promises: no key more, none less.
CHECK = record(
    {
        "lot": {"type": "string"},
        "remaining": _PERCENTILES,
        "from_history": _PERCENTILES,
        "from_assays": {"anyOf": [_PERCENTILES, {"type": "null"}]},
        "needed_fraction": _NUMBER,
        "chance_enough": {"type": ["number", "null"], "minimum": 0, "maximum": 1},
        "use_by": {"type": ["string", "null"], "pattern": r"^\d{4}-\d\d-\d\d$"},
        "charge_factor": _NUMBER,
    }
)
SUMMARY = record(
    {
        "lot": {"type": "string"},
        "enzyme": {"type": "string"},
        "label_activity": _TEXT,
        "form": {"enum": ["dry", "solution", "glycerol"]},
        "received": {"type": "string"},
        "temperature_c": {"type": "number"},
        "place": {"type": "string"},
        "opened": {"type": "boolean"},
        "remaining_mass_mg": _NUMBER,
        "overdrawn_mass_mg": {"type": "number"},
        "thaws": {"type": "integer"},
        "assayed": _TEXT,
        "fraction": _NUMBER,
        "standard_error": _NUMBER,
        "activity": _TEXT,
        "discarded": _TEXT,
        "used_after_discard": {"type": "boolean"},
        "expiry": _TEXT,
    }
)
LIST = record(
    {
        "digestplan": {"const": 1},
        "register": {"type": "string"},
        "lots": {"type": "array", "items": SUMMARY},
    }
)
_EVENT = {
    "type": "object",
    "required": ["kind", "lot", "at", "id", "recorded_at"],
}
RECORDED = record(
    {
        "digestplan": {"const": 1},
        "recorded": _EVENT,
        "lot": {"anyOf": [SUMMARY, {"type": "null"}]},
    }
)
SHOW = record(
    {
        "digestplan": {"const": 1},
        **SUMMARY["properties"],
        "conversions": {"type": "array", "items": {"type": "string"}},
        "events": {"type": "array", "items": _EVENT},
        "written": {"type": "array", "items": _EVENT},
    }
)
_RESULT = {
    "anyOf": [
        record(
            {
                "value": {"type": "number"},
                "standard_uncertainty": _SHARE,
                "degrees_of_freedom": _NUMBER,
                "budget": {
                    "type": "array",
                    "items": record({"input": {"type": "string"}, "share": _SHARE}),
                },
            }
        ),
        {"type": "null"},
    ]
}
_AMOUNT = record(
    {
        "value": {"type": "number"},
        "standard_uncertainty": _SHARE,
        "lower_95": {"type": "number"},
        "upper_95": {"type": "number"},
    }
)
ASSAY = record(
    {
        "digestplan": {"const": 1},
        "unit": _TEXT,
        "traces": {"type": "array"},
        "amount_umol": {"anyOf": [_AMOUNT, {"type": "null"}]},
        "activity_per_mL": _RESULT,
        "activity_per_mg": _RESULT,
        "fraction_of_label": _RESULT,
        "notes": {"type": "array", "items": {"type": "string"}},
    }
)
