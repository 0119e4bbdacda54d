"""From standings that changed to alerts, their story, and the mail that is owed: one reservoir, one transaction.

- A rule that speaks opens one alert per reservoir, family and oil charge, or updates the open one. It mails when it
  opens and when it becomes graver, never twice for one kind, and never about a sample older than `rules.is_recent`
  allows. A result in doubt never gets here: outlooks are made from accepted samples.
- When no rule speaks any more, the alert waits for a later accepted sample that shows it is over
  (`rules.proof_it_is_over`). A forecast that shrinks, a sample that was set aside or one from another point closes
  nothing; a person may.
- When the oil was changed, the first accepted sample of the new oil that measured the family ends the alert about the
  old one; if the new oil is in trouble too, that is an alert of its own.
- A reservoir that was taken out of service needs no response: from that day its alerts are closed.
- What a person closed stays closed until a later sample, or a graver rule, speaks.
"""

from dataclasses import dataclass
from datetime import datetime
from typing import Final

from django.db import transaction
from django.db.models import Exists, OuterRef, Q, QuerySet

from alerts import deliveries, facts, sentences
from alerts.defaults import ensure_rules
from alerts.models import Alert, Rule, StoryEntry
from alerts.rules import (
    SAMPLING,
    Finding,
    Kind,
    OutlookFacts,
    ReservoirFacts,
    grace,
    is_recent,
    judge,
    later_word,
    new_oil_word,
    proof_it_is_over,
    still_away,
)
from fleet.models import Site, Standing

A_LOOK: Final = 200


@dataclass(frozen=True)
class _Case:
    """One reservoir under judgement at one moment; `mail` is False for history that was loaded in bulk."""

    standing: Standing
    about: ReservoirFacts
    as_of: datetime
    mail: bool


def waiting(as_of: datetime) -> list[int]:
    """The reservoirs to be judged now, as many of each sort as one look takes: first those whose standing was written
    since they were last judged, longest ago first, and then those for which time has changed something.

    Each is to be judged by itself, so that one that cannot be judged keeps no other waiting.
    """
    changed = Standing.objects.unjudged().order_by("computed_at", "pk").values_list("pk", flat=True)
    return list(dict.fromkeys([*changed[:A_LOOK], *_called_by_time(as_of)[:A_LOOK]]))


def evaluate_changed(as_of: datetime, mail: bool = True) -> int:
    """Judge every reservoir whose standing was written since it was last judged; says how many were.

    One indexed question when nothing changed. A row that is being rewritten is left alone: its writer tells us again.
    """
    changed = list(Standing.objects.unjudged().order_by("pk").values_list("pk", flat=True))
    return sum(evaluate_reservoir(reservoir_id, as_of, mail) for reservoir_id in changed)


def evaluate_by_time(as_of: datetime, mail: bool = True) -> int:
    """Judge the reservoirs for which time changed something, not a row; says how many."""
    called = _called_by_time(as_of)
    return sum(evaluate_reservoir(reservoir_id, as_of, mail, even_if_judged=True) for reservoir_id in called)


def mark_history_judged(as_of: datetime) -> int:
    """Open the alerts that the standings call for, dated by their samples and without owing any mail: for history that
    was loaded in bulk."""
    return evaluate_changed(as_of, mail=False) + evaluate_by_time(as_of, mail=False)


def judge_site_again(site: Site) -> int:
    """Have every reservoir of a site judged at the next look, because its rules changed."""
    return Standing.objects.filter(reservoir__area__site=site, revision__gt=0).update(judged_revision=0)


@transaction.atomic
def evaluate_reservoir(reservoir_id: int, as_of: datetime, mail: bool = True, even_if_judged: bool = False) -> bool:
    """Bring one reservoir's alerts up to its standing; False when it was judged already or somebody else is at it."""
    standing = _claimed(reservoir_id, even_if_judged)
    if standing is None:
        return False
    case = _Case(standing, facts.reservoir_facts(standing, as_of), as_of, mail)
    if _is_out_of_use(standing, as_of):
        _close_everything(case)
    else:
        _bring_up_to_date(case)
    standing.judged_revision = standing.revision
    count_open(standing)
    return True


def count_open(standing: Standing) -> None:
    """Write the number of open alerts to a standing row that the caller has locked."""
    standing.open_alerts = Alert.objects.open().filter(reservoir=standing.reservoir_id).count()
    standing.save(update_fields=["open_alerts", "judged_revision"])


def _claimed(reservoir_id: int, even_if_judged: bool) -> Standing | None:
    rows = Standing.objects.all() if even_if_judged else Standing.objects.unjudged()
    claimed: Standing | None = (
        rows.filter(pk=reservoir_id)
        .select_for_update(skip_locked=True, of=("self",))
        .select_related("reservoir__area__site", "reservoir__machine")
        .first()
    )
    return claimed


def _called_by_time(as_of: datetime) -> list[int]:
    """Planned samples that have not come and that nobody was told about; open alerts of what has gone out of use."""
    late = Standing.objects.overdue(as_of).filter(~Exists(_told())).select_related("reservoir__area__site")
    rules = {rule.site_id: rule for rule in Rule.objects.filter(kind=Kind.OVERDUE, enabled=True)} if late else {}
    overdue = [s.pk for s in late if _is_past_grace(s, rules.get(s.reservoir.area.site_id), as_of)]
    retired = Standing.objects.filter(open_alerts__gt=0, reservoir__retired_on__isnull=False)
    gone = [s.pk for s in retired.select_related("reservoir__area__site") if _is_out_of_use(s, as_of)]
    return overdue + gone


def _is_out_of_use(standing: Standing, as_of: datetime) -> bool:
    reservoir = standing.reservoir
    return facts.is_out_of_use(reservoir.retired_on, as_of, reservoir.area.site.zone)


def _told() -> QuerySet[Alert]:
    """Alerts that a sample is missing: open ones, and those a person closed after the last sample that came."""
    since_last = Q(sample__drawn_at__gte=OuterRef("last_drawn_at"))
    never_sampled = Q(sample=None, reservoir__standing__last_drawn_at=None)
    closed = Q(closed_by__isnull=False) & (since_last | never_sampled)
    return Alert.objects.filter(Q(state=Alert.State.OPEN) | closed, reservoir=OuterRef("pk"), family=SAMPLING)


def _is_past_grace(standing: Standing, rule: Rule | None, as_of: datetime) -> bool:
    if rule is None or standing.next_due_at is None or _is_out_of_use(standing, as_of):
        return False
    (known,) = facts.rule_facts([rule])
    reservoir = standing.reservoir
    return known.is_for(reservoir.criticality) and as_of > standing.next_due_at + grace(known, reservoir.interval_days)


def _bring_up_to_date(case: _Case) -> None:
    rules = facts.rule_facts(ensure_rules(case.standing.reservoir.area.site))
    findings = _not_settled(case, judge(case.about, rules, case.as_of))
    was_open = _open_alerts(case)
    heard = {_hear(case, finding, was_open).pk for finding in findings}
    for alert in was_open:
        if alert.pk not in heard:
            _reconsider(case, alert)


def _open_alerts(case: _Case) -> list[Alert]:
    its_own = Alert.objects.open().filter(reservoir=case.standing.reservoir_id)
    return list(its_own.select_related("sample__point", "measurand"))


def _close_everything(case: _Case) -> None:
    for alert in _open_alerts(case):
        _close_by_itself(case, alert, Alert.CloseReason.OTHER, "The reservoir was taken out of service.")


def _not_settled(case: _Case, findings: list[Finding]) -> list[Finding]:
    """Without what a person has closed already on the evidence of the same sample or a later one."""
    if not findings:
        return findings
    settled = list(
        Alert.objects.closed_by_hand()
        .filter(reservoir=case.standing.reservoir_id, family__in=[f.family for f in findings])
        .values_list("family", "kind", "sample__drawn_at")
    )
    return [f for f in findings if not any(_settles(f, *row) for row in settled)]


def _settles(finding: Finding, family: str, kind: str, drawn_at: datetime | None) -> bool:
    if family != finding.family or finding.kind.is_graver_than(Kind(kind)):
        return False
    return finding.drawn_at is None or (drawn_at is not None and drawn_at >= finding.drawn_at)


def _hear(case: _Case, finding: Finding, was_open: list[Alert]) -> Alert:
    alert = _same_trouble(finding, was_open)
    if alert is None:
        # The database allows one open alert; whoever opened it first, it is updated here.
        alert, opened = Alert.objects.get_or_create(
            reservoir=case.standing.reservoir,
            family=finding.family,
            charge_id=finding.charge_id,
            state=Alert.State.OPEN,
            defaults=_columns(case, finding) | {"opened_at": _opening(case, finding)},
        )
        if opened:
            mailed = _owe_mail(case, alert, finding)
            tell(alert, alert.opened_at, f"{alert.get_kind_display().capitalize()}: {alert.headline}{mailed}.")
            return alert
    _update(case, alert, finding)
    return alert


def _opening(case: _Case, finding: Finding) -> datetime:
    """Now; for history the day of the sample or of the missed one, so that its age is not that of the loading."""
    happened = finding.due_at or finding.drawn_at
    return case.as_of if case.mail or happened is None else min(happened, case.as_of)


def _same_trouble(finding: Finding, was_open: list[Alert]) -> Alert | None:
    """The open alert of that family about the same oil; an oil that is not on record may be any."""
    family = [alert for alert in was_open if alert.family == finding.family]
    exact = [alert for alert in family if alert.charge_id == finding.charge_id]
    unknown = [alert for alert in family if alert.charge_id is None or finding.charge_id is None]
    return next(iter(exact or unknown), None)


def _update(case: _Case, alert: Alert, finding: Finding) -> None:
    was, knew = Kind(alert.kind), alert.sample_id
    columns = _columns(case, finding)
    if alert.charge_id is None:
        columns["charge_id"] = finding.charge_id
    _write(alert, columns)
    graver = finding.kind.is_graver_than(was)
    mailed = _owe_mail(case, alert, finding) if graver else ""
    if finding.kind is not was or finding.sample_id != knew:
        now = "Now " if finding.kind is not was else "Still "
        tell(alert, case.as_of, f"{now}{alert.get_kind_display()}: {alert.headline}{mailed}.")


def _columns(case: _Case, finding: Finding) -> dict[str, object]:
    about = finding.speaker
    return {
        "kind": finding.kind.value,
        "weight": finding.weight,
        "measurand_id": about.measurand_id if about else None,
        "headline": sentences.headline(finding, case.about.zone),
        "sentence": sentences.evidence(finding, case.about.zone),
        "sample_id": finding.sample_id,
        "updated_at": case.as_of,
        "better_since": None,
    }


def _write(alert: Alert, columns: dict[str, object]) -> None:
    for name, value in columns.items():
        setattr(alert, name, value)
    alert.save(update_fields=list(columns))


def _owe_mail(case: _Case, alert: Alert, finding: Finding) -> str:
    """Owe the mail of a new or graver alert, and say to whom. Old history and what was mailed already owe nothing."""
    recent = is_recent(finding.drawn_at or finding.due_at, case.about.interval_days, case.as_of)
    if not (case.mail and finding.mails and recent and deliveries.is_news(alert, finding.kind)):
        return ""
    people = deliveries.owe(alert, finding.kind, case.as_of)
    return f"; mail to {', '.join(str(person) for person in people)}" if people else ""


def _reconsider(case: _Case, alert: Alert) -> None:
    """No rule speaks for this open alert any more: close it if a later sample says so."""
    if alert.family == SAMPLING:
        _close_when_sampled(case, alert)
        return
    known = facts.open_facts(alert, case.as_of, case.about.zone)
    if (new_oil := new_oil_word(known, case.about)) is not None:
        note = f"The oil was changed. {sentences.over_sentence(new_oil, case.about.zone)}"
        _close_by_itself(case, alert, Alert.CloseReason.OIL_CHANGED, note)
    elif (proof := proof_it_is_over(known, case.about)) is not None:
        note = sentences.over_sentence(proof, case.about.zone)
        _close_by_itself(case, alert, Alert.CloseReason.SHOWN_OVER, note)
    elif (later := later_word(known, case.about)) is not None:
        _note_recovery(case, alert, later, still_away(known, case.about) or later)


def _close_when_sampled(case: _Case, alert: Alert) -> None:
    drawn_at = case.about.last_drawn_at
    if drawn_at is not None and (alert.sample is None or drawn_at > alert.sample.drawn_at):
        note = f"A sample has come, drawn {sentences.day_text(drawn_at, case.about.zone)}."
        _close_by_itself(case, alert, Alert.CloseReason.SHOWN_OVER, note)


def _close_by_itself(case: _Case, alert: Alert, reason: str, note: str) -> None:
    columns = {"state": Alert.State.CLOSED, "closed_at": case.as_of, "close_reason": reason, "close_note": note}
    _write(alert, columns | {"updated_at": case.as_of})
    tell(alert, case.as_of, f"Closed: {note}")


def _note_recovery(case: _Case, alert: Alert, later: OutlookFacts, away: OutlookFacts) -> None:
    """Better, but not by enough: it stays open and rests on the later sample now."""
    sentence = sentences.recovery_sentence(away, case.about.zone)
    columns: dict[str, object] = {
        "sample_id": later.sample_id,
        "headline": sentences.over_headline(away),
        "sentence": sentence,
        "better_since": later.drawn_at,
        "updated_at": case.as_of,
    }
    _write(alert, columns)
    tell(alert, case.as_of, sentence)


def tell(alert: Alert, at: datetime, text: str) -> None:
    """Add a line to an alert's story."""
    StoryEntry.objects.create(alert=alert, at=at, text=text)
