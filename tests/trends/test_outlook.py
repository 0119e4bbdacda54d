"""One measurand's outlook from its stretch: the answer, and every reason for not answering."""

from dataclasses import replace

import numpy as np
import pytest

from samples.trends.arrays import DAYS_PER_MONTH
from samples.trends.forecast import Side
from samples.trends.outlook import OutlookNumbers, OutlookQuestion, Refusal, RunwayState, StretchResults, build
from samples.trends.scales import Scale, ScaleSpec
from samples.trends.slope import TrendVerdict
from samples.trends.standing import Line, Standing
from samples.trends.starting import STARTING_NAME, starting_values
from samples.trends.stretch import Family

# ISO 4406:2021 table 1: number 16 is up to 640 per mL, 18 up to 2500.
SPEC = ScaleSpec(Scale.COUNT)
QUESTION = OutlookQuestion(
    spec=SPEC,
    target=Line(high=640.0),
    limit=Line(high=2500.0),
    as_of_day=310.0,
    parameters=starting_values(Scale.COUNT, Family.DIRT).parameters,
    parameters_name=STARTING_NAME,
    interval_days=30.0,
    next_day=330.0,
)
CLIMBING = [100.0, 130.0, 150.0, 210.0, 260.0, 330.0, 420.0, 540.0, 700.0, 1000.0, 1400.0]


def results(values: list[float], **changes: object) -> StretchResults:
    n = len(values)
    nothing = np.full(n, np.nan)
    plain = StretchResults(
        30.0 * np.arange(float(n)),
        np.array(values, dtype=np.float64),
        nothing,
        nothing,
        ("",) * n,
        np.zeros(n, np.bool_),
    )
    return replace(plain, **changes)  # type: ignore[arg-type]


def outlook(values: list[float], question: OutlookQuestion = QUESTION, **changes: object) -> OutlookNumbers:
    return build(results(values, **changes), question)


def test_a_climbing_count_has_a_date_and_a_chance() -> None:
    found = outlook(CLIMBING)
    assert found.standing is Standing.OVER_TARGET
    assert found.runway_state is RunwayState.FORECAST
    assert found.trend.verdict is TrendVerdict.RISING
    assert found.early is not None
    assert found.early_day == pytest.approx(310.0 + found.early * DAYS_PER_MONTH)
    assert found.chance is not None
    assert 0.05 < found.chance < 0.5
    assert found.parameters_name == STARTING_NAME


def test_headroom_is_counted_in_code_steps_from_the_latest_value() -> None:
    found = outlook(CLIMBING)
    assert found.headroom == pytest.approx(np.log2(2500.0 / 1400.0))
    assert found.target_mark == pytest.approx(np.log2(2500.0 / 640.0))
    assert found.latest_y == pytest.approx(np.log2(140_000.0))
    assert found.side is Side.UPPER


def test_the_slope_is_told_as_a_doubling_time() -> None:
    found = outlook(CLIMBING)
    assert found.trend.slope is not None
    assert found.doubling_months == pytest.approx(1.0 / found.trend.slope.slope)
    assert found.doubling_months == pytest.approx(2.7, abs=0.3)


def test_the_range_of_the_next_sample_lies_about_the_level() -> None:
    found = outlook(CLIMBING)
    assert found.band is not None
    assert found.band_headroom is not None
    assert found.level is not None
    assert found.band[0] < found.level < found.band[1]
    assert found.band_headroom[0] == pytest.approx(np.log2(250_000.0) - found.band[1])


def test_a_quiet_count_is_beyond_the_horizon() -> None:
    found = outlook([20.0, 21.0, 19.0, 20.5] * 3, replace(QUESTION, as_of_day=340.0, next_day=350.0))
    assert found.runway_state is RunwayState.BEYOND_HORIZON
    assert (found.early, found.median, found.late, found.early_day) == (None, None, None, None)
    assert found.standing is Standing.WITHIN


def test_past_the_limit_tells_since_when() -> None:
    found = outlook([*CLIMBING[:9], 2600.0, 2900.0])
    assert found.standing is Standing.PAST_LIMIT
    assert found.runway_state is RunwayState.PAST
    assert found.since_day == 270.0
    assert found.early is None
    assert found.headroom is not None
    assert found.headroom < 0


def test_a_run_past_the_limit_begins_after_the_last_good_sample() -> None:
    assert outlook([2600.0, 2700.0, 900.0, 2600.0], replace(QUESTION, as_of_day=100.0)).since_day == 90.0
    assert outlook([2600.0, 2700.0], replace(QUESTION, as_of_day=40.0)).since_day == 0.0


def test_the_runway_shrinks_as_days_go_by() -> None:
    today = outlook(CLIMBING, replace(QUESTION, as_of_day=300.0))
    later = outlook(CLIMBING, replace(QUESTION, as_of_day=325.0))
    assert today.early is not None
    assert later.early is not None
    assert later.early < today.early
    assert later.level == today.level


@pytest.mark.parametrize(
    ("question", "changes", "refusal", "standing"),
    [
        (replace(QUESTION, as_of_day=361.0), {}, Refusal.TOO_OLD, Standing.NO_CURRENT_SAMPLE),
        (QUESTION, {"in_doubt": np.arange(11) == 10}, Refusal.IN_DOUBT, Standing.OVER_TARGET),
        (replace(QUESTION, limit=Line()), {}, Refusal.NO_LIMIT, Standing.OVER_TARGET),
        (replace(QUESTION, units_known=False), {}, Refusal.UNKNOWN_UNITS, Standing.CANNOT_TELL),
    ],
)
def test_no_date_is_given_without_ground(
    question: OutlookQuestion, changes: dict[str, object], refusal: Refusal, standing: Standing
) -> None:
    found = outlook(CLIMBING, question, **changes)
    assert (found.refusal, found.standing, found.runway_state) == (refusal, standing, RunwayState.CANNOT_SAY)
    assert found.refusal_text.endswith(".")
    assert (found.early, found.median, found.late) == (None, None, None)


def test_exactly_twice_the_interval_is_still_current() -> None:
    assert outlook(CLIMBING, replace(QUESTION, as_of_day=360.0)).refusal is None


def test_no_sample_says_so() -> None:
    found = outlook([])
    assert (found.refusal, found.standing, found.n) == (Refusal.NO_SAMPLE, Standing.NO_CURRENT_SAMPLE, 0)


def test_a_result_in_doubt_leaves_no_trace_in_the_level() -> None:
    doubtful = results([*CLIMBING[:5], 9000.0, *CLIMBING[5:]], in_doubt=np.arange(12) == 5)
    without = results(CLIMBING, days=np.delete(doubtful.days, 5))
    question = replace(QUESTION, as_of_day=340.0, next_day=360.0)
    assert build(doubtful, question) == build(without, question)


def test_only_results_in_doubt_tell_nothing() -> None:
    found = outlook([500.0], replace(QUESTION, as_of_day=5.0), in_doubt=np.array([True]))
    assert (found.refusal, found.standing, found.level) == (Refusal.IN_DOUBT, Standing.CANNOT_TELL, None)


def test_one_sample_gives_a_range_no_narrower_than_its_prior() -> None:
    found = outlook([500.0], replace(QUESTION, as_of_day=0.0, next_day=30.0))
    assert found.p11 == pytest.approx(0.08)
    assert found.p22 == pytest.approx(0.05**2)
    assert found.band is not None
    assert found.band[1] - found.band[0] > 2 * 1.4 * np.sqrt(0.08 + 0.08 + 0.2 * 0.98)
    assert found.trend.verdict is TrendVerdict.TOO_FEW


def test_codes_alone_make_an_outlook_too() -> None:
    lows, highs = np.array([160.0, 320.0, 320.0, 640.0]), np.array([320.0, 640.0, 640.0, 1300.0])
    found = outlook([np.nan] * 4, replace(QUESTION, as_of_day=100.0), lows=lows, highs=highs)
    assert found.standing is Standing.OVER_TARGET
    assert found.latest_y == 16.5
    assert not found.bounded


def test_a_bound_is_marked() -> None:
    found = outlook([500.0, 500.0], replace(QUESTION, as_of_day=40.0), qualifiers=("", "≥"))
    assert found.bounded
    assert found.standing is Standing.CANNOT_TELL


def test_without_a_plan_the_next_sample_is_one_interval_on_and_never_in_the_past() -> None:
    assert outlook(CLIMBING, replace(QUESTION, next_day=None)).chance_day == 330.0
    assert outlook(CLIMBING, replace(QUESTION, as_of_day=345.0, next_day=330.0)).chance_day == 345.0
    unplanned = outlook(CLIMBING, replace(QUESTION, next_day=None, interval_days=None, as_of_day=5000.0))
    assert (unplanned.chance, unplanned.band, unplanned.refusal) == (None, None, None)


def test_a_two_sided_limit_reports_the_side_that_is_nearer() -> None:
    falling = [46.0 - 0.35 * i for i in range(11)]
    question = replace(
        QUESTION,
        spec=ScaleSpec(Scale.PERCENT, baseline=46.0),
        target=Line(high=5.0, low=-5.0),
        limit=Line(high=10.0, low=-10.0),
        parameters=starting_values(Scale.PERCENT, Family.AGEING).parameters,
    )
    found = outlook(falling, question)
    assert (found.side, found.standing) == (Side.LOWER, Standing.OVER_TARGET)
    assert found.headroom == pytest.approx(100.0 * (10.0 - 3.5 / 0.46) / 10.0)
    assert found.median is not None
    assert found.median < 6.0
    assert found.doubling_months is None
