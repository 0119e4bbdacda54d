"""What people paste, as they paste it. The first two count sets are from AWEA RP 508, Figure A (laboratory report)."""

from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from samples.coding.iso4406 import code_from_counts
from samples.coding.pasted import read_pasted


def shown(text: str) -> tuple[str, str, str | None]:
    """Code, counts and unit of a pasted text, as short texts."""
    pasted = read_pasted(text)
    assert pasted.problem is None
    counts = "" if pasted.counts is None else " ".join("-" if count is None else str(count) for count in pasted.counts)
    return "" if pasted.code is None else str(pasted.code), counts, pasted.basis


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("19/17/13", "19/17/13"),
        ("ISO 4406: 19/17/13", "19/17/13"),
        ("ISO 4406:19/17/13", "19/17/13"),
        ("ISO 4406:2021 19/17/13", "19/17/13"),
        ("14/12/>=7", "14/12/≥7"),
        ("*/19/14", "*/19/14"),
        (">28/20/15", ">28/20/15"),
        ("Hello, your sample 4711 of 12/10/2026 came to ISO 4406 code 19/17/13. Regards", "19/17/13"),
        ("23/10/05 sample, code 19/17/13", "19/17/13"),
    ],
)
def test_a_code_is_found_alone_or_in_a_line(text: str, code: str) -> None:
    assert shown(text) == (code, "", None)


@pytest.mark.parametrize(
    ("text", "counts", "basis"),
    [
        ("4 µm 2178 6 µm 847 14 µm 63 particles/ml", "2178 847 63", "per_ml"),
        ("≥4 µm(c): 1446 /mL; ≥6 µm(c): 561 /mL; ≥14 µm(c): 43 /mL", "1446 561 43", "per_ml"),
        ("39120 9610 710 /100 ml", "39120 9610 710", "per_100ml"),
        ("39 120 9 610 710 /100 ml", "39120 9610 710", "per_100ml"),
        ("39,120 9,610 710 per 100 mL", "39120 9610 710", "per_100ml"),
        ("391.2; 96.1; 7.1 per mL", "391.2 96.1 7.1", "per_ml"),
        ("391,2; 96,1; 7,1 per mL", "391.2 96.1 7.1", "per_ml"),
        ("391,96,7 per ml", "391 96 7", "per_ml"),
        ("391/96/7 per mL", "391 96 7", "per_ml"),
        ("2178 (4 µm), 847 (6 µm), 63 (14 µm) per millilitre", "2178 847 63", "per_ml"),
        ("≥4/≥6/≥14 µm(c): 391/96/7 per mL", "391 96 7", "per_ml"),
        ("391\t96\t7", "391 96 7", None),
    ],
)
def test_counts_are_found_with_their_unit(text: str, counts: str, basis: str | None) -> None:
    assert shown(text) == ("", counts, basis)


def test_counts_without_a_unit_make_the_form_ask() -> None:
    pasted = read_pasted("391 96 7")
    assert pasted.needs_basis
    assert pasted.per_ml is None


def test_code_and_counts_of_one_line_are_both_kept() -> None:
    assert shown("16/14/11 (492/149/15 per ml)") == ("16/14/11", "492 149 15", "per_ml")


def test_the_counted_volume_is_no_count() -> None:
    pasted = read_pasted("391 96 7 per mL, counted 25 mL")
    assert pasted.counted_ml == 25
    assert pasted.per_ml == (Decimal(391), Decimal(96), Decimal(7))


@pytest.mark.parametrize("text", ["2000 60 per mL", "5 µm 2000 15 µm 60 /ml", "5/15 µm: 2000/60 per mL"])
def test_two_counts_are_from_the_microscope(text: str) -> None:
    pasted = read_pasted(text)
    assert pasted.microscope
    assert pasted.counts == (None, Decimal(2000), Decimal(60))


def test_a_two_number_code_is_from_the_microscope() -> None:
    pasted = read_pasted("18/13")
    assert pasted.microscope
    assert str(pasted.code) == "-/18/13"


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("", "paste_empty"),
        ("   \n", "paste_empty"),
        ("abc", "paste_not_understood"),
        ("x" * 2001, "paste_too_long"),
        ("37/20/15", "code_number_too_high"),
        ("13/17/19", "code_out_of_order"),
        ("7 96 391 per ml", "counts_out_of_order"),
        ("-5 3 2 /ml", "count_negative"),
        ("<5 3 1 per mL", "paste_bound"),
        ("39,120; 9,610; 7,100 /100 ml", "paste_ambiguous"),
        ("1 2 3 4 5 6", "paste_wrong_number_of_counts"),
        ("19/17/13 and 18/16/12", "paste_several_codes"),
        ("391 96 7 per mL or 39120 9610 710 per 100 mL", "paste_two_units"),
    ],
)
def test_what_cannot_be_used_is_said_plainly(text: str, code: str) -> None:
    problem = read_pasted(text).problem
    assert problem is not None
    assert problem.code == code
    assert problem.sentence.endswith(".")


@given(st.text(max_size=200))
def test_no_text_raises(text: str) -> None:
    read_pasted(text)


@given(st.text(alphabet="0123456789/.,;-*≥>< µmlISO", max_size=60))
def test_no_text_that_looks_like_a_result_raises(text: str) -> None:
    pasted = read_pasted(text)
    if pasted.problem is None and pasted.counts is not None:
        code_from_counts(*pasted.counts)


@pytest.mark.parametrize(
    ("text", "unread"),
    [
        ("ISO 4406: 20/18/15, water 250 ppm, visc 31.9, Fe 12 ppm", True),
        ("4 µm 2178 6 µm 847 14 µm 63 particles/ml, water 250 ppm", True),
        ("39120/9610/710 /100 ml, water 250 ppm", True),
        ("ISO 4406:2021 19/17/13", False),
        ("PR-104 of 3.4.2026 10:15: 19/17/13, regards", False),
        ("18/17/13 (4 µm(c)/6 µm(c)/14 µm(c)), counted 25 mL", False),
        ("39120 9610 710 /100 ml", False),
        ("4 µm 2178 6 µm 847 14 µm 63 particles/ml", False),
    ],
)
def test_it_is_known_whether_figures_of_the_line_were_left_unread(text: str, unread: bool) -> None:
    pasted = read_pasted(text)
    assert pasted.problem is None
    assert pasted.unread is unread
