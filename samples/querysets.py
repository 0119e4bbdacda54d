"""Questions about many samples."""

from __future__ import annotations

from datetime import datetime
from typing import Any, cast

from django.db import models
from django.db.models import Prefetch, Q


class SampleQuerySet(models.QuerySet[Any]):
    def accepted(self) -> SampleQuerySet:
        return self.filter(verdict="accepted")

    def in_doubt(self) -> SampleQuerySet:
        return self.filter(verdict="in_doubt")

    def with_names(self) -> SampleQuerySet:
        return self.select_related("reservoir__machine", "reservoir__area__site", "point", "laboratory", "entered_by")

    def with_results(self) -> SampleQuerySet:
        """The current results of each sample as `current_results`, in the catalogue's order."""
        results = cast("type[models.Model]", self.model._meta.get_field("results").related_model)
        current = (
            results._default_manager.filter(current=True).select_related("measurand").order_by("measurand__position")
        )
        return self.prefetch_related(Prefetch("results", queryset=current, to_attr="current_results"))

    def before(self, moment: datetime) -> SampleQuerySet:
        return self.filter(drawn_at__lt=moment)

    def finding(self, text: str) -> SampleQuerySet:
        found = self
        for word in text.split():
            found = found.filter(
                Q(lab_number__icontains=word)
                | Q(label_code__icontains=word)
                | Q(reservoir__name__icontains=word)
                | Q(reservoir__tag__icontains=word)
                | Q(reservoir__machine__name__icontains=word)
            )
        return found
