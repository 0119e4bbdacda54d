"""Setting targets and limits. A new figure stands beside the old one; whoever it applies to is looked at afresh."""

from dataclasses import dataclass
from datetime import date, datetime, time

from fleet.figures import figure_for, side_beyond
from fleet.models import Limit, Measurand, Person, Reservoir, Scope, Target
from fleet.models.targets import Figure
from fleet.refresh import want_refresh
from fleet.refusals import RefusedError, refusing


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
    """Save a new figure, or a corrected one; the author of a correction is who made it.

    Raises RefusedError for a target that would lie beyond its limit, and for a limit tighter than its target.
    """
    with refusing():
        _fit_together(figure)
        touched = set() if figure.pk is None else reservoirs_in_scope(type(figure)._default_manager.get(pk=figure.pk))
        figure.author = author
        figure.save()
        want_refresh(touched | reservoirs_in_scope(figure), now)
    return figure


def facing(figure: Figure) -> Figure | None:
    """The limit that a target meets on its first day, or the target that a limit meets: the nearest of its scope.

    A figure of one reservoir meets what that reservoir was held to; one of a fluid or a class meets the figure of the
    same fluid or class, and that of the plant where there is none.
    """
    other = Limit if isinstance(figure, Target) else Target
    if figure.scope == Scope.RESERVOIR:
        return _facing_in_reservoir(figure, other)
    rows = other.objects.filter(site=figure.site_id, measurand=figure.measurand_id).select_related("measurand")
    of_scope = rows.filter(scope=figure.scope, reservoir_class=figure.reservoir_class, fluid=figure.fluid_id)
    fitting = [*of_scope, *rows.filter(scope=Scope.PLANT)]
    return figure_for(fitting, figure.measurand.key, figure.valid_from, figure.fluid_id)


def _facing_in_reservoir(figure: Figure, other: type[Target] | type[Limit]) -> Figure | None:
    reservoir = figure.reservoir
    if reservoir is None:
        return None
    end_of_day = datetime.combine(figure.valid_from, time.max, reservoir.area.site.zone)
    charge = reservoir.charge_on(end_of_day)
    fluid_id = charge.fluid_id if charge else None
    rows = other.objects.for_reservoir(reservoir, {fluid_id} if fluid_id else set())
    return figure_for(rows, figure.measurand.key, figure.valid_from, fluid_id)


def _fit_together(figure: Figure) -> None:
    met = facing(figure)
    if met is None:
        return
    is_target = isinstance(figure, Target)
    side = side_beyond(figure, met) if is_target else side_beyond(met, figure)
    if side is None:
        return
    kinds = ("target", "lies beyond the limit") if is_target else ("limit", "is tighter than the target")
    way_out = "Choose another, or set the limit first." if is_target else "Choose another, or set the target first."
    raise RefusedError(
        f"The {kinds[0]} {figure.text} {kinds[1]} {met.text}, which is in force on that day "
        f"(set for {met.get_scope_display()} from {met.valid_from:%-d %b %Y}). {way_out}",
        side,
        code="target_beyond_limit",
    )


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
