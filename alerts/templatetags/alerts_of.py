"""What other pages show of alerts: a reservoir's open ones, and a person's mail choices."""

from typing import Any

from django import template

from alerts.forms import MailChoiceForm
from alerts.models import Alert, Subscription
from fleet.models import Reservoir

register = template.Library()


@register.inclusion_tag("alerts/open_alerts.html")
def open_alerts(reservoir: Reservoir) -> dict[str, Any]:
    """The open alerts of one reservoir, gravest first; one query."""
    return {"alerts": list(Alert.objects.open().filter(reservoir=reservoir).select_related("acknowledged_by"))}


@register.inclusion_tag("alerts/my_mail_choices.html", takes_context=True)
def my_mail_choices(context: template.Context) -> dict[str, Any]:
    """What mail the person logged in gets, with forms to add and remove."""
    person = context["request"].user
    chosen = Subscription.objects.filter(person=person).select_related("site", "area__site")
    return {
        "request": context["request"],
        "csrf_token": context.get("csrf_token"),
        "person": person,
        "choices": list(chosen),
        "form": MailChoiceForm(),
    }
