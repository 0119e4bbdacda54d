"""Rows of a laboratory file: every cell is used, noted or refused with line, column, value and reason."""

from datetime import UTC, date, datetime, time
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from samples.intake.columns import match_columns
from samples.intake.rows import RowReading, read_rows
from samples.intake.tables import Table, TableRow, read_table
from samples.intake.told import figures_in_words

AS_OF = datetime(2026, 11, 20, 12, 0, tzinfo=UTC)


def read(*lines: str) -> list[RowReading]:
    table = read_table("\n".join(lines).encode())
    return read_rows(table, match_columns(table.headings, line=table.heading_line), AS_OF)


def read_one(heading: str, cell: str) -> RowReading:
    (row,) = read(f"Reservoir;Drawn;Fe;{heading}", f"Press 1;2026-11-09;12;{cell}")
    return row


def values(row: RowReading) -> dict[str, float | None]:
    return {reading.measurand: reading.value for reading in row.readings}


def test_a_whole_row_is_read() -> None:
    (row,) = read(
        "Reservoir;Sample point;Drawn;Lab no;Machine hours;Litres added;Oil temp (°C);≥4 µm(c) /100 mL;"
        "≥6 µm(c) /100 mL;≥14 µm(c) /100 mL;Counted volume (mL);Water (%);Viscosity 40 °C;Remark",
        "Press 1;SP-1;9.11.2026 07:40;L-4711;18 432;0;52;217800;84700;6300;25;0,014;45,1;clear",
    )
    assert row.problems == ()
    assert (row.line, row.reservoir, row.sample_point, row.lab_number) == (2, "Press 1", "SP-1", "L-4711")
    assert (row.drawn_on, row.drawn_time) == (date(2026, 11, 9), time(7, 40))
    assert [row.machine_hours, row.litres_added, row.oil_temperature_c] == [Decimal(18432), Decimal(0), Decimal(52)]
    # AWEA RP 508, Figure A, here written per 100 mL.
    assert values(row) == {"p4": 2178.0, "p6": 847.0, "p14": 63.0, "water": 140.0, "viscosity_40": 45.1}
    assert row.readings[0].counted_ml == 25.0


def test_a_code_alone_becomes_intervals() -> None:
    row = read("Reservoir,Drawn,ISO code", "Press 1,2026-11-09,22/18/≥13")[0]
    assert [(reading.low, reading.high) for reading in row.readings] == [(20000, 40000), (1300, 2500), (40, None)]
    assert all(reading.value is None for reading in row.readings)


def test_counts_come_before_the_code_and_the_code_is_kept_as_stated() -> None:
    row = read("Reservoir,Drawn,ISO code,P4 per mL,P6 per mL,P14 per mL", "Press 1,2026-11-09,19/17/13,2178,847,63")[0]
    assert str(row.code) == "19/17/13"
    assert values(row) == {"p4": 2178.0, "p6": 847.0, "p14": 63.0}


def test_the_unit_of_counts_may_stand_in_a_column() -> None:
    row = read("Reservoir,Drawn,Count basis,P4,P6,P14", "Press 1,2026-11-09,per 100 mL,217800,84700,6300")[0]
    assert values(row) == {"p4": 2178.0, "p6": 847.0, "p14": 63.0}


def test_counts_without_a_unit_in_that_column_are_refused() -> None:
    row = read("Reservoir,Drawn,Count basis,P4", "Press 1,2026-11-09,?,217800")[0]
    assert [(problem.column, problem.code) for problem in row.problems] == [("Count basis", "basis_unreadable")]
    assert row.readings == ()


def test_the_comma_of_one_cell_settles_it_for_the_file() -> None:
    rows = read("Reservoir;Drawn;Fe;Cu", "A;2026-11-09;1,300;1", "B;2026-11-09;45,1;1")
    assert values(rows[0])["fe"] == 1.3


def test_a_bound_a_zero_a_missing_and_an_undetected_value_differ() -> None:
    rows = read(
        "Reservoir;Drawn;Fe;Cu", *(f"Press {n};2026-11-09;{cell};1" for n, cell in enumerate(["<5", "0", "n/a", "ND"]))
    )
    bound = rows[0].readings[-2]
    assert (bound.value, bound.low, bound.high, bound.qualifier) == (None, 0.0, 5.0, "<")
    assert values(rows[1])["fe"] == 0.0
    assert "fe" not in values(rows[2])
    assert rows[2].notes == ()
    assert [note.code for note in rows[3].notes] == ["bound_unknown"]


@pytest.mark.parametrize(
    ("heading", "cell", "code"),
    [
        ("Cu", "high", "number_unreadable"),
        ("Cu", "-3", "number_negative"),
        ("Cu", "nan", "number_not_finite"),
        ("Code", "37/20/15", "code_number_too_high"),
        ("Code", "dirty", "code_wrong_length"),
        ("Code", "13/17/19", "code_out_of_order"),
        ("Machine hours", "<5", "amount_is_bound"),
        ("Counted volume", "0", "counted_volume_not_positive"),
        ("Time", "noon", "time_unreadable"),
        ("P4 per mL", "1e14", "count_impossible"),
    ],
)
def test_a_bad_cell_is_named_with_line_column_value_and_reason(heading: str, cell: str, code: str) -> None:
    row = read_one(heading, cell)
    (problem,) = row.problems
    assert (problem.line, problem.column, problem.value, problem.code) == (2, heading, cell, code)
    assert problem.reason.endswith(".")
    assert not row.is_usable


@pytest.mark.parametrize(
    ("drawn", "code"),
    [
        ("", "drawn_missing"),
        ("soon", "date_unreadable"),
        ("2026-11-21", "drawn_in_future"),
        ("2026-11-20 13:00", "drawn_in_future"),
    ],
)
def test_a_date_must_be_there_and_past(drawn: str, code: str) -> None:
    row = read("Reservoir,Drawn,Fe", f"Press 1,{drawn},12")[0]
    assert [problem.code for problem in row.problems] == [code]


def test_a_sample_of_today_is_not_in_the_future() -> None:
    assert read("Reservoir,Drawn,Fe", "Press 1,2026-11-20,12")[0].is_usable


def test_counts_that_rise_with_size_are_refused_at_the_last_of_them() -> None:
    row = read("Reservoir,Drawn,P4 per mL,P6 per mL,P14 per mL", "Press 1,2026-11-09,7,96,391")[0]
    assert [(problem.column, problem.code) for problem in row.problems] == [("P14 per mL", "counts_out_of_order")]


def test_a_decimal_comma_in_a_comma_file_is_pointed_at() -> None:
    row = read("Reservoir,Drawn,Fe", "Press 1,2026-11-09,12,5")[0]
    assert [problem.code for problem in row.problems] == ["too_many_cells"]


def test_a_row_needs_a_reservoir_and_a_result() -> None:
    rows = read("Reservoir,Drawn,Fe", ",2026-11-09,12", "Press 1,2026-11-09,")
    assert [row.problems[0].code for row in rows] == ["reservoir_missing", "result_missing"]


def test_fahrenheit_becomes_celsius() -> None:
    assert read_one("Oil temp (°F)", "122").oil_temperature_c == Decimal(50)


@given(st.lists(st.text(alphabet="0123456789.,<>-/ eND≥:*", max_size=14), min_size=12, max_size=12))
def test_no_cell_raises(cells: list[str]) -> None:
    headings = (
        "Reservoir|Drawn|Time|Machine hours|ISO code|Count basis|P4|P6 per mL|P14|15 µm per mL|Water %|Oil temp °F"
    )
    table = Table(tuple(headings.split("|")), (TableRow(2, tuple(cells)),), 1, ";", "utf-8")
    (row,) = read_rows(table, match_columns(table.headings), AS_OF)
    assert all(problem.reason.endswith(".") and problem.code for problem in row.problems)
    assert row.readings or row.problems


def test_a_date_that_could_be_either_is_read_day_first_with_a_note() -> None:
    (row,) = read("Reservoir,Drawn,Fe", "Press 1,03/04/2026,12")
    assert row.drawn_on == date(2026, 4, 3)
    assert [(note.column, note.value, note.code) for note in row.notes] == [("Drawn", "03/04/2026", "date_day_first")]


def test_it_is_not_guessed_where_the_file_writes_the_month_first() -> None:
    first, second = read("Reservoir,Drawn,Fe", "Press 1,04/13/2026,12", "Press 1,03/04/2026,12")
    assert first.is_usable
    assert [problem.code for problem in second.problems] == ["date_order_unclear"]


@pytest.mark.parametrize(
    ("headings", "cells", "told"),
    [
        ("ISO 4406;Water (ppm);Viscosity 40", "18/17/13;140;45", "code, water, viscosity: 5 figures"),
        ("P4 per mL;P6 per mL;Fe;Cu;TAN", "391;96;3;2;0.4", "counts, acid number, elements: 5 figures"),
        ("Water (ppm);Fe", "140;", "water: 1 figure"),
        ("Water (ppm);Fe", ";", ""),
    ],
)
def test_what_was_read_is_told_in_words(headings: str, cells: str, told: str) -> None:
    (row,) = read(f"Reservoir;Drawn;{headings}", f"Press 1;2026-11-09;{cells}")
    assert figures_in_words(row.readings) == told
