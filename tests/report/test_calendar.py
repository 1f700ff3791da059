"""The calendar of a plan: valid by RFC 5545, and its times are the plan's."""

import re
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from pathlib import Path

import icalendar
import pytest

from digestplan.plan.read import read_plan
from digestplan.problems import InputError
from digestplan.report.sheet.build import bench_sheet
from digestplan.report.sheet.calendar import calendar
from tests.report.sheet_plans import START, plan_of, sheet_of

DEMOS = sorted((Path(__file__).parents[2] / "presets_demo").glob("*.toml"))
STAMP = datetime(2026, 3, 1, 12, 0, tzinfo=UTC)


def events(sheet, stamp=STAMP):
    """The events of a sheet's calendar, as a general library reads them."""
    return icalendar.Calendar.from_ical(calendar(sheet, stamp)).walk("VEVENT")


@pytest.mark.source("L", "icalendar, a library for RFC 5545")
@pytest.mark.parametrize("path", DEMOS, ids=lambda path: path.stem)
def test_the_times_are_those_of_the_sheet(path):
    """Every action is an event at its time, in local time of no zone, to the minute."""
    sheet = bench_sheet(read_plan(path), 32)
    found = events(sheet)

    assert len(found) == len(sheet.actions)
    for event, action in zip(found, sheet.actions, strict=True):
        begin = event["DTSTART"].dt
        assert begin.tzinfo is None
        assert abs(begin - action.at) <= timedelta(seconds=30)
        assert begin.second == 0


@pytest.mark.source("L", "icalendar, a library for RFC 5545")
def test_visits_last_as_long_as_the_plan_says():
    """A visit begins and ends as the plan has it, and rings beforehand."""
    visits = [e for e in events(sheet_of()) if "visit-" in e["UID"]]

    assert [(v["DTSTART"].dt, v["DTEND"].dt) for v in visits] == [
        (datetime(2026, 3, 13, 8, 30), datetime(2026, 3, 13, 17, 0)),
        (datetime(2026, 3, 14, 8, 30), datetime(2026, 3, 14, 17, 0)),
    ]
    alarms = visits[0].walk("VALARM")
    assert [alarm["TRIGGER"].dt for alarm in alarms] == [timedelta(minutes=-30)]


def test_a_bath_that_runs_by_itself_wakes_nobody():
    """What a programmed bath does at night is in the calendar, without an alarm."""
    by_itself = [e for e in events(sheet_of()) if "bath-4" in e["UID"]]

    assert len(by_itself) == 1
    assert by_itself[0].walk("VALARM") == []
    assert by_itself[0]["TRANSP"] == "TRANSPARENT"


@pytest.mark.source("P", "RFC 5545, section 3.1: lines of at most 75 octets, ended by CRLF")
def test_lines_are_folded_by_octets():
    """No line is longer than 75 octets, none is cut within a character, each ends with CRLF."""
    content = calendar(sheet_of(title="µ°é骨🐚" * 30, whole=True), STAMP)
    lines = content.split(b"\r\n")

    assert lines.pop() == b""
    assert max(map(len, lines)) == 75
    assert b"\n" not in b"".join(lines)
    for line in lines:
        line.decode("utf-8")


@pytest.mark.source("L", "icalendar, a library for RFC 5545")
def test_text_comes_back_as_it_was():
    """Commas, semicolons, backslashes, umlauts and line ends survive the way there and back."""
    title = 'a, b; c\\n \\ d: "e" BEGIN:VEVENT ü→µ'
    sheet = sheet_of(title=title, whole=True)
    prepare = next(e for e in events(sheet) if "step-1-prepare" in e["UID"])

    lines = str(prepare["DESCRIPTION"]).split("\n")
    assert lines[0] == title
    assert "20 mL each bath: 0.5 M hydrochloric acid; 60 mL for 3 baths" in lines
    assert (
        "180 mg piece, blotted: if it is far from this, change the plan and print a new sheet"
        in lines
    )


def test_names_of_events_are_theirs_alone_and_stay():
    """Each event has a name of its own, which stays when the times of the plan move."""
    first, moved = (sheet_of(start=start) for start in (START, START.replace("17:30", "16:30")))
    names = [str(event["UID"]) for event in events(first)]

    assert len(set(names)) == len(names)
    assert sorted(names) == sorted(str(event["UID"]) for event in events(moved))
    assert set(names).isdisjoint(str(e["UID"]) for e in events(sheet_of(title="Another")))


def test_the_folder_of_the_plan_does_not_count():
    """The same plan in another folder has the same events, and its folder is not told."""
    plan = plan_of()
    here, there = (replace(plan, path=f"{folder}/plan.toml") for folder in ("a", "b\\c"))

    assert calendar(bench_sheet(here, 16), STAMP) == calendar(bench_sheet(there, 16), STAMP)


@pytest.mark.source("P", "RFC 5545, section 3.8.7.2: DTSTAMP is in UTC")
def test_the_stamp_is_in_utc():
    """The stamp is the moment given, told in UTC."""
    from datetime import timezone

    stamp = datetime(2026, 3, 1, 12, 0, tzinfo=timezone(timedelta(hours=2)))
    content = calendar(sheet_of(), stamp).decode("utf-8")

    assert set(re.findall(r"DTSTAMP:(\S+)", content)) == {"20260301T100000Z"}


def test_a_plan_without_a_clock_has_no_calendar():
    """Without a start there is nothing to put into a calendar, and it is said how to get one."""
    with pytest.raises(InputError, match=r"start: .*start = 2026"):
        calendar(sheet_of(start=""), STAMP)
