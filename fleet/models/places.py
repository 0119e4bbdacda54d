"""Where the oil is: site, area, machine."""

import zoneinfo

from django.core.exceptions import ValidationError
from django.db import models
from django.db.models.functions import Lower


def known_time_zone(name: str) -> None:
    if name not in zoneinfo.available_timezones():
        raise ValidationError(
            f"“{name}” is no time zone. Write it as Area/City, for example Europe/Vienna.", code="time_zone"
        )


class Site(models.Model):
    """One plant. Its clock is the clock of everything drawn there."""

    name = models.CharField(max_length=80, unique=True)
    time_zone = models.CharField(max_length=64, default="UTC", validators=[known_time_zone])
    is_demo = models.BooleanField(default=False, editable=False, help_text="Everything at this site is made up.")

    class Meta:
        ordering = ["name"]

    def __str__(self) -> str:
        return self.name

    @property
    def zone(self) -> zoneinfo.ZoneInfo:
        return zoneinfo.ZoneInfo(self.time_zone)


class Area(models.Model):
    """A part of the plant that people walk and plan as one: a hall, a yard, a line."""

    site = models.ForeignKey(Site, on_delete=models.PROTECT, related_name="areas")
    name = models.CharField(max_length=80)

    class Meta:
        ordering = ["site__name", "name"]
        constraints = [
            models.UniqueConstraint(fields=["site", "name"], name="area_once_a_site"),
            models.UniqueConstraint("site", Lower("name"), name="area_once_a_site_any_case"),
        ]

    def __str__(self) -> str:
        return self.name


class Machine(models.Model):
    """What the oil works for. A machine may have several reservoirs, and a reservoir may serve several machines."""

    area = models.ForeignKey(Area, on_delete=models.PROTECT, related_name="machines")
    name = models.CharField(max_length=80)
    tag = models.CharField(max_length=40, blank=True, help_text="The plant's own number for it.")
    maker_requirement = models.TextField(
        blank=True, help_text="The maker's cleanliness and water figures, with the document they stand in."
    )
    started_on = models.DateField(null=True, blank=True)

    class Meta:
        ordering = ["area__name", "name"]
        constraints = [
            models.UniqueConstraint(fields=["area", "name"], name="machine_once_an_area"),
            models.UniqueConstraint("area", Lower("name"), name="machine_once_an_area_any_case"),
            models.UniqueConstraint(fields=["tag"], condition=~models.Q(tag=""), name="machine_tag_once"),
            models.UniqueConstraint(Lower("tag"), condition=~models.Q(tag=""), name="machine_tag_once_any_case"),
        ]

    def __str__(self) -> str:
        return self.name
