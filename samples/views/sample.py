"""One sample: what was reported, what it means, what is in doubt, and who said what about it."""

from __future__ import annotations

from typing import Any

from django.contrib import messages
from django.http import HttpRequest, HttpResponse
from django.shortcuts import get_object_or_404, redirect, render
from django.utils import timezone
from django.views.decorators.http import require_POST

from fleet.access import require, role_required
from fleet.forms.base import summary
from fleet.models import Reservoir, Role
from samples.forms.judge import JudgeForm
from samples.history import History, read_history
from samples.judgement import judged_results
from samples.lines import CODE_KEY
from samples.models import Judgement, Result, Sample
from samples.results import EntryError, accept, set_aside
from samples.sample_codes import code_text

SAID = {
    Sample.Verdict.ACCEPTED: "Accepted. Its figures count from now on; the outlook is being worked out anew.",
    Sample.Verdict.SET_ASIDE: "Set aside. Its figures stay on record and are used for nothing.",
}


@role_required(Role.READER)
def sample(request: HttpRequest, pk: int) -> HttpResponse:
    return _page(request, pk, JudgeForm())


@require_POST
@role_required(Role.ENGINEER)
def judge(request: HttpRequest, pk: int) -> HttpResponse:
    """Accept or set aside."""
    found = get_object_or_404(Sample, pk=pk)
    form = JudgeForm(request.POST)
    if form.is_valid():
        verdict = Sample.Verdict(form.cleaned_data["verdict"])
        change = accept if verdict == Sample.Verdict.ACCEPTED else set_aside
        try:
            change(found, require(request, Role.ENGINEER), form.cleaned_data["reason"], timezone.now())
        except EntryError as error:
            form.add_error("reason", error.sentence)
        else:
            messages.success(request, SAID[verdict])
            return redirect("sample", pk)
    return _page(request, pk, form, status=422)


def _page(request: HttpRequest, pk: int, form: JudgeForm, status: int = 200) -> HttpResponse:
    people = get_object_or_404(Sample.objects.select_related("entered_by", "verdict_by", "intake"), pk=pk)
    history = read_history(Reservoir.objects.with_place().get(pk=people.reservoir_id))
    found = next(one for one in history.samples if one.pk == pk)
    context = {
        "sample": found,
        "people": people,
        "form": form,
        "summary": summary(form) if form.is_bound else [],
        "reservoir": history.reservoir,
        "zone": history.reservoir.area.site.zone,
        "charge": history.charge_at(found.drawn_at),
        "revisions": _revisions(found),
        "judgements": list(Judgement.objects.filter(sample=found).select_related("by")),
        **_figures(history, found),
    }
    return render(request, "samples/sample.html", context, status=status)


def _figures(history: History, found: Sample) -> dict[str, Any]:
    previous = _previous(history, found)
    return {
        "code": code_text(found.current_results),
        "lines": judged_results(found.current_results, history, found.drawn_at, previous),
        "target": history.target_at(CODE_KEY, found.drawn_at),
        "limit": history.limit_at(CODE_KEY, found.drawn_at),
        "previous": previous,
        "previous_code": code_text(previous.current_results) if previous else "",
    }


def _previous(history: History, found: Sample) -> Sample | None:
    """The last accepted sample of the same point and oil charge before this one."""
    alike = [
        one
        for one in history.accepted
        if one.point_id == found.point_id and one.charge_id == found.charge_id and one.drawn_at < found.drawn_at
    ]
    return alike[-1] if alike else None


def _revisions(found: Sample) -> list[Result]:
    """Every revision of every result, newest first; empty where nothing was ever corrected."""
    everything = Result.objects.filter(sample=found).select_related("measurand", "entered_by")
    rows = list(everything.order_by("measurand__position", "-revision"))
    return rows if any(row.revision > 1 for row in rows) else []
