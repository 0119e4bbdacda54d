"""One reservoir's page: verdict, charts with their table, and what was done to the oil."""

import json
import re
from typing import Any

import pytest
from django.test import Client
from django.utils import timezone

from fleet.models import Event, OilCharge, Reservoir, Role
from samples.outlooks import refresh_outlook
from tests import builders

pytestmark = pytest.mark.django_db


@pytest.fixture
def reader(client: Client) -> Client:
    client.force_login(builders.person(Role.READER))
    return client


def press() -> Reservoir:
    now = timezone.now()
    made = builders.reservoir("main pack", machine="Hot press", tag="HP-1", interval_days=30)
    builders.target(made, "18/16/13")
    builders.limit(made, "20/18/15")
    for n in range(8):
        drawn = builders.days_ago(30 * (8 - n), now)
        builders.sample(made, drawn, {"p4": 900.0 + n, "p6": 240.0, "p14": 30.0, "water": 90.0 + n})
    return made


def page(reader: Client, made: Reservoir) -> str:
    refresh_outlook(made.pk, timezone.now())
    return " ".join(reader.get(f"/reservoirs/{made.tag}/").content.decode().split())


def figure(text: str, key: str) -> dict[str, Any]:
    found = re.search(rf'<script id="{key}" type="application/json">(.*?)</script>', text)
    assert found is not None
    drawn: dict[str, Any] = json.loads(found[1])
    return drawn


def test_it_says_first_where_the_oil_stands(reader: Client) -> None:
    text = page(reader, press())
    assert "<strong>Within target.</strong>" in text
    assert "17/15/12" in text
    assert "not expected to pass the limit" in text or "may pass the limit" in text


def test_the_chart_and_the_table_hold_the_same_numbers(reader: Client) -> None:
    text = page(reader, press())
    (line,) = [trace for trace in figure(text, "cleanliness")["data"] if trace.get("name") == "≥6 µm(c)"]
    assert line["y"] == pytest.approx([14.55] * 8, abs=0.01)
    assert text.partition('id="h-samples"')[2].count('<td class="num">240</td>') == 8


def test_a_code_without_counts_is_drawn_as_the_bar_it_is(reader: Client) -> None:
    made = press()
    made_sample = made.samples.latest("drawn_at")
    made_sample.results.filter(measurand__key="p14").update(
        value=None, low=20.0, high=40.0, reported_text="12", reported_unit="ISO 4406"
    )
    text = page(reader, made)
    (line,) = [trace for trace in figure(text, "cleanliness")["data"] if trace.get("name") == "≥14 µm(c)"]
    assert (line["y"][-1], line["error_y"]["array"][-1], line["error_y"]["arrayminus"][-1]) == (11.5, 0.5, 0.5)
    assert '<td class="num">20–40</td>' in text


def test_an_element_change_breaks_the_line_and_is_named(reader: Client) -> None:
    made = press()
    Event.objects.create(reservoir=made, kind="element_change", at=builders.days_ago(75, timezone.now()))
    drawn = figure(page(reader, made), "cleanliness")
    (line,) = [trace for trace in drawn["data"] if trace.get("name") == "≥4 µm(c)"]
    assert line["y"].count(None) == 1
    assert [note["text"] for note in drawn["layout"]["annotations"]] == ["filter element changed"]


def test_a_sample_in_doubt_is_named_and_kept_out_of_the_line(reader: Client) -> None:
    made = press()
    made.samples.filter(pk=made.samples.latest("drawn_at").pk).update(verdict="in_doubt")
    text = page(reader, made)
    assert "1 sample in doubt." in text
    assert any("in doubt" in trace.get("name", "") for trace in figure(text, "cleanliness")["data"])


def test_without_target_and_limit_it_says_what_is_missing(reader: Client) -> None:
    made = builders.reservoir(tag="HP-2")
    builders.sample(made, timezone.now(), {"p4": 900.0})
    assert "Set a target and a limit" in page(reader, made)


def test_a_reservoir_without_samples_says_so(reader: Client) -> None:
    assert "No sample yet." in page(reader, builders.reservoir(tag="HP-3"))


def test_an_unknown_tag_is_not_found(reader: Client) -> None:
    assert reader.get("/reservoirs/NOBODY/").status_code == 404
    assert reader.get("/reservoirs/%00/").status_code == 404


def test_the_samples_come_out_as_csv_with_plain_numbers(reader: Client) -> None:
    made = press()
    found = reader.get("/reservoirs/HP-1/?format=csv")
    lines = b"".join(found.streaming_content).decode("utf-8-sig").splitlines()  # type: ignore[attr-defined]
    assert lines[0].startswith("drawn,point,laboratory")
    assert lines[1].endswith(",17/15/12,907.0,240.0,30.0,97.0")
    assert len(lines) == 1 + made.samples.count()


@pytest.mark.parametrize("samples", [3, 30])
def test_a_long_history_costs_no_more_queries(reader: Client, django_assert_num_queries: Any, samples: int) -> None:
    made = builders.reservoir(tag="HP-4")
    builders.limit(made, "20/18/15")
    for n in range(samples):
        builders.sample(made, builders.days_ago(20 * n + 1, timezone.now()), {"p4": 900.0, "p6": 240.0, "p14": 30.0})
    refresh_outlook(made.pk, timezone.now())
    with django_assert_num_queries(15):
        reader.get("/reservoirs/HP-4/")


def test_a_code_of_drained_oil_says_so(reader: Client) -> None:
    made = press()
    at = builders.days_ago(1, timezone.now())
    made.charges.update(ended_at=at)
    OilCharge.objects.create(reservoir=made, fluid=builders.fluid(), started_at=at)
    text = page(reader, made)
    assert "has not been sampled since" in text
    assert "Of the oil that was in it before" in text
