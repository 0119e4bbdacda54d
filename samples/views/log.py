"""Log a result: find the reservoir, fill in the form, see code and doubts, save."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import datetime
from typing import Any

from django.contrib import messages
from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import reverse
from django.utils import timezone
from django.utils.html import format_html
from django.utils.http import urlencode
from django.views.decorators.http import require_GET, require_POST

from fleet.access import require, role_required
from fleet.forms.base import summary
from fleet.models import Measurand, Reservoir, Role
from samples.forms.find import FindForm
from samples.forms.log import LogForm
from samples.history import History, read_history
from samples.log_panel import Panel, panel_of, panel_of_readings
from samples.models import Sample
from samples.results import EntryError, measurands_by_key, save_entry
from samples.sample_codes import code_text


@role_required(Role.TECHNICIAN)
def log(request: HttpRequest) -> HttpResponse:
    now = timezone.now()
    if request.method == "POST":
        return _posted(request, now)
    find = FindForm(request.GET)
    found = find.scanned() or find.only_match()
    if found is None:
        return render(request, "samples/log_find.html", {"find": find, "found": find.matches()})
    if request.GET.get("reservoir") != found.tag:
        return redirect(_address(found))
    history = read_history(found)
    known = measurands_by_key()
    form = LogForm(initial={"reservoir": found.tag}, history=history, known=known, now=now)
    return _form_page(request, form, panel_of_readings([], history, known, now))


@require_GET
@role_required(Role.TECHNICIAN)
def log_find(request: HttpRequest) -> HttpResponse:
    """The list below the search field, as typed so far."""
    find = FindForm(request.GET)
    return render(request, "samples/log_found.html", {"find": find, "found": find.matches()})


@require_POST
@role_required(Role.TECHNICIAN)
def log_preview(request: HttpRequest) -> HttpResponse:
    """The panel beside the form, as filled in so far. Nothing is saved."""
    now = timezone.now()
    known = measurands_by_key()
    form = _bound_form(request, known, now)
    context = {"form": form, "panel": _panel(form, known, now), "wrong": _wrong(form), "live": True}
    return render(request, "samples/log_panel.html", context | _beside(form))


def _posted(request: HttpRequest, now: datetime) -> HttpResponse:
    known = measurands_by_key()
    form = _bound_form(request, known, now)
    wants_saving = request.POST.get("then") in {"save", "next"}
    if form.is_valid() and wants_saving and (sample := _saved(request, form, now)):
        if request.POST["then"] == "next":
            return redirect("log")
        return redirect("sample", sample.pk)
    panel = _panel(form, known, now)
    for error in panel.errors if panel else ():
        form.say(error)
    return _form_page(request, form, panel, status=422 if form.errors else 200)


def _saved(request: HttpRequest, form: LogForm, now: datetime) -> Sample | None:
    """The saved sample, with a message; None with the reason at its field."""
    entry, history = form.entry, form.history
    if entry is None or history is None:
        return None
    try:
        sample = save_entry(entry, history, by=require(request, Role.TECHNICIAN), now=now)
    except EntryError as error:
        form.say(error)
        return None
    doubt = " It is in doubt and waits for an engineer's word." if sample.verdict == Sample.Verdict.IN_DOUBT else ""
    link = format_html('<a href="{}">{}</a>', reverse("reservoir", args=[entry.reservoir.tag]), entry.reservoir)
    messages.success(request, format_html("Saved for {}.{}", link, doubt))
    return sample


def _bound_form(request: HttpRequest, known: Mapping[str, Measurand], now: datetime) -> LogForm:
    reservoir = FindForm(request.POST).scanned()
    history = read_history(reservoir) if reservoir is not None else None
    return LogForm(request.POST, history=history, known=known, now=now)


def _panel(form: LogForm, known: Mapping[str, Measurand], now: datetime) -> Panel | None:
    form.is_valid()
    if form.history is None:
        return None
    if form.entry is not None:
        return panel_of(form.entry, form.history, known, now)
    return panel_of_readings(form.readings, form.history, known, now)


def _form_page(request: HttpRequest, form: LogForm, panel: Panel | None, status: int = 200) -> HttpResponse:
    # What was asked for is the panel: the keyboard goes there, unless something has to be mended first.
    read_first = form.is_bound and not form.errors
    context = {"form": form, "panel": panel, "summary": summary(form), "wrong": [], "read_first": read_first}
    return render(request, "samples/log.html", context | _beside(form), status=status)


def _wrong(form: LogForm) -> list[tuple[str, str, str]]:
    """The errors that a person can mend already; what is only missing yet is not wrong yet."""
    unfinished = {
        name
        for name, errors in form.errors.as_data().items()
        if any(error.code in {"required", "no_result"} for error in errors)
    }
    labels = {str(form.fields[name].label or name) for name in unfinished if name in form.fields}
    return [line for line in summary(form) if line[1] not in labels]


def _beside(form: LogForm) -> dict[str, Any]:
    """Facts of the reservoir that help to fill in the form: last meter reading, new oil, the site's clock."""
    history = form.history
    if history is None:
        return {"reservoir": None}
    charge = history.current_charge
    return {
        "reservoir": history.reservoir,
        "zone": history.reservoir.area.site.zone,
        "last_metered": _last_metered(history),
        "last_sample": history.latest,
        "last_code": code_text(history.latest.current_results) if history.latest else "",
        "new_oil": charge.fluid if charge else None,
    }


def _last_metered(history: History) -> Sample | None:
    return next((sample for sample in reversed(history.accepted) if sample.machine_hours is not None), None)


def _address(reservoir: Reservoir) -> str:
    return f"{reverse('log')}?{urlencode({'reservoir': reservoir.tag})}"
