"""Theil-Sen and Mann-Kendall against published figures and a reference library."""

import csv
from pathlib import Path

import numpy as np
import pymannkendall
import pytest
from hypothesis import given
from hypothesis import strategies as st

from samples.trends.slope import TrendVerdict, doubling_months, mann_kendall, theil_sen, trend
from tests.trends.series import nile

# NIST StRD, Norris: certified intercept -0.262323073774029 and slope 1.00211681802045.
NORRIS = Path(__file__).parent / "data" / "nist_strd_norris.csv"


def norris() -> tuple[list[float], list[float]]:
    with NORRIS.open(newline="") as file:
        rows = list(csv.DictReader(file))
    return [float(r["x"]) for r in rows], [float(r["y"]) for r in rows]


def test_the_copy_of_norris_is_the_certified_one() -> None:
    x, y = norris()
    slope, intercept = np.polyfit(x, y, 1)
    assert slope == pytest.approx(1.00211681802045, rel=1e-12)
    assert intercept == pytest.approx(-0.262323073774029, rel=1e-10)


def test_theil_sen_on_norris_holds_the_certified_slope() -> None:
    found = theil_sen(*norris())
    assert found.slope == pytest.approx(1.00211681802045, rel=1e-3)
    assert found.low < 1.00211681802045 < found.high


def test_theil_sen_on_the_nile_series() -> None:
    # scipy.stats.theilslopes, 95 %: -2.6 (-3.62791 to -1.42857).
    found = theil_sen(np.arange(100.0), nile(), 0.95)
    assert (found.slope, found.low, found.high) == pytest.approx((-2.6, -3.62791, -1.42857), abs=5e-6)


def test_mann_kendall_on_the_nile_series() -> None:
    # pymannkendall original_test: S -1387, var(S) 112728.33, z -4.12807, p 3.6583e-5.
    found = mann_kendall(nile())
    assert found.s == -1387
    assert found.variance == pytest.approx(112728.33, abs=0.005)
    assert found.z == pytest.approx(-4.12807, abs=5e-6)
    assert found.p == pytest.approx(3.6583e-5, rel=1e-4)


@given(st.lists(st.integers(0, 12), min_size=3, max_size=30))
def test_mann_kendall_agrees_with_the_reference_library_ties_and_all(values: list[int]) -> None:
    reference = pymannkendall.original_test(values)
    found = mann_kendall(values)
    assert found.s == reference.s
    assert found.variance == pytest.approx(reference.var_s, rel=1e-12)
    if reference.var_s > 0:
        assert (found.z, found.p) == pytest.approx((reference.z, reference.p), abs=1e-9)


def test_values_that_never_change_show_no_trend() -> None:
    found = mann_kendall([3.0, 3.0, 3.0, 3.0])
    assert (found.s, found.z, found.p) == (0, 0.0, 1.0)
    assert trend([0, 1, 2, 3], [3.0, 3.0, 3.0, 3.0]).verdict is TrendVerdict.NO_TREND


@pytest.mark.parametrize(
    ("y", "verdict"),
    [
        ([1.0, 2.0, 3.0, 4.0], TrendVerdict.RISING),
        ([4.0, 3.0, 2.0, 1.0], TrendVerdict.FALLING),
        ([1.0, 3.0, 2.0, 4.0], TrendVerdict.NO_TREND),
        ([1.0, 2.0, 3.0], TrendVerdict.TOO_FEW),
    ],
)
def test_a_verdict_needs_four_samples_and_more_than_chance(y: list[float], verdict: TrendVerdict) -> None:
    found = trend(np.arange(float(len(y))), y)
    assert found.verdict is verdict
    assert (found.slope is None) == (verdict is TrendVerdict.TOO_FEW)


def test_four_samples_of_one_moment_have_no_slope() -> None:
    assert trend([2.0] * 4, [1.0, 2.0, 3.0, 4.0]).verdict is TrendVerdict.TOO_FEW
    with pytest.raises(ValueError, match="two different times"):
        theil_sen([2.0, 2.0], [1.0, 2.0])


def test_a_quarter_code_a_month_doubles_in_four_months() -> None:
    assert doubling_months(0.25) == 4.0
    assert doubling_months(-0.5) == -2.0
    assert doubling_months(0.0) is None
