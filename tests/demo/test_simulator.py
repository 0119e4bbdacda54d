"""The simulator obeys its mass balance, and what is done to the oil shows in it."""

from dataclasses import replace

import numpy as np
import pytest

from samples.demo.simulator import NEW_OIL_PER_ML, Change, Condition, Filter, Oil, Treatment, TrueOil, report, simulate

USUAL = (1600.0, 400.0, 40.0)
CALM = Condition(
    volume_l=640.0,
    filter=Filter(30.0, (20.0, 200.0, 1000.0)),
    usual_per_ml=USUAL,
    oil=Oil(46.0, 0.5),
    days=400,
    restlessness=0.0,
)


def run(**changes: object) -> TrueOil:
    return simulate(replace(CALM, **changes), np.random.default_rng(4))  # type: ignore[arg-type]


def test_the_same_seed_gives_the_same_oil() -> None:
    first, second = run(restlessness=0.3), run(restlessness=0.3)
    assert np.array_equal(first.counts, second.counts)
    assert np.array_equal(first.water, second.water)


def test_without_trouble_counts_stay_where_they_settle() -> None:
    steps = np.log2(run().counts / np.array(USUAL))
    assert np.abs(steps).max() < 1.0


def test_a_failed_breather_lifts_all_sizes_by_its_factor() -> None:
    calm, failed = run(), run(changes=(Change(200, 400, ingress=8.0),))
    assert failed.counts[:200] == pytest.approx(calm.counts[:200])
    assert failed.counts[250] / calm.counts[250] == pytest.approx(8.0, rel=1e-6)


def test_a_bypassing_element_lets_by_what_it_no_longer_filters() -> None:
    calm, bypassing = run(), run(changes=(Change(200, 400, bypass=0.75),))
    assert bypassing.counts[300] / calm.counts[300] == pytest.approx(4.0, rel=1e-6)


def test_an_ageing_element_is_made_good_by_a_new_one() -> None:
    worn = Filter(30.0, (20.0, 200.0, 1000.0), wear_per_day=0.001)
    kept, changed = run(filter=worn), run(filter=worn, treatments=(Treatment(200, new_element=True),))
    assert np.all(changed.counts[210] < kept.counts[210])
    assert changed.counts[199] == pytest.approx(kept.counts[199])


def test_a_climb_doubles_as_often_as_it_says() -> None:
    calm, climbing = run(), run(changes=(Change(100, 400, climb=0.5),))
    assert np.log2(climbing.counts[222] / calm.counts[222]) == pytest.approx(0.5 * 122 / 30.4375, abs=0.01)


def test_an_offline_run_cleans_a_sump_that_only_settles() -> None:
    sump = Filter(640.0 / 14400.0, (1.5, 2.0, 5.0))
    dirty, cleaned = (
        run(filter=sump),
        run(filter=sump, treatments=(Treatment(200, offline_minutes=600, offline_flow=20),)),
    )
    assert np.all(cleaned.counts[200] < 0.2 * dirty.counts[200])
    assert np.all(cleaned.counts[390] > cleaned.counts[200])


def test_an_oil_change_renews_everything_but_brings_the_dirt_of_the_drum() -> None:
    sump = Filter(640.0 / 14400.0, (1.5, 2.0, 5.0))
    oil = run(filter=sump, treatments=(Treatment(200, fresh=1.0),))
    assert oil.counts[200] == pytest.approx(NEW_OIL_PER_ML)
    assert oil.acid_number[200] == pytest.approx(0.5)
    assert oil.viscosity[200] == pytest.approx(46.0)
    assert oil.metals["fe"][200] < oil.metals["fe"][199]
    assert oil.oil_age_days[199:202].tolist() == [320.0, 0.0, 1.0]


def test_a_cooler_leak_brings_water_and_sodium_that_grow() -> None:
    calm, leaking = run(), run(changes=(Change(300, 400, water=50.0, ramp=60, sodium=0.4),))
    extra = leaking.water - calm.water
    assert np.all(np.diff(extra[301:360]) > 0)
    assert extra[359] > 400.0
    assert leaking.metals["na"][399] > calm.metals["na"][399] + 20.0


def test_drying_takes_the_water_down() -> None:
    wet = run(changes=(Change(200, 300, water=20.0),), treatments=(Treatment(300, dry_to=40.0),))
    assert wet.water[299] > 300.0
    assert wet.water[300] == pytest.approx(40.0)


def test_reports_scatter_about_the_truth_as_counters_do() -> None:
    oil, rng = run(), np.random.default_rng(8)
    six = np.array([report(oil, 300, rng).counts[1] for _ in range(2000)])
    assert np.median(six) == pytest.approx(oil.counts[300, 1], rel=0.02)
    assert 0.10 < np.std(np.log(six)) < 0.25


def test_a_dirty_bottle_holds_eight_times_the_dirt() -> None:
    oil = run()
    clean, dirty = (report(oil, 300, np.random.default_rng(8), dirty_bottle=flag) for flag in (False, True))
    assert np.array(dirty.counts) / np.array(clean.counts) == pytest.approx(8.0, rel=0.01)
    assert dirty.water == clean.water


def test_counts_never_rise_with_size() -> None:
    oil, rng = run(usual_per_ml=(100.0, 98.0, 96.0)), np.random.default_rng(2)
    for _ in range(200):
        four, six, fourteen = report(oil, 50, rng).counts
        assert four >= six >= fourteen
