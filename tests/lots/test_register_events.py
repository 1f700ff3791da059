"""Events check themselves, and survive being written down."""

import json
import subprocess
import sys
from datetime import UTC, date, datetime, timedelta, timezone
from typing import get_args

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.lots import storage
from digestplan.lots.register import events as ev
from digestplan.lots.register.body import as_json, event_from, from_json
from digestplan.lots.register.fields import FORMS
from digestplan.problems import InputError

AT = datetime(2026, 3, 12, 17, 30)

words = st.text(st.characters(codec="utf-8", exclude_categories=["C", "Zl", "Zp"]), max_size=40)
some = words.filter(str.strip)
moments = st.datetimes(datetime(1900, 1, 1), datetime(2199, 12, 31))
kelvin = st.floats(50, 500)
masses = st.floats(1e-9, 1e5)
heads = {
    "lot": some,
    "at": moments,
    "who": words,
    "note": words,
    "id": st.uuids().map(str),
    "recorded_at": st.none() | moments.map(lambda at: at.replace(tzinfo=UTC)),
}
forms = st.sampled_from(FORMS)
plain = {
    ev.Received: {
        "enzyme": some,
        "form": forms,
        "temperature": kelvin,
        "temperature_sd": st.floats(0, 5),
        "place": words,
        "label_activity": st.none() | some,
        "mass": st.none() | masses,
        "conversions": st.lists(some, max_size=3),
        "expiry": st.none() | st.dates(),
        "opened": st.booleans(),
    },
    ev.Moved: {
        "temperature": kelvin,
        "place": words,
        "form": st.none() | forms,
        "opened": st.none() | st.booleans(),
    },
    ev.Transported: {"temperature": kelvin, "hours": st.floats(0.01, 1000)},
    ev.Thawed: {"count": st.integers(1, 20)},
    ev.Opened: {},
    ev.Assayed: {
        "fraction": st.floats(0.01, 2),
        "standard_error": st.floats(1e-4, 1),
        "degrees_of_freedom": st.none() | st.floats(1, 50),
        "scale": st.sampled_from(["linear", "log"]),
        "activity": st.none() | some,
    },
    ev.Used: {"mass": masses, "plan": words},
    ev.Weighed: {"mass": st.just(0.0) | masses},
    ev.Discarded: {},
}
happened = st.one_of(
    *(
        st.fixed_dictionaries({**heads, **own}).map(lambda d, k=k: k(**d))
        for k, own in plain.items()
    )
)


def corrected(event):
    """A correction of some event by this one, or by nothing."""
    return st.builds(
        ev.Corrected,
        lot=st.just(event.lot),
        at=moments,
        corrects=st.uuids().map(str),
        replacement=st.sampled_from([event, None]),
    )


@settings(deadline=None, derandomize=True, max_examples=150)
@given(happened | happened.flatmap(corrected))
def test_every_event_survives_being_written_as_json(event):
    """What is read from a line is the very event that was written on it, to the last bit."""
    line = json.dumps(as_json(event), allow_nan=False)
    assert from_json(json.loads(line)) == event


def test_all_kinds_are_tried():
    """The round trip above leaves no kind of event out."""
    assert {k.kind for k in (*plain, ev.Corrected)} == set(ev.KINDS)


@pytest.mark.parametrize(
    ("kind", "given", "place"),
    [
        ("used", {"mass": -0.003}, "used.mass"),
        ("used", {"mass": 0.0}, "used.mass"),
        ("used", {"mass": float("nan")}, "used.mass"),
        ("used", {"mass": float("inf")}, "used.mass"),
        ("used", {"mass": 10**400}, "used.mass"),
        ("used", {"mass": True}, "used.mass"),
        ("used", {"mass": "3 mg"}, "used.mass"),
        ("used", {"mass": None}, "used.mass"),
        ("weighed", {"mass": -1e-9}, "weighed.mass"),
        ("moved", {"temperature": -20.0}, "moved.temperature"),
        ("moved", {"temperature": 4.0}, "moved.temperature"),
        ("moved", {"temperature": 277.15, "form": "powder"}, "moved.form"),
        ("moved", {"temperature": 277.15, "opened": "yes"}, "moved.opened"),
        ("transported", {"temperature": 295.0, "hours": 0}, "transported.hours"),
        ("thawed", {"count": 0}, "thawed.count"),
        ("thawed", {"count": 1.5}, "thawed.count"),
        ("opened", {"lot": "  "}, "opened.lot"),
        ("opened", {"lot": "CH\n2307"}, "opened.lot"),
        ("opened", {"lot": "CH\u200b2307"}, "opened.lot"),
        ("opened", {"lot": "x" * 121}, "opened.lot"),
        ("opened", {"lot": 2307}, "opened.lot"),
        ("opened", {"who": "\ud800"}, "opened.who"),
        ("opened", {"note": "\x00"}, "opened.note"),
        ("opened", {"id": "a b"}, "opened.id"),
        ("opened", {"id": ""}, "opened.id"),
        ("opened", {"at": datetime(2026, 3, 12, tzinfo=UTC)}, "opened.at"),
        ("opened", {"at": datetime(206, 3, 12)}, "opened.at"),
        ("opened", {"at": "2026-03-12"}, "opened.at"),
        ("opened", {"recorded_at": AT}, "opened.recorded_at"),
        ("assayed", {}, "assayed"),
        ("assayed", {"fraction": 0.8}, "assayed.standard_error"),
        ("assayed", {"fraction": 0.8, "standard_error": 0.0}, "assayed.standard_error"),
        ("assayed", {"fraction": -0.1, "standard_error": 0.1, "scale": "log"}, "assayed.fraction"),
        ("corrected", {"corrects": "one", "id": "one"}, "corrected.corrects"),
        ("corrected", {"corrects": "one", "replacement": "two"}, "corrected.replacement"),
    ],
)
def test_what_cannot_be_is_refused_at_its_place(kind, given, place):
    """An event that cannot have happened is not made, and the message names the field."""
    with pytest.raises(InputError) as refused:
        ev.KINDS[kind](**{"lot": "CH-2307", "at": AT, **given})
    assert [problem.place for problem in refused.value.problems] == [place]


def test_all_that_is_wrong_with_an_event_is_told_at_once():
    """Whoever fills in a form hears of every field in one go."""
    with pytest.raises(InputError) as refused:
        ev.Used(lot="", at=AT, mass=-1, plan="\n\n")
    assert {p.place for p in refused.value.problems} == {"used.lot", "used.mass"}


def test_a_correction_stays_with_its_lot():
    """A use of the wrong bottle is taken back and written anew, not carried over."""
    with pytest.raises(InputError, match="stay with its lot"):
        ev.Corrected(
            lot="A", at=AT, corrects="one", replacement=ev.Used(lot="B", at=AT, mass=0.001)
        )


def test_a_correction_of_a_correction_has_no_replacement_of_its_kind():
    """What replaces an event is an event."""
    inner = ev.Corrected(lot="A", at=AT, corrects="one")
    with pytest.raises(InputError, match="no correction"):
        ev.Corrected(lot="A", at=AT, corrects="two", replacement=inner)


def test_a_name_is_the_same_however_it_was_typed():
    """Composed and decomposed letters, and blanks around, make no second lot."""
    one, other = "Mu\u0308ller 7 ", "M\u00fcller 7"
    assert ev.Opened(lot=one, at=AT).lot == ev.Opened(lot=other, at=AT).lot == other


def test_a_recorded_time_is_kept_in_utc():
    """The zone of the computer that wrote does not matter."""
    east = timezone(timedelta(hours=13))
    event = ev.Opened(lot="A", at=AT, recorded_at=datetime(2026, 3, 13, 6, tzinfo=east))
    assert as_json(event)["recorded_at"] == "2026-03-12T17:00:00+00:00"


def test_two_events_never_share_an_id_by_chance():
    """Every event made has an id of its own."""
    assert len({ev.Opened(lot="A", at=AT).id for _ in range(1000)}) == 1000


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"digestplan": 2}, "newer version"),
        ({"digestplan": None}, "not an event"),
        ({"digestplan": True}, "not an event"),
        ({"kind": "sold"}, "none of the events"),
        ({"kind": ["used"]}, "none of the events"),
        ({"mass_g": None}, "number"),
        ({"at": "yesterday"}, "cannot be read"),
        ({"at": 5}, "cannot be read"),
        ({"colour": "red"}, "not known here"),
    ],
)
def test_a_line_that_is_no_event_is_refused(change, message):
    """Each wrong line of an export gets words of its own."""
    line = {**as_json(ev.Used(lot="A", at=AT, mass=0.001)), **change}
    with pytest.raises(InputError, match=message):
        from_json(line)


@pytest.mark.parametrize("missing", ["lot", "at", "id", "mass_g"])
def test_a_line_must_have_what_an_event_cannot_do_without(missing):
    """A line without its id is refused too: it could not be told from itself."""
    line = as_json(ev.Used(lot="A", at=AT, mass=0.001))
    del line[missing]
    with pytest.raises(InputError) as refused:
        from_json(line)
    assert [p.place for p in refused.value.problems] == [f"used.{missing}"]


def test_nested_corrections_in_a_line_are_refused_without_going_down():
    """A hostile line cannot lead the reader as deep as it likes."""
    line = {"kind": "corrected", "lot": "A", "at": AT.isoformat(), "id": "a", "corrects": "b"}
    for _ in range(400):
        line = {**line, "replacement": line}
    with pytest.raises(InputError):
        event_from(line)


def test_forms_are_those_that_storage_kinetics_knows():
    """The register and the history speak of the same forms."""
    assert get_args(storage.Form) == FORMS


def test_naming_events_loads_no_database():
    """Only opening a register costs the import of SQLAlchemy."""
    code = (
        "import sys; import digestplan.lots.register.events, digestplan.lots.register.stock;"
        "from digestplan.lots.register import RegisterError;"
        "sys.exit('sqlalchemy' in sys.modules or 'numpy' in sys.modules)"
    )
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


def test_an_expiry_is_a_day_and_no_moment():
    """A time of day does not get in as a supplier's date."""
    given = {"enzyme": "trypsin", "form": "dry", "temperature": 277.15}
    assert ev.Received(lot="A", at=AT, expiry=date(2027, 1, 1), **given).expiry.year == 2027
    with pytest.raises(InputError, match="date"):
        ev.Received(lot="A", at=AT, expiry=AT, **given)
