"""What was done to the oil: an event and the oil charges that follow from it, together or not at all.

Litres that the reservoir could not hold are refused: volumes correct slopes, so a slip there bends every trend.
"""

from datetime import datetime

from fleet.models import Event, OilCharge, Reservoir
from fleet.refresh import want_refresh
from fleet.refusals import RefusedError, refusing
from fleet.volumes import hold_volume

FILLS_ANEW = Event.Kind.OIL_CHANGE
NO_OIL = "No oil is on record for this reservoir at that time. Choose the oil that was filled in."
FIRST_OIL = (
    "This oil change began the first oil on record here, so without it the reservoir would have had no oil. "
    "Correct the event instead of removing it."
)


def log(event: Event, now: datetime) -> Event:
    """Save a new event. An oil change closes the oil charge of its moment and opens the next one."""
    with refusing():
        reservoir = _hold(event.reservoir_id)
        hold_volume(reservoir, event.litres, "litres")
        event.save(force_insert=True)
        if event.kind == FILLS_ANEW:
            _fill_anew(reservoir, event)
        want_refresh([reservoir.pk], now)
    return event


def correct(event: Event, now: datetime) -> Event:
    """Save a changed event of the same reservoir. The oil charge that an oil change began moves with it."""
    with refusing():
        reservoir = _hold(event.reservoir_id)
        before = Event.objects.get(pk=event.pk, reservoir=reservoir)
        hold_volume(reservoir, event.litres, "litres")
        event.save()
        if before.kind == event.kind == FILLS_ANEW:
            _move(reservoir, before.at, event)
            _refill(reservoir, before, event)
        elif before.kind == FILLS_ANEW:
            _take_back(reservoir, before.at)
        elif event.kind == FILLS_ANEW:
            _fill_anew(reservoir, event)
        want_refresh([reservoir.pk], now)
    return event


def remove(event: Event, now: datetime) -> None:
    """Delete an event that never happened. Without its oil change the oil before it goes on."""
    with refusing():
        reservoir = _hold(event.reservoir_id)
        stands = Event.objects.get(pk=event.pk)
        if stands.kind == FILLS_ANEW:
            _take_back(reservoir, stands.at)
        stands.delete()
        want_refresh([reservoir.pk], now)


def _hold(reservoir_id: int) -> Reservoir:
    """The reservoir, locked: two people who log at once come one after the other."""
    reservoir: Reservoir = Reservoir.objects.select_for_update(no_key=True).get(pk=reservoir_id)
    return reservoir


def _charge(reservoir: Reservoir, **facts: datetime) -> OilCharge | None:
    return OilCharge.objects.filter(reservoir=reservoir, **facts).first()


def _fill_anew(reservoir: Reservoir, event: Event) -> None:
    """Split the time at the event: the oil that was in it ends, the new one lasts until the next change."""
    if same := _charge(reservoir, started_at=event.at):
        _describe(same, event)
        return
    charges = OilCharge.objects.filter(reservoir=reservoir)
    earlier = charges.filter(started_at__lt=event.at).order_by("-started_at").first()
    later = charges.filter(started_at__gt=event.at).order_by("started_at").first()
    fluid_id = event.fluid_id or (earlier.fluid_id if earlier else None)
    if fluid_id is None:
        raise RefusedError(NO_OIL, "fluid", code="oil_unknown")
    if earlier is not None and (earlier.ended_at is None or earlier.ended_at > event.at):
        earlier.ended_at = event.at
        earlier.save(update_fields=["ended_at"])
    OilCharge.objects.create(
        reservoir=reservoir,
        fluid_id=fluid_id,
        started_at=event.at,
        ended_at=later.started_at if later else None,
        volume_l=event.litres or reservoir.volume_l,
    )


def _describe(charge: OilCharge, event: Event) -> None:
    charge.fluid_id = event.fluid_id or charge.fluid_id
    charge.volume_l = event.litres or charge.volume_l
    charge.save(update_fields=["fluid", "volume_l", "started_at"])


def _move(reservoir: Reservoir, was_at: datetime, event: Event) -> None:
    """Move the line between two fillings. The side that shrinks is saved first, so that they never overlap."""
    charge = _charge(reservoir, started_at=was_at)
    if charge is None:
        _fill_anew(reservoir, event)
        return
    earlier = _charge(reservoir, ended_at=was_at)
    charge.started_at = event.at
    if event.at >= was_at:
        _describe(charge, event)
    if earlier is not None:
        earlier.ended_at = event.at
        earlier.save(update_fields=["ended_at"])
    if event.at < was_at:
        _describe(charge, event)


def _refill(reservoir: Reservoir, before: Event, event: Event) -> None:
    """Litres that were corrected are the charge's; litres that were taken back leave the reservoir's own volume."""
    if event.litres != before.litres:
        filled = event.litres or reservoir.volume_l
        OilCharge.objects.filter(reservoir=reservoir, started_at=event.at).update(volume_l=filled)


def _take_back(reservoir: Reservoir, at: datetime) -> None:
    """Undo an oil change: the oil before it lasts until the end of the filling that it had begun."""
    charge = _charge(reservoir, started_at=at)
    if charge is None:
        return
    earlier = _charge(reservoir, ended_at=at)
    if earlier is None:
        raise RefusedError(FIRST_OIL, code="first_oil")
    charge.delete()
    earlier.ended_at = charge.ended_at
    earlier.save(update_fields=["ended_at"])
