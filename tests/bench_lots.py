"""How fast the lot register answers: ``python -m tests.bench_lots``.

A register of 500 invented lots with 40 entries each. Nothing here is asserted: absolute times
depend on the machine.
"""

import contextlib
import io
import subprocess
import sys
import tempfile
import time
from datetime import datetime, timedelta
from pathlib import Path

from digestplan.cli.main import main as command
from digestplan.lots.register import open_register
from digestplan.lots.register.events import Assayed, Moved, Received, Thawed, Transported, Used
from tests.bench import DEMO, best_of, line

N_LOTS, N_EVENTS = 500, 40
START = datetime(2024, 1, 8, 9)


def events_of(number):
    """Forty entries of one lot: receipt, moves, thaws, uses, two assays."""
    lot = f"CH-{number:04d}"
    yield Received(
        lot=lot,
        at=START,
        enzyme="clostridial-collagenase",
        form="dry",
        temperature=253.15,
        temperature_sd=2.0,
        place=f"freezer {number % 4}",
        label_activity="280 CDU/mg",
        mass=0.5,
    )
    yield Transported(
        lot=lot, at=START - timedelta(hours=40), temperature=295.15, temperature_sd=3.0, hours=40
    )
    for n in range(2, N_EVENTS):
        at = START + timedelta(days=18 * n, hours=number % 7)
        if n % 10 == 3:
            place = "fridge" if n % 20 == 3 else "freezer"
            cold = 277.15 if place == "fridge" else 253.15
            yield Moved(lot=lot, at=at, temperature=cold, temperature_sd=1.5, place=place)
        elif n % 10 == 7:
            yield Thawed(lot=lot, at=at)
        elif n in {20, 35}:
            left = 0.95 - 0.005 * n
            yield Assayed(lot=lot, at=at, fraction=left, standard_error=0.04)
        else:
            yield Used(lot=lot, at=at, mass=0.006)


def fill(path):
    """A register with all the lots."""
    with open_register(path) as register:
        register.append_many([e for number in range(N_LOTS) for e in events_of(number)])


def quiet(*words):
    """A command, its output dropped."""
    with contextlib.redirect_stdout(io.StringIO()):
        status = command(list(words))
    assert status == 0, words


def cold(*words, repeats=3):
    """Shortest of several fresh processes, in milliseconds."""
    return best_of(
        lambda: subprocess.run(
            [sys.executable, "-m", "digestplan", *words], check=True, capture_output=True
        ),
        repeats,
    )


def main():
    """Print the table."""
    line("what", "measured", "goal")
    with tempfile.TemporaryDirectory() as folder:
        path = str(Path(folder) / "lots.sqlite")
        started = time.perf_counter()
        fill(path)
        taken = time.perf_counter() - started
        line(f"filling: {N_LOTS} lots x {N_EVENTS} entries, one transaction", f"{taken:.1f} s", "")
        where = ("--register", path, "--at", "2026-03-12")
        check = ("lot", "check", "CH-0250", *where)
        quiet(*check)  # imports
        line("lot check, history and two assays", f"{best_of(lambda: quiet(*check), 5):.0f} ms", "")
        planned = (*check, "--plan", str(DEMO))
        quiet(*planned)
        ms = best_of(lambda: quiet(*planned), 5)
        line("lot check against the overnight plan", f"{ms:.0f} ms", "< 500 ms")
        with open_register(path) as register:
            ms = best_of(register.lots, 5)
        line(f"listing {N_LOTS} lots", f"{ms:.0f} ms", "< 100 ms")
        shown = best_of(lambda: quiet("lot", "list", *where), 5)
        line("lot list, printed", f"{shown:.0f} ms", "")
        imports = "numpy, scipy.special, sqlalchemy, pint"
        bare = best_of(
            lambda: subprocess.run([sys.executable, "-c", f"import {imports}"], check=True), 3
        )
        line(f"importing {imports}", f"{bare:.0f} ms", "")
        line("lot check against the plan, from a cold start", f"{cold(*planned):.0f} ms", "")
        line("lot list, from a cold start", f"{cold('lot', 'list', *where):.0f} ms", "")


if __name__ == "__main__":
    main()
