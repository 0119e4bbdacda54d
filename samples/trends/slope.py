"""The slope shown to people: Theil-Sen with its interval, and Mann-Kendall for whether there is a trend at all.

Sen, J. Am. Stat. Assoc. 63 (1968) 1379; Gilbert, Statistical Methods for Environmental Pollution Monitoring (1987),
ch. 16 and 17; Mann, Econometrica 13 (1945) 245; Kendall, Rank Correlation Methods (4th ed. 1975).
"""

from dataclasses import dataclass
from enum import StrEnum
from math import sqrt

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import ndtr
from scipy.stats import theilslopes

from samples.trends.arrays import FloatArray

FEWEST_SAMPLES = 4
TREND_LEVEL = 0.10
"""A trend is shown where chance alone would show one this strong in fewer than one case in ten."""


class TrendVerdict(StrEnum):
    """What a stretch says about direction."""

    RISING = "rising"
    FALLING = "falling"
    NO_TREND = "no trend shown"
    TOO_FEW = "too few samples"


@dataclass(frozen=True)
class Slope:
    """Theil-Sen slope, y a month, with the ends of its interval."""

    slope: float
    low: float
    high: float


@dataclass(frozen=True)
class MannKendall:
    """S, its variance with ties, the normal deviate z with continuity correction, and the two-sided p."""

    s: int
    variance: float
    z: float
    p: float


@dataclass(frozen=True)
class Trend:
    """The verdict with the figures behind it; no figures where there are too few samples."""

    verdict: TrendVerdict
    n: int
    slope: Slope | None = None
    test: MannKendall | None = None


def theil_sen(times: ArrayLike, y: ArrayLike, coverage: float = 0.90) -> Slope:
    """Median of all pairwise slopes with its interval of the given coverage; `times` in months, both shape (n,).

    Raises ValueError with fewer than two different times.
    """
    t, values = np.asarray(times, dtype=np.float64), np.asarray(y, dtype=np.float64)
    if np.unique(t).size < 2:
        raise ValueError("a slope needs samples at two different times")
    found = theilslopes(values, t, alpha=coverage)
    return Slope(float(found[0]), float(found[2]), float(found[3]))


def mann_kendall(y: ArrayLike) -> MannKendall:
    """The test for a monotone trend in values ordered by time, shape (n,), n >= 2, ties allowed."""
    values = np.asarray(y, dtype=np.float64)
    s = int(np.triu(np.sign(values[None, :] - values[:, None]), k=1).sum())
    variance = _variance_of_s(values)
    z = 0.0 if s == 0 or variance == 0.0 else (s - np.sign(s)) / sqrt(variance)
    return MannKendall(s, variance, float(z), float(2.0 * ndtr(-abs(z))))


def trend(times: ArrayLike, y: ArrayLike) -> Trend:
    """Slope with its 90 % interval and the verdict of a stretch; from four samples on."""
    t, values = np.asarray(times, dtype=np.float64), np.asarray(y, dtype=np.float64)
    if values.size < FEWEST_SAMPLES or np.unique(t).size < 2:
        return Trend(TrendVerdict.TOO_FEW, int(values.size))
    test = mann_kendall(values)
    return Trend(_verdict(test), int(values.size), theil_sen(t, values), test)


def doubling_months(slope: float) -> float | None:
    """Months in which a count doubles at this slope (log2 a month); negative: halves. None for a slope of nought."""
    return None if slope == 0.0 else 1.0 / slope


def _verdict(test: MannKendall) -> TrendVerdict:
    if test.p >= TREND_LEVEL:
        return TrendVerdict.NO_TREND
    return TrendVerdict.RISING if test.s > 0 else TrendVerdict.FALLING


def _variance_of_s(values: FloatArray) -> float:
    n = float(values.size)
    ties = np.unique(values, return_counts=True)[1].astype(np.float64)
    spread = n * (n - 1) * (2 * n + 5) - float(np.sum(ties * (ties - 1) * (2 * ties + 5)))
    return spread / 18.0
