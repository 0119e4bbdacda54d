"""All checks of one sample, in the order a person reads them."""

from collections.abc import Sequence
from datetime import datetime

from samples.checks.candidates import SIZE_LABELS, CandidateSample, Doubt, Expectation, PastEvent, PastSample
from samples.checks.counts import (
    all_counts_moved,
    code_agrees_with_counts,
    copy_of_the_last,
    order_of_sizes,
    shifted_hundredfold,
)
from samples.checks.forecasts import far_off_the_forecast
from samples.checks.timing import (
    drawn_after_cleaning,
    drawn_before_the_charge,
    drawn_in_the_future,
    drawn_twice_a_day,
    hours_backwards,
    hours_faster_than_the_clock,
)


def hard_errors(candidate: CandidateSample, as_of: datetime) -> list[Doubt]:
    """What cannot be true at all, so that a form refuses it: sizes out of order, drawn in the future."""
    return _found(order_of_sizes(candidate.values), drawn_in_the_future(candidate, as_of))


def run_checks(
    candidate: CandidateSample,
    history: Sequence[PastSample],
    *,
    events: Sequence[PastEvent] = (),
    expectations: Sequence[Expectation] = (),
    charge_began: datetime | None = None,
    same_point: Sequence[PastSample] = (),
) -> list[Doubt]:
    """Every doubt about a sample; none is a rejection.

    Args:
        history: accepted samples of the same point and oil charge, in any order; later ones are not looked at.
        events: what was done to the reservoir's oil.
        expectations: one a measurand that was forecast.
        charge_began: when the oil in the reservoir was filled in; None where not known.
        same_point: all samples of the same point that are not set aside, also those in doubt and those drawn later.

    A hundredfold shift is told instead of "all counts moved" and "far off" for the counts, since it brings both along.
    """
    shifted = shifted_hundredfold(candidate, history)
    told = SIZE_LABELS if shifted else {}
    return _found(
        order_of_sizes(candidate.values),
        code_agrees_with_counts(candidate),
        shifted,
        None if shifted else all_counts_moved(candidate, history),
        *far_off_the_forecast(each for each in expectations if each.measurand not in told),
        copy_of_the_last(candidate, history),
        hours_backwards(candidate, history),
        hours_faster_than_the_clock(candidate, history),
        drawn_twice_a_day(candidate, same_point),
        drawn_before_the_charge(candidate, charge_began),
        drawn_after_cleaning(candidate, events),
    )


def _found(*doubts: Doubt | None) -> list[Doubt]:
    return [doubt for doubt in doubts if doubt is not None]
