"""What people do with an alert: say that they have seen it, and close it."""

from datetime import datetime

from django.db import transaction

from alerts.evaluation import count_open
from alerts.models import Alert, StoryEntry
from fleet.models import Person, Standing


@transaction.atomic
def acknowledge(alert: Alert, person: Person, note: str, at: datetime) -> bool:
    """Record who has seen it. The first one is kept; later ones are lines in the story. True for the first."""
    first = (
        Alert.objects.open()
        .filter(pk=alert.pk, acknowledged_at=None)
        .update(acknowledged_at=at, acknowledged_by=person, acknowledged_note=note)
    )
    said = f": {note}" if note else "."
    StoryEntry.objects.create(alert=alert, at=at, by=person, text=f"Seen by {person}{said}")
    return first == 1


@transaction.atomic
def close(alert: Alert, person: Person, reason: str, note: str, at: datetime) -> bool:
    """Close an open alert by a person's word. False when it is closed already; that word stays.

    The standing row is locked first, as an evaluation does, so that the two can never undo each other.
    """
    standing = Standing.objects.select_for_update(of=("self",)).filter(reservoir=alert.reservoir_id).first()
    closed = (
        Alert.objects.open()
        .filter(pk=alert.pk)
        .update(
            state=Alert.State.CLOSED,
            closed_at=at,
            closed_by=person,
            close_reason=reason,
            close_note=note,
            updated_at=at,
        )
    )
    if not closed:
        return False
    label = Alert.CloseReason(reason).label
    StoryEntry.objects.create(alert=alert, at=at, by=person, text=f"Closed by {person}, {label}: {note}")
    if standing is not None:
        count_open(standing)
    return True
