"""From table rows to readings, with a reason for every cell that cannot be used. Pure; no cell raises.

Times are the site's own clock; the caller attaches the time zone.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from datetime import date, datetime, time
from decimal import Decimal
from functools import partial
from typing import Final

from fleet.codes import CodeError, IsoCode, parse_iso_code
from samples.coding.iso4406 import Basis, code_from_counts
from samples.intake.columns import COUNT_FIELDS, MEASURED_FIELDS, Column, Columns, basis_of
from samples.intake.dates import ReadDate, read_date, read_time
from samples.intake.numbers import DecimalMark, ReadNumber, decimal_mark_of, read_number
from samples.intake.tables import Table, TableRow
from samples.problems import CellProblem, Problem
from samples.readings import (
    COUNTER_SIZES,
    MICROSCOPE_SIZES,
    Reading,
    reading_of,
    readings_from_code,
    readings_from_counts,
    to_canonical,
)

_TEXT_FIELDS: Final = ("reservoir", "sample_point", "drawn", "drawn_time", "laboratory", "lab_number", "code", "remark")
_AMOUNTS: Final = ("machine_hours", "oil_hours", "litres_added", "counted_ml")


@dataclass(frozen=True, slots=True)
class RowReading:
    """One row of a laboratory file, understood as far as possible; usable only when ``problems`` is empty.

    ``readings`` come from the counts where the row has both counts and a code; ``code`` is what the laboratory stated.
    ``notes`` say what was left out without harm ("ND" has no number).
    """

    line: int
    reservoir: str = ""
    sample_point: str = ""
    drawn_on: date | None = None
    drawn_time: time | None = None
    laboratory: str = ""
    lab_number: str = ""
    machine_hours: Decimal | None = None
    oil_hours: Decimal | None = None
    litres_added: Decimal | None = None
    oil_temperature_c: Decimal | None = None
    code: IsoCode | None = None
    counted_ml: Decimal | None = None
    remark: str = ""
    readings: tuple[Reading, ...] = ()
    problems: tuple[CellProblem, ...] = ()
    notes: tuple[CellProblem, ...] = ()

    @property
    def is_usable(self) -> bool:
        return not self.problems


@dataclass(slots=True)
class _Row:
    """One row while it is being read: its cells by field, and what was found wrong so far."""

    row: TableRow
    columns: Columns
    decimal_mark: DecimalMark | None
    month_first: bool = False
    problems: list[CellProblem] = field(default_factory=list)
    notes: list[CellProblem] = field(default_factory=list)

    def column(self, name: str) -> Column | None:
        return self.columns.by_field.get(name)

    def text(self, name: str) -> str:
        column = self.column(name)
        return "" if column is None else self.row.cells[column.index]

    def object(self, name: str, problem: Problem, into: list[CellProblem] | None = None) -> None:
        column = self.column(name)
        heading = column.heading if column is not None else ""
        found = CellProblem(self.row.line, heading, self.text(name), problem.code, problem.sentence)
        (self.problems if into is None else into).append(found)

    def number(self, name: str, *, negative: bool = False) -> ReadNumber | None:
        """What the cell says, or None where there is no column, no entry or no usable number."""
        if self.column(name) is None:
            return None
        number = read_number(self.text(name), decimal_mark=self.decimal_mark, negative=negative)
        if number.problem is not None:
            self.object(name, number.problem)
        elif number.state == "undetected":
            self.object(name, _NO_BOUND, self.notes)
        return number if number.value is not None else None


_NO_BOUND: Final = Problem(
    "bound_unknown", "Not detected, but the detection limit is not stated, so no number is kept. Write “<5” to keep it."
)


def read_rows(table: Table, columns: Columns, as_of: datetime) -> list[RowReading]:
    """Read every row of a table.

    Args:
        columns: what `match_columns` made of the table's headings; must be usable.
        as_of: now, on the site's clock. A row drawn later is a problem.

    Problem codes: those of `read_number`, `read_date`, `parse_iso_code`, `code_from_counts`, and ``reservoir_missing``,
    ``drawn_missing``, ``drawn_in_future``, ``result_missing``, ``too_many_cells``, ``basis_unreadable``,
    ``amount_is_bound``, ``date_order_unclear`` (3/4/2026 where other rows write the month first). Note codes:
    ``bound_unknown``, ``date_day_first``.
    """
    mark = decimal_mark_of(cell for row in table.rows for cell in _number_cells(row, columns))
    month_first = any(date.order == "month_first" for date in _dates(table, columns))
    return [_read_row(_Row(row, columns, mark, month_first), as_of) for row in table.rows]


def _read_row(row: _Row, as_of: datetime) -> RowReading:
    if row.row.extra:
        row.problems.append(_too_many_cells(row.row))
    drawn_on, drawn_time = _drawn(row, as_of)
    if not row.text("reservoir"):
        row.object("reservoir", Problem("reservoir_missing", "The row names no reservoir. Fill in its name."))
    amounts = {name: _amount(row, name) for name in _AMOUNTS}
    code = _code(row)
    readings = (*_count_readings(row, amounts["counted_ml"], code), *_measured_readings(row))
    if not readings and not row.problems:
        row.object(
            "", Problem("result_missing", "The row has no result. Remove it, or fill in a code, counts or a value.")
        )
    return RowReading(
        line=row.row.line,
        reservoir=row.text("reservoir"),
        sample_point=row.text("sample_point"),
        drawn_on=drawn_on,
        drawn_time=drawn_time,
        laboratory=row.text("laboratory"),
        lab_number=row.text("lab_number"),
        **amounts,
        oil_temperature_c=_oil_temperature(row),
        code=code,
        remark=row.text("remark"),
        readings=readings,
        problems=tuple(row.problems),
        notes=tuple(row.notes),
    )


def _dates(table: Table, columns: Columns) -> Iterator[ReadDate]:
    column = columns.by_field.get("drawn")
    return (read_date(row.cells[column.index]) for row in table.rows) if column is not None else iter(())


def _number_cells(row: TableRow, columns: Columns) -> list[str]:
    return [row.cells[column.index] for name, column in columns.by_field.items() if name not in _TEXT_FIELDS]


def _too_many_cells(row: TableRow) -> CellProblem:
    reason = (
        "The row has more cells than there are headings. Often a decimal comma in a file with commas between cells."
    )
    return CellProblem(row.line, "", ", ".join(row.extra)[:60], "too_many_cells", reason)


def _drawn(row: _Row, as_of: datetime) -> tuple[date | None, time | None]:
    drawn = read_date(row.text("drawn"))
    clock = read_time(row.text("drawn_time"))
    if drawn.problem is not None:
        row.object("drawn", drawn.problem)
    elif drawn.day is None:
        row.object("drawn", Problem("drawn_missing", "The row has no date. Fill in when the sample was drawn."))
    if drawn.order == "either":
        _say_order(row, drawn)
    if clock.problem is not None:
        row.object("drawn_time", clock.problem)
    at = drawn.at or clock.at
    if drawn.day is not None and (drawn.day, at or time.min) > (as_of.date(), as_of.time()):
        reason = f"The sample is dated after today ({as_of:%-d %b %Y}). Check the date."
        row.object("drawn", Problem("drawn_in_future", reason))
    return drawn.day, at


def _say_order(row: _Row, drawn: ReadDate) -> None:
    """Day first, and said so; but never where the file itself writes the month first elsewhere."""
    if row.month_first:
        reason = "Other rows of the file write the month first, this can be either. Write it like 2026-11-09."
        row.object("drawn", Problem("date_order_unclear", reason))
    else:
        row.object("drawn", Problem("date_day_first", f"Read as {drawn.day:%-d %b %Y}, the day first."), row.notes)


def _amount(row: _Row, name: str) -> Decimal | None:
    number = row.number(name)
    if number is None:
        return None
    if number.state == "bound":
        row.object(
            name, Problem("amount_is_bound", f"“{number.reported}” is only a bound. Write one number, or nothing.")
        )
        return None
    if name == "counted_ml" and number.value == 0:
        row.object(name, Problem("counted_volume_not_positive", "The counted volume must be more than 0 mL."))
        return None
    return number.value


def _oil_temperature(row: _Row) -> Decimal | None:
    number = row.number("oil_temperature", negative=True)
    column = row.column("oil_temperature")
    if number is None or number.value is None or column is None:
        return None
    return to_canonical("oil_temperature", number.value, column.unit or "°C")


def _code(row: _Row) -> IsoCode | None:
    text = row.text("code")
    if read_number(text).state == "missing":
        return None
    return _caught(row, "code", partial(parse_iso_code, text))


def _count_readings(row: _Row, counted_ml: Decimal | None, code: IsoCode | None) -> list[Reading]:
    counts = {name: number for name in COUNT_FIELDS if (number := row.number(name)) is not None}
    bases = {name: _basis(row, name) for name in counts}
    if None in bases.values():
        return []
    readings = []
    for sizes in (COUNTER_SIZES, MICROSCOPE_SIZES):
        for name in sizes:
            basis = bases.get(name)
            if basis is not None:
                readings += _one_count(counts[name], name, basis, counted_ml)
    _check_counts(row, readings)
    return readings or ([] if code is None else readings_from_code(code))


def _one_count(number: ReadNumber, name: str, basis: Basis, counted_ml: Decimal | None) -> list[Reading]:
    microscope = name in MICROSCOPE_SIZES
    names = (None, *MICROSCOPE_SIZES) if microscope else COUNTER_SIZES
    four, six, fourteen = (number if name == size else None for size in names)
    return readings_from_counts(four, six, fourteen, basis=basis, counted_ml=counted_ml, microscope=microscope)


def _check_counts(row: _Row, readings: list[Reading]) -> None:
    """Order and size of the counts, by the coding itself; a problem stands at the last count of its kind."""
    values = {reading.measurand: reading.value for reading in readings if reading.value is not None}
    for sizes in (COUNTER_SIZES, ("", *MICROSCOPE_SIZES)):
        given = [size for size in sizes if size in values]
        if given:
            four, six, fourteen = (values.get(size) for size in sizes)
            _caught(row, given[-1], partial(code_from_counts, four, six, fourteen))


def _basis(row: _Row, name: str) -> Basis | None:
    column = row.column(name)
    if column is not None and column.basis is not None:
        return column.basis
    basis = basis_of(row.text("count_basis"))
    if basis is None:
        row.object(
            "count_basis", Problem("basis_unreadable", "The counts have no unit. Write “per mL” or “per 100 mL”.")
        )
    return basis


def _measured_readings(row: _Row) -> list[Reading]:
    readings = []
    for name in MEASURED_FIELDS:
        number, column = row.number(name), row.column(name)
        reading = None if number is None or column is None else reading_of(name, number, column.unit)
        if reading is not None:
            readings.append(reading)
    return readings


def _caught(row: _Row, name: str, coded: Callable[[], IsoCode]) -> IsoCode | None:
    try:
        return coded()
    except CodeError as error:
        row.object(name, Problem(error.code, error.sentence))
        return None
