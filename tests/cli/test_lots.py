"""``digestplan lot …`` and ``assay`` as people and scripts call them."""

import json
import shutil
import subprocess
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from jsonschema import validate

from digestplan.cli.main import main
from tests.cli import lot_schemas as schemas

ROOT = Path(__file__).parents[2]
DEMO = ROOT / "presets_demo"
GOLDEN = Path(__file__).parent / "golden"
PLAN = str(DEMO / "porpoise-tendon-overnight.toml")
AT = ("--at", "2026-03-12", "--draws", "200")
BOTTLE = (
    *("lot", "add", "CH-1", "--enzyme", "clostridial-collagenase", "--label", "280 CDU/mg"),
    *("--mass", "100 mg", "--temperature", "-20 degC", "--at", "2026-01-10", "--who", "ada"),
)


@pytest.fixture(scope="session")
def imported(tmp_path_factory):
    """A register with the demo's lots."""
    path = tmp_path_factory.mktemp("demo") / "lots.sqlite"
    assert main(["lot", "import", str(DEMO / "lots.jsonl"), "--register", str(path)]) == 0
    return path


@pytest.fixture
def run(tmp_path, monkeypatch, capsys):
    """Run a command on a register of its own; gives status, output and messages."""
    monkeypatch.setenv("DIGESTPLAN_REGISTER", str(tmp_path / "lots.sqlite"))

    def call(*words):
        capsys.readouterr()
        status = main(list(words))
        return status, *capsys.readouterr()

    return call


@pytest.fixture
def demo(imported, tmp_path, run):
    """The same, with the demo's lots in it."""
    shutil.copy(imported, tmp_path / "lots.sqlite")
    return run


def told(result):
    """What a command printed, which went well and said nothing else."""
    status, out, err = result
    assert (status, err) == (0, "")
    return out


def document(run, schema, *words):
    """The document of a command, which fits its schema."""
    found = json.loads(told(run(*words, "--json")))
    validate(found, schema)
    return found


# -- entering -------------------------------------------------------------------------------


def test_a_bottle_s_life_from_receipt_to_bin(run):
    """Every kind of entry goes in, is told in a line with what is left, and adds up."""
    steps = [
        (BOTTLE, "received"),
        (("lot", "store", "CH-1", "--temperature", "22 ± 2 degC", "--for", "36 h"), "36.0 h at 22"),
        (("lot", "open", "CH-1"), "opened"),
        (("lot", "use", "CH-1", "8 mg", "--plan", "porpoise"), "92 mg left"),
        (("lot", "weigh", "CH-1", "90.5 mg"), "90.5 mg left"),
        (("lot", "store", "CH-1", "--temperature", "4C", "--form", "solution"), "4 °C, solution"),
        (("lot", "thaw", "CH-1", "--times", "2"), "thawed 2 times"),
        (("lot", "assay", "CH-1", "--fraction", "0.82 ± 0.04"), "0.82 ± 0.04 of the label"),
        (("lot", "assay", "CH-1", "--activity", "231 ± 9 CDU/mg"), "231 ± 9 CDU/mg"),
        (("lot", "discard", "CH-1"), "discarded"),
    ]
    for number, (words, expected) in enumerate(steps):
        when = () if words is BOTTLE else ("--at", f"2026-02-{number + 1:02d}", "--who", "ben")
        out = told(run(*words, *when))
        assert expected in " ".join(out.split())
        assert max(map(len, out.splitlines())) <= 79
    shown = document(run, schemas.SHOW, "lot", "show", "CH-1")

    assert [event["kind"] for event in shown["events"]] == [
        *("received", "transported", "opened", "used", "weighed", "moved", "thawed"),
        *("assayed", "assayed", "discarded"),
    ]
    assert shown["remaining_mass_mg"] == pytest.approx(90.5)
    assert (shown["form"], shown["thaws"], shown["opened"]) == ("solution", 2, True)
    assert document(run, schemas.LIST, "lot", "list")["lots"] == []
    assert len(document(run, schemas.LIST, "lot", "list", "--all")["lots"]) == 1


def test_an_entry_as_a_document(run):
    """With --json an entry is told with its id and the lot after it."""
    found = document(run, schemas.RECORDED, *BOTTLE)

    assert found["recorded"]["kind"] == "received"
    assert found["recorded"]["at"] == "2026-01-10T12:00:00"  # a day alone stands for its noon
    assert found["recorded"]["who"] == "ada"
    assert found["lot"]["temperature_c"] == -20


@pytest.mark.parametrize("cold", ["-20C", "-20 degC", "-20 ± 2 degC"])
def test_a_minus_is_no_option(run, cold):
    """A temperature below zero may be written as people write it."""
    found = document(run, schemas.RECORDED, *BOTTLE[:9], "--temperature", cold)

    assert found["lot"]["temperature_c"] == -20


def test_a_wrong_entry_is_read_as_another(run):
    """--instead-of replaces an entry, correct takes one back or moves it; nothing is erased."""
    told(run(*BOTTLE))
    first = document(run, schemas.RECORDED, "lot", "use", "CH-1", "80 mg", "--at", "2026-02-01")
    mark = first["recorded"]["id"][:8]
    wrong = document(
        run, schemas.RECORDED, "lot", "use", "CH-1", "8 mg", "--at", "2026-02-01",
        "--instead-of", mark,
    )  # fmt: skip
    assert wrong["lot"]["remaining_mass_mg"] == pytest.approx(92)
    told(run("lot", "correct", "CH-1", mark, "--to", "2026-02-03"))
    shown = document(run, schemas.SHOW, "lot", "show", "CH-1")
    assert [e["at"] for e in shown["events"]] == ["2026-01-10T12:00:00", "2026-02-03T12:00:00"]
    told(run("lot", "correct", "CH-1", mark))
    shown = document(run, schemas.SHOW, "lot", "show", "CH-1")

    assert shown["remaining_mass_mg"] == pytest.approx(100)
    assert len(shown["written"]) == 5
    assert "3 corrections are worked in" in told(run("lot", "show", "CH-1"))


def test_a_receipt_taken_back_is_gone(run):
    """A lot whose receipt was taken back is no longer there, and its name is free again."""
    told(run(*BOTTLE))
    mark = document(run, schemas.SHOW, "lot", "show", "CH-1")["written"][0]["id"]
    assert "no longer in the register" in told(run("lot", "correct", "CH-1", mark))

    assert run("lot", "show", "CH-1")[0] == 1
    told(run(*BOTTLE))


def test_more_used_than_there_was_is_told(run):
    """A register that is overdrawn says so, and asks for a weighing."""
    told(run(*BOTTLE))
    out = told(run("lot", "use", "CH-1", "140 mg"))

    assert "40 mg more was used than the register had" in " ".join(out.split())


REFUSED = {
    "unknown lot": ("lot use CH-2 8mg", 'no lot "CH-2" in the register; did you mean CH-1'),
    "twice": ("lot add CH-1 --enzyme trypsin --temperature 4C", "is in the register already"),
    "unknown enzyme": ("lot add X --enzyme tripsin --temperature 4C", "is trypsin meant"),
    "no temperature": ("lot add X --enzyme trypsin", "temperature: this is missing"),
    "no enzyme": ("lot add X --temperature 4C", "enzyme: this is missing"),
    "a volume": ("lot use CH-1 8mL", 'mass: "8mL" is a volume'),
    "a comma": ("lot use CH-1 0,5mg", "decimal comma"),
    "a spread of a mass": ("lot use CH-1 8±1mg", "keeps no spread"),
    "no date": ("lot thaw CH-1 --at yesterday", "is no date"),
    "a zone": ("lot thaw CH-1 --at 2026-03-01T09:30+01:00", "without a zone"),
    "half a thaw": ("lot thaw CH-1 --times 1.5", "count"),
    "a gas": ("lot store CH-1 --temperature 4C --form gas", "dry, solution, glycerol"),
    "too hot": ("lot store CH-1 --temperature 900C", "temperature"),
    "not for long": ("lot store CH-1 --temperature 4C --for 3h --place x", "goes back as it was"),
    "sure of it": ("lot assay CH-1 --fraction 0.8", "has no uncertainty"),
    "sure of that": ("lot assay CH-1 --activity 231CDU/mg", "has no uncertainty"),
    "nothing found": ("lot assay CH-1", "is wanted"),
    "no such entry": ("lot correct CH-1 ffffffff", "no entry has this id"),
    "bad label": ("lot add X --enzyme trypsin --temperature 4C --label 280CDU", "per mass"),
    "bad factor": ("lot add X --enzyme trypsin --temperature 4C --conversion 1CDU=2mg", "activity"),
    "bad expiry": ("lot add X --enzyme trypsin --temperature 4C --expiry soon", "is no date"),
    "nothing needed": ("lot check CH-1 --needed 0", "above zero"),
    "needed twice": (f"lot check CH-1 --needed 0.5 --plan {PLAN}", "one of the two"),
    "no plan": ("lot check CH-1 --plan nowhere.toml", "no such file"),
    "no readings": ("assay nowhere.csv", "cannot be read"),
    "no file": ("lot export .", "this is a folder"),
    "no folder": ("lot backup nowhere/copy.sqlite", "cannot be written"),
}


@pytest.mark.parametrize("name", REFUSED)
def test_what_is_wrong_is_told_in_words(run, name):
    """Status 1, a message that says what is wanted, nothing on standard output, nothing written."""
    told(run(*BOTTLE))
    words, expected = REFUSED[name]
    status, out, err = run(*words.split())

    assert (status, out) == (1, "")
    assert expected in err
    assert "Traceback" not in err
    assert len(document(run, schemas.SHOW, "lot", "show", "CH-1")["written"]) == 1


def test_all_that_is_wrong_with_an_entry_at_once(run):
    """Each wrong value is one line with its name; no register is started for it."""
    words = "lot add X --enzyme tripsin --mass 3mL --temperature cold --expiry soon"
    status, _, err = run(*words.split())

    assert status == 1
    assert {line.split(":")[0] for line in err.splitlines()} == {
        *("enzyme", "mass", "temperature", "expiry")
    }
    assert "there is no lot register here" in run("lot", "list")[2]


def test_what_is_still_to_come_is_no_entry(run):
    """A date in the future is refused; one that clocks may differ by is not."""
    told(run(*BOTTLE))
    today = datetime.now(UTC)
    far, near = ((today + timedelta(days=d)).date().isoformat() for d in (9, 0))

    assert "still to come" in run("lot", "thaw", "CH-1", "--at", far)[2]
    told(run("lot", "thaw", "CH-1", "--at", near))


@pytest.mark.parametrize(
    "words",
    ["lot", "lot use CH-1", "lot store CH-1 --sealed --opened", "lot check", "assay", "lot mend X"],
)
def test_a_wrong_command_line_ends_with_two(run, words):
    """What the grammar does not know ends with 2 and shows how it is meant."""
    with pytest.raises(SystemExit) as ended:
        run(*words.split())

    assert ended.value.code == 2


# -- asking ---------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("lot-list.txt", ("lot", "list", *AT)),
        ("lot-show.txt", ("lot", "show", "CH-2109", *AT)),
        ("lot-show-dead.txt", ("lot", "show", "TR-1904", *AT)),
        ("assay.txt", ("assay", str(DEMO / "readings-CH-2109.csv"))),
        ("stability.txt", ("lot", "stability", str(DEMO / "stability-collagenase-solution.csv"))),
    ],
)
def test_texts_letter_by_letter(demo, tmp_path, name, words):
    """What is printed is what is kept here, byte for byte, at 79 columns."""
    out = told(demo(*words)).replace(str(tmp_path), "…")

    assert out == (GOLDEN / name).read_text("utf-8")
    assert max(map(len, out.splitlines())) <= 79


@pytest.mark.parametrize(
    ("lot", "verdict"),
    [
        ("CH-2307", "CH-2307 is good enough as planned"),
        ("CH-2109", "CH-2109 may not be enough as planned"),
        ("TR-1904", "TR-1904 is as good as dead"),
    ],
)
def test_the_demo_has_a_good_a_doubtful_and_a_dead_lot(demo, lot, verdict):
    """The check says so in its first line, at 79 columns, with no colour."""
    plan = str(DEMO / "seal-skin-37.toml") if lot == "TR-1904" else PLAN
    out = told(demo("lot", "check", lot, "--plan", plan, *AT))

    assert out.startswith(verdict)
    assert max(map(len, out.splitlines())) <= 79
    assert "\x1b" not in out


@pytest.mark.parametrize(
    ("lot", "asked"),
    [
        *((lot, ()) for lot in ("CH-2307", "CH-2109", "TR-1904")),
        *((lot, ("--plan", PLAN)) for lot in ("CH-2307", "CH-2109")),
        *((lot, ("--needed", "0.7")) for lot in ("CH-2307", "CH-2109", "TR-1904")),
    ],
)
def test_a_check_is_the_interface_s_document(demo, lot, asked):
    """Exactly the promised keys, in their order, for every lot and question."""
    found = document(demo, schemas.CHECK, "lot", "check", lot, *asked, *AT)

    assert list(found) == schemas.CHECK["required"]
    left = found["remaining"]
    assert left["p05"] <= left["p50"] <= left["p95"]
    assert (found["from_assays"] is not None) == (lot == "CH-2307")
    assert (found["needed_fraction"] is None) == (asked == ())
    assert (found["chance_enough"] is None) == (asked == ())


def test_words_and_document_say_the_same(demo):
    """What the document holds is in the text: percentages, chance, factor, masses."""
    words = ("lot", "check", "CH-2109", "--plan", PLAN, *AT)
    found, text = document(demo, schemas.CHECK, *words), told(demo(*words))

    for part in ("remaining", "from_history"):
        for value in found[part].values():
            assert f"{100 * value:.0f} %" in text
    assert f"needs {100 * found['needed_fraction']:.0f} % of the label" in " ".join(text.split())
    assert f"chance {100 * found['chance_enough']:.0f} %" in text
    assert f"{found['charge_factor']:.3g} times" in text
    assert f"Weigh in {8 * found['charge_factor']:.3g} mg instead of 8 mg" in text
    assert "One more assay" in text


def test_an_assay_narrows_and_decides(demo):
    """Readings entered: the check is surer, both sources are told, and it is decided."""
    words = ("lot", "check", "CH-2109", "--plan", PLAN, *AT)
    before = document(demo, schemas.CHECK, *words)
    told(demo("lot", "assay", "CH-2109", str(DEMO / "readings-CH-2109.csv"), "--at", "2026-03-11"))
    after, text = document(demo, schemas.CHECK, *words), told(demo(*words))

    def width(found):
        return found["remaining"]["p95"] - found["remaining"]["p05"]

    assert width(after) < width(before) / 3
    assert after["remaining"]["p50"] == pytest.approx(0.66, abs=0.03)  # what the maker put in
    assert after["chance_enough"] < 0.1 < before["chance_enough"] < 0.9
    assert after["charge_factor"] > before["charge_factor"] > 1
    assert "its assay alone" in text
    assert "It is decided" in text


def test_a_contradiction_is_told_in_words_and_beside_the_document(demo):
    """An assay that does not fit is told first among the cautions, and on standard error."""
    told(demo("lot", "assay", "CH-2307", "--fraction", "0.3 ± 0.02", "--at", "2026-03-11"))
    out = told(demo("lot", "check", "CH-2307", *AT))
    status, found, err = demo("lot", "check", "CH-2307", *AT, "--json")

    assert "The assay of 2026-03-11" in out
    assert "does not fit" in " ".join(out.split())
    assert status == 0
    validate(json.loads(found), schemas.CHECK)
    assert "not fit" in err
    assert len(err.splitlines()) == 1


def test_cautions_of_a_check(demo):
    """Below freezing, past its date, too little in the bottle, powder to weigh: each is told."""
    frozen = told(demo("lot", "check", "CH-2307", *AT))
    late = told(demo("lot", "check", "CH-2109", *AT))
    told(demo("lot", "weigh", "CH-2307", "5 mg", "--at", "2026-03-11"))
    little = told(demo("lot", "check", "CH-2307", "--plan", PLAN, *AT))

    assert "sensitise the airways" in " ".join(frozen.split())
    assert "below 0 °C" in frozen
    assert "below 0 °C" not in late
    assert "supplier's date, 2026-03-01, is past" in late
    assert "The bottle holds 5 mg by the register; 8 mg is wanted" in " ".join(little.split())


def test_use_by_is_a_day_on_which_it_still_holds(demo):
    """On the day told it is still enough with the confidence, a month later no longer."""
    words = ("lot", "check", "CH-2307", "--needed", "0.9")
    told(demo("lot", "store", "CH-2307", "--temperature", "4C", "--at", "2026-03-01"))
    use_by = document(demo, schemas.CHECK, *words, *AT)["use_by"]
    later = (datetime.fromisoformat(use_by) + timedelta(days=31)).date().isoformat()

    on_day = document(demo, schemas.CHECK, *words, "--at", use_by)
    assert on_day["chance_enough"] == pytest.approx(0.9, abs=0.005)
    assert document(demo, schemas.CHECK, *words, "--at", later)["chance_enough"] < 0.9


def test_the_lot_s_own_ageing_takes_the_library_s_place(demo):
    """With stability data the history is far surer than with the library's habits."""
    told(demo(*BOTTLE))
    told(demo("lot", "store", "CH-1", "--temperature", "4C", "--form", "solution",
              "--at", "2026-02-20"))  # fmt: skip
    own = ("--stability", str(DEMO / "stability-collagenase-solution.csv"))

    def history(*more):
        left = document(demo, schemas.CHECK, "lot", "check", "CH-1", *AT, *more)["from_history"]
        return left["p05"], left["p50"], left["p95"]

    library, measured = history(), history(*own)
    assert measured[1] == pytest.approx(0.886, abs=0.02)  # 20 days at 0.006 a day, as made
    assert measured[2] / measured[0] < library[2] / library[0]


def test_a_ratio_plan_tells_the_powder(demo):
    """A plan in active enzyme asks for no fraction; the mass to weigh in is told instead."""
    words = ("lot", "check", "CH-2307", "--plan", str(DEMO / "seal-rib-edta.toml"), *AT)
    found, text = document(demo, schemas.CHECK, *words), told(demo(*words))

    assert found["needed_fraction"] is found["chance_enough"] is found["use_by"] is None
    assert "counts in active enzyme" in text
    assert "by the median of what is left" in text


# -- assay ----------------------------------------------------------------------------------


def test_an_assay_as_a_document(demo):
    """Rates, activities and their budget; the fraction needs the lot's label."""
    path = str(DEMO / "readings-CH-2307.csv")
    alone = document(demo, schemas.ASSAY, "assay", path)
    of_lot = document(demo, schemas.ASSAY, "assay", path, "--lot", "CH-2307")

    assert alone["unit"] == "FALGPA_U"
    assert alone["fraction_of_label"] is None
    fraction = of_lot["fraction_of_label"]
    assert fraction["value"] == pytest.approx(0.97, abs=3 * fraction["standard_uncertainty"])
    assert sum(line["share"] for line in fraction["budget"]) == pytest.approx(1)
    assert [t["shape"] for t in alone["traces"]] == ["straight"] * 3


def test_options_go_before_what_stands_in_the_file(demo):
    """Twice the dilution on the command line is twice the activity."""
    path = str(DEMO / "readings-CH-2307.csv")
    once = document(demo, schemas.ASSAY, "assay", path)["activity_per_mL"]["value"]
    twice = document(demo, schemas.ASSAY, "assay", path, "--dilution", "4")

    assert twice["activity_per_mL"]["value"] == pytest.approx(2 * once)


def test_readings_of_another_enzyme_are_not_a_fraction_of_this_label(demo):
    """Units without a factor from the certificate are refused, and nothing is entered."""
    status, _, err = demo("lot", "assay", "TR-1904", str(DEMO / "readings-CH-2307.csv"))

    assert status == 1
    assert "never converted" in err
    shown = document(demo, schemas.SHOW, "lot", "show", "TR-1904")
    assert all(e["kind"] != "assayed" for e in shown["written"])


# -- files ----------------------------------------------------------------------------------


def test_export_import_backup_verify(demo, tmp_path):
    """What goes out comes in again; what is there already is not taken twice."""
    out, copy = tmp_path / "out.jsonl", tmp_path / "copy.sqlite"
    told(demo("lot", "export", str(out)))
    told(demo("lot", "backup", str(copy)))
    again = json.loads(told(demo("lot", "import", str(out), "--json")))
    other = ("--register", str(tmp_path / "other.sqlite"))
    told(demo("lot", "import", str(out), *other))

    assert (again["new"], again["known"]) == (0, 17)
    lists = [told(demo("lot", "list", *AT, *r)).splitlines()[:-1] for r in ((), other)]
    assert lists[0] == lists[1]
    copied = told(demo("lot", "list", *AT, "--register", str(copy))).splitlines()[:-1]
    assert copied == lists[0]
    assert "All 17 entries" in told(demo("lot", "verify"))
    assert json.loads(told(demo("lot", "verify", "--json")))["sound"] is True


def test_a_changed_row_is_found(demo, tmp_path):
    """Verify names the first entry that is not as it was written, with status 1."""
    import sqlite3

    with sqlite3.connect(tmp_path / "lots.sqlite") as db:
        db.execute("DROP TRIGGER digestplan_event_no_update")
        db.execute("UPDATE digestplan_event SET at = '2020-01-01T12:00:00' WHERE seq = 5")
    db.close()
    status, out, err = demo("lot", "verify")

    assert (status, out) == (1, "")
    assert "row 5" in err


def test_lot_commands_load_no_more_than_they_need():
    """Help loads nothing; a listing loads the database library, but no numbers and no tables."""
    script = (
        "import sys\nfrom digestplan.cli.main import main\n"
        "try:\n    main(sys.argv[1:])\nexcept SystemExit:\n    pass\n"
        "heavy = {'numpy', 'scipy', 'pint', 'pandas', 'sqlalchemy', 'textual'}\n"
        "print('LOADED', *sorted(heavy & {n.split('.')[0] for n in sys.modules}), file=sys.stderr)"
    )

    def loaded(*words):
        done = subprocess.run(
            [sys.executable, "-c", script, *words], capture_output=True, text=True, check=True
        )
        return done.stderr.splitlines()[-1].split()[1:]

    assert loaded("lot", "--help") == []
    assert loaded("lot", "check", "--help") == []
    assert "pandas" not in loaded("lot", "list", "--register", "nowhere.sqlite")


@pytest.mark.parametrize(
    ("keep", "loads"),
    [(("label_activity", "remaining"), False), (("label_activity",), True), ((), True)],
)
def test_a_forecast_touches_the_register_only_where_it_must(demo, tmp_path, keep, loads):
    """A plan that names a lot and says all of it itself does not load the database library."""
    lines = Path(PLAN).read_text("utf-8").splitlines()
    kept = [x for x in lines if x.split(" ")[0] not in {"label_activity", "remaining"} - set(keep)]
    at = kept.index("[lot]") + 1
    plan = tmp_path / "plan.toml"
    plan.write_text("\n".join([*kept[:at], 'id = "CH-2307"', *kept[at:]]), "utf-8")
    script = (
        "import sys\nfrom digestplan.cli.main import main\nstatus = main(sys.argv[1:])\n"
        "print('sqlalchemy' in sys.modules, status, file=sys.stderr)"
    )
    words = ("forecast", str(plan), "--draws", "50", "--register", str(tmp_path / "lots.sqlite"))
    done = subprocess.run(
        [sys.executable, "-c", script, *words], capture_output=True, text=True, check=True
    )

    assert done.stderr.split() == [str(loads), "0"]
    assert ("Lot CH-2307" in done.stdout) == loads or "remaining" in keep


def test_a_forecast_with_a_lot_that_is_not_there_is_refused(demo, tmp_path):
    """A lot that the register does not know, and no register at all, end with 1 and a message."""
    plan = tmp_path / "plan.toml"
    text = Path(PLAN).read_text("utf-8").replace('remaining = "0.82 ± 0.06"', 'id = "CH-9999"')
    plan.write_text(text, "utf-8")
    status, out, err = demo("forecast", str(plan))
    assert (status, out) == (1, "")
    assert err.startswith(f"{plan}: lot.id: ")
    assert 'no lot "CH-9999"' in err

    status, out, err = demo("forecast", str(plan), "--register", str(tmp_path / "none.sqlite"))
    assert (status, out) == (1, "")
    assert "no lot register here" in err
