"""The rules that a site begins with; every one can be changed on the rules page."""

from typing import Any, Final

from alerts.models import Rule
from fleet.models import Site

FORECAST_DAYS: Final = 30
FORECAST_CHANCE: Final = 0.2

STARTING_RULES: Final[dict[str, dict[str, Any]]] = {
    Rule.Kind.PAST_LIMIT: {"mails": True},
    Rule.Kind.FORECAST: {"mails": True, "within_days": FORECAST_DAYS, "least_chance": FORECAST_CHANCE},
    Rule.Kind.OVER_TARGET: {"mails": False},
    Rule.Kind.OVERDUE: {"mails": False},
}


def ensure_rules(site: Site) -> list[Rule]:
    """The site's rules, in order of kind. Kinds it does not have yet get their starting values; nothing is overwritten.

    The register knows nothing of alerts, so a new site gets its rules when it is first evaluated or its rules are
    first looked at. To silence a kind, switch its rule off: a deleted rule would come back.
    """
    rules = {rule.kind: rule for rule in Rule.objects.filter(site=site)}
    missing = [kind for kind in STARTING_RULES if kind not in rules]
    if missing:
        Rule.objects.bulk_create(
            [Rule(site=site, kind=kind, **STARTING_RULES[kind]) for kind in missing], ignore_conflicts=True
        )
        rules = {rule.kind: rule for rule in Rule.objects.filter(site=site)}
    return [rules[kind] for kind in STARTING_RULES]
