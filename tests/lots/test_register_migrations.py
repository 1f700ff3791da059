"""A register's version: brought up step by step, refused in words where it is too new."""

import sqlite3
from pathlib import Path

import pytest
from sqlalchemy import inspect, text

from digestplan.lots.register import RegisterError, open_register
from digestplan.lots.register import migrations as steps
from digestplan.lots.register.engine import append_to

NEWER = "INSERT INTO digestplan_migration VALUES (99, 'later', '2030-01-01', 'digestplan 9')"

# What version 1 is, for good: files of this version are in people's hands.
FIRST = {
    "digestplan_event": [
        *("seq", "id", "lot", "kind", "at", "who", "recorded_at"),
        *("corrects", "body", "previous", "hash"),
    ],
    "digestplan_migration": ["number", "name", "applied_at", "applied_by"],
}


def add_column(connection):
    connection.execute(text("ALTER TABLE digestplan_event ADD COLUMN colour TEXT"))


def fail_half_way(connection):
    add_column(connection)
    raise RuntimeError("half way")


def columns(register):
    found = inspect(register._engine)
    return {name: [c["name"] for c in found.get_columns(name)] for name in found.get_table_names()}


def test_a_new_register_is_of_the_first_version(register):
    """Tables and columns are those that version 1 has everywhere; its record says who made it."""
    assert columns(register) == FIRST
    with register._engine.connect() as connection:
        query = "SELECT number, name, applied_by FROM digestplan_migration"
        ((number, name, by),) = connection.execute(text(query)).all()
    assert (number, name, by.split()[0]) == (1, "the ledger of events", "digestplan")


def test_a_file_says_what_it_is_in_its_header(filed):
    """Other programs can tell a register by the application id, and its version."""
    header = Path(filed.name).read_bytes()[:100]
    assert header[68:72] == b"dgpl"
    assert int.from_bytes(header[60:64]) == 1


def test_opening_again_applies_nothing(location):
    """A register of the newest version is left as it is."""
    open_register(location).close()
    with open_register(location) as register:
        applied = append_to(
            register._engine, lambda c: steps.migrate(c, "register", steps.MIGRATIONS)
        )
        assert applied == []


def test_a_pending_migration_is_applied_with_its_record(location, bottle, monkeypatch):
    """The next version's step runs once, and the events stay."""
    with open_register(location) as register:
        kept = register.append(bottle.received())
    second = steps.Migration(2, "colours", add_column)
    monkeypatch.setattr(steps, "MIGRATIONS", (*steps.MIGRATIONS, second))
    for _ in range(2):
        with open_register(location) as register:
            assert columns(register)["digestplan_event"][-1] == "colour"
            assert register.events() == (kept,)
            with register._engine.connect() as connection:
                query = text("SELECT number FROM digestplan_migration ORDER BY number")
                assert connection.scalars(query).all() == [1, 2]


def test_a_migration_that_fails_leaves_the_version_before(location, bottle):
    """Its changes and its record go together: neither is there."""
    with open_register(location) as register:
        kept = register.append(bottle.received())
        failing = (*steps.MIGRATIONS, steps.Migration(2, "colours", fail_half_way))
        with pytest.raises(RuntimeError):
            append_to(register._engine, lambda c: steps.migrate(c, "register", failing))
        assert columns(register) == FIRST
        assert register.append(bottle.opened(3)) in register.events()
    with open_register(location) as register:
        assert register.events()[0] == kept


def test_a_register_of_a_newer_version_is_refused_in_words(location, bottle):
    """Neither opened nor changed; the message tells both versions and what to do."""
    with open_register(location) as register:
        register.append(bottle.received())
        with register._engine.connect() as connection, connection.begin():
            connection.execute(text(NEWER))
    file = Path(location)
    before = file.read_bytes() if file.is_file() else None
    with pytest.raises(RegisterError, match=r"version 99.*up to 1.*Update digestplan"):
        open_register(location)
    assert (file.read_bytes() if file.is_file() else None) == before


def test_the_version_in_the_header_counts_as_well(filed):
    """A newer version may have done away with the table of migrations' numbers."""
    with sqlite3.connect(filed.name) as plain:
        plain.execute("PRAGMA user_version = 3")
    plain.close()
    with pytest.raises(RegisterError, match="version 3"):
        open_register(filed.name)


def test_somebody_elses_tables_of_our_names_are_left_alone(schema):
    """In a shared database, tables that are no register's are not written to."""
    import psycopg

    with psycopg.connect(schema, autocommit=True) as other:
        other.execute("CREATE TABLE digestplan_event (name TEXT)")
    with pytest.raises(RegisterError, match="left as they are"):
        open_register(schema)


def test_a_register_lives_beside_other_tables_on_a_server(schema, bottle):
    """A lab's database need not be empty."""
    import psycopg

    with psycopg.connect(schema, autocommit=True) as other:
        other.execute("CREATE TABLE specimen (name TEXT)")
    with open_register(schema) as register:
        register.append(bottle.received())
        assert len(register.lots()) == 1
