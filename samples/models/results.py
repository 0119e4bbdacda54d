"""What a bottle measured, and why a number may not be real."""

from django.db import models
from django.db.models import F, Q

from fleet.models import Measurand, Person
from samples.models.samples import Sample


class Result(models.Model):
    """One measurand of one sample as reported, with its value, or an interval when only a code or a bound is known.

    A corrected report adds the next revision; the one before stays, and only the latest is `current`.
    An interval is (low, high]: more than low, up to and including high; either side may be open.
    """

    class SizeScale(models.TextChoices):
        UM_C = "um_c", "µm(c)"
        UM_B = "um_b", "µm(b)"
        ACFTD = "acftd", "ACFTD"
        MICROSCOPE = "microscope", "microscope"

    class Qualifier(models.TextChoices):
        BELOW = "<", "<"
        ABOVE = ">", ">"
        AT_LEAST = "≥", "≥"

    sample = models.ForeignKey(Sample, on_delete=models.CASCADE, related_name="results")
    measurand = models.ForeignKey(Measurand, on_delete=models.PROTECT, related_name="results")
    revision = models.PositiveSmallIntegerField(default=1)
    current = models.BooleanField(default=True)
    reported_text = models.CharField(max_length=60)
    reported_unit = models.CharField(max_length=24, blank=True)
    qualifier = models.CharField(max_length=1, choices=Qualifier, blank=True)
    value = models.FloatField(null=True, blank=True)
    low = models.FloatField(null=True, blank=True)
    high = models.FloatField(null=True, blank=True)
    size_scale = models.CharField(max_length=10, choices=SizeScale, blank=True)
    counted_ml = models.FloatField("volume counted, mL", null=True, blank=True)
    dilution = models.FloatField(null=True, blank=True)
    method = models.CharField(max_length=60, blank=True)
    entered_at = models.DateTimeField()
    entered_by = models.ForeignKey(Person, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    revision_reason = models.CharField(max_length=240, blank=True)

    class Meta:
        ordering = ["sample", "measurand__position", "-revision"]
        constraints = [
            models.UniqueConstraint(fields=["sample", "measurand", "revision"], name="result_once_a_revision"),
            models.UniqueConstraint(
                fields=["sample", "measurand"], condition=Q(current=True), name="result_one_current"
            ),
            models.CheckConstraint(
                condition=Q(value__isnull=False, low=None, high=None)
                | (Q(value=None) & (Q(low__isnull=False) | Q(high__isnull=False))),
                name="result_value_or_interval",
            ),
            models.CheckConstraint(
                condition=Q(low=None) | Q(high=None) | Q(low__lt=F("high")), name="result_interval_forward"
            ),
            models.CheckConstraint(condition=Q(revision__gte=1), name="result_revision_from_one"),
        ]
        indexes = [models.Index(fields=["measurand", "sample"], condition=Q(current=True), name="result_current")]

    def __str__(self) -> str:
        return f"{self.measurand_id}: {self.reported_text} {self.reported_unit}".strip()


class Doubt(models.Model):
    """A failed check on a sample's results: what looks wrong, and what would settle it."""

    sample = models.ForeignKey(Sample, on_delete=models.CASCADE, related_name="doubts")
    code = models.CharField(max_length=40)
    sentence = models.CharField(max_length=300)
    settles = models.CharField(max_length=300, blank=True)

    class Meta:
        ordering = ["sample", "pk"]
        # The same check may doubt several figures of one bottle, each with a sentence of its own.
        constraints = [models.UniqueConstraint(fields=["sample", "code", "sentence"], name="doubt_once_a_sample")]

    def __str__(self) -> str:
        return self.sentence


class Judgement(models.Model):
    """One word of a person on a sample. The sample carries the latest; here every one of them stays."""

    sample = models.ForeignKey(Sample, on_delete=models.CASCADE, related_name="judgements")
    verdict = models.CharField(max_length=10, choices=Sample.Verdict)
    by = models.ForeignKey(Person, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    at = models.DateTimeField()
    reason = models.CharField(max_length=240, blank=True)

    class Meta:
        ordering = ["sample", "at", "pk"]

    def __str__(self) -> str:
        return f"{self.get_verdict_display()}, {self.at:%-d %b %Y}"
