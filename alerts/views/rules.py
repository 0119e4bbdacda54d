"""The rules of a site: everybody may read what is told, an engineer may change it."""

from django.contrib import messages
from django.db import transaction
from django.http import HttpRequest, HttpResponse
from django.shortcuts import get_object_or_404, redirect, render
from django.urls import reverse
from django.views.decorators.http import require_http_methods

from alerts.defaults import ensure_rules
from alerts.evaluation import judge_site_again
from alerts.forms import RuleForm
from fleet.access import require
from fleet.forms.base import summary
from fleet.models import Role, Site


@require_http_methods(["GET", "POST"])
def rules(request: HttpRequest) -> HttpResponse:
    """One site's rules in one form; `?site=` chooses among several."""
    sites = list(Site.objects.all())
    if not sites:
        return render(request, "alerts/rules.html", {"sites": sites})
    site = get_object_or_404(Site, pk=request.GET["site"]) if request.GET.get("site", "").isdecimal() else sites[0]
    known = ensure_rules(site)
    posted = request.POST if request.method == "POST" else None
    if posted is not None:
        require(request, Role.ENGINEER)
    forms = [RuleForm(posted, instance=rule, prefix=rule.kind) for rule in known]
    if posted is not None and all(form.is_valid() for form in forms):
        _save(forms, site)
        messages.success(request, "Saved. Every reservoir of the site is judged again within a minute.")
        return redirect(f"{reverse('rules')}?site={site.pk}")
    may_edit = request.user.is_authenticated and request.user.may_act_as(Role.ENGINEER)
    faults = [line for form in forms for line in summary(form)]
    context = {"sites": sites, "site": site, "forms": forms, "may_edit": may_edit, "summary": faults}
    return render(request, "alerts/rules.html", context, status=422 if posted is not None else 200)


@transaction.atomic
def _save(forms: list[RuleForm], site: Site) -> None:
    for form in forms:
        form.save()
    judge_site_again(site)
