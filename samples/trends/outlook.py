"""The whole outlook of one measurand of one reservoir, put together from its current stretch.

Times are days on any common origin (for instance days since 1970 in UTC); the filter works in months of 30.4375 days.
"""

from dataclasses import dataclass, field, replace
from enum import StrEnum
from math import isnan

from samples.trends.arrays import DAYS_PER_MONTH, BoolArray, FloatArray
from samples.trends.forecast import (
    Runway,
    Side,
    band,
    chance_past,
    forecast_at,
    nearer,
    runway,
)
from samples.trends.headroom import headroom, nearest_side, side_distance, sides, target_mark
from samples.trends.level import LevelParameters, LevelState, advance, run_filter
from samples.trends.scales import Observed, Scale, ScaleSpec, figure_to_y, observe
from samples.trends.slope import Trend, TrendVerdict, doubling_months, trend
from samples.trends.standing import Known, Line, Passed, Standing, known_range, passed, stand, widen

STALE_INTERVALS = 2.0
"""A latest sample older than this many sampling intervals makes no forecast."""


class Refusal(StrEnum):
    """Why no forecast is given."""

    NO_SAMPLE = "no_sample"
    TOO_OLD = "too_old"
    IN_DOUBT = "in_doubt"
    NO_LIMIT = "no_limit"
    UNKNOWN_UNITS = "unknown_units"
    RESTARTED = "restarted"


class RunwayState(StrEnum):
    """What kind of answer the runway is."""

    FORECAST = "forecast"
    BEYOND_HORIZON = "beyond_horizon"
    PAST = "past"
    CANNOT_SAY = "cannot_say"


@dataclass(frozen=True)
class StretchResults:
    """The results of the current stretch in order of drawing; every array of shape (n,), unit of the result.

    `days` when drawn; `values`, or `lows` and `highs` of an interval (low, high], NaN where not known; `qualifiers` '',
    '<', '>' or '≥'; `in_doubt` True for a result that failed a check and was not accepted.
    """

    days: FloatArray
    values: FloatArray
    lows: FloatArray
    highs: FloatArray
    qualifiers: tuple[str, ...]
    in_doubt: BoolArray


@dataclass(frozen=True)
class OutlookQuestion:
    """What is asked about one measurand of one reservoir.

    `as_of_day` is today. `interval_days` is the sampling interval, `next_day` the next planned sample, None where
    none is planned. `noise` (y) widens a value before it is judged against a line. `units_known` False: unit or size
    scale of the results is not known, so nothing is worked out. `parameters_name` says which fit or starting values
    are used. `ahead`: the limit that will hold, where it is not the one the latest sample is judged by. `refuse`: a
    reason for no forecast that lies outside the stretch (a doubtful sample after it, an event since).
    """

    spec: ScaleSpec
    target: Line
    limit: Line
    as_of_day: float
    parameters: LevelParameters
    parameters_name: str
    interval_days: float | None = None
    next_day: float | None = None
    noise: float = 0.0
    units_known: bool = True
    ahead: Line | None = None
    refuse: Refusal | None = None

    @property
    def coming(self) -> Line:
        """The limit that a forecast is held against."""
        return self.ahead if self.ahead is not None and self.ahead.is_set else self.limit


@dataclass(frozen=True)
class OutlookNumbers:
    """Everything shown about one measurand; None where it cannot be said.

    level, drift (a month), p11, p12, p22 and state_day: the filter at the latest sound sample, on the scale y.
    headroom, target_mark, band_headroom: code steps for counts, percent of the span for others, from the limit on
    `side`. band: 80 % range of the next planned sample, y. early/median/late: months from today, with *_day beside
    them; chance: that the next planned sample (chance_day) is past the limit. since_day: first sample of the current
    run past the limit.
    """

    standing: Standing
    runway_state: RunwayState
    parameters_name: str
    n: int = 0
    bounded: bool = False
    latest_day: float | None = None
    latest_y: float | None = None
    level: float | None = None
    drift: float | None = None
    p11: float | None = None
    p12: float | None = None
    p22: float | None = None
    state_day: float | None = None
    side: Side | None = None
    headroom: float | None = None
    target_mark: float | None = None
    trend: Trend = field(default_factory=lambda: Trend(TrendVerdict.TOO_FEW, 0))
    doubling_months: float | None = None
    early: float | None = None
    median: float | None = None
    late: float | None = None
    early_day: float | None = None
    median_day: float | None = None
    late_day: float | None = None
    since_day: float | None = None
    chance: float | None = None
    chance_day: float | None = None
    band: tuple[float, float] | None = None
    band_headroom: tuple[float, float] | None = None
    refusal: Refusal | None = None
    refusal_text: str = ""


def build(results: StretchResults, question: OutlookQuestion) -> OutlookNumbers:
    """The outlook of one measurand from its current stretch.

    Results in doubt make no level and no trend; while the latest result is in doubt no forecast is given, and the
    standing is that of the latest sound one. Raises ValueError where a percent scale has no baseline and
    `units_known` is True.
    """
    refusal = _refusal(results, question)
    sound = _sound(results)
    nothing = _nothing(refusal, results, question)
    if not question.units_known or sound.days.size == 0:
        return nothing
    observed = observe(sound.values, sound.lows, sound.highs, sound.qualifiers, question.spec)
    run = run_filter(sound.days / DAYS_PER_MONTH, observed.y, question.parameters, None, observed.extra_variance)
    facts = _with_latest(_with_level(nothing, run.state, sound, observed), float(observed.y[-1]), sound, question)
    if refusal not in {None, Refusal.NO_LIMIT}:
        return facts
    today = advance(run.state, _months(question.as_of_day - float(sound.days[-1])), question.parameters)
    ahead = _with_next_sample(facts, today, question)
    return ahead if refusal else _with_runway(ahead, today, sound, question)


def is_stale(latest_day: float, question: OutlookQuestion) -> bool:
    """Whether a latest sample drawn then is older than twice its interval; never where no interval is set."""
    interval = question.interval_days
    return interval is not None and question.as_of_day - latest_day > STALE_INTERVALS * interval


def _sound(results: StretchResults) -> StretchResults:
    keep = ~results.in_doubt
    return StretchResults(
        results.days[keep],
        results.values[keep],
        results.lows[keep],
        results.highs[keep],
        tuple(q for q, k in zip(results.qualifiers, keep.tolist(), strict=True) if k),
        results.in_doubt[keep],
    )


def _refusal(results: StretchResults, question: OutlookQuestion) -> Refusal | None:
    if results.days.size == 0:
        return Refusal.NO_SAMPLE
    if not question.units_known:
        return Refusal.UNKNOWN_UNITS
    if bool(results.in_doubt[-1]):
        return Refusal.IN_DOUBT
    if is_stale(float(results.days[-1]), question):
        return Refusal.TOO_OLD
    if question.refuse is not None:
        return question.refuse
    return None if question.coming.is_set else Refusal.NO_LIMIT


def _sentence(refusal: Refusal, results: StretchResults, question: OutlookQuestion) -> str:
    if refusal is Refusal.TOO_OLD:
        age = round(question.as_of_day - float(results.days[-1]))
        return f"The latest sample is {age} days old, more than twice its interval of {question.interval_days:g} days."
    return {
        Refusal.NO_SAMPLE: "There is no sample since the trend last restarted.",
        Refusal.IN_DOUBT: "The latest result is in doubt until someone accepts it or sets it aside.",
        Refusal.NO_LIMIT: "No limit is set.",
        Refusal.RESTARTED: "The trend restarted after the latest sample, and there is none since.",
        Refusal.UNKNOWN_UNITS: "The unit or the size scale of the results is not known.",
    }[refusal]


def _nothing(refusal: Refusal | None, results: StretchResults, question: OutlookQuestion) -> OutlookNumbers:
    current = results.days.size > 0 and not is_stale(float(results.days[-1]), question)
    return OutlookNumbers(
        standing=Standing.CANNOT_TELL if current else Standing.NO_CURRENT_SAMPLE,
        runway_state=RunwayState.CANNOT_SAY,
        parameters_name=question.parameters_name,
        latest_day=float(results.days[-1]) if results.days.size else None,
        refusal=refusal,
        refusal_text=_sentence(refusal, results, question) if refusal else "",
    )


def _with_level(
    numbers: OutlookNumbers, state: LevelState, sound: StretchResults, observed: Observed
) -> OutlookNumbers:
    return replace(
        numbers,
        n=int(sound.days.size),
        bounded=bool(observed.bounded[-1]),
        latest_day=float(sound.days[-1]),
        latest_y=float(observed.y[-1]),
        level=float(state.a[0]),
        drift=float(state.b[0]),
        p11=float(state.p11[0]),
        p12=float(state.p12[0]),
        p22=float(state.p22[0]),
        state_day=float(sound.days[-1]),
        trend=trend(sound.days / DAYS_PER_MONTH, observed.y),
    )


def _with_latest(numbers: OutlookNumbers, y: float, sound: StretchResults, question: OutlookQuestion) -> OutlookNumbers:
    """Standing, headroom and doubling time: what the latest sound value says by itself and with its trend."""
    spec, limit = question.spec, question.limit
    side = nearest_side(y, limit, spec)
    slope = numbers.trend.slope
    stale = is_stale(float(sound.days[-1]), question)
    judged = stand(_known(sound, -1, question), question.target, limit)
    return replace(
        numbers,
        standing=Standing.NO_CURRENT_SAMPLE if stale else judged,
        side=side,
        headroom=headroom(y, limit, spec),
        target_mark=None if side is None else target_mark(question.target, limit, side, spec),
        doubling_months=doubling_months(slope.slope) if slope and spec.scale is Scale.COUNT else None,
    )


def _known(sound: StretchResults, i: int, question: OutlookQuestion) -> Known:
    value, low, high = float(sound.values[i]), float(sound.lows[i]), float(sound.highs[i])
    return widen(known_range(value, low, high, sound.qualifiers[i], question.spec), question.noise, question.spec)


def _with_next_sample(numbers: OutlookNumbers, today: LevelState, question: OutlookQuestion) -> OutlookNumbers:
    day = _next_day(numbers, question)
    if day is None:
        return numbers
    months, limits = _months(day - question.as_of_day), sides(question.coming)
    low, high = (float(edge[0]) for edge in band(forecast_at(today, months, question.parameters, sample=True)))
    chance = sum(
        float(chance_past(today, figure_to_y(figure, question.spec), months, side, question.parameters)[0])
        for side, figure in limits
    )
    return replace(
        numbers,
        chance=min(chance, 1.0) if limits else None,
        chance_day=day,
        band=(low, high),
        band_headroom=_band_headroom((low, high), numbers.side, question),
    )


def _next_day(numbers: OutlookNumbers, question: OutlookQuestion) -> float | None:
    """The next planned sample; where none is planned one interval after the latest; today where that has gone by."""
    day = question.next_day
    if day is None and question.interval_days is not None and numbers.latest_day is not None:
        day = numbers.latest_day + question.interval_days
    return None if day is None else max(day, question.as_of_day)


def _band_headroom(
    edges: tuple[float, float], side: Side | None, question: OutlookQuestion
) -> tuple[float, float] | None:
    figure = question.limit.low if side is Side.LOWER else question.limit.high
    if side is None or figure is None:
        return None
    first, second = (side_distance(y, figure, side, question.spec) for y in edges)
    return min(first, second), max(first, second)


def _with_runway(
    numbers: OutlookNumbers, today: LevelState, sound: StretchResults, question: OutlookQuestion
) -> OutlookNumbers:
    if numbers.standing is Standing.PAST_LIMIT:
        return replace(numbers, runway_state=RunwayState.PAST, since_day=_past_since(sound, question))
    found = _nearest_runway(today, question)
    early, median, late = (_finite(float(end[0])) for end in (found.early, found.median, found.late))
    return replace(
        numbers,
        runway_state=RunwayState.BEYOND_HORIZON if early is None else RunwayState.FORECAST,
        early=early,
        median=median,
        late=late,
        early_day=_day(early, question),
        median_day=_day(median, question),
        late_day=_day(late, question),
    )


def _nearest_runway(today: LevelState, question: OutlookQuestion) -> Runway:
    found = [
        runway(today, figure_to_y(figure, question.spec), side, question.parameters)
        for side, figure in sides(question.coming)
    ]
    return nearer(found[0], found[1])[0] if len(found) == 2 else found[0]


def _past_since(sound: StretchResults, question: OutlookQuestion) -> float:
    """When the first sample of the unbroken run past the limit that ends today was drawn."""
    first = sound.days.size - 1
    while first > 0 and passed(_known(sound, first - 1, question), question.limit) is Passed.YES:
        first -= 1
    return float(sound.days[first])


def _months(days: float) -> float:
    return max(days, 0.0) / DAYS_PER_MONTH


def _day(months: float | None, question: OutlookQuestion) -> float | None:
    return None if months is None else question.as_of_day + months * DAYS_PER_MONTH


def _finite(months: float) -> float | None:
    return None if isnan(months) else months
