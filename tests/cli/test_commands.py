"""Commands as scripts call them: streams, exit statuses, hostile files."""

import json
import subprocess
import sys
import time
from pathlib import Path

import pytest

from digestplan.cli.main import main
from tests.forecast.plans import SPREAD, plan_text

ROOT = Path(__file__).parents[2]
DEMO = ROOT / "presets_demo" / "porpoise-tendon-overnight.toml"


@pytest.fixture
def plan(tmp_path):
    """A good plan file."""
    path = tmp_path / "plan.toml"
    path.write_text(plan_text(**SPREAD), encoding="utf-8")
    return str(path)


def test_forecast_prints_a_report(plan, capsys):
    """A forecast ends with 0, prints a report and nothing on standard error."""
    assert main(["forecast", plan, "--draws", "200"]) == 0

    out, err = capsys.readouterr()
    assert "What limits it" in out
    assert err == ""


def test_json_is_one_document_and_nothing_else(plan, capsys):
    """With --json standard output is one JSON document."""
    assert main(["forecast", plan, "--json", "--draws", "50", "--seed", "9"]) == 0

    out, err = capsys.readouterr()
    document = json.loads(out)
    assert (document["draws"], document["seed"]) == (50, 9)
    assert err == ""


@pytest.mark.parametrize(
    "arguments",
    [
        ["forecast"],
        ["forecast", "a", "b"],
        ["no-such-command"],
        ["forecast", "x", "--draws", "0"],
        ["forecast", "x", "--draws", "many"],
        ["forecast", "x", "--seed", "-1"],
        ["forecast", "x", "--jso"],
    ],
)
def test_a_wrong_command_line_ends_with_two(arguments, capsys):
    """A command line that is wrong ends with 2 and says how it is meant."""
    with pytest.raises(SystemExit) as ended:
        main(arguments)

    assert ended.value.code == 2
    assert "usage" in capsys.readouterr().err


def test_all_problems_of_a_file_at_once(tmp_path, capsys):
    """Each problem is one line that names file, line and place; exit status 1."""
    path = tmp_path / "wrong.toml"
    text = plan_text(mass="180 mL", charge="-6 mg").replace('shape = "slab"', 'shape = "cube"')
    path.write_text(text, encoding="utf-8")

    assert main(["forecast", str(path)]) == 1
    lines = capsys.readouterr().err.splitlines()
    assert len(lines) == 3
    for line, place in zip(
        lines, ("sample.wet_mass", "sample.shape", "steps[0].charge"), strict=True
    ):
        name, number, rest = line.split(":", 2)
        assert name == str(path)
        assert place in rest
        written = text.splitlines()[int(number) - 1]
        assert place.rsplit(".", 1)[1] in written


HOSTILE = {
    "empty": b"",
    "binary": bytes(range(256)) * 20,
    "nul": b"digestplan = 1\x00",
    "large": b"# " + b"x" * 2_000_000,
    "not toml": b"this is no plan",
    "latin": "title = 'Präparat'".encode("latin-1"),
    "deep": b"a = " + b"[" * 5000 + b"]" * 5000,
    "markup": b'digestplan = 1\ntitle = "[/x]<script>"\n',
    "number": b"42",
    "missing all": b"digestplan = 1\n",
    "newer": b"digestplan = 99\n",
    "power tower": plan_text(charge="9**9**9 mg").encode(),
    "unit tower": plan_text(energy="52 kJ/mol**9**9**9").encode(),
    "many units": plan_text(charge="6 " + "m*" * 100_000 + "g").encode(),
    "nan": plan_text(charge="nan mg").encode(),
    "inf": plan_text(charge="inf mg").encode(),
    "huge": plan_text(charge="1e400 mg").encode(),
    "comma": plan_text(charge="0,5 mg").encode(),
    "bare comma": plan_text(target="0,9").encode(),
    "unknown enzyme": plan_text().replace("[lot]", '[lot]\nenzyme = "trypsine"').encode(),
    "cyclic": b"[a]\nb.c = 1\n[a.b]\nc = 2\n",
    "control": plan_text(charge="6 \\u001b[31m mg").encode(),
}


@pytest.mark.parametrize("name", HOSTILE)
def test_hostile_files_are_refused_in_words(name, tmp_path, capsys):
    """Each ends with 1 within a second, with a message that names the file, and no traceback."""
    path = tmp_path / "hostile.toml"
    path.write_bytes(HOSTILE[name])
    started = time.process_time()
    status = main(["forecast", str(path)])
    taken = time.process_time() - started

    out, err = capsys.readouterr()
    assert status == 1
    assert out == ""
    assert err.strip()
    assert all(line.startswith(str(path)) for line in err.splitlines())
    assert "Traceback" not in err
    assert "\x1b" not in err
    assert taken < 1


def test_near_names_are_suggested(tmp_path, capsys):
    """An enzyme that the library does not know is answered with those it does."""
    path = tmp_path / "near.toml"
    path.write_bytes(HOSTILE["unknown enzyme"])
    main(["forecast", str(path)])

    assert "trypsin" in capsys.readouterr().err


@pytest.mark.parametrize("where", ["missing.toml", "."])
def test_what_is_no_file_is_told(where, tmp_path, capsys):
    """A missing file and a folder are told, with status 1."""
    assert main(["forecast", str(tmp_path / where)]) == 1
    assert capsys.readouterr().err.strip()


def test_a_failure_of_ours_ends_with_three(plan, monkeypatch, capsys):
    """What the program itself gets wrong ends with 3 and says that it is not the user's fault."""
    monkeypatch.setattr("digestplan.forecast.run.forecast", lambda *_: 1 / 0)

    assert main(["forecast", plan]) == 3
    assert "fault of the program" in capsys.readouterr().err


@pytest.mark.parametrize("key", [None, "trypsin", "tendon", "tris", "edta", "calcium"])
def test_the_library_shows_its_sources(key, capsys):
    """Every entry is shown with its sources, as text and as JSON."""
    arguments = ["library"] if key is None else ["library", key]
    assert main(arguments) == 0
    text = capsys.readouterr().out
    assert main([*arguments, "--json"]) == 0
    document = json.loads(capsys.readouterr().out)

    assert max(map(len, text.splitlines())) <= 79
    if key is None:
        assert "trypsin" in document["enzyme"]
    else:
        assert document["key"] == key
        assert all(value["source"] for value in document["values"].values())


def test_an_unknown_key_names_the_nearest(capsys):
    """A key that the library does not know ends with 1 and near names."""
    assert main(["library", "trypsine"]) == 1
    assert "trypsin" in capsys.readouterr().err


def test_a_reader_that_goes_away_is_no_error():
    """A closed pipe, as with `| head`, prints no traceback."""
    command = f"{sys.executable} -m digestplan forecast {DEMO} | head -c 10"
    done = subprocess.run(command, shell=True, capture_output=True, text=True, cwd=ROOT, check=True)

    assert done.stderr == ""
    assert len(done.stdout) == 10


def test_ascii_locales_still_get_their_report():
    """Under a locale without UTF-8 the report comes all the same."""
    done = subprocess.run(
        [sys.executable, "-m", "digestplan", "forecast", str(DEMO), "--draws", "50"],
        env={"LC_ALL": "C", "PATH": "/usr/bin:/bin"},
        capture_output=True,
        cwd=ROOT,
        check=True,
    )

    assert "–" in done.stdout.decode("utf-8")
