"""Registers to test on: an SQLite file, one in memory, and PostgreSQL where there is a server.

``DIGESTPLAN_TEST_POSTGRES`` holds the URL of a database in which schemas may be made and dropped.
"""

import os
import uuid
from datetime import datetime

import pytest

VARIABLE = "DIGESTPLAN_TEST_POSTGRES"


class Bottle:
    """Events of one invented lot, with what a test does not care about filled in."""

    def __init__(self, events):
        self.events = events

    def received(self, lot="CH-2307", at=datetime(2026, 3, 1, 9), **given):
        known = {"enzyme": "clostridial-collagenase", "form": "dry", "temperature": 253.15}
        return self.events.Received(lot=lot, at=at, **{**known, "mass": 0.1, **given})

    def __getattr__(self, kind):
        made = getattr(self.events, kind.capitalize())

        def make(day, lot="CH-2307", **given):
            at = day if isinstance(day, datetime) else datetime(2026, 3, day, 12)
            return made(lot=lot, at=at, **given)

        return make


@pytest.fixture(scope="session")
def bottle():
    """Maker of events of an invented lot."""
    from digestplan.lots.register import events

    return Bottle(events)


@pytest.fixture(scope="session")
def postgres():
    """URL of the PostgreSQL database for tests; skips without one, and fails in CI."""
    url = os.environ.get(VARIABLE)
    if url:
        return url
    if os.environ.get("CI"):
        pytest.fail(f"{VARIABLE} is not set: in CI the register is tested on PostgreSQL")
    pytest.skip(f"{VARIABLE} is not set: no PostgreSQL to test on")
    return None


@pytest.fixture
def schema(postgres):
    """URL of an empty schema in the PostgreSQL database, dropped afterwards."""
    import psycopg
    from sqlalchemy import make_url

    url = make_url(postgres).set(drivername="postgresql")
    name = f"test_{uuid.uuid4().hex}"
    with psycopg.connect(url.render_as_string(hide_password=False), autocommit=True) as admin:
        admin.execute(f"CREATE SCHEMA {name}")
        own = url.update_query_dict({"options": f"-csearch_path={name}"})
        yield own.render_as_string(hide_password=False)
        admin.execute(f"DROP SCHEMA {name} CASCADE")


@pytest.fixture(params=["file", "postgresql"])
def location(request, tmp_path):
    """Where a register can be opened again: a path that is not there yet, or an empty schema."""
    if request.param == "file":
        return str(tmp_path / "lots.sqlite")
    return request.getfixturevalue("schema")


@pytest.fixture(params=["file", "memory", "postgresql"])
def register(request, tmp_path):
    """An open, empty register of every kind that is tested."""
    from digestplan.lots.register import open_register

    if request.param == "postgresql":
        place = request.getfixturevalue("schema")
    else:
        place = tmp_path / "lots.sqlite" if request.param == "file" else ":memory:"
    with open_register(place) as opened:
        yield opened


@pytest.fixture
def filed(tmp_path):
    """An open, empty register in an SQLite file."""
    from digestplan.lots.register import open_register

    with open_register(tmp_path / "lots.sqlite") as opened:
        yield opened
