"""Registers go out as JSON lines and come in again, whole or not at all; backups are registers."""

import json
from dataclasses import replace
from datetime import datetime
from pathlib import Path

import pytest

from digestplan.lots.register import RegisterError, open_register
from digestplan.lots.register.transfer import Imported, backup, export_lines, export_to, import_from


def story(bottle):
    """Two lots, one with a correction."""
    use = bottle.used(4, mass=0.006, note="Ω ± ü")
    return [
        bottle.received(conversions=("1 CDU = 0.011 FALGPA_U",)),
        use,
        bottle.corrected(5, corrects=use.id, replacement=bottle.used(4, mass=0.060)),
        bottle.received("T-1", mass=None),
        bottle.assayed(6, "T-1", fraction=0.8, standard_error=0.05),
    ]


@pytest.fixture
def exported(register, bottle, tmp_path):
    """An export of a register with a story in it."""
    register.append_many(story(bottle))
    assert export_to(register, tmp_path / "out.jsonl") == 5
    return tmp_path / "out.jsonl"


def test_an_export_read_into_an_empty_register_is_the_same_register(register, exported):
    """Every event comes in as it went out, the time of its recording included."""
    with open_register(":memory:") as other:
        assert import_from(other, exported) == Imported(5, 0)
        assert other.events() == register.events()
        assert other.lots() == register.lots()
        assert other.verify() is None
        assert list(export_lines(other)) == exported.read_text("utf-8").splitlines()


def test_importing_again_adds_nothing(register, exported):
    """An import can be repeated, in part or whole, and into where it came from."""
    assert import_from(register, exported) == Imported(0, 5)
    with open_register(":memory:") as other:
        part = exported.with_name("part.jsonl")
        part.write_bytes(b"".join(exported.read_bytes().splitlines(keepends=True)[:2]))
        assert import_from(other, part) == Imported(2, 0)
        assert import_from(other, exported) == Imported(3, 2)
        assert import_from(other, exported) == Imported(0, 5)


def test_two_registers_can_be_joined(register, exported, bottle, tmp_path):
    """What two people wrote apart comes together, whoever imports first."""
    with open_register(":memory:") as other:
        import_from(other, exported)
        other.append(bottle.used(7, mass=0.001))
        export_to(other, tmp_path / "theirs.jsonl")
        register.append(bottle.used(8, mass=0.002))
        import_from(register, tmp_path / "theirs.jsonl")
        export_to(register, tmp_path / "ours.jsonl")
        import_from(other, tmp_path / "ours.jsonl")
        assert other.lots() == register.lots()
        assert register.lots()[0].remaining_mass == pytest.approx(0.037)


def test_a_conflict_is_told_with_its_line_and_nothing_comes_in(register, exported, bottle):
    """The same id with another content, and the same lot received twice, are both conflicts."""
    use = register.events()[1]
    with open_register(":memory:") as other:
        other.append(bottle.received("T-2"))
        other.append(replace(use, lot="T-2", mass=0.007))
        other.append(bottle.received("T-1"))
        before = other.events()
        with pytest.raises(RegisterError) as refused:
            import_from(other, exported)
        assert [(p.file, p.line) for p in refused.value.problems][:1] == [(str(exported), 2)]
        assert "ids are used once" in str(refused.value)
        assert "a name of its own" in str(refused.value)
        assert other.events() == before


def spoil(line, **change):
    return json.dumps({**json.loads(line), **change})


@pytest.mark.parametrize(
    ("spoilt", "words"),
    [
        (lambda line: line[:-5], "not a line of JSON"),
        ("null", "not an event"),
        ("[]", "not an event"),
        ("{}", "not an event"),
        ("[" * 100_000, "not a line of JSON"),
        ("x" * 1_100_000, "longer than any event"),
        (lambda line: spoil(line, digestplan=2), "newer version"),
        (lambda line: spoil(line, lot=""), "name of a lot"),
        (lambda line: spoil(line, mass_g=-1), "mass above zero"),
        (lambda line: line.replace("0.006", "NaN"), "not a line of JSON"),
        (lambda line: line.replace("0.006", "1e999"), "mass above zero"),
        (lambda line: spoil(line, lot="CH-2370"), "did you mean CH-2307"),
        ("lot,mass", "not a line of JSON"),
    ],
)
def test_one_bad_line_keeps_all_of_them_out(register, exported, spoilt, words):
    """The message names file and line; the register is as it was."""
    lines = exported.read_text("utf-8").splitlines()
    lines[1] = spoilt(lines[1]) if callable(spoilt) else spoilt
    exported.write_text("\n".join(lines), encoding="utf-8")
    with open_register(":memory:") as other:
        with pytest.raises(RegisterError, match=words) as refused:
            import_from(other, exported)
        assert refused.value.problems[0].line == 2
        assert str(refused.value).startswith(f"{exported}:2: ")
        assert other.events() == ()


def test_bytes_that_are_no_text_are_told(register, exported):
    """A file in another encoding, or no text at all, is refused by its line."""
    exported.write_bytes(exported.read_bytes().replace("ü".encode(), b"\xfc"))
    with open_register(":memory:") as other, pytest.raises(RegisterError, match="UTF-8"):
        import_from(other, exported)


def test_blank_lines_and_a_mark_at_the_start_are_passed_over(exported):
    """What an editor leaves behind does no harm."""
    exported.write_bytes(b"\xef\xbb\xbf" + exported.read_bytes().replace(b"\n", b"\r\n\r\n"))
    with open_register(":memory:") as other:
        assert import_from(other, exported) == Imported(5, 0)


def test_a_file_that_is_not_there_is_told(register, tmp_path):
    """A wrong name gives a message."""
    for path in (tmp_path / "nothing.jsonl", tmp_path):
        with pytest.raises(RegisterError, match="cannot be read"):
            import_from(register, path)


def test_a_backup_holds_what_the_register_holds(register, bottle, tmp_path):
    """From SQLite it is a register to open; from a server it is an export to import."""
    register.append_many(story(bottle))
    target = tmp_path / "backup"
    assert backup(register, target) == 5
    if register.url.get_backend_name() == "sqlite":
        with open_register(target, create=False) as copy:
            assert copy.head() == register.head()
            assert copy.events() == register.events()
            assert copy.append(bottle.opened(9)) in copy.events()
    else:
        with open_register(":memory:") as copy:
            import_from(copy, target)
            assert copy.events() == register.events()


def test_nothing_is_ever_written_over(register, bottle, tmp_path):
    """A backup or an export onto a file that is there is refused, and leaves no rest."""
    register.append_many(story(bottle))
    target = tmp_path / "target"
    target.write_text("precious", encoding="utf-8")
    for write in (backup, export_to):
        with pytest.raises(RegisterError, match="a file of this name already"):
            write(register, target)
    assert target.read_text("utf-8") == "precious"
    assert {p.name for p in tmp_path.iterdir()} <= {"target", "lots.sqlite"}


def test_a_backup_into_a_missing_folder_is_told(register, tmp_path):
    """A wrong path gives a message, and makes nothing."""
    for write in (backup, export_to):
        with pytest.raises(RegisterError, match="cannot be written"):
            write(register, tmp_path / "typo" / "backup")


def test_a_disk_without_links_takes_a_backup_all_the_same(filed, bottle, tmp_path, monkeypatch):
    """Memory sticks and shares know no second name for a file."""
    filed.append(bottle.received())

    def refuse(*_paths):
        raise PermissionError(1, "Operation not permitted")

    monkeypatch.setattr("os.link", refuse)
    assert backup(filed, tmp_path / "copy") == 1
    assert {p.name for p in tmp_path.iterdir()} == {"copy", "lots.sqlite"}
    with pytest.raises(RegisterError, match="already"):
        backup(filed, tmp_path / "copy")


def test_an_export_is_one_line_an_event_with_units_in_its_keys(register, exported):
    """The format is public: plain numbers in the unit that the key names."""
    line = json.loads(exported.read_text("utf-8").splitlines()[1])
    recorded = datetime.fromisoformat(line.pop("recorded_at"))
    assert recorded.utcoffset().total_seconds() == 0
    line.pop("id")
    assert line == {
        "digestplan": 1,
        "kind": "used",
        "lot": "CH-2307",
        "at": "2026-03-04T12:00:00",
        "who": "",
        "mass_g": 0.006,
        "note": "Ω ± ü",
    }


def test_a_big_file_comes_in_as_one(register, bottle, tmp_path):
    """Thousands of events are one transaction, and are not looked up one by one."""
    uses = [bottle.used(4, mass=1e-6) for _ in range(3000)]
    register.append_many([bottle.received(), *uses])
    export_to(register, tmp_path / "big.jsonl")
    with open_register(Path(tmp_path / "other.sqlite")) as other:
        assert import_from(other, tmp_path / "big.jsonl") == Imported(3001, 0)
        assert import_from(other, tmp_path / "big.jsonl") == Imported(0, 3001)
        assert other.lots() == register.lots()
