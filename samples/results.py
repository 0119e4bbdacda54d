"""A sample comes in: checked before it is saved, saved whole or not at all, and judged by a person where in doubt."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import asdict, dataclass
from datetime import datetime, timedelta
from zoneinfo import ZoneInfo

from django.db import IntegrityError, transaction

from fleet.codes import IsoCode
from fleet.models import Event, Measurand, OilCharge, Person, Reservoir, SamplePoint
from fleet.refresh import want_refresh
from fleet.wording import bound_text
from samples.checks.battery import hard_errors, run_checks
from samples.checks.candidates import CandidateSample, Doubt, PastEvent, PastSample
from samples.expectations import Bottle, expectations
from samples.history import History
from samples.models import Doubt as DoubtRow
from samples.models import IntakeFile, Judgement, Laboratory, Result, Sample
from samples.readings import Reading
from samples.sample_codes import code_of

CLEANING = {Event.Kind.OFFLINE_RUN, Event.Kind.ELEMENT_CHANGE, Event.Kind.OIL_CHANGE, Event.Kind.WATER_REMOVED}
TAKEN = {
    "sample_once_a_point_and_moment": ("drawn_at", "A sample of this point drawn at this moment is on record already."),
    "sample_lab_number_once": ("lab_number", "This laboratory number is on record already for this day."),
    "sample_label_once": ("label_code", "This label is on record already. Each bottle has a label of its own."),
}


class EntryError(ValueError):
    """A sample that cannot go in. `field` is where, `code` is stable, the text says what to do."""

    def __init__(self, code: str, field: str, sentence: str) -> None:
        super().__init__(sentence)
        self.code = code
        self.field = field
        self.sentence = sentence


@dataclass(frozen=True)
class SampleFacts:
    """Everything about the bottle itself; names and meanings are those of the Sample record."""

    drawn_at: datetime
    method: str = Sample.Method.UNKNOWN
    reason: str = Sample.Reason.ROUTINE
    drawn_by: str = ""
    running: bool | None = None
    oil_temperature_c: float | None = None
    machine_hours: float | None = None
    oil_hours: float | None = None
    litres_added: float | None = None
    lab_number: str = ""
    label_code: str = ""
    bottle_lot: str = ""
    remark: str = ""
    reported_at: datetime | None = None


@dataclass(frozen=True)
class SampleEntry:
    """One sample on its way in: where from, what was measured, and the code as the laboratory stated it, if it did."""

    reservoir: Reservoir
    point: SamplePoint
    laboratory: Laboratory | None
    facts: SampleFacts
    readings: Sequence[Reading]
    stated_code: IsoCode | None = None


@dataclass(frozen=True)
class Preview:
    """What a page shows before anything is saved. `errors` refuse the sample, `doubts` only ask.

    `results` are the readings as rows that are not saved and belong to no sample yet; `previous` is the last accepted
    sample of the same point and oil charge.
    """

    results: list[Result]
    code: IsoCode | None
    charge: OilCharge | None
    previous: Sample | None
    previous_code: IsoCode | None
    errors: list[EntryError]
    doubts: list[Doubt]


@dataclass(frozen=True)
class Checked:
    """An entry with what the checks said of it; without errors it can be saved."""

    entry: SampleEntry
    preview: Preview


def measurands_by_key() -> dict[str, Measurand]:
    return {measurand.key: measurand for measurand in Measurand.objects.all()}


def preview(entry: SampleEntry, history: History, now: datetime, known: Mapping[str, Measurand]) -> Preview:
    """Run every check without saving. `history` is the reservoir's and `known` all measurands, read by the caller."""
    candidate = _candidate(entry)
    past = [sample for sample in _comparable(entry, history) if sample.drawn_at < entry.facts.drawn_at]
    results = unsaved_results(entry.readings, known)
    errors = [_told(error) for error in hard_errors(candidate, now)] + _impossible(results)
    previous = past[-1] if past else None
    return Preview(
        results=results,
        code=code_of(results) or entry.stated_code,
        charge=history.charge_at(entry.facts.drawn_at),
        previous=previous,
        previous_code=code_of(previous.current_results) if previous else None,
        errors=errors,
        doubts=[] if errors else _doubts(entry, candidate, history),
    )


def unsaved_results(readings: Iterable[Reading], known: Mapping[str, Measurand]) -> list[Result]:
    """Readings as rows that are not saved and belong to no sample yet."""
    return [_result(reading, known[reading.measurand]) for reading in readings]


def save_entry(entry: SampleEntry, history: History, *, by: Person | None, now: datetime) -> Sample:
    """Save one sample with its results and doubts in one transaction, and ask for a fresh outlook.

    Raises EntryError where the sample cannot be true or is on record already; then nothing is saved.
    """
    if not entry.readings:
        raise EntryError("no_result", "paste", "There is no result yet. Give a code, counts or at least one figure.")
    found = preview(entry, history, now, measurands_by_key())
    if found.errors:
        raise found.errors[0]
    return save_checked([Checked(entry, found)], by=by, now=now)[0]


def save_checked(
    checked: Sequence[Checked], *, by: Person | None, now: datetime, intake: IntakeFile | None = None
) -> list[Sample]:
    """Save samples that passed the checks, all or none, and ask once for fresh outlooks of their reservoirs.

    Raises EntryError where one is on record already; then nothing is saved.
    """
    samples = [as_sample(one, by, now, intake) for one in checked]
    try:
        with transaction.atomic():
            Sample.objects.bulk_create(samples)
            Result.objects.bulk_create(_result_rows(checked, samples))
            DoubtRow.objects.bulk_create(_doubt_rows(checked, samples))
            want_refresh({sample.reservoir_id for sample in samples}, now)
    except IntegrityError as error:
        raise _refused(error) from error
    return samples


def accept(sample: Sample, by: Person, reason: str, now: datetime) -> None:
    """A person says that the figures are real: they count from now on."""
    _judge(sample, Sample.Verdict.ACCEPTED, by, reason, now)


def set_aside(sample: Sample, by: Person, reason: str, now: datetime) -> None:
    """A person says that the figures are not the oil's: kept, shown as set aside, and used for nothing."""
    if not reason.strip():
        raise EntryError("reason_missing", "reason", "Say why the sample is set aside; the figures stay on record.")
    _judge(sample, Sample.Verdict.SET_ASIDE, by, reason, now)


@transaction.atomic
def _judge(sample: Sample, verdict: Sample.Verdict, by: Person, reason: str, now: datetime) -> None:
    sample.verdict, sample.verdict_by, sample.verdict_at, sample.verdict_reason = verdict, by, now, reason.strip()
    sample.save(update_fields=["verdict", "verdict_by", "verdict_at", "verdict_reason"])
    Judgement.objects.create(sample=sample, verdict=verdict, by=by, at=now, reason=sample.verdict_reason)
    want_refresh([sample.reservoir_id], now)


def as_sample(checked: Checked, by: Person | None, now: datetime, intake: IntakeFile | None = None) -> Sample:
    """The sample that saving would make, not saved, with its `current_results`."""
    entry = checked.entry
    sample = Sample(
        reservoir=entry.reservoir,
        point=entry.point,
        charge=checked.preview.charge,
        laboratory=entry.laboratory,
        entered_at=now,
        entered_by=by,
        intake=intake,
        verdict=Sample.Verdict.IN_DOUBT if checked.preview.doubts else Sample.Verdict.ACCEPTED,
        **asdict(entry.facts),
    )
    sample.current_results = checked.preview.results
    return sample


def _result_rows(checked: Sequence[Checked], samples: Sequence[Sample]) -> list[Result]:
    rows = []
    for one, sample in zip(checked, samples, strict=True):
        for result in one.preview.results:
            result.sample, result.entered_at, result.entered_by = sample, sample.entered_at, sample.entered_by
            rows.append(result)
    return rows


def _doubt_rows(checked: Sequence[Checked], samples: Sequence[Sample]) -> list[DoubtRow]:
    return [
        DoubtRow(sample=sample, code=doubt.code, sentence=doubt.sentence[:300], settles=doubt.settles[:300])
        for one, sample in zip(checked, samples, strict=True)
        for doubt in dict.fromkeys(one.preview.doubts)
    ]


def _result(reading: Reading, measurand: Measurand) -> Result:
    return Result(
        measurand=measurand,
        reported_text=reading.reported_text[:60],
        reported_unit=reading.reported_unit[:24],
        qualifier=reading.qualifier,
        value=reading.value,
        low=reading.low,
        high=reading.high,
        size_scale=reading.size_scale,
        counted_ml=reading.counted_ml,
    )


def _candidate(entry: SampleEntry) -> CandidateSample:
    counted = next((reading.counted_ml for reading in entry.readings if reading.counted_ml is not None), None)
    return CandidateSample(
        drawn_at=entry.facts.drawn_at.astimezone(_zone(entry)),
        values={reading.measurand: reading.value for reading in entry.readings if reading.value is not None},
        code=entry.stated_code,
        counted_ml=counted,
        machine_hours=entry.facts.machine_hours,
        reason=entry.facts.reason,
    )


def _zone(entry: SampleEntry) -> ZoneInfo:
    """The checks say and compare days: they are days on the site's clock."""
    return entry.reservoir.area.site.zone


def _comparable(entry: SampleEntry, history: History) -> list[Sample]:
    """Accepted samples of the same point and oil charge."""
    charge = history.charge_at(entry.facts.drawn_at)
    charge_id = charge.pk if charge else None
    return [s for s in history.accepted if s.point_id == entry.point.pk and s.charge_id == charge_id]


def _last_ones(entry: SampleEntry, history: History) -> list[Sample]:
    """The last comparable sample before this one, and the last with a meter reading: the checks look no further."""
    past = [sample for sample in _comparable(entry, history) if sample.drawn_at < entry.facts.drawn_at]
    metered = [sample for sample in past if sample.machine_hours is not None]
    return [*metered[-1:], *past[-1:]]


def _doubts(entry: SampleEntry, candidate: CandidateSample, history: History) -> list[Doubt]:
    charge = history.charge_at(entry.facts.drawn_at)
    bottle = Bottle(
        entry.facts.drawn_at,
        entry.point.pk,
        charge.pk if charge else None,
        entry.laboratory.pk if entry.laboratory else None,
    )
    begun = charge.started_at if charge else history.charges[0].started_at if history.charges else None
    zone = _zone(entry)
    return run_checks(
        candidate,
        [_past(sample, zone) for sample in _last_ones(entry, history)],
        events=[_event(event, zone) for event in history.events],
        expectations=expectations(history, bottle, entry.readings),
        charge_began=begun and begun.astimezone(zone),
        same_point=[_past(sample, zone) for sample in _others_of_the_point(entry, history)],
    )


def _others_of_the_point(entry: SampleEntry, history: History) -> list[Sample]:
    """Bottles of the point drawn about the same time; one of the very same moment is the same bottle, and refused."""
    about = timedelta(days=2)
    return [
        sample
        for sample in history.samples
        if sample.point_id == entry.point.pk
        and sample.verdict != Sample.Verdict.SET_ASIDE
        and sample.reason != Sample.Reason.NEW_OIL
        and timedelta(0) < abs(sample.drawn_at - entry.facts.drawn_at) < about
    ]


def _past(sample: Sample, zone: ZoneInfo) -> PastSample:
    exact = {r.measurand.key: r.value for r in sample.current_results if r.value is not None}
    return PastSample(sample.drawn_at.astimezone(zone), exact, code_of(sample.current_results), sample.machine_hours)


def _event(event: Event, zone: ZoneInfo) -> PastEvent:
    ended = event.ended_at or event.at
    return PastEvent(ended.astimezone(zone), event.get_kind_display(), event.kind in CLEANING)


def _told(error: Doubt) -> EntryError:
    field = "drawn_at" if error.code == "drawn_in_future" else "counts"
    return EntryError(error.code, field, f"{error.sentence} {error.settles}".strip())


def _impossible(results: Sequence[Result]) -> list[EntryError]:
    """Figures outside what the measurand can be at all."""
    return [
        EntryError("value_impossible", result.measurand.key, _impossible_sentence(result))
        for result in results
        if _is_impossible(result)
    ]


def _is_impossible(result: Result) -> bool:
    lowest, highest = result.measurand.sensible_low, result.measurand.sensible_high
    least = result.value if result.value is not None else result.low
    most = result.value if result.value is not None else result.high
    too_high = highest is not None and least is not None and least > highest
    return too_high or (lowest is not None and most is not None and most < lowest)


def _impossible_sentence(result: Result) -> str:
    known = result.measurand
    possible = f"{bound_text(known.sensible_low or 0)} to {bound_text(known.sensible_high or 0)} {known.unit}"
    said = f"{result.reported_text} {result.reported_unit}"
    return f"{known.name}: {said} cannot be ({possible} can). Check the figure and its unit."


def _refused(error: IntegrityError) -> EntryError:
    for constraint, (field, sentence) in TAKEN.items():
        if constraint in str(error):
            return EntryError("taken", field, sentence)
    return EntryError("not_saved", "", "The database refused this sample; nothing was saved. Check the figures.")
