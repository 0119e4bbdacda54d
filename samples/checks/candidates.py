"""What the checks look at and what they say, as plain values.

``values`` maps measurand keys (``samples.readings``) to figures in canonical units; only exact values belong there,
neither bounds nor intervals. A code without counts goes into ``code``. Times must all be aware, or all be naive.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime
from typing import Final

from fleet.codes import LARGEST_NUMBER, IsoCode, ScaleNumber
from samples.coding.iso4406 import code_scale
from samples.readings import COUNTER_SIZES, MICROSCOPE_SIZES

SIZE_LABELS: Final = {"p4": "≥4 µm", "p6": "≥6 µm", "p14": "≥14 µm", "p5m": "≥5 µm", "p15m": "≥15 µm"}


@dataclass(frozen=True, slots=True)
class Doubt:
    """A reason to look twice: a stable code, what was seen, and what would settle it. Never a verdict."""

    code: str
    sentence: str
    settles: str


@dataclass(frozen=True, slots=True)
class CandidateSample:
    """The sample at hand. ``counted_ml`` [mL] is the volume the counts were made on, where known.

    ``reason`` is why it was drawn, as the sample record names it: "routine", "resample", "after_correction", ….
    """

    drawn_at: datetime
    values: Mapping[str, float] = field(default_factory=dict)
    code: IsoCode | None = None
    counted_ml: float | None = None
    machine_hours: float | None = None
    reason: str = ""


@dataclass(frozen=True, slots=True)
class PastSample:
    """An accepted sample of the same sample point and oil charge."""

    drawn_at: datetime
    values: Mapping[str, float] = field(default_factory=dict)
    code: IsoCode | None = None
    machine_hours: float | None = None


@dataclass(frozen=True, slots=True)
class PastEvent:
    """Something done to the oil. ``name`` is for people ("offline filtration"); ``cleans``: it takes particles out."""

    ended_at: datetime
    name: str
    cleans: bool


@dataclass(frozen=True, slots=True)
class Expectation:
    """A forecast for this sample, on the measurand's own scale: observed figure, mean and spread of one sample.

    ``label`` is for people: "Water", "The count ≥14 µm".
    """

    measurand: str
    label: str
    observed: float
    mean: float | None
    scale: float | None


def day_of(moment: datetime) -> str:
    """A day as people read it: 9 Nov 2026."""
    return f"{moment:%-d %b %Y}"


def latest_before(drawn_at: datetime, history: Sequence[PastSample]) -> PastSample | None:
    """The last sample of ``history`` drawn before ``drawn_at``, whatever the order of ``history``."""
    earlier = [past for past in history if past.drawn_at < drawn_at]
    return max(earlier, key=lambda past: past.drawn_at, default=None)


def count_places(sample: CandidateSample | PastSample) -> dict[str, float]:
    """Place of each count on the continuous code scale [code steps]; of a code without counts its middle.

    In a code, ``>28`` and ``*`` stand where 29 would, and ``≥n`` where n does.
    """
    places = {size: code_scale(sample.values[size]) for size in SIZE_LABELS if size in sample.values}
    return places or _code_places(sample.code)


def steps_moved(candidate: CandidateSample, history: Sequence[PastSample]) -> dict[str, float]:
    """By how many code steps each size moved since the last sample; only where all three (or both) sizes are known."""
    previous = latest_before(candidate.drawn_at, history)
    if previous is None:
        return {}
    now, before = count_places(candidate), count_places(previous)
    for sizes in (COUNTER_SIZES, MICROSCOPE_SIZES):
        if all(size in now and size in before for size in sizes):
            return {size: now[size] - before[size] for size in sizes}
    return {}


def _code_places(code: IsoCode | None) -> dict[str, float]:
    if code is None:
        return {}
    names = ("", *MICROSCOPE_SIZES) if code.is_two_number else COUNTER_SIZES
    return {
        name: number - 0.5
        for name, size in zip(names, code.sizes, strict=True)
        if name and (number := _least_number(size)) is not None
    }


def _least_number(size: ScaleNumber) -> int | None:
    """The scale number that stands for one place of a code: beyond the table and too many to count are the next one."""
    if size.mark in (">", "*"):
        return LARGEST_NUMBER + 1
    return size.number
