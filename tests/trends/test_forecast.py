"""Ranges, runways and chances: against scipy's Student law and by their own logic."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import t as student

from samples.trends.arrays import DAYS_PER_MONTH
from samples.trends.forecast import (
    Law,
    Runway,
    Side,
    band,
    chance_outside,
    chance_past,
    chance_words,
    fan,
    forecast_at,
    nearer,
    runway,
    runway_grid,
)
from samples.trends.level import LevelParameters, LevelState, run_filter

USUAL = LevelParameters(q=0.20, r=0.08, tau=0.05)
RISING = run_filter(np.arange(0.0, 12.0), 12.0 + 0.2 * np.arange(12.0), LevelParameters(0.01, 0.05, 0.3)).state


def still(level: float = 12.0) -> LevelState:
    return run_filter([0.0], [level], USUAL).state


def test_the_forecast_follows_its_formula() -> None:
    law = forecast_at(RISING, 3.0, USUAL)
    assert law.mean[0] == pytest.approx(RISING.a[0] + 3.0 * RISING.b[0])
    expected = RISING.p11[0] + 6.0 * RISING.p12[0] + 9.0 * RISING.p22[0] + 0.6
    assert law.variance[0] == pytest.approx(expected)
    assert forecast_at(RISING, 3.0, USUAL, sample=True).variance[0] == pytest.approx(expected + 0.08)


@pytest.mark.parametrize("coverage", [0.5, 0.8, 0.95])
def test_the_range_holds_what_it_promises(coverage: float) -> None:
    low, high = band(Law(np.array([3.0]), np.array([0.25])), coverage)
    assert (low[0], high[0]) == pytest.approx(student.interval(coverage, 5, loc=3.0, scale=0.5))


@given(st.floats(8, 18), st.floats(0, 24))
def test_the_chance_is_that_of_the_student_law(limit: float, months: float) -> None:
    law = forecast_at(RISING, months, USUAL, sample=True)
    expected = student.sf(limit, 5, loc=law.mean[0], scale=np.sqrt(law.variance[0]))
    upper = chance_past(RISING, limit, months, Side.UPPER, USUAL)[0]
    assert upper == pytest.approx(expected, abs=1e-12)
    assert upper + chance_past(RISING, limit, months, Side.LOWER, USUAL)[0] == pytest.approx(1.0)


def test_two_sides_add_up() -> None:
    both = chance_outside(still(), 11.0, 13.0, 2.0, USUAL)[0]
    assert both == pytest.approx(2.0 * chance_past(still(), 13.0, 2.0, Side.UPPER, USUAL)[0])


@given(st.floats(12.5, 20), st.floats(0.0, 3.0))
def test_a_farther_limit_is_never_passed_sooner(limit: float, farther: float) -> None:
    near, far = (runway(RISING, line, Side.UPPER, USUAL) for line in (limit, limit + farther))
    for a, b in zip((near.early, near.median, near.late), (far.early, far.median, far.late), strict=True):
        assert np.nan_to_num(a[0], nan=np.inf) <= np.nan_to_num(b[0], nan=np.inf)


@given(st.floats(10, 20))
def test_early_comes_before_median_before_late(limit: float) -> None:
    found = runway(RISING, limit, Side.UPPER, USUAL)
    ends = [np.nan_to_num(end[0], nan=np.inf) for end in (found.early, found.median, found.late)]
    assert ends == sorted(ends)


@pytest.mark.parametrize(("end", "chance"), [("early", 0.10), ("median", 0.50), ("late", 0.90)])
def test_each_end_is_the_first_moment_of_its_chance(end: str, chance: float) -> None:
    parameters = LevelParameters(0.01, 0.05, 0.3)
    months = float(getattr(runway(RISING, 15.0, Side.UPPER, parameters), end)[0])

    def at(h: float) -> float:
        law = forecast_at(RISING, h, parameters)
        return float(student.sf(15.0, 5, loc=law.mean[0], scale=np.sqrt(law.variance[0])))

    assert at(months - 5 / DAYS_PER_MONTH) < chance <= at(months)


def test_a_level_far_below_is_beyond_the_horizon() -> None:
    found = runway(still(5.0), 20.0, Side.UPPER, USUAL)
    assert np.isnan(found.early[0])
    assert not found.past[0]


def test_a_level_above_is_past_already() -> None:
    found = runway(still(15.0), 14.0, Side.UPPER, USUAL)
    assert found.past[0]
    assert found.median[0] == 0.0


def test_a_lower_limit_is_the_upper_one_seen_in_a_mirror() -> None:
    mirrored = run_filter(np.arange(0.0, 12.0), -(12.0 + 0.2 * np.arange(12.0)), LevelParameters(0.01, 0.05, 0.3)).state
    up, down = runway(RISING, 15.0, Side.UPPER, USUAL), runway(mirrored, -15.0, Side.LOWER, USUAL)
    assert (up.early[0], up.median[0]) == (down.early[0], down.median[0])


def test_runways_of_many_series_are_those_of_each() -> None:
    parameters = LevelParameters(0.01, 0.05, 0.3)
    y = np.array([12.0, 13.0, 14.0])[:, None] + 0.2 * np.arange(12.0)
    state = run_filter(np.tile(np.arange(12.0), (3, 1)), y, parameters).state
    together = runway(state, np.array([15.0, 17.0, 30.0]), Side.UPPER, parameters)
    for i, limit in enumerate((15.0, 17.0, 30.0)):
        alone = runway(run_filter(np.arange(12.0), y[i], parameters).state, limit, Side.UPPER, parameters)
        assert np.array_equal([together.early[i], together.late[i]], [alone.early[0], alone.late[0]], equal_nan=True)


def test_the_nearer_side_is_the_one_that_ends_first() -> None:
    def ending(*ends: float) -> Runway:
        early, median, late = (np.array([end]) for end in ends)
        return Runway(early, median, late, np.array([False]))

    soon, late = ending(1.0, 3.0, np.nan), ending(2.0, 2.5, 4.0)
    assert nearer(soon, late)[1][0] == 1
    found, side = nearer(late, soon)
    assert (side[0], found.early[0]) == (-1, 1.0)


def test_the_grid_goes_by_five_days_to_the_horizon() -> None:
    grid = runway_grid()
    assert grid[0] == 0.0
    assert grid[1] * DAYS_PER_MONTH == pytest.approx(5.0)
    assert 24.0 - 5.0 / DAYS_PER_MONTH < grid[-1] <= 24.0


def test_the_fan_opens_from_today() -> None:
    drawn = fan(RISING, USUAL, horizon_months=6.0)
    width = drawn.high - drawn.low
    assert drawn.months[0] == 0.0
    assert drawn.median[0] == pytest.approx(RISING.a[0])
    assert np.all(np.diff(width) > 0)


@pytest.mark.parametrize(
    ("chance", "words"),
    [(0.0, "under 5 %"), (0.049, "under 5 %"), (0.05, "5 %"), (0.123, "12 %"), (0.95, "95 %"), (0.951, "over 95 %")],
)
def test_a_chance_is_never_said_too_surely(chance: float, words: str) -> None:
    assert chance_words(chance) == words
