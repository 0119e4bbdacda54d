"""Numbers as laboratories write them: zero, a bound, undetected and missing stay four different things."""

from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from samples.intake.numbers import decimal_mark_of, read_number


@pytest.mark.parametrize(
    ("text", "value"),
    [
        *(("0", "0"), ("0.0", "0"), (" 45.1 ", "45.1"), ("45,1", "45.1"), ("+3", "3"), (".5", "0.5"), ("5.", "5")),
        *(("12 345", "12345"), ("12\u00a0345,6", "12345.6"), ("12\u202f345", "12345"), ("12'345", "12345")),
        *(("1,234,567", "1234567"), ("1.234.567", "1234567"), ("1,234.5", "1234.5"), ("1.234,5", "1234.5")),
        *(("2.1e3", "2100"), ("2,1E3", "2100"), ("1.300", "1.3"), ("0,410", "0.41")),
    ],
)
def test_a_number_is_read_however_it_is_written(text: str, value: str) -> None:
    number = read_number(text)
    assert number.state == "number"
    assert number.value == Decimal(value)
    assert number.reported == text.replace("\u00a0", " ").replace("\u202f", " ").strip()


@pytest.mark.parametrize(
    ("text", "qualifier", "value"),
    [("<5", "<", 5), ("< 5", "<", 5), ("≤5", "<", 5), (">100", ">", 100), ("≥20", "≥", 20), (">=20", "≥", 20)],
)
def test_a_bound_keeps_its_side(text: str, qualifier: str, value: int) -> None:
    number = read_number(text)
    assert (number.state, number.qualifier, number.value) == ("bound", qualifier, Decimal(value))


@pytest.mark.parametrize("text", ["", "  ", "-", "?", "n/a", "N/A", "not tested"])
def test_no_answer_is_missing(text: str) -> None:
    assert read_number(text).state == "missing"


@pytest.mark.parametrize("text", ["ND", "n.d.", "Not detected", "trace"])
def test_undetected_is_neither_zero_nor_missing(text: str) -> None:
    number = read_number(text)
    assert (number.state, number.value) == ("undetected", None)


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("-5", "number_negative"),
        ("<-5", "number_negative"),
        ("<0", "bound_not_positive"),
        ("high", "number_unreadable"),
        ("45 cSt", "number_unreadable"),
        ("1.2.3", "number_unreadable"),
        ("12 34", "number_unreadable"),
        ("9" * 500, "number_unreadable"),
        ("1,300", "number_ambiguous"),
        ("NaN", "number_not_finite"),
        ("inf", "number_not_finite"),
        ("-Infinity", "number_not_finite"),
        ("1e400", "number_too_large"),
        ("1e-400", "number_too_large"),
    ],
)
def test_what_is_no_usable_number_says_why(text: str, code: str) -> None:
    number = read_number(text)
    assert number.value is None
    assert number.problem is not None
    assert number.problem.code == code


def test_a_known_decimal_mark_settles_what_a_comma_means() -> None:
    assert read_number("1,300", decimal_mark=",").value == Decimal("1.3")
    assert read_number("1,300", decimal_mark=".").value == Decimal(1300)
    assert read_number("1.300", decimal_mark=",").value == Decimal(1300)
    assert read_number("45.1", decimal_mark=",").value == Decimal("45.1")


def test_a_temperature_may_be_below_zero() -> None:
    assert read_number("−5", negative=True).value == Decimal(-5)


@pytest.mark.parametrize(
    ("texts", "mark"),
    [
        (["12", "1,300", "45,1"], ","),
        (["1.234,5"], ","),
        (["0.41", "12"], "."),
        (["<0.5"], "."),
        (["1,300", "1.300", "12.10.2026", "1,234,567", "text", ""], None),
        (["45,1", "45.1"], None),
    ],
)
def test_the_numbers_of_a_file_prove_its_decimal_mark(texts: list[str], mark: str | None) -> None:
    assert decimal_mark_of(texts) == mark


@given(st.text(max_size=60))
def test_no_text_raises(text: str) -> None:
    number = read_number(text)
    assert (number.problem is not None) == (number.state == "problem")


@given(st.decimals(0, 10**6, places=3))
def test_a_printed_number_reads_back_as_itself(value: Decimal) -> None:
    assert read_number(str(value), decimal_mark=".").value == value
