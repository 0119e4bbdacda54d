"""One measurand's outlook as a person would say it: where it stands, which way it goes, when it passes, how sure."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from zoneinfo import ZoneInfo

from fleet.models import Measurand, RunwayState, StandingWord
from fleet.wording import HORIZON_MONTHS, span_text
from samples.models import Outlook
from samples.trends.forecast import chance_words

CLEAR_MONTHS = 18.0
HEADINGS = {
    StandingWord.PAST_LIMIT: "Past the limit.",
    StandingWord.OVER_TARGET: "Over target.",
    StandingWord.CANNOT_TELL: "Cannot tell.",
    StandingWord.WITHIN_TARGET: "Within target.",
    StandingWord.NO_CURRENT_SAMPLE: "No current sample.",
}


@dataclass(frozen=True, slots=True)
class Verdict:
    """`heading` in a few words; `sentences` say the rest. `limit` is how the limit is spoken of: “15”, “500 mg/kg”."""

    heading: str
    sentences: list[str]


def verdict(
    outlook: Outlook, limit: str, zone: ZoneInfo, as_of: datetime, slope_reaches: datetime | None = None
) -> Verdict:
    """What the page says first about the measurand that speaks for the reservoir.

    `slope_reaches`: when the plain slope would meet the limit; said beside a forecast that believes it only slowly.
    """
    measurand = outlook.measurand
    heading = _heading(outlook)
    sentences = [
        _direction(outlook, measurand, zone),
        _passing(outlook, limit, zone, as_of),
        _along_the_slope(outlook, slope_reaches, zone),
        _chance(outlook, zone),
    ]
    return Verdict(heading, [sentence for sentence in sentences if sentence])


def _heading(outlook: Outlook) -> str:
    heading = HEADINGS[StandingWord(outlook.word)]
    heading_for_limit = outlook.runway == RunwayState.DATED and outlook.runway_median is not None
    return f"{heading[:-1]}, heading for the limit." if heading_for_limit else heading


def quantity(measurand: Measurand) -> str:
    """What the sentence is about: “the ≥14 µm(c) count”, “water”."""
    return f"the {measurand.symbol} count" if measurand.kind == Measurand.Kind.COUNT else lower_first(measurand.name)


def _direction(outlook: Outlook, measurand: Measurand, zone: ZoneInfo) -> str:
    since = f" since {day(outlook.stretch_from, zone)}" if outlook.stretch_from else ""
    what = quantity(measurand)
    what = what[0].upper() + what[1:]
    if not outlook.n:
        return ""
    if outlook.trend.startswith("too few"):
        samples = "sample" if outlook.n == 1 else "samples"
        return f"{what}: {outlook.n} {samples}{since}, too few to show a trend by themselves." if outlook.n else ""
    if outlook.trend not in {"rising", "falling"}:
        return "" if outlook.runway == RunwayState.PAST else f"{what} shows no trend{since}."
    doubling = outlook.doubling_months
    if doubling is None or abs(doubling) > CLEAR_MONTHS:
        return f"{what} is {outlook.trend}{since}."
    verb = "doubling" if outlook.trend == "rising" else "halving"
    return f"{what} is {verb} every {span_text(round(abs(doubling) * 30.4375))}{since}."


def _passing(outlook: Outlook, limit: str, zone: ZoneInfo, as_of: datetime) -> str:
    if outlook.runway == RunwayState.PAST:
        return f"It has been past the limit of {limit} since the sample of {day(outlook.past_since, zone)}."
    if outlook.runway == RunwayState.BEYOND:
        return f"It is not expected to pass the limit of {limit} within {HORIZON_MONTHS} months."
    if outlook.runway == RunwayState.CANNOT_SAY:
        if not outlook.n:
            return outlook.refusal_sentence
        return f"No forecast: {lower_first(outlook.refusal_sentence)}" if outlook.refusal_sentence else ""
    early = "as early as today" if _is_now(outlook.runway_early, as_of) else day(outlook.runway_early, zone)
    if outlook.runway_median is None:
        return (
            f"It may pass the limit of {limit} from {early} on; more likely it does not within {HORIZON_MONTHS} months."
        )
    late = day(outlook.runway_late, zone) if outlook.runway_late else f"beyond {HORIZON_MONTHS} months"
    return f"It passes the limit of {limit} around {day(outlook.runway_median, zone)} (80 % range {early} – {late})."


def _along_the_slope(outlook: Outlook, reaches: datetime | None, zone: ZoneInfo) -> str:
    """Only where the trend is shown and the forecast puts its middle later than the slope would."""
    median = outlook.runway_median
    forecast = outlook.runway in {RunwayState.DATED, RunwayState.BEYOND}
    if reaches is None or not forecast or outlook.trend != "rising" or (median is not None and median <= reaches):
        return ""
    return (
        f"If it kept climbing as it does now it would be there around {day(reaches, zone)}; "
        "the forecast allows for climbs that ease off, and believes it more slowly."
    )


def _is_now(moment: datetime | None, as_of: datetime) -> bool:
    return moment is not None and moment <= as_of


def _chance(outlook: Outlook, zone: ZoneInfo) -> str:
    if outlook.chance_before_next is None or outlook.runway in {RunwayState.PAST, RunwayState.CANNOT_SAY}:
        return ""
    chance = chance_words(outlook.chance_before_next)
    return f"The chance that the next planned sample ({day(outlook.next_planned_at, zone)}) is past it is {chance}."


def day(moment: datetime | None, zone: ZoneInfo) -> str:
    """4 Mar 2027, in site time."""
    return "" if moment is None else moment.astimezone(zone).strftime("%-d %b %Y")


def lower_first(sentence: str) -> str:
    return sentence[:1].lower() + sentence[1:]


def slope_text(outlook: Outlook) -> str:
    """The Theil–Sen slope with its 90 % interval, on the measurand's scale per month; empty when too few."""
    if outlook.slope is None or outlook.slope_low is None or outlook.slope_high is None:
        return ""
    percent = "% of new" if outlook.baseline else outlook.measurand.unit
    unit = {"count": "code steps", "log": "doublings", "percent": percent, "linear": outlook.measurand.unit}
    if max(abs(edge) for edge in (outlook.slope, outlook.slope_low, outlook.slope_high)) < 0.005:
        return "flat"
    return (
        f"{outlook.slope:+.2f} {unit[outlook.measurand.scale]} a month "
        f"({outlook.slope_low:+.2f} to {outlook.slope_high:+.2f}, 90 %)"
    ).replace("-", "\N{MINUS SIGN}")
