"""From samples on record to outlook and standing rows."""

from datetime import datetime, timedelta

import pytest

from fleet.codes import parse_iso_code
from fleet.models import Event, OilCharge, Reservoir, SamplePoint, Standing
from samples.models import Outlook
from samples.outlooks import left_behind, refresh_outlook, refresh_wanted, want_all
from samples.readings import readings_from_code
from tests import builders

pytestmark = pytest.mark.django_db
NOW = builders.NOON


def judged() -> Reservoir:
    made = builders.reservoir(interval_days=30)
    builders.target(made, "18/16/13")
    builders.limit(made, "20/18/15")
    return made


def refreshed(made: Reservoir) -> Standing:
    refresh_outlook(made.pk, NOW)
    return Standing.objects.get(pk=made.pk)


def counts(four: float, six: float, fourteen: float) -> dict[str, float]:
    return {"p4": four, "p6": six, "p14": fourteen}


def test_a_reservoir_without_samples_has_no_current_sample() -> None:
    standing = refreshed(judged())
    assert standing.word == "no_current_sample"
    assert standing.runway == "cannot_say"


def test_a_clean_sample_is_within_target_with_its_headroom_in_code_steps() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(3), counts(1250, 320, 40))
    standing = refreshed(made)
    assert (standing.word, standing.code_text, standing.target_text) == ("within_target", "17/15/12", "18/16/13")
    assert standing.headroom == pytest.approx(2.97, abs=0.01)


def test_the_worst_size_class_speaks_for_the_reservoir() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(3), counts(1250, 320, 400))
    standing = refreshed(made)
    assert standing.word == "past_limit"
    assert standing.worst is not None
    assert standing.worst.key == "p14"
    assert standing.past_since == builders.days_ago(3)


def test_a_count_on_the_bound_of_the_limit_is_not_past_it() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(3), counts(10000, 2500, 320))
    assert refreshed(made).word == "over_target"


def test_a_result_in_doubt_makes_no_outlook() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(30), counts(1250, 320, 40))
    builders.sample(made, builders.days_ago(3), counts(90000, 20000, 4000), verdict="in_doubt")
    standing = refreshed(made)
    assert (standing.word, standing.in_doubt) == ("within_target", 1)
    assert Outlook.objects.get(measurand__key="p4").n == 1


def test_an_oil_change_starts_a_new_stretch() -> None:
    made = judged()
    for days in (120, 90, 60):
        builders.sample(made, builders.days_ago(days), counts(9000, 2000, 300))
    OilCharge.objects.filter(reservoir=made).update(ended_at=builders.days_ago(40))
    OilCharge.objects.create(reservoir=made, fluid=builders.fluid(), started_at=builders.days_ago(40))
    builders.sample(made, builders.days_ago(5), counts(500, 130, 12))
    refresh_outlook(made.pk, NOW)
    outlook = Outlook.objects.get(measurand__key="p14")
    assert (outlook.n, outlook.stretch_from) == (1, builders.days_ago(5))


def test_a_new_element_restarts_counts_and_leaves_water_alone() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(60), counts(9000, 2000, 300) | {"water": 100.0})
    Event.objects.create(reservoir=made, kind="element_change", at=builders.days_ago(40))
    builders.sample(made, builders.days_ago(5), counts(500, 130, 12) | {"water": 110.0})
    refresh_outlook(made.pk, NOW)
    stretches = dict(Outlook.objects.values_list("measurand__key", "n"))
    assert (stretches["p14"], stretches["water"]) == (1, 2)


def test_a_sample_is_judged_by_the_figure_of_its_day() -> None:
    made = judged()
    builders.limit(made, "17/15/12", since=builders.days_ago(1).date())
    builders.sample(made, builders.days_ago(3), counts(4000, 1000, 150))
    assert refreshed(made).limit_text == "20/18/15"


def test_an_old_sample_is_no_current_sample_and_makes_no_forecast() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(61), counts(1250, 320, 40))
    standing = refreshed(made)
    assert standing.word == "no_current_sample"
    assert "61 days old" in standing.runway_reason


def test_a_low_count_that_may_be_higher_cannot_tell_near_its_target() -> None:
    made = judged()
    made_sample = builders.sample(made, builders.days_ago(3), counts(1250, 320, 40))
    made_sample.results.filter(measurand__key="p14").update(value=None, low=0.64, qualifier="≥", reported_text="≥7")
    assert refreshed(made).word == "cannot_tell"


def test_water_past_its_limit_speaks_in_percent_of_the_span() -> None:
    made = judged()
    builders.limit(made, key="water", high=500.0)
    builders.sample(made, builders.days_ago(3), counts(1250, 320, 40) | {"water": 620.0})
    standing = refreshed(made)
    assert (standing.word, standing.headroom_unit) == ("past_limit", "%")
    assert standing.headroom == pytest.approx(-24.0)


def test_viscosity_is_judged_on_both_sides_against_the_new_oil() -> None:
    made = judged()
    builders.limit(made, key="viscosity_40", low=-10.0, high=10.0, basis="percent")
    builders.sample(made, builders.days_ago(3), {"viscosity_40": 40.0})
    assert refreshed(made).word == "past_limit"


def test_refreshing_twice_changes_nothing_but_the_count_of_writes() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(3), counts(1250, 320, 40))
    first, second = refreshed(made), refreshed(made)
    assert (first.headroom, first.runway_early) == (second.headroom, second.runway_early)
    assert second.revision == first.revision + 1
    assert Outlook.objects.filter(reservoir=made).count() == 3


def test_every_active_reservoir_is_wanted_by_the_nightly_pass() -> None:
    kept, retired = judged(), builders.reservoir("old pack", retired_on=NOW.date())
    assert want_all(NOW) == [kept.pk]
    assert left_behind(NOW) == []
    assert left_behind(NOW + timedelta(minutes=1)) == [kept.pk]
    assert not Standing.objects.filter(pk=retired.pk).exists()


def test_what_nobody_wants_any_more_is_not_worked_out_again() -> None:
    made = judged()
    want_all(NOW)
    assert refresh_wanted(made.pk, NOW)
    assert not refresh_wanted(made.pk, NOW)
    assert Standing.objects.get(pk=made.pk).revision == 1


def test_a_refresh_of_a_long_history_costs_few_queries(django_assert_max_num_queries) -> None:  # type: ignore[no-untyped-def]
    made = judged()
    for n in range(20):
        builders.sample(made, NOW - timedelta(days=3 + 10 * n), counts(1250, 320, 40))
    want_all(NOW)
    with django_assert_max_num_queries(18):
        refresh_wanted(made.pk, NOW)


def oil_changed(made: Reservoir, at: datetime) -> None:
    OilCharge.objects.filter(reservoir=made, ended_at=None).update(ended_at=at)
    OilCharge.objects.create(reservoir=made, fluid=builders.fluid(), started_at=at)


def test_oil_that_was_drained_speaks_for_nothing() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(12), counts(90000, 20000, 4000))
    oil_changed(made, builders.days_ago(10))
    standing = refreshed(made)
    assert (standing.word, standing.code_text) == ("no_current_sample", "")
    assert standing.because.startswith("The oil was changed on 22 May 2026")
    assert standing.runway == "cannot_say"


def test_a_bottle_at_the_moment_of_the_change_is_of_the_new_oil() -> None:
    made = judged()
    Event.objects.create(reservoir=made, kind="oil_change", at=builders.days_ago(60))
    oil_changed(made, builders.days_ago(60))
    for days in (60, 30, 3):
        builders.sample(made, builders.days_ago(days), counts(900, 240, 30))
    refresh_outlook(made.pk, NOW)
    assert Outlook.objects.get(measurand__key="p4").n == 3


def test_after_a_new_element_the_last_value_stands_but_nothing_is_forecast() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(12), counts(90000, 20000, 4000))
    Event.objects.create(reservoir=made, kind="element_change", at=builders.days_ago(5))
    standing = refreshed(made)
    assert standing.word == "past_limit"
    assert Outlook.objects.get(measurand__key="p4").refusal == "restarted"


def test_while_the_newest_result_is_in_doubt_nothing_is_forecast() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(30), counts(1250, 320, 40))
    builders.sample(made, builders.days_ago(3), counts(90000, 20000, 4000), verdict="in_doubt")
    standing = refreshed(made)
    assert (standing.runway, Outlook.objects.get(measurand__key="p4").refusal) == ("cannot_say", "in_doubt")
    assert standing.last_drawn_at == builders.days_ago(30)


def test_a_clean_bottle_from_another_point_is_no_news_about_the_reservoir() -> None:
    made = judged()
    behind = SamplePoint.objects.create(reservoir=made, name="SP-2", place="after the filter")
    builders.sample(made, builders.days_ago(3), counts(90000, 20000, 4000))
    builders.sample(made, builders.days_ago(2), counts(90, 20, 4), point=behind)
    assert refreshed(made).word == "past_limit"


def test_new_oil_from_its_drum_is_not_the_oil_in_the_reservoir() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(3), counts(90000, 20000, 4000))
    builders.sample(made, builders.days_ago(2), counts(90, 20, 4), reason="new_oil")
    assert refreshed(made).word == "past_limit"


def test_counts_of_the_counter_take_over_from_those_of_the_microscope() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(50), {"p5m": 90000.0, "p15m": 9000.0})
    builders.sample(made, builders.days_ago(5), counts(1250, 320, 40))
    assert refreshed(made).word == "within_target"


def test_too_many_to_count_is_past_any_limit() -> None:
    made = judged()
    sample = builders.sample(made, builders.days_ago(3))
    for reading in readings_from_code(parse_iso_code("*/16/13")):
        bounds = {"low": reading.low, "high": reading.high, "qualifier": reading.qualifier}
        builders.result(sample, reading.measurand, None, **bounds)
    assert refreshed(made).word == "past_limit"


@pytest.mark.parametrize(("new", "reported"), [(46.0, 50.6), (32.0, 35.2), (100.0, 110.0), (220.0, 242.0)])
def test_a_value_exactly_on_a_percent_limit_is_not_past_it(new: float, reported: float) -> None:
    # ISO 3448: the upper bound of a grade is its midpoint and ten per cent.
    made = builders.reservoir(fluid=builders.fluid(f"Oil {new:g}", viscosity_40=new), interval_days=30)
    builders.limit(made, key="viscosity_40", low=-10.0, high=10.0, basis="percent")
    builders.sample(made, builders.days_ago(3), {"viscosity_40": reported})
    assert refreshed(made).word == "within_target"
    builders.sample(made, builders.days_ago(1), {"viscosity_40": reported + 0.1})
    assert refreshed(made).word == "past_limit"


def test_new_oil_without_any_acid_can_be_judged_by_the_change() -> None:
    made = builders.reservoir(fluid=builders.fluid("Clean", acid_number=0.0), interval_days=30)
    builders.limit(made, key="acid_number", high=0.5, basis="change")
    builders.sample(made, builders.days_ago(3), {"acid_number": 0.51})
    assert refreshed(made).word == "past_limit"


def test_litres_that_only_the_bottle_tells_of_restart_the_trend() -> None:
    made = judged()
    builders.sample(made, builders.days_ago(60), counts(9000, 2000, 300))
    builders.sample(made, builders.days_ago(3), counts(900, 240, 30), litres_added=300.0)
    refresh_outlook(made.pk, NOW)
    assert Outlook.objects.get(measurand__key="p4").n == 1


def test_a_first_limit_judges_the_sample_that_is_there_already() -> None:
    made = builders.reservoir(interval_days=30)
    builders.sample(made, builders.days_ago(3), counts(90000, 20000, 4000))
    builders.limit(made, "20/18/15", since=NOW.date())
    assert refreshed(made).word == "past_limit"


def test_an_oil_change_logged_late_moves_earlier_bottles_to_the_new_filling() -> None:
    made = judged()
    for days in (90, 60, 30):
        builders.sample(made, builders.days_ago(days), counts(900, 240, 30))
    OilCharge.objects.filter(reservoir=made).update(ended_at=builders.days_ago(70))
    new = OilCharge.objects.create(reservoir=made, fluid=builders.fluid(), started_at=builders.days_ago(70))
    refresh_outlook(made.pk, NOW)
    assert made.samples.filter(charge=new).count() == 2
    assert Outlook.objects.get(measurand__key="p4").n == 2
