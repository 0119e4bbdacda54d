"""Where one measurand stands against its target and limit, also when the value is only known to lie in a range."""

from collections.abc import Iterable
from dataclasses import dataclass
from enum import StrEnum
from math import inf, isfinite, isnan

from samples.trends.scales import Scale, ScaleSpec, figure_to_y, value_to_figure, y_to_figure


class Standing(StrEnum):
    """The five standings, worst first where they are ranked."""

    PAST_LIMIT = "past_limit"
    OVER_TARGET = "over_target"
    CANNOT_TELL = "cannot_tell"
    WITHIN = "within"
    NO_CURRENT_SAMPLE = "no_current_sample"


class Passed(StrEnum):
    """Whether a value is beyond a line."""

    YES = "yes"
    NO = "no"
    UNSURE = "unsure"


@dataclass(frozen=True)
class Line:
    """A target or a limit: the highest and the lowest figure that still meet it; None where that side is free.

    For a cleanliness code: the upper bound of the code number, per mL (ISO 4406: up to and including).
    """

    high: float | None = None
    low: float | None = None

    @property
    def is_set(self) -> bool:
        """Whether there is any figure to hold."""
        return self.high is not None or self.low is not None


@dataclass(frozen=True)
class Known:
    """What is known of a value, in figures: it lies from low to high; `above_low` where low itself is excluded."""

    low: float
    high: float
    above_low: bool = False


def known_range(value: float, low: float, high: float, qualifier: str, spec: ScaleSpec) -> Known:
    """What a result says: a value, an interval (low, high], or a bound ('<', '>', '≥'); NaN where not given.

    A '≥' interval is open above: fewer than 20 particles were counted and the true number may be higher (ISO 4406).
    """
    if not isnan(value):
        return _qualified(value_to_figure(value, spec), qualifier)
    bottom = -inf if isnan(low) else value_to_figure(low, spec)
    top = inf if isnan(high) or qualifier in {"≥", ">"} else value_to_figure(high, spec)
    # A code's number begins above its lower bound; a quantity reported as "≥ 500" may be 500.
    return Known(bottom, top, above_low=spec.scale is Scale.COUNT or qualifier != "≥")


def passed(known: Known, line: Line) -> Passed:
    """Whether a value that lies in `known` is beyond `line`: surely, surely not, or it cannot be said."""
    verdicts = []
    if line.high is not None:
        beyond = known.low > line.high or (known.above_low and known.low == line.high)
        verdicts.append(_verdict(beyond, known.high <= line.high))
    if line.low is not None:
        verdicts.append(_verdict(known.high < line.low, known.low >= line.low))
    if Passed.YES in verdicts:
        return Passed.YES
    return Passed.UNSURE if Passed.UNSURE in verdicts else Passed.NO


def widen(known: Known, noise: float, spec: ScaleSpec) -> Known:
    """The same knowledge with `noise` (y) allowed on either side; nought changes nothing."""
    if noise <= 0.0:
        return known
    low = _shift(known.low, -noise, spec)
    return Known(low, _shift(known.high, noise, spec), known.above_low)


def stand(known: Known, target: Line, limit: Line) -> Standing:
    """The standing of a current value. Without a target the limit alone is judged; with neither it cannot be told."""
    at_limit = passed(known, limit)
    if at_limit is Passed.YES:
        return Standing.PAST_LIMIT
    judged = target if target.is_set else limit
    if not judged.is_set:
        return Standing.CANNOT_TELL
    at_target = passed(known, judged)
    if at_target is Passed.YES:
        return Standing.OVER_TARGET
    return Standing.CANNOT_TELL if Passed.UNSURE in (at_target, at_limit) else Standing.WITHIN


def worst(standings: Iterable[Standing]) -> Standing:
    """A reservoir's standing from those of its measurands; *no current sample* only where none has one."""
    order = list(Standing)
    return min(standings, key=order.index, default=Standing.NO_CURRENT_SAMPLE)


def _qualified(figure: float, qualifier: str) -> Known:
    if qualifier == "<":
        return Known(-inf, figure)
    if qualifier in {"≥", ">"}:
        return Known(figure, inf, above_low=qualifier == ">")
    return Known(figure, figure)


def _verdict(beyond: bool, inside: bool) -> Passed:
    if beyond:
        return Passed.YES
    return Passed.NO if inside else Passed.UNSURE


def _shift(figure: float, by: float, spec: ScaleSpec) -> float:
    return float(y_to_figure(figure_to_y(figure, spec) + by, spec)) if isfinite(figure) else figure
