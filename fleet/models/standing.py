"""Where each reservoir stands now: the one row that the board reads."""

from django.contrib.postgres.fields import ArrayField
from django.db import models

from fleet.models.measurands import Measurand
from fleet.models.reservoirs import Reservoir
from fleet.querysets import StandingQuerySet


class StandingWord(models.TextChoices):
    PAST_LIMIT = "past_limit", "past limit"
    OVER_TARGET = "over_target", "over target"
    CANNOT_TELL = "cannot_tell", "cannot tell"
    NO_CURRENT_SAMPLE = "no_current_sample", "no current sample"
    WITHIN_TARGET = "within_target", "within target"


class RunwayState(models.TextChoices):
    """How the forecast time until the limit is to be read."""

    DATED = "dated", "dated"
    BEYOND = "beyond_horizon", "beyond the horizon"
    PAST = "past", "past already"
    CANNOT_SAY = "cannot_say", "cannot say"


class Standing(models.Model):
    """One row a reservoir, written when a sample lands and read by the board without a join over results.

    `revision` counts the writes; alerts keep in `judged_revision` the one they have dealt with, so a lost message
    leaves a row to find rather than a gap. Figures for the bar are on the headroom scale of `worst`, in the same
    steps as `headroom`: the limit is at 0, values past it are positive in `*_at`.
    """

    reservoir = models.OneToOneField(Reservoir, on_delete=models.CASCADE, primary_key=True, related_name="standing")
    word = models.CharField(max_length=20, choices=StandingWord, default=StandingWord.NO_CURRENT_SAMPLE)
    rank = models.PositiveSmallIntegerField(default=3, help_text="0 is worst; the board sorts by it first.")
    worst = models.ForeignKey(Measurand, on_delete=models.SET_NULL, null=True, related_name="+")
    because = models.CharField(max_length=240, blank=True, help_text="One sentence: which figure spoke.")
    code_text = models.CharField(max_length=24, blank=True)
    code_order = ArrayField(models.SmallIntegerField(), default=list, help_text="The code's numbers, to sort by.")
    target_text = models.CharField(max_length=24, blank=True)
    limit_text = models.CharField(max_length=24, blank=True)
    last_drawn_at = models.DateTimeField(null=True)
    next_due_at = models.DateTimeField(null=True)
    headroom = models.FloatField(null=True)
    room = models.FloatField(
        null=True, help_text="Headroom in code steps, or in quarters of the span: what sorts the board."
    )
    headroom_unit = models.CharField(max_length=8, default="steps", help_text="steps (code steps) or % (of the span)")
    value_at = models.FloatField(null=True, help_text="Latest value against the limit at 0; negative is inside.")
    target_at = models.FloatField(null=True)
    band_low_at = models.FloatField(null=True)
    band_high_at = models.FloatField(null=True)
    runway = models.CharField(max_length=16, choices=RunwayState, default=RunwayState.CANNOT_SAY)
    runway_reason = models.CharField(max_length=200, blank=True)
    runway_early = models.DateTimeField(null=True)
    runway_median = models.DateTimeField(null=True)
    runway_late = models.DateTimeField(null=True)
    past_since = models.DateTimeField(null=True)
    chance_before_next = models.FloatField(null=True)
    last_values = ArrayField(
        models.FloatField(), default=list, help_text="Last twelve of the worst measurand, oldest first."
    )
    in_doubt = models.PositiveSmallIntegerField(default=0, help_text="Samples waiting for a person's word.")
    open_alerts = models.PositiveSmallIntegerField(default=0)
    wanted_at = models.DateTimeField(null=True, help_text="A refresh was asked for and has not been done yet.")
    computed_at = models.DateTimeField(null=True)
    revision = models.PositiveBigIntegerField(default=0)
    judged_revision = models.PositiveBigIntegerField(default=0)

    objects = StandingQuerySet.as_manager()

    class Meta:
        constraints = [
            models.CheckConstraint(condition=models.Q(word__in=StandingWord.values), name="standing_word_known"),
            models.CheckConstraint(
                condition=models.Q(chance_before_next=None)
                | models.Q(chance_before_next__gte=0, chance_before_next__lte=1),
                name="standing_chance_is_a_chance",
            ),
        ]
        indexes = [
            models.Index(fields=["rank", "room"]),
            models.Index(fields=["wanted_at"], condition=models.Q(wanted_at__isnull=False), name="standing_wanted"),
            models.Index(
                fields=["reservoir"],
                condition=~models.Q(revision=models.F("judged_revision")),
                name="standing_unjudged",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.reservoir_id}: {self.word}"
