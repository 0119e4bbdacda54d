"""The oil itself: what it is, each filling, and what was done to it."""

from django.contrib.postgres.constraints import ExclusionConstraint
from django.contrib.postgres.fields import DateTimeRangeField, RangeBoundary, RangeOperators
from django.core.validators import MaxValueValidator, MinValueValidator
from django.db import models
from django.db.models import F, Func, Q


class TimeSpan(Func):
    """Half-open span of two moments, [start, end)."""

    function = "TSTZRANGE"
    output_field = DateTimeRangeField()


class Fluid(models.Model):
    """An oil as bought: what new oil measures, so that a used one can be compared with it."""

    name = models.CharField(max_length=80, unique=True)
    kind = models.CharField(max_length=60, blank=True, help_text="Mineral HM, ester, water-glycol, gear oil CLP.")
    viscosity_grade = models.PositiveIntegerField("ISO VG", null=True, blank=True)
    viscosity_40 = models.FloatField(
        "viscosity at 40 °C, mm²/s", null=True, blank=True, validators=[MinValueValidator(0.1)]
    )
    viscosity_100 = models.FloatField(
        "viscosity at 100 °C, mm²/s", null=True, blank=True, validators=[MinValueValidator(0.1)]
    )
    density_kg_l = models.FloatField(
        "density at 15 °C, kg/L", null=True, blank=True, validators=[MinValueValidator(0.5), MaxValueValidator(2)]
    )
    acid_number = models.FloatField(
        "acid number of new oil, mg KOH/g", null=True, blank=True, validators=[MinValueValidator(0)]
    )
    notes = models.TextField(blank=True)

    class Meta:
        ordering = ["name"]

    def __str__(self) -> str:
        return self.name

    def baseline(self, measurand_key: str) -> float | None:
        """What new oil measures, for the measurands that are judged against it."""
        baselines = {
            "viscosity_40": self.viscosity_40,
            "viscosity_100": self.viscosity_100,
            "acid_number": self.acid_number,
        }
        return baselines.get(measurand_key)


class OilCharge(models.Model):
    """One filling of one reservoir. Trends never cross it. Two fillings of a reservoir never overlap in time."""

    reservoir = models.ForeignKey("fleet.Reservoir", on_delete=models.CASCADE, related_name="charges")
    fluid = models.ForeignKey(Fluid, on_delete=models.PROTECT, related_name="charges")
    started_at = models.DateTimeField()
    ended_at = models.DateTimeField(null=True, blank=True)
    volume_l = models.FloatField("volume, L", null=True, blank=True, validators=[MinValueValidator(0.1)])

    class Meta:
        ordering = ["reservoir", "-started_at"]
        constraints = [
            models.CheckConstraint(
                condition=Q(ended_at=None) | Q(ended_at__gt=F("started_at")), name="charge_span_forward"
            ),
            ExclusionConstraint(
                name="charge_no_overlap",
                expressions=[
                    (TimeSpan("started_at", "ended_at", RangeBoundary()), RangeOperators.OVERLAPS),
                    ("reservoir", RangeOperators.EQUAL),
                ],
            ),
        ]

    def __str__(self) -> str:
        return f"{self.fluid} since {self.started_at:%-d %b %Y}"


class Event(models.Model):
    """What was done to the oil or the machine around it; some kinds start a new stretch for some measurands."""

    class Kind(models.TextChoices):
        OIL_CHANGE = "oil_change", "oil change"
        PARTIAL_CHANGE = "partial_change", "partial oil change"
        TOP_UP = "top_up", "top-up"
        ELEMENT_CHANGE = "element_change", "filter element changed"
        OFFLINE_RUN = "offline_run", "offline filtration"
        BREATHER = "breather", "breather changed"
        FILTER_REPAIR = "filter_repair", "filter housing or bypass repaired"
        WATER_REMOVED = "water_removed", "water drained or dried out"
        WEAR_REPAIR = "wear_repair", "worn part replaced"
        REPAIR_OTHER = "repair_other", "other repair"
        METER_REPLACED = "meter_replaced", "hour meter replaced"
        OTHER = "other", "other"

    reservoir = models.ForeignKey("fleet.Reservoir", on_delete=models.CASCADE, related_name="events")
    kind = models.CharField(max_length=16, choices=Kind)
    at = models.DateTimeField("when")
    ended_at = models.DateTimeField("until", null=True, blank=True)
    litres = models.FloatField("litres", null=True, blank=True, validators=[MinValueValidator(0)])
    fluid = models.ForeignKey(Fluid, on_delete=models.PROTECT, null=True, blank=True, related_name="+")
    flow_l_min = models.FloatField("flow, L/min", null=True, blank=True, validators=[MinValueValidator(0)])
    machine_hours = models.FloatField(null=True, blank=True, validators=[MinValueValidator(0)])
    note = models.TextField(blank=True)
    entered_by = models.ForeignKey("fleet.Person", on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    entered_at = models.DateTimeField(auto_now_add=True)

    class Meta:
        ordering = ["reservoir", "-at"]
        constraints = [
            models.CheckConstraint(condition=Q(ended_at=None) | Q(ended_at__gte=F("at")), name="event_span_forward"),
            models.CheckConstraint(condition=Q(litres=None) | Q(litres__gte=0), name="event_litres_not_negative"),
            models.UniqueConstraint(fields=["reservoir", "kind", "at"], name="event_once_a_moment"),
        ]
        indexes = [models.Index(fields=["reservoir", "at"])]

    def __str__(self) -> str:
        return f"{self.get_kind_display()}, {self.at:%-d %b %Y}"
