"""The board: worst first, words and shapes, filters in the address."""

from datetime import timedelta
from typing import Any

import pytest
from django.test import Client
from django.utils import timezone

from fleet.board import bar_of, spark_of
from fleet.models import Reservoir, Role, Standing
from tests import builders

pytestmark = pytest.mark.django_db
RANK = {"past_limit": 0, "over_target": 1, "cannot_tell": 2, "no_current_sample": 3, "within_target": 4}


def standing(name: str, word: str = "within_target", headroom: float = 2.0, **more: Any) -> Reservoir:
    made = builders.reservoir(name, machine=more.pop("machine", "Press 4"))
    facts = {"headroom": headroom, "room": headroom, "value_at": -headroom, "target_at": -2.0, "limit_text": "20/18/15"}
    Standing.objects.create(reservoir=made, word=word, rank=RANK[word], **(facts | more))
    return made


@pytest.fixture
def reader(client: Client) -> Client:
    client.force_login(builders.person(Role.READER))
    return client


def names(page: Any) -> list[str]:
    return [row.reservoir.name for row in page.context["rows"]]


def test_the_worst_comes_first(reader: Client) -> None:
    standing("fine")
    standing("badly past", "past_limit", -2.4)
    standing("over", "over_target", 0.4)
    standing("just past", "past_limit", -0.2)
    assert names(reader.get("/")) == ["badly past", "just past", "over", "fine"]


def test_the_totals_read_as_a_sentence(reader: Client) -> None:
    soon = timezone.now() + timedelta(days=12)
    standing("fine")
    standing("coming", "over_target", 0.4, runway="dated", runway_early=soon)
    standing("past", "past_limit", -1.0)
    builders.reservoir("never sampled")
    words = " ".join(reader.get("/").content.decode().replace("</strong></a>", "").split())
    assert "1 of 4 reservoirs hold their target (25 %)" in words
    assert "1 more could pass it within 30 days" in words
    assert "1 has no current sample" in words


@pytest.mark.parametrize(
    ("query", "expected"),
    [
        ("show=past_limit", ["past"]),
        ("q=PRESS+past", ["past"]),
        ("q=nowhere", []),
        ("sort=-reservoir", ["past", "fine"]),
        ("sort=headroom", ["past", "fine"]),
        ("kind=gearbox", []),
        ("area=not-a-number&show=nonsense", ["past", "fine"]),
    ],
)
def test_the_address_holds_filter_and_order(reader: Client, query: str, expected: list[str]) -> None:
    standing("fine")
    standing("past", "past_limit", -1.0)
    assert names(reader.get(f"/?{query}")) == expected


def test_an_empty_fleet_shows_the_three_steps(reader: Client) -> None:
    page = reader.get("/")
    assert "Three steps to the first result" in page.content.decode()


def test_standing_is_said_in_words_beside_its_shape(reader: Client) -> None:
    standing("past", "past_limit", -1.0, because="Water: past limit, 1.0 code steps past the limit.")
    page = reader.get("/").content.decode()
    assert "past limit</span>" in page
    assert 'aria-label="Water: past limit' in page


@pytest.mark.parametrize("rows", [3, 30])
def test_sixty_rows_cost_as_many_queries_as_three(
    reader: Client, django_assert_max_num_queries: Any, rows: int
) -> None:
    for n in range(rows):
        standing(f"pack {n}")
    with django_assert_max_num_queries(8):
        reader.get("/")


def test_a_bar_keeps_its_marker_on_the_scale() -> None:
    far = Standing(value_at=9.0, target_at=-2.0, headroom=-9.0, limit_text="20/18/15")
    bar = bar_of(far)
    assert (bar.value, bar.off_scale) == (260.0, True)
    assert bar.limit == pytest.approx(148.6)


def test_a_flat_history_draws_a_calm_line() -> None:
    points, end = spark_of([12.0, 12.1, 12.0])
    assert end == (90.0, 10.5)
    assert points.startswith("0.0,10.5")


def test_the_rows_shown_come_out_as_csv(reader: Client) -> None:
    standing("fine")
    standing("past", "past_limit", -1.0, code_text="22/20/17")
    page = reader.get("/?show=past_limit&format=csv")
    heading, row, *rest = b"".join(page.streaming_content).decode("utf-8-sig").splitlines()  # type: ignore[attr-defined]
    assert heading.startswith("tag,machine,reservoir")
    assert ",past limit,22/20/17," in row
    assert rest == []
