"""A seeded simulator of one reservoir: what is truly in the oil day by day, and what a laboratory would report.

Dirt follows the well-mixed mass balance of `fleet.mass_balance` for each size class, in closed form from day to day:
ingress wanders (a random walk in its logarithm that is drawn back to its usual value) and may step or climb, elements
wear until they are changed, and what is done to the oil acts on its day. Water, ageing and wear metals follow
balances of the same kind. Reports add the scatter of sampling and counting (10-25 % on counts) and now and then a
dirty bottle.
"""

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from fleet.mass_balance import Loop, count_after, efficiency_from_beta, floor_per_ml, ingress_from_floor
from samples.trends.arrays import FloatArray

MINUTES_PER_DAY = 1440.0
SIZES = (4, 6, 14)
METALS = ("fe", "cu", "si", "na")
OWN_WANDER = 0.06
NEW_OIL_PER_ML = (4000.0, 1000.0, 100.0)
"""Fresh oil from a drum, about 19/17/14: dirtier than most systems want it."""


@dataclass(frozen=True)
class Filter:
    """The filtration that works on a reservoir: flow (L/min, duty included) and beta ratio at 4, 6 and 14 µm(c).

    `wear_per_day`: share of the flow that an ageing element lets by, per day since it was changed.
    """

    flow_l_min: float
    betas: tuple[float, float, float]
    wear_per_day: float = 0.0


@dataclass(frozen=True)
class Change:
    """Something that alters the reservoir for a while or for good; days count from the start of the history.

    ingress: factor on the dirt that enters. climb: doublings of it per month. bypass: share of the flow that passes the
    element unfiltered. water: extra water in mg/kg a day, growing in a straight line over `ramp` days. sodium, copper,
    iron: extra mg/kg a day.
    """

    day: int
    until: int
    ingress: float = 1.0
    climb: float = 0.0
    bypass: float = 0.0
    water: float = 0.0
    ramp: int = 1
    sodium: float = 0.0
    copper: float = 0.0
    iron: float = 0.0


@dataclass(frozen=True)
class Treatment:
    """What people do to the oil on one day. fresh: share of the charge replaced with new oil (1 for an oil change).

    offline_minutes at offline_flow (L/min) through a beta-1000 element; new_element: the wear starts again at nought;
    dry_to: water is brought down to this, mg/kg.
    """

    day: int
    fresh: float = 0.0
    offline_minutes: float = 0.0
    offline_flow: float = 0.0
    new_element: bool = False
    dry_to: float | None = None


@dataclass(frozen=True)
class Oil:
    """The fresh charge: viscosity at 40 °C (mm²/s), acid number (mg KOH/g), and how both move per month in service."""

    viscosity: float
    acid_number: float
    viscosity_percent_a_month: float = 0.05
    acid_a_month: float = 0.008
    water: float = 60.0


@dataclass(frozen=True)
class Condition:
    """One reservoir and its history to come.

    `usual_per_ml`: the counts it settles at with fresh elements. `restlessness`: spread of the wandering of log2
    ingress per square root of a month. `water_usual` in mg/kg. `wear` in mg/kg of iron per month of service.
    """

    volume_l: float
    filter: Filter
    usual_per_ml: tuple[float, float, float]
    oil: Oil
    days: int
    restlessness: float = 0.22
    water_usual: float = 90.0
    wear: float = 0.5
    changes: Sequence[Change] = field(default_factory=tuple)
    treatments: Sequence[Treatment] = field(default_factory=tuple)


@dataclass(frozen=True)
class TrueOil:
    """What is really in the oil at the end of each day; counts per mL of shape (days, 3), all else of shape (days,)."""

    counts: FloatArray
    water: FloatArray
    viscosity: FloatArray
    acid_number: FloatArray
    metals: dict[str, FloatArray]
    oil_age_days: FloatArray


@dataclass(frozen=True)
class Report:
    """What the laboratory says of one bottle: counts per mL at 4, 6 and 14 µm(c), mg/kg, mm²/s and mg KOH/g."""

    counts: tuple[float, float, float]
    water: float
    viscosity: float
    acid_number: float
    metals: dict[str, float]


def simulate(condition: Condition, rng: np.random.Generator) -> TrueOil:
    """The true history of a reservoir over `condition.days` days."""
    ingress = _ingress_factor(condition, rng)
    shares = _fresh_shares(condition)
    age = _age_since(condition.days, [t.day for t in condition.treatments if t.fresh >= 1.0])
    return TrueOil(
        counts=_counts(condition, ingress, rng),
        water=_water(condition, shares, rng),
        viscosity=_viscosity(condition, shares, rng),
        acid_number=_acid_number(condition, shares, rng),
        metals=_metals(condition, shares, ingress, rng),
        oil_age_days=age,
    )


def report(oil: TrueOil, day: int, rng: np.random.Generator, *, dirty_bottle: bool = False) -> Report:
    """One sample of that day: the truth with the scatter of bottle and counter; a dirty bottle holds eight times the
    dirt.

    The spread of the counts is 10-25 %, part of it common to the three sizes.
    """
    spread = rng.uniform(0.10, 0.25)
    scatter = np.exp(rng.normal(0.0, spread * 0.6) + rng.normal(0.0, spread * 0.8, 3))
    counts = oil.counts[day] * scatter * (8.0 if dirty_bottle else 1.0)
    metals = {name: max(0.0, _near(level[day], 0.10, 0.3, rng)) for name, level in oil.metals.items()}
    return Report(
        counts=_ordered(counts),
        water=round(max(5.0, _near(oil.water[day], 0.12, 3.0, rng))),
        viscosity=round(_near(oil.viscosity[day], 0.004, 0.0, rng), 1),
        acid_number=round(max(0.02, _near(oil.acid_number[day], 0.02, 0.015, rng)), 2),
        metals={name: float(round(value)) for name, value in metals.items()},
    )


def _near(value: float, relative: float, absolute: float, rng: np.random.Generator) -> float:
    return float(value * (1.0 + rng.normal(0.0, relative)) + rng.normal(0.0, 1.0) * absolute)


def _ordered(counts: FloatArray) -> tuple[float, float, float]:
    """To the three figures a counter prints, never fewer small particles than large ones."""
    four, six, fourteen = (float(f"{c:.3g}") for c in counts)
    six = max(six, fourteen)
    return max(four, six), six, fourteen


def _wander(days: int, spread: float, rng: np.random.Generator, memory_days: float = 240.0) -> FloatArray:
    """A random walk drawn back to nought: `spread` is its growth per square root of a month while it is small."""
    steps = rng.normal(0.0, spread / np.sqrt(30.4375), days)
    keep = 1.0 - 1.0 / memory_days
    walk, at = np.empty(days), float(rng.normal(0.0, spread))
    for day in range(days):
        at = keep * at + float(steps[day])
        walk[day] = at
    return walk


def _ingress_factor(condition: Condition, rng: np.random.Generator) -> FloatArray:
    """The factor on all the dirt that enters, day by day."""
    log2 = _wander(condition.days, condition.restlessness, rng)
    day = np.arange(condition.days, dtype=np.float64)
    for change in condition.changes:
        inside = (day >= change.day) & (day < change.until)
        log2 += np.where(inside, np.log2(change.ingress) + change.climb * (day - change.day) / 30.4375, 0.0)
    return np.asarray(np.exp2(log2), dtype=np.float64)


def _filtered_share(condition: Condition) -> FloatArray:
    """The share of the filter's flow that really passes the element, day by day."""
    worn = _age_since(condition.days, [t.day for t in condition.treatments if t.new_element])
    share = 1.0 - np.minimum(condition.filter.wear_per_day * worn, 0.6)
    day = np.arange(condition.days)
    for change in condition.changes:
        share = np.where((day >= change.day) & (day < change.until), share * (1.0 - change.bypass), share)
    return np.asarray(share, dtype=np.float64)


def _counts(condition: Condition, ingress: FloatArray, rng: np.random.Generator) -> FloatArray:
    share = _filtered_share(condition)
    columns = [
        # Each size wanders a little by itself: the dust is not always of one grading.
        _one_size(condition, size, share, ingress * np.exp2(_wander(condition.days, OWN_WANDER, rng)))
        for size in range(len(SIZES))
    ]
    return np.stack(columns, axis=1)


def _one_size(condition: Condition, size: int, share: FloatArray, ingress: FloatArray) -> FloatArray:
    treatments = {t.day: t for t in condition.treatments}
    filtration, usual = condition.filter, condition.usual_per_ml[size]
    efficiency = efficiency_from_beta(filtration.betas[size])
    clean = Loop(condition.volume_l, filtration.flow_l_min, efficiency)
    entering = ingress_from_floor(clean, usual)
    counts, now = np.empty(condition.days), usual
    for day in range(condition.days):
        loop = Loop(condition.volume_l, filtration.flow_l_min * share[day], efficiency, entering * ingress[day])
        now = count_after(loop, now, MINUTES_PER_DAY)
        if day in treatments:
            now = _treated(now, size, treatments[day], condition.volume_l)
        counts[day] = now
    return counts


def _treated(now: float, size: int, treatment: Treatment, volume_l: float) -> float:
    mixed = now + treatment.fresh * (NEW_OIL_PER_ML[size] - now)
    if treatment.offline_minutes <= 0.0:
        return mixed
    cart = Loop(volume_l, treatment.offline_flow, efficiency_from_beta(1000.0))
    # A cart leaves behind what the walls and pipes shed: it does not reach nought.
    return max(count_after(cart, mixed, treatment.offline_minutes), (floor_per_ml(cart) or 0.0) + 0.08 * mixed)


def _fresh_shares(condition: Condition) -> FloatArray:
    shares = np.zeros(condition.days)
    for treatment in condition.treatments:
        if 0 <= treatment.day < condition.days:
            shares[treatment.day] = treatment.fresh
    return shares


def _age_since(days: int, resets: Sequence[int]) -> FloatArray:
    """Days since the last of `resets`; before the first one as if the age at the start had been 120 days."""
    age, running = np.empty(days), 120.0
    for day in range(days):
        running = 0.0 if day in resets else running + 1.0
        age[day] = running
    return age


def _water(condition: Condition, shares: FloatArray, rng: np.random.Generator) -> FloatArray:
    """Water leaves through the headspace within weeks and comes in with the air and through leaks, mg/kg."""
    usual = condition.water_usual * np.exp2(_wander(condition.days, 0.25, rng, memory_days=60.0))
    leak = _added(condition, "water")
    dry = {t.day: t.dry_to for t in condition.treatments if t.dry_to is not None}
    level, now = np.empty(condition.days), condition.water_usual
    for day in range(condition.days):
        now += (float(usual[day]) - now) / 20.0 + float(leak[day])
        now += float(shares[day]) * (condition.oil.water - now)
        now = min(now, dry.get(day, now))
        level[day] = now
    return level


def _added(condition: Condition, what: str) -> FloatArray:
    """What the changes add a day, growing in a straight line over each change's ramp."""
    day = np.arange(condition.days, dtype=np.float64)
    total = np.zeros(condition.days)
    for change in condition.changes:
        growth = np.clip((day - change.day) / change.ramp, 0.0, 1.0)
        total += np.where((day >= change.day) & (day < change.until), getattr(change, what) * growth, 0.0)
    return total


def _accumulated(daily: FloatArray, shares: FloatArray, start: float, fresh: float) -> FloatArray:
    """A level that grows by `daily` and is diluted by fresh oil that carries `fresh` of it."""
    level, now = np.empty(daily.size), start
    for day in range(daily.size):
        now += float(daily[day])
        now += float(shares[day]) * (fresh - now)
        level[day] = now
    return level


def _viscosity(condition: Condition, shares: FloatArray, rng: np.random.Generator) -> FloatArray:
    oil = condition.oil
    daily = oil.viscosity_percent_a_month / 30.4375 + rng.normal(0.0, 0.02, condition.days)
    change = _accumulated(daily, shares, oil.viscosity_percent_a_month * 4.0, 0.0)
    return oil.viscosity * (1.0 + change / 100.0)


def _acid_number(condition: Condition, shares: FloatArray, rng: np.random.Generator) -> FloatArray:
    oil = condition.oil
    pace = np.exp2(_wander(condition.days, 0.3, rng))
    return _accumulated(
        oil.acid_a_month / 30.4375 * pace, shares, oil.acid_number + 4 * oil.acid_a_month, oil.acid_number
    )


def _metals(
    condition: Condition, shares: FloatArray, ingress: FloatArray, rng: np.random.Generator
) -> dict[str, FloatArray]:
    """Iron and copper build up with service, silicon follows the dirt that enters, sodium what leaks in; all mg/kg."""
    pace = condition.wear / 30.4375 * np.exp2(_wander(condition.days, 0.3, rng))
    sodium = _accumulated(_added(condition, "sodium"), shares, 2.0, 2.0)
    return {
        "fe": _accumulated(pace + _added(condition, "iron"), shares, 4.0 + 4 * condition.wear, 2.0),
        "cu": _accumulated(0.4 * pace + _added(condition, "copper"), shares, 2.0 + 1.5 * condition.wear, 1.0),
        "si": np.asarray(3.0 + 1.5 * np.sqrt(ingress), dtype=np.float64),
        "na": sodium,
    }
