"""The numbers of a reservoir's charts as a table: one row a sample, newest first, one column a measurand."""

from __future__ import annotations

from dataclasses import dataclass

from fleet.models import Measurand
from fleet.wording import bound_text, number_text
from samples.history import History
from samples.models import Result, Sample
from samples.sample_codes import code_text


@dataclass(frozen=True, slots=True)
class TableRow:
    sample: Sample
    code: str
    cells: list[str]


@dataclass(frozen=True, slots=True)
class HistoryTable:
    columns: list[Measurand]
    rows: list[TableRow]


def history_table(history: History) -> HistoryTable:
    columns = history.measurands
    rows = [TableRow(sample, code_text(sample.current_results), _cells(sample, columns)) for sample in history.samples]
    return HistoryTable(columns, rows[::-1])


def history_csv(history: History) -> tuple[list[str], list[list[object]]]:
    """The same as headings and rows of a spreadsheet, moments in site time."""
    table = history_table(history)
    headings = ["drawn", "point", "laboratory", "laboratory number", "verdict", "code"]
    zone = history.reservoir.area.site.zone
    rows: list[list[object]] = [
        [
            row.sample.drawn_at.astimezone(zone),
            row.sample.point.name,
            row.sample.laboratory.name if row.sample.laboratory else "",
            row.sample.lab_number,
            row.sample.get_verdict_display(),
            row.code,
            *_plain_cells(row.sample, table.columns),
        ]
        for row in table.rows
    ]
    return [*headings, *(f"{m.name} [{m.unit}]" for m in table.columns)], rows


def _plain_cells(sample: Sample, columns: list[Measurand]) -> list[object]:
    """Values as numbers a spreadsheet can reckon with; what is only a range stays in words."""
    by_key = {result.measurand.key: result for result in sample.current_results}
    found = [by_key.get(measurand.key) for measurand in columns]
    return ["" if r is None else cell_text(r) if r.value is None or r.qualifier else r.value for r in found]


def _cells(sample: Sample, columns: list[Measurand]) -> list[str]:
    by_key = {result.measurand.key: result for result in sample.current_results}
    return [cell_text(by_key[measurand.key]) if measurand.key in by_key else "" for measurand in columns]


def cell_text(result: Result) -> str:
    """A result in the measurand's unit: a value, or what is known of it when only a code or a bound is."""
    if result.value is not None:
        mark = result.qualifier if result.qualifier != "≥" else "≥ "
        return f"{mark}{number_text(result.value, result.measurand.decimals)}"
    if result.high is None:
        return f"over {bound_text(result.low or 0.0)}"
    high = bound_text(result.high)
    return f"{bound_text(result.low)}–{high}" if result.low else f"up to {high}"
