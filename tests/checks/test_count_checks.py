"""Doubts about counts. A factor of 100 is log2(100) = 6.64 code steps."""

from collections.abc import Mapping
from datetime import UTC, datetime

import pytest

from fleet.codes import parse_iso_code
from samples.checks.candidates import CandidateSample, PastSample
from samples.checks.counts import (
    all_counts_moved,
    code_agrees_with_counts,
    copy_of_the_last,
    order_of_sizes,
    shifted_hundredfold,
)

OCTOBER = datetime(2026, 10, 12, tzinfo=UTC)
NOVEMBER = datetime(2026, 11, 9, tzinfo=UTC)
USUAL = {"p4": 391.2, "p6": 96.1, "p14": 7.1}


def times(factor: float) -> dict[str, float]:
    return {size: count * factor for size, count in USUAL.items()}


def candidate(values: Mapping[str, float], code: str = "", counted_ml: float | None = None) -> CandidateSample:
    return CandidateSample(NOVEMBER, values, parse_iso_code(code) if code else None, counted_ml)


def past(values: Mapping[str, float], code: str = "") -> list[PastSample]:
    return [PastSample(OCTOBER, values, parse_iso_code(code) if code else None)]


@pytest.mark.parametrize("values", [{"p4": 7, "p6": 96, "p14": 3}, {"p4": 96, "p14": 97}, {"p5m": 60, "p15m": 2000}])
def test_a_larger_size_with_more_particles_is_doubted(values: dict[str, float]) -> None:
    doubt = order_of_sizes(values)
    assert doubt is not None
    assert doubt.code == "counts_out_of_order"


@pytest.mark.parametrize("values", [USUAL, {"p4": 5.0, "p6": 5.0, "p14": 5.0}, {}, {"p14": 3.0}, {"water": 9.0}])
def test_falling_or_equal_counts_are_in_order(values: dict[str, float]) -> None:
    assert order_of_sizes(values) is None


@pytest.mark.parametrize("code", ["16/14/10", "16/14/≥10", "-/14/10", "*/14/10", ""])
def test_a_code_that_the_counts_make_is_not_doubted(code: str) -> None:
    assert code_agrees_with_counts(candidate(USUAL, code)) is None


def test_a_code_that_the_counts_do_not_make_is_doubted_with_both() -> None:
    doubt = code_agrees_with_counts(candidate(USUAL, "19/17/13"))
    assert doubt is not None
    assert "19/17/13" in doubt.sentence
    assert "16/14/10" in doubt.sentence


def test_a_low_count_agrees_with_its_number() -> None:
    # ISO 4406 example 14/12/≥7: 10 particles counted at 14 µm in 10 mL.
    assert code_agrees_with_counts(candidate({"p4": 100, "p6": 30, "p14": 1}, "14/12/7", counted_ml=10)) is None


def test_a_microscope_code_is_held_against_microscope_counts() -> None:
    values = {"p5m": 2000.0, "p15m": 60.0}
    assert code_agrees_with_counts(candidate(values, "-/18/13")) is None
    assert code_agrees_with_counts(candidate(values, "-/18/12")) is not None


@pytest.mark.parametrize(("factor", "unit"), [(100, "per 100 mL"), (0.01, "per mL"), (80, "per 100 mL")])
def test_a_hundredfold_shift_of_all_sizes_points_at_the_unit(factor: float, unit: str) -> None:
    doubt = shifted_hundredfold(candidate(times(factor)), past(USUAL))
    assert doubt is not None
    assert unit in doubt.settles


@pytest.mark.parametrize("factor", [1, 10, 30, 500])
def test_other_shifts_do_not_point_at_the_unit(factor: float) -> None:
    assert shifted_hundredfold(candidate(times(factor)), past(USUAL)) is None


def test_a_shift_of_two_sizes_does_not_point_at_the_unit() -> None:
    values = {**times(100), "p14": 7.1}
    assert shifted_hundredfold(candidate(values), past(USUAL)) is None


def test_a_hundredfold_shift_shows_against_a_code_too() -> None:
    assert shifted_hundredfold(candidate(times(100)), past({}, "16/14/10")) is not None


@pytest.mark.parametrize(("factor", "word"), [(9, "rose by 3"), (1 / 9, "fell by 3"), (20, "rose by 4")])
def test_three_steps_at_once_are_doubted(factor: float, word: str) -> None:
    doubt = all_counts_moved(candidate(times(factor)), past(USUAL))
    assert doubt is not None
    assert word in doubt.sentence


def test_smaller_or_mixed_moves_are_not_doubted() -> None:
    assert all_counts_moved(candidate(times(7)), past(USUAL)) is None
    assert all_counts_moved(candidate({**times(9), "p14": 7.1}), past(USUAL)) is None
    assert all_counts_moved(candidate(times(9)), []) is None


def test_a_rise_together_with_metals_is_taken_as_real() -> None:
    history = past({**USUAL, "fe": 10.0})
    with_metal = all_counts_moved(candidate({**times(9), "fe": 25.0}), history)
    without = all_counts_moved(candidate({**times(9), "fe": 10.0}), history)
    assert with_metal is not None
    assert without is not None
    assert "take it as real" in with_metal.settles
    assert "needs repeating" in without.settles


def test_the_same_digits_as_last_time_are_doubted() -> None:
    doubt = copy_of_the_last(candidate({**USUAL, "fe": 0.0}), past({**USUAL, "fe": 0.0}))
    assert doubt is not None
    assert "12 Oct 2026" in doubt.sentence


@pytest.mark.parametrize("before", [{**USUAL, "p14": 7.2}, {"p4": 391.2, "p6": 96.1}, {}])
def test_one_other_digit_or_too_few_values_are_no_copy(before: dict[str, float]) -> None:
    assert copy_of_the_last(candidate(USUAL), past(before)) is None


def test_zeros_alone_are_no_copy() -> None:
    metals = {"fe": 0.0, "cu": 0.0, "pb": 0.0}
    assert copy_of_the_last(candidate(metals), past(metals)) is None


@pytest.mark.parametrize("code", [">28/22/18", "*/22/18", "≥22/22/≥18"])
def test_a_code_beyond_the_table_or_with_few_particles_counts_as_a_move(code: str) -> None:
    doubt = all_counts_moved(candidate({}, code), past({}, "18/16/13"))
    assert doubt is not None
    assert "rose" in doubt.sentence


def test_the_same_code_beyond_the_table_has_not_moved() -> None:
    assert all_counts_moved(candidate({}, ">28/22/18"), past({}, ">28/22/18")) is None
