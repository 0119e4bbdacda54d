"""Forms of filter positions and the elements fitted in them."""

from datetime import date
from typing import Any

from django import forms
from django.core.exceptions import ValidationError

from fleet.forms.base import PlantForm, PlantMeta
from fleet.models import Element, FilterPosition, Reservoir
from fleet.refusals import SENTENCES
from fleet.site_time import written_at


class PositionForm(PlantForm):
    class Meta(PlantMeta):
        model = FilterPosition
        fields = ["reservoir", "name", "place", "flow_l_min", "full_flow", "has_bypass", "clean_dp_bar"]

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        self.chooser("reservoir").queryset = Reservoir.objects.select_related("machine")


class ElementForm(PlantForm):
    """An element. Fitting a new one says why the one before it came out; a correction says until when it was in."""

    found = forms.CharField(
        label="about the one that came out",
        required=False,
        widget=forms.Textarea(attrs={"rows": 3}),
        help_text="Why it was removed (indicator, calendar, opened), and what was in the pleats.",
    )
    groups = [
        ("Which element", ["position", "part", "fitted_on", "removed_on"]),
        ("Its rating", ["rating_kind", "beta", "beta_size_um", "rating_um"]),
        ("", ["found", "removal_note"]),
    ]
    narrowed_by = ("reservoir",)
    left_to_saving = ("element_no_overlap",)
    caution = (
        "Isolate, lock and tag, and release stored pressure before a housing is opened; hot oil burns. "
        "Site procedures and trained people come first."
    )

    class Meta(PlantMeta):
        model = Element
        fields = [
            *("position", "part", "fitted_on", "removed_on", "rating_kind", "beta", "beta_size_um", "rating_um"),
            "removal_note",
        ]
        labels = {"fitted_on": "fitted on", "removed_on": "removed on"}
        help_texts = {
            "beta": "A rating without its size and beta ratio is not a rating. 1000 at 5 µm(c), for example.",
            "rating_um": "For an element that is only called absolute or nominal, or for a mesh.",
        }

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        chooser = self.chooser("position")
        chooser.queryset = FilterPosition.objects.select_related("reservoir__machine", "reservoir__area__site")
        chooser.label_from_instance = _with_reservoir  # type: ignore[method-assign,assignment]
        self.is_new = self.instance.pk is None
        if self.is_new and self.initial.get("reservoir"):
            chooser.queryset = chooser.queryset.filter(reservoir=self.initial["reservoir"])
        if not self.is_new:
            chooser.disabled = True
        for name in ("removed_on", "removal_note") if self.is_new else ("found",):
            del self.fields[name]

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean()
        if (cleaned.get("beta") is None) != (cleaned.get("beta_size_um") is None) and not self.errors:
            missing = "beta" if cleaned.get("beta") is None else "beta_size_um"
            self.say(SENTENCES["element_beta_with_size"][1], missing, "element_beta_with_size")
        position = cleaned.get("position")
        if position is not None:
            today = written_at(self.now, position.reservoir.area.site.zone).date()
            self._not_in_the_future("fitted_on", cleaned.get("fitted_on"), today)
            self._not_in_the_future("removed_on", cleaned.get("removed_on"), today)
        return cleaned

    def _not_in_the_future(self, name: str, day: date | None, today: date) -> None:
        if day is not None and day > today:
            self.add_error(name, ValidationError("That day is still to come.", code="future"))


def _with_reservoir(position: FilterPosition) -> str:
    return f"{position.reservoir}: {position}"
