"""Forms of the reservoir and what hangs on it: its sample points and its other names."""

from typing import Any

from django import forms
from django.core.exceptions import ValidationError

from fleet.forms.base import PlantForm, PlantMeta, SiteTimeField
from fleet.models import Fluid, Machine, Reservoir, ReservoirAlias, SamplePoint, Site
from fleet.refusals import SENTENCES
from fleet.reservoirs import FirstFilling

NO_MACHINE = "Choose the machine, or write the name of a new one."


class ReservoirForm(PlantForm):
    """A reservoir. While it is new, also its machine, its oil and where its bottle is filled."""

    new_machine = forms.CharField(
        label="or a new machine", required=False, max_length=80, help_text="It is added to the area chosen above."
    )
    fluid = forms.ModelChoiceField(Fluid.objects.all(), label="oil in it now")
    filled_at = SiteTimeField(label="filled in on", help_text="As near as is known. Trends begin here.")
    point_name = forms.CharField(
        label="sample point", max_length=60, initial="SP-1", help_text="As it stands on the valve."
    )
    point_place = forms.CharField(
        label="where on the machine",
        max_length=120,
        required=False,
        help_text="Return line before the filter, live valve.",
    )
    first_only = ("new_machine", "fluid", "filled_at", "point_name", "point_place")
    site_times = ("filled_at",)
    groups = [
        ("Where it is", ["area", "machine", "new_machine", "name", "tag", "also_serves"]),
        ("What it is", ["reservoir_class", "criticality", "volume_l", "pump_flow_l_min", "pressure_bar"]),
        ("Its oil", ["fluid", "filled_at", "point_name", "point_place"]),
        ("What it needs", ["sensitive_part", "environment", "cooler", "breather", "hazards"]),
        ("Plan", ["interval_days", "next_stop_on", "retired_on", "notes"]),
    ]

    class Meta(PlantMeta):
        model = Reservoir
        fields = [
            *("area", "machine", "name", "tag", "also_serves", "reservoir_class", "criticality", "volume_l"),
            *("pump_flow_l_min", "pressure_bar", "sensitive_part", "environment", "cooler", "breather", "hazards"),
            *("interval_days", "next_stop_on", "retired_on", "notes"),
        ]
        labels = {
            "retired_on": "out of use since",
            "also_serves": "also serves",
            "interval_days": "days between samples",
        }
        help_texts = {
            "cooler": "A water cooler is a source of water.",
            "retired_on": "Leave empty while it is in use. Its history stays.",
            "also_serves": "Other machines that get their oil from it.",
        }
        error_messages = {
            "tag": {"unique": SENTENCES["reservoir_tag_once_any_case"][1]},
            "volume_l": {
                "max_value": "No reservoir holds that much: the volume is in litres, up to %(limit_value)s L."
            },
        }

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        self.is_new = self.instance.pk is None
        machines = Machine.objects.select_related("area")
        for name in ("machine", "also_serves"):
            self.chooser(name).queryset = machines
        if self.is_new:
            self.fields["machine"].required = False
            del self.fields["retired_on"]
        for name in () if self.is_new else self.first_only:
            del self.fields[name]

    def known_site(self) -> Site | None:
        area = getattr(self, "cleaned_data", {}).get("area")
        return area.site if area else None

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean()
        if self.is_new:
            self._choose_machine(cleaned)
        return cleaned

    def _choose_machine(self, cleaned: dict[str, Any]) -> None:
        written = cleaned.get("new_machine", "")
        if cleaned.get("machine") and written:
            said = "Either choose a machine or write a new one, not both."
            self.add_error("new_machine", ValidationError(said, code="machine_twice"))
        elif not cleaned.get("machine") and not written and not {"machine", "new_machine"} & set(self.errors):
            self.add_error("machine", ValidationError(NO_MACHINE, code="machine_missing"))

    def filling(self) -> FirstFilling:
        """What is in a new reservoir; read it after the form was found valid."""
        found = self.cleaned_data
        return FirstFilling(
            fluid=found["fluid"],
            filled_at=found["filled_at"],
            point_name=found["point_name"],
            point_place=found["point_place"],
            new_machine=found["new_machine"],
        )


class SamplePointForm(PlantForm):
    class Meta(PlantMeta):
        model = SamplePoint
        fields = ["reservoir", "name", "place", "is_default", "may_sample_running", "retired_on"]
        labels = {"place": "where it is", "retired_on": "out of use since"}
        help_texts = {"is_default": "Planned samples are drawn here; the point that was planned before gives way."}

    left_to_saving = ("point_one_planned",)
    caution = (
        "Draw under pressure only at a fitted valve meant for it, by trained people. "
        "Where it may not be drawn while running, say so here."
    )


class AliasForm(PlantForm):
    class Meta(PlantMeta):
        model = ReservoirAlias
        fields = ["reservoir", "name", "valid_from", "valid_to"]
        labels = {"name": "other name", "valid_from": "used from", "valid_to": "used until"}
        help_texts = {"name": "As a laboratory or an old label prints it. Lab files find the reservoir by it."}
