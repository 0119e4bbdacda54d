"""Finding the reservoir of a sample: by a few letters, or by the tag on its label."""

from __future__ import annotations

from typing import Any

from django import forms

from fleet.models import Reservoir

MOST_SHOWN = 12
FIND_ATTRS = {"type": "search", "autocomplete": "off", "placeholder": "tag, machine, area or another name", "size": 40}


class FindForm(forms.Form):
    """`q` is typed or scanned, `reservoir` is a tag from a link."""

    q = forms.CharField(label="Reservoir", required=False, max_length=80, widget=forms.TextInput(attrs=FIND_ATTRS))
    reservoir = forms.CharField(required=False, max_length=40)

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        self.full_clean()

    @property
    def typed(self) -> str:
        return str(self.cleaned_data.get("q", "")) if self.is_bound else ""

    @property
    def asked_tag(self) -> str:
        return str(self.cleaned_data.get("reservoir", "")) if self.is_bound else ""

    def scanned(self) -> Reservoir | None:
        """The reservoir in service whose tag was given whole, in whatever case; None where two differ only in that."""
        tag = self.asked_tag or self.typed
        found: list[Reservoir] = list(Reservoir.objects.active().with_place().filter(tag__iexact=tag)) if tag else []
        exact = [reservoir for reservoir in found if reservoir.tag == tag]
        return (exact or found)[0] if exact or len(found) == 1 else None

    def only_match(self) -> Reservoir | None:
        """The reservoir meant where what was typed fits one alone."""
        found = self.matches() if self.typed and not self.asked_tag else []
        return found[0] if len(found) == 1 else None

    def matches(self) -> list[Reservoir]:
        """The first reservoirs in service that carry every word typed; all of them, from A, before anything is."""
        found: Any = Reservoir.objects.active().with_place()
        return list(found.finding(self.typed)[: MOST_SHOWN + 1])
