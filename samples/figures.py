"""Charts as plain data: a history in, a Plotly figure out as a dict. Pure; the browser only draws it.

Colours are names of the stylesheet's variables with an @ before them (`@within`), so that one figure serves the light
and the dark scheme; the drawing script puts the colours in.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from datetime import datetime, timedelta
from typing import Any

DOT = 7
# A name takes about a sixth of the chart's width.
NAME_WIDTH = 0.16
SAME_TIME = timedelta(days=3)
FAN_ALPHA = "2b"


@dataclass(frozen=True, slots=True)
class Dot:
    """One sample on the chart: `y` on the drawn axis; `low` and `high` where only an interval is known."""

    at: datetime
    y: float
    text: str
    low: float | None = None
    high: float | None = None
    in_doubt: bool = False


@dataclass(frozen=True, slots=True)
class Step:
    """A target or limit that held from one moment to the next."""

    start: datetime
    end: datetime
    y: float


@dataclass(frozen=True, slots=True)
class Mark:
    """Something that was done, drawn as a line down the chart."""

    at: datetime
    label: str
    breaks: bool


@dataclass(frozen=True, slots=True)
class FanArea:
    """The forecast: median and 80 % range at each moment, on the drawn axis."""

    at: Sequence[datetime]
    median: Sequence[float]
    low: Sequence[float]
    high: Sequence[float]


@dataclass(frozen=True)
class Line:
    """One measurand: its stretches (a break in the line between two of them), figures and forecast."""

    name: str
    colour: str
    stretches: Sequence[Sequence[Dot]]
    targets: Sequence[Step] = ()
    limits: Sequence[Step] = ()
    fan: FanArea | None = None
    symbol: str = "circle"


@dataclass(frozen=True)
class ChartPlan:
    """A whole chart. `axis` names what stands upright, with its unit; `now` is the dividing line to the forecast."""

    axis: str
    lines: Sequence[Line]
    now: datetime
    marks: Sequence[Mark] = ()
    log_axis: bool = False
    tick_step: float | None = None
    notes: list[str] = field(default_factory=list)


def figure(plan: ChartPlan) -> dict[str, Any]:
    """The chart as Plotly's data and layout."""
    data = [trace for line in plan.lines for trace in _line_traces(line)]
    return {"data": data, "layout": _layout(plan)}


def _line_traces(line: Line) -> list[dict[str, Any]]:
    traces = [*_fan_traces(line), *_step_traces(line), _samples_trace(line)]
    doubtful = [dot for stretch in line.stretches for dot in stretch if dot.in_doubt]
    return [*traces, _doubt_trace(line, doubtful)] if doubtful else traces


def _samples_trace(line: Line) -> dict[str, Any]:
    """The samples themselves, joined inside a stretch; an interval is a bar with an open mark, never a firm dot."""
    dots: list[Dot | None] = []
    for stretch in line.stretches:
        dots += [dot for dot in stretch if not dot.in_doubt]
        dots.append(None)
    rows = [(None, None, "", 0.0, 0.0) if dot is None else _row(dot) for dot in dots[:-1]]
    bars = any(row[3] or row[4] for row in rows)
    trace: dict[str, Any] = {
        "type": "scatter",
        "mode": "lines+markers",
        "name": line.name,
        "x": [row[0] for row in rows],
        "y": [row[1] for row in rows],
        "text": [row[2] for row in rows],
        "hovertemplate": f"%{{text}}<br>%{{x|%-d %b %Y}}<extra>{line.name}</extra>",
        "line": {"color": f"@{line.colour}", "width": 2},
        "marker": {
            "color": f"@{line.colour}",
            "size": DOT,
            "symbol": [f"{line.symbol}-open" if row[3] or row[4] else line.symbol for row in rows],
        },
        "connectgaps": False,
    }
    if bars:
        trace["error_y"] = _bars(line, rows)
    return trace


def _row(dot: Dot) -> tuple[str, float, str, float, float]:
    up = dot.high - dot.y if dot.high is not None else 0.0
    down = dot.y - dot.low if dot.low is not None else 0.0
    return _moment(dot.at), dot.y, dot.text, up, down


def _bars(line: Line, rows: Sequence[tuple[Any, ...]]) -> dict[str, Any]:
    return {
        "type": "data",
        "symmetric": False,
        "array": [row[3] for row in rows],
        "arrayminus": [row[4] for row in rows],
        "color": f"@{line.colour}",
        "thickness": 1.5,
        "width": 3,
    }


def _doubt_trace(line: Line, dots: Sequence[Dot]) -> dict[str, Any]:
    return {
        "type": "scatter",
        "mode": "markers",
        "name": f"{line.name}, in doubt or set aside",
        "x": [_moment(dot.at) for dot in dots],
        "y": [dot.y for dot in dots],
        "text": [dot.text for dot in dots],
        "hovertemplate": "%{text}<br>%{x|%-d %b %Y}<extra>not in the trend</extra>",
        "marker": {"color": f"@{line.colour}", "size": DOT + 2, "symbol": "x-thin-open", "line": {"width": 2}},
        "showlegend": False,
    }


def _step_traces(line: Line) -> list[dict[str, Any]]:
    drawn = []
    for steps, dash, word in ((line.targets, "dot", "target"), (line.limits, "solid", "limit")):
        if steps:
            drawn.append(_step_trace(line, steps, dash, word))
    return drawn


def _step_trace(line: Line, steps: Sequence[Step], dash: str, word: str) -> dict[str, Any]:
    x: list[str | None] = []
    y: list[float | None] = []
    for step in steps:
        x += [_moment(step.start), _moment(step.end), None]
        y += [step.y, step.y, None]
    return {
        "type": "scatter",
        "mode": "lines",
        "name": f"{line.name} {word}",
        "x": x[:-1],
        "y": y[:-1],
        "line": {"color": f"@{line.colour}", "width": 1.2, "dash": dash},
        "opacity": 0.75,
        "hovertemplate": f"%{{y:.3g}}<extra>{line.name}, {word}</extra>",
        "showlegend": False,
    }


def _fan_traces(line: Line) -> list[dict[str, Any]]:
    if line.fan is None:
        return []
    x = [_moment(at) for at in line.fan.at]
    fill = f"@{line.colour}/{FAN_ALPHA}"
    quiet = {"type": "scatter", "mode": "lines", "x": x, "hoverinfo": "skip", "showlegend": False}
    return [
        {**quiet, "y": list(line.fan.low), "line": {"width": 0}},
        {**quiet, "y": list(line.fan.high), "line": {"width": 0}, "fill": "tonexty", "fillcolor": fill},
        {
            **quiet,
            "y": list(line.fan.median),
            "name": f"{line.name} forecast",
            "line": {"color": f"@{line.colour}", "width": 1.6, "dash": "dash"},
        },
    ]


def _layout(plan: ChartPlan) -> dict[str, Any]:
    axis: dict[str, Any] = {"title": {"text": plan.axis, "standoff": 8}, "zeroline": False, "gridcolor": "@rule"}
    if plan.log_axis:
        axis |= {"type": "log", "dtick": 1}
    if plan.tick_step:
        axis |= {"dtick": plan.tick_step, "range": _range(plan)}
    return {
        "paper_bgcolor": "rgba(0,0,0,0)",
        "plot_bgcolor": "rgba(0,0,0,0)",
        "font": {
            "color": "@ink",
            "size": 13,
            "family": "system-ui, -apple-system, Segoe UI, Noto Sans, DejaVu Sans, sans-serif",
        },
        "margin": {"l": 52, "r": 12, "t": 26, "b": 34},
        "hovermode": "closest",
        "dragmode": False,
        "showlegend": len(plan.lines) > 1,
        "legend": {"orientation": "h", "y": -0.14, "x": 0, "traceorder": "normal"},
        "xaxis": {"type": "date", "showgrid": False, "linecolor": "@rule", "hoverformat": "%-d %b %Y"},
        "yaxis": axis,
        "shapes": [*_mark_shapes(plan), _now_shape(plan.now)],
        "annotations": [_mark_note(mark) for mark in _named_marks(plan)],
    }


def _range(plan: ChartPlan) -> list[float]:
    """From half a step below the lowest to half a step above the highest thing drawn."""
    dots = [dot.y for line in plan.lines for stretch in line.stretches for dot in stretch]
    steps = [step.y for line in plan.lines for step in (*line.targets, *line.limits)]
    edges = [y for line in plan.lines if line.fan for y in (*line.fan.low, *line.fan.high)]
    drawn = [*dots, *steps, *edges]
    return [min(drawn) - 0.5, max(drawn) + 0.5]


def _mark_shapes(plan: ChartPlan) -> list[dict[str, Any]]:
    return [
        {
            "type": "line",
            "x0": _moment(mark.at),
            "x1": _moment(mark.at),
            "yref": "paper",
            "y0": 0,
            "y1": 1 if mark.breaks else 0.04,
            "line": {"color": "@ink" if mark.breaks else "@muted", "width": 1 if mark.breaks else 2},
        }
        for mark in plan.marks
    ]


def _named_marks(plan: ChartPlan) -> list[Mark]:
    """What broke the trend, latest first: marks of one time share a name; one that would overlap goes without."""
    breaking = sorted((mark for mark in plan.marks if mark.breaks), key=lambda mark: mark.at, reverse=True)
    dots = [dot.at for line in plan.lines for stretch in line.stretches for dot in stretch]
    if not breaking or not dots:
        return breaking
    least = (max(dots[-1], plan.now) - min(dots)) * NAME_WIDTH
    named: list[Mark] = []
    for mark in breaking:
        if not named or named[-1].at - mark.at >= least:
            named.append(mark)
        elif named[-1].at - mark.at <= SAME_TIME and mark.label not in named[-1].label:
            named[-1] = Mark(mark.at, f"{mark.label}, {named[-1].label}", True)
    return named


def _mark_note(mark: Mark) -> dict[str, Any]:
    return {
        "x": _moment(mark.at),
        "yref": "paper",
        "y": 1,
        "text": mark.label,
        "showarrow": False,
        "xanchor": "left",
        "yanchor": "bottom",
        "font": {"size": 11, "color": "@muted"},
    }


def _now_shape(now: datetime) -> dict[str, Any]:
    line = {"color": "@rule", "width": 2}
    return {"type": "line", "x0": _moment(now), "x1": _moment(now), "yref": "paper", "y0": 0, "y1": 1, "line": line}


def _moment(at: datetime) -> str:
    """Wall-clock time as Plotly reads it: the caller has put it in the site's zone."""
    return at.replace(tzinfo=None).isoformat(timespec="minutes")
