"""One measurand's results in order of drawing: its scale, its stretches, and the stretch that speaks now."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from math import nan
from typing import Any

import numpy as np

from fleet.models import Event, Limit, Measurand, Target
from samples.history import History, Reported
from samples.lines import figure_key
from samples.models import Outlook, Sample
from samples.trends.arrays import DAYS_PER_MONTH
from samples.trends.forecast import HORIZON_MONTHS
from samples.trends.level import LevelParameters, LevelState, run_filter
from samples.trends.outlook import STALE_INTERVALS, Refusal, StretchResults
from samples.trends.scales import Scale, ScaleSpec, figure_to_y, observe
from samples.trends.standing import Line
from samples.trends.starting import StartingValues, starting_values
from samples.trends.stretch import SMALL_SHARE, EventKind, EventMark, Family, Stretch, latest, resets, split

ADDING = {Event.Kind.TOP_UP, Event.Kind.PARTIAL_CHANGE, Event.Kind.OIL_CHANGE}


@dataclass(frozen=True, slots=True)
class Figures:
    """What judges a measurand: the figures of the day its latest sample was drawn, and the limit that holds now.

    Where none was set by that day, the first one since then judges it: a plant that brings in its history has to
    begin somewhere.
    """

    target: Target | None
    limit: Limit | None
    limit_now: Limit | None


def figures_of(history: History, measurand_key: str, drawn_at: datetime, now: datetime) -> Figures:
    key = figure_key(measurand_key)
    limit_now = history.limit_at(key, now)
    return Figures(
        target=history.target_at(key, drawn_at) or history.target_at(key, now),
        limit=history.limit_at(key, drawn_at) or limit_now,
        limit_now=limit_now,
    )


def scale_spec(measurand: Measurand, baseline: float | None) -> ScaleSpec:
    """The measurand's scale; one that is a change from the new oil stays as it is where the new oil is not known."""
    scale = Scale(measurand.scale)
    if scale is Scale.PERCENT and not baseline:
        return ScaleSpec(Scale.LINEAR)
    return ScaleSpec(scale, 2.0 * measurand.scale_offset or 1.0, baseline)


def scale_at(history: History, measurand: Measurand, moment: datetime) -> ScaleSpec:
    """The scale with the baseline of the oil that was in the reservoir at that moment."""
    charge = history.charge_at(moment)
    return scale_spec(measurand, charge.fluid.baseline(measurand.key) if charge else None)


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
    days = [day_of(r.drawn_at) for r in series]
    return split(days, keys, event_marks(history), Family(family), history.reservoir.volume_l)


def series_key(reported: Reported) -> tuple[int, int | None, int | None, str, str]:
    """What two results must share to share a trend: point, charge, laboratory, method and size scale."""
    sample, result = reported.sample, reported.result
    return sample.point_id, sample.charge_id, sample.laboratory_id, result.method, result.size_scale


def current_stretch(
    history: History, series: Sequence[Reported], stretches: Sequence[Stretch], now: datetime
) -> list[Reported]:
    """The stretch that speaks now, oldest first; nothing where the oil was changed since its last sample.

    While the planned sample point is sampled in time it speaks alone: a clean bottle from behind the filter is no news
    about the reservoir. Otherwise the latest stretch does.
    """
    charge = history.charge_at(now)
    alive = [s for s in stretches if charge is None or _last(series, s).sample.charge_id == charge.pk]
    fresh_for = timedelta(days=STALE_INTERVALS * history.reservoir.interval_days)
    planned = [
        s for s in alive if _last(series, s).sample.point.is_default and now - _last(series, s).drawn_at <= fresh_for
    ]
    newest = latest(planned or alive, [day_of(r.drawn_at) for r in series])
    return [series[position] for position in newest.positions] if newest else []


def _last(series: Sequence[Reported], stretch: Stretch) -> Reported:
    return series[int(stretch.positions[-1])]


def refusal_after(history: History, measurand: Measurand, last: Reported, now: datetime) -> Refusal | None:
    """Why a stretch that ended with `last` makes no forecast now: a doubtful sample since, or an event that resets."""
    for sample in history.samples:
        waits = sample.verdict == Sample.Verdict.IN_DOUBT and sample.point_id == last.sample.point_id
        if waits and sample.drawn_at > last.drawn_at and _measures(sample, measurand):
            return Refusal.IN_DOUBT
    since, until, family = day_of(last.drawn_at), day_of(now), Family(measurand.family)
    volume = history.reservoir.volume_l
    marks = [mark for mark in event_marks(history) if since < mark.at <= until]
    return Refusal.RESTARTED if any(resets(m.kind, family, m.litres, volume) for m in marks) else None


def _measures(sample: Sample, measurand: Measurand) -> bool:
    return any(result.measurand_id == measurand.pk for result in sample.current_results)


def event_marks(history: History) -> list[EventMark]:
    """What was done to the oil, at the moment it was finished; and oil that only the bottle's label tells of."""
    logged = [
        EventMark(day_of(event.ended_at or event.at), EventKind(event.kind), event.litres) for event in history.events
    ]
    return logged + _unlogged_top_ups(history)


def _unlogged_top_ups(history: History) -> list[EventMark]:
    """Litres noted with a bottle beyond those of the events since the bottle before, as a top-up just before it."""
    marks, before = [], None
    least = SMALL_SHARE * history.reservoir.volume_l
    for sample in history.samples:
        if (sample.litres_added or 0.0) < least:
            before = sample.drawn_at
            continue
        between = [e for e in history.events if e.kind in ADDING and _between(before, e.at, sample.drawn_at)]
        litres = (sample.litres_added or 0.0) - sum(event.litres or 0.0 for event in between)
        if litres >= least:
            marks.append(EventMark(day_of(sample.drawn_at), EventKind.TOP_UP, litres))
        before = sample.drawn_at
    return marks


def _between(before: datetime | None, at: datetime, until: datetime) -> bool:
    return (before is None or at > before) and at <= until


def stretch_results(current: Sequence[Reported]) -> StretchResults:
    """Results as the trend code takes them."""

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


def filter_together(many: Sequence[tuple[Sequence[Reported], ScaleSpec]], parameters: LevelParameters) -> LevelState:
    """The trend filter over many series at once, with one array entry of parameters each."""
    shape = (len(many), max(len(series) for series, _ in many))
    days, y, extra = np.full(shape, np.nan), np.full(shape, np.nan), np.zeros(shape)
    for row, (series, spec) in enumerate(many):
        given = stretch_results(series)
        observed = observe(given.values, given.lows, given.highs, given.qualifiers, spec)
        upto = len(series)
        days[row, :upto], y[row, :upto], extra[row, :upto] = given.days, observed.y, observed.extra_variance
    return run_filter(days / DAYS_PER_MONTH, y, parameters, None, extra).state


def state_of(outlook: Outlook) -> LevelState:
    """The filter's state as it was kept, at its own moment nought."""
    kept = (outlook.level, outlook.drift, outlook.p_level, outlook.p_cross, outlook.p_drift, 0.0)
    a, b, p11, p12, p22, at = (np.array([part], dtype=np.float64) for part in kept)
    return LevelState(a, b, p11, p12, p22, at, np.array([outlook.n], dtype=np.int64))


def slope_reaches(outlook: Outlook, now: datetime) -> datetime | None:
    """When the level would meet the limit if it went on along its Theil–Sen slope; None where it leads elsewhere."""
    limit = outlook.limit_high
    if limit is None or outlook.level is None or outlook.sample is None or not outlook.slope or outlook.slope <= 0:
        return None
    spec = scale_spec(outlook.measurand, outlook.baseline)
    months = (figure_to_y(limit, spec) - outlook.level) / outlook.slope
    if not 0.0 < months <= HORIZON_MONTHS:
        return None
    return max(outlook.sample.drawn_at + timedelta(days=months * DAYS_PER_MONTH), now)


def day_of(moment: datetime) -> float:
    """Days since 1970 in UTC, the trend code's clock."""
    return moment.timestamp() / 86400.0


def moment_of(day: float | None) -> datetime | None:
    return None if day is None else datetime.fromtimestamp(0, UTC) + timedelta(days=day)
