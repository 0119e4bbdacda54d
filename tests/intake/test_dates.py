"""Dates: day first unless that is impossible."""

from datetime import date, time

import pytest
from hypothesis import given
from hypothesis import strategies as st

from samples.intake.dates import read_date, read_time


@pytest.mark.parametrize(
    "text",
    [
        *("2026-11-09", "2026/11/09", "9.11.2026", "09.11.26", "9/11/2026", "9-11-2026", "9. 11. 2026"),
        *("9 Nov 2026", "09-Nov-2026", "9 November 2026", " 2026-11-09 "),
    ],
)
def test_a_date_is_read_however_it_is_written(text: str) -> None:
    assert read_date(text).day == date(2026, 11, 9)


def test_the_month_comes_first_only_where_it_must() -> None:
    assert read_date("11/25/2026").day == date(2026, 11, 25)
    assert read_date("11/12/2026").day == date(2026, 12, 11)


@pytest.mark.parametrize("text", ["2026-11-09T07:40", "2026-11-09 07:40:30", "9.11.2026 7.40", "9/11/2026, 07:40"])
def test_a_time_of_day_may_follow(text: str) -> None:
    assert read_date(text).at == time(7, 40)


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("yesterday", "date_unreadable"),
        ("9 Nuv 2026", "date_unreadable"),
        ("20261109", "date_unreadable"),
        ("2026-11-09T07:40Z", "date_unreadable"),
        ("31.2.2026", "date_impossible"),
        ("2026-13-01", "date_impossible"),
        ("9.11.2026 25:00", "date_impossible"),
        ("1.1.1900", "date_too_old"),
    ],
)
def test_what_is_no_date_says_why(text: str, code: str) -> None:
    problem = read_date(text).problem
    assert problem is not None
    assert problem.code == code


def test_an_empty_date_is_nothing_and_no_problem() -> None:
    assert read_date("  ").day is None
    assert read_date("  ").problem is None


def test_a_time_alone_is_read_too() -> None:
    assert read_time("07:40").at == time(7, 40)
    assert read_time("half past").problem is not None


@given(st.text(max_size=40))
def test_no_text_raises(text: str) -> None:
    read_date(text)
    read_time(text)


@given(st.dates(date(1970, 1, 1), date(2099, 12, 31)))
def test_an_iso_date_reads_back_as_itself(day: date) -> None:
    assert read_date(day.isoformat()).day == day


@pytest.mark.parametrize(
    ("text", "order"),
    [
        ("03/04/2026", "either"),
        ("3-4-2026 07:40", "either"),
        ("04/04/2026", ""),
        ("13/04/2026", ""),
        ("04/13/2026", "month_first"),
        ("3.4.2026", ""),
        ("2026-04-03", ""),
        ("3 Apr 2026", ""),
    ],
)
def test_it_is_known_whether_day_and_month_could_be_the_other_way_round(text: str, order: str) -> None:
    assert read_date(text).order == order
