"""The versions of a register: which one is found, and how it is brought to the newest.

Each migration is applied together with the row that says so, in one transaction: a register has
a version wholly or not at all.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import UTC, datetime

from sqlalchemy import Connection, Engine, func, insert, inspect, select

from digestplan import __version__
from digestplan.lots.register import tables
from digestplan.lots.register.engine import append_to, leave_write_ahead_log
from digestplan.lots.register.locate import NONE_HERE, refusal

APPLICATION_ID = int.from_bytes(b"dgpl")  # in the header of an SQLite file


@dataclass(frozen=True, slots=True)
class Migration:
    """One step from a version of the register to the next."""

    number: int
    name: str
    apply: Callable[[Connection], None]


def _first(connection: Connection) -> None:
    tables.metadata.create_all(connection, checkfirst=False)
    for guard in tables.guards(connection.dialect.name):
        connection.exec_driver_sql(guard)


MIGRATIONS: tuple[Migration, ...] = (Migration(1, "the ledger of events", _first),)


def version_found(connection: Connection, name: str, newest: int) -> int:
    """
    Return the version of the register that a connection leads to.

    Parameters
    ----------
    connection
        Open; only read from.
    name
        What messages call the register.
    newest
        The newest version that this program knows.

    Returns
    -------
    version
        0 where nothing is there yet; a `RegisterError` where something else is, or a register
        of a newer version.
    """
    present = set(inspect(connection).get_table_names())
    version = 0
    if tables.migrations.name in present:
        version = connection.scalar(select(func.max(tables.migrations.c.number))) or 0
    if connection.dialect.name == "sqlite":
        application, marked = (
            connection.exec_driver_sql(f"PRAGMA {pragma}").scalar_one()
            for pragma in ("application_id", "user_version")
        )
        if application != (APPLICATION_ID if version else 0) or (present and not version):
            raise refusal(name, "this file is not a lot register, and was left as it is")
        version = max(version, marked)
    elif not version and present & tables.OWN_TABLES:
        raise refusal(
            name, "its tables are not those of a lot register; they were left as they are"
        )
    if version > newest:
        message = (
            f"this register is of version {version}, and this digestplan knows versions up to "
            f"{newest}: a newer digestplan has written it. Update digestplan; nothing was changed"
        )
        raise refusal(name, message)
    return version


def migrate(connection: Connection, name: str, migrations: Sequence[Migration]) -> list[int]:
    """
    Bring a register to the newest version, inside the caller's transaction.

    Parameters
    ----------
    connection
        In a transaction that writes, so that nobody else migrates meanwhile.
    name
        What messages call the register.
    migrations
        All versions, oldest first.

    Returns
    -------
    applied
        The numbers of the migrations that were pending.
    """
    version = version_found(connection, name, migrations[-1].number)
    pending = [m for m in migrations if m.number > version]
    for migration in pending:
        migration.apply(connection)
        row = {
            "number": migration.number,
            "name": migration.name,
            "applied_at": datetime.now(UTC).isoformat(),
            "applied_by": f"digestplan {__version__}",
        }
        connection.execute(insert(tables.migrations), row)
    if pending and connection.dialect.name == "sqlite":
        connection.exec_driver_sql(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.exec_driver_sql(f"PRAGMA user_version = {pending[-1].number}")
    return [m.number for m in pending]


def bring_up_to_date(engine: Engine, name: str, *, create: bool) -> None:
    """
    Check what an engine leads to, and migrate it where that is needed.

    Parameters
    ----------
    engine
        The register's.
    name
        What messages call it.
    create
        Whether to start a register where there is none.
    """
    migrations = MIGRATIONS
    with engine.connect() as connection:
        version = version_found(connection, name, migrations[-1].number)
    if version == 0 and not create:
        raise refusal(name, NONE_HERE)
    if version < migrations[-1].number:
        append_to(engine, lambda connection: migrate(connection, name, migrations))
    if engine.dialect.name == "sqlite":
        leave_write_ahead_log(engine)
