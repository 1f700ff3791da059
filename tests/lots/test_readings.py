"""Readings from CSV files, honest and hostile."""

import contextlib
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.lots.readings import read_end_points, read_readings, read_stability
from digestplan.problems import InputError

GOOD = """# invented readings
time [min],reading,series,replicate
0,0.10,sample,1
0.5,0.15,sample,1
0,0.11,sample,2

0,0.09,blank,1
0.5,0.091,Blank,1
"""


def written(folder: Path, content: str | bytes, name: str = "readings.csv") -> Path:
    path = folder / name
    path.write_bytes(content.encode() if isinstance(content, str) else content)
    return path


def refusal(path, read=read_readings):
    with pytest.raises(InputError) as refused:
        read(path)
    assert all(p.file == str(path) for p in refused.value.problems)
    return refused.value.problems


def test_traces_by_series_and_replicate(tmp_path):
    """Each series and replicate becomes a trace, its times in hours."""
    traces = read_readings(written(tmp_path, GOOD))

    assert [(t.series, t.replicate) for t in traces] == [
        ("sample", "1"),
        ("sample", "2"),
        ("blank", "1"),
    ]
    np.testing.assert_allclose(traces[0].hours, [0, 0.5 / 60])
    np.testing.assert_allclose(traces[2].absorbance, [0.09, 0.091])


@pytest.mark.parametrize(
    ("unit", "hours"), [("s", 1 / 3600), ("min", 1 / 60), ("h", 1.0), ("sec", 1 / 3600)]
)
def test_units_stand_in_the_header(tmp_path, unit, hours):
    """The unit of time in the header turns the times into hours."""
    path = written(tmp_path, f"time [{unit}],reading\n2,0.1\n")

    assert read_readings(path)[0].hours[0] == pytest.approx(2 * hours)


def test_what_may_be_left_out(tmp_path):
    """Without series and replicate all readings are one sample; notes are passed over."""
    (trace,) = read_readings(written(tmp_path, "Time [min], Reading, note\n0,0.1,x\n1,0.2,\n"))

    assert (trace.series, trace.replicate, len(trace.hours)) == ("sample", "1", 2)


@pytest.mark.parametrize("separator", [";", "\t"])
def test_other_separators(tmp_path, separator):
    """Semicolons and tabs separate columns as well as commas do."""
    path = written(tmp_path, GOOD.replace(",", separator))

    assert len(read_readings(path)) == 3


def test_every_wrong_value_is_told_with_its_line(tmp_path):
    """All wrong values are found in one go, each with its place and line."""
    bad = "time [min],reading,series\n0,abc,sample\n-1,0.1,sample\n1,,sampel\n2,nan,blank\n3,inf,\n"
    problems = refusal(written(tmp_path, bad))

    told = [(p.place, p.line) for p in problems]
    assert told == [
        ("reading", 2),
        ("time", 3),
        ("reading", 4),
        ("series", 4),
        ("reading", 5),
        ("reading", 6),
        ("series", 6),
    ]
    text = "\n".join(map(str, problems))
    assert '"abc" is no number' in text
    assert "a number is missing" in text
    assert '"sampel": sample or blank is wanted' in text
    assert "readings.csv:3: time" in text


def test_decimal_commas_are_told(tmp_path):
    """A decimal comma is refused with the way to write it."""
    (problem, *_) = refusal(written(tmp_path, "time [min];reading\n0,5;0.1\n"))

    assert str(problem).endswith('"0,5" has a decimal comma: write 0.5')
    assert problem.line == 2


@pytest.mark.parametrize(
    ("content", "message"),
    [
        ("", "is empty"),
        ("\n\n# only a comment\n", "is empty"),
        ("time [min],reading\n", "no readings"),
        (b"PK\x03\x04rest", "spreadsheet"),
        (b"\x00\x01\x02", "no text file"),
        ("time [min],reading\n1,0.1\n".encode("utf-16"), "UTF-16"),
        (b"time [min],reading\n1,0.1\n2,\xff\n", "not UTF-8"),
        ("a" * 6_000_000, "larger than 5 MB"),
        ("time [min],reading\n1," + "9" * 200_000 + "\n", "cannot be read as CSV"),
        ("time [min],reading\n1,0.1,5\n1\n", "3 values, where the header has 2 columns"),
        ("time,reading\n1,0.1\n", "unit is wanted in the header"),
        ("time [mg],reading\n1,0.1\n", "time is wanted"),
        ("time [9**9**9],reading\n1,0.1\n", "time"),
        ("tme [min],reading\n1,0.1\n", 'was "time" meant?'),
        ("time [min]\n1\n", 'the column is missing: "reading"'),
        ("time [min],reading,reading\n1,2,3\n", "there twice"),
        ("time [min],reading\n1,15000\n", "too small or too large"),
        ("time [min],reading\n1,1e999\n", "is no number"),
        ("time [min],reading\n1,1_000\n", "1_000"),
        ('time [min],reading\n"1,0.1\n', "values, where"),
    ],
)
def test_hostile_files_are_refused_in_words(tmp_path, content, message):
    """Empty, binary, huge and malformed files give a clear message, never a traceback."""
    problems = refusal(written(tmp_path, content))

    assert message in "\n".join(map(str, problems))


def test_files_that_are_not_there(tmp_path):
    """A missing file and a folder are told as such."""
    assert "No such file" in str(refusal(tmp_path / "nothing.csv")[0])
    assert "directory" in str(refusal(tmp_path)[0])


def test_a_thousand_mistakes_are_summed_up(tmp_path):
    """Of very many problems the first twenty are told, and how many more there are."""
    problems = refusal(written(tmp_path, "time [min],reading\n" + "x,0.1\n" * 1000))

    assert len(problems) == 21
    assert problems[-1].message == "and 980 more of the kind"


@settings(deadline=None, derandomize=True, max_examples=60)
@given(content=st.binary(max_size=300) | st.text(max_size=300).map(lambda s: s.encode()))
def test_any_bytes_at_all(tmp_path_factory, content):
    """Whatever bytes a file holds, it is read or refused, and nothing else happens."""
    path = written(tmp_path_factory.mktemp("any"), b"time [min],reading\n" + content)
    traces = ()
    with contextlib.suppress(InputError):
        traces = read_readings(path)

    assert all(np.all(np.isfinite(t.absorbance)) for t in traces)


def test_stability_data(tmp_path):
    """Days and degrees Celsius become hours and kelvins; batches stay as written."""
    path = written(
        tmp_path,
        "time [d],temperature [degC],activity,batch\n0,4,100,A\n2,25,80,B\n",
    )
    found = read_stability(path)

    np.testing.assert_allclose(found.hours, [0, 48])
    np.testing.assert_allclose(found.temperature, [277.15, 298.15])
    np.testing.assert_allclose(found.activity, [100, 80])
    assert found.batch == ("A", "B")


def test_impossible_stability_data(tmp_path):
    """Below absolute zero there is no storage, and no activity below zero."""
    path = written(tmp_path, "time [d],temperature [degC],activity\n0,-300,100\n1,4,-2\n")

    assert [(p.place, p.line) for p in refusal(path, read_stability)] == [
        ("temperature", 2),
        ("activity", 3),
    ]


def test_end_points(tmp_path):
    """Standards keep their amounts in mol; samples and blanks have none."""
    path = written(
        tmp_path,
        "series,amount [µmol],signal\nstandard,0,0.05\nstandard,0.5,0.8\n"
        "sample,,0.4\nblank,,0.06\n",
    )
    found = read_end_points(path)

    np.testing.assert_allclose(found.standard_amount, [0, 0.5e-6])
    np.testing.assert_allclose(found.standard_signal, [0.05, 0.8])
    assert (found.sample.tolist(), found.blank.tolist()) == ([0.4], [0.06])


def test_wrong_end_points(tmp_path):
    """A standard without its amount is told with its line, and so is a unit that is none."""
    missing = written(tmp_path, "series,amount [nmol],signal\nstandard,,0.05\n")
    unit = written(tmp_path, "series,amount [mg],signal\nstandard,1,0.05\n", "unit.csv")

    (problem,) = refusal(missing, read_end_points)
    assert (problem.line, problem.message) == (2, "a standard needs its amount")
    assert "no unit of amount" in str(refusal(unit, read_end_points)[0])
