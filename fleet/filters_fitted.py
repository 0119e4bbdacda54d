"""Fitting a filter element: the one before it comes out, and the event is on the reservoir's record."""

from datetime import date, datetime, time

from fleet.models import Element, Event, FilterPosition, Person
from fleet.refresh import want_refresh
from fleet.refusals import refusing

NOON = time(12)


def fit(element: Element, found: str, by: Person, now: datetime) -> Element:
    """Fit a new element on its day. Whatever was in the position until then is removed, with what was found in it.

    An element that is entered late, before one that is on record already, ends on the day that one was fitted.
    """
    with refusing():
        position = _hold(element.position_id)
        others = position.elements.exclude(pk=element.pk)
        earlier = others.filter(fitted_on__lt=element.fitted_on).order_by("-fitted_on").first()
        later = others.filter(fitted_on__gt=element.fitted_on).order_by("fitted_on").first()
        if earlier is not None and (earlier.removed_on is None or earlier.removed_on > element.fitted_on):
            earlier.removed_on = element.fitted_on
            earlier.removal_note = found or earlier.removal_note
            earlier.save(update_fields=["removed_on", "removal_note"])
        element.removed_on = later.fitted_on if later else None
        element.save(force_insert=True)
        _log_change(position, element, by, now)
        want_refresh([position.reservoir_id], now)
    return element


def correct(element: Element, now: datetime) -> Element:
    """Save what was wrong about an element that is on record; a corrected day takes the logged event with it."""
    with refusing():
        position = _hold(element.position_id)
        was = Element.objects.get(pk=element.pk).fitted_on
        element.save()
        if was != element.fitted_on:
            _move_change(position, was, element.fitted_on, now)
        want_refresh([position.reservoir_id], now)
    return element


def _hold(position_id: int) -> FilterPosition:
    positions = FilterPosition.objects.select_related("reservoir__area__site")
    return positions.select_for_update(of=("self",)).get(pk=position_id)


def _moment(position: FilterPosition, day: date, now: datetime) -> datetime:
    """The day has no hour: noon of the site stands for it, or now when noon is still to come."""
    return min(datetime.combine(day, NOON, tzinfo=position.reservoir.area.site.zone), now)


def _kind(position: FilterPosition) -> Event.Kind:
    is_breather = position.place == FilterPosition.Place.BREATHER
    return Event.Kind.BREATHER if is_breather else Event.Kind.ELEMENT_CHANGE


def _move_change(position: FilterPosition, was: date, day: date, now: datetime) -> None:
    """Move the event that fitting logged, unless a person has given it an hour or another position shares it."""
    shared = Element.objects.filter(position__reservoir=position.reservoir_id, fitted_on=was).exists()
    events = Event.objects.filter(reservoir=position.reservoir_id, kind=_kind(position))
    if not shared:
        events.filter(at=_moment(position, was, now)).update(at=_moment(position, day, now))


def _log_change(position: FilterPosition, element: Element, by: Person, now: datetime) -> None:
    note = f"{position.name}: {' '.join(filter(None, [element.part, element.rating]))}"
    event, is_new = Event.objects.get_or_create(
        reservoir_id=position.reservoir_id,
        kind=_kind(position),
        at=_moment(position, element.fitted_on, now),
        defaults={"note": note, "entered_by": by},
    )
    if not is_new:
        event.note = f"{event.note}\n{note}".strip()
        event.save(update_fields=["note"])
