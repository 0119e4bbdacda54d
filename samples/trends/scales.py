"""The scale each measurand is followed on, and how exact, coded and bounded results get there.

A *figure* is the number a target or limit is written in: per mL for counts, the unit of the result for water, metals
and acid number, and percent change from the charge's baseline for viscosity.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike

from samples.trends.arrays import BoolArray, FloatArray

COUNT_UNIT_PER_ML = 0.01
"""Upper bound of scale number 0 in ISO 4406: log2(count / 0.01) rises by one with each number."""

CODE_VARIANCE = 1.0 / 12.0
"""Variance of a value known only to lie somewhere in one code step (uniform law of width 1)."""

LOWEST_COUNT_Y = -1.0
"""Where a count of nothing stands: half the smallest bound of the table, 0.005 per mL."""


class Scale(StrEnum):
    """How a measurand is transformed before it is followed."""

    COUNT = "count"
    LOG = "log"
    PERCENT = "percent"
    LINEAR = "linear"


@dataclass(frozen=True)
class ScaleSpec:
    """One measurand's scale.

    `reporting_limit` (unit of the result, > 0) serves the log scale: half of it is added before the logarithm.
    `baseline` (unit of the result, > 0) is the value of the fresh charge; the percent scale needs it, headroom uses it.
    """

    scale: Scale
    reporting_limit: float = 1.0
    baseline: float | None = None

    @property
    def offset(self) -> float:
        """What is added before the logarithm of the log scale: half the reporting limit."""
        return self.reporting_limit / 2.0


@dataclass(frozen=True)
class Observed:
    """Results on their scale: y, added variance (y²) and whether only a bound was known; one entry a result."""

    y: FloatArray
    extra_variance: FloatArray
    bounded: BoolArray


def to_scale(values: ArrayLike, spec: ScaleSpec) -> FloatArray:
    """Results in their own unit to y.

    counts: log2(per mL / 0.01), not below -1; log: log2(value + half the reporting limit); percent: percent change
    from the baseline; linear: unchanged. Any shape. Raises ValueError for the percent scale without a positive
    baseline.
    """
    v = np.asarray(values, dtype=np.float64)
    if spec.scale is Scale.COUNT:
        return _log2_count(v)
    if spec.scale is Scale.LOG:
        return np.asarray(np.log2(np.maximum(v, 0.0) + spec.offset), dtype=np.float64)
    if spec.scale is Scale.PERCENT:
        return 100.0 * (v / _baseline(spec) - 1.0)
    return v


def from_scale(y: ArrayLike, spec: ScaleSpec) -> FloatArray:
    """The inverse of `to_scale`: y to results in their own unit, never below nought on the two logarithmic scales."""
    v = np.asarray(y, dtype=np.float64)
    if spec.scale is Scale.COUNT:
        return np.asarray(COUNT_UNIT_PER_ML * np.exp2(v), dtype=np.float64)
    if spec.scale is Scale.LOG:
        return np.maximum(np.exp2(v) - spec.offset, 0.0)
    if spec.scale is Scale.PERCENT:
        return _baseline(spec) * (1.0 + v / 100.0)
    return v


def figure_to_y(figure: float, spec: ScaleSpec) -> float:
    """A target or limit figure to y. Percent figures are percent change already; others are in the result's unit."""
    return figure if spec.scale is Scale.PERCENT else float(to_scale(figure, spec))


def y_to_figure(y: ArrayLike, spec: ScaleSpec) -> FloatArray:
    """y to the numbers that targets and limits are written in; the inverse of `figure_to_y`."""
    return np.asarray(y, dtype=np.float64) if spec.scale is Scale.PERCENT else from_scale(y, spec)


def value_to_figure(value: float, spec: ScaleSpec) -> float:
    """A result in its own unit to the numbers that targets and limits are written in."""
    return tidy(float(to_scale(value, spec))) if spec.scale is Scale.PERCENT else value


def tidy(figure: float) -> float:
    """The figure without the last digits of binary arithmetic, so that 50.6 on a new oil of 46 is +10 % and not more.

    Nine significant digits; a laboratory reports four at most.
    """
    return float(f"{figure:.9g}")


def observe(
    values: ArrayLike, lows: ArrayLike, highs: ArrayLike, qualifiers: Sequence[str], spec: ScaleSpec
) -> Observed:
    """Put results on their scale, whatever is known of each.

    `values`, `lows`, `highs`: shape (n,), unit of the result, NaN where not known; a result is either a value or an
    interval (low, high], an open end being NaN. `qualifiers`: '', '<', '>' or '≥'. An interval stands at its middle,
    for counts at the code number less a half, with the variance of a uniform law over its width (1/12 for one code
    step). A bound alone stands at the bound and is marked bounded, as is everything with a qualifier.
    """
    value, low, high = (np.asarray(a, dtype=np.float64) for a in (values, lows, highs))
    y_low, y_high = to_scale(low, spec), _upper_edge(high, spec)
    closed = np.isfinite(low) & np.isfinite(high)
    width = np.where(closed, _width(y_low, y_high, spec), 0.0)
    middle = np.where(closed, y_high - width / 2.0, np.where(np.isfinite(high), y_high, y_low))
    exact = np.isfinite(value)
    y = np.where(exact, to_scale(value, spec), middle)
    open_ended = ~exact & ~closed
    qualified = np.array([q != "" for q in qualifiers], dtype=np.bool_)
    return Observed(y, np.where(exact, 0.0, width**2 / 12.0), open_ended | qualified)


def rounding_variance(value: float, spec: ScaleSpec) -> float:
    """Variance (y²) that comes from reporting in whole steps of the reporting limit; nought on the other scales.

    `value`: unit of the result. A uniform law of the step's width, carried to the log scale by its slope at the value:
    near the reporting limit one step more or less is a large part of a doubling and says nothing.
    """
    if spec.scale is not Scale.LOG:
        return 0.0
    slope = 1.0 / ((max(value, 0.0) + spec.offset) * np.log(2.0))
    return float(spec.reporting_limit**2 / 12.0 * slope**2)


def _log2_count(per_ml: FloatArray) -> FloatArray:
    with np.errstate(divide="ignore", invalid="ignore"):
        y = np.log2(per_ml / COUNT_UNIT_PER_ML)
    return np.asarray(np.maximum(y, LOWEST_COUNT_Y), dtype=np.float64)


def _baseline(spec: ScaleSpec) -> float:
    if spec.baseline is None or spec.baseline <= 0:
        raise ValueError("a percent scale needs the positive value of the fresh charge")
    return spec.baseline


def _upper_edge(high: FloatArray, spec: ScaleSpec) -> FloatArray:
    """The code number for counts (table bounds are rounded powers of two), the plain scale otherwise."""
    y = to_scale(high, spec)
    return np.round(y) if spec.scale is Scale.COUNT else y


def _width(y_low: FloatArray, y_high: FloatArray, spec: ScaleSpec) -> FloatArray:
    if spec.scale is Scale.COUNT:
        steps = y_high - np.round(y_low)
        return np.where(y_high <= 0, 1.0, np.maximum(steps, 1.0))
    return np.abs(y_high - y_low)
