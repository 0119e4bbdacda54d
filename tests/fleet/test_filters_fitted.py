"""Fitting a filter element."""

from datetime import date, datetime, timedelta
from typing import Any

import pytest

from fleet.filters_fitted import correct, fit
from fleet.models import Element, Event, FilterPosition, Person, Standing
from fleet.refusals import RefusedError
from tests.builders import NOON, area, element, filter_position, person, reservoir, site

pytestmark = pytest.mark.django_db
DAY = date(2026, 5, 20)


@pytest.fixture
def tom(db: None) -> Person:
    return person()


def new(at: FilterPosition, day: date = DAY, **more: Any) -> Element:
    facts = {"part": "EL-3", "rating_kind": "beta", "beta": 200.0, "beta_size_um": 3.0}
    return Element(position=at, fitted_on=day, **(facts | more))


def spans(at: FilterPosition) -> list[tuple[date, date | None]]:
    return list(at.elements.order_by("fitted_on").values_list("fitted_on", "removed_on"))


def test_the_element_before_it_comes_out_with_what_was_found(tom: Person) -> None:
    position = filter_position(reservoir())
    old = element(position)
    fit(new(position), "indicator up; bronze in the pleats", tom, NOON)
    old.refresh_from_db()
    assert (old.removed_on, old.removal_note) == (DAY, "indicator up; bronze in the pleats")
    assert spans(position) == [(date(2025, 1, 1), DAY), (DAY, None)]


def test_the_change_is_on_the_reservoirs_record_at_noon_of_the_site(tom: Person) -> None:
    plant = site("Far works", time_zone="Asia/Tokyo")
    position = filter_position(reservoir(area=area(at=plant)))
    fit(new(position), "", tom, NOON)
    event = Event.objects.get()
    assert (event.kind, event.entered_by, event.note) == ("element_change", tom, "R1: EL-3 β3(c) ≥ 200")
    assert event.at == datetime(2026, 5, 20, 12, tzinfo=plant.zone)


def test_an_element_fitted_this_morning_is_no_event_of_the_future(tom: Person) -> None:
    morning = NOON - timedelta(hours=4)
    fit(new(filter_position(reservoir()), morning.date()), "", tom, morning)
    assert Event.objects.get().at == morning


def test_a_breather_is_logged_as_a_breather(tom: Person) -> None:
    fit(new(filter_position(reservoir(), place="breather")), "", tom, NOON)
    assert Event.objects.get().kind == "breather"


def test_two_elements_changed_on_one_day_share_the_event(tom: Person) -> None:
    tank = reservoir()
    for name in ("R1", "R2"):
        fit(new(filter_position(tank, name)), "", tom, NOON)
    assert Event.objects.get().note.splitlines() == ["R1: EL-3 β3(c) ≥ 200", "R2: EL-3 β3(c) ≥ 200"]


def test_an_element_entered_late_ends_where_the_next_began(tom: Person) -> None:
    position = filter_position(reservoir())
    element(position)
    fit(new(position), "", tom, NOON)
    fit(new(position, date(2025, 9, 1)), "", tom, NOON)
    assert spans(position) == [(date(2025, 1, 1), date(2025, 9, 1)), (date(2025, 9, 1), DAY), (DAY, None)]


def test_an_element_before_all_on_record_ends_where_the_first_began(tom: Person) -> None:
    position = filter_position(reservoir())
    element(position)
    fit(new(position, date(2024, 1, 1)), "", tom, NOON)
    assert spans(position) == [(date(2024, 1, 1), date(2025, 1, 1)), (date(2025, 1, 1), None)]


def test_a_second_element_on_the_same_day_is_refused_and_nothing_is_logged(tom: Person) -> None:
    position = filter_position(reservoir())
    element(position, DAY)
    with pytest.raises(RefusedError) as refusal:
        fit(new(position), "", tom, NOON)
    assert (refusal.value.code, refusal.value.field) == ("element_no_overlap", "fitted_on")
    assert not Event.objects.exists()


def test_a_rating_by_beta_needs_its_beta_ratio(tom: Person) -> None:
    with pytest.raises(RefusedError) as refusal:
        fit(new(filter_position(reservoir()), beta=None, beta_size_um=None), "", tom, NOON)
    assert refusal.value.code == "element_beta_rating_has_beta"


def test_a_correction_that_overlaps_is_refused() -> None:
    position = filter_position(reservoir())
    early = element(position, date(2024, 1, 1), removed_on=date(2025, 1, 1))
    element(position)
    early.removed_on = date(2025, 2, 1)
    with pytest.raises(RefusedError) as refusal:
        correct(early, NOON)
    assert refusal.value.code == "element_no_overlap"


def test_fitting_asks_for_a_fresh_outlook(tom: Person) -> None:
    position = filter_position(reservoir())
    fit(new(position), "", tom, NOON)
    assert Standing.objects.get(reservoir=position.reservoir).wanted_at == NOON


def test_a_corrected_day_takes_the_logged_change_with_it(tom: Person) -> None:
    position = filter_position(reservoir())
    fitted = fit(new(position), "", tom, NOON)
    fitted.fitted_on = date(2026, 4, 20)
    correct(fitted, NOON)
    assert [event.at.date() for event in Event.objects.all()] == [date(2026, 4, 20)]
