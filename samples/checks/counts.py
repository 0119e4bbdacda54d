"""Checks of particle counts: with themselves, with the stated code, with the sample before."""

from collections.abc import Mapping, Sequence
from itertools import pairwise
from math import log2
from typing import Final

from fleet.codes import CodeError, IsoCode
from samples.checks.candidates import (
    SIZE_LABELS,
    CandidateSample,
    Doubt,
    PastSample,
    day_of,
    latest_before,
    steps_moved,
)
from samples.coding.iso4406 import code_from_counts
from samples.readings import COUNTER_SIZES, ELEMENTS, MICROSCOPE_SIZES

HUNDREDFOLD_STEPS: Final = log2(100)
_UNIT_TOLERANCE: Final = 0.75
_LARGE_MOVE: Final = 3.0
_FEWEST_TO_COMPARE: Final = 3
_WEAR_METALS: Final = ("fe", "cu", "pb", "sn", "al", "cr", "ni")
_METAL_RISE: Final = 1.5


def order_of_sizes(values: Mapping[str, float]) -> Doubt | None:
    """Counts are cumulative (ISO 4406): a larger size holds no more particles than a smaller one."""
    for sizes in (COUNTER_SIZES, MICROSCOPE_SIZES):
        known = [size for size in sizes if size in values]
        for small, large in pairwise(known):
            if values[large] > values[small]:
                return Doubt(
                    "counts_out_of_order",
                    f"The count {SIZE_LABELS[large]} ({values[large]:g} per mL) is higher than the count "
                    f"{SIZE_LABELS[small]} ({values[small]:g} per mL), but it is part of it.",
                    "Check the order of the counts on the laboratory's report.",
                )
    return None


def code_agrees_with_counts(candidate: CandidateSample) -> Doubt | None:
    """The stated code against the code of the counts (ISO 4406, Table 1), by size; ``≥`` marks are not compared."""
    computed = _computed_code(candidate)
    if computed is None or candidate.code is None or not _differ(candidate.code, computed):
        return None
    return Doubt(
        "code_disagrees_with_counts",
        f"The stated code is {candidate.code}, but the counts make {computed}.",
        "Ask the laboratory which is right. The counts are kept as data, the code as stated.",
    )


def shifted_hundredfold(candidate: CandidateSample, history: Sequence[PastSample]) -> Doubt | None:
    """All sizes moved together by about 6.64 code steps, log2(100): per mL against per 100 mL."""
    steps = steps_moved(candidate, history)
    for direction, word, unit in ((1, "higher", "per 100 mL"), (-1, "lower", "per mL")):
        if steps and all(abs(step * direction - HUNDREDFOLD_STEPS) <= _UNIT_TOLERANCE for step in steps.values()):
            return Doubt(
                "counts_shifted_hundredfold",
                f"All counts are about a hundred times {word} than last time, as if the unit had changed.",
                f"Look at the unit on the report: if it says {unit}, choose {unit}.",
            )
    return None


def all_counts_moved(candidate: CandidateSample, history: Sequence[PastSample]) -> Doubt | None:
    """All sizes moved by three code steps or more in one direction since the last sample."""
    steps = steps_moved(candidate, history)
    rose = all(step >= _LARGE_MOVE for step in steps.values())
    fell = all(step <= -_LARGE_MOVE for step in steps.values())
    if not steps or not (rose or fell):
        return None
    smallest = int(min(abs(step) for step in steps.values()))
    return Doubt(
        "all_counts_moved",
        f"All counts {'rose' if rose else 'fell'} by {smallest} code steps or more at once.",
        _what_settles_a_move(candidate, history, rose=rose),
    )


def copy_of_the_last(candidate: CandidateSample, history: Sequence[PastSample]) -> Doubt | None:
    """Every value that both samples have is identical to the last digit, and at least three of them are not zero."""
    previous = latest_before(candidate.drawn_at, history)
    if previous is None:
        return None
    shared = candidate.values.keys() & previous.values.keys()
    same = all(candidate.values[name] == previous.values[name] for name in shared)
    telling = sum(candidate.values[name] != 0 for name in shared)
    if not same or telling < _FEWEST_TO_COMPARE:
        return None
    return Doubt(
        "copy_of_the_last",
        f"All {len(shared)} values are the same as in the sample of {day_of(previous.drawn_at)}.",
        "Compare with the laboratory's report: the figures may be those of the sample before.",
    )


def _computed_code(candidate: CandidateSample) -> IsoCode | None:
    values = candidate.values
    by_counter = any(size in values for size in COUNTER_SIZES)
    four, six, fourteen = (values.get(size) for size in (COUNTER_SIZES if by_counter else ("", *MICROSCOPE_SIZES)))
    try:
        return code_from_counts(four, six, fourteen, counted_ml=candidate.counted_ml)
    except CodeError:
        return None


def _differ(stated: IsoCode, computed: IsoCode) -> bool:
    pairs = zip(stated.sizes, computed.sizes, strict=True)
    return any(left.rank != right.rank for left, right in pairs if left.mark not in ("-", "*") and right.is_measured)


def _what_settles_a_move(candidate: CandidateSample, history: Sequence[PastSample], *, rose: bool) -> str:
    if not rose:
        return "Offline filtration or an oil change explains it: log the event. Otherwise the sample needs repeating."
    if _metals_rose(candidate, history):
        return "Wear metals rose as well, so take it as real until a repeated sample says otherwise."
    return "No metal rose with it. The sample needs repeating with a clean bottle and a flushed sample point."


def _metals_rose(candidate: CandidateSample, history: Sequence[PastSample]) -> bool:
    previous = latest_before(candidate.drawn_at, history)
    before = {} if previous is None else previous.values
    metals = [name for name in ELEMENTS if name in _WEAR_METALS and name in candidate.values and name in before]
    return any(
        candidate.values[name] >= _METAL_RISE * before[name] and candidate.values[name] - before[name] >= 2
        for name in metals
    )
