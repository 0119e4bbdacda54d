"""From samples on record to outlook and standing rows."""

from datetime import timedelta

import pytest

from fleet.models import Event, OilCharge, Reservoir, Standing
from samples.models import Outlook
from samples.outlooks import refresh_outlook, want_all, wanted_ids
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
    want_all(NOW)
    assert wanted_ids() == [kept.pk]
    assert retired.pk not in wanted_ids()


def test_a_refresh_takes_the_want_away(django_assert_max_num_queries) -> None:  # type: ignore[no-untyped-def]
    made = judged()
    builders.sample(made, NOW - timedelta(days=3), counts(1250, 320, 40))
    want_all(NOW)
    with django_assert_max_num_queries(18):
        refresh_outlook(made.pk, NOW)
    assert wanted_ids() == []


def test_an_oil_change_logged_late_moves_earlier_bottles_to_the_new_filling() -> None:
    made = judged()
    for days in (90, 60, 30):
        builders.sample(made, builders.days_ago(days), counts(900, 240, 30))
    OilCharge.objects.filter(reservoir=made).update(ended_at=builders.days_ago(70))
    new = OilCharge.objects.create(reservoir=made, fluid=builders.fluid(), started_at=builders.days_ago(70))
    refresh_outlook(made.pk, NOW)
    assert made.samples.filter(charge=new).count() == 2
    assert Outlook.objects.get(measurand__key="p4").n == 2
