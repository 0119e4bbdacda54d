"""What the board can be narrowed to; the address holds it."""

from collections.abc import Iterable
from datetime import datetime, timedelta
from typing import Any, cast

from django import forms
from django.db.models import Q

from fleet.board import FORECAST_DAYS, coming_soon
from fleet.forms.places import area_choices
from fleet.models import Area, Fluid, Reservoir, ReservoirClass, StandingWord
from fleet.querysets import ReservoirQuerySet

SHOW = [
    ("", "Everything, worst first"),
    *StandingWord.choices,
    ("coming", f"could pass within {FORECAST_DAYS} days"),
    ("overdue", "sample overdue"),
    ("in_doubt", "result in doubt"),
    ("alerted", "open alert"),
]


FIND = {"placeholder": "tag or name", "type": "search"}


class BoardFilter(forms.Form):
    site = forms.ChoiceField(required=False)
    area = forms.ChoiceField(required=False)
    kind = forms.ChoiceField(label="Class", required=False, choices=[("", "All classes"), *ReservoirClass.choices])
    fluid = forms.ChoiceField(required=False)
    show = forms.ChoiceField(required=False, choices=SHOW)
    q = forms.CharField(label="Find", required=False, max_length=80, widget=forms.TextInput(attrs=FIND))
    sort = forms.CharField(required=False, max_length=20, widget=forms.HiddenInput())

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        areas = list(Area.objects.select_related("site"))
        sites = sorted({(area.site_id, area.site.name) for area in areas}, key=lambda site: site[1])
        self._offer("site", "All sites", sites)
        self._offer("area", "All areas", area_choices(areas))
        self._offer("fluid", "All fluids", Fluid.objects.values_list("pk", "name"))
        for name in ("site", "area", "kind", "fluid", "show"):
            self.fields[name].widget.attrs["data-submit-on-change"] = ""
        if len(sites) < 2:
            del self.fields["site"]

    def _offer(self, name: str, everything: str, choices: Iterable[tuple[int, str]]) -> None:
        cast(forms.ChoiceField, self.fields[name]).choices = [("", everything), *choices]

    def place(self) -> ReservoirQuerySet:
        """The part of the plant that is asked for, whatever stands there: what the totals speak of."""
        chosen = self.cleaned_data if self.is_valid() else {}
        found: ReservoirQuerySet = Reservoir.objects.active()
        wanted = {"area__site": chosen.get("site"), "area": chosen.get("area"), "reservoir_class": chosen.get("kind")}
        found = found.filter(**{name: value for name, value in wanted.items() if value})
        if chosen.get("fluid"):
            found = found.filter(charges__fluid=chosen["fluid"], charges__ended_at=None)
        return found

    def narrow(self, found: ReservoirQuerySet, as_of: datetime) -> ReservoirQuerySet:
        """Of those, the ones that stand as asked for and carry the words typed."""
        chosen = self.cleaned_data if self.is_valid() else {}
        show = chosen.get("show") or ""
        if show in StandingWord.values:
            found = found.filter(standing__word=show)
        elif show:
            found = found.filter(self._special(show, as_of))
        return found.finding(chosen["q"]) if chosen.get("q") else found

    def _special(self, show: str, as_of: datetime) -> Q:
        return {
            "coming": coming_soon(as_of + timedelta(days=FORECAST_DAYS)),
            "overdue": Q(standing__next_due_at__lt=as_of),
            "in_doubt": Q(standing__in_doubt__gt=0),
            "alerted": Q(standing__open_alerts__gt=0),
        }[show]
