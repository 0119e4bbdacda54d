"""One mail about one alert to one person, from three templates: subject, plain text and HTML."""

from typing import Any
from urllib.parse import urlsplit

from django.conf import settings
from django.core.mail import EmailMultiAlternatives
from django.db.models import Q, QuerySet
from django.template.loader import render_to_string
from django.urls import reverse

from alerts import advice, sentences
from alerts.evidence import evidence_of
from alerts.models import Alert, Delivery, Subscription
from alerts.rules import Kind
from fleet.models import Person

TEMPLATE = "emails/alert"
MOST_SUBJECT = 200


def with_everything(rows: QuerySet[Delivery]) -> QuerySet[Delivery]:
    """Deliveries with all that their mail reads, in one question."""
    return rows.select_related(
        "person", "alert__reservoir__area__site", "alert__reservoir__machine", "alert__measurand", "alert__sample"
    )


def build(delivery: Delivery) -> EmailMultiAlternatives:
    """The mail of a delivery as the alert stands now. The same delivery has the same Message-ID every time."""
    facts = mail_facts(delivery)
    message = EmailMultiAlternatives(
        subject=subject(facts),
        body=render_to_string(f"{TEMPLATE}-text.txt", facts),
        to=[delivery.address],
        headers={
            "Message-ID": message_id(delivery),
            "References": thread_id(delivery.alert),
            "Auto-Submitted": "auto-generated",
        },
    )
    message.attach_alternative(render_to_string(f"{TEMPLATE}-html.html", facts), "text/html")
    return message


def subject(facts: dict[str, Any]) -> str:
    """One line: whatever stands in a name, it cannot end the line and begin another header."""
    line = " ".join(render_to_string(f"{TEMPLATE}-subject.txt", facts).split())
    plain = "".join(character for character in line if character.isprintable())
    return plain if len(plain) <= MOST_SUBJECT else f"{plain[: MOST_SUBJECT - 1]}…"


def message_id(delivery: Delivery) -> str:
    return f"<delivery-{delivery.pk}-{delivery.alert.opened_at:%Y%m%d%H%M%S}@{_domain()}>"


def thread_id(alert: Alert) -> str:
    """Mails about one alert belong together in a mail program."""
    return f"<alert-{alert.pk}-{alert.opened_at:%Y%m%d%H%M%S}@{_domain()}>"


def mail_facts(delivery: Delivery) -> dict[str, Any]:
    """Everything the templates say: what, how sure and how urgent, what next, caution, links, and why it was sent."""
    alert = delivery.alert
    reservoir, evidence = alert.reservoir, evidence_of(alert)
    zone = reservoir.area.site.zone
    return {
        "alert": alert,
        "reservoir": reservoir,
        "site": reservoir.area.site,
        "what": alert.get_kind_display().capitalize(),
        "drawn": sentences.day_text(alert.sample.drawn_at, zone, year=False) if alert.sample else "",
        "evidence": evidence,
        "before": [(sentences.day_text(past.drawn_at, zone), past.text) for past in evidence.before],
        "steps": advice.first_steps(alert.family, Kind(alert.kind)),
        "cautions": advice.cautions(alert.family, reservoir.hazards, reservoir.pressure_bar),
        "alert_url": settings.SITE_URL + reverse("alert", args=[alert.pk]),
        "account_url": settings.SITE_URL + reverse("account"),
        "why": _why(delivery),
        "others": _others(delivery),
    }


def _why(delivery: Delivery) -> str:
    area = delivery.alert.reservoir.area
    wish = (
        Subscription.objects.filter(person=delivery.person, site=area.site_id)
        .filter(Q(area=None) | Q(area=area), Q(kind="") | Q(kind=delivery.reason))
        .select_related("area", "site")
        .first()
    )
    if wish is None:
        return "You asked for mail like this one when it was written."
    about = f"alerts of the kind “{wish.get_kind_display()}”" if wish.kind else "every alert"
    return f"You asked for mail about {about} at {wish.area or wish.site}."


def _others(delivery: Delivery) -> list[str]:
    others = Person.objects.filter(deliveries__alert=delivery.alert_id, deliveries__reason=delivery.reason).exclude(
        pk=delivery.person_id
    )
    return [str(person) for person in others]


def _domain() -> str:
    return urlsplit(settings.SITE_URL).hostname or "localhost"
