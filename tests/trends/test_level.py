"""The level-and-drift filter against the book, against a reference library and against itself."""

from math import inf

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import t as student
from statsmodels.tsa.statespace.structural import UnobservedComponents

from samples.trends.level import LevelParameters, LevelState, advance, log_t5, run_filter
from tests.trends.series import nile, ragged

# Durbin & Koopman, Time Series Analysis by State Space Methods (2nd ed. 2012), table 2.1: the Nile series.
BOOK = LevelParameters(q=1469.1, r=15099.0, tau=0.0, c=inf)
USUAL = LevelParameters(q=0.20, r=0.08, tau=0.05)


def test_the_nile_series_gives_the_level_of_the_book() -> None:
    run = run_filter(np.arange(100.0), nile(), BOOK)
    assert run.log_likelihood[0] == pytest.approx(-632.54563, abs=5e-6)
    assert run.state.a[0] == pytest.approx(798.3703, abs=5e-5)
    assert run.state.p11[0] == pytest.approx(4032.158, abs=5e-4)
    assert run.state.p11[0] + BOOK.q + BOOK.r == pytest.approx(20600.258, abs=5e-4)


@pytest.mark.parametrize(("r", "q"), [(15099.0, 1469.1), (15078.0, 1478.8), (12000.0, 3000.0)])
def test_the_nile_likelihood_is_that_of_the_reference_library(r: float, q: float) -> None:
    # Exactly diffuse start; the library's usual start with a variance of 1e6 gives -632.53776 at its highest.
    reference = UnobservedComponents(nile(), "llevel", use_exact_diffuse=True).smooth([r, q])
    run = run_filter(np.arange(100.0), nile(), LevelParameters(q, r, 0.0, inf))
    assert run.log_likelihood[0] == pytest.approx(reference.llf_obs[1:].sum(), rel=1e-10)


@pytest.mark.parametrize("seed", range(5))
def test_local_level_agrees_with_statsmodels(seed: int) -> None:
    rng = np.random.default_rng(seed)
    y = np.cumsum(rng.normal(0, 0.5, 40)) + rng.normal(0, 0.3, 40)
    q, r = rng.uniform(0.05, 0.5, 2)
    model = UnobservedComponents(y, "llevel", use_exact_diffuse=True)
    reference = model.smooth([r, q])
    run = run_filter(np.arange(40.0), y, LevelParameters(q, r, 0.0, inf))
    assert run.state.a[0] == pytest.approx(reference.filtered_state[0, -1], abs=1e-7)
    assert run.state.p11[0] == pytest.approx(reference.filtered_state_cov[0, 0, -1], abs=1e-7)
    assert run.predicted_mean[0, 1:] == pytest.approx(reference.forecasts[0, 1:], abs=1e-6)


@pytest.mark.parametrize("seed", range(5))
def test_without_wander_and_with_free_drift_it_is_a_straight_line(seed: int) -> None:
    rng = np.random.default_rng(seed)
    times = np.sort(rng.uniform(0, 30, 12))
    y = 4.0 + 0.3 * times + rng.normal(0, 0.5, 12)
    state = run_filter(times, y, LevelParameters(0.0, 0.25, 1e5, inf)).state
    slope, level = np.polyfit(times, y, 1)
    assert state.b[0] == pytest.approx(slope, abs=1e-6)
    assert state.a[0] == pytest.approx(level + slope * times[-1], abs=1e-6)


def test_many_series_at_once_are_the_same_as_one_at_a_time() -> None:
    rng = np.random.default_rng(7)
    times, y, mask = ragged(rng, 60, 18)
    extra = np.where(rng.random(y.shape) < 0.3, 1 / 12, 0.0)
    together = run_filter(times, y, USUAL, mask, extra)
    for i in np.flatnonzero(mask.any(axis=1)):
        keep = mask[i]
        alone = run_filter(times[i, keep], y[i, keep], USUAL, None, extra[i, keep])
        for name in ("a", "b", "p11", "p12", "p22", "at", "count"):
            assert getattr(together.state, name)[i] == getattr(alone.state, name)[0]
        assert together.predicted_mean[i, keep][1:] == pytest.approx(alone.predicted_mean[0, 1:], abs=0)
        assert together.log_likelihood_t5[i] == pytest.approx(alone.log_likelihood_t5[0], rel=1e-12)


def test_series_may_each_have_their_own_parameters() -> None:
    times, y, mask = ragged(np.random.default_rng(3), 2, 10)
    both = run_filter(
        times, y, LevelParameters(np.array([0.2, 0.01]), np.array([0.08, 0.3]), np.array([0.05, 0.0])), mask
    )
    second = run_filter(times[1], y[1], LevelParameters(0.01, 0.3, 0.0), mask[1])
    assert both.state.a[1] == second.state.a[0]


def test_a_series_without_samples_has_no_level() -> None:
    run = run_filter(np.zeros((1, 3)), np.full((1, 3), np.nan), USUAL)
    assert np.isnan(run.state.a[0])
    assert run.state.count[0] == 0
    assert run.log_likelihood[0] == 0.0


def test_one_sample_is_the_level_with_the_prior_spread_of_drifts() -> None:
    state = run_filter([3.0], [11.0], USUAL).state
    assert (state.a[0], state.b[0], state.p11[0], state.p12[0]) == (11.0, 0.0, 0.08, 0.0)
    assert state.p22[0] == pytest.approx(0.05**2)


@given(st.floats(-30, 30))
def test_the_level_moves_towards_the_sample_but_never_past_it(jump: float) -> None:
    before = run_filter([0.0, 1.0, 2.0], [10.0, 10.1, 9.9], USUAL)
    after = run_filter([0.0, 1.0, 2.0, 3.0], [10.0, 10.1, 9.9, 10.0 + jump], USUAL)
    predicted, level = after.predicted_mean[0, 3], after.state.a[0]
    assert min(predicted, 10.0 + jump) - 1e-12 <= level <= max(predicted, 10.0 + jump) + 1e-12
    assert 0.0 < after.state.p11[0] <= before.state.p11[0] + 0.2 + 0.01


@given(st.floats(3, 40))
def test_a_sample_far_off_moves_the_level_less_than_it_would_unguarded(jump: float) -> None:
    times, y = [0.0, 1.0, 2.0, 3.0], [10.0, 10.1, 9.9, 10.0 + jump]
    guarded = run_filter(times, y, USUAL).state.a[0]
    plain = run_filter(times, y, LevelParameters(0.20, 0.08, 0.05, inf)).state.a[0]
    assert 10.0 - 0.2 < guarded < plain


def test_far_off_samples_that_agree_are_believed_in_the_end() -> None:
    y = [10.0, 10.1, 9.9] + [13.0] * 5
    state = run_filter(np.arange(8.0), y, USUAL).state
    assert state.a[0] == pytest.approx(13.0, abs=0.2)


def test_samples_within_the_guard_are_used_as_they_are() -> None:
    y = [10.0, 10.2, 9.9, 10.4]
    guarded = run_filter(np.arange(4.0), y, USUAL)
    plain = run_filter(np.arange(4.0), y, LevelParameters(0.20, 0.08, 0.05, inf))
    assert guarded.state.a[0] == plain.state.a[0]


def test_a_coded_value_weighs_less_than_a_counted_one() -> None:
    coded = run_filter([0.0, 1.0], [10.0, 11.0], USUAL, None, [0.0, 1 / 12]).state
    counted = run_filter([0.0, 1.0], [10.0, 11.0], USUAL).state
    assert coded.a[0] < counted.a[0]
    assert coded.p11[0] > counted.p11[0]


def test_time_widens_what_is_known() -> None:
    state = run_filter([0.0, 1.0], [10.0, 11.0], USUAL).state
    later: LevelState = advance(state, 6.0, USUAL)
    assert later.a[0] == pytest.approx(state.a[0] + 6.0 * state.b[0])
    assert later.p11[0] > state.p11[0] + 6.0 * 0.20
    assert later.at[0] == 7.0


def test_the_student_density_is_that_of_scipy() -> None:
    error = np.linspace(-6, 6, 13)
    assert log_t5(error, 0.49) == pytest.approx(student.logpdf(error, 5, scale=0.7), rel=1e-12)


@pytest.mark.parametrize(("q", "r", "tau", "c"), [(-1, 1, 0, 2), (0, 0, 0, 2), (0, 1, -1, 2), (0, 1, 0, 0)])
def test_impossible_parameters_are_refused(q: float, r: float, tau: float, c: float) -> None:
    with pytest.raises(ValueError):
        LevelParameters(q, r, tau, c)


def test_shapes_that_differ_and_samples_without_a_time_are_refused() -> None:
    with pytest.raises(ValueError, match="one shape"):
        run_filter([0.0, 1.0], [1.0], USUAL)
    with pytest.raises(ValueError, match="a time and a value"):
        run_filter([0.0, np.nan], [1.0, 2.0], USUAL)
