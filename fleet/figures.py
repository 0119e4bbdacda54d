"""Which target or limit a sample is judged by: the nearest scope wins, and within a scope the newest of its day.

Pure: works on the rows it is given by attribute alone, so that it can be tested without a database.
"""

from collections.abc import Iterable
from datetime import date
from typing import Final, Literal, Protocol, TypeVar

from fleet.codes import parse_target_code

# Nearest first; the same words as the figure's scope column.
NEARNESS: Final = ("reservoir", "fluid", "class", "plant")


class HasKey(Protocol):
    """A measurand, as far as choosing a figure needs to know it."""

    @property
    def key(self) -> str: ...


class Dated(Protocol):
    """A target or limit, as far as choosing needs to know it."""

    @property
    def scope(self) -> str: ...
    @property
    def measurand(self) -> HasKey: ...
    @property
    def fluid_id(self) -> int | None: ...
    @property
    def valid_from(self) -> date: ...


class Sided(Protocol):
    """A target or limit, as far as holding one against the other needs to know it."""

    @property
    def code(self) -> str: ...
    @property
    def low(self) -> float | None: ...
    @property
    def high(self) -> float | None: ...
    @property
    def basis(self) -> str: ...


Side = Literal["code", "low", "high"]
F = TypeVar("F", bound=Dated)


def figure_for(figures: Iterable[F], measurand_key: str, day: date, fluid_id: int | None) -> F | None:
    """The figure that judges a sample of one reservoir drawn on `day`, or None when none was set by then.

    `figures`: every target (or every limit) that could apply to that reservoir, as `FigureQuerySet.for_reservoir`
    gives them, in any order; they are taken to belong to its site and class. `fluid_id`: the oil that was in it on
    that day, None when not on record; a figure for another oil never applies. The nearest scope wins (reservoir, then
    fluid, class, plant) however old its figure is; within a scope the latest `valid_from` not after `day`. Two rows of
    the same scope and day cannot both stand in the database.

    >>> figure_for([], "water", date(2026, 1, 1), None) is None
    True
    """
    standing = [
        figure
        for figure in figures
        if figure.measurand.key == measurand_key
        and figure.valid_from <= day
        and (figure.scope != "fluid" or (fluid_id is not None and figure.fluid_id == fluid_id))
    ]
    return min(standing, key=_nearest_then_newest, default=None)


def _nearest_then_newest(figure: Dated) -> tuple[int, int]:
    return NEARNESS.index(figure.scope), -figure.valid_from.toordinal()


def side_beyond(target: Sided, limit: Sided) -> Side | None:
    """Where a target asks for less than its limit does, or None where the two can stand together.

    Codes are compared size by size, values side by side; a size or side that one of them leaves out is not compared,
    equal figures fit, and figures of different bases (a value, a change from new oil) are not compared at all.
    """
    if target.basis != limit.basis:
        return None
    if target.code and limit.code:
        return "code" if _is_dirtier(target.code, limit.code) else None
    if target.high is not None and limit.high is not None and target.high > limit.high:
        return "high"
    if target.low is not None and limit.low is not None and target.low < limit.low:
        return "low"
    return None


def _is_dirtier(target: str, limit: str) -> bool:
    pairs = zip(parse_target_code(target).sizes, parse_target_code(limit).sizes, strict=True)
    return any(own.number > line.number for own, line in pairs if own.number is not None and line.number is not None)
