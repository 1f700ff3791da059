"""Saving a plan: the edits and nothing else."""

import os
import re
import stat
import tomllib
from difflib import unified_diff
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.plan.read import read_plan_text
from digestplan.plan.write import edited_text, save_plan
from digestplan.problems import InputError

EXAMPLE = Path(__file__).with_name("example.toml").read_text(encoding="utf-8")


def changed_lines(before, after):
    """Lines that went and lines that came."""
    diff = list(unified_diff(before.splitlines(), after.splitlines(), n=0, lineterm=""))[2:]
    gone = [line[1:] for line in diff if line.startswith("-")]
    come = [line[1:] for line in diff if line.startswith("+")]
    return gone, come


@pytest.mark.parametrize(
    ("place", "written", "line"),
    [
        ("sample.wet_mass", "200 mg", 'wet_mass = "200 mg"'),
        ("sample.target_extent", "0.80", "target_extent = 0.80 "),
        ("sample.target_extent", 0.8, "target_extent = 0.8 "),
        ("sample.target_extent", "0.80 ± 0.02", 'target_extent = "0.80 ± 0.02" '),
        ("sample.known_run.extent", "0.95", "extent = 0.95"),
        ("start", "2026-04-01T09:00", "start = 2026-04-01T09:00:00"),
        ("start", "2026-04-01T09:00:30", "start = 2026-04-01T09:00:30"),
        ("visits[0]", "2026-03-13T09:00/10:00", 'visits = ["2026-03-13T09:00/10:00"] # when'),
        ("steps[0].temperature[2].for", "6 h", '  { at = "37 degC", for = "6 h" },'),
        ("steps[0].additions[0].charge", "3 mg", 'additions = [ { after = "3 h", charge = "3 mg"'),
        ("title", "[1, 2]", 'title = "[1, 2]"'),
        ("title", 'say "no" \\ [/x]', 'title = "say \\"no\\" \\\\ [/x]"'),
    ],
)
def test_edit_changes_one_line(place, written, line):
    """An edited value changes its own line, and the comment behind it stays."""
    text = edited_text(EXAMPLE, {place: written}, "plan.toml")
    gone, come = changed_lines(EXAMPLE, text)
    assert (len(gone), len(come)) == (1, 1)
    assert come[0].startswith(line)
    assert gone[0].partition("#")[2] == come[0].partition("#")[2]


@pytest.mark.parametrize(
    ("place", "written", "lines"),
    [
        ("confidence", None, []),
        ("sample.density", "1.1 g/mL", ['density = "1.1 g/mL"']),
        ("steps[0].lag", "0 min", ['lag = "0 min"']),
        ("notes", "one\ntwo", ['notes = """one', 'two"""']),
        ("lot.conversions", '["1 CDU = 0.011 FALGPA_U"]', ['conversions = ["1 CDU = 0.011 FALG']),
        ("sample.damage.melting_rate", "1 1/h", ["[sample.damage]", 'melting_rate = "1 1/h"']),
        ("steps[1]", '{ do = "hold", for = "2 h" }', ["[[steps]]", 'do = "hold"', 'for = "2 h"']),
    ],
)
def test_added_or_taken_out(place, written, lines):
    """A new key, table or step comes into its place; a key may be taken out."""
    text = edited_text(EXAMPLE, {place: written}, "plan.toml")
    gone, come = changed_lines(EXAMPLE, text)
    come = [line for line in come if line.strip()]
    assert len(gone) == (1 if written is None else 0)
    assert len(come) == len(lines)
    assert all(line.startswith(start) for line, start in zip(come, lines, strict=True))


def test_blank_line_before_a_new_step():
    """A step that is added stands apart from the one before it."""
    text = edited_text(EXAMPLE, {"steps[1].do": "hold"}, "plan.toml")
    assert '\n\n[[steps]]\ndo = "hold"\n' in text


def test_many_edits_at_once_are_all_there():
    """Several edits in one go all read back."""
    edits = {"title": "x", "sample.wet_mass": "1 g", "steps[0].temperature": "37 degC"}
    read = tomllib.loads(edited_text(EXAMPLE, edits, "plan.toml"))
    assert read["title"] == "x"
    assert read["sample"]["wet_mass"] == "1 g"
    assert read["steps"][0]["temperature"] == "37 degC"


@pytest.mark.parametrize(
    "place", ["", "a b", "sample..x", "steps[9].volume", "title.x", "visits[7]", "steps.volume"]
)
def test_edit_that_fits_nowhere(place):
    """An edit at a place that cannot be is refused."""
    with pytest.raises(InputError, match="cannot be written"):
        edited_text(EXAMPLE, {place: "x"}, "plan.toml")


def test_no_edit_leaves_every_byte():
    """Saving without an edit gives the same text."""
    assert edited_text(EXAMPLE, {}, "plan.toml") == EXAMPLE


def test_line_ends_and_mark_of_another_system_stay(tmp_path):
    """A file with a byte order mark and other line ends keeps them."""
    path = tmp_path / "plan.toml"
    path.write_bytes(("\ufeff" + EXAMPLE.replace("\n", "\r\n")).encode("utf-8"))
    save_plan(path, read_plan_text(path), {"sample.density": "1.1 g/mL", "title": "x"})
    saved = path.read_bytes()
    assert saved.startswith(b"\xef\xbb\xbf")
    assert saved.count(b"\n") == saved.count(b"\r\n") == EXAMPLE.count("\n") + 1


def test_file_keeps_its_mode_and_no_other_file_is_left(tmp_path):
    """Saving keeps the permissions, and leaves nothing else in the folder."""
    path = tmp_path / "plan.toml"
    path.write_text(EXAMPLE, encoding="utf-8")
    path.chmod(0o640)
    text = save_plan(path, EXAMPLE, {"title": "x"})
    assert path.read_text(encoding="utf-8") == text
    assert stat.S_IMODE(path.stat().st_mode) == 0o640
    assert list(tmp_path.iterdir()) == [path]


def test_link_stays_a_link(tmp_path):
    """A plan that is reached by a link is saved where it is."""
    path, link = tmp_path / "plan.toml", tmp_path / "link.toml"
    path.write_text(EXAMPLE, encoding="utf-8")
    link.symlink_to(path)
    save_plan(link, EXAMPLE, {"title": "x"})
    assert link.is_symlink()
    assert 'title = "x"' in path.read_text(encoding="utf-8")


def test_changed_file_is_left_alone(tmp_path):
    """A file that somebody else has changed is not overwritten."""
    path = tmp_path / "plan.toml"
    path.write_text(EXAMPLE + "# theirs\n", encoding="utf-8")
    with pytest.raises(InputError, match="has changed since"):
        save_plan(path, EXAMPLE, {"title": "x"})
    assert path.read_text(encoding="utf-8").endswith("# theirs\n")


def test_failure_in_the_middle_leaves_the_old_file(tmp_path, monkeypatch):
    """If the disk is full, the old file stands and nothing is left beside it."""
    path = tmp_path / "plan.toml"
    path.write_text(EXAMPLE, encoding="utf-8")

    def full(_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(InputError, match="No space left on device"):
        save_plan(path, EXAMPLE, {"title": "x"})
    assert path.read_text(encoding="utf-8") == EXAMPLE
    assert list(tmp_path.iterdir()) == [path]


def test_new_file_is_made(tmp_path):
    """A plan can be saved under a name that does not exist yet."""
    path = tmp_path / "new.toml"
    save_plan(path, EXAMPLE, {"title": "x"})
    assert tomllib.loads(path.read_text(encoding="utf-8"))["title"] == "x"


HARD = st.lists(st.sampled_from(['"""', "\n", "\r", "'", "\\", "#", "]", "= 1", "\x00", "\ud800"]))
TEXTS = {
    "title": lambda plan: plan["title"],
    "notes": lambda plan: plan["notes"],
    "lot.id": lambda plan: plan["lot"]["id"],
    "visits[0]": lambda plan: plan["visits"][0],
    "steps[0].volume": lambda plan: plan["steps"][0]["volume"],
    "steps[0].temperature[1].to": lambda plan: plan["steps"][0]["temperature"][1]["to"],
}


@settings(deadline=None, derandomize=True, max_examples=200)
@given(st.sampled_from(list(TEXTS)), st.text(max_size=20) | HARD.map("".join))
def test_any_text_reads_back_letter_for_letter(place, written):
    """Whatever text is saved reads back as it was, unless it cannot be saved at all."""
    if "\ud800" in written:
        with pytest.raises(InputError, match="cannot be written"):
            edited_text(EXAMPLE, {place: written}, "plan.toml")
    else:
        after = tomllib.loads(edited_text(EXAMPLE, {place: written}, "plan.toml"))
        assert TEXTS[place](after) == re.sub(r"\r*\n", "\n", written)
