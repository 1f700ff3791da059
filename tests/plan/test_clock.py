"""Start and visits of a plan."""

from datetime import UTC, date, datetime, time

import pytest

from digestplan.plan.clock import checked_start, checked_visits
from digestplan.plan.model import Visit
from digestplan.problems import Problems

START = datetime(2026, 3, 12, 17, 30)
MORNING = Visit(datetime(2026, 3, 13, 8, 30), datetime(2026, 3, 13, 17, 0))


@pytest.mark.parametrize(
    "written",
    [
        "2026-03-13T08:30 / 2026-03-13T17:00",
        "2026-03-13T08:30/2026-03-13T17:00",
        "2026-03-13T08:30:00 / 2026-03-13 17:00:00",
        "2026-03-13T08:30/17:00",
        "2026-03-13T08:30/T17:00:00",
        "2026-03-13T08:30/PT8H30M",
        "PT8H30M/2026-03-13T17:00",
        "2026-03-13T08:30/PT510M",
    ],
)
@pytest.mark.source("P", "ISO 8601-1:2019, 5.5 (time intervals), forms from memory")
def test_visit_in_every_form_of_the_standard(written):
    """A visit may be written as start and end, or as one of them and a duration."""
    problems = Problems()
    assert checked_visits([written], START, problems) == (MORNING,)
    assert problems.found == []


def test_visits_come_in_the_order_of_the_clock():
    """Visits are sorted, however they are written."""
    written = ["2026-03-14T09:00/10:00", "2026-03-13T08:30/17:00"]
    first, second = checked_visits(written, START, Problems())
    assert first == MORNING
    assert second.start.day == 14


@pytest.mark.parametrize(
    ("written", "place", "phrase"),
    [
        ("2026-03-13T08:30/17:00", "visits", "not a list"),
        ([5], "visits[0]", "5 is no text"),
        (["2026-03-13T08:30"], "visits[0]", "no / between"),
        (["morning / evening"], "visits[0]", "no date and time"),
        (["2026-03-13 / 2026-03-14"], "visits[0]", "a time of day is missing"),
        (["2026-02-30T08:30 / 2026-03-13T17:00"], "visits[0]", "no such date"),
        (["2026-03-13T08:30Z / 2026-03-13T17:00Z"], "visits[0]", "without Z"),
        (["2026-03-13T08:30+01:00 / 2026-03-13T17:00"], "visits[0]", "without Z or an offset"),
        (["2026-03-13T17:00 / 2026-03-13T08:30"], "visits[0]", "ends before it starts"),
        (["2026-03-13T17:00 / 2026-03-13T17:00"], "visits[0]", "ends before it starts"),
        (["2026-03-12T08:30 / 2026-03-12T17:00"], "visits[0]", "over before the plan starts"),
        (["2026-03-13T08:30/P"], "visits[0]", "no duration"),
        (["9999-03-13T08:30/P1000D"], "visits[0]", "that year"),
        (
            ["2026-03-13T08:30/17:00", "2026-03-13T16:00/18:00"],
            "visits[1]",
            "before the one in visits[0] ends",
        ),
        (["2026-03-13T08:30/17:00"] * 201, "visits", "more than any plan needs"),
    ],
)
def test_visit_that_is_none(written, place, phrase):
    """What is no visit is refused with its place and what is wanted."""
    problems = Problems()
    checked_visits(written, START, problems)
    assert (problems.found[0].place, len(problems.found)) == (place, 1)
    assert phrase in problems.found[0].message


@pytest.mark.parametrize(
    ("written", "phrase"),
    [
        (datetime(2026, 3, 12, 17, 30, tzinfo=UTC), "offset from UTC"),
        (date(2026, 3, 12), "time of day"),
        (time(17, 30), "time of day"),
        ("2026-03-12T17:30:00", "without quotation marks"),
        (20260312, "no date and time"),
        (datetime(9999, 12, 31, 23, 59), "no year"),
    ],
)
def test_start_that_is_none(written, phrase):
    """Only a local date with its time of day is a start."""
    problems = Problems()
    assert checked_start(written, problems) is None
    assert problems.found[0].place == "start"
    assert phrase in problems.found[0].message


def test_start_is_kept():
    """A local date with its time of day is taken as it is."""
    assert checked_start(START, Problems()) == START
