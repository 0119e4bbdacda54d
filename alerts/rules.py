"""Which rule speaks about a reservoir, and when what it said is over. Pure: facts and the time in, findings out.

Kinds from gravest to least: past limit, forecast to pass the limit, over target; *sample overdue* is its own family.
Of all measurands of a family only the worst speaks, and the others are named in its evidence.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from datetime import datetime, timedelta, tzinfo
from enum import StrEnum
from math import inf
from typing import Final

from samples.newest_bottle import of_newest_bottle


class Kind(StrEnum):
    """The kinds of rule, gravest first; the same words as the rule's column."""

    PAST_LIMIT = "past_limit"
    FORECAST = "forecast"
    OVER_TARGET = "over_target"
    OVERDUE = "overdue"

    @property
    def gravity(self) -> int:
        """0 is gravest."""
        return list(Kind).index(self)

    def is_graver_than(self, other: "Kind") -> bool:
        return self.gravity < other.gravity


DIRT: Final = "dirt"
WATER: Final = "water"
SAMPLING: Final = "sampling"
CRITICALITIES: Final = "ABC"

MARGIN_STEPS: Final = 1.0
"""Inside the limit by this many code steps counts as over for a particle count."""
MARGIN_PERCENT: Final = 10.0
"""The same for all other measurands, in % of the span between baseline and limit."""
RECENT_DAYS: Final = 90
RECENT_INTERVALS: Final = 2
GRACE_SHARE: Final = 0.1


@dataclass(frozen=True, slots=True)
class RuleFacts:
    """One enabled rule of a site."""

    kind: Kind
    mails: bool = True
    least_criticality: str = "C"
    within_days: int | None = None
    least_chance: float | None = None
    grace_days: int | None = None

    def is_for(self, criticality: str) -> bool:
        return CRITICALITIES.index(criticality) <= CRITICALITIES.index(self.least_criticality)


@dataclass(frozen=True, slots=True)
class OutlookFacts:
    """One measurand of one reservoir as the outlook has it, worked out from accepted samples only.

    `value`, or `low` and `high` of an interval, and `baseline` are in `unit`; target and limit are in `unit` too, or in
    % change from the baseline where `is_percent`, or in particles per mL where `is_count`. `headroom` of the latest
    value and `level_headroom` of the trend are in code steps for a count, else in % of the span between baseline and
    limit; negative is past. `chance` (0 to 1) is that of the sample planned for `next_planned_at`.
    """

    key: str
    name: str
    family: str
    word: str
    measurand_id: int | None = None
    unit: str = ""
    decimals: int = 0
    is_count: bool = False
    is_percent: bool = False
    sample_id: int | None = None
    point_id: int | None = None
    drawn_at: datetime | None = None
    charge_id: int | None = None
    n: int = 0
    value: float | None = None
    low: float | None = None
    high: float | None = None
    baseline: float | None = None
    target_low: float | None = None
    target_high: float | None = None
    limit_low: float | None = None
    limit_high: float | None = None
    target_source: str = ""
    limit_source: str = ""
    headroom: float | None = None
    level_headroom: float | None = None
    runway: str = "cannot_say"
    runway_early: datetime | None = None
    runway_median: datetime | None = None
    runway_late: datetime | None = None
    past_since: datetime | None = None
    chance: float | None = None
    next_planned_at: datetime | None = None
    refusal_sentence: str = ""

    @property
    def has_target(self) -> bool:
        return self.target_low is not None or self.target_high is not None

    @property
    def has_limit(self) -> bool:
        return self.limit_low is not None or self.limit_high is not None

    @property
    def margin(self) -> float:
        """What counts as clearly inside, in the units of headroom."""
        return MARGIN_STEPS if self.is_count else MARGIN_PERCENT

    @property
    def is_undecided(self) -> bool:
        """Within target by its value, but the trend stands clearly nearer to the limit: the next sample tells which."""
        if self.word != "within_target" or self.headroom is None or self.level_headroom is None:
            return False
        return self.headroom - self.level_headroom > self.margin

    @property
    def is_current(self) -> bool:
        return self.drawn_at is not None and self.word != "no_current_sample"


@dataclass(frozen=True, slots=True)
class ReservoirFacts:
    """What the rules need to know of a reservoir. `zone` is the clock of its site."""

    criticality: str
    interval_days: int
    zone: tzinfo
    outlooks: Sequence[OutlookFacts] = ()
    last_sample_id: int | None = None
    last_drawn_at: datetime | None = None
    next_due_at: datetime | None = None


@dataclass(frozen=True, slots=True)
class Speaker:
    """A measurand for which a rule speaks."""

    kind: Kind
    outlook: OutlookFacts
    mails: bool


@dataclass(frozen=True, slots=True)
class Finding:
    """What one family of a reservoir has to say now: the gravest rule, the measurand it is about, and its companions.

    `speaker` is None for an overdue sample. `companions` are the family's other measurands that a rule speaks about;
    `water_too` tells that water in the same bottle is past its limit, which an optical counter may have counted.
    """

    family: str
    kind: Kind
    weight: int
    mails: bool
    sample_id: int | None
    drawn_at: datetime | None
    charge_id: int | None
    speaker: OutlookFacts | None = None
    companions: tuple[Speaker, ...] = ()
    water_too: bool = False
    due_at: datetime | None = None


@dataclass(frozen=True, slots=True)
class OpenFacts:
    """An open alert, as far as closing it needs to know. `since` is when its sample was drawn, or when it opened.

    `point_id` is where its sample was drawn, None where it has none or the point is no longer in use. `was_better`: its
    sample was within bounds already, but against the trend.
    """

    family: str
    kind: Kind
    since: datetime
    measurand_key: str = ""
    charge_id: int | None = None
    point_id: int | None = None
    was_better: bool = False


def judge(reservoir: ReservoirFacts, rules: Iterable[RuleFacts], as_of: datetime) -> list[Finding]:
    """One finding for each family about which a rule speaks at `as_of`, and one when a sample is overdue.

    Rules that are not for the reservoir's criticality stay silent. A measurand without a current sample says nothing:
    that is what *overdue* is for. Of the particle counts only those of the newest counted sample are looked at.
    """
    heard = [rule for rule in rules if rule.is_for(reservoir.criticality)]
    speakers = [s for outlook in reservoir.outlooks if (s := _speaker(outlook, heard, as_of)) is not None]
    families = dict.fromkeys(s.outlook.family for s in speakers)
    findings = [_family_finding(family, speakers, reservoir) for family in families]
    late = judge_overdue(reservoir, heard, as_of)
    return _with_water_note([f for f in findings if f is not None]) + ([late] if late else [])


def judge_overdue(reservoir: ReservoirFacts, rules: Iterable[RuleFacts], as_of: datetime) -> Finding | None:
    """The finding that the planned sample has not come, from the first moment past its day and the grace."""
    rule = next((r for r in rules if r.kind is Kind.OVERDUE and r.is_for(reservoir.criticality)), None)
    if rule is None or reservoir.next_due_at is None:
        return None
    if as_of <= reservoir.next_due_at + grace(rule, reservoir.interval_days):
        return None
    return Finding(
        family=SAMPLING,
        kind=Kind.OVERDUE,
        weight=weight(Kind.OVERDUE, reservoir.criticality),
        mails=rule.mails,
        sample_id=reservoir.last_sample_id,
        drawn_at=reservoir.last_drawn_at,
        charge_id=None,
        due_at=reservoir.next_due_at,
    )


def grace(rule: RuleFacts, interval_days: int) -> timedelta:
    """How late a sample may be: the rule's days, or a tenth of the interval where the rule names none."""
    return timedelta(days=interval_days * GRACE_SHARE if rule.grace_days is None else rule.grace_days)


def weight(kind: Kind, criticality: str) -> int:
    """Sorts the list: rule first, criticality within it. 0 is first."""
    return kind.gravity * len(CRITICALITIES) + CRITICALITIES.index(criticality)


def is_recent(drawn_at: datetime | None, interval_days: int, as_of: datetime) -> bool:
    """Whether a sample is young enough to mail about: at most two intervals old, or 90 days where that is longer."""
    days = max(RECENT_INTERVALS * interval_days, RECENT_DAYS)
    return drawn_at is not None and as_of - drawn_at <= timedelta(days=days)


def later_word(alert: OpenFacts, reservoir: ReservoirFacts) -> OutlookFacts | None:
    """What was measured on an alert's measurand after the sample it rests on, and at the same point.

    Particle counts stand for each other; two points do not: behind the filter it is always cleaner.
    """
    at_its_point = [o for o in _judged(alert.family, reservoir) if alert.point_id in (None, o.point_id)]
    later = [o for o in at_its_point if o.drawn_at and o.drawn_at > alert.since]
    own = next((o for o in later if o.key == alert.measurand_key), None)
    return own or next((o for o in later if alert.family == DIRT), None)


def still_away(alert: OpenFacts, reservoir: ReservoirFacts) -> OutlookFacts | None:
    """The measurand of the family that is furthest from being back, or None when all are."""
    away = [o for o in _judged(alert.family, reservoir) if not is_back(o, alert.kind, alert.was_better)]
    return min(away, key=lambda o: inf if o.headroom is None else o.headroom, default=None)


def proof_it_is_over(alert: OpenFacts, reservoir: ReservoirFacts) -> OutlookFacts | None:
    """The later measurement that shows that an open alert is over, or None. Ask only when no rule speaks any more.

    The measurand that opened it must have been measured later at the same point, and every current measurand of the
    family must be back.
    *Back* is: within its target; or, for an alert about a limit, inside the limit by one code step, or by 10 % of the
    span. An alert over target asks for the target. A margin keeps a value that dances on the line from closing and
    opening the alert with every sample. Where the trend had followed the trouble, one good value against it does not
    settle which is wrong: it takes a second one, or an event on record that begins a new stretch.
    """
    return later_word(alert, reservoir) if still_away(alert, reservoir) is None else None


def new_oil_word(alert: OpenFacts, reservoir: ReservoirFacts) -> OutlookFacts | None:
    """The first thing known of the family in an oil that was filled in after the alert's, or None."""
    if alert.charge_id is None:
        return None
    on_new_oil = (
        o
        for o in of_family(reservoir.outlooks, alert.family)
        if o.drawn_at and o.drawn_at > alert.since and o.charge_id not in (None, alert.charge_id)
    )
    return next(on_new_oil, None)


def is_back(outlook: OutlookFacts, kind: Kind, again: bool = False) -> bool:
    """Whether one measurand is back where an alert of that kind wants it; `again` when the sample before was too."""
    if outlook.is_undecided and not again:
        return False
    if outlook.word == "within_target" and (outlook.has_target or outlook.headroom is None):
        return True
    if kind is Kind.OVER_TARGET and outlook.has_target:
        return False
    return outlook.headroom is not None and outlook.headroom >= outlook.margin


def of_family(outlooks: Iterable[OutlookFacts], family: str) -> list[OutlookFacts]:
    """The outlooks of a family. Counts come from one bottle: those of an older one have had their say."""
    found = [outlook for outlook in outlooks if outlook.family == family]
    return of_newest_bottle(found, lambda outlook: outlook.drawn_at) if family == DIRT else found


def _with_lines(family: str, reservoir: ReservoirFacts) -> list[OutlookFacts]:
    """What is judged in a family: a size without target and limit silences none of those that have them."""
    return of_family([o for o in reservoir.outlooks if o.has_target or o.has_limit], family)


def _judged(family: str, reservoir: ReservoirFacts) -> list[OutlookFacts]:
    return [outlook for outlook in _with_lines(family, reservoir) if outlook.is_current]


def _speaker(outlook: OutlookFacts, rules: Sequence[RuleFacts], as_of: datetime) -> Speaker | None:
    speaking = [rule for rule in rules if outlook.is_current and _speaks(rule, outlook, as_of)]
    gravest = min(speaking, key=lambda rule: rule.kind.gravity, default=None)
    return None if gravest is None else Speaker(gravest.kind, outlook, gravest.mails)


def _speaks(rule: RuleFacts, outlook: OutlookFacts, as_of: datetime) -> bool:
    if rule.kind is Kind.FORECAST:
        told = outlook.word == Kind.PAST_LIMIT or outlook.is_undecided
        return not told and (_soon(rule, outlook, as_of) or _likely(rule, outlook))
    return outlook.word == rule.kind


def _soon(rule: RuleFacts, outlook: OutlookFacts, as_of: datetime) -> bool:
    if rule.within_days is None or outlook.runway != "dated" or outlook.runway_median is None:
        return False
    return outlook.runway_median <= as_of + timedelta(days=rule.within_days)


def _likely(rule: RuleFacts, outlook: OutlookFacts) -> bool:
    return rule.least_chance is not None and outlook.chance is not None and outlook.chance >= rule.least_chance


def _family_finding(family: str, speakers: Sequence[Speaker], reservoir: ReservoirFacts) -> Finding | None:
    lasting = {outlook.key for outlook in _with_lines(family, reservoir)}
    heard = sorted((s for s in speakers if s.outlook.family == family and s.outlook.key in lasting), key=_worst_first)
    if not heard:
        return None
    first, *others = heard
    return Finding(
        family=family,
        kind=first.kind,
        weight=weight(first.kind, reservoir.criticality),
        mails=first.mails,
        sample_id=first.outlook.sample_id,
        drawn_at=first.outlook.drawn_at,
        charge_id=first.outlook.charge_id,
        speaker=first.outlook,
        companions=tuple(others),
    )


def _worst_first(speaker: Speaker) -> tuple[int, float]:
    headroom = speaker.outlook.headroom
    return speaker.kind.gravity, inf if headroom is None else headroom


def _with_water_note(findings: list[Finding]) -> list[Finding]:
    wet = {f.sample_id for f in findings if f.family == WATER and f.kind is Kind.PAST_LIMIT}
    return [replace(f, water_too=True) if f.family == DIRT and f.sample_id in wet else f for f in findings]
