"""A sample against what was forecast for it."""

from typing import Final

from samples.checks.candidates import Doubt, Expectation

LARGEST_Z: Final = 3.0


def far_off_the_forecast(expectation: Expectation) -> Doubt | None:
    """More than three forecast scales from the forecast mean, on the measurand's own scale; none without a forecast."""
    mean, scale = expectation.mean, expectation.scale
    if mean is None or scale is None or scale <= 0:
        return None
    z = (expectation.observed - mean) / scale
    if abs(z) <= LARGEST_Z:
        return None
    return Doubt(
        "far_off_forecast",
        f"{expectation.label} is far {'above' if z > 0 else 'below'} what the history led to expect.",
        "The sample needs repeating. If the repeat agrees, the change is real.",
    )
