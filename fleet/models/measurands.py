"""What can be measured on oil, as data: adding one is a row, not code."""

from django.db import models


class Measurand(models.Model):
    """One quantity with its unit and the scale its trend lives on: a count at a size, water, viscosity, a metal.

    `iso4406` is the cleanliness code itself: targets and limits for dirt are set on it, while its counts (p4, p6, p14,
    or p5m and p15m under the microscope) carry the results.
    """

    class Kind(models.TextChoices):
        CODE = "code", "cleanliness code"
        COUNT = "count", "particle count"
        QUANTITY = "quantity", "quantity"

    class Family(models.TextChoices):
        DIRT = "dirt", "dirt"
        WATER = "water", "water"
        AGEING = "ageing", "ageing"
        WEAR = "wear", "wear"
        OTHER = "other", "other"

    class Scale(models.TextChoices):
        COUNT = "count", "code steps (log2)"
        LOG = "log", "doublings (log2)"
        PERCENT = "percent", "% change from the new oil"
        LINEAR = "linear", "as it is"

    class Direction(models.TextChoices):
        UP = "up", "high is bad"
        DOWN = "down", "low is bad"
        BOTH = "both", "both sides"

    key = models.SlugField(max_length=32, unique=True)
    name = models.CharField(max_length=60, unique=True)
    symbol = models.CharField(max_length=24, help_text="The short form for tables.")
    unit = models.CharField(max_length=24, blank=True, help_text="The unit that values are kept in.")
    kind = models.CharField(max_length=10, choices=Kind, default=Kind.QUANTITY)
    family = models.CharField(max_length=10, choices=Family)
    scale = models.CharField(max_length=10, choices=Scale, default=Scale.LINEAR)
    scale_offset = models.FloatField(default=0.0, help_text="Half the reporting limit; added before a logarithm.")
    direction = models.CharField(max_length=5, choices=Direction, default=Direction.UP)
    size_um = models.FloatField(null=True, blank=True, help_text="For a count: the size it counts from, in µm.")
    sensible_low = models.FloatField(null=True, blank=True)
    sensible_high = models.FloatField(null=True, blank=True)
    decimals = models.PositiveSmallIntegerField(default=1)
    position = models.PositiveSmallIntegerField(default=100)

    class Meta:
        ordering = ["position", "key"]
        constraints = [
            models.CheckConstraint(
                condition=models.Q(kind="count", size_um__isnull=False) | ~models.Q(kind="count"),
                name="measurand_count_has_size",
            ),
        ]

    def __str__(self) -> str:
        return self.name
