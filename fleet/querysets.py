"""Questions about many rows of the register."""

from __future__ import annotations

from datetime import datetime, timedelta
from typing import TYPE_CHECKING, Any

from django.db import models
from django.db.models import Q
from django.db.models.functions import Cast, Now

if TYPE_CHECKING:
    from fleet.models import Reservoir


class ReservoirQuerySet(models.QuerySet[Any]):
    def active(self) -> ReservoirQuerySet:
        """In use today; what is to be retired later still is."""
        return self.filter(Q(retired_on=None) | Q(retired_on__gt=Cast(Now(), models.DateField())))

    def with_place(self) -> ReservoirQuerySet:
        return self.select_related("area__site", "machine")

    def with_standing(self) -> ReservoirQuerySet:
        return self.with_place().select_related("standing__worst")

    def finding(self, text: str) -> ReservoirQuerySet:
        """Every word typed must occur in the tag, the name, the machine, the area or an alias."""
        found = self
        for word in text.split():
            found = found.filter(
                Q(tag__icontains=word)
                | Q(name__icontains=word)
                | Q(machine__name__icontains=word)
                | Q(area__name__icontains=word)
                | Q(pk__in=self.model._default_manager.filter(aliases__name__icontains=word).values("pk"))
            )
        return found


class FigureQuerySet(models.QuerySet[Any]):
    def for_reservoir(self, reservoir: Reservoir, fluid_ids: set[int]) -> FigureQuerySet:
        """Every target or limit that could apply to a reservoir, at whatever scope, newest last."""
        site = reservoir.area.site_id
        return (
            self.filter(
                Q(scope="reservoir", reservoir=reservoir)
                | Q(scope="fluid", site=site, fluid__in=fluid_ids)
                | Q(scope="class", site=site, reservoir_class=reservoir.reservoir_class)
                | Q(scope="plant", site=site)
            )
            .select_related("measurand")
            .order_by("valid_from", "pk")
        )


class StandingQuerySet(models.QuerySet[Any]):
    def wanted(self) -> StandingQuerySet:
        return self.filter(wanted_at__isnull=False)

    def unjudged(self) -> StandingQuerySet:
        """Rows that changed since the alerts last looked."""
        return self.exclude(revision=models.F("judged_revision"))

    def overdue(self, as_of: datetime) -> StandingQuerySet:
        """Planned samples that have not come. What is to be retired later is in use till then, anywhere on earth."""
        in_use = Q(reservoir__retired_on=None) | Q(reservoir__retired_on__gte=(as_of - timedelta(days=1)).date())
        return self.filter(in_use, next_due_at__lt=as_of)
