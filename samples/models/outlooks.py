"""What is coming, per reservoir and measurand."""

from django.db import models

from fleet.models import Measurand, Reservoir, RunwayState, SamplePoint, StandingWord
from samples.models.samples import Sample


class Outlook(models.Model):
    """Latest value, headroom, slope and runway of one measurand in one reservoir; recomputed whole, never patched.

    `level`, `drift` and the three `p_*` are the trend filter's state on the measurand's own scale at the latest sample,
    time in months; the page draws the forecast fan from them.
    """

    reservoir = models.ForeignKey(Reservoir, on_delete=models.CASCADE, related_name="outlooks")
    measurand = models.ForeignKey(Measurand, on_delete=models.PROTECT, related_name="+")
    point = models.ForeignKey(SamplePoint, on_delete=models.CASCADE, null=True, related_name="+")
    sample = models.ForeignKey(Sample, on_delete=models.CASCADE, null=True, related_name="+")
    word = models.CharField(max_length=20, choices=StandingWord)
    n = models.PositiveIntegerField(default=0, help_text="Samples in the current stretch.")
    stretch_from = models.DateTimeField(null=True)
    value = models.FloatField(null=True)
    low = models.FloatField(null=True)
    high = models.FloatField(null=True)
    baseline = models.FloatField(null=True)
    target_low = models.FloatField(null=True)
    target_high = models.FloatField(null=True)
    limit_low = models.FloatField(null=True)
    limit_high = models.FloatField(null=True)
    target_source = models.CharField(max_length=200, blank=True)
    limit_source = models.CharField(max_length=200, blank=True)
    headroom = models.FloatField(null=True)
    value_at = models.FloatField(null=True)
    target_at = models.FloatField(null=True)
    band_low_at = models.FloatField(null=True)
    band_high_at = models.FloatField(null=True)
    level = models.FloatField(null=True)
    drift = models.FloatField(null=True)
    p_level = models.FloatField(null=True)
    p_cross = models.FloatField(null=True)
    p_drift = models.FloatField(null=True)
    bounded = models.BooleanField(default=False, help_text="A ≥ or < value was taken at its bound.")
    slope = models.FloatField(null=True, help_text="Theil–Sen, scale units a month.")
    slope_low = models.FloatField(null=True)
    slope_high = models.FloatField(null=True)
    trend = models.CharField(max_length=16, blank=True, help_text="rising, falling, none shown, too few")
    trend_p = models.FloatField(null=True)
    doubling_months = models.FloatField(null=True)
    runway = models.CharField(max_length=16, choices=RunwayState, default=RunwayState.CANNOT_SAY)
    runway_early = models.DateTimeField(null=True)
    runway_median = models.DateTimeField(null=True)
    runway_late = models.DateTimeField(null=True)
    past_since = models.DateTimeField(null=True)
    chance_before_next = models.FloatField(null=True)
    next_planned_at = models.DateTimeField(null=True)
    refusal = models.CharField(max_length=24, blank=True)
    refusal_sentence = models.CharField(max_length=240, blank=True)
    fit = models.CharField(max_length=80, help_text="Which parameters the forecast used.")
    computed_at = models.DateTimeField()

    class Meta:
        ordering = ["reservoir", "measurand__position"]
        constraints = [
            models.UniqueConstraint(fields=["reservoir", "measurand"], name="outlook_once"),
            models.CheckConstraint(
                condition=models.Q(chance_before_next=None)
                | models.Q(chance_before_next__gte=0, chance_before_next__lte=1),
                name="outlook_chance_is_a_chance",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.reservoir_id} {self.measurand_id}: {self.word}"
