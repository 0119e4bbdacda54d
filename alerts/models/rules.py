"""What is worth telling, and to whom."""

from django.core.validators import MaxValueValidator, MinValueValidator
from django.db import models
from django.db.models import Q

from fleet.models import Area, Person, Site


class Rule(models.Model):
    """A condition that opens an alert at one site."""

    class Kind(models.TextChoices):
        PAST_LIMIT = "past_limit", "past limit"
        FORECAST = "forecast", "forecast to pass the limit"
        OVER_TARGET = "over_target", "over target"
        OVERDUE = "overdue", "sample overdue"

    site = models.ForeignKey(Site, on_delete=models.CASCADE, related_name="rules")
    kind = models.CharField(max_length=12, choices=Kind)
    enabled = models.BooleanField(default=True)
    mails = models.BooleanField("sends mail", default=True)
    least_criticality = models.CharField(
        "for criticality", max_length=1, choices=[("A", "A only"), ("B", "A and B"), ("C", "all")], default="C"
    )
    within_days = models.PositiveSmallIntegerField(
        null=True,
        blank=True,
        validators=[MinValueValidator(1)],
        help_text="Forecast: median date within this many days.",
    )
    least_chance = models.FloatField(
        "or chance at least",
        null=True,
        blank=True,
        validators=[MinValueValidator(0.05), MaxValueValidator(0.95)],
        help_text="Forecast: chance of passing before the next planned sample, 0.05 to 0.95.",
    )
    grace_days = models.PositiveSmallIntegerField(
        null=True, blank=True, help_text="Overdue: days after the planned day; empty is a tenth of the interval."
    )

    class Meta:
        ordering = ["site", "kind"]
        constraints = [
            models.UniqueConstraint(fields=["site", "kind"], name="rule_once_a_site_and_kind"),
            models.CheckConstraint(
                condition=~Q(kind="forecast") | Q(within_days__isnull=False) | Q(least_chance__isnull=False),
                name="rule_forecast_has_a_figure",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.get_kind_display()} at {self.site}"


class Subscription(models.Model):
    """Who gets the mail of which alerts."""

    person = models.ForeignKey(Person, on_delete=models.CASCADE, related_name="subscriptions")
    site = models.ForeignKey(Site, on_delete=models.CASCADE, related_name="subscriptions")
    area = models.ForeignKey(Area, on_delete=models.CASCADE, null=True, blank=True, related_name="+")
    kind = models.CharField("only for", max_length=12, choices=Rule.Kind, blank=True)

    class Meta:
        ordering = ["person", "site"]
        constraints = [
            models.UniqueConstraint(
                fields=["person", "site", "area", "kind"], nulls_distinct=False, name="subscription_once"
            )
        ]

    def __str__(self) -> str:
        return f"{self.person}: {self.get_kind_display() or 'everything'} at {self.area or self.site}"
