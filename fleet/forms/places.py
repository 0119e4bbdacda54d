"""Forms of where the oil is."""

import zoneinfo
from collections.abc import Iterable

from django import forms

from fleet.forms.base import PlantForm, PlantMeta
from fleet.models import Area, Machine, Site


def area_choices(areas: Iterable[Area]) -> list[tuple[int, str]]:
    """Areas to choose from, by their names; where there are several sites, the site's name goes in front.

    The areas come with their sites.
    """
    found = list(areas)
    several = len({area.site_id for area in found}) > 1
    return [(area.pk, f"{area.site.name}: {area.name}" if several else area.name) for area in found]


class SiteForm(PlantForm):
    time_zone = forms.ChoiceField(
        choices=[(name, name) for name in sorted(zoneinfo.available_timezones())],
        initial="UTC",
        help_text="The clock of everything that is drawn there.",
    )

    class Meta(PlantMeta):
        model = Site
        fields = ["name", "time_zone"]


class AreaForm(PlantForm):
    class Meta(PlantMeta):
        model = Area
        fields = ["site", "name"]
        help_texts = {"name": "What people walk and plan as one: a hall, a yard, a line."}


class MachineForm(PlantForm):
    class Meta(PlantMeta):
        model = Machine
        fields = ["area", "name", "tag", "maker_requirement", "started_on"]
        labels = {"maker_requirement": "maker's requirement", "started_on": "in service since"}
