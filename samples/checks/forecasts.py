"""A sample against what was forecast for it."""

from collections.abc import Iterable, Sequence
from typing import Final

from samples.checks.candidates import Doubt, Expectation

LARGEST_Z: Final = 3.0


def far_off_the_forecast(expectations: Iterable[Expectation]) -> list[Doubt]:
    """Figures more than three forecast spreads from the forecast mean, on their own scales; none without a forecast.

    One doubt for all that are above and one for all that are below: one repeat settles them together.
    """
    judged = [(each.label, _deviation(each)) for each in expectations]
    sides = (
        ("above", [label for label, z in judged if z > LARGEST_Z]),
        ("below", [label for label, z in judged if z < -LARGEST_Z]),
    )
    return [_doubt(labels, side) for side, labels in sides if labels]


def _deviation(expectation: Expectation) -> float:
    mean, scale = expectation.mean, expectation.scale
    if mean is None or scale is None or scale <= 0:
        return 0.0
    return (expectation.observed - mean) / scale


def _doubt(labels: Sequence[str], side: str) -> Doubt:
    return Doubt(
        "far_off_forecast",
        f"{_listed(labels)} {'is' if len(labels) == 1 else 'are'} far {side} what the history led to expect.",
        "The sample needs repeating. If the repeat agrees, the change is real.",
    )


def _listed(labels: Sequence[str]) -> str:
    """“A”, “A and b”, “A, b and c”: only the first keeps its capital."""
    first, *rest = labels
    lowered = [label[:1].lower() + label[1:] for label in rest]
    return first if not lowered else f"{', '.join([first, *lowered[:-1]])} and {lowered[-1]}"
