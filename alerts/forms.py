"""What people type about alerts: what to show, a note, a reason, the rules, and whose mail they want."""

from typing import Any, cast

from django import forms
from django.db.models import Q, QuerySet

from alerts.models import Alert, Delivery, Rule, Subscription
from fleet.forms.base import PercentField
from fleet.forms.places import area_choices
from fleet.forms.words import speak_plainly
from fleet.models import Area, Person, Site

STATES = [
    ("open", "Open"),
    ("unseen", "Open, nobody has seen it"),
    ("closed", "Closed"),
    ("all", "All"),
    ("mail", "With mail that failed"),
]
FAILED_MAIL = ~Q(last_error="") & ~Q(state=Delivery.State.SENT)


class AlertFilter(forms.Form):
    """What the list can be narrowed to; the address holds it."""

    state = forms.ChoiceField(required=False, choices=STATES)
    family = forms.ChoiceField(required=False, choices=[("", "All families"), *Alert.Family.choices])
    area = forms.ChoiceField(required=False)
    q = forms.CharField(label="Find", required=False, max_length=80, widget=forms.TextInput(attrs={"type": "search"}))

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        areas = area_choices(Area.objects.select_related("site"))
        cast(forms.ChoiceField, self.fields["area"]).choices = [("", "All areas"), *areas]
        for name in ("state", "family", "area"):
            self.fields[name].widget.attrs["data-submit-on-change"] = ""

    @property
    def is_narrowed(self) -> bool:
        """Whether more is asked for than a state."""
        chosen = self.cleaned_data if self.is_valid() else {}
        return any(chosen.get(name) for name in ("family", "area", "q"))

    def narrow(self, alerts: QuerySet[Alert]) -> QuerySet[Alert]:
        """The alerts asked for; open ones where nothing, or nothing that exists, is asked for."""
        chosen = self.cleaned_data if self.is_valid() else {}
        found = alerts.filter(_state(chosen.get("state") or "open"))
        wanted = {"family": chosen.get("family"), "reservoir__area": chosen.get("area")}
        found = found.filter(**{name: value for name, value in wanted.items() if value})
        return found.finding(chosen["q"]) if chosen.get("q") else found  # type: ignore[attr-defined]


def _state(chosen: str) -> Q:
    return {
        "unseen": Q(state=Alert.State.OPEN, acknowledged_at=None),
        "closed": Q(state=Alert.State.CLOSED),
        "all": Q(),
        "mail": Q(pk__in=Delivery.objects.filter(FAILED_MAIL).values("alert")),
    }.get(chosen, Q(state=Alert.State.OPEN))


class AcknowledgeForm(forms.Form):
    note = forms.CharField(
        required=False,
        max_length=2000,
        widget=forms.Textarea(attrs={"rows": 2}),
        help_text="What you make of it, or what happens next. It may stay empty.",
    )


class CloseForm(forms.Form):
    """A person may not say that a sample showed it: that the program sees for itself."""

    reason = forms.ChoiceField(
        label="Why",
        choices=[("", "Choose"), *(pair for pair in Alert.CloseReason.choices if pair[0] != "shown_over")],
        error_messages={"required": "Choose why it is closed.", "invalid_choice": "Choose one of these reasons."},
    )
    note = forms.CharField(
        label="What was found",
        max_length=2000,
        widget=forms.Textarea(attrs={"rows": 3}),
        help_text="What was found or decided. Limits get better only from this.",
        error_messages={"required": "Say what was found or decided, in a few words."},
    )


class RuleForm(forms.ModelForm[Rule]):
    """One rule; figures that its kind does not know are left out. A chance is in per cent here, as on every page."""

    least_chance = PercentField(
        label="or chance at least, %",
        required=False,
        help_text="Forecast: chance of passing before the next planned sample, 5 to 95 %.",
        error_messages={"min_value": "Must be 5 %% or more.", "max_value": "Must be 95 %% or less."},
    )

    figures = {
        Rule.Kind.FORECAST: ("within_days", "least_chance"),
        Rule.Kind.OVERDUE: ("grace_days",),
    }

    class Meta:
        model = Rule
        fields = ("enabled", "mails", "least_criticality", "within_days", "least_chance", "grace_days")

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        known = self.figures.get(Rule.Kind(self.instance.kind), ())
        for name in ("within_days", "least_chance", "grace_days"):
            if name not in known:
                del self.fields[name]
        speak_plainly(self)
        for name in ("least_criticality", *known):
            self.fields[name].widget.attrs["class"] = "short"

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or self.cleaned_data
        names = ("within_days", "least_chance")
        asked = self.instance.kind == Rule.Kind.FORECAST and not any(name in self.errors for name in names)
        if asked and all(cleaned.get(name) is None for name in names):
            self.add_error(
                "within_days",
                forms.ValidationError("Give a number of days, a chance, or both.", code="forecast_has_no_figure"),
            )
        return cleaned


class MailChoiceForm(forms.Form):
    """Which mail a person wants: where, and about what."""

    where = forms.ChoiceField()
    kind = forms.ChoiceField(label="About", required=False, choices=[("", "every alert"), *Rule.Kind.choices])

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        places = [(f"site-{site.pk}", f"all of {site.name}") for site in Site.objects.all()]
        areas = area_choices(Area.objects.select_related("site"))
        places += [(f"area-{key}", name) for key, name in areas]
        cast(forms.ChoiceField, self.fields["where"]).choices = places

    def add_for(self, person: Person) -> bool:
        """Remember the choice; False when it was there already."""
        noun, _, key = self.cleaned_data["where"].partition("-")
        area = Area.objects.get(pk=key) if noun == "area" else None
        _, new = Subscription.objects.get_or_create(
            person=person, site_id=area.site_id if area else int(key), area=area, kind=self.cleaned_data["kind"]
        )
        return new
