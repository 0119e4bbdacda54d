"""What a reservoir's Standing row says, from its outlooks: which measurand speaks, and the figures the board draws."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import datetime, timedelta
from typing import TYPE_CHECKING, Any

import numpy as np

from fleet.models import Measurand, RunwayState, StandingWord
from fleet.wording import headroom_text
from samples.history import History
from samples.lines import CODE_KEY
from samples.models import Outlook, Sample
from samples.newest_bottle import of_newest_bottle
from samples.sample_codes import code_of
from samples.series import figures_of
from samples.trends.scales import observe

if TYPE_CHECKING:
    from samples.outlooks import Computed

RANKS = {
    StandingWord.PAST_LIMIT: 0,
    StandingWord.OVER_TARGET: 1,
    StandingWord.CANNOT_TELL: 2,
    StandingWord.NO_CURRENT_SAMPLE: 3,
    StandingWord.WITHIN_TARGET: 4,
}
# Which word speaks for the reservoir; a measurand without a current sample only where nothing else has one.
SPEAKS_FIRST = (
    StandingWord.PAST_LIMIT,
    StandingWord.OVER_TARGET,
    StandingWord.CANNOT_TELL,
    StandingWord.WITHIN_TARGET,
    StandingWord.NO_CURRENT_SAMPLE,
)
PERCENT_A_STEP = 25.0
SHOWN_VALUES = 12


def standing_facts(history: History, computed: Sequence[Computed], now: datetime) -> dict[str, Any]:
    """The fields of the Standing row, without its bookkeeping."""
    judged = _speaking([one for one in computed if is_judged(one.row)])
    worst = min(judged, key=_badness, default=None)
    word = StandingWord(worst.row.word) if worst else _unjudged_word(history, now)
    return {
        "word": word,
        "rank": RANKS[word],
        **_sample_facts(history, now),
        **_worst_facts(worst),
        **_runway_facts([one.row for one in judged]),
    }


def _speaking(judged: Sequence[Computed]) -> list[Computed]:
    """Everything that is judged, of the counts only those of the newest bottle."""
    counts = [one for one in judged if one.measurand.family == Measurand.Family.DIRT]
    newest = of_newest_bottle(counts, lambda one: one.current[-1].drawn_at if one.current else None)
    return [*newest, *(one for one in judged if one.measurand.family != Measurand.Family.DIRT)]


def is_judged(outlook: Outlook) -> bool:
    """Whether there is any target or limit to stand against."""
    figures = (outlook.target_low, outlook.target_high, outlook.limit_low, outlook.limit_high)
    return any(figure is not None for figure in figures)


def _badness(one: Computed) -> tuple[int, float]:
    room = _room(one)
    return SPEAKS_FIRST.index(StandingWord(one.row.word)), np.inf if room is None else room


def _room(one: Computed) -> float | None:
    """Headroom in code steps; a quarter of the span counts as one for what is not a count."""
    headroom = one.row.headroom
    return headroom if headroom is None or one.measurand.kind == "count" else headroom / PERCENT_A_STEP


def _unjudged_word(history: History, now: datetime) -> StandingWord:
    """No target and no limit: a current sample cannot be judged."""
    latest = history.latest
    stale = latest is None or now - latest.drawn_at > timedelta(days=2 * history.reservoir.interval_days)
    return StandingWord.NO_CURRENT_SAMPLE if stale else StandingWord.CANNOT_TELL


def _sample_facts(history: History, now: datetime) -> dict[str, Any]:
    charge = history.charge_at(now)
    of_this_oil = [s for s in history.accepted if charge is None or s.charge_id == charge.pk]
    coded = [sample for sample in of_this_oil if code_of(sample.current_results)]
    code = code_of(coded[-1].current_results) if coded else None
    figures = figures_of(history, CODE_KEY, coded[-1].drawn_at if coded else now, now)
    last = history.latest.drawn_at if history.latest else None
    return {
        "code_text": str(code) if code else "",
        "code_order": [-1 if size.rank is None else size.rank for size in code.sizes] if code else [],
        "target_text": figures.target.text if figures.target else "",
        "limit_text": figures.limit.text if figures.limit else "",
        "last_drawn_at": last,
        "next_due_at": _next_due(history, last),
        "in_doubt": sum(sample.verdict == Sample.Verdict.IN_DOUBT for sample in history.samples),
    }


def _next_due(history: History, last: datetime | None) -> datetime:
    """One interval after the last sample that counts; where there is none, after the filling and the registration."""
    if last is None:
        charge = history.current_charge
        begun = history.reservoir.registered_at
        last = max(begun, charge.started_at) if charge else begun
    return history.reservoir.next_planned(last)


def _worst_facts(worst: Computed | None) -> dict[str, Any]:
    if worst is None:
        return {
            **dict.fromkeys(("worst", "headroom", "room", "value_at", "target_at", "band_low_at", "band_high_at")),
            "headroom_unit": "steps",
            "because": "No target and no limit is set.",
            "last_values": [],
        }
    row = worst.row
    unit = "steps" if worst.measurand.kind == "count" else "%"
    return {
        "worst": worst.measurand,
        "because": _because(worst, unit),
        "headroom": row.headroom,
        "room": _room(worst),
        "headroom_unit": unit,
        "value_at": row.value_at,
        "target_at": row.target_at,
        "band_low_at": row.band_low_at,
        "band_high_at": row.band_high_at,
        "last_values": _last_values(worst),
    }


def _because(worst: Computed, unit: str) -> str:
    row = worst.row
    name = worst.measurand.name
    if row.word == StandingWord.NO_CURRENT_SAMPLE:
        return row.refusal_sentence or f"{name}: no current sample."
    if row.headroom is None:
        return f"{name}: {StandingWord(row.word).label}; no limit is set."
    far = headroom_text(abs(row.headroom), unit).lstrip("+") + (" code steps" if unit == "steps" else "")
    where = f"{far} of room to the limit" if row.headroom >= 0 else f"{far} past the limit"
    return f"{name}: {StandingWord(row.word).label}, {where}."


def _last_values(worst: Computed) -> list[float]:
    """The last twelve on the measurand's scale, oldest first."""
    shown = [reported.result for reported in worst.series[-SHOWN_VALUES:]]
    columns = [
        [np.nan if getattr(result, name) is None else getattr(result, name) for result in shown]
        for name in ("value", "low", "high")
    ]
    observed = observe(columns[0], columns[1], columns[2], [result.qualifier for result in shown], worst.spec)
    return [round(float(y), 3) for y in observed.y if np.isfinite(y)]


def _runway_facts(rows: Sequence[Outlook]) -> dict[str, Any]:
    """The runway that ends first, and the largest chance, over everything that is judged."""
    past = [row for row in rows if row.runway == RunwayState.PAST]
    dated = [row for row in rows if row.runway == RunwayState.DATED]
    beyond = [row for row in rows if row.runway == RunwayState.BEYOND]
    first = min(past, key=lambda row: row.past_since or row.computed_at, default=None)
    first = first or min(dated, key=_soonest, default=None) or next(iter(beyond), None) or next(iter(rows), None)
    chances = [row.chance_before_next for row in rows if row.chance_before_next is not None]
    names = ("runway_early", "runway_median", "runway_late", "past_since")
    return {
        "runway": first.runway if first else RunwayState.CANNOT_SAY,
        "runway_reason": (first.refusal_sentence if first else "No target and no limit is set.")[:200],
        "chance_before_next": max(chances, default=None),
        **{name: getattr(first, name) if first else None for name in names},
    }


def _soonest(row: Outlook) -> tuple[bool, Any]:
    """By median where there is one, by the early end after that."""
    return (row.runway_median is None, row.runway_median or row.runway_early)
