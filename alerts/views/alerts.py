"""The list of alerts, one alert, and what people do with it."""

from collections.abc import Iterator
from typing import Any

from django.contrib import messages
from django.core.paginator import Paginator
from django.db.models import QuerySet
from django.http import HttpRequest, HttpResponse, HttpResponseBase
from django.shortcuts import get_object_or_404, redirect, render
from django.utils import timezone
from django.views.decorators.http import require_GET, require_POST

from alerts import advice, handling
from alerts.evidence import evidence_of
from alerts.forms import FAILED_MAIL, AcknowledgeForm, AlertFilter, CloseForm
from alerts.models import Alert, Delivery
from alerts.rules import Kind
from fleet.access import require, role_required
from fleet.addresses import same_list
from fleet.export import csv_response
from fleet.models import Role

A_PAGE = 50
HEADINGS = (
    "kind", "family", "criticality", "tag", "machine", "reservoir", "area", "site", "headline", "sentence",
    "opened", "seen", "seen by", "closed", "close reason", "close note",
)  # fmt: skip


@require_GET
def alerts(request: HttpRequest) -> HttpResponseBase:
    """Open alerts by weight and age; the address holds what is shown."""
    form = AlertFilter(request.GET)
    found = form.narrow(Alert.objects.with_place().with_people())
    if request.GET.get("format") == "csv":
        return csv_response("alerts", HEADINGS, _csv_rows(found))
    page = Paginator(found.order_by("weight", "opened_at", "pk"), A_PAGE).get_page(request.GET.get("page"))
    context = {
        "form": form,
        "page": page,
        "failed_mails": Delivery.objects.filter(FAILED_MAIL).count(),
        "state": request.GET.get("state") or "open",
        "here": same_list(request),
        "csv": same_list(request, format="csv"),
        "as_of": timezone.now(),
    }
    return render(request, "alerts/alerts.html", context)


@require_GET
def alert(request: HttpRequest, pk: int) -> HttpResponse:
    return _alert_page(request, _found(pk), AcknowledgeForm(), CloseForm())


@require_POST
@role_required(Role.TECHNICIAN)
def acknowledge(request: HttpRequest, pk: int) -> HttpResponse:
    person, shown, form = require(request, Role.TECHNICIAN), _found(pk), AcknowledgeForm(request.POST)
    if not form.is_valid():
        return _alert_page(request, shown, form, CloseForm(), status=422)
    if handling.acknowledge(shown, person, form.cleaned_data["note"], timezone.now()):
        messages.success(request, "Noted that you have seen it.")
    else:
        messages.info(request, "Somebody had seen it before; your note is in the story.")
    return redirect("alert", pk=pk)


@require_POST
@role_required(Role.ENGINEER)
def close(request: HttpRequest, pk: int) -> HttpResponse:
    person, shown, form = require(request, Role.ENGINEER), _found(pk), CloseForm(request.POST)
    if not form.is_valid():
        return _alert_page(request, shown, AcknowledgeForm(), form, status=422)
    said = form.cleaned_data
    if handling.close(shown, person, said["reason"], said["note"], timezone.now()):
        messages.success(request, "Closed. It opens again only when a later sample calls for it.")
    else:
        messages.warning(request, "It was closed already; nothing was changed.")
    return redirect("alert", pk=pk)


def _found(pk: int) -> Alert:
    found: Alert = get_object_or_404(Alert.objects.with_place().with_people(), pk=pk)
    return found


def _alert_page(
    request: HttpRequest, shown: Alert, acknowledge_form: AcknowledgeForm, close_form: CloseForm, status: int = 200
) -> HttpResponse:
    reservoir = shown.reservoir
    context: dict[str, Any] = {
        "alert": shown,
        "reservoir": reservoir,
        "site": reservoir.area.site,
        "evidence": evidence_of(shown),
        "steps": advice.first_steps(shown.family, Kind(shown.kind)),
        "cautions": advice.cautions(shown.family, reservoir.hazards, reservoir.pressure_bar),
        "story": list(shown.story.all()),
        "deliveries": list(shown.deliveries.select_related("person")),
        "acknowledge_form": acknowledge_form,
        "close_form": close_form,
        "may_acknowledge": _may(request, Role.TECHNICIAN),
        "may_close": _may(request, Role.ENGINEER),
    }
    return render(request, "alerts/alert.html", context, status=status)


def _may(request: HttpRequest, role: Role) -> bool:
    return request.user.is_authenticated and request.user.may_act_as(role)


def _csv_rows(found: QuerySet[Alert]) -> Iterator[tuple[object, ...]]:
    for row in found.order_by("weight", "opened_at", "pk").iterator(chunk_size=500):
        reservoir, seen, closed = row.reservoir, row.acknowledged_at, row.closed_at
        zone = reservoir.area.site.zone
        yield (
            *(row.get_kind_display(), row.get_family_display(), reservoir.criticality, reservoir.tag),
            *(reservoir.machine.name, reservoir.name, reservoir.area.name, reservoir.area.site.name),
            *(row.headline, row.sentence, row.opened_at.astimezone(zone)),
            *(seen and seen.astimezone(zone), row.acknowledged_by),
            *(closed and closed.astimezone(zone), row.get_close_reason_display(), row.close_note),
        )
