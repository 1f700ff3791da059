"""Connections to a register's database: who waits for whom, and what reaches the disk when.

Appends are serialised: SQLite by ``BEGIN IMMEDIATE``, PostgreSQL by an advisory lock that ends
with the transaction, any other database by the row number, which only one of two can take.
"""

import random
import sqlite3
import time
from collections.abc import Callable
from typing import Any, TypeVar

from sqlalchemy import URL, Connection, Engine, create_engine, event
from sqlalchemy.exc import DBAPIError, IntegrityError
from sqlalchemy.pool import NullPool, StaticPool

from digestplan.lots.register.locate import file_of, name_of, refusal

T = TypeVar("T")

_APPENDS = "digestplan_appends"  # execution option of connections that write
_LOCK = 0x64677065  # of this program, among a PostgreSQL database's advisory locks
_OLDEST_SQLITE = (3, 37)  # STRICT tables
_FLUSH = """SELECT set_config('synchronous_commit', 'on', true)
WHERE current_setting('synchronous_commit') = 'off'"""
_PATIENCE = 30.0  # [s] a busy machine is waited for


def make_engine(url: URL, timeout: float) -> Engine:
    """
    Return an engine whose connections keep what they acknowledge.

    Parameters
    ----------
    url
        The database.
    timeout
        How long to wait for somebody else's write. [s]

    Returns
    -------
    engine
        Nothing is opened yet.
    """
    dialect = url.get_backend_name()
    if url.get_dialect().is_async:
        raise refusal(name_of(url), "its driver is asynchronous; leave the driver out of the URL")
    if dialect == "sqlite":
        return _sqlite(url, timeout)
    if dialect == "postgresql":
        return _postgresql(url, timeout)
    return create_engine(url, pool_pre_ping=True)


def append_to(engine: Engine, work: Callable[[Connection], T]) -> T:
    """
    Do work in one transaction that no other writer can come between.

    Parameters
    ----------
    engine
        The register's.
    work
        What to do; it must bear being done again from the start, because it is when the
        connection breaks, or when somebody else was faster.

    Returns
    -------
    result
        What the work returned, after it was committed.
    """
    lost: DBAPIError | None = None  # after which it is not known whether it was written
    until = time.monotonic() + _PATIENCE
    while True:
        try:
            return _once(engine, work)
        except DBAPIError as error:
            lost = lost or (error if error.connection_invalidated else None)
            if time.monotonic() > until or not _passing(error, engine):
                raise (lost or error) from None
        time.sleep(random.uniform(0.01, 0.1))  # noqa: S311 - so that two do not keep in step


def leave_write_ahead_log(engine: Engine) -> None:
    """Bring a file that something else switched to a write-ahead log back to one file alone."""
    connection = engine.raw_connection()
    try:
        cursor = connection.cursor()
        if cursor.execute("PRAGMA journal_mode").fetchone()[0] == "wal":
            cursor.execute("PRAGMA journal_mode = DELETE")
    finally:
        connection.close()


# -- the parts ------------------------------------------------------------------------------


def _once(engine: Engine, work: Callable[[Connection], T]) -> T:
    with engine.connect().execution_options(**{_APPENDS: True}) as connection, connection.begin():
        return work(connection)


def _passing(error: DBAPIError, engine: Engine) -> bool:
    """Whether an error may be gone at the next try."""
    taken = isinstance(error, IntegrityError) and engine.dialect.name != "sqlite"
    state = getattr(error.orig, "sqlstate", None)
    return error.connection_invalidated or taken or state in {"40001", "40P01"}


def _sqlite(url: URL, timeout: float) -> Engine:
    if sqlite3.sqlite_version_info < _OLDEST_SQLITE:
        wanted = ".".join(map(str, _OLDEST_SQLITE))
        message = f"Python's SQLite is {sqlite3.sqlite_version}; a register needs {wanted} or newer"
        raise refusal(name_of(url), message)
    in_file = file_of(url) is not None
    engine = create_engine(
        url,
        poolclass=NullPool if in_file else StaticPool,
        connect_args={"timeout": timeout, "check_same_thread": False},
    )

    @event.listens_for(engine, "connect")
    def _settle(connection: Any, _record: Any) -> None:
        connection.isolation_level = None  # BEGIN is said below, and nowhere else
        try:
            for pragma in ("synchronous = FULL", "recursive_triggers = ON"):
                connection.execute(f"PRAGMA {pragma}")
        except sqlite3.Error:  # a locked or damaged file; nobody else closes what failed here
            connection.close()
            raise

    @event.listens_for(engine, "begin")
    def _begin(connection: Connection) -> None:
        writes = connection.get_execution_options().get(_APPENDS)
        connection.exec_driver_sql("BEGIN IMMEDIATE" if writes else "BEGIN")

    return engine


def _postgresql(url: URL, timeout: float) -> Engine:
    engine = create_engine(
        url,
        pool_pre_ping=True,
        isolation_level="READ COMMITTED",  # each statement sees what was committed before it
        connect_args={"connect_timeout": max(2, int(timeout))},
    )

    @event.listens_for(engine, "begin")
    def _begin(connection: Connection) -> None:
        if connection.get_execution_options().get(_APPENDS):
            connection.exec_driver_sql(_FLUSH)
            connection.exec_driver_sql(f"SET LOCAL lock_timeout = {int(timeout * 1000)}")
            connection.exec_driver_sql(f"SELECT pg_advisory_xact_lock({_LOCK})")

    return engine
