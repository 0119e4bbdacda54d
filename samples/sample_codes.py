"""The ISO 4406 code of a sample from its current results. Pure: reads results by attribute alone."""

from __future__ import annotations

from collections.abc import Iterable
from decimal import Decimal
from typing import Final, Protocol

from fleet.codes import NOT_MEASURED, CodeError, IsoCode, ScaleNumber, parse_iso_code
from samples.coding.iso4406 import scale_number

COUNTER_PLACES: Final = ("p4", "p6", "p14")
MICROSCOPE_PLACES: Final = (None, "p5m", "p15m")


class HasKey(Protocol):
    @property
    def key(self) -> str: ...


class HasCount(Protocol):
    """A result, as far as coding needs to know it; values in particles per mL."""

    @property
    def measurand(self) -> HasKey: ...
    @property
    def value(self) -> float | None: ...
    @property
    def low(self) -> float | None: ...
    @property
    def high(self) -> float | None: ...
    @property
    def qualifier(self) -> str: ...
    @property
    def counted_ml(self) -> float | None: ...
    @property
    def reported_text(self) -> str: ...
    @property
    def reported_unit(self) -> str: ...


def code_of(results: Iterable[HasCount]) -> IsoCode | None:
    """The code of one sample, counter sizes before microscope sizes; None where nothing was counted."""
    by_key = {result.measurand.key: result for result in results}
    for places in (COUNTER_PLACES, MICROSCOPE_PLACES):
        found = [by_key.get(key) if key else None for key in places]
        if any(result is not None for result in found):
            return _code([NOT_MEASURED if result is None else number_of(result) for result in found])
    return None


def code_text(results: Iterable[HasCount]) -> str:
    """As `code_of`, printed; empty where there is none."""
    code = code_of(results)
    return "" if code is None else str(code)


def number_of(result: HasCount) -> ScaleNumber:
    """The scale number of one count: from the count itself, from the code as reported, or from a bound."""
    if result.value is not None:
        count = Decimal(repr(result.value))
        raw = None if result.counted_ml is None else count * Decimal(repr(result.counted_ml))
        return scale_number(count * 100, raw)
    if result.reported_unit == "ISO 4406":
        return parse_iso_code(f"-/-/{result.reported_text}").fourteen
    if result.high is not None:
        return scale_number(Decimal(repr(result.high)) * 100)
    return _at_least(result.low or 0.0)


def _at_least(low: float) -> ScaleNumber:
    number = scale_number(Decimal(repr(low)) * 100)
    return number if number.mark == ">" else ScaleNumber(number.number, "≥")


def _code(numbers: list[ScaleNumber]) -> IsoCode | None:
    try:
        return IsoCode(*numbers)
    except CodeError:
        return None
