"""Questions about many alerts and deliveries."""

from __future__ import annotations

from datetime import datetime
from typing import Any

from django.db import models
from django.db.models import Q


class AlertQuerySet(models.QuerySet[Any]):
    def open(self) -> AlertQuerySet:
        return self.filter(state="open")

    def closed(self) -> AlertQuerySet:
        return self.filter(state="closed")

    def closed_by_hand(self) -> AlertQuerySet:
        """Closed by a person: the same evidence must not open them again."""
        return self.closed().filter(closed_by__isnull=False)

    def with_place(self) -> AlertQuerySet:
        return self.select_related("reservoir__area__site", "reservoir__machine", "measurand", "sample")

    def with_people(self) -> AlertQuerySet:
        return self.select_related("acknowledged_by", "closed_by")

    def finding(self, text: str) -> AlertQuerySet:
        """Every word typed must occur in the headline, the reservoir, its tag, its machine or its area."""
        found = self
        for word in text.split():
            found = found.filter(
                Q(headline__icontains=word)
                | Q(reservoir__tag__icontains=word)
                | Q(reservoir__name__icontains=word)
                | Q(reservoir__machine__name__icontains=word)
                | Q(reservoir__area__name__icontains=word)
            )
        return found


class DeliveryQuerySet(models.QuerySet[Any]):
    def due(self, now: datetime) -> DeliveryQuerySet:
        return self.filter(state="queued", due_at__lte=now)

    def stuck(self, since: datetime) -> DeliveryQuerySet:
        """Claimed before that moment and neither sent nor put back: whoever claimed them is gone."""
        return self.filter(state="sending", claimed_at__lt=since)
