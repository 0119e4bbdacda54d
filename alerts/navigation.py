"""What stands at the top of every page."""

from typing import Any

from django.db.models import Count, OuterRef, QuerySet, Subquery
from django.db.models.functions import Coalesce
from django.http import HttpRequest
from django.urls import reverse

from alerts.models import Alert
from fleet.models import Role, Site
from samples.models import Sample

PAGES = [
    ("board", "Board", ("board", "reservoir")),
    ("log", "Log a result", ("log",)),
    ("samples", "Samples", ("samples", "sample", "upload")),
    ("alerts", "Alerts", ("alerts", "alert", "rules", "deliveries")),
    ("register", "Register", ("register",)),
]
# Which pages carry a number, and of what.
COUNTED = {"alerts": ("open_alerts", "open"), "samples": ("in_doubt", "in doubt")}


def _counted(rows: QuerySet[Any]) -> Coalesce:
    """How many of these rows belong to the site at hand, as part of the same question."""
    of_site = rows.filter(reservoir__area__site=OuterRef("pk")).order_by().values("reservoir__area__site")
    return Coalesce(Subquery(of_site.annotate(n=Count("pk")).values("n")), 0)


def navigation(request: HttpRequest) -> dict[str, Any]:
    """The pages, which one is open, how many alerts are open, and whether the data is made up."""
    if not getattr(request, "user", None) or not request.user.is_authenticated:
        return {"made_up": Site.objects.filter(is_demo=True).exists()}
    sites = list(
        Site.objects.annotate(open_alerts=_counted(Alert.objects.open()), in_doubt=_counted(Sample.objects.in_doubt()))
    )
    counts = {target: sum(getattr(site, column) for site in sites) for target, (column, _) in COUNTED.items()}
    name = request.resolver_match.url_name if request.resolver_match else None
    may_log = request.user.may_act_as(Role.TECHNICIAN)
    nav = [
        {
            "url": reverse(target),
            "label": label,
            "count": counts.get(target, 0),
            "of_what": COUNTED[target][1] if target in COUNTED else "",
            "current": bool(name) and (name in names or any(str(name).startswith(f"{stem}-") for stem in names)),
        }
        for target, label, names in PAGES
        if target != "log" or may_log
    ]
    return {
        "nav": nav,
        "user_may_log": may_log,
        "user_may_judge": request.user.may_act_as(Role.ENGINEER),
        "site_name": sites[0].name if len(sites) == 1 else "",
        "made_up": any(site.is_demo for site in sites),
    }
