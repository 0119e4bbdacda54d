"""The register's pages: the overview, and for every noun its list, its page, its form and its removal."""

from datetime import datetime
from typing import Any

from django.contrib import messages
from django.core.paginator import Paginator
from django.db.models import Model, QuerySet
from django.http import HttpRequest, HttpResponse, HttpResponseBase
from django.shortcuts import get_object_or_404, redirect, render
from django.urls import reverse
from django.utils import timezone
from django.utils.http import url_has_allowed_host_and_scheme, urlencode

from fleet.access import require
from fleet.addresses import same_list
from fleet.export import csv_response
from fleet.forms.base import PlantForm, summary
from fleet.forms.register_list import ListFilter
from fleet.models import Person, Reservoir, Role
from fleet.refusals import RefusedError
from fleet.targets import InForce, in_force
from fleet.views.register_empty import lead_out_of_empty_lists
from fleet.views.register_ledger import facts, ledger_of
from fleet.views.register_noun import NOUNS, Noun, Section, listed_nouns

A_PAGE = 100
A_SECTION = 20


def overview(request: HttpRequest) -> HttpResponse:
    person = require(request, Role.READER)
    open_to = [noun for noun in listed_nouns() if person.may_act_as(noun.read)]
    counts = {noun.key: noun.model._default_manager.count() for noun in open_to}
    entries = [(noun, counts[noun.key]) for noun in open_to]
    context = {"entries": entries, "steps": _steps(person, counts) if not counts.get("reservoir") else []}
    return render(request, "fleet/register/overview.html", context)


def _steps(person: Person, counts: dict[str, int]) -> list[dict[str, Any]]:
    """On an empty fleet: what has to stand on record before a reservoir can, in order."""
    return [
        {
            "noun": NOUNS[key],
            "done": counts.get(key, 0) > 0,
            "may": person.may_act_as(NOUNS[key].write),
            "url": f"{NOUNS[key].name}-add",
        }
        for key in ("site", "area", "fluid", "reservoir")
    ]


def listing(request: HttpRequest, noun: Noun) -> HttpResponseBase:
    person = require(request, noun.read)
    form = ListFilter(request.GET, with_area=bool(noun.area), with_class=bool(noun.reservoir_class))
    rows = _sorted(noun, _narrowed(noun, form, request), request.GET.get("sort", ""))
    if request.GET.get("format") == "csv":
        found = ([column.show(row) for column in noun.csv_columns] for row in rows.iterator(chunk_size=1000))
        return csv_response(noun.slug, [column.csv_heading for column in noun.csv_columns], found)
    within = {name: request.GET[name] for name in noun.within if request.GET.get(name)}
    page = Paginator(rows, A_PAGE).get_page(request.GET.get("page"))
    context = {
        "noun": noun,
        "form": form,
        "ledger": ledger_of(noun, page, request.GET.get("sort", ""), same_list(request, sort="")),
        "page": page,
        "here": same_list(request),
        "csv": same_list(request, format="csv"),
        "within": within,
        "add_url": f"{reverse(noun.name + '-add')}?{urlencode(within)}".removesuffix("?"),
        "may_write": person.may_act_as(noun.write),
    }
    return render(request, "fleet/register/list.html", context)


def _narrowed(noun: Noun, form: ListFilter, request: HttpRequest) -> QuerySet[Any]:
    rows = noun.rows()
    if text := form.chosen("q"):
        rows = noun.search(rows, text)
    for name, path in (("area", noun.area), ("kind", noun.reservoir_class)):
        if path and form.chosen(name):
            rows = rows.filter(**{path: form.chosen(name)})
    for name, path in noun.within.items():
        if request.GET.get(name, "").isdigit():
            rows = rows.filter(**{path: int(request.GET[name])})
    return rows


def _sorted(noun: Noun, rows: QuerySet[Any], sort: str) -> QuerySet[Any]:
    known = {column.sort for column in noun.columns if column.sort}
    return rows.order_by(sort, "pk") if sort.removeprefix("-") in known else rows


def detail(request: HttpRequest, noun: Noun, pk: int) -> HttpResponse:
    person = require(request, noun.read)
    row = get_object_or_404(noun.rows(), pk=pk)
    context = {
        "noun": noun,
        "row": row,
        "facts": facts(noun, row),
        "in_force": _held_to(row),
        "sections": [_section(person, part, row) for part in noun.sections],
        "may_write": person.may_act_as(noun.write),
        "may_remove": noun.remove is not None and person.may_act_as(noun.remove_role),
        "edit_url": noun.url_of(row, "-edit"),
        "remove_url": noun.url_of(row, "-remove") if noun.remove is not None else "",
        "back": NOUNS[noun.parent].url_of(getattr(row, noun.parent)) if noun.parent else noun.list_url,
        "back_label": str(getattr(row, noun.parent)) if noun.parent else noun.many,
    }
    return render(request, "fleet/register/detail.html", context)


def _held_to(row: Model) -> list[InForce]:
    if not isinstance(row, Reservoir):
        return []
    now = timezone.now()
    return in_force(row, now.astimezone(row.area.site.zone).date(), now)


def _section(person: Person, part: Section, row: Model) -> dict[str, Any]:
    """The first rows of another noun that belong to this one, with the way to all of them and to one more."""
    noun, within = NOUNS[part.noun], part.within
    found = list(noun.rows().filter(**{noun.within[within]: row.pk})[: A_SECTION + 1])
    query = urlencode({within: row.pk})
    fits_form = within in noun.form.base_fields or within in noun.form.narrowed_by
    return {
        "noun": noun,
        "title": part.title or noun.many,
        "ledger": ledger_of(noun, found[:A_SECTION], without=within),
        "all_url": f"{noun.list_url}?{query}" if len(found) > A_SECTION else "",
        "add": f"?{query}" if fits_form and person.may_act_as(noun.write) else "",
    }


def change(request: HttpRequest, noun: Noun, pk: int | None = None) -> HttpResponse:
    """Add a row or edit one. What does not fit is said at its field, and nothing that was typed is lost."""
    person = require(request, noun.write)
    now = timezone.now()
    row = get_object_or_404(noun.rows(), pk=pk) if pk is not None else None
    given = {name: request.GET[name] for name in noun.within if request.GET.get(name, "").isdigit()}
    form = noun.form(request.POST or None, instance=row, initial=given, now=now)
    if request.method == "POST" and form.is_valid() and (saved := _saved(noun, form, person, now)):
        messages.success(request, f"{noun.one.capitalize()} saved.")
        return redirect(_next(request) or noun.home_of(saved))
    if row is None:
        lead_out_of_empty_lists(form, person, request.get_full_path())
    context = {
        "noun": noun,
        "row": row,
        "form": form,
        "summary": summary(form),
        "back": _next(request) or (noun.url_of(row) if row is not None else noun.list_url),
    }
    return render(request, "fleet/register/form.html", context, status=422 if form.errors else 200)


def _saved(noun: Noun, form: PlantForm, person: Person, now: datetime) -> Model | None:
    try:
        return noun.save(form, person, now)
    except RefusedError as refusal:
        form.say(refusal.sentence, refusal.field, refusal.code)
        return None


def _next(request: HttpRequest) -> str:
    """A page of this site to go back to, when the link that led here named one."""
    asked = request.GET.get("next", "")
    fits = url_has_allowed_host_and_scheme(asked, {request.get_host()}, require_https=request.is_secure())
    return asked if fits else ""


def remove(request: HttpRequest, noun: Noun, pk: int) -> HttpResponse:
    """Ask, then remove; what is still used stays, and the page says by what."""
    require(request, noun.remove_role)
    row = get_object_or_404(noun.rows(), pk=pk)
    home = NOUNS[noun.parent].url_of(getattr(row, noun.parent)) if noun.parent else noun.list_url
    said = ""
    if request.method == "POST" and noun.remove is not None:
        try:
            noun.remove(row, timezone.now())
        except RefusedError as refusal:
            said = refusal.sentence
        else:
            messages.success(request, f"{noun.one.capitalize()} removed.")
            return redirect(home)
    context = {"noun": noun, "row": row, "facts": facts(noun, row), "said": said, "back": noun.url_of(row)}
    return render(request, "fleet/register/remove.html", context, status=409 if said else 200)
