"""One reservoir: where it stands, how it got there, what is coming."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import Any

from django.db.models import Prefetch
from django.http import HttpRequest, HttpResponseBase
from django.shortcuts import get_object_or_404, render
from django.utils import timezone

from fleet.board import board_row
from fleet.export import csv_response
from fleet.models import Element, FilterPosition, Limit, Measurand, Reservoir, RunwayState, Target
from fleet.wording import bound_text, headroom_text, number_text, runway_aside, runway_text
from samples.charts import Chart, cleanliness_chart, other_charts
from samples.history import History, read_history
from samples.judgement import figure_in_column, figure_in_words
from samples.models import Outlook
from samples.sample_codes import code_text
from samples.series import figures_of, slope_reaches
from samples.tables import history_csv, history_table
from samples.trends.forecast import chance_words
from samples.verdicts import Verdict, slope_text, verdict


@dataclass(frozen=True, slots=True)
class OutlookLine:
    """One measurand's outlook as a row of the page's table."""

    outlook: Outlook
    value: str
    target: str
    limit: str
    headroom: str
    runway: str
    runway_aside: str
    chance: str
    slope: str


def reservoir(request: HttpRequest, tag: str) -> HttpResponseBase:
    now = timezone.now()
    found = get_object_or_404(Reservoir.objects.with_standing(), tag=tag)
    history = read_history(found)
    if request.GET.get("format") == "csv":
        return csv_response(f"{found.tag}-samples", *history_csv(history))
    outlooks = {
        one.measurand.key: one for one in Outlook.objects.filter(reservoir=found).select_related("measurand", "sample")
    }
    first, others = _charts(history, outlooks, now)
    context = {
        "reservoir": found,
        "row": board_row(found, now),
        "charge": history.current_charge,
        "verdict": _verdict(history, outlooks, now),
        "charts": first,
        "others": others,
        "latest": _latest(history),
        "lines": [_line(history, outlook, now) for outlook in outlooks.values()],
        "table": history_table(history),
        "events": list(reversed(history.events)),
        "positions": _positions(found),
        "also_serves": found.also_serves.all(),
        "zone": found.area.site.zone,
    }
    return render(request, "samples/reservoir.html", context)


def _charts(history: History, outlooks: dict[str, Outlook], now: datetime) -> tuple[list[Chart], list[Chart]]:
    """The charts that stand first, led by the measurand that speaks for the reservoir, and the small ones."""
    standing = getattr(history.reservoir, "standing", None)
    speaks = standing.worst.key if standing and standing.worst else ""
    cleanliness = cleanliness_chart(history, outlooks, now)
    others = other_charts(history, outlooks, now)
    leading = [chart for chart in others if chart.key == speaks]
    return leading + ([cleanliness] if cleanliness else []), [chart for chart in others if chart.key != speaks]


def _verdict(history: History, outlooks: dict[str, Outlook], now: datetime) -> Verdict | None:
    """Of the measurand that speaks for the reservoir; None before anything was computed."""
    standing = getattr(history.reservoir, "standing", None)
    speaks = outlooks.get(standing.worst.key) if standing and standing.worst else None
    if speaks is None:
        return None
    limit = figure_in_words(_figure(history, speaks, "limit"), speaks.measurand.key)
    return verdict(speaks, limit, history.reservoir.area.site.zone, now, slope_reaches(speaks, now))


def _figure(history: History, outlook: Outlook, which: str) -> Target | Limit | None:
    judged_at = outlook.sample.drawn_at if outlook.sample else outlook.computed_at
    figures = figures_of(history, outlook.measurand.key, judged_at, outlook.computed_at)
    return figures.target if which == "target" else figures.limit


def _line(history: History, outlook: Outlook, now: datetime) -> OutlookLine:
    unit = "steps" if outlook.measurand.kind == Measurand.Kind.COUNT else "%"
    chance = None if outlook.runway == RunwayState.PAST else outlook.chance_before_next
    return OutlookLine(
        outlook,
        _value(outlook),
        figure_in_column(_figure(history, outlook, "target"), outlook.measurand.key),
        figure_in_column(_figure(history, outlook, "limit"), outlook.measurand.key),
        headroom_text(outlook.headroom, unit),
        runway_text(outlook, now),
        runway_aside(outlook),
        chance_words(chance) if chance is not None else "",
        slope_text(outlook),
    )


def _value(outlook: Outlook) -> str:
    if outlook.value is not None:
        return number_text(outlook.value, outlook.measurand.decimals)
    if outlook.low is None and outlook.high is None:
        return ""
    if outlook.high is None:
        return f"over {bound_text(outlook.low or 0.0)}"
    return f"{bound_text(outlook.low or 0.0)} to {bound_text(outlook.high)}"


def _latest(history: History) -> dict[str, Any] | None:
    """The latest accepted sample that carries a code, or else the latest accepted one."""
    coded = [sample for sample in history.accepted if code_text(sample.current_results)]
    sample = coded[-1] if coded else history.latest
    if sample is None:
        return None
    counts = [result for result in sample.current_results if result.measurand.kind == Measurand.Kind.COUNT]
    return {"sample": sample, "code": code_text(sample.current_results), "counts": counts}


def _positions(found: Reservoir) -> list[FilterPosition]:
    fitted = Element.objects.filter(removed_on=None)
    return list(found.filter_positions.prefetch_related(Prefetch("elements", queryset=fitted, to_attr="fitted")))
