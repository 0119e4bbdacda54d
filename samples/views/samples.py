"""The list of samples, newest first."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from django.core.paginator import Paginator
from django.http import HttpRequest, HttpResponseBase
from django.shortcuts import render

from fleet.access import role_required
from fleet.addresses import same_list
from fleet.export import csv_response
from fleet.models import Measurand, Role
from samples.forms.samples_list import SamplesFilter
from samples.models import Sample
from samples.sample_codes import code_text

A_PAGE = 100
COLUMNS = ("drawn", "tag", "reservoir", "area", "sample point", "laboratory", "lab number", "label", "ISO 4406")
MORE_COLUMNS = ("verdict", "why", "machine hours", "litres added", "oil temperature, °C", "remark")


@role_required(Role.READER)
def samples(request: HttpRequest) -> HttpResponseBase:
    form = SamplesFilter(request.GET)
    found = form.narrow()
    if request.GET.get("format") == "csv":
        return _csv(found)
    page = Paginator(found.with_names().with_results(), A_PAGE).get_page(request.GET.get("page"))
    context = {
        "form": form,
        "page": page,
        "rows": [(one, code_text(one.current_results)) for one in page],
        "here": same_list(request),
        "waiting": Sample.objects.in_doubt().count(),
        "narrowed": form.is_narrowed,
        "file": form.cleaned_data.get("intake"),
    }
    return render(request, "samples/samples.html", context)


def _csv(found: Any) -> HttpResponseBase:
    """Every sample of the list with its figures in canonical units; a figure known as a range stands as one."""
    measurands = list(Measurand.objects.exclude(kind=Measurand.Kind.CODE))
    headings = [*COLUMNS, *(f"{one.name}, {one.unit}" for one in measurands), *MORE_COLUMNS]
    return csv_response("samples", headings, _csv_rows(found, [one.pk for one in measurands]))


def _csv_rows(found: Any, measurand_ids: list[int]) -> Iterator[list[object]]:
    for one in found.with_names().with_results().iterator(chunk_size=500):
        by_id = {result.measurand_id: result for result in one.current_results}
        drawn = one.drawn_at.astimezone(one.reservoir.area.site.zone)
        names = [one.reservoir.tag, str(one.reservoir), one.reservoir.area.name, one.point.name]
        yield [
            *(drawn, *names, one.laboratory, one.lab_number, one.label_code, code_text(one.current_results)),
            *(_figure(by_id.get(pk)) for pk in measurand_ids),
            *(one.get_verdict_display(), one.verdict_reason, one.machine_hours, one.litres_added),
            *(one.oil_temperature_c, one.remark),
        ]


def _figure(result: Any) -> object:
    if result is None or result.value is not None:
        return None if result is None else result.value
    if result.high is None:
        return f"over {result.low:g}"
    return f"{result.low or 0:g} to {result.high:g}"
