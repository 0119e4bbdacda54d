"""Forms of the oil, its fillings and what was done to it."""

from typing import Any

from django.core.exceptions import ValidationError

from fleet.forms.base import PlantForm, PlantMeta
from fleet.models import Event, Fluid, OilCharge, Reservoir, Site
from fleet.site_time import written_at

NEEDS_LITRES = (Event.Kind.TOP_UP, Event.Kind.PARTIAL_CHANGE)


class FluidForm(PlantForm):
    groups = [
        ("The oil as bought", ["name", "kind", "viscosity_grade", "notes"]),
        (
            "What new oil measures",
            ["viscosity_40", "viscosity_100", "density_kg_l", "acid_number"],
        ),
    ]

    class Meta(PlantMeta):
        model = Fluid
        fields = [
            *("name", "kind", "viscosity_grade", "viscosity_40", "viscosity_100"),
            *("density_kg_l", "acid_number", "notes"),
        ]
        help_texts = {"acid_number": "Used oil is compared with these figures. Measured on a delivery is best."}


class ReservoirClockForm(PlantForm):
    """A form whose times are read by the clock of the reservoir's site."""

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        chooser = self.chooser("reservoir")
        chooser.queryset = Reservoir.objects.select_related("machine", "area__site")
        if self.instance.pk is not None:
            chooser.disabled = True

    def known_site(self) -> Site | None:
        chosen = getattr(self, "cleaned_data", {}).get("reservoir")
        if chosen is None and self.instance.reservoir_id is not None:
            chosen = self.instance.reservoir
        return chosen.area.site if chosen else None


class ChargeForm(ReservoirClockForm):
    """A filling. Where it ends is the next oil change's to say."""

    site_times = ("started_at",)

    class Meta(PlantMeta):
        model = OilCharge
        fields = ["reservoir", "fluid", "started_at", "volume_l"]
        labels = {"fluid": "oil", "started_at": "filled in on"}

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        if self._began_with_an_oil_change():
            self.fields["started_at"].disabled = True
            self.fields["started_at"].help_text = "An oil change began it; correct that event to move it."

    def _began_with_an_oil_change(self) -> bool:
        events = Event.objects.filter(reservoir=self.instance.reservoir_id, kind=Event.Kind.OIL_CHANGE)
        return self.instance.pk is not None and events.filter(at=self.instance.started_at).exists()

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean()
        if self.fields["started_at"].disabled:
            cleaned["started_at"] = self.instance.started_at
        return cleaned


class EventForm(ReservoirClockForm):
    site_times = ("at", "ended_at")
    groups = [
        ("What was done", ["reservoir", "kind", "at", "ended_at"]),
        ("How much", ["litres", "fluid", "flow_l_min", "machine_hours"]),
        ("", ["note"]),
    ]
    caution = (
        "Before work on elements, hoses, valves or breathers: isolate, lock and tag, release stored pressure and check "
        "that it is gone. Site procedures and trained people come first."
    )

    class Meta(PlantMeta):
        model = Event
        fields = [
            *("reservoir", "kind", "at", "ended_at", "litres", "fluid", "flow_l_min", "machine_hours", "note"),
        ]
        labels = {
            "litres": "oil filled in, L",
            "fluid": "oil",
            "machine_hours": "machine hours, h",
            "flow_l_min": "flow of the offline filter, L/min",
        }
        help_texts = {
            "ended_at": "For what lasts, such as offline filtration.",
            "litres": "For a top-up or a partial change always; for an oil change when it differs from the volume.",
            "fluid": "The oil filled in. Left empty, it is the oil that was in it.",
        }

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        given = Reservoir.objects.with_place().filter(pk=self.initial.get("reservoir") or 0).first()
        if self.instance.pk is None and given is not None:
            self.initial["at"] = written_at(self.now, given.area.site.zone)

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean()
        if cleaned.get("kind") in NEEDS_LITRES and cleaned.get("litres") is None and "litres" not in self.errors:
            said = "Say how many litres were filled in: slopes are corrected by them."
            self.add_error("litres", ValidationError(said, code="litres_missing"))
        return cleaned
