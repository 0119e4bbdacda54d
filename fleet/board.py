"""The board in numbers and words: which rows, in which order, and what each says. It reads Standing rows only."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any

from django.db.models import Count, F, Q, QuerySet

from fleet.models import Reservoir, RunwayState, Standing, StandingWord
from fleet.querysets import ReservoirQuerySet
from fleet.wording import age_text, headroom_text, runway_aside, runway_text

FORECAST_DAYS = 30
# The bar spans 4 code steps inside the limit to 3 past it; a quarter of the span counts as one step elsewhere.
BAR_LEFT, BAR_RIGHT, BAR_WIDTH = -4.0, 3.0, 260.0
SPARK_WIDTH, SPARK_HEIGHT = 90.0, 20.0

SORTS: dict[str, tuple[Any, ...]] = {
    "worst": (F("standing__rank").asc(nulls_last=True), F("standing__room").asc(nulls_last=True)),
    "criticality": (F("criticality").asc(), F("standing__rank").asc(nulls_last=True)),
    "reservoir": (F("machine__name").asc(), F("name").asc()),
    "code": (F("standing__code_order").desc(nulls_last=True),),
    "headroom": (F("standing__room").asc(nulls_last=True),),
    "runway": (F("standing__past_since").asc(nulls_last=True), F("standing__runway_early").asc(nulls_last=True)),
    "age": (F("standing__last_drawn_at").asc(nulls_first=True),),
}


@dataclass(frozen=True, slots=True)
class Bar:
    """Positions along the headroom bar, in its own units; None where there is nothing to draw."""

    value: float | None
    target: float | None
    limit: float | None
    band: tuple[float, float] | None
    off_scale: bool

    @property
    def band_width(self) -> float:
        return round(self.band[1] - self.band[0], 1) if self.band else 0.0


@dataclass(frozen=True, slots=True)
class BoardRow:
    reservoir: Reservoir
    standing: Standing | None
    bar: Bar
    spark: str
    spark_end: tuple[float, float] | None
    headroom: str
    runway: str
    runway_aside: str
    age: str

    @property
    def word(self) -> str:
        return self.standing.word if self.standing else StandingWord.NO_CURRENT_SAMPLE


@dataclass(frozen=True, slots=True)
class Totals:
    """How many active reservoirs stand how; `coming` are not past yet and could pass within 30 days."""

    all: int
    within: int
    over: int
    past: int
    cannot_tell: int
    no_sample: int
    coming: int
    in_doubt: int

    @property
    def within_percent(self) -> int:
        return round(100 * self.within / self.all) if self.all else 0


def bar_of(standing: Standing | None) -> Bar:
    """Where value, target, limit and the 80 % band of the next planned sample stand on the bar."""
    if standing is None or standing.value_at is None:
        return Bar(None, None, None, None, False)
    step = 25.0 if standing.headroom_unit == "%" else 1.0

    def along(steps: float | None) -> float | None:
        return None if steps is None else _x(steps / step)

    low, high = along(standing.band_low_at), along(standing.band_high_at)
    # What is past its limit gets a date since when, not a forecast.
    known = low is not None and high is not None and standing.word != StandingWord.PAST_LIMIT
    band = (low or 0.0, high or 0.0) if known else None
    off = not BAR_LEFT <= standing.value_at / step <= BAR_RIGHT
    limit = _x(0.0) if standing.limit_text or standing.headroom is not None else None
    return Bar(along(standing.value_at), along(standing.target_at), limit, band, off)


def _x(steps: float) -> float:
    share = (min(max(steps, BAR_LEFT), BAR_RIGHT) - BAR_LEFT) / (BAR_RIGHT - BAR_LEFT)
    return round(share * BAR_WIDTH, 1)


def spark_of(values: list[float]) -> tuple[str, tuple[float, float] | None]:
    """The last values as points of a polyline, and where it ends. Two steps high at least, so that noise looks calm."""
    if not values:
        return "", None
    low, high = min(values), max(values)
    spread = max(high - low, 2.0)
    middle = (low + high) / 2
    step = SPARK_WIDTH / max(len(values) - 1, 1)
    points = [
        (round(n * step, 1), round(SPARK_HEIGHT * (0.5 - (value - middle) / spread), 1))
        for n, value in enumerate(values)
    ]
    return " ".join(f"{x},{y}" for x, y in points), points[-1]


def board_row(reservoir: Reservoir, as_of: datetime) -> BoardRow:
    standing = getattr(reservoir, "standing", None)
    spark, end = spark_of(standing.last_values if standing else [])
    return BoardRow(
        reservoir,
        standing,
        bar_of(standing),
        spark,
        end,
        headroom_text(standing.headroom, standing.headroom_unit) if standing else "",
        runway_text(standing, as_of) if standing else "",
        runway_aside(standing) if standing else "",
        age_text(standing.last_drawn_at, as_of) if standing else "no sample",
    )


def totals(reservoirs: QuerySet[Reservoir], as_of: datetime) -> Totals:
    """Counts over the given reservoirs, in one query."""
    soon = as_of + timedelta(days=FORECAST_DAYS)
    word = "standing__word"
    found = reservoirs.aggregate(
        all=Count("pk"),
        within=Count("pk", filter=Q(**{word: StandingWord.WITHIN_TARGET})),
        over=Count("pk", filter=Q(**{word: StandingWord.OVER_TARGET})),
        past=Count("pk", filter=Q(**{word: StandingWord.PAST_LIMIT})),
        cannot_tell=Count("pk", filter=Q(**{word: StandingWord.CANNOT_TELL})),
        no_sample=Count("pk", filter=Q(**{word: StandingWord.NO_CURRENT_SAMPLE}) | Q(standing=None)),
        coming=Count("pk", filter=coming_soon(soon)),
        in_doubt=Count("pk", filter=Q(standing__in_doubt__gt=0)),
    )
    return Totals(**found)


def coming_soon(soon: datetime) -> Q:
    """A chance of one in ten or more to have passed the limit by then, and not past it yet."""
    return Q(standing__runway=RunwayState.DATED, standing__runway_early__lte=soon) & ~Q(
        standing__word=StandingWord.PAST_LIMIT
    )


def ordered(reservoirs: ReservoirQuerySet, sort: str, downward: bool) -> ReservoirQuerySet:
    """In the order asked for; equal rows by criticality and then by name, so that the order never flickers."""
    keys = [key.copy() for key in SORTS.get(sort, SORTS["worst"])]
    if downward:
        for key in keys:
            key.reverse_ordering()
    return reservoirs.order_by(*keys, "criticality", "machine__name", "name", "pk")
