"""Setting targets and limits. A new figure stands beside the old one; whoever it applies to is looked at afresh."""

from datetime import datetime

from fleet.models import Person, Reservoir, Scope
from fleet.models.targets import Figure
from fleet.refresh import want_refresh
from fleet.refusals import refusing


def set_figure(figure: Figure, author: Person, now: datetime) -> Figure:
    """Save a new figure, or a corrected one; the author of a correction is who made it."""
    with refusing():
        touched = set() if figure.pk is None else reservoirs_in_scope(type(figure)._default_manager.get(pk=figure.pk))
        figure.author = author
        figure.save()
        want_refresh(touched | reservoirs_in_scope(figure), now)
    return figure


def withdraw(figure: Figure, now: datetime) -> None:
    """Delete a figure that was set by mistake."""
    with refusing():
        touched = reservoirs_in_scope(figure)
        figure.delete()
        want_refresh(touched, now)


def reservoirs_in_scope(figure: Figure) -> set[int]:
    """The ids of all reservoirs that a figure could judge; for a fluid, all that hold it or ever held it."""
    if figure.scope == Scope.RESERVOIR:
        return {figure.reservoir_id} if figure.reservoir_id else set()
    found = Reservoir.objects.filter(area__site=figure.site_id)
    if figure.scope == Scope.CLASS:
        found = found.filter(reservoir_class=figure.reservoir_class)
    elif figure.scope == Scope.FLUID:
        found = found.filter(charges__fluid=figure.fluid_id)
    return set(found.values_list("pk", flat=True))
