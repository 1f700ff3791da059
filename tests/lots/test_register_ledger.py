"""One contract for every database: what goes in stays in, once, whole and as it was written."""

import json
import sqlite3
from dataclasses import replace
from datetime import datetime

import pytest
from sqlalchemy import text
from sqlalchemy.exc import DBAPIError

from digestplan.lots.register import RegisterError, open_register
from digestplan.lots.register import engine as connections
from digestplan.lots.register.events import Assayed


def story(bottle):
    """A year of one lot: everything that can happen, mistakes included."""
    use = bottle.used(4, mass=0.006, plan="Porpoise tail tendon (invented)")
    wrong = bottle.thawed(5)
    back = bottle.corrected(7, corrects=wrong.id)
    return [
        bottle.received(label_activity="280 CDU/mg", conversions=("1 CDU = 0.011 FALGPA_U",)),
        bottle.opened(3, who="Ada"),
        use,
        wrong,
        bottle.corrected(6, corrects=use.id, replacement=bottle.used(4, mass=0.060)),
        back,
        bottle.moved(8, temperature=277.15, form="glycerol", place="fridge 2"),
        bottle.transported(9, temperature=295.15, hours=30.0),
        bottle.assayed(10, fraction=0.82, standard_error=0.04, activity="231 ± 9 CDU/mg"),
        bottle.weighed(11, mass=0.038, note="counted\ntwice"),
    ]


def test_what_is_appended_is_read_as_it_was_written(register, bottle):
    """Every event comes back equal, in the order of writing, with the time of recording."""
    written = story(bottle)
    kept = [register.append(event) for event in written]
    assert all(event.recorded_at for event in kept)
    assert [replace(e, recorded_at=None) for e in kept] == written
    assert list(register.events("CH-2307")) == kept


def test_every_database_tells_the_same(register, bottle):
    """A register adds up to what one in memory adds up to."""
    events = [*story(bottle), bottle.received("T-1", mass=None), bottle.used(2, "T-1", mass=1.0)]
    with open_register("sqlite://") as other:
        other.append_many(events)
        register.append_many(events)
        assert register.lots() == other.lots()
        for lot in ("CH-2307", "T-1"):
            one, two = register.lot(lot), other.lot(lot)
            assert [replace(e, recorded_at=None) for e in one.events] == [
                replace(e, recorded_at=None) for e in two.events
            ]
            until = datetime(2026, 12, 1)
            assert one.stretches(until) == two.stretches(until)


def test_a_register_is_there_again_when_it_is_opened_again(location, bottle):
    """Closing and opening changes nothing, and the chain of hashes is whole."""
    with open_register(location) as register:
        kept = register.append_many(story(bottle)).events
        head = register.head()
    with open_register(location, create=False) as again:
        assert again.events() == kept
        assert again.head() == head
        assert again.verify(head) is None


def test_writing_an_event_again_writes_nothing(register, bottle):
    """A retry after a lost answer never doubles an event."""
    register.append(bottle.received())
    use = bottle.used(4, mass=0.006)
    first, second = register.append(use), register.append(use)
    assert first == second
    assert register.append_many([use, first, use]).n_new == 0
    assert len(register.events()) == 2


def test_an_event_repeated_within_one_writing_is_written_once(register, bottle):
    """The same holds inside of one transaction."""
    use = bottle.used(4, mass=0.006)
    appended = register.append_many([bottle.received(), use, use])
    assert appended.n_new == 2
    assert appended.events[1] == appended.events[2]


def test_an_id_is_used_once(register, bottle):
    """Another event under a known id is refused, and the first one stays."""
    register.append(bottle.received())
    use = register.append(bottle.used(4, mass=0.006))
    with pytest.raises(RegisterError, match="ids are used once"):
        register.append(replace(use, mass=0.007))
    assert register.events()[-1] == use


def test_all_or_nothing(register, bottle):
    """One event that is refused keeps the others of its transaction out; all of them are told."""
    register.append(bottle.received())
    good, wrong = bottle.used(4, mass=0.006), bottle.used(4, "CH-2370", mass=0.006)
    with pytest.raises(RegisterError) as refused:
        register.append_many([good, wrong, bottle.received()])
    assert len(refused.value.problems) == 2
    assert "did you mean CH-2307" in str(refused.value)
    assert len(register.events()) == 1


def test_a_lot_begins_with_its_receipt(register, bottle):
    """A use of a lot that nobody received is refused, and so is a second receipt."""
    with pytest.raises(RegisterError, match="receive it first"):
        register.append(bottle.used(4, mass=0.006))
    register.append(bottle.received())
    with pytest.raises(RegisterError, match="a name of its own"):
        register.append(bottle.received())


def test_a_correction_needs_something_to_correct(register, bottle):
    """Unknown ids, other lots' events and impossible replacements are refused in words."""
    first = register.append(bottle.received())
    register.append(bottle.received("T-1"))
    use = register.append(bottle.used(4, mass=0.006))
    back = register.append(bottle.corrected(5, corrects=use.id))
    for correction, words in (
        (bottle.corrected(5, corrects="nothing"), "no event"),
        (bottle.corrected(5, "T-1", corrects=use.id), 'belongs to lot "CH-2307"'),
        (bottle.corrected(5, corrects=use.id, replacement=bottle.received()), "receipt"),
        (bottle.corrected(5, corrects=first.id, replacement=bottle.opened(1)), "receipt"),
        (bottle.corrected(5, corrects=back.id, replacement=bottle.opened(1)), "taken back only"),
    ):
        with pytest.raises(RegisterError, match=words):
            register.append(correction)
    assert len(register.events()) == 4


def test_a_receipt_that_was_taken_back_makes_room_for_another(register, bottle):
    """A lot entered by mistake is gone from the listing, and can be entered anew, but not twice."""
    first = register.append(bottle.received(mass=0.1))
    back = register.append(bottle.corrected(2, corrects=first.id))
    assert register.lots() == ()
    with pytest.raises(RegisterError, match="receive it first"):
        register.lot("CH-2307")
    with pytest.raises(RegisterError, match="no lot"):
        register.append(bottle.opened(3))
    register.append(bottle.received(mass=0.2))
    assert [lot.remaining_mass for lot in register.lots()] == [0.2]
    with pytest.raises(RegisterError, match="a name of its own"):
        register.append(bottle.corrected(4, corrects=back.id))


@pytest.mark.parametrize(
    "name", ["'; DROP TABLE digestplan_event; --", "%s %(x)s", ":lot ?", "Ω 7 ö"]
)
def test_names_are_data(register, bottle, name):
    """Whatever is written on a bottle is kept as its name."""
    register.append(bottle.received(name, note=name, who=name))
    assert [lot.lot for lot in register.lots()] == [name]
    assert register.lot(name).received.who == name


def test_lots_are_listed_as_they_were_at_a_time(register, bottle):
    """A plan that starts on the 5th sees the register of the 5th, with later corrections."""
    register.append_many(story(bottle))
    (then,) = register.lots(datetime(2026, 3, 5, 23))
    assert (then.remaining_mass, then.thaws, then.form) == (0.04, 0, "dry")
    assert register.lots(datetime(2026, 2, 1)) == ()
    with pytest.raises(RegisterError, match="received at 2026-03-01 09:00, later"):
        register.lot("CH-2307", datetime(2026, 2, 1))


def test_assays_are_found_in_a_record(register, bottle):
    """What was assayed is there with its uncertainty, for the posterior."""
    register.append_many(story(bottle))
    (assay,) = register.lot("CH-2307").assays
    assert isinstance(assay, Assayed)
    assert (assay.fraction, assay.standard_error) == (0.82, 0.04)


# -- append-only ----------------------------------------------------------------------------

FORBIDDEN = [
    "UPDATE digestplan_event SET who = 'nobody'",
    "DELETE FROM digestplan_event",
    "UPDATE digestplan_migration SET name = 'other'",
    "DELETE FROM digestplan_migration",
]


@pytest.mark.parametrize("statement", FORBIDDEN)
def test_the_database_itself_refuses_changes(register, bottle, statement):
    """Nobody who writes SQL changes or deletes a row by accident."""
    kept = register.append_many(story(bottle)).events
    with (
        register._engine.connect() as connection,
        pytest.raises(DBAPIError, match="only added to"),
        connection.begin(),
    ):
        connection.execute(text(statement))
    assert register.events() == kept


def test_a_table_cannot_be_emptied_in_one_go(schema, bottle):
    """PostgreSQL's TRUNCATE goes past row triggers, and is refused all the same."""
    with open_register(schema) as register:
        register.append(bottle.received())
        with register._engine.connect() as connection:
            with pytest.raises(DBAPIError, match="only added to"), connection.begin():
                connection.execute(text("TRUNCATE digestplan_event"))
            assert len(register.events()) == 1


@pytest.mark.parametrize("column", ["seq", "id"])
def test_insert_or_replace_does_not_slip_past(filed, bottle, column):
    """SQLite's REPLACE deletes without asking, on any connection, and is refused all the same."""
    filed.append_many(story(bottle))
    with sqlite3.connect(filed.name) as plain:
        row = list(plain.execute("SELECT * FROM digestplan_event WHERE seq = 3").fetchone())
        row[0 if column == "id" else 1] = 11 if column == "id" else "another"
        marks = ",".join("?" * len(row))
        with pytest.raises(sqlite3.IntegrityError, match="only added to"):
            plain.execute(f"INSERT OR REPLACE INTO digestplan_event VALUES ({marks})", row)
    plain.close()
    assert filed.verify() is None


def test_a_body_that_is_no_json_is_refused_by_the_database(register, bottle):
    """Half a body cannot get in, whoever writes it."""
    register.append(bottle.received())
    insert = (
        "INSERT INTO digestplan_event SELECT 2, 'x', lot, kind, at, who, recorded_at, corrects,"
        " '{\"mass_g\": 0.0', hash, 'y' FROM digestplan_event"
    )
    with register._engine.connect() as connection, pytest.raises(DBAPIError), connection.begin():
        connection.exec_driver_sql(insert)
    assert len(register.events()) == 1


# -- tampering ------------------------------------------------------------------------------


def _tamper(register, *statements):
    """Do what a determined hand can: drop the guards, then change the rows."""
    drops = (
        "DROP TRIGGER digestplan_event_no_update; DROP TRIGGER digestplan_event_no_delete;"
        "DROP TRIGGER digestplan_event_in_order;"
    )
    if register.url.get_backend_name() == "postgresql":
        drops = "DROP TRIGGER digestplan_event_only_added_to ON digestplan_event"
    with register._engine.connect() as connection, connection.begin():
        for statement in (*drops.rstrip(";").split(";"), *statements):
            connection.execute(text(statement))


@pytest.mark.parametrize(
    ("change", "number", "why"),
    [
        ("UPDATE digestplan_event SET who = 'nobody' WHERE seq = 4", 4, "changed"),
        ("UPDATE digestplan_event SET body = '{}' WHERE seq = 9", 9, "changed"),
        ("UPDATE digestplan_event SET hash = previous WHERE seq = 5", 5, "changed"),
        ("DELETE FROM digestplan_event WHERE seq = 6", 7, "gone"),
        ("DELETE FROM digestplan_event WHERE seq < 3", 3, "gone"),
    ],
)
def test_the_first_row_that_was_tampered_with_is_told(register, bottle, change, number, why):
    """The chain of hashes shows a change, and where it begins."""
    register.append_many(story(bottle))
    assert register.verify() is None
    _tamper(register, change)
    broken = register.verify()
    assert (broken.number, why in broken.why) == (number, True)


def test_a_row_forged_with_a_fitting_hash_breaks_the_next(register, bottle):
    """Whoever computes the hash anew must do so for all rows that follow, and then the head."""
    from digestplan.lots.register.chain import row_hash

    register.append_many(story(bottle))
    head = register.head()
    with register._engine.connect() as connection:
        query = "SELECT * FROM digestplan_event WHERE seq = 10"
        row = dict(connection.exec_driver_sql(query).mappings().one())
    row["who"] = "nobody"
    forged = f"UPDATE digestplan_event SET who = 'nobody', hash = '{row_hash(row)}' WHERE seq = 10"
    _tamper(register, forged)
    assert register.verify() is None  # the last row has no next one
    assert register.verify(head).why == "it is not the row that was noted"


def test_rows_cut_off_at_the_end_show_against_a_noted_head(register, bottle):
    """The chain alone cannot know that it was longer; a head noted elsewhere can."""
    register.append_many(story(bottle))
    head = register.head()
    _tamper(register, "DELETE FROM digestplan_event WHERE seq > 7")
    assert register.verify() is None
    assert (register.verify(head).number, register.verify(head).why[:10]) == (8, "it is gone")


def test_a_row_that_cannot_be_read_is_told_and_no_crash(register, bottle):
    """Reading over a tampered body gives a message, not a traceback."""
    register.append_many(story(bottle))
    _tamper(register, "UPDATE digestplan_event SET body = '[1]' WHERE seq = 1")
    for read in (register.lots, register.events, lambda: register.lot("CH-2307")):
        with pytest.raises(RegisterError, match="not as it was written"):
            read()


# -- retries --------------------------------------------------------------------------------


def test_an_answer_lost_after_the_commit_does_not_double(register, bottle, monkeypatch):
    """The connection breaks after the event was written: the retry finds it there."""
    register.append(bottle.received())
    once, n_tries = connections._once, []

    def lose_the_first_answer(engine, work):
        done = once(engine, work)
        n_tries.append(1)
        if len(n_tries) == 1:
            raise DBAPIError("COMMIT", {}, Exception("gone"), connection_invalidated=True)
        return done

    monkeypatch.setattr(connections, "_once", lose_the_first_answer)
    register.append(bottle.used(4, mass=0.006))
    assert (len(n_tries), len(register.events())) == (2, 2)


def test_a_connection_that_stays_lost_leaves_nobody_in_doubt(register, bottle, monkeypatch):
    """Where no retry got an answer, the message says that the event may be there or not."""
    register.append(bottle.received())

    def lose(engine, work):
        raise DBAPIError("COMMIT", {}, Exception("gone"), connection_invalidated=True)

    monkeypatch.setattr(connections, "_once", lose)
    monkeypatch.setattr(connections, "_PATIENCE", 0.05)
    with pytest.raises(RegisterError, match="see whether the last entry is there"):
        register.append(bottle.used(4, mass=0.006))


def test_a_connection_that_the_server_cuts_is_made_anew(schema, bottle):
    """A restarted server costs a second try, and nothing that was written."""
    with open_register(schema) as register:
        register.append(bottle.received())
        cut = []

        def work(connection):
            if not cut:
                cut.append(True)
                connection.execute(text("SELECT pg_terminate_backend(pg_backend_pid())"))
            return connection.scalar(text("SELECT count(*) FROM digestplan_event"))

        assert connections.append_to(register._engine, work) == 1


def test_bodies_are_plain_json_for_other_programs(filed, bottle):
    """The file can be read without this program: a body is JSON with the unit in its keys."""
    filed.append_many(story(bottle))
    with sqlite3.connect(filed.name) as plain:
        query = "SELECT body FROM digestplan_event WHERE kind = 'used'"
        (body,) = plain.execute(query).fetchone()
    plain.close()
    assert json.loads(body) == {"mass_g": 0.006, "plan": "Porpoise tail tendon (invented)"}
