"""Where the starting values of `samples.trends.starting` come from: run as `python -m
tests.trends.derive_starting_values`.

A fleet of random reservoirs is simulated, sampled every 14 to 182 days for three years, and fitted per measurand.
Counts are printed for comparison only: their starting values come from a larger simulation with interventions and
gross errors.
"""

import numpy as np

from samples.demo.simulator import Change, Condition, Filter, Oil, TrueOil, report, simulate
from samples.trends.arrays import FloatArray
from samples.trends.fit import Fit, fit_parameters
from samples.trends.level import LevelParameters
from samples.trends.scales import Scale, ScaleSpec, to_scale

DAYS = 1096
START = LevelParameters(0.05, 0.05, 0.05)


def random_condition(rng: np.random.Generator) -> Condition:
    """A reservoir of any kind: rates of ageing and wear spread by a factor of two, one in five with a leak of water."""
    usual = float(2.0 ** rng.uniform(6, 12)) * 0.01 * 4
    leaks = rng.random() < 0.2
    leak = Change(int(rng.integers(300, 1000)), DAYS, water=float(rng.uniform(2, 15)), ramp=60)
    return Condition(
        volume_l=float(rng.uniform(50, 3000)),
        filter=Filter(float(rng.uniform(5, 100)), (20.0, 200.0, 1000.0), wear_per_day=0.0006),
        usual_per_ml=(usual * 4, usual, usual / 8),
        oil=Oil(46.0, 0.5, float(rng.normal(0.05, 0.10)), float(0.008 * 2 ** rng.normal(0, 1))),
        days=DAYS,
        restlessness=float(rng.uniform(0.1, 0.5)),
        water_usual=float(rng.uniform(40, 200)),
        wear=float(0.5 * 2 ** rng.normal(0, 1)),
        changes=(leak,) if leaks else (),
    )


def sampled(rng: np.random.Generator) -> tuple[FloatArray, dict[str, FloatArray]]:
    """One reservoir's sampling times in months and its reported values by measurand."""
    oil = simulate(random_condition(rng), rng)
    interval = float(rng.choice([14, 30, 60, 90, 182]))
    days = np.arange(rng.uniform(1, interval), DAYS, interval).astype(int)
    return days / 30.4375, _values(oil, days, rng)


def _values(oil: TrueOil, days: FloatArray, rng: np.random.Generator) -> dict[str, FloatArray]:
    found = [report(oil, int(day), rng, dirty_bottle=rng.random() < 0.02) for day in days]
    return {
        "counts": to_scale([r.counts[1] for r in found], ScaleSpec(Scale.COUNT)),
        "water": to_scale([r.water for r in found], ScaleSpec(Scale.LOG, reporting_limit=20.0)),
        "metals": to_scale([r.metals["fe"] for r in found], ScaleSpec(Scale.LOG, reporting_limit=1.0)),
        "viscosity": to_scale([r.viscosity for r in found], ScaleSpec(Scale.PERCENT, baseline=46.0)),
        "acid_number": to_scale([r.acid_number for r in found], ScaleSpec(Scale.LINEAR)),
    }


def derive(reservoirs: int, seed: int) -> dict[str, Fit]:
    """The fit of each measurand over that many simulated reservoirs."""
    rng = np.random.default_rng(seed)
    fleet = [sampled(rng) for _ in range(reservoirs)]
    longest = max(times.size for times, _ in fleet)
    times = np.stack([_padded(t, longest) for t, _ in fleet])
    return {
        name: fit_parameters(times, np.stack([_padded(values[name], longest) for _, values in fleet]), START)
        for name in fleet[0][1]
    }


def _padded(row: FloatArray, length: int) -> FloatArray:
    return np.pad(row.astype(float), (0, length - row.size), constant_values=np.nan)


def main() -> None:
    """Print q, r and tau of each measurand."""
    for name, fit in derive(400, seed=2).items():
        p = fit.parameters
        print(f"{name}: q {p.q:.3g}, r {p.r:.3g}, tau {p.tau:.3g} from {fit.predictions} predictions")


if __name__ == "__main__":
    main()
