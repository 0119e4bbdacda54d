"""What the history leads to expect of a sample, so that a check can say whether a figure is far off."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import datetime

import numpy as np

from samples.checks.candidates import Expectation
from samples.history import History, Reported
from samples.lines import figure_key, line_of
from samples.outlooks import day_of, event_marks, filter_results, parameters_for, scale_spec
from samples.readings import Reading
from samples.trends.arrays import DAYS_PER_MONTH
from samples.trends.forecast import forecast_at
from samples.trends.scales import to_scale
from samples.trends.stretch import Family, split

FEWEST_EARLIER = 3


@dataclass(frozen=True, slots=True)
class Bottle:
    """What decides which earlier samples a new one may be compared with."""

    drawn_at: datetime
    point_id: int
    charge_id: int | None
    laboratory_id: int | None


def expectations(history: History, bottle: Bottle, readings: Iterable[Reading]) -> list[Expectation]:
    """One for each figure that has at least three earlier samples in its own stretch; bounds and codes have none."""
    known = {measurand.key: measurand for measurand in history.measurands}
    found = []
    for reading in readings:
        if reading.value is None or reading.measurand not in known:
            continue
        earlier = _same_stretch(history, bottle, reading, known[reading.measurand].family)
        if len(earlier) >= FEWEST_EARLIER:
            found.append(_expectation(history, bottle, reading, earlier))
    return found


def _same_stretch(history: History, bottle: Bottle, reading: Reading, family: str) -> list[Reported]:
    """The accepted results that share a stretch with the new one and were drawn before it."""
    series = [r for r in history.reported(reading.measurand) if r.drawn_at < bottle.drawn_at]
    keys = [(r.sample.point_id, r.sample.charge_id, r.sample.laboratory_id, r.result.size_scale) for r in series]
    keys.append((bottle.point_id, bottle.charge_id, bottle.laboratory_id, reading.size_scale))
    days = [*(day_of(r.drawn_at) for r in series), day_of(bottle.drawn_at)]
    stretches = split(days, keys, event_marks(history), Family(family), history.reservoir.volume_l)
    mine = next(stretch for stretch in stretches if len(series) in stretch.positions)
    return [series[position] for position in mine.positions if position < len(series)]


def _expectation(history: History, bottle: Bottle, reading: Reading, earlier: Sequence[Reported]) -> Expectation:
    measurand = earlier[-1].result.measurand
    charge = history.charge_at(bottle.drawn_at)
    spec = scale_spec(measurand, charge.fluid.baseline(measurand.key) if charge else None)
    limit = line_of(history.limit_at(figure_key(measurand.key), bottle.drawn_at), measurand.key, spec)
    parameters = parameters_for(measurand, spec, limit).parameters
    state = filter_results(earlier, spec, parameters).state
    months = (day_of(bottle.drawn_at) - day_of(earlier[-1].drawn_at)) / DAYS_PER_MONTH
    law = forecast_at(state, months, parameters, sample=True)
    return Expectation(
        measurand=measurand.key,
        label=measurand.name,
        observed=float(to_scale(reading.value, spec)) if reading.value is not None else np.nan,
        mean=float(law.mean[0]),
        scale=float(np.sqrt(law.variance[0])),
    )
