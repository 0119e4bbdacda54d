"""What stands at the top of every page."""

from typing import Any

from django.db.models import Count, Q
from django.http import HttpRequest
from django.urls import reverse

from alerts.models import Alert
from fleet.models import Role, Site

OPEN = Q(areas__reservoirs__alerts__state=Alert.State.OPEN)
PAGES = [
    ("board", "Board", ("board", "reservoir")),
    ("log", "Log a result", ("log",)),
    ("samples", "Samples", ("samples", "sample", "upload")),
    ("alerts", "Alerts", ("alerts", "alert", "rules", "deliveries")),
    ("register", "Register", ("register",)),
]


def navigation(request: HttpRequest) -> dict[str, Any]:
    """The pages, which one is open, how many alerts are open, and whether the data is made up."""
    if not getattr(request, "user", None) or not request.user.is_authenticated:
        return {"made_up": Site.objects.filter(is_demo=True).exists()}
    sites = list(Site.objects.annotate(open_alerts=Count("areas__reservoirs__alerts", filter=OPEN)))
    name = request.resolver_match.url_name if request.resolver_match else None
    nav = [
        {
            "url": reverse(target),
            "label": label,
            "count": sum(site.open_alerts for site in sites) if target == "alerts" else 0,
            "current": bool(name) and (name in names or any(str(name).startswith(f"{stem}-") for stem in names)),
        }
        for target, label, names in PAGES
    ]
    return {
        "nav": nav,
        "user_may_log": request.user.may_act_as(Role.TECHNICIAN),
        "user_may_judge": request.user.may_act_as(Role.ENGINEER),
        "site_name": sites[0].name if len(sites) == 1 else "",
        "made_up": any(site.is_demo for site in sites),
    }
