"""What is said about a text that is not TOML."""

import time

import pytest

from digestplan.plan.syntax import loaded
from digestplan.problems import Problem

BEFORE = 'digestplan = 1\n[sample]\nshape = "slab"\n'


@pytest.mark.parametrize(
    ("line", "phrase"),
    [
        ("volume = 0,5", "decimal comma"),
        ("volume = 0,5 mL", "decimal comma"),
        ("x = [ 0,5 mL ]", "decimal comma"),
        ("volume = 3 mL", "quotation marks, such as"),
        ("volume = 10 %", "quotation marks, such as"),
        ("energy = 55 ± 5 kJ/mol", "quotation marks, such as"),
        ("shape = slab", "put text in quotation marks"),
        ("stirred = True", "write true or false"),
        ("stirred = yes", "write true or false"),
        ("start = 2026-03-12T17:30", "the seconds as well"),
        ("shape = “slab”", "straight quotation marks"),
        ('shape = "slab', "not closed on this line"),
        ('shape = "sl\\qab"', "backslash"),
        ('shape = "sl\x1bab"', "control character"),
        ("# \x07", "control character"),
        ("shape", "followed by ="),
        ("shape =", "a value is missing"),
        ("shape : slab", "not a colon"),
        ("[steps", "square bracket"),
        ("[sample]", "written twice"),
        ('shape = "cylinder"', "written twice"),
        ("µ = 1", "neither name"),
        ("x = {a = 1,\n b = 2}", "a name is wanted"),
        ("a.b.c.d.e.f.g.h.i.j = 1", "more parts"),
        ("thick = 1.5\rmm", "something after the value"),
    ],
)
def test_mistake_in_a_line(line, phrase):
    """A mistake in the syntax is told with its line, and with what to write instead."""
    problem = loaded(BEFORE + line + "\n")
    assert isinstance(problem, Problem)
    assert phrase in problem.message
    assert problem.line == 4


@pytest.mark.parametrize(
    "text", ['x = [1,\n"a",', 'x = """\nnever closed', "x = {a = [", "x = '''"]
)
def test_text_that_ends_too_soon(text):
    """A bracket or quotation mark that is never closed is told at the end."""
    problem = loaded(text)
    assert isinstance(problem, Problem)
    assert "ends before" in problem.message
    assert problem.line == text.count("\n") + 1


@pytest.mark.parametrize(
    ("text", "phrase"),
    [
        ("x = " + "[" * 9_000, "nested"),
        ("x = " + "{a=" * 100_000, ""),
        ("x = " + "9" * 10_000, "digits"),
        (".".join("a" * 100_000) + " = 1", "more parts"),
        ('"a"."b".' * 100_000 + "c = 1", "more parts"),
        ("[" + " . ".join(["a"] * 50_000) + "]", "more parts"),
        ('x = """' + '"' * 500_000, ""),
        ("x = '" + "\\" * 500_000, ""),
        ('"' * 500_001, ""),
        ("[" * 500_000, "brackets"),
    ],
    ids=range(10),
)
def test_hostile_text_is_answered_within_a_second(text, phrase):
    """Texts made to keep a reader busy are refused at once."""
    before = time.process_time()
    problem = loaded(text)
    assert time.process_time() - before < 1
    assert isinstance(problem, Problem)
    assert phrase in problem.message
    assert len(problem.message) < 300


def test_dots_in_text_and_comments_are_nobodys_business():
    """Only names are counted in their parts."""
    text = '# a.b.c.d.e.f.g.h.i.j\nx = "a.b.c.d.e.f.g.h.i.j"\ny = """\na.b.c.d.e.f.g.h.i.j"""\n'
    assert loaded(text) == {"x": "a.b.c.d.e.f.g.h.i.j", "y": "a.b.c.d.e.f.g.h.i.j"}
