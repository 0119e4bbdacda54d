"""From a reservoir's history and outlooks to the plans of its charts and the tables of the same numbers."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import datetime, time, timedelta
from functools import partial
from typing import Any, Literal

import numpy as np

from fleet.models import Limit, Measurand, RunwayState, Target
from fleet.wording import number_text
from samples.coding.iso4406 import code_scale
from samples.figures import ChartPlan, Dot, FanArea, Line, Mark, Step, figure
from samples.history import History, Reported
from samples.lines import code_number, figure_key, line_of
from samples.models import Outlook
from samples.series import parameters_for, scale_at, scale_spec, state_of, stretches_of
from samples.trends import standing
from samples.trends.arrays import DAYS_PER_MONTH
from samples.trends.forecast import fan
from samples.trends.scales import Scale, ScaleSpec, from_scale, tidy
from samples.trends.stretch import EventKind, Family, resets

COUNT_STYLES = {
    "p4": ("within", "circle"),
    "p6": ("over", "diamond"),
    "p14": ("third", "square"),
    "p5m": ("over", "diamond"),
    "p15m": ("third", "square"),
}
FAN_MONTHS = 9.0
Which = Literal["target", "limit"]
WHICH: tuple[Which, Which] = ("target", "limit")
PLAIN_COLOUR = "within"


@dataclass(frozen=True, slots=True)
class Chart:
    """A figure with its id on the page, its title and a sentence that says how to read it."""

    key: str
    title: str
    note: str
    figure: dict[str, Any]


def cleanliness_chart(history: History, outlooks: dict[str, Outlook], now: datetime) -> Chart | None:
    """All counts on the code scale, where each step is a doubling; None where nothing was counted."""
    counted = [measurand for measurand in history.measurands if measurand.key in COUNT_STYLES]
    lines = [_count_line(history, measurand, outlooks.get(measurand.key), now) for measurand in counted]
    if not lines:
        return None
    plan = ChartPlan("ISO 4406 code number", lines, _local(history, now), _marks(history, Family.DIRT), tick_step=1)
    note = "Dotted: target. Solid: limit. Shaded: 80 % forecast range. A break in the line: the trend restarts."
    return Chart("cleanliness", "Cleanliness on the ISO 4406 code scale (each step is a doubling)", note, figure(plan))


def other_charts(history: History, outlooks: dict[str, Outlook], now: datetime) -> list[Chart]:
    """One small chart for each measurand that is not a count, those with a limit first."""
    measurands = [m for m in history.measurands if m.kind == Measurand.Kind.QUANTITY]
    judged = sorted(measurands, key=lambda m: not _has_limit(outlooks.get(m.key)))
    return [_quantity_chart(history, m, outlooks.get(m.key), now) for m in judged]


def _has_limit(outlook: Outlook | None) -> bool:
    return outlook is not None and (outlook.limit_high is not None or outlook.limit_low is not None)


def _count_line(history: History, measurand: Measurand, outlook: Outlook | None, now: datetime) -> Line:
    key, spec = measurand.key, scale_spec(measurand, None)
    colour, symbol = COUNT_STYLES[key]
    targets, limits = (_steps(history, which, key, now, lambda found, _: code_number(found, key)) for which in WHICH)
    stretches = _stretched(history, measurand, lambda reported: _count_dot(history, reported))
    ahead = _fan(history, outlook, spec, now, on_y=True)
    return Line(measurand.symbol, colour, stretches, targets, limits, ahead, symbol)


def _count_dot(history: History, reported: Reported) -> Dot:
    """On the code scale; a code alone is drawn as the bar it is."""
    result, at = reported.result, _local(history, reported.drawn_at)
    doubtful = reported.sample.verdict != "accepted"
    if result.value is not None:
        return Dot(at, code_scale(result.value), f"{number_text(result.value)} per mL", in_doubt=doubtful)
    high = None if result.high is None else float(round(code_scale(result.high)))
    low = None if result.low is None else float(round(code_scale(result.low)))
    middle = (high - 0.5) if high is not None else (low or 0.0)
    return Dot(at, middle, f"code {result.reported_text}", middle - 0.5 if high else low, high, doubtful)


def _quantity_chart(history: History, measurand: Measurand, outlook: Outlook | None, now: datetime) -> Chart:
    targets, limits = (_value_steps(history, which, measurand, now) for which in WHICH)
    spec = scale_spec(measurand, outlook.baseline if outlook else None)
    line = Line(
        measurand.symbol,
        PLAIN_COLOUR,
        _stretched(history, measurand, lambda reported: _value_dot(history, reported)),
        targets,
        limits,
        _fan(history, outlook, spec, now, on_y=False),
    )
    plan = ChartPlan(measurand.unit, [line], _local(history, now), _marks(history, Family(measurand.family)))
    return Chart(measurand.key, f"{measurand.name}, {measurand.unit}", "", figure(plan))


def _value_dot(history: History, reported: Reported) -> Dot:
    result = reported.result
    doubtful = reported.sample.verdict != "accepted"
    at = _local(history, reported.drawn_at)
    text = f"{result.reported_text} {result.reported_unit}".strip()
    if result.value is not None:
        return Dot(at, result.value, text, in_doubt=doubtful)
    bound = result.high if result.high is not None else result.low
    return Dot(at, bound or 0.0, text, result.low, result.high, doubtful)


def _stretched(history: History, measurand: Measurand, dot: Callable[[Reported], Dot]) -> list[list[Dot]]:
    """The accepted samples cut into stretches, then each doubtful one by itself."""
    accepted = history.reported(measurand.key)
    stretches = stretches_of(history, accepted, measurand.family)
    shown = [[dot(accepted[position]) for position in stretch.positions] for stretch in stretches]
    doubtful = [r for r in history.reported(measurand.key, accepted_only=False) if r.sample.verdict != "accepted"]
    return shown + [[dot(reported)] for reported in doubtful]


def _marks(history: History, family: Family) -> list[Mark]:
    volume = history.reservoir.volume_l
    return [
        Mark(
            _local(history, event.at),
            event.get_kind_display(),
            resets(EventKind(event.kind), family, event.litres, volume),
        )
        for event in history.events
    ]


def _value_steps(history: History, which: Which, measurand: Measurand, now: datetime) -> list[Step]:
    """Both sides of a figure in the measurand's own unit, with the new-oil baseline of the oil of its time."""
    return [
        step
        for side in ("high", "low")
        for step in _steps(history, which, measurand.key, now, partial(_in_unit, history, measurand, side))
    ]


def _in_unit(history: History, measurand: Measurand, side: str, found: Target | Limit, at: datetime) -> float | None:
    spec = scale_at(history, measurand, at)
    value: float | None = getattr(line_of(found, measurand.key, spec), side)
    if value is None or spec.scale is not Scale.PERCENT:
        return value
    return tidy(float(from_scale(value, spec)))


ValueOf = Callable[[Target | Limit, datetime], float | None]


def _steps(history: History, which: Which, key: str, now: datetime, value_of: ValueOf) -> list[Step]:
    """How a figure stood through the time of the chart: from each dated row to the next of the same measurand."""
    start = history.samples[0].drawn_at if history.samples else now
    end = now + timedelta(days=FAN_MONTHS * DAYS_PER_MONTH)
    wanted = figure_key(key)
    figures: Sequence[Target | Limit] = history.targets if which == "target" else history.limits
    look = history.target_at if which == "target" else history.limit_at
    turns = [_day_start(history, found) for found in figures if found.measurand.key == wanted]
    moments = sorted({start, *turns, *(charge.started_at for charge in history.charges)})
    moments = [moment for moment in moments if start <= moment < end]
    steps = []
    for moment, following in zip(moments, [*moments[1:], end], strict=True):
        found = look(wanted, moment)
        value = None if found is None else value_of(found, moment)
        if value is not None:
            steps.append(Step(_local(history, moment), _local(history, following), float(value)))
    return steps


def _day_start(history: History, found: Target | Limit) -> datetime:
    return datetime.combine(found.valid_from, time.min, tzinfo=history.reservoir.area.site.zone)


def _fan(history: History, outlook: Outlook | None, spec: ScaleSpec, now: datetime, *, on_y: bool) -> FanArea | None:
    """The forecast from the latest sample on, from the state kept in the outlook; None where it is refused."""
    if outlook is None or outlook.sample is None or outlook.level is None or not _has_forecast(outlook):
        return None
    state = state_of(outlook)
    limit = standing.Line(high=outlook.limit_high, low=outlook.limit_low)
    parameters = parameters_for(outlook.measurand, spec, limit).parameters
    start = outlook.sample.drawn_at
    ahead = (now - start).total_seconds() / 86400 / DAYS_PER_MONTH
    drawn = fan(state, parameters, horizon_months=ahead + FAN_MONTHS)
    at = [_local(history, start + timedelta(days=float(months) * DAYS_PER_MONTH)) for months in drawn.months]
    rows = (row if on_y else from_scale(row, spec) for row in (drawn.median, drawn.low, drawn.high))
    return FanArea(at, *(np.round(row, 4).tolist() for row in rows))


def _has_forecast(outlook: Outlook) -> bool:
    """Not where it was refused, and not past the limit: that gets a date since when."""
    return outlook.refusal in {"", "no_limit"} and outlook.runway != RunwayState.PAST


def _local(history: History, moment: datetime) -> datetime:
    return moment.astimezone(history.reservoir.area.site.zone)
