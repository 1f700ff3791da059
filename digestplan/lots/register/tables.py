"""The tables of a register, and the triggers that let rows in and never again out or over."""

from collections.abc import Sequence
from typing import Any

from sqlalchemy import (
    CheckConstraint,
    Column,
    ColumnElement,
    Connection,
    Index,
    Integer,
    MetaData,
    Row,
    String,
    Table,
    Text,
    select,
)

metadata = MetaData()

_AT_ONCE = 500  # values in one IN (…)

_name = String(200).with_variant(Text(), "sqlite")  # a STRICT table knows TEXT alone
_hash = String(64).with_variant(Text(), "sqlite")

# Version 1, which migration 1 creates. What a later version adds belongs into a migration.
events = Table(
    "digestplan_event",
    metadata,
    Column("seq", Integer, primary_key=True, autoincrement=False),
    Column("id", _name, nullable=False, unique=True),
    Column("lot", _name, nullable=False),
    Column("kind", _name, nullable=False),
    Column("at", _name, nullable=False),  # local wall clock, ISO 8601
    Column("who", _name, nullable=False),
    Column("recorded_at", _name, nullable=False),  # UTC, ISO 8601
    Column("corrects", _name),
    Column("body", Text, nullable=False),  # JSON; its very text is hashed
    Column("previous", _hash, nullable=False),
    Column("hash", _hash, nullable=False),
    Index("digestplan_event_by_lot", "lot", "kind"),
    CheckConstraint("json_valid(body)", name="body_is_json").ddl_if(dialect="sqlite"),
    CheckConstraint("CAST(body AS json) IS NOT NULL", name="body_is_json").ddl_if(
        dialect="postgresql"
    ),
    sqlite_strict=True,
)

migrations = Table(
    "digestplan_migration",
    metadata,
    Column("number", Integer, primary_key=True, autoincrement=False),
    Column("name", _name, nullable=False),
    Column("applied_at", _name, nullable=False),
    Column("applied_by", _name, nullable=False),
    sqlite_strict=True,
)

OWN_TABLES = frozenset(metadata.tables)

_SQLITE_REFUSES = """
CREATE TRIGGER {table}_no_{verb} BEFORE {verb} ON {table}
BEGIN SELECT RAISE(ABORT, 'the register is only added to'); END"""

# INSERT OR REPLACE takes the old row away without asking the trigger on DELETE, unless the
# connection asks for recursive triggers; this one is asked on every connection.
_SQLITE_IN_ORDER = """
CREATE TRIGGER digestplan_event_in_order BEFORE INSERT ON digestplan_event
WHEN NEW.seq IS NOT (SELECT coalesce(max(seq), 0) + 1 FROM digestplan_event)
  OR EXISTS (SELECT 1 FROM digestplan_event WHERE id = NEW.id)
BEGIN SELECT RAISE(ABORT, 'the register is only added to'); END"""

_SQLITE_NO_REPLACE = """
CREATE TRIGGER digestplan_migration_no_replace BEFORE INSERT ON digestplan_migration
WHEN EXISTS (SELECT 1 FROM digestplan_migration WHERE number = NEW.number)
BEGIN SELECT RAISE(ABORT, 'the register is only added to'); END"""

_POSTGRES_FUNCTION = """
CREATE FUNCTION digestplan_only_added_to() RETURNS trigger LANGUAGE plpgsql AS
$$ BEGIN RAISE EXCEPTION 'the register is only added to'; END $$"""

_POSTGRES_REFUSES = """
CREATE TRIGGER {table}_only_added_to BEFORE UPDATE OR DELETE OR TRUNCATE ON {table}
FOR EACH STATEMENT EXECUTE FUNCTION digestplan_only_added_to()"""


def guards(dialect: str) -> list[str]:
    """Return the triggers for a kind of database; none where none are known."""
    tables = sorted(OWN_TABLES)
    if dialect == "sqlite":
        refuse = [
            _SQLITE_REFUSES.format(table=table, verb=verb)
            for table in tables
            for verb in ("update", "delete")
        ]
        return [*refuse, _SQLITE_IN_ORDER, _SQLITE_NO_REPLACE]
    if dialect == "postgresql":
        return [_POSTGRES_FUNCTION, *(_POSTGRES_REFUSES.format(table=t) for t in tables)]
    return []


def rows_with(
    connection: Connection,
    column: ColumnElement[str],
    values: Sequence[str],
    *also: ColumnElement[bool],
) -> list[Row[Any]]:
    """
    Return the events in whose column one of some values stands.

    Parameters
    ----------
    connection
        Open.
    column, values
        The column, and what may stand in it: any number, asked for a few hundred at a time.
    also
        What else must hold.

    Returns
    -------
    rows
        In no particular order.
    """
    rows: list[Row[Any]] = []
    for start in range(0, len(values), _AT_ONCE):
        some = values[start : start + _AT_ONCE]
        rows += connection.execute(select(events).where(column.in_(some), *also)).all()
    return rows
