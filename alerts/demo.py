"""The people of the invented mill, who gets which mail, and the alerts that its three years leave open."""

from __future__ import annotations

from datetime import datetime

from django.conf import settings
from django.db import transaction

from alerts.defaults import ensure_rules
from alerts.evaluation import mark_history_judged
from alerts.models import Rule, Subscription
from fleet.models import Person, Role, Site
from samples.demo.load import load

PASSWORD = "fernhollow-demo"  # noqa: S105  # printed on purpose: the demo holds nothing but made-up data
PEOPLE = [
    ("technician", Role.TECHNICIAN, "R.", "Sand", "draws and logs"),
    ("engineer", Role.ENGINEER, "M.", "Ito", "judges, sets targets and limits"),
    ("supervisor", Role.READER, "L.", "Brandt", "reads the board"),
    ("admin", Role.ADMINISTRATOR, "K.", "Moreau", "looks after people and sites"),
]


@transaction.atomic
def load_demo(as_of: datetime) -> Site:
    """Everything in one transaction: the mill, its people and its alerts. No mail goes out for what is old."""
    site = load(as_of)
    ensure_rules(site)
    for username, role, first, last, _ in PEOPLE:
        _person(username, role, first, last)
    for username in ("engineer", "supervisor"):
        person = Person.objects.get(username=username)
        kind = Rule.Kind.PAST_LIMIT if username == "supervisor" else ""
        Subscription.objects.get_or_create(person=person, site=site, area=None, kind=kind)
    mark_history_judged(as_of)
    return site


def _person(username: str, role: Role, first: str, last: str) -> None:
    facts = {"role": role, "first_name": first, "last_name": last, "email": f"{username}@fernhollow.example"}
    person, made = Person.objects.get_or_create(username=username, defaults=facts)
    if made:
        person.set_password(PASSWORD)
        person.save(update_fields=["password"])


def logins() -> list[str]:
    """One line a person: name, password and what they are for."""
    width = max(len(username) for username, *_ in PEOPLE)
    return [f"{settings.SITE_URL}  {username:<{width}}  {PASSWORD}  ({what})" for username, _, _, _, what in PEOPLE]
