"""From a level and its drift to what lies ahead: ranges, runway and the chance of passing a limit.

The predictive law is Student's t with 5 degrees of freedom at the filter's mean and scale: the normal law holds only
90-93 % where it promises 95 %.
"""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import stdtr, stdtrit

from samples.trends.arrays import DAYS_PER_MONTH, BoolArray, FloatArray, IntArray
from samples.trends.level import T_DEGREES, LevelParameters, LevelState, advance

HORIZON_MONTHS = 24.0
GRID_DAYS = 5.0
RUNWAY_COVERAGE = 0.80


class Side(StrEnum):
    """On which side of the limit the oil is no longer good."""

    UPPER = "upper"
    LOWER = "lower"

    @property
    def sign(self) -> float:
        """+1 where too much is bad, -1 where too little is."""
        return 1.0 if self is Side.UPPER else -1.0


@dataclass(frozen=True)
class Law:
    """Student's t with 5 degrees of freedom: mean (y) and scale squared (y²), any common shape."""

    mean: FloatArray
    variance: FloatArray


@dataclass(frozen=True)
class Runway:
    """Months until the chance of being past the limit reaches 10 %, 50 % and 90 %; shape (series,).

    NaN: not within the horizon. `past`: the level is more likely than not past the limit already.
    """

    early: FloatArray
    median: FloatArray
    late: FloatArray
    past: BoolArray


@dataclass(frozen=True)
class Fan:
    """The forecast of one series for a chart: months ahead, median and 80 % range of the level on the scale y."""

    months: FloatArray
    median: FloatArray
    low: FloatArray
    high: FloatArray


def forecast_at(state: LevelState, months: ArrayLike, parameters: LevelParameters, *, sample: bool = False) -> Law:
    """The law of the true level `months` ahead (>= 0), or of a sample drawn then when `sample`.

    `months`: a scalar or shape (series,).
    """
    ahead = advance(state, months, parameters)
    return Law(ahead.a, ahead.p11 + parameters.r if sample else ahead.p11)


def band(law: Law, coverage: float = RUNWAY_COVERAGE) -> tuple[FloatArray, FloatArray]:
    """The central range that holds `coverage` (0 to 1) of the law: low and high, in y."""
    half = _quantile(0.5 + coverage / 2.0) * np.sqrt(law.variance)
    return law.mean - half, law.mean + half


def chance_past(
    state: LevelState, limit: ArrayLike, months: ArrayLike, side: Side, parameters: LevelParameters
) -> FloatArray:
    """The chance (0 to 1) that a sample drawn `months` ahead is past `limit` (y); shape (series,)."""
    law = forecast_at(state, months, parameters, sample=True)
    distance = side.sign * (law.mean - np.asarray(limit, dtype=np.float64)) / np.sqrt(law.variance)
    return np.asarray(stdtr(T_DEGREES, distance), dtype=np.float64)


def chance_outside(
    state: LevelState, low: ArrayLike, high: ArrayLike, months: ArrayLike, parameters: LevelParameters
) -> FloatArray:
    """The chance (0 to 1) that a sample drawn `months` ahead is below `low` or above `high` (y); shape (series,)."""
    below = chance_past(state, low, months, Side.LOWER, parameters)
    return below + chance_past(state, high, months, Side.UPPER, parameters)


def runway(
    state: LevelState,
    limit: ArrayLike,
    side: Side,
    parameters: LevelParameters,
    *,
    horizon_months: float = HORIZON_MONTHS,
    grid_days: float = GRID_DAYS,
) -> Runway:
    """Time from the state's own moment until `limit` (y, scalar or shape (series,)) is passed, on a grid of days.

    Bring the state to today with `advance` first when the last sample is older.
    """
    line = np.asarray(limit, dtype=np.float64)
    spread = _quantile(0.5 + RUNWAY_COVERAGE / 2.0)
    found = np.full((3, *state.a.shape), np.nan)
    for months in runway_grid(horizon_months, grid_days):
        law = forecast_at(state, months, parameters)
        margin, reach = side.sign * (law.mean - line), spread * np.sqrt(law.variance)
        for row, passed in zip(found, (margin >= -reach, margin >= 0.0, margin >= reach), strict=True):
            row[passed & np.isnan(row)] = months
    return Runway(found[0], found[1], found[2], side.sign * (state.a - line) > 0.0)


def runway_grid(horizon_months: float = HORIZON_MONTHS, grid_days: float = GRID_DAYS) -> FloatArray:
    """The moments, in months from now, at which a runway is looked for; the first is nought."""
    steps = int(horizon_months * DAYS_PER_MONTH / grid_days)
    return np.arange(steps + 1, dtype=np.float64) * grid_days / DAYS_PER_MONTH


def nearer(upper: Runway, lower: Runway) -> tuple[Runway, IntArray]:
    """Of the runways to the two sides of a limit, the one that ends first; and its side, +1 upper, -1 lower.

    Compared by their early ends, then by their medians; a tie goes to the upper side.
    """
    early_u, early_l = (np.nan_to_num(r.early, nan=np.inf) for r in (upper, lower))
    median_u, median_l = (np.nan_to_num(r.median, nan=np.inf) for r in (upper, lower))
    low_first = (early_l < early_u) | ((early_l == early_u) & (median_l < median_u))
    chosen = Runway(
        np.where(low_first, lower.early, upper.early),
        np.where(low_first, lower.median, upper.median),
        np.where(low_first, lower.late, upper.late),
        np.where(low_first, lower.past, upper.past),
    )
    return chosen, np.where(low_first, -1, 1).astype(np.int64)


def fan(
    state: LevelState, parameters: LevelParameters, *, horizon_months: float = 12.0, grid_days: float = 10.0
) -> Fan:
    """The forecast of the level of one series (the first row of `state`) from its moment to the horizon."""
    months = runway_grid(horizon_months, grid_days)
    laws = [forecast_at(state, float(h), parameters) for h in months]
    law = Law(np.array([w.mean[0] for w in laws]), np.array([w.variance[0] for w in laws]))
    low, high = band(law)
    return Fan(months, law.mean, low, high)


def chance_words(chance: float) -> str:
    """A chance (0 to 1) as it is said: whole percents, never below "under 5 %" or above "over 95 %".

    Below 5 % the rate of surprises rules (a step in ingress, a bad bottle), so nothing smaller can be promised.
    """
    if chance < 0.05:
        return "under 5 %"
    if chance > 0.95:
        return "over 95 %"
    return f"{round(100 * chance)} %"


def _quantile(p: float) -> float:
    return float(stdtrit(T_DEGREES, p))
