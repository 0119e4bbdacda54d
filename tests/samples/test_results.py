"""A sample is saved whole or not at all, with its doubts, and asks for a fresh outlook."""

from datetime import timedelta

import pytest
from django.db import DatabaseError, connection

from fleet.models import Reservoir, Role, Standing
from samples.coding.iso4406 import Basis
from samples.history import read_history
from samples.intake.numbers import read_number
from samples.models import Doubt, Result, Sample
from samples.readings import Reading, reading_of, readings_from_counts
from samples.results import EntryError, SampleEntry, SampleFacts, accept, save_entry, set_aside
from tests import builders
from tests.builders import NOON, days_ago
from tests.samples.scene import everything

pytestmark = pytest.mark.django_db


@pytest.fixture
def press() -> Reservoir:
    return builders.reservoir()


def counts(*three: str, basis: Basis = "per_ml") -> list[Reading]:
    four, six, fourteen = (read_number(text) for text in three)
    return readings_from_counts(four, six, fourteen, basis=basis)


def water(text: str) -> list[Reading]:
    reading = reading_of("water", read_number(text))
    return [] if reading is None else [reading]


def entry(press: Reservoir, readings: list[Reading], **facts: object) -> SampleEntry:
    told = {"drawn_at": days_ago(1)} | facts
    return SampleEntry(press, press.points.get(), builders.laboratory(), SampleFacts(**told), readings)  # type: ignore[arg-type]


def save(press: Reservoir, readings: list[Reading], **facts: object) -> Sample:
    return save_entry(entry(press, readings, **facts), read_history(press), by=None, now=NOON)


def refusal(press: Reservoir, readings: list[Reading], **facts: object) -> EntryError:
    with pytest.raises(EntryError) as caught:
        save(press, readings, **facts)
    return caught.value


def test_a_sample_belongs_to_the_oil_of_its_day(press: Reservoir) -> None:
    charge = press.charges.get()
    assert save(press, water("90")).charge == charge


def test_what_the_laboratory_wrote_stays_beside_what_it_means(press: Reservoir) -> None:
    save(press, counts("217800", "84700", "6300", basis="per_100ml"))
    result = Result.objects.get(measurand__key="p4")
    assert (result.reported_text, result.reported_unit, result.value) == ("217800", "1/100 mL", 2178.0)


def test_saving_asks_for_a_fresh_outlook(press: Reservoir) -> None:
    save(press, water("90"))
    assert Standing.objects.get(reservoir=press).wanted_at == NOON


def test_a_fault_in_the_middle_leaves_nothing_behind(press: Reservoir) -> None:
    """The doubts cannot be written: neither sample nor results stay, and no outlook is asked for."""
    builders.sample(press, days_ago(30), {"p4": 2178.0, "p6": 847.0, "p14": 63.0})
    before = everything()
    with connection.cursor() as cursor:
        cursor.execute("ALTER TABLE samples_doubt ADD CONSTRAINT none_today CHECK (false)")
    assert refusal(press, counts("217800", "84700", "6300")).code == "not_saved"
    assert everything() == before
    assert not Standing.objects.filter(wanted_at__isnull=False).exists()


def test_a_database_that_goes_away_leaves_nothing_behind(press: Reservoir) -> None:
    def break_off(run: object, sql: str, *rest: object) -> object:
        if "samples_result" in sql and sql.startswith("INSERT"):
            raise DatabaseError("connection lost")
        return run(sql, *rest)  # type: ignore[operator]

    with connection.execute_wrapper(break_off), pytest.raises(DatabaseError):
        save(press, water("90"))
    assert not any(everything().values())


def test_every_doubt_is_stored_with_what_settles_it(press: Reservoir) -> None:
    builders.sample(press, days_ago(30), {"p4": 2178.0, "p6": 847.0, "p14": 63.0}, machine_hours=900)
    save(press, counts("217800", "84700", "6300"), machine_hours=800.0)
    assert set(Doubt.objects.values_list("code", flat=True)) == {"counts_shifted_hundredfold", "hours_backwards"}
    assert all(doubt.settles for doubt in Doubt.objects.all())


def test_figures_far_off_on_both_sides_are_stored_side_by_side(press: Reservoir) -> None:
    for n in range(6):
        builders.sample(press, days_ago(200 - 30 * n), {"water": 900.0 + n, "fe": 3.0})
    iron = reading_of("fe", read_number("90"))
    sample = save(press, [*water("10"), *([iron] if iron else [])])
    assert [doubt.code for doubt in sample.doubts.all()] == ["far_off_forecast", "far_off_forecast"]


def test_a_figure_that_cannot_be_is_refused(press: Reservoir) -> None:
    error = refusal(press, water("1000001"))
    assert (error.code, error.field) == ("value_impossible", "water")
    assert not any(everything().values())


def test_the_largest_figure_that_can_be_is_saved(press: Reservoir) -> None:
    """All water: 1 000 000 mg/kg is 100 % by mass."""
    assert save(press, water("1000000")).pk


def test_a_sample_from_the_future_is_refused(press: Reservoir) -> None:
    assert refusal(press, water("90"), drawn_at=NOON + timedelta(minutes=1)).field == "drawn_at"


def test_counts_out_of_order_are_refused(press: Reservoir) -> None:
    assert refusal(press, counts("63", "847", "2178")).code == "counts_out_of_order"


def test_no_result_is_no_sample(press: Reservoir) -> None:
    assert refusal(press, []).code == "no_result"


@pytest.mark.parametrize(
    ("again", "field"),
    [
        ({"drawn_at": days_ago(1)}, "drawn_at"),
        ({"drawn_at": days_ago(2), "label_code": "B-1"}, "label_code"),
    ],
)
def test_what_is_unique_is_refused_the_second_time_at_its_field(
    press: Reservoir, again: dict[str, object], field: str
) -> None:
    save(press, water("90"), drawn_at=days_ago(1), label_code="B-1")
    assert refusal(press, water("91"), **again).field == field
    assert Sample.objects.count() == 1


def test_a_judgement_counts_who_when_and_why(press: Reservoir) -> None:
    sample, engineer = save(press, water("90")), builders.person(Role.ENGINEER)
    set_aside(sample, engineer, " dirty bottle ", NOON)
    sample.refresh_from_db()
    assert (sample.verdict, sample.verdict_by, sample.verdict_at, sample.verdict_reason) == (
        *("set_aside", engineer, NOON, "dirty bottle"),
    )


def test_a_sample_set_aside_is_no_history_for_the_next(press: Reservoir) -> None:
    first = save(press, counts("2178", "847", "63"), drawn_at=days_ago(40))
    set_aside(first, builders.person(Role.ENGINEER), "dirty bottle", NOON)
    assert save(press, counts("217800", "84700", "6300")).verdict == Sample.Verdict.ACCEPTED


def test_an_accepted_sample_is(press: Reservoir) -> None:
    first = save(press, counts("2178", "847", "63"), drawn_at=days_ago(40))
    accept(first, builders.person(Role.ENGINEER), "", NOON)
    assert save(press, counts("217800", "84700", "6300")).verdict == Sample.Verdict.IN_DOUBT


def test_a_second_bottle_of_one_day_is_doubted_unless_it_repeats_on_purpose(press: Reservoir) -> None:
    builders.sample(press, days_ago(3), {"water": 90.0})
    again = save(press, water("92"), drawn_at=days_ago(3) + timedelta(hours=2))
    repeat = save(press, water("91"), drawn_at=days_ago(3) + timedelta(hours=3), reason="resample")
    assert [doubt.code for doubt in again.doubts.all()] != []
    assert [doubt.code for doubt in repeat.doubts.all()] == []
