"""What keeps the oil clean: a place for a filter, and each element that was fitted in it."""

from django.contrib.postgres.constraints import ExclusionConstraint
from django.contrib.postgres.fields import DateRangeField, RangeOperators
from django.core.validators import MinValueValidator
from django.db import models
from django.db.models import F, Func, Q


class DaySpan(Func):
    """Half-open span of two days, [fitted, removed)."""

    function = "DATERANGE"
    output_field = DateRangeField()


class FilterPosition(models.Model):
    """A place in the circuit that holds a filter, a strainer or a cart's connection."""

    class Place(models.TextChoices):
        SUCTION = "suction", "suction"
        PRESSURE = "pressure", "pressure line"
        RETURN = "return", "return line"
        OFFLINE = "offline", "offline loop"
        FILL = "fill", "filling"
        BREATHER = "breather", "breather"

    reservoir = models.ForeignKey("fleet.Reservoir", on_delete=models.CASCADE, related_name="filter_positions")
    name = models.CharField(max_length=60, help_text="As it is marked: R1.")
    place = models.CharField(max_length=10, choices=Place)
    flow_l_min = models.FloatField("flow through it, L/min", null=True, blank=True, validators=[MinValueValidator(0)])
    full_flow = models.BooleanField("takes the whole flow", default=True)
    has_bypass = models.BooleanField("has a bypass valve", default=True)
    clean_dp_bar = models.FloatField("Δp when clean, bar", null=True, blank=True, validators=[MinValueValidator(0)])

    class Meta:
        ordering = ["reservoir", "name"]
        constraints = [models.UniqueConstraint(fields=["reservoir", "name"], name="filter_position_once")]

    def __str__(self) -> str:
        return f"{self.name} ({self.get_place_display()})"


class Element(models.Model):
    """The element fitted in a position for a span of days. A rating without its size and beta ratio is not a rating."""

    class RatingKind(models.TextChoices):
        BETA = "beta", "beta ratio (ISO 16889)"
        ABSOLUTE = "absolute", "called absolute"
        NOMINAL = "nominal", "called nominal"
        MESH = "mesh", "mesh"

    position = models.ForeignKey(FilterPosition, on_delete=models.CASCADE, related_name="elements")
    part = models.CharField("part number", max_length=60, blank=True)
    rating_um = models.FloatField("rating, µm", null=True, blank=True, validators=[MinValueValidator(0)])
    rating_kind = models.CharField(max_length=8, choices=RatingKind, default=RatingKind.BETA)
    beta = models.FloatField("beta ratio", null=True, blank=True, validators=[MinValueValidator(1)])
    beta_size_um = models.FloatField("at size, µm(c)", null=True, blank=True, validators=[MinValueValidator(0)])
    fitted_on = models.DateField()
    removed_on = models.DateField(null=True, blank=True)
    removal_note = models.TextField("why removed, and what was found", blank=True)

    class Meta:
        ordering = ["position", "-fitted_on"]
        constraints = [
            models.CheckConstraint(
                condition=Q(removed_on=None) | Q(removed_on__gte=F("fitted_on")), name="element_span_forward"
            ),
            models.CheckConstraint(
                condition=Q(beta=None, beta_size_um=None)
                | Q(beta__isnull=False, beta_size_um__isnull=False, beta__gte=1, beta_size_um__gt=0),
                name="element_beta_with_size",
            ),
            models.CheckConstraint(
                condition=~Q(rating_kind="beta") | Q(beta__isnull=False), name="element_beta_rating_has_beta"
            ),
            ExclusionConstraint(
                name="element_no_overlap",
                expressions=[
                    (DaySpan("fitted_on", "removed_on"), RangeOperators.OVERLAPS),
                    ("position", RangeOperators.EQUAL),
                ],
            ),
        ]

    def __str__(self) -> str:
        return self.part or self.rating

    @property
    def rating(self) -> str:
        if self.beta is not None and self.beta_size_um is not None:
            return f"β{self.beta_size_um:g}(c) ≥ {self.beta:g}"
        size = f"{self.rating_um:g} µm " if self.rating_um is not None else ""
        return f"{size}{self.get_rating_kind_display()}"
