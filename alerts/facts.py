"""From rows to the plain facts that the rules are asked with."""

from collections.abc import Iterable
from datetime import date, datetime, tzinfo

from django.db.models import QuerySet

from alerts.models import Alert, Rule
from alerts.rules import Kind, OpenFacts, OutlookFacts, ReservoirFacts, RuleFacts
from fleet.models import Measurand, Reservoir, Standing
from samples.models import Outlook, Sample
from samples.series import scale_spec
from samples.trends.headroom import headroom
from samples.trends.standing import Line


def rule_facts(rules: Iterable[Rule]) -> list[RuleFacts]:
    return [
        RuleFacts(
            kind=Kind(rule.kind),
            mails=rule.mails,
            least_criticality=rule.least_criticality,
            within_days=rule.within_days,
            least_chance=rule.least_chance,
            grace_days=rule.grace_days,
        )
        for rule in rules
        if rule.enabled
    ]


def reservoir_facts(standing: Standing, as_of: datetime) -> ReservoirFacts:
    """Two questions to the database: the outlooks, and the bottle that was drawn last."""
    reservoir = standing.reservoir
    last = newest_sample(reservoir)
    return ReservoirFacts(
        criticality=reservoir.criticality,
        interval_days=reservoir.interval_days,
        zone=reservoir.area.site.zone,
        outlooks=[outlook_facts(row) for row in _speaking(reservoir, as_of)],
        last_sample_id=last.pk if last else None,
        last_drawn_at=last.drawn_at if last else None,
        next_due_at=standing.next_due_at,
    )


def _speaking(reservoir: Reservoir, as_of: datetime) -> QuerySet[Outlook]:
    """The outlooks of the oil in the reservoir: oil that was drained by `as_of` and new oil in its drum say nothing."""
    return (
        Outlook.objects.filter(reservoir=reservoir)
        .exclude(measurand__kind=Measurand.Kind.CODE)
        .exclude(sample__charge__ended_at__lte=as_of)
        .exclude(sample__reason=Sample.Reason.NEW_OIL)
        .select_related("measurand", "sample")
    )


def newest_sample(reservoir: Reservoir) -> Sample | None:
    """The bottle of the reservoir's own oil that was drawn last and is not set aside."""
    drawn = Sample.objects.filter(reservoir=reservoir).exclude(reason=Sample.Reason.NEW_OIL)
    newest: Sample | None = drawn.exclude(verdict=Sample.Verdict.SET_ASIDE).order_by("-drawn_at", "-pk").first()
    return newest


def is_out_of_use(retired_on: date | None, as_of: datetime, zone: tzinfo) -> bool:
    """Whether the day on which something is retired has come, by the clock of its site."""
    return retired_on is not None and retired_on <= as_of.astimezone(zone).date()


def outlook_facts(row: Outlook) -> OutlookFacts:
    measurand, sample = row.measurand, row.sample
    return OutlookFacts(
        key=measurand.key,
        measurand_id=measurand.pk,
        name=measurand.name,
        family=measurand.family,
        word=row.word,
        unit=measurand.unit,
        decimals=measurand.decimals,
        is_count=measurand.kind == Measurand.Kind.COUNT,
        is_percent=measurand.scale == Measurand.Scale.PERCENT and bool(row.baseline),
        sample_id=row.sample_id,
        point_id=sample.point_id if sample else None,
        drawn_at=sample.drawn_at if sample else None,
        charge_id=sample.charge_id if sample else None,
        n=row.n,
        value=row.value,
        low=row.low,
        high=row.high,
        baseline=row.baseline,
        target_low=row.target_low,
        target_high=row.target_high,
        limit_low=row.limit_low,
        limit_high=row.limit_high,
        target_source=row.target_source,
        limit_source=row.limit_source,
        headroom=row.headroom,
        level_headroom=_level_headroom(row),
        runway=row.runway,
        runway_early=row.runway_early,
        runway_median=row.runway_median,
        runway_late=row.runway_late,
        past_since=row.past_since,
        chance=row.chance_before_next,
        next_planned_at=row.next_planned_at,
        refusal_sentence=row.refusal_sentence,
    )


def _level_headroom(row: Outlook) -> float | None:
    """Headroom of the trend's level, where the row has one."""
    if row.level is None:
        return None
    limit = Line(high=row.limit_high, low=row.limit_low)
    return headroom(row.level, limit, scale_spec(row.measurand, row.baseline))


def open_facts(alert: Alert, as_of: datetime, zone: tzinfo) -> OpenFacts:
    sample = alert.sample
    return OpenFacts(
        family=alert.family,
        kind=Kind(alert.kind),
        since=sample.drawn_at if sample else alert.opened_at,
        measurand_key=alert.measurand.key if alert.measurand else "",
        charge_id=alert.charge_id,
        point_id=sample.point_id if sample and not is_out_of_use(sample.point.retired_on, as_of, zone) else None,
        was_better=alert.better_since is not None,
    )
