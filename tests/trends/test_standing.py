"""Standings of exact, coded and bounded values, and the distance to the limit."""

from math import inf, nan

import pytest

from samples.trends.forecast import Side
from samples.trends.headroom import headroom, nearest_side, target_mark
from samples.trends.scales import Scale, ScaleSpec
from samples.trends.standing import Known, Line, Passed, Standing, known_range, passed, stand, widen, worst

COUNT = ScaleSpec(Scale.COUNT)
# ISO 4406:2021 table 1: number 15 is up to and including 320 per mL, 17 up to 1300, 13 up to 80.
TARGET, LIMIT = Line(high=320.0), Line(high=1300.0)


@pytest.mark.parametrize(
    ("per_ml", "standing"),
    [
        (80.0, Standing.WITHIN),
        (320.0, Standing.WITHIN),
        (320.01, Standing.OVER_TARGET),
        (1300.0, Standing.OVER_TARGET),
        (1300.5, Standing.PAST_LIMIT),
    ],
)
def test_a_count_up_to_the_bound_still_meets_the_number(per_ml: float, standing: Standing) -> None:
    assert stand(known_range(per_ml, nan, nan, "", COUNT), TARGET, LIMIT) is standing


@pytest.mark.parametrize(
    ("low", "high", "standing"),
    [
        (160.0, 320.0, Standing.WITHIN),
        (320.0, 640.0, Standing.OVER_TARGET),
        (640.0, 1300.0, Standing.OVER_TARGET),
        (1300.0, 2500.0, Standing.PAST_LIMIT),
        (160.0, 640.0, Standing.CANNOT_TELL),
        (640.0, 2500.0, Standing.OVER_TARGET),
    ],
)
def test_a_code_number_above_the_targets_number_is_over(low: float, high: float, standing: Standing) -> None:
    assert stand(known_range(nan, low, high, "", COUNT), TARGET, LIMIT) is standing


@pytest.mark.parametrize(
    ("qualifier", "value", "standing"),
    [
        ("≥", 100.0, Standing.CANNOT_TELL),
        ("≥", 400.0, Standing.OVER_TARGET),
        (">", 1300.0, Standing.PAST_LIMIT),
        ("<", 320.0, Standing.WITHIN),
        ("<", 400.0, Standing.CANNOT_TELL),
    ],
)
def test_a_bound_tells_only_what_it_bounds(qualifier: str, value: float, standing: Standing) -> None:
    assert stand(known_range(value, nan, nan, qualifier, COUNT), TARGET, LIMIT) is standing


def test_a_doubtful_code_is_open_above() -> None:
    assert known_range(nan, 80.0, 160.0, "≥", COUNT) == Known(80.0, inf, above_low=True)


def test_noise_makes_a_value_near_the_line_untold() -> None:
    near = known_range(300.0, nan, nan, "", COUNT)
    assert stand(widen(near, 0.3, COUNT), TARGET, LIMIT) is Standing.CANNOT_TELL
    assert stand(widen(near, 0.05, COUNT), TARGET, LIMIT) is Standing.WITHIN
    assert widen(near, 0.0, COUNT) == near


def test_two_sided_limits_are_judged_on_both() -> None:
    viscosity, line = ScaleSpec(Scale.PERCENT, baseline=46.0), Line(high=10.0, low=-10.0)
    assert passed(known_range(41.0, nan, nan, "", viscosity), line) is Passed.YES
    assert passed(known_range(46.5, nan, nan, "", viscosity), line) is Passed.NO
    assert passed(known_range(51.0, nan, nan, "", viscosity), line) is Passed.YES


def test_without_a_target_the_limit_is_judged_and_without_both_nothing() -> None:
    known = known_range(400.0, nan, nan, "", COUNT)
    assert stand(known, Line(), LIMIT) is Standing.WITHIN
    assert stand(known, Line(), Line()) is Standing.CANNOT_TELL


def test_the_worst_measurand_stands_for_the_reservoir() -> None:
    assert worst([Standing.WITHIN, Standing.PAST_LIMIT, Standing.CANNOT_TELL]) is Standing.PAST_LIMIT
    assert worst([Standing.NO_CURRENT_SAMPLE, Standing.WITHIN]) is Standing.WITHIN
    assert worst([]) is Standing.NO_CURRENT_SAMPLE


def test_headroom_of_counts_is_in_code_steps() -> None:
    assert headroom(14.0, Line(high=320.0), COUNT) == pytest.approx(0.966, abs=5e-4)
    assert headroom(17.0, Line(high=320.0), COUNT) == pytest.approx(-2.034, abs=5e-4)
    assert target_mark(TARGET, LIMIT, Side.UPPER, COUNT) == pytest.approx(2.022, abs=5e-4)
    assert headroom(14.0, Line(), COUNT) is None


def test_headroom_of_other_measurands_is_a_share_of_the_span() -> None:
    acid = ScaleSpec(Scale.LINEAR, baseline=0.5)
    assert headroom(0.75, Line(high=1.5), acid) == pytest.approx(75.0)
    assert target_mark(Line(high=1.0), Line(high=1.5), Side.UPPER, acid) == pytest.approx(50.0)
    life = ScaleSpec(Scale.LINEAR, baseline=100.0)
    assert headroom(40.0, Line(low=25.0), life) == pytest.approx(20.0)


def test_the_nearer_side_of_a_two_sided_limit_counts() -> None:
    viscosity, line = ScaleSpec(Scale.PERCENT, baseline=46.0), Line(high=10.0, low=-10.0)
    assert headroom(-6.0, line, viscosity) == pytest.approx(40.0)
    assert nearest_side(-6.0, line, viscosity) is Side.LOWER
    assert nearest_side(6.0, line, viscosity) is Side.UPPER
    assert nearest_side(6.0, Line(), viscosity) is None
