"""Logging what was done to the oil, and the oil charges that follow from it."""

from datetime import datetime
from threading import Barrier, Thread
from typing import Any

import pytest
from django.db import connection

from fleet import events
from fleet.models import Event, OilCharge, Reservoir, Standing
from fleet.refusals import RefusedError
from fleet.reservoirs import save_charge
from tests.builders import NOON, days_ago, fluid, reservoir

pytestmark = pytest.mark.django_db
FILLED = days_ago(1095)


def oil_change(of: Reservoir, at: datetime, **more: Any) -> Event:
    return events.log(Event(reservoir=of, kind="oil_change", at=at, **more), NOON)


def fillings(of: Reservoir) -> list[tuple[datetime, datetime | None]]:
    return list(of.charges.order_by("started_at").values_list("started_at", "ended_at"))


def test_a_top_up_leaves_the_oil_charge_alone() -> None:
    tank = reservoir()
    events.log(Event(reservoir=tank, kind="top_up", at=days_ago(3), litres=12), NOON)
    assert fillings(tank) == [(FILLED, None)]


def test_an_oil_change_closes_the_charge_and_opens_the_next() -> None:
    tank = reservoir()
    oil_change(tank, days_ago(30), fluid=fluid("HM 32"), litres=380)
    assert fillings(tank) == [(FILLED, days_ago(30)), (days_ago(30), None)]
    new = tank.charges.get(ended_at=None)
    assert (new.fluid.name, new.volume_l) == ("HM 32", 380)


def test_without_a_fluid_the_same_oil_was_filled_in() -> None:
    tank = reservoir()
    oil_change(tank, days_ago(30))
    new = tank.charges.get(ended_at=None)
    assert (new.fluid.name, new.volume_l) == ("HM 46", 400)


def test_an_oil_change_entered_late_splits_the_time_between() -> None:
    tank = reservoir()
    oil_change(tank, days_ago(30))
    oil_change(tank, days_ago(300))
    assert fillings(tank) == [(FILLED, days_ago(300)), (days_ago(300), days_ago(30)), (days_ago(30), None)]


def test_an_oil_change_before_all_oil_on_record_ends_where_that_begins() -> None:
    tank = reservoir()
    oil_change(tank, days_ago(1200), fluid=fluid())
    assert fillings(tank) == [(days_ago(1200), FILLED), (FILLED, None)]


def test_an_oil_change_at_the_very_start_describes_the_filling_on_record() -> None:
    tank = reservoir()
    oil_change(tank, FILLED, fluid=fluid("HM 68"), litres=410)
    assert [(charge.fluid.name, charge.volume_l) for charge in tank.charges.all()] == [("HM 68", 410)]


def test_the_first_oil_change_of_an_empty_reservoir_must_name_its_oil() -> None:
    tank = reservoir()
    tank.charges.all().delete()
    with pytest.raises(RefusedError) as refusal:
        oil_change(tank, days_ago(30))
    assert (refusal.value.code, refusal.value.field) == ("oil_unknown", "fluid")
    assert not Event.objects.exists()


def test_the_same_event_twice_is_refused_and_leaves_nothing_behind() -> None:
    tank = reservoir()
    oil_change(tank, days_ago(30))
    with pytest.raises(RefusedError) as refusal:
        oil_change(tank, days_ago(30))
    assert refusal.value.code == "event_once_a_moment"
    assert (Event.objects.count(), OilCharge.objects.count()) == (1, 2)


@pytest.mark.parametrize("moved_to", [days_ago(45), days_ago(15)])
def test_correcting_the_time_moves_the_line_between_two_fillings(moved_to: datetime) -> None:
    tank = reservoir()
    change = oil_change(tank, days_ago(30))
    change.at = moved_to
    events.correct(change, NOON)
    assert fillings(tank) == [(FILLED, moved_to), (moved_to, None)]


def test_an_oil_change_cannot_be_moved_before_the_one_before_it() -> None:
    tank = reservoir()
    oil_change(tank, days_ago(300))
    change = oil_change(tank, days_ago(30))
    change.at = days_ago(400)
    with pytest.raises(RefusedError) as refusal:
        events.correct(change, NOON)
    assert refusal.value.code in {"charge_span_forward", "charge_no_overlap"}
    assert fillings(tank)[-1] == (days_ago(30), None)


def test_correcting_the_oil_corrects_the_charge() -> None:
    tank = reservoir()
    change = oil_change(tank, days_ago(30))
    change.fluid = fluid("HM 32")
    events.correct(change, NOON)
    assert tank.charges.get(ended_at=None).fluid.name == "HM 32"


def test_an_event_that_turns_out_to_be_no_oil_change_takes_its_charge_back() -> None:
    tank = reservoir()
    change = oil_change(tank, days_ago(30))
    change.kind, change.litres = "top_up", 20
    events.correct(change, NOON)
    assert fillings(tank) == [(FILLED, None)]


def test_a_top_up_that_turns_out_to_be_an_oil_change_begins_a_charge() -> None:
    tank = reservoir()
    event = events.log(Event(reservoir=tank, kind="top_up", at=days_ago(30), litres=400), NOON)
    event.kind = "oil_change"
    events.correct(event, NOON)
    assert fillings(tank) == [(FILLED, days_ago(30)), (days_ago(30), None)]


def test_removing_an_oil_change_lets_the_oil_before_it_go_on() -> None:
    tank = reservoir()
    change = oil_change(tank, days_ago(300))
    oil_change(tank, days_ago(30))
    events.remove(change, NOON)
    assert fillings(tank) == [(FILLED, days_ago(30)), (days_ago(30), None)]


def test_the_oil_change_that_began_the_first_oil_on_record_cannot_be_removed() -> None:
    tank = reservoir()
    change = oil_change(tank, FILLED)
    with pytest.raises(RefusedError) as refusal:
        events.remove(change, NOON)
    assert refusal.value.code == "first_oil"
    assert Event.objects.filter(pk=change.pk).exists()


def test_every_change_asks_for_a_fresh_outlook() -> None:
    tank = reservoir()
    event = events.log(Event(reservoir=tank, kind="breather", at=days_ago(3)), NOON)
    for change in (events.correct, events.remove):
        Standing.objects.update(wanted_at=None)
        change(event, NOON)
        assert Standing.objects.get(reservoir=tank).wanted_at == NOON


@pytest.mark.django_db(transaction=True)
def test_two_people_who_log_oil_changes_at_once_leave_whole_fillings() -> None:
    tank = reservoir()
    moments = [days_ago(30), days_ago(20)]
    start = Barrier(2)

    def log(at: datetime) -> None:
        start.wait()
        oil_change(tank, at)
        connection.close()

    threads = [Thread(target=log, args=[at]) for at in moments]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert fillings(tank) == [(FILLED, moments[0]), (moments[0], moments[1]), (moments[1], None)]


@pytest.mark.parametrize("kind", ["oil_change", "partial_change", "top_up"])
def test_more_litres_than_the_reservoir_could_hold_are_refused(kind: str) -> None:
    tank = reservoir(volume_l=360)
    with pytest.raises(RefusedError) as refusal:
        events.log(Event(reservoir=tank, kind=kind, at=days_ago(3), litres=9999), NOON)
    assert (refusal.value.code, refusal.value.field) == ("litres_too_many", "litres")
    assert "9999 L do not fit" in refusal.value.sentence
    assert "360 L on record. Correct the litres, or the volume" in refusal.value.sentence
    assert (Event.objects.count(), fillings(tank)) == (0, [(FILLED, None)])


def test_pipes_and_cylinders_may_hold_half_as_much_again() -> None:
    oil_change(reservoir(volume_l=360), days_ago(3), litres=540)
    assert OilCharge.objects.get(ended_at=None).volume_l == 540


@pytest.mark.parametrize(("litres", "volume"), [(380, 380), (None, 400)])
@pytest.mark.parametrize("moved_to", [days_ago(30), days_ago(45)])
def test_corrected_litres_are_the_charges_too(litres: float | None, volume: float, moved_to: datetime) -> None:
    tank = reservoir()
    change = oil_change(tank, days_ago(30), litres=410)
    change.litres, change.at = litres, moved_to
    events.correct(change, NOON)
    assert tank.charges.get(ended_at=None).volume_l == volume


def test_a_volume_corrected_on_the_charge_outlives_a_note_on_the_event() -> None:
    tank = reservoir()
    change = oil_change(tank, days_ago(30))
    tank.charges.filter(ended_at=None).update(volume_l=350)
    change.note = "new filter, too"
    events.correct(change, NOON)
    assert tank.charges.get(ended_at=None).volume_l == 350


def test_a_charge_cannot_hold_more_than_its_reservoir_could() -> None:
    charge = reservoir(volume_l=360).charges.get()
    charge.volume_l = 9999
    with pytest.raises(RefusedError) as refusal:
        save_charge(charge, NOON)
    assert (refusal.value.code, refusal.value.field) == ("litres_too_many", "volume_l")
