"""Every kind of result on its scale, and back."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from samples.coding.iso4406 import code_scale
from samples.trends.scales import (
    CODE_VARIANCE,
    Scale,
    ScaleSpec,
    figure_to_y,
    from_scale,
    observe,
    rounding_variance,
    to_scale,
    value_to_figure,
    y_to_figure,
)

COUNT = ScaleSpec(Scale.COUNT)
WATER = ScaleSpec(Scale.LOG, reporting_limit=20.0)
VISCOSITY = ScaleSpec(Scale.PERCENT, baseline=46.0)
ACID = ScaleSpec(Scale.LINEAR)
NAN = np.nan

# Upper bounds per mL of scale numbers 2, 7, 15, 20 and 28, ISO 4406:2021 table 1: rounded powers of two.
BOUNDS = [(2, 0.04), (7, 1.3), (15, 320.0), (20, 10_000.0), (28, 2_500_000.0)]


@pytest.mark.parametrize(("number", "bound"), BOUNDS)
def test_one_code_is_one_step_of_the_count_scale(number: int, bound: float) -> None:
    assert to_scale(bound, COUNT) == pytest.approx(number, abs=0.11)


@given(st.floats(0, 1e7))
def test_the_count_scale_is_that_of_the_coding(per_ml: float) -> None:
    assert float(to_scale(per_ml, COUNT)) == pytest.approx(float(code_scale(per_ml)), abs=1e-12)


@pytest.mark.parametrize("spec", [COUNT, WATER, VISCOSITY, ACID])
@given(value=st.floats(0.1, 1e5))
def test_there_and_back_is_the_same_value(spec: ScaleSpec, value: float) -> None:
    assert float(from_scale(to_scale(value, spec), spec)) == pytest.approx(value, rel=1e-9, abs=1e-9)
    assert float(y_to_figure(figure_to_y(value, spec), spec)) == pytest.approx(value, rel=1e-9, abs=1e-9)


def test_water_is_followed_as_the_logarithm_with_half_the_reporting_limit() -> None:
    assert float(to_scale(54.0, WATER)) == 6.0
    assert float(from_scale(2.0, WATER)) == 0.0


def test_viscosity_is_followed_as_percent_change_of_the_fresh_charge() -> None:
    assert float(to_scale(50.6, VISCOSITY)) == pytest.approx(10.0)
    assert value_to_figure(41.4, VISCOSITY) == pytest.approx(-10.0)
    assert figure_to_y(-10.0, VISCOSITY) == -10.0
    with pytest.raises(ValueError, match="fresh charge"):
        to_scale(46.0, ScaleSpec(Scale.PERCENT))


@pytest.mark.parametrize(
    ("number", "low", "high"), [(15, 160.0, 320.0), (7, 0.64, 1.3), (20, 5_000.0, 10_000.0), (0, NAN, 0.01)]
)
def test_a_code_alone_stands_at_its_number_less_a_half(number: int, low: float, high: float) -> None:
    found = observe([NAN], [0.0 if number == 0 else low], [high], [""], COUNT)
    assert found.y[0] == number - 0.5
    assert found.extra_variance[0] == pytest.approx(CODE_VARIANCE)
    assert not found.bounded[0]


def test_a_count_is_exact_even_where_its_code_is_known_too() -> None:
    found = observe([200.0], [160.0], [320.0], [""], COUNT)
    assert found.y[0] == pytest.approx(np.log2(20_000))
    assert found.extra_variance[0] == 0.0


def test_bounds_stand_at_the_bound_and_are_marked() -> None:
    found = observe([NAN, NAN, 0.9, 10.0], [2.5e6, NAN, NAN, NAN], [NAN, 20.0, NAN, NAN], [">", "<", "≥", "<"], COUNT)
    assert found.bounded.tolist() == [True, True, True, True]
    assert found.y[0] == pytest.approx(np.log2(2.5e8))
    assert found.y[1] == pytest.approx(11.0)
    assert found.y[2] == pytest.approx(np.log2(90))
    assert found.extra_variance.tolist() == [0.0, 0.0, 0.0, 0.0]


def test_a_range_of_water_stands_at_its_middle_with_its_own_variance() -> None:
    found = observe([NAN], [22.0], [118.0], [""], WATER)
    assert found.y[0] == pytest.approx(6.0)
    assert found.extra_variance[0] == pytest.approx(4.0 / 12.0)


def test_near_the_reporting_limit_rounding_is_most_of_what_is_seen() -> None:
    metal = ScaleSpec(Scale.LOG, reporting_limit=1.0)
    assert rounding_variance(1.0, metal) > 0.07
    assert rounding_variance(100.0, metal) < 1e-4
    assert rounding_variance(100.0, ScaleSpec(Scale.COUNT)) == 0.0
