"""Makes the demo's register and readings: ``python -m tests.reference.make_demo_lots``.

All of it is invented: a coastal strandings collection that does not exist, its three bottles, and
readings drawn with a seed from rates that are written here.
"""

import json
import uuid
from datetime import UTC, datetime, timedelta
from pathlib import Path

import numpy as np

from digestplan.lots.register.body import as_json
from digestplan.lots.register.events import (
    Assayed,
    Moved,
    Opened,
    Received,
    Thawed,
    Transported,
    Used,
)

DEMO = Path(__file__).parents[2] / "presets_demo"
INVENTED = "invented for demonstration"
COLLAGENASE = "clostridial-collagenase"
FREEZER, FRIDGE = 253.15, 277.15

# What the invented bottles really hold, as fractions of their labels.
TRUTH = {"CH-2307": 0.97, "CH-2109": 0.66, "TR-1904": 0.03}


def day(text):
    """Noon of a day."""
    return datetime.fromisoformat(f"{text}T12:00:00")


def collagenase(lot, received, place, temperature, sd, milligrams, expiry):
    """A bottle of dry collagenase."""
    return Received(
        lot=lot,
        at=day(received),
        who="ada",
        note=INVENTED,
        enzyme=COLLAGENASE,
        form="dry",
        label_activity="280 CDU/mg",
        conversions=("1 CDU = 0.011 FALGPA_U",),
        mass=milligrams / 1000,
        temperature=temperature,
        temperature_sd=sd,
        place=place,
        expiry=day(expiry).date(),
    )


def used(lot, when, milligrams, plan=""):
    """A mass weighed out."""
    return Used(lot=lot, at=day(when), who="ben", note=INVENTED, mass=milligrams / 1000, plan=plan)


def good():
    """Young, in the freezer, assayed once: still what its label says."""
    lot = "CH-2307"
    return [
        collagenase(lot, "2025-10-06", "freezer 2", FREEZER, 2.0, 100, "2027-10-01"),
        used(lot, "2025-11-12", 8, "seal tendon 2031-009"),
        Assayed(
            lot=lot,
            at=day("2026-01-20"),
            who="ada",
            note=INVENTED,
            fraction=0.97,
            standard_error=0.03,
            degrees_of_freedom=9.0,
        ),
        used(lot, "2026-02-03", 6, "seal tendon 2031-021"),
    ]


def doubtful():
    """Two years in the fridge, opened often, once left out over a weekend; never assayed."""
    lot = "CH-2109"
    events = [
        collagenase(lot, "2024-03-04", "fridge", FRIDGE, 1.5, 250, "2026-03-01"),
        Transported(
            lot=lot,
            at=day("2025-07-18"),
            who="ben",
            note=f"{INVENTED}: found on the bench on Monday",
            temperature=298.15,
            temperature_sd=2.0,
            hours=68.0,
        ),
    ]
    for number, when in enumerate(
        ("2024-04-10", "2024-06-21", "2024-10-02", "2025-01-15", "2025-05-08", "2025-09-30")
    ):
        events.append(used(lot, when, 20 + 4 * number))
    return events


def dead():
    """Dissolved, frozen and thawed, then forgotten in a drawer."""
    lot = "TR-1904"
    return [
        Received(
            lot=lot,
            at=day("2024-09-02"),
            who="ada",
            note=INVENTED,
            enzyme="trypsin",
            form="dry",
            label_activity="12000 BAEE_U/mg",
            mass=0.05,
            temperature=FRIDGE,
            temperature_sd=1.5,
            place="fridge",
            expiry=day("2026-09-01").date(),
        ),
        Opened(lot=lot, at=day("2024-09-20"), who="ben", note=INVENTED),
        Moved(
            lot=lot,
            at=day("2024-09-20"),
            who="ben",
            note=f"{INVENTED}: all of it dissolved in 1 mM acid",
            temperature=FREEZER,
            temperature_sd=2.0,
            place="freezer 2",
            form="solution",
        ),
        Thawed(lot=lot, at=day("2025-02-11"), who="ben", note=INVENTED, count=3),
        Moved(
            lot=lot,
            at=day("2025-06-05"),
            who="ben",
            note=f"{INVENTED}: found in a drawer in September, moved by nobody knows whom",
            temperature=295.15,
            temperature_sd=2.0,
            place="drawer",
        ),
    ]


def lines():
    """The register as JSON lines, always with the same ids."""
    events = [*good(), *doubtful(), *dead()]
    for number, event in enumerate(sorted(events, key=lambda e: (e.at, e.lot))):
        line = as_json(event)
        line["id"] = str(uuid.uuid5(uuid.NAMESPACE_URL, f"digestplan demo {number}"))
        later = (event.at + timedelta(hours=3)).replace(tzinfo=UTC)
        line["recorded_at"] = later.isoformat()
        yield json.dumps(line, ensure_ascii=False)


def trace(rng, minutes, rate, start, plateau=None):
    """Readings to a thousandth; towards a plateau they bend."""
    change = rate * minutes
    if plateau is not None:
        change = np.sign(rate) * plateau * -np.expm1(-abs(rate) * minutes / plateau)
    return np.round(start + change + 0.0012 * rng.standard_normal(len(minutes)), 3)


def table(head, traces, minutes):
    """A file of readings with its setup in comments."""
    rows = ["time [min],reading,series,replicate"]
    for series, replicate, readings in traces:
        rows += [
            f"{t:g},{a:.3f},{series},{replicate}" for t, a in zip(minutes, readings, strict=True)
        ]
    return "\n".join([*(f"# {line}" for line in head), *rows]) + "\n"


FALGPA = (
    "assay: falgpa",
    "total volume: 1 ± 0.008 mL",
    "sample volume: 40 ± 0.5 uL",
    "dilution: 2 ± 0.02",
    "concentration: 1 ± 0.01 mg/mL",
)
BAEE = (
    "assay: baee",
    "total volume: 3.2 ± 0.02 mL",
    "sample volume: 100 ± 1 uL",
    "dilution: 100 ± 1",
    "concentration: 1 ± 0.01 mg/mL",
)


def falgpa_rate(fraction):
    """Change a minute of the peptide assay above, for a fraction of 280 CDU/mg."""
    units_in_cuvette = 0.040 / 2 * 1.0 * 280 * 0.011 * fraction  # mL · mg/mL · FALGPA_U/mg
    return -0.53 * units_in_cuvette / 1.0


def readings():
    """The files of readings by name."""
    rng = np.random.default_rng(20260301)
    minutes = np.arange(0, 10.5, 0.5)
    blank = [("blank", 1, trace(rng, minutes, -0.0002, 0.902))]
    good_rate, doubtful_rate = (falgpa_rate(TRUTH[lot]) for lot in ("CH-2307", "CH-2109"))
    yield (
        "readings-CH-2307.csv",
        table(
            ("Invented for demonstration: lot CH-2307 by the peptide assay, 345 nm.", *FALGPA),
            [("sample", n, trace(rng, minutes, good_rate, 0.905)) for n in (1, 2)] + blank,
            minutes,
        ),
    )
    yield (
        "readings-CH-2109.csv",
        table(
            (
                "Invented for demonstration: lot CH-2109 by the peptide assay, 345 nm.",
                "Its second trace bends: somebody opened the lid.",
                *FALGPA,
            ),
            [
                ("sample", 1, trace(rng, minutes, doubtful_rate, 0.907)),
                ("sample", 2, trace(rng, minutes, doubtful_rate, 0.904, plateau=0.3)),
                ("sample", 3, trace(rng, minutes, doubtful_rate, 0.906)),
                *blank,
            ],
            minutes,
        ),
    )
    short = np.arange(0, 5.25, 0.25)
    rate = 0.001 * 0.1 / 100 * 12000 * TRUTH["TR-1904"]
    yield (
        "readings-TR-1904.csv",
        table(
            ("Invented for demonstration: lot TR-1904 by the ester assay, 253 nm.", *BAEE),
            [("sample", n, trace(rng, short, rate, 0.412)) for n in (1, 2)]
            + [("blank", 1, trace(rng, short, 0.0001, 0.410))],
            short,
        ),
    )


def stability():
    """Activity of an invented solution against time at three temperatures, two batches."""
    rng = np.random.default_rng(20260302)
    rows = ["time [d],temperature [degC],activity,batch"]
    for celsius, days in ((4, (0, 14, 28, 56, 84)), (22, (0, 2, 4, 7, 10)), (30, (0, 1, 2, 3, 5))):
        rate = 0.006 * np.exp(90e3 / 8.314462618 * (1 / 277.15 - 1 / (celsius + 273.15)))
        for batch in ("A", "B"):
            for t in days:
                left = 100 * np.exp(-rate * t) + 1.5 * rng.standard_normal()
                rows.append(f"{t},{celsius},{left:.1f},{batch}")
    head = "# Invented for demonstration: collagenase solution, percent of the start.\n"
    return head + "\n".join(rows) + "\n"


def files():
    """Every file of the demo by name."""
    return {
        "lots.jsonl": "\n".join(lines()) + "\n",
        **dict(readings()),
        "stability-collagenase-solution.csv": stability(),
    }


if __name__ == "__main__":
    for name, text in files().items():
        (DEMO / name).write_text(text, encoding="utf-8", newline="\n")
        print(name)
