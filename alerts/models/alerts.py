"""Something that needs a response."""

from django.db import models
from django.db.models import Q

from alerts.models.rules import Rule
from alerts.querysets import AlertQuerySet
from fleet.models import Measurand, OilCharge, Person, Reservoir
from samples.models import Sample


class Alert(models.Model):
    """One reservoir, one family of trouble, one oil charge. A later sample updates it rather than opening another."""

    class Family(models.TextChoices):
        DIRT = "dirt", "dirt"
        WATER = "water", "water"
        AGEING = "ageing", "ageing"
        WEAR = "wear", "wear"
        OTHER = "other", "other"
        SAMPLING = "sampling", "sampling"

    class State(models.TextChoices):
        OPEN = "open", "open"
        CLOSED = "closed", "closed"

    class CloseReason(models.TextChoices):
        SHOWN_OVER = "shown_over", "a later sample shows it is over"
        FALSE_ALARM = "false_alarm", "false alarm: sample, laboratory or unit"
        ACCEPTED_AS_IS = "accepted_as_is", "accepted as it is"
        OIL_CHANGED = "oil_changed", "the oil was changed"
        OTHER = "other", "other"

    reservoir = models.ForeignKey(Reservoir, on_delete=models.CASCADE, related_name="alerts")
    family = models.CharField(max_length=10, choices=Family)
    charge = models.ForeignKey(OilCharge, on_delete=models.SET_NULL, null=True, blank=True, related_name="alerts")
    kind = models.CharField(max_length=12, choices=Rule.Kind, help_text="The gravest rule that speaks now.")
    measurand = models.ForeignKey(Measurand, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    weight = models.PositiveSmallIntegerField(help_text="Sorts the list: rule, then criticality. 0 is first.")
    headline = models.CharField(max_length=160)
    sentence = models.TextField(help_text="The evidence in plain words.")
    sample = models.ForeignKey(Sample, on_delete=models.SET_NULL, null=True, blank=True, related_name="alerts")
    state = models.CharField(max_length=6, choices=State, default=State.OPEN)
    opened_at = models.DateTimeField()
    better_since = models.DateTimeField(
        null=True, blank=True, help_text="Its sample was better, but did not settle it: the next one may."
    )
    updated_at = models.DateTimeField()
    acknowledged_at = models.DateTimeField(null=True, blank=True)
    acknowledged_by = models.ForeignKey(Person, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    acknowledged_note = models.TextField(blank=True)
    closed_at = models.DateTimeField(null=True, blank=True)
    closed_by = models.ForeignKey(Person, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    close_reason = models.CharField(max_length=16, choices=CloseReason, blank=True)
    close_note = models.TextField(blank=True)

    objects = AlertQuerySet.as_manager()

    class Meta:
        ordering = ["weight", "opened_at"]
        constraints = [
            models.UniqueConstraint(
                fields=["reservoir", "family", "charge"],
                condition=Q(state="open"),
                nulls_distinct=False,
                name="alert_one_open",
            ),
            models.CheckConstraint(
                condition=Q(state="open", closed_at=None, close_reason="")
                | (Q(state="closed", closed_at__isnull=False) & ~Q(close_reason="")),
                name="alert_closed_with_reason",
            ),
        ]
        indexes = [models.Index(fields=["state", "weight", "opened_at"])]

    def __str__(self) -> str:
        return self.headline

    @property
    def is_open(self) -> bool:
        return self.state == self.State.OPEN

    @property
    def rests_on_sound_sample(self) -> bool:
        """False once the sample that opened or last updated it was set aside or put in doubt."""
        return self.sample is None or self.sample.verdict == Sample.Verdict.ACCEPTED


class StoryEntry(models.Model):
    """One line of an alert's story."""

    alert = models.ForeignKey(Alert, on_delete=models.CASCADE, related_name="story")
    at = models.DateTimeField()
    text = models.TextField()
    by = models.ForeignKey(Person, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")

    class Meta:
        ordering = ["-at", "-pk"]
        verbose_name_plural = "story entries"

    def __str__(self) -> str:
        return self.text
