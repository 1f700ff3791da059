"""Reading plan files: good ones in any dress, hostile ones answered at once and in words."""

import copy
import os
import time
import tomllib
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.plan.check import checked_plan
from digestplan.plan.read import parse_plan, read_plan
from digestplan.problems import InputError, Problems

PLAN = Path(__file__).with_name("explicit.toml").read_text(encoding="utf-8")


def outcome_of(text):
    """A plan, or all that is said about the text."""
    try:
        return parse_plan(text, "plan.toml")
    except InputError as error:
        return error.problems


def message_of(text):
    """What is said about a text, within a second."""
    before = time.process_time()
    with pytest.raises(InputError) as caught:
        parse_plan(text, "plan.toml")
    assert time.process_time() - before < 1
    return str(caught.value)


@pytest.mark.parametrize(
    "content",
    [
        PLAN.encode(),
        b"\xef\xbb\xbf" + PLAN.encode(),
        PLAN.replace("\n", "\r\n").encode(),
        PLAN.rstrip("\n").encode(),
        ("# µ ° ± é\n" * 1000 + PLAN).encode(),
    ],
    ids=["plain", "byte order mark", "other line ends", "no last line end", "comments"],
)
def test_same_plan_in_other_dress(tmp_path, content):
    """Byte order mark, line ends and comments make no difference."""
    path = tmp_path / "explicit.toml"
    path.write_bytes(content)
    assert read_plan(path).steps == parse_plan(PLAN, "explicit.toml").steps


@pytest.mark.parametrize(
    ("content", "phrase"),
    [
        (b"", "digestplan: this is missing"),
        (b"\n\n# nothing\n", "sample: this is missing"),
        (b"digestplan = 1\n", "steps: this is missing"),
        (b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR", "binary file"),
        (b"\0" * 100, "binary file"),
        (PLAN.encode("utf-16"), "UTF-16"),
        ('title = "37 °C"\n'.encode("latin-1"), ":1: this text is not saved as UTF-8"),
        (b"x = 1\n" * 400_000, "larger than 1 MB"),
        (b"hello world", "followed by ="),
        (b"[[[[", "name is wanted"),
        (b"<html><body>[link](javascript:0)</body></html>", "neither name"),
        (b'{"digestplan": 1}', "neither name"),
        (b"PK\x03\x04\x14\0\x06\0", "binary file"),
        (b"%PDF-1.7\n%\xe2\xe3\xcf\xd3", "not saved as UTF-8"),
        (b"digestplan = 1\ndigestplan = 1\n", "written twice"),
        (b"digestplan = 0,5\n", "decimal comma"),
        (b"sample = " + b"[" * 9_000, "nested"),
        (b"sample = " + b"[" * 900_000, "brackets"),
        (b"x = [" + b"1," * 400_000 + b"]", "commas"),
        (b"".join(b"[a%d.b.c.d]\n" % i for i in range(9_000)), "no such key"),
        (b"digestplan = " + b"9" * 5000, "more digits"),
        (b"digestplan = 0x" + b"f" * 5000, "newer format"),
        (b"digestplan = 1e999", "inf is no version"),
    ],
)
def test_file_that_is_no_plan(tmp_path, content, phrase):
    """What is no plan is refused with its name, in words, within a second."""
    path = tmp_path / "plan.toml"
    path.write_bytes(content)
    before = time.process_time()
    with pytest.raises(InputError) as caught:
        read_plan(path)
    assert time.process_time() - before < 1
    assert phrase in str(caught.value)
    assert all(problem.file == str(path) for problem in caught.value.problems)
    assert len(str(caught.value)) < 5000


def test_name_is_told_as_it_was_given(tmp_path, monkeypatch):
    """Messages name the file as the user did."""
    monkeypatch.chdir(tmp_path)
    with pytest.raises(InputError, match=r"^no such\.toml: there is no such file$"):
        read_plan("no such.toml")


@pytest.mark.parametrize(
    ("name", "phrase"),
    [
        (".", "this is a folder"),
        ("", "folder"),
        ("pipe", "not a file"),
        ("a\0b", "cannot be used"),
        ("x" * 5000, "cannot be read"),
        ("plan.toml/inside", "cannot be read"),
    ],
)
def test_what_is_no_file(tmp_path, monkeypatch, name, phrase):
    """A folder, a pipe or an impossible name is told, and nothing waits."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "plan.toml").write_text(PLAN, encoding="utf-8")
    os.mkfifo("pipe")
    with pytest.raises(InputError, match=phrase):
        read_plan(name)


def test_file_that_may_not_be_read(tmp_path, monkeypatch):
    """Forbidden files are told as such."""
    path = tmp_path / "plan.toml"
    path.write_text(PLAN, encoding="utf-8")

    def forbidden(_):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "read_bytes", forbidden)
    with pytest.raises(InputError, match="may not be read"):
        read_plan(path)


@pytest.mark.parametrize(
    "text",
    [
        "\\u001b[31mred\\u001b[0m",
        "[/x]",
        "[@click=app.quit]x[/]",
        "<font color='red'>",
        "\\u202e reversed",
        "\\u0007",
        "x" * 10_000,
        "µ" * 10_000,
        "%s %d {0} {x}",
        "../../etc/passwd",
        "'; DROP TABLE lots; --",
    ],
    ids=range(11),
)
@pytest.mark.parametrize(
    "old", ['"180 mg"', '"slab"', '"digest"', '"hydrochloric acid"', '"22 degC"', "conf"]
)
def test_message_shows_text_harmlessly(old, text):
    """What the user wrote is repeated short, on one line, without control characters."""
    new = f'"{text}"' if old.startswith('"') else f'"{text}" = 1\nconf'
    message = message_of(PLAN.replace(old, new, 1))
    assert all(line.isprintable() for line in message.splitlines())
    assert max(len(line) for line in message.splitlines()) < 400
    assert message.count("\n") < 5


def test_all_mistakes_are_told_at_once_in_the_order_of_the_file():
    """Several mistakes give as many problems, from top to bottom."""
    text = PLAN.replace('"180 mg"', '"180 mL"').replace('"slab"', '"cube"')
    text = text.replace('"52 kJ/mol"', '"52 kJ"').replace('"20 min"', '"20 mL"')
    with pytest.raises(InputError) as caught:
        parse_plan(text, "plan.toml")
    places = [problem.place for problem in caught.value.problems]
    assert places == [
        "sample.wet_mass",
        "sample.shape",
        "enzyme.activation_energy",
        "steps[1].each",
        "steps[2].temperature[0].for",
    ]
    lines = [problem.line for problem in caught.value.problems]
    assert lines == sorted(lines)


def test_collector_holds_the_problems_as_well():
    """A caller's collector holds what the error carries."""
    problems = Problems()
    with pytest.raises(InputError) as caught:
        parse_plan(PLAN.replace('"slab"', '"cube"'), "plan.toml", problems)
    assert tuple(problems.found) == caught.value.problems
    assert str(problems.found[0]).startswith("plan.toml:10: sample.shape: ")


def test_many_mistakes_are_summed_up():
    """Thousands of unknown keys do not give thousands of lines."""
    junk = "\n".join(f"junk{i} = {i}" for i in range(20_000))
    message = message_of(PLAN.replace("[lot]", f"[lot]\n{junk}"))
    assert "19990 more keys here mean nothing" in message
    assert message.count("\n") < 20


@pytest.mark.parametrize(
    "text",
    [
        PLAN + "[[steps]]\n" * 4_000,
        PLAN.replace("[\n", "[\n" + '{ at = "4 degC", for = "1 h" },\n' * 20_000, 1),
        PLAN.replace('["2026', "[" + '"x", ' * 40_000 + '"2026', 1),
        PLAN + "".join(f'[[steps]]\ndo = "d{i}"\n' for i in range(4_000)),
        PLAN.replace('["12 h"', "[" + '"1 h", ' * 40_000 + '"12 h"', 1),
    ],
    ids=["steps", "stretches", "visits", "unknown steps", "changes"],
)
def test_endless_lists_are_refused_at_once(text):
    """Lists far longer than any plan needs are refused within a second."""
    assert "more than any plan needs" in message_of(text)


WORDS = st.sampled_from(
    [
        *('"', "[", "]", "{", "}", "=", ",", ".", "\n", "#", "0", "-1", "1e9", "nan", "true", "''"),
        *('"3 mL"', '"37 degC"', "[[steps]]\n", "[sample]\n", 'do = "hold"\n', "±", "x/", "\x1b"),
        *("ratio", "1:50", "mg", "CDU", "2026-03-12", "steps", "do", "for", "[]", "{}"),
    ]
)
EDITS = st.lists(
    st.tuples(st.integers(0, len(PLAN)), st.integers(0, 12), WORDS | st.text(max_size=5)),
    min_size=1,
    max_size=4,
)


@settings(deadline=None, derandomize=True, max_examples=300)
@given(EDITS)
def test_random_edits_raise_nothing_but_input_errors(edits):
    """Whatever is done to a plan, it loads or is refused in words."""
    text = PLAN
    for at, length, new in edits:
        text = text[:at] + new + text[at + length :]
    outcome = outcome_of(text)
    if isinstance(outcome, tuple):
        assert outcome
        assert all(line.isprintable() for line in "\n".join(map(str, outcome)).splitlines())
    else:
        assert outcome.steps


TOKENS = [word for word in PLAN.replace("=", " ").split() if word not in ("[", "]", "{", "}")]


@settings(deadline=None, derandomize=True, max_examples=200)
@given(st.sampled_from(TOKENS), st.sampled_from(TOKENS))
def test_exchanged_words_raise_nothing_but_input_errors(old, new):
    """Words of the plan in each other's place load, or are refused in words."""
    outcome = outcome_of(PLAN.replace(old, new))
    assert outcome if isinstance(outcome, tuple) else outcome.steps


TABLES = tomllib.loads(PLAN)


def places_in(tables):
    """Every container of a plan with every key that it has."""
    keys = list(tables) if isinstance(tables, dict) else range(len(tables))
    for key in keys:
        yield tables, key
        if isinstance(tables[key], dict | list):
            yield from places_in(tables[key])


N_PLACES = len(list(places_in(TABLES)))
VALUES = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=10)
    | st.dates() | st.datetimes() | st.times()
    | st.sampled_from(["3 mL", "37 degC", "1:50", "0.5", "digest", "hold", "2 mg ± 1 mg", "5 h"]),
    lambda inner: st.lists(inner, max_size=3)
    | st.dictionaries(st.sampled_from(["at", "for", "to", "do", "charge", "x"]), inner, max_size=3),
    max_leaves=4,
)  # fmt: skip


@settings(deadline=None, derandomize=True, max_examples=400)
@given(st.lists(st.tuples(st.integers(0, N_PLACES - 1), VALUES), min_size=1, max_size=3))
def test_any_value_anywhere_is_checked_without_an_error(edits):
    """Any kind of value at any place of a plan is a plan or a problem, never an exception."""
    tables = copy.deepcopy(TABLES)
    for number, value in edits:
        here, key = list(places_in(tables))[number % len(list(places_in(tables)))]
        if value is None:
            del here[key]
        else:
            here[key] = value
    problems = Problems()
    plan = checked_plan(tables, "plan.toml", problems)
    assert plan is not None or problems.found
    assert all(problem.message.isprintable() for problem in problems.found)
