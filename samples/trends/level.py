"""A level that wanders plus a drift, followed sample by sample; a sample far off the track counts less.

Local linear trend in state-space form with a fixed slope and an exactly diffuse level: Harvey, Forecasting, Structural
Time Series Models and the Kalman Filter (1989), ch. 3; Durbin & Koopman, Time Series Analysis by State Space Methods
(2nd ed. 2012), ch. 2 and 5. Robust update after Masreliez & Martin, IEEE Trans. Autom. Control 22 (1977) 361.
"""

from dataclasses import dataclass, replace
from math import lgamma, log, pi

import numpy as np
from numpy.typing import ArrayLike

from samples.trends.arrays import BoolArray, FloatArray, IntArray

T_DEGREES = 5.0
_LOG_T_CONSTANT = lgamma((T_DEGREES + 1) / 2) - lgamma(T_DEGREES / 2) - 0.5 * log(T_DEGREES * pi)


@dataclass(frozen=True)
class LevelParameters:
    """What is expected of a measurand: one number each, or one array entry a series.

    q: wander of the true level, y² per month, >= 0. r: noise of one sample, y², > 0. tau: spread of drifts,
    y per month, >= 0. c: how many predicted standard deviations a sample may be off before it counts less; infinity
    never.
    """

    q: float | FloatArray
    r: float | FloatArray
    tau: float | FloatArray
    c: float = 2.5

    def __post_init__(self) -> None:
        if np.any(np.asarray(self.q) < 0) or np.any(np.asarray(self.tau) < 0):
            raise ValueError("wander q and spread of drifts tau cannot be negative")
        if np.any(np.asarray(self.r) <= 0) or self.c <= 0:
            raise ValueError("noise r and guard c must be above nought")


@dataclass(frozen=True)
class LevelState:
    """Where each series stands at its time `at` (months): level a, drift b a month, their covariance; shape (series,).

    `count` samples have been used; a series with none has NaN everywhere.
    """

    a: FloatArray
    b: FloatArray
    p11: FloatArray
    p12: FloatArray
    p22: FloatArray
    at: FloatArray
    count: IntArray


@dataclass(frozen=True)
class LevelRun:
    """The state at each series' last sample and what was predicted one step ahead on the way there.

    `predicted_mean`, `predicted_variance` (of a sample, noise included): shape (series, samples), NaN at the first
    sample of a series and at padding. Log-likelihoods: sums over the predictions, shape (series,), first samples left
    out.
    """

    state: LevelState
    predicted_mean: FloatArray
    predicted_variance: FloatArray
    log_likelihood: FloatArray
    log_likelihood_t5: FloatArray


def run_filter(
    times: ArrayLike,
    y: ArrayLike,
    parameters: LevelParameters,
    mask: ArrayLike | None = None,
    extra_variance: ArrayLike | None = None,
) -> LevelRun:
    """Follow many series at once.

    `times` (months, not falling within a series), `y`: shape (series, samples), or (samples,) for one series, which is
    the same calculation with one row. `mask`: True where there is a sample (default: where y is a number).
    `extra_variance` (y²): added to r for that sample only, 1/12 for a value known as a code. Raises ValueError where
    shapes differ or a used time is not a number.
    """
    t, values, present, extra = _columns(times, y, mask, extra_variance)
    state = _empty(t.shape[1])
    mean, variance = np.full_like(t, np.nan), np.full_like(t, np.nan)
    for j in range(t.shape[0]):
        noise = parameters.r + extra[j]
        ahead = advance(state, np.where(present[j] & (state.count > 0), t[j] - state.at, 0.0), parameters)
        mean[j], variance[j] = ahead.a, ahead.p11 + noise
        later = _update(ahead, values[j], noise, parameters.c)
        first = _first(values[j], noise, parameters, t[j])
        state = _choose(present[j], _choose(state.count > 0, later, first), state)
        mean[j, ~present[j]] = np.nan
    normal, t5 = _log_densities(values - mean, variance)
    variance[np.isnan(mean)] = np.nan
    return LevelRun(state, mean.T, variance.T, np.nansum(normal, axis=0), np.nansum(t5, axis=0))


def advance(state: LevelState, months: ArrayLike, parameters: LevelParameters) -> LevelState:
    """The state `months` later (>= 0, scalar or shape (series,)) when no further sample has come."""
    dt = np.asarray(months, dtype=np.float64)
    return replace(
        state,
        a=state.a + state.b * dt,
        p11=state.p11 + 2.0 * dt * state.p12 + dt * dt * state.p22 + parameters.q * dt,
        p12=state.p12 + dt * state.p22,
        at=state.at + dt,
    )


def log_t5(error: ArrayLike, variance: ArrayLike) -> FloatArray:
    """Log density of the Student law with 5 degrees of freedom and scale √variance at `error`; any shape."""
    e, f = np.asarray(error, dtype=np.float64), np.asarray(variance, dtype=np.float64)
    return _LOG_T_CONSTANT - 0.5 * np.log(f) - (T_DEGREES + 1) / 2.0 * np.log1p(e * e / f / T_DEGREES)


def _columns(
    times: ArrayLike, y: ArrayLike, mask: ArrayLike | None, extra_variance: ArrayLike | None
) -> tuple[FloatArray, FloatArray, BoolArray, FloatArray]:
    """Samples first, series second, so that each step of the filter reads one contiguous row."""
    t = np.ascontiguousarray(np.atleast_2d(np.asarray(times, dtype=np.float64)).T)
    values = np.ascontiguousarray(np.atleast_2d(np.asarray(y, dtype=np.float64)).T)
    present = ~np.isnan(values) if mask is None else np.atleast_2d(np.asarray(mask, dtype=np.bool_)).T
    extra = np.zeros_like(t) if extra_variance is None else np.atleast_2d(np.asarray(extra_variance, np.float64)).T
    if not t.shape == values.shape == present.shape == extra.shape:
        raise ValueError("times, y, mask and extra variance must have one shape")
    if np.isnan(t[present]).any() or np.isnan(values[present]).any():
        raise ValueError("a sample needs a time and a value")
    return np.where(present, t, 0.0), np.where(present, values, 0.0), present, np.where(present, extra, 0.0)


def _empty(n: int) -> LevelState:
    def nothing() -> FloatArray:
        return np.full(n, np.nan)

    return LevelState(nothing(), nothing(), nothing(), nothing(), nothing(), nothing(), np.zeros(n, dtype=np.int64))


def _first(y: FloatArray, noise: FloatArray, parameters: LevelParameters, at: FloatArray) -> LevelState:
    drift_variance = np.broadcast_to(np.square(np.asarray(parameters.tau, dtype=np.float64)), y.shape)
    zero = np.zeros_like(y)
    return LevelState(y, zero, np.broadcast_to(noise, y.shape), zero, drift_variance, at, np.ones(y.shape, np.int64))


def _update(ahead: LevelState, y: FloatArray, noise: FloatArray, c: float) -> LevelState:
    error = y - ahead.a
    predicted = ahead.p11 + noise
    z2 = error * error / predicted
    guarded = np.maximum(noise * z2 / c**2, (error / c) ** 2 - ahead.p11)
    variance = ahead.p11 + np.where(z2 > c**2, guarded, noise)
    k1, k2 = ahead.p11 / variance, ahead.p12 / variance
    return replace(
        ahead,
        a=ahead.a + k1 * error,
        b=ahead.b + k2 * error,
        p11=ahead.p11 * (1.0 - k1),
        p12=ahead.p12 * (1.0 - k1),
        p22=ahead.p22 - k2 * ahead.p12,
        count=ahead.count + 1,
    )


def _choose(condition: BoolArray, yes: LevelState, no: LevelState) -> LevelState:
    return LevelState(
        a=np.where(condition, yes.a, no.a),
        b=np.where(condition, yes.b, no.b),
        p11=np.where(condition, yes.p11, no.p11),
        p12=np.where(condition, yes.p12, no.p12),
        p22=np.where(condition, yes.p22, no.p22),
        at=np.where(condition, yes.at, no.at),
        count=np.where(condition, yes.count, no.count),
    )


def _log_densities(error: FloatArray, variance: FloatArray) -> tuple[FloatArray, FloatArray]:
    normal = -0.5 * (np.log(2.0 * pi * variance) + error * error / variance)
    return normal, log_t5(error, variance)
