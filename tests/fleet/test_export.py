"""Rows as CSV. Which cells a spreadsheet takes for a formula: OWASP, "CSV Injection" (=, +, -, @, tab, return)."""

import csv
import io
from collections.abc import Iterator
from datetime import UTC, date, datetime

import pytest

from fleet.export import csv_cell, csv_response

FORMULAS = [
    "=1+1",
    "+cmd",
    "-/18/13",
    "@SUM(A1)",
    "\t=1",
    "\r=1",
    "-2+3",
    "+49 123",
    " =1+1",
    "\n=1",
    "＝1+1",
    "＠SUM(A1)",
]


@pytest.mark.parametrize("text", FORMULAS)
def test_text_that_begins_like_a_formula_gets_an_apostrophe(text: str) -> None:
    assert csv_cell(text) == f"'{text}"


@pytest.mark.parametrize("text", ["-0.5", "+3", "-1e3", "-0,25", "-12", "18/16/13", "≥18", "", "a=b"])
def test_plain_numbers_and_other_text_stay_as_they_are(text: str) -> None:
    assert csv_cell(text) == text


@pytest.mark.parametrize("text", ["-inf", "+nan"])
def test_words_that_only_a_computer_takes_for_numbers_get_an_apostrophe(text: str) -> None:
    assert csv_cell(text) == f"'{text}"


@pytest.mark.parametrize(
    ("value", "cell"),
    [
        (None, ""),
        (True, "yes"),
        (False, "no"),
        (-0.5, "-0.5"),
        (date(2026, 6, 1), "2026-06-01"),
        (datetime(2026, 6, 1, 12, tzinfo=UTC), "2026-06-01T12:00+00:00"),
    ],
)
def test_values_are_written_for_machines(value: object, cell: str) -> None:
    assert csv_cell(value) == cell


def test_a_spreadsheet_reads_back_what_was_sent() -> None:
    rows = [["Press 4 · drive pack", 'a "quoted", name', "β5(c) ≥ 1000"], ["two\nlines", 1.5, None]]
    sent = b"".join(csv_response("reservoirs", ["Name", "Note", "Rating"], rows))  # type: ignore[arg-type]
    text = sent.decode("utf-8-sig")
    found = list(csv.reader(io.StringIO(text, newline="")))
    assert found[1:] == [["Press 4 · drive pack", 'a "quoted", name', "β5(c) ≥ 1000"], ["two\nlines", "1.5", ""]]


def test_rows_are_taken_only_as_they_are_sent() -> None:
    taken = 0

    def rows() -> Iterator[list[int]]:
        nonlocal taken
        for taken in range(1, 1001):
            yield [taken]

    sent = iter(csv_response("many", ["n"], rows()))
    next(sent), next(sent)
    assert taken == 1
