"""What people come for, from opening a plan to what they take away."""

import pytest

from digestplan.app.main import DigestplanApp
from digestplan.app.screens.text_view import TextScreen
from digestplan.app.session import Session
from digestplan.app.widgets.form import Form
from digestplan.app.widgets.quantity_field import FieldRow
from tests.app.conftest import DEMO, picture, press, settle

DRAWS = 250


def field(app, place):
    """Return the field of a place."""
    found = app.plan_screen.query_one(Form).field_at(place)
    assert found is not None, place
    return found


async def type_into(app, pilot, place, text):
    """Go to a field, type over what stands there, and wait for the answer."""
    field(app, place).focus()
    await pilot.pause()
    await pilot.press("ctrl+u", *("space" if c == " " else c for c in text))
    await settle(app, pilot)


class TestTheSpecialist:
    """Plans an overnight treatment, and has to say when to come in."""

    async def test_changes_charge_and_chill_until_it_is_in_time_and_saves(self, tendon):
        """More enzyme and a later chill bring the chance over 90 %, and the file keeps them."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        before = tendon.read_text("utf-8")
        async with app.run_test(size=(120, 36), notifications=True) as pilot:
            await settle(app, pilot)
            assert 0.5 < app.answer.chance < 0.9
            await type_into(app, pilot, "steps[0].charge", "9 mg")
            more_enzyme = app.answer.chance
            await type_into(app, pilot, "steps[0].temperature[2].for", "5 h 30 min")
            assert app.answer.chance > more_enzyme
            assert app.answer.chance > 0.9
            assert "* changed" in picture(app)
            await press(app, pilot, "f2")
            assert "* changed" not in picture(app)

        changed = zip(before.splitlines(), tendon.read_text("utf-8").splitlines(), strict=True)
        assert [new for old, new in changed if old != new] == [
            'charge = "9 mg"',
            '  { at = "37 ± 0.5 degC", for = "5 h 30 min" },',
        ]

    async def test_is_told_of_a_wrong_unit_beside_the_field(self, tendon):
        """A mass where a volume is wanted is told in words, and the forecast stays in sight."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            await type_into(app, pilot, "steps[0].volume", "3 mg")
            row = field(app, "steps[0].volume").parent
            assert isinstance(row, FieldRow)
            assert "is a mass; a volume is wanted here" in row.problem
            assert "is a mass" in picture(app)
            assert "extent, 5–95 %" in picture(app)
            await type_into(app, pilot, "steps[0].volume", "3 mL")
            assert row.problem == ""

    async def test_sees_the_value_in_another_unit_and_the_default_with_its_source(self, tendon):
        """90 min is 1.5 h; an empty field shows the library's value and where it is from."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            await type_into(app, pilot, "sample.known_run.duration", "90 min")
            assert field(app, "sample.known_run.duration").parent.note == "= 1.5 h"
            await type_into(app, pilot, "sample.substrate_fraction", "")
            emptied = field(app, "sample.substrate_fraction")
            assert "substrate_fraction" not in app.session.tables["sample"]
            assert emptied.placeholder
            assert emptied.parent.note.startswith("library: ")

    async def test_writes_the_bench_sheet(self, tendon, tmp_path):
        """F7 shows the sheet, and F2 there writes it with every caution."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36), notifications=True) as pilot:
            await settle(app, pilot)
            cautions = app.answer.cautions
            await press(app, pilot, "f7")
            assert "Weigh and pipette" in picture(app)
            await press(app, pilot, "f2", "enter")
            await press(app, pilot, "escape")
        written = (tmp_path / "tendon.html").read_text("utf-8")
        assert cautions
        assert all(caution.text[:40] in written for caution in cautions)

    async def test_takes_back_and_does_again(self, tendon):
        """Undo brings the field's text back, redo the new one."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            await type_into(app, pilot, "steps[0].charge", "11 mg")
            await press(app, pilot, "ctrl+z")
            assert field(app, "steps[0].charge").value == "8 mg"
            await press(app, pilot, "ctrl+y")
            assert field(app, "steps[0].charge").value == "11 mg"


class TestTheLab:
    """Chooses between temperatures."""

    async def test_compares_temperatures_and_takes_one(self, tendon):
        """The options stand side by side; Enter makes one the plan, and undo takes it back."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36), notifications=True) as pilot:
            await settle(app, pilot)
            await press(app, pilot, "f6")
            shown = picture(app)
            assert all(f"{t} °C" in shown for t in (4, 20, 37, 45, 56))
            await press(app, pilot, "down", "down", "enter")
            stretches = app.session.steps[0]["temperature"]
            assert [s.get("at") or s.get("to") for s in stretches] == [
                *("22 degC", "30 ± 0.5 degC", "30 ± 0.5 degC"),
                *("4 degC", "4 degC"),
            ]
            await press(app, pilot, "ctrl+z")
            assert not app.session.dirty


class TestEverybody:
    """Steps, views, bad files, other people's changes."""

    async def test_adds_moves_copies_and_removes_steps_by_keys(self, tendon):
        """Every change of the steps has its key."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            field(app, "steps[0].charge").focus()
            await press(app, pilot, "ctrl+n", "end", "enter")
            assert [s["do"] for s in app.session.steps] == ["digest", "hold"]
            field(app, "steps[0].charge").focus()
            await press(app, pilot, "ctrl+t")
            assert [s["do"] for s in app.session.steps] == ["digest", "digest", "hold"]
            field(app, "steps[2].temperature").focus()
            await press(app, pilot, "ctrl+n")
            assert len(app.session.steps[2]["temperature"]) == 2
            await press(app, pilot, "ctrl+r")
            assert len(app.session.steps[2]["temperature"]) == 1
            field(app, "steps[1].charge").focus()
            await press(app, pilot, "shift+up", "ctrl+r")
            assert [s["do"] for s in app.session.steps] == ["digest", "hold"]
            assert app.answer.plan is not None

    async def test_adds_a_visit_a_day_later(self, tendon):
        """A visit is added where the focus is on one, and forecast."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            field(app, "visits[0]").focus()
            await press(app, pilot, "ctrl+n")
            assert app.session.tables["visits"][1] == "2026-03-14T08:30 / 2026-03-14T17:00"
            assert len(app.answer.picture.visits) == 2

    async def test_a_file_with_problems_is_mended_as_text(self, tendon):
        """A file that is no TOML opens in the text view; once mended the form is there."""
        good = tendon.read_text("utf-8")
        tendon.write_text(good.replace('charge = "8 mg"', "charge = 0,5 mg"), "utf-8")
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36), notifications=True) as pilot:
            await settle(app, pilot)
            assert isinstance(app.screen, TextScreen)
            assert "1 thing is wrong" in picture(app)
            await press(app, pilot, "escape")
            assert isinstance(app.screen, TextScreen)  # there is no form to go back to
            app.screen.query_one("#source").text = good
            await settle(app, pilot)
            assert "Nothing is wrong" in picture(app)
            await press(app, pilot, "escape")
            assert field(app, "steps[0].charge").value == "8 mg"
            assert "Come Fri 13 Mar" in picture(app)

    async def test_problems_are_listed_by_place_and_lead_to_their_line(self, tendon):
        """Two mistakes are two lines of the list; Enter goes there."""
        text = tendon.read_text("utf-8").replace('"3 mL"', '"3 mg"').replace('"180 mg', '"180 mm')
        tendon.write_text(text, "utf-8")
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            assert isinstance(app.screen, TextScreen)
            assert app.screen.query_one("#problems").option_count == 2
            await press(app, pilot, "f6", "end", "enter")
            line = app.screen.query_one("#source").cursor_location[0]
            assert "3 mg" in text.splitlines()[line]

    async def test_user_text_is_literal_everywhere(self, tmp_path):
        """A plan whose every text is [/x] opens, and the text is shown letter for letter."""
        path = tmp_path / "[red].toml"
        text = (DEMO / "porpoise-tendon-overnight.toml").read_text("utf-8")
        title = text.split('title = "')[1].split('"')[0]
        for old in (title, "tris", "tendon\n"):
            text = text.replace(old, "[/x][@click=app.quit]")
        path.write_text(text.replace('id = "', 'id = "[/x]'), "utf-8")
        app = DigestplanApp(Session.opened(path), draws=DRAWS)
        async with app.run_test(size=(120, 36), notifications=True) as pilot:
            await settle(app, pilot)
            assert isinstance(app.screen, TextScreen)  # the buffer [/x] is not known
            await press(app, pilot, "escape")
            assert "[/x][@click=app.quit]" in picture(app)
            for place in ("sample.material", "sample.shape", "steps[0].volume", "visits[0]"):
                await type_into(app, pilot, place, "[/x]")
            for key in ("f1", "f3", "f4"):
                await press(app, pilot, key, "escape")
            app.tell("[/x]")
            await type_into(app, pilot, "steps[0].buffer", "tris")
            assert app.session.tables["sample"]["shape"] == "[/x]"

    async def test_a_title_of_markup_goes_onto_the_sheet_letter_for_letter(self, tendon):
        """The sheet's view shows brackets as they are."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            await type_into(app, pilot, "title", "[/x]")
            await press(app, pilot, "f7")
            assert "/x" in picture(app)
            await press(app, pilot, "escape", "f5")
            assert "CARE" in picture(app)

    async def test_a_change_by_somebody_else_is_noticed_and_asked_about(self, tendon):
        """Saving over another's change asks first; reading again can be undone."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36), notifications=True) as pilot:
            await settle(app, pilot)
            await type_into(app, pilot, "steps[0].charge", "11 mg")
            theirs = tendon.read_text("utf-8").replace("180 mg", "170 mg")
            tendon.write_text(theirs, "utf-8")
            app._keep()
            await pilot.pause()
            assert "changed by somebody else" in picture(app)
            await press(app, pilot, "f2")
            assert "changed by somebody else since it was opened" in picture(app)
            await press(app, pilot, "escape")
            assert tendon.read_text("utf-8") == theirs
            assert app.session.dirty

    async def test_leaving_with_unsaved_work_asks(self, tendon):
        """F10 leaves at once only where nothing is unsaved; Esc stays."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            await type_into(app, pilot, "steps[0].charge", "11 mg")
            await press(app, pilot, "f10")
            assert "not saved" in picture(app)
            await press(app, pilot, "escape")
            assert app.is_running
            assert app.session.dirty

    async def test_unsaved_work_is_kept_within_two_seconds(self, tendon):
        """What was typed stands in the recovery file, and is offered to the next who opens."""
        app = DigestplanApp(Session.opened(tendon), draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            await type_into(app, pilot, "steps[0].charge", "11 mg")
            await pilot.pause(1.5)
            (kept,) = app.recovery.folder.iterdir()
            assert "11 mg" in kept.read_text("utf-8")

    async def test_a_new_plan_is_made_from_a_protocol_and_a_demo_opens(self, tmp_path):
        """Without a plan the choice of plans is there; a demo opens as a copy without a file."""
        app = DigestplanApp(draws=DRAWS)
        async with app.run_test(size=(120, 36)) as pilot:
            await settle(app, pilot)
            assert "New, from a protocol" in picture(app)
            await press(app, pilot, "enter")
            assert app.session.path is None
            assert app.answer.plan is not None
            assert list(tmp_path.glob("*.toml")) == []


@pytest.mark.parametrize("path", sorted(DEMO.glob("*.toml")), ids=lambda p: p.stem)
async def test_every_demo_plan_opens_with_an_answer(path):
    """Each demo plan has a form, a forecast and its cautions."""
    app = DigestplanApp(Session(path.read_text("utf-8")), draws=50)
    async with app.run_test(size=(120, 36)) as pilot:
        await settle(app, pilot)
        assert app.answer.picture is not None
        assert app.answer.problems == ()
        assert "Care" in picture(app)
