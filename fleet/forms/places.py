"""Forms of where the oil is."""

import zoneinfo

from django import forms

from fleet.forms.base import PlantForm, PlantMeta
from fleet.models import Area, Machine, Site


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
