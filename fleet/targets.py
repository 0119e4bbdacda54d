"""Setting targets and limits. A new figure stands beside the old one; whoever it applies to is looked at afresh."""

from dataclasses import dataclass
from datetime import date, datetime

from fleet.figures import figure_for
from fleet.models import Limit, Measurand, Person, Reservoir, Scope, Target
from fleet.models.targets import Figure
from fleet.refresh import want_refresh
from fleet.refusals import refusing


@dataclass(frozen=True, slots=True)
class InForce:
    """What a reservoir is held to for one measurand on a day."""

    measurand: Measurand
    target: Target | None
    limit: Limit | None


def in_force(reservoir: Reservoir, day: date, now: datetime) -> list[InForce]:
    """The target and limit of each measurand that a sample drawn on `day` from the oil of `now` is judged by."""
    charge = reservoir.charge_on(now)
    fluid_id = charge.fluid_id if charge else None
    fluids = {fluid_id} if fluid_id else set()
    target_rows = list(Target.objects.for_reservoir(reservoir, fluids))
    limit_rows = list(Limit.objects.for_reservoir(reservoir, fluids))
    measurands = {row.measurand.key: row.measurand for row in (*target_rows, *limit_rows)}
    found = [
        InForce(
            measurand,
            figure_for(target_rows, key, day, fluid_id),
            figure_for(limit_rows, key, day, fluid_id),
        )
        for key, measurand in measurands.items()
    ]
    return sorted((line for line in found if line.target or line.limit), key=lambda line: line.measurand.position)


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
