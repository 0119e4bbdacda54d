"""Figures as the lines that measurands are judged by."""

import pytest

from fleet.models import Limit
from samples.lines import code_number, line_of
from samples.trends.scales import Scale, ScaleSpec
from samples.trends.standing import Line

COUNT, PERCENT = ScaleSpec(Scale.COUNT), ScaleSpec(Scale.PERCENT, baseline=46.0)


@pytest.mark.parametrize(("key", "high"), [("p4", 10000.0), ("p6", 2500.0), ("p14", 320.0), ("p15m", 320.0)])
def test_a_code_number_stands_for_the_upper_bound_of_its_row(key: str, high: float) -> None:
    # ISO 4406 Table 1: 20, 18 and 15 end at 10 000, 2 500 and 320 particles per mL.
    assert line_of(Limit(code="20/18/15"), key, COUNT) == Line(high=high)


def test_a_dash_leaves_a_size_out() -> None:
    assert line_of(Limit(code="-/18/15"), "p4", COUNT) == Line()
    assert code_number(Limit(code="-/18/15"), "p4") is None


def test_percent_figures_are_taken_as_they_are_on_the_percent_scale() -> None:
    assert line_of(Limit(low=-10, high=10, basis="percent"), "viscosity_40", PERCENT) == Line(high=10, low=-10)


def test_an_absolute_viscosity_becomes_a_change_from_the_new_oil() -> None:
    # ISO 3448 grade 46: 41.4 to 50.6 mm²/s is 10 % to either side.
    line = line_of(Limit(low=41.4, high=50.6), "viscosity_40", PERCENT)
    assert (line.low, line.high) == pytest.approx((-10.0, 10.0))


def test_a_change_over_new_adds_to_the_baseline() -> None:
    spec = ScaleSpec(Scale.LINEAR, baseline=0.3)
    assert line_of(Limit(high=0.5, basis="change"), "acid_number", spec).high == pytest.approx(0.8)


def test_without_the_new_oil_a_change_gives_no_line() -> None:
    assert line_of(Limit(high=0.5, basis="change"), "acid_number", ScaleSpec(Scale.LINEAR)) == Line()
