"""The page of one sample, and the word of an engineer on it."""

from datetime import date, timedelta

import pytest
from django.test import Client
from django.urls import reverse

from fleet.models import Person, Reservoir, Role, Standing
from samples.models import Doubt, IntakeFile, Judgement, Result, Sample
from tests import builders
from tests.builders import NOON, days_ago
from tests.samples.scene import client_as, errors_of

pytestmark = pytest.mark.django_db


@pytest.fixture
def press() -> Reservoir:
    return builders.reservoir(tag="PR-104")


@pytest.fixture
def doubtful(press: Reservoir) -> Sample:
    made = builders.sample(press, NOON, {"p4": 2178.0, "p6": 847.0, "p14": 63.0}, verdict=Sample.Verdict.IN_DOUBT)
    Doubt.objects.create(sample=made, code="all_counts_moved", sentence="All rose.", settles="Repeat it.")
    return made


@pytest.fixture
def engineer() -> Client:
    return client_as(Role.ENGINEER)


def page_of(sample: Sample, client: Client | None = None) -> str:
    return (client or client_as(Role.READER)).get(reverse("sample", args=[sample.pk])).content.decode()


def judge(client: Client, sample: Sample, verdict: str, reason: str = "") -> object:
    return client.post(reverse("sample-judge", args=[sample.pk]), {"verdict": verdict, "reason": reason})


def test_it_shows_the_figure_as_reported_and_what_it_means(press: Reservoir) -> None:
    sample = builders.sample(press, NOON)
    builders.result(sample, "water", 200.0, text="0.02", reported_unit="%")
    page = page_of(sample)
    assert "0.02" in page
    assert '<td class="num" data-label="Means">200' in page


def test_it_judges_by_the_figures_of_its_day_and_names_their_source(press: Reservoir) -> None:
    builders.target(press, "15/13/10", since=date(2026, 6, 2))
    builders.target(press, "18/17/13", since=date(2026, 1, 1))
    press.targets.filter(code="18/17/13").update(source="maker, sheet 12")
    page = page_of(builders.sample(press, NOON, {"p4": 2178.0, "p6": 847.0, "p14": 63.0}))
    assert "maker, sheet 12" in page
    assert "15/13/10" not in page
    assert page.count("within target") == 3


def test_a_figure_over_its_target_and_one_past_its_limit_say_so(press: Reservoir) -> None:
    builders.target(press, "18/16/13")
    builders.limit(press, key="water", high=150)
    page = page_of(builders.sample(press, NOON, {"p4": 2178.0, "p6": 847.0, "p14": 63.0, "water": 151.0}))
    assert page.count("over target") == 1
    assert page.count("past limit") == 1


def test_it_tells_the_change_since_the_last_sample_of_the_same_point_and_oil(press: Reservoir) -> None:
    builders.sample(press, days_ago(30), {"p4": 4356.0, "water": 90.0})
    page = page_of(builders.sample(press, NOON, {"p4": 2178.0, "water": 120.0}))
    assert "−1 step<" in page
    assert "+30" in page


def test_a_doubt_stands_there_with_what_would_settle_it(doubtful: Sample) -> None:
    page = page_of(doubtful)
    assert "All rose." in page
    assert "Repeat it." in page


def test_only_an_engineer_gets_the_buttons(doubtful: Sample, engineer: Client) -> None:
    assert "the figures are real" not in page_of(doubtful, client_as(Role.TECHNICIAN))
    assert "the figures are real" in page_of(doubtful, engineer)


def test_a_technician_may_not_judge(doubtful: Sample) -> None:
    client = client_as(Role.TECHNICIAN)
    assert client.post(reverse("sample-judge", args=[doubtful.pk]), {"verdict": "accepted"}).status_code == 403


def test_accepting_is_kept_with_who_and_why_and_asks_for_a_fresh_outlook(doubtful: Sample, engineer: Client) -> None:
    judge(engineer, doubtful, "accepted", "repeat agrees")
    doubtful.refresh_from_db()
    assert (doubtful.verdict, doubtful.verdict_reason) == ("accepted", "repeat agrees")
    assert doubtful.verdict_by == Person.objects.get(role=Role.ENGINEER)
    assert Standing.objects.get(reservoir=doubtful.reservoir).wanted_at is not None


def test_setting_aside_needs_a_reason(doubtful: Sample, engineer: Client) -> None:
    response = judge(engineer, doubtful, "set_aside", "  ")
    assert "Say why" in errors_of(response)["reason"]
    doubtful.refresh_from_db()
    assert doubtful.verdict == Sample.Verdict.IN_DOUBT


def test_set_aside_with_a_reason_stays_on_the_page(doubtful: Sample, engineer: Client) -> None:
    judge(engineer, doubtful, "set_aside", "dirty bottle")
    assert "dirty bottle" in page_of(doubtful)


def test_an_unknown_verdict_changes_nothing(doubtful: Sample, engineer: Client) -> None:
    judge(engineer, doubtful, "perfect", "x")
    doubtful.refresh_from_db()
    assert doubtful.verdict == Sample.Verdict.IN_DOUBT


def test_a_corrected_report_shows_both_revisions(press: Reservoir) -> None:
    sample = builders.sample(press, NOON)
    builders.result(sample, "water", 900.0, current=False)
    builders.result(sample, "water", 90.0, revision=2, revision_reason="digit slipped")
    page = page_of(sample)
    assert "digit slipped" in page
    assert Result.objects.filter(sample=sample).count() == 2
    assert ">900 " in page


def test_no_revision_table_without_a_correction(press: Reservoir) -> None:
    assert "Revisions" not in page_of(builders.sample(press, NOON, {"water": 90.0}))


def test_a_sample_that_is_not_there_is_not_found() -> None:
    assert client_as().get("/samples/999999999999999999999/").status_code == 404


def test_times_are_those_of_the_site() -> None:
    """Vienna is two hours ahead of UTC in June (IANA time zone database)."""
    place = builders.area("Hall", at=builders.site("Alpine works", time_zone="Europe/Vienna"))
    assert "14:00" in page_of(builders.sample(builders.reservoir(area=place), NOON, {"water": 90.0}))


def test_the_list_is_newest_first_with_code_and_verdict(press: Reservoir, doubtful: Sample) -> None:
    older = builders.sample(press, days_ago(30), {"water": 1.0})
    page = client_as(Role.READER).get(reverse("samples"))
    assert [sample.pk for sample, _ in page.context["rows"]] == [doubtful.pk, older.pk]
    assert "18/17/13" in page.content.decode()
    assert "1 in doubt" in page.content.decode()


@pytest.mark.parametrize(
    ("asked", "found"),
    [
        ({"q": "press 4"}, 2),
        ({"q": "L-7"}, 1),
        ({"q": "windmill"}, 0),
        ({"verdict": "in_doubt"}, 1),
        ({"since": "2026-05-15"}, 1),
        ({"until": "2026-05-15"}, 1),
        ({"until": "soon", "laboratory": "x", "area": "x", "verdict": "x", "page": "x"}, 2),
        ({"q": "a\x00b"}, 2),
    ],
)
def test_the_list_can_be_narrowed(press: Reservoir, doubtful: Sample, asked: dict[str, str], found: int) -> None:
    builders.sample(press, NOON - timedelta(days=30), {"water": 1.0}, lab_number="L-7")
    assert len(client_as().get(reverse("samples"), asked).context["rows"]) == found


def test_the_list_comes_as_csv_with_figures_in_canonical_units(doubtful: Sample) -> None:
    response = client_as().get(reverse("samples"), {"format": "csv"})
    heading, row = b"".join(response.streaming_content).decode("utf-8-sig").splitlines()  # type: ignore[attr-defined]
    assert dict(zip(heading.split(","), row.split(","), strict=False))["ISO 4406"] == "18/17/13"
    assert "2178.0,847.0,63.0" in row


def test_every_word_on_it_stays_in_order(doubtful: Sample, engineer: Client) -> None:
    judge(engineer, doubtful, "accepted", "repeat agrees")
    judge(engineer, doubtful, "set_aside", "the repeat was of another tank")
    page = page_of(doubtful)
    assert page.index("accepted by") < page.index("set aside by")
    assert "repeat agrees" in page
    assert [one.verdict for one in doubtful.judgements.all()] == ["accepted", "set_aside"]


def test_a_refused_word_leaves_no_trace(doubtful: Sample, engineer: Client) -> None:
    judge(engineer, doubtful, "set_aside", "")
    assert not Judgement.objects.exists()


def test_a_doubt_that_was_answered_stands_back(doubtful: Sample, engineer: Client) -> None:
    judge(engineer, doubtful, "accepted")
    page = page_of(doubtful)
    assert "Was in doubt when it came in:" in page
    assert "<strong>All rose.</strong>" not in page


def test_the_list_of_one_file_says_which(press: Reservoir) -> None:
    facts = {"digest": "1", "rows": 1, "added": 1, "entered_at": NOON}
    file = IntakeFile.objects.create(name="may.csv", **facts)
    builders.sample(press, NOON, {"water": 1.0}, intake=file)
    builders.sample(press, days_ago(3), {"water": 1.0})
    response = client_as().get(reverse("samples"), {"intake": str(file.pk)})
    assert len(response.context["rows"]) == 1
    assert "from the file may.csv" in response.content.decode()
    assert f'name="intake" value="{file.pk}"' in response.content.decode()
