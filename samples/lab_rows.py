"""The rows of a lab file against the register and the record: which reservoir, what is new, what is in doubt."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import datetime
from decimal import Decimal
from enum import StrEnum

from fleet.models import Measurand, Reservoir, SamplePoint
from samples.checks.candidates import Doubt
from samples.drawn_moments import drawn_moment
from samples.history import History, read_history
from samples.intake.columns import COUNT_FIELDS, Columns
from samples.intake.rows import RowReading
from samples.intake.told import figures_in_words
from samples.lab_matching import Names
from samples.models import Laboratory, Sample
from samples.on_record import OnRecord, differences
from samples.problems import CellProblem, Problem
from samples.readings import Reading
from samples.results import Checked, SampleEntry, SampleFacts, as_sample, preview

LONGEST_LAB_NUMBER = 60
MOST_HOURS, MOST_LITRES, COLDEST, HOTTEST = 1e7, 1e6, -40.0, 200.0
# Which column of the file an error of the checks is about.
COLUMN_OF = {"drawn_at": "drawn", "counts": "p4"}


class RowState(StrEnum):
    """What becomes of a row."""

    ADDS = "adds"
    IN_DOUBT = "adds, in doubt"
    ON_RECORD = "on record already"
    WRONG = "wrong"


@dataclass(frozen=True)
class RowVerdict:
    """One row's fate, with what a person needs to see of it. `checked` is there when it adds a sample."""

    line: int
    state: RowState
    named: str
    reservoir: Reservoir | None = None
    drawn_at: datetime | None = None
    code: str = ""
    read: str = ""
    problems: Sequence[CellProblem] = ()
    notes: Sequence[CellProblem] = ()
    doubts: Sequence[Doubt] = ()
    remark: str = ""
    checked: Checked | None = None


@dataclass(frozen=True)
class _Placed:
    """A row whose reservoir, point and moment are known."""

    row: RowReading
    entry: SampleEntry


@dataclass
class RowChecker:
    """Checks the rows of one file. `laboratory` is for rows that name none."""

    names: Names
    columns: Columns
    known: Mapping[str, Measurand]
    laboratory: Laboratory | None
    now: datetime

    def check(self, rows: Sequence[RowReading]) -> list[RowVerdict]:
        """In the order of the file; each reservoir's rows are compared in the order in which they were drawn."""
        verdicts: dict[int, RowVerdict] = {}
        placed: dict[int, list[_Placed]] = defaultdict(list)
        for row in rows:
            found = self._place(row)
            if isinstance(found, _Placed):
                placed[found.entry.reservoir.pk].append(found)
            else:
                verdicts[row.line] = found
        self._numbers = self._numbers_on_record([one.entry for group in placed.values() for one in group])
        for group in placed.values():
            for verdict in self._check_reservoir(group):
                verdicts[verdict.line] = verdict
        return [verdicts[row.line] for row in rows]

    def _place(self, row: RowReading) -> _Placed | RowVerdict:
        problems = [*row.problems, *self._amount_problems(row)]
        laboratory = self.names.laboratory(row.laboratory)
        if isinstance(laboratory, Problem):
            problems.append(self._cell(row, "laboratory", row.laboratory, laboratory))
        if row.drawn_on is None or not row.reservoir:
            return self._wrong(row, problems)
        reservoir = self.names.reservoir(row.reservoir, row.drawn_on)
        if isinstance(reservoir, Problem):
            return self._wrong(row, [self._cell(row, "reservoir", row.reservoir, reservoir), *problems])
        point = self.names.point(reservoir, row.sample_point)
        if isinstance(point, Problem):
            problems.append(self._cell(row, "sample_point", row.sample_point, point))
        moment = self._moment(row, reservoir)
        if isinstance(moment, Problem):
            problems.append(self._cell(row, "drawn", str(row.drawn_time), moment))
        if problems or isinstance(point, Problem) or isinstance(laboratory, Problem) or isinstance(moment, Problem):
            return self._wrong(row, problems)
        return _Placed(row, self._entry(row, reservoir, point, laboratory or self.laboratory, moment))

    def _moment(self, row: RowReading, reservoir: Reservoir) -> datetime | Problem:
        assert row.drawn_on is not None, "checked by the caller"  # noqa: S101
        try:
            return drawn_moment(row.drawn_on, row.drawn_time, reservoir.area.site.zone, self.now)
        except ValueError as error:
            return Problem("clock_gap", str(error))

    def _amount_problems(self, row: RowReading) -> list[CellProblem]:
        """What a record could not hold, or no meter could show."""
        found = []
        if len(row.lab_number) > LONGEST_LAB_NUMBER:
            said = f"A laboratory number has at most {LONGEST_LAB_NUMBER} characters. Shorten it."
            found.append(self._cell(row, "lab_number", row.lab_number[:60], Problem("text_too_long", said)))
        spans = (
            ("machine_hours", row.machine_hours, 0.0, MOST_HOURS),
            ("oil_hours", row.oil_hours, 0.0, MOST_HOURS),
            ("litres_added", row.litres_added, 0.0, MOST_LITRES),
            ("oil_temperature", row.oil_temperature_c, COLDEST, HOTTEST),
        )
        for name, value, least, most in spans:
            if value is not None and not least <= value <= most:
                said = f"“{value:f}” is outside {least:,g} to {most:,g}. Check the number and its unit."
                found.append(self._cell(row, name, f"{value:f}", Problem("amount_impossible", said)))
        return found

    def _entry(
        self, row: RowReading, reservoir: Reservoir, point: SamplePoint, laboratory: Laboratory | None, moment: datetime
    ) -> SampleEntry:
        facts = SampleFacts(
            drawn_at=moment,
            lab_number=row.lab_number,
            remark=row.remark,
            machine_hours=_float(row.machine_hours),
            oil_hours=_float(row.oil_hours),
            litres_added=_float(row.litres_added),
            oil_temperature_c=_float(row.oil_temperature_c),
        )
        usual = laboratory.counted_ml if laboratory else None
        readings = [_with_volume(reading, usual) for reading in row.readings]
        return SampleEntry(reservoir, point, laboratory, facts, readings, row.code)

    def _check_reservoir(self, group: Sequence[_Placed]) -> list[RowVerdict]:
        history = read_history(group[0].entry.reservoir)
        record = OnRecord(history.samples, history.reservoir.area.site.zone)
        lines: dict[int, int] = {}
        verdicts = []
        for one in sorted(group, key=lambda one: (one.entry.facts.drawn_at, one.row.line)):
            verdict = self._check(one, history, record, lines)
            if verdict.checked is not None:
                sample = as_sample(verdict.checked, None, self.now)
                lines[id(sample)] = one.row.line
                record.add(sample)
                self._numbers.setdefault(_number_key(one.entry), one.entry.reservoir)
                history = history.including(sample)
            verdicts.append(verdict)
        return verdicts

    def _check(self, one: _Placed, history: History, record: OnRecord, lines: Mapping[int, int]) -> RowVerdict:
        found = preview(one.entry, history, self.now, self.known)
        if found.errors:
            problems = [
                self._cell(one.row, COLUMN_OF.get(error.field, error.field), "", Problem(error.code, error.sentence))
                for error in found.errors
            ]
            return self._wrong(one.row, problems)
        checked = Checked(one.entry, found)
        twins = record.twins(one.entry, day_only=one.row.drawn_time is None)
        if twins:
            return self._second(one, checked, twins, lines)
        holder = self._numbers.get(_number_key(one.entry))
        if holder is not None and holder != one.entry.reservoir:
            said = f"This laboratory number is on record for {holder} at the same moment. Check number and reservoir."
            cell = self._cell(one.row, "lab_number", one.row.lab_number, Problem("lab_number_taken", said))
            return self._wrong(one.row, [cell])
        return self._verdict(one, checked, RowState.IN_DOUBT if found.doubts else RowState.ADDS)

    def _second(self, one: _Placed, checked: Checked, twins: Sequence[Sample], lines: Mapping[int, int]) -> RowVerdict:
        """A row for a bottle that is known: the same again adds nothing, anything else is refused."""
        told = [differences(checked.preview.results, one.row.lab_number, twin) for twin in twins]
        line = lines.get(id(twins[0]))
        where = f"line {line} of this file" if line else f"the sample of {twins[0].drawn_at:%-d %b %Y}"
        if not all(told):
            return replace(
                self._verdict(one, checked, RowState.ON_RECORD),
                checked=None,
                remark=f"The same as {where}; adds nothing.",
            )
        said = f"It differs from {where}: {'; '.join(told[0][:4])}. Correct the row, or remove it."
        return self._wrong(one.row, [self._cell(one.row, "", "", Problem("differs_from_record", said))])

    def _verdict(self, one: _Placed, checked: Checked, state: RowState) -> RowVerdict:
        return RowVerdict(
            line=one.row.line,
            state=state,
            named=one.row.reservoir,
            reservoir=one.entry.reservoir,
            drawn_at=one.entry.facts.drawn_at,
            code=str(checked.preview.code or ""),
            read=figures_in_words(one.row.readings),
            notes=one.row.notes,
            doubts=checked.preview.doubts if state == RowState.IN_DOUBT else (),
            checked=checked,
        )

    def _wrong(self, row: RowReading, problems: Sequence[CellProblem]) -> RowVerdict:
        return RowVerdict(
            row.line,
            RowState.WRONG,
            row.reservoir,
            problems=problems,
            notes=row.notes,
            read=figures_in_words(row.readings),
        )

    def _cell(self, row: RowReading, name: str, value: str, problem: Problem) -> CellProblem:
        column = self.columns.by_field.get(name)
        return CellProblem(row.line, column.heading if column else "", value, problem.code, problem.sentence)

    def _numbers_on_record(self, entries: Sequence[SampleEntry]) -> dict[tuple[int | None, str, datetime], Reservoir]:
        """Who holds which laboratory number: it is unique over all reservoirs."""
        numbers = {entry.facts.lab_number for entry in entries if entry.facts.lab_number and entry.laboratory}
        found = Sample.objects.filter(lab_number__in=numbers).select_related("reservoir__machine")
        return {(one.laboratory_id, one.lab_number, one.drawn_at): one.reservoir for one in found}


def _number_key(entry: SampleEntry) -> tuple[int | None, str, datetime]:
    return (entry.laboratory.pk if entry.laboratory else None, entry.facts.lab_number, entry.facts.drawn_at)


def _float(value: Decimal | None) -> float | None:
    return None if value is None else float(value)


def _with_volume(reading: Reading, usual_counted_ml: float | None) -> Reading:
    """The laboratory's usual volume for a count whose report does not say; a code has none."""
    is_count = reading.measurand in COUNT_FIELDS and reading.reported_unit != "ISO 4406"
    if is_count and reading.counted_ml is None and usual_counted_ml is not None:
        return replace(reading, counted_ml=usual_counted_ml)
    return reading
