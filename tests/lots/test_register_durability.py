"""What was acknowledged is there: after being killed, and with several people at once.

Power loss cannot be tried here; these tests end processes.
"""

import signal
import sqlite3
import subprocess
import sys
import time
from pathlib import Path

import pytest

from digestplan.lots.register import open_register

N_KILLS = 10
N_WRITES = 200
N_PROCESSES = 4

# One process: every fifth write is two events in one transaction; each acknowledged write is
# one line of output, after the register has returned.
WRITER = """
import sys
from datetime import datetime, timedelta
from digestplan.lots.register import open_register
from digestplan.lots.register.events import Received, Used

place, who, count = sys.argv[1], sys.argv[2], int(sys.argv[3])
start = datetime(2026, 3, 1)

def used(name, number):
    at = start + timedelta(minutes=number)
    note = f"{name} " * 150
    return Used(lot="CH-2307", at=at, mass=number / 1e6, who=who, id=name, note=note)

with open_register(place) as register:
    receipt = Received(lot="CH-2307", at=start, enzyme="clostridial-collagenase", form="dry",
                       temperature=253.15, mass=1.0, id="receipt")
    register.append(receipt)
    print("ready", flush=True)
    for number in range(1, count + 1):
        name = f"{who}-{number}"
        events = [used(name, number)]
        if number % 5 == 0:
            events.append(used(f"{name}-twin", number))
        register.append_many(events)
        print(name, flush=True)
"""


def write(place, who, count=N_WRITES):
    """Start a process that writes, and tells on its output what was acknowledged."""
    command = [sys.executable, "-c", WRITER, str(place), who, str(count)]
    return subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)


def check_whole(register, acknowledged):
    """Every acknowledged event is there, nothing is there half, and the chain is unbroken."""
    assert register.verify() is None
    events = {event.id: event for event in register.events()}
    assert set(acknowledged) <= set(events)
    for name, event in events.items():
        if name != "receipt":
            number = int(name.split("-")[1])
            assert event.mass == number / 1e6
            assert event.note == f"{name} " * 150
            assert (f"{event.who}-{number}-twin" in events) == (number % 5 == 0)
    return len(events)


def test_killed_in_the_midst_of_writing(location):
    """Ten times kill -9 among 200 writes: all that was acknowledged is there, none is half."""
    acknowledged = []
    for kill in range(N_KILLS):
        who = f"w{kill}"
        with write(location, who) as process:
            assert process.stdout.readline() == "ready\n"
            acknowledged += [process.stdout.readline().strip() for _ in range(3 + 17 * kill)]
            time.sleep(0.0007 * kill)  # somewhere within a write
            process.send_signal(signal.SIGKILL)
            acknowledged += process.stdout.read().split()
        assert process.returncode == -signal.SIGKILL
        assert acknowledged[-1] != f"{who}-{N_WRITES}"  # it really was in the midst
    with open_register(location, create=False) as register:
        n_events = check_whole(register, acknowledged)
        n_pairs = sum(int(name.split("-")[1]) % 5 == 0 for name in acknowledged)
        # beside the receipt, a kill may leave one write (of two events) that was not yet told
        assert 1 <= n_events - len(acknowledged) - n_pairs <= 1 + 2 * N_KILLS
        assert register.append(register.events()[0]).id == "receipt"


def test_killed_while_the_register_is_being_made(tmp_path):
    """A register that was half made is made by whoever opens it next."""
    for kill in range(4):
        place = tmp_path / f"lots{kill}.sqlite"
        with write(place, "w", 1) as process:
            deadline = time.monotonic() + 20
            while not place.exists() and time.monotonic() < deadline:
                time.sleep(0.0005)
            time.sleep(0.0004 * kill)
            process.send_signal(signal.SIGKILL)
            told = process.stdout.read().split()
        with open_register(place) as register:
            assert register.verify() is None
            assert set(told) - {"ready"} <= {event.id for event in register.events()}


def test_four_processes_at_once(location):
    """Four processes with 200 writes each, starting on an empty place: none refused, none lost."""
    processes = [write(location, f"w{i}") for i in range(N_PROCESSES)]
    told = [process.communicate(timeout=120) for process in processes]
    assert [(p.returncode, err) for p, (_, err) in zip(processes, told, strict=True)] == [
        (0, "")
    ] * N_PROCESSES
    acknowledged = [name for out, _ in told for name in out.split()[1:]]
    assert len(acknowledged) == N_PROCESSES * N_WRITES
    with open_register(location, create=False) as register:
        n_events = check_whole(register, acknowledged)
        assert n_events == 1 + N_PROCESSES * (N_WRITES + N_WRITES // 5)
        (lot,) = register.lots()
        used = N_PROCESSES * (sum(range(N_WRITES + 1)) + sum(range(0, N_WRITES + 1, 5))) / 1e6
        assert lot.remaining_mass == pytest.approx(1.0 - used, abs=1e-9)


def test_a_reader_is_not_in_the_way_of_a_writer(filed, bottle):
    """Listing while somebody writes neither fails nor makes the writer fail."""
    with write(filed.name, "w", 60) as process:
        assert process.stdout.readline() == "ready\n"
        n_listings = 0
        while process.poll() is None:
            assert len(filed.lots()) == 1
            n_listings += 1
        assert (process.returncode, process.stderr.read()) == (0, "")
    assert n_listings > 0
    check_whole(filed, [])


def test_sqlite_settings_are_those_that_keep_what_is_acknowledged(filed, bottle):
    """No write-ahead log, full synchronisation, and triggers that see a replacement."""
    filed.append(bottle.received())
    with filed._engine.connect() as connection:
        for pragma, value in (("journal_mode", "delete"), ("synchronous", 2)):
            assert connection.exec_driver_sql(f"PRAGMA {pragma}").scalar_one() == value
        assert connection.exec_driver_sql("PRAGMA recursive_triggers").scalar_one() == 1
    assert [p.name for p in Path(filed.name).parent.iterdir()] == ["lots.sqlite"]


def test_a_write_ahead_log_that_something_else_switched_on_is_left(filed, bottle, tmp_path):
    """The register stays one file that can be copied."""
    filed.append(bottle.received())
    other = sqlite3.connect(filed.name)
    assert other.execute("PRAGMA journal_mode = WAL").fetchone() == ("wal",)
    other.close()
    with open_register(filed.name) as register:
        assert len(register.lots()) == 1
        mode = sqlite3.connect(filed.name)
        assert mode.execute("PRAGMA journal_mode").fetchone() == ("delete",)
        mode.close()


def test_postgresql_flushes_even_where_the_server_does_not_ask_for_it(schema, bottle):
    """A server set to answer before it has written is told to write first."""
    from sqlalchemy import make_url

    from digestplan.lots.register.engine import append_to

    options = make_url(schema).query["options"] + " -csynchronous_commit=off"
    lazy = make_url(schema).update_query_dict({"options": options})
    with open_register(lazy.render_as_string(hide_password=False)) as register:
        ask = "SELECT current_setting('synchronous_commit')"
        with register._engine.connect() as connection:
            assert connection.exec_driver_sql(ask).scalar_one() == "off"
        told = append_to(register._engine, lambda c: c.exec_driver_sql(ask).scalar_one())
        assert told == "on"
