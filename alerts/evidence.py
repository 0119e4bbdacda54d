"""The figures behind an alert: its measurand's outlook and the values before it, for the page and the mail."""

from dataclasses import dataclass, replace
from datetime import datetime
from math import log2

from alerts import facts, sentences
from alerts.models import Alert
from alerts.rules import OutlookFacts
from samples.models import Outlook, Result, Sample

SHOWN_BEFORE = 3


@dataclass(frozen=True, slots=True)
class PastValue:
    """One accepted value that came before the alert's sample."""

    sample_id: int
    drawn_at: datetime
    text: str
    known: OutlookFacts


@dataclass(frozen=True, slots=True)
class Evidence:
    """What an alert rests on. `outlook` is today's, None for an overdue sample or a measurand that is gone."""

    outlook: OutlookFacts | None
    before: tuple[PastValue, ...]
    direction: str
    outlook_sentence: str
    certainty: str


def evidence_of(alert: Alert) -> Evidence:
    """Two questions to the database: the outlook, and the three values before the alert's sample."""
    zone = alert.reservoir.area.site.zone
    row = (
        Outlook.objects.filter(reservoir=alert.reservoir_id, measurand=alert.measurand_id)
        .select_related("measurand", "sample")
        .first()
        if alert.measurand_id
        else None
    )
    outlook = facts.outlook_facts(row) if row else None
    before = _values_before(alert, outlook) if outlook else ()
    return Evidence(
        outlook=outlook,
        before=before,
        direction=_direction(outlook, before) if outlook else "",
        outlook_sentence=sentences.runway_sentence(outlook, zone) if outlook and alert.is_open else "",
        certainty=certainty(alert, outlook),
    )


def certainty(alert: Alert, outlook: OutlookFacts | None) -> str:
    """How sure the reading is: whether its sample still stands, and how many there are in its stretch."""
    if alert.sample is None or outlook is None:
        return ""
    if not alert.rests_on_sound_sample:
        return f"The sample it rests on is {alert.sample.get_verdict_display()} now."
    count = f"{outlook.n} samples" if outlook.n != 1 else "one sample"
    return f"The sample is accepted; the trend rests on {count}."


def _values_before(alert: Alert, outlook: OutlookFacts) -> tuple[PastValue, ...]:
    results = Result.objects.filter(
        measurand=alert.measurand_id,
        current=True,
        sample__reservoir=alert.reservoir_id,
        sample__verdict=Sample.Verdict.ACCEPTED,
    ).select_related("sample")
    if alert.sample is not None:
        results = results.filter(sample__drawn_at__lt=alert.sample.drawn_at)
    newest = results.order_by("-sample__drawn_at", "-sample__pk")[:SHOWN_BEFORE]
    return tuple(_past_value(result, outlook) for result in newest)


def _past_value(result: Result, outlook: OutlookFacts) -> PastValue:
    known = replace(outlook, value=result.value, low=result.low, high=result.high)
    return PastValue(result.sample_id, result.sample.drawn_at, sentences.value_text(known), known)


def _direction(outlook: OutlookFacts, before: tuple[PastValue, ...]) -> str:
    """Up or down on the value before: in code steps for counts, in the unit for others; "" when either is not exact."""
    if not before or outlook.value is None or before[0].known.value is None:
        return ""
    new, old = outlook.value, before[0].known.value
    if outlook.is_count:
        if new <= 0 or old <= 0:
            return ""
        steps = log2(new / old)
        return _moved(steps, sentences.steps_text(abs(steps)), 0.05)
    smallest = 0.5 * 10**-outlook.decimals
    amount = f"{sentences.number_text(abs(new - old), outlook.decimals)} {outlook.unit}".strip()
    return _moved(new - old, amount, smallest)


def _moved(change: float, amount: str, smallest: float) -> str:
    if abs(change) < smallest:
        return "the same as the sample before"
    return f"{'up' if change > 0 else 'down'} {amount} on the sample before"
