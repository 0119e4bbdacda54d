"""From a reservoir's history to its Outlook rows and its Standing row: one reservoir, one transaction, always whole."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any

from django.db import transaction

from fleet.models import Measurand, Reservoir, RunwayState, Standing, StandingWord
from samples.history import History, Reported, read_history
from samples.lines import UNSET, line_of
from samples.models import Outlook, Sample
from samples.series import (
    Figures,
    current_stretch,
    day_of,
    figures_of,
    moment_of,
    parameters_for,
    refusal_after,
    scale_at,
    stretch_results,
    stretches_of,
)
from samples.standings import standing_facts
from samples.trends.outlook import OutlookNumbers, OutlookQuestion, build
from samples.trends.scales import ScaleSpec

WORDS = {
    "past_limit": StandingWord.PAST_LIMIT,
    "over_target": StandingWord.OVER_TARGET,
    "cannot_tell": StandingWord.CANNOT_TELL,
    "within": StandingWord.WITHIN_TARGET,
    "no_current_sample": StandingWord.NO_CURRENT_SAMPLE,
}
RUNWAYS = {
    "forecast": RunwayState.DATED,
    "beyond_horizon": RunwayState.BEYOND,
    "past": RunwayState.PAST,
    "cannot_say": RunwayState.CANNOT_SAY,
}
KEPT_FIELDS = [
    field.name for field in Outlook._meta.concrete_fields if field.name not in {"id", "reservoir", "measurand"}
]
# A sweep takes what a lost message left behind, and not what is only waiting its turn.
SWEEP_AFTER = timedelta(seconds=10)
A_SWEEP = 200


@dataclass(frozen=True)
class Computed:
    """One measurand's outlook with the series it came from."""

    measurand: Measurand
    spec: ScaleSpec
    series: list[Reported]
    current: list[Reported]
    figures: Figures
    numbers: OutlookNumbers
    row: Outlook


def refresh_outlook(reservoir_id: int, now: datetime) -> None:
    """Recompute everything that is said about one reservoir from what is on record. Safe to repeat and to race."""
    Standing.objects.get_or_create(reservoir_id=reservoir_id)
    with transaction.atomic():
        _refresh(Standing.objects.select_for_update(of=("self",)).get(reservoir_id=reservoir_id), now)


def refresh_wanted(reservoir_id: int, now: datetime) -> bool:
    """As `refresh_outlook`, unless somebody else has done it since it was asked for; says whether it was done."""
    with transaction.atomic():
        standing = Standing.objects.select_for_update(of=("self",)).wanted().filter(reservoir_id=reservoir_id).first()
        if standing is None:
            return False
        _refresh(standing, now)
        return True


def refresh_many(reservoir_ids: Sequence[int], now: datetime) -> int:
    """Several reservoirs, each in a transaction of its own; says how many needed it."""
    return sum(refresh_wanted(reservoir_id, now) for reservoir_id in reservoir_ids)


def want_all(now: datetime) -> list[int]:
    """Every active reservoir wants a refresh: runway shrinks and samples grow old without new ones. Says which."""
    ids = list(Reservoir.objects.active().order_by("pk").values_list("pk", flat=True))
    Standing.objects.bulk_create([Standing(reservoir_id=pk) for pk in ids], ignore_conflicts=True)
    Standing.objects.filter(pk__in=ids).update(wanted_at=now)
    return ids


def left_behind(now: datetime) -> list[int]:
    """The reservoirs that have waited longest for a refresh, as many as one sweep takes."""
    waiting = Standing.objects.wanted().filter(wanted_at__lte=now - SWEEP_AFTER).order_by("wanted_at")
    return list(waiting.values_list("reservoir_id", flat=True)[:A_SWEEP])


def _refresh(standing: Standing, now: datetime) -> None:
    reservoir = Reservoir.objects.with_place().get(pk=standing.reservoir_id)
    history = read_history(reservoir)
    _repoint_charges(history)
    computed = compute(history, now)
    _write_outlooks(reservoir, [one.row for one in computed])
    facts = standing_facts(history, computed, now)
    facts |= {"wanted_at": None, "computed_at": now, "revision": standing.revision + 1}
    for name, value in facts.items():
        setattr(standing, name, value)
    standing.save(update_fields=list(facts))


def _repoint_charges(history: History) -> None:
    """An oil change that is logged late, moved or taken back changes which filling earlier bottles came from."""
    moved = []
    for sample in history.samples:
        charge = history.charge_at(sample.drawn_at)
        if sample.charge_id != (charge.pk if charge else None):
            sample.charge = charge
            moved.append(sample)
    Sample.objects.bulk_update(moved, ["charge"])


def compute(history: History, now: datetime) -> list[Computed]:
    """The outlook of every measurand that was ever reported for this reservoir, in the catalogue's order."""
    return [_compute_one(history, measurand, now) for measurand in history.measurands]


def _write_outlooks(reservoir: Reservoir, rows: Sequence[Outlook]) -> None:
    Outlook.objects.filter(reservoir=reservoir).exclude(measurand__in=[row.measurand_id for row in rows]).delete()
    Outlook.objects.bulk_create(
        rows, update_conflicts=True, unique_fields=["reservoir", "measurand"], update_fields=KEPT_FIELDS
    )


def _compute_one(history: History, measurand: Measurand, now: datetime) -> Computed:
    series = history.reported(measurand.key)
    current = current_stretch(history, series, stretches_of(history, series, measurand.family), now)
    judged_at = current[-1].drawn_at if current else now
    spec = scale_at(history, measurand, judged_at)
    figures = figures_of(history, measurand.key, judged_at, now)
    question = _question(history, measurand, spec, figures, current, now=now)
    numbers = build(stretch_results(current), question)
    row = Outlook(
        reservoir=history.reservoir,
        measurand=measurand,
        baseline=spec.baseline,
        computed_at=now,
        **_latest_facts(current),
        **_figure_facts(question, figures),
        **_level_facts(numbers),
        **_runway_facts(numbers),
    )
    if series and not current:
        row.refusal_sentence = _drained(history, now)
    return Computed(measurand, spec, series, current, figures, numbers, row)


def _question(
    history: History,
    measurand: Measurand,
    spec: ScaleSpec,
    figures: Figures,
    current: Sequence[Reported],
    *,
    now: datetime,
) -> OutlookQuestion:
    target, limit, ahead = (
        line_of(figure, measurand.key, spec) for figure in (figures.target, figures.limit, figures.limit_now)
    )
    used = parameters_for(measurand, spec, limit)
    return OutlookQuestion(
        spec=spec,
        target=target,
        limit=limit,
        ahead=ahead if ahead is not UNSET else None,
        as_of_day=day_of(now),
        parameters=used.parameters,
        parameters_name=used.name,
        interval_days=float(history.reservoir.interval_days),
        refuse=refusal_after(history, measurand, current[-1], now) if current else None,
    )


def _drained(history: History, now: datetime) -> str:
    charge = history.charge_at(now)
    day = "" if charge is None else f" on {charge.started_at.astimezone(history.reservoir.area.site.zone):%-d %b %Y}"
    return f"The oil was changed{day} and has not been sampled since."


def _latest_facts(current: Sequence[Reported]) -> dict[str, Any]:
    if not current:
        return {}
    sample, result = current[-1].sample, current[-1].result
    return {
        "point_id": sample.point_id,
        "sample": sample,
        "stretch_from": current[0].drawn_at,
        "value": result.value,
        "low": result.low,
        "high": result.high,
    }


def _figure_facts(question: OutlookQuestion, figures: Figures) -> dict[str, Any]:
    return {
        "target_low": question.target.low,
        "target_high": question.target.high,
        "limit_low": question.limit.low,
        "limit_high": question.limit.high,
        "target_source": figures.target.source if figures.target else "",
        "limit_source": figures.limit.source if figures.limit else "",
    }


def _level_facts(numbers: OutlookNumbers) -> dict[str, Any]:
    slope, test, band = numbers.trend.slope, numbers.trend.test, numbers.band_headroom
    return {
        "word": WORDS[numbers.standing],
        "n": numbers.n,
        "headroom": numbers.headroom,
        "value_at": _negated(numbers.headroom),
        "target_at": _negated(numbers.target_mark),
        "band_low_at": _negated(band[1]) if band else None,
        "band_high_at": _negated(band[0]) if band else None,
        "level": numbers.level,
        "drift": numbers.drift,
        "p_level": numbers.p11,
        "p_cross": numbers.p12,
        "p_drift": numbers.p22,
        "bounded": numbers.bounded,
        "slope": slope.slope if slope else None,
        "slope_low": slope.low if slope else None,
        "slope_high": slope.high if slope else None,
        "trend": str(numbers.trend.verdict)[:16],
        "trend_p": test.p if test else None,
        "doubling_months": numbers.doubling_months,
        "fit": numbers.parameters_name,
    }


def _runway_facts(numbers: OutlookNumbers) -> dict[str, Any]:
    return {
        "runway": RUNWAYS[numbers.runway_state],
        "runway_early": moment_of(numbers.early_day),
        "runway_median": moment_of(numbers.median_day),
        "runway_late": moment_of(numbers.late_day),
        "past_since": moment_of(numbers.since_day),
        "chance_before_next": numbers.chance,
        "next_planned_at": moment_of(numbers.chance_day),
        "refusal": str(numbers.refusal or ""),
        "refusal_sentence": numbers.refusal_text,
    }


def _negated(figure: float | None) -> float | None:
    return None if figure is None else -figure
