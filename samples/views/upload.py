"""Upload a lab file: choose it, see every row's verdict, import all of it or nothing."""

from __future__ import annotations

from datetime import datetime
from typing import Any

from django.conf import settings
from django.contrib import messages
from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import reverse
from django.utils import timezone
from django.utils.html import format_html
from django.views.decorators.csrf import csrf_exempt, csrf_protect

from fleet.access import require, role_required
from fleet.forms.base import summary
from fleet.models import Role
from samples.forms.upload import ImportForm, UploadForm
from samples.lab_files import FileCheck, IntakeError, check_file, commit_file, keep_for_import
from samples.lab_rows import RowState, RowVerdict
from samples.models import IntakeFile, Sample
from samples.uploads import SizeGuard

MOST_SHOWN = 500
LATEST_SHOWN = 10


# Exempt only until the size guard stands: the inner view is protected before it does anything else.
@csrf_exempt
@role_required(Role.TECHNICIAN)
def upload(request: HttpRequest) -> HttpResponse:
    guard = SizeGuard(settings.LAB_FILE_MAX_BYTES)
    if request.method == "POST":
        request.upload_handlers = [guard, *request.upload_handlers]
    return _guarded(request, guard)


@csrf_protect
def _guarded(request: HttpRequest, guard: SizeGuard) -> HttpResponse:
    now = timezone.now()
    if request.method != "POST":
        return _page(request, UploadForm())
    if "pending" in request.POST:
        return _import(request, now)
    form = UploadForm(request.POST, request.FILES)
    if guard.tripped:
        most = settings.LAB_FILE_MAX_BYTES / 1024**2
        form.errors.pop("file", None)
        form.add_error("file", f"The file is larger than {most:g} MB. Split it, or check that it is the right one.")
    if not form.is_valid():
        return _page(request, form, status=422)
    return _check(request, form, now)


def _check(request: HttpRequest, form: UploadForm, now: datetime) -> HttpResponse:
    """Judge every row; a file without faults is kept until its bringer says import."""
    chosen, laboratory = form.cleaned_data["file"], form.cleaned_data["laboratory"]
    data = chosen.read()
    check = check_file(data, chosen.name, now, laboratory=laboratory)
    pending = None
    if check.can_go_in:
        pending = keep_for_import(data, check, require(request, Role.TECHNICIAN), now, laboratory)
    if check.problem:
        form.add_error("file", check.problem.sentence)
    return _page(request, form, check=check, pending=pending, status=200 if check.is_good else 422)


def _import(request: HttpRequest, now: datetime) -> HttpResponse:
    """Check the waiting file again, for the record may have changed, and save it whole."""
    person = require(request, Role.TECHNICIAN)
    chosen = ImportForm(request.POST, brought_by=person)
    if not chosen.is_valid():
        messages.error(request, str(chosen.errors["pending"][0]))
        return redirect("upload")
    pending = chosen.cleaned_data["pending"]
    check = check_file(bytes(pending.data), pending.name, now, laboratory=pending.laboratory)
    try:
        intake = commit_file(check, by=person, now=now)
    except IntakeError as error:
        form = UploadForm()
        messages.error(request, error.sentence)
        return _page(request, form, check=check, status=422)
    messages.success(request, _went_in(intake, check.counts[RowState.IN_DOUBT]))
    return redirect(_list_of(intake))


def _went_in(intake: IntakeFile, waiting: int) -> str:
    added = f"{intake.added:,} sample{'' if intake.added == 1 else 's'} added from {intake.name}."
    if not waiting:
        return added
    link = f"{_list_of(intake)}&verdict={Sample.Verdict.IN_DOUBT}"
    said = "waits" if waiting == 1 else "wait"
    told = '{} <a href="{}">{} in doubt</a> {} for an engineer’s word.'
    return format_html(told, added, link, f"{waiting:,}", said)


def _list_of(intake: IntakeFile) -> str:
    return f"{reverse('samples')}?intake={intake.pk}"


def _page(request: HttpRequest, form: UploadForm, status: int = 200, **found: Any) -> HttpResponse:
    check: FileCheck | None = found.get("check")
    context = {
        "form": form,
        "summary": summary(form) if form.is_bound else [],
        "most_mb": settings.LAB_FILE_MAX_BYTES / 1024**2,
        "latest": IntakeFile.objects.select_related("entered_by")[:LATEST_SHOWN],
        "shown": _shown(check) if check else [],
        "in_doubt": check.counts[RowState.IN_DOUBT] if check else 0,
        "known": check.counts[RowState.ON_RECORD] if check else 0,
        **found,
    }
    return render(request, "samples/upload.html", context, status=status)


def _shown(check: FileCheck) -> list[RowVerdict]:
    """Wrong rows first, then those in doubt; of a long file only the first five hundred."""
    order = [RowState.WRONG, RowState.IN_DOUBT, RowState.ADDS, RowState.ON_RECORD]
    return sorted(check.rows, key=lambda row: (order.index(row.state), row.line))[:MOST_SHOWN]
