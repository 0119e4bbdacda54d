"""Particle counts to ISO 4406 scale numbers and back.

Table 1 of ISO 4406 (unchanged from the 1999 to the 2021 edition) is kept in particles per 100 mL, where every bound is
a whole number, so no comparison ever meets a binary fraction. The bounds are rounded, not powers of two: never compute
them.
"""

from bisect import bisect_left
from decimal import Decimal, InvalidOperation
from itertools import pairwise
from typing import Final, Literal, overload

import numpy as np
from numpy.typing import NDArray

from fleet.codes import NOT_MEASURED, TOO_MANY_TO_COUNT, CodeError, IsoCode, ScaleNumber

# Upper bound of scale numbers 0 to 28, particles per 100 mL; the bound itself belongs to the number.
UPPER_PER_100ML: Final = (
    *(1, 2, 4, 8, 16, 32, 64, 130, 250, 500),
    *(1_000, 2_000, 4_000, 8_000, 16_000, 32_000, 64_000, 130_000, 250_000, 500_000),
    *(1_000_000, 2_000_000, 4_000_000, 8_000_000, 16_000_000, 32_000_000, 64_000_000, 130_000_000, 250_000_000),
)
LARGEST: Final = len(UPPER_PER_100ML) - 1
FEWEST_FOR_A_FIRM_NUMBER: Final = 20
SMALLEST_ON_SCALE_PER_ML: Final = 0.005
# 4 µm spheres packed without gaps come to about 3e10 in a millilitre.
MOST_IN_A_ML: Final = Decimal(30_000_000_000)

Count = Decimal | int | float | str | None
Basis = Literal["per_ml", "per_100ml"]


def scale_number(per_100ml: Decimal | int, raw_count: Decimal | int | None = None) -> ScaleNumber:
    """The ISO 4406 scale number of a cumulative count.

    Args:
        per_100ml: particles of at least one size in 100 mL [1/100 mL], 0 or more.
        raw_count: particles really counted in that size [-]; below 20 the number gets ``≥``. None: not known, no mark.

    Above 250 000 000 per 100 mL the answer is ``>28``.

    Raises:
        CodeError: ``count_negative``, ``count_not_a_number`` or ``count_impossible``.

    >>> str(scale_number(8000)), str(scale_number(8001)), str(scale_number(100, raw_count=10))
    ('13', '14', '≥7')
    """
    count = _checked(Decimal(per_100ml), limit=MOST_IN_A_ML * 100)
    number = bisect_left(UPPER_PER_100ML, count)
    if number > LARGEST:
        return ScaleNumber(LARGEST, ">")
    low = raw_count is not None and raw_count < FEWEST_FOR_A_FIRM_NUMBER
    return ScaleNumber(number, "≥" if low else "")


def code_from_counts(
    four: Count, six: Count, fourteen: Count, *, counted_ml: Count = None, microscope: bool = False
) -> IsoCode:
    """The ISO 4406 code of three cumulative counts.

    Args:
        four, six, fourteen: particles of at least 4, 6, 14 µm(c) [1/mL]; None where not measured, ``"*"`` where too
            many to count. Text and floats are taken digit by digit as written.
        counted_ml: volume counted [mL]; with it, sizes with fewer than 20 particles counted get ``≥``. The product
            is not rounded: 19.95 particles are fewer than 20.
        microscope: counts are for 5 and 15 µm by longest dimension (ISO 4407), given as ``six`` and ``fourteen``.

    Raises:
        CodeError: ``count_negative``, ``count_not_a_number``, ``count_impossible``, ``counts_out_of_order``,
            ``counted_volume_not_positive``, ``microscope_has_no_four``, ``code_empty``.

    >>> str(code_from_counts(2178, 847, 63))
    '18/17/13'
    >>> str(code_from_counts(100, 30, "1.0", counted_ml=10))
    '14/12/≥7'
    """
    if microscope and four is not None:
        raise CodeError(
            "microscope_has_no_four",
            "A microscope count has no 4 µm size. Leave it empty, or choose the automatic counter.",
        )
    volume = _volume(counted_ml)
    counts = [count if count == "*" else _decimal(count) for count in (four, six, fourteen)]
    _check_order([count for count in counts if isinstance(count, Decimal)])
    return IsoCode(*(_number_of(count, volume) for count in counts))


def bounds_per_ml(number: ScaleNumber) -> tuple[float, float | None]:
    """The interval (low, high] of particles per mL [1/mL] that a scale number stands for.

    ``high`` is None where the interval is open above: ``>28`` and every ``≥``. Number 0 begins at 0 and includes it.

    Raises:
        CodeError: ``size_has_no_bounds`` for ``-`` and ``*``, which say nothing about the count.

    >>> bounds_per_ml(ScaleNumber(13))
    (40.0, 80.0)
    """
    if number.number is None:
        raise CodeError("size_has_no_bounds", f"“{number}” gives no count: the size was not measured or not countable.")
    if number.mark == ">":
        return UPPER_PER_100ML[LARGEST] / 100, None
    low = UPPER_PER_100ML[number.number - 1] / 100 if number.number else 0.0
    return low, None if number.mark == "≥" else UPPER_PER_100ML[number.number] / 100


@overload
def code_scale(per_ml: float) -> float: ...
@overload
def code_scale(per_ml: NDArray[np.float64]) -> NDArray[np.float64]: ...
def code_scale(per_ml: float | NDArray[np.float64]) -> float | NDArray[np.float64]:
    """Place of a count on the continuous code scale, y = log2(N / 0.01); one ISO 4406 step is 1.

    Args:
        per_ml: particles per mL [1/mL], a number or an array of any shape. Counts below 0.005, zero among them, are
            held at 0.005 (y = -1), so that every count has a finite place. NaN stays NaN.

    >>> code_scale(0.64)
    6.0
    """
    held = np.maximum(np.asarray(per_ml, dtype=np.float64), SMALLEST_ON_SCALE_PER_ML)
    y: NDArray[np.float64] = np.log2(held / 0.01)
    return float(y) if y.ndim == 0 else y


def per_ml_at(y: float) -> float:
    """Particles per mL [1/mL] at place ``y`` of the continuous code scale; the inverse of `code_scale`."""
    return float(0.01 * 2.0**y)


def per_ml_from(count: Decimal, basis: Basis) -> Decimal:
    """A count [1/mL or 1/100 mL, by ``basis``] in particles per mL [1/mL], exact to the last digit."""
    return _shifted(count, -2) if basis == "per_100ml" else count


def _number_of(count: Decimal | str | None, volume: Decimal | None) -> ScaleNumber:
    if count is None:
        return NOT_MEASURED
    if isinstance(count, str):
        return TOO_MANY_TO_COUNT
    return scale_number(_shifted(count, 2), None if volume is None else count * volume)


def _decimal(count: Count) -> Decimal | None:
    if count is None:
        return None
    try:
        value = Decimal(str(count).strip())
    except InvalidOperation as error:
        raise CodeError(
            "count_not_a_number", f"“{str(count)[:24]}” is not a count. Write a number of particles."
        ) from error
    return _checked(value, limit=MOST_IN_A_ML)


def _checked(count: Decimal, limit: Decimal) -> Decimal:
    if not count.is_finite():
        raise CodeError("count_not_a_number", f"“{count}” is not a count. Write a number of particles.")
    if count < 0:
        raise CodeError("count_negative", f"A count cannot be negative ({count}). Check the sign.")
    if count > limit:
        raise CodeError(
            "count_impossible", f"{count:.3g} particles do not fit into the oil. Check the number and its unit."
        )
    return count


def _volume(counted_ml: Count) -> Decimal | None:
    volume = _decimal(counted_ml)
    if volume is not None and volume <= 0:
        raise CodeError(
            "counted_volume_not_positive", "The counted volume must be more than 0 mL. Leave it empty if unknown."
        )
    return volume


def _check_order(counts: list[Decimal]) -> None:
    for small, large in pairwise(counts):
        if large > small:
            raise CodeError(
                "counts_out_of_order",
                f"The count of the larger size ({large:f}) is higher than that of the smaller one ({small:f}). Counts "
                "include everything above their size, so they must fall. Check the order of the numbers.",
            )


def _shifted(value: Decimal, places: int) -> Decimal:
    """``value`` × 10^places without any rounding."""
    sign, digits, exponent = value.as_tuple()
    return Decimal((sign, digits, int(exponent) + places))
