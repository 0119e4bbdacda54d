"""What a list of the register can be narrowed to; the address holds it."""

from typing import Any, cast

from django import forms

from fleet.forms.places import area_choices
from fleet.models import Area, ReservoirClass


class ListFilter(forms.Form):
    """Text, area and class; a list without areas or classes has no such field."""

    q = forms.CharField(
        label="Find", required=False, max_length=80, widget=forms.TextInput(attrs={"type": "search", "size": 18})
    )
    area = forms.TypedChoiceField(required=False, coerce=int, empty_value=None)
    kind = forms.ChoiceField(label="Class", required=False, choices=[("", "All classes"), *ReservoirClass.choices])

    def __init__(self, *args: Any, with_area: bool, with_class: bool, **more: Any) -> None:
        super().__init__(*args, **more)
        if with_area:
            areas = area_choices(Area.objects.select_related("site"))
            cast(forms.ChoiceField, self.fields["area"]).choices = [("", "All areas"), *areas]
        for name, wanted in (("area", with_area), ("kind", with_class)):
            self.fields[name].widget.attrs["data-submit-on-change"] = ""
            if not wanted:
                del self.fields[name]

    def chosen(self, name: str) -> Any:
        """What was chosen, or None; a choice that does not exist counts as none."""
        self.full_clean()
        return self.cleaned_data.get(name) or None
