"""From a reservoir's history to its Outlook rows and its Standing row: one reservoir, one transaction, always whole."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from math import nan
from typing import Any

import numpy as np
from django.db import transaction

from fleet.models import Measurand, Reservoir, RunwayState, Standing, StandingWord
from fleet.refresh import want_refresh
from samples.history import History, Reported, read_history
from samples.lines import figure_key, line_of
from samples.models import Outlook, Sample
from samples.standings import standing_facts
from samples.trends.arrays import DAYS_PER_MONTH
from samples.trends.level import LevelParameters, LevelRun, LevelState, run_filter
from samples.trends.outlook import OutlookNumbers, OutlookQuestion, StretchResults, build
from samples.trends.scales import Scale, ScaleSpec, observe
from samples.trends.standing import Line
from samples.trends.starting import StartingValues, starting_values
from samples.trends.stretch import EventKind, EventMark, Family, Stretch, latest, split

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


@dataclass(frozen=True)
class Computed:
    """One measurand's outlook with the series it came from."""

    measurand: Measurand
    spec: ScaleSpec
    series: list[Reported]
    stretches: list[Stretch]
    current: list[Reported]
    numbers: OutlookNumbers
    row: Outlook


@transaction.atomic
def refresh_outlook(reservoir_id: int, now: datetime) -> None:
    """Recompute everything that is said about one reservoir from what is on record. Safe to repeat and to race."""
    Standing.objects.get_or_create(reservoir_id=reservoir_id)
    standing = Standing.objects.select_for_update(of=("self",)).get(reservoir_id=reservoir_id)
    reservoir = Reservoir.objects.with_place().get(pk=reservoir_id)
    history = read_history(reservoir)
    _repoint_charges(history)
    computed = compute(history, now)
    _write_outlooks(reservoir, [one.row for one in computed])
    facts = standing_facts(history, computed, now)
    facts |= {"wanted_at": None, "computed_at": now, "revision": standing.revision + 1}
    for name, value in facts.items():
        setattr(standing, name, value)
    standing.save(update_fields=list(facts))


def want_all(now: datetime) -> None:
    """Every active reservoir: runway shrinks and samples grow old without new ones."""
    want_refresh(Reservoir.objects.active().values_list("pk", flat=True), now)


def wanted_ids() -> list[int]:
    return list(Standing.objects.wanted().values_list("reservoir_id", flat=True))


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


def scale_spec(measurand: Measurand, baseline: float | None) -> ScaleSpec:
    """The measurand's scale; one that is a change from the new oil stays as it is where the new oil is not known."""
    scale = Scale(measurand.scale)
    if scale is Scale.PERCENT and not baseline:
        return ScaleSpec(Scale.LINEAR)
    return ScaleSpec(scale, 2.0 * measurand.scale_offset or 1.0, baseline)


def parameters_for(measurand: Measurand, spec: ScaleSpec, limit: Line) -> StartingValues:
    """The filter's parameters for a measurand; on the plain scale they are stretched to its span, unless it is acid."""
    span = 1.0
    if spec.scale is Scale.LINEAR and measurand.key != "acid_number":
        figure = limit.high if limit.high is not None else limit.low
        span = abs((figure or 0.0) - (spec.baseline or 0.0)) or 1.0
    return starting_values(spec.scale, Family(measurand.family), span)


def stretches_of(history: History, series: Sequence[Reported], family: str) -> list[Stretch]:
    """The series cut where a point, charge, laboratory, method or size scale changes and where an event resets it."""
    keys = [series_key(r) for r in series]
    return split(
        [day_of(r.drawn_at) for r in series], keys, event_marks(history), Family(family), history.reservoir.volume_l
    )


def series_key(reported: Reported) -> tuple[int, int | None, int | None, str, str]:
    """What two results must share to share a trend: point, charge, laboratory, method and size scale."""
    sample, result = reported.sample, reported.result
    return sample.point_id, sample.charge_id, sample.laboratory_id, result.method, result.size_scale


def event_marks(history: History) -> list[EventMark]:
    """What was done to the oil, at the moment it was finished."""
    return [
        EventMark(day_of(event.ended_at or event.at), EventKind(event.kind), event.litres) for event in history.events
    ]


def filter_results(series: Sequence[Reported], spec: ScaleSpec, parameters: LevelParameters) -> LevelRun:
    """The trend filter over results of one stretch."""
    given = _results(series)
    observed = observe(given.values, given.lows, given.highs, given.qualifiers, spec)
    return run_filter(given.days / DAYS_PER_MONTH, observed.y, parameters, None, observed.extra_variance)


def filter_together(many: Sequence[tuple[Sequence[Reported], ScaleSpec]], parameters: LevelParameters) -> LevelState:
    """As `filter_results` for many series at once, with one array entry of parameters each."""
    shape = (len(many), max(len(series) for series, _ in many))
    days, y, extra = np.full(shape, np.nan), np.full(shape, np.nan), np.zeros(shape)
    for row, (series, spec) in enumerate(many):
        given = _results(series)
        observed = observe(given.values, given.lows, given.highs, given.qualifiers, spec)
        upto = len(series)
        days[row, :upto], y[row, :upto], extra[row, :upto] = given.days, observed.y, observed.extra_variance
    return run_filter(days / DAYS_PER_MONTH, y, parameters, None, extra).state


def state_of(outlook: Outlook) -> LevelState:
    """The filter's state as it was kept, at its own moment nought."""
    kept = (outlook.level, outlook.drift, outlook.p_level, outlook.p_cross, outlook.p_drift, 0.0)
    a, b, p11, p12, p22, at = (np.array([part], dtype=np.float64) for part in kept)
    return LevelState(a, b, p11, p12, p22, at, np.array([outlook.n], dtype=np.int64))


def day_of(moment: datetime) -> float:
    """Days since 1970 in UTC, the trend code's clock."""
    return moment.timestamp() / 86400.0


def moment_of(day: float | None) -> datetime | None:
    return None if day is None else datetime.fromtimestamp(0, UTC) + timedelta(days=day)


def _compute_one(history: History, measurand: Measurand, now: datetime) -> Computed:
    series = history.reported(measurand.key)
    stretches = stretches_of(history, series, measurand.family)
    newest = latest(stretches, [day_of(r.drawn_at) for r in series])
    current = [series[position] for position in newest.positions] if newest else []
    charge = history.charge_at(current[-1].drawn_at) if current else history.current_charge
    spec = scale_spec(measurand, charge.fluid.baseline(measurand.key) if charge else None)
    question = _question(history, measurand, spec, current, now)
    numbers = build(_results(current), question)
    row = _row(
        history=history,
        measurand=measurand,
        current=current,
        spec=spec,
        question=question,
        numbers=numbers,
        now=now,
    )
    return Computed(measurand, spec, series, stretches, current, numbers, row)


def _question(
    history: History, measurand: Measurand, spec: ScaleSpec, current: Sequence[Reported], now: datetime
) -> OutlookQuestion:
    judged_at = current[-1].drawn_at if current else now
    key = figure_key(measurand.key)
    limit = line_of(history.limit_at(key, judged_at), measurand.key, spec)
    used = parameters_for(measurand, spec, limit)
    return OutlookQuestion(
        spec=spec,
        target=line_of(history.target_at(key, judged_at), measurand.key, spec),
        limit=limit,
        as_of_day=day_of(now),
        parameters=used.parameters,
        parameters_name=used.name,
        interval_days=float(history.reservoir.interval_days),
    )


def _results(current: Sequence[Reported]) -> StretchResults:
    def column(name: str) -> Any:
        return np.array([nan if getattr(r.result, name) is None else getattr(r.result, name) for r in current], float)

    return StretchResults(
        days=np.array([day_of(r.drawn_at) for r in current], float),
        values=column("value"),
        lows=column("low"),
        highs=column("high"),
        qualifiers=tuple(r.result.qualifier for r in current),
        in_doubt=np.zeros(len(current), dtype=np.bool_),
    )


def _row(
    *,
    history: History,
    measurand: Measurand,
    current: Sequence[Reported],
    spec: ScaleSpec,
    question: OutlookQuestion,
    numbers: OutlookNumbers,
    now: datetime,
) -> Outlook:
    latest_result = current[-1].result if current else None
    return Outlook(
        reservoir=history.reservoir,
        measurand=measurand,
        point_id=current[-1].sample.point_id if current else None,
        sample=current[-1].sample if current else None,
        word=WORDS[numbers.standing],
        n=numbers.n,
        stretch_from=current[0].drawn_at if current else None,
        value=latest_result.value if latest_result else None,
        low=latest_result.low if latest_result else None,
        high=latest_result.high if latest_result else None,
        baseline=spec.baseline,
        computed_at=now,
        **_figure_facts(history, measurand, question, current, now),
        **_level_facts(numbers),
        **_runway_facts(numbers),
    )


def _figure_facts(
    history: History, measurand: Measurand, question: OutlookQuestion, current: Sequence[Reported], now: datetime
) -> dict[str, Any]:
    judged_at = current[-1].drawn_at if current else now
    key = figure_key(measurand.key)
    target, limit = history.target_at(key, judged_at), history.limit_at(key, judged_at)
    return {
        "target_low": question.target.low,
        "target_high": question.target.high,
        "limit_low": question.limit.low,
        "limit_high": question.limit.high,
        "target_source": target.source if target else "",
        "limit_source": limit.source if limit else "",
    }


def _level_facts(numbers: OutlookNumbers) -> dict[str, Any]:
    slope, test, band = numbers.trend.slope, numbers.trend.test, numbers.band_headroom
    return {
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
