"""What a finding says in plain words: a headline for lists and subjects, and a sentence of evidence. Pure."""

from collections.abc import Sequence
from datetime import datetime, tzinfo
from decimal import Decimal
from typing import Final

from alerts.rules import Finding, Kind, OutlookFacts, Speaker
from samples.coding.iso4406 import scale_number

MINUS: Final = "\N{MINUS SIGN}"
HORIZON: Final = "24 months"
CERTAIN_LINE: Final = {Kind.PAST_LIMIT: "limit", Kind.FORECAST: "limit", Kind.OVER_TARGET: "target"}


def day_text(moment: datetime, zone: tzinfo, year: bool = True) -> str:
    """A day on the site's clock: 6 Mar 2026, or 6 Mar."""
    local = moment.astimezone(zone)
    return f"{local.day} {local:%b %Y}" if year else f"{local.day} {local:%b}"


def number_text(value: float, decimals: int) -> str:
    return f"{value:.{decimals}f}".replace("-", MINUS)


def code_text(per_ml: float) -> str:
    """The ISO 4406 scale number of a count [1/mL]."""
    return str(scale_number(Decimal(str(max(per_ml, 0.0))) * 100))


def value_text(outlook: OutlookFacts) -> str:
    """The latest value for a headline: code 17; 620 mg/kg; <10 mg/kg; 52.3 mm²/s (+13.7 % of new)."""
    if outlook.is_count:
        return f"code {_count_code(outlook)}"
    text = f"{_bounded(outlook)} {outlook.unit}".strip()
    change = percent_change(outlook)
    return text if change is None else f"{text} ({_signed(change)} % of new)"


def percent_change(outlook: OutlookFacts) -> float | None:
    """Change of the value against the new oil, %, where that is how its limits are written."""
    if not outlook.is_percent or outlook.value is None or not outlook.baseline:
        return None
    return 100.0 * (outlook.value / outlook.baseline - 1.0)


def line_text(outlook: OutlookFacts, line: str) -> str:
    """The side of the target or limit that the value is nearer to: limit 15; limit 500; not below 3.0; limit +10 %."""
    low, high = _line(outlook, line)
    if low is None and high is None:
        return f"no {line}"
    if high is None or (low is not None and _nearer_low(outlook, low, high)):
        return f"{line} not below {_figure_text(outlook, low)}"
    return f"{line} {_figure_text(outlook, high)}"


def ahead_text(outlook: OutlookFacts) -> str:
    """What may come, by the side that the value is nearer to: may pass its limit 15; may fall below its limit 3.0."""
    low, high = _line(outlook, "limit")
    if low is not None and (high is None or _nearer_low(outlook, low, high)):
        return f"may fall below its limit {_figure_text(outlook, low)}"
    return f"may pass its {line_text(outlook, 'limit')}"


def headline(finding: Finding, zone: tzinfo) -> str:
    """≥14 µm(c) code 17, limit 15; or, of a forecast, ≥4 µm(c) code 18 now, may pass its limit 18: 22 % chance by
    19 Dec 2026. At most 160 characters.
    """
    outlook = finding.speaker
    if outlook is None:
        due = f"Sample due {day_text(finding.due_at, zone)}" if finding.due_at else "The planned sample"
        return f"{due} has not come"
    text = _spoken(outlook, finding.kind)
    return (text if finding.kind is not Kind.FORECAST else f"{text}{_forecast_words(outlook, zone)}")[:160]


def evidence(finding: Finding, zone: tzinfo) -> str:
    """The finding in whole sentences: what was measured, against what, and what else speaks.

    How fast it moves changes by the day and is said beside it, by `runway_sentence`.
    """
    if finding.speaker is None:
        return _overdue_evidence(finding, zone)
    outlook = finding.speaker
    parts = [
        _measured(outlook, finding.kind, zone),
        _companions(finding.companions),
        "Water is past its limit in the same bottle; an optical counter counts droplets too."
        if finding.water_too
        else "",
    ]
    return " ".join(part for part in parts if part)


def runway_sentence(outlook: OutlookFacts, zone: tzinfo) -> str:
    """How sure and how urgent: the forecast with its 80 % range and the chance by the next sample, or why not."""
    return " ".join(part for part in (_runway_only(outlook, zone), _chance_sentence(outlook, zone)) if part)


def short_name(outlook: OutlookFacts) -> str:
    return outlook.name.removeprefix("Particles ")


def over_headline(outlook: OutlookFacts) -> str:
    """The value of a measurand about which nothing speaks any more, against the line that it is inside of."""
    line = "target" if outlook.has_target and outlook.word == "within_target" else "limit"
    return f"{short_name(outlook)} {value_text(outlook)}, {line_text(outlook, line)}"[:160]


def over_sentence(outlook: OutlookFacts, zone: tzinfo) -> str:
    """What closes an alert: the later value and where it stands."""
    drawn = f"The sample drawn {day_text(outlook.drawn_at, zone)}" if outlook.drawn_at else "A later sample"
    return f"{drawn} shows {over_headline(outlook)}."


def recovery_sentence(outlook: OutlookFacts, zone: tzinfo) -> str:
    """What keeps an alert open although nothing speaks: better, but not by enough, or against the trend."""
    why = (
        "That is better, but its trend does not follow yet: one more such sample will end this."
        if outlook.is_undecided
        else "That is better, but not far enough inside to call it over."
    )
    return f"{over_sentence(outlook, zone)} {why}"


def _measured(outlook: OutlookFacts, kind: Kind, zone: tzinfo) -> str:
    """What the headline leaves out: the day, the particles counted, whose figure the line is, and how far past it."""
    line = CERTAIN_LINE[kind]
    source = outlook.limit_source if line == "limit" else outlook.target_source
    facts = [
        f"Drawn {day_text(outlook.drawn_at, zone)}" if outlook.drawn_at else "",
        f"{_significant(outlook.value)} per mL" if outlook.is_count and outlook.value is not None else "",
        f"past its limit by {distance_text(outlook)}" if kind is Kind.PAST_LIMIT and _is_past(outlook) else "",
        f"{line} from: {source}" if source else "",
    ]
    return f"{'; '.join(fact for fact in facts if fact)}."


def distance_text(outlook: OutlookFacts) -> str:
    """How far the value is from its limit, without a sign: 1.7 code steps; 24 % of the span from new oil to limit."""
    steps = abs(outlook.headroom or 0.0)
    return steps_text(steps) if outlook.is_count else f"{steps:.0f} % of the span"


def steps_text(steps: float) -> str:
    """1.0 code step; 1.7 code steps."""
    return f"{steps:.1f} code step" if f"{steps:.1f}" == "1.0" else f"{steps:.1f} code steps"


def _is_past(outlook: OutlookFacts) -> bool:
    return outlook.headroom is not None and outlook.headroom < 0


def _runway_only(outlook: OutlookFacts, zone: tzinfo) -> str:
    if outlook.runway == "past":
        return f"Past it since {day_text(outlook.past_since, zone)}." if outlook.past_since else ""
    if outlook.runway == "beyond_horizon":
        return f"No passing of the limit is in sight within {HORIZON}."
    if outlook.runway != "dated":
        return f"No forecast: {outlook.refusal_sentence or 'too little is known.'}"
    if outlook.is_undecided:
        return "Its trend and its latest value do not agree; the next sample tells which is right."
    early = "now" if outlook.runway_early is None else day_text(outlook.runway_early, zone)
    late = f"beyond {HORIZON}" if outlook.runway_late is None else day_text(outlook.runway_late, zone)
    if outlook.runway_median is None:
        return f"At this rate it could pass the limit from {early} on, more likely not within {HORIZON}."
    about = day_text(outlook.runway_median, zone)
    return f"At this rate it passes the limit about {about} (80 % range {early} to {late})."


def _chance_sentence(outlook: OutlookFacts, zone: tzinfo) -> str:
    if outlook.chance is None or outlook.word == Kind.PAST_LIMIT or outlook.is_undecided:
        return ""
    due = f" on {day_text(outlook.next_planned_at, zone)}" if outlook.next_planned_at else ""
    return f"Chance of passing before the next planned sample{due}: {chance_text(outlook.chance)}."


def chance_text(chance: float) -> str:
    """A chance (0 to 1) as a person says it, never 0 or 100 %."""
    if chance < 0.01:
        return "under 1 %"
    return "over 99 %" if chance > 0.99 else f"{100 * chance:.0f} %"


def _forecast_words(outlook: OutlookFacts, zone: tzinfo) -> str:
    median, due = outlook.runway_median, outlook.next_planned_at
    if median is not None and (outlook.chance is None or due is None or median <= due):
        return f" about {day_text(median, zone)}"
    by = f"by {day_text(due, zone)}" if due else "before the next sample"
    return f": {chance_text(outlook.chance or 0.0)} chance {by}"


def _spoken(outlook: OutlookFacts, kind: Kind) -> str:
    """The value and the line it speaks about. A value that is inside yet stands as what it is now."""
    if kind is Kind.FORECAST:
        return f"{short_name(outlook)} {value_text(outlook)} now, {ahead_text(outlook)}"
    return f"{short_name(outlook)} {value_text(outlook)}, {line_text(outlook, CERTAIN_LINE[kind])}"


def _companions(companions: Sequence[Speaker]) -> str:
    said = [_spoken(speaker.outlook, speaker.kind) for speaker in companions]
    return f"Also: {'; '.join(said)}." if said else ""


def _overdue_evidence(finding: Finding, zone: tzinfo) -> str:
    due = day_text(finding.due_at, zone) if finding.due_at else ""
    if finding.drawn_at is None:
        first = f"The first sample, planned for {due}, has not come. " if due else ""
        return f"{first}No sample of this reservoir is on record yet."
    missing = f"The sample planned for {due} has not come. " if due else ""
    return f"{missing}The last one was drawn {day_text(finding.drawn_at, zone)}."


def _count_code(outlook: OutlookFacts) -> str:
    if outlook.value is not None:
        return code_text(outlook.value)
    if outlook.high is not None:
        return code_text(outlook.high)
    # (low, ...) open above begins just past the bound of the number before
    return f"≥{code_text((outlook.low or 0.0) * 1.0001)}"


def _bounded(outlook: OutlookFacts) -> str:
    if outlook.value is not None:
        return number_text(outlook.value, outlook.decimals)
    if outlook.high is not None and not outlook.low:
        return f"<{number_text(outlook.high, outlook.decimals)}"
    if outlook.high is None:
        return f"over {number_text(outlook.low or 0.0, outlook.decimals)}"
    return f"{number_text(outlook.low or 0.0, outlook.decimals)} to {number_text(outlook.high, outlook.decimals)}"


def _line(outlook: OutlookFacts, line: str) -> tuple[float | None, float | None]:
    if line == "limit":
        return outlook.limit_low, outlook.limit_high
    return outlook.target_low, outlook.target_high


def _nearer_low(outlook: OutlookFacts, low: float, high: float) -> bool:
    figure = percent_change(outlook) if outlook.is_percent else outlook.value
    return figure is not None and abs(figure - low) < abs(figure - high)


def _figure_text(outlook: OutlookFacts, figure: float | None) -> str:
    if figure is None:
        return ""
    if outlook.is_count:
        return code_text(figure)
    if outlook.is_percent:
        return f"{_signed(figure, 0 if figure == round(figure) else 1)} %"
    return number_text(figure, outlook.decimals)


def _signed(value: float, decimals: int = 1) -> str:
    return f"{value:+.{decimals}f}".replace("-", MINUS)


def _significant(per_ml: float) -> str:
    return f"{per_ml:.0f}" if per_ml >= 10 else f"{per_ml:.2g}"
