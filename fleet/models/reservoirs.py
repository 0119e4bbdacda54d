"""The unit that is sampled."""

from datetime import datetime, timedelta

from django.core.validators import MaxValueValidator, MinValueValidator, RegexValidator
from django.db import models
from django.db.models.functions import Lower
from django.utils import timezone

from fleet.models.oil import OilCharge
from fleet.models.places import Area, Machine
from fleet.querysets import ReservoirQuerySet

# It stands in an address, on a label and in lab files: nothing that one of them would trip over.
TAG = r"^[\w.:-]+( [\w.:-]+)*$"
# More than any lube or hydraulic tank holds: beyond it somebody wrote the wrong unit or slipped on a key.
MOST_LITRES = 1_000_000


class ReservoirClass(models.TextChoices):
    HYDRAULIC = "hydraulic", "hydraulic"
    GEARBOX = "gearbox", "gearbox"
    TURBINE = "turbine", "turbine lube"
    COMPRESSOR = "compressor", "compressor"
    PAPER = "paper", "paper machine lube"
    BEARING = "bearing", "bearing lube"
    ENGINE = "engine", "engine"
    OTHER = "other", "other"


class Reservoir(models.Model):
    """A body of oil that is sampled and judged as one: tank, sump, gear case. Its stable key is its tag."""

    class Criticality(models.TextChoices):
        A = "A", "A: stops the plant or hurts someone"
        B = "B", "B: stops a line"
        C = "C", "C: has a spare or can wait"

    area = models.ForeignKey(Area, on_delete=models.PROTECT, related_name="reservoirs")
    machine = models.ForeignKey(Machine, on_delete=models.PROTECT, related_name="reservoirs")
    also_serves = models.ManyToManyField(Machine, blank=True, related_name="served_by")
    name = models.CharField(max_length=80, help_text="What people call it: drive pack, lube sump.")
    tag = models.CharField(
        max_length=40,
        unique=True,
        validators=[RegexValidator(TAG, "A tag is printed and typed: letters, digits, spaces and . - _ : only.")],
        help_text="Short, printable, never reused. It stands on the label.",
    )
    reservoir_class = models.CharField("class", max_length=12, choices=ReservoirClass)
    criticality = models.CharField(max_length=1, choices=Criticality, default=Criticality.B)
    volume_l = models.FloatField("volume, L", validators=[MinValueValidator(0.1), MaxValueValidator(MOST_LITRES)])
    pump_flow_l_min = models.FloatField("pump flow, L/min", null=True, blank=True, validators=[MinValueValidator(0)])
    pressure_bar = models.FloatField("working pressure, bar", null=True, blank=True, validators=[MinValueValidator(0)])
    sensitive_part = models.CharField("most sensitive part", max_length=80, blank=True)
    environment = models.CharField(max_length=80, blank=True, help_text="Dust, washdown, steam, outdoors.")
    cooler = models.CharField(
        max_length=6, choices=[("none", "none"), ("air", "air"), ("water", "water")], default="none"
    )
    breather = models.CharField(max_length=80, blank=True)
    hazards = models.CharField(max_length=120, blank=True, help_text="Pressure, hot, at height, rotating, fire.")
    interval_days = models.PositiveSmallIntegerField(
        "days between samples", default=90, validators=[MinValueValidator(1)]
    )
    next_stop_on = models.DateField("next planned stop", null=True, blank=True)
    retired_on = models.DateField(null=True, blank=True)
    notes = models.TextField(blank=True)
    registered_at = models.DateTimeField(default=timezone.now, editable=False)

    objects = ReservoirQuerySet.as_manager()

    class Meta:
        ordering = ["machine__name", "name"]
        constraints = [
            models.UniqueConstraint(fields=["machine", "name"], name="reservoir_once_a_machine"),
            models.UniqueConstraint(Lower("tag"), name="reservoir_tag_once_any_case"),
            models.CheckConstraint(condition=models.Q(tag__regex=TAG), name="reservoir_tag_printable"),
            models.CheckConstraint(condition=models.Q(volume_l__gt=0), name="reservoir_volume_positive"),
            models.CheckConstraint(condition=models.Q(interval_days__gte=1), name="reservoir_interval_positive"),
            models.CheckConstraint(
                condition=models.Q(criticality__in=["A", "B", "C"]), name="reservoir_criticality_known"
            ),
        ]

    def __str__(self) -> str:
        return f"{self.machine.name} · {self.name}"

    def charge_on(self, moment: datetime) -> OilCharge | None:
        """The oil that was in it at that moment, if a filling is on record."""
        return (
            self.charges.filter(started_at__lte=moment)
            .filter(models.Q(ended_at=None) | models.Q(ended_at__gt=moment))
            .select_related("fluid")
            .first()
        )

    def next_planned(self, last_drawn_at: datetime) -> datetime:
        return last_drawn_at + timedelta(days=self.interval_days)


class ReservoirAlias(models.Model):
    """Another name for a reservoir, such as the one a laboratory still prints; matched only in its span of days."""

    reservoir = models.ForeignKey(Reservoir, on_delete=models.CASCADE, related_name="aliases")
    name = models.CharField(max_length=120)
    valid_from = models.DateField(null=True, blank=True)
    valid_to = models.DateField(null=True, blank=True)

    class Meta:
        ordering = ["name"]
        constraints = [
            models.UniqueConstraint(fields=["reservoir", "name"], name="alias_once_a_reservoir"),
            models.CheckConstraint(
                condition=models.Q(valid_to=None)
                | models.Q(valid_from=None)
                | models.Q(valid_to__gt=models.F("valid_from")),
                name="alias_span_forward",
            ),
        ]

    def __str__(self) -> str:
        return self.name


class SamplePoint(models.Model):
    """Where the bottle is filled. Trends never mix two points."""

    reservoir = models.ForeignKey(Reservoir, on_delete=models.CASCADE, related_name="points")
    name = models.CharField(max_length=60, help_text="As it stands on the valve: SP-1.")
    place = models.CharField(max_length=120, blank=True, help_text="Return line before the filter, live valve.")
    is_default = models.BooleanField("planned point", default=False)
    may_sample_running = models.BooleanField("may be drawn while running", default=True)
    retired_on = models.DateField(null=True, blank=True)

    class Meta:
        ordering = ["reservoir", "-is_default", "name"]
        constraints = [
            models.UniqueConstraint(fields=["reservoir", "name"], name="point_once_a_reservoir"),
            models.UniqueConstraint(
                fields=["reservoir"], condition=models.Q(is_default=True), name="point_one_planned"
            ),
        ]

    def __str__(self) -> str:
        return f"{self.name} {self.place}".strip()
