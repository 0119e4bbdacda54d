"""A target or limit as the line that one measurand is judged by. Pure: reads figures by attribute alone."""

from __future__ import annotations

from typing import Final, Protocol

from fleet.codes import ScaleNumber, parse_target_code
from samples.coding.iso4406 import bounds_per_ml
from samples.trends.scales import Scale, ScaleSpec, tidy
from samples.trends.standing import Line

CODE_KEY: Final = "iso4406"
# Where a count stands in a cleanliness code: ≥4, ≥6, ≥14 µm(c), or ≥5 and ≥15 µm under the microscope.
CODE_PLACES: Final = {"p4": 0, "p6": 1, "p14": 2, "p5m": 1, "p15m": 2}
UNSET: Final = Line()


class HasFigure(Protocol):
    """A target or limit, as far as drawing its line needs to know it."""

    @property
    def code(self) -> str: ...
    @property
    def low(self) -> float | None: ...
    @property
    def high(self) -> float | None: ...
    @property
    def basis(self) -> str: ...


def figure_key(measurand_key: str) -> str:
    """The measurand a figure is set on: a count is judged by the cleanliness code."""
    return CODE_KEY if measurand_key in CODE_PLACES else measurand_key


def code_number(figure: HasFigure | None, measurand_key: str) -> int | None:
    """The number that a code figure holds for one count, None where it leaves that size out."""
    if figure is None or not figure.code or measurand_key not in CODE_PLACES:
        return None
    return _size(figure.code, measurand_key).number


def _size(code: str, measurand_key: str) -> ScaleNumber:
    return parse_target_code(code).sizes[CODE_PLACES[measurand_key]]


def line_of(figure: HasFigure | None, measurand_key: str, spec: ScaleSpec) -> Line:
    """The line in the numbers that `spec` takes: per mL for counts, % change on the percent scale, else the unit.

    A code number stands for the upper bound of its row in ISO 4406, inclusive. A figure that is a change from the new
    oil gives no line where the new oil's value is not known.
    """
    if figure is None:
        return UNSET
    if measurand_key in CODE_PLACES:
        return _code_line(figure, measurand_key)
    return Line(high=_side(figure.high, figure.basis, spec), low=_side(figure.low, figure.basis, spec))


def _code_line(figure: HasFigure, measurand_key: str) -> Line:
    if not figure.code:
        return UNSET
    size = _size(figure.code, measurand_key)
    return Line(high=bounds_per_ml(size)[1]) if size.is_measured else UNSET


def _side(side: float | None, basis: str, spec: ScaleSpec) -> float | None:
    if side is None:
        return None
    if basis == "absolute":
        return _absolute(side, spec)
    if spec.baseline is None:
        return None
    if spec.scale is not Scale.PERCENT:
        return tidy(spec.baseline * (1.0 + side / 100.0) if basis == "percent" else spec.baseline + side)
    return side if basis == "percent" else tidy(100.0 * side / spec.baseline)


def _absolute(side: float, spec: ScaleSpec) -> float | None:
    if spec.scale is not Scale.PERCENT:
        return side
    return None if spec.baseline is None else tidy(100.0 * (side / spec.baseline - 1.0))
