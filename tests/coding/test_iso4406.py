"""Counts to codes against the published examples in iso4406_examples.csv and Table 1 of ISO 4406 (1999 to 2021)."""

import csv
import hashlib
import math
from decimal import Decimal
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fleet.codes import NOT_MEASURED, TOO_MANY_TO_COUNT, CodeError, ScaleNumber, parse_iso_code
from samples.coding.iso4406 import (
    UPPER_PER_100ML,
    bounds_per_ml,
    code_from_counts,
    code_scale,
    per_ml_at,
    per_ml_from,
    scale_number,
)

Example = dict[str, str]
EXAMPLES: list[Example] = list(csv.DictReader((Path(__file__).parent / "iso4406_examples.csv").open(encoding="utf-8")))
# Upper bounds of scale numbers 0 to 28 as Table 1 prints them, particles per mL.
PRINTED_UPPER_PER_ML = [
    *("0.01", "0.02", "0.04", "0.08", "0.16", "0.32", "0.64", "1.3", "2.5", "5", "10", "20", "40", "80", "160", "320"),
    *("640", "1300", "2500", "5000", "10000", "20000", "40000", "80000", "160000", "320000", "640000", "1300000"),
    "2500000",
]
NUMBERS = list(range(29))


def of_kind(*kinds: str) -> list[object]:
    return [pytest.param(row, id=row["id"]) for row in EXAMPLES if row["kind"] in kinds]


@pytest.mark.parametrize("example", of_kind("counts", "microscope"))
def test_published_counts_get_their_published_code(example: Example) -> None:
    four, six, fourteen = (example[size] or None for size in ("four", "six", "fourteen"))
    microscope = example["kind"] == "microscope"
    code = code_from_counts(four, six, fourteen, counted_ml=example["counted_ml"] or None, microscope=microscope)
    assert str(code) == example["expected"]


@pytest.mark.parametrize("example", of_kind("one"))
def test_a_published_boundary_falls_on_its_published_side(example: Example) -> None:
    code = code_from_counts(None, None, example["fourteen"], counted_ml=example["counted_ml"] or None)
    assert str(code.fourteen) == example["expected"]


@pytest.mark.parametrize("example", of_kind("bounds"))
def test_a_published_code_has_its_published_bounds(example: Example) -> None:
    code = parse_iso_code(example["expected"])
    for size, number in zip(("four", "six", "fourteen"), code.sizes, strict=True):
        if example[size]:
            low, high = example[size].split(" to ")
            assert bounds_per_ml(number) == (float(low), float(high))


def test_every_example_is_used() -> None:
    assert {row["kind"] for row in EXAMPLES} == {"counts", "microscope", "one", "bounds"}
    assert len(EXAMPLES) == 19


def test_the_table_is_the_printed_one() -> None:
    assert [Decimal(upper) * 100 for upper in PRINTED_UPPER_PER_ML] == list(UPPER_PER_100ML)
    digest = hashlib.sha256(",".join(map(str, UPPER_PER_100ML)).encode()).hexdigest()
    assert digest == "503adf215801bf3fba61bb9cd9dbb99cfa3377ba0864b4b214c6865874a14ec2"


@pytest.mark.parametrize("number", NUMBERS)
def test_the_upper_bound_belongs_to_the_lower_number(number: int) -> None:
    upper = PRINTED_UPPER_PER_ML[number]
    above = "28" if number == 28 else str(number + 1)
    assert str(code_from_counts(None, None, upper).fourteen) == str(number)
    just_above = code_from_counts(None, None, upper + ("" if "." in upper else ".") + "0" * 40 + "1").fourteen
    assert str(just_above).removeprefix(">") == above
    assert just_above.mark == (">" if number == 28 else "")


@pytest.mark.parametrize("number", NUMBERS)
def test_the_bounds_of_a_number_code_back_to_it(number: int) -> None:
    low, high = bounds_per_ml(ScaleNumber(number))
    assert high is not None
    assert code_from_counts(None, None, high).fourteen == ScaleNumber(number)
    if number:
        assert code_from_counts(None, None, low).fourteen == ScaleNumber(number - 1)


def test_floats_are_taken_as_they_are_written() -> None:
    assert str(code_from_counts(1.3, 0.64, 0.32)) == "7/6/5"
    assert str(code_from_counts(np.float64(80.01), 80.0, 1)) == "14/13/7"


@pytest.mark.parametrize(
    ("per_ml", "counted_ml", "expected"),
    [
        # ISO 4406: fewer than 20 particles counted. 10 mL: below 2 per mL; 25 mL: below 0.8; 100 mL: below 0.2.
        *(
            ("1.99", 10, "≥8"),
            ("2", 10, "8"),
            ("0.79", 25, "≥7"),
            ("0.8", 25, "7"),
            ("0.19", 100, "≥5"),
            ("0.2", 100, "5"),
        ),
        ("0", 10, "≥0"),
        ("1.99", None, "8"),
    ],
)
def test_fewer_than_twenty_counted_particles_mark_the_number(
    per_ml: str, counted_ml: int | None, expected: str
) -> None:
    assert str(code_from_counts(None, None, per_ml, counted_ml=counted_ml).fourteen) == expected


def test_open_numbers_have_open_bounds() -> None:
    assert bounds_per_ml(ScaleNumber(28, ">")) == (2_500_000.0, None)
    assert bounds_per_ml(ScaleNumber(7, "≥")) == (0.64, None)
    assert bounds_per_ml(ScaleNumber(0)) == (0.0, 0.01)


@pytest.mark.parametrize("number", [NOT_MEASURED, TOO_MANY_TO_COUNT])
def test_an_uncounted_size_has_no_bounds(number: ScaleNumber) -> None:
    with pytest.raises(CodeError) as refusal:
        bounds_per_ml(number)
    assert refusal.value.code == "size_has_no_bounds"


@pytest.mark.parametrize(
    ("counts", "code"),
    [
        ((-1, None, None), "count_negative"),
        (("nan", None, None), "count_not_a_number"),
        ((math.inf, None, None), "count_not_a_number"),
        (("many", None, None), "count_not_a_number"),
        (("1e999999", None, None), "count_impossible"),
        ((7, 500, 3000), "counts_out_of_order"),
        ((500, None, 501), "counts_out_of_order"),
        ((None, None, None), "code_empty"),
    ],
)
def test_impossible_counts_are_refused(counts: tuple[str | float | None, ...], code: str) -> None:
    with pytest.raises(CodeError) as refusal:
        code_from_counts(*counts)
    assert refusal.value.code == code


def test_a_counted_volume_must_be_positive() -> None:
    with pytest.raises(CodeError) as refusal:
        code_from_counts(3, 2, 1, counted_ml=0)
    assert refusal.value.code == "counted_volume_not_positive"


def test_a_microscope_count_has_no_four() -> None:
    with pytest.raises(CodeError) as refusal:
        code_from_counts(3000, 500, 7, microscope=True)
    assert refusal.value.code == "microscope_has_no_four"


@given(st.integers(0, 10**9), st.integers(0, 10**9))
def test_more_particles_never_give_a_lower_number(one: int, other: int) -> None:
    lower, higher = (scale_number(count).rank for count in sorted((one, other)))
    assert lower is not None
    assert higher is not None
    assert lower <= higher


@given(st.integers(0, 250_000_000))
def test_a_count_lies_inside_the_bounds_of_its_number(per_100ml: int) -> None:
    low, high = bounds_per_ml(scale_number(per_100ml))
    assert high is not None
    assert per_100ml / 100 <= high
    assert per_100ml / 100 > low or per_100ml == 0


def test_one_step_of_the_continuous_scale_is_a_doubling() -> None:
    assert code_scale(0.01) == 0.0
    assert code_scale(0.64) == 6.0
    assert code_scale(391.2) - code_scale(195.6) == pytest.approx(1.0)
    assert per_ml_at(code_scale(391.2)) == pytest.approx(391.2)


def test_zero_has_a_finite_place_and_arrays_keep_their_shape() -> None:
    places = code_scale(np.array([[0.0, 0.005], [0.02, np.nan]]))
    assert places.shape == (2, 2)
    assert places[0].tolist() == [-1.0, -1.0]
    assert places[1, 0] == 1.0
    assert np.isnan(places[1, 1])


def test_per_100_ml_is_divided_without_rounding() -> None:
    assert per_ml_from(Decimal(39120), "per_100ml") == Decimal("391.20")
    assert per_ml_from(Decimal("391.2"), "per_ml") == Decimal("391.2")
