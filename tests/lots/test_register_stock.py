"""What the events of a lot add up to, corrections applied."""

import random
from datetime import datetime, timedelta
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.lots.register import stock
from digestplan.lots.register.admission import entry_of
from digestplan.lots.register.timeline import StorageStretch, Thaw

UNTIL = datetime(2026, 3, 31, 12)


def record(*events):
    """A lot's history from its events, in the order of writing."""
    return stock.record(stock.live([entry_of(event) for event in events]))


def summary(*events):
    return record(*events).summary


# -- mass -----------------------------------------------------------------------------------


def test_what_is_used_is_taken_off(bottle):
    """100 mg less 6 mg and 12 mg are 82 mg."""
    lot = summary(bottle.received(), bottle.used(4, mass=0.006), bottle.used(5, mass=0.012))
    assert lot.remaining_mass == pytest.approx(0.082, abs=1e-12)
    assert lot.overdrawn_mass == 0


def test_a_weighing_counts_from_its_time_on(bottle):
    """What was used before a weighing is in it, whenever it was written down."""
    lot = summary(
        bottle.received(),
        bottle.weighed(10, mass=0.050),
        bottle.used(12, mass=0.010),
        bottle.used(5, mass=0.030),  # written down late
    )
    assert lot.remaining_mass == pytest.approx(0.040, abs=1e-12)


def test_using_all_of_it_leaves_nothing_and_no_caution(bottle):
    """Ten times a tenth is all of it, whatever the computer makes of a tenth."""
    lot = summary(bottle.received(mass=1.0), *(bottle.used(4, mass=0.1) for _ in range(10)))
    assert (lot.remaining_mass, lot.overdrawn_mass) == (0, 0)


def test_stock_never_goes_below_zero_silently(bottle):
    """More used than there was is a caution with its amount, until it is weighed."""
    events = [bottle.received(), bottle.used(4, mass=0.130)]
    lot = summary(*events)
    assert (lot.remaining_mass, lot.overdrawn_mass) == (0, pytest.approx(0.030))
    lot = summary(*events, bottle.weighed(5, mass=0.004))
    assert (lot.remaining_mass, lot.overdrawn_mass) == (0.004, 0)


def test_a_mass_that_nobody_knew_stays_unknown_until_it_is_weighed(bottle):
    """No number is made up for a bottle that came without one."""
    events = [bottle.received(mass=None), bottle.used(4, mass=0.006)]
    assert summary(*events).remaining_mass is None
    assert summary(*events, bottle.weighed(5, mass=0.0)).remaining_mass == 0


def test_use_after_discard_is_told(bottle):
    """Enzyme out of a bottle that was thrown away is a mistake somewhere."""
    gone = [bottle.received(), bottle.discarded(5)]
    lot = summary(*gone, bottle.used(4, mass=0.006))
    assert (lot.discarded_at.day, lot.used_after_discard) == (5, False)
    assert summary(*gone, bottle.used(6, mass=0.006)).used_after_discard


# -- corrections ----------------------------------------------------------------------------


def test_an_event_taken_back_does_not_count(bottle):
    """A thaw that never was is not counted."""
    thaw = bottle.thawed(4, count=3)
    events = [bottle.received(), thaw, bottle.corrected(9, corrects=thaw.id)]
    assert summary(*events).thaws == 0
    assert [event.kind for event in record(*events).events] == ["received"]


def test_a_replacement_counts_with_its_own_time(bottle):
    """The replaced event keeps its id, and is read where it belongs in time."""
    use = bottle.used(4, mass=0.006)
    new = bottle.used(20, mass=0.060)
    found = record(
        bottle.received(),
        use,
        bottle.weighed(10, mass=0.09),
        bottle.corrected(21, corrects=use.id, replacement=new),
    )
    assert found.summary.remaining_mass == pytest.approx(0.030)
    assert [(e.id, e.at.day, e.mass) for e in found.uses] == [(use.id, 20, 0.060)]


def test_the_newest_correction_counts(bottle):
    """Correcting once more replaces the correction; taking that back brings the other again."""
    use = bottle.used(4, mass=0.006)
    first = bottle.corrected(5, corrects=use.id, replacement=bottle.used(4, mass=0.016))
    second = bottle.corrected(6, corrects=use.id, replacement=bottle.used(4, mass=0.026))
    back = bottle.corrected(7, corrects=second.id)
    again = bottle.corrected(8, corrects=back.id)
    story, left = [bottle.received(), use], []
    for event in (first, second, back, again):
        story.append(event)
        left.append(round(summary(*story).remaining_mass, 9))
    assert left == [0.084, 0.074, 0.084, 0.074]


def test_a_receipt_can_be_replaced(bottle):
    """A wrong label is put right without losing what followed."""
    first = bottle.received(label_activity="280 CDU/mg")
    new = bottle.received(label_activity="208 CDU/mg", mass=0.2)
    found = record(
        first, bottle.used(4, mass=0.006), bottle.corrected(5, corrects=first.id, replacement=new)
    )
    assert found.received.label_activity == found.summary.label_activity == "208 CDU/mg"
    assert found.summary.remaining_mass == pytest.approx(0.194)


@settings(deadline=None, derandomize=True, max_examples=60)
@given(st.integers(0, 2**32))
def test_corrections_add_up_as_if_nothing_had_been_wrong(seed):
    """Any tangle of corrections leaves what a plain walk through them, newest first, leaves."""
    chance = random.Random(seed)
    from digestplan.lots.register import events as ev

    at = datetime(2026, 3, 1)
    given = {"enzyme": "trypsin", "form": "dry", "temperature": 277.15, "mass": 1.0}
    written = [ev.Received(lot="A", at=at, **given)]
    for _ in range(25):
        target = chance.choice(written[1:]) if len(written) > 1 and chance.random() < 0.5 else None
        if target is None:
            written.append(ev.Used(lot="A", at=at, mass=chance.randint(1, 9) / 1000))
        else:
            new = ev.Used(lot="A", at=at, mass=chance.randint(1, 9) / 1000)
            void = target.kind == "corrected" or chance.random() < 0.3
            written.append(
                ev.Corrected(lot="A", at=at, corrects=target.id, replacement=None if void else new)
            )

    def counts(correction):
        """Whether nothing that counts takes a correction back."""
        later = [e for e in written if e.kind == "corrected" and e.corrects == correction.id]
        return not any(counts(e) for e in later)

    left = 1000
    for use in (e for e in written if e.kind == "used"):
        found = [e for e in written if e.kind == "corrected" and e.corrects == use.id and counts(e)]
        meant = found[-1].replacement if found else use
        left -= round(meant.mass * 1000) if meant else 0
    assert summary(*written).remaining_mass == pytest.approx(left / 1000, abs=1e-9)


# -- storage --------------------------------------------------------------------------------


def test_stretches_follow_moves_openings_and_excursions(bottle):
    """One month of a bottle, cut at every change."""
    found = record(
        bottle.received(place="freezer 1", temperature_sd=2.0),
        bottle.opened(3),
        bottle.moved(8, temperature=277.15, form="glycerol", place="fridge 2"),
        bottle.transported(9, temperature=295.15, hours=30.0),
        bottle.discarded(20),
    )
    received, day = datetime(2026, 3, 1, 9), lambda d: datetime(2026, 3, d, 12)
    back = day(9) + timedelta(hours=30)
    assert found.stretches(UNTIL) == (
        StorageStretch(received, day(3), 253.15, "dry", False, 2.0, "freezer 1"),
        StorageStretch(day(3), day(8), 253.15, "dry", True, 2.0, "freezer 1"),
        StorageStretch(day(8), day(9), 277.15, "glycerol", True, 0.0, "fridge 2"),
        StorageStretch(day(9), back, 295.15, "glycerol", True),
        StorageStretch(back, day(20), 277.15, "glycerol", True, 0.0, "fridge 2"),
    )
    assert found.stretches(UNTIL)[3].hours == 30


def test_the_way_to_the_lab_comes_before_the_receipt(bottle):
    """Days in a warm van count, though the register knew the lot only afterwards."""
    left = datetime(2026, 2, 27, 9)
    found = record(bottle.received(), bottle.transported(left, temperature=303.15, hours=48.0))
    way, kept = found.stretches(UNTIL)
    assert (way.start, way.end, way.temperature) == (left, datetime(2026, 3, 1, 9), 303.15)
    assert (kept.start, kept.end, kept.temperature) == (way.end, UNTIL, 253.15)


def test_a_gap_before_the_receipt_is_left_open(bottle):
    """Where it was between the van and the receipt, nobody knows."""
    found = record(
        bottle.received(),
        bottle.transported(datetime(2026, 2, 27, 9), temperature=303.15, hours=24.0),
    )
    assert [(s.start.day, s.end.day) for s in found.stretches(UNTIL)] == [(27, 28), (1, 31)]


def test_a_record_ends_when_it_is_asked_to(bottle):
    """Nothing after the asked time is in the stretches; before the receipt there are none."""
    found = record(bottle.received(), bottle.moved(20, temperature=277.15))
    (only,) = found.stretches(datetime(2026, 3, 10))
    assert (only.end, only.temperature) == (datetime(2026, 3, 10), 253.15)
    assert found.stretches(datetime(2026, 2, 1)) == ()


def test_a_thaw_is_counted_in_the_form_of_its_time(bottle):
    """The same bottle thaws as a powder at first, and as a solution later."""
    found = record(
        bottle.received(),
        bottle.thawed(2),
        bottle.moved(8, temperature=253.15, form="solution"),
        bottle.thawed(9, count=2),
    )
    assert found.thaws == (
        Thaw(datetime(2026, 3, 2, 12), "dry", 1),
        Thaw(datetime(2026, 3, 9, 12), "solution", 2),
    )
    assert found.summary.thaws == 3


def test_sealing_again_is_a_move(bottle):
    """A bottle that was opened can be kept sealed again, under dry gas say."""
    found = record(bottle.received(opened=True), bottle.moved(8, temperature=253.15, opened=False))
    assert [s.opened for s in found.stretches(UNTIL)] == [True, False]
    assert not found.summary.opened


def _walk(events, at):
    """Temperature and state at one time, by plain reasoning from the newest event back."""
    done = [e for e in sorted(events, key=lambda e: e.at) if e.at <= at]
    for trip in reversed(done):
        if trip.kind == "transported" and at < trip.at + timedelta(hours=trip.hours):
            temperature = trip.temperature
            break
    else:
        temperature = [e for e in done if e.kind in {"received", "moved"}][-1].temperature
    opened = False
    for event in done:
        if event.kind == "opened":
            opened = True
        elif event.kind == "moved" and event.opened is not None:
            opened = event.opened
    return temperature, opened


@settings(deadline=None, derandomize=True, max_examples=60)
@given(st.integers(0, 2**32))
def test_stretches_are_what_a_walk_through_time_finds(seed):
    """At any moment the stretch that covers it says what plain reasoning says, without overlap."""
    from digestplan.lots.register import events as ev

    chance = random.Random(seed)
    start = datetime(2026, 3, 1)
    given = {"enzyme": "trypsin", "form": "dry", "temperature": 250.0}
    events = [ev.Received(lot="A", at=start, **given)]
    for _ in range(12):
        at = start + timedelta(hours=chance.randint(0, 700))
        kelvin = float(chance.randint(250, 310))
        events.append(
            chance.choice(
                [
                    ev.Moved(lot="A", at=at, temperature=kelvin),
                    ev.Moved(lot="A", at=at, temperature=kelvin, opened=chance.random() < 0.5),
                    ev.Transported(lot="A", at=at, temperature=kelvin, hours=chance.randint(1, 90)),
                    ev.Opened(lot="A", at=at),
                ]
            )
        )
    stretches = record(*events).stretches(UNTIL)
    assert (stretches[0].start, stretches[-1].end) == (start, UNTIL)
    assert all(one.end == two.start for one, two in pairwise(stretches))
    for _ in range(50):
        at = start + timedelta(minutes=chance.randint(0, 30 * 24 * 60))
        (there,) = (s for s in stretches if s.start <= at < s.end)
        assert (there.temperature, there.opened) == _walk(events, at)


# -- summary --------------------------------------------------------------------------------


def test_a_summary_tells_how_a_lot_is_kept_now(bottle):
    """The last storage, form, place and assay are those of the listing."""
    lot = summary(
        bottle.received(place="freezer 1"),
        bottle.assayed(4, activity="231 ± 9 CDU/mg"),
        bottle.assayed(6, fraction=0.8, standard_error=0.05),
        bottle.moved(8, temperature=277.15, form="solution"),
    )
    assert (lot.temperature, lot.place, lot.form, lot.opened) == (277.15, "", "solution", False)
    assert (lot.assayed_at.day, lot.fraction, lot.standard_error) == (6, 0.8, 0.05)
    assert lot.activity is None
    assert lot.last_event_at.day == 8


def test_a_lot_that_was_never_received_is_no_lot(bottle):
    """Events alone make no bottle."""
    assert stock.record([entry_of(bottle.opened(3))]) is None
