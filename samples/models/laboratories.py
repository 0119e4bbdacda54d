"""Who counted."""

from django.db import models


class Laboratory(models.Model):
    """A laboratory, or the plant's own field counter."""

    name = models.CharField(max_length=80, unique=True)
    codes_only = models.BooleanField("reports codes without counts", default=False)
    counted_ml = models.FloatField(
        "volume counted, mL", null=True, blank=True, help_text="Used when a report does not say."
    )
    notes = models.TextField(blank=True)

    class Meta:
        ordering = ["name"]
        verbose_name_plural = "laboratories"
        constraints = [
            models.CheckConstraint(
                condition=models.Q(counted_ml=None) | models.Q(counted_ml__gt=0), name="laboratory_counted_positive"
            )
        ]

    def __str__(self) -> str:
        return self.name
