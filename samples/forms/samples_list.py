"""What the list of samples can be narrowed to; the address holds it."""

from __future__ import annotations

from datetime import UTC, datetime, time
from typing import Any

from django import forms

from fleet.models import Area
from samples.models import IntakeFile, Laboratory, Sample

FIND_ATTRS = {"type": "search", "placeholder": "reservoir, number, label", "size": 20}
DAY_ATTRS = {"type": "date"}


class SamplesFilter(forms.Form):
    """A choice that does not exist counts as none."""

    q = forms.CharField(label="Find", required=False, max_length=80, widget=forms.TextInput(attrs=FIND_ATTRS))
    verdict = forms.ChoiceField(required=False, choices=[("", "all"), *Sample.Verdict.choices])
    laboratory = forms.ModelChoiceField(Laboratory.objects.all(), required=False, empty_label="all laboratories")
    area = forms.ModelChoiceField(Area.objects.all(), required=False, empty_label="all areas")
    intake = forms.ModelChoiceField(IntakeFile.objects.all(), required=False, widget=forms.HiddenInput())
    since = forms.DateField(label="From", required=False, widget=forms.DateInput(attrs=DAY_ATTRS, format="%Y-%m-%d"))
    until = forms.DateField(label="To", required=False, widget=forms.DateInput(attrs=DAY_ATTRS, format="%Y-%m-%d"))

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        for name in ("verdict", "laboratory", "area"):
            self.fields[name].widget.attrs["data-submit-on-change"] = ""

    @property
    def is_narrowed(self) -> bool:
        return any(self.cleaned_data.values())

    def narrow(self) -> Any:
        """The samples asked for, newest first. Days are those of UTC, which is near enough for a list."""
        self.full_clean()
        chosen = self.cleaned_data
        found: Any = Sample.objects.all()
        if chosen.get("q"):
            found = found.finding(chosen["q"])
        wanted = {
            "verdict": chosen.get("verdict"),
            "laboratory": chosen.get("laboratory"),
            "reservoir__area": chosen.get("area"),
            "intake": chosen.get("intake"),
        }
        found = found.filter(**{name: value for name, value in wanted.items() if value})
        if chosen.get("since"):
            found = found.filter(drawn_at__gte=datetime.combine(chosen["since"], time.min, UTC))
        if chosen.get("until"):
            found = found.filter(drawn_at__lte=datetime.combine(chosen["until"], time.max, UTC))
        return found.order_by("-drawn_at", "-pk")
