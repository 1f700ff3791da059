"""The register: events go in, each for good, and come out again. Nothing else is offered."""

import json
import os
import sqlite3
from collections.abc import Generator, Iterator, Sequence
from contextlib import closing, contextmanager
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from itertools import groupby
from operator import itemgetter
from pathlib import Path
from types import TracebackType
from typing import Any, Self

from sqlalchemy import URL, Connection, Engine, Select, insert, select

from digestplan.lots.register import chain, stock
from digestplan.lots.register.admission import Admission, unknown_lot
from digestplan.lots.register.body import FORMAT
from digestplan.lots.register.chain import BrokenRow, Head
from digestplan.lots.register.engine import append_to, make_engine
from digestplan.lots.register.events import Corrected, Event
from digestplan.lots.register.fields import checked, lot_name
from digestplan.lots.register.locate import (
    VARIABLE,
    RegisterError,
    default_location,
    file_of,
    in_words,
    look_at,
    make_home,
    name_of,
    refusal,
    register_url,
)
from digestplan.lots.register.migrations import bring_up_to_date
from digestplan.lots.register.stock import SUMMED, Entry, LotRecord, LotSummary
from digestplan.lots.register.tables import events as table
from digestplan.lots.register.tables import rows_with
from digestplan.problems import InputError, Problem

_READ = 1000  # rows fetched at a time
_PATIENCE = 30.0  # [s] a busy machine is waited for


@dataclass(frozen=True, slots=True)
class Appended:
    """The events as the register has them, and how many of them are new to it."""

    events: tuple[Event, ...]
    n_new: int


def open_register(
    location: str | Path | None = None, *, create: bool = True, timeout: float = _PATIENCE
) -> "Register":
    """
    Open the lot register, or start one where there is none.

    Parameters
    ----------
    location
        A path of an SQLite file, or a database URL; None for the user's own (or what
        ``DIGESTPLAN_REGISTER`` says).
    create
        Whether to start a register where there is none.
    timeout
        How long to wait for somebody else's write. [s]

    Returns
    -------
    register
        Brought to the newest version; a `RegisterError` where that cannot be.
    """
    chosen = default_location() if location is None else location
    url = register_url(chosen)
    name, file = name_of(url), file_of(url)
    if file is not None:
        if create and location is None and not os.environ.get(VARIABLE):
            make_home(file)
        look_at(file, create=create)
    with in_words(name):
        engine = make_engine(url, timeout)
        try:
            bring_up_to_date(engine, name, create=create)
        except BaseException:
            engine.dispose()
            raise
    return Register(url, engine)


class Register:
    """
    An open register; made by `open_register`, and closed by ``with`` or `close`.

    Attributes
    ----------
    name
        What messages call it.
    url
        Its database.
    """

    def __init__(self, url: URL, engine: Engine) -> None:
        self.url = url
        self.name = name_of(url)
        self._engine = engine

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.close()

    def close(self) -> None:
        """Let go of the database."""
        self._engine.dispose()

    # -- in ---------------------------------------------------------------------------------

    def append(self, event: Event) -> Event:
        """
        Write one event; when this returns, it is on the disk.

        Parameters
        ----------
        event
            Writing the same event (by its id) again changes nothing.

        Returns
        -------
        event
            As the register has it, with the time at which it was recorded.
        """
        return self.append_many([event]).events[0]

    def append_many(
        self, events: Sequence[Event], *, source: str | None = None, lines: Sequence[int] = ()
    ) -> Appended:
        """
        Write all of the events, or none of them where one is refused.

        Parameters
        ----------
        events
            In the order in which they are to be read.
        source, lines
            The file they come from and the line of each, for messages.

        Returns
        -------
        appended
            A `RegisterError` tells every event that is refused, and why.
        """
        recorded = datetime.now(UTC)
        whole = [e if e.recorded_at else replace(e, recorded_at=recorded) for e in events]

        def work(connection: Connection) -> Appended:
            kept, new, problems = self._compare(connection, whole)
            admission = Admission(*self._concerned(connection, [whole[i] for i in new]))
            for i in new:
                why = admission.take(whole[i])
                if why:
                    problems[i] = why
            if problems:
                raise self._refused(whole, problems, source, lines)
            rows = list(chain.chained([whole[i] for i in new], self._head(connection)))
            if rows:
                connection.execute(insert(table), rows)
            return Appended(tuple(kept[e.id] for e in whole), len(rows))

        with in_words(self.name):
            return append_to(self._engine, work)

    def _compare(
        self, connection: Connection, events: Sequence[Event]
    ) -> tuple[dict[str, Event], list[int], dict[int, str]]:
        """What will be there by id, which of the events are new, and which are at odds."""
        rows = rows_with(connection, table.c.id, [e.id for e in events])
        with self._readable():
            kept = {row.id: chain.event_of(row) for row in rows}
        new, problems = [], {}
        for i, event in enumerate(events):
            known = kept.setdefault(event.id, event)
            if known is event:
                new.append(i)
            elif replace(known, recorded_at=event.recorded_at) != event:
                problems[i] = f'the register has another event "{event.id}"; ids are used once'
        return kept, new, problems

    def _concerned(
        self, connection: Connection, events: Sequence[Event]
    ) -> tuple[list[Entry], list[str]]:
        """What decides on new events, and all lots' names if one of theirs is not among them."""
        lots = sorted({e.lot for e in events})
        deciding = table.c.kind.in_(("received", "corrected"))
        targets = [e.corrects for e in events if isinstance(e, Corrected)]
        rows = [*rows_with(connection, table.c.lot, lots, deciding)]
        rows += rows_with(connection, table.c.id, targets, ~deciding)
        entries = [chain.entry_of(row) for row in sorted(rows, key=lambda row: row.seq)]
        received = {e.lot for e in entries if e.kind == "received"}
        received |= {e.lot for e in events if e.kind == "received"}
        if received >= set(lots):
            return entries, []
        return entries, list(connection.scalars(select(table.c.lot).distinct()))

    def _refused(
        self,
        events: Sequence[Event],
        problems: dict[int, str],
        source: str | None,
        lines: Sequence[int],
    ) -> RegisterError:
        return RegisterError(
            *(
                Problem("", why, file=source, line=lines[i])
                if lines
                else Problem(f"{events[i].kind} of {events[i].lot}", why, file=self.name)
                for i, why in sorted(problems.items())
            )
        )

    # -- out --------------------------------------------------------------------------------

    def events(self, lot: str | None = None) -> tuple[Event, ...]:
        """Return what was written on a lot, or on all: in that order, corrections as such."""
        query = select(table).order_by(table.c.seq)
        if lot is not None:
            query = query.where(table.c.lot == self._lot_name(lot))
        with in_words(self.name), self._engine.connect() as connection:
            rows = connection.execute(query).all()
        with self._readable():
            return tuple(chain.event_of(row) for row in rows)

    def lots(self, at: datetime | None = None) -> tuple[LotSummary, ...]:
        """
        Return what a listing shows of every lot, sorted by its name.

        Parameters
        ----------
        at
            As things were at this time (local wall clock); None for everything written.

        Returns
        -------
        summaries
            Lots that were discarded are among them.
        """
        c = table.c
        query = select(c.lot, c.id, c.kind, c.at, c.corrects, c.body).order_by(c.lot, c.seq)
        found = []
        with self._readable(), closing(self._streamed(query)) as rows:
            for _, own in groupby(rows, key=itemgetter(0)):
                entries = [
                    Entry(
                        lot, id_, kind, when, corrects, json.loads(body) if kind in SUMMED else {}
                    )
                    for lot, id_, kind, when, corrects, body in own
                ]
                found.append(stock.summary(self._until(entries, at)))
        return tuple(sorted((lot for lot in found if lot), key=lambda lot: lot.lot))

    def lot(self, lot: str, at: datetime | None = None) -> LotRecord:
        """
        Return the history of one lot, corrections applied.

        Parameters
        ----------
        lot
            Its name.
        at
            As things were at this time (local wall clock); None for everything written.

        Returns
        -------
        record
            A `RegisterError` where there is no such lot, or was not yet.
        """
        name = self._lot_name(lot)
        query = select(table).where(table.c.lot == name).order_by(table.c.seq)
        with in_words(self.name), self._engine.connect() as connection:
            rows = connection.execute(query).all()
            names = [] if rows else connection.scalars(select(table.c.lot).distinct()).all()
        with self._readable():
            entries = [chain.entry_of(row) for row in rows]
            found = stock.record(self._until(entries, at))
            if found is not None:
                return found
            once = stock.record(self._until(entries, None))
        if once is None:
            raise refusal(self.name, unknown_lot(name, names))
        received = f"{once.received.at:%Y-%m-%d %H:%M}"
        raise refusal(self.name, f'lot "{name}" was received at {received}, later than that')

    def lines(self) -> Generator[dict[str, Any], None, None]:
        """Yield every event as a line of an export holds it, in the order of writing."""
        with closing(self._each()) as rows:
            yield from ({"digestplan": FORMAT, **chain.written_in(row)} for row in rows)

    def copy_to(self, copy: sqlite3.Connection) -> None:
        """Copy an SQLite register as it is now into another database, which is empty."""

        def give_up(status: int, _remaining: int, _total: int) -> None:
            if status not in {sqlite3.SQLITE_OK, sqlite3.SQLITE_DONE}:
                raise refusal(self.name, "another program keeps it locked; nothing was copied")

        with in_words(self.name), closing(self._engine.raw_connection()) as connection:
            assert connection.driver_connection is not None
            connection.driver_connection.backup(copy, progress=give_up)

    def head(self) -> Head:
        """Return the newest row; keep it elsewhere, and `verify` can tell a shortened register."""
        with in_words(self.name), self._engine.connect() as connection:
            return self._head(connection)

    def verify(self, since: Head | None = None) -> BrokenRow | None:
        """
        Check every row against the hash of the one before.

        Parameters
        ----------
        since
            A head that was noted earlier; its row must still be there.

        Returns
        -------
        broken
            The first row that is not as it was written; None where all are.
        """
        last = Head()
        with closing(self._each()) as rows:
            for row in rows:
                why = chain.fault(row, last)
                last = Head(row.seq, row.hash)
                if why is None and since is not None and since.number == row.seq:
                    why = None if since.hash == row.hash else "it is not the row that was noted"
                if why:
                    return BrokenRow(row.seq, why)
        if since is not None and last.number < since.number:
            return BrokenRow(last.number + 1, "it is gone, with all that followed")
        return None

    def _each(self) -> Generator[Any, None, None]:
        return self._streamed(select(table).order_by(table.c.seq))

    def _streamed(self, query: Select[Any]) -> Generator[Any, None, None]:
        """Yield rows while they are fetched, so that no more than a few are held at once."""
        with (
            in_words(self.name),
            self._engine.connect() as connection,
            connection.execute(query.execution_options(yield_per=_READ)) as rows,
        ):
            yield from rows

    def _head(self, connection: Connection) -> Head:
        query = select(table.c.seq, table.c.hash).order_by(table.c.seq.desc()).limit(1)
        row = connection.execute(query).first()
        return Head(row.seq, row.hash) if row else Head()

    def _lot_name(self, text: str) -> str:
        try:
            return lot_name(text)
        except ValueError as error:
            raise refusal(self.name, f"lot: {error}") from None

    def _until(self, entries: Sequence[Entry], at: datetime | None) -> list[Entry]:
        """What counts of a lot's entries, and had happened by a time."""
        counting = stock.live(entries)
        if at is None:
            return counting
        try:
            latest = checked("", "at", at).isoformat()
        except ValueError as error:
            raise refusal(self.name, f"at: {error}") from None
        return [e for e in counting if e.at <= latest]

    @contextmanager
    def _readable(self) -> Iterator[None]:
        try:
            yield
        except RegisterError:
            raise
        except (InputError, LookupError, TypeError, ValueError) as error:
            message = "a row cannot be read: it is not as it was written; verify tells which"
            raise refusal(self.name, message) from error
