"""The invented mill looks like a plant, and each of its stories can be found in its samples."""

from collections import Counter
from datetime import UTC, datetime, timedelta
from functools import cache

import numpy as np
import pytest

from fleet.codes import ScaleNumber
from samples.coding.iso4406 import bounds_per_ml, scale_number
from samples.demo.mill import CODES_ONLY_LABORATORY, LABORATORIES, PlannedReservoir, reservoirs
from samples.demo.plan import History, fernhollow, history
from samples.demo.stories import story_of
from samples.trends.outlook import OutlookNumbers, OutlookQuestion, RunwayState, StretchResults, build
from samples.trends.scales import Scale, ScaleSpec
from samples.trends.slope import TrendVerdict
from samples.trends.standing import Line, Standing, worst
from samples.trends.starting import starting_values
from samples.trends.stretch import EventKind, EventMark, Family, latest, split

AS_OF = datetime(2026, 3, 2, 6, 30, tzinfo=UTC)
OTHERS = {
    "water": (Family.WATER, ScaleSpec(Scale.LOG, reporting_limit=20.0)),
    "acid_number": (Family.AGEING, ScaleSpec(Scale.LINEAR)),
    "fe": (Family.WEAR, ScaleSpec(Scale.LOG, reporting_limit=1.0)),
}


@cache
def mill() -> dict[str, History]:
    return {f"{h.reservoir.machine} {h.reservoir.name}": h for h in fernhollow(AS_OF)}


def day(moment: datetime) -> float:
    return moment.timestamp() / 86_400.0


def bound(number: int) -> Line:
    return Line(high=bounds_per_ml(ScaleNumber(number))[1])


def stretch(found: History, family: Family) -> list[int]:
    days = [day(s.drawn_at) for s in found.samples]
    events = [EventMark(day(e.at), e.kind, e.litres) for e in found.events]
    current = latest(split(days, ["one"] * len(days), events, family, found.reservoir.volume_l), days)
    return [] if current is None else current.positions.tolist()


def results(found: History, positions: list[int], values: list[float]) -> StretchResults:
    n = len(positions)
    nothing = np.full(n, np.nan)
    lows, highs, exact = nothing.copy(), nothing.copy(), np.array(values, dtype=np.float64)
    if found.reservoir.codes_only and n:
        numbers = [scale_number(round(100 * v)) for v in values]
        lows, highs = (np.array([float(bounds_per_ml(x)[i] or np.nan) for x in numbers]) for i in (0, 1))
        exact = nothing
    days = np.array([day(found.samples[i].drawn_at) for i in positions])
    return StretchResults(days, exact, lows, highs, ("",) * n, np.zeros(n, np.bool_))


def question(planned: PlannedReservoir, family: Family, spec: ScaleSpec, target: Line, limit: Line) -> OutlookQuestion:
    start = starting_values(spec.scale, family)
    interval = float(planned.interval_days)
    return OutlookQuestion(spec, target, limit, day(AS_OF), start.parameters, start.name, interval_days=interval)


def count_outlooks(found: History) -> list[OutlookNumbers]:
    positions, planned = stretch(found, Family.DIRT), found.reservoir
    return [
        build(
            results(found, positions, [found.samples[i].counts[size] for i in positions]),
            question(
                planned, Family.DIRT, ScaleSpec(Scale.COUNT), bound(planned.target[size]), bound(planned.limit[size])
            ),
        )
        for size in range(3)
    ]


def other_outlook(found: History, name: str) -> OutlookNumbers:
    family, spec = OTHERS[name]
    positions, figures = stretch(found, family), found.reservoir.figures[name]
    samples = [found.samples[i] for i in positions]
    values = [s.metals[name] if name == "fe" else float(getattr(s, name)) for s in samples]
    asked = question(found.reservoir, family, spec, Line(figures.target_high), Line(figures.limit_high))
    exact = StretchResults(
        np.array([day(s.drawn_at) for s in samples]),
        np.array(values, dtype=np.float64),
        np.full(len(values), np.nan),
        np.full(len(values), np.nan),
        ("",) * len(values),
        np.zeros(len(values), np.bool_),
    )
    return build(exact, asked)


@cache
def standings() -> dict[str, Standing]:
    return {
        name: worst(
            [o.standing for o in count_outlooks(found)] + [other_outlook(found, other).standing for other in OTHERS]
        )
        for name, found in mill().items()
    }


def tightest(name: str) -> OutlookNumbers:
    return min(count_outlooks(mill()[name]), key=lambda o: np.inf if o.headroom is None else o.headroom)


def test_the_same_seed_gives_the_same_mill_and_another_seed_another() -> None:
    planned = reservoirs()[3]
    assert history(planned, AS_OF) == history(planned, AS_OF)
    assert history(planned, AS_OF, seed=1) != history(planned, AS_OF, seed=2)


def test_the_mill_moves_with_the_day_it_is_made_for() -> None:
    planned = reservoirs()[0]
    now, later = history(planned, AS_OF), history(planned, AS_OF + timedelta(days=100, hours=5))
    assert [s.counts for s in now.samples] == [s.counts for s in later.samples]
    assert later.samples[0].drawn_at - now.samples[0].drawn_at == timedelta(days=100)


def test_it_has_about_sixty_reservoirs_in_seven_areas_with_tags_of_their_own() -> None:
    planned = reservoirs()
    assert 55 <= len(planned) <= 65
    assert len({r.area for r in planned}) == 7
    assert len({r.tag for r in planned}) == len(planned)
    assert {r.criticality for r in planned} == {"A", "B", "C"}
    assert len({r.profile.kind for r in planned}) >= 6


def test_every_limit_is_one_or_two_codes_above_its_target() -> None:
    for planned in reservoirs():
        steps = {limit - target for target, limit in zip(planned.target, planned.limit, strict=True)}
        assert steps <= {1, 2}
        assert 30 <= planned.interval_days <= 120


def test_it_looks_like_a_real_plant() -> None:
    counted = Counter(standings().values())
    assert 0.65 <= counted[Standing.WITHIN] / len(mill()) <= 0.80
    assert 4 <= counted[Standing.OVER_TARGET] <= 12
    assert 3 <= counted[Standing.PAST_LIMIT] <= 5
    assert 2 <= counted[Standing.NO_CURRENT_SAMPLE] <= 4


def test_a_few_are_forecast_to_pass_their_limit_soon() -> None:
    soon = [
        name
        for name in mill()
        if standings()[name] is Standing.OVER_TARGET
        and any(o.early is not None and o.early < 1.5 for o in count_outlooks(mill()[name]))
    ]
    assert {"Chipper lube sump", "Board stacker hydraulic pack", "Edge trimmer servo pack"} <= set(soon)
    assert len(soon) <= 6


@pytest.mark.parametrize("name", ["Debarker 2 drive pack", "Hot press main ram reservoir", "Fuel feeder stoker pack"])
def test_the_breather_the_bypass_and_the_worn_pump_are_past_their_limit_and_rising(name: str) -> None:
    assert standings()[name] is Standing.PAST_LIMIT
    found = tightest(name)
    assert found.runway_state is RunwayState.PAST
    assert found.trend.verdict is TrendVerdict.RISING


def test_the_cooler_leak_shows_in_water_and_sodium_but_not_in_the_counts() -> None:
    found = mill()["Refiner 2 main lube set"]
    assert other_outlook(found, "water").standing is Standing.PAST_LIMIT
    assert found.samples[-1].metals["na"] > 3 * found.samples[-6].metals["na"]
    assert {o.standing for o in count_outlooks(found)} == {Standing.WITHIN}


def test_the_oil_change_restarted_the_trend_of_the_board_stacker() -> None:
    found = mill()["Board stacker hydraulic pack"]
    changed = next(e.at for e in found.events if e.kind is EventKind.OIL_CHANGE)
    positions = stretch(found, Family.DIRT)
    assert found.samples[positions[0]].drawn_at > changed
    assert len(positions) < len(found.samples)
    before = found.samples[positions[0] - 1]
    assert found.samples[positions[0]].counts[1] < 0.5 * before.counts[1]


def test_the_dirty_bottle_stands_out_once_and_is_forgotten() -> None:
    six = np.log2([s.counts[1] for s in mill()["Saw line infeed pack"].samples])
    assert six[-4] - np.median(six[-8:]) > 2.0
    assert np.all(np.abs(six[-3:] - np.median(six[-8:])) < 1.2)
    assert standings()["Saw line infeed pack"] is Standing.WITHIN


def test_the_servo_pack_drifts_towards_its_limit_and_is_not_past_it() -> None:
    found = tightest("Edge trimmer servo pack")
    assert found.trend.verdict is TrendVerdict.RISING
    assert found.runway_state is RunwayState.FORECAST
    assert found.early is not None
    assert found.early < 3.0
    assert found.chance is not None
    assert 0.1 < found.chance < 0.5
    assert found.trend.slope is not None
    assert 1.0 < (found.headroom or 0.0) / found.trend.slope.slope < 5.0


def test_one_laboratory_reports_codes_only() -> None:
    by_laboratory = {h.reservoir.laboratory for h in mill().values()}
    assert by_laboratory == set(LABORATORIES)
    assert all(s.codes_only == (s.laboratory == CODES_ONLY_LABORATORY) for h in mill().values() for s in h.samples)


def test_the_latest_samples_are_old_where_the_story_says_so() -> None:
    for found in mill().values():
        if found.samples:
            age = (AS_OF - found.samples[-1].drawn_at).days / found.reservoir.interval_days
            assert (age > 2.0) == (found.reservoir.story == "not current")
            assert (1.0 < age < 2.0) == (found.reservoir.story == "overdue")
    assert mill()["Lamination press main pack"].samples == ()


def test_nothing_lies_in_the_future_and_all_runs_forwards() -> None:
    for found in mill().values():
        drawn = [s.drawn_at for s in found.samples]
        hours = [s.machine_hours for s in found.samples]
        assert drawn == sorted(drawn)
        assert hours == sorted(hours)
        assert all(s.drawn_at < s.reported_at <= AS_OF for s in found.samples)
        assert all(found.filled_at < e.at < AS_OF for e in found.events)


def test_a_story_nobody_wrote_is_refused() -> None:
    with pytest.raises(KeyError):
        story_of("flood", 60)
