"""Learning from a fleet, the starting values, and whether the ranges hold what they promise."""

from functools import cache

import numpy as np
import pytest
from scipy.special import stdtrit

from samples.trends.arrays import FloatArray
from samples.trends.fit import fit_parameters
from samples.trends.level import LevelParameters, run_filter
from samples.trends.scales import Scale
from samples.trends.starting import STARTING_NAME, starting_values
from samples.trends.stretch import Family
from tests.trends.derive_starting_values import derive, sampled


def world(rng: np.random.Generator, q: float, r: float, tau: float) -> tuple[FloatArray, FloatArray]:
    """Series that obey the model: 300 of 12 samples, a month or so apart."""
    gaps = rng.uniform(0.5, 2.0, (300, 12))
    level = np.cumsum(rng.normal(0, np.sqrt(q * gaps)), axis=1) + rng.normal(0, tau, (300, 1)) * np.cumsum(gaps, axis=1)
    return np.cumsum(gaps, axis=1), level + rng.normal(0, np.sqrt(r), gaps.shape)


def test_the_parameters_of_a_drifting_world_are_found_again() -> None:
    times, y = world(np.random.default_rng(1), 0.10, 0.06, 0.20)
    found = fit_parameters(times, y, LevelParameters(0.2, 0.08, 0.05, np.inf))
    assert found.predictions == 300 * 11
    assert found.parameters.tau == pytest.approx(0.20, rel=0.2)
    assert found.parameters.q / found.parameters.r == pytest.approx(0.10 / 0.06, rel=0.25)


def test_a_calm_world_shows_no_drift_and_no_wandering() -> None:
    times, y = world(np.random.default_rng(2), 0.0, 0.06, 0.0)
    found = fit_parameters(times, y, LevelParameters(0.2, 0.08, 0.05)).parameters
    assert found.tau < 0.01
    assert found.q < 0.005


def test_nothing_is_learnt_from_single_samples() -> None:
    with pytest.raises(ValueError, match="nothing to learn"):
        fit_parameters([[0.0, 1.0]], [[1.0, np.nan]], LevelParameters(0.2, 0.08, 0.05))


def test_counts_start_with_the_published_values_of_the_simulation() -> None:
    found = starting_values(Scale.COUNT, Family.DIRT)
    assert (found.parameters.q, found.parameters.r, found.parameters.tau) == (0.20, 0.08, 0.05)
    assert found.name == STARTING_NAME


@pytest.mark.parametrize(
    ("name", "scale", "family"),
    [
        ("water", Scale.LOG, Family.WATER),
        ("metals", Scale.LOG, Family.WEAR),
        ("viscosity", Scale.PERCENT, Family.AGEING),
        ("acid_number", Scale.LINEAR, Family.AGEING),
    ],
)
def test_the_shipped_values_come_from_the_simulator(name: str, scale: Scale, family: Family) -> None:
    fitted, shipped = derived()[name], starting_values(scale, family).parameters
    assert shipped.r == pytest.approx(fitted.r, rel=0.35)
    assert shipped.q == pytest.approx(fitted.q, rel=0.6)
    assert shipped.tau == pytest.approx(max(float(fitted.tau), 0.01), rel=0.6)


@cache
def derived() -> dict[str, LevelParameters]:
    return {name: fit.parameters for name, fit in derive(80, seed=5).items()}


def test_a_linear_measurand_starts_with_values_stretched_to_its_span() -> None:
    one, ten = (starting_values(Scale.LINEAR, Family.OTHER, span).parameters for span in (1.0, 10.0))
    assert (ten.q, ten.r, ten.tau) == pytest.approx((one.q * 100, one.r * 100, one.tau * 10))
    with pytest.raises(ValueError, match="above nought"):
        starting_values(Scale.LINEAR, Family.OTHER, 0.0)


@cache
def unseen_fleet() -> list[tuple[FloatArray, dict[str, FloatArray]]]:
    rng = np.random.default_rng(99)
    return [sampled(rng) for _ in range(80)]


def held(times: FloatArray, y: FloatArray, parameters: LevelParameters) -> list[bool]:
    """Whether each later sample of a series fell into its 80 % range."""
    run = run_filter(times, y, parameters)
    half = stdtrit(5, 0.9) * np.sqrt(run.predicted_variance[0, 1:])
    return [bool(ok) for ok in np.abs(y[1:] - run.predicted_mean[0, 1:]) <= half]


@pytest.mark.parametrize("name", ["counts", "water", "viscosity", "acid_number", "metals"])
def test_four_in_five_samples_fall_into_the_range_of_a_fleet_fitted_on_others(name: str) -> None:
    inside = [ok for times, values in unseen_fleet() for ok in held(times, values[name], derived()[name])]
    assert np.mean(inside) == pytest.approx(0.80, abs=0.06)
