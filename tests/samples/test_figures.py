"""Charts as plain data."""

import json
from datetime import timedelta

from samples.figures import ChartPlan, Dot, FanArea, Line, Mark, Step, figure
from tests.builders import NOON


def dot(days: float, y: float, **more: object) -> Dot:
    return Dot(NOON + timedelta(days=days), y, f"{y}", **more)  # type: ignore[arg-type]


def drawn(**more: object) -> dict:  # type: ignore[type-arg]
    usual = {"stretches": [[dot(0, 15), dot(30, 15.5)], [dot(60, 13)]]}
    line = Line("≥14", "third", **(usual | more))  # type: ignore[arg-type]
    marks = [Mark(NOON + timedelta(days=45), "oil change", True), Mark(NOON, "top-up", False)]
    return figure(ChartPlan("code", [line], NOON + timedelta(days=70), marks))


def trace(name: str, **more: object) -> dict:  # type: ignore[type-arg]
    return next(found for found in drawn(**more)["data"] if found.get("name") == name)


def test_a_line_breaks_between_two_stretches() -> None:
    assert trace("≥14")["y"] == [15, 15.5, None, 13]


def test_an_interval_is_a_bar_with_an_open_mark() -> None:
    found = trace("≥14", stretches=[[dot(0, 15), dot(30, 14.5, low=14.0, high=15.0)]])
    assert found["error_y"]["array"] == [0.0, 0.5]
    assert found["marker"]["symbol"] == ["circle", "circle-open"]


def test_a_doubtful_sample_is_drawn_apart_from_the_line() -> None:
    stretches = [[dot(0, 15)], [dot(9, 20, in_doubt=True)]]
    assert trace("≥14", stretches=stretches)["y"][:1] == [15]
    assert trace("≥14, in doubt or set aside", stretches=stretches)["y"] == [20]


def test_a_limit_is_drawn_as_the_step_it_was() -> None:
    steps = [Step(NOON, NOON + timedelta(days=10), 15.0), Step(NOON + timedelta(days=10), NOON, 14.0)]
    assert trace("≥14 limit", limits=steps)["y"] == [15.0, 15.0, None, 14.0, 14.0]


def test_the_forecast_is_a_shaded_range_with_a_dashed_middle() -> None:
    fan = FanArea([NOON, NOON + timedelta(days=30)], [14, 15], [13, 13.5], [15, 16.5])
    data = drawn(fan=fan)["data"]
    assert [found.get("fill") for found in data[:3]] == [None, "tonexty", None]
    assert data[2]["line"]["dash"] == "dash"


def test_only_an_event_that_breaks_the_trend_is_named() -> None:
    layout = drawn()["layout"]
    assert [note["text"] for note in layout["annotations"]] == ["oil change"]
    assert len(layout["shapes"]) == 3


def test_a_figure_is_plain_json_with_colours_by_name() -> None:
    text = json.dumps(drawn(), allow_nan=False)
    assert '"@third"' in text
    assert "#" not in text
