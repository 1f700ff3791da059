"""From a lot in the register to what is left of it."""

import math
from datetime import datetime, timedelta

import numpy as np
import pytest

from digestplan.lots.check import assayed_fractions, began, check_lot, history_of
from digestplan.lots.history import log_remaining
from digestplan.lots.register import open_register
from digestplan.lots.register.events import (
    Assayed,
    Moved,
    Opened,
    Received,
    Thawed,
    Transported,
)
from digestplan.lots.storage import StorageKinetics
from digestplan.problems import InputError

RECEIVED = datetime(2025, 3, 1, 9)
SOLUTION = StorageKinetics(
    math.log(3e-4),
    math.log(2),
    100e3,
    20e3,
    298.15,
    log_thaw_loss=math.log(0.05),
    log_thaw_loss_sd=0.4,
    log_opened_factor=math.log(1.5),
)
DRY = StorageKinetics(math.log(2e-6), math.log(2), 80e3, 20e3, 298.15)
KINETICS = {"solution": SOLUTION, "dry": DRY}


def after(days):
    return RECEIVED + timedelta(days=days)


def recorded(tmp_path, *events, label="280 CDU/mg", conversions=()):
    received = Received(
        lot="X",
        at=RECEIVED,
        enzyme="clostridial-collagenase",
        form="dry",
        temperature=277.15,
        place="fridge",
        label_activity=label,
        conversions=conversions,
    )
    with open_register(tmp_path / "register.db") as register:
        register.append_many([received, *events])
        return register.lot("X")


def test_a_history_from_the_ledger(tmp_path):
    """Receipt, dissolving, opening and thaws become stretches and thaws in hours."""
    record = recorded(
        tmp_path,
        Moved(lot="X", at=after(100), temperature=253.15, form="solution", place="freezer"),
        Opened(lot="X", at=after(150)),
        Thawed(lot="X", at=after(160), count=2),
        Thawed(lot="X", at=after(500)),
    )
    history = history_of(record, KINETICS, after(200))

    kept = [(s.start, s.hours, s.temperature, s.form, s.opened) for s in history.stretches]
    assert kept == [
        (0.0, 2400.0, 277.15, "dry", False),
        (2400.0, 1200.0, 253.15, "solution", False),
        (3600.0, 1200.0, 253.15, "solution", True),
    ]
    assert [(t.at, t.count) for t in history.thaws] == [(3840.0, 2)]
    assert history.frozen()


def test_the_way_here_counts(tmp_path):
    """A warm journey before receipt is the first stretch, and time counts from there."""
    record = recorded(
        tmp_path,
        Transported(lot="X", at=RECEIVED - timedelta(hours=48), temperature=303.15, hours=48),
    )
    history = history_of(record, KINETICS, after(1))

    assert began(record) == RECEIVED - timedelta(hours=48)
    assert [(s.start, s.hours, s.temperature) for s in history.stretches] == [
        (0.0, 48.0, 303.15),
        (48.0, 24.0, 277.15),
    ]


def test_a_checked_lot(tmp_path):
    """The check brings the ledger's history and assay together, at the time asked for."""
    record = recorded(
        tmp_path,
        Moved(lot="X", at=after(10), temperature=277.15, form="solution", place="fridge"),
        Assayed(lot="X", at=after(300), fraction=0.7, standard_error=0.04),
        Assayed(lot="X", at=after(900), fraction=0.1, standard_error=0.04),
    )
    result = check_lot(record, KINETICS, after(300))

    assert len(result.surprise) == 1  # the later assay was not known then
    assert result.now == 300 * 24
    assert result.from_assays.percentile(50) == pytest.approx(0.7, abs=1e-3)
    assert result.remaining.percentile(50) == pytest.approx(0.72, abs=0.03)
    expected = log_remaining(history_of(record, KINETICS, after(300)), {}, 300 * 24)[0]
    assert result.from_history.percentile(50) == pytest.approx(np.exp(expected), abs=0.01)


def test_assays_told_as_activities(tmp_path):
    """An activity is compared with the label, through the certificate where the units differ."""
    record = recorded(
        tmp_path,
        Assayed(lot="X", at=after(10), activity="210 ± 7 CDU/mg"),
        Assayed(lot="X", at=after(20), activity="2.31 FALGPA_U/mg x/ 1.05"),
        Assayed(lot="X", at=after(30), fraction=0.6, standard_error=0.1, degrees_of_freedom=4),
        conversions=("1 CDU = 0.011 FALGPA_U",),
    )
    found = assayed_fractions(record)

    np.testing.assert_allclose([a.fraction for a in found], [0.75, 0.75, 0.6], rtol=1e-12)
    np.testing.assert_allclose(
        [a.uncertainty for a in found], [0.025, 0.75 * math.log(1.05), 0.1], rtol=1e-12
    )
    assert [a.scale for a in found] == ["linear", "log", "linear"]
    assert [a.degrees_of_freedom for a in found] == [math.inf, math.inf, 4.0]


@pytest.mark.parametrize(
    ("activity", "label", "message"),
    [
        ("2 ± 0.1 FALGPA_U/mg", "280 CDU/mg", "never converted"),
        ("210 CDU/mg", "280 CDU/mg", "has no uncertainty"),
        ("210 ± 7 CDU/mg", None, "no label activity"),
        ("210 parsecs", "280 CDU/mg", "assayed.activity: .* unknown unit"),
    ],
)
def test_assays_that_say_nothing_of_the_label_are_refused(tmp_path, activity, label, message):
    """Without a factor, an uncertainty or a label an activity is no fraction of the label."""
    record = recorded(tmp_path, Assayed(lot="X", at=after(10), activity=activity), label=label)

    with pytest.raises(InputError, match=message):
        assayed_fractions(record)
