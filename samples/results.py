"""A sample comes in: checked before it is saved, saved whole or not at all, and judged by a person where in doubt."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict, dataclass
from datetime import datetime

from django.db import IntegrityError, transaction

from fleet.codes import IsoCode
from fleet.models import Event, Measurand, Person, Reservoir, SamplePoint
from fleet.refresh import want_refresh
from samples.checks.battery import hard_errors, run_checks
from samples.checks.candidates import CandidateSample, Doubt, PastEvent, PastSample
from samples.expectations import Bottle, expectations
from samples.history import History
from samples.models import Doubt as DoubtRow
from samples.models import IntakeFile, Laboratory, Result, Sample
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
    """What the page shows before anything is saved. `errors` refuse the sample, `doubts` only ask."""

    code: IsoCode | None
    previous: Sample | None
    previous_code: IsoCode | None
    errors: list[Doubt]
    doubts: list[Doubt]


def preview(entry: SampleEntry, history: History, now: datetime) -> Preview:
    """Run every check without saving. `history` is the reservoir's, read once by the caller."""
    candidate = _candidate(entry)
    past = [sample for sample in _comparable(entry, history) if sample.drawn_at < entry.facts.drawn_at]
    errors = hard_errors(candidate, now)
    previous = past[-1] if past else None
    return Preview(
        code=entry_code(entry),
        previous=previous,
        previous_code=code_of(previous.current_results) if previous else None,
        errors=errors,
        doubts=[] if errors else _doubts(entry, candidate, history),
    )


def entry_code(entry: SampleEntry) -> IsoCode | None:
    """The code of the counts; without counts, the code as stated."""
    return code_of(unsaved_results(entry)) or entry.stated_code


def unsaved_results(entry: SampleEntry) -> list[Result]:
    """The readings as Result rows that are not saved and belong to no sample yet."""
    known = {measurand.key: measurand for measurand in Measurand.objects.all()}
    return [_result(reading, known[reading.measurand]) for reading in entry.readings]


def save_entry(
    entry: SampleEntry, history: History, *, by: Person | None, now: datetime, intake: IntakeFile | None = None
) -> Sample:
    """Save one sample with its results and doubts in one transaction, and ask for a fresh outlook.

    Raises EntryError where the sample cannot be true or is on record already; then nothing is saved.
    """
    if not entry.readings:
        raise EntryError("no_result", "paste", "There is no result yet. Give a code, counts or at least one figure.")
    found = preview(entry, history, now)
    if found.errors:
        first = found.errors[0]
        raise EntryError(first.code, _field_of(first.code), f"{first.sentence} {first.settles}".strip())
    try:
        with transaction.atomic():
            return _write(entry, found.doubts, by, now, intake)
    except IntegrityError as error:
        raise _refused(error) from error


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
    want_refresh([sample.reservoir_id], now)


def _write(
    entry: SampleEntry, doubts: Sequence[Doubt], by: Person | None, now: datetime, intake: IntakeFile | None
) -> Sample:
    sample = Sample.objects.create(
        reservoir=entry.reservoir,
        point=entry.point,
        charge=entry.reservoir.charge_on(entry.facts.drawn_at),
        laboratory=entry.laboratory,
        entered_at=now,
        entered_by=by,
        intake=intake,
        verdict=Sample.Verdict.IN_DOUBT if doubts else Sample.Verdict.ACCEPTED,
        **asdict(entry.facts),
    )
    results = unsaved_results(entry)
    for result in results:
        result.sample, result.entered_at, result.entered_by = sample, now, by
    Result.objects.bulk_create(results)
    DoubtRow.objects.bulk_create(
        [DoubtRow(sample=sample, code=doubt.code, sentence=doubt.sentence, settles=doubt.settles) for doubt in doubts]
    )
    want_refresh([entry.reservoir.pk], now)
    return sample


def _result(reading: Reading, measurand: Measurand) -> Result:
    return Result(
        measurand=measurand,
        reported_text=reading.reported_text,
        reported_unit=reading.reported_unit,
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
        drawn_at=entry.facts.drawn_at,
        values={reading.measurand: reading.value for reading in entry.readings if reading.value is not None},
        code=entry.stated_code,
        counted_ml=counted,
        machine_hours=entry.facts.machine_hours,
    )


def _comparable(entry: SampleEntry, history: History) -> list[Sample]:
    """Accepted samples of the same point and oil charge."""
    charge = history.charge_at(entry.facts.drawn_at)
    charge_id = charge.pk if charge else None
    return [s for s in history.accepted if s.point_id == entry.point.pk and s.charge_id == charge_id]


def _doubts(entry: SampleEntry, candidate: CandidateSample, history: History) -> list[Doubt]:
    charge = history.charge_at(entry.facts.drawn_at)
    bottle = Bottle(
        entry.facts.drawn_at,
        entry.point.pk,
        charge.pk if charge else None,
        entry.laboratory.pk if entry.laboratory else None,
    )
    first = history.charges[0].started_at if history.charges else None
    return run_checks(
        candidate,
        [_past(sample) for sample in _comparable(entry, history)],
        events=[_event(event) for event in history.events],
        expectations=expectations(history, bottle, entry.readings),
        charge_began=charge.started_at if charge else first,
    )


def _past(sample: Sample) -> PastSample:
    exact = {r.measurand.key: r.value for r in sample.current_results if r.value is not None}
    return PastSample(sample.drawn_at, exact, code_of(sample.current_results), sample.machine_hours)


def _event(event: Event) -> PastEvent:
    return PastEvent(event.ended_at or event.at, event.get_kind_display(), event.kind in CLEANING)


def _field_of(code: str) -> str:
    return "drawn_at" if code == "drawn_in_future" else "counts"


def _refused(error: IntegrityError) -> EntryError:
    for constraint, (field, sentence) in TAKEN.items():
        if constraint in str(error):
            return EntryError("taken", field, sentence)
    return EntryError("not_saved", "", "The database refused this sample; nothing was saved. Check the figures.")
