"""The line of each value, by our own scanner, against what a person counts."""

import pytest

from digestplan.plan.lines import line_of, lines_by_place

TEXT = '''\
# a plan
digestplan = 1
title = "a # no comment [[steps]] = 3"   # a comment = with [brackets]
notes = """
first
second = 2
"""

[sample]
wet_mass = "180 mg"
thickness = '1.5 mm'
target_extent = 0.90
known_run.ratio = "1:50"

[sample.damage]
melting_rate = "1 1/h"

[[steps]]
do = "digest"
temperature = [
  { at = "22 degC", for = "20 min" },   # "at" the bench
  { to = "37 degC",
    over = "15 min" },
  # a comment of its own
  { at = "37 degC", for = "5 h" }, { to = "4 degC", over = "30 min" },
]
additions = [ { after = "3 h", charge = "2 mg" } ]

[[steps]]
do = "hold"
"odd key" = 1
temperature = "4 degC"

[steps.inner]
x = [[1.5, 2.5], [3]]
[[ "lot" ]]
id = "x"
'''

COUNTED = [
    ("digestplan", 2),
    ("title", 3),
    ("notes", 4),
    ("sample", 9),
    ("sample.wet_mass", 10),
    ("sample.thickness", 11),
    ("sample.target_extent", 12),
    ("sample.known_run.ratio", 13),
    ("sample.damage", 15),
    ("sample.damage.melting_rate", 16),
    ("steps", 18),
    ("steps[0]", 18),
    ("steps[0].temperature", 20),
    ("steps[0].temperature[0].for", 21),
    ("steps[0].temperature[1].to", 22),
    ("steps[0].temperature[1].over", 23),
    ("steps[0].temperature[2].at", 25),
    ("steps[0].temperature[3].over", 25),
    ("steps[0].additions[0].charge", 27),
    ("steps[1]", 29),
    ("steps[1].do", 30),
    ('steps[1]."odd key"', 31),
    ("steps[1].temperature", 32),
    ("steps[1].inner.x[1]", 35),
    ("lot[0].id", 37),
]


@pytest.mark.parametrize(("place", "line"), COUNTED)
def test_line_of_a_value(place, line):
    """Every value's line is the one that a person counts."""
    assert line_of(place, lines_by_place(TEXT)) == line


@pytest.mark.parametrize(
    ("place", "line"),
    [
        ("sample.shape", 9),
        ("sample.damage.melting_energy", 15),
        ("steps[0].volume", 18),
        ("steps[0].temperature[1].at", 22),
        ('steps[1]."no such"', 29),
        ("steps[7]", 18),
        ("nowhere", None),
        ("", None),
    ],
)
def test_missing_value_falls_back_to_its_table(place, line):
    """A value that is not written is told at the nearest table around it."""
    assert line_of(place, lines_by_place(TEXT)) == line


def test_windows_line_ends_count_once():
    """The lines are the same with the line ends of another system."""
    assert lines_by_place(TEXT.replace("\n", "\r\n")) == lines_by_place(TEXT)
