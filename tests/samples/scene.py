"""What the tests of logging and of lab files share: a form as a browser sends it, a file as a laboratory sends it."""

import csv
from datetime import datetime, timedelta
from pathlib import Path
from typing import Any

from django.test import Client
from django.utils import timezone

from fleet.models import Reservoir, Role
from samples.models import Doubt, IntakeFile, PendingFile, Result, Sample
from tests import builders

EXAMPLES = Path(__file__).parent.parent / "coding" / "iso4406_examples.csv"
# Two pages of a published laboratory report (AWEA RP 508, Figure A), a distributor's note, a reference chart, and the
# standard's own low-count example; the sources stand in the file.
PUBLISHED = ("ISO4406-01", "ISO4406-02", "ISO4406-04", "ISO4406-08", "ISO4406-10")
HEADINGS = "Reservoir;Drawn;Time;Laboratory;Lab no;≥4 µm(c) per mL;≥6 µm(c) per mL;≥14 µm(c) per mL;Counted volume (mL)"


def published_sets() -> list[dict[str, str]]:
    with EXAMPLES.open(newline="") as file:
        return [row for row in csv.DictReader(file) if row["id"] in PUBLISHED]


def client_as(role: Role = Role.TECHNICIAN) -> Client:
    client = Client()
    client.force_login(builders.person(role))
    return client


def typed(reservoir: Reservoir, then: str = "save", **more: str) -> dict[str, str]:
    """The log form filled in with the least that it needs, drawn yesterday, and whatever the test adds."""
    moment = timezone.now() - timedelta(days=1)
    return {
        "reservoir": reservoir.tag,
        "point": str(reservoir.points.get(is_default=True).pk),
        **when(moment),
        "method": "unknown",
        "reason": "routine",
        "water_unit": "mg/kg",
        "then": then,
    } | more


def when(moment: datetime) -> dict[str, str]:
    """A moment as the date and the time field of a site in UTC hold it."""
    return {"drawn_on": moment.strftime("%Y-%m-%d"), "drawn_time": moment.strftime("%H:%M")}


def lab_file(*rows: str, headings: str = HEADINGS) -> bytes:
    return "\n".join([headings, *rows, ""]).encode()


def everything() -> dict[str, int]:
    """How many rows there are of all that logging and importing write."""
    return {model.__name__: model.objects.count() for model in (Sample, Result, Doubt, IntakeFile, PendingFile)}


def errors_of(response: Any) -> dict[str, str]:
    """The first sentence at each field of the page's form."""
    return {name: str(sentences[0]) for name, sentences in response.context["form"].errors.items()}
