"""The session: edits by place, undo, files, and work kept aside; no screen needed."""

import json
import os
import tomllib

import pytest

from digestplan.app.recovery import Recovery
from digestplan.app.session import Session
from digestplan.problems import InputError
from tests.app.conftest import DEMO

PLAN = """\
# kept
digestplan = 1
title = "t"   # this too

[sample]
wet_mass = "180 mg"

# the first
[[steps]]
do = "digest"
charge = "8 mg"   # weighed
temperature = [
  { at = "37 degC", for = "5 h" },   # warm
]

# the second
[[steps]]
do = "hold"
temperature = "4 degC"
for = "9 h"
"""


def test_an_edit_changes_one_line_and_keeps_every_comment():
    """Only the edited value differs; comments and layout stay."""
    session = Session(PLAN)

    session.edit("steps[0].charge", "10 mg")

    assert session.text == PLAN.replace('"8 mg"', '"10 mg"')
    assert session.tables["steps"][0]["charge"] == "10 mg"
    assert session.dirty


def test_an_edit_that_fits_nowhere_changes_nothing():
    """A refused edit leaves text and history alone."""
    session = Session(PLAN)

    with pytest.raises(InputError):
        session.edit("steps[7].charge", "10 mg")

    assert session.text == PLAN
    assert not session.can_undo


def test_typing_in_one_field_is_undone_together():
    """Edits of one place are one step of undo until somebody looks elsewhere."""
    session = Session(PLAN)
    for typed in ("1", "12", "12 mg"):
        session.edit("steps[0].charge", typed)
    session.pause()
    session.edit("steps[0].charge", "13 mg")

    assert session.undo()
    assert session.tables["steps"][0]["charge"] == "12 mg"
    assert session.undo()
    assert session.text == PLAN
    assert not session.undo()
    assert session.redo()
    assert session.redo()
    assert session.tables["steps"][0]["charge"] == "13 mg"
    assert not session.redo()


def test_an_edit_after_undo_forgets_what_was_taken_back():
    """Redo never brings back a text that a later edit has overtaken."""
    session = Session(PLAN)
    session.edit("title", "a")
    session.undo()
    session.edit("title", "b")

    assert not session.can_redo


def test_steps_move_with_their_comments():
    """A moved step takes the comments above it along."""
    session = Session(PLAN)

    assert session.move_step(1, 0) == 0

    assert [step["do"] for step in session.steps] == ["hold", "digest"]
    assert session.text.index("# the second") < session.text.index("# the first")
    assert "# weighed" in session.text
    assert "# kept" in session.text
    session.undo()
    assert session.text == PLAN


@pytest.mark.parametrize("kind", ["demineralise", "rinse", "digest", "stop", "hold"])
def test_every_kind_of_step_can_be_added_and_taken_out(kind):
    """A fresh step stands where it was put, and goes again."""
    session = Session(PLAN)

    assert session.add_step(kind, 0) == 1
    assert [step["do"] for step in session.steps] == ["digest", kind, "hold"]
    session.remove_step(1)
    assert [step["do"] for step in session.steps] == ["digest", "hold"]
    assert tomllib.loads(session.text) == tomllib.loads(PLAN)


def test_a_copy_stands_behind_its_step():
    """Duplicating a step leaves the others as they are."""
    session = Session(PLAN)

    assert session.duplicate_step(0) == 1

    assert [step["do"] for step in session.steps] == ["digest", "digest", "hold"]
    assert session.steps[0] == session.steps[1]


def test_steps_written_in_one_line_can_be_moved():
    """Steps that are no [[steps]] blocks are rewritten as such and hold the same."""
    text = 'digestplan = 1\nsteps = [{ do = "hold", for = "1 h" }, { do = "stop", how = "heat" }]\n'
    session = Session(text)

    session.move_step(0, 1)

    assert [step["do"] for step in session.steps] == ["stop", "hold"]


def test_the_last_step_can_go_and_come_back():
    """A plan without steps takes a first one."""
    session = Session(PLAN)
    session.remove_step(1)
    session.remove_step(0)
    assert session.steps == []

    session.add_step("digest", -1)

    assert [step["do"] for step in session.steps] == ["digest"]


def test_a_programme_is_written_as_a_list():
    """A single temperature becomes a list and its `for` goes."""
    session = Session(PLAN)

    session.set_programme(1, [{"at": "4 degC", "for": "9 h"}, {"at": '"[/x]\\', "for": "1 h"}])

    assert session.steps[1]["temperature"][1]["at"] == '"[/x]\\'
    assert "for" not in session.steps[1]


def test_saving_writes_what_is_shown(tendon):
    """The file holds the session's text, and nothing else has changed."""
    session = Session.opened(tendon)
    session.edit("steps[0].charge", "10 mg")

    session.save()

    assert tendon.read_text("utf-8") == session.text
    assert not session.dirty
    assert session.state_on_disk() == "same"


def test_a_file_changed_by_somebody_else_is_not_written_over(tendon):
    """Saving is refused until it is asked for; the other's text is noticed."""
    session = Session.opened(tendon)
    session.edit("title", "mine")
    tendon.write_text("title = 'theirs'\n", "utf-8")

    assert session.state_on_disk() == "changed"
    with pytest.raises(InputError, match="has changed"):
        session.save()
    assert tendon.read_text("utf-8") == "title = 'theirs'\n"
    session.save(overwrite=True)
    assert 'title = "mine"' in tendon.read_text("utf-8")


def test_a_new_name_that_is_taken_is_not_written_over(tendon, tmp_path):
    """Saving under a name that exists is refused."""
    other = tmp_path / "other.toml"
    other.write_text("x", "utf-8")

    with pytest.raises(InputError, match="there already"):
        Session.opened(tendon).save(other)

    assert other.read_text("utf-8") == "x"


def test_a_vanished_file_is_noticed_and_written_anew(tendon):
    """Where the file has gone, saving makes it again."""
    session = Session.opened(tendon)
    tendon.unlink()

    assert session.state_on_disk() == "gone"
    session.save()
    assert tendon.is_file()


def test_a_file_that_cannot_be_written_leaves_the_work(tendon, tmp_path):
    """A folder that is not there is told, and the work stays."""
    session = Session.opened(tendon)
    session.edit("title", "mine")

    with pytest.raises(InputError, match="cannot be written"):
        session.save(tmp_path / "nowhere" / "plan.toml")

    assert session.dirty


def test_reading_the_file_again_can_be_undone(tendon):
    """After a reload undo brings the own text back."""
    session = Session.opened(tendon)
    session.edit("title", "mine")
    mine = session.text

    session.reload()
    assert not session.dirty
    session.undo()
    assert session.text == mine


def test_unsaved_work_is_kept_and_found_after_a_crash(tendon, tmp_path):
    """What a process that died had kept is found by the file's name."""
    session, recovery = Session.opened(tendon), Recovery(tmp_path / "kept")
    session.edit("title", "mine")
    recovery.keep(session)
    (file,) = (tmp_path / "kept").iterdir()
    assert file.stat().st_mode & 0o077 == 0
    assert recovery.found(tendon) == []  # its own process is still alive

    record = json.loads(file.read_text("utf-8"))
    file.write_text(json.dumps(record | {"process": 2**22 + 1}), "utf-8")
    (kept,) = recovery.found(tendon)

    assert kept.text == session.text
    assert kept.path == tendon


def test_kept_work_goes_when_it_is_saved(tendon, tmp_path):
    """Nothing is left to be offered once the file holds it."""
    session, recovery = Session.opened(tendon), Recovery(tmp_path / "kept")
    session.edit("title", "mine")
    recovery.keep(session)
    session.save()

    recovery.keep(session)

    assert list((tmp_path / "kept").iterdir()) == []


def test_kept_files_that_are_damaged_are_passed_over(tmp_path):
    """A broken record is no reason to stop."""
    recovery = Recovery(tmp_path)
    (tmp_path / "a.json").write_text("{", "utf-8")
    (tmp_path / "b.json").write_text('{"process": 1}', "utf-8")

    assert recovery.found() == []


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="root may write all")
def test_a_folder_that_forbids_keeping_is_told(tmp_path, tendon):
    """Work that cannot be kept aside is said to be so."""
    tmp_path.chmod(0o500)
    session = Session.opened(DEMO / "porpoise-tendon-overnight.toml")
    session.edit("title", "mine")

    with pytest.raises(InputError):
        Recovery(tmp_path / "kept").keep(session)


@pytest.mark.parametrize("path", sorted(DEMO.glob("*.toml")), ids=lambda p: p.stem)
def test_steps_of_the_demo_plans_survive_being_moved_about(path):
    """Every step moved away and back leaves the same plan, comments included."""
    text = path.read_text("utf-8")
    session = Session(text)
    for index in range(len(session.steps)):
        session.duplicate_step(index)
        session.remove_step(index)
    for index in range(len(session.steps)):
        session.move_step(index, 0)
        session.move_step(0, index)

    assert session.tables == tomllib.loads(text)
    comments = [line for line in text.splitlines() if line.startswith("#")]
    assert [line for line in session.text.splitlines() if line.startswith("#")] == comments


def test_a_value_typed_anew_from_nothing_keeps_its_place_and_comment():
    """Emptying a field on the way to another value does not move its key."""
    session = Session(PLAN)
    for typed in ("8 m", "8", None, "9", "9 mg"):
        session.edit("steps[0].charge", typed)

    assert session.text == PLAN.replace('"8 mg"', '"9 mg"')


def test_a_text_that_is_no_toml_refuses_edits_of_steps_in_words():
    """Steps of a broken text are left alone, and that is said; an empty text is readable."""
    session = Session('8"8.=7 ')

    assert not session.readable
    assert Session("").readable
    for change in (lambda: session.add_step("hold", 0), lambda: session.edit("title", "x")):
        with pytest.raises(InputError):
            change()
    assert session.text == '8"8.=7 '
