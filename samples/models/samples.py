"""A bottle of oil."""

from __future__ import annotations

from typing import TYPE_CHECKING

from django.core.validators import MaxValueValidator, MinValueValidator
from django.db import models
from django.db.models import Q

from fleet.models import OilCharge, Person, Reservoir, SamplePoint
from samples.models.intake import IntakeFile
from samples.models.laboratories import Laboratory
from samples.querysets import SampleQuerySet

if TYPE_CHECKING:
    from samples.models.results import Doubt, Result


class Sample(models.Model):
    """One bottle: where, when and how drawn. Trends order by `drawn_at`; "what did we know then" by `entered_at`."""

    class Method(models.TextChoices):
        LIVE_VALVE = "live_valve", "live valve, running"
        PRESSURE_REDUCER = "pressure_reducer", "pressure reducer"
        SUCTION_TUBE = "suction_tube", "hand pump and tube"
        DRAIN = "drain", "drain"
        ONLINE = "online", "portable or online counter"
        UNKNOWN = "unknown", "not known"

    class Reason(models.TextChoices):
        ROUTINE = "routine", "routine"
        RESAMPLE = "resample", "repeat of a doubtful sample"
        AFTER_CORRECTION = "after_correction", "after a correction"
        AFTER_REPAIR = "after_repair", "after a repair"
        SUSPICION = "suspicion", "suspicion"
        NEW_OIL = "new_oil", "new-oil baseline"
        ACCEPTANCE = "acceptance", "acceptance"

    class Verdict(models.TextChoices):
        ACCEPTED = "accepted", "accepted"
        IN_DOUBT = "in_doubt", "in doubt"
        SET_ASIDE = "set_aside", "set aside"

    reservoir = models.ForeignKey(Reservoir, on_delete=models.PROTECT, related_name="samples")
    point = models.ForeignKey(SamplePoint, on_delete=models.PROTECT, related_name="samples")
    charge = models.ForeignKey(OilCharge, on_delete=models.SET_NULL, null=True, blank=True, related_name="samples")
    drawn_at = models.DateTimeField()
    shipped_at = models.DateTimeField(null=True, blank=True)
    received_at = models.DateTimeField(null=True, blank=True)
    reported_at = models.DateTimeField(null=True, blank=True)
    entered_at = models.DateTimeField()
    entered_by = models.ForeignKey(Person, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    drawn_by = models.CharField(max_length=80, blank=True)
    method = models.CharField(max_length=16, choices=Method, default=Method.UNKNOWN)
    reason = models.CharField(max_length=16, choices=Reason, default=Reason.ROUTINE)
    running = models.BooleanField(null=True, blank=True)
    oil_temperature_c = models.FloatField(
        "oil temperature, °C", null=True, blank=True, validators=[MinValueValidator(-40), MaxValueValidator(200)]
    )
    machine_hours = models.FloatField(null=True, blank=True, validators=[MinValueValidator(0)])
    oil_hours = models.FloatField("hours on the oil", null=True, blank=True, validators=[MinValueValidator(0)])
    litres_added = models.FloatField(
        "oil added since last, L", null=True, blank=True, validators=[MinValueValidator(0)]
    )
    laboratory = models.ForeignKey(Laboratory, on_delete=models.PROTECT, null=True, blank=True, related_name="samples")
    lab_number = models.CharField(max_length=60, blank=True)
    label_code = models.CharField(max_length=40, blank=True)
    bottle_lot = models.CharField(max_length=40, blank=True)
    remark = models.TextField(blank=True)
    intake = models.ForeignKey(IntakeFile, on_delete=models.SET_NULL, null=True, blank=True, related_name="samples")
    verdict = models.CharField(max_length=10, choices=Verdict, default=Verdict.ACCEPTED)
    verdict_by = models.ForeignKey(Person, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    verdict_at = models.DateTimeField(null=True, blank=True)
    verdict_reason = models.CharField(max_length=240, blank=True)

    # Put there by the questions that fetch them: SampleQuerySet.with_results and the history of a reservoir.
    current_results: list[Result]
    found_doubts: list[Doubt]

    objects = SampleQuerySet.as_manager()

    class Meta:
        ordering = ["-drawn_at", "-pk"]
        constraints = [
            models.UniqueConstraint(fields=["point", "drawn_at"], name="sample_once_a_point_and_moment"),
            models.UniqueConstraint(
                fields=["laboratory", "lab_number", "drawn_at"],
                condition=~Q(lab_number=""),
                name="sample_lab_number_once",
            ),
            models.UniqueConstraint(fields=["label_code"], condition=~Q(label_code=""), name="sample_label_once"),
            models.CheckConstraint(
                condition=Q(machine_hours=None) | Q(machine_hours__gte=0), name="sample_hours_not_negative"
            ),
            models.CheckConstraint(
                condition=Q(litres_added=None) | Q(litres_added__gte=0), name="sample_litres_not_negative"
            ),
            models.CheckConstraint(
                condition=~Q(verdict="set_aside") | ~Q(verdict_reason=""), name="sample_set_aside_has_reason"
            ),
        ]
        indexes = [
            models.Index(fields=["reservoir", "-drawn_at"]),
            models.Index(fields=["reservoir"], condition=Q(verdict="in_doubt"), name="sample_in_doubt"),
        ]

    def __str__(self) -> str:
        return f"{self.reservoir}, {self.drawn_at:%-d %b %Y}"
