"""Read-only, full, locked, damaged: each told in words, and nothing harmed."""

import os
import shutil
import sqlite3
import subprocess
import tempfile
from contextlib import contextmanager
from pathlib import Path

import pytest

from digestplan.lots.register import RegisterError, open_register
from digestplan.lots.register.transfer import backup, export_to

NOBODY = 65534


@contextmanager
def nobody():
    """Be a user without permissions, where the tests are run by root."""
    if os.geteuid() != 0:
        yield
        return
    os.seteuid(NOBODY)
    try:
        yield
    finally:
        os.seteuid(0)


@pytest.fixture
def open_folder():
    """A folder that every user can reach."""
    folder = Path(tempfile.mkdtemp(prefix="register-"))
    folder.chmod(0o755)
    yield folder
    folder.chmod(0o755)
    shutil.rmtree(folder)


def test_a_read_only_folder(open_folder, bottle):
    """A register there can be read; writing to it is refused, and changes nothing."""
    path = open_folder / "lots.sqlite"
    with open_register(path) as register:
        register.append(bottle.received())
    path.chmod(0o444)
    open_folder.chmod(0o555)
    before = path.read_bytes()
    with nobody(), open_register(path) as register:
        assert len(register.lots()) == 1
        with pytest.raises(RegisterError, match="read-only"):
            register.append(bottle.opened(3))
        assert register.verify() is None
    assert path.read_bytes() == before
    with nobody(), pytest.raises(RegisterError, match=r"permitted|read-only"):
        open_register(open_folder / "new.sqlite")
    assert os.listdir(open_folder) == ["lots.sqlite"]


def test_a_file_in_a_folder_without_room_for_a_journal(open_folder, bottle):
    """A file that may be written, in a folder that may not, is told too."""
    path = open_folder / "lots.sqlite"
    with open_register(path) as register:
        register.append(bottle.received())
    path.chmod(0o666)
    open_folder.chmod(0o555)
    with nobody(), open_register(path) as register:
        with pytest.raises(RegisterError, match="its folder"):
            register.append(bottle.opened(3))
        assert len(register.events()) == 1


def test_a_file_that_may_not_be_read(open_folder):
    """A register of somebody else's is not taken for a foreign file."""
    path = open_folder / "lots.sqlite"
    open_register(path).close()
    path.chmod(0o000)
    with nobody(), pytest.raises(RegisterError, match="no permission"):
        open_register(path)


@pytest.fixture
def small_disk(tmp_path):
    """A disk of 256 kB; skips where none can be mounted."""
    folder = tmp_path / "disk"
    folder.mkdir()
    options = ["mount", "-t", "tmpfs", "-o", "size=256k", "digestplan-test", str(folder)]
    can_mount = shutil.which("mount") is not None
    if not can_mount or subprocess.run(options, capture_output=True, check=False).returncode:
        pytest.skip("a small disk can be mounted by root alone")
    yield folder
    subprocess.run(["umount", str(folder)], check=True)


def fill(register, bottle):
    """Append until the register refuses; return what it acknowledged, and the refusal."""
    kept = [register.append(bottle.received())]
    for number in range(1000):
        try:
            kept.append(register.append(bottle.used(4, mass=1e-6, note=f"{number:04} " * 700)))
        except RegisterError as refused:
            return kept, refused
    pytest.fail("the disk never got full")
    return None


def test_a_full_disk(small_disk, bottle, tmp_path):
    """The refusal is told, all that was acknowledged stays, and with room it goes on."""
    ballast = small_disk / "ballast"
    ballast.write_bytes(b"x" * 65536)
    with open_register(small_disk / "lots.sqlite") as register:
        kept, refused = fill(register, bottle)
        assert "disk is full" in str(refused)
        assert list(register.events()) == kept
        assert register.verify() is None
        with pytest.raises(RegisterError):
            backup(register, small_disk / "copy.sqlite")
        with pytest.raises(RegisterError):
            export_to(register, small_disk / "export.jsonl")
        assert {p.name for p in small_disk.iterdir()} == {"ballast", "lots.sqlite"}
        assert backup(register, tmp_path / "copy.sqlite") == len(kept)
        ballast.unlink()
        kept.append(register.append(bottle.opened(3)))
        assert list(register.events()) == kept


def test_no_room_for_a_new_register(small_disk, bottle):
    """A register that cannot be started leaves nothing that could not be started later."""
    ballast = small_disk / "ballast"
    ballast.write_bytes(b"x" * (256 * 1024 - 8192))
    with pytest.raises(RegisterError, match="disk is full"):
        open_register(small_disk / "lots.sqlite")
    ballast.unlink()
    with open_register(small_disk / "lots.sqlite") as register:
        assert register.append(bottle.received()) in register.events()


def test_no_room_left_in_the_database(filed, bottle):
    """The same refusal without a small disk: the file may not grow any more."""
    from sqlalchemy import event

    filed.append(bottle.received("first"))
    connect = event.listens_for(filed._engine, "connect")
    connect(lambda connection, _: connection.execute("PRAGMA max_page_count = 40"))
    kept, refused = fill(filed, bottle)
    assert "disk is full" in str(refused)
    assert list(filed.events())[1:] == kept
    assert filed.verify() is None


def test_a_locked_file(filed, bottle):
    """Whoever cannot have the file within the time is told, and can try again."""
    filed.append(bottle.received())
    other = sqlite3.connect(filed.name, isolation_level=None)
    other.execute("BEGIN EXCLUSIVE")
    with pytest.raises(RegisterError, match="locked"):
        open_register(filed.name, timeout=0.05)
    other.execute("ROLLBACK")
    with open_register(filed.name, timeout=0.05) as register:
        other.execute("BEGIN EXCLUSIVE")
        for attempt in (
            register.lots,
            lambda: register.append(bottle.opened(3)),
            lambda: backup(register, f"{filed.name}.copy"),
        ):
            with pytest.raises(RegisterError, match="locked"):
                attempt()
        other.execute("ROLLBACK")
        register.append(bottle.opened(3))
    other.close()
    assert len(filed.events()) == 2
    assert not Path(f"{filed.name}.copy").exists()


def test_a_reader_who_does_not_let_go(filed, bottle):
    """A write that could not be finished because of a reader is not half there."""
    filed.append(bottle.received())
    other = sqlite3.connect(filed.name, isolation_level=None)
    other.execute("BEGIN")
    other.execute("SELECT * FROM digestplan_event").fetchall()
    with open_register(filed.name, timeout=0.05) as register:
        with pytest.raises(RegisterError, match="locked"):
            register.append(bottle.opened(3))
        other.execute("COMMIT")
        assert len(register.events()) == 1
        register.append(bottle.opened(3))
        assert len(register.events()) == 2
    other.close()


def test_a_server_on_which_somebody_writes_too_long(schema, bottle):
    """The wait for another writer ends, with words."""
    from digestplan.lots.register.engine import append_to

    with open_register(schema) as slow, open_register(schema, timeout=0.05) as register:
        register.append(bottle.received())

        def meanwhile(_connection):
            with pytest.raises(RegisterError, match="somebody else has been writing"):
                register.append(bottle.opened(3))

        append_to(slow._engine, meanwhile)
        register.append(bottle.opened(3))
        assert len(register.events()) == 2


def test_a_server_that_only_reads(schema, bottle):
    """A database that takes no writes is told as such."""
    from sqlalchemy import make_url

    with open_register(schema) as register:
        register.append(bottle.received())
    options = make_url(schema).query["options"] + " -cdefault_transaction_read_only=on"
    standby = make_url(schema).update_query_dict({"options": options})
    with open_register(standby.render_as_string(hide_password=False)) as register:
        assert len(register.lots()) == 1
        with pytest.raises(RegisterError, match="only be read"):
            register.append(bottle.opened(3))


def test_a_damaged_file(filed, bottle):
    """A page overwritten on the disk is told, by reading or by verifying."""
    filed.append_many(
        [bottle.received(), *(bottle.used(4, mass=1e-6, note="x" * 900) for _ in range(40))]
    )
    path = Path(filed.name)
    whole = bytearray(path.read_bytes())
    page = 4096
    for number in range(2, len(whole) // page):
        whole[number * page : number * page + 100] = b"\xff" * 100
    path.write_bytes(whole)
    with pytest.raises(RegisterError, match=r"damaged|not as it was written"):
        filed.events()
