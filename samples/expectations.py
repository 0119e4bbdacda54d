"""What the history leads to expect of a sample, so that a check can say whether a figure is far off."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import datetime

import numpy as np

from samples.checks.candidates import Expectation
from samples.history import History, Reported
from samples.lines import figure_key, line_of
from samples.readings import Reading
from samples.series import day_of, event_marks, filter_together, parameters_for, scale_at, series_key
from samples.trends.arrays import DAYS_PER_MONTH
from samples.trends.forecast import forecast_at
from samples.trends.level import LevelParameters
from samples.trends.scales import Scale, ScaleSpec, rounding_variance, to_scale
from samples.trends.stretch import Family, split

FEWEST_EARLIER = 3
# What two routine samples differ by anyway (one standard deviation on the scale), so that a quiet history does not make
# every next figure look odd. From published reproducibility of element analysis at 10 mg/kg (2.4 for copper, 6.9 for
# lead, as 95 % differences) and of viscosity (about 1 %); the acid number's is common practice.
LEAST_SPREAD = {Scale.COUNT: 0.30, Scale.LOG: 0.35, Scale.PERCENT: 1.5, Scale.LINEAR: 0.08}


@dataclass(frozen=True, slots=True)
class Bottle:
    """What decides which earlier samples a new one may be compared with."""

    drawn_at: datetime
    point_id: int
    charge_id: int | None
    laboratory_id: int | None


@dataclass(frozen=True, slots=True)
class _Follow:
    """One figure of the new sample with the earlier results it is held against."""

    reading: Reading
    earlier: Sequence[Reported]
    spec: ScaleSpec
    parameters: LevelParameters

    @property
    def value(self) -> float:
        return np.nan if self.reading.value is None else self.reading.value


def expectations(history: History, bottle: Bottle, readings: Iterable[Reading]) -> list[Expectation]:
    """One for each figure that has at least three earlier samples in its own stretch; bounds and codes have none."""
    followed = []
    for reading in readings:
        series = [r for r in history.reported(reading.measurand) if r.drawn_at < bottle.drawn_at]
        if reading.value is None or len(series) < FEWEST_EARLIER:
            continue
        earlier = _same_stretch(history, bottle, reading, series)
        if len(earlier) < FEWEST_EARLIER:
            earlier = _same_stretch(history, bottle, reading, series, any_laboratory=True)
        if len(earlier) >= FEWEST_EARLIER:
            followed.append(_follow(history, bottle, reading, earlier))
    return _expected(followed, bottle) if followed else []


def _same_stretch(
    history: History, bottle: Bottle, reading: Reading, series: Sequence[Reported], any_laboratory: bool = False
) -> list[Reported]:
    """Of the accepted results drawn before the new one, those that share a stretch with it.

    A laboratory that is new, or not named, has no history of its own here: then those of any laboratory.
    """
    keys = [
        *(series_key(r) for r in series),
        (bottle.point_id, bottle.charge_id, bottle.laboratory_id, "", reading.size_scale),
    ]
    if any_laboratory:
        keys = [(point, charge, None, "", scale) for point, charge, _, _, scale in keys]
    days = [*(day_of(r.drawn_at) for r in series), day_of(bottle.drawn_at)]
    family = Family(series[-1].result.measurand.family)
    stretches = split(days, keys, event_marks(history), family, history.reservoir.volume_l)
    mine = next(stretch for stretch in stretches if len(series) in stretch.positions)
    return [series[position] for position in mine.positions if position < len(series)]


def _follow(history: History, bottle: Bottle, reading: Reading, earlier: Sequence[Reported]) -> _Follow:
    measurand = earlier[-1].result.measurand
    spec = scale_at(history, measurand, bottle.drawn_at)
    limit = line_of(history.limit_at(figure_key(measurand.key), bottle.drawn_at), measurand.key, spec)
    return _Follow(reading, earlier, spec, parameters_for(measurand, spec, limit).parameters)


def _expected(followed: Sequence[_Follow], bottle: Bottle) -> list[Expectation]:
    """All figures of the sample through the trend filter at once, one series each."""
    given = [one.parameters for one in followed]
    parameters = LevelParameters(
        q=np.array([each.q for each in given]),
        r=np.array([each.r for each in given]),
        tau=np.array([each.tau for each in given]),
        c=given[0].c,
    )
    state = filter_together([(one.earlier, one.spec) for one in followed], parameters)
    last = np.array([day_of(one.earlier[-1].drawn_at) for one in followed])
    law = forecast_at(state, (day_of(bottle.drawn_at) - last) / DAYS_PER_MONTH, parameters, sample=True)
    return [
        Expectation(
            measurand=one.reading.measurand,
            label=one.earlier[-1].result.measurand.name,
            observed=float(to_scale(one.value, one.spec)),
            mean=float(law.mean[row]),
            scale=_spread(float(law.variance[row]), one),
        )
        for row, one in enumerate(followed)
    ]


def _spread(variance: float, one: _Follow) -> float:
    """The forecast's own spread and that of the rounding, never below what routine samples differ by."""
    return max(float(np.sqrt(variance + rounding_variance(one.value, one.spec))), LEAST_SPREAD[one.spec.scale])
